"""A first calculation folder, complete enough to be evaluated as it is."""

from __future__ import annotations

import shutil
import tempfile
from importlib import resources
from pathlib import Path

from reportgen.errors import Fault, InputError

__all__ = ["start"]


def start(folder: Path) -> list[Path]:
    """Write the starter into a folder that does not exist or is empty; returns the files written.

    Everything is written into a folder beside it that is then renamed: the folder is there whole or not at all, and
    nothing is ever overwritten. Raises InputError when the folder holds something or cannot be made.
    """
    taken = folder.exists() or folder.is_symlink()
    if taken and not (folder.is_dir() and not folder.is_symlink() and not any(folder.iterdir())):
        raise InputError(
            Fault(
                "There is something at this place already; nothing was written.",
                file=folder.as_posix(),
                expected="the name of a folder that does not exist or is empty",
            )
        )
    folder.parent.mkdir(parents=True, exist_ok=True)
    beside = Path(tempfile.mkdtemp(prefix=f".{folder.name}-", dir=folder.parent))
    try:
        starter = resources.files("reportgen.spec") / "starter"
        names = sorted(entry.name for entry in starter.iterdir() if entry.is_file())
        for name in names:
            (beside / name).write_bytes((starter / name).read_bytes())
        # A folder for temporary files is closed to others; a calculation is not.
        beside.chmod(0o755)
        if taken:
            folder.rmdir()  # refuses when something has come into it meanwhile
        beside.rename(folder)
    except BaseException:
        shutil.rmtree(beside, ignore_errors=True)
        raise
    return [folder / name for name in names]

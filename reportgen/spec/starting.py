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

    Everything is written into a temporary folder and then renamed, so that nothing half written is ever found, and
    nothing is ever overwritten. Raises InputError when there is something already, OSError when it cannot be written.
    """
    empty = folder.is_dir() and not any(folder.iterdir())
    if not empty and (folder.exists() or folder.is_symlink()):
        raise InputError(
            Fault(
                "There is something at this place already; nothing was written.",
                file=folder.as_posix(),
                expected="the name of a folder that does not exist or is empty",
            )
        )
    above = next(place for place in folder.absolute().parents if place.exists())
    if not above.is_dir():
        raise InputError(
            Fault(
                "A file is in the way; nothing was written.",
                file=folder.as_posix(),
                found=f"the file {above.name}",
                expected="a place for the new folder below other folders",
            )
        )
    if not empty:
        folder.parent.mkdir(parents=True, exist_ok=True)
    beside = Path(tempfile.mkdtemp(prefix=".starting-", dir=folder if empty else folder.parent))
    try:
        starter = resources.files("reportgen.spec") / "starter"
        names = sorted(entry.name for entry in starter.iterdir() if entry.is_file())
        for name in names:
            (beside / name).write_bytes((starter / name).read_bytes())
        if empty:
            # The folder may be the one the user stands in: it stays, and the files move into it.
            for name in names:
                (beside / name).rename(folder / name)
            beside.rmdir()
        else:
            beside.chmod(0o755)  # a temporary folder is closed to others; a calculation is not
            beside.rename(folder)
    except BaseException:
        shutil.rmtree(beside, ignore_errors=True)
        raise
    return [folder / name for name in names]

"""The folder of a calculation: finding it, and reading files in it without ever leaving it."""

from __future__ import annotations

import os
import re
import stat
from pathlib import Path

from reportgen.errors import Fault, InputError

__all__ = ["CALCULATION_FILE", "find", "read_bytes", "read_text"]

CALCULATION_FILE = "calculation.toml"
#: Folders that hold copies or products, never a calculation to work on.
_PASSED_OVER = frozenset(["issued", "node_modules", "__pycache__"])
_DEEPEST = 8
_LARGEST = 1_000_000


def find(folder: Path) -> list[Path]:
    """Calculation folders at or below a folder, in alphabetical order.

    A folder that holds ``calculation.toml`` is one and is not searched further. Hidden folders, issued revisions and
    symbolic links are passed over. Raises InputError when there is none, and for each folder that cannot be looked
    into: it may hold one.
    """
    if not folder.is_dir():
        is_file = folder.exists()
        raise InputError(
            Fault(
                "This is a file, not a folder." if is_file else "There is no such folder.",
                file=folder.as_posix(),
                expected=f"the folder that it is in, {folder.parent.as_posix()}"
                if is_file and folder.name == CALCULATION_FILE
                else f"a folder with {CALCULATION_FILE}",
            )
        )
    found: list[Path] = []
    closed: list[OSError] = []
    for name, inner, files in os.walk(folder, onerror=closed.append):
        here = Path(name)
        depth = len(here.relative_to(folder).parts)
        if CALCULATION_FILE in files:
            found.append(here)
            inner.clear()
        elif depth >= _DEEPEST:
            inner.clear()
        inner[:] = sorted(entry for entry in inner if not entry.startswith(".") and entry not in _PASSED_OVER)
    if closed:
        raise InputError(
            Fault(
                f"The folder cannot be looked into: {error.strerror or 'it cannot be opened'}.",
                file=Path(error.filename or folder).as_posix(),
            )
            for error in closed
        )
    if not found:
        raise InputError(
            Fault(
                "No calculation is in this folder or below it.",
                file=folder.as_posix(),
                expected=f"a file {CALCULATION_FILE}",
                hint="reportgen start FOLDER writes a first one.",
            )
        )
    return sorted(found)


def read_bytes(folder: Path, name: str) -> bytes:
    """The content of a file of the folder. ``name`` is relative, with / between its parts.

    Raises InputError when the name leads out of the folder, by its parts or by a symbolic link, when there is no
    such regular file, or when it is larger than 1 MB.
    """
    parts = name.split("/")
    if "\\" in name or re.match(r"[A-Za-z]:", name) or "" in parts or ".." in parts or "\0" in name:
        raise InputError(
            Fault(
                "The file must be in the folder of the calculation.",
                found=f'"{name[:80]}"',
                expected="a name such as purpose.md or texts/purpose.md",
            )
        )
    path = folder.joinpath(*parts)
    try:
        inside = path.resolve(strict=True).is_relative_to(folder.resolve(strict=True))
        if not inside:
            raise InputError(
                Fault(
                    "The file is a link that leads out of the folder of the calculation.",
                    found=f'"{name[:80]}"',
                    expected="a file that is itself in the folder",
                )
            )
        # Asked for before opening: opening a pipe would wait for ever.
        status = path.stat()
        if not stat.S_ISREG(status.st_mode):
            raise InputError(Fault("This is not a file.", found=f'"{name[:80]}"', expected="a regular file"))
        with path.open("rb") as stream:
            content = stream.read(_LARGEST + 1)
    except (OSError, RuntimeError, ValueError) as error:
        if isinstance(error, InputError):
            raise
        reason = (error.strerror if isinstance(error, OSError) else None) or "it cannot be opened"
        raise InputError(
            Fault(f"The file cannot be read: {reason}.", found=f'"{name[:80]}"', expected="a file beside this one")
        ) from None
    if len(content) > _LARGEST:
        raise InputError(
            Fault("The file is too large.", found=f"more than {_LARGEST} bytes", expected=f"at most {_LARGEST} bytes")
        )
    return content


def read_text(content: bytes, file: str) -> str:
    """UTF-8 text with LF line ends and without a byte order mark.

    Raises InputError with line and column of the first byte that is not UTF-8.
    """
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        before = content[: error.start]
        line = before.count(b"\n") + 1
        column = len(before.rpartition(b"\n")[2].decode("utf-8", "replace")) + 1
        raise InputError(
            Fault(
                "The file is not UTF-8 text.",
                found=f"the byte 0x{content[error.start]:02x}",
                expected="the file saved with the encoding UTF-8",
            ).at(file, line, column)
        ) from None
    return text.replace("\r\n", "\n")

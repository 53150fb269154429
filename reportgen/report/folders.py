"""Where pages go, and how they are written so that a failure leaves what was there."""

from __future__ import annotations

import os
import re
from collections.abc import Mapping
from contextlib import suppress
from pathlib import Path

from reportgen.errors import Fault, InputError, ReportgenError
from reportgen.record import Record

__all__ = ["folder_name", "page_path", "write_together"]

_UNSAFE = re.compile(r"[^A-Za-z0-9._-]")
_LONGEST = 100
#: Device names that Windows keeps for itself, with any ending.
_RESERVED = {"con", "prn", "aux", "nul", *(f"{port}{n}" for port in ("com", "lpt") for n in range(1, 10))}
#: Folders of the site that are no calculation.
_TAKEN = {"guide"}


def folder_name(text: str, path: str) -> str:
    """A document number or revision as the name of a folder on every system.

    Letters, digits, ``.``, ``-`` and ``_`` stand; anything else becomes ``~`` with its code point in hexadecimal,
    so that two numbers never share a name. Raises InputError on names that no folder may have.
    """
    name = _UNSAFE.sub(lambda match: f"~{ord(match[0]):x}~", text)
    refused = None
    if not name.strip("."):
        refused = "It is empty or only dots."
    elif name.endswith(".") or name.split(".")[0].lower() in _RESERVED:
        refused = "Windows cannot hold a folder of this name."
    elif len(name) > _LONGEST:
        refused = f"As a folder name it has {len(name)} characters, more than {_LONGEST}."
    elif path == "calculation.number" and name.lower() in _TAKEN:
        refused = "The site keeps this folder for something else."
    if refused:
        raise InputError(Fault(f"This text cannot name a folder of the site. {refused}", path=path, found=repr(text)))
    return name


def page_path(record: Record, site: Path) -> Path:
    """``site/<number>/<revision>/index.html`` of a record. Raises InputError when no folder can have that name."""
    number = folder_name(record.number, "calculation.number")
    revision = folder_name(record.revision, "calculation.revision")
    return site / number / revision / "index.html"


def write_together(files: Mapping[Path, bytes]) -> None:
    """Write files beside their places, then rename all of them; after any failure the old ones stand.

    Raises ReportgenError that names the file and what the system said.
    """
    waiting = {path: path.with_name(f".{path.name}.new") for path in files}
    kept = {path: path.with_name(f".{path.name}.old") for path in files}
    placed: list[Path] = []
    saved: list[Path] = []
    current = next(iter(files))
    try:
        for current, content in files.items():
            current.parent.mkdir(parents=True, exist_ok=True)
            waiting[current].write_bytes(content)
        for current in files:
            if current.exists():
                current.replace(kept[current])
                saved.append(current)
            waiting[current].replace(current)
            placed.append(current)
    except OSError as error:
        for path in placed:
            with suppress(OSError):
                path.unlink()
        for path in saved:
            kept[path].replace(path)
        raise ReportgenError(
            Fault(
                "The file cannot be written; what was there stands.", file=os.fspath(current), found=str(error.strerror)
            )
        ) from error
    finally:
        for path in files:
            with suppress(OSError):
                waiting[path].unlink(missing_ok=True)
    for path in saved:
        with suppress(OSError):
            kept[path].unlink()

"""The real fluids carried: names, aliases, data files."""

from __future__ import annotations

import hashlib
import json
import re
from difflib import get_close_matches
from functools import cache
from pathlib import Path
from typing import Any

from reportgen.errors import Fault, InputError

__all__ = ["FORMAT", "digest", "find", "names", "source_lines"]

#: Format of the data files of real fluids; other files beside them have another.
FORMAT = "reportgen-fluid/1"

_FOLDER = Path(__file__).parent.parent / "data"


def _plain(name: str) -> str:
    """Name as compared: without case, spaces, hyphens, underscores."""
    return re.sub(r"[\s_-]+", "", name).casefold()


@cache
def _read(file: str) -> tuple[dict[str, Any], str]:
    """Content of a data file and the sha-256 of its bytes."""
    raw = (_FOLDER / file).read_bytes()
    # digest over LF line ends, so that a checkout on any system gives the same
    digest = hashlib.sha256(raw.replace(b"\r\n", b"\n")).hexdigest()
    return json.loads(raw), digest


@cache
def _files() -> dict[str, str]:
    """Plain form of each data file's name -> file."""
    return {_plain(path.stem): path.name for path in sorted(_FOLDER.glob("*.json"))}


@cache
def _aliases() -> dict[str, str]:
    """Plain form of every name, alias, formula and CAS number -> file of a real fluid."""
    found: dict[str, str] = {}
    for file in _files().values():
        data, _ = _read(file)
        if data.get("format") == FORMAT:
            for alias in (data["name"], data["title"], data["formula"], data["cas"], *data["aliases"]):
                if alias:
                    found.setdefault(_plain(alias), file)
    return found


def names() -> tuple[str, ...]:
    """Canonical names of the real fluids carried, sorted without regard to case."""
    contents = (_read(file)[0] for file in _files().values())
    carried = (data["name"] for data in contents if data.get("format") == FORMAT)
    return tuple(sorted(carried, key=str.casefold))


def find(name: str) -> tuple[dict[str, Any], str]:
    """Content and file name of the fluid of that name, alias, formula or CAS number.

    Raises
    ------
    InputError : no such fluid; the hint gives the nearest name.
    """
    plain = _plain(name)
    file = _files().get(plain)
    if file is None or _read(file)[0].get("format") != FORMAT:
        file = _aliases().get(plain)
    if file is None:
        near = get_close_matches(plain, _aliases(), n=1, cutoff=0.6)
        hint = f"Did you mean {_read(_aliases()[near[0]])[0]['name']!r}?" if near else None
        raise InputError(
            Fault(
                "No real fluid of this name is carried.", found=repr(name[:80]), expected=", ".join(names()), hint=hint
            )
        )
    return _read(file)[0], file


def digest(file: str) -> str:
    """sha-256 of a data file, in hexadecimal."""
    return _read(file)[1]


def source_lines(data: dict[str, Any]) -> tuple[str, ...]:
    """Publications of a fluid's equation and melting line, one line each, with DOI where there is one."""
    lines = []
    for heading, entries in (("", data["sources"]["equation"]), ("Melting line: ", data["sources"]["melting_line"])):
        for entry in entries:
            line = f"{heading}{entry['authors']} ({entry['year']}). {entry['title']}. {entry['published_in']}."
            if entry["doi"]:
                line += f" doi:{entry['doi']}"
            if line not in lines:
                lines.append(line)
    return tuple(lines)

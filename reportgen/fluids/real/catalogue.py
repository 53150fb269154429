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

#: Prefixes that name the family of a refrigerant in place of R, such as HFC-134a.
_FAMILY = re.compile(r"^(hcfc|hcfo|hfc|hfo|cfc|pfc|hc|fc)(?=\d)")
_PARTS = re.compile(r"\d+|\D+")


def _plain(name: str) -> str:
    """Name as compared: letters and digits only, without case; a refrigerant's family prefix becomes R."""
    return _FAMILY.sub("r", re.sub(r"[\W_]+", "", name.casefold()))


@cache
def _read(file: str) -> tuple[dict[str, Any], str]:
    """Content of a data file and the sha-256 of its bytes."""
    raw = (_FOLDER / file).read_bytes()
    # digest over LF line ends, so that a checkout on any system gives the same
    digest = hashlib.sha256(raw.replace(b"\r\n", b"\n")).hexdigest()
    return json.loads(raw), digest


@cache
def _index() -> tuple[dict[str, str], dict[str, str], dict[str, list[str]]]:
    """Canonical name -> file; plain form of every name -> canonical name; plain formula -> canonical names.

    From ``names.json``, which the collecting script writes, so that a look-up need not read every data file.
    """
    files: dict[str, str] = {}
    known: dict[str, str] = {}
    formulas: dict[str, list[str]] = {}
    for file, entry in _read("names.json")[0]["files"].items():
        name = entry["name"]
        files[name] = file
        for other in (name, *entry["others"]):
            known.setdefault(_plain(other), name)
        if entry["formula"]:
            formulas.setdefault(_plain(entry["formula"]), []).append(name)
    return files, known, formulas


def names() -> tuple[str, ...]:
    """Canonical names of the real fluids carried, without regard to case, numbers in them by size."""

    def place(name: str) -> list[tuple[bool, int, str]]:
        return [(not part.isdigit(), int(part) if part.isdigit() else 0, part) for part in _PARTS.findall(name)]

    return tuple(sorted(_index()[0], key=lambda name: place(name.casefold())))


def find(name: str) -> tuple[dict[str, Any], str]:
    """Content and file name of the fluid of that name, alias, formula or CAS number.

    Raises
    ------
    InputError : no such fluid, with the nearest names in the hint; a formula that several fluids share.
    """
    files, known, formulas = _index()
    plain = _plain(name)
    canonical = known.get(plain)
    if canonical is None:
        shared = formulas.get(plain, [])
        if len(shared) != 1:
            raise InputError(_not_found(name, shared))
        canonical = shared[0]
    file = files[canonical]
    return _read(file)[0], file


def _not_found(name: str, shared: list[str]) -> Fault:
    """What to say of a name that is not carried, or of a formula that several fluids share."""
    found = repr(name[:80])
    if shared:
        return Fault("Several real fluids have this formula.", found=found, expected=", ".join(shared))
    known = _index()[1]
    plain = _plain(name)
    near = get_close_matches(plain, known, n=3, cutoff=0.8) or get_close_matches(plain, known, n=1, cutoff=0.6)
    meant = " or ".join(repr(other) for other in dict.fromkeys(known[match] for match in near))
    return Fault(
        "No real fluid of this name is carried.",
        found=found,
        expected=f"one of the {len(names())} that `reportgen fluids` lists, by name, formula, number or CAS number",
        hint=f"Did you mean {meant}?" if meant else None,
    )


def digest(file: str) -> str:
    """sha-256 of a data file, in hexadecimal."""
    return _read(file)[1]


def source_lines(data: dict[str, Any]) -> tuple[str, ...]:
    """Publications of a fluid's equation and melting line, one line each, with DOI where there is one."""
    lines = []
    for heading, entries in (("", data["sources"]["equation"]), ("Melting line: ", data["sources"]["melting_line"])):
        for entry in entries:
            place = entry["published_in"].rstrip(".")
            line = f"{heading}{entry['authors']} ({entry['year']}). {entry['title']}. {place}."
            if entry["doi"]:
                line += f" doi:{entry['doi']}"
            if line not in lines:
                lines.append(line)
    return tuple(lines)

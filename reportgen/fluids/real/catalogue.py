"""The real fluids carried: names, aliases, data files."""

from __future__ import annotations

import hashlib
import json
import re
from collections.abc import Sequence
from functools import cache
from pathlib import Path
from typing import Any

from reportgen.errors import Fault, InputError
from reportgen.fluids.naming import nearest, sharing

__all__ = [
    "FORMAT",
    "canonical",
    "digest",
    "find",
    "names",
    "nearest_names",
    "of_formula",
    "source_lines",
]

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
            known.setdefault(_plain(other.split(" (")[0]), name)  # a title without the number behind it
        if entry["formula"]:
            formulas.setdefault(_plain(entry["formula"]), []).append(name)
    return files, known, formulas


def names() -> tuple[str, ...]:
    """Canonical names of the real fluids carried, without regard to case, numbers in them by size."""

    def place(name: str) -> list[tuple[bool, int, str]]:
        return [(not part.isdigit(), int(part) if part.isdigit() else 0, part) for part in _PARTS.findall(name)]

    return tuple(sorted(_index()[0], key=lambda name: place(name.casefold())))


def canonical(name: str) -> str | None:
    """Canonical name of the fluid of that name, alias or CAS number, but not formula; None for none."""
    return _index()[1].get(_plain(name))


def of_formula(formula: str) -> tuple[str, ...]:
    """Canonical names of the real fluids of a molecular formula; case does not matter."""
    return tuple(_index()[2].get(_plain(formula), ()))


def find(name: str) -> tuple[dict[str, Any], str]:
    """Content and file name of the fluid of that name, alias, formula or CAS number.

    Raises
    ------
    InputError : no such fluid, with the nearest names in the hint; a formula that several substances carried share.
    """
    if not isinstance(name, str):
        raise InputError(Fault("The name of a fluid is a text.", found=repr(name)[:60], expected='such as "water"'))
    found = canonical(name)
    if found is None:
        real = of_formula(name)
        others = [other for other in sharing(name) if other not in real] if real else []
        if len(real) != 1 or others:
            raise InputError(_not_found(name, real, others))
        found = real[0]
    file = _index()[0][found]
    return _read(file)[0], file


def _not_found(name: str, real: Sequence[str], others: Sequence[str]) -> Fault:
    """What to say of a name that is not carried, or of a formula that several substances share."""
    found = repr(name[:80])
    if real:
        also = f"The formula is that of {', '.join(others)}, too: carried as ideal gas only." if others else None
        message = "Several real fluids have this formula." if len(real) > 1 else "Several isomers share this formula."
        return Fault(message, found=found, expected=", ".join(real), hint=also)
    meant = " or ".join(repr(other) for other in nearest_names(name))
    return Fault(
        "No real fluid of this name is carried.",
        found=found,
        expected=f"one of the {len(names())} that `reportgen fluids` lists, by name, formula, number or CAS number",
        hint=f"Did you mean {meant}?" if meant else None,
    )


def nearest_names(name: str) -> tuple[str, ...]:
    """Canonical names that may be meant by one that is not carried, the likeliest first, three at most."""
    known = _index()[1]
    return tuple(dict.fromkeys(known[match] for match in nearest(name, _plain(name), known)))


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

"""The Record: the one thing that leaves evaluation, as canonical JSON.

A record holds everything that a report shows and nothing about when, where or by whom it was computed, so that
equal inputs give equal bytes. This module knows the outer form only (canonical text, loading, looking up); what
the entries mean is laid down where they are made, in ``reportgen.evaluation``.
"""

from __future__ import annotations

import json
import math
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any

from reportgen.errors import Fault, InputError

__all__ = ["FORMAT", "SECTIONS", "SIGNIFICANT_DIGITS", "Record", "canonical", "canonical_json"]

FORMAT = "reportgen-record/1"

#: Digits to which every float of a record is rounded. Twelve stay well clear of the last bits, in which
#: processors and numerical libraries differ, and are far more than any input carries.
SIGNIFICANT_DIGITS = 12

#: Faults of one record that are listed; a person looks at the first ones.
_MOST_FAULTS = 20

#: Every record has exactly these keys beside ``format``; the value is the type of the empty section.
SECTIONS: dict[str, type] = {
    "accounts": dict,
    "assumptions": list,
    "audits": dict,
    "calculation": dict,
    "cases": dict,
    "cautions": list,
    "combustion": dict,
    "criteria": list,
    "cross_checks": list,
    "cycles": dict,
    "figures": list,
    "inputs": dict,
    "plant": dict,
    "provenance": dict,
    "relations": dict,
    "solution_order": list,
    "summary": list,
    "sweeps": dict,
    "uncertainty_budget": dict,
    "values": dict,
}


def canonical(value: Any) -> Any:
    """Plain JSON data with floats at twelve significant digits, NaN and infinities as None, minus zero as zero.

    Mappings become dicts with sorted text keys (so that a record reads the same before it is written and after it is
    loaded), sequences and arrays (anything with ``tolist``) become lists.
    Raises TypeError for anything else: a record must never carry the ``repr`` of an object.
    """
    if value is None or isinstance(value, bool | str):
        return str(value) if isinstance(value, str) else value
    if isinstance(value, float):
        if not math.isfinite(value):
            return None
        return float(f"{value:.{SIGNIFICANT_DIGITS}g}") + 0.0
    if isinstance(value, int):
        return int(value)
    if isinstance(value, Mapping):
        for key in value:
            if not isinstance(key, str):
                raise TypeError(f"a record's keys are text, not {type(key).__name__}")
        return {str(key): canonical(value[key]) for key in sorted(value)}
    if isinstance(value, list | tuple):
        return [canonical(entry) for entry in value]
    if hasattr(value, "tolist"):
        return canonical(value.tolist())
    raise TypeError(f"a record cannot hold a {type(value).__name__}")


def canonical_json(value: Any) -> bytes:
    """UTF-8 bytes of the canonical form: sorted keys, indent of one space, LF, a final LF."""
    text = json.dumps(canonical(value), sort_keys=True, ensure_ascii=False, allow_nan=False, indent=1)
    return (text + "\n").encode("utf-8")


class Record:
    """A record's data with a few look-ups; ``data`` is plain JSON data in canonical form."""

    def __init__(self, data: Mapping[str, Any]) -> None:
        """Take the sections of SECTIONS; those left out are empty. Raises TypeError on data that is not JSON."""
        sections = {name: kind() for name, kind in SECTIONS.items()}
        self.data: dict[str, Any] = canonical({**sections, **data, "format": FORMAT})

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Record) and self.data == other.data

    __hash__ = None  # type: ignore[assignment]

    def to_json(self) -> bytes:
        """Canonical bytes: equal records give equal bytes."""
        return canonical_json(self.data)

    @classmethod
    def load(cls, source: Path | bytes) -> Record:
        """Read a record back from a file or from its bytes.

        Raises InputError when it is not JSON, not a record of this format, lacks a section, or when an entry that is
        looked up by its path lacks what every such entry has.
        """
        file = None if isinstance(source, bytes) else source.name
        try:
            content = source if isinstance(source, bytes) else source.read_bytes()
            data = json.loads(
                content.decode("utf-8"),
                parse_constant=_finite,
                parse_float=_finite,
                object_pairs_hook=_each_key_once,
            )
        except OSError as error:
            raise InputError(Fault("The record cannot be read.", file=file, found=error.strerror)) from error
        except (ValueError, RecursionError) as error:
            raise InputError(Fault("The record is not JSON.", file=file, found=str(error))) from error
        if not isinstance(data, dict) or data.get("format") != FORMAT:
            found = data.get("format") if isinstance(data, dict) else type(data).__name__
            raise InputError(
                Fault("This is not a record that can be read.", file=file, found=repr(found), expected=FORMAT)
            )
        wrong = [name for name, kind in SECTIONS.items() if not isinstance(data.get(name), kind)]
        if wrong:
            raise InputError(
                Fault("Sections of the record are missing or of the wrong type.", file=file, found=", ".join(wrong))
            )
        faults = [
            Fault("An entry of the record is incomplete.", path=path, file=file, found=found, expected=expected)
            for path, found, expected in _incomplete(data)
        ]
        if faults:
            raise InputError(faults[:_MOST_FAULTS])
        return cls(data)

    @property
    def number(self) -> str:
        """Document number of the calculation."""
        return str(self.data["calculation"]["number"])

    @property
    def revision(self) -> str:
        """Revision index of the calculation."""
        return str(self.data["calculation"]["revision"])

    @property
    def values(self) -> dict[str, dict[str, Any]]:
        """The ``values`` section: path to entry."""
        return self.data["values"]  # type: ignore[no-any-return]

    @property
    def inputs(self) -> dict[str, dict[str, Any]]:
        """The ``inputs`` section: path to entry."""
        return self.data["inputs"]  # type: ignore[no-any-return]

    def entry(self, path: str) -> dict[str, Any] | None:
        """Entry of a value, or of an input that no value repeats, or None when the record has no such path."""
        found = self.values.get(path)
        return found if found is not None else self.inputs.get(path)

    def value(self, path: str) -> float | str | None:
        """Number in its unit [SI] (text for a phase); None when undefined or when the record has no such path."""
        entry = self.entry(path)
        return None if entry is None else entry["value"]

    def expanded_uncertainty(self, path: str) -> float | None:
        """Expanded uncertainty at the calculation's coverage factor, in the SI unit, or None when there is none."""
        entry = self.entry(path)
        standard = None if entry is None else entry.get("standard_uncertainty")
        return None if standard is None else float(standard) * float(self.data["calculation"]["coverage_factor"])

    def ancestors(self, path: str) -> Iterator[str]:
        """Every path that a value was computed from, each once, nearest first; inputs and fluids end the chains."""
        seen = {path}
        waiting = [path]
        while waiting:
            entry = self.values.get(waiting.pop(0))
            for source in entry.get("from", []) if entry is not None else []:
                if source not in seen:
                    seen.add(source)
                    waiting.append(source)
                    yield source


def _finite(text: str) -> float:
    """A number of the text; NaN, Infinity and what a float cannot hold would otherwise become null unnoticed."""
    number = float(text)
    if not math.isfinite(number):
        raise ValueError(f"{text[:40]} is not a finite number")
    return number


def _each_key_once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    """An object; with a key twice, one of two values would be lost unnoticed."""
    found = dict(pairs)
    if len(found) < len(pairs):
        raise ValueError("an object has a key twice")
    return found


def _incomplete(data: Mapping[str, Any]) -> Iterator[tuple[str, str, str]]:
    """Path, what was found and what would do, for everything that the look-ups of a record need and do not find."""
    title = data["calculation"]
    for key in ("number", "revision"):
        if not isinstance(title.get(key), str):
            yield f"calculation.{key}", repr(title.get(key))[:40], "text"
    factor = title.get("coverage_factor")
    if isinstance(factor, bool) or not isinstance(factor, int | float):
        yield "calculation.coverage_factor", repr(factor)[:40], "a number"
    for section in ("values", "inputs"):
        for path, entry in data[section].items():
            if not isinstance(entry, dict) or "value" not in entry:
                yield f"{section}: {path}", repr(entry)[:40], "a table with its value"
            elif not isinstance(entry.get("from", []), list):
                yield f"{section}: {path}", f"from = {entry['from']!r}"[:40], "a list of paths"

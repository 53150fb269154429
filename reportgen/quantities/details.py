"""What the table form of a quantity says besides its value."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Literal

from reportgen.errors import Fault
from reportgen.quantities.wording import nearest, quoted, short

__all__ = ["HALF_WIDTHS", "LONGEST_TEXT", "Details", "Distribution", "Evaluation", "read_details"]

Distribution = Literal["normal", "uniform", "triangular", "u-shaped"]
Evaluation = Literal["A", "B"]

LONGEST_TEXT = 200

#: Half-width over standard uncertainty.
HALF_WIDTHS = {"uniform": math.sqrt(3.0), "triangular": math.sqrt(6.0), "u-shaped": math.sqrt(2.0)}
_TABLE_KEYS = (
    "value",
    "source",
    "distribution",
    "evaluation",
    "degrees_of_freedom",
    "coverage_factor",
    "supplied_by",
    "status",
)


@dataclass(frozen=True)
class Details:
    """What a table says besides its value. ``speaks_of_spread`` names the first key that describes an uncertainty."""

    coverage_factor: float
    distribution: Distribution = "normal"
    evaluation: Evaluation = "B"
    degrees_of_freedom: float = math.inf
    source: str | None = None
    supplied_by: str | None = None
    status: str | None = None
    speaks_of_spread: str | None = None


def read_details(table: Mapping[Any, Any], coverage_factor: float) -> tuple[Details, list[Fault]]:
    """The details of a table and every fault in them; ``coverage_factor`` [1] holds unless the table has its own."""
    faults: list[Fault] = []

    def refuse(key: str, message: str, expected: str) -> None:
        faults.append(Fault(message, found=quoted(table[key]), expected=expected))

    for key in table:
        if key not in _TABLE_KEYS:
            faults.append(
                Fault(
                    f'A quantity has no "{short(key)}".',
                    expected=", ".join(_TABLE_KEYS),
                    hint=nearest(key, _TABLE_KEYS),
                )
            )
    found: dict[str, Any] = {}
    for key, choices in (("distribution", ("normal", *HALF_WIDTHS)), ("evaluation", ("A", "B"))):
        if key in table:
            if table[key] in choices:
                found[key] = table[key]
            else:
                refuse(key, f"This {key} is not known.", " or ".join(f'"{choice}"' for choice in choices))
    for key in ("source", "supplied_by", "status"):
        if key in table:
            if isinstance(table[key], str) and 0 < len(table[key].strip()) <= LONGEST_TEXT:
                found[key] = table[key].strip()
            else:
                refuse(key, f"The {key} of a quantity is a short text.", f"1 to {LONGEST_TEXT} characters")
    bounds = (
        ("degrees_of_freedom", 1.0, 1e6, "a number from 1 to 1e6, or left out when it is large"),
        ("coverage_factor", 0.1, 10.0, "a number from 0.1 to 10"),
    )
    for key, least, most, expected in bounds:
        if key in table:
            number = table[key]
            if isinstance(number, int | float) and not isinstance(number, bool) and least <= number <= most:
                found[key] = float(number)
            else:
                refuse(key, f"The {key} does not fit.", expected)
    if "coverage_factor" in found and found.get("distribution", "normal") != "normal":
        refuse(
            "coverage_factor",
            f"A {found['distribution']} distribution is given by its half-width, which has no coverage factor.",
            "coverage_factor or distribution, not both",
        )
    described = [key for key in ("distribution", "evaluation", "degrees_of_freedom", "coverage_factor") if key in table]
    found.setdefault("coverage_factor", coverage_factor)
    return Details(speaks_of_spread=described[0] if described else None, **found), faults

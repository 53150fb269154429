"""Melting lines for the data files: those of the source, corrected where they cannot be right (for collect.py)."""

from __future__ import annotations

from typing import Any

import numpy as np

from reportgen.fluids.real.melting import FORMS, MeltingLine

#: Forms: name in the source -> name here (real/melting.py) and the columns carried.
MELTING = {
    "Simon": ("simon", ("a", "c")),
    "polynomial_in_Tr": ("polynomial-in-ratio", ("a", "t")),
    "polynomial_in_Theta": ("polynomial-in-rise", ("a", "t")),
}

#: Lines taken in place of those of the source, and the key of their publication (collect_bibliography.py).
#:
#: Hydrogen: the source's constants put the line 23 MPa above the triple point, where parahydrogen's begins. Taken
#: instead is the equation printed in the abstract of the very publication that the source cites, in GPa
#: T = 14.025 (1 + P/0.0286)^0.589 exp(-4.6e-3 P); it agrees with parahydrogen's line within 1.6 MPa from 16 K to 40 K.
#: Helium: the source's constants give 12.0 MPa at 4.2 K; measured is 14.1 MPa (from memory). Taken instead is
#: p/MPa = -1.7455837 + 1.6979793 (T/K)^1.555414, which gives 14.07 MPa.
_HYDROGEN = [{"form": "kechin", "temperature": 14.025, "pressure": 0.0, "a": 2.86e7, "b": 0.589, "c": 4.6e-12}]
_HELIUM = [
    {"form": "simon", "temperature": 1.0, "pressure": -1.7455837e6 + 1.6979793e6, "a": 1.6979793e6} | {"c": 1.555414}
]
REPLACED = {
    "Hydrogen": (_HYDROGEN, (13.957, 700.0), "Datchi-PRB-2000"),
    "OrthoHydrogen": (_HYDROGEN, (13.957, 700.0), "Datchi-PRB-2000"),
    "Helium": (_HELIUM, (2.1768, 1500.0), "McCarty-ACE-1990"),
}

#: Constants p_0 [Pa] misprinted in the source: fluid, its value there -> the value of the publication. Water: ice V
#: ends and ice VI begins at 632.4 MPa (IAPWS R14-08), where the line of ice V does end.
MISPRINTS = {("Water", 623400000.0): 632400000.0}

#: Temperature [K] up to which a straight line from the triple point stands for a published line that was fitted far
#: above it and misses it by megapascals.
STRAIGHT_TO = {
    "Hydrogen": 16.0,
    "OrthoHydrogen": 16.0,
    "Deuterium": 25.0,
    "OrthoDeuterium": 25.0,
    "ParaDeuterium": 25.0,
}


def melting_line(
    name: str, source: dict[str, Any] | None, lowest: float, lowest_pressure: float, maximum_pressure: float
) -> dict[str, Any] | None:
    """Melting line of the fluid called ``name`` in the source, in ascending temperature; None where there is none.

    From the lowest temperature [K] of the range, where saturation has the pressure ``lowest_pressure`` [Pa], to where
    the line leaves the range at ``maximum_pressure`` [Pa].
    """
    if source is None:
        return None
    parts: list[dict[str, Any]]
    if name in REPLACED:
        replacement, (low, high), _ = REPLACED[name]
        parts = [{**part, "minimum_temperature": low, "maximum_temperature": high} for part in replacement]
    else:
        form, columns = MELTING[source["type"]]
        parts = [
            {
                "form": form,
                "temperature": part["T_0"],
                "pressure": MISPRINTS.get((name, part["p_0"]), part["p_0"]),
                "minimum_temperature": min(part["T_min"], part["T_max"]),
                "maximum_temperature": max(part["T_min"], part["T_max"]),
            }
            | {column: part[column] for column in columns}
            for part in source["parts"]
        ]
    parts = sorted(
        (part for part in parts if part["maximum_temperature"] > lowest), key=lambda part: part["minimum_temperature"]
    )
    if name in STRAIGHT_TO:
        end = STRAIGHT_TO[name]
        (first,) = parts
        first["minimum_temperature"] = end
        reached = float(FORMS[first["form"]](first, np.array([end / first["temperature"]]))[0])
        slope = (reached - lowest_pressure) / (end / lowest - 1)
        straight = {"form": "simon", "temperature": lowest, "pressure": lowest_pressure, "a": slope, "c": 1.0}
        parts.insert(0, {**straight, "minimum_temperature": lowest, "maximum_temperature": end})
    return {"parts": _within(parts, maximum_pressure)}


def _within(parts: list[dict[str, Any]], maximum_pressure: float) -> list[dict[str, Any]]:
    """The parts up to where the line passes the maximum pressure [Pa], the last one ending there."""
    line = MeltingLine({"parts": parts})
    end = float(line.temperature(np.array([1.01 * maximum_pressure]))[0])
    kept = [part for part in parts if part["minimum_temperature"] < end]
    kept[-1]["maximum_temperature"] = min(kept[-1]["maximum_temperature"], round(end + 0.01, 2))
    return kept

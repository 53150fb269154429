"""Cycles for the record: what each is for, its reservoirs and their heats, its powers, what the first law leaves."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.evaluation.evaluated import EvaluatedPlant

if TYPE_CHECKING:
    from reportgen.balances import Solution
    from reportgen.balances.solution import Cycle, Reservoir

__all__ = ["CYCLE_FIGURES", "cycles_section"]

#: Figures of a cycle, in the order in which they are shown.
CYCLE_FIGURES = (
    "net_power",
    "heat_supplied",
    "heat_rejected",
    "thermal_efficiency",
    "coefficient_of_performance",
    "second_law_efficiency",
)
#: What rounding leaves of the first law, in parts of the heats in it.
_ROUNDING = 1e-10


def cycles_section(plant: EvaluatedPlant, solution: Solution) -> dict[str, Any]:
    """Owner (``trains.<id>``, ``total``) to its cycle.

    ``reservoirs`` hold the heat into the cycle [W] with its path, and the temperature of the boundary [K] or the states
    of the stream. ``imbalance`` [W] is heat supplied less heat rejected less power delivered, zero but for rounding for
    a closed cycle and None for an open process, whose streams carry energy too.
    """
    section = {}
    for owner, cycle in solution.cycles.items():
        if owner == "total" and len(solution.plant.trains) == 1 and set(solution.cycles) != {"total"}:
            continue  # the one train says it
        section[owner] = {
            "title": cycle.title,
            "purpose": cycle.purpose,
            "closed": cycle.closed,
            "figures": [f"{owner}.{name}" for name in CYCLE_FIGURES if f"{owner}.{name}" in plant.values],
            "reservoirs": [_reservoir(plant, entry) for entry in (*cycle.supplied, *cycle.rejected, *cycle.losses)],
            "powers": [{"path": path, "sign": sign, "value": sign * _base(plant, path)} for path, sign in cycle.powers],
            "imbalance": _imbalance(plant, cycle) if cycle.closed else None,
        }
    return section


def _base(plant: EvaluatedPlant, path: str) -> float:
    return float(plant.samples(path)[0])


def _reservoir(plant: EvaluatedPlant, entry: Reservoir) -> dict[str, Any]:
    """A reservoir; heat that leaves over a boundary of unstated temperature leaves at that of the surroundings."""
    temperature = entry.temperature
    if temperature is not None and temperature not in plant.values:
        temperature = "surroundings.temperature" if entry.sign * _base(plant, entry.heat) < 0.0 else None
    return {
        "label": entry.label,
        "path": entry.heat,
        "sign": entry.sign,
        "value": entry.sign * _base(plant, entry.heat),
        "temperature_path": temperature,
        "temperature": None if temperature is None else _base(plant, temperature),
        "states": list(entry.states),
    }


def _imbalance(plant: EvaluatedPlant, cycle: Cycle) -> float:
    heats = [entry.sign * _base(plant, entry.heat) for entry in (*cycle.supplied, *cycle.rejected, *cycle.losses)]
    terms = [*heats, *(-sign * _base(plant, path) for path, sign in cycle.powers)]
    left = float(np.sum(terms))
    return 0.0 if abs(left) <= _ROUNDING * float(np.sum(np.abs(terms))) else left

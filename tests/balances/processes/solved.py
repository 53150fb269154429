"""Shared by the tests of processes: a plant of one process or several, solved; its values in the base case."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from reportgen.balances import EquipmentDefinition, Plant, Solution, Train, solve

AMBIENT = {"surroundings.temperature": 288.15, "surroundings.pressure": 1.0e5}


def process(
    kind: str, before: str | tuple[str, ...], after: str | tuple[str, ...], **options: Any
) -> EquipmentDefinition:
    """A process of one kind between states."""
    ends = {
        name: (states,) if isinstance(states, str) else states for name, states in (("from", before), ("to", after))
    }
    return EquipmentDefinition(kind, ends, options)


def solution(
    fluids: Mapping[str, Any],
    states: Mapping[str, str],
    processes: Mapping[str, EquipmentDefinition],
    givens: Mapping[str, Any],
    trains: Mapping[str, Train] | None = None,
) -> Solution:
    """A solved plant of closed systems; surroundings at 15 °C and 1 bar unless given."""
    return solve(Plant(fluids, states, processes=processes, trains=trains or {}), {**AMBIENT, **givens})


def one(fluid: Any, kind: str, givens: Mapping[str, Any], **options: Any) -> dict[str, float]:
    """Base values of process P from state a to state b of one fluid; givens by path, "a." and "b." for the states."""
    paths = {
        (f"states.{path}" if path[:2] in ("a.", "b.") else f"processes.P.{path}"): value
        for path, value in givens.items()
    }
    solved = solution({"f": fluid}, {"a": "f", "b": "f"}, {"P": process(kind, "a", "b", **options)}, paths)
    return base(solved)


def base(solved: Solution) -> dict[str, float]:
    """Path to number in the base case, the states and the one process of :func:`one` by their short names too."""
    numbers = {path: float(array[0]) for path, array in solved.values.items() if array.dtype.kind == "f"}
    short = {path.removeprefix("states."): value for path, value in numbers.items() if path[:9] in _SHORT}
    short |= {
        path.removeprefix("processes.P."): value for path, value in numbers.items() if path[:12] == "processes.P."
    }
    return numbers | short


_SHORT = ("states.a.", "states.b.")

"""States checked by a second source: which source each state names, and what the record says of the comparison.

The physics of the comparison is :mod:`reportgen.fluids.crosscheck`; this module takes the states of the base case to it
and writes an entry for every property of every state.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.errors import Fault, InputError
from reportgen.evaluation.models import located
from reportgen.fluids import crosscheck
from reportgen.fluids.library import NotInstalled
from reportgen.fluids.state import State
from reportgen.names import NAMES

if TYPE_CHECKING:
    from reportgen.evaluation.evaluated import EvaluatedPlant
    from reportgen.fluids.model import Fluid
    from reportgen.spec.calculation import Calculation, StateSpec

__all__ = ["AGREES", "DIFFERS", "NOT_COMPARED", "Second", "cross_checks", "second_sources"]

AGREES, DIFFERS, NOT_COMPARED = "agrees", "differs", "not compared"
#: Why enthalpy and entropy of a single state are not compared.
ONLY_STATE = (
    "Every source has a zero of its own, so they are compared as differences from another state, and this is the only "
    "state that the source has been compared at."
)
#: Fields of a state that a comparison reads.
READ = (
    "temperature",
    "pressure",
    "quality",
    "density",
    "specific_enthalpy",
    "specific_entropy",
    "isobaric_heat_capacity",
    "speed_of_sound",
)


@dataclass(frozen=True)
class Second:
    """A second source for one fluid: its model, or the reason why there is none on this machine."""

    name: str
    model: Any = None
    reason: str | None = None


def second_sources(calculation: Calculation, models: Mapping[str, Fluid]) -> dict[tuple[str, str], Second]:
    """Second sources that states name, by fluid id and name.

    Raises InputError, with the place of each, for sources that there cannot be for a fluid. A library that is not
    installed is no error: its reason is kept.
    """
    found: dict[tuple[str, str], Second] = {}
    faults: list[Fault] = []
    for state in calculation.states.values():
        for source in state.second_sources:
            key = (state.fluid, source.model)
            if key in found:
                continue
            try:
                found[key] = Second(source.model, crosscheck.second_model(models[state.fluid], source.model))
            except NotInstalled as error:
                found[key] = Second(source.model, reason=_told(error.faults[0]))
            except InputError as error:
                found[key] = Second(source.model)
                faults += [_placed(calculation, state, source.model, fault) for fault in error.faults]
    if faults:
        raise InputError(faults)
    return found


def _placed(calculation: Calculation, state: StateSpec, name: str, fault: Fault) -> Fault:
    """The fault at the key that names the source: of the state, or of its fluid."""
    own = f"states.{state.id}.second_source"
    fluid = f"fluids.{state.fluid}.second_source"
    path = own if calculation.locate(own)[1:] != calculation.locate(f"states.{state.id}")[1:] else fluid
    message = f'The second source "{name}" cannot be had for fluid {state.fluid}: {fault.message}'
    return located(calculation, Fault(message, path, found=fault.found, expected=fault.expected, hint=fault.hint))


def _told(fault: Fault) -> str:
    return f"{fault.message} Would do: {fault.expected}." if fault.expected else fault.message


def cross_checks(
    plant: EvaluatedPlant, states: Mapping[str, StateSpec], seconds: Mapping[tuple[str, str], Second]
) -> list[dict[str, Any]]:
    """Record entries: one for each property of each state and second source, in the order of the file.

    Args:
        plant: the solved plant (base case).
        states: state id to what the file says.
        seconds: from :func:`second_sources`.
    """
    entries = []
    for (fluid_id, name), second in seconds.items():
        tolerances = {
            state.id: _tolerance(source.tolerance, name, plant.fluids[fluid_id])
            for state in states.values()
            for source in state.second_sources
            if (state.fluid, source.model) == (fluid_id, name)
        }
        entries += _of_one_source(plant, fluid_id, second, tolerances)
    return entries


def _tolerance(stated: float | None, name: str, fluid: Fluid) -> float:
    return crosscheck.usual_tolerance(name, fluid.kind) if stated is None else stated


def _of_one_source(
    plant: EvaluatedPlant, fluid_id: str, second: Second, tolerances: Mapping[str, float]
) -> list[dict[str, Any]]:
    fluid = plant.fluids[fluid_id]
    head = {
        "fluid": fluid_id,
        "second_model": second.name,
        "second_title": None if second.model is None else getattr(second.model, "name", second.model.title),
        "first_sources": list(fluid.sources),
        "second_sources": [] if second.model is None else list(second.model.sources),
    }
    known = [state for state in tolerances if plant.has(f"states.{state}.specific_enthalpy")]
    if second.model is None:
        return [_not_compared(head, state, tolerances[state], str(second.reason)) for state in tolerances]
    if not known:
        return []
    states = _states(plant, known)
    comparison = crosscheck.compare(fluid, second.model, states)
    compared = [index for index in range(len(known)) if index not in comparison.faults]
    if len(compared) > 1 and compared[0] > 0:  # enthalpies cannot count from a state that the second source lacks
        comparison = crosscheck.compare(fluid, second.model, states, compared[0])
    entries = []
    for index, state in enumerate(known):
        if index in comparison.faults:
            reason = comparison.faults[index].message
            entries.append(_not_compared(head, state, tolerances[state], reason))
            continue
        for item in comparison.deviations:
            if item.species is None and np.isfinite(item.relative[index]):
                reference = None if item.counted_from is None else known[item.counted_from]
                remark = comparison.remarks.get(index)
                entries.append(_entry(head, state, item, index, tolerances[state], reference, remark))
    if len(compared) == 1:
        state = known[compared[0]]
        shown = {entry["property"] for entry in entries}
        entries += [
            _not_compared(head, state, tolerances[state], ONLY_STATE, name)
            for name in crosscheck.DIFFERENCES
            if name not in shown
        ]
    entries += _of_species(head, comparison.deviations, known, tolerances)
    return entries


def _of_species(
    head: Mapping[str, Any],
    deviations: Iterable[crosscheck.Deviation],
    known: Sequence[str],
    tolerances: Mapping[str, float],
) -> list[dict[str, Any]]:
    """Entries for each gas of a mixture, at the state where its sources differ most."""
    species: dict[str, list[crosscheck.Deviation]] = {}
    for item in deviations:
        if item.species is not None:
            species.setdefault(item.species, []).append(item)
    entries = []
    for items in species.values():
        worst = np.nanmax(np.abs([item.relative for item in items]), axis=0)
        index = int(np.nanargmax(worst))
        tolerance = tolerances[known[index]]
        entries += [_entry(head, known[index], item, index, tolerance, None, None) for item in items]
    return entries


def _states(plant: EvaluatedPlant, known: Sequence[str]) -> State:
    """The states of the base case as one state of many elements."""
    values: dict[str, Any] = {
        name: np.array([plant.samples(f"states.{state}.{name}")[0] for state in known], dtype=float) for name in READ
    }
    values["phase"] = np.array([plant.phase(state) for state in known])
    return State((len(known),), values)


def _entry(
    head: Mapping[str, Any],
    state: str,
    item: crosscheck.Deviation,
    index: int,
    tolerance: float,
    reference: str | None,
    remark: str | None,
) -> dict[str, Any]:
    name = NAMES[item.name]
    relative = float(item.relative[index])
    return {
        **head,
        "state": state,
        "path": f"states.{state}.{item.name}",
        "property": item.name,
        "species": item.species,
        "counted_from": reference,
        "first": float(item.first[index]),
        "second": float(item.second[index]),
        "difference": float(item.difference[index]),
        "relative": relative,
        "threshold": tolerance,
        "unit": name.unit,
        "dimension": name.dimension,
        "verdict": AGREES if abs(relative) <= tolerance else DIFFERS,
        "remark": remark,
    }


def _not_compared(
    head: Mapping[str, Any], state: str, tolerance: float, reason: str, name: str | None = None
) -> dict[str, Any]:
    """The entry of a state, or of the property ``name`` of it, that the second source could not check."""
    empty = dict.fromkeys(
        ("property", "species", "counted_from", "first", "second", "difference", "relative", "unit", "dimension")
    )
    return {
        **head,
        **empty,
        "property": name,
        "state": state,
        "path": f"states.{state}" if name is None else f"states.{state}.{name}",
        "threshold": tolerance,
        "verdict": NOT_COMPARED,
        "remark": reason,
    }

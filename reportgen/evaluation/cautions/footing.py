"""Cautions on what the calculation stands on: phases, assumptions that fail, half-stated velocities, unused entries."""

from __future__ import annotations

from collections.abc import Iterator

from reportgen.balances import kinds
from reportgen.evaluation.cautions.entry import Finding, caution
from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.evaluation.phases import APART, changes_phase, distance_from_saturation, is_read_by_temperature
from reportgen.names import DIMENSIONS, NAMES

__all__ = ["assumption_fails", "model_changes", "phase_not_resolved", "unused", "velocity_on_one_side"]

#: What a phase that is not resolved means for the results.
THEN = "results near it are not first-order"


@caution(
    "P09",
    "warning",
    "Phase not resolved",
    source="common practice",
    limit=0.1,
    dimension="temperature_difference",
)
def phase_not_resolved(plant: EvaluatedPlant, limit: float) -> Iterator[Finding]:
    """State whose phase changes within its uncertainty, or that pressure and temperature place at saturation.

    Where pressure and temperature are given, their distance from saturation is measured. By 0.1 K it is hardly ever
    known, whatever uncertainty is stated: readings, written digits and saturation lines differ by as much.
    """
    for state in plant.state_fluids:
        if plant.phase(state) not in APART:
            continue
        path = f"states.{state}.temperature"
        if not is_read_by_temperature(plant, state):
            if changes_phase(plant, state):
                text = f"The phase of state {state} is not resolved from saturation within its uncertainty; {THEN}."
                yield Finding(path, None, None, "above", text, None)
            continue
        distance = plant.axis.estimate(distance_from_saturation(plant, state))
        unresolved = distance.value <= distance.expanded_uncertainty
        within = " within its uncertainty" if distance.expanded_uncertainty > 0.0 and unresolved else ""
        text = f"The phase of state {state} is not resolved from saturation{within}; {THEN}. Pressure and temperature "
        text += (
            "cannot tell liquid from vapour there: state the quality, the superheat or the subcooling. The value is "
        )
        text += "the distance from saturation."
        yield Finding(path, distance.value, None if unresolved else limit, "above", text, "temperature_difference")


@caution("P11", "warning", "Assumption fails its test", source="test of the assumption")
def assumption_fails(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Assumption that a better model refutes: a result changes decisively."""
    for assumption in plant.assumptions:
        test = assumption.test
        if test is None or test["verdict"] != "decisive" or not assumption.against_better:
            continue
        difference = f"{test['dimension']}_difference"
        dimension = difference if difference in DIMENSIONS else test["dimension"]
        text = f'The assumption "{assumption.text}" does not hold. {test["finding"]} That is: {_result(test["path"])}. '
        text += "The value is its change."
        yield Finding(test["path"], test["difference"], None, "below", text, dimension, owner=assumption.id)


@caution("P12", "warning", "Velocity on one side", source="first law of thermodynamics")
def velocity_on_one_side(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Velocity stated for one state of a stream; for another of the same piece neither stated nor solved for."""
    for tag, kind in plant.kinds.items():
        sides = {port.name: port.side for port in kinds()[kind].ports}
        streams: dict[tuple[str, str], list[str]] = {}
        for connection in plant.connections[tag]:
            stream = (sides.get(connection.port, ""), plant.state_fluids[connection.state])
            streams.setdefault(stream, []).append(connection.state)
        for states in streams.values():
            stated = [state for state in states if f"states.{state}.velocity" in plant.axis.givens]
            silent = [state for state in states if not plant.has(f"states.{state}.velocity")]
            if stated and silent:
                path = f"states.{stated[0]}.velocity"
                text = f"A velocity is stated for state {', '.join(stated)} of {tag} but not for state "
                text += (
                    f"{', '.join(silent)}: the kinetic energy counts on one side only. State it for all, or for none."
                )
                yield Finding(path, plant.samples(path), None, "below", text, "velocity", owner=f"equipment.{tag}")


@caution("P13", "note", "Not used", source="structure of the calculation")
def unused(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """State that no piece of equipment or process uses, fluid that no state uses; nothing where there is neither."""
    if not plant.kinds and not plant.processes and not plant.vessels:
        return
    used = {connection.state for connections in plant.connections.values() for connection in connections}
    used |= {state for process in plant.processes.values() for state in process.states}
    used |= {state for vessel in plant.vessels.values() for state in vessel.states}
    words = (("piece of equipment", plant.kinds), ("process", plant.processes), ("vessel", plant.vessels))
    users = [word for word, some in words if some]
    for state in plant.state_fluids:
        if state not in used:
            path = f"states.{state}"
            text = f"State {state} is used by no {' and no '.join(users)}."
            yield Finding(path, None, None, "above", text, None, owner=path)
    for fluid in plant.fluids:
        if fluid not in plant.state_fluids.values():
            path = f"fluids.{fluid}"
            yield Finding(path, None, None, "above", f"Fluid {fluid} is used by no state.", None, owner=path)


@caution("P17", "note", "Property model changes", source="structure of the calculation")
def model_changes(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Streams of one substance and one zero that a piece has by one kind of model on its way in, by another out."""
    for tag, kind in plant.kinds.items():
        sides = {port.name: port.side for port in kinds()[kind].ports}
        streams: dict[tuple[str, str | None], dict[str, str]] = {}
        for connection in plant.connections[tag]:
            fluid = plant.fluid_of(connection.state)
            stream = streams.setdefault((sides.get(connection.port, ""), fluid.substance), {})
            stream.setdefault(fluid.kind, connection.state)
        for (_, substance), models in streams.items():
            if substance is None or len(models) < 2:
                continue
            told = " and ".join(f"state {state} by the model {model}" for model, state in models.items())
            text = f"{tag} has {substance} of {told}: what the two models differ by counts as enthalpy and entropy of "
            text += "the piece."
            yield Finding(f"equipment.{tag}", None, None, "above", text, None, owner=f"equipment.{tag}")


def _result(path: str) -> str:
    """A result in words, such as "power of T-1"."""
    parts = path.split(".")
    owner = ".".join(parts[1:-1])
    words = NAMES[parts[-1]].text.partition(",")[0].lower()
    return f"{words} of {'state ' + owner if parts[0] == 'states' else owner or 'the whole'}"

"""The headline results: what a reader looks for first, a handful for each piece."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from reportgen.balances import kinds
from reportgen.evaluation.closed import closed_owners
from reportgen.evaluation.evaluated import ClosedProcess, EvaluatedPlant

if TYPE_CHECKING:
    from reportgen.balances import Solution

__all__ = ["summary"]

#: Of a process and of sums over processes, in this order.
OF_PROCESSES = ("heat", "work", "entropy_generation", "lost_work")
#: What a process leads to, told where it changes.
OF_END_STATES = ("temperature", "pressure", "quality", "volume")
#: Part of a value below which it counts as unchanged.
UNCHANGED = 1e-9
#: Of a piece and of sums over pieces, in this order.
SUMS = ("entropy_generation", "lost_work", "power")
OF_PIECES = (*SUMS, "shaft_power", "isentropic_efficiency", "duty", "heat", "excess_air", "adiabatic_temperature")
#: Of cycles and of compressions in several stages.
OF_CYCLES = ("thermal_efficiency", "coefficient_of_performance", "second_law_efficiency", "isothermal_efficiency")
#: Of a vessel.
OF_VESSELS = (
    "entropy_generation",
    "vessel_entropy_generation",
    "valve_entropy_generation",
    "wall_entropy_generation",
    "lost_work",
    "mass_transferred",
    "final_temperature",
    "minimum_temperature",
    "maximum_temperature",
    "minimum_wall_temperature",
    "duration",
)
FLOWS = ("mass_flow", "volume_flow", "molar_flow")


def summary(plant: EvaluatedPlant, solution: Solution, totals: Sequence[str]) -> list[str]:
    """Paths of the headline results: those of each piece, flows that were solved for, then sums over trains and all;
    then the same of processes, each with the states it leads to.

    Plain inputs are left out, and zeros, but for an entropy generation: one that could not be evaluated, or is none,
    must be seen. Sums over a single piece repeat what the piece says and are left out. Without equipment, states are
    the results.
    """
    if not plant.kinds and not plant.processes and not plant.vessels:
        return [
            f"states.{state}.{name}" for state in plant.state_fluids for name in ("temperature", "specific_entropy")
        ]
    found = []
    for tag in plant.kinds:
        found += [f"equipment.{tag}.{name}" for name in OF_PIECES]
        found += _outlet_pressures(plant, solution, tag)
    found += _solved_flows(plant)
    owners = [f"trains.{name}" for name, tags in plant.trains.items() if len(tags) > 1]
    owners += ["total"] if len(totals) > 1 else []
    found += [f"{owner}.{name}" for owner in owners for name in (*SUMS, *_of_cycle(solution, owner))]
    found += _of_processes(plant)
    found += [f"vessels.{tag}.{name}" for tag in plant.vessels for name in OF_VESSELS]
    return [path for path in found if _tells(plant, path)]


def _of_cycle(solution: Solution, owner: str) -> tuple[str, ...]:
    """Efficiencies of a cycle and of a compression in stages."""
    repeated = owner == "total" and len(solution.plant.trains) == 1
    return () if repeated else OF_CYCLES


def _of_processes(plant: EvaluatedPlant) -> list[str]:
    found = []
    for tag, process in plant.processes.items():
        found += [f"processes.{tag}.{name}" for name in OF_PROCESSES]
        found += [f"processes.{tag}.entropy_of_mixing"] if process.mixes else []
        found += [path for state in process.after for path in _changed(plant, process, state)]
    sums = [(owner, tags) for owner, tags in closed_owners(plant) if owner in plant.closed]
    return found + [f"{owner}.{name}" for owner, tags in sums if len(tags) > 1 for name in OF_PROCESSES]


def _changed(plant: EvaluatedPlant, process: ClosedProcess, state: str) -> list[str]:
    """Properties of a state in the end that are not those of the same body before.

    The volume of parts that became one is the sum of theirs, and no news.
    """
    bodies = dict(zip(process.after, process.before, strict=True)) if len(process.after) == len(process.before) else {}
    found = []
    for name in OF_END_STATES if bodies else OF_END_STATES[:-1]:
        value = plant.samples(f"states.{state}.{name}")[0]
        before = plant.samples(f"states.{bodies.get(state)}.{name}")[0]
        if not abs(value - before) <= UNCHANGED * abs(value):
            found.append(f"states.{state}.{name}")
    return found


def _tells(plant: EvaluatedPlant, path: str) -> bool:
    if path not in plant.values or path in plant.axis.givens:
        return False
    return path.endswith(".entropy_generation") or (plant.has(path) and plant.samples(path)[0] != 0.0)


def _outlet_pressures(plant: EvaluatedPlant, solution: Solution, tag: str) -> list[str]:
    """Outlet pressures of a machine that its power or efficiency determines, and no given ratio or other piece."""
    if not plant.power_signs[tag]:
        return []
    owner = f"equipment.{tag}."
    found = []
    for state in plant.states_at(tag, "out"):
        path = f"states.{state}.pressure"
        step = next((step for step in solution.steps if path in step.solves), None)
        own = [] if step is None else [use for use in step.uses if use.startswith(owner)]
        if own and f"{owner}pressure_ratio" not in plant.axis.givens:
            found.append(path)
    return found


def _solved_flows(plant: EvaluatedPlant) -> list[str]:
    """The first mass flow of every stream of which no state has a given flow.

    States belong to one stream when a piece has one of them in and the other out and mixes neither.
    """
    stream = {state: state for state in plant.state_fluids}

    def root(state: str) -> str:
        while stream[state] != state:
            state = stream[state]
        return state

    for tag, kind in plant.kinds.items():
        sides = {port.name: port.side for port in kinds()[kind].ports}
        groups: dict[tuple[str, str], tuple[list[str], list[str]]] = {}
        for port, direction, state in plant.connections[tag]:
            group = groups.setdefault((sides.get(port, ""), plant.state_fluids[state]), ([], []))
            group[direction == "out"].append(state)
        for inlets, outlets in groups.values():
            if len(inlets) == len(outlets) == 1:
                stream[root(outlets[0])] = root(inlets[0])
    given = {root(state) for state in stream if any(f"states.{state}.{name}" in plant.axis.givens for name in FLOWS)}
    connected = dict.fromkeys(connection.state for entry in plant.connections.values() for connection in entry)
    firsts = {root(state): state for state in reversed(connected)}
    return [
        f"states.{state}.mass_flow" for state in connected if firsts[root(state)] == state and root(state) not in given
    ]

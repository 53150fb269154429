"""Vessels of a plant whose network is solved: followed one by one, their results entered, assumptions listed."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from reportgen.balances.book import AMBIENT
from reportgen.balances.plant import Piece
from reportgen.balances.solution import Assumption, Solution
from reportgen.balances.vessels.definitions import vessel_of
from reportgen.balances.vessels.following import BALANCED, TOLERANCE, Following, Vessel, follow
from reportgen.balances.vessels.paths import History, ends, extreme, history, integrals
from reportgen.balances.vessels.results import FollowedVessel, enter_results
from reportgen.errors import Fault

__all__ = ["VesselPath", "add_vessel_results"]

#: An integration is repeated with steps half as long: errors of a method of order 5 then fall by this factor.
_HALVED = 32.0
#: Results that the repetition is compared in.
_COMPARED = ("final_mass", "final_temperature", "minimum_temperature", "final_wall_temperature", "duration")


@dataclass(frozen=True)
class VesselPath:
    """What a vessel has beside its values: its path in the base case and what is said about it.

    ``errors``: name of a result to what changed in it when the steps were halved [SI]. ``stopped``: why the path ends
    before its final pressure; empty where it does not. ``results``: what the errors are those of.
    """

    history: History
    steps: int
    errors: Mapping[str, float]
    stopped: str
    charging: bool
    vessel: Vessel
    results: Mapping[str, float]

    def relative_errors(self) -> list[float]:
        """The errors in parts of the results."""
        return [error / abs(self.results[name]) for name, error in self.errors.items() if self.results[name] != 0.0]


def add_vessel_results(solution: Solution) -> None:
    """Follow every vessel and enter its results in a solution whose network is solved."""
    for tag, piece in solution.vessels.items():
        solution.vessel_paths[tag] = _followed(solution, piece)


def _found(vessel: Vessel, columns: int, tolerance: float = TOLERANCE, refined: float = 1.0) -> FollowedVessel:
    following = follow(vessel, columns, tolerance, refined)
    at_end = ends(following)
    return FollowedVessel(
        following, at_end, integrals(following), extreme(following, at_end), extreme(following, at_end, lowest=False)[0]
    )


def _followed(solution: Solution, piece: Piece) -> VesselPath:
    """Follow one vessel twice, the second time its base case alone with steps half as long, and enter its results."""
    columns = solution.values[AMBIENT].size
    vessel = vessel_of(piece, solution.values, columns)
    found = _found(vessel, columns)
    closer = _found(vessel.column(0), 1, TOLERANCE / _HALVED, 0.5)
    results = {name: float(found.result(name)[0]) for name in _COMPARED}
    errors = {name: abs(value - float(closer.result(name)[0])) for name, value in results.items() if np.isfinite(value)}
    stopped = _why_stopped(found.following)
    _assume(solution, piece, vessel)
    enter_results(solution, piece, found, stopped)
    if stopped:
        hint = "See the history up to there."
        fault = Fault(f"{piece.title}: {stopped}.", piece.path("final_temperature"), hint=hint)
        solution.warnings.append(fault)
    steps = found.following.steps.of(0).size
    return VesselPath(history(found.following, found.ends), steps, errors, stopped, vessel.charging, vessel, results)


def _assume(solution: Solution, piece: Piece, vessel: Vessel) -> None:
    """List what is taken for granted about a vessel."""

    def add(key: str, text: str, *affects: str, basis: str = "not stated in the file") -> None:
        paths = tuple(piece.path(name) for name in affects)
        solution.assumptions.append(Assumption(piece.path(key), text, piece.owner, paths, basis))

    title = piece.title
    if vessel.wall is None:
        add("adiabatic", f"{title}: no heat passes between the wall and the content.", "heat")
    else:
        text = f"{title}: no heat passes from the surroundings to the metal."
        add("insulated", text, "final_wall_temperature", "heat", basis="no heat to the outside is part of the kind")
        if vessel.wall.conductance is None:
            text = f"{title}: the metal has the temperature of the content at any time."
            add("wall_follows", text, "heat", "wall_entropy_generation")
        if piece.path("wall.initial_temperature") not in piece.given:
            whose = "the surroundings" if vessel.initial is None else "the content"
            text = f"{title}: in the beginning the metal has the temperature of {whose}."
            add("wall_begins", text, "final_wall_temperature", "heat")
    text = f"{title}: the content is of one pressure and temperature throughout, its phases in equilibrium."
    add("uniform", text, "final_temperature", basis="balance of one volume")
    if not vessel.charging and vessel.outlet != "homogeneous":
        text = (
            f"{title}: when one of the phases is gone, what leaves is the content as it is, also if it condenses again."
        )
        add("one_phase_left", text, "mass_transferred", basis="the outlet no longer tells phases apart")
    if not vessel.charging:
        if piece.options.get("outlet") is None:
            text = f"{title}: what leaves is the content as it is, liquid and vapour in their proportion."
            add("homogeneous", text, "mass_transferred", "enthalpy_with_mass")
        if vessel.back_pressure is None:
            text = f"{title}: no back pressure is stated; the boundary is drawn before the valve."
            add("valve_outside", text, "valve_entropy_generation", "entropy_with_mass", "entropy_generation")
    if vessel.supply_volume is not None:
        text = f"{title}: the vessel that supplies is adiabatic, and what leaves it is its content as it is."
        add("supply_adiabatic", text, "supply_final_temperature", "entropy_with_mass")
    if vessel.flow_area is not None:
        text = (
            f"{title}: the flow to the throat of the orifice is isentropic and in equilibrium, two phases having "
            "one velocity; the discharge coefficient holds for all of it."
        )
        add("throat", text, "duration", basis="homogeneous equilibrium flow")
        if piece.path("orifice.discharge_coefficient") not in piece.given:
            add("discharge_coefficient", f"{title}: the discharge coefficient is 1.", "duration")
        if vessel.final_pressure is None:
            text = f"{title}: the pressures count as balanced when {BALANCED:g} of their first difference is left."
            add("balanced", text, "duration", basis="the flow comes to rest asymptotically")


def _why_stopped(following: Following) -> str:
    """Why the base case ends before its final pressure; empty where it does not."""
    if following.complete[0]:
        return ""
    fluid = following.vessel.fluid
    title = fluid.title[:1].lower() + fluid.title[1:] if fluid.title[1:2].islower() else fluid.title
    triple = fluid.limits.triple_point
    if following.place[0] <= following.lowest * (1.0 + 1e-6):
        if triple is not None and following.lowest <= triple.temperature + 1.0:
            return f"not followed below the triple point of {title}, where solid forms"
        return f"not followed below the lowest temperature of the property model of {title}"
    return (
        f"the property model of {title} has no state on the further way, or in the throat of the orifice, or the path "
        "needs too many steps"
    )

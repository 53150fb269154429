"""Vessels: what cautions and figures read of them, their balances from values alone, and the figures of their paths."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

if TYPE_CHECKING:
    from reportgen.balances import Solution
    from reportgen.balances.vessels.accounting import VesselPath
    from reportgen.evaluation.evaluated import EvaluatedPlant
    from reportgen.spec.calculation import Calculation, Limits

__all__ = [
    "EvaluatedVessel",
    "evaluated_vessels",
    "minimum_metal_temperature",
    "vessel_balances",
    "vessel_figures",
    "vessel_owners",
    "vessel_path",
    "vessel_paths_of",
]

Array = npt.NDArray[np.float64]

#: Rows of the table behind a history.
_ROWS = 12


@dataclass(frozen=True)
class EvaluatedVessel:
    """A vessel: its kind by name, the state it begins with and the one it is fed from, its limits, its path.

    ``initial`` is None for an evacuated one, ``supply`` for one that is discharged. ``metal``: it has a wall.
    """

    kind: str
    initial: str | None
    supply: str | None
    limits: Limits | None
    metal: bool
    path: VesselPath

    @property
    def states(self) -> tuple[str, ...]:
        """Its states."""
        return tuple(state for state in (self.initial, self.supply) if state is not None)


def evaluated_vessels(calculation: Calculation, solution: Solution) -> dict[str, EvaluatedVessel]:
    """Every vessel by its tag."""
    found = {}
    for tag, piece in calculation.vessels.items():
        path = solution.vessel_paths[tag]
        initial, supply = (next(iter(piece.ports.get(port, ())), None) for port in ("initial", "supply"))
        found[tag] = EvaluatedVessel(piece.kind, initial, supply, piece.limits, path.vessel.wall is not None, path)
    return found


def vessel_owners(plant: EvaluatedPlant) -> list[tuple[str, Sequence[str]]]:
    """Vessels with their tags."""
    return [(f"vessels.{tag}", (tag,)) for tag in plant.vessels]


def vessel_balances(plant: EvaluatedPlant, tag: str) -> dict[str, tuple[float, float]]:
    """What mass, energy and entropy balances of a vessel leave, with the size of their terms.

        mass      m_1 ± ∫ dm − m_2                                            [kg]
        energy    U_1 + Q − W + H_m − U_2                                     [J]
        entropy   S_2 − S_1 − S_Q − S_m − Σ parts of the generation           [J/K]

    The integrals are those along the path, the rest belongs to its ends: what is left is the error of the integration.
    """

    def base(name: str) -> float:
        return float(plant.samples(f"vessels.{tag}.{name}")[0])

    energy = [base("initial_energy"), base("heat"), -base("work"), base("enthalpy_with_mass"), -base("final_energy")]
    entropy = [base("final_entropy"), -base("initial_entropy"), -base("entropy_with_heat"), -base("entropy_with_mass")]
    entropy += [-base(f"{part}_entropy_generation") for part in ("vessel", "valve", "wall")]
    masses = abs(base("initial_mass")) + abs(base("final_mass")) + abs(base("mass_transferred"))
    return {
        "mass": (base("mass_imbalance"), masses),
        **{
            name: (float(np.sum(terms)), float(np.sum(np.abs(terms))))
            for name, terms in (("energy", energy), ("entropy", entropy))
        },
    }


def vessel_path(path: VesselPath) -> dict[str, Any]:
    """What the record says of the integration of a path."""
    return {"steps": path.steps, "errors": dict(path.errors), "stopped": path.stopped or None}


def vessel_paths_of(plant: EvaluatedPlant, fluid: str) -> list[dict[str, Any]]:
    """Ways of the contents of a fluid in the diagram of temperature and entropy."""
    found = []
    for tag, vessel in plant.vessels.items():
        if plant.state_fluids[vessel.states[0]] == fluid:
            history = vessel.path.history
            known = np.isfinite(history.entropy) & np.isfinite(history.temperature)
            curve = {"entropy": history.entropy[known].tolist(), "temperature": history.temperature[known].tolist()}
            found.append({"equipment": tag, "role": "content", "mixing": False, **curve})
    return found


def vessel_figures(plant: EvaluatedPlant) -> list[dict[str, Any]]:
    """The history of every vessel: temperatures and pressure against time, or, without time, against the mass."""
    figures = []
    for tag, vessel in plant.vessels.items():
        history = vessel.path.history
        if history.mass.size < 2:
            continue
        timed = history.time is not None and bool(np.isfinite(history.time).all())
        against = history.time if timed and history.time is not None else history.mass
        columns: dict[str, Array] = {"pressure": history.pressure, "temperature": history.temperature}
        if vessel.metal:
            columns["wall_temperature"] = history.wall_temperature
        if history.mass_flow is not None and timed:
            columns["mass_flow"] = history.mass_flow
        rows = _rows(against)
        parts = ["Upper panel: temperature of the content" + (" and of the metal." if vessel.metal else ".")]
        parts += ["Lower panel: pressure of the content."]
        worst = max((error for error in vessel.path.relative_errors()), default=0.0)
        parts.append(
            f"{vessel.path.steps} steps; with steps half as long no result changes by more than {worst:.1g} of it."
        )
        if vessel.path.stopped:
            parts.append(f"The path ends early: {vessel.path.stopped}.")
        figures.append(
            {
                "id": f"vessel-{tag}",
                "kind": "vessel-history",
                "title": f"{'Charging' if vessel.path.charging else 'Discharge'} of {tag}",
                "caption": " ".join(parts),
                "against": "duration" if timed else "mass",
                "along": against.tolist(),
                "mass": history.mass.tolist(),
                "quality": _quality(history.quality),
                **{name: values.tolist() for name, values in columns.items()},
                "rows": rows,
            }
        )
    return figures


def _quality(quality: Array) -> list[float | None]:
    return [float(value) if np.isfinite(value) else None for value in quality]


def _rows(along: Array) -> list[int]:
    """Numbers of the places for the table: about evenly spaced, the first and the last among them."""
    wanted = np.linspace(along[0], along[-1], _ROWS)
    return sorted({int(np.argmin(np.abs(along - place))) for place in wanted})


def minimum_metal_temperature(plant: EvaluatedPlant, tag: str) -> tuple[str, Array]:
    """Path and samples of the lowest temperature that the metal of a vessel can have had, shape (N,).

    That of the wall where there is one, else that of the content; of a path that ends early, the last one.
    """
    name = "minimum_wall_temperature" if plant.vessels[tag].metal else "minimum_temperature"
    path = f"vessels.{tag}.{name}"
    if not plant.has(path):
        path = f"vessels.{tag}.followed_temperature"
    return path, plant.samples(path)

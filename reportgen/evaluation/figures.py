"""Data of the figures, in SI: what to draw, not how.

Curves are sampled so that straight pieces between samples are not seen: the saturation dome half evenly in temperature
and half evenly in θ^(1/3), θ = 1 − T/Tc, in which both branches are nearly straight up to the critical point; isobars
evenly in entropy, with the saturated states put in; processes evenly along the path that the kind of equipment states.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.evaluation.models import fluid_name
from reportgen.evaluation.vessels import vessel_paths_of

if TYPE_CHECKING:
    from reportgen.balances import Solution

__all__ = ["bar_figures", "isobar", "saturation_dome", "temperature_entropy_figures"]

Array = npt.NDArray[np.float64]
Curve = dict[str, Any]

DOME_SAMPLES = 80  # a branch
ISOBAR_SAMPLES = 90
PATH_SAMPLES = 60

#: Closest approach to the critical point, as 1 − T/Tc; nearer, two-phase densities cannot be told apart reliably.
CLOSEST_TO_CRITICAL = 1e-5
CLOSEST_ABOVE_CRITICAL = 1e-9
#: Pressures closer than this part of each other share one isobar.
SAME_PRESSURE = 1e-3
_LINES = (
    "Temperature against specific entropy: thin lines are isobars through the states, thick lines the states passed "
    "on the way."
)
_ONE_LINE = (
    "Temperature against specific entropy: without compression one depends on the other alone, so that the thin line "
    "holds at every pressure; thick lines are the states passed on the way."
)
#: Least entropy span of the states [J/(kg·K)] where no gas constant is known.
LEAST_SPAN = 100.0
_ACCOUNT_CAPTIONS = {
    "entropy_flow": "What enters and what is generated together leave; entropies relative to the stated zeros.",
    "entropy": "What is there at the start, what enters with heat and what is generated together are there in the end "
    "or leave with heat; entropies relative to the stated zeros.",
}
#: Room left and right of the states for isobars, as a part of the entropy span of the states.
MARGIN = 0.35


def temperature_entropy_figures(plant: EvaluatedPlant, solution: Solution) -> list[dict[str, Any]]:
    """One T–s figure for each fluid that has a state with a known temperature and entropy.

    Args:
        plant: the solved plant (base case).
        solution: knows the way of every stream through its piece.
    """
    figures = []
    curves = solution.curves(PATH_SAMPLES)
    for identifier, fluid in plant.fluids.items():
        points = [point for state in plant.state_fluids if (point := _point(plant, state, identifier)) is not None]
        if not points:
            continue
        contents = vessel_paths_of(plant, identifier)
        span = _entropy_span([*points, *_ends(contents)], fluid.gas_constant)
        ends = [f"states.{point['state']}.pressure" for point in points]
        ends += [f"vessels.{content['equipment']}.followed_pressure" for content in contents]
        pressures = _distinct(plant.samples(path)[0] for path in ends)
        if fluid.kind == "incompressible":
            del pressures[1:]
        paths = [
            {
                "equipment": curve.equipment,
                "role": curve.role,
                "mixing": curve.mixing,
                **_curve(curve.entropy, curve.temperature),
            }
            for curve in curves
            if curve.fluid == identifier
        ]
        paths += contents
        if len(points) < 2 and not paths and (plant.kinds or plant.processes or plant.vessels):
            continue  # one state alone, on no way: nothing to see
        dome = saturation_dome(fluid)
        parts = [_ONE_LINE if fluid.kind == "incompressible" else _LINES]
        parts += ["Broken lines only join states: what lies between is not known."] if _any_broken(paths) else []
        parts += ["The dome is the saturation line, closed at the critical point."] if dome else []
        parts += [_zero(fluid.entropy_zero)]
        figures.append(
            {
                "id": f"temperature-entropy-{identifier}",
                "kind": "temperature-entropy",
                "fluid": identifier,
                "title": f"Temperature and entropy of {fluid_name(identifier, fluid.title)}",
                "caption": " ".join(parts),
                "dome": dome,
                "isobars": [{"pressure": float(pressure), **isobar(fluid, pressure, *span)} for pressure in pressures],
                "paths": paths,
                "points": points,
            }
        )
    return figures


def _ends(paths: Iterable[Mapping[str, Any]]) -> list[dict[str, float]]:
    """The last place of every path that has one."""
    return [{"entropy": path["entropy"][-1]} for path in paths if path["entropy"]]


def _any_broken(paths: Iterable[Mapping[str, Any]]) -> bool:
    return any(path["mixing"] and len(path["entropy"]) > 1 for path in paths)


def _zero(text: str) -> str:
    """Where the entropy of a model is zero, as a sentence."""
    entropy = text.partition(" Enthalpy: ")[0].rstrip(".")
    return f"{entropy}." if entropy.startswith("Entropy") else f"Entropy zero: {entropy}."


def bar_figures(
    plant: EvaluatedPlant, train_of: Mapping[str, str | None], accounts: Mapping[str, Mapping[str, Any]]
) -> list[dict[str, Any]]:
    """Lost work piece by piece, and entropy entering, generated and leaving account by account.

    A figure without anything to draw is left out: no entropy generation that could be stated, no work lost anywhere.
    """
    return [
        *_lost_work(plant, train_of, "equipment", plant.kinds, "Work forgone in each piece", ""),
        *_lost_work(plant, train_of, "processes", plant.processes, "Work forgone in each process", "-of-processes"),
        *_lost_work(plant, train_of, "vessels", plant.vessels, "Work forgone in each vessel", "-of-vessels"),
        *_accounts(accounts, "entropy_flow", "Entropy entering and generated", ""),
        *_accounts(accounts, "entropy", "Entropy at the start, entering and generated", "-of-processes"),
    ]


def _lost_work(
    plant: EvaluatedPlant,
    train_of: Mapping[str, str | None],
    family: str,
    tags: Iterable[str],
    title: str,
    suffix: str,
) -> list[dict[str, Any]]:
    bars = []
    for tag in tags:
        path = f"{family}.{tag}.lost_work"
        if plant.has(path):
            estimate = plant.estimate(path)
            bars.append(
                {
                    "label": tag,
                    "path": path,
                    "value": estimate.value,
                    "expanded_uncertainty": estimate.expanded_uncertainty,
                    "train": train_of.get(tag),
                }
            )
    if not any(bar["value"] != 0.0 for bar in bars):
        return []
    return [
        {
            "id": f"lost-work{suffix}",
            "kind": "lost-work-bars",
            "dimension": plant.dimension_of(str(bars[0]["path"])),
            "title": title,
            "caption": "Temperature of the surroundings times entropy generation"
            + (", with its expanded uncertainty." if any(bar["expanded_uncertainty"] for bar in bars) else "."),
            "bars": bars,
        }
    ]


def _accounts(accounts: Mapping[str, Mapping[str, Any]], dimension: str, title: str, suffix: str) -> list[Any]:
    complete = [
        {
            "label": account["title"],
            "entering": account["sum_entering"],
            "generated": sum(line["value"] for line in account["generated"]),
            "leaving": account["sum_leaving"],
        }
        for account in accounts.values()
        if account["dimension"] == dimension
        and account["generated"]
        and all(math.isfinite(line["value"]) for line in account["generated"])
    ]
    if not complete:
        return []
    return [
        {
            "id": f"entropy-account{suffix}",
            "kind": "entropy-account-bars",
            "dimension": dimension,
            "title": title,
            "caption": _ACCOUNT_CAPTIONS[dimension],
            "bars": complete,
        }
    ]


def saturation_dome(fluid: Any) -> Curve | None:
    """Saturation line from the saturated liquid at the lowest temperature over the critical point to the vapour.

    Both branches meet in the critical point, which stands once in the middle. None for fluids without saturation.

    Returns:
        ``entropy`` [J/(kg·K)] and ``temperature`` [K], equally long lists.
    """
    critical = fluid.limits.critical_point
    if critical is None or not hasattr(fluid, "saturation"):
        return None
    triple = fluid.limits.triple_point
    lowest = max(fluid.limits.minimum_temperature, triple.temperature if triple is not None else 0.0)
    reach = 1.0 - lowest / critical.temperature
    near = np.linspace(CLOSEST_TO_CRITICAL ** (1 / 3), reach ** (1 / 3), DOME_SAMPLES // 2, endpoint=False) ** 3
    even = np.linspace(0.0, reach, DOME_SAMPLES // 2 + 1)[1:-1]
    temperature = np.array([lowest, *(critical.temperature * (1.0 - np.sort([*near, *even])[::-1]))])
    liquid, vapour = fluid.saturation(temperature=temperature, errors="mask")
    # The critical point itself is ill-conditioned; where a model has no state there, the next one above stands for it.
    summit = critical.temperature * np.array([1.0, 1.0 + CLOSEST_ABOVE_CRITICAL])
    above = np.asarray(fluid.at(temperature=summit, density=critical.density, errors="mask").specific_entropy)
    top = above[np.isfinite(above)][:1]
    entropies = np.concatenate(
        [
            np.asarray(liquid.specific_entropy),
            top,
            np.asarray(vapour.specific_entropy)[::-1],
        ]
    )
    temperatures = np.concatenate(
        [
            np.asarray(liquid.temperature),
            np.full(top.size, critical.temperature),
            np.asarray(vapour.temperature)[::-1],
        ]
    )
    return _curve(entropies, temperatures)


def isobar(fluid: Any, pressure: float, lowest: float, highest: float) -> Curve:
    """Temperatures along one pressure [Pa] between two entropies [J/(kg·K)], where the model reaches."""
    entropy = np.linspace(lowest, highest, ISOBAR_SAMPLES)
    critical = fluid.limits.critical_point
    if critical is not None and pressure < critical.pressure and hasattr(fluid, "saturation"):
        corners = [float(state.specific_entropy) for state in fluid.saturation(pressure=pressure, errors="mask")]
        entropy = np.unique([*entropy, *(corner for corner in corners if lowest < corner < highest)])
    state = fluid.at(pressure=np.full_like(entropy, pressure), specific_entropy=entropy, errors="mask")
    return _curve(entropy, np.asarray(state.temperature))


def _point(plant: EvaluatedPlant, state: str, fluid: str) -> dict[str, Any] | None:
    if plant.state_fluids[state] != fluid:
        return None
    entropy, temperature = (
        float(plant.samples(f"states.{state}.{name}")[0]) for name in ("specific_entropy", "temperature")
    )
    if not (np.isfinite(entropy) and np.isfinite(temperature)):
        return None
    return {"state": state, "label": state, "entropy": entropy, "temperature": temperature}


def _entropy_span(points: Sequence[Mapping[str, Any]], gas_constant: float) -> tuple[float, float]:
    entropies = [point["entropy"] for point in points]
    lowest, highest = min(entropies), max(entropies)
    room = MARGIN * max(highest - lowest, gas_constant if math.isfinite(gas_constant) else LEAST_SPAN)
    return lowest - room, highest + room


def _distinct(pressures: Iterable[float]) -> list[float]:
    found: list[float] = []
    for pressure in sorted(float(pressure) for pressure in pressures if np.isfinite(pressure)):
        if not found or pressure > found[-1] * (1.0 + SAME_PRESSURE):
            found.append(pressure)
    return found


def _curve(entropy: Array, temperature: Array) -> Curve:
    known = np.isfinite(entropy) & np.isfinite(temperature)
    return {"entropy": entropy[known].tolist(), "temperature": temperature[known].tolist()}

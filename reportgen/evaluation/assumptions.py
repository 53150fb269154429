"""Assumptions, the author's and the program's, in one list; those that can be tested are tested.

A test (:mod:`reportgen.evaluation.trials`) solves the plant again with the assumption replaced by something better or
by a plausible other extreme.
"""

from __future__ import annotations

import functools
import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.evaluation.audits import entropy_resolution
from reportgen.evaluation.decisions import NEGLIGIBLE_PART_OF_UNCERTAINTY
from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.evaluation.phases import is_resolved
from reportgen.evaluation.trials import Trial

if TYPE_CHECKING:
    from reportgen.quantities import Display
    from reportgen.spec.calculation import Assumption

__all__ = [
    "AutomaticAssumption",
    "assumption_list",
    "boundary_temperature_test",
    "mean_fluid_temperature",
    "stream_assumption",
]

OPEN = "to be verified"
BY_DEFAULT = "by default"
TESTED = "tested"


@dataclass(frozen=True)
class AutomaticAssumption:
    """An assumption that the program took, with the result of its test (None: there is none for it).

    ``against_better`` says that the test puts something better in its place, and not only another plausible extreme.
    """

    id: str
    text: str
    basis: str
    affects: tuple[str, ...]
    test: dict[str, Any] | None = None
    against_better: bool = False


def assumption_list(
    authored: Mapping[str, Assumption], automatic: Iterable[AutomaticAssumption]
) -> list[dict[str, Any]]:
    """Record entries: open ones first, then the author's, then the program's.

    An automatic assumption is open when its test found it decisive, and ``tested`` when the test found less; without
    a test it stands ``by default``.
    """
    entries: list[dict[str, Any]] = [
        {
            "id": identifier,
            "text": item.text,
            "origin": "author",
            "basis": item.basis,
            "status": item.status,
            "owner": item.owner,
            "due": item.due,
            "affects": [],
            "test": None,
        }
        for identifier, item in authored.items()
    ]
    for assumption in automatic:
        verdict = None if assumption.test is None else assumption.test["verdict"]
        status = BY_DEFAULT if verdict is None else OPEN if verdict == "decisive" else TESTED
        entries.append(
            {
                "id": assumption.id,
                "text": assumption.text,
                "origin": "automatic",
                "basis": assumption.basis,
                "status": status,
                "owner": None,
                "due": None,
                "affects": list(assumption.affects),
                "test": assumption.test,
            }
        )
    return sorted(entries, key=lambda entry: (entry["status"] != OPEN, entry["origin"] != "author"))


def stream_assumption(plant: EvaluatedPlant) -> AutomaticAssumption | None:
    """Kinetic and potential energy left out of streams without velocity; None when every stream states its own.

    The basis says up to which velocity that is negligible: V = √(2 U(h)/3), where V²/2 reaches a third of the expanded
    uncertainty of the specific enthalpy, for the stream where this is lowest. Streams whose phase is not resolved have
    no such uncertainty and are passed over.
    """
    streams = [
        state
        for state in plant.state_fluids
        if plant.has(f"states.{state}.mass_flow") and f"states.{state}.velocity" not in plant.axis.givens
    ]
    if not streams:
        return None
    basis = "neither velocity nor elevation stated in the file"
    bounds = []
    for state in filter(functools.partial(is_resolved, plant), streams):
        uncertainty = plant.estimate(f"states.{state}.specific_enthalpy").expanded_uncertainty
        if uncertainty > 0.0:
            bounds.append((math.sqrt(2.0 * NEGLIGIBLE_PART_OF_UNCERTAINTY * uncertainty), state))
    if bounds:
        velocity, state = min(bounds)
        words = f"{float(f'{velocity:.2g}'):g} m/s (state {state})"
        basis += (
            f"; up to {words} kinetic energy stays below a third of the expanded uncertainty of the specific enthalpy"
        )
    text = "Kinetic and potential energy are left out of streams that state no velocity or elevation."
    return AutomaticAssumption("streams.kinetic-energy", text, basis, ())


def boundary_temperature_test(trial: Trial, tag: str, temperature_path: str, display: Display) -> dict[str, Any] | None:
    """What changes when heat leaves at the mean temperature of the fluid instead of that of the surroundings.

    The two are the extremes: drawn close to the fluid, the boundary leaves the drop of temperature towards the
    surroundings outside; drawn in the surroundings, it takes it in. None when the temperatures are not known. A
    boundary by which the piece would destroy entropy is told to be none, and not compared.
    """
    plant = trial.plant
    mean = mean_fluid_temperature(plant, tag)
    if not math.isfinite(mean):
        return None
    words = f"the mean temperature of the fluid in {tag}, {display.show(mean, 'temperature').text}"
    generated = f"equipment.{tag}.entropy_generation"
    resolution = entropy_resolution(plant, f"equipment.{tag}", (tag,))
    return trial.run(
        f"With the boundary at {words},",
        givens={temperature_path: mean},
        impossible=lambda values: (
            f"Not compared: a boundary at {words}, would have {tag} destroy entropy, so it lies at a lower one."
            if values.get(generated, math.nan) < -resolution
            else None
        ),
    )


def mean_fluid_temperature(plant: EvaluatedPlant, tag: str) -> float:
    """Temperature at which the fluid in a piece gives off or takes up its heat, in the mean [K]; NaN when not known.

    For one stream without work this is the entropic mean T = Δh/Δs, by which heat at changing temperature carries
    its entropy, as long as it lies between the temperatures of the states (a change of pressure changes the entropy
    too). Otherwise it is the arithmetic mean over all states.
    """
    states = plant.states_at(tag)
    temperatures = [float(plant.samples(f"states.{state}.temperature")[0]) for state in states]
    if not temperatures or not np.all(np.isfinite(temperatures)):
        return math.nan
    if len(states) == 2 and not plant.power_signs[tag]:
        heat, entropy = (
            float(np.subtract(*(plant.samples(f"states.{state}.{name}")[0] for state in states)))
            for name in ("specific_enthalpy", "specific_entropy")
        )
        if entropy != 0.0 and min(temperatures) <= heat / entropy <= max(temperatures):
            return heat / entropy
    return float(np.mean(temperatures))

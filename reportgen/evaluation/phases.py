"""How far states lie from saturation, and whether their phase is resolved within the uncertainty."""

from __future__ import annotations

from typing import Any, Literal

import numpy as np
import numpy.typing as npt

from reportgen.evaluation.evaluated import EvaluatedPlant

__all__ = [
    "changes_phase",
    "distance_from_saturation",
    "is_read_by_temperature",
    "is_resolved",
    "saturation_temperature",
]

Array = npt.NDArray[np.float64]

#: Phases between which enthalpy and entropy jump, or bend, at saturation.
APART = ("liquid", "vapour", "two-phase")


def saturation_temperature(plant: EvaluatedPlant, state: str, line: Literal["bubble", "dew"] = "dew") -> Array:
    """Saturation temperature at the pressure of a state [K], shape (N,); bubble and dew line differ for mixtures.

    NaN above the critical pressure, and for models without saturation.
    """
    fluid: Any = plant.fluid_of(state)
    if not hasattr(fluid, "saturation"):
        return np.full(plant.axis.columns, np.nan)
    liquid, vapour = fluid.saturation(pressure=plant.samples(f"states.{state}.pressure"), errors="mask")
    return np.asarray((vapour if line == "dew" else liquid).temperature, dtype=float)


def distance_from_saturation(plant: EvaluatedPlant, state: str) -> Array:
    """Distance of the temperature from the nearer saturation line at the same pressure [K], shape (N,).

    Positive in a single phase of the base case; samples on the other side of saturation are negative.
    """
    temperature = plant.samples(f"states.{state}.temperature")
    above = temperature - saturation_temperature(plant, state, "dew")
    below = saturation_temperature(plant, state, "bubble") - temperature
    return below if below[0] > above[0] else above


def is_read_by_temperature(plant: EvaluatedPlant, state: str) -> bool:
    """Whether pressure and temperature are given: readings that cannot tell the phases apart at saturation."""
    return all(f"states.{state}.{name}" in plant.axis.givens for name in ("pressure", "temperature"))


def changes_phase(plant: EvaluatedPlant, state: str) -> bool:
    """Whether a state has another phase in a column of an uncertain input than in the base case."""
    phases = [str(phase) for phase in np.asarray(plant.values.get(f"states.{state}.phase", ())).flat]
    return bool(phases) and phases[0] in APART and any(phase in APART and phase != phases[0] for phase in phases)


def is_resolved(plant: EvaluatedPlant, state: str) -> bool:
    """Whether the phase of a state stands within its uncertainty: no column changes it, and where pressure and
    temperature were read, they are further from saturation than the expanded uncertainty of that distance."""
    if changes_phase(plant, state):
        return False
    if plant.phase(state) not in APART or not is_read_by_temperature(plant, state):
        return True
    distance = plant.axis.estimate(distance_from_saturation(plant, state))
    return not distance.value <= distance.expanded_uncertainty

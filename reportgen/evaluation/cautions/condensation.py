"""The caution on water that an ideal gas keeps as vapour although it would condense."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

from reportgen.evaluation.cautions.entry import Finding, caution
from reportgen.evaluation.evaluated import EvaluatedPlant

if TYPE_CHECKING:
    from reportgen.fluids.model import Fluid

__all__ = ["water_condenses"]

Array = npt.NDArray[np.float64]

WATER = "H2O"
#: Molar mass of water [kg/mol], IAPWS R6-95(2018).
WATER_MOLAR_MASS = 0.018015268


@caution(
    "P16",
    "warning",
    "Water condenses",
    source="saturation pressure of water, IAPWS R6-95(2018)",
    limit=1.0,
    dimension="ratio",
)
def water_condenses(plant: EvaluatedPlant, limit: float) -> Iterator[Finding]:
    """Ideal gas with water vapour beyond saturation: partial pressure of the water above its saturation pressure.

    The amount told is what would condense at the temperature and pressure of the state, with the gas left saturated.
    """
    for state in plant.state_fluids:
        fluid: Any = plant.fluid_of(state)
        share = _water_share(fluid)
        if fluid.kind != "ideal-gas" or not share:
            continue
        temperature, pressure = (plant.samples(f"states.{state}.{name}") for name in ("temperature", "pressure"))
        if not np.isfinite(temperature[0] * pressure[0]):
            continue
        from reportgen.fluids.gases.condensation import water_saturation  # loads the real fluid water

        ratio, dew_point = (np.asarray(part, dtype=float) for part in water_saturation(fluid, temperature, pressure))
        text = f"The water vapour in state {state} ⟦is|may be⟧ beyond saturation (dew point {dew_point[0]:.4g} K): "
        text += (
            f"{_amount(share, float(ratio[0]), fluid.molar_mass)}The ideal gas keeps it as vapour, without the heat "
        )
        text += (
            "and the entropy of condensing. The value is the partial pressure of water over its saturation pressure."
        )
        yield Finding(f"states.{state}.temperature", ratio, limit, "below", text, "ratio")


def _water_share(fluid: Fluid) -> float:
    """Mole fraction of water [1]."""
    if fluid.composition is not None:
        return fluid.composition.get(WATER, 0.0)
    return 1.0 if (fluid.substance or "").casefold() in ("water", WATER.casefold()) else 0.0


def _amount(share: float, ratio: float, molar_mass: float) -> str:
    """How much would condense, as a sentence: n_c = (y − y_s)/(1 − y_s) of the gas, y_s = y/ratio; empty for none."""
    if not ratio > 1.0:
        return ""
    saturated = share / ratio
    if share >= 1.0:
        return "all of it would condense. "
    condensed = (share - saturated) / (1.0 - saturated)
    mass = condensed * WATER_MOLAR_MASS / molar_mass
    return f"{100 * condensed / share:.2g} % of the water, {100 * mass:.2g} % of the mass flow, would condense. "

"""The caution on water that an ideal gas keeps as vapour although it would condense."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from reportgen.evaluation.cautions.entry import Finding, caution
from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.quantities import Display

__all__ = ["water_condenses"]

#: Molar mass of water [kg/mol], IAPWS R6-95(2018).
WATER_MOLAR_MASS = 0.018015268
TRIPLE_TEMPERATURE = 273.16


@caution(
    "P16",
    "warning",
    "Water condenses",
    source="saturation pressure of water: IAPWS R6-95(2018), over ice R14-08(2011)",
    limit=1.0,
    dimension="ratio",
)
def water_condenses(plant: EvaluatedPlant, limit: float) -> Iterator[Finding]:
    """Ideal gas with water vapour beyond saturation: partial pressure of the water above its saturation pressure.

    The amount told is what would condense at the temperature and pressure of the state, the gas being left saturated.
    """
    for state in plant.state_fluids:
        fluid: Any = plant.fluid_of(state)
        if fluid.kind not in ("ideal-gas", "reacting-gas"):
            continue
        from reportgen.fluids.gases import condensation

        temperature, pressure = (plant.samples(f"states.{state}.{name}") for name in ("temperature", "pressure"))
        if hasattr(fluid, "frozen"):
            fluid = fluid.frozen(float(temperature[0]), float(pressure[0]))
        share = condensation.water_fraction(fluid)
        if not share or not np.isfinite(temperature[0] * pressure[0]):
            continue
        ratio, dew_point = condensation.water_saturation(fluid, temperature, pressure)
        condensed = float(condensation.condensed_water(fluid, temperature[0], pressure[0]))
        ice = temperature[0] < TRIPLE_TEMPERATURE
        text = f"The water vapour in state {state} ⟦is|may be⟧ beyond saturation{' over ice' if ice else ''}"
        if np.isfinite(dew_point[0]):
            text += f" (dew point {Display(plant.units).show(float(f'{dew_point[0]:.5g}'), 'temperature').text})"
        text += (
            f"{_amount(share, condensed, fluid.molar_mass)}. The ideal gas keeps it as vapour, without the heat and "
        )
        text += (
            "the entropy of condensing. The value is the partial pressure of the water over its saturation pressure."
        )
        yield Finding(f"states.{state}.temperature", ratio, limit, "below", text, "ratio")


def _amount(share: float, condensed: float, molar_mass: float) -> str:
    """How much would condense: of the water, and of the mass of the gas; empty for none."""
    if not condensed > 0.0:
        return ""
    if share >= 1.0:
        return "; all of it would condense"
    mass = condensed * WATER_MOLAR_MASS / molar_mass
    return f"; {100 * condensed / share:.2g} % of it, {100 * mass:.2g} % of the mass of the gas, would condense"

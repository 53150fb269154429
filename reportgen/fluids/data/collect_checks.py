"""What the saturation curves of a data file are worth: checked at collecting, and by the tests for every fluid."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.helmholtz import Helmholtz
from reportgen.fluids.real.saturation import SaturationCurves

__all__ = ["BARS", "Gaps", "equation_of", "gaps", "too_large"]

FloatArray = NDArray[np.float64]


class Gaps(NamedTuple):
    """Largest deviations of the curves of one fluid, at 1 − T/T_top from 1e-4 to the lowest temperature.

    ``gibbs``: difference of the specific Gibbs energies of both phases, in parts of RT (0 for pseudo-pure fluids, whose
    lines are published pressures); ``near``: the same at 1 − T/T_top from 1e-7 to 1e-4. ``liquid``, ``vapour``:
    densities against those that have the pressure of the curve by the equation, relative. ``inverse``: temperature at
    a pressure against the temperature it came from, relative. ``falls``: how far a curve that has to rise falls between
    two of the temperatures, relative. ``slope``: the smallest of (∂p/∂ρ)_T/(RT), which a stable phase has above zero.
    """

    gibbs: float
    near: float
    liquid: float
    vapour: float
    inverse: float
    falls: float
    slope: float


#: Largest deviations taken. Measured over all fluids: 1e-11 (R22); 2e-10 next to the critical point (chlorine, whose
#: critical region is so flat that its curves bend within a millikelvin; the next is vinyl chloride, 7e-13); 4e-10 and
#: 3e-10 (methyl stearate); 2e-13 (methyl palmitate); every curve rises, every slope is above 1e-4.
BARS = Gaps(gibbs=1e-10, near=5e-10, liquid=1e-9, vapour=1e-9, inverse=1e-11, falls=0.0, slope=0.0)


def equation_of(data: Mapping[str, Any]) -> Helmholtz:
    """The equation of a data file."""
    mass: float = data["molar_mass"]
    return Helmholtz(
        data["ideal"],
        data["residual"],
        reducing_temperature=data["reducing_temperature"],
        reducing_density=data["reducing_molar_density"] * mass,
        gas_constant=data["molar_gas_constant"] / mass,
    )


def gaps(data: Mapping[str, Any], count: int = 200) -> Gaps:
    """Deviations of the curves of a data file from its equation."""
    equation = equation_of(data)
    top, lowest = data["critical_point"]["temperature"], data["lower_end"]["temperature"]
    curves = SaturationCurves(data["saturation"], top)
    reach = 1 - lowest / top
    distance = np.unique(np.concatenate([np.geomspace(1e-4, reach, count // 2), np.linspace(1e-4, reach, count // 2)]))
    temperature = np.unique(np.maximum(top * (1 - distance), lowest))
    found = curves.at_temperature(temperature)
    rt = equation.gas_constant * temperature
    liquid = equation.properties(temperature, found.liquid_density)
    vapour = equation.properties(temperature, found.vapour_density)
    off_liquid = (liquid.pressure - found.bubble_pressure) / (found.liquid_density * liquid.pressure_density)
    off_vapour = (vapour.pressure - found.dew_pressure) / (found.vapour_density * vapour.pressure_density)
    # a pseudo-pure fluid's bubble line can reach above the pressure where both lines meet: there it has no inverse
    below = found.bubble_pressure < 0.9999 * curves.top_pressure
    boiling = curves.temperatures(found.bubble_pressure[below])[0] / temperature[below] - 1
    condensing = curves.temperatures(np.minimum(found.dew_pressure, curves.top_pressure))[1] / temperature - 1
    # the dew pressure and the density of the vapour rise with temperature; the density of a liquid may have a maximum
    rising = (found.dew_pressure, found.vapour_density)
    return Gaps(
        gibbs=0.0 if data["pseudo_pure"] else _gibbs(equation, curves, temperature),
        near=0.0 if data["pseudo_pure"] else _gibbs(equation, curves, top * (1 - np.geomspace(1e-7, 1e-4, count // 2))),
        liquid=float(np.abs(off_liquid).max()),
        vapour=float(np.abs(off_vapour).max()),
        inverse=float(max(np.abs(boiling).max(), np.abs(condensing).max())),
        falls=float(max(np.max(curve[:-1] / curve[1:] - 1) for curve in rising)),
        slope=float(min((liquid.pressure_density / rt).min(), (vapour.pressure_density / rt).min())),
    )


def _gibbs(equation: Helmholtz, curves: SaturationCurves, temperature: FloatArray) -> float:
    """Largest difference of the specific Gibbs energies of both phases at T [K], in parts of RT."""
    found = curves.at_temperature(temperature)
    liquid = equation.properties(temperature, found.liquid_density)
    vapour = equation.properties(temperature, found.vapour_density)
    gap = liquid.enthalpy - vapour.enthalpy - temperature * (liquid.entropy - vapour.entropy)
    return float(np.abs(gap / (equation.gas_constant * temperature)).max())


def too_large(found: Gaps) -> list[str]:
    """Names of the deviations above their bars; a slope has to lie above its own."""
    return [
        name
        for name, value, bar in zip(Gaps._fields, found, BARS, strict=True)
        if not (value > bar if name == "slope" else value <= bar)
    ]

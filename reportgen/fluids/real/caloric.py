"""Enthalpy, entropy and internal energy by name: their value, their slope with density, their rounding."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.helmholtz import Helmholtz, Properties

__all__ = ["caloric_value", "density_slope", "natural_unit", "rounding"]

FloatArray = NDArray[Any]

#: Rounding of a computed property, in parts of R T (R for entropy), and of its own value.
_ROUNDING, _OWN_ROUNDING = 2e-13, 1e-15


def caloric_value(name: str, found: Properties, density: FloatArray) -> FloatArray:
    """h [J/kg], s [J/(kg*K)] or u = h − p/ρ [J/kg] by its name, from what was found at ρ [kg/m3]; shape (N,)."""
    if name == "specific_entropy":
        return found.entropy
    if name == "specific_enthalpy":
        return found.enthalpy
    result: FloatArray = found.enthalpy - found.pressure / density
    return result


def density_slope(name: str, found: Properties, temperature: FloatArray, density: FloatArray) -> FloatArray:
    """ρ (∂y/∂ρ)_T of y = h [J/kg], s [J/(kg*K)] or u [J/kg] at T [K], ρ [kg/m3], shape (N,).

    ``ρ ∂s/∂ρ = −(∂p/∂T)/ρ``, ``ρ ∂h/∂ρ = ∂p/∂ρ − T (∂p/∂T)/ρ``, ``ρ ∂u/∂ρ = [p − T (∂p/∂T)]/ρ``.
    """
    thermal = found.pressure_temperature / density
    if name == "specific_entropy":
        return -thermal
    if name == "specific_enthalpy":
        result: FloatArray = found.pressure_density - temperature * thermal
        return result
    result = found.pressure / density - temperature * thermal
    return result


def natural_unit(name: str, equation: Helmholtz, temperature: FloatArray) -> FloatArray:
    """R [J/(kg*K)] for an entropy, R T [J/kg] for an energy at T [K]; shape (N,)."""
    scale = np.ones_like(temperature) if name == "specific_entropy" else temperature
    result: FloatArray = equation.gas_constant * scale
    return result


def rounding(name: str, equation: Helmholtz, temperature: FloatArray, value: FloatArray) -> FloatArray:
    """How far a computed y [SI] of about ``value`` [SI] may be off by rounding at T [K], shape (N,)."""
    result: FloatArray = _ROUNDING * natural_unit(name, equation, temperature) + _OWN_ROUNDING * np.abs(value)
    return result

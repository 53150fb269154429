"""Departures of a phase from the ideal gas at the same temperature and pressure, from temperature and volume.

    h − h° = p v − R T + (T da/dT − a) I/b
    s − s° = R ln[(v − b) p/(R T)] + (da/dT) I/b
    c_v − c_v° = T (d²a/dT²) I/b,       I = ln[(v + σ b)/(v + ε b)]/(σ − ε)

A volume translation c leaves s, u, c_p and c_v as they are and lowers v by c and h by c p (Péneloux 1982).
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.equation import CubicForm
from reportgen.fluids.cubics.mixing import Strength
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT

__all__ = ["Departures", "departures", "pressure"]

FloatArray = NDArray[Any]


class Departures(NamedTuple):
    """Shape (N,): ``enthalpy`` [J/mol], ``entropy`` [J/(mol*K)], ``isochoric_heat_capacity`` [J/(mol*K)] above those
    of the ideal gas; ``pressure_volume`` (∂p/∂v)_T [Pa*mol/m3] and ``pressure_temperature`` (∂p/∂T)_v [Pa/K].
    """

    enthalpy: FloatArray
    entropy: FloatArray
    isochoric_heat_capacity: FloatArray
    pressure_volume: FloatArray
    pressure_temperature: FloatArray


def pressure(form: CubicForm, strength: Strength, temperature: FloatArray, volume: FloatArray) -> FloatArray:
    """p [Pa] at T [K] and the equation's (untranslated) v [m3/mol]."""
    b = strength.covolume
    repulsion = MOLAR_GAS_CONSTANT * temperature / (volume - b)
    result: FloatArray = repulsion - strength.attraction / ((volume + form.lower * b) * (volume + form.upper * b))
    return result


def departures(
    form: CubicForm, strength: Strength, temperature: FloatArray, pressure: FloatArray, volume: FloatArray
) -> Departures:
    """Departures at T [K], p [Pa] and the equation's (untranslated) v [m3/mol] that belongs to them."""
    b, a = strength.covolume, strength.attraction
    thermal = MOLAR_GAS_CONSTANT * temperature
    free = volume - b
    denominator = (volume + form.lower * b) * (volume + form.upper * b)
    logarithm = form.logarithm(volume, b) / b
    return Departures(
        enthalpy=pressure * volume - thermal + (temperature * strength.first - a) * logarithm,
        entropy=MOLAR_GAS_CONSTANT * np.log(free * pressure / thermal) + strength.first * logarithm,
        isochoric_heat_capacity=temperature * strength.second * logarithm,
        pressure_volume=a * (2.0 * volume + form.sum * b) / denominator**2 - thermal / free**2,
        pressure_temperature=MOLAR_GAS_CONSTANT / free - strength.first / denominator,
    )

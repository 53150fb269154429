"""Melting lines: the pressure above (or, for water near its triple point, below) which the fluid is solid.

Forms, each of a part of the line, with the temperature T [K] and constants T₀ [K] and p₀ [Pa]::

    simon                p = p₀ + a [(T/T₀)^c − 1]
    polynomial-in-ratio  p = p₀ {1 + Σ a_i [(T/T₀)^t_i − 1]}
    polynomial-in-rise   p = p₀ [1 + Σ a_i (T/T₀ − 1)^t_i]
    kechin               T = T₀ [1 + (p − p₀)/a]^b exp[−c (p − p₀)]

Only temperatures at and above the triple point are dealt with; there every line carried rises with temperature.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["FORMS", "MeltingLine"]

FloatArray = NDArray[np.float64]
Part = Mapping[str, Any]


def _simon(part: Part, ratio: FloatArray) -> FloatArray:
    pressure: FloatArray = part["pressure"] + part["a"] * (ratio ** part["c"] - 1)
    return pressure


def _polynomial_in_ratio(part: Part, ratio: FloatArray) -> FloatArray:
    total = sum((a * (ratio**t - 1) for a, t in zip(part["a"], part["t"], strict=True)), np.ones_like(ratio))
    pressure: FloatArray = part["pressure"] * total
    return pressure


def _polynomial_in_rise(part: Part, ratio: FloatArray) -> FloatArray:
    rise = np.maximum(ratio - 1, 0)
    total = sum((a * rise**t for a, t in zip(part["a"], part["t"], strict=True)), np.ones_like(ratio))
    pressure: FloatArray = part["pressure"] * total
    return pressure


def _kechin(part: Part, ratio: FloatArray) -> FloatArray:
    """Newton's method from the line without its exponential, which bends it little within the limits."""
    scale, power, decay = part["a"], part["b"], part["c"] * part["a"]
    target = np.log(ratio)
    rise = ratio ** (1 / power) - 1
    for _ in range(6):
        gap = power * np.log1p(rise) - decay * rise - target
        rise = rise - gap / (power / (1 + rise) - decay)
    pressure: FloatArray = part["pressure"] + scale * rise
    return pressure


#: Pressure [Pa] on a part of a line as a function of T/T₀, by the names of the forms in the data files.
FORMS: dict[str, Callable[[Part, FloatArray], FloatArray]] = {
    "simon": _simon,
    "polynomial-in-ratio": _polynomial_in_ratio,
    "polynomial-in-rise": _polynomial_in_rise,
    "kechin": _kechin,
}


class MeltingLine:
    """Melting pressure as a function of temperature.

    Parameters
    ----------
    data : ``parts`` as in the data files, each with its ``form``, in ascending temperature.
    """

    def __init__(self, data: Mapping[str, Any]) -> None:
        self._parts: list[Part] = data["parts"]
        self.minimum_temperature: float = self._parts[0]["minimum_temperature"]
        self.maximum_temperature: float = self._parts[-1]["maximum_temperature"]

    def pressure(self, temperature: FloatArray) -> FloatArray:
        """Melting pressure [Pa] at temperature T [K] of shape (N,); infinite beyond the upper end of the line."""
        result = np.full_like(temperature, np.inf)
        for part in self._parts:
            inside = (temperature >= part["minimum_temperature"]) & (temperature <= part["maximum_temperature"])
            if inside.any():
                result[inside] = FORMS[part["form"]](part, temperature[inside] / part["temperature"])
        return result

    def temperature(self, pressure: FloatArray) -> FloatArray:
        """Melting temperature [K] at pressure p [Pa] of shape (N,), by bisection; at the ends of the line where p is
        beyond.
        """
        low = np.full_like(pressure, self.minimum_temperature)
        high = np.full_like(pressure, self.maximum_temperature)
        for _ in range(50):
            middle = 0.5 * (low + high)
            under = self.pressure(middle) < pressure
            low, high = np.where(under, middle, low), np.where(under, high, middle)
        return high

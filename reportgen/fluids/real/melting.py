"""Melting lines: the pressure above (or, for water near its triple point, below) which the fluid is solid.

Forms, with the temperature T [K], constants T₀ [K] and p₀ [Pa] of each part::

    simon                p = p₀ + a [(T/T₀)^c − 1]
    polynomial-in-ratio  p = p₀ {1 + Σ a_i [(T/T₀)^t_i − 1]}
    polynomial-in-rise   p = p₀ [1 + Σ a_i (T/T₀ − 1)^t_i]

Only temperatures at and above the triple point are dealt with; there every line carried rises with temperature.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["MeltingLine"]

FloatArray = NDArray[np.float64]


class MeltingLine:
    """Melting pressure as a function of temperature.

    Parameters
    ----------
    data : ``form`` and ``parts`` as in the data files, the parts in ascending temperature.
    """

    def __init__(self, data: Mapping[str, Any]) -> None:
        self._form: str = data["form"]
        self._parts: list[Mapping[str, Any]] = data["parts"]
        self.minimum_temperature: float = self._parts[0]["minimum_temperature"]
        self.maximum_temperature: float = self._parts[-1]["maximum_temperature"]

    def pressure(self, temperature: FloatArray) -> FloatArray:
        """Melting pressure [Pa] at temperature T [K] of shape (N,); infinite beyond the upper end of the line."""
        result = np.full_like(temperature, np.inf)
        for part in self._parts:
            inside = (temperature >= part["minimum_temperature"]) & (temperature <= part["maximum_temperature"])
            if inside.any():
                result[inside] = self._part(part, temperature[inside])
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

    def _part(self, part: Mapping[str, Any], temperature: FloatArray) -> FloatArray:
        ratio = temperature / part["temperature"]
        start: float = part["pressure"]
        if self._form == "simon":
            rise: FloatArray = part["a"] * (ratio ** part["c"] - 1)
            return start + rise
        total: FloatArray = np.ones_like(ratio)
        for a, t in zip(part["a"], part["t"], strict=True):
            total += a * (ratio**t - 1 if self._form == "polynomial-in-ratio" else np.maximum(ratio - 1, 0) ** t)
        total *= start
        return total

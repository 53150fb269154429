"""Saturation curves of one fluid: what a vapour in equilibrium with its liquid looks like at a temperature or a
pressure.

Curves are Chebyshev expansions in x = (1 − T/T_top)^(1/2), fitted to the equation of state itself
(data/collect_saturation.py). For a pure fluid T_top is the critical temperature and both phases have one pressure;
for a pseudo-pure fluid (air) the bubble and the dew line have pressures of their own and meet at the highest
temperature of the envelope.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.expansions import Expansions

__all__ = ["Saturated", "SaturationCurves"]

FloatArray = NDArray[np.float64]


class Saturated(NamedTuple):
    """Both saturated phases, arrays of shape (N,); temperatures [K], pressures [Pa], densities [kg/m3].

    For pure fluids the two temperatures and the two pressures are the same arrays.
    """

    bubble_temperature: FloatArray
    dew_temperature: FloatArray
    bubble_pressure: FloatArray
    dew_pressure: FloatArray
    liquid_density: FloatArray
    vapour_density: FloatArray


class SaturationCurves:
    """Evaluation of the curves of a data file.

    Parameters
    ----------
    data : the ``saturation`` table of a data file.
    top_temperature : T_top [K].
    """

    def __init__(self, data: Mapping[str, Any], top_temperature: float) -> None:
        names = ["log_pressure", "liquid_density", "log_vapour_density"]
        self.pseudo_pure = "log_dew_pressure" in data
        if self.pseudo_pure:
            names.append("log_dew_pressure")
        self.top_temperature = top_temperature
        self.curves = Expansions(data["edges"], [data[name] for name in names])
        self.boiling = Expansions(data["boiling"]["edges"], [data["boiling"]["root"]])
        self.condensing = self.boiling
        if self.pseudo_pure:
            self.condensing = Expansions(data["condensing"]["edges"], [data["condensing"]["root"]])
        self.log_top_pressure = float(self.curves(np.zeros(1))[0, 0])
        self.top_pressure = float(np.exp(self.log_top_pressure))

    def at_temperature(self, temperature: FloatArray) -> Saturated:
        """Saturated phases at T [K] of shape (N,), T at most T_top."""
        found = self.curves(np.sqrt(np.maximum(1 - temperature / self.top_temperature, 0)))
        bubble = np.exp(found[0])
        dew = np.exp(found[3]) if self.pseudo_pure else bubble
        return Saturated(temperature, temperature, bubble, dew, found[1], np.exp(found[2]))

    def at_pressure(self, pressure: FloatArray) -> Saturated:
        """Saturated phases at p [Pa] of shape (N,), p at most the pressure at T_top."""
        bubble_root = self.boiling(self._depth(pressure))[0]
        bubble = self.top_temperature * (1 - bubble_root * bubble_root)
        found = self.curves(bubble_root)
        if not self.pseudo_pure:
            return Saturated(bubble, bubble, pressure, pressure, found[1], np.exp(found[2]))
        dew_root = self.condensing(self._depth(pressure))[0]
        dew = self.top_temperature * (1 - dew_root * dew_root)
        return Saturated(bubble, dew, pressure, pressure, found[1], np.exp(self.curves(dew_root)[2]))

    def temperatures(self, pressure: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Bubble and dew temperature [K] at p [Pa] of shape (N,)."""
        depth = self._depth(pressure)
        root = self.boiling(depth)[0]
        bubble = self.top_temperature * (1 - root * root)
        if not self.pseudo_pure:
            return bubble, bubble
        root = self.condensing(depth)[0]
        return bubble, self.top_temperature * (1 - root * root)

    def _depth(self, pressure: FloatArray) -> FloatArray:
        """y = (ln(p_top/p))^(1/2), the variable of the inverse expansions."""
        depth: FloatArray = np.sqrt(np.maximum(self.log_top_pressure - np.log(pressure), 0))
        return depth

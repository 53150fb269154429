"""Saturation curves at one temperature or pressure, by Clenshaw's recurrence; see ../saturation.py."""

from __future__ import annotations

from bisect import bisect_left
from math import exp, log, sqrt

from reportgen.fluids.real.expansions import Expansions
from reportgen.fluids.real.saturation import SaturationCurves

__all__ = ["ScalarCurves"]

#: Coefficients c_n ... c_0 of one function on one interval, two by two.
_Pairs = tuple[tuple[float, float], ...]


class ScalarExpansions:
    """Piecewise Chebyshev expansions of several functions of one variable.

    Parameters
    ----------
    expansions : the same for arrays.
    """

    def __init__(self, expansions: Expansions) -> None:
        edges = expansions.edges.tolist()
        self._inner = edges[1:-1]
        self._pieces = tuple(
            ((low + high) / 2, 2 / (high - low), tuple(_pairs(row) for row in rows))
            for low, high, rows in zip(edges[:-1], edges[1:], expansions.coefficients.tolist(), strict=True)
        )

    def place(self, x: float) -> tuple[float, tuple[_Pairs, ...]]:
        """Twice the place z of x [1] in its interval, −1 to 1, and the coefficients of all functions there."""
        middle, scale, functions = self._pieces[bisect_left(self._inner, x)]
        z = (x - middle) * scale
        return (2.0 * z if -1.0 < z < 1.0 else 2.0 if z > 0.0 else -2.0), functions


def _pairs(coefficients: list[float]) -> _Pairs:
    if len(coefficients) % 2:
        coefficients = [*coefficients, 0.0]
    falling = coefficients[::-1]
    return tuple(zip(falling[::2], falling[1::2], strict=True))


def _sum(twice: float, pairs: _Pairs) -> float:
    """Σ c_k T_k(z) with 2z = ``twice``."""
    b1 = b2 = 0.0
    for higher, lower in pairs:
        b2 = twice * b1 - b2 + higher
        b1 = twice * b2 - b1 + lower
    return b1 - 0.5 * twice * b2


class ScalarCurves:
    """Both saturated phases at one temperature or pressure, each below that of the top.

    Parameters
    ----------
    curves : the same for arrays.
    """

    def __init__(self, curves: SaturationCurves) -> None:
        self.pseudo_pure = curves.pseudo_pure
        self.top_temperature = curves.top_temperature
        self.top_pressure = curves.top_pressure
        self._log_top_pressure = curves.log_top_pressure
        self._curves = ScalarExpansions(curves.curves)
        self._boiling = ScalarExpansions(curves.boiling)
        self._condensing = ScalarExpansions(curves.condensing) if curves.pseudo_pure else self._boiling

    def at_temperature(self, temperature: float) -> tuple[float, float, float, float]:
        """Bubble and dew pressure [Pa], densities of liquid and vapour [kg/m3] at T [K]."""
        twice, functions = self._curves.place(sqrt(1.0 - temperature / self.top_temperature))
        bubble = exp(_sum(twice, functions[0]))
        dew = exp(_sum(twice, functions[3])) if self.pseudo_pure else bubble
        return bubble, dew, _sum(twice, functions[1]), exp(_sum(twice, functions[2]))

    def pressures(self, temperature: float) -> tuple[float, float]:
        """Bubble and dew pressure [Pa] at T [K]."""
        twice, functions = self._curves.place(sqrt(1.0 - temperature / self.top_temperature))
        bubble = exp(_sum(twice, functions[0]))
        return bubble, exp(_sum(twice, functions[3])) if self.pseudo_pure else bubble

    def liquid_density(self, temperature: float) -> float:
        """Density of saturated liquid [kg/m3] at T [K]."""
        twice, functions = self._curves.place(sqrt(1.0 - temperature / self.top_temperature))
        return _sum(twice, functions[1])

    def vapour_density(self, temperature: float) -> float:
        """Density of saturated vapour [kg/m3] at T [K]."""
        twice, functions = self._curves.place(sqrt(1.0 - temperature / self.top_temperature))
        return exp(_sum(twice, functions[2]))

    def at_pressure(self, pressure: float) -> tuple[float, float, float, float]:
        """Bubble and dew temperature [K], densities of liquid and vapour [kg/m3] at p [Pa]."""
        top = self.top_temperature
        depth = sqrt(self._log_top_pressure - log(pressure))
        twice, functions = self._boiling.place(depth)
        root = _sum(twice, functions[0])
        bubble = dew = top * (1.0 - root * root)
        twice, functions = self._curves.place(root)
        liquid = _sum(twice, functions[1])
        if self.pseudo_pure:
            twice, functions = self._condensing.place(depth)
            root = _sum(twice, functions[0])
            dew = top * (1.0 - root * root)
            twice, functions = self._curves.place(root)
        return bubble, dew, liquid, exp(_sum(twice, functions[2]))

    def temperatures(self, pressure: float) -> tuple[float, float]:
        """Bubble and dew temperature [K] at p [Pa]."""
        depth = sqrt(self._log_top_pressure - log(pressure))
        twice, functions = self._boiling.place(depth)
        root = _sum(twice, functions[0])
        bubble = dew = self.top_temperature * (1.0 - root * root)
        if self.pseudo_pure:
            twice, functions = self._condensing.place(depth)
            root = _sum(twice, functions[0])
            dew = self.top_temperature * (1.0 - root * root)
        return bubble, dew

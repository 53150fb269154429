"""Where a density or an entropy occurs on the saturated liquid line and on the saturated vapour line."""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.helmholtz import Helmholtz
from reportgen.fluids.real.roots import bracketed_root
from reportgen.fluids.real.saturation import SaturationCurves

__all__ = ["SaturationLine", "SaturationLines"]

FloatArray = NDArray[Any]

#: Points of the table that brackets crossings, evenly spaced in (1 − T/T_top)^(1/2).
_POINTS = 257
#: Refinements of a turning point, each to a sixteenth of the distance.
_REFINEMENTS = 6


class SaturationLine:
    """One property along one saturation line, cut where it turns (water's liquid is densest at 4 °C; the entropy of the
    vapour of large molecules rises and falls).

    Parameters
    ----------
    value : T [K] of shape (N,) -> the property [SI].
    lowest, highest : ends of the line [K].
    """

    def __init__(self, value: Callable[[FloatArray], FloatArray], lowest: float, highest: float) -> None:
        self._value = value
        depth = np.sqrt(max(1 - lowest / highest, 0.0)) * np.linspace(1.0, 0.0, _POINTS)
        temperature = highest * (1 - depth * depth)
        temperature[0] = lowest
        found = value(temperature)
        rising = np.diff(found) > 0
        turns = np.flatnonzero(rising[1:] != rising[:-1]) + 1
        edges = [0, *(int(turn) for turn in turns), _POINTS - 1]
        for turn, up in zip(turns, rising[turns - 1], strict=True):
            temperature[turn], found[turn] = self._turning_point(
                temperature[turn - 1], temperature[turn + 1], 1.0 if up else -1.0
            )
        self._pieces = [(temperature[a : b + 1], found[a : b + 1]) for a, b in pairwise(edges)]
        self.count = len(self._pieces)
        self.at_lowest = float(found[0])
        self.at_highest = float(found[-1])

    def _turning_point(self, low: float, high: float, sign: float) -> tuple[float, float]:
        for _ in range(_REFINEMENTS):
            temperature = np.linspace(low, high, 33)
            found = self._value(temperature)
            best = min(max(int(np.argmax(sign * found)), 1), 31)
            low, high = temperature[best - 1], temperature[best + 1]
        return float(temperature[best]), float(found[best])

    def crossings(self, target: FloatArray) -> FloatArray:
        """Temperatures [K] at which the property has the value ``target`` [SI] of shape (N,); shape (count, N), NaN
        where a piece of the line has no such point.
        """
        result = np.full((self.count, target.size), np.nan)
        for row, (temperature, found) in zip(result, self._pieces, strict=True):
            low, high = min(found[0], found[-1]), max(found[0], found[-1])
            inside = np.flatnonzero((target >= low) & (target <= high))
            if not inside.size:
                continue
            wanted = target[inside]
            rising = found[-1] > found[0]
            cell = np.searchsorted(found if rising else found[::-1], wanted)
            cell = np.clip(cell if rising else found.size - cell, 1, found.size - 1)
            row[inside] = bracketed_root(
                lambda t, columns, wanted=wanted: self._value(t) - wanted[columns],  # type: ignore[misc]
                temperature[cell - 1],
                temperature[cell],
                found[cell - 1] - wanted,
                found[cell] - wanted,
            )
        return result


class SaturationLines:
    """The lines of one fluid, made when first asked for.

    Parameters
    ----------
    equation, curves : the equation and its saturation curves.
    lowest : temperature at which the lines begin [K].
    """

    def __init__(self, equation: Helmholtz, curves: SaturationCurves, lowest: float) -> None:
        self._equation, self._curves, self._lowest = equation, curves, lowest

    def _line(self, value: Callable[[FloatArray], FloatArray]) -> SaturationLine:
        return SaturationLine(value, self._lowest, self._curves.top_temperature)

    @cached_property
    def liquid_density(self) -> SaturationLine:
        """Density [kg/m3] of the saturated liquid."""
        return self._line(lambda t: self._curves.at_temperature(t).liquid_density)

    @cached_property
    def vapour_density(self) -> SaturationLine:
        """Density [kg/m3] of the saturated vapour."""
        return self._line(lambda t: self._curves.at_temperature(t).vapour_density)

    @cached_property
    def bubble_pressure(self) -> SaturationLine:
        """Pressure [Pa] of the saturated liquid, which for a pseudo-pure fluid can turn before the lines meet."""
        return self._line(lambda t: self._curves.at_temperature(t).bubble_pressure)

    @cached_property
    def liquid_entropy(self) -> SaturationLine:
        """Entropy [J/(kg*K)] of the saturated liquid."""
        return self._line(lambda t: self._equation.properties(t, self._curves.at_temperature(t).liquid_density).entropy)

    @cached_property
    def vapour_entropy(self) -> SaturationLine:
        """Entropy [J/(kg*K)] of the saturated vapour."""
        return self._line(lambda t: self._equation.properties(t, self._curves.at_temperature(t).vapour_density).entropy)

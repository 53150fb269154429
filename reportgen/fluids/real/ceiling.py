"""The highest density of a fluid at each temperature: at its highest pressure, or on the melting line below it.

Beyond it published equations may turn unphysical, with roots that mean nothing; searches keep out of there.
"""

from __future__ import annotations

from functools import cached_property
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.density import DensitySolver
from reportgen.fluids.real.melting import MeltingLine
from reportgen.fluids.real.saturation import SaturationCurves

__all__ = ["Ceiling"]

FloatArray = NDArray[Any]

_POINTS = 257
#: What the table lies above the true ceiling: no state is lost by interpolation, the limits are checked afterwards.
_MARGIN = 1.002
#: The same for pressures of single temperatures.
_PRESSURE_MARGIN = 1 + 1e-6
#: Least pressure of the table, in critical pressures: below, densities fall steeply where the liquid ends.
_LEAST_PRESSURE = 2.0
#: Equations are sound at densities up to this, in critical densities, at every temperature.
_SOUND = 1.6


class Ceiling:
    """Highest density as a function of temperature.

    Parameters
    ----------
    curves, solver : saturation curves and density solver of the fluid.
    melting_line : its melting line, or None.
    lowest, highest : ends of the range [K].
    highest_pressure : upper end of the range [Pa].
    """

    def __init__(
        self,
        curves: SaturationCurves,
        solver: DensitySolver,
        melting_line: MeltingLine | None,
        lowest: float,
        highest: float,
        highest_pressure: float,
    ) -> None:
        self._curves, self._solver, self._line = curves, solver, melting_line
        self._lowest, self._highest, self._pressure = lowest, highest, highest_pressure

    def density(self, temperature: FloatArray) -> FloatArray:
        """Highest density [kg/m3] at T [K] of shape (N,), not below that of the saturated liquid."""
        return self._at_pressure(temperature, self._pressure)

    def _at_pressure(self, temperature: FloatArray, highest: float) -> FloatArray:
        pressure = np.full_like(temperature, highest)
        if self._line is not None:
            melting = self._line.pressure(np.maximum(temperature, self._line.minimum_temperature))
            pressure = np.minimum(pressure, melting)
        pressure *= _PRESSURE_MARGIN
        below = np.flatnonzero(temperature < self._curves.top_temperature)
        saturated = self._curves.at_temperature(temperature[below])
        pressure[below] = np.maximum(pressure[below], saturated.bubble_pressure * _PRESSURE_MARGIN)
        density, found = self._solver.solve(temperature, pressure, np.ones(temperature.size, dtype=np.bool_))
        density = np.where(found, density, self._solver.maximum_density)
        density[below] = np.maximum(density[below], saturated.liquid_density)
        return density

    @cached_property
    def _table(self) -> tuple[FloatArray, FloatArray]:
        temperature = np.geomspace(self._lowest, self._highest, _POINTS)
        highest = max(self._pressure, _LEAST_PRESSURE * self._curves.top_pressure)
        return temperature, _MARGIN * self._at_pressure(temperature, highest)

    @cached_property
    def _sound(self) -> float:
        top = self._curves.at_temperature(np.array([self._curves.top_temperature]))
        return _SOUND * float(top.liquid_density[0])

    def admits(self, temperature: FloatArray, density: FloatArray) -> NDArray[np.bool_]:
        """Whether ρ [kg/m3] lies below the ceiling at T [K], or not far above it; shape (N,)."""
        if not (density > self._sound).any():
            return np.ones(density.size, dtype=np.bool_)
        result: NDArray[np.bool_] = (density <= self._sound) | (density <= np.interp(temperature, *self._table))
        return result

    def crossings(self, density: FloatArray) -> FloatArray:
        """Temperatures [K] at which the table has a density [kg/m3] of shape (N,); shape (pieces, N), NaN where there
        is none, or the density is low.
        """
        if not (density > self._sound).any():
            return np.empty((0, density.size))
        density = np.where(density > self._sound, density, np.nan)
        temperature, table = self._table
        rising = np.diff(table) > 0
        edges = [0, *(np.flatnonzero(rising[1:] != rising[:-1]) + 1), table.size - 1]
        rows = []
        for first, last in pairwise(edges):
            t, rho = temperature[first : last + 1], table[first : last + 1]
            if rho[-1] < rho[0]:
                t, rho = t[::-1], rho[::-1]
            rows.append(np.interp(density, rho, t, left=np.nan, right=np.nan))
        return np.array(rows)

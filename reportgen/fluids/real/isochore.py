"""All states at a density with a pressure, an enthalpy, an entropy or an internal energy.

Along an isochore internal energy and entropy rise with temperature, (∂u/∂T)_v = c_v and (∂s/∂T)_v = c_v/T, in two
phases as in one, so that each value belongs to one state; so does enthalpy in every liquid and gas. Pressure falls
where a liquid shrinks on heating (water below 4 °C), which gives it two states at some densities.
"""

from __future__ import annotations

from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.caloric import caloric_value, natural_unit, rounding
from reportgen.fluids.real.candidates import BESIDE_LINE, Candidates
from reportgen.fluids.real.ceiling import Ceiling
from reportgen.fluids.real.helmholtz import CHUNK, Helmholtz
from reportgen.fluids.real.lines import SaturationLines
from reportgen.fluids.real.roots import all_roots
from reportgen.fluids.real.saturation import Saturated, SaturationCurves

__all__ = ["IsochoreSearch"]

FloatArray = NDArray[Any]
IntArray = NDArray[np.intp]
BoolArray = NDArray[np.bool_]

#: Temperatures at which the slope of the pressure is looked at, in parts of the way through a single phase.
_WAY = (np.linspace(0.0, 1.0, 24) ** 2)[:, None]
#: Relative distance from a saturated density that is put down to rounding.
_ON_LINE = 1e-14
#: The same where a line was found to be crossed: next to the critical point, density follows T by its square root.
_ENDS_ON_LINE = 1e-6
#: Rounding granted at the ends of the range.
_SLACK = 1e-9


class IsochoreSearch:
    """Finds every state at given density and pressure, enthalpy, entropy or internal energy.

    Parameters
    ----------
    equation, curves, lines : the equation, its saturation curves, and what is known along them.
    ceiling : its highest density at each temperature.
    lowest, highest : temperatures [K] between which states are sought.
    """

    def __init__(
        self,
        equation: Helmholtz,
        curves: SaturationCurves,
        lines: SaturationLines,
        ceiling: Ceiling,
        lowest: float,
        highest: float,
    ) -> None:
        self._equation, self._curves, self._lines, self._ceiling = equation, curves, lines, ceiling
        self._lowest, self._highest = lowest * (1 - _SLACK), highest * (1 + _SLACK)
        self.critical_density = float(curves.at_temperature(np.array([curves.top_temperature])).liquid_density[0])

    def solve(self, density: FloatArray, target: FloatArray, name: str) -> Candidates:
        """States at ρ [kg/m3] where the property ``name`` has the value ``target`` [SI]; shape (N,)."""
        result = Candidates(density.size)
        for start in range(0, density.size, CHUNK):
            where = np.arange(start, min(start + CHUNK, density.size))
            result.join(self._solve(density[where], target[where], name), where)
        return result

    def _solve(self, density: FloatArray, target: FloatArray, name: str) -> Candidates:
        result = Candidates(density.size)
        ends = np.vstack(
            [
                np.full(density.size, self._lowest),
                self._lines.liquid_density.crossings(density),
                self._lines.vapour_density.crossings(density),
                self._top(density),
                self._ceiling.crossings(density),
                np.full(density.size, self._highest),
            ]
        )
        # no crossing is no segment: the end of the range once more
        ends = np.sort(np.where(np.isnan(ends), self._highest, ends), axis=0)
        for low, high in pairwise(ends):
            middle = 0.5 * (low + high)
            some = np.flatnonzero((high > low) & self._ceiling.admits(middle, density))
            inside = self._inside(middle[some], density[some])
            for where, mixed in ((some[~inside], False), (some[inside], True)):
                if where.size:
                    segment = _Segment(self, density[where], target[where], name, mixed, low[where], high[where])
                    segment.search(result, where)
        left = np.flatnonzero(~result.found())
        for end in ends[1:-1, left] if left.size else ():
            _Segment(self, density[left], target[left], name, True, end, end).beside_line(result, left)
        return result

    def _top(self, density: FloatArray) -> FloatArray:
        """The temperature [K] where the lines meet, at densities [kg/m3] that the ends of their curves leave open; else
        NaN.
        """
        top = np.array([self._curves.top_temperature])
        ends = self._curves.at_temperature(top)
        return np.where((density > ends.vapour_density) & (density < ends.liquid_density), top, np.nan)

    def _inside(self, temperature: FloatArray, density: FloatArray) -> BoolArray:
        """Whether ρ [kg/m3] lies between the saturated densities at T [K]."""
        result = np.zeros(temperature.size, dtype=np.bool_)
        below = temperature < self._curves.top_temperature
        saturated = self._curves.at_temperature(temperature[below])
        rho = density[below]
        result[below] = (rho < saturated.liquid_density) & (rho > saturated.vapour_density)
        return result


class _Segment:
    """A part of isochores, between two temperatures, that lies in one phase or in two."""

    def __init__(
        self,
        search: IsochoreSearch,
        density: FloatArray,
        target: FloatArray,
        name: str,
        mixed: bool,
        low: FloatArray,
        high: FloatArray,
    ) -> None:
        self._equation, self._curves = search._equation, search._curves
        self._low, self._high = low, high
        self._density, self._target, self._name, self._mixed = density, target, name, mixed
        self._critical_density = search.critical_density

    def search(self, result: Candidates, where: IntArray) -> None:
        """Add the states of the elements ``where``."""
        low, high = self._low, self._high
        grid = np.vstack([low, high])
        if self._mixed and self._curves.pseudo_pure:
            self._between(result, where)
            return
        pressure_sought = self._name == "pressure"
        little = 1e-15 * self._target if pressure_sought else rounding(self._name, self._equation, high, self._target)
        # gases, and mixtures of phases, are monotone; in dense fluids that is looked at
        if not self._mixed and (self._density > self._critical_density).any():
            grid = low + (high - low) * _WAY
            columns = np.tile(np.arange(where.size), grid.shape[0])
            slopes = self._slope(grid.reshape(-1), columns).reshape(grid.shape)
            roots = all_roots(self._gap, grid, little, slopes, self._slope)
        else:
            roots = all_roots(self._gap, grid, little)
        result.seen(where, roots.least + self._target, roots.greatest + self._target)
        column, t = roots.column, roots.x
        density = self._density[column]
        found = self._equation.properties(t, density)
        pressure, quality = self._settled(t, column, found.pressure), np.full_like(t, np.nan)
        liquid, vapour = quality.copy(), quality.copy()
        below = np.flatnonzero(t < self._curves.top_temperature)
        if below.size:
            saturated = self._curves.at_temperature(t[below])
            liquid[below], vapour[below] = saturated.liquid_density, saturated.vapour_density
            rho, rho_l, rho_v = density[below], liquid[below], vapour[below]
            x = (1 / rho - 1 / rho_l) / (1 / rho_v - 1 / rho_l) if self._mixed else np.full_like(rho, np.nan)
            boiling, condensing = self._on_lines(t[below], column[below], saturated)
            x = np.where(boiling, 0.0, np.where(condensing, 1.0, np.clip(x, 0.0, 1.0)))
            quality[below] = x
            on_line = np.where(x == 1, saturated.dew_pressure, saturated.bubble_pressure)
            pressure[below] = np.where(np.isnan(x), pressure[below], on_line)
        sound = (found.pressure_density > 0) & (found.isochoric_heat_capacity > 0) | np.isfinite(quality)
        result.add(
            where[column[sound]],
            *(part[sound] for part in (t, pressure, density, quality, liquid, vapour)),
        )

    def _between(self, result: Candidates, where: IntArray) -> None:
        """Note elements between the lines of a pseudo-pure fluid: from one end of the segment to the other the property
        passes its target.
        """
        every = np.arange(where.size)
        result.between[where] |= (self._gap(self._low, every) > 0) != (self._gap(self._high, every) > 0)

    def beside_line(self, result: Candidates, where: IntArray) -> None:
        """Add the saturated states at the lower end of the segment that have the property but for rounding."""
        t, rho = self._low, self._density
        saturated = self._curves.at_temperature(t)
        boiling, condensing = self._on_lines(t, np.arange(t.size), saturated)
        scale = self._target if self._name == "pressure" else natural_unit(self._name, self._equation, t)
        near = np.abs(self._gap(t, np.arange(t.size))) <= BESIDE_LINE * scale
        at = np.flatnonzero(near & (boiling | condensing))
        pressure = np.where(condensing, saturated.dew_pressure, saturated.bubble_pressure)
        result.add(where[at], t[at], pressure[at], rho[at], np.where(condensing, 1.0, 0.0)[at])

    def _gap(self, temperature: FloatArray, columns: IntArray) -> FloatArray:
        """What is sought less its target [SI] at T [K]."""
        rho = self._density[columns]
        if self._mixed:
            value = self._two_phase(temperature, rho)
        else:
            found = self._equation.properties(temperature, rho)
            if self._name == "pressure":
                value = self._settled(temperature, columns, found.pressure)
            else:
                value = caloric_value(self._name, found, rho)
        return value - self._target[columns]

    def _on_lines(
        self, temperature: FloatArray, columns: IntArray, saturated: Saturated
    ) -> tuple[BoolArray, BoolArray]:
        """Which T [K] are points of the saturated liquid's line, and of the vapour's, as nearly as T can be given."""
        rho = self._density[columns]
        at_end = (temperature == self._low[columns]) | (temperature == self._high[columns])
        near = np.where(at_end, _ENDS_ON_LINE, _ON_LINE) * rho
        return np.abs(rho - saturated.liquid_density) <= near, np.abs(rho - saturated.vapour_density) <= near

    def _settled(self, temperature: FloatArray, columns: IntArray, pressure: FloatArray) -> FloatArray:
        """The equation's pressure [Pa] in a single phase, freed of the rounding that a boiling liquid's has: on the
        lines that of saturation, in a liquid not less.
        """
        below = np.flatnonzero(temperature < self._curves.top_temperature)
        if not below.size:
            return pressure
        saturated = self._curves.at_temperature(temperature[below])
        boiling, condensing = self._on_lines(temperature[below], columns[below], saturated)
        here, liquid = pressure[below], self._density[columns[below]] >= saturated.liquid_density
        here = np.where(liquid, np.maximum(here, saturated.bubble_pressure), here)
        here = np.where(boiling, saturated.bubble_pressure, np.where(condensing, saturated.dew_pressure, here))
        pressure[below] = here
        return pressure

    def _two_phase(self, temperature: FloatArray, density: FloatArray) -> FloatArray:
        """Property [SI] of a mixture of the phases at T [K], ρ [kg/m3]."""
        saturated = self._curves.at_temperature(temperature)
        liquid, vapour = saturated.liquid_density, saturated.vapour_density
        if self._name == "pressure":
            of_liquid, of_vapour = saturated.bubble_pressure, saturated.dew_pressure
        else:
            both, twice = np.concatenate([liquid, vapour]), np.concatenate([temperature, temperature])
            found = caloric_value(self._name, self._equation.properties(twice, both), both)
            of_liquid, of_vapour = found[: temperature.size], found[temperature.size :]
        x = np.clip((1 / density - 1 / liquid) / (1 / vapour - 1 / liquid), 0.0, 1.0)
        result: FloatArray = of_liquid + x * (of_vapour - of_liquid)
        return result

    def _slope(self, temperature: FloatArray, columns: IntArray) -> FloatArray:
        """(∂p/∂T)_ρ [Pa/K], (∂h/∂T)_ρ = c_v + (∂p/∂T)_ρ/ρ [J/(kg*K)], or c_v [J/(kg*K)] for u and s."""
        rho = self._density[columns]
        found = self._equation.properties(temperature, rho)
        if self._name == "pressure":
            return found.pressure_temperature
        if self._name == "specific_enthalpy":
            result: FloatArray = found.isochoric_heat_capacity + found.pressure_temperature / rho
            return result
        return found.isochoric_heat_capacity

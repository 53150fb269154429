"""The state at a pressure with an internal energy, an enthalpy or an entropy.

Along an isobar these rise with temperature in each phase, (∂u/∂T)_p = c_p − p (∂v/∂T)_p, (∂h/∂T)_p = c_p, (∂s/∂T)_p =
c_p/T, and from liquid to vapour, so that the state is unique. Enthalpy and entropy have a faster search of their own
(flash.py); what that leaves next to the critical point is found here.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.caloric import caloric_value, natural_unit, rounding
from reportgen.fluids.real.candidates import BESIDE_LINE, Candidates
from reportgen.fluids.real.density import DensitySolver
from reportgen.fluids.real.helmholtz import CHUNK, Helmholtz
from reportgen.fluids.real.lines import SaturationLines
from reportgen.fluids.real.melting import MeltingLine
from reportgen.fluids.real.roots import all_roots
from reportgen.fluids.real.saturation import Saturated, SaturationCurves

__all__ = ["IsobarSearch"]

FloatArray = NDArray[Any]
IntArray = NDArray[np.intp]

#: Rounding granted at the ends of the range.
_SLACK = 1e-9
#: What is left of the property at a root, in parts of R T or R; more is a jump of the density.
_LEFT_OVER = 1e-7
#: Within the first, relative, of the highest temperature of saturation, distances from a line that are put down to
#: rounding are the second, in parts of R T or R.
_NEAR_TOP, _BESIDE_TOP = 1e-4, 1e-6


class IsobarSearch:
    """Finds the state at given pressure and internal energy, enthalpy or entropy.

    Parameters
    ----------
    equation, curves, lines, solver : the equation, its saturation curves, what is known along them, its density solver.
    lowest, highest : temperatures [K] between which states are sought.
    triple_pressure : lowest pressure with a liquid [Pa].
    melting_line : the melting line, or None; liquids are sought above it.
    """

    def __init__(
        self,
        equation: Helmholtz,
        curves: SaturationCurves,
        lines: SaturationLines,
        solver: DensitySolver,
        lowest: float,
        highest: float,
        triple_pressure: float,
        melting_line: MeltingLine | None,
    ) -> None:
        self._equation, self._curves, self._lines, self._solver = equation, curves, lines, solver
        self._lowest, self._highest = lowest * (1 - _SLACK), highest * (1 + _SLACK)
        self._triple_pressure, self._line = triple_pressure, melting_line
        # a pseudo-pure fluid condenses at pressures a little below those at which it boils
        self._lowest_dew = float(curves.at_temperature(np.array([lowest])).dew_pressure[0])

    def solve(self, pressure: FloatArray, target: FloatArray, name: str) -> Candidates:
        """State at p [Pa] where the property ``name`` has the value ``target`` [SI]; shape (N,)."""
        result = Candidates(pressure.size)
        for start in range(0, pressure.size, CHUNK):
            where = np.arange(start, min(start + CHUNK, pressure.size))
            result.join(self._solve(pressure[where], target[where], name), where)
        return result

    def _solve(self, pressure: FloatArray, sought: FloatArray, name: str) -> Candidates:
        result = Candidates(pressure.size)
        low, high = np.full(pressure.size, self._lowest), np.full(pressure.size, self._highest)
        saturable = (pressure < self._curves.top_pressure) & (pressure >= self._triple_pressure)
        dense = np.flatnonzero(pressure >= self._curves.top_pressure)
        thin = np.flatnonzero(pressure < self._triple_pressure)
        if thin.size:
            dew = self._curves.temperatures(np.maximum(pressure[thin], self._lowest_dew))[1]
            low[thin] = np.where(pressure[thin] > self._lowest_dew, dew, low[thin])
        self._phase(result, thin, pressure, sought, name, low[thin], high[thin], liquid=False)
        if self._curves.pseudo_pure and dense.size:
            dense = self._under_the_bulge(result, dense, pressure, sought, name)
        self._phase(result, dense, pressure, sought, name, self._coldest(pressure[dense]), high[dense], liquid=True)
        at = np.flatnonzero(saturable)
        if at.size:
            self._across(result, at, pressure, sought, name, self._curves.at_pressure(pressure[at]), 1.0)
        return result

    def _under_the_bulge(
        self, result: Candidates, where: IntArray, pressure: FloatArray, sought: FloatArray, name: str
    ) -> IntArray:
        """Add states at pressures that the bubble line of a pseudo-pure fluid crosses twice, above that where the lines
        meet: there is liquid at both ends. Returns the other elements.
        """
        p = pressure[where]
        crossings = np.sort(self._lines.bubble_pressure.crossings(p), axis=0)
        crossed = (~np.isnan(crossings)).sum(axis=0) > 1
        if crossed.any():
            first, second, p = crossings[0, crossed], crossings[1, crossed], p[crossed]
            densities = [self._curves.at_temperature(t).liquid_density for t in (first, second)]
            ends = Saturated(first, second, p, p, *densities)
            self._across(result, where[crossed], pressure, sought, name, ends, 0.0)
        rest: IntArray = where[~crossed]
        return rest

    def _across(
        self,
        result: Candidates,
        where: IntArray,
        pressure: FloatArray,
        sought: FloatArray,
        name: str,
        saturated: Saturated,
        upper: float,
    ) -> None:
        """Add the states at pressures with saturation: below it, above it, in between, and on it. ``upper`` is the
        quality [1] of the upper saturated state.
        """
        p, target = pressure[where], sought[where]
        t_l, t_v = saturated.bubble_temperature, saturated.dew_temperature
        liquid, vapour = saturated.liquid_density, saturated.vapour_density
        twice, both = np.concatenate([t_l, t_v]), np.concatenate([liquid, vapour])
        found = self._equation.properties(twice, both)
        ends = caloric_value(name, found._replace(pressure=np.concatenate([p, p])), both)
        of_liquid, of_vapour = ends[: where.size], ends[where.size :]
        little = rounding(name, self._equation, t_l, target)
        from_liquid, from_vapour = target - of_liquid, target - of_vapour
        inside = np.flatnonzero((from_liquid > little) & (from_vapour < -little))
        if self._curves.pseudo_pure:
            result.between[where[inside]] = True
        elif inside.size:
            x = from_liquid[inside] / (of_vapour - of_liquid)[inside]
            rho_l, rho_v = liquid[inside], vapour[inside]
            density = 1 / (1 / rho_l + x * (1 / rho_v - 1 / rho_l))
            result.add(where[inside], t_v[inside], p[inside], density, x, rho_l, rho_v)
        cold, hot = np.flatnonzero(from_liquid < -little), np.flatnonzero(from_vapour > little)
        below, above = where[cold], where[hot]
        low, high = np.minimum(self._coldest(p[cold]), t_l[cold]), np.full(hot.size, self._highest)
        lower_end, upper_end = (liquid[cold], "high"), (vapour[hot], "low")
        self._phase(result, below, pressure, sought, name, low, t_l[cold], liquid=True, edge=lower_end)
        self._phase(result, above, pressure, sought, name, t_v[hot], high, liquid=upper == 0, edge=upper_end)
        # on a line, or so close to it that the state is found on neither side
        near = np.where(1 - t_l / self._curves.top_temperature < _NEAR_TOP, _BESIDE_TOP, BESIDE_LINE)
        gap = np.minimum(np.abs(from_liquid), np.abs(from_vapour))
        left = np.flatnonzero(~result.found()[where] & (gap <= near * natural_unit(name, self._equation, t_l)))
        lower = np.abs(from_liquid[left]) <= np.abs(from_vapour[left])
        temperature, density = np.where(lower, t_l[left], t_v[left]), np.where(lower, liquid[left], vapour[left])
        result.add(where[left], temperature, p[left], density, np.where(lower, 0.0, upper))

    def _coldest(self, pressure: FloatArray) -> FloatArray:
        """Lowest temperature [K] of the liquid at p [Pa]."""
        low = np.full(pressure.size, self._lowest)
        return low if self._line is None else np.maximum(low, self._line.temperature(pressure) * (1 - _SLACK))

    def _phase(
        self,
        result: Candidates,
        where: IntArray,
        pressure: FloatArray,
        sought: FloatArray,
        name: str,
        low: FloatArray,
        high: FloatArray,
        *,
        liquid: bool,
        edge: tuple[FloatArray, str] | None = None,
    ) -> None:
        """Add the states of one phase between two temperatures [K]; ``edge`` is the saturated density [kg/m3] at one
        of them.
        """
        if not where.size:
            return
        p, target = pressure[where], sought[where]

        def density(t: FloatArray, columns: IntArray) -> FloatArray:
            found, good = self._solver.solve(t, p[columns], np.full(t.size, liquid))
            found = np.where(good, found, np.nan)
            if edge is not None:
                end = (high if edge[1] == "high" else low)[columns]
                found = np.where(t == end, edge[0][columns], found)
            return found

        def function(t: FloatArray, columns: IntArray) -> FloatArray:
            rho = density(t, columns)
            value: FloatArray = caloric_value(name, self._equation.properties(t, rho), rho)
            # without a density on this branch: too hot for it, as within the lines of a pseudo-pure fluid
            return np.where(np.isnan(rho), greatest[columns], value) - target[columns]

        greatest = np.full(where.size, np.inf)

        every = np.arange(where.size)
        greatest = np.abs(function(high, every)) + np.abs(target)
        little = rounding(name, self._equation, high, target)
        roots = all_roots(function, np.vstack([low, high]), little)
        result.seen(where, roots.least + target, roots.greatest + target)
        column, t = roots.column, roots.x
        rho = density(t, column)
        value = caloric_value(name, self._equation.properties(t, rho), rho)
        good = np.abs(value - target[column]) <= _LEFT_OVER * natural_unit(name, self._equation, t)
        result.add(where[column[good]], t[good], p[column[good]], rho[good])

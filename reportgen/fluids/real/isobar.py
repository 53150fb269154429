"""The state at a pressure with an internal energy.

Along an isobar internal energy rises with temperature in each phase, (∂u/∂T)_p = c_p − p (∂v/∂T)_p, and from liquid to
vapour, so that the state is unique. Enthalpy and entropy have a faster search of their own (flash.py).
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.caloric import caloric_value, rounding
from reportgen.fluids.real.candidates import BESIDE_LINE, Candidates
from reportgen.fluids.real.density import DensitySolver
from reportgen.fluids.real.helmholtz import CHUNK, Helmholtz
from reportgen.fluids.real.melting import MeltingLine
from reportgen.fluids.real.roots import all_roots
from reportgen.fluids.real.saturation import Saturated, SaturationCurves

__all__ = ["IsobarSearch"]

FloatArray = NDArray[Any]
IntArray = NDArray[np.intp]

_ENERGY = "specific_internal_energy"
#: Rounding granted at the ends of the range.
_SLACK = 1e-9
#: What is left of u at a root, in parts of R T; more is a jump of the density.
_LEFT_OVER = 1e-9
#: The bubble line of a pseudo-pure fluid stays below this part of the pressure where it meets the dew line.
_BULGE = 1.05


class IsobarSearch:
    """Finds the state at given pressure and internal energy.

    Parameters
    ----------
    equation, curves, solver : the equation, its saturation curves, its density solver.
    lowest, highest : temperatures [K] between which states are sought.
    triple_pressure : lowest pressure with a liquid [Pa].
    melting_line : the melting line, or None; liquids are sought above it.
    """

    def __init__(
        self,
        equation: Helmholtz,
        curves: SaturationCurves,
        solver: DensitySolver,
        lowest: float,
        highest: float,
        triple_pressure: float,
        melting_line: MeltingLine | None,
    ) -> None:
        self._equation, self._curves, self._solver = equation, curves, solver
        self._lowest, self._highest = lowest * (1 - _SLACK), highest * (1 + _SLACK)
        self._triple_pressure, self._line = triple_pressure, melting_line
        # a pseudo-pure fluid condenses at pressures a little below those at which it boils
        self._lowest_dew = float(curves.at_temperature(np.array([lowest])).dew_pressure[0])

    def solve(self, pressure: FloatArray, energy: FloatArray) -> Candidates:
        """State at p [Pa] and u [J/kg]; shape (N,)."""
        result = Candidates(pressure.size)
        for start in range(0, pressure.size, CHUNK):
            where = np.arange(start, min(start + CHUNK, pressure.size))
            result.join(self._solve(pressure[where], energy[where]), where)
        return result

    def _solve(self, pressure: FloatArray, energy: FloatArray) -> Candidates:
        result = Candidates(pressure.size)
        low, high = np.full(pressure.size, self._lowest), np.full(pressure.size, self._highest)
        saturable = (pressure < self._curves.top_pressure) & (pressure >= self._triple_pressure)
        dense = np.flatnonzero(pressure >= self._curves.top_pressure)
        thin = np.flatnonzero(pressure < self._triple_pressure)
        if thin.size:
            dew = self._curves.temperatures(np.maximum(pressure[thin], self._lowest_dew))[1]
            low[thin] = np.where(pressure[thin] > self._lowest_dew, dew, low[thin])
        self._phase(result, dense, pressure, energy, self._coldest(pressure[dense]), high[dense], liquid=True)
        if self._curves.pseudo_pure:
            # the bubble line rises a little above the pressure of the highest temperature
            near = dense[pressure[dense] < _BULGE * self._curves.top_pressure]
            result.between[near] = (energy[near] >= result.least[near]) & (energy[near] <= result.greatest[near])
        self._phase(result, thin, pressure, energy, low[thin], high[thin], liquid=False)
        at = np.flatnonzero(saturable)
        if not at.size:
            return result
        p = pressure[at]
        saturated = self._curves.at_pressure(p)
        t_l, t_v = saturated.bubble_temperature, saturated.dew_temperature
        liquid, vapour = saturated.liquid_density, saturated.vapour_density
        twice, both = np.concatenate([t_l, t_v]), np.concatenate([liquid, vapour])
        found = self._equation.properties(twice, both)
        ends = found.enthalpy - np.concatenate([p, p]) / both
        of_liquid, of_vapour = ends[: at.size], ends[at.size :]
        little = rounding(_ENERGY, self._equation, t_l, energy[at])
        from_liquid, from_vapour = energy[at] - of_liquid, energy[at] - of_vapour
        mixed = np.flatnonzero((from_liquid >= -little) & (from_vapour <= little))
        x = np.clip(from_liquid[mixed] / np.maximum(of_vapour - of_liquid, little)[mixed], 0.0, 1.0)
        x = np.where(np.abs(from_liquid[mixed]) <= little[mixed], 0.0, x)
        x = np.where(np.abs(from_vapour[mixed]) <= little[mixed], 1.0, x)
        inside = (x > 0) & (x < 1)
        if self._curves.pseudo_pure:
            result.between[at[mixed[inside]]] = True
            mixed, x = mixed[~inside], x[~inside]
        rho_l, rho_v = liquid[mixed], vapour[mixed]
        density = np.where(x == 0, rho_l, np.where(x == 1, rho_v, 1 / (1 / rho_l + x * (1 / rho_v - 1 / rho_l))))
        temperature = np.where(x == 0, t_l[mixed], t_v[mixed])
        result.add(at[mixed], temperature, p[mixed], density, x, rho_l, rho_v)
        cold, hot = np.flatnonzero(from_liquid < -little), np.flatnonzero(from_vapour > little)
        coldest = np.minimum(self._coldest(p[cold]), t_l[cold])
        self._phase(result, at[cold], pressure, energy, coldest, t_l[cold], liquid=True, edge=(liquid[cold], "high"))
        self._phase(result, at[hot], pressure, energy, t_v[hot], high[at[hot]], liquid=False, edge=(vapour[hot], "low"))
        self._near_lines(result, at, saturated, from_liquid, from_vapour)
        return result

    def _near_lines(
        self,
        result: Candidates,
        where: IntArray,
        saturated: Saturated,
        from_liquid: FloatArray,
        from_vapour: FloatArray,
    ) -> None:
        """Add the saturated state where none is found on either side of a line."""
        liquid = np.abs(from_liquid) < np.abs(from_vapour)
        gap = np.minimum(np.abs(from_liquid), np.abs(from_vapour))
        close = gap <= BESIDE_LINE * self._equation.gas_constant * self._curves.top_temperature
        near = np.flatnonzero(~result.found()[where] & close)
        x = np.where(liquid[near], 0.0, 1.0)
        temperature = np.where(x == 0, saturated.bubble_temperature[near], saturated.dew_temperature[near])
        pressure = np.where(x == 0, saturated.bubble_pressure[near], saturated.dew_pressure[near])
        density = np.where(x == 0, saturated.liquid_density[near], saturated.vapour_density[near])
        result.add(where[near], temperature, pressure, density, x)

    def _coldest(self, pressure: FloatArray) -> FloatArray:
        """Lowest temperature [K] of the liquid at p [Pa]."""
        low = np.full(pressure.size, self._lowest)
        return low if self._line is None else np.maximum(low, self._line.temperature(pressure) * (1 - _SLACK))

    def _phase(
        self,
        result: Candidates,
        where: IntArray,
        pressure: FloatArray,
        energy: FloatArray,
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
        p, target = pressure[where], energy[where]

        def density(t: FloatArray, columns: IntArray) -> FloatArray:
            found, good = self._solver.solve(t, p[columns], np.full(t.size, liquid))
            found = np.where(good, found, np.nan)
            if edge is not None:
                end = (high if edge[1] == "high" else low)[columns]
                found = np.where(t == end, edge[0][columns], found)
            return found

        def function(t: FloatArray, columns: IntArray) -> FloatArray:
            rho = density(t, columns)
            value: FloatArray = caloric_value(_ENERGY, self._equation.properties(t, rho), rho)
            # without a density on this branch: too hot for it, as within the lines of a pseudo-pure fluid
            return np.where(np.isnan(rho), greatest[columns], value) - target[columns]

        greatest = np.full(where.size, np.inf)

        ends = [low, high]
        if self._curves.pseudo_pure and edge is None and liquid:
            # the one temperature above which there is no line in the way
            ends.insert(1, np.clip(np.full(where.size, self._curves.top_temperature * (1 + 1e-12)), low, high))
        every = np.arange(where.size)
        greatest = np.abs(function(high, every)) + np.abs(target)
        little = rounding(_ENERGY, self._equation, high, target)
        roots = all_roots(function, np.vstack(ends), little)
        result.seen(where, roots.least + target, roots.greatest + target)
        left = np.abs(function(roots.x, roots.column)) <= _LEFT_OVER * self._equation.gas_constant * roots.x
        column, t = roots.column[left], roots.x[left]
        result.add(where[column], t, p[column], density(t, column))

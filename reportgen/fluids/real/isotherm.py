"""All states at a temperature with an enthalpy, an entropy or an internal energy.

Along an isotherm these are functions of density: two phases by the lever rule, a single phase between the saturation
line and the highest pressure. Entropy falls with density except in water below 4 °C; enthalpy and internal energy fall
in gases and rise in liquids, so that two states may share a value. All are found, on either side of each minimum.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.caloric import caloric_value, density_slope, natural_unit, rounding
from reportgen.fluids.real.candidates import BESIDE_LINE, Candidates
from reportgen.fluids.real.ceiling import Ceiling
from reportgen.fluids.real.helmholtz import CHUNK, Helmholtz
from reportgen.fluids.real.roots import all_roots
from reportgen.fluids.real.saturation import SaturationCurves

__all__ = ["IsothermSearch"]

FloatArray = NDArray[Any]
IntArray = NDArray[np.intp]

#: Densities at which the slope is looked at, in parts of the highest: a gas below the critical temperature, any state
#: above it; and for liquids in parts of the way (in ln ρ) from saturation to the highest pressure.
_GAS = np.array([0.0, 1e-3, 1e-2, 0.1, 0.3, 0.6, 0.8, 0.9, 0.95, 1.0])[:, None]
_ABOVE = np.concatenate([[0.0, 1e-4, 1e-3, 1e-2, 0.03], np.linspace(0.06, 1.0, 40)])[:, None]
_LIQUID = np.linspace(0.0, 1.0, 24)[:, None]
#: A gas thinner than this part of the critical density may leave no trace of its density in its enthalpy; with an
#: uncertainty by rounding above the second, relative, it is not told.
_THIN, _VAGUE = 0.1, 1e-3
#: Where an isotherm starts, in lowest pressures: inside the limits.
_ABOVE_LOWEST = 1 + 1e-9


class IsothermSearch:
    """Finds every state at given temperature and enthalpy, entropy or internal energy.

    Parameters
    ----------
    equation, curves, ceiling : the equation, its saturation curves, its highest density at each temperature.
    lowest_pressure : pressure from which on states are sought [Pa].
    """

    def __init__(self, equation: Helmholtz, curves: SaturationCurves, ceiling: Ceiling, lowest_pressure: float) -> None:
        self._equation, self._curves, self._ceiling = equation, curves, ceiling
        self._lowest_pressure = lowest_pressure
        self._critical_density = float(curves.at_temperature(np.array([curves.top_temperature])).liquid_density[0])

    def solve(self, temperature: FloatArray, target: FloatArray, name: str) -> Candidates:
        """States at T [K], within the limits, where the property ``name`` has the value ``target`` [SI]; shape (N,)."""
        result = Candidates(temperature.size)
        for start in range(0, temperature.size, CHUNK):
            where = np.arange(start, min(start + CHUNK, temperature.size))
            result.join(self._solve(temperature[where], target[where], name), where)
        return result

    def _solve(self, temperature: FloatArray, target: FloatArray, name: str) -> Candidates:
        result = Candidates(temperature.size)
        thinnest = self._lowest_pressure * _ABOVE_LOWEST / (self._equation.gas_constant * temperature)
        densest = self._ceiling.density(temperature)
        below = temperature < self._curves.top_temperature
        above = np.flatnonzero(~below)
        if above.size:
            grid = np.maximum(thinnest[above], _ABOVE * densest[above])
            self._single_phase(result, above, temperature[above], target[above], grid, name)
        at = np.flatnonzero(below)
        if at.size:
            t, wanted = temperature[at], target[at]
            saturated = self._curves.at_temperature(t)
            liquid, vapour = saturated.liquid_density, saturated.vapour_density
            gas = np.maximum(np.minimum(thinnest[at], vapour), _GAS * vapour)
            dew, bubble = (saturated.dew_pressure, 1.0), (saturated.bubble_pressure, 0.0)
            self._single_phase(result, at, t, wanted, gas, name, edge=vapour, on_edge=dew)
            dense = liquid * np.maximum(densest[at] / liquid, 1.0) ** _LIQUID
            self._single_phase(result, at, t, wanted, dense, name, edge=liquid, on_edge=bubble)
            both = self._equation.properties(np.concatenate([t, t]), np.concatenate([liquid, vapour]))
            ends = caloric_value(name, both, np.concatenate([liquid, vapour]))
            from_liquid, from_vapour = wanted - ends[: t.size], wanted - ends[t.size :]
            little = rounding(name, self._equation, t, wanted)
            mixed = (np.abs(from_liquid) > little) & (np.abs(from_vapour) > little)
            mixed &= (from_liquid > 0) != (from_vapour > 0)
            gap = np.minimum(np.abs(from_liquid), np.abs(from_vapour))
            near = gap <= BESIDE_LINE * natural_unit(name, self._equation, t)
            if self._curves.pseudo_pure:
                result.between[at] = mixed & ~near
            else:
                inside = np.flatnonzero(mixed)
                rho_l, rho_v = liquid[inside], vapour[inside]
                x = from_liquid[inside] / (ends[t.size :] - ends[: t.size])[inside]
                density = 1 / (1 / rho_l + x * (1 / rho_v - 1 / rho_l))
                p = saturated.bubble_pressure[inside]
                result.add(at[inside], t[inside], p, density, x, rho_l, rho_v)
            left = np.flatnonzero(near & ~result.found()[at])
            dew = np.abs(from_vapour[left]) < np.abs(from_liquid[left])
            p = np.where(dew, saturated.dew_pressure[left], saturated.bubble_pressure[left])
            result.add(at[left], t[left], p, np.where(dew, vapour[left], liquid[left]), np.where(dew, 1.0, 0.0))
        return result

    def _single_phase(
        self,
        result: Candidates,
        where: IntArray,
        temperature: FloatArray,
        target: FloatArray,
        grid: FloatArray,
        name: str,
        edge: FloatArray | None = None,
        on_edge: tuple[FloatArray, float] | None = None,
    ) -> None:
        """Add the states between the ends of a grid of densities; ``edge`` is its saturated end, with the pressure and
        the quality there.
        """
        equation = self._equation

        def function(log_density: FloatArray, columns: IntArray) -> FloatArray:
            rho = np.exp(log_density)
            value: FloatArray = caloric_value(name, equation.properties(temperature[columns], rho), rho)
            return value - target[columns]

        def slope(log_density: FloatArray, columns: IntArray) -> FloatArray:
            t, rho = temperature[columns], np.exp(log_density)
            return density_slope(name, equation.properties(t, rho), t, rho)

        columns = np.tile(np.arange(temperature.size), grid.shape[0])
        logs = np.log(grid)
        slopes = slope(logs.reshape(-1), columns).reshape(grid.shape)
        little = rounding(name, equation, temperature, target)
        roots = all_roots(function, logs, little, slopes, slope)
        result.seen(where, roots.least + target, roots.greatest + target)
        column = roots.column
        t, density = temperature[column], np.exp(roots.x)
        found = equation.properties(t, density)
        steepness = np.abs(density_slope(name, found, t, density))
        vague = (density < _THIN * self._critical_density) & (little[column] > _VAGUE * steepness)
        pressure, quality = found.pressure, np.full_like(t, np.nan)
        if edge is not None:
            assert on_edge is not None
            saturation, x = on_edge[0][column], on_edge[1]
            log_edge = np.log(edge[column])
            on_line = np.abs(roots.x - log_edge) <= 1e-15 * (1 + np.abs(log_edge))
            density = np.where(on_line, edge[column], density)
            # far below its boiling point a liquid's pressure is lost in rounding: it is not under saturation
            pressure = np.where(on_line, saturation, pressure if x else np.maximum(pressure, saturation))
            quality[on_line] = x
        sound = (found.pressure_density > 0) | np.isfinite(quality)
        result.add(
            where[column[sound]],
            t[sound],
            pressure[sound],
            density[sound],
            quality[sound],
            vague=vague[sound],
        )

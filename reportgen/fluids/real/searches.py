"""States from pairs that need a search along an isochore or an isotherm: pressure with density, temperature with
entropy or enthalpy.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.density import DensitySolver
from reportgen.fluids.real.helmholtz import Helmholtz
from reportgen.fluids.real.saturation import SaturationCurves

__all__ = ["Crossings", "Found", "SearchFlash", "bracketed_root", "crossings"]

FloatArray = NDArray[Any]
BoolArray = NDArray[np.bool_]

_ITERATIONS = 100
#: Points of the grid on which roots are looked for.
_GRID = 80


def bracketed_root(
    evaluate: Callable[[FloatArray], tuple[FloatArray, FloatArray]],
    start: FloatArray,
    low: FloatArray,
    high: FloatArray,
) -> tuple[FloatArray, BoolArray]:
    """Root of f between ``low`` and ``high`` (positive), where f changes sign, by Newton's method kept in the bracket.

    Parameters
    ----------
    evaluate : x -> f(x) and f′(x); x, ``start``, ``low``, ``high`` of shape (N,), [any one unit].

    Returns
    -------
    the roots and whether they were found; steps smaller than 1e-13 of x, or brackets closed to 1e-14, count as found.
    """
    x, low, high = start.copy(), low.copy(), high.copy()
    rising = evaluate(high)[0] > 0
    width = high - low
    done = np.zeros(x.size, dtype=np.bool_)
    for iteration in range(_ITERATIONS):
        value, slope = evaluate(x)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = -value / slope
        done = (np.abs(step) <= 1e-13 * x) | (value == 0) | (high - low <= 1e-14 * x)
        if done.all():
            break
        above = (value > 0) == rising
        high, low = np.where(above, x, high), np.where(above, low, x)
        trial = x + step
        bad = ~((trial > low) & (trial < high))
        if iteration % 3 == 2:
            bad |= high - low > 0.5 * width
            width = high - low
        x = np.where(done, x, np.where(bad, 0.5 * (low + high), trial))
    return x, done


class Crossings(NamedTuple):
    """Where a property reaches its target along isotherms: number of crossings and ends of the first, shape (N,)
    each.
    """

    seen: NDArray[np.intp]
    low: FloatArray
    high: FloatArray


def crossings(
    equation: Helmholtz,
    temperature: FloatArray,
    low: FloatArray,
    high: FloatArray,
    target: FloatArray,
    *,
    entropy: bool,
) -> Crossings:
    """Sign changes of h − target (or s − target) on a grid of densities, evenly spaced in ln ρ from ``low`` to
    ``high``.

    Parameters
    ----------
    equation : the equation of state.
    temperature : T [K], shape (N,) as all others.
    low, high : ends of a single-phase range of densities [kg/m3].
    target : h [J/kg], or s [J/(kg*K)] if ``entropy``.
    """
    size = temperature.size
    share = np.linspace(0.0, 1.0, _GRID)[:, None]
    density = low * (high / low) ** share
    found = equation.properties(np.broadcast_to(temperature, density.shape).reshape(-1), density.reshape(-1))
    value = (found.entropy if entropy else found.enthalpy).reshape(_GRID, size) - target
    change = (value[:-1] > 0) != (value[1:] > 0)
    first = np.argmax(change, axis=0)
    columns = np.arange(size)
    return Crossings(change.sum(axis=0), density[first, columns], density[first + 1, columns])


class Found(NamedTuple):
    """Result of a search, arrays of shape (N,): temperature [K], pressure [Pa], density [kg/m3], quality [1] and the
    densities of the phases [kg/m3] (NaN where they have no meaning); ``seen`` counts the states, one means it was
    found.
    """

    temperature: FloatArray
    pressure: FloatArray
    density: FloatArray
    quality: FloatArray
    liquid_density: FloatArray
    vapour_density: FloatArray
    seen: NDArray[np.intp]


class SearchFlash:
    """Finds states at given pressure and density, temperature and entropy, temperature and enthalpy.

    Such pairs can have several states (water below 4 degC; enthalpy along an isotherm has a minimum): all are
    counted, none is picked silently.

    Parameters
    ----------
    equation, curves, solver : the equation, its saturation curves, its density solver.
    lowest, highest : temperatures [K] between which states are sought; ``highest_pressure`` [Pa] up to which.
    triple_pressure : lowest pressure with a liquid [Pa].
    """

    #: Lowest pressure [Pa] at which states are looked for along an isotherm.
    lowest_pressure = 1e-2

    def __init__(
        self,
        equation: Helmholtz,
        curves: SaturationCurves,
        solver: DensitySolver,
        lowest: float,
        highest: float,
        highest_pressure: float,
        triple_pressure: float,
    ) -> None:
        self._equation, self._curves, self._solver = equation, curves, solver
        self._lowest, self._highest, self._highest_pressure = lowest, highest, highest_pressure
        self._triple_pressure = triple_pressure

    @staticmethod
    def _empty(size: int) -> Found:
        nan = np.full(size, np.nan)
        return Found(nan, nan.copy(), nan.copy(), nan.copy(), nan.copy(), nan.copy(), np.zeros(size, dtype=np.intp))

    def pressure_density(self, pressure: FloatArray, density: FloatArray) -> Found:
        """States at p [Pa] and ρ [kg/m3], shape (N,), finite: two phases by the lever rule of volumes, one by its
        isochore.
        """
        size = pressure.size
        result = self._empty(size)
        result.pressure[:], result.density[:] = pressure, density
        low, high = np.full(size, self._lowest), np.full(size, self._highest)
        saturable = np.flatnonzero((pressure < self._curves.top_pressure) & (pressure >= self._triple_pressure))
        if saturable.size:
            saturated = self._curves.at_pressure(pressure[saturable])
            rho, liquid, vapour = density[saturable], saturated.liquid_density, saturated.vapour_density
            x = (1 / rho - 1 / liquid) / (1 / vapour - 1 / liquid)
            mixed = (x >= 0) & (x <= 1)
            result.quality[saturable] = np.where(mixed, x, np.nan)
            result.liquid_density[saturable], result.vapour_density[saturable] = liquid, vapour
            temperature = np.where(x == 0, saturated.bubble_temperature, saturated.dew_temperature)
            result.temperature[saturable] = np.where(mixed, temperature, np.nan)
            result.seen[saturable] = mixed
            low[saturable] = np.where(x > 1, saturated.dew_temperature, low[saturable])
            high[saturable] = np.where(x < 0, saturated.bubble_temperature, high[saturable])
        todo = np.flatnonzero(result.seen == 0)
        if todo.size:
            p, rho, lo, hi = pressure[todo], density[todo], low[todo], high[todo]
            grid = lo + (hi - lo) * np.linspace(0.0, 1.0, _GRID)[:, None]
            spread = np.broadcast_to(rho, grid.shape).reshape(-1)
            gap = self._stable_pressure(grid.reshape(-1), spread).reshape(grid.shape) - p
            change = (gap[:-1] > 0) != (gap[1:] > 0)
            cell, columns = np.argmax(change, axis=0), np.arange(todo.size)
            count = change.sum(axis=0)

            def evaluate(t: FloatArray) -> tuple[FloatArray, FloatArray]:
                found = self._equation.properties(t, rho)
                # The slope is the equation's inside the dome too: the bracket sees to the rest. The two saturation
                # pressures of a pseudo-pure fluid would put a jump into the bracket, so there the equation is followed.
                now = found.pressure if self._curves.pseudo_pure else self._stable_pressure(t, rho)
                return now - p, found.pressure_temperature

            lo, hi = grid[cell, columns], grid[cell + 1, columns]
            root, good = bracketed_root(evaluate, 0.5 * (lo + hi), lo, hi)
            result.temperature[todo] = root
            result.seen[todo] = np.where(good, count, 0)
        return result

    def _stable_pressure(self, temperature: FloatArray, density: FloatArray) -> FloatArray:
        """Pressure [Pa] at T [K], ρ [kg/m3]: that of saturation inside the dome, where the equation itself has none."""
        pressure = self._equation.properties(temperature, density).pressure
        below = np.flatnonzero(temperature < self._curves.top_temperature)
        saturated = self._curves.at_temperature(temperature[below])
        rho = density[below]
        inside = (rho < saturated.liquid_density) & (rho > saturated.vapour_density)
        # a pseudo-pure fluid has two saturation pressures; nearer to the vapour, that of the dew line
        light = rho * rho < saturated.liquid_density * saturated.vapour_density
        saturation = np.where(light, saturated.dew_pressure, saturated.bubble_pressure)
        pressure[below[inside]] = saturation[inside]
        return pressure

    def temperature_caloric(self, temperature: FloatArray, target: FloatArray, *, entropy: bool) -> Found:
        """States at T [K] and h [J/kg], or s [J/(kg*K)] if ``entropy``; shape (N,), finite, within the temperature
        limits.
        """
        size = temperature.size
        result = self._empty(size)
        result.temperature[:] = temperature
        lowest = self.lowest_pressure / (self._equation.gas_constant * temperature)
        liquid_side = np.ones(size, dtype=np.bool_)
        densest, _ = self._solver.solve(temperature, np.full(size, self._highest_pressure), liquid_side)
        below = np.flatnonzero(temperature < self._curves.top_temperature)
        edge = densest.copy()
        if below.size:
            t = temperature[below]
            saturated = self._curves.at_temperature(t)
            liquid, vapour = saturated.liquid_density, saturated.vapour_density
            ends = self._equation.properties(np.concatenate([t, t]), np.concatenate([liquid, vapour]))
            value = ends.entropy if entropy else ends.enthalpy
            from_liquid, from_vapour = target[below] - value[: t.size], target[below] - value[t.size :]
            # a saturated state given back: its value differs from the one computed here by rounding at most
            rounding = 1e-13 * self._equation.gas_constant * (1.0 if entropy else t)
            x = from_liquid / (value[t.size :] - value[: t.size])
            x = np.where(np.abs(from_liquid) <= rounding, 0.0, np.where(np.abs(from_vapour) <= rounding, 1.0, x))
            mixed = (x >= 0) & (x <= 1)
            result.quality[below] = np.where(mixed, x, np.nan)
            result.liquid_density[below], result.vapour_density[below] = liquid, vapour
            rho = np.where(x == 0, liquid, np.where(x == 1, vapour, 1 / (1 / liquid + x * (1 / vapour - 1 / liquid))))
            p = np.where(x == 0, saturated.bubble_pressure, saturated.dew_pressure)
            result.density[below] = np.where(mixed, rho, np.nan)
            result.pressure[below] = np.where(mixed, p, np.nan)
            result.seen[below] = mixed
            edge[below] = vapour * (1 - 1e-9)
            self._isotherms(result, below, target, liquid * (1 + 1e-9), densest[below], entropy=entropy)
        self._isotherms(result, np.arange(size), target, lowest, edge, entropy=entropy)
        return result

    def _isotherms(
        self,
        result: Found,
        where: NDArray[np.intp],
        target: FloatArray,
        low: FloatArray,
        high: FloatArray,
        *,
        entropy: bool,
    ) -> None:
        """Add the single-phase states between two densities; the last one found stands in the result."""
        equation = self._equation
        crossed = crossings(equation, result.temperature[where], low, high, target[where], entropy=entropy)
        some = np.flatnonzero(crossed.seen > 0)
        result.seen[where] += crossed.seen
        if not some.size:
            return
        at = where[some]
        t, wanted = result.temperature[at], target[at]

        def evaluate(rho: FloatArray) -> tuple[FloatArray, FloatArray]:
            found = equation.properties(t, rho)
            if entropy:
                return found.entropy - wanted, -found.pressure_temperature / rho**2
            return found.enthalpy - wanted, (found.pressure_density - t * found.pressure_temperature / rho) / rho

        lo, hi = crossed.low[some], crossed.high[some]
        rho, good = bracketed_root(evaluate, np.sqrt(lo * hi), lo, hi)
        result.density[at] = rho
        result.pressure[at] = equation.properties(t, rho).pressure
        result.quality[at] = np.nan
        result.seen[at[~good]] = 0

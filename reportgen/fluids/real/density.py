"""Density at given temperature and pressure: Newton's method kept in a bracket, vectorised with an active set."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.helmholtz import CHUNK, Helmholtz
from reportgen.fluids.real.saturation import SaturationCurves

__all__ = ["DensitySolver"]

FloatArray = NDArray[Any]

_ITERATIONS = 100
#: From this iteration on a bracket that shrinks too slowly is bisected: Newton steps can settle in a cycle of two.
_PATIENCE = 10
#: Relative rounding of a computed pressure, in parts of ρRT.
_ROUNDING = 1e-14


class DensitySolver:
    """Solves p(T, ρ) = p on a chosen branch.

    Parameters
    ----------
    equation : the equation of state.
    curves : its saturation curves, which separate the branches.
    acentric_factor : for the starting value above the critical temperature, the root of the cubic
        equation of Peng and Robinson, Ind. Eng. Chem. Fundam. 15 (1976) 59, doi:10.1021/i160057a011.
    maximum_density : upper end of all searches [kg/m3].
    """

    def __init__(
        self, equation: Helmholtz, curves: SaturationCurves, acentric_factor: float, maximum_density: float
    ) -> None:
        self._equation = equation
        self._curves = curves
        self.maximum_density = maximum_density
        self.kappa = 0.37464 + 1.54226 * acentric_factor - 0.26992 * acentric_factor**2

    def solve(
        self, temperature: FloatArray, pressure: FloatArray, liquid: NDArray[np.bool_]
    ) -> tuple[FloatArray, NDArray[np.bool_]]:
        """Density [kg/m3] at T [K], p [Pa], shape (N,), and whether it was found.

        ``liquid`` chooses the branch where T is below that of the critical point, and has no effect above.
        """
        size = temperature.size
        if size <= CHUNK:
            return self._solve(temperature, pressure, liquid)
        density, found = np.empty(size), np.empty(size, dtype=np.bool_)
        for start in range(0, size, CHUNK):
            part = slice(start, start + CHUNK)
            density[part], found[part] = self._solve(temperature[part], pressure[part], liquid[part])
        return density, found

    def _solve(
        self, temperature: FloatArray, pressure: FloatArray, liquid: NDArray[np.bool_]
    ) -> tuple[FloatArray, NDArray[np.bool_]]:
        start, low, high = self._start(temperature, pressure, liquid)
        return self._iterate(temperature, pressure, start, low, high)

    def guess(self, temperature: FloatArray, pressure: FloatArray, liquid: NDArray[np.bool_]) -> FloatArray:
        """The density that :meth:`solve` starts from [kg/m3]."""
        return self._start(temperature, pressure, liquid)[0]

    def _start(
        self, temperature: FloatArray, pressure: FloatArray, liquid: NDArray[np.bool_]
    ) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Starting density and the ends of its bracket [kg/m3]."""
        rt = self._equation.gas_constant * temperature
        start = pressure / rt
        low = start * 1e-3
        high = np.full_like(start, self.maximum_density)
        below = temperature < self._curves.top_temperature
        above = ~below
        if below.any():
            fluid, gas = below & liquid, below & ~liquid
            saturated = self._curves.at_temperature(temperature[below])
            edge = np.empty_like(start)
            edge[below] = saturated.liquid_density
            start[fluid] = edge[fluid]
            low[fluid] = edge[fluid] * (1 - 1e-9)
            if gas.any():
                # compressibility taken as linear in pressure, from 1 to that of the saturated vapour
                edge[below] = saturated.vapour_density
                full = np.empty_like(start)
                full[below] = saturated.dew_pressure
                edge, full = edge[gas], full[gas]
                share = np.minimum(pressure[gas] / full, 1)
                start[gas] /= 1 - (1 - full / (edge * rt[gas])) * share
                high[gas] = edge * (1 + 1e-9)
        if above.all():
            start = self._cubic_start(temperature, pressure, rt)
        elif above.any():
            start[above] = self._cubic_start(temperature[above], pressure[above], rt[above])
        return start, low, high

    def _cubic_start(self, temperature: FloatArray, pressure: FloatArray, rt: FloatArray) -> FloatArray:
        """Density of the Peng-Robinson equation above the critical temperature, by its largest root."""
        top = self._curves.top_temperature
        scale = pressure / self._curves.top_pressure
        ratio = temperature / top
        b = 0.07780 * scale / ratio
        a = 0.45724 * scale / ratio**2 * (1 + self.kappa * (1 - np.sqrt(ratio))) ** 2
        # Z³ + c2 Z² + c1 Z + c0 = 0 by Cardano's formula; three real roots (two of no meaning) by Viète's
        c2, c1, c0 = b - 1, a - 3 * b * b - 2 * b, b * (b * b + b - a)
        third = c2 / 3
        p3 = c1 / 3 - third * third
        q2 = third**3 + (c0 - third * c1) / 2
        inside = q2 * q2 + p3**3
        big = np.cbrt(-q2 - np.copysign(np.sqrt(np.maximum(inside, 0)), q2))
        z = big - p3 / np.where(big == 0, 1, big) - third
        three = np.flatnonzero(inside < 0)
        if three.size:
            radius = np.sqrt(-p3[three])
            angle = np.arccos(np.minimum(np.maximum(-q2[three] / radius**3, -1), 1))
            z[three] = 2 * radius * np.cos(angle / 3) - third[three]
        start: FloatArray = pressure / (np.maximum(z, b * 1.02) * rt)
        return np.minimum(start, 0.98 * self.maximum_density)

    def _iterate(
        self, temperature: FloatArray, pressure: FloatArray, density: FloatArray, low: FloatArray, high: FloatArray
    ) -> tuple[FloatArray, NDArray[np.bool_]]:
        """Newton's method in ρ with the bulk modulus taken to grow with density as in a liquid, bisecting if need
        be.
        """
        equation = self._equation
        result = density.copy()
        found = np.zeros(density.size, dtype=np.bool_)
        isotherm = equation.isotherm(temperature)
        rt = equation.gas_constant * temperature
        stiffening = np.minimum(np.maximum(3 * (density / equation.reducing_density - 1), 0), 3)
        where: NDArray[Any] = np.arange(density.size)
        done = np.zeros(density.size, dtype=np.bool_)
        width = np.log(high / low)
        for iteration in range(_ITERATIONS):
            now, slope = equation.pressure(density, temperature, isotherm)
            gap = pressure - now
            ratio = gap / (density * slope)
            trial = density * (1 + ratio / (1 + stiffening * ratio))
            # Convergence first: at the solution the bracket may be closed by rounding.
            size = np.abs(ratio)
            settled = (size <= 1e-9 * np.minimum(slope / rt, 1)) & (slope > 0)
            settled |= np.abs(gap) <= _ROUNDING * density * rt
            # What has settled once may be unsettled by rounding in the next turn: it is not asked again.
            settled &= ~done
            if settled.any():
                # Where the gap is rounding and the slope small, the step means nothing.
                at = where[settled]
                result[at] = np.where(size < 1e-6, trial, density)[settled]
                found[at] = True
                done |= settled
                left = done.size - np.count_nonzero(done)
                if not left:
                    return result, found
                if 2 * left < done.size:
                    keep = ~done
                    where, gap, ratio, trial, slope = where[keep], gap[keep], ratio[keep], trial[keep], slope[keep]
                    temperature, pressure, density, rt = temperature[keep], pressure[keep], density[keep], rt[keep]
                    low, high, width, stiffening = low[keep], high[keep], width[keep], stiffening[keep]
                    isotherm, done = isotherm.take(keep), done[keep]
            rising = gap > 0
            low = np.where(rising, np.maximum(density, low), low)
            high = np.where(rising, high, np.minimum(density, high))
            bad = ~((trial > low) & (trial < high) & (slope > 0) & (1 + stiffening * ratio > 0.1))
            if iteration >= _PATIENCE and iteration % 3 == 0:
                narrower = np.log(high / low)
                bad |= narrower > 0.5 * width
                width = narrower
            density = np.where(bad, np.sqrt(low * high), trial) if bad.any() else trial
        result[where] = np.where(done, result[where], density)
        return result, found

"""Density of one state at given temperature and pressure, by Halley's method; see ../density.py."""

from __future__ import annotations

from math import acos, copysign, cos, exp, sqrt

from reportgen.fluids.real.density import DensitySolver
from reportgen.fluids.real.scalar.curves import ScalarCurves
from reportgen.fluids.real.scalar.equation import ScalarEquation

__all__ = ["LEAST_SLOPE", "ScalarDensity"]

_STEPS = 10
#: Relative steps at which an iteration of third order, and one of second order, has settled: what is left after that
#: step is beyond the last digit.
_SETTLED_CUBIC = 2e-6
_SETTLED_CHORD = 1e-9
#: Least (∂p/∂ρ)_T in parts of RT: closer to the critical point digits are lost.
LEAST_SLOPE = 3e-3


class ScalarDensity:
    """Solves p(T, ρ) = p on a chosen branch, for one state.

    Parameters
    ----------
    equation, curves : the equation of state and its saturation curves.
    solver : the same for arrays, which knows the bounds and the cubic equation to start from.
    """

    def __init__(self, equation: ScalarEquation, curves: ScalarCurves, solver: DensitySolver) -> None:
        self._equation, self._curves = equation, curves
        self._top, self._top_pressure = curves.top_temperature, curves.top_pressure
        self._kappa, self.maximum_density = solver.kappa, solver.maximum_density

    def cubic_start(self, temperature: float, pressure: float) -> float:
        """Density [kg/m3] of the Peng-Robinson equation above the critical temperature, as in ../density.py."""
        ratio = temperature / self._top
        scale = pressure / self._top_pressure
        b = 0.07780 * scale / ratio
        a = 0.45724 * scale / ratio**2 * (1.0 + self._kappa * (1.0 - sqrt(ratio))) ** 2
        c2, c1, c0 = b - 1.0, a - b * (3.0 * b + 2.0), b * (b * b + b - a)
        third = c2 / 3.0
        p3 = c1 / 3.0 - third * third
        q2 = third * third * third + (c0 - third * c1) / 2.0
        inside = q2 * q2 + p3 * p3 * p3
        if inside < 0.0:
            radius = sqrt(-p3)
            z = 2.0 * radius * cos(acos(max(-1.0, min(1.0, -q2 / radius**3))) / 3.0) - third
        else:
            cube = -q2 - copysign(sqrt(inside), q2)
            big = copysign(abs(cube) ** (1.0 / 3.0), cube)
            z = big - (p3 / big if big else 0.0) - third
        density = pressure / (max(z, b * 1.02) * self._equation.gas_constant * temperature)
        return min(density, 0.98 * self.maximum_density)

    def _settle(self, temperature: float, pressure: float, start: float, low: float, high: float) -> float:
        """ρ [kg/m3] between ``low`` and ``high`` where p(T, ρ) = p, by Halley's method in ln ρ from ``start``; 0 where
        it does not settle.
        """
        equation = self._equation
        isotherm = equation.isotherm(temperature)
        settled = _SETTLED_CUBIC if isotherm.exact else _SETTLED_CHORD
        least = LEAST_SLOPE * equation.gas_constant * temperature
        density = start
        for _ in range(_STEPS):
            now, slope, bend = equation.pressure(density, temperature, isotherm)
            gap = pressure - now
            if slope <= 0.0:
                return 0.0
            denominator = 2.0 * slope * slope + gap * bend
            if denominator <= 0.0:
                return 0.0
            step = 2.0 * gap * slope / denominator
            if -settled < step < settled:
                result = density * exp(step)
                return result if low <= result <= high and slope >= least * density else 0.0
            if not -1.0 < step < 1.0:
                return 0.0
            density *= exp(step)
        return 0.0

    def on_branch(self, temperature: float, pressure: float, liquid: bool) -> float:
        """ρ [kg/m3] of liquid or vapour at T [K] and p [Pa]; 0 where it is not found."""
        if temperature >= self._top:
            start = self.cubic_start(temperature, pressure)
            return self._settle(temperature, pressure, start, 0.0, self.maximum_density)
        if liquid:
            edge = self._curves.liquid_density(temperature)
            return self._settle(temperature, pressure, edge, edge, self.maximum_density)
        _, full, _, edge = self._curves.at_temperature(temperature)
        # compressibility taken as linear in pressure, from 1 to that of the saturated vapour
        rt = self._equation.gas_constant * temperature
        start = pressure / rt / (1.0 - (1.0 - full / (edge * rt)) * min(pressure / full, 1.0))
        return self._settle(temperature, pressure, start, 0.0, edge)

"""From each pair of properties to the states of a batch: checks, the solver of the pair, faults."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import partial
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.model import Limits, Point
from reportgen.fluids.pairs import Elements
from reportgen.fluids.real.density import DensitySolver
from reportgen.fluids.real.flash import PressureFlash
from reportgen.fluids.real.helmholtz import Helmholtz
from reportgen.fluids.real.limits import Guard
from reportgen.fluids.real.saturation import SaturationCurves
from reportgen.fluids.real.searches import SEARCHED_PAIRS, Searches
from reportgen.fluids.real.solution import Solution

__all__ = ["BatchPairs"]

FloatArray = NDArray[np.float64]

#: Pressures closer than this to saturation (relative) do not decide between liquid and vapour.
_SATURATION_BAND = 1e-9
#: Densities closer than this to a line of a pseudo-pure fluid (relative) are on it.
_ON_LINE = 1e-12


class BatchPairs:
    """Solves batches of one fluid, by pair of properties.

    Each of ``solvers`` takes the two properties [SI], shape (N,), finite, and an account of elements, which receives a
    fault for each that has no state within the limits, or more than one.

    Parameters
    ----------
    equation, curves, solver : the equation, its saturation curves, its density solver.
    guard, limits : its limits, and the words for what lies beyond.
    triple_pressure : lowest pressure with a liquid [Pa].
    """

    def __init__(
        self,
        equation: Helmholtz,
        curves: SaturationCurves,
        solver: DensitySolver,
        guard: Guard,
        limits: Limits,
        triple_pressure: float,
    ) -> None:
        self._equation, self._curves, self._solver = equation, curves, solver
        self._guard, self._limits, self._triple_pressure = guard, limits, triple_pressure
        low, high = limits.minimum_temperature, limits.maximum_temperature
        self._flash = PressureFlash(equation, curves, solver, low, high, triple_pressure, guard.melting_line)
        self.searches = Searches(equation, curves, solver, guard, limits, triple_pressure)
        self.solvers: dict[tuple[str, str], Callable[[FloatArray, FloatArray, Elements], Solution]] = {
            ("pressure", "temperature"): self._pressure_temperature,
            ("pressure", "specific_enthalpy"): partial(self._pressure_caloric, "specific_enthalpy"),
            ("pressure", "specific_entropy"): partial(self._pressure_caloric, "specific_entropy"),
            ("pressure", "quality"): self._pressure_quality,
            ("temperature", "quality"): self._temperature_quality,
            ("temperature", "density"): self._temperature_density,
            ("pressure", "superheat"): partial(self._pressure_distance, "superheat", 1.0),
            ("pressure", "subcooling"): partial(self._pressure_distance, "subcooling", 0.0),
            **{names: partial(self._searched, names) for names in SEARCHED_PAIRS},
        }

    def solution(self, temperature: FloatArray, pressure: FloatArray, density: FloatArray, **more: Any) -> Solution:
        """States at T [K], p [Pa], ρ [kg/m3], shape (N,); ``more`` as in Solution."""
        return Solution(self._equation, self._curves, self._triple_pressure, temperature, pressure, density, **more)

    def _harmless(
        self, pressure: FloatArray, temperature: FloatArray, elements: Elements
    ) -> tuple[FloatArray, FloatArray]:
        """Pressure and temperature with a dilute hot gas in place of rejected elements, so that nothing is searched
        there.
        """
        rejected = elements.rejected
        return np.where(rejected, 1e4, pressure), np.where(rejected, self._limits.maximum_temperature, temperature)

    def _pressure_temperature(self, pressure: FloatArray, temperature: FloatArray, elements: Elements) -> Solution:
        guard, curves = self._guard, self._curves
        guard.pressure(pressure, elements)
        guard.temperature(temperature, elements)
        p, t = self._harmless(pressure, temperature, elements) if elements.rejected.any() else (pressure, temperature)
        liquid = np.zeros(p.size, dtype=np.bool_)
        below = t < curves.top_temperature
        if below.any():
            saturated = curves.at_temperature(t[below])
            bubble, dew = saturated.bubble_pressure, saturated.dew_pressure
            liquid[below] = p[below] > (bubble if not self._curves.pseudo_pure else np.sqrt(bubble * dew))
            band = (p[below] < bubble * (1 + _SATURATION_BAND)) & (p[below] > dew * (1 - _SATURATION_BAND))
            if band.any():
                on_line = np.zeros(p.size, dtype=np.bool_)
                on_line[below] = band
                elements.reject(
                    on_line,
                    lambda i: guard.on_saturation(pressure[i], temperature[i], self._saturated_points(temperature[i])),
                )
        guard.melting(p, t, elements)
        if elements.rejected.any():
            p, t = self._harmless(p, t, elements)
        density, found = self._solver.solve(t, p, liquid)
        elements.reject(~found, lambda i: guard.not_found("pressure", p[i], "temperature", t[i]))
        return self.solution(temperature, pressure, density)

    def _saturated_points(self, temperature: float) -> tuple[Point, ...]:
        """Saturated vapour and liquid at T [K], in the order of rising density; none for a pseudo-pure fluid."""
        if self._curves.pseudo_pure:
            return ()
        saturated = self._curves.at_temperature(np.array([temperature]))
        pressure = float(saturated.bubble_pressure[0])
        densities = (float(saturated.vapour_density[0]), float(saturated.liquid_density[0]))
        return tuple(Point(float(temperature), pressure, density) for density in densities)

    def _pressure_caloric(self, name: str, pressure: FloatArray, target: FloatArray, elements: Elements) -> Solution:
        guard = self._guard
        guard.pressure(pressure, elements)
        p = (
            pressure
            if not elements.rejected.any()
            else np.where(elements.rejected, self._curves.top_pressure / 2, pressure)
        )
        result = self._flash.solve(p, target, entropy=name == "specific_entropy")
        self.searches.complete(result, p, target, name)
        elements.reject(result.between, lambda i: guard.between_lines("pressure", p[i], name, target[i]))
        elements.reject(result.cold, lambda i: guard.too_cold(p[i], name, target[i]))
        elements.reject(result.hot, lambda i: guard.too_hot(p[i], name, target[i]))
        elements.reject(~result.found, lambda i: guard.not_found("pressure", p[i], name, target[i]))
        guard.melting(p, result.temperature, elements)
        return self.solution(
            result.temperature,
            pressure,
            result.density,
            quality=result.quality,
            liquid_density=result.liquid_density,
            vapour_density=result.vapour_density,
            known={name: target},
        )

    def _pressure_quality(self, pressure: FloatArray, quality: FloatArray, elements: Elements) -> Solution:
        self._guard.pressure(pressure, elements)
        self._guard.quality(quality, elements, self._curves.pseudo_pure)
        self._guard.saturation_pressure(pressure, elements, self._triple_pressure, self._curves.top_pressure)
        p = np.where(elements.rejected, self._curves.top_pressure / 2, pressure)
        saturated = self._curves.at_pressure(np.maximum(p, self._triple_pressure))
        temperature = np.where(quality == 0, saturated.bubble_temperature, saturated.dew_temperature)
        return self._saturated(temperature, pressure, quality, saturated.liquid_density, saturated.vapour_density)

    def _temperature_quality(self, temperature: FloatArray, quality: FloatArray, elements: Elements) -> Solution:
        self._guard.quality(quality, elements, self._curves.pseudo_pure)
        self._guard.saturation_temperature(temperature, elements, self._curves.top_temperature)
        t = np.where(elements.rejected, self._limits.minimum_temperature, temperature)
        saturated = self._curves.at_temperature(t)
        pressure = np.where(quality == 0, saturated.bubble_pressure, saturated.dew_pressure)
        return self._saturated(temperature, pressure, quality, saturated.liquid_density, saturated.vapour_density)

    def _saturated(
        self, temperature: FloatArray, pressure: FloatArray, quality: FloatArray, liquid: FloatArray, vapour: FloatArray
    ) -> Solution:
        density = 1 / (1 / liquid + quality * (1 / vapour - 1 / liquid))
        # exact ends: one phase, with its heat capacity and speed of sound
        density = np.where(quality == 0, liquid, np.where(quality == 1, vapour, density))
        return self.solution(
            temperature, pressure, density, quality=quality, liquid_density=liquid, vapour_density=vapour
        )

    def _temperature_density(self, temperature: FloatArray, density: FloatArray, elements: Elements) -> Solution:
        guard = self._guard
        guard.temperature(temperature, elements)
        guard.density(density, elements, self._solver.maximum_density)
        t = np.where(elements.rejected, self._limits.maximum_temperature, temperature)
        rho = np.where(elements.rejected, 1.0, density)
        below = t < self._curves.top_temperature
        quality = np.full_like(t, np.nan)
        rho_l, rho_v = quality.copy(), quality.copy()
        pressure = self._equation.properties(t, rho).pressure
        if below.any():
            saturated = self._curves.at_temperature(t[below])
            liquid, vapour = saturated.liquid_density, saturated.vapour_density
            x = (1 / rho[below] - 1 / liquid) / (1 / vapour - 1 / liquid)
            if self._curves.pseudo_pure:
                # there is no state beside a line on its inner side, so a density that rounding put there is on it
                x = np.where(np.abs(rho[below] / liquid - 1) <= _ON_LINE, 0.0, x)
                x = np.where(np.abs(rho[below] / vapour - 1) <= _ON_LINE, 1.0, x)
            mixed = (x >= 0) & (x <= 1)
            rho_l[below], rho_v[below] = liquid, vapour
            quality[below] = np.where(mixed, x, np.nan)
            # a liquid's pressure is the rounding of its density at least: it is not under saturation
            liquid_pressure = np.maximum(pressure[below], saturated.bubble_pressure)
            pressure[below] = np.where(rho[below] > liquid, liquid_pressure, pressure[below])
            pressure[below] = np.where(mixed, saturated.bubble_pressure, pressure[below])
            if self._curves.pseudo_pure:
                inside = np.zeros(t.size, dtype=np.bool_)
                inside[below] = mixed & (x > 0) & (x < 1)
                elements.reject(inside, lambda i: guard.between_lines("temperature", t[i], "density", rho[i]))
                pressure[below] = np.where(mixed & (x == 1), saturated.dew_pressure, pressure[below])
        guard.pressure(pressure, elements)
        guard.melting(pressure, t, elements)
        return self.solution(
            temperature, pressure, density, quality=quality, liquid_density=rho_l, vapour_density=rho_v
        )

    def _searched(self, names: tuple[str, str], first: FloatArray, second: FloatArray, elements: Elements) -> Solution:
        """The one state with two properties."""
        found = self.searches.find(names, first, second, elements)
        return self.given_back(found._asdict(), names, first, second)

    def given_back(
        self, found: Mapping[str, FloatArray], names: tuple[str, str], first: FloatArray, second: FloatArray
    ) -> Solution:
        """States found, in which the properties given [SI] stand as they were given.

        ``names`` are those of ``first`` and ``second``; ``found`` holds fields of Solution by name, shape (N,) each.
        """
        fields = ("temperature", "pressure", "density", "quality", "liquid_density", "vapour_density")
        values = {name: found[name] for name in fields}
        known = {name: value for name, value in zip(names, (first, second), strict=True) if name not in fields}
        values |= {name: value for name, value in zip(names, (first, second), strict=True) if name in fields}
        return self.solution(**values, known=known)

    def _pressure_distance(
        self, name: str, end: float, pressure: FloatArray, distance: FloatArray, elements: Elements
    ) -> Solution:
        """A stated distance from saturation; none at all is the saturated state itself."""
        guard = self._guard
        guard.pressure(pressure, elements)
        guard.saturation_pressure(pressure, elements, self._triple_pressure, self._curves.top_pressure)
        guard.distance(distance, elements, name)
        p = np.where(elements.rejected, self._curves.top_pressure / 2, pressure)
        gap = np.where(elements.rejected, 0.0, distance)
        saturated = self._curves.at_pressure(p)
        base = saturated.dew_temperature if end else saturated.bubble_temperature
        temperature = base + gap if end else base - gap
        guard.temperature(temperature, elements)
        guard.melting(p, temperature, elements)
        # inside the band next to saturation, the branch is known here although (p, T) would not tell it
        liquid = np.full(p.size, not end)
        t = np.where(elements.rejected, base, temperature)
        density, found = self._solver.solve(t, p, liquid)
        edge = saturated.vapour_density if end else saturated.liquid_density
        # so close that the branch ends in rounding: the saturated density
        near = gap <= _SATURATION_BAND * base
        density = np.where(near, edge, density)
        elements.reject(~found & ~near, lambda i: guard.not_found("pressure", p[i], name, distance[i]))
        quality = np.where(gap == 0, end, np.nan)
        return self.solution(temperature, pressure, density, quality=quality, known={name: distance})

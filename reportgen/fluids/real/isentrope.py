"""The state with an enthalpy and an entropy.

Along an isentrope dh = v dp, in two phases as in one: enthalpy rises with pressure, and since at a pressure entropy
rises with temperature, enthalpy and entropy belong to one state at most. The isentrope is cut where it crosses the
saturation lines; enthalpy there tells which part the state lies on. In two phases T follows from h = h′ + T (s − s′);
in a single phase the isentrope is followed from its nearest crossing,

    d ln ρ/dh = 1/w²,   d ln T/dh = (∂p/∂T)_ρ/(ρ c_v w²),   w² = ∂p/∂ρ + T (∂p/∂T)²/(ρ² c_v),

to where h is reached, and Newton's method in T and ρ settles it (its determinant −c_v w²/(Tρ) is never zero).
"""

from __future__ import annotations

from functools import cached_property
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.caloric import rounding
from reportgen.fluids.real.candidates import BESIDE_LINE, Candidates
from reportgen.fluids.real.helmholtz import CHUNK, Helmholtz
from reportgen.fluids.real.lines import SaturationLines
from reportgen.fluids.real.roots import bracketed_root
from reportgen.fluids.real.saturation import SaturationCurves

__all__ = ["IsentropeSearch"]

FloatArray = NDArray[Any]
IntArray = NDArray[np.intp]
BoolArray = NDArray[np.bool_]

#: Steps along the isentrope from its anchor to the enthalpy sought, and on a second try.
_STEPS, _SHORTER_STEPS = 6, 100
_NEWTON_ITERATIONS = 25
#: Relative step after which Newton's method has converged: it doubles the digits with each step.
_SETTLED = 1e-7
#: Longest step in ln T and in ln ρ.
_LONGEST = 0.5
#: Distance in h that is put down to rounding on a saturation line, in parts of |h| + R T_top.
_ON_LINE = 1e-15


class _Crossings(NamedTuple):
    """Crossings of isentropes with the saturation lines in the order of rising enthalpy, arrays of shape (K, N), NaN
    last: temperature [K], density [kg/m3], pressure [Pa], enthalpy [J/kg], and quality [1], 0 or 1.
    """

    temperature: FloatArray
    density: FloatArray
    pressure: FloatArray
    enthalpy: FloatArray
    quality: FloatArray


class IsentropeSearch:
    """Finds the state at given enthalpy and entropy.

    Parameters
    ----------
    equation, curves, lines : the equation, its saturation curves, what is known along them.
    lowest, highest : temperatures [K] between which states are sought.
    lowest_pressure : pressure from which on states are sought [Pa].
    maximum_density : upper end of all searches [kg/m3].
    """

    def __init__(
        self,
        equation: Helmholtz,
        curves: SaturationCurves,
        lines: SaturationLines,
        lowest: float,
        highest: float,
        lowest_pressure: float,
        maximum_density: float,
    ) -> None:
        self._equation, self._curves, self._lines = equation, curves, lines
        self._lowest, self._highest = lowest, highest
        self._lowest_pressure = lowest_pressure
        self._maximum_density = maximum_density

    def solve(self, enthalpy: FloatArray, entropy: FloatArray) -> Candidates:
        """State at h [J/kg] and s [J/(kg*K)]; shape (N,)."""
        result = Candidates(enthalpy.size)
        for start in range(0, enthalpy.size, CHUNK):
            where = np.arange(start, min(start + CHUNK, enthalpy.size))
            result.join(self._solve(enthalpy[where], entropy[where]), where)
        return result

    def _solve(self, enthalpy: FloatArray, entropy: FloatArray) -> Candidates:
        size = enthalpy.size
        result = Candidates(size)
        crossings = self._crossings(entropy)
        little = _ON_LINE * (np.abs(enthalpy) + self._equation.gas_constant * self._curves.top_temperature)
        gaps = enthalpy - crossings.enthalpy
        passed = np.sum(gaps > little, axis=0)
        columns = np.arange(size)
        on_line = np.abs(gaps) <= little
        at = np.flatnonzero(on_line.any(axis=0))
        self._on_line(result, at, np.argmax(on_line[:, at], axis=0), crossings)
        lines = self._lines
        starts_mixed = (entropy >= lines.liquid_entropy.at_lowest) & (entropy <= lines.vapour_entropy.at_lowest)
        mixed = starts_mixed ^ (passed % 2 == 1)
        rest = ~on_line.any(axis=0)
        # the last crossing passed and the next one not yet, as far as there are any
        known = np.sum(~np.isnan(crossings.enthalpy), axis=0)
        before, after = passed - 1, np.minimum(passed, crossings.enthalpy.shape[0] - 1)
        has_before, has_after = passed > 0, passed < known
        inside = np.flatnonzero(rest & mixed)
        if inside.size:
            low = np.where(has_before, crossings.temperature[before, columns], self._lowest)[inside]
            top = self._curves.top_temperature
            high = np.where(has_after, crossings.temperature[after, columns], top)[inside]
            self._two_phase(result, inside, enthalpy[inside], entropy[inside], low, high)
        # the lines of a pseudo-pure fluid leave room above the temperature where they meet
        outside = np.flatnonzero(rest & (~mixed | self._curves.pseudo_pure))
        if outside.size:
            nearest = np.where(has_before, before, after)[outside]
            anchor = has_before[outside] | has_after[outside]
            t = np.where(anchor, crossings.temperature[nearest, outside], np.nan)
            rho = np.where(anchor, crossings.density[nearest, outside], np.nan)
            self._single_phase(result, outside, enthalpy[outside], entropy[outside], t, rho)
        # what is left of a state next to a line can be rounding alone, there most of all near the critical point
        gaps = np.abs(np.where(np.isnan(gaps), np.inf, gaps))
        row = np.argmin(gaps, axis=0)
        left = ~result.found() & (
            gaps[row, columns] <= BESIDE_LINE * self._equation.gas_constant * self._curves.top_temperature
        )
        self._on_line(result, np.flatnonzero(left), row[left], crossings)
        return result

    @staticmethod
    def _on_line(result: Candidates, where: IntArray, row: IntArray, crossings: _Crossings) -> None:
        """Add crossings themselves."""
        t, rho, p, _, x = (part[row, where] for part in crossings)
        result.add(where, t, p, rho, x)

    def _crossings(self, entropy: FloatArray) -> _Crossings:
        liquid, vapour = self._lines.liquid_entropy.crossings(entropy), self._lines.vapour_entropy.crossings(entropy)
        temperature = np.vstack([liquid, vapour])
        quality = np.vstack([np.zeros_like(liquid), np.ones_like(vapour)])
        density, pressure, enthalpy = (np.full_like(temperature, np.nan) for _ in range(3))
        known = ~np.isnan(temperature)
        t, x = temperature[known], quality[known]
        saturated = self._curves.at_temperature(t)
        density[known] = np.where(x == 1, saturated.vapour_density, saturated.liquid_density)
        pressure[known] = np.where(x == 1, saturated.dew_pressure, saturated.bubble_pressure)
        enthalpy[known] = self._equation.properties(t, density[known]).enthalpy
        order = np.argsort(enthalpy, axis=0)
        return _Crossings(
            *(np.take_along_axis(part, order, axis=0) for part in (temperature, density, pressure, enthalpy, quality))
        )

    def _two_phase(
        self,
        result: Candidates,
        where: IntArray,
        enthalpy: FloatArray,
        entropy: FloatArray,
        low: FloatArray,
        high: FloatArray,
    ) -> None:
        """Add the states between two temperatures [K] of the dome, by h = h′ + T (s − s′)."""
        if self._curves.pseudo_pure:
            result.between[where] = True
            return

        def gap(t: FloatArray, columns: IntArray) -> FloatArray:
            liquid = self._equation.properties(t, self._curves.at_temperature(t).liquid_density)
            value: FloatArray = liquid.enthalpy + t * (entropy[columns] - liquid.entropy) - enthalpy[columns]
            return value

        every = np.arange(where.size)
        at_low, at_high = gap(low, every), gap(high, every)
        little = rounding("specific_enthalpy", self._equation, high, enthalpy)
        # ends that miss the value sought by rounding alone
        missed = (at_low > 0) == (at_high > 0)
        at_low = np.where(missed & (np.abs(at_low) <= little), 0.0, at_low)
        at_high = np.where(missed & (np.abs(at_high) <= little), 0.0, at_high)
        t = bracketed_root(gap, low, high, at_low, at_high)
        good = np.flatnonzero(~np.isnan(t))
        where, t, s = where[good], t[good], entropy[good]
        saturated = self._curves.at_temperature(t)
        rho_l, rho_v = saturated.liquid_density, saturated.vapour_density
        of_liquid = self._equation.properties(t, rho_l).entropy
        of_vapour = self._equation.properties(t, rho_v).entropy
        x = np.clip((s - of_liquid) / (of_vapour - of_liquid), 0.0, 1.0)
        density = np.where(x == 0, rho_l, np.where(x == 1, rho_v, 1 / (1 / rho_l + x * (1 / rho_v - 1 / rho_l))))
        result.add(where, t, saturated.bubble_pressure, density, x, rho_l, rho_v)

    def _single_phase(
        self,
        result: Candidates,
        where: IntArray,
        enthalpy: FloatArray,
        entropy: FloatArray,
        anchor_temperature: FloatArray,
        anchor_density: FloatArray,
    ) -> None:
        """Add the states outside the dome, from anchors T [K], ρ [kg/m3] on the isentropes (NaN if there are none)."""
        anchor_temperature, anchor_density = self._anchors(entropy, anchor_temperature, anchor_density)
        t, rho = self._start(enthalpy, entropy, anchor_temperature, anchor_density, _STEPS)
        t, rho, good = self._newton(enthalpy, entropy, t, rho)
        left = np.flatnonzero(~good & ~np.isnan(anchor_temperature))
        if left.size:
            h, s = enthalpy[left], entropy[left]
            start = self._start(h, s, anchor_temperature[left], anchor_density[left], _SHORTER_STEPS)
            t[left], rho[left], good[left] = self._newton(h, s, *start)
        at = np.flatnonzero(good)
        t, rho = t[at], rho[at]
        pressure = self._equation.properties(t, rho).pressure
        below = np.flatnonzero(t < self._curves.top_temperature)
        if below.size:
            saturated = self._curves.at_temperature(t[below])
            fluid = rho[below] >= saturated.liquid_density * (1 - 1e-9)
            pressure[below] = np.where(fluid, np.maximum(pressure[below], saturated.bubble_pressure), pressure[below])
        result.add(where[at], t, pressure, rho)

    @cached_property
    def _thin_gas(self) -> tuple[FloatArray, FloatArray, FloatArray]:
        """T [K], h [J/kg] and s + R ln(ρ/(kg/m³)) [J/(kg*K)] of the gas without interaction."""
        t = np.geomspace(self._lowest, self._highest, 200)
        rho = np.full_like(t, self._lowest_pressure / (self._equation.gas_constant * self._highest))
        found = self._equation.properties(t, rho)
        return t, found.enthalpy, found.entropy + self._equation.gas_constant * np.log(rho)

    def _anchors(
        self, entropy: FloatArray, temperature: FloatArray, density: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        """Anchors T [K], ρ [kg/m3] with those of isentropes that cross no line put in: on the isotherm of the highest
        temperature of saturation, or of the lowest temperature for the densest liquids. Those of a gas thinner than is
        looked for there stay NaN.
        """
        temperature, density = temperature.copy(), density.copy()
        lines = self._lines
        free = np.isnan(temperature)
        cold = free & (entropy < lines.liquid_entropy.at_lowest)
        for where, t in ((cold, self._lowest), (free & ~cold, self._curves.top_temperature)):
            at = np.flatnonzero(where)
            if not at.size:
                continue
            edge = self._curves.at_temperature(np.array([t])).liquid_density[0]
            thin = self._lowest_pressure / (self._equation.gas_constant * t)
            low, high = (edge, self._maximum_density) if t == self._lowest else (thin, edge)

            def gap(log_density: FloatArray, columns: IntArray, at: IntArray = at, t: float = t) -> FloatArray:
                found = self._equation.properties(np.full(log_density.size, t), np.exp(log_density))
                value: FloatArray = found.entropy - entropy[at[columns]]
                return value

            ends = [np.full(at.size, np.log(end)) for end in (low, high)]
            root = bracketed_root(gap, *ends, *(gap(end, np.arange(at.size)) for end in ends))
            temperature[at], density[at] = np.where(np.isnan(root), np.nan, t), np.exp(root)
        return temperature, density

    def _start(
        self, enthalpy: FloatArray, entropy: FloatArray, temperature: FloatArray, density: FloatArray, steps: int
    ) -> tuple[FloatArray, FloatArray]:
        """Where to start Newton's method, T [K], ρ [kg/m3]: some steps along the isentrope from its anchor, or a thin
        gas.
        """
        t, rho = temperature.copy(), density.copy()
        free = np.flatnonzero(np.isnan(t))
        if free.size:
            temperatures, enthalpies, entropies = self._thin_gas
            t[free] = np.interp(enthalpy[free], enthalpies, temperatures)
            exponent = (np.interp(t[free], temperatures, entropies) - entropy[free]) / self._equation.gas_constant
            rho[free] = np.minimum(np.exp(np.minimum(exponent, 50.0)), 0.9 * self._maximum_density)
        anchored = np.flatnonzero(~np.isnan(temperature))
        if anchored.size:
            now, dense = np.log(t[anchored]), np.log(rho[anchored])
            step = (enthalpy[anchored] - self._equation.properties(t[anchored], rho[anchored]).enthalpy) / steps
            for _ in range(steps):
                first = self._direction(now, dense)
                middle = self._direction(now + 0.5 * step * first[0], dense + 0.5 * step * first[1])
                now = now + np.clip(step * middle[0], -_LONGEST, _LONGEST)
                dense = dense + np.clip(step * middle[1], -_LONGEST, _LONGEST)
            lost = np.isnan(now) | np.isnan(dense)
            t[anchored] = np.where(lost, t[anchored], np.exp(now))
            rho[anchored] = np.where(lost, rho[anchored], np.exp(dense))
        t = np.minimum(np.maximum(t, 0.9 * self._lowest), 1.1 * self._highest)
        return t, np.minimum(rho, self._maximum_density)

    def _direction(self, log_temperature: FloatArray, log_density: FloatArray) -> tuple[FloatArray, FloatArray]:
        """d ln T/dh and d ln ρ/dh along the isentrope [kg/J]."""
        t, rho = np.exp(log_temperature), np.exp(log_density)
        found = self._equation.properties(t, rho)
        push = found.pressure_temperature / (rho * found.isochoric_heat_capacity)
        squared_speed = np.maximum(
            found.pressure_density + t * push * found.pressure_temperature / rho, 1e-3 * self._equation.gas_constant * t
        )
        return push / squared_speed, 1 / squared_speed

    def _newton(
        self, enthalpy: FloatArray, entropy: FloatArray, temperature: FloatArray, density: FloatArray
    ) -> tuple[FloatArray, FloatArray, BoolArray]:
        """T [K] and ρ [kg/m3] with h and s, and whether they are a stable single phase."""
        t, rho = temperature.copy(), density.copy()
        good = np.zeros(t.size, dtype=np.bool_)
        active = np.flatnonzero(np.isfinite(t) & np.isfinite(rho))
        for _ in range(_NEWTON_ITERATIONS):
            if not active.size:
                break
            now, dense = t[active], rho[active]
            found = self._equation.properties(now, dense)
            thermal, cv = found.pressure_temperature / dense, found.isochoric_heat_capacity
            gap, s_gap = enthalpy[active] - found.enthalpy, entropy[active] - found.entropy
            # with y = ln T, z = ln ρ: s_y = c_v, s_z = −p_T/ρ; h − T s: h_y − T s_y = T p_T/ρ, h_z − T s_z = p_ρ
            squared_speed = found.pressure_density + now * thermal * thermal / cv
            # dh − T ds = v dp, and along ds: the density step by w², the temperature step by s
            z = (gap - now * s_gap - now * thermal * s_gap / cv) / squared_speed
            y = (s_gap + thermal * z) / cv
            usable = np.isfinite(y) & np.isfinite(z) & (cv > 0)
            size = np.maximum(np.abs(y), np.abs(z))
            shorter = np.minimum(1.0, _LONGEST / size)
            t[active] = np.where(usable, now * np.exp(y * shorter), now)
            rho[active] = np.where(usable, np.minimum(dense * np.exp(z * shorter), self._maximum_density), dense)
            done = usable & (size <= _SETTLED) & (squared_speed > 0)
            good[active[done]] = True
            inside = (t[active] > 0.8 * self._lowest) & (t[active] < 1.2 * self._highest)
            active = active[~done & usable & inside]
        return t, rho, good & self._outside(t, rho)

    def _outside(self, temperature: FloatArray, density: FloatArray) -> BoolArray:
        """Whether a state is not between the saturated densities at its temperature, rounding aside."""
        result = np.ones(temperature.size, dtype=np.bool_)
        below = temperature < self._curves.top_temperature
        if below.any():
            saturated = self._curves.at_temperature(temperature[below])
            rho = density[below]
            result[below] = (rho >= saturated.liquid_density * (1 - 1e-9)) | (
                rho <= saturated.vapour_density * (1 + 1e-9)
            )
        return result

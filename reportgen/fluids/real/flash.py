"""States from pressure and enthalpy or entropy: two-dimensional Newton's method, with a bracketed search behind it."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.density import DensitySolver
from reportgen.fluids.real.helmholtz import Helmholtz, Properties
from reportgen.fluids.real.melting import MeltingLine
from reportgen.fluids.real.saturation import Saturated, SaturationCurves

__all__ = ["Caloric", "PressureFlash"]

FloatArray = NDArray[Any]
BoolArray = NDArray[np.bool_]

_NEWTON_ITERATIONS = 14
_SEARCH_ITERATIONS = 120
#: Relative step after which Newton's method has converged: it doubles the digits with each step.
_SETTLED = 1e-7
#: Temperature [critical ones] of the second start of a search at high pressure.
_COLD_START = 0.6
#: What may be left of the target, in parts of R T or R, where a bracket has closed: a bracket without a root in it
#: closes too. The rest covers the rounding of densities next to the critical point.
_LEFT_OVER = 1e-7
#: Closer to a saturated state than this, in parts of R T or R, a state is the saturated one.
_ROUNDING = 1e-12


class Caloric(NamedTuple):
    """Result of a flash, arrays of shape (N,): temperature [K], density [kg/m3], quality [1] (NaN in single phase),
    densities of the phases [kg/m3], and whether a state was found.

    ``between`` marks elements between the bubble and the dew line of a pseudo-pure fluid, ``cold`` those that would
    lie below the lowest temperature, ``hot`` those above the highest.
    """

    temperature: FloatArray
    density: FloatArray
    quality: FloatArray
    liquid_density: FloatArray
    vapour_density: FloatArray
    found: BoolArray
    between: BoolArray
    cold: BoolArray
    hot: BoolArray


class PressureFlash:
    """Finds the state at given pressure and enthalpy, or pressure and entropy.

    At constant pressure both rise with temperature (slopes c_p and c_p/T), so the state is unique.

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
        self._equation = equation
        self._curves = curves
        self._solver = solver
        self._lowest, self._highest = lowest, highest
        self._triple_pressure = triple_pressure
        self._line = melting_line

    def solve(self, pressure: FloatArray, target: FloatArray, *, entropy: bool) -> Caloric:
        """State at p [Pa] and h [J/kg], or s [J/(kg*K)] if ``entropy``; shape (N,), finite."""
        size = pressure.size
        nan = np.full(size, np.nan)
        result = Caloric(
            np.empty(size),
            np.empty(size),
            nan.copy(),
            nan.copy(),
            nan,
            np.zeros(size, dtype=np.bool_),
            np.zeros(size, dtype=np.bool_),
            np.zeros(size, dtype=np.bool_),
            np.zeros(size, dtype=np.bool_),
        )
        low = np.full(size, self._lowest * (1 - 1e-9))
        high = np.full(size, self._highest * (1 + 1e-9))
        liquid = np.zeros(size, dtype=np.bool_)
        saturable = (pressure < self._curves.top_pressure) & (pressure >= self._triple_pressure)
        if saturable.any():
            where = slice(None) if saturable.all() else np.flatnonzero(saturable)
            self._saturable(pressure, target, where, entropy, result, low, high, liquid)
        rest = ~saturable
        if rest.any():
            p = pressure[rest]
            dense = p >= self._curves.top_pressure
            top = self._curves.top_temperature
            result.temperature[rest] = np.where(
                dense, np.minimum(top * (p / self._curves.top_pressure) ** 0.13, self._highest), self._lowest
            )
            liquid[rest] = dense
            result.density[rest] = self._solver.guess(result.temperature[rest], p, dense)
        todo = np.flatnonzero(~result.found & ~result.between)
        if todo.size:
            self._single_phase(pressure, target, entropy, result, todo, low, high, liquid)
        return result

    def _saturable(
        self,
        pressure: FloatArray,
        target: FloatArray,
        where: Any,
        entropy: bool,
        result: Caloric,
        low: FloatArray,
        high: FloatArray,
        liquid: BoolArray,
    ) -> None:
        """Settle two-phase elements; give the others a start and bounds from the nearer saturated state."""
        saturated: Saturated = self._curves.at_pressure(pressure[where])
        n = saturated.liquid_density.size
        t_l, t_v = saturated.bubble_temperature, saturated.dew_temperature
        rho_l, rho_v = saturated.liquid_density, saturated.vapour_density
        t_both, rho_both = np.concatenate([t_l, t_v]), np.concatenate([rho_l, rho_v])
        found = self._equation.properties(t_both, rho_both)
        value = found.entropy if entropy else found.enthalpy
        heat_capacity = self._heat_capacity(t_both, rho_both, found)
        wanted = target[where]
        from_liquid, from_vapour = wanted - value[:n], wanted - value[n:]
        # a saturated state given back differs from the one computed here by rounding
        r = self._equation.gas_constant
        scale_l, scale_v = (np.full(n, r), np.full(n, r)) if entropy else (r * t_l, r * t_v)
        at_bubble, at_dew = np.abs(from_liquid) <= _ROUNDING * scale_l, np.abs(from_vapour) <= _ROUNDING * scale_v
        mixed = (from_liquid >= 0) & (from_vapour <= 0) | at_bubble | at_dew
        cold_side = (from_liquid < 0) & ~mixed
        if mixed.any():
            span = value[n:] - value[:n]
            # next to the critical point the phases can be equal to the last digit
            x = np.where(span > 0, from_liquid / np.where(span > 0, span, 1), 0.0)
            x = np.where(at_bubble, 0.0, np.where(at_dew, 1.0, x))
            if self._curves.pseudo_pure:
                result.between[where] = mixed & (x > 0) & (x < 1)
            result.quality[where] = np.where(mixed, x, np.nan)
            result.liquid_density[where], result.vapour_density[where] = rho_l, rho_v
            result.found[where] = mixed & ~result.between[where]
        t0 = np.where(cold_side, t_l, t_v)
        rho0 = np.where(cold_side, rho_l, rho_v)
        gap = np.where(cold_side, from_liquid, from_vapour)
        cp = np.where(cold_side, heat_capacity[:n], heat_capacity[n:])
        start = t0 * np.exp(gap / cp) if entropy else t0 + gap / cp
        start = np.minimum(np.maximum(start, self._lowest), self._highest)
        low[where] = np.where(cold_side, low[where], t0 * (1 - 1e-12))
        high[where] = np.where(cold_side, t0 * (1 + 1e-12), high[where])
        liquid[where] = cold_side
        x = result.quality[where]
        with np.errstate(invalid="ignore"):
            overall = np.where(x == 1, rho_v, 1 / (1 / rho_l + x * (1 / rho_v - 1 / rho_l)))
        # density to start from: a gas keeps its compressibility, a liquid is as if saturated
        guess = rho0 * t0 / start
        if cold_side.any():
            guess[cold_side] = self._curves.at_temperature(start[cold_side]).liquid_density
        result.temperature[where] = np.where(
            mixed, t0 if not self._curves.pseudo_pure else np.where(x == 0, t_l, t_v), start
        )
        result.density[where] = np.where(mixed, overall, guess)

    @staticmethod
    def _heat_capacity(temperature: FloatArray, density: FloatArray, found: Properties) -> FloatArray:
        """c_p = c_v + T (∂p/∂T)²/(ρ² ∂p/∂ρ) [J/(kg*K)]."""
        squared = (found.pressure_temperature / density) ** 2
        result: FloatArray = found.isochoric_heat_capacity + temperature * squared / found.pressure_density
        return result

    def _single_phase(
        self,
        pressure: FloatArray,
        target: FloatArray,
        entropy: bool,
        result: Caloric,
        todo: NDArray[np.intp],
        low: FloatArray,
        high: FloatArray,
        liquid: BoolArray,
    ) -> None:
        """Newton's method in T and ρ together; elements that do not settle go to the bracketed search."""
        self._newton(pressure, target, entropy, result, todo, low, high, liquid)
        remaining = np.flatnonzero(~result.found & ~result.between)
        cold = remaining[pressure[remaining] >= self._curves.top_pressure]
        if cold.size:
            # far below the critical temperature: from a saturated liquid
            start = np.full(cold.size, max(_COLD_START * self._curves.top_temperature, self._lowest))
            result.temperature[cold] = start
            result.density[cold] = self._curves.at_temperature(start).liquid_density
            self._newton(pressure, target, entropy, result, cold, low, high, liquid)
            remaining = np.flatnonzero(~result.found & ~result.between)
        if remaining.size:
            self._search(pressure, target, entropy, result, remaining, low, high, liquid)

    def _newton(
        self,
        pressure: FloatArray,
        target: FloatArray,
        entropy: bool,
        result: Caloric,
        todo: NDArray[np.intp],
        low: FloatArray,
        high: FloatArray,
        liquid: BoolArray,
    ) -> None:
        """Newton's method in T and ρ together, from the temperatures and densities in the result."""
        equation = self._equation
        t, rho = result.temperature[todo], result.density[todo]
        p, wanted = pressure[todo], target[todo]
        lo, hi = low[todo], high[todo]
        for _ in range(_NEWTON_ITERATIONS):
            found = equation.properties(t, rho)
            p_gap = p - found.pressure
            p_rho, p_t = found.pressure_density, found.pressure_temperature
            # s_T = c_v/T, s_ρ = −p_T/ρ²; h_T = c_v + p_T/ρ, h_ρ = T s_ρ + p_ρ/ρ
            if entropy:
                gap = wanted - found.entropy
                y_t, y_rho = found.isochoric_heat_capacity / t, -p_t / rho**2
            else:
                gap = wanted - found.enthalpy
                y_t, y_rho = found.isochoric_heat_capacity + p_t / rho, (p_rho - t * p_t / rho) / rho
            with np.errstate(invalid="ignore", divide="ignore", over="ignore"):
                # regular at the critical point too, where p_ρ = 0
                determinant = p_t * y_rho - p_rho * y_t
                step_t = (y_rho * p_gap - p_rho * gap) / determinant
                ratio = (p_t * gap - y_t * p_gap) / (determinant * rho)
                limited = np.minimum(np.maximum(step_t, -0.4 * t), 0.8 * t)
                trial_t = np.minimum(np.maximum(t + limited, lo), hi)
                cut = np.abs(trial_t - t - step_t) > 1e-12 * t
                if cut.any():
                    # a shortened step in T: the density that goes with it at this pressure
                    ratio = np.where(cut & (p_rho > 0), (p_gap - p_t * (trial_t - t)) / (p_rho * rho), ratio)
                good = (determinant < 0) & np.isfinite(ratio) & np.isfinite(trial_t)
                done = good & ~cut & (np.abs(step_t) <= _SETTLED * t) & (np.abs(ratio) <= _SETTLED)
                ratio = np.where(ratio > 0, ratio / (1 + 0.5 * ratio), np.maximum(ratio, -0.6))
            t = np.where(good, trial_t, t)
            rho = np.where(good, rho * (1 + ratio), rho)
            if done.any() or not good.all():
                finished = todo[done]
                result.temperature[finished], result.density[finished] = t[done], rho[done]
                result.found[finished] = self._on_branch(t[done], rho[done], p[done], liquid[finished])
                keep = ~done & good
                if not keep.any():
                    break
                todo, t, rho, p, wanted, lo, hi = (a[keep] for a in (todo, t, rho, p, wanted, lo, hi))

    def _on_branch(
        self, temperature: FloatArray, density: FloatArray, pressure: FloatArray, liquid: BoolArray
    ) -> BoolArray:
        """Whether a root lies on the stable side of the saturation line, and inside the temperatures allowed."""
        good = (temperature > self._lowest * (1 - 1e-9)) & (temperature < self._highest * (1 + 1e-9))
        good &= density < self._solver.maximum_density
        below = temperature < self._curves.top_temperature
        if below.any():
            saturated = self._curves.at_temperature(temperature[below])
            fluid = liquid[below]
            good[below] &= np.where(
                fluid,
                density[below] >= saturated.liquid_density * (1 - 1e-9),
                density[below] <= saturated.vapour_density * (1 + 1e-9),
            )
        return good

    def _search(
        self,
        pressure: FloatArray,
        target: FloatArray,
        entropy: bool,
        result: Caloric,
        todo: NDArray[np.intp],
        low: FloatArray,
        high: FloatArray,
        liquid: BoolArray,
    ) -> None:
        """Bracketed Newton's method in T with the density solved at each step."""
        p, wanted, side = pressure[todo], target[todo], liquid[todo]
        lo, hi = low[todo].copy(), high[todo].copy()
        if self._line is not None:
            # deep in the solid the equation may have no density at this pressure
            lo = np.where(side, np.maximum(lo, self._line.temperature(p) * (1 - 1e-9)), lo)
        coldest = lo
        # the lower end is that of the fluid, not a state on the saturation line
        own_end = side | (lo <= self._lowest)

        def evaluate(t: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray, BoolArray]:
            rho, ok = self._solver.solve(t, p, side)
            found = self._equation.properties(t, rho)
            cp = self._heat_capacity(t, rho, found)
            return rho, wanted - (found.entropy if entropy else found.enthalpy), (cp / t if entropy else cp), ok

        scale = self._equation.gas_constant * (1.0 if entropy else self._curves.top_temperature)
        rho, gap, _, ok = evaluate(lo)
        rounding = 1e-13 * scale
        result.cold[todo] = own_end & ok & (gap < -1e-9 * scale)
        rho, gap, _, ok = evaluate(hi)
        result.hot[todo] = ok & (gap > 1e-9 * scale)
        t = np.minimum(np.maximum(result.temperature[todo], lo), hi)
        t = np.where(np.isfinite(t), t, 0.5 * (lo + hi))
        width = hi - lo
        # Outside the limits there is nothing to find: the bracket only closes on its end.
        outside = result.cold[todo] | result.hot[todo]
        settled = np.zeros(todo.size, dtype=np.bool_)
        for iteration in range(_SEARCH_ITERATIONS):
            rho, gap, slope, ok = evaluate(t)
            step = gap / slope
            closed = hi - lo <= 1e-15 * t
            settled = ok & ((np.abs(step) <= 1e-13 * t) | (np.abs(gap) <= rounding))
            settled |= ok & closed & (np.abs(gap) <= _LEFT_OVER * scale)
            if (settled | closed | outside).all():
                break
            lo, hi = np.where(gap > 0, t, lo), np.where(gap > 0, hi, t)
            trial = t + step
            bad = ~((trial > lo) & (trial < hi))
            if iteration % 2:
                bad |= hi - lo > 0.5 * width
                width = hi - lo
            t = np.where(settled, t, np.where(bad, 0.5 * (lo + hi), trial))
        result.temperature[todo], result.density[todo] = t, rho
        result.cold[todo] |= own_end & ~settled & ~result.hot[todo] & (t <= coldest * (1 + 1e-6))
        result.found[todo] = settled & ~result.cold[todo] & ~result.hot[todo]
        if self._curves.pseudo_pure:
            # Below the highest temperature of the envelope, the bubble line rises a little above the pressure there;
            # and what is on a line by its temperature may not be by its pressure, to a part in 1e9.
            saturated = self._curves.at_temperature(np.minimum(t, self._curves.top_temperature))
            inside = (p > saturated.dew_pressure * (1 - 1e-7)) & (p < saturated.bubble_pressure * (1 + 1e-7))
            inside &= t < self._curves.top_temperature
            result.between[todo] = inside & ~result.found[todo] & ~result.cold[todo] & ~result.hot[todo]

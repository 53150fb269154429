"""States from two properties, one at a time, where nothing is out of the ordinary.

Every function returns None where a limit, the saturation line, the critical region or a search that does not settle
asks for more care than is taken here: such states are the business of the vectorised branch, and so are all faults.
"""

from __future__ import annotations

from collections.abc import Callable
from math import exp, inf, nan, sqrt
from typing import Any

from reportgen.fluids.model import Limits
from reportgen.fluids.real.melting import MeltingLine
from reportgen.fluids.real.scalar.curves import ScalarCurves
from reportgen.fluids.real.scalar.density import LEAST_SLOPE, ScalarDensity
from reportgen.fluids.real.scalar.equation import ScalarEquation
from reportgen.fluids.real.scalar.melting import LeastMelting
from reportgen.fluids.real.solution import CALORIC

__all__ = ["Answer", "ScalarPairs", "Single"]

#: Fields of a state that are known, and the densities of liquid and vapour [kg/m3] where they coexist.
Single = tuple[dict[str, Any], tuple[float, float] | None]
Answer = Single | None

_NEWTON_STEPS = 12
#: Relative steps at which Newton's method has settled: what is left after that step is beyond the last digit.
_SETTLED = 2e-8
#: Temperature [critical ones] of the second start of a search at high pressure.
_COLD_START = 0.6
#: Distance from the top of the saturation line (relative, in T) that is kept.
_TOP_MARGIN = 1e-3
#: Distance from saturation (relative, in p, ρ or the quality) that is kept.
_BAND = 1e-8
#: Pressures [Pa] and densities [kg/m3] below are left to the other branch.
_LOWEST_PRESSURE, _LOWEST_DENSITY = 1e-9, 1e-15


class ScalarPairs:
    """Solves single states of one fluid.

    Parameters
    ----------
    equation, curves, density : its equation, saturation curves and density solver.
    limits : its range.
    triple_pressure : lowest pressure with a liquid [Pa].
    melting_line : the melting line, or None.
    """

    def __init__(
        self,
        equation: ScalarEquation,
        curves: ScalarCurves,
        density: ScalarDensity,
        limits: Limits,
        triple_pressure: float,
        melting_line: MeltingLine | None,
    ) -> None:
        self.equation, self.curves, self._density = equation, curves, density
        self._lowest, self._highest = limits.minimum_temperature, limits.maximum_temperature
        self._highest_pressure, self._triple_pressure = limits.maximum_pressure, triple_pressure
        self._top, self._top_pressure = curves.top_temperature, curves.top_pressure
        self._saturated_top = self._top * (1.0 - _TOP_MARGIN)
        self._saturated_top_pressure = curves.pressures(self._saturated_top)[1]
        self._melting = None if melting_line is None else LeastMelting(melting_line)
        self.solvers: dict[tuple[str, str], Callable[[float, float], Answer]] = {
            ("pressure", "temperature"): self.pressure_temperature,
            ("pressure", "specific_enthalpy"): self.pressure_enthalpy,
            ("pressure", "specific_entropy"): self.pressure_entropy,
            ("pressure", "quality"): self.pressure_quality,
            ("temperature", "quality"): self.temperature_quality,
            ("temperature", "density"): self.temperature_density,
            ("pressure", "superheat"): self.pressure_superheat,
            ("pressure", "subcooling"): self.pressure_subcooling,
        }

    def _fluid(self, pressure: float, temperature: float) -> bool:
        """Whether p [Pa], T [K] lie within the limits and certainly not under the melting line."""
        return (
            _LOWEST_PRESSURE < pressure <= self._highest_pressure
            and self._lowest <= temperature <= self._highest
            and (self._melting is None or pressure < self._melting(temperature))
        )

    def _phase(self, pressure: float, temperature: float, liquid: bool) -> str:
        if temperature > self._top:
            return "supercritical" if pressure > self._top_pressure else "vapour"
        return "liquid" if liquid or pressure > self._top_pressure else "vapour"

    def _state(self, pressure: float, temperature: float, density: float, liquid: bool) -> dict[str, Any]:
        return {
            "temperature": temperature,
            "pressure": pressure,
            "density": density,
            "quality": nan,
            "phase": self._phase(pressure, temperature, liquid),
        }

    def pressure_temperature(self, pressure: float, temperature: float) -> Answer:
        """The state at p [Pa] and T [K]."""
        if not self._fluid(pressure, temperature):
            return None
        liquid = False
        if temperature < self._top:
            bubble, dew = self.curves.pressures(temperature)
            liquid = pressure > bubble * (1.0 + _BAND)
            if not liquid and pressure > dew * (1.0 - _BAND):
                return None
        density = self._density.on_branch(temperature, pressure, liquid)
        return (self._state(pressure, temperature, density, liquid), None) if density else None

    # -- saturation ----------------------------------------------------------------------------------------------------

    def _saturated(self, pressure: float, temperature: float, quality: float, liquid: float, vapour: float) -> Single:
        if quality == 0.0:
            density, phase = liquid, "liquid"
        elif quality == 1.0:
            density, phase = vapour, "vapour"
        else:
            density, phase = 1.0 / (1.0 / liquid + quality * (1.0 / vapour - 1.0 / liquid)), "two-phase"
        values: dict[str, Any] = {
            "temperature": temperature,
            "pressure": pressure,
            "density": density,
            "quality": quality,
            "phase": phase,
        }
        return values, (liquid, vapour)

    def _qualified(self, quality: float) -> bool:
        return 0.0 <= quality <= 1.0 and not (self.curves.pseudo_pure and 0.0 < quality < 1.0)

    def pressure_quality(self, pressure: float, quality: float) -> Answer:
        """The saturated or two-phase state at p [Pa] and quality [1]."""
        if not (self._triple_pressure <= pressure <= self._saturated_top_pressure and self._qualified(quality)):
            return None
        bubble, dew, liquid, vapour = self.curves.at_pressure(pressure)
        return self._saturated(pressure, dew if quality else bubble, quality, liquid, vapour)

    def temperature_quality(self, temperature: float, quality: float) -> Answer:
        """The saturated or two-phase state at T [K] and quality [1]."""
        if not (self._lowest <= temperature <= self._saturated_top and self._qualified(quality)):
            return None
        bubble, dew, liquid, vapour = self.curves.at_temperature(temperature)
        return self._saturated(dew if quality else bubble, temperature, quality, liquid, vapour)

    def saturation(self, temperature: float | None, pressure: float | None) -> tuple[Single, Single] | None:
        """Saturated liquid and vapour at T [K] or, where that is None, at p [Pa]."""
        if temperature is not None:
            if not self._lowest <= temperature <= self._saturated_top:
                return None
            p_l, p_v, rho_l, rho_v = self.curves.at_temperature(temperature)
            t_l = t_v = temperature
        else:
            assert pressure is not None
            if not self._triple_pressure <= pressure <= self._saturated_top_pressure:
                return None
            t_l, t_v, rho_l, rho_v = self.curves.at_pressure(pressure)
            p_l = p_v = pressure
        return self._saturated(p_l, t_l, 0.0, rho_l, rho_v), self._saturated(p_v, t_v, 1.0, rho_l, rho_v)

    # -- distance from saturation --------------------------------------------------------------------------------------

    def pressure_superheat(self, pressure: float, superheat: float) -> Answer:
        """The vapour at p [Pa] a superheat [K] above its dew temperature."""
        return self._beside(pressure, superheat, 1.0)

    def pressure_subcooling(self, pressure: float, subcooling: float) -> Answer:
        """The liquid at p [Pa] a subcooling [K] below its bubble temperature."""
        return self._beside(pressure, subcooling, -1.0)

    def _beside(self, pressure: float, distance: float, sign: float) -> Answer:
        if not self._triple_pressure <= pressure <= self._saturated_top_pressure:
            return None
        base = self.curves.temperatures(pressure)[1 if sign > 0.0 else 0]
        temperature = base + sign * distance
        if not (distance > _BAND * base and self._fluid(pressure, temperature)):
            return None
        liquid = sign < 0.0
        density = self._density.on_branch(temperature, pressure, liquid)
        if not density:
            return None
        values = self._state(pressure, temperature, density, liquid)
        values["subcooling" if liquid else "superheat"] = distance
        return values, None

    # -- temperature and density ---------------------------------------------------------------------------------------

    def temperature_density(self, temperature: float, density: float) -> Answer:
        """The state at T [K] and ρ [kg/m3]."""
        if not (
            self._lowest <= temperature <= self._highest and _LOWEST_DENSITY < density < self._density.maximum_density
        ):
            return None
        liquid = False
        if temperature < self._top:
            if temperature > self._saturated_top:
                return None
            pressure, _, rho_l, rho_v = self.curves.at_temperature(temperature)
            if rho_v * (1.0 - _BAND) < density < rho_l * (1.0 + _BAND):
                if self.curves.pseudo_pure or not rho_v * (1.0 + _BAND) < density < rho_l * (1.0 - _BAND):
                    return None
                quality = (1.0 / density - 1.0 / rho_l) / (1.0 / rho_v - 1.0 / rho_l)
                values, phases = self._saturated(pressure, temperature, quality, rho_l, rho_v)
                values["density"] = density
                return values, phases
            liquid = density > rho_l
        found = self.equation.properties(temperature, density)
        pressure = found[0]
        if found[4] < LEAST_SLOPE * self.equation.gas_constant * temperature or not self._fluid(pressure, temperature):
            return None
        values = self._state(pressure, temperature, density, liquid)
        values.update(_caloric_fields(pressure, temperature, density, found))
        return values, None

    # -- pressure and enthalpy or entropy ------------------------------------------------------------------------------

    def pressure_enthalpy(self, pressure: float, enthalpy: float) -> Answer:
        """The state at p [Pa] and h [J/kg]."""
        return self._caloric(pressure, enthalpy, entropy=False)

    def pressure_entropy(self, pressure: float, entropy: float) -> Answer:
        """The state at p [Pa] and s [J/(kg*K)]."""
        return self._caloric(pressure, entropy, entropy=True)

    def _caloric(self, pressure: float, target: float, *, entropy: bool) -> Answer:
        """Tsat(p) first; beyond either saturated state, or without one, Newton's method in T and ρ together."""
        if not (_LOWEST_PRESSURE < pressure <= self._highest_pressure and -inf < target < inf):
            return None
        equation, curves = self.equation, self.curves
        name = "specific_entropy" if entropy else "specific_enthalpy"
        low, high, liquid = self._lowest, self._highest, False
        if self._triple_pressure <= pressure <= self._saturated_top_pressure:
            bubble, dew, rho_l, rho_v = curves.at_pressure(pressure)
            band = _BAND * equation.gas_constant * (1.0 if entropy else bubble)
            found = equation.properties(bubble, rho_l)
            value = found[2 if entropy else 1]
            liquid = target < value - band
            base, density = bubble, rho_l
            if liquid:
                high = base
            else:
                lower = value
                found = equation.properties(dew, rho_v)
                value = found[2 if entropy else 1]
                if target < value + band:
                    if curves.pseudo_pure or not lower + band < target < value - band:
                        return None
                    answer = self._saturated(pressure, dew, (target - lower) / (value - lower), rho_l, rho_v)
                    answer[0][name] = target
                    return answer
                base, density = dew, rho_v
                low = base
            _, _, _, c_v, p_rho, p_t = found
            step = (target - value) / (c_v + base * (p_t / density) ** 2 / p_rho)
            temperature = base * exp(step) if entropy else base + step
            temperature = min(max(temperature, self._lowest), self._highest)
            if liquid:
                density = curves.liquid_density(temperature)
            else:
                density *= base / temperature
        elif pressure > self._top_pressure:
            liquid = True
            temperature = min(self._top * (pressure / self._top_pressure) ** 0.13, self._highest)
            density = self._density.cubic_start(temperature, pressure)
        elif pressure < self._triple_pressure:
            temperature = self._lowest
            density = pressure / (equation.gas_constant * temperature)
        else:
            return None
        solved = self._newton(pressure, target, entropy, temperature, density, low, high)
        if solved is None and pressure > self._top_pressure:
            # far below the critical temperature: from a saturated liquid
            temperature = max(_COLD_START * self._top, self._lowest)
            density = curves.liquid_density(temperature)
            solved = self._newton(pressure, target, entropy, temperature, density, low, high)
        if solved is None:
            return None
        temperature, density = solved
        if not (self._fluid(pressure, temperature) and density < self._density.maximum_density):
            return None
        if temperature < self._top:
            if liquid:
                if density < curves.liquid_density(temperature):
                    return None
            elif density > curves.vapour_density(temperature):
                return None
        values = self._state(pressure, temperature, density, liquid)
        values[name] = target
        return values, None

    def _newton(
        self, pressure: float, target: float, entropy: bool, t: float, rho: float, low: float, high: float
    ) -> tuple[float, float] | None:
        """T [K] and ρ [kg/m3] of a single phase from a start, T between ``low`` and ``high``; as in ../flash.py."""
        equation = self.equation
        least = LEAST_SLOPE * equation.gas_constant
        for _ in range(_NEWTON_STEPS):
            p, h, s, c_v, p_rho, p_t = equation.properties(t, rho)
            p_gap = pressure - p
            # s_T = c_v/T, s_ρ = −p_T/ρ²; h_T = c_v + p_T/ρ, h_ρ = T s_ρ + p_ρ/ρ
            if entropy:
                gap = target - s
                y_t, y_rho = c_v / t, -p_t / (rho * rho)
            else:
                gap = target - h
                y_t, y_rho = c_v + p_t / rho, (p_rho - t * p_t / rho) / rho
            determinant = p_t * y_rho - p_rho * y_t
            if determinant >= 0.0:
                return None
            step = (y_rho * p_gap - p_rho * gap) / determinant
            ratio = (p_t * gap - y_t * p_gap) / (determinant * rho)
            trial = min(max(t + min(max(step, -0.4 * t), 0.8 * t), low), high)
            if abs(trial - t - step) > 1e-12 * t:
                # a shortened step in T: the density that goes with it at this pressure
                if p_rho <= 0.0:
                    return None
                ratio = (p_gap - p_t * (trial - t)) / (p_rho * rho)
            elif abs(step) <= _SETTLED * t and abs(ratio) <= _SETTLED:
                return (trial, rho * (1.0 + ratio)) if p_rho >= least * t else None
            t = trial
            rho *= 1.0 + (ratio / (1.0 + 0.5 * ratio) if ratio > 0.0 else max(ratio, -0.6))
        return None

    # -- fields read later ---------------------------------------------------------------------------------------------

    def fill(self, name: str, values: dict[str, Any], phases: tuple[float, float] | None) -> dict[str, float]:
        """The field ``name`` [SI] of a solved state and those that come with it, as in ../solution.py; ``phases`` holds
        the densities of liquid and vapour [kg/m3] where they coexist.
        """
        t, p, rho, x = values["temperature"], values["pressure"], values["density"], values["quality"]
        if name in CALORIC:
            if phases is None or not 0.0 < x < 1.0:
                return _caloric_fields(p, t, rho, self.equation.properties(t, rho))
            h_l, h_v, s_l, s_v = self.equation.coexisting(t, *phases)
            h = values.get("specific_enthalpy", h_l + x * (h_v - h_l))
            return dict(zip(CALORIC, (h, s_l + x * (s_v - s_l), h - p / rho, nan, nan, nan), strict=True))
        if name == "specific_volume":
            return {name: 1.0 / rho}
        if name == "compressibility_factor":
            return {name: p / (rho * self.equation.gas_constant * t)}
        superheat = subcooling = nan
        if self._triple_pressure * (1.0 - 1e-12) <= p <= self._top_pressure:
            if x == 0.0:
                subcooling = 0.0
            elif x == 1.0:
                superheat = 0.0
            elif not 0.0 < x < 1.0:
                boiling, condensing = self.curves.temperatures(p)
                superheat = t - condensing if t >= condensing else nan
                subcooling = boiling - t if t <= boiling else nan
        return {"superheat": superheat, "subcooling": subcooling}

    def fill_both(self, liquid: Single, vapour: Single) -> None:
        """Enthalpy, entropy and internal energy of saturated liquid and vapour of one temperature, in one go."""
        (first, phases), (second, _) = liquid, vapour
        assert phases is not None
        h_l, h_v, s_l, s_v = self.equation.coexisting(first["temperature"], *phases)
        for values, h, s in ((first, h_l, s_l), (second, h_v, s_v)):
            values["specific_enthalpy"], values["specific_entropy"] = h, s
            values["specific_internal_energy"] = h - values["pressure"] / values["density"]


def _caloric_fields(
    p: float, t: float, rho: float, found: tuple[float, float, float, float, float, float]
) -> dict[str, float]:
    """The fields of a single phase by p [Pa], T [K], ρ [kg/m3] and what ``ScalarEquation.properties`` gives there."""
    _, h, s, c_v, p_rho, p_t = found
    push = t * (p_t / rho) ** 2
    # at the critical point the slope is zero but for rounding, of either sign
    c_p = c_v + push / p_rho if p_rho > 0.0 else inf
    square = p_rho + push / c_v
    return {
        "specific_enthalpy": h,
        "specific_entropy": s,
        "specific_internal_energy": h - p / rho,
        "isobaric_heat_capacity": c_p,
        "isochoric_heat_capacity": c_v,
        "speed_of_sound": sqrt(square) if square >= 0.0 else nan,
    }

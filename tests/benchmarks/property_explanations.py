"""Why a state of ours and one of a compiled library differ by more than the bar: each reason is tested, not assumed.

The tests, in the order in which they are tried:

* *rounding of the pressure, of c_p*: at the library's own (T, ρ) both evaluate the same formula, and what differs is
  the last digits of a sum that nearly cancels (pressure of a liquid; (∂p/∂ρ)_T near the critical point).
* *saturation of the library*: near the triple point of heavy fluids its saturated states are not in equilibrium: by the
  library's own equation, ours have equal pressure and Gibbs energy, to 1e-9 and ten times better.
* *ideal heat capacity of the library*: it is not what its data say (R123: scaled by two unequal critical temperatures).
* *given values do not tell the two states apart*: along the straight line in (T, v) from the library's state to ours,
  the two properties given stay what they were, within rounding and within what the library's values differ by at its
  own (T, ρ). This is not the case for another root, however well it fulfils the pair.
* *next to a turning point*: of h along an isotherm, two states share a value to 1e-11 and lie within 1e-5.
* *saturated within rounding*: a saturated liquid or vapour, given by a pair, of which ours has up to 1e-7 of the other
  or is a single phase, all properties being equal.
* *splines of the library*: up to 1.2e-3 Tc below critical, coexisting phases of the library are a spline of its own.
  Ours must give the pair back from its (T, ρ), and its saturation fulfils the equation (property_identities).
* *published lines end below critical*: of a pseudo-pure fluid, whose published bubble and dew pressures are not met by
  its equation up to critical; here they are led to the equation's critical point (stated in the limits).
* *solid by the melting line*: the library's equation goes on under the melting line; here that is no state.
* *critical point*: the library names phases by another critical point than the equation's; all properties agree.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, NamedTuple

import CoolProp.CoolProp as library
import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.fluid import RealFluid
from tests.benchmarks.property_states import (
    Reference,
    end_of_lines,
    library_ideal_heat_capacity,
    library_saturation_is_worse,
)

__all__ = [
    "BARS",
    "IDEAL",
    "LINES",
    "SATURATION",
    "SOLID",
    "SPLINE_REGION",
    "Base",
    "Criticals",
    "critical_points",
    "deviations",
    "explain",
    "explain_base",
    "rounding",
    "scales",
]

Array = NDArray[Any]

#: Largest deviation allowed without an explanation.
BARS = {
    "temperature": 1e-7,
    "pressure": 1e-7,
    "density": 1e-7,
    "specific_enthalpy": 1e-7,
    "specific_entropy": 1e-7,
    "specific_internal_energy": 1e-7,
    "isobaric_heat_capacity": 1e-5,
    "speed_of_sound": 1e-5,
}
#: The library follows splines of its own where 1 − T/Tc is below this.
SPLINE_REGION = 1.2e-3
#: Relative rounding of a sum of some dozens of terms in double precision.
_ROUNDING = 4e-15
#: What of the given pair must come back from our own (T, ρ).
_GIVEN_BACK = 1e-11
SPLINES, SATURATION = "splines of the library", "saturation of the library"
LINES = "published lines end below critical"
IDEAL = "ideal heat capacity of the library"
#: Reason where the library's state lies under the melting line: there, a pair has another state or none.
SOLID = "solid by the melting line"
#: Vapour fraction that a saturated state may gain or lose by rounding.
_ON_LINE = 1e-7
#: Relative distance of the points at which the scatter of values is looked at.
_SCATTER_STEP = 2e-14
#: Relative distance in T of states between which the straight line may bend.
_NEAR = 1e-4
_STEPS = (0.25, 0.5, 0.75, 1.0)
_LONG_BATCH = 256


def scales(reference: Reference, gas_constant: float) -> dict[str, Array]:
    """What deviations are measured in: the value itself; for h, s, u, whose zeros are arbitrary, at least R·T or R."""
    rt = gas_constant * reference.temperature
    found = {name: np.abs(getattr(reference, name)) for name in BARS}
    for name in ("specific_enthalpy", "specific_internal_energy"):
        found[name] = np.maximum(found[name], rt)
    found["specific_entropy"] = np.maximum(found["specific_entropy"], gas_constant)
    return found


def deviations(reference: Reference, state: Any, gas_constant: float) -> dict[str, Array]:
    """Deviation of each property of ours, in parts of its scale; NaN where either has none."""
    measure = scales(reference, gas_constant)
    return {name: np.abs(getattr(state, name) - getattr(reference, name)) / measure[name] for name in BARS}


def rounding(fluid: RealFluid, reference: Reference) -> dict[str, Array]:
    """Uncertainty of each property from rounding [SI]: of the value, and as the equation's own values scatter.

    The scatter is the largest second difference of values at points 2e-14 apart, in T and in ρ: what a smooth function
    has none of. It shows how far the terms of the equation cancel (R22 at 150 K: ten thousand to one).
    """
    found = {name: _ROUNDING * scale for name, scale in scales(reference, fluid.gas_constant).items()}
    ladder = (1 + _SCATTER_STEP * np.arange(-3, 4))[:, None]
    flat = np.ones_like(ladder)
    for in_temperature, in_density in ((ladder, flat), (flat, ladder)):
        state = fluid.at(
            temperature=reference.temperature * in_temperature, density=reference.density * in_density, errors="mask"
        )
        for name in found:
            bend = np.abs(np.diff(np.asarray(getattr(state, name)), n=2, axis=0))
            found[name] = np.maximum(found[name], 2 * np.max(np.nan_to_num(bend), axis=0))
    found["quality"] = np.full(reference.size, 1e-12)
    found["superheat"] = found["subcooling"] = _ROUNDING * reference.temperature
    return found


class Criticals(NamedTuple):
    """Critical temperature [K] and pressure [Pa], of the library and of the equation: the lower and the higher one."""

    temperature: tuple[float, float]
    pressure: tuple[float, float]


def critical_points(fluid: RealFluid, state: Any) -> Criticals:
    """Both critical points; ``state`` is the library's state object."""
    critical = fluid.limits.critical_point
    assert critical is not None
    temperatures = sorted((critical.temperature, float(state.T_critical())))
    pressures = sorted((critical.pressure, float(state.p_critical())))
    return Criticals((temperatures[0], temperatures[1]), (pressures[0], pressures[1]))


def _critical_region(reference: Reference, criticals: Criticals) -> tuple[Array, Array]:
    """Where the library's splines reach, and where the two critical points disagree about the name of a phase."""
    low, high = criticals.temperature
    t, p = reference.temperature, reference.pressure
    splines = (t > low * (1 - SPLINE_REGION)) & (t <= high)
    between = (t >= low * (1 - 1e-9)) & (t <= high * (1 + 1e-9))
    low, high = criticals.pressure
    return splines, between | ((p >= low * (1 - 1e-9)) & (p <= high * (1 + 1e-9)))


@dataclass
class Base:
    """Comparison at the library's own (T, ρ), or (T, x) of saturated states.

    ``reasons`` of deviations above a bar there (else empty), ``unexplained`` ones, ``difference`` |ours − theirs| and
    ``small``, the rounding, by property [SI]; ``at_pressure`` and ``at_temperature``: why the library's saturation at
    p, at T, is another one.
    """

    reasons: Array
    unexplained: Array
    difference: dict[str, Array]
    small: dict[str, Array]
    at_pressure: Array
    at_temperature: Array

    def take(self, chosen: Array) -> Base:
        """Some of the states."""
        difference = {name: values[chosen] for name, values in self.difference.items()}
        small = {name: values[chosen] for name, values in self.small.items()}
        saturation = self.at_pressure[chosen], self.at_temperature[chosen]
        return Base(self.reasons[chosen], self.unexplained[chosen], difference, small, *saturation)


def explain_base(fluid: RealFluid, reference: Reference, state: Any, theirs: Any, criticals: Criticals) -> Base:
    """Reasons for deviations at the library's own (T, ρ).

    Parameters
    ----------
    fluid : the fluid here. reference : the library's states. state : ours at the same T and ρ.
    theirs : the library's state object.
    criticals : see :func:`critical_points`.
    """
    gas_constant = fluid.gas_constant
    names = (*BARS, "superheat", "subcooling", "quality")
    difference = {name: np.nan_to_num(np.abs(getattr(state, name) - getattr(reference, name))) for name in names}
    for name in ("superheat", "subcooling"):  # below our triple point, above the library's: its saturation differs
        none = np.isnan(getattr(state, name)) & np.isfinite(getattr(reference, name))
        difference[name] = np.where(none, np.inf, difference[name])
    small = rounding(fluid, reference)
    # c_p = c_v + T (∂p/∂T)²/(ρ² ∂p/∂ρ): what ∂p/∂ρ = w² c_v/c_p loses, c_p loses; c_v is not below half of R
    slope = reference.speed_of_sound**2 * 0.5 * gas_constant / reference.isobaric_heat_capacity
    relative = _ROUNDING * (1 + gas_constant * reference.temperature / slope)
    small["isobaric_heat_capacity"] = np.fmax(
        small["isobaric_heat_capacity"], relative * reference.isobaric_heat_capacity
    )
    over, beyond = np.zeros(reference.size, dtype=bool), np.zeros(reference.size, dtype=bool)
    for name, scale in scales(reference, gas_constant).items():
        with np.errstate(invalid="ignore"):
            over |= difference[name] > BARS[name] * scale
            beyond |= difference[name] > np.maximum(BARS[name] * scale, small[name])
    wanted = over | (state.phase != reference.phase)
    reasons = np.full(reference.size, "", dtype="<U80")
    line = fluid._guard.melting_line
    if line is not None:
        reasons[reference.pressure > line.pressure(reference.temperature) * (1 - 1e-6)] = SOLID
    reasons[over & ~beyond & (state.phase == reference.phase)] = "rounding of a sum that cancels"
    splines, between = _critical_region(reference, criticals)
    reasons[wanted & (reasons == "") & splines] = SPLINES
    named = (state.phase != "two-phase") & (reference.phase != "two-phase") & (state.phase != "")
    reasons[wanted & ~over & (reasons == "") & between & named] = "critical point of the library"
    below = wanted & (reasons == "") & (reference.temperature < criticals.temperature[0]) & np.isfinite(state.density)
    pressure = np.full(reference.size, np.nan)
    pressure[below] = fluid.saturation(temperature=reference.temperature[below], errors="mask")[1].pressure
    # a saturated state, or a single phase between the two saturation pressures
    metastable = (state.phase == "two-phase") | (state.phase != reference.phase)
    with np.errstate(invalid="ignore"):
        below &= np.isfinite(reference.quality) | (metastable & (reference.pressure < 1e3 * pressure))
    why = _why_saturation_differs(fluid, theirs, reference.temperature, below, criticals)
    reasons = np.where(below, why, reasons)
    if (wanted & (reasons == "")).any() and _other_ideal_part(fluid, theirs, reference):
        reasons[wanted & (reasons == "")] = IDEAL
    apart = difference["superheat"] + difference["subcooling"] > 1e-11 * reference.temperature
    at_pressure = _why_saturation_differs(fluid, theirs, _saturated_temperature(reference), apart, criticals)
    apart = np.maximum(difference["pressure"] / reference.pressure, difference["density"] / reference.density) > 1e-8
    apart &= np.isfinite(reference.quality)
    at_temperature = _why_saturation_differs(fluid, theirs, reference.temperature, apart, criticals)
    return Base(reasons, wanted & (reasons == ""), difference, small, at_pressure, at_temperature)


def _other_ideal_part(fluid: RealFluid, theirs: Any, reference: Reference) -> bool:
    """Whether the library's ideal heat capacity is not that of its own data, and ours is."""
    temperature = np.quantile(reference.temperature, [0.1, 0.5, 0.9])
    by_data = library_ideal_heat_capacity(theirs, temperature)
    if by_data is None:
        return False
    ours = fluid.at(temperature=temperature, density=1e-12).isobaric_heat_capacity
    stated = []
    for t in temperature:
        theirs.update(library.DmassT_INPUTS, 1e-12, t)
        stated.append(theirs.cp0mass())
    return bool((np.abs(ours / by_data - 1) < 1e-9).all() and (np.abs(stated / by_data - 1) > 1e-7).any())


def _saturated_temperature(reference: Reference) -> Array:
    """The library's saturation temperature [K] at the pressure of states with a superheat or subcooling; else NaN."""
    none = np.isnan(reference.superheat) & np.isnan(reference.subcooling)
    distance = np.nan_to_num(reference.superheat) - np.nan_to_num(reference.subcooling)
    return np.where(none, np.nan, reference.temperature - distance)


def _why_saturation_differs(
    fluid: RealFluid, theirs: Any, temperature: Array, apart: Array, criticals: Criticals
) -> Array:
    """Reasons why saturation at T [K] is another one, where ``apart`` is true; empty text elsewhere and if unknown."""
    reasons = np.full(temperature.size, "", dtype="<U80")
    with np.errstate(invalid="ignore"):
        reasons[apart & (temperature > criticals.temperature[0] * (1 - SPLINE_REGION))] = SPLINES
        if fluid.pseudo_pure and (apart & (reasons == "")).any():
            reasons[apart & (reasons == "") & (temperature > end_of_lines(theirs))] = LINES
    for index in np.flatnonzero(apart & (reasons == "") & np.isfinite(temperature)):
        if library_saturation_is_worse(fluid, theirs, temperature[index]):
            reasons[index] = SATURATION
    return reasons


def _along(fluid: RealFluid, reference: Reference, state: Any) -> dict[str, Array]:
    """Properties [SI] at points of the straight lines in (T, v) from the library's states to ours, shape (points, N).

    Evaluated in one long batch: short ones are computed by another branch, whose rounding is its own.
    """
    share = np.resize(_STEPS, (max(len(_STEPS), -(-_LONG_BATCH // reference.size)), 1))
    temperature = reference.temperature + share * (state.temperature - reference.temperature)
    volume = 1 / reference.density + share * (1 / state.density - 1 / reference.density)
    found = fluid.at(temperature=temperature, density=1 / volume, errors="mask")
    names = (*BARS, "quality", "superheat", "subcooling")
    return {name: np.asarray(getattr(found, name))[: len(_STEPS)] for name in names}


def _turning_point(fluid: RealFluid, reference: Reference, state: Any, name: str) -> Array:
    """Whether a property turns round along the isotherm within ten times the distance of ours from the library's."""
    apart = 10 * np.abs(state.density / reference.density - 1)
    density = reference.density * (1 + apart * np.array([[-1.0], [0.0], [1.0]]))
    temperature = np.broadcast_to(reference.temperature, density.shape)
    found = fluid.at(temperature=temperature, density=density, errors="mask")
    rise = np.diff(np.asarray(getattr(found, name)), axis=0)
    with np.errstate(invalid="ignore"):
        return (apart < _NEAR) & (rise[0] * rise[1] < 0)


def explain(
    fluid: RealFluid,
    reference: Reference,
    state: Any,
    given: tuple[str, str],
    base: Base,
    criticals: Criticals,
) -> Array:
    """Reasons why states found from a pair differ; empty text where none of the tests is passed.

    Parameters
    ----------
    fluid, reference, criticals : as for :func:`explain_base`. state : ours from the pair.
    given : names of the properties given.
    base : result of :func:`explain_base` for the same states: its reasons stand, its differences widen the rounding.
    """
    reasons = base.reasons.copy()
    if given[1] in ("superheat", "subcooling"):
        reasons = np.where(base.at_pressure != "", base.at_pressure, reasons)
    small = base.small
    alike = ~base.unexplained
    amplified = np.zeros(reference.size, dtype=bool)
    back = np.ones(reference.size, dtype=bool)
    measure = scales(reference, fluid.gas_constant)
    # states as near as this differ to second order along the straight line
    apart = np.abs(state.temperature / reference.temperature - 1)
    bend = np.where(apart < _NEAR, 5 * apart**2, 0.0)
    between = _along(fluid, reference, state)
    for name in given:
        target = getattr(reference, name)
        miss = np.abs(between[name] - target)
        if name == "quality":  # of a saturated state, with a density rounded to the other side
            miss = np.where(np.isnan(miss), 0.0, miss)
        wide = 2 * small[name] + 2 * base.difference.get(name, 0.0) + bend * measure.get(name, 0.0)
        with np.errstate(invalid="ignore"):
            alike &= (miss <= wide).all(axis=0)
            amplified |= (miss > 4 * small[name]).any(axis=0)
            given_back = _GIVEN_BACK * np.maximum(np.abs(target), small[name] / _ROUNDING)
            back &= miss[-1] <= np.maximum(given_back, wide)
    found = deviations(reference, state, fluid.gas_constant)
    missed = np.zeros(reference.size, dtype=bool)
    for name, values in found.items():
        with np.errstate(invalid="ignore"):
            missed |= values > BARS[name]
    # the pressure of a saturated liquid, from its density, is rounding of a sum of terms ten times as large, or more
    by_density = 10 * _ROUNDING * reference.density * fluid.gas_constant * reference.temperature
    by_density = np.maximum(by_density, 4 * small["pressure"])
    quality = np.where(np.isnan(state.quality), np.round(reference.quality), state.quality)
    with np.errstate(invalid="ignore"):
        noise = np.abs(state.pressure - reference.pressure) <= by_density
        rest = ~np.any([found[name] > BARS[name] for name in BARS if name != "pressure"], axis=0)
        on_line = ~base.unexplained & (~missed | (noise & rest)) & (np.abs(quality - reference.quality) < _ON_LINE)
    reasons[(reasons == "") & on_line] = "saturated within rounding: one phase or two"
    reasons = np.where((reasons == "") & back & ~base.unexplained, base.at_temperature, reasons)
    splines, differ = _critical_region(reference, criticals)
    if given in (("temperature", "density"), ("temperature", "quality")):
        return reasons  # nothing is solved for, so nothing is amplified
    reasons[(reasons == "") & alike & amplified] = "difference at (T, rho), amplified by the pair"
    reasons[(reasons == "") & alike] = "pair does not tell the states apart"
    if given[0] == "temperature":
        turning = _turning_point(fluid, reference, state, given[1])
        reasons[(reasons == "") & back & ~base.unexplained & turning] = "next to a turning point along the isotherm"
    reasons[(reasons == "") & back & splines] = SPLINES
    named = (state.phase != "two-phase") & (reference.phase != "two-phase")
    reasons[(reasons == "") & back & differ & named & ~missed] = "critical point of the library"
    return reasons

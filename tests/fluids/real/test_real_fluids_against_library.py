"""Real fluids against an independent compiled library (CoolProp) over their whole range.

Deviations are measured for density relative to itself, for specific enthalpy in parts of R·T and for specific entropy
in parts of R (their own zeros being arbitrary, and crossed within the range). Zeros are brought together at one state.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from reportgen.fluids import real_fluid
from reportgen.fluids.real.fluid import RealFluid

library = pytest.importorskip("CoolProp.CoolProp")

LIBRARY_NAMES = {
    "air": "Air",
    "ammonia": "Ammonia",
    "argon": "Argon",
    "carbon dioxide": "CarbonDioxide",
    "methane": "Methane",
    "nitrogen": "Nitrogen",
    "oxygen": "Oxygen",
    "propane": "n-Propane",
    "R134a": "R134a",
    "water": "Water",
}
POINTS = 2000
#: Closer to critical than this (1 − T/Tc) the library follows cubic splines of its own instead of the equation:
#: measured differences of coexisting densities 4e-3 (ammonia) to 6e-9 (oxygen) there, at most 8e-14 further away.
SPLINE_REGION = 1.2e-3
#: Below this pressure [Pa] the library's saturation pressure is the rounding of a liquid's (propane at its triple
#: point, 1.7e-4 Pa: 5.5e-4 off the vapour's, which is an ideal gas there); pressures below are compared in parts of
#: this one.
LOWEST_PRESSURE = 10.0


def reference(fluid: RealFluid) -> tuple[Any, float, float]:
    """The library's state object, and what is to be added to our h and s to share its zeros."""
    state = library.AbstractState("HEOS", LIBRARY_NAMES[str(fluid.substance)])
    point = fluid.at(temperature=300.0, density=1.0)
    state.update(library.DmassT_INPUTS, 1.0, 300.0)
    return state, state.hmass() - point.specific_enthalpy, state.smass() - point.specific_entropy


def points(fluid: RealFluid, seed: int) -> tuple[np.ndarray, np.ndarray]:
    """Pressures and temperatures: half over the whole range, half over the range up to 2.5 Tc; p log-uniform from 100
    Pa.
    """
    random = np.random.default_rng(seed)
    limits = fluid.limits
    assert limits.critical_point is not None
    low, high = limits.minimum_temperature, limits.maximum_temperature
    near = min(2.5 * limits.critical_point.temperature, high)
    half = POINTS // 2
    temperature = np.concatenate([random.uniform(low, high, half), low * (near / low) ** random.uniform(0, 1, half)])
    pressure = np.exp(random.uniform(np.log(100.0), np.log(limits.maximum_pressure), POINTS))
    return pressure, temperature


@pytest.mark.parametrize("name", LIBRARY_NAMES)
def test_whole_range_of_pressure_and_temperature(name: str) -> None:
    fluid = real_fluid(name)
    state, add_h, add_s = reference(fluid)
    pressure, temperature = points(fluid, seed=11)
    ours = fluid.at(pressure=pressure, temperature=temperature, errors="mask")
    # what is refused is solid, or (air) between bubble and dew line; never more than 8 % of the range
    assert len(ours.faults) < 0.08 * POINTS
    for fault in ours.faults.values():
        assert "is solid at" in fault.message or "between the bubble and the dew line" in fault.message
    r = fluid.gas_constant
    worst = np.zeros(3)
    compared = 0
    for index in np.flatnonzero(np.isfinite(ours.density)):
        state.update(library.PT_INPUTS, pressure[index], temperature[index])
        compared += 1
        difference = (
            state.rhomass() / ours.density[index] - 1,
            (state.hmass() - add_h - ours.specific_enthalpy[index]) / (r * temperature[index]),
            (state.smass() - add_s - ours.specific_entropy[index]) / r,
        )
        worst = np.maximum(worst, np.abs(difference))
    assert compared > 0.92 * POINTS
    assert (worst < 1e-7).all(), worst


@pytest.mark.parametrize("name", LIBRARY_NAMES)
def test_properties_from_temperature_and_density(name: str) -> None:
    fluid = real_fluid(name)
    state, add_h, add_s = reference(fluid)
    pressure, temperature = points(fluid, seed=12)
    density = fluid.at(pressure=pressure, temperature=temperature, errors="mask").density
    good = np.flatnonzero(np.isfinite(density))[::2]
    ours = fluid.at(temperature=temperature[good], density=density[good])
    state.specify_phase(library.iphase_gas)
    r = fluid.gas_constant
    found = np.array(
        [
            (
                (state.update(library.DmassT_INPUTS, rho, t), state.p())[1],
                state.hmass() - add_h,
                state.smass() - add_s,
                state.umass() - add_h,
                state.cvmass(),
                state.cpmass(),
                state.speed_sound(),
            )
            for t, rho in zip(temperature[good], density[good], strict=True)
        ]
    ).T
    t, rho = temperature[good], density[good]
    scales = (rho * r * t, r * t, r, r * t, r, ours.isobaric_heat_capacity, ours.speed_of_sound)
    fields = (
        "pressure",
        "specific_enthalpy",
        "specific_entropy",
        "specific_internal_energy",
        "isochoric_heat_capacity",
        "isobaric_heat_capacity",
        "speed_of_sound",
    )
    for field, theirs, scale in zip(fields, found, scales, strict=True):
        worst = np.max(np.abs(getattr(ours, field) - theirs) / np.maximum(np.abs(scale), np.abs(theirs)))
        # c_p and w of a fluid next to its critical point divide by a slope near zero
        bar = 1e-9 if field in ("isobaric_heat_capacity", "speed_of_sound") else 1e-11
        assert worst < bar, (field, worst)


@pytest.mark.parametrize("name", LIBRARY_NAMES)
def test_inside_and_along_the_dome(name: str) -> None:
    fluid = real_fluid(name)
    state, add_h, add_s = reference(fluid)
    critical = fluid.limits.critical_point
    assert critical is not None
    random = np.random.default_rng(13)
    largest = 1 - fluid.limits.minimum_temperature / critical.temperature
    gap = np.where(
        random.uniform(size=POINTS) < 0.5,
        random.uniform(SPLINE_REGION, largest, POINTS),
        np.exp(random.uniform(np.log(SPLINE_REGION), np.log(largest), POINTS)),
    )
    temperature = critical.temperature * (1 - gap)
    quality = random.uniform(size=POINTS)
    quality[::4], quality[1::4] = 0.0, 1.0
    if fluid.pseudo_pure:
        quality = np.round(quality)
    ours = fluid.at(temperature=temperature, quality=quality)
    r = fluid.gas_constant
    worst = np.zeros(4)
    for index in range(POINTS):
        state.update(library.QT_INPUTS, quality[index], temperature[index])
        difference = (
            (state.p() - ours.pressure[index]) / max(ours.pressure[index], LOWEST_PRESSURE),
            state.rhomass() / ours.density[index] - 1,
            (state.hmass() - add_h - ours.specific_enthalpy[index]) / (r * temperature[index]),
            (state.smass() - add_s - ours.specific_entropy[index]) / r,
        )
        worst = np.maximum(worst, np.abs(difference))
    assert (worst < 1e-7).all(), worst


@pytest.mark.parametrize("name", [name for name in LIBRARY_NAMES if name != "air"])
def test_phases_are_in_equilibrium_up_to_the_critical_point(name: str) -> None:
    """Where the library is no measure: equal pressure and equal Gibbs energy by the equation itself.

    Measured: at most 4e-12 R·T, and within 1e-6 Tc of critical, where the curves are a join of fourth degree, 4e-11.
    """
    fluid = real_fluid(name)
    critical = fluid.limits.critical_point
    assert critical is not None
    gap = np.geomspace(1e-9, 2 * SPLINE_REGION, 400)
    temperature = critical.temperature * (1 - gap)
    liquid, vapour = fluid.saturation(temperature=temperature)
    equation = fluid._equation
    a, b = equation.properties(temperature, liquid.density), equation.properties(temperature, vapour.density)
    scale = fluid.gas_constant * temperature
    gibbs = np.abs(a.enthalpy - b.enthalpy - temperature * (a.entropy - b.entropy)) / scale
    pressures = np.abs(a.pressure - b.pressure) / (liquid.density * scale)
    bar = np.where(gap > 1e-6, 1e-11, 1e-10)
    assert (gibbs < bar).all()
    assert (pressures < bar).all()
    assert (liquid.density > vapour.density).all()

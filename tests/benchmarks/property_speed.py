"""Speed of the real fluids against a compiled library, paired in one run: ``python -m
tests.benchmarks.property_speed``.

10 000 states given by pressure and temperature -> density, enthalpy, entropy, internal energy, both heat capacities
and speed of sound: ours at once, the library (CoolProp) by its low-level state object, one state after the other.
"""

from __future__ import annotations

import statistics
import time
from typing import Any

import CoolProp.CoolProp as library
import numpy as np

from reportgen.fluids import real_fluid
from reportgen.fluids.real.fluid import RealFluid

FLUIDS = {"water": "Water", "carbon dioxide": "CarbonDioxide", "nitrogen": "Nitrogen", "R134a": "R134a"}
STATES = 10_000
PAIRS = 5


def states(fluid: RealFluid, count: int = STATES) -> tuple[np.ndarray, np.ndarray]:
    """Pressures (log-uniform from 1 kPa to half the maximum) and temperatures (uniform up to 3 Tc), fluid and not
    solid.
    """
    random = np.random.default_rng(1)
    limits, critical = fluid.limits, fluid.limits.critical_point
    assert critical is not None
    high = min(3 * critical.temperature, limits.maximum_temperature)
    temperature = random.uniform(limits.minimum_temperature + 1, high, 2 * count)
    pressure = np.exp(random.uniform(np.log(1e3), np.log(limits.maximum_pressure / 2), 2 * count))
    density = fluid.at(pressure=pressure, temperature=temperature, errors="mask").density
    good = np.flatnonzero(np.isfinite(density))[:count]
    return pressure[good], temperature[good]


def ours(fluid: RealFluid, pressure: np.ndarray, temperature: np.ndarray) -> tuple[Any, ...]:
    """The seven properties of all states."""
    state = fluid.at(pressure=pressure, temperature=temperature)
    return (
        state.density,
        state.specific_enthalpy,
        state.specific_entropy,
        state.specific_internal_energy,
        state.isochoric_heat_capacity,
        state.isobaric_heat_capacity,
        state.speed_of_sound,
    )


def theirs(state: Any, pressure: list[float], temperature: list[float]) -> list[tuple[float, ...]]:
    """The same by the library's low-level loop."""
    pair, found = library.PT_INPUTS, []
    update = state.update
    for p, t in zip(pressure, temperature, strict=True):
        update(pair, p, t)
        found.append(
            (
                state.rhomass(),
                state.hmass(),
                state.smass(),
                state.umass(),
                state.cvmass(),
                state.cpmass(),
                state.speed_sound(),
            )
        )
    return found


def ratio(name: str, pairs: int = PAIRS, count: int = STATES) -> tuple[float, float, float]:
    """Median times of ours and theirs [s], and the median of the paired ratios."""
    fluid = real_fluid(name)
    state = library.AbstractState("HEOS", FLUIDS[name])
    pressure, temperature = states(fluid, count)
    lists = pressure.tolist(), temperature.tolist()
    ours(fluid, pressure, temperature)
    theirs(state, lists[0][:100], lists[1][:100])
    mine, other = [], []
    for _ in range(pairs):
        start = time.perf_counter()
        ours(fluid, pressure, temperature)
        middle = time.perf_counter()
        theirs(state, *lists)
        mine.append(middle - start)
        other.append(time.perf_counter() - middle)
    return (
        statistics.median(mine),
        statistics.median(other),
        statistics.median(a / b for a, b in zip(mine, other, strict=True)),
    )


def small(fluid: RealFluid, count: int, repeats: int = 50) -> dict[str, float]:
    """Median time [s] of one call with ``count`` states of superheated vapour, by pair, one property read."""
    critical = fluid.limits.critical_point
    assert critical is not None
    pressure = 0.2 * critical.pressure * (1 + 1e-5 * np.arange(count))
    base = fluid.at(pressure=pressure, temperature=np.full(count, 0.9 * critical.temperature))
    found = {}
    for field in ("temperature", "specific_enthalpy", "specific_entropy"):
        value = getattr(base, field)
        times = []
        for _ in range(repeats):
            start = time.perf_counter()
            _ = fluid.at(pressure=pressure, **{field: value}).isobaric_heat_capacity
            times.append(time.perf_counter() - start)
        found[field] = statistics.median(times)
    return found


def main() -> None:
    """Print the figures."""
    print(f"{STATES} states (p, T) -> 7 properties, median of {PAIRS} pairs")
    for name in FLUIDS:
        mine, other, quotient = ratio(name)
        print(f"{name:15s} {mine * 1e3:7.1f} ms against {other * 1e3:7.1f} ms: ratio {quotient:.2f}")
    print("one call, superheated vapour, by pressure and ...")
    for name in FLUIDS:
        fluid = real_fluid(name)
        for count in (1, 61):
            line = ", ".join(f"{field} {seconds * 1e6:.0f} us" for field, seconds in small(fluid, count).items())
            print(f"{name:15s} {count:3d} states: {line}")


if __name__ == "__main__":
    main()

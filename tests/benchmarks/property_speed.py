"""Speed of the real fluids against a compiled library (CoolProp), paired in one run: ``python -m
tests.benchmarks.property_speed``.

Many states: ours at once, the library by its low-level state object, one after the other. Single states: both one after
the other. Both sides compute density, enthalpy, entropy, internal energy, both heat capacities and speed of sound of
every state; saturation is from temperature to pressure, and density, enthalpy and entropy of both phases. Every figure
is the median of paired runs, in processor time of the process, so that other work on the machine disturbs it little.
Last, a process that imports one and computes a state of water, against one that imports the other, by the clock.
"""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
import time
from collections.abc import Callable
from typing import Any, NamedTuple

import CoolProp.CoolProp as library
import numpy as np

from reportgen.fluids import real_fluid
from reportgen.fluids.real.fluid import RealFluid
from reportgen.fluids.real.scalar.few import MOST
from reportgen.fluids.state import State

FLUIDS = {"water": "Water", "carbon dioxide": "CarbonDioxide", "nitrogen": "Nitrogen", "R134a": "R134a"}
STATES = 100_000
SINGLE = 500
PAIRS = 5
#: Paired runs of many states; the library takes minutes for some.
LONG_PAIRS = 3
#: Largest ratios allowed: many states, and one state.
BARS = {"p,T": 0.40, "p,h": 0.40, "p,s": 0.40, "saturation": 0.25}
SINGLE_BAR = 8.0
COLD_BAR = 0.25


class Case(NamedTuple):
    """One line of the table: what both sides are given, and how each computes it."""

    name: str
    ours: Callable[[dict[str, Any]], Any]
    theirs: Callable[[Any, list[float], list[float]], list[tuple[float, ...]]]
    given: dict[str, np.ndarray]
    lists: tuple[list[float], list[float]]


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


def read(state: State) -> tuple[Any, ...]:
    """The seven properties."""
    return (
        state.density,
        state.specific_enthalpy,
        state.specific_entropy,
        state.specific_internal_energy,
        state.isochoric_heat_capacity,
        state.isobaric_heat_capacity,
        state.speed_of_sound,
    )


def _theirs(pair: int, *, pressure_first: bool) -> Callable[[Any, list[float], list[float]], list[tuple[float, ...]]]:
    """The seven properties by the library's low-level loop; states it cannot find are passed over."""

    def loop(state: Any, first: list[float], second: list[float]) -> list[tuple[float, ...]]:
        update, found = state.update, []
        for a, b in zip(first, second, strict=True) if pressure_first else zip(second, first, strict=True):
            try:
                update(pair, a, b)
                energies = state.hmass(), state.smass(), state.umass()
                found.append((state.rhomass(), *energies, state.cvmass(), state.cpmass(), state.speed_sound()))
            except ValueError:
                continue
        return found

    return loop


def _their_saturation(state: Any, temperature: list[float], _: list[float]) -> list[tuple[float, ...]]:
    """Both phases from one update of the library."""
    update, pair, found = state.update, library.QT_INPUTS, []
    liquid, vapour = state.saturated_liquid_keyed_output, state.saturated_vapor_keyed_output
    density, enthalpy, entropy = library.iDmass, library.iHmass, library.iSmass
    for t in temperature:
        update(pair, 0.0, t)
        both = liquid(density), vapour(density), liquid(enthalpy), vapour(enthalpy), liquid(entropy), vapour(entropy)
        found.append((state.p(), *both))
    return found


def cases(fluid: RealFluid, state: Any, count: int) -> list[Case]:
    """The lines of the table for one fluid, with ``count`` states each."""
    pressure, temperature = states(fluid, count)
    base = fluid.at(pressure=pressure, temperature=temperature)
    # zeros of enthalpy and entropy are brought together at one state
    point = fluid.at(temperature=300.0, density=1.0)
    state.update(library.DmassT_INPUTS, 1.0, 300.0)
    h, s = base.specific_enthalpy, base.specific_entropy
    their_h = h + (state.hmass() - point.specific_enthalpy)
    their_s = s + (state.smass() - point.specific_entropy)
    critical = fluid.limits.critical_point
    assert critical is not None
    low = fluid.limits.minimum_temperature
    saturated = np.random.default_rng(2).uniform(low, 0.999 * critical.temperature, pressure.size)

    def by_pair(given: dict[str, Any]) -> Any:
        return read(fluid.at(**given))

    def by_saturation(given: dict[str, Any]) -> Any:
        liquid, vapour = fluid.saturation(**given)
        phases = (liquid.density, vapour.density, liquid.specific_enthalpy, vapour.specific_enthalpy)
        return liquid.pressure, *phases, liquid.specific_entropy, vapour.specific_entropy

    p = pressure.tolist()
    by_t = _theirs(library.PT_INPUTS, pressure_first=True)
    by_h = _theirs(library.HmassP_INPUTS, pressure_first=False)
    by_s = _theirs(library.PSmass_INPUTS, pressure_first=True)
    return [
        Case("p,T", by_pair, by_t, {"pressure": pressure, "temperature": temperature}, (p, temperature.tolist())),
        Case("p,h", by_pair, by_h, {"pressure": pressure, "specific_enthalpy": h}, (p, their_h.tolist())),
        Case("p,s", by_pair, by_s, {"pressure": pressure, "specific_entropy": s}, (p, their_s.tolist())),
        Case("saturation", by_saturation, _their_saturation, {"temperature": saturated}, (saturated.tolist(), [])),
    ]


def paired(
    ours: Callable[[], Any],
    theirs: Callable[[], Any],
    pairs: int = PAIRS,
    clock: Callable[[], float] = time.process_time,
) -> tuple[float, float, float]:
    """Median times of ours and theirs [s], and the median of the paired ratios."""
    mine, other = [], []
    for _ in range(pairs):
        start = clock()
        ours()
        middle = clock()
        theirs()
        mine.append(middle - start)
        other.append(clock() - middle)
    ratio = statistics.median(a / b for a, b in zip(mine, other, strict=True))
    return statistics.median(mine), statistics.median(other), ratio


def at_once(case: Case, state: Any, pairs: int = LONG_PAIRS) -> tuple[float, float, float]:
    """All states in one call, against the library's loop."""
    return paired(lambda: case.ours(case.given), lambda: case.theirs(state, *case.lists), pairs)


def one_by_one(case: Case, state: Any, count: int = SINGLE, pairs: int = PAIRS) -> tuple[float, float, float]:
    """``count`` states, each in a call of its own on both sides; times of one state."""
    names = list(case.given)
    rows = zip(*(values[:count].tolist() for values in case.given.values()), strict=True)
    calls = [dict(zip(names, row, strict=True)) for row in rows]
    first, second = (values[:count] for values in case.lists)

    def ours() -> None:
        for given in calls:
            case.ours(given)

    mine, other, ratio = paired(ours, lambda: case.theirs(state, first, second), pairs)
    return mine / len(calls), other / len(calls), ratio


def cold(pairs: int = PAIRS) -> tuple[float, float, float]:
    """A process that computes one state of water, against one that imports the library [s]."""
    code = "from reportgen.fluids import real_fluid; real_fluid('water').at(pressure=1e5, temperature=300.0).density"

    def run(text: str) -> Callable[[], Any]:
        return lambda: subprocess.run([sys.executable, "-c", text], check=True)

    run(code)()
    run("import CoolProp")()
    return paired(run(code), run("import CoolProp"), pairs, time.perf_counter)


def switch_over(fluid: RealFluid) -> list[tuple[int, float, float]]:
    """Times [s] of a call with 1, 2, ... states by p, T, one after the other and in the vectorised branch."""
    pressure, temperature = states(fluid, 200)
    found = []
    for count in (1, 2, 4, MOST, MOST + 1, 2 * MOST):
        starts = range(0, 200 - count, count)
        given = [{"pressure": pressure[i : i + count], "temperature": temperature[i : i + count]} for i in starts]

        def few(given: list[dict[str, Any]] = given) -> None:
            for each in given:
                for p, t in zip(each["pressure"].tolist(), each["temperature"].tolist(), strict=True):
                    read(fluid.at(pressure=p, temperature=t))

        def at_once(given: list[dict[str, Any]] = given) -> None:
            for each in given:
                read(fluid._at_once("raise", each))

        mine, other, _ = paired(few, at_once)
        found.append((count, mine / len(given), other / len(given)))
    return found


def main() -> None:
    """Print the table."""
    print(f"load {os.getloadavg()[0]:.2f} on {os.cpu_count()} cores; medians of {LONG_PAIRS} and {PAIRS} paired runs")
    print(f"{'':15s} {'':10s} {STATES} states at once, a state          bar    one state after the other          bar")
    worst = {"many": 0.0, "one": 0.0}
    for name, source in FLUIDS.items():
        fluid, state = real_fluid(name), library.AbstractState("HEOS", source)
        for case in cases(fluid, state, STATES):
            mine, other, ratio = (x / STATES for x in at_once(case, state))
            ratio *= STATES
            single, their_single, single_ratio = one_by_one(case, state)
            worst["many"] = max(worst["many"], ratio / BARS[case.name])
            worst["one"] = max(worst["one"], single_ratio / SINGLE_BAR)
            many = f"{mine * 1e6:6.2f} us : {other * 1e6:7.2f} us = {ratio:5.3f}  {BARS[case.name]:.2f}"
            one = f"{single * 1e6:6.1f} us : {their_single * 1e6:6.1f} us = {single_ratio:5.2f}  {SINGLE_BAR:.0f}"
            print(f"{name:15s} {case.name:10s} {many}    {one}", flush=True)
    mine, other, ratio = cold()
    print(
        f"cold: import, a state of water {mine:.3f} s : import of the library {other:.3f} s = {ratio:.3f}  {COLD_BAR}"
    )
    for name in ("water", "R134a"):
        line = ", ".join(f"{n}: {a * 1e6:.0f}/{b * 1e6:.0f}" for n, a, b in switch_over(real_fluid(name)))
        print(f"{name}, us a call by p, T, states one after the other/vectorised: {line}; switched after {MOST}")
    print(f"worst part of a bar: {worst['many']:.2f} many, {worst['one']:.2f} one; load {os.getloadavg()[0]:.2f}")


if __name__ == "__main__":
    main()

"""From a state to each pair of its properties and back, over every real fluid: ``python -m
tests.benchmarks.round_trips``.

States are drawn in (T, p), near the critical point, in (T, x) down to x = 1e-8 and on the saturation lines. From each
pair the state must come back: T within 1e-9 and in the same phase; or what comes back has the pair given to the last
digits, so that the two states cannot be told apart by it (a liquid and its first bubble, by enthalpy and entropy); or
it is refused since several states have the pair, the true one among those offered. All else is counted as lost.
"""

from __future__ import annotations

import argparse
import time
from collections import Counter
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import Fault
from reportgen.fluids import names, real_fluid
from reportgen.fluids.pairs import SeveralStates
from reportgen.fluids.real.fluid import RealFluid
from reportgen.fluids.state import State

__all__ = ["PAIRS", "Outcome", "draw", "round_trip"]

Array = NDArray[Any]

PAIRS = (
    ("pressure", "temperature"),
    ("pressure", "specific_enthalpy"),
    ("pressure", "specific_entropy"),
    ("pressure", "specific_internal_energy"),
    ("pressure", "density"),
    ("temperature", "density"),
    ("temperature", "specific_entropy"),
    ("temperature", "specific_enthalpy"),
    ("temperature", "specific_internal_energy"),
    ("density", "specific_internal_energy"),
    ("density", "specific_enthalpy"),
    ("density", "specific_entropy"),
    ("specific_enthalpy", "specific_entropy"),
)
#: Largest relative difference of T of a state that came back.
TEMPERATURE = 1e-9
#: The same for ρ where T was given.
DENSITY = 1e-6
#: How well a state has the pair given, in parts of |h| + R T, |s| + R, p + ρ R T, ρ or T: rounding, and 1e-9 within
#: 1e-4 of the critical temperature, where saturation curves end in joins (Gibbs energies apart by up to 3e-10).
SAME, SAME_NEAR = 1e-11, 1e-9
_NEAR = 1e-4


@dataclass
class Outcome:
    """What became of the states of one fluid, or of all."""

    states: int = 0
    worst_temperature: float = 0.0
    worst_density: float = 0.0
    #: recovered within the bars
    back: int = 0
    #: not told apart from another by the pair
    alike: int = 0
    refused: Counter[str] = field(default_factory=Counter)
    lost: list[str] = field(default_factory=list)
    seconds: float = 0.0

    def __iadd__(self, other: Outcome) -> Outcome:
        self.states += other.states
        self.worst_temperature = max(self.worst_temperature, other.worst_temperature)
        self.worst_density = max(self.worst_density, other.worst_density)
        self.back += other.back
        self.alike += other.alike
        self.refused += other.refused
        self.lost += other.lost
        self.seconds += other.seconds
        return self

    def __str__(self) -> str:
        text = (
            f"{self.states:8d} states, {self.back:8d} back (worst T {self.worst_temperature:.1e}, "
            f"rho {self.worst_density:.1e}), {self.alike} alike, lost {len(self.lost)}, "
            f"{1e6 * self.seconds / max(self.states, 1):.0f} us a state"
        )
        return text + (f", refused {dict(self.refused)}" if self.refused else "")


def draw(fluid: RealFluid, count: int, seed: int) -> State:
    """About ``count`` states of a fluid that can be evaluated from (T, ρ)."""
    random = np.random.default_rng(seed)
    limits, critical = fluid.limits, fluid.limits.critical_point
    assert critical is not None
    low, high = limits.minimum_temperature, limits.maximum_temperature
    half = count // 2
    temperature = low * (min(2.5 * critical.temperature, high) / low) ** random.uniform(1e-6, 1, half)
    temperature[::4] = random.uniform(low, high, temperature[::4].size)
    pressure = np.exp(random.uniform(np.log(1e-3), np.log(limits.maximum_pressure), half))
    near = half // 3
    away = random.choice([-1, 1], (2, near)) * 10 ** random.uniform(-7, -1, (2, near))
    temperature[:near] = critical.temperature * (1 + away[0])
    pressure[:near] = critical.pressure * (1 + away[1])
    single = fluid.at(pressure=pressure, temperature=temperature, errors="mask")
    gap = np.exp(random.uniform(np.log(1e-6), np.log(1 - low / critical.temperature), half))
    quality = random.uniform(0, 1, half)
    quality[::8] = 10 ** random.uniform(-8, 0, quality[::8].size)
    quality[1::8] = 1 - 10 ** random.uniform(-8, 0, quality[1::8].size)
    quality[2::8], quality[3::8] = 0.0, 1.0
    if fluid.pseudo_pure:
        quality = np.round(quality)
    saturated = fluid.at(temperature=critical.temperature * (1 - gap), quality=quality, errors="mask")
    t, rho = (
        np.concatenate([getattr(part, name) for part in (single, saturated)]) for name in ("temperature", "density")
    )
    good = np.isfinite(rho)
    base = fluid.at(temperature=t[good], density=rho[good], errors="mask")
    good = np.isfinite(base.density)
    return fluid.at(temperature=base.temperature[good], density=base.density[good])


def _scale(fluid: RealFluid, name: str, state: State) -> Array:
    rt = fluid.gas_constant * state.temperature
    value = np.abs(getattr(state, name))
    if name in ("specific_enthalpy", "specific_internal_energy"):
        return value + rt
    if name == "specific_entropy":
        return value + fluid.gas_constant
    return value + state.density * rt if name == "pressure" else value


def _reason(fluid: RealFluid, fault: Fault, temperature: float, density: float) -> tuple[bool, str]:
    """Whether a refusal is a good one, and what to count it as."""
    if isinstance(fault, SeveralStates):
        roots = [(root.temperature, root.density or np.nan) for root in fault.roots]
        true = any(abs(t / temperature - 1) < 1e-6 and abs(rho / density - 1) < 1e-3 for t, rho in roots)
        return true or "so thin" in fault.message or "do not tell" in fault.message, "several states"
    if "do not tell the pressure" in fault.message:
        return True, "thin gas"
    if "lie on one of the lines" in fault.message:
        return fluid.pseudo_pure, "on a line, by pressure and temperature"
    critical = fluid.limits.critical_point
    assert critical is not None
    if "between the bubble and the dew line" in fault.message and abs(temperature / critical.temperature - 1) < 3e-6:
        return fluid.pseudo_pure, "where bubble and dew line of a pseudo-pure fluid meet, within rounding"
    edge = fluid.limits.maximum_pressure
    if (
        "above the maximum" in fault.message
        and fluid.at(temperature=temperature, density=density).pressure > 0.999 * edge
    ):
        return True, "at the highest pressure"
    return False, ""


def round_trip(fluid: RealFluid, pair: tuple[str, str], base: State) -> Outcome:
    """What becomes of states given by one of their pairs."""
    given = {name: getattr(base, name) for name in pair}
    start = time.perf_counter()
    again = fluid.at(errors="mask", **given)
    result = Outcome(states=base.temperature.size, seconds=time.perf_counter() - start)
    critical = fluid.limits.critical_point
    assert critical is not None
    same = np.where(np.abs(base.temperature / critical.temperature - 1) < _NEAR, SAME_NEAR, SAME)
    off_t = np.abs(again.temperature / base.temperature - 1)
    off_rho = np.abs(again.density / base.density - 1)
    answered = np.isfinite(again.temperature)
    # liquids on the line itself may come back as the line or as a point beside it
    one_phase = {"liquid": 0, "vapour": 1, "supercritical": 2, "two-phase": 3}
    phases = [np.array([one_phase.get(str(name), -1) for name in state.phase]) for state in (base, again)]
    back = answered & (off_t <= TEMPERATURE) & (phases[0] == phases[1])
    if "temperature" in pair:
        back &= off_rho <= DENSITY
    # evaluated anew from what came back: does it have the pair?
    other = fluid.at(temperature=again.temperature, density=again.density, errors="mask")
    alike = answered & ~back
    for name in pair:
        off = np.abs(getattr(other, name) - getattr(base, name)) / _scale(fluid, name, base)
        alike &= off <= same
    result.back, result.alike = int(np.count_nonzero(back)), int(np.count_nonzero(alike))
    if back.any():
        result.worst_temperature = float(np.max(off_t[back]))
        result.worst_density = float(np.max(off_rho[back]))
    for index, fault in again.faults.items():
        t, rho = float(base.temperature[index]), float(base.density[index])
        good, text = _reason(fluid, fault, t, rho)
        if good:
            result.refused[text] += 1
        else:
            result.lost.append(f"{fluid.substance} {pair} T = {t!r}, rho = {rho!r} ({base.phase[index]}): {fault}")
    for index in np.flatnonzero(answered & ~back & ~alike):
        result.lost.append(
            f"{fluid.substance} {pair} T = {base.temperature[index]!r}, rho = {base.density[index]!r} "
            f"({base.phase[index]}): came back as T = {again.temperature[index]!r}, rho = {again.density[index]!r} "
            f"({again.phase[index]})"
        )
    return result


def main() -> int:
    """Print a line for each pair, and what was lost."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--states", type=int, default=1000, help="states a fluid (1000)")
    parser.add_argument("--fluids", default="", help="names, separated by commas (all)")
    parser.add_argument("--seed", type=int, default=1)
    chosen = parser.parse_args()
    totals = {pair: Outcome() for pair in PAIRS}
    carried = [name for name in chosen.fluids.split(",") if name] or list(names())
    for name in carried:
        fluid = real_fluid(name)
        base = draw(fluid, chosen.states, chosen.seed)
        for pair in PAIRS:
            totals[pair] += round_trip(fluid, pair, base)
    for pair, outcome in totals.items():
        print(f"{' + '.join(pair):45s} {outcome}")
        for text in outcome.lost[:12]:
            print("     ", text[:400])
    lost = sum(len(outcome.lost) for outcome in totals.values())
    print(f"{len(carried)} fluids, {sum(outcome.states for outcome in totals.values())} round trips, {lost} lost")
    return 1 if lost else 0


if __name__ == "__main__":
    raise SystemExit(main())

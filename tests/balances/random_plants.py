"""Random plants grown piece by piece from feeds, every state known as soon as it exists.

They hold compressors, pumps, fans, turbines, valves, heaters, coolers, pipes, mixers, splitters, separators and heat
exchangers, recycles and closed loops. States are computed here from the property models alone.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cache
from random import Random
from typing import Any

import numpy as np

from reportgen import fluids
from reportgen.balances import EquipmentDefinition, Plant
from reportgen.errors import ReportgenError
from tests.balances.cases import SURROUNDINGS

MOST_PIECES = 30

#: Fluid, range of pressures [Pa] and of temperatures [K] to begin in.
FLUIDS = {
    "water": (1e4, 60e5, 290.0, 800.0),
    "R134a": (1e5, 25e5, 250.0, 380.0),
    "CO2": (7e5, 60e5, 230.0, 450.0),
    "nitrogen": (1e5, 80e5, 200.0, 600.0),
    "air": (1e5, 30e5, 250.0, 1000.0),
}


@cache
def fluid(name: str) -> Any:
    if name == "air":
        return fluids.ideal_gas({"N2": 0.7808, "O2": 0.2095, "Ar": 0.0097})
    return fluids.real_fluid(name)


class Unlucky(Exception):
    """A draw that led nowhere."""


@dataclass
class Network:
    """A plant with the values of all its variables."""

    plant: Plant
    truth: dict[str, float]
    always: set[str] = field(default_factory=set)


class Builder:
    """Grows a network; every state is known as soon as it exists."""

    def __init__(self, random: Random, pieces: int) -> None:
        self.random = random
        self.wanted = pieces
        self.states: dict[str, tuple[str, float, float, float]] = {}
        self.equipment: dict[str, EquipmentDefinition] = {}
        self.open: list[str] = []
        self.truth: dict[str, float] = {}
        self.always: set[str] = set()

    # -- states ----------------------------------------------------------------------------------------------------

    def state(self, name: str, pressure: float, enthalpy: float, flow: float) -> str:
        found = fluid(name).at(pressure=pressure, specific_enthalpy=enthalpy, errors="mask")
        limits = fluid(name).limits
        critical = limits.critical_point
        if not np.isfinite(found.specific_entropy) or flow <= 1e-4:
            raise Unlucky
        if (
            critical is not None
            and pressure > 0.85 * critical.pressure
            and found.temperature < 1.15 * critical.temperature
        ):
            raise Unlucky
        if critical is not None and str(found.phase) == "two-phase" and not 0.02 < found.quality < 0.98:
            raise Unlucky  # at the edge of the dome derivatives jump
        if limits.triple_point is not None and pressure < 1.2 * limits.triple_point.pressure:
            raise Unlucky
        if found.temperature < limits.minimum_temperature + 5.0 or found.temperature > 1400.0:
            raise Unlucky
        identifier = str(len(self.states) + 1)
        self.states[identifier] = (name, pressure, enthalpy, flow)
        return identifier

    def at(self, state: str) -> Any:
        name, pressure, enthalpy, _ = self.states[state]
        return fluid(name).at(pressure=pressure, specific_enthalpy=enthalpy)

    def feed(self) -> str:
        for _ in range(50):
            name = self.random.choice(list(FLUIDS))
            low, high, cold, hot = FLUIDS[name]
            pressure = low * (high / low) ** self.random.random()
            found = fluid(name).at(pressure=pressure, temperature=self.random.uniform(cold, hot), errors="mask")
            enthalpy = float(found.specific_enthalpy)
            if name not in ("air", "nitrogen") and self.random.random() < 0.3:
                liquid, vapour = fluid(name).saturation(pressure=pressure, errors="mask")
                share = self.random.uniform(0.1, 0.9)
                enthalpy = float(liquid.specific_enthalpy * (1 - share) + vapour.specific_enthalpy * share)
            try:
                return self.state(name, pressure, enthalpy, 10.0 ** self.random.uniform(-1, 1))
            except Unlucky:
                continue
        raise Unlucky

    # -- pieces ----------------------------------------------------------------------------------------------------

    def add(self, kind: str, ports: dict[str, tuple[str, ...]], **known: float) -> str:
        tag = f"E{len(self.equipment) + 1}"
        self.equipment[tag] = EquipmentDefinition(kind, ports)
        for name, value in known.items():
            self.truth[f"equipment.{tag}.{name}"] = value
        return tag

    def through(self, kind: str, inlet: str, pressure: float, enthalpy: float, **known: float) -> str:
        name, _, _, flow = self.states[inlet]
        outlet = self.state(name, pressure, enthalpy, flow)
        self.add(kind, {"inlet": (inlet,), "outlet": (outlet,)}, **known)
        return outlet

    def machine(self, inlet: str) -> str:
        name, pressure, enthalpy, flow = self.states[inlet]
        at = self.at(inlet)
        phase = str(at.phase)
        efficiency = self.random.uniform(0.6, 0.92)
        if phase == "liquid":
            kind, absorbs, ratio = "pump", True, self.random.uniform(1.5, 6.0)
        elif phase == "two-phase" or self.random.random() < 0.4:
            kind, absorbs, ratio = "turbine", False, self.random.uniform(1.5, 6.0)
        elif self.random.random() < 0.15:
            kind, absorbs, ratio = "fan", True, self.random.uniform(1.02, 1.08)
        else:
            kind, absorbs, ratio = "compressor", True, self.random.uniform(1.3, 4.0)
        last = pressure * ratio if absorbs else pressure / ratio
        ideal = fluid(name).at(pressure=last, specific_entropy=at.specific_entropy, errors="mask")
        change = float(ideal.specific_enthalpy) - enthalpy
        after = enthalpy + (change / efficiency if absorbs else change * efficiency)
        heat = 0.0
        if self.random.random() < 0.15:  # casing that loses heat
            heat = -self.random.uniform(0.01, 0.1) * abs(change) * flow
            after += heat / flow
        outlet = self.through(kind, inlet, last, after, heat=heat)
        tag = f"E{len(self.equipment)}"
        if self.random.random() < 0.2:
            self.truth[f"equipment.{tag}.mechanical_efficiency"] = self.random.uniform(0.9, 0.99)
            self.always.add(f"equipment.{tag}.mechanical_efficiency")
        return outlet

    def valve(self, inlet: str) -> str:
        _, pressure, enthalpy, _ = self.states[inlet]
        return self.through("throttling-valve", inlet, pressure * self.random.uniform(0.3, 0.9), enthalpy, heat=0.0)

    def exchange(self, inlet: str) -> str:
        _, pressure, enthalpy, _ = self.states[inlet]
        change = self.random.uniform(0.2, 3.0) * 1e5 * self.random.choice((-1.0, 1.0))
        kind = "heater" if change > 0 else "cooler"
        drop = self.random.choice((0.0, self.random.uniform(0.005, 0.05)))
        return self.through(kind, inlet, pressure * (1 - drop), enthalpy + change)

    def pipe(self, inlet: str) -> str:
        _, pressure, enthalpy, _ = self.states[inlet]
        loss = self.random.choice((0.0, self.random.uniform(0.5e3, 5e3)))
        return self.through("pipe", inlet, pressure * self.random.uniform(0.95, 0.999), enthalpy - loss)

    def mixer(self, first: str, second: str) -> str:
        (name, p1, h1, m1), (_, p2, h2, m2) = self.states[first], self.states[second]
        outlet = self.state(name, min(p1, p2), (m1 * h1 + m2 * h2) / (m1 + m2), m1 + m2)
        self.add("mixer", {"inlets": (first, second), "outlet": (outlet,)}, heat=0.0)
        return outlet

    def splitter(self, inlet: str, share: float | None = None) -> tuple[str, str]:
        name, pressure, enthalpy, flow = self.states[inlet]
        share = self.random.uniform(0.15, 0.85) if share is None else share
        first = self.state(name, pressure, enthalpy, share * flow)
        second = self.state(name, pressure, enthalpy, (1 - share) * flow)
        self.add("splitter", {"inlet": (inlet,), "outlets": (first, second)}, heat=0.0)
        return first, second

    def separator(self, inlet: str) -> tuple[str, str]:
        name, pressure, _, flow = self.states[inlet]
        quality = float(self.at(inlet).quality)
        liquid, vapour = fluid(name).saturation(pressure=pressure)
        identifiers = []
        for end, part in ((vapour, quality), (liquid, 1.0 - quality)):
            identifier = str(len(self.states) + 1)
            self.states[identifier] = (name, pressure, float(end.specific_enthalpy), part * flow)
            identifiers.append(identifier)
        ports = {"inlet": (inlet,), "vapour_outlet": (identifiers[0],), "liquid_outlet": (identifiers[1],)}
        self.add("separator", ports, heat=0.0)
        return identifiers[0], identifiers[1]

    def exchanger(self, hot: str, cold: str) -> tuple[str, str]:
        (hot_name, p1, h1, m1), (cold_name, p3, h3, m3) = self.states[hot], self.states[cold]
        t_hot, t_cold = float(self.at(hot).temperature), float(self.at(cold).temperature)
        if t_hot < t_cold:
            return self.exchanger(cold, hot)
        if t_hot - t_cold < 15.0:
            raise Unlucky
        p2, p4 = (p * (1 - self.random.choice((0.0, self.random.uniform(0.005, 0.03)))) for p in (p1, p3))
        coldest = float(fluid(hot_name).at(pressure=p2, temperature=t_cold, errors="mask").specific_enthalpy)
        hottest = float(fluid(cold_name).at(pressure=p4, temperature=t_hot, errors="mask").specific_enthalpy)
        ends = [end for end in (m1 * (h1 - coldest), m3 * (hottest - h3)) if np.isfinite(end)]
        most = min(ends, default=0.0)
        if not most > 0.0:
            raise Unlucky
        duty = self.random.uniform(0.2, 0.7) * float(most)
        hot_out = self.state(hot_name, p2, h1 - duty / m1, m1)
        cold_out = self.state(cold_name, p4, h3 + duty / m3, m3)
        ports = {"hot_inlet": (hot,), "hot_outlet": (hot_out,), "cold_inlet": (cold,), "cold_outlet": (cold_out,)}
        self.add("heat-exchanger", ports, heat=0.0)
        return hot_out, cold_out

    # -- the whole -------------------------------------------------------------------------------------------------

    def step(self) -> None:
        """One more piece at a random open stream."""
        stream = self.random.choice(self.open)
        choice = self.random.random()
        others = [other for other in self.open if other != stream]
        if others and choice < 0.22:
            other = self.random.choice(others)
            new = list(self.exchanger(stream, other))
            taken = [stream, other]
        elif choice < 0.36 and (
            alike := [other for other in others if self.states[other][0] == self.states[stream][0]]
        ):
            other = self.random.choice(alike)
            new, taken = [self.mixer(stream, other)], [stream, other]
        elif choice < 0.46:
            new, taken = list(self.splitter(stream)), [stream]
        elif 0.02 < self.at(stream).quality < 0.98 and choice < 0.7:
            new, taken = list(self.separator(stream)), [stream]
        else:
            piece = self.random.choice(
                (self.machine, self.machine, self.valve, self.exchange, self.exchange, self.pipe)
            )
            new, taken = [piece(stream)], [stream]
        for state in taken:
            self.open.remove(state)
        self.open += new

    def loop(self, closed: bool) -> None:
        """A stream that comes back: through a mixer and a splitter, or all of it."""
        start = self.feed()
        name, pressure, enthalpy, flow = self.states[start]
        if closed:
            current = start
        else:
            back = self.state(
                name, pressure, enthalpy * 1.0 + self.random.uniform(-3e4, 3e4), flow * self.random.uniform(0.2, 0.6)
            )
            current = self.mixer(start, back)
        for _ in range(self.random.randint(1, 3)):
            current = self.random.choice((self.machine, self.exchange, self.exchange))(current)
        while self.states[current][1] < pressure * 1.05:
            current = self.machine(current)
            if len(self.equipment) > self.wanted:
                raise Unlucky
        if not closed:
            first, current = self.splitter(current, 1.0 - self.states[back][3] / self.states[current][3])
            self.open.append(first)
        middle = self.through(
            "throttling-valve", current, pressure * self.random.choice((1.0, 1.02)), self.states[current][2], heat=0.0
        )
        end = start if closed else back
        kind = "heater" if self.states[end][2] > self.states[middle][2] else "cooler"
        self.add(kind, {"inlet": (middle,), "outlet": (end,)})

    def attempt(self, grow: Callable[[], None]) -> None:
        """Grow by something, trying again where a draw leads out of the range of a fluid."""
        for _ in range(60):
            kept = dict(self.states), dict(self.equipment), list(self.open), dict(self.truth), set(self.always)
            try:
                return grow()
            except (Unlucky, ReportgenError):
                self.states, self.equipment, self.open, self.truth, self.always = kept
        raise Unlucky

    def build(self) -> Network:
        if self.wanted >= 4 and self.random.random() < 0.5:
            self.attempt(lambda: self.loop(closed=self.random.random() < 0.4))
        while len(self.open) < self.random.randint(1, 3):
            self.open.append(self.feed())
        while len(self.equipment) < self.wanted:
            self.attempt(self.step)
        used = {state for piece in self.equipment.values() for states in piece.ports.values() for state in states}
        self.states = {state: entry for state, entry in self.states.items() if state in used}
        names = dict.fromkeys(entry[0] for entry in self.states.values())
        plant = Plant(
            {name: fluid(name) for name in names},
            {state: entry[0] for state, entry in self.states.items()},
            self.equipment,
        )
        truth = dict(SURROUNDINGS) | self.truth
        for state, (_, pressure, enthalpy, flow) in self.states.items():
            truth |= {
                f"states.{state}.pressure": pressure,
                f"states.{state}.specific_enthalpy": enthalpy,
                f"states.{state}.mass_flow": flow,
            }
        return Network(plant, truth, self.always)

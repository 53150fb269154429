"""Random networks of up to 30 pieces, built from known states; a random sufficient set of givens is kept, the rest solved.

    python -m tests.benchmarks.random_networks [COUNT] [FIRST]

prints how many networks gave back the states they were built from, and what became of the others. A network grows from
feeds by compressors, pumps, fans, turbines, valves, heaters, coolers, pipes, mixers, splitters, separators and heat
exchangers; recycles and closed loops are drawn too. States are computed here, piece by piece, from the property models
alone. What is given is chosen so that the rest is determined: with the derivatives of all relations at the known
states, columns of candidates are taken in random order into a basis of unknowns; those that depend on the ones before
are given. Sets for which a small error of a given grows by more than ``MOST_GROWTH`` are drawn again.
"""

from __future__ import annotations

import itertools
import sys
import time
from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cache
from random import Random
from typing import Any

import numpy as np

from reportgen import fluids
from reportgen.balances import EquipmentDefinition, Plant, kinds, solve
from reportgen.balances.plant import pieces_of
from reportgen.balances.relations import Balance
from reportgen.balances.network import OF_STATES, PropertyRelation
from reportgen.balances.structure import all_relations, build_network
from reportgen.errors import ReportgenError, SolutionError

SURROUNDINGS = {"surroundings.temperature": 288.15, "surroundings.pressure": 1.013e5}
#: Largest growth of an error from the givens to an unknown, both in their scales: 0.1 K may move a pressure by a tenth.
MOST_GROWTH = 100.0
#: States count as recovered within this part of their scale.
TOLERANCE = 1e-6
MOST_PIECES = 30

#: Fluid, range of pressures [Pa] and of temperatures [K] to begin in.
FLUIDS = {
    "water": (1e4, 60e5, 290.0, 800.0),
    "R134a": (1e5, 25e5, 250.0, 380.0),
    "CO2": (7e5, 60e5, 230.0, 450.0),
    "nitrogen": (1e5, 80e5, 200.0, 600.0),
    "air": (1e5, 30e5, 250.0, 1000.0),
}
SCALES = {
    "pressure": None,
    "specific_enthalpy": 1e5,
    "specific_entropy": 300.0,
    "temperature": 100.0,
    "quality": 0.3,
    "density": None,
    "superheat": 30.0,
    "subcooling": 30.0,
}


@cache
def fluid(name: str) -> Any:
    if name == "air":
        return fluids.ideal_gas({"N2": 0.7808, "O2": 0.2095, "Ar": 0.0097})
    return fluids.real_fluid(name)


WHY = Counter()


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


# -- what is given ---------------------------------------------------------------------------------------------------


def complete(network: Network) -> list[Any]:
    """Fill in the values of all variables from the states; the relations of the plant."""
    truth, plant = network.truth, network.plant
    wanted = ("quality", "density", "superheat", "subcooling")
    extra = set()
    for state, name in plant.states.items():
        found = fluid(name).at(
            pressure=truth[f"states.{state}.pressure"], specific_enthalpy=truth[f"states.{state}.specific_enthalpy"]
        )
        for key in ("temperature", "specific_entropy", *wanted):
            value = float(getattr(found, key))
            if np.isfinite(value) and not (key in ("superheat", "subcooling") and value < 1e-6):
                truth[f"states.{state}.{key}"] = value
                extra.add(f"states.{state}.{key}")
    given = frozenset(network.always | extra | set(SURROUNDINGS))
    pieces = pieces_of(plant, given)
    # A separator drops its own statement on a quality that is given; here none is.
    qualities = {
        f"states.{state}.quality"
        for piece in pieces.values()
        for state in piece.streams("out")
        if piece.kind.name == "separator"
    }
    given = given - qualities
    relations = all_relations(plant, pieces_of(plant, given), given)
    for _ in range(6):
        for relation in relations:
            missing = [path for path in relation.variables if path not in truth]
            if len(missing) != 1:
                continue
            if isinstance(relation, Balance):
                truth[missing[0]] = float(
                    relation.direct(
                        missing[0], {path: np.float64(truth[path]) for path in relation.variables if path in truth}
                    )
                )
            elif not isinstance(relation, PropertyRelation) and relation.output == missing[0]:
                truth[missing[0]] = _number(relation.evaluate, truth, relation.inputs)
            elif not isinstance(relation, PropertyRelation) and missing[0] in relation.inverses:
                inputs = relation.turned_inputs(missing[0])
                truth[missing[0]] = _number(relation.inverses[missing[0]].evaluate, truth, inputs)
    if any(path not in truth or not np.isfinite(truth[path]) for relation in relations for path in relation.variables):
        raise Unlucky
    return relations


def _number(evaluate: Any, truth: dict[str, float], inputs: tuple[str, ...]) -> float:
    return float(np.asarray(evaluate(*(np.array([truth[path]]) for path in inputs))).flat[0])


def scale(path: str, truth: dict[str, float], plant: Plant) -> float:
    """What counts as one unit of a variable."""
    name, value = path.rsplit(".", 1)[-1], abs(truth[path])
    if name in SCALES:
        return SCALES[name] or max(value, 1e-9)
    if name in ("power", "heat", "duty", "shaft_power", "mechanical_heat"):
        return max(value, 1e3)
    if name.endswith("pressure_drop"):
        return max(value, 1e4)
    return max(value, 1e-3)


def derivatives(relations: list[Any], truth: dict[str, float], plant: Plant) -> tuple[np.ndarray, list[str]]:
    """Derivatives of all relations by all variables at the known states, both scaled."""
    columns = list(
        dict.fromkeys(path for relation in relations for path in relation.variables if path not in SURROUNDINGS)
    )
    index = {path: number for number, path in enumerate(columns)}
    matrix = np.zeros((len(relations), len(columns)))
    values = {path: np.array([value]) for path, value in truth.items()}
    for row, relation in enumerate(relations):
        if isinstance(relation, Balance):
            for path in relation.variables:
                matrix[row, index[path]] = float(np.asarray(relation.derivative(path, values)).flat[0]) * scale(
                    path, truth, plant
                )
            continue
        if isinstance(relation, PropertyRelation):
            inputs = [f"states.{relation.state}.{name}" for name in ("pressure", "specific_enthalpy")]
            output, model = relation.path, fluid(plant.states[relation.state])

            def evaluate(p: Any, h: Any, model: Any = model, name: str = relation.output) -> Any:
                return getattr(model.at(pressure=p, specific_enthalpy=h, errors="mask"), name)

            counted = [f"states.{relation.state}.{name}" for name in relation.inputs]
        else:
            inputs, output, evaluate = list(relation.inputs), relation.output, relation.evaluate
            counted = inputs
        matrix[row, index[output]] += scale(output, truth, plant)
        for path in counted:
            if path in SURROUNDINGS:
                continue
            step = 1e-5 * scale(path, truth, plant)
            ends = {}
            for sign in (1.0, 0.0, -1.0):
                arrays = [values[other] + (sign * step if other == path else 0.0) for other in inputs]
                ends[sign] = float(np.asarray(evaluate(*arrays)).flat[0])
            found = [sign for sign, value in ends.items() if np.isfinite(value)]
            if len(found) < 2:
                raise Unlucky
            # At the edge of the dome only one side has a quality, and a temperature that says nothing is held for one.
            slopes = [(ends[a] - ends[b]) / (1e-5 * (a - b)) for a, b in itertools.pairwise(found)]
            matrix[row, index[path]] -= min(slopes, key=abs) if output.endswith("temperature") else np.mean(slopes)
    norms = np.abs(matrix).max(axis=1)
    return matrix / np.where(norms > 0, norms, 1.0)[:, None], columns


def candidates(network: Network, columns: list[str]) -> list[str]:
    """Variables a calculation file may give."""
    pieces = {tag: kinds()[definition.kind] for tag, definition in network.plant.equipment.items()}
    allowed = {f"equipment.{tag}.{parameter.name}" for tag, kind in pieces.items() for parameter in kind.parameters}
    allowed |= {f"states.{state}.{name}" for state in network.plant.states for name in OF_STATES}
    return [path for path in columns if path in allowed]


#: How readily a quantity is given: engineers know pressures, temperatures and flows.
WEIGHTS = {
    "pressure": 4.0,
    "temperature": 4.0,
    "mass_flow": 3.0,
    "specific_entropy": 0.3,
    "specific_enthalpy": 0.5,
    "density": 0.3,
}


def _kind(network: Network, path: str) -> str:
    return network.plant.equipment[path.split(".")[1]].kind


def draw_givens(network: Network, random: Random) -> dict[str, float]:
    """A random sufficient set of givens, without one to spare."""
    relations = complete(network)
    matrix, columns = derivatives(relations, network.truth, network.plant)
    index = {path: number for number, path in enumerate(columns)}
    possible = [path for path in candidates(network, columns) if path not in network.always]
    # Those last in this order are the likeliest to be given.
    zero = {path for path in possible if path.endswith((".heat", "pressure_drop")) and abs(network.truth[path]) < 1e-6}

    def weight(path: str) -> float:
        name = path.rsplit(".", 1)[-1]
        losses = name.endswith("pressure_drop") or (name == "heat" and _kind(network, path) not in ("heater", "cooler"))
        return (
            30.0 if losses and path not in zero else WEIGHTS.get(name, 1.0)
        )  # what is left out would be taken as none

    possible.sort(key=lambda path: random.random() ** (1.0 / weight(path)))
    fixed = set(possible) | network.always
    first = [path for path in columns if path not in fixed]
    assumed = {path for path in zero if random.random() < 0.9}  # left to the program to assume
    basis: list[np.ndarray] = []
    unknown: list[str] = []
    for path in [*first, *(path for path in possible if path not in assumed)]:
        vector = matrix[:, index[path]].copy()
        size = np.linalg.norm(vector)
        if size == 0.0:
            continue
        for _ in range(2):
            for other in basis:
                vector -= (other @ vector) * other
        left = np.linalg.norm(vector)
        if left > (1e-3 if path in fixed else 1e-9) * size:
            basis.append(vector / left)
            unknown.append(path)
        elif path in first:
            raise Unlucky
    chosen = set(unknown)
    givens = {path: network.truth[path] for path in columns if path not in chosen and path not in assumed}
    return {**SURROUNDINGS, **givens}


def growth(network: Network, givens: dict[str, float]) -> float:
    """Largest change of an unknown for a change of one given, both in their scales, with what the program assumes."""
    pieces = pieces_of(network.plant, frozenset(givens))
    found = build_network(network.plant, pieces, frozenset(givens))
    relations = [relation for block in found.blocks for relation in block.relations]
    if not all(_holds(relation, network.truth) for relation in relations):
        raise Unlucky
    matrix, columns = derivatives(relations, network.truth, network.plant)
    known = np.array([path in givens for path in columns])
    return float(np.abs(np.linalg.solve(matrix[:, ~known], matrix[:, known])).max(initial=0.0))


def draw(seed: int) -> tuple[Network, dict[str, float]]:
    """A network with givens that determine it. Raises Unlucky when none is found."""
    random = Random(seed)
    pieces = random.randint(1, MOST_PIECES)
    for _ in range(200):
        try:
            network = Builder(random, pieces).build()
            givens = draw_givens(network, random)
            if growth(network, givens) < MOST_GROWTH:
                return network, givens
            WHY["growth"] += 1
        except (Unlucky, ReportgenError, np.linalg.LinAlgError) as e:
            WHY[type(e).__name__ + str(e)[:200]] += 1
            continue
    raise Unlucky


def _holds(relation: Any, truth: dict[str, float]) -> bool:
    """Whether a relation is true of the known states; those that an assumption of the program adds or rewrites may not."""
    if isinstance(relation, PropertyRelation):
        return True
    if not isinstance(relation, Balance):
        found = _number(relation.evaluate, truth, relation.inputs)
        return abs(found - truth[relation.output]) <= 1e-9 * max(abs(found), 1e-3)
    values = {path: np.float64(value) for path, value in truth.items()}
    size = max(abs(float(term.value(values))) for term in relation.terms)
    return abs(float(relation.residual(values))) <= 1e-9 * max(size, 1e-3 if len(relation.terms) > 1 else 1e9)


def judge(network: Network, givens: dict[str, float]) -> tuple[str, str]:
    """ "recovered", "refused" with its message, or "wrong" with what differs."""
    try:
        solution = solve(network.plant, givens)
    except SolutionError as error:
        return "refused", str(error)
    for path, value in network.truth.items():
        if path.startswith("states.") and path.rsplit(".", 1)[-1] in ("pressure", "specific_enthalpy", "mass_flow"):
            found = float(solution.values[path][0])
            if not abs(found - value) <= TOLERANCE * max(abs(value), scale(path, network.truth, network.plant)):
                return "wrong", f"{path}: {found!r} instead of {value!r}"
    return "recovered", ""


def main(count: int = 2000, first: int = 0) -> None:
    tally: Counter[str] = Counter()
    sizes, began = [], time.perf_counter()
    spent = 0.0
    for seed in range(first, first + count):
        network, givens = draw(seed)
        sizes.append(len(network.plant.equipment))
        start = time.perf_counter()
        verdict, text = judge(network, givens)
        used = time.perf_counter() - start
        spent += used
        tally[verdict] += 1
        if verdict != "recovered" or used > 5.0:
            print(f"{seed}: {len(network.plant.equipment)} pieces, {verdict} after {used:.1f} s. {text}", flush=True)
    print(f"{count} networks of {min(sizes)} to {max(sizes)} pieces, {np.mean(sizes):.1f} on average")
    print(WHY.most_common(12))
    print(", ".join(f"{verdict} {number}" for verdict, number in sorted(tally.items())))
    print(
        f"recovered {100 * tally['recovered'] / count:.2f} %; {spent:.0f} s solving, {time.perf_counter() - began:.0f} s in all"
    )


if __name__ == "__main__":
    main(*(int(argument) for argument in sys.argv[1:]))

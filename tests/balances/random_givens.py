"""What is given of a random plant: a random sufficient set, and whether the solver gets back what it was drawn from.

With the derivatives of all relations at the known states, columns of candidates are taken in random order into a basis
of unknowns; those that depend on the ones before are given. A set is well posed when no unknown changes by more than
``MOST_GROWTH`` for a given, both in their scales (100 K, the pressure itself, …): a tenth of a kelvin may then move a
pressure by a tenth. Where a set is not, the unknown that is worst is given too, and the basis taken anew.
"""

from __future__ import annotations

import re
from random import Random
from typing import Any

import numpy as np

from reportgen.balances import kinds, solve
from reportgen.balances.network import OF_STATES, PropertyRelation
from reportgen.balances.plant import pieces_of
from reportgen.balances.relations import Balance
from reportgen.balances.structure import all_relations, build_network
from reportgen.errors import ReportgenError, SolutionError
from tests.balances.cases import SURROUNDINGS
from tests.balances.random_plants import MOST_PIECES, Builder, Network, Unlucky, fluid

#: Largest growth of an error from the givens to an unknown, both in their scales.
MOST_GROWTH = 100.0
#: States count as recovered within this part of their scale.
TOLERANCE = 1e-6
#: Sizes of what counts as one unit; None: the value itself.
SCALES = {
    "pressure": None,
    "density": None,
    "specific_enthalpy": 1e5,
    "specific_entropy": 300.0,
    "temperature": 100.0,
    "quality": 0.3,
    "superheat": 30.0,
    "subcooling": 30.0,
}
#: How readily a quantity is given: engineers know pressures, temperatures and flows.
WEIGHTS = {
    "pressure": 4.0,
    "temperature": 4.0,
    "mass_flow": 3.0,
    "specific_entropy": 0.3,
    "specific_enthalpy": 0.5,
    "density": 0.3,
}
#: Displacements for differences, in parts of the scale of a variable.
SIDES = np.array([1.0, 0.0, -1.0]) * 1e-5
Row = dict[str, float]


def scale(path: str, truth: dict[str, float]) -> float:
    """What counts as one unit of a variable [SI]."""
    name, value = path.rsplit(".", 1)[-1], abs(truth[path])
    if name in SCALES:
        return SCALES[name] or max(value, 1e-9)
    if name in ("power", "heat", "duty", "shaft_power", "mechanical_heat"):
        return max(value, 1e3)
    return max(value, 1e4 if name.endswith("pressure_drop") else 1e-3)


def complete(network: Network) -> list[Any]:
    """Fill in the values of all variables from the states; the relations of the plant."""
    truth, plant = network.truth, network.plant
    properties = set()
    for name in plant.fluids:
        states = [state for state in plant.states if plant.states[state] == name]
        pair = {key: [truth[f"states.{state}.{key}"] for state in states] for key in ("pressure", "specific_enthalpy")}
        found = fluid(name).at(**pair)
        for key in ("temperature", "specific_entropy", "quality", "density", "superheat", "subcooling"):
            for state, value in zip(states, np.asarray(getattr(found, key), float), strict=True):
                if np.isfinite(value) and not (key in ("superheat", "subcooling") and value < 1e-6):
                    truth[f"states.{state}.{key}"] = float(value)
                    properties.add(f"states.{state}.{key}")
    # A separator drops its own statement on a quality that is given; here none of its outlets' is.
    for piece in plant.equipment.values():
        if piece.kind == "separator":
            properties -= {f"states.{piece.ports[port][0]}.quality" for port in ("vapour_outlet", "liquid_outlet")}
    given = frozenset(network.always | properties | set(SURROUNDINGS))
    relations = all_relations(plant, pieces_of(plant, given), given)
    for _ in range(6):
        for relation in relations:
            missing = [path for path in relation.variables if path not in truth]
            if len(missing) == 1 and not isinstance(relation, PropertyRelation):
                _fill(relation, missing[0], truth)
    if any(path not in truth or not np.isfinite(truth[path]) for relation in relations for path in relation.variables):
        raise Unlucky
    return relations


def _fill(relation: Any, missing: str, truth: dict[str, float]) -> None:
    if isinstance(relation, Balance):
        values = {path: np.float64(truth[path]) for path in relation.variables if path in truth}
        truth[missing] = float(relation.direct(missing, values))
    elif relation.output == missing:
        truth[missing] = _number(relation.evaluate, truth, relation.inputs)
    elif missing in relation.inverses:
        truth[missing] = _number(relation.inverses[missing].evaluate, truth, relation.turned_inputs(missing))


def _number(evaluate: Any, truth: dict[str, float], inputs: tuple[str, ...]) -> float:
    return float(np.asarray(evaluate(*(np.array([truth[path]]) for path in inputs))).flat[0])


class Derivatives:
    """Derivatives of relations by variables at the known states, both scaled; rows are kept for the next set."""

    def __init__(self, network: Network) -> None:
        self.network, self.truth = network, network.truth
        self.rows: dict[Any, Row] = {}

    def matrix(self, relations: list[Any]) -> tuple[np.ndarray, list[str]]:
        """One row a relation, its largest entry 1; one column a variable."""
        every = (path for relation in relations for path in relation.variables if path not in SURROUNDINGS)
        columns = list(dict.fromkeys(every))
        index = {path: number for number, path in enumerate(columns)}
        self._of_states([relation for relation in relations if isinstance(relation, PropertyRelation)])
        matrix = np.zeros((len(relations), len(columns)))
        for number, relation in enumerate(relations):
            key = (relation.key, relation.variables)
            if key not in self.rows:
                self.rows[key] = self._balance(relation) if isinstance(relation, Balance) else self._formula(relation)
            for path, slope in self.rows[key].items():
                if path in index:
                    matrix[number, index[path]] += slope
        norms = np.abs(matrix).max(axis=1)
        return matrix / np.where(norms > 0, norms, 1.0)[:, None], columns

    def _balance(self, relation: Balance) -> Row:
        values = {path: np.float64(self.truth[path]) for path in relation.variables}
        return {path: float(relation.derivative(path, values)) * scale(path, self.truth) for path in relation.variables}

    def _formula(self, relation: Any) -> Row:
        """All displaced points of a formula in one call."""
        moved = [path for path in relation.inputs if path not in SURROUNDINGS]
        arrays = [np.full(len(moved) * SIDES.size, self.truth[path]) for path in relation.inputs]
        for number, path in enumerate(moved):
            part = slice(number * SIDES.size, (number + 1) * SIDES.size)
            arrays[relation.inputs.index(path)][part] += SIDES * scale(path, self.truth)
        ends = np.broadcast_to(relation.evaluate(*arrays), arrays[0].shape).reshape(len(moved), SIDES.size)
        row = {path: -_slope(ends[number], False) for number, path in enumerate(moved)}
        row[relation.output] = row.get(relation.output, 0.0) + scale(relation.output, self.truth)
        return row

    def _of_states(self, relations: list[PropertyRelation]) -> None:
        """All displaced points of the states of a fluid in one call."""
        plant, new = self.network.plant, [r for r in relations if (r.key, r.variables) not in self.rows]
        for name in dict.fromkeys(plant.states[relation.state] for relation in new):
            states = list(dict.fromkeys(r.state for r in new if plant.states[r.state] == name))
            pairs = []
            for state in states:
                paths = [f"states.{state}.{part}" for part in ("pressure", "specific_enthalpy")]
                for moved in range(2):
                    points = np.array([[self.truth[path]] * SIDES.size for path in paths])
                    points[moved] += SIDES * scale(paths[moved], self.truth)
                    pairs.append(points)
            pressure, enthalpy = np.concatenate(pairs, axis=1)
            result = fluid(name).at(pressure=pressure, specific_enthalpy=enthalpy, errors="mask")
            for relation in (r for r in new if r.state in states):
                ends = np.asarray(getattr(result, relation.output)).reshape(len(states), 2, SIDES.size)
                own, level = ends[states.index(relation.state)], relation.output == "temperature"
                row = {relation.path: scale(relation.path, self.truth)}
                for moved, part in enumerate(("pressure", "specific_enthalpy")):
                    if part in relation.inputs:
                        row[f"states.{relation.state}.{part}"] = -_slope(own[moved], level)
                self.rows[relation.key, relation.variables] = row


def _slope(ends: np.ndarray, level: bool) -> float:
    """Derivative from values at SIDES. At the edge of the dome only one side has a quality; a temperature that says
    nothing on one side (``level``) is held for one that says nothing.
    """
    found = np.flatnonzero(np.isfinite(ends))
    if found.size < 2:
        raise Unlucky
    slopes = np.diff(ends[found]) / np.diff(SIDES[found])
    return float(min(slopes, key=abs) if level else slopes.mean())


class Drawing:
    """Draws sets of givens for one network."""

    def __init__(self, network: Network) -> None:
        self.network = network
        self.relations = complete(network)
        self.derivatives = Derivatives(network)
        self._true: dict[Any, bool] = {}
        plant = network.plant
        allowed = {f"states.{state}.{name}" for state in plant.states for name in OF_STATES}
        for tag, definition in plant.equipment.items():
            allowed |= {f"equipment.{tag}.{parameter.name}" for parameter in kinds()[definition.kind].parameters}
        self.matrix, self.columns = self.derivatives.matrix(self.relations)
        self.possible = [path for path in self.columns if path in allowed and path not in network.always]
        #: Heats and pressure losses of nothing, which the program would assume; in order, since draws go through them.
        self.nothing = [
            path
            for path in self.possible
            if path.endswith((".heat", "pressure_drop")) and abs(network.truth[path]) < 1e-6
        ]

    def draw(self, random: Random) -> dict[str, float]:
        """A random sufficient and well-posed set."""
        assumed = {path for path in self.nothing if random.random() < 0.9}
        order = sorted(self.possible, key=lambda path: random.random() ** (1.0 / self._weight(path)))
        forced: list[str] = []
        for _ in range(15):
            givens = self._givens([path for path in order if path not in forced] + forced, assumed)
            worst = self.worst(givens)
            if worst is None:
                return givens
            if worst not in self.possible or worst in forced:
                raise Unlucky
            forced.append(worst)
        raise Unlucky

    def _weight(self, path: str) -> float:
        """Losses are given nearly always: what is left out would be taken for none."""
        name = path.rsplit(".", 1)[-1]
        kind = "" if path.startswith("states.") else self.network.plant.equipment[path.split(".")[1]].kind
        losses = name.endswith("pressure_drop") or (name == "heat" and kind not in ("heater", "cooler"))
        return 30.0 if losses and path not in self.nothing else WEIGHTS.get(name, 1.0)

    def _givens(self, order: list[str], assumed: set[str]) -> dict[str, float]:
        """Candidates that depend on those before them in the order."""
        index = {path: number for number, path in enumerate(self.columns)}
        fixed = set(order) | self.network.always
        first = [path for path in self.columns if path not in fixed]
        basis = np.zeros((0, self.matrix.shape[0]))
        unknown = set()
        for path in [*first, *(path for path in order if path not in assumed)]:
            vector = self.matrix[:, index[path]].copy()
            size = np.linalg.norm(vector)
            for _ in range(2):
                vector -= (basis @ vector) @ basis
            left = np.linalg.norm(vector)
            if size > 0.0 and left > (1e-3 if path in fixed else 1e-9) * size:
                basis = np.vstack([basis, vector / left])
                unknown.add(path)
            elif path in first:
                raise Unlucky
        truth = self.network.truth
        return SURROUNDINGS | {p: truth[p] for p in self.columns if p not in unknown and p not in assumed}

    def worst(self, givens: dict[str, float]) -> str | None:
        """The unknown that an error of a given moves most, None where all stay within MOST_GROWTH.

        Unlucky where the program would assume what is not so, or where two states have what is given.
        """
        plant, truth = self.network.plant, self.network.truth
        if any(self._is_shared(state, givens) for state in plant.states):
            raise Unlucky
        found = build_network(plant, pieces_of(plant, frozenset(givens)), frozenset(givens))
        relations = [relation for block in found.blocks for relation in block.relations]
        for relation in relations:
            key = (relation.key, relation.variables)
            if key not in self._true:
                self._true[key] = _holds(relation, truth)
            if not self._true[key]:
                raise Unlucky
        matrix, columns = self.derivatives.matrix(relations)
        known = np.array([path in givens for path in columns])
        growth = np.abs(np.linalg.solve(matrix[:, ~known], matrix[:, known])).max(axis=1, initial=0.0)
        if growth.max(initial=0.0) < MOST_GROWTH:
            return None
        return [path for path, given in zip(columns, known, strict=True) if not given][int(growth.argmax())]

    def _is_shared(self, state: str, givens: dict[str, float]) -> bool:
        """Whether a state is given by a temperature and an enthalpy that another state, at high pressure, has too."""
        pair = {name: givens.get(f"states.{state}.{name}") for name in ("temperature", "specific_enthalpy")}
        if None in pair.values() or f"states.{state}.pressure" in givens:
            return False
        model = fluid(self.network.plant.states[state])
        return model.kind != "ideal-gas" and not np.isfinite(model.at(errors="mask", **pair).pressure)


def _shows_another(message: str, truth: dict[str, float]) -> bool:
    found = re.search(r"more than one common solution: (\S+) may be ([\d.e+-]+ bar(?: or [\d.e+-]+ bar)+);", message)
    if found is None:
        return False
    pressures = [float(number.removesuffix(" bar")) * 1e5 for number in found[2].split(" or ")]
    return any(abs(pressure - truth[found[1]]) < 1e-4 * truth[found[1]] for pressure in pressures)


def _holds(relation: Any, truth: dict[str, float]) -> bool:
    """Whether a relation is true of the known states; those that an assumption adds or rewrites may not be."""
    if isinstance(relation, PropertyRelation):
        return True
    if not isinstance(relation, Balance):
        found = _number(relation.evaluate, truth, relation.inputs)
        return abs(found - truth[relation.output]) <= 1e-9 * max(abs(found), 1e-3)
    values = {path: np.float64(truth[path]) for path in relation.variables}
    size = max(abs(float(term.value(values))) for term in relation.terms)
    return abs(float(relation.residual(values))) <= 1e-9 * max(size, 1e-3 if len(relation.terms) > 1 else 1e9)


def draw(seed: int, most: int = MOST_PIECES) -> tuple[Network, dict[str, float]]:
    """A network of up to ``most`` pieces with givens that determine it; equal seeds give equal ones."""
    random = Random(seed)
    pieces = random.randint(1, most)
    while True:
        try:
            network = Builder(random, pieces).build()
            drawing = Drawing(network)
        except (Unlucky, ReportgenError):
            continue
        for _ in range(4):
            try:
                return network, drawing.draw(random)
            except (Unlucky, ReportgenError, np.linalg.LinAlgError):
                continue


def judge(network: Network, givens: dict[str, float]) -> tuple[str, str]:
    """``recovered``; ``refused`` with the message; ``wrong`` with what differs; or ``not unique``: the program shows a
    second set of values that satisfies everything given, beside the one from which the network was built.
    """
    try:
        solution = solve(network.plant, givens)
    except SolutionError as error:
        return ("not unique" if _shows_another(str(error), network.truth) else "refused"), str(error)
    for path, value in network.truth.items():
        if path.startswith("states.") and path.endswith((".pressure", ".specific_enthalpy", ".mass_flow")):
            found = float(solution.values[path][0])
            if not abs(found - value) <= TOLERANCE * max(abs(value), scale(path, network.truth)):
                return "wrong", f"{path}: {found!r} instead of {value!r}"
    return "recovered", ""

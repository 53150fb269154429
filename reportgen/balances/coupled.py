r"""Several relations as one system of equations, on all columns of the sample axis at once.

A state in the system is carried by its pressure and specific enthalpy; its other properties, and formulae whose value
is not asked for elsewhere, follow from these and are eliminated. What remains are residuals r(x) = 0 of the tear
variables x. Balances have exact derivatives, properties and formulae are differenced. States of one fluid are stacked
along the sample axis, with the displaced points of their derivatives, so that all of them cost one property call.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.balances.bundles import Bundle, Model, bundles
from reportgen.balances.network import AnyRelation, PropertyRelation
from reportgen.balances.relations import Balance, Formula

__all__ = ["Coupled", "Derivatives", "typical"]

Array = NDArray[np.float64]
#: Derivatives of one value with respect to tears, by path.
Derivatives = dict[str, Array]

#: Relative displacement for differences: the square root of the rounding of property models (about 1e-13).
_DISPLACEMENT = 1e-6
_SATURATION = ("quality", "superheat", "subcooling")
#: Ratios to a pressure and number of temperatures that are tried in the place of a start that does not exist.
_RATIOS_TRIED = np.concatenate([[1.0], 10.0 ** np.linspace(-3.0, 3.0, 49)])
_LEVELS_TRIED = 24
#: Systems above this size are started as they are; times that a start is projected.
_MOST_PROJECTED, _PROJECTIONS = 150, 40

#: Beginnings of the paths of what pieces and processes give.
_OF_PIECES = ("equipment.", "processes.")
#: Sizes below which a variable counts as small, in SI units, by the last part of its path.
_TYPICAL = {
    "pressure": 1e3,
    "specific_enthalpy": 1e5,
    "specific_entropy": 1e3,
    "temperature": 100.0,
    "mass_flow": 1e-3,
    "volume_flow": 1e-3,
    "molar_flow": 1e-2,
    "velocity": 1.0,
    "power": 1e2,
    "shaft_power": 1e2,
    "heat": 1e2,
    "duty": 1e2,
    "work": 1e2,
    "stirring_work": 1e2,
    "mass": 1e-6,
    "volume": 1e-6,
    "specific_volume": 1e-6,
    "specific_internal_energy": 1e5,
    "pressure_drop": 1e3,
    "isothermal_work": 1e4,
    "isentropic_outlet_enthalpy": 1e5,
}


def typical(path: str) -> float:
    """Size [SI] below which a variable counts as small."""
    return _TYPICAL.get(path.rsplit(".", 1)[-1], 1.0)


class Coupled:
    """A block of relations with as many unknowns.

    Parameters
    ----------
    relations, unknowns : the block.
    values : known arrays of shape (N,), by path.
    fluid_of : fluid id of a state id.
    model : property model of a fluid id, for a mixture from the masses of its gases.
    """

    def __init__(
        self,
        relations: Sequence[AnyRelation],
        unknowns: Sequence[str],
        values: Mapping[str, Any],
        fluid_of: Callable[[str], str],
        model: Model,
    ) -> None:
        free = set(unknowns)
        self.outputs: dict[str, list[str]] = {}
        self.carriers = _carriers(relations, free)
        self.formulae: list[Formula] = []
        self.residuals: list[AnyRelation] = []
        explicit: set[str] = set()
        for relation in relations:
            if isinstance(relation, PropertyRelation):
                if relation.output == self.carriers[relation.state][1]:
                    # The known property carries the state; its relation gives the enthalpy instead.
                    relation = PropertyRelation(relation.state, "specific_enthalpy", beside=relation.beside)
                self.outputs.setdefault(relation.state, []).append(relation.output)
                if relation.path in free:
                    explicit.add(relation.path)
                    continue
            elif isinstance(relation, Formula) and relation.output in free and relation.output.startswith(_OF_PIECES):
                explicit.add(relation.output)
                self.formulae.append(relation)
                continue
            self.residuals.append(_turned(relation, free) if isinstance(relation, Formula) else relation)
        beside = {item.state: item.beside for item in relations if isinstance(item, PropertyRelation)}
        self.bundles = bundles(self.outputs, self.carriers, beside, fluid_of, model)
        self.tears = [path for path in unknowns if path not in explicit]
        self.index = {path: number for number, path in enumerate(self.tears)}
        involved = {path for relation in relations for path in relation.variables}
        self.known: dict[str, Array] = {path: values[path] for path in involved if path in values}
        for state in self.outputs:
            # The temperature of an ideal gas may be asked for before its pressure is known; any pressure will do.
            pressure = f"states.{state}.pressure"
            if pressure not in free:
                self.known[pressure] = values.get(pressure, values["surroundings.pressure"])

    @cached_property
    def is_linear(self) -> bool:
        """True when one step of Newton's method is exact."""
        return not self.outputs and all(
            isinstance(relation, Balance) and relation.is_linear_in(self.tears) for relation in self.residuals
        )

    def complete(self, x: Array, columns: NDArray[np.intp]) -> tuple[dict[str, Array], dict[str, Array]]:
        """Values of tears, properties and formulae; and what the properties come to, known ones too. x: (T, M)."""
        values = {path: array[columns] for path, array in self.known.items()}
        values.update(zip(self.tears, x, strict=True))
        computed: dict[str, Array] = {}
        for bundle in self.bundles:
            paths = [bundle.inputs(state) for state in bundle.states]
            inputs = {name: [values[each[name]] for each in paths] for name in paths[0]}
            for name, arrays in bundle.evaluate(inputs).items():
                for state, array in zip(bundle.states, arrays, strict=True):
                    if name in self.outputs[state]:
                        computed[f"states.{state}.{name}"] = array
        for path, array in computed.items():
            values.setdefault(path, array)
        for formula in self.formulae:
            values[formula.output] = formula.evaluate(*(values[path] for path in formula.inputs))
        return values, computed

    def consistent(self, x: Array) -> Array:
        """The start x, shape (T, 1), moved as little as can be to where all balances hold that are linear in the tears.

        Pressures stay above half of what they were: alternating projections, after which what is left is small.
        """
        rows = [
            relation
            for relation in self.residuals
            if isinstance(relation, Balance)
            and all(path in self.known or path in self.index for path in relation.variables)
            and relation.is_linear_in(self.tears)
        ]
        if not rows or len(self.tears) > _MOST_PROJECTED:
            return x
        values = {path: array[:1] for path, array in self.known.items()}
        scale = np.maximum(np.abs(x[:, 0]), [typical(path) for path in self.tears])
        matrix = np.zeros((len(rows), len(self.tears)))
        here = values | {path: x[number] for path, number in self.index.items()}
        for number, relation in enumerate(rows):
            for path in relation.variables:
                if path in self.index:
                    matrix[number, self.index[path]] = float(np.asarray(relation.derivative(path, here)).flat[0])
        matrix = matrix * scale
        right = -np.array([float(np.asarray(relation.residual(here)).flat[0]) for relation in rows])
        if not (np.isfinite(matrix).all() and np.isfinite(right).all()):
            return x
        inverse = np.linalg.pinv(matrix, rcond=1e-10)
        lowest = np.where([path.endswith(".pressure") for path in self.tears], -0.5 * x[:, 0] / scale, -np.inf)
        moved = np.zeros(len(self.tears))
        for _ in range(_PROJECTIONS):
            moved = np.maximum(moved + inverse @ (right - matrix @ moved), lowest)
        moved += inverse @ (right - matrix @ moved)
        return x + (moved * scale)[:, None] if np.all(moved >= 1.8 * lowest) else x

    def within_range(self, x: Array) -> Array:
        """The start x, shape (T, 1), with states that do not exist moved to the nearest that do.

        Tried are pressures up to a thousand times away, and the enthalpies at temperatures over the whole range.
        """
        x = x.copy()
        with np.errstate(all="ignore"):
            values, computed = self.complete(x, np.array([0]))
            for bundle in self.bundles:
                for state in bundle.states:
                    names = [f"states.{state}.{name}" for name in self.outputs[state]]
                    if not np.isfinite([computed[path][0] for path in names]).all():
                        self._move(x, bundle, state, values)
        return x

    def _move(self, x: Array, bundle: Bundle, state: str, values: Mapping[str, Array]) -> None:
        paths = [f"states.{state}.{name}" for name in bundle.pair]
        here = [float(values[path][0]) for path in paths]
        pressures = abs(here[0]) * _RATIOS_TRIED if paths[0] in self.index else np.array([here[0]])
        seconds = np.array([here[1]])
        if paths[1] in self.index and bundle.pair[1] == "specific_enthalpy":
            fluid = bundle.model(bundle.fluid, values)
            limits = fluid.limits
            levels = np.linspace(limits.minimum_temperature, limits.maximum_temperature, _LEVELS_TRIED + 2)[1:-1]
            grid = [np.repeat(pressures, levels.size), np.tile(levels, pressures.size)]
            seconds = fluid.at(errors="mask", pressure=grid[0], temperature=grid[1]).specific_enthalpy
            seconds = np.concatenate([seconds, np.full(pressures.size, here[1])])
            pressures = np.concatenate([grid[0], pressures])
        tried = np.broadcast_arrays(pressures, seconds)
        beside = {path: [np.full(tried[0].shape, values[path][0])] for path in bundle.beside}
        found = bundle.evaluate({name: [array] for name, array in zip(bundle.pair, tried, strict=True)} | beside)
        good = np.all([np.isfinite(found[name][0]) for name in self.outputs[state]], axis=0)
        if good.any():
            away = np.abs(np.log(tried[0] / abs(here[0]))) + np.abs(tried[1] - here[1]) / typical(paths[1])
            best = int(np.argmin(np.where(good, away, np.inf)))
            for path, array in zip(paths, tried, strict=True):
                if path in self.index:
                    x[self.index[path]] = array[best]

    @cached_property
    def loose_pressures(self) -> list[str]:
        """Unknown pressures of states of which a temperature and nothing else is known: more than one may have it."""
        return [
            f"states.{state}.pressure"
            for bundle in self.bundles
            for state in bundle.states
            if f"states.{state}.pressure" in self.index
            and f"states.{state}.temperature" in self.known
            and set(self.outputs[state]) <= {"temperature", "specific_enthalpy"}
            and bundle.can_saturate
        ]

    def residual(self, x: Array, columns: NDArray[np.intp]) -> tuple[Array, dict[str, Array]]:
        """Residuals, shape (R, M), and the completed values; NaN where a property does not exist."""
        with np.errstate(all="ignore"):
            values, computed = self.complete(x, columns)
            rows = []
            for relation in self.residuals:
                if isinstance(relation, Balance):
                    row = relation.residual(values)
                elif isinstance(relation, Formula):
                    row = values[relation.output] - relation.evaluate(*(values[path] for path in relation.inputs))
                else:
                    row = values[relation.path] - computed[relation.path]
                rows.append(np.broadcast_to(row, columns.shape))
        return np.array(rows), values

    def jacobian(self, values: Mapping[str, Array]) -> list[Derivatives]:
        """For each residual its derivatives with respect to the tears."""
        with np.errstate(all="ignore"):
            return self._rows(values)

    def _rows(self, values: Mapping[str, Array]) -> list[Derivatives]:
        of_property, chain = self._chain(values)
        rows: list[Derivatives] = []
        for relation in self.residuals:
            row: Derivatives = {}
            if isinstance(relation, Balance):
                for path in relation.variables:
                    if path in chain:
                        _accumulate(row, chain[path], relation.derivative(path, values))
            else:
                path = relation.path if isinstance(relation, PropertyRelation) else relation.output
                _accumulate(row, chain.get(path, {}), 1.0)
                slopes = (
                    of_property[path] if isinstance(relation, PropertyRelation) else _slopes(relation, values, chain)
                )
                _accumulate(row, slopes, -1.0)
            rows.append(row)
        return rows

    def _chain(self, values: Mapping[str, Array]) -> tuple[dict[str, Derivatives], dict[str, Derivatives]]:
        """Derivatives with respect to the tears, by path: of properties, and of all that depends on tears."""
        ones = np.ones_like(next(iter(values.values())))
        chain: dict[str, Derivatives] = {path: {path: ones} for path in self.tears}
        of_property: dict[str, Derivatives] = {}
        for bundle in self.bundles:
            for path, slopes in self._of_bundle(bundle, values, chain).items():
                of_property[path] = slopes
                if path not in self.known and path not in self.index:
                    chain[path] = slopes
        for formula in self.formulae:
            chain[formula.output] = _slopes(formula, values, chain)
        return of_property, chain

    def _of_bundle(
        self, bundle: Bundle, values: Mapping[str, Array], chain: Mapping[str, Derivatives]
    ) -> dict[str, Derivatives]:
        """Derivatives of all properties of a bundle, the displaced points of all its states in one call."""
        arrays: dict[str, list[Array]] = {name: [] for name in bundle.inputs("")}
        moves: list[tuple[str, str, Array]] = []
        for state in bundle.states:
            paths = bundle.inputs(state)
            here = {name: values[path] for name, path in paths.items()}
            for moved in (None, *paths):
                if moved is not None and paths[moved] not in chain:
                    continue
                shifted = dict(here)
                if moved is not None:
                    shifted[moved], shift = _displaced(paths[moved], here[moved])
                    moves.append((state, paths[moved], shift))
                for name, array in shifted.items():
                    arrays[name].append(array)
        found = bundle.evaluate(arrays)
        slopes: dict[str, Derivatives] = {}
        for name in bundle.names:
            position, pending = 0, list(moves)
            for state in bundle.states:
                base = found[name][position]
                position += 1
                row: Derivatives = {}
                while pending and pending[0][0] == state:
                    _, path, shift = pending.pop(0)
                    _accumulate(row, chain[path], (found[name][position] - base) / shift)
                    position += 1
                if name in self.outputs[state]:
                    slopes[f"states.{state}.{name}"] = row
        return slopes


def _turned(formula: Formula, free: set[str]) -> Formula:
    """A formula whose value is known, turned round for an input that is not: an efficiency that is a quotient of small
    differences makes a poor residual, the entropy that follows from it a good one.
    """
    if formula.output in free or formula.slopes is not None:
        return formula
    for path, inverse in formula.inverses.items():
        if path in free:
            inputs = formula.turned_inputs(path)
            return replace(formula, output=path, inputs=inputs, evaluate=inverse.evaluate, inverses={})
    return formula


def _carriers(relations: Sequence[AnyRelation], free: set[str]) -> dict[str, tuple[str, str]]:
    """The two properties each state is evaluated from: pressure and enthalpy, or one that is known and has no meaning
    away from saturation, so that no iteration may leave it.
    """
    found: dict[str, tuple[str, str]] = {}
    for relation in relations:
        if isinstance(relation, PropertyRelation):
            found.setdefault(relation.state, ("pressure", "specific_enthalpy"))
            if relation.output in _SATURATION and relation.path not in free:
                found[relation.state] = ("pressure", relation.output)
    return found


def _accumulate(row: Derivatives, slopes: Mapping[str, Array], factor: Any) -> None:
    for path, slope in slopes.items():
        row[path] = row[path] + factor * slope if path in row else factor * slope


def _displaced(path: str, array: Array) -> tuple[Array, Array]:
    """The array moved by a little, and by how much as it stands in floating point: the quotient then has no rounding of
    its own.
    """
    moved = array + _DISPLACEMENT * np.maximum(np.abs(array), typical(path))
    return moved, moved - array


def _slopes(formula: Formula, values: Mapping[str, Array], chain: Mapping[str, Derivatives]) -> Derivatives:
    """Derivatives of a formula with respect to the tears, by differences stacked along the sample axis."""
    moved = [path for path in formula.inputs if path in chain]
    arrays = [values[path] for path in formula.inputs]
    if formula.slopes is not None:
        exact: Derivatives = {}
        for path, slope in zip(formula.inputs, formula.slopes(*arrays), strict=True):
            if path in chain:
                _accumulate(exact, chain[path], slope)
        return exact
    columns = max(array.size for array in arrays)
    stacked = [np.tile(array, len(moved) + 1) for array in arrays]
    shifts = []
    for number, path in enumerate(moved, start=1):
        position = formula.inputs.index(path)
        part = slice(number * columns, (number + 1) * columns)
        stacked[position][part], shift = _displaced(path, values[path])
        shifts.append(shift)
    result = np.broadcast_to(formula.evaluate(*stacked), stacked[0].shape).reshape(-1, columns)
    row: Derivatives = {}
    for number, (path, shift) in enumerate(zip(moved, shifts, strict=True), start=1):
        _accumulate(row, chain[path], (result[number] - result[0]) / shift)
    return row

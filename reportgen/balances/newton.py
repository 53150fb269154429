r"""Several relations solved together, on all columns of the sample axis at once.

A state in the block is carried by its pressure and specific enthalpy; its other properties, and formulae whose value
is not asked for elsewhere, follow from these and are eliminated. What remains are residuals r(x) = 0 of the tear
variables x, solved by Newton's method: Balances have exact derivatives, properties and formulae are differenced, the
displaced points being stacked along the sample axis so that a state costs one property call an iteration. Steps are
shortened until pressures stay positive, every property exists and the residual does not grow. The base column is
solved first and all others start from its solution; each column has its own step length and its own end.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.balances.properties import state_from
from reportgen.balances.relations import Balance, Formula
from reportgen.balances.structure import AnyRelation, PropertyRelation

__all__ = ["Coupled", "NoSolution"]

Array = NDArray[np.float64]
Derivatives = dict[str, Array]

_MOST_ITERATIONS = 40
_MOST_HALVINGS = 14
#: Starts that led somewhere but not to a solution, after which no more are tried.
_MOST_TRAVELS = 4
#: A mass flow [kg/s] taken for none.
_NO_FLOW = 1e-12
_EXTENSIVE = ("mass_flow", "power", "heat", "duty")
#: Relative size of a step below which a column has converged; the iteration after it is quadratic, hence at rounding.
_TOLERANCE = 1e-10
#: Relative displacement for differences: the square root of the rounding of property models (about 1e-13).
_DISPLACEMENT = 1e-6
_SPARSE_FROM = 120
_SATURATION = ("quality", "superheat", "subcooling")

#: Sizes below which a variable counts as small, in SI units, by the last part of its path.
_TYPICAL = {
    "pressure": 1e3,
    "specific_enthalpy": 1e5,
    "specific_entropy": 1e3,
    "temperature": 100.0,
    "mass_flow": 1e-3,
    "volume_flow": 1e-3,
    "molar_flow": 1e-2,
    "power": 1e2,
    "heat": 1e2,
    "duty": 1e2,
    "pressure_drop": 1e3,
}


class NoSolution(ArithmeticError):
    """The base column has no solution: why, the unknowns that stand in the way, and whether a step was ever taken."""

    def __init__(self, reason: str, paths: Sequence[str], travelled: bool = True) -> None:
        super().__init__(reason)
        self.reason = reason
        self.paths = tuple(paths)
        self.travelled = travelled


def _typical(path: str) -> float:
    return _TYPICAL.get(path.rsplit(".", 1)[-1], 1.0)


class Coupled:
    """A block of relations with as many unknowns.

    Parameters
    ----------
    relations, unknowns : the block.
    values : known arrays of shape (N,), by path.
    fluid_of : property model of a state id.
    """

    def __init__(
        self,
        relations: Sequence[AnyRelation],
        unknowns: Sequence[str],
        values: Mapping[str, Any],
        fluid_of: Callable[[str], Any],
    ) -> None:
        self.fluid_of = fluid_of
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
                    relation = PropertyRelation(relation.state, "specific_enthalpy")
                self.outputs.setdefault(relation.state, []).append(relation.output)
                if relation.path in free:
                    explicit.add(relation.path)
                    continue
            elif isinstance(relation, Formula) and relation.output in free and relation.output.startswith("equipment."):
                explicit.add(relation.output)
                self.formulae.append(relation)
                continue
            self.residuals.append(relation)
        self.tears = [path for path in unknowns if path not in explicit]
        self.index = {path: number for number, path in enumerate(self.tears)}
        involved = {path for relation in relations for path in relation.variables}
        self.known: dict[str, Array] = {path: values[path] for path in involved if path in values}
        for state in self.outputs:
            # The temperature of an ideal gas may be asked for before its pressure is known; any pressure will do.
            pressure = f"states.{state}.pressure"
            if pressure not in free:
                self.known[pressure] = values.get(pressure, values["surroundings.pressure"])

    @property
    def is_linear(self) -> bool:
        """True when one step of Newton's method is exact."""
        return not self.outputs and all(
            isinstance(relation, Balance) and relation.is_linear_in(self.tears) for relation in self.residuals
        )

    def solve(self, starts: Iterable[Mapping[str, float]], columns: int) -> dict[str, Array]:
        """Values of all unknowns, shape (N,), NaN in columns that do not converge; NoSolution for the base column."""
        failure: NoSolution | None = None
        travelled = 0
        for start in starts:
            x = np.array([[start[path]] for path in self.tears], dtype=float)
            try:
                base = self._iterate(x, np.array([0]), strict=True)
            except NoSolution as problem:
                failure = problem if failure is None or not failure.travelled else failure
                travelled += problem.travelled
                if travelled == _MOST_TRAVELS:
                    break
                continue
            self._refuse_no_flow(base)
            x = np.repeat(base, columns, axis=1)
            if columns > 1:
                x[:, 1:] = self._iterate(x[:, 1:], np.arange(1, columns), strict=False)
            full, _ = self._complete(x, np.arange(columns))
            return {path: full[path] for path in full if path not in self.known}
        assert failure is not None
        raise failure

    def _refuse_no_flow(self, base: Array) -> None:
        """NoSolution where every flow of the block comes out as nothing: then nothing fixed their size."""
        flows = [number for number, path in enumerate(self.tears) if path.endswith(".mass_flow")]
        if flows and np.max(np.abs(base[flows])) < _NO_FLOW:
            raise NoSolution("only with no flow at all would they hold, so nothing fixes the flow", self.tears)

    def _complete(self, x: Array, columns: NDArray[np.intp]) -> tuple[dict[str, Array], dict[str, Array]]:
        """Values of tears, properties and formulae; and what the properties come to, known ones too."""
        values = {path: array[columns] for path, array in self.known.items()}
        values.update(zip(self.tears, x, strict=True))
        computed = self._properties(values)
        for path, array in computed.items():
            values.setdefault(path, array)
        for formula in self.formulae:
            values[formula.output] = formula.evaluate(*(values[path] for path in formula.inputs))
        return values, computed

    def _properties(self, values: Mapping[str, Array]) -> dict[str, Array]:
        found = {}
        for state, names in self.outputs.items():
            prefix, pair = f"states.{state}.", self.carriers[state]
            result = state_from(self.fluid_of(state), pair, {name: values[prefix + name] for name in pair})
            for name in names:
                found[prefix + name] = getattr(result, name)
        return found

    def _residual(self, x: Array, columns: NDArray[np.intp]) -> tuple[Array, dict[str, Array]]:
        """Residuals, shape (R, M), and the completed values; NaN where a property does not exist."""
        with np.errstate(all="ignore"):
            values, computed = self._complete(x, columns)
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

    def _derivatives(self, values: Mapping[str, Array]) -> tuple[dict[str, Derivatives], dict[str, Derivatives]]:
        """Derivatives with respect to the tears, by path: of properties, and of all that depends on tears."""
        ones = np.ones_like(next(iter(values.values())))
        chain: dict[str, Derivatives] = {path: {path: ones} for path in self.tears}
        of_property: dict[str, Derivatives] = {}
        for state, names in self.outputs.items():
            pair = self.carriers[state]
            inputs = [f"states.{state}.{name}" for name in pair]

            def properties(
                *arrays: Array, state: str = state, names: list[str] = names, pair: tuple[str, str] = pair
            ) -> list[Array]:
                result = state_from(self.fluid_of(state), pair, dict(zip(pair, arrays, strict=True)))
                return [getattr(result, name) for name in names]

            slopes = _differences(properties, inputs, values, chain)
            for name, slope in zip(names, slopes, strict=True):
                path = f"states.{state}.{name}"
                of_property[path] = slope
                if path not in self.known and path not in self.index:
                    chain[path] = slope
        for formula in self.formulae:

            def single(*arrays: Array, formula: Formula = formula) -> list[Array]:
                return [formula.evaluate(*arrays)]

            chain[formula.output] = _differences(single, formula.inputs, values, chain)[0]
        return of_property, chain

    def _jacobian(self, values: Mapping[str, Array]) -> list[Derivatives]:
        """For each residual its derivatives with respect to the tears."""
        of_property, chain = self._derivatives(values)
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
                if isinstance(relation, PropertyRelation):
                    _accumulate(row, of_property[path], -1.0)
                else:

                    def single(*arrays: Array, formula: Formula = relation) -> list[Array]:
                        return [formula.evaluate(*arrays)]

                    _accumulate(row, _differences(single, relation.inputs, values, chain)[0], -1.0)
            rows.append(row)
        return rows

    def _iterate(self, x: Array, columns: NDArray[np.intp], strict: bool) -> Array:
        """Newton's method on some columns; strict: NoSolution instead of NaN."""
        x = x.copy()
        floor = np.array([_typical(path) for path in self.tears])[:, None]
        positive = np.array([path.endswith(".pressure") for path in self.tears])
        active = np.arange(columns.size)
        failed = np.zeros(columns.size, dtype=bool)
        residual, values = self._residual(x, columns)
        if strict and not np.isfinite(residual).all():
            raise NoSolution("the values to start from lie outside the range of the fluid", self.tears[:6], False)
        previous = np.full(columns.size, np.inf)
        for _ in range(_MOST_ITERATIONS):
            rows = self._jacobian(values)
            step, row_scale = self._newton_step(rows, residual, np.maximum(np.abs(x[:, active]), floor), strict)
            size = np.max(np.abs(step) / np.maximum(np.abs(x[:, active]), floor), axis=0)
            step = _limited(step, x[:, active], positive)
            residual, values, trial, bad = self._search(x[:, active], step, residual, row_scale, columns[active])
            if bad.any():
                if strict:
                    raise NoSolution(
                        "no step lowers the imbalance without leaving the range of the fluid", self.tears[:6]
                    )
                failed[active[bad]] = True
            x[:, active] = trial
            stalled = (size < 1e-7) & (size >= 0.3 * previous[active])
            previous[active] = size
            done = (size < _TOLERANCE) | stalled | bad | self.is_linear
            if done.all():
                break
            if done.any():
                keep = ~done
                active = active[keep]
                residual = residual[:, keep]
                values = {path: array[keep] for path, array in values.items()}
        else:
            if strict:
                raise NoSolution(f"no convergence in {_MOST_ITERATIONS} iterations", self.tears[:6])
            failed[active] = True
        x[:, failed] = np.nan
        return x

    def _newton_step(
        self, rows: Sequence[Derivatives], residual: Array, scale: Array, strict: bool
    ) -> tuple[Array, Array]:
        """−J⁻¹ r for every column, shape (T, M), and the size of each row, shape (R, M)."""
        count, columns = len(self.tears), residual.shape[1]
        row_scale = np.zeros((len(rows), columns))
        entries: list[tuple[int, int, Array]] = []
        for number, row in enumerate(rows):
            for path, slope in row.items():
                column = self.index[path]
                scaled = slope * scale[column]
                entries.append((number, column, scaled))
                np.maximum(row_scale[number], np.abs(scaled), out=row_scale[number])
        row_scale[~(row_scale > 0.0)] = 1.0
        right = -residual / row_scale
        solution = np.full((count, columns), np.nan)
        if count >= _SPARSE_FROM:
            for m in range(columns):
                solution[:, m] = _sparse_solution(entries, row_scale, right, m, count)
        else:
            matrix = np.zeros((columns, count, count))
            for number, column, scaled in entries:
                matrix[:, number, column] += scaled / row_scale[number]
            good = np.isfinite(matrix).all(axis=(1, 2)) & np.isfinite(right).all(axis=0)
            if good.any():
                try:
                    solution[:, good] = np.linalg.solve(matrix[good], right.T[good][:, :, None])[:, :, 0].T
                except np.linalg.LinAlgError:
                    self._report_singular(matrix[good][0], strict)
            if strict and good.all():
                self._report_singular(matrix[0], strict, only_if_singular=True)
        return solution * scale, row_scale

    def _report_singular(self, matrix: Array, strict: bool, only_if_singular: bool = False) -> None:
        """NoSolution naming the unknowns that may change together without any relation noticing."""
        if not strict:
            return
        _, singular, right = np.linalg.svd(matrix)
        if only_if_singular and singular[-1] > 1e-14 * singular[0]:
            return
        weights = np.abs(right[-1])
        paths = [path for path, weight in zip(self.tears, weights, strict=True) if weight > 0.1 * weights.max()]
        if all(path.rsplit(".", 1)[-1] in _EXTENSIVE for path in paths):
            raise NoSolution("nothing fixes the flow, all these may grow in proportion", paths)
        raise NoSolution("the relations leave these values free to change together", paths)

    def _search(
        self, x: Array, step: Array, residual: Array, row_scale: Array, columns: NDArray[np.intp]
    ) -> tuple[Array, dict[str, Array], Array, NDArray[np.bool_]]:
        """Step lengths by halving: residual, values and place reached, and the columns that found none."""
        size = np.max(np.abs(residual) / row_scale, axis=0)
        length = np.ones(columns.size)
        length[~np.isfinite(step).all(axis=0)] = np.nan
        for halving in range(_MOST_HALVINGS):
            trial = x + step * length
            found, values = self._residual(trial, columns)
            finite = np.isfinite(found).all(axis=0)
            reached = np.max(np.abs(np.where(finite, found, np.inf)) / row_scale, axis=0)
            # After some halvings a finite place will do: the residual of a curved relation may have to grow first.
            accepted = finite & ((reached <= np.maximum(size * 1.5, 1e-9)) | (halving >= 5))
            if accepted.all():
                return found, values, trial, ~accepted
            length[~accepted] *= 0.5
        bad = ~accepted
        return np.where(bad, 0.0, found), values, np.where(bad, np.nan, trial), bad


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


def _limited(step: Array, x: Array, positive: NDArray[np.bool_]) -> Array:
    """Steps shortened as a whole so that no pressure falls below half or rises above three times its value."""
    if not positive.any():
        return step
    with np.errstate(divide="ignore", invalid="ignore"):
        relative = step[positive] / x[positive]
        factor = np.minimum(1.0, np.minimum(2.0 / np.maximum(relative, 1e-300), 0.5 / np.maximum(-relative, 1e-300)))
    limited: Array = step * np.min(np.where(np.isnan(factor), 1.0, factor), axis=0)
    return limited


def _accumulate(row: Derivatives, slopes: Mapping[str, Array], factor: Any) -> None:
    for path, slope in slopes.items():
        row[path] = row[path] + factor * slope if path in row else factor * slope


def _differences(
    function: Callable[..., list[Array]],
    inputs: Sequence[str],
    values: Mapping[str, Array],
    chain: Mapping[str, Derivatives],
) -> list[Derivatives]:
    """Derivatives of each output with respect to the tears, by differences stacked along the sample axis."""
    moved = [path for path in inputs if path in chain]
    arrays = [values[path] for path in inputs]
    columns = arrays[0].size
    stacked = [np.tile(array, len(moved) + 1) for array in arrays]
    shifts = []
    for number, path in enumerate(moved, start=1):
        position = list(inputs).index(path)
        shift = _DISPLACEMENT * np.maximum(np.abs(values[path]), _typical(path))
        part = slice(number * columns, (number + 1) * columns)
        stacked[position][part] += shift
        # The shift as it stands in floating point, so that the quotient has no rounding of its own.
        shifts.append(stacked[position][part] - values[path])
    results = [np.broadcast_to(result, stacked[0].shape).reshape(-1, columns) for result in function(*stacked)]
    slopes: list[Derivatives] = []
    for result in results:
        row: Derivatives = {}
        for number, (path, shift) in enumerate(zip(moved, shifts, strict=True), start=1):
            _accumulate(row, chain[path], (result[number] - result[0]) / shift)
        slopes.append(row)
    return slopes


def _sparse_solution(
    entries: Sequence[tuple[int, int, Array]], row_scale: Array, right: Array, column: int, count: int
) -> Array:
    from scipy.sparse import csc_matrix
    from scipy.sparse.linalg import splu

    data = [scaled[column] / row_scale[number, column] for number, _, scaled in entries]
    if not (np.isfinite(data).all() and np.isfinite(right[:, column]).all()):
        return np.full(count, np.nan)
    where = ([entry[0] for entry in entries], [entry[1] for entry in entries])
    try:
        solution: Array = splu(csc_matrix((data, where), shape=(count, count))).solve(right[:, column])
    except RuntimeError:  # exactly singular
        return np.full(count, np.nan)
    return solution

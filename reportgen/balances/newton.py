r"""Newton's method on a system of relations, all columns of the sample axis at once.

Steps are shortened until pressures stay positive, every property exists and the residual does not grow. The base column
is solved first, from one start after the other, and all others begin at its solution; each column has its own step
length and its own end. Where the equations leave a direction open at a place that is no solution (in the two-phase
region a temperature says nothing about the enthalpy), the shortest step that reduces the others is taken.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from reportgen.balances.coupled import Coupled, Derivatives, typical

__all__ = ["NoSolution", "solve_system"]

Array = NDArray[np.float64]

_MOST_ITERATIONS = 40
_MOST_HALVINGS = 10
#: Halvings after which a finite place will do: the residual of a curved relation may have to grow first.
_PATIENCE = 5
#: Iterations in which the smallest residual so far must have come down by half.
_PROGRESS = 6
#: Part of a step that counts as short, and how many in a row mean that the way ends at the range of a fluid.
_SHORT, _MOST_SHORT = 0.05, 2
#: Starts that led somewhere but not to a solution after which no more are tried; and starts that are tried after a
#: solution that may not be meant.
_MOST_TRAVELS, _MOST_MORE = 12, 12
#: Starts that must have been tried before as many as came to the same closest place are taken for proof.
_FEWEST_TRAVELS, _ALIKE = 5, 3
#: Starts closer than this to an earlier one, in parts of the variables, are left out.
_SAME_PLACE = 0.01
#: Decades between a start and a pressure that is far.
_FAR = 2.5
#: Solutions closer than this, in parts of the variables, are one.
_SAME_SOLUTION = 1e-5
#: A mass flow [kg/s] taken for none.
_NO_FLOW = 1e-12
_EXTENSIVE = ("mass_flow", "power", "shaft_power", "heat", "mechanical_heat", "duty")
_NEVER_NEGATIVE = ("mass_flow", "duty", "power", "shaft_power", "velocity")
#: Relative size of a step below which a column has converged; the iteration after it is quadratic, hence at rounding.
_TOLERANCE = 1e-10
_SPARSE_FROM = 120
#: Singular values below these parts of the largest leave a direction open: at a solution, and on the way to one.
_OPEN, _SHALLOW = 1e-14, 1e-10
#: Step, in parts of the variables, beyond which the equations are taken to leave a direction open.
_ENDLESS = 1e6
#: Residual, in parts of its terms, below which a place is a solution.
_SOLVED = 1e-6


class NoSolution(ArithmeticError):
    """The base column has no solution, or none that could be told from another.

    Why; the unknowns that stand in the way; whether a step was ever taken; at the closest place found, which of the
    residuals is farthest from zero and how far, in parts of its terms; and whether there are several solutions.
    """

    def __init__(
        self,
        reason: str,
        paths: Sequence[str],
        travelled: bool = True,
        worst: int | None = None,
        imbalance: float = np.inf,
        several: bool = False,
    ) -> None:
        super().__init__(reason)
        self.reason = reason
        self.paths = tuple(paths)
        self.travelled = travelled
        self.worst = worst
        self.imbalance = imbalance
        self.several = several


def solve_system(system: Coupled, starts: Iterable[Mapping[str, float]], columns: int) -> dict[str, Array]:
    """Values of all unknowns by path, shape (N,), NaN in columns that do not converge.

    A solution that nobody can mean (a flow or a heat against its direction, a pressure that rises by itself) is kept
    while more starts are tried. So is one in which a pressure is found from a temperature, since another pressure may
    go with it. Raises NoSolution for the base column, also where several solutions satisfy everything.
    """
    found = _base(system, starts)
    _refuse_no_flow(system, found)
    x = np.repeat(found, columns, axis=1)
    if columns > 1:
        x[:, 1:] = _iterate(system, x[:, 1:], np.arange(1, columns), strict=False)
    full, _ = system.complete(x, np.arange(columns))
    return {path: full[path] for path in full if path not in system.known}


def _base(system: Coupled, starts: Iterable[Mapping[str, float]]) -> Array:
    """The solution of the base column, shape (T, 1)."""
    failures: list[NoSolution] = []
    senseless: list[Array] = []
    solutions: list[Array] = []
    more = 0
    for x in _places(system, starts):
        more += bool(senseless or solutions)
        if more > _MOST_MORE:
            break
        try:
            base = _iterate(system, x, np.array([0]), strict=True)
        except NoSolution as problem:
            failures.append(problem)
            if not (senseless or solutions) and _is_enough(failures):
                break
            continue
        if system.is_linear:
            return base
        values, _ = system.complete(base, np.array([0]))
        has_sense = all(_has_sense(path, array[0]) for path, array in values.items() if path not in system.known)
        if has_sense and not system.loose_pressures:
            return base
        kept = solutions if has_sense and _is_near(system, base, x) else senseless
        if not any(_alike(system, base, other) for other in kept):
            kept.append(base)
    if len(solutions) > 1:
        _refuse_several(system, solutions)
    if solutions or senseless:
        return (solutions or senseless)[0]
    raise min(failures, key=lambda failure: (not failure.travelled, failure.imbalance))


def _is_near(system: Coupled, base: Array, start: Array) -> bool:
    """Whether the pressures found are of the size of those nearby.

    At a thousand times the pressure many a liquid has the temperature and the enthalpy of a gas.
    """
    pressures = [number for number, path in enumerate(system.tears) if path.endswith(".pressure")]
    return bool(np.all(np.abs(np.log10(base[pressures] / start[pressures])) < _FAR))


def _alike(system: Coupled, first: Array, second: Array) -> bool:
    """Whether two solutions are one."""
    scale = np.maximum(np.abs(first), np.array([typical(path) for path in system.tears])[:, None])
    return bool(np.max(np.abs(first - second) / scale, initial=0.0) < _SAME_SOLUTION)


def _refuse_several(system: Coupled, solutions: Sequence[Array]) -> None:
    """NoSolution naming a pressure that may be one or another."""
    path = system.loose_pressures[0]
    numbers = sorted(float(solution[system.index[path], 0]) / 1e5 for solution in solutions)
    words = " or ".join(f"{number:.6g} bar" for number in numbers)
    reason = f"{path} may be {words}; a temperature alone does not tell a pressure, so give it, or a pressure loss"
    raise NoSolution(reason, system.loose_pressures, several=True)


def _is_enough(failures: Sequence[NoSolution]) -> bool:
    """Whether as many starts led nowhere as are tried, or several came to the same closest place."""
    travelled = [failure for failure in failures if failure.travelled]
    last = travelled[-1] if travelled else None
    alike = [f for f in travelled if last and f.worst == last.worst and _same(f.imbalance, last.imbalance)]
    return len(travelled) == _MOST_TRAVELS or (len(travelled) >= _FEWEST_TRAVELS and len(alike) >= _ALIKE)


def _same(first: float, second: float) -> bool:
    return abs(first - second) <= 0.02 * max(first, second)


def _places(system: Coupled, starts: Iterable[Mapping[str, float]]) -> Iterator[Array]:
    """Each start as it is, then, where that is somewhere else, moved to where the linear balances hold."""
    tried: list[Array] = []
    floor = np.array([typical(path) for path in system.tears])[:, None]
    for start in starts:
        plain = np.array([[start[path]] for path in system.tears], dtype=float)
        for place in (plain, system.consistent(plain)):
            scale = np.maximum(np.abs(place), floor)
            if all(np.max(np.abs(place - other) / scale, initial=0.0) > _SAME_PLACE for other in tried) or not tried:
                tried.append(place)
                yield place


def _refuse_no_flow(system: Coupled, base: Array) -> None:
    """NoSolution where every flow of the block comes out as nothing: then nothing fixed their size."""
    flows = [number for number, path in enumerate(system.tears) if path.endswith(".mass_flow")]
    if flows and np.max(np.abs(base[flows])) < _NO_FLOW:
        raise NoSolution("only with no flow at all would they hold, so nothing fixes the flow", system.tears)


def _has_sense(path: str, value: float) -> bool:
    """Whether a flow, heat, pressure loss, ratio or efficiency has the sense its name says."""
    name = path.rsplit(".", 1)[-1]
    if name in _NEVER_NEGATIVE or name.endswith("pressure_drop"):
        return value >= -_SOLVED * typical(path)
    if name == "pressure_ratio":
        return value >= 1.0 - _SOLVED
    return not name.endswith("efficiency") or 0.0 < value < 1.0 + _SOLVED


def _iterate(system: Coupled, x: Array, columns: NDArray[np.intp], strict: bool) -> Array:
    """Newton's method on some columns; strict: NoSolution instead of NaN."""
    x = x.copy()
    floor = np.array([typical(path) for path in system.tears])[:, None]
    positive = np.array([path.endswith((".pressure", ".velocity")) for path in system.tears])
    active = np.arange(columns.size)
    failed = np.zeros(columns.size, dtype=bool)
    residual, values = system.residual(x, columns)
    if strict and not np.isfinite(residual).all():
        x = system.within_range(x)
        residual, values = system.residual(x, columns)
    if strict and not np.isfinite(residual).all():
        raise NoSolution("the values to start from lie outside the range of the fluid", system.tears[:6], False)
    previous = np.full(columns.size, np.inf)
    closest = _Closest()
    for iteration in range(_MOST_ITERATIONS):
        scale = np.maximum(np.abs(x[:, active]), floor)
        entries, row_scale = _scaled(system, system.jacobian(values), scale)
        if strict:
            closest.look(residual, row_scale, iteration)
        step = _step(system, entries, -residual / row_scale) * scale
        size = np.max(np.abs(step) / scale, axis=0)
        if not system.is_linear:
            step = _limited(step, x[:, active], positive)
        residual, values, trial, length = _search(system, x[:, active], step, residual, row_scale, columns[active])
        bad = np.isnan(length)
        closest.short = closest.short + 1 if length[0] < _SHORT else 0
        if strict and (bad.any() or iteration - closest.iteration > _PROGRESS or closest.short > _MOST_SHORT):
            words = "no step brings the relations closer together within the range of the fluid"
            raise NoSolution(words, system.tears[:6], True, closest.worst, closest.size)
        failed[active[bad]] = True
        x[:, active] = trial
        stalled = (size < 1e-7) & (size >= 0.3 * previous[active])
        previous[active] = size
        reached = np.max(np.abs(residual) / row_scale, axis=0)
        done = bad | (((size < _TOLERANCE) | stalled | system.is_linear) & (reached < _SOLVED))
        if done.all():
            break
        keep = ~done
        active, residual = active[keep], residual[:, keep]
        values = {path: array[keep] for path, array in values.items()}
    else:
        if strict:
            words = f"no convergence in {_MOST_ITERATIONS} iterations"
            raise NoSolution(words, system.tears[:6], True, closest.worst, closest.size)
        failed[active] = True
    if strict:
        _refuse_open(system, values, np.maximum(np.abs(x), floor))
    x[:, failed] = np.nan
    return x


class _Closest:
    """The smallest imbalance on the way, where it was and since when it has not come down by half."""

    def __init__(self) -> None:
        self.size, self.worst, self.iteration = np.inf, 0, 0
        #: Short steps in a row.
        self.short = 0

    def look(self, residual: Array, row_scale: Array, iteration: int) -> None:
        """Take note of a place, residuals and their scales of shape (R, 1)."""
        relative = np.abs(residual[:, 0]) / row_scale[:, 0]
        size = float(relative.max(initial=0.0))
        if size < 0.5 * self.size or size < _SOLVED:
            self.iteration = iteration
            self.size, self.worst = size, int(relative.argmax()) if relative.size else 0


Entries = list[tuple[int, int, Array]]


def _scaled(system: Coupled, rows: Sequence[Derivatives], scale: Array) -> tuple[Entries, Array]:
    """Entries (row, column, value) of the derivatives by scaled variables, and the size of each row, shape (R, M)."""
    row_scale = np.zeros((len(rows), scale.shape[1]))
    entries: Entries = []
    for number, row in enumerate(rows):
        for path, slope in row.items():
            column = system.index[path]
            scaled = slope * scale[column]
            entries.append((number, column, scaled))
            np.maximum(row_scale[number], np.abs(scaled), out=row_scale[number])
    row_scale[~(row_scale > 0.0)] = 1.0
    return [(number, column, scaled / row_scale[number]) for number, column, scaled in entries], row_scale


def _dense(entries: Entries, count: int, columns: int) -> Array:
    matrix = np.zeros((columns, count, count))
    for number, column, scaled in entries:
        matrix[:, number, column] += scaled
    return matrix


def _step(system: Coupled, entries: Entries, right: Array) -> Array:
    """−J⁻¹ r for every column, in parts of the variables, shape (T, M); NaN where there is none."""
    count, columns = right.shape
    if count >= _SPARSE_FROM:
        return np.array([_sparse_step(entries, right, column) for column in range(columns)]).T
    matrix = _dense(entries, count, columns)
    step = np.full((count, columns), np.nan)
    good = np.isfinite(matrix).all(axis=(1, 2)) & np.isfinite(right).all(axis=0)
    if good.any():
        try:
            step[:, good] = np.linalg.solve(matrix[good], right.T[good][:, :, None])[:, :, 0].T
        except np.linalg.LinAlgError:
            step[:, good] = np.inf
    for column in np.flatnonzero(good & ~(np.abs(step).max(axis=0) < _ENDLESS)):
        step[:, column] = np.linalg.lstsq(matrix[column], right[:, column], rcond=_SHALLOW)[0]
    return step


def _sparse_step(entries: Entries, right: Array, column: int) -> Array:
    from scipy.sparse import csc_matrix
    from scipy.sparse.linalg import splu

    count = right.shape[0]
    data = [scaled[column] for _, _, scaled in entries]
    if not (np.isfinite(data).all() and np.isfinite(right[:, column]).all()):
        return np.full(count, np.nan)
    where = ([entry[0] for entry in entries], [entry[1] for entry in entries])
    try:
        solution: Array = splu(csc_matrix((data, where), shape=(count, count))).solve(right[:, column])
    except RuntimeError:  # exactly singular
        return np.full(count, np.nan)
    return solution


def _refuse_open(system: Coupled, values: Mapping[str, Array], scale: Array) -> None:
    """NoSolution naming unknowns that may change together at the solution without any relation noticing."""
    count = len(system.tears)
    if count >= _SPARSE_FROM or not count:
        return
    entries, _ = _scaled(system, system.jacobian(values), scale)
    matrix = _dense(entries, count, 1)[0]
    if not np.isfinite(matrix).all() or not _looks_open(matrix):
        return
    _, singular, right = np.linalg.svd(matrix)
    if singular[-1] > _OPEN * singular[0]:
        return
    weights = np.abs(right[-1])
    paths = [path for path, weight in zip(system.tears, weights, strict=True) if weight > 0.1 * weights.max()]
    if all(path.rsplit(".", 1)[-1] in _EXTENSIVE for path in paths):
        raise NoSolution("nothing fixes the flow, all these may grow in proportion", paths)
    raise NoSolution("the relations leave these values free to change together", paths)


def _looks_open(matrix: Array) -> bool:
    """Whether solutions with two unlike right sides grow beyond measure; spares most systems their singular values."""
    sides = np.array([np.ones(len(matrix)), np.cos(np.arange(len(matrix)))]).T
    try:
        return bool(np.abs(np.linalg.solve(matrix, sides)).max() > _ENDLESS)
    except np.linalg.LinAlgError:
        return True


def _search(
    system: Coupled, x: Array, step: Array, residual: Array, row_scale: Array, columns: NDArray[np.intp]
) -> tuple[Array, dict[str, Array], Array, Array]:
    """Step lengths by halving: residual, values and place reached, and the length, NaN for columns that found none."""
    size = np.max(np.abs(residual) / row_scale, axis=0)
    length = np.ones(columns.size)
    length[~np.isfinite(step).all(axis=0)] = np.nan
    for halving in range(_MOST_HALVINGS):
        trial = x + step * length
        found, values = system.residual(trial, columns)
        finite = np.isfinite(found).all(axis=0)
        reached = np.max(np.abs(np.where(finite, found, np.inf)) / row_scale, axis=0)
        accepted = finite & ((reached <= np.maximum(size * 1.5, 1e-9)) | (halving >= _PATIENCE))
        if accepted.all() or not np.isfinite(length).any():
            break
        length[~accepted] *= 0.5
    lost = ~accepted
    return np.where(lost, 0.0, found), values, np.where(lost, np.nan, trial), np.where(lost, np.nan, length)


def _limited(step: Array, x: Array, positive: NDArray[np.bool_]) -> Array:
    """Steps shortened as a whole so that no pressure or velocity falls below half or rises above three times."""
    if not positive.any():
        return step
    with np.errstate(divide="ignore", invalid="ignore"):
        relative = step[positive] / x[positive]
        factor = np.minimum(1.0, np.minimum(2.0 / np.maximum(relative, 1e-300), 0.5 / np.maximum(-relative, 1e-300)))
    limited: Array = step * np.min(np.where(np.isnan(factor), 1.0, factor), axis=0)
    return limited

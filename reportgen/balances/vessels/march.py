"""Integration of many columns at once, each with its own steps, landing exactly on what happens on the way.

The columns of the sample axis are independent copies of one autonomous system y' = f(y). They share every call of f,
but not their steps: each column takes the step that its own error allows, ends at its own event, and crosses the
saturation line at its own place. There the derivative jumps; a step across the jump would lose the order of the method,
so that the step is shortened until it ends on the line, and the next begins behind it.

Method: Dormand and Prince 1980, https://doi.org/10.1016/0771-050X(80)90013-3, order 5 with an error estimate of order 4
and a dense output of order 4 (Shampine 1986, https://doi.org/10.2307/2008219); coefficients from ``scipy``.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
import numpy.typing as npt

__all__ = ["Problem", "Steps", "march"]

Array = npt.NDArray[np.float64]
Flags = npt.NDArray[np.bool_]
Indices = npt.NDArray[np.intp]

#: Rounds after which columns that have not come to their end are given up; some 150 are usual.
MOST_STEPS = 1500
#: Shortest step in parts of the largest one of a column: what is shorter makes no way.
SHORTEST = 1e-12
#: Crossings of the saturation line that are landed on; a content that slides along the line is not followed closer.
MOST_CROSSINGS = 20
_SAFETY, _LEAST, _MOST = 0.9, 0.2, 4.0
#: How far behind an event, in its own measure, a step may end.
_NEAR = 1e-10
#: Trials after which a step is taken to the far end of its bracket.
_MOST_TRIALS = 60
#: Parts of a step to which an event is located.
_PLACE = 1e-12


class Problem(Protocol):
    """What is integrated. Arrays have the columns last; ``columns`` are the indices of those asked for.

    ``inside`` says which bodies are two-phase. A body that has once left the two-phase region is not told to be inside
    again when rates are asked for: its phases had come apart, and one of them is gone.
    """

    def rates(self, y: Array, columns: Indices, inside: Flags) -> Array:
        """y' for y of shape (k, n), with ``inside`` of shape (bodies, n); NaN where there is none."""

    def scales(self, y: Array, columns: Indices) -> Array:
        """Size of each unknown by which its error is measured, shape (k, n)."""

    def longest(self, y: Array, slope: Array, columns: Indices) -> Array:
        """Longest step that is to be taken, shape (n,)."""

    def events(self, y: Array, columns: Indices) -> tuple[Array, Flags, Array]:
        """Where the columns stand.

        Returns a distance to the end, positive before it, shape (n,); whether each body is inside the two-phase region,
        (bodies, n); and the distance of each body from its saturation line, positive outside, (bodies, n), infinite
        where there is none.
        """

    def mark(self, columns: Indices) -> Array:
        """One number to keep of the place where the events were last looked at, shape (n,)."""


@dataclass(frozen=True)
class Steps:
    """Every accepted step of every column, column by column and in order.

    ``column``, ``start`` (value of the independent variable) and ``length``: shape (steps,); ``inside`` (bodies,
    steps); ``mark`` (steps,) and ``y`` (k, steps) at the start; ``dense`` (k, 4, steps). ``end`` is y at the end of
    each column (k, N), ``reached`` whether the end was come to, (N,). ``evaluations``: calls of the rates.
    """

    column: Indices
    start: Array
    length: Array
    inside: Flags
    mark: Array
    y: Array
    dense: Array
    end: Array
    reached: Flags
    evaluations: int

    def within(self, part: float | Array) -> Array:
        """y at a part of every step, shape (k, steps); the part from 0 to 1 is a number or one for each step."""
        powers = np.stack([np.broadcast_to(part, self.length.shape) ** power for power in (1, 2, 3, 4)])
        inner: Array = self.y + self.length * np.einsum("kps,ps->ks", self.dense, powers)
        return inner

    def of(self, column: int) -> Indices:
        """Numbers of the steps of one column."""
        return np.nonzero(self.column == column)[0]


@dataclass
class _Taken:
    """Accepted steps of one round."""

    columns: Indices
    start: Array
    length: Array
    inside: Flags
    mark: Array
    y: Array
    dense: Array


class _Method:
    """Dormand–Prince steps for many columns."""

    def __init__(self, problem: Problem) -> None:
        from scipy.integrate import RK45

        self.problem = problem
        self.a, self.b, self.error, self.dense = RK45.A, RK45.B, RK45.E, RK45.P
        self.calls = 0

    def rates(self, y: Array, columns: Indices, inside: Flags) -> Array:
        """y' with the calls counted."""
        self.calls += 1
        return self.problem.rates(y, columns, inside)

    def step(self, y: Array, first: Array, length: Array, columns: Indices, inside: Flags) -> tuple[Array, Array]:
        """y at the end of a step, (k, n), and all seven slopes, (7, k, n); ``first`` is the slope at its beginning."""
        slopes = [first]
        for row in range(1, 6):
            increment = sum(self.a[row, index] * slopes[index] for index in range(row))
            slopes.append(self.rates(y + length * increment, columns, inside))
        end = y + length * sum(weight * slope for weight, slope in zip(self.b, slopes, strict=True))
        slopes.append(self.rates(end, columns, inside))
        return end, np.stack(slopes)


def march(problem: Problem, y: Array, tolerance: float) -> Steps:
    """Integrate every column from ``y``, shape (k, N), to its end.

    ``tolerance`` [1] is the error that a step may make, in parts of the scales. A column ends where its distance to the
    end is used up (``reached``), or where it can go no further because the rates have no value there.
    """
    columns = _Columns(problem, np.array(y, dtype=float), tolerance)
    for _ in range(MOST_STEPS):
        if not columns.active.size:
            break
        columns.round()
    return _gathered(columns.taken, columns.y, columns.reached, columns.method.calls)


class _Columns:
    """Where every column stands; arrays have shape (N,), or end with N.

    ``length`` is the step that is tried next. A step that passes an event is not taken: its column then looks for the
    step that ends just behind the event, between ``low`` and ``high``, one trial in each round, while the others go on.
    """

    def __init__(self, problem: Problem, y: Array, tolerance: float) -> None:
        self.problem, self.method, self.tolerance = problem, _Method(problem), tolerance
        self.y = y
        count = y.shape[1]
        every = np.nonzero(np.isfinite(y).all(axis=0))[0]
        left, now, far = problem.events(y[:, every], every)
        self.inside = np.zeros((now.shape[0], count), dtype=bool)
        self.inside[:, every] = now
        self.left_behind = np.zeros_like(self.inside)
        self.mark, self.position, self.longest = (np.full(count, fill) for fill in (np.nan, 0.0, np.nan))
        self.mark[every] = problem.mark(every)
        self.crossings, self.tried, self.moved = (np.zeros(count, dtype=int) for _ in range(3))
        self.landing, self.reached = (np.zeros(count, dtype=bool) for _ in range(2))
        self.low, self.high, self.low_value, self.high_value, self.here = (np.zeros(count) for _ in range(5))
        self.reached[every] = left <= 0.0
        self.here[every] = self._nearest(left, far, now, every)
        going = every[left > 0.0]
        self.slope = np.full_like(y, np.nan)
        self.slope[:, going] = self.method.rates(y[:, going], going, self.inside[:, going])
        self.longest[going] = problem.longest(y[:, going], self.slope[:, going], going)
        self.length = 1e-3 * self.longest
        self.active = going[np.isfinite(self.slope[:, going]).all(axis=0)]
        self.taken: list[_Taken] = []

    def round(self) -> None:
        """One step of every active column: taken, repeated shorter, or a trial on the way to an event."""
        active = self.active
        landing = self.landing[active]
        before, first = self.y[:, active], self.slope[:, active]
        apart = self.inside[:, active] & ~self.left_behind[:, active]
        step = np.where(landing, self.length[active], np.minimum(self.length[active], self.longest[active]))
        end, slopes = self.method.step(before, first, step, active, apart)
        estimate = step * np.einsum("i,ikn->kn", self.method.error, slopes)
        size = np.max(np.abs(estimate) / (self.tolerance * self.problem.scales(before, active)), axis=0)
        whole = np.isfinite(end).all(axis=0) & np.isfinite(slopes).all(axis=(0, 1)) & np.isfinite(size)
        with np.errstate(all="ignore"):
            factor = np.where(whole, np.clip(_SAFETY * np.maximum(size, 1e-10) ** -0.2, _LEAST, _MOST), 0.3)
        # What is shorter than a step that was good is good as well: trials on the way to an event are not judged.
        good = whole & ((size <= 1.0) | landing)
        shorter = np.where(whole, np.minimum(step * factor, 0.9 * step), 0.3 * step)
        self.length[active] = np.where(good, step * factor, np.where(landing, step, shorter))
        self._bracket(active[landing & ~good], step[landing & ~good], np.full(np.sum(landing & ~good), -1.0))
        if good.any():
            part = np.nonzero(good)[0]
            columns = active[part]
            left, now, far = self.problem.events(end[:, part], columns)
            value = self._nearest(left, far, self.inside[:, columns], columns)
            forced = self.landing[columns] & (self.tried[columns] >= _MOST_TRIALS)
            take = np.where(self.landing[columns], (value <= 0.0) & (value >= -_NEAR) | forced, value >= -_NEAR)
            self._bracket(columns[~take], step[part[~take]], value[~take])
            if take.any():
                kept = part[take]
                dense = np.einsum("ip,ikn->kpn", self.method.dense, slopes[:, :, kept])
                self._take(columns[take], step[kept], end[:, kept], slopes[-1][:, kept], apart[:, kept], dense)
                self._arrive(columns[take], left[take], now[:, take], far[:, take])
        with np.errstate(all="ignore"):
            stuck = ~self.landing[active] & (self.length[active] < SHORTEST * self.longest[active])
        lost = ~np.isfinite(self.slope[:, active]).all(axis=0)
        self.active = active[~(self.reached[active] | stuck | lost)]

    def _nearest(self, left: Array, far: Array, inside: Flags, columns: Indices) -> Array:
        """Distance to the nearest event, shape (n,): the end, or the saturation line from the side a body is on."""
        sides = np.where(inside, -far, far)
        sides = np.where(self.crossings[columns] < MOST_CROSSINGS, sides, np.inf)
        nearest: Array = np.minimum(left, np.min(sides, axis=0, initial=np.inf))
        return nearest

    def _bracket(self, columns: Indices, step: Array, value: Array) -> None:
        """Narrow the bracket round an event by a trial, or begin one; choose the next trial.

        Method of Illinois (Dowell and Jarratt 1971, https://doi.org/10.1007/BF01934364), aimed at a place a little
        behind the event; halving from time to time, and the far end of the bracket when nothing else is left.
        """
        if not columns.size:
            return
        begin = ~self.landing[columns]
        fresh = columns[begin]
        self.landing[fresh], self.tried[fresh], self.moved[fresh] = True, 0, 0
        self.low[fresh], self.low_value[fresh] = 0.0, self.here[fresh] + 0.5 * _NEAR
        value = value + 0.5 * _NEAR
        behind = value <= 0.5 * _NEAR
        kept, gone = columns[behind], columns[~behind]
        self.high[kept], self.high_value[kept] = step[behind], value[behind]
        self.low[gone], self.low_value[gone] = step[~behind], value[~behind]
        # An end that stays twice is weighed half.
        self.low_value[kept] *= np.where(self.moved[kept] == -1, 0.5, 1.0)
        self.high_value[gone] *= np.where(self.moved[gone] == 1, 0.5, 1.0)
        self.moved[kept], self.moved[gone] = -1, 1
        self.moved[fresh] = 0
        self.tried[columns] += 1
        low, high = self.low[columns], self.high[columns]
        with np.errstate(all="ignore"):
            part = self.low_value[columns] / (self.low_value[columns] - self.high_value[columns])
        part = np.where((part > 0.0) & (part < 1.0) & (self.tried[columns] % 6 != 5), part, 0.5)
        narrow = high - low <= _PLACE * high
        self.tried[columns] = np.where(narrow, _MOST_TRIALS, self.tried[columns])
        last = self.tried[columns] >= _MOST_TRIALS
        self.length[columns] = np.where(last, high, low + part * (high - low))

    def _take(self, columns: Indices, step: Array, end: Array, slope: Array, apart: Flags, dense: Array) -> None:
        """Accept steps."""
        self.taken.append(
            _Taken(columns, self.position[columns], step, apart, self.mark[columns], self.y[:, columns], dense)
        )
        self.position[columns] += step
        self.y[:, columns], self.slope[:, columns] = end, slope

    def _arrive(self, columns: Indices, left: Array, now: Flags, far: Array) -> None:
        """Where accepted steps have led to: other sides of saturation lines, the end."""
        new = (now != self.inside[:, columns]).any(axis=0)
        self.crossings[columns] += new
        self.left_behind[:, columns] |= self.inside[:, columns] & ~now
        self.inside[:, columns] = now
        self.mark[columns] = self.problem.mark(columns)
        if new.any():
            changed = columns[new]
            apart = now[:, new] & ~self.left_behind[:, changed]
            self.slope[:, changed] = self.method.rates(self.y[:, changed], changed, apart)
        self.longest[columns] = self.problem.longest(self.y[:, columns], self.slope[:, columns], columns)
        # Behind an event the derivative is new, and the next step begins small.
        landed = columns[self.landing[columns]]
        self.length[landed] = 0.05 * self.longest[landed]
        self.landing[columns] = False
        self.reached[columns] = left <= 0.0
        self.here[columns] = self._nearest(left, far, now, columns)


def _gathered(taken: list[_Taken], y: Array, reached: Flags, calls: int) -> Steps:
    if not taken:
        none = np.zeros(0)
        return Steps(
            np.zeros(0, dtype=np.intp),
            none,
            none,
            np.zeros((1, 0), dtype=bool),
            none,
            np.zeros((y.shape[0], 0)),
            np.zeros((y.shape[0], 4, 0)),
            y,
            reached,
            calls,
        )
    column = np.concatenate([entry.columns for entry in taken])
    order = np.argsort(column, kind="stable")
    return Steps(
        column[order],
        np.concatenate([entry.start for entry in taken])[order],
        np.concatenate([entry.length for entry in taken])[order],
        np.concatenate([entry.inside for entry in taken], axis=-1)[..., order],
        np.concatenate([entry.mark for entry in taken])[order],
        np.concatenate([entry.y for entry in taken], axis=-1)[..., order],
        np.concatenate([entry.dense for entry in taken], axis=-1)[..., order],
        y,
        reached,
        calls,
    )

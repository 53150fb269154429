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

#: Steps after which a column that has not come to its end is given up.
MOST_STEPS = 4000
#: Shortest step in parts of the largest one of a column: what is shorter makes no way.
SHORTEST = 1e-12
#: Crossings of the saturation line that are landed on; a content that slides along the line is not followed closer.
MOST_CROSSINGS = 20
_SAFETY, _LEAST, _MOST = 0.9, 0.2, 4.0
#: How far behind an event, in its own measure, a step may end.
_NEAR = 1e-10
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
    method = _Method(problem)
    count = y.shape[1]
    y = np.array(y, dtype=float)
    active = np.nonzero(np.isfinite(y).all(axis=0))[0]
    distance, now_inside, _ = problem.events(y[:, active], active)
    inside = np.zeros((now_inside.shape[0], count), dtype=bool)
    inside[:, active] = now_inside
    left_behind = np.zeros_like(inside)
    reached = np.zeros(count, dtype=bool)
    reached[active] = distance <= 0.0
    active = active[distance > 0.0]
    slope = np.full_like(y, np.nan)
    slope[:, active] = method.rates(y[:, active], active, inside[:, active])
    longest = np.full(count, np.nan)
    longest[active] = problem.longest(y[:, active], slope[:, active], active)
    length = 1e-3 * longest
    position = np.zeros(count)
    crossings = np.zeros(count, dtype=int)
    taken: list[_Taken] = []
    active = active[np.isfinite(slope[:, active]).all(axis=0)]
    for _ in range(MOST_STEPS):
        if not active.size:
            break
        before, first, mode = y[:, active], slope[:, active], inside[:, active]
        apart = mode & ~left_behind[:, active]
        step = np.minimum(length[active], longest[active])
        mark = problem.mark(active)
        end, slopes = method.step(before, first, step, active, apart)
        estimate = step * np.einsum("i,ikn->kn", method.error, slopes)
        size = np.max(np.abs(estimate) / (tolerance * problem.scales(before, active)), axis=0)
        whole = np.isfinite(end).all(axis=0) & np.isfinite(slopes).all(axis=(0, 1)) & np.isfinite(size)
        with np.errstate(all="ignore"):
            factor = np.where(whole, np.clip(_SAFETY * np.maximum(size, 1e-10) ** -0.2, _LEAST, _MOST), 0.3)
        good = whole & (size <= 1.0)
        length[active] = np.where(
            good, step * factor, np.where(whole, np.minimum(step * factor, 0.9 * step), 0.3 * step)
        )
        if good.any():
            part = np.nonzero(good)[0]
            columns = active[part]
            ends, all_slopes, steps = end[:, part], slopes[:, :, part], step[part]
            left, now, far = problem.events(ends, columns)
            changed = (now != mode[:, part]).any(axis=0) & (crossings[columns] < MOST_CROSSINGS)
            passed = (left <= 0.0) | changed
            if passed.any():
                which = np.nonzero(passed)[0]
                at = part[which]
                start = _Start(before[:, at], first[:, at], columns[which], mode[:, at], apart[:, at])
                steps[which], ends[:, which], all_slopes[:, :, which] = _land(
                    method, start, steps[which], ends[:, which], all_slopes[:, :, which]
                )
                left[which], now[:, which], far[:, which] = problem.events(ends[:, which], columns[which])
                crossings[columns[which]] += (now[:, which] != mode[:, part[which]]).any(axis=0)
                # The next steps begin where the derivative is new.
                length[columns[which]] = np.minimum(length[columns[which]], 0.05 * longest[columns[which]])
            dense = np.einsum("ip,ikn->kpn", method.dense, all_slopes)
            taken.append(_Taken(columns, position[columns], steps, apart[:, part], mark[part], before[:, part], dense))
            position[columns] += steps
            y[:, columns] = ends
            slope[:, columns] = all_slopes[-1]
            new = (now != mode[:, part]).any(axis=0)
            left_behind[:, columns] |= mode[:, part] & ~now
            inside[:, columns] = now
            if new.any():
                slope[:, columns[new]] = method.rates(
                    ends[:, new], columns[new], now[:, new] & ~left_behind[:, columns[new]]
                )
            longest[columns] = problem.longest(ends, slope[:, columns], columns)
            reached[columns] = left <= 0.0
        stuck = length[active] < SHORTEST * longest[active]
        lost = ~np.isfinite(slope[:, active]).all(axis=0)
        active = active[~(reached[active] | stuck | lost)]
    return _gathered(taken, y, reached, method.calls)


@dataclass(frozen=True)
class _Start:
    """Beginnings of steps that pass an event; ``apart`` is what the rates are told of ``inside``."""

    y: Array
    slope: Array
    columns: Indices
    inside: Flags
    apart: Flags


def _land(method: _Method, start: _Start, length: Array, end: Array, slopes: Array) -> tuple[Array, Array, Array]:
    """Steps shortened so that they end just behind the first event they pass.

    Bracketing with the method of Illinois (Dowell and Jarratt 1971, https://doi.org/10.1007/BF01934364) on the nearest
    of the events, which is positive before it; at most 60 rounds, halving the bracket where that gains little.
    """
    problem, every = method.problem, np.arange(length.size)
    end, slopes = end.copy(), slopes.copy()
    low, high = np.zeros_like(length), length.copy()
    # Aimed at is a place a little behind the event, so that the last step ends behind it.
    low_value = _nearest(problem, start, every, start.y) + 0.5 * _NEAR
    high_value = _nearest(problem, start, every, end) + 0.5 * _NEAR
    moved_low = np.zeros(length.size, dtype=int)
    open_ = np.nonzero(high_value < -0.5 * _NEAR)[0]
    for rounds in range(60):
        open_ = open_[(high - low)[open_] > _PLACE * length[open_]]
        if not open_.size:
            break
        with np.errstate(all="ignore"):
            part = low_value[open_] / (low_value[open_] - high_value[open_])
        part = np.where((part > 0.0) & (part < 1.0) & (rounds % 6 != 5), part, 0.5)
        trial = low[open_] + part * (high - low)[open_]
        found, found_slopes = method.step(
            start.y[:, open_], start.slope[:, open_], trial, start.columns[open_], start.apart[:, open_]
        )
        value = _nearest(problem, start, open_, found) + 0.5 * _NEAR
        value = np.where(np.isfinite(value), value, -1.0)
        behind = value <= 0.5 * _NEAR
        kept, moved = open_[behind], open_[~behind]
        high[kept], high_value[kept] = trial[behind], value[behind]
        end[:, kept], slopes[:, :, kept] = found[:, behind], found_slopes[:, :, behind]
        low[moved], low_value[moved] = trial[~behind], value[~behind]
        # An end that stays twice is weighed half.
        low_value[kept] *= np.where(moved_low[kept] == -1, 0.5, 1.0)
        high_value[moved] *= np.where(moved_low[moved] == 1, 0.5, 1.0)
        moved_low[kept], moved_low[moved] = -1, 1
        open_ = open_[~(behind & (value >= -0.5 * _NEAR))]
    return high, end, slopes


def _nearest(problem: Problem, start: _Start, which: Indices, y: Array) -> Array:
    """Distance to the nearest event, shape (n,): the end, or the saturation line from the side a body is on."""
    left, _, far = problem.events(y, start.columns[which])
    signed = np.where(start.inside[:, which], -far, far)
    nearest: Array = np.minimum(left, np.min(signed, axis=0, initial=np.inf))
    return nearest


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

"""Brackets of all roots of a function that may turn."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["brackets"]

FloatArray = NDArray[Any]
Indices = NDArray[np.intp]

#: Points at which a function is looked at, and steps towards an extreme between them.
_SCANNED = 33
_TURNS = 10

Gap = Callable[[Indices, FloatArray], FloatArray]


def brackets(gap: Gap, low: FloatArray, high: FloatArray, *, geometric: bool) -> tuple[Indices, FloatArray, FloatArray]:
    """Where a function changes its sign between ``low`` and ``high``.

    Parameters
    ----------
    gap : of indices of states and places [any unit], both of shape (n,).
    low, high : ends of the range [same unit], shape (N,).
    geometric : whether the points lie in equal ratios and not in equal distances.

    Returns
    -------
    Index of the state, and the ends of each bracket. Pairs of roots around an extreme are found where a parabola
    through three points leads to it.
    """
    steps = np.linspace(0.0, 1.0, _SCANNED)
    if geometric:
        grid = low[:, None] * np.exp(steps * np.log(high / low)[:, None])
    else:
        grid = low[:, None] + steps * (high - low)[:, None]
    grid[:, -1] = high
    gaps = gap(np.repeat(np.arange(low.size), _SCANNED), grid.ravel()).reshape(grid.shape)
    signs = np.sign(gaps)
    state, step = np.nonzero((signs[:, 1:] * signs[:, :-1] < 0.0) | (gaps[:, 1:] == 0.0))
    found = [(state, grid[state, step], grid[state, step + 1]), *_extremes(gap, grid, gaps)]
    states, starts, stops = (np.concatenate(parts) for parts in zip(*found, strict=True))
    return states, starts, stops


def _extremes(gap: Gap, grid: FloatArray, gaps: FloatArray) -> list[tuple[Indices, FloatArray, FloatArray]]:
    """Brackets on both sides of extremes that reach beyond zero between points on one side of it."""
    signs, size = np.sign(gaps), np.abs(gaps)
    turns = (signs[:, :-2] == signs[:, 2:]) & (signs[:, 1:-1] == signs[:, 2:])
    turns &= (size[:, 1:-1] <= size[:, :-2]) & (size[:, 1:-1] <= size[:, 2:])
    state, step = np.nonzero(turns)
    places = [grid[state, step + shift] for shift in range(3)]
    values = [gaps[state, step + shift] for shift in range(3)]
    found = []
    for turn in range(_TURNS):
        if not state.size:
            break
        # a parabola alone creeps up on an extreme that is steep on one side
        place = _middle(places) if turn % 2 else _vertex(places, values)
        value = gap(state, place)
        reached = np.sign(value) != np.sign(values[1])
        for end, other in ((places[0], place), (place, places[2])):
            found.append((state[reached], end[reached], other[reached]))
        # else the extreme lies beside the better of the two inner points
        before, better = place < places[1], np.abs(value) < np.abs(values[1])
        for column, new in ((places, place), (values, value)):
            first, middle, last = column
            column[0] = np.where(before, np.where(better, first, new), np.where(better, middle, first))
            column[2] = np.where(before, np.where(better, middle, last), np.where(better, last, new))
            column[1] = np.where(better, new, middle)
        keep = ~reached & np.isfinite(value)
        state = state[keep]
        places, values = ([part[keep] for part in column] for column in (places, values))
    return found


def _vertex(places: list[FloatArray], values: list[FloatArray]) -> FloatArray:
    """Vertex of the parabola through three points, kept off the middle one and inside."""
    (a, b, c), (fa, fb, fc) = places, values
    left, right = (b - a) * (fb - fc), (b - c) * (fb - fa)
    with np.errstate(all="ignore"):
        vertex = b - 0.5 * ((b - a) * left - (b - c) * right) / (left - right)
    good = (vertex > a) & (vertex < c) & (np.abs(vertex - b) > 1e-6 * (c - a))
    return np.where(good, vertex, _middle(places))


def _middle(places: list[FloatArray]) -> FloatArray:
    """Middle of the wider of two neighbouring intervals."""
    a, b, c = places
    return np.where(b - a > c - b, 0.5 * (a + b), 0.5 * (b + c))

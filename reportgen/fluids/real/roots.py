"""Roots of functions of one variable for whole batches: one in a bracket, or every one along a grid."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

__all__ = ["AllRoots", "all_roots", "bracketed_root"]

FloatArray = NDArray[Any]
IntArray = NDArray[np.intp]

#: x and the columns of the batch it belongs to, both of shape (M,) -> f(x) of shape (M,).
Function = Callable[[FloatArray, IntArray], FloatArray]

_ITERATIONS = 120
#: Relative width at which a bracket counts as closed: twice the spacing of doubles.
_CLOSED = 4.5e-16
#: Rounding granted at turning points, in parts of that at ends: a value given may be that of the turning point itself.
_AT_TURNS = 20.0


def bracketed_root(
    function: Function,
    low: FloatArray,
    high: FloatArray,
    at_low: FloatArray,
    at_high: FloatArray,
    columns: IntArray | None = None,
) -> FloatArray:
    """Root of f between ``low`` and ``high``, where f changes sign, without derivatives.

    Chandrupatla's choice between inverse quadratic interpolation and bisection (Adv. Eng. Softw. 28 (1997) 145,
    doi:10.1016/S0965-9978(96)00051-8): as safe as bisection, some ten evaluations for a smooth function.

    Parameters
    ----------
    function : x [any unit] and columns -> f(x).
    low, high : ends of the brackets, shape (M,).
    at_low, at_high : f there, of opposite sign or zero.
    columns : what to hand to ``function`` beside x; 0 to M − 1 if left out.

    Returns
    -------
    the roots [unit of x]; NaN where f became NaN or has no change of sign.
    """
    count = low.size
    result = np.full(count, np.nan)
    columns = np.arange(count) if columns is None else columns
    a, b, fa, fb = high.copy(), low.copy(), at_high.copy(), at_low.copy()
    result[fa == 0], result[fb == 0] = a[fa == 0], b[fb == 0]
    active = np.flatnonzero((fa < 0) & (fb > 0) | (fa > 0) & (fb < 0))
    a, b, fa, fb = a[active], b[active], fa[active], fb[active]
    # a straight line first: most functions here are not far from one
    share = np.clip(fa / (fa - fb), 0.02, 0.98)
    for _ in range(_ITERATIONS):
        if not active.size:
            break
        x = a + share * (b - a)
        fx = function(x, columns[active])
        same = (fx > 0) == (fa > 0)
        # c is the point left behind: the former a on the same side, else the former b
        c, fc = np.where(same, a, b), np.where(same, fa, fb)
        b, fb = np.where(same, b, a), np.where(same, fb, fa)
        a, fa = x, fx
        nearer = np.abs(fa) < np.abs(fb)
        best = np.where(nearer, a, b)
        with np.errstate(divide="ignore", invalid="ignore"):
            least = _CLOSED * np.abs(best) / np.abs(b - a)
        lost = np.isnan(fx)
        done = ~(least <= 0.5) | (fx == 0) | lost
        if done.any():
            result[active[done]] = np.where(lost, np.nan, best)[done]
            keep = ~done
            active = active[keep]
            a, b, c, fa, fb, fc, least = (part[keep] for part in (a, b, c, fa, fb, fc, least))
        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            xi, phi = (a - b) / (c - b), (fa - fb) / (fc - fb)
            smooth = (phi * phi < xi) & ((1 - phi) ** 2 < 1 - xi)
            inverse = fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (fc - fb)
        share = np.where(smooth & np.isfinite(inverse), inverse, 0.5)
        share = np.minimum(np.maximum(share, least), 1 - least)
    return result


class AllRoots(NamedTuple):
    """Roots found, arrays of shape (M,): ``column`` of the batch and ``x``; and of each column the ``least`` and
    ``greatest`` value of f that occurs, shape (N,).
    """

    column: IntArray
    x: FloatArray
    least: FloatArray
    greatest: FloatArray


def all_roots(
    function: Function,
    grid: FloatArray,
    rounding: FloatArray,
    slope: FloatArray | None = None,
    slope_function: Function | None = None,
) -> AllRoots:
    """Every root of f along a grid, also two of them close to each other where f turns.

    Between neighbouring points of the grid f may turn once. Where its slope changes sign the turning point is found
    first; between ends and turning points f is monotone, so that each change of sign is one root, and none is missed.

    Parameters
    ----------
    function : x [any unit] and columns -> f(x).
    grid : points, shape (G, N), not descending; equal neighbours do no harm.
    rounding : |f| that counts as zero at ends [unit of f], shape (N,); more is granted at turning points.
    slope : f′ at the grid, or anything of its sign; left out where every point of the grid is to be an end.
    slope_function : x and columns -> the same at any x; needed with ``slope``.
    """
    points, size = grid.shape
    every = np.arange(size)
    if slope is None:
        column, x = np.tile(every, points), grid.reshape(-1)
        granted = rounding[column]
    else:
        assert slope_function is not None
        rows, turned = np.nonzero((slope[:-1] > 0) != (slope[1:] > 0))
        low, high = grid[rows, turned], grid[rows + 1, turned]
        turning = bracketed_root(slope_function, low, high, slope[rows, turned], slope[rows + 1, turned], turned)
        known = ~np.isnan(turning)
        column = np.concatenate([every, every, turned[known]])
        x = np.concatenate([grid[0], grid[-1], turning[known]])
        granted = rounding[column]
        granted[2 * size :] *= _AT_TURNS
    order = np.lexsort((x, column))
    column, x, granted = column[order], x[order], granted[order]
    f = function(x, column)
    f = np.where(np.abs(f) <= granted, 0.0, f)
    least, greatest = np.full(size, np.inf), np.full(size, -np.inf)
    known = np.isfinite(f)
    np.minimum.at(least, column[known], f[known])
    np.maximum.at(greatest, column[known], f[known])
    zero = f == 0
    zero[1:] &= ~((x[1:] == x[:-1]) & (column[1:] == column[:-1]) & zero[:-1])
    left = np.flatnonzero((column[1:] == column[:-1]) & (f[1:] * np.sign(f[:-1]) < 0))
    found = bracketed_root(function, x[left], x[left + 1], f[left], f[left + 1], column[left])
    good = ~np.isnan(found)
    return AllRoots(
        np.concatenate([column[zero], column[left[good]]]),
        np.concatenate([x[zero], found[good]]),
        least,
        greatest,
    )

"""One root inside a bracket, for all states at once."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["bracketed_root"]

FloatArray = NDArray[Any]
BoolArray = NDArray[np.bool_]

_ITERATIONS = 120
_RELATIVE = 2.0 * np.finfo(float).eps


def bracketed_root(
    function: Callable[[FloatArray, NDArray[np.intp]], FloatArray],
    low: FloatArray,
    high: FloatArray,
    at_low: FloatArray,
    at_high: FloatArray,
    *,
    edge: float = 1e-7,
) -> tuple[FloatArray, BoolArray]:
    """Where a function changes its sign, by inverse quadratic interpolation or bisection.

    Chandrupatla (1997): A new hybrid quadratic/bisection algorithm for finding the zero of a nonlinear function,
    Adv. Eng. Softw. 28, 145-149, doi:10.1016/S0965-9978(96)00051-8. Infinite values are met by bisection.

    Parameters
    ----------
    function : of places [any unit], shape (n,), and the indices of their states; NaN stops a state, infinite values
        say on which side of it the function exists.
    low, high : the brackets [same unit], shape (N,).
    at_low, at_high : values of the function there.
    edge : relative width [1] of a bracket with an infinite end at which it is given up.

    Returns
    -------
    The places, and where one was found.
    """
    size = low.size
    result = np.where(at_low == 0.0, low, high)
    found = (at_low == 0.0) | (at_high == 0.0)
    todo = np.flatnonzero(~found & (np.sign(at_low) * np.sign(at_high) < 0.0))
    a, b = high[todo], low[todo]
    fa, fb = at_high[todo], at_low[todo]
    c, fc = a.copy(), fa.copy()
    part = np.full(todo.size, 0.5)
    for _ in range(_ITERATIONS):
        if not todo.size:
            break
        place = a + part * (b - a)
        value = function(place, todo)
        same = np.sign(value) == np.sign(fa)
        c, fc = np.where(same, a, b), np.where(same, fa, fb)
        b, fb = np.where(same, b, a), np.where(same, fb, fa)
        a, fa = place, value
        nearer = np.abs(fa) < np.abs(fb)
        best, at_best = np.where(nearer, a, b), np.where(nearer, fa, fb)
        with np.errstate(all="ignore"):
            limit = _RELATIVE * np.abs(best) / np.abs(b - a)
            done = (at_best == 0.0) | (limit > 0.5)
            # next to an infinite value there is only the edge of where the function exists
            lost = np.isnan(value) | (~np.isfinite(fa + fb) & (np.abs(b - a) < edge * (np.abs(a) + np.abs(b))))
            xi, phi = (a - b) / (c - b), (fa - fb) / (fc - fb)
            curved = (phi**2 < xi) & ((1.0 - phi) ** 2 < 1.0 - xi)
            quadratic = fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (fc - fb)
            part = np.where(curved & np.isfinite(quadratic), quadratic, 0.5)
            part = np.clip(part, limit, 1.0 - limit)
        result[todo] = best
        found[todo[done & ~lost]] = True
        keep = ~(done | lost)
        todo, part = todo[keep], part[keep]
        a, b, c, fa, fb, fc = (array[keep] for array in (a, b, c, fa, fb, fc))
    assert result.size == size
    return result, found

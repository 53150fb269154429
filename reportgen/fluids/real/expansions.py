"""Piecewise Chebyshev expansions: how saturation curves are carried in the data files."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["Expansions"]

FloatArray = NDArray[np.float64]

#: Elements worked on at a time, so that the temporaries stay in the cache.
_CHUNK = 1024
#: Below this number of elements one call of the cosine is quicker than a recurrence of many.
_FEW = 100


class Expansions:
    """Several functions of one variable on common intervals: f(x) = Σ c_k T_k(z), with z in [−1, 1] across an interval.

    Parameters
    ----------
    edges : ends of the intervals, ascending, shape (intervals + 1,).
    coefficients : for each function, for each interval, c_0 ... c_n; nested lists or shape (functions, intervals, n +
    1).
    """

    def __init__(self, edges: Sequence[float], coefficients: Sequence[Any]) -> None:
        self.edges = np.array(edges)
        self._inner = self.edges[1:-1]
        self._middle = (self.edges[1:] + self.edges[:-1]) / 2
        self._half = (self.edges[1:] - self.edges[:-1]) / 2
        # (intervals, functions, n + 1): one gather fetches all that an element needs
        self.coefficients = np.ascontiguousarray(np.moveaxis(np.array(coefficients), 0, 1))
        self._orders = np.arange(self.coefficients.shape[-1], dtype=np.float64)[:, None]

    def __call__(self, x: FloatArray) -> FloatArray:
        """Values of all functions, in their own units, at x [1] of shape (N,): shape (functions, N). Outside the edges
        the last piece is used at its end; NaN gives NaN.
        """
        values = np.empty((self.coefficients.shape[1], x.size))
        for start in range(0, x.size, _CHUNK):
            part = x[start : start + _CHUNK]
            piece = self._inner.searchsorted(part)
            place = (part - self._middle[piece]) / self._half[piece]
            polynomials = self._polynomials(np.minimum(np.maximum(place, -1.0), 1.0))
            np.einsum("nfk,kn->fn", self.coefficients[piece], polynomials, out=values[:, start : start + _CHUNK])
        return values

    def _polynomials(self, place: FloatArray) -> FloatArray:
        """T_k(z) for k = 0 ... n at z [1] of shape (N,): shape (n + 1, N)."""
        if place.size < _FEW:
            return np.cos(self._orders * np.arccos(place))
        result = np.empty((self._orders.size, place.size))
        result[0], result[1] = 1.0, place
        twice = place + place
        for k in range(2, self._orders.size):
            np.multiply(twice, result[k - 1], out=result[k])
            result[k] -= result[k - 2]
        return result

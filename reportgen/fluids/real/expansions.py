"""Piecewise Chebyshev expansions: how saturation curves are carried in the data files."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["Expansions"]

FloatArray = NDArray[np.float64]


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
        self._orders = np.arange(self.coefficients.shape[-1], dtype=np.float64)

    def __call__(self, x: FloatArray) -> FloatArray:
        """Values of all functions, in their own units, at x [1] of shape (N,): shape (functions, N). Outside the edges
        the last piece is used at its end; NaN gives NaN.
        """
        piece = self._inner.searchsorted(x)
        place = (x - self._middle[piece]) / self._half[piece]
        angle = np.arccos(np.minimum(np.maximum(place, -1.0), 1.0))
        polynomials = np.cos(angle[:, None] * self._orders)
        values: FloatArray = np.einsum("nfk,nk->fn", self.coefficients[piece], polynomials)
        return values

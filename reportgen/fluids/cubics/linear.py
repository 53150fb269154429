"""Small systems of linear equations, one for each state."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["solve_each"]

FloatArray = NDArray[Any]


def solve_each(matrix: FloatArray, right: FloatArray) -> FloatArray:
    """Solution [as given] of each system, shape (N, C), from matrices (N, C, C) and right sides (N, C).

    Where a matrix is singular or holds NaN, the solution is zero: no step.
    """
    bad = np.asarray(~np.isfinite(matrix).all(axis=(1, 2)) | ~np.isfinite(right).all(axis=1))
    if bad.any():
        matrix = np.where(bad[:, None, None], np.eye(matrix.shape[1]), matrix)
        right = np.where(bad[:, None], 0.0, right)
    try:
        return np.asarray(np.linalg.solve(matrix, right[..., None])[..., 0])
    except np.linalg.LinAlgError:
        determinant = np.linalg.det(matrix)
        singular = ~(np.abs(determinant) > 0.0)
        matrix = np.where(singular[:, None, None], np.eye(matrix.shape[1]), matrix)
        right = np.where(singular[:, None], 0.0, right)
        return np.asarray(np.linalg.solve(matrix, right[..., None])[..., 0])

"""The non-analytic critical terms of the reference equations for water and carbon dioxide.

Wagner and Pruß, J. Phys. Chem. Ref. Data 31 (2002) 387, doi:10.1063/1.1461829, eq. (6.6); IAPWS R6-95(2018), Table 5::

    φ = Σ n Δ^b δ ψ,   Δ = θ² + B [(δ−1)²]^a,   θ = (1−τ) + A [(δ−1)²]^(1/(2β)),
    ψ = exp[−C (δ−1)² − D (τ−1)²]
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["CUTOFF", "SMALLEST_DISTANCE", "NonAnalytic"]

FloatArray = NDArray[Any]

#: Where nδψ is below e^(−33) = 5e-15 the terms are left out: next to 1, the compressibility factor of the ideal gas,
#: they change a pressure by less than 1e-13 on the dilute side and by less than 1e-12 on the dense one.
CUTOFF = 33.0

#: Nearest approach to the critical isochore and to the critical point, where higher derivatives are singular.
SMALLEST_DISTANCE = 1e-30
_SMALLEST = {np.dtype(np.float64): SMALLEST_DISTANCE, np.dtype(np.longdouble): 1e-36}


class NonAnalytic:
    """Sum of the non-analytic terms and its derivatives.

    Parameters
    ----------
    term : lists ``n, a, b, beta, A, B, C, D`` of equal length, dimensionless.
    dtype : floating type of the calculation.
    """

    def __init__(self, term: Mapping[str, list[float]], dtype: type[np.floating[Any]] = np.float64) -> None:
        def column(name: str) -> FloatArray:
            return np.array(term[name], dtype=dtype).reshape(-1, 1)

        n, a, b, beta = (column(name) for name in ("n", "a", "b", "beta"))
        big_a, big_b, big_c, big_d = (column(name) for name in ("A", "B", "C", "D"))
        q = dtype(0.5) / beta
        self._n, self._b = n, b
        self._theta_power, self._distance_power = q - 1, a - 1
        self._big_a, self._big_b = big_a, big_b
        self._twice_c, self._twice_d = 2 * big_c, 2 * big_d
        # coefficients of θ y^(q−1), y^(a−1) and y^(2q−1) in Δ_δ/(δ−1) and in Δ_δδ, with y = (δ−1)², q = 1/(2β)
        self._slope_theta, self._slope_distance = 2 / beta * big_a, 2 * big_b * a
        self._bend_theta = self._slope_theta * (2 * q - 1)
        self._bend_distance = self._slope_distance * (2 * a - 1)
        self._bend_square = 2 * (big_a / beta) ** 2
        self._least_c, self._least_d = float(big_c.min()), float(big_d.min())
        self._cutoff = CUTOFF + math.log(float(np.abs(self._n).max()))
        self._smallest = _SMALLEST[np.dtype(dtype)]

    def matters(self, delta: FloatArray, tau: FloatArray) -> NDArray[np.intp]:
        """Indices of the elements of δ, τ [1], shape (N,), where the terms are not negligible."""
        exponent = self._least_d * (tau - 1) ** 2
        exponent += self._least_c * (delta - 1) ** 2
        exponent -= np.log(delta)
        return np.flatnonzero(exponent < self._cutoff)

    def values(self, delta: FloatArray, tau: FloatArray, *, density_only: bool = False) -> tuple[FloatArray, ...]:
        """(δφ_δ, δ²φ_δδ) and, unless ``density_only``, φ, τφ_τ, τ²φ_ττ, δτφ_δτ [1] at δ, τ [1]; each of shape (N,)."""
        # With W = n Δ^b ψ, logarithmic derivatives g = (ln Δ^b ψ)_δ, h = (ln Δ^b ψ)_τ: φ_δ = Σ W (1 + δ g) and so on.
        b = self._b
        x, z = delta - 1, tau - 1
        x2 = x * x
        y = np.maximum(x2, self._smallest)
        u = y**self._theta_power
        v = y**self._distance_power
        theta = self._big_a * (u * y) - z
        distance = theta * theta + self._big_b * (v * y)
        np.maximum(distance, self._smallest, out=distance)
        log_weight = b * np.log(distance)
        log_weight -= 0.5 * (self._twice_c * x2 + self._twice_d * (z * z))
        weight = self._n * np.exp(log_weight)
        over = b / distance
        w = theta * u
        d_delta = (self._slope_theta * w + self._slope_distance * v) * x
        relative = d_delta / distance
        bend = self._bend_theta * w + self._bend_distance * v + self._bend_square * (u * u * y)
        g = b * relative - self._twice_c * x
        g_d = over * bend - b * (relative * relative) - self._twice_c
        total = np.add.reduce
        growth = 1 + delta * g
        first = delta * total(weight * growth, axis=0)
        second = delta**2 * total(weight * (2 * g + delta * (g * g + g_d)), axis=0)
        if density_only:
            return first, second
        slope = 2 * theta * over
        h = -self._twice_d * z - slope
        h_t = 2 * over - slope * (2 * theta / distance) - self._twice_d
        g_t = slope * relative - self._slope_theta * (over * (x * u))
        value = delta * total(weight, axis=0)
        tau_first = tau * delta * total(weight * h, axis=0)
        tau_second = tau**2 * delta * total(weight * (h * h + h_t), axis=0)
        mixed = delta * tau * total(weight * (h * growth + delta * g_t), axis=0)
        return first, second, value, tau_first, tau_second, mixed

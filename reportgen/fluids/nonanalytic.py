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

__all__ = ["NonAnalytic"]

FloatArray = NDArray[Any]

#: Where nδψ is below e^(−33) = 5e-15 the terms are left out: next to 1, the compressibility factor of the ideal gas,
#: they change a pressure by less than 1e-13 on the dilute side and by less than 1e-12 on the dense one.
_CUTOFF = 33.0

#: Nearest approach to the critical isochore and to the critical point, where higher derivatives are singular.
_SMALLEST = {np.dtype(np.float64): 1e-30, np.dtype(np.longdouble): 1e-36}


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

        self._n, self._a, self._b, self._beta = (column(name) for name in ("n", "a", "b", "beta"))
        self._big_a, self._big_b, self._big_c, self._big_d = (column(name) for name in ("A", "B", "C", "D"))
        self._least_c, self._least_d = float(self._big_c.min()), float(self._big_d.min())
        self._cutoff = _CUTOFF + math.log(float(np.abs(self._n).max()))
        self._smallest = _SMALLEST[np.dtype(dtype)]

    def matters(self, delta: FloatArray, tau: FloatArray) -> NDArray[np.intp]:
        """Indices of the elements where the terms are not negligible."""
        exponent = self._least_d * (tau - 1) ** 2
        exponent += self._least_c * (delta - 1) ** 2
        exponent -= np.log(delta)
        return np.flatnonzero(exponent < self._cutoff)

    def values(self, delta: FloatArray, tau: FloatArray, *, density_only: bool = False) -> tuple[FloatArray, ...]:
        """(δφ_δ, δ²φ_δδ) and, unless ``density_only``, also φ, τφ_τ, τ²φ_ττ, δτφ_δτ; each of shape (N,)."""
        n, a, b, beta = self._n, self._a, self._b, self._beta
        big_a, big_b, big_c, big_d = self._big_a, self._big_b, self._big_c, self._big_d
        x = delta - 1
        y = np.maximum(x * x, self._smallest)
        q = 0.5 / beta
        y_q1 = y ** (q - 1)
        y_a1 = y ** (a - 1)
        theta = (1 - tau) + big_a * y_q1 * y
        distance = theta * theta + big_b * y_a1 * y
        np.maximum(distance, self._smallest, out=distance)
        psi = np.exp(-big_c * (x * x) - big_d * (tau - 1) ** 2)
        # Derivatives of Δ without negative powers of (δ−1).
        brace = 2 / beta * big_a * theta * y_q1 + 2 * big_b * a * y_a1
        d_delta = x * brace
        d_delta2 = (
            brace
            + 4 * big_b * a * (a - 1) * y_a1
            + 2 * (big_a / beta * y_q1) ** 2 * y
            + 4 / beta * big_a * theta * (q - 1) * y_q1
        )
        power = distance**b
        power1 = b * power / distance
        power2 = (b - 1) * power1 / distance
        f_d = power1 * d_delta
        f_dd = power1 * d_delta2 + power2 * d_delta**2
        psi_d = -2 * big_c * x * psi
        psi_dd = (2 * big_c * x * x - 1) * 2 * big_c * psi
        weight = psi + delta * psi_d

        def total(terms: FloatArray) -> FloatArray:
            summed: FloatArray = np.add.reduce(n * terms, axis=0)
            return summed

        first = delta * total(power * weight + f_d * delta * psi)
        second = delta**2 * total(
            power * (2 * psi_d + delta * psi_dd) + 2 * f_d * weight + f_dd * delta * psi,
        )
        if density_only:
            return first, second
        f_t = -2 * theta * power1
        f_tt = 2 * power1 + 4 * theta**2 * power2
        f_dt = -2 / beta * big_a * power1 * x * y_q1 - 2 * theta * power2 * d_delta
        psi_t = -2 * big_d * (tau - 1) * psi
        psi_tt = (2 * big_d * (tau - 1) ** 2 - 1) * 2 * big_d * psi
        psi_dt = 4 * big_c * big_d * x * (tau - 1) * psi
        value = delta * total(power * psi)
        tau_first = tau * delta * total(f_t * psi + power * psi_t)
        tau_second = tau**2 * delta * total(f_tt * psi + 2 * f_t * psi_t + power * psi_tt)
        mixed = (
            delta
            * tau
            * total(power * (psi_t + delta * psi_dt) + delta * f_d * psi_t + f_t * weight + f_dt * delta * psi)
        )
        return first, second, value, tau_first, tau_second, mixed

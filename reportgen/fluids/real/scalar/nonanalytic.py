"""The non-analytic critical terms at one state; equations and source in ../nonanalytic.py."""

from __future__ import annotations

from collections.abc import Mapping
from math import exp, log

from reportgen.fluids.real.nonanalytic import CUTOFF, SMALLEST_DISTANCE

__all__ = ["ScalarNonAnalytic"]


class ScalarNonAnalytic:
    """Sum of the non-analytic terms and its derivatives, with D = δ∂/∂δ and T = τ∂/∂τ.

    Parameters
    ----------
    term : lists ``n, a, b, beta, A, B, C, D`` of equal length, dimensionless.
    """

    def __init__(self, term: Mapping[str, list[float]]) -> None:
        names = ("n", "a", "b", "beta", "A", "B", "C", "D")
        self._terms = tuple(zip(*(map(float, term[name]) for name in names), strict=True))
        self._least_c, self._least_d = min(term["C"]), min(term["D"])
        self._cutoff = CUTOFF + log(max(map(abs, term["n"])))

    def matters(self, delta: float, tau: float) -> bool:
        """Whether the terms are not negligible at δ, τ [1]."""
        x, z = delta - 1.0, tau - 1.0
        return self._least_d * z * z + self._least_c * x * x - log(delta) < self._cutoff

    def values(self, delta: float, tau: float) -> tuple[float, float, float, float, float, float]:
        """φ, Dφ, D²φ, Tφ, T²φ, DTφ [1] at δ, τ [1]."""
        value = first = second = tau_first = tau_second = mixed = 0.0
        x, z = delta - 1.0, tau - 1.0
        x2 = x * x
        y = max(x2, SMALLEST_DISTANCE)
        log_y = log(y)
        for n, a, b, beta, big_a, big_b, big_c, big_d in self._terms:
            q = 0.5 / beta
            u, v = exp((q - 1.0) * log_y), exp((a - 1.0) * log_y)
            theta = big_a * u * y - z
            distance = max(theta * theta + big_b * v * y, SMALLEST_DISTANCE)
            weight = n * exp(b * log(distance) - big_c * x2 - big_d * z * z)
            w = theta * u
            slope_theta, slope_distance = 2.0 / beta * big_a, 2.0 * big_b * a
            relative = (slope_theta * w + slope_distance * v) * x / distance
            bend = (
                slope_theta * (2.0 * q - 1.0) * w
                + slope_distance * (2.0 * a - 1.0) * v
                + 2.0 * (big_a / beta) ** 2 * u * u * y
            )
            over = b / distance
            g = b * relative - 2.0 * big_c * x
            g_d = over * bend - b * relative * relative - 2.0 * big_c
            slope = 2.0 * theta * over
            h = -2.0 * big_d * z - slope
            h_t = 2.0 * over - slope * 2.0 * theta / distance - 2.0 * big_d
            g_t = slope * relative - slope_theta * over * x * u
            growth = 1.0 + delta * g
            value += weight
            first += weight * growth
            second += weight * (growth + delta * (2.0 * g + delta * (g * g + g_d)))
            tau_first += weight * h
            tau_second += weight * (h + tau * (h * h + h_t))
            mixed += weight * (h * growth + delta * g_t)
        return (
            delta * value,
            delta * first,
            delta * second,
            tau * delta * tau_first,
            tau * delta * tau_second,
            delta * tau * mixed,
        )

"""First-order propagation of uncertainty by JCGM 100:2008 (GUM), for many results at once.

All functions are pure and take *samples*: arrays whose last axis is the sample axis laid out by
``reportgen.evaluation.sampling`` for n uncertain inputs,

    column 0            base case
    columns 1 … n       input i at x_i + u(x_i), all others at their estimates
    columns n+1 … 2n    input i at x_i − u(x_i)

Source: JCGM 100:2008, Evaluation of measurement data. Guide to the expression of uncertainty in measurement.
https://doi.org/10.59161/JCGM100-2008E
"""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt

__all__ = [
    "combined_standard_uncertainty",
    "contributions",
    "coverage_probability",
    "curvature",
    "effective_degrees_of_freedom",
    "shares",
]

Array = npt.NDArray[np.float64]

#: Differences between columns smaller than this part of the result are what solvers leave, not an influence.
RESOLUTION = 1e-9


def contributions(samples: npt.ArrayLike) -> Array:
    """Signed contributions c_i·u(x_i) of each input to each result.

    JCGM 100, 5.1.3 note 2: Z_i = ½·[f(x_i + u_i) − f(x_i − u_i)], the central difference over ± one standard
    uncertainty. Where one of the two samples does not exist (NaN: beyond an efficiency of 1, outside a property
    model), the one-sided difference from the base case stands in for it.

    Args:
        samples: results along the sample axis, shape (…, 2n+1) [unit of the result].

    Returns:
        Shape (…, n) [unit of the result]. Exactly 0 below RESOLUTION times the result; NaN where neither sample
        exists or the base case does not.
    """
    base, upper, lower = _parts(samples)
    central = 0.5 * (upper - lower)
    difference = np.where(np.isnan(lower), upper - base, np.where(np.isnan(upper), base - lower, central))
    size = np.maximum(np.abs(base), np.maximum(np.nan_to_num(np.abs(upper)), np.nan_to_num(np.abs(lower))))
    result: Array = np.where(np.abs(difference) <= RESOLUTION * size, 0.0, difference)
    return result


def curvature(samples: npt.ArrayLike) -> Array:
    """Part of each contribution that first order leaves out: ½·[f(x_i + u_i) + f(x_i − u_i)] − f(x).

    JCGM 100, 5.1.2 note: where the function is markedly curved over ± u_i, higher-order terms count.

    Args:
        samples: results along the sample axis, shape (…, 2n+1) [unit of the result].

    Returns:
        Shape (…, n) [unit of the result]; NaN where one of the samples does not exist.
    """
    base, upper, lower = _parts(samples)
    result: Array = 0.5 * (upper + lower) - base
    return result


def combined_standard_uncertainty(contribution: npt.ArrayLike, correlation: npt.ArrayLike) -> Array:
    """Combined standard uncertainty with correlations, JCGM 100 eq. 13 in the form of eq. 16.

    u_c² = Σ_i Σ_j Z_i Z_j r_ij

    Args:
        contribution: Z_i, shape (…, n) [unit of the result].
        correlation: r_ij, shape (n, n) [1], symmetric, positive semi-definite, ones on the diagonal.

    Returns:
        u_c, shape (…) [unit of the result]; NaN where a contribution is NaN.
    """
    contribution = np.asarray(contribution, dtype=float)
    variance = np.sum(contribution * (contribution @ np.asarray(correlation, dtype=float)), axis=-1)
    result: Array = np.sqrt(np.maximum(variance, 0.0))
    return result


def shares(contribution: npt.ArrayLike, correlation: npt.ArrayLike) -> Array:
    """Share of each input in the variance, Z_i Σ_j r_ij Z_j / u_c².

    The shares of a result sum to 1. With correlations a single share may be negative.

    Args:
        contribution: Z_i, shape (…, n) [unit of the result].
        correlation: r_ij, shape (n, n) [1].

    Returns:
        Shape (…, n) [1]; 0 where the result has no uncertainty.
    """
    contribution = np.asarray(contribution, dtype=float)
    parts = contribution * (contribution @ np.asarray(correlation, dtype=float))
    variance = np.sum(parts, axis=-1, keepdims=True)
    result: Array = np.divide(parts, variance, out=np.zeros_like(parts), where=variance > 0.0)
    return result


def effective_degrees_of_freedom(
    contribution: npt.ArrayLike, degrees_of_freedom: npt.ArrayLike, correlation: npt.ArrayLike
) -> Array:
    """Effective degrees of freedom by Welch–Satterthwaite, JCGM 100 eq. G.2b.

    ν_eff = u_c⁴ / Σ_i (Z_i⁴ / ν_i)

    The formula holds for independent inputs only. Where an input of finite ν_i contributes and is correlated with
    another that contributes, the result is NaN: there is no such number, rather than a wrong one.

    Args:
        contribution: Z_i, shape (…, n) [unit of the result].
        degrees_of_freedom: ν_i, shape (n,) [1], inf where the uncertainty itself is taken as exact.
        correlation: r_ij, shape (n, n) [1].

    Returns:
        Shape (…) [1]; inf where every contributing input has infinite degrees of freedom.
    """
    contribution = np.asarray(contribution, dtype=float)
    freedom = np.asarray(degrees_of_freedom, dtype=float)
    correlation = np.asarray(correlation, dtype=float)
    total = combined_standard_uncertainty(contribution, correlation)
    spread = np.sum(contribution**4 / freedom, axis=-1)
    result = np.divide(total**4, spread, out=np.full_like(total, math.inf), where=spread != 0.0)
    active = contribution != 0.0
    linked = (correlation != 0.0) & ~np.eye(len(freedom), dtype=bool)
    unfounded = np.any(active & np.isfinite(freedom) & (active @ linked), axis=-1)
    answer: Array = np.where(unfounded, math.nan, result)
    return answer


def coverage_probability(coverage_factor: float, degrees_of_freedom: float) -> float:
    """Probability that y ± k·u_c covers, from Student's distribution, JCGM 100 annex G.3.

    Args:
        coverage_factor: k [1].
        degrees_of_freedom: ν_eff [1], inf for the normal distribution. Truncated to the next lower integer (G.4.1).

    Returns:
        Probability [1]; NaN when ν_eff is NaN or below 1.
    """
    if math.isinf(degrees_of_freedom):
        return math.erf(coverage_factor / math.sqrt(2.0))
    if math.isnan(degrees_of_freedom) or degrees_of_freedom < 1.0:
        return math.nan
    from scipy.special import stdtr

    return float(2.0 * stdtr(math.floor(degrees_of_freedom), coverage_factor) - 1.0)


def _parts(samples: npt.ArrayLike) -> tuple[Array, Array, Array]:
    values = np.asarray(samples, dtype=float)
    count = (values.shape[-1] - 1) // 2
    return values[..., :1], values[..., 1 : count + 1], values[..., count + 1 :]

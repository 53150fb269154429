"""How much vapour, from the equilibrium ratios.

    Σ z_i (K_i − 1)/(1 + V (K_i − 1)) = 0

Rachford, Rice (1952): Procedure for use of electronic digital computers in calculating flash vaporization hydrocarbon
equilibrium, J. Pet. Technol. 4 (10), 19, doi:10.2118/952327-G. The root is sought between the poles that keep all mole
fractions positive, so that it may lie below 0 or above 1 (Whitson, Michelsen 1989, doi:10.1016/0378-3812(89)80072-X).
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["vapour_fraction"]

FloatArray = NDArray[Any]

_ITERATIONS = 60
_SETTLED = 4e-16


def vapour_fraction(feed: FloatArray, ln_ratio: FloatArray) -> FloatArray:
    """Mole fraction V [1] of vapour, shape (N,).

    Parameters
    ----------
    feed : overall mole fractions z [1], shape (C, N) or (C, 1).
    ln_ratio : ln K_i [1], shape (C, N). Where all K_i are above 1 the answer is 1, where all are below it is 0.
    """
    excess = np.expm1(np.minimum(ln_ratio, 600.0))
    weighted = feed * excess
    # bounds inside the poles, from the term of one species alone
    with np.errstate(invalid="ignore", divide="ignore"):
        inverse = 1.0 / excess
        low = np.max(np.where(excess > 0.0, feed - (1.0 - feed) * inverse, -np.inf), axis=0)
        high = np.min(np.where(excess < 0.0, (feed - 1.0) * inverse, np.inf), axis=0)
    rising, falling = np.isinf(high), np.isinf(low)
    single = rising | falling
    low, high = np.where(single, 0.0, low), np.where(single, 1.0, high)
    fraction = 0.5 * (low + high)
    for _ in range(_ITERATIONS):
        part = 1.0 / (1.0 + fraction * excess)
        term = weighted * part
        value = np.sum(term, axis=0)
        slope = -np.sum(term * excess * part, axis=0)
        low, high = np.where(value > 0.0, fraction, low), np.where(value > 0.0, high, fraction)
        with np.errstate(invalid="ignore", divide="ignore"):
            trial = fraction - value / slope
        trial = np.where((trial >= low) & (trial <= high), trial, 0.5 * (low + high))
        moved = np.abs(trial - fraction)
        fraction = trial
        if not np.any(moved > _SETTLED * (1.0 + np.abs(fraction))):
            break
    return np.where(rising & ~falling, 1.0, np.where(falling & ~rising, 0.0, fraction))

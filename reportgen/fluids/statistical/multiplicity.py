"""S = k ln Ω: numbers of arrangements, and the entropies they stand for.

Independent systems multiply their numbers of arrangements, so their logarithms and their entropies add. The functions
work with ln Ω, since Ω itself overflows for a few hundred particles.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import gammaln

from reportgen.errors import Fault, InputError
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT
from reportgen.fluids.statistical.sums import BOLTZMANN

__all__ = ["entropy_of_arrangements", "log_arrangements", "mixing_entropy", "residual_entropy"]


def log_arrangements(counts: ArrayLike) -> Any:
    """ln Ω [1], Ω = N!/Π N_i! the number of ways to place N_1 + N_2 + ... particles on as many sites.

    Exact to rounding, by the logarithm of the gamma function.

    Parameters
    ----------
    counts : N_i [1] along the last axis, whole numbers from 0.

    Raises
    ------
    InputError : counts that are negative or no whole numbers.
    """
    numbers = np.asarray(counts, dtype=np.float64)
    known = numbers[~np.isnan(numbers)]
    if numbers.ndim == 0 or np.any(known < 0.0) or np.any(known != np.floor(known)) or np.any(np.isinf(known)):
        raise InputError(Fault("Particles are counted in whole numbers from 0.", found=repr(counts)[:60]))
    return gammaln(np.sum(numbers, axis=-1) + 1.0) - np.sum(gammaln(numbers + 1.0), axis=-1)


def entropy_of_arrangements(log_number: ArrayLike) -> Any:
    """S = k ln Ω [J/K] from ln Ω [1]."""
    return BOLTZMANN * np.asarray(log_number, dtype=np.float64)[()]


def mixing_entropy(fractions: ArrayLike) -> Any:
    """Entropy of mixing −R Σ x_i ln x_i [J/(mol*K)]: the limit of k ln Ω per mole for many particles.

    For N particles of n kinds ln Ω is less by about ½ ln[(2πN)^(n−1) Π x_i] in all (Stirling's formula), a part that
    vanishes for each particle as N grows.

    Parameters
    ----------
    fractions : mole fractions x_i [1] along the last axis, that add up to 1 within 1e-6.

    Raises
    ------
    InputError : fractions that are negative or do not add up to 1.
    """
    shares = np.asarray(fractions, dtype=np.float64)
    known = np.isfinite(shares).all(axis=-1) if shares.ndim else np.False_
    if shares.ndim == 0 or np.any(shares < 0.0) or np.any(np.abs(np.sum(shares, axis=-1) - 1.0)[known] > 1e-6):
        raise InputError(Fault("Mole fractions are not negative and add up to 1.", found=repr(fractions)[:60]))
    parts = np.where(shares == 0.0, 0.0, shares * np.log(np.where(shares == 0.0, 1.0, shares)))
    return -MOLAR_GAS_CONSTANT * np.sum(parts, axis=-1)


def residual_entropy(orientations: ArrayLike) -> Any:
    """Entropy R ln g [J/(mol*K)] left in a crystal whose molecules lie in any of g [1] orientations at random.

    What the counted entropy of a gas exceeds its calorimetric one by, where a crystal is disordered: R ln 2 at most
    for carbon monoxide, CO and OC alike in the crystal.

    Raises
    ------
    InputError : fewer than one orientation.
    """
    numbers = np.asarray(orientations, dtype=np.float64)
    if np.any(numbers < 1.0):
        raise InputError(Fault("A molecule has one orientation at least.", found=repr(orientations)[:60]))
    return MOLAR_GAS_CONSTANT * np.log(numbers)[()]

"""Two phases by the least Gibbs energy, where Newton's method for equal fugacities does not find them.

    G/(R T) = Σ v_i (ln y_i + ln φ_i(y)) + Σ l_i (ln x_i + ln φ_i(x)),   l_i = z_i − v_i

is lowered step by step in the amounts v_i, by Newton's method with the sign of negative curvatures turned and a line
search (Michelsen, Mollerup 2007: Thermodynamic models, chapter 10). It leads from any start below the Gibbs energy of
one phase to two, however close to the critical point.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.fugacity import Phase, Slopes, phase_at
from reportgen.fluids.cubics.mixing import Conditions, Mixture

__all__ = ["least_gibbs"]

FloatArray = NDArray[Any]
BoolArray = NDArray[np.bool_]

#: Shares of vapour from which to start; the one of the lowest Gibbs energy is taken.
_SHARES = (0.02, 0.1, 0.25, 0.5)
_STEPS = 150
#: Difference of ln f [1] at which phases are in equilibrium, and change of G/(R T) that may be rounding.
_EQUAL = 1e-11
_ROUNDING = 1e-15
#: Part of an amount that one step may take away.
_MOST = 0.9


class _Point(NamedTuple):
    """Amounts of vapour v_i with the two phases, the difference of ln f_i (C, N), and G/(R T) (N,)."""

    amounts: FloatArray
    liquid: Phase
    vapour: Phase
    gradient: FloatArray
    energy: FloatArray

    def take(self, where: NDArray[Any]) -> _Point:
        """The points at an index array or mask."""
        liquid, vapour = (Phase(*(array[..., where] for array in phase)) for phase in (self.liquid, self.vapour))
        return _Point(self.amounts[:, where], liquid, vapour, self.gradient[:, where], self.energy[where])

    def put(self, where: NDArray[Any], other: _Point) -> None:
        """Overwrite the points at an index array or mask."""
        for mine, theirs in zip((*self.liquid, *self.vapour), (*other.liquid, *other.vapour), strict=True):
            mine[..., where] = theirs
        self.amounts[:, where], self.gradient[:, where] = other.amounts, other.gradient
        self.energy[where] = other.energy


def least_gibbs(
    mixture: Mixture, feed: FloatArray, conditions: Conditions, ln_trial: FloatArray
) -> tuple[FloatArray, BoolArray]:
    """Amounts v_i [1] of one of two phases, shape (C, N), of a feed of mole fractions [1] of shape (C, 1); and where
    they are in equilibrium with the rest.

    ``ln_trial`` ln W_i [1] of a trial phase with a negative tangent-plane distance, shape (C, N).
    """
    trial = np.exp(ln_trial)
    trial /= np.sum(trial, axis=0)
    most = np.min(feed / trial, axis=0)
    point = _evaluate(mixture, feed, conditions, 0.9 * _SHARES[0] * most * trial)
    for share in _SHARES[1:]:
        tried = _evaluate(mixture, feed, conditions, 0.9 * share * most * trial)
        lower = tried.energy < point.energy
        point.put(lower, tried.take(lower))
    found = np.zeros(trial.shape[1], dtype=np.bool_)
    todo = np.arange(found.size)
    direction = _direction(mixture, feed, conditions, point)
    length = np.ones(found.size)
    for _ in range(_STEPS):
        here = point.take(todo)
        moved = here.amounts + length[todo] * direction[:, todo]
        tried = _evaluate(mixture, feed, conditions.take(todo), moved)
        better = tried.energy <= here.energy + _ROUNDING
        point.put(todo[better], tried.take(better))
        length[todo] = np.where(better, 1.0, 0.3 * length[todo])
        equal = better & (np.max(np.abs(tried.gradient), axis=0) < _EQUAL)
        found[todo[equal]] = True
        fresh = todo[better & ~equal]
        if fresh.size:
            direction[:, fresh] = _direction(mixture, feed, conditions.take(fresh), point.take(fresh))
        todo = todo[~equal & (length[todo] > 1e-8)]
        if not todo.size:
            break
    return point.amounts, found


def _evaluate(mixture: Mixture, feed: FloatArray, conditions: Conditions, amounts: FloatArray) -> _Point:
    rest = feed - amounts
    vapour, liquid = phase_at(mixture, conditions, amounts), phase_at(mixture, conditions, rest)
    ln_v, ln_l = np.log(vapour.fractions) + vapour.ln_phi, np.log(liquid.fractions) + liquid.ln_phi
    energy = np.sum(amounts * ln_v + rest * ln_l, axis=0)
    return _Point(amounts, liquid, vapour, ln_v - ln_l, energy)


def _direction(mixture: Mixture, feed: FloatArray, conditions: Conditions, point: _Point) -> FloatArray:
    """Newton step in amounts scaled by √(v_i l_i/z_i), short enough to leave some of every species in both phases."""
    amounts, rest = point.amounts, feed - point.amounts
    scale = np.sqrt(amounts * rest / feed)
    size = mixture.size
    matrix = np.zeros((amounts.shape[1], size, size))
    for phase, part in ((point.vapour, amounts), (point.liquid, rest)):
        slopes = Slopes(mixture, conditions, phase).composition() - 1.0
        index = np.arange(size)
        slopes[:, index, index] += 1.0 / phase.fractions.T
        matrix += slopes / np.sum(part, axis=0)[:, None, None]
    matrix *= scale.T[:, :, None] * scale.T[:, None, :]
    usable = np.asarray(np.isfinite(matrix).all(axis=(1, 2)))[:, None, None]
    values, vectors = np.linalg.eigh(np.where(usable, matrix, np.eye(size)))
    along = np.einsum("nij,in->nj", vectors, -scale * point.gradient) / np.maximum(np.abs(values), 1e-12)
    step = scale * np.einsum("nij,nj->in", vectors, along)
    room = np.where(step < 0.0, amounts, rest)
    longest = np.max(np.abs(step) / room, axis=0)
    limited: FloatArray = step / np.maximum(longest / _MOST, 1.0)
    return limited

"""Whether a phase stays one phase: the tangent-plane distance.

    tm(W) = 1 + Σ W_i (ln W_i + ln φ_i(W) − d_i − 1),   d_i = ln z_i + ln φ_i(z)

A phase z is stable if and only if tm is nowhere negative (Michelsen 1982: The isothermal flash problem, part I,
Fluid Phase Equilib. 9, 1-19, doi:10.1016/0378-3812(82)85001-2). Its minima are sought from several starts, by
accelerated successive substitution and, where that is slow, by Newton's method in 2 √W_i with a line search; where the
curvature is negative its sign is turned, which leads away from saddles.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.fugacity import Phase, Slopes, phase_at
from reportgen.fluids.cubics.mixing import Conditions, Mixture

__all__ = ["Verdict", "tangent_plane_test"]

FloatArray = NDArray[Any]

#: A tangent-plane distance [1] below this is negative, not rounding; and the same where the phase tested is itself the
#: result of a search, so that the distance to its partner is zero only as well as that search could make it.
_UNSTABLE = -1e-12
_THIRD_PHASE = -1e-8

#: Below this it is so far from zero that the trial phase is a good start for the flash, minimum or not.
_DEEP = -1e-3

#: Trial phases worked on at a time where states are few.
_TOGETHER = 1500

_SUBSTITUTIONS = 24
_NEWTON_STEPS = 60
#: Longest step [1] in ln W.
_LONGEST = 2.0
#: Where the gradient ends, and where a trial phase is on its way into the phase tested: square of the distance in
#: ln W and ln(v/b), and the least shrinking of it from step to step that is trusted.
_STATIONARY = 1e-8
_TRIVIAL = 1e-5
_TRIVIAL_RATE = 0.5
#: Mole fraction of the species that a nearly pure trial phase consists of: with a tenth of hexane, water is a vapour
#: where with a thousandth it is the liquid that is looked for.
_NEARLY_PURE = 0.999


class Verdict(NamedTuple):
    """``unstable``, shape (N,); ``ln_trial`` ln W_i [1] of a phase that shows it, shape (C, N), NaN where there is
    none; ``dense`` where that phase is denser than the phase tested.
    """

    unstable: NDArray[np.bool_]
    ln_trial: FloatArray
    dense: NDArray[np.bool_]


def tangent_plane_test(
    mixture: Mixture,
    conditions: Conditions,
    feed: FloatArray,
    tested: Phase,
    *,
    others: tuple[FloatArray, ...] = (),
    pure_only: bool = False,
) -> Verdict:
    """Test phases of N states.

    Parameters
    ----------
    mixture : the species.
    conditions : temperature [K] and pressure [Pa].
    feed : mole fractions [1] of the phases tested, shape (C, N).
    tested : the phases tested, on their stable root.
    others : mole fractions [1] of phases in equilibrium with those tested, shape (C, N), beside which a third phase
        is looked for.
    pure_only : whether to try nearly pure trial phases only.
    """
    size = conditions.temperature.size
    ln_feed = np.log(feed)
    level = ln_feed + tested.ln_phi
    known = [(ln_feed, np.log(tested.compressibility / tested.covolume))]
    for other in others:
        phase = phase_at(mixture, conditions, other)
        known.append((np.log(other), np.log(phase.compressibility / phase.covolume)))
    threshold = _THIRD_PHASE if others else _UNSTABLE
    lowest = np.full(size, threshold)
    best = np.full(feed.shape, np.nan)
    dense = np.zeros(size, dtype=np.bool_)
    starts = list(_starts(mixture, conditions, ln_feed, tested, pure_only=pure_only))
    # few states are tested from all starts at once, many from one after the other, most being settled by the first
    together = max(1, min(len(starts), _TOGETHER // size))
    for number in range(0, len(starts), together):
        wave = starts[number : number + together]
        # a shallow minimum shows that the phase splits, but a deeper one is a better start for finding into what
        todo = np.flatnonzero(lowest > _DEEP)
        if not todo.size:
            break
        each = np.tile(todo, len(wave))
        descent = _Descent(
            mixture, conditions.take(each), level[:, each], [(ln[:, each], space[each]) for ln, space in known]
        )
        reached, trial, compressibility = descent.run(np.concatenate([start(todo) for start in wave], axis=1))
        deepest = np.argmin(reached.reshape(len(wave), todo.size), axis=0) * todo.size + np.arange(todo.size)
        better = reached[deepest] < lowest[todo]
        where, chosen = todo[better], deepest[better]
        lowest[where] = reached[chosen]
        best[:, where] = trial[:, chosen]
        dense[where] = compressibility[chosen] < tested.compressibility[where]
    return Verdict(lowest < threshold, best, dense)


def _starts(
    mixture: Mixture, conditions: Conditions, ln_feed: FloatArray, tested: Phase, *, pure_only: bool
) -> Iterator[Callable[[NDArray[np.intp]], FloatArray]]:
    """Trial phases ln W [1] of chosen states.

    The starts are those of Li and Firoozabadi (2012, doi:10.1016/j.fluid.2012.06.021), Wilson's K both ways, their
    cube roots and each species nearly pure; and what the ideal gas would be.
    """
    if not pure_only:
        # a liquid is more likely to give off a vapour, a vapour to give off a liquid
        towards = np.where(tested.compressibility > 2.0 * tested.covolume, -1.0, 1.0)
        wilson = towards * mixture.wilson(conditions.temperature, conditions.pressure)
        for power in (1.0, -1.0, 1.0 / 3.0, -1.0 / 3.0):
            yield lambda todo, power=power: ln_feed[:, todo] + power * wilson[:, todo]  # type: ignore[misc]
        yield lambda todo: ln_feed[:, todo] + tested.ln_phi[:, todo]
    for species in range(mixture.size):
        yield lambda todo, species=species: _nearly_pure(ln_feed[:, todo], species)  # type: ignore[misc]


def _nearly_pure(ln_feed: FloatArray, species: int) -> FloatArray:
    rest = np.exp(ln_feed)
    rest[species] = 0.0
    rest *= (1.0 - _NEARLY_PURE) / np.sum(rest, axis=0)
    rest[species] = _NEARLY_PURE
    return np.log(rest)


class _Descent:
    """Minimises tm from one start for each of n states.

    Parameters
    ----------
    mixture, conditions : as above.
    level : d_i [1], shape (C, n).
    known : ln of mole fractions, and ln(v/b), of phases at which tm is known to be stationary and not negative.
    """

    def __init__(
        self,
        mixture: Mixture,
        conditions: Conditions,
        level: FloatArray,
        known: list[tuple[FloatArray, FloatArray]],
    ) -> None:
        self._mixture, self._conditions, self._level, self._known = mixture, conditions, level, known
        size = conditions.temperature.size
        self._lowest = np.full(size, _UNSTABLE)
        self._trial = np.empty_like(level)
        self._compressibility = np.empty(size)

    def run(self, start: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """The lowest tm below zero [1], with ln W [1] (C, n) and Z [1] of the trial phase there."""
        # the size of a start has no meaning, and Wilson's can be immense
        start = start - np.log(np.sum(np.exp(start - start.max(axis=0)), axis=0)) - start.max(axis=0)
        todo, trial = self._substitute(np.arange(start.shape[1]), start)
        if todo.size:
            self._newton(todo, trial)
        return self._lowest, self._trial, self._compressibility

    def _evaluate(self, todo: NDArray[np.intp], trial: FloatArray) -> tuple[Phase, FloatArray, FloatArray]:
        """The trial phase, g_i = ln W_i + ln φ_i − d_i, and tm; the lowest negative ones are noted."""
        amounts = np.exp(trial)
        phase = phase_at(self._mixture, self._conditions.take(todo), amounts)
        gradient = trial + phase.ln_phi - self._level[:, todo]
        distance = 1.0 + np.sum(amounts * (gradient - 1.0), axis=0)
        lower = distance < self._lowest[todo]
        if lower.any():
            where = todo[lower]
            self._lowest[where] = distance[lower]
            self._trial[:, where] = trial[:, lower] - np.log(np.sum(amounts[:, lower], axis=0))
            self._compressibility[where] = phase.compressibility[lower]
        return phase, gradient, distance

    def _apart(self, todo: NDArray[np.intp], trial: FloatArray, phase: Phase) -> FloatArray:
        """Square of the distance to the nearest phase known, in ln W and ln(v/b)."""
        space = np.log(phase.compressibility / phase.covolume)
        each = [np.sum((trial - ln[:, todo]) ** 2, axis=0) + (space - other[todo]) ** 2 for ln, other in self._known]
        return np.asarray(np.min(each, axis=0))

    def _substitute(self, todo: NDArray[np.intp], trial: FloatArray) -> tuple[NDArray[np.intp], FloatArray]:
        """ln W_i ← d_i − ln φ_i(W); returns what is neither settled nor negative."""
        before = np.full(todo.size, np.inf)
        step = np.zeros_like(trial)
        for iteration in range(_SUBSTITUTIONS):
            phase, gradient, distance = self._evaluate(todo, trial)
            if iteration % 4 == 3:
                # dominant eigenvalue, after Orbach and Crowe (1971)
                part = np.sum(gradient * step, axis=0) / np.maximum(np.sum(step * step, axis=0), 1e-300)
                factor = 1.0 / (1.0 - np.clip(part, 0.0, 0.9))
            else:
                factor = np.ones_like(distance)
            moved = trial - factor * gradient
            apart = self._apart(todo, moved, phase)
            trivial = (apart < _TRIVIAL) & (apart < _TRIVIAL_RATE * before)
            settled = np.max(np.abs(gradient), axis=0) < _STATIONARY
            keep = ~(trivial & (distance > 0.0) | settled | (distance < _DEEP))
            todo, trial, step, before = todo[keep], moved[:, keep], gradient[:, keep], apart[keep]
            if not todo.size:
                break
        return todo, trial

    def _newton(self, todo: NDArray[np.intp], trial: FloatArray) -> None:
        """Newton's method for what substitution has not settled."""
        root = 2.0 * np.exp(0.5 * trial)
        phase, gradient, distance = self._evaluate(todo, trial)
        direction = self._direction(todo, trial, phase, gradient)
        length = np.ones(todo.size)
        for _ in range(_NEWTON_STEPS):
            moved = np.maximum(root + length * direction, 0.1 * root)
            tried = 2.0 * np.log(0.5 * moved)
            phase, slope, value = self._evaluate(todo, tried)
            better = value <= distance + 1e-14
            done = better & (np.max(np.abs(slope), axis=0) < _STATIONARY)
            done |= better & (value > 0.0) & (self._apart(todo, tried, phase) < 1e-3 * _TRIVIAL)
            done |= (value < _DEEP) | (length < 1e-4)
            root = np.where(better, moved, root)
            trial, gradient = np.where(better, tried, trial), np.where(better, slope, gradient)
            distance = np.where(better, value, distance)
            length = np.where(better, 1.0, 0.3 * length)
            keep = ~done
            if not keep.any():
                break
            fresh = np.flatnonzero(better & keep)
            if fresh.size:
                direction = direction.copy()
                part = Phase(*(array[..., fresh] for array in phase))
                direction[:, fresh] = self._direction(todo[fresh], trial[:, fresh], part, gradient[:, fresh])
            todo, root, trial, gradient = todo[keep], root[:, keep], trial[:, keep], gradient[:, keep]
            distance, length, direction = distance[keep], length[keep], direction[:, keep]

    def _direction(self, todo: NDArray[np.intp], trial: FloatArray, phase: Phase, gradient: FloatArray) -> FloatArray:
        """Newton step in 2 √W_i, with the sign of negative curvatures turned."""
        half = np.exp(0.5 * trial)
        slopes = Slopes(self._mixture, self._conditions.take(todo), phase).composition()
        scaled = half.T / np.sqrt(np.sum(half * half, axis=0))[:, None]
        matrix = scaled[:, :, None] * slopes * scaled[:, None, :]
        index = np.arange(self._mixture.size)
        matrix[:, index, index] += 1.0 + 0.5 * gradient.T
        downhill = -half * gradient
        usable = np.isfinite(matrix).all(axis=(1, 2))[:, None, None]
        values, vectors = np.linalg.eigh(np.where(usable, matrix, np.eye(self._mixture.size)))
        along = np.einsum("nij,in->nj", vectors, downhill) / np.maximum(np.abs(values), 1e-8)
        step = np.einsum("nij,nj->in", vectors, along)
        longest = np.max(np.abs(step) / half, axis=0)
        limited: FloatArray = step / np.maximum(longest / _LONGEST, 1.0)
        return limited

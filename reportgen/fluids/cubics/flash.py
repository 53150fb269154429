"""The isothermal flash: from temperature and pressure to one phase, or to liquid and vapour.

First the tangent-plane test of the feed; where it is unstable, successive substitution from the trial phase found,
then Newton's method (Michelsen 1982: The isothermal flash problem, part II, Fluid Phase Equilib. 9, 21-40,
doi:10.1016/0378-3812(82)85002-4). What comes out is tested again, for a third phase.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.equilibrium import Pairing, equilibrate
from reportgen.fluids.cubics.fugacity import Phase, phase_at
from reportgen.fluids.cubics.gibbs import least_gibbs
from reportgen.fluids.cubics.mixing import Conditions
from reportgen.fluids.cubics.rachford_rice import vapour_fraction
from reportgen.fluids.cubics.stability import tangent_plane_test
from reportgen.fluids.cubics.thermodynamics import MolarModel

__all__ = ["Split", "flash", "split"]

FloatArray = NDArray[Any]
BoolArray = NDArray[np.bool_]

#: States worked on at a time, so that the temporaries stay in the cache.
CHUNK = 4096

#: Successive substitutions before each try of Newton's method, the change of ln K [1] at which it is tried early, and
#: whether they are sped up.
_ROUNDS = ((5, 0.02, True), (15, 5e-3, True), (60, 1e-3, True))
#: Multiples of the first ln K, and shares of vapour, from which Newton's method is tried in between.
_STRETCHED = ((1.5, 0.5), (2.0, 0.5), (1.2, 0.5), (3.0, 0.5), (1.5, 0.3), (1.5, 0.7))
#: Gibbs energy over R T [1] by which two phases may seem to lie above one, by rounding.
_ROUNDING = 1e-12
#: A light phase is a second liquid when it is below this part of the critical temperature of its own composition, as
#: the equation has it without separation, and its volume is below this multiple of the covolume.
_LIQUID_TEMPERATURE = 0.95
_LIQUID_VOLUME = 2.0


class Split(NamedTuple):
    """Result of a flash of N states.

    ``fraction`` mole fraction [1] of vapour, NaN where there is one phase; ``liquid``, ``vapour`` mole fractions [1]
    of shape (C, N), equal to the feed where there is one phase; ``found`` where the search ended in a state that is
    stable; ``third`` where a third phase, or a second liquid, would form.
    """

    fraction: FloatArray
    liquid: FloatArray
    vapour: FloatArray
    found: BoolArray
    third: BoolArray


def flash(
    model: MolarModel, feed: FloatArray, temperature: FloatArray, pressure: FloatArray, *, final: bool = True
) -> Split:
    """Phases at T [K] and p [Pa], shape (N,), of a feed of mole fractions [1] of shape (C, 1); ``final`` whether to
    test the phases for a third one.
    """
    parts = [
        _flash(model, feed, temperature[start : start + CHUNK], pressure[start : start + CHUNK], final)
        for start in range(0, max(temperature.size, 1), CHUNK)
    ]
    return (
        parts[0] if len(parts) == 1 else Split(*(np.concatenate(field, axis=-1) for field in zip(*parts, strict=True)))
    )


def _flash(model: MolarModel, feed: FloatArray, temperature: FloatArray, pressure: FloatArray, final: bool) -> Split:
    mixture = model.mixture
    size = temperature.size
    everywhere = np.repeat(feed, size, axis=1)
    result = Split(
        np.full(size, np.nan),
        everywhere.copy(),
        everywhere.copy(),
        np.ones(size, dtype=np.bool_),
        np.zeros(size, dtype=np.bool_),
    )
    if mixture.size == 1 or size == 0:
        return result
    conditions = mixture.conditions(temperature, pressure)
    single = phase_at(mixture, conditions, everywhere)
    verdict = tangent_plane_test(mixture, conditions, everywhere, single)
    unstable = np.flatnonzero(verdict.unstable)
    if not unstable.size:
        return result
    towards = np.where(verdict.dense, -1.0, 1.0)[unstable]
    ln_ratio = towards * (verdict.ln_trial[:, unstable] - np.log(feed))
    here = conditions.take(unstable)
    alone = np.sum(feed * (np.log(feed) + single.ln_phi[:, unstable]), axis=0)
    pairing, found = split(model, feed, here, ln_ratio, alone)
    liquid, vapour = pairing.compositions(feed)
    result.fraction[unstable] = pairing.fraction
    result.liquid[:, unstable], result.vapour[:, unstable] = liquid, vapour
    result.found[unstable] = found
    if final:
        result.third[unstable] = _third_phase(model, here, liquid, vapour, found)
    return result


def split(
    model: MolarModel, feed: FloatArray, conditions: Conditions, ln_ratio: FloatArray, alone: FloatArray
) -> tuple[Pairing, BoolArray]:
    """Two phases at given conditions from estimates of ln K_i [1], shape (C, N), and where they were found.

    ``alone`` is the Gibbs energy over R T [1] of the feed as one phase, which two phases must not exceed.
    """
    size = conditions.temperature.size
    pairing = Pairing(ln_ratio.copy(), conditions.temperature.copy(), conditions.pressure.copy(), np.full(size, 0.5))
    found = np.zeros(size, dtype=np.bool_)

    def accept(todo: NDArray[np.intp], start: Pairing) -> NDArray[np.intp]:
        """Newton's method from a start; returns what is left to do."""
        end, good = equilibrate(model, feed, start, ("temperature", "pressure"), {})
        good &= (end.fraction > -1e-9) & (end.fraction < 1.0 + 1e-9)
        if good.any():
            here = conditions.take(todo[good])
            good[good] = _gibbs(model, feed, here, end.take(good)) <= alone[todo[good]] + _ROUNDING
        end = end._replace(fraction=np.clip(end.fraction, 0.0, 1.0))
        pairing.put(todo[good], end.take(good))
        found[todo[good]] = True
        return todo[~good]

    todo = np.arange(size)
    for number, (count, early, speed_up) in enumerate(_ROUNDS):
        here = conditions.take(todo)
        ratio = _substitute(model, feed, here, pairing.ln_ratio[:, todo], count, early, speed_up)
        start = Pairing(ratio, here.temperature, here.pressure, vapour_fraction(feed, ratio))
        pairing.put(todo, start)
        todo = accept(todo, start)
        if number == 1:
            # next to the critical point substitution hardly moves, while the phases lie beyond the trial phase
            for stretch, fraction in _STRETCHED:
                if todo.size:
                    here = conditions.take(todo)
                    half = np.full(todo.size, fraction)
                    todo = accept(todo, Pairing(stretch * ln_ratio[:, todo], here.temperature, here.pressure, half))
        if not todo.size:
            break
    if todo.size:
        _settle_by_gibbs(model, feed, conditions, ln_ratio, pairing, found, todo)
    return _ordered(model, feed, conditions, pairing), found


def _settle_by_gibbs(
    model: MolarModel,
    feed: FloatArray,
    conditions: Conditions,
    ln_ratio: FloatArray,
    pairing: Pairing,
    found: BoolArray,
    todo: NDArray[np.intp],
) -> None:
    """Fill in what equal fugacities have not led to, from the trial phases K z."""
    here = conditions.take(todo)
    amounts, good = least_gibbs(model.mixture, feed, here, ln_ratio[:, todo] + np.log(feed))
    some = todo[good]
    amounts = amounts[:, good]
    rest = feed - amounts
    fraction = np.sum(amounts, axis=0)
    ratio = np.log(amounts / rest) + np.log((1.0 - fraction) / fraction)
    here = conditions.take(some)
    pairing.put(some, Pairing(ratio, here.temperature, here.pressure, fraction))
    found[some] = True


def _substitute(
    model: MolarModel,
    feed: FloatArray,
    conditions: Conditions,
    ln_ratio: FloatArray,
    count: int,
    early: float,
    speed_up: bool,
) -> FloatArray:
    """ln K_i ← ln φ_i(x) − ln φ_i(y), at most ``count`` times or until ln K changes by less than ``early``; sped up
    by the dominant eigenvalue.
    """
    mixture = model.mixture
    result = ln_ratio.copy()
    todo = np.arange(ln_ratio.shape[1])
    ratio, step = result, np.zeros_like(result)
    moved = np.zeros(todo.size)
    for iteration in range(count):
        now = Pairing(ratio, conditions.temperature, conditions.pressure, vapour_fraction(feed, ratio))
        liquid, vapour = now.compositions(feed)
        fresh = phase_at(mixture, conditions, liquid).ln_phi - phase_at(mixture, conditions, vapour).ln_phi
        change = fresh - ratio
        if speed_up and iteration % 5 == 4:
            part = np.sum(change * step, axis=0) / np.maximum(np.sum(step * step, axis=0), 1e-300)
            fresh = ratio + change / (1.0 - np.clip(part, 0.0, 0.9))
        result[:, todo] = fresh
        now_moved = np.max(np.abs(change), axis=0)
        keep = (now_moved > early) | (now_moved > 0.9 * moved)
        if not keep.any():
            break
        todo, ratio, step, conditions = todo[keep], fresh[:, keep], change[:, keep], conditions.take(keep)
        moved = now_moved[keep]
    return result


def _gibbs(model: MolarModel, feed: FloatArray, conditions: Conditions, pairing: Pairing) -> FloatArray:
    """Gibbs energy over R T [1] of two phases, but for what the feed as one phase has too."""
    total = np.zeros_like(pairing.fraction)
    for amount, fractions in zip((1.0 - pairing.fraction, pairing.fraction), pairing.compositions(feed), strict=True):
        phase = phase_at(model.mixture, conditions, fractions)
        total += amount * np.sum(fractions * (np.log(fractions) + phase.ln_phi), axis=0)
    return total


def _ordered(model: MolarModel, feed: FloatArray, conditions: Conditions, pairing: Pairing) -> Pairing:
    """The same pair with the phase of the greater volume, in multiples of the covolume, as the vapour."""
    liquid, vapour = (phase_at(model.mixture, conditions, fractions) for fractions in pairing.compositions(feed))
    turned = liquid.compressibility * vapour.covolume > vapour.compressibility * liquid.covolume
    return pairing._replace(
        ln_ratio=np.where(turned, -pairing.ln_ratio, pairing.ln_ratio),
        fraction=np.where(turned, 1.0 - pairing.fraction, pairing.fraction),
    )


def _third_phase(
    model: MolarModel, conditions: Conditions, liquid: FloatArray, vapour: FloatArray, found: BoolArray
) -> BoolArray:
    """Where the light phase of two is a liquid, or where a third phase would form."""
    result = np.zeros(found.size, dtype=np.bool_)
    where = np.flatnonzero(found)
    if not where.size:
        return result
    here = conditions.take(where)
    x, y = liquid[:, where], vapour[:, where]
    dense = phase_at(model.mixture, here, x)
    light = phase_at(model.mixture, here, y)
    verdict = tangent_plane_test(model.mixture, here, x, dense, others=(y,), pure_only=True)
    result[where] = verdict.unstable | _is_liquid(model, light)
    return result


def _is_liquid(model: MolarModel, phase: Phase) -> BoolArray:
    """Whether a phase is a liquid beyond doubt, by its density and the strength of its attraction."""
    form = model.mixture.form
    dense = phase.compressibility < _LIQUID_VOLUME * phase.covolume
    result: BoolArray = dense & (phase.strength * _LIQUID_TEMPERATURE**1.5 > form.critical_strength)
    return result

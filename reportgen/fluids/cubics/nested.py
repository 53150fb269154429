"""States from two properties of which neither is temperature or pressure.

    density and internal energy: at constant volume, u rises with T,   (∂u/∂T)_v = c_v > 0
    enthalpy and entropy:        at constant entropy, h rises with p,  (∂h/∂p)_s = v > 0

so that either has one state at most. It is found by a search within a search, unless density and energy belong to one
phase.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.bracketing import bracketed_root
from reportgen.fluids.cubics.departures import pressure as pressure_at
from reportgen.fluids.cubics.equilibria import Equilibria, States
from reportgen.fluids.cubics.isolines import Isoline
from reportgen.fluids.cubics.sought import Sought
from reportgen.fluids.cubics.values import value_of

__all__ = ["enthalpy_entropy", "volume_energy"]

FloatArray = NDArray[Any]
Indices = NDArray[np.intp]

#: What may be left of the target, in parts of its size and of 10 kJ/mol, where the bracket has closed.
_LEFT_OVER = 1e-8
_SIZE = 1e4
#: Relative width of a bracket that closes on the edge of what is found, at which it is given up.
_EDGE = 1e-3
#: Temperature, in parts of the highest critical temperature of the species, above which two phases are not sought.
_ONE_PHASE = 1.5
#: Relative difference of two volumes that are one.
_SAME = 1e-6


def volume_energy(
    equilibria: Equilibria, isotherms: Isoline, volume: FloatArray, energy: FloatArray, low: float, high: float
) -> States:
    """States of a volume [m3/mol] and an internal energy [J/mol] between temperatures ``low`` and ``high`` [K]; states
    that are not found are NaN.
    """
    states = _one_phase(equilibria, isotherms, volume, energy, low, high)
    rest = np.flatnonzero(~states.found)
    if not rest.size:
        return states

    def gap(temperature: FloatArray, where: Indices) -> FloatArray:
        sought = isotherms.find(temperature, "volume", volume[rest[where]], thorough=False)
        found = value_of(equilibria, sought.states, "enthalpy") - sought.states.pressure * volume[rest[where]]
        return _with_ends(found - energy[rest[where]], sought)

    # far above the critical temperatures of all species there is one phase
    top = _ONE_PHASE * float(equilibria.model.mixture.critical_temperatures.max())
    ends = np.full(rest.size, low), np.full(rest.size, max(low, min(high, top)))
    everywhere = np.arange(rest.size)
    at_ends = (gap(end, everywhere) for end in ends)
    place, found = bracketed_root(gap, *ends, *at_ends, edge=_EDGE)
    some = np.flatnonzero(found)
    if some.size:
        here = rest[some]
        fresh = isotherms.find(place[some], "volume", volume[here]).states
        left = value_of(equilibria, fresh, "enthalpy") - fresh.pressure * volume[here] - energy[here]
        states.put(here, _kept(fresh, left, energy[here]))
    return states


def _one_phase(
    equilibria: Equilibria, isotherms: Isoline, volume: FloatArray, energy: FloatArray, low: float, high: float
) -> States:
    """The states that are one phase: explicit in T, then tested."""
    model, size = equilibria.model, volume.size
    states = States.nowhere(equilibria.size, size)
    untranslated = volume + equilibria.shift

    def pressure(temperature: FloatArray, where: Indices) -> FloatArray:
        mixture = model.mixture
        strength = mixture.strength(mixture.attraction(temperature), equilibria.feed)
        return pressure_at(mixture.form, strength, temperature, untranslated[where])

    def gap(temperature: FloatArray, where: Indices) -> FloatArray:
        p = pressure(temperature, where)
        enthalpy = equilibria.bulk(temperature, p, untranslated[where]).enthalpy
        left: FloatArray = enthalpy - p * volume[where] - energy[where]
        return left

    everywhere = np.arange(size)
    ends = np.full(size, low), np.full(size, high)
    place, found = bracketed_root(gap, *ends, gap(ends[0], everywhere), gap(ends[1], everywhere))
    p = pressure(place, everywhere)
    some = np.flatnonzero(found & (p >= isotherms.low) & (p <= isotherms.high * (1.0 + 1e-9)))
    if some.size:
        tested = equilibria.at(place[some], p[some])
        one = tested.found & ~tested.mixed & (np.abs(tested.volume / untranslated[some] - 1.0) < _SAME)
        good = some[one]
        states.put(good, equilibria.single(place[good], p[good], untranslated[good]))
    return states


def enthalpy_entropy(
    equilibria: Equilibria,
    isobars: Isoline,
    isotherms: Isoline,
    enthalpy: FloatArray,
    entropy: FloatArray,
) -> States:
    """States of an enthalpy [J/mol] and an entropy [J/(mol*K)] within the ends of isobars and isotherms; states that
    are not found are NaN.
    """

    def gap(ln_pressure: FloatArray, where: Indices) -> FloatArray:
        p = np.clip(np.exp(ln_pressure), isotherms.low, isotherms.high)
        sought = isobars.find(p, "entropy", entropy[where], thorough=False)
        return _with_ends(value_of(equilibria, sought.states, "enthalpy") - enthalpy[where], sought)

    size = enthalpy.size
    states = States.nowhere(equilibria.size, size)
    # an isentrope leaves the range where it meets the lowest and the highest temperature
    edges = []
    for end in (isobars.low, isobars.high):
        sought = isotherms.find(np.full(size, end), "entropy", entropy)
        # a second liquid in the cold, or several states: not an edge to rely on
        sought.states.drop(sought.states.third | sought.several)
        edges.append(sought.states)
    at_edges = [value_of(equilibria, edge, "enthalpy") - enthalpy for edge in edges]
    beyond = (at_edges[0] > 0.0) | (at_edges[1] < 0.0)
    todo = np.flatnonzero(~beyond)
    if not todo.size:
        return states
    low = np.log(np.nan_to_num(edges[0].pressure[todo], nan=isotherms.low))
    high = np.log(np.nan_to_num(edges[1].pressure[todo], nan=isotherms.high))
    at_low = np.where(np.isfinite(at_edges[0][todo]), at_edges[0][todo], gap(low, todo))
    at_high = np.where(np.isfinite(at_edges[1][todo]), at_edges[1][todo], gap(high, todo))
    place, found = bracketed_root(lambda at, which: gap(at, todo[which]), low, high, at_low, at_high, edge=_EDGE)
    some = np.flatnonzero(found)
    if some.size:
        here = todo[some]
        p = np.clip(np.exp(place[some]), isotherms.low, isotherms.high)
        fresh = isobars.find(p, "entropy", entropy[here]).states
        states.put(here, _kept(fresh, value_of(equilibria, fresh, "enthalpy") - enthalpy[here], enthalpy[here]))
    return states


def _with_ends(gap: FloatArray, sought: Sought) -> FloatArray:
    """A gap that is infinite, with its sign, beyond the limits: below the lowest temperature or pressure the value is
    too low, above the highest too high. Where nothing is found within them, in the cold where a second liquid forms,
    it is too low as well.
    """
    return np.where(sought.above, np.inf, np.where(sought.below | ~np.isfinite(gap), -np.inf, gap))


def _kept(states: States, left: FloatArray, target: FloatArray) -> States:
    """The states, but for those where a bracket closed on the edge of the limits and not on the target."""
    with np.errstate(invalid="ignore"):
        states.drop(~(np.abs(left) <= _LEFT_OVER * (np.abs(target) + _SIZE)))
    return states

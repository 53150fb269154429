"""States from two properties of which neither is temperature or pressure, by a search within a search.

    density and internal energy: at constant volume, u rises with T,   (∂u/∂T)_v = c_v > 0
    enthalpy and entropy:        at constant entropy, h rises with p,  (∂h/∂p)_s = v > 0

so that either has one state at most.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.bracketing import bracketed_root
from reportgen.fluids.cubics.equilibria import Equilibria, States
from reportgen.fluids.cubics.isolines import Isoline, Sought
from reportgen.fluids.cubics.values import value_of

__all__ = ["enthalpy_entropy", "volume_energy"]

FloatArray = NDArray[Any]

#: What may be left of the target, in parts of the span of its values, where the bracket has closed.
_LEFT_OVER = 1e-8


def volume_energy(
    equilibria: Equilibria, isotherms: Isoline, volume: FloatArray, energy: FloatArray, low: float, high: float
) -> States:
    """States of a volume [m3/mol] and an internal energy [J/mol] between temperatures ``low`` and ``high`` [K]; states
    that are not found are NaN.
    """

    def gap(temperature: FloatArray, where: NDArray[np.intp]) -> FloatArray:
        sought = isotherms.find(temperature, "volume", volume[where])
        found = value_of(equilibria, sought.states, "enthalpy") - sought.states.pressure * volume[where]
        return _with_ends(found - energy[where], sought)

    size = volume.size
    ends = np.full(size, low), np.full(size, high)
    everywhere = np.arange(size)
    place, found = bracketed_root(gap, *ends, gap(ends[0], everywhere), gap(ends[1], everywhere))
    states = isotherms.find(place, "volume", volume).states
    left = value_of(equilibria, states, "enthalpy") - states.pressure * volume - energy
    return _kept(states, found, left, energy)


def enthalpy_entropy(
    equilibria: Equilibria, isobars: Isoline, enthalpy: FloatArray, entropy: FloatArray, low: float, high: float
) -> States:
    """States of an enthalpy [J/mol] and an entropy [J/(mol*K)] between pressures ``low`` and ``high`` [Pa]; states that
    are not found are NaN.
    """

    def gap(ln_pressure: FloatArray, where: NDArray[np.intp]) -> FloatArray:
        sought = isobars.find(np.clip(np.exp(ln_pressure), low, high), "entropy", entropy[where])
        return _with_ends(value_of(equilibria, sought.states, "enthalpy") - enthalpy[where], sought)

    size = enthalpy.size
    ends = np.full(size, np.log(low)), np.full(size, np.log(high))
    everywhere = np.arange(size)
    place, found = bracketed_root(gap, *ends, gap(ends[0], everywhere), gap(ends[1], everywhere))
    states = isobars.find(np.clip(np.exp(place), low, high), "entropy", entropy).states
    left = value_of(equilibria, states, "enthalpy") - enthalpy
    return _kept(states, found, left, enthalpy)


def _with_ends(gap: FloatArray, sought: Sought) -> FloatArray:
    """A gap that is infinite, with its sign, beyond the limits: below the lowest temperature or pressure the value is
    too low, above the highest too high. Where nothing is found within them, in the cold where a second liquid forms,
    it is too low as well.
    """
    return np.where(sought.above, np.inf, np.where(sought.below | ~np.isfinite(gap), -np.inf, gap))


def _kept(states: States, found: NDArray[np.bool_], left: FloatArray, target: FloatArray) -> States:
    """The states, but for those where a bracket closed on the edge of the limits and not on the target."""
    with np.errstate(invalid="ignore"):
        states.drop(~found | ~(np.abs(left) <= _LEFT_OVER * (np.abs(target) + 1e4)))
    return states

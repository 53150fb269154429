"""Molar values of states of one or two phases."""

from __future__ import annotations

from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.equilibria import Equilibria, States
from reportgen.fluids.cubics.fugacity import Side

__all__ = ["Target", "value_of"]

FloatArray = NDArray[Any]

Target = Literal["enthalpy", "entropy", "volume", "mass_quality"]


def value_of(equilibria: Equilibria, states: States, name: Target) -> FloatArray:
    """Molar enthalpy [J/mol], entropy [J/(mol*K)], volume [m3/mol] (translated) or mass quality [1] of states."""
    model = equilibria.model
    if name == "mass_quality":
        vapour = states.fraction * (model.molar_masses @ states.vapour)
        liquid = (1.0 - states.fraction) * (model.molar_masses @ states.liquid)
        return np.asarray(vapour / (vapour + liquid))
    result = np.full(states.temperature.size, np.nan)
    one = np.flatnonzero(~states.mixed & states.found)
    if one.size:
        bulk = equilibria.bulk(states.temperature[one], states.pressure[one], states.volume[one])
        result[one] = getattr(bulk, name)
    two = np.flatnonzero(states.mixed)
    if two.size:
        t, p = states.temperature[two], states.pressure[two]
        total = np.zeros(two.size)
        sides: tuple[tuple[FloatArray, FloatArray, Side], ...] = (
            (1.0 - states.fraction[two], states.liquid[:, two], "liquid"),
            (states.fraction[two], states.vapour[:, two], "vapour"),
        )
        for amount, fractions, side in sides:
            total += amount * getattr(equilibria.phase(t, p, fractions, side), name)
        result[two] = total
    return result

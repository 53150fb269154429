"""Inverting a function that grows: Newton's method inside a bracket from a table, for all values at once."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

__all__ = ["Inverse"]

Array = NDArray[np.float64]

_STEPS = 8
_RELATIVE_STEP = 1e-13


class Inverse:
    """T [K] of a function that grows with T, from its values [SI]. NaN outside the table's range.

    Parameters
    ----------
    nodes : temperatures [K], increasing; between two neighbours the function is smooth.
    function, derivative : f [SI] and df/dT [SI/K] at T [K], for arrays.
    """

    def __init__(self, nodes: Array, function: Callable[[Array], Array], derivative: Callable[[Array], Array]) -> None:
        self._nodes = nodes
        self._values = function(nodes)
        self._function = function
        self._derivative = derivative
        # A value computed at a limit must lead back to the limit, whatever the last bits are.
        self._slack = 1e-11 * float(np.ptp(self._values))

    def __call__(self, value: Array, /) -> Array:
        """T [K] where the function has the value [SI]."""
        nodes, values = self._nodes, self._values
        inside = (value >= values[0] - self._slack) & (value <= values[-1] + self._slack)
        target = np.where(inside, np.clip(value, values[0], values[-1]), np.nan)
        upper = np.clip(values.searchsorted(target), 1, len(nodes) - 1)
        low, high = nodes[upper - 1], nodes[upper]
        temperature = np.interp(target, values, nodes)
        for _ in range(_STEPS):
            step = (target - self._function(temperature)) / self._derivative(temperature)
            stepped = np.clip(temperature + step, low, high)
            moved = np.abs(stepped - temperature)
            temperature = stepped
            if not np.any(moved > _RELATIVE_STEP * temperature):
                return temperature
        unsettled = moved > 1e3 * _RELATIVE_STEP * temperature
        return np.where(unsettled, np.nan, temperature)

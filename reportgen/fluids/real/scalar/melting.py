"""A quick test that a state is not under the melting line; the line itself is in ../melting.py."""

from __future__ import annotations

from math import inf, sqrt

import numpy as np

from reportgen.fluids.real.melting import MeltingLine

__all__ = ["LeastMelting"]

_NODES = 400


class LeastMelting:
    """A pressure below which a fluid is certainly not solid, from a table of its melting line.

    Parameters
    ----------
    line : the melting line; between two nodes of the table it rises.
    """

    def __init__(self, line: MeltingLine) -> None:
        self._low, self._high = line.minimum_temperature, line.maximum_temperature
        # nodes crowd at the lower end, where the melting pressure rises from almost nothing
        share = np.arange(_NODES + 1) / _NODES
        pressure = line.pressure(np.minimum(self._low + (self._high - self._low) * share * share, self._high))
        self._least: list[float] = np.minimum.accumulate(pressure[::-1])[::-1].tolist()

    def __call__(self, temperature: float) -> float:
        """Pressure [Pa] at T [K]; infinite above the upper end of the line."""
        if temperature > self._high:
            return inf
        if temperature <= self._low:
            return self._least[0]
        return self._least[int(_NODES * sqrt((temperature - self._low) / (self._high - self._low)))]

"""Standard-state properties of many ideal-gas species at once, one row a temperature, one column a species."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.gases.species import GasMixture, library, resolve

__all__ = ["SpeciesTable", "Standard"]

Array = NDArray[np.float64]


class Standard(NamedTuple):
    """c_p/R, h/(RT) and s°/R [1], shape (N, S)."""

    heat_capacity: Array
    enthalpy: Array
    entropy: Array

    @property
    def potential(self) -> Array:
        """Standard chemical potential μ°/(RT) = h/(RT) − s°/R [1]."""
        return self.enthalpy - self.entropy


class SpeciesTable:
    """Nine-coefficient polynomials of a list of species, and the atoms they consist of.

    The polynomials are those of gases/caloric.py (McBride, Zehe, Gordon, NASA/TP-2002-211556), likewise made
    continuous where two intervals meet.

    Parameters
    ----------
    keys : species by key, name or formula.

    Attributes
    ----------
    keys : keys of the species, S of them. ``elements``: E symbols. ``atoms``: (S, E) atoms of each element in a
        molecule. ``molar_mass``: (S,) [kg/mol]. ``standard_pressure`` p° [Pa].

    Raises
    ------
    InputError : a species that is not carried.
    """

    def __init__(self, keys: Sequence[str]) -> None:
        carried = library()
        found = [resolve(key) for key in keys]
        if any(isinstance(entry, GasMixture) for entry in found):
            raise ValueError("A mixture is not a species.")
        parts = [carried.species[entry.key] for entry in found]
        self.keys = tuple(part.key for part in parts)
        self.elements = tuple(sorted({atom for part in parts for atom in part.atoms}))
        self.atoms: Array = np.array(
            [[part.atoms.get(e, 0) for e in self.elements] for part in parts], dtype=np.float64
        )
        self.molar_mass: Array = np.array([part.molar_mass for part in parts])
        self.standard_pressure = carried.standard_pressure
        self.minimum_temperature, self.maximum_temperature = (
            carried.temperature_breaks[0],
            carried.temperature_breaks[-1],
        )
        self._inner = carried.temperature_breaks[1:-1]
        coefficients = np.array([part.coefficients for part in parts])  # (S, intervals, 9)
        self._tables = [
            np.ascontiguousarray(coefficients[:, interval, :].T) for interval in range(coefficients.shape[1])
        ]
        for number, temperature in enumerate(self._inner):
            at = np.array([temperature])
            lower, upper = _evaluate(self._tables[number], at), _evaluate(self._tables[number + 1], at)
            self._tables[number + 1][7] += (lower.enthalpy - upper.enthalpy)[0] * temperature
            self._tables[number + 1][8] += (lower.entropy - upper.entropy)[0]

    def at(self, temperature: Array) -> Standard:
        """c_p/R, h/(RT), s°/R of every species at T [K] of shape (N,); (N, S)."""
        interval = np.zeros(temperature.shape, dtype=np.intp)
        for limit in self._inner:
            interval += temperature > limit
        if interval.size and (interval == interval[0]).all():
            return _evaluate(self._tables[interval[0]], temperature)
        shape = (temperature.size, len(self.keys))
        result = Standard(np.empty(shape), np.empty(shape), np.empty(shape))
        for number, table in enumerate(self._tables):
            here = interval == number
            if here.any():
                for whole, part in zip(result, _evaluate(table, temperature[here]), strict=True):
                    whole[here] = part
        return result


def _evaluate(table: Array, temperature: Array) -> Standard:
    """The polynomials of one interval, coefficients (9, S), at T [K] of shape (N,)."""
    t = temperature[:, None]
    a1, a2, a3, a4, a5, a6, a7, b1, b2 = table
    inverse, log = 1.0 / t, np.log(t)
    square = inverse * inverse
    return Standard(
        a1 * square + a2 * inverse + a3 + t * (a4 + t * (a5 + t * (a6 + t * a7))),
        -a1 * square
        + a2 * log * inverse
        + a3
        + t * (a4 / 2 + t * (a5 / 3 + t * (a6 / 4 + t * (a7 / 5))))
        + b1 * inverse,
        -a1 * square / 2 - a2 * inverse + a3 * log + t * (a4 + t * (a5 / 2 + t * (a6 / 3 + t * (a7 / 4)))) + b2,
    )

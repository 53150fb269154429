"""The ideal part: each species as the ideal gases carry it, with the zeros of the third law.

The NASA polynomials end at 200 K. Below, where liquefied and separated gases are, the heat capacity is that of the
published equation of state of the species, joined at 200 K so that enthalpy and entropy are continuous:

    c_p°/R = 1 − τ² φ°_ττ,   h°/(R T) = 1 + τ φ°_τ,   s°/R = τ φ°_τ − φ°
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import InputError
from reportgen.fluids.cubics.constants import carried_cas
from reportgen.fluids.gases.caloric import Nasa9
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT
from reportgen.fluids.gases.species import library
from reportgen.fluids.real import catalogue
from reportgen.fluids.real.helmholtz import Helmholtz

__all__ = ["IdealPart"]

FloatArray = NDArray[Any]

#: Lowest temperature [K] of an ideal part whose terms have the right limit in the cold (translation and rotation in
#: full, vibrations frozen), whatever the lowest temperature of the equation they come from.
_COLDEST = 60.0
#: Relative step of the heat capacity at the join above which an equation is not used.
_AGREEMENT = 0.02
_PHYSICAL = {"lead", "log-tau", "planck-einstein", "planck-einstein-temperature"}


class _ColdLaw:
    """Ideal part of a published equation below the join, molar; see the module.

    Parameters
    ----------
    data, file : content and name of the data file of the real fluid.
    """

    def __init__(self, data: Mapping[str, Any], file: str) -> None:
        self.file = file
        self.source = catalogue.source_lines(dict(data))[0]
        self.title = str(data["title"])
        kinds = {term["kind"] for term in data["ideal"]}
        lowest = float(data["limits"]["minimum_temperature"])
        self.minimum_temperature = _COLDEST if kinds <= _PHYSICAL else lowest
        self._gas_constant = float(data["molar_gas_constant"])
        self._temperature = float(data["reducing_temperature"])
        self._density = float(data["reducing_molar_density"])
        self._equation = Helmholtz(
            data["ideal"],
            data["residual"],
            reducing_temperature=self._temperature,
            reducing_density=self._density,
            gas_constant=self._gas_constant,
        )

    def properties(self, temperature: FloatArray, pressure: float) -> tuple[FloatArray, FloatArray, FloatArray]:
        """h° [J/mol], s° and c_p° [J/(mol*K)] at T [K] and p [Pa], zeros as published."""
        thermal = self._gas_constant * temperature
        found = self._equation.ideal(pressure / (thermal * self._density), self._temperature / temperature)
        return (
            thermal * (1.0 + found.tau),
            self._gas_constant * (found.tau - found.value),
            self._gas_constant * (1.0 - found.tau_tau),
        )


class _Species:
    """Ideal part of one species, molar.

    Parameters
    ----------
    key : species key.
    """

    def __init__(self, key: str) -> None:
        gases = library()
        self._warm = Nasa9(gases.temperature_breaks, gases.species[key].coefficients, MOLAR_GAS_CONSTANT)
        self._pressure = gases.standard_pressure
        self._join = gases.temperature_breaks[0]
        self.minimum_temperature = self._join
        self.cold: _ColdLaw | None = None
        cas = carried_cas(key)
        if cas is None:
            return
        try:
            data, file = catalogue.find(cas)
        except InputError:
            return
        cold = _ColdLaw(data, file)
        at_join = np.array([self._join])
        enthalpy, entropy, heat_capacity = cold.properties(at_join, self._pressure)
        agrees = abs(float((heat_capacity / self._warm.heat_capacity(at_join))[0]) - 1.0) < _AGREEMENT
        if cold.minimum_temperature < self._join and agrees:
            self.cold, self.minimum_temperature = cold, cold.minimum_temperature
            self._enthalpy_shift = float((self._warm.enthalpy(at_join) - enthalpy)[0])
            self._entropy_shift = float((self._warm.entropy(at_join) - entropy)[0])

    def properties(self, temperature: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """h° [J/mol], s° and c_p° [J/(mol*K)] at T [K] and the standard pressure."""
        below = temperature < self._join
        if self.cold is None or not below.any():
            warm = self._warm
            return warm.enthalpy(temperature), warm.entropy(temperature), warm.heat_capacity(temperature)
        results = tuple(np.empty_like(temperature) for _ in range(3))
        cold = self.cold.properties(temperature[below], self._pressure)
        above = temperature[~below]
        warm_part = (self._warm.enthalpy(above), self._warm.entropy(above), self._warm.heat_capacity(above))
        shifts = (self._enthalpy_shift, self._entropy_shift, 0.0)
        for result, one, two, shift in zip(results, cold, warm_part, shifts, strict=True):
            result[below], result[~below] = one + shift, two
        return results[0], results[1], results[2]


class IdealPart:
    """Molar ideal-gas properties of each of C species.

    ``minimum_temperature``, ``maximum_temperature`` [K] are those at which every species has one; ``cold`` lists, by
    species key, title, publication and data file of what is used below 200 K.

    Parameters
    ----------
    species : species keys.
    """

    def __init__(self, species: Iterable[str]) -> None:
        keys = tuple(species)
        self.standard_pressure = library().standard_pressure
        self._parts = [_Species(key) for key in keys]
        self.minimum_temperature = max(part.minimum_temperature for part in self._parts)
        self.maximum_temperature = library().temperature_breaks[-1]
        join = library().temperature_breaks[0]
        self.cold: dict[str, tuple[str, str, str]] = {}
        if self.minimum_temperature < join:
            for key, part in zip(keys, self._parts, strict=True):
                if part.cold is not None:
                    self.cold[key] = (part.cold.title, part.cold.source, part.cold.file)

    def properties(self, temperature: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """h_i° [J/mol], s_i° and c_p,i° [J/(mol*K)] at T [K] and the standard pressure, each of shape (C, N)."""
        each = [part.properties(temperature) for part in self._parts]
        enthalpy, entropy, heat_capacity = (np.stack(column) for column in zip(*each, strict=True))
        return enthalpy, entropy, heat_capacity

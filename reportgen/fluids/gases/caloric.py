"""How an ideal gas stores energy: enthalpy, standard entropy and heat capacity against temperature alone.

All per kilogram, in SI. Temperature is found from enthalpy or entropy by Newton's method inside a bracket that a
table of the same function gives, for all elements at once.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cached_property
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.inversion import Inverse

__all__ = ["LIMIT_SLACK", "CaloricLaw", "ConstantHeatCapacity", "Nasa9"]

Array = NDArray[np.float64]

#: Nodes of the table in each temperature interval; the bracket of Newton's method is one cell of it.
_NODES = 128

#: Relative overstepping of a temperature limit that is put down to rounding.
LIMIT_SLACK = 1e-12


class CaloricLaw(Protocol):
    """h(T), s°(T), c_p(T) of an ideal gas and their inverses; outside its range a law gives NaN for T."""

    def enthalpy(self, temperature: Array, /) -> Array:
        """h [J/kg] at T [K]."""

    def entropy(self, temperature: Array, /) -> Array:
        """s° [J/(kg*K)] at T [K] and the standard pressure."""

    def heat_capacity(self, temperature: Array, /) -> Array:
        """c_p [J/(kg*K)] at T [K]."""

    def temperature_of_enthalpy(self, enthalpy: Array, /) -> Array:
        """T [K] where h(T) [J/kg] has the value given."""

    def temperature_of_internal_energy(self, energy: Array, /) -> Array:
        """T [K] where u(T) = h(T) − R T [J/kg] has the value given."""

    def temperature_of_entropy(self, entropy: Array, /) -> Array:
        """T [K] where s°(T) [J/(kg*K)] has the value given."""

    def temperature_of_isochoric_entropy(self, entropy: Array, /) -> Array:
        """T [K] where s°(T) − R ln(T/K) [J/(kg*K)] has the value given: the entropy at a known density."""


class Nasa9:
    """Nine-coefficient polynomials on consecutive temperature intervals.

        c_p/R = a1/T² + a2/T + a3 + a4 T + a5 T² + a6 T³ + a7 T⁴
        h/R   = −a1/T + a2 ln T + a3 T + a4 T²/2 + a5 T³/3 + a6 T⁴/4 + a7 T⁵/5 + b1
        s°/R  = −a1/(2T²) − a2/T + a3 ln T + a4 T + a5 T²/2 + a6 T³/3 + a7 T⁴/4 + b2

    (McBride, Zehe, Gordon, NASA/TP-2002-211556, equations 1 to 3.) The printed integration constants leave steps in h
    and s° where two intervals meet, of less than 3e-5 K times c_p. Here b1 and b2 of each interval are set so that both
    are continuous: else a temperature could not be found from every enthalpy.

    Parameters
    ----------
    breaks : limits of the intervals [K], increasing, one more than intervals.
    coefficients : a1..a7, b1, b2 for each interval.
    gas_constant : specific gas constant R [J/(kg*K)].
    """

    def __init__(self, breaks: Sequence[float], coefficients: Sequence[Sequence[float]], gas_constant: float) -> None:
        self.minimum_temperature, self.maximum_temperature = breaks[0], breaks[-1]
        self._inner = breaks[1:-1]
        self._breaks = breaks
        self._gas_constant = gas_constant
        a = np.array(coefficients, dtype=np.float64) * gas_constant
        self._heat_capacity_terms = np.ascontiguousarray(a[:, :7])
        self._enthalpy_terms = a[:, [0, 1, 2, 3, 4, 5, 6, 7]] / [-1.0, 1.0, 1.0, 2.0, 3.0, 4.0, 5.0, 1.0]
        self._entropy_terms = a[:, [0, 1, 2, 3, 4, 5, 6, 8]] / [-2.0, -1.0, 1.0, 1.0, 2.0, 3.0, 4.0, 1.0]
        for number, temperature in enumerate(self._inner):
            for terms, value in ((self._enthalpy_terms, _enthalpy), (self._entropy_terms, _entropy)):
                terms[number + 1, 7] += value(terms[number], temperature) - value(terms[number + 1], temperature)

    def _terms(self, table: Array, temperature: Array) -> Array:
        """Coefficients for each temperature: plain numbers where all lie in the first interval, else arrays."""
        above = [temperature > limit for limit in self._inner]
        if not any(part.any() for part in above):
            first: Array = table[0]
            return first
        each: Array = table[np.sum(above, axis=0)].T
        return each

    def heat_capacity(self, temperature: Array) -> Array:
        """c_p [J/(kg*K)] at T [K]."""
        a1, a2, a3, a4, a5, a6, a7 = self._terms(self._heat_capacity_terms, temperature)
        inverse = 1.0 / temperature
        rising = temperature * (a4 + temperature * (a5 + temperature * (a6 + temperature * a7)))
        result: Array = inverse * (inverse * a1 + a2) + a3 + rising
        return result

    def enthalpy(self, temperature: Array) -> Array:
        """h [J/kg] at T [K]; zero for the elements in their reference state at 298.15 K."""
        return _enthalpy(self._terms(self._enthalpy_terms, temperature), temperature)

    def entropy(self, temperature: Array) -> Array:
        """s° [J/(kg*K)] at T [K] and the standard pressure; zero by the third law."""
        return _entropy(self._terms(self._entropy_terms, temperature), temperature)

    @cached_property
    def _nodes(self) -> Array:
        parts = [np.geomspace(low, high, _NODES) for low, high in zip(self._breaks[:-1], self._breaks[1:], strict=True)]
        return np.unique(np.concatenate(parts))

    @cached_property
    def temperature_of_enthalpy(self) -> Inverse:
        """T [K] where h(T) [J/kg] has the value given."""
        return Inverse(self._nodes, self.enthalpy, self.heat_capacity)

    @cached_property
    def temperature_of_internal_energy(self) -> Inverse:
        """T [K] where u(T) = h(T) − R T [J/kg] has the value given."""
        gas_constant = self._gas_constant
        return Inverse(
            self._nodes, lambda t: self.enthalpy(t) - gas_constant * t, lambda t: self.heat_capacity(t) - gas_constant
        )

    @cached_property
    def temperature_of_entropy(self) -> Inverse:
        """T [K] where s°(T) [J/(kg*K)] has the value given."""
        return Inverse(self._nodes, self.entropy, lambda t: self.heat_capacity(t) / t)

    @cached_property
    def temperature_of_isochoric_entropy(self) -> Inverse:
        """T [K] where s°(T) − R ln(T/K) [J/(kg*K)] has the value given."""
        gas_constant = self._gas_constant
        return Inverse(
            self._nodes,
            lambda t: self.entropy(t) - gas_constant * np.log(t),
            lambda t: (self.heat_capacity(t) - gas_constant) / t,
        )


def _enthalpy(terms: Array, temperature: Array | float) -> Array:
    c1, c2, c3, c4, c5, c6, c7, b1 = terms
    rising = temperature * (c3 + temperature * (c4 + temperature * (c5 + temperature * (c6 + temperature * c7))))
    result: Array = c1 / temperature + c2 * np.log(temperature) + rising + b1
    return result


def _entropy(terms: Array, temperature: Array | float) -> Array:
    c1, c2, c3, c4, c5, c6, c7, b2 = terms
    inverse = 1.0 / temperature
    rising = temperature * (c4 + temperature * (c5 + temperature * (c6 + temperature * c7)))
    result: Array = inverse * (inverse * c1 + c2) + c3 * np.log(temperature) + rising + b2
    return result


class ConstantHeatCapacity:
    """A heat capacity that does not depend on temperature, through one reference point.

        h = h0 + c_p (T − T0),   s° = s0 + c_p ln(T/T0)

    Parameters
    ----------
    heat_capacity : c_p [J/(kg*K)].
    gas_constant : R [J/(kg*K)], less than c_p.
    temperature, enthalpy, entropy : the reference point T0 [K], h0 [J/kg], s0 [J/(kg*K)] at the standard pressure.
    minimum_temperature, maximum_temperature : range in which temperatures are found [K].
    """

    def __init__(
        self,
        heat_capacity: float,
        gas_constant: float,
        *,
        temperature: float,
        enthalpy: float,
        entropy: float,
        minimum_temperature: float,
        maximum_temperature: float,
    ) -> None:
        self._heat_capacity = heat_capacity
        self._gas_constant = gas_constant
        self._temperature, self._enthalpy, self._entropy = temperature, enthalpy, entropy
        self._low, self._high = minimum_temperature, maximum_temperature

    def heat_capacity(self, temperature: Array) -> Array:
        """c_p [J/(kg*K)] for every T [K]."""
        return np.where(np.isnan(temperature), np.nan, self._heat_capacity)

    def enthalpy(self, temperature: Array) -> Array:
        """h [J/kg] at T [K]."""
        return self._enthalpy + self._heat_capacity * (temperature - self._temperature)

    def entropy(self, temperature: Array) -> Array:
        """s° [J/(kg*K)] at T [K] and the standard pressure."""
        result: Array = self._entropy + self._heat_capacity * np.log(temperature / self._temperature)
        return result

    def temperature_of_enthalpy(self, enthalpy: Array) -> Array:
        """T [K] where h(T) [J/kg] has the value given."""
        return self._inside(self._temperature + (enthalpy - self._enthalpy) / self._heat_capacity)

    def temperature_of_internal_energy(self, energy: Array) -> Array:
        """T [K] where u(T) = h(T) − R T [J/kg] has the value given."""
        at_reference = self._enthalpy - self._gas_constant * self._temperature
        isochoric = self._heat_capacity - self._gas_constant
        return self._inside(self._temperature + (energy - at_reference) / isochoric)

    def temperature_of_entropy(self, entropy: Array) -> Array:
        """T [K] where s°(T) [J/(kg*K)] has the value given."""
        return self._inside(self._temperature * _exp((entropy - self._entropy) / self._heat_capacity))

    def temperature_of_isochoric_entropy(self, entropy: Array) -> Array:
        """T [K] where s°(T) − R ln(T/K) [J/(kg*K)] has the value given."""
        at_reference = self._entropy - self._gas_constant * np.log(self._temperature)
        isochoric = self._heat_capacity - self._gas_constant
        return self._inside(self._temperature * _exp((entropy - at_reference) / isochoric))

    def _inside(self, temperature: Array) -> Array:
        inside = (temperature >= self._low * (1.0 - LIMIT_SLACK)) & (temperature <= self._high * (1.0 + LIMIT_SLACK))
        return np.where(inside, np.clip(temperature, self._low, self._high), np.nan)


def _exp(exponent: Array) -> Array:
    """The exponential, infinite without a warning where it overflows: the limits then refuse it."""
    with np.errstate(over="ignore"):
        result: Array = np.exp(exponent)
    return result

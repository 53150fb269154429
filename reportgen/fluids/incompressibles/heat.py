"""Specific heat capacity of a liquid or solid against temperature, with its integrals in closed form.

H(T) = ∫ c dT,   S(T) = ∫ c/T dT,   both from the temperature of the zeros T0
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Protocol

import numpy as np
from numpy.polynomial import Polynomial
from numpy.typing import NDArray

from reportgen.errors import Fault

__all__ = ["HeatCapacityLaw", "PolynomialHeat", "TabulatedHeat", "check_table"]

Array = NDArray[np.float64]

#: Nodes from which temperatures are sought, between two kinks of the law.
_NODES = 64


class HeatCapacityLaw(Protocol):
    """c(T) and its integrals; arrays in, arrays of the same shape out."""

    def heat_capacity(self, temperature: Array, /) -> Array:
        """c [J/(kg*K)] at T [K]."""

    def enthalpy(self, temperature: Array, /) -> Array:
        """∫ c dT [J/kg] from T0 to T [K]."""

    def entropy(self, temperature: Array, /) -> Array:
        """∫ c/T dT [J/(kg*K)] from T0 to T [K]."""

    def least(self, minimum: float, maximum: float, /) -> float:
        """The smallest c [J/(kg*K)] between two temperatures [K]."""

    def nodes(self, minimum: float, maximum: float, /) -> Array:
        """Temperatures [K] from one limit to the other, increasing; between neighbours the law is smooth."""


class PolynomialHeat:
    """A polynomial, of degree 0 for a constant.

        c = Σ a_i T^i,   H = Σ a_i (T^(i+1) − T0^(i+1))/(i+1),   S = a_0 ln(T/T0) + Σ_(i>0) a_i (T^i − T0^i)/i

    The powers are rearranged round T0, so that differences near T0 keep their digits.

    Parameters
    ----------
    coefficients : a_0, a_1, ... [J/(kg*K^(i+1))], for T in K.
    zero : T0 [K].
    """

    def __init__(self, coefficients: Sequence[float], zero: float) -> None:
        self._zero = zero
        self._logarithmic = float(coefficients[0])
        self._law = Polynomial(np.array(coefficients, dtype=np.float64))
        about_zero = Polynomial((zero, 1.0))
        self._about_zero = self._law(about_zero)
        self._enthalpy = self._about_zero.integ()
        rest = Polynomial(np.array([*coefficients[1:], 0.0][: max(1, len(coefficients) - 1)], dtype=np.float64))
        self._entropy = rest(about_zero).integ()

    def heat_capacity(self, temperature: Array) -> Array:
        """c [J/(kg*K)] at T [K]."""
        result: Array = self._about_zero(temperature - self._zero)
        return result

    def enthalpy(self, temperature: Array) -> Array:
        """∫ c dT [J/kg] from T0 to T [K]."""
        result: Array = self._enthalpy(temperature - self._zero)
        return result

    def entropy(self, temperature: Array) -> Array:
        """∫ c/T dT [J/(kg*K)] from T0 to T [K]."""
        distance = temperature - self._zero
        result: Array = self._logarithmic * np.log1p(distance / self._zero) + self._entropy(distance)
        return result

    def least(self, minimum: float, maximum: float) -> float:
        """The smallest c [J/(kg*K)] between two temperatures [K]: at a limit or where dc/dT = 0."""
        turning = np.asarray(self._law.deriv().roots(), dtype=np.complex128)
        real = turning.real[np.abs(turning.imag) < 1e-9]
        inside = real[(real > minimum) & (real < maximum)]
        return float(np.min(self._law(np.concatenate(([minimum, maximum], inside)))))

    def nodes(self, minimum: float, maximum: float) -> Array:
        """Temperatures [K] from one limit to the other, in equal ratios."""
        return _between(minimum, maximum)


class TabulatedHeat:
    """A table with straight lines between its entries.

    On each line c = c_k + m (T − T_k):

        ΔH = (T − T_k) (c_k + m (T − T_k)/2),   ΔS = (c_k − m T_k) ln(T/T_k) + m (T − T_k)

    Parameters
    ----------
    temperatures : T_k [K], increasing.
    heat_capacities : c_k [J/(kg*K)].
    zero : T0 [K], inside the table.
    """

    def __init__(self, temperatures: Sequence[float], heat_capacities: Sequence[float], zero: float) -> None:
        self._temperatures = np.array(temperatures, dtype=np.float64)
        self._heat_capacities = np.array(heat_capacities, dtype=np.float64)
        self._slopes = np.diff(self._heat_capacities) / np.diff(self._temperatures)
        lines = np.arange(self._slopes.size)
        ends = self._temperatures[1:]
        self._enthalpies = np.concatenate(([0.0], np.cumsum(self._enthalpy_on(lines, ends))))
        self._entropies = np.concatenate(([0.0], np.cumsum(self._entropy_on(lines, ends))))
        at_zero = np.array([zero])
        self._enthalpies -= self.enthalpy(at_zero)
        self._entropies -= self.entropy(at_zero)

    def _line(self, temperature: Array) -> NDArray[np.intp]:
        """Index of the line on which each temperature lies; the outermost ones beyond the table."""
        found: NDArray[np.intp] = np.clip(self._temperatures.searchsorted(temperature) - 1, 0, self._slopes.size - 1)
        return found

    def _enthalpy_on(self, line: NDArray[np.intp], temperature: Array) -> Array:
        distance = temperature - self._temperatures[line]
        result: Array = distance * (self._heat_capacities[line] + 0.5 * self._slopes[line] * distance)
        return result

    def _entropy_on(self, line: NDArray[np.intp], temperature: Array) -> Array:
        start, slope = self._temperatures[line], self._slopes[line]
        distance = temperature - start
        result: Array = (self._heat_capacities[line] - slope * start) * np.log1p(distance / start) + slope * distance
        return result

    def heat_capacity(self, temperature: Array) -> Array:
        """c [J/(kg*K)] at T [K]."""
        line = self._line(temperature)
        result: Array = self._heat_capacities[line] + self._slopes[line] * (temperature - self._temperatures[line])
        return result

    def enthalpy(self, temperature: Array) -> Array:
        """∫ c dT [J/kg] from T0 to T [K]."""
        line = self._line(temperature)
        result: Array = self._enthalpies[line] + self._enthalpy_on(line, temperature)
        return result

    def entropy(self, temperature: Array) -> Array:
        """∫ c/T dT [J/(kg*K)] from T0 to T [K]."""
        line = self._line(temperature)
        result: Array = self._entropies[line] + self._entropy_on(line, temperature)
        return result

    def least(self, minimum: float, maximum: float) -> float:
        """The smallest c [J/(kg*K)] between two temperatures [K]: at a limit or at an entry of the table."""
        inside = self._temperatures[(self._temperatures > minimum) & (self._temperatures < maximum)]
        return float(np.min(self.heat_capacity(np.array([minimum, *inside, maximum]))))

    def nodes(self, minimum: float, maximum: float) -> Array:
        """Temperatures [K] from one limit to the other, with every entry of the table between them."""
        inside = self._temperatures[(self._temperatures > minimum) & (self._temperatures < maximum)]
        return np.unique(np.concatenate((_between(minimum, maximum), inside)))


def check_table(temperatures: Sequence[float], heat_capacities: Sequence[float]) -> list[Fault]:
    """What is wrong with a table of heat capacities [J/(kg*K)] at temperatures [K]; empty when nothing is."""
    if len(temperatures) != len(heat_capacities) or len(temperatures) < 2:
        return [
            Fault(
                "A table of specific heat has as many values as temperatures, two at least.",
                found=f"{len(temperatures)} temperatures, {len(heat_capacities)} values",
            )
        ]
    faults = []
    values = np.array([temperatures, heat_capacities])
    if not np.all(np.isfinite(values)) or not np.all(values > 0.0):
        faults.append(Fault("Temperatures and specific heats of a table are finite numbers above 0."))
    elif not np.all(np.diff(values[0]) > 0.0):
        faults.append(
            Fault(
                "The temperatures of a table of specific heat increase from entry to entry.",
                found=", ".join(f"{value:g} K" for value in values[0][:8]),
            )
        )
    return faults


def _between(minimum: float, maximum: float) -> Array:
    nodes = np.geomspace(minimum, maximum, _NODES)
    nodes[0], nodes[-1] = minimum, maximum
    return nodes

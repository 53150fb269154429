r"""Ideal-gas mixtures whose composition is an array: one mixture for each element, from the masses of its gases.

    h = Σ w_i h_i(T) ,   s = Σ w_i s_i°(T) − R ln(p/p°) − R_m Σ_i (w_i/M_i) Σ_k x_ik ln(x_k/x_ik)

with mass fractions w_i of the gases, x_ik the mole fraction of species k in gas i and x_k that in the mixture. The last
sum is the entropy of mixing: it vanishes for gases of one composition. ``IdealGas`` is the case of one composition for
all elements.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.fluids.gases.caloric import CaloricLaw
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT, IdealGas

__all__ = ["GasBlend", "mixing_entropy", "mole_fractions", "mole_fractions_of"]

Array = NDArray[np.float64]

_STEPS = 60
_RELATIVE_STEP = 1e-14


def mole_fractions(gas: IdealGas) -> dict[str, Any]:
    """Mole fractions [1] by species of an ideal gas, also of a pure one; arrays of shape (N,) for a ``GasBlend``."""
    return dict(gas._fractions)


def mole_fractions_of(gases: Sequence[IdealGas], masses: Sequence[ArrayLike]) -> dict[str, Any]:
    """Mole fractions [1] by species of the mixture of gases, from the mass of each [kg]; arrays of one shape."""
    amounts: dict[str, Any] = {}
    for gas, mass in zip(gases, masses, strict=True):
        for species, fraction in gas._fractions.items():
            part = np.asarray(mass, dtype=float) * (fraction / gas.molar_mass)
            amounts[species] = amounts.get(species, 0.0) + part
    total = sum(amounts.values())
    return {species: amount / total for species, amount in amounts.items()}


def mixing_entropy(gases: Sequence[IdealGas], masses: Sequence[ArrayLike]) -> Array:
    """−R Σ_i n_i Σ_k x_ik ln(x_k/x_ik) [J/K] of gases of one temperature and pressure that are mixed at both.

    Parameters
    ----------
    gases, masses : what is mixed, with the mass of each [kg], arrays of one shape; a mass may be zero.
    """
    shares = mole_fractions_of(gases, masses)
    result = np.zeros(np.broadcast_shapes(*(np.shape(mass) for mass in masses)))
    for gas, mass in zip(gases, masses, strict=True):
        amount = np.asarray(mass, dtype=float) / gas.molar_mass
        for species, fraction in gas._fractions.items():
            with np.errstate(divide="ignore", invalid="ignore"):
                part = amount * fraction * np.log(shares[species] / fraction)
            result = result - MOLAR_GAS_CONSTANT * np.where(amount == 0.0, 0.0, part)
    return result


class GasBlend(IdealGas):
    """The mixture of ideal gases in proportions that differ from element to element; ``at`` as of ``IdealGas``.

    Parameters
    ----------
    like : the mixture under its own name, whose title and sources it keeps.
    gases : what is mixed; gases of constant heat capacity keep it.
    masses : the mass of each gas [kg], arrays of shape (N,); states are then asked for with N elements.
    """

    def __init__(self, like: IdealGas, gases: Sequence[IdealGas], masses: Sequence[ArrayLike]) -> None:
        super().__init__(like.title, like.substance, like._fractions, like.constant_heat_capacity)
        amounts = np.array([np.asarray(mass, dtype=float) for mass in masses])
        total = amounts.sum(axis=0)
        shares = amounts / total
        # One value for each element where the base class has one for all.
        amount: Any = sum(share / gas.molar_mass for share, gas in zip(shares, gases, strict=True))
        self.molar_mass = 1.0 / amount
        self.gas_constant = MOLAR_GAS_CONSTANT * amount
        limits = like.limits
        self._law = _BlendLaw(
            [gas._law for gas in gases],
            shares,
            mixing_entropy(gases, masses) / total,
            np.asarray(self.gas_constant),
            (limits.minimum_temperature, limits.maximum_temperature),
        )
        self._fractions = dict(mole_fractions_of(gases, masses))


class _BlendLaw:
    """h(T), s°(T), c_p(T) of each element's mixture and their inverses."""

    def __init__(
        self,
        laws: Sequence[CaloricLaw],
        shares: Array,
        mixing: Array,
        gas_constant: Array,
        limits: tuple[float, float],
    ) -> None:
        self._laws = laws
        self._shares = shares
        self._mixing = mixing
        self._gas_constant = gas_constant
        self._low, self._high = limits

    def _sum(self, parts: Sequence[Array]) -> Array:
        result: Array = sum(share * part for share, part in zip(self._shares, parts, strict=True))
        return result

    def enthalpy(self, temperature: Array) -> Array:
        """h [J/kg] at T [K]."""
        return self._sum([law.enthalpy(temperature) for law in self._laws])

    def entropy(self, temperature: Array) -> Array:
        """s° [J/(kg*K)] at T [K] and the standard pressure, with the entropy of mixing."""
        return self._sum([law.entropy(temperature) for law in self._laws]) + self._mixing

    def heat_capacity(self, temperature: Array) -> Array:
        """c_p [J/(kg*K)] at T [K]."""
        return self._sum([law.heat_capacity(temperature) for law in self._laws])

    def temperature_of_enthalpy(self, enthalpy: Array) -> Array:
        """T [K] where h(T) [J/kg] has the value given."""
        return self._inverse(enthalpy, self.enthalpy, self.heat_capacity)

    def temperature_of_internal_energy(self, energy: Array) -> Array:
        """T [K] where u(T) = h(T) − R T [J/kg] has the value given."""
        constant = self._gas_constant
        return self._inverse(
            energy, lambda t: self.enthalpy(t) - constant * t, lambda t: self.heat_capacity(t) - constant
        )

    def temperature_of_entropy(self, entropy: Array) -> Array:
        """T [K] where s°(T) [J/(kg*K)] has the value given."""
        return self._inverse(entropy, self.entropy, lambda t: self.heat_capacity(t) / t)

    def temperature_of_isochoric_entropy(self, entropy: Array) -> Array:
        """T [K] where s°(T) − R ln(T/K) [J/(kg*K)] has the value given."""
        constant = self._gas_constant
        return self._inverse(
            entropy,
            lambda t: self.entropy(t) - constant * np.log(t),
            lambda t: (self.heat_capacity(t) - constant) / t,
        )

    def _inverse(self, value: Array, function: Callable[[Array], Array], derivative: Callable[[Array], Array]) -> Array:
        """T [K] of a growing function: Newton's method, halving where a step leaves the bracket; NaN outside."""
        low, high = np.full(value.shape, self._low), np.full(value.shape, self._high)
        below, above = function(low), function(high)
        slack = 1e-11 * (above - below)
        inside = (value >= below - slack) & (value <= above + slack)
        target = np.where(inside, np.clip(value, below, above), np.nan)
        temperature = low + (high - low) * (target - below) / (above - below)
        for _ in range(_STEPS):
            missed = function(temperature) - target
            low, high = np.where(missed <= 0.0, temperature, low), np.where(missed >= 0.0, temperature, high)
            stepped = temperature - missed / derivative(temperature)
            stepped = np.where((stepped > low) & (stepped < high), stepped, 0.5 * (low + high))
            settled = np.abs(stepped - temperature) <= _RELATIVE_STEP * temperature
            temperature = np.where(missed == 0.0, temperature, stepped)
            if np.all(settled | (missed == 0.0) | np.isnan(target)):
                break
        return np.where(inside, temperature, np.nan)

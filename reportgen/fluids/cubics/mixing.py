"""Van der Waals' mixing rules for the parameters of a cubic equation.

    a = Σ Σ x_i x_j √(a_i a_j) (1 − k_ij),   b = Σ x_i b_i,   c = Σ x_i c_i

√a_i = √a_i(Tc) [1 + m_i (1 − √(T/Tc_i))] keeps its sign, so that everything stays smooth where it passes through zero,
at several critical temperatures.

Arrays of compositions have the shape (C, N): species first, states last, so that what belongs to a state broadcasts.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.equation import CubicForm
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT

__all__ = ["Attraction", "Conditions", "Mixture", "Strength"]

FloatArray = NDArray[Any]


class Attraction(NamedTuple):
    """√a_i [(Pa*m6)^(1/2)/mol] and its first and second derivative by T, shape (C, N)."""

    root: FloatArray
    first: FloatArray
    second: FloatArray


class Strength(NamedTuple):
    """a [Pa*m6/mol2], da/dT, d²a/dT² and the covolume b [m3/mol] of a composition, shape (N,)."""

    attraction: FloatArray
    first: FloatArray
    second: FloatArray
    covolume: FloatArray


@dataclass(frozen=True)
class Conditions:
    """Temperature [K] and pressure [Pa] of N states, with √a_i [(Pa*m6)^(1/2)/mol] of shape (C, N)."""

    temperature: FloatArray
    pressure: FloatArray
    root: FloatArray

    def take(self, where: NDArray[Any]) -> Conditions:
        """The conditions of the states at an index array or mask."""
        return Conditions(self.temperature[where], self.pressure[where], self.root[:, where])


class Mixture:
    """Parameters of C species in one cubic equation.

    Parameters
    ----------
    form : the equation.
    temperatures, pressures, factors : critical temperatures [K] and pressures [Pa], acentric factors [1], shape (C,).
    interaction : k_ij [1], symmetric with zero diagonal, shape (C, C).
    translation : c_i [m3/mol], shape (C,); the volume is the equation's minus Σ x_i c_i.
    """

    def __init__(
        self,
        form: CubicForm,
        temperatures: FloatArray,
        pressures: FloatArray,
        factors: FloatArray,
        interaction: FloatArray,
        translation: FloatArray,
    ) -> None:
        self.form = form
        self.size = temperatures.size
        self.critical_temperatures = temperatures
        self.critical_pressures = pressures
        self.factors = factors
        self.slopes = form.slope(factors)
        self.covolumes = form.covolume * MOLAR_GAS_CONSTANT * temperatures / pressures
        self.translation = translation
        self._critical_roots = np.sqrt(form.attraction / pressures) * MOLAR_GAS_CONSTANT * temperatures
        self.coupling = 1.0 - interaction

    def conditions(self, temperature: FloatArray, pressure: FloatArray) -> Conditions:
        """Conditions at T [K] and p [Pa], shape (N,)."""
        reduced = np.sqrt(temperature / self.critical_temperatures[:, None])
        root = self._critical_roots[:, None] * (1.0 + self.slopes[:, None] * (1.0 - reduced))
        return Conditions(temperature, pressure, root)

    def attraction(self, temperature: FloatArray) -> Attraction:
        """√a_i and its derivatives at T [K], shape (C, N)."""
        reduced = np.sqrt(temperature / self.critical_temperatures[:, None])
        scale = (self._critical_roots * self.slopes)[:, None]
        root = self._critical_roots[:, None] + scale * (1.0 - reduced)
        first = -0.5 * scale * reduced / temperature
        return Attraction(root, first, -0.5 * first / temperature)

    def strength(self, attraction: Attraction, fractions: FloatArray) -> Strength:
        """a, da/dT, d²a/dT², b of mole fractions [1] of shape (C, N)."""
        parts = fractions * attraction.root
        changes = fractions * attraction.first
        coupled = self.coupling @ parts
        turned = self.coupling @ changes
        return Strength(
            np.sum(parts * coupled, axis=0),
            2.0 * np.sum(changes * coupled, axis=0),
            2.0 * (np.sum(fractions * attraction.second * coupled, axis=0) + np.sum(changes * turned, axis=0)),
            self.covolumes @ fractions,
        )

    def wilson(self, temperature: FloatArray, pressure: FloatArray) -> FloatArray:
        """Estimate of ln K_i [1] by Wilson's formula at T [K] and p [Pa], shape (C, N).

        K_i = (pc_i/p) exp[5.373 (1 + ω_i)(1 − Tc_i/T)]
        """
        steepness = 5.373 * (1.0 + self.factors[:, None])
        result: FloatArray = np.log(self.critical_pressures[:, None] / pressure) + steepness * (
            1.0 - self.critical_temperatures[:, None] / temperature
        )
        return result

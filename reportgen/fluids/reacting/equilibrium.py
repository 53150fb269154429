"""Chemical equilibrium of ideal-gas mixtures by least Gibbs energy, for many mixtures at once.

With n_j [mol/kg] of species j, n = Σ n_j and b_k = Σ_j a_jk n_j [mol/kg] of element k given, the equilibrium at T, p
makes  Σ n_j μ_j  least,  μ_j/(RT) = μ°_j/(RT) + ln(n_j/n) + ln(p/p°).  Element potentials π_k turn this into

    ln n_j = ln n − ln(p/p°) − μ°_j/(RT) + Σ_k a_jk π_k

Newton's method in π, ln n and, where enthalpy or entropy is given in place of temperature, ln T: the reduced equations
of Gordon and McBride (NASA RP-1311, 1994, sections 2.3.1 and 2.3.2; step control of section 3.3).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.reacting.species_table import SpeciesTable, Standard

__all__ = ["Equilibrium", "Mixture", "Responses"]

Array = NDArray[np.float64]
Given = Literal["temperature", "specific_enthalpy", "specific_entropy"]

_MOLAR_GAS_CONSTANT = 8.31446261815324  # J/(mol*K), exact by the definition of the SI of 2019

_ITERATIONS = 200
#: Largest change of amounts, of the total and of ln T in the last step, and of the element balance, at convergence.
_SETTLED = 1e-11
#: ln(n_j/n) below which a species is a trace that must not hold up the others (10^-8, RP-1311 section 3.3).
_TRACE = -18.420681
#: ln(n_j/n) below which a species is kept at this floor: its share is nothing, its logarithm still a number.
_FLOOR = -600.0


@dataclass(frozen=True)
class Mixture:
    """What an equilibrium calculation finds, N mixtures of S species.

    ``temperature`` T [K] (N,); ``amounts`` n_j [mol/kg] (N, S); ``found`` (N,) whether it has converged; ``standard``
    the properties of the species at T; ``pressure`` [Pa] (N,).
    """

    temperature: Array
    pressure: Array
    amounts: Array
    found: NDArray[np.bool_]
    standard: Standard

    @property
    def total(self) -> Array:
        """n = Σ n_j [mol/kg]."""
        result: Array = np.sum(self.amounts, axis=1)
        return result

    @property
    def enthalpy(self) -> Array:
        """h = Σ n_j h_j [J/kg]."""
        sum_: Array = np.sum(self.amounts * self.standard.enthalpy, axis=1)
        return _MOLAR_GAS_CONSTANT * self.temperature * sum_

    def entropy(self, standard_pressure: float) -> Array:
        """s = Σ n_j [s°_j − R ln(n_j/n) − R ln(p/p°)] [J/(kg*K)], p° in Pa."""
        amounts, total = self.amounts, self.total
        shares = np.where(amounts > 0, amounts / total[:, None], 1.0)
        sum_: Array = np.sum(amounts * (self.standard.entropy - np.log(shares)), axis=1)
        return _MOLAR_GAS_CONSTANT * (sum_ - total * np.log(self.pressure / standard_pressure))


class Responses(NamedTuple):
    """c_p, c_v [J/(kg*K)], (∂ln v/∂ln T)_p, (∂ln v/∂ln p)_T [1] and speed of sound [m/s] of N mixtures."""

    isobaric_heat_capacity: Array
    isochoric_heat_capacity: Array
    expansion: Array
    compression: Array
    speed_of_sound: Array


class Equilibrium:
    """Equilibrium among a list of species.

    Parameters
    ----------
    keys : the species that may be present, by key, name or formula.
    """

    def __init__(self, keys: Sequence[str]) -> None:
        self.table = SpeciesTable(keys)
        atoms = self.table.atoms
        #: a_jk a_jl of every species, (S, E·E).
        self._pairs: Array = (atoms[:, :, None] * atoms[:, None, :]).reshape(atoms.shape[0], -1)

    def solve(self, elements: Array, pressure: Array, *, given: Given, value: Array) -> Mixture:
        """Composition, and temperature where it is not given.

        Parameters
        ----------
        elements : b (N, E) [mol/kg], in the order of ``table.elements``; not negative. Species with an element that a
            mixture has nothing of are absent from it.
        pressure : p (N,) [Pa], above zero.
        given, value : T [K], h [J/kg] or s [J/(kg*K)] of the mixture (N,); h with formation enthalpies,
            s by the third law.

        Returns
        -------
        Mixture with NaN where no equilibrium was found (``found`` false), also when the temperature would lie outside
        the polynomials' range.
        """
        columns = value.size
        present = self._present(elements)
        log_pressure = np.log(pressure / self.table.standard_pressure)
        log_total = np.full(columns, np.log(0.1e3 / 3.0))  # the total of 30 g/mol
        share = -np.log(np.maximum(present.sum(axis=1), 1))
        log_amounts = np.where(present, (log_total + share)[:, None], -np.inf)
        log_temperature = np.log(value) if given == "temperature" else np.full(columns, np.log(2000.0))
        found = np.zeros(columns, dtype=np.bool_)
        active = np.flatnonzero(np.isfinite(value) & np.isfinite(log_pressure) & present.any(axis=1))
        low, high = np.log(self.table.minimum_temperature * 0.75), np.log(self.table.maximum_temperature * 1.2)
        for _ in range(_ITERATIONS):
            if not active.size:
                break
            step = self._step(
                elements[active],
                log_pressure[active],
                log_amounts[active],
                log_total[active],
                log_temperature[active],
                value[active],
                present[active],
                given,
            )
            log_amounts[active] += step.factor[:, None] * step.amounts
            log_total[active] += step.factor * step.total
            moved = np.clip(log_temperature[active] + step.factor * step.temperature, low, high)
            log_temperature[active] = moved
            lowest = log_total[active, None] + _FLOOR
            kept = present[active] & (log_amounts[active] < lowest)
            log_amounts[active] = np.where(kept, lowest, log_amounts[active])
            found[active] = step.settled
            active = active[~step.settled & step.sound]
        temperature = np.exp(log_temperature)
        inside = (temperature >= self.table.minimum_temperature * (1 - 1e-9)) & (
            temperature <= self.table.maximum_temperature * (1 + 1e-9)
        )
        found &= inside
        temperature = np.where(found, temperature, np.nan)
        amounts = np.where(found[:, None], np.exp(log_amounts), np.nan)
        return Mixture(temperature, np.where(found, pressure, np.nan), amounts, found, self.table.at(temperature))

    def responses(self, mixture: Mixture) -> Responses:
        """How the mixture answers to T and p, its composition following (RP-1311 section 2.5, eqs 2.56 to 2.66).

        c_p, c_v per kilogram [J/(kg*K)], (∂ln v/∂ln T)_p, (∂ln v/∂ln p)_T [1], speed of sound [m/s]; each (N,).
        """
        atoms, amounts, standard = self.table.atoms, mixture.amounts, mixture.standard
        columns, size = amounts.shape[0], atoms.shape[1]
        matrix = np.zeros((columns, size + 1, size + 1))
        per_element = amounts @ atoms
        matrix[:, :size, :size] = (amounts @ self._pairs).reshape(columns, size, size)
        matrix[:, :size, size] = matrix[:, size, :size] = per_element
        for k in range(size):
            matrix[~(per_element[:, k] > 0), k, k] = 1.0
        heat = amounts * standard.enthalpy
        by_temperature, by_pressure = np.empty((columns, size + 1)), np.empty((columns, size + 1))
        by_temperature[:, :size], by_temperature[:, size] = -(heat @ atoms), -heat.sum(axis=1)
        by_pressure[:, :size], by_pressure[:, size] = per_element, mixture.total
        with_temperature, sound = _solved(matrix, by_temperature)
        with_pressure, sound_too = _solved(matrix, by_pressure)
        heat_capacity = np.sum(amounts * standard.heat_capacity + heat * standard.enthalpy, axis=1)
        heat_capacity -= np.sum(by_temperature * with_temperature, axis=1)
        expansion, compression = 1 + with_temperature[:, size], -1 + with_pressure[:, size]
        isobaric = _MOLAR_GAS_CONSTANT * heat_capacity
        isochoric = isobaric + _MOLAR_GAS_CONSTANT * mixture.total * expansion**2 / compression
        exponent = -isobaric / isochoric / compression
        speed = np.sqrt(mixture.total * _MOLAR_GAS_CONSTANT * mixture.temperature * exponent)
        good = sound & sound_too & mixture.found
        return Responses(
            *(np.where(good, array, np.nan) for array in (isobaric, isochoric, expansion, compression, speed))
        )

    def _present(self, elements: Array) -> NDArray[np.bool_]:
        """(N, S): species all of whose elements the mixture has."""
        missing = elements <= 0
        absent: NDArray[np.bool_] = missing.astype(np.float64) @ self.table.atoms.T > 0
        return ~absent

    def _step(
        self,
        elements: Array,
        log_pressure: Array,
        log_amounts: Array,
        log_total: Array,
        log_temperature: Array,
        value: Array,
        present: NDArray[np.bool_],
        given: Given,
    ) -> _Step:
        """One Newton step of the reduced equations (RP-1311 eqs 2.24 to 2.28)."""
        atoms = self.table.atoms
        columns, size = elements.shape
        temperature = np.exp(log_temperature)
        standard = self.table.at(temperature)
        amounts, total = np.exp(log_amounts), np.exp(log_total)
        with np.errstate(invalid="ignore"):
            potential = np.where(
                present, standard.potential + log_amounts - log_total[:, None] + log_pressure[:, None], 0.0
            )
        enthalpy = standard.enthalpy
        free = given != "temperature"
        order = size + 1 + free
        matrix = np.zeros((columns, order, order))
        right = np.zeros((columns, order))
        per_element = amounts @ atoms
        matrix[:, :size, :size] = (amounts @ self._pairs).reshape(columns, size, size)
        matrix[:, :size, size] = matrix[:, size, :size] = per_element
        present_total = amounts.sum(axis=1)
        matrix[:, size, size] = present_total - total
        weighted = amounts * potential
        right[:, :size] = elements - per_element + weighted @ atoms
        right[:, size] = total - present_total + weighted.sum(axis=1)
        if free:
            heat = amounts * enthalpy
            matrix[:, :size, size + 1] = heat @ atoms
            matrix[:, size, size + 1] = heat.sum(axis=1)
            capacity = np.sum(amounts * standard.heat_capacity, axis=1)
            if given == "specific_enthalpy":
                factor = heat
                wanted = value / (_MOLAR_GAS_CONSTANT * temperature)
                missing = wanted - heat.sum(axis=1)
                last = capacity + np.sum(heat * enthalpy, axis=1)
            else:
                with np.errstate(invalid="ignore"):
                    entropy = np.where(
                        present, standard.entropy - log_amounts + log_total[:, None] - log_pressure[:, None], 0.0
                    )
                factor = amounts * entropy
                wanted = value / _MOLAR_GAS_CONSTANT
                missing = wanted - factor.sum(axis=1) + total - present_total
                last = capacity + np.sum(factor * enthalpy, axis=1)
            matrix[:, size + 1, :size] = factor @ atoms
            matrix[:, size + 1, size] = factor.sum(axis=1)
            matrix[:, size + 1, size + 1] = last
            right[:, size + 1] = missing + np.sum(factor * potential, axis=1)
        # An element that a mixture has nothing of has no potential.
        without = elements <= 0
        for k in range(size):
            matrix[without[:, k], k, k] = 1.0
        solution, sound = _solved(matrix, right)
        potentials, change_total = solution[:, :size], solution[:, size]
        change_temperature = solution[:, size + 1] if free else np.zeros(columns)
        change = potentials @ atoms.T + change_total[:, None] + change_temperature[:, None] * enthalpy - potential
        change = np.where(present, change, 0.0)
        share = np.where(present, log_amounts - log_total[:, None], 0.0)
        with np.errstate(divide="ignore", invalid="ignore"):
            ordinary = np.where(present & (share > _TRACE), np.abs(change), 0.0)
            largest = np.maximum(5 * np.abs(change_total), 5 * np.abs(change_temperature))
            largest = np.maximum(largest, ordinary.max(axis=1))
            factor_main = np.where(largest > 2.0, 2.0 / largest, 1.0)
            growing = present & (share <= _TRACE) & (change > 0)
            room = np.where(growing, np.abs((-share - 9.2103404) / (change - change_total[:, None])), np.inf)
            factor_step = np.minimum(factor_main, np.minimum(room.min(axis=1), 1.0))
        settled = np.sum(amounts * np.abs(change), axis=1) <= _SETTLED * present_total
        settled &= (np.abs(change_total) <= _SETTLED) & (np.abs(change_temperature) <= _SETTLED)
        settled &= np.all(np.abs(per_element - elements) <= 1e-10 * elements.sum(axis=1)[:, None], axis=1)
        return _Step(change, change_total, change_temperature, factor_step, settled & sound, sound)


@dataclass(frozen=True)
class _Step:
    """Changes of ln n_j, ln n and ln T, the part of them to take, and whether the step is the last."""

    amounts: Array
    total: Array
    temperature: Array
    factor: Array
    settled: NDArray[np.bool_]
    sound: NDArray[np.bool_]


def _solved(matrix: Array, right: Array) -> tuple[Array, NDArray[np.bool_]]:
    """Solutions of the linear systems, scaled by their diagonals; zeros, marked unsound, where one is singular."""
    scale = np.sqrt(np.abs(np.einsum("nii->ni", matrix)))
    scale = np.where(scale > 1e-150, scale, 1.0)
    scaled = matrix / (scale[:, :, None] * scale[:, None, :])
    wanted = right / scale
    sound = np.isfinite(scaled).all(axis=(1, 2)) & np.isfinite(wanted).all(axis=1)
    scaled[~sound] = np.eye(matrix.shape[1])
    try:
        solution = np.linalg.solve(scaled, wanted[:, :, None])[:, :, 0]
    except np.linalg.LinAlgError:
        solution = np.array([np.linalg.lstsq(a, b, rcond=None)[0] for a, b in zip(scaled, wanted, strict=True)])
    solution = np.where(sound[:, None], solution / scale, 0.0)
    return solution, sound & np.isfinite(solution).all(axis=1)

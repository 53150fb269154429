"""Sums over states and what follows from them.

With x = c₂ E/T, c₂ = hc/k, and Boltzmann weights g exp(−x)::

    Q = Σ g e⁻ˣ,   u = ⟨x⟩ = U/(R T),   c = ⟨x²⟩ − ⟨x⟩² = C_V/R,   S/R = ln Q + u

Contributions of independent motions multiply in Q and add in ln Q, u and c.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

__all__ = ["AVOGADRO", "BOLTZMANN", "PLANCK", "SECOND_RADIATION", "Sums", "oscillators", "over_levels", "translation"]

Array = NDArray[np.float64]

# Exact by the definition of the SI of 2019 (CODATA 2018, doi:10.1103/RevModPhys.93.025010).
BOLTZMANN = 1.380649e-23  # J/K
PLANCK = 6.62607015e-34  # J*s
AVOGADRO = 6.02214076e23  # 1/mol
_LIGHT = 299792458.0  # m/s
#: c₂ = hc/k [cm*K]: turns wavenumbers in cm-1 into temperatures.
SECOND_RADIATION = PLANCK * _LIGHT / BOLTZMANN * 100.0

#: Levels times temperatures worked on at a time.
_CHUNK = 1_000_000


class Sums(NamedTuple):
    """ln Q, u = U/(RT) and c = C_V/R [1], each an array over temperatures."""

    log_states: Array
    energy: Array
    heat: Array

    def joined(self, other: Sums) -> Sums:
        """Both motions together, independent of each other."""
        return Sums(self.log_states + other.log_states, self.energy + other.energy, self.heat + other.heat)

    @property
    def entropy(self) -> Array:
        """S/R [1]."""
        return self.log_states + self.energy


def over_levels(energies: Array, weights: Array, temperature: Array) -> Sums:
    """Sums over levels given one by one.

    Parameters
    ----------
    energies : E [cm-1] above the lowest level.
    weights : number of states in each level [1].
    temperature : T [K], shape (N,).
    """
    result = np.empty((3, temperature.size))
    step = max(1, _CHUNK // energies.size)
    for start in range(0, temperature.size, step):
        part = slice(start, start + step)
        x = SECOND_RADIATION * energies[:, np.newaxis] / temperature[part]
        share = weights[:, np.newaxis] * np.exp(-x)
        total = np.sum(share, axis=0)
        share /= total
        mean = np.sum(share * x, axis=0)
        result[:, part] = np.log(total), mean, np.sum(share * np.square(x - mean), axis=0)
    return Sums(*result)


def oscillators(wavenumbers: Array, degeneracies: Array, temperature: Array) -> Sums:
    """Harmonic oscillators, from their lowest level.

    ``ln Q = −ln(1 − e⁻ˣ)``, ``u = x/(eˣ − 1)``, ``c = x² eˣ/(eˣ − 1)²``, each times the degeneracy.

    Parameters
    ----------
    wavenumbers : ν [cm-1].
    degeneracies : number of oscillators of each [1].
    temperature : T [K], shape (N,).
    """
    x = SECOND_RADIATION * wavenumbers[:, np.newaxis] / temperature
    many = degeneracies[:, np.newaxis]
    decay = np.exp(-x)
    rest = -np.expm1(-x)
    mean = x * decay / rest
    return Sums(
        np.sum(-many * np.log(rest), axis=0),
        np.sum(many * mean, axis=0),
        np.sum(many * mean * x / rest, axis=0),
    )


def translation(molar_mass: float, temperature: Array, pressure: Array) -> Array:
    """Entropy of translation over R [1], by Sackur and Tetrode: ``5/2 + ln[(2π m k T/h²)^(3/2) k T/p]``.

    Parameters
    ----------
    molar_mass : M [kg/mol].
    temperature : T [K].
    pressure : p [Pa].
    """
    per_wavelength = 2.0 * np.pi * (molar_mass / AVOGADRO) * BOLTZMANN * temperature / PLANCK**2
    result: Array = 2.5 + 1.5 * np.log(per_wavelength) + np.log(BOLTZMANN * temperature / pressure)
    return result

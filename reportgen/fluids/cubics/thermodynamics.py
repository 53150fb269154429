"""Molar properties of a phase: the ideal gas plus the departures, translated.

    v = v' − c,   h = h°(T) + Δh − c p,   s = s°(T) − R ln(p/p°) − R Σ x_i ln x_i + Δs

with v' the volume of the untranslated equation; c_p, c_v and the speed of sound from

    c_p − c_v = −T (∂p/∂T)_v²/(∂p/∂v)_T,   w² = −v² (c_p/c_v) (∂p/∂v)_T/M
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.departures import departures
from reportgen.fluids.cubics.fugacity import Phase, Slopes
from reportgen.fluids.cubics.ideal import IdealPart
from reportgen.fluids.cubics.mixing import Conditions, Mixture
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT

__all__ = ["Bulk", "MolarModel", "Partial"]

FloatArray = NDArray[Any]


#: States worked on at a time, so that the temporaries stay small.
_CHUNK = 8192


class Bulk(NamedTuple):
    """Properties of a phase, shape (N,): ``volume`` [m3/mol] (translated), ``enthalpy`` [J/mol], ``entropy``,
    ``isobaric_heat_capacity``, ``isochoric_heat_capacity`` [J/(mol*K)]; (∂p/∂v)_T [Pa*mol/m3] and (∂p/∂T)_v [Pa/K].
    """

    volume: FloatArray
    enthalpy: FloatArray
    entropy: FloatArray
    isobaric_heat_capacity: FloatArray
    isochoric_heat_capacity: FloatArray
    pressure_volume: FloatArray
    pressure_temperature: FloatArray

    @property
    def volume_temperature(self) -> FloatArray:
        """(∂v/∂T)_p [m3/(mol*K)]."""
        return -self.pressure_temperature / self.pressure_volume


class Partial(NamedTuple):
    """Partial molar volume [m3/mol], enthalpy [J/mol] and entropy [J/(mol*K)], shape (C, N)."""

    volume: FloatArray
    enthalpy: FloatArray
    entropy: FloatArray


class MolarModel:
    """Molar thermodynamics of C species in one cubic equation.

    Parameters
    ----------
    mixture : the equation.
    ideal : the ideal part.
    molar_masses : M_i [kg/mol], shape (C,).
    """

    def __init__(self, mixture: Mixture, ideal: IdealPart, molar_masses: FloatArray) -> None:
        self.mixture = mixture
        self.ideal = ideal
        self.molar_masses = molar_masses

    def untranslated_volume(self, temperature: FloatArray, pressure: FloatArray, phase: Phase) -> FloatArray:
        """v' = Z R T/p [m3/mol] of a phase at T [K] and p [Pa]."""
        result: FloatArray = phase.compressibility * (MOLAR_GAS_CONSTANT * temperature / pressure)
        return result

    def bulk(self, temperature: FloatArray, pressure: FloatArray, volume: FloatArray, fractions: FloatArray) -> Bulk:
        """Properties at T [K], p [Pa], untranslated volume v' [m3/mol] and mole fractions [1] of shape (C, N)."""
        if temperature.size > _CHUNK:
            slices = (slice(start, start + _CHUNK) for start in range(0, temperature.size, _CHUNK))
            parts = [self.bulk(temperature[s], pressure[s], volume[s], fractions[:, s]) for s in slices]
            return Bulk(*(np.concatenate(field) for field in zip(*parts, strict=True)))
        mixture = self.mixture
        strength = mixture.strength(mixture.attraction(temperature), fractions)
        found = departures(mixture.form, strength, temperature, pressure, volume)
        shift = mixture.translation @ fractions
        mixing = np.sum(fractions * np.log(np.where(fractions > 0.0, fractions, 1.0)), axis=0)
        ideal_enthalpy, ideal_entropy, ideal_capacity = self.ideal.properties(temperature)
        enthalpy = np.sum(fractions * ideal_enthalpy, axis=0) + found.enthalpy - shift * pressure
        entropy = np.sum(fractions * ideal_entropy, axis=0) + found.entropy
        entropy -= MOLAR_GAS_CONSTANT * (np.log(pressure / self.ideal.standard_pressure) + mixing)
        isochoric = np.sum(fractions * ideal_capacity, axis=0) - MOLAR_GAS_CONSTANT
        isochoric += found.isochoric_heat_capacity
        isobaric = isochoric - temperature * found.pressure_temperature**2 / found.pressure_volume
        return Bulk(
            volume - shift, enthalpy, entropy, isobaric, isochoric, found.pressure_volume, found.pressure_temperature
        )

    def of_phase(self, conditions: Conditions, phase: Phase) -> Bulk:
        """Properties of a phase found at its conditions."""
        t, p = conditions.temperature, conditions.pressure
        return self.bulk(t, p, self.untranslated_volume(t, p, phase), phase.fractions)

    def partial(self, conditions: Conditions, phase: Phase, slopes: Slopes) -> Partial:
        """Partial molar properties of a phase.

        v_i = R T/p (1 + ∂ln φ_i/∂ln p) − c_i,   h_i = h_i° − R T ∂ln φ_i/∂ln T − c_i p,
        T s_i = h_i − g_i,   g_i = h_i° − T s_i° + R T ln(x_i φ_i p/p°) − c_i p
        """
        t, p = conditions.temperature, conditions.pressure
        thermal = MOLAR_GAS_CONSTANT * t
        shift = self.mixture.translation[:, None]
        departure = -thermal * slopes.temperature()
        fugacity = np.log(phase.fractions * (p / self.ideal.standard_pressure)) + phase.ln_phi
        enthalpy, entropy, _ = self.ideal.properties(t)
        return Partial(
            thermal / p * (1.0 + slopes.pressure()) - shift,
            enthalpy + departure - shift * p,
            entropy + departure / t - MOLAR_GAS_CONSTANT * fugacity,
        )

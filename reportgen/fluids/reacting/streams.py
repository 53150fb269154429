"""What a stream brings to a fire: its elements, the oxygen it frees or binds, the heat it sets free at 25 °C.

With x_k the mole fractions of its species and d_k the atoms of oxygen that one molecule of species k binds when it
burns to CO2, H2O, SO2, HCl and N2 (2 for each C and S, 1/2 for each H beyond the Cl, less its own O), one kilogram

    needs  M_O2/(2 M) Σ x_k max(d_k, 0)   and frees  M_O2/(2 M) Σ x_k max(−d_k, 0)   kilograms of oxygen.

A gas that is mixed before it burns does both.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from reportgen.errors import Fault, InputError
from reportgen.fluids.gases.species import library

if TYPE_CHECKING:
    from reportgen.fluids.model import Fluid

__all__ = ["HEATING_PRESSURE", "HEATING_TEMPERATURE", "Contents", "contents_of", "heating_values"]

#: State at which heating values are told: 25 °C, 101.325 kPa.
HEATING_TEMPERATURE, HEATING_PRESSURE = 298.15, 101_325.0

THIRD_LAW = "third-law"


@dataclass(frozen=True)
class Contents:
    """One kilogram of a stream: ``elements`` [mol of atoms] by symbol; oxygen ``needed`` and ``free`` [kg of O2]."""

    elements: Mapping[str, float]
    needed: float
    free: float


def contents_of(fluid: Fluid) -> Contents:
    """Contents of a fluid of fixed composition.

    Raises
    ------
    InputError : the model does not count enthalpy and entropy from the zeros of the elements and of the third law, or
        its elements are not known.
    """
    if fluid.entropy_zero_name != THIRD_LAW:
        shiftable = fluid.kind == "real-fluid"
        raise InputError(
            Fault(
                f"{fluid.title} cannot take part in a combustion: its enthalpy and entropy have other zeros than those "
                "of its products.",
                found=fluid.entropy_zero_name,
                expected='reference_state = "third-law"'
                if shiftable
                else 'an ideal gas, or a real fluid with reference_state = "third-law"',
            )
        )
    carried = library()
    fractions = _fractions(fluid)
    if fractions is None or not set(fractions) <= set(carried.species):
        raise InputError(
            Fault(
                f"{fluid.title} cannot take part in a combustion: the elements it consists of are not known.",
                expected="an ideal gas, or a real fluid whose ideal gas is carried",
            )
        )
    mass = math.fsum(share * carried.species[key].molar_mass for key, share in fractions.items())
    oxygen = carried.species["O2"].molar_mass / (2.0 * mass)
    elements: dict[str, float] = {}
    needed = free = 0.0
    for key, share in fractions.items():
        atoms = carried.species[key].atoms
        for symbol, number in atoms.items():
            elements[symbol] = elements.get(symbol, 0.0) + share * number / mass
        bound = oxygen_bound(atoms)
        needed += share * max(bound, 0.0) * oxygen
        free += share * max(-bound, 0.0) * oxygen
    return Contents(elements, needed, free)


def oxygen_bound(atoms: Mapping[str, float]) -> float:
    """Atoms of oxygen [1] that a molecule binds when it burns, less its own; negative where it frees some."""
    hydrogen = max(atoms.get("H", 0) - atoms.get("Cl", 0), 0)
    return 2.0 * atoms.get("C", 0) + 0.5 * hydrogen + 2.0 * atoms.get("S", 0) - atoms.get("O", 0)


def heating_values(fluid: Fluid) -> tuple[float, float]:
    """Lower and higher heating value [J/kg] of a stream at 25 °C and 101.325 kPa.

    Heat given off when it burns completely with oxygen of that state and the products return to it: all the water in
    them vapour (lower) or liquid (higher), other products ideal gases.

    Raises
    ------
    InputError : as ``contents_of``. RangeError : the fluid has no state there.
    """
    elements = contents_of(fluid).elements
    before = float(fluid.at(temperature=HEATING_TEMPERATURE, pressure=HEATING_PRESSURE).specific_enthalpy)
    chlorine = elements.get("Cl", 0.0)
    water = max(elements.get("H", 0.0) - chlorine, 0.0) / 2.0
    made = {"CO2": elements.get("C", 0.0), "H2O": water, "SO2": elements.get("S", 0.0), "HCl": chlorine}
    after = math.fsum(amount * _molar_enthalpy(key) for key, amount in made.items() if amount)
    lower = before - after
    return lower, lower + water * _latent_heat()


def _fractions(fluid: Any) -> Mapping[str, float] | None:
    """Mole fractions by species key; None where they are not known."""
    if fluid.kind == "real-fluid":
        from reportgen.fluids.real.third_law import species_fractions

        found: Mapping[str, float] | None = species_fractions(fluid.substance)
        return found
    if fluid.composition is not None:
        return dict(fluid.composition)
    if fluid.kind in ("ideal-gas", "cubic") and fluid.substance is not None:
        from reportgen.fluids.gases.species import mole_fractions

        try:
            return mole_fractions(fluid.substance, "mole")
        except InputError:
            return None
    return None


@lru_cache(maxsize=16)
def _molar_enthalpy(key: str) -> float:
    """Enthalpy of a gas at 25 °C [J/mol]."""
    from reportgen.fluids.gases.gas import ideal_gas

    gas = ideal_gas(key)
    return float(gas.at(temperature=HEATING_TEMPERATURE, pressure=HEATING_PRESSURE).specific_enthalpy) * gas.molar_mass


@lru_cache(maxsize=1)
def _latent_heat() -> float:
    """Enthalpy of water vapour as an ideal gas less that of the liquid, 25 °C, 101.325 kPa [J/mol]."""
    from reportgen.fluids.real.fluid import RealFluid

    liquid = RealFluid("water", "third-law")
    enthalpy = float(liquid.at(temperature=HEATING_TEMPERATURE, pressure=HEATING_PRESSURE).specific_enthalpy)
    return _molar_enthalpy("H2O") - enthalpy * liquid.molar_mass

"""Compositions that the trade states in words: air of a given humidity, the gas of a complete combustion."""

from __future__ import annotations

import math
from collections.abc import Mapping

from reportgen.errors import Fault, InputError
from reportgen.fluids.gases.condensation import WATER, saturation_pressure
from reportgen.fluids.gases.species import Basis, library, mole_fractions
from reportgen.fluids.numeric import finite_number
from reportgen.fluids.pairs import in_words

__all__ = ["combustion_products", "humid_air", "stoichiometric_air"]

Composition = str | Mapping[str, float]


def humid_air(
    *,
    temperature: float,
    pressure: float,
    relative_humidity: float | None = None,
    humidity_ratio: float | None = None,
    dew_point: float | None = None,
    dry_air: Composition = "air",
) -> dict[str, float]:
    """Mole fractions [1] of humid air, for :func:`reportgen.fluids.ideal_gas`.

    ``x_w = φ p_sat(T)/p``; or ``x_w = W/(W + M_w/M_air)``; or ``x_w = p_sat(T_dew)/p``.

    Parameters
    ----------
    temperature, pressure : T [K] and total p [Pa] of the air.
    relative_humidity : φ [1] from 0 to 1, over liquid water, below 273.16 K over ice; without enhancement factor.
    humidity_ratio : W [kg/kg], mass of water for each mass of dry air.
    dew_point : [K], at the pressure of the air; not above its temperature.
    dry_air : name or mole fractions of the dry gas.

    Raises
    ------
    InputError : not exactly one measure of the humidity; values out of range; more water than the air can hold.
    """
    measures = {
        "relative_humidity": relative_humidity,
        "humidity_ratio": humidity_ratio,
        "dew_point": dew_point,
    }
    given = {name: value for name, value in measures.items() if value is not None}
    if len(given) != 1:
        raise InputError(
            Fault(
                "The humidity is given in one way.",
                found=", ".join(given) or "none",
                expected=" or ".join(measures),
            )
        )
    dry = mole_fractions(dry_air, "mole")
    _require(dry.get(WATER, 0.0) == 0.0, "The dry air holds water already.", f"{WATER} = {dry.get(WATER)}", "dry gas")
    _require(_positive(temperature), "The temperature is above 0 K.", repr(temperature), "a number in K")
    _require(_positive(pressure), "The pressure is above 0 Pa.", repr(pressure), "a number in Pa")
    temperature, pressure = float(temperature), float(pressure)
    ((name, measure),) = given.items()
    words = name.replace("_", " ")
    value = _from_zero(measure, f"The {words} is a number from 0.", "a finite number")
    saturated = float(saturation_pressure(temperature)) / pressure
    if name == "relative_humidity":
        _require(value <= 1.0, "The relative humidity is a fraction from 0 to 1.", f"{value:g}", "such as 0.6 for 60 %")
        share = value * saturated if value else 0.0
    elif name == "humidity_ratio":
        species = library().species
        mass = math.fsum(fraction * species[key].molar_mass for key, fraction in dry.items())
        share = value / (value + species[WATER].molar_mass / mass)
    else:
        _require(
            value <= temperature,
            "The dew point of air is not above its temperature.",
            in_words("temperature", value),
            f"at most {in_words('temperature', temperature)}",
        )
        share = float(saturation_pressure(value)) / pressure
    where = f"{in_words('temperature', temperature)}, {in_words('pressure', pressure)}"
    _require(
        share <= saturated * (1.0 + 1e-9) and share < 1.0,
        "The air cannot hold so much water as vapour.",
        f"a mole fraction of {share:.6g}",
        f"at most {min(saturated, 1.0):.6g} at {where}",
    )
    air = {key: (1.0 - share) * fraction for key, fraction in dry.items()}
    return {**air, WATER: share} if share else air


def combustion_products(
    fuel: Composition, *, excess_air: float = 0.0, air: Composition = "air", basis: Basis = "mole"
) -> dict[str, float]:
    """Mole fractions [1] of the gas of a complete combustion, for :func:`reportgen.fluids.ideal_gas`.

    Carbon burns to CO2, hydrogen to H2O, sulfur to SO2, chlorine to HCl; nitrogen stays N2; the rest of the oxygen O2.
    No dissociation; water stays vapour, see :func:`reportgen.fluids.gases.condensation.water_saturation`.

    Parameters
    ----------
    fuel : name or fractions of a gas, by the names of the ideal gases.
    excess_air : air beyond what combustion needs, as a fraction of that [1]: 0.2 for an air ratio of 1.2.
    air : name or mole fractions of the air, such as from :func:`humid_air`.
    basis : whether the fractions of the fuel are of amount ("mole") or of mass ("mass").

    Raises
    ------
    InputError : unknown names, a fuel that needs no oxygen, air without free oxygen, a negative excess (too little
        oxygen for complete combustion), elements whose products are not carried.
    """
    from reportgen.fluids.reacting.products import CombustionGas  # compositions of air start without it

    excess = _from_zero(
        excess_air,
        "The excess of air is a number from 0: with less air the combustion is not complete.",
        "such as 0.2 for 20 %",
    )
    burnt, supplied = mole_fractions(fuel, basis), mole_fractions(air, "mole")
    amount = (1.0 + excess) * _air_needed(burnt, supplied)
    # one mole of fuel: masses of both streams, and their atoms for each kilogram
    masses = {"fuel": _mass(burnt), "air": amount * _mass(supplied)}
    parents = {
        "fuel": {symbol: number / _mass(burnt) for symbol, number in _atoms(burnt).items()},
        "air": {symbol: number / _mass(supplied) for symbol, number in _atoms(supplied).items()},
    }
    gas = CombustionGas("Combustion gas", parents, "complete")
    amounts = gas.amounts(shares=masses, pressure=[1e5], temperature=[1000.0])
    fractions = {key: float(values[0]) for key, values in gas.mole_fractions(amounts).items()}
    return {key: fraction for key, fraction in fractions.items() if fraction > 0.0}


def stoichiometric_air(fuel: Composition, *, air: Composition = "air", basis: Basis = "mole") -> float:
    """Mass of air that the complete combustion of each mass of fuel needs [kg/kg]; arguments as above.

    Raises
    ------
    InputError : unknown names, a fuel that needs no oxygen, air without free oxygen.
    """
    burnt, supplied = mole_fractions(fuel, basis), mole_fractions(air, "mole")
    return _air_needed(burnt, supplied) * _mass(supplied) / _mass(burnt)


def _air_needed(fuel: Mapping[str, float], air: Mapping[str, float]) -> float:
    """Amount of air for each amount of fuel [mol/mol]."""
    lacking, free = -_free_oxygen(fuel), _free_oxygen(air)
    _require(lacking > 0.0, "The fuel needs no oxygen to burn.", ", ".join(fuel), "a fuel")
    _require(free > 0.0, "The air holds no free oxygen.", ", ".join(air), 'such as "air"')
    return lacking / free


def _free_oxygen(fractions: Mapping[str, float]) -> float:
    """Atoms of oxygen beyond those that carbon, hydrogen and sulfur bind [mol/mol]; negative for a fuel."""
    atoms = _atoms(fractions)
    bound = 2.0 * atoms.get("C", 0.0) + 0.5 * (atoms.get("H", 0.0) - atoms.get("Cl", 0.0)) + 2.0 * atoms.get("S", 0.0)
    return atoms.get("O", 0.0) - bound


def _atoms(fractions: Mapping[str, float]) -> dict[str, float]:
    """Atoms by symbol in one mole of a gas [mol]."""
    species = library().species
    found: dict[str, float] = {}
    for key, fraction in fractions.items():
        for symbol, number in species[key].atoms.items():
            found[symbol] = found.get(symbol, 0.0) + fraction * number
    return found


def _mass(fractions: Mapping[str, float]) -> float:
    """Molar mass [kg/mol]."""
    species = library().species
    return math.fsum(fraction * species[key].molar_mass for key, fraction in fractions.items())


def _positive(value: object) -> bool:
    number = finite_number(value)
    return number is not None and number > 0.0


def _from_zero(value: object, message: str, expected: str) -> float:
    """The value as a number from 0. Raises InputError."""
    number = finite_number(value)
    if number is None or number < 0.0:
        raise InputError(Fault(message, found=repr(value)[:60], expected=expected))
    return number


def _require(holds: bool, message: str, found: str, expected: str) -> None:
    if not holds:
        raise InputError(Fault(message, found=found, expected=expected))

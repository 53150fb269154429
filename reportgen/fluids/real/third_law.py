"""Standard entropy and enthalpy of formation of real fluids in the ideal-gas state, from the ideal-gas species.

Which species a real fluid is, is decided by name and by atoms, never by formula alone: isomers share formulas, and
spin isomers (parahydrogen) or pure isotopes are other species with other entropies.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from reportgen.errors import Fault, InputError
from reportgen.fluids.gases.gas import ideal_gas
from reportgen.fluids.gases.species import GasSpecies, library, of_formula, plain_name
from reportgen.fluids.real import catalogue
from reportgen.fluids.real.reference import conventions

__all__ = [
    "PRESSURE",
    "TEMPERATURE",
    "Standard",
    "gas_species",
    "has_standard_values",
    "species_fractions",
    "standard_values",
]

TEMPERATURE = 298.15  # K
PRESSURE = 1e5  # Pa

#: Composition [mole fractions] of the pseudo-pure fluids whose components all have third-law data, by name.
#: Air: Lemmon, Jacobsen, Penoncello, Friend, J. Phys. Chem. Ref. Data 29 (2000) 331, doi:10.1063/1.1285884.
_COMPOSITIONS: dict[str, dict[str, float]] = {"air": {"N2": 0.7812, "O2": 0.2096, "Ar": 0.0092}}

#: Largest relative difference of molar masses between the two tables of one species.
_SAME_MASS = 1e-3


@dataclass(frozen=True)
class Standard:
    """Ideal gas at 298.15 K and 1 bar: ``entropy`` [J/(mol*K)], ``enthalpy`` of formation [J/mol], and their source."""

    entropy: float
    enthalpy: float
    sources: tuple[str, ...]
    data_files: tuple[Mapping[str, str], ...]


def gas_species(data: Mapping[str, Any]) -> GasSpecies | None:
    """The ideal-gas species that a real fluid's data file describes, or None.

    One of its names must be a name of the species, the atoms must be the same, and the molar masses agree to 1e-3.
    """
    atoms = _atoms(data["formula"])
    own = {plain_name(name) for name in (data["name"], data["title"], *data["aliases"])}
    for species in library().species.values():
        theirs = {plain_name(name) for name in (species.name, *species.aliases)}
        if dict(species.atoms) == atoms and own & theirs:
            same_mass = abs(species.molar_mass / data["molar_mass"] - 1.0) <= _SAME_MASS
            return species if same_mass else None
    return None


def standard_values(data: Mapping[str, Any]) -> Standard:
    """Third-law entropy and enthalpy of formation of a real fluid, from its data file.

    Raises
    ------
    InputError : no ideal-gas data are carried for the substance, or it is a blend of unknown composition.
    """
    gas = ideal_gas(_fractions(data))
    state = gas.at(temperature=TEMPERATURE, pressure=PRESSURE)
    return Standard(
        entropy=float(state.specific_entropy) * gas.molar_mass,
        enthalpy=float(state.specific_enthalpy) * gas.molar_mass,
        sources=tuple(f"Third-law zero: {source}" for source in gas.sources),
        data_files=gas.data_files,
    )


def has_standard_values(data: Mapping[str, Any]) -> bool:
    """Whether third-law data are carried for a real fluid, from its data file."""
    return data["name"] in _COMPOSITIONS if data["pseudo_pure"] else gas_species(data) is not None


def species_fractions(name: str) -> Mapping[str, float]:
    """Mole fractions [1] of the ideal-gas species that a real fluid consists of, by its name.

    Raises
    ------
    InputError : as ``standard_values``.
    """
    data, _ = catalogue.find(name)
    return _fractions(data)


def _fractions(data: Mapping[str, Any]) -> Mapping[str, float]:
    """Mole fractions of the species of a data file."""
    title = data["title"]
    if data["pseudo_pure"]:
        found = _COMPOSITIONS.get(data["name"])
        if found is None:
            raise InputError(
                Fault(
                    f"The third-law zero of {title} is not known: it is a blend, and third-law data are not carried "
                    "for all its components.",
                    expected=", ".join(conventions(data)),
                )
            )
        return found
    species = gas_species(data)
    if species is None:
        others = [gas.name for gas in of_formula(data["formula"])] if data["formula"] else []
        raise InputError(
            Fault(
                f"The third-law zero of {title} is not known: its ideal gas is not among those carried.",
                found=repr(data["name"]),
                expected=", ".join(conventions(data)),
                hint=f"Of its formula there is {' and '.join(others)}, with another entropy." if others else None,
            )
        )
    return {species.key: 1.0}


def _atoms(formula: str) -> dict[str, int]:
    """Atoms by symbol of a molecular formula such as C2H4Cl2."""
    found: dict[str, int] = {}
    for symbol, count in re.findall(r"([A-Z][a-z]?)(\d*)", formula):
        found[symbol] = found.get(symbol, 0) + int(count or 1)
    return found

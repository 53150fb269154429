"""The species an ideal gas may consist of: their data, their names, and compositions made of them."""

from __future__ import annotations

import hashlib
import json
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path
from typing import Any, Literal

from reportgen.errors import Fault, InputError
from reportgen.fluids.naming import CAS_NUMBER, nearest, sharing
from reportgen.fluids.numeric import number

__all__ = [
    "DATA_FILE",
    "GasLibrary",
    "GasMixture",
    "GasSpecies",
    "library",
    "mole_fractions",
    "nearest_names",
    "of_formula",
    "plain_name",
    "resolve",
]

Basis = Literal["mole", "mass"]

DATA_FILE = "ideal_gases.json"

#: A composition is taken when its fractions add up to 1 within this; then they are scaled to exactly 1.
SUM_TOLERANCE = 1e-6


@dataclass(frozen=True)
class GasSpecies:
    """One species: ``key`` (formula, or the name where isomers are carried, here or as real fluids), other names.

    ``molar_mass`` [kg/mol]; ``coefficients`` the nine numbers a1..a7, b1, b2 of each temperature interval, [K] based
    and divided by the molar gas constant; ``source`` where the underlying data come from.
    """

    key: str
    name: str
    aliases: tuple[str, ...]
    atoms: Mapping[str, int]
    molar_mass: float
    coefficients: tuple[tuple[float, ...], ...]
    source: str

    @property
    def formula(self) -> str:
        """Molecular formula in Hill's order: carbon, hydrogen, then alphabetically."""
        first = ("C", "H") if "C" in self.atoms else ()
        order = [*(atom for atom in first if atom in self.atoms), *sorted(set(self.atoms) - set(first))]
        return "".join(atom + (str(self.atoms[atom]) if self.atoms[atom] > 1 else "") for atom in order)


@dataclass(frozen=True)
class GasMixture:
    """A mixture with a name of its own, such as dry air: mole fractions by species key, and who defines it so."""

    key: str
    aliases: tuple[str, ...]
    mole_fractions: Mapping[str, float]
    source: str


@dataclass(frozen=True)
class GasLibrary:
    """Everything the data file holds. Temperatures [K], ``standard_pressure`` [Pa]."""

    species: Mapping[str, GasSpecies]
    mixtures: Mapping[str, GasMixture]
    temperature_breaks: tuple[float, ...]
    standard_pressure: float
    source: str
    sha256: str


@lru_cache(maxsize=1)
def library() -> GasLibrary:
    """The species carried, read once from the data file."""
    raw = (Path(__file__).parent.parent / "data" / DATA_FILE).read_bytes()
    content: dict[str, Any] = json.loads(raw)
    species = {
        key: GasSpecies(
            key=key,
            name=entry["name"],
            aliases=tuple(entry["aliases"]),
            atoms=entry["atoms"],
            molar_mass=entry["molar_mass"] * 1e-3,
            coefficients=tuple(tuple(interval) for interval in entry["coefficients"]),
            source=entry["source"],
        )
        for key, entry in content["species"].items()
    }
    mixtures = {
        key: GasMixture(key, tuple(entry["aliases"]), entry["mole_fractions"], entry["source"])
        for key, entry in content["mixtures"].items()
    }
    return GasLibrary(
        species=species,
        mixtures=mixtures,
        temperature_breaks=tuple(content["temperature_breaks"]),
        standard_pressure=content["standard_pressure"],
        source=content["source"],
        sha256=hashlib.sha256(raw.replace(b"\r\n", b"\n")).hexdigest(),  # the same whatever line ends a checkout has
    )


def plain_name(name: str) -> str:
    """What spellings of one name have in common: no case, no spaces, hyphens or underscores."""
    return "".join(character for character in name.casefold() if character not in " -_")


@lru_cache(maxsize=1)
def _names() -> tuple[dict[str, GasSpecies | GasMixture], dict[str, list[GasSpecies]]]:
    """Entries by the plain spelling of key, name and aliases; and species by that of their formula."""
    carried = library()
    found: dict[str, GasSpecies | GasMixture] = {}
    formulas: dict[str, list[GasSpecies]] = {}
    entries: list[GasSpecies | GasMixture] = [*carried.species.values(), *carried.mixtures.values()]
    for entry in entries:
        names = [entry.key, *entry.aliases]
        if isinstance(entry, GasSpecies):
            names.append(entry.name)
            formulas.setdefault(plain_name(entry.formula), []).append(entry)
        for name in names:
            found.setdefault(plain_name(name), entry)
    return found, formulas


def of_formula(formula: str) -> tuple[GasSpecies, ...]:
    """The species of a molecular formula (Hill's order; case does not matter)."""
    return tuple(_names()[1].get(plain_name(formula), ()))


def resolve(name: str) -> GasSpecies | GasMixture:
    """The species or named mixture of that name, formula, alias or CAS number; case, spaces, hyphens do not matter.

    Raises InputError for a name not carried, with the nearest one, and for a formula that several substances share
    which are carried as ideal gases or real fluids.
    """
    if not isinstance(name, str) or not name.strip() or len(name) > 80:
        raise InputError(Fault("The name of a gas is a short text.", found=repr(name)[:60], expected='such as "N2"'))
    entry = _names()[0].get(plain_name(name)) or _by_number(name)
    if entry is not None:
        return entry
    isomers = of_formula(name)
    if isomers:
        carried = [species.name for species in isomers]
        others = _not_among(isomers, sharing(name))
        if len(isomers) == 1 and not others:
            return isomers[0]
        raise InputError(
            Fault(
                "Several isomers share this formula.",
                found=repr(name),
                expected=" or ".join(carried),
                hint=f"The formula is that of {', '.join(others)}, too: carried as real fluid only."
                if others
                else None,
            )
        )
    near = nearest_names(name)
    raise InputError(
        Fault(
            "This gas is not carried as an ideal gas.",
            found=repr(name),
            expected='a name or formula such as "N2"',
            hint=f"Nearest: {' or '.join(near)}." if near else None,
        )
    )


def nearest_names(name: str) -> tuple[str, ...]:
    """Names that may be meant by one that is not carried, the likeliest first, three at most."""
    found = _names()[0]
    close = [found[match] for match in nearest(name, plain_name(name), found)]
    return tuple(dict.fromkeys(entry.name if isinstance(entry, GasSpecies) else entry.key for entry in close))


def _by_number(name: str) -> GasSpecies | None:
    """The species of a CAS number, None for none."""
    if not CAS_NUMBER.fullmatch(name.strip()):
        return None
    from reportgen.fluids.cubics.constants import key_of_cas  # the file that has the numbers is read for them only

    key = key_of_cas(name.strip())
    return None if key is None else library().species[key]


def _not_among(isomers: Sequence[GasSpecies], names: Sequence[str]) -> list[str]:
    """The names that none of the species has."""
    known = {plain_name(name) for species in isomers for name in (species.key, species.name, *species.aliases)}
    return [name for name in names if plain_name(name) not in known]


def mole_fractions(substance_or_composition: str | Mapping[str, float], basis: Basis) -> dict[str, float]:
    """Mole fractions [1] by species key, adding up to 1, of a substance or of fractions on a mole or mass basis.

    From mass fractions w: x_i = (w_i/M_i) / Σ (w_j/M_j).

    Raises InputError with every fault found: unknown or repeated species, negative fractions, a sum that is not 1.
    """
    carried = library()
    if basis not in ("mole", "mass"):
        raise InputError(Fault("The basis of a composition is not known.", found=repr(basis), expected="mole or mass"))
    if isinstance(substance_or_composition, str):
        entry = resolve(substance_or_composition)
        return dict(entry.mole_fractions) if isinstance(entry, GasMixture) else {entry.key: 1.0}
    if not isinstance(substance_or_composition, Mapping):
        raise InputError(
            Fault(
                "This is neither the name of a gas nor a composition.",
                found=repr(substance_or_composition)[:60],
                expected='such as "N2", or fractions by name such as {"N2": 0.8, "O2": 0.2}',
            )
        )
    faults: list[Fault] = []
    fractions: dict[str, float] = {}
    for name, fraction in substance_or_composition.items():
        number = _fraction(fraction)
        if number is None:
            faults.append(Fault("A fraction lies between 0 and 1.", found=f"{name} = {fraction!r}"))
            continue
        try:
            entry = resolve(name)
        except InputError as error:
            faults.extend(error.faults)
            continue
        if isinstance(entry, GasMixture):
            faults.append(Fault(f"{entry.key} is itself a mixture: give its components.", found=name))
        elif entry.key in fractions:
            faults.append(Fault("The composition names one species twice.", found=f"{name} is {entry.key}"))
        else:
            fractions[entry.key] = number
    total = math.fsum(fractions.values())
    if not faults and not math.isclose(total, 1.0, rel_tol=0.0, abs_tol=SUM_TOLERANCE):
        faults.append(
            Fault(
                f"The {basis} fractions do not add up to 1.",
                found=f"a sum of {total:.9g}" if fractions else "no species",
                expected=f"1 within {SUM_TOLERANCE:g}",
            )
        )
    if faults:
        raise InputError(faults)
    amounts = {
        key: fraction / (carried.species[key].molar_mass if basis == "mass" else 1.0)
        for key, fraction in fractions.items()
        if fraction > 0.0
    }
    total = math.fsum(amounts.values())
    return {key: amount / total for key, amount in amounts.items()}


def _fraction(value: object) -> float | None:
    """The value as a fraction from 0 to 1 (a rounding above 1 is left to the check of the sum), or None."""
    found = number(value)
    return found if found is not None and 0.0 <= found <= 1.0 + SUM_TOLERANCE else None

"""The species an ideal gas may consist of: their data, their names, and compositions made of them."""

from __future__ import annotations

import hashlib
import json
import math
from collections.abc import Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from functools import lru_cache
from pathlib import Path
from typing import Any, Literal

from reportgen.errors import Fault, InputError

__all__ = [
    "DATA_FILE",
    "GasLibrary",
    "GasMixture",
    "GasSpecies",
    "library",
    "mole_fractions",
    "plain_name",
    "resolve",
]

Basis = Literal["mole", "mass"]

DATA_FILE = "ideal_gases.json"

#: A composition is taken when its fractions add up to 1 within this; then they are scaled to exactly 1.
SUM_TOLERANCE = 1e-6


@dataclass(frozen=True)
class GasSpecies:
    """One species: ``key`` (formula, or the name where several isomers are carried), name and other names.

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
    """Exact and plain spellings of every entry; and by formula, the isomers that share it."""
    carried = library()
    found: dict[str, GasSpecies | GasMixture] = {}
    isomers: dict[str, list[GasSpecies]] = {}
    entries: list[GasSpecies | GasMixture] = [*carried.species.values(), *carried.mixtures.values()]
    for entry in entries:
        names = [entry.key, *entry.aliases]
        if isinstance(entry, GasSpecies):
            names.append(entry.name)
            isomers.setdefault(entry.formula, []).append(entry)
        for name in names:
            found.setdefault(plain_name(name), entry)
    for formula, sharing in isomers.items():
        if len(sharing) == 1:
            found.setdefault(plain_name(formula), sharing[0])
    return found, isomers


def resolve(name: str) -> GasSpecies | GasMixture:
    """The species or named mixture of that name, formula or alias; case, spaces and hyphens do not matter.

    Raises InputError for a name not carried, with the nearest one, and for a formula that several isomers share.
    """
    found, isomers = _names()
    if not isinstance(name, str) or not name.strip() or len(name) > 80:
        raise InputError(Fault("The name of a gas is a short text.", found=repr(name)[:60], expected='such as "N2"'))
    entry = found.get(plain_name(name))
    if entry is not None:
        return entry
    sharing = isomers.get(name.strip(), [])
    if len(sharing) > 1:
        raise InputError(
            Fault(
                "Several isomers share this formula.",
                found=name,
                expected=" or ".join(species.key for species in sharing),
            )
        )
    near = get_close_matches(plain_name(name), found, n=1, cutoff=0.6)
    hint = None
    if near:
        close = found[near[0]]
        named = (
            f"{close.key} ({close.name})" if isinstance(close, GasSpecies) and close.name != close.key else close.key
        )
        hint = f"Nearest: {named}."
    raise InputError(
        Fault(
            "This gas is not carried as an ideal gas.", found=name, expected='a name or formula such as "N2"', hint=hint
        )
    )


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
    if isinstance(value, bool) or not isinstance(value, int | float):
        return None
    return float(value) if 0.0 <= value <= 1.0 + SUM_TOLERANCE else None

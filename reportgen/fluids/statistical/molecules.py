"""Molecular constants of the gases that are counted, from the data file, each with its publication."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from functools import lru_cache
from pathlib import Path
from typing import Any

from reportgen.errors import Fault, InputError
from reportgen.fluids.gases.species import GasSpecies, resolve

__all__ = [
    "DATA_FILE",
    "Atom",
    "Diatomic",
    "DiatomicState",
    "Molecule",
    "Polyatomic",
    "digest",
    "find",
    "names",
]

DATA_FILE = "molecular_constants.json"


@dataclass(frozen=True)
class Atom:
    """An atom: its electronic levels as (energy [cm-1], degeneracy [1])."""

    levels: tuple[tuple[float, int], ...]


@dataclass(frozen=True)
class DiatomicState:
    """One electronic state of a diatomic molecule, all in cm-1.

    ``term`` T_e; ``vibration`` ω_e, −ω_e x_e, ω_e y_e, ...: factors of (v + ½), (v + ½)², ...; ``rotation`` B_e;
    ``rotation_vibration`` α_e; ``centrifugal`` D_e; ``degeneracy`` (2S + 1)(2 − δ_Λ0) [1], with a spin-orbit
    constant ``spin_orbit`` A (²Π states) that of each Λ-doubled level, 2.
    """

    term: float
    vibration: tuple[float, ...]
    rotation: float
    rotation_vibration: float
    centrifugal: float
    degeneracy: int
    spin_orbit: float | None


@dataclass(frozen=True)
class Diatomic:
    """A diatomic molecule: constants of one isotopologue, scaled to the mean one by ``mass_ratio`` μ/μ_mean [1].

    ``dissociation`` [cm-1] from the lowest level; ``even`` and ``odd`` the shares [1] of rotational levels by the
    parity of J (½ and ½ for homonuclear molecules whose alternation does not matter, 1 and 1 for heteronuclear ones).
    """

    states: tuple[DiatomicState, ...]
    dissociation: float
    mass_ratio: float
    even: float
    odd: float


@dataclass(frozen=True)
class Polyatomic:
    """A polyatomic molecule; wavenumbers and rotational constants in cm-1.

    ``rotation`` (B,) of a linear molecule or (A, B, C); ``wavenumbers`` of the fundamentals with ``degeneracies`` [1];
    ``electronic_degeneracy`` [1]. ``anharmonicity`` x_ij [cm-1] (i ≤ j), ``rotation_vibration`` α [cm-1] by rotational
    constant and mode, and ``distortion`` [cm-1] (D of a linear molecule; Δ_J, Δ_JK, Δ_K, δ_J, δ_K of a bent one) are
    None where the model is harmonic and rigid.
    """

    rotation: tuple[float, ...]
    symmetry_number: int
    wavenumbers: tuple[float, ...]
    degeneracies: tuple[int, ...]
    electronic_degeneracy: int
    dissociation: float | None = None
    anharmonicity: tuple[tuple[float, ...], ...] | None = None
    rotation_vibration: tuple[tuple[float, ...], ...] | None = None
    distortion: tuple[float, ...] | None = None


@dataclass(frozen=True)
class Molecule:
    """A gas that can be counted: the ideal-gas species it is, its structure, and the publications of its constants."""

    species: GasSpecies
    structure: Atom | Diatomic | Polyatomic
    sources: tuple[str, ...]
    note: str


def find(name: str) -> Molecule:
    """The molecule of that name, formula or alias. Raises InputError for one that is not carried."""
    species = resolve(name)
    if species.key not in _content()["molecules"] or not isinstance(species, GasSpecies):
        near = get_close_matches(species.key, _content()["molecules"], n=1, cutoff=0.0)
        raise InputError(
            Fault(
                "No molecular constants are carried for this gas.",
                found=repr(name),
                expected=", ".join(_content()["molecules"]),
                hint=f"Nearest: {near[0]}." if near else None,
            )
        )
    return _molecule(species.key)


def names() -> tuple[str, ...]:
    """Formulas of the gases with molecular constants: atoms, diatomic, polyatomic molecules."""
    return tuple(_content()["molecules"])


def digest() -> str:
    """sha-256 of the data file, in hexadecimal."""
    return hashlib.sha256(_raw().replace(b"\r\n", b"\n")).hexdigest()


@lru_cache(maxsize=1)
def _raw() -> bytes:
    return (Path(__file__).parent.parent / "data" / DATA_FILE).read_bytes()


@lru_cache(maxsize=1)
def _content() -> dict[str, Any]:
    content: dict[str, Any] = json.loads(_raw())
    return content


@lru_cache(maxsize=64)
def _molecule(key: str) -> Molecule:
    content = _content()
    entry = content["molecules"][key]
    species = resolve(key)
    assert isinstance(species, GasSpecies)
    structure: Atom | Diatomic | Polyatomic
    if entry["structure"] == "atom":
        structure = _atom(entry)
    elif entry["structure"] == "diatomic":
        structure = _diatomic(entry)
    else:
        structure = _polyatomic(entry)
    memory = " (numbers from memory)" if entry.get("from_memory", False) else ""
    sources = tuple(content["sources"][source] + memory for source in entry["sources"])
    return Molecule(species, structure, sources, entry.get("note", ""))


def _atom(entry: Mapping[str, Any]) -> Atom:
    return Atom(tuple((level["energy"], level["degeneracy"]) for level in entry["levels"]))


def _diatomic(entry: Mapping[str, Any]) -> Diatomic:
    share = 1.0 / entry.get("symmetry_number", 1)
    alternating = entry.get("nuclear_weights", {"even": share, "odd": share})
    return Diatomic(
        states=tuple(
            DiatomicState(
                state["term"],
                tuple(state["vibration"]),
                state["rotation"],
                state["rotation_vibration"],
                state["centrifugal"],
                state["degeneracy"],
                state.get("spin_orbit"),
            )
            for state in entry["states"]
        ),
        dissociation=entry["dissociation"],
        mass_ratio=entry.get("reduced_mass", 1.0) / entry.get("mean_reduced_mass", 1.0),
        even=alternating["even"],
        odd=alternating["odd"],
    )


def _polyatomic(entry: Mapping[str, Any]) -> Polyatomic:
    def rows(name: str) -> tuple[tuple[float, ...], ...] | None:
        return tuple(tuple(row) for row in entry[name]) if name in entry else None

    return Polyatomic(
        rotation=tuple(entry["rotation"]),
        symmetry_number=entry["symmetry_number"],
        wavenumbers=tuple(mode["wavenumber"] for mode in entry["vibrations"]),
        degeneracies=tuple(mode["degeneracy"] for mode in entry["vibrations"]),
        electronic_degeneracy=entry["degeneracy"],
        dissociation=entry.get("dissociation"),
        anharmonicity=rows("anharmonicity"),
        rotation_vibration=rows("rotation_vibration"),
        distortion=tuple(entry["distortion"]) if "distortion" in entry else None,
    )

"""Entropy, enthalpy and heat capacity of a gas from the constants of its molecules."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import Fault, InputError, RangeError
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT
from reportgen.fluids.naming import title_of
from reportgen.fluids.numeric import numbers
from reportgen.fluids.pairs import in_words
from reportgen.fluids.statistical import diatomic, polyatomic
from reportgen.fluids.statistical.molecules import DATA_FILE, Atom, Diatomic, Polyatomic, digest, find
from reportgen.fluids.statistical.sums import SECOND_RADIATION, Sums, over_levels, translation

__all__ = ["StatisticalGas", "gas"]

Array = NDArray[np.float64]

#: Up to here [K] every gas was compared with the polynomials of the ideal gases; polyatomic ones go no further.
_COMPARED = 1500.0
#: Highest temperature [K] of atoms and diatomic molecules, and by how much of kT dissociation must lie above it:
#: levels beyond dissociation are not counted.
_HIGHEST = 3000.0
_DISSOCIATION_OVER_T = 15.0

_METHODS: dict[type, str] = {
    Atom: "electronic levels counted one by one",
    Diatomic: "vibration-rotation levels of each electronic state counted one by one up to dissociation",
    Polyatomic: "rigid rotation, classical with quantum corrections, and vibration, harmonic with the observed "
    "fundamentals",
}


class StatisticalGas:
    """An ideal gas of one kind of molecule, by counting states. Molar, SI; made by :func:`gas`.

    Nuclear spin and the mixing of isotopes do not count, as in the tables of thermodynamic properties. Arrays keep
    their shape; NaN given is NaN returned.

    Parameters
    ----------
    name : name, formula or alias of the gas.
    """

    def __init__(self, name: str) -> None:
        molecule = find(name)
        self._structure = molecule.structure
        self.formula = molecule.species.key
        self.title = title_of(molecule.species.name)
        self.molar_mass = molecule.species.molar_mass
        self.sources = molecule.sources
        self.note = molecule.note
        self.minimum_temperature, self.maximum_temperature = _range(molecule.structure)
        self.method = _METHODS[type(molecule.structure)]
        if isinstance(molecule.structure, Polyatomic) and molecule.structure.anharmonicity:
            self.method = (
                "rotation, classical with quantum corrections and centrifugal stretching; anharmonic vibrational "
                "levels counted one by one, each with its own rotational constants"
            )

    def __repr__(self) -> str:
        return f"StatisticalGas({self.formula!r})"

    @property
    def data_files(self) -> tuple[Mapping[str, str], ...]:
        """The data file with its digest."""
        return ({"file": DATA_FILE, "sha256": digest()},)

    def heat_capacity(self, temperature: ArrayLike) -> Any:
        """C_p = (5/2 + c) R [J/(mol*K)] at T [K].

        Raises
        ------
        RangeError : temperature outside the range.
        """
        flat, shape = self._read(temperature)
        return _shaped(MOLAR_GAS_CONSTANT * (2.5 + self._sums(flat).heat), shape)

    def enthalpy(self, temperature: ArrayLike) -> Any:
        """H(T) − H(0) = (5/2 + u) R T [J/mol] at T [K]; H(0) is all molecules in their lowest level.

        Raises
        ------
        RangeError : temperature outside the range.
        """
        flat, shape = self._read(temperature)
        return _shaped(MOLAR_GAS_CONSTANT * flat * (2.5 + self._sums(flat).energy), shape)

    def entropy(self, temperature: ArrayLike, pressure: ArrayLike) -> Any:
        """S [J/(mol*K)] at T [K] and p [Pa]: translation by Sackur and Tetrode, and ln Q + u of the rest.

        Raises
        ------
        RangeError : temperature outside the range, a pressure that is not above zero.
        """
        return sum(self.contributions(temperature, pressure).values())

    def contributions(self, temperature: ArrayLike, pressure: ArrayLike) -> dict[str, Any]:
        """Entropies [J/(mol*K)] of each motion at T [K] and p [Pa], that add up to the whole.

        "translation" and, for atoms, "electronic"; for diatomic molecules, whose motions are coupled, "rotation,
        vibration, electronic"; for polyatomic ones "rotation", "vibration" and "electronic".

        Raises
        ------
        RangeError : temperature outside the range, a pressure that is not above zero.
        """
        flat, shape = self._read(temperature, pressure)
        pressures = np.broadcast_to(np.asarray(pressure, dtype=np.float64), shape).reshape(-1)
        if not np.all((pressures > 0.0) & np.isfinite(pressures) | np.isnan(pressures)):
            wrong = pressures[~((pressures > 0.0) & np.isfinite(pressures) | np.isnan(pressures))][0]
            raise RangeError(
                Fault(f"The pressure of {self.title} is a finite number above 0.", found=in_words("pressure", wrong))
            )
        parts = {"translation": translation(self.molar_mass, flat, pressures)}
        parts |= {name: part.entropy for name, part in self._parts(flat).items()}
        return {name: _shaped(MOLAR_GAS_CONSTANT * part, shape) for name, part in parts.items()}

    # --- counting -----------------------------------------------------------------------------------------------------

    @cached_property
    def _levels(self) -> tuple[Array, Array]:
        structure = self._structure
        if isinstance(structure, Diatomic):
            return diatomic.levels(structure)
        assert isinstance(structure, Atom)
        energies, degeneracies = np.array(structure.levels, dtype=np.float64).T
        return energies, degeneracies

    def _parts(self, temperature: Array) -> dict[str, Sums]:
        """Sums of each motion but translation."""
        structure = self._structure
        if isinstance(structure, Polyatomic):
            zero = 0.0 * temperature  # NaN stays NaN
            return {
                "rotation": polyatomic.rotation(structure, temperature),
                "vibration": polyatomic.vibration(structure, temperature),
                "electronic": Sums(zero + np.log(structure.electronic_degeneracy), zero, zero),
            }
        name = "electronic" if isinstance(structure, Atom) else "rotation, vibration, electronic"
        return {name: over_levels(*self._levels, temperature)}

    def _sums(self, temperature: Array) -> Sums:
        first, *rest = self._parts(temperature).values()
        for part in rest:
            first = first.joined(part)
        return first

    def _read(self, temperature: ArrayLike, pressure: ArrayLike = 1.0) -> tuple[Array, tuple[int, ...]]:
        """Temperatures as a flat array and the common shape. Raises RangeError outside the range."""
        given, pressures = numbers("temperature", "K", temperature), numbers("pressure", "Pa", pressure)
        try:
            shape = np.broadcast_shapes(given.shape, pressures.shape)
        except ValueError:
            raise InputError(
                Fault(
                    "Temperature and pressure have shapes that do not fit together.",
                    found=f"{given.shape}, {pressures.shape}",
                )
            ) from None
        flat = np.broadcast_to(given, shape).reshape(-1)
        low, high = self.minimum_temperature, self.maximum_temperature
        outside = (flat < low) | (flat > high)
        if outside.any():
            raise RangeError(
                Fault(
                    f"The states of {self.title} are counted from {low:g} K to {high:g} K only.",
                    found=in_words("temperature", float(flat[outside][0])),
                    expected=f"{low:g} K to {high:g} K",
                )
            )
        return flat, shape


def gas(name: str) -> StatisticalGas:
    """A gas whose states are counted; names as for :func:`reportgen.fluids.ideal_gas`.

    Raises
    ------
    InputError : no molecular constants are carried for it.
    """
    return StatisticalGas(name)


def _range(structure: Atom | Diatomic | Polyatomic) -> tuple[float, float]:
    """Lowest and highest temperature [K]: counted levels allow low ones, a classical rotation does not."""
    if isinstance(structure, Polyatomic):
        return 150.0, _COMPARED
    if isinstance(structure, Atom):
        return 5.0, _HIGHEST
    bound = SECOND_RADIATION * structure.dissociation / _DISSOCIATION_OVER_T
    return 20.0, min(_HIGHEST, max(_COMPARED, round(bound, -2)))


def _shaped(values: Array, shape: tuple[int, ...]) -> Any:
    return values.reshape(shape)[()]

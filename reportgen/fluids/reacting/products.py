"""The gas that several streams make when they burn together: its composition follows from their shares.

Each parent stream is known by its elements. With w_i the mass share of parent i, element k of the gas is
b_k = Σ w_i b_ik [mol/kg]. Two ways from elements to species:

- ``complete``: carbon burns to CO2, hydrogen to H2O (with chlorine to HCl first), sulfur to SO2; nitrogen stays N2, the
  oxygen left over O2. It needs oxygen enough: else there is no such gas.
- ``equilibrium``: the composition of least Gibbs energy at each temperature and pressure (equilibrium.py).

Enthalpies are those of formation, entropies by the third law, so that parents and gas share their zeros.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Any, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import Fault, InputError
from reportgen.fluids.gases.species import DATA_FILE, library
from reportgen.fluids.model import Errors, Limits
from reportgen.fluids.pairs import Elements, Pair, check_errors, in_words, read_pair
from reportgen.fluids.reacting.equilibrium import Equilibrium, Mixture
from reportgen.fluids.state import State

__all__ = ["CombustionGas"]

Array = NDArray[np.float64]
Chemistry = Literal["complete", "equilibrium"]

_MOLAR_GAS_CONSTANT = 8.31446261815324  # J/(mol*K), exact by the definition of the SI of 2019

#: Species considered at equilibrium, where the elements are there.
CANDIDATES = (
    *("CO2", "CO", "CH4", "C2H2", "C2H4", "CH2O", "H2", "H", "H2O", "H2O2", "OH", "O2", "O", "O3"),
    *("N2", "N", "NO", "NO2", "N2O", "NH3", "HCN", "SO2", "SO3", "H2S", "COS", "CS2", "HCl", "Cl2", "Ar", "He", "Ne"),
)
#: What an element becomes by complete combustion, and the atoms of it in one molecule.
_COMPLETE = {"C": "CO2", "H": "H2O", "S": "SO2", "N": "N2", "Cl": "HCl", "O": "O2", "Ar": "Ar", "He": "He", "Ne": "Ne"}

_PAIRS = (
    ("pressure", "temperature"),
    ("pressure", "specific_enthalpy"),
    ("pressure", "specific_entropy"),
    ("pressure", "density"),
)
#: Oxygen lacking by less than this part of what is needed is put down to rounding.
_OXYGEN_SLACK = 1e-12
_NEWTON_ITERATIONS = 60


class CombustionGas:
    """Products of the parents' streams; like ``fluids.model.Fluid``, with the parents' mass shares as further givens.

    Parameters
    ----------
    title : name for people.
    parents : for each parent its elements [mol of atoms per kg], by symbol.
    chemistry : "complete" or "equilibrium".

    Raises
    ------
    InputError : an element for which no product is carried.
    """

    kind = "ideal-gas"
    substance = None
    composition = None
    entropy_zero_name = "third-law"

    def __init__(self, title: str, parents: Mapping[str, Mapping[str, float]], chemistry: Chemistry) -> None:
        self.title = title
        self.chemistry = chemistry
        self.parents = tuple(parents)
        present = {symbol for atoms in parents.values() for symbol, amount in atoms.items() if amount > 0}
        unknown = sorted(present - set(_COMPLETE))
        if unknown:
            raise InputError(
                Fault(
                    f"{title}: no products of combustion are carried for these elements.",
                    found=", ".join(unknown),
                    expected=", ".join(_COMPLETE),
                )
            )
        if not present:
            raise InputError(Fault(f"{title}: nothing is known of the elements of its parents."))
        species = library().species
        keys = [_key(name) for name in CANDIDATES]
        keys = [key for key in keys if set(species[key].atoms) <= present]
        if chemistry == "complete":
            keys = [key for key in keys if key in {_key(_COMPLETE[e]) for e in present} | {_key("H2O"), _key("O2")}]
        self._equilibrium = Equilibrium(keys)
        self._table = self._equilibrium.table
        self._elements = np.array(
            [[atoms.get(symbol, 0.0) for symbol in self._table.elements] for atoms in parents.values()]
        )

    @property
    def species(self) -> tuple[str, ...]:
        """Keys of the species that the gas may hold."""
        return self._table.keys

    @property
    def limits(self) -> Limits:
        """Range of the polynomials."""
        return Limits(
            minimum_temperature=self._table.minimum_temperature,
            maximum_temperature=self._table.maximum_temperature,
            maximum_pressure=np.inf,
            remarks=(
                "Ideal gas; the pressure is not limited.",
                "Condensing water, soot and ash are not part of this model.",
                "Complete combustion: no dissociation, no nitrogen oxides."
                if self.chemistry == "complete"
                else "Equilibrium at every state, also while the gas cools: no frozen composition, no kinetics.",
            ),
        )

    @property
    def entropy_zero(self) -> str:
        """Where entropy and enthalpy are zero, in words."""
        return (
            "Entropy: third law (zero for the perfect crystal at 0 K), ideal gas at 1 bar, with the entropy of mixing. "
            "Enthalpy: zero for the elements in their reference states at 298.15 K."
        )

    @property
    def sources(self) -> tuple[str, ...]:
        """Publications of the polynomials and of the method."""
        carried = library()
        method = (
            "Gordon, McBride (1994). Computer Program for Calculation of Complex Chemical Equilibrium Compositions and "
            "Applications. I. Analysis. NASA RP-1311."
        )
        parts = tuple(f"{carried.species[key].name}: {carried.species[key].source}" for key in self._table.keys)
        return (carried.source, *parts, *((method,) if self.chemistry == "equilibrium" else ()))

    @property
    def data_files(self) -> tuple[Mapping[str, str], ...]:
        """The data file with its digest."""
        return ({"file": DATA_FILE, "sha256": library().sha256},)

    def mole_fractions(self, state_amounts: Array) -> dict[str, Array]:
        """Mole fractions [1] by species key from amounts [mol/kg] (N, S)."""
        total = state_amounts.sum(axis=1)
        return {key: state_amounts[:, j] / total for j, key in enumerate(self._table.keys)}

    def at(self, *, shares: Mapping[str, ArrayLike], errors: Errors = "raise", **pair: ArrayLike) -> State:
        """State fixed by two properties and the parents' mass shares.

        Parameters
        ----------
        shares : mass share [1] of every parent; arrays broadcast with the pair, sums are scaled to 1. One may be
            negative, where the others bring what it takes out.
        pair : pressure with temperature, specific_enthalpy, specific_entropy or density (specific_volume).
        errors : as in ``Fluid.at``.

        Raises
        ------
        InputError : shares that do not name every parent, and as in ``Fluid.at``.
        RangeError : too little oxygen for complete combustion, temperature outside the limits, values not above zero.
        """
        return self._solved(shares, errors, pair)[0]

    def amounts(self, *, shares: Mapping[str, ArrayLike], errors: Errors = "raise", **pair: ArrayLike) -> Array:
        """Amounts of the species n_j [mol/kg], (N, S) in the order of ``species``, of the flattened states."""
        return self._solved(shares, errors, pair)[1].amounts

    def _solved(
        self, shares: Mapping[str, ArrayLike], errors: Errors, pair: Mapping[str, ArrayLike]
    ) -> tuple[State, Mixture]:
        check_errors(errors)
        if set(shares) != set(self.parents):
            raise InputError(
                Fault("Every parent stream has a share.", found=", ".join(shares), expected=", ".join(self.parents))
            )
        given, weights = self._broadcast(shares, read_pair(pair, _PAIRS, self.title))
        outcome = Elements(given.first.size)
        total = weights.sum(axis=0)
        known = np.isfinite(given.first) & np.isfinite(given.second) & np.isfinite(total)
        # A stream may run backwards as long as no element is lacking: whoever solves for flows can then say so.
        atoms = weights.T @ self._elements
        outcome.reject(
            known & ~((atoms >= 0).all(axis=1) & (total > 0)),
            lambda i: Fault(
                f"{self.title}: the streams do not make a gas, since one of them takes out what no other brings.",
                found=str(weights[:, i]),
            ),
        )
        outcome.reject(
            known & ~(given.first > 0),
            lambda i: Fault(f"{self.title}: the pressure lies above zero.", found=in_words("pressure", given.first[i])),
        )
        good = known & ~outcome.rejected
        usual = self._elements.mean(axis=0)
        elements = np.where(good[:, None], atoms / np.where(good, total, 1.0)[:, None], usual)
        pressure = np.where(good, given.first, 1e5)
        value = np.where(good, given.second, np.nan)
        with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
            if self.chemistry == "complete":
                mixture = self._complete(elements, pressure, value, given.names[1], outcome, good)
            else:
                mixture = self._at_equilibrium(elements, pressure, value, given.names[1])
        outcome.reject(
            known & ~mixture.found,
            lambda i: Fault(
                f"{self.title} has no state with this {given.names[1].replace('_', ' ')} at "
                f"{in_words('pressure', given.first[i])}.",
                found=in_words(given.names[1], given.second[i]),
                expected=f"a temperature of {self.limits.minimum_temperature:g} K to "
                f"{self.limits.maximum_temperature:g} K",
            ),
        )
        outcome.finish(errors)
        values = self._values(mixture, given)
        return State(given.shape, values, None, outcome.faults), mixture

    def _broadcast(self, shares: Mapping[str, ArrayLike], given: Pair) -> tuple[Pair, Array]:
        """The pair and the shares (P, N) in one shape."""
        arrays = [np.asarray(shares[name], dtype=np.float64) for name in self.parents]
        first, second = given.first.reshape(given.shape), given.second.reshape(given.shape)
        try:
            first, second, *arrays = np.broadcast_arrays(first, second, *arrays)
        except ValueError:
            raise InputError(Fault("The shares and the properties have shapes that do not fit together.")) from None
        flat = [np.array(array, dtype=np.float64).reshape(-1) for array in (first, second, *arrays)]
        return replace(given, first=flat[0], second=flat[1], shape=first.shape), np.array(flat[2:])

    def _at_equilibrium(self, elements: Array, pressure: Array, value: Array, name: str) -> Mixture:
        if name != "density":
            return self._equilibrium.solve(elements, pressure, given=name, value=value)  # type: ignore[arg-type]
        # p = ρ n R T: found from the temperature that a gas of unchanging composition would have, then by secants.
        temperature = np.clip(pressure / (value * _MOLAR_GAS_CONSTANT * 35.0), 300.0, 5000.0)
        for _ in range(_NEWTON_ITERATIONS):
            mixture = self._equilibrium.solve(elements, pressure, given="temperature", value=temperature)
            volume = mixture.total * _MOLAR_GAS_CONSTANT * temperature / pressure
            expansion = self._equilibrium.responses(mixture).expansion
            ratio = np.log(1.0 / (value * volume)) / expansion
            step = np.clip(ratio, -0.5, 0.5)
            temperature = np.clip(
                temperature * np.exp(step), self._table.minimum_temperature, self._table.maximum_temperature
            )
            if not (np.abs(step) > 1e-13).any():
                break
        return replace(mixture, found=mixture.found & (np.abs(ratio) <= 1e-11))

    def _complete(
        self, elements: Array, pressure: Array, value: Array, name: str, outcome: Elements, good: NDArray[np.bool_]
    ) -> Mixture:
        """Species from the elements by complete combustion, then the temperature at that composition."""
        b = {symbol: elements[:, k] for k, symbol in enumerate(self._table.elements)}
        zero = np.zeros(pressure.size)
        hydrogen, chlorine = b.get("H", zero), b.get("Cl", zero)
        needed = 2 * b.get("C", zero) + (hydrogen - chlorine) / 2 + 2 * b.get("S", zero)
        oxygen = b.get("O", zero) - needed
        oxygen = np.where(np.abs(oxygen) <= _OXYGEN_SLACK * needed, 0.0, oxygen)
        outcome.reject(
            good & ((oxygen < 0) | (hydrogen < chlorine)),
            lambda i: Fault(
                f"{self.title}: the oxygen does not suffice for complete combustion: there is "
                f"{100 * b.get('O', zero)[i] / needed[i]:.4g} % of what carbon, hydrogen and sulfur bind."
                if oxygen[i] < 0
                else f"{self.title}: there is more chlorine than hydrogen to bind it.",
                expected='more air or less fuel, or chemistry = "equilibrium"',
            ),
        )
        made = {
            "CO2": b.get("C", zero),
            "H2O": (hydrogen - chlorine) / 2,
            "SO2": b.get("S", zero),
            "HCl": chlorine,
            "N2": b.get("N", zero) / 2,
            "O2": np.maximum(oxygen, 0.0) / 2,
            **{symbol: b.get(symbol, zero) for symbol in ("Ar", "He", "Ne")},
        }
        by_key = {_key(product): amount for product, amount in made.items()}
        amounts = np.array([by_key[key] for key in self._table.keys]).T
        temperature, found = self._temperature(amounts, pressure, value, name)
        found &= ~outcome.rejected
        empty = np.where(found, 1.0, np.nan)
        temperature = temperature * empty
        return Mixture(temperature, pressure * empty, amounts * empty[:, None], found, self._table.at(temperature))

    def _temperature(self, amounts: Array, pressure: Array, value: Array, name: str) -> tuple[Array, NDArray[np.bool_]]:
        """T [K] at which a gas of given composition has the property, by Newton's method in a bracket."""
        table, total = self._table, amounts.sum(axis=1)
        low = np.full(value.size, table.minimum_temperature)
        high = np.full(value.size, table.maximum_temperature)
        if name == "temperature":
            inside = (value >= low * (1 - 1e-12)) & (value <= high * (1 + 1e-12))
            return np.clip(value, low, high), inside
        if name == "density":
            temperature = pressure / (value * total * _MOLAR_GAS_CONSTANT)
            return temperature, (temperature >= low) & (temperature <= high)
        nowhere = np.full(value.size, True)

        def gap_and_slope(t: Array) -> tuple[Array, Array]:
            mixture = Mixture(t, pressure, amounts, nowhere, table.at(t))
            capacity = _MOLAR_GAS_CONSTANT * np.sum(amounts * mixture.standard.heat_capacity, axis=1)
            if name == "specific_enthalpy":
                return value - mixture.enthalpy, capacity
            return value - mixture.entropy(table.standard_pressure), capacity / t

        scale = _MOLAR_GAS_CONSTANT * total * (1000.0 if name == "specific_enthalpy" else 1.0)
        inside = (gap_and_slope(low)[0] >= -1e-11 * scale) & (gap_and_slope(high)[0] <= 1e-11 * scale)
        temperature = np.full(value.size, 1000.0)
        for _ in range(_NEWTON_ITERATIONS):
            gap, slope = gap_and_slope(temperature)
            low, high = np.where(gap > 0, temperature, low), np.where(gap > 0, high, temperature)
            step = gap / slope
            trial = temperature + step
            temperature = np.where((trial >= low) & (trial <= high), trial, 0.5 * (low + high))
            if not (inside & (np.abs(step) > 1e-13 * temperature)).any():
                break
        return temperature, inside & (np.abs(step) <= 1e-10 * temperature)

    def _values(self, mixture: Mixture, given: Pair) -> dict[str, NDArray[Any]]:
        """All fields of a State."""
        temperature, total = mixture.temperature, mixture.total
        volume = total * _MOLAR_GAS_CONSTANT * temperature / mixture.pressure
        enthalpy = mixture.enthalpy
        if self.chemistry == "equilibrium":
            answers = self._equilibrium.responses(mixture)
            isobaric, isochoric = answers.isobaric_heat_capacity, answers.isochoric_heat_capacity
            speed = answers.speed_of_sound
        else:
            isobaric = _MOLAR_GAS_CONSTANT * np.sum(mixture.amounts * mixture.standard.heat_capacity, axis=1)
            isochoric = isobaric - _MOLAR_GAS_CONSTANT * total
            speed = np.sqrt(isobaric / isochoric * total * _MOLAR_GAS_CONSTANT * temperature)
        nothing = np.full(temperature.shape, np.nan)
        values: dict[str, NDArray[Any]] = {
            "temperature": temperature,
            "pressure": mixture.pressure,
            "density": 1 / volume,
            "specific_volume": volume,
            "specific_enthalpy": enthalpy,
            "specific_entropy": mixture.entropy(self._table.standard_pressure),
            "specific_internal_energy": enthalpy - mixture.pressure * volume,
            "quality": nothing,
            "isobaric_heat_capacity": isobaric,
            "isochoric_heat_capacity": isochoric,
            "speed_of_sound": speed,
            "compressibility_factor": np.where(mixture.found, 1.0, np.nan),
            "superheat": nothing,
            "subcooling": nothing,
            "phase": np.where(mixture.found, "gas", ""),
        }
        for name, array in zip(given.names, (given.first, given.second), strict=True):
            values[name] = np.where(mixture.found, array, np.nan)  # what was given comes back unchanged
        return values


def _key(name: str) -> str:
    """Key of a species in the library."""
    from reportgen.fluids.gases.species import resolve

    return resolve(name).key

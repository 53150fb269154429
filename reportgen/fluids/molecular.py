"""An ideal gas by the statistical route, for comparison: molecular constants in place of fitted polynomials.

    c_p = Σ x_i c_p,i(T),   h = Σ x_i [H_i(T) − H_i(0)],   s = Σ x_i [S_i(T, p) − R ln x_i]

with the species from :mod:`reportgen.fluids.statistical`, mole fractions x_i and the entropy of mixing, on a mass
basis.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import Fault, InputError
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT, ideal_gas
from reportgen.fluids.model import Errors
from reportgen.fluids.pairs import Elements, check_errors, in_words, read_pair
from reportgen.fluids.state import State

if TYPE_CHECKING:
    from reportgen.fluids.crosscheck import Deviation
    from reportgen.fluids.model import Fluid

__all__ = ["MolecularGas"]

Array = NDArray[np.float64]

STANDARD_PRESSURE = 1e5  # Pa
_PAIRS = (("pressure", "temperature"),)


class MolecularGas:
    """Statistical counterpart of an ideal gas or a mixture of them; for what a comparison needs of ``Fluid``.

    Parameters
    ----------
    gas : the ideal gas (``fluids.IdealGas``).

    Raises
    ------
    InputError : species without molecular constants, each named.
    """

    kind = "statistical"
    entropy_zero = "third law, ideal gas; enthalpy zero at 0 K"
    entropy_zero_name = "statistical"
    #: Entropies count from the same zero as those of the ideal gas and can be compared as they stand.
    shares_zero_of_entropy = True

    def __init__(self, gas: Fluid) -> None:
        from reportgen.fluids import statistical

        shares = dict(gas.composition) if gas.composition is not None else {str(gas.substance): 1.0}
        found, missing = {}, []
        for name in shares:
            try:
                found[name] = statistical.gas(name)
            except InputError:
                missing.append(name)
        if missing:
            raise InputError(
                Fault(
                    f"Molecular constants of {', '.join(missing)} are not carried.",
                    found=gas.title,
                    expected="gases among " + ", ".join(statistical.names()),
                )
            )
        self.title = gas.title
        self.molar_mass = gas.molar_mass
        self.gas_constant = gas.gas_constant
        self.composition = gas.composition
        self.substance = gas.substance
        self.sources = tuple(dict.fromkeys(line for part in found.values() for line in part.sources))
        files = {entry["file"]: entry for part in found.values() for entry in part.data_files}
        self.data_files: tuple[Mapping[str, str], ...] = tuple(files.values())
        self.minimum_temperature = max(part.minimum_temperature for part in found.values())
        self.maximum_temperature = min(part.maximum_temperature for part in found.values())
        self._species = found
        self._shares = shares

    def at(self, *, errors: Errors = "raise", **pair: ArrayLike) -> State:
        """States by pressure [Pa] and temperature [K]: enthalpy (zero at 0 K), entropy, c_p [SI, mass basis]."""
        check_errors(errors)
        given = read_pair(pair, _PAIRS, self.title)
        pressure, temperature = given.first, given.second
        elements = Elements(given.first.size)
        unknown = np.isnan(pressure) | np.isnan(temperature)
        elements.reject(
            ~((pressure > 0.0) & np.isfinite(pressure)) & ~unknown,
            lambda index: Fault("The pressure of a gas is above zero.", found=in_words("pressure", pressure[index])),
        )
        low, high = self.minimum_temperature, self.maximum_temperature
        elements.reject(
            ~((temperature >= low) & (temperature <= high)) & ~unknown,
            lambda index: Fault(
                f"Molecular constants of {self.title} are counted from {low:g} K to {high:g} K only.",
                found=in_words("temperature", temperature[index]),
            ),
        )
        elements.finish(errors)
        usable = ~unknown & ~elements.rejected
        values: dict[str, NDArray[Any]] = {
            "temperature": np.where(usable, temperature, np.nan),
            "pressure": np.where(usable, pressure, np.nan),
        }
        t, p = values["temperature"], values["pressure"]
        heat, enthalpy, entropy = (np.zeros(t.size) for _ in range(3))
        for name, share in self._shares.items():
            species = self._species[name]
            heat += share * species.heat_capacity(t)
            enthalpy += share * species.enthalpy(t)
            entropy += share * (species.entropy(t, p) - MOLAR_GAS_CONSTANT * np.log(share))
        for field, molar in (
            ("isobaric_heat_capacity", heat),
            ("specific_enthalpy", enthalpy),
            ("specific_entropy", entropy),
        ):
            values[field] = molar / self.molar_mass
        values["phase"] = np.where(usable, "gas", "")
        # Density and speed of sound are no more independent here than p v = R T is.
        return State(given.shape, values, lambda name: {name: np.full(t.size, np.nan)}, elements.faults)

    def species_deviations(self, temperature: Array) -> list[Deviation]:
        """Entropy at 1 bar and c_p of each species, fitted polynomials against molecular constants.

        Parameters
        ----------
        temperature : T [K], shape (N,).
        """
        from reportgen.fluids.crosscheck import deviation

        if len(self._shares) < 2:
            return []
        found = []
        for name, species in self._species.items():
            polynomial = ideal_gas(name)
            inside = (temperature >= species.minimum_temperature) & (temperature <= species.maximum_temperature)
            t = np.where(inside, temperature, np.nan)
            state = polynomial.at(errors="mask", temperature=t, pressure=np.full(t.size, STANDARD_PRESSURE))
            for field, molar in (
                ("specific_entropy", species.entropy(t, STANDARD_PRESSURE)),
                ("isobaric_heat_capacity", species.heat_capacity(t)),
            ):
                fitted = np.array(state.flat(field), dtype=float)
                found.append(deviation(field, fitted, np.asarray(molar) / polynomial.molar_mass, name))
        return found

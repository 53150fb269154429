"""A cubic equation of state from a substance or a composition."""

from __future__ import annotations

from collections.abc import Mapping
from difflib import get_close_matches
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import Fault, InputError, ReportgenError
from reportgen.fluids.cubics.constants import CriticalConstants, constants_for, key_of
from reportgen.fluids.cubics.description import describe
from reportgen.fluids.cubics.equation import FORMS, CubicForm
from reportgen.fluids.cubics.fluid import CubicFluid
from reportgen.fluids.cubics.ideal import IdealPart
from reportgen.fluids.cubics.mixing import Mixture
from reportgen.fluids.cubics.thermodynamics import MolarModel
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT, ideal_gas
from reportgen.fluids.gases.species import Basis, library, mole_fractions
from reportgen.fluids.numeric import finite_number

__all__ = ["Equation", "cubic"]

Equation = Literal["Peng-Robinson", "Soave-Redlich-Kwong"]

#: Range in which an interaction coefficient can be meant.
_INTERACTION = (-2.0, 1.0)


def cubic(
    substance_or_composition: str | Mapping[str, float],
    *,
    equation: Equation = "Peng-Robinson",
    basis: Basis = "mole",
    critical: Mapping[str, Mapping[str, float]] | None = None,
    interaction: Mapping[tuple[str, str], float] | None = None,
    volume_translation: Mapping[str, float] | Literal["Peneloux"] | None = None,
) -> CubicFluid:
    """A substance or mixture with a cubic equation of state; the ideal part is that of :func:`ideal_gas`.

    Parameters
    ----------
    substance_or_composition : a name, formula or alias of a species carried as an ideal gas ("CO2", "propane", "air"),
        or fractions [1] by such names that add up to 1 within 1e-6.
    equation : "Peng-Robinson" or "Soave-Redlich-Kwong".
    basis : whether the fractions are of the amount of substance ("mole") or of the mass ("mass").
    critical : by species, its critical ``temperature`` [K], ``pressure`` [Pa] and ``acentric_factor`` [1], in place of
        those carried.
    interaction : k_ij [1] by pairs of species; 0 for pairs that are not given.
    volume_translation : by species, c [m3/mol] (0 for species that are not given); "Peneloux" for Péneloux's
        correlation with Rackett's Z_RA (where none is published, Z_RA = 0.29056 − 0.08775 ω); None for no translation.

    Raises
    ------
    InputError : with every fault found: unknown species (with the nearest name), fractions that do not add up, species
        without critical constants, an unknown equation, pairs that are not of the composition.
    """
    fractions = mole_fractions(substance_or_composition, basis)
    gas = ideal_gas(substance_or_composition, basis)
    faults: list[Fault] = []
    form = _form(equation, faults)
    constants: dict[str, CriticalConstants] = {}
    try:
        constants = constants_for(fractions, critical)
    except ReportgenError as error:
        faults += error.faults
    pairs = _pairs(fractions, interaction, faults)
    if faults or form is None:
        raise InputError(faults)
    translation = _translation(form, fractions, constants, volume_translation)
    keys = list(fractions)
    coupling = np.zeros((len(keys), len(keys)))
    for (first, second), value in pairs.items():
        i, j = keys.index(first), keys.index(second)
        coupling[i, j] = coupling[j, i] = value
    mixture = Mixture(
        form,
        np.array([constants[key].temperature for key in keys]),
        np.array([constants[key].pressure for key in keys]),
        np.array([constants[key].acentric_factor for key in keys]),
        coupling,
        translation,
    )
    ideal = IdealPart(keys)
    masses = np.array([library().species[key].molar_mass for key in keys])
    description = describe(gas, fractions, constants, mixture, pairs, volume_translation, ideal)
    return CubicFluid(description, fractions, MolarModel(mixture, ideal, masses))


def _form(equation: str, faults: list[Fault]) -> CubicForm | None:
    form = FORMS.get(equation) if isinstance(equation, str) else None
    if form is None:
        near = get_close_matches(str(equation), FORMS, n=1, cutoff=0.3)
        faults.append(
            Fault(
                "This cubic equation of state is not carried.",
                found=repr(equation)[:60],
                expected=", ".join(f'"{name}"' for name in FORMS),
                hint=f"Nearest: {near[0]}." if near else None,
            )
        )
    return form


def _pairs(
    fractions: Mapping[str, float], interaction: Mapping[tuple[str, str], float] | None, faults: list[Fault]
) -> dict[tuple[str, str], float]:
    """Interaction coefficients [1] by pairs of species keys."""
    found: dict[tuple[str, str], float] = {}
    if interaction is not None and not isinstance(interaction, Mapping):
        faults.append(
            Fault(
                "Interaction coefficients are given by pairs of species.",
                found=repr(interaction)[:60],
                expected='such as {("CO2", "N2"): -0.017}',
            )
        )
        return found
    for pair, value in (interaction or {}).items():
        if not (isinstance(pair, tuple) and len(pair) == 2):
            faults.append(
                Fault(
                    "Interaction coefficients belong to pairs of species.",
                    found=repr(pair)[:60],
                    expected='("CO2", "N2")',
                )
            )
            continue
        try:
            first, second = (key_of(name, fractions, "interaction coefficient") for name in pair)
        except ReportgenError as error:
            faults += error.faults
            continue
        number = finite_number(value)
        if first == second:
            faults.append(Fault("A species has no interaction coefficient with itself.", found=f"{pair[0]}, {pair[1]}"))
        elif (first, second) in found or (second, first) in found:
            faults.append(Fault("An interaction coefficient is given twice.", found=f"{pair[0]}, {pair[1]}"))
        elif number is None or not _INTERACTION[0] <= number <= _INTERACTION[1]:
            faults.append(
                Fault(
                    f"The interaction coefficient of {pair[0]} and {pair[1]} cannot be meant.",
                    found=repr(value)[:60],
                    expected=f"{_INTERACTION[0]:g} to {_INTERACTION[1]:g}",
                )
            )
        else:
            found[first, second] = number
    return found


def _translation(
    form: CubicForm,
    fractions: Mapping[str, float],
    constants: Mapping[str, CriticalConstants],
    given: Mapping[str, float] | str | None,
) -> NDArray[np.float64]:
    """Translations c_i [m3/mol] in the order of the species."""
    shifts = dict.fromkeys(fractions, 0.0)
    if given is None:
        return np.array(list(shifts.values()))
    if isinstance(given, str):
        if given != "Peneloux":
            raise InputError(
                Fault(
                    "This volume translation is not known.",
                    found=repr(given)[:60],
                    expected='"Peneloux", or c in m3/mol by species',
                )
            )
        factor, offset = form.translation
        for key, part in constants.items():
            rackett = part.rackett_compressibility
            if rackett is None:
                rackett = 0.29056 - 0.08775 * part.acentric_factor
            shifts[key] = factor * (MOLAR_GAS_CONSTANT * part.temperature / part.pressure) * (offset - rackett)
        return np.array(list(shifts.values()))
    if not isinstance(given, Mapping):
        raise InputError(
            Fault(
                "Volume translations are given by species.",
                found=repr(given)[:60],
                expected='"Peneloux", or c in m3/mol by species, such as {"CO2": 2e-6}',
            )
        )
    faults: list[Fault] = []
    for name, value in given.items():
        try:
            key = key_of(name, fractions, "volume translation")
        except ReportgenError as error:
            faults += error.faults
            continue
        covolume = form.covolume * MOLAR_GAS_CONSTANT * constants[key].temperature / constants[key].pressure
        number = finite_number(value)
        if number is None or abs(number) >= 0.9 * covolume:
            faults.append(
                Fault(
                    f"The volume translation of {name} cannot be meant.",
                    found=repr(value)[:60],
                    expected=f"less than {0.9 * covolume:.4g} m3/mol, 0.9 of the covolume of the equation, either way",
                )
            )
        else:
            shifts[key] = number
    if faults:
        raise InputError(faults)
    return np.array(list(shifts.values()))

"""Reference states: where enthalpy and entropy are zero, and how a fluid is shifted to another zero."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from reportgen.errors import Fault, InputError
from reportgen.fluids.real.helmholtz import Helmholtz
from reportgen.fluids.real.saturation import SaturationCurves

__all__ = ["REFERENCE_STATES", "THIRD_LAW", "Zero", "conventions", "zero_of"]

#: Name of the zero that all species share: elements in their reference states for h, perfect crystals at 0 K for s.
THIRD_LAW = "third-law"

#: Conventions by name: temperature [K] of the saturated liquid (None: at 101 325 Pa), its h [J/kg] and s [J/(kg*K)],
#: in words.
REFERENCE_STATES: dict[str, tuple[float | None, float, float, str]] = {
    "IIR": (273.15, 2e5, 1e3, "s = 1 kJ/(kg K) and h = 200 kJ/kg for the saturated liquid at 0 degC (IIR)."),
    "ASHRAE": (233.15, 0.0, 0.0, "s = 0 and h = 0 for the saturated liquid at -40 degC (ASHRAE)."),
    "NBP": (None, 0.0, 0.0, "s = 0 and h = 0 for the saturated liquid at 101 325 Pa (normal boiling point)."),
}

_ATMOSPHERE = 101325.0


@dataclass(frozen=True)
class Zero:
    """Where enthalpy and entropy count from: in words, as a key to compare by, and whose data it takes."""

    words: str
    name: str
    sources: tuple[str, ...] = ()
    data_files: tuple[Mapping[str, str], ...] = ()


def zero_of(name: str, data: Mapping[str, Any], equation: Helmholtz, curves: SaturationCurves) -> Zero:
    """Shift ``equation`` to the zero called ``name`` and return that zero.

    Raises
    ------
    InputError : no such convention, the fluid has no saturated liquid where the convention sets its zero, or no
        third-law data are carried for it.
    """
    if name == "published":
        return Zero(data["entropy_zero"], f"published:{data['name']}")
    if name == THIRD_LAW:
        return _third_law(data, equation)
    known = REFERENCE_STATES.get(name) if isinstance(name, str) else None
    if known is None:
        raise InputError(
            Fault(
                "This reference state is not known.",
                found=repr(name)[:60],
                expected=", ".join(["published", *REFERENCE_STATES, THIRD_LAW]),
            )
        )
    temperature, enthalpy, entropy, words = known
    if not _exists(temperature, data):
        from reportgen.fluids.real.third_law import has_standard_values  # other zeros start without it

        third_law = [THIRD_LAW] if has_standard_values(data) else []
        where = "101 325 Pa" if temperature is None else f"{temperature:g} K"
        raise InputError(
            Fault(
                f"{data['title']} has no saturated liquid at {where}, where the reference state {name} sets its zero.",
                found=repr(name),
                expected=", ".join([*conventions(data), *third_law]),
            )
        )
    if temperature is None:
        saturated = curves.at_pressure(np.array([_ATMOSPHERE]))
    else:
        saturated = curves.at_temperature(np.array([temperature]))
    found = equation.properties(saturated.bubble_temperature, saturated.liquid_density)
    equation.shift(enthalpy - float(found.enthalpy[0]), entropy - float(found.entropy[0]))
    return Zero(words, name)


def _exists(temperature: float | None, data: Mapping[str, Any]) -> bool:
    """Whether a fluid has a saturated liquid at a temperature [K], at 101 325 Pa for None."""
    name, value = ("pressure", _ATMOSPHERE) if temperature is None else ("temperature", temperature)
    return bool(data["lower_end"][name] <= value < data["critical_point"][name])


def conventions(data: Mapping[str, Any]) -> list[str]:
    """Names of the reference states that a fluid can have, from its data file; but for the third law."""
    possible = [name for name, (temperature, *_) in REFERENCE_STATES.items() if _exists(temperature, data)]
    return ["published", *possible]


def _third_law(data: Mapping[str, Any], equation: Helmholtz) -> Zero:
    """Bring the ideal-gas part at 298.15 K and 1 bar to the standard entropy and the enthalpy of formation."""
    from reportgen.fluids.real.third_law import PRESSURE, TEMPERATURE, standard_values  # other zeros start without it

    standard = standard_values(data)
    mass = data["molar_mass"]
    density = PRESSURE / (equation.gas_constant * TEMPERATURE)
    ideal = equation.ideal(
        np.array([density / equation.reducing_density]), np.array([equation.reducing_temperature / TEMPERATURE])
    )
    enthalpy = equation.gas_constant * TEMPERATURE * (1.0 + float(ideal.tau[0]))
    entropy = equation.gas_constant * float(ideal.tau[0] - ideal.value[0])
    equation.shift(standard.enthalpy / mass - enthalpy, standard.entropy / mass - entropy)
    formation = f"{standard.enthalpy / 1e3:.3f}".replace("-", "−")
    words = (
        f"Third law (zero for the perfect crystal at 0 K): the ideal gas at {TEMPERATURE:g} K and 1 bar has "
        f"s = {standard.entropy:.3f} J/(mol K), and h = {formation} kJ/mol, its enthalpy of "
        "formation from the elements in their reference states."
    )
    return Zero(words, THIRD_LAW, standard.sources, standard.data_files)

"""Reference states: where enthalpy and entropy are zero, and how a fluid is shifted to another zero."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from reportgen.errors import Fault, InputError
from reportgen.fluids.real.helmholtz import Helmholtz
from reportgen.fluids.real.saturation import SaturationCurves

__all__ = ["REFERENCE_STATES", "zero_of"]

#: Conventions by name: temperature [K] of the saturated liquid (None: at 101 325 Pa), its h [J/kg] and s [J/(kg*K)],
#: in words.
REFERENCE_STATES: dict[str, tuple[float | None, float, float, str]] = {
    "IIR": (273.15, 2e5, 1e3, "s = 1 kJ/(kg K) and h = 200 kJ/kg for the saturated liquid at 0 degC (IIR)."),
    "ASHRAE": (233.15, 0.0, 0.0, "s = 0 and h = 0 for the saturated liquid at -40 degC (ASHRAE)."),
    "NBP": (None, 0.0, 0.0, "s = 0 and h = 0 for the saturated liquid at 101 325 Pa (normal boiling point)."),
}

_ATMOSPHERE = 101325.0


def zero_of(name: str, data: Mapping[str, Any], equation: Helmholtz, curves: SaturationCurves) -> str:
    """Shift ``equation`` to the zero called ``name`` and return that zero in words.

    Raises
    ------
    InputError : no such convention, or the fluid has no saturated liquid where the convention sets its zero.
    """
    if name == "published":
        text: str = data["entropy_zero"]
        return text
    known = REFERENCE_STATES.get(name)
    if known is None:
        raise InputError(
            Fault(
                "This reference state is not known.",
                found=repr(name),
                expected=", ".join(["published", *REFERENCE_STATES]),
            )
        )
    temperature, enthalpy, entropy, words = known
    lowest, critical = data["lower_end"], data["critical_point"]
    if temperature is None:
        exists = lowest["pressure"] <= _ATMOSPHERE < critical["pressure"]
        where = f"{_ATMOSPHERE:g} Pa"
    else:
        exists = lowest["temperature"] <= temperature < critical["temperature"]
        where = f"{temperature:g} K"
    if not exists:
        raise InputError(
            Fault(
                f"{data['title']} has no saturated liquid at {where}, where the reference state {name} sets its zero."
            )
        )
    if temperature is None:
        saturated = curves.at_pressure(np.array([_ATMOSPHERE]))
    else:
        saturated = curves.at_temperature(np.array([temperature]))
    found = equation.properties(saturated.bubble_temperature, saturated.liquid_density)
    equation.shift(enthalpy - float(found.enthalpy[0]), entropy - float(found.entropy[0]))
    return words

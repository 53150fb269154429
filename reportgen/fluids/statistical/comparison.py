"""Counted states against the polynomials of the ideal gas: two independent roads to one entropy."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from reportgen.fluids.gases.gas import ideal_gas
from reportgen.fluids.statistical.gas import gas

__all__ = ["STANDARD_PRESSURE", "differences"]

STANDARD_PRESSURE = 1e5  # Pa
_REFERENCE = 298.15  # K


def differences(name: str, temperature: ArrayLike) -> dict[str, Any]:
    """Relative differences [1] of the counted gas from the ideal gas of the same name at T [K] and 1 bar.

    Keys "entropy", "heat_capacity" and "enthalpy"; the last one is of H(T) − H(298.15 K), NaN at 298.15 K itself.

    Raises
    ------
    InputError : no molecular constants are carried for it.
    RangeError : temperature outside the range of either.
    """
    counted, tabulated = gas(name), ideal_gas(name)
    given = np.asarray(temperature, dtype=np.float64)
    mass = tabulated.molar_mass
    state = tabulated.at(temperature=given, pressure=STANDARD_PRESSURE)
    reference = tabulated.at(temperature=_REFERENCE, pressure=STANDARD_PRESSURE)
    heated = counted.enthalpy(given) - counted.enthalpy(_REFERENCE)
    listed = (state.specific_enthalpy - reference.specific_enthalpy) * mass
    with np.errstate(divide="ignore", invalid="ignore"):
        return {
            "entropy": counted.entropy(given, STANDARD_PRESSURE) / (state.specific_entropy * mass) - 1.0,
            "heat_capacity": counted.heat_capacity(given) / (state.isobaric_heat_capacity * mass) - 1.0,
            "enthalpy": np.where(given == _REFERENCE, np.nan, heated / listed - 1.0)[()],
        }

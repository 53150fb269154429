"""Property models that take and give quantities with units, of whatever unit registry their user has.

No unit library is imported: anything will do whose quantities convert themselves (``to``, ``is_compatible_with``) and
whose registry makes them (``Quantity``), as those of pint do.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from reportgen.errors import Fault, InputError
from reportgen.fluids.model import Errors, Fluid
from reportgen.fluids.pairs import PROPERTIES
from reportgen.fluids.state import FIELDS, State

__all__ = ["FluidWithUnits", "StateWithUnits", "with_units"]

#: Unit of every number of a state, by field.
UNITS: dict[str, str] = {
    **PROPERTIES,
    "specific_internal_energy": "J/kg",
    "isobaric_heat_capacity": "J/(kg*K)",
    "isochoric_heat_capacity": "J/(kg*K)",
    "speed_of_sound": "m/s",
    "compressibility_factor": "1",
}
#: Differences of temperature: a scale with an offset would turn 10 °C into 283 K.
_DIFFERENCES = ("superheat", "subcooling")


class StateWithUnits:
    """A state whose fields are quantities: the names of ``State``, in SI units; ``phase`` stays text.

    Parameters
    ----------
    state : the state in plain numbers, also at hand as ``plain``.
    registry : makes the quantities.
    """

    def __init__(self, state: State, registry: Any) -> None:
        self.plain = state
        self._registry = registry

    def __getattr__(self, name: str) -> Any:
        value = getattr(self.plain, name)
        return self._registry.Quantity(value, _unit(name)) if name in UNITS else value

    def __dir__(self) -> list[str]:
        return [*super().__dir__(), *FIELDS]

    def __repr__(self) -> str:
        return f"StateWithUnits({self.plain!r})"


class FluidWithUnits:
    """A property model that takes quantities and gives quantities; made by :func:`with_units`.

    ``fluid`` is the model itself; everything else that it tells of itself is read through it (``title``, ``limits``,
    ``sources``, ...), in plain SI numbers.

    Parameters
    ----------
    fluid : any property model.
    registry : a unit registry.
    """

    def __init__(self, fluid: Fluid, registry: Any) -> None:
        self.fluid = fluid
        self._registry = registry

    def __getattr__(self, name: str) -> Any:
        return getattr(self.fluid, name)

    def __repr__(self) -> str:
        return f"FluidWithUnits({self.fluid!r})"

    def at(self, *, errors: Errors = "raise", **pair: Any) -> StateWithUnits:
        """State fixed by two properties; see ``fluids.model.Fluid.at``.

        Parameters
        ----------
        errors : as there.
        pair : quantities of the dimension of each property, in any unit: temperatures in K, degC or degF, pressures
            absolute, differences (superheat) without offset. A quality may be a plain number.

        Raises
        ------
        InputError : a number without unit, a unit of another dimension, a difference in a unit with an offset; and as
            in ``Fluid.at``.
        RangeError : as in ``Fluid.at``.
        """
        return StateWithUnits(self.fluid.at(errors=errors, **self._plain(pair)), self._registry)

    def saturation(self, *, errors: Errors = "raise", **given: Any) -> tuple[StateWithUnits, StateWithUnits]:
        """Saturated liquid and vapour at a temperature or a pressure, a quantity [K, Pa or what converts].

        Raises
        ------
        InputError : a model without saturation; and as in :meth:`at`.
        RangeError : no saturation there.
        """
        saturation = getattr(self.fluid, "saturation", None)
        if saturation is None:
            raise InputError(Fault(f"The model of {self.fluid.title} has no saturation.", found=self.fluid.kind))
        liquid, vapour = saturation(errors=errors, **self._plain(given))
        return StateWithUnits(liquid, self._registry), StateWithUnits(vapour, self._registry)

    def _plain(self, given: Mapping[str, Any]) -> dict[str, Any]:
        """Quantities as plain SI numbers; names that are no property pass, for the model to refuse."""
        return {name: self._number(name, value) if name in PROPERTIES else value for name, value in given.items()}

    def _number(self, name: str, value: Any) -> Any:
        words, unit = name.replace("_", " "), _unit(name)
        if not (hasattr(value, "to") and hasattr(value, "is_compatible_with") and hasattr(value, "magnitude")):
            if unit == "dimensionless":
                return value
            raise InputError(
                Fault(
                    f"The {words} has no unit.",
                    found=repr(value)[:60],
                    expected=f"a quantity in {PROPERTIES[name]} or what converts to it",
                )
            )
        if not value.is_compatible_with(unit):
            raise InputError(
                Fault(
                    f"This is no {words}: its unit has another dimension.",
                    found=str(value)[:60],
                    expected=f"a quantity in {PROPERTIES[name]} or what converts to it",
                )
            )
        if name in _DIFFERENCES and self._has_offset(value.units, unit):
            raise InputError(
                Fault(
                    f"The {words} is a difference of temperatures, and its unit stands for a temperature.",
                    found=str(value)[:60],
                    expected="K, or a unit for differences such as delta_degC",
                )
            )
        return np.asarray(value.to(unit).magnitude)

    def _has_offset(self, units: Any, unit: str) -> bool:
        """Whether zero in these units is something else than zero in SI."""
        zero: float = self._registry.Quantity(0.0, str(units)).to(unit).magnitude
        return zero != 0.0


def with_units(fluid: Fluid, registry: Any) -> FluidWithUnits:
    """A property model that takes and gives quantities of a unit registry, such as ``pint.UnitRegistry()``.

    Parameters
    ----------
    fluid : any property model, for example ``real_fluid("water")``.
    registry : has ``Quantity(number, unit)``; its units go by the common names (Pa, K, J, kg, m, s).

    A model that has units already is wrapped anew, with this registry.

    Raises
    ------
    InputError : something else than a property model, a registry that makes no quantities.
    """
    if isinstance(fluid, FluidWithUnits):
        fluid = fluid.fluid
    if not (callable(getattr(fluid, "at", None)) and hasattr(fluid, "title") and hasattr(fluid, "limits")):
        raise InputError(
            Fault("This is no property model.", found=repr(fluid)[:60], expected='such as real_fluid("water")')
        )
    if not callable(getattr(registry, "Quantity", None)):
        raise InputError(
            Fault("This is no unit registry.", found=repr(registry)[:60], expected="such as pint.UnitRegistry()")
        )
    return FluidWithUnits(fluid, registry)


def _unit(name: str) -> str:
    """Unit of a property as registries read it."""
    unit = UNITS[name]
    return "dimensionless" if unit == "1" else unit.replace("m3", "m**3")

"""The state of a fluid: the same fields for every property model."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import Fault

__all__ = ["FIELDS", "PHASES", "PHASE_TYPE", "Field", "SingleState", "State"]

#: What ``State.phase`` may hold. The empty text stands where there is no state (NaN given, or a masked fault).
PHASES = ("liquid", "vapour", "two-phase", "supercritical", "gas", "solid", "")

#: Type of an array of phases.
PHASE_TYPE = "<U13"

#: Computes one field and, if it comes at no extra cost, others with it: name -> flat array.
Fill = Callable[[str], Mapping[str, NDArray[Any]]]


class Field:
    """One property of a state: read only, computed when first asked for, in the shape of the input."""

    def __init__(self, text: str) -> None:
        self.__doc__ = text
        self.name = ""

    def __set_name__(self, owner: type, name: str) -> None:
        self.name = name

    def __get__(self, instance: State | None, owner: type | None = None) -> Any:
        """The array in the shape of the input (a numpy scalar for scalar input)."""
        return self if instance is None else instance._read(self.name)

    def __set__(self, instance: State, value: object) -> None:
        raise AttributeError(f"{self.name} of a State is read only.")


class State:
    """Properties of a fluid in one or many states. SI units, mass basis, one common shape, never altered.

    Fields are numpy arrays of the broadcast shape of what was given (numpy scalars when scalars were given) and
    NaN where a property has no meaning. Rarely used fields are computed when first read.

    Parameters
    ----------
    shape : common shape of all fields.
    values : fields known already, each a flat array with as many elements as the shape has.
    fill : called with the name of a field not yet known; returns that field and any others that come with it (flat).
    faults : flat index -> Fault, for elements that could not be evaluated (``errors="mask"``).
    """

    __slots__ = ("_fill", "_shape", "_values", "faults")

    faults: Mapping[int, Fault]
    """Why elements are NaN: flat index -> Fault. Empty when all went well."""

    temperature = Field("Thermodynamic temperature T [K].")
    pressure = Field("Absolute pressure p [Pa].")
    density = Field("Mass density ρ [kg/m3].")
    specific_volume = Field("Specific volume v = 1/ρ [m3/kg].")
    specific_enthalpy = Field("Specific enthalpy h [J/kg]; zero as stated by the fluid.")
    specific_entropy = Field("Specific entropy s [J/(kg*K)]; zero as stated by the fluid.")
    specific_internal_energy = Field("Specific internal energy u = h − p v [J/kg].")
    quality = Field("Vapour mass fraction x [1] of two-phase and saturated states, else NaN.")
    isobaric_heat_capacity = Field("c_p = (∂h/∂T)_p [J/(kg*K)]; NaN in two phases, infinite at the critical point.")
    isochoric_heat_capacity = Field("c_v = (∂u/∂T)_v [J/(kg*K)]; NaN in two-phase states.")
    speed_of_sound = Field("w = √(∂p/∂ρ)_s [m/s]; NaN in two-phase states.")
    compressibility_factor = Field("Z = p v M/(R T) [1].")
    superheat = Field("T − T_sat(p) [K] of vapour below the critical pressure, else NaN.")
    subcooling = Field("T_sat(p) − T [K] of liquid below the critical pressure, else NaN.")
    phase = Field('"liquid", "vapour", "two-phase", "supercritical", "gas" (ideal gas), "solid", or "" for no state.')

    def __init__(
        self,
        shape: tuple[int, ...],
        values: Mapping[str, NDArray[Any]],
        fill: Fill | None = None,
        faults: Mapping[int, Fault] | None = None,
    ) -> None:
        object.__setattr__(self, "_shape", shape)
        object.__setattr__(self, "_values", dict(values))
        object.__setattr__(self, "_fill", fill)
        object.__setattr__(self, "faults", MappingProxyType(faults if faults else {}))

    def __setattr__(self, name: str, value: object) -> None:
        raise AttributeError(f"{name} of a State is read only.")

    @property
    def shape(self) -> tuple[int, ...]:
        """Common shape of all fields."""
        shape: tuple[int, ...] = object.__getattribute__(self, "_shape")
        return shape

    def flat(self, name: str) -> NDArray[Any]:
        """Field ``name`` as a flat, read-only array with one element for every state."""
        values: dict[str, NDArray[Any]] = self._values  # type: ignore[attr-defined]
        found = values.get(name)
        if found is None:
            fill: Fill | None = self._fill  # type: ignore[attr-defined]
            if fill is None or name not in FIELDS:
                raise AttributeError(f"This State has no {name}.")
            for key, array in fill(name).items():
                values.setdefault(key, array)
            found = values[name]
        if found.flags.writeable:
            found = found.view()
            found.flags.writeable = False
            values[name] = found
        return found

    def _read(self, name: str) -> Any:
        return self.flat(name).reshape(self.shape)[()]

    def __repr__(self) -> str:
        with np.printoptions(precision=6, threshold=6):
            return f"State(temperature={self.temperature!r}, pressure={self.pressure!r}, phase={self.phase!r})"


class SingleState(State):
    """A State of shape () that is kept as plain numbers: arrays are made only where they are asked for.

    Parameters
    ----------
    values : fields known already.
    fill : as for State, with plain numbers; its result is not used elsewhere.
    """

    __slots__ = ()

    def __init__(self, values: dict[str, Any], fill: Callable[[str], dict[str, Any]]) -> None:
        _set_values(self, values)
        _set_fill(self, fill)
        _set_shape(self, ())
        _set_faults(self, _NO_FAULTS)

    def _read(self, name: str) -> Any:
        values: dict[str, Any] = self._values  # type: ignore[attr-defined]
        found = values.get(name)
        if found is None:
            filled: dict[str, Any] = self._fill(name)  # type: ignore[attr-defined]
            filled.update(values)  # what was given stays as it was given
            values.update(filled)
            found = values[name]
        return np.str_(found) if name == "phase" else np.float64(found)

    def flat(self, name: str) -> NDArray[Any]:
        """Field ``name`` as a read-only array of one element."""
        if name not in FIELDS:
            raise AttributeError(f"This State has no {name}.")
        array = np.array([self._read(name)], dtype=PHASE_TYPE if name == "phase" else np.float64)
        array.flags.writeable = False
        return array


#: How the slots of a State are set, which refuses to have its attributes set.
_set_values, _set_fill, _set_shape, _set_faults = (
    vars(State)[name].__set__ for name in ("_values", "_fill", "_shape", "faults")
)
_NO_FAULTS: Mapping[int, Fault] = MappingProxyType({})
#: Names of all fields, in the order of the class.
FIELDS: tuple[str, ...] = tuple(name for name, value in vars(State).items() if isinstance(value, Field))

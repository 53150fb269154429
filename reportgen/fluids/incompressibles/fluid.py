"""Incompressible liquids and solids.

    v = v0 [1 + β (T − T0)],   h = ∫ c dT + v0 (1 − β T0)(p − p0),   s = ∫ c/T dT − v0 β (p − p0)

with the integrals from T0 and p0 = 101 325 Pa. With the thermal expansion β = 0 this is the usual model: constant
volume, s of temperature alone, h with the work of pushing v (p − p0). With β it stays consistent (dh = T ds + v dp,
and (∂s/∂p)_T = −(∂v/∂T)_p), since v is linear in T and c is at every pressure the c_p given.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import cached_property
from typing import Any, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import Fault, InputError
from reportgen.fluids.incompressibles.heat import HeatCapacityLaw
from reportgen.fluids.inversion import Inverse
from reportgen.fluids.model import Errors, Limits
from reportgen.fluids.naming import title_of
from reportgen.fluids.pairs import Elements, check_errors, in_words, read_pair
from reportgen.fluids.state import State

__all__ = ["ZERO_TEMPERATURE", "Incompressible"]

Array = NDArray[np.float64]

#: p0 [Pa]: where the enthalpy is that of the heat capacity alone.
ZERO_PRESSURE = 101325.0
#: T0 [K] of the zeros where the range allows it.
ZERO_TEMPERATURE = 298.15

_MOLAR_GAS_CONSTANT = 8.31446261815324  # J/(mol*K), exact by the definition of the SI of 2019
_LIMIT_SLACK = 1e-12
#: 0 degC [K].
_ICE = 273.15
#: Temperature [K] above which nobody is helped by hearing what would result.
_HIGHEST_TOLD = 1e4

_PAIRS = (
    ("pressure", "temperature"),
    ("pressure", "specific_enthalpy"),
    ("pressure", "specific_entropy"),
    ("temperature", "specific_enthalpy"),
    ("specific_enthalpy", "specific_entropy"),
)
_ONLY_EXPANDING = ("temperature", "specific_entropy")
_SATURATION = ("quality", "superheat", "subcooling")
_VOLUME = ("density", "specific_volume")


class Incompressible:
    """An incompressible liquid or solid; see ``reportgen.fluids.model.Fluid`` for the interface.

    Made by ``fluids.incompressible``. ``molar_mass`` [kg/mol] is NaN where it was not given.

    Parameters
    ----------
    name : what it is called.
    phase : "liquid" or "solid".
    density : at the temperature of the zeros [kg/m3].
    expansion : β [1/K], 0 for a constant volume.
    law : heat capacity with its integrals.
    limits : range of temperature.
    zero_temperature : T0 [K].
    molar_mass : M [kg/mol], or NaN.
    source : where density and heat capacity come from.
    """

    kind = "incompressible"
    composition = None

    def __init__(
        self,
        name: str,
        *,
        phase: Literal["liquid", "solid"],
        density: float,
        expansion: float,
        law: HeatCapacityLaw,
        limits: Limits,
        zero_temperature: float,
        molar_mass: float,
        source: str | None,
    ) -> None:
        self.title = title_of(name)
        self.substance = name
        self.phase = phase
        self.thermal_expansion = expansion
        self.molar_mass = molar_mass
        self.gas_constant = _MOLAR_GAS_CONSTANT / molar_mass
        self.limits = limits
        self.sources = (source or f"{self.title}: density and specific heat capacity as given.",)
        self.data_files: tuple[Mapping[str, str], ...] = ()
        self._zero_temperature = zero_temperature
        self._volume = 1.0 / density
        self._law = law
        #: (∂h/∂p)_T [m3/kg] and −(∂s/∂p)_T [m3/(kg*K)]: neither depends on the state.
        self._enthalpy_slope = self._volume * (1.0 - expansion * zero_temperature)
        self._entropy_slope = self._volume * expansion
        self._pairs = (*_PAIRS, _ONLY_EXPANDING) if expansion else _PAIRS

    @property
    def entropy_zero(self) -> str:
        """Where entropy and enthalpy are zero, in words."""
        return (
            f"s = 0 and h = 0 for the {self.phase} at {self._zero_temperature:g} K and {ZERO_PRESSURE / 1e5:g} bar; "
            + ("s depends on temperature alone, " if not self.thermal_expansion else "")
            + "h carries the work of pushing v (p − p0)."
        )

    @property
    def entropy_zero_name(self) -> str:
        """Key of the zero, for comparing two models."""
        return f"{self._zero_temperature:g} K {self.phase}:{self.substance}"

    def __repr__(self) -> str:
        return f"Incompressible({self.title!r}, phase={self.phase!r})"

    # --- states -------------------------------------------------------------------------------------------------------

    def at(self, *, errors: Errors = "raise", **pair: ArrayLike) -> State:
        """State fixed by two independent properties; see ``Fluid.at``.

        Pairs: pressure with temperature, specific enthalpy or specific entropy; specific enthalpy with temperature or
        specific entropy (the pressure follows from v (p − p0), so it takes the rounding of h times the density); with a
        thermal expansion also temperature with specific entropy.

        Raises
        ------
        InputError : density (it does not fix a state), temperature with entropy where they depend on each other,
            saturation properties, and as in ``Fluid.at``.
        RangeError : temperature outside the limits, a pressure that is not above zero.
        """
        check_errors(errors)
        self._refuse_meaningless(pair)
        given = read_pair(pair, self._pairs, self.title)
        elements = Elements(given.first.size)
        known = {given.names[0]: given.first, given.names[1]: given.second}
        empty = np.isnan(given.first) | np.isnan(given.second)
        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            for name, array in known.items():
                infinite = np.isinf(array)
                elements.reject(
                    infinite & ~empty,
                    lambda i, name=name, array=array: _fault(name, array[i], self.title, "a finite number"),  # type: ignore[misc]
                )
            temperature = self._temperature(known)
            self._check_temperature(temperature, known, elements, empty)
            pressure = self._pressure(temperature, known)
            elements.reject(
                ~((pressure > 0.0) & np.isfinite(pressure)) & ~empty & ~elements.rejected,
                lambda i: _fault("pressure", pressure[i], self.title, "a finite number above 0"),
            )
        elements.finish(errors)
        empty |= elements.rejected
        values: dict[str, NDArray[Any]] = {**known, "temperature": temperature, "pressure": pressure}
        if empty.any():
            values = {name: np.where(empty, np.nan, array) for name, array in values.items()}
        return State(given.shape, values, self._filler(values["temperature"], values["pressure"]), elements.faults)

    def _refuse_meaningless(self, pair: Mapping[str, object]) -> None:
        found = " with ".join(pair)
        saturation = [name for name in pair if name in _SATURATION]
        if saturation:
            raise InputError(
                Fault(
                    f"The incompressible model has no saturation, so {saturation[0]} means nothing for {self.title}.",
                    found=found,
                    expected='another property, or the model "real-fluid"',
                )
            )
        if any(name in _VOLUME for name in pair):
            raise InputError(
                Fault(
                    f"The density of {self.title} does not depend on pressure"
                    + (" and hardly on temperature" if self.thermal_expansion else " or temperature")
                    + ": it fixes no state.",
                    found=found,
                    expected="; ".join(f"{first} with {second}" for first, second in self._pairs),
                )
            )
        if set(pair) == set(_ONLY_EXPANDING) and not self.thermal_expansion:
            raise InputError(
                Fault(
                    f"The entropy of {self.title} depends on temperature alone: the two are not independent.",
                    found=found,
                    expected="one of them with pressure or specific enthalpy",
                )
            )

    def _temperature(self, known: Mapping[str, Array]) -> Array:
        """T [K] from the two properties; NaN where no temperature in range has them."""
        if "temperature" in known:
            return known["temperature"]
        enthalpy, entropy = known.get("specific_enthalpy"), known.get("specific_entropy")
        if "pressure" in known:
            distance = known["pressure"] - ZERO_PRESSURE
            if enthalpy is not None:
                return self._of_enthalpy(enthalpy - self._enthalpy_slope * distance)
            assert entropy is not None
            return self._of_entropy(entropy + self._entropy_slope * distance)
        assert enthalpy is not None
        assert entropy is not None
        # the sum s + γ h does not depend on pressure
        return self._of_both(entropy + self._ratio * enthalpy)

    def _pressure(self, temperature: Array, known: Mapping[str, Array]) -> Array:
        """P [Pa] from the temperature [K] and whichever property carries it."""
        if "pressure" in known:
            return known["pressure"]
        if "specific_enthalpy" in known:
            return ZERO_PRESSURE + (known["specific_enthalpy"] - self._law.enthalpy(temperature)) / self._enthalpy_slope
        return ZERO_PRESSURE + (self._law.entropy(temperature) - known["specific_entropy"]) / self._entropy_slope

    @property
    def _ratio(self) -> float:
        return self._entropy_slope / self._enthalpy_slope

    @cached_property
    def _nodes(self) -> Array:
        return self._law.nodes(self.limits.minimum_temperature, self.limits.maximum_temperature)

    @cached_property
    def _of_enthalpy(self) -> Inverse:
        return Inverse(self._nodes, self._law.enthalpy, self._law.heat_capacity)

    @cached_property
    def _of_entropy(self) -> Inverse:
        return Inverse(self._nodes, self._law.entropy, lambda t: self._law.heat_capacity(t) / t)

    @cached_property
    def _of_both(self) -> Inverse:
        ratio = self._ratio
        return Inverse(
            self._nodes,
            lambda t: self._law.entropy(t) + ratio * self._law.enthalpy(t),
            lambda t: self._law.heat_capacity(t) * (1.0 / t + ratio),
        )

    def _check_temperature(
        self, temperature: Array, known: Mapping[str, Array], elements: Elements, empty: NDArray[np.bool_]
    ) -> None:
        low, high = self.limits.minimum_temperature, self.limits.maximum_temperature
        outside = ~((temperature >= low * (1.0 - _LIMIT_SLACK)) & (temperature <= high * (1.0 + _LIMIT_SLACK)))
        where = f"{self.title} as an incompressible {self.phase}"

        def describe(index: int) -> Fault:
            if "temperature" in known:
                value = float(temperature[index])
                side = f"below the minimum {low:g} K" if value < low else f"above the maximum {high:g} K"
                written = in_words("temperature", value)
                return Fault(
                    f"Temperature {written} is {side} of {where}.", found=written, expected=f"{low:g} K to {high:g} K"
                )
            name = "specific_enthalpy" if "specific_enthalpy" in known else "specific_entropy"
            would_be = self._beyond(name, {key: float(array[index]) for key, array in known.items()})
            allowed = f"a temperature of {low:g} K to {high:g} K ({low - _ICE:.4g} degC to {high - _ICE:.4g} degC)"
            return _fault(name, known[name][index], where, allowed + would_be)

        elements.reject(outside & ~empty & ~elements.rejected, describe)

    def _beyond(self, name: str, known: Mapping[str, float]) -> str:
        """The temperature that would result if the heat capacity stayed as it is at the nearer end of the range."""
        if "pressure" not in known:
            return ""
        ends = np.array([self.limits.minimum_temperature, self.limits.maximum_temperature])
        pushed = known["pressure"] - ZERO_PRESSURE
        of_enthalpy = name == "specific_enthalpy"
        held = self._law.enthalpy(ends) + self._enthalpy_slope * pushed if of_enthalpy else self._law.entropy(ends)
        beyond = known[name] - (held if of_enthalpy else held - self._entropy_slope * pushed)
        nearer = int(np.argmin(np.abs(beyond)))
        step = float(beyond[nearer]) / float(self._law.heat_capacity(ends)[nearer])
        with np.errstate(over="ignore"):
            result = float(ends[nearer] + step if of_enthalpy else ends[nearer] * np.exp(step))
        if not 0.0 < result < _HIGHEST_TOLD:
            return ""
        return (
            f"; with the specific heat capacity held beyond it would be about {result:.4g} K ({result - _ICE:.4g} degC)"
        )

    def _filler(self, temperature: Array, pressure: Array) -> Callable[[str], Mapping[str, NDArray[Any]]]:
        """What computes the other fields of a state when they are read."""
        law, zero = self._law, self._zero_temperature

        def volume() -> Array:
            # a zero expansion keeps the shape and the NaN of the temperature
            return self._volume * (1.0 + self.thermal_expansion * (temperature - zero))

        def enthalpy() -> Array:
            return law.enthalpy(temperature) + self._enthalpy_slope * (pressure - ZERO_PRESSURE)

        def isochoric() -> Array:
            if self.thermal_expansion:
                # c_p − c_v = T v β²/κ_T has no limit for κ_T = 0
                return np.full_like(temperature, np.nan)
            return law.heat_capacity(temperature)

        compute: dict[str, Callable[[], NDArray[Any]]] = {
            "density": lambda: 1.0 / volume(),
            "specific_volume": volume,
            "specific_enthalpy": enthalpy,
            "specific_entropy": lambda: law.entropy(temperature) - self._entropy_slope * (pressure - ZERO_PRESSURE),
            "specific_internal_energy": lambda: enthalpy() - pressure * volume(),
            "isobaric_heat_capacity": lambda: law.heat_capacity(temperature),
            "isochoric_heat_capacity": isochoric,
            "compressibility_factor": lambda: pressure * volume() / (self.gas_constant * temperature),
            "phase": lambda: np.where(np.isnan(temperature), "", self.phase),
        }
        return lambda name: {name: compute[name]() if name in compute else np.full(temperature.shape, np.nan)}


def _fault(name: str, value: float, where: str, expected: str) -> Fault:
    written = in_words(name, value)
    words = name.replace("_", " ").capitalize()
    return Fault(f"{words} {written} is outside the range of {where}.", found=written, expected=expected)

"""Ideal gases and their mixtures, with entropies by the third law.

    p v = R T,   h = h(T),   s = s°(T) − R ln(p/p°) − R Σ x_i ln x_i

with p° = 1 bar and the molar gas constant of CODATA 2018 (exact since 2019; DOI 10.1103/RevModPhys.93.025010). The
polynomials were fitted with 8.314510 J/(mol·K); the constant used here lowers every property by 6 parts in a million.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from functools import cached_property
from typing import Any, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import Fault, InputError
from reportgen.fluids.gases.caloric import LIMIT_SLACK, CaloricLaw, ConstantHeatCapacity, Nasa9
from reportgen.fluids.gases.species import DATA_FILE, Basis, GasMixture, library, mole_fractions, resolve
from reportgen.fluids.model import Errors, Limits
from reportgen.fluids.naming import title_of
from reportgen.fluids.numeric import number
from reportgen.fluids.pairs import Elements, Pair, check_errors, in_words, read_pair
from reportgen.fluids.state import State

__all__ = ["MOLAR_GAS_CONSTANT", "IdealGas", "ideal_gas"]

MOLAR_GAS_CONSTANT = 8.31446261815324  # J/(mol*K), exact by the definition of the SI of 2019

#: Where a constant heat capacity meets the temperature-dependent one.
REFERENCE_TEMPERATURE = 298.15  # K

#: A constant heat capacity rests on no polynomial: the author who states it answers for it, down to here [K].
LOWEST_WITH_CONSTANT_HEAT_CAPACITY = 20.0

#: Least pressure [Pa] and density [kg/m3] taken: below, volumes overflow.
_LEAST = 1e-290

Array = NDArray[np.float64]

_PAIRS = (
    ("pressure", "temperature"),
    ("pressure", "specific_enthalpy"),
    ("pressure", "specific_entropy"),
    ("pressure", "specific_internal_energy"),
    ("pressure", "density"),
    ("temperature", "density"),
    ("temperature", "specific_entropy"),
    ("specific_enthalpy", "specific_entropy"),
    ("specific_enthalpy", "density"),
    ("specific_entropy", "density"),
    ("specific_internal_energy", "density"),
    ("specific_internal_energy", "specific_entropy"),
)
#: What depends on temperature alone: two of these do not fix a state.
_THERMAL = {
    "temperature": "temperature",
    "specific_enthalpy": "enthalpy",
    "specific_internal_energy": "internal energy",
}
_NO_SATURATION = ("quality", "superheat", "subcooling")


class IdealGas:
    """An ideal gas of fixed composition; see ``reportgen.fluids.model.Fluid`` for the interface.

    Made by :func:`ideal_gas`. ``constant_heat_capacity`` [J/(kg*K)] is None for a temperature-dependent one.
    """

    kind = "ideal-gas"
    entropy_zero_name = "third-law"

    def __init__(
        self,
        title: str,
        substance: str | None,
        fractions: Mapping[str, float],
        constant_heat_capacity: float | None,
        extra_sources: tuple[str, ...] = (),
    ) -> None:
        carried = library()
        self.title = title
        self.substance = substance
        self.constant_heat_capacity = constant_heat_capacity
        self._fractions = dict(fractions)
        self._parts = [carried.species[key] for key in fractions]
        self.molar_mass = math.fsum(
            fraction * part.molar_mass for fraction, part in zip(fractions.values(), self._parts, strict=True)
        )
        self.gas_constant = MOLAR_GAS_CONSTANT / self.molar_mass
        self._standard_pressure = carried.standard_pressure
        self._breaks = carried.temperature_breaks
        lowest = self._breaks[0] if constant_heat_capacity is None else LOWEST_WITH_CONSTANT_HEAT_CAPACITY
        self._range = (lowest, self._breaks[-1])
        self._law = self._caloric_law()
        self._extra_sources = extra_sources

    def _caloric_law(self) -> CaloricLaw:
        """The mixture's law: coefficients are mole-fraction sums, with the entropy of mixing in the last one."""
        shares = np.array(list(self._fractions.values()))
        coefficients = np.einsum("s,sic->ic", shares, np.array([part.coefficients for part in self._parts]))
        coefficients[:, 8] -= float(np.sum(shares * np.log(shares)))
        variable = Nasa9(self._breaks, coefficients.tolist(), self.gas_constant)
        if self.constant_heat_capacity is None:
            return variable
        if not self.gas_constant < self.constant_heat_capacity < math.inf:
            raise InputError(
                Fault(
                    f"The isobaric heat capacity of {self.title} must be above its gas constant.",
                    found=f"{self.constant_heat_capacity:.6g} J/(kg*K)",
                    expected=f"more than {self.gas_constant:.6g} J/(kg*K)",
                )
            )
        reference = np.array([REFERENCE_TEMPERATURE])
        return ConstantHeatCapacity(
            self.constant_heat_capacity,
            self.gas_constant,
            temperature=REFERENCE_TEMPERATURE,
            enthalpy=float(variable.enthalpy(reference)[0]),
            entropy=float(variable.entropy(reference)[0]),
            minimum_temperature=self._range[0],
            maximum_temperature=self._range[1],
        )

    # --- description --------------------------------------------------------------------------------------------------

    @property
    def composition(self) -> dict[str, float] | None:
        """Mole fractions [1] by species, or None for a single species."""
        return dict(self._fractions) if len(self._fractions) > 1 else None

    @cached_property
    def limits(self) -> Limits:
        """Range of the polynomials; a constant heat capacity, which is the author's, holds to lower temperatures."""
        return Limits(
            minimum_temperature=self._range[0],
            maximum_temperature=self._range[1],
            maximum_pressure=math.inf,
            remarks=(
                "The pressure is not limited; how far the gas is from ideal is not part of this model.",
                "The composition is fixed: no dissociation at high temperature, no condensation at low temperature.",
            ),
        )

    @property
    def entropy_zero(self) -> str:
        """Where entropy and enthalpy are zero, in words."""
        text = (
            "Entropy: third law (zero for the perfect crystal at 0 K), ideal gas at 1 bar"
            + (", with the entropy of mixing" if len(self._fractions) > 1 else "")
            + ". Enthalpy: zero for the elements in their reference states at 298.15 K."
        )
        if self.constant_heat_capacity is not None:
            text += (
                " The constant heat capacity starts from these values at the reference point 298.15 K, 1 bar;"
                " elsewhere h and s differ from it by c_p (T − 298.15 K) and c_p ln(T/298.15 K) − R ln(p/1 bar)."
            )
        return text

    @property
    def sources(self) -> tuple[str, ...]:
        """Publications of the polynomials and of the data under them."""
        parts = tuple(f"{part.name}: {part.source}" for part in self._parts)
        return (library().source, *parts, *self._extra_sources)

    @property
    def data_files(self) -> tuple[Mapping[str, str], ...]:
        """The data file with its digest."""
        return ({"file": DATA_FILE, "sha256": library().sha256},)

    def __repr__(self) -> str:
        return f"IdealGas({self.title!r})"

    # --- states -------------------------------------------------------------------------------------------------------

    def at(self, *, errors: Errors = "raise", **pair: ArrayLike) -> State:
        """State fixed by two independent properties; see ``Fluid.at``.

        Pairs: pressure with temperature, specific enthalpy, specific internal energy, specific entropy or density
        (specific volume); temperature with density or specific entropy; density with specific entropy; and either of
        these two with specific enthalpy or specific internal energy.

        Raises
        ------
        InputError : two of temperature, enthalpy and internal energy (dependent), saturation properties (an ideal gas
            has none), and as in ``Fluid.at``.
        RangeError : temperature outside the limits, a pressure or density that is not above zero.
        """
        check_errors(errors)
        self._refuse_meaningless(pair)
        given = read_pair(pair, _PAIRS, self.title)
        elements = Elements(given.first.size)
        # Values out of range may overflow on the way; they are reported as faults below.
        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            known = self._known(given, elements)
            temperature, pressure = self._temperature_and_pressure(known, elements)
            empty = np.isnan(given.first) | np.isnan(given.second) | elements.rejected
            self._check_pressure(pressure, empty, elements)
        elements.finish(errors)
        empty |= elements.rejected
        values: dict[str, NDArray[Any]] = {**known, "temperature": temperature, "pressure": pressure}
        if empty.any():
            values = {name: np.where(empty, np.nan, array) for name, array in values.items()}
        return State(given.shape, values, self._filler(values["temperature"], values["pressure"]), elements.faults)

    def _refuse_meaningless(self, pair: Mapping[str, object]) -> None:
        saturation = [name for name in pair if name in _NO_SATURATION]
        if saturation:
            raise InputError(
                Fault(
                    f"An ideal gas has no saturation, so {saturation[0]} means nothing for {self.title}.",
                    found=" with ".join(pair),
                    expected='another property, or the model "real-fluid"',
                )
            )
        if len(pair) == 2 and set(pair) <= set(_THERMAL):
            energy = next(word for name, word in _THERMAL.items() if name in pair and name != "temperature")
            raise InputError(
                Fault(
                    f"The {energy} of an ideal gas depends on temperature alone: the two are not independent.",
                    found=" with ".join(pair),
                    expected="one of them with pressure, density or specific entropy",
                )
            )

    def _known(self, given: Pair, elements: Elements) -> dict[str, Array]:
        """The two properties by name, elements that cannot be met marked."""
        known = {given.names[0]: given.first, given.names[1]: given.second}
        unknown = np.isnan(given.first) | np.isnan(given.second)
        for name in ("pressure", "density"):
            if name in known:
                array = known[name]
                elements.reject(
                    ~((array >= _LEAST) & np.isfinite(array)) & ~unknown,
                    lambda i, name=name, array=array: _fault(name, array[i], self.title, "a finite number above 0"),  # type: ignore[misc]
                )
        return known

    def _temperature_and_pressure(self, known: Mapping[str, Array], elements: Elements) -> tuple[Array, Array]:
        """T [K] and p [Pa] of the elements; out of limits they are NaN and marked."""
        law, gas_constant = self._law, self.gas_constant
        pressure, density = known.get("pressure"), known.get("density")
        entropy, enthalpy = known.get("specific_entropy"), known.get("specific_enthalpy")
        energy = known.get("specific_internal_energy")
        if "temperature" in known:
            temperature = known["temperature"]
        elif enthalpy is not None:
            temperature = law.temperature_of_enthalpy(enthalpy)
        elif energy is not None:
            temperature = law.temperature_of_internal_energy(energy)
        elif entropy is None:
            assert pressure is not None
            assert density is not None
            temperature = pressure / (density * gas_constant)
        elif pressure is not None:
            temperature = law.temperature_of_entropy(entropy + self._pressure_term(pressure))
        else:
            assert density is not None
            volume_term = gas_constant * np.log(density * gas_constant / self._standard_pressure)
            temperature = law.temperature_of_isochoric_entropy(entropy + volume_term)
        self._check_temperature(temperature, known, elements)
        if pressure is None:
            if density is not None:
                pressure = density * gas_constant * temperature
            else:
                assert entropy is not None
                pressure = self._standard_pressure * np.exp((law.entropy(temperature) - entropy) / gas_constant)
        return temperature, pressure

    def _pressure_term(self, pressure: Array) -> Array:
        """R ln(p/p°) [J/(kg*K)]."""
        result: Array = self.gas_constant * np.log(pressure / self._standard_pressure)
        return result

    def _check_temperature(self, temperature: Array, known: Mapping[str, Array], elements: Elements) -> None:
        low, high = self._range
        # A temperature worked out at a limit must stay inside, whatever its last bits are.
        outside = ~((temperature >= low * (1.0 - LIMIT_SLACK)) & (temperature <= high * (1.0 + LIMIT_SLACK)))
        if not outside.any():
            return
        for array in known.values():
            outside &= ~np.isnan(array)
        source = next((name for name in (*_THERMAL, "specific_entropy") if name in known), None)

        def describe(index: int) -> Fault:
            if source in (None, "temperature"):
                value = float(temperature[index])
                side = f"below the minimum {low:g} K" if value < low else f"above the maximum {high:g} K"
                return Fault(
                    f"Temperature {in_words('temperature', value)} is {side} of {self.title} as an ideal gas.",
                    found=in_words("temperature", value),
                    expected=f"{low:g} K to {high:g} K",
                )
            return _fault(
                source,
                known[source][index],
                f"{self.title} as an ideal gas",
                f"a temperature of {low:g} K to {high:g} K",
            )

        elements.reject(outside, describe)

    def _check_pressure(self, pressure: Array, empty: NDArray[np.bool_], elements: Elements) -> None:
        elements.reject(
            ~((pressure >= _LEAST) & np.isfinite(pressure)) & ~empty,
            lambda i: _fault("pressure", pressure[i], self.title, "a finite number above 0"),
        )

    def _filler(self, temperature: Array, pressure: Array) -> Callable[[str], Mapping[str, NDArray[Any]]]:
        """What computes the other fields of a state when they are read."""
        law, gas_constant = self._law, self.gas_constant
        compute: dict[str, Callable[[], NDArray[Any]]] = {
            "density": lambda: pressure / (gas_constant * temperature),
            "specific_volume": lambda: gas_constant * temperature / pressure,
            "specific_enthalpy": lambda: law.enthalpy(temperature),
            "specific_entropy": lambda: law.entropy(temperature) - self._pressure_term(pressure),
            "specific_internal_energy": lambda: law.enthalpy(temperature) - gas_constant * temperature,
            "isobaric_heat_capacity": lambda: law.heat_capacity(temperature),
            "isochoric_heat_capacity": lambda: law.heat_capacity(temperature) - gas_constant,
            "speed_of_sound": lambda: _speed_of_sound(law.heat_capacity(temperature), gas_constant, temperature),
            "compressibility_factor": lambda: np.where(np.isnan(temperature), np.nan, 1.0),
            "phase": lambda: np.where(np.isnan(temperature), "", "gas"),
        }
        return lambda name: {name: compute[name]() if name in compute else np.full(temperature.shape, np.nan)}


def _speed_of_sound(heat_capacity: Array, gas_constant: float, temperature: Array) -> Array:
    """w = √(γ R T), γ = c_p/(c_p − R) [m/s]."""
    result: Array = np.sqrt(heat_capacity / (heat_capacity - gas_constant) * gas_constant * temperature)
    return result


def _fault(name: str, value: float, title: str, expected: str) -> Fault:
    written = in_words(name, value)
    words = name.replace("_", " ").capitalize()
    return Fault(f"{words} {written} is outside the range of {title}.", found=written, expected=expected)


# --- making one -------------------------------------------------------------------------------------------------------


def ideal_gas(
    substance_or_composition: str | Mapping[str, float],
    basis: Basis = "mole",
    heat_capacity: Literal["variable"] | float = "variable",
) -> IdealGas:
    """An ideal gas from its name or from the fractions of its species.

    Parameters
    ----------
    substance_or_composition : a name, formula or alias ("N2", "nitrogen", "air"), or fractions [1] by such names
        that add up to 1 within 1e-6.
    basis : whether the fractions are of the amount of substance ("mole") or of the mass ("mass").
    heat_capacity : "variable", or a constant c_p [J/(kg*K)]. With a constant one, h and s equal the variable model's
        at 298.15 K and 1 bar.

    Raises
    ------
    InputError : unknown names (with the nearest), fractions that do not add up to 1, a constant heat capacity that is
        not above the gas constant.
    """
    fractions = mole_fractions(substance_or_composition, basis)
    title, substance, extra = _title(substance_or_composition, fractions)
    constant: float | None = None
    if not (isinstance(heat_capacity, str) and heat_capacity == "variable"):
        constant = number(heat_capacity)
        if constant is None:
            raise InputError(
                Fault(
                    "The heat capacity is not understood.",
                    found=repr(heat_capacity)[:60],
                    expected='"variable" or J/(kg*K)',
                )
            )
    return IdealGas(title, substance, fractions, constant, extra)


def _title(asked: str | Mapping[str, float], fractions: Mapping[str, float]) -> tuple[str, str | None, tuple[str, ...]]:
    """Title, canonical substance (None for a mixture without a name) and further sources."""
    if isinstance(asked, str):
        entry = resolve(asked)
        if isinstance(entry, GasMixture):
            return title_of(entry.key), entry.key, (f"{entry.key}: {entry.source}",)
        return title_of(entry.name), entry.name, ()
    if len(fractions) == 1:
        (key,) = fractions
        return _title(key, fractions)
    parts = ", ".join(f"{key} {fraction:.4g}" for key, fraction in fractions.items())
    return f"Gas mixture ({parts})", None, ()

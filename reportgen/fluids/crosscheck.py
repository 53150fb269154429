"""States checked by a second source: another of our models, or an independent library.

Both sources are asked at the same temperature and pressure, or at the same temperature and quality where there are two
phases. Density, c_p and speed of sound are compared as they stand. Enthalpy and entropy are compared as differences
from a reference state, since every source has a zero of its own:

    Δ = (h₂ − h₂,ref) − (h₁ − h₁,ref),   relative to max(|h₁ − h₁,ref|, T |s₁ − s₁,ref|, 10⁻³ R T)
    Δ = (s₂ − s₂,ref) − (s₁ − s₁,ref),   relative to max(|s₁ − s₁,ref|, |h₁ − h₁,ref|/T, 10⁻³ R)

so that a difference counts in parts of the heat or work that it would spoil: along a throttling no enthalpy changes,
but entropy does. Statistical entropies count from the same zero as those of ideal gases (the third law) and are
compared as they stand, too.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import Fault, InputError
from reportgen.fluids.state import State

if TYPE_CHECKING:
    from reportgen.fluids.model import Fluid

__all__ = ["TOLERANCES", "Comparison", "Deviation", "compare", "second_model", "second_models", "usual_tolerance"]

Array = NDArray[np.float64]

#: Relative difference up to which two sources agree, unless stated otherwise: (second source, first model) or second
#: source. The library has the same published equations. Molecular constants meet the polynomials of N2, O2, CO, H2 to
#: 0.1 % and those of CO2 and H2O to 0.3 % in c_p up to 1500 K; harmonic vibration leaves more in NH3 or CH4. Models of
#: different kinds differ by what the simpler one leaves out: common practice lets 2 % pass for an ideal gas.
TOLERANCES: dict[tuple[str, str] | str, float] = {
    ("library", "real-fluid"): 1e-4,
    "statistical": 3e-3,
    "library": 2e-2,
    "ideal-gas": 2e-2,
    "real-fluid": 2e-2,
    "cubic": 2e-2,
}

#: Compared as they stand, and as differences from the reference state.
AS_THEY_STAND = ("density", "isobaric_heat_capacity", "speed_of_sound")
DIFFERENCES = ("specific_enthalpy", "specific_entropy")
#: Where the state is fixed by temperature and quality, its pressure is a result.
OF_SATURATION = ("pressure",)

#: Part by which molar masses of one substance or mixture may differ between two models: mixtures near air are compared
#: with air.
_SAME_MOLAR_MASS = 0.02
#: Part of R T and of R below which differences of enthalpy and entropy are not resolved.
_FLOOR = 1e-3
_LIQUID, _GASEOUS, _BOTH = ("liquid",), ("vapour", "gas"), ("two-phase",)


@dataclass(frozen=True)
class Deviation:
    """One property in two sources, arrays of shape (N,) in the SI unit of the property.

    ``counted_from`` is the element whose value was subtracted, None where values stand as they are. ``difference`` is
    second − first, ``relative`` [1] the difference in parts of ``scale``; NaN where there is nothing to compare.
    ``species`` names the gas of a mixture that the values are of, None for the whole.
    """

    name: str
    counted_from: int | None
    first: Array
    second: Array
    difference: Array
    scale: Array
    relative: Array
    species: str | None = None


@dataclass(frozen=True)
class Comparison:
    """All properties of some states in two sources.

    ``faults`` says of elements why the second source has no value there; ``remarks`` what else differs, such as the
    phase.
    """

    deviations: tuple[Deviation, ...]
    faults: Mapping[int, Fault]
    remarks: Mapping[int, str]


# --- second sources -------------------------------------------------------------------------------------------------


def usual_tolerance(second: str, first_kind: str) -> float:
    """Relative difference [1] up to which a second source agrees with a model, unless the author states another."""
    return TOLERANCES.get((second, first_kind), TOLERANCES[second])


def second_model(fluid: Fluid, name: str) -> Any:
    """The second source ``name`` for a fluid: a model with the interface of ``fluids.model.Fluid``.

    Parameters
    ----------
    fluid : the model whose states are to be checked.
    name : "ideal-gas", "real-fluid", "cubic" (Peng-Robinson), "statistical" or "library".

    Raises
    ------
    InputError : no such source, or none for this substance or mixture.
    NotInstalled : the independent library is not on this machine.
    """
    _require_model(fluid)
    maker = _MAKERS.get(name) if isinstance(name, str) else None
    if maker is None:
        raise InputError(Fault("This second source is not known.", found=repr(name)[:60], expected=", ".join(_MAKERS)))
    if name == fluid.kind:
        raise InputError(
            Fault(
                f"{fluid.title} cannot be checked by a model of its own kind: that would be the same model again.",
                found=repr(name),
                expected=", ".join(second_models(fluid)),
            )
        )
    return maker(fluid)


def second_models(fluid: Fluid) -> tuple[str, ...]:
    """Names of the second sources that there are for a fluid on this machine."""
    found = []
    for name, maker in _MAKERS.items():
        if name == fluid.kind:
            continue
        try:
            maker(fluid)
        except InputError:
            continue
        found.append(name)
    return tuple(found)


def _ideal_gas(fluid: Fluid) -> Any:
    from reportgen.fluids.gases.gas import ideal_gas

    return ideal_gas(_made_of(fluid))


def _real_fluid(fluid: Fluid) -> Any:
    from reportgen.fluids import real_fluid
    from reportgen.fluids.gases import catalogue

    name = catalogue.real_counterpart(fluid)  # type: ignore[arg-type]
    if name is None and fluid.composition is None and fluid.substance is not None:
        return real_fluid(fluid.substance)
    if name is None:
        raise InputError(Fault("No real fluid of this composition is carried.", found=fluid.title))
    return real_fluid(name)


def _cubic(fluid: Fluid) -> Any:
    from reportgen import fluids

    return fluids.cubic(_made_of(fluid), equation="Peng-Robinson")


def _statistical(fluid: Fluid) -> Any:
    from reportgen.fluids.molecular import MolecularGas

    if fluid.kind != "ideal-gas":
        raise InputError(
            Fault("Statistical entropies are those of ideal gases.", found=fluid.kind, expected="ideal-gas")
        )
    return MolecularGas(fluid)


def _library(fluid: Fluid) -> Any:
    from reportgen.fluids.library import library_fluid

    return library_fluid(fluid)


_MAKERS: dict[str, Callable[[Any], Any]] = {
    "ideal-gas": _ideal_gas,
    "real-fluid": _real_fluid,
    "cubic": _cubic,
    "statistical": _statistical,
    "library": _library,
}


def _made_of(fluid: Fluid) -> str | dict[str, float]:
    """Composition by mole of a mixture, else the name of the substance."""
    if fluid.composition is not None:
        return dict(fluid.composition)
    if fluid.substance is None:
        raise InputError(Fault("Nobody says what this fluid is made of.", found=fluid.title))
    return fluid.substance


# --- comparison -----------------------------------------------------------------------------------------------------


def compare(fluid: Fluid, second: Any, state: State, reference: int | None = 0) -> Comparison:
    """Compare states of a fluid with a second source.

    Parameters
    ----------
    fluid : model of the states.
    second : a model (``fluids.model.Fluid``), such as :func:`second_model` makes, or its name.
    state : N states of ``fluid``, in any shape; read flat.
    reference : flat index of the state from which enthalpies and entropies count; None leaves them out.

    Returns
    -------
    Comparison of density, c_p, speed of sound (and pressure where temperature and quality fix the state), and of
    enthalpy and entropy as differences; each array of shape (N,). Properties that none of the states has are left out.

    Raises
    ------
    InputError : what is no model or no state, models of different substances (by their molar masses), and as in
        :func:`second_model`.
    """
    _require_model(fluid)
    model: Any = second_model(fluid, second) if isinstance(second, str) else second
    _require_model(model)
    if not hasattr(state, "flat"):
        raise InputError(
            Fault("These are no states.", found=repr(state)[:60], expected=f"what `at` gives for {fluid.title}")
        )
    masses = (fluid.molar_mass, getattr(model, "molar_mass", np.nan))
    if abs(masses[1] / masses[0] - 1.0) > _SAME_MOLAR_MASS:  # false where one has none
        raise InputError(
            Fault(
                "The two models are of different substances.",
                found=f"{fluid.title} of {masses[0] * 1e3:.6g} g/mol, {model.title} of {masses[1] * 1e3:.6g} g/mol",
            )
        )
    other = _same_state(model, state)
    deviations = []
    for name in (*OF_SATURATION, *AS_THEY_STAND):
        first, second = _both(state, other, name)
        if name in OF_SATURATION:
            first = np.where(np.isfinite(_array(state, "quality")), first, np.nan)
        deviations.append(_deviation(name, None, first, second, np.abs(first)))
    if reference is not None and state.flat("temperature").size > 1:
        deviations += _counted(fluid, state, other, reference)
    if getattr(model, "shares_zero_of_entropy", False):
        pair = _both(state, other, "specific_entropy")
        deviations.append(_deviation("specific_entropy", None, *pair, np.abs(pair[0])))
    if hasattr(model, "species_deviations"):
        deviations += model.species_deviations(_array(state, "temperature"))
    compared = tuple(item for item in deviations if np.isfinite(item.relative).any())
    return Comparison(compared, other.faults, _remarks(state, other))


def _require_model(model: Any) -> None:
    if not callable(getattr(model, "at", None)):
        raise InputError(
            Fault("This is no property model.", found=repr(model)[:60], expected='such as real_fluid("water")')
        )


def _same_state(model: Any, state: State) -> State:
    """The states of the second source at the same T and p, or T and x; masked faults keep their places."""
    temperature, pressure, quality = (_array(state, name) for name in ("temperature", "pressure", "quality"))
    by_quality = np.isfinite(quality)
    size = temperature.size
    values: dict[str, NDArray[Any]] = {
        name: np.full(size, np.nan) for name in (*OF_SATURATION, *AS_THEY_STAND, *DIFFERENCES)
    }
    phase = np.full(size, "", dtype="<U13")
    faults: dict[int, Fault] = {}
    for where, partner, given in (
        (np.flatnonzero(~by_quality), "pressure", pressure),
        (np.flatnonzero(by_quality), "quality", quality),
    ):
        if not where.size:
            continue
        try:
            part = model.at(errors="mask", temperature=temperature[where], **{partner: given[where]})
        except InputError as error:  # a model without saturation
            faults |= dict.fromkeys(where.tolist(), error.faults[0])
            continue
        for name, array in values.items():
            array[where] = part.flat(name)
        phase[where] = part.flat("phase")
        faults |= {int(where[index]): fault for index, fault in part.faults.items()}
    return State((size,), {**values, "phase": phase}, None, faults)


def _counted(fluid: Fluid, state: State, other: State, reference: int) -> list[Deviation]:
    """Enthalpy and entropy as differences from the reference state, in parts of what they would spoil."""
    temperature = _array(state, "temperature")
    pairs = {name: [values - values[reference] for values in _both(state, other, name)] for name in DIFFERENCES}
    enthalpy, entropy = pairs["specific_enthalpy"][0], pairs["specific_entropy"][0]
    constant = fluid.gas_constant
    unit = np.where(np.isfinite(constant), constant, _array(state, "isobaric_heat_capacity"))
    scales = {
        "specific_enthalpy": np.fmax(
            np.fmax(np.abs(enthalpy), temperature * np.abs(entropy)), _FLOOR * unit * temperature
        ),
        "specific_entropy": np.fmax(np.fmax(np.abs(entropy), np.abs(enthalpy) / temperature), _FLOOR * unit),
    }
    found = []
    for name, (first, second) in pairs.items():
        scale = scales[name].copy()
        scale[reference] = np.nan  # nothing is compared there: both differences are zero
        found.append(_deviation(name, reference, first, second, scale))
    return found


def deviation(name: str, first: Array, second: Array, species: str | None = None) -> Deviation:
    """A property as it stands in two sources, relative to the first.

    Parameters
    ----------
    name : field of a State.
    first, second : values [SI unit of the property], shape (N,).
    species : gas of a mixture that they are of.
    """
    return _deviation(name, None, first, second, np.abs(first), species)


def _deviation(
    name: str, counted_from: int | None, first: Array, second: Array, scale: Array, species: str | None = None
) -> Deviation:
    difference = second - first
    with np.errstate(divide="ignore", invalid="ignore"):
        relative = np.where(scale > 0.0, difference / scale, np.nan)
    return Deviation(name, counted_from, first, second, difference, scale, relative, species)


def _remarks(state: State, other: State) -> dict[int, str]:
    """States that one source has as a liquid and the other as a vapour, or that the second has as two phases."""
    phases = zip(state.flat("phase"), other.flat("phase"), strict=True)
    return {
        index: f"The second source finds {'two phases' if theirs in _BOTH else theirs} where the first has {ours}."
        for index, (ours, theirs) in enumerate(phases)
        if (ours in _LIQUID and theirs in (*_GASEOUS, *_BOTH)) or (ours in _GASEOUS and theirs in (*_LIQUID, *_BOTH))
    }


def _both(state: State, other: State, name: str) -> tuple[Array, Array]:
    return _array(state, name), _array(other, name)


def _array(state: State, name: str) -> Array:
    return np.array(state.flat(name), dtype=float)

"""Random states of an independent compiled library (CoolProp), to compare the real fluids with.

States are drawn in (T, ρ), in (T, x) inside the dome, and evaluated once by the library's low-level state object. What
the library cannot evaluate is drawn again and counted.
"""

from __future__ import annotations

import json
from dataclasses import dataclass, fields
from typing import Any

import CoolProp.CoolProp as library
import numpy as np
from numpy.typing import NDArray

from reportgen.errors import InputError, RangeError
from reportgen.fluids import names, real_fluid
from reportgen.fluids.real.fluid import RealFluid

__all__ = [
    "NEAR_CRITICAL",
    "REGIONS",
    "Reference",
    "counterparts",
    "draw",
    "end_of_lines",
    "library_ideal_heat_capacity",
    "library_pressure_temperature",
    "library_saturation_is_worse",
    "shift",
]

Array = NDArray[Any]

#: |T/Tc − 1| below which a state counts as near critical.
NEAR_CRITICAL = 1e-3
REGIONS = ("vapour", "gas", "liquid", "compressed liquid", "supercritical", "near critical", "two-phase")

#: Place of the quality in a row of properties.
_QUALITY = 8
#: The library's phases in our words: above one critical value, a fluid is named by the other.
_PHASES = {
    library.iphase_gas: "vapour",
    library.iphase_supercritical_gas: "vapour",
    library.iphase_liquid: "liquid",
    library.iphase_supercritical_liquid: "liquid",
    library.iphase_supercritical: "supercritical",
    library.iphase_critical_point: "supercritical",
    library.iphase_twophase: "two-phase",
}


@dataclass
class Reference:
    """States by the library, arrays of one length; h, s, u on its own zeros until :func:`shift` is called."""

    region: Array
    temperature: Array
    pressure: Array
    density: Array
    specific_enthalpy: Array
    specific_entropy: Array
    specific_internal_energy: Array
    isobaric_heat_capacity: Array
    speed_of_sound: Array
    quality: Array
    superheat: Array
    subcooling: Array
    phase: Array

    def take(self, chosen: Array) -> Reference:
        """Some of the states."""
        return Reference(*(getattr(self, field.name)[chosen] for field in fields(self)))

    @property
    def size(self) -> int:
        """Number of states."""
        return int(self.temperature.size)


def counterparts() -> tuple[dict[str, str], list[str]]:
    """Canonical name here -> name in the library, and the library's fluids that are not carried here.

    A fluid is matched by the library's name or CAS number; molar mass and critical temperature must then agree.
    """
    found: dict[str, str] = {}
    missing = []
    for theirs in library.FluidsList():
        fluid = _carried(theirs)
        if fluid is None:
            missing.append(theirs)
            continue
        state = library.AbstractState("HEOS", theirs)
        critical = fluid.limits.critical_point
        assert critical is not None
        assert abs(state.molar_mass() / fluid.molar_mass - 1) < 1e-6, (theirs, fluid)
        assert abs(state.T_critical() / critical.temperature - 1) < 1e-2, (theirs, fluid)
        assert str(fluid.substance) not in found, (theirs, found)
        found[str(fluid.substance)] = theirs
    ordered = {name: found[name] for name in names() if name in found}
    return ordered, missing


def _carried(theirs: str) -> RealFluid | None:
    """The fluid here that goes by the library's name, or by its CAS number."""
    for name in (theirs, library.get_fluid_param_string(theirs, "CAS")):
        try:
            return real_fluid(name)
        except InputError:
            continue
    return None


def shift(fluid: RealFluid, state: Any, reference: Reference) -> None:
    """Bring the library's h, s and u to the zeros of the fluid, by one state: a gas at 1.2 Tc and a hundredth of ρc."""
    critical = fluid.limits.critical_point
    assert critical is not None
    assert critical.density is not None
    temperature = min(1.2 * critical.temperature, fluid.limits.maximum_temperature)
    here = fluid.at(temperature=temperature, density=0.01 * critical.density)
    state.update(library.DmassT_INPUTS, 0.01 * critical.density, temperature)
    enthalpy = state.hmass() - here.specific_enthalpy
    reference.specific_enthalpy -= enthalpy
    reference.specific_internal_energy -= enthalpy
    reference.specific_entropy -= state.smass() - here.specific_entropy


def draw(fluid: RealFluid, state: Any, counts: dict[str, int], seed: int) -> tuple[Reference, int]:
    """States in the regions asked for, by the library, and the number of its failures on the way.

    Parameters
    ----------
    fluid : the fluid here (tells only whether it is pseudo-pure).
    state : the library's state object of the same fluid.
    counts : number of states by region; as many as could be had after three rounds are returned.
    seed : of the random numbers; the same seed gives the same states.
    """
    random = np.random.default_rng(seed)
    triple_pressure = _saturation_pressure(state, max(state.Tmin(), state.Ttriple()), 1.0)
    rows: list[tuple[Any, ...]] = []
    failures = 0
    for region in REGIONS:
        wanted = counts.get(region, 0)
        for _ in range(3):
            if wanted <= 0:
                break
            for first, second, quality_given in _points(region, wanted, fluid.pseudo_pure, state, random):
                try:
                    row = _evaluate(state, first, second, quality_given, triple_pressure)
                    if fluid.pseudo_pure and 0 < row[_QUALITY] < 1:
                        continue  # a pseudo-pure fluid has no state between its lines
                    rows.append((region, *row))
                    wanted -= 1
                except ValueError:  # the library's one exception
                    failures += 1
    columns = list(zip(*rows, strict=True))
    return Reference(*(np.array(column) for column in columns)), failures


def _points(region: str, count: int, pseudo_pure: bool, state: Any, random: np.random.Generator) -> Any:
    """(T, ρ, False) or (T, x, True) of ``count`` random states of a region."""
    critical = state.T_critical()
    low, high, highest_pressure = max(state.Tmin(), state.Ttriple()), state.Tmax(), state.pmax()
    top_pressure = state.p_critical()
    near = critical * (1 - NEAR_CRITICAL)
    triple_pressure = _saturation_pressure(state, low, 1.0)
    part, depth = random.uniform(size=count), random.uniform(size=count)
    if region in ("compressed liquid", "supercritical") and highest_pressure <= top_pressure:
        return ()
    if region == "two-phase":
        quality = np.round(depth) if pseudo_pure else np.where(part < 0.1, np.round(depth), depth)
        return zip(random.uniform(low, near, count), quality, [True] * count, strict=True)
    if region == "near critical":
        side = np.where(part < 0.5, -1.0, 1.0)
        temperature = critical * (1 + side * 10 ** random.uniform(-6, -3, count))
        return zip(temperature, state.rhomass_critical() * (0.5 + depth), [False] * count, strict=True)
    if region in ("gas", "supercritical"):
        if high <= critical * (1 + NEAR_CRITICAL):
            return ()
        temperature = np.where(
            part < 0.5,
            random.uniform(critical * (1 + NEAR_CRITICAL), high, count),
            critical * (high / critical) ** np.maximum(random.uniform(size=count), NEAR_CRITICAL),
        )
    else:
        temperature = random.uniform(low, near, count)
    if region == "gas":
        lowest = np.where(part < 0.6, min(triple_pressure / top_pressure, 0.9), 1e-6)
        pressure = top_pressure * lowest**depth
    elif region in ("supercritical", "compressed liquid"):
        pressure = top_pressure * (highest_pressure / top_pressure) ** depth
    else:
        saturation = np.array([_saturation_pressure(state, t, 0.0 if region == "liquid" else 1.0) for t in temperature])
        if region == "vapour":
            # next to saturation, between the triple point and saturation, thin
            usual = np.where(part < 0.7, (triple_pressure / saturation) ** depth, 10 ** (-4 * depth))
            pressure = saturation * np.where(part < 0.2, 1 - 10 ** (-1 - 5 * depth), usual)
        else:
            pressure = saturation + (top_pressure - saturation) * 10 ** (-4 * depth)
    return _with_density(state, temperature, pressure)


def _with_density(state: Any, temperature: Array, pressure: Array) -> Any:
    """Points at the density that the library's own flash finds; only the number counts, right or wrong."""
    for t, p in zip(temperature, pressure, strict=True):
        try:
            state.update(library.PT_INPUTS, p, t)
            yield t, state.rhomass(), False
        except ValueError:
            yield t, np.nan, False


def _saturation_pressure(state: Any, temperature: float, quality: float) -> float:
    try:
        state.update(library.QT_INPUTS, quality, temperature)
    except ValueError:
        return float("nan")
    return float(state.p())


def _evaluate(
    state: Any, temperature: float, second: float, quality_given: bool, triple_pressure: float
) -> tuple[Any, ...]:
    """One row of a :class:`Reference`, without the region; distances from saturation only above the triple point."""
    quality = float("nan")
    if quality_given:
        state.update(library.QT_INPUTS, second, temperature)
        quality = second
    else:
        if not np.isfinite(second):
            raise ValueError("no density")
        state.update(library.DmassT_INPUTS, second, temperature)
        if state.phase() == library.iphase_twophase:
            quality = state.Q()
    pressure, density = state.p(), state.rhomass()
    if not (np.isfinite(pressure) and pressure > 0):
        raise ValueError("no pressure")
    caloric = state.hmass(), state.smass(), state.umass()
    phase = _PHASES[state.phase()]
    heat_capacity = speed = float("nan")
    if phase != "two-phase":
        heat_capacity, speed = state.cpmass(), state.speed_sound()
    elif quality in (0.0, 1.0):
        phase = "liquid" if quality == 0.0 else "vapour"
        read = state.saturated_liquid_keyed_output if quality == 0.0 else state.saturated_vapor_keyed_output
        heat_capacity, speed = read(library.iCpmass), read(library.ispeed_sound)
    superheat = subcooling = float("nan")
    if phase in ("liquid", "vapour") and triple_pressure <= pressure < state.p_critical():
        end = 1.0 if phase == "vapour" else 0.0
        state.update(library.PQ_INPUTS, pressure, end)
        distance = temperature - state.T()
        # a saturation temperature of the library can lie below its own lowest one
        known = state.T() >= max(state.Tmin(), state.Ttriple())
        if known and end and distance > 0:
            superheat = distance
        elif known and not end and distance < 0:
            subcooling = -distance
    return (temperature, pressure, density, *caloric, heat_capacity, speed, quality, superheat, subcooling, phase)


def imbalance(state: Any, temperature: float, pressure: float, liquid: float, vapour: float) -> float:
    """How far two densities are from equilibrium by the library's own equation: |g' − g''|/(RT) + |p″/p − 1|.

    Parameters
    ----------
    state : the library's state object. temperature, pressure : T [K] and the saturation pressure claimed [Pa].
    liquid, vapour : the saturated densities claimed [kg/m3].
    """
    rt = state.gas_constant() / state.molar_mass() * temperature
    state.specify_phase(library.iphase_gas)
    try:
        state.update(library.DmassT_INPUTS, liquid, temperature)
        gibbs = state.hmass() - temperature * state.smass()
        state.update(library.DmassT_INPUTS, vapour, temperature)
        gibbs -= state.hmass() - temperature * state.smass()
        return float(abs(gibbs) / rt + abs(state.p() / pressure - 1))
    finally:
        state.unspecify_phase()


def library_saturation_is_worse(fluid: RealFluid, state: Any, temperature: float) -> bool:
    """Whether the library's saturated densities and pressure at T [K] are further from equilibrium than ours, both by
    the library's equation; where its range begins below ours, at the lowest temperature of ours.
    """
    temperature = max(temperature, fluid.limits.minimum_temperature)
    try:
        state.update(library.QT_INPUTS, 0.5, temperature)
        densities = (
            state.saturated_liquid_keyed_output(library.iDmass),
            state.saturated_vapor_keyed_output(library.iDmass),
        )
        theirs = imbalance(state, temperature, state.p(), *densities)
        liquid, vapour = fluid.saturation(temperature=temperature)
    except (ValueError, RangeError):
        return False
    ours = imbalance(state, temperature, float(liquid.pressure), float(liquid.density), float(vapour.density))
    return ours < 1e-9 and ours < 0.1 * theirs and theirs > 1e-8


def end_of_lines(state: Any) -> float:
    """Temperature [K] above which the published lines of a pseudo-pure fluid are no longer states of its equation.

    The library fails there to find a saturated density at the published pressure; since the lines turn away before they
    end, five times the distance from critical counts. Infinite where it never fails.
    """
    critical = state.T_critical()
    for temperature in critical * (1 - np.geomspace(2e-2, 1e-5, 100)):
        for quality in (0.0, 1.0):
            try:
                state.update(library.QT_INPUTS, quality, temperature)
            except ValueError:
                return float(critical - 5 * (critical - temperature))
    return float("inf")


def library_ideal_heat_capacity(state: Any, temperature: Array) -> Array | None:
    """c_p of the ideal gas [J/(kg*K)] at T [K] by the polynomial in the library's data, or None where there is none."""
    equation = json.loads(library.get_fluid_param_string(state.fluid_names()[0], "JSON"))[0]["EOS"][0]
    total = np.zeros_like(temperature)
    for term in equation["alpha0"]:
        kind = term["type"].removeprefix("IdealGasHelmholtz")
        if kind == "CP0Constant":
            total += term["cp_over_R"]
        elif kind == "CP0PolyT":
            total += sum(c * temperature**t for c, t in zip(term["c"], term["t"], strict=True))
        elif kind not in ("Lead", "EnthalpyEntropyOffset") and not (kind == "LogTau" and term["a"] == -1):
            return None
    return total * equation["gas_constant"] / state.molar_mass()


def library_pressure_temperature(state: Any, reference: Reference) -> tuple[Reference, int]:
    """The same states by the library's own flash of pressure and temperature; NaN and counted where it fails."""
    found = reference.take(np.arange(reference.size))
    failures = 0
    offsets = None
    for index in range(reference.size):
        try:
            state.update(library.PT_INPUTS, reference.pressure[index], reference.temperature[index])
            values = (state.rhomass(), state.hmass(), state.smass(), state.umass(), state.cpmass(), state.speed_sound())
        except ValueError:
            failures += 1
            values = (np.nan,) * 6
        if offsets is None:
            state.update(library.DmassT_INPUTS, reference.density[index], reference.temperature[index])
            offsets = (
                state.hmass() - reference.specific_enthalpy[index],
                state.smass() - reference.specific_entropy[index],
            )
        found.density[index] = values[0]
        found.specific_enthalpy[index] = values[1] - offsets[0]
        found.specific_entropy[index] = values[2] - offsets[1]
        found.specific_internal_energy[index] = values[3] - offsets[0]
        found.isobaric_heat_capacity[index], found.speed_of_sound[index] = values[4], values[5]
    return found, failures

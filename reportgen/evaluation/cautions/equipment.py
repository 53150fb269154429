"""Cautions on equipment: wet suction, wet exhaust, and the limits its data sheet sets."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.balances import kinds
from reportgen.evaluation.cautions.entry import Finding, caution
from reportgen.evaluation.evaluated import Array, EvaluatedPlant
from reportgen.evaluation.sampling import ATMOSPHERE

if TYPE_CHECKING:
    from reportgen.spec.calculation import Limits

__all__ = ["liquid_at_compressor_suction", "maximum_pressure", "temperature_limits", "wet_turbine_exhaust"]

#: A quality closer to 1 than this is saturated vapour as far as a flash resolves it.
QUALITY_RESOLUTION = 1e-9
PRESSURE_SOURCE = "see ASME BPVC Section VIII and API 520, current edition"
#: Distance to a temperature limit below which a warning is raised [K].
TEMPERATURE_MARGIN = 10.0


@caution("T09", "stop", "Liquid at compressor suction", source="common practice")
def liquid_at_compressor_suction(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Quality below 1 at the inlet of a machine that compresses gas.

    For inlets of one phase the superheat is looked at instead: below 0, or not resolved from 0.
    Ideal gases have no liquid and are passed over.
    """
    for tag, kind in plant.kinds.items():
        if not _compresses_gas(kind):
            continue
        for state in plant.states_at(tag, "in"):
            text = f"Liquid at the suction of {tag} (state {state}): liquid slugs break compressors."
            if plant.phase(state) == "two-phase":
                yield Finding(
                    f"states.{state}.quality",
                    plant.samples(f"states.{state}.quality"),
                    1.0 - QUALITY_RESOLUTION,
                    "above",
                    text,
                    "ratio",
                    owner=f"equipment.{tag}",
                )
            elif plant.phase(state) in {"vapour", "liquid"}:
                yield Finding(
                    f"states.{state}.temperature",
                    plant.samples(f"states.{state}.temperature"),
                    _dew_temperature(plant, state),
                    "above",
                    text + " The limit is the saturation temperature at the same pressure.",
                    "temperature",
                    owner=f"equipment.{tag}",
                )


@caution("T10", "warning", "Wet turbine exhaust", source="common practice", limit=0.12, dimension="ratio")
def wet_turbine_exhaust(plant: EvaluatedPlant, limit: float) -> Iterator[Finding]:
    """Moisture 1 − x above 12 % at the outlet of a machine that delivers power."""
    for tag, kind in plant.kinds.items():
        if kinds()[kind].power_sign >= 0:
            continue
        for state in plant.states_at(tag, "out"):
            phase = plant.phase(state)
            if phase in {"two-phase", "liquid"}:
                quality = plant.samples(f"states.{state}.quality") if phase == "two-phase" else 0.0
                yield Finding(
                    f"states.{state}.quality",
                    1.0 - np.asarray(quality),
                    limit,
                    "below",
                    f"Moisture at the exhaust of {tag} (state {state}) erodes the last blades. "
                    "Value and limit are mass fractions of liquid, 1 − x.",
                    "ratio",
                    owner=f"equipment.{tag}",
                )


@caution(
    "T19",
    "warning",
    "Maximum allowable pressure",
    source=PRESSURE_SOURCE,
    limit=0.90,
    dimension="ratio",
)
def maximum_pressure(plant: EvaluatedPlant, limit: float) -> Iterator[Finding]:
    """Pressure above 90 % of the maximum allowable pressure (warning) or above the whole of it (stop).

    Both are taken as gauge pressures against the stated atmosphere, (p − p0)/(p_max − p0), because what strains a
    shell is the difference to its outside; an allowable pressure written as absolute is converted. The ratio to 90 %
    is what the adjustable limit moves.
    """
    for tag, state, table in _states_with_limits(plant):
        if table.pressure is None:
            continue
        atmosphere = plant.samples(ATMOSPHERE)
        pressure = plant.samples(f"states.{state}.pressure")
        allowable = plant.limit_samples(table.pressure)
        source = "; ".join(part for part in (table.source, PRESSURE_SOURCE) if part)
        yield Finding(
            f"states.{state}.pressure",
            pressure,
            allowable,
            "below",
            f"The pressure of state {state} is above the maximum allowable pressure of {tag}.",
            "pressure",
            owner=f"equipment.{tag}",
            severity="stop",
            source=source,
        )
        yield Finding(
            f"states.{state}.pressure",
            pressure,
            atmosphere + limit * (allowable - atmosphere),
            "below",
            f"The pressure of state {state} is above {100 * limit:g} % of the maximum allowable pressure of {tag} "
            "(both as gauge pressures): little is left between operation and relief. The limit shown is that part.",
            "pressure",
            owner=f"equipment.{tag}",
            source=source,
        )


@caution(
    "T32",
    "warning",
    "Temperature limits of the equipment",
    source="the data sheet of the equipment; margin of 10 K: common practice",
    limit=TEMPERATURE_MARGIN,
    dimension="temperature_difference",
)
def temperature_limits(plant: EvaluatedPlant, limit: float) -> Iterator[Finding]:
    """State at a port beyond the maximum or minimum temperature of the piece (stop), or within 10 K of it (warning).

    The pressure of the same table is the matter of T19.
    """
    for tag, state, table in _states_with_limits(plant):
        temperature = plant.samples(f"states.{state}.temperature")
        path = f"states.{state}.temperature"
        source = table.source or f"limits of {tag}"
        warned = f"{source}; margin of {limit:g} K: common practice"
        owner = f"equipment.{tag}"
        if table.temperature is not None:
            maximum = table.temperature.value
            text = f"State {state} is hotter than the maximum temperature of {tag}."
            yield Finding(
                path, temperature, maximum, "below", text, "temperature", owner=owner, severity="stop", source=source
            )
            text = f"State {state} comes within {limit:g} K of the maximum temperature of {tag}."
            yield Finding(path, temperature, maximum - limit, "below", text, "temperature", owner=owner, source=warned)
        if table.minimum_temperature is not None:
            minimum = table.minimum_temperature.value
            text = f"State {state} is colder than the minimum temperature of {tag}: brittle fracture."
            yield Finding(
                path, temperature, minimum, "above", text, "temperature", owner=owner, severity="stop", source=source
            )
            text = f"State {state} comes within {limit:g} K of the minimum temperature of {tag}."
            yield Finding(path, temperature, minimum + limit, "above", text, "temperature", owner=owner, source=warned)


def _compresses_gas(kind: str) -> bool:
    """Whether a kind absorbs power and compresses in small steps of density, which is what its polytropic efficiency
    says: kinds are told by what they declare, so that a new one needs no entry here."""
    declared = kinds()[kind]
    return declared.power_sign > 0 and any(item.name == "polytropic_efficiency" for item in declared.parameters)


def _states_with_limits(plant: EvaluatedPlant) -> Iterator[tuple[str, str, Limits]]:
    for tag, table in plant.limits.items():
        for state in plant.states_at(tag):
            yield tag, state, table


def _dew_temperature(plant: EvaluatedPlant, state: str) -> Array:
    """Saturation temperature at the pressure of a state [K], shape (N,); NaN above the critical pressure."""
    fluid: Any = plant.fluid_of(state)
    _, vapour = fluid.saturation(pressure=plant.samples(f"states.{state}.pressure"), errors="mask")
    return np.asarray(vapour.temperature, dtype=float)

"""Cautions on equipment: what it draws in, wet exhaust, and the limits its data sheet sets."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, NamedTuple

from reportgen.balances import kinds
from reportgen.evaluation.cautions.entry import Finding, caution
from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.evaluation.phases import saturation_temperature
from reportgen.evaluation.sampling import ATMOSPHERE
from reportgen.evaluation.vessels import minimum_metal_temperature

if TYPE_CHECKING:
    from reportgen.spec.calculation import Limits

__all__ = [
    "liquid_at_compressor_suction",
    "maximum_pressure",
    "temperature_limits",
    "vapour_at_pump_suction",
    "wet_turbine_exhaust",
]

#: A quality closer to 1 than this is saturated vapour as far as a flash resolves it.
QUALITY_RESOLUTION = 1e-9
#: Quality from which a two-phase outlet is an exhaust and no condensate.
MOSTLY_VAPOUR = 0.5
PRESSURE_SOURCE = "see ASME BPVC Section VIII and API 520, current edition"
#: Distance to a temperature limit below which a warning is raised [K].
TEMPERATURE_MARGIN = 10.0


@caution("T09", "stop", "Liquid at the suction of a compressor or fan", source="common practice")
def liquid_at_compressor_suction(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Quality below 1 at the inlet of a machine that is made for gas.

    For inlets of one phase the superheat is looked at instead: below 0, or not resolved from 0.
    Ideal gases have no liquid and are passed over.
    """
    for tag, kind in plant.kinds.items():
        if kinds()[kind].moves != "gas":
            continue
        for state in plant.states_at(tag, "in"):
            text = f"There ⟦is|may be⟧ liquid at the suction of {tag} (state {state}): liquid slugs break "
            text += f"{kinds()[kind].title.lower()}s."
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
                    saturation_temperature(plant, state),
                    "above",
                    text + " The limit is the saturation temperature at the same pressure.",
                    "temperature",
                    owner=f"equipment.{tag}",
                )


@caution("P08", "warning", "Vapour at pump suction", source="common practice")
def vapour_at_pump_suction(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Vapour at the inlet of a machine that pumps liquid: a quality above 0, superheat, or a gas altogether.

    For inlets of one phase the temperature is held against saturation at the same pressure.
    """
    for tag, kind in plant.kinds.items():
        if kinds()[kind].moves != "liquid":
            continue
        for state in plant.states_at(tag, "in"):
            text = f"There ⟦is|may be⟧ vapour at the suction of {tag} (state {state}): pumps lose their prime by it."
            owner, phase = f"equipment.{tag}", plant.phase(state)
            if phase in {"two-phase", "gas"}:
                path = f"states.{state}.quality"
                quality = plant.samples(path) if phase == "two-phase" else 1.0
                yield Finding(path, quality, QUALITY_RESOLUTION, "below", text, "ratio", owner=owner)
            elif phase in {"vapour", "liquid"}:
                path = f"states.{state}.temperature"
                text += " The limit is the saturation temperature at the same pressure."
                boiling = saturation_temperature(plant, state, "bubble")
                yield Finding(path, plant.samples(path), boiling, "below", text, "temperature", owner=owner)


@caution("T10", "warning", "Wet turbine exhaust", source="common practice", limit=0.12, dimension="ratio")
def wet_turbine_exhaust(plant: EvaluatedPlant, limit: float) -> Iterator[Finding]:
    """Moisture 1 − x above 12 % at an outlet of a piece that does deliver power.

    Looked at are outlets that are mostly vapour: what is mostly liquid is a condensate and drives no blades.
    """
    for tag, kind in plant.kinds.items():
        if kinds()[kind].power_sign >= 0 or not plant.samples(f"equipment.{tag}.power")[0] > 0.0:
            continue
        for state in plant.states_at(tag, "out"):
            path = f"states.{state}.quality"
            quality = plant.samples(path)
            if plant.phase(state) == "two-phase" and quality[0] >= MOSTLY_VAPOUR:
                yield Finding(
                    path,
                    1.0 - quality,
                    limit,
                    "below",
                    f"The exhaust of {tag} (state {state}) ⟦is|may be⟧ too wet: moisture erodes the last blades. "
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

    At the ports of a piece, before and after a process, in a vessel at both ends of its way.

    Both are taken as gauge pressures against the stated atmosphere, (p − p0)/(p_max − p0), because what strains a
    shell is the difference to its outside; an allowable pressure written as absolute is converted. The ratio to 90 %
    is what the adjustable limit moves.
    """
    for owner, tag, subject, table, path, _, _ in _places_with_limits(plant):
        if table.pressure is None:
            continue
        atmosphere = plant.samples(ATMOSPHERE)
        pressure = plant.samples(path)
        allowable = plant.limit_samples(table.pressure)
        source = "; ".join(part for part in (table.source, PRESSURE_SOURCE) if part)
        yield Finding(
            path,
            pressure,
            allowable,
            "below",
            f"The pressure of {subject} ⟦is|may be⟧ above the maximum allowable pressure of {tag}.",
            "pressure",
            owner=owner,
            severity="stop",
            source=source,
        )
        yield Finding(
            path,
            pressure,
            atmosphere + limit * (allowable - atmosphere),
            "below",
            f"The pressure of {subject} ⟦is|may be⟧ above {100 * limit:g} % of the maximum allowable pressure of "
            f"{tag} (both as gauge pressures): little is left between operation and relief. The limit shown is that "
            "part.",
            "pressure",
            owner=owner,
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
    """Temperature beyond the maximum or minimum (stop), or within 10 K of it (warning).

    At the ports of a piece, before and after a process, in a vessel on its whole way. The pressure of the same table is
    the matter of T19.
    """
    for owner, tag, subject, table, _, hottest, coldest in _places_with_limits(plant):
        subject = subject[:1].upper() + subject[1:]
        source = table.source or f"limits of {tag}"
        warned = f"{source}; margin of {limit:g} K: common practice"
        if table.temperature is not None:
            path, temperature = hottest, plant.samples(hottest)
            maximum = table.temperature.value
            text = f"{subject} ⟦is|may be⟧ hotter than the maximum temperature of {tag}."
            yield Finding(
                path, temperature, maximum, "below", text, "temperature", owner=owner, severity="stop", source=source
            )
            text = f"{subject} ⟦comes|may come⟧ within {limit:g} K of the maximum temperature of {tag}."
            yield Finding(path, temperature, maximum - limit, "below", text, "temperature", owner=owner, source=warned)
        if table.minimum_temperature is not None:
            path, temperature = coldest, plant.samples(coldest)
            minimum = table.minimum_temperature.value
            text = f"{subject} ⟦is|may be⟧ colder than the minimum temperature of {tag}: brittle fracture."
            yield Finding(
                path, temperature, minimum, "above", text, "temperature", owner=owner, severity="stop", source=source
            )
            text = f"{subject} ⟦comes|may come⟧ within {limit:g} K of the minimum temperature of {tag}."
            yield Finding(path, temperature, minimum + limit, "above", text, "temperature", owner=owner, source=warned)


class _Place(NamedTuple):
    """Something held against the limits of its owner: what it is called, and the paths of its extremes."""

    owner: str
    tag: str
    subject: str
    table: Limits
    pressure: str
    hottest: str
    coldest: str


def _places_with_limits(plant: EvaluatedPlant) -> Iterator[_Place]:
    """States at the ports of a piece, before and after a process, and of the content of a vessel on its whole way."""
    states = [
        (f"equipment.{tag}", tag, state, table) for tag, table in plant.limits.items() for state in plant.states_at(tag)
    ]
    for tag, process in plant.processes.items():
        if process.limits is not None:
            states += [(f"processes.{tag}", f"process {tag}", state, process.limits) for state in process.states]
    for tag, vessel in plant.vessels.items():
        if vessel.limits is not None and vessel.initial is not None:
            states.append((f"vessels.{tag}", tag, vessel.initial, vessel.limits))
    for owner, tag, state, table in states:
        temperature = f"states.{state}.temperature"
        yield _Place(owner, tag, f"state {state}", table, f"states.{state}.pressure", temperature, temperature)
    for tag, vessel in plant.vessels.items():
        if vessel.limits is not None:
            owner, (coldest, _) = f"vessels.{tag}", minimum_metal_temperature(plant, tag)
            subject = "the metal on its way" if vessel.metal else "the content on its way"
            ends = (f"{owner}.final_pressure", f"{owner}.maximum_temperature", coldest)
            yield _Place(owner, tag, subject, vessel.limits, *ends)

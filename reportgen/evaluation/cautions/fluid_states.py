"""Cautions on the states of fluids: freezing, the critical region, the range of the model."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

import numpy as np

from reportgen.evaluation.cautions.entry import Finding, caution
from reportgen.evaluation.evaluated import EvaluatedPlant

if TYPE_CHECKING:
    from reportgen.fluids.model import Fluid

__all__ = ["carbon_dioxide_freezes", "freezing_hint", "near_the_critical_point", "outside_the_model"]

SPAN_WAGNER = "Span and Wagner 1996, https://doi.org/10.1063/1.555991"
#: Triple point of carbon dioxide [K], [Pa]: Span and Wagner 1996, table 3 (from memory).
CO2_TRIPLE_TEMPERATURE = 216.592
CO2_TRIPLE_PRESSURE = 0.51795e6

CRITICAL_TEMPERATURE_BAND = 0.05
CRITICAL_PRESSURE_BAND = 0.10


@caution(
    "T02",
    "stop",
    "Dry ice",
    source=f"triple point, {SPAN_WAGNER}",
    limit=CO2_TRIPLE_TEMPERATURE,
    dimension="temperature",
)
def carbon_dioxide_freezes(plant: EvaluatedPlant, limit: float) -> Iterator[Finding]:
    """Carbon dioxide at or below its triple-point temperature, or liquid below its triple-point pressure.

    Looks at pure carbon dioxide only: in a mixture the frost point depends on the partial pressure.
    """
    for state in plant.state_fluids:
        if not _is_carbon_dioxide(plant.fluid_of(state)):
            continue
        yield Finding(
            f"states.{state}.temperature",
            plant.samples(f"states.{state}.temperature"),
            np.nextafter(limit, np.inf),  # freezing already at the triple point itself
            "above",
            f"Carbon dioxide in state {state} ⟦is|may be⟧ at or below its triple point: there dry ice forms and may "
            "plug lines and relief paths, and the property model is not valid.",
            "temperature",
        )
        if plant.phase(state) in {"liquid", "two-phase"}:
            yield Finding(
                f"states.{state}.pressure",
                plant.samples(f"states.{state}.pressure"),
                CO2_TRIPLE_PRESSURE,
                "above",
                f"Liquid carbon dioxide in state {state} ⟦is|may be⟧ below its triple-point pressure: there it turns "
                "to dry ice, which may plug lines and relief paths.",
                "pressure",
            )
    for tag, vessel in plant.vessels.items():
        if _is_carbon_dioxide(plant.fluid_of(vessel.states[0])):
            yield from _in_vessel(plant, tag, limit)


def _in_vessel(plant: EvaluatedPlant, tag: str, limit: float) -> Iterator[Finding]:
    """Carbon dioxide that freezes in a vessel on the way, or behind the valve through which it leaves."""
    owner = f"vessels.{tag}"
    path = f"{owner}.minimum_temperature"
    if plant.vessels[tag].path.stopped:
        text = (
            f"The content of {tag} comes to its triple point before its final pressure: dry ice forms in the vessel. "
        )
        text += "It is not followed further, and what would hold in the end is not reported."
        path = f"{owner}.followed_temperature"
        yield Finding(path, plant.samples(path), None, "above", text, "temperature")
    else:
        text = f"The content of {tag} ⟦comes|may come⟧ to its triple point on the way: dry ice forms in the vessel."
        yield Finding(path, plant.samples(path), np.nextafter(limit, np.inf), "above", text, "temperature")
    if plant.has(f"{owner}.back_pressure"):
        path = f"{owner}.back_pressure"
        text = f"What leaves {tag} ⟦expands|may expand⟧ below the triple-point pressure of carbon dioxide: dry ice may "
        text += "form in the valve and behind it, and plug the vent."
        yield Finding(path, plant.samples(path), CO2_TRIPLE_PRESSURE, "above", text, "pressure")


def freezing_hint(fluid: Fluid) -> str | None:
    """What to think of when the property model refuses a state of carbon dioxide; None for other fluids."""
    if not _is_carbon_dioxide(fluid):
        return None
    return (
        f"Caution T02: at or below {CO2_TRIPLE_TEMPERATURE} K carbon dioxide is dry ice, and below "
        f"{CO2_TRIPLE_PRESSURE / 1e5:.3f} bar it has no liquid."
    )


def _is_carbon_dioxide(fluid: Fluid) -> bool:
    return (fluid.substance or "").lower().replace(" ", "").replace("-", "") in {"co2", "carbondioxide"}


@caution("T22", "note", "Near the critical point", source="common practice", limit=1.0, dimension="ratio")
def near_the_critical_point(plant: EvaluatedPlant, limit: float) -> Iterator[Finding]:
    """State within 5 % of the critical temperature and 10 % of the critical pressure.

    Measured is the larger of |T/Tc − 1|/0.05 and |p/pc − 1|/0.10; the limit is 1.
    """
    for state in plant.state_fluids:
        critical = plant.fluid_of(state).limits.critical_point
        if critical is None:
            continue
        temperature = plant.samples(f"states.{state}.temperature") / critical.temperature
        pressure = plant.samples(f"states.{state}.pressure") / critical.pressure
        yield Finding(
            f"states.{state}.temperature",
            np.maximum(
                np.abs(temperature - 1.0) / CRITICAL_TEMPERATURE_BAND, np.abs(pressure - 1.0) / CRITICAL_PRESSURE_BAND
            ),
            limit,
            "above",
            f"State {state} ⟦lies|may lie⟧ near the critical point (T/Tc = {temperature[0]:.3f}, "
            f"p/pc = {pressure[0]:.3f}), where properties change steeply and small errors of temperature or pressure "
            "weigh heavily. The value is the distance from it in units of the band of 5 % in temperature and 10 % in "
            "pressure.",
            "ratio",
        )


@caution("T31", "stop", "Outside the property model", source="the publication of the property model")
def outside_the_model(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """State outside the temperature or pressure range of its property model, or within its uncertainty of the edge.

    Models refuse states outside their range outright (the calculation then stops with an error); this caution is for
    states beyond what the publication claims, where the equation is extrapolated, and for readings whose uncertainty
    reaches across an edge.
    """
    for state in plant.state_fluids:
        fluid = plant.fluid_of(state)
        limits = fluid.limits
        edges = (
            ("temperature", limits.minimum_temperature, "above", "minimum"),
            ("temperature", limits.published_maximum_temperature or limits.maximum_temperature, "below", "maximum"),
            ("pressure", limits.maximum_pressure, "below", "maximum"),
        )
        for name, edge, keep, word in edges:
            if np.isfinite(edge):
                yield Finding(
                    f"states.{state}.{name}",
                    plant.samples(f"states.{state}.{name}"),
                    edge,
                    "above" if keep == "above" else "below",
                    f"The {name} of state {state} ⟦is|may be⟧ at or beyond the {word} for which the model of "
                    f"{fluid.title} was published: properties there are extrapolated.",
                    name,
                    source="; ".join(fluid.sources),
                )

"""Cautions on results that satisfy every balance and still cannot be meant; the balances tell where to look."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

from reportgen.evaluation.cautions.entry import Finding, Severity, caution
from reportgen.evaluation.evaluated import EvaluatedPlant

if TYPE_CHECKING:
    from reportgen.balances.doubts import Doubt

__all__ = [
    "efficiency_above_one",
    "flow_against_its_direction",
    "heat_against_its_direction",
    "power_against_its_direction",
    "pressure_against_a_machine",
    "pressure_from_enthalpy",
    "pressure_rises_without_work",
    "temperatures_cross",
]


@caution("P01", "stop", "Flow against its direction", source="conservation of mass", undecided="beyond")
def flow_against_its_direction(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Negative mass flow of a stream."""
    yield from _doubted(plant, "negative-flow")


@caution("P02", "stop", "Temperatures cross", source="second law of thermodynamics", undecided="beyond")
def temperatures_cross(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Hot stream of an exchanger colder than the cold one, at an end or inside."""
    yield from _doubted(plant, "temperature-cross")


@caution("P03", "stop", "Pressure against the machine", source="common practice", undecided="beyond")
def pressure_against_a_machine(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Turbine that raises the pressure, compressor or pump that lowers it."""
    yield from _doubted(plant, "pressure-against-machine")


@caution("P04", "warning", "Pressure rises without work", source="common practice", undecided="beyond")
def pressure_rises_without_work(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Outlet pressure above the inlet pressure in a piece without power."""
    yield from _doubted(plant, "pressure-rises")


@caution("P05", "warning", "Power against its direction", source="first law of thermodynamics", undecided="beyond")
def power_against_its_direction(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Turbine that absorbs power, compressor or pump that delivers it."""
    yield from _doubted(plant, "power-against-machine")


@caution("P06", "warning", "Heat against its direction", source="first law of thermodynamics", undecided="beyond")
def heat_against_its_direction(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Negative duty of an exchanger, heater that cools, cooler that heats."""
    yield from _doubted(plant, "heat-against-direction")


@caution("P07", "warning", "Efficiency above 100 %", source="second law of thermodynamics", undecided="beyond")
def efficiency_above_one(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Isentropic, polytropic or exergetic efficiency above 1; a stop where no heat crosses the boundary.

    What makes one of them exceed 1 often does so with all; the first of a piece tells it.
    """
    told: set[str] = set()
    severities: dict[str, Severity] = {"efficiency-without-heat": "stop", "efficiency": "warning"}
    for key, severity in severities.items():
        for doubt in plant.doubts:
            if doubt.key == key and doubt.stands and doubt.owner not in told:
                told.add(doubt.owner)
                yield _finding(doubt, severity)


@caution("P10", "warning", "Pressure found from enthalpy", source="equation of state")
def pressure_from_enthalpy(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Pressure of a single phase found from temperature and enthalpy, which hardly depend on it."""
    yield from _doubted(plant, "pressure-from-enthalpy")


def _doubted(plant: EvaluatedPlant, key: str) -> Iterator[Finding]:
    yield from (_finding(doubt) for doubt in plant.doubts if doubt.key == key)


def _finding(doubt: Doubt, severity: Severity | None = None) -> Finding:
    return Finding(
        doubt.path,
        doubt.measured,
        doubt.limit,
        doubt.keep,
        doubt.text,
        None if doubt.measured is None else doubt.dimension,
        owner=doubt.owner,
        severity=severity,
    )

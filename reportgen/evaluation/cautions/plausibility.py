"""Cautions on results that satisfy every balance and still cannot be meant; the balances tell where to look."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

from reportgen.evaluation.cautions.entry import Caution, Finding, Severity, Undecided, caution
from reportgen.evaluation.evaluated import EvaluatedPlant

if TYPE_CHECKING:
    from reportgen.balances.doubts import Doubt

__all__ = [
    "choked_flow",
    "efficiency_above_one",
    "fire_without_air",
    "flow_against_its_direction",
    "heat_against_its_direction",
    "negative_amount",
    "power_against_its_direction",
    "pressure_against_a_machine",
    "pressure_from_enthalpy",
    "pressure_rises_without_work",
    "temperatures_cross",
    "unstated_heat",
]


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


def _passed_on(
    identifier: str, severity: Severity, gist: str, source: str, key: str, text: str, undecided: Undecided = "beyond"
) -> Caution:
    """The entry for doubts of one key, which the balances have put into words; ``text`` says when they arise."""

    def find(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
        yield from (_finding(doubt) for doubt in plant.doubts if doubt.key == key)

    find.__doc__ = text
    return caution(identifier, severity, gist, source=source, undecided=undecided)(find)


flow_against_its_direction = _passed_on(
    "P01",
    "stop",
    "Flow against its direction",
    "conservation of mass",
    "negative-flow",
    "Negative mass flow of a stream.",
)
negative_amount = _passed_on(
    "P18",
    "stop",
    "Negative amount",
    "conservation of mass",
    "negative-amount",
    "Negative mass of a content.",
)
temperatures_cross = _passed_on(
    "P02",
    "stop",
    "Temperatures cross",
    "second law of thermodynamics",
    "temperature-cross",
    "Hot stream of an exchanger colder than the cold one, at an end or inside.",
)
pressure_against_a_machine = _passed_on(
    "P03",
    "stop",
    "Pressure against the machine",
    "common practice",
    "pressure-against-machine",
    "Turbine that raises the pressure, compressor or pump that lowers it.",
)
pressure_rises_without_work = _passed_on(
    "P04",
    "warning",
    "Pressure rises without work",
    "common practice",
    "pressure-rises",
    "Outlet pressure above the inlet pressure in a piece without power.",
)
power_against_its_direction = _passed_on(
    "P05",
    "warning",
    "Power against its direction",
    "first law of thermodynamics",
    "power-against-machine",
    "Turbine that absorbs power, compressor or pump that delivers it.",
)
heat_against_its_direction = _passed_on(
    "P06",
    "warning",
    "Heat against its direction",
    "first law of thermodynamics",
    "heat-against-direction",
    "Negative duty of an exchanger, heater that cools, cooler that heats.",
)
fire_without_air = _passed_on(
    "P20",
    "warning",
    "Fire without air enough",
    "two air ratios give one flame temperature",
    "fire-without-air",
    "Excess air of a combustor found to be negative where a temperature or a heat was given in its place.",
)
unstated_heat = _passed_on(
    "P21",
    "warning",
    "Heat that nobody states",
    "first law of thermodynamics; 2 % of the power: common practice",
    "unstated-heat",
    "Heat above 2 % of the power of a machine that is adiabatic by custom, because the energy balance leaves it over; "
    "of a compressor heat taken up only, since it may be cooled.",
)
pressure_from_enthalpy = _passed_on(
    "P10",
    "warning",
    "Pressure found from enthalpy",
    "equation of state",
    "pressure-from-enthalpy",
    "Pressure of a single phase found from temperature and enthalpy, which hardly depend on it.",
    undecided="always",
)


choked_flow = _passed_on(
    "P19",
    "stop",
    "Choked flow",
    "conservation of mass and energy along an isentropic path",
    "choked",
    "Convergent nozzle whose outlet pressure lies below that at which it reaches the speed of sound.",
)


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

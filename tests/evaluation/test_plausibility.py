"""Cautions P01 to P13, P17: results that cannot be meant, what a calculation stands on; each tripped and just not."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from calculations import COMPRESSOR, HEAD, VALVE, evaluated
from handmade_plants import fluid, plant, samples

from reportgen.balances.doubts import Doubt
from reportgen.errors import InputError
from reportgen.evaluation.assumptions import AutomaticAssumption
from reportgen.evaluation.cautions import catalogue, raised
from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.record import Record


def summary(identifier: str, case: EvaluatedPlant) -> list[tuple[str, str, bool]]:
    found = [entry for entry in raised(catalogue(), case, {}) if entry["id"] == identifier]
    return [(entry["severity"], entry["path"], entry["decided"]) for entry in found]


def told(record: Record, identifier: str) -> list[tuple[str, str]]:
    return [(entry["severity"], entry["path"]) for entry in record.data["cautions"] if entry["id"] == identifier]


# What the balances doubt: P01 to P07, P10

DOUBTS = [
    ("P01", "negative-flow", "stop"),
    ("P02", "temperature-cross", "stop"),
    ("P03", "pressure-against-machine", "stop"),
    ("P04", "pressure-rises", "warning"),
    ("P05", "power-against-machine", "warning"),
    ("P06", "heat-against-direction", "warning"),
]


def doubtful(key: str, measured: Any, **more: Any) -> EvaluatedPlant:
    count = (np.size(measured) - 1) // 2
    doubt = Doubt(key, "equipment.M", "equipment.M.value", "It ⟦is|may be⟧ so.", np.atleast_1d(measured), **more)
    return plant({}, doubts=(doubt,), inputs=count)


@pytest.mark.parametrize(("identifier", "key", "severity"), DOUBTS)
def test_a_doubt_of_the_balances_is_raised(identifier: str, key: str, severity: str) -> None:
    path = "equipment.M.value"
    assert summary(identifier, doubtful(key, -0.1)) == [(severity, path, True)]
    assert summary(identifier, doubtful(key, 0.0)) == []
    # Beyond the limit but within the uncertainty: said as what may be, and no stop.
    assert summary(identifier, doubtful(key, samples(-0.1, 0.1))) == [("warning", path, False)]
    # On the good side, however close: nothing to say.
    assert summary(identifier, doubtful(key, samples(0.1, 0.1))) == []
    others = {entry["id"] for entry in raised(catalogue(), doubtful(key, -0.1), {})}
    assert others == {identifier}


@pytest.mark.parametrize(("key", "severity"), [("efficiency-without-heat", "stop"), ("efficiency", "warning")])
def test_p07(key: str, severity: str) -> None:
    path = "equipment.M.value"
    above = {"limit": 1.0, "keep": "below", "dimension": "efficiency"}
    assert summary("P07", doubtful(key, 1.01, **above)) == [(severity, path, True)]
    assert summary("P07", doubtful(key, 1.0, **above)) == []
    assert summary("P07", doubtful(key, samples(1.01, 0.01), **above)) == [("warning", path, False)]
    assert summary("P07", doubtful(key, samples(0.99, 0.01), **above)) == []


def test_p07_is_told_once_a_piece() -> None:
    measured = np.array([1.2])
    doubts = tuple(
        Doubt(key, "equipment.M", f"equipment.M.{name}", "Above.", measured, 1.0, "below", "efficiency")
        for key, name in (("efficiency", "exergetic"), ("efficiency-without-heat", "isentropic"))
    )
    assert summary("P07", plant({}, doubts=doubts)) == [("stop", "equipment.M.isentropic", True)]


def test_p10_has_no_number() -> None:
    doubt = Doubt("pressure-from-enthalpy", "states.1", "states.1.pressure", "The pressure is not given.")
    (entry,) = raised(catalogue(), plant({}, doubts=(doubt,)), {})
    assert (entry["id"], entry["severity"], entry["decided"]) == ("P10", "warning", True)
    assert all(entry[name] is None for name in ("value", "limit", "margin", "dimension", "expanded_uncertainty"))


def test_a_turbine_that_raises_the_pressure_stops_and_t01_says_why() -> None:
    text = COMPRESSOR.replace('"compressor"', '"turbine"')
    record = evaluated(text)
    assert told(record, "P03") == [("stop", "equipment.C.pressure_ratio")]
    assert told(record, "P05") == [("warning", "equipment.C.power")]
    (impossible,) = (entry for entry in record.data["cautions"] if entry["id"] == "T01")
    assert "Its pressure changes the wrong way from inlet to outlet" in impossible["text"]
    assert not {entry["id"] for entry in evaluated(COMPRESSOR).data["cautions"]} & {"P03", "P05", "P07", "T01"}


def test_a_cooled_compressor_above_its_isentropic_efficiency_is_told() -> None:
    outlet = 'pressure = "6.0 bar(a) ± 0.06 bar"\ntemperature = "{}"'
    text = COMPRESSOR.replace('isentropic_efficiency = "80 % ± 2 %"', 'power = "120 kW"')
    cooled = evaluated(text.replace('pressure = "6.0 bar(a) ± 0.06 bar"', outlet.format("190 degC")))
    assert told(cooled, "P07") == [("warning", "equipment.C.isentropic_efficiency")]
    assert cooled.value("equipment.C.heat") < 0.0
    warm = evaluated(text.replace('pressure = "6.0 bar(a) ± 0.06 bar"', outlet.format("240 degC")))
    assert told(warm, "P07") == []


# P08: vapour at pump suction


def pump(phase: str, temperature: Any = 350.0, kind: str = "pump", **more: Any) -> EvaluatedPlant:
    values = {"states.1.temperature": temperature, "states.1.pressure": 1e5, "states.1.phase": phase}
    values |= {f"states.1.{name}": value for name, value in more.items()}
    inputs = (np.size(temperature) - 1) // 2
    return plant(values, kinds={"M": kind}, connections={"M": [("inlet", "in", "1")]}, inputs=inputs)


def test_p08() -> None:
    """The stand-in boils at 373 K."""
    by_temperature = ("warning", "states.1.temperature", True)
    assert summary("P08", pump("vapour", 373.1)) == [by_temperature]
    assert summary("P08", pump("liquid", 372.9)) == []
    assert summary("P08", pump("liquid", samples(372.9, 0.1))) == [("warning", "states.1.temperature", False)]
    assert summary("P08", pump("two-phase", 373.0, quality=0.01)) == [("warning", "states.1.quality", True)]
    assert summary("P08", pump("two-phase", 373.0, quality=0.0)) == []
    assert summary("P08", pump("gas")) == [("warning", "states.1.quality", True)]
    assert summary("P08", pump("vapour", 400.0, kind="compressor")) == []
    assert summary("P08", pump("vapour", 400.0, kind="turbine")) == []
    assert summary("P08", pump("vapour", 400.0, kind="fan")) == []
    assert summary("P08", pump("gas", kind="fan")) == []


def test_p08_of_a_mixture_counts_from_its_bubble_line() -> None:
    """A mixture that boils from 350 K and is vapour at 373 K."""

    def summed(temperature: Any) -> list[tuple[str, str, bool]]:
        case = pump("liquid", temperature)
        return summary("P08", replace(case, fluids={"f": fluid(bubble_temperature=350.0)}))

    assert summed(349.9) == []
    assert summed(samples(349.9, 0.1)) == [("warning", "states.1.temperature", False)]


# P09: phase not resolved from saturation


def read(
    temperature: Any, given: tuple[str, ...] = ("temperature", "pressure"), phase: Any = "vapour"
) -> EvaluatedPlant:
    values = {"states.1.temperature": temperature, "states.1.pressure": 1e5, "states.1.phase": phase}
    inputs = (np.size(temperature) - 1) // 2
    return plant(values, inputs=inputs, given=tuple(f"states.1.{name}" for name in given))


def test_p09_readings_of_pressure_and_temperature() -> None:
    found = [("warning", "states.1.temperature", True)]
    assert summary("P09", read(373.05)) == found
    assert summary("P09", read(373.2)) == []
    assert summary("P09", read(372.95, phase="liquid")) == found
    assert summary("P09", read(samples(374.0, 0.6))) == found
    assert summary("P09", read(samples(374.0, 0.4))) == []
    assert summary("P09", read(373.05, given=("pressure",))) == []
    assert summary("P09", read(373.05, phase="gas")) == []


def test_p09_of_a_mixture_looks_at_the_nearer_line() -> None:
    def summed(temperature: float, phase: str) -> int:
        case = replace(read(temperature, phase=phase), fluids={"f": fluid(bubble_temperature=350.0)})
        return len(summary("P09", case))

    assert [summed(349.95, "liquid"), summed(349.8, "liquid")] == [1, 0]
    assert [summed(373.05, "vapour"), summed(373.2, "vapour")] == [1, 0]


def test_p09_phases_that_change_within_the_uncertainty() -> None:
    case = read(samples(380.0, 1.0), given=())
    assert summary("P09", case) == []
    for phases, count in (
        (["vapour", "vapour", "two-phase"], 1),
        (["liquid", "vapour", "liquid"], 1),
        (["vapour", "vapour", "supercritical"], 0),
    ):
        changed = replace(case, values={**case.values, "states.1.phase": np.array(phases)})
        assert len(summary("P09", changed)) == count


def test_p09_on_steam_read_at_saturation() -> None:
    text = VALVE.replace('model         = "ideal-gas"', 'model = "real-fluid"').replace('"air"\nheat', '"water"\nheat')
    text = text.replace('heat_capacity = "1.005 kJ/(kg*K)"', "").replace("8.0 bar(a) ± 0.1 bar", "10 bar(a) ± 0.1 bar")
    record = evaluated(
        text.replace('"air"', '"water"').replace("fluids.air", "fluids.water").replace("40 degC", "180.2 degC")
    )
    assert ("warning", "states.1.temperature") in told(record, "P09")
    basis = next(e["basis"] for e in record.data["assumptions"] if e["id"] == "streams.kinetic-energy")
    assert "m/s" not in basis


# P11: assumptions that fail


def assumed(verdict: str | None, better: bool) -> EvaluatedPlant:
    test = {
        "verdict": verdict,
        "path": "states.2.temperature",
        "difference": -12.0,
        "dimension": "temperature",
        "finding": "With the real fluid a result changes decisively; shown is the one that changes most.",
    }
    item = AutomaticAssumption("fluids.f.ideal-gas", "Fluid f is an ideal gas.", "b", (), test, better)
    return replace(plant({}), assumptions=(item,))


def test_p11_names_the_assumption_the_result_and_the_difference() -> None:
    (entry,) = raised(catalogue(), assumed("decisive", better=True), {})
    assert (entry["id"], entry["severity"], entry["path"]) == ("P11", "warning", "states.2.temperature")
    assert 'The assumption "Fluid f is an ideal gas." does not hold.' in entry["text"]
    assert "temperature of state 2" in entry["text"]
    assert (entry["value"], entry["dimension"], entry["limit"]) == (-12.0, "temperature_difference", None)
    assert summary("P11", assumed("noticeable", better=True)) == []
    assert summary("P11", assumed(None, better=True)) == []
    assert summary("P11", assumed("decisive", better=False)) == []


# P12: velocity on one side


def flowing(
    given: tuple[str, ...],
    kind: str = "throttling-valve",
    ports: tuple[str, str] = ("inlet", "outlet"),
    solved: tuple[str, ...] = (),
) -> Any:
    values: dict[str, Any] = {"states.1.pressure": 1e5, "states.2.pressure": 1e5} | dict.fromkeys(
        (*given, *solved), 30.0
    )
    connections = {"M": [(ports[0], "in", "1"), (ports[1], "out", "2")]}
    return plant(values, kinds={"M": kind}, connections=connections, given=given)


def test_p12() -> None:
    assert summary("P12", flowing(("states.1.velocity",))) == [("warning", "states.1.velocity", True)]
    assert summary("P12", flowing(("states.1.velocity", "states.2.velocity"))) == []
    assert summary("P12", flowing(("states.1.velocity",), solved=("states.2.velocity",))) == []
    assert summary("P12", flowing((), solved=("states.2.velocity",))) == []
    assert summary("P12", flowing(())) == []
    two_streams = flowing(("states.1.velocity",), "heat-exchanger", ("hot_inlet", "cold_outlet"))
    assert summary("P12", two_streams) == []


# P13: states and fluids that nothing uses


def test_p13() -> None:
    values = {"states.1.pressure": 1e5, "states.9.pressure": 1e5}
    used = {"kinds": {"M": "cooler"}, "connections": {"M": [("inlet", "in", "1")]}}
    both = {"f": fluid(), "spare": fluid()}
    assert summary("P13", plant(values, fluids=both, **used)) == [  # type: ignore[arg-type]
        ("note", "fluids.spare", True),
        ("note", "states.9", True),
    ]
    del values["states.9.pressure"]
    assert summary("P13", plant(values, **used)) == []  # type: ignore[arg-type]
    assert summary("P13", plant(values, fluids=both)) == []


# P17: one substance by two property models in one piece


JOINED = (
    HEAD
    + """
[fluids.steam]
model           = "real-fluid"
substance       = "water"
reference_state = "{}"

[fluids.vapour]
model     = "ideal-gas"
substance = "water"

[states.1]
fluid       = "steam"
pressure    = "2 bar"
temperature = "200 degC"
mass_flow   = "1 kg/s"

[states.2]
fluid    = "{}"
pressure = "1 bar"

[equipment.V]
kind   = "throttling-valve"
inlet  = "1"
outlet = "2"
"""
)


def test_p17() -> None:
    assert told(evaluated(JOINED.format("third-law", "vapour")), "P17") == [("note", "equipment.V")]
    assert told(evaluated(JOINED.format("third-law", "steam")), "P17") == []


def test_zeros_that_would_mix_are_an_error_at_the_line_of_the_equipment() -> None:
    with pytest.raises(InputError) as caught:
        evaluated(JOINED.format("published", "vapour"))
    (fault,) = caught.value.faults
    assert (fault.path, fault.line) == ("equipment.V", JOINED.splitlines().index("[equipment.V]") + 1)
    assert "published:water" in str(fault)
    assert "third-law" in str(fault)
    assert 'reference_state = "third-law" in [fluids.steam]' in str(fault)


# The headline results

EXCHANGER = (
    HEAD
    + """
[fluids.water]
model = "real-fluid"
substance = "water"

[states.1]
fluid = "water"
pressure = "5 bar(a)"
temperature = "90 degC"
mass_flow = "1 kg/s"

[states.2]
fluid = "water"
temperature = "50 degC"

[states.3]
fluid = "water"
pressure = "5 bar(a)"
temperature = "{}"

[states.4]
fluid = "water"
temperature = "60 degC"

[equipment.X]
kind = "heat-exchanger"
hot_inlet = "1"
hot_outlet = "2"
cold_inlet = "3"
cold_outlet = "4"
"""
)


def test_p02_at_the_cold_end_with_a_readable_margin() -> None:
    crossed = evaluated(EXCHANGER.format("51 degC"))
    assert told(crossed, "P02") == [("stop", "equipment.X.duty")]
    (entry,) = (entry for entry in crossed.data["cautions"] if entry["id"] == "P02")
    assert entry["value"] == pytest.approx(-1.0, abs=1e-6)
    assert entry["dimension"] == "temperature_difference"
    assert told(evaluated(EXCHANGER.format("49 degC")), "P02") == []


def test_duty_and_the_flow_that_was_solved_for_are_headlines() -> None:
    assert evaluated(EXCHANGER.format("20 degC")).data["summary"] == [
        "equipment.X.entropy_generation",
        "equipment.X.lost_work",
        "equipment.X.duty",
        "states.3.mass_flow",
    ]


def test_an_outlet_pressure_found_from_the_power_is_a_headline_and_inputs_are_none() -> None:
    text = COMPRESSOR.replace('pressure = "6.0 bar(a) ± 0.06 bar"', "").replace("80 % ± 2 %", '80 %"\npower = "120 kW')
    assert evaluated(text).data["summary"] == [
        "equipment.C.entropy_generation",
        "equipment.C.lost_work",
        "states.2.pressure",
    ]


def test_heat_of_a_cooler_is_a_headline_and_a_given_one_is_not() -> None:
    cooler = VALVE.replace("throttling-valve", "cooler").replace("2.0 bar(a) ± 0.05 bar", "7.9 bar(a)")
    solved = evaluated(cooler.replace('pressure = "7.9 bar(a)"', 'pressure = "7.9 bar(a)"\ntemperature = "20 degC"'))
    assert "equipment.V.heat" in solved.data["summary"]
    given = evaluated(cooler + 'heat = "-5 kW"\n')
    assert "equipment.V.heat" not in given.data["summary"]


# Residuals


def test_residuals_of_the_size_of_rounding_are_zero_everywhere() -> None:
    record = evaluated(EXCHANGER.format("20 degC"))
    left = {"mass_imbalance", "energy_imbalance", "closure"}
    shown = {path: entry["value"] for path, entry in record.values.items() if path.rsplit(".", 1)[-1] in left}
    assert set(shown.values()) == {0.0}
    assert {entry["value"] for entry in record.data["audits"]["closure"]} == {0.0}
    for path in shown:
        assert record.data["relations"][path]["latex_lines"][0][3].startswith("0\\,")

"""Cycles in the record: purpose, reservoirs, powers, and that they add up."""

from __future__ import annotations

import pytest

from reportgen.errors import InputError
from tests.evaluation.calculations import project
from tests.evaluation.heat_pump import HEAT_PUMP, heat_pump

TRAIN = '\n[trains.R]\ntitle = "Heat pump"\nequipment = ["K", "C", "V", "E"]\npurpose = "heating"\n'


def test_a_heat_pump_has_its_reservoirs_and_adds_up() -> None:
    record = heat_pump()
    (cycle,) = record.data["cycles"].values()
    assert cycle["purpose"] == "heating"
    assert cycle["closed"]
    heats = {entry["label"]: entry for entry in cycle["reservoirs"]}
    assert heats["Heater E"]["temperature"] == pytest.approx(278.15)
    water = heats["Heat exchanger C, stream 11 to 12"]
    assert water["states"] == ["11", "12"]
    assert water["value"] == pytest.approx(-record.value("equipment.C.duty"), rel=1e-11)
    # Lost in bearings and motor, it leaves at the temperature of the surroundings.
    assert heats["Compressor K, mechanical losses"]["temperature_path"] == "surroundings.temperature"
    assert cycle["imbalance"] == 0.0
    performance = record.value("total.coefficient_of_performance")
    assert performance == pytest.approx(record.value("equipment.C.duty") / record.value("equipment.K.shaft_power"))
    assert "total.coefficient_of_performance" in record.data["summary"]
    assert record.expanded_uncertainty("total.coefficient_of_performance") > 0.0


def test_one_train_tells_its_cycle_once() -> None:
    record = heat_pump(TRAIN)
    assert list(record.data["cycles"]) == ["trains.R"]
    assert "trains.R.coefficient_of_performance" in record.data["summary"]
    assert "total.coefficient_of_performance" not in record.data["summary"]


def test_a_purpose_that_is_none_is_told_with_those_there_are() -> None:
    with pytest.raises(InputError, match="cooling"):
        heat_pump.__wrapped__(TRAIN.replace('"heating"', '"freezing"'))


def test_criteria_and_text_may_name_the_figures_of_a_cycle() -> None:
    record = heat_pump.__wrapped__(
        '\n[criteria.C]\nvalue = "total.coefficient_of_performance"\nat_least = "2.5"\nbasis = "none"\n'
    )
    (criterion,) = record.data["criteria"]
    assert criterion["decision"] == "met"


def test_open_processes_have_no_cycle() -> None:
    assert project("letdown-station").data["cycles"] == {}
    assert "purpose" not in HEAT_PUMP

"""Second sources of states: what the record says of them, which cautions they raise, what is refused."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest
from calculations import HEAD, PROJECTS, evaluated, project
from handmade_plants import plant

from reportgen import spec
from reportgen.errors import InputError
from reportgen.evaluation import evaluate
from reportgen.evaluation.cautions import catalogue, raised
from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.fluids import library, real_fluid
from reportgen.record import Record

STEAM = (
    HEAD
    + """
[fluids.steam]
model     = "real-fluid"
substance = "water"
{fluid}

[states.1]
fluid       = "steam"
pressure    = "40 bar"
temperature = "400 degC"
mass_flow   = "1.5 kg/s"

[states.2]
fluid    = "steam"
pressure = "10 bar"
{state}

[equipment.V]
kind   = "throttling-valve"
inlet  = "1"
outlet = "2"
"""
)


THIRD = """
[states.3]
fluid    = "steam"
pressure = "0.1 bar"

[equipment.W]
kind   = "throttling-valve"
inlet  = "2"
outlet = "3"
"""


def steam(fluid: str = "", state: str = "") -> Record:
    return evaluated(STEAM.format(fluid=fluid, state=state))


def checks(record: Record, **chosen: object) -> list[dict[str, Any]]:
    return [entry for entry in record.data["cross_checks"] if all(entry[key] == value for key, value in chosen.items())]


def cautions(record: Record, identifier: str) -> list[dict[str, Any]]:
    return [entry for entry in record.data["cautions"] if entry["id"] == identifier]


def test_without_a_second_source_nothing_is_compared() -> None:
    assert steam().data["cross_checks"] == []


def test_the_library_agrees_with_every_property_of_every_state() -> None:
    record = steam('second_source = "library"')
    entries = checks(record)
    assert {entry["state"] for entry in entries} == {"1", "2"}
    assert {entry["verdict"] for entry in entries} == {"agrees"}
    assert {entry["threshold"] for entry in entries} == {1e-4}
    (density,) = checks(record, path="states.1.density")
    assert density["first"] == record.value("states.1.density")
    assert density["second"] == pytest.approx(density["first"], rel=1e-9)
    assert density["unit"] == "kg/m3"
    (enthalpy,) = checks(record, path="states.2.specific_enthalpy")
    assert enthalpy["counted_from"] == "1"
    assert enthalpy["first"] == pytest.approx(0.0, abs=1e-3)
    version = library.library_version()
    assert all(entry["second_sources"][0].startswith(f"CoolProp {version}, ") for entry in entries)
    assert all("10.1063/1.1461829" in entry["first_sources"][0] for entry in entries)
    assert record.data["provenance"]["packages"]["CoolProp"] == version
    assert cautions(record, "P14") == []


def test_a_difference_is_second_minus_first_with_its_part() -> None:
    record = steam('second_source = "ideal-gas"')
    water = real_fluid("water").at(pressure=40e5, temperature=673.15)
    ideal = 40e5 / (8.31446261815324 / 0.018015268 * 673.15)
    (density,) = checks(record, path="states.1.density")
    assert density["difference"] == pytest.approx(ideal - float(water.density), rel=1e-4)
    assert density["relative"] == pytest.approx(ideal / float(water.density) - 1.0, rel=1e-4)
    assert density["verdict"] == "differs"


def test_p14_tells_the_worst_of_each_state_and_how_many_more() -> None:
    record = steam('second_source = "ideal-gas"')
    found = cautions(record, "P14")
    assert [entry["severity"] for entry in found] == ["warning", "warning"]
    worst = max(checks(record, state="2"), key=lambda entry: abs(entry["relative"]))
    caution = next(entry for entry in found if entry["path"] == worst["path"])
    assert caution["value"] == pytest.approx(abs(worst["relative"]))
    assert caution["limit"] == 0.02
    assert "more of its properties differ" in caution["text"]


def test_p14_is_silent_within_the_tolerance_that_the_author_states() -> None:
    wide = 'second_source = { model = "ideal-gas", tolerance = "15 %" }'
    record = steam(wide)
    assert {entry["threshold"] for entry in checks(record)} == {0.15}
    assert cautions(record, "P14") == []
    assert cautions(steam('second_source = { model = "ideal-gas", tolerance = 0.1 }'), "P14") != []


def test_a_state_has_the_sources_of_its_fluid_its_own_or_none() -> None:
    record = steam('second_source = "ideal-gas"', 'second_source = ["library"]')
    assert {(entry["state"], entry["second_model"]) for entry in checks(record)} == {
        ("1", "ideal-gas"),
        ("2", "library"),
    }
    left_out = steam('second_source = "ideal-gas"', 'second_source = "none"')
    assert {entry["state"] for entry in checks(left_out)} == {"1"}


def test_a_single_state_has_no_differences_of_enthalpy() -> None:
    record = steam(state='second_source = "library"')
    compared = {entry["property"] for entry in checks(record, verdict="agrees")}
    assert compared == {"density", "isobaric_heat_capacity", "speed_of_sound"}
    left_out = checks(record, verdict="not compared")
    assert {entry["property"] for entry in left_out} == {"specific_enthalpy", "specific_entropy"}
    (told,) = cautions(record, "P15")
    assert told["text"].startswith("Specific enthalpy and specific entropy of state 2 of fluid steam were not checked")


def test_enthalpies_count_from_the_first_state_that_the_second_source_has() -> None:
    head = STEAM.format(fluid='second_source = "ideal-gas"', state="")
    record = evaluated(
        head.replace('pressure    = "40 bar"', 'pressure    = "1 bar"')
        .replace('temperature = "400 degC"', 'quality = "0.99"')
        .replace('pressure = "10 bar"', 'pressure = "0.2 bar"')
        + THIRD
    )
    assert {entry["state"] for entry in checks(record, verdict="not compared")} == {"1"}
    (enthalpy,) = checks(record, path="states.3.specific_enthalpy")
    assert enthalpy["counted_from"] == "2"


def test_a_library_that_is_not_installed_is_a_note_and_no_error(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(library, "library_version", lambda: None)
    record = steam('second_source = "library"')
    assert {entry["verdict"] for entry in checks(record)} == {"not compared"}
    (note,) = cautions(record, "P15")
    assert note["severity"] == "note"
    assert "States 1, 2 of fluid steam were not checked" in note["text"]
    assert 'pip install "reportgen[crosscheck]"' in note["text"]
    assert "CoolProp" not in record.data["provenance"]["packages"]


def test_p15_is_silent_where_everything_is_compared() -> None:
    assert cautions(steam('second_source = "library"'), "P15") == []


def test_a_source_that_there_is_not_is_refused_at_the_key_that_names_it() -> None:
    gas = HEAD + '[fluids.gas]\nmodel = "ideal-gas"\nbasis = "mole"\ncomposition = { N2 = 0.5, CO2 = 0.5 }\n'
    gas += '[states.1]\nfluid = "gas"\npressure = "2 bar"\ntemperature = "20 degC"\nsecond_source = "real-fluid"\n'
    with pytest.raises(InputError) as caught:
        evaluated(gas)
    (fault,) = caught.value.faults
    assert fault.path == "states.1.second_source"
    assert fault.line == gas.splitlines().index('second_source = "real-fluid"') + 1
    assert 'The second source "real-fluid" cannot be had for fluid gas: No real fluid' in fault.message
    with pytest.raises(InputError) as caught:
        evaluated(
            gas.replace("\n[states.1]", '\nsecond_source = "real-fluid"\n[states.1]').replace(
                'degC"\nsecond_source = "real-fluid"', 'degC"'
            )
        )
    assert caught.value.faults[0].path == "fluids.gas.second_source"


def test_states_outside_the_second_source_are_notes() -> None:
    record = evaluated(
        HEAD
        + '[fluids.gas]\nmodel = "ideal-gas"\nsubstance = "nitrogen"\nsecond_source = "statistical"\n'
        + '[states.1]\nfluid = "gas"\npressure = "2 bar"\ntemperature = "20 degC"\n'
        + '[states.2]\nfluid = "gas"\npressure = "2 bar"\ntemperature = "4000 K"\n'
    )
    only, note = cautions(record, "P15")
    assert only["text"].startswith("Specific enthalpy of state 1 of fluid gas was not checked")
    assert "State 2 of fluid gas was not checked" in note["text"]
    assert "from 20 K to 3000 K" in note["text"]
    assert checks(record, state="2")[0]["verdict"] == "not compared"
    left_out = {entry["property"] for entry in checks(record, state="1", verdict="not compared")}
    assert left_out == {"specific_enthalpy"}
    assert {entry["verdict"] for entry in checks(record, state="1")} == {"agrees", "not compared"}


def test_the_demonstration_checks_steam_by_another_equation_of_state() -> None:
    entries = checks(project("letdown-station"))
    assert {entry["second_title"] for entry in entries} == {"Water (Peng-Robinson)"}
    assert {entry["verdict"] for entry in entries} == {"agrees"}
    assert max(abs(entry["relative"]) for entry in entries) > 0.06  # c_p near saturation, by a cubic equation


def test_the_demonstration_checks_air_by_molecules_and_by_its_equation_of_state() -> None:
    record = project("instrument-air")
    assert {entry["second_model"] for entry in checks(record)} == {"statistical", "real-fluid"}
    assert {entry["verdict"] for entry in checks(record)} == {"agrees"}
    assert {entry["species"] for entry in checks(record, second_model="statistical")} == {None, "N2", "O2", "Ar"}
    assert max(abs(entry["relative"]) for entry in checks(record, property="specific_entropy", species="N2")) < 1e-4


@pytest.mark.parametrize("name", ["letdown-station", "instrument-air"])
def test_the_demonstrations_are_the_same_without_the_library(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(library, "library_version", lambda: None)
    assert evaluate(spec.read(PROJECTS / name), PROJECTS / name).to_json() == project(name).to_json()


# --- the cautions alone ---------------------------------------------------------------------------------------------


def entry(relative: float, **more: object) -> dict[str, Any]:
    return {
        "state": "1",
        "fluid": "f",
        "second_model": "cubic",
        "second_sources": ["a publication"],
        "path": "states.1.density",
        "property": "density",
        "species": None,
        "counted_from": None,
        "relative": relative,
        "threshold": 0.01,
        "verdict": "differs" if abs(relative) > 0.01 else "agrees",
        "remark": None,
        **more,
    }


@pytest.mark.parametrize(("relative", "count"), [(0.0101, 1), (-0.0101, 1), (0.0099, 0), (0.0, 0)])
def test_p14_trips_beyond_its_threshold(relative: float, count: int) -> None:
    case = plant({"states.1.density": 1.0})
    found = raised(catalogue(), _with(case, [entry(relative)]), {})
    assert len([item for item in found if item["id"] == "P14"]) == count


def test_p14_of_two_sources_stand_side_by_side() -> None:
    case = _with(plant({"states.1.density": 1.0}), [entry(0.02), entry(0.03, second_model="library")])
    found = [item for item in raised(catalogue(), case, {}) if item["id"] == "P14"]
    assert sorted(item["value"] for item in found) == [0.02, 0.03]


def _with(case: EvaluatedPlant, entries: list[dict[str, Any]]) -> EvaluatedPlant:
    return replace(case, cross_checks=entries)

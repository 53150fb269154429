"""Whole calculations: from the file to the Record."""

from __future__ import annotations

import json
import math
import os
import re
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from calculations import COMPRESSOR, HEAD, PROJECTS, RECYCLE, VALVE, evaluated, project

from reportgen.errors import InputError, SolutionError
from reportgen.names import DIMENSIONS, name_of
from reportgen.record import Record

RECORDS = ["letdown-station", "instrument-air", "nitrogen-blanketing"]


# What every record must hold


@pytest.mark.parametrize("name", RECORDS)
def test_every_value_comes_from_inputs_and_fluids(name: str) -> None:
    record = project(name)
    ends = {*record.inputs, *(f"fluids.{fluid}" for fluid in record.data["plant"]["fluids"])}
    for path, entry in record.values.items():
        chain = list(record.ancestors(path))
        for source in chain:
            assert source in record.values or source in ends, f"{path} comes from {source}, which is not in the record"
            if source in record.values and not record.values[source]["from"]:
                assert source in record.inputs, f"{path}: the chain breaks at {source}"
        if entry["value"] is not None and path not in record.inputs:
            assert ends.intersection(chain), f"{path} does not lead to an input or a fluid"
            assert path not in chain, f"{path} is computed from itself"


@pytest.mark.parametrize("name", RECORDS)
def test_every_value_has_its_entry_in_the_glossary_and_the_unit_of_its_dimension(name: str) -> None:
    record = project(name)
    for path, entry in record.values.items():
        last = path.rsplit(".", 1)[-1]
        if last == "phase":
            assert entry["value"] in {"liquid", "vapour", "two-phase", "supercritical", "gas", "solid"}
            continue
        closed = path.startswith(("processes.", "closed.")) or (
            path.startswith("total.") and not record.data["plant"]["equipment"]
        )
        assert entry["dimension"] == name_of(path, amounts=closed).dimension, path
        assert entry["unit"] == DIMENSIONS[entry["dimension"]], path
        assert (entry["value"] is None) == ("reason" in entry), path
        assert entry["standard_uncertainty"] is None or entry["standard_uncertainty"] > 0.0, path


@pytest.mark.parametrize("name", RECORDS)
def test_every_step_is_shown_in_the_order_of_solution(name: str) -> None:
    record = project(name)
    relations, order = record.data["relations"], record.data["solution_order"]
    assert sorted(order) == sorted(relations)
    known = {path for entry in record.inputs.values() for path in entry["applies_to"]}
    for key in order:
        step = relations[key]
        for path in step["uses"]:
            assert path in known or path.startswith(("fluids.", "assumptions.")), (
                f"{key} uses {path} before it is known"
            )
        known.update(step["solves"])
        for line in step["latex_lines"]:
            assert len(line) == 4
            assert all("⟦" not in part for part in line)
            assert line[0]
            assert line[1]
            assert line[2] or line[3]
    assert {entry["relation"] for entry in record.values.values()} - {None} <= set(relations)


@pytest.mark.parametrize("name", RECORDS)
def test_all_balances_close_and_accounts_balance(name: str) -> None:
    record = project(name)
    closures = record.data["audits"]["closure"]
    assert {"mass", "energy", "entropy"} == {entry["quantity"] for entry in closures}
    assert max(entry["relative"] for entry in closures) < 1e-10
    assert record.data["accounts"]
    for account in record.data["accounts"].values():
        generated = sum(line["value"] for line in account["generated"])
        assert account["sum_entering"] + generated == pytest.approx(account["sum_leaving"], rel=1e-10)


@pytest.mark.parametrize("name", RECORDS)
def test_the_record_is_plain_canonical_and_tells_nothing_of_the_machine(name: str) -> None:
    record = project(name)
    text = record.to_json().decode("utf-8")
    assert Record.load(record.to_json()) == record
    assert "NaN" not in text
    for secret in (str(PROJECTS.parent), str(Path.home()), os.uname().nodename if hasattr(os, "uname") else "?"):
        assert secret not in text


def test_same_bytes_under_another_hash_seed() -> None:
    code = (
        "import sys; from pathlib import Path; from reportgen import spec; from reportgen.evaluation import evaluate\n"
        "for name in sys.argv[1:]: sys.stdout.buffer.write(evaluate(spec.read(Path(name)), Path(name)).to_json())"
    )
    folders = [str(PROJECTS / name) for name in RECORDS]
    first, second = (
        subprocess.run(
            [sys.executable, "-c", code, *folders],
            check=True,
            capture_output=True,
            env={**os.environ, "PYTHONHASHSEED": seed},
        ).stdout
        for seed in ("1", "4242")
    )
    assert first == second
    assert json.loads(first[: first.index(b"\n}\n") + 3])["format"] == "reportgen-record/1"


def test_the_letdown_station() -> None:
    record = project("letdown-station")
    assert record.data["summary"][:2] == ["equipment.PRV-3.entropy_generation", "equipment.PRV-3.lost_work"]
    verdicts = {entry["owner"]: entry["verdict"] for entry in record.data["audits"]["second_law"]}
    assert set(verdicts) == {"equipment.PRV-3", "equipment.TG-2", "trains.valve", "trains.turbine", "total"}
    assert set(verdicts.values()) == {"generates entropy"}
    # The valve's limit is 350 degC and its inlet 400 degC: the demo means to trip this.
    assert [entry["id"] for entry in record.data["cautions"]][:1] == ["T32"]
    assert record.data["assumptions"][0]["status"] == "to be verified"
    assert record.value("total.lost_work") == record.value("equipment.PRV-3.lost_work")
    assert record.value("trains.turbine.power") == record.value("equipment.TG-2.power")


def test_a_loop_is_solved_together_and_every_number_of_it_is_shown() -> None:
    """Fresh air takes up all heat whatever recirculates: T4 = T1 + Q/(m cp), with its closed-form uncertainty."""
    record = evaluated(RECYCLE)
    rise = 50e3 / 1005.0
    assert record.value("states.4.temperature") == pytest.approx(293.15 + rise, rel=1e-9)
    expected = math.hypot(0.5, rise * 0.01, rise * 0.005)
    assert record.values["states.4.temperature"]["standard_uncertainty"] == pytest.approx(expected, rel=1e-4)
    together = [key for key in record.data["solution_order"] if key.startswith("simultaneous")]
    assert together
    for key in together:
        assert all("⟦" not in part for line in record.data["relations"][key]["latex_lines"] for part in line)
    assert record.value("equipment.S-1.entropy_generation") == 0.0
    assert record.values["equipment.S-1.entropy_generation"]["standard_uncertainty"] is None
    verdicts = {entry["owner"]: entry["verdict"] for entry in record.data["audits"]["second_law"]}
    assert verdicts["equipment.S-1"] == "not resolved from reversible"
    assert verdicts["equipment.M-1"] == "generates entropy"
    labels = {line["path"] for side in ("entering", "leaving") for line in record.data["accounts"]["total"][side]}
    assert labels == {"states.1.entropy_flow", "equipment.H-1.entropy_with_heat", "states.4.entropy_flow"}


def test_other_units_for_the_same_inputs_give_the_same_values() -> None:
    other = VALVE.replace("8.0 bar(a) ± 0.1 bar", "800 kPa ± 10 kPa").replace("40 degC ± 1 K", "313.15 K ± 1 K")
    other = other.replace("0.5 kg/s ± 2 %", "1800 kg/h ± 36 kg/h").replace("2.0 bar(a)", "0.2 MPa")
    first, second = evaluated(VALVE), evaluated(other)
    for path, entry in first.values.items():
        value = second.value(path)
        if isinstance(entry["value"], float):
            # Rounding of the conversions, on differences of entropies that are a tenth of their size.
            assert value == pytest.approx(entry["value"], rel=1e-9, abs=1e-9), path
        else:
            assert value == entry["value"], path


# Uncertainty


def test_throttled_ideal_gas_against_its_closed_form() -> None:
    """Sgen = m R ln(p1/p2): u² = Sgen² u_m²/m² + (m R)² (u1²/p1² + u2²/p2²), independent of temperature.

    The finite step of the program (± u) differs from the derivative of ln p by (u/p)²/3: 5e-5 for p2.
    """
    record = evaluated(VALVE)
    path = "equipment.V.entropy_generation"
    gas_constant = record.data["plant"]["fluids"]["air"]["gas_constant"]
    generation = 0.5 * gas_constant * math.log(4.0)
    assert record.value(path) == pytest.approx(generation, rel=1e-9)
    relative = (0.05 / 8.0, 0.025 / 2.0)
    expected = math.hypot(generation * 0.01, *(0.5 * gas_constant * part for part in relative))
    assert record.values[path]["standard_uncertainty"] == pytest.approx(expected, rel=1e-4)
    rows = {row["input"]: row for row in record.data["uncertainty_budget"][path]["contributions"]}
    assert set(rows) == {"states.1.mass_flow", "states.1.pressure", "states.2.pressure"}
    assert rows["states.1.pressure"]["sensitivity"] == pytest.approx(0.5 * gas_constant / 8e5, rel=1e-4)
    assert rows["states.2.pressure"]["sensitivity"] == pytest.approx(-0.5 * gas_constant / 2e5, rel=1e-4)


def test_a_correlation_in_the_file_counts() -> None:
    """With r = 1 between both pressures: (m R)² (u1/p1 − u2/p2)² stands in the place of the sum of squares."""
    pair = '{ between = ["states.1.pressure", "states.2.pressure"], coefficient = 1.0 }'
    text = VALVE + f"\n[uncertainty]\ncorrelations = [{pair}]\n"
    record = evaluated(text)
    gas_constant = record.data["plant"]["fluids"]["air"]["gas_constant"]
    generation = 0.5 * gas_constant * math.log(4.0)
    expected = math.hypot(generation * 0.01, 0.5 * gas_constant * (0.05 / 8.0 - 0.025 / 2.0))
    deviation = record.values["equipment.V.entropy_generation"]["standard_uncertainty"]
    assert deviation == pytest.approx(expected, rel=1e-3)


def test_the_atmosphere_moves_both_gauge_pressures() -> None:
    """dSgen/dp0 = m R (1/p1 − 1/p2) for two gauge pressures: one contribution, not none and not two."""
    text = VALVE.replace("8.0 bar(a) ± 0.1 bar", "6.987 bar(g)").replace("2.0 bar(a) ± 0.05 bar", "0.987 bar(g)")
    text = text.replace('"1.013 bar"', '"1.013 bar ± 0.02 bar"').replace("0.5 kg/s ± 2 %", "0.5 kg/s")
    record = evaluated(text)
    gas_constant = record.data["plant"]["fluids"]["air"]["gas_constant"]
    expected = 0.5 * gas_constant * abs(1 / 8e5 - 1 / 2e5) * 0.01e5
    deviation = record.values["equipment.V.entropy_generation"]["standard_uncertainty"]
    assert deviation == pytest.approx(expected, rel=1e-4)
    assert record.values["states.1.pressure"]["from"] == ["surroundings.pressure"]


def test_compressor_against_an_independent_monte_carlo() -> None:
    """Power and entropy generation of an ideal gas with constant cp, drawn with numpy from the same inputs."""
    record = evaluated(COMPRESSOR)
    gas_constant = record.data["plant"]["fluids"]["air"]["gas_constant"]
    random = np.random.default_rng(7)
    draws = 400_000
    p1 = random.normal(1.0e5, 0.005e5, draws)
    t1 = random.normal(293.15, 0.5, draws)
    flow = random.normal(0.5, 0.005, draws)
    p2 = random.normal(6.0e5, 0.03e5, draws)
    # "80 % ± 2 %": two percentage points at k = 2.
    efficiency = random.normal(
        0.80, float(record.inputs["equipment.C.isentropic_efficiency"]["standard_uncertainty"]), draws
    )
    heat_capacity = 1005.0
    rise = t1 * ((p2 / p1) ** (gas_constant / heat_capacity) - 1.0) / efficiency
    results = {
        "equipment.C.power": flow * heat_capacity * rise,
        "equipment.C.entropy_generation": flow * (heat_capacity * np.log1p(rise / t1) - gas_constant * np.log(p2 / p1)),
        "states.2.temperature": t1 + rise,
    }
    for path, sampled in results.items():
        # Relative uncertainties are near 1 %; curvature shifts the mean by parts of 1e-4, the draws by 1e-5.
        assert record.value(path) == pytest.approx(float(sampled.mean()), rel=1e-3)
        assert record.values[path]["standard_uncertainty"] == pytest.approx(float(sampled.std()), rel=0.01)


def test_an_efficiency_at_one_is_propagated_from_one_side() -> None:
    record = evaluated(COMPRESSOR.replace("80 % ± 2 %", "100 % ± 2 %"))
    assert record.values["equipment.C.power"]["standard_uncertainty"] > 0.0


STEAM = (
    VALVE.replace('model         = "ideal-gas"', 'model = "real-fluid"')
    .replace('substance     = "air"', 'substance = "water"')
    .replace('heat_capacity = "1.005 kJ/(kg*K)"', "")
)


def test_an_input_that_reaches_out_of_the_model_is_named() -> None:
    """A quality of 0.995 ± 0.02 (k = 2) exists at 0.985 and not at 1.005."""
    record = evaluated(STEAM.replace('temperature = "40 degC ± 1 K"', 'quality = "0.995 ± 0.02"'))
    told = [entry for entry in record.data["cautions"] if entry["id"] == "not evaluated"]
    assert [(entry["severity"], entry["path"]) for entry in told] == [("note", "states.1.quality")]
    assert "raised by its standard uncertainty there is no value for states 1, 2" in told[0]["text"]
    rows = record.data["uncertainty_budget"]["equipment.V.entropy_generation"]["contributions"]
    assert "states.1.quality" in {row["input"] for row in rows}


def test_an_uncertainty_that_leaves_the_model_on_both_sides_is_unknown_and_told() -> None:
    """Steam at 700 degC ± 2600 K: no model reaches to either side, and no result may claim an uncertainty."""
    record = evaluated(STEAM.replace("40 degC ± 1 K", "700 degC ± 2600 K"))
    told = [entry for entry in record.data["cautions"] if entry["id"] == "not evaluated"]
    assert [(entry["severity"], entry["path"]) for entry in told] == [("warning", "states.1.temperature")]
    assert record.values["equipment.V.entropy_generation"]["standard_uncertainty"] is None
    audit = {entry["owner"]: entry for entry in record.data["audits"]["second_law"]}
    assert audit["equipment.V"]["verdict"] == "not resolved from reversible"
    assert audit["equipment.V"]["expanded_uncertainty"] is None


# Second law, defaults, what is not evaluated


def test_data_against_the_second_law_stop_and_name_the_inputs() -> None:
    """Air compressed 1 to 6 bar leaves at 150 degC although the isentropic outlet is at 216 degC: impossible."""
    text = COMPRESSOR.replace('isentropic_efficiency = "80 % ± 2 %"', 'power = "66 kW ± 1 %"').replace(
        'pressure = "6.0 bar(a) ± 0.06 bar"', 'pressure = "6.0 bar(a) ± 0.06 bar"\ntemperature = "150 degC ± 1 K"'
    )
    text = text.replace("kind                  =", 'heat = "0 kW"\nkind =').replace('power = "66 kW ± 1 %"\n', "")
    record = evaluated(text)
    audit = {entry["owner"]: entry for entry in record.data["audits"]["second_law"]}
    assert audit["equipment.C"]["verdict"] == "impossible as given"
    stops = {entry["id"]: entry for entry in record.data["cautions"] if entry["severity"] == "stop"}
    assert list(stops) == ["P07", "T01"]
    assert audit["equipment.C"]["heaviest_inputs"][0] in stops["T01"]["text"]
    assert stops["T01"]["limit"] == 0.0
    assert "impossible as given" in audit["equipment.C"]["text"]


def test_heat_that_enters_without_a_boundary_temperature_is_told() -> None:
    text = HEAD + VALVE[len(HEAD) :].replace("throttling-valve", "heater").replace(
        'pressure = "2.0 bar(a) ± 0.05 bar"', 'pressure = "7.9 bar(a)"\ntemperature = "90 degC"'
    )
    record = evaluated(text)
    entry = record.values["equipment.V.entropy_generation"]
    assert entry["value"] is None
    assert "boundary_temperature" in entry["reason"]
    assert record.values["total.entropy_generation"]["value"] is None
    told = [caution for caution in record.data["cautions"] if caution["id"] == "not evaluated"]
    assert len(told) == 1
    assert "State equipment.V.boundary_temperature" in told[0]["text"]
    assert " W " not in told[0]["text"]
    assert record.values["equipment.V.entropy_with_heat"]["from"] == ["equipment.V.heat"]
    assert "equipment.V.entropy_with_heat" in entry["from"]
    assert not [figure for figure in record.data["figures"] if figure["kind"].endswith("bars")]
    stated = evaluated(text.replace('kind   = "heater"', 'kind   = "heater"\nboundary_temperature = "120 degC"'))
    assert stated.value("equipment.V.entropy_generation") > 0.0


def test_heat_that_leaves_is_assumed_at_the_surroundings_and_tested_at_the_fluid() -> None:
    text = HEAD + VALVE[len(HEAD) :].replace("throttling-valve", "cooler").replace(
        'pressure = "2.0 bar(a) ± 0.05 bar"', 'pressure = "7.9 bar(a)"\ntemperature = "20 degC"'
    )
    record = evaluated(text.replace("40 degC ± 1 K", "40 degC").replace("8.0 bar(a) ± 0.1 bar", "8.0 bar(a)"))
    found = [entry for entry in record.data["assumptions"] if entry["id"].endswith("leaves_at_surroundings")]
    assert len(found) == 1
    test = found[0]["test"]
    heat = record.value("equipment.V.heat")
    ambient, mean = 288.15, 303.15
    assert test["path"] == "equipment.V.entropy_generation"
    assert test["difference"] == pytest.approx(heat / ambient - heat / mean, rel=1e-9)
    assert test["verdict"] == "decisive"
    assert found[0]["status"] == "to be verified"
    assert record.data["assumptions"][0] == found[0]


def test_constant_heat_capacity_over_a_wide_range_is_decisive() -> None:
    """Air, pressure ratio 30, efficiency 0.85: common practice knows 880 K with constant, 850 K with variable cp."""
    text = COMPRESSOR.replace("6.0 bar(a) ± 0.06 bar", "30 bar(a)").replace("80 % ± 2 %", "85 %")
    text = text.replace("20 degC ± 1 K", "26.85 degC").replace("1.0 bar(a) ± 0.01 bar", "1.0 bar(a)")
    record = evaluated(text)
    test = next(e["test"] for e in record.data["assumptions"] if e["id"] == "fluids.air.constant-heat-capacity")
    changed = {entry["path"]: entry for entry in test["results"]}
    assert changed["states.2.temperature"]["model_value"] == pytest.approx(880.0, abs=5.0)
    assert changed["states.2.temperature"]["other_value"] == pytest.approx(850.0, abs=5.0)
    assert test["verdict"] == "decisive"


def test_ideal_gas_carbon_dioxide_at_high_pressure_is_decisive() -> None:
    """Throttled from 60 bar the real gas cools by tens of kelvins, the ideal gas not at all."""
    text = VALVE.replace('substance     = "air"', 'substance = "CO2"').replace('heat_capacity = "1.005 kJ/(kg*K)"', "")
    text = text.replace("8.0 bar(a) ± 0.1 bar", "60 bar(a)").replace("2.0 bar(a) ± 0.05 bar", "20 bar(a)")
    record = evaluated(text)
    test = next(e["test"] for e in record.data["assumptions"] if e["id"] == "fluids.air.ideal-gas")
    assert test["verdict"] == "decisive"
    changed = {entry["path"]: entry for entry in test["results"]}
    assert changed["states.2.temperature"]["difference"] < -20.0
    assert "beyond the 0.02" in test["finding"]


def test_states_alone_are_results() -> None:
    record = evaluated(VALVE[: VALVE.index("[equipment.V]")].replace("± 0.05 bar", '"\ntemperature = "20 degC'))
    assert record.data["summary"] == [
        "states.1.temperature",
        "states.1.specific_entropy",
        "states.2.temperature",
        "states.2.specific_entropy",
    ]
    assert record.data["audits"] == {"closure": [], "second_law": []}
    assert record.data["accounts"] == {}


# Criteria, adjustments, errors with their place


@pytest.mark.parametrize(
    ("limit", "decision"),
    [
        ('at_most = "70 kW"', "met"),
        ('at_most = "57 kW"', "not decided"),
        ('at_most = "40 kW"', "not met"),
        ('at_least = "40 kW"', "met"),
    ],
)
def test_criteria_are_decided_within_the_uncertainty(limit: str, decision: str) -> None:
    record = evaluated(VALVE + f'\n[criteria.K]\nvalue = "equipment.V.lost_work"\n{limit}\nbasis = "none"\n')
    (entry,) = record.data["criteria"]
    assert entry["value"] == pytest.approx(57.33e3, rel=1e-3)
    assert entry["decision"] == decision
    assert entry["limit_text"] in limit


def test_an_unknown_criterion_path_is_an_error_with_its_line() -> None:
    with pytest.raises(InputError) as caught:
        evaluated(VALVE + '\n[criteria.K]\nvalue = "equipment.V.lost_wurk"\nat_most = "20 kW"\nbasis = "none"\n')
    assert all(fault.line is not None for fault in caught.value.faults)


def test_a_criterion_on_a_phase_is_an_error() -> None:
    with pytest.raises(InputError, match=r"states\.1\.phase"):
        evaluated(VALVE + '\n[criteria.K]\nvalue = "states.1.phase"\nat_most = "20 kW"\nbasis = "none"\n')


def test_an_unsolvable_file_tells_file_and_line() -> None:
    with pytest.raises(SolutionError) as caught:
        evaluated(VALVE.replace('pressure = "2.0 bar(a) ± 0.05 bar"', ""))
    assert all(fault.file == "calculation.toml" and fault.line for fault in caught.value.faults)


def test_carbon_dioxide_below_its_triple_point_is_refused_with_the_reason() -> None:
    text = VALVE.replace('model         = "ideal-gas"', 'model = "real-fluid"').replace(
        'substance     = "air"', 'substance = "CO2"'
    )
    text = text.replace('heat_capacity = "1.005 kJ/(kg*K)"', "").replace("40 degC ± 1 K", "-60 degC")
    with pytest.raises(SolutionError) as caught:
        evaluated(text)
    assert "T02" in str(caught.value)


def test_us_customary_formulae_keep_absolute_temperatures() -> None:
    record = evaluated(VALVE.replace('units    = "SI"', 'units    = "US"'))
    lines = record.data["relations"]["equipment.V.lost_work"]["latex_lines"]
    assert r"518.67\,\text{°R}" in lines[0][2]
    assert r"\mathrm{hp}" in lines[0][3]


# Figures


def test_the_dome_is_closed_at_the_critical_point_and_smooth() -> None:
    record = project("letdown-station")
    figure = next(entry for entry in record.data["figures"] if entry["kind"] == "temperature-entropy")
    critical = record.data["plant"]["fluids"]["steam"]["limits"]["critical_point"]
    entropy, temperature = np.array(figure["dome"]["entropy"]), np.array(figure["dome"]["temperature"])
    top = int(np.argmax(temperature))
    assert temperature[top] == pytest.approx(critical["temperature"], rel=1e-9)
    assert len(temperature) >= 100
    assert np.all(np.diff(temperature[: top + 1]) > 0.0)
    assert np.all(np.diff(temperature[top:]) < 0.0)
    assert np.all(np.diff(entropy) > 0.0)
    width, height = np.ptp(entropy), np.ptp(temperature)
    assert np.max(np.hypot(np.diff(entropy) / width, np.diff(temperature) / height)) < 0.05


def test_process_paths_join_their_states_and_are_curved() -> None:
    record = project("letdown-station")
    figure = next(entry for entry in record.data["figures"] if entry["kind"] == "temperature-entropy")
    points = {point["state"]: (point["entropy"], point["temperature"]) for point in figure["points"]}
    paths = {path["equipment"]: path for path in figure["paths"]}
    for tag, outlet in (("PRV-3", "2"), ("TG-2", "3")):
        path = paths[tag]
        ends = [(path["entropy"][index], path["temperature"][index]) for index in (0, -1)]
        assert ends[0] == pytest.approx(points["1"], rel=1e-6)
        assert ends[1] == pytest.approx(points[outlet], rel=1e-6)
        assert len(path["entropy"]) >= 60
    entropy, temperature = np.array(paths["PRV-3"]["entropy"]), np.array(paths["PRV-3"]["temperature"])
    chord = np.interp(entropy, entropy[[0, -1]], temperature[[0, -1]])
    assert np.max(np.abs(temperature - chord)) > 0.5
    assert {path["pressure"] for path in figure["isobars"]} == {
        record.value("states.1.pressure"),
        record.value("states.2.pressure"),
    }


def test_bars_repeat_the_values() -> None:
    record = project("instrument-air")
    bars = next(entry for entry in record.data["figures"] if entry["kind"] == "lost-work-bars")["bars"]
    assert {bar["label"]: bar["value"] for bar in bars} == {
        tag: record.value(f"equipment.{tag}.lost_work") for tag in ("C-210A", "E-210", "C-210B", "E-211")
    }


def test_a_mixture_goes_by_the_name_the_file_gives_it() -> None:
    record = project("instrument-air")
    told = json.dumps([record.data[name] for name in ("figures", "assumptions", "relations", "plant")])
    assert "Gas mixture (" not in told
    assert record.data["plant"]["fluids"]["air"]["title"] == "air (gas mixture)"
    titles = [figure["title"] for figure in record.data["figures"] if figure["kind"] == "temperature-entropy"]
    assert titles == ["Temperature and entropy of air (gas mixture)", "Temperature and entropy of water"]
    assert any(entry["text"] == "Fluid air (gas mixture) is an ideal gas." for entry in record.data["assumptions"])


@pytest.mark.parametrize("name", ["letdown-station", "instrument-air"])
def test_captions_are_whole_sentences(name: str) -> None:
    for figure in project(name).data["figures"]:
        assert figure["caption"].endswith(".")
        assert not re.search(r"[.;:]\s*[.;:]|: [^.]*: ", figure["caption"]), figure["caption"]


def test_a_power_says_which_way_it_is_positive() -> None:
    air, steam = project("instrument-air").values, project("letdown-station").values
    assert air["equipment.C-210A.power"]["direction"] == air["total.power"]["direction"] == "absorbed"
    assert steam["equipment.TG-2.power"]["direction"] == steam["trains.turbine.power"]["direction"] == "delivered"
    assert not any("direction" in entry for path, entry in air.items() if not path.endswith(".power"))

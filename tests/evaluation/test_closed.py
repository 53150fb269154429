"""Closed systems from the file to the Record: uncertainty, audits, cautions, accounts, figures, traces."""

from __future__ import annotations

import math

import numpy as np
import pytest
from calculations import HEAD, evaluated, project

from reportgen.errors import InputError, SolutionError
from reportgen.names import DIMENSIONS

AIR = """
[fluids.air]
model         = "ideal-gas"
substance     = "air"
heat_capacity = "1.005 kJ/(kg*K)"
"""
STATES = """
[states.1]
fluid       = "air"
pressure    = "2 bar ± 0.04 bar"
temperature = "300 K ± 2 K"
volume      = "1.5 m3 ± 1 %"

[states.2]
fluid  = "air"
{end}
"""
R, CP = 287.05, 1005.0


def compression(process: str, end: str = 'pressure = "8 bar"', more: str = "") -> str:
    return HEAD + AIR + STATES.format(end=end) + f'[processes.P]\nfrom = "1"\nto = "2"\n{process}\n{more}'


ISOTHERMAL = compression('kind = "isothermal"\nboundary_temperature = "295 K"')


def test_values_have_the_dimensions_of_amounts() -> None:
    record = evaluated(ISOTHERMAL)
    expected = {
        "heat": "energy",
        "work": "energy",
        "entropy_change": "entropy",
        "entropy_with_heat": "entropy",
        "entropy_generation": "entropy",
        "lost_work": "energy",
        "energy_imbalance": "energy",
        "mass_imbalance": "mass",
    }
    for owner in ("processes.P", "total"):
        for name, dimension in expected.items():
            entry = record.values[f"{owner}.{name}"]
            assert (entry["dimension"], entry["unit"]) == (dimension, DIMENSIONS[dimension]), (owner, name)
    assert record.values["total.closure"]["unit"] == "J/K"
    assert record.values["total.heat"]["symbol"] == r"Q_{\mathrm{total}}"
    assert record.values["states.1.entropy"]["dimension"] == "entropy"
    assert record.data["plant"]["processes"]["P"]["kind_title"] == "Isothermal change"


def test_uncertainty_of_the_work_against_its_closed_form() -> None:
    """W = p V ln(p_a/p_b): u² from the derivatives by p_a and V; the temperature does not matter."""
    record = evaluated(ISOTHERMAL)
    pressure, volume, ratio = 2e5, 1.5, math.log(2.0 / 8.0)
    by_pressure = volume * (ratio + 1.0) * 0.02e5
    by_volume = pressure * ratio * 0.005 * 1.5
    entry = record.values["processes.P.work"]
    assert entry["value"] == pytest.approx(pressure * volume * ratio, rel=1e-9)
    assert entry["standard_uncertainty"] == pytest.approx(math.hypot(by_pressure, by_volume), rel=1e-3)


def test_every_number_leads_to_inputs_and_fluids() -> None:
    record = evaluated(ISOTHERMAL)
    found = set(record.ancestors("total.lost_work"))
    assert {"states.1.pressure", "states.1.volume", "states.2.pressure", "fluids.air"} <= found
    assert {"processes.P.boundary_temperature", "surroundings.temperature", "processes.P.heat"} <= found


def test_the_account_balances_and_is_in_joule_per_kelvin() -> None:
    account = evaluated(ISOTHERMAL).data["accounts"]["total"]
    assert account["dimension"] == "entropy"
    generated = sum(line["value"] for line in account["generated"])
    assert account["sum_entering"] + generated == pytest.approx(account["sum_leaving"], rel=1e-9)
    assert [line["path"] for line in account["entering"]] == ["states.1.entropy"]
    assert [line["path"] for line in account["leaving"]] == ["states.2.entropy", "processes.P.entropy_with_heat"]


def test_audits_close_every_balance_on_their_own() -> None:
    entries = evaluated(ISOTHERMAL).data["audits"]["closure"]
    told = {(entry["owner"], entry["quantity"], entry["unit"]) for entry in entries}
    units = (("mass", "kg"), ("energy", "J"), ("entropy", "J/K"))
    assert told == {(owner, quantity, unit) for owner in ("processes.P", "total") for quantity, unit in units}
    assert all(entry["relative"] < 1e-9 for entry in entries)
    second = {entry["owner"]: entry["verdict"] for entry in evaluated(ISOTHERMAL).data["audits"]["second_law"]}
    assert second == {"processes.P": "generates entropy", "total": "generates entropy"}


def test_heat_over_a_boundary_that_is_too_hot_stops() -> None:
    """Heat cannot leave a gas of 300 K over a boundary of 320 K: T01."""
    record = evaluated(compression('kind = "isothermal"\nboundary_temperature = "320 K"'))
    (caution,) = [entry for entry in record.data["cautions"] if entry["id"] == "T01"]
    assert (caution["severity"], caution["owner"], caution["dimension"]) == ("stop", "processes.P", "entropy")
    assert caution["value"] < 0.0
    verdicts = {entry["verdict"] for entry in record.data["audits"]["second_law"]}
    assert verdicts == {"impossible as given"}


def test_heat_that_enters_without_a_boundary_is_told() -> None:
    record = evaluated(compression('kind = "isothermal"', 'pressure = "1 bar"'))
    assert record.value("processes.P.entropy_generation") is None
    assert "boundary_temperature is not stated" in record.values["total.entropy_generation"]["reason"]
    (caution,) = [entry for entry in record.data["cautions"] if entry["id"] == "not evaluated"]
    assert "State processes.P.boundary_temperature." in caution["text"]
    assert record.data["accounts"]["total"]["complete"] is False


def test_heat_that_leaves_is_assumed_at_the_surroundings_and_tested_at_the_content() -> None:
    record = evaluated(compression('kind = "isothermal"'))
    (entry,) = [item for item in record.data["assumptions"] if "leaves_at_surroundings" in item["id"]]
    assert entry["test"]["verdict"] == "decisive"
    assert "mean temperature of the content" in entry["test"]["finding"]
    by_path = {item["path"]: item["other_value"] for item in entry["test"]["results"]}
    assert by_path["processes.P.entropy_generation"] == pytest.approx(
        0.0, abs=1e-6
    )  # reversible at its own temperature


def test_what_the_kind_takes_for_granted_and_what_it_rules_out_are_listed() -> None:
    record = evaluated(
        compression('kind = "isochoric"', 'temperature = "350 K"', 'heat_ports = [{ temperature = "400 K" }]')
    )
    assert record.inputs["processes.P.work"]["source"].endswith("the volume stays the same, so no work is done.")
    assert record.inputs["processes.P.work"]["status"] == "by default"
    listed = [entry for entry in evaluated(ISOTHERMAL).data["assumptions"] if entry["id"] == "processes.P.quasi-static"]
    assert listed[0]["basis"] == 'what "isothermal" means'


PATHS = {
    'kind = "isothermal"': lambda t, s: np.ptp(t) < 1e-9,
    'kind = "polytropic"\npolytropic_index = "1.2"': None,
    'kind = "isentropic"': lambda t, s: np.ptp(s) < 1e-9 * abs(s[0]),
}


@pytest.mark.parametrize("process", PATHS)
def test_the_figure_shows_the_way_of_the_process(process: str) -> None:
    figures = evaluated(compression(process)).data["figures"]
    (figure,) = [entry for entry in figures if entry["kind"] == "temperature-entropy"]
    (path,) = figure["paths"]
    temperature, entropy = np.array(path["temperature"]), np.array(path["entropy"])
    ends = [(point["temperature"], point["entropy"]) for point in figure["points"]]
    assert (temperature[0], entropy[0]) == pytest.approx(ends[0], rel=1e-9)
    assert (temperature[-1], entropy[-1]) == pytest.approx(ends[1], rel=1e-9)
    assert path["mixing"] is False
    check = PATHS[process]
    if check is not None:
        assert check(temperature, entropy)
        return
    # On the way p v^n stays the same: with s = c_p ln T − R ln p, ln p follows from T by (n − 1)/n.
    pressure = 2e5 * (temperature / temperature[0]) ** (1.2 / 0.2)
    expected = entropy[0] + CP * np.log(temperature / temperature[0]) - R * np.log(pressure / 2e5)
    assert entropy == pytest.approx(expected, rel=1e-4)


def test_a_free_expansion_is_a_broken_line() -> None:
    figures = evaluated(compression('kind = "free-expansion"', 'volume = "3 m3"')).data["figures"]
    (figure,) = [entry for entry in figures if entry["kind"] == "temperature-entropy"]
    assert [path["mixing"] for path in figure["paths"]] == [True]
    assert "Broken lines only join states" in figure["caption"]


MIXED = (
    compression('kind = "polytropic"\npolytropic_index = "1.3"')
    + """
[states.in]
fluid       = "air"
pressure    = "6 bar"
temperature = "300 K"
mass_flow   = "0.2 kg/s"

[states.out]
fluid    = "air"
pressure = "2 bar"

[equipment.V]
kind   = "throttling-valve"
inlet  = "in"
outlet = "out"
"""
)


def test_flows_and_amounts_stand_side_by_side() -> None:
    record = evaluated(MIXED)
    assert record.values["total.entropy_generation"]["unit"] == "W/K"
    assert record.values["closed.entropy_generation"]["unit"] == "J/K"
    accounts = record.data["accounts"]
    assert {name: entry["dimension"] for name, entry in accounts.items()} == {
        "total": "entropy_flow",
        "closed": "entropy",
    }
    kinds = {(figure["id"], figure["dimension"]) for figure in record.data["figures"] if "bars" in figure["kind"]}
    assert ("lost-work", "power") in kinds
    assert ("lost-work-of-processes", "energy") in kinds
    assert record.data["relations"]["closed.heat"]["latex_symbols"].startswith(r"Q_{\mathrm{closed}}")


def test_criteria_may_be_set_on_processes() -> None:
    criterion = '[criteria.C1]\nvalue = "processes.P.lost_work"\nat_most = "50 kJ"\n'
    (entry,) = evaluated(ISOTHERMAL + criterion).data["criteria"]
    assert (entry["dimension"], entry["limit"], entry["decision"]) == ("energy", 50e3, "met")
    with pytest.raises(InputError, match="is needed"):
        evaluated(ISOTHERMAL + criterion.replace("kJ", "kW"))


def test_the_limits_of_the_vessel_hold_before_and_after() -> None:
    limits = '[processes.P.limits]\npressure = "7.5 bar(a)"\nsource = "Data sheet"\n'
    record = evaluated(ISOTHERMAL + limits)
    (caution,) = [entry for entry in record.data["cautions"] if entry["id"] == "T19"]
    assert (caution["severity"], caution["owner"], caution["path"]) == ("stop", "processes.P", "states.2.pressure")


def test_an_unsolvable_process_tells_file_and_line() -> None:
    with pytest.raises(SolutionError) as caught:
        evaluated(compression('kind = "isothermal"', ""))
    assert "calculation.toml:" in str(caught.value)
    assert "states.2." in str(caught.value)


def test_a_composition_that_does_not_follow_is_told_at_its_line() -> None:
    text = (
        HEAD
        + """
[fluids.n]
model     = "ideal-gas"
substance = "N2"

[fluids.o]
model     = "ideal-gas"
substance = "O2"

[fluids.m]
model       = "ideal-gas"
basis       = "mole"
composition = { N2 = 0.7, O2 = 0.3 }
"""
    )
    for state, fluid in (("1", "n"), ("2", "o")):
        text += f'[states.{state}]\nfluid = "{fluid}"\npressure = "1 bar"\ntemperature = "300 K"\nvolume = "1 m3"\n'
    text += '[states.3]\nfluid = "m"\n[processes.P]\nkind = "partition-removal"\nfrom = ["1", "2"]\nto = "3"\n'
    with pytest.raises(InputError) as caught:
        evaluated(text)
    told = str(caught.value)
    assert "fluids.m.composition" in told
    assert "N2 = 0.50000, O2 = 0.50000" in told
    assert "calculation.toml:26:" in told


def test_the_uncertainty_of_masses_reaches_the_composition() -> None:
    """Demo: u of the mole fraction of oxygen by hand, x = n_air x_air/(n_air + n_N2) with n = p V/(R T)."""
    record = project("nitrogen-blanketing")
    nitrogen = 9.406e5 * 2.0 / 307.15
    air = 1.006e5 * 6.2 / 291.15
    share = air / (air + nitrogen)
    entry = record.values["processes.EQ-1.species.O2.mole_fraction"]
    assert entry["value"] == pytest.approx(0.2095 * share, rel=1e-9)
    relative = math.sqrt(
        (0.025e5 / 9.406e5) ** 2
        + 0.005**2
        + (1.0 / 307.15) ** 2
        + (0.001 / 1.006) ** 2
        + 0.0075**2
        + (0.5 / 291.15) ** 2
    )
    assert entry["standard_uncertainty"] == pytest.approx(0.2095 * share * (1.0 - share) * relative, rel=1e-3)


def test_gases_that_are_mixed_are_not_tested_as_real_ones() -> None:
    listed = {entry["id"]: entry for entry in project("nitrogen-blanketing").data["assumptions"]}
    finding = listed["fluids.nitrogen.ideal-gas"]["test"]["finding"]
    assert finding.startswith("Not tested (|Z − 1| up to")
    assert "process EQ-1 mixes it with other gases" in finding


def test_a_content_of_negative_mass_stops() -> None:
    """The whole is given with less mass than one of its parts holds: P18; with more, nothing is told."""

    def cautions(mass: str) -> list[tuple[str, str]]:
        text = HEAD + AIR
        text += '[states.1]\nfluid = "air"\npressure = "2 bar"\ntemperature = "300 K"\nvolume = "1 m3"\n'
        text += '[states.2]\nfluid = "air"\npressure = "1 bar"\ntemperature = "300 K"\n'
        text += f'[states.3]\nfluid = "air"\nmass = "{mass}"\n'
        text += '[processes.P]\nkind = "partition-removal"\nfrom = ["1", "2"]\nto = "3"\n'
        found = evaluated(text).data["cautions"]
        return [(entry["severity"], entry["path"]) for entry in found if entry["id"] == "P18"]

    assert cautions("2 kg") == [("stop", "states.2.mass")]
    assert cautions("3 kg") == []

"""Combustors through the calculation file: record, cautions, assumption tests, criteria, the page."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from calculations import HEAD, PROJECTS, evaluated

from reportgen.errors import InputError
from reportgen.record import Record
from reportgen.report.page import page

FLUIDS = """
[fluids.fuel]
model     = "ideal-gas"
substance = "methane"

[fluids.air]
model     = "ideal-gas"
substance = "air"

[fluids.flue]
model       = "ideal-gas"
products_of = "B-1"
"""
STREAMS = """
[states.1]
fluid       = "fuel"
pressure    = "1.1 bar"
temperature = "25 degC"
mass_flow   = "36 kg/h ± 2 %"

[states.2]
fluid       = "air"
pressure    = "1.1 bar"
temperature = "25 degC"

[states.3]
fluid = "flue"

[states.4]
fluid       = "flue"
temperature = "45 degC ± 1 K"
"""
PIECES = """
[equipment.B-1]
kind       = "combustor"
inlets     = ["1", "2"]
outlet     = "3"
excess_air = "20 % ± 2 %"

[equipment.E-1]
kind   = "cooler"
inlet  = "3"
outlet = "4"
"""
BURNER = HEAD + FLUIDS + STREAMS + PIECES


def burner(old: str = "", new: str = "", more: str = "") -> Record:
    assert old in BURNER
    return evaluated(BURNER.replace(old, new, 1) + more)


def test_the_record_tells_how_the_streams_enter_and_what_comes_of_them() -> None:
    record = burner()
    entry = record.data["combustion"]["B-1"]
    assert (entry["chemistry"], entry["outlet"]) == ("complete", "3")
    assert entry["entering"].startswith("Not premixed: fuel (state 1) and oxidant (state 2) enter apart")
    assert [item["species"] for item in entry["species"]] == ["N2", "H2O", "CO2", "O2", "Ar"]
    wet = {item["species"]: record.value(item["wet"]) for item in entry["species"]}
    dry = {item["species"]: record.value(item["dry"]) for item in entry["species"] if item["dry"]}
    assert [sum(wet.values()), sum(dry.values())] == pytest.approx([1.0, 1.0], abs=1e-9)
    assert dry["O2"] == pytest.approx(wet["O2"] / (1.0 - wet["H2O"]), rel=1e-9)
    value = record.values["equipment.B-1.species.O2.dry_mole_fraction"]
    assert value["standard_uncertainty"] > 0.0
    assert {"states.3.temperature", "states.1.mass_flow", "states.2.mass_flow", "fluids.flue"} <= set(
        record.values["equipment.B-1.species.O2.mole_fraction"]["from"]
    )


def test_every_state_of_the_products_is_traced_to_the_flows_its_composition_follows_from() -> None:
    record = burner()
    for state in ("3", "4"):
        origins = record.values[f"states.{state}.specific_entropy"]["from"]
        assert {"states.1.mass_flow", "states.2.mass_flow", "fluids.flue"} <= set(origins)


def test_heating_values_agree_with_those_of_tables() -> None:
    """Methane: 802.3 kJ/mol and 890.6 kJ/mol at 25 °C (from memory, tables of enthalpies of formation)."""
    record = burner()
    molar_mass = 16.0425e-3
    assert record.value("equipment.B-1.lower_heating_value") * molar_mass == pytest.approx(802.3e3, rel=5e-4)
    assert record.value("equipment.B-1.higher_heating_value") * molar_mass == pytest.approx(890.6e3, rel=5e-4)
    assert record.value("equipment.B-1.fuel_heat") == pytest.approx(
        0.01 * record.value("equipment.B-1.lower_heating_value"), rel=1e-12
    )


def test_no_exergetic_efficiency_is_given_and_the_reason_is() -> None:
    entry = burner().values["equipment.B-1.exergetic_efficiency"]
    assert entry["value"] is None
    assert "without the chemical exergy" in entry["reason"]


def test_flue_gas_cooled_below_its_dew_point_raises_the_caution() -> None:
    record = burner()
    (entry,) = [item for item in record.data["cautions"] if item["id"] == "P16"]
    assert entry["path"] == "states.4.temperature"
    dew_point = record.value("equipment.B-1.dew_point")
    # at the pressure of state 4, which is that of state 3
    assert f"dew point {dew_point - 273.15:.2f} °C" in entry["text"]
    assert "P16" not in [item["id"] for item in burner('"45 degC ± 1 K"', '"70 degC ± 1 K"').data["cautions"]]


def test_complete_combustion_is_tested_by_equilibrium() -> None:
    """At 1.2 times the air and 2000 K dissociation changes the flame by tens of kelvins."""
    complete, equilibrium = burner(), burner('products_of = "B-1"', 'products_of = "B-1"\nchemistry = "equilibrium"')
    gap = complete.value("states.3.temperature") - equilibrium.value("states.3.temperature")
    assert 20.0 < gap < 120.0
    (entry,) = [item for item in complete.data["assumptions"] if item["id"] == "fluids.flue.complete-chemistry"]
    assert "With chemical equilibrium of the products" in str(entry["test"])
    (other,) = [item for item in equilibrium.data["assumptions"] if item["id"] == "fluids.flue.equilibrium-chemistry"]
    assert other["test"] is None
    species = [item["species"] for item in equilibrium.data["combustion"]["B-1"]["species"]]
    assert {"NO", "OH", "CO"} <= set(species)
    assert equilibrium.data["plant"]["fluids"]["flue"]["model"] == "reacting-gas"


def test_air_that_burns_is_not_held_against_a_real_fluid_of_another_composition() -> None:
    (entry,) = [item for item in burner().data["assumptions"] if item["id"] == "fluids.air.ideal-gas"]
    assert "takes part in the combustion of B-1" in str(entry["test"])


def test_criteria_may_be_put_on_every_species_that_the_chemistry_knows() -> None:
    """A trace too small to be listed has its value; complete combustion makes no nitrogen oxides and says nothing."""
    more = '\n[criteria.C1]\nvalue = "equipment.B-1.species.HCN.mole_fraction"\nat_most = "0.0001"\n'
    more += '\n[criteria.C2]\nvalue = "equipment.B-1.species.O2.dry_mole_fraction"\nat_least = "3 %"\n'
    equilibrium = burner('products_of = "B-1"', 'products_of = "B-1"\nchemistry = "equilibrium"', more)
    assert {item["id"]: item["decision"] for item in equilibrium.data["criteria"]} == {"C1": "met", "C2": "met"}
    with pytest.raises(InputError, match="The calculation has no such number"):
        burner(more=more)


def test_fluids_of_another_zero_are_refused_at_the_inlets() -> None:
    fuel = 'model     = "ideal-gas"\nsubstance = "methane"'
    with pytest.raises(InputError) as caught:
        burner(fuel, fuel.replace("ideal-gas", "real-fluid"))
    (fault,) = caught.value.faults
    assert fault.path == "equipment.B-1.inlets"
    assert fault.line is not None
    assert fault.expected == 'reference_state = "third-law"'
    third_law = fuel.replace("ideal-gas", "real-fluid") + '\nreference_state = "third-law"'
    assert burner(fuel, third_law).value("states.3.temperature") == pytest.approx(
        burner().value("states.3.temperature"), abs=1.0
    )


def test_combustors_that_feed_each_other_are_refused() -> None:
    text = BURNER.replace('inlets     = ["1", "2"]', 'inlets     = ["1", "2", "6"]')
    text += """
[fluids.other]
model       = "ideal-gas"
products_of = "B-2"

[states.5]
fluid       = "air"
pressure    = "1.1 bar"
temperature = "25 degC"
mass_flow   = "1 kg/s"

[states.6]
fluid = "other"

[equipment.B-2]
kind   = "combustor"
inlets = ["4", "5"]
outlet = "6"
"""
    with pytest.raises(InputError, match="feed each other"):
        evaluated(text)


@pytest.mark.parametrize("units", ["SI", "US"])
def test_the_page_shows_the_fire(units: str) -> None:
    text = page(burner('units    = "SI"', f'units    = "{units}"'))
    assert "Not premixed: fuel" in text
    assert "CO₂" in text
    assert "in the dry gas" in text
    assert "without chemical exergy" in text


def demo() -> Any:
    return evaluated(
        (PROJECTS / "waste-gas-burner" / "calculation.toml")
        .read_text("utf-8")
        .replace('purpose_file = "purpose.md"\n', "")
    )


def test_the_demonstration_balances_and_finds_fuel_and_air_from_the_temperature() -> None:
    record = demo()
    assert record.value("states.4.temperature") == pytest.approx(1253.15)
    assert record.value("equipment.B-410.excess_air") == pytest.approx(0.35)
    assert 0.0 < record.value("states.2.mass_flow") < record.value("states.3.mass_flow")
    assert np.isclose(record.value("total.closure"), 0.0, atol=1e-9)
    assert [item["id"] for item in record.data["cautions"]] == []


@pytest.mark.parametrize(("flow", "raised"), [("0.9 kg/h", []), ("3.1 kg/h", ["warning"])])
def test_too_little_air_that_nobody_asked_for_raises_a_caution(flow: str, raised: list[str]) -> None:
    """Of 50 kg/h of products, 3.1 kg/h of hydrogen leave too little air: 34 kg of air burn one of hydrogen."""
    text = HEAD + FLUIDS.replace("methane", "hydrogen").replace("B-1", 'B-1"\nchemistry = "equilibrium')
    text += STREAMS.replace('mass_flow   = "36 kg/h ± 2 %"', f'mass_flow = "{flow}"')
    text = text.replace('[states.3]\nfluid = "flue"', '[states.3]\nfluid = "flue"\nmass_flow = "50 kg/h"')
    text += PIECES.replace('excess_air = "20 % ± 2 %"', "")
    found = [item["severity"] for item in evaluated(text).data["cautions"] if item["id"] == "P20"]
    assert found == raised

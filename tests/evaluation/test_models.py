"""Cubic and incompressible fluids through a whole calculation: results, record, assumptions, figures, page."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from calculations import HEAD, evaluated

from reportgen.errors import InputError
from reportgen.evaluation.models import property_model
from reportgen.fluids import cubic, real_fluid
from reportgen.record import Record
from reportgen.report.page import page
from reportgen.spec.calculation import FluidSpec, HeatPolynomial, HeatTable

OIL = (
    HEAD
    + """
[fluids.oil]
model               = "incompressible"
substance           = "thermal oil"
density             = "870 kg/m3"
specific_heat       = { coefficients = [1.85, 0.0034], unit = "kJ/(kg*K)", about = "0 degC" }
minimum_temperature = "0 degC"
maximum_temperature = "300 degC"
source              = "Data sheet DS-9"

[states.1]
fluid       = "oil"
pressure    = "1 bar"
temperature = "180 degC ± 2 K"
volume_flow = "3 m3/h"

[states.2]
fluid    = "oil"
pressure = "6 bar"

[states.3]
fluid       = "oil"
pressure    = "5.5 bar"
temperature = "290 degC ± SPREAD K"

[equipment.P]
kind                  = "pump"
inlet                 = "1"
outlet                = "2"
isentropic_efficiency = "60 %"

[equipment.H]
kind                 = "heater"
inlet                = "2"
outlet               = "3"
boundary_temperature = "500 degC"
"""
)


def fluid_of(record: Record, name: str) -> dict[str, Any]:
    return record.data["plant"]["fluids"][name]


@pytest.fixture(scope="module")
def oil() -> Record:
    return evaluated(OIL.replace("SPREAD", "1"))


def test_an_incompressible_liquid_is_pumped_and_heated_by_its_polynomial(oil: Record) -> None:
    """w = v Δp/η; q and Δs from c = 1850 + 3.4 t J/(kg K), t in degC, integrated by hand."""
    flow = 870.0 * 3.0 / 3600.0
    assert oil.value("equipment.P.power") == pytest.approx(flow * 5e5 / 870.0 / 0.6, rel=1e-9)
    start = float(oil.values["states.2.temperature"]["value"]) - 273.15

    def heat(t: float) -> float:
        return 1850.0 * t + 1.7 * t * t

    push = (5.5e5 - 6e5) / 870.0
    assert oil.value("equipment.H.heat") == pytest.approx(flow * (heat(290.0) - heat(start) + push), rel=1e-9)
    constant = 1850.0 - 3.4 * 273.15
    rise = constant * math.log(563.15 / (start + 273.15)) + 3.4 * (290.0 - start)
    found = oil.values["states.3.specific_entropy"]["value"] - oil.values["states.2.specific_entropy"]["value"]
    assert found == pytest.approx(rise, rel=1e-9)


def test_the_record_states_the_model_its_limits_its_zero_and_its_source(oil: Record) -> None:
    fluid = fluid_of(oil, "oil")
    assert fluid["model"] == "incompressible"
    assert fluid["sources"] == ["Data sheet DS-9"]
    assert fluid["entropy_zero_name"] == "298.15 K liquid:thermal oil"
    assert fluid["molar_mass"] is None
    assert (fluid["limits"]["minimum_temperature"], fluid["limits"]["maximum_pressure"]) == (273.15, None)
    assert {"label": "density", "text": None, "value": 870.0, "dimension": "density"} in fluid["details"]
    assert any("1850 + 3.4 t in J/(kg K), t = T/K − 273.15" in str(detail["text"]) for detail in fluid["details"])


def test_the_assumption_of_constant_density_is_listed(oil: Record) -> None:
    (entry,) = (entry for entry in oil.data["assumptions"] if entry["id"] == "fluids.oil.incompressible")
    assert "its density is 870 kg/m3 in every state" in entry["text"]
    assert "no real fluid of this name" in entry["basis"]
    assert entry["test"] is None


def test_t31_at_the_edge_of_the_range_of_the_data() -> None:
    def stops(spread: float) -> list[str]:
        record = evaluated(OIL.replace("SPREAD", str(spread)))
        return [entry["path"] for entry in record.data["cautions"] if entry["id"] == "T31"]

    assert stops(1.0) == []
    assert stops(14.0) == ["states.3.temperature"]


def test_the_figure_has_no_dome_and_one_line_for_all_pressures(oil: Record) -> None:
    (figure,) = (figure for figure in oil.data["figures"] if figure["kind"] == "temperature-entropy")
    assert figure["dome"] is None
    assert len(figure["isobars"]) == 1
    assert "the thin line holds at every pressure" in figure["caption"]


def test_the_page_states_model_details_zero_and_source(oil: Record) -> None:
    text = page(oil).replace("\N{NO-BREAK SPACE}", " ")
    for words in ("density 870 kg/m³", "the liquid at 298.15 K", "Data sheet DS-9"):
        assert words in text


def test_water_taken_as_incompressible_is_held_against_water() -> None:
    water = (
        OIL.replace("SPREAD", "1")
        .replace('"thermal oil"', '"water"')
        .replace("180 degC", "20 degC")
        .replace("290", "80")
    )
    record = evaluated(water.replace("870", "998").replace("[1.85, 0.0034]", "[4.18]"))
    (entry,) = (entry for entry in record.data["assumptions"] if entry["id"] == "fluids.oil.incompressible")
    assert "densities from 972 to 998.4" in entry["test"]["finding"]
    assert entry["test"]["verdict"] in ("negligible", "noticeable")


@pytest.mark.parametrize(
    ("heat", "at_350"),
    [
        (2000.0, 2000.0),
        (HeatPolynomial((1850.0, 3.4), 273.15), 1850.0 + 3.4 * 76.85),
        (HeatPolynomial((1000.0, 2.0, 1e-3)), 1000.0 + 700.0 + 122.5),
        (HeatTable((300.0, 400.0), (1900.0, 2100.0)), 2000.0),
    ],
)
def test_specific_heats_of_every_form(heat: Any, at_350: float) -> None:
    spec = FluidSpec("f", "incompressible", 1, density=900.0, specific_heat=heat, temperature_range=(300.0, 400.0))
    state = property_model(spec).at(pressure=1e5, temperature=[350.0])
    assert np.asarray(state.isobaric_heat_capacity) == pytest.approx([at_350], rel=1e-12)


# --- cubic equations of state ---------------------------------------------------------------------------------------

GAS = (
    HEAD
    + """
[fluids.gas]
model       = "cubic"
equation    = "Peng-Robinson"
basis       = "mole"
composition = { CO2 = 0.94, N2 = 0.06 }
interaction = [{ between = ["CO2", "N2"], coefficient = -0.017, source = "data sheet DS-40" }]

[states.1]
fluid       = "gas"
pressure    = "8 bar ± 0.1 bar"
temperature = "40 degC"
mass_flow   = "1 kg/s"

[states.2]
fluid    = "gas"
pressure = "20 bar"

[equipment.K]
kind                  = "compressor"
inlet                 = "1"
outlet                = "2"
isentropic_efficiency = "75 %"
"""
)
PROPANE = (
    HEAD
    + """
[fluids.propane]
model              = "cubic"
equation           = "Soave-Redlich-Kwong"
substance          = "propane"
volume_translation = "Peneloux"

[states.1]
fluid      = "propane"
pressure   = "12 bar"
subcooling = "4 K"
mass_flow  = "0.3 kg/s"

[states.2]
fluid    = "propane"
pressure = "3 bar"

[equipment.V]
kind   = "throttling-valve"
inlet  = "1"
outlet = "2"
"""
)


@pytest.fixture(scope="module")
def gas() -> Record:
    return evaluated(GAS)


@pytest.fixture(scope="module")
def propane() -> Record:
    return evaluated(PROPANE)


def test_a_mixture_is_compressed_by_the_cubic_equation(gas: Record) -> None:
    """The efficiency again from the model alone: h at the outlet pressure and the entropy of the inlet."""
    model = cubic({"CO2": 0.94, "N2": 0.06}, equation="Peng-Robinson", interaction={("CO2", "N2"): -0.017})
    inlet = model.at(pressure=8e5, temperature=313.15)
    ideal = model.at(pressure=20e5, specific_entropy=float(inlet.specific_entropy))
    work = float(ideal.specific_enthalpy - inlet.specific_enthalpy) / 0.75
    assert gas.value("equipment.K.power") == pytest.approx(work, rel=1e-8)


def test_its_settings_zero_and_sources_stand_in_the_record_and_on_the_page(gas: Record) -> None:
    fluid = fluid_of(gas, "gas")
    assert (fluid["model"], fluid["entropy_zero_name"], fluid["title"]) == ("cubic", "third-law", "gas (mixture)")
    assert {"label": "equation", "text": "Peng-Robinson", "value": None, "dimension": None} in fluid["details"]
    assert {"label": "k of CO2 and N2", "text": None, "value": -0.017, "dimension": "ratio"} in fluid["details"]
    assert "Interaction of CO2 and N2: data sheet DS-40" in fluid["sources"]
    assert any("10.1021/i160057a011" in source for source in fluid["sources"])  # Peng and Robinson 1976
    text = page(gas)
    assert "k of CO2 and N2" in text
    assert "name of this zero: third-law" in text


def test_a_mixture_without_a_published_equation_is_not_tested_and_says_so(gas: Record) -> None:
    (entry,) = (entry for entry in gas.data["assumptions"] if entry["id"] == "fluids.gas.cubic")
    assert "follows the cubic equation of state of Peng-Robinson" in entry["text"]
    assert "no real fluid of this composition is carried" in entry["basis"]


def test_a_pure_substance_is_held_against_its_published_equation(propane: Record) -> None:
    (entry,) = (entry for entry in propane.data["assumptions"] if entry["id"] == "fluids.propane.cubic")
    test = entry["test"]
    assert test["path"] == "equipment.V.entropy_generation"
    real = real_fluid("propane")
    saturation = float(real.saturation(pressure=12e5)[0].temperature)
    first = real.at(pressure=12e5, temperature=saturation - 4.0)
    second = real.at(pressure=3e5, specific_enthalpy=float(first.specific_enthalpy))
    assert test["other_value"] == pytest.approx(0.3 * float(second.specific_entropy - first.specific_entropy), rel=1e-6)


def test_the_figure_of_a_pure_substance_has_a_closed_dome_and_that_of_a_mixture_none(
    propane: Record, gas: Record
) -> None:
    def dome(record: Record) -> Any:
        return next(figure["dome"] for figure in record.data["figures"] if figure["kind"] == "temperature-entropy")

    assert dome(gas) is None
    temperatures = np.array(dome(propane)["temperature"])
    top = int(np.argmax(temperatures))
    assert temperatures[top] == pytest.approx(fluid_of(propane, "propane")["limits"]["critical_point"]["temperature"])
    assert (np.diff(temperatures[: top + 1]) > 0.0).all()
    assert (np.diff(temperatures[top:]) < 0.0).all()


def test_constants_of_the_author_are_used_and_stated() -> None:
    own = 'critical = { propane = { temperature = "96.7 degC", pressure = "42 bar", acentric_factor = 0.15, '
    own += 'source = "data sheet DS-41" } }\n'
    record = evaluated(PROPANE.replace('volume_translation = "Peneloux"\n', own))
    fluid = fluid_of(record, "propane")
    assert fluid["limits"]["critical_point"]["temperature"] == pytest.approx(369.85, rel=1e-6)
    assert {"label": "critical pressure of propane", "text": None, "value": 42e5, "dimension": "pressure"} in fluid[
        "details"
    ]
    assert "Critical constants of propane: data sheet DS-41" in fluid["sources"]


def test_a_substance_that_nobody_knows_is_refused_at_its_line() -> None:
    with pytest.raises(InputError) as caught:
        evaluated(PROPANE.replace('"propane"\nvol', '"unobtainium"\nvol'))
    assert caught.value.faults[0].line == PROPANE.splitlines().index("[fluids.propane]") + 1 or "fluids.propane" in str(
        caught.value
    )


def test_cubic_as_second_source_names_the_equation() -> None:
    real = PROPANE.replace('"cubic"', '"real-fluid"').replace('equation           = "Soave-Redlich-Kwong"\n', "")
    real = real.replace('volume_translation = "Peneloux"', 'second_source = { model = "cubic", tolerance = "40 %" }')
    entries = evaluated(real).data["cross_checks"]
    assert {entry["second_title"] for entry in entries} == {"Propane (Peng-Robinson)"}
    assert {entry["verdict"] for entry in entries} == {"agrees"}
    assert "pressure" in {entry["property"] for entry in entries if entry["state"] == "2"}  # two phases: T and x

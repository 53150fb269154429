"""Cubic and incompressible fluids through a whole calculation: results, record, assumptions, figures, page."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from calculations import HEAD, evaluated

from reportgen.evaluation.models import property_model
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
    for words in ("density 870 kg/m³", "name of this zero: 298.15 K liquid:thermal oil", "Data sheet DS-9"):
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

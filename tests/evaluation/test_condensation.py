"""Caution P16: water that an ideal gas keeps as vapour beyond saturation."""

from __future__ import annotations

from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest
from calculations import HEAD, evaluated
from handmade_plants import plant, samples

from reportgen.evaluation.cautions import catalogue, raised

#: Flue gas with 15 % of water by mole.
GAS = SimpleNamespace(
    kind="ideal-gas",
    title="flue",
    substance=None,
    composition={"N2": 0.85, "H2O": 0.15},
    molar_mass=0.85 * 0.0280134 + 0.15 * 0.018015268,
    entropy_zero_name="third-law",
    sources=(),
    limits=SimpleNamespace(
        minimum_temperature=200.0,
        maximum_temperature=6000.0,
        maximum_pressure=np.inf,
        published_maximum_temperature=None,
        critical_point=None,
    ),
)
#: Saturation pressure at 40 degC [Pa], IAPWS R6-95(2018), from memory.
SATURATION_40C = 7384.9


def found(temperature: object, pressure: float = 1e5, gas: object = GAS) -> list[dict[str, Any]]:
    values = {"states.1.temperature": temperature, "states.1.pressure": pressure}
    case = plant(values, fluids={"f": gas}, inputs=1)  # type: ignore[dict-item]
    return [item for item in raised(catalogue(), case, {}) if item["id"] == "P16"]


def test_it_trips_with_the_ratio_and_the_amount() -> None:
    (entry,) = found(samples(313.15, 0.5))
    assert (entry["severity"], entry["decided"], entry["limit"]) == ("warning", True, 1.0)
    assert entry["value"] == pytest.approx(0.15e5 / SATURATION_40C, rel=1e-4)
    held = SATURATION_40C / 1e5
    condensed = (0.15 - held) / (1.0 - held)
    assert f"{100 * condensed / 0.15:.2g} % of it" in entry["text"]
    assert f"{100 * condensed * 0.018015268 / GAS.molar_mass:.2g} % of the mass of the gas" in entry["text"]
    assert "is beyond saturation (dew point 53.9" in entry["text"]


@pytest.mark.parametrize(("temperature", "decided"), [(327.0, [False]), (328.5, []), (700.0, [])])
def test_near_the_dew_point_it_is_open_and_above_silent(temperature: float, decided: list[bool]) -> None:
    """0.15 bar saturate at 327.1 K; the temperature is known to 1 K."""
    assert [entry["decided"] for entry in found(samples(temperature, 0.5))] == decided


def test_below_freezing_it_is_ice() -> None:
    assert "beyond saturation over ice" in found(250.0)[0]["text"]


def test_water_alone_condenses_as_a_whole() -> None:
    steam = SimpleNamespace(**{**vars(GAS), "substance": "water", "composition": None, "molar_mass": 0.018015268})
    assert "all of it would condense" in found(350.0, 1e5, steam)[0]["text"]
    assert found(450.0, 1e5, steam) == []


def test_dry_gases_and_real_fluids_have_no_water_to_lose() -> None:
    assert found(210.0, 1e5, SimpleNamespace(**{**vars(GAS), "composition": {"N2": 0.8, "O2": 0.2}})) == []
    assert found(300.0, 1e5, SimpleNamespace(**{**vars(GAS), "kind": "real-fluid"})) == []


def test_humid_air_that_is_compressed_and_cooled_is_found_in_a_calculation() -> None:
    record = evaluated(
        HEAD
        + """
[fluids.air]
model       = "ideal-gas"
basis       = "mole"
composition = { N2 = 0.765, O2 = 0.205, Ar = 0.009, H2O = 0.021 }

[states.1]
fluid       = "air"
pressure    = "1 bar"
temperature = "25 degC"

[states.2]
fluid       = "air"
pressure    = "8 bar"
temperature = "35 degC"
"""
    )
    assert [entry["path"] for entry in record.data["cautions"] if entry["id"] == "P16"] == ["states.2.temperature"]

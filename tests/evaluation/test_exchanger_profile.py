"""Figures along exchangers: the curves, the pinch and the places that matter, in the record."""

from __future__ import annotations

import pytest

from tests.evaluation.calculations import project
from tests.evaluation.heat_pump import heat_pump


def test_a_condenser_shows_where_condensation_begins_and_ends() -> None:
    record = heat_pump()
    (figure,) = (entry for entry in record.data["figures"] if entry["kind"] == "exchanger-profile")
    assert figure["equipment"] == "C"
    assert figure["duty"] == sorted(figure["duty"])
    assert figure["duty"][0] == 0.0
    assert figure["duty"][-1] == pytest.approx(record.value("equipment.C.duty"))
    for side, inlet, outlet in (("hot", "2", "3"), ("cold", "12", "11")):
        assert figure[side][-1] == pytest.approx(record.value(f"states.{inlet}.temperature"), rel=1e-9)
        assert figure[side][0] == pytest.approx(record.value(f"states.{outlet}.temperature"), rel=1e-9)
    places = [row["place"] for row in figure["rows"]]
    assert places == ["cold end", "hot stream all condensed", "pinch, hot stream begins to condense", "hot end"]
    pinch = figure["rows"][2]
    assert pinch["difference"] == pytest.approx(record.value("equipment.C.pinch"), rel=1e-9)
    assert figure["pinch"]["hot"] - figure["pinch"]["cold"] == pytest.approx(pinch["difference"], rel=1e-9)
    assert min(h - c for h, c in zip(figure["hot"], figure["cold"], strict=True)) == pytest.approx(pinch["difference"])


def test_every_exchanger_of_a_demo_has_its_figure() -> None:
    record = project("instrument-air")
    figures = [entry["equipment"] for entry in record.data["figures"] if entry["kind"] == "exchanger-profile"]
    assert figures == ["E-210", "E-211"]
    for tag in figures:
        parts = [
            record.value(f"equipment.{tag}.entropy_by_{part}") for part in ("temperature_difference", "pressure_drop")
        ]
        assert sum(parts) == pytest.approx(record.value(f"equipment.{tag}.entropy_generation"), rel=1e-6)

"""Caution P19: a convergent nozzle asked to expand below the pressure at which it chokes."""

from __future__ import annotations

import pytest

from tests.evaluation.calculations import AIR, HEAD, evaluated

NOZZLE = (
    HEAD
    + AIR
    + """
[states.1]
fluid       = "air"
pressure    = "3.0 bar(a) ± 0.03 bar"
temperature = "200 degC"
mass_flow   = "1.2 kg/s"

[states.2]
fluid    = "air"
pressure = "PRESSURE"

[equipment.N]
kind                  = "nozzle"
inlet                 = "1"
outlet                = "2"
isentropic_efficiency = "96 %"
"""
)


@pytest.mark.parametrize(
    ("pressure", "severity"),
    [("1.2 bar(a)", "stop"), ("1.583 bar(a)", "warning"), ("1.7 bar(a)", None)],
    ids=["below", "within its uncertainty", "above"],
)
def test_an_outlet_pressure_below_the_throat_chokes_the_flow(pressure: str, severity: str | None) -> None:
    """Critical pressure of air at 3 bar: 3 · 0.5283 = 1.585 bar, ± 0.016 bar from the inlet pressure."""
    record = evaluated(NOZZLE.replace("PRESSURE", pressure))
    found = [caution for caution in record.data["cautions"] if caution["id"] == "P19"]
    assert [caution["severity"] for caution in found] == ([severity] if severity else [])
    if found:
        assert found[0]["path"] == "states.2.pressure"
        assert found[0]["value"] < found[0]["limit"]
        assert found[0]["limit"] == pytest.approx(1.585e5, rel=1e-3)
        assert "throat_pressure" not in found[0]["text"]
        assert "State throat_area if it has a divergent part" in found[0]["text"]


def test_a_throat_that_is_stated_answers_the_caution() -> None:
    text = NOZZLE.replace("PRESSURE", "1.2 bar(a)").replace('mass_flow   = "1.2 kg/s"\n', "")
    record = evaluated(text + 'throat_area = "20 cm2"\n')
    assert not [caution for caution in record.data["cautions"] if caution["id"] == "P19"]
    assert record.value("states.1.mass_flow") == pytest.approx(1.1, abs=0.1)

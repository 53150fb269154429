"""Over-determined plants: the size of the contradiction, in its unit and in parts of its uncertainty."""

from __future__ import annotations

import math

import pytest

from reportgen.balances.freedom import OverdeterminedError
from tests.evaluation.calculations import COMPRESSOR, VALVE, evaluated


def refused(text: str) -> str:
    with pytest.raises(OverdeterminedError) as caught:
        evaluated(text)
    (fault,) = caught.value.faults
    assert fault.line is not None
    assert fault.found is not None
    return fault.found


def test_two_flows_that_differ_by_more_than_their_uncertainty() -> None:
    """0.5 ± 2 % and 0.53 ± 2 %: 0.03 apart, U = sqrt(0.01² + 0.0106²)."""
    text = VALVE.replace('pressure = "2.0 bar(a) ± 0.05 bar"', 'pressure = "2 bar(a)"\nmass_flow = "0.53 kg/s ± 2 %"')
    found = refused(text)
    times = 0.03 / math.hypot(0.01, 0.0106)
    assert "states.2.mass_flow = 0.53 kg/s, and 0.5 kg/s by the others: 0.03 kg/s apart" in found
    assert f"{times:.2g} times the expanded uncertainty of the difference" in found
    assert "agree" not in found


def test_two_flows_that_agree_within_their_uncertainty() -> None:
    text = VALVE.replace('pressure = "2.0 bar(a) ± 0.05 bar"', 'pressure = "2 bar(a)"\nmass_flow = "0.503 kg/s ± 2 %"')
    assert "agree within it, so either may be left out" in refused(text)


def test_givens_without_uncertainty_have_their_difference_only() -> None:
    text = VALVE.replace('mass_flow   = "0.5 kg/s ± 2 %"', 'mass_flow = "0.5 kg/s"')
    text = text.replace('pressure = "2.0 bar(a) ± 0.05 bar"', 'pressure = "2 bar(a)"\nmass_flow = "0.53 kg/s"')
    assert "0.03 kg/s apart, none of them with an uncertainty" in refused(text)


def test_a_contradiction_that_goes_through_several_relations() -> None:
    """Outlet temperature measured although efficiency and power fix it, and no heat is left to make up for it."""
    extra = '\n[equipment.C]\nheat = "0 kW"\npower = "120 kW ± 1 %"\n'
    text = COMPRESSOR.replace("\n[equipment.C]\n", extra)
    found = refused(text)
    # Power 0.5 · 1.005 · 293.15 · (6^(287/1005) − 1)/0.8 by the efficiency.
    assert "equipment.C.power = 120 kW" in found or "equipment.C.isentropic_efficiency = 80 %" in found
    assert "times the expanded uncertainty of the difference" in found


def test_the_message_offers_what_could_be_left_out() -> None:
    text = VALVE.replace('pressure = "2.0 bar(a) ± 0.05 bar"', 'pressure = "2 bar(a)"\nmass_flow = "0.53 kg/s ± 2 %"')
    with pytest.raises(
        OverdeterminedError, match=r"one value fewer, without states\.2\.mass_flow or states\.1\.mass_f"
    ):
        evaluated(text)

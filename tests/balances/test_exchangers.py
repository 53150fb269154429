"""Profiles of exchangers: against closed forms for constant heat capacity, and against CoolProp point by point."""

from __future__ import annotations

import math

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI

from reportgen.balances import solve
from reportgen.fluids import real_fluid
from tests.balances.cases import EXCHANGER, SURROUNDINGS, Case, one_piece
from tests.balances.models import SimpleGas

GAS = SimpleGas()
GIVENS = {
    "1.pressure": 3e5,
    "1.temperature": 500.0,
    "1.mass_flow": 2.0,
    "2.temperature": 400.0,
    "3.pressure": 2e5,
    "3.temperature": 290.0,
    "3.mass_flow": 3.0,
}


def parts(values: dict[str, float]) -> float:
    """Sum of the two parts of the entropy generation."""
    names = ("entropy_by_temperature_difference", "entropy_by_pressure_drop")
    return sum(values[f"equipment.X.{name}"] for name in names)


def base(case: Case) -> dict[str, float]:
    values = solve(case.plant, {**SURROUNDINGS, **case.givens}).values
    return {path: float(array[0]) for path, array in values.items() if array.dtype.kind == "f"}


@pytest.mark.parametrize("arrangement", ["counterflow", "parallel-flow"])
def test_streams_of_constant_heat_capacity(arrangement: str) -> None:
    case = one_piece("heat-exchanger", EXCHANGER, GIVENS, options={"arrangement": arrangement})
    values = base(case)
    duty = 2.0 * GAS.cp * 100.0
    t4 = 290.0 + 200.0 / 3.0
    ends = (500.0 - t4, 400.0 - 290.0) if arrangement == "counterflow" else (500.0 - 290.0, 400.0 - t4)
    assert values["equipment.X.pinch"] == pytest.approx(min(ends), rel=1e-12)
    assert values["equipment.X.pinch_place"] == (0.0 if arrangement == "counterflow" else 1.0)
    mean = (ends[0] - ends[1]) / math.log(ends[0] / ends[1])
    assert values["equipment.X.mean_temperature_difference"] == pytest.approx(mean, rel=1e-9)
    assert values["equipment.X.effectiveness"] == pytest.approx(100.0 / 210.0, rel=1e-12)
    generated = 2.0 * GAS.cp * math.log(400.0 / 500.0) + 3.0 * GAS.cp * math.log(t4 / 290.0)
    assert values["equipment.X.entropy_by_temperature_difference"] == pytest.approx(generated, rel=1e-9)
    assert values["equipment.X.entropy_by_pressure_drop"] == 0.0
    assert values["equipment.X.bejan_number"] == pytest.approx(1.0)
    assert values["equipment.X.entropy_generation_number"] == pytest.approx(288.15 * generated / duty)


def test_pressure_losses_and_heat_from_outside_have_their_parts() -> None:
    more = {"hot_pressure_drop": 2e4, "cold_pressure_drop": 1e4, "heat": -9e3, "boundary_temperature": 310.0}
    values = base(one_piece("heat-exchanger", EXCHANGER, {**GIVENS, **more}))
    friction = 2.0 * GAS.gas_constant * math.log(3.0 / 2.8) + 3.0 * GAS.gas_constant * math.log(2.0 / 1.9)
    assert values["equipment.X.entropy_by_pressure_drop"] == pytest.approx(friction, rel=1e-9)
    assert parts(values) == pytest.approx(values["equipment.X.entropy_generation"], rel=1e-9)
    share = 1.0 - friction / values["equipment.X.entropy_generation"]
    assert values["equipment.X.bejan_number"] == pytest.approx(share, rel=1e-9)


def test_equal_flows_of_constant_heat_capacity_are_level() -> None:
    values = base(one_piece("heat-exchanger", EXCHANGER, {**GIVENS, "3.mass_flow": 2.0}))
    assert values["equipment.X.pinch"] == pytest.approx(110.0)
    assert values["equipment.X.pinch_place"] == 0.0
    assert values["equipment.X.mean_temperature_difference"] == pytest.approx(110.0)


def condenser() -> Case:
    """Superheated refrigerant condensed and subcooled by water; the pinch is where condensation begins."""
    return one_piece(
        "heat-exchanger",
        EXCHANGER,
        {
            "1.pressure": 12e5,
            "1.temperature": 350.0,
            "1.mass_flow": 0.5,
            "2.subcooling": 5.0,
            "3.pressure": 3e5,
            "3.temperature": 293.15,
            "4.temperature": 313.15,
            "hot_pressure_drop": 2e4,
            "cold_pressure_drop": 3e4,
        },
        {"r": real_fluid("R134a"), "w": real_fluid("water")},
        {"1": "r", "2": "r", "3": "w", "4": "w"},
    )


def test_a_pinch_at_the_begin_of_condensation_is_found_where_it_is() -> None:
    values = base(condenser())
    h1 = PropsSI("H", "P", 12e5, "T", 350.0, "R134a")
    h2 = PropsSI("H", "P", 11.8e5, "T", PropsSI("T", "P", 11.8e5, "Q", 0, "R134a") - 5.0, "R134a")
    h3, h4 = (PropsSI("H", "P", p, "T", t, "Water") for p, t in ((3e5, 293.15), (2.7e5, 313.15)))
    share = np.linspace(0.0, 1.0, 20001)
    hot = PropsSI("T", "P", 11.8e5 + 2e4 * share, "H", h2 + share * (h1 - h2), "R134a")
    cold = PropsSI("T", "P", 3e5 - 3e4 * share, "H", h3 + share * (h4 - h3), "Water")
    place = int(np.argmin(hot - cold))
    assert 0.5 < share[place] < 0.95
    assert values["equipment.X.pinch_place"] == pytest.approx(share[place], abs=1e-4)
    assert values["equipment.X.pinch"] == pytest.approx((hot - cold)[place], abs=2e-3)
    mean = 1.0 / np.trapezoid(1.0 / (hot - cold), share)
    assert values["equipment.X.mean_temperature_difference"] == pytest.approx(mean, rel=1e-6)
    volume = [1.0 / PropsSI("D", "P", 11.8e5 + 2e4 * share, "H", h2 + share * (h1 - h2), "R134a")]
    volume.append(1.0 / PropsSI("D", "P", 3e5 - 3e4 * share, "H", h3 + share * (h4 - h3), "Water"))
    water = values["states.3.mass_flow"]
    friction = 0.5 * 2e4 * np.trapezoid(volume[0] / hot, share) + water * 3e4 * np.trapezoid(volume[1] / cold, share)
    assert values["equipment.X.entropy_by_pressure_drop"] == pytest.approx(friction, rel=1e-6)
    assert parts(values) == pytest.approx(values["equipment.X.entropy_generation"], rel=1e-7)


def test_every_column_has_its_own_pinch() -> None:
    case = condenser()
    levels = np.array([293.15, 295.15, 288.15])
    together = solve(case.plant, {**SURROUNDINGS, **case.givens, "states.3.temperature": levels}).values
    for column, level in enumerate(levels):
        alone = solve(case.plant, {**SURROUNDINGS, **case.givens, "states.3.temperature": level}).values
        for name in ("pinch", "pinch_place", "mean_temperature_difference", "entropy_by_pressure_drop"):
            path = f"equipment.X.{name}"
            assert together[path][column] == pytest.approx(alone[path][0], rel=1e-9), path


def test_parallel_flow_cannot_leave_warmer_than_the_hot_stream() -> None:
    givens = {**GIVENS, "3.mass_flow": 1.0}
    assert base(one_piece("heat-exchanger", EXCHANGER, givens))["equipment.X.pinch"] > 0.0
    case = one_piece("heat-exchanger", EXCHANGER, givens, options={"arrangement": "parallel-flow"})
    solution = case.solve()
    (doubt,) = (doubt for doubt in solution.doubts if doubt.stands)
    assert doubt.key == "temperature-cross"
    assert "At the outlets" in doubt.text
    assert np.isnan(solution.values["equipment.X.mean_temperature_difference"][0])

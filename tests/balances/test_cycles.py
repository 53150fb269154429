"""Cycles as loops of the network, against scripts written from the balances with an independent property library."""

from __future__ import annotations

from typing import Any

import pytest
from CoolProp.CoolProp import PropsSI

from reportgen.balances import Plant, Train, solve
from reportgen.errors import SolutionError
from reportgen.fluids import real_fluid
from tests.balances.cases import SURROUNDINGS, chain
from tests.balances.models import SimpleGas

T0 = 288.15


def base(plant: Plant, givens: dict[str, float]) -> dict[str, float]:
    """Base values of a solved plant, with the closures under test."""
    solution = solve(plant, {**SURROUNDINGS, **givens})
    values = {path: array[0] for path, array in solution.values.items() if array.dtype.kind == "f"}
    flows = [abs(values[path]) for path in values if path.endswith("entropy_flow")]
    assert abs(values["total.closure"]) < 1e-9 * max(flows)
    return values


def through(inlet: str, outlet: str) -> dict[str, tuple[str, ...]]:
    return {"inlet": (inlet,), "outlet": (outlet,)}


def across(hot_in: str, hot_out: str, cold_in: str, cold_out: str) -> dict[str, tuple[str, ...]]:
    return {"hot_inlet": (hot_in,), "hot_outlet": (hot_out,), "cold_inlet": (cold_in,), "cold_outlet": (cold_out,)}


def simple_rankine() -> tuple[Plant, dict[str, float]]:
    plant = chain(
        ("B", "heater", through("4", "1")),
        ("T", "turbine", through("1", "2")),
        ("C", "cooler", through("2", "3")),
        ("P", "pump", through("3", "4")),
        fluid=real_fluid("water"),
    )
    givens = {
        "states.1.pressure": 3e6,
        "states.1.temperature": 623.15,
        "states.1.mass_flow": 1.0,
        "states.2.pressure": 75e3,
        "states.3.quality": 0.0,
        "equipment.T.isentropic_efficiency": 1.0,
        "equipment.P.isentropic_efficiency": 1.0,
        "equipment.B.boundary_temperature": 1600.0,
        "equipment.C.boundary_temperature": 290.0,
    }
    return plant, givens


def test_figures_of_a_simple_steam_cycle() -> None:
    """Thermal efficiency 26.0 % (Çengel and Boles, "Thermodynamics", simple ideal Rankine cycle, from memory)."""
    plant, givens = simple_rankine()
    values = base(plant, givens)
    h1, s1 = (PropsSI(key, "P", 3e6, "T", 623.15, "Water") for key in "HS")
    h3, s3 = (PropsSI(key, "P", 75e3, "Q", 0, "Water") for key in "HS")
    h2, h4 = PropsSI("H", "P", 75e3, "S", s1, "Water"), PropsSI("H", "P", 3e6, "S", s3, "Water")
    net, heat = h1 - h2 - h4 + h3, h1 - h4
    assert values["total.net_power"] == pytest.approx(net, rel=1e-6)
    assert values["total.heat_supplied"] == pytest.approx(heat, rel=1e-6)
    assert values["total.heat_rejected"] == pytest.approx(h2 - h3, rel=1e-6)
    assert values["total.thermal_efficiency"] == pytest.approx(net / heat, rel=1e-6)
    assert values["total.thermal_efficiency"] == pytest.approx(0.260, abs=1e-3)
    assert values["total.second_law_efficiency"] == pytest.approx(net / (heat * (1 - T0 / 1600.0)), rel=1e-6)
    balance = values["total.heat_supplied"] - values["total.heat_rejected"] - values["total.net_power"]
    assert abs(balance) < 1e-6
    assert "total.coefficient_of_performance" not in values


def test_mechanical_losses_of_the_machines_count_in_the_cycle() -> None:
    plant, givens = simple_rankine()
    ideal = base(plant, givens)
    values = base(
        plant, {**givens, "equipment.T.mechanical_efficiency": 0.97, "equipment.P.mechanical_efficiency": 0.9}
    )
    shaft = 0.97 * ideal["equipment.T.power"] - ideal["equipment.P.power"] / 0.9
    assert values["total.net_power"] == pytest.approx(shaft, rel=1e-12)
    assert values["total.power"] == pytest.approx(shaft, rel=1e-12)
    assert values["total.heat_supplied"] == pytest.approx(ideal["total.heat_supplied"])
    balance = values["total.heat_supplied"] - values["total.heat_rejected"] - values["total.net_power"]
    lost = 0.03 * ideal["equipment.T.power"] + ideal["equipment.P.power"] * (1 / 0.9 - 1)
    assert balance == pytest.approx(lost, rel=1e-9)
    assert values["total.lost_work"] == pytest.approx(ideal["total.lost_work"] + lost, rel=1e-9)


def vapour_compression(boundary: float) -> tuple[Plant, dict[str, float]]:
    plant = chain(
        ("K", "compressor", through("1", "2")),
        ("C", "cooler", through("2", "3")),
        ("V", "throttling-valve", through("3", "4")),
        ("E", "heater", through("4", "1")),
        fluid=real_fluid("R134a"),
        trains={"R": Train("Refrigeration", ("K", "C", "V", "E"))},
    )
    givens = {
        "states.1.pressure": 2e5,
        "states.1.superheat": 5.0,
        "states.2.pressure": 9e5,
        "states.3.subcooling": 4.0,
        "equipment.K.isentropic_efficiency": 0.75,
        "equipment.E.heat": 1e4,
        "equipment.E.boundary_temperature": boundary,
    }
    return plant, givens


def test_a_refrigerator_counts_the_heat_taken_up() -> None:
    values = base(*vapour_compression(268.15))
    power = values["equipment.K.power"]
    for owner in ("trains.R", "total"):
        assert values[f"{owner}.coefficient_of_performance"] == pytest.approx(1e4 / power)
        assert values[f"{owner}.second_law_efficiency"] == pytest.approx(1e4 * (T0 / 268.15 - 1.0) / power)
        assert values[f"{owner}.net_power"] == pytest.approx(power)
        assert f"{owner}.thermal_efficiency" not in values


def test_a_heat_pump_counts_the_heat_given_off() -> None:
    """The condenser is warmer than the surroundings, the evaporator hardly colder: the heat given off has exergy."""
    plant, givens = vapour_compression(287.0)
    values = base(plant, {**givens, "equipment.C.boundary_temperature": 305.0})
    power, given_off = values["equipment.K.power"], -values["equipment.C.heat"]
    assert values["total.coefficient_of_performance"] == pytest.approx(given_off / power)
    assert values["total.second_law_efficiency"] == pytest.approx(given_off * (1.0 - T0 / 305.0) / power)
    train = Train("Cooling after all", ("K", "C", "V", "E"), purpose="cooling")
    cooling = base(
        Plant(plant.fluids, plant.states, plant.equipment, {"R": train}),
        {**givens, "equipment.C.boundary_temperature": 305.0},
    )
    assert cooling["trains.R.coefficient_of_performance"] == pytest.approx(1e4 / power)
    # One train is the whole; the whole has no purpose of its own.
    assert cooling["total.coefficient_of_performance"] == pytest.approx(given_off / power)


def test_losses_of_casings_and_motors_are_no_heat_that_a_heat_pump_gives_off() -> None:
    plant, givens = vapour_compression(287.0)
    more = {"equipment.C.boundary_temperature": 305.0, "equipment.K.heat": -300.0, "equipment.K.shaft_power": 4500.0}
    values = base(plant, {**givens, **more})
    given_off = -values["equipment.C.heat"]
    assert values["total.coefficient_of_performance"] == pytest.approx(given_off / 4500.0)
    assert values["total.second_law_efficiency"] == pytest.approx(given_off * (1.0 - T0 / 305.0) / 4500.0)
    assert values["total.heat_rejected"] == pytest.approx(given_off + 300.0)


def test_an_open_process_is_judged_like_a_cycle_where_a_purpose_is_stated() -> None:
    pieces = (
        ("C", "compressor", through("1", "2")),
        ("R", "heat-exchanger", across("5", "6", "2", "3")),
        ("B", "heater", through("3", "4")),
        ("T", "turbine", through("4", "5")),
    )
    givens = {
        "states.1.pressure": 1e5,
        "states.1.temperature": 300.0,
        "states.1.mass_flow": 1.0,
        "states.3.temperature": 700.0,
        "states.4.temperature": 1300.0,
        "states.6.pressure": 1e5,
        "equipment.C.pressure_ratio": 8.0,
        "equipment.C.isentropic_efficiency": 0.8,
        "equipment.T.isentropic_efficiency": 0.85,
        "equipment.B.boundary_temperature": 1500.0,
    }
    values = base(chain(*pieces, fluid=SimpleGas()), givens)
    assert "total.thermal_efficiency" not in values
    train = Train("Gas turbine", ("C", "R", "B", "T"), purpose="power")
    values = base(chain(*pieces, fluid=SimpleGas(), trains={"G": train}), givens)
    net = values["equipment.T.power"] - values["equipment.C.power"]
    assert values["trains.G.thermal_efficiency"] == pytest.approx(net / values["equipment.B.heat"])
    assert "total.thermal_efficiency" not in values


def test_streams_outside_the_circuit_are_reservoirs() -> None:
    """A condenser cooled by water: what the water takes up is the heat rejected; its exergy gain serves heating."""
    plant = chain(
        ("K", "compressor", through("1", "2")),
        ("C", "heat-exchanger", across("2", "3", "11", "12")),
        ("V", "throttling-valve", through("3", "4")),
        ("E", "heater", through("4", "1")),
        fluid=real_fluid("R134a"),
    )
    water = real_fluid("water")
    plant = Plant({**plant.fluids, "w": water}, {**plant.states, "11": "w", "12": "w"}, plant.equipment, plant.trains)
    _, givens = vapour_compression(288.0)
    givens |= {
        "states.11.pressure": 2e5,
        "states.11.temperature": 293.15,
        "states.12.temperature": 303.15,
        "equipment.C.heat": -200.0,
    }
    solution = solve(plant, {**SURROUNDINGS, **givens})
    values = {path: array[0] for path, array in solution.values.items() if array.dtype.kind == "f"}
    cycle = solution.cycles["total"]
    assert cycle.closed
    assert [reservoir.heat for reservoir in cycle.rejected] == ["equipment.C.duty"]
    assert cycle.rejected[0].states == ("11", "12")
    gain = values["states.11.mass_flow"] * (values["states.12.specific_exergy"] - values["states.11.specific_exergy"])
    assert values["total.second_law_efficiency"] == pytest.approx(gain / values["equipment.K.power"])
    # The heat that the shell loses on the cold side comes from the water, not from the refrigerant.
    balance = values["total.heat_supplied"] - values["total.heat_rejected"] + values["total.net_power"]
    assert abs(balance) < 1e-6


def test_two_circuits_that_have_nothing_in_common_are_no_cycle() -> None:
    def loop(*states: str) -> list[tuple[str, str, dict[str, tuple[str, ...]]]]:
        a, b, c, d = states
        return [
            (f"K{a}", "compressor", through(a, b)),
            (f"C{a}", "cooler", through(b, c)),
            (f"V{a}", "throttling-valve", through(c, d)),
            (f"E{a}", "heater", through(d, a)),
        ]

    plant = chain(*loop("1", "2", "3", "4"), *loop("5", "6", "7", "8"), fluid=real_fluid("R134a"))
    givens: dict[str, float] = {}
    for first, second, third in (("1", "2", "3"), ("5", "6", "7")):
        givens |= {
            f"states.{first}.pressure": 2e5,
            f"states.{first}.superheat": 5.0,
            f"states.{second}.pressure": 9e5,
            f"states.{third}.subcooling": 4.0,
            f"equipment.K{first}.isentropic_efficiency": 0.75,
            f"equipment.E{first}.heat": 1e4,
            f"equipment.E{first}.boundary_temperature": 268.15,
        }
    assert "total.coefficient_of_performance" not in base(plant, givens)


def test_a_loop_without_a_flow_says_which_to_add() -> None:
    plant, givens = vapour_compression(268.15)
    del givens["equipment.E.heat"]
    with pytest.raises(SolutionError, match=r"Nothing fixes the flow of states 1, 2, 3, 4.*states\.1\.mass_flow or"):
        solve(plant, {**SURROUNDINGS, **givens})


def test_stages_of_a_compression_have_overall_figures() -> None:
    gas = SimpleGas()
    plant = chain(
        ("K1", "compressor", through("1", "2")),
        ("C1", "cooler", through("2", "3")),
        ("P", "pipe", through("3", "4")),
        ("K2", "compressor", through("4", "5")),
        ("C2", "cooler", through("5", "6")),
        fluid=gas,
        trains={"A": Train("Compression", ("K2", "C1", "P", "K1", "C2"))},
    )
    givens: dict[str, Any] = {
        "states.1.pressure": 1e5,
        "states.1.temperature": 290.0,
        "states.1.mass_flow": 2.0,
        "states.2.pressure": 3e5,
        "states.3.temperature": 310.0,
        "states.5.pressure": 9e5,
        "states.6.temperature": 310.0,
        "equipment.C1.pressure_drop": 5e3,
        "equipment.P.pressure_drop": 2e3,
        "equipment.K1.isentropic_efficiency": 0.8,
        "equipment.K2.isentropic_efficiency": 0.8,
        "equipment.K2.mechanical_efficiency": 0.95,
    }
    values = base(plant, givens)
    import math

    work = gas.gas_constant * 290.0 * math.log(9.0)
    for owner in ("trains.A", "total"):
        assert values[f"{owner}.pressure_ratio"] == pytest.approx(9.0)
        assert values[f"{owner}.isothermal_work"] == pytest.approx(work)
        power = values["equipment.K1.power"] + values["equipment.K2.shaft_power"]
        assert values[f"{owner}.isothermal_efficiency"] == pytest.approx(2.0 * work / power)
    one_stage = values["equipment.K1.isothermal_efficiency"]
    assert one_stage == pytest.approx(
        2.0 * gas.gas_constant * 290.0 * math.log(3.0) / values["equipment.K1.power"], rel=1e-12
    )

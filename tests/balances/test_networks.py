"""Several pieces together: loops, recycles, trains, the sample axis; against scripts that know nothing of networks."""

from __future__ import annotations

from typing import Any

import CoolProp.CoolProp as CP
import numpy as np
import pytest
from scipy.optimize import brentq

from reportgen.balances import Plant, Train, solve
from reportgen.errors import SolutionError
from reportgen.fluids import real_fluid
from tests.balances.cases import CASES, SURROUNDINGS, VALVE, chain, one_piece
from tests.balances.models import SimpleGas
from tests.balances.test_structure import CYCLE, _cycle


def test_flow_of_a_refrigeration_cycle_from_any_of_its_duties() -> None:
    plant = _cycle(real_fluid("R134a"))
    base = solve(plant, {**CYCLE, "states.1.mass_flow": 0.05})
    for path in ("equipment.E.heat", "equipment.C.heat", "equipment.K.power"):
        other = solve(plant, {**CYCLE, path: float(base.values[path][0])})
        assert other.values["states.3.mass_flow"][0] == pytest.approx(0.05, rel=1e-9)


def test_condensing_pressure_from_duty_and_power_stays_on_the_saturation_line() -> None:
    """Heat and power given, the pressure of the saturated liquid unknown: iterated along saturation."""
    plant = _cycle(real_fluid("R134a"))
    base = solve(plant, {**CYCLE, "states.1.mass_flow": 0.05, "states.3.pressure": 0.7e6})
    givens = {path: float(base.values[path][0]) for path in ("equipment.E.heat", "equipment.K.power")}
    back = solve(plant, {**CYCLE, **givens, "equipment.K.heat": 0.0})
    assert back.values["states.3.pressure"][0] == pytest.approx(0.7e6, rel=1e-8)
    assert back.values["states.1.mass_flow"][0] == pytest.approx(0.05, rel=1e-9)


def _with_suction_line_exchanger() -> Plant:
    return chain(
        ("K", "compressor", {"inlet": ("1",), "outlet": ("2",)}),
        ("C", "cooler", {"inlet": ("2",), "outlet": ("3",)}),
        (
            "X",
            "heat-exchanger",
            {"hot_inlet": ("3",), "hot_outlet": ("4",), "cold_inlet": ("6",), "cold_outlet": ("1",)},
        ),
        ("V", "throttling-valve", {"inlet": ("4",), "outlet": ("5",)}),
        ("E", "heater", {"inlet": ("5",), "outlet": ("6",)}),
        fluid=real_fluid("R134a"),
    )


SUCTION_LINE = {
    **SURROUNDINGS,
    "states.3.temperature": 313.15,
    "states.3.quality": 0.0,
    "states.6.temperature": 263.15,
    "states.6.quality": 1.0,
    "equipment.K.isentropic_efficiency": 0.75,
    "equipment.E.heat": 1e4,
    "equipment.E.boundary_temperature": 268.0,
}


@pytest.mark.parametrize(
    "path",
    ["states.1.temperature", "states.1.superheat", "states.2.temperature", "states.4.temperature", "equipment.X.duty"],
)
def test_a_cycle_with_a_suction_line_exchanger_from_any_one_measurement(path: str) -> None:
    plant = _with_suction_line_exchanger()
    base = solve(plant, {**SUCTION_LINE, "states.1.temperature": 283.15})
    h3, h6 = CP.PropsSI("H", "T", 313.15, "Q", 0, "R134a"), CP.PropsSI("H", "T", 263.15, "Q", 1, "R134a")
    h1 = CP.PropsSI("H", "T", 283.15, "P", CP.PropsSI("P", "T", 263.15, "Q", 1, "R134a"), "R134a")
    # Evaporator and exchanger together: ṁ (h1 − h3) = Q̇.
    flow = 1e4 / (h1 - h3)
    assert base.values["states.1.mass_flow"][0] == pytest.approx(flow, rel=1e-7)
    assert base.values["equipment.X.duty"][0] == pytest.approx(flow * (h1 - h6), rel=1e-6)
    other = solve(plant, {**SUCTION_LINE, path: float(base.values[path][0])})
    assert other.values["equipment.K.power"][0] == pytest.approx(base.values["equipment.K.power"][0], rel=1e-9)


def test_a_valve_outlet_in_the_dome_is_found_from_its_temperature() -> None:
    case = one_piece(
        "throttling-valve",
        {"inlet": ("1",), "outlet": ("2",)},
        {"1.pressure": 1e6, "1.subcooling": 5.0, "1.mass_flow": 1.0, "2.temperature": 260.0},
        {"f": real_fluid("R134a")},
    )
    solution = case.solve()
    saturation = CP.PropsSI("P", "T", 260.0, "Q", 0, "R134a")
    assert solution.values["states.2.pressure"][0] == pytest.approx(saturation, rel=1e-7)
    assert 0.0 < solution.values["states.2.quality"][0] < 1.0
    assert not solution.warnings
    assert not [doubt for doubt in solution.doubts if doubt.stands]


def test_a_pressure_found_from_temperature_and_enthalpy_of_one_phase_raises_a_warning() -> None:
    givens = {"1.pressure": 5e5, "1.temperature": 600.0, "1.mass_flow": 1.0, "2.pressure": 1e5}
    case = one_piece("throttling-valve", {"inlet": ("1",), "outlet": ("2",)}, givens, {"f": real_fluid("water")})
    measured = float(case.solve().values["states.2.temperature"][0])
    back = case.solve(("states.2.pressure",), {"states.2.temperature": measured})
    assert back.values["states.2.pressure"][0] == pytest.approx(1e5, rel=1e-6)
    assert [doubt.path for doubt in back.doubts if doubt.stands] == ["states.2.pressure"]


def test_a_pressure_found_from_temperature_and_superheat_is_no_cause_for_doubt() -> None:
    givens = {"1.temperature": 350.0, "1.superheat": 8.0, "1.mass_flow": 1.0, "2.pressure": 1e5}
    case = one_piece("throttling-valve", {"inlet": ("1",), "outlet": ("2",)}, givens, {"f": real_fluid("R134a")})
    solution = case.solve()
    saturation = CP.PropsSI("P", "T", 342.0, "Q", 1, "R134a")
    assert solution.values["states.1.pressure"][0] == pytest.approx(saturation, rel=1e-6)
    assert not [doubt for doubt in solution.doubts if doubt.stands]


def _recuperated(fluid: Any) -> Plant:
    return chain(
        ("C", "compressor", {"inlet": ("1",), "outlet": ("2",)}),
        (
            "R",
            "heat-exchanger",
            {"hot_inlet": ("5",), "hot_outlet": ("6",), "cold_inlet": ("2",), "cold_outlet": ("3",)},
        ),
        ("B", "heater", {"inlet": ("3",), "outlet": ("4",)}),
        ("T", "turbine", {"inlet": ("4",), "outlet": ("5",)}),
        fluid=fluid,
    )


RECUPERATED = {
    **SURROUNDINGS,
    "states.1.pressure": 1e5,
    "states.1.temperature": 300.0,
    "states.1.mass_flow": 1.0,
    "states.6.pressure": 1e5,
    "states.6.temperature": 620.0,
    "equipment.C.pressure_ratio": 8.0,
    "equipment.C.isentropic_efficiency": 0.8,
    "equipment.T.isentropic_efficiency": 0.85,
    "equipment.B.boundary_temperature": 1900.0,
}


def test_a_recuperator_couples_heater_and_turbine() -> None:
    """Heat given, turbine inlet unknown: heater, turbine and recuperator are one block; against a scalar search."""
    heat = 700e3
    values = solve(_recuperated(real_fluid("air")), {**RECUPERATED, "equipment.B.heat": heat}).values

    def at(key: str, first: str, a: float, second: str, b: float) -> float:
        return float(CP.PropsSI(key, first, a, second, b, "Air"))

    h1, s1 = at("H", "P", 1e5, "T", 300.0), at("S", "P", 1e5, "T", 300.0)
    h2 = h1 + (at("H", "P", 8e5, "S", s1) - h1) / 0.8
    h6 = at("H", "P", 1e5, "T", 620.0)

    def excess(t4: float) -> float:
        h4, s4 = at("H", "P", 8e5, "T", t4), at("S", "P", 8e5, "T", t4)
        h5 = h4 - 0.85 * (h4 - at("H", "P", 1e5, "S", s4))
        return (h4 - (h2 + h5 - h6)) - heat

    t4 = brentq(excess, 900.0, 1950.0, xtol=1e-10)
    assert values["states.4.temperature"][0] == pytest.approx(t4, rel=1e-9)
    assert abs(values["total.closure"][0]) < 1e-9


def test_a_recycle_is_solved_with_its_compressor() -> None:
    """Mixer, compressor, cooler of given duty, splitter, valve back to the mixer; closed form for constant c_p."""
    gas = SimpleGas()
    plant = chain(
        ("M", "mixer", {"inlets": ("1", "7"), "outlet": ("2",)}),
        ("K", "compressor", {"inlet": ("2",), "outlet": ("3",)}),
        ("H", "cooler", {"inlet": ("3",), "outlet": ("4",)}),
        ("S", "splitter", {"inlet": ("4",), "outlets": ("5", "6")}),
        ("V", "throttling-valve", {"inlet": ("6",), "outlet": ("7",)}),
        fluid=gas,
    )
    givens = {
        **SURROUNDINGS,
        "states.1.pressure": 1e5,
        "states.1.temperature": 300.0,
        "states.1.mass_flow": 1.0,
        "equipment.K.pressure_ratio": 4.0,
        "equipment.K.isentropic_efficiency": 0.8,
        "equipment.S.split_fraction": 0.7,
        "equipment.H.heat": -1.5e5,
    }
    solution = solve(plant, givens)
    values = {path: array[0] for path, array in solution.values.items()}
    flow = 1.0 / 0.7
    gain = 1.0 + (4.0 ** (gas.gas_constant / gas.cp) - 1.0) / 0.8
    mixed = (300.0 * 1.0 - 0.3 * 1.5e5 / gas.cp) / (flow - 0.3 * flow * gain)
    assert values["states.2.mass_flow"] == pytest.approx(flow, rel=1e-12)
    assert values["states.2.temperature"] == pytest.approx(mixed, rel=1e-10)
    assert values["states.7.pressure"] == pytest.approx(1e5)
    assert "equipment.M.inlet_pressure.7" in {assumption.id for assumption in solution.assumptions}
    for path, value in values.items():
        if path.endswith(("mass_imbalance", "energy_imbalance", "closure")):
            assert abs(value) < 1e-7, path


def test_extraction_of_a_regenerative_steam_cycle() -> None:
    """Closed loop with an open feedwater heater; published efficiency 46.3 %, extraction 0.2270 (Çengel and Boles,
    "Thermodynamics: an engineering approach", ideal regenerative Rankine cycle, 15 MPa, 600 °C, 1.2 MPa, 10 kPa;
    from memory); recomputed with CoolProp.
    """
    plant = chain(
        ("T1", "turbine", {"inlet": ("1",), "outlet": ("2",)}),
        ("S", "splitter", {"inlet": ("2",), "outlets": ("3", "4")}),
        ("T2", "turbine", {"inlet": ("4",), "outlet": ("5",)}),
        ("C", "cooler", {"inlet": ("5",), "outlet": ("6",)}),
        ("P1", "pump", {"inlet": ("6",), "outlet": ("7",)}),
        ("D", "mixer", {"inlets": ("3", "7"), "outlet": ("8",)}),
        ("P2", "pump", {"inlet": ("8",), "outlet": ("9",)}),
        ("B", "heater", {"inlet": ("9",), "outlet": ("1",)}),
        fluid=real_fluid("water"),
    )
    givens = {
        **SURROUNDINGS,
        "states.1.pressure": 150e5,
        "states.1.temperature": 873.15,
        "states.2.pressure": 12e5,
        "states.5.pressure": 1e4,
        "states.6.quality": 0.0,
        "states.8.quality": 0.0,
        "states.1.mass_flow": 1.0,
        "equipment.B.boundary_temperature": 1500.0,
        **{f"equipment.{tag}.isentropic_efficiency": 1.0 for tag in ("T1", "T2", "P1", "P2")},
    }
    values = {path: array[0] for path, array in solve(plant, givens).values.items()}
    h1, s1 = (CP.PropsSI(key, "P", 150e5, "T", 873.15, "Water") for key in ("H", "S"))
    h2, h5 = (CP.PropsSI("H", "P", p, "S", s1, "Water") for p in (12e5, 1e4))
    h6, s6 = (CP.PropsSI(key, "P", 1e4, "Q", 0, "Water") for key in ("H", "S"))
    h8, s8 = (CP.PropsSI(key, "P", 12e5, "Q", 0, "Water") for key in ("H", "S"))
    h7, h9 = CP.PropsSI("H", "P", 12e5, "S", s6, "Water"), CP.PropsSI("H", "P", 150e5, "S", s8, "Water")
    share = (h8 - h7) / (h2 - h7)
    net = (h1 - h2) + (1 - share) * (h2 - h5) - (1 - share) * (h7 - h6) - (h9 - h8)
    assert values["equipment.S.split_fraction"] == pytest.approx(share, rel=1e-8)
    assert values["total.power"] == pytest.approx(net, rel=1e-8)
    assert share == pytest.approx(0.2270, rel=5e-3)
    assert values["total.power"] / values["equipment.B.heat"] == pytest.approx(0.463, rel=5e-3)
    # All machines are reversible: the heat exchanges generate the entropy, and the mixing.
    for tag in ("T1", "T2", "P1", "P2"):
        assert abs(values[f"equipment.{tag}.entropy_generation"]) < 1e-6
    assert values["equipment.D.entropy_generation"] > 0


@pytest.mark.parametrize("kind", sorted(CASES))
def test_all_columns_at_once_equal_one_column_at_a_time(kind: str) -> None:
    case = CASES[kind]
    columns = 9
    rng = np.random.default_rng(3)
    givens = {
        path: value * (1.0 + 1e-3 * rng.uniform(-1, 1, columns) * (np.arange(columns) > 0))
        for path, value in {**SURROUNDINGS, **case.givens}.items()
    }
    together = solve(case.plant, givens)
    _same_columns(case.plant, givens, together, columns)


def test_all_columns_of_a_coupled_block_equal_one_column_at_a_time() -> None:
    columns = 7
    plant = _recuperated(SimpleGas())
    base = {**RECUPERATED, "equipment.B.heat": 700e3}
    givens = {path: value * (1.0 + 1e-3 * np.arange(columns) * 0.3) for path, value in base.items()}
    givens["equipment.T.isentropic_efficiency"] = np.full(columns, 0.85)
    together = solve(plant, givens)
    assert any(step.key.startswith("simultaneous") for step in together.steps)
    _same_columns(plant, givens, together, columns)


def _same_columns(plant: Plant, givens: dict[str, Any], together: Any, columns: int) -> None:
    for column in range(columns):
        alone = solve(plant, {path: value[column] for path, value in givens.items()})
        for path, value in alone.values.items():
            if value.dtype.kind == "f":
                expected = together.values[path][column]
                assert value[0] == pytest.approx(expected, rel=1e-10, abs=1e-7, nan_ok=True), path


def test_a_column_that_fails_is_empty_and_leaves_the_others_alone() -> None:
    solution = VALVE.solve((), {"states.1.temperature": np.array([300.0, 4000.0, 310.0])})
    temperatures = solution.values["states.2.temperature"]
    assert temperatures[[0, 2]] == pytest.approx([300.0, 310.0])
    assert np.isnan(temperatures[1])
    assert any("1 of 3 columns" in warning.message for warning in solution.warnings)


def test_alternatives_share_an_inlet_and_only_one_counts_in_the_total() -> None:
    plant = chain(
        ("V", "throttling-valve", {"inlet": ("1",), "outlet": ("2",)}),
        ("T", "turbine", {"inlet": ("1",), "outlet": ("3",)}),
        fluid=real_fluid("water"),
        trains={"valve": Train("Valve", ("V",)), "turbine": Train("Turbine", ("T",), "valve")},
    )
    solution = solve(
        plant,
        {
            **SURROUNDINGS,
            "states.1.pressure": 40e5,
            "states.1.temperature": 673.15,
            "states.1.mass_flow": 1.5,
            "states.2.pressure": 10e5,
            "states.3.pressure": 10e5,
            "equipment.T.isentropic_efficiency": 0.7,
        },
    )
    values = {path: array[0] for path, array in solution.values.items()}
    assert values["total.entropy_generation"] == values["trains.valve.entropy_generation"]
    assert values["trains.turbine.entropy_generation"] < values["trains.valve.entropy_generation"]
    assert values["trains.turbine.power"] == values["equipment.T.power"]
    assert "total.power" not in values
    assert set(solution.accounts) == {"equipment.V", "equipment.T", "trains.valve", "trains.turbine", "total"}


def test_generation_is_additive_and_independent_of_where_the_boundary_is_drawn() -> None:
    """A compressor with cooler, as two pieces and as one control volume."""
    gas = SimpleGas()
    parts = chain(
        ("K", "compressor", {"inlet": ("1",), "outlet": ("2",)}),
        ("C", "cooler", {"inlet": ("2",), "outlet": ("3",)}),
        fluid=gas,
    )
    givens = {
        **SURROUNDINGS,
        "states.1.pressure": 1e5,
        "states.1.temperature": 290.0,
        "states.1.mass_flow": 1.0,
        "states.2.pressure": 4e5,
        "states.3.temperature": 310.0,
        "equipment.K.isentropic_efficiency": 0.8,
        "equipment.C.pressure_drop": 5e3,
        "equipment.C.boundary_temperature": 300.0,
    }
    split = solve(parts, givens).values
    whole = one_piece(
        "control-volume",
        {"inlets": ("1",), "outlets": ("3",)},
        {
            "1.pressure": 1e5,
            "1.temperature": 290.0,
            "1.mass_flow": 1.0,
            "3.pressure": float(split["states.3.pressure"][0]),
            "3.temperature": 310.0,
            "power": -float(split["equipment.K.power"][0]),
            "boundary_temperature": 300.0,
        },
    )
    values = whole.solve().values
    assert values["equipment.X.heat"][0] == pytest.approx(split["total.heat"][0], rel=1e-12)
    assert values["equipment.X.entropy_generation"][0] == pytest.approx(split["total.entropy_generation"][0], rel=1e-12)


@pytest.mark.parametrize(("miss", "text"), [(0.0, "grow in proportion"), (1.0, "no flow at all")])
def test_temperatures_alone_do_not_fix_a_flow_even_where_they_are_one_too_many(miss: float, text: str) -> None:
    """All temperatures of a recuperator between equal flows, but no flow: counting alone finds nothing wrong."""
    plant = _recuperated(SimpleGas())
    base = solve(plant, {**RECUPERATED, "states.4.temperature": 1300.0})
    givens = {**RECUPERATED, "states.4.temperature": 1300.0}
    del givens["states.1.mass_flow"]
    givens["states.3.temperature"] = float(base.values["states.3.temperature"][0]) + miss
    with pytest.raises(SolutionError, match="nothing fixes the flow"):
        solve(plant, givens)
    with pytest.raises(SolutionError, match=text):
        solve(plant, givens)


def test_two_temperatures_round_a_valve_may_belong_to_two_pressures() -> None:
    """Wet vapour throttled to gas, or liquid throttled into the dome: both have these temperatures and this loss."""
    case = one_piece(
        "throttling-valve",
        {"inlet": ("1",), "outlet": ("2",)},
        {"1.temperature": 311.42337962, "2.temperature": 284.14790791, "pressure_drop": 852196.93, "1.mass_flow": 0.1},
        {"f": real_fluid("R134a")},
    )
    pattern = r"more than one common solution: states\.1\.pressure may be 9\.703\d* bar or 12\.80\d* bar"
    with pytest.raises(SolutionError, match=pattern) as caught:
        case.solve()
    assert "give it, or a pressure loss" in str(caught.value)
    for pressure, quality in ((9.7033e5, True), (12.808e5, False)):
        drop = ("equipment.X.pressure_drop",) if quality else ("equipment.X.pressure_drop", "states.2.temperature")
        give = {"states.2.pressure": pressure - 852196.93} if quality else {"states.1.pressure": pressure}
        give |= {} if quality else {"equipment.X.pressure_drop": 852196.93}
        values = case.solve(drop, give).values
        assert values["states.1.pressure"][0] == pytest.approx(pressure, rel=2e-3)

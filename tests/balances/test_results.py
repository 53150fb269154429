"""What follows from a solved plant: energies that are stated, entropy with heat, exergy, curves, doubts."""

from __future__ import annotations

import numpy as np
import pytest

from reportgen.errors import InputError
from reportgen.fluids import real_fluid
from tests.balances.cases import CASES, VALVE, one_piece
from tests.balances.models import SimpleGas


def test_velocity_and_elevation_enter_the_energy_balance() -> None:
    case = one_piece(
        "throttling-valve",
        {"inlet": ("1",), "outlet": ("2",)},
        {
            "1.pressure": 2e5,
            "1.temperature": 300.0,
            "1.mass_flow": 1.0,
            "2.pressure": 1e5,
            "1.velocity": 20.0,
            "2.velocity": 120.0,
            "1.elevation": 5.0,
            "2.elevation": 35.0,
        },
    )
    solution = case.solve()
    drop = solution.values["states.1.specific_enthalpy"][0] - solution.values["states.2.specific_enthalpy"][0]
    assert drop == pytest.approx(0.5 * (120.0**2 - 20.0**2) + 9.80665 * 30.0, rel=1e-9)
    assert abs(solution.values["equipment.X.energy_imbalance"][0]) < 1e-8
    assert not {assumption.id for assumption in solution.assumptions} & {
        "states.1.no_elevation",
        "states.1.no_velocity",
    }


def test_an_elevation_on_one_side_of_a_piece_is_refused() -> None:
    with pytest.raises(InputError, match=r"stated for state 1 but not for state 2 of Throttling valve X") as refused:
        VALVE.solve((), {"states.1.elevation": 100.0})
    assert refused.value.faults[0].path == "states.2.elevation"
    at_the_datum = VALVE.solve((), {"states.1.elevation": 0.0})
    assert "states.2.no_elevation" in {assumption.id for assumption in at_the_datum.assumptions}
    other_side = CASES["heat-exchanger"].solve((), {"states.1.elevation": 3.0, "states.2.elevation": 7.0})
    assert not any("elevation" in assumption.id for assumption in other_side.assumptions)


def test_volume_and_molar_flow_give_the_mass_flow() -> None:
    gas = SimpleGas()
    density = 1e5 / (gas.gas_constant * 300.0)
    by_volume = VALVE.solve(("states.1.mass_flow",), {"states.1.volume_flow": 2.0})
    assert by_volume.values["states.2.mass_flow"][0] == pytest.approx(2.0 * density, rel=1e-12)
    by_amount = VALVE.solve(("states.1.mass_flow",), {"states.2.molar_flow": 50.0})
    assert by_amount.values["states.1.mass_flow"][0] == pytest.approx(50.0 * gas.molar_mass, rel=1e-12)


def test_heat_that_enters_needs_the_temperature_of_its_boundary() -> None:
    solution = CASES["heater"].solve(("equipment.X.boundary_temperature",))
    for path in ("equipment.X.entropy_generation", "total.entropy_generation", "total.lost_work", "total.closure"):
        assert np.isnan(solution.values[path][0])
        assert "boundary_temperature is not stated" in solution.reasons[path]
    assert solution.warnings[0].path == "equipment.X.boundary_temperature"
    assert not solution.accounts["total"].complete


def test_heat_that_leaves_without_a_boundary_temperature_leaves_at_the_surroundings() -> None:
    solution = CASES["cooler"].solve()
    values = solution.values
    assert values["equipment.X.entropy_with_heat"][0] == pytest.approx(-5e4 / 288.15, rel=1e-12)
    assert "equipment.X.heat.leaves_at_surroundings" in {assumption.id for assumption in solution.assumptions}


def test_exergy_is_left_out_where_the_dead_state_is_outside_the_range_of_the_fluid() -> None:
    cold = {"surroundings.temperature": 40.0}
    solution = VALVE.solve((), cold)
    assert np.isnan(solution.values["states.1.specific_exergy"][0])
    assert "outside 50 to 3000 K" in solution.reasons["states.1.specific_exergy"]
    assert any("no state at the surroundings" in warning.message for warning in solution.warnings)
    assert np.isfinite(solution.values["equipment.X.entropy_generation"][0])


def test_exergy_destroyed_is_the_lost_work() -> None:
    """Gouy–Stodola: exergy in with streams and power less exergy out equals T0 Ṡgen, for every kind."""
    for kind, case in CASES.items():
        solution = case.solve()
        values = {path: array[0] for path, array in solution.values.items()}
        piece = solution.pieces["X"]
        balance = 0.0
        for _, direction, state in piece.connections():
            mechanical = 0.5 * values.get(f"states.{state}.velocity", 0.0) ** 2
            mechanical += 9.80665 * values.get(f"states.{state}.elevation", 0.0)
            specific = values[f"states.{state}.specific_exergy"]
            if piece.kind.burns:  # the dead states of fuel, air and products do not cancel: their zeros do
                specific = values[f"states.{state}.specific_enthalpy"]
                specific -= 288.15 * values[f"states.{state}.specific_entropy"]
            exergy = values[f"states.{state}.mass_flow"] * (specific + mechanical)
            balance += exergy if direction == "in" else -exergy
        balance += piece.kind.power_sign * values[piece.kind.work(piece)] if piece.kind.power_sign else 0.0
        balance += sum(values[port.heat] - 288.15 * values[port.entropy] for port in piece.kind.heats(piece))
        assert values["equipment.X.lost_work"] == pytest.approx(balance, rel=1e-9, abs=1e-6), kind


def test_curves_begin_and_end_in_the_states_they_join() -> None:
    solution = CASES["heat-exchanger"].solve()
    curves = solution.curves(11)
    assert {curve.role for curve in curves} == {"hot stream", "cold stream"}
    for curve in curves:
        for index, state in ((0, curve.start), (-1, curve.end)):
            entropy = solution.values[f"states.{state}.specific_entropy"][0]
            assert curve.entropy[index] == pytest.approx(entropy, rel=1e-9)


DOUBTFUL = [
    ("mixer", ("states.2.mass_flow",), {"states.3.temperature": 550.0}, "states.2.mass_flow", "negative"),
    (
        "compressor",
        ("states.2.pressure",),
        {"states.2.pressure": 0.5e5},
        "equipment.X.pressure_ratio",
        "wrong way",
    ),
    ("throttling-valve", ("states.2.pressure",), {"states.2.pressure": 2e5}, "equipment.X.pressure_drop", "rises"),
    ("heat-exchanger", ("states.2.temperature",), {"states.2.temperature": 620.0}, "equipment.X.duty", "exchanged"),
    (
        "heat-exchanger",
        ("states.3.mass_flow",),
        {"states.2.temperature": 280.0, "states.3.mass_flow": 9.0},
        "equipment.X.duty",
        "At the cold end",
    ),
    ("heat-exchanger", ("states.3.mass_flow",), {"states.3.mass_flow": 0.8}, "equipment.X.duty", "At the hot end"),
]


@pytest.mark.parametrize(("kind", "drop", "give", "path", "text"), DOUBTFUL)
def test_solutions_that_cannot_be_meant_are_doubted(
    kind: str, drop: tuple[str, ...], give: dict[str, float], path: str, text: str
) -> None:
    assert not [doubt for doubt in CASES[kind].solve().doubts if doubt.stands]
    standing = [doubt for doubt in CASES[kind].solve(drop, give).doubts if doubt.stands]
    assert any(doubt.path == path and text in doubt.text for doubt in standing), standing


@pytest.mark.parametrize(
    ("kind", "drop", "give", "key", "path"),
    [
        ("heater", (), {"equipment.X.heat": -1e4}, "heat-against-direction", "equipment.X.heat"),
        ("cooler", (), {"equipment.X.heat": 1e4}, "heat-against-direction", "equipment.X.heat"),
        ("turbine", (), {"states.2.pressure": 1e6}, "pressure-against-machine", "equipment.X.pressure_ratio"),
        ("compressor", (), {"states.2.pressure": 0.9e5}, "power-against-machine", "equipment.X.power"),
        (
            "compressor",
            ("equipment.X.isentropic_efficiency",),
            {"states.2.temperature": 480.0, "equipment.X.heat": 0.0},
            "efficiency-without-heat",
            "equipment.X.isentropic_efficiency",
        ),
        (
            "compressor",
            ("equipment.X.isentropic_efficiency",),
            {"states.2.temperature": 480.0, "equipment.X.heat": -1e5},
            "efficiency",
            "equipment.X.isentropic_efficiency",
        ),
    ],
)
def test_each_doubt_goes_by_a_key_that_stays(
    kind: str, drop: tuple[str, ...], give: dict[str, float], key: str, path: str
) -> None:
    standing = {(doubt.key, doubt.path) for doubt in CASES[kind].solve(drop, give).doubts if doubt.stands}
    assert (key, path) in standing
    assert (key, path) not in {(doubt.key, doubt.path) for doubt in CASES[kind].solve().doubts if doubt.stands}


def test_a_doubt_is_told_along_the_sample_axis() -> None:
    solution = CASES["heat-exchanger"].solve(
        (), {"states.2.temperature": [295.0, 300.0, 289.0], "states.3.mass_flow": 9.0}
    )
    (cross,) = (doubt for doubt in solution.doubts if doubt.key == "temperature-cross")
    assert cross.measured == pytest.approx([5.0, 10.0, -1.0], abs=1e-6)
    assert not cross.stands


@pytest.mark.parametrize(
    ("kind", "inlet", "heat", "boundary", "gains"),
    [
        ("heater", 300.0, 1e5, 400.0, "stream"),
        ("heater", 220.0, 1e5, 280.0, "heat"),
        ("cooler", 400.0, -1e5, 330.0, "heat"),
        ("cooler", 280.0, -1e5, 200.0, "stream"),
    ],
)
def test_stream_and_heat_change_parts_below_the_surroundings(
    kind: str, inlet: float, heat: float, boundary: float, gains: str
) -> None:
    """ε = gained/spent, with the exergies ṁ (e_2 − e_1) and (1 − T0/T_b) Q̇ written out for a gas of constant cp."""
    give = {"states.1.temperature": inlet, "equipment.X.heat": heat, "equipment.X.boundary_temperature": boundary}
    values = CASES[kind].solve((), give | {"equipment.X.pressure_drop": 0.0}).values
    outlet = inlet + heat / (2.0 * 1004.5)
    stream = heat - 288.15 * 2.0 * 1004.5 * np.log(outlet / inlet)
    brought = (1.0 - 288.15 / boundary) * heat
    expected = stream / brought if gains == "stream" else brought / stream
    assert 0.0 < expected < 1.0
    assert values["equipment.X.exergetic_efficiency"][0] == pytest.approx(expected, rel=1e-9)


def test_heat_at_the_temperature_of_the_surroundings_keeps_nothing() -> None:
    assert CASES["cooler"].solve().values["equipment.X.exergetic_efficiency"][0] == 0.0


def test_temperatures_that_cross_inside_an_evaporator_are_found() -> None:
    """Gas cooled from 600 to 380 K raises steam at 10 bar (453 K) from 300 K: both ends are right, the pinch is not."""
    case = one_piece(
        "heat-exchanger",
        {"hot_inlet": ("1",), "hot_outlet": ("2",), "cold_inlet": ("3",), "cold_outlet": ("4",)},
        {
            "1.pressure": 1e5,
            "1.temperature": 600.0,
            "1.mass_flow": 10.0,
            "2.temperature": 380.0,
            "3.pressure": 10e5,
            "3.temperature": 300.0,
            "4.superheat": 20.0,
        },
        {"gas": SimpleGas(), "water": real_fluid("water")},
        {"1": "gas", "2": "gas", "3": "water", "4": "water"},
    )
    (doubt,) = (doubt for doubt in case.solve().doubts if doubt.stands)
    assert doubt.key == "temperature-cross"
    assert "At 24 % of the duty from the cold end" in doubt.text


def test_one_fluid_under_two_names_may_mix_but_not_with_another_zero() -> None:
    givens = {
        "1.pressure": 2e5,
        "1.temperature": 300.0,
        "1.mass_flow": 1.0,
        "2.pressure": 2e5,
        "2.temperature": 350.0,
        "2.mass_flow": 1.0,
    }
    ports = {"inlets": ("1", "2"), "outlet": ("3",)}
    names = {"1": "a", "2": "b", "3": "a"}
    alike = {"a": real_fluid("water"), "b": real_fluid("water")}
    values = one_piece("mixer", ports, givens, alike, names).solve().values
    assert values["states.3.mass_flow"][0] == pytest.approx(2.0)
    apart = {"a": real_fluid("R134a"), "b": real_fluid("R134a", "NBP")}
    with pytest.raises(InputError, match="different zeros"):
        one_piece("mixer", ports, givens, apart, names).solve()


def test_a_boundary_without_temperature_among_several_leaves_the_generation_out() -> None:
    case = one_piece(
        "control-volume",
        {"inlets": ("1",), "outlets": ("2",)},
        {
            "1.pressure": 2e5,
            "1.temperature": 300.0,
            "1.mass_flow": 1.0,
            "2.pressure": 2e5,
            "2.temperature": 320.0,
            "heat_ports.1.heat": 3e4,
            "heat_ports.2.temperature": 290.0,
        },
        options={"heat_ports": [{}, {}]},
    )
    solution = case.solve()
    lost = 3e4 - 1004.5 * 20.0
    assert solution.values["equipment.X.heat_ports.2.heat"][0] == pytest.approx(-lost, rel=1e-9)
    assert np.isnan(solution.values["equipment.X.entropy_generation"][0])
    assert solution.warnings[0].path == "equipment.X.heat_ports.1.temperature"
    stated = case.solve((), {"equipment.X.heat_ports.1.temperature": 400.0})
    change = 1004.5 * np.log(320.0 / 300.0)
    assert stated.values["equipment.X.entropy_generation"][0] == pytest.approx(change - 3e4 / 400.0 + lost / 290.0)

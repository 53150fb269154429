"""Nozzles, diffusers, pipes and fans: against closed forms for a perfect gas, and steam against CoolProp."""

from __future__ import annotations

import math

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from scipy.optimize import minimize_scalar

from reportgen.balances import solve
from reportgen.fluids import real_fluid
from tests.balances.cases import SURROUNDINGS, THROUGH, Case, chain, one_piece
from tests.balances.models import SimpleGas

GAS = SimpleGas()
K = GAS.cp / (GAS.cp - GAS.gas_constant)
NOZZLE = {"1.pressure": 3e5, "1.temperature": 500.0, "1.mass_flow": 2.0, "isentropic_efficiency": 1.0}


def base(case: Case) -> dict[str, float]:
    values = solve(case.plant, {**SURROUNDINGS, **case.givens}).values
    return {path: float(array[0]) for path, array in values.items() if array.dtype.kind == "f"}


def choked(case: Case) -> list[str]:
    return [doubt.key for doubt in case.solve().doubts if doubt.stands]


def test_a_convergent_nozzle_below_the_speed_of_sound() -> None:
    case = one_piece("nozzle", THROUGH, {**NOZZLE, "2.pressure": 2.2e5, "isentropic_efficiency": 0.96})
    values = base(case)
    drop = GAS.cp * 500.0 * (1.0 - (2.2 / 3.0) ** (GAS.gas_constant / GAS.cp))
    speed = math.sqrt(2.0 * 0.96 * drop)
    outlet = 500.0 - 0.96 * drop / GAS.cp
    assert values["states.2.velocity"] == pytest.approx(speed, rel=1e-12)
    assert values["states.2.temperature"] == pytest.approx(outlet, rel=1e-12)
    density = 2.2e5 / (GAS.gas_constant * outlet)
    assert values["equipment.X.outlet_area"] == pytest.approx(2.0 / (density * speed), rel=1e-12)
    assert values["equipment.X.mach_number"] == pytest.approx(speed / math.sqrt(K * GAS.gas_constant * outlet))
    assert values["equipment.X.throat_pressure"] == pytest.approx(2.2e5)
    assert choked(case) == []
    generated = 2.0 * (GAS.cp * math.log(outlet / 500.0) - GAS.gas_constant * math.log(2.2 / 3.0))
    assert values["equipment.X.entropy_generation"] == pytest.approx(generated, rel=1e-9)


def test_a_convergent_nozzle_chokes_at_the_critical_pressure() -> None:
    critical = (2.0 / (K + 1.0)) ** (K / (K - 1.0))
    values = base(one_piece("nozzle", THROUGH, {**NOZZLE, "2.pressure": 1e5}))
    assert values["equipment.X.throat_pressure"] == pytest.approx(3e5 * critical, rel=1e-5)
    flux = 3e5 * math.sqrt(K / (GAS.gas_constant * 500.0)) * (2.0 / (K + 1.0)) ** ((K + 1.0) / (2.0 * (K - 1.0)))
    assert values["equipment.X.throat_area"] == pytest.approx(2.0 / flux, rel=1e-9)
    assert choked(one_piece("nozzle", THROUGH, {**NOZZLE, "2.pressure": 3e5 * critical * 0.999})) == ["choked"]
    assert choked(one_piece("nozzle", THROUGH, {**NOZZLE, "2.pressure": 3e5 * critical * 1.001})) == []


def test_a_throat_that_is_given_fixes_the_flow_of_a_laval_nozzle() -> None:
    givens = {path: value for path, value in NOZZLE.items() if path != "1.mass_flow"}
    case = one_piece("nozzle", THROUGH, {**givens, "2.pressure": 0.2e5, "throat_area": 1e-3})
    values = base(case)
    flux = 3e5 * math.sqrt(K / (GAS.gas_constant * 500.0)) * (2.0 / (K + 1.0)) ** ((K + 1.0) / (2.0 * (K - 1.0)))
    assert values["states.1.mass_flow"] == pytest.approx(1e-3 * flux, rel=1e-9)
    assert values["equipment.X.mach_number"] > 1.5
    assert values["equipment.X.outlet_area"] > 1e-3
    assert choked(case) == []


def test_steam_expands_into_the_wet_region_through_its_throat() -> None:
    """Flux along the isentropic path by CoolProp, homogeneous equilibrium, its largest found by a scalar search."""
    givens = {"1.pressure": 10e5, "1.temperature": 480.0, "1.velocity": 60.0, "2.pressure": 2e5, "throat_area": 5e-4}
    case = one_piece("nozzle", THROUGH, {**givens, "isentropic_efficiency": 0.94}, {"steam": real_fluid("water")})
    values = base(case)
    h1, s1 = (PropsSI(key, "P", 10e5, "T", 480.0, "Water") for key in "HS")

    def flux(pressure: float) -> float:
        h, density = (PropsSI(key, "P", pressure, "S", s1, "Water") for key in ("H", "D"))
        return density * math.sqrt(2.0 * (h1 + 60.0**2 / 2 - h))

    best = minimize_scalar(lambda p: -flux(p), bounds=(2e5, 9.9e5), method="bounded", options={"xatol": 1e-3})
    assert values["states.1.mass_flow"] == pytest.approx(5e-4 * -best.fun, rel=1e-8)
    assert values["equipment.X.throat_pressure"] == pytest.approx(best.x, rel=1e-3)
    h2s = PropsSI("H", "P", 2e5, "S", s1, "Water")
    speed = math.sqrt(2.0 * 0.94 * (h1 + 60.0**2 / 2 - h2s))
    assert values["states.2.velocity"] == pytest.approx(speed, rel=1e-8)
    quality = PropsSI("Q", "P", 2e5, "H", h1 + 60.0**2 / 2 - speed**2 / 2, "Water")
    assert values["states.2.quality"] == pytest.approx(quality, rel=1e-7)
    assert math.isnan(values["equipment.X.mach_number"])


def test_a_diffuser_takes_over_the_velocity_of_a_nozzle() -> None:
    plant = chain(
        ("N", "nozzle", {"inlet": ("1",), "outlet": ("2",)}),
        ("D", "diffuser", {"inlet": ("2",), "outlet": ("3",)}),
        fluid=GAS,
    )
    givens = {
        **SURROUNDINGS,
        "states.1.pressure": 3e5,
        "states.1.temperature": 500.0,
        "states.1.mass_flow": 2.0,
        "states.2.pressure": 2.2e5,
        "equipment.N.isentropic_efficiency": 0.97,
        "equipment.D.isentropic_efficiency": 0.85,
    }
    solution = solve(plant, givens)
    values = {path: array[0] for path, array in solution.values.items() if array.dtype.kind == "f"}
    assert values["states.3.temperature"] == pytest.approx(500.0, rel=1e-12)  # the velocity behind it is neglected
    speed, warm = values["states.2.velocity"], values["states.2.temperature"]
    ideal = warm + 0.85 * speed**2 / 2 / GAS.cp
    assert values["states.3.pressure"] == pytest.approx(2.2e5 * (ideal / warm) ** (GAS.cp / GAS.gas_constant), rel=1e-9)
    recovery = (values["states.3.pressure"] - 2.2e5) / (0.5 * values["states.2.density"] * speed**2)
    assert values["equipment.D.pressure_recovery"] == pytest.approx(recovery)
    assert "states.3.no_velocity" in {assumption.id for assumption in solution.assumptions}
    assert values["total.entropy_generation"] > 0.0
    assert abs(values["total.energy_imbalance"]) < 1e-6


def test_kinetic_energy_counts_in_every_column() -> None:
    case = one_piece("nozzle", THROUGH, {**NOZZLE, "2.pressure": 2.2e5, "1.velocity": 50.0})
    speeds = np.array([50.0, 80.0, 20.0])
    together = solve(case.plant, {**SURROUNDINGS, **case.givens, "states.1.velocity": speeds}).values
    for column, speed in enumerate(speeds):
        alone = solve(case.plant, {**SURROUNDINGS, **case.givens, "states.1.velocity": speed}).values
        for path in ("states.2.velocity", "equipment.X.throat_area", "equipment.X.outlet_area"):
            assert together[path][column] == pytest.approx(alone[path][0], rel=1e-12), path


def test_total_efficiency_of_a_fan_with_its_motor() -> None:
    values = base(
        one_piece(
            "fan",
            THROUGH,
            {
                "1.pressure": 1e5,
                "1.temperature": 300.0,
                "1.mass_flow": 5.0,
                "1.velocity": 10.0,
                "2.velocity": 30.0,
                "pressure_rise": 2e3,
                "isentropic_efficiency": 0.8,
                "mechanical_efficiency": 0.92,
                "mechanical_boundary_temperature": 320.0,
            },
        )
    )
    ideal = GAS.cp * 300.0 * ((1.02) ** (GAS.gas_constant / GAS.cp) - 1.0)
    kinetic = (30.0**2 - 10.0**2) / 2
    power = 5.0 * (ideal + kinetic) / 0.8
    assert values["equipment.X.power"] == pytest.approx(power, rel=1e-9)
    assert values["equipment.X.shaft_power"] == pytest.approx(power / 0.92, rel=1e-9)
    lost = power / 0.92 - power
    assert values["equipment.X.mechanical_heat"] == pytest.approx(-lost, rel=1e-9)
    assert values["equipment.X.entropy_with_heat"] == pytest.approx(-lost / 320.0, rel=1e-9)
    change = 5.0 * (values["states.2.specific_entropy"] - values["states.1.specific_entropy"])
    assert values["equipment.X.entropy_generation"] == pytest.approx(change + lost / 320.0, rel=1e-9)


@pytest.mark.parametrize("kind", ["pipe", "compressor", "mixer", "heat-exchanger"])
def test_heat_over_several_boundaries(kind: str) -> None:
    """Two boundaries in the place of one: their heats add up, each with the entropy of its own temperature."""
    from tests.balances.cases import CASES

    case = CASES[kind]
    definition = case.plant.equipment["X"]
    piece = type(definition)(definition.kind, definition.ports, {"heat_ports": 2})
    plant = type(case.plant)(case.plant.fluids, case.plant.states, {"X": piece})
    drop = ("equipment.X.heat", "equipment.X.boundary_temperature")
    givens = {path: value for path, value in case.givens.items() if path not in drop}
    givens |= {
        "equipment.X.heat_ports.1.heat": -3e3,
        "equipment.X.heat_ports.1.temperature": 330.0,
        "equipment.X.heat_ports.2.heat": 1e3,
        "equipment.X.heat_ports.2.temperature": 350.0,
    }
    values = {path: array[0] for path, array in solve(plant, {**SURROUNDINGS, **givens}).values.items()}
    assert values["equipment.X.heat"] == pytest.approx(-2e3)
    assert values["equipment.X.entropy_with_heat"] == pytest.approx(-3e3 / 330.0 + 1e3 / 350.0)
    assert abs(values["equipment.X.energy_imbalance"]) < 1e-6
    assert abs(values["total.closure"]) < 1e-9 * 1e4

"""Solids and liquids brought together: against closed forms and against an independent library."""

from __future__ import annotations

import math

import pytest
from CoolProp.CoolProp import PropsSI
from scipy.integrate import quad
from scipy.optimize import brentq

from reportgen import fluids
from reportgen.errors import InputError, SolutionError
from tests.balances.processes.solved import base, one, process, solution

STEEL = fluids.incompressible("steel", density=7850.0, specific_heat=480.0, phase="solid", limits=(200.0, 1200.0))
#: c = 300 + 0.4 T [J/(kg K)].
ALLOY = fluids.incompressible(
    "alloy", density=8000.0, specific_heat=[300.0, 0.4], phase="solid", limits=(200.0, 1200.0)
)
OIL = fluids.incompressible("oil", density=870.0, specific_heat=1900.0, limits=(250.0, 600.0))
WATER = fluids.real_fluid("water")
CONTACT = {"P": process("thermal-contact", ("a", "b"), ("c", "d"))}


def test_three_blocks_come_to_one_temperature() -> None:
    """T = Σ m c T/Σ m c, S = Σ m c ln(T/T_i); the pressures are those of the surroundings, an assumption."""
    parts = {"a": ("s", 5.0, 700.0, 480.0), "b": ("o", 12.0, 300.0, 1900.0), "c": ("s", 2.0, 400.0, 480.0)}
    givens = {}
    for state, (_, mass, temperature, _) in parts.items():
        givens |= {f"states.{state}.mass": mass, f"states.{state}.temperature": temperature}
    states = {name: fluid for name, (fluid, *_) in parts.items()} | {"d": "s", "e": "o", "f": "s"}
    solved = solution(
        {"s": STEEL, "o": OIL}, states, {"P": process("thermal-contact", ("a", "b", "c"), ("d", "e", "f"))}, givens
    )
    found = base(solved)
    capacity = sum(mass * heat for _, mass, _, heat in parts.values())
    end = sum(mass * heat * temperature for _, mass, temperature, heat in parts.values()) / capacity
    for state in "def":
        assert found[f"states.{state}.temperature"] == pytest.approx(end, rel=1e-12)
        assert found[f"states.{state}.pressure"] == 1.0e5
    expected = sum(mass * heat * math.log(end / temperature) for _, mass, temperature, heat in parts.values())
    assert found["processes.P.entropy_generation"] == pytest.approx(expected, rel=1e-10)
    assert found["processes.P.work"] == 0.0
    assumed = {item.id for item in solved.assumptions}
    assert {"processes.P.one_temperature", "processes.P.adiabatic", "states.a.pressure.ambient"} <= assumed


def test_a_hot_block_in_water_against_the_library_and_quadrature() -> None:
    """Water at constant pressure takes up what the block gives off; both entropies by quadrature of c/T."""
    givens = {
        "states.a.mass": 20.0,
        "states.a.temperature": 600.0,
        "states.b.mass": 50.0,
        "states.b.pressure": 1.2e5,
        "states.b.temperature": 288.15,
    }
    found = base(solution({"m": ALLOY, "w": WATER}, {"a": "m", "b": "w", "c": "m", "d": "w"}, CONTACT, givens))

    def enthalpy(temperature: float) -> float:
        return float(PropsSI("H", "P", 1.2e5, "T", temperature, "Water"))

    def given_off(temperature: float) -> float:
        return 20.0 * quad(lambda t: 300.0 + 0.4 * t, temperature, 600.0)[0]

    end = brentq(lambda t: 50.0 * (enthalpy(t) - enthalpy(288.15)) - given_off(t), 288.2, 370.0, xtol=1e-12)
    assert found["states.c.temperature"] == pytest.approx(end, rel=1e-6)
    block = 20.0 * quad(lambda t: (300.0 + 0.4 * t) / t, 600.0, end, epsrel=1e-12)[0]
    water = 50.0 * quad(lambda t: PropsSI("C", "P", 1.2e5, "T", t, "Water") / t, 288.15, end, epsrel=1e-10)[0]
    assert found["processes.P.entropy_generation"] == pytest.approx(block + water, rel=1e-6)
    expansion = (
        1.2e5
        * 50.0
        * (1 / PropsSI("D", "P", 1.2e5, "T", end, "Water") - 1 / PropsSI("D", "P", 1.2e5, "T", 288.15, "Water"))
    )
    assert found["processes.P.work"] == pytest.approx(expansion, rel=1e-5)
    assert found["processes.P.energy_imbalance"] == pytest.approx(0.0, abs=1e-3)


def test_a_block_that_boils_water_in_a_rigid_vessel() -> None:
    """One body at constant volume, the other at constant pressure; the water ends wet."""
    givens = {
        "states.a.mass": 30.0,
        "states.a.temperature": 900.0,
        "states.b.mass": 5.0,
        "states.b.pressure": 1.0e5,
        "states.b.quality": 0.001,
    }
    solved = solution(
        {"m": STEEL, "w": WATER},
        {"a": "m", "b": "w", "c": "m", "d": "w"},
        {"P": process("thermal-contact", ("a", "b"), ("c", "d"), constant=("pressure", "volume"))},
        givens,
    )
    found = base(solved)
    density = PropsSI("D", "P", 1e5, "Q", 0.001, "Water")
    energy = PropsSI("U", "P", 1e5, "Q", 0.001, "Water")

    def imbalance(temperature: float) -> float:
        gained = 5.0 * (PropsSI("U", "D", density, "T", temperature, "Water") - energy)
        return float(gained - 30.0 * 480.0 * (900.0 - temperature))

    end = brentq(imbalance, 380.0, 640.0, xtol=1e-11)
    assert found["states.d.temperature"] == pytest.approx(end, rel=1e-6)
    assert found["processes.P.work"] == 0.0
    assert found["states.d.pressure"] == pytest.approx(PropsSI("P", "D", density, "T", end, "Water"), rel=1e-6)


def test_an_end_temperature_that_is_given_is_met_with_heat_from_outside() -> None:
    givens = {
        "states.a.mass": 5.0,
        "states.a.temperature": 500.0,
        "states.b.mass": 10.0,
        "states.b.temperature": 300.0,
        "states.c.temperature": 330.0,
        "processes.P.boundary_temperature": 290.0,
    }
    found = base(solution({"s": STEEL}, dict.fromkeys("abcd", "s"), CONTACT, givens))
    heat = 480.0 * (5.0 * (330.0 - 500.0) + 10.0 * 30.0)
    assert found["processes.P.heat"] == pytest.approx(heat, rel=1e-12)
    assert found["states.d.temperature"] == pytest.approx(330.0, rel=1e-12)
    expected = 480.0 * (5.0 * math.log(330.0 / 500.0) + 10.0 * math.log(330.0 / 300.0)) - heat / 290.0
    assert found["processes.P.entropy_generation"] == pytest.approx(expected, rel=1e-10)


def test_contact_that_ends_before_the_temperatures_are_one() -> None:
    """Both ends measured: the defaults give way, the heat from outside is what the balance leaves."""
    givens = {
        "states.a.mass": 5.0,
        "states.a.temperature": 500.0,
        "states.b.mass": 10.0,
        "states.b.temperature": 300.0,
        "states.c.temperature": 420.0,
        "states.d.temperature": 340.0,
    }
    solved = solution({"s": STEEL}, dict.fromkeys("abcd", "s"), CONTACT, givens)
    assert base(solved)["processes.P.heat"] == pytest.approx(480.0 * (5.0 * -80.0 + 10.0 * 40.0), abs=1e-6)
    assert "processes.P.one_temperature" not in {item.id for item in solved.assumptions}


def test_a_gas_heats_its_cylinder() -> None:
    air = fluids.ideal_gas("air", heat_capacity=1005.0)
    givens = {
        "states.a.mass": 2.0,
        "states.a.temperature": 300.0,
        "states.b.pressure": 20e5,
        "states.b.temperature": 420.0,
        "states.b.volume": 0.05,
    }
    found = base(
        solution(
            {"s": STEEL, "g": air},
            {"a": "s", "b": "g", "c": "s", "d": "g"},
            {"P": process("thermal-contact", ("a", "b"), ("c", "d"), constant="volume")},
            givens,
        )
    )
    mass = 20e5 * 0.05 / (air.gas_constant * 420.0)
    gas = mass * (1005.0 - air.gas_constant)
    end = (2.0 * 480.0 * 300.0 + gas * 420.0) / (2.0 * 480.0 + gas)
    assert found["states.d.temperature"] == pytest.approx(end, rel=1e-10)
    assert found["states.d.pressure"] == pytest.approx(20e5 * end / 420.0, rel=1e-10)


def test_what_cannot_be_compressed_is_refused_where_a_volume_changes() -> None:
    with pytest.raises(InputError, match="incompressible"):
        one(STEEL, "free-expansion", {"a.mass": 1.0, "a.temperature": 300.0, "b.volume": 1.0})


def test_isochoric_heat_of_a_solid() -> None:
    found = one(
        STEEL, "isochoric", {"a.mass": 3.0, "a.temperature": 300.0, "heat": 14400.0, "boundary_temperature": 400.0}
    )
    assert found["b.temperature"] == pytest.approx(310.0, rel=1e-12)
    assert found["work"] == 0.0


def test_bodies_without_a_mass_are_told() -> None:
    givens = {"states.a.mass": 5.0, "states.a.temperature": 500.0, "states.b.temperature": 300.0}
    with pytest.raises(SolutionError) as caught:
        solution({"s": STEEL}, dict.fromkeys("abcd", "s"), CONTACT, givens)
    assert "states.b.mass" in str(caught.value)

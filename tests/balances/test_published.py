"""Worked examples from textbooks, solved by the balances alone; each recomputed with CoolProp inside the test.

Published results are *from memory*: Çengel and Boles, "Thermodynamics: an engineering approach". Tolerances: 0.5 % or
one unit of the last printed digit against these, 1e-5 against what the independent library gives.
"""

from __future__ import annotations

import CoolProp.CoolProp as CP
import numpy as np
import pytest
from scipy.integrate import quad
from scipy.optimize import brentq

from reportgen.balances import EquipmentDefinition, Plant, solve
from reportgen.fluids import real_fluid
from tests.balances.cases import SURROUNDINGS, THROUGH, chain, one_piece

KELVIN = 273.15


def fahrenheit(value: float) -> float:
    return (value + 459.67) / 1.8


def test_throttle() -> None:
    case = one_piece(
        "throttling-valve",
        THROUGH,
        {"1.pressure": 7e6, "1.temperature": 450 + KELVIN, "2.pressure": 3e6, "1.mass_flow": 1.0},
        {"steam": real_fluid("water")},
    )
    generated = case.solve().values["equipment.X.entropy_generation"][0]
    h, s = (CP.PropsSI(key, "P", 7e6, "T", 450 + KELVIN, "Water") for key in ("H", "S"))
    assert generated == pytest.approx(CP.PropsSI("S", "P", 3e6, "H", h, "Water") - s, rel=1e-9)
    assert generated == pytest.approx(369.3, rel=5e-3)


def test_steam_water_mixer() -> None:
    psi, pound_per_minute, btu = 6894.757293168, 0.45359237 / 60, 1055.05585262
    case = one_piece(
        "mixer",
        {"inlets": ("1", "2"), "outlet": ("3",)},
        {
            "1.pressure": 20 * psi,
            "1.temperature": fahrenheit(50),
            "1.mass_flow": 300 * pound_per_minute,
            "2.pressure": 20 * psi,
            "2.temperature": fahrenheit(240),
            "3.temperature": fahrenheit(130),
            "heat": -180 * btu / 60,
            "boundary_temperature": fahrenheit(70),
        },
        {"water": real_fluid("water")},
    )
    values = case.solve().values
    h, s = ([CP.PropsSI(key, "P", 20 * psi, "T", fahrenheit(t), "Water") for t in (50, 240, 130)] for key in ("H", "S"))
    water = 300 * pound_per_minute
    steam = (water * (h[2] - h[0]) + 180 * btu / 60) / (h[1] - h[2])
    generated = (water + steam) * s[2] - water * s[0] - steam * s[1] + 180 * btu / 60 / fahrenheit(70)
    assert values["states.2.mass_flow"][0] == pytest.approx(steam, rel=1e-9)
    assert values["equipment.X.entropy_generation"][0] == pytest.approx(generated, rel=1e-9)
    assert steam / pound_per_minute == pytest.approx(22.7, rel=5e-3)
    assert generated * 60 * 5 / 9 / btu == pytest.approx(8.65, rel=5e-3)


def test_condenser_with_the_flow_of_air_unknown() -> None:
    """The book counts kelvins from 273; from 273.15 the result, a difference of large terms, would be 0.736 kW/K."""
    water, air = real_fluid("water"), real_fluid("air")
    flow = 10000 / 3600
    saturated = CP.PropsSI("P", "T", 35 + KELVIN, "Q", 1, "Water")
    case = one_piece(
        "heat-exchanger",
        {"hot_inlet": ("1",), "hot_outlet": ("2",), "cold_inlet": ("3",), "cold_outlet": ("4",)},
        {
            "1.temperature": 35 + KELVIN,
            "1.quality": 1.0,
            "2.temperature": 32 + KELVIN,
            "2.quality": 0.0,
            "1.mass_flow": flow,
            "3.pressure": 1e5,
            "3.temperature": 293.0,
            "4.temperature": 303.0,
        },
        {"steam": water, "air": air},
        {"1": "steam", "2": "steam", "3": "air", "4": "air"},
    )
    values = case.solve().values
    h1, s1 = (CP.PropsSI(key, "T", 35 + KELVIN, "Q", 1, "Water") for key in ("H", "S"))
    h2, s2 = (CP.PropsSI(key, "T", 32 + KELVIN, "Q", 0, "Water") for key in ("H", "S"))
    h3, s3 = (CP.PropsSI(key, "T", 293.0, "P", 1e5, "Air") for key in ("H", "S"))
    h4, s4 = (CP.PropsSI(key, "T", 303.0, "P", 1e5, "Air") for key in ("H", "S"))
    air_flow = flow * (h1 - h2) / (h4 - h3)
    generated = flow * (s2 - s1) + air_flow * (s4 - s3)
    assert values["states.3.mass_flow"][0] == pytest.approx(air_flow, rel=1e-9)
    assert values["equipment.X.entropy_generation"][0] == pytest.approx(generated, rel=1e-7)
    assert values["states.1.pressure"][0] == pytest.approx(saturated, rel=1e-9)
    assert generated == pytest.approx(745, rel=5e-3)


def test_air_compressor() -> None:
    case = one_piece(
        "compressor",
        THROUGH,
        {
            "1.pressure": 1e5,
            "1.temperature": 12 + KELVIN,
            "1.mass_flow": 0.2,
            "2.pressure": 8e5,
            "isentropic_efficiency": 0.8,
        },
        {"air": real_fluid("air")},
    )
    values = case.solve().values
    h1, s1 = (CP.PropsSI(key, "P", 1e5, "T", 12 + KELVIN, "Air") for key in ("H", "S"))
    h2 = h1 + (CP.PropsSI("H", "P", 8e5, "S", s1, "Air") - h1) / 0.8
    assert values["equipment.X.power"][0] == pytest.approx(0.2 * (h2 - h1), rel=1e-9)
    assert values["equipment.X.power"][0] == pytest.approx(58.0e3, rel=5e-3)
    assert values["states.2.temperature"][0] == pytest.approx(569.5, rel=5e-3)
    assert values["equipment.X.entropy_generation"][0] == pytest.approx(21.4, rel=1e-2)


def test_refrigeration_cycle_is_a_closed_loop() -> None:
    plant = chain(
        ("K", "compressor", {"inlet": ("1",), "outlet": ("2",)}),
        ("C", "cooler", {"inlet": ("2",), "outlet": ("3",)}),
        ("V", "throttling-valve", {"inlet": ("3",), "outlet": ("4",)}),
        ("E", "heater", {"inlet": ("4",), "outlet": ("1",)}),
        fluid=real_fluid("R134a"),
    )
    solution = solve(
        plant,
        {
            **SURROUNDINGS,
            "states.1.pressure": 0.14e6,
            "states.1.temperature": -10 + KELVIN,
            "states.1.mass_flow": 0.05,
            "states.2.pressure": 0.8e6,
            "states.2.temperature": 50 + KELVIN,
            "states.3.pressure": 0.72e6,
            "states.3.temperature": 26 + KELVIN,
            "states.4.pressure": 0.15e6,
            "equipment.E.boundary_temperature": 0 + KELVIN,
        },
    )
    values = {path: array[0] for path, array in solution.values.items()}
    h1, s1 = (CP.PropsSI(key, "P", 0.14e6, "T", -10 + KELVIN, "R134a") for key in ("H", "S"))
    h2 = CP.PropsSI("H", "P", 0.8e6, "T", 50 + KELVIN, "R134a")
    h3 = CP.PropsSI("H", "P", 0.72e6, "T", 26 + KELVIN, "R134a")
    hs = CP.PropsSI("H", "P", 0.8e6, "S", s1, "R134a")
    assert values["equipment.E.heat"] == pytest.approx(0.05 * (h1 - h3), rel=1e-9)
    assert values["equipment.K.power"] == pytest.approx(0.05 * (h2 - h1), rel=1e-9)
    assert values["equipment.K.isentropic_efficiency"] == pytest.approx((hs - h1) / (h2 - h1), rel=1e-9)
    assert values["equipment.E.heat"] == pytest.approx(7.93e3, rel=5e-3)
    assert values["equipment.K.power"] == pytest.approx(2.02e3, rel=5e-3)
    assert values["equipment.K.isentropic_efficiency"] == pytest.approx(0.939, rel=5e-3)
    assert values["equipment.E.heat"] / values["equipment.K.power"] == pytest.approx(3.93, rel=5e-3)
    assert abs(values["total.closure"]) < 1e-9
    assert abs(values["total.energy_imbalance"]) < 1e-8


def test_brayton_cycle_with_efficiencies() -> None:
    air = real_fluid("air")
    plant = chain(
        ("C", "compressor", {"inlet": ("1",), "outlet": ("2",)}),
        ("B", "heater", {"inlet": ("2",), "outlet": ("3",)}),
        ("T", "turbine", {"inlet": ("3",), "outlet": ("4",)}),
        fluid=air,
    )
    values = solve(
        plant,
        {
            **SURROUNDINGS,
            "states.1.pressure": 1e5,
            "states.1.temperature": 300.0,
            "states.1.mass_flow": 1.0,
            "states.3.temperature": 1300.0,
            "states.4.pressure": 1e5,
            "equipment.C.pressure_ratio": 8.0,
            "equipment.C.isentropic_efficiency": 0.8,
            "equipment.T.isentropic_efficiency": 0.85,
            "equipment.B.boundary_temperature": 1600.0,
        },
    ).values
    h1, s1 = (CP.PropsSI(key, "P", 1e5, "T", 300, "Air") for key in ("H", "S"))
    h2 = h1 + (CP.PropsSI("H", "P", 8e5, "S", s1, "Air") - h1) / 0.8
    h3, s3 = (CP.PropsSI(key, "P", 8e5, "T", 1300, "Air") for key in ("H", "S"))
    h4 = h3 - 0.85 * (h3 - CP.PropsSI("H", "P", 1e5, "S", s3, "Air"))
    assert values["equipment.C.power"][0] == pytest.approx(h2 - h1, rel=1e-8)
    assert values["equipment.T.power"][0] == pytest.approx(h3 - h4, rel=1e-8)
    net = values["equipment.T.power"][0] - values["equipment.C.power"][0]
    assert values["total.power"][0] == pytest.approx(net, rel=1e-12)
    assert net / values["equipment.B.heat"][0] == pytest.approx(0.266, rel=5e-3)
    assert values["equipment.C.power"][0] / values["equipment.T.power"][0] == pytest.approx(0.592, rel=5e-3)
    assert values["states.4.temperature"][0] == pytest.approx(853, rel=5e-3)


@pytest.mark.parametrize(("hot", "cold", "published"), [(20, 5, 0.191), (27, 0, 0.341)])
def test_wall(hot: float, cold: float, published: float) -> None:
    plant = Plant({}, {}, {"wall": EquipmentDefinition("control-volume", {}, {"heat_ports": [{}, {}]})})
    givens = {
        **SURROUNDINGS,
        "equipment.wall.heat_ports.1.heat": 1035.0,
        "equipment.wall.heat_ports.1.temperature": hot + KELVIN,
        "equipment.wall.heat_ports.2.temperature": cold + KELVIN,
    }
    values = solve(plant, givens).values
    assert values["equipment.wall.heat_ports.2.heat"][0] == pytest.approx(-1035.0)
    exact = 1035 / (cold + KELVIN) - 1035 / (hot + KELVIN)
    assert values["equipment.wall.entropy_generation"][0] == pytest.approx(exact, rel=1e-12)
    assert exact == pytest.approx(published, abs=1e-3)


def test_polytropic_efficiency_of_steam_against_the_path_of_constant_efficiency() -> None:
    """The stated path (entropy even in ln p) against dh = η v dp integrated finely by an independent library."""
    eta, p1, t1, p2 = 0.85, 40e5, 673.15, 10e5
    h, s = (CP.PropsSI(key, "P", p1, "T", t1, "Water") for key in ("H", "S"))
    steps = 4000
    for p_a, p_b in zip(
        *(np.geomspace(p1, p2, steps + 1)[part] for part in (slice(None, -1), slice(1, None))), strict=True
    ):
        volume = 1 / CP.PropsSI("D", "P", (p_a * p_b) ** 0.5, "H", h, "Water")
        h += eta * volume * (p_b - p_a)
    case = one_piece(
        "turbine",
        THROUGH,
        {"1.pressure": p1, "1.temperature": t1, "1.mass_flow": 1.0, "2.pressure": p2, "polytropic_efficiency": eta},
        {"steam": real_fluid("water")},
    )
    values = case.solve().values
    drop = values["states.1.specific_enthalpy"][0] - values["states.2.specific_enthalpy"][0]
    assert drop == pytest.approx(values["states.1.specific_enthalpy"][0] - h, rel=2e-4)
    assert values["states.2.specific_entropy"][0] > s


def test_polytropic_efficiency_of_an_ideal_gas_is_exact() -> None:
    """Against the closed form for constant heat capacity, η_p = (R/c_p) ln r / ln(T2/T1)."""
    case = one_piece(
        "compressor",
        THROUGH,
        {
            "1.pressure": 1e5,
            "1.temperature": 300.0,
            "1.mass_flow": 1.0,
            "2.pressure": 5e5,
            "polytropic_efficiency": 0.87,
        },
    )
    values = case.solve().values
    ratio = np.exp(287.0 / 1004.5 * np.log(5.0) / 0.87)
    assert values["states.2.temperature"][0] == pytest.approx(300.0 * ratio, rel=1e-12)


def test_outlet_pressure_of_a_steam_turbine_from_its_power() -> None:
    steam = real_fluid("water")
    h1, s1 = (CP.PropsSI(key, "P", 40e5, "T", 673.15, "Water") for key in ("H", "S"))
    wanted = 600e3
    pressure = brentq(lambda p: 0.8 * (h1 - CP.PropsSI("H", "P", p, "S", s1, "Water")) - wanted, 1e4, 40e5, xtol=1e-8)
    case = one_piece(
        "turbine",
        THROUGH,
        {
            "1.pressure": 40e5,
            "1.temperature": 673.15,
            "1.mass_flow": 1.0,
            "power": wanted,
            "isentropic_efficiency": 0.8,
        },
        {"steam": steam},
    )
    assert case.solve().values["states.2.pressure"][0] == pytest.approx(pressure, rel=1e-9)


def test_entropy_along_an_isobar_is_the_integral_of_heat_over_temperature() -> None:
    case = one_piece(
        "heater",
        THROUGH,
        {"1.pressure": 2e5, "1.temperature": 300.0, "1.mass_flow": 1.0, "2.temperature": 380.0},
        {"water": real_fluid("water")},
    )
    values = case.solve().values
    integral, _ = quad(lambda t: CP.PropsSI("C", "P", 2e5, "T", t, "Water") / t, 300.0, 380.0)
    change = values["states.2.specific_entropy"][0] - values["states.1.specific_entropy"][0]
    assert change == pytest.approx(integral, rel=1e-9)
    assert np.isnan(values["equipment.X.entropy_generation"][0])

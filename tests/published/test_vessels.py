"""Worked examples of vessels as calculation files through the command line, as in ``test_worked_examples``."""

from __future__ import annotations

import math

import pytest
from CoolProp.CoolProp import PropsSI

from tests.published.test_worked_examples import CENGEL, evaluated, examples

STEAM_TANK, AIR_BLOWDOWN = "steam-tank", "air-blowdown"
#: Molar gas constant [J/(mol K)], exact: SI; molar mass [kg/mol] of the air in the file, NASA/TP-2002-211556.
GAS_CONSTANT = 8.31446261815324
AIR = GAS_CONSTANT / (0.7808 * 28.0134e-3 + 0.2095 * 31.9988e-3 + 0.0097 * 39.948e-3)
HEAT_CAPACITY = 1004.72  # J/(kg K), as in the file


def test_evacuated_tank_filled_with_steam() -> None:
    """Published: 456.2 °C (CENGEL, from memory). The content ends with u equal to the enthalpy of the line."""
    values = evaluated(STEAM_TANK)
    enthalpy, entropy = (PropsSI(name, "P", 1e6, "T", 573.15, "Water") for name in ("H", "S"))
    temperature, end, density = (PropsSI(name, "P", 1e6, "U", enthalpy, "Water") for name in ("T", "S", "D"))
    assert values["vessels.V-1.final_temperature"] == pytest.approx(456.2 + 273.15, abs=0.005 * 456.2), CENGEL
    assert values["vessels.V-1.final_temperature"] == pytest.approx(temperature, rel=1e-6)
    generated = values["vessels.V-1.entropy_generation"] / values["vessels.V-1.final_mass"]
    assert generated == pytest.approx(514.0, rel=0.005)
    assert generated == pytest.approx(end - entropy, rel=1e-5)
    assert values["vessels.V-1.final_mass"] == pytest.approx(density, rel=1e-6)


def test_air_let_out_of_a_tank() -> None:
    """Published (analytic): 155.4 K, 3.91 kJ/K. S_gen = R [m1 ln(p1/p2) − k (m1 − m2)] for pressures p ~ m^k."""
    values = evaluated(AIR_BLOWDOWN)
    ratio = HEAT_CAPACITY / (HEAT_CAPACITY - AIR)
    temperature = 300.0 * 0.1 ** ((ratio - 1.0) / ratio)
    first, last = 1e6 / (AIR * 300.0), 1e5 / (AIR * temperature)
    generated = AIR * (first * math.log(10.0) - ratio * (first - last))
    assert values["vessels.V-1.final_temperature"] == pytest.approx(155.4, rel=0.005)
    assert values["vessels.V-1.final_temperature"] == pytest.approx(temperature, rel=1e-7)
    assert values["vessels.V-1.entropy_generation"] == pytest.approx(3910.0, rel=0.005)
    assert values["vessels.V-1.entropy_generation"] == pytest.approx(generated, rel=1e-7)
    assert values["vessels.V-1.mass_transferred"] == pytest.approx(first - last, rel=1e-8)


def test_every_example_folder_with_vessels_is_used() -> None:
    assert {STEAM_TANK, AIR_BLOWDOWN} == examples(vessels=True)

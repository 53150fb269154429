"""Worked examples of textbooks, written as calculation files and evaluated through the command line.

Each value is met twice: the published one (recalled from the named book, not read in it: *from memory*) within 0.5 % or
one unit of its last printed digit, whichever is larger; and the same quantity recomputed here from the balances with an
independent property library within 1e-5.
"""

from __future__ import annotations

import functools
import json
import math
from collections.abc import Callable
from pathlib import Path
from typing import Any

import cantera
import cea
import numpy as np
import pytest
from click.testing import CliRunner
from CoolProp.CoolProp import PropsSI

from reportgen.cli import main

HERE = Path(__file__).parent
CENGEL = "Çengel & Boles, Thermodynamics: An Engineering Approach, worked example, from memory"
BTU = 1055.05585262  # J, International Table Btu, exact: NIST SP 811, appendix B
POUND = 0.45359237  # kg, exact: NIST SP 811, appendix B
RANKINE = 5.0 / 9.0  # K


@functools.cache
def evaluated(example: str) -> dict[str, float]:
    """Path -> base value [SI] of one example, through ``reportgen evaluate --json``."""
    result = CliRunner().invoke(main, ["evaluate", str(HERE / example), "--json"], catch_exceptions=False)
    assert result.exit_code == 0, result.output
    return {path: entry["value"] for path, entry in json.loads(result.stdout)["values"].items()}


def water(output: str, *pair: object) -> float:
    return PropsSI(output, *pair, "Water")


#: Molar masses [g/mol] as printed with the coefficients, NASA/TP-2002-211556. Cantera's atomic weights are newer and
#: make nitrogen heavier by 2e-5, which is not what is compared here.
MOLAR_MASS = 0.7808 * 28.0134 + 0.2095 * 31.9988 + 0.0097 * 39.948


class Air:
    """Dry air as an ideal gas by Cantera's own NASA data (N2, O2, Ar by volume as in the files)."""

    def __init__(self, temperature: float, pressure: float) -> None:
        gas = _gas()
        gas.TPX = temperature, pressure, {"N2": 0.7808, "O2": 0.2095, "Ar": 0.0097}
        self.enthalpy, self.entropy = gas.enthalpy_mole / MOLAR_MASS, gas.entropy_mole / MOLAR_MASS
        self.temperature = gas.T

    @classmethod
    def from_pair(cls, pressure: float, *, enthalpy: float | None = None, entropy: float | None = None) -> Air:
        gas = _gas()
        gas.TPX = 300.0, pressure, {"N2": 0.7808, "O2": 0.2095, "Ar": 0.0097}
        if enthalpy is not None:
            gas.HP = enthalpy * MOLAR_MASS / gas.mean_molecular_weight, pressure
        else:
            gas.SP = entropy * MOLAR_MASS / gas.mean_molecular_weight, pressure
        return cls(gas.T, pressure)


@functools.cache
def _gas() -> cantera.Solution:
    # Nitrogen and oxygen in nine coefficients; argon, whose heat capacity is constant, is in the other file only.
    species = {
        item.name: item for file in ("nasa_gas.yaml", "airNASA9.yaml") for item in cantera.Species.list_from_file(file)
    }
    return cantera.Solution(thermo="ideal-gas", species=[species[name] for name in ("N2", "O2", "Ar")])


# --- the quantities, recomputed from the balances alone -----------------------------------------------------------


def throttle() -> float:
    return water("S", "P", 3e6, "H", water("H", "P", 7e6, "T", 723.15)) - water("S", "P", 7e6, "T", 723.15)


def _mixer() -> tuple[float, float]:
    pressure = 20 * 6894.757293168
    cold, steam, warm = (283.15, 388.7055555555556, 327.59444444444443)
    enthalpy = {t: water("H", "P", pressure, "T", t) for t in (cold, steam, warm)}
    entropy = {t: water("S", "P", pressure, "T", t) for t in (cold, steam, warm)}
    flow, heat, boundary = 300 * POUND / 60, -180 * BTU / 60, 529.67 * RANKINE
    added = (flow * (enthalpy[warm] - enthalpy[cold]) - heat) / (enthalpy[steam] - enthalpy[warm])
    generated = (flow + added) * entropy[warm] - flow * entropy[cold] - added * entropy[steam] - heat / boundary
    return added, generated


def condenser() -> float:
    flow = 10000 / 3600
    vapour = {key: water(key, "T", 308.15, "Q", 1) for key in "HS"}
    liquid = {key: water(key, "T", 305.15, "Q", 0) for key in "HS"}
    entering, leaving = Air(293.0, 101325.0), Air(303.0, 101325.0)  # as rounded by the book, see the file
    air = flow * (vapour["H"] - liquid["H"]) / (leaving.enthalpy - entering.enthalpy)
    return flow * (liquid["S"] - vapour["S"]) + air * (leaving.entropy - entering.entropy)


def air_change() -> float:
    return Air(330.15, 6e5).entropy - Air(290.15, 1e5).entropy


def _machine(first: Air, pressure: float, efficiency: float, *, turbine: bool) -> Air:
    ideal = Air.from_pair(pressure, entropy=first.entropy).enthalpy
    factor = efficiency if turbine else 1 / efficiency
    return Air.from_pair(pressure, enthalpy=first.enthalpy + factor * (ideal - first.enthalpy))


def _air_compressor() -> tuple[Air, Air]:
    first = Air(285.15, 1e5)
    return first, _machine(first, 8e5, 0.8, turbine=False)


def _brayton() -> tuple[Air, Air, Air, Air]:
    first, third = Air(300.0, 1e5), Air(1300.0, 8e5)
    return (
        first,
        _machine(first, 8e5, 0.8, turbine=False),
        third,
        _machine(third, 1e5, 0.85, turbine=True),
    )


def _rankine() -> dict[str, float]:
    """Per kilogram of steam; lost work T0 (Δs of the steam − heat over the temperature of the boundary)."""
    h1, s1 = (water(key, "P", 75e3, "Q", 0) for key in "HS")
    h3, s3 = (water(key, "P", 3e6, "T", 623.15) for key in "HS")
    h2, h4 = water("H", "P", 3e6, "S", s1), water("H", "P", 75e3, "S", s3)
    supplied, rejected = h3 - h2, h4 - h1
    return {
        "efficiency": 1 - rejected / supplied,
        "boiler": 290.0 * (s3 - s1 - supplied / 1600.0),
        "condenser": 290.0 * (s1 - s3) + rejected,
    }


def _refrigerator() -> dict[str, float]:
    def at(output: str, *pair: object) -> float:
        return PropsSI(output, *pair, "R134a")

    h1, s1 = at("H", "P", 0.14e6, "T", 263.15), at("S", "P", 0.14e6, "T", 263.15)
    h2, h3 = at("H", "P", 0.8e6, "T", 323.15), at("H", "P", 0.72e6, "T", 299.15)
    power = 0.05 * (h2 - h1)
    return {
        "cooling": 0.05 * (h1 - h3),
        "power": power,
        "efficiency": 0.05 * (at("H", "P", 0.8e6, "S", s1) - h1) / power,
        "performance": 0.05 * (h1 - h3) / power,
    }


# --- closed systems: the same from textbooks, iron and copper in closed form ----------------------------------------

MORAN = "Moran & Shapiro, Fundamentals of Engineering Thermodynamics, worked example, from memory"


def _iron() -> tuple[float, float]:
    """Change of entropy of the block, and entropy that the lake takes up [J/K]."""
    return 50 * 450 * math.log(285 / 500), 50 * 450 * (500 - 285) / 285


def _copper() -> tuple[float, float]:
    """Changes of entropy of the hot and the cold block [J/K]."""
    return 1.5 * 386 * math.log(313.15 / 333.15), 1.5 * 386 * math.log(313.15 / 293.15)


def _mixed_gases() -> float:
    """Entropy generated [J/K] by Cantera: 3 kmol of O2 and 5 kmol of CO2, each from 25 °C and 2 bar to its part."""
    gas = cantera.Solution("gri30.yaml")

    def entropy(composition: dict[str, float]) -> float:
        gas.TPX = 298.15, 2e5, composition
        return float(gas.entropy_mole)

    return 8 * entropy({"O2": 3, "CO2": 5}) - 3 * entropy({"O2": 1}) - 5 * entropy({"CO2": 1})


def _change(values: Values, before: str, after: str) -> float:
    return values[f"states.{after}.entropy"] - values[f"states.{before}.entropy"]


# --- combustion: complete products of one kilomole of methane, unmixed streams at 25 °C and 1 atm -------------------


def _burner() -> tuple[float, float]:
    """Adiabatic temperature [K] and entropy generated [kJ/K], 50 % excess air of 21 % oxygen; data of ``cea``."""
    mixture = cea.Mixture(["CH4", "O2", "N2", "CO2", "H2O"])
    nitrogen = 3.0 * 79.0 / 21.0
    streams = ([1.0, 0.0, 0.0, 0.0, 0.0], [0.0, 3.0, nitrogen, 0.0, 0.0])
    products = [0.0, 1.0, nitrogen, 1.0, 2.0]
    modern = 8314.46261815324 / cea.R  # its gas constant is that of 1986

    def whole(moles: list[float], quantity: Any, temperature: float) -> float:
        weights = mixture.moles_to_weights(np.array(moles))
        more = (1.01325,) if quantity == cea.ENTROPY else ()
        return float(mixture.calc_property(quantity, weights, temperature, *more) * weights.sum() * modern / 1e3)

    before = {key: sum(whole(moles, key, 298.15) for moles in streams) for key in (cea.ENTHALPY, cea.ENTROPY)}
    low, high = 1000.0, 3000.0
    for _ in range(60):
        middle = 0.5 * (low + high)
        cool = whole(products, cea.ENTHALPY, middle) < before[cea.ENTHALPY]
        low, high = (middle, high) if cool else (low, middle)
    return low, whole(products, cea.ENTROPY, low) - before[cea.ENTROPY]


# --- the table: example, quantity, published number and its unit in the last digit, from the file, recomputed -------

Values = dict[str, float]
Row = tuple[str, str, float, float, Callable[[Values], float], Callable[[], float]]

ROWS: list[Row] = [
    (
        "throttle",
        "entropy generated per mass, kJ/(kg K)",
        0.3693,
        1e-4,
        lambda v: v["equipment.V-1.entropy_generation"] / 1e3,
        lambda: throttle() / 1e3,
    ),
    (
        "steam-water-mixer",
        "steam flow, lb/min",
        22.7,
        0.1,
        lambda v: v["states.2.mass_flow"] * 60 / POUND,
        lambda: _mixer()[0] * 60 / POUND,
    ),
    (
        "steam-water-mixer",
        "entropy generation, Btu/(min °R)",
        8.65,
        0.01,
        lambda v: v["equipment.M-1.entropy_generation"] * 60 * RANKINE / BTU,
        lambda: _mixer()[1] * 60 * RANKINE / BTU,
    ),
    (
        "condenser",
        "entropy generation, kW/K",
        0.745,
        1e-3,
        lambda v: v["equipment.C-1.entropy_generation"] / 1e3,
        lambda: condenser() / 1e3,
    ),
    (
        "air-variable-cp",
        "entropy change, kJ/(kg K)",
        -0.3844,
        1e-4,
        lambda v: (v["states.2.specific_entropy"] - v["states.1.specific_entropy"]) / 1e3,
        lambda: air_change() / 1e3,
    ),
    (
        "air-compressor",
        "outlet temperature, K",
        569.5,
        0.1,
        lambda v: v["states.2.temperature"],
        lambda: _air_compressor()[1].temperature,
    ),
    (
        "air-compressor",
        "power, kW",
        58.0,
        0.1,
        lambda v: v["equipment.C-1.power"] / 1e3,
        lambda: 0.2e-3 * (_air_compressor()[1].enthalpy - _air_compressor()[0].enthalpy),
    ),
    (
        "air-compressor",
        "entropy generation, W/K (no published value: the recomputed one to its printed digits)",
        21.4,
        0.1,
        lambda v: v["equipment.C-1.entropy_generation"],
        lambda: 0.2 * (_air_compressor()[1].entropy - _air_compressor()[0].entropy),
    ),
    (
        "r134a-cycle",
        "heat taken up, kW",
        7.93,
        0.01,
        lambda v: v["equipment.E-2.heat"] / 1e3,
        lambda: _refrigerator()["cooling"] / 1e3,
    ),
    (
        "r134a-cycle",
        "power, kW",
        2.02,
        0.01,
        lambda v: v["equipment.K-1.power"] / 1e3,
        lambda: _refrigerator()["power"] / 1e3,
    ),
    (
        "r134a-cycle",
        "isentropic efficiency, %",
        93.9,
        0.1,
        lambda v: v["equipment.K-1.isentropic_efficiency"] * 100,
        lambda: _refrigerator()["efficiency"] * 100,
    ),
    (
        "r134a-cycle",
        "coefficient of performance",
        3.93,
        0.01,
        lambda v: v["equipment.E-2.heat"] / v["equipment.K-1.power"],
        lambda: _refrigerator()["performance"],
    ),
    (
        "rankine",
        "thermal efficiency, %",
        26.0,
        0.1,
        lambda v: v["total.thermal_efficiency"] * 100,
        lambda: _rankine()["efficiency"] * 100,
    ),
    (
        "rankine",
        "work lost in the boiler, kJ/kg",
        1110.0,
        1.0,
        lambda v: v["equipment.B-1.lost_work"] / 1e3,
        lambda: _rankine()["boiler"] / 1e3,
    ),
    (
        "rankine",
        "work lost in the condenser, kJ/kg",
        414.0,
        1.0,
        lambda v: v["equipment.C-1.lost_work"] / 1e3,
        lambda: _rankine()["condenser"] / 1e3,
    ),
    (
        "brayton",
        "thermal efficiency, %",
        26.6,
        0.1,
        lambda v: 100 * (v["equipment.T-1.power"] - v["equipment.C-1.power"]) / v["equipment.H-1.heat"],
        lambda: (
            lambda a, b, c, d: 100 * (c.enthalpy - d.enthalpy - b.enthalpy + a.enthalpy) / (c.enthalpy - b.enthalpy)
        )(*_brayton()),
    ),
    (
        "brayton",
        "back-work ratio, %",
        59.2,
        0.1,
        lambda v: 100 * v["equipment.C-1.power"] / v["equipment.T-1.power"],
        lambda: (lambda a, b, c, d: 100 * (b.enthalpy - a.enthalpy) / (c.enthalpy - d.enthalpy))(*_brayton()),
    ),
    (
        "brayton",
        "turbine outlet temperature, K",
        853.0,
        1.0,
        lambda v: v["states.4.temperature"],
        lambda: _brayton()[3].temperature,
    ),
    (
        "wall",
        "entropy generation in the wall, W/K",
        0.191,
        1e-3,
        lambda v: v["equipment.W-1.entropy_generation"],
        lambda: 1035 / 278.15 - 1035 / 293.15,
    ),
    (
        "wall",
        "entropy generation with both air films, W/K",
        0.341,
        1e-3,
        lambda v: v["equipment.W-2.entropy_generation"],
        lambda: 1035 / 273.15 - 1035 / 300.15,
    ),
    (
        "iron-lake",
        "change of entropy of the block, kJ/K",
        -12.65,
        0.01,
        lambda v: v["processes.L-1.entropy_change"] / 1e3,
        lambda: _iron()[0] / 1e3,
    ),
    (
        "iron-lake",
        "entropy taken up by the lake, kJ/K",
        16.97,
        0.01,
        lambda v: -v["processes.L-1.entropy_with_heat"] / 1e3,
        lambda: _iron()[1] / 1e3,
    ),
    (
        "iron-lake",
        "entropy generated, kJ/K",
        4.32,
        0.01,
        lambda v: v["processes.L-1.entropy_generation"] / 1e3,
        lambda: sum(_iron()) / 1e3,
    ),
    (
        "copper-blocks",
        "change of entropy of the hot block, J/K",
        -35.86,
        0.01,
        lambda v: _change(v, "1", "3"),
        lambda: _copper()[0],
    ),
    (
        "copper-blocks",
        "change of entropy of the cold block, J/K",
        38.23,
        0.01,
        lambda v: _change(v, "2", "4"),
        lambda: _copper()[1],
    ),
    (
        "copper-blocks",
        "entropy generated, J/K",
        2.4,
        0.1,
        lambda v: v["total.entropy_generation"],
        lambda: sum(_copper()),
    ),
    (
        "gas-mixing",
        "entropy generated, kJ/K",
        44.0,
        0.1,
        lambda v: v["processes.M-1.entropy_generation"] / 1e3,
        lambda: _mixed_gases() / 1e3,
    ),
    (
        "gas-mixing",
        "work forgone at 25 degC, MJ",
        13.1,
        0.1,
        lambda v: v["processes.M-1.lost_work"] / 1e6,
        lambda: 298.15 * _mixed_gases() / 1e6,
    ),
    (
        "free-expansion",
        "entropy generated, J/K",
        5.76,
        0.01,
        lambda v: v["processes.F-1.entropy_generation"],
        lambda: cantera.gas_constant / 1e3 * math.log(2),
    ),
    (
        "methane-burner",
        "flame temperature, K",
        1789.0,
        1.0,
        lambda v: v["states.3.temperature"],
        lambda: _burner()[0],
    ),
    (
        "methane-burner",
        "entropy generated for each kilomole of methane, kJ/K",
        966.0,
        1.0,
        lambda v: v["equipment.B-1.entropy_generation"],
        lambda: _burner()[1],
    ),
    (
        "methane-burner",
        "work forgone for each kilomole of methane at 298 K, MJ",
        288.0,
        1.0,
        lambda v: v["equipment.B-1.lost_work"] / 1e3,
        lambda: 298.0 * _burner()[1] / 1e3,
    ),
    (
        "stirred-water",
        f"net work, kJ/kg ({MORAN})",
        -2087.6,
        0.1,
        lambda v: v["processes.S-1.work"] / 1e3,
        lambda: (water("U", "T", 373.15, "Q", 0) - water("U", "T", 373.15, "Q", 1)) / 1e3,
    ),
    (
        "stirred-water",
        f"entropy generated, kJ/(kg K) ({MORAN})",
        6.048,
        1e-3,
        lambda v: v["processes.S-1.entropy_generation"] / 1e3,
        lambda: (water("S", "T", 373.15, "Q", 1) - water("S", "T", 373.15, "Q", 0)) / 1e3,
    ),
]


@pytest.mark.parametrize(
    ("example", "quantity", "listed", "digit", "from_file", "recomputed"), ROWS, ids=[f"{r[0]}: {r[1]}" for r in ROWS]
)
def test_worked_example_is_met(
    example: str,
    quantity: str,
    listed: float,
    digit: float,
    from_file: Callable[[Values], float],
    recomputed: Callable[[], float],
) -> None:
    value = from_file(evaluated(example))
    assert abs(value - listed) <= max(digit, 0.005 * abs(listed)), f"{quantity}: {value} against {listed}; {CENGEL}"
    # Cantera's molar mass of air is 1.1e-5 larger: it takes newer atomic weights.
    assert math.isclose(value, recomputed(), rel_tol=1e-5), f"{quantity}: {value} against {recomputed()}"


def examples(*, vessels: bool) -> set[str]:
    """Folders with a calculation that has vessels, which are met in ``test_vessels``, or has none."""
    files = HERE.glob("*/calculation.toml")
    return {path.parent.name for path in files if ("\n[vessels." in path.read_text("utf-8")) == vessels}


def test_every_example_folder_is_used() -> None:
    assert {row[0] for row in ROWS} == examples(vessels=False)

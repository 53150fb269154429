"""Processes of real fluids against scripts written from the balances with an independent property library."""

from __future__ import annotations

from typing import Any

import pytest
from CoolProp.CoolProp import PropsSI
from scipy.integrate import quad
from scipy.optimize import brentq

from reportgen import fluids
from tests.balances.processes.solved import one

WATER, CO2 = fluids.real_fluid("water"), fluids.real_fluid("carbon dioxide")
NAMES = {id(WATER): "Water", id(CO2): "CarbonDioxide"}


def at(fluid: Any, **pair: float) -> dict[str, float]:
    """Properties [SI] of a state by the independent library."""
    key = {"pressure": "P", "temperature": "T", "quality": "Q", "density": "D", "entropy": "S", "energy": "U"}
    given = [part for name, value in pair.items() for part in (key[name], value)]
    outputs = {"T": "temperature", "P": "pressure", "U": "energy", "S": "entropy", "H": "enthalpy", "D": "density"}
    return {name: PropsSI(output, *given, NAMES[id(fluid)]) for output, name in outputs.items()}


def agree(found: dict[str, float], tolerance: float = 1e-6, **expected: float) -> None:
    for name, value in expected.items():
        path = name.replace("__", ".")
        assert found[path] == pytest.approx(value, rel=tolerance), path


def test_steam_cools_in_a_rigid_tank() -> None:
    found = one(
        WATER, "isochoric", {"a.pressure": 15e5, "a.temperature": 573.15, "a.volume": 0.4, "b.temperature": 393.15}
    )
    first = at(WATER, pressure=15e5, temperature=573.15)
    mass = 0.4 * first["density"]
    last = at(WATER, density=first["density"], temperature=393.15)
    heat = mass * (last["energy"] - first["energy"])
    change = mass * (last["entropy"] - first["entropy"])
    agree(found, a__mass=mass, b__pressure=last["pressure"], heat=heat, entropy_change=change)
    agree(found, entropy_generation=change - heat / 288.15)  # leaves at the surroundings, an assumption
    assert 0.0 < found["b.quality"] < 1.0


def test_a_rigid_tank_is_found_from_its_heat() -> None:
    first = at(WATER, pressure=15e5, temperature=573.15)
    mass = 0.4 * first["density"]
    found = one(WATER, "isochoric", {"a.pressure": 15e5, "a.temperature": 573.15, "a.volume": 0.4, "heat": -2.0e6})
    last = at(WATER, density=first["density"], energy=first["energy"] - 2.0e6 / mass)
    agree(found, b__temperature=last["temperature"], b__pressure=last["pressure"])


def test_isothermal_compression_into_the_dome() -> None:
    """From superheated steam to a quality of 0.3 at 150 °C; the work by quadrature of p dv along the isotherm."""
    start = {"a.pressure": 2e5, "a.temperature": 423.15, "a.volume": 1.0}
    found = one(WATER, "isothermal", {**start, "b.quality": 0.3, "boundary_temperature": 423.15})
    first, last = at(WATER, pressure=2e5, temperature=423.15), at(WATER, temperature=423.15, quality=0.3)
    dew = at(WATER, temperature=423.15, quality=1.0)
    mass = first["density"]
    integral, _ = quad(
        lambda v: PropsSI("P", "T", 423.15, "D", 1.0 / v, "Water"),
        1.0 / first["density"],
        1.0 / dew["density"],
        epsabs=1e-4,
    )
    work = mass * (integral + dew["pressure"] * (1.0 / last["density"] - 1.0 / dew["density"]))
    agree(found, work=work, b__pressure=last["pressure"], b__volume=mass / last["density"])
    agree(found, heat=mass * 423.15 * (last["entropy"] - first["entropy"]))
    assert found["entropy_generation"] == pytest.approx(0.0, abs=1e-9 * abs(found["entropy_change"]))


def test_an_isothermal_end_is_found_from_the_work() -> None:
    start = {"a.pressure": 2e5, "a.temperature": 423.15, "a.volume": 1.0}
    done = one(WATER, "isothermal", {**start, "b.pressure": 4e5, "boundary_temperature": 423.15})
    found = one(WATER, "isothermal", {**start, "work": done["work"], "boundary_temperature": 423.15})
    agree(found, b__pressure=4e5, heat=done["heat"])


def polytrope(
    fluid: Any, pressure: float, temperature: float, last: float, index: float
) -> tuple[float, float, dict[str, float]]:
    """Work and heat per mass by quadrature of p dv, and the state in the end."""
    first = at(fluid, pressure=pressure, temperature=temperature)
    v1 = 1.0 / first["density"]
    v2 = v1 * (pressure / last) ** (1.0 / index)
    work, _ = quad(lambda v: pressure * (v1 / v) ** index, v1, v2, epsrel=1e-12)
    end = at(fluid, pressure=last, density=1.0 / v2)
    return work, end["energy"] - first["energy"] + work, end


@pytest.mark.parametrize(
    ("fluid", "pressure", "temperature", "last", "index"),
    [
        (WATER, 5e5, 473.15, 1e5, 1.3),  # ends wet
        (WATER, 5e5, 473.15, 2e5, 1.0),
        (CO2, 20e5, 300.0, 55e5, 1.2),
        (CO2, 60e5, 320.0, 10e5, 1.35),  # ends wet
    ],
)
def test_polytropic_of_a_real_fluid(fluid: Any, pressure: float, temperature: float, last: float, index: float) -> None:
    work, heat, end = polytrope(fluid, pressure, temperature, last, index)
    givens = {"a.pressure": pressure, "a.temperature": temperature, "a.mass": 2.0, "b.pressure": last}
    found = one(fluid, "polytropic", {**givens, "polytropic_index": index, "boundary_temperature": 400.0})
    agree(found, work=2.0 * work, heat=2.0 * heat, b__temperature=end["temperature"])
    first = at(fluid, pressure=pressure, temperature=temperature)
    change = 2.0 * (end["entropy"] - first["entropy"])
    agree(found, entropy_change=change)
    assert found["entropy_generation"] == pytest.approx(change - 2.0 * heat / 400.0, rel=1e-6, abs=1e-3)


def test_isentropic_expansion_to_a_volume() -> None:
    first = at(WATER, pressure=20e5, temperature=573.15)
    found = one(WATER, "isentropic", {"a.pressure": 20e5, "a.temperature": 573.15, "a.mass": 1.0, "b.volume": 0.8})
    last = at(WATER, density=1.25, entropy=first["entropy"])
    agree(found, b__temperature=last["temperature"], work=first["energy"] - last["energy"])


def test_expansion_against_the_atmosphere() -> None:
    """m (u − u_a) = −p0 (v − v_a) at p0, in other words h = u_a + p0 v_a."""
    first = at(WATER, pressure=20e5, temperature=573.15)
    goal = first["energy"] + 1e5 / first["density"]
    temperature = brentq(lambda t: PropsSI("H", "P", 1e5, "T", t, "Water") - goal, 380.0, 700.0, xtol=1e-12)
    found = one(WATER, "constant-external-pressure", {"a.pressure": 20e5, "a.temperature": 573.15, "a.mass": 3.0})
    last = at(WATER, pressure=1e5, temperature=temperature)
    agree(found, b__temperature=temperature, work=3e5 * (1.0 / last["density"] - 1.0 / first["density"]))
    agree(found, entropy_generation=3.0 * (last["entropy"] - first["entropy"]))


def test_free_expansion_of_carbon_dioxide_cools() -> None:
    first = at(CO2, pressure=50e5, temperature=320.0)
    found = one(CO2, "free-expansion", {"a.pressure": 50e5, "a.temperature": 320.0, "a.volume": 0.1, "b.volume": 0.4})
    last = at(CO2, density=first["density"] / 4.0, energy=first["energy"])
    agree(found, b__temperature=last["temperature"], b__pressure=last["pressure"])
    assert found["b.temperature"] < 320.0 - 10.0
    agree(found, entropy_generation=0.1 * first["density"] * (last["entropy"] - first["entropy"]))


def test_stirring_wets_or_dries_at_constant_pressure() -> None:
    found = one(WATER, "stirring", {"a.pressure": 2e5, "a.quality": 0.2, "a.mass": 1.5, "stirring_work": 1.2e6})
    first = at(WATER, pressure=2e5, quality=0.2)
    last_enthalpy = first["enthalpy"] + 1.2e6 / 1.5
    quality = PropsSI("Q", "P", 2e5, "H", last_enthalpy, "Water")
    agree(found, b__quality=quality)


def test_every_column_of_the_sample_axis_is_solved() -> None:
    """Three columns at once give what three single solutions give, two phases in some and one in others."""
    from tests.balances.processes.solved import process, solution

    qualities = [0.2, 0.6, 0.95]
    givens = {"states.a.pressure": 3e5, "states.a.quality": qualities, "states.a.mass": [1.0, 2.0, 3.0]}
    solved = solution(
        {"w": WATER}, {"a": "w", "b": "w"}, {"P": process("isochoric", "a", "b")}, {**givens, "processes.P.heat": 5e5}
    )
    for column, (quality, mass) in enumerate(zip(qualities, (1.0, 2.0, 3.0), strict=True)):
        alone = one(WATER, "isochoric", {"a.pressure": 3e5, "a.quality": quality, "a.mass": mass, "heat": 5e5})
        for path in ("states.b.temperature", "processes.P.entropy_generation", "processes.P.entropy_change"):
            both = solved.values[path][column], alone[path]
            assert both[0] == pytest.approx(both[1], rel=1e-9, nan_ok=True), path

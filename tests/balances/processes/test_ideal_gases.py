"""Processes of an ideal gas of constant heat capacity against their closed forms.

Air with k = c_p/c_v: p V = m R T, dU = m c_v dT, S = m (c_p ln T − R ln p). State a is 2 m³ at 3 bar and 400 K.
"""

from __future__ import annotations

import math

import pytest

from reportgen import fluids
from tests.balances.processes.solved import one

CP = 1005.0
AIR = fluids.ideal_gas("air", heat_capacity=CP)
R = AIR.gas_constant
CV = CP - R
K = CP / CV
P1, T1, V1 = 3.0e5, 400.0, 2.0
MASS = P1 * V1 / (R * T1)
START = {"a.pressure": P1, "a.temperature": T1, "a.volume": V1}
T0 = 288.15


def entropy(temperature: float, pressure: float) -> float:
    """S − S_a [J/K]."""
    return MASS * (CP * math.log(temperature / T1) - R * math.log(pressure / P1))


def agree(found: dict[str, float], **expected: float) -> None:
    for name, value in expected.items():
        path = name.replace("__", ".")
        assert found[path] == pytest.approx(value, rel=1e-10, abs=1e-9 * MASS * CP), path


@pytest.mark.parametrize("given", [{"b.volume": 5.0}, {"b.pressure": P1 * V1 / 5.0}, {"work": P1 * V1 * math.log(2.5)}])
def test_isothermal(given: dict[str, float]) -> None:
    found = one(AIR, "isothermal", {**START, **given, "boundary_temperature": 450.0})
    work = P1 * V1 * math.log(5.0 / V1)
    change = MASS * R * math.log(5.0 / V1)
    agree(found, work=work, heat=work, entropy_change=change, entropy_generation=change - work / 450.0)
    agree(found, b__volume=5.0, b__temperature=T1, lost_work=T0 * (change - work / 450.0))


@pytest.mark.parametrize(
    "given", [{"b.temperature": 600.0}, {"b.volume": 3.0}, {"heat": MASS * CP * 200.0}, {"work": P1 * 1.0}]
)
def test_isobaric(given: dict[str, float]) -> None:
    found = one(AIR, "isobaric", {**START, **given, "boundary_temperature": 700.0})
    heat = MASS * CP * 200.0
    agree(found, work=P1 * 1.0, heat=heat, b__temperature=600.0, b__pressure=P1)
    agree(found, entropy_change=entropy(600.0, P1), entropy_generation=entropy(600.0, P1) - heat / 700.0)


@pytest.mark.parametrize("given", [{"b.temperature": 500.0}, {"b.pressure": 3.75e5}, {"heat": MASS * CV * 100.0}])
def test_isochoric(given: dict[str, float]) -> None:
    found = one(AIR, "isochoric", {**START, **given, "boundary_temperature": 500.0})
    heat = MASS * CV * 100.0
    agree(found, work=0.0, heat=heat, b__pressure=3.75e5, b__volume=V1)
    agree(found, entropy_generation=MASS * CV * math.log(500.0 / T1) - heat / 500.0)


@pytest.mark.parametrize("given", [{"b.pressure": 1.0e5}, {"b.temperature": "T"}, {"b.volume": "V"}, {"work": "W"}])
def test_isentropic(given: dict[str, float | str]) -> None:
    end = T1 * (1.0 / 3.0) ** ((K - 1.0) / K)
    known = {"T": end, "V": MASS * R * end / 1.0e5, "W": MASS * CV * (T1 - end)}
    found = one(AIR, "isentropic", {**START, **{path: known.get(str(value), value) for path, value in given.items()}})
    agree(found, heat=0.0, work=known["W"], b__temperature=end, b__volume=known["V"])
    agree(found, entropy_change=0.0, entropy_generation=0.0, lost_work=0.0)


@pytest.mark.parametrize("index", [0.5, 1.0, 1.25, K, 1.6])
def test_polytropic(index: float) -> None:
    found = one(
        AIR, "polytropic", {**START, "polytropic_index": index, "b.pressure": 2.0e5, "boundary_temperature": 500.0}
    )
    volume = V1 * 1.5 ** (1.0 / index)
    temperature = 2.0e5 * volume / (MASS * R)
    work = P1 * V1 * math.log(volume / V1) if index == 1.0 else (2.0e5 * volume - P1 * V1) / (1.0 - index)
    heat = MASS * CV * (temperature - T1) + work
    agree(found, work=work, heat=heat, b__volume=volume, b__temperature=temperature)
    agree(found, entropy_change=entropy(temperature, 2.0e5))
    agree(found, entropy_generation=entropy(temperature, 2.0e5) - heat / 500.0)


@pytest.mark.parametrize("given", [{"b.volume": 3.0}, {"b.temperature": "T"}, {"work": "W"}, {"heat": "Q"}])
def test_polytropic_in_other_directions(given: dict[str, float | str]) -> None:
    temperature = T1 * (V1 / 3.0) ** 0.2
    work = MASS * R * (temperature - T1) / (1.0 - 1.2)
    known = {"T": temperature, "W": work, "Q": work + MASS * CV * (temperature - T1)}
    ends = {path: known.get(str(value), value) for path, value in given.items()}
    found = one(AIR, "polytropic", {**START, "polytropic_index": 1.2, **ends})
    agree(found, b__volume=3.0, b__temperature=temperature, work=work, heat=known["Q"])


def test_the_exponent_of_two_measured_states() -> None:
    found = one(AIR, "polytropic", {**START, "b.pressure": 9.0e5, "b.temperature": 520.0})
    assert found["polytropic_index"] == pytest.approx(math.log(3.0) / math.log(3.0 * T1 / 520.0), rel=1e-12)


def test_free_expansion_keeps_the_temperature() -> None:
    found = one(AIR, "free-expansion", {**START, "b.volume": 6.0})
    agree(found, heat=0.0, work=0.0, b__temperature=T1, entropy_generation=MASS * R * math.log(3.0))


def test_free_expansion_whose_end_was_measured_has_taken_up_heat() -> None:
    found = one(
        AIR, "free-expansion", {**START, "b.volume": 6.0, "b.temperature": 410.0, "boundary_temperature": 420.0}
    )
    agree(found, heat=MASS * CV * 10.0, work=0.0)


def test_constant_external_pressure_adiabatic() -> None:
    """The atmosphere stands against the piston: m c_v (T − T_a) = −p0 (V − V_a) with p0 V = m R T."""
    found = one(AIR, "constant-external-pressure", START)
    temperature = (MASS * CV * T1 + 1.0e5 * V1) / (MASS * CP)
    agree(found, heat=0.0, b__pressure=1.0e5, b__temperature=temperature, external_pressure=1.0e5)
    agree(found, work=MASS * CV * (T1 - temperature), entropy_generation=entropy(temperature, 1.0e5))


def test_constant_external_pressure_to_thermal_equilibrium() -> None:
    found = one(
        AIR,
        "constant-external-pressure",
        {**START, "external_pressure": 2.0e5, "b.temperature": T1, "boundary_temperature": T1},
    )
    agree(found, work=2.0e5 * 1.0, heat=2.0e5, b__volume=3.0)
    agree(found, entropy_generation=MASS * R * math.log(1.5) - 2.0e5 / T1)


def test_a_piston_at_a_stop_ends_above_the_external_pressure() -> None:
    found = one(AIR, "constant-external-pressure", {**START, "external_pressure": 2.0e5, "b.volume": 2.5})
    temperature = T1 - 2.0e5 * 0.5 / (MASS * CV)
    agree(found, work=1.0e5, b__temperature=temperature, b__pressure=MASS * R * temperature / 2.5)


@pytest.mark.parametrize("given", [{"stirring_work": 5.0e4}, {"b.temperature": T1 + 5.0e4 / (MASS * CV)}])
def test_stirring_in_a_rigid_vessel(given: dict[str, float]) -> None:
    found = one(AIR, "stirring", {**START, **given}, constant="volume")
    agree(found, work=-5.0e4, heat=0.0, stirring_work=5.0e4, b__temperature=T1 + 5.0e4 / (MASS * CV))
    agree(found, entropy_generation=MASS * CV * math.log(found["b.temperature"] / T1))


def test_stirring_under_a_piston_that_loses_heat() -> None:
    found = one(AIR, "stirring", {**START, "stirring_work": 5.0e4, "heat": -1.0e4, "boundary_temperature": 300.0})
    temperature = T1 + 4.0e4 / (MASS * CP)
    moved = P1 * (MASS * R * temperature / P1 - V1)
    agree(found, b__temperature=temperature, work=moved - 5.0e4)
    agree(found, entropy_generation=entropy(temperature, P1) + 1.0e4 / 300.0)


def test_heat_over_two_boundaries() -> None:
    """Heated from 900 K and losing some at 300 K: the heat is the sum, each part carries its own entropy."""
    found = one(
        AIR,
        "isochoric",
        {
            **START,
            "b.temperature": 500.0,
            "heat_ports.1.temperature": 900.0,
            "heat_ports.2.heat": -2.0e4,
            "heat_ports.2.temperature": 300.0,
        },
        heat_ports=2,
    )
    heat = MASS * CV * 100.0
    agree(found, heat=heat, entropy_with_heat=(heat + 2.0e4) / 900.0 - 2.0e4 / 300.0)
    assert found["processes.P.heat_ports.1.heat"] == pytest.approx(heat + 2.0e4, rel=1e-12)

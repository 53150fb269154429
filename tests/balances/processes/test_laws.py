"""Laws that hold whatever the fluid and the numbers: the second law, additivity, path independence, T = (∂u/∂s)_v."""

from __future__ import annotations

from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen import fluids
from tests.balances.processes.solved import base, one, process, solution

N2, CO2, AR = (fluids.ideal_gas(name) for name in ("N2", "CO2", "Ar"))
WATER = fluids.real_fluid("water")
PRESSURES = st.floats(0.2e5, 40e5)
TEMPERATURES = st.floats(250.0, 900.0)
VOLUMES = st.floats(0.05, 5.0)


def part(state: str, pressure: float, temperature: float, volume: float) -> dict[str, float]:
    return {
        f"states.{state}.pressure": pressure,
        f"states.{state}.temperature": temperature,
        f"states.{state}.volume": volume,
    }


@settings(max_examples=25, deadline=None)
@given(first=st.tuples(PRESSURES, TEMPERATURES, VOLUMES), second=st.tuples(PRESSURES, TEMPERATURES, VOLUMES))
def test_an_isolated_change_never_destroys_entropy(first: Any, second: Any) -> None:
    """Gases let together generate what the mixing alone does, and more where pressures or temperatures differ."""
    amounts = [p * v / (8.31446261815324 * t) for p, t, v in (first, second)]
    share = amounts[0] / sum(amounts)
    mixture = fluids.ideal_gas({"N2": share, "CO2": 1.0 - share})
    found = base(
        solution(
            {"n": N2, "c": CO2, "m": mixture},
            {"a": "n", "b": "c", "d": "m"},
            {"P": process("partition-removal", ("a", "b"), "d")},
            part("a", *first) | part("b", *second),
        )
    )
    generated = found["processes.P.entropy_generation"]
    assert generated > 0.0
    assert generated >= found["processes.P.entropy_of_mixing"] * (1.0 - 1e-9)


@settings(max_examples=20, deadline=None)
@given(temperatures=st.tuples(st.floats(280.0, 600.0), st.floats(280.0, 340.0)), masses=st.tuples(VOLUMES, VOLUMES))
def test_heat_between_bodies_generates_entropy(temperatures: tuple[float, float], masses: tuple[float, float]) -> None:
    steel = fluids.incompressible("steel", density=7850.0, specific_heat=480.0, phase="solid", limits=(200.0, 1200.0))
    found = base(
        solution(
            {"s": steel, "w": WATER},
            {"a": "s", "b": "w", "c": "s", "d": "w"},
            {"P": process("thermal-contact", ("a", "b"), ("c", "d"))},
            {
                "states.a.mass": masses[0],
                "states.a.temperature": temperatures[0],
                "states.b.mass": masses[1],
                "states.b.temperature": temperatures[1],
                "states.b.pressure": 5e5,
            },
        )
    )
    assert found["processes.P.entropy_generation"] >= -1e-9 * abs(found["states.b.entropy"])
    low, high = sorted(temperatures)
    assert low - 1e-6 <= found["states.c.temperature"] <= high + 1e-6


@pytest.mark.parametrize("fluid", [N2, WATER], ids=["ideal", "real"])
def test_two_ways_between_two_states_have_one_change_of_entropy(fluid: Any) -> None:
    """Isobaric then isochoric, isothermal then isentropic: heat and work differ, ΔS and ΔU do not."""
    start = {"states.1.pressure": 4e5, "states.1.temperature": 480.0, "states.1.mass": 2.0}
    states = dict.fromkeys("123", "f")
    one_way = base(
        solution(
            {"f": fluid},
            states,
            {"A": process("isobaric", "1", "2"), "B": process("isochoric", "2", "3")},
            {**start, "states.2.temperature": 650.0, "states.3.temperature": 560.0},
        )
    )
    end = {"states.3.pressure": one_way["states.3.pressure"], "states.3.temperature": 560.0}
    other = base(
        solution(
            {"f": fluid},
            states,
            {"A": process("isothermal", "1", "2"), "B": process("isentropic", "2", "3")},
            {**start, **end},
        )
    )
    assert other["total.entropy_change"] == pytest.approx(one_way["total.entropy_change"], rel=1e-9)
    stored = [found["total.heat"] - found["total.work"] for found in (one_way, other)]
    assert stored[0] == pytest.approx(stored[1], rel=1e-9)
    assert abs(one_way["total.heat"] - other["total.heat"]) > 1e-3 * abs(one_way["total.heat"])


@pytest.mark.parametrize("fluid", [N2, AR, WATER, fluids.real_fluid("R134a")], ids=["N2", "Ar", "water", "R134a"])
def test_temperature_is_the_slope_of_energy_over_entropy_at_constant_volume(fluid: Any) -> None:
    given_state = {"a.pressure": 3e5, "a.temperature": 400.0, "a.volume": 1.0}
    slopes = []
    for heat in (-50.0, 50.0):
        found = one(fluid, "isochoric", {**given_state, "heat": heat, "boundary_temperature": 400.0})
        slopes.append((heat, found["entropy_change"]))
    slope = (slopes[1][0] - slopes[0][0]) / (slopes[1][1] - slopes[0][1])
    assert slope == pytest.approx(400.0, rel=1e-6)


def test_twice_the_system_twice_every_amount() -> None:
    single = one(WATER, "isochoric", {"a.pressure": 3e5, "a.quality": 0.4, "a.mass": 1.0, "heat": 2e5})
    double = one(WATER, "isochoric", {"a.pressure": 3e5, "a.quality": 0.4, "a.mass": 2.0, "heat": 4e5})
    for name in ("entropy_change", "a.volume", "b.volume"):
        assert double[name] == pytest.approx(2.0 * single[name], rel=1e-9)
    assert double["b.temperature"] == pytest.approx(single["b.temperature"], rel=1e-12)


def test_the_work_of_a_cubic_fluid_is_that_of_its_own_equation() -> None:
    """Propane by Peng and Robinson along an isotherm: ∫ p dv of the equation written out here."""
    import numpy as np
    from scipy.integrate import quad

    critical = {"temperature": 369.89, "pressure": 42.512e5, "acentric_factor": 0.1521}
    fluid = fluids.cubic("propane", equation="Peng-Robinson", critical={"propane": critical})
    gas_constant, temperature = 8.31446261815324, 400.0
    slope = 0.37464 + 1.54226 * 0.1521 - 0.26992 * 0.1521**2
    alpha = (1.0 + slope * (1.0 - np.sqrt(temperature / 369.89))) ** 2
    attraction = 0.45724 * gas_constant**2 * 369.89**2 / 42.512e5 * alpha
    covolume = 0.07780 * gas_constant * 369.89 / 42.512e5

    def pressure(v: float) -> float:
        return float(
            gas_constant * temperature / (v - covolume) - attraction / (v**2 + 2.0 * covolume * v - covolume**2)
        )

    found = one(
        fluid,
        "isothermal",
        {"a.pressure": 5e5, "a.temperature": 400.0, "a.volume": 1.0, "b.pressure": 25e5, "boundary_temperature": 400.0},
    )
    amount = found["a.mass"] / fluid.molar_mass
    ends = [found[f"{state}.volume"] / amount for state in "ab"]
    # Ω_a and Ω_b are often cut to five digits, as here: 1e-4 of the work.
    assert found["work"] == pytest.approx(amount * quad(pressure, *ends)[0], rel=1e-4)
    assert found["entropy_generation"] == pytest.approx(0.0, abs=1e-6 * abs(found["entropy_change"]))

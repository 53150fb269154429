"""Vessels against scripts written from the balances with an independent library, closed forms, and themselves."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI

from reportgen import fluids
from reportgen.balances import EquipmentDefinition, Plant, Solution, solve
from reportgen.errors import InputError, SolutionError
from tests.balances.vessels import independent

ROOM = {"surroundings.temperature": 288.15, "surroundings.pressure": 101325.0}


def followed(fluid: Any, kind: str, states: dict[str, dict[str, Any]], given: dict[str, Any], **more: Any) -> Solution:
    """One vessel V of one fluid; ``states`` by port."""
    ports = {port: (port,) for port in states}
    vessels = {"V": EquipmentDefinition(kind, ports, more)}
    givens: dict[str, Any] = dict(ROOM)
    givens |= {f"states.{state}.{name}": value for state, pair in states.items() for name, value in pair.items()}
    givens |= {f"vessels.V.{name}": value for name, value in given.items()}
    return solve(Plant({"f": fluid}, dict.fromkeys(states, "f"), vessels=vessels), givens)


def value(solution: Solution, name: str, column: int = 0) -> float:
    return float(solution.values[f"vessels.V.{name}"][column])


# --- closed forms -------------------------------------------------------------------------------------------------


def test_ideal_gas_leaves_along_its_isentrope() -> None:
    gas = fluids.ideal_gas("N2", heat_capacity=1039.0)
    ratio = 1039.0 / (1039.0 - gas.gas_constant)
    found = followed(
        gas, "discharge", {"initial": {"pressure": 1e6, "temperature": 300.0}}, {"volume": 2.0, "final_pressure": 1e5}
    )
    assert value(found, "final_temperature") == pytest.approx(300.0 * 0.1 ** ((ratio - 1) / ratio), rel=1e-9)
    assert value(found, "final_mass") == pytest.approx(value(found, "initial_mass") * 0.1 ** (1 / ratio), rel=1e-8)
    # The valve lies outside, the content changes reversibly: nothing is generated.
    assert value(found, "entropy_generation") == pytest.approx(0.0, abs=1e-6 * abs(value(found, "entropy_change")))


def test_ideal_gas_that_fills_a_vacuum_ends_at_k_times_its_temperature() -> None:
    gas = fluids.ideal_gas("N2", heat_capacity=1039.0)
    ratio = 1039.0 / (1039.0 - gas.gas_constant)
    found = followed(gas, "charging", {"supply": {"pressure": 8e5, "temperature": 290.0}}, {"volume": 0.5})
    assert value(found, "final_temperature") == pytest.approx(ratio * 290.0, rel=1e-9)
    mass = 8e5 * 0.5 / (gas.gas_constant * ratio * 290.0)
    assert value(found, "mass_transferred") == pytest.approx(mass, rel=1e-9)
    assert value(found, "entropy_generation") == pytest.approx(mass * 1039.0 * math.log(ratio), rel=1e-8)
    assert value(found, "closure") == pytest.approx(0.0, abs=1e-7 * value(found, "entropy_generation"))


def test_choked_ideal_gas_empties_in_the_time_of_the_closed_form() -> None:
    """t = 2 V/(A w0 (k−1)) ((k+1)/2)^((k+1)/(2(k−1))) [(p1/p2)^((k−1)/2k) − 1] while the throat is choked."""
    gas = fluids.ideal_gas("N2", heat_capacity=1039.0)
    k = 1039.0 / (1039.0 - gas.gas_constant)
    found = followed(
        gas,
        "discharge",
        {"initial": {"pressure": 2e6, "temperature": 300.0}},
        {"volume": 1.0, "final_pressure": 4e5, "back_pressure": 1e5, "orifice.diameter": 0.01},
    )
    speed, area = math.sqrt(k * gas.gas_constant * 300.0), math.pi / 4 * 1e-4
    factor = ((k + 1) / 2) ** ((k + 1) / (2 * (k - 1)))
    time = 2.0 / (area * speed * (k - 1)) * factor * (5.0 ** ((k - 1) / (2 * k)) - 1.0)
    assert value(found, "duration") == pytest.approx(time, rel=1e-7)
    assert value(found, "maximum_mass_flow") == pytest.approx(
        area * 2e6 / math.sqrt(gas.gas_constant * 300.0) * math.sqrt(k) / factor, rel=1e-3
    )


def test_metal_of_great_mass_keeps_the_content_at_its_temperature() -> None:
    gas = fluids.ideal_gas("N2", heat_capacity=1039.0)
    wall = {"wall.mass": 1e9, "wall.specific_heat": 500.0}
    found = followed(
        gas,
        "discharge",
        {"initial": {"pressure": 1e6, "temperature": 300.0}},
        {"volume": 1.0, "final_pressure": 1e5, **wall},
    )
    assert value(found, "final_temperature") == pytest.approx(300.0, abs=1e-5)
    assert value(found, "heat") == pytest.approx(9e5, rel=1e-4)  # (p1 − p2) V, isothermal


# --- against scripts of their own -----------------------------------------------------------------------------------


def test_nitrogen_into_the_two_phase_region() -> None:
    found = followed(
        fluids.real_fluid("nitrogen"),
        "discharge",
        {"initial": {"pressure": 200e5, "temperature": 300.0}},
        {"volume": 1.0, "back_pressure": 1e5, "final_pressure": 1.1e5},
    )
    script = independent.discharge("Nitrogen", 1.0, 200e5, 300.0, 1.1e5)
    assert 0.5 < value(found, "final_quality") < 0.99
    assert value(found, "final_temperature") == pytest.approx(script.temperature, rel=1e-6)
    assert value(found, "final_mass") == pytest.approx(script.mass, rel=1e-6)
    assert value(found, "mass_transferred") == pytest.approx(script.along, rel=1e-6)
    assert value(found, "final_entropy") == pytest.approx(script.entropy, rel=1e-6)
    history = found.vessel_paths["V"].history
    for mass, temperature in zip(history.mass[::8], history.temperature[::8], strict=True):
        y = script.solution(history.mass[0] - mass)
        assert temperature == pytest.approx(PropsSI("T", "D", y[0], "U", y[1] / y[0], "Nitrogen"), rel=1e-6)
    assert value(found, "closure") == pytest.approx(0.0, abs=1e-8 * value(found, "entropy_generation"))
    assert max(found.vessel_paths["V"].relative_errors()) < 1e-7


@pytest.mark.parametrize("metal", [None, (200e3, 150.0)])
def test_discharge_through_an_orifice_with_metal(metal: tuple[float, float] | None) -> None:
    """Carbon dioxide, dense at first, through the two-phase region; the metal gives heat to it."""
    area = 0.8 * math.pi / 4 * 0.01**2
    given = {"volume": 0.5, "back_pressure": 6e5, "final_pressure": 14e5}
    given |= {"orifice.diameter": 0.01, "orifice.discharge_coefficient": 0.8}
    if metal is not None:
        given |= {"wall.mass": 400.0, "wall.specific_heat": 500.0, "wall.area": 3.0, "wall.heat_transfer": 50.0}
    state = {"initial": {"pressure": 60e5, "temperature": 305.0}}
    found = followed(fluids.real_fluid("carbon dioxide"), "discharge", state, given)
    script = independent.discharge("CO2", 0.5, 60e5, 305.0, 14e5, area=area, back=6e5, metal=metal)
    assert value(found, "final_temperature") == pytest.approx(script.temperature, rel=1e-6)
    assert value(found, "final_mass") == pytest.approx(script.mass, rel=1e-6)
    assert value(found, "duration") == pytest.approx(script.along, rel=1e-5)
    history = found.vessel_paths["V"].history
    for time, mass in zip(history.time[::6], history.mass[::6], strict=True):
        assert script.solution(time)[0] == pytest.approx(mass, rel=1e-4)
    if metal is not None:
        assert value(found, "final_wall_temperature") == pytest.approx(script.metal, rel=1e-6)
        assert value(found, "minimum_wall_temperature") == pytest.approx(script.metal, rel=1e-6)
        assert value(found, "wall_entropy_generation") > 0.0
        energy = 200e3 * (305.0 - value(found, "final_wall_temperature"))
        assert value(found, "heat") == pytest.approx(energy, rel=1e-6)
    assert value(found, "closure") == pytest.approx(0.0, abs=1e-6 * value(found, "entropy_generation"))


def test_charging_of_hydrogen() -> None:
    """From a line of constant state through an orifice, choked at first, to nearly the pressure of the line."""
    area = math.pi / 4 * 0.002**2
    states = {
        "initial": {"pressure": 20e5, "temperature": 288.15},
        "supply": {"pressure": 500e5, "temperature": 288.15},
    }
    given = {"volume": 0.1, "final_pressure": 450e5, "orifice.diameter": 0.002}
    found = followed(fluids.real_fluid("hydrogen"), "charging", states, given)
    script = independent.charging("Hydrogen", 0.1, (20e5, 288.15), (500e5, 288.15), 450e5, area)
    assert value(found, "final_temperature") == pytest.approx(script.temperature, rel=1e-6)
    assert value(found, "maximum_temperature") == pytest.approx(script.temperature, rel=1e-6)
    assert value(found, "final_mass") == pytest.approx(script.mass, rel=1e-6)
    assert value(found, "duration") == pytest.approx(script.along, rel=1e-5)
    history = found.vessel_paths["V"].history
    for time, mass in zip(history.time[::4], history.mass[::4], strict=True):
        assert script.solution(time)[0] == pytest.approx(mass, rel=1e-4)


# --- balances and limits -------------------------------------------------------------------------------------------


def test_two_vessels_come_to_balance() -> None:
    gas = fluids.real_fluid("nitrogen")
    states = {"initial": {"pressure": 1e5, "temperature": 290.0}, "supply": {"pressure": 50e5, "temperature": 310.0}}
    found = followed(gas, "charging", states, {"volume": 1.0, "supply_volume": 2.0})
    assert value(found, "supply_final_pressure") == pytest.approx(value(found, "final_pressure"), rel=1e-8)
    ends = [
        gas.at(pressure=value(found, f"{name}_pressure"), temperature=value(found, f"{name}_temperature"))
        for name in ("final", "supply_final")
    ]
    begins = [gas.at(**states[port]) for port in ("initial", "supply")]
    for name in ("density", "internal energy"):
        before, after = (
            sum(
                volume * state.density * (1.0 if name == "density" else state.specific_internal_energy)
                for volume, state in zip((1.0, 2.0), several, strict=True)
            )
            for several in (begins, ends)
        )
        assert after == pytest.approx(before, rel=1e-9), name
    change = sum(
        volume * (end.density * end.specific_entropy - begin.density * begin.specific_entropy)
        for volume, begin, end in zip((1.0, 2.0), begins, ends, strict=True)
    )
    assert value(found, "entropy_generation") == pytest.approx(change, rel=1e-7)
    assert value(found, "closure") == pytest.approx(0.0, abs=1e-6 * change)
    # What stays in the supply has expanded reversibly.
    assert ends[1].specific_entropy == pytest.approx(begins[1].specific_entropy, abs=1e-5)


@pytest.mark.parametrize("outlet", ["vapour", "liquid"])
def test_phases_leave_apart_without_generating_in_the_content(outlet: str) -> None:
    """Liquid and vapour in equilibrium have one Gibbs energy: what leaves as one of them generates nothing inside."""
    found = followed(
        fluids.real_fluid("propane"),
        "discharge",
        {"initial": {"temperature": 300.0, "quality": 0.3}},
        {"volume": 1.0, "back_pressure": 1.5e5, "final_pressure": 3e5},
        outlet=outlet,
    )
    assert value(found, "vessel_entropy_generation") == 0.0
    assert value(found, "closure") == pytest.approx(0.0, abs=1e-7 * value(found, "entropy_generation"))
    assert value(found, "energy_imbalance") == pytest.approx(0.0, abs=1e-8 * abs(value(found, "enthalpy_with_mass")))
    if outlet == "liquid":  # the liquid goes first; then the vapour leaves as it is, and condenses a little
        assert 0.95 < value(found, "final_quality") < 1.0


def test_carbon_dioxide_is_not_followed_below_its_triple_point() -> None:
    found = followed(
        fluids.real_fluid("carbon dioxide"),
        "discharge",
        {"initial": {"pressure": 60e5, "temperature": 288.15}},
        {"volume": 1.0, "final_pressure": 2e5},
    )
    for name in ("final_temperature", "final_mass", "minimum_temperature", "entropy_generation", "lost_work"):
        assert math.isnan(value(found, name)), name
        assert "triple point" in found.reasons[f"vessels.V.{name}"]
    assert value(found, "followed_temperature") == pytest.approx(216.592, abs=0.01)
    assert value(found, "followed_pressure") == pytest.approx(5.18e5, rel=1e-3)
    assert found.vessel_paths["V"].history.temperature[-1] == pytest.approx(216.592, abs=0.01)
    assert any("triple point" in fault.message for fault in found.warnings)
    assert "vessels.V" not in found.accounts


def test_columns_are_followed_as_if_alone() -> None:
    """Each with its own steps, its own place of condensation, its own end; one that cannot flow has no result."""
    fluid = fluids.real_fluid("nitrogen")
    pressures, finals = np.array([200e5, 180e5, 40e5, 1e5]), np.array([1.1e5, 2e5, 30e5, 1.1e5])
    given = {"volume": 1.0, "orifice.diameter": 0.01, "back_pressure": 0.9e5}
    together = followed(
        fluid,
        "discharge",
        {"initial": {"pressure": pressures, "temperature": 300.0}},
        {**given, "final_pressure": finals},
    )
    names = ("final_temperature", "final_mass", "duration", "minimum_temperature", "valve_entropy_generation")
    for column in range(3):
        state = {"initial": {"pressure": pressures[column], "temperature": 300.0}}
        alone = followed(fluid, "discharge", state, {**given, "final_pressure": finals[column]})
        for name in names:
            assert value(together, name, column) == pytest.approx(value(alone, name), rel=2e-8), (name, column)
    assert all(math.isnan(value(together, name, 3)) for name in names)


@pytest.mark.parametrize(
    ("given", "text"),
    [
        ({"final_pressure": 2e6}, "not below that of the content"),
        ({"final_pressure": 1e5, "back_pressure": 2e5}, "below the back pressure"),
        ({"final_pressure": 1e5, "volume": -1.0}, "not positive"),
    ],
)
def test_pressures_that_cannot_be_meant(given: dict[str, float], text: str) -> None:
    state = {"initial": {"pressure": 1e6, "temperature": 300.0}}
    with pytest.raises(SolutionError, match=text):
        followed(fluids.ideal_gas("N2"), "discharge", state, {"volume": 1.0, **given})


def test_what_is_missing_is_named() -> None:
    state = {"initial": {"pressure": 1e6, "temperature": 300.0}}
    with pytest.raises(InputError) as caught:
        followed(fluids.ideal_gas("N2"), "discharge", state, {"wall.heat_transfer": 10.0}, outlet="vapour")
    told = str(caught.value)
    for words in ('"volume" is missing', "where the discharge ends", "how much time", "area", "no two phases"):
        assert words in told


def test_mixtures_by_a_cubic_equation_are_refused() -> None:
    mixture = fluids.cubic({"CO2": 0.5, "N2": 0.5}, equation="Peng-Robinson")
    state = {"initial": {"pressure": 1e6, "temperature": 300.0}}
    with pytest.raises(InputError, match="phases differ in composition"):
        followed(mixture, "discharge", state, {"volume": 1.0, "final_pressure": 1e5})

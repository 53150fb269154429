"""States of cubic fluids from every pair, and what is refused."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from reportgen import fluids
from reportgen.errors import InputError, RangeError
from reportgen.fluids.cubics.fluid import CubicFluid
from reportgen.fluids.pairs import SeveralStates
from reportgen.fluids.state import FIELDS

FLUIDS: dict[str, tuple[Any, dict[str, Any]]] = {
    "propane, translated": ("propane", {"volume_translation": "Peneloux"}),
    "water": ("water", {"equation": "Soave-Redlich-Kwong"}),
    "natural gas": (
        {"CH4": 0.70, "C2H6": 0.12, "C3H8": 0.08, "N2": 0.04, "CO2": 0.06},
        {"interaction": {("CH4", "CO2"): 0.1}, "volume_translation": "Peneloux"},
    ),
    "butane and pentane": ({"n-butane": 0.5, "n-pentane": 0.5}, {"equation": "Soave-Redlich-Kwong"}),
    "methane and octane": ({"CH4": 0.6, "n-octane": 0.4}, {}),
}
PAIRS = (
    ("pressure", "specific_enthalpy"),
    ("pressure", "specific_entropy"),
    ("pressure", "density"),
    ("temperature", "density"),
    ("temperature", "specific_entropy"),
    ("temperature", "specific_enthalpy"),
    ("pressure", "quality"),
    ("temperature", "quality"),
)
NESTED = (("density", "specific_internal_energy"), ("specific_enthalpy", "specific_entropy"))


def make(name: str) -> CubicFluid:
    composition, options = FLUIDS[name]
    return fluids.cubic(composition, **options)


def drawn(fluid: CubicFluid, count: int, seed: int = 2) -> dict[str, np.ndarray]:
    """Temperatures and pressures all over the range, half of them where a mixture has two phases."""
    critical = fluid.limits.critical_point
    assert critical is not None
    random = np.random.default_rng(seed)
    temperature = random.uniform(200.0, 2.2 * critical.temperature, count)
    pressure = np.exp(random.uniform(np.log(1e3), np.log(8e7), count))
    half = count // 2
    temperature[:half] = random.uniform(200.0, 1.05 * critical.temperature, half)
    pressure[:half] = np.exp(random.uniform(np.log(5e4), np.log(critical.pressure), half))
    return {"temperature": temperature, "pressure": pressure}


def returned(fluid: CubicFluid, state: Any, names: tuple[str, str], count: int) -> int:
    """From a pair of properties back to the state; how many are refused as one of several."""
    pair = {name: np.array(getattr(state, name)) for name in names}
    if "quality" in pair:
        pair[names[0]] = np.where(state.phase == "two-phase", pair[names[0]], np.nan)
    back = fluid.at(errors="mask", **pair)
    several = 0
    for i in range(count):
        if any(np.isnan(value[i]) for value in pair.values()):
            assert np.isnan(back.temperature[i])
            continue
        if i in back.faults:
            fault = back.faults[i]
            assert isinstance(fault, SeveralStates), (names, i, fault)
            nearest = min(
                abs(root.temperature / state.temperature[i] - 1) + abs((root.density or 0) / state.density[i] - 1)
                for root in fault.roots
            )
            assert nearest < 1e-6, (names, i, fault)
            several += 1
            continue
        # a liquid's pressure is soft against its volume: that it is the same state says its temperature and density
        assert back.temperature[i] == pytest.approx(state.temperature[i], rel=1e-9), (names, i)
        assert back.density[i] == pytest.approx(state.density[i], rel=1e-8), (names, i)
        assert back.specific_entropy[i] == pytest.approx(state.specific_entropy[i], rel=1e-9, abs=1e-6), (names, i)
        assert back.phase[i] == state.phase[i], (names, i)
    return several


@pytest.mark.parametrize("name", FLUIDS)
def test_every_pair_leads_back_to_its_state(name: str) -> None:
    fluid = make(name)
    state = fluid.at(**drawn(fluid, 48))
    assert len(set(state.phase)) >= 3
    for names in PAIRS:
        several = returned(fluid, state, names, 48)
        # enthalpy along an isotherm turns; the vapour's share near the critical point of a mixture may
        assert several == 0 or names == ("temperature", "specific_enthalpy") or "quality" in names, names


@pytest.mark.parametrize("name", ["propane, translated", "natural gas"])
def test_pairs_without_pressure_and_temperature_lead_back_to_their_state(name: str) -> None:
    fluid = make(name)
    state = fluid.at(**drawn(fluid, 8, seed=4))
    for names in NESTED:
        assert returned(fluid, state, names, 8) == 0


def test_saturated_states_of_a_mixture_lie_on_its_lines() -> None:
    fluid = make("butane and pentane")
    temperature = np.linspace(260.0, 440.0, 7)
    bubble, dew = fluid.saturation(temperature=temperature)
    assert (bubble.pressure > dew.pressure).all()
    assert (bubble.quality == 0.0).all()
    assert (dew.quality == 1.0).all()
    assert (bubble.phase == "liquid").all()
    assert (dew.phase == "vapour").all()
    for side, sign, state in (("bubble", 1.0, bubble), ("dew", -1.0, dew)):
        outside = fluid.at(temperature=temperature, pressure=state.pressure * (1.0 + sign * 1e-7))
        inside = fluid.at(temperature=temperature, pressure=state.pressure * (1.0 - sign * 1e-7))
        assert (outside.phase == ("liquid" if side == "bubble" else "vapour")).all()
        assert (inside.phase == "two-phase").all()
        np.testing.assert_allclose(outside.density, state.density, rtol=1e-5)
        np.testing.assert_allclose(inside.quality, state.quality, atol=1e-5)
    back = fluid.saturation(pressure=bubble.pressure)[0]
    np.testing.assert_allclose(back.temperature, temperature, rtol=1e-12)


def test_distances_from_saturation_count_from_the_dew_and_the_bubble_point() -> None:
    for name in ("propane, translated", "butane and pentane"):
        fluid = make(name)
        bubble, dew = fluid.saturation(pressure=4e5)
        hot = fluid.at(pressure=4e5, superheat=[0.0, 1e-6, 30.0])
        cold = fluid.at(pressure=4e5, subcooling=[0.0, 1e-6, 30.0])
        np.testing.assert_allclose(hot.temperature, dew.temperature + np.array([0.0, 1e-6, 30.0]), rtol=1e-14)
        np.testing.assert_allclose(cold.temperature, bubble.temperature - np.array([0.0, 1e-6, 30.0]), rtol=1e-14)
        assert hot.quality[0] == 1.0
        assert cold.quality[0] == 0.0
        assert (hot.phase == "vapour").all()
        assert (cold.phase == "liquid").all()
        read = fluid.at(pressure=4e5, temperature=[dew.temperature + 30.0, bubble.temperature - 30.0])
        np.testing.assert_allclose(read.superheat, [30.0, np.nan], rtol=1e-12)
        np.testing.assert_allclose(read.subcooling, [np.nan, 30.0], rtol=1e-12)
        with pytest.raises(RangeError, match="negative"):
            fluid.at(pressure=4e5, superheat=-1.0)
        assert np.isnan(fluid.at(pressure=4e7, temperature=900.0).superheat)


def test_two_phases_have_no_heat_capacity_and_no_speed_of_sound() -> None:
    for name in ("propane, translated", "natural gas"):
        state = make(name).at(pressure=2e6, quality=0.4)
        assert state.phase == "two-phase"
        assert np.isnan([state.isobaric_heat_capacity, state.isochoric_heat_capacity, state.speed_of_sound]).all()
        assert np.isnan([state.superheat, state.subcooling]).all()
        assert state.quality == pytest.approx(0.4, rel=1e-10)


@pytest.mark.parametrize("name", ["propane, translated", "natural gas"])
def test_shapes_are_kept_and_nan_stays_nan(name: str) -> None:
    fluid = make(name)
    for shape in ((), (1,), (0,), (3,), (2, 3), (2, 0)):
        state = fluid.at(temperature=np.full(shape, 300.0), pressure=1e5)
        for field in FIELDS:
            assert np.shape(getattr(state, field)) == shape, field
    state = fluid.at(temperature=[300.0, np.nan], pressure=[[1e5], [np.nan]])
    assert np.isfinite(state.specific_entropy).tolist() == [[True, False], [False, False]]
    assert state.phase.tolist() == [["vapour", ""], ["", ""]]
    assert not state.faults


def test_what_lies_outside_is_a_fault_with_its_reason() -> None:
    fluid = make("propane, translated")
    cases: tuple[tuple[dict[str, float], str], ...] = (
        ({"pressure": 1e5, "temperature": 7000.0}, "above the maximum, 6000 K"),
        ({"pressure": 1e5, "temperature": 20.0}, "below the minimum"),
        ({"pressure": 2e8, "temperature": 300.0}, "above the maximum, 1000 bar"),
        ({"pressure": -1.0, "temperature": 300.0}, "not above zero"),
        ({"pressure": 1e-5, "temperature": 300.0}, "the lowest computed"),
        ({"temperature": 300.0, "density": 5e3}, "the covolume"),
        ({"temperature": 300.0, "density": 0.0}, "not above zero"),
        ({"pressure": 1e5, "quality": 1.2}, "not between 0 and 1"),
        ({"pressure": 1e7, "quality": 0.5}, "no saturation"),
        ({"temperature": 400.0, "quality": 0.5}, "no saturation"),
        ({"pressure": 1e5, "specific_enthalpy": 1e9}, "above the maximum temperature"),
        ({"pressure": 1e5, "specific_enthalpy": -1e9}, "below the minimum temperature"),
        ({"pressure": 1e5, "specific_entropy": -1e5}, "below the minimum temperature"),
        ({"pressure": np.inf, "temperature": 300.0}, "not a finite number"),
        ({"density": 1.0, "specific_internal_energy": 1e12}, "No state"),
        ({"specific_enthalpy": -1e12, "specific_entropy": 1e3}, "No state"),
    )
    for pair, said in cases:
        with pytest.raises(RangeError, match=said):
            fluid.at(**pair)
        masked = fluid.at(errors="mask", **pair)
        assert np.isnan(masked.density)
        assert masked.phase == ""
        assert said in str(masked.faults[0])
    with pytest.raises(InputError, match="cannot be evaluated from this pair"):
        fluid.at(quality=0.5, density=3.0)
    with pytest.raises(InputError, match="one of the two"):
        fluid.saturation()


def test_faults_stand_beside_good_elements() -> None:
    fluid = make("natural gas")
    state = fluid.at(errors="mask", temperature=[300.0, 1e4, 210.0], pressure=[1e5, 1e5, 3e6])
    assert list(state.faults) == [1]
    assert state.phase.tolist() == ["vapour", "", "two-phase"]


def test_pressure_and_temperature_on_the_line_of_a_substance_do_not_fix_a_state() -> None:
    fluid = make("propane, translated")
    pressure = fluid.saturation(temperature=300.0)[0].pressure
    with pytest.raises(RangeError) as caught:
        fluid.at(temperature=300.0, pressure=pressure)
    (fault,) = caught.value.faults
    assert isinstance(fault, SeveralStates)
    vapour, liquid = fault.roots
    assert (vapour.density or 0) < (liquid.density or 0)
    assert fluid.at(temperature=300.0, pressure=pressure * (1 + 1e-6)).phase == "liquid"
    assert fluid.at(temperature=300.0, pressure=pressure * (1 - 1e-6)).phase == "vapour"


def test_an_enthalpy_met_twice_along_an_isotherm_is_refused_with_both_states() -> None:
    """A liquid and its first bubbles: the enthalpy falls to the boiling point and rises with the pressure above it."""
    fluid = make("propane, translated")
    liquid = fluid.at(temperature=300.0, pressure=2e7)
    with pytest.raises(RangeError) as caught:
        fluid.at(temperature=300.0, specific_enthalpy=liquid.specific_enthalpy)
    (fault,) = caught.value.faults
    assert isinstance(fault, SeveralStates)
    assert len(fault.roots) == 2
    for root in fault.roots:
        found = fluid.at(temperature=300.0, density=root.density)
        assert found.specific_enthalpy == pytest.approx(liquid.specific_enthalpy, abs=1e-2)


def test_a_translation_leaves_equilibria_as_they_are_and_shifts_the_enthalpy() -> None:
    composition = {"CH4": 0.5, "C3H8": 0.5}
    shifts = {"CH4": -3e-6, "C3H8": 5e-6}
    plain, moved = fluids.cubic(composition), fluids.cubic(composition, volume_translation=shifts)
    pair = {"temperature": np.array([220.0, 250.0, 400.0]), "pressure": np.array([1.5e6, 3e6, 2e7])}
    one, two = plain.at(**pair), moved.at(**pair)
    assert one.phase.tolist() == two.phase.tolist()
    np.testing.assert_allclose(one.quality, two.quality, rtol=1e-12)
    mean = 0.5 * sum(shifts.values())
    per_mass = mean / plain.molar_mass
    np.testing.assert_allclose(one.specific_volume - two.specific_volume, per_mass, rtol=1e-9)
    np.testing.assert_allclose(
        one.specific_enthalpy - two.specific_enthalpy, per_mass * pair["pressure"], rtol=1e-6, atol=1e-4
    )
    np.testing.assert_allclose(one.specific_internal_energy, two.specific_internal_energy, atol=1e-5)
    np.testing.assert_allclose(one.specific_entropy, two.specific_entropy, rtol=1e-12)
    assert one.isobaric_heat_capacity[2] == pytest.approx(two.isobaric_heat_capacity[2], rel=1e-12)

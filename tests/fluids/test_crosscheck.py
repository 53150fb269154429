"""Comparing states with a second source: what is compared, from which zero, in parts of what, and what is told."""

from __future__ import annotations

from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest

from reportgen.errors import InputError
from reportgen.fluids import crosscheck, cubic, ideal_gas, library, real_fluid
from reportgen.fluids.crosscheck import Comparison, Deviation, compare, second_model, second_models, usual_tolerance
from reportgen.fluids.state import State

AIR = ideal_gas({"N2": 0.7808, "O2": 0.2095, "Ar": 0.0097})
WATER = real_fluid("water")


def of(comparison: Comparison, name: str, counted: bool = False, species: str | None = None) -> Deviation:
    return next(
        item
        for item in comparison.deviations
        if (item.name, item.counted_from is not None, item.species) == (name, counted, species)
    )


class Shifted:
    """A model with other zeros and, from the second state on, an error in the values that it is asked to falsify."""

    kind = "shifted"

    def __init__(self, model: Any, **factors: float) -> None:
        self.model, self.factors = model, factors

    def at(self, **given: Any) -> State:
        state = self.model.at(**given)
        names = ("pressure", *crosscheck.AS_THEY_STAND, *crosscheck.DIFFERENCES)
        values: dict[str, Any] = {name: np.array(state.flat(name)) for name in names}
        values["specific_enthalpy"] += 1e6
        values["specific_entropy"] -= 777.0
        for name, factor in self.factors.items():
            values[name] = values[name] * factor
        return State((values["density"].size,), {**values, "phase": state.flat("phase")}, None, state.faults)


def test_another_zero_is_no_difference() -> None:
    state = WATER.at(pressure=[40e5, 10e5, 1e5], temperature=[673.15, 500.0, 300.0])
    found = compare(WATER, Shifted(WATER), state)
    assert {item.name for item in found.deviations} == {*crosscheck.AS_THEY_STAND, *crosscheck.DIFFERENCES}
    for item in found.deviations:
        assert np.nanmax(np.abs(item.relative)) < 1e-12
    assert np.isnan(of(found, "specific_enthalpy", counted=True).relative[0])


def test_a_wrong_value_is_seen_at_its_size_and_sign() -> None:
    state = WATER.at(pressure=[40e5, 10e5], temperature=[673.15, 500.0])
    found = compare(WATER, Shifted(WATER, density=1.01, speed_of_sound=0.98), state)
    assert of(found, "density").relative == pytest.approx([0.01, 0.01])
    assert of(found, "speed_of_sound").relative == pytest.approx([-0.02, -0.02])
    assert of(found, "density").difference == pytest.approx(0.01 * np.asarray(state.density))


def test_along_a_throttling_the_enthalpy_is_measured_by_the_entropy_gained() -> None:
    """h1 = h2: a difference of enthalpies has nothing of its own to be held against."""
    first = WATER.at(pressure=40e5, temperature=673.15)
    state = WATER.at(pressure=[40e5, 10e5], specific_enthalpy=np.full(2, first.specific_enthalpy))
    lost = float(state.temperature[1] * (state.specific_entropy[1] - state.specific_entropy[0]))
    wrong = SimpleNamespace(at=lambda **given: _with_enthalpy(WATER.at(**given), 0.01 * lost))
    item = of(compare(WATER, wrong, state), "specific_enthalpy", counted=True)
    assert item.scale[1] == pytest.approx(lost, rel=1e-6)
    assert item.relative[1] == pytest.approx(0.01, rel=1e-6)


def _with_enthalpy(state: State, error: float) -> State:
    names = ("pressure", *crosscheck.AS_THEY_STAND, *crosscheck.DIFFERENCES)
    values: dict[str, Any] = {name: np.array(state.flat(name)) for name in names}
    values["specific_enthalpy"] += np.array([0.0, error])
    return State((2,), {**values, "phase": state.flat("phase")})


def test_equal_states_are_held_against_a_thousandth_of_the_gas_constant() -> None:
    state = AIR.at(pressure=[1e5, 1e5], temperature=[300.0, 300.0])
    found = compare(AIR, AIR, state)
    assert of(found, "specific_entropy", counted=True).scale[1] == pytest.approx(1e-3 * AIR.gas_constant)
    assert of(found, "specific_entropy", counted=True).relative[1] == 0.0


def test_two_phases_are_compared_at_the_same_temperature_and_quality() -> None:
    state = WATER.at(pressure=[10e5, 1e5], quality=[0.3, 0.9])
    found = compare(WATER, Shifted(WATER, pressure=1.02), state)
    assert of(found, "pressure").relative == pytest.approx([0.02, 0.02])
    assert {item.name for item in found.deviations} == {"pressure", "density", "specific_enthalpy", "specific_entropy"}
    single = compare(WATER, Shifted(WATER), WATER.at(pressure=1e5, temperature=300.0))
    assert "pressure" not in {item.name for item in single.deviations}


def test_a_source_without_saturation_leaves_two_phases_out_and_says_so() -> None:
    state = WATER.at(pressure=[1e5, 1e5], specific_enthalpy=[1e6, 2.8e6])
    found = compare(WATER, "ideal-gas", state)
    assert list(found.faults) == [0]
    assert "no saturation" in found.faults[0].message
    assert np.isnan(of(found, "density").relative[0])
    assert abs(of(found, "density").relative[1]) < 0.02


def test_states_beyond_the_second_source_are_told_one_by_one() -> None:
    state = AIR.at(pressure=[1e5, 1e5, 1e5], temperature=[300.0, 4000.0, 400.0])
    found = compare(AIR, "statistical", state)
    assert list(found.faults) == [1]
    assert "from 20 K to 3000 K" in found.faults[1].message


def test_a_liquid_that_the_other_has_as_vapour_is_remarked() -> None:
    other = SimpleNamespace(at=lambda **given: WATER.at(pressure=[1e5], temperature=[500.0]))
    assert compare(WATER, other, WATER.at(pressure=[1e5], temperature=[300.0])).remarks == {
        0: "The second source finds vapour where the first has liquid."
    }


# --- the sources ----------------------------------------------------------------------------------------------------


def test_statistical_entropies_meet_those_of_the_polynomials_for_the_mixture_and_each_gas() -> None:
    """Two independent routes: fitted polynomials, and levels of molecules with S = k ln Ω and the entropy of mixing."""
    state = AIR.at(pressure=[1e5, 3e5, 8e5], temperature=[293.15, 450.0, 900.0])
    found = compare(AIR, "statistical", state)
    whole = of(found, "specific_entropy")
    assert whole.first == pytest.approx(np.asarray(state.specific_entropy))
    assert np.max(np.abs(whole.relative)) < 2e-5
    for gas in ("N2", "O2", "Ar"):
        assert np.max(np.abs(of(found, "specific_entropy", species=gas).relative)) < 1e-4
    assert np.max(np.abs(of(found, "isobaric_heat_capacity").relative)) < 5e-4
    assert np.nanmax(np.abs(of(found, "specific_enthalpy", counted=True).relative)) < 5e-4


def test_without_the_entropy_of_mixing_the_statistical_route_would_object() -> None:
    state = AIR.at(pressure=[1e5], temperature=[300.0])
    mixing = -AIR.gas_constant * sum(share * np.log(share) for share in (AIR.composition or {}).values())
    names = ("temperature", "quality", "pressure", *crosscheck.AS_THEY_STAND, *crosscheck.DIFFERENCES, "phase")
    values = {name: np.array(state.flat(name)) for name in names}
    unmixed = State((1,), values | {"specific_entropy": values["specific_entropy"] - mixing})
    found = of(compare(AIR, "statistical", unmixed), "specific_entropy")
    assert found.relative[0] == pytest.approx(mixing / float(found.first[0]), rel=1e-2)
    assert found.relative[0] > usual_tolerance("statistical", "ideal-gas")


def test_a_gas_of_one_species_has_no_rows_of_its_own() -> None:
    gas = ideal_gas("nitrogen")
    found = compare(gas, "statistical", gas.at(pressure=[1e5], temperature=[300.0]))
    assert {item.species for item in found.deviations} == {None}


def test_the_library_has_the_same_equations() -> None:
    state = WATER.at(pressure=[40e5, 10e5, 1e5, 1e5], specific_enthalpy=[3.2e6, 3.2e6, 1e6, 1.2e5])
    found = compare(WATER, "library", state)
    assert not found.faults
    for item in found.deviations:
        assert np.nanmax(np.abs(item.relative)) < 1e-6, item.name


def test_the_library_names_itself_its_version_and_its_equation() -> None:
    model = second_model(WATER, "library")
    assert model.sources == (f"CoolProp {library.library_version()}, equation of state Wagner-JPCRD-2002",)


def test_the_library_takes_mixtures_by_their_composition() -> None:
    found = compare(AIR, "library", AIR.at(pressure=[1e5, 5e5], temperature=[300.0, 400.0]))
    assert np.max(np.abs(of(found, "density").relative)) < 2e-3


def test_the_library_refuses_a_state_with_its_own_words() -> None:
    found = compare(WATER, "library", AIR.at(pressure=[1e5, 1e5], temperature=[300.0, 210.0]))
    assert list(found.faults) == [1]
    assert found.faults[1].message.startswith("CoolProp ")


def test_two_phases_of_the_library_are_compared_in_what_both_phases_have() -> None:
    """Humid air beyond saturation: the ideal gas keeps the water, the library finds a mist."""
    humid = ideal_gas({"N2": 0.766, "O2": 0.204, "H2O": 0.03})
    found = compare(humid, "library", humid.at(pressure=[1e5, 6.9e5], temperature=[303.15, 308.15]))
    assert not found.faults
    for name, counted in (("density", False), ("specific_enthalpy", True), ("specific_entropy", True)):
        assert np.isfinite(of(found, name, counted).relative[1]), name
    assert of(found, "density").relative[1] > 0.015  # less volume by the water that is liquid
    assert np.isnan(of(found, "speed_of_sound").relative[1])
    assert found.remarks == {1: "The second source finds two phases where the first has gas."}


def test_saturated_states_of_the_library_have_heat_capacity_and_speed_of_sound() -> None:
    found = compare(WATER, "library", WATER.at(temperature=[400.0, 400.0, 400.0], quality=[0.0, 0.5, 1.0]))
    assert not found.faults
    assert not found.remarks
    for name in ("isobaric_heat_capacity", "speed_of_sound"):
        assert of(found, name).relative[[0, 2]] == pytest.approx([0.0, 0.0], abs=1e-6)
        assert np.isnan(of(found, name).relative[1])


def test_a_library_that_is_not_installed_is_told_from_other_faults(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(library, "library_version", lambda: None)
    with pytest.raises(library.NotInstalled, match=r'pip install "reportgen\[crosscheck\]"'):
        second_model(WATER, "library")
    assert "library" not in second_models(WATER)


def test_real_fluid_for_dry_air_only() -> None:
    assert second_model(AIR, "real-fluid").substance == "air"
    with pytest.raises(InputError, match="No real fluid of this composition"):
        second_model(ideal_gas({"N2": 0.5, "CO2": 0.5}), "real-fluid")


@pytest.mark.parametrize(
    ("fluid", "name", "message"),
    [
        (WATER, "statistical", "those of ideal gases"),
        (real_fluid("R134a"), "ideal-gas", "R134a"),
        (AIR, "tables", "not known"),
    ],
)
def test_sources_that_there_are_not(fluid: Any, name: str, message: str) -> None:
    with pytest.raises(InputError, match=message):
        second_model(fluid, name)


def test_tolerances_by_what_two_models_share() -> None:
    assert usual_tolerance("library", "real-fluid") == 1e-4
    assert usual_tolerance("library", "ideal-gas") == 2e-2
    assert usual_tolerance("statistical", "ideal-gas") == 3e-3


@pytest.mark.parametrize("fluid", [WATER, AIR, cubic("CO2")])
def test_a_model_of_the_same_kind_is_no_second_source(fluid: Any) -> None:
    with pytest.raises(InputError, match="own kind"):
        second_model(fluid, fluid.kind)
    assert fluid.kind not in second_models(fluid)


def test_what_is_no_model_or_no_state_or_another_substance_is_refused() -> None:
    state = WATER.at(pressure=[1e5, 2e5], temperature=[300.0, 400.0])
    for first, second, states in ((WATER, None, state), ("water", AIR, state), (WATER, 3, state), (WATER, AIR, None)):
        with pytest.raises(InputError, match=r"This is no property model|These are no states"):
            compare(first, second, states)
    with pytest.raises(InputError, match=r"different substances. Found: Water of 18.0153 g/mol, Carbon dioxide of 44"):
        compare(WATER, real_fluid("CO2"), state)
    for name in ("nothing", None, ["library"]):
        with pytest.raises(InputError, match="not known"):
            second_model(WATER, name)

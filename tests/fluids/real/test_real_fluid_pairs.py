"""Real fluids from every pair of properties: states come back, none is picked where several share a pair, and what has
no state is refused with the reason.
"""

from __future__ import annotations

import numpy as np
import pytest

from reportgen.errors import InputError, RangeError
from reportgen.fluids import names, real_fluid
from reportgen.fluids.pairs import SeveralStates
from reportgen.fluids.state import FIELDS
from tests.benchmarks.round_trips import PAIRS, Outcome, draw, round_trip
from tests.fluids.real import SAMPLE

WATER = real_fluid("water")
PROPANE = real_fluid("propane")
AIR = real_fluid("air")


@pytest.mark.parametrize("name", [*SAMPLE, "helium", "methanol", "decamethyltetrasiloxane", "R404A"])
def test_states_come_back_from_every_pair(name: str) -> None:
    """Measured over all fluids, 300 states each (``python -m tests.benchmarks.round_trips``): T within 1e-9 in the same
    phase, or a state that the pair does not tell from it.
    """
    fluid = real_fluid(name)
    base = draw(fluid, 120, seed=4)
    for pair in PAIRS:
        outcome = round_trip(fluid, pair, base)
        assert not outcome.lost, outcome.lost[:3]
        if pair[0] != "temperature" and pair[1] != "temperature":
            assert outcome.back > 0.9 * outcome.states


def test_states_of_every_third_fluid_come_back_from_the_pairs_that_are_searched() -> None:
    total = Outcome()
    for name in names()[::3]:
        fluid = real_fluid(name)
        base = draw(fluid, 24, seed=9)
        for pair in (("density", "specific_internal_energy"), ("specific_enthalpy", "specific_entropy")):
            total += round_trip(fluid, pair, base)
    assert not total.lost
    assert total.states > 1500
    assert total.worst_temperature < 1e-9


class TestMixedPhasesInOneCall:
    """Liquid, two phases, vapour, supercritical, NaN and a state beyond the limits, from each pair at once."""

    BASE = WATER.at(
        temperature=[[300.0, 400.0, 500.0], [800.0, 450.0, 300.0]], density=[[1000.0, 5.0, 1.0], [400.0, 1e-3, 997.0]]
    )

    @pytest.mark.parametrize("pair", [pair for pair in PAIRS if pair != ("pressure", "temperature")])
    def test_shapes_masks_and_given_values(self, pair: tuple[str, str]) -> None:
        given = {name: np.array(getattr(self.BASE, name)) for name in pair}
        given[pair[0]][1, 2] = np.nan
        given[pair[1]][1, 1] = 1e30
        state = WATER.at(errors="mask", **given)
        for name in FIELDS:
            assert getattr(state, name).shape == (2, 3)
        assert 4 in state.faults
        assert 5 not in state.faults
        assert state.phase[1, 2] == ""
        for i in set(range(4)) - set(state.faults):
            assert state.phase.flat[i] == self.BASE.phase.flat[i]
            assert state.temperature.flat[i] == pytest.approx(self.BASE.temperature.flat[i], rel=1e-9)
            for name in pair:
                assert getattr(state, name).flat[i] == given[name].flat[i]
        for i in set(state.faults) - {4}:
            assert isinstance(state.faults[i], SeveralStates)

    def test_specific_volume_and_order(self) -> None:
        base = WATER.at(pressure=1e5, quality=0.4)
        for pair in (
            {"specific_volume": base.specific_volume, "specific_internal_energy": base.specific_internal_energy},
            {"specific_internal_energy": base.specific_internal_energy, "density": base.density},
            {"specific_entropy": base.specific_entropy, "specific_enthalpy": base.specific_enthalpy},
        ):
            assert WATER.at(**pair).quality == pytest.approx(0.4, rel=1e-10)

    def test_scalars_and_empty_arrays(self) -> None:
        assert np.ndim(WATER.at(density=5.0, specific_internal_energy=2e6).temperature) == 0
        assert WATER.at(density=[], specific_internal_energy=2e6).temperature.shape == (0,)
        assert WATER.at(specific_enthalpy=np.empty((2, 0)), specific_entropy=6e3).phase.shape == (2, 0)
        assert WATER.roots(temperature=np.empty((0, 3)), specific_enthalpy=1e5).density.shape == (0, 3, 1)


class TestSeveralStates:
    def test_water_at_its_greatest_density(self) -> None:
        """At 1 atm water is densest at 4 °C; 275 K and 279.3 K share a density."""
        cold = WATER.at(pressure=101325.0, temperature=275.0)
        state = WATER.at(errors="mask", pressure=101325.0, density=cold.density)
        fault = state.faults[0]
        assert isinstance(fault, SeveralStates)
        assert [root.temperature for root in fault.roots] == pytest.approx([275.0, 279.30478277], abs=1e-7)
        assert "275 K (1.85 degC) or 279.304783 K (6.15478 degC)" in str(fault)
        assert "Give the pressure with the temperature of the one that is meant" in str(fault)
        for root in fault.roots:
            back = WATER.at(pressure=101325.0, temperature=root.temperature)
            assert back.density == pytest.approx(cold.density, rel=1e-12)

    def test_the_dome_and_a_cold_liquid_share_pressure_and_density(self) -> None:
        """At 700 Pa water boils at 1.9 °C; liquid at 0.2 °C is lighter than that, and as light as the first bubbles."""
        cold = WATER.at(pressure=700.0, temperature=273.4)
        roots = WATER.roots(pressure=700.0, density=cold.density)
        assert sorted(roots.phase.tolist()) == ["liquid", "two-phase"]

    def test_entropy_of_water_below_4_degrees(self) -> None:
        """(∂s/∂p)_T = −(∂v/∂T)_p is positive there: from saturation on entropy rises along the isotherm to a greatest
        value, and falls again. Three states share one: a first trace of vapour, and liquid at two pressures.
        """
        low = WATER.at(pressure=5e6, temperature=274.0)
        roots = WATER.roots(temperature=274.0, specific_entropy=low.specific_entropy)
        assert roots.phase.tolist() == ["two-phase", "liquid", "liquid"]
        assert roots.pressure[1] == pytest.approx(5e6, rel=1e-6)
        assert roots.pressure[2] > 2e7
        with pytest.raises(RangeError, match=r"Water has 3 states at temperature 274 K .*, quality .*; .*; "):
            WATER.at(temperature=274.0, specific_entropy=low.specific_entropy)

    @pytest.mark.parametrize("off", [1e-2, 1e-4, 1e-6, 1e-7])
    def test_both_sides_of_the_least_enthalpy_of_an_isotherm(self, off: float) -> None:
        """Propane at 500 K: least enthalpy where (∂h/∂ρ)_T = 0; two states close to it are still told apart."""
        rho = np.linspace(150.0, 600.0, 20001)
        h = PROPANE.at(temperature=500.0, density=rho).specific_enthalpy
        middle = rho[int(np.argmin(h))]
        fine = middle + np.linspace(-0.05, 0.05, 2001)
        middle = fine[int(np.argmin(PROPANE.at(temperature=500.0, density=fine).specific_enthalpy))]
        base = PROPANE.at(temperature=500.0, density=middle * (1 + 10 * off) if off < 1e-5 else middle * (1 + off))
        roots = PROPANE.roots(temperature=500.0, specific_enthalpy=base.specific_enthalpy)
        assert roots.density.shape == (2,)
        assert roots.density[0] < middle * (1 + 1e-4)
        assert roots.density[1] == pytest.approx(base.density, rel=1e-6)
        assert roots.specific_enthalpy[0] == roots.specific_enthalpy[1] == base.specific_enthalpy
        listed = PROPANE.at(errors="mask", temperature=500.0, specific_enthalpy=base.specific_enthalpy).faults[0]
        assert [root.density for root in listed.roots] == pytest.approx(roots.density.tolist(), rel=1e-12)

    def test_below_the_least_enthalpy_there_is_none(self) -> None:
        with pytest.raises(RangeError, match=r"there it lies between [\d.]+ kJ/kg and [\d.]+ kJ/kg"):
            PROPANE.at(temperature=500.0, specific_enthalpy=2e5)

    def test_saturation_by_pressure_and_temperature_offers_both_phases(self) -> None:
        liquid, vapour = WATER.saturation(temperature=450.0)
        fault = WATER.at(errors="mask", pressure=liquid.pressure, temperature=450.0).faults[0]
        assert isinstance(fault, SeveralStates)
        assert [root.density for root in fault.roots] == pytest.approx([vapour.density, liquid.density], rel=1e-12)
        roots = WATER.roots(pressure=liquid.pressure, temperature=450.0)
        assert roots.quality.tolist() == [1.0, 0.0]
        assert roots.phase.tolist() == ["vapour", "liquid"]

    def test_roots_of_a_batch_lie_along_the_last_axis(self) -> None:
        state = WATER.roots(
            errors="mask", temperature=[[300.0, 300.0], [np.nan, 5000.0]], specific_enthalpy=[[113e3, 2e6], [1e5, 1e5]]
        )
        assert state.shape == (2, 2, 2)
        assert np.isfinite(state.density).sum(axis=-1).tolist() == [[2, 1], [0, 0]]
        assert list(state.faults) == [3]
        assert "above the maximum" in state.faults[3].message
        assert (np.diff(state.density[0, 0]) > 0).all()
        assert state.specific_enthalpy[0, 0].tolist() == [113e3, 113e3]
        assert WATER.roots(pressure=1e5, temperature=300.0).density.shape == (1,)
        with pytest.raises(RangeError, match="above the maximum"):
            WATER.roots(temperature=5000.0, specific_enthalpy=1e5)
        with pytest.raises(InputError, match="exactly two"):
            WATER.roots(temperature=300.0)


class TestEnthalpyAndEntropy:
    def test_a_pair_belongs_to_one_state(self) -> None:
        """Along isentropes enthalpy rises with pressure, dh = v dp, also through a dome whose dew line turns."""
        fluid = real_fluid("decamethyltetrasiloxane")
        triple = fluid.limits.triple_point.pressure
        pressure = np.geomspace(1.01 * triple, fluid.limits.maximum_pressure, 400)
        dew = fluid.saturation(temperature=np.linspace(330.0, 590.0, 9))[1].specific_entropy
        for entropy in dew:
            state = fluid.at(errors="mask", pressure=pressure, specific_entropy=entropy)
            enthalpy = state.specific_enthalpy[np.isfinite(state.specific_enthalpy)]
            assert enthalpy.size > 300
            assert (np.diff(enthalpy) > 0).all()

    def test_through_the_dome_and_out_again(self) -> None:
        """An isentrope of a large molecule that leaves the vapour, crosses the dome and comes out at both ends."""
        fluid = real_fluid("decamethyltetrasiloxane")
        entropy = fluid.at(temperature=500.0, quality=1.0).specific_entropy
        base = fluid.at(errors="mask", pressure=np.geomspace(1.0, 1e6, 60), specific_entropy=entropy)
        good = np.isfinite(base.temperature)
        assert {"two-phase", "vapour"} <= set(base.phase[good].tolist())
        again = fluid.at(specific_enthalpy=base.specific_enthalpy[good], specific_entropy=entropy)
        assert (again.phase == base.phase[good]).all()
        assert again.temperature == pytest.approx(base.temperature[good], rel=1e-9)
        assert again.pressure == pytest.approx(base.pressure[good], rel=1e-7)

    def test_beyond_the_limits(self) -> None:
        hot = WATER.at(temperature=2000.0, pressure=1e5)
        with pytest.raises(RangeError, match="above the maximum, 2000 K"):
            WATER.at(specific_enthalpy=hot.specific_enthalpy + 1e4, specific_entropy=hot.specific_entropy)
        with pytest.raises(RangeError, match=r"No state of Water within its limits .* up to 10000 bar"):
            WATER.at(specific_enthalpy=1e9, specific_entropy=5e3)


class TestDensityAndInternalEnergy:
    def test_heating_a_closed_vessel(self) -> None:
        """Internal energy at constant volume rises with temperature, out of the dome on either side."""
        for volume, end in ((0.002, "supercritical"), (0.5, "vapour")):
            energy = np.linspace(3e5, 2.9e6 if end == "vapour" else 2.2e6, 500)
            state = WATER.at(specific_volume=volume, specific_internal_energy=energy)
            assert (np.diff(state.temperature) > 0).all()
            assert state.phase[0] == "two-phase"
            assert state.phase[-1] == end

    def test_beyond_the_limits(self) -> None:
        with pytest.raises(RangeError, match=r"specific internal energy 9000 kJ/kg: there it lies between .* kJ/kg"):
            WATER.at(density=1.0, specific_internal_energy=9e6)
        with pytest.raises(RangeError, match="highest within the limits"):
            WATER.at(density=3000.0, specific_internal_energy=1e5)
        with pytest.raises(RangeError, match=r"No state of Water within its limits"):
            WATER.at(density=1200.0, specific_internal_energy=-1e5)


def test_a_thin_gas_does_not_tell_its_pressure_by_its_energy() -> None:
    thin = WATER.at(temperature=1500.0, pressure=1e-6)
    with pytest.raises(RangeError, match="do not tell the pressure of Water: in a gas as thin as this"):
        WATER.at(temperature=1500.0, specific_enthalpy=thin.specific_enthalpy)
    # entropy does
    assert WATER.at(temperature=1500.0, specific_entropy=thin.specific_entropy).pressure == pytest.approx(
        1e-6, rel=1e-9
    )


class TestPseudoPure:
    @pytest.mark.parametrize("pair", [pair for pair in PAIRS if pair != ("pressure", "temperature")])
    def test_between_the_lines_is_refused_and_the_lines_are_not(self, pair: tuple[str, str]) -> None:
        bubble, dew = AIR.saturation(temperature=100.0)
        if pair[0] == "pressure":
            bubble, dew = AIR.saturation(pressure=6e5)
        for end in (bubble, dew):
            roots = AIR.roots(**{name: getattr(end, name) for name in pair})
            assert np.min(np.abs(roots.density / end.density - 1)) < 1e-9
        pair = tuple("specific_volume" if name == "density" else name for name in pair)
        middle = {name: (getattr(bubble, name) + getattr(dew, name)) / 2 for name in pair}
        with pytest.raises(RangeError, match="between the bubble and the dew line"):
            AIR.at(**middle)

    def test_a_liquid_that_shares_a_value_with_the_gap_between_the_lines_is_not_taken_for_it(self) -> None:
        bubble, dew = AIR.saturation(temperature=100.0)
        between = 0.9 * bubble.specific_enthalpy + 0.1 * dew.specific_enthalpy
        fault = AIR.at(errors="mask", temperature=100.0, specific_enthalpy=between).faults[0]
        assert isinstance(fault, SeveralStates)
        assert "Air has 2 states" in fault.message
        assert "and one between the bubble and the dew line" in fault.message
        assert len(fault.roots) == 1

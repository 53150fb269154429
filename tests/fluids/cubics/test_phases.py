"""Stability, flashes and envelopes of mixtures, against brute force and against themselves."""

from __future__ import annotations

import numpy as np
import pytest

from reportgen import fluids
from reportgen.errors import RangeError
from reportgen.fluids.cubics.equilibrium import equilibrate
from reportgen.fluids.cubics.fluid import CubicFluid
from reportgen.fluids.cubics.fugacity import Slopes, phase_at
from reportgen.fluids.cubics.mixing import Conditions, Mixture
from reportgen.fluids.cubics.stability import tangent_plane_test
from reportgen.fluids.pairs import SeveralStates

NATURAL_GAS = {"CH4": 0.70, "C2H6": 0.12, "C3H8": 0.08, "N2": 0.04, "CO2": 0.06}


def parts(fluid: CubicFluid):
    equilibria = fluid._equilibria
    return equilibria, equilibria.model.mixture, equilibria.feed


@pytest.mark.parametrize(
    ("composition", "options", "temperatures"),
    [
        ({"CO2": 0.6, "N2": 0.4}, {}, (180.0, 310.0)),
        ({"CH4": 0.8, "n-octane": 0.2}, {}, (180.0, 560.0)),
        ({"H2O": 0.4, "n-hexane": 0.6}, {"interaction": {("H2O", "n-hexane"): 0.5}}, (300.0, 560.0)),
        ({"CH4": 0.97, "n-hexane": 0.03}, {"equation": "Soave-Redlich-Kwong"}, (170.0, 320.0)),
    ],
)
def test_the_stability_test_is_right_wherever_every_composition_is_tried(composition, options, temperatures) -> None:
    """The tangent-plane distance at two thousand trial compositions tells whether a binary feed is stable."""
    _, mixture, feed = parts(fluids.cubic(composition, **options))
    random = np.random.default_rng(7)
    count = 60
    temperature = random.uniform(*temperatures, count)
    pressure = np.exp(random.uniform(np.log(1e5), np.log(4e7), count))
    conditions = mixture.conditions(temperature, pressure)
    everywhere = np.repeat(feed, count, axis=1)
    tested = phase_at(mixture, conditions, everywhere)
    verdict = tangent_plane_test(mixture, conditions, everywhere, tested)
    level = np.log(feed) + tested.ln_phi
    share = np.concatenate(
        [np.geomspace(1e-10, 0.01, 200), np.linspace(0.01, 0.99, 1601), 1 - np.geomspace(1e-10, 0.01, 200)]
    )
    lowest = np.full(count, np.inf)
    for i in range(count):
        trial = np.array([share, 1.0 - share])
        phase = phase_at(mixture, conditions.take(np.full(share.size, i)), trial)
        lowest[i] = np.min(np.sum(trial * (np.log(trial) + phase.ln_phi - level[:, i : i + 1]), axis=0))
    assert 5 < np.count_nonzero(verdict.unstable) < count - 5
    clear = np.abs(lowest) > 1e-6
    assert (verdict.unstable[clear] == (lowest[clear] < 0.0)).all()
    # whatever is unstable on the grid is unstable by the test
    assert verdict.unstable[lowest < -1e-9].all()


def test_phases_balance_and_have_equal_fugacities() -> None:
    fluid = fluids.cubic(NATURAL_GAS, interaction={("CH4", "CO2"): 0.1}, volume_translation="Peneloux")
    _, mixture, feed = parts(fluid)
    temperature, pressure = np.linspace(150.0, 240.0, 10)[:, None], np.array([[5e5, 2e6, 4e6]])
    split = fluid.phases(temperature, pressure)
    whole = fluid.at(temperature=temperature, pressure=pressure)
    assert split.species == tuple(NATURAL_GAS)
    assert split.liquid_fractions.shape == (10, 3, 5)
    mixed = whole.phase == "two-phase"
    assert 8 < np.count_nonzero(mixed) < 30
    share = split.vapour_share[mixed][:, None]
    x, y = split.liquid_fractions[mixed], split.vapour_fractions[mixed]
    np.testing.assert_allclose(x.sum(axis=-1), 1.0, rtol=1e-13)
    np.testing.assert_allclose((1.0 - share) * x + share * y, np.broadcast_to(feed[:, 0], x.shape), rtol=1e-11)
    t, p = (np.broadcast_to(values, mixed.shape)[mixed] for values in (temperature, pressure))
    conditions = mixture.conditions(t, p)
    liquid, vapour = phase_at(mixture, conditions, x.T), phase_at(mixture, conditions, y.T)
    np.testing.assert_allclose(np.log(x.T) + liquid.ln_phi, np.log(y.T) + vapour.ln_phi, atol=1e-11)
    # volume, enthalpy and entropy of the whole are those of the phases, by mass
    quality = whole.quality[mixed]
    for name in ("specific_volume", "specific_enthalpy", "specific_entropy", "specific_internal_energy"):
        total = (1.0 - quality) * getattr(split.liquid, name)[mixed] + quality * getattr(split.vapour, name)[mixed]
        np.testing.assert_allclose(total, getattr(whole, name)[mixed], rtol=1e-11)
    assert np.isfinite(split.liquid.speed_of_sound[mixed]).all()
    # a single phase is one of the two, the other is not there
    single = ~mixed
    liquid_alone = whole.phase[single] == "liquid"
    np.testing.assert_array_equal(np.isfinite(split.liquid.density[single]), liquid_alone)
    np.testing.assert_array_equal(np.isfinite(split.vapour.density[single]), ~liquid_alone)
    np.testing.assert_array_equal(np.isnan(split.liquid_fractions[single][:, 0]), ~liquid_alone)


def test_two_phases_have_less_gibbs_energy_than_one() -> None:
    """No trivial solution is taken for a split, and none in place of one."""
    fluid = fluids.cubic({"CH4": 0.7, "n-octane": 0.3})
    equilibria, mixture, feed = parts(fluid)
    random = np.random.default_rng(5)
    temperature = random.uniform(250.0, 540.0, 300)
    pressure = np.exp(random.uniform(np.log(1e5), np.log(2.4e7), 300))
    states = equilibria.at(temperature, pressure)
    assert states.found.all()
    mixed = states.mixed
    assert 100 < np.count_nonzero(mixed) < 290
    conditions = mixture.conditions(temperature, pressure)
    ln_f = [
        np.sum(part * (np.log(part) + phase_at(mixture, conditions, part).ln_phi), axis=0)
        for part in (np.repeat(feed, 300, axis=1), states.liquid, states.vapour)
    ]
    gain = (1.0 - states.fraction) * ln_f[1] + states.fraction * ln_f[2] - ln_f[0]
    assert (gain[mixed] < 0.0).all()
    spread = np.max(np.abs(np.log(states.vapour / states.liquid)), axis=0)
    assert spread[mixed].min() > 1e-3


@pytest.mark.parametrize("composition", [NATURAL_GAS, {"n-butane": 0.5, "n-pentane": 0.5}, {"CO2": 0.3, "C2H6": 0.7}])
def test_flashes_next_to_the_critical_point_agree_with_the_envelope(composition) -> None:
    fluid = fluids.cubic(composition)
    equilibria, _, _ = parts(fluid)
    critical = equilibria.critical_point
    assert critical is not None
    random = np.random.default_rng(3)
    for width in (1e-2, 1e-3, 1e-4):
        temperature = critical.temperature * (1.0 - width * random.uniform(0.05, 1.0, 40))
        lines = equilibria.boundaries("temperature", temperature)
        assert lines.bubble_found.all()
        # closer to the line than 1e-5, next to the critical point, the phases are the same to rounding
        for distance, mixed in ((-max(1e-2 * width, 2e-5), True), (max(1e-2 * width, 2e-5), False)):
            states = equilibria.at(temperature, lines.bubble.pressure * (1.0 + distance))
            assert states.found.all()
            assert (states.mixed == mixed).all(), (width, distance)


def test_a_dew_line_that_turns_back_is_told() -> None:
    """Retrograde condensation: above the critical temperature a gas condenses when its pressure falls."""
    fluid = fluids.cubic(NATURAL_GAS)
    critical = fluid.limits.critical_point
    assert critical is not None
    temperature = critical.temperature + 8.0
    with pytest.raises(RangeError, match=r"has 2 dew points at temperature .*: at .* bar and .* bar"):
        fluid.at(temperature=temperature, quality=1.0)
    envelope = fluid._equilibria.envelope
    low, high = envelope.roots("dew", "temperature", temperature)
    pressures = np.array([0.99 * low, 1.01 * low, 0.5 * (low + high), 0.999 * high, 1.001 * high])
    state = fluid.at(temperature=temperature, pressure=pressures)
    assert state.phase[[1, 2, 3]].tolist() == ["two-phase"] * 3
    assert "two-phase" not in state.phase[[0, 4]].tolist()
    # the same quality twice along the isotherm
    with pytest.raises(RangeError, match="has 2 states"):
        fluid.at(temperature=temperature, quality=float(state.quality[3]))
    # enthalpy and entropy at constant pressure stay unique
    for name in ("specific_enthalpy", "specific_entropy"):
        back = fluid.at(pressure=state.pressure, **{name: getattr(state, name)})
        np.testing.assert_allclose(back.temperature, temperature, rtol=1e-10)


def curvature(mixture: Mixture, conditions: Conditions, amounts: np.ndarray) -> tuple[float, np.ndarray]:
    """Least eigenvalue of δ_ij + √(x_i x_j) n ∂ln φ_i/∂n_j, and its vector as a change of the amounts."""
    phase = phase_at(mixture, conditions, amounts[:, None])
    scale = np.sqrt(phase.fractions[:, 0])
    slopes = Slopes(mixture, conditions, phase).composition()[0]
    values, vectors = np.linalg.eigh(np.eye(scale.size) + slopes * np.outer(scale, scale))
    return float(values[0]), vectors[:, 0] * scale


def test_a_share_of_vapour_met_three_times_is_told() -> None:
    """A narrow peak of the vapour's share beside the bubble point, and the same share again far below."""
    fluid = fluids.cubic({"CO2": 0.8, "N2": 0.2})
    state = fluid.at(temperature=281.43423712684, pressure=11075412.496917902)
    with pytest.raises(RangeError, match="has 3 states") as caught:
        fluid.at(pressure=state.pressure, quality=state.quality)
    (fault,) = caught.value.faults
    assert isinstance(fault, SeveralStates)
    found = fluid.at(temperature=[root.temperature for root in fault.roots], pressure=state.pressure)
    np.testing.assert_allclose(found.quality, state.quality, rtol=1e-9)
    np.testing.assert_allclose(found.density, [root.density for root in fault.roots], rtol=1e-9)


@pytest.mark.parametrize("form", ["Peng-Robinson", "Soave-Redlich-Kwong"])
def test_critical_points_of_mixtures_meet_their_conditions(form: str) -> None:
    """Heidemann and Khalil (1980): the matrix ∂ln f_i/∂n_j at constant T and V is singular, and stays so along its null
    vector to second order. Here at constant T and p, where the first condition is the same.
    """
    for composition in (NATURAL_GAS, {"CH4": 0.6, "n-octane": 0.4}, {"CO2": 0.3, "C2H6": 0.7}):
        fluid = fluids.cubic(composition, equation=form)  # type: ignore[arg-type]
        equilibria, mixture, feed = parts(fluid)
        critical = equilibria.critical_point
        assert critical is not None
        conditions = mixture.conditions(np.array([critical.temperature]), np.array([critical.pressure]))
        least, direction = curvature(mixture, conditions, feed[:, 0])
        assert abs(least) < 1e-6
        step = 1e-3
        ahead, behind = (curvature(mixture, conditions, feed[:, 0] + sign * step * direction)[0] for sign in (1, -1))
        slope, bend = (ahead - behind) / (2.0 * step), (ahead + behind - 2.0 * least) / step**2
        assert abs(slope) < 2e-3 * abs(bend)
        assert bend > 0.0


def test_a_mixture_that_is_nearly_one_substance_is_nearly_that_substance() -> None:
    pure = fluids.cubic("propane")
    nearly = fluids.cubic({"C3H8": 1.0 - 1e-7, "isobutane": 1e-7})
    for pressure in (1e5, 1e6, 4e6):
        for one, two in zip(pure.saturation(pressure=pressure), nearly.saturation(pressure=pressure), strict=True):
            assert two.temperature == pytest.approx(one.temperature, rel=1e-6)
            assert two.density == pytest.approx(one.density, rel=1e-5)
    # bubble and dew point a millionth of a kelvin apart, and nearer and nearer to the critical point
    critical = nearly.limits.critical_point
    assert critical is not None
    state = nearly.at(pressure=critical.pressure * (1.0 - np.array([1e-5, 1e-4, 1e-3, 1e-2])), quality=0.3)
    np.testing.assert_allclose(state.quality, 0.3, rtol=1e-12)
    half = pure.at(pressure=1e6, quality=0.5)
    back = nearly.at(pressure=1e6, specific_enthalpy=half.specific_enthalpy)
    assert back.quality == pytest.approx(0.5, abs=1e-5)


def test_an_azeotrope_boils_at_one_temperature_and_is_solved() -> None:
    """CO2 and ethane have equal compositions in both phases near two thirds of CO2."""
    interaction = {("CO2", "C2H6"): 0.13}
    equilibria, _, _ = parts(fluids.cubic({"CO2": 0.6, "C2H6": 0.4}, interaction=interaction))
    pairing = equilibria.boundaries("pressure", np.array([2e6])).bubble
    low, high = 0.5, 0.9
    for _ in range(50):
        middle = 0.5 * (low + high)
        feed = np.array([[middle], [1.0 - middle]])
        pairing, good = equilibrate(equilibria.model, feed, pairing, ("pressure", "fraction"), {}, ("liquid", "vapour"))
        assert good[0]
        low, high = (middle, high) if pairing.ln_ratio[0, 0] > 0.0 else (low, middle)
    fluid = fluids.cubic({"CO2": middle, "C2H6": 1.0 - middle}, interaction=interaction)
    bubble, dew = fluid.saturation(pressure=2e6)
    assert dew.temperature == pytest.approx(bubble.temperature, rel=1e-9)
    enthalpy = bubble.specific_enthalpy + np.array([0.25, 0.75]) * (dew.specific_enthalpy - bubble.specific_enthalpy)
    state = fluid.at(pressure=2e6, specific_enthalpy=enthalpy)
    np.testing.assert_allclose(state.quality, [0.25, 0.75], atol=1e-6)
    np.testing.assert_allclose(state.temperature, bubble.temperature, rtol=1e-9)


def test_a_second_liquid_is_refused_and_no_wrong_phase_given() -> None:
    fluid = fluids.cubic(
        {"H2O": 0.3, "CH4": 0.3, "n-hexane": 0.4}, interaction={("H2O", "n-hexane"): 0.5, ("H2O", "CH4"): 0.5}
    )
    with pytest.raises(RangeError, match="two liquids, or into three phases"):
        fluid.at(temperature=300.0, pressure=1e6)
    # hot enough, all water is vapour or dissolved
    state = fluid.at(temperature=[520.0, 600.0], pressure=[1e6, 1e5])
    assert state.phase.tolist() == ["vapour", "vapour"]
    ends = fluid.at(temperature=[440.0, 700.0], pressure=1e6).specific_enthalpy
    masked = fluid.at(errors="mask", pressure=1e6, specific_enthalpy=np.linspace(2.0 * ends[0] - ends[1], ends[1], 12))
    found = np.isfinite(masked.temperature)
    assert found[6:].all()
    assert not found[:2].any()
    again = fluid.at(temperature=masked.temperature[found], pressure=1e6)
    np.testing.assert_allclose(again.specific_enthalpy, masked.specific_enthalpy[found], rtol=1e-9)


def test_lines_that_do_not_tell_everything_are_not_relied_on() -> None:
    """Air with its CO2: a first envelope of CO2 that condenses, and apart from it that of nitrogen and oxygen."""
    air = fluids.cubic("air")
    assert not air._equilibria.envelope.whole
    assert fluids.cubic({"N2": 0.78, "O2": 0.21, "Ar": 0.01})._equilibria.envelope.whole
    state = air.at(temperature=[300.0, 120.0, 105.0], pressure=[1e5, 3e6, 2e6])
    back = air.at(pressure=state.pressure, specific_entropy=state.specific_entropy)
    np.testing.assert_allclose(back.temperature, state.temperature, rtol=1e-10)


def test_many_states_are_those_of_few() -> None:
    """Chunks, active sets and the order of starts change nothing."""
    fluid = fluids.cubic(NATURAL_GAS)
    random = np.random.default_rng(8)
    temperature, pressure = random.uniform(170.0, 300.0, 6000), np.exp(random.uniform(np.log(1e5), np.log(1e7), 6000))
    many = fluid.at(temperature=temperature, pressure=pressure)
    chosen = np.arange(0, 6000, 300)
    few = fluid.at(temperature=temperature[chosen], pressure=pressure[chosen])
    assert few.phase.tolist() == many.phase[chosen].tolist()
    np.testing.assert_allclose(few.density, many.density[chosen], rtol=1e-10)
    one = fluid.at(temperature=temperature[0], pressure=pressure[0])
    assert one.density == pytest.approx(many.density[0], rel=1e-12)

"""First-order propagation against closed forms, a published example and a Monte Carlo made here."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import pytest

from reportgen.errors import InputError
from reportgen.evaluation import uncertainty
from reportgen.evaluation.sampling import SampleAxis, sample_axis
from reportgen.spec.calculation import Correlation


@dataclass(frozen=True)
class Reading:
    value: float
    standard_uncertainty: float | None = None
    degrees_of_freedom: float = math.inf
    gauge: bool = False


@dataclass(frozen=True)
class Given:
    path: str
    quantity: Reading
    applies_to: tuple[str, ...]


def axis_of(readings: dict[str, Reading], correlations: tuple = (), **more: object) -> SampleAxis:
    inputs = {path: Given(path, reading, (path,)) for path, reading in readings.items()}
    return sample_axis(inputs, [Correlation(*entry) for entry in correlations], **more)  # type: ignore[arg-type]


def test_columns_are_base_then_plus_then_minus() -> None:
    axis = axis_of({"a": Reading(10.0, 1.0), "b": Reading(3.0), "c": Reading(5.0, 0.5)})
    assert axis.inputs == ("a", "c")
    assert axis.givens["a"].tolist() == [10, 11, 10, 9, 10]
    assert axis.givens["b"].tolist() == [3, 3, 3, 3, 3]
    assert axis.givens["c"].tolist() == [5, 5, 5.5, 5, 4.5]


def test_an_input_moves_every_variable_that_it_fixes() -> None:
    given = Given("states.1.pressure", Reading(5.0, 1.0), ("states.1.pressure", "states.4.pressure"))
    axis = sample_axis({given.path: given})
    assert axis.givens["states.4.pressure"].tolist() == [5, 6, 4]


def test_the_atmosphere_moves_gauge_pressures_and_only_these() -> None:
    axis = axis_of(
        {
            "surroundings.pressure": Reading(1.0, 0.1),
            "states.1.pressure": Reading(5.0, 0.5, gauge=True),
            "states.2.pressure": Reading(7.0),
        }
    )
    assert axis.givens["states.1.pressure"].tolist() == pytest.approx([5.0, 5.1, 5.5, 4.9, 4.5])
    assert axis.givens["states.2.pressure"].tolist() == [7.0] * 5


def test_linear_result_has_the_closed_form() -> None:
    axis = axis_of({"a": Reading(10.0, 1.0), "b": Reading(3.0, 0.2)})
    estimate = axis.estimate(2 * axis.givens["a"] - 7 * axis.givens["b"])
    assert estimate.value == -1.0
    assert estimate.standard_uncertainty == pytest.approx(math.hypot(2 * 1.0, 7 * 0.2), rel=1e-12)
    assert estimate.expanded_uncertainty == pytest.approx(2 * estimate.standard_uncertainty, rel=1e-15)
    assert estimate.interval == (-1.0 - estimate.expanded_uncertainty, -1.0 + estimate.expanded_uncertainty)


def test_product_has_the_closed_form_with_correlation() -> None:
    a, b, ua, ub, r = 10.0, 3.0, 0.1, 0.06, 0.7
    axis = axis_of({"a": Reading(a, ua), "b": Reading(b, ub)}, (("a", "b", r, 1),))
    expected = math.sqrt((b * ua) ** 2 + (a * ub) ** 2 + 2 * a * b * r * ua * ub)
    assert axis.estimate(axis.givens["a"] * axis.givens["b"]).standard_uncertainty == pytest.approx(expected, rel=1e-12)


def test_fully_correlated_readings_cancel_in_a_difference() -> None:
    axis = axis_of({"a": Reading(10.0, 0.5), "b": Reading(3.0, 0.5)}, (("a", "b", 1.0, 1),))
    assert axis.estimate(axis.givens["a"] - axis.givens["b"]).standard_uncertainty == pytest.approx(0.0, abs=1e-9)


def test_published_example_resistance_and_reactance() -> None:
    """JCGM 100:2008, H.2, tables H.2 to H.4 (values from memory): R, X, Z from correlated V, I, phi."""
    axis = axis_of(
        {
            "V": Reading(4.9990, 0.0032),
            "I": Reading(19.6610e-3, 0.0095e-3),
            "phi": Reading(1.04446, 0.00075),
        },
        (("V", "I", -0.36, 1), ("V", "phi", 0.86, 2), ("I", "phi", -0.65, 3)),
    )
    voltage, current, phase = (axis.givens[name] for name in ("V", "I", "phi"))
    impedance = voltage / current
    listed = {"R": (127.732, 0.071), "X": (219.847, 0.295), "Z": (254.260, 0.236)}
    computed = {"R": impedance * np.cos(phase), "X": impedance * np.sin(phase), "Z": impedance}
    for name, (value_listed, uncertainty_listed) in listed.items():
        estimate = axis.estimate(computed[name])
        assert estimate.value == pytest.approx(value_listed, abs=5e-3)
        # The listed correlation coefficients carry two digits, which leaves 1 to 2 % of the uncertainty.
        assert estimate.standard_uncertainty == pytest.approx(uncertainty_listed, rel=0.02)


def test_independent_monte_carlo_agrees() -> None:
    """Entropy of throttled ideal gas, R·ln(p1/p2)·ṁ: a smooth function with relative uncertainties of about 1 %."""
    readings = {"m": Reading(0.7, 0.007), "p1": Reading(12e5, 0.1e5), "p2": Reading(3e5, 0.04e5)}
    axis = axis_of(readings, (("p1", "p2", 0.5, 1),))

    def generation(flow: np.ndarray, inlet: np.ndarray, outlet: np.ndarray) -> np.ndarray:
        return flow * 287.0 * np.log(inlet / outlet)

    estimate = axis.estimate(generation(axis.givens["m"], axis.givens["p1"], axis.givens["p2"]))
    random = np.random.default_rng(20260312)
    covariance = np.diag([reading.standard_uncertainty**2 for reading in readings.values()])  # type: ignore[operator]
    covariance[1, 2] = covariance[2, 1] = 0.5 * 0.1e5 * 0.04e5
    draws = random.multivariate_normal([reading.value for reading in readings.values()], covariance, size=200_000)
    sampled = generation(*draws.T)
    # The standard deviation of 2e5 draws is itself uncertain by 1/sqrt(4e5) = 0.16 %; three times that, and more.
    assert estimate.standard_uncertainty == pytest.approx(float(sampled.std()), rel=0.006)


def test_sensitivity_is_one_sided_where_a_sample_does_not_exist() -> None:
    samples = np.array([[1.0, 1.5, np.nan], [1.0, np.nan, 0.2], [1.0, np.nan, np.nan], [np.nan, 1.0, 2.0]])
    z = uncertainty.contributions(samples)[:, 0]
    assert z[:2].tolist() == pytest.approx([0.5, 0.8])
    assert np.isnan(z[2])


def test_what_a_solver_leaves_is_no_influence() -> None:
    samples = np.array([5.0, 5.0 + 1e-12, 5.0 - 1e-12])
    assert uncertainty.contributions(samples).tolist() == [0.0]


def test_curvature_of_a_square() -> None:
    axis = axis_of({"a": Reading(10.0, 0.3)})
    assert uncertainty.curvature(axis.givens["a"] ** 2)[0] == pytest.approx(0.09)


def test_shares_sum_to_one_also_with_correlation() -> None:
    z = np.array([[1.0, 2.0, -0.5], [0.0, 0.0, 0.0]])
    r = np.array([[1.0, 0.5, 0.0], [0.5, 1.0, 0.2], [0.0, 0.2, 1.0]])
    result = uncertainty.shares(z, r)
    assert result.sum(axis=-1).tolist() == pytest.approx([1.0, 0.0])


def test_effective_degrees_of_freedom() -> None:
    """JCGM 100 G.4.1 example (from memory): 0.25 %, 0.57 %, 0.82 % with 9, 4, 14 give u_c = 1.03 %, nu_eff = 19."""
    z = np.array([0.25, 0.57, 0.82])
    unlinked = np.eye(3)
    assert uncertainty.combined_standard_uncertainty(z, unlinked) == pytest.approx(1.03, abs=0.005)
    assert float(uncertainty.effective_degrees_of_freedom(z, [10 - 1, 5 - 1, 15 - 1], unlinked)) == pytest.approx(
        19.0, abs=0.6
    )
    assert math.isinf(float(uncertainty.effective_degrees_of_freedom(z, [math.inf] * 3, unlinked)))
    linked = unlinked.copy()
    linked[0, 1] = linked[1, 0] = 0.3
    assert math.isnan(float(uncertainty.effective_degrees_of_freedom(z, [9, 4, 14], linked)))
    assert math.isinf(float(uncertainty.effective_degrees_of_freedom(z, [math.inf] * 3, linked)))


def test_coverage_probability() -> None:
    """JCGM 100 table G.2 (from memory): t for 95.45 % is 2.28 at 10 degrees of freedom, 2.00 at infinity."""
    assert uncertainty.coverage_probability(2.0, math.inf) == pytest.approx(0.9545, abs=1e-4)
    assert uncertainty.coverage_probability(2.28, 10.7) == pytest.approx(0.9545, abs=5e-4)
    assert math.isnan(uncertainty.coverage_probability(2.0, math.nan))


def test_a_correlation_with_an_exact_input_is_an_error_with_its_line() -> None:
    with pytest.raises(InputError) as caught:
        axis_of({"a": Reading(1.0, 0.1), "b": Reading(2.0)}, (("a", "b", 0.5, 31),), file="calculation.toml")
    assert [(fault.line, fault.path) for fault in caught.value.faults] == [(31, "b")]


def test_contradicting_correlations_are_an_error() -> None:
    readings = {name: Reading(1.0, 0.1) for name in "abc"}
    with pytest.raises(InputError, match="contradict"):
        axis_of(readings, (("a", "b", 0.9, 1), ("b", "c", 0.9, 2), ("a", "c", -0.9, 3)))

"""The cubic, its roots, mixing rules, fugacities and their slopes."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from reportgen.fluids.cubics.bracketing import bracketed_root
from reportgen.fluids.cubics.equation import FORMS, CubicForm
from reportgen.fluids.cubics.fugacity import Slopes, phase_at
from reportgen.fluids.cubics.mixing import Mixture
from reportgen.fluids.cubics.rachford_rice import vapour_fraction
from reportgen.fluids.cubics.saturation import PureSaturation
from reportgen.fluids.cubics.scanning import brackets

RANDOM = np.random.default_rng(1)
forms = pytest.mark.parametrize("form", FORMS.values(), ids=FORMS)


def mixture(form: CubicForm, count: int = 4) -> Mixture:
    interaction = RANDOM.uniform(-0.1, 0.1, (count, count))
    interaction = np.tril(interaction, -1) + np.tril(interaction, -1).T
    return Mixture(
        form,
        np.array([190.56, 305.3, 369.8, 126.2])[:count],
        np.array([4.6e6, 4.87e6, 4.25e6, 3.4e6])[:count],
        np.array([0.011, 0.099, 0.152, 0.037])[:count],
        interaction,
        np.zeros(count),
    )


@forms
def test_the_critical_point_is_a_triple_root(form: CubicForm) -> None:
    """p, ∂p/∂v and ∂²p/∂v² of the equation meet those of the critical point: the cubic is (Z − Z_c)³."""
    b, q, z = form.covolume, form.critical_strength, form.critical_compressibility
    coefficients = [
        1.0,
        (form.sum - 1.0) * b - 1.0,
        q * b + (form.product - form.sum) * b * b - form.sum * b,
        -(q * b * b + form.product * b * b * (1.0 + b)),
    ]
    np.testing.assert_allclose(coefficients, [1.0, -3.0 * z, 3.0 * z * z, -(z**3)], rtol=1e-14)


@pytest.mark.parametrize(
    ("form", "omega", "listed"),
    [
        # 0.37464 + 1.54226 ω − 0.26992 ω² (Peng and Robinson 1976, equation 18)
        ("Peng-Robinson", 0.0, 0.37464),
        ("Peng-Robinson", 0.3, 0.37464 + 0.462678 - 0.0242928),
        # Robinson and Peng 1978, above 0.491
        ("Peng-Robinson", 1.0, 0.379642 + 1.48503 - 0.164423 + 0.016666),
        # 0.480 + 1.574 ω − 0.176 ω² (Soave 1972, equation 15)
        ("Soave-Redlich-Kwong", 0.3, 0.480 + 0.4722 - 0.01584),
    ],
)
def test_slopes_of_the_attraction_are_the_published_ones(form: str, omega: float, listed: float) -> None:
    assert float(FORMS[form].slope(np.array([omega]))[0]) == pytest.approx(listed, rel=1e-12)


@forms
def test_roots_are_those_of_the_polynomial(form: CubicForm) -> None:
    covolume = np.exp(RANDOM.uniform(np.log(1e-4), np.log(5.0), 400))
    strength = np.exp(RANDOM.uniform(np.log(0.05), np.log(40.0), 400))
    found = form.roots(covolume, strength)
    for i in range(covolume.size):
        b, q = covolume[i], strength[i]
        every = np.roots(
            [
                1.0,
                (form.sum - 1.0) * b - 1.0,
                q * b + (form.product - form.sum) * b * b - form.sum * b,
                -(q * b * b + form.product * b * b * (1.0 + b)),
            ]
        )
        real = np.sort(every.real[(np.abs(every.imag) < 1e-9 * np.abs(every)) & (every.real > b)])
        assert found.greatest[i] == pytest.approx(real[-1], rel=1e-8)
        assert found.least[i] == pytest.approx(real[0], rel=1e-8)


@forms
def test_roots_hold_where_the_vapour_is_a_million_times_thinner(form: CubicForm) -> None:
    """1/(Z − B) − q B/((Z + ε B)(Z + σ B)) = 1, to the last digits, for both roots."""
    covolume = np.geomspace(1e-15, 1e-3, 60)
    strength = np.full(60, 25.0)
    roots = form.roots(covolume, strength)
    assert (roots.least < 1e-2 * roots.greatest).all()
    for z in roots:
        repulsion = 1.0 / (z - covolume)
        pull = strength * covolume / ((z + form.lower * covolume) * (z + form.upper * covolume))
        np.testing.assert_allclose(
            repulsion - pull - 1.0, 0.0, atol=2e-14 * np.max(repulsion / repulsion * 10 + repulsion)
        )


@forms
@pytest.mark.parametrize("side", ["liquid", "vapour", "stable"])
def test_slopes_of_fugacity_are_its_differences(form: CubicForm, side: Any) -> None:
    model = mixture(form)
    temperature, pressure = np.array([150.0, 220.0, 300.0]), np.array([5e5, 3e6, 2e7])
    amounts = RANDOM.uniform(0.1, 1.0, (4, 3))
    conditions = model.conditions(temperature, pressure)
    phase = phase_at(model, conditions, amounts, side)
    slopes = Slopes(model, conditions, phase)
    composition = slopes.composition()
    np.testing.assert_allclose(composition, np.swapaxes(composition, 1, 2), atol=1e-12)
    # Gibbs-Duhem: Σ x_i ∂ln φ_i/∂n_j = 0
    np.testing.assert_allclose(np.einsum("in,nij->nj", phase.fractions, composition), 0.0, atol=1e-12)
    step = 1e-4

    def difference(at: Any) -> np.ndarray:
        return (8.0 * (at(1) - at(-1)) - (at(2) - at(-2))) / (12.0 * step)

    by_temperature = difference(
        lambda k: phase_at(model, model.conditions(temperature * np.exp(k * step), pressure), amounts, side).ln_phi
    )
    np.testing.assert_allclose(slopes.temperature(), by_temperature, rtol=1e-8, atol=1e-9)
    by_pressure = difference(
        lambda k: phase_at(model, model.conditions(temperature, pressure * np.exp(k * step)), amounts, side).ln_phi
    )
    np.testing.assert_allclose(slopes.pressure(), by_pressure, rtol=1e-8, atol=1e-9)
    for j in range(4):
        one = np.zeros((4, 1))
        one[j] = step
        by_amount = difference(lambda k, one=one: phase_at(model, conditions, phase.fractions + k * one, side).ln_phi)
        np.testing.assert_allclose(composition[:, :, j].T, by_amount, rtol=1e-7, atol=1e-8)


@forms
def test_the_saturation_curve_is_that_of_equal_fugacity(form: CubicForm) -> None:
    model = mixture(form, 1)
    saturation = PureSaturation(model)
    temperature = saturation.critical_temperature * (1.0 - np.geomspace(1e-9, 0.6, 60))
    pressure = saturation.pressure(temperature)
    conditions = model.conditions(temperature, pressure)
    one = np.ones((1, 60))
    liquid, vapour = (phase_at(model, conditions, one, side).ln_phi for side in ("liquid", "vapour"))
    np.testing.assert_allclose(liquid, vapour, atol=1e-12)
    np.testing.assert_allclose(saturation.temperature(pressure), temperature, rtol=1e-13)
    assert saturation.pressure(np.array([saturation.critical_temperature]))[0] == pytest.approx(
        saturation.critical_pressure, rel=1e-12
    )
    assert np.isnan(saturation.pressure(np.array([1.001 * saturation.critical_temperature]))).all()


def test_shares_of_vapour_solve_their_equation_between_the_poles() -> None:
    feed = RANDOM.dirichlet(np.ones(5), 300).T
    ln_ratio = RANDOM.normal(0.0, 3.0, (5, 300))
    ln_ratio[0], ln_ratio[1] = np.abs(ln_ratio[0]), -np.abs(ln_ratio[1])
    share = vapour_fraction(feed, ln_ratio)
    part = 1.0 + share * np.expm1(ln_ratio)
    assert (part > 0.0).all()
    terms = feed * np.expm1(ln_ratio) / part
    assert np.max(np.abs(np.sum(terms, axis=0)) / np.sum(np.abs(terms), axis=0)) < 1e-10
    assert vapour_fraction(feed[:, :1], np.abs(ln_ratio[:, :1]) + 0.1)[0] == 1.0
    assert vapour_fraction(feed[:, :1], -np.abs(ln_ratio[:, :1]) - 0.1)[0] == 0.0


def test_a_bracket_closes_on_roots_and_not_on_edges() -> None:
    roots = np.array([0.3, 2.0, 7.0])
    place, found = bracketed_root(
        lambda x, i: x**3 - roots[i] ** 3, np.zeros(3), np.full(3, 10.0), -(roots**3), 1000.0 - roots**3
    )
    assert found.all()
    np.testing.assert_allclose(place, roots, rtol=1e-14)
    _, found = bracketed_root(
        lambda x, i: np.where(x < 4.0, -np.inf, 1.0), np.zeros(1), np.full(1, 10.0), np.array([-np.inf]), np.ones(1)
    )
    assert not found.any()


def test_scanning_finds_pairs_of_roots_between_its_points() -> None:
    state, start, stop = brackets(
        lambda i, x: (x - 5.02) * (x - 5.04), np.array([1.0]), np.array([10.0]), geometric=False
    )
    assert state.tolist() == [0, 0]
    middle = sorted(zip(start.tolist(), stop.tolist(), strict=True))
    assert middle[0][0] < 5.02 < middle[0][1]
    assert middle[1][0] < 5.04 < middle[1][1]

"""Decision rules: both sides of every bound."""

from __future__ import annotations

import math

import pytest

from reportgen.evaluation.decisions import decide, magnitude, second_law


@pytest.mark.parametrize(
    ("margin", "expanded", "decision"),
    [
        (1.0, 0.0, "met"),
        (0.0, 0.0, "met"),
        (-1e-9, 0.0, "not met"),
        (1.01, 1.0, "met"),
        (1.0, 1.0, "not decided"),
        (0.5, 1.0, "not decided"),
        (-1.0, 1.0, "not decided"),
        (-1.01, 1.0, "not met"),
        (math.nan, 1.0, "not decided"),
        (1.0, math.nan, "not decided"),
    ],
)
def test_a_limit_is_decided_only_outside_the_uncertainty(margin: float, expanded: float, decision: str) -> None:
    assert decide(margin, expanded) == decision


@pytest.mark.parametrize(
    ("generation", "expanded", "verdict"),
    [
        (2.0, 1.0, "generates entropy"),
        (1.0, 1.0, "not resolved from reversible"),
        (-0.5, 1.0, "not resolved from reversible"),
        (-2.0, 1.0, "impossible as given"),
        (1e-12, 0.0, "not resolved from reversible"),
        (-1e-12, 0.0, "not resolved from reversible"),
        (1e-6, 0.0, "generates entropy"),
        (-1e-6, 0.0, "impossible as given"),
        (5.0, math.nan, "not resolved from reversible"),
    ],
)
def test_second_law_verdict(generation: float, expanded: float, verdict: str) -> None:
    assert second_law(generation, expanded, resolution=1e-9) == verdict


@pytest.mark.parametrize(
    ("difference", "expanded", "value", "verdict"),
    [
        (0.3, 1.0, 50.0, "negligible"),
        (-0.5, 1.0, 50.0, "noticeable"),
        (1.1, 1.0, 50.0, "decisive"),
        (0.04, 0.0, 50.0, "negligible"),
        (0.4, 0.0, 50.0, "noticeable"),
        (-0.6, 0.0, 50.0, "decisive"),
        (0.6, math.nan, 50.0, "decisive"),
    ],
)
def test_magnitude_of_a_model_difference(difference: float, expanded: float, value: float, verdict: str) -> None:
    assert magnitude(difference, expanded, value) == verdict

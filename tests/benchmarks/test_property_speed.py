"""Many states at once must cost at most half of what a compiled library's loop costs."""

from __future__ import annotations

import pytest

pytest.importorskip("CoolProp.CoolProp")

from tests.benchmarks.property_speed import FLUIDS, ratio


@pytest.mark.parametrize("name", FLUIDS)
def test_ten_thousand_states_cost_at_most_half_of_the_library(name: str) -> None:
    """Measured on two busy cores: water 0.19, carbon dioxide 0.13, nitrogen 0.21, R134a 0.25; the bar is 0.5."""
    _, _, quotient = ratio(name, pairs=3)
    assert quotient <= 0.5

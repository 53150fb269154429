"""Many states at once must cost at most half of what a compiled library's loop costs."""

from __future__ import annotations

import pytest

pytest.importorskip("CoolProp.CoolProp")

from tests.benchmarks.property_speed import FLUIDS, ratio


@pytest.mark.benchmark
@pytest.mark.parametrize("name", FLUIDS)
def test_ten_thousand_states_cost_at_most_half_of_the_library(name: str) -> None:
    """Measured on two cores: see the figures printed by ``python -m tests.benchmarks.property_speed``."""
    _, _, quotient = ratio(name, pairs=3)
    print(f"{name}: {quotient:.2f}")
    assert quotient <= 0.5

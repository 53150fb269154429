"""The sample axis must not cost an evaluation for each input."""

from __future__ import annotations

import pytest

from reportgen import fluids
from tests.benchmarks.sample_axis import NETWORKS, ratio


@pytest.mark.parametrize("network", NETWORKS)
def test_thirty_uncertain_inputs_cost_at_most_three_base_cases(network: str) -> None:
    """Measured on two cores: 1.0 to 1.1 for this ideal gas, 1.1 to 1.6 for a real fluid; the bar is 3."""
    _, _, times = ratio(NETWORKS[network], fluids.ideal_gas("air"), pairs=3)
    assert times <= 3.0

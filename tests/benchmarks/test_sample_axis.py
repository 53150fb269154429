"""The sample axis must not cost an evaluation for each input."""

from __future__ import annotations

import pytest

from reportgen import fluids
from tests.benchmarks.sample_axis import ratio


@pytest.mark.benchmark
def test_thirty_uncertain_inputs_cost_at_most_three_base_cases(capsys: pytest.CaptureFixture[str]) -> None:
    base, whole, times = ratio(fluids.ideal_gas("air"), pairs=5)
    with capsys.disabled():
        print(f"\nsample axis: base {base * 1e3:.1f} ms, 61 columns {whole * 1e3:.1f} ms, ratio {times:.2f}")
    assert times <= 3.0

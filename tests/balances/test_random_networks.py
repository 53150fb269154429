"""Random well-posed networks: the solver gets back the states from which they were built.

A sample of what ``tests/benchmarks/random_networks.py`` does with networks of up to 30 pieces, 2 000 of them.
"""

from __future__ import annotations

from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from tests.balances.random_givens import draw, judge

MOST_PIECES = 10


@settings(max_examples=40, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(st.integers(0, 10**6))
def test_the_solver_recovers_the_states_a_network_was_built_from(seed: int) -> None:
    network, givens = draw(seed, MOST_PIECES)
    verdict, text = judge(network, givens)
    assume(verdict != "not unique")
    assert verdict == "recovered", f"seed {seed}, {len(network.plant.equipment)} pieces: {text}"

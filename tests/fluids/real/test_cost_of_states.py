"""Samples of the benchmarks of speed and memory: that they measure what they say, and what a state costs in memory."""

from __future__ import annotations

import numpy as np
import pytest

from reportgen.fluids import real_fluid
from tests.benchmarks import property_memory

library = pytest.importorskip("CoolProp.CoolProp")

from tests.benchmarks import property_speed  # noqa: E402 (needs the library)


@pytest.mark.parametrize("name", ["nitrogen", "R134a"])
def test_both_sides_of_the_benchmark_compute_the_same(name: str) -> None:
    fluid, state = real_fluid(name), library.AbstractState("HEOS", property_speed.FLUIDS[name])
    point = fluid.at(temperature=300.0, density=1.0)
    state.update(library.DmassT_INPUTS, 1.0, 300.0)
    shift = {1: state.hmass() - point.specific_enthalpy, 2: state.smass() - point.specific_entropy}
    for case in property_speed.cases(fluid, state, 40):
        theirs = np.array(case.theirs(state, *case.lists)).T
        ours = np.array(case.ours(case.given))
        assert ours.shape == theirs.shape
        shifts = [0.0, shift[1], shift[2], shift[1], 0.0, 0.0, 0.0]
        if case.name == "saturation":
            shifts = [0.0, 0.0, 0.0, shift[1], shift[1], shift[2], shift[2]]
        for mine, other, add in zip(ours, theirs, shifts, strict=True):
            scale = fluid.gas_constant * (300.0 if abs(add) > 1e3 * fluid.gas_constant else 1.0)
            assert mine + add == pytest.approx(other, rel=1e-6, abs=1e-6 * scale)
        for ratio in (property_speed.at_once(case, state, 1), property_speed.one_by_one(case, state, 5, 1)):
            assert np.isfinite(ratio).all()


def test_a_state_takes_less_than_a_thousand_bytes() -> None:
    """Bar: 1 GB for a million states. Measured: 220 to 420 bytes a state, on top of 33 MB."""
    few, many = 1_000, 150_000
    size = {count: property_memory.measure("R134a", "specific_enthalpy", count) for count in (few, many)}
    assert size[many] - size[few] < 1e3 * (many - few) / 1e6
    assert size[few] < 80.0

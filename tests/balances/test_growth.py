"""Large plants: the sparse solution equals the dense one, and a thousand pieces stay affordable."""

from __future__ import annotations

import time

import numpy as np
import pytest

from reportgen.balances import Plant, newton, solve
from tests.balances.cases import SURROUNDINGS, chain
from tests.balances.models import SimpleGas


def _recycle(stages: int) -> tuple[Plant, dict[str, float]]:
    """A recycle through many compressors and coolers of given duty: all their enthalpies in one block."""
    pieces = [("M", "mixer", {"inlets": ("feed", "back"), "outlet": ("0",)})]
    givens = {
        **SURROUNDINGS,
        "states.feed.pressure": 1e5,
        "states.feed.temperature": 300.0,
        "states.feed.mass_flow": 1.0,
        "equipment.S.split_fraction": 0.8,
    }
    for number in range(stages):
        tag = f"E{number}"
        kind = "compressor" if number % 2 == 0 else "cooler"
        pieces.append((tag, kind, {"inlet": (str(number),), "outlet": (str(number + 1),)}))
        if number % 2 == 0:
            givens |= {f"equipment.{tag}.pressure_ratio": 1.02, f"equipment.{tag}.isentropic_efficiency": 0.8}
        else:
            givens[f"equipment.{tag}.heat"] = -2e3
    pieces.append(("S", "splitter", {"inlet": (str(stages),), "outlets": ("product", "return")}))
    pieces.append(("V", "throttling-valve", {"inlet": ("return",), "outlet": ("back",)}))
    return chain(*pieces, fluid=SimpleGas()), givens


def test_the_sparse_solution_of_a_block_equals_the_dense_one(monkeypatch: pytest.MonkeyPatch) -> None:
    plant, base = _recycle(20)
    givens = {path: value * np.array([1.0, 1.001, 0.999]) for path, value in base.items()}
    dense = solve(plant, givens)
    monkeypatch.setattr(newton, "_SPARSE_FROM", 2)
    sparse = solve(plant, givens)
    assert sum(step.key.startswith("simultaneous") for step in sparse.steps) >= 2
    for path, value in dense.values.items():
        if value.dtype.kind == "f":
            assert sparse.values[path] == pytest.approx(value, rel=1e-10, abs=1e-7, nan_ok=True), path


def test_a_long_recycle_is_solved_as_one_block() -> None:
    plant, givens = _recycle(100)
    solution = solve(plant, givens)
    assert max(len(step.solves) for step in solution.steps if step.key.startswith("simultaneous")) > 120
    assert abs(solution.values["total.energy_imbalance"][0]) < 1e-6
    assert abs(solution.values["total.closure"][0]) < 1e-9


def test_a_thousand_pieces_in_half_a_minute() -> None:
    pieces, givens = [], {**SURROUNDINGS, "states.0.pressure": 1e5, "states.0.temperature": 300.0}
    givens["states.0.mass_flow"] = 1.0
    for number in range(1000):
        kind = ("compressor", "cooler", "throttling-valve", "heater")[number % 4]
        tag, outlet = f"E{number}", f"states.{number + 1}"
        pieces.append((tag, kind, {"inlet": (str(number),), "outlet": (str(number + 1),)}))
        givens |= {
            "compressor": {f"equipment.{tag}.pressure_ratio": 3.0, f"equipment.{tag}.isentropic_efficiency": 0.8},
            "cooler": {f"{outlet}.temperature": 310.0},
            "throttling-valve": {f"{outlet}.pressure": 1.1e5},
            "heater": {f"equipment.{tag}.heat": 1e4},
        }[kind]
    plant = chain(*pieces, fluid=SimpleGas())
    began = time.process_time()
    solution = solve(plant, givens)
    assert time.process_time() - began < 30.0
    assert np.isfinite(solution.values["states.1000.specific_exergy"][0])

"""A network with 30 uncertain inputs against its base case alone: ``python -m tests.benchmarks.sample_axis``.

Timed is the solution of the network: one run of ``balances.solve`` on the 61 columns of the first-order sample axis,
and one on the base column. Both in one process, in turn, after one uncounted pair; the median of the pairs' ratios.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Mapping
from typing import Any

import numpy as np

from reportgen import balances, fluids

PAIRS = 7
STAGES = 7
UNCERTAIN = 30


def compressor_train(fluid: Any) -> tuple[balances.Plant, dict[str, float]]:
    """Compressors with coolers between them: plant and base values of its givens; the first UNCERTAIN are uncertain."""
    states, equipment = {"0": "gas"}, {}
    givens = {"states.0.pressure": 1e5, "states.0.temperature": 300.0, "states.0.mass_flow": 2.0}
    pressure = 1e5
    for stage in range(1, STAGES + 1):
        before, between, after = str(2 * stage - 2), str(2 * stage - 1), str(2 * stage)
        pressure *= 1.5
        states |= {between: "gas", after: "gas"}
        equipment[f"C-{stage}"] = balances.EquipmentDefinition(
            kind="compressor", ports={"inlet": (before,), "outlet": (between,)}
        )
        equipment[f"E-{stage}"] = balances.EquipmentDefinition(
            kind="cooler", ports={"inlet": (between,), "outlet": (after,)}
        )
        givens |= {
            f"states.{between}.pressure": pressure,
            f"equipment.C-{stage}.isentropic_efficiency": 0.78,
            f"states.{after}.temperature": 310.0,
            f"equipment.E-{stage}.pressure_drop": 0.02 * pressure,
        }
        pressure *= 0.98
    givens |= {"surroundings.temperature": 288.15, "surroundings.pressure": 101325.0}
    return balances.Plant(fluids={"gas": fluid}, states=states, equipment=equipment, trains={}), givens


def columns(givens: Mapping[str, float], uncertain: int) -> dict[str, np.ndarray]:
    """Base column, then each uncertain input raised and lowered by 0.1 %."""
    samples = {path: np.full(2 * uncertain + 1, value) for path, value in givens.items()}
    for index, path in enumerate(list(givens)[:uncertain]):
        samples[path][1 + index] *= 1.001
        samples[path][1 + uncertain + index] *= 0.999
    return samples


def ratio(fluid: Any, pairs: int = PAIRS) -> tuple[float, float, float]:
    """Median seconds of the base case, of the whole sample axis, and median ratio of the pairs."""
    plant, givens = compressor_train(fluid)
    single, axis = columns(givens, 0), columns(givens, UNCERTAIN)
    assert next(iter(axis.values())).shape == (2 * UNCERTAIN + 1,)
    seconds = [(_seconds(plant, single), _seconds(plant, axis)) for _ in range(pairs + 1)][1:]
    return (
        statistics.median(base for base, _ in seconds),
        statistics.median(whole for _, whole in seconds),
        statistics.median(whole / base for base, whole in seconds),
    )


def _seconds(plant: balances.Plant, givens: Mapping[str, np.ndarray]) -> float:
    began = time.perf_counter()
    solution = balances.solve(plant, givens)
    ended = time.perf_counter()
    assert np.all(np.isfinite(solution.values["total.entropy_generation"]))
    return ended - began


def main() -> None:
    for name, fluid in (
        ("air, ideal gas", fluids.ideal_gas("air")),
        ("nitrogen, real fluid", fluids.real_fluid("nitrogen")),
    ):
        base, whole, times = ratio(fluid)
        print(
            f"{name}: {2 * STAGES} pieces, {UNCERTAIN} uncertain inputs, {2 * UNCERTAIN + 1} columns: "
            f"base {base * 1e3:.1f} ms, sample axis {whole * 1e3:.1f} ms, "
            f"ratio {times:.2f} (median of {PAIRS}); bar 3.0"
        )


if __name__ == "__main__":
    main()

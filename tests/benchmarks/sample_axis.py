"""A network with 30 uncertain inputs against its base case alone: ``python -m tests.benchmarks.sample_axis``.

Timed is the solution of the network: one run of ``balances.solve`` on the 61 columns of the first-order sample axis,
and one on the base column. Both in one process, in turn, after one uncounted pair; the median of the pairs' ratios.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable, Mapping
from typing import Any

import numpy as np

from reportgen import balances, fluids

PAIRS = 7
STAGES = 7
LOOPS = 9
UNCERTAIN = 30

#: Fluid to plant and base values of its givens; the first UNCERTAIN givens are the uncertain ones.
Network = Callable[[Any], tuple[balances.Plant, dict[str, float]]]


def compressor_train(fluid: Any) -> tuple[balances.Plant, dict[str, float]]:
    """Compressors with coolers between them: solved piece by piece."""
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


def recycle_loops(fluid: Any) -> tuple[balances.Plant, dict[str, float]]:
    """Heaters with part of their outlet led back to their inlet: every loop is solved together by iteration."""
    states, equipment = {"0": "gas"}, {}
    givens = {"states.0.temperature": 300.0, "states.0.mass_flow": 1.0, "surroundings.temperature": 288.15}
    before = "0"
    for loop in range(1, LOOPS + 1):
        mixed, hot, after, back = (f"{loop}{letter}" for letter in "abcd")
        states |= dict.fromkeys((mixed, hot, after, back), "gas")
        equipment[f"M-{loop}"] = balances.EquipmentDefinition("mixer", {"inlets": (before, back), "outlet": (mixed,)})
        equipment[f"H-{loop}"] = balances.EquipmentDefinition("heater", {"inlet": (mixed,), "outlet": (hot,)})
        equipment[f"S-{loop}"] = balances.EquipmentDefinition("splitter", {"inlet": (hot,), "outlets": (after, back)})
        givens |= {
            f"equipment.H-{loop}.heat": 2e4,
            f"states.{back}.mass_flow": 0.4,
            f"equipment.H-{loop}.boundary_temperature": 700.0,
        }
        before = after
    givens |= {f"states.{state}.pressure": 3e5 for state in states} | {"surroundings.pressure": 101325.0}
    return balances.Plant(fluids={"gas": fluid}, states=states, equipment=equipment, trains={}), givens


NETWORKS: dict[str, Network] = {"compressor train": compressor_train, "recycle loops": recycle_loops}


def columns(givens: Mapping[str, float], uncertain: int) -> dict[str, np.ndarray]:
    """Base column, then each uncertain input raised and lowered by 0.1 %."""
    samples = {path: np.full(2 * uncertain + 1, value) for path, value in givens.items()}
    for index, path in enumerate(list(givens)[:uncertain]):
        samples[path][1 + index] *= 1.001
        samples[path][1 + uncertain + index] *= 0.999
    return samples


def ratio(network: Network, fluid: Any, pairs: int = PAIRS) -> tuple[float, float, float]:
    """Median seconds of the base case, of the whole sample axis, and median ratio of the pairs."""
    plant, givens = network(fluid)
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
    models = {"air, ideal gas": fluids.ideal_gas("air"), "nitrogen, real fluid": fluids.real_fluid("nitrogen")}
    print(f"{UNCERTAIN} uncertain inputs, {2 * UNCERTAIN + 1} columns, median of {PAIRS} pairs; bar 3.0")
    for title, network in NETWORKS.items():
        for name, fluid in models.items():
            base, whole, times = ratio(network, fluid)
            pieces = len(network(fluid)[0].equipment)
            print(
                f"{title}, {pieces} pieces, {name}: "
                f"base {base * 1e3:.1f} ms, sample axis {whole * 1e3:.1f} ms, ratio {times:.2f}"
            )


if __name__ == "__main__":
    main()

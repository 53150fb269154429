"""Processes of closed systems: their balances computed from states, heat and work alone, and the test of a boundary.

Like the balances of equipment in ``audits``, these are not taken from the relations that solved the plant: a wrong
relation would show.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np

from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.evaluation.trials import Trial
from reportgen.quantities import Display

__all__ = ["closed_balances", "closed_boundary_test", "closed_owners"]


def closed_owners(plant: EvaluatedPlant) -> list[tuple[str, Sequence[str]]]:
    """Processes, trains of processes and all that count, each with its tags."""
    if not plant.processes:
        return []
    owners: list[tuple[str, Sequence[str]]] = [(f"processes.{tag}", (tag,)) for tag in plant.processes]
    owners += [(f"trains.{train}", tags) for train, tags in plant.process_trains.items()]
    left_out = {tag for train in plant.alternatives for tag in plant.process_trains.get(train, ())}
    whole = "closed" if plant.kinds else "total"
    return [*owners, (whole, [tag for tag in plant.processes if tag not in left_out])]


def closed_balances(plant: EvaluatedPlant, tags: Sequence[str]) -> dict[str, tuple[float, float]]:
    """What mass, energy and entropy balances leave from the first states of some processes to their last.

        mass      Σ m_first − Σ m_last                                        [kg]
        energy    Σ Q − Σ W + Σ m_first u − Σ m_last u                        [J]
        entropy   Σ m_last s − Σ m_first s − Σ S_Q − Σ S_gen                  [J/K]

    Returns:
        Quantity to (residual, sum of the absolute terms), base case; NaN where a term is unknown.
    """
    processes = [plant.processes[tag] for tag in tags]
    ends = {state for process in processes for state in process.after}
    starts = {state for process in processes for state in process.before}
    first = [state for process in processes for state in process.before if state not in ends]
    last = [state for process in processes for state in process.after if state not in starts]
    mass, energy, entropy = [], [], []
    for sign, states in ((1.0, first), (-1.0, last)):
        for state in states:
            amount = _base(plant, f"states.{state}.mass")
            mass.append(sign * amount)
            energy.append(sign * amount * _base(plant, f"states.{state}.specific_internal_energy"))
            entropy.append(-sign * amount * _base(plant, f"states.{state}.specific_entropy"))
    for tag, process in zip(tags, processes, strict=True):
        for port in process.heats:
            heat = _base(plant, port.heat)
            energy.append(heat)
            entropy.append(-_base(plant, port.entropy) if heat != 0.0 else 0.0)
        energy.append(-_base(plant, f"processes.{tag}.work"))
        entropy.append(-_base(plant, f"processes.{tag}.entropy_generation"))
    return {
        name: (float(np.sum(terms)), float(np.sum(np.abs(terms))))
        for name, terms in (("mass", mass), ("energy", energy), ("entropy", entropy))
    }


def closed_boundary_test(
    trial: Trial, tag: str, temperature_path: str, resolution: float, display: Display
) -> dict[str, Any] | None:
    """What changes when heat leaves at the mean temperature of the content instead of that of the surroundings.

    The mean is Q/ΔS, by which heat of a slow process carries its entropy, as long as it lies between the temperatures
    of the states; otherwise their arithmetic mean. A boundary by which the process would destroy entropy (by more than
    ``resolution`` [J/K]) is told to be none, and not compared.
    """
    plant = trial.plant
    process = plant.processes[tag]
    temperatures = [_base(plant, f"states.{state}.temperature") for state in (*process.before, *process.after)]
    if not np.all(np.isfinite(temperatures)):
        return None
    mean = float(np.mean(temperatures))
    heat, change = (_base(plant, f"processes.{tag}.{name}") for name in ("heat", "entropy_change"))
    if change != 0.0 and min(temperatures) <= heat / change <= max(temperatures):
        mean = heat / change
    words = f"the mean temperature of the content in {tag}, {display.show(mean, 'temperature').text}"
    generated = f"processes.{tag}.entropy_generation"
    return trial.run(
        f"With the boundary at {words},",
        givens={temperature_path: mean},
        impossible=lambda values: (
            f"Not compared: a boundary at {words}, would have {tag} destroy entropy, so it lies at a lower one."
            if values.get(generated, math.nan) < -resolution
            else None
        ),
    )


def _base(plant: EvaluatedPlant, path: str) -> float:
    return float(plant.samples(path)[0])

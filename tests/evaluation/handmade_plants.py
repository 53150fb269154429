"""Plants made by hand, to test audits and cautions without solving anything."""

from __future__ import annotations

import math
from dataclasses import replace
from types import SimpleNamespace

import numpy as np

from reportgen.balances.doubts import Doubt
from reportgen.balances.relations import HeatPort
from reportgen.evaluation.evaluated import Connection, EvaluatedPlant
from reportgen.evaluation.sampling import SampleAxis


def axis(count: int = 0, coverage_factor: float = 2.0) -> SampleAxis:
    """A sample axis of uncertain inputs named input.0, input.1, …"""
    return SampleAxis(
        inputs=tuple(f"input.{number}" for number in range(count)),
        standard_uncertainty=np.ones(count),
        degrees_of_freedom=np.full(count, math.inf),
        correlation=np.eye(count),
        coverage_factor=coverage_factor,
        givens={},
    )


def samples(value: float, *steps: float) -> np.ndarray:
    """Base value with its contribution from each input."""
    return np.array([value, *(value + step for step in steps), *(value - step for step in steps)])


def fluid(
    substance: str = "Water",
    *,
    limits: tuple[float, float, float] = (273.16, 2000.0, 1e9),
    published_maximum: float | None = None,
    critical: tuple[float, float] | None = (647.096, 22.064e6),
    saturation_temperature: float = 373.0,
    bubble_temperature: float | None = None,
) -> SimpleNamespace:
    """A stand-in for a property model: its limits, and one saturation temperature at every pressure.

    ``bubble_temperature`` for a mixture, whose liquid boils below the dew point.
    """
    return SimpleNamespace(
        title=substance,
        substance=substance,
        kind="real-fluid",
        composition=None,
        entropy_zero_name="third-law",
        sources=("a publication",),
        limits=SimpleNamespace(
            minimum_temperature=limits[0],
            maximum_temperature=limits[1],
            maximum_pressure=limits[2],
            published_maximum_temperature=published_maximum,
            critical_point=None if critical is None else SimpleNamespace(temperature=critical[0], pressure=critical[1]),
        ),
        saturation=lambda pressure, errors: tuple(
            SimpleNamespace(temperature=np.full_like(pressure, temperature))
            for temperature in (bubble_temperature or saturation_temperature, saturation_temperature)
        ),
    )


def plant(
    values: dict[str, np.ndarray | float | str],
    *,
    kinds: dict[str, str] | None = None,
    connections: dict[str, list[tuple[str, str, str]]] | None = None,
    fluids: dict[str, SimpleNamespace] | None = None,
    limits: dict[str, SimpleNamespace] | None = None,
    trains: dict[str, tuple[str, ...]] | None = None,
    power_signs: dict[str, int] | None = None,
    inputs: int = 0,
    given: tuple[str, ...] = (),
    doubts: tuple[Doubt, ...] = (),
) -> EvaluatedPlant:
    """A solved plant: every state is of the first fluid; ``given`` are the paths that were inputs."""
    kinds = kinds or {}
    fluids = fluids or {"f": fluid()}
    states = {path.split(".")[1] for path in values if path.startswith("states.")}
    sample_axis = replace(axis(inputs), givens={path: np.asarray(values[path], dtype=float) for path in given})
    return EvaluatedPlant(
        axis=sample_axis,
        values={
            path: np.array([value] * sample_axis.columns)
            if isinstance(value, str)
            else np.broadcast_to(value, sample_axis.columns)
            for path, value in values.items()
        },
        fluids=fluids,
        state_fluids=dict.fromkeys(sorted(states), next(iter(fluids))),
        kinds=kinds,
        connections={tag: tuple(Connection(*entry) for entry in (connections or {}).get(tag, ())) for tag in kinds},
        power_signs={tag: (power_signs or {}).get(tag, 0) for tag in kinds},
        heats={
            tag: (
                HeatPort(
                    tag, *(f"equipment.{tag}.{name}" for name in ("heat", "boundary_temperature", "entropy_with_heat"))
                ),
            )
            for tag in kinds
        },
        limits=limits or {},
        trains=trains or {},
        doubts=doubts,
    )

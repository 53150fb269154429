"""A solved plant with its sample axis: what audits, cautions, tests and figures read from.

The class holds and looks up; it computes nothing of its own.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any, Literal, NamedTuple

import numpy as np
import numpy.typing as npt

from reportgen import names
from reportgen.evaluation.sampling import ATMOSPHERE, Estimate, SampleAxis

if TYPE_CHECKING:
    from reportgen.balances.doubts import Doubt
    from reportgen.balances.relations import HeatPort
    from reportgen.evaluation.assumptions import AutomaticAssumption
    from reportgen.evaluation.vessels import EvaluatedVessel
    from reportgen.fluids.model import Fluid
    from reportgen.quantities import Quantity
    from reportgen.spec.calculation import Limits

__all__ = ["ClosedProcess", "Connection", "EvaluatedPlant"]

Array = npt.NDArray[np.float64]


class Connection(NamedTuple):
    """One state at one port of a piece of equipment."""

    port: str
    direction: Literal["in", "out"]
    state: str


@dataclass(frozen=True)
class ClosedProcess:
    """A process of a closed system: its kind by name, the states before and after, its boundaries, its vessel's limits.

    ``mixes``: the fluid after it is a mixture that it makes.
    """

    kind: str
    before: tuple[str, ...]
    after: tuple[str, ...]
    heats: tuple[HeatPort, ...]
    limits: Limits | None = None
    mixes: bool = False

    @property
    def states(self) -> tuple[str, ...]:
        """All its states, each once."""
        return tuple(dict.fromkeys((*self.before, *self.after)))


@dataclass(frozen=True)
class EvaluatedPlant:
    """Values along the sample axis with the structure of the plant they belong to.

    Args:
        axis: the sample axis, N = 2n+1 columns.
        values: variable path to samples of shape (N,) [SI], or to text for phases.
        fluids: fluid id to property model (``fluids.Fluid``).
        state_fluids: state id to fluid id.
        kinds: equipment tag to the name of its kind.
        connections: equipment tag to the states at its ports.
        power_signs: equipment tag to +1 where power is absorbed, −1 where it is delivered, 0 without power.
        heats: equipment tag to its heat ports (``balances.HeatPort``: paths of heat, temperature, entropy).
        limits: equipment tag to its ``limits`` table, only where it has one.
        trains: train id to the tags of its pieces; empty when the file has no trains of equipment.
        processes: process tag to what it is; empty when the file has no closed systems.
        process_trains: train id to the tags of its processes.
        alternatives: trains that stand in the place of another and do not count in totals.
        closed: owners of sums over processes, whose values are amounts and no rates.
        vessels: vessel tag to what it is.
        units: in which the report shows numbers, "SI" or "US".
        doubts: values that could come out where they cannot be meant, as the balances found them.
        assumptions: those of the program, with their tests; empty until they are tested.
        cross_checks: record entries of states held against a second source; empty until they are compared.
    """

    axis: SampleAxis
    values: Mapping[str, npt.NDArray[Any]]
    fluids: Mapping[str, Fluid]
    state_fluids: Mapping[str, str]
    kinds: Mapping[str, str]
    connections: Mapping[str, tuple[Connection, ...]]
    power_signs: Mapping[str, int]
    heats: Mapping[str, tuple[HeatPort, ...]]
    limits: Mapping[str, Limits]
    trains: Mapping[str, tuple[str, ...]]
    doubts: Sequence[Doubt] = ()
    assumptions: Sequence[AutomaticAssumption] = ()
    cross_checks: Sequence[Mapping[str, Any]] = ()
    processes: Mapping[str, ClosedProcess] = field(default_factory=dict)
    process_trains: Mapping[str, tuple[str, ...]] = field(default_factory=dict)
    alternatives: tuple[str, ...] = ()
    closed: frozenset[str] = frozenset()
    vessels: Mapping[str, EvaluatedVessel] = field(default_factory=dict)
    units: Literal["SI", "US"] = "SI"

    def is_closed(self, owner: str) -> bool:
        """Whether an owner is a process or a sum over processes."""
        return owner in self.closed or owner.startswith("processes.")

    def name_of(self, path: str) -> names.Name | None:
        """Glossary entry of a value: amounts for processes and sums over them, rates for equipment."""
        return names.name_of(path, amounts=path.rpartition(".")[0] in self.closed)

    def symbol_of(self, path: str) -> str:
        """LaTeX symbol of a value."""
        return names.symbol_of(path, amounts=path.rpartition(".")[0] in self.closed)

    def dimension_of(self, path: str) -> str:
        """Dimension of a value, key of names.DIMENSIONS; ``ratio`` where the glossary has no entry."""
        name = self.name_of(path)
        return "ratio" if name is None else name.dimension

    def samples(self, path: str) -> Array:
        """Samples of a value, shape (N,); all NaN when the plant has no such value."""
        found = self.values.get(path)
        if found is None:
            found = self.axis.givens.get(path)
        if found is None:
            return np.full(self.axis.columns, np.nan)
        return np.broadcast_to(np.asarray(found, dtype=float), (self.axis.columns,))

    def work_path(self, tag: str) -> str:
        """Path of the power that crosses the boundary of a piece: at its shaft where losses lie before it."""
        shaft = f"equipment.{tag}.shaft_power"
        return shaft if shaft in self.values else f"equipment.{tag}.power"

    def has(self, path: str) -> bool:
        """Whether the base case has a number for the path."""
        return bool(np.isfinite(self.samples(path)[0]))

    def estimate(self, path: str) -> Estimate:
        """Value and uncertainty of a path; NaN when the plant has no such value."""
        return self.axis.estimate(self.samples(path))

    def limit_samples(self, limit: Quantity) -> Array:
        """Samples of a stated limit, shape (N,) [SI]: a gauge pressure keeps its difference to the atmosphere."""
        if limit.gauge:
            atmosphere = self.samples(ATMOSPHERE)
            shifted: Array = limit.value + (atmosphere - atmosphere[0])
            return shifted
        return np.full(self.axis.columns, limit.value)

    def phase(self, state: str) -> str:
        """Phase of a state in the base case, empty when unknown."""
        found = self.values.get(f"states.{state}.phase")
        return "" if found is None else str(np.asarray(found).flat[0])

    def fluid_of(self, state: str) -> Fluid:
        """Property model of a state."""
        return self.fluids[self.state_fluids[state]]

    def states_at(self, tag: str, direction: Literal["in", "out"] | None = None) -> tuple[str, ...]:
        """States at the ports of a piece, each once, inlets first as the kind declares them."""
        chosen = [connection.state for connection in self.connections[tag] if direction in (None, connection.direction)]
        return tuple(dict.fromkeys(chosen))

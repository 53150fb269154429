"""What a solved plant holds: values, the steps that led to them, assumptions, accounts, warnings."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from reportgen.balances.curves import states_between
from reportgen.balances.doubts import Doubt
from reportgen.balances.plant import Piece, Plant, Purpose
from reportgen.balances.profiles import Along
from reportgen.balances.relations import Equation, Stretch
from reportgen.errors import Fault

__all__ = ["Account", "Assumption", "Curve", "Cycle", "Entry", "Purpose", "Reservoir", "Solution", "Step"]


@dataclass(frozen=True)
class Step:
    """One step of the working.

    ``owner`` is ``states.<id>``, ``equipment.<tag>``, ``processes.<tag>``, ``trains.<id>``, ``total``, ``closed`` or
    ``fluids.<id>``. ``uses`` holds the paths of the values it starts from; a step that rests on a property model also
    lists ``fluids.<id>``, one that rests on an assumption of the program's own ``assumptions.<id>``. ``equations`` are
    templates with ⟦path⟧ tokens.
    """

    key: str
    owner: str
    name: str
    sentence: str
    basis: str
    solves: tuple[str, ...]
    uses: tuple[str, ...]
    equations: tuple[Equation, ...] = ()

    @property
    def latex(self) -> tuple[str, ...]:
        """The equations as whole templates, ``left = right``."""
        return tuple(equation.latex for equation in self.equations)


@dataclass(frozen=True)
class Assumption:
    """An assumption the program took: nothing else determined a value, or the kind of process says so (``basis``)."""

    id: str
    text: str
    owner: str
    affects: tuple[str, ...]
    basis: str = "not stated in the file"


@dataclass(frozen=True)
class Entry:
    """One line of an entropy account: side, words, path of the value, and its amount, shape (N,).

    The amount is a rate [W/K] for equipment and an entropy [J/K] for processes of closed systems.

    ``sign`` −1 says that the amount is the value of the path with the sign turned (heat that leaves).
    """

    side: Literal["in", "generated", "out"]
    label: str
    path: str
    sign: int
    amount: NDArray[np.float64]


@dataclass(frozen=True)
class Account:
    """Entropy account of a piece, a process, a train or the whole: what enters and is generated equals what leaves.

    For closed systems ``inlets`` are the states in the beginning and ``outlets`` those in the end.
    """

    owner: str
    title: str
    entries: tuple[Entry, ...]
    complete: bool
    inlets: tuple[str, ...]
    outlets: tuple[str, ...]

    def side(self, name: str) -> tuple[Entry, ...]:
        """The entries of one side."""
        return tuple(entry for entry in self.entries if entry.side == name)


@dataclass(frozen=True)
class Reservoir:
    """What a cycle exchanges heat with: a boundary of stated temperature, or a stream outside the cycle.

    ``sign`` times the value at the path ``heat`` is the heat into the cycle [W]. ``temperature`` is the path of the
    boundary's temperature, None for a stream, which ``states`` names instead.
    """

    label: str
    heat: str
    sign: int
    temperature: str | None
    states: tuple[str, ...] = ()


@dataclass(frozen=True)
class Cycle:
    """A cycle: what it is for, whether it is closed, its reservoirs by the direction of their heat, and its powers.

    ``powers``: path and +1 where the power is delivered, −1 where it is absorbed. ``losses``: heat of bearings, gears
    and motors, which lie between the fluid and the powers.
    """

    owner: str
    title: str
    purpose: Purpose
    closed: bool
    supplied: tuple[Reservoir, ...]
    rejected: tuple[Reservoir, ...]
    powers: tuple[tuple[str, int], ...]
    losses: tuple[Reservoir, ...] = ()


@dataclass(frozen=True)
class Curve:
    """How a stream changes in the base case: entropy [J/(kg K)] and temperature [K] along the way, shape (points,).

    ``mixing`` marks a line that only joins the states of a process that passes through no equilibrium states of one
    stream. Points the model cannot evaluate are NaN.
    """

    equipment: str
    role: str
    fluid: str
    start: str
    end: str
    mixing: bool
    entropy: NDArray[np.float64]
    temperature: NDArray[np.float64]
    pressure: NDArray[np.float64]
    enthalpy: NDArray[np.float64]


@dataclass
class Solution:
    """A solved plant; every array has shape (N,), column 0 being the base case.

    ``values``: path to samples; phases are arrays of text. ``reasons``: why a value is NaN in the base case.
    ``states``: state id to the property model's own State. ``accounts``: by owner (``equipment.X``, ``trains.T``,
    ``total``). ``warnings``: faults that do not stop the evaluation, each with its path: what has no value and why.
    ``closed``: owners of sums over processes. ``mixtures``: fluids whose composition follows from masses.
    ``doubts``: values that could come out where they cannot be meant. ``lacking``: path of a value that is NaN in the
    base case to the paths it would have been made from. ``cycles``: by owner, where there is one. ``vessel_paths``: tag
    of a vessel to its ``vessels.accounting.VesselPath``.
    """

    plant: Plant
    pieces: Mapping[str, Piece]
    values: dict[str, NDArray[Any]]
    steps: list[Step] = field(default_factory=list)
    assumptions: list[Assumption] = field(default_factory=list)
    accounts: dict[str, Account] = field(default_factory=dict)
    warnings: list[Fault] = field(default_factory=list)
    reasons: dict[str, str] = field(default_factory=dict)
    lacking: dict[str, tuple[str, ...]] = field(default_factory=dict)
    doubts: list[Doubt] = field(default_factory=list)
    states: dict[str, Any] = field(default_factory=dict)
    processes: Mapping[str, Piece] = field(default_factory=dict)
    mixtures: Any = None
    closed: set[str] = field(default_factory=set)
    cycles: dict[str, Cycle] = field(default_factory=dict)
    vessels: Mapping[str, Piece] = field(default_factory=dict)
    vessel_paths: dict[str, Any] = field(default_factory=dict)

    def curves(self, points: int = 41) -> list[Curve]:
        """The way of every stream through its piece of equipment, and of every process, base case."""
        members = [*self.pieces.items(), *self.processes.items()]
        return [self._curve(tag, stretch, points) for tag, piece in members for stretch in piece.kind.stretches(piece)]

    def profiles(self) -> dict[str, Along]:
        """Temperatures along every exchange of heat between two streams, by tag, base case."""
        found = {}
        for tag, piece in self.pieces.items():
            if piece.kind.profile is not None:
                found[tag] = piece.kind.profile(piece, self.values)
        return found

    def _curve(self, tag: str, stretch: Stretch, points: int) -> Curve:
        fluid_id = self.plant.states[stretch.start]
        base = {path: self.values[path][:1] for path in self.mixtures.masses(fluid_id)}
        fluid = self.mixtures.model(fluid_id, base)
        names = ("pressure", "temperature", "specific_volume", "specific_enthalpy", "specific_entropy")
        first, last = (
            {name: float(self.values[f"states.{state}.{name}"][0]) for name in names}
            for state in (stretch.start, stretch.end)
        )
        drawn = states_between(fluid, first, last, stretch.along, points)
        return Curve(
            tag,
            stretch.role,
            self.plant.states[stretch.start],
            stretch.start,
            stretch.end,
            stretch.mixing,
            *drawn.values(),
        )

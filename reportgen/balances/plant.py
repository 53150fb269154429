"""The plant as plain data: fluids, states, pieces of equipment and trains; and the view a kind has of its piece."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Literal

from reportgen.balances.kinds import Kind, kinds
from reportgen.balances.zeros import StreamGroup, conflicts, same_zero
from reportgen.errors import Fault, InputError

__all__ = [
    "EquipmentDefinition",
    "Piece",
    "Plant",
    "Purpose",
    "Train",
    "alternatives",
    "balance_groups",
    "pieces_of",
    "port_faults",
    "refuse_half_elevations",
]


@dataclass(frozen=True)
class EquipmentDefinition:
    """One piece or process: its kind, the state ids at each port, the kind's groups (``{"heat_ports": [{}, {}]}``)
    and choices.
    """

    kind: str
    ports: Mapping[str, tuple[str, ...]]
    options: Mapping[str, Any] = field(default_factory=dict)


#: What a cycle is for.
Purpose = Literal["power", "cooling", "heating"]


@dataclass(frozen=True)
class Train:
    """Pieces, or processes of closed systems, that have one account.

    ``alternative_to`` names the train it could stand in the place of. ``purpose`` says which efficiency counts where
    the pieces are a cycle, or a process that is judged like one.
    """

    title: str
    equipment: tuple[str, ...] = ()
    alternative_to: str | None = None
    processes: tuple[str, ...] = ()
    purpose: Purpose | None = None

    @property
    def members(self) -> tuple[str, ...]:
        """Tags of all that belongs to it."""
        return self.equipment or self.processes


@dataclass(frozen=True)
class Plant:
    """Everything that does not depend on a number. ``states`` maps a state id to its fluid id."""

    fluids: Mapping[str, Any]
    states: Mapping[str, str]
    equipment: Mapping[str, EquipmentDefinition] = field(default_factory=dict)
    trains: Mapping[str, Train] = field(default_factory=dict)
    processes: Mapping[str, EquipmentDefinition] = field(default_factory=dict)
    vessels: Mapping[str, EquipmentDefinition] = field(default_factory=dict)


class Piece:
    """One piece of equipment, or one process, as its kind sees it: names of its values, its states and their fluids."""

    def __init__(self, tag: str, kind: Kind, definition: EquipmentDefinition, plant: Plant, given: frozenset[str]):
        self.tag = tag
        self.kind = kind
        self.options = definition.options
        self.given = given
        #: Velocities and elevations that count in the energy of a stream: given ones, and those a kind solves for.
        self.carried = frozenset(path for path in given if path.endswith((".velocity", ".elevation")))
        self.owner = f"{kind.family}.{tag}"
        self._plant = plant
        self._ports = {name: tuple(states) for name, states in definition.ports.items()}

    @property
    def title(self) -> str:
        """Kind and tag, to begin a sentence with: "Throttling valve PRV-3"."""
        return f"{self.kind.title} {self.tag}"

    def path(self, name: str) -> str:
        """Path of a value of this piece."""
        return f"{self.owner}.{name}"

    def states(self, port: str) -> tuple[str, ...]:
        """State ids at a port, in the order of the file."""
        return self._ports.get(port, ())

    def one(self, port: str) -> str:
        """The state id at a port that takes one."""
        return self._ports[port][0]

    def streams(self, direction: str) -> tuple[str, ...]:
        """State ids of all ports of one direction, ``"in"`` or ``"out"``."""
        found: list[str] = []
        for port in self.kind.ports:
            if port.direction == direction:
                found.extend(self.states(port.name))
        return tuple(found)

    def connections(self) -> list[tuple[str, str, str]]:
        """Every (port name, direction, state id)."""
        return [(port.name, port.direction, state) for port in self.kind.ports for state in self.states(port.name)]

    def fluid_id(self, state: str) -> str:
        """Id of the fluid of a state."""
        return self._plant.states[state]

    def fluid(self, state: str) -> Any:
        """Property model of a state."""
        return self._plant.fluids[self._plant.states[state]]

    def count(self, group: str) -> int:
        """Number of entries of a group such as ``heat_ports``."""
        entries = self.options.get(group, ())
        return entries if isinstance(entries, int) else len(entries)

    def choice(self, name: str) -> str:
        """The word chosen for one of the kind's choices."""
        return self.choices(name, 1)[0]

    def choices(self, name: str, count: int) -> list[str]:
        """The words chosen for one of the kind's choices, one for each of so many states."""
        values = next(choice.values for choice in self.kind.choices if choice.name == name)
        chosen = self.options.get(name) or values[0]
        return [str(chosen)] * count if isinstance(chosen, str) else [str(word) for word in chosen]


def port_faults(piece: Piece, definition: EquipmentDefinition, plant: Plant) -> list[Fault]:
    """What is wrong with the states at the ports of a piece or process."""
    faults = []
    known = {port.name: port for port in piece.kind.ports}
    for name, states in definition.ports.items():
        place = piece.path(name)
        if name not in known:
            faults.append(Fault(f"{piece.kind.title} has no port of this name.", place, expected=", ".join(known)))
            continue
        if not known[name].many and len(states) != 1:
            faults.append(Fault("The port takes one state.", place, found=", ".join(states) or "none"))
        for state in states:
            if state not in plant.states:
                faults.append(Fault("There is no state of this name.", place, found=state))
    for port in piece.kind.ports:
        if not port.optional and not definition.ports.get(port.name):
            faults.append(Fault("The port is not connected.", piece.path(port.name), expected="a state"))
    return faults


def balance_groups(piece: Piece) -> list[tuple[tuple[str, ...], tuple[str, ...]]]:
    """Inlets and outlets that exchange mass with each other: those of one side and one fluid."""
    return [(group.inlets, group.outlets) for group in _stream_groups(piece)]


def _stream_groups(piece: Piece) -> list[StreamGroup]:
    if piece.kind.burns:  # elements are kept, substances are not
        outlet = piece.streams("out")
        return [StreamGroup("", piece.fluid_id(outlet[0]), piece.fluid(outlet[0]), piece.streams("in"), outlet)]
    groups: list[tuple[str, str, Any, list[str], list[str]]] = []
    for port in piece.kind.ports:
        for state in piece.states(port.name):
            fluid = piece.fluid(state)
            for side, _, model, entering, leaving in groups:
                if side == port.side and same_zero(model, fluid):
                    (entering if port.direction == "in" else leaving).append(state)
                    break
            else:
                sides = ([state], []) if port.direction == "in" else ([], [state])
                groups.append((port.side, piece.fluid_id(state), fluid, *sides))
    return [StreamGroup(side, name, model, tuple(ins), tuple(outs)) for side, name, model, ins, outs in groups]


def refuse_half_elevations(pieces: Mapping[str, Piece], values: Mapping[str, Any]) -> None:
    """InputError where a stream states an elevation and one it turns into does not: 0 m would be taken for it.

    ``values`` holds what is given, shape (N,). An elevation of 0 is the datum itself and asks for nothing.
    """
    faults: dict[str, Fault] = {}
    for piece in pieces.values():
        for inlets, outlets in balance_groups(piece):
            states = (*inlets, *outlets)
            stated = [state for state in states if f"states.{state}.elevation" in values]
            above = [state for state in stated if values[f"states.{state}.elevation"][0] != 0.0]
            for state in states:
                if above and state not in stated:
                    path = f"states.{state}.elevation"
                    faults[path] = Fault(
                        f"The elevation is stated for state {', '.join(above)} but not for state {state} of "
                        f"{piece.title}; to leave it out would count it as zero.",
                        path,
                        expected="an elevation above the same datum for every state of the piece, or for none",
                    )
    if faults:
        raise InputError(faults.values())


def _shared_states(pieces: Mapping[str, Piece], plant: Plant) -> list[Fault]:
    """States that two pieces of one account draw from or feed: mass would be counted twice."""
    faults = []
    seen: dict[tuple[str, str], list[str]] = {}
    for tag, piece in pieces.items():
        for _, direction, state in piece.connections():
            for other in seen.get((direction, state), ()):
                if other == tag or not alternatives(plant, tag, other):
                    verb, cure = ("enters", "splitter") if direction == "in" else ("leaves", "mixer")
                    faults.append(
                        Fault(
                            f"State {state} {verb} both {other} and {tag}; its flow would be counted twice.",
                            f"equipment.{tag}",
                            hint=f"Put a {cure} between them, or put the pieces into trains that are alternatives.",
                        )
                    )
            seen.setdefault((direction, state), []).append(tag)
    return faults


def alternatives(plant: Plant, first: str, second: str) -> bool:
    """True when two pieces, or two processes, stand in trains that replace each other."""

    def root(tag: str) -> tuple[str | None, str | None]:
        for name, train in plant.trains.items():
            if tag in train.members:
                return name, train.alternative_to or name
        return None, None

    (name, origin), (other_name, other_origin) = root(first), root(second)
    return name is not None and name != other_name and origin == other_origin


def pieces_of(plant: Plant, given: frozenset[str]) -> dict[str, Piece]:
    """A checked view of every piece; InputError with every fault of the plant's structure."""
    registry = kinds()
    faults: list[Fault] = []
    pieces: dict[str, Piece] = {}
    for state, fluid in plant.states.items():
        if fluid not in plant.fluids:
            faults.append(Fault("There is no fluid of this name.", f"states.{state}.fluid", found=fluid))
    for tag, definition in plant.equipment.items():
        kind = registry.get(definition.kind)
        if kind is None:
            place = f"equipment.{tag}.kind"
            faults.append(Fault("Unknown kind.", place, found=definition.kind, expected=", ".join(registry)))
            continue
        piece = Piece(tag, kind, definition, plant, given)
        found = port_faults(piece, definition, plant)
        faults += found
        if not found and not faults:
            faults += conflicts(piece.title, piece.owner, _stream_groups(piece))
            faults += piece.kind.checks(piece)
        pieces[tag] = piece
    faults += _trains(plant)
    if not faults:
        faults += _shared_states(pieces, plant)
    if faults:
        raise InputError(faults)
    moving = (state for piece in pieces.values() if piece.kind.velocities for state in piece.kind.velocities(piece))
    solved = {f"states.{state}.velocity" for state in moving}
    for piece in pieces.values():
        piece.carried |= solved
    return pieces


def _trains(plant: Plant) -> list[Fault]:
    """What is wrong with the trains: members that are not there or in two, of two families, alternatives to nothing."""
    faults = []
    listed: dict[str, str] = {}
    for name, train in plant.trains.items():
        if train.equipment and train.processes:
            text = "A train holds equipment, whose totals are rates, or processes, whose totals are amounts."
            faults.append(Fault(text, f"trains.{name}.processes", expected="two trains"))
        for family, tags, known in (
            ("equipment", train.equipment, plant.equipment),
            ("processes", train.processes, plant.processes),
        ):
            for tag in tags:
                word, place = ("equipment" if family == "equipment" else "process"), f"trains.{name}.{family}"
                if tag not in known:
                    faults.append(Fault(f"There is no {word} of this tag.", place, found=tag))
                elif tag in listed:
                    text = f"{word.capitalize()} {tag} already belongs to train {listed[tag]}."
                    faults.append(Fault(text, place, found=tag))
                listed[tag] = name
        target = train.alternative_to
        if target is not None and (target not in plant.trains or target == name):
            place = f"trains.{name}.alternative_to"
            faults.append(Fault("There is no other train of this name.", place, found=target))
        elif target is not None and plant.trains[target].alternative_to is not None:
            place = f"trains.{name}.alternative_to"
            text = "The train is itself an alternative; name the train that is counted in the totals."
            faults.append(Fault(text, place, found=target, expected=plant.trains[target].alternative_to))
    return faults


def trains_of(plant: Plant, pieces: Sequence[str]) -> tuple[str, ...]:
    """Tags that count in the totals: all but those of alternative trains."""
    left_out = {tag for train in plant.trains.values() if train.alternative_to for tag in train.members}
    return tuple(tag for tag in pieces if tag not in left_out)

"""The processes of a plant as checked views: ports, fluids, and which state belongs to which process."""

from __future__ import annotations

from collections.abc import Mapping

from reportgen.balances.kinds import process_kinds
from reportgen.balances.plant import Piece, Plant, alternatives, port_faults
from reportgen.balances.zeros import StreamGroup, conflicts, same_zero
from reportgen.errors import Fault, InputError

__all__ = ["final_states", "initial_states", "processes_of"]


def processes_of(plant: Plant, given: frozenset[str]) -> dict[str, Piece]:
    """A checked view of every process, by its tag; InputError with every fault of their structure."""
    registry = process_kinds()
    faults: list[Fault] = []
    processes: dict[str, Piece] = {}
    for tag, definition in plant.processes.items():
        kind = registry.get(definition.kind)
        if kind is None:
            place = f"processes.{tag}.kind"
            faults.append(Fault("Unknown kind.", place, found=definition.kind, expected=", ".join(registry)))
            continue
        piece = Piece(tag, kind, definition, plant, given)
        found = port_faults(piece, definition, plant)
        if not found:
            found = list(piece.kind.checks(piece)) or _zeros(piece)
        faults += found
        processes[tag] = piece
    faults = faults or _shared(plant, processes)
    if faults:
        raise InputError(faults)
    return processes


def _zeros(piece: Piece) -> list[Fault]:
    """Faults for a body that is of one fluid before and of another after; a mixture of its gases is none."""
    if piece.kind.mixes(piece):
        return []
    before, after = piece.states("from"), piece.states("to")
    if len(before) == len(after):
        bodies = [([first], [last]) for first, last in zip(before, after, strict=True)]
    else:
        bodies = [(list(before), list(after))]
    return [fault for first, last in bodies for fault in _of_body(piece, first, last)]


def _of_body(piece: Piece, before: list[str], after: list[str]) -> list[Fault]:
    groups: list[tuple[str, object, list[str], list[str]]] = []
    for states, side in ((before, 2), (after, 3)):
        for state in states:
            known = next((group for group in groups if same_zero(group[1], piece.fluid(state))), None)
            if known is None:
                known = (piece.fluid_id(state), piece.fluid(state), [], [])
                groups.append(known)
            (known[2] if side == 2 else known[3]).append(state)
    found = [StreamGroup("", name, model, tuple(first), tuple(last)) for name, model, first, last in groups]
    return conflicts(piece.title, piece.owner, found)


def _shared(plant: Plant, processes: Mapping[str, Piece]) -> list[Fault]:
    """States that two processes of one account begin with or end in: their mass would be counted twice."""
    faults = []
    seen: dict[tuple[str, str], list[str]] = {}
    for tag, piece in processes.items():
        for name, direction, state in piece.connections():
            for other in seen.get((direction, state), ()):
                if other == tag or not alternatives(plant, tag, other):
                    verb = "begins" if direction == "in" else "ends"
                    faults.append(
                        Fault(
                            f"State {state} {verb} both process {other} and process {tag}; its mass would be counted "
                            "twice.",
                            piece.path(name),
                            found=state,
                            expected="a state of its own, or processes in trains that are alternatives",
                        )
                    )
            seen.setdefault((direction, state), []).append(tag)
        both = set(piece.states("from")) & set(piece.states("to"))
        if both:
            text = f"State {', '.join(sorted(both))} is both before and after process {tag}."
            faults.append(Fault(text, piece.path("to"), expected="another state after it"))
    return faults


def initial_states(processes: Mapping[str, Piece]) -> list[str]:
    """States that some of these processes begin with and none of them ends in."""
    ends = {state for piece in processes.values() for state in piece.states("to")}
    return [state for piece in processes.values() for state in piece.states("from") if state not in ends]


def final_states(processes: Mapping[str, Piece]) -> list[str]:
    """States that some of these processes end in and none of them begins with."""
    starts = {state for piece in processes.values() for state in piece.states("from")}
    return [state for piece in processes.values() for state in piece.states("to") if state not in starts]

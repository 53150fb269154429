"""Processes of closed systems: which states they begin and end with, and what belongs to which train."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from itertools import islice

from reportgen.spec.paths import kind_of
from reportgen.spec.schema import AMOUNTS, FLOWS
from reportgen.spec.source import Location, Source
from reportgen.spec.states import fluid_of, givens_of

__all__ = ["check_processes", "unknown_state"]


@dataclass(frozen=True)
class _Use:
    """One state that a process begins or ends with."""

    tag: str
    location: Location


def check_processes(source: Source) -> None:
    """Tags, states and amounts; every state begins and ends one process, or one in each of alternative trains."""
    _check_tags(source)
    starts: dict[str, list[_Use]] = {}
    ends: dict[str, list[_Use]] = {}
    for tag in source.table("processes"):
        kind = kind_of(source, tag, "processes")
        for port in kind.ports if kind is not None else ():
            found = source.texts("processes", tag, port.name)
            _check_count(source, tag, port.name, port.many)
            for location, state in found:
                if state not in source.table("states"):
                    unknown_state(source, location, state)
                    continue
                uses = starts if port.direction == "in" else ends
                uses.setdefault(state, []).append(_Use(tag, location))
        if kind is not None:
            _check_bodies(source, tag)
            _check_choices(source, tag)
    for state, several in {**ends, **starts}.items():
        _check_flow(source, state, several[0])
    train_of = {tag: train for train in source.table("trains") for _, tag in source.texts("trains", train, "processes")}
    for state, several in starts.items():
        _refuse_rivals(source, state, several, "begins", train_of)
    for state, several in ends.items():
        _refuse_rivals(source, state, several, "ends", train_of)
        begun = {use.tag for use in starts.get(state, ())}
        for use in several:
            if use.tag in begun:
                source.report(
                    use.location,
                    "The process begins and ends with the same state.",
                    found=f'"{state}"',
                    expected="another state after the process",
                )


def _check_tags(source: Source) -> None:
    """Tags of processes and vessels that a person reads as the same, also as that of a piece, are the same."""
    words = {"equipment": "a piece of equipment", "processes": "a process", "vessels": "a vessel"}
    seen: dict[str, tuple[str, str]] = {tag.casefold(): ("equipment", tag) for tag in source.table("equipment")}
    for own, tag in ((name, tag) for name in ("processes", "vessels") for tag in source.table(name)):
        section, other = seen.setdefault(tag.casefold(), (own, tag))
        if (section, other) != (own, tag):
            line, _ = source.place((section, other), "key")
            source.report(
                (own, tag),
                f"The tag is already that of {words[section]}, at line {line}, or differs from it in capitals only.",
                at="key",
                found=tag,
                expected="a tag of its own",
            )


def _check_count(source: Source, tag: str, port: str, many: bool) -> None:
    """A list of states that are brought together holds two or more of them."""
    node = source.node(("processes", tag, port))
    if many and port == "from" and node is not None and len(node.items) == 1:
        source.report(
            ("processes", tag, port),
            "Only one state is given where several are brought together.",
            found=f'"{node.items[0].value}"',
            expected="two or more states",
        )


def unknown_state(source: Source, location: Location, state: str) -> None:
    """Report a state that the file does not define, unless its table may be one that was unreadable."""
    if source.names_are_complete and not source.is_broken(("states", state)):
        source.report(
            location,
            "There is no such state.",
            found=f'"{state[:60]}"',
            expected="a name of [states]",
            hint=source.hint(state, source.table("states")),
        )


def _check_bodies(source: Source, tag: str) -> None:
    """Where both ends are lists they are equally long, and a body keeps its fluid."""
    before, after = (source.texts("processes", tag, name) for name in ("from", "to"))
    lists = all(source.node(("processes", tag, name)) is not None for name in ("from", "to"))
    listed = [node for name in ("from", "to") if (node := source.node(("processes", tag, name))) and node.items]
    if lists and len(listed) == 2 and len(before) != len(after):
        source.report(
            ("processes", tag, "to"),
            "Each body has one state before and one after.",
            found=f"{len(before)} before, {len(after)} after",
            expected="as many as in from, in the same order",
        )
        return
    if len(before) != len(after):
        return
    for (_, first), (location, last) in zip(before, after, strict=True):
        fluids = [fluid_of(source, state) for state in (first, last)]
        if None not in fluids and fluids[0] != fluids[1] and all(f in source.table("fluids") for f in fluids):
            source.report(
                location,
                "The content is of another fluid after the process than before.",
                found=f'"{last}", of {fluids[1]}; "{first}" is of {fluids[0]}',
                expected="states of the same fluid",
            )


def _check_choices(source: Source, tag: str) -> None:
    """A list of words has one for each body."""
    kind = kind_of(source, tag, "processes")
    bodies = len(source.texts("processes", tag, "from"))
    for choice in kind.choices if kind is not None else ():
        node = source.node(("processes", tag, choice.name))
        if choice.many and node is not None and node.items and len(node.items) != bodies:
            source.report(
                ("processes", tag, choice.name),
                "The list does not have one word for each body.",
                found=f"{len(node.items)} of {bodies}",
                expected="as many words as there are bodies, or one for all",
            )


def _check_flow(source: Source, state: str, use: _Use) -> None:
    """A state of a closed system holds an amount and does not flow."""
    givens = givens_of(source, state)
    flow = next((name for name in FLOWS if name in givens), None)
    if flow is not None:
        source.report(
            ("states", givens[flow], flow),
            f"State {state} belongs to the closed system of process {use.tag} and does not flow.",
            at="key",
            found=flow,
            expected=" or ".join(AMOUNTS),
        )


def _refuse_rivals(source: Source, state: str, several: list[_Use], verb: str, train_of: Mapping[str, str]) -> None:
    for number, use in enumerate(several):
        before = islice(several, number)
        rival = next((other for other in before if not _alternatives(source, other.tag, use.tag, train_of)), None)
        if rival is not None:
            line, _ = source.place(rival.location)
            source.report(
                use.location,
                f"State {state} already {verb} process {rival.tag} at line {line}; its mass would be counted twice.",
                found=f'"{state}"',
                expected="a state of its own, or processes in alternative trains",
            )


def _alternatives(source: Source, first: str, second: str, train_of: Mapping[str, str]) -> bool:
    """Whether two processes stand in trains of which only one is ever run."""
    trains = [train_of.get(tag) for tag in (first, second)]
    if None in trains or trains[0] == trains[1]:
        return False
    main = [source.text("trains", str(train), "alternative_to") or train for train in trains]
    return main[0] == main[1]

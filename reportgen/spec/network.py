"""Which state stands at which port, and which piece belongs to which train."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import islice

from reportgen.spec.paths import kind_of
from reportgen.spec.source import Location, Source

__all__ = ["check_network"]


@dataclass(frozen=True)
class _Use:
    """One state at one port."""

    tag: str
    train: str | None
    location: Location


def check_network(source: Source) -> None:
    """Ports, trains and tags; every state leaves at most one piece and enters one in each alternative."""
    _check_tags(source)
    train_of = _check_trains(source)
    _check_ports(source, train_of)


def _check_tags(source: Source) -> None:
    """Tags that a person reads as the same are the same."""
    seen: dict[str, str] = {}
    for tag in source.table("equipment"):
        folded = tag.casefold()
        if folded in seen:
            line, _ = source.place(("equipment", seen[folded]), "key")
            source.report(
                ("equipment", tag),
                f"The tag differs from {seen[folded]} at line {line} in capitals only.",
                at="key",
                found=tag,
                expected="a tag of its own",
            )
        seen.setdefault(folded, tag)


def _unknown(source: Source, location: Location, name: str, section: str, what: str) -> None:
    """Report a name that the file does not define, unless the table that defines it may be one that was unreadable."""
    if source.names_are_complete and not source.is_broken((section, name)):
        source.report(
            location,
            f"There is no such {what}.",
            found=f'"{name[:60]}"',
            expected=f"a name of [{section}]",
            hint=source.hint(name, source.table(section)),
        )


def _check_trains(source: Source) -> dict[str, str]:
    """The train of each piece."""
    trains = source.table("trains")
    train_of: dict[str, str] = {}
    for section, word in _MEMBERS.items():
        for train in trains:
            for location, tag in source.texts("trains", train, section):
                if tag not in source.table(section):
                    _unknown(source, location, tag, section, word)
                elif tag in train_of:
                    source.report(
                        location,
                        f"The {word.partition(' ')[0]} already belongs to a train.",
                        found=f'"{tag}", in {train_of[tag]}',
                        expected=f"one train for each {word.partition(' ')[0]}",
                    )
                else:
                    train_of[tag] = train
    for train in trains:
        _check_members(source, train)
        _check_alternative(source, train)
    for section, word in _MEMBERS.items():
        members = [node for train in trains if (node := source.node(("trains", train, section))) is not None]
        if members and all(isinstance(node.value, list) for node in members) and source.names_are_complete:
            for tag in source.table(section):
                if tag not in train_of:
                    source.report(
                        (section, tag),
                        f"The {word.partition(' ')[0]} belongs to no train.",
                        at="key",
                        found=tag,
                        expected=f"each {word.partition(' ')[0]} in the {section} of one of [trains]",
                    )
    return train_of


#: What a train may hold, by the table it stands in.
_MEMBERS = {"equipment": "piece of equipment", "processes": "process"}


def _check_members(source: Source, train: str) -> None:
    """A train holds equipment or processes: totals of one are rates, of the other amounts."""
    node = source.node(("trains", train))
    if node is None or not isinstance(node.value, dict):
        return
    held = [section for section in _MEMBERS if section in node.table]
    if not held:
        source.miss(("trains", train), '"equipment" is missing.', expected="equipment or processes of the train")
    elif len(held) > 1:
        source.report(
            ("trains", train, held[1]),
            "The train holds equipment, whose totals are rates, and processes, whose totals are amounts.",
            at="key",
            found="equipment and processes",
            expected="a train for each",
        )
    other = source.text("trains", train, "alternative_to")
    if other in source.table("trains") and len(held) == 1 and source.node(("trains", str(other), held[0])) is None:
        source.report(
            ("trains", train, "alternative_to"),
            f"The other train does not hold {held[0]}: the two cannot stand in each other's place.",
            found=f'"{other}"',
            expected=f"a train of {held[0]}",
        )


def _check_alternative(source: Source, train: str) -> None:
    other = source.text("trains", train, "alternative_to")
    location = ("trains", train, "alternative_to")
    if other is None:
        return
    if other not in source.table("trains"):
        _unknown(source, location, other, "trains", "train")
    elif other == train or source.text("trains", other, "alternative_to") is not None:
        source.report(
            location,
            "An alternative stands in the place of a train that is none itself.",
            found=f'"{other}"',
            expected="a train without alternative_to",
        )


def _check_ports(source: Source, train_of: dict[str, str]) -> None:
    states = source.table("states")
    entering: dict[str, list[_Use]] = {}
    leaving: dict[str, list[_Use]] = {}
    for tag in source.table("equipment"):
        kind = kind_of(source, tag)
        for port in kind.ports if kind is not None else ():
            uses = entering if port.direction == "in" else leaving
            for location, state in source.texts("equipment", tag, port.name):
                if state not in states:
                    _unknown(source, location, state, "states", "state")
                    continue
                uses.setdefault(state, []).append(_Use(tag, train_of.get(tag), location))
    for state, several in entering.items():
        for index, use in enumerate(several):
            before = islice(several, index)
            rival = next((other for other in before if not _alternatives(source, other.train, use.train)), None)
            _refuse_rival(source, state, use, rival, "enters")
    for state, several in leaving.items():
        entered = {use.tag for use in entering.get(state, [])}
        for index, use in enumerate(several):
            _refuse_rival(source, state, use, several[0] if index else None, "leaves")
            if use.tag in entered:
                source.report(
                    use.location,
                    "The state both enters and leaves this piece.",
                    found=f'"{state}"',
                    expected="another state at the outlet",
                )


def _alternatives(source: Source, first: str | None, second: str | None) -> bool:
    """Whether two trains stand in each other's place: only one of them is ever built."""
    if first is None or second is None or first == second:
        return False
    main = [source.text("trains", train, "alternative_to") or train for train in (first, second)]
    return main[0] == main[1]


def _refuse_rival(source: Source, state: str, use: _Use, rival: _Use | None, verb: str) -> None:
    if rival is None:
        return
    line, _ = source.place(rival.location)
    enters = verb == "enters"
    source.report(
        use.location,
        f"State {state} already {verb} {rival.tag} at line {line}.",
        found=f'"{state}"',
        expected="a splitter, or pieces in alternative trains" if enters else "a mixer, or a state of its own",
    )

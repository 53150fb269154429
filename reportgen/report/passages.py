"""The order in which the working is told: parts that follow the thought, in them passages under one sentence.

Each part keeps the order of the solution, save that relations of one sort are drawn together where all that they use
stands before. Relations that only say what is left of a balance are no steps: they belong to the closure.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

__all__ = ["RESIDUALS", "Part", "Passage", "arrange", "is_residual", "residuals"]

_STATES, _ENTROPY, _EXERGY, _TRAINS, _WHOLE = range(5)
_TITLES = (
    "States and balances",
    "Entropy and lost work, {} by {}",
    "Exergy and figures of merit",
    "Trains",
    "The whole",
)
#: Where a quantity is told when nothing before needs it.
_TOLD = {
    "entropy_flow": _ENTROPY,
    "entropy": _ENTROPY,
    "entropy_change": _ENTROPY,
    "entropy_of_mixing": _ENTROPY,
    "initial_entropy": _ENTROPY,
    "final_entropy": _ENTROPY,
    "entropy_with_mass": _ENTROPY,
    "vessel_entropy_generation": _ENTROPY,
    "valve_entropy_generation": _ENTROPY,
    "wall_entropy_generation": _ENTROPY,
    "mole_fraction": _ENTROPY,
    "entropy_with_heat": _ENTROPY,
    "entropy_generation": _ENTROPY,
    "lost_work": _ENTROPY,
    "specific_exergy": _EXERGY,
    "isentropic_outlet_enthalpy": _EXERGY,
    "isentropic_efficiency": _EXERGY,
    "polytropic_efficiency": _EXERGY,
    "pressure_integral": _EXERGY,
    "exergetic_efficiency": _EXERGY,
    "entropy_generation_number": _EXERGY,
}
#: Names of what is left of each balance.
RESIDUALS = {"mass": ("mass_imbalance",), "energy": ("energy_imbalance",), "entropy": ("closure",)}
_RESIDUALS = {name for names in RESIDUALS.values() for name in names}
_FIXED = re.compile(r"State (?P<state>\S+) is fixed by its (?P<how>.+)", re.DOTALL)
#: Characters of sentences on one piece that are still read as one.
_SENTENCE = 215

Relation = Mapping[str, Any]


@dataclass
class Passage:
    """Relations under one sentence; ``run`` when their equations stand one after the other in a line."""

    sentence: str
    keys: list[str] = field(default_factory=list)
    run: bool = False


@dataclass(frozen=True)
class Part:
    """A subsection of the working."""

    title: str
    passages: list[Passage]


def is_residual(relation: Relation) -> bool:
    """Whether a relation solves nothing but what is left of balances."""
    return bool(relation["solves"]) and all(_last(path) in _RESIDUALS for path in relation["solves"])


def _order(data: Mapping[str, Any]) -> list[str]:
    """Keys of all relations: in solution order, then any that the order leaves out."""
    return list(dict.fromkeys([*data["solution_order"], *sorted(data["relations"])]))


def residuals(data: Mapping[str, Any]) -> list[str]:
    """Keys of the relations that the closure shows."""
    return [key for key in _order(data) if is_residual(data["relations"][key])]


def arrange(data: Mapping[str, Any]) -> list[Part]:
    """Every other relation of a record, once."""
    relations = data["relations"]
    order = [key for key in _order(data) if not is_residual(relations[key])]
    told = _told(order, relations)
    parts = []
    for number, title in enumerate(_TITLES):
        keys = [key for key in order if told[key] == number]
        if number == _EXERGY:  # the exergies of the states rest on nothing else told here
            keys.sort(key=lambda key: not relations[key]["owner"].startswith(("fluids.", "states.")))
        if keys:
            words = {"equipment": "piece", "processes": "process", "vessels": "vessel"}
            word = next((word for family, word in words.items() if data["plant"].get(family)), "piece")
            parts.append(Part(title.format(word, word), _passages(number, keys, data)))
    return parts


def _told(order: Sequence[str], relations: Mapping[str, Relation]) -> dict[str, int]:
    """The part of each relation: that of its quantity, or an earlier one where something there uses it."""
    solved = {path: key for key in order for path in relations[key]["solves"]}
    told = {key: _part_of(relations[key]) for key in order}
    for key in reversed(order):
        for path in relations[key]["uses"]:
            source = solved.get(path)
            if source is not None:
                told[source] = min(told[source], told[key])
    return told


def _part_of(relation: Relation) -> int:
    family = relation["owner"].split(".")[0]
    if family in ("trains", "total", "closed"):
        return _TRAINS if family == "trains" else _WHOLE
    if family == "fluids":
        return _EXERGY
    return min((_TOLD.get(_last(path), _STATES) for path in relation["solves"]), default=_STATES)


def _passages(part: int, keys: Sequence[str], data: Mapping[str, Any]) -> list[Passage]:
    """Passages of one part: a relation joins an earlier one of its sort if all it uses is known there."""
    relations = data["relations"]
    place = {path: len(keys) for key in keys for path in relations[key]["solves"]}
    found: list[Passage] = []
    latest: dict[tuple[str, ...], int] = {}
    for key in keys:
        relation = relations[key]
        sort = _sort(part, relation, data)
        index = latest.get(sort, len(found)) if sort else len(found)
        if index < len(found):
            needed = max((place.get(path, -1) for path in relation["uses"]), default=-1)
            by_piece = sort[0] == "owner" and part in (_STATES, _ENTROPY, _EXERGY)
            too_long = by_piece and _is_long(found[index], relation, relations)
            if needed > index or too_long:
                index = len(found)
        if index == len(found):
            found.append(Passage(""))
            latest[sort] = index
        found[index].keys.append(key)
        place.update(dict.fromkeys(relation["solves"], index))
    for passage in found:
        _word(passage, [relations[key] for key in passage.keys])
    return found


def _sort(part: int, relation: Relation, data: Mapping[str, Any]) -> tuple[str, ...]:
    """What relations that may stand in one passage have in common; empty for one that stands alone."""
    owner, sentence = relation["owner"], relation["sentence"]
    if part == _EXERGY and owner.startswith(("fluids.", "states.")):
        name = owner.split(".", 1)[1]
        state = data["plant"]["states"].get(name) if owner.startswith("states.") else None
        return ("exergy", state["fluid"] if state else name)
    if part != _STATES:
        return ("flow",) if owner.startswith("states.") else ("owner", owner)
    if owner.startswith("vessels."):
        return ("owner", owner)
    if _is_adiabatic(relation):
        return ("adiabatic",)
    if _is_kept_flow(relation):
        return ("kept flow",)
    if match := _FIXED.fullmatch(sentence):
        return ("fixed", match["how"], relation["basis"])
    _, colon, rest = sentence.partition(": ")
    return ("alike", rest, relation["basis"]) if colon else ()


def _is_adiabatic(relation: Relation) -> bool:
    return (
        [_last(path) for path in relation["solves"]] == ["heat"]
        and bool(relation["uses"])
        and all(path.startswith("assumptions.") for path in relation["uses"])
    )


def _is_kept_flow(relation: Relation) -> bool:
    return [_last(path) for path in [*relation["solves"], *relation["uses"]]] == ["mass_flow", "mass_flow"]


def _is_long(passage: Passage, relation: Relation, relations: Mapping[str, Relation]) -> bool:
    return len(_joined([*(relations[key]["sentence"] for key in passage.keys), relation["sentence"]])) > _SENTENCE


def _word(passage: Passage, members: Sequence[Relation]) -> None:
    """Give a passage its sentence, and say whether its equations run on in a line."""
    passage.run = all(_is_adiabatic(member) for member in members) or all(_is_kept_flow(member) for member in members)
    sentences = [member["sentence"] for member in members]
    if only := _only_piece(members):
        title = sentences[0].partition(": ")[0]
        passage.sentence = f"{title} consists of {only} alone; its values are those of {only}."
        passage.run = True
    elif len(members) == 1:
        passage.sentence = sentences[0]
    elif _is_adiabatic(members[0]):
        names = _listed(member["owner"].partition(".")[2] for member in members)
        passage.sentence = f"{names} are taken as adiabatic."
    elif _is_kept_flow(members[0]):
        passage.sentence = "What enters a piece as one stream leaves it as the next."
    elif all(_FIXED.fullmatch(sentence) for sentence in sentences):
        matches = [_FIXED.fullmatch(sentence) for sentence in sentences]
        how = next(match["how"] for match in matches if match)
        passage.sentence = f"States {_listed(match['state'] for match in matches if match)} are fixed by their {how}"
    elif all(_last(member["solves"][0]) == "entropy_flow" for member in members if member["solves"]):
        passage.sentence = "A stream carries its flow times its specific entropy."
    elif all(_last(member["solves"][0]) == "entropy" for member in members if member["solves"]):
        passage.sentence = "A content holds its mass times its specific entropy."
    elif any(_last(path) == "specific_exergy" for member in members for path in member["solves"]):
        fluid = next((member["owner"].partition(".")[2] for member in members if member["owner"][:7] == "fluids."), "")
        stream = f"a stream of {fluid}" if fluid else "a stream"
        passage.sentence = f"Work that could be had from {stream} on its way to equilibrium with the surroundings" + (
            ", where its enthalpy and entropy are those that stand first." if fluid else "."
        )
    else:
        passage.sentence = _joined(sentences)
    passage.sentence = passage.sentence[:1].upper() + passage.sentence[1:]


def _only_piece(members: Sequence[Relation]) -> str | None:
    """Tag of the one piece or process that a train or the whole consists of; its sums then only repeat its values."""
    owner = members[0]["owner"]
    if owner.split(".")[0] not in ("trains", "total", "closed") or ": " not in members[0]["sentence"]:
        return None
    pieces: set[str] = set()
    for member in members:
        parts = [path for path in member["uses"] if path.startswith(("equipment.", "processes.", "vessels."))]
        own = [path for path in member["uses"] if path.startswith(f"{owner}.")]
        symbols = [line[1] for line in member["latex_lines"] if len(line) > 1]
        repeats = len(parts) == 1 and not own and not any(text.lstrip().startswith("-") for text in symbols)
        if not repeats and not (own and not parts):
            return None
        pieces.update(path.split(".", 1)[1].rpartition(".")[0] for path in parts)
    return pieces.pop() if len(pieces) == 1 else None


def _joined(sentences: Sequence[str]) -> str:
    """One sentence of several: what stands before their colons once, what follows it in a row, the same only once."""
    heads = list(dict.fromkeys(sentence.partition(": ")[0] for sentence in sentences if ": " in sentence))
    if len(heads) != 1 or any(": " not in sentence for sentence in sentences):
        rests = list(dict.fromkeys(sentence.partition(": ")[2] for sentence in sentences))
        if len(rests) == 1 and rests[0]:
            return rests[0]
        return " ".join(dict.fromkeys(sentences))
    rests = list(dict.fromkeys(sentence.partition(": ")[2].rstrip(".") for sentence in sentences))
    return f"{heads[0]}: {'; '.join(rests)}."


def _listed(words: Iterable[str]) -> str:
    """``1, 2 and 3``."""
    words = list(words)
    return ", ".join(words[:-1]) + f" and {words[-1]}" if len(words) > 1 else words[0]


def _last(path: str) -> str:
    return path.rpartition(".")[2]

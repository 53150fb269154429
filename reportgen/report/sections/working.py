"""States, and the working step by step."""

from __future__ import annotations

import re
from collections import defaultdict
from collections.abc import Iterable, Mapping
from typing import Any

from markupsafe import Markup, escape

from reportgen.names import NAMES
from reportgen.report.breaking import NARROW, estimated_total, estimated_width
from reportgen.report.formulae import pieces
from reportgen.report.links import anchor
from reportgen.report.passages import Passage
from reportgen.report.presenter import NO_VALUE, Presenter, in_order, prose

__all__ = ["states", "step_anchors", "working"]

_STATE_COLUMNS = (
    "pressure",
    "temperature",
    "specific_internal_energy",
    "specific_enthalpy",
    "specific_entropy",
    "specific_exergy",
    "density",
    "mass_flow",
    "velocity",
    "mass",
    "volume",
)
#: Columns for states that hold an amount, and those that then say nothing new.
_OF_AMOUNTS, _NOT_OF_AMOUNTS = ("specific_internal_energy",), ("density",)
#: Characters of one piece that reaches into the column of the basis.
_STACKED = 48
#: Characters of a right side that takes more than a line anyway: the result then follows on its last line.
_LONG = 68
#: Steps of a passage that one sheet of paper holds together.
_TOGETHER = 2


def states(presenter: Presenter) -> dict[str, Any] | None:
    """One row a state: the usual properties, each with U beneath."""
    record = presenter.record
    plant = record.data["plant"]
    if not plant["states"]:
        return None
    held = [state for state, entry in plant["states"].items() if entry.get("mass")]
    columns = [
        name
        for name in _STATE_COLUMNS
        if any(record.entry(f"states.{state}.{name}") for state in (held if name in _OF_AMOUNTS else plant["states"]))
        and not (name in _NOT_OF_AMOUNTS and len(held) == len(plant["states"]))
    ]
    rows = []
    for state, entry in in_order(plant["states"]):
        paths = [f"states.{state}.{name}" for name in columns]
        phase = record.value(f"states.{state}.phase")
        quality = record.value(f"states.{state}.quality")
        if isinstance(quality, float) and phase == "two-phase":
            phase = Markup("{}, {} {}").format(
                phase, presenter.symbol(f"states.{state}.quality"), presenter.number(f"states.{state}.quality")
            )
        rows.append(
            {
                "anchor": anchor("state", state),
                "state": state,
                "title": entry.get("title"),
                "fluid": entry["fluid"],
                "cells": [(presenter.number(path, unit=False), presenter.plus_minus(path)) for path in paths],
                "phase": phase or NO_VALUE,
            }
        )
    heads = []
    for name in columns:
        dimension = NAMES[name].dimension
        heads.append((presenter.math(NAMES[name].symbol), NAMES[name].text, presenter.display.unit_text(dimension)))
    return {
        "heads": heads,
        "rows": rows,
        "several_fluids": len(plant["fluids"]) > 1,
        "uncertain": any(spread for row in rows for _, spread in row["cells"]),
    }


def step_anchors(presenter: Presenter) -> dict[str, tuple[int, str]]:
    """Number and anchor of the step of each relation that the working shows."""
    keys = [key for part in presenter.parts for passage in part.passages for key in passage.keys]
    return {key: (index, f"step-{index}") for index, key in enumerate(keys, start=1)}


def working(presenter: Presenter) -> dict[str, Any] | None:
    """Parts, passages and steps: sentence, equations in symbols, numbers and result, basis, and what was used."""
    steps = step_anchors(presenter)
    results = _results(presenter)
    parts = [
        {
            "title": part.title,
            "passages": [_passage(passage, steps, results, presenter) for passage in part.passages],
        }
        for part in presenter.parts
    ]
    return {"parts": parts} if parts else None


def _results(presenter: Presenter) -> dict[str, list[str]]:
    """Values that each relation gives: those it solves, then all others that name it."""
    relations = presenter.record.data["relations"]
    values = presenter.record.values
    results: dict[str, list[str]] = defaultdict(list)
    for key, relation in relations.items():
        results[key] = [path for path in relation["solves"] if path in values]
    for path, entry in values.items():
        if entry["relation"] in relations and path not in results[entry["relation"]]:
            results[entry["relation"]].append(path)
    return results


def _passage(
    passage: Passage,
    steps: Mapping[str, tuple[int, str]],
    results: Mapping[str, list[str]],
    presenter: Presenter,
) -> dict[str, Any]:
    """One sentence and its steps. A basis stands once; in a run it stands once for all, as does what was used."""
    relations = presenter.record.data["relations"]
    shown = []
    before = None
    for key in passage.keys:
        step = _step(*steps[key], relations[key], results[key], presenter)
        basis = step["basis"]
        step["basis"] = "" if basis == before else basis
        before = basis
        shown.append(step)
    used = [path for key in passage.keys for path in relations[key]["uses"]]
    own = {path for key in passage.keys for path in relations[key]["solves"]}
    return {
        "sentence": _unbroken_tags(prose(passage.sentence), presenter),
        "steps": shown,
        "together": len(shown) <= _TOGETHER or passage.run,
        "run": passage.run and len(shown) > 1,
        "basis": "; ".join(dict.fromkeys(step["basis"] for step in shown if step["basis"])),
        "uses": _uses((path for path in used if path not in own), presenter) if passage.run else [],
    }


def _unbroken_tags(sentence: str, presenter: Presenter) -> Markup:
    """A sentence in which no line ends within a tag such as ``TG-2``."""
    plant = presenter.record.data["plant"]
    names = [*plant["equipment"], *plant.get("processes", {}), *plant.get("vessels", {})]
    tags = sorted((tag for tag in names if "-" in tag), key=len, reverse=True)
    text = escape(sentence)
    if not tags:
        return text
    pattern = "|".join(re.escape(str(escape(tag))) for tag in tags)
    return Markup(re.sub(pattern, lambda found: f'<span class="unbroken">{found[0]}</span>', str(text)))


def _step(number: int, name: str, relation: dict[str, Any], results: list[str], presenter: Presenter) -> dict[str, Any]:
    values = presenter.record.values
    lines = []
    shown = set()
    for line in relation["latex_lines"]:
        left, *rights = line
        if left and not rights[-1] and len(rights) > 1 and rights[1]:
            lines.append(_balance(left, rights[0], rights[1], relation, presenter))
            continue
        path = next((path for path in results if values[path].get("symbol") == left), None)
        # A value taken by default stands among the inputs: there its links lead. Of relations solved together two may
        # be written for one value; its links lead to the first.
        lines.append(_line(line, None if path in presenter.record.inputs or path in shown else path))
        if path is not None:
            shown.add(path)
    others = [path for path in results if path not in shown and values[path]["value"] is not None]
    return {
        "number": number,
        "anchor": name,
        # An assumption is linked below, where its text stands.
        "basis": "" if relation["basis"].startswith("assumption: ") else prose(relation["basis"]),
        "lines": lines,
        "stacked": any(line["stacked"] for line in lines),
        "others": [
            (anchor("value", path), presenter.symbol(path), presenter.text(path), presenter.plus_minus(path))
            for path in others
        ],
        "uses": _uses(relation["uses"], presenter),
    }


def _line(line: list[str], path: str | None) -> dict[str, Any]:
    """One equation: left side, then each right side in pieces, repeated right sides left out."""
    left, *rights = line
    if len(rights) > 1 and rights[0].strip() == "0":
        rights = rights[1:]
    distinct = [right for index, right in enumerate(rights) if right and right not in rights[:index]]
    if len(distinct) > 1 and estimated_total(distinct[-2]) > _LONG:
        distinct[-2:] = [f"{distinct[-2]} = {distinct[-1]}"]
    return {
        "anchor": anchor("value", path) if path else None,
        "left": [Markup(piece) for piece in pieces(left)] if left else [],
        "left_characters": estimated_total(left),
        "is_balance": False,
        **_sides(f"= {right}" for right in distinct),
    }


def _balance(left: str, right: str, numbers: str, relation: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    """An equation of several unknowns: both sides in symbols, below them both in numbers, for a checker to compare."""
    if "=" not in numbers:  # the right side is one value, or a constant
        numbers = f"{numbers} = {_number_of(right, relation, presenter)}"
    sides = _sides([f"{left} = {right}", numbers])
    return {"anchor": None, "left": [], "left_characters": 0, "is_balance": True, **sides}


def _number_of(symbol: str, relation: dict[str, Any], presenter: Presenter) -> str:
    """LaTeX of the value of a relation that a symbol stands for; what is no symbol stands for itself."""
    for path in (*relation["solves"], *relation["uses"]):
        entry = presenter.record.entry(path)
        if entry is not None and presenter.record.values.get(path, {}).get("symbol") == symbol:
            return presenter.display.show(entry["value"], entry["dimension"]).latex
    return symbol


def _sides(sides: Iterable[str]) -> dict[str, Any]:
    """Each side in pieces; a wide one with its characters, that it be set smaller where the line cannot hold them."""
    widths = {side: estimated_width(side) for side in sides}
    widest = max(widths.values(), default=0)
    return {
        "rights": [
            ([Markup(piece) for piece in pieces(side)], width if width > NARROW else None)
            for side, width in widths.items()
        ],
        "wide": widest > NARROW,
        "stacked": widest > _STACKED,
    }


def _uses(paths: Iterable[str], presenter: Presenter) -> list[Markup]:
    """Links to what a step was computed from."""
    found = []
    for path in dict.fromkeys(paths):
        if path.startswith("fluids."):
            found.append(presenter.link(path, path.removeprefix("fluids.")))
        elif path.startswith("assumptions."):
            family, _, name = path.removeprefix("assumptions.").partition(".")
            piece = name.partition(".")[0] if family in ("equipment", "processes", "vessels") else ""
            found.append(presenter.link(path, f"assumption on {piece}" if piece else "assumption"))
        else:
            found.append(presenter.symbol_link(path))
    return found

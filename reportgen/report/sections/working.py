"""States, and the working step by step in the order of the solution."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable
from typing import Any

from markupsafe import Markup

from reportgen.names import NAMES
from reportgen.report.formulae import estimated_total, estimated_width, pieces
from reportgen.report.links import anchor
from reportgen.report.presenter import NO_VALUE, Presenter, in_order

__all__ = ["states", "step_anchors", "working"]

_STATE_COLUMNS = (
    "pressure",
    "temperature",
    "specific_enthalpy",
    "specific_entropy",
    "specific_exergy",
    "density",
    "mass_flow",
)
#: Characters of one piece of an equation that still fit beside the margin of a narrow screen.
_NARROW = 30
_GROUPS = {"trains": "Trains", "total": "The whole"}
#: Characters of a whole equation that stay on one line.
_SHORT = 62


def states(presenter: Presenter) -> dict[str, Any] | None:
    """One row a state: the usual properties, each with U beneath."""
    record = presenter.record
    plant = record.data["plant"]
    if not plant["states"]:
        return None
    columns = [
        name for name in _STATE_COLUMNS if any(record.entry(f"states.{state}.{name}") for state in plant["states"])
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


def _order(presenter: Presenter) -> list[str]:
    """Keys of all relations: in solution order, then any that the order leaves out."""
    relations = presenter.record.data["relations"]
    return list(dict.fromkeys([*presenter.record.data["solution_order"], *sorted(relations)]))


def step_anchors(presenter: Presenter) -> dict[str, tuple[int, str]]:
    """Number and anchor of the step of each relation."""
    return {key: (index, f"step-{index}") for index, key in enumerate(_order(presenter), start=1)}


def working(presenter: Presenter) -> dict[str, Any] | None:
    """Steps in solution order: sentence, equation in symbols, numbers and result, basis, and what it used."""
    relations = presenter.record.data["relations"]
    results: dict[str, list[str]] = defaultdict(list)
    for key, relation in relations.items():
        results[key] = [path for path in relation["solves"] if path in presenter.record.values]
    for path, entry in presenter.record.values.items():
        if entry["relation"] in relations and path not in results[entry["relation"]]:
            results[entry["relation"]].append(path)
    steps = [
        _step(number, name, relations[key], results[key], presenter)
        for key, (number, name) in step_anchors(presenter).items()
    ]
    return {"groups": _grouped(steps)} if steps else None


def _grouped(steps: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Runs of steps under one heading; pieces with their states, each train, the whole. The order stays."""
    groups: list[dict[str, Any]] = []
    for step in steps:
        if not groups or groups[-1]["title"] != step["group"]:
            groups.append({"title": step["group"], "steps": []})
        groups[-1]["steps"].append(step)
    return groups


def _step(number: int, name: str, relation: dict[str, Any], results: list[str], presenter: Presenter) -> dict[str, Any]:
    values = presenter.record.values
    lines = []
    shown = set()
    for line in relation["latex_lines"]:
        path = next((path for path in results if values[path].get("symbol") == line[0]), None)
        if path is not None:
            shown.add(path)
        lines.append(_line(line, path))
    others = [path for path in results if path not in shown and values[path]["value"] is not None]
    return {
        "number": number,
        "group": _GROUPS.get(relation["owner"].split(".")[0], "States and pieces"),
        "anchor": name,
        "sentence": relation["sentence"],
        "basis": relation["basis"],
        "lines": lines,
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
    return {
        "anchor": anchor("value", path) if path else None,
        "left": Markup(pieces(left)[0]) if left else "",
        "rights": [[Markup(piece) for piece in pieces(right, "=")] for right in distinct],
        "short": estimated_total(left) + sum(estimated_total(right) + 2 for right in distinct) <= _SHORT,
        "wide": max((estimated_width(right) for right in distinct), default=0) > _NARROW,
    }


def _uses(paths: Iterable[str], presenter: Presenter) -> list[Markup]:
    """Links to what a step was computed from."""
    found = []
    for path in dict.fromkeys(paths):
        if path.startswith("fluids."):
            found.append(presenter.link(path, path.removeprefix("fluids.")))
        elif path.startswith("assumptions."):
            found.append(presenter.link(path, "assumption"))
        else:
            found.append(presenter.symbol_link(path))
    return found

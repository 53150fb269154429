"""What was found: headline results with their criteria, and cautions."""

from __future__ import annotations

from typing import Any

from reportgen.report.narrative import render_narrative
from reportgen.report.presenter import NO_VALUE, Presenter

__all__ = ["cautions", "found"]

_COMPARISONS = {"at_most": "at most", "at_least": "at least"}


def found(presenter: Presenter) -> dict[str, Any]:
    """Headline results, each with the criteria set on it; criteria on other values follow."""
    data = presenter.record.data
    paths = list(dict.fromkeys([*data["summary"], *(entry["path"] for entry in data["criteria"])]))
    rows = []
    for path in paths:
        criteria = [_criterion(entry) for entry in data["criteria"] if entry["path"] == path]
        entry = presenter.record.entry(path)
        rows.append(
            {
                "label": presenter.label(path),
                "number": presenter.number(path),
                "uncertainty": presenter.plus_minus(path) or NO_VALUE,
                "criteria": criteria,
                "generation": path.endswith(".entropy_generation"),
                "reason": entry.get("reason") if entry is not None and entry["value"] is None else None,
            }
        )
    return {"rows": rows, "conclusion": render_narrative("conclusion", presenter)}


def _criterion(entry: dict[str, Any]) -> dict[str, Any]:
    return {
        "id": entry["id"],
        "limit": f"{_COMPARISONS[entry['comparison']]} {entry['limit_text']}",
        "decision": entry["decision"],
        "basis": entry["basis"],
    }


def cautions(presenter: Presenter) -> dict[str, Any]:
    """Cautions in the order of the record: stop, warning, note."""
    return {"rows": [_caution(entry, presenter) for entry in presenter.record.data["cautions"]]}


def _caution(entry: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    dimension, uncertainty = entry["dimension"], entry["expanded_uncertainty"]
    facts: list[tuple[str, str]] = []
    if dimension and entry["value"] is not None:
        facts.append(
            ("value", presenter.link(entry["path"], presenter.with_unit(entry["value"], dimension, uncertainty)))
        )
    if dimension and entry["limit"] is not None:
        facts.append(("limit", presenter.with_unit(entry["limit"], dimension)))
    if dimension and entry["margin"] is not None:
        margin = presenter.show(entry["margin"], presenter.difference_dimension(dimension), uncertainty)
        facts.append(("margin", margin.text))
    return {**entry, "facts": facts}

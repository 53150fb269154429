"""What was found: headline results with their criteria, and cautions."""

from __future__ import annotations

from itertools import groupby
from typing import Any

from reportgen.report.narrative import render_narrative
from reportgen.report.presenter import NO_VALUE, Presenter, prose

__all__ = ["cautions", "found"]


def found(presenter: Presenter) -> dict[str, Any]:
    """Headline results, each with the criteria set on it; criteria on other values follow."""
    data = presenter.record.data
    paths = list(dict.fromkeys([*data["summary"], *(entry["path"] for entry in data["criteria"])]))
    rows: list[dict[str, Any]] = []
    for path in paths:
        criteria = [_criterion(entry, presenter) for entry in data["criteria"] if entry["path"] == path]
        entry = presenter.record.entry(path)
        rows.append(
            {
                "owner": presenter.owner(path),
                "label": presenter.meaning(path),
                "number": presenter.number(path),
                "uncertainty": presenter.plus_minus(path) or NO_VALUE,
                "criteria": criteria,
                "generation": path.endswith(".entropy_generation"),
                "reason": entry.get("reason") if entry is not None and entry["value"] is None else None,
            }
        )
    groups = [(owner, list(group)) for owner, group in groupby(rows, key=lambda row: str(row["owner"]))]
    return {
        "groups": groups,
        "uncertain": any(row["uncertainty"] != NO_VALUE for row in rows),
        "judged": bool(data["criteria"]),
        "conclusion": render_narrative("conclusion", presenter),
    }


def _criterion(entry: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    return {
        "id": entry["id"],
        "limit": presenter.limit(entry),
        "decision": entry["decision"],
        "basis": entry["basis"],
    }


def cautions(presenter: Presenter) -> dict[str, Any]:
    """Cautions in the order of the record: stop, warning, note."""
    return {"rows": [_caution(entry, presenter) for entry in presenter.record.data["cautions"]]}


def _caution(entry: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    facts: list[tuple[str, str]] = presenter.caution_facts(entry)
    linked = [(name, presenter.link(entry["path"], text) if name == "value" else text) for name, text in facts]
    text = prose(entry["text"])
    return {
        **entry,
        "text": text,
        "facts": linked,
        # Most findings say so themselves.
        "undecided": not entry["decided"] and "not decided" not in text,
    }

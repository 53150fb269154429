"""Cautions on states that a second source finds otherwise, or cannot check."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from reportgen.evaluation.cautions.entry import Finding, caution
from reportgen.evaluation.cross_checks import DIFFERS, NOT_COMPARED
from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.names import NAMES

__all__ = ["second_source_differs", "second_source_not_compared"]


@caution("P14", "warning", "Second source differs", source="comparison with a second source")
def second_source_differs(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Property of a state that a second source gives otherwise by more than its tolerance; the worst of each state."""
    groups: dict[tuple[str, str], list[Mapping[str, Any]]] = {}
    for entry in plant.cross_checks:
        if entry["verdict"] == DIFFERS:
            groups.setdefault((entry["state"], entry["second_model"]), []).append(entry)
    for (state, second), entries in groups.items():
        worst = max(entries, key=lambda entry: abs(entry["relative"]) / entry["threshold"])
        others = len(entries) - 1
        words = NAMES[worst["property"]].text.partition(",")[0].lower()
        if worst["species"] is not None:
            words += f" of {worst['species']}"
        if worst["counted_from"] is not None:
            words += f", counted from state {worst['counted_from']},"
        text = f"For state {state} the second source ({second}) has another {words} than the property model of the "
        text += f"calculation{'' if not others else f', and {others} more of its properties differ'}. "
        text += f"{worst['remark']} " if worst["remark"] else ""
        text += "The value is the relative difference of the one that differs most, the limit what was to be tolerated."
        yield Finding(
            worst["path"],
            abs(worst["relative"]),
            worst["threshold"],
            "below",
            text,
            "efficiency",
            owner=f"states.{state}.{second}",
            source=worst["second_sources"][0],
        )


@caution("P15", "note", "Second source not compared", source="comparison with a second source")
def second_source_not_compared(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """States whose second source has no value there, or is not on the machine; one note for each source and reason."""
    groups: dict[tuple[str, str, str], list[Mapping[str, Any]]] = {}
    for entry in plant.cross_checks:
        if entry["verdict"] == NOT_COMPARED:
            groups.setdefault((entry["fluid"], entry["second_model"], entry["remark"]), []).append(entry)
    for (fluid, second, reason), entries in groups.items():
        states = list(dict.fromkeys(entry["state"] for entry in entries))
        properties = dict.fromkeys(NAMES[entry["property"]].text.lower() for entry in entries if entry["property"])
        subject = f"State{'' if len(states) == 1 else 's'} {', '.join(states)} of fluid {fluid}"
        if properties:
            subject = f"{' and '.join(properties).capitalize()} of s{subject[1:]}"
        verb = "was" if max(len(states), len(properties)) == 1 else "were"
        text = f"{subject} {verb} not checked by the second source ({second}). {reason}"
        yield Finding(entries[0]["path"], None, None, "below", text, None, owner=f"fluids.{fluid}.{second}")

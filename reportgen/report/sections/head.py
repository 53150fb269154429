"""Title block and sign-off."""

from __future__ import annotations

from typing import Any

from reportgen.record import Record
from reportgen.report.presenter import NO_VALUE

__all__ = ["missing_for_confirmed", "title_block"]

_ROLES = ("originator", "checker", "approver")


def title_block(record: Record, digest: str) -> dict[str, Any]:
    """Fields of the title block in the words of ISO 7200, the sign-off rows and the line on what is missing.

    ``digest`` is the content hash of the record.
    """
    calculation = record.data["calculation"]

    def field(key: str) -> str:
        return str(calculation.get(key) or NO_VALUE)

    return {
        "title": calculation["title"],
        "fields": [
            ("Document number", field("number"), ""),
            ("Revision", field("revision"), ""),
            ("Status", field("status"), ""),
            ("Date of issue", field("date"), ""),
            ("Legal owner", field("owner"), ""),
            ("Client", field("client"), ""),
            ("Location", field("location"), ""),
            ("Sheet", "at the foot of each printed page", "quiet"),
            ("Content hash", " ".join(digest[i : i + 4] for i in range(0, 12, 4)) + " …", "hash"),
        ],
        "roles": [(role.capitalize(), calculation.get(role) or "") for role in _ROLES],
        "missing": missing_for_confirmed(record),
        "superseded": calculation["status"] if calculation["status"] in ("superseded", "void") else None,
    }


def missing_for_confirmed(record: Record) -> list[str]:
    """What stands between this draft and a confirmed document, each as a short clause.

    Signatures are always among them: a page cannot know whether a person has signed it.
    """
    data = record.data
    missing = ["not signed"]
    unnamed = [role for role in _ROLES if not data["calculation"].get(role)]
    if unnamed:
        missing.append("no " + _listed(unnamed, "or") + " named")
    open_ones = [entry["id"] for entry in data["assumptions"] if entry["status"] == "to be verified"]
    if open_ones:
        missing.append(f"to be verified: {_listed(open_ones)}")
    stops = sorted({entry["id"] for entry in data["cautions"] if entry["severity"] == "stop"})
    if stops:
        missing.append(f"stop {'cautions' if len(stops) > 1 else 'caution'} standing: {_listed(stops)}")
    for decision in ("not met", "not decided"):
        found = [entry["id"] for entry in data["criteria"] if entry["decision"] == decision]
        if found:
            missing.append(f"{decision}: {_listed(found)}")
    return missing


def _listed(words: list[str], joint: str = "and") -> str:
    """``a, b and c``."""
    return words[0] if len(words) == 1 else ", ".join(words[:-1]) + f" {joint} {words[-1]}"

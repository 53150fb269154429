"""Title block and sign-off."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from markupsafe import Markup, escape

from reportgen.record import Record
from reportgen.report.links import anchor
from reportgen.report.presenter import NO_VALUE
from reportgen.report.templates import lower_first

__all__ = ["is_decisive", "is_open", "missing_for_confirmed", "title_block"]

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
    """What stands between this draft and a confirmed document, each as a short clause, assumptions as links.

    Signatures are always among them: a page cannot know whether a person has signed it. Assumptions on which a
    decision turns, or that change a result by more than its uncertainty, are named apart whatever their status.
    """
    data = record.data
    missing = ["not signed"]
    unnamed = [role for role in _ROLES if not data["calculation"].get(role)]
    if unnamed:
        missing.append("no " + _listed(unnamed, "or") + " named")
    decisive = [entry for entry in data["assumptions"] if is_decisive(entry)]
    if decisive:
        word = "decisive assumptions" if len(decisive) > 1 else "decisive assumption"
        missing.append(Markup("{}: {}").format(word, _listed([_named(entry) for entry in decisive])))
    open_ones = [entry for entry in data["assumptions"] if is_open(entry) and entry not in decisive]
    if open_ones:
        missing.append(Markup("to be verified: {}").format(_listed([_named(entry) for entry in open_ones])))
    stops = sorted({entry["id"] for entry in data["cautions"] if entry["severity"] == "stop"})
    if stops:
        missing.append(f"stop {'cautions' if len(stops) > 1 else 'caution'} standing: {_listed(stops)}")
    for decision in ("not met", "not decided"):
        found = [entry["id"] for entry in data["criteria"] if entry["decision"] == decision]
        if found:
            missing.append(f"{decision}: {_listed(found)}")
    return missing


def is_open(assumption: Mapping[str, Any]) -> bool:
    """Whether an assumption waits for someone to verify it."""
    return bool(assumption["status"] == "to be verified")


def is_decisive(assumption: Mapping[str, Any]) -> bool:
    """Whether the test of an assumption found that results or decisions turn on it."""
    return bool(assumption["test"]) and assumption["test"]["verdict"] == "decisive"


def _named(assumption: Mapping[str, Any]) -> Markup:
    """Link to an assumption: the author's by its identifier, the program's by its whole sentence."""
    text = assumption["id"]
    if assumption["origin"] != "author":
        text = lower_first(assumption["text"]).rstrip(".")
    return Markup('<a href="#{}">{}</a>').format(anchor("assumption", assumption["id"]), text)


def _listed(words: Sequence[str], joint: str = "and") -> Markup:
    """``a, b and c``, escaped."""
    last = escape(words[-1])
    return last if len(words) == 1 else Markup("{} {} {}").format(Markup(", ").join(words[:-1]), joint, last)

"""References, revision history, provenance."""

from __future__ import annotations

from typing import Any

from reportgen.report.links import anchor
from reportgen.report.presenter import Presenter

__all__ = ["provenance", "references", "revisions"]


def references(presenter: Presenter) -> dict[str, Any] | None:
    """References of the calculation file."""
    rows = [
        {**entry, "anchor": anchor("reference", entry["id"])}
        for entry in presenter.record.data["calculation"].get("references", [])
    ]
    return {"rows": rows} if rows else None


def revisions(presenter: Presenter) -> dict[str, Any] | None:
    """Revision history."""
    rows = presenter.record.data["calculation"].get("revisions", [])
    return {"rows": rows} if rows else None


def provenance(presenter: Presenter) -> dict[str, Any]:
    """What was computed from what, by which versions."""
    entry = presenter.record.data["provenance"]
    fluid_data = entry.get("fluid_data", [])
    git = entry.get("git") or {}
    tree = {True: "clean", False: "with changes that were not committed", None: "state not known"}[git.get("clean")]
    return {
        "hash": presenter.content_hash,
        "program": entry.get("program"),
        "python": entry.get("python"),
        "packages": entry.get("packages", {}),
        "files": entry.get("files", []),
        "fluid_data": [{**item, "source": _unless_shown(item.get("source"), presenter)} for item in fluid_data],
        "commit": git.get("commit"),
        "tree": tree,
    }


def _unless_shown(source: str | None, presenter: Presenter) -> str | None:
    """The source of a data file, None when the method already names all of it beside its fluid."""
    rest = source or ""
    for fluid in presenter.record.data["plant"]["fluids"].values():
        for shown in fluid["sources"]:
            rest = rest.replace(shown, "")
    return source if rest.strip(" ;") else None

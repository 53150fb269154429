"""The report page of one record."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from reportgen.record import Record
from reportgen.report import figures
from reportgen.report.links import anchor
from reportgen.report.presenter import Presenter, prose
from reportgen.report.sections import (
    account,
    basis,
    budget,
    combustion,
    cross_checks,
    cycles,
    findings,
    head,
    tail,
    working,
)
from reportgen.report.templates import environment, fonts_folder, style

__all__ = ["page"]


def _safety(presenter: Presenter) -> dict[str, Any]:
    return {}


def _figures(presenter: Presenter) -> dict[str, Any] | None:
    """Bars first: they go with the account above and are low, so that a tall diagram leaves no gap on the sheet."""
    drawn = []
    for figure in sorted(presenter.record.data["figures"], key=lambda figure: figure["kind"] == "temperature-entropy"):
        svg = figures.draw(figure, presenter, fonts_folder())
        if svg is not None:
            drawn.append(
                {
                    "anchor": anchor("drawing", figure["id"]),
                    "svg": svg,
                    "title": figure["title"].rstrip("."),
                    "caption": prose(figure.get("caption")),
                    "table": figures.TABLES[figure["kind"]](figure, presenter)
                    if figure["kind"] in figures.TABLES
                    else None,
                }
            )
    return {"figures": drawn} if drawn else None


#: (identifier and template, title, context or None when there is nothing to say), in the reader's order.
SECTIONS: tuple[tuple[str, str, Callable[[Presenter], dict[str, Any] | None]], ...] = (
    ("found", "What was found", findings.found),
    ("cautions", "Cautions", findings.cautions),
    ("purpose", "Purpose", basis.purpose),
    ("boundary", "Boundary", basis.boundary),
    ("inputs", "Inputs", basis.inputs),
    ("assumptions", "Assumptions", basis.assumptions),
    ("method", "Method", basis.method),
    ("states", "States", working.states),
    ("working", "Working", working.working),
    ("combustion", "Combustion", combustion.combustion),
    ("cycles", "Cycles", cycles.cycles),
    ("account", "Entropy account", account.accounts),
    ("closure", "Closure", account.closure),
    ("budget", "Uncertainty budget", budget.uncertainty_budget),
    ("cross-checks", "Cross-checks", cross_checks.cross_checks),
    ("figures", "Figures", _figures),
    ("references", "References", tail.references),
    ("revisions", "Revision history", tail.revisions),
    ("provenance", "Provenance", tail.provenance),
    ("safety", "Safety notice", _safety),
)


def page(record: Record) -> str:
    """HTML of the report: one file, faces and figures in it. Equal records give equal text.

    Raises InputError when a narrative of the record is at fault.
    """
    presenter = Presenter(record)
    sections: list[dict[str, Any]] = []
    for identifier, title, build in SECTIONS:
        view = build(presenter)
        if view is not None:
            sections.append({"id": identifier, "title": title, "view": view, "number": len(sections) + 1})
    calculation = record.data["calculation"]
    foot = f"{calculation['number']} · revision {calculation['revision']} · {calculation['status']}"
    return (
        environment()
        .get_template("report.html.jinja")
        .render(
            calculation=calculation,
            title_block=head.title_block(record, presenter.content_hash),
            sections=sections,
            numbers={section["id"]: section["number"] for section in sections},
            steps=working.step_anchors(presenter),
            coverage=presenter.coverage,
            style=style(foot),
        )
    )

"""Figures of a record as SVG that stands in the page: text as text in the page's face, colours of the page.

One module a kind of figure; ``KINDS`` is the only place that lists them. matplotlib is imported when one is drawn.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

from markupsafe import Markup

from reportgen.report.figures import bars, exchanger_profile, temperature_entropy, vessel_history
from reportgen.report.figures.canvas import Drawing
from reportgen.report.presenter import Presenter

__all__ = ["KINDS", "TABLES", "draw"]

KINDS: dict[str, Callable[[dict[str, Any], Presenter, Path], Drawing | None]] = {
    "temperature-entropy": temperature_entropy.draw,
    "lost-work-bars": bars.draw_lost_work,
    "entropy-account-bars": bars.draw_entropy_account,
    "exchanger-profile": exchanger_profile.draw,
    "vessel-history": vessel_history.draw,
}

#: Tables that stand under figures of a kind: heads, and rows of a name and its numbers.
TABLES: dict[str, Callable[[dict[str, Any], Presenter], dict[str, Any]]] = {
    "exchanger-profile": exchanger_profile.table,
    "vessel-history": vessel_history.table,
}


def draw(figure: dict[str, Any], presenter: Presenter, fonts: Path) -> Markup | None:
    """SVG of one figure of the record, None for a kind that this version does not draw or that has no data.

    ``fonts`` is the folder with ``figures.otf``, by which text is measured.
    """
    kind = KINDS.get(figure["kind"])
    drawing = kind(figure, presenter, fonts) if kind is not None else None
    if drawing is None:
        return None
    return Markup(drawing.svg(figure["id"], figure["title"], drawing.description))

"""Temperature against duty along an exchanger: hot stream as a full line, cold stream as a broken one, pinch marked."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from reportgen.report.figures.canvas import GENERATION, GREY, INK, SMALL, TEAL, WIDTH, Drawing
from reportgen.report.figures.pen import Line, Pen, spread, write_label
from reportgen.report.figures.placement import Box, Label, Placement
from reportgen.report.presenter import Presenter

__all__ = ["draw", "table"]

_HEIGHT = 208.0
_MARGINS = (46.0, 38.0, 12.0, 20.0)  # left, bottom, right, top
_BOLD_FACTOR = 1.08  # a bold numeral is wider than the regular one that is measured
_DIGITS = 4


def draw(figure: dict[str, Any], presenter: Presenter, fonts: Path) -> Drawing | None:
    """Both temperatures over the duty with the states at their ends; None when nothing is known."""
    if not figure["duty"] or figure["pinch"]["duty"] is None:
        return None
    duties = [presenter.display.convert(duty, "heat_flow") for duty in figure["duty"]]
    lines = {
        side: list(zip(duties, (presenter.display.convert(t, "temperature") for t in figure[side]), strict=True))
        for side in ("hot", "cold")
    }
    drawing = Drawing(WIDTH, _HEIGHT, fonts)
    left, bottom, right, top = _MARGINS
    axes = drawing.axes(*_MARGINS)
    low = min(t for line in lines.values() for _, t in line)
    high = max(t for line in lines.values() for _, t in line)
    room = 0.12 * ((high - low) or 1.0)
    across = (max(duties) - min(duties)) or 1.0
    axes.set(
        xlim=(min(duties) - 0.04 * across, max(duties) + 0.04 * across),
        ylim=(low - room, high + room),
    )
    pen = Pen(axes, Placement(Box(left + 2, bottom + 2, drawing.width - right, drawing.height - top)))
    pen.line(lines["hot"], color=GENERATION, linewidth=2.0, solid_capstyle="round", zorder=3)
    pen.line(lines["cold"], color=TEAL, linewidth=2.0, linestyle=(0, (5, 2.2)), zorder=3)
    pinch = _pinch(figure, presenter)
    pen.line(pinch, color=INK, linewidth=0.9, zorder=2)
    for line in lines.values():
        for point in (line[0], line[-1]):
            pen.point(point)
    _labels(drawing, pen, lines, pinch, figure, presenter)
    drawing.ticks(axes)
    unit = presenter.display.unit_text("heat_flow")
    since = "inlets" if figure["arrangement"] == "parallel-flow" else "cold end"
    foot = f"duty exchanged, from the {since}, in {unit}"
    drawing.write(drawing.width - right, bottom - 30, foot, ha="right", va="baseline", color=INK)
    name = f"temperature in {presenter.display.unit_text('temperature')}"
    drawing.write(left - 40, drawing.height - top + 8, name, ha="left", color=INK)
    drawing.description = _description(figure, presenter)
    return drawing


def _pinch(figure: dict[str, Any], presenter: Presenter) -> Line:
    place = presenter.display.convert(figure["pinch"]["duty"], "heat_flow")
    return [(place, presenter.display.convert(figure["pinch"][side], "temperature")) for side in ("cold", "hot")]


def _gap(figure: dict[str, Any], presenter: Presenter) -> str:
    """The pinch with its unit, as the table of results shows it."""
    return f"pinch {presenter.text(figure['pinch']['path'])}"


def _states(figure: dict[str, Any], side: str) -> tuple[str, str]:
    """States at the begin and at the end of a curve."""
    ends = figure["ends"][side]
    backwards = side == "hot" and figure["arrangement"] != "parallel-flow"
    return (ends["outlet"], ends["inlet"]) if backwards else (ends["inlet"], ends["outlet"])


def _labels(
    drawing: Drawing,
    pen: Pen,
    lines: dict[str, Line],
    pinch: Line,
    figure: dict[str, Any],
    presenter: Presenter,
) -> None:
    """States first, then the pinch, then which stream is which."""
    for side, line in lines.items():
        for name, point in zip(_states(figure, side), (line[0], line[-1]), strict=True):
            width, height = drawing.text_size(name)
            angle = 90.0 if side == "hot" else 270.0
            placed = pen.placement.place(Label(name, width * _BOLD_FACTOR, height, pen.display([point]), angle))
            write_label(drawing, placed, weight="bold")
    text = _gap(figure, presenter)
    middle = [(pinch[0][0], (pinch[0][1] + pinch[1][1]) / 2), *pinch]
    right_half = pinch[0][0] > (lines["hot"][0][0] + lines["hot"][-1][0]) / 2
    label = Label(text, *drawing.text_size(text, SMALL), pen.display(middle), 180.0 if right_half else 0.0)
    write_label(drawing, pen.placement.place(label), color=INK, size=SMALL)
    for side, line in lines.items():
        name = f"{side} stream"
        anchors = spread(pen.visible(line), (0.5, 0.4, 0.6, 0.3, 0.7))
        if anchors:
            angle = 90.0 if side == "hot" else 270.0
            placed = pen.placement.place(Label(name, *drawing.text_size(name, SMALL), anchors, angle))
            write_label(drawing, placed, color=GREY, size=SMALL)


def _description(figure: dict[str, Any], presenter: Presenter) -> str:
    rows = "; ".join(
        f"at {row['place']} {_shown(row['hot'], 'temperature', presenter)} and "
        f"{_shown(row['cold'], 'temperature', presenter)}"
        for row in figure["rows"]
    )
    return f"Temperature against duty, hot stream full, cold stream broken. Hot and cold: {rows}."


def _shown(value: float, dimension: str, presenter: Presenter, unit: bool = True) -> str:
    return presenter.rough(value, dimension, _DIGITS, unit)


def table(figure: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    """The places that matter as a table: heads with units, and rows of place, duty, both temperatures, difference."""
    dimensions = {
        "duty": ("heat_flow", "Duty"),
        "hot": ("temperature", "Hot"),
        "cold": ("temperature", "Cold"),
        "difference": ("temperature_difference", "Difference"),
    }
    heads = [f"{head}, {presenter.display.unit_text(dimension)}" for dimension, head in dimensions.values()]
    rows = [
        (
            row["place"],
            [_shown(row[name], dimension, presenter, unit=False) for name, (dimension, _) in dimensions.items()],
        )
        for row in figure["rows"]
    ]
    return {"head": "Place", "heads": heads, "rows": rows}

"""The path of the content of a vessel: temperatures above, pressure below, against time or against mass."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from reportgen.report.figures.canvas import GREY, INK, SMALL, TEAL, WIDTH, Drawing
from reportgen.report.figures.pen import Line, Pen, spread, write_label
from reportgen.report.figures.placement import Box, Label, Placement
from reportgen.report.presenter import NO_VALUE, Presenter

__all__ = ["draw", "table"]

_HEIGHT_ABOVE, _HEIGHT_BELOW = 168.0, 138.0
_MARGINS = (46.0, 38.0, 12.0, 20.0)  # left, bottom, right, top
_DIGITS = 4
#: Units of time by the seconds from which they are used.
_CLOCKS = ((7200.0, 3600.0, "h"), (300.0, 60.0, "min"), (0.0, 1.0, "s"))


def draw(figure: dict[str, Any], presenter: Presenter, fonts: Path) -> Drawing | None:
    """Two panels over one axis; None when nothing is known."""
    scale, foot = _along(figure, presenter)
    along = [scale(value) for value in figure["along"]]
    if len(along) < 2:
        return None
    drawing = Drawing(WIDTH, _HEIGHT_ABOVE + _HEIGHT_BELOW, fonts)
    left, bottom, right, top = _MARGINS
    temperatures = {"content": _line(along, figure["temperature"], "temperature", presenter)}
    if figure.get("wall_temperature"):
        temperatures["metal"] = _line(along, figure["wall_temperature"], "temperature", presenter)
    pressure = {"pressure": _line(along, figure["pressure"], "pressure", presenter)}
    _panel(drawing, temperatures, (left, bottom + _HEIGHT_BELOW, right, top), along)
    _panel(drawing, pressure, (left, bottom, right, top + _HEIGHT_ABOVE), along)
    drawing.write(drawing.width - right, bottom - 30, foot, ha="right", va="baseline", color=INK)
    for name, height in (("temperature", drawing.height - top), ("pressure", _HEIGHT_BELOW - top)):
        unit = presenter.display.unit_text(name)
        drawing.write(left - 40, height + 8, f"{name} in {unit}", ha="left", color=INK)
    drawing.description = _description(figure, presenter)
    return drawing


def _along(figure: dict[str, Any], presenter: Presenter) -> tuple[Any, str]:
    """Conversion of the axis, and what it is called."""
    if figure["against"] == "duration":
        _, seconds, unit = next(clock for clock in _CLOCKS if figure["along"][-1] >= clock[0])
        return (lambda value: value / seconds), f"time in {unit}"
    unit = presenter.display.unit_text("mass")
    return (lambda value: presenter.display.convert(value, "mass")), f"mass of the content in {unit}"


def _line(along: list[float], values: list[float], dimension: str, presenter: Presenter) -> Line:
    pairs = zip(along, values, strict=True)
    return [(place, presenter.display.convert(value, dimension)) for place, value in pairs if value is not None]


def _panel(
    drawing: Drawing, lines: dict[str, Line], margins: tuple[float, float, float, float], along: list[float]
) -> None:
    left, bottom, right, top = margins
    axes = drawing.axes(*margins)
    values = [y for line in lines.values() for _, y in line]
    low, high = min(values), max(values)
    room = 0.12 * ((high - low) or max(abs(high), 1.0))
    # A pressure is counted from zero; the axis runs as time does, or as mass leaves or enters.
    floor = 0.0 if "pressure" in lines else low - room
    ends = (along[0], along[-1])
    across = 0.03 * (ends[1] - ends[0])
    axes.set(xlim=(ends[0] - across, ends[1] + across), ylim=(floor, high + room))
    pen = Pen(axes, Placement(Box(left + 2, bottom + 2, drawing.width - right, drawing.height - top)))
    styles: dict[str, dict[str, Any]] = {
        "content": {"color": TEAL, "linewidth": 2.0},
        "metal": {"color": INK, "linewidth": 1.2, "linestyle": (0, (5, 2.2))},
        "pressure": {"color": TEAL, "linewidth": 2.0},
    }
    for name, line in lines.items():
        pen.line(line, zorder=3, **styles[name])
    for name, line in lines.items():
        anchors = spread(pen.visible(line), (0.5, 0.4, 0.6, 0.3, 0.7))
        if len(lines) > 1 and anchors:
            label = Label(name, *drawing.text_size(name, SMALL), anchors, 90.0 if name == "metal" else 270.0)
            write_label(drawing, pen.placement.place(label), color=GREY, size=SMALL)
    drawing.ticks(axes)


def _shown(value: float | None, dimension: str, presenter: Presenter) -> str:
    return NO_VALUE if value is None else presenter.rough(value, dimension, _DIGITS, unit=False)


def _columns(figure: dict[str, Any]) -> dict[str, tuple[str, str]]:
    """Name in the record to dimension and head of the columns beside the first."""
    columns = {
        "mass": ("mass", "Mass"),
        "pressure": ("pressure", "Pressure"),
        "temperature": ("temperature", "Content"),
        "wall_temperature": ("temperature", "Metal"),
        "quality": ("ratio", "Vapour fraction"),
        "mass_flow": ("mass_flow", "Flow"),
    }
    if figure["against"] == "mass":
        del columns["mass"]
    return {
        name: column for name, column in columns.items() if any(entry is not None for entry in figure.get(name, []))
    }


def table(figure: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    """The history behind the curves at a dozen places."""
    dimension = "time" if figure["against"] == "duration" else "mass"
    columns = _columns(figure)
    heads = [", ".join(filter(None, (head, presenter.display.unit_text(kind)))) for kind, head in columns.values()]
    rows = [
        (
            _shown(figure["along"][row], dimension, presenter),
            [_shown(figure[name][row], kind, presenter) for name, (kind, _) in columns.items()],
        )
        for row in figure["rows"]
    ]
    return {"head": f"{dimension.capitalize()}, {presenter.display.unit_text(dimension)}", "heads": heads, "rows": rows}


def _description(figure: dict[str, Any], presenter: Presenter) -> str:
    first, last = (
        f"{presenter.rough(figure['pressure'][place], 'pressure', _DIGITS)} and "
        f"{presenter.rough(figure['temperature'][place], 'temperature', _DIGITS)}"
        for place in (0, -1)
    )
    return f"Temperature above, pressure below. The content begins at {first} and comes to {last}."

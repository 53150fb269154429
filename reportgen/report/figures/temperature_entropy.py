"""Temperature against specific entropy: saturation dome, isobars, process paths, state points."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.report.figures.canvas import GREY, INK, SMALL, TEAL, WIDTH, Drawing, finite
from reportgen.report.figures.pen import Line, Pen, spread, write_label
from reportgen.report.figures.placement import Box, Label, Placement
from reportgen.report.presenter import Presenter

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["draw"]

_HEIGHT = 232.0
_HEIGHT_ABOVE_DETAIL = 160.0
_MARGINS = (46.0, 38.0, 10.0, 18.0)  # left, bottom, right, top
_BOLD_FACTOR = 1.08  # a bold numeral is wider than the regular one that is measured
_APART = 1.1
_PRESSURE_DIGITS = 4
_LEGIBLE = 6.0  # points between a labelled isobar and any other line
#: Part of both axes below which the processes get a panel of their own.
_CROWDED = 0.4


def draw(figure: dict[str, Any], presenter: Presenter, fonts: Path) -> Drawing | None:
    """The figure of one fluid; where the processes crowd in a corner of the dome, a second panel shows them large."""
    curves = _Curves(figure, presenter)
    if not curves.points and not curves.paths:
        return None
    detail = curves.detail()
    left, bottom, right, top = _MARGINS
    if detail:
        drawing = Drawing(WIDTH, _HEIGHT + _HEIGHT_ABOVE_DETAIL, fonts)
        _panel(drawing, curves, (left, bottom + _HEIGHT, right, top), curves.whole(), detail, presenter)
        _panel(drawing, curves, (left, bottom, right, top + _HEIGHT_ABOVE_DETAIL), detail, None, presenter)
    else:
        drawing = Drawing(WIDTH, _HEIGHT, fonts)
        _panel(drawing, curves, _MARGINS, curves.whole(), None, presenter)
    drawing.description = curves.description()
    return drawing


class _Curves:
    """The curves of the record in display units."""

    def __init__(self, figure: dict[str, Any], presenter: Presenter) -> None:
        def line(entry: dict[str, Any] | None) -> Line:
            if not entry:
                return []
            rows = finite(entry["entropy"], entry["temperature"])
            return [
                (
                    presenter.display.convert(entropy, "specific_entropy"),
                    presenter.display.convert(temperature, "temperature"),
                )
                for entropy, temperature in rows
            ]

        self.dome = line(figure.get("dome"))
        self.isobars = [
            (presenter.rough(entry["pressure"], "pressure", _PRESSURE_DIGITS), line(entry))
            for entry in _apart(figure.get("isobars", []))
        ]
        self.paths = [(entry["equipment"], line(entry)) for entry in figure.get("paths", [])]
        #: For each path whether it only joins two states.
        self.broken = [bool(entry.get("mixing")) for entry in figure.get("paths", [])]
        known = [
            entry
            for entry in figure.get("points", [])
            if entry["entropy"] is not None and entry["temperature"] is not None
        ]
        self.points = [
            (str(entry["label"]), line({"entropy": [entry["entropy"]], "temperature": [entry["temperature"]]})[0])
            for entry in known
        ]
        # In words, with the digits of the table of states.
        self.places = [
            (
                str(entry["label"]),
                [
                    presenter.with_unit(
                        entry[name],
                        dimension,
                        presenter.record.expanded_uncertainty(f"states.{entry['state']}.{dimension}"),
                    )
                    for name, dimension in (("entropy", "specific_entropy"), ("temperature", "temperature"))
                ],
            )
            for entry in known
        ]

    def processes(self) -> Box:
        """What paths and points cover."""
        return _cover([*(point for _, line in self.paths for point in line), *(point for _, point in self.points)])

    def whole(self) -> Box:
        """Limits that hold dome, paths and points."""
        found = self.processes()
        if self.dome:
            dome = _cover(self.dome)
            found = Box(
                min(found.left, dome.left),
                min(found.bottom, dome.bottom),
                max(found.right, dome.right),
                max(found.top, dome.top),
            )
        return _aired(found, 0.05, 0.09)

    def detail(self) -> Box | None:
        """Limits of the second panel, None when the processes fill the whole well enough."""
        if not self.dome or not self.points:
            return None
        whole, processes = self.whole(), self.processes()
        wide = (processes.right - processes.left) / (whole.right - whole.left)
        high = (processes.top - processes.bottom) / (whole.top - whole.bottom)
        if wide > _CROWDED or high > _CROWDED or max(wide, high) == 0.0:
            return None
        return _aired(processes, 0.3, 0.25)

    def description(self) -> str:
        """The figure in words: states and paths."""
        points = "; ".join(f"state {name} at {' and '.join(place)}" for name, place in self.places)
        parts = ["Temperature against specific entropy."]
        if self.dome:
            parts.append("The saturation line is a closed dome.")
        if points:
            parts.append(f"Points: {points}.")
        if self.paths:
            parts.append("Paths: " + ", ".join(dict.fromkeys(name for name, _ in self.paths)) + ".")
        return " ".join(parts)


def _apart(isobars: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Isobars whose pressures differ by more than a tenth; of closer ones, which would run together, the lowest."""
    kept: list[dict[str, Any]] = []
    for entry in sorted(isobars, key=lambda entry: float(entry["pressure"])):
        if not kept or entry["pressure"] > _APART * kept[-1]["pressure"]:
            kept.append(entry)
    return kept


def _cover(points: Line) -> Box:
    if not points:
        return Box(0.0, 0.0, 1.0, 1.0)
    entropies, temperatures = zip(*points, strict=True)
    return Box(min(entropies), min(temperatures), max(entropies), max(temperatures))


def _aired(box: Box, wide: float, high: float) -> Box:
    """Room round the curves, as parts of their extent; a point or a line gets some of each unit."""
    across = (box.right - box.left) or max(abs(box.left), 1.0) * 0.2
    up = (box.top - box.bottom) or max(abs(box.top), 1.0) * 0.2
    return Box(box.left - wide * across, box.bottom - high * up, box.right + wide * across, box.top + high * up)


def _panel(
    drawing: Drawing,
    curves: _Curves,
    margins: tuple[float, float, float, float],
    limits: Box,
    detail: Box | None,
    presenter: Presenter,
) -> None:
    """One pair of axes with all curves; ``detail`` is framed and its states are left to the panel below."""
    axes = drawing.axes(*margins)
    axes.set(xlim=(limits.left, limits.right), ylim=(limits.bottom, limits.top))
    left, bottom, right, top = margins
    frame = Box(left + 2, bottom + 2, drawing.width - right, drawing.height - top)
    placement = Placement(frame)
    pen = Pen(axes, placement)
    for _, line in curves.isobars:
        pen.line(line, color=GREY, linewidth=0.6, linestyle=(0, (4, 3)), zorder=1)
    if curves.dome:
        pen.line(curves.dome, color=INK, linewidth=0.9, zorder=2)
    for (_, line), broken in zip(curves.paths, curves.broken, strict=True):
        style = {"linestyle": (0, (3.0, 1.6)), "linewidth": 1.4} if broken else {"linewidth": 2.0}
        pen.line(line, color=TEAL, solid_capstyle="round", zorder=3, **style)
    for _, point in curves.points:
        pen.point(point)
    if detail is not None:
        corners = [
            (detail.left, detail.bottom),
            (detail.right, detail.bottom),
            (detail.right, detail.top),
            (detail.left, detail.top),
            (detail.left, detail.bottom),
        ]
        pen.line(corners, color=GREY, linewidth=0.5, zorder=1)
    _labels(drawing, curves, pen, detail)
    _axis_names(drawing, axes, margins, presenter)


def _labels(drawing: Drawing, curves: _Curves, pen: Pen, detail: Box | None) -> None:
    """States first, then paths, isobars, the dome: the more a label matters, the better its place."""
    if detail is None:
        for name, point in curves.points:
            width, height = drawing.text_size(name)
            label = Label(name, width * _BOLD_FACTOR, height, pen.display([point]))
            write_label(drawing, pen.placement.place(label), weight="bold")
        for name, line in curves.paths:
            anchors = spread(pen.visible(line), (0.5, 0.35, 0.65, 0.2, 0.8))
            if anchors:
                width, height = drawing.text_size(name)
                write_label(drawing, pen.placement.place(Label(name, width, height, anchors, 0.0)), color=TEAL)
    for text, line in curves.isobars if detail is None else ():
        others = [other for _, other in curves.isobars if other is not line]
        apart = _away(pen.visible(line), [pen.display(other) for other in [*others, curves.dome] if other])
        anchors = spread(apart, (1.0, 0.97, 0.9, 0.8, 0.6, 0.4))
        if anchors:
            width, height = drawing.text_size(text, SMALL)
            placed = pen.placement.place(Label(text, width, height, anchors, 180.0))
            write_label(drawing, placed, color=GREY, size=SMALL)
    if curves.dome:
        anchors = spread(pen.visible(curves.dome), (0.18, 0.25, 0.12, 0.8, 0.9))
        if anchors:
            width, height = drawing.text_size("saturation", SMALL)
            placed = pen.placement.place(Label("saturation", width, height, anchors, 0.0))
            write_label(drawing, placed, color=GREY, size=SMALL)
    if detail is not None:
        foot = pen.display([(x, detail.bottom) for x in ((detail.left + detail.right) / 2, detail.right, detail.left)])
        width, height = drawing.text_size("enlarged below", SMALL)
        placed = pen.placement.place(Label("enlarged below", width, height, foot, 270.0))
        write_label(drawing, placed, color=GREY, size=SMALL)


def _away(points: Line, others: list[Line]) -> Line:
    """Points that stand clear of other lines: where an isobar runs along another, no label could say which it means."""
    if not others or not points:
        return points
    crowd = np.concatenate([np.asarray(line, dtype=float) for line in others])
    distances = np.sqrt(((np.asarray(points)[:, None, :] - crowd[None, :, :]) ** 2).sum(axis=2)).min(axis=1)
    return [point for point, distance in zip(points, distances, strict=True) if distance > _LEGIBLE]


def _axis_names(drawing: Drawing, axes: Axes, margins: tuple[float, float, float, float], presenter: Presenter) -> None:
    """Names with units: entropy below, temperature at the head of its axis, upright."""
    left, bottom, right, top = margins
    entropy = presenter.display.unit_text("specific_entropy")
    temperature = presenter.display.unit_text("temperature")
    drawing.ticks(axes)
    drawing.write(
        drawing.width - right, bottom - 30, f"specific entropy in {entropy}", ha="right", va="baseline", color=INK
    )
    drawing.write(left - 40, drawing.height - top + 8, f"temperature in {temperature}", ha="left", color=INK)

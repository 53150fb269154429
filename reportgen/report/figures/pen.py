"""A pen that draws in data coordinates and keeps account of what labels must stay clear of."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.report.figures.canvas import INK, PAPER, Drawing
from reportgen.report.figures.placement import Box, Placed, Placement

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["Line", "Pen", "spread", "write_label"]

_POINT_RADIUS = 2.6

Line = list[tuple[float, float]]


class Pen:
    """Draws in data coordinates and tells the placement, in display coordinates, what is in the way."""

    def __init__(self, axes: Axes, placement: Placement) -> None:
        self.axes = axes
        self.placement = placement

    def display(self, points: Line) -> Line:
        """Data coordinates to points on the figure."""
        array = self.axes.transData.transform(np.asarray(points, dtype=float))
        return [(float(x), float(y)) for x, y in array]

    def line(self, points: Line, **style: Any) -> None:
        """A polyline."""
        if len(points) < 2:
            return
        xs, ys = zip(*points, strict=True)
        self.axes.plot(xs, ys, **style)
        self.placement.add_line(self.display(points))

    def point(self, point: tuple[float, float]) -> None:
        """A state point: a small ring."""
        self.axes.plot(
            [point[0]],
            [point[1]],
            marker="o",
            markersize=2 * _POINT_RADIUS,
            markerfacecolor=PAPER,
            markeredgecolor=INK,
            markeredgewidth=1.0,
            zorder=4,
        )
        x, y = self.display([point])[0]
        reach = _POINT_RADIUS + 0.6
        self.placement.add_box(Box(x - reach, y - reach, x + reach, y + reach))

    def visible(self, points: Line) -> Line:
        """The points of a line that lie within the axes, in display coordinates."""
        return [(x, y) for x, y in self.display(points) if Box(x, y, x, y).inside(self.placement.frame)]


def spread(points: Line, parts: tuple[float, ...]) -> Line:
    """Points at parts of a line's length in points."""
    return [points[min(int(part * len(points)), len(points) - 1)] for part in parts] if points else []


def write_label(drawing: Drawing, placed: Placed | None, **style: Any) -> None:
    """Write a label where it was placed, with its leader if it stands apart."""
    if placed is None:
        return
    box = placed.box
    if placed.leader is not None:
        end = (min(max(placed.leader[0], box.left), box.right), min(max(placed.leader[1], box.bottom), box.top))
        drawing.leader(placed.leader, end)
    drawing.write(
        (box.left + box.right) / 2,
        box.bottom + 0.22 * (box.top - box.bottom),
        placed.label.text,
        ha="center",
        va="baseline",
        **style,
    )

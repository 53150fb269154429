"""Where labels go: beside what they name, on top of nothing.

All coordinates are display coordinates in points. A label tries places around its anchors, nearest first, until one
is clear of every line, every point and every label set before; if none is, it moves out with a leader.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

__all__ = ["Box", "Label", "Placed", "Placement"]

_DISTANCES = (5.0, 8.0, 12.0, 17.0)
_LEADER_DISTANCES = (24.0, 34.0, 46.0, 60.0, 80.0, 105.0, 135.0)
_DIRECTIONS = 16
_CLEARANCE = 2.2


@dataclass(frozen=True)
class Box:
    """A rectangle: left, bottom, right, top."""

    left: float
    bottom: float
    right: float
    top: float

    def grown(self, by: float) -> Box:
        """The rectangle with a margin on each side."""
        return Box(self.left - by, self.bottom - by, self.right + by, self.top + by)

    def overlaps(self, other: Box) -> bool:
        """Whether the two share an area."""
        return (
            self.left < other.right and other.left < self.right and self.bottom < other.top and other.bottom < self.top
        )

    def inside(self, other: Box) -> bool:
        """Whether it lies within the other."""
        return (
            self.left >= other.left
            and self.right <= other.right
            and self.bottom >= other.bottom
            and self.top <= other.top
        )


@dataclass(frozen=True)
class Label:
    """A text with its size and the points it may stand beside, the best first; ``prefer`` an angle in degrees."""

    text: str
    width: float
    height: float
    anchors: Sequence[tuple[float, float]]
    prefer: float = 45.0


@dataclass(frozen=True)
class Placed:
    """A label with its place, and the point its leader goes to when it stands apart."""

    label: Label
    box: Box
    leader: tuple[float, float] | None = None


@dataclass
class Placement:
    """Collects what is in the way, then places labels one by one within ``frame``."""

    frame: Box
    boxes: list[Box] = field(default_factory=list)
    placed: list[Placed] = field(default_factory=list)
    _starts: npt.NDArray[np.float64] = field(default_factory=lambda: np.empty((0, 2)))
    _ends: npt.NDArray[np.float64] = field(default_factory=lambda: np.empty((0, 2)))

    def add_line(self, points: Iterable[tuple[float, float]]) -> None:
        """A polyline that no label may touch."""
        array = np.asarray(list(points), dtype=float)
        if len(array) > 1:
            self._starts = np.concatenate([self._starts, array[:-1]])
            self._ends = np.concatenate([self._ends, array[1:]])

    def add_box(self, box: Box) -> None:
        """An area that no label may touch."""
        self.boxes.append(box)

    def clear(self, box: Box) -> bool:
        """Whether a rectangle with its clearance touches no line, no area and no label, and is in the frame."""
        grown = box.grown(_CLEARANCE)
        if not box.inside(self.frame) or any(grown.overlaps(other) for other in self.boxes):
            return False
        return not np.any(crosses(self._starts, self._ends, grown))

    def place(self, label: Label) -> Placed | None:
        """Set a label; None when even far out there is no free place (the caption then has to name it)."""
        for distances, apart in ((_DISTANCES, False), (_LEADER_DISTANCES, True)):
            for distance in distances:
                for point in label.anchors:
                    for angle in _angles(label.prefer):
                        box = _beside(point, label, distance, angle)
                        if not self.clear(box):
                            continue
                        found = Placed(label, box, point if apart else None)
                        self.boxes.append(box)
                        self.placed.append(found)
                        return found
        return None


def _angles(prefer: float) -> list[float]:
    """Directions in radians, the preferred first, then by distance from it."""
    steps = sorted(range(_DIRECTIONS), key=lambda step: (min(step, _DIRECTIONS - step), step))
    return [math.radians(prefer) + 2.0 * math.pi * step / _DIRECTIONS for step in steps]


def _beside(point: tuple[float, float], label: Label, distance: float, angle: float) -> Box:
    """The label's rectangle at a distance from a point, its nearest side or corner turned to it."""
    centre_x = point[0] + math.cos(angle) * (distance + label.width / 2 * abs(math.cos(angle)) ** 0.5)
    centre_y = point[1] + math.sin(angle) * (distance + label.height / 2 * abs(math.sin(angle)) ** 0.5)
    return Box(
        centre_x - label.width / 2,
        centre_y - label.height / 2,
        centre_x + label.width / 2,
        centre_y + label.height / 2,
    )


def crosses(start: npt.NDArray[np.float64], end: npt.NDArray[np.float64], box: Box) -> npt.NDArray[np.bool_]:
    """Whether each segment meets the rectangle.

    Clipping by slabs (Liang and Barsky, https://doi.org/10.1145/357332.357333): the parts of a segment between the
    two vertical and the two horizontal sides must have a part in common. ``start``, ``end`` of shape (n, 2).
    """
    low = np.array([box.left, box.bottom])
    high = np.array([box.right, box.top])
    step = end - start
    flat = step == 0.0
    with np.errstate(divide="ignore", invalid="ignore"):
        first, second = (low - start) / step, (high - start) / step
    enter = np.where(flat, -np.inf, np.minimum(first, second))
    leave = np.where(flat, np.inf, np.maximum(first, second))
    missed = flat & ((start < low) | (start > high))
    begin = np.maximum(enter.max(axis=1), 0.0)
    finish = np.minimum(leave.min(axis=1), 1.0)
    result: npt.NDArray[np.bool_] = (begin <= finish) & ~missed.any(axis=1)
    return result

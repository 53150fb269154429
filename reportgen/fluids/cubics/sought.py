"""What a search along lines has found."""

from __future__ import annotations

from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.equilibria import States
from reportgen.fluids.model import Point

__all__ = ["Sought"]

BoolArray = NDArray[np.bool_]

#: Relative difference in temperature or pressure of two states that may be the same.
_ROUNDING = 1e-9


@dataclass
class Sought:
    """Result of a search along N lines: the states; ``below``, ``above`` where the value lies beyond the lower or the
    upper end of the line (temperature or pressure); ``several`` where more than one state has it; ``points`` of the
    states by index, where several were possible.
    """

    states: States
    below: BoolArray
    above: BoolArray
    several: BoolArray
    points: dict[int, list[Point]] = field(default_factory=dict)

    def settle(self) -> None:
        """Mark the states that are not the only ones."""
        for index, points in list(self.points.items()):
            points.sort(key=lambda point: (point.temperature, point.pressure))
            apart = [points[0], *(b for a, b in pairwise(points) if _differ(a, b))]
            self.several[index] = len(apart) > 1
            self.points[index] = sorted(apart, key=lambda point: point.density or 0.0)


def _differ(one: Point, other: Point) -> bool:
    """Whether two points are more than rounding apart."""
    temperature, pressure = other.temperature / one.temperature, other.pressure / one.pressure
    return abs(temperature - 1.0) > _ROUNDING or abs(pressure - 1.0) > _ROUNDING

"""What a search along lines has found."""

from __future__ import annotations

from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.equilibria import States

__all__ = ["Sought"]

BoolArray = NDArray[np.bool_]


@dataclass
class Sought:
    """Result of a search along N lines: the states; ``below``, ``above`` where the value lies beyond the lower or the
    upper end of the line (temperature or pressure); ``several`` where more than one state has it; ``places`` of the
    states [K or Pa] by index, where several were possible.
    """

    states: States
    below: BoolArray
    above: BoolArray
    several: BoolArray
    places: dict[int, list[float]] = field(default_factory=dict)

    def settle(self) -> None:
        """Mark the states that are not the only ones."""
        for index, places in list(self.places.items()):
            places.sort()
            apart = [places[0], *(b for a, b in pairwise(places) if b > a * (1.0 + 1e-9))]
            self.several[index] = len(apart) > 1
            self.places[index] = apart

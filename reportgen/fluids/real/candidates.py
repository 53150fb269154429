"""States that a search has come upon: none, one or several for each element of a batch."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

__all__ = ["BESIDE_LINE", "Candidates", "Chosen"]

FloatArray = NDArray[Any]
IntArray = NDArray[np.intp]
BoolArray = NDArray[np.bool_]

#: States of one element closer than this in ln T and ln ρ are one state, come upon from two sides.
_SAME = 1e-9
#: Distance from a saturation line, in parts of R T or R (of a pressure: of itself), within which a state that is found
#: on neither side of it lies on it: a pseudo-pure fluid has no states between its lines, and next to a critical point
#: the two sides part only by rounding.
BESIDE_LINE = 3e-8


class Chosen(NamedTuple):
    """States of shape (M,): the element each belongs to, temperature [K], pressure [Pa], density [kg/m3], quality [1]
    and densities of the phases [kg/m3] (NaN where they have no meaning), and whether the density is lost in rounding.
    """

    element: IntArray
    temperature: FloatArray
    pressure: FloatArray
    density: FloatArray
    quality: FloatArray
    liquid_density: FloatArray
    vapour_density: FloatArray
    vague: BoolArray

    def take(self, chosen: NDArray[Any] | slice) -> Chosen:
        """Some of them."""
        return Chosen._make(array[chosen] for array in self)


@dataclass
class Candidates:
    """What a search found for a batch of ``size`` elements.

    ``between`` marks elements between the bubble and the dew line of a pseudo-pure fluid. ``least`` and ``greatest``
    are the ends of what the property sought takes on along the line searched [SI]; NaN where that is not known.
    """

    size: int
    between: BoolArray = field(init=False)
    least: FloatArray = field(init=False)
    greatest: FloatArray = field(init=False)
    _parts: list[Chosen] = field(init=False, default_factory=list)

    def __post_init__(self) -> None:
        self.between = np.zeros(self.size, dtype=np.bool_)
        self.least, self.greatest = np.full(self.size, np.nan), np.full(self.size, np.nan)

    def add(
        self,
        element: IntArray,
        temperature: FloatArray,
        pressure: FloatArray,
        density: FloatArray,
        quality: FloatArray | None = None,
        liquid_density: FloatArray | None = None,
        vapour_density: FloatArray | None = None,
        vague: BoolArray | None = None,
    ) -> None:
        """Note states of some elements: T [K], p [Pa], ρ [kg/m3], x [1] and densities of the phases [kg/m3], arrays of
        shape (M,).
        """
        if not element.size:
            return
        nan = np.full(element.size, np.nan)
        self._parts.append(
            Chosen(
                element,
                temperature,
                pressure,
                density,
                nan if quality is None else quality,
                nan if liquid_density is None else liquid_density,
                nan if vapour_density is None else vapour_density,
                np.zeros(element.size, dtype=np.bool_) if vague is None else vague,
            )
        )

    def join(self, other: Candidates, where: IntArray) -> None:
        """Take over what was found for a part of the batch, the elements ``where``."""
        self._parts += [part._replace(element=where[part.element]) for part in other._parts]
        self.between[where] |= other.between
        self.seen(where, other.least, other.greatest)

    def seen(self, where: IntArray, least: FloatArray, greatest: FloatArray) -> None:
        """Widen the range of the property sought [SI] in the elements ``where``."""
        self.least[where] = np.fmin(self.least[where], np.where(np.isfinite(least), least, np.nan))
        self.greatest[where] = np.fmax(self.greatest[where], np.where(np.isfinite(greatest), greatest, np.nan))

    def found(self) -> BoolArray:
        """Which elements have at least one state, shape (size,)."""
        result = np.zeros(self.size, dtype=np.bool_)
        for part in self._parts:
            result[part.element] = True
        return result

    def gather(self) -> Chosen:
        """All states, each once, in the order of the elements and of rising density."""
        if not self._parts:
            nothing = np.empty(0)
            return Chosen._make([np.empty(0, dtype=np.intp), *[nothing] * 6, np.empty(0, dtype=np.bool_)])
        every = Chosen._make(np.concatenate(arrays) for arrays in zip(*self._parts, strict=True))
        every = every.take(np.lexsort((every.density, every.temperature, every.element)))
        same = every.element[1:] == every.element[:-1]
        same &= every.temperature[1:] <= every.temperature[:-1] * (1 + _SAME)
        same &= np.abs(every.density[1:] - every.density[:-1]) <= _SAME * every.density[1:]
        if same.any():
            # of two, the one with a quality: it lies on the line
            drop_second = np.isnan(every.quality[1:]) | ~np.isnan(every.quality[:-1])
            keep = np.ones(every.element.size, dtype=np.bool_)
            keep[1:] &= ~(same & drop_second)
            keep[:-1] &= ~(same & ~drop_second)
            every = every.take(keep)
        return every.take(np.lexsort((every.density, every.element)))

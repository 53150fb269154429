"""States along isobars and isotherms: where enthalpy, entropy, volume or the vapour's share has a given value.

Where an isobar or isotherm crosses the bubble and the dew line once each, its values at the crossings tell liquid, two
phases and vapour apart. One phase is then sought by a bracketed search with the phase known, two phases by Newton's
method from an interpolation between the crossings. Everywhere else, and where that fails, every step of a bracketed
search is a flash of its own.
"""

from __future__ import annotations

from typing import Any, Literal

from numpy.typing import NDArray

from reportgen.fluids.cubics.equilibria import Equilibria, States
from reportgen.fluids.cubics.equilibrium import Pairing
from reportgen.fluids.cubics.fugacity import Side
from reportgen.fluids.cubics.line_search import Search
from reportgen.fluids.cubics.sought import Sought
from reportgen.fluids.cubics.values import Target

__all__ = ["Axis", "Isoline"]

FloatArray = NDArray[Any]

#: What is held: along an isobar the temperature is sought, along an isotherm the pressure.
Axis = Literal["pressure", "temperature"]


class Isoline:
    """Lines of constant pressure or constant temperature.

    Parameters
    ----------
    equilibria : the composition.
    axis : what is constant.
    low, high : ends of the line: temperatures [K] of an isobar, pressures [Pa] of an isotherm.
    """

    def __init__(self, equilibria: Equilibria, axis: Axis, low: float, high: float) -> None:
        self.equilibria = equilibria
        self.axis: Axis = axis
        self.low, self.high = low, high
        # along an isobar values rise with the place, along an isotherm volume and entropy fall
        self.rising = axis == "pressure"

    def find(self, held: FloatArray, name: Target, target: FloatArray, *, thorough: bool = True) -> Sought:
        """States at p [Pa] or T [K], shape (N,), with a value of enthalpy [J/mol], entropy [J/(mol*K)], volume
        [m3/mol] or mass quality [1], between 0 and 1. Unless ``thorough``, lines that reach where a second liquid forms
        are left out: a search around this one takes steps that need not all succeed.
        """
        search = Search(self, held, name, target, thorough)
        search.run()
        search.sought.settle()
        return search.sought

    def coordinates(self, held: FloatArray, place: FloatArray) -> tuple[FloatArray, FloatArray]:
        """T [K] and p [Pa] of what is held and of places along the line."""
        return (place, held) if self.axis == "pressure" else (held, place)

    def place(self, states: Pairing | States) -> FloatArray:
        """T [K] along an isobar, p [Pa] along an isotherm."""
        return states.temperature if self.axis == "pressure" else states.pressure

    def single(self, held: FloatArray, place: FloatArray, side: Side) -> States:
        """States of one phase on a root, at p [Pa] or T [K] held."""
        t, p = self.coordinates(held, place)
        return self.equilibria.single(t, p, self.equilibria.volume(t, p, side))

"""Pairs of properties that need a search for every state that has them, and what becomes of the states found."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import Fault
from reportgen.fluids.model import Limits, Point
from reportgen.fluids.pairs import Elements
from reportgen.fluids.real.candidates import Candidates
from reportgen.fluids.real.ceiling import Ceiling
from reportgen.fluids.real.density import DensitySolver
from reportgen.fluids.real.flash import PressureFlash
from reportgen.fluids.real.helmholtz import Helmholtz
from reportgen.fluids.real.isentrope import IsentropeSearch
from reportgen.fluids.real.isobar import IsobarSearch
from reportgen.fluids.real.isochore import IsochoreSearch
from reportgen.fluids.real.isotherm import IsothermSearch
from reportgen.fluids.real.limits import LOWEST_PRESSURE, Guard
from reportgen.fluids.real.lines import SaturationLines
from reportgen.fluids.real.saturation import SaturationCurves

__all__ = ["SEARCHED_PAIRS", "Found", "Searches"]

FloatArray = NDArray[Any]

_ENERGY = "specific_internal_energy"

#: Pairs found here, in the order of :meth:`Searches.find`.
SEARCHED_PAIRS: tuple[tuple[str, str], ...] = (
    ("pressure", "density"),
    ("pressure", _ENERGY),
    ("temperature", "specific_entropy"),
    ("temperature", "specific_enthalpy"),
    ("temperature", _ENERGY),
    ("density", _ENERGY),
    ("density", "specific_enthalpy"),
    ("density", "specific_entropy"),
    ("specific_enthalpy", "specific_entropy"),
)


class Found(NamedTuple):
    """One state an element, arrays of shape (N,), NaN where there is none or not one alone: temperature [K], pressure
    [Pa], density [kg/m3], quality [1] and the densities of the phases [kg/m3].
    """

    temperature: FloatArray
    pressure: FloatArray
    density: FloatArray
    quality: FloatArray
    liquid_density: FloatArray
    vapour_density: FloatArray


class Searches:
    """The searches of one fluid.

    Parameters
    ----------
    equation, curves, solver, flash : the equation, its saturation curves, its searches for density and from pressure.
    guard, limits : its limits, and the words for what lies beyond.
    triple_pressure : lowest pressure with a liquid [Pa].
    """

    def __init__(
        self,
        equation: Helmholtz,
        curves: SaturationCurves,
        solver: DensitySolver,
        flash: PressureFlash,
        guard: Guard,
        limits: Limits,
        triple_pressure: float,
    ) -> None:
        low, high = limits.minimum_temperature, limits.maximum_temperature
        most = limits.maximum_pressure
        lines = SaturationLines(equation, curves, low)
        self._guard, self._pseudo_pure, self._densest = guard, curves.pseudo_pure, solver.maximum_density
        ceiling = Ceiling(curves, solver, guard.melting_line, low, high, most)
        self._isotherm = IsothermSearch(equation, curves, ceiling, LOWEST_PRESSURE)
        self._isochore = IsochoreSearch(equation, curves, lines, ceiling, low, high)
        self._isobar = IsobarSearch(equation, curves, solver, low, high, triple_pressure, guard.melting_line)
        self._isentrope = IsentropeSearch(
            equation, curves, lines, flash, low, high, LOWEST_PRESSURE, most, solver.maximum_density
        )

    def find(
        self, names: tuple[str, str], first_value: FloatArray, second_value: FloatArray, elements: Elements
    ) -> Found:
        """The one state of each element that has the two properties ``names`` [SI], a pair of SEARCHED_PAIRS.

        Parameters
        ----------
        names : the two properties.
        first_value, second_value : their values [SI], shape (N,), finite.
        elements : takes a fault for each element that has no state within the limits, or more than one.
        """
        first, second = names
        if first == "pressure":
            self._guard.pressure(first_value, elements)
        if first == "temperature":
            self._guard.temperature(first_value, elements)
        for name, value in ((first, first_value), (second, second_value)):
            if name == "density":
                self._guard.density(value, elements, self._densest)
        candidates = Candidates(first_value.size)
        usable = np.flatnonzero(~elements.rejected)
        if usable.size:
            candidates.join(self._search(names, first_value[usable], second_value[usable]), usable)
        return self._settle(candidates, names, first_value, second_value, elements)

    def _search(self, names: tuple[str, str], first_value: FloatArray, second_value: FloatArray) -> Candidates:
        first, second = names
        if first == "temperature":
            return self._isotherm.solve(first_value, second_value, second)
        if first == "density":
            return self._isochore.solve(first_value, second_value, second)
        if second == "density":
            return self._isochore.solve(second_value, first_value, first)
        if first == "pressure":
            return self._isobar.solve(first_value, second_value)
        return self._isentrope.solve(first_value, second_value)

    def _settle(
        self,
        candidates: Candidates,
        names: tuple[str, str],
        first_value: FloatArray,
        second_value: FloatArray,
        elements: Elements,
    ) -> Found:
        """Leave out states beyond the limits; refuse elements left with none, or with several."""
        guard, (first, second) = self._guard, names
        states = candidates.gather()
        beyond = Elements(states.element.size)
        guard.temperature(states.temperature, beyond)
        guard.pressure(states.pressure, beyond)
        guard.melting(states.pressure, states.temperature, beyond)
        valid = states.take(~beyond.rejected)
        count = np.bincount(valid.element, minlength=candidates.size)
        start = np.cumsum(count) - count

        def several(i: int) -> Fault:
            mine = valid.take(slice(start[i], start[i] + count[i]))
            roots = tuple(Point(float(t), float(p), float(rho)) for t, p, rho in zip(*mine[1:4], strict=True))
            single_phase = not ((mine.quality > 0) & (mine.quality < 1)).any()
            return guard.several(first, first_value[i], second, second_value[i], roots, single_phase)

        elements.reject(count > 1, several)
        vague = np.zeros(candidates.size, dtype=np.bool_)
        vague[valid.element[valid.vague]] = True
        elements.reject(vague, lambda i: guard.vague(first, first_value[i], second, second_value[i]))
        none = count == 0
        if none.any():
            first_fault: dict[int, Fault] = {}
            for index, fault in beyond.faults.items():
                first_fault.setdefault(int(states.element[index]), fault)
            outside = np.zeros(candidates.size, dtype=np.bool_)
            outside[list(first_fault)] = True
            elements.reject(none & outside, lambda i: first_fault[i])
            self._explain(candidates, none, names, first_value, second_value, elements)
        single = valid.take(count[valid.element] == 1)
        return Found(*(_place(part, single.element, candidates.size) for part in single[1:7]))

    def _explain(
        self,
        candidates: Candidates,
        none: NDArray[np.bool_],
        names: tuple[str, str],
        first_value: FloatArray,
        second_value: FloatArray,
        elements: Elements,
    ) -> None:
        """Say why elements have no state, within the limits or beyond them."""
        guard = self._guard
        held, sought, held_value, sought_value = *names, first_value, second_value
        if names == ("pressure", "density"):
            held, sought, held_value, sought_value = sought, held, sought_value, held_value
        least, greatest = candidates.least, candidates.greatest
        elements.reject(
            none & candidates.between, lambda i: guard.between_lines(held, held_value[i], sought, sought_value[i])
        )
        elements.reject(
            none & ((sought_value < least) | (sought_value > greatest)),
            lambda i: guard.beyond(held, held_value[i], sought, sought_value[i], least[i], greatest[i]),
        )
        elements.reject(none, lambda i: guard.none(held, held_value[i], sought, sought_value[i]))


def _place(values: FloatArray, where: NDArray[np.intp], size: int) -> FloatArray:
    result = np.full(size, np.nan)
    result[where] = values
    return result

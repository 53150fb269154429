"""Pairs of properties that need a search for every state that has them, and what becomes of the states found."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import Fault
from reportgen.fluids.model import Limits, Point
from reportgen.fluids.pairs import Elements
from reportgen.fluids.real.candidates import Candidates, Chosen
from reportgen.fluids.real.ceiling import Ceiling
from reportgen.fluids.real.density import DensitySolver
from reportgen.fluids.real.flash import Caloric
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
#: |p/p_c − 1| up to which a search that found nothing is repeated.
_NEAR_CRITICAL = 0.03

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
    equation, curves, solver : the equation, its saturation curves, its search for density.
    guard, limits : its limits, and the words for what lies beyond.
    triple_pressure : lowest pressure with a liquid [Pa].
    """

    def __init__(
        self,
        equation: Helmholtz,
        curves: SaturationCurves,
        solver: DensitySolver,
        guard: Guard,
        limits: Limits,
        triple_pressure: float,
    ) -> None:
        low, high = limits.minimum_temperature, limits.maximum_temperature
        most = limits.maximum_pressure
        lines = SaturationLines(equation, curves, low)
        self._guard, self._densest, self._top_pressure = guard, solver.maximum_density, curves.top_pressure
        ceiling = Ceiling(curves, solver, guard.melting_line, low, high, most)
        self._isotherm = IsothermSearch(equation, curves, ceiling, LOWEST_PRESSURE)
        self._isochore = IsochoreSearch(equation, curves, lines, ceiling, low, high)
        self._isobar = IsobarSearch(equation, curves, lines, solver, low, high, triple_pressure, guard.melting_line)
        self._isentrope = IsentropeSearch(equation, curves, lines, low, high, LOWEST_PRESSURE, solver.maximum_density)

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
        guard, (first, second) = self._guard, names
        valid, between = self._all(names, first_value, second_value, elements)
        count = np.bincount(valid.element, minlength=elements.size)
        # an isotherm can pass between the lines of a pseudo-pure fluid and reach the same value in its liquid
        between &= (first == "temperature") & (count > 0)
        start = np.cumsum(count) - count

        def several(i: int) -> Fault:
            mine = valid.take(slice(start[i], start[i] + count[i]))
            told = mine.take(~mine.vague)
            roots = tuple(Point(float(t), float(p), float(rho)) for t, p, rho in zip(*told[1:4], strict=True))
            qualities = tuple(told.quality.tolist())
            more = int(count[i]) - len(roots)
            return guard.several(first, first_value[i], second, second_value[i], roots, qualities, more, between[i])

        elements.reject((count > 1) | between, several)
        vague = np.zeros(elements.size, dtype=np.bool_)
        vague[valid.element[valid.vague]] = True
        elements.reject(vague, lambda i: guard.vague(first, first_value[i], second, second_value[i]))
        single = valid.take(count[valid.element] == 1)
        return Found(*(_place(part, single.element, elements.size) for part in single[1:7]))

    def every(
        self, names: tuple[str, str], first_value: FloatArray, second_value: FloatArray, elements: Elements
    ) -> Chosen:
        """All states within the limits that have the two properties [SI], in the order of the elements and of rising
        density. Parameters as in :meth:`find`; ``elements`` takes a fault where there is none.
        """
        return self._all(names, first_value, second_value, elements)[0]

    def _all(
        self, names: tuple[str, str], first_value: FloatArray, second_value: FloatArray, elements: Elements
    ) -> tuple[Chosen, NDArray[np.bool_]]:
        """All states, and which elements have one between the lines of a pseudo-pure fluid, which is not given."""
        guard, (first, second) = self._guard, names
        if first == "pressure":
            guard.pressure(first_value, elements)
        if first == "temperature":
            guard.temperature(first_value, elements)
        for name, value in ((first, first_value), (second, second_value)):
            if name == "density":
                guard.density(value, elements, self._densest)
        candidates = Candidates(first_value.size)
        usable = np.flatnonzero(~elements.rejected)
        if usable.size:
            candidates.join(self._search(names, first_value[usable], second_value[usable]), usable)
        states = candidates.gather()
        beyond = Elements(states.element.size)
        guard.temperature(states.temperature, beyond)
        guard.pressure(states.pressure, beyond)
        guard.melting(states.pressure, states.temperature, beyond)
        valid = states.take(~beyond.rejected)
        none = np.bincount(valid.element, minlength=candidates.size) == 0
        if none.any():
            which = np.full(candidates.size, -1)
            rejected = np.flatnonzero(beyond.rejected)[::-1]
            which[states.element[rejected]] = rejected
            elements.reject(none & (which >= 0), lambda i: beyond.faults[int(which[i])])
            self._explain(candidates, none, names, first_value, second_value, elements)
        return valid, candidates.between

    def complete(self, result: Caloric, pressure: FloatArray, target: FloatArray, name: str) -> None:
        """Search once more, by bisection, for states that a flash has not found close to the critical pressure, or has
        put between the lines of a pseudo-pure fluid. There saturation is known to some digits fewer.

        Parameters
        ----------
        result : of the flash; altered where a state is found.
        pressure, target : p [Pa] and the property ``name`` [SI], shape (N,).
        """
        doubtful = (np.abs(pressure / self._top_pressure - 1) < _NEAR_CRITICAL) | result.between
        where = np.flatnonzero(~result.found & doubtful)
        if not where.size:
            return
        states = self._isobar.solve(pressure[where], target[where], name).gather()
        at = where[states.element]
        for flag in (result.between, result.cold, result.hot):
            flag[at] = False
        result.found[at] = True
        result.temperature[at], result.density[at], result.quality[at] = states[1], states[3], states[4]
        result.liquid_density[at], result.vapour_density[at] = states[5], states[6]

    def _search(self, names: tuple[str, str], first_value: FloatArray, second_value: FloatArray) -> Candidates:
        first, second = names
        if first == "temperature":
            return self._isotherm.solve(first_value, second_value, second)
        if first == "density":
            return self._isochore.solve(first_value, second_value, second)
        if second == "density":
            return self._isochore.solve(second_value, first_value, first)
        if first == "pressure":
            return self._isobar.solve(first_value, second_value, second)
        return self._isentrope.solve(first_value, second_value)

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

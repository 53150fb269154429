"""Few states at a time, solved one after the other in plain floats: the entrance to this folder."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.fluids.model import Limits
from reportgen.fluids.real.density import DensitySolver
from reportgen.fluids.real.helmholtz import Helmholtz
from reportgen.fluids.real.melting import MeltingLine
from reportgen.fluids.real.saturation import SaturationCurves
from reportgen.fluids.real.scalar.curves import ScalarCurves
from reportgen.fluids.real.scalar.density import ScalarDensity
from reportgen.fluids.real.scalar.equation import ScalarEquation
from reportgen.fluids.real.scalar.pairs import Answer, ScalarPairs, Single
from reportgen.fluids.state import PHASE_TYPE, SingleState, State

__all__ = ["MOST", "FewStates"]

#: Up to this number of states, one after the other is faster than the vectorised branch: measured, they cost the same
#: at 8 (R134a, quiet machine) to 16 (nitrogen, busy machine) states by pressure and temperature.
MOST = 8

#: Whole numbers that are floats too.
_LARGEST_INTEGER = 2**53


class FewStates:
    """Answers calls with few states, all of them ordinary; None to all others.

    Parameters
    ----------
    equation, curves, solver, limits, triple_pressure, melting_line : of the fluid, as for the vectorised branch; the
        equation with its final zeros.
    """

    def __init__(
        self,
        equation: Helmholtz,
        curves: SaturationCurves,
        solver: DensitySolver,
        limits: Limits,
        triple_pressure: float,
        melting_line: MeltingLine | None,
    ) -> None:
        single = ScalarEquation(
            equation.products,
            equation.singular_terms,
            equation.ideal_sum,
            reducing_temperature=equation.reducing_temperature,
            reducing_density=equation.reducing_density,
            gas_constant=equation.gas_constant,
        )
        lines = ScalarCurves(curves)
        density = ScalarDensity(single, lines, solver)
        self._pairs = pairs = ScalarPairs(single, lines, density, limits, triple_pressure, melting_line)
        self._solvers: dict[tuple[str, ...], tuple[Callable[[float, float], Answer], bool]] = {}
        for (first, second), solve in pairs.solvers.items():
            self._solvers[first, second] = solve, False
            self._solvers[second, first] = solve, True

    def at(self, given: Mapping[str, ArrayLike]) -> State | None:
        """The State fixed by two properties [SI], as by ``RealFluid.at``; None if that is no case for this branch."""
        known = self._solvers.get(tuple(given))
        if known is None:
            return None
        solve, swapped = known
        first, second = given.values()
        if swapped:
            first, second = second, first
        a, b = _number(first), _number(second)
        try:
            if a is None or b is None:
                return self._several(solve, first, second)
            answer = solve(a, b)
        except ArithmeticError:
            return None
        if answer is None:
            return None
        return self._single(answer)

    def _single(self, answer: Single) -> SingleState:
        values, phases = answer
        fill = self._pairs.fill
        return SingleState(values, lambda name: fill(name, values, phases))

    def _several(self, solve: Callable[[float, float], Answer], first: ArrayLike, second: ArrayLike) -> State | None:
        """A State of up to MOST elements; None where there are more, or one of them is not ordinary."""
        if not (_is_small(first) and _is_small(second)):
            return None
        try:
            a, b = np.broadcast_arrays(first, second)
        except ValueError:
            return None
        if not 0 < a.size <= MOST:
            return None
        answers: list[Single] = []
        for x, y in zip(a.ravel().tolist(), b.ravel().tolist(), strict=True):
            answer = solve(x + 0.0, y + 0.0)
            if answer is None:
                return None
            answers.append(answer)

        def fill(name: str) -> dict[str, NDArray[Any]]:
            found = [self._pairs.fill(name, *answer) for answer in answers]
            return {key: _column(key, found) for key in found[0]}

        names = [name for name in answers[0][0] if all(name in values for values, _ in answers)]
        known = [values for values, _ in answers]
        return State(a.shape, {name: _column(name, known) for name in names}, fill)

    def saturation(self, temperature: ArrayLike | None, pressure: ArrayLike | None) -> tuple[State, State] | None:
        """Saturated liquid and vapour at a temperature [K] or a pressure [Pa], for one of them given as a number."""
        t, p = _number(temperature), _number(pressure)
        if (t is None) == (p is None):
            return None
        both = self._pairs.saturation(t, p)
        if both is None:
            return None
        return self._end(both, both[0]), self._end(both, both[1])

    def _end(self, both: tuple[Single, Single], this: Single) -> SingleState:
        """One of two saturated states; enthalpies and entropies are computed for both together."""
        pairs = self._pairs
        values, phases = this

        def fill(name: str) -> dict[str, Any]:
            if name in _FIRST_ORDER and both[0][0]["temperature"] == both[1][0]["temperature"]:
                pairs.fill_both(*both)
                return {}
            return pairs.fill(name, values, phases)

        return SingleState(values, fill)


#: Fields that need no second derivatives of the equation.
_FIRST_ORDER = frozenset(("specific_enthalpy", "specific_entropy", "specific_internal_energy"))


def _column(name: str, values: Sequence[Mapping[str, Any]]) -> NDArray[Any]:
    """One field of several states as an array."""
    return np.array([each[name] for each in values], dtype=PHASE_TYPE if name == "phase" else np.float64)


def _number(value: object) -> float | None:
    """A plain number as a float without a signed zero; None for anything else."""
    kind = type(value)
    if kind is float:
        return value + 0.0  # type: ignore[operator]
    if kind is np.float64:
        return float(value) + 0.0  # type: ignore[arg-type]
    if kind is int and -_LARGEST_INTEGER < value < _LARGEST_INTEGER:  # type: ignore[operator]
        return float(value)  # type: ignore[arg-type]
    return None


def _is_small(value: object) -> bool:
    """Whether a value is a number, an array of floats, or a flat list of numbers, of at most MOST elements."""
    if isinstance(value, np.ndarray):
        return value.dtype == np.float64 and value.size <= MOST
    if isinstance(value, (list, tuple)):
        return len(value) <= MOST and all(_number(each) is not None for each in value)
    return _number(value) is not None

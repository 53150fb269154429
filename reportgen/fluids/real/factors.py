"""Families of one-dimensional factors of which almost all terms of Helmholtz-energy equations are products.

Every term n·F(δ)·G(τ) of the kinds carried has factors of one form, x standing for δ or τ::

    F(x) = x^e · exp[ −g x^l − η (x − ε)² + 1/(b + c (x − ε)²) ]

the last summand only where b ≠ 0. Terms share many factors, so each distinct one is computed once.
"""

from __future__ import annotations

from dataclasses import astuple, dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.workspace import Workspace

__all__ = ["Factor", "FactorSet"]

FloatArray = NDArray[Any]

_workspace = Workspace()
#: Natural logarithm of what counts as nothing.
_NEGLIGIBLE = -250.0


@dataclass(frozen=True)
class Factor:
    """Parameters of one factor, dimensionless; in order: e, g, l, η, ε, b, c."""

    exponent: float
    rate: float = 0.0
    power: float = 0.0
    width: float = 0.0
    centre: float = 0.0
    offset: float = 0.0
    slope: float = 0.0

    @property
    def sort_key(self) -> tuple[object, ...]:
        """Plain factors first, then those with an exponential, a Gaussian, an inverse parabola: each a run of rows."""
        kind = 3 if self.offset else 2 if self.width else 1 if self.rate else 0
        return (kind, self.power, *astuple(self))


class FactorSet:
    """Distinct factors, evaluated together with their first two derivatives.

    Parameters
    ----------
    factors : the factors, in any order, repeats allowed. ``rows[i]`` is the row of the i-th one in the result.
    dtype : floating type of the calculation; extended precision serves the fitting of saturation expansions.
    role : sets of different roles may be in use at once, of the same role one after the other.
    """

    def __init__(self, factors: list[Factor], dtype: type[np.floating[Any]] = np.float64, role: str = "") -> None:
        self._dtype, self._role = dtype, role
        distinct = sorted(set(factors), key=lambda factor: factor.sort_key)
        position = {factor: row for row, factor in enumerate(distinct)}
        self.rows = [position[factor] for factor in factors]
        self.count = len(distinct)

        def column(name: str, chosen: list[Factor]) -> FloatArray:
            return np.array([[getattr(factor, name)] for factor in chosen], dtype=dtype).reshape(-1, 1)

        self.exponent = column("exponent", distinct)
        self._exponent_pair = self.exponent * (self.exponent - 1)
        kinds = [factor.sort_key[0] for factor in distinct]

        def run(kind: int) -> slice:
            return slice(kinds.index(kind), kinds.index(kind) + kinds.count(kind)) if kind in kinds else slice(0, 0)

        self._exponential, self._gaussian, self._inverse = run(1), run(2), run(3)
        chosen = distinct[self._exponential]
        powers = sorted({factor.power for factor in chosen})
        self._powers = np.array(powers, dtype=dtype).reshape(-1, 1)
        self._power_of_row = np.array([powers.index(factor.power) for factor in chosen], dtype=np.intp)
        rate, power = column("rate", chosen), column("power", chosen)
        self._rate = None if (rate == 1).all() else rate
        self._power = power
        self._power_squared = power * power
        chosen = distinct[self._gaussian]
        self._width, self._centre = column("width", chosen), column("centre", chosen)
        chosen = distinct[self._inverse]
        self._inverse_parameters = tuple(column(name, chosen) for name in ("width", "centre", "offset", "slope"))

    def values(self, x: FloatArray, log_x: FloatArray, order: int = 2) -> list[FloatArray]:
        """F and, up to the order wanted, x F′ and x² F″ of every distinct factor.

        Parameters
        ----------
        x, log_x : the variable and its logarithm [1], shape (N,).
        order : of the highest derivative, 0, 1 or 2.

        Returns
        -------
        arrays of shape (count, N), valid until the next call.
        """
        # With P = x F'/F: x F' = F P and x² F'' = F (P² − P + x P').
        size = x.size
        log_f = self._array("value", size)
        np.multiply(self.exponent, log_x, out=log_f)
        first = None
        if order:
            first = self._array("first", size)
            first[:] = self.exponent
        rows = self._exponential
        decay = gauss = correction = None
        if rows.stop:
            decay = self._array("decay", size, rows)
            np.take(x**self._powers, self._power_of_row, axis=0, out=decay, mode="clip")
            if self._rate is not None:
                decay *= self._rate
            log_f[rows] -= decay
            if first is not None:
                decay *= self._power
                first[rows] -= decay
        rows = self._gaussian
        if rows.stop:
            shift = x - self._centre
            gauss = self._width * shift
            shift *= gauss
            log_f[rows] -= shift
            if first is not None:
                gauss *= 2 * x
                first[rows] -= gauss
        if self._inverse.stop:
            correction = self._add_inverse(x, log_f, first)
        # Denormal numbers would be slow, and change nothing.
        np.maximum(log_f, _NEGLIGIBLE, out=log_f)
        value = np.exp(log_f, out=log_f)
        if first is None:
            return [value]
        if order == 1:
            first *= value
            return [value, first]
        second = self._array("second", size)
        np.multiply(first, first, out=second)
        second -= first
        if decay is not None:
            decay *= self._power
            second[self._exponential] -= decay
        if gauss is not None:
            gauss += 2 * self._width * (x * x)
            second[self._gaussian] -= gauss
        if correction is not None:
            second[self._inverse] += correction
        first *= value
        second *= value
        return [value, first, second]

    def _array(self, name: str, size: int, rows: slice | None = None) -> FloatArray:
        count = self.count if rows is None else rows.stop - rows.start
        return _workspace.array(self._role + name, count, size, self._dtype)

    def _add_inverse(self, x: FloatArray, log_f: FloatArray, first: FloatArray | None) -> FloatArray | None:
        """Contribution of rows with an inverse parabola to ln F and, if wanted, P; returns x P' of those rows."""
        width, centre, offset, slope = self._inverse_parameters
        shift = x - centre
        parabola = offset + slope * shift**2
        log_f[self._inverse] += 1 / parabola - width * shift**2
        if first is None:
            return None
        first[self._inverse] -= 2 * x * shift * (width + slope / parabola**2)
        twice = 2 * x * (2 * x - centre)
        result: FloatArray = 8 * (slope * x * shift) ** 2 / parabola**3 - twice * (width + slope / parabola**2)
        return result

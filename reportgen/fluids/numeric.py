"""What counts as a number where a model takes one: of Python or of numpy, but no truth value and no text."""

from __future__ import annotations

import math
from numbers import Real

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import Fault, InputError

__all__ = ["finite_number", "number", "numbers"]


def number(value: object) -> float | None:
    """The value as a float [in the unit it is given in], or None.

    Real numbers of any type are taken, and arrays of shape () that hold one.
    """
    if isinstance(value, np.ndarray) and value.shape == ():
        value = value[()]
    if isinstance(value, bool) or not isinstance(value, Real):
        return None
    try:
        return float(value)
    except OverflowError:  # a whole number beyond the largest float
        return None


def finite_number(value: object) -> float | None:
    """As :func:`number` [in the unit it is given in], and None for infinite ones and NaN too."""
    found = number(value)
    return found if found is not None and math.isfinite(found) else None


def numbers(words: str, unit: str, value: ArrayLike) -> NDArray[np.float64]:
    """A copy of a number or an array of numbers as floats, in its shape; zero without a sign.

    Parameters
    ----------
    words : what it is, for the message, such as "specific enthalpy".
    unit : its unit, for the message.
    value : what was given [``unit``].

    Raises
    ------
    InputError : texts, truth values, complex numbers, rows of unequal length, anything else that is no number.
    """
    try:
        array = np.array(value)
    except ValueError:  # rows of unequal length
        array = np.empty(0, dtype=object)
    # Complex numbers would lose their imaginary part, truth values and texts would pass for numbers.
    if array.dtype.kind not in "iuf":
        raise InputError(
            Fault(
                f"The {words} is not a number or an array of numbers.",
                found=repr(value)[:80],
                expected=f"numbers in {unit}",
            )
        )
    return array.astype(np.float64, copy=False) + 0.0

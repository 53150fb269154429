"""Reading the pair of properties that fixes a state, and keeping account of elements that have none."""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterator, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from itertools import islice

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import Fault, InputError, RangeError
from reportgen.fluids.model import Errors, Point
from reportgen.fluids.numeric import numbers

__all__ = ["PROPERTIES", "Elements", "Faults", "Pair", "SeveralStates", "check_errors", "in_words", "read_pair"]

#: Properties that may be given, with their SI unit.
PROPERTIES: dict[str, str] = {
    "pressure": "Pa",
    "temperature": "K",
    "specific_enthalpy": "J/kg",
    "specific_entropy": "J/(kg*K)",
    "specific_internal_energy": "J/kg",
    "quality": "1",
    "density": "kg/m3",
    "specific_volume": "m3/kg",
    "superheat": "K",
    "subcooling": "K",
}

#: SI value of one of the units in which messages speak of a property, and that unit.
_SPOKEN = {
    "pressure": (1e5, "bar"),
    "specific_enthalpy": (1e3, "kJ/kg"),
    "specific_entropy": (1e3, "kJ/(kg*K)"),
    "specific_internal_energy": (1e3, "kJ/kg"),
}
#: Pressures [Pa] below this are told in Pa: there bar gives only zeros.
_LEAST_BAR = 100.0

#: Faults named in full when an error is raised; the rest is counted.
_NAMED_FAULTS = 3


@dataclass(frozen=True)
class SeveralStates(Fault):
    """Two properties that more than one state shares.

    ``roots`` are these states, temperature [K], pressure [Pa] and density [kg/m3] of each, in the order of rising
    density; temperature and density together tell them apart.
    """

    roots: tuple[Point, ...] = ()


@dataclass(frozen=True)
class Pair:
    """Two properties as flat arrays of equal length, with the shape to give back.

    ``names`` is in the order of the model's own list of pairs; a specific volume given is here a density.
    """

    names: tuple[str, str]
    first: NDArray[np.float64]
    second: NDArray[np.float64]
    shape: tuple[int, ...]


def read_pair(given: Mapping[str, ArrayLike], supported: Collection[tuple[str, str]], title: str) -> Pair:
    """Check the two properties given to a model and bring them to one shape.

    Parameters
    ----------
    given : keyword arguments of ``Fluid.at``; names of PROPERTIES [SI].
    supported : pairs of names the model carries; ``specific_volume`` is turned into ``density`` before the look-up.
    title : name of the fluid, for messages.

    Raises
    ------
    InputError : unknown or repeated property, not exactly two, unsupported pair, values that are no numbers, shapes
        that do not broadcast.
    """
    for name in given:
        if name not in PROPERTIES:
            near = get_close_matches(name, PROPERTIES, n=1)
            hint = f"Did you mean {near[0]}?" if near else None
            raise InputError(
                Fault(
                    "This is not a property that fixes a state.", found=name, expected=", ".join(PROPERTIES), hint=hint
                )
            )
    if len(given) != 2:
        found = ", ".join(given) or "nothing"
        raise InputError(Fault(f"A state of {title} is fixed by exactly two properties.", found=found))
    values = {}
    for name, value in given.items():
        array = numbers(name.replace("_", " "), PROPERTIES[name], value)
        if name == "specific_volume":
            with np.errstate(divide="ignore", over="ignore"):
                array = 1.0 / array
            name = "density"
        values[name] = array
    names = tuple(values)
    if names not in supported:
        names = names[::-1]
        if names not in supported:
            offered = "; ".join(f"{a} with {b}" for a, b in supported)
            raise InputError(
                Fault(f"{title} cannot be evaluated from this pair.", found=" with ".join(given), expected=offered)
            )
    first, second = values[names[0]], values[names[1]]
    if first.shape != second.shape:
        try:
            first, second = (np.array(array) for array in np.broadcast_arrays(first, second))
        except ValueError:
            raise InputError(
                Fault(
                    "The two properties have shapes that do not fit together.", found=f"{first.shape}, {second.shape}"
                )
            ) from None
    return Pair((names[0], names[1]), first.reshape(-1), second.reshape(-1), first.shape)


def in_words(name: str, value: float, digits: int = 9) -> str:
    """A property with the unit in which an engineer reads it: bar (absolute), kJ/kg; K with degC behind it.

    Parameters
    ----------
    name : one of PROPERTIES.
    value : the property [SI].
    digits : significant digits.
    """
    if name == "temperature" and np.isfinite(value):
        return f"{value:.{digits}g} K ({value - 273.15:.6g} degC)"
    factor, unit = _SPOKEN.get(name, (1.0, PROPERTIES[name]))
    if name == "pressure" and abs(value) < _LEAST_BAR:
        factor, unit = 1.0, "Pa"
    return f"{value / factor:.{digits}g}" + ("" if unit == "1" else f" {unit}")


def check_errors(errors: str) -> None:
    """Refuse anything but the two ways to treat elements that cannot be evaluated. Raises InputError."""
    if errors not in ("raise", "mask"):
        raise InputError(Fault("Errors are raised or masked.", found=repr(errors), expected='"raise", "mask"'))


class Faults(Mapping[int, Fault]):
    """Faults by flat index, in rising order. Each is put into words when it is read: a batch can have millions."""

    def __init__(self, size: int) -> None:
        self._reason = np.zeros(size, dtype=np.intp)
        self._describe: list[Callable[[int], Fault]] = []
        self._worded: dict[int, Fault] = {}

    def put(self, where: NDArray[np.intp], describe: Callable[[int], Fault]) -> None:
        """Note that ``describe(index)`` gives the fault of each of the elements ``where`` [1]."""
        self._describe.append(describe)
        self._reason[where] = len(self._describe)

    def __setitem__(self, index: int, fault: Fault) -> None:
        self.put(np.array([index]), lambda _: fault)

    def __getitem__(self, index: int) -> Fault:
        if index not in self._worded:
            reason = int(self._reason[index]) if 0 <= index < self._reason.size else 0
            if not reason:
                raise KeyError(index)
            self._worded[index] = self._describe[reason - 1](index)
        return self._worded[index]

    def __iter__(self) -> Iterator[int]:
        return iter(np.flatnonzero(self._reason).tolist())

    def __len__(self) -> int:
        return int(np.count_nonzero(self._reason)) if self._describe else 0

    def __repr__(self) -> str:
        first = ", ".join(f"{index}: {str(self[index])!r}" for index in islice(self, _NAMED_FAULTS))
        return f"{{{first}{', ...' if len(self) > _NAMED_FAULTS else ''}}} ({len(self)} of {self._reason.size})"


class Elements:
    """Which elements of a flat batch could not be evaluated, and why.

    The first fault of an element stands; NaN given is no fault. ``rejected`` is true in elements with a fault.
    """

    def __init__(self, size: int) -> None:
        self.size = size
        self.faults = Faults(size)
        self.rejected: NDArray[np.bool_] = np.zeros(size, dtype=np.bool_)

    def reject(self, where: NDArray[np.bool_], describe: Callable[[int], Fault]) -> None:
        """Mark the elements where ``where`` is true; ``describe(index)`` gives the fault of each newly marked one. It
        is called when the fault is read: what it looks at must not be altered later.
        """
        if not where.any():
            return
        self.faults.put(np.flatnonzero(where & ~self.rejected), describe)
        self.rejected |= where

    def take_over(self, part: Elements, where: NDArray[np.intp]) -> None:
        """Mark elements of this batch that were marked in a part of it, the elements ``where`` [1]."""
        if not part.rejected.any():
            return
        position = np.zeros(self.size, dtype=np.intp)
        position[where] = np.arange(where.size)
        marked = np.zeros(self.size, dtype=np.bool_)
        marked[where] = part.rejected
        self.reject(marked, lambda i: part.faults[int(position[i])])

    def finish(self, errors: Errors) -> None:
        """Raise a RangeError that names the first failing elements, if there are any and errors are to be raised."""
        if not self.faults or errors == "mask":
            return
        first = list(islice(self.faults, _NAMED_FAULTS))
        faults = [self.faults[index] for index in first]
        if self.size > 1:
            positions = ", ".join(str(index) for index in first)
            count = len(self.faults)
            more = "" if count <= _NAMED_FAULTS else ", ..."
            faults.append(Fault(f"{count} of {self.size} elements cannot be evaluated: flat index {positions}{more}."))
        raise RangeError(faults)

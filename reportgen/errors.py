"""Errors that an engineer can act on.

A :class:`Fault` is one thing that is wrong, with the place where it stands and what would be right.
A :class:`ReportgenError` carries one or more faults; its subclasses tell what kind of trouble it is and
which exit status the command line answers with.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

__all__ = [
    "Fault",
    "InputError",
    "RangeError",
    "ReportgenError",
    "SolutionError",
]


@dataclass(frozen=True)
class Fault:
    """One thing that is wrong.

    ``message`` is a full sentence without the place. ``path`` is the value's path (``states.1.pressure``),
    ``found`` what was found there, ``expected`` what would do, ``hint`` the next step or the nearest valid name.
    ``numbers`` are values that were found, by path [SI]; who knows the units of display writes them into ``found``.
    """

    message: str
    path: str | None = None
    file: str | None = None
    line: int | None = None
    column: int | None = None
    found: str | None = None
    expected: str | None = None
    hint: str | None = None
    numbers: tuple[tuple[str, float], ...] = ()

    def at(self, file: str | None, line: int | None, column: int | None = None) -> Fault:
        """The same fault with its place in a file filled in."""
        return replace(self, file=file, line=line, column=column)

    @property
    def place(self) -> str:
        """``file:line:column`` as far as known, else an empty string."""
        parts = [self.file, self.line, self.column]
        known = []
        for part in parts:
            if part is None:
                break
            known.append(str(part))
        return ":".join(known)

    def __str__(self) -> str:
        head = ": ".join(part for part in (self.place, self.path) if part)
        text = f"{head}: {self.message}" if head else self.message
        found = self.found or ", ".join(f"{path} = {value:.6g}" for path, value in self.numbers)
        if found:
            text += f" Found: {found}."
        if self.expected is not None:
            text += f" Would do: {self.expected}."
        if self.hint is not None:
            text += f" {self.hint}"
        return text


class ReportgenError(Exception):
    """Base of every error the program raises on purpose."""

    exit_status = 2

    def __init__(self, faults: Fault | str | Iterable[Fault]) -> None:
        if isinstance(faults, str):
            faults = (Fault(faults),)
        elif isinstance(faults, Fault):
            faults = (faults,)
        self.faults: tuple[Fault, ...] = tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))


class InputError(ReportgenError, ValueError):
    """The input is wrong: syntax, names, units, values."""

    exit_status = 2


class RangeError(ReportgenError, ValueError):
    """A property was asked for outside what its model allows."""

    exit_status = 3


class SolutionError(ReportgenError, ArithmeticError):
    """The input is well formed but the plant cannot be solved: too little, too much, or no convergence."""

    exit_status = 3

"""How a quantity that cannot be read is refused: one exception, and the words its faults are made of."""

from __future__ import annotations

import difflib
from collections.abc import Collection

from reportgen.errors import Fault
from reportgen.quantities.units import usual_units

__all__ = ["Refused", "example", "nearest", "quoted", "short", "words"]

_SHORT = 40


class Refused(Exception):
    """Leaves the reading of one text with its fault."""

    def __init__(self, message: str, found: str | None = None, expected: str | None = None, hint: str | None = None):
        super().__init__(message)
        self.fault = Fault(message, found=found, expected=expected, hint=hint)


_EXAMPLES = {
    "temperature": "400 degC",
    "temperature_difference": "10 K",
    "pressure": '7.2 bar(g)" or "8.2 bar(a)',
    "pressure_difference": "0.3 bar",
    "efficiency": "85 %",
    "ratio": "3.2",
}


#: Degrees without the sign of degrees, as often typed.
_DEGREES = {"C": "degC", "F": "degF", "R": "degR"}


def words(dimension: str) -> str:
    """A dimension with its article: "a mass flow", "an entropy flow"."""
    return ("an " if dimension[0] in "aeiou" else "a ") + dimension.replace("_", " ")


def example(allowed: tuple[str, ...]) -> str:
    """A quantity of each allowed dimension as a file would write it."""
    texts = [_EXAMPLES.get(dimension, f"1.5 {usual_units(dimension)[0]}") for dimension in allowed]
    return " or ".join(f'"{text}"' for text in texts)


def short(text: object) -> str:
    """The text, cut where it is too long for a message, without signs that cannot be printed."""
    if isinstance(text, int) and text.bit_length() > 4 * _SHORT:
        return f"a whole number of {text.bit_length()} bits"  # Python refuses to print very long ones
    # A sign that cannot be seen, or that turns the writing round, would falsify the message on the terminal.
    plain = "".join(sign if sign.isprintable() else "\N{REPLACEMENT CHARACTER}" for sign in str(text)[: _SHORT + 1])
    return plain if len(plain) <= _SHORT else plain[:_SHORT] + "…"


def quoted(content: object) -> str:
    """What was found, with quotes where the file has them."""
    if isinstance(content, str):
        return f'"{short(content)}"'
    return short(content) if isinstance(content, int) else short(repr(content))


def nearest(text: object, choices: Collection[str]) -> str | None:
    """A hint that names the closest choice, first without regard to case."""
    wanted = short(text)
    if _DEGREES.get(wanted.upper(), "") in choices:
        return f'Nearest: "{_DEGREES[wanted.upper()]}".'
    same = [choice for choice in choices if choice.lower() == wanted.lower()]
    close = same or difflib.get_close_matches(wanted, list(choices), n=1, cutoff=0.6)
    return f'Nearest: "{close[0]}".' if close else None

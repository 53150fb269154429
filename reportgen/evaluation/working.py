"""The working in LaTeX: the templates of the balances with symbols, and with numbers, in their places.

A template names a value by its path between ⟦ and ⟧. Symbols come from the glossary, numbers from the display of the
calculation's units (temperatures in K or °R: in a quotient nothing else is right). Every number is rounded once, from
the unrounded value: results to the digits their uncertainty allows, numbers inside a formula to six significant
digits, so that a reader can redo the step.
"""

from __future__ import annotations

import re
from collections.abc import Callable

from reportgen.names import symbol_of

__all__ = ["with_numbers", "with_symbols"]

TOKEN = re.compile("⟦([^⟦⟧]+)⟧")
#: Where a value stands directly beside another factor: a thin space next to it, or a bracket or fraction after it.
PRODUCT = re.compile(r"(?<=⟧)(?:\\,|(?=⟦|\\left\(|\\frac))|(?<![,;])(?<!\\ln)(?<!\\exp)\\,(?=⟦)")


def with_symbols(template: str) -> str:
    """Every token replaced by the symbol of its path."""
    return TOKEN.sub(lambda match: symbol_of(match.group(1)), template)


def with_numbers(template: str, number: Callable[[str], str]) -> str:
    """Every token replaced by ``number(path)``, LaTeX of a number with its unit.

    Products that are set solid with symbols get a multiplication dot, and negative numbers get brackets, since
    ``2 kg/s 3 kJ/kg`` and ``5 K - -3 K`` cannot be read.
    """
    dotted = PRODUCT.sub(lambda _: r"\cdot ", template)

    def place(match: re.Match[str]) -> str:
        text = number(match.group(1))
        alone = match.group(0) == template.strip()
        return rf"\left({text}\right)" if text.startswith("-") and not alone else text

    return TOKEN.sub(place, dotted)

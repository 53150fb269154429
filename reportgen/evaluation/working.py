"""The working in LaTeX: the templates of the balances with symbols, and with numbers, in their places.

A template names a value by its path between ⟦ and ⟧. Symbols come from the glossary, numbers from the display of the
calculation's units (temperatures in K or °R: in a quotient nothing else is right). Every number is rounded once, from
the unrounded value: results to the digits their uncertainty allows, numbers inside a formula to six significant
digits, or to as many more as a reader needs who redoes the step and wants to come to the result shown.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping

import numpy as np

from reportgen.names import symbol_of

__all__ = ["FEWEST_DIGITS", "MOST_DIGITS", "enough_digits", "with_numbers", "with_symbols"]

#: Significant digits of a number inside a formula.
FEWEST_DIGITS, MOST_DIGITS = 6, 10

TOKEN = re.compile("⟦([^⟦⟧]+)⟧")
#: Where a value stands directly beside another factor: a thin space next to it, or a bracket or fraction after it.
PRODUCT = re.compile(r"(?<=⟧)(?:\\,|(?=⟦|\\left\(|\\frac))|(?<![,;])(?<!\\ln)(?<!\\exp)\\,(?=⟦)")


def with_symbols(template: str, symbol: Callable[[str], str] = symbol_of) -> str:
    """Every token replaced by the symbol of its path."""
    return TOKEN.sub(lambda match: symbol(match.group(1)), template)


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


def enough_digits(
    exact: Mapping[str, float],
    rounded: Callable[[str, float, int], float],
    evaluate: Callable[[Mapping[str, float]], float],
    shows_the_same: Callable[[float], bool],
) -> dict[str, int]:
    """Significant digits of each operand with which a formula gives the result that is shown.

    The operand whose rounding moves the result most gets one more digit, again and again, until the result is met or
    MOST_DIGITS reached. A small difference of large numbers so gets the digits it needs, and nothing else does.

    Args:
        exact: path to unrounded operand.
        rounded: (path, operand, digits) to the operand as it is shown with so many significant digits.
        evaluate: operands by path to the result.
        shows_the_same: whether a result is shown with the same digits as the true one.
    """
    digits = dict.fromkeys(exact, FEWEST_DIGITS)
    true = {path: np.float64(value) for path, value in exact.items()}
    with np.errstate(all="ignore"):
        result = float(evaluate(true))
        if not shows_the_same(result):
            return digits
        while True:
            shown = {path: np.float64(rounded(path, value, digits[path])) for path, value in exact.items()}
            if shows_the_same(float(evaluate(shown))):
                return digits
            effects = {
                path: abs(float(evaluate({**true, path: shown[path]})) - result)
                for path in exact
                if digits[path] < MOST_DIGITS
            }
            worst = max(effects, key=lambda path: effects[path], default=None)
            if worst is None or not effects[worst] > 0.0:
                return digits
            digits[worst] += 1

"""How names of fluids are written, guessed at, and shared by isomers."""

from __future__ import annotations

import re
from collections.abc import Collection
from difflib import SequenceMatcher, get_close_matches

__all__ = ["CAS_NUMBER", "nearest", "sharing", "title_of"]

CAS_NUMBER = re.compile(r"[1-9]\d{1,6}-\d\d-\d")

#: What stands before the name proper and keeps its case: places, configurations, forms of the chain.
_PREFIX = re.compile(r"(?:(?:\d+(?:,\d+)*|[nimop]|cis|trans|sec|tert)-)*")
#: Names as short as this are no part of another by which it could be meant.
_SHORT = 4
#: Share of characters in common from which one name is taken for another: a lone guess, several, names with digits.
_ALIKE, _CLOSE, _NUMBERS_ALIKE = 0.7, 0.8, 0.85
#: How much less alike than the best a name may be to be offered beside it.
_NEARLY_AS_CLOSE = 0.1


def title_of(name: str) -> str:
    """A name as a title: the first letter of the name proper large, as in n-Butane, trans-2-Butene, Water."""
    found = _PREFIX.match(name)
    start = found.end() if found else 0
    return name[:start] + name[start : start + 1].upper() + name[start + 1 :]


def nearest(name: str, plain: str, known: Collection[str], most: int = 3) -> list[str]:
    """Which of the plain spellings ``known`` may be meant by a name that is none of them, the likeliest first.

    Parameters
    ----------
    name : as given; numbers of a register have no neighbours that could be meant.
    plain : the same in the spelling of ``known``.
    most : how many are wanted at most.
    """
    if CAS_NUMBER.fullmatch(name.strip()):
        return []
    digits = any(character.isdigit() for character in plain)
    close = get_close_matches(plain, known, n=most, cutoff=_NUMBERS_ALIKE if digits else _CLOSE)
    if digits or close:
        alike = [SequenceMatcher(None, other, plain).ratio() for other in close]
        return [other for other, share in zip(close, alike, strict=True) if share >= alike[0] - _NEARLY_AS_CLOSE]
    if len(plain) > _SHORT:
        ending = sorted((other for other in known if other.endswith(plain)), key=len)
        if ending:
            return ending[:most]
    return get_close_matches(plain, known, n=1, cutoff=_ALIKE)


def sharing(formula: str) -> tuple[str, ...]:
    """Names of all substances of a molecular formula that are carried, as real fluids or as ideal gases.

    Parameters
    ----------
    formula : as written by a user; case does not matter.
    """
    from reportgen.fluids.gases import species  # each of the two starts without the other
    from reportgen.fluids.real import catalogue

    real = catalogue.of_formula(formula)
    ideal = [
        gas.name
        for gas in species.of_formula(formula)
        if not any(catalogue.canonical(name) in real for name in (gas.name, *gas.aliases))
    ]
    return (*real, *ideal)

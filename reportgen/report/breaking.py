"""Where a formula in LaTeX may be cut so that it wraps, and how wide its parts are.

Cuts are made before relations and before + and − that stand outside all brackets. A piece that a narrow screen cannot
hold is cut again inside its brackets, and a fraction that not even a wide one can hold is written as a quotient in the
line.
"""

from __future__ import annotations

import re

__all__ = ["NARROW", "estimated_total", "estimated_width", "parts_of", "split"]

_BREAKS = ("=", "+", "-", r"\approx", r"\leq", r"\geq", r"\le", r"\ge", r"\pm")
#: Characters of one piece of an equation that still fit beside the margin of a narrow screen.
NARROW = 29
#: Characters of a fraction that fit across a sheet of paper.
_LONGEST_FRACTION = 60
_TALL = {r"\frac", r"\sum", r"\int", r"\prod", r"\sqrt"}
_OPEN, _CLOSE = (r"\left(", r"\left["), (r"\right)", r"\right]")
_DEPTHS = {**dict.fromkeys(("{", "(", "[", *_OPEN), 1), **dict.fromkeys(("}", ")", "]", *_CLOSE), -1)}
#: Size of raised and lowered characters in parts of the others.
_SCRIPT = 0.72
#: Characters that an operator takes with the spaces round it.
_OPERATOR = 2
_UNSEEN = {rf"\{name}" for name in ("mathrm", "text", "left", "right", "dot", "bar", "overline")}
_COMMAND = re.compile(r"\\(?:left|right)[()\[\]]|\\[A-Za-z]+|\\.|.", re.DOTALL)


def split(latex: str) -> list[str]:
    """Cut a formula before each relation, + and − that stands outside all braces and brackets, never at a sign."""
    parts: list[str] = []
    current: list[str] = []
    depth = 0
    for token in _COMMAND.findall(latex):
        if depth == 0 and token in _BREAKS and _is_term("".join(current)):
            parts.append("".join(current).strip())
            current = []
        depth += _DEPTHS.get(token, 0)
        current.append(token)
    parts.append("".join(current).strip())
    return [part for part in parts if part]


def _is_term(text: str) -> bool:
    """Whether what stands before an operator is a term, so that the operator joins and is no sign."""
    stripped = re.sub(r"(\\[,;:! ]|\s)+$", "", text)
    if stripped.endswith(("^+", "^-")):  # the positive or negative part of a term
        return True
    return bool(stripped) and not re.search(r"(=|\+|-|\(|\[|,|\\cdot|\\times|\\approx|\\left|\\right|\^|_)$", stripped)


def parts_of(piece: str) -> list[str]:
    """The parts of one piece of ``split``: more than one only where a narrow screen cannot hold it."""
    if estimated_total(piece) <= NARROW:
        return [piece]
    return _split_brackets(_in_line(piece) if estimated_total(piece) > _LONGEST_FRACTION else piece)


def _in_line(piece: str) -> str:
    r"""Every ``\frac{a + b}{c}`` outside all braces and brackets written as ``(a + b)/c``."""
    tokens = _COMMAND.findall(piece)
    text = ""
    depth = 0
    while tokens:
        token = tokens.pop(0)
        if token == r"\frac" and depth == 0:
            text += "/".join(_bracketed("".join(_group(tokens))) for _ in range(2))
            continue
        depth += _DEPTHS.get(token, 0)
        text += token
    return text


def _bracketed(latex: str) -> str:
    """A numerator or denominator in brackets unless it is one symbol or number."""
    return latex if estimated_total(latex) <= 1 else rf"\left({latex}\right)"


def _split_brackets(latex: str) -> list[str]:
    """Cut a formula inside its outermost brackets, before + and − and after commas, and before a division sign.

    Brackets of cut pairs no longer stretch: those that must, since a fraction, a sum or a root stands in them, are
    left whole, as is all within braces.
    """
    tokens = _COMMAND.findall(latex)
    closings = _divisible(tokens)
    parts = [""]
    begin = depth = 0  # where the open bracket's content begins in the last part; depth within it
    divided = False
    for place, token in enumerate(tokens):
        if place in closings or place in closings.values():
            divided, depth = place in closings, 0
            parts[-1] += token[-1]
            begin = len(parts[-1])
            continue
        if depth == 0 and (token == "/" if not divided else token in _BREAKS and _is_term(parts[-1][begin:])):
            parts.append("")
            begin = 0
        parts[-1] += token
        depth += _DEPTHS.get(token, 0)
        if divided and depth == 0 and token == ",":
            parts.append("")
            begin = 0
    return [part.strip() for part in parts] if len(parts) > 1 else [latex]


def _divisible(tokens: list[str]) -> dict[int, int]:
    """Places of outermost brackets, outside all braces, in which nothing is tall: opening to closing."""
    found: dict[int, int] = {}
    depth = start = 0
    for place, token in enumerate(tokens):
        step = _DEPTHS.get(token, 0)
        if step > 0 and depth == 0:
            start = place
        depth += step
        if step < 0 and depth == 0 and tokens[start] in _OPEN and not _TALL.intersection(tokens[start:place]):
            found[start] = place
    return found


def estimated_width(latex: str) -> int:
    """Rough number of characters of the widest part that cannot be broken, to tell whether a screen can hold it."""
    return max((estimated_total(part) for piece in split(latex) for part in parts_of(piece)), default=0)


def estimated_total(latex: str) -> int:
    """Rough number of characters of a formula set in one line; of a fraction the longer part counts."""
    return round(_count(_COMMAND.findall(latex)))


def _count(tokens: list[str]) -> float:
    """Characters of a run of tokens, which it takes from the list; those raised or lowered are smaller."""
    total = 0.0
    while tokens:
        token = tokens.pop(0)
        if token in ("_", "^"):
            script = _count(_group(tokens))
            if tokens and tokens[0] in "_^":  # both stand one above the other
                tokens.pop(0)
                script = max(script, _count(_group(tokens)))
            total += _SCRIPT * script
        elif token in (r"\frac", r"\tfrac"):
            total += max(_count(_group(tokens)), _count(_group(tokens)))
        elif token.startswith("\\") and token[1:].isalpha():
            total += token not in _UNSEEN
        elif token in _BREAKS:
            total += _OPERATOR
        else:
            total += token in (*_OPEN, *_CLOSE, r"\%") or (token[0] != "\\" and token not in " {}")
    return total


def _group(tokens: list[str]) -> list[str]:
    """The tokens of the group in braces that stands next, taken from the list; of none, the next token."""
    if not tokens or tokens[0] != "{":
        return [tokens.pop(0)] if tokens else []
    depth = 0
    group: list[str] = []
    while tokens:
        token = tokens.pop(0)
        depth += {"{": 1, "}": -1}.get(token, 0)
        group.append(token)
        if depth == 0:
            break
    return group[1:-1]

r"""LaTeX to MathML Core that browsers draw well.

The conversion proper is latex2mathml's; what it leaves rough for a browser is mended here: letters of an upright
word are joined (``\mathrm{kg}`` comes as two identifiers), dots are marked as accents, limits of sums go below and
above, words in subscripts become text, so that the hyphen of a tag is no minus sign.

Long equations are broken into pieces, each a ``<math>`` of its own, which the page sets one after the other like
words, so that an equation wraps at any width. The parts of a long piece stand in a span that keeps together wherever
there is room for all of them. Where formulae may be cut is told by ``reportgen.report.breaking``.
"""

from __future__ import annotations

import re
from functools import lru_cache
from xml.etree import ElementTree

from reportgen.errors import Fault, InputError
from reportgen.report.breaking import parts_of, split

__all__ = ["mathml", "pieces"]

_LARGE_OPERATORS = {"∑", "∏"}
_ACCENTS = {"˙", "¨", "¯", "―", "^", "ˆ", "~", "˜", "→"}
_THIN = ".17em"
_SIGNS = {"+", "−", "±"}
_CLOSING = {")", "]", "}", "|", "!", "%"}
_CHILDREN = {"mfrac": 2, "msub": 2, "msup": 2, "msubsup": 3, "mover": 2, "munder": 2, "munderover": 3}
_FUNCTIONS = {"ln", "log", "exp", "sin", "cos", "tan", "max", "min"}
_WORD = re.compile(r"\\mathrm\{([^{}\\^]*)\}")


def _words_as_text(latex: str) -> str:
    r"""Turn ``\mathrm{PRV-3}`` into text unless it is letters only or digits only: these are set as mathematics.

    A single letter becomes text too: the library would set it in italics.
    """

    def replaced(match: re.Match[str]) -> str:
        content = match[1]
        if (content.isalpha() and len(content) > 1) or content.isdigit():
            return match[0]
        return rf"\text{{{content}}}"

    return _WORD.sub(replaced, latex.replace(r"{}^{\circ}", "°").replace(r"{}^\circ", "°"))


@lru_cache(maxsize=4096)
def mathml(latex: str, infix_start: bool = False) -> str:
    """One ``<math>`` element for inline setting; the style sheet gives it the size of a displayed formula.

    ``infix_start`` says that the piece goes on from one before it: a leading + or − is then spaced as between two
    terms. Raises InputError when the text is not LaTeX that can be converted.
    """
    from latex2mathml import converter

    try:
        root = converter.convert_to_element(_words_as_text(latex))
    except Exception as error:
        raise InputError(Fault("A formula cannot be set.", found=latex, hint=str(error))) from error
    parts = list(root.iter())
    unknown = any((part.text or "").startswith("\\") for part in parts)
    if unknown or any(len(part) != _CHILDREN.get(part.tag, len(part)) for part in parts):
        raise InputError(Fault("A formula cannot be set: a command is unknown or incomplete.", found=latex))
    root.attrib.clear()
    _mend(root)
    _strip_defaults(root)
    if infix_start:
        first = next((element for element in root.iter() if element.tag not in ("math", "mrow")), None)
        if first is not None and first.tag == "mo":
            first.set("form", "infix")
    return ElementTree.tostring(root, encoding="unicode").replace(" />", "/>")


def _mend(element: ElementTree.Element) -> None:
    """Mend the children of an element, then itself, in place."""
    for child in element:
        _mend(child)
    if element.text:
        element.text = _plain(element.text)
    if element.tag == "mover" and len(element) == 2 and element[1].text in _ACCENTS:
        element.set("accent", "true")
        element[1].set("stretchy", "false" if element[1].text == "˙" else "true")
    if element.tag in ("msub", "msup", "msubsup") and element[0].text in _LARGE_OPERATORS:
        element.tag = {"msub": "munder", "msup": "mover", "msubsup": "munderover"}[element.tag]
    _unwrap(element)
    _join_letters(element)
    if element.tag == "msup" and [part.tag for part in element[1]] == ["mo", "mn"] and element[1][0].text == "−":
        exponent = ElementTree.Element("mn")
        exponent.text = f"−{element[1][1].text}"
        element[1] = exponent
    if element.tag in ("math", "mrow"):
        _space_functions(element)
        _mark_signs(element)


def _strip_defaults(root: ElementTree.Element) -> None:
    """Drop attributes that only repeat what MathML takes anyway; capital Greek letters stand upright (ISO 80000-2)."""
    for element in root.iter():
        if element.get("width") == "0.167em":
            element.set("width", _THIN)
        elif element.tag == "mo" and element.get("fence") == "true":
            element.attrib.clear()
        elif element.tag == "mi" and len(element.text or "") > 1:
            element.attrib.pop("mathvariant", None)
        elif element.tag == "mi" and "Α" <= (element.text or " ") <= "Ω":
            element.set("mathvariant", "normal")


def _plain(text: str) -> str:
    """Character references that the library leaves in the text, resolved."""
    return re.sub(r"&#x([0-9A-Fa-f]+);", lambda match: chr(int(match[1], 16)), text)


def _unwrap(element: ElementTree.Element) -> None:
    """Replace rows that hold one child by the child, and rows inside rows by their children."""
    index = 0
    while index < len(element):
        child = element[index]
        if child.tag == "mrow" and not child.attrib:
            if len(child) == 1:
                element[index] = child[0]
                continue
            if element.tag in ("math", "mrow") and len(child) and not _fenced(child):
                element[index : index + 1] = list(child)
                continue
        index += 1


def _fenced(row: ElementTree.Element) -> bool:
    """A bracketed row must stay one: its brackets stretch to its own height only."""
    return row[0].tag == "mo" and row[0].get("fence") == "true"


def _upright_letters(element: ElementTree.Element) -> str | None:
    if element.tag == "mi" and element.get("mathvariant") == "normal" and element.text:
        return element.text
    return None


def _join_letters(element: ElementTree.Element) -> None:
    """Join neighbouring upright letters to one identifier; the last may be the base of a power."""
    if element.tag not in ("math", "mrow"):
        return
    index = 0
    while index + 1 < len(element):
        letters = _upright_letters(element[index])
        follower = element[index + 1]
        base = follower[0] if follower.tag in ("msup", "msub") and len(follower) else follower
        joined = _upright_letters(base)
        if letters is None or joined is None:
            index += 1
            continue
        base.text = letters + joined
        element.remove(element[index])
        index = max(index - 1, 0)


def _mark_signs(element: ElementTree.Element) -> None:
    """A + or − after another operator or an opening bracket is a sign: no space between it and its number."""
    before: ElementTree.Element | None = None
    for child in element:
        if child.tag == "mspace":
            continue
        sign = child.tag == "mo" and child.text in _SIGNS
        if sign and before is not None and before.tag == "mo" and before.text not in _CLOSING:
            child.set("form", "prefix")
        before = child


def _space_functions(element: ElementTree.Element) -> None:
    """A thin space before ln, exp and their like when a factor stands there, and after when no bracket follows."""
    for index in reversed(range(len(element))):
        child = element[index]
        if child.tag != "mi" or child.text not in _FUNCTIONS:
            continue
        follower = element[index + 1] if index + 1 < len(element) else None
        if follower is not None:
            opening = follower[0] if follower.tag == "mrow" and len(follower) else follower
            if opening.tag not in ("mspace", "mo"):
                element.insert(index + 1, ElementTree.Element("mspace", {"width": _THIN}))
        if index and element[index - 1].tag not in ("mspace", "mo"):
            element.insert(index, ElementTree.Element("mspace", {"width": _THIN}))


def pieces(latex: str, relation: str = "") -> list[str]:
    """MathML of the pieces of a formula, the relation sign (``=``) before the first; long ones in a span of parts."""
    found = []
    for index, piece in enumerate(split(f"{relation} {latex}".strip())):
        parts = [mathml(part, infix_start=index > 0 or place > 0) for place, part in enumerate(parts_of(piece))]
        found.append(parts[0] if len(parts) == 1 else f'<span class="term">{"<wbr>".join(parts)}</span>')
    return found

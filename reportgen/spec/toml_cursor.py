"""Places, keys and single values of a TOML text: what the reader of whole texts is made of.

Single values (dates, numbers, escapes) are decoded by ``tomllib``; their length is bounded before that.
"""

from __future__ import annotations

import re
import tomllib
from bisect import bisect_right
from dataclasses import dataclass
from typing import Any

from reportgen.errors import Fault

__all__ = ["MAXIMUM_DEPTH", "MAXIMUM_ENTRIES", "Cursor", "Mistake", "Node", "TooMuch"]

MAXIMUM_DEPTH = 12
MAXIMUM_ENTRIES = 20_000
_MAXIMUM_FAULTS = 100
_LONGEST_KEY = 100
_LONGEST_SCALAR = 60

BLANK = re.compile(r"[ \t]*")
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_LINE_TEXT = re.compile(r'"(?:[^"\\\n]|\\[^\n])*+"|\'[^\'\n]*\'')
_BLOCK_TEXT = re.compile(r'"""(?:[^"\\]|\\.|"{1,2}(?!"))*+"{3,5}|' + r"'''(?:[^']|'{1,2}(?!'))*+'{3,5}", re.DOTALL)
_SCALAR_END = {"line": re.compile(r"[^\n#]*"), "list": re.compile(r"[^\n#,\]}]*")}
_SCALAR = re.compile(r"true|false|[+-]?(?:inf|nan)|[+-]?[0-9][0-9A-Za-z_.:+-]*(?:[ ][0-9][0-9.:]*[0-9Z:+-]*)?")


@dataclass(eq=False)
class Node:
    """One value with its place: a table (``dict``), an array (``list``) or a scalar.

    ``line`` and ``column`` (from 1) are those of the value, ``key_line`` and ``key_column`` those of its key; for a
    table with a header both are the place of the last part of the header. ``broken`` marks a value that stands in
    the text but could not be read, so that nobody calls it missing.
    ``defined`` is set by a header or by brackets: no second header may open it. ``text_line`` and
    ``text_column`` are where the text inside quotation marks begins: a line further down when these stand alone.
    """

    value: object
    line: int
    column: int
    key_line: int
    key_column: int
    broken: bool = False
    defined: bool = False
    text_line: int = 0
    text_column: int = 0

    @property
    def table(self) -> dict[str, Node]:
        """The entries of a table; none for any other value."""
        return self.value if isinstance(self.value, dict) else {}

    @property
    def items(self) -> list[Node]:
        """The items of an array; none for any other value."""
        return self.value if isinstance(self.value, list) else []

    def plain(self) -> object:
        """The value without places, broken entries left out."""
        if isinstance(self.value, dict):
            return {key: node.plain() for key, node in self.value.items() if not node.broken}
        if isinstance(self.value, list):
            return [node.plain() for node in self.value if not node.broken]
        return self.value


class Mistake(Exception):
    """A mistake of syntax at an offset of the text; caught by the statement it stands in."""

    def __init__(self, offset: int, message: str, *, resume: int | None = None, **details: str | None) -> None:
        super().__init__(message)
        self.offset = offset
        self.message = message
        self.resume = resume
        self.path: tuple[str, ...] | None = None
        self.details = details


class TooMuch(Exception):
    """A bound is passed: nothing after it is read."""


class Cursor:
    """A place in a text that moves on as keys and values are read."""

    def __init__(self, text: str, file: str) -> None:
        self.text = text
        self.file = file
        self.offset = 0
        self.faults: list[Fault] = []
        self.starts = [0, *(match.end() for match in re.finditer("\n", text))]
        self.entries = 0

    # --- places -------------------------------------------------------------------------------------------------

    def place(self, offset: int) -> tuple[int, int]:
        """Line and column, both from 1, of an offset."""
        line = bisect_right(self.starts, offset)
        return line, offset - self.starts[line - 1] + 1

    def node(self, value: object, offset: int, key_offset: int) -> Node:
        """A node with the places of two offsets."""
        return Node(value, *self.place(offset), *self.place(key_offset))

    def report(self, offset: int, message: str, path: tuple[str, ...] = (), **details: Any) -> None:
        """Note a fault at an offset; raises TooMuch when there are very many already."""
        if len(self.faults) >= _MAXIMUM_FAULTS:
            raise TooMuch
        line, column = self.place(offset)
        where = ".".join(path) or None
        self.faults.append(Fault(message, path=where, file=self.file, line=line, column=column, **details))

    def count(self, offset: int) -> None:
        """Count one more entry; raises TooMuch past the bound."""
        self.entries += 1
        if self.entries > MAXIMUM_ENTRIES:
            self.faults.clear()
            self.report(
                offset,
                "The file holds too many entries; it is not read further.",
                expected=f"at most {MAXIMUM_ENTRIES}",
            )
            raise TooMuch

    def skip(self, pattern: re.Pattern[str]) -> None:
        """Move past what matches here."""
        if match := pattern.match(self.text, self.offset):
            self.offset = match.end()

    def glance(self, begin: int, text: str | None = None) -> str:
        """What stands at an offset, at most 40 characters of its line."""
        if text is None:
            end = self.text.find("\n", begin)
            text = self.text[begin : len(self.text) if end < 0 else end].rstrip()
        if not text:
            return "the end of the line"
        text = "".join(sign if sign.isprintable() else "\N{REPLACEMENT CHARACTER}" for sign in text[:41])
        return text if len(text) <= 40 else text[:39] + "…"

    def line_of(self, offset: int) -> str:
        """The line of an offset, shortened."""
        return self.glance(self.starts[self.place(offset)[0] - 1]).strip()

    def dotted_key(self) -> list[tuple[str, int]]:
        """``a.b."c d"`` as names with their offsets; spaces after it are skipped."""
        keys: list[tuple[str, int]] = []
        while True:
            self.skip(BLANK)
            begin = self.offset
            if bare := _BARE_KEY.match(self.text, begin):
                self.offset = bare.end()
                name = bare[0]
            elif self.text[begin : begin + 1] in ('"', "'") and (quoted := _LINE_TEXT.match(self.text, begin)):
                self.offset = quoted.end()
                name = self.decoded(quoted[0], begin)
            else:
                raise Mistake(
                    begin,
                    "A key is expected here.",
                    found=self.glance(begin),
                    expected="letters, digits, _ and -; a comment starts with #",
                )
            if len(name) > _LONGEST_KEY or len(keys) >= MAXIMUM_DEPTH:
                raise Mistake(
                    begin,
                    "The key is too long.",
                    found=self.glance(begin),
                    expected=f"at most {_LONGEST_KEY} characters in a part and {MAXIMUM_DEPTH} parts",
                )
            keys.append((name, begin))
            self.skip(BLANK)
            if not self.text.startswith(".", self.offset):
                return keys
            self.offset += 1

    def quoted(self, begin: int, key_offset: int) -> Node:
        """A text in quotation marks, of one line or of several; raises Mistake."""
        block = self.text[begin : begin + 3] in ('"""', "'''")
        match = (_BLOCK_TEXT if block else _LINE_TEXT).match(self.text, begin)
        if match is None:
            if block:
                # The rest of the file is inside the text: reading on would only report nonsense.
                self.offset = len(self.text)
                self.report(begin, "The text is not closed.", expected=f"{self.text[begin : begin + 3]} at its end")
                raise TooMuch
            raise Mistake(
                begin,
                "The text is not closed by a quotation mark on its line.",
                found=self.glance(begin),
                expected="the same quotation mark at both ends",
            )
        self.offset = match.end()
        result = self.node(self.decoded(match[0], begin), begin, key_offset)
        # A line break right behind the three quotation marks is not part of the text.
        line_break = block and self.text.startswith("\n", begin + 3)
        result.text_line = result.line + (1 if line_break else 0)
        result.text_column = 1 if line_break else result.column + (3 if block else 1)
        return result

    def decoded(self, token: str, begin: int) -> str:
        """The text that a quoted token stands for; raises Mistake."""
        try:
            return str(tomllib.loads(f"v={token}")["v"])
        except ValueError:
            raise Mistake(
                begin,
                "The text holds a backslash or control character that TOML does not know.",
                found=self.glance(begin),
                hint="Write a backslash as \\\\ or put the text in single quotes.",
            ) from None

    def scalar(self, begin: int, within: str) -> object:
        """A number, date or truth value; raises Mistake."""
        match = _SCALAR_END[within].match(self.text, begin)
        token = match[0].rstrip() if match else ""
        self.offset = begin + len(token)
        if not token:
            raise Mistake(begin, "The value is missing.", expected='a value such as "39 bar(g)"')
        if len(token) <= _LONGEST_SCALAR and _SCALAR.fullmatch(token):
            try:
                return tomllib.loads(f"v={token}")["v"]
            except ValueError:
                pass
        expected, hint = _advice(token)
        raise Mistake(begin, "This is not a value.", found=self.glance(begin, token), expected=expected, hint=hint)


def _advice(token: str) -> tuple[str | None, str | None]:
    """What would do in place of a token that is no TOML value, and a hint."""
    if re.match(r"[+-]?[0-9]+,[0-9]", token):
        return None, "Numbers have a decimal point, not a comma; quantities stand in quotes."
    if re.match(r"[0-9]+[./-][0-9]+[./-][0-9]+", token):
        return "a date as 2026-03-12, without quotes", None
    if token[0] in "“”„‘’«»":
        return None, 'Use straight quotation marks: "…".'
    if token.lower() in ("true", "false"):
        return token.lower(), None
    shown = token if len(token) <= 40 else "39 bar(g)"
    return f'text and quantities in quotes: "{shown}"', None

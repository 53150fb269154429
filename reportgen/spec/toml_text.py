"""A TOML text as a tree in which every key and value knows its line and column.

``tomllib`` of the standard library says nothing about places and stops at the first mistake. This reader keeps the
place of everything, goes on after a mistake with the next statement, and so finds all mistakes of a text in one pass.
Single values (dates, numbers, escapes) are still decoded by ``tomllib``, and a text that this reader accepts must be
accepted by ``tomllib`` too: what the two could disagree on is reported, never guessed.

Depth, number of entries and length of names and numbers are bounded before anything recurses or converts.
"""

from __future__ import annotations

import re
import tomllib
from bisect import bisect_right
from dataclasses import dataclass, field

from reportgen.errors import Fault

__all__ = ["MAXIMUM_DEPTH", "MAXIMUM_ENTRIES", "Node", "TomlText", "parse"]

MAXIMUM_DEPTH = 12
MAXIMUM_ENTRIES = 20_000
MAXIMUM_FAULTS = 100
_LONGEST_KEY = 100
_LONGEST_SCALAR = 60

_BLANK = re.compile(r"[ \t]*")
_FILLER = re.compile(r"(?:[ \t\n]|#[^\n]*)*+")
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_LINE_TEXT = re.compile(r'"(?:[^"\\\n]|\\[^\n])*+"|\'[^\'\n]*\'')
_BLOCK_TEXT = re.compile(r'"""(?:[^"\\]|\\.|"{1,2}(?!"))*+"{3,5}|' + r"'''(?:[^']|'{1,2}(?!'))*+'{3,5}", re.DOTALL)
_SCALAR_END = {"line": re.compile(r"[^\n#]*"), "list": re.compile(r"[^\n#,\]}]*")}
_SCALAR = re.compile(r"true|false|[+-]?(?:inf|nan)|[+-]?[0-9][0-9A-Za-z_.:+-]*(?:[ ][0-9][0-9.:]*[0-9Z:+-]*)?")
_STATEMENT = re.compile(r"[ \t]*(?:\[|[A-Za-z0-9_\"'-][^\n=\"]*=)")
_KEY_WITH_SPACES = re.compile(r"((?:[A-Za-z0-9_-]+[ ]+)+[A-Za-z0-9_-]+)[ \t]*=")


@dataclass(eq=False)
class Node:
    """One value with its place: a table (``dict``), an array (``list``) or a scalar.

    ``line`` and ``column`` (from 1) are those of the value, ``key_line`` and ``key_column`` those of its key; for a
    table with a header both are the place of the last part of the header. ``broken`` marks a value that stands in
    the text but could not be read, so that nobody calls it missing.
    ``defined`` is set by a header or by brackets: no second header may open it. ``first_line_of_text`` is where the
    text of a scalar begins, a line further down than the quotation marks when these stand alone.
    """

    value: object
    line: int
    column: int
    key_line: int
    key_column: int
    broken: bool = False
    defined: bool = False
    first_line_of_text: int = 0

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


@dataclass
class TomlText:
    """What was read: the root table, the mistakes, and whether the name of some table could not be made out."""

    root: Node
    faults: list[Fault] = field(default_factory=list)
    header_lost: bool = False


class _Mistake(Exception):
    """A mistake of syntax at an offset of the text; caught by the statement it stands in."""

    def __init__(self, offset: int, message: str, *, resume: int | None = None, **details: str | None) -> None:
        super().__init__(message)
        self.offset = offset
        self.message = message
        self.resume = resume
        self.path: tuple[str, ...] | None = None
        self.details = details


class _TooMuch(Exception):
    """A bound is passed: nothing after it is read."""


def parse(text: str, file: str) -> TomlText:
    """Read a TOML text. Never raises for what the text says; its mistakes are in ``faults``."""
    reader = _Reader(text.replace("\r\n", "\n"), file)
    reader.read()
    return reader.result


class _Reader:
    """One pass over one text."""

    def __init__(self, text: str, file: str) -> None:
        self.text = text
        self.file = file
        self.offset = 0
        self.starts = [0, *(match.end() for match in re.finditer("\n", text))]
        self.result = TomlText(self.node({}, 0, 0))
        self.table = self.result.root
        self.prefix: tuple[str, ...] = ()
        self.entries = 0

    # --- places -------------------------------------------------------------------------------------------------

    def place(self, offset: int) -> tuple[int, int]:
        """Line and column, both from 1, of an offset."""
        line = bisect_right(self.starts, offset)
        return line, offset - self.starts[line - 1] + 1

    def node(self, value: object, offset: int, key_offset: int) -> Node:
        return Node(value, *self.place(offset), *self.place(key_offset))

    def report(self, offset: int, message: str, path: tuple[str, ...] = (), **details: str | None) -> None:
        if len(self.result.faults) >= MAXIMUM_FAULTS:
            raise _TooMuch
        line, column = self.place(offset)
        where = ".".join(path) or None
        self.result.faults.append(Fault(message, path=where, file=self.file, line=line, column=column, **details))

    def count(self, offset: int) -> None:
        self.entries += 1
        if self.entries > MAXIMUM_ENTRIES:
            self.result.faults.clear()
            self.report(offset, f"The file holds more than {MAXIMUM_ENTRIES} entries; it is not read further.")
            raise _TooMuch

    # --- statements ---------------------------------------------------------------------------------------------

    def read(self) -> None:
        try:
            while True:
                self.skip(_FILLER)
                if self.offset >= len(self.text):
                    break
                self.statement()
        except _TooMuch:
            self.result.header_lost = True
        if not self.result.faults:
            self.ask_the_standard_reader()

    def statement(self) -> None:
        begin = self.offset
        path = self.prefix
        try:
            if self.text.startswith("[", begin):
                path = ()
                self.header()
            else:
                self.assignment(self.table, self.prefix, 0, "line")
            self.end_of_line()
        except _Mistake as mistake:
            self.report(mistake.offset, mistake.message, mistake.path or path, **mistake.details)
            if mistake.resume is None:
                self.recover(begin, mistake.offset)
            else:
                self.offset = mistake.resume

    def recover(self, begin: int, mistaken: int) -> None:
        """Go to the next statement: the next line or, inside a value of several lines, the next that looks like one."""
        end = self.text.find("\n", mistaken)
        several_lines = self.place(begin)[0] != self.place(mistaken)[0]
        while end >= 0 and several_lines and not _STATEMENT.match(self.text, end + 1):
            end = self.text.find("\n", end + 1)
        self.offset = len(self.text) if end < 0 else end + 1

    def end_of_line(self) -> None:
        self.skip(_BLANK)
        if self.offset < len(self.text) and self.text[self.offset] not in "#\n":
            raise _Mistake(
                self.offset,
                "Something follows the value on its line.",
                found=self.glance(self.offset),
                expected="the end of the line or a comment after #",
            )

    def header(self) -> None:
        """``[a.b]`` opens a table, ``[[a.b]]`` adds one to an array of tables."""
        begin = self.offset
        several = self.text.startswith("[[", begin)
        self.offset += 2 if several else 1
        # Where the header cannot be read, what follows it must not land in the table before.
        self.table, self.prefix = self.node({}, begin, begin), ()
        closing = "]]" if several else "]"
        try:
            keys = self.dotted_key()
        except _Mistake:
            self.result.header_lost = True
            raise
        closed = self.text.startswith(closing, self.offset)
        if not closed and self.text[self.offset : self.offset + 1] not in ("", "\n", "#", "]"):
            self.result.header_lost = True
            raise _Mistake(
                self.offset,
                "The name of the table is not readable.",
                found=self.line_of(begin),
                expected='a header such as [states.1]; names with other signs in quotes: [states."no 1"]',
            )
        self.open(keys, several)
        if not closed:
            raise _Mistake(begin, f"The header is not closed by {closing}.", found=self.line_of(begin))
        self.offset += len(closing)

    def open(self, keys: list[tuple[str, int]], several: bool) -> None:
        """Make the table of a header the current one."""
        names = tuple(name for name, _ in keys)
        parent = self.result.root
        for depth, (name, offset) in enumerate(keys[:-1], 1):
            parent = self.descend(parent, name, offset, names[:depth])
        name, offset = keys[-1]
        table = self.node({}, offset, offset)
        table.defined = True
        present = parent.table.get(name)
        if several:
            self.count(offset)
            if present is None:
                parent.table[name] = self.node([table], offset, offset)
            elif isinstance(present.value, list) and present.defined is False:
                present.value.append(table)
            else:
                self.twice(offset, names, present)
            self.prefix = (*names, str(len(present.items) if present is not None else 1))
        elif present is None:
            self.count(offset)
            parent.table[name] = table
            self.prefix = names
        elif isinstance(present.value, dict) and not present.defined:
            present.defined = True
            table = present
            table.line, table.column = table.key_line, table.key_column = self.place(offset)
            self.prefix = names
        else:
            self.twice(offset, names, present)
            self.prefix = names
        self.table = table

    def descend(self, parent: Node, name: str, offset: int, path: tuple[str, ...]) -> Node:
        """The table ``name`` within ``parent``, made when it is not there."""
        inner = parent.table.get(name)
        if inner is None:
            self.count(offset)
            inner = parent.table[name] = self.node({}, offset, offset)
        if inner.items and isinstance(inner.items[-1].value, dict):
            inner = inner.items[-1]
        if not isinstance(inner.value, dict):
            if not inner.broken:
                self.report(
                    offset,
                    f"{name} is a value (line {inner.key_line}) and cannot hold further keys.",
                    path,
                    expected="a key or table of another name",
                )
            return self.node({}, offset, offset)
        return inner

    def twice(self, offset: int, path: tuple[str, ...], present: Node) -> None:
        self.report(
            offset,
            f"This name is already there at line {present.key_line}.",
            path,
            found=f"{path[-1]} a second time",
            expected="each name once; rename or remove one of the two",
        )

    def assignment(self, table: Node, prefix: tuple[str, ...], depth: int, within: str) -> None:
        """``key = value`` or ``a.b = value`` into a table."""
        begin = self.offset
        keys: list[tuple[str, int]] = []
        try:
            keys = self.dotted_key()
            names = tuple(name for name, _ in keys)
            if not self.text.startswith("=", self.offset):
                raise self.no_equals_sign(begin)
            self.offset += 1
            self.skip(_BLANK)
            value = self.value(keys[-1][1], (*prefix, *names), depth, within)
        except _Mistake as mistake:
            if mistake.path is None:
                mistake.path = (*prefix, *(name for name, _ in keys))
            spaced = _KEY_WITH_SPACES.match(self.text, begin)
            broken = [(re.sub(" +", "_", spaced[1]), begin)] if spaced else keys
            if broken:
                self.insert(table, prefix, broken, None)
            raise
        self.insert(table, prefix, keys, value)

    def insert(self, table: Node, prefix: tuple[str, ...], keys: list[tuple[str, int]], value: Node | None) -> None:
        """Put a value, or the mark of one that could not be read (None), where its key says."""
        names = tuple(name for name, _ in keys)
        for depth, (name, offset) in enumerate(keys[:-1], 1):
            table = self.descend(table, name, offset, (*prefix, *names[:depth]))
        name, offset = keys[-1]
        present = table.table.get(name)
        if present is not None:
            if value is not None and not present.broken:
                self.twice(offset, (*prefix, *names), present)
            return
        self.count(offset)
        if value is None:
            value = self.node(None, offset, offset)
            value.broken = True
        table.table[name] = value

    def no_equals_sign(self, begin: int) -> _Mistake:
        """What is wrong where a key is not followed by an equals sign."""
        sign = self.text[self.offset : self.offset + 1]
        hint = "Write = in place of the colon." if sign == ":" else None
        if spaced := _KEY_WITH_SPACES.match(self.text, begin):
            hint = f"Keys are written without spaces: {re.sub(' +', '_', spaced[1])}."
        found = self.line_of(begin)
        return _Mistake(self.offset, "A key must be followed by = and its value.", found=found, hint=hint)

    # --- keys and values ----------------------------------------------------------------------------------------

    def dotted_key(self) -> list[tuple[str, int]]:
        """``a.b."c d"`` as names with their offsets; spaces after it are skipped."""
        keys: list[tuple[str, int]] = []
        while True:
            self.skip(_BLANK)
            begin = self.offset
            if bare := _BARE_KEY.match(self.text, begin):
                self.offset = bare.end()
                name = bare[0]
            elif self.text[begin : begin + 1] in ('"', "'") and (quoted := _LINE_TEXT.match(self.text, begin)):
                self.offset = quoted.end()
                name = self.decoded(quoted[0], begin)
            else:
                raise _Mistake(
                    begin,
                    "A key is expected here.",
                    found=self.glance(begin),
                    expected="letters, digits, _ and -; a comment starts with #",
                )
            if len(name) > _LONGEST_KEY or len(keys) >= MAXIMUM_DEPTH:
                limits = f"{_LONGEST_KEY} characters and {MAXIMUM_DEPTH} parts"
                raise _Mistake(begin, f"The key is longer than {limits}.", found=self.glance(begin))
            keys.append((name, begin))
            self.skip(_BLANK)
            if not self.text.startswith(".", self.offset):
                return keys
            self.offset += 1

    def value(self, key_offset: int, path: tuple[str, ...], depth: int, within: str) -> Node:
        begin = self.offset
        sign = self.text[begin : begin + 1]
        if sign in ("[", "{"):
            if depth >= MAXIMUM_DEPTH:
                self.report(
                    begin, f"Brackets are nested deeper than {MAXIMUM_DEPTH}; the file is not read further.", path
                )
                raise _TooMuch
            self.offset += 1
            inner = self.array(path, depth + 1) if sign == "[" else self.inline_table(path, depth + 1)
            result = self.node(inner, begin, key_offset)
            result.defined = True
            return result
        if sign in ('"', "'"):
            return self.quoted(begin, key_offset)
        return self.node(self.scalar(begin, within), begin, key_offset)

    def quoted(self, begin: int, key_offset: int) -> Node:
        block = self.text[begin : begin + 3] in ('"""', "'''")
        match = (_BLOCK_TEXT if block else _LINE_TEXT).match(self.text, begin)
        if match is None:
            if block:
                # The rest of the file is inside the text: reading on would only report nonsense.
                self.offset = len(self.text)
                self.report(begin, "The text is not closed.", expected=f"{self.text[begin : begin + 3]} at its end")
                raise _TooMuch
            raise _Mistake(
                begin,
                "The text is not closed by a quotation mark on its line.",
                found=self.glance(begin),
                expected="the same quotation mark at both ends",
            )
        self.offset = match.end()
        result = self.node(self.decoded(match[0], begin), begin, key_offset)
        # A line break right behind the three quotation marks is not part of the text.
        line_break = block and self.text.startswith("\n", begin + 3)
        result.first_line_of_text = result.line + (1 if line_break else 0)
        return result

    def decoded(self, token: str, begin: int) -> str:
        try:
            return str(tomllib.loads(f"v={token}")["v"])
        except ValueError:
            raise _Mistake(
                begin,
                "The text holds a backslash or control character that TOML does not know.",
                found=self.glance(begin),
                hint="Write a backslash as \\\\ or put the text in single quotes.",
            ) from None

    def scalar(self, begin: int, within: str) -> object:
        match = _SCALAR_END[within].match(self.text, begin)
        token = match[0].rstrip() if match else ""
        self.offset = begin + len(token)
        if not token:
            raise _Mistake(begin, "The value is missing.", expected='a value such as "39 bar(g)"')
        if len(token) <= _LONGEST_SCALAR and _SCALAR.fullmatch(token):
            try:
                return tomllib.loads(f"v={token}")["v"]
            except ValueError:
                pass
        expected, hint = _advice(token)
        raise _Mistake(begin, "This is not a value.", found=self.glance(begin, token), expected=expected, hint=hint)

    def array(self, path: tuple[str, ...], depth: int) -> list[Node]:
        opening = self.offset - 1
        items: list[Node] = []
        while True:
            self.skip(_FILLER)
            if self.text.startswith("]", self.offset):
                self.offset += 1
                return items
            if self.offset >= len(self.text) or (items and self.looks_like_a_statement()):
                raise self.open_list(opening)
            self.count(self.offset)
            items.append(self.value(self.offset, (*path, str(len(items) + 1)), depth, "list"))
            self.skip(_FILLER)
            if self.text.startswith(",", self.offset):
                self.offset += 1
            elif not self.text.startswith("]", self.offset):
                if self.offset >= len(self.text) or self.looks_like_a_statement():
                    raise self.open_list(opening)
                raise _Mistake(
                    self.offset,
                    "A comma is missing between two items.",
                    found=self.glance(self.offset),
                    expected=", or ]",
                )

    def open_list(self, opening: int) -> _Mistake:
        """A list that runs into the next statement, which is then read as such."""
        return _Mistake(
            opening,
            "The list is not closed.",
            resume=self.offset,
            found=self.line_of(opening),
            expected="] at its end",
        )

    def looks_like_a_statement(self) -> bool:
        """Whether a new line here begins with a header or ``key =``: then the list above was never closed."""
        start = self.text.rfind("\n", 0, self.offset) + 1
        return not self.text[start : self.offset].strip() and bool(
            re.match(r"\[\[?[A-Za-z]|[A-Za-z0-9_-]+[ \t]*=", self.text[self.offset : self.offset + _LONGEST_KEY])
        )

    def inline_table(self, path: tuple[str, ...], depth: int) -> dict[str, Node]:
        table = self.node({}, self.offset - 1, self.offset - 1)
        opening = self.offset - 1
        self.skip(_BLANK)
        if self.text.startswith("}", self.offset):
            self.offset += 1
            return table.table
        while True:
            if self.text[self.offset : self.offset + 1] in ("", "\n", "#"):
                raise _Mistake(
                    opening,
                    "A table in braces must be closed on its line.",
                    found=self.line_of(opening),
                    expected="} on the same line, or a table with a [header] of its own",
                )
            self.assignment(table, path, depth, "list")
            self.skip(_BLANK)
            sign = self.text[self.offset : self.offset + 1]
            if sign == "}":
                self.offset += 1
                return table.table
            if sign == ",":
                self.offset += 1
                self.skip(_BLANK)
            elif sign not in ("", "\n", "#"):
                raise _Mistake(
                    self.offset,
                    "A comma is missing between two keys.",
                    found=self.glance(self.offset),
                    expected=", or }",
                )

    # --- small things -------------------------------------------------------------------------------------------

    def skip(self, pattern: re.Pattern[str]) -> None:
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
        return self.glance(self.starts[self.place(offset)[0] - 1]).strip()

    def ask_the_standard_reader(self) -> None:
        """Report what ``tomllib`` refuses in a text that this reader has accepted."""
        try:
            tomllib.loads(self.text)
        except ValueError as error:
            place = re.search(r" \(at line (\d+), column (\d+)\)$", str(error))
            line, column = (int(place[1]), int(place[2])) if place else (len(self.starts), 1)
            message = str(error)[: place.start()] if place else str(error).removesuffix(" (at end of document)")
            self.result.faults.append(Fault(f"{message}.", file=self.file, line=line, column=column))


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

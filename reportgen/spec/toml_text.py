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
from dataclasses import dataclass

from reportgen.errors import Fault
from reportgen.spec.toml_cursor import BLANK, MAXIMUM_DEPTH, Cursor, Mistake, Node, TooMuch

__all__ = ["TomlText", "parse"]

_FILLER = re.compile(r"(?:[ \t\n]|#[^\n]*)*+")
_STATEMENT = re.compile(r"[ \t]*(?:\[|[A-Za-z0-9_\"'-][^\n=\"]*=)")
_OPENING = re.compile(r"\[\[?[A-Za-z]|[A-Za-z0-9_-]{1,100}[ \t]*=")
#: Bounded, since what it matches is repeated in the message.
_KEY_WITH_SPACES = re.compile(r"((?:[A-Za-z0-9_-]{1,30} {1,3}){1,4}[A-Za-z0-9_-]{1,30})[ \t]*=")


@dataclass(frozen=True)
class TomlText:
    """What was read: the root table and the mistakes.

    ``header_lost`` says that the name of some table could not be made out, ``truncated`` that the end was not read.
    """

    root: Node
    faults: tuple[Fault, ...]
    header_lost: bool
    truncated: bool


def parse(text: str, file: str) -> TomlText:
    """Read a TOML text. Never raises for what the text says; its mistakes are in ``faults``."""
    reader = _Reader(text.replace("\r\n", "\n"), file)
    reader.read()
    return TomlText(reader.root, tuple(reader.faults), reader.header_lost, reader.truncated)


class _Reader(Cursor):
    """One pass over one text."""

    def __init__(self, text: str, file: str) -> None:
        super().__init__(text, file)
        self.root = self.table = self.node({}, 0, 0)
        self.prefix: tuple[str, ...] = ()
        self.header_lost = False
        self.truncated = False

    # --- statements ---------------------------------------------------------------------------------------------

    def read(self) -> None:
        try:
            while True:
                self.skip(_FILLER)
                if self.offset >= len(self.text):
                    break
                self.statement()
        except TooMuch:
            self.truncated = True
        if not self.faults:
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
        except Mistake as mistake:
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
        self.skip(BLANK)
        if self.offset < len(self.text) and self.text[self.offset] not in "#\n":
            raise Mistake(
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
        except Mistake:
            self.header_lost = True
            raise
        closed = self.text.startswith(closing, self.offset)
        if not closed and self.text[self.offset : self.offset + 1] not in ("", "\n", "#", "]"):
            self.header_lost = True
            raise Mistake(
                self.offset,
                "The name of the table is not readable.",
                found=self.line_of(begin),
                expected='a header such as [states.1]; names with other signs in quotes: [states."no 1"]',
            )
        self.open(keys, several)
        if not closed:
            raise Mistake(begin, f"The header is not closed by {closing}.", found=self.line_of(begin))
        self.offset += len(closing)

    def open(self, keys: list[tuple[str, int]], several: bool) -> None:
        """Make the table of a header the current one."""
        names = tuple(name for name, _ in keys)
        parent = self.root
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
            self.skip(BLANK)
            value = self.value(keys[-1][1], (*prefix, *names), depth, within)
        except Mistake as mistake:
            spaced = _KEY_WITH_SPACES.match(self.text, begin)
            meant = [(re.sub(" +", "_", spaced[1]), begin)] if spaced else keys
            if mistake.path is None:
                mistake.path = (*prefix, *(name for name, _ in meant))
            if meant:
                self.insert(table, prefix, meant, None)
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

    def no_equals_sign(self, begin: int) -> Mistake:
        """What is wrong where a key is not followed by an equals sign."""
        sign = self.text[self.offset : self.offset + 1]
        hint = "Write = in place of the colon." if sign == ":" else None
        offset = self.offset
        if spaced := _KEY_WITH_SPACES.match(self.text, begin):
            offset = begin
            hint = f"Keys are written without spaces: {re.sub(' +', '_', spaced[1])}."
        found = self.line_of(begin)
        return Mistake(offset, "A key must be followed by = and its value.", found=found, hint=hint)

    # --- keys and values ----------------------------------------------------------------------------------------

    def value(self, key_offset: int, path: tuple[str, ...], depth: int, within: str) -> Node:
        begin = self.offset
        sign = self.text[begin : begin + 1]
        if sign in ("[", "{"):
            if depth >= MAXIMUM_DEPTH:
                self.report(
                    begin,
                    "Brackets are nested too deep; the file is not read further.",
                    path,
                    expected=f"at most {MAXIMUM_DEPTH} within one another",
                )
                raise TooMuch
            self.offset += 1
            inner = self.array(path, depth + 1) if sign == "[" else self.inline_table(path, depth + 1)
            result = self.node(inner, begin, key_offset)
            result.defined = True
            return result
        if sign in ('"', "'"):
            return self.quoted(begin, key_offset)
        return self.node(self.scalar(begin, within), begin, key_offset)

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
                raise Mistake(
                    self.offset,
                    "A comma is missing between two items.",
                    found=self.glance(self.offset),
                    expected=", or ]",
                )

    def open_list(self, opening: int) -> Mistake:
        """A list that runs into the next statement, which is then read as such."""
        return Mistake(
            opening,
            "The list is not closed.",
            resume=self.offset,
            found=self.line_of(opening),
            expected="] at its end",
        )

    def looks_like_a_statement(self) -> bool:
        """Whether a new line here begins with a header or ``key =``: then the list above was never closed."""
        line, column = self.place(self.offset)
        start = self.starts[line - 1]
        indented = column <= 100 and not self.text[start : self.offset].strip()
        return indented and _OPENING.match(self.text, self.offset) is not None

    def inline_table(self, path: tuple[str, ...], depth: int) -> dict[str, Node]:
        table = self.node({}, self.offset - 1, self.offset - 1)
        opening = self.offset - 1
        self.skip(BLANK)
        if self.text.startswith("}", self.offset):
            self.offset += 1
            return table.table
        while True:
            if self.text[self.offset : self.offset + 1] in ("", "\n", "#"):
                raise Mistake(
                    opening,
                    "A table in braces must be closed on its line.",
                    found=self.line_of(opening),
                    expected="} on the same line, or a table with a [header] of its own",
                )
            self.assignment(table, path, depth, "list")
            self.skip(BLANK)
            sign = self.text[self.offset : self.offset + 1]
            if sign == "}":
                self.offset += 1
                return table.table
            if sign == ",":
                self.offset += 1
                self.skip(BLANK)
            elif sign not in ("", "\n", "#"):
                raise Mistake(
                    self.offset,
                    "A comma is missing between two keys.",
                    found=self.glance(self.offset),
                    expected=", or }",
                )

    def ask_the_standard_reader(self) -> None:
        """Report what ``tomllib`` refuses in a text that this reader has accepted."""
        try:
            tomllib.loads(self.text)
        except ValueError as error:
            place = re.search(r" \(at line (\d+), column (\d+)\)$", str(error))
            line, column = (int(place[1]), int(place[2])) if place else (len(self.starts), 1)
            message = str(error)[: place.start()] if place else str(error).removesuffix(" (at end of document)")
            self.faults.append(Fault(f"{message}.", file=self.file, line=line, column=column))

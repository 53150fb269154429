"""The calculation file while it is read: its tree with places, and the faults found so far."""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Sequence
from dataclasses import replace
from itertools import islice
from typing import Literal

from reportgen.errors import Fault
from reportgen.spec.toml_cursor import Node
from reportgen.spec.toml_text import TomlText

__all__ = ["MOST_FAULTS", "Location", "Source", "path_of"]

#: Faults listed for one file; a person mends those first.
MOST_FAULTS = 200
_MOST_CHOICES = 500

#: Keys and, from 0, indices that lead to a value.
Location = Sequence[str | int]


def path_of(location: Location) -> str:
    """A location as a path; items of lists are counted from 1, as people do."""
    return ".".join(str(part + 1) if isinstance(part, int) else part for part in location)


class Source:
    """Where everything stands in one calculation file, and what is wrong with it."""

    def __init__(self, text: TomlText, file: str) -> None:
        self.root = text.root
        self._tables: dict[Location, dict[str, Node]] = {}
        self.file = file
        self.faults = list(text.faults)
        self.truncated = text.truncated
        #: With the name of some table unreadable, nobody can say which names are unknown.
        self.names_are_complete = not text.header_lost and not text.truncated

    def node(self, location: Location) -> Node | None:
        """The node at a location; None when nothing stands there."""
        node: Node | None = self.root
        for part in location:
            if node is None:
                return None
            if isinstance(part, int):
                node = node.items[part] if part < len(node.items) else None
            else:
                node = node.table.get(part)
        return node

    def is_broken(self, location: Location) -> bool:
        """Whether the value at a location, or one it stands in, could not be read."""
        return any(
            node is not None and node.broken for node in (self.node(location[:end]) for end in range(len(location) + 1))
        )

    def table(self, *location: str | int) -> dict[str, Node]:
        """Readable entries of the table at a location; none when there is no table."""
        if location not in self._tables:
            node = self.node(location)
            entries = node.table if node is not None else {}
            self._tables[location] = {key: entry for key, entry in entries.items() if not entry.broken}
        return self._tables[location]

    def text(self, *location: str | int) -> str | None:
        """The text at a location; None when there is none or something else stands there."""
        node = self.node(location)
        return node.value if node is not None and isinstance(node.value, str) else None

    def texts(self, *location: str | int) -> list[tuple[tuple[str | int, ...], str]]:
        """A text or the texts of a list, each with its own location."""
        single = self.text(*location)
        if single is not None:
            return [(location, single)]
        node = self.node(location)
        items = node.items if node is not None else []
        return [((*location, index), item.value) for index, item in enumerate(items) if isinstance(item.value, str)]

    def place(self, location: Location, at: Literal["key", "value"] = "value") -> tuple[int, int]:
        """Line and column of a key or value, or of the nearest table round it."""
        node = self.node(location)
        if node is not None and location:
            return (node.key_line, node.key_column) if at == "key" else (node.line, node.column)
        return self.place(location[:-1], "key") if location else (1, 1)

    def locate(self, path: str) -> tuple[str, int, int]:
        """File, line and column of the value at a path, or of its nearest parent that stands in the file."""
        location: list[str | int] = []
        for part in path.split("."):
            node = self.node(location)
            if node is not None and node.items and part.isdecimal():
                location.append(int(part) - 1)
            else:
                location.append(part)
        return (self.file, *self.place(location))

    def report(
        self,
        location: Location,
        message: str,
        *,
        at: Literal["key", "value"] = "value",
        found: str | None = None,
        expected: str | None = None,
        hint: str | None = None,
    ) -> None:
        """Note a fault at a location."""
        self.note(location, Fault(message, found=found, expected=expected, hint=hint), at=at)

    def miss(self, location: Location, message: str, *, expected: str | None, found: str | None = None) -> None:
        """Note that something is not there, at the table where it should be; not where it may merely be unread."""
        unread = self.truncated or (len(location) < 2 and not self.names_are_complete)
        if not unread and not self.is_broken(location):
            self.report(location, message, at="key", found=found, expected=expected)

    def note(self, location: Location, fault: Fault, *, at: Literal["key", "value"] = "value") -> None:
        """Note a fault that does not know its place yet."""
        self.faults.append(replace(fault, path=path_of(location) or None).at(self.file, *self.place(location, at)))

    @property
    def crowded(self) -> bool:
        """Whether there are more faults than will be listed: then slow searches for more are left out."""
        return len(self.faults) > MOST_FAULTS

    def nearest(self, name: str, choices: Iterable[str]) -> str | None:
        """The valid name most like the one found, or None when none is like it."""
        if self.crowded:
            return None
        by_folded = {choice.casefold(): choice for choice in islice(choices, _MOST_CHOICES)}
        found = difflib.get_close_matches(name.casefold()[:100], by_folded, n=1, cutoff=0.6)
        return by_folded[found[0]] if found else None

    def hint(self, name: str, choices: Iterable[str]) -> str | None:
        """The nearest valid name as a question."""
        found = self.nearest(name, choices)
        return f'Did you mean "{found}"?' if found else None

    def sorted_faults(self) -> list[Fault]:
        """The faults in the order of the file, the first ones if they are very many."""
        ordered = sorted(self.faults, key=lambda fault: (fault.file != self.file, fault.line or 0, fault.column or 0))
        further = len(ordered) - MOST_FAULTS
        if further > 0:
            ordered[MOST_FAULTS:] = [Fault(f"{further} further faults are not listed.", file=self.file)]
        return ordered

"""Which relation determines which unknown, and in what order: matching and strongly connected blocks.

The graph has relations on one side and unknowns on the other. A maximum matching is grown by augmenting paths, so that
a relation can be offered and refused one at a time: that is how assumptions are tried, and it needs no second library
to be loaded. What stays unmatched is described by the alternating paths that start there (Dulmage and Mendelsohn,
Canad. J. Math. 10 (1958) 517, doi:10.4153/CJM-1958-052-0). Blocks are the strongly connected components (Tarjan,
SIAM J. Comput. 1 (1972) 146, doi:10.1137/0201010).
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

__all__ = ["Matching", "blocks_in_order"]


class Matching:
    """A maximum matching between relations (by key) and unknowns (by path) that can grow, and go back to a mark."""

    def __init__(self) -> None:
        self.edges: dict[str, tuple[str, ...]] = {}
        self.unknown_of: dict[str, str] = {}
        self.relation_of: dict[str, str] = {}
        #: Unknowns from which no alternating path leads to a free one; true until a relation is taken out.
        self._closed: set[str] = set()
        self._undo: list[tuple[dict[str, Any], str, Any]] | None = None

    def mark(self) -> None:
        """Begin a trial that ``back`` takes back."""
        self._undo = []

    def back(self) -> None:
        """As it was at the mark."""
        for table, key, value in reversed(self._undo or ()):
            if value is None:
                table.pop(key, None)
            else:
                table[key] = value
        self._undo = None
        self._closed.clear()

    def _put(self, table: dict[str, Any], key: str, value: Any) -> None:
        if self._undo is not None:
            self._undo.append((table, key, table.get(key)))
        if value is None:
            table.pop(key, None)
        else:
            table[key] = value

    def add(self, key: str, unknowns: Iterable[str]) -> bool:
        """Offer a relation with the unknowns it can be solved for; True when it finds one of its own."""
        self._put(self.edges, key, tuple(unknowns))
        return self._augment(key)

    def add_if_open(self, key: str, unknowns: Iterable[str]) -> bool:
        """Offer a relation that is only kept when it finds an unknown of its own."""
        found = self.add(key, unknowns)
        if not found:
            self._put(self.edges, key, None)
        return found

    def remove(self, key: str) -> None:
        """Take a relation out; its unknown is free again."""
        unknown = self.unknown_of.get(key)
        if unknown is not None:
            self._put(self.unknown_of, key, None)
            self._put(self.relation_of, unknown, None)
            self._closed.clear()
        self._put(self.edges, key, None)

    def is_open(self, unknown: str) -> bool:
        """Whether one more relation for this unknown could still find one of its own: nothing determines it."""
        return self._free_end([unknown], {unknown: None})[0] is not None

    def _augment(self, start: str) -> bool:
        """Grow the matching by one along an alternating path."""
        came_from: dict[str, str | None] = {}
        for unknown in self.edges[start]:
            came_from.setdefault(unknown, start)
        free, came_from = self._free_end(list(came_from), came_from)
        if free is not None:
            self._flip(free, came_from)
        return free is not None

    def _free_end(self, queue: list[str], came_from: dict[str, str | None]) -> tuple[str | None, dict[str, str | None]]:
        """A free unknown at the end of an alternating path, breadth first, and the relation each was reached by."""
        for unknown in queue:
            if unknown in self._closed:
                continue
            owner = self.relation_of.get(unknown)
            if owner is None:
                return unknown, came_from
            for other in self.edges[owner]:
                if other not in came_from:
                    came_from[other] = owner
                    queue.append(other)
        self._closed.update(queue)
        return None, came_from

    def _flip(self, unknown: str, came_from: Mapping[str, str | None]) -> None:
        free: str | None = unknown
        while free is not None:
            key = came_from[free]
            assert key is not None  # a path begins at a relation
            previous = self.unknown_of.get(key)
            self._put(self.unknown_of, key, free)
            self._put(self.relation_of, free, key)
            free = previous

    def idle(self) -> list[str]:
        """Relations without an unknown of their own."""
        return [key for key in self.edges if key not in self.unknown_of]

    def overdetermined(self, key: str) -> list[str]:
        """Relations that compete with an idle one for the same unknowns, itself first."""
        found = [key]
        seen = {key}
        for current in found:
            for unknown in self.edges[current]:
                owner = self.relation_of[unknown]
                if owner not in seen:
                    seen.add(owner)
                    found.append(owner)
        return found

    def undetermined(self, unknowns: Sequence[str]) -> list[tuple[list[str], int]]:
        """Groups of unknowns that are not determined, each with how many more values it needs."""
        neighbours: dict[str, list[str]] = {}
        for key, reachable in self.edges.items():
            for unknown in reachable:
                neighbours.setdefault(unknown, []).append(key)
        groups: list[tuple[list[str], int]] = []
        for start in unknowns:
            if start in self.relation_of:
                continue
            found, seen = [start], {start}
            for unknown in found:
                for key in neighbours.get(unknown, ()):
                    other = self.unknown_of.get(key)
                    if other is not None and other not in seen:
                        seen.add(other)
                        found.append(other)
            merged, missing = found, 1
            apart = []
            for members, count in groups:
                if seen.isdisjoint(members):
                    apart.append((members, count))
                else:
                    merged = list(dict.fromkeys([*members, *merged]))
                    seen.update(members)
                    missing += count
            groups = [*apart, (merged, missing)]
        return groups


def blocks_in_order(keys: Sequence[str], needs: Mapping[str, Sequence[str]]) -> list[list[str]]:
    """Strongly connected components of "needs", those needed first, otherwise in the order of ``keys``."""
    index: dict[str, int] = {}
    low: dict[str, int] = {}
    stack: list[str] = []
    on_stack: set[str] = set()
    position = {key: number for number, key in enumerate(keys)}
    blocks: list[list[str]] = []
    for root in keys:
        if root in index:
            continue
        index[root] = low[root] = len(index)
        stack.append(root)
        on_stack.add(root)
        work = [(root, iter(needs[root]))]
        while work:
            key, remaining = work[-1]
            child = next(remaining, None)
            if child is None:
                work.pop()
                if work:
                    parent = work[-1][0]
                    low[parent] = min(low[parent], low[key])
                if low[key] == index[key]:
                    block = [stack.pop()]
                    while block[-1] != key:
                        block.append(stack.pop())
                    on_stack.difference_update(block)
                    blocks.append(sorted(block, key=position.__getitem__))
            elif child not in index:
                index[child] = low[child] = len(index)
                stack.append(child)
                on_stack.add(child)
                work.append((child, iter(needs[child])))
            elif child in on_stack:
                low[key] = min(low[key], index[child])
    return blocks

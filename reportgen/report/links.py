"""Where a number comes from: the anchor on the page that a value's path leads to."""

from __future__ import annotations

import re

from reportgen.record import Record

__all__ = ["Links", "anchor"]

_UNSAFE = re.compile(r"[^A-Za-z0-9._-]")


def anchor(kind: str, name: str) -> str:
    """Identifier of an element: letters, digits, dot, hyphen and underscore stand, all else by its code point.

    Two different names never share an anchor: the tilde that opens a code point is itself written as one.
    """
    return f"{kind}-" + _UNSAFE.sub(lambda match: f"~{ord(match[0]):x}~", name)


class Links:
    """Targets of every path of one record.

    A computed value leads to the step that solves it, an input to its row in the table of inputs, a value that an
    input fixes elsewhere (``applies_to``) to that input, a value taken by an assumption to the assumption.
    """

    def __init__(self, record: Record) -> None:
        data = record.data
        self._targets: dict[str, str] = {}
        for assumption in reversed(data["assumptions"]):
            self._targets[f"assumptions.{assumption['id']}"] = anchor("assumption", assumption["id"])
            for path in assumption["affects"]:
                self._targets[path] = anchor("assumption", assumption["id"])
        for path, entry in record.inputs.items():
            for target in entry["applies_to"]:
                self._targets[target] = anchor("value", path)
        for path in record.inputs:
            self._targets[path] = anchor("value", path)
        for path, entry in record.values.items():
            known = entry["value"] is not None and path not in record.inputs
            if known and entry["relation"] in data["relations"]:
                self._targets[path] = anchor("value", path)
        for name in data["plant"].get("fluids", {}):
            self._targets[f"fluids.{name}"] = anchor("fluid", name)

    def target(self, path: str) -> str | None:
        """Anchor that the path leads to, or None when the record does not say where the value comes from."""
        return self._targets.get(path)

"""Texts of the title block, from the calculation file itself or from Markdown files beside it.

What turns Markdown into a page looks from every opening bracket to the end of its paragraph, and from every ``<`` to
the end of the text. Both are bounded here, far above what a person writes, so that no text keeps it busy for long.

Paths that no value can have are told here too, together with the other faults of the file; whoever makes the page
checks the rest of what stands in double braces.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from pathlib import Path

from reportgen.errors import Fault, InputError
from reportgen.names import NAMES
from reportgen.spec.calculation import Narrative
from reportgen.spec.folder import read_bytes, read_text
from reportgen.spec.paths import result_dimensions
from reportgen.spec.schema import NARRATIVES
from reportgen.spec.source import Source

__all__ = ["narratives_of"]

_LONGEST_TEXT = 100_000
_LONGEST_PARAGRAPH = 10_000
_MOST_BRACKETS = 200
_MOST_ANGLES = 500
_VALUE = re.compile(r"""\{\{-?\s*value\(\s*(["'])([^"'\n]{1,200})\1""")


def narratives_of(source: Source, folder: Path, files: dict[str, bytes]) -> dict[str, Narrative]:
    """The texts by their key; files that were read are added to ``files``, faults are noted in ``source``."""
    narratives: dict[str, Narrative] = {}
    for key in NARRATIVES:
        text = source.text("calculation", key)
        name = source.text("calculation", f"{key}_file")
        if text is not None:
            node = source.node(("calculation", key))
            assert node is not None  # there is a text
            narratives[key] = Narrative(text, source.file, node.text_line, node.text_column)
        elif name is not None:
            try:
                content = read_bytes(folder, name)
                narratives[key] = Narrative(read_text(content, name), name, 1, 1)
                files[name] = content
            except InputError as error:
                for fault in error.faults:
                    if fault.file is None:
                        source.note(("calculation", f"{key}_file"), fault)
                    else:
                        source.faults.append(fault)
        if key in narratives:
            found = list(_beyond_bounds(narratives[key], f"calculation.{key}"))
            source.faults.extend(found or _impossible_paths(source, narratives[key], f"calculation.{key}"))
    return narratives


def _impossible_paths(source: Source, narrative: Narrative, path: str) -> Iterator[Fault]:
    """References to values that the calculation cannot have; a known name of a known owner is left to the page."""
    line, begin = narrative.line, 0
    for match in _VALUE.finditer(narrative.text):
        wanted = match[2]
        breaks = narrative.text.count("\n", begin, match.start())
        line, begin = line + breaks, match.start()
        section, _, rest = wanted.partition(".")
        owner, _, name = rest.rpartition(".")
        if section == "surroundings" or (name in {*NAMES, "phase"} and owner in source.table(section)):
            continue
        wrong = result_dimensions(source, wanted)
        if isinstance(wrong, str):
            indent = match.start() - narrative.text.rfind("\n", 0, match.start())
            column = indent if line > narrative.line else indent - 1 + narrative.column
            yield Fault(f"No value can have this path. {wrong}", path, found=f'"{wanted}"').at(
                narrative.file, line, column
            )


def _beyond_bounds(narrative: Narrative, path: str) -> Iterator[Fault]:
    """The first bound that a text passes, at its place."""
    text = narrative.text

    def fault(message: str, offset: int, count: int, most: int, what: str) -> Fault:
        line = narrative.line + text.count("\n", 0, offset)
        column = narrative.column if line == narrative.line else 1
        return Fault(message, path=path, found=f"{count} {what}", expected=f"at most {most}").at(
            narrative.file, line, column
        )

    if len(text) > _LONGEST_TEXT:
        yield fault("The text is too long.", 0, len(text), _LONGEST_TEXT, "characters")
        return
    angles = text.count("<")
    if angles > _MOST_ANGLES:
        yield fault("The text holds too many signs <.", text.index("<"), angles, _MOST_ANGLES, "of them")
        return
    for begin, paragraph in _paragraphs(text):
        brackets = paragraph.count("[")
        if len(paragraph) > _LONGEST_PARAGRAPH:
            yield fault("A paragraph is too long.", begin, len(paragraph), _LONGEST_PARAGRAPH, "characters")
            return
        if brackets > _MOST_BRACKETS:
            yield fault("A paragraph holds too many opening brackets.", begin, brackets, _MOST_BRACKETS, "of them")
            return


def _paragraphs(text: str) -> Iterator[tuple[int, str]]:
    """Runs of lines that are not blank, with the offset at which each begins."""
    begin = end = 0
    for line in (*text.splitlines(keepends=True), ""):
        if line.strip():
            end += len(line)
            continue
        if end > begin:
            yield begin, text[begin:end]
        begin = end = end + len(line)

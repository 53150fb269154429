"""The reader of TOML with places, against the standard library's reader and on its own."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest

from reportgen.spec.toml_cursor import MAXIMUM_ENTRIES, Node
from reportgen.spec.toml_text import parse

ROOT = Path(__file__).parents[2]
WRITTEN = sorted(
    [*(ROOT / "projects").glob("*/*.toml"), *(ROOT / "tests" / "published").glob("*/*.toml"), ROOT / "pyproject.toml"]
)

EVERYTHING = """\
# every construct that a calculation file can use
title = "a \\"quoted\\" \\u00b1 text" # with a comment
literal = 'C:\\data'
"quoted key" = 1
a.b . c = 2
block = \"\"\"
first ""line""
second \\
   continued\"\"\"
raw = '''
it''s raw'''
whole = 1_000
hex = 0xFF
real = -6.02e23
yes = true
no = false
endless = inf
day = 2026-03-12
moment = 2026-03-12T07:32:00Z
spaced = 2026-03-12 07:32:00
list = [ 1, 2, # comment
  3,
]
mixed = [ "a", { b = [ ] }, [ [ 1.5 ] ] ]
empty = {}
inline = { x = "1", y.z = 2 }

[table]
[table.inner]
k = 1
[later.sub]
k = 2
[later]
k = 3
[[rows]]
k = 1
[rows.part]
k = 1
[[rows]]
k = 2
"""


@pytest.mark.parametrize("path", WRITTEN, ids=lambda path: f"{path.parent.name}/{path.name}")
def test_written_files_read_as_by_the_standard_library(path: Path) -> None:
    text = path.read_text("utf-8")
    read = parse(text, path.name)
    assert read.faults == ()
    assert read.root.plain() == tomllib.loads(text)


def test_every_construct_reads_as_by_the_standard_library() -> None:
    read = parse(EVERYTHING, "x.toml")
    assert read.faults == ()
    assert read.root.plain() == tomllib.loads(EVERYTHING)


def test_windows_line_ends_change_neither_values_nor_places() -> None:
    unix, windows = parse(EVERYTHING, "x"), parse(EVERYTHING.replace("\n", "\r\n"), "x")
    assert windows.root.plain() == unix.root.plain()

    def places(node: Node) -> list[tuple[int, int]]:
        inner = [*node.table.values(), *node.items]
        return [(node.line, node.column), *(place for each in inner for place in places(each))]

    assert places(windows.root) == places(unix.root)


def test_places_are_those_of_key_and_value() -> None:
    root = parse('[states.1]\n  pressure   = "39 bar"\nlist = ["a",\n   "b"]\ninline = { x = 1 }\n', "x").root
    state = root.table["states"].table["1"]
    assert (state.key_line, state.key_column) == (1, 9)
    pressure = state.table["pressure"]
    assert (pressure.key_line, pressure.key_column, pressure.line, pressure.column) == (2, 3, 2, 16)
    assert [(item.line, item.column) for item in state.table["list"].items] == [(3, 9), (4, 4)]
    inner = state.table["inline"].table["x"]
    assert (inner.key_column, inner.column) == (12, 16)


def test_columns_count_characters_not_bytes() -> None:
    read = parse('t = { value = "40 ± 2 °C", wrong }\n', "x")
    assert [(fault.line, fault.column) for fault in read.faults] == [(1, 34)]


@pytest.mark.parametrize(
    ("line", "column", "words"),
    [
        ("pressure = 39 bar", 12, '"39 bar"'),
        ("pressure = 0,85", 12, "decimal point"),
        ("pressure = “39 bar”", 12, "straight quotation marks"),
        ("pressure : 3", 10, "in place of the colon"),
        ("mass flow = 3", 1, "mass_flow"),
        ("pressure =", 11, "value is missing"),
        ("pressure", 9, "followed by ="),
        ('pressure = "39 bar', 12, "quotation mark"),
        ('pressure = "39" bar', 17, "follows the value"),
        ("pressure = 2026-02-30", 12, "a date as"),
        ("pressure = 12.3.2026", 12, "a date as"),
        ("pressure = True", 12, "true"),
        ("pressure = { a = 1, b = 2", 12, "closed on its line"),
        ("pressure = { a = 1 b = 2 }", 18, "This is not a value"),
        ('pressure = { a = "1" b = 2 }', 22, "comma is missing"),
        ("pressure = [1 2]", 13, "This is not a value"),
        ('pressure = ["1" "2"]', 17, "comma is missing"),
        ("= 3", 1, "key is expected"),
        ("[states.1", 1, "not closed by ]"),
        ("[states 1]", 9, "not readable"),
        ("[]", 2, "key is expected"),
        ('pressure = "\\q"', 12, "backslash"),
    ],
)
def test_a_mistake_is_placed_and_the_next_line_still_read(line: str, column: int, words: str) -> None:
    read = parse(f"before = 1\n{line}\nafter = = 2\n", "x.toml")
    assert [(fault.line, fault.column) for fault in read.faults] == [(2, column), (3, 9)]
    assert words in str(read.faults[0])


def test_an_unreadable_value_is_marked_and_not_lost() -> None:
    root = parse("[states.1]\npressure = 39 bar\nmass flow = 3\n", "x").root
    state = root.table["states"].table["1"]
    assert state.table["pressure"].broken
    assert state.table["mass_flow"].broken
    assert state.plain() == {}


def test_what_only_the_standard_library_refuses_is_reported() -> None:
    # A table made by dotted keys cannot be opened again by a header (TOML 1.0, "Table").
    read = parse("a.b = 1\n[a]\nc = 2\n", "x.toml")
    assert len(read.faults) == 1
    assert read.faults[0].line == 2


@pytest.mark.parametrize(
    "text",
    [
        "x = " + "[" * 200_000,
        "x = " + "{a=" * 200_000,
        "[" + ".".join("a" * 200_000) + "]",
        ".".join("a" * 200_000) + " = 1",
        "x = [" + "1," * 400_000 + "]",
        "x = " + "9" * 900_000,
        "x = 1e" + "9" * 900_000,
        'x = """' + '\\"' * 400_000,
        "\n".join(f"[t{number}]" for number in range(60_000)),
        "a b " * 200_000 + "=",
        "= \n" * 300_000,
        "[[a]]\n" * 100_000,
        "x = '" + "'" * 900_000,
        "x = [\n" + "\n" * 900_000,
    ],
    ids=range(14),
)
def test_hostile_texts_end_soon_with_few_faults(text: str) -> None:
    read = parse(text[:1_000_000], "x.toml")
    assert 1 <= len(read.faults) <= 101


def test_the_number_of_entries_is_bounded() -> None:
    read = parse("\n".join(f"k{number} = 1" for number in range(MAXIMUM_ENTRIES + 5)), "x.toml")
    assert read.truncated
    assert [fault.line for fault in read.faults] == [MAXIMUM_ENTRIES + 1]

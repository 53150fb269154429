"""Texts of the title block: where they come from, and bounds that keep the making of a page short."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.spec.writing import HEAD, TITLE, faults, read

STATE = '\n[states.1]\nfluid = "steam"\n'


@pytest.mark.parametrize(
    ("text", "line", "message"),
    [
        ("x" * 100_001, 1, "The text is too long. Found: 100001 characters"),
        ("A\n\n" + "x " * 5_001, 3, "A paragraph is too long. Found: 10002 characters"),
        ("A\n\nB\n" + "[" * 201, 3, "too many opening brackets. Found: 201 of them. Would do: at most 200"),
        ("A\n" + "<a \n\n" * 501, 2, "too many signs <. Found: 501 of them"),
    ],
)
def test_texts_that_would_keep_a_page_busy_are_refused_at_their_place(
    text: str, line: int, message: str, tmp_path: Path
) -> None:
    (tmp_path / "purpose.md").write_text(text, encoding="utf-8", newline="\n")
    (fault,) = faults(tmp_path, HEAD.replace(TITLE, TITLE + 'purpose_file = "purpose.md"\n') + STATE)
    assert message in str(fault)
    assert (fault.file, fault.line, fault.path) == ("purpose.md", line, "calculation.purpose")


def test_inside_the_calculation_file_the_line_is_that_of_the_file(tmp_path: Path) -> None:
    text = TITLE + "method = '''\nA\n\n" + "[" * 201 + "\n'''\n"
    (fault,) = faults(tmp_path, HEAD.replace(TITLE, text) + STATE)
    assert (fault.file, fault.line) == ("calculation.toml", text.count("\n") - 1)


def test_what_a_person_writes_passes(tmp_path: Path) -> None:
    rows = "".join(f"| [{number}](https://example.org/{number}) | p < 9 bar |\n" for number in range(100))
    paragraphs = "\n\n".join(["A sentence with a [link](https://example.org). " * 20] * 80)
    text = f"| a | b |\n|---|---|\n{rows}\n\n{paragraphs}\n" + " " * 5_000
    (tmp_path / "purpose.md").write_text(text, encoding="utf-8", newline="\n")
    calculation = read(tmp_path, HEAD.replace(TITLE, TITLE + 'purpose_file = "purpose.md"\n') + STATE)
    assert calculation.narratives["purpose"].text == text

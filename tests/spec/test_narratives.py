"""Texts of the title block: where they come from, and bounds that keep the making of a page short."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from reportgen import evaluation, spec
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


def test_impossible_paths_are_told_with_the_other_faults_of_the_file(tmp_path: Path) -> None:
    text = (
        TITLE + 'conclusion = """\nIt is {{ value("states.1.presure") }},\n  and {{ value("total.lost_wrok") }}.\n"""\n'
    )
    found = faults(tmp_path, HEAD.replace(TITLE, text) + STATE + 'pressure = "7 barr"\n')
    line = text.count("\n") - 2
    assert [(fault.path, fault.line, fault.column) for fault in found[:2]] == [
        ("calculation.conclusion", line, 7),
        ("calculation.conclusion", line + 1, 7),
    ]
    assert 'Did you mean "pressure"' in str(found[0])
    assert found[2].path == "states.1.pressure"


@pytest.mark.parametrize("name", ["letdown-station", "instrument-air", "nitrogen-blanketing"])
def test_every_value_and_input_of_an_evaluated_plant_may_be_quoted(name: str, tmp_path: Path) -> None:
    folder = Path(__file__).parents[2] / "projects" / name
    record = evaluation.evaluate(spec.read(folder)).data
    paths = sorted({*record["values"], *record["inputs"]})
    shutil.copytree(folder, tmp_path / name)
    for begin in range(0, len(paths), 100):
        quoted = "\n\n".join(f'{{{{ value("{path}") }}}}' for path in paths[begin : begin + 100])
        (tmp_path / name / "purpose.md").write_text(quoted, encoding="utf-8", newline="\n")
        spec.read(tmp_path / name)

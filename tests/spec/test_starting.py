"""Starting a calculation: a whole folder or nothing, never over anything."""

from __future__ import annotations

from pathlib import Path

import pytest

from reportgen import spec
from reportgen.errors import InputError


def everything(folder: Path) -> list[str]:
    return sorted(path.relative_to(folder).as_posix() for path in folder.rglob("*"))


@pytest.mark.parametrize("name", ["new", "deeper/new", "empty"])
def test_the_starter_can_be_read_as_it_is(name: str, tmp_path: Path) -> None:
    (tmp_path / "empty").mkdir()
    written = spec.start(tmp_path / name)
    assert written == [tmp_path / name / file for file in ("calculation.toml", "purpose.md")]
    calculation = spec.read(tmp_path / name)
    assert calculation.narratives.keys() == {"purpose", "method", "conclusion"}
    assert spec.find(tmp_path) == [tmp_path / name]
    left_over = [path for path in everything(tmp_path) if Path(path).name.startswith(".")]
    assert left_over == []


def test_the_starter_shows_what_a_first_calculation_needs(tmp_path: Path) -> None:
    spec.start(tmp_path / "new")
    calculation = spec.read(tmp_path / "new")
    assert any(given.quantity.expanded_uncertainty for given in calculation.inputs.values())
    assert any(given.quantity.source for given in calculation.inputs.values())
    assert any(given.quantity.gauge for given in calculation.inputs.values())
    assert len(calculation.equipment) == 2
    assert any(piece.limits for piece in calculation.equipment.values())
    assert {entry.status for entry in calculation.assumptions.values()} == {"accepted", "to be verified"}
    assert calculation.criteria
    assert calculation.references
    assert [row.index for row in calculation.revisions] == [calculation.revision]


@pytest.mark.parametrize("kind", ["calculation", "something else", "a file"])
def test_nothing_is_overwritten(kind: str, tmp_path: Path) -> None:
    folder = tmp_path / "taken"
    if kind == "a file":
        folder.write_text("mine", encoding="utf-8")
    else:
        folder.mkdir()
        (folder / ("calculation.toml" if kind == "calculation" else "notes.txt")).write_text("mine", encoding="utf-8")
    before = everything(tmp_path)
    with pytest.raises(InputError, match="nothing was written"):
        spec.start(folder)
    assert everything(tmp_path) == before


def test_a_failure_half_way_leaves_nothing_behind(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def no_rename(self: Path, target: Path) -> None:
        raise OSError("disk full")

    monkeypatch.setattr(Path, "rename", no_rename)
    with pytest.raises(OSError, match="disk full"):
        spec.start(tmp_path / "new")
    assert everything(tmp_path) == []


def test_the_folder_one_stands_in_can_be_started(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    spec.start(Path())
    assert everything(tmp_path) == ["calculation.toml", "purpose.md"]
    assert Path.cwd() == tmp_path

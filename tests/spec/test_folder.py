"""Finding calculation folders, and never reading outside of one."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from reportgen import spec
from reportgen.errors import InputError
from reportgen.spec.folder import read_bytes
from tests.spec.writing import FLUIDS, SURROUNDINGS, TITLE, faults


def make(folder: Path) -> Path:
    folder.mkdir(parents=True)
    (folder / "calculation.toml").write_text("", encoding="utf-8")
    return folder


def symlink(link: Path, target: Path) -> None:
    try:
        link.symlink_to(target)
    except OSError:
        pytest.skip("this system lets nobody make symbolic links")


def test_a_folder_with_a_calculation_is_found_itself(tmp_path: Path) -> None:
    make(tmp_path / "a")
    make(tmp_path / "a" / "inner")
    assert spec.find(tmp_path / "a") == [tmp_path / "a"]


def test_folders_below_are_found_in_order_but_not_issued_or_hidden_ones(tmp_path: Path) -> None:
    for name in ("b", "a/z", "a/y", ".hidden", "issued/A", "deep/1/2/3"):
        make(tmp_path / name)
    assert spec.find(tmp_path) == [tmp_path / name for name in ("a/y", "a/z", "b", "deep/1/2/3")]


def test_a_circle_of_links_is_not_followed(tmp_path: Path) -> None:
    make(tmp_path / "a")
    symlink(tmp_path / "round", tmp_path)
    assert spec.find(tmp_path) == [tmp_path / "a"]


def test_a_folder_that_cannot_be_looked_into_is_not_passed_over(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    make(tmp_path / "a")
    (tmp_path / "closed").mkdir()
    scan = os.scandir

    def guarded(path: str) -> object:
        if Path(path).name == "closed":
            raise PermissionError(13, "Permission denied", path)
        return scan(path)

    monkeypatch.setattr(os, "scandir", guarded)
    with pytest.raises(InputError, match="cannot be looked into: Permission denied") as caught:
        spec.find(tmp_path)
    assert [fault.file for fault in caught.value.faults] == [(tmp_path / "closed").as_posix()]


@pytest.mark.parametrize("name", ["missing", "empty"])
def test_nothing_found_says_what_was_looked_for(name: str, tmp_path: Path) -> None:
    (tmp_path / "empty").mkdir()
    with pytest.raises(InputError, match=r"calculation\.toml") as caught:
        spec.find(tmp_path / name)
    assert caught.value.faults[0].file == (tmp_path / name).as_posix()


@pytest.mark.parametrize(
    "name",
    [
        "../secret.md",
        "texts/../../secret.md",
        "/etc/hostname",
        "C:/secret.md",
        "c:secret.md",
        "..\\secret.md",
        "texts//a.md",
        "a.md/",
        "",
        "..",
        "a\0.md",
    ],
)
def test_a_name_that_leads_out_of_the_folder_is_refused(name: str, tmp_path: Path) -> None:
    inside = tmp_path / "calculation"
    inside.mkdir()
    (tmp_path / "secret.md").write_text("secret", encoding="utf-8")
    (inside / "a.md").write_text("a", encoding="utf-8")
    with pytest.raises(InputError, match="must be in the folder"):
        read_bytes(inside, name)


@pytest.mark.parametrize("name", ["link.md", "linked/secret.md"])
def test_a_link_out_of_the_folder_is_refused(name: str, tmp_path: Path) -> None:
    inside, outside = tmp_path / "calculation", tmp_path / "outside"
    inside.mkdir()
    outside.mkdir()
    (outside / "secret.md").write_text("secret", encoding="utf-8")
    symlink(inside / "link.md", outside / "secret.md")
    symlink(inside / "linked", outside)
    with pytest.raises(InputError, match="link that leads out"):
        read_bytes(inside, name)


def test_a_link_within_the_folder_is_followed(tmp_path: Path) -> None:
    (tmp_path / "purpose.md").write_text("Why.", encoding="utf-8")
    symlink(tmp_path / "link.md", tmp_path / "purpose.md")
    assert read_bytes(tmp_path, "link.md") == b"Why."


def test_a_folder_a_pipe_and_a_circular_link_are_no_files(tmp_path: Path) -> None:
    (tmp_path / "folder").mkdir()
    symlink(tmp_path / "circle", tmp_path / "circle")
    names = ["folder", "circle"]
    if hasattr(os, "mkfifo"):
        os.mkfifo(tmp_path / "pipe")
        names.append("pipe")
    for name in names:
        with pytest.raises(InputError):
            read_bytes(tmp_path, name)


def test_a_file_of_more_than_a_megabyte_is_refused(tmp_path: Path) -> None:
    (tmp_path / "long.md").write_bytes(b"x" * 1_000_001)
    with pytest.raises(InputError, match="too large"):
        read_bytes(tmp_path, "long.md")
    (tmp_path / "calculation.toml").write_bytes(b"#" * 1_000_001)
    with pytest.raises(InputError, match="too large") as caught:
        spec.read(tmp_path)
    assert caught.value.faults[0].file == "calculation.toml"


def test_a_narrative_file_that_cannot_be_read_is_a_fault_at_its_name(tmp_path: Path) -> None:
    state = '\n[states.1]\nfluid = "steam"\n'
    found = faults(tmp_path, TITLE + 'purpose_file = "purpose.md"\n' + SURROUNDINGS + FLUIDS + state)
    assert [(fault.place, fault.path) for fault in found] == [("calculation.toml:8:16", "calculation.purpose_file")]

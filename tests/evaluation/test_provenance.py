"""Provenance: digests, versions, and the commit of the input files alone."""

from __future__ import annotations

import hashlib
import json
import shutil
import subprocess
from pathlib import Path
from types import SimpleNamespace

import numpy
import pytest

from reportgen.evaluation.provenance import git_state, provenance

NAMES = ["calculation.toml"]


def git(folder: Path, *arguments: str) -> str:
    command = ["git", "-C", str(folder), "-c", "user.name=Tester", "-c", "user.email=tester@example.org", *arguments]
    return subprocess.run(command, check=True, capture_output=True, text=True).stdout.strip()


@pytest.fixture
def repository(tmp_path: Path) -> Path:
    if shutil.which("git") is None:
        pytest.skip("git is not installed")
    git(tmp_path, "init", "-q")
    folder = tmp_path / "calc"
    folder.mkdir()
    (folder / NAMES[0]).write_text("a", encoding="utf-8")
    return folder


def test_digests_versions_and_sources() -> None:
    model = SimpleNamespace(data_files=[{"file": "water.json", "sha256": "ab" * 32}], sources=["IAPWS R6-95(2018)"])
    section = provenance({"b.md": b"text", "a.toml": b"x"}, [model, model])
    assert section["files"] == [
        {"name": "a.toml", "sha256": hashlib.sha256(b"x").hexdigest()},
        {"name": "b.md", "sha256": hashlib.sha256(b"text").hexdigest()},
    ]
    assert section["packages"]["numpy"] == numpy.__version__
    assert section["fluid_data"] == [{"file": "water.json", "sha256": "ab" * 32, "source": "IAPWS R6-95(2018)"}]
    assert section["git"] == {"commit": None, "clean": None}


def test_outside_of_a_repository_the_commit_is_unknown(tmp_path: Path) -> None:
    assert git_state(tmp_path, NAMES) == {"commit": None, "clean": None}


def test_without_git_the_commit_is_unknown(repository: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PATH", "")
    assert git_state(repository, NAMES) == {"commit": None, "clean": None}


def test_clean_means_these_files_committed_and_unchanged(repository: Path) -> None:
    git(repository, "commit", "-q", "--allow-empty", "-m", "empty")
    assert git_state(repository, NAMES) == {"commit": None, "clean": False}
    git(repository, "add", NAMES[0])
    assert git_state(repository, NAMES) == {"commit": None, "clean": False}
    git(repository, "commit", "-q", "-m", "first")
    first = git(repository, "rev-parse", "HEAD")
    assert git_state(repository, NAMES) == {"commit": first, "clean": True}

    other = repository.parent / "other.txt"
    other.write_text("x", encoding="utf-8")
    assert git_state(repository, NAMES) == {"commit": first, "clean": True}
    git(repository.parent, "add", "other.txt")
    git(repository.parent, "commit", "-q", "-m", "work elsewhere")
    assert git_state(repository, NAMES) == {"commit": first, "clean": True}

    (repository / NAMES[0]).write_text("b", encoding="utf-8")
    assert git_state(repository, NAMES) == {"commit": first, "clean": False}


def test_nothing_of_the_machine_is_told(repository: Path) -> None:
    text = json.dumps(provenance({NAMES[0]: b"a"}, [], repository))
    assert str(repository) not in text
    assert Path.home().as_posix() not in text

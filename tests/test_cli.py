"""The commands as a user runs them: exit status, messages, and files left untouched by a failure."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest
from click.testing import CliRunner

from reportgen.cli import main

ROOT = Path(__file__).parents[1]
PROJECTS = ROOT / "projects"
MALFORMED = sorted((ROOT / "tests" / "spec" / "malformed").glob("*.toml"))
UNSOLVABLE = sorted((ROOT / "tests" / "unsolvable").glob("*.toml"))


def run(*arguments: object) -> object:
    return CliRunner().invoke(main, [str(argument) for argument in arguments])


def put(file: Path, folder: Path) -> Path:
    """A calculation folder that holds a copy of one file."""
    folder.mkdir(parents=True)
    shutil.copyfile(file, folder / "calculation.toml")
    return folder


def snapshot(folder: Path) -> dict[str, bytes]:
    return {path.relative_to(folder).as_posix(): path.read_bytes() for path in folder.rglob("*") if path.is_file()}


@pytest.fixture(scope="module")
def drafted(tmp_path_factory: pytest.TempPathFactory) -> Path:
    site = tmp_path_factory.mktemp("drafted") / "site"
    result = run("draft", PROJECTS, "--site", site)
    assert result.exit_code == 0, result.output
    return site


def test_start_writes_a_calculation_that_evaluates(tmp_path: Path) -> None:
    folder = tmp_path / "new"
    assert run("start", folder).exit_code == 0
    assert run("evaluate", folder).exit_code == 0


def test_start_never_overwrites(tmp_path: Path) -> None:
    folder = tmp_path / "new"
    run("start", folder)
    before = snapshot(folder)
    result = run("start", folder)
    assert result.exit_code == 2
    assert snapshot(folder) == before


def test_evaluate_prints_results_cautions_and_criteria() -> None:
    result = run("evaluate", PROJECTS / "letdown-station")
    assert result.exit_code == 0
    for text in ("PRV-3", "kW/K", "T32", "STOP", "C1", "met"):
        assert text in result.output


def test_evaluate_json_is_the_record() -> None:
    result = run("evaluate", PROJECTS / "letdown-station", "--json")
    record = json.loads(result.stdout)
    assert record["format"] == "reportgen-record/1"


def test_strict_answers_1_while_a_stop_caution_stands() -> None:
    assert run("evaluate", PROJECTS / "letdown-station", "--strict").exit_code == 1


def test_draft_names_the_register(drafted: Path) -> None:
    assert (drafted / "index.html").is_file()
    assert (drafted / "SB-TH-014" / "A" / "index.html").is_file()


def test_schema_is_json() -> None:
    result = run("schema")
    assert result.exit_code == 0
    assert json.loads(result.stdout)["type"] == "object"


def test_fluids_lists_and_shows() -> None:
    listing = run("fluids")
    assert listing.exit_code == 0
    for name in ("water", "carbon dioxide", "R134a"):
        assert name in listing.output
    one = run("fluids", "water")
    assert one.exit_code == 0
    assert "10.1063/1.1461829" in one.output  # Wagner and Pruss 2002


def test_a_misspelt_fluid_offers_the_nearest() -> None:
    result = run("fluids", "watter")
    assert result.exit_code == 2
    assert "water" in result.output


def test_there_are_at_least_thirty_malformed_and_six_unsolvable_files() -> None:
    assert len(MALFORMED) >= 30
    assert len(UNSOLVABLE) >= 6


@pytest.mark.parametrize("file", MALFORMED, ids=lambda file: file.stem)
def test_a_malformed_file_answers_2_and_leaves_the_site_alone(file: Path, tmp_path: Path, drafted: Path) -> None:
    before = snapshot(drafted)
    result = run("draft", put(file, tmp_path / "bad"), "--site", drafted)
    assert result.exit_code == 2, result.output
    assert result.exception is None or isinstance(result.exception, SystemExit)
    assert "Traceback" not in result.output
    assert "calculation.toml:" in result.output
    assert snapshot(drafted) == before


@pytest.mark.parametrize("file", UNSOLVABLE, ids=lambda file: file.stem)
def test_an_unsolvable_file_answers_3_and_names_paths(file: Path, tmp_path: Path, drafted: Path) -> None:
    before = snapshot(drafted)
    result = run("draft", put(file, tmp_path / "bad"), "--site", drafted)
    assert result.exit_code == 3, result.output
    assert "Traceback" not in result.output
    for line in file.read_text("utf-8").splitlines():
        if line.startswith("# names: "):
            for path in line.removeprefix("# names: ").split():
                assert path in result.output, f"{path} is not named in: {result.output}"
            break
    else:
        pytest.fail(f"{file.name} does not say which paths must be named")
    assert snapshot(drafted) == before


def test_two_folders_with_one_number_are_refused(tmp_path: Path) -> None:
    for name in ("a", "b"):
        shutil.copytree(PROJECTS / "letdown-station", tmp_path / "in" / name)
    result = run("draft", tmp_path / "in", "--site", tmp_path / "site")
    assert result.exit_code == 2
    assert "SB-TH-014" in result.output


def test_a_folder_without_a_calculation_says_so(tmp_path: Path) -> None:
    result = run("draft", tmp_path, "--site", tmp_path / "site")
    assert result.exit_code == 2
    assert "calculation.toml" in result.output
    assert not (tmp_path / "site").exists()


def test_a_file_in_place_of_a_folder_is_told_apart(tmp_path: Path) -> None:
    file = put(PROJECTS / "letdown-station" / "calculation.toml", tmp_path / "a") / "calculation.toml"
    result = run("evaluate", file)
    assert result.exit_code == 2
    assert f"Would do: the folder that it is in, {file.parent.as_posix()}." in result.output
    both = run("draft", file, tmp_path / "none", "--site", tmp_path / "site")
    assert both.exit_code == 2
    assert "not a folder" in both.output
    assert "no such folder" in both.output
    assert run("start", file / "new").exit_code == 2
    assert [path.name for path in file.parent.iterdir()] == [file.name]


def test_one_folder_named_in_several_ways_is_drafted_once(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    shutil.copytree(PROJECTS / "letdown-station", tmp_path / "in" / "a")
    monkeypatch.chdir(tmp_path)
    result = run("draft", "in", "in/a", tmp_path / "in", "in/../in")
    assert result.exit_code == 0, result.output
    assert result.output.count("report    ") == 1


def test_a_site_that_cannot_be_written_is_named_as_the_user_named_it(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "file").write_text("", encoding="utf-8")
    result = run("draft", PROJECTS / "letdown-station", "--site", "file/site")
    assert result.exit_code == 2
    assert result.output.startswith("file/site/SB-TH-014/A/")
    assert "Traceback" not in result.output


def test_several_calculations_as_json_are_one_array_or_nothing(tmp_path: Path) -> None:
    result = run("evaluate", PROJECTS, "--json")
    assert [record["format"] for record in json.loads(result.stdout)] == ["reportgen-record/1"] * len(
        list(PROJECTS.glob("*/calculation.toml"))
    )
    put(PROJECTS / "letdown-station" / "calculation.toml", tmp_path / "a")
    put(MALFORMED[0], tmp_path / "b")
    result = run("evaluate", tmp_path, "--json")
    assert result.exit_code == 2
    assert result.stdout == ""


@pytest.mark.parametrize(
    "arguments", [("fluids",), ("schema",), ("evaluate", PROJECTS), ("evaluate", PROJECTS, "--json")]
)
def test_output_to_a_reader_that_has_gone_is_no_fault(arguments: tuple[object, ...]) -> None:
    """As in ``reportgen fluids | head -1``."""
    program = [sys.executable, "-m", "reportgen", *map(str, arguments)]
    with subprocess.Popen(program, stdout=subprocess.PIPE, stderr=subprocess.PIPE) as process:
        assert process.stdout is not None
        assert process.stderr is not None
        process.stdout.close()
        assert process.stderr.read() == b""
    assert process.returncode == 0


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="only where the system has a device that is always full")
def test_output_to_a_full_disk_is_told() -> None:
    with Path("/dev/full").open("wb") as full:
        program = [sys.executable, "-m", "reportgen", "evaluate", str(PROJECTS / "letdown-station")]
        result = subprocess.run(program, stdout=full, stderr=subprocess.PIPE, check=False)
    assert result.returncode == 2
    assert result.stderr.startswith(b"The output cannot be written.")
    assert result.stderr.count(b"\n") == 1


def test_stopped_by_the_user(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def stop(*_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("reportgen.report.render", stop)
    result = run("draft", PROJECTS / "letdown-station", "--site", tmp_path / "site")
    assert result.exit_code == 130
    assert result.output == "Stopped.\n"
    assert not (tmp_path / "site").exists()


@pytest.mark.parametrize("command", sorted(main.commands))
def test_every_command_says_what_it_does(command: str) -> None:
    overview, own = run("--help").output, run(command, "--help").output
    line = next(line for line in overview.splitlines() if line.split()[:1] == [command])
    assert line.endswith("."), "cut short in the overview"
    assert own.startswith(f"Usage: main {command}") or own.startswith(f"Usage: reportgen {command}")
    for parameter in main.commands[command].params:
        assert getattr(parameter, "help", None) or parameter.human_readable_name in own


def test_same_bytes_elsewhere_under_other_settings(tmp_path: Path, drafted: Path) -> None:
    """Another folder, time zone, locale and hash seed: the site must come out byte for byte the same."""
    shutil.copytree(PROJECTS, tmp_path / "elsewhere" / "projects")
    shutil.copytree(PROJECTS, tmp_path / "here" / "projects")
    sites = []
    settings = (
        {"TZ": "Pacific/Auckland", "PYTHONHASHSEED": "1", "LC_ALL": "C"},
        {"TZ": "America/St_Johns", "PYTHONHASHSEED": "77", "LC_ALL": "C.UTF-8"},
    )
    for place, setting in zip(("elsewhere", "here"), settings, strict=True):
        folder = tmp_path / place
        subprocess.run(
            [sys.executable, "-m", "reportgen", "draft", "projects"],
            check=True,
            cwd=folder,
            env={**os.environ, **setting},
            stdout=subprocess.DEVNULL,
        )
        sites.append(snapshot(folder / "site"))
    assert sites[0] == sites[1]

"""The commands. Each one only calls the layers in order and says what came of it.

Exit status: 0 done; 1 done, but ``--strict`` was asked and a stop caution or failed criterion stands; 2 the input is
wrong, or a file cannot be read or written; 3 it cannot be solved; 130 stopped by the user. Every heavy import stays
inside the command that needs it.
"""

from __future__ import annotations

import errno
import gc
import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING

import click

from reportgen import __version__
from reportgen.errors import Fault, InputError, ReportgenError

if TYPE_CHECKING:
    from reportgen.record import Record

__all__ = ["main"]

_FOLDER = click.Path(path_type=Path)
#: Exit status of a program that was stopped by Ctrl-C, by the custom of shells.
_STOPPED = 130
_STRICT = click.option("--strict", is_flag=True, help="Exit with 1 while a stop caution or failed criterion stands.")


class _Commands(click.Group):
    """The group of commands; what goes wrong in any of them becomes text on standard error and an exit status."""

    def invoke(self, ctx: click.Context) -> object:
        """Run the command that was asked for."""
        try:
            return super().invoke(ctx)
        except ReportgenError as error:
            _say_faults(error)
            status = error.exit_status
        except OSError as error:
            click.echo(f"{error.filename or 'file'}: {error.strerror or error}", err=True)
            status = InputError.exit_status
        except KeyboardInterrupt:
            click.echo("Stopped.", err=True)
            status = _STOPPED
        raise SystemExit(status)


@contextmanager
def _printing() -> Iterator[None]:
    """For output alone: a reader that has seen enough, as ``head`` has, is no fault."""
    try:
        yield
        sys.stdout.flush()
    except SystemExit:
        # rich leaves in this way when the pipe is closed, and has silenced standard output already
        return
    except OSError as error:
        # Python writes what is left once more on its way out: let that go nowhere.
        with Path(os.devnull).open("wb") as nowhere:
            os.dup2(nowhere.fileno(), sys.stdout.fileno())
        if error.errno not in (errno.EPIPE, errno.EINVAL):  # Windows calls a closed pipe an invalid argument
            raise InputError(Fault("The output cannot be written.", found=error.strerror)) from None


def _say_faults(error: ReportgenError, within: Path | None = None) -> None:
    """Print every fault on a line of its own, file names made relative to where the user stands."""
    for fault in error.faults:
        if within is not None and fault.file is not None:
            fault = fault.at((within / fault.file).as_posix(), fault.line, fault.column)
        elif within is not None and fault.file is None:
            fault = fault.at((within / "calculation.toml").as_posix(), None)
        click.echo(str(fault), err=True)
    count = len(error.faults)
    if count > 1:
        click.echo(f"{count} faults.", err=True)


@click.group(cls=_Commands, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="reportgen")
def main() -> None:
    """Entropy calculation reports: from a plain-text calculation file to a checked, versioned HTML report."""
    # A command runs for about a second and makes few cycles: collecting at every 700 new objects only costs time.
    gc.set_threshold(100_000, 20, 20)
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(encoding="utf-8", newline="\n" if stream is sys.stdout else None)


@main.command(short_help="Write a new calculation from a starter.")
@click.argument("folder", type=_FOLDER)
def start(folder: Path) -> None:
    """Write a new calculation into FOLDER from a starter that evaluates as it is.

    FOLDER must not exist yet, or be empty: nothing is ever overwritten.
    """
    from reportgen import spec

    written = spec.start(folder)
    with _printing():
        for path in written:
            click.echo(path.as_posix())
        click.echo(f"Next: edit {folder.as_posix()}/calculation.toml, then run: reportgen draft {folder.as_posix()}")


def _folders(given: tuple[Path, ...]) -> list[Path]:
    """All calculation folders below the given ones, in order, each once."""
    from reportgen import spec

    found: dict[Path, Path] = {}
    faults: list[Fault] = []
    for folder in given:
        try:
            for place in spec.find(folder):
                found.setdefault(place.resolve(), place)
        except InputError as error:
            faults.extend(error.faults)
    if faults:
        raise InputError(faults)
    return list(found.values())


def _evaluated(folder: Path) -> Record:
    """The Record of one folder, its narratives checked."""
    from reportgen import evaluation, report, spec

    record = evaluation.evaluate(spec.read(folder, evaluation.property_model), folder)
    report.check_narratives(record)
    return record


class _Outcome:
    """Worst exit status of a run over several folders, and whether anything stands against ``--strict``."""

    def __init__(self) -> None:
        self.status = 0
        self.standing = False

    def failed(self, error: ReportgenError, folder: Path | None) -> None:
        """Print the faults of one calculation; ``folder`` is None when they are not in its files."""
        _say_faults(error, folder)
        self.status = max(self.status, error.exit_status)

    def done(self, record: Record) -> None:
        stops = any(caution["severity"] == "stop" for caution in record.data["cautions"])
        failed = any(criterion["decision"] == "not met" for criterion in record.data["criteria"])
        self.standing = self.standing or stops or failed

    def leave(self, strict: bool) -> None:
        if self.status:
            raise SystemExit(self.status)
        if strict and self.standing:
            raise SystemExit(1)


@main.command(short_help="Print results, cautions and criteria, or the Record.")
@click.argument("folder", type=_FOLDER)
@click.option(
    "--json",
    "as_json",
    is_flag=True,
    help="Print the Record instead of a summary; of several calculations an array of Records, or nothing if one fails.",
)
@_STRICT
def evaluate(folder: Path, as_json: bool, strict: bool) -> None:
    """Evaluate the calculation in FOLDER, or each one below it; print results, cautions and criteria, or the Record."""
    outcome = _Outcome()
    records = []
    folders = _folders((folder,))
    for place in folders:
        try:
            record = _evaluated(place)
        except ReportgenError as error:
            outcome.failed(error, place)
            continue
        outcome.done(record)
        records.append(record)
    with _printing():
        if as_json and not outcome.status:
            texts = [record.to_json().decode("utf-8").rstrip("\n") for record in records]
            click.echo(texts[0] if len(folders) == 1 else "[" + ",\n".join(texts) + "]")
        elif not as_json:
            from reportgen.report import terminal

            for record in records:
                terminal.print_summary(record)
    outcome.leave(strict)


@main.command(short_help="Render draft reports and the register.")
@click.argument("folders", metavar="FOLDER...", type=_FOLDER, nargs=-1, required=True)
@click.option(
    "--site",
    type=click.Path(path_type=Path, file_okay=False),
    default=Path("site"),
    show_default=True,
    help="Where the pages go.",
)
@_STRICT
def draft(folders: tuple[Path, ...], site: Path, strict: bool) -> None:
    """Evaluate each calculation in or below FOLDER... and render its draft report and the register.

    A calculation that fails leaves its earlier report untouched and does not keep the others from being rendered.
    """
    from reportgen import report

    outcome = _Outcome()
    written: list[Path] = []
    for place in _with_progress(_folders(folders)):
        try:
            record = _evaluated(place)
            _refuse_twice(record, place, written, site)
        except ReportgenError as error:
            outcome.failed(error, place)
            continue
        try:
            written.append(report.render(record, site))
        except ReportgenError as error:
            outcome.failed(error, None)
            continue
        outcome.done(record)
    if written:
        register = report.register(site)
        with _printing():
            for page in written:
                click.echo(f"report    {page.as_posix()}")
            click.echo(f"register  {register.as_posix()}")
    outcome.leave(strict)


def _refuse_twice(record: Record, place: Path, written: list[Path], site: Path) -> None:
    """Two folders that would land on one page would silently lose one of them."""
    from reportgen import report

    if report.page_path(record, site) in written:
        title = record.data["calculation"]
        raise InputError(
            Fault(
                f"Number {title['number']} revision {title['revision']} is also used by another folder of this run.",
                path="calculation.number",
                file="calculation.toml",
                found=f"{title['number']} revision {title['revision']} in {place.as_posix()}",
                expected="a number and revision that no other calculation has",
            )
        )


def _with_progress(places: list[Path]) -> Iterator[Path]:
    """The folders one by one, with a progress bar when there are several and a person is watching."""
    if len(places) < 2 or not sys.stderr.isatty():
        yield from places
        return
    from rich.console import Console
    from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn

    columns = (TextColumn("{task.description}"), BarColumn(), MofNCompleteColumn())
    with Progress(*columns, console=Console(stderr=True), transient=True) as progress:
        task = progress.add_task("drafting", total=len(places))
        for place in places:
            progress.update(task, description=place.name)
            yield place
            progress.advance(task)


@main.command(short_help="List the fluids carried, or show one.")
@click.argument("name", required=False)
def fluids(name: str | None) -> None:
    """List the fluids carried, with limits and sources; or show the one called NAME."""
    from reportgen import fluids as models

    text = models.listing() if name is None else models.describe(name)
    with _printing():
        click.echo(text)


@main.command(short_help="Print the JSON Schema of the calculation file.")
def schema() -> None:
    """Print the JSON Schema of the calculation file, for editors that complete and check it."""
    import json

    from reportgen import spec

    text = json.dumps(spec.json_schema(), indent=2, ensure_ascii=False, sort_keys=True)
    with _printing():
        click.echo(text)

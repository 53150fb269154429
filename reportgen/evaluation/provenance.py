"""Where a record comes from: program, packages, input files, fluid data, commit.

Nothing here tells when, on which machine, by whom or in which folder the calculation was made.
"""

from __future__ import annotations

import hashlib
import os
import platform
import subprocess
from collections.abc import Iterable, Mapping
from importlib import metadata
from pathlib import Path
from typing import TYPE_CHECKING, Any

from reportgen import __version__
from reportgen.fluids.library import NAME, LibraryFluid

if TYPE_CHECKING:
    from reportgen.evaluation.cross_checks import Second

__all__ = ["git_state", "provenance"]

#: Packages that influence a number, a figure or a formula of the report.
PACKAGES = ("jinja2", "latex2mathml", "markdown", "matplotlib", "nh3", "numpy", "pint", "pydantic", "scipy")

GIT_SECONDS = 10.0


def provenance(
    files: Mapping[str, bytes],
    fluid_models: Iterable[Any],
    folder: Path | None = None,
    seconds: Iterable[Second] = (),
) -> dict[str, Any]:
    """The record's ``provenance`` section.

    Args:
        files: name to content of every input file read, as read (so that a file changed meanwhile cannot differ).
        fluid_models: the property models used (``fluids.model.Fluid``).
        folder: where the input files stand, for the git commit; None leaves it out.
        seconds: second sources that states were compared with.
    """
    others = [second.model for second in seconds if second.model is not None]
    packages = [*PACKAGES, *dict.fromkeys(NAME for model in others if isinstance(model, LibraryFluid))]
    data: dict[tuple[str, str], set[str]] = {}
    for model in (*fluid_models, *others):
        for entry in model.data_files:
            data.setdefault((entry["file"], entry["sha256"]), set()).update(model.sources)
    return {
        "program": {"name": "reportgen", "version": __version__},
        "python": platform.python_version(),
        "packages": {name: version for name in packages if (version := _version(name)) is not None},
        "files": [
            {"name": name, "sha256": hashlib.sha256(content).hexdigest()} for name, content in sorted(files.items())
        ],
        "fluid_data": [
            {"file": file, "sha256": digest, "source": "; ".join(sorted(sources))}
            for (file, digest), sources in sorted(data.items())
        ],
        "git": git_state(folder, sorted(files)),
    }


def git_state(folder: Path | None, names: Iterable[str]) -> dict[str, Any]:
    """Commit in which the input files last changed, and whether they are committed and unchanged since.

    Other files of the repository do not count, so that work elsewhere leaves a calculation's record as it was.
    Both entries are None without git, outside of a repository, or when git gives no answer in GIT_SECONDS.
    """
    unknown: dict[str, Any] = {"commit": None, "clean": None}
    names = list(names)
    if folder is None or not names:
        return unknown
    commit = _git(folder, "log", "-1", "--format=%H", "--", *names)
    status = _git(folder, "status", "--porcelain", "--ignored", "--untracked-files=all", "--", *names)
    if commit is None or status is None:
        return unknown
    return {"commit": commit or None, "clean": bool(commit) and not status}


def _git(folder: Path, *arguments: str) -> str | None:
    # Pathspecs are taken literally, and no lock is taken: a user may be committing meanwhile.
    command = ["git", "--no-optional-locks", "--literal-pathspecs", "-C", str(folder), *arguments]
    environment = {key: value for key, value in os.environ.items() if not key.startswith("GIT_")} | {"LC_ALL": "C"}
    try:
        answer = subprocess.run(
            command, capture_output=True, timeout=GIT_SECONDS, check=False, env=environment, stdin=subprocess.DEVNULL
        )
    except (OSError, subprocess.TimeoutExpired):
        return None
    return answer.stdout.decode("utf-8", "replace").strip() if answer.returncode == 0 else None


def _version(package: str) -> str | None:
    try:
        return metadata.version(package)
    except metadata.PackageNotFoundError:
        return None

"""The built wheel holds everything a report needs, and drafts one on its own."""

from __future__ import annotations

import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]


@pytest.fixture(scope="module")
def unpacked(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("wheel")
    subprocess.run(
        [sys.executable, "-m", "hatchling", "build", "-t", "wheel", "-d", str(folder)],
        cwd=ROOT,
        check=True,
        capture_output=True,
    )
    (wheel,) = folder.glob("*.whl")
    with zipfile.ZipFile(wheel) as archive:
        archive.extractall(folder / "unpacked")
    return folder / "unpacked"


def test_templates_data_starter_and_notices_are_in_the_wheel(unpacked: Path) -> None:
    package = unpacked / "reportgen"
    for name in (
        "py.typed",
        "site_templates/report.html.jinja",
        "site_templates/fonts/GUST-FONT-LICENSE.txt",
        "fluids/data/water.json",
        "fluids/data/ideal_gases.json",
        "fluids/data/NOTICE.md",
        "spec/starter/calculation.toml",
    ):
        assert (package / name).is_file(), name
    assert not list(package.rglob("collect*.py")), "collecting scripts are for maintainers"
    assert not list(package.rglob("__pycache__"))


def test_the_wheel_alone_drafts_a_report(unpacked: Path, tmp_path: Path) -> None:
    code = (
        "import sys\n"
        f"sys.path.insert(0, {str(unpacked)!r})\n"
        "import reportgen\n"
        f"assert reportgen.__file__.startswith({str(unpacked)!r}), reportgen.__file__\n"
        "from reportgen.cli import main\n"
        f"sys.argv = ['reportgen', 'draft', {str(ROOT / 'projects' / 'letdown-station')!r}]\n"
        "main()\n"
    )
    subprocess.run([sys.executable, "-I", "-c", code], cwd=tmp_path, check=True, stdout=subprocess.DEVNULL)
    assert (tmp_path / "site" / "SB-TH-014" / "A" / "index.html").is_file()

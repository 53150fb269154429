"""Cold ``reportgen draft`` of the letdown station against a floor: ``python -m tests.benchmarks.draft_cold``.

The floor is a script that imports the same libraries (every third-party package the draft itself loads) and
saves as many plain figures as SVG; nothing else. Both run in fresh processes, in turn (A B A B ...), after one
uncounted pair.
"""

from __future__ import annotations

import json
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

ROOT = Path(__file__).parents[2]
PROJECT = ROOT / "projects" / "letdown-station"
PAIRS = 5

DRAFT = """
import sys
from reportgen.cli import main
sys.argv = ['reportgen', 'draft', {project!r}, '--site', {site!r}]
main()
"""

LIST_MODULES = """
import importlib.machinery, json, sys
from reportgen.cli import main
sys.argv = ['reportgen', 'draft', {project!r}, '--site', {site!r}]
try:
    main()
except SystemExit as ended:
    assert not ended.code
own = {{'reportgen', '__main__'}} | set(sys.stdlib_module_names)
loaded = sorted({{
    name for name in sys.modules
    if '.' not in name and not name.startswith('_') and name not in own
    and importlib.machinery.PathFinder.find_spec(name)
}})
print('LOADED ' + json.dumps(loaded))
"""

FLOOR = """
import importlib
for name in {modules!r}:
    importlib.import_module(name)
import matplotlib
matplotlib.use('svg')
from matplotlib.figure import Figure
for number in range({figures}):
    figure = Figure()
    axes = figure.subplots()
    axes.plot([0, 1, 2], [0, 1, 4])
    axes.set_xlabel('x')
    axes.set_ylabel('y')
    figure.savefig({site!r} + '/floor-' + str(number) + '.svg')
"""


def _seconds(code: str) -> float:
    began = time.perf_counter()
    subprocess.run([sys.executable, "-c", code], check=True, stdout=subprocess.DEVNULL, cwd=ROOT)
    return time.perf_counter() - began


def main() -> None:
    with tempfile.TemporaryDirectory() as folder:
        names = {"project": str(PROJECT), "site": folder}
        listing = subprocess.run(
            [sys.executable, "-c", LIST_MODULES.format(**names)], check=True, capture_output=True, text=True, cwd=ROOT
        ).stdout
        modules = json.loads(next(line for line in listing.splitlines() if line.startswith("LOADED "))[7:])
        page = next(path for path in Path(folder).rglob("index.html") if path.parent != Path(folder))
        figures = page.read_text("utf-8").count("<figure")
        draft = DRAFT.format(**names)
        floor = FLOOR.format(modules=modules, figures=figures, site=folder)
        pairs = [(_seconds(draft), _seconds(floor)) for _ in range(PAIRS + 1)][1:]
    ratios = sorted(a / b for a, b in pairs)
    print(f"libraries imported by the floor: {', '.join(modules)}")
    print(f"figures saved by each: {figures}")
    print(f"draft, median of {PAIRS}: {statistics.median(a for a, _ in pairs):.2f} s")
    print(f"floor, median of {PAIRS}: {statistics.median(b for _, b in pairs):.2f} s")
    spread = f"from {ratios[0]:.2f} to {ratios[-1]:.2f}"
    print(f"ratio, median of {PAIRS} pairs: {statistics.median(ratios):.2f} ({spread}); bar 2.0")


if __name__ == "__main__":
    main()

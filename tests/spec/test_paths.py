"""Which paths a criterion may name: exactly those that evaluation gives a value."""

from __future__ import annotations

from pathlib import Path

import pytest

from reportgen import evaluation, spec
from reportgen.spec.paths import result_dimensions
from reportgen.spec.source import Source
from reportgen.spec.toml_text import parse
from tests.spec.writing import HEAD

ROOT = Path(__file__).parents[2]
FOLDERS = sorted(path.parent for path in (ROOT / "projects").glob("*/calculation.toml"))

PLANT = """
[states.1]
fluid    = "steam"
velocity = "20 m/s"

[states.2]
like = "1"

[states.3]
fluid = "steam"

[equipment.PRV-3]
kind   = "throttling-valve"
inlet  = "1"
outlet = "3"

[equipment.CV-1]
kind       = "control-volume"
heat_ports = [{ heat = "1 kW" }, {}]
"""


def source_of(text: str) -> Source:
    return Source(parse(text, "calculation.toml"), "calculation.toml")


@pytest.mark.parametrize("folder", FOLDERS, ids=lambda folder: folder.name)
def test_every_value_of_an_evaluated_plant_can_be_a_criterion(folder: Path) -> None:
    values = evaluation.evaluate(spec.read(folder)).data["values"]
    source = source_of((folder / "calculation.toml").read_text("utf-8"))
    # Neither is a result to hold a plant to: the one is a word, the others are steps on the way.
    others = ("phase", "isentropic_outlet_enthalpy")
    paths = [path for path in values if path.rsplit(".", 1)[-1] not in others and path.count(".") < 3]
    paths = [path for path in paths if not path.startswith("surroundings.") or path.count(".") == 1]
    assert len(paths) > 50
    refused = {path: result_dimensions(source, path) for path in paths}
    assert {path: found for path, found in refused.items() if found != (values[path]["dimension"],)} == {}


@pytest.mark.parametrize(
    ("path", "expected"),
    [
        ("states.1.pressure", ("pressure",)),
        ("states.1.velocity", ("velocity",)),
        ("states.2.velocity", ("velocity",)),
        ("states.3.velocity", "velocity"),
        ("states.1.presure", 'Did you mean "pressure"'),
        ("states.4.pressure", 'There is no "4" in [states]'),
        ("equipment.PRV-3.lost_work", ("power",)),
        ("equipment.PRV-3.pressure_drop", ("pressure_difference",)),
        ("equipment.PRV-3.power", 'There is no "power"'),
        ("equipment.PRV3.lost_work", 'Did you mean "PRV-3"'),
        ("equipment.CV-1.heat_ports.2.temperature", ("temperature",)),
        ("equipment.CV-1.heat_ports.3.temperature", "heat_ports.3.temperature"),
        ("trains.a.lost_work", 'There is no "a" in [trains]'),
        ("total.lost_work", ("power",)),
        ("total.lost_wrk", 'Did you mean "lost_work"'),
        ("surroundings.temperature", ("temperature",)),
        ("assumptions.A1", "A path is"),
        ("states", "A path is"),
        ("", "A path is"),
    ],
)
def test_a_path_has_its_dimension_or_an_explanation(path: str, expected: tuple[str, ...] | str) -> None:
    found = result_dimensions(source_of(HEAD + PLANT), path)
    if isinstance(expected, tuple):
        assert found == expected
    else:
        assert isinstance(found, str)
        assert expected in found

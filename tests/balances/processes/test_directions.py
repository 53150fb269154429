"""Each kind of process is solved in every direction: from whatever is given back to the same states, heat and work."""

from __future__ import annotations

from typing import Any

import pytest

from reportgen import fluids
from tests.balances.processes.solved import one

FLUIDS = {
    "steam": (fluids.real_fluid("water"), 8e5, 500.0),
    "nitrogen": (fluids.ideal_gas("N2"), 8e5, 500.0),
    "R134a": (fluids.real_fluid("R134a"), 4e5, 330.0),
}
BEGIN = ("a.pressure", "a.temperature", "a.volume")
#: Kind, options, what the kind itself needs, the end in the case to find again (of a state in parts of its beginning),
#: and all that may be given in its place.
KINDS: list[tuple[str, dict[str, Any], dict[str, float], dict[str, float], tuple[str, ...]]] = [
    ("isobaric", {}, {}, {"b.volume": 1.3}, ("b.temperature", "b.volume", "b.density", "heat", "work")),
    ("isochoric", {}, {}, {"b.pressure": 0.8}, ("b.pressure", "b.temperature", "heat")),
    ("isentropic", {}, {}, {"b.pressure": 0.5}, ("b.pressure", "b.temperature", "b.volume", "work")),
    ("isothermal", {}, {}, {"b.volume": 1.6}, ("b.pressure", "b.volume", "b.specific_entropy", "heat", "work")),
    (
        "polytropic",
        {},
        {"polytropic_index": 1.2},
        {"b.pressure": 0.6},
        ("b.pressure", "b.volume", "b.temperature", "work", "heat"),
    ),
    (
        "stirring",
        {"constant": "volume"},
        {"heat": -1e4},
        {"stirring_work": 6e4},
        ("b.pressure", "b.temperature", "stirring_work", "work"),
    ),
    (
        "stirring",
        {"constant": "pressure"},
        {"heat": -1e4},
        {"stirring_work": 6e4},
        ("b.temperature", "b.volume", "stirring_work", "work"),
    ),
    ("free-expansion", {}, {"heat": 0.0}, {"b.volume": 1.8}, ("b.volume", "b.pressure")),
    (
        "constant-external-pressure",
        {},
        {"external_pressure": 3e5, "heat": 0.0},
        {"b.pressure": 0.7},
        ("b.pressure", "b.volume", "b.temperature", "work"),
    ),
]
CASES = [
    pytest.param(name, *row[:4], given, id=f"{row[0]}-{row[1].get('constant', '')}-{given}-{name}")
    for name in FLUIDS
    for row in KINDS
    for given in row[4]
]
COMPARED = (
    *(f"{state}.{name}" for state in "ab" for name in ("pressure", "temperature", "volume", "mass")),
    "heat",
    "work",
    "entropy_change",
)


def solved(
    fluid: Any, kind: str, options: dict[str, Any], needed: dict[str, float], givens: dict[str, float]
) -> dict[str, float]:
    boundary = {} if kind == "isentropic" else {"boundary_temperature": 300.0}
    return one(fluid, kind, {**needed, **givens, **boundary}, **options)


def case(name: str, end: dict[str, float]) -> tuple[Any, dict[str, float], dict[str, float]]:
    """Fluid, givens of the beginning, and of the end."""
    fluid, pressure, temperature = FLUIDS[name]
    start = dict(zip(BEGIN, (pressure, temperature, 0.5), strict=True))
    return fluid, start, {path: part * start.get(f"a{path[1:]}", 1.0) for path, part in end.items()}


def agree(found: dict[str, float], expected: dict[str, float]) -> None:
    energy = expected["a.pressure"] * expected["a.volume"]
    for path in COMPARED:
        scale = {"heat": energy, "work": energy, "entropy_change": energy / 300.0}.get(path, 0.0)
        assert found[path] == pytest.approx(expected[path], rel=1e-7, abs=1e-7 * scale), path


@pytest.mark.parametrize(("name", "kind", "options", "needed", "end", "given"), CASES)
def test_the_end_is_found_from_whatever_is_given(
    name: str, kind: str, options: dict[str, Any], needed: dict[str, float], end: dict[str, float], given: str
) -> None:
    fluid, start, last = case(name, end)
    expected = solved(fluid, kind, options, needed, {**start, **last})
    agree(solved(fluid, kind, options, needed, {**start, given: expected[given]}), expected)


@pytest.mark.parametrize("name", FLUIDS)
@pytest.mark.parametrize("row", KINDS[:5], ids=lambda row: row[0])
def test_the_beginning_is_found_from_the_end(name: str, row: tuple[Any, ...]) -> None:
    """The state after it is known, and one quantity of the state before."""
    kind, options, needed, end, _ = row
    fluid, start, last = case(name, end)
    expected = solved(fluid, kind, options, needed, {**start, **last})
    known = {path: expected[path] for path in ("b.pressure", "b.density", "b.volume")}
    before = "a.temperature" if kind in ("isobaric", "isochoric") else "a.pressure"
    agree(solved(fluid, kind, options, needed, {**known, before: expected[before]}), expected)

"""The JSON Schema: it accepts what can be read, refuses what a schema can refuse, and explains every key."""

from __future__ import annotations

import datetime
import tomllib
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from reportgen import spec
from reportgen.balances.kinds import kinds, process_kinds, vessel_kinds
from reportgen.names import DIMENSIONS

ROOT = Path(__file__).parents[2]
MALFORMED = Path(__file__).parent / "malformed"
ACCEPTED = sorted(
    [
        *(ROOT / "projects").glob("*/calculation.toml"),
        *(ROOT / "tests" / "published").glob("*/calculation.toml"),
        ROOT / "reportgen" / "spec" / "starter" / "calculation.toml",
    ]
)

#: Faults that lie in the value of one key, in a key's name or in its absence. The other malformed files are not TOML
#: at all, or their faults lie between two places or within the text of a quantity, where a schema cannot look.
REFUSED = (
    "caution-faults",
    "composition-faults",
    "correlations-that-cannot-be",
    "criteria-that-decide-nothing",
    "cubic-faults",
    "heat-ports",
    "incompressible-faults",
    "later-breadth",
    "limits-faults",
    "missing-narratives",
    "missing-units",
    "misspelt-keys",
    "misspelt-kinds",
    "nested-too-deep",
    "no-surroundings",
    "nothing-in-it",
    "pathological-numbers",
    "process-faults",
    "ports-of-the-wrong-form",
    "quantity-tables",
    "second-source-faults",
    "title-block-values",
    "trains-that-do-not-fit",
    "units-of-another-quantity",
)


@pytest.fixture(scope="module")
def schema() -> dict[str, Any]:
    return spec.json_schema()


def as_editors_see_it(value: Any) -> Any:
    """JSON has no dates: editors show a TOML date to the schema as text."""
    if isinstance(value, dict):
        return {key: as_editors_see_it(entry) for key, entry in value.items()}
    if isinstance(value, list):
        return [as_editors_see_it(entry) for entry in value]
    return value.isoformat() if isinstance(value, datetime.date) else value


def load(path: Path) -> Any:
    return as_editors_see_it(tomllib.loads(path.read_text("utf-8")))


def test_it_is_a_valid_schema(schema: dict[str, Any]) -> None:
    Draft202012Validator.check_schema(schema)


@pytest.mark.parametrize("path", ACCEPTED, ids=lambda path: path.parent.name)
def test_it_accepts_every_file_that_can_be_read(path: Path, schema: dict[str, Any]) -> None:
    spec.read(path.parent)
    errors = [f"{error.json_path}: {error.message}" for error in Draft202012Validator(schema).iter_errors(load(path))]
    assert errors == []


@pytest.mark.parametrize("name", REFUSED)
def test_it_refuses_what_a_schema_can_refuse(name: str, schema: dict[str, Any]) -> None:
    assert not Draft202012Validator(schema).is_valid(load(MALFORMED / f"{name}.toml"))


def properties(schema: Any, place: str = "") -> Iterator[tuple[str, dict[str, Any]]]:
    if isinstance(schema, dict):
        for key, entry in schema.get("properties", {}).items():
            yield f"{place}.{key}", entry
        for key, entry in schema.items():
            yield from properties(entry, f"{place}.{key}" if key not in ("properties", "$defs") else place)
    elif isinstance(schema, list):
        for entry in schema:
            yield from properties(entry, place)


def test_every_property_has_a_description(schema: dict[str, Any]) -> None:
    found = list(properties(schema))
    assert len(found) > 150
    assert [place for place, entry in found if not entry.get("description", "").strip()] == []


def is_quantity(entry: dict[str, Any]) -> bool:
    return any("/Quantity" in variant.get("$ref", "") for variant in entry.get("anyOf", []))


def test_every_quantity_says_its_unit(schema: dict[str, Any]) -> None:
    units = {f"[{unit}" for unit in DIMENSIONS.values()}
    quantities = [(place, entry["description"]) for place, entry in properties(schema) if is_quantity(entry)]
    # The limit of a criterion has the unit of the result that it names.
    silent = [place for place, text in quantities if not any(unit in text for unit in units)]
    assert len(quantities) > 50
    assert silent == [".CriterionTable.at_most", ".CriterionTable.at_least"]


def test_every_kind_with_its_ports_and_parameters_is_in_it(schema: dict[str, Any]) -> None:
    by_kind = {
        entry["properties"]["kind"]["const"]: entry["properties"]
        for entry in schema["$defs"].values()
        if "kind" in entry.get("properties", {})
    }
    every = {**kinds(), **process_kinds(), **vessel_kinds()}
    assert by_kind.keys() == every.keys()
    for name, kind in every.items():
        declared = {entry.name for entry in (*kind.ports, *kind.parameters, *kind.groups, *kind.choices)}
        assert declared | {"kind", "title", "limits"} == by_kind[name].keys()


def test_no_key_may_be_null(schema: dict[str, Any]) -> None:
    assert "null" not in str(schema)

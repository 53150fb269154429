"""Vessels from the calculation file to the Record: cautions, audits, account, figures, what a stop does to results."""

from __future__ import annotations

import functools
import math
from pathlib import Path
from typing import Any

import pytest

from reportgen import spec
from reportgen.evaluation import evaluate

HEAD = """
[calculation]
number   = "SB-TH-900"
title    = "Vessel under test"
revision = "A"
date     = 2026-05-06
owner    = "Saltbeck Energy"
status   = "preliminary"

[surroundings]
temperature = "12 degC"
pressure    = "1.013 bar"

[[revisions]]
index       = "A"
date        = 2026-05-06
description = "First issue"
"""
CARBON_DIOXIDE = """
[fluids.f]
model     = "real-fluid"
substance = "carbon dioxide"

[states.v0]
fluid       = "f"
temperature = "10 degC ± 1 K"
quality     = "0.4"

[vessels.V-1]
kind           = "discharge"
initial        = "v0"
volume         = "2 m3 ± 1 %"
outlet         = "vapour"
back_pressure  = "{back}"
final_pressure = "{final}"
{more}
"""
HYDROGEN = """
[fluids.f]
model         = "ideal-gas"
substance     = "H2"
heat_capacity = "14.3 kJ/(kg*K)"

[states.line]
fluid       = "f"
temperature = "15 degC"
pressure    = "350 bar"

[states.v0]
fluid       = "f"
temperature = "15 degC"
pressure    = "20 bar"

[vessels.V-1]
kind           = "charging"
initial        = "v0"
supply         = "line"
volume         = "0.1 m3"
final_pressure = "{final}"
{more}
"""


@functools.cache
def record(text: str, folder: Path) -> dict[str, Any]:
    place = folder / str(abs(hash(text)))
    place.mkdir()
    (place / "calculation.toml").write_text(HEAD + text, encoding="utf-8")
    return evaluate(spec.read(place)).data


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("vessels")


def cautions(data: dict[str, Any]) -> list[tuple[str, str, str]]:
    return [(entry["id"], entry["severity"], entry["path"].rpartition(".")[2]) for entry in data["cautions"]]


def limits(**named: str) -> str:
    return "[vessels.V-1.limits]\n" + "\n".join(f'{name} = "{value}"' for name, value in named.items())


def test_a_vessel_that_stays_above_the_triple_point(folder: Path) -> None:
    data = record(CARBON_DIOXIDE.format(back="7 bar", final="9 bar", more=""), folder)
    values = data["values"]
    assert values["vessels.V-1.final_temperature"]["value"] == pytest.approx(229.0, abs=2.0)
    assert values["vessels.V-1.entropy_generation"]["unit"] == "J/K"
    assert values["vessels.V-1.mass_transferred"]["standard_uncertainty"] > 0.0
    assert ("T03", "warning", "minimum_temperature") in cautions(data)
    assert not [entry for entry in cautions(data) if entry[0] == "T02"]
    (audit,) = [entry for entry in data["audits"]["second_law"] if entry["owner"] == "vessels.V-1"]
    assert audit["verdict"] == "generates entropy"
    assert audit["dimension"] == "entropy"
    closures = {entry["quantity"]: entry for entry in data["audits"]["closure"]}
    assert set(closures) == {"mass", "energy", "entropy"}
    assert all(entry["relative"] < 1e-8 for entry in closures.values())
    account = data["accounts"]["V-1"]
    generated = sum(line["value"] for line in account["generated"])
    assert account["sum_entering"] + generated == pytest.approx(account["sum_leaving"], rel=1e-8)
    path = data["plant"]["vessels"]["V-1"]["path"]
    assert path["stopped"] is None
    assert 0.0 <= max(path["errors"].values()) < 1e-4
    (figure,) = [entry for entry in data["figures"] if entry["kind"] == "vessel-history"]
    assert figure["against"] == "mass"
    assert figure["pressure"][-1] == pytest.approx(9e5, rel=1e-8)
    (diagram,) = [entry for entry in data["figures"] if entry["kind"] == "temperature-entropy"]
    assert [entry["equipment"] for entry in diagram["paths"]] == ["V-1"]


def test_every_value_of_a_vessel_leads_back_to_inputs_and_fluid(folder: Path) -> None:
    data = record(CARBON_DIOXIDE.format(back="7 bar", final="9 bar", more=""), folder)
    values, inputs = data["values"], data["inputs"]

    def ends(path: str, seen: frozenset[str] = frozenset()) -> set[str]:
        if path in inputs or path.startswith("fluids."):
            return {path}
        assert path not in seen
        return {end for source in values[path]["from"] for end in ends(source, seen | {path})}

    reached = ends("vessels.V-1.lost_work")
    for path in ("vessels.V-1.volume", "vessels.V-1.final_pressure", "states.v0.quality", "fluids.f"):
        assert path in reached


def test_dry_ice_stops_the_path_and_its_results(folder: Path) -> None:
    data = record(CARBON_DIOXIDE.format(back="1.013 bar", final="2 bar", more=""), folder)
    found = cautions(data)
    assert ("T02", "stop", "followed_temperature") in found
    assert ("T02", "stop", "back_pressure") in found
    assert ("T03", "warning", "followed_temperature") in found
    for name in ("final_temperature", "minimum_temperature", "mass_transferred", "entropy_generation", "lost_work"):
        entry = data["values"][f"vessels.V-1.{name}"]
        assert entry["value"] is None or math.isnan(entry["value"])
        assert "triple point" in entry["reason"]
    assert "triple point" in data["plant"]["vessels"]["V-1"]["path"]["stopped"]
    (figure,) = [entry for entry in data["figures"] if entry["kind"] == "vessel-history"]
    assert figure["temperature"][-1] == pytest.approx(216.59, abs=0.02)
    assert "V-1" not in data["accounts"]


def test_dry_ice_behind_the_valve_leaves_the_content_reported(folder: Path) -> None:
    data = record(CARBON_DIOXIDE.format(back="1.013 bar", final="9 bar", more=""), folder)
    assert [entry for entry in cautions(data) if entry[0] == "T02"] == [("T02", "stop", "back_pressure")]
    values = data["values"]
    assert values["vessels.V-1.final_temperature"]["value"] > 217.0
    assert values["vessels.V-1.vessel_entropy_generation"]["value"] == 0.0
    for name in ("valve_entropy_generation", "entropy_generation"):
        assert "behind the valve" in values[f"vessels.V-1.{name}"]["reason"]


@pytest.mark.parametrize(
    ("named", "wanted"),
    [
        ({"minimum_temperature": "-40 degC"}, ("T32", "stop", "minimum_temperature")),
        ({"minimum_temperature": "-50 degC"}, ("T32", "warning", "minimum_temperature")),
        ({"temperature": "0 degC"}, ("T32", "stop", "maximum_temperature")),
        ({"pressure": "40 bar", "material": "stainless steel"}, ("T19", "stop", "pressure")),
    ],
)
def test_limits_of_a_vessel(named: dict[str, str], wanted: tuple[str, str, str], folder: Path) -> None:
    data = record(CARBON_DIOXIDE.format(back="7 bar", final="9 bar", more=limits(**named)), folder)
    found = cautions(data)
    assert wanted in found
    # A stated minimum temperature, or a tough material, takes the place of the general caution on carbon steel.
    general = [entry for entry in found if entry[0] == "T03"]
    assert bool(general) == ("temperature" in named)


@pytest.mark.parametrize(
    ("final", "material", "wanted"),
    [
        ("300 bar", "", [("T15", "warning", "maximum_temperature")]),
        ("300 bar", "composite, type IV", [("T15", "stop", "maximum_temperature")]),
        ("300 bar", "steel", []),
        ("25 bar", "", []),
    ],
)
def test_hydrogen_that_becomes_hot(final: str, material: str, wanted: list[Any], folder: Path) -> None:
    more = limits(material=material, temperature="200 degC") if material else ""
    data = record(HYDROGEN.format(final=final, more=more), folder)
    assert [entry for entry in cautions(data) if entry[0] == "T15"] == wanted


def test_equal_files_give_equal_records(folder: Path) -> None:
    text = CARBON_DIOXIDE.format(back="7 bar", final="20 bar", more="")
    places = [folder / "first", folder / "second"]
    records = []
    for place in places:
        place.mkdir()
        (place / "calculation.toml").write_text(HEAD + text, encoding="utf-8")
        records.append(evaluate(spec.read(place)).to_json())
    assert records[0] == records[1]

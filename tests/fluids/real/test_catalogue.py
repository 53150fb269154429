"""Which real fluids are carried, under which names, and how they are listed and described."""

from __future__ import annotations

import json
import re
import subprocess
import sys
import time
from pathlib import Path

import pytest

import reportgen.fluids
from reportgen import fluids
from reportgen.errors import InputError
from reportgen.fluids.real import catalogue

DATA = Path(reportgen.fluids.__file__).parent / "data"
NAMES = catalogue.names()


def test_the_index_of_names_holds_what_the_data_files_say() -> None:
    files = {}
    for path in sorted(DATA.glob("*.json"), key=lambda path: path.name.casefold()):
        data = json.loads(path.read_text(encoding="utf-8"))
        if data.get("format") == catalogue.FORMAT:
            others = [data["title"], data["refrigerant"], data["cas"], *data["aliases"]]
            files[path.name] = {
                "name": data["name"],
                "others": [other for other in dict.fromkeys(others) if other and other != data["name"]],
                "formula": data["formula"],
            }
    assert json.loads((DATA / "names.json").read_text(encoding="utf-8"))["files"] == files


def test_no_name_belongs_to_two_fluids() -> None:
    owners: dict[str, set[str]] = {}
    for name in NAMES:
        data, _ = catalogue.find(name)
        for other in (data["name"], data["title"], data["refrigerant"], data["cas"], *data["aliases"]):
            if other:
                owners.setdefault(catalogue._plain(other), set()).add(name)
    assert not {other: names for other, names in owners.items() if len(names) > 1}


def test_every_name_leads_to_its_fluid() -> None:
    for name in NAMES:
        data, _ = catalogue.find(name)
        for other in (data["title"], data["refrigerant"], data["cas"], *data["aliases"], name.upper()):
            assert not other or catalogue.find(other)[0]["name"] == name, other


@pytest.mark.parametrize(
    ("given", "name"),
    [
        ("HFC-134a", "R134a"),
        ("R-134A", "R134a"),
        ("HFO-1234yf", "R1234yf"),
        ("R1234ZE(E)", "R1234ze(E)"),
        ("r290", "propane"),
        ("R717", "ammonia"),
        ("R600a", "isobutane"),
        ("butane", "n-butane"),
        ("MM", "hexamethyldisiloxane"),
        ("D2O", "heavy water"),
        ("H2", "hydrogen"),
        ("SF6", "sulfur hexafluoride"),
        ("CHClF2", "R22"),
        ("Sulphur dioxide", "sulfur dioxide"),
        ("67-56-1", "methanol"),
        ("ethene", "ethylene"),
    ],
)
def test_names_in_use(given: str, name: str) -> None:
    assert catalogue.find(given)[0]["name"] == name


def test_a_formula_that_isomers_share_names_them() -> None:
    with pytest.raises(InputError, match="Several real fluids have this formula") as caught:
        fluids.real_fluid("C4H10")
    assert "n-butane" in str(caught.value)
    assert "isobutane" in str(caught.value)


@pytest.mark.parametrize(
    ("given", "meant"),
    [("methan", "'methane'"), ("R1234ze", "'R1234ze(Z)'"), ("R1234ze", "'R1234ze(E)'"), ("isobutan", "'isobutane'")],
)
def test_the_nearest_names_are_offered(given: str, meant: str) -> None:
    with pytest.raises(InputError, match="Did you mean") as caught:
        fluids.real_fluid(given)
    assert meant in str(caught.value)


def test_a_name_far_from_all_gets_no_guess() -> None:
    with pytest.raises(InputError, match="No real fluid of this name") as caught:
        fluids.real_fluid("zzzzqqqq")
    assert "Did you mean" not in str(caught.value)


@pytest.mark.parametrize("given", ["water", "R718", "h2o", "7732-18-5"])
def test_a_look_up_reads_one_data_file(given: str) -> None:
    """A formula is looked up among the ideal gases, too: their isomers count."""
    code = (
        "from pathlib import Path\n"
        "read = []\n"
        "whole = Path.read_bytes\n"
        "Path.read_bytes = lambda path: (read.append(path.name), whole(path))[1]\n"
        "from reportgen import fluids\n"
        f"fluids.real_fluid({given!r})\n"
        "print(sorted(name for name in read if name.endswith('.json')))"
    )
    result = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    read = ["ideal_gases.json"] if given == "h2o" else []
    assert result.stdout.strip() == str([*read, "names.json", "water.json"])


def test_each_fluid_loads_quickly() -> None:
    """Bar 5 ms on average from the file; measured 1.2 ms, the slowest 2.6 ms."""
    start = time.perf_counter()
    for name in NAMES:
        catalogue._read.cache_clear()
        fluids.real_fluid(name)
    assert (time.perf_counter() - start) / len(NAMES) < 10e-3


def test_listing_names_every_fluid_with_range_and_source_in_a_line() -> None:
    start = time.perf_counter()
    lines = fluids.listing().splitlines()
    assert time.perf_counter() - start < 2.0
    real = lines[1 : 1 + len(NAMES)]
    for name, line in zip(NAMES, real, strict=True):
        data, _ = catalogue.find(name)
        assert line.startswith(f"  {name} ")
        for part in (data["formula"], f"{data['limits']['maximum_temperature']:g} K", "bar"):
            assert part in line
        assert data["sources"]["equation"][0]["year"] in line
        assert len(line) <= 180, line


def test_sources_read_as_text() -> None:
    for name in NAMES:
        for source in catalogue.source_lines(catalogue.find(name)[0]):
            assert not set(source) & set("{}\\$"), source
            assert not re.search(r"(?<!\.)\.\.(?!\.)", source), source
            assert " & " not in source.split(" (")[0], source


@pytest.mark.parametrize("name", ["R410A", "deuterium", "helium", "propyne", "R236ea", "hexamethyldisiloxane"])
def test_descriptions_say_what_is_special(name: str) -> None:
    text = fluids.describe(name)
    for part in {
        "R410A": ("Pseudo-pure", "led to the equation's own critical point", "lower limit of the collected range"),
        "deuterium": ("7782-39-0", "straight line from the triple point", "melting line  18.724 K"),
        "helium": ("lambda point", "superfluid", "McCarty"),
        "propyne": ("273 K", "lower limit of the collected range, not the triple point"),
        "R236ea": ("1,1,1,2,3,3-Hexafluoropropane", "431-63-0"),
        "hexamethyldisiloxane": ("MM", "107-46-0"),
    }[name]:
        assert part in text, part

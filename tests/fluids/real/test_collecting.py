"""The data files hold what the collecting script makes of the published coefficients."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest

import reportgen.fluids

pytest.importorskip("CoolProp.CoolProp")

from reportgen.fluids.data import collect
from reportgen.fluids.data.collect_bibliography import bibliography
from reportgen.fluids.data.collect_names import FLUIDS, Entry, file_of
from reportgen.fluids.data.collect_terms import RESIDUAL, ideal_terms, terms_of

DATA = Path(reportgen.fluids.__file__).parent / "data"


def carried_data(name: str) -> dict:
    return json.loads((DATA / file_of(name)).read_text(encoding="utf-8"))


@pytest.mark.parametrize("entry", FLUIDS, ids=lambda entry: entry.name)
def test_coefficients_are_those_of_the_source_number_for_number(entry: Entry) -> None:
    data = carried_data(entry.name)
    source = json.loads(collect.get_fluid_param_string(entry.source, "JSON"))[0]["EOS"][0]
    assert data["ideal"] == ideal_terms(source["alpha0"])
    assert data["residual"] == terms_of(source["alphar"], RESIDUAL, "ResidualHelmholtz")
    assert data["molar_mass"] == source["molar_mass"]
    assert data["molar_gas_constant"] == source["gas_constant"]
    assert data["reducing_temperature"] == source["STATES"]["reducing"]["T"]
    assert data["reducing_molar_density"] == source["STATES"]["reducing"]["rhomolar"]
    assert data["title"] == entry.title
    assert all(source["authors"] and source["title"] and source["year"] for source in data["sources"]["equation"])


@pytest.mark.skipif(np.finfo(np.longdouble).eps > 1e-18, reason="curves are fitted in 80-bit floating point")
def test_collecting_again_gives_the_same_file() -> None:
    entry = next(entry for entry in FLUIDS if entry.name == "R134a")
    made = collect.collect(entry, bibliography())
    carried = carried_data("R134a")
    assert made.keys() == carried.keys()
    for key in made.keys() - {"saturation", "critical_point", "lower_end", "normal_boiling_temperature", "limits"}:
        assert made[key] == carried[key], key
    for key, value in made["critical_point"].items():
        assert value == pytest.approx(carried["critical_point"][key], rel=1e-9)
    assert made["saturation"]["edges"] == pytest.approx(carried["saturation"]["edges"], abs=1e-12)
    for curve in ("log_pressure", "liquid_density", "log_vapour_density"):
        # the piece next to the critical point rests on digits that rounding can change
        assert np.array(made["saturation"][curve])[2:] == pytest.approx(
            np.array(carried["saturation"][curve])[2:], abs=1e-8
        )


def test_bibliography_texts_are_plain() -> None:
    library = bibliography()
    assert len(library) > 250
    assert library["Wagner-JPCRD-2002"]["author"] == "W. Wagner and A. Pruß"
    for key in ("Span-JPCRD-1996", "Lemmon-JCED-2009", "Tegeler-JPCRD-1999"):
        for text in library[key].values():
            assert not set(text) & set("{}\\")

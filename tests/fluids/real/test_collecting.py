"""The data files hold what the collecting script makes of the published coefficients."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest

import reportgen.fluids

pytest.importorskip("CoolProp.CoolProp")

from reportgen.fluids.data import collect

DATA = Path(reportgen.fluids.__file__).parent / "data"


@pytest.mark.parametrize("entry", collect.FLUIDS, ids=lambda entry: entry[1])
def test_coefficients_are_those_of_the_source_number_for_number(entry: tuple[str, str, str]) -> None:
    source_name, name, title = entry
    carried = json.loads((DATA / f"{name.replace(' ', '-')}.json").read_text(encoding="utf-8"))
    source = json.loads(collect.get_fluid_param_string(source_name, "JSON"))[0]["EOS"][0]
    assert carried["ideal"] == collect.ideal_terms(source["alpha0"])
    assert carried["residual"] == collect.terms_of(source["alphar"], collect.RESIDUAL, "ResidualHelmholtz")
    assert carried["molar_mass"] == source["molar_mass"]
    assert carried["molar_gas_constant"] == source["gas_constant"]
    assert carried["reducing_temperature"] == source["STATES"]["reducing"]["T"]
    assert carried["reducing_molar_density"] == source["STATES"]["reducing"]["rhomolar"]
    assert carried["title"] == title
    assert all(entry["authors"] and entry["title"] and entry["year"] for entry in carried["sources"]["equation"])


@pytest.mark.skipif(np.finfo(np.longdouble).eps > 1e-18, reason="curves are fitted in 80-bit floating point")
def test_collecting_again_gives_the_same_file() -> None:
    made = collect.collect("R134a", "R134a", "R134a", collect.bibliography())
    carried = json.loads((DATA / "R134a.json").read_text(encoding="utf-8"))
    assert made.keys() == carried.keys()
    for key in made.keys() - {"saturation", "critical_point", "triple_point", "normal_boiling_temperature", "limits"}:
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
    library = collect.bibliography()
    assert len(library) > 250
    assert library["Wagner-JPCRD-2002"]["author"] == "W. Wagner and A. Pruß"
    for key in ("Span-JPCRD-1996", "Lemmon-JCED-2009", "Tegeler-JPCRD-1999"):
        for text in library[key].values():
            assert not set(text) & set("{}\\")

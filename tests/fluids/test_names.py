"""Names of fluids over all models: found on a fresh import, isomers, titles, guesses, descriptions."""

from __future__ import annotations

import subprocess
import sys
from typing import Any

import pytest

from reportgen import fluids
from reportgen.errors import InputError
from reportgen.fluids.naming import title_of

FRESH = """
from reportgen import fluids
print(*(fluids.{name}.__name__.split(".")[-1] for _ in range(2)))
"""


@pytest.mark.parametrize(
    "name", ["gases.condensation", "gases.compositions", "crosscheck", "statistical", "model", "cubic", "humid_air"]
)
def test_names_of_the_documentation_are_there_after_a_fresh_import(name: str) -> None:
    result = subprocess.run([sys.executable, "-c", FRESH.format(name=name)], capture_output=True, text=True, check=True)
    last = name.split(".")[-1]
    assert result.stdout.split() == [last, last]


def test_no_other_names_are_made_up() -> None:
    with pytest.raises(AttributeError, match="no attribute 'condensations'"):
        fluids.gases.condensations  # noqa: B018
    with pytest.raises(AttributeError, match="no attribute 'gasses'"):
        fluids.gasses  # noqa: B018
    assert {"cubic", "crosscheck", "statistical"} <= set(dir(fluids))


@pytest.mark.parametrize(
    ("make", "formula", "named"),
    [
        (fluids.ideal_gas, "C8H10", ("ethylbenzene", "m-xylene", "o-xylene", "p-xylene")),
        (fluids.ideal_gas, "C6H14", ("n-hexane", "isohexane")),
        (fluids.ideal_gas, "C2H4O", ("acetaldehyde", "ethylene oxide")),
        (fluids.ideal_gas, "c4h10", ("n-butane", "isobutane")),
        (fluids.cubic, "C8H10", ("ethylbenzene", "p-xylene")),
        (fluids.cubic, {"CH4": 0.9, "C6H14": 0.1}, ("n-hexane", "isohexane")),
        (fluids.real_fluid, "C2H4O", ("ethylene oxide", "acetaldehyde")),
        (fluids.real_fluid, "C5H10", ("cyclopentane", "1-pentene")),
        (fluids.real_fluid, "C8H10", ("ethylbenzene", "p-xylene")),
        (fluids.describe, "C8H10", ("ethylbenzene", "p-xylene")),
        (fluids.describe, "C2H4O", ("ethylene oxide", "acetaldehyde")),
    ],
)
def test_a_formula_of_isomers_is_asked_back(make: Any, formula: Any, named: tuple[str, ...]) -> None:
    with pytest.raises(InputError, match="Several") as caught:
        make(formula)
    assert len(caught.value.faults) == 1
    for name in named:
        assert name in str(caught.value)


@pytest.mark.parametrize(
    ("formula", "title"),
    [
        ("H2", "Hydrogen"),
        ("D2", "Deuterium"),
        ("CHF3", "Trifluoromethane"),
        ("C7H16", "n-Heptane"),
        ("c3h8", "Propane"),
    ],
)
def test_a_formula_of_one_substance_is_its_name(formula: str, title: str) -> None:
    """Spin isomers and second names of one substance are no isomers."""
    assert fluids.ideal_gas(formula).title == title
    assert fluids.real_fluid(formula).molar_mass == pytest.approx(fluids.ideal_gas(formula).molar_mass, rel=1e-3)


def test_every_ideal_gas_is_found_by_its_key_and_its_name() -> None:
    from reportgen.fluids.gases.species import library, resolve

    for key, species in library().species.items():
        assert resolve(key) is species
        assert resolve(species.name) is species


@pytest.mark.parametrize(
    ("name", "title"),
    [
        ("n-butane", "n-Butane"),
        ("trans-2-butene", "trans-2-Butene"),
        ("1,3-butadiene", "1,3-Butadiene"),
        ("p-xylene", "p-Xylene"),
        ("isobutane", "Isobutane"),
        ("nitrogen", "Nitrogen"),
        ("oil", "Oil"),
        ("R134a", "R134a"),
        ("", ""),
    ],
)
def test_titles(name: str, title: str) -> None:
    assert title_of(name) == title


@pytest.mark.parametrize(
    ("name", "meant"),
    [
        ("ether", "'diethyl ether' or 'dimethyl ether'"),
        ("xylene", "'m-xylene'"),
        ("watr", "Did you mean 'water'?"),
        ("acetaldehid", "'acetaldehyde'"),
        ("R1234ze", "'R1234ze(E)'"),
    ],
)
def test_what_may_be_meant(name: str, meant: str) -> None:
    with pytest.raises(InputError) as caught:
        fluids.describe(name)
    assert len(caught.value.faults) == 1
    assert meant in str(caught.value)


@pytest.mark.parametrize("name", ["999-99-9", "freon", "nope", "zzzz"])
def test_no_guess_without_likeness(name: str) -> None:
    for ask in (fluids.describe, fluids.real_fluid, fluids.ideal_gas):
        with pytest.raises(InputError) as caught:
            ask(name)
        assert f"Found: '{name}'" in str(caught.value)
        assert caught.value.faults[0].hint is None


@pytest.mark.parametrize("name", [None, 3, ["water"], b"water", {1: 1.0}])
@pytest.mark.parametrize("ask", [fluids.describe, fluids.real_fluid, fluids.ideal_gas, fluids.cubic])
def test_what_is_no_name_is_refused(ask: Any, name: Any) -> None:
    with pytest.raises(InputError):
        ask(name)


def test_both_descriptions_have_name_number_and_one_style_of_pressure() -> None:
    real, ideal = fluids.describe("7782-44-7").split("\n\n")
    for text in (real, ideal):
        assert "  name          oxygen\n" in text
        assert "  CAS number    7782-44-7\n" in text
    assert "MPa" not in real.split("  source")[0]
    assert "800 bar" in real
    assert fluids.real_fluid("1,1,1,2-tetrafluoroethane").substance == "R134a"


def test_critical_points_are_printed_without_rounding_noise() -> None:
    assert "temperature=304.1282, " in repr(fluids.real_fluid("CO2").limits)

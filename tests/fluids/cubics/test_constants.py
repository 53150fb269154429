"""Critical constants: those carried, and those a user gives."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

import reportgen
from reportgen import fluids
from reportgen.errors import InputError
from reportgen.fluids.cubics.constants import carried, constants_for
from reportgen.fluids.gases.species import library

DATA = Path(reportgen.__file__).parent / "fluids" / "data"
CONTENT = json.loads((DATA / "critical_constants.json").read_text("utf-8"))

#: Atoms and radicals, which have no liquid.
WITHOUT = {"H", "N", "O", "OH", "S2"}


def test_every_species_with_a_liquid_has_constants_and_each_value_its_publication() -> None:
    assert set(CONTENT["species"]) == set(library().species) - WITHOUT
    for key, constants in carried().items():
        assert 3.0 < constants.temperature < 2000.0, key
        assert 1e5 < constants.pressure < 2e8, key
        assert -0.5 < constants.acentric_factor < 1.0, key
        assert constants.sources
        assert all(len(line) > 40 for line in constants.sources), key


def test_values_of_real_fluids_are_those_of_their_files() -> None:
    found = 0
    for key, entry in CONTENT["species"].items():
        file = entry["critical_source"]
        if file.endswith(".json"):
            data = json.loads((DATA / file).read_text("utf-8"))
            assert data["cas"] == entry["cas"], key
            assert entry["temperature"] == data["critical_point"]["temperature"], key
            assert entry["pressure"] == data["critical_point"]["pressure"], key
            assert entry["acentric_factor"] == data["acentric_factor"], key
            found += 1
    assert found >= 40


@pytest.mark.parametrize(
    ("key", "temperature", "pressure", "factor"),
    [
        # critical points and acentric factors as the handbooks round them, from memory
        ("CH4", 190.56, 4.599e6, 0.011),
        ("CO2", 304.13, 7.377e6, 0.224),
        ("H2O", 647.1, 22.06e6, 0.344),
        ("NO", 180.0, 6.48e6, 0.58),
        ("C7H16", 540.2, 2.74e6, 0.349),
    ],
)
def test_well_known_constants(key: str, temperature: float, pressure: float, factor: float) -> None:
    constants = carried()[key]
    assert constants.temperature == pytest.approx(temperature, rel=2e-3)
    assert constants.pressure == pytest.approx(pressure, rel=1e-2)
    assert constants.acentric_factor == pytest.approx(factor, abs=0.01)


def test_constants_of_the_user_come_first() -> None:
    given = {"temperature": 300.0, "pressure": 5e6, "acentric_factor": 0.2}
    fluid = fluids.cubic({"CO2": 0.5, "N2": 0.5}, critical={"carbon dioxide": given})
    mixture = fluid._equilibria.model.mixture
    assert mixture.critical_temperatures[0] == 300.0
    assert mixture.critical_temperatures[1] == carried()["N2"].temperature
    assert any("given by the user" in line for line in fluid.sources)
    # OH has none of its own
    assert fluids.cubic("OH", critical={"OH": given}).limits.critical_point is not None


@pytest.mark.parametrize(
    ("given", "said"),
    [
        ({"CO": {"temperature": 133.0, "pressure": 3.5e6, "acentric_factor": 0.05}}, "not in the composition"),
        ({"carbn dioxide": {}}, "not carried"),
        ({"CO2": {"temperature": 304.0, "pressure": 7.4e6}}, "acentric factor of CO2 is missing"),
        ({"CO2": {"temperatur": 304.0, "pressure": 7.4e6, "acentric_factor": 0.2}}, "Did you mean temperature?"),
        ({"CO2": {"temperature": 31.0e3, "pressure": 7.4e6, "acentric_factor": 0.2}}, "cannot be meant"),
        ({"CO2": {"temperature": 304.0, "pressure": 73.8, "acentric_factor": 0.2}}, "cannot be meant"),
        ({"CO2": {"temperature": True, "pressure": 7.4e6, "acentric_factor": float("nan")}}, "cannot be meant"),
        ({"CO2": 304.0}, "are a table"),
    ],
)
def test_wrong_constants_are_refused(given: dict, said: str) -> None:
    with pytest.raises(InputError, match=said):
        constants_for(["CO2"], given)


def test_a_species_without_constants_is_refused_with_what_would_do() -> None:
    with pytest.raises(InputError, match="critical temperature, critical pressure and acentric factor"):
        fluids.cubic({"OH": 0.5, "N2": 0.5})

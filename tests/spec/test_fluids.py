"""Fluids of every model and second sources, as they are read."""

from __future__ import annotations

from pathlib import Path

import pytest

from reportgen import spec
from reportgen.errors import InputError
from reportgen.evaluation import property_model
from reportgen.spec.calculation import (
    CriticalConstants,
    FluidSpec,
    HeatPolynomial,
    HeatTable,
    Interaction,
    SecondSource,
)
from tests.spec.writing import SURROUNDINGS, TITLE, faults, read

STATE = """
[states.1]
fluid       = "f"
pressure    = "2 bar"
temperature = "20 degC"
"""


def fluid(folder: Path, table: str) -> FluidSpec:
    return read(folder, TITLE + SURROUNDINGS + "[fluids.f]\n" + table + STATE).fluids["f"]


def test_a_cubic_mixture_with_everything(tmp_path: Path) -> None:
    found = fluid(
        tmp_path,
        """
model              = "cubic"
equation           = "Soave-Redlich-Kwong"
basis              = "mass"
composition        = { CO2 = "90 %", X = 0.1 }
interaction        = [{ between = ["CO2", "X"], coefficient = -0.02, source = "fit to bubble points" }]
volume_translation = { CO2 = "-1.5 cm3/mol", X = "0.003 m3/kmol" }
critical           = { X = { temperature = "31 degC", pressure = "70 bar(g)", acentric_factor = 0.2 } }
""",
    )
    assert (found.model, found.equation, found.basis) == ("cubic", "Soave-Redlich-Kwong", "mass")
    assert found.composition == {"CO2": 0.9, "X": 0.1}
    assert found.interactions == (Interaction("CO2", "X", -0.02, "fit to bubble points"),)
    assert isinstance(found.volume_translation, dict)
    assert found.volume_translation["CO2"] == pytest.approx(-1.5e-6)
    assert found.volume_translation["X"] == pytest.approx(3e-6)
    assert found.critical == {"X": CriticalConstants(pytest.approx(304.15), pytest.approx(71.013e5), 0.2)}


def test_a_cubic_substance_with_nothing_but_its_name(tmp_path: Path) -> None:
    found = fluid(tmp_path, 'model = "cubic"\nequation = "Peng-Robinson"\nsubstance = "propane"\n')
    assert (found.substance, found.composition, found.critical, found.interactions) == ("propane", None, {}, ())
    assert found.volume_translation is None
    peneloux = 'model = "cubic"\nequation = "Peng-Robinson"\nsubstance = "propane"\nvolume_translation = "Peneloux"\n'
    assert fluid(tmp_path, peneloux).volume_translation == "Peneloux"


RANGE = 'minimum_temperature = "0 degC"\nmaximum_temperature = "300 degC"\n'


def test_incompressible_with_a_constant_heat(tmp_path: Path) -> None:
    table = 'model = "incompressible"\ndensity = "0.87 kg/L"\nspecific_heat = "2.1 kJ/(kg*K)"\nsource = "data sheet"\n'
    found = fluid(tmp_path, table + RANGE)
    assert found.density == pytest.approx(870.0)
    assert found.specific_heat == pytest.approx(2100.0)
    assert (found.phase, found.source) == ("liquid", "data sheet")
    assert found.temperature_range == (pytest.approx(273.15), pytest.approx(573.15))


def test_incompressible_with_a_polynomial_in_degrees_celsius(tmp_path: Path) -> None:
    table = 'model = "incompressible"\ndensity = "870 kg/m3"\nphase = "solid"\n'
    table += 'specific_heat = { coefficients = [1.85, 0.0034], unit = "kJ/(kg*K)", about = "0 degC" }\n'
    found = fluid(tmp_path, table + RANGE)
    assert found.specific_heat == HeatPolynomial((1850.0, pytest.approx(3.4)), pytest.approx(273.15))
    assert found.phase == "solid"


def test_incompressible_with_rows_has_their_range(tmp_path: Path) -> None:
    table = 'model = "incompressible"\ndensity = "870 kg/m3"\n'
    table += 'specific_heat = [{ temperature = "10 degC", specific_heat = "1.9 kJ/(kg*K)" }, '
    table += '{ temperature = "210 degC", specific_heat = "2.5 kJ/(kg*K)" }]\n'
    found = fluid(tmp_path, table)
    assert found.specific_heat == HeatTable((283.15, 483.15), (1900.0, 2500.0))
    assert found.temperature_range == (283.15, 483.15)
    narrowed = fluid(tmp_path, table + 'maximum_temperature = "150 degC"\n')
    assert narrowed.temperature_range == (283.15, 423.15)


@pytest.mark.parametrize("zero", ["published", "IIR", "ASHRAE", "NBP", "third-law"])
def test_reference_states(zero: str, tmp_path: Path) -> None:
    table = f'model = "real-fluid"\nsubstance = "R134a"\nreference_state = "{zero}"\n'
    assert fluid(tmp_path, table).reference_state == zero


# --- second sources -------------------------------------------------------------------------------------------------

REAL = TITLE + SURROUNDINGS + '[fluids.f]\nmodel = "real-fluid"\nsubstance = "water"\n'


@pytest.mark.parametrize(
    ("written", "meant"),
    [
        ('"library"', (SecondSource("library"),)),
        ('{ model = "cubic", tolerance = "0.5 %" }', (SecondSource("cubic", 0.005),)),
        ('{ model = "cubic", tolerance = 0.005 }', (SecondSource("cubic", 0.005),)),
        ('["ideal-gas", { model = "library" }]', (SecondSource("ideal-gas"), SecondSource("library"))),
        ('"none"', ()),
    ],
)
def test_second_sources_of_a_state(written: str, meant: tuple[SecondSource, ...], tmp_path: Path) -> None:
    found = read(tmp_path, REAL + STATE + f"second_source = {written}\n").states["1"]
    assert found.second_sources == meant


def test_a_fluid_gives_its_second_source_to_states_that_name_none(tmp_path: Path) -> None:
    text = REAL + 'second_source = "library"\n' + STATE
    text += '[states.2]\nlike = "1"\nsecond_source = "cubic"\n[states.3]\nlike = "1"\nsecond_source = "none"\n'
    states = read(tmp_path, text).states
    assert [states[name].second_sources for name in "123"] == [(SecondSource("library"),), (SecondSource("cubic"),), ()]


def test_a_second_source_is_not_copied_by_a_likeness(tmp_path: Path) -> None:
    text = REAL + STATE + 'second_source = "library"\n[states.2]\nlike = "1"\n'
    assert read(tmp_path, text).states["2"].second_sources == ()


def test_incompressible_fluids_take_pressure_and_temperature_and_volume_flow(tmp_path: Path) -> None:
    table = 'model = "incompressible"\ndensity = "870 kg/m3"\nspecific_heat = "2.1 kJ/(kg*K)"\n' + RANGE
    text = TITLE + SURROUNDINGS + "[fluids.f]\n" + table + STATE + 'volume_flow = "3 m3/h"\n'
    assert faults(tmp_path, text) == []


def test_cubic_fluids_take_a_quality(tmp_path: Path) -> None:
    text = TITLE + SURROUNDINGS + '[fluids.f]\nmodel = "cubic"\nequation = "Peng-Robinson"\nsubstance = "propane"\n'
    assert faults(tmp_path, text + '[states.1]\nfluid = "f"\npressure = "2 bar"\nquality = 0.3\n') == []


def test_the_fluids_of_the_readme_can_be_read(tmp_path: Path) -> None:
    readme = (Path(__file__).parents[2] / "README.md").read_text("utf-8")
    (block,) = (part.partition("```")[0] for part in readme.split("```toml\n")[1:] if "[fluids." in part)
    calculation = read(tmp_path, TITLE + SURROUNDINGS + block)
    assert {fluid.model for fluid in calculation.fluids.values()} == {"real-fluid", "cubic", "incompressible"}
    assert [source.model for source in calculation.states["7"].second_sources] == ["library", "ideal-gas"]


def test_critical_constants_of_the_wrong_form_are_answered_with_an_example(tmp_path: Path) -> None:
    text = 'model = "cubic"\nequation = "Peng-Robinson"\nsubstance = "X"\ncritical = [{ temperature = "300 K" }]\n'
    (fault,) = faults(tmp_path, TITLE + SURROUNDINGS + "[fluids.f]\n" + text + STATE)
    assert fault.path == "fluids.f.critical"
    assert fault.expected is not None
    assert 'critical = { CO2 = { temperature = "304.13 K", pressure = "73.77 bar", acentric' in fault.expected
    example = fault.expected.partition("as in: ")[2].replace("CO2", "X")
    found = fluid(tmp_path, text.replace('critical = [{ temperature = "300 K" }]', example))
    assert found.critical["X"].acentric_factor == 0.224


def test_substances_that_are_not_carried_are_told_with_all_other_faults(tmp_path: Path) -> None:
    text = """
[fluids.a]
model     = "cubic"
equation  = "Peng Robinson"
substance = "propan"

[fluids.b]
model           = "real-fluid"
substance       = "watr"
reference_state = "thirdlaw"

[fluids.c]
model       = "ideal-gas"
basis       = "mole"
composition = { N2 = 0.5, Oxigen = 0.6 }

[fluids.d]
model       = "cubic"
equation    = "Peng-Robinson"
basis       = "mole"
composition = { N2 = 0.5, mine = 0.6 }
critical    = { mine = { temperature = "300 K" } }
"""
    (tmp_path / "calculation.toml").write_text(TITLE + SURROUNDINGS + text, encoding="utf-8")
    with pytest.raises(InputError) as caught:
        spec.read(tmp_path, property_model)
    paths = [fault.path for fault in caught.value.faults]
    for path in ("fluids.a.substance", "fluids.b.substance", "fluids.c.composition.Oxigen"):
        assert paths.count(path) == 1, str(caught.value)
    for path in ("fluids.a.equation", "fluids.b.reference_state", "fluids.c.composition"):
        assert path in paths
    assert "fluids.d.composition.mine" not in paths


def test_the_specific_heat_of_a_wall_is_called_a_heat_capacity(tmp_path: Path) -> None:
    vessel = '[vessels.V]\nkind = "discharge"\ninitial = "1"\nwall = { mass = "9 kg", specific_heat = "470 J/kg" }\n'
    text = '[fluids.f]\nmodel = "real-fluid"\nsubstance = "water"\n'
    found = faults(tmp_path, TITLE + SURROUNDINGS + text + STATE + vessel)
    (told,) = (fault for fault in found if fault.path == "vessels.V.wall.specific_heat")
    assert told.message == '"J/kg" is a unit of a specific energy, but a specific heat capacity is needed.'
    assert told.expected == '"1.5 kJ/(kg*K)"'

"""What once was told wrongly of a calculation, or not at all: pieces that run down, fans, mixtures, surplus data."""

from __future__ import annotations

import re

import pytest

from reportgen.errors import ReportgenError
from reportgen.record import Record
from tests.evaluation.calculations import AIR, HEAD, evaluated

WATER = HEAD + '\n[fluids.water]\nmodel = "real-fluid"\nsubstance = "water"\n'


def cautions(record: Record, identifier: str) -> list[tuple[str, str]]:
    return [(entry["severity"], entry["path"]) for entry in record.data["cautions"] if entry["id"] == identifier]


def refused(text: str) -> str:
    with pytest.raises(ReportgenError) as failure:
        evaluated(text)
    return str(failure.value)


# Separators of mixtures: their phases are not of the whole composition

SEPARATOR = (
    HEAD
    + """
[fluids.f]
FLUID

[states.1]
fluid     = "f"
pressure  = "8 bar"
quality   = "0.4"
mass_flow = "1 kg/s"

[states.2]
fluid = "f"

[states.3]
fluid = "f"

[equipment.S]
kind          = "separator"
inlet         = "1"
vapour_outlet = "2"
liquid_outlet = "3"
"""
)


@pytest.mark.parametrize(
    "fluid",
    [
        'model = "cubic"\nequation = "Peng-Robinson"\nbasis = "mole"\ncomposition = { CH4 = 0.9, C2H6 = 0.1 }',
        'model = "real-fluid"\nsubstance = "R407C"',
    ],
    ids=["mixture by a cubic equation", "pseudo-pure fluid"],
)
def test_a_separator_of_a_mixture_is_refused_at_the_fluid(fluid: str) -> None:
    text = SEPARATOR.replace("FLUID", fluid)
    if "R407C" in fluid:
        text = text.replace('pressure  = "8 bar"\nquality   = "0.4"', 'pressure = "8 bar"\ntemperature = "60 degC"')
    message = refused(text)
    assert "states.1.fluid: Separator S parts a mixture" in message
    assert "Would do: a pure substance" in message


@pytest.mark.parametrize(
    "fluid",
    [
        'model = "cubic"\nequation = "Peng-Robinson"\nsubstance = "propane"',
        'model = "real-fluid"\nsubstance = "propane"',
    ],
    ids=["cubic", "published"],
)
def test_a_separator_of_a_pure_substance_parts_it_by_its_quality(fluid: str) -> None:
    record = evaluated(SEPARATOR.replace("FLUID", fluid))
    assert record.value("states.2.mass_flow") == pytest.approx(0.4, rel=1e-9)
    assert abs(record.value("equipment.S.entropy_generation")) < 1e-6


# Pipes between two heights

PIPE = (
    WATER
    + """
[states.1]
fluid       = "water"
pressure    = "10 bar"
temperature = "20 degC"
mass_flow   = "5 kg/s"
FIRST

[states.2]
fluid = "water"
LAST

[equipment.P]
kind   = "pipe"
inlet  = "1"
outlet = "2"
MORE
"""
)


def pipe(first: str, last: str, more: str = "", pressure: str = "") -> str:
    heights = [f'elevation = "{height} m"' if height else "" for height in (first, last)]
    last_lines = heights[1] + (f'\npressure = "{pressure}"' if pressure else "")
    return PIPE.replace("FIRST", heights[0]).replace("LAST", last_lines).replace("MORE", more)


@pytest.mark.parametrize(
    ("first", "last", "pressure", "told"),
    [
        ("30", "0", "12.5 bar", False),  # the head is 998.6 kg/m3 · 9.80665 m/s2 · 30 m = 2.938 bar
        ("30", "0", "12.93 bar", False),
        ("30", "0", "13.1 bar", True),
        ("0", "30", "7.0 bar", False),
        ("0", "30", "7.5 bar", True),
        ("0", "0", "10.1 bar", True),
        ("", "", "10.1 bar", True),
        ("", "", "9.9 bar", False),
    ],
)
def test_p04_counts_the_height(first: str, last: str, pressure: str, told: bool) -> None:
    record = evaluated(pipe(first, last, pressure=pressure))
    assert cautions(record, "P04") == ([("warning", "equipment.P.pressure_drop")] if told else [])


def test_the_limit_of_p04_is_the_static_head() -> None:
    record = evaluated(pipe("30", "0", pressure="13.5 bar"))
    (entry,) = (entry for entry in record.data["cautions"] if entry["id"] == "P04")
    assert entry["value"] == pytest.approx(-3.5e5)
    assert entry["limit"] == pytest.approx(-998.7 * 9.80665 * 30.0, rel=3e-4)
    assert entry["dimension"] == "pressure_difference"


def test_the_pressure_loss_of_a_pipe_that_runs_down_may_be_negative() -> None:
    record = evaluated(pipe("30", "0", 'pressure_drop = "-2.5 bar"'))
    assert record.value("states.2.pressure") == pytest.approx(12.5e5)
    assert cautions(record, "P04") == []
    heater = pipe("30", "0", 'pressure_drop = "-2.5 bar"\nheat = "1 kW"\nboundary_temperature = "90 degC"')
    assert "The value is outside what is possible" in refused(heater.replace('kind   = "pipe"', 'kind = "heater"'))


# Machines whose heat follows from surplus data

TURBINE = (
    WATER
    + """
[states.1]
fluid       = "water"
pressure    = "40 bar"
temperature = "400 degC"
mass_flow   = "10 kg/s"

[states.2]
fluid    = "water"
pressure = "2 bar"

[equipment.T]
kind                  = "turbine"
inlet                 = "1"
outlet                = "2"
isentropic_efficiency = "80 %"
MORE
"""
)


def test_p21_on_a_turbine_whose_power_is_stated_too() -> None:
    adiabatic = evaluated(TURBINE.replace("MORE", ""))
    assert cautions(adiabatic, "P21") == []
    power = adiabatic.value("equipment.T.power")
    for factor, expected in ((1.01, 0), (1.05, 1), (0.95, 1)):
        record = evaluated(TURBINE.replace("MORE", f'power = "{factor * power / 1e3:.6f} kW"'))
        assert cautions(record, "P21") == [("warning", "equipment.T.heat")] * expected
        assert record.value("equipment.T.heat") == pytest.approx((factor - 1.0) * power, rel=1e-4)
    said = f'power = "{1.05 * power / 1e3:.6f} kW"\nboundary_temperature = "450 degC"'
    assert cautions(evaluated(TURBINE.replace("MORE", said)), "P21") == []
    within = f'power = "{1.05 * power / 1e3:.6f} kW ± 10 %"'
    (entry,) = (e for e in evaluated(TURBINE.replace("MORE", within)).data["cautions"] if e["id"] == "P21")
    assert entry["decided"] is False
    assert "may exchange" in entry["text"]


COOLED = (
    HEAD
    + AIR
    + """
[states.1]
fluid       = "air"
pressure    = "1 bar"
temperature = "20 degC"
mass_flow   = "1 kg/s"

[states.2]
fluid       = "air"
pressure    = "6 bar"
temperature = "120 degC"

[equipment.C]
kind   = "compressor"
inlet  = "1"
outlet = "2"
power  = "POWER"
"""
)


def test_p21_leaves_a_cooled_compressor_alone() -> None:
    assert cautions(evaluated(COOLED.replace("POWER", "150 kW")), "P21") == []
    assert cautions(evaluated(COOLED.replace("POWER", "90 kW")), "P21") == [("warning", "equipment.C.heat")]


# Fans, and velocities that are solved for

FAN = (
    HEAD
    + """
[fluids.f]
FLUID

[states.1]
fluid       = "f"
pressure    = "1 bar"
temperature = "20 degC"
mass_flow   = "1 kg/s"

[states.2]
fluid    = "f"
pressure = "1.02 bar"

[equipment.F]
kind                  = "fan"
inlet                 = "1"
outlet                = "2"
isentropic_efficiency = "70 %"
"""
)


def test_a_fan_moves_gas() -> None:
    air = evaluated(FAN.replace("FLUID", 'model = "ideal-gas"\nsubstance = "air"'))
    assert [entry["id"] for entry in air.data["cautions"]] == []
    water = evaluated(FAN.replace("FLUID", 'model = "real-fluid"\nsubstance = "water"'))
    assert cautions(water, "P08") == []
    assert cautions(water, "T09") == [("stop", "states.1.temperature")]


def test_p12_is_silent_where_the_other_velocity_is_solved_for() -> None:
    text = COOLED.replace('power  = "POWER"', "").replace('pressure    = "6 bar"\ntemperature = "120 degC"', "")
    text = text.replace("compressor", "diffuser").replace("temperature = ", 'velocity = "200 m/s"\ntemperature = ', 2)
    text += 'isentropic_efficiency = "80 %"\noutlet_area = "100 cm2"\n'
    record = evaluated(text.replace('[surroundings]\nvelocity = "200 m/s"\n', "[surroundings]\n"))
    assert record.value("states.2.velocity") == pytest.approx(75.9, abs=1.0)
    assert cautions(record, "P12") == []


# Nozzles that cannot be

NOZZLE = (
    HEAD
    + """
[fluids.n]
model     = "ideal-gas"
substance = "N2"

[states.1]
fluid       = "n"
pressure    = "5 bar"
temperature = "20 degC"
mass_flow   = "1 kg/s"

[states.2]
fluid    = "n"
pressure = "PRESSURE"

[equipment.N]
kind                  = "nozzle"
inlet                 = "1"
outlet                = "2"
isentropic_efficiency = "97 %"
"""
)


def test_a_nozzle_against_its_pressure_is_told_so() -> None:
    message = refused(NOZZLE.replace("PRESSURE", "6 bar"))
    assert "the pressure of a nozzle falls, and here it rises from state 1 to state 2" in message
    assert "factor" not in message


def test_an_isentropic_state_beyond_the_model_names_limit_and_temperature() -> None:
    """Perfect gas: 293.15 K · 5^(−R/c_p), R/c_p = 0.2857, is 185.1 K."""
    message = refused(NOZZLE.replace("PRESSURE", "1 bar"))
    found = re.search(r"at about ([0-9.]+) K .*minimum of Nitrogen is ([0-9.]+) K", message)
    assert found is not None
    assert float(found[1]) == pytest.approx(185.1, abs=0.3)
    assert float(found[2]) == 200.0
    assert 'model = "real-fluid"' in message


# Words of two refusals


def test_different_substances_are_named_and_not_their_zeros() -> None:
    text = NOZZLE.replace("PRESSURE", "4 bar").replace(
        '[states.2]\nfluid    = "n"', '[fluids.c]\nmodel = "ideal-gas"\nsubstance = "CO2"\n\n[states.2]\nfluid = "c"'
    )
    message = refused(text)
    assert "Found: n: Nitrogen; c: Carbon dioxide." in message
    assert "third-law" not in message


def test_heat_of_an_isentropic_process_is_answered() -> None:
    text = HEAD + AIR + '[states.a]\nfluid = "air"\npressure = "2 bar"\ntemperature = "20 degC"\nmass = "1 kg"\n'
    text += '[states.b]\nfluid = "air"\npressure = "8 bar"\n'
    text += '[processes.Q]\nkind = "isentropic"\nfrom = "a"\nto = "b"\nheat = "5 kJ"\n'
    message = refused(text)
    assert 'There is no key "heat" here.' in message
    assert "Isentropic change: The system changes slowly and exchanges no heat" in message

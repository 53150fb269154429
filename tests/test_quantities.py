"""Quantities at the border: what a file may say, what it means in SI, and what a reader sees."""

from __future__ import annotations

import math
import re
import subprocess
import sys
from decimal import Decimal
from pathlib import Path

import pint
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import InputError
from reportgen.names import DIMENSIONS
from reportgen.quantities import Display, Quantity, parse, units, units_of, usual_units
from reportgen.quantities.units import conversion, find_unit

ATMOSPHERE = 101_300.0  # Pa


def read(text: object, dimension: str | tuple[str, ...], atmosphere: float | None = ATMOSPHERE) -> Quantity:
    return parse(text, dimension, atmosphere=atmosphere)


def refusal(text: object, dimension: str | tuple[str, ...], atmosphere: float | None = ATMOSPHERE) -> str:
    with pytest.raises(InputError) as caught:
        parse(text, dimension, atmosphere=atmosphere)
    return str(caught.value)


# Conversion factors as printed in NIST SP 811 (2008 edition, DOI 10.6028/NIST.SP.811e2008), appendix B.8; those in
# bold there are exact. Recalled from memory; the printed digits set the tolerance.
SP_811_LISTED = [
    ("1 Btu/lb", "specific_energy", 2.326e3, 1e-12),  # Btu_IT, exact
    ("1 Btu/(lb*degF)", "specific_entropy", 4.1868e3, 1e-12),  # Btu_IT, exact
    ("1 Btu/(lb*degR)", "specific_entropy", 4.1868e3, 1e-12),
    ("1 Btu", "energy", 1.05505585262e3, 1e-12),  # Btu_IT
    ("1 Btu/h", "power", 2.930711e-1, 4e-7),
    ("1 kcal_IT", "energy", 4.1868e3, 1e-12),
    ("1 kcal_th", "energy", 4.184e3, 1e-12),
    ("1 kWh", "energy", 3.6e6, 1e-12),
    ("1 hp", "power", 7.456999e2, 1e-7),  # 550 ft·lbf/s
    ("1 PS", "power", 7.354988e2, 1e-7),  # metric horsepower
    ("1 psi", "pressure_difference", 6.894757e3, 1e-7),
    ("1 psia", "pressure", 6.894757e3, 1e-7),
    ("1 atm", "pressure", 1.01325e5, 1e-12),
    ("1 kgf/cm2", "pressure", 9.80665e4, 1e-12),
    ("1 mmHg", "pressure", 1.333224e2, 4e-7),
    ("1 inHg", "pressure", 3.386389e3, 4e-7),
    ("1 inH2O", "pressure_difference", 2.490889e2, 4e-7),
    ("1 mmH2O", "pressure_difference", 9.80665e0, 1e-12),
    ("1 lb", "mass", 4.5359237e-1, 1e-12),
    ("1 lb/h", "mass_flow", 1.259979e-4, 4e-7),
    ("1 lb/ft3", "density", 1.601846e1, 4e-7),
    ("1 ft3/lb", "specific_volume", 6.242796e-2, 4e-7),
    ("1 ft3/min", "volume_flow", 4.719474e-4, 4e-7),
    ("1 gal", "volume", 3.785412e-3, 4e-7),
    ("1 ft", "length", 3.048e-1, 1e-12),
    ("1 in2", "area", 6.4516e-4, 1e-12),
    ("491.67 degR", "temperature", 273.15, 1e-12),
    ("32 degF", "temperature", 273.15, 1e-12),
    ("212 °F", "temperature", 373.15, 1e-12),
]


@pytest.mark.parametrize(("text", "dimension", "listed", "tolerance"), SP_811_LISTED)
def test_conversion_factors_are_the_published_ones(text, dimension, listed, tolerance):
    assert read(text, dimension).value == pytest.approx(listed, rel=tolerance)


@pytest.mark.parametrize(
    ("text", "dimension", "value", "expanded"),
    [
        ("7.2 bar(g)", "pressure", 821_300.0, None),
        ("7.2 barg", "pressure", 821_300.0, None),
        ("40 ± 0.2 bar", "pressure", 40e5, 0.2e5),
        ("40 +/- 0.2 bar", "pressure", 40e5, 0.2e5),
        ("39.0 bar(g) ± 0.3 bar", "pressure", 39e5 + ATMOSPHERE, 0.3e5),
        ("39.0 ± 0.3 bar(g)", "pressure", 39e5 + ATMOSPHERE, 0.3e5),
        ("1 bar(g) ± 2 %", "pressure", 1e5 + ATMOSPHERE, 0.02e5),  # of the gauge value
        ("-0.3 bar(g) ± 2 %", "pressure", -0.3e5 + ATMOSPHERE, 0.006e5),
        ("100 kPa(g)", "pressure", 201_300.0, None),
        ("0.1 MPa(g)", "pressure", 201_300.0, None),
        ("1.2 bar(a)", "pressure", 120_000.0, None),
        ("1.2 bar", "pressure", 120_000.0, None),
        ("10 psig ± 1 psi", "pressure", 10 * 6894.757293168 + ATMOSPHERE, 6894.757293168),
        ("400 degC ± 1.5 K", "temperature", 673.15, 1.5),
        ("400 °C ± 1.5 °C", "temperature", 673.15, 1.5),
        ("(400 ± 1.5) degC", "temperature", 673.15, 1.5),
        ("752 degF ± 9 degF", "temperature", 673.15, 5.0),
        ("18 delta_degF", "temperature_difference", 10.0, None),
        ("5.2 t/h ± 2 %", "mass_flow", 5200 / 3600, 0.02 * 5200 / 3600),
        ("1.2×10⁻³ kg/s", "mass_flow", 1.2e-3, None),
        ("12\u2009345.6 kg/h", "mass_flow", 12345.6 / 3600, None),
        ("−5 m", "length", -5.0, None),
        ("4.2 kJ/(kg·K)", "specific_entropy", 4200.0, None),
        ("4.2 kJ/kg/K", "specific_entropy", 4200.0, None),
        ("4.2 kJ kg⁻¹ K⁻¹", "specific_entropy", 4200.0, None),
        ("3 m³/h", "volume_flow", 3 / 3600, None),
        ("85 %", "efficiency", 0.85, None),
        ("0.85", "efficiency", 0.85, None),
        (0.85, "efficiency", 0.85, None),
        (3, "ratio", 3.0, None),
        ("85 % ± 2 %", "efficiency", 0.85, 0.02),  # percentage points
        ("(85 ± 2) %", "efficiency", 0.85, 0.02),
        ("0.85 ± 0.02", "efficiency", 0.85, 0.02),
    ],
)
def test_accepted_forms(text, dimension, value, expanded):
    quantity = read(text, dimension)
    assert quantity.value == pytest.approx(value, rel=1e-12)
    assert quantity.unit == DIMENSIONS[dimension]
    if expanded is None:
        assert quantity.expanded_uncertainty is None
        assert quantity.standard_uncertainty is None
    else:
        assert quantity.expanded_uncertainty == pytest.approx(expanded, rel=1e-9)
        assert quantity.standard_uncertainty == pytest.approx(expanded / 2.0, rel=1e-9)


def test_gauge_and_absolute_are_different_kinds():
    gauge, absolute = read("2 bar(g)", "pressure"), read("2 bar", "pressure")
    assert (gauge.gauge, absolute.gauge) == (True, False)
    assert gauge.value - absolute.value == pytest.approx(ATMOSPHERE)
    assert (gauge.written_unit, gauge.text) == ("bar(g)", "2 bar(g)")


def test_normal_and_standard_flows_become_molar_flows():
    # Molar volume of an ideal gas at 273.15 K and 101.325 kPa, CODATA 2018: 22.413 969 54... e-3 m3/mol.
    normal = read("100 Nm3/h ± 1 %", ("volume_flow", "molar_flow"))
    assert normal.dimension == "molar_flow"
    assert normal.value == pytest.approx(100 / 3600 / 22.41396954e-3, rel=1e-9)
    assert normal.expanded_uncertainty == pytest.approx(0.01 * normal.value)
    standard = read("100 Sm3/h", ("volume_flow", "molar_flow"))
    assert standard.value / normal.value == pytest.approx(273.15 / 288.15, rel=1e-12)
    assert read("100 m3/h", ("volume_flow", "molar_flow")).dimension == "volume_flow"


@pytest.mark.parametrize(
    ("distribution", "divisor"),
    # JCGM 100:2008, 4.3.7, 4.3.9 and F.2.2.1 (half-width over standard uncertainty)
    [("uniform", math.sqrt(3)), ("triangular", math.sqrt(6)), ("u-shaped", math.sqrt(2)), ("normal", 2.0)],
)
def test_distributions(distribution, divisor):
    quantity = read({"value": "400 degC ± 1.5 K", "distribution": distribution}, "temperature")
    assert quantity.standard_uncertainty == pytest.approx(1.5 / divisor)
    assert quantity.expanded_uncertainty == pytest.approx(2.0 * 1.5 / divisor)


def test_table_carries_what_it_says():
    quantity = parse(
        {
            "value": "40 ± 0.3 bar",
            "source": "PI-301, calibrated 2026-01",
            "evaluation": "A",
            "degrees_of_freedom": 9,
            "coverage_factor": 3,
            "supplied_by": "Operations",
            "status": "preliminary",
        },
        "pressure",
        atmosphere=None,
    )
    assert quantity.standard_uncertainty == pytest.approx(0.1e5)
    assert quantity.expanded_uncertainty == pytest.approx(0.3e5)
    assert (quantity.evaluation, quantity.degrees_of_freedom, quantity.coverage_factor) == ("A", 9.0, 3.0)
    assert quantity.source == "PI-301, calibrated 2026-01"
    assert (quantity.supplied_by, quantity.status) == ("Operations", "preliminary")
    assert read("40 bar", "pressure").degrees_of_freedom == math.inf


def test_coverage_factor_of_the_file_applies_to_plain_texts():
    assert parse("40 ± 0.3 bar", "pressure", atmosphere=None, coverage_factor=3.0).standard_uncertainty == 1e4


REFUSED = [
    ("10 psi", "pressure", r'The unit "psi" is ambiguous.*"psia".*"psig"'),
    ("10 psi ± 1 %", "pressure", r"ambiguous"),
    ("5 ton/h", "mass_flow", r'"ton/h" is not known.*Nearest: "t/h"'),
    ("5 ton", "mass", r'"ton" is ambiguous.*1000 kg'),
    ("5 kcal", "energy", r'"kcal" is ambiguous.*"kcal_IT".*"kcal_th"'),
    ("5 kg/cm2", "pressure", r'ambiguous.*"kgf/cm2\(g\)"'),
    ("30 scfm", ("volume_flow", "molar_flow"), r'ambiguous.*"Sm3/h"'),
    ("7,2 bar", "pressure", r"The decimal sign is a point"),
    ("1,000 bar", "pressure", r"sets thousands apart is left out"),
    ("1 bar\u202e", "pressure", 'The unit "bar\N{REPLACEMENT CHARACTER}" is not known'),
    ("1.2.3 bar", "pressure", r"The number cannot be read"),
    ("12 345 bar", "pressure", r"The number cannot be read"),
    ("1e3 × 10^2 bar", "pressure", r"two exponents"),
    ("abc", "pressure", r'no number where one is needed.*Found: "abc".*Would do: "7.2 bar\(g\)"'),
    ("", "pressure", r"no number where one is needed"),
    ("nan bar", "pressure", r"no number where one is needed"),
    ("inf bar", "pressure", r"no number where one is needed"),
    ("± 2 bar", "pressure", r"no number where one is needed"),
    ("5 bar ±", "pressure", r"no number where one is needed"),
    ("5 bar ± 1 bar ± 2 bar", "pressure", r"more than one ±"),
    ("5", "pressure", r"The unit is missing"),
    (5, "pressure", r"The unit is missing"),
    (5.0, "temperature", r"The unit is missing"),
    ("5.2 ± 2 %", "mass_flow", r"The unit is missing"),
    ("5 bar ± 0.1", "pressure", r'The uncertainty has no unit.*"5 bar ± 0.1 bar"'),
    ("5 bar ± 0 bar", "pressure", r"An uncertainty is larger than zero"),
    ("5 bar ± -1 bar", "pressure", r"An uncertainty is larger than zero"),
    ("0 bar(g) ± 2 %", "pressure", r"An uncertainty is larger than zero"),
    ("5 bar ± 0.1 K", "pressure", r'After ±: "K" is a unit of a temperature, but a pressure difference is needed'),
    ("5 bar ± 0.1 bra", "pressure", r'After ±: The unit "bra" is not known.*Nearest: "bar"'),
    ("400 degC ± 2 %", "temperature", r"percentage of a temperature depends on the scale.*kelvin"),
    ("673 K ± 2 %", "temperature", r"percentage of a temperature depends on the scale.*kelvin"),
    ("0.85 ± 2 %", "efficiency", r"not clear what the percentage after ± refers to"),
    ("85 ± 2 %", "efficiency", r"not clear what the percentage after ± refers to"),
    ("3.2 ± 1 %", "ratio", r"not clear what the percentage after ± refers to"),
    ("5 bra", "pressure", r'The unit "bra" is not known for a pressure.*Nearest: "bar"'),
    ("5 BAR", "pressure", r'Nearest: "bar"'),
    ("5 kj/kg", "specific_energy", r'Nearest: "kJ/kg"'),
    ("5 bar(g", "pressure", r'The unit "bar\(g" is not known'),
    ("5 kJ/kg", "pressure", r'"kJ/kg" is a unit of a specific energy, but a pressure is needed'),
    ("5 bar", ("volume_flow", "molar_flow"), r"is a unit of a pressure, but a volume flow or a molar flow is needed"),
    ("10 degC", "temperature_difference", r"a point on a temperature scale, but a temperature difference is needed"),
    ("100 Nm3/h", "volume_flow", r"counts an amount of substance, but a volume flow is needed"),
    ("5 bar(g)", "pressure_difference", r'"bar\(g\)" is a unit of a pressure, but a pressure difference is needed'),
    ("-300 degC", "temperature", r"must be above absolute zero"),
    ("-2 bar(g)", "pressure", r"must be above a perfect vacuum"),
    ("0 bar", "pressure", r"must be above a perfect vacuum"),
    ("0 kg/m3", "density", r"must be above zero"),
    ("-1 kg/s", "mass_flow", r"cannot be negative"),
    ("85", "efficiency", r'at most 1.*Did you mean "85 %"'),
    ("120 %", "efficiency", r'"0\.85" or "85 %"\.$'),
    ("1.3", "efficiency", r'"0\.85" or "85 %"\.$'),
    ("1 050 K", "temperature", r'cannot be read.*A space that sets thousands apart is left out: "1050 K"'),
    ("40 bar ± 1 000.5 Pa", "pressure", r'cannot be read.*is left out: "1000.5 Pa"'),
    ("1 05 K", "temperature", r'cannot be read.*Would do: "400 degC"\.$'),
    ("5.2 100 kg/s", "mass_flow", r"cannot be read.*kg/s\"\.$"),
    ("0 %", "efficiency", r"above 0"),
    ("1e999 bar", "pressure", r"The number is too large"),
    ("1e308 bar", "pressure", r"The number is too large"),
    (10**400, "ratio", r"The number is too large"),
    (math.nan, "ratio", r"too large, or none at all"),
    (True, "ratio", r"A quantity is a text with its unit"),
    (None, "pressure", r"A quantity is a text with its unit"),
    (["5 bar"], "pressure", r"A quantity is a text with its unit"),
    ("1" * 201, "ratio", r"too long.*201 characters"),
]


@pytest.mark.parametrize(("text", "dimension", "message"), REFUSED)
def test_refused_forms_say_why(text, dimension, message):
    assert re.search(message, refusal(text, dimension))


def test_a_number_too_long_to_print_is_refused_without_printing_it():
    assert "a whole number of 16610 bits" in refusal(10**5000, "ratio")


def test_gauge_without_surroundings_says_what_is_needed():
    assert "[surroundings]" in refusal("7.2 bar(g)", "pressure", atmosphere=None)


def test_every_mistake_of_a_table_is_told_at_once():
    with pytest.raises(InputError) as caught:
        parse(
            {
                "value": "400 deg",
                "sorce": "TT-301",
                "distribution": "gaussian",
                "evaluation": "C",
                "degrees_of_freedom": 0,
                "coverage_factor": "2",
                "status": "",
            },
            "temperature",
            atmosphere=None,
        )
    messages = [str(fault) for fault in caught.value.faults]
    assert len(messages) == 7
    assert any('Nearest: "source"' in message for message in messages)
    assert any('"normal" or "uniform" or "triangular" or "u-shaped"' in message for message in messages)


@pytest.mark.parametrize(
    ("table", "message"),
    [
        ({"source": "TT-301"}, "The table has no value"),
        ({"value": "400 degC", "distribution": "uniform"}, "no uncertainty for it to describe"),
        ({"value": "400 degC ± 1 K", "distribution": "uniform", "coverage_factor": 2}, "has no coverage factor"),
        ({"value": {"value": "400 degC"}}, "A quantity is a text with its unit"),
        ({"value": "400 degC ± 1 K", 3: "x"}, 'has no "3"'),
    ],
)
def test_refused_tables(table, message):
    assert message in refusal(table, "temperature")


HOSTILE = [
    "1 m**9999999",
    "1 kg*kg*kg*kg*kg",
    "1 __import__('os').system('true')",
    "9" * 199,
    "1e" + "9" * 150,
    "1 bar" + "(g)" * 60,
    "1 " + "(" * 198,
    "±" * 200,
    "1" + "\u2009000" * 49,
    "\x00\x01 bar",
    "1 \ud800",
    "٣ bar",
]


@pytest.mark.parametrize("text", HOSTILE)
@pytest.mark.parametrize("dimension", ["pressure", "mass"])
def test_hostile_texts_are_refused(text, dimension):
    refusal(text, dimension)


@given(st.text(max_size=220), st.sampled_from(sorted(DIMENSIONS)))
@settings(max_examples=300, deadline=None)
def test_any_text_gives_a_quantity_or_an_input_error(text, dimension):
    try:
        quantity = read(text, dimension)
    except InputError:
        return
    assert math.isfinite(quantity.value)


@given(
    st.from_regex(
        r"[-+−]?[0-9]{1,4}(\.[0-9]{0,3})?([eE×± ][-0-9^ ]{0,4})? ?(bar|K|%|kg|degC)?(\(g\)|/h| ± [0-9%]{1,4})?"
    ),
    st.sampled_from(sorted(DIMENSIONS)),
)
@settings(max_examples=300, deadline=None)
def test_near_misses_give_a_quantity_or_an_input_error(text, dimension):
    try:
        quantity = read(text, dimension)
    except InputError:
        return
    assert math.isfinite(quantity.value)
    assert quantity.standard_uncertainty is None or quantity.standard_uncertainty > 0.0


_PROPORTIONAL = [
    (dimension, unit)
    for dimension in DIMENSIONS
    if dimension != "efficiency"
    for unit in units_of(dimension)
    if "(g)" not in unit and unit not in ("psig", "degC", "degF")
]


@given(st.sampled_from(_PROPORTIONAL), st.floats(1e-6, 1e6))
@settings(max_examples=300, deadline=None)
def test_meaning_does_not_depend_on_the_unit_written(pair, value):
    """The same amount written in a unit and in the first unit of its dimension is the same SI value."""
    dimension, spelling = pair
    base = units_of(dimension)[0]
    unit, base_unit = find_unit(spelling, dimension), find_unit(base, dimension)
    assert unit is not None
    assert base_unit is not None
    ratio = conversion(unit.expression, dimension).factor / conversion(base_unit.expression, dimension).factor
    first = read(f"{value!r} {spelling}", dimension)
    second = read(f"{value * ratio!r} {base}", dimension)
    assert first.value == pytest.approx(second.value, rel=1e-14)


@given(st.floats(1e3, 1e8), st.floats(1.0, 1e5), st.sampled_from(["bar", "kPa", "MPa", "mmHg", "atm"]))
@settings(max_examples=100, deadline=None)
def test_a_gauge_pressure_is_the_absolute_one_above_the_atmosphere(gauge, atmosphere, unit):
    text = f"{gauge / read(f'1 {unit}', 'pressure').value!r} {unit}(g)"
    assert read(text, "pressure", atmosphere).value == pytest.approx(gauge + atmosphere, rel=1e-12)


@pytest.mark.parametrize("dimension", sorted(DIMENSIONS))
def test_every_dimension_can_be_read_and_shown(dimension):
    for spelling in usual_units(dimension):
        assert find_unit(spelling, dimension) is not None
    for system in ("SI", "US"):
        assert Display(system).show(1.0, dimension).number


@given(st.sampled_from(sorted(set(DIMENSIONS) - {"efficiency"})), st.floats(0.05, 5e6), st.sampled_from(["SI", "US"]))
@settings(max_examples=300, deadline=None)
def test_what_is_shown_reads_back(dimension, value, units):
    """Display and reading are inverse within the six digits shown, but for psi, which reading wants as psia."""
    if dimension == "temperature":
        value += 300.0  # clear of 0 degC and 0 degF, where six digits of a scale with a zero are fewer in K
    shown = Display(units).show(value, dimension)
    quantity = read(f"{shown.number} {shown.unit}", dimension, None)
    assert quantity.value == pytest.approx(value, rel=5.1e-6)


# --- display --------------------------------------------------------------------------------------------------------

THIN = "\u2009"


@pytest.mark.parametrize(
    ("value", "dimension", "uncertainty", "text"),
    [
        (1.4444444, "mass_flow", 0.0289, "1.444 ± 0.029 kg/s"),
        (101_325.0, "pressure", None, "1.01325 bar"),
        (673.15, "temperature", 1.5, "400.0 ± 1.5 °C"),
        (3_229_123.4, "specific_energy", None, "3229.12 kJ/kg"),
        (6_853.2, "specific_entropy", None, "6.8532 kJ/(kg·K)"),
        (0.85, "efficiency", 0.02, "85.0 ± 2.0 %"),
        (1e-9, "ratio", None, "1 × 10⁻⁹"),
        (-1_234_567.0, "ratio", None, f"−1{THIN}234{THIN}570"),
        (1234.0, "ratio", None, "1234"),
        (12_340.0, "ratio", None, f"12{THIN}340"),
        (123_456_789.0, "ratio", None, "1.23457 × 10⁸"),
        (0.0001, "ratio", None, "0.0001"),
        (0.00009999, "ratio", None, "9.999 × 10⁻⁵"),
        (9_999_999.6, "ratio", None, "1 × 10⁷"),
        (99.96, "ratio", 0.0996, "99.96 ± 0.10"),  # 0.0996 has two significant digits as 0.10
        (99.96, "ratio", 0.996, "100.0 ± 1.0"),
        (-0.00001, "ratio", 0.5, "0.00 ± 0.50"),
        (56_789.0, "ratio", 1234.0, f"56{THIN}800 ± 1200"),
        (0.0, "ratio", None, "0"),
        (-0.0, "ratio", None, "0"),
        (2.5, "ratio", 3e-17, "2.50000000000 ± 3.0 × 10⁻¹⁷"),  # no more than twelve digits of a float
        (1.4, "ratio", 0.0, "1.4"),
        (1.4, "ratio", math.nan, "1.4"),
    ],
)
def test_digits(value, dimension, uncertainty, text):
    assert Display("SI").show(value, dimension, uncertainty).text == text


def test_half_goes_to_even():
    assert Display().show(0.125, "ratio", 0.10).number == "0.12"
    assert Display().show(0.135, "ratio", 0.10).number == "0.14"
    assert Display().show(1.000005, "ratio").number == "1"  # decimal form, not the binary one below or above it
    assert Display().show(1.000015, "ratio").number == "1.00002"


# Steam at 400 degC and 40 bar(a) and a 100 kW machine, converted with the factors of SP_811_LISTED.
@pytest.mark.parametrize(
    ("value", "dimension", "text"),
    [
        (673.15, "temperature", "752 °F"),
        (4e6, "pressure", "580.151 psia"),
        (2.326e6, "specific_energy", "1000 Btu/lb"),
        (4186.8, "specific_entropy", "1 Btu/(lb·°R)"),
        (74_569.98715822702, "power", "100 hp"),
        (2930.710701722222, "heat_flow", f"10{THIN}000 Btu/h"),
        (10.0, "temperature_difference", "18 °R"),
        (0.45359237, "mass_flow", "3600 lb/h"),
        (1.0, "density", "0.062428 lb/ft³"),
    ],
)
def test_us_customary_units(value, dimension, text):
    assert Display("US").show(value, dimension).text == text


@pytest.mark.parametrize("value", [None, math.nan, math.inf, -math.inf])
def test_what_is_not_there_is_a_dash(value):
    shown = Display().show(value, "pressure")
    assert (shown.number, shown.unit, shown.uncertainty) == ("—", "", None)


def test_latex_has_number_and_unit():
    show = Display().show
    assert show(1.44444, "mass_flow").latex == r"1.44444\,\mathrm{kg\,s^{-1}}"
    assert show(-1.23457e-5, "ratio").latex == r"-1.23457\times 10^{-5}"
    assert show(12_345.6, "length").latex == r"12\,345.6\,\mathrm{m}"


def test_a_temperature_in_a_formula_is_absolute():
    assert Display("SI").show(673.15, "temperature").latex == r"673.15\,\mathrm{K}"
    assert Display("US").show(673.15, "temperature").latex == r"1211.67\,\text{°R}"


def test_figure_axes_are_not_rounded():
    numpy = pytest.importorskip("numpy")
    converted = Display().convert(numpy.array([273.15, 673.153333]), "temperature")
    assert converted.tolist() == [0.0, 673.153333 - 273.15]
    assert Display("US").unit_text("entropy_flow") == "Btu/(h·°R)"


@given(st.floats(1e-6, 1e9), st.floats(1e-6, 1e3))
@settings(max_examples=300, deadline=None)
def test_value_and_uncertainty_end_at_the_same_place(value, relative):
    shown = Display().show(value, "ratio", value * relative)
    number, _, power = shown.number.replace(THIN, "").partition(" ")
    spread, _, spread_power = (shown.uncertainty or "").replace(THIN, "").partition(" ")
    assert power == spread_power
    places = {len(text.partition(".")[2]) for text in (number, spread)}
    assert len(places) == 1
    scale = Decimal(10) ** (int(power[4:].translate(str.maketrans("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "-0123456789"))) if power else 0)
    assert abs(Decimal(number) * scale - Decimal(repr(value))) <= Decimal(spread) * scale / 19


# --- the border -----------------------------------------------------------------------------------------------------


def test_only_one_module_imports_pint():
    package = Path(__file__).parents[1] / "reportgen"
    importers = [
        path.relative_to(package).as_posix()
        for path in sorted(package.rglob("*.py"))
        if re.search(r"^\s*(?:import|from) pint\b", path.read_text(encoding="utf-8"), re.MULTILINE)
    ]
    assert importers == ["quantities/units.py"]


def test_importing_does_not_import_pint():
    code = "import sys, reportgen.quantities; sys.exit('pint' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0


def test_our_definitions_of_units_are_those_of_the_full_list_of_pint() -> None:
    full = pint.UnitRegistry()
    compared = 0
    for dimension, table in units._UNITS.items():
        si_unit = units._SI_EXPRESSIONS[DIMENSIONS[dimension]]
        for unit in table:
            found = units.conversion(unit.expression, dimension)
            if unit.expression in ("degC", "degF"):
                step = full.Quantity(1.0, f"delta_{unit.expression}").to("kelvin").magnitude
                zero = full.Quantity(0.0, unit.expression).to("kelvin").magnitude
                assert found.offset == pytest.approx(zero, rel=1e-15)
            else:
                step = full.Quantity(full.parse_expression(unit.expression)).to(si_unit).magnitude
                assert found.offset == 0.0
            assert found.factor == pytest.approx(step, rel=1e-15), unit
            compared += 1
    assert compared > 500

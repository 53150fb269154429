"""Ideal gases against published entropies, an independent implementation, quadrature, and themselves."""

from __future__ import annotations

import itertools
import math
import subprocess
import sys

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from reportgen.errors import InputError, RangeError
from reportgen.fluids.gases.caloric import Nasa9
from reportgen.fluids.gases.catalogue import describe, names, real_counterpart
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT, ideal_gas
from reportgen.fluids.gases.species import library
from reportgen.fluids.model import Fluid
from reportgen.fluids.state import FIELDS

BAR = 1e5
ALL_SPECIES = sorted(library().species)


def molar(gas, value):
    return value * gas.molar_mass


# Standard entropies at 298.15 K and 1 bar, J/(mol·K): Chase, NIST-JANAF Thermochemical Tables, 4th edition, 1998.
JANAF_ENTROPIES_LISTED = {
    "N2": 191.609,
    "O2": 205.147,
    "Ar": 154.845,
    "CO2": 213.795,
    "H2O": 188.834,
    "CO": 197.653,
    "H2": 130.680,
    "He": 126.152,
    "CH4": 186.251,
    "NH3": 192.774,
    "Cl2": 223.079,
    "SO2": 248.212,
    "HCl": 186.901,
}


@pytest.mark.parametrize(("formula", "listed"), JANAF_ENTROPIES_LISTED.items())
def test_standard_entropies_are_those_of_the_janaf_tables(formula, listed):
    gas = ideal_gas(formula)
    entropy = molar(gas, gas.at(pressure=BAR, temperature=298.15).specific_entropy)
    assert entropy == pytest.approx(listed, abs=0.15 if formula == "CH4" else 0.02)


# The same tables at 1000 K: c_p and S° in J/(mol·K), H − H(298.15 K) in kJ/mol. From memory.
JANAF_1000_K_LISTED = {
    "N2": (32.697, 228.170, 21.463),
    "O2": (34.870, 243.578, 22.703),
    "CO2": (54.308, 269.299, 33.397),
    "H2O": (41.268, 232.738, 26.000),
    "CO": (33.183, 234.538, 21.690),
}


@pytest.mark.parametrize(("formula", "listed"), JANAF_1000_K_LISTED.items())
def test_values_at_1000_kelvin_are_those_of_the_janaf_tables(formula, listed):
    gas = ideal_gas(formula)
    state = gas.at(pressure=BAR, temperature=[298.15, 1000.0])
    heat_capacity, entropy, heat = listed
    assert molar(gas, state.isobaric_heat_capacity[1]) == pytest.approx(heat_capacity, rel=1.5e-3)
    assert molar(gas, state.specific_entropy[1]) == pytest.approx(entropy, abs=0.03)
    assert molar(gas, np.ptp(state.specific_enthalpy)) == pytest.approx(heat * 1e3, rel=1.5e-3)


# --- an independent implementation ------------------------------------------------------------------------------------

cantera = pytest.importorskip("cantera")
GRID = np.concatenate([np.linspace(200.0, 1000.0, 41), np.linspace(1010.0, 6000.0, 60)])


def cantera_gas(species, fractions):
    gas = cantera.Solution(thermo="ideal-gas", species=species)
    gas.X = fractions
    return gas


def compare_with_cantera(gas, reference, reference_pressure, pressures=(0.2e5, 1e5, 40e5)):
    """Largest differences on the grid, of c_p in parts of it, of h in parts of c_p T, of s in parts of R.

    ``reference_pressure`` [Pa] is what the independent implementation takes for the 1 bar of the polynomials; its
    entropies are brought to 1 bar by R ln of the ratio.
    """
    worst = np.zeros(3)
    for pressure in pressures:
        state = gas.at(pressure=pressure, temperature=GRID)
        expected = np.empty((3, GRID.size))
        for number, temperature in enumerate(GRID):
            reference.TP = temperature, pressure
            expected[:, number] = reference.cp_mole / 1e3, reference.enthalpy_mole / 1e3, reference.entropy_mole / 1e3
        expected[2] -= MOLAR_GAS_CONSTANT * math.log(reference_pressure / BAR)
        heat_capacity = molar(gas, state.isobaric_heat_capacity)
        differences = (
            np.abs(heat_capacity / expected[0] - 1.0),
            np.abs(molar(gas, state.specific_enthalpy) - expected[1]) / (expected[0] * GRID),
            np.abs(molar(gas, state.specific_entropy) - expected[2]) / MOLAR_GAS_CONSTANT,
        )
        worst = np.maximum(worst, [np.max(difference) for difference in differences])
    return worst


AIR_FILE_SPECIES = {"N2": "N2", "O2": "O2", "NO": "NO", "N": "N", "O": "O"}


@pytest.mark.parametrize("formula", AIR_FILE_SPECIES)
def test_nine_coefficient_data_of_cantera_give_the_same(formula):
    """Its airNASA9 file: coefficients and code are independent of ours."""
    species = [item for item in cantera.Species.list_from_file("airNASA9.yaml") if item.name == formula]
    reference = cantera_gas(species, {formula: 1.0})
    assert np.all(compare_with_cantera(ideal_gas(formula), reference, species[0].thermo.reference_pressure) < 1e-6)


def test_a_mixture_is_the_same_in_cantera():
    """Entropy of mixing included."""
    species = [item for item in cantera.Species.list_from_file("airNASA9.yaml") if item.name in ("N2", "O2", "NO")]
    fractions = {"N2": 0.7, "O2": 0.25, "NO": 0.05}
    reference = cantera_gas(species, fractions)
    assert np.all(compare_with_cantera(ideal_gas(fractions), reference, species[0].thermo.reference_pressure) < 1e-6)


@pytest.mark.parametrize("key", ALL_SPECIES)
def test_every_species_is_evaluated_as_cantera_would(key):
    """Our coefficients in its code, at our standard pressure."""
    carried = library()
    entry = carried.species[key]
    zones = itertools.chain.from_iterable(
        (low, high, *coefficients)
        for low, high, coefficients in zip(
            carried.temperature_breaks[:-1], carried.temperature_breaks[1:], entry.coefficients, strict=True
        )
    )
    species = cantera.Species("gas", {"Ar": 1})
    species.thermo = cantera.Nasa9PolyMultiTempRegion(
        carried.temperature_breaks[0],
        carried.temperature_breaks[-1],
        carried.standard_pressure,
        [float(len(entry.coefficients)), *zones],
    )
    reference = cantera_gas([species], {"gas": 1.0})
    assert np.all(compare_with_cantera(ideal_gas(key), reference, BAR, pressures=(3e5,)) < 1e-6)


# Spellings of nasa_gas.yaml: seven-coefficient polynomials of 1993, an older evaluation of the same gases.
OLDER_EVALUATION = {
    "N2": "N2",
    "O2": "O2",
    "H2": "H2",
    "CO": "CO",
    "CO2": "CO2",
    "H2O": "H2O",
    "NH3": "NH3",
    "SO2": "SO2",
    "H2S": "H2S",
    "HCl": "HCL",
    "Cl2": "CL2",
    "N2O": "N2O",
    "C2H4": "C2H4",
    "C3H8": "C3H8",
    "C6H6": "C6H6",
    "CCl4": "CCL4",
    "SF6": "SF6",
    "CHClF2": "CHCLF2",
    "CCl2F2": "CCL2F2",
    "n-butane": "C4H10,n-butane",
    "isobutane": "C4H10,isobutane",
    "cis-2-butene": "C4H8,cis2-buten",
    "trans-2-butene": "C4H8,tr2-butene",
    "neopentane": "CH3C(CH3)2CH3",
    "ethanol": "C2H5OH",
    "dimethyl ether": "CH3OCH3",
    "isooctane": "C8H18,isooctane",
}


@pytest.mark.parametrize(("key", "spelling"), OLDER_EVALUATION.items())
def test_the_older_evaluation_is_close(key, spelling):
    """The right species stands under each name: 1.5 % in c_p, 1.5 J/(mol·K) in s (isomers differ by 4 to 50)."""
    species = [item for item in cantera.Species.list_from_file("nasa_gas.yaml") if item.name == spelling]
    reference = cantera_gas(species, {spelling: 1.0})
    gas = ideal_gas(key)
    for temperature in (298.15, 500.0, 1000.0):
        reference.TP = temperature, 101325.0
        state = gas.at(pressure=BAR, temperature=temperature)  # the file names 1 atm, its data are for 1 bar
        assert molar(gas, state.isobaric_heat_capacity) == pytest.approx(reference.cp_mole / 1e3, rel=0.015)
        assert molar(gas, state.specific_entropy) == pytest.approx(reference.entropy_mole / 1e3, abs=1.5)


# --- the model against itself -----------------------------------------------------------------------------------------


@pytest.mark.parametrize("key", ["N2", "H2O", "CH4", "SF6", "n-octane", "O3", "C8H8"])
def test_entropy_and_enthalpy_are_integrals_of_the_heat_capacity(key):
    gas = ideal_gas(key)

    def heat_capacity(temperature):
        return float(gas.at(pressure=BAR, temperature=temperature).isobaric_heat_capacity)

    for low, high in ((250.0, 900.0), (800.0, 1600.0), (1600.0, 5000.0)):
        ends = gas.at(pressure=BAR, temperature=[low, high])
        entropy, _ = quad(lambda t: heat_capacity(t) / t, low, high, points=[1000.0], epsrel=1e-11)
        enthalpy, _ = quad(heat_capacity, low, high, points=[1000.0], epsrel=1e-11)
        assert np.diff(ends.specific_entropy)[0] == pytest.approx(entropy, rel=1e-9)
        assert np.diff(ends.specific_enthalpy)[0] == pytest.approx(enthalpy, rel=1e-9)


PAIRS = [
    ("pressure", "temperature"),
    ("pressure", "specific_enthalpy"),
    ("pressure", "specific_entropy"),
    ("pressure", "density"),
    ("pressure", "specific_volume"),
    ("pressure", "specific_internal_energy"),
    ("temperature", "specific_entropy"),
    ("temperature", "density"),
    ("temperature", "specific_volume"),
    ("specific_enthalpy", "specific_entropy"),
    ("specific_enthalpy", "density"),
    ("specific_entropy", "density"),
    ("specific_internal_energy", "density"),
    ("specific_internal_energy", "specific_volume"),
    ("specific_internal_energy", "specific_entropy"),
]
MODELS = [
    *((key, "variable") for key in ALL_SPECIES),
    ("air", "variable"),
    ("air", 1005.0),
    ({"CH4": 0.9, "C2H6": 0.07, "N2": 0.03}, "variable"),
]


@pytest.mark.parametrize(("asked", "heat_capacity"), MODELS, ids=str)
def test_every_pair_leads_back_to_the_same_state(asked, heat_capacity):
    gas = ideal_gas(asked, heat_capacity=heat_capacity)
    limits = np.array([200.0, 999.9999999, 1000.0, 1000.0000001, 6000.0])
    temperature = np.concatenate([limits, [298.15], np.geomspace(200.0, 6000.0, 200)])
    pressure = np.geomspace(1e2, 1e9, temperature.size)
    state = gas.at(pressure=pressure, temperature=temperature)
    for first, second in PAIRS:
        pair = {first: getattr(state, first), second: getattr(state, second)}
        # A last bit of an entropy moves a pressure by s/R last bits: 1e-10 leaves room for the largest, 2e-13.
        other = gas.at(**pair)
        np.testing.assert_allclose(other.temperature, temperature, rtol=1e-10)
        np.testing.assert_allclose(other.pressure, pressure, rtol=1e-10)


@pytest.mark.parametrize("key", ALL_SPECIES)
def test_no_step_where_the_intervals_meet(key):
    """h, s continuous to rounding; c_p as continuous as the printed coefficients make it (1e-6 of R)."""
    gas = ideal_gas(key)
    below, above = 1000.0, np.nextafter(1000.0, 2000.0)
    state = gas.at(pressure=BAR, temperature=[below, above])
    assert abs(np.diff(state.specific_enthalpy)[0]) < 1e-9 * gas.gas_constant * 1000.0
    assert abs(np.diff(state.specific_entropy)[0]) < 1e-9 * gas.gas_constant
    assert abs(np.diff(state.isobaric_heat_capacity)[0]) < 1e-6 * gas.gas_constant


def test_closing_the_steps_moves_no_value_that_matters():
    """The printed integration constants of the upper interval differ from ours by less than 3e-5 K times c_p."""
    carried = library()
    for key in ALL_SPECIES:
        entry = carried.species[key]
        whole = Nasa9(carried.temperature_breaks, entry.coefficients, 1.0)
        upper = Nasa9(carried.temperature_breaks[1:], entry.coefficients[1:], 1.0)
        temperature = np.array([1000.5, 3000.0, 6000.0])
        assert np.all(np.abs(whole.enthalpy(temperature) - upper.enthalpy(temperature)) < 3e-5 * 30.0)
        assert np.all(np.abs(whole.entropy(temperature) - upper.entropy(temperature)) < 3e-6)


def test_entropy_of_mixing():
    """Σ x_i s_i(T, p) of the unmixed gases is less than that of the mixture by −R Σ x ln x."""
    fractions = {"N2": 0.5, "O2": 0.3, "CO2": 0.2}
    mixture = ideal_gas(fractions)
    temperature = np.array([250.0, 700.0, 2500.0])
    mixed = molar(mixture, mixture.at(pressure=3e5, temperature=temperature).specific_entropy)
    apart = np.zeros(3)
    enthalpy = np.zeros(3)
    for key, fraction in fractions.items():
        gas = ideal_gas(key)
        state = gas.at(pressure=3e5, temperature=temperature)
        apart += fraction * molar(gas, state.specific_entropy)
        enthalpy += fraction * molar(gas, state.specific_enthalpy)
    mixing = -MOLAR_GAS_CONSTANT * sum(x * math.log(x) for x in fractions.values())
    np.testing.assert_allclose(mixed - apart, mixing, rtol=1e-9)
    np.testing.assert_allclose(
        molar(mixture, mixture.at(pressure=3e5, temperature=temperature).specific_enthalpy),
        enthalpy,
        rtol=1e-9,
        atol=1e-3,
    )


def test_mass_basis():
    """1 kg of nitrogen and 1 kg of hydrogen: the amounts are in inverse proportion to the molar masses."""
    by_mass = ideal_gas({"N2": 0.5, "H2": 0.5}, basis="mass")
    molar_masses = {key: library().species[key].molar_mass for key in ("N2", "H2")}
    composition = by_mass.composition
    assert composition is not None
    assert composition["H2"] / composition["N2"] == pytest.approx(molar_masses["N2"] / molar_masses["H2"])
    assert sum(composition.values()) == pytest.approx(1.0, abs=1e-15)
    assert by_mass.molar_mass == pytest.approx(2.0 / (1.0 / molar_masses["N2"] + 1.0 / molar_masses["H2"]))
    heat_capacities = [
        ideal_gas(key).at(pressure=BAR, temperature=400.0).isobaric_heat_capacity for key in ("N2", "H2")
    ]
    mixed = by_mass.at(pressure=BAR, temperature=400.0).isobaric_heat_capacity
    assert mixed == pytest.approx(np.mean(heat_capacities), rel=1e-12)


def test_constant_heat_capacity_has_its_closed_forms():
    gas, variable = ideal_gas("air", heat_capacity=1005.0), ideal_gas("air")
    reference = variable.at(pressure=BAR, temperature=298.15)
    start = gas.at(pressure=BAR, temperature=298.15)
    assert start.specific_enthalpy == pytest.approx(reference.specific_enthalpy, rel=1e-12)
    assert start.specific_entropy == pytest.approx(reference.specific_entropy, rel=1e-12)
    end = gas.at(pressure=8 * BAR, temperature=600.0)
    assert end.specific_enthalpy - start.specific_enthalpy == pytest.approx(1005.0 * (600.0 - 298.15))
    rise = 1005.0 * math.log(600.0 / 298.15) - gas.gas_constant * math.log(8.0)
    assert end.specific_entropy - start.specific_entropy == pytest.approx(rise)
    isentropic = gas.at(pressure=8 * BAR, specific_entropy=start.specific_entropy)
    assert isentropic.temperature == pytest.approx(298.15 * 8.0 ** (gas.gas_constant / 1005.0), rel=1e-12)
    assert "298.15 K, 1 bar" in gas.entropy_zero
    assert gas.constant_heat_capacity == 1005.0
    assert variable.constant_heat_capacity is None


def test_fields_hang_together():
    gas = ideal_gas("air")
    state = gas.at(pressure=[[1e5, 5e5]], temperature=[[300.0], [900.0], [2000.0]])
    assert all(getattr(state, name).shape == (3, 2) for name in FIELDS)
    np.testing.assert_allclose(state.density * state.specific_volume, 1.0)
    np.testing.assert_allclose(state.pressure, state.density * gas.gas_constant * state.temperature)
    np.testing.assert_allclose(
        state.specific_internal_energy, state.specific_enthalpy - state.pressure * state.specific_volume
    )
    np.testing.assert_allclose(state.isobaric_heat_capacity - state.isochoric_heat_capacity, gas.gas_constant)
    ratio = state.isobaric_heat_capacity / state.isochoric_heat_capacity
    np.testing.assert_allclose(state.speed_of_sound**2, ratio * gas.gas_constant * state.temperature)
    assert np.all(state.compressibility_factor == 1.0)
    assert np.all(state.phase == "gas")
    assert np.all(np.isnan([state.quality, state.superheat, state.subcooling]))


@given(st.floats(210.0, 5900.0), st.floats(1e3, 1e8), st.sampled_from(ALL_SPECIES))
@settings(max_examples=60, deadline=None)
def test_gibbs_equation(temperature, pressure, key):
    """T ds = dh − v dp along any small change, by central differences."""
    gas = ideal_gas(key)
    step = 1e-4
    ends = gas.at(
        pressure=np.array([1 - step, 1 + 2 * step]) * pressure, temperature=np.array([1 - step, 1 + step]) * temperature
    )
    # d(h/T) keeps the differences of large enthalpies of formation out: both sides over T, dp/p as dln p.
    heat = np.diff(ends.specific_enthalpy)[0] / temperature
    work = gas.gas_constant * np.diff(np.log(ends.pressure))[0]
    assert np.diff(ends.specific_entropy)[0] == pytest.approx(heat - work, abs=3e-6 * gas.gas_constant)


# --- range, shapes, refusals ------------------------------------------------------------------------------------------


def test_shapes_and_nan():
    gas = ideal_gas("N2")
    assert np.shape(gas.at(pressure=1e5, temperature=300.0).density) == ()
    assert gas.at(pressure=1e5, temperature=[300.0]).density.shape == (1,)
    assert gas.at(pressure=np.empty(0), temperature=300.0).density.shape == (0,)
    assert gas.at(pressure=np.empty(0), specific_entropy=np.empty(0)).specific_enthalpy.shape == (0,)
    for first, second in PAIRS:
        good = gas.at(pressure=1e5, temperature=300.0)
        pair = {first: [getattr(good, first), math.nan], second: getattr(good, second)}
        state = gas.at(**pair)
        assert not state.faults
        for name in ("temperature", "pressure", "specific_enthalpy", "specific_entropy", "density", "speed_of_sound"):
            assert np.isfinite(getattr(state, name)[0]), (first, second, name)
            assert np.isnan(getattr(state, name)[1]), (first, second, name)
        assert state.phase.tolist() == ["gas", ""]


def test_masked_elements_carry_their_fault():
    gas = ideal_gas("N2")
    state = gas.at(
        pressure=[1e5, 1e5, -1.0, 1e5, math.nan, -1.0],
        temperature=[300.0, 100.0, 300.0, 7000.0, 300.0, math.nan],
        errors="mask",
    )
    assert sorted(state.faults) == [1, 2, 3]
    assert "below the minimum 200 K" in str(state.faults[1])
    assert "Pressure -1 Pa" in str(state.faults[2])
    assert "above the maximum 6000 K" in str(state.faults[3])
    assert np.isfinite(state.specific_entropy).tolist() == [True, False, False, False, False, False]


@pytest.mark.parametrize(
    ("pair", "message"),
    [
        ({"pressure": 1e5, "temperature": 6001.0}, "above the maximum 6000 K"),
        ({"pressure": 1e5, "temperature": math.inf}, "above the maximum"),
        ({"pressure": 0.0, "temperature": 300.0}, "Pressure 0 Pa"),
        ({"pressure": math.inf, "temperature": 300.0}, "Pressure inf bar"),
        ({"pressure": 1e5, "specific_enthalpy": 1e9}, "Specific enthalpy 1000000 kJ/kg"),
        ({"pressure": 1e5, "specific_internal_energy": 1e9}, "Specific internal energy 1000000 kJ/kg"),
        ({"density": 1.0, "specific_internal_energy": -1e9}, "Specific internal energy -1000000 kJ/kg"),
        ({"pressure": 1e5, "specific_entropy": -1e9}, "Specific entropy -1000000 kJ/(kg*K)"),
        ({"temperature": 300.0, "specific_entropy": -1e9}, "Pressure inf bar"),
        ({"temperature": 300.0, "specific_entropy": 1e9}, "Pressure 0 Pa"),
        ({"temperature": 300.0, "density": -1.0}, "Density -1 kg/m3"),
        ({"temperature": 300.0, "specific_volume": 0.0}, "Density inf kg/m3"),
    ],
)
@pytest.mark.parametrize("heat_capacity", ["variable", 1040.0])
def test_out_of_range(pair, message, heat_capacity):
    with pytest.raises(RangeError) as caught:
        ideal_gas("N2", heat_capacity=heat_capacity).at(**pair)
    assert message in str(caught.value)
    assert "Nitrogen" in str(caught.value)


@pytest.mark.parametrize(
    ("heat_capacity", "temperature", "message"),
    [
        ("variable", 199.9, "Temperature 199.9 K (-73.25 degC) is below the minimum 200 K"),
        (1040.0, 19.9, "Temperature 19.9 K (-253.25 degC) is below the minimum 20 K"),
    ],
)
def test_too_cold(heat_capacity, temperature, message):
    """A heat capacity that the author states holds below the range of the polynomials, which it takes the place of."""
    gas = ideal_gas("N2", heat_capacity=heat_capacity)
    for pair in ({"temperature": temperature}, {"density": 1e5 / (gas.gas_constant * temperature)}):
        with pytest.raises(RangeError, match="below the minimum") as caught:
            gas.at(pressure=1e5, **pair)
    assert gas.limits.minimum_temperature == pytest.approx(temperature + 0.1)
    with pytest.raises(RangeError) as caught:
        gas.at(pressure=1e5, temperature=temperature)
    assert message in str(caught.value)


@pytest.mark.parametrize(
    ("pair", "message"),
    [
        ({"temperature": 300.0, "specific_enthalpy": 0.0}, "enthalpy of an ideal gas depends on temperature alone"),
        ({"temperature": 300.0, "specific_internal_energy": 0.0}, "internal energy of an ideal gas depends on"),
        ({"specific_enthalpy": 0.0, "specific_internal_energy": 0.0}, "not independent"),
        ({"pressure": 1e5, "quality": 0.5}, "no saturation, so quality"),
        ({"pressure": 1e5, "superheat": 5.0}, "no saturation, so superheat"),
        ({"temperature": 300.0, "subcooling": 5.0}, "no saturation, so subcooling"),
        ({"pressure": 1e5}, "exactly two"),
        ({"pressure": 1e5, "temperature": 300.0, "density": 1.0}, "exactly two"),
        ({"pressure": [1e5, 2e5], "temperature": [300.0, 310.0, 320.0]}, "shapes"),
        ({"pressure": 1e5, "temprature": 300.0}, "Did you mean temperature?"),
    ],
)
def test_refused_pairs(pair, message):
    with pytest.raises(InputError) as caught:
        ideal_gas("N2").at(**pair)
    assert message in str(caught.value)


# --- names and compositions -------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "substance"),
    [
        ("N2", "nitrogen"),
        ("nitrogen", "nitrogen"),
        ("Nitrogen", "nitrogen"),
        ("carbon-dioxide", "carbon dioxide"),
        ("CarbonDioxide", "carbon dioxide"),
        ("Air", "air"),
        ("dry air", "air"),
        ("butane", "n-butane"),
        ("HCL", "hydrogen chloride"),
        ("R22", "chlorodifluoromethane"),
        ("CH4O", "methanol"),
    ],
)
def test_names(name, substance):
    assert ideal_gas(name).substance == substance


def test_every_name_leads_to_its_own_species():
    carried = library()
    assert len(carried.species) >= 60
    for key, entry in carried.species.items():
        for name in (key, entry.name, *entry.aliases):
            assert ideal_gas(name).substance == entry.name, name
    assert set(names()) == {entry.name for entry in carried.species.values()} | {"air"}
    # Molar mass against the atoms, with the standard atomic weights of 2001 or so that the source used: 0.02 %.
    weights = {"H": 1.008, "C": 12.011, "N": 14.007, "O": 15.999, "F": 18.998, "S": 32.06, "Cl": 35.45, "Si": 28.085}
    for entry in carried.species.values():
        if set(entry.atoms) <= set(weights):
            mass = sum(weights[atom] * count for atom, count in entry.atoms.items()) * 1e-3
            assert entry.molar_mass == pytest.approx(mass, rel=2e-4), entry.name


@pytest.mark.parametrize(
    ("asked", "message"),
    [
        ("nitrogn", "Nearest: nitrogen."),
        ("unobtainium", "not carried as an ideal gas"),
        ("C4H10", "n-butane or isobutane"),
        ("", "short text"),
        ("x" * 1000, "short text"),
        ({"N2": 0.7, "O2": 0.2}, "a sum of 0.9"),
        ({"N2": 0.78, "O2": 0.2200011}, "a sum of 1.0000011"),
        ({}, "no species"),
        ({"N2": 0.5, "nitrogen": 0.5}, "one species twice"),
        ({"N2": -0.1, "O2": 1.1}, "between 0 and 1"),
        ({"N2": math.nan, "O2": 1.0}, "between 0 and 1"),
        ({"N2": "0.5", "O2": 0.5}, "between 0 and 1"),
        ({"N2": True}, "between 0 and 1"),
        ({"air": 0.9, "H2O": 0.1}, "itself a mixture"),
    ],
)
def test_refused_substances(asked, message):
    with pytest.raises(InputError) as caught:
        ideal_gas(asked)
    assert message in str(caught.value)


def test_all_faults_of_a_composition_are_told_at_once():
    with pytest.raises(InputError) as caught:
        ideal_gas({"nitrogn": 0.5, "N2": -1.0, "unobtainium": 0.2})
    assert len(caught.value.faults) == 3


def test_fractions_that_miss_one_by_rounding_are_scaled():
    composition = ideal_gas({"N2": 1 / 3 + 4e-7, "O2": 1 / 3, "Ar": 1 / 3, "He": 0.0}).composition
    assert composition is not None
    assert sorted(composition) == ["Ar", "N2", "O2"]
    assert sum(composition.values()) == pytest.approx(1.0, abs=1e-15)


@pytest.mark.parametrize("heat_capacity", [200.0, 0.0, -1.0, math.inf, math.nan, True, "constant"])
def test_refused_heat_capacities(heat_capacity):
    with pytest.raises(InputError):
        ideal_gas("N2", heat_capacity=heat_capacity)


def test_the_basis_is_mole_or_mass():
    with pytest.raises(InputError, match="mole or mass"):
        ideal_gas({"N2": 1.0}, basis="volume")


def test_a_composition_of_one_species_is_that_species():
    gas = ideal_gas({"nitrogen": 1.0})
    assert (gas.substance, gas.composition, gas.title) == ("nitrogen", None, "Nitrogen")


def test_air_is_dry_air_with_its_source():
    gas = ideal_gas("air")
    assert gas.composition == {"N2": 0.78084, "O2": 0.209476, "Ar": 0.009365, "CO2": 0.000319}
    assert any("Gordon" in source for source in gas.sources)
    assert gas.molar_mass == pytest.approx(28.9651159e-3, rel=1e-8)  # the species "Air" of the NASA data base


def test_what_a_model_says_of_itself():
    gas = ideal_gas("NH3")
    assert isinstance(gas, Fluid)
    assert gas.kind == "ideal-gas"
    assert (gas.limits.minimum_temperature, gas.limits.maximum_temperature) == (200.0, 6000.0)
    assert gas.limits.maximum_pressure == math.inf
    assert "third law" in gas.entropy_zero.lower()
    assert "1 bar" in gas.entropy_zero
    assert any("NASA/TP-2002-211556" in source for source in gas.sources)
    (data_file,) = gas.data_files
    assert data_file["file"] == "ideal_gases.json"
    assert len(data_file["sha256"]) == 64
    text = describe("ammonia")
    assert "NH3" in text
    assert "17.0305 g/mol" in text


def test_real_counterparts():
    carried = {"air", "nitrogen", "water", "carbon-dioxide"}
    assert real_counterpart(ideal_gas("CO2"), carried) == "carbon-dioxide"
    assert real_counterpart(ideal_gas("N2"), carried) == "nitrogen"
    assert real_counterpart(ideal_gas("steam"), carried) == "water"
    assert real_counterpart(ideal_gas("SF6"), carried) is None
    assert real_counterpart(ideal_gas("air"), carried) == "air"
    assert real_counterpart(ideal_gas("air"), {"water"}) is None
    assert real_counterpart(ideal_gas({"N2": 0.79, "O2": 0.21}), carried) == "air"
    assert real_counterpart(ideal_gas({"N2": 0.765, "O2": 0.210, "Ar": 0.025}), carried) is None
    assert real_counterpart(ideal_gas({"N2": 0.77, "O2": 0.20, "H2O": 0.03}), carried) is None


def test_no_heavy_import():
    code = (
        "import sys; from reportgen.fluids.gases.gas import ideal_gas;"
        "ideal_gas('air').at(pressure=1e5, temperature=300);"
        "sys.exit(any(name in sys.modules for name in ('scipy', 'pint', 'matplotlib')))"
    )
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0

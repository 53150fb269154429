"""Zeros of enthalpy and entropy: the conventions hold where they say, and the third law meets published values."""

from __future__ import annotations

import numpy as np
import pytest

from reportgen.errors import InputError
from reportgen.fluids import ideal_gas, names, real_fluid
from reportgen.fluids.model import Fluid
from reportgen.fluids.real import catalogue
from reportgen.fluids.real.third_law import gas_species

BAR = 1e5
ZEROS = ("published", "IIR", "ASHRAE", "NBP", "third-law")


def molar(fluid, **pair):
    """Entropy [J/(mol K)] and enthalpy [kJ/mol] of a state."""
    state = fluid.at(**pair)
    return state.specific_entropy * fluid.molar_mass, state.specific_enthalpy * fluid.molar_mass / 1e3


@pytest.mark.parametrize("name", ["propane", "ammonia", "n-butane"])
def test_conventions_hold_where_they_say(name):
    liquid, _ = real_fluid(name, "IIR").saturation(temperature=273.15)
    assert liquid.specific_enthalpy == pytest.approx(200e3, rel=1e-9)
    assert liquid.specific_entropy == pytest.approx(1e3, rel=1e-9)
    for zero, given in (("ASHRAE", {"temperature": 233.15}), ("NBP", {"pressure": 101325.0})):
        liquid, _ = real_fluid(name, zero).saturation(**given)
        assert liquid.specific_enthalpy == pytest.approx(0.0, abs=1e-6)
        assert liquid.specific_entropy == pytest.approx(0.0, abs=1e-8)


@pytest.mark.parametrize("name", ["propane", "ammonia"])
def test_a_zero_moves_values_by_constants_only(name):
    pair = {"pressure": np.array([2e5, 5e5, 40e5]), "temperature": np.array([250.0, 350.0, 300.0])}
    states = [real_fluid(name, zero).at(**pair) for zero in ZEROS]
    first = states[0]
    for state in states[1:]:
        for field in ("specific_enthalpy", "specific_entropy"):
            shift = getattr(state, field) - getattr(first, field)
            np.testing.assert_allclose(shift, shift[0], rtol=1e-9, atol=1e-8)
        for field in ("density", "isobaric_heat_capacity", "speed_of_sound"):
            np.testing.assert_allclose(getattr(state, field), getattr(first, field), rtol=1e-10)


def test_each_zero_has_a_key_to_compare_by():
    keys = {zero: real_fluid("propane", zero).entropy_zero_name for zero in ZEROS}
    assert keys == {
        "published": "published:propane",
        "IIR": "IIR",
        "ASHRAE": "ASHRAE",
        "NBP": "NBP",
        "third-law": "third-law",
    }
    assert ideal_gas("propane").entropy_zero_name == "third-law"
    assert isinstance(real_fluid("propane"), Fluid)


def test_third_law_names_the_data_it_takes():
    fluid = real_fluid("methane", "third-law")
    assert "perfect crystal" in fluid.entropy_zero
    assert "formation" in fluid.entropy_zero
    assert any("NASA/TP-2002-211556" in source for source in fluid.sources)
    assert {entry["file"] for entry in fluid.data_files} == {"methane.json", "ideal_gases.json"}


@pytest.mark.parametrize("zero", ["third law", "iir", "", "absolute"])
def test_unknown_zeros_are_refused_with_those_there_are(zero):
    with pytest.raises(InputError, match="third-law"):
        real_fluid("water", zero)


def test_a_fluid_without_liquid_where_the_convention_stands_is_refused():
    with pytest.raises(InputError, match="no saturated liquid"):
        real_fluid("water", "ASHRAE")


# --- the third law ------------------------------------------------------------------------------------------------

# Standard entropies [J/(mol K)] at 298.15 K, 1 bar, and enthalpies of formation [kJ/mol], each with its uncertainty:
# Cox, Wagman, Medvedev, CODATA Key Values for Thermodynamics, Hemisphere, 1989 (from memory).
CODATA_GASES_LISTED = {
    "carbon dioxide": (213.785, 0.010, -393.51, 0.13),
    "nitrogen": (191.609, 0.004, 0.0, 0.0),
    "oxygen": (205.152, 0.005, 0.0, 0.0),
    "argon": (154.846, 0.003, 0.0, 0.0),
    "hydrogen": (130.680, 0.003, 0.0, 0.0),
    "carbon monoxide": (197.660, 0.004, -110.53, 0.17),
    "ammonia": (192.77, 0.05, -45.94, 0.35),
    "sulfur dioxide": (248.223, 0.05, -296.81, 0.20),
    "hydrogen sulfide": (205.81, 0.05, -20.6, 0.5),
}


@pytest.mark.parametrize(("name", "listed"), CODATA_GASES_LISTED.items())
def test_third_law_gases_meet_the_key_values_of_codata(name, listed):
    """As ideal gases: at 298.15 K and a density so low that the gas is ideal, brought to 1 bar by R ln of the ratio."""
    entropy, uncertainty, formation, wide = listed
    fluid = real_fluid(name, "third-law")
    thin = 1.0
    pair = {"temperature": 298.15, "density": thin / (fluid.gas_constant * 298.15)}
    s, h = molar(fluid, **pair)
    s -= fluid.gas_constant * fluid.molar_mass * np.log(BAR / thin)
    assert s == pytest.approx(entropy, abs=uncertainty + 0.002)
    assert h == pytest.approx(formation, abs=wide + 0.005)


# Liquids at 298.15 K and 1 bar. Water: CODATA Key Values (from memory), 69.95 ± 0.03 J/(mol K) and
# −285.830 ± 0.040 kJ/mol. The others from memory of standard tables, no source at hand; their gases in the polynomials
# are uncertain by about 0.3 J/(mol K) and 1 kJ/mol.
LIQUIDS_LISTED = {
    "water": (69.95, 0.05, -285.830, 0.04),
    "benzene": (173.3, 1.0, 49.0, 1.0),
    "toluene": (221.0, 1.5, 12.2, 1.5),
    "methanol": (126.8, 1.5, -238.9, 1.5),
    "n-heptane": (328.6, 1.5, -224.2, 1.5),
}


@pytest.mark.parametrize(("name", "listed"), LIQUIDS_LISTED.items())
def test_third_law_liquids_meet_published_values(name, listed):
    entropy, uncertainty, formation, wide = listed
    s, h = molar(real_fluid(name, "third-law"), temperature=298.15, pressure=BAR)
    assert s == pytest.approx(entropy, abs=uncertainty)
    assert h == pytest.approx(formation, abs=wide)


def test_real_and_ideal_steam_share_the_zero():
    """Vaporous water at 400 K and 1 kPa: third-law real fluid against the ideal gas."""
    real, ideal = real_fluid("water", "third-law"), ideal_gas("steam")
    assert real.entropy_zero_name == ideal.entropy_zero_name
    pair = {"temperature": 400.0, "pressure": 1e3}
    s, h = molar(real, **pair)
    expected_s, expected_h = molar(ideal, **pair)
    assert s == pytest.approx(expected_s, abs=0.01)
    assert h == pytest.approx(expected_h, abs=0.01)


def test_air_takes_the_entropy_of_its_composition():
    """Pseudo-pure air: 78.12 % N2, 20.96 % O2, 0.92 % Ar, with the entropy of mixing."""
    air = real_fluid("air", "third-law")
    s, h = molar(air, temperature=298.15, density=1.0 / (air.gas_constant * 298.15))
    gas = ideal_gas({"N2": 0.7812, "O2": 0.2096, "Ar": 0.0092})
    expected, formation = molar(gas, temperature=298.15, pressure=1.0)
    assert s == pytest.approx(expected, abs=1e-3)
    assert h == pytest.approx(formation, abs=1e-3)
    assert formation == pytest.approx(0.0, abs=1e-3)


def test_isomers_and_spin_isomers_are_not_taken_for_each_other():
    """Every match has the atoms and a name of the species; spin isomers and unknown isomers have none."""
    matched = {}
    for name in names():
        data, _ = catalogue.find(name)
        species = gas_species(data)
        if species is not None:
            matched[name] = species.key
    assert len(matched) >= 60
    assert len(set(matched.values())) == len(matched), "two real fluids are one species"
    for pair in (("n-butane", "isobutane"), ("isobutene", "1-butene"), ("cis-2-butene", "trans-2-butene")):
        assert matched[pair[0]] != matched[pair[1]]
    for name in ("parahydrogen", "orthohydrogen", "paradeuterium", "isohexane", "o-xylene", "R134a"):
        assert name not in matched, name


@pytest.mark.parametrize("name", ["parahydrogen", "R134a", "o-xylene"])
def test_without_third_law_data_the_zero_is_refused_with_the_reason(name):
    with pytest.raises(InputError, match=r"third-law zero .* not known"):
        real_fluid(name, "third-law")


@pytest.mark.parametrize(
    ("name", "zero", "possible"),
    [
        ("argon", "IIR", "published, NBP, third-law"),
        ("methane", "ASHRAE", "published, NBP, third-law"),
        ("water", "ASHRAE", "published, NBP, third-law"),
        ("parahydrogen", "IIR", "published, NBP"),
        ("parahydrogen", "third-law", "published, NBP"),
        ("R410A", "third-law", "published, IIR, ASHRAE, NBP"),
    ],
)
def test_a_zero_that_cannot_be_is_answered_with_those_that_can(name, zero, possible):
    with pytest.raises(InputError) as caught:
        real_fluid(name, reference_state=zero)
    assert caught.value.faults[0].expected == possible
    for other in possible.split(", "):
        assert real_fluid(name, reference_state=other).substance == name


def test_spin_isomers_are_told_from_the_gas_that_is_carried():
    with pytest.raises(
        InputError, match=r"Found: 'parahydrogen'.*Of its formula there is hydrogen, with another entropy"
    ):
        real_fluid("parahydrogen", reference_state="third-law")
    with pytest.raises(InputError, match=r"not known. Found: None"):
        real_fluid("water", reference_state=None)

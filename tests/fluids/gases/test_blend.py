"""Mixtures with a composition for each element, against mixtures of one composition."""

from __future__ import annotations

import math

import numpy as np
import pytest

from reportgen import fluids
from reportgen.errors import RangeError
from reportgen.fluids.gases.blend import GasBlend, mixing_entropy, mole_fractions, mole_fractions_of

N2, O2, CO2 = (fluids.ideal_gas(name) for name in ("N2", "O2", "CO2"))
MASSES = [np.array([1.0, 2.0, 0.5, 3.0]), np.array([3.0, 2.0, 0.0, 1.0])]
TEMPERATURE = np.array([250.0, 400.0, 1500.0, 5000.0])
PRESSURE = np.array([1e5, 2e6, 3e4, 1e7])
FIELDS = (
    "specific_enthalpy",
    "specific_entropy",
    "specific_internal_energy",
    "density",
    "isobaric_heat_capacity",
    "isochoric_heat_capacity",
    "speed_of_sound",
)
PAIRS = (
    ("pressure", "specific_enthalpy"),
    ("pressure", "specific_entropy"),
    ("pressure", "specific_internal_energy"),
    ("pressure", "density"),
    ("temperature", "density"),
    ("temperature", "specific_entropy"),
    ("density", "specific_internal_energy"),
    ("density", "specific_entropy"),
    ("specific_enthalpy", "specific_entropy"),
)


def blend() -> GasBlend:
    return GasBlend(fluids.ideal_gas({"N2": 0.5, "CO2": 0.5}), [N2, CO2], MASSES)


@pytest.mark.parametrize("field", FIELDS)
def test_each_element_is_the_mixture_of_its_composition(field: str) -> None:
    state = blend().at(pressure=PRESSURE, temperature=TEMPERATURE)
    for number, masses in enumerate(zip(*MASSES, strict=True)):
        shares = {key: float(value) for key, value in mole_fractions_of([N2, CO2], masses).items()}
        alone = fluids.ideal_gas(shares).at(pressure=PRESSURE[number], temperature=TEMPERATURE[number])
        assert getattr(state, field)[number] == pytest.approx(float(getattr(alone, field)), rel=1e-12)


@pytest.mark.parametrize("pair", PAIRS, ids=" ".join)
def test_every_pair_leads_back(pair: tuple[str, str]) -> None:
    mixture = blend()
    state = mixture.at(pressure=PRESSURE, temperature=TEMPERATURE)
    back = mixture.at(**{name: getattr(state, name) for name in pair})
    np.testing.assert_allclose(back.temperature, TEMPERATURE, rtol=1e-12)
    np.testing.assert_allclose(back.pressure, PRESSURE, rtol=1e-10)


def test_out_of_range_is_a_fault_of_its_element() -> None:
    mixture = blend()
    energy = np.array(mixture.at(pressure=PRESSURE, temperature=TEMPERATURE).specific_internal_energy)
    energy[1] = 1e12
    state = mixture.at(errors="mask", pressure=PRESSURE, specific_internal_energy=energy)
    assert list(state.faults) == [1]
    assert np.isnan(state.temperature[1])
    assert np.isfinite(state.temperature[[0, 2, 3]]).all()
    with pytest.raises(RangeError):
        mixture.at(pressure=PRESSURE, specific_internal_energy=energy)


def test_a_mixture_of_mixtures_knows_its_species() -> None:
    air = fluids.ideal_gas({"N2": 0.79, "O2": 0.21})
    inner = GasBlend(fluids.ideal_gas({"N2": 0.9, "O2": 0.1}), [air, N2], [np.array([1.0, 1.0]), np.array([1.0, 2.0])])
    outer = GasBlend(
        fluids.ideal_gas({"N2": 0.5, "O2": 0.1, "CO2": 0.4}), [inner, CO2], [np.array([2.0, 3.0]), np.array([1.0, 1.0])]
    )
    shares = mole_fractions(outer)
    assert sum(shares.values()) == pytest.approx(1.0, rel=1e-14)
    for number, nitrogen in enumerate((1.0, 2.0)):
        amounts = {"air": 1.0 / air.molar_mass, "N2": nitrogen / N2.molar_mass}
        scale = (2.0, 3.0)[number] / (1.0 + nitrogen)
        oxygen = scale * 0.21 * amounts["air"]
        total = scale * (amounts["air"] + amounts["N2"]) + 1.0 / CO2.molar_mass
        assert shares["O2"][number] == pytest.approx(oxygen / total, rel=1e-12)


def test_the_entropy_of_mixing_is_that_of_counting_places() -> None:
    """1 mol each: R 2 ln 2; of one gas with itself none; none of an empty part."""
    masses = [np.array([N2.molar_mass, N2.molar_mass]), np.array([O2.molar_mass, 0.0])]
    found = mixing_entropy([N2, O2], masses)
    assert found[0] == pytest.approx(2.0 * 8.31446261815324 * math.log(2.0), rel=1e-12)
    assert found[1] == 0.0
    assert float(mixing_entropy([N2, N2], [1.0, 2.0])) == 0.0


def test_constant_heat_capacities_stay_constant() -> None:
    gases = [fluids.ideal_gas("N2", heat_capacity=1040.0), fluids.ideal_gas("CO2", heat_capacity=850.0)]
    like = fluids.ideal_gas({"N2": 0.5, "CO2": 0.5}, heat_capacity=900.0)
    state = GasBlend(like, gases, [np.array([1.0, 3.0]), np.array([1.0, 1.0])]).at(
        pressure=1e5, temperature=[300.0, 900.0]
    )
    np.testing.assert_allclose(state.isobaric_heat_capacity, [945.0, 992.5], rtol=1e-12)

"""Saturation of water over liquid and ice, dew points, humid air, and the gas of a complete combustion."""

from __future__ import annotations

import math

import numpy as np
import pytest
from iapws._iapws import _Sublimation_Pressure

from reportgen.errors import InputError, RangeError
from reportgen.fluids import combustion_products, humid_air, ideal_gas, real_fluid, stoichiometric_air
from reportgen.fluids.gases.condensation import (
    condensed_water,
    humidity_ratio,
    saturation_pressure,
    saturation_temperature,
    water_saturation,
)

ATMOSPHERE = 101325.0


# --- saturation -------------------------------------------------------------------------------------------------------


def test_sublimation_pressure_at_the_check_value_of_the_release():
    """IAPWS R14-08(2011), table 3: 230 K, 8.947 35 Pa (from memory); and an independent implementation."""
    assert saturation_pressure(230.0) == pytest.approx(8.94735, abs=5e-6)
    temperatures = np.linspace(60.0, 273.15, 30)
    expected = [_Sublimation_Pressure(temperature) * 1e6 for temperature in temperatures]
    np.testing.assert_allclose(saturation_pressure(temperatures), expected, rtol=1e-12)


def test_saturation_pressure_over_liquid_is_that_of_the_real_fluid():
    temperatures = np.array([273.16, 300.0, 373.124, 500.0, 640.0])
    expected = real_fluid("water").at(temperature=temperatures, quality=0.0).pressure
    np.testing.assert_allclose(saturation_pressure(temperatures), expected, rtol=1e-9)
    # both curves meet at the triple point: 611.657 Pa in one release, 611.6548 Pa by the equation of the other
    assert saturation_pressure(273.16) == pytest.approx(saturation_pressure(273.1599999), rel=5e-6)


def test_saturation_temperature_leads_back():
    temperatures = np.array([55.0, 100.0, 200.0, 260.0, 273.0, 274.0, 300.0, 450.0, 645.0])
    np.testing.assert_allclose(saturation_temperature(saturation_pressure(temperatures)), temperatures, rtol=1e-10)


def test_where_nothing_condenses_there_is_no_dew_point():
    assert saturation_pressure(700.0) == math.inf
    assert np.isnan(saturation_temperature([0.0, 3e7, 1e-50, np.nan])).all()
    assert math.isnan(saturation_pressure(math.nan))
    with pytest.raises(RangeError, match="from 50 K"):
        saturation_pressure([300.0, 20.0])


MOIST = ideal_gas({"N2": 0.97, "H2O": 0.03})


@pytest.mark.parametrize("pressure", [-7e5, 0.0, math.inf, [1e5, -1.0]])
@pytest.mark.parametrize("function", [water_saturation, condensed_water])
def test_pressures_that_no_gas_has_are_refused(function, pressure):
    with pytest.raises(RangeError, match="finite number above 0"):
        function(MOIST, 300.0, pressure)


def test_partial_pressures_and_temperatures_that_cannot_be_are_refused():
    with pytest.raises(RangeError, match="Found: -3 Pa"):
        saturation_temperature([500.0, -3.0])
    with pytest.raises(RangeError, match="finite number from 0"):
        saturation_temperature(math.inf)
    for temperature in (-1.0, 0.0, math.inf):
        with pytest.raises(RangeError, match="from 50 K"):
            saturation_pressure(temperature)


@pytest.mark.parametrize("function", [water_saturation, condensed_water])
def test_what_is_no_gas_or_no_number_is_refused(function):
    for gas in ("air", None, 3):
        with pytest.raises(InputError, match="no gas"):
            function(gas, 300.0, 1e5)
    for conditions in (("300", 1e5), (300.0, "1e5"), (None, 1e5), (True, 1e5), (300.0, [[1e5], [1e5, 2e5]])):
        with pytest.raises(InputError, match="not a number"):
            function(MOIST, *conditions)
    with pytest.raises(InputError, match=r"do not fit together. Found: \(2,\), \(3,\)"):
        function(MOIST, [300.0, 280.0], [1e5, 2e5, 3e5])
    for of_saturation in (saturation_pressure, saturation_temperature):
        with pytest.raises(InputError, match="not a number"):
            of_saturation("a")
    with pytest.raises(InputError, match="no gas"):
        humidity_ratio("air")


def test_nan_stays_nan_in_condensation():
    ratio, dew_point = water_saturation(MOIST, [300.0, math.nan], [math.nan, 1e5])
    assert np.isnan(ratio).all()
    assert np.isnan(dew_point).all()
    assert np.isnan(condensed_water(MOIST, [300.0, math.nan], [math.nan, 1e5])).all()


def test_humid_air_takes_numbers_of_numpy():
    plain = humid_air(temperature=293.0, pressure=1e5, relative_humidity=0.5)
    numpy = humid_air(temperature=np.float32(293.0), pressure=np.int64(100_000), relative_humidity=np.float32(0.5))
    assert numpy == plain
    with pytest.raises(InputError, match="relative humidity is a number"):
        humid_air(temperature=293.0, pressure=1e5, relative_humidity="0.5")
    assert combustion_products("CH4", excess_air=np.float32(0.25)) == combustion_products("CH4", excess_air=0.25)


# --- humid air --------------------------------------------------------------------------------------------------------

# Humidity ratio [kg/kg] of saturated air at 101 325 Pa: psychrometric tables of the ASHRAE Handbook Fundamentals (from
# memory). They include the enhancement factor, 0.4 % at this pressure.
SATURATED_LISTED = {273.15: 0.003789, 283.15: 0.007661, 293.15: 0.014758, 298.15: 0.020170, 313.15: 0.049141}


@pytest.mark.parametrize(("temperature", "listed"), SATURATED_LISTED.items())
def test_saturated_air_holds_the_water_of_the_psychrometric_tables_less_the_enhancement(temperature, listed):
    air = ideal_gas(humid_air(temperature=temperature, pressure=ATMOSPHERE, relative_humidity=1.0))
    found = humidity_ratio(air)
    assert -0.0060 < found / listed - 1.0 < -0.0030


def test_room_air_has_its_dew_point():
    """25 °C, 50 %: dew point 13.9 °C (from memory)."""
    air = ideal_gas(humid_air(temperature=298.15, pressure=ATMOSPHERE, relative_humidity=0.5))
    ratio, dew_point = water_saturation(air, 298.15, ATMOSPHERE)
    assert ratio == pytest.approx(0.5, rel=1e-12)
    assert dew_point - 273.15 == pytest.approx(13.9, abs=0.06)
    again = humid_air(temperature=298.15, pressure=ATMOSPHERE, dew_point=float(dew_point))
    assert again["H2O"] == pytest.approx(air.composition["H2O"], rel=1e-9)
    by_mass = humid_air(temperature=298.15, pressure=ATMOSPHERE, humidity_ratio=humidity_ratio(air))
    assert by_mass["H2O"] == pytest.approx(air.composition["H2O"], rel=1e-6)


def test_compressed_air_loses_its_water():
    """Saturated at 20 °C and 1 atm, compressed to 7 bar and cooled back: six sevenths condense, the rest saturates."""
    air = ideal_gas(humid_air(temperature=293.15, pressure=ATMOSPHERE, relative_humidity=1.0))
    pressure = 7.0 * ATMOSPHERE
    ratio, dew_point = water_saturation(air, 293.15, pressure)
    assert ratio == pytest.approx(7.0, rel=1e-12)
    assert dew_point > 320.0
    condensed = condensed_water(air, 293.15, pressure)
    share = air.composition["H2O"]
    left = (share - condensed) / (1.0 - condensed)
    assert left * pressure == pytest.approx(saturation_pressure(293.15), rel=1e-12)
    assert condensed / share == pytest.approx(6.0 / 7.0, abs=0.01)
    assert condensed_water(air, dew_point + 1e-6, pressure) == 0.0
    assert condensed_water(air, dew_point - 0.1, pressure) > 0.0


def test_frost_below_the_triple_point():
    air = ideal_gas(humid_air(temperature=263.15, pressure=ATMOSPHERE, relative_humidity=0.8))
    ratio, frost_point = water_saturation(air, [263.15, 255.0], ATMOSPHERE)
    assert ratio[0] == pytest.approx(0.8)
    assert ratio[1] > 1.0
    assert 255.0 < frost_point[0] < 263.15


def test_gases_without_water_and_water_alone():
    nitrogen, steam = ideal_gas("nitrogen"), ideal_gas("steam")
    ratio, dew_point = water_saturation(nitrogen, [250.0, 700.0], 1e5)
    assert list(ratio) == [0.0, 0.0]
    assert np.isnan(dew_point).all()
    assert humidity_ratio(nitrogen) == 0.0
    np.testing.assert_allclose(condensed_water(steam, [300.0, 400.0], 1e5), [1.0, 0.0])
    assert water_saturation(steam, 300.0, 1e5)[0] > 28.0
    with pytest.raises(InputError, match="Water alone"):
        humidity_ratio(steam)


def test_shapes_and_nan_are_kept():
    air = ideal_gas(humid_air(temperature=298.15, pressure=ATMOSPHERE, relative_humidity=0.5))
    ratio, dew_point = water_saturation(air, [[280.0], [np.nan]], [1e5, np.nan, 2e5])
    assert ratio.shape == dew_point.shape == (2, 3)
    assert np.isnan(ratio[1]).all()
    assert np.isnan(ratio[0, 1])
    assert np.isnan(dew_point[1]).all()
    assert np.isnan(condensed_water(air, [np.nan, 300.0], 1e5)).tolist() == [True, False]


@pytest.mark.parametrize(
    ("given", "said"),
    [
        ({}, "in one way"),
        ({"relative_humidity": 0.5, "dew_point": 280.0}, "in one way"),
        ({"relative_humidity": 60}, "0.6 for 60 %"),
        ({"relative_humidity": -0.1}, "number from 0"),
        ({"relative_humidity": math.nan}, "number from 0"),
        ({"humidity_ratio": 0.1}, "cannot hold"),
        ({"dew_point": 310.0}, "not above its temperature"),
        ({"relative_humidity": 0.5, "pressure": 0.0}, "above 0 Pa"),
        ({"relative_humidity": 1.0, "temperature": 400.0}, "cannot hold"),
        ({"relative_humidity": 0.5, "dry_air": {"N2": 0.9, "H2O": 0.1}}, "holds water already"),
    ],
)
def test_air_that_cannot_be_is_refused(given, said):
    with pytest.raises(InputError, match=said):
        humid_air(**{"temperature": 300.0, "pressure": 1e5, **given})


# --- combustion -------------------------------------------------------------------------------------------------------


def test_methane_burns_to_what_the_equation_says():
    """CH4 + 2 (1 + e)(O2 + 3.76 N2) → CO2 + 2 H2O + 2e O2 + 7.52 (1 + e) N2."""
    air = {"O2": 1.0 / 4.76, "N2": 3.76 / 4.76}
    for excess in (0.0, 0.5):
        found = combustion_products("CH4", excess_air=excess, air=air)
        moles = {"CO2": 1.0, "H2O": 2.0, "O2": 2.0 * excess, "N2": 7.52 * (1.0 + excess)}
        total = sum(moles.values())
        assert set(found) == {key for key, amount in moles.items() if amount}
        for key, fraction in found.items():
            assert fraction == pytest.approx(moles[key] / total, rel=1e-12)
    # 17.2 kg of air for each kg of methane (from memory)
    assert stoichiometric_air("CH4") == pytest.approx(17.2, abs=0.05)


def test_flue_gas_of_methane_condenses_below_59_degrees():
    """Dew point of the flue gas of methane without excess air: 59 °C (from memory)."""
    flue_gas = ideal_gas(combustion_products("CH4"))
    ratio, dew_point = water_saturation(flue_gas, 320.0, ATMOSPHERE)
    assert dew_point - 273.15 == pytest.approx(59.0, abs=0.5)
    assert ratio > 1.0


def test_fuel_with_sulfur_oxygen_inerts_and_damp_air():
    fuel = {"CH4": 0.8, "CO": 0.05, "H2S": 0.02, "CO2": 0.03, "N2": 0.1}
    air = humid_air(temperature=293.15, pressure=1e5, relative_humidity=0.6)
    found = combustion_products(fuel, excess_air=0.15, air=air)
    assert math.fsum(found.values()) == pytest.approx(1.0, rel=1e-12)
    # atoms of carbon to sulfur are those of the fuel; argon to nitrogen nearly those of the air
    assert (found["CO2"] - found["Ar"] / air["Ar"] * air["CO2"]) / found["SO2"] == pytest.approx(0.88 / 0.02, rel=1e-9)
    assert found["O2"] > 0.0
    gas = ideal_gas(found)
    assert gas.entropy_zero_name == "third-law"
    by_mass = combustion_products({"CH4": 0.5, "H2": 0.5}, basis="mass")
    molar = {"CH4": 0.5 / 16.04246, "H2": 0.5 / 2.01588}
    total = sum(molar.values())
    by_mole = combustion_products({key: amount / total for key, amount in molar.items()})
    assert by_mass["CO2"] == pytest.approx(by_mole["CO2"], rel=1e-6)


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        ({"fuel": "N2"}, "needs no oxygen"),
        ({"fuel": "CH4", "excess_air": -0.1}, "number from 0"),
        ({"fuel": "CH4", "air": "N2"}, "no free oxygen"),
        ({"fuel": "C2F4"}, "no products of combustion are carried"),
        ({"fuel": "gasoline vapour"}, "not carried"),
    ],
)
def test_what_does_not_burn_completely_is_refused(arguments, said):
    with pytest.raises(InputError, match=said):
        combustion_products(**arguments)

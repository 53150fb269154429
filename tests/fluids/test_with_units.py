"""Property models with quantities of a unit registry, here pint's; and the examples of the package's description."""

from __future__ import annotations

import doctest
import math

import numpy as np
import pint
import pytest

import reportgen.fluids
from reportgen.errors import InputError, RangeError
from reportgen.fluids import ideal_gas, real_fluid, with_units
from reportgen.fluids.state import FIELDS
from reportgen.fluids.unit_interface import UNITS

units = pint.UnitRegistry()
Q = units.Quantity


@pytest.fixture(scope="module")
def water():
    return with_units(real_fluid("water"), units)


def test_every_field_of_a_state_has_its_unit(water):
    state = water.at(pressure=Q(39, "bar"), temperature=Q(400, "degC"))
    plain = real_fluid("water").at(pressure=39e5, temperature=673.15)
    assert set(UNITS) == set(FIELDS) - {"phase"}
    for name in UNITS:
        field = getattr(state, name)
        assert field.u == units.parse_units(str(field.units))
        np.testing.assert_allclose(field.to_base_units().magnitude, getattr(plain, name), rtol=1e-12)
    assert state.phase == "vapour"
    assert state.specific_entropy.to("kJ/(kg*K)").magnitude == pytest.approx(plain.specific_entropy / 1e3)
    assert state.density.check("[mass]/[length]**3")
    assert state.speed_of_sound.check("[speed]")
    assert state.plain.specific_entropy == plain.specific_entropy
    assert state.shape == ()
    assert "pressure" in dir(state)
    assert "StateWithUnits" in repr(state)


@pytest.mark.parametrize("temperature", [Q(400, "degC"), Q(752, "degF"), Q(673.15, "K"), Q(1211.67, "degR")])
def test_temperatures_of_every_scale_are_the_same_temperature(water, temperature):
    state = water.at(pressure=Q(565.6472, "psi"), temperature=temperature)
    assert state.temperature.m_as("K") == pytest.approx(673.15, rel=1e-12)
    assert state.pressure.m_as("bar") == pytest.approx(39.0, rel=1e-6)


def test_gauge_pressures_of_the_users_registry_are_made_absolute():
    """A unit with an offset is the registry's own affair: 0 bar gauge is 1.01325 bar."""
    registry = pint.UnitRegistry()
    registry.define("bar_gauge = 1e5 * pascal; offset: 101325 = barg")
    air = with_units(ideal_gas("air"), registry)
    state = air.at(pressure=registry.Quantity(0.0, "bar_gauge"), temperature=registry.Quantity(20.0, "degC"))
    assert state.pressure.m_as("Pa") == pytest.approx(101325.0)


def test_arrays_lists_and_several_units_broadcast(water):
    pressure = Q([1.0, 2.0, 3.0], "bar")
    enthalpy = Q(np.array([[100.0], [2800.0]]), "kJ/kg")
    state = water.at(pressure=pressure, specific_enthalpy=enthalpy)
    assert state.temperature.shape == (2, 3)
    assert list(state.phase[0]) == ["liquid"] * 3
    assert state.specific_enthalpy.m_as("J/kg")[1, 2] == pytest.approx(2.8e6)


def test_saturation_and_quality(water):
    liquid, vapour = water.saturation(pressure=Q(1, "atm"))
    assert liquid.temperature.to("degC").magnitude == pytest.approx(99.97, abs=0.01)
    assert (vapour.specific_enthalpy - liquid.specific_enthalpy).m_as("kJ/kg") == pytest.approx(2256.5, abs=0.5)
    wet = water.at(pressure=Q(1, "atm"), quality=0.5)
    assert water.at(pressure=Q(1, "atm"), quality=Q(50, "percent")).density == wet.density


def test_superheat_is_a_difference(water):
    warm = water.at(pressure=Q(1, "atm"), superheat=Q(10, "delta_degC"))
    assert warm.superheat.m_as("K") == pytest.approx(10.0)
    assert water.at(pressure=Q(1, "atm"), superheat=Q(18, "delta_degF")).superheat.m_as("K") == pytest.approx(10.0)
    with pytest.raises(InputError, match="difference"):
        water.at(pressure=Q(1, "atm"), superheat=Q(10, "degC"))


def test_faults_and_nan_come_through(water):
    state = water.at(errors="mask", pressure=Q([1.0, -1.0, math.nan], "bar"), temperature=Q(300, "K"))
    assert set(state.faults) == {1}
    assert np.isnan(state.specific_entropy.magnitude[1:]).all()
    with pytest.raises(RangeError):
        water.at(pressure=Q(-1, "bar"), temperature=Q(300, "K"))


@pytest.mark.parametrize(
    ("pair", "said"),
    [
        ({"pressure": 39e5, "temperature": Q(400, "degC")}, "pressure has no unit"),
        ({"pressure": Q(39, "bar"), "temperature": 673.15}, "temperature has no unit"),
        ({"pressure": Q(39, "bar"), "temperature": Q(39, "kg")}, "no temperature"),
        ({"pressure": Q(39, "bar"), "specific_enthalpy": Q(39, "kJ/(kg*K)")}, "no specific enthalpy"),
        ({"pressure": Q(39, "bar"), "specific_entropy": Q(39, "kJ/(mol*K)")}, "no specific entropy"),
        ({"pressure": Q(39, "bar"), "temperatur": Q(300, "K")}, "Did you mean temperature"),
    ],
)
def test_numbers_without_unit_and_other_dimensions_are_refused(water, pair, said):
    with pytest.raises(InputError, match=said):
        water.at(**pair)


def test_what_the_model_tells_of_itself_is_read_through(water):
    assert water.title == "Water"
    assert water.limits.minimum_temperature == pytest.approx(273.16)
    assert water.fluid.kind == "real-fluid"
    assert "RealFluid" in repr(water)
    with pytest.raises(InputError, match="no saturation"):
        with_units(ideal_gas("air"), units).saturation(pressure=Q(1, "bar"))
    with pytest.raises(InputError, match="unit registry"):
        with_units(ideal_gas("air"), "SI")


def test_the_examples_in_the_description_of_the_package_hold():
    """Every line with ``>>>`` of the package's docstring is run, and gives what stands there."""
    result = doctest.testmod(reportgen.fluids, optionflags=doctest.ELLIPSIS | doctest.NORMALIZE_WHITESPACE)
    assert result.attempted >= 15
    assert result.failed == 0


@pytest.mark.parametrize("model", ["water", None, reportgen.fluids.statistical.gas("N2")])
def test_only_property_models_are_wrapped(model):
    with pytest.raises(InputError, match="no property model"):
        with_units(model, units)


def test_a_model_with_units_is_wrapped_anew(water):
    state = with_units(water, units).at(pressure=Q(39, "bar"), temperature=Q(400, "degC"))
    assert state.specific_entropy.to("kJ/(kg*K)").magnitude == pytest.approx(6.7850, abs=1e-4)

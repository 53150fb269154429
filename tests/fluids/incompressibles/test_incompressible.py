"""Incompressible liquids and solids against quadrature, the identities of thermodynamics, and themselves."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from reportgen.errors import InputError, RangeError
from reportgen.fluids.incompressibles.making import incompressible
from reportgen.fluids.model import Fluid
from reportgen.fluids.state import FIELDS

ZERO = 298.15
ATMOSPHERE = 101325.0

#: name -> arguments; the heat capacity as a plain function and its kinks, for the quadrature.
TABLE = ([220.0, 260.0, 298.15, 340.0, 420.0, 560.0], [1650.0, 1790.0, 1910.0, 2060.0, 2400.0, 2310.0])
CUBIC = [1040.0, 3.1, -2.2e-3, 1.4e-6]
CASES = {
    "constant": ({"density": 7870.0, "specific_heat": 450.0, "phase": "solid", "limits": (200.0, 900.0)}, None, ()),
    "polynomial": ({"density": 880.0, "specific_heat": CUBIC, "limits": (230.0, 620.0)}, CUBIC, ()),
    "alternating": (
        {"density": 998.0, "specific_heat": [8958.9, -40.535, 0.11243, -1.0138e-4], "limits": (273.16, 450.0)},
        [8958.9, -40.535, 0.11243, -1.0138e-4],
        (),
    ),
    "table": ({"density": 850.0, "specific_heat": TABLE}, TABLE, TABLE[0]),
    "table-without-298": (
        {"density": 1900.0, "specific_heat": ([500.0, 600.0, 900.0], [1500.0, 1510.0, 1555.0])},
        ([500.0, 600.0, 900.0], [1500.0, 1510.0, 1555.0]),
        (600.0,),
    ),
}
EXPANDING = {"density": 880.0, "specific_heat": CUBIC, "limits": (230.0, 620.0), "thermal_expansion": 7.5e-4}


def heat_of(name):
    arguments, law, _ = CASES[name]
    if law is None:
        return lambda t: arguments["specific_heat"]
    if isinstance(law, tuple):
        return lambda t: np.interp(t, *law)
    return lambda t: sum(a * t**i for i, a in enumerate(law))


def make(name):
    return incompressible(name, **CASES[name][0])


@pytest.mark.parametrize("name", CASES)
def test_enthalpy_and_entropy_are_the_integrals_of_the_heat_capacity(name):
    """Within 1e-12 of scipy's adaptive quadrature of c and c/T, from the zero and between neighbours."""
    fluid, heat, kinks = make(name), heat_of(name), CASES[name][2]
    limits = fluid.limits
    temperatures = np.linspace(limits.minimum_temperature, limits.maximum_temperature, 23)
    state = fluid.at(pressure=ATMOSPHERE, temperature=temperatures)
    zero = min(max(ZERO, limits.minimum_temperature), limits.maximum_temperature)
    worst = 0.0
    for index, temperature in enumerate(temperatures):
        for field, integrand in (
            ("specific_enthalpy", heat),
            ("specific_entropy", lambda t: heat(t) / t),
        ):
            edges = [zero, *sorted(k for k in kinks if min(zero, temperature) < k < max(zero, temperature))]
            edges = [*edges, temperature] if temperature > zero else [zero, *edges[:0:-1], temperature]
            integral = math.fsum(
                quad(integrand, a, b, epsabs=0.0, epsrel=1e-13)[0] for a, b in itertools.pairwise(edges)
            )
            difference = abs(getattr(state, field)[index] - integral)
            scale = abs(integral) or 1.0
            worst = max(worst, difference / scale if integral else difference)
    assert worst <= 1e-12
    np.testing.assert_allclose(state.isobaric_heat_capacity, [heat(t) for t in temperatures], rtol=1e-13)


def test_iron_dropped_into_a_lake():
    """Çengel & Boles: 50 kg of iron, 0.45 kJ/(kg K), 500 K into a lake at 285 K: -12.65 kJ/K (from memory)."""
    iron = incompressible("iron", density=7870.0, specific_heat=450.0, phase="solid")
    state = iron.at(pressure=1e5, temperature=[500.0, 285.0])
    change = 50.0 * np.diff(state.specific_entropy)[0] / 1e3
    assert change == pytest.approx(-12.65, abs=0.005)
    assert 50.0 * (state.specific_enthalpy[0] - state.specific_enthalpy[1]) / 285.0 / 1e3 == pytest.approx(
        16.97, abs=0.01
    )


@pytest.mark.parametrize("arguments", [CASES["table"][0], CASES["polynomial"][0], EXPANDING])
def test_every_pair_leads_back(arguments):
    fluid = incompressible("oil", **arguments)
    limits = fluid.limits
    temperature = np.linspace(limits.minimum_temperature, limits.maximum_temperature, 101)
    pressure = np.geomspace(1e3, 5e8, 7)[:, None]
    state = fluid.at(pressure=pressure, temperature=temperature)
    assert state.shape == (7, 101)
    names = ["pressure", "temperature", "specific_enthalpy", "specific_entropy"]
    pairs = [(a, b) for i, a in enumerate(names) for b in names[i + 1 :]]
    tried = 0
    for first, second in pairs:
        if {first, second} == {"temperature", "specific_entropy"} and not fluid.thermal_expansion:
            continue
        found = fluid.at(**{first: getattr(state, first), second: getattr(state, second)}, errors="mask")
        # a pressure found from h or s carries their rounding times the density, which may end below zero
        slack = 1e-9 * 5e8
        assert set(found.faults) <= set(np.flatnonzero(state.pressure.ravel() < slack))
        np.testing.assert_allclose(found.temperature, state.temperature, rtol=1e-12)
        good = ~np.isnan(found.pressure)
        np.testing.assert_allclose(found.pressure[good], state.pressure[good], rtol=1e-12, atol=slack)
        tried += 1
    assert tried == (6 if fluid.thermal_expansion else 5)


@pytest.mark.parametrize("arguments", [CASES["table"][0], CASES["polynomial"][0], EXPANDING])
def test_identities_of_thermodynamics(arguments):
    """dh = T ds + v dp and (∂s/∂p)_T = −(∂v/∂T)_p by central differences of the sixth order."""
    fluid = incompressible("oil", **arguments)
    temperature, pressure = np.array([245.0, 320.0, 380.0, 500.0]), 3e6
    weights = {1: 0.75, 2: -0.15, 3: 1.0 / 60.0}

    def along(field, step_t, step_p):
        def value(k):
            state = fluid.at(pressure=pressure + k * step_p, temperature=temperature + k * step_t)
            return getattr(state, field)

        return sum(w * (value(k) - value(-k)) for k, w in weights.items())

    at = fluid.at(pressure=pressure, temperature=temperature)
    dt, dp = 2.0, 1e5
    # at constant pressure
    np.testing.assert_allclose(
        along("specific_enthalpy", dt, 0.0), temperature * along("specific_entropy", dt, 0.0), rtol=1e-9
    )
    # at constant temperature: dh − T ds = v dp
    rest = along("specific_enthalpy", 0.0, dp) - temperature * along("specific_entropy", 0.0, dp)
    np.testing.assert_allclose(rest, at.specific_volume * dp, rtol=1e-6)
    maxwell = along("specific_entropy", 0.0, dp) / dp + along("specific_volume", dt, 0.0) / dt
    np.testing.assert_allclose(maxwell, 0.0, atol=1e-9 * fluid.at(pressure=1e5, temperature=300.0).specific_volume)
    np.testing.assert_allclose(
        at.specific_internal_energy, at.specific_enthalpy - at.pressure * at.specific_volume, rtol=1e-14
    )


def test_fields_without_meaning_are_nan():
    water = incompressible("water", density=997.0, specific_heat=4181.0)
    state = water.at(pressure=1e5, temperature=300.0)
    for field in ("quality", "superheat", "subcooling", "speed_of_sound", "compressibility_factor"):
        assert math.isnan(getattr(state, field)), field
    assert state.phase == "liquid"
    assert state.isochoric_heat_capacity == state.isobaric_heat_capacity == 4181.0
    assert state.density == pytest.approx(997.0, rel=1e-15)
    finite = {name for name in FIELDS if name != "phase" and np.isfinite(getattr(state, name))}
    assert finite == set(FIELDS) - {"phase", "quality", "superheat", "subcooling", "speed_of_sound"} - {
        "compressibility_factor"
    }
    known = incompressible("water", density=997.0, specific_heat=4181.0, molar_mass=0.018015)
    assert known.at(pressure=1e5, temperature=300.0).compressibility_factor == pytest.approx(7.244e-4, rel=1e-3)
    expanding = incompressible("water", density=997.0, specific_heat=4181.0, thermal_expansion=2.6e-4)
    assert math.isnan(expanding.at(pressure=1e5, temperature=300.0).isochoric_heat_capacity)


def test_it_is_a_fluid_with_its_zero_stated():
    oil = incompressible("thermal oil", **CASES["table"][0], source="Data sheet 12")
    assert isinstance(oil, Fluid)
    assert oil.kind == "incompressible"
    assert oil.title == "Thermal oil"
    assert oil.sources == ("Data sheet 12",)
    assert "298.15 K" in oil.entropy_zero
    salt = make("table-without-298")
    assert "500 K" in salt.entropy_zero
    assert salt.entropy_zero_name != oil.entropy_zero_name
    at_zero = salt.at(pressure=ATMOSPHERE, temperature=500.0)
    assert at_zero.specific_entropy == 0.0
    assert at_zero.specific_enthalpy == 0.0
    unstated = incompressible("iron", density=7870.0, specific_heat=450.0, phase="solid")
    assert any("not stated" in remark for remark in unstated.limits.remarks)


@pytest.mark.parametrize(
    "heat",
    [
        ([260.0, 300.0, 400.0], [1800.0, 1900.0, 2100.0]),
        [(260.0, 1800.0), (300.0, 1900.0), (400.0, 2100.0)],
        np.array([[260, 1800], [300, 1900], [400, 2100]]),
        {"temperature": [260.0, 300.0, 400.0], "specific_heat": [1800.0, 1900.0, 2100.0]},
        {"temperature": [260.0, 300.0], "specific_heat": np.array([1800.0, 1900.0], dtype=np.float32)},
    ],
)
def test_forms_of_a_table(heat):
    oil = incompressible("oil", density=880.0, specific_heat=heat)
    assert oil.at(pressure=1e5, temperature=280.0).isobaric_heat_capacity == pytest.approx(1850.0, rel=1e-12)


def test_numbers_of_numpy_are_numbers():
    plain = incompressible(
        "oil", density=880.0, specific_heat=1900.0, limits=(260.0, 400.0), thermal_expansion=0.0005, molar_mass=0.25
    )
    numpy = incompressible(
        "oil",
        density=np.float32(880.0),
        specific_heat=np.int64(1900),
        limits=np.array([260, 400]),
        thermal_expansion=np.array(0.0005),
        molar_mass=np.float64(0.25),
    )
    given = {"pressure": 2e5, "temperature": 350.0}
    assert numpy.at(**given).specific_enthalpy == plain.at(**given).specific_enthalpy


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        ({"density": -1.0, "specific_heat": 4.0}, "density"),
        ({"density": 1.0, "specific_heat": 0.0}, "not above zero"),
        ({"density": 1.0, "specific_heat": math.nan}, "not understood"),
        ({"density": 1.0, "specific_heat": "2 kJ"}, "not understood"),
        ({"density": 1.0, "specific_heat": []}, "not understood"),
        ({"density": 1.0, "specific_heat": [1000.0, 2.0]}, "needs the limits"),
        ({"density": 1.0, "specific_heat": [1000.0, -4.0], "limits": (200.0, 400.0)}, "not above zero everywhere"),
        ({"density": 1.0, "specific_heat": [4000.0, -24.0, 0.035], "limits": (200.0, 450.0)}, "everywhere"),
        ({"density": 1.0, "specific_heat": ([300.0], [2.0])}, "two at least"),
        ({"density": 1.0, "specific_heat": ([300.0, 290.0, 310.0], [2.0, 3.0, 3.0])}, "increase"),
        ({"density": 1.0, "specific_heat": ([300.0, 390.0, 400.0], [2.0, -3.0, 2.0])}, "above 0"),
        (
            {"density": 1.0, "specific_heat": [(300.0, 2.0), (310.0, 2.5), (390.0, 3.0)], "limits": (250.0, 390.0)},
            "beyond",
        ),
        ({"density": 1.0, "specific_heat": [(260.0, 1800.0), (300.0, 1900.0)]}, "rows or the columns"),
        ({"density": 1.0, "specific_heat": {"temperature": [260.0, 300.0], "values": [1800.0, 1900.0]}}, "understood"),
        ({"density": 1.0, "specific_heat": [(260.0, 1800.0), (300.0, "1900"), (310.0, 1950.0)]}, "not understood"),
        ({"density": "880", "specific_heat": 2.0}, "density"),
        ({"density": 880.0, "specific_heat": 2.0, "source": 3}, "source is a text"),
        ({"density": True, "specific_heat": 2.0}, "density"),
        ({"density": 1.0, "specific_heat": 2.0, "limits": (400.0, 300.0)}, "lower one first"),
        ({"density": 1.0, "specific_heat": 2.0, "limits": 300.0}, "lower one first"),
        ({"density": 1.0, "specific_heat": 2.0, "thermal_expansion": 0.01}, "expansion"),
        ({"density": 1.0, "specific_heat": 2.0, "phase": "gas"}, "phase"),
        ({"density": 1.0, "specific_heat": 2.0, "molar_mass": 0.0}, "molar mass"),
    ],
)
def test_what_makes_no_sense_is_refused(arguments, said):
    with pytest.raises(InputError, match=said):
        incompressible("thing", **arguments)


@pytest.mark.parametrize(
    ("pair", "said"),
    [
        ({"pressure": 1e5, "density": 900.0}, "fixes no state"),
        ({"temperature": 300.0, "specific_volume": 1e-3}, "fixes no state"),
        ({"temperature": 300.0, "specific_entropy": 0.0}, "temperature alone"),
        ({"pressure": 1e5, "quality": 0.5}, "no saturation"),
        ({"pressure": 1e5}, "exactly two"),
    ],
)
def test_pairs_without_a_state_are_refused_with_the_reason(pair, said):
    with pytest.raises(InputError, match=said):
        make("table").at(**pair)


def test_states_out_of_range_are_refused():
    oil = make("table")
    with pytest.raises(RangeError, match="above the maximum 560 K"):
        oil.at(pressure=1e5, temperature=561.0)
    with pytest.raises(RangeError, match="below the minimum 220 K"):
        oil.at(pressure=1e5, temperature=-5.0)
    with pytest.raises(RangeError, match="Pressure -5 Pa"):
        oil.at(pressure=-5.0, temperature=300.0)
    with pytest.raises(RangeError, match="finite"):
        oil.at(pressure=math.inf, temperature=300.0)
    with pytest.raises(RangeError, match="220 K to 560 K"):
        oil.at(pressure=1e5, specific_enthalpy=1e7)
    with pytest.raises(RangeError, match="Pressure"):
        oil.at(temperature=300.0, specific_enthalpy=-1e5)


@settings(max_examples=80, deadline=None)
@given(
    first=st.sampled_from(["pressure", "specific_enthalpy"]),
    second=st.sampled_from(["temperature", "specific_entropy"]),
    values=st.lists(st.tuples(st.floats(), st.floats()), max_size=6),
)
def test_absurd_values_are_masked_with_a_reason_and_nan_stays_silent(first, second, values):
    oil = make("table")
    a = np.array([pair[0] for pair in values])
    b = np.array([pair[1] for pair in values])
    state = oil.at(errors="mask", **{first: a, second: b})
    assert state.shape == a.shape
    for index in range(a.size):
        if np.isnan(a[index]) or np.isnan(b[index]):
            assert index not in state.faults
            assert np.isnan(state.temperature[index])
        elif index in state.faults:
            assert np.isnan(state.specific_entropy[index])
        else:
            assert 220.0 <= state.temperature[index] <= 560.0
            assert state.pressure[index] > 0.0


def test_beyond_the_range_the_temperature_that_would_result_is_told() -> None:
    """Constant c = 1900 J/(kg K): 100 kJ/kg above 463.15 K is 515.78 K; the entropy c ln(T/T0) leads there, too."""
    oil = incompressible("oil", density=870.0, specific_heat=1900.0, limits=(273.15, 473.15))
    enthalpy = float(oil.at(pressure=4e5, temperature=463.15).specific_enthalpy) + 100e3
    with pytest.raises(RangeError, match=r"473.15 K \(0 degC to 200 degC\); .* about 515.8 K \(242.6 degC\)"):
        oil.at(pressure=4e5, specific_enthalpy=enthalpy)
    entropy = float(oil.at(pressure=4e5, temperature=463.15).specific_entropy) + 1900.0 * math.log(515.78 / 463.15)
    with pytest.raises(RangeError, match=r"about 515.8 K"):
        oil.at(pressure=4e5, specific_entropy=entropy)
    with pytest.raises(RangeError) as far:
        oil.at(pressure=4e5, specific_enthalpy=1e9)
    assert "about" not in str(far.value)

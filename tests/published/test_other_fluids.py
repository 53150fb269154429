"""Values of other fluids' reference equations.

Sources beside each; where a value was not read in the publication it says so. Computed values round to the digits
given.
"""

from __future__ import annotations

import numpy as np
import pytest

from reportgen.fluids import real_fluid


def test_propane_check_point_of_lemmon_mclinden_wagner_2009() -> None:
    """doi:10.1021/je900217v, from memory: 300 K, 12 mol/L.

    The ideal part is carried with its temperatures divided by the critical one and rounded to seven digits, which
    leaves heat capacities 6e-8 off the printed ones; the residual part, seen in the pressure, is exact.
    """
    fluid = real_fluid("propane")
    state = fluid.at(temperature=300.0, density=12e3 * fluid.molar_mass)
    assert state.pressure / 1e6 == pytest.approx(19.053797, abs=5e-7)
    assert state.isochoric_heat_capacity * fluid.molar_mass == pytest.approx(73.972542, rel=1e-7)
    assert state.isobaric_heat_capacity * fluid.molar_mass == pytest.approx(108.61529, rel=1e-7)
    assert state.speed_of_sound == pytest.approx(958.40520, rel=1e-7)


def test_nitrogen_of_span_et_al_2000() -> None:
    """doi:10.1063/1.1349047, from memory: saturation at 100 K; 1000 K, 50 MPa."""
    fluid = real_fluid("nitrogen")
    mass = fluid.molar_mass
    liquid, _ = fluid.saturation(temperature=100.0)
    assert liquid.pressure / 1e6 == pytest.approx(0.77827, abs=5e-6)
    assert liquid.density / mass / 1e3 == pytest.approx(24.608, abs=5e-4)
    assert liquid.specific_enthalpy * mass == pytest.approx(-2050.8, abs=0.05)
    assert liquid.specific_entropy * mass == pytest.approx(94.576, abs=5e-4)
    gas = fluid.at(temperature=1000.0, pressure=50e6)
    assert gas.specific_entropy * mass == pytest.approx(176.14, abs=5e-3)
    assert gas.specific_enthalpy * mass == pytest.approx(31241, abs=0.5)


def test_carbon_dioxide_of_span_wagner_1996() -> None:
    """doi:10.1063/1.555991; values of an independent library, not read in the paper. Zero: ideal gas, 298.15 K, 101
    325 Pa.
    """
    fluid = real_fluid("carbon dioxide")
    liquid, _ = fluid.saturation(temperature=300.0)
    assert liquid.pressure / 1e6 == pytest.approx(6.71308, abs=5e-6)
    assert liquid.density == pytest.approx(679.24, abs=5e-3)
    assert liquid.specific_enthalpy / 1e3 == pytest.approx(-223.40, abs=5e-3)
    assert liquid.specific_entropy / 1e3 == pytest.approx(-1.4631, abs=5e-5)
    liquid, vapour = fluid.saturation(temperature=216.592)
    assert liquid.pressure / 1e6 == pytest.approx(0.51796, abs=5e-6)
    assert liquid.specific_entropy / 1e3 == pytest.approx(-2.2177, abs=5e-5)
    assert vapour.specific_entropy / 1e3 == pytest.approx(-0.59999, abs=5e-6)


def test_air_bubble_and_dew_pressure_of_lemmon_et_al_2000() -> None:
    """doi:10.1063/1.1285884, from memory: 100 K."""
    bubble, dew = real_fluid("air").saturation(temperature=100.0)
    assert bubble.pressure / 1e6 == pytest.approx(0.66313, abs=5e-6)
    assert dew.pressure / 1e6 == pytest.approx(0.56742, abs=5e-6)
    assert bubble.density > dew.density


@pytest.mark.parametrize(
    ("name", "temperature_listed"),
    # True critical temperatures of the equations, computed by an independent library for its own saturation curves
    [
        ("R134a", 374.2119665849513),
        ("oxygen", 154.59938983528554),
        ("methane", 190.56400265128698),
        ("propane", 369.8900089509634),
        ("ammonia", 405.55999997326353),
    ],
)
def test_true_critical_point_where_slope_and_curvature_of_the_isotherm_vanish(
    name: str, temperature_listed: float
) -> None:
    fluid = real_fluid(name)
    critical = fluid.limits.critical_point
    assert critical is not None
    assert critical.temperature == pytest.approx(temperature_listed, rel=1e-11)
    density = critical.density * np.array([0.999, 1.0, 1.001])
    slope = fluid._equation.properties(np.full(3, critical.temperature), density).pressure_density
    scale = fluid.gas_constant * critical.temperature
    assert abs(slope[1]) / scale < 1e-9
    assert slope[0] > slope[1] < slope[2]

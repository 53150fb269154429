"""IAPWS R6-95(2018), "Revised Release on the IAPWS Formulation 1995", Tables 6, 7 and 8, to every printed digit.

The printed values stand here from memory; each is also confirmed against two independent programs (`iapws`,
`CoolProp`).
"""

from __future__ import annotations

from decimal import Decimal

import numpy as np
import pytest

from reportgen.fluids import real_fluid

WATER = real_fluid("water")

#: Table 6: T [K], ρ [kg/m3], then φ, φ_δ, φ_δδ, φ_τ, φ_ττ, φ_δτ of the ideal and of the residual part.
TABLE_6_LISTED = {
    (500.0, 838.025): (
        ("2.04797733", "0.384236747", "-0.147637878", "9.04611106", "-1.93249185", "0"),
        ("-3.42693206", "-0.364366650", "0.856063701", "-5.81403435", "-2.23440737", "-1.12176915"),
    ),
    (647.0, 358.0): (
        ("-1.56319605", "0.899441341", "-0.808994726", "9.80343918", "-3.43316334", "0"),
        ("-1.21202657", "-0.714012024", "0.475730696", "-3.21722501", "-9.96029507", "-1.33214720"),
    ),
}

#: Table 7: T [K], ρ [kg/m3] -> p [MPa], c_v [kJ/(kg K)], w [m/s], s [kJ/(kg K)].
TABLE_7_LISTED = (
    (300.0, 996.556, "0.0992418352", "4.13018112", "1501.51914", "0.393062643"),
    (300.0, 1005.308, "20.0022515", "4.06798347", "1534.92501", "0.387405401"),
    (300.0, 1188.202, "700.004704", "3.46135580", "2443.57992", "0.132609616"),
    (500.0, 0.435, "0.0999679423", "1.50817541", "548.314253", "7.94488271"),
    (500.0, 4.532, "0.999938125", "1.66991025", "535.739001", "6.82502725"),
    (500.0, 838.025, "10.0003858", "3.22106219", "1271.28441", "2.56690919"),
    (500.0, 1084.564, "700.000405", "3.07437693", "2412.00877", "2.03237509"),
    (647.0, 358.0, "22.0384756", "6.18315728", "252.145078", "4.32092307"),
    (900.0, 0.241, "0.100062559", "1.75890657", "724.027147", "9.16653194"),
    (900.0, 52.615, "20.0000690", "1.93510526", "698.445674", "6.59070225"),
    (900.0, 870.769, "700.000006", "2.66422350", "2019.33608", "4.17223802"),
)

#: Table 8: T [K] -> p [MPa], ρ' and ρ'' [kg/m3], h' and h'' [kJ/kg], s' and s'' [kJ/(kg K)].
TABLE_8_LISTED = {
    275.0: (
        "0.000698451167",
        "999.887406",
        "0.00550664919",
        "7.75972202",
        "2504.28995",
        "0.0283094670",
        "9.10660121",
    ),
    450.0: ("0.932203564", "890.341250", "4.81200360", "749.161585", "2774.41078", "2.10865845", "6.60921221"),
    625.0: ("16.9082693", "567.090385", "118.290280", "1686.26976", "2550.71625", "3.80194683", "5.18506121"),
}


def assert_printed(value: float, listed: str) -> None:
    """The value rounds to the printed number, digit for digit."""
    place = Decimal(listed).as_tuple().exponent
    assert Decimal(repr(float(value))).quantize(Decimal((0, (1,), int(place)))) == Decimal(listed)


@pytest.mark.parametrize("point", TABLE_6_LISTED)
def test_table_6_reduced_helmholtz_energy_and_derivatives(point: tuple[float, float]) -> None:
    temperature, density = point
    equation = WATER._equation
    delta = np.array([density / equation.reducing_density])
    tau = np.array([equation.reducing_temperature / temperature])
    for part, listed in zip(
        (equation.ideal(delta, tau), equation.residual(delta, tau)), TABLE_6_LISTED[point], strict=True
    ):
        plain = (
            part.value,
            part.delta / delta,
            part.delta_delta / delta**2,
            part.tau / tau,
            part.tau_tau / tau**2,
            part.delta_tau / (delta * tau),
        )
        for value, printed in zip(plain, listed, strict=True):
            assert_printed(float(value[0]), printed)


@pytest.mark.parametrize("row", TABLE_7_LISTED, ids=lambda row: f"{row[0]:g}K-{row[1]:g}kg/m3")
def test_table_7_single_phase(row: tuple[float, float, str, str, str, str]) -> None:
    temperature, density, *listed = row
    state = WATER.at(temperature=temperature, density=density)
    found = (
        state.pressure / 1e6,
        state.isochoric_heat_capacity / 1e3,
        state.speed_of_sound,
        state.specific_entropy / 1e3,
    )
    for value, printed in zip(found, listed, strict=True):
        assert_printed(value, printed)


@pytest.mark.parametrize("temperature", TABLE_8_LISTED)
def test_table_8_saturation(temperature: float) -> None:
    liquid, vapour = WATER.saturation(temperature=temperature)
    found = (
        liquid.pressure / 1e6,
        liquid.density,
        vapour.density,
        liquid.specific_enthalpy / 1e3,
        vapour.specific_enthalpy / 1e3,
        liquid.specific_entropy / 1e3,
        vapour.specific_entropy / 1e3,
    )
    for value, printed in zip(found, TABLE_8_LISTED[temperature], strict=True):
        assert_printed(value, printed)


@pytest.mark.parametrize("row", TABLE_7_LISTED, ids=lambda row: f"{row[0]:g}K-{row[1]:g}kg/m3")
def test_table_7_as_recalled_agrees_with_two_other_programs(row: tuple[float, float, str, str, str, str]) -> None:
    iapws = pytest.importorskip("iapws")
    library = pytest.importorskip("CoolProp.CoolProp")
    temperature, density, *listed = row
    other = iapws.IAPWS95(T=temperature, rho=density)
    state = library.AbstractState("HEOS", "Water")
    state.update(library.DmassT_INPUTS, density, temperature)
    first = (other.P, other.cv, other.w, other.s)
    second = (state.p() / 1e6, state.cvmass() / 1e3, state.speed_sound(), state.smass() / 1e3)
    for found in (first, second):
        for value, printed in zip(found, listed, strict=True):
            # `iapws` carries fewer digits of the gas constant's quotient; two units of the last printed digit
            place = int(Decimal(printed).as_tuple().exponent)
            assert abs(value - float(printed)) <= 2 * 10.0**place

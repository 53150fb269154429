"""Melting lines of the fluids that have one."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest

from reportgen.fluids.real import catalogue
from reportgen.fluids.real.melting import MeltingLine

WITH_LINE = tuple(name for name in catalogue.names() if catalogue.find(name)[0]["melting_line"])


def line_of(name: str) -> MeltingLine:
    return MeltingLine(catalogue.find(name)[0]["melting_line"])


def at(name: str, temperature: float) -> float:
    return float(line_of(name).pressure(np.array([temperature]))[0])


def test_thirty_fluids_have_a_line() -> None:
    assert len(WITH_LINE) == 30


@pytest.mark.parametrize("name", WITH_LINE)
def test_lines_rise_and_begin_at_the_triple_point(name: str) -> None:
    """The first pressure lies at that of the triple point, or above: never under it by more than the 0.4 % by which
    publications of line and equation differ there, so that no saturated liquid is called solid.
    """
    data, _ = catalogue.find(name)
    line = line_of(name)
    temperature = np.linspace(line.minimum_temperature, line.maximum_temperature, 3000)
    pressure = line.pressure(temperature)
    # parahydrogen's parts meet with a fall of 0.2 %
    assert (np.diff(pressure) > (-3e-3 if name == "parahydrogen" else 0.0) * pressure[1:]).all()
    start, lowest = data["lower_end"]["temperature"], data["lower_end"]["pressure"]
    assert line.minimum_temperature <= start + 1e-9
    begins = at(name, start)
    assert begins > 0.94 * lowest
    # a hundredth of a kelvin further, it lies above saturation in any case
    assert at(name, start + 0.01) > 1.001 * lowest
    # beyond the end of the line, or above the largest pressure of the equation, nothing is bounded
    assert np.isinf(line.pressure(np.array([line.maximum_temperature + 1.0]))[0])
    back = line.temperature(pressure[10:-10])
    assert back == pytest.approx(temperature[10:-10], rel=1e-3 if name == "parahydrogen" else 1e-8)


def test_parts_meet() -> None:
    """Propylene's published line has a step of 15 % at 129 K, that of the source; the others meet within 0.3 %."""
    for name in WITH_LINE:
        parts = catalogue.find(name)[0]["melting_line"]["parts"]
        for first, second in pairwise(parts):
            end = np.array([first["maximum_temperature"]], dtype=float)
            one = MeltingLine({"parts": [first]}).pressure(end)
            other = MeltingLine({"parts": [{**second, "minimum_temperature": 0.0}]}).pressure(end)
            assert one == pytest.approx(other, rel=0.16 if name == "propylene" else 3e-3), name


def test_hydrogen_by_the_equation_printed_in_the_abstract() -> None:
    """Datchi, Loubeyre and LeToullec 2000, doi:10.1103/PhysRevB.61.6535, abstract: T = 14.025 (1 + P/0.0286)^0.589
    exp(-4.6e-3 P), P in GPa, T in K.
    """
    for gigapascal in (0.05, 0.5, 1.5):
        t = 14.025 * (1 + gigapascal / 0.0286) ** 0.589 * np.exp(-4.6e-3 * gigapascal)
        assert at("hydrogen", t) == pytest.approx(gigapascal * 1e9, rel=1e-10)
    # parahydrogen's line is of an independent publication (Younglove 1982)
    for t in (16.0, 20.0, 30.0, 40.0):
        assert at("hydrogen", t) == pytest.approx(at("parahydrogen", t), abs=1.6e6)


def test_helium_melts_at_the_measured_pressure() -> None:
    """Mills and Grilly 1955, doi:10.1103/PhysRev.99.480, from memory: p = -17.80 + 17.31 (T/K)^1.555 kg/cm2."""
    for t in (3.0, 4.2, 10.0, 30.0):
        assert at("helium", t) == pytest.approx((-17.80 + 17.31 * t**1.555) * 98066.5, rel=2e-3)


def test_water_passes_from_ice_v_to_ice_vi_at_the_stated_point() -> None:
    """IAPWS R14-08(2011): 632.4 MPa at 273.31 K; ice VI at 300 K by its equation, T* = 273.31 K, p* = 632.4 MPa,
    1 - 1.07476 (1 - theta^4.6).
    """
    assert at("water", 273.31) == pytest.approx(632.4e6, rel=1e-5)
    expected = 632.4e6 * (1 - 1.07476 * (1 - (300.0 / 273.31) ** 4.6))
    assert at("water", 300.0) == pytest.approx(expected, rel=1e-12)

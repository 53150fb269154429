"""Cubic equations against the library ``thermo``: a sample of tests/benchmarks/cubic_table.py, and real fluids."""

from __future__ import annotations

import numpy as np
import pytest

from reportgen import fluids
from tests.benchmarks.cubic_table import MIXTURES, PURE, compare_mixture, compare_pure

#: Relative deviation from the library with the same constants.
BAR = 1e-8
#: Found: 5e-14 and, for saturation pressures, 1e-12. A tenth of the bar shows what has slipped long before it.
FOUND = 1e-9


@pytest.mark.parametrize(("name", "equation"), PURE[::3], ids=lambda value: str(value))
def test_pure_substances_agree_with_the_library(name: str, equation: str) -> None:
    worst = compare_pure(name, equation, 40)
    assert set(worst.deviations) == {"volume", "Z", "h", "s", "c_p", "ln φ", "p_sat"}
    assert max(worst.deviations.values()) < min(BAR, FOUND), worst


@pytest.mark.parametrize("name", MIXTURES)
def test_mixtures_and_their_flashes_agree_with_the_library(name: str) -> None:
    worst = compare_mixture(name, 24, seed=3)
    assert worst.counts["two-phase"] >= 4
    assert worst.counts["one phase"] >= 2
    assert "phase count: WRONG HERE" not in worst.counts, worst
    assert {"volume", "h", "s", "c_p", "Δ ln f", "share", "x", "y"} <= set(worst.deviations)
    assert max(worst.deviations.values()) < min(BAR, FOUND), worst


@pytest.mark.parametrize("name", ["CO2", "propane", "N2", "CH4", "NH3", "CH2F2", "n-butane"])
@pytest.mark.parametrize("equation", ["Peng-Robinson", "Soave-Redlich-Kwong"])
def test_saturation_pressures_are_near_those_of_the_real_fluid(name: str, equation: str) -> None:
    """An equation of two parameters meets measured vapour pressures within 3 % from 0.65 Tc on."""
    cubic = fluids.cubic(name, equation=equation)  # type: ignore[arg-type]
    real = fluids.real_fluid(name)
    critical = cubic.limits.critical_point
    assert critical is not None
    temperature = np.linspace(
        max(0.65 * critical.temperature, 1.01 * real.limits.minimum_temperature), 0.99 * critical.temperature, 9
    )
    ratio = cubic.saturation(temperature=temperature)[0].pressure / real.saturation(temperature=temperature)[0].pressure
    assert np.max(np.abs(ratio - 1.0)) < 0.03


@pytest.mark.parametrize("equation", ["Peng-Robinson", "Soave-Redlich-Kwong"])
def test_translated_liquids_are_nearer_to_the_real_fluid(equation: str) -> None:
    for name in ("propane", "n-butane", "n-octane"):
        real = fluids.real_fluid(name).at(temperature=280.0, pressure=2e6).density
        plain, moved = (
            fluids.cubic(name, equation=equation, volume_translation=how).at(temperature=280.0, pressure=2e6).density  # type: ignore[arg-type]
            for how in (None, "Peneloux")
        )
        assert abs(moved / real - 1.0) < 0.03
        if equation == "Soave-Redlich-Kwong":
            assert abs(moved / real - 1.0) < 0.5 * abs(plain / real - 1.0)

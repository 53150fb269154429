"""Data of the figures: smooth, closed, true to the path."""

from __future__ import annotations

import numpy as np
import pytest

from reportgen.evaluation.figures import isobar, process_path, saturation_dome
from reportgen.fluids.ideal_gases import ideal_gas

AIR = ideal_gas({"N2": 0.7808, "O2": 0.2095, "Ar": 0.0097})


def point(pressure: float, temperature: float) -> dict[str, float]:
    state = AIR.at(pressure=pressure, temperature=temperature)
    names = ("pressure", "temperature", "specific_enthalpy", "specific_entropy")
    return {name: float(getattr(state, name)) for name in names}


def test_an_ideal_gas_has_no_dome() -> None:
    assert saturation_dome(AIR) is None


def test_an_isobar_runs_along_one_pressure() -> None:
    low, high = point(5e5, 300.0)["specific_entropy"], point(5e5, 600.0)["specific_entropy"]
    curve = isobar(AIR, 5e5, low, high)
    assert len(curve["entropy"]) == len(curve["temperature"]) >= 60
    pressure = AIR.at(temperature=curve["temperature"], specific_entropy=curve["entropy"]).pressure
    assert pressure == pytest.approx(np.full(len(curve["entropy"]), 5e5), rel=1e-9)
    assert (curve["temperature"][0], curve["temperature"][-1]) == pytest.approx((300.0, 600.0), rel=1e-9)


def test_an_isobar_ends_where_the_model_ends() -> None:
    low = point(5e5, 300.0)["specific_entropy"]
    curve = isobar(AIR, 5e5, low - 5000.0, low)
    assert 0 < len(curve["entropy"]) < 90
    assert min(curve["temperature"]) >= AIR.limits.minimum_temperature - 1e-6


def test_a_throttled_ideal_gas_keeps_its_temperature() -> None:
    start = point(8e5, 350.0)
    curve = process_path(AIR, "enthalpy", start, point(2e5, 350.0))
    assert curve["temperature"] == pytest.approx([350.0] * len(curve["temperature"]), rel=1e-9)
    assert curve["entropy"][-1] - curve["entropy"][0] == pytest.approx(AIR.gas_constant * np.log(4.0), rel=1e-9)


def test_a_compression_is_curved_and_ends_in_its_states() -> None:
    start, end = point(1e5, 290.0), point(8e5, 570.0)
    curve = process_path(AIR, "entropy", start, end)
    assert (curve["temperature"][0], curve["entropy"][0]) == (start["temperature"], start["specific_entropy"])
    assert (curve["temperature"][-1], curve["entropy"][-1]) == (end["temperature"], end["specific_entropy"])
    entropy, temperature = np.array(curve["entropy"]), np.array(curve["temperature"])
    straight = np.interp(entropy, entropy[[0, -1]], temperature[[0, -1]])
    assert np.max(np.abs(temperature - straight)) > 3.0
    assert np.all(np.diff(temperature) > 0)


def test_heating_at_one_pressure_follows_the_isobar() -> None:
    curve = process_path(AIR, "enthalpy", point(3e5, 300.0), point(3e5, 800.0))
    pressure = AIR.at(temperature=curve["temperature"], specific_entropy=curve["entropy"]).pressure
    assert pressure == pytest.approx(np.full(len(curve["entropy"]), 3e5), rel=1e-9)

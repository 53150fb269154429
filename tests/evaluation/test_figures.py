"""Data of the figures: smooth, closed, true to the path."""

from __future__ import annotations

import re

import numpy as np
import pytest
from calculations import VALVE, evaluated

from reportgen.evaluation.figures import isobar, saturation_dome
from reportgen.fluids.gases.gas import ideal_gas

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


SPLITTER = (
    VALVE[: VALVE.index("[states.2]")]
    + """
[states.2]
fluid     = "air"
mass_flow = "0.2 kg/s"

[states.3]
fluid = "air"

[equipment.S]
kind    = "splitter"
inlet   = "1"
outlets = ["2", "3"]
"""
)


def test_no_bars_are_drawn_where_no_work_is_lost() -> None:
    assert "lost-work-bars" in {figure["kind"] for figure in evaluated(VALVE).data["figures"]}
    captions = {figure["kind"]: figure["caption"] for figure in evaluated(VALVE).data["figures"]}
    assert captions["lost-work-bars"].endswith("with its expanded uncertainty.") == ("±" in VALVE)
    certain = {figure["kind"]: figure["caption"] for figure in evaluated(re.sub(' ±[^"]*', "", VALVE)).data["figures"]}
    assert "uncertainty" not in certain["lost-work-bars"]
    assert "lost-work-bars" not in {figure["kind"] for figure in evaluated(SPLITTER).data["figures"]}

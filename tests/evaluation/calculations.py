"""Calculation files for the tests, evaluated whole."""

from __future__ import annotations

import functools
import tempfile
from pathlib import Path

from reportgen import spec
from reportgen.evaluation import evaluate
from reportgen.record import Record

PROJECTS = Path(__file__).parents[2] / "projects"

HEAD = """
[calculation]
number   = "TEST-1"
title    = "Invented for a test"
revision = "A"
date     = 2026-01-02
owner    = "Nobody"
status   = "preliminary"
units    = "SI"

[surroundings]
temperature = "15 degC"
pressure    = "1.013 bar"
"""

AIR = """
[fluids.air]
model         = "ideal-gas"
substance     = "air"
heat_capacity = "1.005 kJ/(kg*K)"
"""

VALVE = (
    HEAD
    + AIR
    + """
[states.1]
fluid       = "air"
pressure    = "8.0 bar(a) ± 0.1 bar"
temperature = "40 degC ± 1 K"
mass_flow   = "0.5 kg/s ± 2 %"

[states.2]
fluid    = "air"
pressure = "2.0 bar(a) ± 0.05 bar"

[equipment.V]
kind   = "throttling-valve"
inlet  = "1"
outlet = "2"
"""
)

COMPRESSOR = (
    HEAD
    + AIR
    + """
[states.1]
fluid       = "air"
pressure    = "1.0 bar(a) ± 0.01 bar"
temperature = "20 degC ± 1 K"
mass_flow   = "0.5 kg/s ± 2 %"

[states.2]
fluid    = "air"
pressure = "6.0 bar(a) ± 0.06 bar"

[equipment.C]
kind                  = "compressor"
inlet                 = "1"
outlet                = "2"
isentropic_efficiency = "80 % ± 2 %"
"""
)


def evaluated(text: str) -> Record:
    """Record of a calculation file given as text."""
    with tempfile.TemporaryDirectory() as folder:
        (Path(folder) / "calculation.toml").write_text(text, encoding="utf-8", newline="\n")
        return evaluate(spec.read(Path(folder)))


@functools.cache
def project(name: str) -> Record:
    """Record of a demo project; not to be changed."""
    folder = PROJECTS / name
    return evaluate(spec.read(folder), folder)


RECYCLE = (
    HEAD
    + AIR
    + """
[states.1]
fluid       = "air"
pressure    = "1.2 bar(a)"
temperature = "20 degC ± 1 K"
mass_flow   = "1.0 kg/s ± 1 %"

[states.2]
fluid    = "air"
pressure = "1.2 bar(a)"

[states.3]
fluid    = "air"
pressure = "1.2 bar(a)"

[states.4]
fluid     = "air"
pressure  = "1.2 bar(a)"

[states.5]
fluid     = "air"
pressure  = "1.2 bar(a)"
mass_flow = "0.4 kg/s ± 2 %"

[equipment.M-1]
kind   = "mixer"
inlets = ["1", "5"]
outlet = "2"

[equipment.H-1]
kind                 = "heater"
inlet                = "2"
outlet               = "3"
heat                 = "50 kW ± 1 kW"
boundary_temperature = "150 degC"

[equipment.S-1]
kind    = "splitter"
inlet   = "3"
outlets = ["4", "5"]
"""
)

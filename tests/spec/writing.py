"""Calculation folders for tests."""

from __future__ import annotations

from pathlib import Path

from reportgen import spec
from reportgen.errors import Fault, InputError

TITLE = """\
[calculation]
number   = "BR-TH-1"
title    = "Test"
revision = "A"
date     = 2026-01-20
owner    = "Bramley Steam"
status   = "preliminary"
"""
SURROUNDINGS = """
[surroundings]
temperature = "15 degC"
pressure    = "1.013 bar"
"""
FLUIDS = """
[fluids.steam]
model     = "real-fluid"
substance = "water"

[fluids.air]
model       = "ideal-gas"
basis       = "mole"
composition = { N2 = 0.79, O2 = "21 %" }
"""
HEAD = TITLE + SURROUNDINGS + FLUIDS


def write(folder: Path, text: str) -> Path:
    (folder / "calculation.toml").write_text(text, encoding="utf-8", newline="\n")
    return folder


def read(folder: Path, text: str) -> spec.Calculation:
    return spec.read(write(folder, text))


def faults(folder: Path, text: str) -> list[Fault]:
    """The faults of a text; none when it can be read."""
    try:
        read(folder, text)
    except InputError as error:
        return list(error.faults)
    return []

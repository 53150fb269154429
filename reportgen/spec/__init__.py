"""The calculation file: schema, reading with line numbers, JSON Schema."""

from reportgen.spec.calculation import (
    Assumption,
    Calculation,
    CautionAdjustment,
    Correlation,
    Criterion,
    EquipmentSpec,
    FluidSpec,
    Input,
    Limits,
    Narrative,
    Reference,
    Revision,
    StateSpec,
    TrainSpec,
    Uncertainty,
)
from reportgen.spec.folder import CALCULATION_FILE, find
from reportgen.spec.json_schema import json_schema
from reportgen.spec.reading import read
from reportgen.spec.starting import start

__all__ = [
    "CALCULATION_FILE",
    "Assumption",
    "Calculation",
    "CautionAdjustment",
    "Correlation",
    "Criterion",
    "EquipmentSpec",
    "FluidSpec",
    "Input",
    "Limits",
    "Narrative",
    "Reference",
    "Revision",
    "StateSpec",
    "TrainSpec",
    "Uncertainty",
    "find",
    "json_schema",
    "read",
    "start",
]

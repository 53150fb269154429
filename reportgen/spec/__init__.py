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
from reportgen.spec.reading import read

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
    "read",
]

"""What every table of the file has in common: its base class, and descriptions that name the units."""

from __future__ import annotations

from pydantic import BaseModel, ConfigDict

from reportgen.names import DIMENSIONS
from reportgen.quantities import usual_units

__all__ = ["Table", "with_unit"]


class Table(BaseModel):
    """A table of the file: unknown keys are faults, types are not bent."""

    model_config = ConfigDict(strict=True, extra="forbid", frozen=True)


def with_unit(text: str, dimensions: tuple[str, ...]) -> str:
    """A description with the units a value may be written in and the one it is kept in."""
    units = [unit for dimension in dimensions for unit in usual_units(dimension)]
    kept = " or ".join(DIMENSIONS[dimension] for dimension in dimensions)
    if kept == "1":
        return f"{text} [1]. A number or %."
    return f"{text} [{kept}]. Units: {', '.join(units)}."

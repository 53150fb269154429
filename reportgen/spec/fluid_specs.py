"""Fluids as plain data, from their validated tables."""

from __future__ import annotations

from typing import Any

from reportgen.quantities import Quantity
from reportgen.spec.calculation import (
    CriticalConstants,
    FluidSpec,
    HeatPolynomial,
    HeatTable,
    Interaction,
)
from reportgen.spec.fluid_schema import PolynomialTable
from reportgen.spec.second_sources import second_sources
from reportgen.spec.source import Source

__all__ = ["fluid_spec"]

#: SI value of the units in which the coefficients of a polynomial may be counted [J/(kg K)].
_PER_UNIT = {"J/(kg*K)": 1.0, "kJ/(kg*K)": 1e3}


def fluid_spec(source: Source, name: str, table: Any) -> FluidSpec:
    """A fluid from its validated table."""
    line, _ = source.place(("fluids", name), "key")
    common: dict[str, Any] = {"second_sources": second_sources(table.second_source) or ()}
    match table.model:
        case "real-fluid":
            common |= {"substance": table.substance, "reference_state": table.reference_state}
        case "ideal-gas":
            constant = isinstance(table.heat_capacity, Quantity)
            common |= _composed(table) | {"heat_capacity": table.heat_capacity.value if constant else None}
            common |= {"products_of": table.products_of, "chemistry": table.chemistry or "complete"}
        case "cubic":
            common |= _composed(table) | _cubic(table)
        case "incompressible":
            common |= _incompressible(table)
    return FluidSpec(name, table.model, line, **common)


def _composed(table: Any) -> dict[str, Any]:
    composition = table.composition and {part: fraction.value for part, fraction in table.composition.items()}
    return {"substance": table.substance, "composition": composition, "basis": table.basis}


def _cubic(table: Any) -> dict[str, Any]:
    translation = table.volume_translation
    if isinstance(translation, dict):
        translation = {part: shift.value for part, shift in translation.items()}
    return {
        "equation": table.equation,
        "critical": {
            part: CriticalConstants(row.temperature.value, row.pressure.value, float(row.acentric_factor), row.source)
            for part, row in (table.critical or {}).items()
        },
        "interactions": tuple(
            Interaction(row.between[0], row.between[1], float(row.coefficient), row.source)
            for row in table.interaction or ()
        ),
        "volume_translation": translation,
    }


def _incompressible(table: Any) -> dict[str, Any]:
    heat = table.specific_heat
    limits = [limit and limit.value for limit in (table.minimum_temperature, table.maximum_temperature)]
    specific_heat: float | HeatPolynomial | HeatTable
    if isinstance(heat, Quantity):
        specific_heat = heat.value
    elif isinstance(heat, PolynomialTable):
        factor = _PER_UNIT[heat.unit]
        about = heat.about.value if heat.about is not None else 0.0
        specific_heat = HeatPolynomial(tuple(factor * number for number in heat.coefficients), about)
    else:
        specific_heat = HeatTable(
            tuple(row.temperature.value for row in heat), tuple(row.specific_heat.value for row in heat)
        )
        ends = (specific_heat.temperatures[0], specific_heat.temperatures[-1])
        limits = [end if limit is None else limit for limit, end in zip(limits, ends, strict=True)]
    return {
        "substance": table.substance,
        "density": table.density.value,
        "specific_heat": specific_heat,
        "phase": table.phase,
        "temperature_range": tuple(limits),
        "source": table.source,
    }

"""Fluids of the file: what their tables must hold together, and what they are read as."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

from pydantic import TypeAdapter, ValidationError

from reportgen.errors import Fault, InputError
from reportgen.quantities import Quantity
from reportgen.spec.calculation import FluidSpec
from reportgen.spec.fields import QuantityOf
from reportgen.spec.schema import FluidTable
from reportgen.spec.source import Location, Source

__all__ = ["FluidCheck", "ask_the_models", "check_fluids", "fluid_spec"]

#: Makes the property model of a fluid, or raises InputError.
FluidCheck = Callable[[FluidSpec], object]

_FRACTION_TOLERANCE = 1e-6


def check_fluids(source: Source, context: Mapping[str, float]) -> None:
    """Substance or composition, and fractions that add up."""
    for fluid, node in source.table("fluids").items():
        if source.text("fluids", fluid, "model") != "ideal-gas":
            continue
        has_substance, has_composition = "substance" in node.table, "composition" in node.table
        either = "either substance or composition with basis"
        if has_substance and has_composition:
            both = "Both substance and composition are given."
            source.report(("fluids", fluid, "composition"), both, at="key", expected=either)
        elif not has_substance and not has_composition:
            source.miss(("fluids", fluid), "No substance is given.", expected=either)
        if has_composition and "basis" not in node.table:
            source.miss(
                ("fluids", fluid, "composition"),
                "The composition does not say what its fractions count.",
                expected='basis = "mole" or basis = "mass"',
            )
        if has_substance and not has_composition and "basis" in node.table:
            source.report(
                ("fluids", fluid, "basis"),
                "A single substance has no basis.",
                at="key",
                found="basis",
                expected="basis with composition only",
            )
        _check_sum(source, fluid, context)


def _check_sum(source: Source, fluid: str, context: Mapping[str, float]) -> None:
    location = ("fluids", fluid, "composition")
    fractions = source.table(*location)
    marker = QuantityOf(("ratio",))
    read = [marker.read_at(source, (*location, name), context) for name in fractions]
    total = sum(quantity.value for quantity in read if quantity is not None)
    node = source.node(location)
    complete = node is not None and len(fractions) == len(node.table) and None not in read
    if isinstance(node.value if node else None, dict) and complete and abs(total - 1.0) > _FRACTION_TOLERANCE:
        source.report(
            location,
            "The fractions do not add up to 1.",
            found=f"a sum of {total:.7g}",
            expected=f"1 within {_FRACTION_TOLERANCE:g}",
        )


def fluid_spec(source: Source, name: str, table: Any) -> FluidSpec:
    """A fluid from its validated table."""
    line, _ = source.place(("fluids", name), "key")
    if table.model == "real-fluid":
        return FluidSpec(name, table.model, line, substance=table.substance, reference_state=table.reference_state)
    constant = isinstance(table.heat_capacity, Quantity)
    composition = table.composition and {part: fraction.value for part, fraction in table.composition.items()}
    return FluidSpec(
        name,
        table.model,
        line,
        substance=table.substance,
        composition=composition,
        basis=table.basis,
        heat_capacity=table.heat_capacity.value if constant else None,
    )


def ask_the_models(source: Source, context: Mapping[str, float], check_fluid: FluidCheck) -> None:
    """Note what the property models refuse in those fluids whose tables have no fault of their own."""
    reader: TypeAdapter[Any] = TypeAdapter(FluidTable)
    at_fault = {(fault.path or "").split(".")[1] for fault in source.faults if (fault.path or "").startswith("fluids.")}
    for name, node in source.table("fluids").items():
        if name in at_fault or source.crowded:
            continue
        try:
            check_fluid(fluid_spec(source, name, reader.validate_python(node.plain(), context=dict(context))))
        except ValidationError:
            continue  # reported by the validation of the whole file
        except InputError as error:
            for fault in error.faults:
                source.note(_key_of(source, name, fault), fault)


def _key_of(source: Source, name: str, fault: Fault) -> Location:
    """The key of a fluid that a fault without a path speaks of."""
    location = ("fluids", name)
    table = source.table(*location)
    named = [key for key in table if key != "model" and key.replace("_", " ") in fault.message]
    found = (fault.found or "").strip("'\"")
    if found in source.table(*location, "composition"):
        return (*location, "composition", found)
    if named and named[0] in table:
        return (*location, named[0])
    return (*location, "substance" if "substance" in table else "composition")

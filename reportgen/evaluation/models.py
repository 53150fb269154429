"""From what the file says of fluids and equipment to property models and the plant that the balances solve."""

from __future__ import annotations

import copy
from collections.abc import Mapping
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from reportgen import balances, fluids
from reportgen.errors import Fault, InputError, ReportgenError
from reportgen.evaluation.cautions.fluid_states import freezing_hint
from reportgen.names import name_of
from reportgen.quantities import Display

if TYPE_CHECKING:
    from reportgen.spec.calculation import Calculation, FluidSpec

__all__ = ["fluid_name", "located", "placed", "plant_of", "property_model", "property_models", "real_counterpart"]


def property_model(specification: FluidSpec, heat_capacity: float | None = None) -> Any:
    """Property model of one fluid of the file (``fluids.model.Fluid``).

    ``heat_capacity`` [J/(kg·K)] for an ideal gas; None for a variable one.
    """
    if specification.model == "real-fluid":
        return fluids.real_fluid(specification.substance or "", reference_state=specification.reference_state)
    return fluids.ideal_gas(
        specification.substance if specification.substance is not None else dict(specification.composition or {}),
        basis=specification.basis or "mole",
        heat_capacity="variable" if heat_capacity is None else heat_capacity,
    )


def property_models(calculation: Calculation) -> dict[str, Any]:
    """Property models of all fluids. Raises InputError with the place of every fluid that cannot be made."""
    models, faults = {}, []
    for identifier, specification in calculation.fluids.items():
        try:
            models[identifier] = _titled(identifier, property_model(specification, specification.heat_capacity))
        except ReportgenError as error:
            path = f"fluids.{identifier}"
            faults += [located(calculation, replace(fault, path=fault.path or path)) for fault in error.faults]
    if faults:
        raise InputError(faults)
    return models


def _titled(identifier: str, model: Any) -> Any:
    """The model; a mixture without a name of its own goes by the name that the file gives it."""
    if model.substance is not None or len(model.composition or {}) < 2:
        return model
    named = copy.copy(model)
    named.title = f"{identifier} (gas mixture)"
    return named


def fluid_name(identifier: str, title: str) -> str:
    """A fluid by its id in the file and what it is: ``steam (Water)``; once where the two are the same."""
    if title.casefold() == identifier.casefold():
        return identifier
    return title if title.startswith(f"{identifier} ") else f"{identifier} ({title})"


def plant_of(calculation: Calculation, models: Mapping[str, Any]) -> balances.Plant:
    """The plant as the balances take it."""
    return balances.Plant(
        fluids=dict(models),
        states={identifier: state.fluid for identifier, state in calculation.states.items()},
        equipment={
            tag: balances.EquipmentDefinition(kind=piece.kind, ports=piece.ports, options=piece.options)
            for tag, piece in calculation.equipment.items()
        },
        trains={
            identifier: balances.Train(train.title, train.equipment, train.alternative_to)
            for identifier, train in calculation.trains.items()
        },
    )


def real_counterpart(model: Any) -> Any:
    """Real fluid that an ideal gas can be tested against, or None where none of its composition is carried."""
    from reportgen.fluids.gases import catalogue as gas_catalogue

    name = gas_catalogue.real_counterpart(model, fluids.names())
    return None if name is None else fluids.real_fluid(name)


def placed(calculation: Calculation, error: ReportgenError, models: Mapping[str, Any]) -> ReportgenError:
    """The same error with file, line and column put to every fault that names a path.

    Numbers found are written in the units of display. Faults of carbon dioxide states without a hint of their own get
    that of its freezing.
    """
    display = Display(calculation.units)
    faults = []
    for fault in error.faults:
        if fault.numbers and fault.found is None:
            fault = replace(fault, found=", ".join(_shown(display, *number) for number in fault.numbers))
        parts = (fault.path or "").split(".")
        state = calculation.states.get(parts[1]) if parts[0] == "states" and len(parts) > 1 else None
        if state is not None and fault.hint is None:
            fault = replace(fault, hint=freezing_hint(models[state.fluid]))
        faults.append(located(calculation, fault))
    return type(error)(faults)


def _shown(display: Display, path: str, value: float) -> str:
    name = name_of(path)
    return f"{path} = {display.show(value, 'ratio' if name is None else name.dimension).text}"


def located(calculation: Calculation, fault: Fault) -> Fault:
    """The fault with the place of its path in the calculation file, unless it has one."""
    if fault.path is None or fault.line is not None:
        return fault
    return fault.at(*calculation.locate(fault.path))

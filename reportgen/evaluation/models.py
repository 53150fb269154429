"""From what the file says of fluids and equipment to property models and the plant that the balances solve."""

from __future__ import annotations

import copy
import math
from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen import balances, fluids
from reportgen.errors import Fault, InputError, ReportgenError
from reportgen.evaluation.cautions.fluid_states import freezing_hint
from reportgen.fluids import crosscheck
from reportgen.names import name_of
from reportgen.quantities import Display
from reportgen.spec.calculation import HeatPolynomial, HeatTable

if TYPE_CHECKING:
    from reportgen.spec.calculation import Calculation, EquipmentSpec, FluidSpec

__all__ = [
    "fluid_name",
    "located",
    "placed",
    "plant_of",
    "property_model",
    "property_models",
    "real_counterpart",
    "solved_models",
]


def property_model(specification: FluidSpec, heat_capacity: float | None = None) -> Any:
    """Property model of one fluid of the file (``fluids.model.Fluid``).

    ``heat_capacity`` [J/(kg·K)] for an ideal gas; None for a variable one.
    """
    match specification.model:
        case "real-fluid":
            return fluids.real_fluid(specification.substance or "", reference_state=specification.reference_state)
        case "cubic":
            return _cubic(specification)
        case "incompressible":
            return _incompressible(specification)
    return fluids.ideal_gas(
        _made_of(specification),
        basis=specification.basis or "mole",
        heat_capacity="variable" if heat_capacity is None else heat_capacity,
    )


def _made_of(specification: FluidSpec) -> str | dict[str, float]:
    """Substance, or fractions by substance."""
    if specification.substance is not None:
        return specification.substance
    return dict(specification.composition or {})


def _cubic(specification: FluidSpec) -> Any:
    assert specification.equation is not None  # the schema asks for it
    return fluids.cubic(
        _made_of(specification),
        equation=specification.equation,
        basis=specification.basis or "mole",
        critical={
            name: {
                "temperature": constants.temperature,
                "pressure": constants.pressure,
                "acentric_factor": constants.acentric_factor,
            }
            for name, constants in specification.critical.items()
        }
        or None,
        interaction={(pair.first, pair.second): pair.coefficient for pair in specification.interactions} or None,
        volume_translation=specification.volume_translation,
    )


def _incompressible(specification: FluidSpec) -> Any:
    heat = specification.specific_heat
    given: float | dict[str, Sequence[float]] | list[float]
    if isinstance(heat, HeatTable):
        given = {"temperature": heat.temperatures, "specific_heat": heat.specific_heats}
    elif isinstance(heat, HeatPolynomial):
        # From powers of T − about to powers of T, as the model has them.
        shifted = np.polynomial.Polynomial(heat.coefficients)(np.polynomial.Polynomial([-heat.about, 1.0]))
        given = [float(coefficient) for coefficient in shifted.coef]
    else:
        assert heat is not None  # the schema asks for it
        given = heat
    return fluids.incompressible(
        specification.substance or specification.id,
        density=specification.density or math.nan,
        specific_heat=given,
        phase=specification.phase,
        limits=specification.temperature_range,
        source=specification.source,
    )


def property_models(calculation: Calculation) -> dict[str, Any]:
    """Property models of all fluids. Raises InputError with the place of every fluid that cannot be made."""
    models: dict[str, Any] = {}
    faults: list[Fault] = []
    made = {name: each for name, each in calculation.fluids.items() if each.products_of is not None}
    for identifier, specification in calculation.fluids.items():
        if identifier in made:
            continue
        try:
            models[identifier] = _titled(identifier, property_model(specification, specification.heat_capacity))
        except ReportgenError as error:
            path = f"fluids.{identifier}"
            faults += [located(calculation, replace(fault, path=fault.path or path)) for fault in error.faults]
    if faults:
        raise InputError(faults)
    _add_products(calculation, models, made)
    return {identifier: models[identifier] for identifier in calculation.fluids}


def _add_products(calculation: Calculation, models: dict[str, Any], made: Mapping[str, FluidSpec]) -> None:
    """Add the gases of combustors, each after those of the combustors that feed its own."""
    from reportgen.fluids.reacting.product_gas import ProductGas

    pending = dict(made)
    while pending:
        ready = {name: each for name, each in pending.items() if not _feeds(calculation, name, each) & set(pending)}
        if not ready:
            first = next(iter(pending))
            fault = Fault(
                "The combustors feed each other, so that no composition can be told before the others.",
                f"fluids.{first}.products_of",
                found=", ".join(pending),
                expected="combustors in a row",
            )
            raise InputError(located(calculation, fault))
        faults = []
        for name, specification in ready.items():
            tag = str(specification.products_of)
            entering = {state: calculation.states[state].fluid for state in calculation.equipment[tag].ports["inlets"]}
            # what comes back from its own outlet brings nothing new
            streams = {state: models[fluid] for state, fluid in entering.items() if fluid != name}
            title = f"{name} (products of {tag})"
            try:
                models[name] = ProductGas(title, streams, specification.chemistry)
            except ReportgenError as error:
                path = f"equipment.{tag}.inlets"
                faults += [located(calculation, replace(fault, path=fault.path or path)) for fault in error.faults]
            del pending[name]
        if faults:
            raise InputError(faults)


def _feeds(calculation: Calculation, name: str, specification: FluidSpec) -> set[str]:
    """Fluids other than its own that enter the combustor of a fluid."""
    inlets = calculation.equipment[str(specification.products_of)].ports["inlets"]
    return {calculation.states[state].fluid for state in inlets} - {name}


def solved_models(calculation: Calculation, models: Mapping[str, Any], solution: Any) -> dict[str, Any]:
    """The models with the gases of combustors as their composition came out, base case, told as at the outlet."""
    found = dict(models)
    for name, specification in calculation.fluids.items():
        if specification.products_of is None:
            continue
        base = {path: solution.values[path][:1] for path in solution.mixtures.masses(name)}
        outlet = calculation.equipment[specification.products_of].ports["outlet"][0]
        point = (float(solution.values[f"states.{outlet}.{key}"][0]) for key in ("temperature", "pressure"))
        found[name] = solution.mixtures.model(name, base).told_at(*point)
    return found


def _titled(identifier: str, model: Any) -> Any:
    """The model; a mixture without a name of its own goes by the name that the file gives it."""
    if model.substance is not None or len(model.composition or {}) < 2:
        return model
    named = copy.copy(model)
    named.title = f"{identifier} ({'gas ' if model.kind == 'ideal-gas' else ''}mixture)"
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
        equipment=_definitions(calculation.equipment),
        processes=_definitions(calculation.processes),
        vessels=_definitions(calculation.vessels),
        trains={
            identifier: balances.Train(
                train.title, train.equipment, train.alternative_to, train.processes, train.purpose
            )
            for identifier, train in calculation.trains.items()
        },
    )


def _definitions(pieces: Mapping[str, EquipmentSpec]) -> dict[str, balances.EquipmentDefinition]:
    return {
        tag: balances.EquipmentDefinition(kind=piece.kind, ports=piece.ports, options=piece.options)
        for tag, piece in pieces.items()
    }


def real_counterpart(model: Any) -> Any:
    """Real fluid that a simpler model can be tested against, or None where none of its substance is carried.

    It counts from the zero of the ideal gases where that can be had, so that given enthalpies keep their meaning.
    """
    if (model.kind == "incompressible" and model.phase != "liquid") or getattr(model, "flows", ()):
        return None
    try:
        published = crosscheck.second_model(model, "real-fluid")
    except InputError:
        return None
    try:
        return fluids.real_fluid(published.substance, reference_state="third-law")
    except InputError:
        return published


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

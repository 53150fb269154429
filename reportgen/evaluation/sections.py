"""Sections of the record that repeat what was given: title block, plant, inputs."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from reportgen.balances import kinds
from reportgen.balances.kinds import Kind, process_kinds, vessel_kinds
from reportgen.evaluation.evaluated import Connection
from reportgen.evaluation.model_details import model_details, stated_sources
from reportgen.evaluation.vessels import vessel_path
from reportgen.names import DIMENSIONS, name_of
from reportgen.quantities import Quantity
from reportgen.spec.calculation import Input

if TYPE_CHECKING:
    from reportgen.balances import Solution
    from reportgen.fluids.model import Fluid
    from reportgen.spec.calculation import Calculation, EquipmentSpec, FluidSpec, Limits

__all__ = ["accounts_section", "calculation_section", "connections_of", "inputs_section", "plant_section", "train_of"]


def calculation_section(calculation: Calculation) -> dict[str, Any]:
    """Title block, narratives, references, revisions."""
    fields = (
        "number",
        "title",
        "revision",
        "date",
        "owner",
        "client",
        "location",
        "status",
        "units",
        "originator",
        "checker",
        "approver",
    )
    return {
        **{name: getattr(calculation, name) for name in fields},
        "coverage_factor": calculation.uncertainty.coverage_factor,
        "method": calculation.uncertainty.method,
        "narratives": {name: vars(narrative) for name, narrative in calculation.narratives.items()},
        "references": [{"id": identifier, "text": item.text} for identifier, item in calculation.references.items()],
        "revisions": [
            {"index": item.index, "date": item.date, "description": item.description} for item in calculation.revisions
        ],
    }


def inputs_section(calculation: Calculation, solution: Solution) -> dict[str, Any]:
    """Every given quantity as written and in SI, with its place in the file; then what was taken by default."""
    written = {path: _input(item.quantity, item) for path, item in calculation.inputs.items()}
    return {**written, **_taken_by_default(calculation, solution)}


def _taken_by_default(calculation: Calculation, solution: Solution) -> dict[str, Any]:
    """Values that rest on an assumption of the program alone, such as no heat, or on the kind of process, such as no
    work in a rigid vessel; their line is that of their owner.
    """
    texts = {f"assumptions.{item.id}": item.text for item in solution.assumptions}
    section = {}
    for step in solution.steps:
        if len(step.solves) != 1 or any(use not in texts for use in step.uses):
            continue
        path = step.solves[0]
        name = name_of(path)
        assert name is not None  # a default is taken for a quantity of the glossary
        dimension = name.dimension
        quantity = Quantity(
            text="not stated",
            value=float(solution.values[path][0]),
            dimension=dimension,
            unit=DIMENSIONS[dimension],
            source=" ".join(texts[use] for use in step.uses) or step.sentence,
            supplied_by="taken by the program",
            status="by default",
        )
        file, line, column = calculation.locate(path)
        section[path] = _input(quantity, Input(path, quantity, (path,), file, line, column))
    return section


def _input(quantity: Quantity, item: Input) -> dict[str, Any]:
    freedom = quantity.degrees_of_freedom
    return {
        "text": quantity.text,
        "value": quantity.value,
        "unit": quantity.unit,
        "dimension": quantity.dimension,
        "gauge": quantity.gauge,
        "standard_uncertainty": quantity.standard_uncertainty,
        "expanded_uncertainty": quantity.expanded_uncertainty,
        "coverage_factor": quantity.coverage_factor,
        "distribution": quantity.distribution,
        "evaluation": quantity.evaluation,
        "degrees_of_freedom": None if math.isinf(freedom) else freedom,
        "source": quantity.source,
        "supplied_by": quantity.supplied_by,
        "status": quantity.status,
        "applies_to": list(item.applies_to),
        "file": item.file,
        "line": item.line,
    }


def plant_section(calculation: Calculation, models: Mapping[str, Fluid], solution: Solution) -> dict[str, Any]:
    """Fluids, states, equipment, processes and vessels with their states, trains; ``position`` keeps the file's order.

    A state names its flow, or its mass, only when it has one.
    """
    trains, paths = train_of(calculation), solution.values
    vessels = _pieces(calculation.vessels, vessel_kinds(), trains)
    for tag, path in solution.vessel_paths.items():
        vessels[tag]["path"] = vessel_path(path)
    states = {}
    for position, (identifier, state) in enumerate(calculation.states.items()):
        flow, mass = (f"states.{identifier}.{name}" for name in ("mass_flow", "mass"))
        states[identifier] = {
            "fluid": state.fluid,
            "title": state.title,
            "position": position,
            "mass_flow": flow if flow in paths else None,
            "mass": mass if mass in paths else None,
        }
    return {
        "fluids": {
            identifier: _fluid(models[identifier], specification, position)
            for position, (identifier, specification) in enumerate(calculation.fluids.items())
        },
        "states": states,
        "equipment": _pieces(calculation.equipment, kinds(), trains),
        "processes": _pieces(calculation.processes, process_kinds(), trains),
        "vessels": vessels,
        "trains": {
            identifier: {
                "title": train.title,
                "equipment": list(train.equipment),
                "processes": list(train.processes),
                "alternative_to": train.alternative_to,
                "position": position,
            }
            for position, (identifier, train) in enumerate(calculation.trains.items())
        },
        "surroundings": {name: f"surroundings.{name}" for name in ("temperature", "pressure")},
    }


def _pieces(pieces: Mapping[str, EquipmentSpec], registry: Mapping[str, Kind], trains: Mapping[str, str]) -> Any:
    return {
        tag: {
            "kind": piece.kind,
            "kind_title": registry[piece.kind].title,
            "title": piece.title,
            "train": trains.get(tag),
            "position": position,
            "ports": [
                {"name": connection.port, "direction": connection.direction, "state": connection.state}
                for connection in connections_of(piece, registry[piece.kind])
            ],
            "limits": None if piece.limits is None else _limits(piece.limits),
        }
        for position, (tag, piece) in enumerate(pieces.items())
    }


def train_of(calculation: Calculation) -> dict[str, str]:
    """Tag of a piece or process to its train; empty without trains."""
    trains = calculation.trains.items()
    return {tag: identifier for identifier, train in trains for tag in (*train.equipment, *train.processes)}


def connections_of(piece: EquipmentSpec, kind: Kind) -> tuple[Connection, ...]:
    """States at the ports of a piece or process, in the order in which the kind declares its ports."""
    return tuple(
        Connection(port.name, port.direction, state) for port in kind.ports for state in piece.ports.get(port.name, ())
    )


def _limits(limits: Limits) -> dict[str, Any]:
    quantities = ("pressure", "temperature", "minimum_temperature")
    stated = {name: getattr(limits, name) for name in quantities if getattr(limits, name) is not None}
    return {
        **{name: {"text": quantity.text, "value": quantity.value} for name, quantity in stated.items()},
        "material": limits.material,
        "source": limits.source,
    }


def _fluid(model: Fluid, specification: FluidSpec, position: int) -> dict[str, Any]:
    limits = model.limits
    points = {"triple_point": limits.triple_point, "critical_point": limits.critical_point}
    return {
        "title": model.title,
        "model": model.kind,
        "details": model_details(specification),
        "substance": model.substance,
        "composition": None if model.composition is None else dict(model.composition),
        "molar_mass": model.molar_mass,
        "gas_constant": model.gas_constant,
        "entropy_zero": model.entropy_zero,
        "entropy_zero_name": model.entropy_zero_name,
        "sources": [*model.sources, *stated_sources(specification)],
        "position": position,
        "limits": {
            "minimum_temperature": limits.minimum_temperature,
            "maximum_temperature": limits.maximum_temperature,
            "maximum_pressure": limits.maximum_pressure,
            "remarks": list(limits.remarks),
            **{
                name: None
                if point is None
                else {"temperature": point.temperature, "pressure": point.pressure, "density": point.density}
                for name, point in points.items()
            },
        },
    }


def accounts_section(calculation: Calculation, solution: Solution) -> dict[str, Any]:
    """Entropy accounts of the trains, or of the whole plant where the file has no trains, and of every vessel.

    In W/K, of processes and vessels in J/K.

    Amounts are taken from the values, so that they agree with them; heat that came out as zero has no line.
    """
    owners = {f"trains.{identifier}": identifier for identifier in calculation.trains}
    parted = [any(getattr(train, part) for train in calculation.trains.values()) for part in ("equipment", "processes")]
    for whole in ("total", "closed"):
        of_processes = whole in solution.closed
        owners |= {} if parted[of_processes] else {whole: whole}
    owners |= {f"vessels.{tag}": tag for tag in calculation.vessels}
    section = {}
    for owner, identifier in owners.items():
        account = solution.accounts.get(owner)
        if account is None:
            continue
        sides: dict[str, list[dict[str, Any]]] = {
            name: [
                {"label": entry.label, "path": entry.path, "value": entry.sign * float(solution.values[entry.path][0])}
                for entry in account.side(side)
                if solution.values[entry.path][0] != 0.0 or not entry.path.endswith("entropy_with_heat")
            ]
            for name, side in (("entering", "in"), ("generated", "generated"), ("leaving", "out"))
        }
        section[identifier] = {
            "title": account.title,
            "complete": account.complete,
            "dimension": "entropy" if owner in solution.closed or owner.startswith("vessels.") else "entropy_flow",
            **sides,
            "sum_entering": sum(line["value"] for line in sides["entering"]),
            "sum_leaving": sum(line["value"] for line in sides["leaving"]),
        }
    return section

"""From a calculation to its Record: the order of the steps, and nothing else.

inputs ─► sample axis ─► balances (one solution of all columns) ─► audits, cautions, criteria,
assumption tests, budgets, figures ─► Record
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from reportgen import balances
from reportgen.errors import ReportgenError
from reportgen.evaluation.assumptions import (
    AutomaticAssumption,
    assumption_list,
    boundary_temperature_test,
    stream_assumption,
)
from reportgen.evaluation.audits import (
    closure_audit,
    counted_pieces,
    entropy_resolution,
    second_law_audit,
    settle_zeros,
)
from reportgen.evaluation.budget import budgets
from reportgen.evaluation.cautions import catalogue, check_adjustments, in_order, lost_samples, raised, unevaluated
from reportgen.evaluation.closed import closed_boundary_test
from reportgen.evaluation.combustion import combustion_section
from reportgen.evaluation.contradictions import sized
from reportgen.evaluation.criteria import decided_criteria
from reportgen.evaluation.cross_checks import cross_checks, second_sources
from reportgen.evaluation.cycles import cycles_section
from reportgen.evaluation.evaluated import ClosedProcess, EvaluatedPlant
from reportgen.evaluation.exchanger_profile import exchanger_figures
from reportgen.evaluation.figures import bar_figures, temperature_entropy_figures
from reportgen.evaluation.fluid_assumptions import fluid_assumptions
from reportgen.evaluation.models import (
    placed,
    plant_of,
    property_model,
    property_models,
    real_counterpart,
    solved_models,
)
from reportgen.evaluation.provenance import provenance
from reportgen.evaluation.results import relations_section, values_section
from reportgen.evaluation.sampling import SampleAxis, sample_axis
from reportgen.evaluation.sections import (
    accounts_section,
    calculation_section,
    connections_of,
    inputs_section,
    plant_section,
    train_of,
)
from reportgen.evaluation.summary import summary
from reportgen.evaluation.trials import Trial, Variant
from reportgen.evaluation.vessels import evaluated_vessels, vessel_figures
from reportgen.quantities import Display
from reportgen.record import Record
from reportgen.spec import CALCULATION_FILE

if TYPE_CHECKING:
    from reportgen.balances import Plant, Solution
    from reportgen.spec.calculation import Calculation

__all__ = ["evaluate"]


def evaluate(calculation: Calculation, folder: Path | None = None) -> Record:
    """Evaluate one calculation.

    Args:
        calculation: as read by ``spec.read``.
        folder: where the calculation stands, for the commit of its files; None leaves the commit out.

    Raises:
        InputError: an adjustment, a correlation, a criterion or a fluid that cannot be used.
        SolutionError, RangeError: the plant cannot be solved; every fault with its place in the file.
    """
    check_adjustments(catalogue(), calculation.cautions, CALCULATION_FILE)
    axis = sample_axis(
        calculation.inputs,
        calculation.uncertainty.correlations,
        calculation.uncertainty.coverage_factor,
        CALCULATION_FILE,
    )
    models = property_models(calculation)
    seconds = second_sources(calculation, models)
    definition = plant_of(calculation, models)
    try:
        solution = balances.solve(definition, axis.givens)
    except ReportgenError as error:
        told = sized(error, lambda givens: balances.solve(definition, givens), axis, Display(calculation.units))
        raise placed(calculation, told, models) from error
    models = solved_models(calculation, models, solution)
    plant = _evaluated(calculation, models, axis, solution)
    plant = replace(plant, cross_checks=cross_checks(plant, calculation.states, seconds))
    totals = counted_pieces(plant, plant.alternatives)
    settle_zeros(plant, totals)
    criteria = decided_criteria(plant, calculation.criteria, CALCULATION_FILE)
    display = Display(calculation.units)
    automatic = _automatic(calculation, solution, Trial(plant, _variant(definition, axis), criteria), display)
    accounts = accounts_section(calculation, solution)
    headlines = summary(plant, solution, totals)
    relations = relations_section(plant, solution, display)
    return Record(
        {
            "calculation": calculation_section(calculation),
            "plant": plant_section(calculation, models, solution),
            "inputs": inputs_section(calculation, solution),
            "values": values_section(plant, solution, calculation.inputs),
            "relations": relations,
            "solution_order": list(relations),
            "assumptions": assumption_list(calculation.assumptions, automatic),
            "cautions": in_order(
                [
                    *raised(catalogue(), replace(plant, assumptions=automatic), calculation.cautions),
                    *unevaluated(plant, solution.warnings),
                    *lost_samples(plant),
                ]
            ),
            "audits": {
                "second_law": second_law_audit(plant, totals),
                "closure": closure_audit(plant, totals),
            },
            "accounts": accounts,
            "criteria": criteria,
            "cross_checks": plant.cross_checks,
            "combustion": combustion_section(plant, solution),
            "cycles": cycles_section(plant, solution),
            "summary": headlines,
            "uncertainty_budget": budgets(plant, dict.fromkeys([*headlines, *(entry["path"] for entry in criteria)])),
            "figures": [
                *temperature_entropy_figures(plant, solution),
                *bar_figures(plant, train_of(calculation), accounts),
                *vessel_figures(plant),
                *exchanger_figures(plant, solution),
            ],
            "provenance": provenance(calculation.files, models.values(), folder, seconds.values()),
        }
    )


def _evaluated(
    calculation: Calculation, models: Mapping[str, Any], axis: SampleAxis, solution: Solution
) -> EvaluatedPlant:
    pieces = solution.pieces
    return EvaluatedPlant(
        axis=axis,
        values=solution.values,
        fluids=models,
        state_fluids={identifier: state.fluid for identifier, state in calculation.states.items()},
        kinds={tag: piece.kind for tag, piece in calculation.equipment.items()},
        connections={tag: connections_of(piece, pieces[tag].kind) for tag, piece in calculation.equipment.items()},
        power_signs={tag: piece.kind.power_sign for tag, piece in pieces.items()},
        heats={tag: tuple(piece.kind.heats(piece)) for tag, piece in pieces.items()},
        limits={tag: piece.limits for tag, piece in calculation.equipment.items() if piece.limits is not None},
        trains={name: train.equipment for name, train in calculation.trains.items() if train.equipment},
        doubts=solution.doubts,
        processes={tag: _process(calculation, solution, tag) for tag in calculation.processes},
        process_trains={name: train.processes for name, train in calculation.trains.items() if train.processes},
        alternatives=tuple(name for name, train in calculation.trains.items() if train.alternative_to),
        closed=frozenset(solution.closed),
        vessels=evaluated_vessels(calculation, solution),
        units=calculation.units,
    )


def _process(calculation: Calculation, solution: Solution, tag: str) -> ClosedProcess:
    piece, specification = solution.processes[tag], calculation.processes[tag]
    return ClosedProcess(
        specification.kind,
        piece.states("from"),
        piece.states("to"),
        tuple(piece.kind.heats(piece)),
        specification.limits,
        piece.kind.mixes(piece),
    )


def _variant(definition: Plant, axis: SampleAxis) -> Variant:
    """Solves the base case with some fluids and some givens replaced."""

    def solve(fluids: Mapping[str, Any], givens: Mapping[str, float]) -> Mapping[str, float]:
        base = {path: float(samples[0]) for path, samples in axis.givens.items()}
        changed = replace(definition, fluids={**definition.fluids, **fluids})
        values = balances.solve(changed, {**base, **givens}).values
        return {path: float(array.flat[0]) for path, array in values.items() if array.dtype.kind == "f"}

    return solve


def _automatic(
    calculation: Calculation, solution: Solution, trial: Trial, display: Display
) -> list[AutomaticAssumption]:
    """Assumptions of the property models, then those the balances took, each with its test where there is one."""
    found = fluid_assumptions(trial, calculation.fluids, real_counterpart, property_model)
    streams = stream_assumption(trial.plant)
    found += [] if streams is None else [streams]
    ports = [port for ports in trial.plant.heats.values() for port in ports]
    ports += [port for process in trial.plant.processes.values() for port in process.heats]
    for item in solution.assumptions:
        port = next((port for port in ports if port.entropy in item.affects), None)
        family, _, tag = item.owner.partition(".")
        test = None
        if port is not None and family == "equipment":
            test = boundary_temperature_test(trial, tag, port.temperature, display)
        elif port is not None and family == "processes":
            resolution = entropy_resolution(trial.plant, item.owner, (tag,))
            test = closed_boundary_test(trial, tag, port.temperature, resolution, display)
        found.append(AutomaticAssumption(item.id, item.text, item.basis, item.affects, test))
    return found

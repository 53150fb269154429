"""Values and relations of the record: every number with its origin, every step of the working with its formulae."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.evaluation.sampling import ATMOSPHERE
from reportgen.evaluation.working import FEWEST_DIGITS, TOKEN, enough_digits, with_numbers, with_symbols
from reportgen.quantities import Display

if TYPE_CHECKING:
    from reportgen.balances import Equation, Solution
    from reportgen.spec.calculation import Input

__all__ = ["relations_section", "values_section"]

#: Between the equations of one step.
LINE_BREAK = r" \\ "
#: Residuals of the arithmetic: what an input contributes to them is rounding, not uncertainty.
RESIDUALS = ("closure", "energy_imbalance", "mass_imbalance")


def values_section(plant: EvaluatedPlant, solution: Solution, inputs: Mapping[str, Input]) -> dict[str, Any]:
    """Every value of the base case with unit, symbol, uncertainty and the paths it was computed from.

    The ``from`` chains end in inputs and in fluids (``fluids.<id>``). A value that is an input itself, written in the
    file or taken by default, has an empty ``from``, or, as a gauge reading, the atmosphere. Which assumptions a value
    rests on is told by the ``uses`` of its relation. A value that could not be had names those it would have come from.
    ``direction`` says which way a power is positive.
    """
    origins, relations = _origins(solution, inputs)
    numbers = [path for path, array in solution.values.items() if array.dtype.kind == "f"]
    deviations = dict(
        zip(
            numbers,
            plant.axis.standard_uncertainties(np.array([plant.samples(path) for path in numbers])),
            strict=True,
        )
    )
    section = {}
    for path, array in solution.values.items():
        name = plant.name_of(path)
        entry: dict[str, Any] = {
            "symbol": plant.symbol_of(path),
            "from": list(origins.get(path, ())),
            "relation": relations.get(path),
        }
        if path in deviations:
            value, deviation = float(array[0]), float(deviations[path])
            known = deviation > 0.0 and path.rsplit(".", 1)[-1] not in RESIDUALS
            entry |= {
                "value": value,
                "unit": "1" if name is None else name.unit,
                "dimension": "ratio" if name is None else name.dimension,
                "standard_uncertainty": deviation if known else None,
            }
            if path.endswith((".power", "_power")):
                entry["direction"] = _direction(path, entry["from"], plant)
            if np.isnan(value):
                entry["reason"] = solution.reasons.get(path, "the property has no meaning in this state")
        else:
            entry |= {"value": str(array.flat[0]), "unit": "", "dimension": None, "standard_uncertainty": None}
        section[path] = entry
    return section


def _direction(path: str, origins: Iterable[str], plant: EvaluatedPlant) -> str:
    """``absorbed`` or ``delivered``: which way a power is positive. A sum is absorbed where all its machines absorb."""
    powers = [path] if path.startswith("equipment.") else [source for source in origins if source.endswith("power")]
    signs = [plant.power_signs.get(power.split(".", 1)[1].rpartition(".")[0], 0) for power in powers]
    return "absorbed" if all(sign > 0 for sign in signs) else "delivered"


def relations_section(plant: EvaluatedPlant, solution: Solution, display: Display) -> dict[str, Any]:
    """Every step with its sentence and its formulae in symbols and in numbers.

    ``latex_lines`` holds for each equation [left side, right side in symbols, right side in numbers, result]. Where
    the left side is a sum (relations solved together), numbers stand for both sides, and there is no result. Where the
    right side is a single value or a constant, there are no numbers but the result.
    """

    section = {}
    for step in solution.steps:
        lines = [_line(equation, plant, display) for equation in step.equations]
        section[step.key] = {
            "owner": step.owner,
            "equipment": step.owner.split(".", 1)[1] if step.owner.startswith("equipment.") else None,
            "name": step.name,
            "sentence": step.sentence,
            "basis": step.basis,
            "solves": list(step.solves),
            "uses": list(step.uses),
            "latex_symbols": LINE_BREAK.join(f"{line[0]} = {line[1]}" for line in lines),
            "latex_numbers": LINE_BREAK.join(" = ".join(filter(None, (line[0], *line[2:]))) for line in lines),
            "latex_lines": lines,
        }
    return section


def _origins(solution: Solution, inputs: Mapping[str, Input]) -> tuple[dict[str, tuple[str, ...]], dict[str, str]]:
    """Path to the paths it came from, and path to the key of its relation."""
    origins: dict[str, tuple[str, ...]] = {}
    relations: dict[str, str] = {}
    for item in inputs.values():
        for path in item.applies_to:
            atmosphere = (ATMOSPHERE,) if item.quantity.gauge and path != ATMOSPHERE else ()
            origins[path] = atmosphere if path == item.path else (item.path, *atmosphere)
    for step in solution.steps:
        for path in step.solves:
            origins.setdefault(path, tuple(use for use in step.uses if not use.startswith("assumptions.")))
            relations.setdefault(path, step.key)
    for path, uses in solution.lacking.items():
        known = (use for use in uses if use in solution.values or use.startswith("fluids."))
        origins.setdefault(path, tuple(known))
    return origins, relations


def _line(equation: Equation, plant: EvaluatedPlant, display: Display) -> list[str]:
    digits = _operand_digits(equation, plant, display)

    def number(path: str) -> str:
        return display.show(_base(plant, path), plant.dimension_of(path), digits=digits.get(path, FEWEST_DIGITS)).latex

    symbols, numbers = with_symbols(equation.right, plant.symbol_of), with_numbers(equation.right, number)
    if TOKEN.search(equation.right) is None or TOKEN.fullmatch(equation.right.strip()):
        numbers = ""  # a constant, or one value taken over: the result repeats it
    solved = TOKEN.fullmatch(equation.left.strip())
    if solved is None:
        both = " = ".join(filter(None, (with_numbers(equation.left, number), numbers)))
        return [with_symbols(equation.left, plant.symbol_of), symbols, both, ""]
    return [with_symbols(equation.left, plant.symbol_of), symbols, numbers, _result(plant, display, solved.group(1))]


def _operand_digits(equation: Equation, plant: EvaluatedPlant, display: Display) -> dict[str, int]:
    """Digits of each number in an equation by which a reader who computes it comes to the result shown."""
    solved = TOKEN.fullmatch(equation.left.strip())
    if solved is None or equation.evaluate is None or solved.group(1).rsplit(".", 1)[-1] in RESIDUALS:
        return {}
    evaluate, result = equation.evaluate, solved.group(1)
    shown = _result(plant, display, result)
    return enough_digits(
        {path: _base(plant, path) for path in TOKEN.findall(equation.right)},
        lambda path, value, digits: display.in_formula(value, plant.dimension_of(path), digits),
        evaluate,
        lambda value: _result(plant, display, result, value) == shown,
    )


def _result(plant: EvaluatedPlant, display: Display, path: str, value: float | None = None) -> str:
    """LaTeX of a result with its unit, with as many digits as its uncertainty allows; ``value`` in its place."""
    estimate = plant.estimate(path)
    residual = path.rsplit(".", 1)[-1] in RESIDUALS
    uncertainty = None if residual else estimate.expanded_uncertainty or None
    return display.show(estimate.value if value is None else value, plant.dimension_of(path), uncertainty).latex


def _base(plant: EvaluatedPlant, path: str) -> float:
    return float(plant.samples(path)[0])

"""Entering values that follow from a solution, each with its step of the working."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.balances.plant import Piece
from reportgen.balances.relations import Equation, Formula, Formulas, HeatPort, Term, sum_latex, token
from reportgen.balances.solution import Assumption, Solution, Step
from reportgen.errors import Fault

__all__ = ["AMBIENT", "Book"]

Array = NDArray[np.float64]
AMBIENT = "surroundings.temperature"
#: Heat below this part of the energy that a piece deals with is rounding, not heat.
_ROUNDING = 1e-10


class Book:
    """Adds steps and values one by one to a solution whose network is solved."""

    def __init__(self, solution: Solution) -> None:
        self.solution = solution
        self.values = solution.values
        self.columns = self.values[AMBIENT].size

    def put(self, step: Step, result: Any, reason: str = "") -> Array:
        """Enter the one value a step solves; no step is kept for a value that does not exist in the base case."""
        array = np.array(np.broadcast_to(np.asarray(result, dtype=float), (self.columns,))) + 0.0
        array[~np.isfinite(array)] = np.nan
        path = step.solves[0]
        self.values[path] = array
        if np.isnan(array[0]):
            self.solution.reasons.setdefault(path, self._cause(step.uses) or reason or "it has no value here")
            self.solution.lacking.setdefault(path, step.uses)
        else:
            self.solution.steps.append(step)
        return array

    def _cause(self, uses: Iterable[str]) -> str:
        """Why a value that others are made from is missing."""
        for path in uses:
            array = self.values.get(path)
            if array is None and not path.startswith(("fluids.", "assumptions.")):
                return self.solution.reasons.get(path, f"{path} has no value")
            if array is not None and array.dtype.kind == "f" and np.isnan(array[0]):
                return self.solution.reasons.get(path, f"{path} has no value")
        return ""

    def array(self, path: str) -> Array:
        """Samples of a value, shape (N,); NaN when there is none."""
        return self.values.get(path, np.full(self.columns, np.nan))

    def balance(
        self,
        path: str,
        owner: str,
        name: str,
        sentence: str,
        basis: str,
        terms: Sequence[Term],
        assumptions: Sequence[str] = (),
    ) -> Array:
        """Enter a value that is a sum of products."""
        uses = tuple(dict.fromkeys(factor for term in terms for factor in term.factors))

        def total(values: Mapping[str, Any]) -> Any:
            return sum(term.value(values) for term in terms)

        step = Step(
            path,
            owner,
            name,
            sentence,
            basis,
            (path,),
            (*uses, *(f"assumptions.{key}" for key in assumptions)),
            (Equation(token(path), sum_latex(terms), total),),
        )
        return self.put(step, total({factor: self.array(factor) for factor in uses}))

    def formula(self, formula: Formula) -> Array:
        """Enter the output of a formula."""
        with np.errstate(all="ignore"):
            result = formula.evaluate(*(self.array(path) for path in formula.inputs))
        uses = (*formula.inputs, *(f"fluids.{fluid}" for fluid in formula.fluids))
        step = Step(
            formula.key,
            formula.owner,
            formula.name,
            formula.sentence,
            formula.basis,
            (formula.output,),
            uses,
            (formula.balanced(),),
        )
        return self.put(step, result, formula.reason)

    def formulas(self, formulas: Formulas) -> None:
        """Enter several values that come from the same inputs, as one step."""
        with np.errstate(all="ignore"):
            results = formulas.evaluate(*(self.array(path) for path in formulas.inputs))
        for path, result in zip(formulas.outputs, results, strict=True):
            self.values[path] = np.array(np.broadcast_to(np.asarray(result, dtype=float), (self.columns,)))
        self.solution.steps.append(
            Step(
                formulas.key,
                formulas.owner,
                formulas.name,
                formulas.sentence,
                formulas.basis,
                formulas.outputs,
                (*formulas.inputs, *(f"fluids.{fluid}" for fluid in formulas.fluids)),
                tuple(Equation(token(path), right) for path, right in formulas.latex.items()),
            )
        )

    def entropy_with_heat(self, piece: Piece, port: HeatPort, scale: float) -> None:
        """Q/T of one boundary; ``scale`` is the size of the energy [as the heat] of which a small part is rounding."""
        heat = self.array(port.heat)
        temperature = port.temperature
        basis = "definition of entropy transfer with heat"
        assumptions: tuple[str, ...] = ()
        sentence = f"{port.label}: heat carries its amount over the temperature of the boundary as entropy."
        if temperature not in self.values:
            temperature = AMBIENT
            if not abs(heat[0]) > _ROUNDING * scale:
                sentence = f"{port.label}: no heat crosses the boundary, and no entropy with it."
            elif heat[0] > 0.0:
                reason = f"heat enters {port.label} and {port.temperature} is not stated"
                self.values[port.entropy] = np.full(self.columns, np.nan)
                self.solution.reasons[port.entropy] = reason
                self.solution.lacking[port.entropy] = (port.heat,)
                text = (
                    f"Heat enters {port.label} through a boundary of unstated temperature; "
                    "the entropy generation of this piece and of the totals it belongs to is not reported."
                )
                hint = f"State {port.temperature}."
                self.solution.warnings.append(Fault(text, port.temperature, hint=hint))
                return
            else:
                key = f"{port.heat}.leaves_at_surroundings"
                text = f"Heat that leaves {port.label} leaves at the temperature of the surroundings."
                self.solution.assumptions.append(Assumption(key, text, piece.owner, (port.entropy,)))
                assumptions = (key,)
                basis = f"assumption: {text}"
        step = Step(
            port.entropy,
            piece.owner,
            "Entropy with heat",
            sentence,
            basis,
            (port.entropy,),
            (port.heat, temperature, *(f"assumptions.{key}" for key in assumptions)),
            (
                Equation(
                    token(port.entropy),
                    rf"\frac{{{token(port.heat)}}}{{{token(temperature)}}}",
                    lambda values: values[port.heat] / values[temperature],
                ),
            ),
        )
        self.put(step, heat / self.array(temperature))

    def lost_work(self, owner: str, title: str) -> None:
        """T0 times the entropy generation of an owner."""
        generated = f"{owner}.entropy_generation"
        sentence = f"{title}: work forgone at the temperature of the surroundings."
        basis = "Gouy–Stodola theorem"
        self.balance(f"{owner}.lost_work", owner, "Lost work", sentence, basis, [Term(1.0, (AMBIENT, generated))])

"""Trials: the plant solved otherwise, and what that changes in the results.

How much a difference weighs is said by ``decisions.MAGNITUDE_RULE``; a difference by which a criterion would be
decided otherwise is decisive whatever its size.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from reportgen.errors import ReportgenError
from reportgen.evaluation.decisions import MAGNITUDE_RULE, decide, magnitude
from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.names import DIMENSIONS

__all__ = ["Trial", "Variant", "untested"]

#: Results that are compared, the most telling first.
COMPARED = ("entropy_generation", "lost_work", "power", "work", "temperature")

GRAVITY = {"negligible": 0, "noticeable": 1, "decisive": 2}
WORDS = {
    "negligible": "no result changes noticeably",
    "noticeable": "a result changes noticeably",
    "decisive": "a result changes decisively",
}
RULE = f"Rule: {MAGNITUDE_RULE}; decisive also when a criterion would be decided otherwise."

#: Differences below this part of a value are what two solutions of one plant may differ by.
RESOLUTION = 1e-9

#: Solves the base case again: (fluids to replace, givens to add or replace) to values by path.
Variant = Callable[[Mapping[str, Any], Mapping[str, float]], Mapping[str, float]]


@dataclass(frozen=True)
class Trial:
    """A solved plant that can be solved otherwise.

    Args:
        plant: the solved plant, column 0.
        solve: solves the base case again.
        criteria: record entries of the decided criteria.
    """

    plant: EvaluatedPlant
    solve: Variant
    criteria: Sequence[Mapping[str, Any]] = ()

    def run(
        self,
        condition: str,
        fluids: Mapping[str, Any] | None = None,
        givens: Mapping[str, float] | None = None,
        impossible: Callable[[Mapping[str, float]], str | None] = lambda values: None,
    ) -> dict[str, Any] | None:
        """Solve with some fluids and givens replaced and compare; a plant without solution is told, not hidden.

        ``condition`` opens the finding, such as "With the equation of state of the real fluid". ``impossible`` says
        of the other solution why it is none to compare with, or None.
        """
        try:
            values = self.solve(fluids or {}, givens or {})
        except ReportgenError as error:
            return untested(f"Could not be tested. {condition} the plant has no solution: {error.faults[0].message}")
        refused = impossible(values)
        return self.compare(values, condition) if refused is None else untested(refused)

    def compare(self, other: Mapping[str, float], condition: str) -> dict[str, Any] | None:
        """The result that changes most, weighed against its uncertainty, as the ``test`` entry of a record.

        Compared are entropy generation, lost work, power, work and temperature of every owner, and what criteria are
        set on. The gravest verdict counts; among equal ones the largest change in parts of U (or of the value). None
        when nothing can be compared. ``results`` of the entry lists every comparison.
        """
        turned = self._turned(other)
        best: tuple[tuple[float, ...], dict[str, Any]] | None = None
        results: list[dict[str, Any]] = []
        for path in self._compared():
            if not np.isfinite(other.get(path, np.nan)):
                continue
            entry, weight = self._compared_entry(path, float(other[path]), path in turned)
            results.append({key: entry[key] for key in ("path", "model_value", "other_value", "difference", "verdict")})
            weighed = (GRAVITY[entry["verdict"]], round(weight, 9), -_order(path))
            if best is None or weighed > best[0]:
                best = (weighed, entry)
        if best is None:
            return None
        finding = f"{condition} {WORDS[best[1]['verdict']]}; shown is the one that changes most."
        finding += "".join(f" {sentence}" for sentence in turned.values())
        return {
            **best[1],
            "finding": finding,
            "text": RULE,
            "results": sorted(results, key=lambda item: item["path"]),
        }

    def _compared(self) -> list[str]:
        named = [path for path in self.plant.values if path.rsplit(".", 1)[-1] in COMPARED]
        return [
            path
            for path in dict.fromkeys([*named, *(entry["path"] for entry in self.criteria)])
            if self.plant.has(path)
        ]

    def _compared_entry(self, path: str, changed: float, turns_a_criterion: bool) -> tuple[dict[str, Any], float]:
        estimate = self.plant.estimate(path)
        difference = changed - estimate.value
        scale = max(abs(changed), abs(estimate.value))
        if abs(changed) <= RESOLUTION * scale:
            changed = 0.0
        if abs(difference) <= RESOLUTION * scale:
            difference = 0.0
        verdict = magnitude(difference, estimate.expanded_uncertainty, estimate.value)
        measure = estimate.expanded_uncertainty if estimate.expanded_uncertainty > 0.0 else abs(estimate.value)
        dimension = self.plant.dimension_of(path)
        entry = {
            "path": path,
            "model_value": estimate.value,
            "other_value": changed,
            "difference": difference,
            "unit": DIMENSIONS[dimension],
            "dimension": dimension,
            "verdict": "decisive" if turns_a_criterion else verdict,
        }
        return entry, abs(difference) / measure if measure > 0.0 else 0.0

    def _turned(self, other: Mapping[str, float]) -> dict[str, str]:
        """Paths of criteria that would be decided otherwise, each with a sentence that says so."""
        found = {}
        for entry in self.criteria:
            if not np.isfinite(other.get(entry["path"], np.nan)):
                continue
            distance = entry["limit"] - float(other[entry["path"]])
            margin = distance if entry["comparison"] == "at_most" else -distance
            decision = decide(margin, entry["expanded_uncertainty"])
            if decision != entry["decision"]:
                found[entry["path"]] = f"Criterion {entry['id']} would be {decision} instead of {entry['decision']}."
        return found


def untested(finding: str) -> dict[str, Any]:
    """Test entry of an assumption that could not be tested, with the reason."""
    empty = dict.fromkeys(("model_value", "other_value", "difference", "unit", "dimension", "path", "verdict"))
    return {**empty, "finding": finding, "text": "", "results": []}


def _order(path: str) -> int:
    name = path.rsplit(".", 1)[-1]
    return COMPARED.index(name) if name in COMPARED else len(COMPARED)

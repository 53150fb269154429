"""Criteria of the calculation against the results, decided within their uncertainty."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from difflib import get_close_matches
from typing import TYPE_CHECKING, Any

from reportgen.errors import Fault, InputError
from reportgen.evaluation.decisions import decide
from reportgen.evaluation.evaluated import EvaluatedPlant

if TYPE_CHECKING:
    from reportgen.spec.calculation import Criterion

__all__ = ["decided_criteria"]


def decided_criteria(
    plant: EvaluatedPlant, criteria: Mapping[str, Criterion], file: str | None
) -> list[dict[str, Any]]:
    """Record entries of all criteria, in the order of the file.

    ``met`` and ``not met`` are said only when value ± U lies wholly on one side of the limit. A gauge limit on a
    pressure is held against the gauge pressure, so that the uncertainty of the atmosphere counts once.

    Raises InputError naming every criterion on a value that the calculation does not have.
    """
    entries, faults = [], []
    for identifier, criterion in criteria.items():
        comparison, limit = (
            ("at_most", criterion.at_most) if criterion.at_most is not None else ("at_least", criterion.at_least)
        )
        known = plant.values.get(criterion.value)
        if known is None or known.dtype.kind != "f" or limit is None:
            faults.append(
                Fault(
                    "The calculation has no such number.",
                    f"criteria.{identifier}.value",
                    file,
                    criterion.line,
                    found=criterion.value,
                    hint=_nearest(criterion.value, plant.values),
                )
            )
            continue
        samples, limits = plant.samples(criterion.value), plant.limit_samples(limit)
        margin = plant.axis.estimate(limits - samples if comparison == "at_most" else samples - limits)
        name = plant.name_of(criterion.value)
        entries.append(
            {
                "id": identifier,
                "path": criterion.value,
                "comparison": comparison,
                "limit": limit.value,
                "limit_text": limit.text,
                "value": float(samples[0]),
                "expanded_uncertainty": margin.expanded_uncertainty,
                "margin": margin.value,
                "dimension": limit.dimension if name is None else name.dimension,
                "decision": decide(margin.value, margin.expanded_uncertainty),
                "basis": criterion.basis,
            }
        )
    if faults:
        raise InputError(faults)
    return entries


def _nearest(path: str, known: Iterable[str]) -> str | None:
    close = get_close_matches(path, list(known), n=1, cutoff=0.5)
    return f"Nearest: {close[0]}." if close else None

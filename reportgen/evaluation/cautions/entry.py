"""What a caution is, and how a finding becomes an entry of the record.

A caution is one function, decorated with :func:`caution`, in one of the catalogue's modules. It yields findings:
something measured along the sample axis against a limit. This module decides from the uncertainty of the margin
whether the finding stands, is open, or is none.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

import numpy as np
import numpy.typing as npt

from reportgen.errors import Fault, InputError
from reportgen.evaluation.decisions import decide
from reportgen.evaluation.evaluated import EvaluatedPlant

if TYPE_CHECKING:
    from reportgen.spec.calculation import CautionAdjustment

__all__ = ["Caution", "Finding", "Severity", "caution", "check_adjustments", "in_order", "raised"]

Severity = Literal["stop", "warning", "note"]
Undecided = Literal["always", "beyond", "never"]


NOT_DECIDED = "This is not decided within the uncertainty."
ALTERNATIVES = re.compile("⟦([^⟦⟧|]*)\\|([^⟦⟧|]*)⟧")

ORDER: dict[Severity, int] = {"stop": 0, "warning": 1, "note": 2}


@dataclass(frozen=True)
class Finding:
    """One thing measured against one limit.

    Args:
        path: value that the finding is about.
        measured: shape (N,) or scalar [SI unit of ``dimension``]; None where there is no number to it.
        limit: shape (N,) or scalar [same unit]; None where the finding stands as it is.
        keep: the good side of the limit.
        text: full sentences on what it means here, without the numbers of value, limit and margin. Words between ⟦
            and ⟧ are those for a finding that is decided and, after a bar, those for one that is not: ``⟦is|may be⟧``.
        dimension: key of names.DIMENSIONS.
        owner: equipment that the finding is about, as ``equipment.<tag>``; None for the owner of the path.
        severity: overrides the severity of the caution.
        source: stands in the place of the source of the caution, such as a named data sheet.
    """

    path: str
    measured: npt.ArrayLike | None
    limit: npt.ArrayLike | None
    keep: Literal["below", "above"]
    text: str
    dimension: str | None
    owner: str | None = None
    severity: Severity | None = None
    source: str | None = None


@dataclass(frozen=True)
class Caution:
    """One entry of the catalogue.

    Args:
        id: such as "T10".
        severity: of its findings, unless they say otherwise.
        gist: a few words.
        source: on whose word; clauses that were not read are cited as "see …, current edition".
        limit: the number that a calculation file may adjust with a reason [SI], or None when there is none.
        dimension: of ``limit``, key of names.DIMENSIONS.
        undecided: whether a finding inside its uncertainty is raised as "not decided": ``always``; only when the value
            itself is ``beyond`` the limit, and then as a warning at most; or ``never``.
        find: (plant, limit) to findings.
    """

    id: str
    severity: Severity
    gist: str
    source: str
    limit: float | None
    dimension: str | None
    undecided: Undecided
    find: Callable[[EvaluatedPlant, float], Iterable[Finding]]


def caution(
    identifier: str,
    severity: Severity,
    gist: str,
    *,
    source: str,
    limit: float | None = None,
    dimension: str | None = None,
    undecided: Undecided = "always",
) -> Callable[[Callable[[EvaluatedPlant, float], Iterable[Finding]]], Caution]:
    """Turn a finding function into an entry of the catalogue."""

    def enter(find: Callable[[EvaluatedPlant, float], Iterable[Finding]]) -> Caution:
        return Caution(identifier, severity, gist, source, limit, dimension, undecided, find)

    return enter


def check_adjustments(
    catalogue: Iterable[Caution], adjustments: Mapping[str, CautionAdjustment], file: str | None
) -> None:
    """Refuse adjustments that would do nothing.

    Raises InputError with one Fault for each that names no caution, or moves a limit that the caution does not have
    or that has another dimension.
    """
    known = {item.id: item for item in catalogue}
    faults = []
    for identifier, adjustment in adjustments.items():
        item = known.get(identifier)
        place: dict[str, Any] = {"file": file, "line": adjustment.line}
        if item is None:
            path = f"cautions.{identifier}"
            faults.append(
                Fault("No caution has this id.", path, found=identifier, expected="one of " + ", ".join(known), **place)
            )
            continue
        if adjustment.limit is None:
            continue
        path, found = f"cautions.{identifier}.limit", adjustment.limit.text
        if item.limit is None:
            message = f"Caution {identifier} ({item.gist}) has no limit that could be moved."
            faults.append(Fault(message, path, found=found, expected="a reason alone", **place))
        elif adjustment.limit.dimension != item.dimension and {adjustment.limit.dimension, item.dimension} != {
            "efficiency",
            "ratio",
        }:
            message = f"The limit of caution {identifier} ({item.gist}) is of another dimension."
            faults.append(Fault(message, path, found=found, expected=f"a {item.dimension}", **place))
    if faults:
        raise InputError(faults)


def raised(
    catalogue: Iterable[Caution], plant: EvaluatedPlant, adjustments: Mapping[str, CautionAdjustment]
) -> list[dict[str, Any]]:
    """Every finding that stands or is open, as record entries: stop first, then warning, then note.

    For each caution, owner and path only the gravest finding is kept. An adjustment moves the limit of its caution,
    or, with a reason alone, answers it; the reason is printed with the finding. No reason alone leaves anything out.
    """
    entries: dict[tuple[str, str, str], dict[str, Any]] = {}
    for item in catalogue:
        adjustment = adjustments.get(item.id)
        limit = math.nan if item.limit is None else item.limit
        if adjustment is not None and adjustment.limit is not None:
            limit = adjustment.limit.value
        for finding in item.find(plant, limit):
            entry = _entry(item, finding, plant, None if adjustment is None else adjustment.reason)
            if entry is None:
                continue
            key = (item.id, entry["owner"], finding.path)
            known = entries.get(key)
            if known is None or ORDER[entry["severity"]] < ORDER[known["severity"]]:
                entries[key] = entry
    return in_order(entries.values())


def in_order(entries: Iterable[dict[str, Any]]) -> list[dict[str, Any]]:
    """Record entries, stop first, then warning, then note."""
    return sorted(entries, key=lambda entry: (ORDER[entry["severity"]], entry["id"], entry["owner"], entry["path"]))


def _entry(item: Caution, finding: Finding, plant: EvaluatedPlant, reason: str | None) -> dict[str, Any] | None:
    entry: dict[str, Any] = {
        "id": item.id,
        "severity": finding.severity or item.severity,
        "gist": item.gist,
        "text": _worded(finding.text, decided=True),
        "owner": finding.owner or ".".join(finding.path.split(".")[:-1]),
        "path": finding.path,
        "value": None if finding.measured is None else float(np.asarray(finding.measured, dtype=float).flat[0]),
        "limit": None,
        "margin": None,
        "expanded_uncertainty": None,
        "dimension": finding.dimension,
        "decided": True,
        "source": finding.source or item.source,
        "adjusted": reason,
    }
    if finding.measured is None or finding.limit is None:
        return entry
    measured, limit = (np.asarray(part, dtype=float) for part in (finding.measured, finding.limit))
    margin = plant.axis.estimate(limit - measured if finding.keep == "below" else measured - limit)
    decision = decide(margin.value, margin.expanded_uncertainty)
    if math.isnan(margin.value) or decision == "met":
        return None
    if decision == "not decided":
        if item.undecided == "never" or (item.undecided == "beyond" and margin.value >= 0.0):
            return None
        if item.undecided == "beyond" and entry["severity"] == "stop":
            entry["severity"] = "warning"
        entry["text"] = f"{_worded(finding.text, decided=False)} {NOT_DECIDED}"
    return entry | {
        "limit": float(limit.flat[0]),
        "margin": margin.value,
        "expanded_uncertainty": margin.expanded_uncertainty,
        "decided": decision == "not met",
    }


def _worded(text: str, *, decided: bool) -> str:
    """The text with the words for a decided or an undecided finding put in their places."""
    return ALTERNATIVES.sub(lambda match: match.group(1 if decided else 2), text)

"""What could not be evaluated, told beside the cautions: results left out, and inputs that reach out of a model.

These entries have the id ``not evaluated`` and no limit; no adjustment answers them.
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

import numpy as np

from reportgen.errors import Fault
from reportgen.evaluation.evaluated import EvaluatedPlant

__all__ = ["lost_samples", "unevaluated"]

ID = "not evaluated"


def unevaluated(plant: EvaluatedPlant, warnings: Iterable[Fault]) -> list[dict[str, Any]]:
    """Warnings of the solution on values that the base case lacks, with what to state for them.

    Warnings on a state or value that the base case has concern other columns of the sample axis; ``lost_samples``
    tells those by the inputs they belong to.
    """
    return [
        _entry("warning", fault.path or "", " ".join(part for part in (fault.message, fault.hint) if part))
        for fault in warnings
        if fault.path is None or not (plant.has(fault.path) or plant.has(f"{fault.path}.specific_enthalpy"))
    ]


def lost_samples(plant: EvaluatedPlant) -> list[dict[str, Any]]:
    """Uncertain inputs that lead to states without a value when moved by their standard uncertainty.

    With one side left the sensitivity is taken from that side (a note); with none the uncertainty of everything
    behind those states is unknown (a warning).
    """
    states = [state for state in plant.state_fluids if plant.has(f"states.{state}.specific_enthalpy")]
    if not states:
        return []
    lost = np.isnan([plant.samples(f"states.{state}.specific_enthalpy") for state in states])
    count = len(plant.axis.inputs)
    entries = []
    for index, path in enumerate(plant.axis.inputs):
        raised, lowered = lost[:, 1 + index], lost[:, 1 + count + index]
        touched = [state for state, gone in zip(states, raised | lowered, strict=True) if gone]
        if not touched:
            continue
        named = f"state{'s' if len(touched) > 1 else ''} {', '.join(touched)}"
        if np.any(raised & lowered):
            moved, severity = "raised or lowered", "warning"
            then = "the uncertainty of what depends on it is not known"
        else:
            moved, severity = ("raised" if np.any(raised) else "lowered"), "note"
            then = "sensitivities to it are taken from the other side"
        text = f"With {path} {moved} by its standard uncertainty there is no value for {named}; {then}."
        entries.append(_entry(severity, path, text))
    return entries


def _entry(severity: str, path: str, text: str) -> dict[str, Any]:
    empty = dict.fromkeys(("value", "limit", "margin", "expanded_uncertainty", "dimension", "adjusted"))
    return {
        **empty,
        "id": ID,
        "severity": severity,
        "gist": "Not evaluated",
        "text": text,
        "owner": ".".join(path.split(".")[:2]),
        "path": path,
        "decided": True,
        "source": "solution of the balances",
    }

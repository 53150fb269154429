"""Uncertainty budget: what each input contributes to the uncertainty of a result."""

from __future__ import annotations

import math
from collections.abc import Iterable
from typing import Any

import numpy as np

from reportgen.evaluation import uncertainty
from reportgen.evaluation.evaluated import EvaluatedPlant

__all__ = ["budget", "budgets"]


def budgets(plant: EvaluatedPlant, paths: Iterable[str]) -> dict[str, Any]:
    """Budgets of all results among ``paths`` that have an uncertainty."""
    return {path: entry for path in paths if (entry := budget(plant, path)) is not None}


def budget(plant: EvaluatedPlant, path: str) -> dict[str, Any] | None:
    """Budget of one result, None when no uncertain input reaches it.

    Each row holds the standard uncertainty u(x_i) of the input [SI], the sensitivity c_i = Z_i/u(x_i) [result/input],
    the contribution Z_i = c_i u(x_i) [result], its share in the variance, and the curvature that first order leaves
    out [result]. Effective degrees of freedom are None when infinite; the coverage probability that belongs to the
    calculation's coverage factor is None where correlations leave no degrees of freedom to take it from.
    """
    axis, samples = plant.axis, plant.samples(path)
    contribution = uncertainty.contributions(samples)
    combined = float(uncertainty.combined_standard_uncertainty(contribution, axis.correlation))
    if not combined > 0.0:
        return None
    share = uncertainty.shares(contribution, axis.correlation)
    curvature = uncertainty.curvature(samples)
    freedom = float(uncertainty.effective_degrees_of_freedom(contribution, axis.degrees_of_freedom, axis.correlation))
    order = np.argsort(-np.abs(contribution), kind="stable")
    return {
        "value": float(samples[0]),
        "standard_uncertainty": combined,
        "expanded_uncertainty": axis.coverage_factor * combined,
        "coverage_factor": axis.coverage_factor,
        "coverage_probability": uncertainty.coverage_probability(axis.coverage_factor, freedom),
        "effective_degrees_of_freedom": freedom if math.isfinite(freedom) else None,
        "contributions": [
            {
                "input": axis.inputs[index],
                "standard_uncertainty": float(axis.standard_uncertainty[index]),
                "degrees_of_freedom": _finite(float(axis.degrees_of_freedom[index])),
                "sensitivity": float(contribution[index] / axis.standard_uncertainty[index]),
                "contribution": float(contribution[index]),
                "share": float(share[index]),
                "curvature": _finite(float(curvature[index])),
            }
            for index in order
            if contribution[index] != 0.0
        ],
    }


def _finite(value: float) -> float | None:
    return value if math.isfinite(value) else None

"""The sample axis: which columns the plant is solved for, and what the columns say about a result.

Column 0 is the base case. Each of the n uncertain inputs adds two columns, x_i + u(x_i) and x_i − u(x_i), so that
one solution of 2n+1 columns carries the whole first-order propagation.

**Why the step is the standard uncertainty itself.** JCGM 100:2008, 5.1.3 note 2 evaluates the contribution of an
input as half the change of the result between x_i + u(x_i) and x_i − u(x_i); 5.1.4 allows the same change measured
instead of computed. Compared with a derivative at a tiny step this (a) needs no choice of a step, (b) lies far above
what iterations leave (about 1e-12 of a value; a smaller step would amplify it), and (c) averages the slope over the
range in which the input is believed to lie, so that a kink there, such as a saturation line, weighs by how much of
the range lies beyond it. For a result linear in the input both are equal. How far from linear a result is, is
measured with the same columns (``uncertainty.curvature``) and printed with the budget.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from reportgen.errors import Fault, InputError
from reportgen.evaluation import uncertainty

if TYPE_CHECKING:
    from reportgen.spec.calculation import Correlation, Input

__all__ = ["Estimate", "SampleAxis", "sample_axis"]

Array = npt.NDArray[np.float64]

ATMOSPHERE = "surroundings.pressure"


@dataclass(frozen=True)
class Estimate:
    """A result with what first-order propagation says of it; all in the unit of the result.

    ``value`` and ``standard_uncertainty`` are NaN where they do not exist; an uncertainty of exactly 0 means that
    no uncertain input reaches the result.
    """

    value: float
    standard_uncertainty: float
    expanded_uncertainty: float

    @property
    def interval(self) -> tuple[float, float]:
        """Value minus and plus the expanded uncertainty."""
        return self.value - self.expanded_uncertainty, self.value + self.expanded_uncertainty


@dataclass(frozen=True)
class SampleAxis:
    """Uncertain inputs, their columns, and the propagation of any array along the axis.

    ``inputs`` are the paths of the n uncertain inputs in the order of the file, ``standard_uncertainty`` and
    ``degrees_of_freedom`` have shape (n,), ``correlation`` (n, n); ``givens`` maps every fixed variable path to its
    samples, shape (2n+1,) [SI].
    """

    inputs: tuple[str, ...]
    standard_uncertainty: Array
    degrees_of_freedom: Array
    correlation: Array
    coverage_factor: float
    givens: Mapping[str, Array] = field(repr=False)

    @property
    def columns(self) -> int:
        """Length of the sample axis, 2n+1."""
        return 2 * len(self.inputs) + 1

    def standard_uncertainties(self, samples: npt.ArrayLike) -> Array:
        """Combined standard uncertainty of every result, samples (…, 2n+1) to (…)."""
        return uncertainty.combined_standard_uncertainty(uncertainty.contributions(samples), self.correlation)

    def estimate(self, samples: npt.ArrayLike) -> Estimate:
        """Value, standard and expanded uncertainty of one result, samples of shape (2n+1,)."""
        samples = np.broadcast_to(np.asarray(samples, dtype=float), (self.columns,))
        standard = float(self.standard_uncertainties(samples))
        return Estimate(float(samples[0]), standard, self.coverage_factor * standard)


def sample_axis(
    inputs: Mapping[str, Input],
    correlations: Sequence[Correlation] = (),
    coverage_factor: float = 2.0,
    file: str | None = None,
) -> SampleAxis:
    """Lay out the sample axis for the inputs of a calculation.

    A gauge pressure is a reading above the atmosphere, so the columns of an uncertain ``surroundings.pressure`` move
    every gauge pressure with it: p = p_gauge + p_atm, ∂p/∂p_atm = 1.

    Args:
        inputs: path to input, with quantities in SI.
        correlations: coefficients r in [−1, 1] between pairs of uncertain inputs.
        coverage_factor: k by which the standard uncertainty is expanded [1].
        file: name of the calculation file, for the place in errors.

    Raises:
        InputError: a correlation names an input without uncertainty, or the coefficients contradict each other
            (the correlation matrix has a negative eigenvalue).
    """
    uncertain = [given for given in inputs.values() if (given.quantity.standard_uncertainty or 0.0) > 0.0]
    names = tuple(given.path for given in uncertain)
    count = len(names)
    deviations = np.array([given.quantity.standard_uncertainty or 0.0 for given in uncertain], dtype=float)
    givens: dict[str, Array] = {}
    for given in inputs.values():
        samples = np.full(2 * count + 1, float(given.quantity.value))
        moved_by = [given.path] if given.path in names else []
        if given.quantity.gauge and given.path != ATMOSPHERE and ATMOSPHERE in names:
            moved_by.append(ATMOSPHERE)
        for name in moved_by:
            index = names.index(name)
            samples[1 + index] += deviations[index]
            samples[1 + count + index] -= deviations[index]
        for path in given.applies_to:
            givens[path] = samples
    return SampleAxis(
        inputs=names,
        standard_uncertainty=deviations,
        degrees_of_freedom=np.array([given.quantity.degrees_of_freedom for given in uncertain], dtype=float),
        correlation=_correlation_matrix(names, correlations, file),
        coverage_factor=coverage_factor,
        givens=givens,
    )


def _correlation_matrix(names: tuple[str, ...], correlations: Sequence[Correlation], file: str | None) -> Array:
    matrix = np.eye(len(names))
    faults = []
    for correlation in correlations:
        first, second = correlation.first, correlation.second
        unknown = [path for path in (first, second) if path not in names]
        faults += [
            Fault(
                "A correlation needs two inputs that have an uncertainty.",
                path=path,
                file=file,
                line=correlation.line,
                found="no uncertainty stated",
                expected="one of " + (", ".join(names) or "the inputs, once they have uncertainties"),
            )
            for path in unknown
        ]
        if not unknown and first != second:
            row, column = names.index(first), names.index(second)
            matrix[row, column] = matrix[column, row] = correlation.coefficient
    if not faults and correlations:
        smallest = float(np.linalg.eigvalsh(matrix)[0])
        if smallest < -1e-9 or math.isnan(smallest):
            faults.append(
                Fault(
                    "The correlation coefficients contradict each other: no set of quantities can have them all.",
                    path="uncertainty.correlations",
                    file=file,
                    line=correlations[0].line,
                    found=f"a correlation matrix with the eigenvalue {smallest:.3g}",
                    expected="a positive semi-definite matrix",
                )
            )
    if faults:
        raise InputError(faults)
    return matrix

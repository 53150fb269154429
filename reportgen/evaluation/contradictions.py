"""By how much givens contradict each other where more is given than can hold at once."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.balances.freedom import OverdeterminedError
from reportgen.errors import Fault, ReportgenError
from reportgen.evaluation.sampling import SampleAxis
from reportgen.names import name_of

if TYPE_CHECKING:
    from reportgen.balances import Solution
    from reportgen.quantities import Display

__all__ = ["sized"]

#: Givens of one group that are left out in turn until the plant can be solved without one.
_MOST_TRIALS = 4
_AGREE = "they agree within it, so either may be left out"


def sized(
    error: ReportgenError, solve: Callable[[Mapping[str, Any]], Solution], axis: SampleAxis, display: Display
) -> ReportgenError:
    """The same error, each fault of an over-determined plant with the size of its contradiction.

    Of the competing givens of a fault one is left out, and what the others say of it is compared with what is given for
    it, in its unit and in parts of the expanded uncertainty of the difference.

    Args:
        error: as raised by the balances; errors of another kind are returned as they are.
        solve: (givens) to the solution of the plant with these.
        axis: the givens along the sample axis, and how uncertainties follow from it.
        display: units of display.
    """
    if not isinstance(error, OverdeterminedError) or any(excess != 1 or not paths for paths, excess in error.groups):
        return error
    faults = []
    for number, fault in enumerate(error.faults):
        others = [paths[-1] for other, (paths, _) in enumerate(error.groups) if other != number]
        faults.append(_sized(fault, error.groups[number][0], others, solve, axis, display))
    return OverdeterminedError(faults, error.groups)


def _sized(
    fault: Fault,
    competing: Sequence[str],
    others: Sequence[str],
    solve: Callable[[Mapping[str, Any]], Solution],
    axis: SampleAxis,
    display: Display,
) -> Fault:
    for path in list(reversed(competing))[:_MOST_TRIALS]:
        left_out = {path, *others}
        try:
            solution = solve({name: samples for name, samples in axis.givens.items() if name not in left_out})
        except ReportgenError:
            continue
        implied = solution.values.get(path)
        assumed = {affected for item in solution.assumptions for affected in item.affects}
        if implied is None or path in assumed or not np.isfinite(implied[0]):
            continue
        return replace(fault, found=_words(path, axis.givens[path], implied, axis, display))
    return fault


def _words(path: str, given: Any, implied: Any, axis: SampleAxis, display: Display) -> str:
    name = name_of(path)
    dimension = "ratio" if name is None else name.dimension
    apart = f"{dimension}_difference" if dimension in ("temperature", "pressure") else dimension
    given = np.broadcast_to(np.asarray(given, float), implied.shape)
    difference = axis.estimate(given - implied)
    shown = [display.show(float(values[0]), dimension).text for values in (given, implied)]
    text = f"{path} = {shown[0]}, and {shown[1]} by the others: {display.show(abs(difference.value), apart).text} apart"
    uncertainty = difference.expanded_uncertainty
    if not uncertainty > 0.0 or not math.isfinite(uncertainty):
        return f"{text}, none of them with an uncertainty"
    times = abs(difference.value) / uncertainty
    text += f", {times:.2g} times the expanded uncertainty of the difference"
    return f"{text}; {_AGREE}" if times <= 1.0 else text

"""Decision rules: when a limit is kept, when it is broken, and when the uncertainty leaves it open.

One rule serves criteria, cautions and the second-law audit: a statement is made only when the interval
value ± expanded uncertainty lies wholly on one side of the limit. That is guarded acceptance, and guarded rejection,
with a guard band of U, in the words of JCGM 106:2012, The role of measurement uncertainty in conformity assessment.
https://doi.org/10.59161/JCGM106-2012
"""

from __future__ import annotations

import math
from typing import Literal

__all__ = ["Decision", "Magnitude", "SecondLaw", "decide", "magnitude", "second_law"]

Decision = Literal["met", "not met", "not decided"]
Magnitude = Literal["negligible", "noticeable", "decisive"]
SecondLaw = Literal["generates entropy", "not resolved from reversible", "impossible as given"]

#: A difference of up to a third of U enlarges U by at most √(1 + 1/9) − 1 = 5.4 % if added in quadrature.
NEGLIGIBLE_PART_OF_UNCERTAINTY = 1.0 / 3.0
#: Bounds for results without uncertainty, as parts of the result itself.
NEGLIGIBLE_PART_OF_VALUE = 0.001
DECISIVE_PART_OF_VALUE = 0.01

MAGNITUDE_RULE = (
    "negligible up to a third of the expanded uncertainty of the result, decisive beyond the whole of it, noticeable "
    "between; for a result without uncertainty, negligible up to 0.1 % and decisive beyond 1 % of its value"
)


def decide(margin: float, expanded_uncertainty: float) -> Decision:
    """Decide on a limit from the margin to it.

    Args:
        margin: distance to the limit, positive on the good side [any unit].
        expanded_uncertainty: of the margin, ≥ 0 [same unit].

    Returns:
        ``met`` when margin − U ≥ 0 (with U > 0: > 0), ``not met`` when margin + U < 0 (with U > 0: ≤ −U is still
        open at equality), else ``not decided``; also when either number is NaN.
    """
    if math.isnan(margin) or math.isnan(expanded_uncertainty):
        return "not decided"
    if expanded_uncertainty == 0.0:
        return "met" if margin >= 0.0 else "not met"
    if abs(margin) <= expanded_uncertainty:
        return "not decided"
    return "met" if margin > 0.0 else "not met"


def second_law(generation: float, expanded_uncertainty: float, resolution: float) -> SecondLaw:
    """Verdict on an entropy generation rate.

    Args:
        generation: entropy generation rate [W/K].
        expanded_uncertainty: its U [W/K]; NaN counts as unlimited.
        resolution: what arithmetic leaves of a zero in this balance [W/K].

    Returns:
        ``generates entropy`` when all of S ± U is above the resolution, ``impossible as given`` when all of it is
        below minus the resolution, else ``not resolved from reversible``.
    """
    width = math.inf if math.isnan(expanded_uncertainty) else expanded_uncertainty
    if generation - width > resolution:
        return "generates entropy"
    if generation + width < -resolution:
        return "impossible as given"
    return "not resolved from reversible"


def magnitude(difference: float, expanded_uncertainty: float, value: float) -> Magnitude:
    """How much a difference between two models weighs, by MAGNITUDE_RULE.

    Args:
        difference: other model minus model [any unit].
        expanded_uncertainty: U of the result [same unit]; 0 or NaN when it has none.
        value: the result itself [same unit].
    """
    size = abs(difference)
    if expanded_uncertainty > 0.0:
        lower, upper = NEGLIGIBLE_PART_OF_UNCERTAINTY * expanded_uncertainty, expanded_uncertainty
    else:
        lower, upper = NEGLIGIBLE_PART_OF_VALUE * abs(value), DECISIVE_PART_OF_VALUE * abs(value)
    if size <= lower:
        return "negligible"
    return "noticeable" if size <= upper else "decisive"

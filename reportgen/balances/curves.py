r"""The states between two states, by what stays the same or changes evenly on the way.

"enthalpy", "entropy"   h or s changes evenly with ln p
"pressure"              p stays the same, h changes evenly
"volume"                v stays the same, p changes evenly
"temperature"           T stays the same, s changes evenly
"polytrope"             ln p changes evenly with ln v
"straight"              the two only joined: there are no states between
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["states_between"]


#: What a curve is made of.
_DRAWN = ("specific_entropy", "temperature", "pressure", "specific_enthalpy")


def states_between(
    fluid: Any, first: Mapping[str, float], last: Mapping[str, float], along: str, points: int
) -> dict[str, NDArray[np.float64]]:
    """Entropy, temperature, pressure and enthalpy [SI] from ``first`` to ``last``, NaN where the model has no state.

    Parameters
    ----------
    first, last : pressure [Pa], temperature [K], specific volume, enthalpy and entropy [SI] of both ends.
    along : see the head of this module.
    points : how many, both ends counted.
    """
    share = np.linspace(0.0, 1.0, points)

    def evenly(name: str) -> Any:
        return first[name] + (last[name] - first[name]) * share

    def by_ratio(name: str) -> Any:
        return first[name] * (last[name] / first[name]) ** share

    incompressible = fluid.kind == "incompressible"
    if along == "straight":
        return {name: evenly(name) for name in _DRAWN}
    if along in ("enthalpy", "entropy"):
        pair = {"pressure": by_ratio("pressure"), f"specific_{along}": evenly(f"specific_{along}")}
    elif along == "temperature" and not incompressible:
        pair = {"temperature": evenly("temperature"), "specific_entropy": evenly("specific_entropy")}
    elif along == "volume" and not incompressible:
        pair = {"pressure": evenly("pressure"), "specific_volume": evenly("specific_volume")}
    elif along == "polytrope":
        pair = {"pressure": by_ratio("pressure"), "specific_volume": by_ratio("specific_volume")}
    else:
        pair = {"pressure": evenly("pressure"), "specific_enthalpy": evenly("specific_enthalpy")}
    state = fluid.at(errors="mask", **pair)
    return {name: np.asarray(getattr(state, name), float) for name in _DRAWN}

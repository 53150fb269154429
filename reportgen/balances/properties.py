"""States from any two of their properties."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

from reportgen.errors import Fault, InputError

__all__ = ["known_pair", "state_from", "what_would_do", "why_missing"]

#: Pairs in the order of preference; those a model does not carry are found out once and remembered. What places a state
#: on or off saturation comes first; pressure and temperature come after pairs that also tell two-phase states apart.
PAIRS = (
    ("pressure", "quality"),
    ("temperature", "quality"),
    ("pressure", "superheat"),
    ("pressure", "subcooling"),
    ("pressure", "specific_enthalpy"),
    ("pressure", "specific_entropy"),
    ("pressure", "specific_internal_energy"),
    ("pressure", "temperature"),
    ("pressure", "density"),
    ("pressure", "specific_volume"),
    ("temperature", "density"),
    ("temperature", "specific_volume"),
    ("temperature", "specific_entropy"),
    ("temperature", "specific_enthalpy"),
    ("specific_enthalpy", "specific_entropy"),
    ("density", "specific_enthalpy"),
    ("specific_volume", "specific_enthalpy"),
    ("density", "specific_entropy"),
    ("specific_volume", "specific_entropy"),
    ("density", "specific_internal_energy"),
    ("specific_volume", "specific_internal_energy"),
    ("temperature", "specific_internal_energy"),
    ("specific_internal_energy", "specific_entropy"),
)

_carried: dict[tuple[type, tuple[str, str]], bool] = {}


def _carries(fluid: Any, pair: tuple[str, str]) -> bool:
    """Whether a model takes a pair: asked with NaN, which no model may object to."""
    key = (type(fluid), pair)
    if key not in _carried:
        try:
            fluid.at(errors="mask", **{name: float("nan") for name in pair})
            _carried[key] = True
        except InputError:
            _carried[key] = False
    return _carried[key]


def known_pair(fluid: Any, known: Iterable[str]) -> tuple[str, str] | None:
    """The pair of known properties a state is best fixed by; None when the model carries none of them."""
    available = set(known)
    for pair in PAIRS:
        if available.issuperset(pair) and (_carries(fluid, pair) or _by_saturation(fluid, pair)):
            return pair
    return None


def _by_saturation(fluid: Any, pair: tuple[str, str]) -> bool:
    return pair[1] in ("superheat", "subcooling") and hasattr(fluid, "saturation")


def state_from(fluid: Any, pair: tuple[str, str], values: Mapping[str, Any]) -> Any:
    """The state, NaN where it cannot be had; ``values`` by name of property, arrays of one shape."""
    first, second = pair
    if _by_saturation(fluid, pair) and not _carries(fluid, pair):
        liquid, vapour = fluid.saturation(pressure=values[first], errors="mask")
        if second == "superheat":
            temperature = vapour.temperature + values[second]
        else:
            temperature = liquid.temperature - values[second]
        return fluid.at(errors="mask", pressure=values[first], temperature=temperature)
    return fluid.at(errors="mask", **{first: values[first], second: values[second]})


def why_missing(state: Any, column: int) -> str:
    """What a model says about a column it could not evaluate."""
    fault: Fault | None = state.faults.get(column)
    return fault.message if fault else "the property model gives no value."


def what_would_do(state: Any, column: int) -> tuple[str | None, str | None]:
    """What the model expects, and its hint (such as which of several states to name), for a column without value."""
    fault: Fault | None = state.faults.get(column)
    return (fault.expected, fault.hint) if fault else (None, None)

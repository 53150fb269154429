"""Mass, energy and entropy relations of each kind of equipment; the network and its solution.

``kinds()`` declares what a calculation file may say about equipment and needs no numerical library. ``solve`` and what
it returns are loaded when first asked for.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from reportgen.balances.kinds import Group, Kind, Parameter, Port, kinds
from reportgen.balances.plant import EquipmentDefinition, Plant, Train
from reportgen.balances.relations import Equation, HeatPort

if TYPE_CHECKING:
    from reportgen.balances.solution import Account, Assumption, Curve, Entry, Solution, Step
    from reportgen.balances.solving import solve

__all__ = [
    "Account",
    "Assumption",
    "Curve",
    "Entry",
    "Equation",
    "EquipmentDefinition",
    "Group",
    "HeatPort",
    "Kind",
    "Parameter",
    "Plant",
    "Port",
    "Solution",
    "Step",
    "Train",
    "kinds",
    "solve",
]

_LATER = {
    "Account": "solution",
    "Assumption": "solution",
    "Curve": "solution",
    "Entry": "solution",
    "Solution": "solution",
    "Step": "solution",
    "solve": "solving",
}


def __getattr__(name: str) -> Any:
    if name in _LATER:
        import importlib

        return getattr(importlib.import_module(f"{__name__}.{_LATER[name]}"), name)
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")

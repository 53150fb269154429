"""Mass, energy and entropy relations of each kind of equipment; the network and its solution.

    plant = Plant(
        fluids={"steam": fluids.real_fluid("water")},
        states={"1": "steam", "2": "steam"},
        equipment={"PRV-3": EquipmentDefinition(kind, {"inlet": ("1",), "outlet": ("2",)})},   # kind: a key of kinds()
    )
    solution = solve(plant, {"surroundings.temperature": 288.15, "surroundings.pressure": 1.013e5,
                             "states.1.pressure": 40e5, "states.1.temperature": [673.15, 674.15],
                             "states.1.mass_flow": 1.44, "states.2.pressure": 10e5})
    solution.values["equipment.PRV-3.entropy_generation"]        # [W/K], one element a column

Whatever is not given is solved for, in any direction; ``solution.steps`` is the working in order. The way there:
``plant`` checks the structure, ``structure`` collects the relations of every piece and decides with ``matching`` what
determines what, what must be assumed and in which order, ``solving`` takes the blocks one by one, directly or by
``newton``, and ``accounting`` adds exergies, accounts, lost work, totals and closures.

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

r"""Isothermal efficiency of cooled compression: the work at constant inlet temperature against the power absorbed.

    w_T = h(p_2, T_1) − h_1 − T_1 (s(p_2, T_1) − s_1) ,   η_T = ṁ w_T/Ẇ

The reversible isothermal work is the change of the Gibbs energy at T_1, for an ideal gas R T_1 ln(p_2/p_1). The same
holds round several stages with their intercoolers, from the first inlet to the last outlet.
"""

from __future__ import annotations

from typing import Any

from reportgen.balances.composition import for_composition
from reportgen.balances.kinds import Parameter
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Formula, Relation, Term, token

__all__ = ["ISOTHERMAL_EFFICIENCY", "ISOTHERMAL_REPORTS", "isothermal_relations", "isothermal_work"]

ISOTHERMAL_EFFICIENCY = Parameter(
    "isothermal_efficiency",
    "efficiency",
    "Reversible work at the inlet temperature over the power absorbed, for cooled compression.",
)
ISOTHERMAL_REPORTS = ("isothermal_work",)


def isothermal_work(owner: str, title: str, fluid: Any, fluid_id: str, inlet: str, outlet: str) -> Formula:
    """w_T [J/kg] from the state ``inlet`` to the pressure of the state ``outlet``; ``owner`` gets the value."""
    return for_composition([fluid], lambda model: _isothermal_work(owner, title, model, fluid_id, inlet, outlet))


def _isothermal_work(owner: str, title: str, fluid: Any, fluid_id: str, inlet: str, outlet: str) -> Formula:
    names = ("temperature", "specific_enthalpy", "specific_entropy")
    inputs = (f"states.{outlet}.pressure", *(f"states.{inlet}.{name}" for name in names))
    p2, t1, h1, s1 = (token(path) for path in inputs)
    output = f"{owner}.isothermal_work"

    def evaluate(pressure: Any, temperature: Any, enthalpy: Any, entropy: Any) -> Any:
        state = fluid.at(pressure=pressure, temperature=temperature, errors="mask")
        return state.specific_enthalpy - enthalpy - temperature * (state.specific_entropy - entropy)

    at = rf"\left({p2},\,{t1}\right)"
    return Formula(
        output,
        owner,
        "Isothermal work",
        f"{title}: reversible work at the temperature of state {inlet} up to the pressure of state {outlet}.",
        f"change of the Gibbs energy at constant temperature; equation of state, {fluid.title}",
        output,
        inputs,
        evaluate,
        rf"h{at} - {h1} - {t1}\left(s{at} - {s1}\right)",
        fluids=(fluid_id,),
        reason="the fluid has no state at the outlet pressure and the inlet temperature",
    )


def isothermal_relations(piece: Piece) -> list[Relation]:
    """Isothermal work, and the definition of the efficiency."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    work = isothermal_work(piece.owner, piece.title, piece.fluid(inlet), piece.fluid_id(inlet), inlet, outlet)
    efficiency, power, flow = piece.path("isothermal_efficiency"), piece.path("power"), f"states.{inlet}.mass_flow"
    definition = Balance(
        piece.path("isothermal_efficiency.definition"),
        piece.owner,
        "Isothermal efficiency",
        f"{piece.title}: the isothermal efficiency compares the reversible work at inlet temperature with the power.",
        "definition of isothermal efficiency",
        (Term(1.0, (efficiency, power)), Term(-1.0, (flow, work.output))),
        {},
        {power: f"{piece.title}: the isothermal efficiency gives the power absorbed."},
    )
    return [work, definition]

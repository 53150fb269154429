r"""Isothermal change: slow, at one temperature, Q = T m (s_b − s_a) and W = Q − m (u_b − u_a).

The work is minus the change of the Helmholtz energy, exact for every fluid, through the two-phase region too: for an
ideal gas m R T ln(V_b/V_a).
"""

from __future__ import annotations

from reportgen.balances.equations import over_boundaries
from reportgen.balances.plant import Piece
from reportgen.balances.processes.equations import (
    QUASI_STATIC,
    change_stretches,
    energy_balance,
    kept,
    kept_mass,
    one_state,
    process_kind,
)
from reportgen.balances.relations import Balance, Equation, Relation, Term, token


def reversible_heat(piece: Piece) -> Balance:
    """Q = T m (s_b − s_a)."""
    before, after = one_state(piece)
    temperature, mass = f"states.{before}.temperature", f"states.{before}.mass"
    first, last = (f"states.{state}.specific_entropy" for state in (before, after))
    ports = over_boundaries(piece)
    forms = {}
    if len(ports) == 1:
        (heat,) = ports[0].factors
        change = rf"\left({token(last)} - {token(first)}\right)"
        forms[heat] = Equation(token(heat), rf"{token(mass)}\,{token(temperature)}{change}")
    return Balance(
        piece.path("heat.definition"),
        piece.owner,
        "Heat at constant temperature",
        f"{piece.title}: slow heat at one temperature is this temperature times the change of entropy.",
        "δQ = T dS, reversible inside",
        (
            *(Term(-1.0, port.factors) for port in ports),
            Term(1.0, (temperature, mass, last)),
            Term(-1.0, (temperature, mass, first)),
        ),
        forms,
        {last: f"{piece.title}: heat at one temperature gives the entropy of state {after}."},
    )


def relations(piece: Piece) -> list[Relation]:
    """Mass, temperature, heat, energy."""
    before, after = one_state(piece)
    return [
        kept_mass(piece, before, after),
        kept(piece, before, after, "temperature", "constant temperature"),
        reversible_heat(piece),
        energy_balance(piece, (before,), (after,)),
    ]


KIND = process_kind(
    "isothermal",
    "Isothermal change",
    "The system changes slowly at one temperature.",
    relations=relations,
    stretches=lambda piece: change_stretches(piece, "temperature"),
    path_taken=QUASI_STATIC,
)

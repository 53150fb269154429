r"""Isentropic change: slow and without heat, s_b = s_a, Q = 0 and W = −m (u_b − u_a)."""

from __future__ import annotations

from reportgen.balances.plant import Piece
from reportgen.balances.processes.equations import (
    QUASI_STATIC,
    WORK,
    change_stretches,
    energy_balance,
    kept,
    kept_mass,
    one_state,
    process_kind,
)
from reportgen.balances.relations import Balance, Relation, zero


def relations(piece: Piece) -> list[Relation]:
    """Mass, entropy, no heat, energy."""
    before, after = one_state(piece)
    heat = piece.path("heat")
    sentence = f"{piece.title}: no heat crosses the boundary."
    none = zero(heat, piece.path("heat.definition"), piece.owner, "No heat", sentence)
    return [
        kept_mass(piece, before, after),
        kept(piece, before, after, "specific_entropy", "second law, reversible and adiabatic"),
        Balance(none.key, none.owner, none.name, sentence, "kind of process", none.terms),
        energy_balance(piece, (before,), (after,)),
    ]


KIND = process_kind(
    "isentropic",
    "Isentropic change",
    "The system changes slowly and exchanges no heat: its entropy stays the same.",
    relations=relations,
    parameters=(WORK,),
    stretches=lambda piece: change_stretches(piece, "entropy"),
    path_taken=QUASI_STATIC,
)

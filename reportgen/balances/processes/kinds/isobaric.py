r"""Isobaric change: heat is exchanged at constant pressure, W = p (V_b − V_a) and Q = m (h_b − h_a)."""

from __future__ import annotations

from reportgen.balances.plant import Piece
from reportgen.balances.processes.equations import (
    QUASI_STATIC,
    change_stretches,
    energy_balance,
    kept_mass,
    one_state,
    pressure_kept,
    process_kind,
    work_at_pressure,
)
from reportgen.balances.relations import Relation


def relations(piece: Piece) -> list[Relation]:
    """Mass, pressure, work, energy."""
    before, after = one_state(piece)
    return [
        kept_mass(piece, before, after),
        pressure_kept(piece, before, after),
        energy_balance(
            piece,
            (before,),
            (after,),
            by=lambda state: "specific_enthalpy",
            work=None,
            sentence="at constant pressure the heat is the change of the enthalpy.",
            basis="first law, closed system, with W = p ΔV",
        ),
        work_at_pressure(piece, "pressure", [(before, after)]),
    ]


KIND = process_kind(
    "isobaric",
    "Isobaric change",
    "Heat and work are exchanged at constant pressure.",
    relations=relations,
    stretches=lambda piece: change_stretches(piece, "pressure"),
    path_taken=QUASI_STATIC,
)

r"""Isochoric change: heat is exchanged in a rigid vessel, W = 0 and Q = m (u_b − u_a).

An incompressible body keeps its pressure too.
"""

from __future__ import annotations

from reportgen.balances.plant import Piece
from reportgen.balances.processes.equations import (
    change_stretches,
    energy_balance,
    kept_mass,
    kept_volume,
    no_work,
    one_state,
    process_kind,
)
from reportgen.balances.relations import Relation


def relations(piece: Piece) -> list[Relation]:
    """Mass, volume, no work, energy."""
    before, after = one_state(piece)
    return [
        kept_mass(piece, before, after),
        *kept_volume(piece, before, after),
        no_work(piece, "the volume stays the same"),
        energy_balance(piece, (before,), (after,)),
    ]


KIND = process_kind(
    "isochoric",
    "Isochoric change",
    "Heat is exchanged at constant volume.",
    relations=relations,
    stretches=lambda piece: change_stretches(piece, "volume"),
)

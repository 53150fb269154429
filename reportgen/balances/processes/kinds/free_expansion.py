r"""Free expansion: the content fills an evacuated space, W = 0; without heat its internal energy stays the same."""

from __future__ import annotations

from reportgen.balances.equations import adiabatic
from reportgen.balances.plant import Piece
from reportgen.balances.processes.equations import (
    HEAT_BY_CUSTOM,
    WORK,
    compressible_only,
    energy_balance,
    joined,
    kept_mass,
    no_work,
    one_state,
    process_kind,
)
from reportgen.balances.relations import Relation


def relations(piece: Piece) -> list[Relation]:
    """Mass, no work, energy."""
    before, after = one_state(piece)
    return [
        kept_mass(piece, before, after),
        no_work(piece, "nothing stands against the content as it expands"),
        energy_balance(piece, (before,), (after,)),
    ]


KIND = process_kind(
    "free-expansion",
    "Free expansion",
    "The content expands into an evacuated space.",
    relations=relations,
    defaults=adiabatic,
    parameters=(HEAT_BY_CUSTOM, WORK),
    stretches=joined,
    checks=compressible_only,
)

r"""Partition removal: what was apart in a rigid vessel fills the whole of it.

    m_b = Σ m_i ,   V_b = Σ V_i ,   W = 0 ,   m_b u_b = Σ m_i u_i + Q

The parts hold one fluid, at any pressures and temperatures, or different ideal gases; the state in the end is then of a
fluid that is their mixture, with third-law entropies, so that the entropy of mixing is counted. No heat is exchanged
when nothing else determines it.
"""

from __future__ import annotations

from reportgen.balances.equations import adiabatic
from reportgen.balances.kinds import Port
from reportgen.balances.plant import Piece
from reportgen.balances.processes.equations import (
    AFTER,
    HEAT_BY_CUSTOM,
    WORK,
    energy_balance,
    is_compressible,
    no_work,
    process_kind,
    sum_of,
)
from reportgen.balances.processes.mixing import is_mixing, mixing_faults
from reportgen.balances.relations import Relation, Stretch
from reportgen.errors import Fault


def relations(piece: Piece) -> list[Relation]:
    """Mass, volume, no work, energy."""
    before, after = piece.states("from"), piece.one("to")
    found: list[Relation] = [sum_of(piece, before, after, "mass", "conservation of mass, closed system")]
    if is_compressible(piece, after):
        found.append(sum_of(piece, before, after, "volume", "rigid vessel"))
    return [
        *found,
        no_work(piece, "the vessel is rigid"),
        energy_balance(piece, before, (after,), sentence="internal energies add up, with the heat from outside."),
    ]


def checks(piece: Piece) -> list[Fault]:
    """What a mixture cannot be."""
    return mixing_faults(piece) if is_mixing(piece) else []


def stretches(piece: Piece) -> list[Stretch]:
    """Each part of the same fluid joined to the state in the end: what lies between is no state of equilibrium."""
    after = piece.one("to")
    return [
        Stretch(f"part {number}", before, after, "straight", mixing=True)
        for number, before in enumerate(piece.states("from"), start=1)
        if piece.fluid_id(before) == piece.fluid_id(after)
    ]


KIND = process_kind(
    "partition-removal",
    "Partition removal",
    "A partition in a rigid vessel is taken away and its parts become one.",
    ports=(Port("from", "in", many=True, text="States of the parts before."), AFTER),
    relations=relations,
    defaults=adiabatic,
    parameters=(HEAT_BY_CUSTOM, WORK),
    stretches=stretches,
    checks=checks,
    reports=("entropy_of_mixing", "mole_fraction"),
    mixes=is_mixing,
)

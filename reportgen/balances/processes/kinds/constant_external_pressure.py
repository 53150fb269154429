r"""Change against a constant external pressure: W = p_ext (V_b − V_a), however fast it runs.

When nothing else determines it, the pressure in the end equals the external one, this is that of the surroundings, and
no heat is exchanged. An end volume that is given is that of a stop: the pressure against it may then be any other, and
the missing heat is taken as none first.
"""

from __future__ import annotations

from reportgen.balances.equations import adiabatic
from reportgen.balances.kinds import Parameter
from reportgen.balances.plant import Piece
from reportgen.balances.processes.equations import (
    HEAT_BY_CUSTOM,
    WORK,
    compressible_only,
    energy_balance,
    joined,
    kept_mass,
    one_state,
    process_kind,
    work_at_pressure,
)
from reportgen.balances.relations import Balance, Default, Relation, Term

_VOLUMES = ("volume", "specific_volume", "density")


def relations(piece: Piece) -> list[Relation]:
    """Mass, work, energy."""
    before, after = one_state(piece)
    return [
        kept_mass(piece, before, after),
        work_at_pressure(piece, piece.path("external_pressure"), [(before, after)]),
        energy_balance(piece, (before,), (after,)),
    ]


def defaults(piece: Piece) -> list[Default]:
    """Mechanical equilibrium in the end, the atmosphere outside, no heat."""
    outside, end = piece.path("external_pressure"), f"states.{piece.one('to')}.pressure"
    stopped = any(f"states.{piece.one('to')}.{name}" in piece.given for name in _VOLUMES)
    balance = f"{piece.title} ends with the external pressure inside."
    atmosphere = f"{piece.title} runs against the pressure of the surroundings."

    def equal(first: str, second: str, key: str, name: str, sentence: str) -> Balance:
        terms = (Term(1.0, (first,)), Term(-1.0, (second,)))
        return Balance(piece.path(f"{key}.assumed"), piece.owner, name, sentence, "assumption", terms)

    return [
        Default(
            piece.path("mechanical_equilibrium"),
            piece.owner,
            balance,
            (end,),
            equal(end, outside, "mechanical_equilibrium", "Mechanical equilibrium", balance),
            rank=4 if stopped else 1,
        ),
        Default(
            piece.path("atmosphere"),
            piece.owner,
            atmosphere,
            (outside,),
            equal(outside, "surroundings.pressure", "atmosphere", "External pressure", atmosphere),
            rank=2,
            only_for=outside,
        ),
        *adiabatic(piece),
    ]


KIND = process_kind(
    "constant-external-pressure",
    "Change at constant external pressure",
    "The boundary moves against a pressure from outside that stays the same.",
    relations=relations,
    defaults=defaults,
    parameters=(
        Parameter(
            "external_pressure",
            "pressure",
            "Pressure from outside against which the boundary moves.",
            "the pressure in the end, or that of the surroundings",
        ),
        HEAT_BY_CUSTOM,
        WORK,
    ),
    stretches=joined,
    checks=compressible_only,
)

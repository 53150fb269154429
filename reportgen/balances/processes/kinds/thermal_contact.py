r"""Thermal contact: bodies are brought together and exchange heat until they have one temperature.

    Q = Σ m_i (e_i,b − e_i,a) ,   e = h for a body at constant pressure, u for one at constant volume

``from`` and ``to`` list the states of the bodies in the same order; what is given of the states in the end takes the
place of the common temperature. Heat from outside is zero when nothing else determines it.
"""

from __future__ import annotations

from reportgen.balances.equations import adiabatic
from reportgen.balances.kinds import Port
from reportgen.balances.plant import Piece
from reportgen.balances.processes.equations import (
    CONSTANT_EACH,
    HEAT_BY_CUSTOM,
    WORK,
    as_many,
    energy_balance,
    is_compressible,
    kept_mass,
    kept_volume,
    no_work,
    pairs,
    pressure_kept,
    process_kind,
    work_at_pressure,
)
from reportgen.balances.relations import Balance, Default, Relation, Stretch, Term


def held(piece: Piece) -> list[str]:
    """What each body keeps: ``pressure`` or ``volume``."""
    return piece.choices("constant", len(piece.states("from")))


def relations(piece: Piece) -> list[Relation]:
    """Mass, and pressure or volume, of each body; energy of all; work of those that expand."""
    bodies, kept = pairs(piece), held(piece)
    found: list[Relation] = []
    for (before, after), what in zip(bodies, kept, strict=True):
        found.append(kept_mass(piece, before, after))
        found += kept_volume(piece, before, after) if what == "volume" else [pressure_kept(piece, before, after)]
    form = {
        state: "specific_internal_energy" if what == "volume" else "specific_enthalpy"
        for body, what in zip(bodies, kept, strict=True)
        for state in body
    }
    found.append(
        energy_balance(
            piece,
            [before for before, _ in bodies],
            [after for _, after in bodies],
            by=form.__getitem__,
            work=None,
            sentence="what one body gives off the others take up.",
            basis="first law, closed system"
            + (", with W = p ΔV of what expands" if "specific_enthalpy" in form.values() else ""),
        )
    )
    expanding = [
        body for body, what in zip(bodies, kept, strict=True) if what == "pressure" and is_compressible(piece, body[0])
    ]
    work = work_at_pressure(piece, "pressure", expanding) if expanding else no_work(piece, "all volumes stay the same")
    return [*found, work]


def defaults(piece: Piece) -> list[Default]:
    """One temperature in the end, no heat from outside."""
    ends = piece.states("to")
    first = f"states.{ends[0]}.temperature"
    sentence = f"{piece.title} lasts until the bodies have one temperature."
    found = []
    for state in ends[1:]:
        path = f"states.{state}.temperature"
        relation = Balance(
            piece.path(f"one_temperature.{state}.assumed"),
            piece.owner,
            "One temperature",
            f"{piece.title}: in the end state {state} has the temperature of state {ends[0]}.",
            "assumption",
            (Term(1.0, (path,)), Term(-1.0, (first,))),
        )
        key = piece.path("one_temperature")
        found.append(Default(key, piece.owner, sentence, (path,), relation, rank=1))
    return [*found, *adiabatic(piece)]


def stretches(piece: Piece) -> list[Stretch]:
    """The way of each body."""
    return [
        Stretch(f"body {number}", before, after, what)
        for number, ((before, after), what) in enumerate(zip(pairs(piece), held(piece), strict=True), start=1)
    ]


KIND = process_kind(
    "thermal-contact",
    "Thermal contact",
    "Bodies are brought together and exchange heat.",
    ports=(
        Port("from", "in", many=True, text="States of the bodies before."),
        Port("to", "out", many=True, text="States of the same bodies after, in the same order."),
    ),
    relations=relations,
    defaults=defaults,
    parameters=(HEAT_BY_CUSTOM, WORK),
    choices=(CONSTANT_EACH,),
    stretches=stretches,
    checks=as_many,
)

"""Throttling valve: lowers the pressure of a stream without work; adiabatic unless both sides are given.

Exergetic efficiency: exergy that leaves over exergy that enters, ε = e_2/e_1. Entropy generation number: Ṡgen/(ṁ R).
"""

from __future__ import annotations

from collections.abc import Sequence

from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    HEAT_BY_CUSTOM,
    INLET,
    OUTLET,
    adiabatic,
    elevated_enthalpy,
    energy_balance,
    heat_ports,
    mass_balances,
    pressure_drop,
    stream_stretches,
)
from reportgen.balances.kinds import Kind, Parameter
from reportgen.balances.merit import entropy_number_by_flow, exergy_ratio
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Default, Formula, Relation, token


def relations(piece: Piece) -> list[Relation]:
    """Mass, energy and pressure loss."""
    drop = pressure_drop(piece, piece.one("inlet"), piece.one("outlet"))
    return [*mass_balances(piece), energy_balance(piece, piece.path("heat")), drop]


def defaults(piece: Piece) -> Sequence[Default]:
    """No heat: then h + V²/2 + g z is kept, whatever the flow."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    energy = energy_balance(piece, piece.path("heat"))
    terms = elevated_enthalpy(piece, outlet, None) + elevated_enthalpy(piece, inlet, None, -1.0)
    kept = "the enthalpy is kept" if len(terms) == 2 else "the sum of enthalpy, kinetic and potential energy is kept"
    sentence = f"{piece.title} exchanges neither heat nor work; {kept}."
    balance = Balance(energy.key, piece.owner, energy.name, sentence, energy.basis, tuple(terms))
    return [adiabatic(piece, energy, balance)]


def results(piece: Piece) -> list[Formula]:
    """Exergy kept, and entropy generation in parts of ṁ R."""
    paths = tuple(f"states.{piece.one(port)}.specific_exergy" for port in ("inlet", "outlet"))
    efficiency = exergy_ratio(
        piece,
        "exergy of the stream that leaves over exergy of the stream that enters.",
        paths,
        lambda first, last: last,
        lambda first, last: first,
        rf"\frac{{{token(paths[1])}}}{{{token(paths[0])}}}",
    )
    return [efficiency, entropy_number_by_flow(piece, piece.one("inlet"))]


KIND = Kind(
    name="throttling-valve",
    title="Throttling valve",
    text="Lowers the pressure of a stream without delivering work.",
    ports=(INLET, OUTLET),
    parameters=(
        HEAT_BY_CUSTOM,
        BOUNDARY_TEMPERATURE,
        Parameter("pressure_drop", "pressure_difference", "Pressure loss from inlet to outlet."),
    ),
    relations=relations,
    defaults=defaults,
    results=results,
    heats=heat_ports,
    stretches=lambda piece: stream_stretches(piece, "enthalpy"),
    exergetic_efficiency="Exergy of the stream that leaves over exergy of the stream that enters.",
    entropy_generation_number="Entropy generation over flow times specific gas constant.",
)

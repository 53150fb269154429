"""Throttling valve: lowers the pressure of a stream without work; adiabatic unless both sides are given.

Exergetic efficiency: exergy that leaves over exergy that enters, ε = e_2/e_1. Entropy generation number: Ṡgen/(ṁ R).
"""

from __future__ import annotations

from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    HEAT_BY_CUSTOM,
    HEAT_PORTS,
    INLET,
    OUTLET,
    heat_ports,
    mass_balances,
    pressure_drop,
    stream_stretches,
)
from reportgen.balances.kinds import Kind, Parameter
from reportgen.balances.merit import entropy_number_by_flow, exergy_ratio
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Formula, Relation, token
from reportgen.balances.stream import kept_energy, stream_energy


def relations(piece: Piece) -> list[Relation]:
    """Mass, energy and pressure loss."""
    drop = pressure_drop(piece, piece.one("inlet"), piece.one("outlet"))
    return [*mass_balances(piece), *stream_energy(piece), drop]


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
    defaults=kept_energy,
    results=results,
    heats=heat_ports,
    groups=(HEAT_PORTS,),
    lifts=-1,
    stretches=lambda piece: stream_stretches(piece, "enthalpy"),
    exergetic_efficiency="Exergy of the stream that leaves over exergy of the stream that enters.",
    entropy_generation_number="Entropy generation over flow times specific gas constant.",
)

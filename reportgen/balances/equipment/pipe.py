r"""Pipe: leads a stream from one place to another, with pressure loss, heat loss and a difference of elevation.

``pressure_drop`` is p_1 − p_2 as two gauges would show it, whatever causes it: friction, fittings or height. It is
negative where a pipe runs down so far that the height gives more than the friction takes; a caution compares it with
the static head where elevations are stated. With
``inner_diameter`` the velocities at both ends follow from the flow, ṁ = ρ V π d²/4, and count in the energy balance.

Exergetic efficiency: exergy gained over exergy given up, by the stream and by the heat at its boundary temperature.
Entropy generation number: Ṡgen/(ṁ R).
"""

from __future__ import annotations

import math
from dataclasses import replace

from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    HEAT_BY_CUSTOM,
    HEAT_PORTS,
    INLET,
    OUTLET,
    PRESSURE_DROP,
    heat_ports,
    mass_balances,
    no_pressure_drop,
    pressure_drop,
    stream_stretches,
)
from reportgen.balances.kinds import Kind, Parameter
from reportgen.balances.merit import entropy_number_by_flow
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Default, Equation, Formula, Relation, Term, token
from reportgen.balances.stream import kept_energy, stream_energy
from reportgen.balances.thermal import exergy_with_heat


def velocities(piece: Piece) -> list[str]:
    """Those at both ends where the diameter is given."""
    return [piece.one("inlet"), piece.one("outlet")] if piece.path("inner_diameter") in piece.given else []


def relations(piece: Piece) -> list[Relation]:
    """Mass, pressure loss, energy, and velocities from the diameter."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    return [
        *mass_balances(piece),
        pressure_drop(piece, inlet, outlet),
        *stream_energy(piece),
        *(_continuity(piece, state) for state in velocities(piece)),
    ]


def _continuity(piece: Piece, state: str) -> Balance:
    """ṁ = ρ V π d²/4."""
    flow, density, velocity = (f"states.{state}.{name}" for name in ("mass_flow", "density", "velocity"))
    diameter = piece.path("inner_diameter")
    section = rf"\tfrac{{\pi}}{{4}}\,{token(density)}\left({token(diameter)}\right)^{{2}}"
    return Balance(
        piece.path(f"continuity.{state}"),
        piece.owner,
        "Continuity",
        f"{piece.title}: flow, density and diameter give the velocity of stream {state}.",
        "conservation of mass, uniform velocity",
        (Term(math.pi / 4.0, (density, velocity, diameter, diameter), r"\tfrac{\pi}{4}"), Term(-1.0, (flow,))),
        {velocity: Equation(token(velocity), rf"\frac{{{token(flow)}}}{{{section}}}")},
        {flow: f"{piece.title}: velocity, density and diameter give the flow of stream {state}."},
    )


def defaults(piece: Piece) -> list[Default]:
    """No heat, no pressure loss."""
    return [*kept_energy(piece), no_pressure_drop(piece)]


def results(piece: Piece) -> list[Formula]:
    """Exergy kept, and entropy generation in parts of ṁ R."""
    return [exergy_with_heat(piece), entropy_number_by_flow(piece, piece.one("inlet"))]


KIND = Kind(
    name="pipe",
    title="Pipe",
    text="Leads a stream from one place to another.",
    ports=(INLET, OUTLET),
    parameters=(
        replace(PRESSURE_DROP, text="Pressure at the inlet less that at the outlet, height included.", signed=True),
        Parameter("inner_diameter", "length", "Inner diameter; given, it takes in the velocities at both ends."),
        HEAT_BY_CUSTOM,
        BOUNDARY_TEMPERATURE,
    ),
    relations=relations,
    defaults=defaults,
    results=results,
    heats=heat_ports,
    stretches=lambda piece: stream_stretches(piece, "enthalpy"),
    groups=(HEAT_PORTS,),
    velocities=velocities,
    exergetic_efficiency="Exergy gained over exergy given up, by the stream and by the heat at its boundary.",
    entropy_generation_number="Entropy generation over flow times specific gas constant.",
)

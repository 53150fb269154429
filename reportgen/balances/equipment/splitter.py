"""Splitter: one stream leaves as several in the same state.

The flows of the outlets are given (all but one), or found elsewhere, or set by ``split_fraction``, the share of the
first outlet. The outlets leave in the inlet's state unless they are given otherwise; then the heat is what the energy
balance says.

Exergetic efficiency: exergy that leaves over exergy that enters. Entropy generation number: Ṡgen/(ṁ_in R).
"""

from __future__ import annotations

from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    HEAT_BY_CUSTOM,
    HEAT_PORTS,
    INLET,
    PRESSURE_DROP,
    elevated_enthalpy,
    energy_balance,
    heat_ports,
    heat_sum,
    mass_balances,
    no_pressure_drop,
    pressure_drop,
)
from reportgen.balances.kinds import Kind, Parameter, Port
from reportgen.balances.merit import divided_exergy_ratio, entropy_number_by_flow
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Default, Equation, Formula, Relation, Stretch, Term, token


def relations(piece: Piece) -> list[Relation]:
    """Mass, share of the first outlet, pressure, energy."""
    inlet, first = piece.one("inlet"), piece.states("outlets")[0]
    share, entering, leaving = piece.path("split_fraction"), f"states.{inlet}.mass_flow", f"states.{first}.mass_flow"
    split = Balance(
        piece.path("split_fraction.definition"),
        piece.owner,
        "Split fraction",
        f"{piece.title}: the split fraction is the share of the inlet flow that leaves as stream {first}.",
        "definition of the split fraction",
        (Term(1.0, (share, entering)), Term(-1.0, (leaving,))),
        {leaving: Equation(token(leaving), rf"{token(share)}\,{token(entering)}")},
    )
    return [
        *mass_balances(piece),
        split,
        pressure_drop(piece, inlet, first),
        energy_balance(piece),
        *heat_sum(piece),
    ]


def _equal_energy(piece: Piece, first: str, other: str) -> Balance:
    terms = elevated_enthalpy(piece, other, None) + elevated_enthalpy(piece, first, None, -1.0)
    sentence = f"{piece.title} only divides the stream: {other} has the energy per kilogram of {first}."
    key = piece.path(f"same_enthalpy.{other}")
    return Balance(key, piece.owner, "Divided stream", sentence, "a splitter divides, it does not change", tuple(terms))


def defaults(piece: Piece) -> list[Default]:
    """All streams have the same state: outlets among each other, then as the inlet."""
    inlet, outlets = piece.one("inlet"), piece.states("outlets")
    found = [no_pressure_drop(piece)]
    text = f"{piece.title} only divides the stream; the streams that leave have one state."
    for state in outlets[1:]:
        one, other = f"states.{outlets[0]}.pressure", f"states.{state}.pressure"
        key = piece.path(f"same_pressure.{state}")
        sentence = f"{piece.title} only divides the stream: {state} has the pressure of {outlets[0]}."
        terms = (Term(1.0, (other,)), Term(-1.0, (one,)))
        basis = "a splitter divides, it does not change"
        equal = Balance(key, piece.owner, "Divided stream", sentence, basis, terms)
        found.append(Default(f"{piece.owner}.divides", piece.owner, text, (other,), equal, rank=1))
        enthalpy = f"states.{state}.specific_enthalpy"
        kept = _equal_energy(piece, outlets[0], state)
        found.append(Default(f"{piece.owner}.divides", piece.owner, text, (enthalpy,), kept))
    if piece.count(HEAT_PORTS.name):
        return found
    enthalpy = f"states.{outlets[0]}.specific_enthalpy"
    text = f"{piece.title} exchanges no heat with its surroundings (adiabatic)."
    kept = _equal_energy(piece, inlet, outlets[0])
    found.append(Default(f"{piece.owner}.adiabatic", piece.owner, text, (enthalpy, piece.path("heat")), kept))
    return found


def results(piece: Piece) -> list[Formula]:
    """Exergy kept, and entropy generation in parts of ṁ R."""
    inlet = piece.one("inlet")
    return [divided_exergy_ratio(piece, inlet, piece.states("outlets")), entropy_number_by_flow(piece, inlet)]


def stretches(piece: Piece) -> list[Stretch]:
    """Each outlet joined to the inlet."""
    inlet = piece.one("inlet")
    return [Stretch(f"stream {state}", inlet, state, "enthalpy") for state in piece.states("outlets")]


KIND = Kind(
    name="splitter",
    title="Splitter",
    text="One stream leaves as several in the same state.",
    ports=(INLET, Port("outlets", "out", many=True, text="States of the streams that leave.")),
    parameters=(
        Parameter("split_fraction", "ratio", "Share of the inlet flow that leaves by the first outlet."),
        HEAT_BY_CUSTOM,
        BOUNDARY_TEMPERATURE,
        PRESSURE_DROP,
    ),
    relations=relations,
    defaults=defaults,
    results=results,
    heats=heat_ports,
    groups=(HEAT_PORTS,),
    stretches=stretches,
    exergetic_efficiency="Exergy of the streams that leave over exergy of the stream that enters.",
    entropy_generation_number="Entropy generation over entering flow times specific gas constant.",
)

r"""Nozzle: turns enthalpy into velocity; adiabatic unless the balance says otherwise.

Isentropic efficiency, kinetic energy at the outlet over what the isentropic change to the same pressure would give:

    η = (V_2²/2)/(h_1 + V_1²/2 − h_s)

The velocity at the inlet counts where it is stated, solved for by another piece, or found from ``inlet_area``.

Choking: a convergent nozzle speeds a flow up to the speed of sound and no further. The throat, the smallest area, is
found along the isentropic path. A nozzle that states no ``throat_area`` is taken as convergent, and an outlet pressure
below that of its throat is a stop caution: the stream would leave the mouth at the throat pressure and expand outside.
With ``throat_area`` it is convergent–divergent, and the throat fixes the flow.

Exergetic efficiency: exergy and kinetic energy that leave over those that enter. Entropy generation number: Ṡgen/(ṁ R).
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from reportgen.balances.doubts import Doubt
from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    HEAT_BY_CUSTOM,
    HEAT_PORTS,
    INLET,
    OUTLET,
    heat_ports,
    mass_balances,
    pressure_ratio,
    stream_stretches,
)
from reportgen.balances.isentropic import isentropic_change
from reportgen.balances.kinds import Kind, Parameter
from reportgen.balances.merit import entropy_number_by_flow, kinetic_exergy_ratio, mach_number
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Equation, Formula, Relation, Term, token
from reportgen.balances.speeds import (
    INLET_AREA,
    OUTLET_AREA,
    continuity,
    kinetic_energy,
    throat_relation,
    throat_result,
)
from reportgen.balances.stream import kept_energy, stream_energy

_ROUNDING = 1e-6


def velocities(piece: Piece) -> list[str]:
    """The outlet's always, the inlet's where its area is given."""
    given = piece.path("inlet_area") in piece.given
    return [piece.one("outlet"), *([piece.one("inlet")] if given else [])]


def relations(piece: Piece) -> list[Relation]:
    """Mass, energy, efficiency, areas."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    entering = f"states.{inlet}.velocity" in piece.carried
    return [
        *mass_balances(piece),
        *stream_energy(piece),
        pressure_ratio(piece, outlet, inlet),
        isentropic_change(piece),
        _efficiency(piece, entering),
        continuity(piece, outlet, "outlet_area"),
        *([continuity(piece, inlet, "inlet_area")] if entering else []),
        throat_relation(piece),
    ]


def _efficiency(piece: Piece, entering: bool) -> Balance:
    """V_2²/2 = η (h_1 + V_1²/2 − h_s)."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    efficiency, ideal = piece.path("isentropic_efficiency"), piece.path("isentropic_outlet_enthalpy")
    enthalpy, velocity = f"states.{inlet}.specific_enthalpy", f"states.{outlet}.velocity"
    terms = [kinetic_energy(outlet, 1.0), Term(-1.0, (efficiency, enthalpy)), Term(1.0, (efficiency, ideal))]
    drop = f"{token(enthalpy)} - {token(ideal)}"
    if entering:
        before = f"states.{inlet}.velocity"
        terms.append(kinetic_energy(inlet, -1.0, (efficiency,)))
        drop = rf"{drop} + \tfrac{{1}}{{2}}\left({token(before)}\right)^{{2}}"
    available = rf"\left({drop}\right)"
    return Balance(
        piece.path("isentropic_efficiency.definition"),
        piece.owner,
        "Isentropic efficiency",
        f"{piece.title}: the isentropic efficiency compares the kinetic energy at the outlet with that of the "
        "isentropic change.",
        "definition of isentropic efficiency, by kinetic energy",
        tuple(terms),
        {
            velocity: Equation(token(velocity), rf"\sqrt{{2\,{token(efficiency)}{available}}}"),
            efficiency: Equation(token(efficiency), rf"\frac{{\left({token(velocity)}\right)^{{2}}}}{{2{available}}}"),
        },
        {
            velocity: f"{piece.title}: the isentropic efficiency gives the velocity at the outlet.",
            efficiency: f"{piece.title}: both states and the velocity give the isentropic efficiency.",
        },
    )


def results(piece: Piece) -> list[Formula]:
    """Mach number at the outlet, pressure at the throat, exergy and entropy."""
    return [
        mach_number(piece, piece.one("outlet")),
        throat_result(piece),
        kinetic_exergy_ratio(piece),
        entropy_number_by_flow(piece, piece.one("inlet")),
    ]


def doubts(piece: Piece, samples: Callable[[str], Any]) -> list[Doubt]:
    """A convergent nozzle asked to expand below the pressure at which it chokes."""
    import numpy as np

    if piece.path("throat_area") in piece.given:
        return []
    outlet = f"states.{piece.one('outlet')}.pressure"
    pressure, throat = samples(outlet), samples(piece.path("throat_pressure"))
    pressure = np.where(np.abs(pressure - throat) <= _ROUNDING * np.abs(pressure), throat, pressure)
    text = (
        f"{piece.title}: the flow ⟦chokes|may choke⟧. It reaches the speed of sound at its mouth before the "
        "pressure has fallen to that of the outlet; a convergent nozzle expands no further, and its flow no longer "
        "depends on what follows. State throat_area if it has a divergent part, or let the outlet have the pressure at "
        "which the flow chokes. The value is the outlet pressure, the limit the pressure at which the flow chokes."
    )
    return [Doubt("choked", piece.owner, outlet, text, pressure, throat, dimension="pressure")]


KIND = Kind(
    name="nozzle",
    title="Nozzle",
    text="Turns enthalpy of a stream into velocity.",
    ports=(INLET, OUTLET),
    parameters=(
        Parameter(
            "isentropic_efficiency",
            "efficiency",
            "Kinetic energy at the outlet over that of the isentropic change to the same pressure.",
        ),
        Parameter("pressure_ratio", "ratio", "Higher over lower pressure."),
        OUTLET_AREA,
        INLET_AREA,
        Parameter(
            "throat_area",
            "area",
            "Smallest area of a convergent–divergent nozzle, which then fixes the flow.",
        ),
        HEAT_BY_CUSTOM,
        BOUNDARY_TEMPERATURE,
    ),
    relations=relations,
    defaults=kept_energy,
    results=results,
    heats=heat_ports,
    stretches=lambda piece: stream_stretches(piece, "entropy"),
    groups=(HEAT_PORTS,),
    reports=("isentropic_outlet_enthalpy", "mach_number", "throat_pressure"),
    velocities=velocities,
    lifts=-1,
    doubts=doubts,
    exergetic_efficiency="Exergy and kinetic energy that leave over those that enter.",
    entropy_generation_number="Entropy generation over flow times specific gas constant.",
)

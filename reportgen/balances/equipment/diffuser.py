r"""Diffuser: turns velocity into pressure; adiabatic unless the balance says otherwise.

Isentropic efficiency, rise of enthalpy that the isentropic change to the same pressure needs over the kinetic energy
given up:

    η = (h_s − h_1)/(V_1²/2 − V_2²/2)

The velocity at the inlet is a quantity of the network; that at the outlet counts where it is stated, solved for by
another piece, or found from ``outlet_area``, and is neglected otherwise.

Exergetic efficiency: exergy and kinetic energy that leave over those that enter. Entropy generation number: Ṡgen/(ṁ R).
"""

from __future__ import annotations

from typing import Any

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
from reportgen.balances.merit import entropy_number_by_flow, kinetic_exergy_ratio, mach_number, ratio_of
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Equation, Formula, Relation, Term, token
from reportgen.balances.speeds import INLET_AREA, OUTLET_AREA, continuity, kinetic_energy
from reportgen.balances.stream import kept_energy, stream_energy


def velocities(piece: Piece) -> list[str]:
    """The inlet's always, the outlet's where its area is given."""
    given = piece.path("outlet_area") in piece.given
    return [piece.one("inlet"), *([piece.one("outlet")] if given else [])]


def relations(piece: Piece) -> list[Relation]:
    """Mass, energy, efficiency, areas."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    leaving = f"states.{outlet}.velocity" in piece.carried
    return [
        *mass_balances(piece),
        *stream_energy(piece),
        pressure_ratio(piece, inlet, outlet),
        isentropic_change(piece),
        _efficiency(piece, leaving),
        continuity(piece, inlet, "inlet_area"),
        *([continuity(piece, outlet, "outlet_area")] if leaving else []),
    ]


def _efficiency(piece: Piece, leaving: bool) -> Balance:
    """η (V_1² − V_2²)/2 = h_s − h_1."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    efficiency, ideal = piece.path("isentropic_efficiency"), piece.path("isentropic_outlet_enthalpy")
    enthalpy, velocity = f"states.{inlet}.specific_enthalpy", f"states.{inlet}.velocity"
    terms = [kinetic_energy(inlet, 1.0, (efficiency,)), Term(-1.0, (ideal,)), Term(1.0, (enthalpy,))]
    kinetic = rf"\left({token(velocity)}\right)^{{2}}"
    if leaving:
        terms.append(kinetic_energy(outlet, -1.0, (efficiency,)))
        kinetic += rf" - \left({token(f'states.{outlet}.velocity')}\right)^{{2}}"
    rise = rf"\left({token(ideal)} - {token(enthalpy)}\right)"
    return Balance(
        piece.path("isentropic_efficiency.definition"),
        piece.owner,
        "Isentropic efficiency",
        f"{piece.title}: the isentropic efficiency compares the rise of enthalpy of the isentropic change with the "
        "kinetic energy given up.",
        "definition of isentropic efficiency, by kinetic energy",
        tuple(terms),
        {efficiency: Equation(token(efficiency), rf"\frac{{2{rise}}}{{{kinetic}}}")},
        {
            ideal: f"{piece.title}: the isentropic efficiency gives the enthalpy an isentropic change would lead to.",
            efficiency: f"{piece.title}: both states and the velocity give the isentropic efficiency.",
        },
    )


def results(piece: Piece) -> list[Formula]:
    """Mach number at the inlet, pressure recovery, exergy and entropy."""
    return [
        mach_number(piece, piece.one("inlet")),
        _recovery(piece),
        kinetic_exergy_ratio(piece),
        entropy_number_by_flow(piece, piece.one("inlet")),
    ]


def _recovery(piece: Piece) -> Formula:
    """C_p = (p_2 − p_1)/(ρ_1 V_1²/2)."""
    inlet = f"states.{piece.one('inlet')}"
    inputs = (f"{inlet}.pressure", f"states.{piece.one('outlet')}.pressure", f"{inlet}.density", f"{inlet}.velocity")
    p1, p2, density, velocity = (token(path) for path in inputs)

    def evaluate(first: Any, last: Any, mass: Any, speed: Any) -> Any:
        return ratio_of(last - first, 0.5 * mass * speed**2)

    return Formula(
        piece.path("pressure_recovery"),
        piece.owner,
        "Pressure recovery",
        f"{piece.title}: the pressure recovery is the rise of pressure in parts of the dynamic pressure at the inlet.",
        "definition of the pressure recovery",
        piece.path("pressure_recovery"),
        inputs,
        evaluate,
        rf"\frac{{{p2} - {p1}}}{{\tfrac{{1}}{{2}}\,{density}\,\left({velocity}\right)^{{2}}}}",
        reason="there is no velocity at the inlet",
    )


KIND = Kind(
    name="diffuser",
    title="Diffuser",
    text="Turns velocity of a stream into pressure.",
    ports=(INLET, OUTLET),
    parameters=(
        Parameter(
            "isentropic_efficiency",
            "efficiency",
            "Rise of enthalpy of the isentropic change to the same pressure over the kinetic energy given up.",
        ),
        Parameter("pressure_ratio", "ratio", "Higher over lower pressure."),
        INLET_AREA,
        OUTLET_AREA,
        HEAT_BY_CUSTOM,
        BOUNDARY_TEMPERATURE,
    ),
    relations=relations,
    defaults=kept_energy,
    results=results,
    heats=heat_ports,
    stretches=lambda piece: stream_stretches(piece, "entropy"),
    groups=(HEAT_PORTS,),
    reports=("isentropic_outlet_enthalpy", "mach_number", "pressure_recovery"),
    velocities=velocities,
    exergetic_efficiency="Exergy and kinetic energy that leave over those that enter.",
    entropy_generation_number="Entropy generation over flow times specific gas constant.",
)

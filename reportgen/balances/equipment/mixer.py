"""Mixer: several streams of one fluid leave as one; adiabatic unless the balance says otherwise.

The outlet has the lowest of the inlet pressures less the pressure loss. An inlet whose pressure nothing else determines
enters at the outlet's pressure.

Exergetic efficiency: exergy that leaves over exergy that enters. Entropy generation number: Ṡgen/(ṁ_out R).
"""

from __future__ import annotations

from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    HEAT_BY_CUSTOM,
    HEAT_PORTS,
    OUTLET,
    PRESSURE_DROP,
    adiabatic,
    energy_balance,
    heat_ports,
    heat_sum,
    mass_balances,
    no_pressure_drop,
)
from reportgen.balances.joining import inlet_pressures, outlet_pressure
from reportgen.balances.kinds import Kind, Port
from reportgen.balances.merit import entropy_number_by_flow, exergy_ratio
from reportgen.balances.plant import Piece
from reportgen.balances.relations import (
    Default,
    Formula,
    Relation,
    Stretch,
    token,
)


def relations(piece: Piece) -> list[Relation]:
    """Mass, pressure and energy."""
    pressures = tuple(f"states.{state}.pressure" for state in piece.states("inlets"))
    return [*mass_balances(piece), outlet_pressure(piece, pressures), energy_balance(piece), *heat_sum(piece)]


def defaults(piece: Piece) -> list[Default]:
    """Adiabatic, no pressure loss, unknown inlet pressures equal to the outlet's."""
    return [*adiabatic(piece), no_pressure_drop(piece), *inlet_pressures(piece)]


def results(piece: Piece) -> list[Formula]:
    """Exergy kept, and entropy generation in parts of ṁ R."""
    inlets, outlet = piece.states("inlets"), piece.one("outlet")
    paths = []
    for state in (*inlets, outlet):
        paths += [f"states.{state}.mass_flow", f"states.{state}.specific_exergy"]
    products = [rf"{token(paths[i])}\,{token(paths[i + 1])}" for i in range(0, len(paths), 2)]
    efficiency = exergy_ratio(
        piece,
        "exergy of the stream that leaves over exergy of the streams that enter.",
        paths,
        lambda *arrays: arrays[-2] * arrays[-1],
        lambda *arrays: sum(arrays[i] * arrays[i + 1] for i in range(0, len(arrays) - 2, 2)),
        rf"\frac{{{products[-1]}}}{{{' + '.join(products[:-1])}}}",
    )
    return [efficiency, entropy_number_by_flow(piece, outlet)]


def stretches(piece: Piece) -> list[Stretch]:
    """Each inlet joined to the outlet."""
    outlet = piece.one("outlet")
    return [Stretch(f"stream {state}", state, outlet, "enthalpy", mixing=True) for state in piece.states("inlets")]


KIND = Kind(
    name="mixer",
    title="Mixer",
    text="Several streams of one fluid leave as one.",
    ports=(Port("inlets", "in", many=True, text="States of the streams that enter."), OUTLET),
    parameters=(HEAT_BY_CUSTOM, BOUNDARY_TEMPERATURE, PRESSURE_DROP),
    relations=relations,
    defaults=defaults,
    results=results,
    heats=heat_ports,
    groups=(HEAT_PORTS,),
    stretches=stretches,
    exergetic_efficiency="Exergy of the stream that leaves over exergy of the streams that enter.",
    entropy_generation_number="Entropy generation over leaving flow times specific gas constant.",
)

"""Mixer: several streams of one fluid leave as one; adiabatic unless the balance says otherwise.

The outlet has the lowest of the inlet pressures less the pressure loss. An inlet whose pressure nothing else determines
enters at the outlet's pressure.

Exergetic efficiency: exergy that leaves over exergy that enters. Entropy generation number: Ṡgen/(ṁ_out R).
"""

from __future__ import annotations

from typing import Any

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
from reportgen.balances.kinds import Kind, Port
from reportgen.balances.merit import entropy_number_by_flow, exergy_ratio
from reportgen.balances.plant import Piece
from reportgen.balances.relations import (
    Balance,
    Default,
    Formula,
    Inverse,
    Relation,
    Stretch,
    Term,
    token,
)

#: Inlet pressures closer than this part of each other are equal.
_ROUNDING = 1e-9


def lowest(pressures: Any) -> Any:
    """Smallest of several arrays, element by element."""
    import numpy as np

    return np.min(np.broadcast_arrays(*pressures), axis=0)


def _shares(pressures: Any) -> Any:
    """Derivatives of the smallest by each: 1 for one of the smallest, 0 for all others, whatever the others are."""
    import numpy as np

    smallest = np.argmin(np.broadcast_arrays(*pressures), axis=0)
    return [(smallest == number).astype(float) for number in range(len(pressures))]


def relations(piece: Piece) -> list[Relation]:
    """Mass, pressure and energy."""
    pressures = tuple(f"states.{state}.pressure" for state in piece.states("inlets"))
    return [*mass_balances(piece), outlet_pressure(piece, pressures), energy_balance(piece), *heat_sum(piece)]


def outlet_pressure(piece: Piece, pressures: tuple[str, ...]) -> Formula:
    """p_out = min(p_in) − Δp over the inlets whose pressure something else determines."""
    leaving, drop = f"states.{piece.one('outlet')}.pressure", piece.path("pressure_drop")
    listed = r",\,".join(token(path) for path in pressures)
    smallest = rf"\min\left({listed}\right)"
    return Formula(
        piece.path("pressure_drop.relation"),
        piece.owner,
        "Pressure loss",
        f"{piece.title}: the outlet has the lowest of the inlet pressures less the pressure loss.",
        "definition of the pressure loss of a mixer",
        leaving,
        (drop, *pressures),
        lambda loss, *entering: lowest(entering) - loss,
        rf"{smallest} - {token(drop)}",
        {
            drop: Inverse(
                lambda left, *entering: lowest(entering) - left,
                rf"{smallest} - {token(leaving)}",
                f"{piece.title}: the pressures give the pressure loss.",
            ),
            **{path: _inlet_pressure(piece, path, pressures) for path in pressures},
        },
        reason="another stream enters at a lower pressure than the outlet has with the loss added",
        slopes=lambda loss, *entering: [-1.0 + 0.0 * loss, *_shares(entering)],
    )


def _inlet_pressure(piece: Piece, path: str, pressures: tuple[str, ...]) -> Inverse:
    """p_i = p_out + Δp, for the inlet with the lowest pressure."""
    leaving, drop = f"states.{piece.one('outlet')}.pressure", piece.path("pressure_drop")
    place = pressures.index(path)

    def evaluate(loss: Any, *entering: Any) -> Any:
        import numpy as np

        found = entering[place] + loss
        others = [pressure for number, pressure in enumerate(entering) if number != place]
        above = np.all([found <= other * (1.0 + _ROUNDING) for other in others], axis=0) if others else True
        return np.where(above, found, np.nan)

    state = path.split(".")[1]
    sentence = f"{piece.title}: stream {state}, of the lowest pressure, enters at that of the outlet and the loss."
    return Inverse(evaluate, rf"{token(leaving)} + {token(drop)}", sentence)


def defaults(piece: Piece) -> list[Default]:
    """Adiabatic, no pressure loss, unknown inlet pressures equal to the outlet's."""
    leaving, drop = f"states.{piece.one('outlet')}.pressure", piece.path("pressure_drop")
    found = [*adiabatic(piece), no_pressure_drop(piece)]
    for state in piece.states("inlets"):
        entering = f"states.{state}.pressure"
        key = piece.path(f"inlet_pressure.{state}")
        sentence = f"{piece.title}: stream {state} enters at the pressure of the mixer."
        terms = (Term(1.0, (entering,)), Term(-1.0, (leaving,)), Term(-1.0, (drop,)))
        equal = Balance(key, piece.owner, "Inlet pressure", sentence, "assumption", terms)

        def without(relation: Any, left_out: str = entering) -> Formula:
            others = tuple(path for path in relation.inputs if path not in (left_out, drop))
            return outlet_pressure(piece, others or (left_out,))

        rewrites = {piece.path("pressure_drop.relation"): without}
        found.append(Default(key, piece.owner, sentence, (entering,), equal, rewrites, rank=2, only_for=entering))
    return found


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

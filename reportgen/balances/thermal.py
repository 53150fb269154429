"""Relations of one stream that exchanges heat only: heaters and coolers."""

from __future__ import annotations

from typing import Any

from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    INLET,
    OUTLET,
    energy_balance,
    heat_ports,
    mass_balances,
    no_pressure_drop,
    pressure_drop,
    stream_stretches,
)
from reportgen.balances.kinds import Kind, Parameter
from reportgen.balances.merit import entropy_number_by_power, exergy_ratio
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Formula, Relation, token

__all__ = ["PRESSURE_DROP", "heat_kind"]

PRESSURE_DROP = Parameter(
    "pressure_drop",
    "pressure_difference",
    "Pressure loss from inlet to outlet.",
    "0 when nothing else determines it",
)


def heat_kind(name: str, title: str, text: str, *, heat: str, takes_up: bool, exergetic_efficiency: str) -> Kind:
    """A kind with one stream and its heat; ``heat`` describes that parameter, ``takes_up`` tells its direction."""
    return Kind(
        name=name,
        title=title,
        text=text,
        ports=(INLET, OUTLET),
        parameters=(Parameter("heat", "heat_flow", heat), BOUNDARY_TEMPERATURE, PRESSURE_DROP),
        relations=_relations,
        defaults=lambda piece: [no_pressure_drop(piece)],
        results=lambda piece: [
            _exergy_efficiency(piece, takes_up),
            entropy_number_by_power(piece, piece.path("heat"), "heat flow"),
        ],
        heats=heat_ports,
        stretches=lambda piece: stream_stretches(piece, "enthalpy"),
        exergetic_efficiency=exergetic_efficiency,
        entropy_generation_number="Lost work over heat.",
    )


def _relations(piece: Piece) -> list[Relation]:
    """Mass, pressure loss and energy of a stream that exchanges heat only."""
    drop = pressure_drop(piece, piece.one("inlet"), piece.one("outlet"))
    return [*mass_balances(piece), drop, energy_balance(piece, piece.path("heat"))]


def _exergy_efficiency(piece: Piece, gains: bool) -> Formula:
    """Exergy of stream and heat, gained over spent."""
    paths = [
        f"states.{piece.one('inlet')}.mass_flow",
        f"states.{piece.one('inlet')}.specific_exergy",
        f"states.{piece.one('outlet')}.specific_exergy",
        piece.path("heat"),
        piece.path("entropy_with_heat"),
        "surroundings.temperature",
    ]
    m, e1, e2, heat, entropy, ambient = (token(path) for path in paths)
    stream = rf"{m}\left({e2} - {e1}\right)" if gains else rf"{m}\left({e1} - {e2}\right)"
    of_heat = rf"{heat} - {ambient}\,{entropy}" if gains else rf"{ambient}\,{entropy} - {heat}"

    def change(flow: Any, first: Any, last: Any, *_: Any) -> Any:
        return flow * (last - first)

    def exergy(flow: Any, first: Any, last: Any, heat_flow: Any, carried: Any, temperature: Any) -> Any:
        return heat_flow - temperature * carried

    if gains:
        words = "exergy gained by the stream over exergy of the heat."
        return exergy_ratio(piece, words, paths, change, exergy, rf"\frac{{{stream}}}{{{of_heat}}}")
    return exergy_ratio(
        piece,
        "exergy of the heat given off over exergy given up by the stream.",
        paths,
        lambda *arrays: -exergy(*arrays),
        lambda *arrays: -change(*arrays),
        rf"\frac{{{of_heat}}}{{{stream}}}",
    )

"""Relations of one stream that exchanges heat only: heaters and coolers."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, Literal

from reportgen.balances.doubts import Doubt
from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    HEAT_PORTS,
    INLET,
    OUTLET,
    PRESSURE_DROP,
    energy_balance,
    heat_ports,
    heat_sum,
    mass_balances,
    no_pressure_drop,
    pressure_drop,
    stream_stretches,
)
from reportgen.balances.kinds import Kind, Parameter
from reportgen.balances.merit import entropy_number_by_power, exergy_ratio
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Formula, Relation, token

__all__ = ["exergy_with_heat", "heat_kind"]

#: Exergy of heat below this part of the heat itself is what rounding leaves at the surroundings' temperature.
_ROUNDING = 1e-12


def heat_kind(name: str, title: str, text: str, *, heat: str, takes_up: bool) -> Kind:
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
            exergy_with_heat(piece),
            entropy_number_by_power(piece, piece.path("heat"), "heat flow"),
        ],
        heats=heat_ports,
        stretches=lambda piece: stream_stretches(piece, "enthalpy"),
        groups=(HEAT_PORTS,),
        serves=True,
        doubts=lambda piece, samples: [_heat_the_other_way(piece, samples, takes_up)],
        exergetic_efficiency="Exergy gained over exergy given up, by the stream and by the heat at its boundary.",
        entropy_generation_number="Lost work over heat.",
    )


def _relations(piece: Piece) -> list[Relation]:
    """Mass, pressure loss and energy of a stream that exchanges heat only."""
    drop = pressure_drop(piece, piece.one("inlet"), piece.one("outlet"))
    return [*mass_balances(piece), drop, energy_balance(piece), *heat_sum(piece)]


def _heat_the_other_way(piece: Piece, samples: Callable[[str], Any], takes_up: bool) -> Doubt:
    """A heater that cools, a cooler that heats."""
    words = "gives off" if takes_up else "takes up"
    text = f"{piece.title}: the stream ⟦{words}|may {words.replace('s ', ' ')}⟧ heat, against the name of the piece."
    path = piece.path("heat")
    keep: Literal["above", "below"] = "above" if takes_up else "below"
    return Doubt("heat-against-direction", piece.owner, path, text, samples(path), 0.0, keep, "heat_flow")


def exergy_with_heat(piece: Piece) -> Formula:
    """Exergy gained over exergy spent, of stream and heat: whichever of the two gains.

    The heat brings the exergy Q̇ − T0 Ṡ_Q = (1 − T0/T_b) Q̇. Below the surroundings' temperature this is negative for
    heat that enters: there a stream that takes up heat spends exergy, and what the heat comes from gains it.
    """
    paths = [
        f"states.{piece.one('inlet')}.mass_flow",
        f"states.{piece.one('inlet')}.specific_exergy",
        f"states.{piece.one('outlet')}.specific_exergy",
        piece.path("heat"),
        piece.path("entropy_with_heat"),
        "surroundings.temperature",
    ]
    m, e1, e2, heat, entropy, ambient = (token(path) for path in paths)

    def parts(flow: Any, first: Any, last: Any, heat_flow: Any, carried: Any, temperature: Any) -> tuple[Any, Any]:
        import numpy as np

        stream, brought = flow * (last - first), heat_flow - temperature * carried
        brought = np.where(np.abs(brought) <= _ROUNDING * np.abs(heat_flow), 0.0, brought)
        gained = np.maximum(stream, 0.0) + np.maximum(-brought, 0.0)
        return gained, np.maximum(-stream, 0.0) + np.maximum(brought, 0.0)

    of_stream = rf"\left[{m}\left({e2} - {e1}\right)\right]"
    of_heat = rf"\left[{heat} - {ambient}\,{entropy}\right]"
    return exergy_ratio(
        piece,
        "exergy gained over exergy given up, by the stream and by the heat "
        "(⁺ and ⁻: the size of what is positive or negative, else nothing).",
        paths,
        lambda *arrays: parts(*arrays)[0],
        lambda *arrays: parts(*arrays)[1],
        rf"\frac{{{of_stream}^+ + {of_heat}^-}}{{{of_stream}^- + {of_heat}^+}}",
        reason="neither the stream nor the heat gives up exergy, so that the ratio has no meaning",
    )

r"""Losses of bearings, gear and motor between a stream and the shaft or terminals of its machine.

    absorbing machine   Ẇ = η_m Ẇ_shaft ,   delivering machine   Ẇ_shaft = η_m Ẇ

The power ``power`` is what the stream absorbs or delivers; ``shaft_power`` is what crosses the boundary of the piece.
What lies between leaves as heat, with entropy at ``mechanical_boundary_temperature``. These relations are part of a
piece that states a mechanical efficiency or a shaft power, and of no other.
"""

from __future__ import annotations

from reportgen.balances.equations import heat_ports
from reportgen.balances.kinds import Parameter
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, HeatPort, Relation, Term

__all__ = ["SHAFT_REPORTS", "machine_heats", "shaft_parameters", "shaft_relations", "work_path"]

SHAFT_REPORTS = ("mechanical_heat", "entropy_with_mechanical_heat", "entropy_with_fluid_heat")


def shaft_parameters(verb: str) -> tuple[Parameter, ...]:
    """Parameters of the losses; ``verb`` says which way power is positive ("absorbed" or "delivered")."""
    return (
        Parameter(
            "mechanical_efficiency",
            "efficiency",
            "What bearings, gear and motor or generator leave of the power that passes through them.",
        ),
        Parameter("shaft_power", "power", f"Power {verb} with the losses of bearings, gear and motor counted in."),
        Parameter(
            "mechanical_boundary_temperature",
            "temperature",
            "Temperature at which the heat of the mechanical losses leaves.",
            "the surroundings' temperature",
        ),
    )


def _has_shaft(piece: Piece) -> bool:
    return any(piece.path(name) in piece.given for name in ("mechanical_efficiency", "shaft_power"))


def work_path(piece: Piece) -> str:
    """Path of the power that crosses the boundary of a machine."""
    return piece.path("shaft_power" if _has_shaft(piece) else "power")


def shaft_relations(piece: Piece, absorbs: bool) -> list[Relation]:
    """Mechanical efficiency and the heat of the losses, where the piece states any."""
    if not _has_shaft(piece):
        return []
    power, shaft = piece.path("power"), piece.path("shaft_power")
    efficiency, heat = piece.path("mechanical_efficiency"), piece.path("mechanical_heat")
    whole, part = (shaft, power) if absorbs else (power, shaft)
    return [
        Balance(
            piece.path("mechanical_efficiency.definition"),
            piece.owner,
            "Mechanical efficiency",
            f"{piece.title}: of the power that {'enters at the shaft' if absorbs else 'the stream gives'}, this part "
            f"{'reaches the stream' if absorbs else 'leaves at the shaft'}.",
            "definition of mechanical efficiency",
            (Term(1.0, (efficiency, whole)), Term(-1.0, (part,))),
            {},
            {
                shaft: f"{piece.title}: the mechanical efficiency gives the power at the shaft.",
                power: f"{piece.title}: the mechanical efficiency gives the power of the stream.",
            },
        ),
        Balance(
            piece.path("mechanical_heat.relation"),
            piece.owner,
            "Mechanical losses",
            f"{piece.title}: what bearings, gear and motor lose leaves as heat.",
            "conservation of energy",
            (Term(-1.0, (heat,)), Term(1.0, (part,)), Term(-1.0, (whole,))),
        ),
    ]


def machine_heats(piece: Piece) -> list[HeatPort]:
    """Heat of the stream, and that of the losses where the piece states any."""
    if not _has_shaft(piece):
        return heat_ports(piece)
    losses = HeatPort(
        f"{piece.title}, mechanical losses",
        piece.path("mechanical_heat"),
        piece.path("mechanical_boundary_temperature"),
        piece.path("entropy_with_mechanical_heat"),
        into=(),
        beside=True,
    )
    return [*heat_ports(piece, "entropy_with_fluid_heat"), losses]

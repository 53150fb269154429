"""Heater: a stream that takes up heat from outside.

Exergetic efficiency: exergy gained by the stream over that of the heat, ε = ṁ (e_2 − e_1)/((1 − T0/T_b) Q̇); it needs
the boundary temperature. Entropy generation number: lost work over heat.
"""

from __future__ import annotations

from reportgen.balances.equations import BOUNDARY_TEMPERATURE, INLET, OUTLET, heat_ports, stream_stretches
from reportgen.balances.kinds import Kind, Parameter
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Formula
from reportgen.balances.thermal import (
    PRESSURE_DROP,
    heat_number,
    stream_defaults,
    stream_exergy_efficiency,
    stream_relations,
)


def results(piece: Piece) -> list[Formula]:
    """Exergy gained over exergy of the heat; lost work over heat."""
    return [stream_exergy_efficiency(piece, gains=True), heat_number(piece)]


KIND = Kind(
    name="heater",
    title="Heater",
    text="A stream that takes up heat.",
    ports=(INLET, OUTLET),
    parameters=(
        Parameter("heat", "heat_flow", "Heat flow into the fluid."),
        BOUNDARY_TEMPERATURE,
        PRESSURE_DROP,
    ),
    relations=stream_relations,
    defaults=stream_defaults,
    results=results,
    heats=heat_ports,
    stretches=lambda piece: stream_stretches(piece, "enthalpy"),
    exergetic_efficiency="Exergy gained by the stream over exergy of the heat at its boundary temperature.",
    entropy_generation_number="Lost work over heat.",
)

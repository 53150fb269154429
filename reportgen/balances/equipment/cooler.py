"""Cooler: a stream that gives up heat to the outside. The heat is positive into the fluid, hence negative here.

Exergetic efficiency: exergy of the heat given off over that given up by the stream,
ε = −(1 − T0/T_b) Q̇/(ṁ (e_1 − e_2)); zero when the heat leaves at the surroundings' temperature.
Entropy generation number: lost work over heat.
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
    """Exergy of the heat over exergy given up; lost work over heat."""
    return [stream_exergy_efficiency(piece, gains=False), heat_number(piece)]


KIND = Kind(
    name="cooler",
    title="Cooler",
    text="A stream that gives up heat.",
    ports=(INLET, OUTLET),
    parameters=(
        Parameter("heat", "heat_flow", "Heat flow into the fluid: negative, as the fluid gives it up."),
        BOUNDARY_TEMPERATURE,
        PRESSURE_DROP,
    ),
    relations=stream_relations,
    defaults=stream_defaults,
    results=results,
    heats=heat_ports,
    stretches=lambda piece: stream_stretches(piece, "enthalpy"),
    exergetic_efficiency="Exergy of the heat given off over exergy given up by the stream.",
    entropy_generation_number="Lost work over heat.",
)

"""Heater: a stream that takes up heat from outside.

Exergetic efficiency: exergy gained by the stream over that of the heat, ε = ṁ (e_2 − e_1)/((1 − T0/T_b) Q̇); it needs
the boundary temperature. Entropy generation number: lost work over heat.
"""

from __future__ import annotations

from reportgen.balances.thermal import heat_kind

KIND = heat_kind(
    "heater",
    "Heater",
    "A stream that takes up heat.",
    heat="Heat flow into the fluid.",
    takes_up=True,
    exergetic_efficiency="Exergy gained by the stream over exergy of the heat at its boundary temperature.",
)

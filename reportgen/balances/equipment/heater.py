"""Heater: a stream that takes up heat from outside.

Exergetic efficiency: exergy gained over exergy given up by stream and heat, ε = ṁ (e_2 − e_1)/((1 − T0/T_b) Q̇), and its
reciprocal below the surroundings' temperature, where warming a stream spends its exergy; it needs the boundary
temperature. Entropy generation number: lost work over heat.
"""

from __future__ import annotations

from reportgen.balances.thermal import heat_kind

KIND = heat_kind(
    "heater",
    "Heater",
    "A stream that takes up heat.",
    heat="Heat flow into the fluid.",
    takes_up=True,
)

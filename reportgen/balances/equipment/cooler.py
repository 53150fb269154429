"""Cooler: a stream that gives up heat to the outside. The heat is positive into the fluid, hence negative here.

Exergetic efficiency: exergy gained over exergy given up by stream and heat, ε = −(1 − T0/T_b) Q̇/(ṁ (e_1 − e_2)), and
its reciprocal below the surroundings' temperature; zero when the heat leaves at the surroundings' temperature.
Entropy generation number: lost work over heat.
"""

from __future__ import annotations

from reportgen.balances.thermal import heat_kind

KIND = heat_kind(
    "cooler",
    "Cooler",
    "A stream that gives up heat.",
    heat="Heat flow into the fluid: negative, as the fluid gives it up.",
    takes_up=False,
)

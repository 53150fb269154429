"""Compressor: raises the pressure of a gas by absorbing power; adiabatic unless the balance says otherwise.

Exergetic efficiency: exergy gained by the stream over the power absorbed.
Entropy generation number: lost work over power.
With both states and the power given, the heat (negative for a cooled machine) is what the energy balance says.
"""

from __future__ import annotations

from reportgen.balances.machines import machine_kind

KIND = machine_kind(
    "compressor",
    "Compressor",
    "Raises the pressure of a gas by absorbing power.",
    absorbs=True,
    moves="gas",
    polytropic=True,
    isothermal=True,
)

"""Pump: raises the pressure of a liquid by absorbing power; adiabatic unless the balance says otherwise.

Exergetic efficiency: exergy gained by the stream over the power absorbed.
Entropy generation number: lost work over power.
"""

from __future__ import annotations

from reportgen.balances.machines import machine_kind

KIND = machine_kind("pump", "Pump", "Raises the pressure of a liquid by absorbing power.", absorbs=True, moves="liquid")

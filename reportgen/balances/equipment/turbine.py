"""Turbine: delivers power from a stream that expands; adiabatic unless the balance says otherwise.

Exergetic efficiency: power delivered over exergy given up. Entropy generation number: lost work over power.
"""

from __future__ import annotations

from reportgen.balances.machines import machine_kind

KIND = machine_kind("turbine", "Turbine", "Delivers power from a stream that expands.", absorbs=False, polytropic=True)

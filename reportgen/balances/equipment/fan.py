"""Fan: raises the pressure of a gas by little, moving it; adiabatic unless the balance says otherwise.

``isentropic_efficiency`` is the total efficiency: where velocities are stated, V²/2 counts at inlet and outlet,

    η = (h_s + V_2²/2 − h_1 − V_1²/2)/(h_2 + V_2²/2 − h_1 − V_1²/2) .

Exergetic efficiency: exergy gained by the stream over the power absorbed.
Entropy generation number: lost work over power.
"""

from __future__ import annotations

from reportgen.balances.machines import machine_kind

KIND = machine_kind(
    "fan", "Fan", "Raises the pressure of a gas by little, moving it.", absorbs=True, moves="gas", total=True
)

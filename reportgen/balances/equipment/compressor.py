"""Compressor: raises the pressure of a gas by absorbing power; adiabatic unless the balance says otherwise.

Exergetic efficiency: exergy gained by the stream over the power absorbed.
Entropy generation number: lost work over power.
With both states and the power given, the heat (negative for a cooled machine) is what the energy balance says.
"""

from __future__ import annotations

from reportgen.balances.equations import INLET, OUTLET, heat_ports, stream_stretches
from reportgen.balances.kinds import Kind
from reportgen.balances.machines import (
    POLYTROPIC,
    machine_defaults,
    machine_parameters,
    machine_relations,
    machine_results,
)

KIND = Kind(
    name="compressor",
    title="Compressor",
    text="Raises the pressure of a gas by absorbing power.",
    ports=(INLET, OUTLET),
    parameters=(*machine_parameters("absorbed"), POLYTROPIC),
    relations=lambda piece: machine_relations(piece, absorbs=True, polytropic=True),
    defaults=machine_defaults,
    results=lambda piece: machine_results(piece, absorbs=True),
    heats=heat_ports,
    stretches=lambda piece: stream_stretches(piece, "entropy"),
    power_sign=1,
    exergetic_efficiency="Exergy gained by the stream over the power absorbed.",
    entropy_generation_number="Lost work over the power absorbed.",
)

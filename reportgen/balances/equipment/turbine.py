"""Turbine: delivers power from a stream that expands; adiabatic unless the balance says otherwise.

Exergetic efficiency: power delivered over exergy given up. Entropy generation number: lost work over power.
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
    name="turbine",
    title="Turbine",
    text="Delivers power from a stream that expands.",
    ports=(INLET, OUTLET),
    parameters=(*machine_parameters("delivered"), POLYTROPIC),
    relations=lambda piece: machine_relations(piece, absorbs=False, polytropic=True),
    defaults=machine_defaults,
    results=lambda piece: machine_results(piece, absorbs=False),
    heats=heat_ports,
    stretches=lambda piece: stream_stretches(piece, "entropy"),
    power_sign=-1,
    exergetic_efficiency="Power delivered over the exergy given up by the stream.",
    entropy_generation_number="Lost work over the power delivered.",
)

r"""Charging of a vessel: dm = +dm_s, dU = +h_s dm_s + dQ, from a line of constant state or from a second vessel."""

from __future__ import annotations

from reportgen.balances.kinds import Parameter, Port
from reportgen.balances.vessels.declared import final_pressure, vessel_kind

KIND = vessel_kind(
    "charging",
    "Charging of vessel",
    "A rigid vessel is filled through a valve or an orifice.",
    ports=(
        Port("initial", "in", optional=True, text="Content in the beginning; if not given, the vessel is evacuated"),
        Port("supply", "in", text="What enters: the state of a line, or that of a second vessel in the beginning"),
    ),
    parameters=(
        Parameter(
            "supply_volume",
            "volume",
            "Volume of a second, adiabatic vessel that supplies.",
            "the supply is a line whose state does not change",
        ),
        final_pressure("that of the supply, or, of a second vessel, balance with it"),
    ),
    reports=("supply_final_pressure", "supply_final_temperature"),
)

r"""Discharge of a vessel: dm = −dm_e, dU = −h_e dm_e + dQ, through a valve or an orifice to a back pressure."""

from __future__ import annotations

from reportgen.balances.kinds import Parameter, Port
from reportgen.balances.vessels.declared import OUTLET, final_pressure, vessel_kind

KIND = vessel_kind(
    "discharge",
    "Discharge of vessel",
    "The content of a rigid vessel leaves through a valve or an orifice.",
    ports=(Port("initial", "in", text="Content in the beginning"),),
    parameters=(
        Parameter(
            "back_pressure",
            "pressure",
            "Pressure behind the valve or orifice.",
            "the valve is left outside the boundary",
        ),
        final_pressure("the back pressure"),
    ),
    choices=(OUTLET,),
)

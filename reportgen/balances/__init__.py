"""Mass, energy and entropy relations of each kind of equipment; the network and its solution."""

from reportgen.balances.kinds import Group, Kind, Parameter, Port, kinds

__all__ = ["Group", "Kind", "Parameter", "Port", "kinds"]

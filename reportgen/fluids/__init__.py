"""Property models: vectorised, SI units, mass basis."""

from reportgen.fluids.ideal_gases import ideal_gas

__all__ = ["ideal_gas"]

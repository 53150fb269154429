"""Units at the border: what a file says becomes plain SI floats, and SI floats become what a reader sees.

Only ``units.py`` of this package imports pint, and only when a unit is first converted.
"""

from reportgen.quantities.details import Distribution, Evaluation
from reportgen.quantities.display import Display, Shown
from reportgen.quantities.reading import Quantity, parse
from reportgen.quantities.units import units_of, usual_units

__all__ = ["Display", "Distribution", "Evaluation", "Quantity", "Shown", "parse", "units_of", "usual_units"]

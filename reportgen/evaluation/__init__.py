"""Sample axis, uncertainty, assumption tests, cautions, audits: from a calculation to its Record."""

from reportgen.evaluation.assemble import evaluate
from reportgen.evaluation.models import property_model

__all__ = ["evaluate", "property_model"]

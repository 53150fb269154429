"""Sample axis, uncertainty, assumption tests, cautions, audits: from a calculation to its Record."""

from reportgen.evaluation.assemble import evaluate

__all__ = ["evaluate"]

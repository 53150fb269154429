"""The catalogue of cautions: what to raise, when, and on whose word.

Every module of this package that binds :class:`~reportgen.evaluation.cautions.entry.Caution` objects is part of the
catalogue; a new caution is one decorated function in one of them, named nowhere else. The absence of a caution never
means that something is safe.
"""

from __future__ import annotations

import importlib
import pkgutil
from functools import cache

from reportgen.evaluation.cautions.entry import (
    Caution,
    Finding,
    caution,
    check_adjustments,
    in_order,
    raised,
)
from reportgen.evaluation.cautions.left_out import lost_samples, unevaluated

__all__ = [
    "Caution",
    "Finding",
    "catalogue",
    "caution",
    "check_adjustments",
    "in_order",
    "lost_samples",
    "raised",
    "unevaluated",
]


@cache
def catalogue() -> tuple[Caution, ...]:
    """All cautions in the order of their ids. Raises ValueError when two share one id."""
    found: dict[str, Caution] = {}
    for module in pkgutil.iter_modules(__path__):
        for item in vars(importlib.import_module(f"{__name__}.{module.name}")).values():
            if isinstance(item, Caution) and found.setdefault(item.id, item) is not item:
                raise ValueError(f"two cautions share the id {item.id}")
    return tuple(found[identifier] for identifier in sorted(found))

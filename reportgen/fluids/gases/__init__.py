"""Ideal gases: nine-coefficient polynomials of each species, mixtures with the entropy of mixing."""

from __future__ import annotations

from importlib import import_module
from typing import Any

#: Modules that users ask for by name, loaded then: ``fluids.gases.condensation``.
_LOADED_LATER = ("compositions", "condensation")


def __getattr__(name: str) -> Any:
    if name in _LOADED_LATER:
        return import_module(f"{__name__}.{name}")
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted({*globals(), *_LOADED_LATER})

"""What the author settles of a property model, as the report states it beside the model."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

from reportgen.spec.calculation import HeatPolynomial, HeatTable

if TYPE_CHECKING:
    from reportgen.spec.calculation import FluidSpec

__all__ = ["model_details", "stated_sources"]


def model_details(specification: FluidSpec) -> list[dict[str, Any]]:
    """Entries with ``label`` and either ``text`` or ``value`` [SI] with its ``dimension``."""
    match specification.model:
        case "ideal-gas":
            return list(_ideal_gas(specification))
        case "cubic":
            return list(_cubic(specification))
        case "incompressible":
            return list(_incompressible(specification))
    return []


def stated_sources(specification: FluidSpec) -> list[str]:
    """Sources that the author names for constants of a fluid."""
    constants = [
        f"Critical constants of {name}: {constants.source}"
        for name, constants in specification.critical.items()
        if constants.source
    ]
    pairs = [
        f"Interaction of {pair.first} and {pair.second}: {pair.source}"
        for pair in specification.interactions
        if pair.source
    ]
    return [*constants, *pairs]


def _words(label: str, text: str) -> dict[str, Any]:
    return {"label": label, "text": text, "value": None, "dimension": None}


def _number(label: str, value: float, dimension: str) -> dict[str, Any]:
    return {"label": label, "text": None, "value": value, "dimension": dimension}


def _ideal_gas(specification: FluidSpec) -> Iterator[dict[str, Any]]:
    if specification.products_of is not None:
        yield _words("products of", specification.products_of)
        yield _words("chemistry", specification.chemistry)
    if specification.heat_capacity is not None:
        yield _number("constant heat capacity", specification.heat_capacity, "specific_entropy")


def _cubic(specification: FluidSpec) -> Iterator[dict[str, Any]]:
    yield _words("equation", str(specification.equation))
    translation = specification.volume_translation
    if isinstance(translation, str):
        yield _words("volume translation", translation)
    elif translation is not None:
        for name, shift in translation.items():
            yield _number(f"volume translation of {name}", shift, "molar_volume")
    for pair in specification.interactions:
        yield _number(f"k of {pair.first} and {pair.second}", pair.coefficient, "ratio")
    for name, constants in specification.critical.items():
        yield _number(f"critical temperature of {name}", constants.temperature, "temperature")
        yield _number(f"critical pressure of {name}", constants.pressure, "pressure")
        yield _number(f"acentric factor of {name}", constants.acentric_factor, "ratio")


def _incompressible(specification: FluidSpec) -> Iterator[dict[str, Any]]:
    yield _words("phase", specification.phase)
    if specification.density is not None:
        yield _number("density", specification.density, "density")
    heat = specification.specific_heat
    if isinstance(heat, HeatTable):
        yield _words("specific heat", f"straight between {len(heat.temperatures)} given values")
        yield _number("lowest of them", min(heat.specific_heats), "specific_entropy")
        yield _number("highest of them", max(heat.specific_heats), "specific_entropy")
    elif isinstance(heat, HeatPolynomial):
        powers = ("", " t", *(f" t^{power}" for power in range(2, len(heat.coefficients))))
        terms = (f"{number:g}{power}" for number, power in zip(heat.coefficients, powers, strict=False))
        about = f"T/K − {heat.about:g}" if heat.about else "T/K"
        yield _words("specific heat", f"{' + '.join(terms).replace('+ -', '− ')} in J/(kg K), t = {about}")
    elif heat is not None:
        yield _number("specific heat", heat, "specific_entropy")

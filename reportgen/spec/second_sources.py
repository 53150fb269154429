"""Second sources of states: which can check which model, and what the file's values mean."""

from __future__ import annotations

from typing import Any, cast, get_args

from reportgen.spec.calculation import SecondSource
from reportgen.spec.fluid_schema import NO_SECOND_SOURCE, SecondModel
from reportgen.spec.source import Location, Source
from reportgen.spec.states import fluid_of

__all__ = ["check_second_sources", "second_sources"]

#: What can check a model, by model. The library is one that is installed beside this program.
CHECKED_BY = {
    "ideal-gas": ("real-fluid", "cubic", "statistical", "library"),
    "real-fluid": ("ideal-gas", "cubic", "library"),
    "cubic": ("real-fluid", "ideal-gas", "library"),
    "incompressible": ("real-fluid", "library"),
}


_MODELS = frozenset(get_args(SecondModel))


def second_sources(value: Any) -> tuple[SecondSource, ...] | None:
    """Second sources from the validated value of the key; None when it is not given, empty for "none"."""
    if value is None:
        return None
    items = value if isinstance(value, list) else [value]
    return tuple(
        SecondSource(cast(SecondModel, item))
        if isinstance(item, str)
        else SecondSource(item.model, item.tolerance.value if item.tolerance is not None else None)
        for item in items
        if item != NO_SECOND_SOURCE
    )


def check_second_sources(source: Source) -> None:
    """Second sources that cannot check their fluid, or are named twice."""
    for fluid in source.table("fluids"):
        _check(source, ("fluids", fluid, "second_source"), source.text("fluids", fluid, "model"))
    for state in source.table("states"):
        fluid_id = fluid_of(source, state)
        own = ("states", state, "second_source")
        if source.node(own) is not None and source.node(("fluids", fluid_id or "", "products_of")) is not None:
            message = "The products of a combustor have no second source: their composition is found with the flows."
            if source.text(*own) != NO_SECOND_SOURCE:
                source.report(own, message, at="key", found=f"a state of {fluid_id}", expected="states of other fluids")
            continue
        model = source.text("fluids", fluid_id, "model") if fluid_id is not None else None
        _check(source, ("states", state, "second_source"), model)


def _check(source: Source, location: Location, model: str | None) -> None:
    possible = CHECKED_BY.get(model or "")
    if possible is None:
        return
    named: dict[str, Location] = {}
    for place, second in _named(source, location):
        expected = " or ".join(f'"{name}"' for name in possible)
        if second in named:
            source.report(place, "This second source is named twice.", found=f'"{second}"', expected="each once")
        elif second == model:
            message = "A second source is another model than that of the fluid itself."
            source.report(place, message, found=f'"{second}"', expected=expected)
        elif second in _MODELS and second not in possible:
            message = f'A fluid with model = "{model}" cannot be checked by this second source.'
            source.report(place, message, found=f'"{second}"', expected=expected)
        named.setdefault(second, place)


def _named(source: Source, location: Location) -> list[tuple[Location, str]]:
    """Names of the second sources at a location, each with its own."""
    node = source.node(location)
    if node is None:
        return []
    places: list[Location] = [(*location, number) for number in range(len(node.items))] or [location]
    found = []
    for place in places:
        for candidate in (place, (*place, "model")):
            name = source.text(*candidate)
            if name is not None:
                found.append((candidate, name))
    return found

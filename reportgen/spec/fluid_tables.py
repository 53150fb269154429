"""Fluids of the file: what their tables must hold together, and what the property models refuse."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Iterable, Mapping
from typing import Any

from pydantic import TypeAdapter, ValidationError

from reportgen.errors import Fault, InputError
from reportgen.spec.calculation import FluidSpec
from reportgen.spec.fields import QuantityOf, shown
from reportgen.spec.fluid_schema import FluidTable
from reportgen.spec.fluid_specs import fluid_spec
from reportgen.spec.paths import kind_of
from reportgen.spec.source import Location, Source
from reportgen.spec.states import fluid_of

__all__ = ["FluidCheck", "ask_the_models", "check_fluids", "check_products"]

#: Makes the property model of a fluid, or raises InputError.
FluidCheck = Callable[[FluidSpec], object]

_FRACTION_TOLERANCE = 1e-6
_COMPOSED = ("ideal-gas", "cubic")


def check_fluids(source: Source, context: Mapping[str, float]) -> None:
    """Substance or composition, fractions that add up, constants of substances that are there, ranges in order."""
    for fluid in source.table("fluids"):
        model = source.text("fluids", fluid, "model")
        if model in _COMPOSED and not _is_product(source, fluid):
            _check_composition(source, fluid, context)
        if model == "cubic":
            _check_cubic(source, fluid)
        if model == "incompressible":
            _check_incompressible(source, fluid, context)


# --- products of a combustor ----------------------------------------------------------------------------------------


#: What is said of a gas of given composition only.
_OF_GIVEN = ("substance", "composition", "basis", "heat_capacity", "second_source")


def _is_product(source: Source, fluid: str) -> bool:
    """Whether a fluid is made by a combustor; then what it says of itself is checked."""
    location = ("fluids", fluid)
    table = source.table(*location)
    if "products_of" not in table:
        if "chemistry" in table:
            source.report(
                (*location, "chemistry"),
                "Only the products of a combustor have a chemistry.",
                at="key",
                found="chemistry",
                expected="products_of with the tag of the combustor",
            )
        return False
    if source.text(*location, "model") != "ideal-gas":
        return False  # the key is refused
    for key in _OF_GIVEN:
        if key in table:
            source.report(
                (*location, key),
                "The composition of the products follows from the flows into the combustor.",
                at="key",
                found=key,
                expected="products_of and chemistry only",
            )
    tag = source.text(*location, "products_of")
    kind = kind_of(source, tag) if tag is not None else None
    if tag is None or not source.names_are_complete or source.is_broken(("equipment", tag)):
        return True
    named = [name for name in source.table("equipment") if (each := kind_of(source, name)) is not None and each.burns]
    if tag not in source.table("equipment") or (kind is not None and not kind.burns):
        source.report(
            (*location, "products_of"),
            "There is no combustor of this tag.",
            found=shown(tag),
            expected=" or ".join(f'"{name}"' for name in named) or 'the tag of a piece with kind = "combustor"',
            hint=source.hint(tag, named),
        )
    return True


def check_products(source: Source) -> None:
    """The outlet of a combustor is of a fluid that names it, and of none of the fluids that enter elsewhere."""
    for tag in source.table("equipment"):
        kind = kind_of(source, tag)
        outlets = source.texts("equipment", tag, "outlet")
        if kind is None or not kind.burns or len(outlets) != 1:
            continue
        location, state = outlets[0]
        fluid = fluid_of(source, state)
        if fluid is None or fluid not in source.table("fluids"):
            continue
        if source.text("fluids", fluid, "products_of") != tag and source.node(("fluids", fluid)) is not None:
            source.report(
                location,
                f"The state is of fluid {fluid}, which is not the product of this combustor.",
                found=shown(state),
                expected=f'a state of a fluid with model = "ideal-gas" and products_of = "{tag}"',
            )


# --- composition ----------------------------------------------------------------------------------------------------


def _check_composition(source: Source, fluid: str, context: Mapping[str, float]) -> None:
    node = source.table("fluids")[fluid]
    has_substance, has_composition = "substance" in node.table, "composition" in node.table
    either = "either substance or composition with basis"
    if has_substance and has_composition:
        both = "Both substance and composition are given."
        source.report(("fluids", fluid, "composition"), both, at="key", expected=either)
    elif not has_substance and not has_composition:
        source.miss(("fluids", fluid), "No substance is given.", expected=either)
    if has_composition and "basis" not in node.table:
        source.miss(
            ("fluids", fluid, "composition"),
            "The composition does not say what its fractions count.",
            expected='basis = "mole" or basis = "mass"',
        )
    if has_substance and not has_composition and "basis" in node.table:
        source.report(
            ("fluids", fluid, "basis"),
            "A single substance has no basis.",
            at="key",
            found="basis",
            expected="basis with composition only",
        )
    _check_sum(source, fluid, context)


def _check_sum(source: Source, fluid: str, context: Mapping[str, float]) -> None:
    location = ("fluids", fluid, "composition")
    fractions = source.table(*location)
    marker = QuantityOf(("ratio",))
    read = [marker.read_at(source, (*location, name), context) for name in fractions]
    total = sum(quantity.value for quantity in read if quantity is not None)
    node = source.node(location)
    complete = node is not None and len(fractions) == len(node.table) and None not in read
    if isinstance(node.value if node else None, dict) and complete and abs(total - 1.0) > _FRACTION_TOLERANCE:
        source.report(
            location,
            "The fractions do not add up to 1.",
            found=f"a sum of {total:.7g}",
            expected=f"1 within {_FRACTION_TOLERANCE:g}",
        )


# --- cubic equations of state ---------------------------------------------------------------------------------------


def _substances_of(source: Source, fluid: str) -> list[str]:
    """Substances of a cubic fluid as the file names them; none where they cannot be read."""
    single = source.text("fluids", fluid, "substance")
    return [single] if single is not None else list(source.table("fluids", fluid, "composition"))


def _check_cubic(source: Source, fluid: str) -> None:
    substances = _substances_of(source, fluid)
    if not substances:
        return
    location = ("fluids", fluid)
    for key in ("critical", "volume_translation"):
        for name in source.table(*location, key):
            _check_substance(source, (*location, key, name), name, substances, at_key=True)
    node = source.node((*location, "interaction"))
    pairs: dict[frozenset[str], int] = {}
    for number, row in enumerate(node.items if node is not None else []):
        place = (*location, "interaction", number)
        between = source.texts(*place, "between")
        known = [_check_substance(source, where, name, substances, at_key=False) for where, name in between]
        if len(between) != 2 or not all(known):
            continue
        first, second = (name for _, name in between)
        pair = frozenset((first, second))
        if len(pair) == 1:
            source.report(between[1][0], "A substance has no interaction with itself.", found=shown(first))
        elif pair in pairs:
            source.report(
                (*place, "between"),
                f"The coefficient of these two substances is already given at line {pairs[pair]}.",
                found=f"{first} and {second}",
                expected="each pair once",
            )
        pairs.setdefault(pair, row.line)


def _check_substance(source: Source, location: Location, name: str, substances: list[str], *, at_key: bool) -> bool:
    """Whether a name is one of the substances of its fluid; if not, that is noted."""
    if name in substances:
        return True
    source.report(
        location,
        "This substance is not in the fluid.",
        at="key" if at_key else "value",
        found=shown(name),
        expected=" or ".join(f'"{substance}"' for substance in substances[:12]),
        hint=source.hint(name, substances),
    )
    return False


# --- incompressible -------------------------------------------------------------------------------------------------


def _check_incompressible(source: Source, fluid: str, context: Mapping[str, float]) -> None:
    """A range of temperatures that is one, inside the rows of the specific heat, which rise in temperature."""
    location = ("fluids", fluid)
    marker = QuantityOf(("temperature",))
    node = source.node((*location, "specific_heat"))
    rows = node.items if node is not None else []
    temperatures = [
        marker.read_at(source, (*location, "specific_heat", number, "temperature"), context)
        for number in range(len(rows))
    ]
    for number, (lower, upper) in enumerate(itertools.pairwise(temperatures), start=1):
        if lower is not None and upper is not None and upper.value <= lower.value:
            source.report(
                (*location, "specific_heat", number, "temperature"),
                "The temperatures of the rows do not rise.",
                found=f'"{upper.text}" after "{lower.text}"',
                expected="rows in the order of their temperature, each temperature once",
            )
    limits = {key: marker.read_at(source, (*location, key), context) for key in _RANGE}
    lowest, highest = limits.values()
    if lowest is not None and highest is not None and lowest.value >= highest.value:
        source.report(
            (*location, "maximum_temperature"),
            "The maximum temperature is not above the minimum temperature.",
            found=f'"{highest.text}" and "{lowest.text}"',
            expected="minimum_temperature below maximum_temperature",
        )
    if rows:
        _check_inside_rows(source, location, temperatures, limits)
        return
    for key, limit in limits.items():
        if limit is None and source.node((*location, key)) is None:
            source.miss(location, f'"{key}" is missing.', expected="the range of temperatures for which the data hold")


_RANGE = ("minimum_temperature", "maximum_temperature")


def _check_inside_rows(
    source: Source, location: Location, temperatures: Iterable[Any], limits: Mapping[str, Any]
) -> None:
    known = [row.value for row in temperatures if row is not None]
    for key, limit in limits.items():
        if limit is not None and known and not min(known) <= limit.value <= max(known):
            source.report(
                (*location, key),
                "The range goes beyond the rows of the specific heat.",
                found=f'"{limit.text}"',
                expected=f"{min(known):g} K to {max(known):g} K, or further rows",
            )


# --- what the models refuse -----------------------------------------------------------------------------------------


def ask_the_models(source: Source, context: Mapping[str, float], check_fluid: FluidCheck) -> None:
    """Note what the property models refuse; of fluids whose tables have faults of their own, only the substances."""
    reader: TypeAdapter[Any] = TypeAdapter(FluidTable)
    at_fault = {(fault.path or "").split(".")[1] for fault in source.faults if (fault.path or "").startswith("fluids.")}
    for name, node in source.table("fluids").items():
        if source.crowded or "products_of" in node.table:
            continue
        if name in at_fault:
            _ask_for_substances(source, name, check_fluid)
            continue
        try:
            check_fluid(fluid_spec(source, name, reader.validate_python(node.plain(), context=dict(context))))
        except ValidationError:
            continue  # reported by the validation of the whole file
        except InputError as error:
            for fault in error.faults:
                source.note(_key_of(source, name, fault), fault)


def _ask_for_substances(source: Source, name: str, check_fluid: FluidCheck) -> None:
    """Note the substances that are not carried, each asked for by itself; not those with constants of their own."""
    location = ("fluids", name)
    equation: Any = "Peng-Robinson"
    model: Any = source.text(*location, "model")
    if model not in (*_COMPOSED, "real-fluid"):
        return
    single = source.text(*location, "substance")
    asked: dict[tuple[str, ...], str] = {(*location, "substance"): single} if single else {}
    if model != "real-fluid":
        asked |= {(*location, "composition", part): part for part in source.table(*location, "composition")}
    node = source.node((*location, "critical"))
    own = node.table if node is not None else {}
    for place, substance in asked.items():
        if substance in own or (node is not None and not own):
            continue
        try:
            check_fluid(FluidSpec(name, model, 0, substance=substance, equation=equation))
        except InputError as error:
            for fault in error.faults:
                source.note(place, fault, at="value" if place[-1] == "substance" else "key")


def _key_of(source: Source, name: str, fault: Fault) -> Location:
    """The key of a fluid that a fault without a path speaks of."""
    location = ("fluids", name)
    table = source.table(*location)
    named = [key for key in table if key != "model" and key.replace("_", " ") in fault.message]
    found = (fault.found or "").strip("'\"")
    if found in source.table(*location, "composition"):
        return (*location, "composition", found)
    if named and named[0] in table:
        return (*location, named[0])
    return next(((*location, key) for key in ("substance", "composition") if key in table), location)

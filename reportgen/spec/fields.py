"""Field types of the schema: quantities with their dimension and bounds, names, short texts, dates."""

from __future__ import annotations

import datetime
import math
import re
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Annotated, Any

from pydantic import (
    AfterValidator,
    GetCoreSchemaHandler,
    GetJsonSchemaHandler,
    StringConstraints,
    ValidationInfo,
    WithJsonSchema,
)
from pydantic.json_schema import JsonSchemaValue
from pydantic_core import CoreSchema, core_schema

from reportgen.errors import Fault, InputError
from reportgen.names import DIMENSIONS, NAMES
from reportgen.quantities import Quantity, parse
from reportgen.quantities.wording import words as dimension_in_words
from reportgen.spec.source import Location, Source

__all__ = [
    "CALLED",
    "Bounds",
    "CalendarDate",
    "Identifier",
    "LongText",
    "PageName",
    "QuantityOf",
    "RawQuantity",
    "ShortText",
    "bounds_for",
    "dimensions_for",
    "shown",
]

#: Flows may be written as volumes at normal conditions, which are amounts of substance.
_ALTERNATIVES = {"volume_flow": ("volume_flow", "molar_flow")}

#: One realistic spelling for each dimension, for messages and for editors.
_EXAMPLES = {
    "temperature": "400 degC ± 1.5 K",
    "temperature_difference": "10 K",
    "pressure": "39.0 bar(g) ± 0.3 bar",
    "pressure_difference": "0.2 bar",
    "specific_energy": "2800 kJ/kg",
    "specific_entropy": "6.5 kJ/(kg*K)",
    "density": "12.5 kg/m3",
    "specific_volume": "0.08 m3/kg",
    "molar_volume": "3.2 cm3/mol",
    "mass_flow": "5.2 t/h ± 2 %",
    "molar_flow": "1200 Nm3/h",
    "volume_flow": "350 m3/h",
    "power": "250 kW ± 1 %",
    "heat_flow": "120 kW",
    "entropy_flow": "0.4 kW/K",
    "velocity": "12 m/s",
    "length": "3.5 m",
    "area": "12 cm2",
    "mass": "900 kg",
    "volume": "2.4 m3",
    "heat_transfer_coefficient": "30 W/(m2*K)",
    "efficiency": "78 %",
    "ratio": "0.95",
}


@dataclass(frozen=True)
class Bounds:
    """The values [SI] that make sense for a name; ``remark`` says what a value outside them may have meant."""

    lowest: float = -math.inf
    highest: float = math.inf
    remark: str | None = None

    def admit(self, value: float) -> bool:
        """Whether a value [SI] lies inside."""
        return self.lowest <= value <= self.highest

    @property
    def text(self) -> str:
        """The bounds in words."""
        if math.isinf(self.highest):
            return f"at least {self.lowest:g}"
        return f"{self.lowest:g} to {self.highest:g}"


#: What the dimension alone cannot tell; ``quantities`` knows that efficiencies end at 1 and flows begin at 0.
_BOUNDS: dict[str, Bounds] = {
    "quality": Bounds(0.0, 1.0, 'A vapour fraction of 95 percent is written "95 %" or "0.95".'),
    "superheat": Bounds(0.0, remark="Below saturation, give subcooling."),
    "subcooling": Bounds(0.0, remark="Above saturation, give superheat."),
    "pressure_drop": Bounds(0.0, remark="The drop is counted from inlet to outlet."),
    "split_fraction": Bounds(0.0, 1.0),
    "excess_air": Bounds(-0.99, 1e3, 'An excess of 20 percent is written "20 %" or "0.2".'),
    "pressure_ratio": Bounds(1.0, remark="The ratio is that of the higher to the lower pressure."),
    "area": Bounds(0.0),
    "diameter": Bounds(0.0),
    "discharge_coefficient": Bounds(0.0, remark="It is a share, as of 0.6 for a sharp edge."),
    "heat_transfer": Bounds(0.0),
    "specific_heat": Bounds(0.0),
}


#: What shares its dimension with another quantity, with its article.
CALLED = {"specific_heat": "a specific heat capacity"}


def bounds_for(name: str) -> Bounds:
    """The bounds of a quantity of this name; ``hot_pressure_drop`` has those of ``pressure_drop``."""
    return next((bounds for key, bounds in _BOUNDS.items() if name == key or name.endswith(f"_{key}")), Bounds())


def dimensions_for(name: str) -> tuple[str, ...]:
    """The dimensions in which a name of the glossary may be written."""
    return _ALTERNATIVES.get(name, (NAMES[name].dimension,))


@dataclass(frozen=True)
class QuantityOf:
    """Marks a field as a quantity of these dimensions and bounds.

    ``certain`` refuses an uncertainty, ``absolute`` a gauge pressure; ``words`` are texts taken in place of a quantity;
    ``called`` names a quantity, with its article, that shares its dimension with another: "a specific heat capacity".
    The validation context carries ``atmosphere`` [Pa] (None: not known) and ``coverage_factor`` [1].
    """

    dimensions: tuple[str, ...]
    bounds: Bounds = Bounds()
    certain: bool = False
    absolute: bool = False
    words: tuple[str, ...] = ()
    called: str = ""

    def read(self, raw: object, atmosphere: float | None, coverage_factor: float) -> Quantity:
        """The quantity; raises InputError."""
        try:
            quantity = parse(
                raw,
                self.dimensions,
                atmosphere=None if self.absolute else atmosphere,
                coverage_factor=coverage_factor,
            )
        except InputError as error:
            if not self.called:
                raise
            raise InputError(self._renamed(fault) for fault in error.faults) from None
        if not self.bounds.admit(quantity.value):
            unit = DIMENSIONS[quantity.dimension]
            fault = Fault(
                "The value is outside what is possible.",
                found=f'"{quantity.text}"' + ("" if unit == "1" else f", {quantity.value:g} {unit}"),
                expected=self.bounds.text + ("" if unit == "1" else f" {unit}"),
                hint=self.bounds.remark,
            )
            raise InputError(fault)
        if self.certain and quantity.expanded_uncertainty is not None:
            raise InputError(
                Fault(
                    "An uncertainty has no meaning here: it would not be carried into any result.",
                    found=f'"{quantity.text}"',
                    expected="the value alone",
                )
            )
        return quantity

    def _renamed(self, fault: Fault) -> Fault:
        """The fault with the quantity under its own name, which is not that of its dimension."""
        (dimension,) = self.dimensions
        return replace(fault, message=fault.message.replace(dimension_in_words(dimension), self.called))

    def read_at(self, source: Source, location: Location, context: Mapping[str, float]) -> Quantity | None:
        """The quantity at a location; None, without a word, when there is none that can be read."""
        node = source.node(location)
        if node is None or node.broken:
            return None
        try:
            return self.read(node.plain(), context["atmosphere"], context["coverage_factor"])
        except InputError:
            return None

    def validate(self, raw: object, info: ValidationInfo) -> Quantity | str:
        """For pydantic: InputError is a ValueError and reaches the caller inside the validation error."""
        if isinstance(raw, str) and raw in self.words:
            return raw
        context = info.context or {}
        try:
            return self.read(raw, context.get("atmosphere"), context.get("coverage_factor", 2.0))
        except InputError as error:
            if not self.words or not isinstance(raw, str):
                raise
            words = " or ".join(f'"{word}"' for word in self.words)
            raise InputError(
                replace(fault, expected=f"{words} or {fault.expected}") for fault in error.faults
            ) from None

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.with_info_plain_validator_function(self.validate)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> JsonSchemaValue:
        return self.json_schema()

    def json_schema(self) -> JsonSchemaValue:
        """The forms a quantity can be written in."""
        examples = [_EXAMPLES[dimension] for dimension in self.dimensions if dimension in _EXAMPLES]
        if self.certain:
            examples = [example.partition(" ±")[0] for example in examples]
        number = None
        if any(DIMENSIONS[dimension] == "1" for dimension in self.dimensions):
            number = {"type": "number", **self._number_bounds()}
        return quantity_json_schema(number, [*self.words, *examples], self.words)

    def _number_bounds(self) -> JsonSchemaValue:
        """Bounds of a bare number; it has no unit, so they are those of the value."""
        if "efficiency" in self.dimensions:
            return {"exclusiveMinimum": 0, "maximum": 1}
        bounds = {"minimum": self.bounds.lowest, "maximum": self.bounds.highest}
        return {key: bound for key, bound in bounds.items() if math.isfinite(bound)}


#: What a spelling must begin with: a number, or a bracket round a number and its uncertainty.
_NUMBER_FIRST = r"^\s*\(?\s*[+\-−]?([0-9]|\.[0-9])"


def quantity_json_schema(
    number: JsonSchemaValue | None, examples: list[str], words: tuple[str, ...] = ()
) -> JsonSchemaValue:
    """JSON Schema of a quantity: text, table, and a bare ``number`` where the dimension has no unit."""
    # Without a bare number there must be a unit.
    pattern = _NUMBER_FIRST if number is not None else _NUMBER_FIRST + ".*[A-Za-z%°]"
    if words:
        pattern += "|^(" + "|".join(re.escape(word) for word in words) + ")$"
    text: JsonSchemaValue = {"type": "string", "maxLength": 200, "pattern": pattern, "examples": examples}
    plain = [text] if number is None else [text, number]
    table = {
        "type": "object",
        "required": ["value"],
        "additionalProperties": False,
        "properties": {
            "value": {"anyOf": plain, "description": "Value with unit and, after ±, its uncertainty."},
            "source": _text_schema("Where the value comes from: instrument, document, person."),
            "supplied_by": _text_schema("Who supplied the value."),
            "status": _text_schema("Standing of the value, such as: to be verified."),
            "distribution": {
                "enum": ["normal", "uniform", "triangular", "u-shaped"],
                "description": "Distribution of the uncertainty; for all but normal, ± is the half-width.",
            },
            "evaluation": {
                "enum": ["A", "B"],
                "description": "A: from repeated readings; B: by other means (JCGM 100).",
            },
            "degrees_of_freedom": {"type": "number", "minimum": 1, "description": "Degrees of freedom [1]."},
            "coverage_factor": {
                "type": "number",
                "exclusiveMinimum": 0,
                "maximum": 10,
                "description": "Coverage factor [1] that ± refers to.",
            },
        },
    }
    return {"anyOf": [*plain, table]}


def _text_schema(description: str) -> JsonSchemaValue:
    return {"type": "string", "minLength": 1, "maxLength": 200, "description": description}


@dataclass(frozen=True)
class RawQuantity:
    """Marks a quantity whose dimension another key decides: taken as written and read later."""

    examples: tuple[str, ...]

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.any_schema()

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> JsonSchemaValue:
        return quantity_json_schema({"type": "number"}, list(self.examples))


def _printable(text: str) -> str:
    if not text.strip():
        raise InputError(Fault("The text is empty.", expected="a text, or leave the key out"))
    if any(not sign.isprintable() for sign in text):
        raise InputError(Fault("The text holds a line break or control character.", expected="one line of text"))
    return text.strip()


def _identifier(text: str) -> str:
    if not re.fullmatch(r"[^\W_](?:\w|-)*", text) or len(text) > 40:
        raise InputError(
            Fault(
                "This name cannot be part of a path.",
                found=f'"{text[:41]}"',
                expected="up to 40 letters, digits, - and _, beginning with a letter or digit",
            )
        )
    return text


_WINDOWS_DEVICES = frozenset(
    ["con", "prn", "aux", "nul", *(f"{port}{digit}" for port in ("com", "lpt") for digit in range(10))]
)
#: Folders of the site that are no calculations.
_RESERVED = frozenset(["guide"])


def _page_name(text: str) -> str:
    # The name becomes a folder of the site, on any file system.
    usable = re.fullmatch(r"[A-Za-z0-9](?:[A-Za-z0-9._-]{0,58}[A-Za-z0-9])?", text) and ".." not in text
    if not usable or text.lower().split(".")[0] in _WINDOWS_DEVICES or text.lower() in _RESERVED:
        raise InputError(
            Fault(
                "This cannot be the name of a folder.",
                found=f'"{text[:61]}"',
                expected='up to 60 letters, digits, ".", "-" and "_", such as "SB-TH-014"',
            )
        )
    return text


def _calendar_date(value: object) -> datetime.date:
    if isinstance(value, datetime.date) and not isinstance(value, datetime.datetime):
        return value
    hint = None
    if isinstance(value, str) and re.fullmatch(r"\s*\d{4}-\d{2}-\d{2}\s*", value):
        hint = f"Leave out the quotes: {value.strip()}."
    raise InputError(
        Fault("This is not a date.", found=shown(value), expected="a date as 2026-03-12, without quotes", hint=hint)
    )


class _DateSchema:
    """A calendar date: TOML has a type for it."""

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(_calendar_date)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> JsonSchemaValue:
        return {"type": "string", "format": "date", "pattern": r"^\d{4}-\d{2}-\d{2}$", "examples": ["2026-03-12"]}


def shown(value: object) -> str:
    """A value of the file as a message shows it: short, one line."""
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list):
        return "a list"
    if isinstance(value, bool):
        return str(value).lower()
    text = f'"{value}"' if isinstance(value, str) else str(value)
    text = "".join(sign if sign.isprintable() else " " for sign in text[:61])
    return text if len(text) <= 60 else text[:59] + "…"


ShortText = Annotated[str, StringConstraints(max_length=500), AfterValidator(_printable)]
LongText = Annotated[str, StringConstraints(max_length=100_000)]
# The patterns for editors are a little wider than the checks: regular expressions differ between languages there.
Identifier = Annotated[
    str, AfterValidator(_identifier), WithJsonSchema({"type": "string", "pattern": r"^[^._\s-][^.\s]{0,39}$"})
]
PageName = Annotated[
    str, AfterValidator(_page_name), WithJsonSchema({"type": "string", "pattern": r"^[A-Za-z0-9][A-Za-z0-9._-]{0,59}$"})
]
CalendarDate = Annotated[datetime.date, _DateSchema()]

"""Checking a file against the schema: what pydantic finds, said in the words of an engineer."""

from __future__ import annotations

import re
import types
from collections.abc import Mapping, Sequence
from contextlib import suppress
from typing import Annotated, Any, Literal, Union, get_args, get_origin

from pydantic import BaseModel, Tag, ValidationError

from reportgen.balances.kinds import kinds, process_kinds, vessel_kinds
from reportgen.errors import Fault, InputError
from reportgen.names import NAMES
from reportgen.spec.fields import QuantityOf, shown
from reportgen.spec.schema import LATER, document
from reportgen.spec.source import Location, Source
from reportgen.spec.toml_cursor import Node

__all__ = ["context_of", "validate"]

STANDARD_ATMOSPHERE = 101_325.0

_TYPES = {
    "string_type": "text in quotes",
    "model_type": "a table",
    "model_attributes_type": "a table",
    "dict_type": "a table",
    "list_type": "a list in [ ]",
    "float_type": "a number without quotes",
    "int_type": "a whole number without quotes",
}
_BOUNDS = {
    "greater_than": "above {gt:g}",
    "greater_than_equal": "at least {ge:g}",
    "less_than": "below {lt:g}",
    "less_than_equal": "at most {le:g}",
    "too_short": "{min_length} or more entries",
    "too_long": "at most {max_length} entries",
    "string_too_short": "{min_length} or more characters",
    "string_too_long": "at most {max_length} characters",
}


def context_of(source: Source) -> dict[str, float]:
    """Atmosphere [Pa] and coverage factor [1] of the file, which the reading of every quantity needs.

    Where the file gives no usable one, that is a fault of its own; the rest is then read with the standard
    atmosphere and k = 2, so that each of its own faults is found and none is reported for the missing one.
    """
    coverage = source.node(("uncertainty", "coverage_factor"))
    factor = coverage.value if coverage is not None else None
    usable = isinstance(factor, int | float) and not isinstance(factor, bool) and 1.0 <= factor <= 10.0
    atmosphere = STANDARD_ATMOSPHERE
    pressure = source.node(("surroundings", "pressure"))
    if pressure is not None and not pressure.broken:
        with suppress(InputError):
            atmosphere = QuantityOf(("pressure",), absolute=True).read(pressure.plain(), None, 2.0).value
    return {"atmosphere": atmosphere, "coverage_factor": float(factor) if usable else 2.0}  # type: ignore[arg-type]


def validate(source: Source, context: Mapping[str, float]) -> BaseModel | None:
    """The validated file; None, with the faults noted in ``source``, when it does not fit the schema."""
    try:
        return document().model_validate(source.root.plain(), context=dict(context))
    except ValidationError as error:
        details = error.errors(include_url=False)
        # A key that is only misspelt is not reported as missing too, so the unknown keys come first.
        meant = {
            name for detail in details if detail["type"] == "extra_forbidden" for name in _note_unknown(source, detail)
        }
        for detail in details:
            if detail["type"] != "extra_forbidden" and not (detail["type"] == "missing" and detail["loc"] in meant):
                _note(source, detail)
        return None


def _refuse_later(source: Source, location: Location, table: str, word: str, *, at: Literal["key", "value"]) -> bool:
    """Whether a word belongs to what this version does not carry; then that is noted."""
    subject = LATER.get(table, {}).get(word)
    if subject is None:
        return False
    source.report(location, f"{subject} not carried by this version.", at=at, found=word)
    return True


def _note(source: Source, detail: Any) -> None:
    """Turn one finding of pydantic into the faults it means."""
    kind, tagged = detail["type"], tuple(detail["loc"])
    context = detail.get("ctx", {})
    about_key = bool(tagged) and tagged[-1] == "[key]"
    location = _without_tags(tagged[:-1] if about_key else tagged)
    cause = context.get("error")
    if isinstance(cause, InputError):
        for fault in cause.faults:
            _note_value(source, location, fault, about_key)
    elif kind == "missing":
        what = _description(tagged)
        if len(location) == 1 and what:
            what = f"a table [{location[0]}]: {what[:1].lower()}{what[1:]}"
        source.miss(location, f'"{location[-1]}" is missing.', expected=what)
    elif kind in ("union_tag_not_found", "union_tag_invalid"):
        _note_tag(source, location, context)
    elif kind == "literal_error":
        choices = _choices(context["expected"])
        _note_choice(source, location, choices)
    else:
        message, expected, hint = "The value does not fit.", detail["msg"], None
        if kind in _TYPES:
            message, expected = "This is not the type of value that belongs here.", _TYPES[kind] + _as_in(tagged)
            hint = _rewritten(kind, source.node(location))
        elif kind in _BOUNDS:
            expected = _BOUNDS[kind].format(**context)
        source.report(location, message, found=_found(source, location), expected=expected, hint=hint)


def _note_value(source: Source, location: Location, fault: Fault, about_key: bool) -> None:
    """A fault that the value's own reader found; in a quantity table, at the key that its message speaks of."""
    node = source.node(location)
    if about_key or node is None or not node.table:
        source.note(location, fault, at="key" if about_key else "value")
        return
    named = [word for word in re.findall(r"\w+", fault.message) if word in node.table]
    key = named[0] if named else "value"
    unknown = re.search(r'has no "', fault.message) is not None
    source.note((*location, key) if key in node.table else location, fault, at="key" if unknown else "value")


def _note_tag(source: Source, location: Location, context: Mapping[str, Any]) -> None:
    """A kind of equipment or process, or a property model, that is absent or not known."""
    key = str(context["discriminator"]).strip("'")
    place = (*location, key)
    node = source.node(place)
    if node is None:
        noun = {"processes": "process", "vessels": "vessel"}.get(str(location[0]), "equipment")
        what = f"what kind of {noun} it is" if key == "kind" else "which property model holds"
        source.miss(place, f'"{key}" is missing.', expected=what)
    elif not node.broken:
        _note_choice(source, place, _choices(context.get("expected_tags", "")))


def _note_choice(source: Source, location: Location, choices: Sequence[str]) -> None:
    """A value that is none of those allowed."""
    node = source.node(location)
    value = node.value if node is not None else None
    table = ".".join(str(part) for part in (location[0], location[-1]))
    if isinstance(value, str) and _refuse_later(source, location, table, value, at="value"):
        return
    key = next((part for part in reversed(location) if isinstance(part, str)), "")
    source.report(
        location,
        f'This is not a value that "{key}" can have.',
        found=shown(value),
        expected=" or ".join(f'"{choice}"' for choice in choices),
        hint=source.hint(value, choices) if isinstance(value, str) else None,
    )


def _note_unknown(source: Source, detail: Any) -> list[Location]:
    """Note a key that the schema does not have; returns where the key that was probably meant would stand."""
    tagged = tuple(detail["loc"])
    location = _without_tags(tagged)
    choices = _keys_of(tagged[:-1])
    key = str(location[-1])
    table = str(location[0]) if len(location) > 1 else ""
    if _refuse_later(source, location, table, key, at="key"):
        return []
    meant = source.nearest(key, choices)
    source.report(
        location,
        f'There is no key "{shown(key)[1:-1]}" here.',
        at="key",
        found=shown(key)[1:-1],
        expected=", ".join(choices),
        hint=f'Did you mean "{meant}"?' if meant else _why_not(source, location),
    )
    return [(*tagged[:-1], meant)] if meant else []


def _why_not(source: Source, location: Location) -> str | None:
    """What a kind is, where a quantity of the glossary is no parameter of it: "without heat" answers for ``heat``."""
    registry = {"equipment": kinds, "processes": process_kinds, "vessels": vessel_kinds}.get(str(location[0]))
    if registry is None or len(location) != 3 or location[2] not in NAMES:
        return None
    node = source.node((*location[:2], "kind"))
    kind = registry().get(str(node.plain())) if node is not None else None
    return f"{kind.title}: {kind.text}" if kind is not None else None


def _rewritten(kind: str, node: Node | None) -> str | None:
    """How a name or number of the wrong form would be written, where that is plain."""
    value = node.plain() if node is not None else None
    if kind == "string_type" and isinstance(value, int | float) and not isinstance(value, bool):
        return f'Write "{shown(value)}".'
    if kind == "string_type" and isinstance(value, list) and len(value) == 1 and isinstance(value[0], str):
        return f"Write {shown(value[0])}."
    if kind == "list_type" and isinstance(value, str):
        return f"Write [{shown(value)}]."
    return None


def _found(source: Source, location: Location) -> str:
    node = source.node(location)
    return shown(node.plain()) if node is not None else "nothing"


def _choices(expected: str) -> list[str]:
    """The texts in pydantic's ``'a', 'b' or 'c'``."""
    return re.findall(r"'([^']*)'", expected)


# --- where in the schema a finding belongs --------------------------------------------------------------------------


def _without_tags(tagged: Location) -> tuple[str | int, ...]:
    """A location of pydantic without the names of variants that it puts behind pieces, processes, fluids and values."""
    if len(tagged) > 2 and tagged[0] in ("equipment", "processes", "vessels", "fluids"):
        tagged = (*tagged[:2], *tagged[3:])
    return tuple(part for part in tagged if not _is_tag(part))


def _is_tag(part: str | int) -> bool:
    """Whether a part of a location names one of several forms of a value: such names stand in brackets."""
    return isinstance(part, str) and part.startswith("(")


def _variants(annotation: Any) -> list[Any]:
    """The types an annotation stands for, without the marks round them and without None."""
    while get_origin(annotation) is Annotated:
        annotation = get_args(annotation)[0]
    if get_origin(annotation) in (Union, types.UnionType):
        return [inner for variant in get_args(annotation) for inner in _variants(variant)]
    return [] if annotation is type(None) else [annotation]


def _step(annotation: Any, part: str | int) -> Any:
    """The annotation one key or index further inside."""
    variants = _variants(annotation)
    if _is_tag(part):
        return _form(annotation, part)
    for variant in variants:
        if isinstance(variant, type) and issubclass(variant, BaseModel):
            if len(variants) > 1:
                tag = variant.model_fields.get("kind") or variant.model_fields.get("model")
                if tag is not None and get_args(tag.annotation) == (part,):
                    return variant
            elif part in variant.model_fields:
                return variant.model_fields[str(part)].annotation
        elif get_origin(variant) in (dict, list):
            return get_args(variant)[-1]
    return None


def _form(annotation: Any, tag: str | int) -> Any:
    """The form of a value that goes by a tag; None when it has no such form."""
    arguments = get_args(annotation)
    if get_origin(annotation) is Annotated:
        tagged = any(isinstance(mark, Tag) and mark.tag == tag for mark in arguments[1:])
        return annotation if tagged else _form(arguments[0], tag)
    if get_origin(annotation) in (Union, types.UnionType):
        return next((found for inner in arguments if (found := _form(inner, tag)) is not None), None)
    return None


def _model_at(tagged: Location) -> type[BaseModel] | None:
    annotation: Any = document()
    for part in tagged:
        annotation = _step(annotation, part)
    variants = _variants(annotation)
    return variants[0] if variants and isinstance(variants[0], type) and issubclass(variants[0], BaseModel) else None


def _keys_of(tagged: Location) -> list[str]:
    model = _model_at(tagged)
    return list(model.model_fields) if model is not None else []


def _field(tagged: Location) -> Any:
    """The field at a location, or None."""
    model = _model_at(tagged[:-1])
    return model.model_fields.get(str(tagged[-1])) if model is not None else None


def _as_in(tagged: Location) -> str:
    """How the field at a location is written, where it has an example: ", as in: critical = { ... }"."""
    field = _field(tagged)
    return f", as in: {tagged[-1]} = {_inline(field.examples[0])}" if field is not None and field.examples else ""


def _inline(value: Any) -> str:
    """A table, list, text or number as TOML writes it on one line."""
    if isinstance(value, Mapping):
        return "{ " + ", ".join(f"{key} = {_inline(item)}" for key, item in value.items()) + " }"
    if isinstance(value, list):
        return "[" + ", ".join(map(_inline, value)) + "]"
    return f'"{value}"' if isinstance(value, str) else str(value)


def _description(tagged: Location) -> str | None:
    """Description of the field at a location."""
    field = _field(tagged)
    return field.description.rstrip(".") if field is not None and field.description else None

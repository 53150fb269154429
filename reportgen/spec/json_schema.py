"""The schema as JSON Schema, with which editors complete and check a calculation file while it is written."""

from __future__ import annotations

from typing import Any

from reportgen.spec.schema import document

__all__ = ["json_schema"]


def json_schema() -> dict[str, Any]:
    """JSON Schema (2020-12) of the calculation file; every property has a description, quantities with their units.

    A file that the schema refuses is refused by ``read`` too. The converse does not hold: names that must be defined
    elsewhere in the file, units and sums are beyond a schema.
    """
    made = document().model_json_schema()
    definitions: dict[str, Any] = {}
    schema = {key: _tidied(part, definitions) for key, part in made.items()}
    schema["$defs"] |= definitions
    schema["$schema"] = "https://json-schema.org/draft/2020-12/schema"
    return schema


def _tidied(part: Any, definitions: dict[str, Any]) -> Any:
    """A part of the schema without null and without made-up titles; tables of quantities become ``definitions``.

    TOML has no null: an optional key is left out. The titles that pydantic makes only repeat the keys.
    """
    if isinstance(part, list):
        return [_tidied(item, definitions) for item in part]
    if not isinstance(part, dict):
        return part
    made_up = {key for key in ("title", "default") if isinstance(part.get(key), str | None)}
    cleaned = {key: _tidied(value, definitions) for key, value in part.items() if key not in made_up}
    if isinstance(part.get("default"), str):
        cleaned["default"] = part["default"]
    variants = cleaned.get("anyOf")
    if isinstance(variants, list) and {"type": "null"} in variants:
        rest = [variant for variant in variants if variant != {"type": "null"}]
        del cleaned["anyOf"]
        cleaned |= {"anyOf": rest} if len(rest) > 1 else {**rest[0], **cleaned}
    if "degrees_of_freedom" in cleaned.get("properties", {}):
        return _shared(cleaned, definitions)
    return cleaned


def _shared(table: dict[str, Any], definitions: dict[str, Any]) -> dict[str, str]:
    """A reference to a table of a quantity; equal tables are kept once."""
    name = next((known for known, definition in definitions.items() if definition == table), None)
    if name is None:
        name = f"Quantity{len(definitions) + 1}"
        definitions[name] = table
    return {"$ref": f"#/$defs/{name}"}

"""The calculation file: schema, reading with line numbers, JSON Schema."""

"""Tests of the real fluids."""

#: Fluids of every kind of term and behaviour, for tests too long to run over all that are carried.
SAMPLE = (
    "air",
    "ammonia",
    "argon",
    "carbon dioxide",
    "methane",
    "nitrogen",
    "oxygen",
    "propane",
    "R134a",
    "water",
)

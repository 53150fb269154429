"""Which paths a calculation can have, and of what dimension their values are."""

from __future__ import annotations

from collections.abc import Iterator

from reportgen.balances.kinds import Kind, kinds
from reportgen.names import NAMES
from reportgen.spec.schema import INTENSIVE, MOST_ENTRIES, STATE_KEYS
from reportgen.spec.source import Source
from reportgen.spec.states import givens_of

__all__ = ["input_locations", "kind_of", "result_dimensions"]

#: Known of a state only where they are given.
_ONLY_WHERE_GIVEN = ("volume_flow", "velocity", "elevation")
_STATE_RESULTS = (
    *INTENSIVE,
    "mass_flow",
    "molar_flow",
    "entropy_flow",
    "specific_internal_energy",
    "compressibility_factor",
    "isobaric_heat_capacity",
    "isochoric_heat_capacity",
    "speed_of_sound",
    "specific_exergy",
)
_TOTAL_RESULTS = (
    "entropy_generation",
    "lost_work",
    "power",
    "heat",
    "entropy_with_heat",
    "energy_imbalance",
    "mass_imbalance",
    "closure",
)
#: Of every piece, beside what its kind declares.
_EQUIPMENT_RESULTS = (
    "heat",
    "entropy_generation",
    "lost_work",
    "exergetic_efficiency",
    "entropy_generation_number",
    "energy_imbalance",
    "mass_imbalance",
    "entropy_with_heat",
)
_SURROUNDINGS = ("temperature", "pressure")


def kind_of(source: Source, tag: str) -> Kind | None:
    """The kind of a piece of equipment; None while the file names none that is known."""
    return kinds().get(source.text("equipment", tag, "kind") or "")


def input_locations(source: Source) -> Iterator[tuple[str | int, ...]]:
    """Locations of all quantities that the file gives for the balances, in the order of the report."""
    for key in _SURROUNDINGS:
        if key in source.table("surroundings"):
            yield ("surroundings", key)
    for state, node in source.table("states").items():
        for key in node.table:
            if key in STATE_KEYS:
                yield ("states", state, key)
    for tag, node in source.table("equipment").items():
        kind = kind_of(source, tag)
        if kind is None:
            continue
        parameters = {parameter.name for parameter in kind.parameters}
        groups = {group.name for group in kind.groups}
        for key, value in node.table.items():
            if key in parameters:
                yield ("equipment", tag, key)
            elif key in groups:
                for index, item in enumerate(value.items):
                    for inner in item.table:
                        yield ("equipment", tag, key, index, inner)


def result_dimensions(source: Source, path: str) -> tuple[str, ...] | str:
    """Dimensions of the value at a path, or, as one text, what is wrong with a path that cannot exist."""
    parts = path.split(".")
    owners = {"states": "states", "equipment": "equipment", "trains": "trains"}
    if parts[0] in owners and len(parts) >= 3:
        owner = parts[1]
        present = source.table(parts[0])
        if owner not in present:
            hint = source.hint(owner, present)
            return f'There is no "{owner[:60]}" in [{parts[0]}].' + (f" {hint}" if hint else "")
        names = _names_of(source, parts[0], owner)
        rest = parts[2:]
    elif parts[0] in ("total", "surroundings") and len(parts) == 2:
        names = {name: (NAMES[name].dimension,) for name in (_TOTAL_RESULTS if parts[0] == "total" else _SURROUNDINGS)}
        rest = parts[1:]
    else:
        return "A path is states.<id>.<name>, equipment.<tag>.<name>, trains.<id>.<name> or total.<name>."
    name = ".".join(rest)
    if name in names:
        return names[name]
    hint = source.hint(name, names)
    return f'There is no "{name[:60]}" among the results of {".".join(parts[: -len(rest)])[:60]}.' + (
        f" {hint}" if hint else ""
    )


def _may_move(source: Source, state: str) -> bool:
    """Whether the state is at a port of a piece that may find velocities."""
    for tag in source.table("equipment"):
        kind = kind_of(source, tag)
        if kind is not None and kind.velocities is not None:
            if any(name == state for port in kind.ports for _, name in source.texts("equipment", tag, port.name)):
                return True
    return False


def _names_of(source: Source, section: str, owner: str) -> dict[str, tuple[str]]:
    """Names of the results of one state, piece or train with their dimensions."""
    if section == "states":
        given = [name for name in _ONLY_WHERE_GIVEN if name in givens_of(source, owner)]
        given += ["velocity"] if _may_move(source, owner) else []
        return {name: (NAMES[name].dimension,) for name in (*_STATE_RESULTS, *given)}
    if section == "trains":
        return {name: (NAMES[name].dimension,) for name in _TOTAL_RESULTS}
    names = {name: (NAMES[name].dimension,) for name in _EQUIPMENT_RESULTS}
    kind = kind_of(source, owner)
    if kind is not None:
        names |= {parameter.name: (parameter.dimension,) for parameter in kind.parameters}
        names |= {name: (NAMES[name].dimension,) for name in kind.reports}
        for group in kind.groups:
            node = source.node(("equipment", owner, group.name))
            for number in range(1, 1 + min(MOST_ENTRIES, len(node.items if node is not None else []))):
                names |= {f"{group.name}.{number}.{entry.name}": (entry.dimension,) for entry in group.parameters}
    return names

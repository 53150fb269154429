"""Which paths a calculation can have, and of what dimension their values are."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from reportgen.balances.kinds import Kind, kinds, process_kinds, vessel_kinds
from reportgen.names import NAMES, name_of
from reportgen.spec.schema import AMOUNTS, INTENSIVE, MOST_ENTRIES, STATE_KEYS
from reportgen.spec.source import Source
from reportgen.spec.states import fluid_of, givens_of

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
#: Of cycles, and of compressions in several stages.
_CYCLE_RESULTS = (
    "net_power",
    "heat_supplied",
    "heat_rejected",
    "thermal_efficiency",
    "coefficient_of_performance",
    "second_law_efficiency",
    "pressure_ratio",
    "isothermal_work",
    "isothermal_efficiency",
)
_TOTAL_RESULTS = (
    *_CYCLE_RESULTS,
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
#: Of every process.
_PROCESS_RESULTS = (
    "heat",
    "work",
    "entropy_change",
    "entropy_with_heat",
    "entropy_generation",
    "lost_work",
    "energy_imbalance",
    "mass_imbalance",
)
#: Of a sum over processes.
_CLOSED_RESULTS = (*_PROCESS_RESULTS, "closure")
#: What a process reports for each species of a mixture.
_OF_SPECIES = "mole_fraction"
#: Of each stream that enters a combustor.
_OF_STREAMS = ("oxygen_needed", "oxygen_free", "lower_heating_value", "higher_heating_value")
#: What a combustor reports for each species of its products.
_OF_PRODUCTS = ("mole_fraction", "dry_mole_fraction")
_SURROUNDINGS = ("temperature", "pressure")
#: Tables whose entries have a kind, with the registry of their kinds.
_REGISTRIES = {"equipment": kinds, "processes": process_kinds, "vessels": vessel_kinds}


def kind_of(source: Source, tag: str, section: str = "equipment") -> Kind | None:
    """The kind of a piece of equipment, or of one of ``processes``; None while the file names none that is known."""
    return _REGISTRIES[section]().get(source.text(section, tag, "kind") or "")


def input_locations(source: Source) -> Iterator[tuple[str | int, ...]]:
    """Locations of all quantities that the file gives for the balances, in the order of the report."""
    for key in _SURROUNDINGS:
        if key in source.table("surroundings"):
            yield ("surroundings", key)
    for state, node in source.table("states").items():
        for key in node.table:
            if key in STATE_KEYS:
                yield ("states", state, key)
    for section in _REGISTRIES:
        for tag, node in source.table(section).items():
            kind = kind_of(source, tag, section)
            if kind is None:
                continue
            parameters = {parameter.name for parameter in kind.parameters}
            groups = {group.name for group in kind.groups}
            for key, value in node.table.items():
                if key in parameters:
                    yield (section, tag, key)
                elif key in groups:
                    for inner in value.table:
                        yield (section, tag, key, inner)
                    for index, item in enumerate(value.items):
                        for inner in item.table:
                            yield (section, tag, key, index, inner)


def result_dimensions(source: Source, path: str) -> tuple[str, ...] | str:
    """Dimensions of the value at a path, or, as one text, what is wrong with a path that cannot exist."""
    parts = path.split(".")
    if parts[0] in ("states", "trains", *_REGISTRIES) and len(parts) >= 3:
        owner = parts[1]
        present = source.table(parts[0])
        if owner not in present:
            hint = source.hint(owner, present)
            return f'There is no "{owner[:60]}" in [{parts[0]}].' + (f" {hint}" if hint else "")
        names = _names_of(source, parts[0], owner)
        rest = parts[2:]
    elif parts[0] in ("total", "closed", "surroundings") and len(parts) == 2:
        names = _names_of_whole(source, parts[0])
        rest = parts[1:]
    else:
        return (
            "A path is states.<id>.<name>, equipment.<tag>.<name>, processes.<tag>.<name>, vessels.<tag>.<name>, "
            "trains.<id>.<name> or total.<name>."
        )
    name = ".".join(rest)
    if name in names:
        return names[name]
    hint = source.hint(name, names)
    return f'There is no "{name[:60]}" among the results of {".".join(parts[: -len(rest)])[:60]}.' + (
        f" {hint}" if hint else ""
    )


def _names_of_whole(source: Source, whole: str) -> dict[str, tuple[str]]:
    """Names under ``total``, ``closed`` and ``surroundings``.

    The total of a file without equipment is that of its processes; beside equipment they stand under ``closed``.
    """
    if whole == "surroundings":
        return {name: (NAMES[name].dimension,) for name in _SURROUNDINGS}
    flows, processes = bool(source.table("equipment")), bool(source.table("processes"))
    if whole == "total" and (flows or not processes):
        return {name: (NAMES[name].dimension,) for name in _TOTAL_RESULTS}
    return _amounts(_CLOSED_RESULTS) if processes and (whole == "total") is not flows else {}


def _amounts(names: Iterable[str]) -> dict[str, tuple[str]]:
    """Results of processes with their dimensions."""
    entries = {name: name_of(name, amounts=True) for name in names}
    return {name: (entry.dimension,) for name, entry in entries.items() if entry is not None}


def _may_move(source: Source, state: str) -> bool:
    """Whether the state is at a port of a piece that may find velocities."""
    for tag in source.table("equipment"):
        kind = kind_of(source, tag)
        ports = kind.ports if kind is not None and kind.velocities is not None else ()
        if any(name == state for port in ports for _, name in source.texts("equipment", tag, port.name)):
            return True
    return False


def _at(source: Source, tag: str, port: str) -> list[str]:
    """States at a port of a piece."""
    return [state for _, state in source.texts("equipment", tag, port)]


def _names_of(source: Source, section: str, owner: str) -> dict[str, tuple[str]]:
    """Names of the results of one state, piece or train with their dimensions."""
    if section == "states":
        given = [name for name in _ONLY_WHERE_GIVEN if name in givens_of(source, owner)]
        given += ["velocity"] if _may_move(source, owner) else []
        given += [*AMOUNTS, "entropy"] if _is_closed(source, owner) else []
        return {name: (NAMES[name].dimension,) for name in (*_STATE_RESULTS, *given)}
    if section == "trains":
        if source.node(("trains", owner, "processes")) is not None:
            return _amounts(_CLOSED_RESULTS)
        return {name: (NAMES[name].dimension,) for name in _TOTAL_RESULTS}
    closed = section != "equipment"
    names: dict[str, tuple[str]] = {}  # of vessels, the kind declares all
    if section == "processes":
        names = _amounts(_PROCESS_RESULTS)
    elif section == "equipment":
        names = {name: (NAMES[name].dimension,) for name in _EQUIPMENT_RESULTS}
    kind = kind_of(source, owner, section)
    if kind is not None:
        names |= {parameter.name: (parameter.dimension,) for parameter in kind.parameters}
        reports = [name for name in kind.reports if name != _OF_SPECIES]
        names |= _amounts(reports) if closed else {name: (NAMES[name].dimension,) for name in reports}
        names |= _shares(source, owner) if _OF_SPECIES in kind.reports else {}
        entering = [state for port in kind.ports if port.direction == "in" for state in _at(source, owner, port.name)]
        names |= {
            f"streams.{state}.{name}": (NAMES[name].dimension,)
            for state in (entering if kind.burns else ())
            for name in _OF_STREAMS
        }
        names |= {f"species.{key}.{name}": (NAMES[name].dimension,) for key in kind.species for name in _OF_PRODUCTS}
        for group in kind.groups:
            node = source.node((section, owner, group.name))
            if group.single and node is not None:
                names |= {f"{group.name}.{entry.name}": (entry.dimension,) for entry in group.parameters}
            for number in range(1, 1 + min(MOST_ENTRIES, len(node.items if node is not None else []))):
                names |= {f"{group.name}.{number}.{entry.name}": (entry.dimension,) for entry in group.parameters}
    return names


def _is_closed(source: Source, state: str) -> bool:
    """Whether a state belongs to a closed system: a process begins or ends with it, or it says how much it holds."""
    if any(name in givens_of(source, state) for name in AMOUNTS):
        return True
    ends = [(tag, port) for tag in source.table("processes") for port in ("from", "to")]
    return any(name == state for tag, port in ends for _, name in source.texts("processes", tag, port))


def _shares(source: Source, tag: str) -> dict[str, tuple[str]]:
    """Mole fractions of the mixture that a process makes, by the species of its fluid."""
    fluids = [fluid_of(source, state) for _, state in source.texts("processes", tag, "to")]
    species = [key for fluid in fluids if fluid is not None for key in source.table("fluids", fluid, "composition")]
    return {f"species.{key}.{_OF_SPECIES}": (NAMES[_OF_SPECIES].dimension,) for key in species}

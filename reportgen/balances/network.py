"""What a network of relations consists of: relations of pieces and states, blocks in order, assumptions taken."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field

from reportgen.balances.relations import Balance, Default, Relation

__all__ = [
    "AMOUNTS",
    "FLOWS",
    "OF_STATES",
    "PROPERTIES",
    "SURROUNDINGS",
    "AnyRelation",
    "Block",
    "Network",
    "PropertyRelation",
    "listed",
    "owner_of",
]

#: Properties that may be given for a state. The first four are unknowns of every state.
PROPERTIES = (
    "pressure",
    "specific_enthalpy",
    "temperature",
    "specific_entropy",
    "quality",
    "density",
    "specific_volume",
    "superheat",
    "subcooling",
    "specific_internal_energy",
)
#: Amounts of a state of a closed system.
AMOUNTS = ("mass", "volume")
FLOWS = ("mass_flow", "volume_flow", "molar_flow")
OF_STATES = (*PROPERTIES, *FLOWS, *AMOUNTS, "velocity", "elevation")
SURROUNDINGS = ("surroundings.temperature", "surroundings.pressure")


@dataclass(frozen=True)
class PropertyRelation:
    """One property of a state as a function of pressure and specific enthalpy; of an ideal gas, temperature and
    internal energy as functions of specific enthalpy alone.

    ``beside``: paths of the masses from which the composition of a mixture follows.
    """

    state: str
    output: str
    inputs: tuple[str, ...] = ("pressure", "specific_enthalpy")
    beside: tuple[str, ...] = ()

    @property
    def key(self) -> str:
        """Name of the relation."""
        return f"{self.path}.of_state"

    @property
    def path(self) -> str:
        """Path of the property."""
        return f"states.{self.state}.{self.output}"

    @property
    def variables(self) -> tuple[str, ...]:
        """Property and what it is a function of."""
        return (*self.solvable, *self.beside)

    @property
    def solvable(self) -> tuple[str, ...]:
        """Any of them but the masses beside."""
        return (self.path, *(f"states.{self.state}.{name}" for name in self.inputs))


AnyRelation = Relation | PropertyRelation


@dataclass(frozen=True)
class Block:
    """Relations that are solved together, and the unknowns they give."""

    relations: tuple[AnyRelation, ...]
    unknowns: tuple[str, ...]


@dataclass
class Network:
    """Relations in the order of solution, assumptions taken, and what the order leaves out."""

    blocks: list[Block]
    defaults: list[Default]
    unknowns: list[str]
    implied: list[Balance] = field(default_factory=list)
    #: Key of a relation to the assumption that added or rewrote it.
    assumed: dict[str, Default] = field(default_factory=dict)


def owner_of(relation: AnyRelation) -> str:
    """Path of the state or piece that a relation belongs to."""
    return f"states.{relation.state}" if isinstance(relation, PropertyRelation) else relation.owner


def listed(items: Iterable[str], most: int = 12) -> str:
    """Names in a row, the last ones as a number where there are many."""
    names = list(items)
    text = ", ".join(names[:most])
    return text if len(names) <= most else f"{text} and {len(names) - most} more"

"""What reading a calculation folder gives: plain frozen data, every quantity in SI, every entry with its place."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Literal

from reportgen.quantities import Quantity

__all__ = [
    "Assumption",
    "Calculation",
    "CautionAdjustment",
    "Correlation",
    "Criterion",
    "CriticalConstants",
    "EquipmentSpec",
    "FluidSpec",
    "HeatPolynomial",
    "HeatTable",
    "Input",
    "Interaction",
    "Limits",
    "Narrative",
    "Reference",
    "Revision",
    "SecondSource",
    "StateSpec",
    "TrainSpec",
    "Uncertainty",
]


@dataclass(frozen=True)
class Narrative:
    """Markdown text; ``line`` and ``column`` of ``file`` are where it begins."""

    text: str
    file: str
    line: int
    column: int


@dataclass(frozen=True)
class Input:
    """One given quantity.

    ``applies_to`` holds the paths of the variables that it fixes: more than one where other states are ``like`` this
    one, and ``molar_flow`` for a volume flow written at normal or standard conditions.
    """

    path: str
    quantity: Quantity
    applies_to: tuple[str, ...]
    file: str
    line: int
    column: int


@dataclass(frozen=True)
class SecondSource:
    """A second source for states, with the relative difference [1] up to which it agrees; None for the usual one."""

    model: Literal["library", "ideal-gas", "real-fluid", "cubic", "statistical"]
    tolerance: float | None = None


@dataclass(frozen=True)
class CriticalConstants:
    """Critical temperature [K] and pressure [Pa], acentric factor [1]."""

    temperature: float
    pressure: float
    acentric_factor: float
    source: str | None = None


@dataclass(frozen=True)
class Interaction:
    """Binary interaction coefficient k_ij [1] of two substances."""

    first: str
    second: str
    coefficient: float
    source: str | None = None


@dataclass(frozen=True)
class HeatPolynomial:
    """Specific heat capacity c = Σ a_k (T − about)^k; ``coefficients`` a_k [J/(kg K^(k+1))], ``about`` [K]."""

    coefficients: tuple[float, ...]
    about: float = 0.0


@dataclass(frozen=True)
class HeatTable:
    """Specific heat capacities [J/(kg K)] at rising temperatures [K], straight lines between."""

    temperatures: tuple[float, ...]
    specific_heats: tuple[float, ...]


@dataclass(frozen=True)
class FluidSpec:
    """One fluid; each model uses the entries that belong to it.

    ``heat_capacity`` [J/(kg K)] is None for a variable one; ``composition`` holds fractions [1]; ``volume_translation``
    [m3/mol] by substance; ``density`` [kg/m3], ``specific_heat`` [J/(kg K)] if constant; temperatures in K.
    ``second_sources`` are those of its states that name none of their own. ``products_of`` is the tag of the combustor
    whose products it is, ``chemistry`` how these come about.
    """

    id: str
    model: Literal["ideal-gas", "real-fluid", "cubic", "incompressible"]
    line: int
    substance: str | None = None
    composition: Mapping[str, float] | None = None
    basis: Literal["mole", "mass"] | None = None
    heat_capacity: float | None = None
    reference_state: str = "published"
    equation: Literal["Peng-Robinson", "Soave-Redlich-Kwong"] | None = None
    critical: Mapping[str, CriticalConstants] = field(default_factory=dict)
    interactions: tuple[Interaction, ...] = ()
    volume_translation: Literal["Peneloux"] | Mapping[str, float] | None = None
    density: float | None = None
    specific_heat: float | HeatPolynomial | HeatTable | None = None
    phase: Literal["liquid", "solid"] = "liquid"
    temperature_range: tuple[float, float] | None = None
    source: str | None = None
    second_sources: tuple[SecondSource, ...] = ()
    products_of: str | None = None
    chemistry: Literal["complete", "equilibrium"] = "complete"


@dataclass(frozen=True)
class StateSpec:
    """One state: which fluid it is of, and its second sources (those of its fluid where it names none)."""

    id: str
    fluid: str
    title: str | None
    line: int
    second_sources: tuple[SecondSource, ...] = ()


@dataclass(frozen=True)
class Limits:
    """What a piece of equipment is designed for: absolute pressure [Pa], temperatures [K]."""

    pressure: Quantity | None = None
    temperature: Quantity | None = None
    minimum_temperature: Quantity | None = None
    material: str | None = None
    source: str | None = None


@dataclass(frozen=True)
class EquipmentSpec:
    """One piece of equipment, one process or one vessel: the states at its ports that are used.

    ``options`` holds the number of entries of each group of the kind, such as ``{"heat_ports": 2}``, and the words
    chosen where the kind offers any.
    """

    tag: str
    kind: str
    title: str | None
    ports: Mapping[str, tuple[str, ...]]
    options: Mapping[str, int | str | tuple[str, ...]]
    limits: Limits | None
    line: int


@dataclass(frozen=True)
class TrainSpec:
    """Pieces or processes that are accounted for together.

    ``alternative_to`` names the train in whose place they could stand, ``purpose`` what a cycle is for.
    """

    id: str
    title: str
    equipment: tuple[str, ...]
    alternative_to: str | None
    line: int
    processes: tuple[str, ...] = ()
    purpose: Literal["power", "cooling", "heating"] | None = None


@dataclass(frozen=True)
class Assumption:
    """An assumption of the author; ``status`` is ``accepted`` or ``to be verified``, ``due`` an ISO date."""

    text: str
    basis: str
    status: Literal["accepted", "to be verified"]
    owner: str | None
    due: str | None
    line: int


@dataclass(frozen=True)
class Criterion:
    """A result and the one limit it is held against: ``at_most`` or ``at_least``, the other is None."""

    value: str
    at_most: Quantity | None
    at_least: Quantity | None
    basis: str | None
    line: int


@dataclass(frozen=True)
class Reference:
    """A source that the report lists."""

    text: str
    line: int


@dataclass(frozen=True)
class Revision:
    """One row of the revision history; ``date`` in ISO form."""

    index: str
    date: str
    description: str


@dataclass(frozen=True)
class Correlation:
    """Correlation coefficient [1] between two inputs, named by their paths."""

    first: str
    second: str
    coefficient: float
    line: int


@dataclass(frozen=True)
class Uncertainty:
    """How uncertainties are stated and combined."""

    coverage_factor: float = 2.0
    method: Literal["first-order"] = "first-order"
    correlations: tuple[Correlation, ...] = ()


@dataclass(frozen=True)
class CautionAdjustment:
    """A caution whose limit the author moves, or which he answers, with his reason."""

    reason: str
    limit: Quantity | None
    line: int


@dataclass(frozen=True)
class Calculation:
    """One calculation file, read and found free of faults.

    ``date`` is an ISO date. ``files`` holds the bytes of every file read, by name relative to the folder.
    """

    number: str
    title: str
    revision: str
    date: str
    owner: str
    status: Literal["preliminary", "confirmed", "superseded", "void"]
    client: str | None
    location: str | None
    units: Literal["SI", "US"]
    originator: str | None
    checker: str | None
    approver: str | None
    narratives: Mapping[str, Narrative]
    inputs: Mapping[str, Input]
    fluids: Mapping[str, FluidSpec]
    states: Mapping[str, StateSpec]
    equipment: Mapping[str, EquipmentSpec]
    trains: Mapping[str, TrainSpec]
    assumptions: Mapping[str, Assumption]
    criteria: Mapping[str, Criterion]
    references: Mapping[str, Reference]
    revisions: tuple[Revision, ...]
    uncertainty: Uncertainty
    cautions: Mapping[str, CautionAdjustment]
    processes: Mapping[str, EquipmentSpec]
    vessels: Mapping[str, EquipmentSpec]
    files: Mapping[str, bytes]
    find_place: Callable[[str], tuple[str, int, int]] = field(repr=False, compare=False)

    def locate(self, path: str) -> tuple[str, int, int]:
        """File, line and column of a path, or of its nearest parent that stands in the file."""
        return self.find_place(path)

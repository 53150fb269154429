"""The schema of the calculation file as pydantic models: which tables and keys there are, and of what type.

What one value alone can show is checked here; what needs two places of the file to be compared is checked in
``checks``. Quantities of states come from the glossary, equipment from the kinds that ``balances`` declares.
"""

from __future__ import annotations

from functools import cache
from typing import Annotated, Any, Literal, Union, get_args

from pydantic import BaseModel, ConfigDict, Discriminator, Field, Tag, create_model

from reportgen.balances.kinds import Choice, Group, Kind, Parameter, kinds, process_kinds, vessel_kinds
from reportgen.names import NAMES
from reportgen.quantities import Quantity
from reportgen.spec.fields import (
    CALLED,
    Bounds,
    CalendarDate,
    Identifier,
    LongText,
    PageName,
    QuantityOf,
    RawQuantity,
    ShortText,
    bounds_for,
    dimensions_for,
)
from reportgen.spec.fluid_schema import FluidTable, SecondSourceField, second_source_field
from reportgen.spec.table import Table, with_unit

__all__ = [
    "AMOUNTS",
    "FLOWS",
    "INTENSIVE",
    "LATER",
    "MOST_CORRELATIONS",
    "MOST_ENTRIES",
    "NARRATIVES",
    "STATE_KEYS",
    "document",
]

#: Texts that may stand in the file or in a file beside it.
NARRATIVES = ("purpose", "method", "conclusion")
#: Any two independent ones of these fix a state.
INTENSIVE = (
    "pressure",
    "temperature",
    "quality",
    "specific_enthalpy",
    "specific_entropy",
    "density",
    "specific_volume",
    "superheat",
    "subcooling",
)
#: Different ways to give the one flow of a state.
FLOWS = ("mass_flow", "volume_flow", "molar_flow")
#: How much a state of a closed system holds.
AMOUNTS = ("mass", "volume")
#: All quantities that may be given for a state.
STATE_KEYS = (*INTENSIVE, *FLOWS, *AMOUNTS, "velocity", "elevation")

#: Bounds of lists within one table.
MOST_ENTRIES = 50
MOST_CORRELATIONS = 500

#: What belongs to the calculation file but is not carried by this version, by table ("" for the whole file) and key.
LATER: dict[str, dict[str, str]] = {
    "": {
        "cases": "Cases are",
        "sweeps": "Sweeps are",
        "readings": "Readings of a test log are",
    },
    "uncertainty": {"draws": "The Monte Carlo method is", "seed": "The Monte Carlo method is"},
    "uncertainty.method": {"monte-carlo": "The Monte Carlo method is"},
}


def _quantity(name: str, text: str = "", sign: str = "") -> Any:
    """Type and default of an optional quantity field named as in the glossary."""
    entry = NAMES[name]
    dimensions = dimensions_for(name)
    described = ", ".join(part for part in (text or entry.text, sign or entry.sign) if part)
    marker = QuantityOf(dimensions, bounds_for(name))
    return (Annotated[Quantity, marker] | None, Field(None, description=with_unit(described, dimensions)))


class CalculationTable(Table):
    """Title block of the document."""

    model_config = ConfigDict(
        json_schema_extra={"allOf": [{"not": {"required": [key, f"{key}_file"]}} for key in NARRATIVES]}
    )

    number: PageName = Field(description="Document number; becomes the folder of the report.")
    title: ShortText = Field(description="Title of the document.")
    revision: PageName = Field(description="Index of this revision, such as A or 1.")
    date: CalendarDate = Field(description="Date of this revision, as 2026-03-12 without quotes.")
    owner: ShortText = Field(description="Legal owner of the document.")
    client: ShortText | None = Field(None, description="For whom the calculation is made.")
    location: ShortText | None = Field(None, description="Where the plant stands.")
    status: Literal["preliminary", "confirmed", "superseded", "void"] = Field(
        description="Standing of the document. A confirmed one has no assumption that is still to be verified."
    )
    units: Literal["SI", "US"] = Field("SI", description="Units in which results are shown.")
    originator: ShortText | None = Field(None, description="Who made the calculation.")
    checker: ShortText | None = Field(None, description="Who is to check it.")
    approver: ShortText | None = Field(None, description="Who is to approve it.")
    purpose: LongText | None = Field(None, description="Why the calculation is made; Markdown.")
    method: LongText | None = Field(None, description="How it is made; Markdown.")
    conclusion: LongText | None = Field(
        None, description='What follows from it; Markdown. {{ value("total.lost_work") }} puts in a result.'
    )
    purpose_file: ShortText | None = Field(None, description="Markdown file beside this one with the purpose.")
    method_file: ShortText | None = Field(None, description="Markdown file beside this one with the method.")
    conclusion_file: ShortText | None = Field(None, description="Markdown file beside this one with the conclusion.")


class SurroundingsTable(Table):
    """Dead state, and the atmosphere that gauge pressures refer to."""

    temperature: Annotated[Quantity, QuantityOf(("temperature",))] = Field(
        description=with_unit("Temperature of the surroundings", ("temperature",))
    )
    pressure: Annotated[Quantity, QuantityOf(("pressure",), absolute=True)] = Field(
        description=with_unit("Absolute pressure of the atmosphere", ("pressure",))
    )


class StateBase(Table):
    """A state of a fluid at one place: any two independent quantities, or fewer where equipment gives the rest."""

    fluid: Identifier | None = Field(None, description="Name of a table of [fluids].")
    title: ShortText | None = Field(None, description="What the report calls the state.")
    like: Identifier | None = Field(None, description="Name of a state whose givens also hold here.")
    second_source: SecondSourceField | None = second_source_field(
        'this state is, in place of that of its fluid ("none": not)'
    )


class LimitsTable(Table):
    """What a piece of equipment is designed for."""

    model_config = ConfigDict(
        json_schema_extra={"anyOf": [{"required": [key]} for key in ("pressure", "temperature", "minimum_temperature")]}
    )

    pressure: Annotated[Quantity, QuantityOf(("pressure",), certain=True)] | None = Field(
        None, description=with_unit("Maximum allowable pressure", ("pressure",))
    )
    temperature: Annotated[Quantity, QuantityOf(("temperature",), certain=True)] | None = Field(
        None, description=with_unit("Maximum allowable temperature", ("temperature",))
    )
    minimum_temperature: Annotated[Quantity, QuantityOf(("temperature",), certain=True)] | None = Field(
        None, description=with_unit("Minimum design metal temperature", ("temperature",))
    )
    material: ShortText | None = Field(None, description="Material of the parts under pressure.")
    source: ShortText | None = Field(None, description="Where the limits are taken from, such as a data sheet.")


class TrainTable(Table):
    """Pieces of equipment, or processes, that are accounted for together."""

    model_config = ConfigDict(json_schema_extra={"oneOf": [{"required": ["equipment"]}, {"required": ["processes"]}]})

    title: ShortText = Field(description="What the report calls the train.")
    equipment: list[Identifier] | None = Field(
        None, min_length=1, description="Tags of the pieces that belong to the train."
    )
    processes: list[Identifier] | None = Field(
        None, min_length=1, description="Tags of the processes that belong to the train, in place of equipment."
    )
    alternative_to: Identifier | None = Field(None, description="Train in whose place this one could stand.")
    purpose: Literal["power", "cooling", "heating"] | None = Field(
        None, description="What a cycle, or a process judged like one, is for; if not given: found from its heats."
    )


class AssumptionTable(Table):
    """An assumption that the author makes."""

    text: ShortText = Field(description="The assumption in one sentence.")
    basis: ShortText = Field(description="What it rests on.")
    status: Literal["accepted", "to be verified"] = Field(description="Standing of the assumption.")
    owner: ShortText | None = Field(None, description="Who has to verify it.")
    due: CalendarDate | None = Field(None, description="Until when, as 2026-03-12 without quotes.")


_CRITERION = RawQuantity(("400 kW", "78 %", "40 degC"))
_RESULT_PATH = "Path of a result, such as equipment.PRV-3.lost_work."


class CriterionTable(Table):
    """A limit that a result is held against; exactly one of at_most and at_least."""

    model_config = ConfigDict(json_schema_extra={"oneOf": [{"required": ["at_most"]}, {"required": ["at_least"]}]})

    value: ShortText = Field(description=_RESULT_PATH)
    at_most: Annotated[Any, _CRITERION] = Field(None, description="Upper limit, in a unit of the result.")
    at_least: Annotated[Any, _CRITERION] = Field(None, description="Lower limit, in a unit of the result.")
    basis: ShortText | None = Field(None, description="Where the limit comes from.")


class ReferenceTable(Table):
    """A source that the report lists."""

    text: ShortText = Field(description="Full bibliographic text.")


class RevisionTable(Table):
    """One row of the revision history."""

    index: PageName = Field(description="Index of the revision.")
    date: CalendarDate = Field(description="Its date, as 2026-03-12 without quotes.")
    description: ShortText = Field(description="What changed.")


_Path = Annotated[str, Field(max_length=200)]


class CorrelationTable(Table):
    """Correlation between two inputs."""

    between: list[_Path] = Field(
        min_length=2, max_length=2, description="Paths of two inputs, such as states.1.pressure."
    )
    coefficient: float = Field(ge=-1.0, le=1.0, description="Correlation coefficient [1], from -1 to 1.")


class UncertaintyTable(Table):
    """How uncertainties are stated and combined."""

    coverage_factor: float = Field(
        2.0, ge=1.0, le=10.0, description="Coverage factor k [1] that every ± of the file refers to."
    )
    method: Literal["first-order"] = Field("first-order", description="How uncertainties are propagated (JCGM 100).")
    correlations: list[CorrelationTable] = Field(
        default=[],
        max_length=MOST_CORRELATIONS,
        description="Inputs that vary together, such as readings of one instrument.",
    )


class CautionTable(Table):
    """A caution of the catalogue that is adjusted for this plant."""

    limit: Annotated[Quantity, QuantityOf(("ratio", "temperature", "pressure"), certain=True)] | None = Field(
        None, description="The limit to use in place of the catalogue's [1, K or Pa]."
    )
    reason: ShortText = Field(description="Why the limit is moved, or what answers the caution.")


@cache
def document() -> type[BaseModel]:
    """The model of the whole file. Built once: the kinds of equipment are looked up when first needed."""
    state = create_model("StateTable", __base__=StateBase, **{name: _quantity(name) for name in STATE_KEYS})
    pieces = tuple(_of_kind(kind, "piece") for kind in kinds().values())
    equipment: Any = Annotated[Union[pieces], Field(discriminator="kind")]  # noqa: UP007 - made at run time
    changes = tuple(_of_kind(kind, "process") for kind in process_kinds().values())
    process: Any = Annotated[Union[changes], Field(discriminator="kind")]  # noqa: UP007 - made at run time
    held = tuple(_of_kind(kind, "vessel") for kind in vessel_kinds().values())
    vessel: Any = Annotated[Union[held], Field(discriminator="kind")]  # noqa: UP007 - made at run time
    fields: dict[str, Any] = {
        "calculation": (CalculationTable, Field(description="Title block.")),
        "surroundings": (SurroundingsTable, Field(description="Dead state and atmosphere.")),
        "fluids": (dict[Identifier, FluidTable], Field({}, description="Fluids by name.")),
        "states": (dict[Identifier, state], Field({}, description="States by name or number.")),
        "equipment": (dict[Identifier, equipment], Field({}, description="Pieces of equipment by tag.")),
        "processes": (dict[Identifier, process], Field({}, description="Processes of closed systems by tag.")),
        "vessels": (dict[Identifier, vessel], Field({}, description="Vessels that are charged or discharged, by tag.")),
        "trains": (dict[Identifier, TrainTable], Field({}, description="Groups of equipment or processes by name.")),
        "assumptions": (dict[Identifier, AssumptionTable], Field({}, description="Assumptions by name.")),
        "criteria": (dict[Identifier, CriterionTable], Field({}, description="Criteria by name.")),
        "references": (dict[Identifier, ReferenceTable], Field({}, description="Sources by name.")),
        "revisions": (list[RevisionTable], Field([], description="Revision history, oldest first.")),
        "uncertainty": (UncertaintyTable, Field(UncertaintyTable(), description="Treatment of uncertainty.")),
        "cautions": (dict[Identifier, CautionTable], Field({}, description="Adjusted cautions by number (T19).")),
    }
    return create_model("CalculationFile", __base__=Table, __doc__="A calculation file of reportgen.", **fields)


def _parameters(parameters: tuple[Parameter, ...]) -> dict[str, Any]:
    """Optional quantity fields, as a kind declares them."""
    fields = {}
    for parameter in parameters:
        bounds = Bounds() if parameter.signed else bounds_for(parameter.name)
        marker = QuantityOf((parameter.dimension,), bounds, called=CALLED.get(parameter.name, ""))
        text = parameter.text.rstrip(".")
        if parameter.default:
            text = f"{text}; if not given: {parameter.default}"
        described = with_unit(text, (parameter.dimension,))
        fields[parameter.name] = (Annotated[Quantity, marker] | None, Field(None, description=described))
    return fields


#: What the limits of a piece or process are those of.
_LIMITS_OF = {
    "piece": "Design limits of the piece.",
    "process": "Design limits of the vessel in which the process runs.",
    "vessel": "Design limits of the vessel.",
}


def _form_of_choice(value: Any) -> str:
    return "(several)" if isinstance(value, list) else "(word)"


def _choice(choice: Choice) -> tuple[Any, Any]:
    """Optional field of one of some words, or of a list of them."""
    word: Any = Literal[choice.values]
    text = f"{choice.text.rstrip('.')}; if not given: {choice.values[0]}."
    if not choice.many:
        return (word | None, Field(None, description=text))
    several = Annotated[list[word], Tag("(several)"), Field(min_length=1, max_length=MOST_ENTRIES)]
    either = Annotated[Annotated[word, Tag("(word)")] | several, Discriminator(_form_of_choice)]
    return (either | None, Field(None, description=text))


def _group(name: str, group: Group) -> tuple[Any, Any]:
    """Optional list of tables, or one table."""
    inner = _parameters(group.parameters)
    for key in group.needed:
        annotation, field = inner[key]
        inner[key] = (get_args(annotation)[0], Field(description=field.description))
    entry: Any = create_model(name, __base__=Table, __doc__=group.text, **inner)
    text = group.text or group.name
    if group.single:
        return (entry | None, Field(None, description=text))
    return (list[entry], Field([], max_length=MOST_ENTRIES, description=text))


def _of_kind(kind: Kind, noun: str) -> type[Table]:
    """The model of one kind of equipment or process."""
    camel = "".join(part.capitalize() for part in kind.name.split("-"))
    fields: dict[str, Any] = {
        "kind": (Literal[kind.name], Field(description=kind.text or kind.title)),
        "title": (ShortText | None, Field(None, description=f"What the report calls the {noun}.")),
        "limits": (LimitsTable | None, Field(None, description=_LIMITS_OF[noun])),
    }
    for port in kind.ports:
        direction = "enters" if port.direction == "in" else "leaves"
        states = "States that" if port.many else "State that"
        text = port.text or f"{states} {direction.removesuffix('s') if port.many else direction} here"
        annotation: Any = list[Identifier] if port.many else Identifier
        described = f"{text.rstrip('.')}. {'Names' if port.many else 'Name'} of [states]."
        if port.optional:
            fields[port.name] = (annotation | None, Field(None, description=described))
        elif port.many:
            fields[port.name] = (annotation, Field(min_length=1, description=described))
        else:
            fields[port.name] = (annotation, Field(description=described))
    fields |= _parameters(kind.parameters)
    fields |= {choice.name: _choice(choice) for choice in kind.choices}
    for group in kind.groups:
        fields[group.name] = _group(f"{camel}_{group.name}", group)
    return create_model(f"{camel}Table", __base__=Table, __doc__=kind.text or kind.title, **fields)

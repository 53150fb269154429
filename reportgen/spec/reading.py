"""From a folder to a Calculation: all faults at once, or none."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from pydantic import BaseModel

from reportgen.errors import InputError
from reportgen.quantities import Quantity
from reportgen.spec.calculation import (
    Assumption,
    Calculation,
    CautionAdjustment,
    Correlation,
    Criterion,
    EquipmentSpec,
    FluidSpec,
    Input,
    Limits,
    Narrative,
    Reference,
    Revision,
    StateSpec,
    TrainSpec,
    Uncertainty,
)
from reportgen.spec.checks import check, criterion_limit
from reportgen.spec.fluid_specs import fluid_spec
from reportgen.spec.fluid_tables import FluidCheck, ask_the_models
from reportgen.spec.folder import CALCULATION_FILE, read_bytes, read_text
from reportgen.spec.narratives import narratives_of
from reportgen.spec.paths import input_locations, kind_of
from reportgen.spec.second_sources import second_sources
from reportgen.spec.source import Location, Source, path_of
from reportgen.spec.states import fluid_of, givens_of
from reportgen.spec.toml_text import parse
from reportgen.spec.validation import context_of, validate

__all__ = ["read"]


def read(folder: Path, check_fluid: FluidCheck | None = None) -> Calculation:
    """Read the calculation of a folder.

    ``check_fluid`` makes the property model of a fluid or raises InputError; with it, substances that are not
    carried are reported together with all other faults. Without it, only their making reports them.

    Raises InputError with all faults of the file, each with file (relative to the folder), line, column and path.
    """
    files: dict[str, bytes] = {}
    try:
        files[CALCULATION_FILE] = read_bytes(folder, CALCULATION_FILE)
    except InputError as error:
        raise InputError(fault.at(CALCULATION_FILE, None) for fault in error.faults) from None
    text = read_text(files[CALCULATION_FILE], CALCULATION_FILE)
    source = Source(parse(text, CALCULATION_FILE), CALCULATION_FILE)
    context = context_of(source)
    document = validate(source, context)
    check(source, context)
    if check_fluid is not None:
        ask_the_models(source, context, check_fluid)
    narratives = narratives_of(source, folder, files)
    if document is None or source.faults:
        raise InputError(source.sorted_faults())
    return _Builder(source, document, context).calculation(narratives, files)


class _Builder:
    """Turns a validated file into plain data."""

    def __init__(self, source: Source, document: Any, context: Mapping[str, float]) -> None:
        self.source = source
        self.document = document
        self.context = context

    def line(self, *location: str | int) -> int:
        return self.source.place(location, "key")[0]

    def calculation(self, narratives: Mapping[str, Narrative], files: Mapping[str, bytes]) -> Calculation:
        title = self.document.calculation
        fluids = {name: fluid_spec(self.source, name, table) for name, table in self.document.fluids.items()}
        return Calculation(
            number=title.number,
            title=title.title,
            revision=title.revision,
            date=title.date.isoformat(),
            owner=title.owner,
            status=title.status,
            client=title.client,
            location=title.location,
            units=title.units,
            originator=title.originator,
            checker=title.checker,
            approver=title.approver,
            narratives=narratives,
            inputs=self.inputs(),
            fluids=fluids,
            states={name: self.state(name, table, fluids) for name, table in self.document.states.items()},
            equipment={tag: self.piece("equipment", tag, table) for tag, table in self.document.equipment.items()},
            processes={tag: self.piece("processes", tag, table) for tag, table in self.document.processes.items()},
            vessels={tag: self.piece("vessels", tag, table) for tag, table in self.document.vessels.items()},
            trains={
                name: TrainSpec(
                    name,
                    train.title,
                    tuple(train.equipment or ()),
                    train.alternative_to,
                    self.line("trains", name),
                    tuple(train.processes or ()),
                    train.purpose,
                )
                for name, train in self.document.trains.items()
            },
            assumptions={
                name: Assumption(
                    entry.text,
                    entry.basis,
                    entry.status,
                    entry.owner,
                    entry.due.isoformat() if entry.due else None,
                    self.line("assumptions", name),
                )
                for name, entry in self.document.assumptions.items()
            },
            criteria={name: self.criterion(name, entry) for name, entry in self.document.criteria.items()},
            references={
                name: Reference(entry.text, self.line("references", name))
                for name, entry in self.document.references.items()
            },
            revisions=tuple(
                Revision(row.index, row.date.isoformat(), row.description) for row in self.document.revisions
            ),
            uncertainty=self.uncertainty(),
            cautions={
                name: CautionAdjustment(entry.reason, entry.limit, self.line("cautions", name))
                for name, entry in self.document.cautions.items()
            },
            files=dict(files),
            find_place=self.source.locate,
        )

    def state(self, name: str, table: Any, fluids: Mapping[str, FluidSpec]) -> StateSpec:
        fluid = fluid_of(self.source, name) or ""
        own = second_sources(table.second_source)
        seconds = fluids[fluid].second_sources if own is None else own
        return StateSpec(name, fluid, table.title, self.line("states", name), seconds)

    def inputs(self) -> dict[str, Input]:
        """Every given quantity with the variables that it fixes."""
        targets: dict[str, list[str]] = {}
        for state in self.document.states:
            for key, owner in givens_of(self.source, state).items():
                targets.setdefault(f"states.{owner}.{key}", []).append(state)
        inputs: dict[str, Input] = {}
        for location in input_locations(self.source):
            quantity = self.given(location)
            path = path_of(location)
            if location[0] == "states":
                # A volume flow counted at normal conditions is an amount of substance.
                name = "molar_flow" if quantity.dimension == "molar_flow" else str(location[-1])
                applies_to = tuple(f"states.{state}.{name}" for state in targets.get(path, []))
            else:
                applies_to = (path,)
            inputs[path] = Input(path, quantity, applies_to, self.source.file, *self.source.place(location))
        return inputs

    def given(self, location: Location) -> Quantity:
        """The quantity that validation made of the value at a location."""
        found: Any = self.document
        for part in location:
            found = getattr(found, str(part)) if isinstance(found, BaseModel) else found[part]
        assert isinstance(found, Quantity)  # the schema has a quantity wherever input_locations points
        return found

    def piece(self, section: str, tag: str, table: Any) -> EquipmentSpec:
        kind = kind_of(self.source, tag, section)
        assert kind is not None  # the schema knows no other kinds
        ports: dict[str, tuple[str, ...]] = {}
        for port in kind.ports:
            states = getattr(table, port.name)
            if states:
                ports[port.name] = tuple(states) if isinstance(states, list) else (states,)
        limits = table.limits and Limits(**{key: getattr(table.limits, key) for key in type(table.limits).model_fields})
        return EquipmentSpec(
            tag=tag,
            kind=table.kind,
            title=table.title,
            ports=ports,
            options={group.name: len(getattr(table, group.name)) for group in kind.groups if not group.single}
            | {
                choice.name: tuple(word) if isinstance(word, list) else word
                for choice in kind.choices
                if (word := getattr(table, choice.name))
            },
            limits=limits,
            line=self.line(section, tag),
        )

    def criterion(self, name: str, entry: Any) -> Criterion:
        at_most, at_least = (criterion_limit(self.source, name, key, self.context) for key in ("at_most", "at_least"))
        return Criterion(entry.value, at_most, at_least, entry.basis, self.line("criteria", name))

    def uncertainty(self) -> Uncertainty:
        table = self.document.uncertainty
        correlations = tuple(
            Correlation(
                row.between[0], row.between[1], row.coefficient, self.line("uncertainty", "correlations", number)
            )
            for number, row in enumerate(table.correlations)
        )
        return Uncertainty(float(table.coverage_factor), table.method, correlations)

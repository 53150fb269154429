"""The network of relations: which unknowns there are, what determines them, what must be assumed, in which order."""

from __future__ import annotations

from collections.abc import Container, Iterable, Mapping
from dataclasses import dataclass, field

from reportgen.balances.matching import Matching, blocks_in_order
from reportgen.balances.plant import Piece, Plant
from reportgen.balances.relations import Balance, Default, Relation, Term
from reportgen.errors import Fault, InputError, SolutionError

__all__ = ["PROPERTIES", "Block", "Network", "PropertyRelation", "build_network"]

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
)
FLOWS = ("mass_flow", "volume_flow", "molar_flow")
OF_STATES = (*PROPERTIES, *FLOWS, "velocity", "elevation")
SURROUNDINGS = ("surroundings.temperature", "surroundings.pressure")


@dataclass(frozen=True)
class PropertyRelation:
    """One property of a state as a function of pressure and specific enthalpy; of an ideal gas, the temperature
    as a function of specific enthalpy alone.
    """

    state: str
    output: str
    inputs: tuple[str, ...] = ("pressure", "specific_enthalpy")

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
        return (self.path, *(f"states.{self.state}.{name}" for name in self.inputs))

    @property
    def solvable(self) -> tuple[str, ...]:
        """Any of them."""
        return self.variables


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


def state_properties(state: str, known: Container[str], flows: Iterable[str]) -> list[str]:
    """Properties of a state that take part in the network; ``known`` holds those given and those a piece relates."""
    wanted = list(PROPERTIES[:4])
    wanted += [name for name in PROPERTIES[4:] if f"states.{state}.{name}" in known]
    if "volume_flow" in flows and "density" not in wanted:
        wanted.append("density")
    return wanted


def _flow_relations(plant: Plant, state: str, flows: Iterable[str]) -> list[Balance]:
    """ṁ = ρ V̇ and ṁ = M ṅ for the flows that are given."""
    mass, owner = f"states.{state}.mass_flow", f"states.{state}"
    found = []
    if "volume_flow" in flows:
        volume = f"states.{state}.volume_flow"
        terms = (Term(1.0, (f"states.{state}.density", volume)), Term(-1.0, (mass,)))
        sentence = f"State {state}: the mass flow is the density times the volume flow."
        key, basis = f"{owner}.volume_flow.definition", "definition of density"
        found.append(Balance(key, owner, "Volume flow", sentence, basis, terms))
    if "molar_flow" in flows:
        molar_mass = float(plant.fluids[plant.states[state]].molar_mass)
        terms = (Term(molar_mass, (f"states.{state}.molar_flow",), "M"), Term(-1.0, (mass,)))
        sentence = (
            f"State {state}: the mass flow is the molar mass, M = {molar_mass * 1e3:.7g} kg/kmol, times the molar flow."
        )
        key, basis = f"{owner}.molar_flow.definition", "definition of molar mass"
        found.append(Balance(key, owner, "Molar flow", sentence, basis, terms))
    return found


def _is_mass_balance(relation: AnyRelation) -> bool:
    return isinstance(relation, Balance) and all(
        len(term.factors) == 1 and term.factors[0].endswith(".mass_flow") and abs(term.coefficient) == 1.0
        for term in relation.terms
    )


def _split_implied(relations: list[AnyRelation]) -> tuple[list[AnyRelation], list[Balance]]:
    """Take out the mass balances that follow from the others, one for each closed loop.

    Rows of the incidence matrix are reduced one by one; a row that vanishes is implied.
    """
    pivots: dict[str, dict[str, float]] = {}
    kept: list[AnyRelation] = []
    implied: list[Balance] = []
    for relation in relations:
        if not _is_mass_balance(relation) or not isinstance(relation, Balance):
            kept.append(relation)
            continue
        row: dict[str, float] = {}
        for term in relation.terms:
            row[term.factors[0]] = row.get(term.factors[0], 0.0) + term.coefficient
        pending = [path for path in row if path in pivots]
        while pending:
            path = pending.pop()
            factor = row.get(path, 0.0)
            if abs(factor) < 1e-9 or path not in pivots:
                continue
            for other, coefficient in pivots[path].items():
                value = row.get(other, 0.0) - factor * coefficient
                if abs(value) < 1e-9:
                    row.pop(other, None)
                else:
                    row[other] = value
                    if other in pivots:
                        pending.append(other)
        row = {path: value for path, value in row.items() if abs(value) > 1e-9}
        if not row:
            implied.append(relation)
            continue
        pivot = next(reversed(row))
        pivots[pivot] = {path: value / row[pivot] for path, value in row.items()}
        kept.append(relation)
    return kept, implied


def all_relations(plant: Plant, pieces: Mapping[str, Piece], given: frozenset[str]) -> list[AnyRelation]:
    connected = {state for piece in pieces.values() for _, _, state in piece.connections()}
    of_pieces = [relation for piece in pieces.values() for relation in piece.kind.relations(piece)]
    known = given.union(path for relation in of_pieces for path in relation.variables)
    relations: list[AnyRelation] = []
    for state in plant.states:
        flows = [name for name in FLOWS if f"states.{state}.{name}" in given]
        for name in state_properties(state, known, flows):
            if name == "temperature" and plant.fluids[plant.states[state]].kind == "ideal-gas":
                relations.append(PropertyRelation(state, name, ("specific_enthalpy",)))
            elif name not in ("pressure", "specific_enthalpy"):
                relations.append(PropertyRelation(state, name))
        if flows or state in connected:
            relations += _flow_relations(plant, state, flows)
    return [*relations, *of_pieces]


def _check_names(plant: Plant, pieces: Mapping[str, Piece], given: frozenset[str]) -> None:
    """InputError for given paths that name nothing in the plant, and for surroundings that are missing."""
    known = set(SURROUNDINGS)
    for state in plant.states:
        known.update(f"states.{state}.{name}" for name in OF_STATES)
    for piece in pieces.values():
        known.update(piece.path(parameter.name) for parameter in piece.kind.parameters)
        for group in piece.kind.groups:
            for number in range(1, piece.count(group.name) + 1):
                known.update(piece.path(f"{group.name}.{number}.{part.name}") for part in group.parameters)
    faults = [Fault("Nothing in the plant has this name.", path) for path in sorted(given - known)]
    faults += [Fault("The surroundings must be given.", path) for path in SURROUNDINGS if path not in given]
    if faults:
        raise InputError(faults)


def build_network(plant: Plant, pieces: Mapping[str, Piece], given: frozenset[str]) -> Network:
    """Relations, assumptions and order of solution; SolutionError when too little or too much is given."""
    _check_names(plant, pieces, given)
    relations, implied = _split_implied(all_relations(plant, pieces, given))
    table: dict[str, AnyRelation] = {}
    matching = Matching()
    unknowns: dict[str, None] = {}

    def offer(target: Matching, relation: AnyRelation) -> bool:
        return target.add(relation.key, [path for path in relation.solvable if path not in given])

    for relation in relations:
        table[relation.key] = relation
        unknowns.update((path, None) for path in relation.variables if path not in given)
        offer(matching, relation)
    _refuse_excess(matching, table, given)

    taken: list[Default] = []
    assumed: dict[str, Default] = {}
    candidates = [default for piece in pieces.values() for default in piece.kind.defaults(piece)]
    for default in sorted(candidates, key=lambda entry: entry.rank):
        if all(path in given for path in default.relation.variables):
            continue
        trial = matching.copy()
        if not offer(trial, default.relation):
            continue
        complete = True
        rewritten = {key: rewrite(table[key]) for key, rewrite in default.rewrites.items()}
        for key, relation in rewritten.items():
            trial.remove(key)
            complete = offer(trial, relation) and complete
        if not complete or trial.idle():
            continue
        matching = trial
        taken.append(default)
        table[default.relation.key] = default.relation
        table.update(rewritten)
        assumed[default.relation.key] = default
        assumed.update(dict.fromkeys(rewritten, default))
    _refuse_lack(matching, list(unknowns), pieces)

    blocks = [
        Block(tuple(table[key] for key in keys), tuple(matching.unknown_of[key] for key in keys))
        for keys in _solution_order(table, matching, pieces, given, assumed)
    ]
    return Network(blocks, taken, list(unknowns), implied, assumed)


def _solution_order(
    table: Mapping[str, AnyRelation],
    matching: Matching,
    pieces: Mapping[str, Piece],
    given: frozenset[str],
    assumed: Mapping[str, Default],
) -> list[list[str]]:
    """Keys of relations, block by block.

    A relation that an assumption rewrote comes after the assumption. The temperature of an ideal gas waits for the
    pressure too, so that a state is one step, unless that would make relations simultaneous that are not.
    """
    needs: dict[str, list[str]] = {}
    waiting: dict[str, str] = {}
    for key, relation in table.items():
        unknowns = (path for path in relation.variables if path not in given)
        needs[key] = [owner for path in unknowns if (owner := matching.relation_of[path]) != key]
        if key in assumed and len(assumed[key].relation.variables) == 1 and key != assumed[key].relation.key:
            needs[key].append(assumed[key].relation.key)
        if isinstance(relation, PropertyRelation) and "pressure" not in relation.inputs:
            pressure = matching.relation_of.get(f"states.{relation.state}.pressure")
            if pressure is not None and pressure not in needs[key]:
                waiting[key] = pressure
    order = _reading_order(table, pieces)
    patient = {key: [*owners, waiting[key]] if key in waiting else owners for key, owners in needs.items()}
    blocks = blocks_in_order(order, patient)
    hasty = {key for block in blocks if len(block) > 1 for key in block if key in waiting}
    if hasty:
        blocks = blocks_in_order(order, {key: needs[key] if key in hasty else patient[key] for key in needs})
    return blocks


def _reading_order(table: Mapping[str, AnyRelation], pieces: Mapping[str, Piece]) -> list[str]:
    """Keys by owner: states as in the file, then pieces as in the file, each with its assumptions first."""
    rank = {piece.owner: number for number, piece in enumerate(pieces.values(), start=1)}
    keys = list(table)
    assumed = {key: table[key].key.endswith(".assumed") for key in keys}
    return sorted(keys, key=lambda key: (rank.get(_owner(table[key]), 0), not assumed[key]))


def _refuse_excess(matching: Matching, table: Mapping[str, AnyRelation], given: frozenset[str]) -> None:
    """SolutionError naming the givens that compete, when more is given than can hold at once."""
    faults = []
    covered: set[str] = set()
    every = dict.fromkeys(path for relation in table.values() for path in relation.variables)
    position = {path: number for number, path in enumerate(every)}
    for key in matching.idle():
        if key in covered:
            continue
        group = matching.overdetermined(key)
        covered.update(group)
        excess = sum(1 for other in matching.idle() if other in group)
        paths = [path for member in group for path in table[member].solvable if path in given]
        paths = sorted({path for path in paths if not path.startswith("surroundings.")}, key=position.__getitem__)
        owners = sorted({_owner(table[member]) for member in group})
        number = "one value" if excess == 1 else f"{excess} values"
        if paths:
            faults.append(
                Fault(
                    f"More is given than can hold at once: {number} too many among {_listed(paths)}.",
                    paths[-1],
                    expected=f"{number} fewer",
                    hint="The relations concerned are those of " + _listed(owners) + ".",
                )
            )
        else:
            faults.append(Fault("The relations of " + _listed(owners) + " contradict or repeat each other.", owners[0]))
    if faults:
        raise SolutionError(faults)


def _owner(relation: AnyRelation) -> str:
    return f"states.{relation.state}" if isinstance(relation, PropertyRelation) else relation.owner


def _listed(items: Iterable[str], most: int = 12) -> str:
    names = list(items)
    text = ", ".join(names[:most])
    return text if len(names) <= most else f"{text} and {len(names) - most} more"


#: Order in which missing quantities are proposed.
_PROPOSED = ("mass_flow", "pressure", "temperature", "specific_enthalpy", "power", "duty", "heat")
#: What grows with the flows and with nothing else; an isothermal efficiency is a quotient of two such.
_EXTENSIVE = (
    "mass_flow",
    "volume_flow",
    "molar_flow",
    "power",
    "shaft_power",
    "heat",
    "mechanical_heat",
    "duty",
    "isothermal_efficiency",
    "inlet_area",
    "outlet_area",
    "throat_area",
)


def _refuse_lack(matching: Matching, unknowns: list[str], pieces: Mapping[str, Piece]) -> None:
    """SolutionError naming what nothing determines, with what could be given instead."""
    allowed = {piece.path(parameter.name) for piece in pieces.values() for parameter in piece.kind.parameters}
    faults = []
    position = {path: number for number, path in enumerate(unknowns)}
    for group, missing in matching.undetermined(unknowns):
        members = sorted(group, key=position.__getitem__)
        name_of = {path: path.rsplit(".", 1)[-1] for path in members}
        open_states = [path for path in members if path.startswith("states.")]
        number = "one more value" if missing == 1 else f"{missing} more independent values"
        candidates = [
            path
            for path in members
            if path in allowed or ".heat_ports." in path or (path.startswith("states.") and name_of[path] in OF_STATES)
        ]
        candidates.sort(key=lambda path: _PROPOSED.index(name_of[path]) if name_of[path] in _PROPOSED else 99)
        if all(name_of[path] in _EXTENSIVE for path in members):
            flows = [path for path in members if name_of[path] == "mass_flow"]
            if flows:
                states = _listed(path.split(".")[1] for path in flows)
                message = f"Nothing fixes the flow of {'state' if len(flows) == 1 else 'states'} {states}."
            else:
                message = f"Nothing determines {_listed(members)}."
        elif len({path.split(".")[1] for path in open_states}) == 1 and len(open_states) == len(members):
            state = open_states[0].split(".")[1]
            message = f"State {state} is not fixed: {number} of its properties must be known."
        else:
            message = f"Nothing determines {_listed(candidates or members)}."
        faults.append(
            Fault(
                message,
                (candidates or members)[0],
                expected=f"{number}, for example {' or '.join(candidates[:4])}" if candidates else number,
            )
        )
    if faults:
        raise SolutionError(faults)

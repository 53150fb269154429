"""The network of relations: which unknowns there are, what determines them, what must be assumed, in which order."""

from __future__ import annotations

from collections.abc import Callable, Container, Iterable, Iterator, Mapping

from reportgen.balances.composition import is_made
from reportgen.balances.freedom import may_be_given, refuse_excess, refuse_ill_posed, refuse_lack
from reportgen.balances.matching import Matching, blocks_in_order
from reportgen.balances.network import (
    AMOUNTS,
    FLOWS,
    PROPERTIES,
    SURROUNDINGS,
    AnyRelation,
    Block,
    Network,
    PropertyRelation,
    owner_of,
)
from reportgen.balances.plant import Piece, Plant
from reportgen.balances.relations import Balance, Default, Formula, Inverse, Relation, Term, token
from reportgen.errors import Fault, InputError

__all__ = ["all_relations", "build_network"]

MOLAR_GAS_CONSTANT = 8.31446261815324  # J/(mol*K), exact by the definition of the SI of 2019


def state_properties(state: str, known: Container[str], flows: Iterable[str]) -> list[str]:
    """Properties of a state that take part in the network; ``known`` holds those given and those a piece relates."""
    wanted = list(PROPERTIES[:4])
    wanted += [name for name in PROPERTIES[4:] if f"states.{state}.{name}" in known]
    if "volume_flow" in flows and "density" not in wanted:
        wanted.append("density")
    return wanted


def _amount_of_gas(state: str) -> Formula:
    """ṅ = p V̇/(R T), of an ideal gas whose molar mass follows from its flows."""
    names = ("mass_flow", "pressure", "temperature", "density")
    mass, pressure, temperature, density = (f"states.{state}.{name}" for name in names)
    amount = f"states.{state}.molar_flow"
    volume = rf"{token(mass)}\,{token(pressure)}"
    below = rf"R\,{token(temperature)}\,{token(density)}"
    return Formula(
        f"{amount}.definition",
        f"states.{state}",
        "Molar flow",
        f"State {state}: the molar flow of an ideal gas from its volume flow, R = {MOLAR_GAS_CONSTANT:.9g} J/(mol K).",
        "law of ideal gases",
        amount,
        (mass, pressure, temperature, density),
        lambda m, p, t, rho: m * p / (MOLAR_GAS_CONSTANT * t * rho),
        rf"\frac{{{volume}}}{{{below}}}",
        {
            mass: Inverse(
                lambda n, p, t, rho: n * MOLAR_GAS_CONSTANT * t * rho / p,
                rf"\frac{{{token(amount)}\,{below}}}{{{token(pressure)}}}",
            )
        },
        solvable_inputs=(mass,),
    )


def _flow_relations(plant: Plant, state: str, flows: Iterable[str]) -> list[Relation]:
    """ṁ = ρ V̇ and ṁ = M ṅ for the flows that are given."""
    mass, owner = f"states.{state}.mass_flow", f"states.{state}"
    found: list[Relation] = []
    if "volume_flow" in flows:
        volume = f"states.{state}.volume_flow"
        terms = (Term(1.0, (f"states.{state}.density", volume)), Term(-1.0, (mass,)))
        sentence = f"State {state}: the mass flow is the density times the volume flow."
        key, basis = f"{owner}.volume_flow.definition", "definition of density"
        found.append(Balance(key, owner, "Volume flow", sentence, basis, terms))
    if "molar_flow" in flows and is_made(plant.fluids[plant.states[state]]):
        found.append(_amount_of_gas(state))
    elif "molar_flow" in flows:
        molar_mass = float(plant.fluids[plant.states[state]].molar_mass)
        terms = (Term(molar_mass, (f"states.{state}.molar_flow",), "M"), Term(-1.0, (mass,)))
        sentence = (
            f"State {state}: the mass flow is the molar mass, M = {molar_mass * 1e3:.7g} kg/kmol, times the molar flow."
        )
        key, basis = f"{owner}.molar_flow.definition", "definition of molar mass"
        found.append(Balance(key, owner, "Molar flow", sentence, basis, terms))
    return found


def _volume(state: str) -> Balance:
    """V = m v of an amount."""
    mass, volume, specific = (f"states.{state}.{name}" for name in ("mass", "volume", "specific_volume"))
    return Balance(
        f"{volume}.definition",
        f"states.{state}",
        "Volume",
        f"State {state}: the volume is the mass times the specific volume.",
        "definition of specific volume",
        (Term(1.0, (mass, specific)), Term(-1.0, (volume,))),
        {},
        {mass: f"State {state}: the mass is the volume over the specific volume."},
    )


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


def all_relations(
    plant: Plant,
    pieces: Mapping[str, Piece],
    given: frozenset[str],
    masses_of: Callable[[str], tuple[str, ...]] = lambda fluid: (),
) -> list[AnyRelation]:
    """Relations of all states, then of all pieces and processes; ``masses_of`` as for ``build_network``."""
    connected = {state for piece in pieces.values() for _, _, state in piece.connections()}
    closed = {state for piece in pieces.values() if piece.kind.family == "processes" for state in _states_of(piece)}
    closed.update(state for state in plant.states for name in AMOUNTS if f"states.{state}.{name}" in given)
    of_pieces: list[Relation] = [relation for piece in pieces.values() for relation in piece.kind.relations(piece)]
    of_pieces += [_volume(state) for state in plant.states if state in closed]
    known = given.union(path for relation in of_pieces for path in relation.variables)
    made = (state for state, fluid in plant.states.items() if is_made(plant.fluids[fluid]))
    known = known.union(f"states.{state}.density" for state in made if f"states.{state}.molar_flow" in given)
    relations: list[AnyRelation] = []
    for state, fluid in plant.states.items():
        flows = [name for name in FLOWS if f"states.{state}.{name}" in given]
        beside = masses_of(fluid)
        for name in state_properties(state, known, flows):
            if name in _CALORIC and plant.fluids[fluid].kind == "ideal-gas":
                relations.append(PropertyRelation(state, name, ("specific_enthalpy",), beside))
            elif name not in ("pressure", "specific_enthalpy"):
                relations.append(PropertyRelation(state, name, beside=beside))
        if flows or state in connected:
            relations += _flow_relations(plant, state, flows)
    return [*relations, *of_pieces]


#: What follows from the specific enthalpy of an ideal gas alone.
_CALORIC = ("temperature", "specific_internal_energy")


def _states_of(piece: Piece) -> list[str]:
    return [state for _, _, state in piece.connections()]


def _check_names(plant: Plant, pieces: Mapping[str, Piece], given: frozenset[str]) -> None:
    """InputError for given paths that name nothing in the plant, and for surroundings that are missing."""
    known = {*SURROUNDINGS, *may_be_given(plant.states, pieces)}
    faults = [Fault("Nothing in the plant has this name.", path) for path in sorted(given - known)]
    faults += [Fault("The surroundings must be given.", path) for path in SURROUNDINGS if path not in given]
    if faults:
        raise InputError(faults)


def build_network(
    plant: Plant,
    pieces: Mapping[str, Piece],
    given: frozenset[str],
    masses_of: Callable[[str], tuple[str, ...]] = lambda fluid: (),
) -> Network:
    """Relations, assumptions and order of solution; SolutionError when too little or too much is given.

    ``pieces`` are equipment and processes; ``masses_of`` gives the paths of the masses that the composition of a fluid
    follows from.
    """
    _check_names(plant, pieces, given)
    relations, implied = _split_implied(all_relations(plant, pieces, given, masses_of))
    table: dict[str, AnyRelation] = {}
    matching = Matching()
    unknowns: dict[str, None] = {}

    def offer(target: Matching, relation: AnyRelation) -> bool:
        return target.add(relation.key, [path for path in relation.solvable if path not in given])

    for relation in relations:
        table[relation.key] = relation
        unknowns.update((path, None) for path in relation.variables if path not in given)
        offer(matching, relation)
    refuse_excess(matching, table, given)

    taken: list[Default] = []
    assumed: dict[str, Default] = {}
    candidates = [default for piece in pieces.values() for default in piece.kind.defaults(piece)]
    for default in sorted(candidates, key=lambda entry: entry.rank):
        if default.only_for is not None and (default.only_for in given or not matching.is_open(default.only_for)):
            continue
        rewritten = {key: rewrite(table[key]) for key, rewrite in default.rewrites.items()}
        matching.mark()
        if not all(offer(matching, relation) for relation in _in_place(matching, default, rewritten)):
            matching.back()
            continue
        taken.append(default)
        table[default.relation.key] = default.relation
        table.update(rewritten)
        assumed[default.relation.key] = default
        assumed.update(dict.fromkeys(rewritten, default))
    refuse_lack(matching, list(unknowns), may_be_given(plant.states, pieces))

    blocks = [
        Block(tuple(table[key] for key in keys), tuple(matching.unknown_of[key] for key in keys))
        for keys in _solution_order(table, matching, pieces, given, assumed)
    ]
    refuse_ill_posed(blocks, pieces, given)
    return Network(blocks, taken, list(unknowns), implied, assumed)


def _in_place(matching: Matching, default: Default, rewritten: Mapping[str, Relation]) -> Iterator[Relation]:
    """What a default adds, then what it rewrites, each taken out of the matching before it is offered anew."""
    yield default.relation
    for key, relation in rewritten.items():
        matching.remove(key)
        yield relation


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
    return sorted(keys, key=lambda key: (rank.get(owner_of(table[key]), 0), not assumed[key]))

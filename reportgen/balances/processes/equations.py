r"""Relations that several kinds of process share: mass, energy, work at constant pressure, what stays the same.

    m_b = m_a ,   m (u_b − u_a) = Q − W ,   heat positive into the system, work positive out of it

The work of a slow (quasi-static) process is W = ∫ p dV; at constant pressure p (V_b − V_a), and the energy balance is
then Q = m (h_b − h_a). An incompressible liquid or solid keeps its volume whatever happens: for it, "constant volume"
says nothing, and its pressure is kept instead.

Heat crosses one boundary, of ``boundary_temperature``, or several, listed as ``heat_ports``; ``heat`` then is the sum.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

from reportgen.balances.equations import BOUNDARY_TEMPERATURE, HEAT_PORTS, heat_ports, heat_sum, over_boundaries
from reportgen.balances.kinds import Choice, Group, Kind, Parameter, Port
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Default, Formula, Relation, Stretch, Term, zero
from reportgen.errors import Fault

__all__ = [
    "AFTER",
    "BEFORE",
    "CONSTANT",
    "CONSTANT_EACH",
    "HEAT",
    "HEAT_BY_CUSTOM",
    "QUASI_STATIC",
    "WORK",
    "ambient_pressures",
    "as_many",
    "change_stretches",
    "compressible_only",
    "energy_balance",
    "is_compressible",
    "joined",
    "kept",
    "kept_mass",
    "kept_volume",
    "no_work",
    "one_state",
    "pairs",
    "pressure_kept",
    "process_kind",
    "sum_of",
    "work_at_pressure",
]

BEFORE = Port("from", "in", text="State before the process.")
AFTER = Port("to", "out", text="State after the process.")
HEAT = Parameter("heat", "energy", "Heat into the system (negative when it leaves).")
HEAT_BY_CUSTOM = Parameter(
    "heat", "energy", "Heat into the system (negative when it leaves).", "0 when nothing else determines it"
)
WORK = Parameter("work", "energy", "Work that the system does on its surroundings (negative when it takes it up).")
CONSTANT = Choice(
    "constant",
    ("pressure", "volume"),
    "What stays the same while the system exchanges heat and work: its pressure or its volume",
    assumed="takes place at constant pressure",
)
CONSTANT_EACH = Choice(
    "constant",
    CONSTANT.values,
    "What each body keeps while it exchanges heat, its pressure or its volume; one word for all of them",
    many=True,
    assumed="leaves every body its pressure",
)
#: Boundaries of a closed system, with amounts in the place of flows.
BOUNDARIES = Group(
    HEAT_PORTS.name,
    (
        Parameter("heat", "energy", "Heat into the system over this boundary."),
        Parameter("temperature", "temperature", "Temperature of this boundary."),
    ),
    "Boundaries over which heat crosses, each with its heat and temperature.",
)
QUASI_STATIC = "passes through equilibrium states only, slowly and without friction, so that its work is ∫ p dV"


def process_kind(
    name: str,
    title: str,
    text: str,
    *,
    relations: Callable[[Piece], Sequence[Relation]],
    stretches: Callable[[Piece], Sequence[Stretch]],
    defaults: Callable[[Piece], Sequence[Default]] = lambda piece: (),
    results: Callable[[Piece], Sequence[Formula]] = lambda piece: (),
    ports: tuple[Port, ...] = (BEFORE, AFTER),
    parameters: tuple[Parameter, ...] = (HEAT, WORK),
    choices: tuple[Choice, ...] = (),
    reports: tuple[str, ...] = (),
    path_taken: str = "",
    checks: Callable[[Piece], Sequence[Fault]] = lambda piece: (),
    mixes: Callable[[Piece], bool] = lambda piece: False,
) -> Kind:
    """A kind of process. One whose ``parameters`` name a heat takes boundary temperatures too."""
    heated = any(parameter.name == "heat" for parameter in parameters)

    def all_relations(piece: Piece) -> list[Relation]:
        return [*relations(piece), *heat_sum(piece)]

    def all_defaults(piece: Piece) -> list[Default]:
        return [*defaults(piece), *ambient_pressures(piece)]

    return Kind(
        name=name,
        title=title,
        text=text,
        ports=ports,
        parameters=(*parameters, BOUNDARY_TEMPERATURE) if heated else parameters,
        relations=all_relations,
        defaults=all_defaults,
        results=results,
        heats=heat_ports,
        stretches=stretches,
        groups=(BOUNDARIES,) if heated else (),
        choices=choices,
        reports=("heat", "work", *reports),
        checks=checks,
        mixes=mixes,
        family="processes",
        path_taken=path_taken,
    )


# --- what a kind asks of its states -----------------------------------------------------------------------------------


def one_state(piece: Piece) -> tuple[str, str]:
    """State before and state after a process of one body."""
    return piece.one("from"), piece.one("to")


def pairs(piece: Piece) -> list[tuple[str, str]]:
    """State before and state after of each body, in the order of the file."""
    return list(zip(piece.states("from"), piece.states("to"), strict=True))


def is_compressible(piece: Piece, state: str) -> bool:
    """Whether the volume of a state depends on its pressure at all."""
    return bool(piece.fluid(state).kind != "incompressible")


def compressible_only(piece: Piece) -> list[Fault]:
    """A fault for each state whose volume no pressure changes: the kind is about a change of volume."""
    return [
        Fault(
            f"{piece.title} changes the volume of its content, but fluid {piece.fluid_id(state)} of state {state} is "
            "incompressible.",
            f"states.{state}.fluid",
            found=piece.fluid_id(state),
            expected="a fluid that can be compressed",
        )
        for state in dict.fromkeys((*piece.states("from"), *piece.states("to")))
        if not is_compressible(piece, state)
    ]


def as_many(piece: Piece) -> list[Fault]:
    """A fault where the bodies before are not as many as after."""
    before, after = (len(piece.states(port)) for port in ("from", "to"))
    if before == after:
        return []
    text = f"{piece.title} has {before} bodies before and {after} after; each has one state before and one after."
    return [Fault(text, piece.path("to"), found=f"{after} states", expected=f"{before} states, in the order of from")]


# --- relations --------------------------------------------------------------------------------------------------------


def kept_mass(piece: Piece, before: str, after: str) -> Balance:
    """m_b = m_a."""
    first, last = f"states.{before}.mass", f"states.{after}.mass"
    sentence = f"{piece.title}: the system is closed, its mass stays the same."
    terms = (Term(1.0, (first,)), Term(-1.0, (last,)))
    return Balance(
        piece.path(f"mass_balance.{after}"), piece.owner, "Mass", sentence, "conservation of mass, closed system", terms
    )


def sum_of(piece: Piece, before: Sequence[str], after: str, name: str, basis: str) -> Balance:
    """x_b = Σ x_a of an amount."""
    terms = [Term(1.0, (f"states.{state}.{name}",)) for state in before]
    terms.append(Term(-1.0, (f"states.{after}.{name}",)))
    sentence = f"{piece.title}: the {name} of state {after} is the sum of those of {', '.join(before)}."
    key = piece.path(f"{name}_balance")
    return Balance(key, piece.owner, name.capitalize(), sentence, basis, tuple(terms))


def kept(piece: Piece, before: str, after: str, name: str, why: str) -> Balance:
    """x_b = x_a for one property of the states."""
    first, last = f"states.{before}.{name}", f"states.{after}.{name}"
    words = name.replace("specific_", "").replace("_", " ")
    return Balance(
        piece.path(f"kept_{name}.{after}"),
        piece.owner,
        f"Constant {words}",
        f"{piece.title}: state {after} has the {words} of state {before}.",
        why,
        (Term(1.0, (first,)), Term(-1.0, (last,))),
    )


def kept_volume(piece: Piece, before: str, after: str) -> list[Relation]:
    """V_b = V_a of what can be compressed; what cannot keeps its pressure."""
    if not is_compressible(piece, before):
        return [pressure_kept(piece, before, after, "the volume of an incompressible body does not tell its pressure")]
    return [kept(piece, before, after, "volume", "rigid boundary")]


def pressure_kept(piece: Piece, before: str, after: str, why: str = "constant pressure") -> Balance:
    """p_b = p_a."""
    return kept(piece, before, after, "pressure", why)


def energy_balance(
    piece: Piece,
    before: Sequence[str],
    after: Sequence[str],
    *,
    by: Callable[[str], str] = lambda state: "specific_internal_energy",
    work: str | None = "work",
    work_sign: float = -1.0,
    name: str = "Energy balance",
    sentence: str = "what enters as heat and does not leave as work is stored.",
    basis: str = "first law, closed system",
) -> Balance:
    """0 = Q ∓ W − Σ_after m e + Σ_before m e, with e the property named by ``by``: u, or h at constant pressure."""
    terms = over_boundaries(piece)
    sentences = {}
    if work is not None:
        terms.append(Term(work_sign, (piece.path(work),)))
        sentences[piece.path(work)] = f"{piece.title}: the energy balance gives the {work.replace('_', ' ')}."
    if len(before) == len(after):
        for first, last in zip(before, after, strict=True):
            mass = f"states.{first}.mass"
            terms += [Term(-1.0, (mass, f"states.{last}.{by(last)}")), Term(1.0, (mass, f"states.{first}.{by(first)}"))]
    else:
        terms += [Term(-1.0, (f"states.{state}.mass", f"states.{state}.{by(state)}")) for state in after]
        terms += [Term(1.0, (f"states.{state}.mass", f"states.{state}.{by(state)}")) for state in before]
    for state in (*before, *after):
        words = by(state).replace("specific_", "").replace("_", " ")
        sentences[f"states.{state}.{by(state)}"] = f"{piece.title}: the energy balance gives the {words} of {state}."
        sentences[f"states.{state}.mass"] = f"{piece.title}: the energy balance gives the mass of {state}."
    for number, port in enumerate(heat_ports(piece), start=1):
        where = f" over boundary {number}" if piece.count(HEAT_PORTS.name) else ""
        sentences[port.heat] = f"{piece.title}: the energy balance gives the heat{where}, positive into the system."
    key = piece.path("energy_balance")
    return Balance(key, piece.owner, name, f"{piece.title}: {sentence}", basis, tuple(terms), {}, sentences)


def work_at_pressure(
    piece: Piece, pressure: str, bodies: Sequence[tuple[str, str]], name: str = "work", beside: Sequence[Term] = ()
) -> Balance:
    """W = Σ p (V_b − V_a) + ``beside``; ``pressure`` is a path, or ends each body's own state path (``.pressure``)."""
    work = piece.path(name)
    terms = []
    for before, after in bodies:
        p = pressure if "." in pressure else f"states.{before}.{pressure}"
        terms += [Term(1.0, (p, f"states.{after}.volume")), Term(-1.0, (p, f"states.{before}.volume"))]
    return Balance(
        piece.path(f"{name}.definition"),
        piece.owner,
        "Work at constant pressure",
        f"{piece.title}: the boundary moves against a constant pressure.",
        "W = ∫ p dV",
        (Term(-1.0, (work,)), *terms, *beside),
    )


def no_work(piece: Piece, why: str, name: str = "work") -> Balance:
    """W = 0 by the nature of the process."""
    sentence = f"{piece.title}: {why}, so no work is done."
    balance = zero(piece.path(name), piece.path(f"{name}.definition"), piece.owner, "No work", sentence)
    return Balance(balance.key, balance.owner, balance.name, sentence, "kind of process", balance.terms)


# --- defaults ---------------------------------------------------------------------------------------------------------


def ambient_pressures(piece: Piece) -> list[Default]:
    """Pressures of incompressible bodies that nothing determines: those of the surroundings."""
    found = []
    for state in dict.fromkeys((*piece.states("from"), *piece.states("to"))):
        if is_compressible(piece, state):
            continue
        path, ambient = f"states.{state}.pressure", "surroundings.pressure"
        sentence = f"State {state} is at the pressure of the surroundings."
        terms = (Term(1.0, (path,)), Term(-1.0, (ambient,)))
        key = f"{path}.ambient"
        relation = Balance(f"{path}.assumed", piece.owner, "Pressure", sentence, "assumption", terms)
        found.append(Default(key, f"states.{state}", sentence, (path,), relation, rank=2, only_for=path))
    return found


def change_stretches(piece: Piece, along: str) -> list[Stretch]:
    """The way of one body."""
    before, after = one_state(piece)
    return [Stretch("content", before, after, along)]


def joined(piece: Piece) -> list[Stretch]:
    """The two states only joined: what lies between is no state of equilibrium."""
    before, after = one_state(piece)
    return [Stretch("content", before, after, "straight", mixing=True)]

r"""Figures of cycles: net power, heat by reservoir, thermal and second-law efficiency, coefficient of performance.

A group of pieces holds a cycle where a fluid goes round in it: a set of joined streams none of which crosses the
boundary of the group. Several such circuits that exchange heat with each other (a cascade) are one cycle. With Q̇ over
every boundary of the circuit and from every stream outside it that an exchanger brings together with it:

    Q̇_sup = Σ Q̇ > 0 ,   Q̇_rej = −Σ Q̇ < 0 ,   Q̇_sup − Q̇_rej = Ẇ_net and what bearings, gears and motors lose
    power    Ẇ_net delivered:   η_th = Ẇ_net/Q̇_sup ,    η_II = Ẇ_net/(exergy of the heat supplied)
    cooling  Ẇ_net absorbed:    COP = Q̇_cold/Ẇ_net ,   η_II = (exergy given to what is cooled)/Ẇ_net
    heating  Ẇ_net absorbed:    COP = Q̇_warm/Ẇ_net ,   η_II = (exergy given to what is heated)/Ẇ_net

Q̇_cold and Q̇_warm count heaters, coolers and streams outside; what pipes and casings gain or lose by the way is supplied
or rejected, but no purpose of the cycle.

Exergy of heat at a boundary is Q̇ − T0 Ṡ_Q, that of a stream outside the circuit the change of its flow exergy. A
heat counts as supplied or rejected by its sign in the base case. A group that states a purpose gets these figures as
an open process too; its streams then count as inside, and what they carry away is no rejected heat.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Any

from reportgen.balances.book import AMBIENT, Book
from reportgen.balances.merit import ratio_of
from reportgen.balances.plant import Piece, Purpose, balance_groups
from reportgen.balances.relations import Formula, Term, sum_latex
from reportgen.balances.solution import Cycle, Reservoir

__all__ = ["CYCLE_REPORTS", "add_cycle", "circuits"]

CYCLE_REPORTS = (
    "net_power",
    "heat_supplied",
    "heat_rejected",
    "thermal_efficiency",
    "coefficient_of_performance",
    "second_law_efficiency",
)


@dataclass(frozen=True)
class _Heat:
    """Heat between the cycle and one reservoir, and the exergy that comes with it when it enters.

    ``serves``: it is what the cycle is for, not a gain or loss by the way. ``beside``: it never was in the fluid.
    """

    reservoir: Reservoir
    exergy: tuple[Term, ...]
    serves: bool
    beside: bool = False


def circuits(pieces: Sequence[Piece]) -> list[frozenset[str]]:
    """Sets of states that streams join and of which none crosses the boundary of the pieces."""
    root: dict[str, str] = {}

    def find(state: str) -> str:
        root.setdefault(state, state)
        while root[state] != state:
            root[state] = root[root[state]]
            state = root[state]
        return state

    entering: set[str] = set()
    leaving: set[str] = set()
    for piece in pieces:
        for inlets, outlets in balance_groups(piece):
            entering.update(inlets)
            leaving.update(outlets)
            for other in (*inlets, *outlets)[1:]:
                root[find(other)] = find((*inlets, *outlets)[0])
    members: dict[str, set[str]] = {}
    for state in entering | leaving:
        members.setdefault(find(state), set()).add(state)
    crossing = entering ^ leaving
    return [frozenset(states) for states in members.values() if not states & crossing]


def add_cycle(book: Book, owner: str, title: str, pieces: Sequence[Piece], purpose: Purpose | None) -> Cycle | None:
    """Enter the figures of the cycle of a group; None where it has none."""
    closed = circuits(pieces)
    inside = frozenset().union(*closed)
    if not closed and purpose:
        inside = frozenset(state for piece in pieces for _, _, state in piece.connections())
    if not inside or (not purpose and not _is_one(closed, pieces)):
        return None
    machines = [piece for piece in pieces if piece.kind.power_sign and inside.issuperset(_states(piece))]
    heats = [heat for piece in pieces for heat in _heats(piece, inside)]
    known = [(heat, _base(book, heat.reservoir.heat) * heat.reservoir.sign) for heat in heats]
    supplied = [heat for heat, value in known if value > 0.0 and not heat.beside]
    rejected = [heat for heat, value in known if value < 0.0 and not heat.beside]
    beside = [heat for heat in heats if heat.beside]
    if not machines or not (supplied or rejected):
        return None
    delivered = sum(-piece.kind.power_sign * _base(book, piece.kind.work(piece)) for piece in machines)
    purpose = purpose or _purpose(book, delivered, supplied, rejected)
    sign = 1.0 if purpose == "power" else -1.0
    terms = [Term(-sign * piece.kind.power_sign, (piece.kind.work(piece),)) for piece in machines]
    direction = "delivered" if purpose == "power" else "absorbed"
    words = f"{title}: net power {direction}, over {', '.join(piece.tag for piece in machines)}."
    book.balance(f"{owner}.net_power", owner, "Net power of the cycle", words, "sum of the parts", terms)
    for name, heading, each, side in (
        ("heat_supplied", "Heat supplied", supplied, 1.0),
        ("heat_rejected", "Heat rejected", rejected, -1.0),
    ):
        terms = [Term(side * heat.reservoir.sign, (heat.reservoir.heat,)) for heat in each]
        words = f"{title}: heat that {'enters' if side > 0 else 'leaves'} the cycle, over all its reservoirs."
        if terms:
            book.balance(f"{owner}.{name}", owner, heading, words, "sum over the reservoirs", terms)
    if any(f"{owner}.{name}" not in book.values for name in ("heat_supplied", "net_power")):
        return None
    for formula in _figures(owner, title, purpose, supplied, rejected):
        book.formula(formula)
    powers = tuple((piece.kind.work(piece), -piece.kind.power_sign) for piece in machines)
    return Cycle(
        owner,
        title,
        purpose,
        bool(closed),
        tuple(heat.reservoir for heat in supplied),
        tuple(heat.reservoir for heat in rejected),
        powers,
        tuple(heat.reservoir for heat in beside),
    )


def _states(piece: Piece) -> set[str]:
    return {state for _, _, state in piece.connections()}


def _base(book: Book, path: str) -> float:
    array = book.values.get(path)
    value = 0.0 if array is None else float(array[0])
    return value if value == value else 0.0


def _is_one(closed: Sequence[frozenset[str]], pieces: Sequence[Piece]) -> bool:
    """Whether all circuits hang together through the pieces that bring them together."""
    joined = set(closed[:1])
    while True:
        states = frozenset().union(*joined)
        touching = [piece for piece in pieces if _states(piece) & states]
        reached = {circuit for circuit in closed for piece in touching if _states(piece) & circuit}
        if reached <= joined:
            return len(joined) == len(closed)
        joined |= reached


def _heats(piece: Piece, inside: frozenset[str]) -> Iterable[_Heat]:
    """Heat into the cycle over the boundaries of a piece, and from streams outside that it brings together with it."""
    states = _states(piece)
    if not states & inside:
        return
    for port in piece.kind.heats(piece):
        into = states if port.into is None or port.beside else set(port.into)
        if into & inside:
            with_heat = (Term(1.0, (port.heat,)), Term(-1.0, (AMBIENT, port.entropy)))
            boundary = Reservoir(port.label, port.heat, 1, port.temperature)
            yield _Heat(boundary, with_heat, piece.kind.serves, port.beside)
    for exchange in piece.kind.exchanges(piece):
        gives, takes = (bool(set(side) & inside) for side in (exchange.giver, exchange.taker))
        if gives != takes:
            outside = exchange.giver if takes else exchange.taker
            entering = [state for state in piece.streams("in") if state in outside]
            leaving = [state for state in piece.streams("out") if state in outside]
            exergy = tuple(
                Term(sign, (f"states.{state}.mass_flow", f"states.{state}.specific_exergy"))
                for sign, several in ((1.0, entering), (-1.0, leaving))
                for state in several
            )
            label = f"{piece.title}, stream {', '.join(entering)} to {', '.join(leaving)}"
            sign = 1 if takes else -1
            yield _Heat(Reservoir(label, exchange.path, sign, None, (*entering, *leaving)), exergy, True)


def _exergy(book: Book, heats: Iterable[_Heat]) -> float:
    """Exergy that comes with some heats in the base case."""
    total = 0.0
    for heat in heats:
        for term in heat.exergy:
            product = term.coefficient
            for factor in term.factors:
                array = book.values.get(factor)
                product *= float("nan") if array is None else float(array[0])
            total += product
    return total


def _purpose(book: Book, delivered: float, supplied: Sequence[_Heat], rejected: Sequence[_Heat]) -> Purpose:
    """Power where any is delivered; else heating where the heat rejected has more exergy than the cooling."""
    if delivered > 0.0:
        return "power"
    warm, cold = (_exergy(book, [heat for heat in heats if heat.serves]) for heats in (rejected, supplied))
    return "heating" if -warm > -cold else "cooling"


def _figures(
    owner: str, title: str, purpose: Purpose, supplied: Sequence[_Heat], rejected: Sequence[_Heat]
) -> Iterable[Formula]:
    net = Term(1.0, (f"{owner}.net_power",))
    given = [term for heat in supplied for term in heat.exergy]
    if purpose == "power":
        words = f"{title}: net power delivered in parts of the heat supplied."
        heat = Term(1.0, (f"{owner}.heat_supplied",))
        yield _ratio(owner, "thermal_efficiency", "Thermal efficiency", words, [net], [heat])
        words = f"{title}: net power delivered in parts of the exergy that comes with the heat supplied."
        yield _ratio(owner, "second_law_efficiency", "Second-law efficiency", words, [net], given)
        return
    useful, direction, name, goal = (
        (supplied, 1.0, "taken up", "what is cooled")
        if purpose == "cooling"
        else (rejected, -1.0, "given off", "what is heated")
    )
    useful = [heat for heat in useful if heat.serves]
    if not useful:
        return
    words = f"{title}: heat {name} in parts of the net power absorbed ({purpose})."
    terms = [Term(direction * heat.reservoir.sign, (heat.reservoir.heat,)) for heat in useful]
    yield _ratio(owner, "coefficient_of_performance", "Coefficient of performance", words, terms, [net])
    words = f"{title}: exergy given to {goal} in parts of the net power absorbed ({purpose})."
    terms = [Term(-term.coefficient, term.factors) for heat in useful for term in heat.exergy]
    yield _ratio(owner, "second_law_efficiency", "Second-law efficiency", words, terms, [net])


def _ratio(owner: str, name: str, heading: str, sentence: str, above: Sequence[Term], below: Sequence[Term]) -> Formula:
    """One sum of products over another, NaN where the divisor is not positive."""
    inputs = tuple(dict.fromkeys(factor for term in (*above, *below) for factor in term.factors))
    path = f"{owner}.{name}"

    def evaluate(*arrays: Any) -> Any:
        values = dict(zip(inputs, arrays, strict=True))
        return ratio_of(*(sum(term.value(values) for term in terms) for terms in (above, below)))

    return Formula(
        path,
        owner,
        heading,
        sentence,
        "definition for cycles",
        path,
        inputs,
        evaluate,
        rf"\frac{{{sum_latex(above)}}}{{{sum_latex(below)}}}",
        reason="what it would be divided by is not positive",
    )

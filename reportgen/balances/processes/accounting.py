r"""Results of closed systems: changes of entropy, entropy with heat, generation, lost work, totals and closures.

    ΔS = Σ_to m s − Σ_from m s ,   S_Q = Σ Q_j/T_j ,   S_gen = ΔS − S_Q ,   lost work = T0 S_gen

Amounts in J and J/K, where equipment has rates. Heat that leaves through a boundary of unstated temperature leaves at
T0, as a listed assumption; heat that enters through one leaves the entropy generation unreported, with a warning.

A chain of processes has one account: what its first states hold and what enters with heat, with what is generated, is
what its last states hold and what leaves with heat. Its sums stand under ``trains.<id>``, those of all processes under
``total``, or under ``closed`` in a file that has equipment too, whose totals are rates.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from reportgen.balances.book import Book
from reportgen.balances.plant import Piece, trains_of
from reportgen.balances.processes.definitions import final_states, initial_states
from reportgen.balances.processes.mixing import mixing_results
from reportgen.balances.relations import Term
from reportgen.balances.solution import Account, Assumption, Entry, Solution

__all__ = ["add_process_results"]


def add_process_results(solution: Solution) -> None:
    """Add every value of processes that is only reported, with its step, to a solution whose network is solved."""
    processes = solution.processes
    if not processes:
        return
    book = _ProcessBook(solution)
    book.contents()
    for piece in processes.values():
        book.process(piece)
    trains = solution.plant.trains.items()
    groups = {f"trains.{name}": (train.title, train.processes) for name, train in trains if train.processes}
    counted = trains_of(solution.plant, tuple(processes))
    groups["closed" if solution.pieces else "total"] = ("Whole course", counted)
    for owner, (title, tags) in groups.items():
        book.group(owner, title, {tag: processes[tag] for tag in tags})
        solution.closed.add(owner)


def _of_state(state: str, name: str) -> str:
    return f"states.{state}.{name}"


class _ProcessBook(Book):
    """The results of processes."""

    def contents(self) -> None:
        """S = m s of every state that a process begins or ends with."""
        pieces = self.solution.processes.values()
        for state in dict.fromkeys(state for piece in pieces for _, _, state in piece.connections()):
            self.balance(
                _of_state(state, "entropy"),
                f"states.{state}",
                "Entropy of a content",
                f"State {state} holds its mass times its specific entropy.",
                "entropy is additive",
                (Term(1.0, (_of_state(state, "mass"), _of_state(state, "specific_entropy"))),),
            )

    def process(self, piece: Piece) -> None:
        """Imbalances, change of entropy, entropy with heat, entropy generation, lost work, account of one process."""
        alone = {piece.tag: piece}
        self._imbalances(piece.owner, piece.title, alone)
        self._path_taken(piece)
        terms = _change(piece)
        sentence = f"{piece.title}: entropy in the end less entropy in the beginning."
        basis = "entropy is a property of the state"
        self.balance(piece.path("entropy_change"), piece.owner, "Change of entropy", sentence, basis, terms)
        ports, carried = list(piece.kind.heats(piece)), piece.path("entropy_with_heat")
        scale = self._scale(piece)
        for port in ports:
            self.entropy_with_heat(piece, port, scale)
        if [port.entropy for port in ports] != [carried]:
            sentence = f"{piece.title}: entropy that comes with heat over all boundaries."
            parts = [Term(1.0, (port.entropy,)) for port in ports]
            self.balance(carried, piece.owner, "Entropy with heat", sentence, "second law, closed system", parts)
        self.balance(
            piece.path("entropy_generation"),
            piece.owner,
            "Entropy balance",
            f"{piece.title}: what the entropy changes by and did not come with heat was generated inside.",
            "second law, closed system",
            [Term(1.0, (piece.path("entropy_change"),)), Term(-1.0, (carried,))],
        )
        self.lost_work(piece.owner, piece.title)
        fluid = piece.fluid_id(piece.states("to")[0])
        blend = self.solution.mixtures.blends.get(fluid)
        if blend is not None and blend.owner == piece.owner:
            for formula in mixing_results(self.solution.mixtures, fluid, self.values):
                self.formula(formula)
        for formula in piece.kind.results(piece):
            self.formula(formula)
        self._account(piece.owner, piece.title, alone)

    def _path_taken(self, piece: Piece) -> None:
        """List what the kind of process assumes of its way, and what it was taken to keep without being told."""
        for choice in piece.kind.choices:
            if choice.assumed and choice.name not in piece.options:
                text = f"{piece.title} {choice.assumed}."
                affects = (piece.path("work"),)
                self.solution.assumptions.append(Assumption(piece.path(choice.name), text, piece.owner, affects))
        if piece.kind.path_taken:
            text = f"{piece.title} {piece.kind.path_taken}."
            key, affects = piece.path("quasi-static"), (piece.path("work"),)
            basis = f'what "{piece.kind.name}" means'
            self.solution.assumptions.append(Assumption(key, text, piece.owner, affects, basis))

    def _imbalances(self, owner: str, title: str, processes: Mapping[str, Piece]) -> None:
        """What mass and energy balance leave, from the states at both ends, heat and work."""
        before, after = initial_states(processes), final_states(processes)
        mass = [Term(1.0, (_of_state(state, "mass"),)) for state in before]
        mass += [Term(-1.0, (_of_state(state, "mass"),)) for state in after]
        sentence = f"{title}: what is left of the mass balance; zero but for rounding."
        self.balance(f"{owner}.mass_imbalance", owner, "Check of mass", sentence, "conservation of mass", mass)
        energy = [Term(1.0, (piece.path("heat"),)) for piece in processes.values()]
        energy += [Term(-1.0, (piece.path("work"),)) for piece in processes.values()]
        for states, sign in ((after, -1.0), (before, 1.0)):
            energy += [
                Term(sign, (_of_state(state, "mass"), _of_state(state, "specific_internal_energy"))) for state in states
            ]
        sentence = f"{title}: what is left of the energy balance; zero but for rounding."
        self.balance(
            f"{owner}.energy_imbalance", owner, "Check of energy", sentence, "first law, closed system", energy
        )

    def _scale(self, piece: Piece) -> float:
        """Size of the energy that a process deals with, base case [J]."""
        parts = [abs(float(self.array(piece.path(name))[0])) for name in ("heat", "work")]
        for _, _, state in piece.connections():
            mass, energy = (self.array(_of_state(state, name)) for name in ("mass", "specific_internal_energy"))
            parts.append(abs(float(mass[0] * energy[0])))
        return float(np.nanmax(parts))

    def group(self, owner: str, title: str, processes: Mapping[str, Piece]) -> None:
        """Sums of the parts, balances from the first states to the last, and what the two differ by."""
        sums = {
            "heat": "Heat",
            "work": "Work",
            "entropy_change": "Change of entropy",
            "entropy_with_heat": "Entropy with heat",
            "entropy_generation": "Entropy generation of the parts",
        }
        words = f"{title}: sum over {', '.join(processes)}."
        for name, heading in sums.items():
            terms = [Term(1.0, (piece.path(name),)) for piece in processes.values()]
            self.balance(f"{owner}.{name}", owner, heading, words, "sum of the parts", terms)
        self.lost_work(owner, title)
        self._imbalances(owner, title, processes)
        before, after = initial_states(processes), final_states(processes)
        terms = [
            Term(1.0, (f"{owner}.entropy_generation",)),
            *(Term(1.0, (_of_state(state, "entropy"),)) for state in before),
            Term(1.0, (f"{owner}.entropy_with_heat",)),
            *(Term(-1.0, (_of_state(state, "entropy"),)) for state in after),
        ]
        words = f"{title}: sum of the parts less the balance from the first states to the last; zero but for rounding."
        self.balance(f"{owner}.closure", owner, "Closure of entropy", words, "parts against the whole", terms)
        self._account(owner, title, processes)

    def _account(self, owner: str, title: str, processes: Mapping[str, Piece]) -> None:
        before, after = initial_states(processes), final_states(processes)

        def content(side: str, state: str, when: str) -> Entry:
            path = _of_state(state, "entropy")
            return Entry(side, f"Content of state {state} {when}", path, 1, self.array(path))  # type: ignore[arg-type]

        entries = [content("in", state, "in the beginning") for state in before]
        leaving = [content("out", state, "in the end") for state in after]
        complete = True
        for piece in processes.values():
            for port in piece.kind.heats(piece):
                amount = self.array(port.entropy)
                if np.isnan(amount[0]):
                    complete = False
                elif amount[0] < 0.0:
                    leaving.append(Entry("out", f"Heat from {port.label}", port.entropy, -1, -amount))
                elif amount[0] > 0.0:
                    entries.append(Entry("in", f"Heat into {port.label}", port.entropy, 1, amount))
        for piece in processes.values():
            path = piece.path("entropy_generation")
            entries.append(Entry("generated", piece.title, path, 1, self.array(path)))
        self.solution.accounts[owner] = Account(
            owner, title, (*entries, *leaving), complete, tuple(before), tuple(after)
        )


def _change(piece: Piece) -> list[Term]:
    """Σ m_i (s_b − s_a) body by body; of parts that become one, Σ m_i (s − s_i), since their masses add up."""
    before, after = piece.states("from"), piece.states("to")
    ends: Sequence[str] = after if len(after) == len(before) else [after[0]] * len(before)
    terms = []
    for first, last in zip(before, ends, strict=True):
        mass = _of_state(first, "mass")
        terms += [
            Term(1.0, (mass, _of_state(last, "specific_entropy"))),
            Term(-1.0, (mass, _of_state(first, "specific_entropy"))),
        ]
    return terms

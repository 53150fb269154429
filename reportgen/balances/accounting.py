r"""Results that follow once the network is solved: exergies, entropy accounts, lost work, totals and closures.

    Ṡ_Q = Σ Q̇_j / T_j ,   Ṡgen = Σout ṁ s − Σin ṁ s − Ṡ_Q ,   lost work = T0 Ṡgen
    e = h − h0 − T0 (s − s0)   (h0, s0 of the same fluid at p0, T0; kinetic and potential energy not counted)

Heat that leaves through a boundary of unstated temperature leaves at T0, as a listed assumption. Heat that enters
through one has no entropy that could be stated: the entropy generation of that piece and of the totals is left out.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from reportgen.balances.book import AMBIENT, Book
from reportgen.balances.compression import add_compression
from reportgen.balances.cycles import add_cycle
from reportgen.balances.equations import elevated_enthalpy
from reportgen.balances.network import Network
from reportgen.balances.plant import Piece, Train, balance_groups, trains_of
from reportgen.balances.relations import Equation, Formulas, Term, token
from reportgen.balances.solution import Account, Entry, Solution, Step
from reportgen.errors import Fault

__all__ = ["add_results"]


def add_results(solution: Solution, network: Network) -> None:
    """Add every value that is only reported, with its step, to a solution whose network is solved."""
    book = _FlowBook(solution, {balance.owner for balance in network.implied})
    book.exergies()
    book.entropy_flows()
    for piece in solution.pieces.values():
        book.piece(piece)
    trains = solution.plant.trains.items()
    groups = {f"trains.{name}": train for name, train in trains if train.equipment}
    several = len(groups) > 1
    if solution.pieces:
        groups["total"] = Train("Whole plant", trains_of(solution.plant, tuple(solution.pieces)))
    for owner, train in groups.items():
        pieces = [solution.pieces[tag] for tag in train.equipment]
        book.group(owner, train.title, pieces)
        if owner == "total" and several:
            continue  # several trains are several processes: their sum is no cycle and no compression of its own
        cycle = add_cycle(book, owner, train.title, pieces, train.purpose)
        add_compression(book, owner, train.title, pieces)
        if cycle is not None:
            solution.cycles[owner] = cycle


class _FlowBook(Book):
    """The results of equipment in steady flow."""

    def __init__(self, solution: Solution, implied: set[str]) -> None:
        super().__init__(solution)
        #: Owners of mass balances that were not needed, since they follow from the others of a closed loop.
        self.implied = implied

    # -- states --------------------------------------------------------------------------------------------------

    def exergies(self) -> None:
        """Specific flow exergy of every state, relative to its fluid in the state of the surroundings.

        States of closed systems alone have none: their content flows nowhere.
        """
        plant, solution = self.solution.plant, self.solution
        closed = {state for piece in solution.processes.values() for _, _, state in piece.connections()}
        closed -= {state for piece in solution.pieces.values() for _, _, state in piece.connections()}
        flowing = {state: fluid_id for state, fluid_id in plant.states.items() if state not in closed}
        for fluid_id in dict.fromkeys(flowing.values()):
            self._dead_state(fluid_id)
        fires = any(piece.kind.burns for piece in solution.pieces.values())
        chemical = ", potential and chemical" if fires else " and potential"
        for state, fluid_id in flowing.items():
            prefix, dead = f"states.{state}.", f"surroundings.{fluid_id}."
            h, s = prefix + "specific_enthalpy", prefix + "specific_entropy"
            h0, s0 = dead + "specific_enthalpy", dead + "specific_entropy"
            terms = (Term(1.0, (h,)), Term(-1.0, (h0,)), Term(-1.0, (AMBIENT, s)), Term(1.0, (AMBIENT, s0)))
            self.balance(
                prefix + "specific_exergy",
                f"states.{state}",
                "Specific exergy",
                f"State {state}: work that could be had on the way to equilibrium with the surroundings.",
                f"definition of flow exergy, without kinetic{chemical} energy",
                terms,
            )

    def _dead_state(self, fluid_id: str) -> None:
        fluid = self.solution.mixtures.model(fluid_id, self.values)
        dead = f"surroundings.{fluid_id}."
        paths = ("surroundings.pressure", AMBIENT)
        state = fluid.at(errors="mask", pressure=self.values[paths[0]], temperature=self.values[paths[1]])
        fault = state.faults.get(0)
        solved, equations = [], []
        for name, symbol in (("specific_enthalpy", "h"), ("specific_entropy", "s")):
            path = dead + name
            self.values[path] = np.array(getattr(state, name), dtype=float)
            if fault:
                self.solution.reasons[path] = fault.message
            solved.append(path)
            arguments = rf"{token(paths[0])},\,{token(paths[1])}"
            equations.append(Equation(token(path), rf"{symbol}\left({arguments}\right)"))
        if np.isnan(self.values[solved[0]][0]):
            text = f"{fluid.title} has no state at the surroundings' temperature and pressure, hence no exergy: "
            self.solution.warnings.append(Fault(text + (fault.message if fault else "no value."), f"fluids.{fluid_id}"))
            return
        self.solution.steps.append(
            Step(
                f"surroundings.{fluid_id}.properties",
                f"fluids.{fluid_id}",
                "Surroundings",
                f"{fluid.title} in equilibrium with the surroundings.",
                f"equation of state, {fluid.title}",
                tuple(solved),
                (*paths, f"fluids.{fluid_id}"),
                tuple(equations),
            )
        )

    def entropy_flows(self) -> None:
        """ṁ s of every stream."""
        for state in self.solution.plant.states:
            flow, entropy = f"states.{state}.mass_flow", f"states.{state}.specific_entropy"
            if flow in self.values:
                self.balance(
                    f"states.{state}.entropy_flow",
                    f"states.{state}",
                    "Entropy of a stream",
                    f"Stream {state} carries its flow times its specific entropy.",
                    "entropy of a stream",
                    (Term(1.0, (flow, entropy)),),
                )

    # -- pieces --------------------------------------------------------------------------------------------------

    def piece(self, piece: Piece) -> None:
        """Imbalances, entropy with heat, entropy generation, lost work, figures of merit, account."""
        self._imbalances(piece.owner, piece.title, [piece], piece.streams("in"), piece.streams("out"))
        ports = list(piece.kind.heats(piece))
        scale = self._scale(piece)
        for port in ports:
            self.entropy_with_heat(piece, port, scale)
        carried = piece.path("entropy_with_heat")
        if len(ports) > 1 or (ports and ports[0].entropy != carried):
            sentence = f"{piece.title}: entropy that comes with heat over all boundaries."
            terms = [Term(1.0, (port.entropy,)) for port in ports]
            self.balance(carried, piece.owner, "Entropy with heat", sentence, "second law, steady flow", terms)
        self.balance(
            piece.path("entropy_generation"),
            piece.owner,
            "Entropy balance",
            f"{piece.title}: what leaves as entropy and did not enter was generated inside.",
            "second law, steady flow",
            [*_entropy_terms(piece), Term(-1.0, (carried,))],
        )
        self.lost_work(piece.owner, piece.title)
        for formula in piece.kind.results(piece):
            self.formula(formula)
        for found in piece.kind.found(piece, self.values):
            if isinstance(found, Formulas):
                self.formulas(found)
            else:
                self.formula(found)
        self._account(piece.owner, piece.title, [piece], piece.streams("in"), piece.streams("out"))

    def _imbalances(
        self, owner: str, title: str, pieces: Sequence[Piece], inlets: Sequence[str], outlets: Sequence[str]
    ) -> None:
        terms = [Term(1.0, (f"states.{state}.mass_flow",)) for state in inlets]
        terms += [Term(-1.0, (f"states.{state}.mass_flow",)) for state in outlets]
        sentence = f"{title}: what is left of the mass balance; zero but for rounding."
        if owner in self.implied:
            sentence += " In a closed loop this balance follows from the others and was not used: here it checks them."
        self.balance(f"{owner}.mass_imbalance", owner, "Check of mass", sentence, "conservation of mass", terms)
        energy: list[Term] = []
        for states, sign in ((inlets, 1.0), (outlets, -1.0)):
            for state in states:
                energy += elevated_enthalpy(pieces[0], state, f"states.{state}.mass_flow", sign)
        for piece in pieces:
            energy += [term for term in _heat_terms(piece) if term.factors[0] in self.values]
            if piece.kind.power_sign:
                energy.append(Term(float(piece.kind.power_sign), (piece.kind.work(piece),)))
        sentence = f"{title}: what is left of the energy balance; zero but for rounding."
        self.balance(f"{owner}.energy_imbalance", owner, "Check of energy", sentence, "first law, steady flow", energy)

    def _scale(self, piece: Piece) -> float:
        """Size of the energy that flows through a piece, base case [W]."""
        parts = [abs(float(self.array(port.heat)[0])) for port in piece.kind.heats(piece)]
        for _, _, state in piece.connections():
            flow, enthalpy = f"states.{state}.mass_flow", f"states.{state}.specific_enthalpy"
            parts.append(abs(float(self.array(flow)[0] * self.array(enthalpy)[0])))
        return float(np.nanmax(parts)) if parts else 0.0

    # -- groups and accounts -------------------------------------------------------------------------------------

    def group(self, owner: str, title: str, pieces: Sequence[Piece]) -> None:
        """Sums of the parts, balances round the whole, and what the two differ by."""
        inlets, outlets = _boundary(pieces)
        sums = {
            "entropy_generation": ("Entropy generation of the parts", "sum of the parts"),
            "heat": ("Heat", "sum of the parts"),
            "entropy_with_heat": ("Entropy with heat", "sum of the parts"),
        }
        for name, (heading, basis) in sums.items():
            each = [_heat_terms(piece) if name == "heat" else [Term(1.0, (piece.path(name),))] for piece in pieces]
            terms = [term for terms_of_one in each for term in terms_of_one]
            words = f"{title}: sum over {', '.join(piece.tag for piece in pieces)}."
            self.balance(f"{owner}.{name}", owner, heading, words, basis, terms)
        machines = [piece for piece in pieces if piece.kind.power_sign]
        if machines:
            absorbs = all(piece.kind.power_sign > 0 for piece in machines)
            sign = 1.0 if absorbs else -1.0
            powers = [Term(sign * piece.kind.power_sign, (piece.kind.work(piece),)) for piece in machines]
            net = "power absorbed." if absorbs else "net power delivered, what is absorbed counted negative."
            words = f"{title}: {net}"
            self.balance(f"{owner}.power", owner, "Net power", words, "sum of the parts", powers)
        self.lost_work(owner, title)
        self._imbalances(owner, title, pieces, inlets, outlets)
        terms = [
            Term(1.0, (f"{owner}.entropy_generation",)),
            *(Term(1.0, (f"states.{state}.entropy_flow",)) for state in inlets),
            *(Term(-1.0, (f"states.{state}.entropy_flow",)) for state in outlets),
            Term(1.0, (f"{owner}.entropy_with_heat",)),
        ]
        words = f"{title}: sum of the parts less the balance round the whole; zero but for rounding."
        self.balance(f"{owner}.closure", owner, "Closure of entropy", words, "parts against the whole", terms)
        self._account(owner, title, pieces, inlets, outlets)

    def _account(
        self, owner: str, title: str, pieces: Sequence[Piece], inlets: Sequence[str], outlets: Sequence[str]
    ) -> None:
        entries: list[Entry] = []
        for state in inlets:
            path = f"states.{state}.entropy_flow"
            entries.append(Entry("in", f"Stream {state}", path, 1, self.array(path)))
        leaving: list[Entry] = []
        for state in outlets:
            path = f"states.{state}.entropy_flow"
            leaving.append(Entry("out", f"Stream {state}", path, 1, self.array(path)))
        complete = True
        for piece in pieces:
            for port in piece.kind.heats(piece):
                amount = self.array(port.entropy)
                if np.isnan(amount[0]):
                    complete = False
                elif amount[0] < 0.0:
                    leaving.append(Entry("out", f"Heat from {port.label}", port.entropy, -1, -amount))
                elif amount[0] > 0.0:
                    entries.append(Entry("in", f"Heat into {port.label}", port.entropy, 1, amount))
        for piece in pieces:
            path = piece.path("entropy_generation")
            entries.append(Entry("generated", piece.title, path, 1, self.array(path)))
        self.solution.accounts[owner] = Account(
            owner, title, (*entries, *leaving), complete, tuple(inlets), tuple(outlets)
        )


def _boundary(pieces: Sequence[Piece]) -> tuple[list[str], list[str]]:
    """States that enter or leave a group of pieces, those between its pieces left out."""
    entering = [state for piece in pieces for state in piece.streams("in")]
    leaving = [state for piece in pieces for state in piece.streams("out")]
    inner = set(entering) & set(leaving)
    return [state for state in entering if state not in inner], [state for state in leaving if state not in inner]


def _heat_terms(piece: Piece) -> list[Term]:
    """All heat into a piece: its ``heat`` and what crosses its boundary beside it."""
    beside = [Term(1.0, (port.heat,)) for port in piece.kind.heats(piece) if port.beside]
    return [Term(1.0, (piece.path("heat"),)), *beside]


def _entropy_terms(piece: Piece) -> list[Term]:
    """Σout ṁ s − Σin ṁ s, with the mass balance put in where one side of a group has a single state."""

    def product(flow: str, state: str, sign: float) -> Term:
        return Term(sign, (f"states.{flow}.mass_flow", f"states.{state}.specific_entropy"))

    terms: list[Term] = []
    for inlets, outlets in balance_groups(piece):
        if len(outlets) == 1:
            for state in inlets:
                terms += [product(state, outlets[0], 1.0), product(state, state, -1.0)]
        elif len(inlets) == 1:
            for state in outlets:
                terms += [product(state, state, 1.0), product(state, inlets[0], -1.0)]
        else:
            terms += [product(state, state, 1.0) for state in outlets]
            terms += [product(state, state, -1.0) for state in inlets]
    return terms

"""The solution of a plant on the sample axis: one block after the other, each a step of the working."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.balances.accounting import add_results
from reportgen.balances.coupled import Coupled
from reportgen.balances.doubts import doubts
from reportgen.balances.network import AnyRelation, Block, Network, PropertyRelation
from reportgen.balances.newton import NoSolution, solve_system
from reportgen.balances.plant import Plant, balance_groups, pieces_of, refuse_half_elevations
from reportgen.balances.processes.accounting import add_process_results
from reportgen.balances.processes.definitions import processes_of
from reportgen.balances.processes.mixing import Mixtures
from reportgen.balances.relations import Balance, Equation, Formula, token
from reportgen.balances.solution import Assumption, Solution, Step
from reportgen.balances.starts import Starts
from reportgen.balances.state_steps import StateSteps, numbers_of
from reportgen.balances.structure import build_network
from reportgen.balances.vessels import PREFIX
from reportgen.errors import Fault, SolutionError
from reportgen.names import NAMES

__all__ = ["solve"]

Array = NDArray[np.float64]

_ESSENTIAL = ("power", "heat", "duty", "work")


def solve(plant: Plant, givens: Mapping[str, ArrayLike]) -> Solution:
    """Solve a plant.

    Parameters
    ----------
    plant : fluids, states, equipment and trains.
    givens : variable path to samples, shape (N,) or scalar [SI]; column 0 is the base case. Both
        ``surroundings.temperature`` [K] and ``surroundings.pressure`` [Pa] must be among them.

    Returns
    -------
    Solution with every value of the plant, shape (N,). Columns that cannot be solved hold NaN, with a warning.

    Raises
    ------
    InputError : the plant itself is wrong, or a given path names nothing in it.
    SolutionError : too little or too much is given, the base case has no solution or leaves the range of a fluid.
    """
    columns = max((np.size(value) for value in givens.values()), default=1)
    values: dict[str, NDArray[Any]] = {
        path: np.array(np.broadcast_to(np.asarray(value, dtype=float), (columns,))) for path, value in givens.items()
    }
    every_given = frozenset(values)
    given = frozenset(path for path in every_given if not path.startswith(PREFIX))
    pieces, processes = pieces_of(plant, given), processes_of(plant, given)
    refuse_half_elevations(pieces, values)
    mixtures = Mixtures(plant, processes)
    every = {**pieces, **{piece.owner: piece for piece in processes.values()}}
    network = build_network(plant, every, given, mixtures.masses)
    solution = Solution(plant, pieces, values, processes=processes, mixtures=mixtures)
    _Run(solution, network, columns).blocks()
    mixtures.refuse_other_compositions(values)
    add_results(solution, network)
    add_process_results(solution)
    if plant.vessels:
        from reportgen.balances.vessels.accounting import add_vessel_results
        from reportgen.balances.vessels.definitions import vessels_of

        solution.vessels = vessels_of(plant, every_given)
        add_vessel_results(solution)
    solution.doubts.extend(doubts(solution))
    return solution


class _Run:
    """One pass through the blocks of a network."""

    def __init__(self, solution: Solution, network: Network, columns: int) -> None:
        self.solution = solution
        self.values = solution.values
        self.plant = solution.plant
        self.columns = columns
        self.network = network
        self.assumed = network.assumed
        every = [*solution.pieces.values(), *solution.processes.values()]
        self.starts = Starts(self.plant, every, self.values)
        self.needed = _needed(network.blocks)
        self.simultaneous = 0
        self.states = StateSteps(solution, columns)

    def blocks(self) -> None:
        """Solve all blocks in order and list the assumptions taken."""
        listed: dict[str, Assumption] = {}
        for default in self.network.defaults:
            known = listed.get(default.key)
            affects = (*known.affects, *default.affects) if known else default.affects
            listed[default.key] = Assumption(default.key, default.text, default.owner, affects)
        self.solution.assumptions.extend(listed.values())
        self.solution.assumptions.extend(_neglected(self.solution))
        for number, block in enumerate(self.network.blocks):
            self._block(block, number in self.needed)
        for state in self.plant.states:
            if state not in self.solution.states:
                self.states.enter(state, ("pressure", "specific_enthalpy"))

    def _block(self, block: Block, needed: bool) -> None:
        if all(path in self.values for path in block.unknowns):
            return
        owners = {relation.state if isinstance(relation, PropertyRelation) else "" for relation in block.relations}
        if len(owners) == 1 and (state := next(iter(owners))):
            pair = self.states.pair_of(state)
            if pair:
                self.states.enter(state, pair)
                return
        relation, unknown = block.relations[0], block.unknowns[0]
        if len(block.relations) == 1 and isinstance(relation, PropertyRelation) and len(relation.inputs) == 1:
            self.states.caloric(relation, unknown)
            return
        if len(block.relations) == 1 and self._direct(relation, unknown, needed):
            return
        self._together(block)

    def _direct(self, relation: AnyRelation, unknown: str, needed: bool) -> bool:
        """Solve one relation for one unknown in closed form; False when that cannot be done."""
        fluids: tuple[str, ...] = ()
        with np.errstate(all="ignore"):
            if isinstance(relation, Balance) and relation.is_direct_in(unknown):
                result = relation.direct(unknown, self.values)
                equation = relation.solved(unknown)
            elif isinstance(relation, Formula) and relation.output == unknown:
                result = relation.evaluate(*(self.values[path] for path in relation.inputs))
                equation, fluids = relation.balanced(self.values), relation.fluids
            elif isinstance(relation, Formula) and unknown in relation.inverses:
                inputs = relation.turned_inputs(unknown)
                result = relation.inverses[unknown].evaluate(*(self.values[path] for path in inputs))
                equation, fluids = relation.turned(unknown), relation.fluids
            else:
                return False
        array = np.array(np.broadcast_to(np.asarray(result, dtype=float), (self.columns,)))
        array[~np.isfinite(array)] = np.nan
        others = tuple(path for path in relation.variables if path != unknown)
        if np.isnan(array[0]):
            self._absent(relation, unknown, others, needed)
        self.values[unknown] = array
        default = self.assumed.get(relation.key)
        uses = (*others, *(f"fluids.{fluid}" for fluid in fluids))
        if default:
            uses = (*uses, f"assumptions.{default.key}")
        if not np.isnan(array[0]):
            self.solution.steps.append(
                Step(
                    relation.key,
                    relation.owner,
                    relation.name,
                    relation.words(unknown),
                    f"assumption: {default.text}" if relation.basis == "assumption" and default else relation.basis,
                    (unknown,),
                    uses,
                    (equation,),
                )
            )
        return True

    def _absent(self, relation: Balance | Formula, unknown: str, others: Sequence[str], needed: bool) -> None:
        """A value that cannot be had in the base case: a reason where nothing depends on it, else an error."""
        empty = [path for path in others if np.isnan(self.values[path][0])]
        if empty:
            reason = self.solution.reasons.get(empty[0], f"{empty[0]} has no value")
        elif isinstance(relation, Formula):
            reason = relation.reason or "the formula has no value here"
            if relation.explain and unknown == relation.output:
                reason = relation.explain(*(float(self.values[path][0]) for path in relation.inputs))
        elif relation.is_square_in(unknown):
            reason = f"its square would be negative{self._against_pressure(relation.owner)}"
        else:
            reason = f"the factor of {unknown} in the equation is zero, so that any value would satisfy it"
        if needed:
            message = f"{relation.name} of {relation.owner} cannot be solved for {unknown}: {reason}."
            raise SolutionError(Fault(message, unknown, numbers=numbers_of(self.values, others)))
        self.solution.reasons[unknown] = reason
        self.solution.lacking[unknown] = tuple(others)

    def _against_pressure(self, owner: str) -> str:
        """What to say of a piece whose pressure falls by its nature and rises by what is given; else nothing."""
        piece = self.solution.pieces.get(owner.partition(".")[2])
        if piece is None or piece.kind.lifts >= 0:
            return ""
        inlet, outlet = piece.one("inlet"), piece.one("outlet")
        first, last = (self.values.get(f"states.{state}.pressure", np.nan) for state in (inlet, outlet))
        if not np.ravel(last)[0] > np.ravel(first)[0]:
            return ""
        title = piece.kind.title.lower()
        return f"; the pressure of a {title} falls, and here it rises from state {inlet} to state {outlet}"

    def _together(self, block: Block) -> None:
        """Solve several relations at once."""
        problem = Coupled(
            block.relations, block.unknowns, self.values, self.plant.states.__getitem__, self.solution.mixtures.model
        )
        try:
            found = solve_system(problem, self.starts.attempts(problem.tears), self.columns)
        except NoSolution as failure:
            raise SolutionError(self._unsolved(block, problem, failure)) from None
        lost = int(np.isnan(np.array([found[path] for path in block.unknowns])).any(axis=0).sum())
        if lost:
            text = f"{lost} of {self.columns} columns of the relations solved together did not converge."
            self.solution.warnings.append(Fault(text, block.unknowns[0]))
        solves = tuple(path for path in block.unknowns if path not in self.values)
        self.values.update((path, found[path]) for path in solves)
        uses = [path for relation in block.relations for path in relation.variables if path not in block.unknowns]
        others: list[str] = []
        equations = []
        owners: list[str] = []
        for relation in block.relations:
            if isinstance(relation, PropertyRelation):
                prefix = f"states.{relation.state}."
                others.append(f"fluids.{self.plant.states[relation.state]}")
                symbol = NAMES[relation.output].symbol
                arguments = r",\,".join(token(prefix + name) for name in relation.inputs)
                equations.append(Equation(token(relation.path), rf"{symbol}\left({arguments}\right)"))
            else:
                if isinstance(relation, Formula):
                    others.extend(f"fluids.{fluid}" for fluid in relation.fluids)
                equations.append(relation.balanced())
                owners.append(relation.owner)
            if relation.key in self.assumed:
                others.append(f"assumptions.{self.assumed[relation.key].key}")
        self._doubt_pressures(block)
        self.simultaneous += 1
        single = len(block.relations) == 1
        names = ", ".join(dict.fromkeys(owner.split(".", 1)[-1] for owner in owners))
        first = block.relations[0]
        if single and not isinstance(first, PropertyRelation):
            sentence, name = f"{first.sentence} Solved for the unknown by iteration.", first.name
        else:
            sentence = f"The relations of {names or 'the state'} share {len(solves)} unknowns and are solved together."
            name = "Simultaneous relations"
        method = "linear system" if problem.is_linear else "Newton's method on all relations"
        self.solution.steps.append(
            Step(
                f"simultaneous.{self.simultaneous}",
                owners[0] if owners else f"states.{block.unknowns[0].split('.')[1]}",
                name,
                sentence,
                method,
                solves,
                tuple(dict.fromkeys([*uses, *others])),
                tuple(equations),
            )
        )

    def _doubt_pressures(self, block: Block) -> None:
        """Note states whose pressure was found from temperature and enthalpy, with nothing else known of them."""
        settled = {
            relation.state
            for relation in block.relations
            if isinstance(relation, PropertyRelation)
            and relation.path not in block.unknowns
            and relation.output not in ("temperature", "specific_enthalpy")
        }
        for relation, path in zip(block.relations, block.unknowns, strict=True):
            if (
                isinstance(relation, PropertyRelation)
                and relation.output == "temperature"
                and path.endswith("pressure")
                and relation.state not in settled
            ):
                self.states.doubtful.add(relation.state)

    def _unsolved(self, block: Block, problem: Coupled, failure: NoSolution) -> Fault:
        relations = ", ".join(relation.key for relation in block.relations[:8])
        more = f" and {len(block.relations) - 8} more" if len(block.relations) > 8 else ""
        known = dict.fromkeys(
            path for relation in block.relations for path in relation.variables if path in self.values
        )
        closest = ""
        if failure.worst is not None and np.isfinite(failure.imbalance):
            key = problem.residuals[failure.worst].key
            closest = f" At the closest, {key} is {failure.imbalance:.2g} of its terms from holding."
        words = (
            "have more than one common solution" if failure.several else "have no common solution that could be found"
        )
        return Fault(
            f"The relations {relations}{more} {words}: {failure.reason}.{closest}",
            failure.paths[0] if failure.paths else block.unknowns[0],
            numbers=numbers_of(self.values, list(known)[:8]),
            hint=f"Unknown together: {', '.join(failure.paths)}.",
        )


def _neglected(solution: Solution) -> list[Assumption]:
    """Kinetic and potential energy left out at one stream of a piece while another it passes into states them."""
    found = {}
    for piece in solution.pieces.values():
        for inlets, outlets in balance_groups(piece):
            states = dict.fromkeys((*inlets, *outlets))
            for name, words in (
                ("velocity", "The kinetic energy of stream {} is neglected."),
                ("elevation", "Stream {} is at the datum of elevations."),
            ):
                silent = [state for state in states if f"states.{state}.{name}" not in piece.carried]
                if len(silent) == len(states):
                    continue
                for state in silent:
                    key = f"states.{state}.no_{name}"
                    affects = (f"states.{state}.{name}",)
                    found[key] = Assumption(key, words.format(state), f"states.{state}", affects)
    return list(found.values())


def _needed(blocks: Sequence[Block]) -> set[int]:
    """Numbers of the blocks whose failure is an error: they give a state, a flow, a power or heat, or lead to one."""
    wanted: set[str] = set()
    found: set[int] = set()
    for number in range(len(blocks) - 1, -1, -1):
        block = blocks[number]
        essential = len(block.relations) > 1 or any(
            path in wanted or path.startswith("states.") or path.rsplit(".", 1)[-1] in _ESSENTIAL
            for path in block.unknowns
        )
        if essential:
            found.add(number)
            wanted.update(path for relation in block.relations for path in relation.variables)
    return found

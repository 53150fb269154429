"""Degrees of freedom: what to say when too little, too much, or the wrong things are given.

Each message names the quantities concerned and what could be added or left out. Too much is raised as an
:class:`OverdeterminedError` with the groups of givens that compete, so that a caller who knows their uncertainties can
tell by how much they contradict each other.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence

from reportgen.balances.matching import Matching
from reportgen.balances.network import OF_STATES, AnyRelation, Block, PropertyRelation, listed, owner_of
from reportgen.balances.plant import Piece
from reportgen.errors import Fault, SolutionError

__all__ = ["OverdeterminedError", "may_be_given", "refuse_excess", "refuse_ill_posed", "refuse_lack"]

#: Order in which missing quantities are proposed.
_PROPOSED = (
    "mass_flow",
    "mass",
    "pressure",
    "temperature",
    "volume",
    "specific_enthalpy",
    "isentropic_efficiency",
    "power",
    "duty",
    "heat",
    "work",
    "velocity",
    "quality",
)
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
    "mass",
    "volume",
    "work",
    "stirring_work",
)
#: Efficiencies of one machine that differ by its pressure ratio alone.
_OF_ONE_RATIO = ("isentropic_efficiency", "polytropic_efficiency", "isothermal_efficiency")
_MOST_PROPOSALS = 4
_COUNTS = {1: "one", 2: "two", 3: "three", 4: "four", 5: "five", 6: "six"}


class OverdeterminedError(SolutionError):
    """More is given than can hold at once; ``groups`` holds the givens of each fault that compete, and how many are
    too many among them.
    """

    def __init__(self, faults: Iterable[Fault] | Fault, groups: Sequence[tuple[tuple[str, ...], int]] = ()) -> None:
        super().__init__(faults)
        self.groups = tuple(groups)


def refuse_excess(matching: Matching, table: Mapping[str, AnyRelation], given: frozenset[str]) -> None:
    """OverdeterminedError naming the givens that compete, when more is given than can hold at once."""
    faults: list[Fault] = []
    groups: list[tuple[tuple[str, ...], int]] = []
    covered: set[str] = set()
    position: dict[str, int] = {}
    idle = matching.idle()
    for key in idle:
        if key in covered:
            continue
        if not position:
            every = dict.fromkeys(path for relation in table.values() for path in relation.variables)
            position = {path: number for number, path in enumerate(every)}
        group = matching.overdetermined(key)
        covered.update(group)
        members = set(group)
        excess = sum(1 for other in idle if other in members)
        paths = {path for member in group for path in table[member].solvable if path in given}
        competing = sorted((path for path in paths if not path.startswith("surroundings.")), key=position.__getitem__)
        owners = sorted({owner_of(table[member]) for member in group})
        number = "one value" if excess == 1 else f"{_COUNTS.get(excess, str(excess))} values"
        groups.append((tuple(competing), excess))
        if competing:
            faults.append(
                Fault(
                    f"More is given than can hold at once: {number} too many among {listed(competing)}.",
                    competing[-1],
                    expected=f"{number} fewer, without {_either(competing, excess)}",
                    hint=f"The relations concerned are those of {listed(owners)}.",
                )
            )
        else:
            faults.append(Fault(f"The relations of {listed(owners)} contradict or repeat each other.", owners[0]))
    if faults:
        raise OverdeterminedError(faults, groups)


def _either(competing: Sequence[str], excess: int) -> str:
    """The last ones of the file first: what was added last is the likeliest to be left out again."""
    proposed = list(reversed(competing))[:_MOST_PROPOSALS]
    if len(competing) <= excess:
        return " and ".join(proposed)
    text = " or ".join(proposed)
    return text if len(competing) <= _MOST_PROPOSALS else f"{text}, for example"


def refuse_lack(matching: Matching, unknowns: Sequence[str], allowed: set[str]) -> None:
    """SolutionError naming what nothing determines, with what could be given; ``allowed`` are the paths that may be."""
    faults = []
    position = {path: number for number, path in enumerate(unknowns)}
    for group, missing in matching.undetermined(unknowns):
        members = sorted(group, key=position.__getitem__)
        candidates = [path for path in members if path in allowed]
        candidates.sort(key=_preference)
        number = "one more value" if missing == 1 else f"{_COUNTS.get(missing, str(missing))} more independent values"
        proposals = _proposals(matching, candidates, missing)
        message = _open_words(members, candidates, number)
        faults.append(
            Fault(
                message,
                (candidates or members)[0],
                expected=f"{number}, for example {proposals}" if proposals else number,
            )
        )
    if faults:
        raise SolutionError(faults)


def _preference(path: str) -> int:
    name = path.rsplit(".", 1)[-1]
    return _PROPOSED.index(name) if name in _PROPOSED else 99


def _open_words(members: Sequence[str], candidates: Sequence[str], number: str) -> str:
    names = [path.rsplit(".", 1)[-1] for path in members]
    states = list(dict.fromkeys(path.split(".")[1] for path in members if path.startswith("states.")))
    for amount, word in (("mass_flow", "flow"), ("mass", "mass")):
        found = [path.split(".")[1] for path, name in zip(members, names, strict=True) if name == amount]
        if found and all(name in _EXTENSIVE for name in names):
            return f"Nothing fixes the {word} of {'state' if len(found) == 1 else 'states'} {listed(found)}."
    if len(states) == 1 and all(path.startswith("states.") for path in members):
        return f"State {states[0]} is not fixed: {number} of its properties must be known."
    return f"Nothing determines {listed(candidates or members)}."


def _proposals(matching: Matching, candidates: Sequence[str], missing: int) -> str:
    """Single candidates where one value is missing, else one set of them that together would do."""
    if missing == 1:
        return " or ".join(candidates[:_MOST_PROPOSALS])
    chosen: list[str] = []
    matching.mark()
    for path in candidates:
        if len(chosen) < missing and matching.add_if_open(f"proposed.{path}", [path]):
            chosen.append(path)
    matching.back()
    return " together with ".join(chosen)


def refuse_ill_posed(blocks: Iterable[Block], pieces: Mapping[str, Piece], given: frozenset[str]) -> None:
    """SolutionError where an end state would have to be found from two efficiencies of one machine.

    They differ by the pressure ratio alone, agree as it goes to 1, and leave it and all else open within any
    uncertainty. With the heat of the machine unknown an isothermal efficiency stands for its power, and may be given.
    """
    faults = []
    several = {
        piece.owner: (piece, names)
        for piece in pieces.values()
        if len(names := [name for name in _OF_ONE_RATIO if piece.path(name) in given]) > 1
    }
    known = set(given)
    for block in blocks if several else ():
        owners = [owner_of(relation) for relation in block.relations if not isinstance(relation, PropertyRelation)]
        for owner in dict.fromkeys(owners):
            piece, names = several.get(owner, (None, []))
            if piece is None:
                continue
            keys = {relation.key for relation in block.relations}
            used = [name for name in names if piece.path(f"{name}.definition") in keys]
            if piece.path("heat") in block.unknowns:
                used = [name for name in used if name != "isothermal_efficiency"]
            ends = [f"states.{state}" for state in (*piece.streams("in"), *piece.streams("out"))]
            sought = [
                path for name in ("pressure", "temperature") for end in ends if (path := f"{end}.{name}") not in known
            ]
            if len(used) > 1 and sought:
                words = " and ".join(f"{owner}.{name}" for name in used)
                ratio = f" or {owner}.pressure_ratio" if sought[0].endswith(".pressure") else ""
                faults.append(
                    Fault(
                        f"{sought[0]} would have to be found from {words}, which differ by the pressure ratio alone: a "
                        "small error of either would change it beyond use.",
                        piece.path(used[-1]),
                        expected=f"{sought[0]}{ratio} in the place of one of the efficiencies",
                    )
                )
        known.update(block.unknowns)
    if faults:
        raise SolutionError(faults)


def may_be_given(states: Iterable[str], pieces: Mapping[str, Piece]) -> set[str]:
    """Every path that may be given for states and pieces."""
    found = {f"states.{state}.{name}" for state in states for name in OF_STATES}
    for piece in pieces.values():
        found.update(piece.path(parameter.name) for parameter in piece.kind.parameters)
        for group in piece.kind.groups:
            for number in range(1, piece.count(group.name) + 1):
                found.update(piece.path(f"{group.name}.{number}.{part.name}") for part in group.parameters)
    return found

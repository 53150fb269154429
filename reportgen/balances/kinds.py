"""What a kind of equipment, or of process in a closed system, declares; and the registries of all kinds.

A kind is one module of :mod:`reportgen.balances.equipment`, of :mod:`reportgen.balances.processes.kinds` or of
:mod:`reportgen.balances.vessels.kinds`, that binds one :class:`Kind` to the name ``KIND``. Nothing else names it:
:func:`kinds`, :func:`process_kinds` and :func:`vessel_kinds` find the modules by looking into the package. This module
and the declarations need neither numpy nor a fluid, so that the schema of the calculation file stays cheap to make.
"""

from __future__ import annotations

import importlib
import pkgutil
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING, Any, Literal

if TYPE_CHECKING:
    from reportgen.balances.doubts import Doubt
    from reportgen.balances.plant import Piece
    from reportgen.balances.profiles import Along
    from reportgen.balances.relations import Default, Exchange, Formula, Formulas, HeatPort, Relation, Stretch
    from reportgen.errors import Fault

__all__ = ["Choice", "Group", "Kind", "Parameter", "Port", "kinds", "process_kinds", "vessel_kinds"]


@dataclass(frozen=True)
class Port:
    """Where streams enter or leave: key in the calculation file, direction, one or many states, needed or not.

    Streams exchange mass only with ports of the same ``side`` (the two sides of a heat exchanger).
    """

    name: str
    direction: Literal["in", "out"]
    many: bool = False
    optional: bool = False
    text: str = ""
    side: str = ""


@dataclass(frozen=True)
class Parameter:
    """A quantity that may be given for a piece of equipment; what is not given is solved for.

    ``dimension`` is a key of :data:`reportgen.names.DIMENSIONS`; ``default`` says in words what is assumed when
    neither the file nor any balance determines the quantity (empty: nothing is assumed). ``signed``: it may be negative
    though others of its name may not, as the pressure loss of a pipe that runs down.
    """

    name: str
    dimension: str
    text: str
    default: str = ""
    signed: bool = False


@dataclass(frozen=True)
class Group:
    """A list of tables of parameters, such as ``heat_ports``; paths are ``equipment.<tag>.<group>.<n>.<parameter>``.

    ``single``: one table in place of a list, such as the wall of a vessel; paths have no number then. What is
    ``needed`` there must be given with it.
    """

    name: str
    parameters: tuple[Parameter, ...]
    text: str = ""
    single: bool = False
    needed: tuple[str, ...] = ()


@dataclass(frozen=True)
class Choice:
    """A word that may be given for a piece, one of ``values``; the first of them holds where none is given.

    ``many``: a list with one word for each state at the first port may be given too. ``assumed``: what is taken for
    granted where none is given, to follow the title of the piece and become a listed assumption; empty: nothing.
    """

    name: str
    values: tuple[str, ...]
    text: str
    many: bool = False
    assumed: str = ""


@dataclass(frozen=True)
class Kind:
    """One kind of equipment or process: what the calculation file may say about it, and the relations it obeys.

    Parameters
    ----------
    name, title, text : key in the file, title in a report, one sentence on what it is.
    ports, parameters, groups, choices : what the file may give.
    relations : the relations of one piece, solvable for any of their variables.
    defaults : assumptions that stand in when nothing else determines a quantity, first ones tried first.
    results : formulae for values that are only reported (efficiencies, numbers of merit).
    reports : names of the values that relations and results give beside the parameters.
    heats : heat ports with the paths of their heat and their boundary temperature.
    exchanges : heat that goes from one stream to another inside the piece.
    profile : temperatures of both streams along such an exchange, from the values of the base case.
    velocities : states whose velocity is a quantity of the network, given or not; None when there are none.
    stretches : how each stream changes between two states, for process curves.
    doubts : values that could come out where they cannot be meant although all balances hold, beside those that
        parameters tell; called with the piece and a function from path to samples, shape (N,).
    power_sign : +1 when positive power is absorbed, -1 when it is delivered, 0 when there is no power.
    work : path of the power that crosses the boundary of the piece; ``power`` itself unless losses lie between.
    serves : whether the heat over its boundary is what a cycle is for, as with heaters and coolers, and no loss or gain
        by the way.
    compresses : whether it raises the pressure of a gas, so that several in a row are stages of one compression.
    moves : what a machine that absorbs power is made for, liquid or gas; empty: either, or it moves nothing.
    lifts : +1 when the pressure rises from inlet to outlet, -1 when it falls by much, 0 when it stays about the same.
    exergetic_efficiency, entropy_generation_number : their definitions in words.
    family : table of the calculation file it belongs to; a process has the ports ``from`` and ``to``, amounts in the
        place of flows, and work positive when done by the system.
    path_taken : of a process, what is assumed of the states it passes, to follow its title; empty: nothing.
    checks : what is wrong with a piece whose ports and fluids are known.
    mixes : whether a process makes the fluid of its end state by mixing ideal gases.
    burns : whether what leaves is another fluid than what enters, whose composition follows from the flows that enter.
    found : results whose list depends on the values of the base case, such as the species of a gas.
    starts : values to begin a search from, by path; called with the piece, a function from path to what is known (NaN
        where nothing is) and the oxygen beyond what is needed to try.
    species : species whose ``mole_fraction`` may be reported.
    """

    name: str
    title: str
    text: str
    ports: tuple[Port, ...]
    parameters: tuple[Parameter, ...]
    relations: Callable[[Piece], Sequence[Relation]]
    defaults: Callable[[Piece], Sequence[Default]]
    results: Callable[[Piece], Sequence[Formula]]
    heats: Callable[[Piece], Sequence[HeatPort]]
    stretches: Callable[[Piece], Sequence[Stretch]]
    groups: tuple[Group, ...] = ()
    choices: tuple[Choice, ...] = ()
    reports: tuple[str, ...] = ()
    exchanges: Callable[[Piece], Sequence[Exchange]] = lambda piece: ()
    profile: Callable[[Piece, Mapping[str, Any]], Along] | None = None
    velocities: Callable[[Piece], Sequence[str]] | None = None
    doubts: Callable[[Piece, Callable[[str], Any]], Sequence[Doubt]] = lambda piece, samples: ()
    power_sign: int = 0
    work: Callable[[Piece], str] = lambda piece: piece.path("power")
    serves: bool = False
    compresses: bool = False
    moves: Literal["", "liquid", "gas"] = ""
    lifts: int = 0
    exergetic_efficiency: str = ""
    entropy_generation_number: str = ""
    family: Literal["equipment", "processes", "vessels"] = "equipment"
    path_taken: str = ""
    checks: Callable[[Piece], Sequence[Fault]] = lambda piece: ()
    mixes: Callable[[Piece], bool] = lambda piece: False
    burns: bool = False
    found: Callable[[Piece, Mapping[str, Any]], Sequence[Formula | Formulas]] = lambda piece, values: ()
    starts: Callable[[Piece, Callable[[str], float], float], Mapping[str, float]] = lambda piece, known, excess: {}
    species: tuple[str, ...] = ()

    def port(self, name: str) -> Port:
        """The port of that name; KeyError when the kind has none."""
        for port in self.ports:
            if port.name == name:
                return port
        raise KeyError(name)


@cache
def _discover(package_name: str) -> tuple[Kind, ...]:
    package = importlib.import_module(package_name)
    found = []
    for module in sorted(pkgutil.iter_modules(package.__path__), key=lambda entry: entry.name):
        kind = importlib.import_module(f"{package.__name__}.{module.name}").KIND
        found.append(kind)
    return tuple(sorted(found, key=lambda kind: kind.name))


def kinds() -> dict[str, Kind]:
    """Every kind of equipment by its name in the calculation file, in alphabetical order."""
    return {kind.name: kind for kind in _discover("reportgen.balances.equipment")}


def process_kinds() -> dict[str, Kind]:
    """Every kind of process in a closed system by its name in the calculation file, in alphabetical order."""
    return {kind.name: kind for kind in _discover("reportgen.balances.processes.kinds")}


def vessel_kinds() -> dict[str, Kind]:
    """What may happen to a vessel by its name in the calculation file, in alphabetical order."""
    return {kind.name: kind for kind in _discover("reportgen.balances.vessels.kinds")}

"""What a solution may come to although every balance holds: flows that run backwards, pressures that rise.

Each is a value with the side on which it cannot be meant, along the sample axis; whoever reads them decides with the
uncertainty whether one stands, and how grave it is.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

from reportgen.balances.equations import STANDARD_GRAVITY
from reportgen.names import NAMES

if TYPE_CHECKING:
    from reportgen.balances.plant import Piece
    from reportgen.balances.solution import Solution

__all__ = ["Doubt", "doubts"]


@dataclass(frozen=True)
class Doubt:
    """One value, and the side of a limit on which it makes sense.

    ``key`` tells what kind of doubt it is and stays the same from version to version. ``text`` is a full sentence
    without the numbers; ``⟦rises|may rise⟧`` holds the words for a value that is beyond the limit for certain and for
    one that may be. ``measured`` [SI unit of ``dimension``], shape (N,), is None where the doubt itself is the news;
    ``limit``, in the same unit, is a number or has that shape.
    """

    key: str
    owner: str
    path: str
    text: str
    measured: Any = None
    limit: Any = 0.0
    keep: Literal["above", "below"] = "above"
    dimension: str = "ratio"

    @property
    def stands(self) -> bool:
        """Whether the base case is on the wrong side of the limit."""
        if self.measured is None:
            return True
        import numpy as np

        value, limit = float(self.measured[0]), float(np.ravel(self.limit)[0])
        return value < limit if self.keep == "above" else value > limit


#: Last part of a path, key, smallest value that makes sense, and what a smaller one says.
_SMALLEST: dict[str, tuple[str, float, str]] = {
    "pressure_drop": ("pressure-rises", 0.0, "the pressure ⟦rises|may rise⟧ from inlet to outlet"),
    "hot_pressure_drop": ("pressure-rises", 0.0, "the pressure of the hot stream ⟦rises|may rise⟧"),
    "cold_pressure_drop": ("pressure-rises", 0.0, "the pressure of the cold stream ⟦rises|may rise⟧"),
    "pressure_ratio": ("pressure-against-machine", 1.0, "the pressure ⟦changes|may change⟧ the wrong way"),
    "pressure_rise": ("pressure-against-machine", 0.0, "the pressure ⟦falls|may fall⟧"),
    "power": ("power-against-machine", 0.0, "the power ⟦runs|may run⟧ against the natural direction of the machine"),
    "duty": ("heat-against-direction", 0.0, "heat ⟦flows|may flow⟧ from the cold to the hot stream"),
}
_WHY = {
    "pressure-rises": "nothing in it does work on the stream.",
    "power-against-machine": "what is given makes it the opposite of what it is called.",
    "heat-against-direction": "the sides may be exchanged.",
}
_EFFICIENCIES = (
    "isentropic_efficiency",
    "polytropic_efficiency",
    "isothermal_efficiency",
    "mechanical_efficiency",
    "exergetic_efficiency",
)
#: Heat in parts of the power that a machine taken for adiabatic by custom may have.
_HEAT_BY_CUSTOM = 0.02
#: Share of a static head that the mean density may be off by.
_HEAD_RESOLUTION = 0.01
#: A value this close to its limit, in parts of its own scale, is rounding.
_ROUNDING = 1e-9
#: The same for pressure differences [Pa], far below what any gauge shows.
_ROUNDING_OF_PRESSURE = 1e-3


def doubts(solution: Solution) -> Iterator[Doubt]:
    """Every value of a solved plant that could come out where it cannot be meant."""
    import numpy as np

    absent = np.full(solution.values["surroundings.temperature"].shape, np.nan)

    def samples(path: str) -> Any:
        return solution.values.get(path, absent)

    for state in solution.plant.states:
        path = f"states.{state}.mass_flow"
        if path in solution.values:
            text = f"The flow of stream {state} ⟦comes|may come⟧ out negative: it would run the other way. "
            text += "What is given cannot hold together as drawn."
            measured = _snapped(samples(path), 0.0, _ROUNDING)
            yield Doubt("negative-flow", f"states.{state}", path, text, measured, dimension="mass_flow")
    for piece in solution.pieces.values():
        yield from _of_piece(piece, samples)
    yield from _of_processes(solution, samples)


def _of_processes(solution: Solution, samples: Callable[[str], Any]) -> Iterator[Doubt]:
    """Contents of closed systems that come out as less than nothing, and what the kinds of process tell."""
    pieces = solution.processes.values()
    for state in dict.fromkeys(state for piece in pieces for _, _, state in piece.connections()):
        path = f"states.{state}.mass"
        text = f"The mass of state {state} ⟦comes|may come⟧ out negative: what is given cannot hold together."
        yield Doubt("negative-amount", f"states.{state}", path, text, samples(path), dimension="mass")
    for piece in pieces:
        yield from piece.kind.doubts(piece, samples)


def _of_piece(piece: Piece, samples: Callable[[str], Any]) -> Iterator[Doubt]:
    scale = _energy_scale(piece, samples)
    for parameter in piece.kind.parameters:
        name = parameter.name
        if name not in _SMALLEST or (name == "power" and any(port.many for port in piece.kind.ports)):
            continue  # a control volume may absorb or deliver
        key, smallest, words = _SMALLEST[name]
        head = _static_head(piece, name, samples) if key == "pressure-rises" else None
        if head is not None:
            yield _less_than_head(piece, name, samples(piece.path(name)), head)
            continue
        rounding = {"pressure_difference": _ROUNDING_OF_PRESSURE, "ratio": _ROUNDING}.get(parameter.dimension, scale)
        text = f"{piece.title}: {words}; {_WHY.get(key) or _machine(piece)}"
        measured = _snapped(samples(piece.path(name)), smallest, rounding)
        yield Doubt(key, piece.owner, piece.path(name), text, measured, smallest, dimension=parameter.dimension)
    for name in _EFFICIENCIES:
        yield _efficiency(piece, name, samples, scale)
    if piece.kind.power_sign and _is_adiabatic_by_custom(piece):
        yield _heat_of_machine(piece, samples)
    yield from piece.kind.doubts(piece, samples)


def _static_head(piece: Piece, drop: str, samples: Callable[[str], Any]) -> Any:
    """ρ g (z_2 − z_1) [Pa] with the mean density, shape (N,); None where no elevations are stated."""
    side = drop.removesuffix("pressure_drop")
    ends = [piece.states(f"{side}{port}") for port in ("inlet", "outlet")]
    if not all(ends):
        return None
    inlet, outlet = (f"states.{states[0]}" for states in ends)
    if not {f"{inlet}.elevation", f"{outlet}.elevation"} <= piece.carried:
        return None
    density = 0.5 * (samples(f"{inlet}.density") + samples(f"{outlet}.density"))
    return density * STANDARD_GRAVITY * (samples(f"{outlet}.elevation") - samples(f"{inlet}.elevation"))


def _less_than_head(piece: Piece, name: str, drop: Any, head: Any) -> Doubt:
    """A pressure that falls by less, or rises by more, than the height explains."""
    text = (
        f"{piece.title}: the pressure at the outlet ⟦is|may be⟧ above what the difference of elevation leaves of that "
        "at the inlet; nothing in it does work on the stream. The limit is the static head ρ g Δz, with the "
        "mean density."
    )
    rounding = max(_ROUNDING_OF_PRESSURE, _HEAD_RESOLUTION * abs(float(head[0])))
    measured = _snapped(drop, head, rounding)
    return Doubt("pressure-rises", piece.owner, piece.path(name), text, measured, head, dimension="pressure_difference")


def _is_adiabatic_by_custom(piece: Piece) -> bool:
    """Whether nobody says that heat crosses the boundary, neither its amount nor its temperature."""
    spoken = {piece.path("heat"), piece.path("boundary_temperature")} & piece.given
    custom = any(parameter.name == "heat" and parameter.default for parameter in piece.kind.parameters)
    return custom and not spoken and not piece.count("heat_ports")


def _heat_of_machine(piece: Piece, samples: Callable[[str], Any]) -> Doubt:
    """Heat that the balance leaves to a machine which is adiabatic by custom; a compressor may well be cooled."""
    import numpy as np

    heat, power = samples(piece.path("heat")), samples(piece.path("power"))
    with np.errstate(all="ignore"):
        share = (heat if piece.kind.compresses else np.abs(heat)) / np.abs(power)
    text = (
        f"{piece.title} ⟦exchanges|may exchange⟧ heat that nobody states: what is given determines it more than once, "
        "and the energy balance leaves the rest as heat in the place of an adiabatic machine. State the heat, or its "
        "boundary_temperature, where it is meant; else one of the given values is too many, or wrong. The value is the "
        "heat in parts of the power."
    )
    limit = _HEAT_BY_CUSTOM
    return Doubt("unstated-heat", piece.owner, piece.path("heat"), text, share, limit, "below", "ratio")


def _machine(piece: Piece) -> str:
    does = "raises" if piece.kind.power_sign > 0 else "lowers"
    return f"a {piece.kind.title.lower()} {does} it."


def _efficiency(piece: Piece, name: str, samples: Callable[[str], Any], scale: float) -> Doubt:
    """An efficiency above 1: impossible without heat, and without a meaning where the machine is cooled.

    Exergies are counted without kinetic and potential energy, so that an exergetic efficiency may pass 1 where
    velocities or elevations are stated.
    """
    import numpy as np

    heats = np.array([samples(port.heat)[0] for port in piece.kind.heats(piece)])
    stated = [
        f"states.{state}.{energy}" in piece.given
        for _, _, state in piece.connections()
        for energy in ("velocity", "elevation")
    ]
    words = NAMES[name].text.partition(":")[0].lower()
    text = f"{piece.title}: the {words} ⟦is|may be⟧ above 100 %"
    if name == "exergetic_efficiency" and any(stated):
        key = "efficiency"
        text += "; kinetic and potential energy, which it leaves out, may be the cause, or wrong data."
    elif np.all(np.abs(heats) <= scale):
        key = "efficiency-without-heat"
        text += " although no heat crosses the boundary: what is given cannot be true together."
    else:
        key = "efficiency"
        if name == "exergetic_efficiency":
            text += ": either heat brings exergy that this efficiency leaves out, or the data are wrong."
        else:
            text += ": either the machine is cooled, or heated, and the number says nothing of its losses, or the data "
            text += "are wrong."
    measured = _snapped(samples(piece.path(name)), 1.0, _ROUNDING)
    return Doubt(key, piece.owner, piece.path(name), text, measured, 1.0, "below", "efficiency")


def _snapped(measured: Any, limit: float, rounding: float) -> Any:
    """The samples, with the limit itself where only rounding parts them from it."""
    import numpy as np

    return np.where(np.abs(measured - limit) <= rounding, limit, measured)


def _energy_scale(piece: Piece, samples: Callable[[str], Any]) -> float:
    """What rounding may leave of the energy that flows through a piece, base case [W]."""
    parts = [0.0]
    for _, _, state in piece.connections():
        energy = float(samples(f"states.{state}.mass_flow")[0] * samples(f"states.{state}.specific_enthalpy")[0])
        parts.append(abs(energy) if energy == energy else 0.0)
    return _ROUNDING * max(parts)

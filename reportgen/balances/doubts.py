"""Solutions that satisfy every balance and still cannot be meant: flows that run backwards, pressures that rise."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator

from reportgen.balances.plant import Piece
from reportgen.balances.solution import Solution
from reportgen.errors import Fault

__all__ = ["doubts"]

#: Last part of a path, smallest value that makes sense, and what a smaller one says.
_SMALLEST: dict[str, tuple[float, str]] = {
    "pressure_drop": (0.0, "{title}: the pressure rises from inlet to outlet."),
    "hot_pressure_drop": (0.0, "{title}: the pressure of the hot stream rises from inlet to outlet."),
    "cold_pressure_drop": (0.0, "{title}: the pressure of the cold stream rises from inlet to outlet."),
    "pressure_ratio": (1.0, "{title}: the pressure changes against the natural direction of the machine."),
    "power": (0.0, "{title}: the power runs against the natural direction of the machine."),
    "duty": (0.0, "{title}: heat flows from the cold to the hot stream; the sides may be exchanged."),
    "split_fraction": (0.0, "{title}: the first outlet takes a negative share."),
}
#: A value this far below the smallest one, in parts of its own scale, is more than rounding.
_ROUNDING = 1e-9


def doubts(solution: Solution) -> Iterator[Fault]:
    """Warnings about the base case."""

    def base(path: str) -> float:
        array = solution.values.get(path)
        return math.nan if array is None else float(array[0])

    for state in solution.plant.states:
        path = f"states.{state}.mass_flow"
        if base(path) < -_ROUNDING:
            text = f"The flow of stream {state} comes out negative, {base(path):.6g} kg/s: it would run the other way."
            yield Fault(text, path, hint="What is given cannot hold together as drawn.")
    for piece in solution.pieces.values():
        yield from _of_piece(piece, base)


def _of_piece(piece: Piece, base: Callable[[str], float]) -> Iterator[Fault]:
    for parameter in piece.kind.parameters:
        if parameter.name not in _SMALLEST:
            continue
        smallest, text = _SMALLEST[parameter.name]
        if parameter.name == "power" and any(port.many for port in piece.kind.ports):
            continue  # a control volume may absorb or deliver
        value = base(piece.path(parameter.name))
        if value < smallest - _ROUNDING * max(1.0, abs(value)):
            yield Fault(f"{text.format(title=piece.title)} Found: {value:.6g}.", piece.path(parameter.name))
    for path, text in piece.kind.doubts(piece, base):
        yield Fault(text, path)

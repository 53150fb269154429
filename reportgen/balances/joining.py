"""Pressure where several streams become one: the outlet has the lowest of the inlet pressures less the pressure loss.

An inlet whose pressure nothing else determines enters at the outlet's pressure.
"""

from __future__ import annotations

from typing import Any

from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Default, Formula, Inverse, Term, token

__all__ = ["inlet_pressures", "lowest", "outlet_pressure"]

#: Inlet pressures closer than this part of each other are equal.
_ROUNDING = 1e-9


def lowest(pressures: Any) -> Any:
    """Smallest of several arrays, element by element."""
    import numpy as np

    return np.min(np.broadcast_arrays(*pressures), axis=0)


def _shares(pressures: Any) -> Any:
    """Derivatives of the smallest by each: 1 for one of the smallest, 0 for all others, whatever the others are."""
    import numpy as np

    smallest = np.argmin(np.broadcast_arrays(*pressures), axis=0)
    return [(smallest == number).astype(float) for number in range(len(pressures))]


def outlet_pressure(piece: Piece, pressures: tuple[str, ...]) -> Formula:
    """p_out = min(p_in) − Δp over the inlets whose pressure something else determines."""
    leaving, drop = f"states.{piece.one('outlet')}.pressure", piece.path("pressure_drop")
    listed = r",\,".join(token(path) for path in pressures)
    smallest = rf"\min\left({listed}\right)"
    return Formula(
        piece.path("pressure_drop.relation"),
        piece.owner,
        "Pressure loss",
        f"{piece.title}: the outlet has the lowest of the inlet pressures less the pressure loss.",
        f"definition of the pressure loss of a {piece.kind.title.lower()}",
        leaving,
        (drop, *pressures),
        lambda loss, *entering: lowest(entering) - loss,
        rf"{smallest} - {token(drop)}",
        {
            drop: Inverse(
                lambda left, *entering: lowest(entering) - left,
                rf"{smallest} - {token(leaving)}",
                f"{piece.title}: the pressures give the pressure loss.",
            ),
            **{path: _inlet_pressure(piece, path, pressures) for path in pressures},
        },
        reason="another stream enters at a lower pressure than the outlet has with the loss added",
        slopes=lambda loss, *entering: [-1.0 + 0.0 * loss, *_shares(entering)],
    )


def _inlet_pressure(piece: Piece, path: str, pressures: tuple[str, ...]) -> Inverse:
    """p_i = p_out + Δp, for the inlet with the lowest pressure."""
    leaving, drop = f"states.{piece.one('outlet')}.pressure", piece.path("pressure_drop")
    place = pressures.index(path)

    def evaluate(loss: Any, *entering: Any) -> Any:
        import numpy as np

        found = entering[place] + loss
        others = [pressure for number, pressure in enumerate(entering) if number != place]
        above = np.all([found <= other * (1.0 + _ROUNDING) for other in others], axis=0) if others else True
        return np.where(above, found, np.nan)

    state = path.split(".")[1]
    sentence = f"{piece.title}: stream {state}, of the lowest pressure, enters at that of the outlet and the loss."
    return Inverse(evaluate, rf"{token(leaving)} + {token(drop)}", sentence)


def inlet_pressures(piece: Piece) -> list[Default]:
    """Inlet pressures that nothing else determines are equal to the outlet's with the loss added."""
    leaving, drop = f"states.{piece.one('outlet')}.pressure", piece.path("pressure_drop")
    found = []
    for state in piece.states("inlets"):
        entering = f"states.{state}.pressure"
        key = piece.path(f"inlet_pressure.{state}")
        sentence = f"{piece.title}: stream {state} enters at the pressure of the {piece.kind.title.lower()}."
        terms = (Term(1.0, (entering,)), Term(-1.0, (leaving,)), Term(-1.0, (drop,)))
        equal = Balance(key, piece.owner, "Inlet pressure", sentence, "assumption", terms)

        def without(relation: Any, left_out: str = entering) -> Formula:
            others = tuple(path for path in relation.inputs if path not in (left_out, drop))
            return outlet_pressure(piece, others or (left_out,))

        rewrites = {piece.path("pressure_drop.relation"): without}
        found.append(Default(key, piece.owner, sentence, (entering,), equal, rewrites, rank=2, only_for=entering))
    return found

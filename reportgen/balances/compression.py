r"""Figures of a compression in several stages: overall pressure ratio and overall isothermal efficiency.

The compressors of a group are stages of one compression where the stream goes undivided from one to the next, through
coolers, pipes and separators with a single outlet; neither a turbine nor a valve lies between.

    r_p = p_last/p_first ,   η_T = ṁ w_T/Σ Ẇ ,   w_T = g(p_last, T_first) − g_first
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from reportgen.balances.book import Book
from reportgen.balances.isothermal import isothermal_work
from reportgen.balances.merit import ratio_of
from reportgen.balances.plant import Piece, balance_groups
from reportgen.balances.relations import Formula, token

__all__ = ["COMPRESSION_REPORTS", "add_compression", "stages"]

COMPRESSION_REPORTS = ("pressure_ratio", "isothermal_work", "isothermal_efficiency")


def stages(pieces: Sequence[Piece]) -> list[Piece]:
    """The compressors of a group in the order of the stream; empty where they are not two or more in a row."""
    compressors = [piece for piece in pieces if piece.kind.compresses]
    if len(compressors) < 2:
        return []
    begins = {piece.one("inlet"): piece for piece in compressors}
    onward: dict[str, str] = {}
    for piece in pieces:
        if piece.kind.compresses or piece.kind.power_sign < 0 or piece.kind.lifts < 0:
            continue
        for inlets, outlets in balance_groups(piece):
            if len(inlets) == len(outlets) == 1:
                onward[inlets[0]] = outlets[0]
    following: dict[str, Piece] = {}
    for piece in compressors:
        state: str | None = piece.one("outlet")
        passed: set[str] = set()
        while state is not None and state not in begins and state not in passed:
            passed.add(state)
            state = onward.get(state)
        if state in begins and begins[state] is not piece:
            following[piece.tag] = begins[state]
    first = [piece for piece in compressors if piece not in following.values()]
    if len(first) != 1:
        return []
    found = first
    while found[-1].tag in following:
        found.append(following[found[-1].tag])
    return found if len(found) == len(compressors) else []


def add_compression(book: Book, owner: str, title: str, pieces: Sequence[Piece]) -> None:
    """Enter the overall figures of a compression in stages; nothing where the group has none."""
    found = stages(pieces)
    if not found:
        return
    inlet, outlet = found[0].one("inlet"), found[-1].one("outlet")
    first, last = f"states.{inlet}.pressure", f"states.{outlet}.pressure"
    tags = ", ".join(piece.tag for piece in found)
    path = f"{owner}.pressure_ratio"
    book.formula(
        Formula(
            path,
            owner,
            "Overall pressure ratio",
            f"{title}: last over first pressure of the stages {tags}.",
            "definition of the pressure ratio",
            path,
            (first, last),
            lambda low, high: ratio_of(high, low),
            rf"\frac{{{token(last)}}}{{{token(first)}}}",
        )
    )
    work = isothermal_work(owner, title, found[0].fluid(inlet), found[0].fluid_id(inlet), inlet, outlet)
    book.formula(work)
    flow, powers = f"states.{inlet}.mass_flow", [piece.kind.work(piece) for piece in found]
    path = f"{owner}.isothermal_efficiency"

    def evaluate(mass: Any, specific: Any, *each: Any) -> Any:
        return ratio_of(mass * specific, sum(each))

    book.formula(
        Formula(
            path,
            owner,
            "Overall isothermal efficiency",
            f"{title}: reversible work at the first inlet temperature in parts of the power of all stages.",
            "definition of isothermal efficiency, over all stages",
            path,
            (flow, work.output, *powers),
            evaluate,
            rf"\frac{{{token(flow)}\,{token(work.output)}}}{{{' + '.join(token(power) for power in powers)}}}",
            reason="the stages absorb no power, or the isothermal work has no value",
        )
    )

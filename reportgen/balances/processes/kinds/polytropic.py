r"""Polytropic change: slow, with p v^n constant along the way.

    p_b v_b^n = p_a v_a^n ,   W = m ∫ p dv = m (p_b v_b − p_a v_a)/(1 − n) ,   for n = 1 m p_a v_a ln(v_b/v_a)

Both are exact for every fluid: along the path p is a function of v alone, and the fluid enters by its end states.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from reportgen.balances.kinds import Parameter
from reportgen.balances.plant import Piece
from reportgen.balances.processes.equations import (
    HEAT,
    QUASI_STATIC,
    WORK,
    change_stretches,
    compressible_only,
    energy_balance,
    kept_mass,
    one_state,
    process_kind,
)
from reportgen.balances.relations import Formula, Inverse, Relation, token

#: Exponents closer to 1 than this are written with the logarithm, which the other form then rounds away.
_NEAR_ONE = 1e-6


def law(piece: Piece) -> Formula:
    """p_b = p_a (v_a/v_b)^n, and each of the others from it."""
    before, after = one_state(piece)
    index = piece.path("polytropic_index")
    first, small, large = (
        f"states.{before}.pressure",
        f"states.{before}.specific_volume",
        f"states.{after}.specific_volume",
    )
    last = f"states.{after}.pressure"
    n, p1, v1, p2, v2 = (token(path) for path in (index, first, small, last, large))

    def exponent(p_b: Any, p_a: Any, v_a: Any, v_b: Any) -> Any:
        import numpy as np

        with np.errstate(divide="ignore", invalid="ignore"):
            return np.log(p_b / p_a) / np.log(v_a / v_b)

    def gives(what: str, state: str) -> str:
        return f"{piece.title}: the exponent gives the {what} of state {state}."

    inverses = {
        index: Inverse(
            exponent,
            rf"\frac{{\ln\frac{{{p2}}}{{{p1}}}}}{{\ln\frac{{{v1}}}{{{v2}}}}}",
            f"{piece.title}: the two states give the exponent.",
        ),
        first: Inverse(
            lambda n, p_b, v_a, v_b: p_b * (v_b / v_a) ** n,
            rf"{p2}\left(\frac{{{v2}}}{{{v1}}}\right)^{{{n}}}",
            gives("pressure", before),
        ),
        small: Inverse(
            lambda n, p_a, p_b, v_b: v_b * (p_b / p_a) ** (1.0 / n),
            rf"{v2}\left(\frac{{{p2}}}{{{p1}}}\right)^{{1/{n}}}",
            gives("specific volume", before),
        ),
        large: Inverse(
            lambda n, p_a, v_a, p_b: v_a * (p_a / p_b) ** (1.0 / n),
            rf"{v1}\left(\frac{{{p1}}}{{{p2}}}\right)^{{1/{n}}}",
            gives("specific volume", after),
        ),
    }
    return Formula(
        piece.path("polytropic_index.definition"),
        piece.owner,
        "Polytropic law",
        gives("pressure", after),
        "definition of the polytropic change, p vⁿ constant",
        last,
        (index, first, small, large),
        lambda n, p_a, v_a, v_b: p_a * (v_a / v_b) ** n,
        rf"{p1}\left(\frac{{{v1}}}{{{v2}}}\right)^{{{n}}}",
        inverses,
        reason="the two states have the same volume, or a pressure or volume that is not positive",
    )


def boundary_work(piece: Piece) -> Formula:
    """W = m ∫ p dv along p v^n, in closed form that holds for n = 1 as well."""
    before, after = one_state(piece)
    mass, index = f"states.{before}.mass", piece.path("polytropic_index")
    inputs = (
        mass,
        index,
        *(f"states.{state}.{name}" for name in ("pressure", "specific_volume") for state in (before, after)),
    )
    m, n, p1, p2, v1, v2 = (token(path) for path in inputs)

    def work(amount: Any, exponent: Any, first: Any, last: Any, small: Any, large: Any) -> Any:
        # (p_b v_b − p_a v_a)/(1 − n) as p_a v_a ln(v_b/v_a) (e^x − 1)/x, x = (1 − n) ln(v_b/v_a): regular at n = 1.
        import numpy as np

        ratio = np.log(large / small)
        x = (1.0 - exponent) * ratio
        safe = np.where(x == 0.0, 1.0, x)
        return amount * first * small * ratio * np.where(x == 0.0, 1.0, np.expm1(safe) / safe)

    def written(values: Mapping[str, Any]) -> str:
        if abs(float(values[index][0]) - 1.0) < _NEAR_ONE:
            return rf"{m}\,{p1}\,{v1}\ln\frac{{{v2}}}{{{v1}}}"
        return latex

    latex = rf"{m}\,\frac{{{p2}\,{v2} - {p1}\,{v1}}}{{1 - {n}}}"
    return Formula(
        piece.path("work.definition"),
        piece.owner,
        "Work of the moving boundary",
        f"{piece.title}: the work is the integral of p dV along p vⁿ = constant.",
        "W = ∫ p dV, closed form",
        piece.path("work"),
        inputs,
        work,
        latex,
        reason="a pressure or a volume is not positive",
        written=written,
    )


def relations(piece: Piece) -> list[Relation]:
    """Mass, the law of the path, work, energy."""
    before, after = one_state(piece)
    return [
        kept_mass(piece, before, after),
        law(piece),
        boundary_work(piece),
        energy_balance(piece, (before,), (after,)),
    ]


KIND = process_kind(
    "polytropic",
    "Polytropic change",
    "The system changes slowly with p vⁿ constant.",
    relations=relations,
    parameters=(
        Parameter("polytropic_index", "ratio", "Exponent n of p vⁿ = constant."),
        HEAT,
        WORK,
    ),
    stretches=lambda piece: change_stretches(piece, "polytrope"),
    checks=compressible_only,
    path_taken=QUASI_STATIC,
)

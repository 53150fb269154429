"""Figures of merit that several kinds share: exergetic efficiency and entropy generation number."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from reportgen.balances.plant import Piece
from reportgen.balances.relations import Formula, token

__all__ = ["entropy_number_by_power", "exergy_ratio", "ratio_of"]


def ratio_of(numerator: Any, denominator: Any) -> Any:
    """Numerator over denominator; NaN where the denominator is not positive."""
    import numpy as np

    numerator, denominator = np.broadcast_arrays(np.asarray(numerator, float), np.asarray(denominator, float))
    result = np.full(numerator.shape, np.nan)
    np.divide(numerator, denominator, out=result, where=denominator > 0.0)
    return result


def exergy_ratio(
    piece: Piece,
    sentence: str,
    inputs: Sequence[str],
    gained: Any,
    spent: Any,
    latex: str,
    reason: str = "no exergy is spent, so that the ratio has no meaning",
) -> Formula:
    """Exergetic efficiency as ``gained(*inputs) / spent(*inputs)``, NaN where nothing is spent."""
    return Formula(
        piece.path("exergetic_efficiency"),
        piece.owner,
        "Exergetic efficiency",
        f"{piece.title}: {sentence}",
        "definition for this kind of equipment",
        piece.path("exergetic_efficiency"),
        tuple(inputs),
        lambda *arrays: ratio_of(gained(*arrays), spent(*arrays)),
        latex,
        reason=reason,
    )


def entropy_number_by_power(piece: Piece, reference: str, name: str) -> Formula:
    """N_s = T0 Ṡgen / |reference|, the lost work in parts of a power or a heat flow."""
    lost = piece.path("lost_work")
    return Formula(
        piece.path("entropy_generation_number"),
        piece.owner,
        "Entropy generation number",
        f"{piece.title}: the entropy generation number is the lost work in parts of the {name}.",
        "definition for this kind of equipment",
        piece.path("entropy_generation_number"),
        (lost, reference),
        lambda work, scale: ratio_of(work, abs(scale)),
        rf"\frac{{{token(lost)}}}{{\left|{token(reference)}\right|}}",
        reason=f"the {name} is zero or unknown",
    )


def entropy_number_by_flow(piece: Piece, state: str) -> Formula:
    """N_s = Ṡgen / (ṁ R), with the specific gas constant R of the fluid."""
    flow, generated = f"states.{state}.mass_flow", piece.path("entropy_generation")
    constant = float(piece.fluid(state).gas_constant)
    return Formula(
        piece.path("entropy_generation_number"),
        piece.owner,
        "Entropy generation number",
        f"{piece.title}: the entropy generation number is the entropy generated in parts of flow times gas constant, "
        f"R = {constant:.6g} J/(kg K).",
        "definition for this kind of equipment",
        piece.path("entropy_generation_number"),
        (generated, flow),
        lambda generation, mass: ratio_of(generation, mass * constant),
        rf"\frac{{{token(generated)}}}{{{token(flow)}\,R}}",
        fluids=(piece.fluid_id(state),),
        reason="there is no flow",
    )

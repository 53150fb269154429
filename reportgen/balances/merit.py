"""Figures of merit that several kinds share: exergetic efficiency and entropy generation number."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from reportgen.balances.composition import is_made
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Formula, token

__all__ = [
    "divided_exergy_ratio",
    "entropy_number_by_flow",
    "entropy_number_by_power",
    "exergy_ratio",
    "kinetic_exergy_ratio",
    "mach_number",
    "ratio_of",
]


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
    if is_made(piece.fluid(state)):
        return _entropy_number_by_volume(piece, state)
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


def _entropy_number_by_volume(piece: Piece, state: str) -> Formula:
    """N_s = Ṡgen T/(ṁ p v), with p v/T for R of a gas whose composition follows from flows."""
    names = ("mass_flow", "pressure", "specific_volume", "temperature")
    flow, pressure, volume, temperature = (f"states.{state}.{name}" for name in names)
    generated = piece.path("entropy_generation")
    return Formula(
        piece.path("entropy_generation_number"),
        piece.owner,
        "Entropy generation number",
        f"{piece.title}: the entropy generation number is the entropy generated in parts of flow times gas constant, "
        f"which is p v/T of state {state}.",
        "definition for this kind of equipment",
        piece.path("entropy_generation_number"),
        (generated, flow, pressure, volume, temperature),
        lambda generation, mass, p, v, t: ratio_of(generation * t, mass * p * v),
        rf"\frac{{{token(generated)}\,{token(temperature)}}}{{{token(flow)}\,{token(pressure)}\,{token(volume)}}}",
        reason="there is no flow",
    )


def divided_exergy_ratio(piece: Piece, inlet: str, outlets: Sequence[str]) -> Formula:
    """ε = Σout ṁ e / (ṁ e) of one stream that leaves as several."""
    paths = []
    for state in (inlet, *outlets):
        paths += [f"states.{state}.mass_flow", f"states.{state}.specific_exergy"]
    products = [rf"{token(paths[i])}\,{token(paths[i + 1])}" for i in range(0, len(paths), 2)]
    return exergy_ratio(
        piece,
        "exergy of the streams that leave over exergy of the stream that enters.",
        paths,
        lambda *arrays: sum(arrays[i] * arrays[i + 1] for i in range(2, len(arrays), 2)),
        lambda *arrays: arrays[0] * arrays[1],
        rf"\frac{{{' + '.join(products[1:])}}}{{{products[0]}}}",
    )


def kinetic_exergy_ratio(piece: Piece) -> Formula:
    """ε = (e_2 + V_2²/2)/(e_1 + V_1²/2) of one stream; a velocity that is neglected is left out."""
    paths, latex, velocities = [], [], []
    for port in ("outlet", "inlet"):
        exergy, velocity = (f"states.{piece.one(port)}.{name}" for name in ("specific_exergy", "velocity"))
        paths.append(exergy)
        moving = velocity in piece.carried
        velocities.append(moving)
        kinetic = rf" + \tfrac{{1}}{{2}}\left({token(velocity)}\right)^{{2}}" if moving else ""
        latex.append(token(exergy) + kinetic)
        paths += [velocity] if moving else []

    def part(number: int, arrays: Sequence[Any]) -> Any:
        first = 0 if number == 0 else 1 + velocities[0]
        return arrays[first] + (0.5 * arrays[first + 1] ** 2 if velocities[number] else 0.0)

    return exergy_ratio(
        piece,
        "exergy and kinetic energy of the stream that leaves over those of the stream that enters.",
        paths,
        lambda *arrays: part(0, arrays),
        lambda *arrays: part(1, arrays),
        rf"\frac{{{latex[0]}}}{{{latex[1]}}}",
    )


def mach_number(piece: Piece, state: str) -> Formula:
    """Ma = V/w of one stream."""
    velocity, sound = f"states.{state}.velocity", f"states.{state}.speed_of_sound"
    return Formula(
        piece.path("mach_number"),
        piece.owner,
        "Mach number",
        f"{piece.title}: velocity of stream {state} in parts of the speed of sound there.",
        "definition of the Mach number",
        piece.path("mach_number"),
        (velocity, sound),
        lambda speed, wave: ratio_of(speed, wave),
        rf"\frac{{{token(velocity)}}}{{{token(sound)}}}",
        reason="a two-phase state has no speed of sound that could be stated",
    )

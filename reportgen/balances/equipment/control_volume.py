"""Control volume: any streams in and out, power delivered, heat over one or several boundaries.

    0 = Σ Q̇_j − Ẇ + Σin ṁ H − Σout ṁ H ,   with one mass balance for each fluid

``heat_ports`` lists the boundaries when there are several, each with ``heat`` and ``temperature``; ``heat`` is then
their sum. Without it ``heat`` and ``boundary_temperature`` describe the one boundary. Power is positive when delivered.

Exergetic efficiency: exergy that leaves with streams, heat and power over exergy that enters with them; a stated
velocity counts with its kinetic energy.
"""

from __future__ import annotations

from typing import Any

from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    HEAT_PORTS,
    energy_balance,
    heat_ports,
    heat_sum,
    mass_balances,
)
from reportgen.balances.kinds import Kind, Parameter, Port
from reportgen.balances.merit import exergy_ratio
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Default, Formula, Relation, Stretch, token, zero


def relations(piece: Piece) -> list[Relation]:
    """Mass, energy, and the sum of the heats."""
    return [*mass_balances(piece), *heat_sum(piece), energy_balance(piece, piece.path("power"), -1)]


def defaults(piece: Piece) -> list[Default]:
    """No power."""
    power = piece.path("power")
    text = f"{piece.title} exchanges no work with its surroundings."
    sentence = f"{piece.title} exchanges no work."
    relation = zero(power, piece.path("power.assumed"), piece.owner, "No work", sentence)
    return [Default(f"{piece.owner}.no_work", piece.owner, text, (power,), relation)]


def results(piece: Piece) -> list[Formula]:
    """Exergy that leaves over exergy that enters."""
    sides = {side: [f"states.{state}." for state in piece.streams(side)] for side in ("in", "out")}
    ports = heat_ports(piece)
    power, ambient = piece.path("power"), "surroundings.temperature"
    streams = [*sides["in"], *sides["out"]]
    speeds = [prefix + "velocity" for prefix in streams if prefix + "velocity" in piece.carried]
    inputs = [prefix + name for prefix in streams for name in ("mass_flow", "specific_exergy")]
    inputs += [*speeds, *(path for port in ports for path in (port.heat, port.entropy)), power, ambient]

    def side(number: int, arrays: tuple[Any, ...]) -> Any:
        import numpy as np

        value = dict(zip(inputs, arrays, strict=True))
        sign = 1.0 if number else -1.0
        found = np.maximum(-sign * value[power], 0.0)
        for prefix in sides["in" if number else "out"]:
            moving = value.get(prefix + "velocity", 0.0)
            found = found + value[prefix + "mass_flow"] * (value[prefix + "specific_exergy"] + 0.5 * moving**2)
        for port in ports:
            found = found + np.maximum(sign * (value[port.heat] - value[ambient] * value[port.entropy]), 0.0)
        return found

    def product(prefix: str) -> str:
        flow, exergy, speed = (prefix + name for name in ("mass_flow", "specific_exergy", "velocity"))
        if speed not in speeds:
            return rf"{token(flow)}\,{token(exergy)}"
        return rf"{token(flow)}\left({token(exergy)} + \tfrac{{1}}{{2}}\left({token(speed)}\right)^{{2}}\right)"

    of_heat = [rf"\left({token(port.heat)} - {token(ambient)}\,{token(port.entropy)}\right)" for port in ports]
    leave = " + ".join([*map(product, sides["out"]), *(rf"{part}^-" for part in of_heat), rf"{token(power)}^+"])
    enter = " + ".join([*map(product, sides["in"]), *(rf"{part}^+" for part in of_heat), rf"{token(power)}^-"])
    return [
        exergy_ratio(
            piece,
            "exergy that leaves over exergy that enters, with streams, heat and power "
            "(⁺ and ⁻: the size of what is positive or negative, else nothing).",
            inputs,
            lambda *arrays: side(0, arrays),
            lambda *arrays: side(1, arrays),
            rf"\frac{{{leave}}}{{{enter}}}",
        )
    ]


def stretches(piece: Piece) -> list[Stretch]:
    """The stream, when exactly one enters and leaves; what happens inside is not known otherwise."""
    inlets, outlets = piece.streams("in"), piece.streams("out")
    if len(inlets) == len(outlets) == 1:
        return [Stretch("stream", inlets[0], outlets[0], "enthalpy", mixing=True)]
    return []


KIND = Kind(
    name="control-volume",
    title="Control volume",
    text="Any streams in and out, power delivered, heat over one or several boundaries.",
    ports=(
        Port("inlets", "in", many=True, optional=True, text="States of the streams that enter."),
        Port("outlets", "out", many=True, optional=True, text="States of the streams that leave."),
    ),
    parameters=(
        Parameter("power", "power", "Power delivered.", "0 when nothing else determines it"),
        Parameter("heat", "heat_flow", "Heat flow into the volume, over all boundaries."),
        BOUNDARY_TEMPERATURE,
    ),
    relations=relations,
    defaults=defaults,
    results=results,
    heats=heat_ports,
    stretches=stretches,
    groups=(HEAT_PORTS,),
    serves=True,
    power_sign=-1,
    exergetic_efficiency="Exergy that leaves with streams, heat and power over exergy that enters with them.",
)

"""Control volume: any streams in and out, power delivered, heat over one or several boundaries.

    0 = Σ Q̇_j − Ẇ + Σin ṁ H − Σout ṁ H ,   with one mass balance for each fluid

``heat_ports`` lists the boundaries when there are several, each with ``heat`` and ``temperature``; ``heat`` is then
their sum. Without it ``heat`` and ``boundary_temperature`` describe the one boundary. Power is positive when delivered.

Exergetic efficiency: exergy that leaves with streams, heat and power over exergy that enters with them.
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
    flows = []
    for state in (*piece.streams("in"), *piece.streams("out")):
        flows += [f"states.{state}.mass_flow", f"states.{state}.specific_exergy"]
    heat_paths = []
    for port in heat_ports(piece):
        heat_paths += [port.heat, port.entropy]
    inputs = (*flows, *heat_paths, piece.path("power"), "surroundings.temperature")
    entering = 2 * len(piece.streams("in"))

    def parts(*arrays: Any) -> tuple[Any, Any]:
        import numpy as np

        power, ambient = arrays[-2], arrays[-1]
        gained = np.maximum(power, 0.0) + sum(arrays[i] * arrays[i + 1] for i in range(entering, len(flows), 2))
        spent = np.maximum(-power, 0.0) + sum(arrays[i] * arrays[i + 1] for i in range(0, entering, 2))
        for i in range(len(flows), len(arrays) - 2, 2):
            exergy = arrays[i] - ambient * arrays[i + 1]
            gained, spent = gained + np.maximum(-exergy, 0.0), spent + np.maximum(exergy, 0.0)
        return gained, spent

    products = [rf"{token(flows[i])}\,{token(flows[i + 1])}" for i in range(0, len(flows), 2)]
    ambient, power = token("surroundings.temperature"), token(piece.path("power"))
    of_heat = [
        rf"\left({token(heat_paths[i])} - {ambient}\,{token(heat_paths[i + 1])}\right)"
        for i in range(0, len(heat_paths), 2)
    ]
    leave = " + ".join([*products[entering // 2 :], *(rf"{part}^-" for part in of_heat), rf"{power}^+"])
    enter = " + ".join([*products[: entering // 2], *(rf"{part}^+" for part in of_heat), rf"{power}^-"])
    return [
        exergy_ratio(
            piece,
            "exergy that leaves over exergy that enters, with streams, heat and power "
            "(⁺ and ⁻: the size of what is positive or negative, else nothing).",
            inputs,
            lambda *arrays: parts(*arrays)[0],
            lambda *arrays: parts(*arrays)[1],
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

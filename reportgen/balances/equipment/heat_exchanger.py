"""Heat exchanger: a hot stream gives its duty to a cold one across a wall.

    D = ṁ_h (H_h,in − H_h,out) ,    ṁ_c (H_c,out − H_c,in) = D + Q̇

``duty`` D is what the hot stream gives up; ``heat`` Q̇ is what enters from outside (negative for a loss), counted on the
cold side. Each relation can be solved for duty, either enthalpy or the flow. The pressure loss of a side is taken as
zero when nothing else determines it, the loss of heat too.

The temperatures along the exchanger, the pinch, the effectiveness and the two parts of the entropy generation are in
:mod:`reportgen.balances.profiles`; ``arrangement`` says whether the streams pass each other in counterflow.

Exergetic efficiency: exergy gained by the cold stream over exergy given up by the hot one; below the surroundings'
temperature the streams change parts, so the stream that gains is the one above the line.
Entropy generation number: lost work over duty.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from reportgen.balances.doubts import Doubt
from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    HEAT_BY_CUSTOM,
    HEAT_PORTS,
    adiabatic,
    heat_ports,
    heat_sum,
    mass_balances,
    no_pressure_drop,
    over_boundaries,
    pressure_drop,
    through,
)
from reportgen.balances.exchanging import COUNTERFLOW, EXCHANGE_REPORTS, PARALLEL, Exchanging
from reportgen.balances.kinds import Choice, Kind, Parameter, Port
from reportgen.balances.merit import entropy_number_by_power, exergy_ratio
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Default, Exchange, Formula, Relation, Stretch, Term, token

SIDES = ("hot", "cold")
_ROUNDING_OF_TEMPERATURE = 1e-6  # K
_ENDS = ("At the cold end", "At the hot end")
_FROM = {_ENDS: "cold end", ("At the inlets", "At the outlets"): "inlets"}


def _side(piece: Piece, side: str) -> tuple[str, str]:
    return piece.one(f"{side}_inlet"), piece.one(f"{side}_outlet")


def relations(piece: Piece) -> list[Relation]:
    """Mass, pressure loss and energy of each side."""
    found = mass_balances(piece)
    duty = piece.path("duty")
    for side in SIDES:
        inlet, outlet = piece.one(f"{side}_inlet"), piece.one(f"{side}_outlet")
        found.append(pressure_drop(piece, inlet, outlet, f"{side}_pressure_drop"))
        terms = through(piece, inlet, outlet)
        if side == "hot":
            terms.append(Term(-1.0, (duty,)))
            words = "what the hot stream gives up is the duty."
        else:
            terms += [Term(1.0, (duty,)), *over_boundaries(piece)]
            words = "the cold stream takes up the duty and the heat that enters from outside."
        sentences = {
            duty: f"{piece.title}: the {side} stream gives the duty.",
            **dict.fromkeys(
                (term.factors[0] for term in over_boundaries(piece)),
                f"{piece.title}: what the two streams do not exchange comes from outside.",
            ),
            f"states.{inlet}.mass_flow": f"{piece.title}: the duty gives the flow of the {side} stream.",
            f"states.{inlet}.specific_enthalpy": f"{piece.title}: the duty gives the enthalpy of state {inlet}.",
            f"states.{outlet}.specific_enthalpy": f"{piece.title}: the duty gives the enthalpy of state {outlet}.",
        }
        found.append(
            Balance(
                piece.path(f"energy_balance.{side}"),
                piece.owner,
                f"Energy balance, {side} side",
                f"{piece.title}: {words}",
                "first law, steady flow",
                tuple(terms),
                {},
                sentences,
            )
        )
    return [*found, *heat_sum(piece)]


def defaults(piece: Piece) -> list[Default]:
    """No heat from outside, no pressure loss on either side."""
    drops = [no_pressure_drop(piece, f"{side}_pressure_drop", f" on the {side} side") for side in SIDES]
    return [*adiabatic(piece), *drops]


def results(piece: Piece) -> list[Formula]:
    """Exergy gained over exergy spent by the two streams; lost work over duty."""
    paths = []
    for side in SIDES:
        inlet, outlet = piece.one(f"{side}_inlet"), piece.one(f"{side}_outlet")
        paths += [
            f"states.{inlet}.mass_flow",
            f"states.{inlet}.specific_exergy",
            f"states.{outlet}.specific_exergy",
        ]

    def changes(*arrays: Any) -> tuple[Any, Any]:
        import numpy as np

        hot, cold = arrays[0] * (arrays[2] - arrays[1]), arrays[3] * (arrays[5] - arrays[4])
        return np.maximum(hot, 0.0) + np.maximum(cold, 0.0), np.maximum(-hot, 0.0) + np.maximum(-cold, 0.0)

    mh, eh1, eh2, mc, ec1, ec2 = (token(path) for path in paths)
    hot = rf"\left[{mh}\left({eh2} - {eh1}\right)\right]"
    cold = rf"\left[{mc}\left({ec2} - {ec1}\right)\right]"
    efficiency = exergy_ratio(
        piece,
        "exergy gained by one stream over exergy given up by the other "
        "(⁺ and ⁻: the size of what is positive or negative, else nothing).",
        paths,
        lambda *arrays: changes(*arrays)[0],
        lambda *arrays: changes(*arrays)[1],
        rf"\frac{{{cold}^+ + {hot}^+}}{{{cold}^- + {hot}^-}}",
    )
    number = entropy_number_by_power(piece, piece.path("duty"), "duty")
    return [efficiency, number, *Exchanging(piece).results()]


def stretches(piece: Piece) -> list[Stretch]:
    """Both streams."""
    return [
        Stretch(f"{side} stream", piece.one(f"{side}_inlet"), piece.one(f"{side}_outlet"), "enthalpy") for side in SIDES
    ]


def doubts(piece: Piece, samples: Callable[[str], Any]) -> list[Doubt]:
    """Temperatures that cross, at an end or inside."""
    import numpy as np

    pinch, place = samples(piece.path("pinch")), float(samples(piece.path("pinch_place"))[0])
    if not np.isfinite(place):
        return []
    ends = ("At the inlets", "At the outlets") if piece.choice("arrangement") == PARALLEL else _ENDS
    where = ends[int(place)] if place in (0.0, 1.0) else f"At {100.0 * place:.0f} % of the duty from the {_FROM[ends]}"
    text = (
        f"{piece.title}: the temperatures ⟦cross|may cross⟧. {where} the hot stream ⟦would|may⟧ be colder than the "
        "cold one; heat cannot flow there as stated. The value is the difference of the two temperatures."
    )
    measured = np.where(np.abs(pinch) <= _ROUNDING_OF_TEMPERATURE, 0.0, pinch)
    return [
        Doubt("temperature-cross", piece.owner, piece.path("duty"), text, measured, dimension="temperature_difference")
    ]


KIND = Kind(
    name="heat-exchanger",
    title="Heat exchanger",
    text="A hot stream gives heat to a cold one across a wall.",
    ports=tuple(
        port
        for side in SIDES
        for port in (
            Port(f"{side}_inlet", "in", text=f"State of the {side} stream where it enters.", side=side),
            Port(f"{side}_outlet", "out", text=f"State of the {side} stream where it leaves.", side=side),
        )
    ),
    parameters=(
        Parameter("duty", "heat_flow", "Heat flow given up by the hot stream."),
        HEAT_BY_CUSTOM,
        BOUNDARY_TEMPERATURE,
        *(
            Parameter(
                f"{side}_pressure_drop",
                "pressure_difference",
                f"Pressure loss of the {side} stream.",
                "0 when nothing else determines it",
            )
            for side in SIDES
        ),
    ),
    profile=lambda piece, values: Exchanging(piece).profile(values),
    choices=(
        Choice(
            "arrangement",
            (COUNTERFLOW, PARALLEL),
            "How the streams pass each other, for the temperatures along the exchanger.",
        ),
    ),
    reports=EXCHANGE_REPORTS,
    relations=relations,
    defaults=defaults,
    results=results,
    heats=lambda piece: heat_ports(piece, into=_side(piece, "cold")),
    exchanges=lambda piece: [Exchange(piece.path("duty"), _side(piece, "hot"), _side(piece, "cold"))],
    groups=(HEAT_PORTS,),
    stretches=stretches,
    doubts=doubts,
    exergetic_efficiency="Exergy gained by one stream over exergy given up by the other.",
    entropy_generation_number="Lost work over duty.",
)

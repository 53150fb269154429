r"""Separator: a two-phase stream leaves as its vapour and its liquid; adiabatic unless the balance says otherwise.

    x_vapour = 1 ,   x_liquid = 0 ,   p_vapour = p_liquid = p_in − Δp

A quality given for an outlet (liquid carried over, vapour drawn under) takes the place of 1 or 0. A stream that enters
in one phase would make one of the two flows negative, which a caution tells. Pure substances only: the phases of a
mixture have compositions of their own, which no outlet could have, and are refused.

Exergetic efficiency: exergy that leaves over exergy that enters. Entropy generation number: Ṡgen/(ṁ_in R).
"""

from __future__ import annotations

from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    HEAT_BY_CUSTOM,
    HEAT_PORTS,
    INLET,
    PRESSURE_DROP,
    adiabatic,
    energy_balance,
    heat_ports,
    heat_sum,
    mass_balances,
    no_pressure_drop,
    pressure_drop,
)
from reportgen.balances.kinds import Kind, Port
from reportgen.balances.merit import divided_exergy_ratio, entropy_number_by_flow
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Default, Formula, Relation, Stretch, Term
from reportgen.errors import Fault

_OUTLETS = (("vapour_outlet", 1.0, "as saturated vapour"), ("liquid_outlet", 0.0, "as saturated liquid"))


def relations(piece: Piece) -> list[Relation]:
    """Mass, energy, pressure loss, and the quality of both outlets."""
    return [
        *mass_balances(piece),
        pressure_drop(piece, piece.one("inlet"), piece.one("vapour_outlet")),
        *(_quality(piece, *outlet) for outlet in _OUTLETS if _path(piece, outlet[0], "quality") not in piece.given),
        energy_balance(piece),
        *heat_sum(piece),
    ]


def _path(piece: Piece, port: str, name: str) -> str:
    return f"states.{piece.one(port)}.{name}"


def _quality(piece: Piece, port: str, quality: float, words: str) -> Balance:
    state, path = piece.one(port), _path(piece, port, "quality")
    terms = (Term(1.0, (path,)), *((Term(-quality, ()),) if quality else ()))
    return Balance(
        piece.path(f"quality.{port}"),
        piece.owner,
        "Separated phases",
        f"{piece.title}: stream {state} leaves {words}.",
        "the phases are in equilibrium and wholly apart",
        terms,
    )


def defaults(piece: Piece) -> list[Default]:
    """No heat, no pressure loss, both outlets at one pressure."""
    vapour, liquid = (_path(piece, port, "pressure") for port, _, _ in _OUTLETS)
    text = f"{piece.title}: vapour and liquid leave at one pressure."
    equal = Balance(
        piece.path("same_pressure"),
        piece.owner,
        "Outlet pressures",
        text,
        "assumption",
        (Term(1.0, (liquid,)), Term(-1.0, (vapour,))),
    )
    same = Default(f"{piece.owner}.same_pressure", piece.owner, text, (liquid,), equal, rank=1)
    return [*adiabatic(piece), same, no_pressure_drop(piece)]


def results(piece: Piece) -> list[Formula]:
    """Exergy kept, and entropy generation in parts of ṁ R."""
    inlet = piece.one("inlet")
    return [divided_exergy_ratio(piece, inlet, piece.streams("out")), entropy_number_by_flow(piece, inlet)]


def stretches(piece: Piece) -> list[Stretch]:
    """Each outlet joined to the inlet."""
    inlet = piece.one("inlet")
    return [Stretch(f"stream {state}", inlet, state, "enthalpy", mixing=True) for state in piece.streams("out")]


def checks(piece: Piece) -> list[Fault]:
    """A fluid whose saturated vapour and liquid are not of one composition."""
    inlet = piece.one("inlet")
    fluid = piece.fluid(inlet)
    if not getattr(fluid, "pseudo_pure", False) and len(fluid.composition or ()) < 2:
        return []
    return [
        Fault(
            f"{piece.title} parts a mixture. Its vapour and its liquid have compositions of their own, but both "
            f"outlets would be states of the whole composition of fluid {piece.fluid_id(inlet)}.",
            f"states.{inlet}.fluid",
            found=fluid.title,
            expected="a pure substance",
            hint="Work out the split apart from this calculation, and begin it behind the separator with vapour and "
            "liquid as two fluids, each with its own composition.",
        )
    ]


KIND = Kind(
    name="separator",
    title="Separator",
    text="A two-phase stream leaves as its vapour and its liquid.",
    ports=(
        INLET,
        Port("vapour_outlet", "out", text="State of the vapour that leaves."),
        Port("liquid_outlet", "out", text="State of the liquid that leaves."),
    ),
    parameters=(PRESSURE_DROP, HEAT_BY_CUSTOM, BOUNDARY_TEMPERATURE),
    relations=relations,
    defaults=defaults,
    results=results,
    heats=heat_ports,
    stretches=stretches,
    groups=(HEAT_PORTS,),
    checks=checks,
    exergetic_efficiency="Exergy of the streams that leave over exergy of the stream that enters.",
    entropy_generation_number="Entropy generation over entering flow times specific gas constant.",
)

r"""Stirring: a paddle wheel or a resistor brings work into the content, at constant volume or at constant pressure.

    W = p (V_b − V_a) − W_st ,   at constant volume W = −W_st

``stirring_work`` is positive into the content; ``work`` is the net work that the system does. No heat is exchanged when
nothing else determines it.
"""

from __future__ import annotations

from reportgen.balances.equations import adiabatic
from reportgen.balances.kinds import Parameter
from reportgen.balances.plant import Piece
from reportgen.balances.processes.equations import (
    CONSTANT,
    HEAT_BY_CUSTOM,
    WORK,
    change_stretches,
    energy_balance,
    kept_mass,
    kept_volume,
    one_state,
    pressure_kept,
    process_kind,
    work_at_pressure,
)
from reportgen.balances.relations import Balance, Relation, Term


def relations(piece: Piece) -> list[Relation]:
    """Mass, pressure or volume, net work, energy."""
    before, after = one_state(piece)
    stirring = piece.path("stirring_work")
    rigid = piece.choice("constant") == "volume"
    if rigid:
        fixed = kept_volume(piece, before, after)
        terms = (Term(-1.0, (piece.path("work"),)), Term(-1.0, (stirring,)))
        sentence = f"{piece.title}: at constant volume stirring is the only work."
        work = Balance(piece.path("work.definition"), piece.owner, "Net work", sentence, "sum of the work", terms)
    else:
        fixed = [pressure_kept(piece, before, after)]
        work = work_at_pressure(piece, "pressure", [(before, after)], beside=(Term(-1.0, (stirring,)),))
    energy = energy_balance(
        piece,
        (before,),
        (after,),
        by=lambda state: "specific_internal_energy" if rigid else "specific_enthalpy",
        work="stirring_work",
        work_sign=1.0,
        sentence="heat and stirring raise the "
        + ("internal energy." if rigid else "enthalpy; the work of the moving boundary is in it."),
        basis="first law, closed system" + ("" if rigid else ", with p ΔV in the enthalpy"),
    )
    return [kept_mass(piece, before, after), *fixed, energy, work]


KIND = process_kind(
    "stirring",
    "Stirring",
    "Work is brought into the content by a paddle wheel or an electric resistor.",
    relations=relations,
    defaults=adiabatic,
    parameters=(
        Parameter("stirring_work", "energy", "Work of the paddle wheel or resistor, positive into the content."),
        HEAT_BY_CUSTOM,
        WORK,
    ),
    choices=(CONSTANT,),
    stretches=lambda piece: change_stretches(piece, piece.choice("constant")),
)

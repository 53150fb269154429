r"""Relations of machines that exchange work with a stream: compressors, fans, pumps, turbines.

Isentropic efficiency, with h_s the enthalpy at outlet pressure and inlet entropy:
    absorbing machine   η_s = (h_s − h_1)/(h_2 − h_1)
    delivering machine  η_s = (h_1 − h_2)/(h_1 − h_s)
Kinetic and potential energy stay outside it, but for a fan, whose total efficiency counts V²/2 at both ends.

Polytropic efficiencies are in :mod:`reportgen.balances.polytropic`, the isothermal one in
:mod:`reportgen.balances.isothermal`, mechanical losses in :mod:`reportgen.balances.shafts`.
"""

from __future__ import annotations

from typing import Literal

from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    HEAT_BY_CUSTOM,
    HEAT_PORTS,
    INLET,
    OUTLET,
    adiabatic,
    energy_balance,
    heat_sum,
    mass_balances,
    pressure_ratio,
    stream_stretches,
)
from reportgen.balances.isentropic import isentropic_change
from reportgen.balances.isothermal import ISOTHERMAL_EFFICIENCY, ISOTHERMAL_REPORTS, isothermal_relations
from reportgen.balances.kinds import Kind, Parameter
from reportgen.balances.merit import entropy_number_by_power, exergy_ratio
from reportgen.balances.plant import Piece
from reportgen.balances.polytropic import (
    POLYTROPIC_EFFICIENCY,
    POLYTROPIC_REPORTS,
    polytropic_relation,
    polytropic_results,
)
from reportgen.balances.relations import Balance, Equation, Formula, Relation, Term, token
from reportgen.balances.shafts import SHAFT_REPORTS, machine_heats, shaft_parameters, shaft_relations, work_path

__all__ = ["machine_kind"]

_PRESSURE_RISE = Parameter("pressure_rise", "pressure_difference", "Pressure at the outlet less that at the inlet.")


def machine_kind(
    name: str,
    title: str,
    text: str,
    *,
    absorbs: bool,
    moves: Literal["", "liquid", "gas"] = "",
    polytropic: bool = False,
    isothermal: bool = False,
    total: bool = False,
) -> Kind:
    """A machine with one inlet and one outlet that absorbs power, or delivers it.

    ``moves``: what an absorbing machine is made for. ``polytropic``, ``isothermal``: whether efficiencies of these
    names have a meaning for it. ``total``: its efficiency counts kinetic energy, and its pressure rise may be given.
    """
    verb = "absorbed" if absorbs else "delivered"
    merit = (
        f"Exergy gained by the stream over the power {verb}." if absorbs else f"Power {verb} over the exergy given up."
    )
    parameters = _parameters(verb, total)
    parameters += (POLYTROPIC_EFFICIENCY,) if polytropic else ()
    parameters += (ISOTHERMAL_EFFICIENCY,) if isothermal else ()
    reports: tuple[str, ...] = ("isentropic_outlet_enthalpy", *SHAFT_REPORTS)
    reports += POLYTROPIC_REPORTS if polytropic else ()
    reports += ISOTHERMAL_REPORTS if isothermal else ()

    def relations(piece: Piece) -> list[Relation]:
        found = _relations(piece, absorbs, total)
        found += [polytropic_relation(piece, absorbs)] if polytropic else []
        found += isothermal_relations(piece) if isothermal else []
        return [*found, *shaft_relations(piece, absorbs)]

    return Kind(
        name=name,
        title=title,
        text=text,
        ports=(INLET, OUTLET),
        parameters=(*parameters, *shaft_parameters(verb)),
        relations=relations,
        defaults=adiabatic,
        results=lambda piece: [*_results(piece, absorbs), *(polytropic_results(piece, absorbs) if polytropic else ())],
        heats=machine_heats,
        stretches=lambda piece: stream_stretches(piece, "entropy"),
        groups=(HEAT_PORTS,),
        reports=reports,
        power_sign=1 if absorbs else -1,
        work=work_path,
        compresses=absorbs and polytropic,
        moves=moves,
        lifts=(0 if total else 1) if absorbs else -1,
        exergetic_efficiency=merit,
        entropy_generation_number=f"Lost work over the power {verb}.",
    )


def _parameters(verb: str, total: bool) -> tuple[Parameter, ...]:
    """Parameters of every machine; ``verb`` says which way power is positive ("absorbed" or "delivered")."""
    kinetic = ", kinetic energies counted in (total efficiency)" if total else ""
    return (
        Parameter("power", "power", f"Power {verb}."),
        Parameter(
            "isentropic_efficiency",
            "efficiency",
            f"Efficiency against the isentropic change to the same pressure{kinetic}.",
        ),
        Parameter("pressure_ratio", "ratio", "Higher over lower pressure."),
        *((_PRESSURE_RISE,) if total else ()),
        HEAT_BY_CUSTOM,
        BOUNDARY_TEMPERATURE,
    )


def _isentropic_relations(piece: Piece, absorbs: bool, total: bool) -> list[Relation]:
    """Enthalpy of the isentropic change, and the definition of the isentropic efficiency."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    first, second = f"states.{inlet}.specific_enthalpy", f"states.{outlet}.specific_enthalpy"
    ideal, efficiency = piece.path("isentropic_outlet_enthalpy"), piece.path("isentropic_efficiency")
    change = isentropic_change(piece)
    h1, h2, hs, eta = token(first), token(second), token(ideal), token(efficiency)
    if absorbs:
        terms = ((1.0, (efficiency, second)), (-1.0, (efficiency, first)), (-1.0, (ideal,)), (1.0, (first,)))
        forms = {
            second: Equation(h2, rf"{h1} + \frac{{{hs} - {h1}}}{{{eta}}}"),
            efficiency: Equation(eta, rf"\frac{{{hs} - {h1}}}{{{h2} - {h1}}}"),
            ideal: Equation(hs, rf"{h1} + {eta}\left({h2} - {h1}\right)"),
        }
    else:
        terms = ((1.0, (efficiency, first)), (-1.0, (efficiency, ideal)), (-1.0, (first,)), (1.0, (second,)))
        forms = {
            second: Equation(h2, rf"{h1} - {eta}\left({h1} - {hs}\right)"),
            efficiency: Equation(eta, rf"\frac{{{h1} - {h2}}}{{{h1} - {hs}}}"),
            ideal: Equation(hs, rf"{h1} - \frac{{{h1} - {h2}}}{{{eta}}}"),
        }
    kinetic = _kinetic_terms(piece, efficiency) if total else ()
    if kinetic:  # the hand-set forms hold enthalpies only
        forms = {}
    sentences = {
        second: f"{piece.title}: the isentropic efficiency gives the enthalpy of state {outlet}.",
        efficiency: f"{piece.title}: both states give the isentropic efficiency.",
        ideal: f"{piece.title}: the isentropic efficiency gives the enthalpy an isentropic change would have led to.",
    }
    definition = Balance(
        piece.path("isentropic_efficiency.definition"),
        piece.owner,
        "Isentropic efficiency",
        f"{piece.title}: the isentropic efficiency compares the change of enthalpy with the isentropic one.",
        "definition of isentropic efficiency",
        (*(Term(coefficient, factors) for coefficient, factors in terms), *kinetic),
        forms,
        sentences,
    )
    return [change, definition]


def _kinetic_terms(piece: Piece, efficiency: str) -> tuple[Term, ...]:
    """(η − 1)(V_2² − V_1²)/2, what kinetic energies add to the definition of an absorbing machine's efficiency."""
    found = []
    for state, sign in ((piece.one("outlet"), 1.0), (piece.one("inlet"), -1.0)):
        velocity = f"states.{state}.velocity"
        if velocity in piece.carried:
            found.append(Term(0.5 * sign, (efficiency, velocity, velocity), r"\tfrac{1}{2}"))
            found.append(Term(-0.5 * sign, (velocity, velocity), r"\tfrac{1}{2}"))
    return tuple(found)


def _relations(piece: Piece, absorbs: bool, total: bool) -> list[Relation]:
    """Mass, energy, pressure ratio and isentropic efficiency of a machine with one inlet and one outlet."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    low, high = (inlet, outlet) if absorbs else (outlet, inlet)
    return [
        *mass_balances(piece),
        pressure_ratio(piece, low, high),
        *([_pressure_rise(piece, low, high)] if total else ()),
        *_isentropic_relations(piece, absorbs, total),
        energy_balance(piece, piece.path("power"), 1 if absorbs else -1),
        *heat_sum(piece),
    ]


def _pressure_rise(piece: Piece, low: str, high: str) -> Balance:
    """Δp = p_high − p_low."""
    return Balance(
        piece.path("pressure_rise.definition"),
        piece.owner,
        "Pressure rise",
        f"{piece.title}: the pressure rises from state {low} to state {high}.",
        "definition of the pressure rise",
        (
            Term(1.0, (f"states.{high}.pressure",)),
            Term(-1.0, (f"states.{low}.pressure",)),
            Term(-1.0, (piece.path("pressure_rise"),)),
        ),
    )


def _results(piece: Piece, absorbs: bool) -> list[Formula]:
    """Exergetic efficiency and entropy generation number.

    Absorbing machine ε = ṁ (e_2 − e_1)/Ẇ, delivering machine ε = Ẇ/(ṁ (e_1 − e_2)); N_s = T0 Ṡgen/|Ẇ|.
    """
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    paths = (
        f"states.{inlet}.mass_flow",
        f"states.{inlet}.specific_exergy",
        f"states.{outlet}.specific_exergy",
        work_path(piece),
    )
    m, e1, e2, power = (token(path) for path in paths)
    if absorbs:
        efficiency = exergy_ratio(
            piece,
            "exergy gained by the stream over power absorbed.",
            paths,
            lambda flow, first, last, work: flow * (last - first),
            lambda flow, first, last, work: work,
            rf"\frac{{{m}\left({e2} - {e1}\right)}}{{{power}}}",
        )
    else:
        efficiency = exergy_ratio(
            piece,
            "power delivered over exergy given up by the stream.",
            paths,
            lambda flow, first, last, work: work,
            lambda flow, first, last, work: flow * (first - last),
            rf"\frac{{{power}}}{{{m}\left({e1} - {e2}\right)}}",
        )
    return [efficiency, entropy_number_by_power(piece, paths[3], "power")]

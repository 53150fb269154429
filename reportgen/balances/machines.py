r"""Relations of machines that exchange work with a stream: compressors, pumps, turbines.

Efficiencies compare enthalpies of the two states; kinetic and potential energy stay outside them.

Isentropic efficiency, with h_s the enthalpy at outlet pressure and inlet entropy:
    absorbing machine   η_s = (h_s − h_1)/(h_2 − h_1)
    delivering machine  η_s = (h_1 − h_2)/(h_1 − h_s)

Polytropic efficiency, from ds = (1/η_p − 1)(v/T) dp for an absorbing and (η_p − 1)(v/T) dp for a delivering machine,
with I = ∫ (p v/T) d ln p taken along the path on which the entropy changes evenly with ln p:
    absorbing machine   η_p = I/(I + s_2 − s_1)
    delivering machine  η_p = (I + s_2 − s_1)/I
For an ideal gas I = R ln(p_2/p_1) and the result is exact; for a real fluid I is integrated by four Gauss–Legendre
nodes, the same way in both directions of solution.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    HEAT_BY_CUSTOM,
    INLET,
    OUTLET,
    adiabatic,
    energy_balance,
    heat_ports,
    mass_balances,
    pressure_ratio,
    stream_stretches,
)
from reportgen.balances.kinds import Kind, Parameter
from reportgen.balances.merit import entropy_number_by_power, exergy_ratio
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Equation, Formula, Inverse, Relation, Term, token

__all__ = ["machine_kind"]

_POLYTROPIC = Parameter(
    "polytropic_efficiency",
    "efficiency",
    "Efficiency of an infinitely small step of pressure, constant along the path.",
)

#: Gauss–Legendre nodes and weights on [0, 1], four points.
_NODES = (0.06943184420297371, 0.33000947820757187, 0.6699905217924281, 0.9305681557970262)
_WEIGHTS = (0.17392742256872692, 0.32607257743127307, 0.32607257743127307, 0.17392742256872692)


def machine_kind(name: str, title: str, text: str, *, absorbs: bool, polytropic: bool) -> Kind:
    """A machine with one inlet and one outlet that absorbs power, or delivers it.

    ``polytropic``: whether a polytropic efficiency has a meaning for it.
    """
    verb = "absorbed" if absorbs else "delivered"
    merit = (
        f"Exergy gained by the stream over the power {verb}." if absorbs else f"Power {verb} over the exergy given up."
    )
    return Kind(
        name=name,
        title=title,
        text=text,
        ports=(INLET, OUTLET),
        parameters=(*_parameters(verb), _POLYTROPIC) if polytropic else _parameters(verb),
        relations=lambda piece: _relations(piece, absorbs, polytropic),
        defaults=lambda piece: [adiabatic(piece)],
        results=lambda piece: [*_results(piece, absorbs), *(_path_results(piece) if polytropic else ())],
        heats=heat_ports,
        stretches=lambda piece: stream_stretches(piece, "entropy"),
        power_sign=1 if absorbs else -1,
        exergetic_efficiency=merit,
        entropy_generation_number=f"Lost work over the power {verb}.",
    )


def _parameters(verb: str) -> tuple[Parameter, ...]:
    """Parameters of every machine; ``verb`` says which way power is positive ("absorbed" or "delivered")."""
    return (
        Parameter("power", "power", f"Power {verb}."),
        Parameter(
            "isentropic_efficiency", "efficiency", "Efficiency against the isentropic change to the same pressure."
        ),
        Parameter("pressure_ratio", "ratio", "Higher over lower pressure."),
        HEAT_BY_CUSTOM,
        BOUNDARY_TEMPERATURE,
    )


def _isentropic_relations(piece: Piece, absorbs: bool) -> list[Relation]:
    """Enthalpy of the isentropic change, and the definition of the isentropic efficiency."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    fluid = piece.fluid(inlet)
    first, second = f"states.{inlet}.specific_enthalpy", f"states.{outlet}.specific_enthalpy"
    pressure, entropy = f"states.{outlet}.pressure", f"states.{inlet}.specific_entropy"
    ideal, efficiency = piece.path("isentropic_outlet_enthalpy"), piece.path("isentropic_efficiency")

    def enthalpy(outlet_pressure: Any, inlet_entropy: Any) -> Any:
        state = fluid.at(pressure=outlet_pressure, specific_entropy=inlet_entropy, errors="mask")
        return state.specific_enthalpy

    change = Formula(
        piece.path("isentropic_outlet_enthalpy"),
        piece.owner,
        "Isentropic change",
        f"{piece.title}: without entropy generation the stream would reach the pressure of state {outlet} "
        f"with the entropy of state {inlet}.",
        f"equation of state, {fluid.title}",
        ideal,
        (pressure, entropy),
        enthalpy,
        rf"h\left({token(pressure)},\,{token(entropy)}\right)",
        fluids=(piece.fluid_id(inlet),),
        reason="the isentropic outlet state lies outside the range of the fluid's equation",
    )
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
        tuple(Term(coefficient, factors) for coefficient, factors in terms),
        forms,
        sentences,
    )
    return [change, definition]


def _path_integral(fluid: Any) -> Callable[[Any, Any, Any, Any], Any]:
    """I = ∫ (p v/T) d ln p [J/(kg K)] from (p1, s1) to (p2, s2), entropy even in ln p."""

    def ideal(p1: Any, s1: Any, p2: Any, s2: Any) -> Any:
        import numpy as np

        return fluid.gas_constant * np.log(p2 / p1)

    def real(p1: Any, s1: Any, p2: Any, s2: Any) -> Any:
        import numpy as np

        nodes = np.array(_NODES)[:, None]
        p1, s1, p2, s2 = (np.atleast_1d(np.asarray(part, float)) for part in np.broadcast_arrays(p1, s1, p2, s2))
        logarithm = np.log(p2 / p1)
        pressure = p1 * np.exp(nodes * logarithm)
        state = fluid.at(pressure=pressure, specific_entropy=s1 + nodes * (s2 - s1), errors="mask")
        integrand = pressure / (state.density * state.temperature)
        return np.array(_WEIGHTS) @ integrand * logarithm

    return ideal if fluid.kind == "ideal-gas" else real


def _polytropic_relation(piece: Piece, absorbs: bool) -> Formula:
    """The polytropic efficiency from the end states."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    fluid = piece.fluid(inlet)
    integral = _path_integral(fluid)
    inputs = _ends(piece)
    p1, s1, p2, s2 = (token(path) for path in inputs)
    efficiency = piece.path("polytropic_efficiency")
    eta = token(efficiency)
    is_ideal = fluid.kind == "ideal-gas"
    whole = rf"R\ln\frac{{{p2}}}{{{p1}}}" if is_ideal else token(piece.path("pressure_integral"))

    def evaluate(first: Any, entropy: Any, last: Any, outlet_entropy: Any) -> Any:
        import numpy as np

        path = integral(first, entropy, last, outlet_entropy)
        change = outlet_entropy - entropy
        with np.errstate(divide="ignore", invalid="ignore"):
            return path / (path + change) if absorbs else (path + change) / path

    inverses = {}
    if is_ideal:

        def leave(first: Any, entropy: Any, last: Any, eta_value: Any) -> Any:
            return entropy + integral(first, entropy, last, entropy) * (
                1.0 / eta_value - 1.0 if absorbs else eta_value - 1.0
            )

        bracket = rf"\left(\frac{{1}}{{{eta}}} - 1\right)" if absorbs else rf"\left({eta} - 1\right)"
        inverses[inputs[3]] = Inverse(
            leave,
            rf"{s1} + {bracket}{whole}",
            f"{piece.title}: the polytropic efficiency gives the entropy of state {outlet}.",
        )
    top, bottom = (whole, rf"{whole} + {s2} - {s1}") if absorbs else (rf"{whole} + {s2} - {s1}", whole)
    manner = (
        f"exact for an ideal gas, R = {float(fluid.gas_constant):.6g} J/(kg K)"
        if is_ideal
        else "with the integral of v/T over pressure, given with the figures of merit"
    )
    return Formula(
        piece.path("polytropic_efficiency.definition"),
        piece.owner,
        "Polytropic efficiency",
        f"{piece.title}: the polytropic efficiency ties the rise of entropy to the change of pressure.",
        f"definition of polytropic efficiency ({manner})",
        efficiency,
        inputs,
        evaluate,
        rf"\frac{{{top}}}{{{bottom}}}",
        inverses,
        fluids=(piece.fluid_id(inlet),),
        reason="the path between the two states leaves the range of the fluid's equation, or has no length",
    )


def _ends(piece: Piece) -> tuple[str, str, str, str]:
    """Paths of pressure and entropy of inlet and outlet."""
    inlet, outlet = (f"states.{piece.one(port)}." for port in ("inlet", "outlet"))
    names = ("pressure", "specific_entropy")
    return inlet + names[0], inlet + names[1], outlet + names[0], outlet + names[1]


def _path_results(piece: Piece) -> list[Formula]:
    """I = ∫ (v/T) dp of a real fluid, by which its polytropic efficiency can be checked."""
    inlet = piece.one("inlet")
    fluid = piece.fluid(inlet)
    if fluid.kind == "ideal-gas":
        return []
    inputs = _ends(piece)
    p1, _, p2, _ = (token(path) for path in inputs)
    output = piece.path("pressure_integral")
    return [
        Formula(
            output,
            piece.owner,
            "Integral over pressure",
            f"{piece.title}: the integral of v/T over pressure, along a path on which the entropy changes evenly with "
            "ln p.",
            "four Gauss–Legendre nodes",
            output,
            inputs,
            _path_integral(fluid),
            rf"\int_{{{p1}}}^{{{p2}}}\frac{{v}}{{T}}\,\mathrm{{d}}p",
            fluids=(piece.fluid_id(inlet),),
            reason="the path between the two states leaves the range of the fluid's equation",
        )
    ]


def _relations(piece: Piece, absorbs: bool, polytropic: bool) -> list[Relation]:
    """Mass, energy, pressure ratio and efficiencies of a machine with one inlet and one outlet."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    low, high = (inlet, outlet) if absorbs else (outlet, inlet)
    energy = energy_balance(piece, piece.path("heat"), piece.path("power"), 1 if absorbs else -1)
    relations = [
        *mass_balances(piece),
        pressure_ratio(piece, low, high),
        *_isentropic_relations(piece, absorbs),
        energy,
    ]
    if polytropic:
        relations.append(_polytropic_relation(piece, absorbs))
    return relations


def _results(piece: Piece, absorbs: bool) -> list[Formula]:
    """Exergetic efficiency and entropy generation number.

    Absorbing machine ε = ṁ (e_2 − e_1)/Ẇ, delivering machine ε = Ẇ/(ṁ (e_1 − e_2)); N_s = T0 Ṡgen/|Ẇ|.
    """
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    paths = (
        f"states.{inlet}.mass_flow",
        f"states.{inlet}.specific_exergy",
        f"states.{outlet}.specific_exergy",
        piece.path("power"),
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

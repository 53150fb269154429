r"""What a combustor is told by the streams that enter it: oxygen needed and free, heats of combustion, its products.

With d_i the oxygen that a kilogram of stream i needs for complete combustion and o_i that which it frees [kg/kg]

    Σ o_i ṁ_i = (1 + e) Σ d_i ṁ_i

defines the excess air e, whatever the streams are: fuel and air apart, a mixture of both, several of each.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from reportgen.balances.composition import flow_paths, for_composition, is_made, with_flows
from reportgen.balances.merit import ratio_of
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Formula, Formulas, Term, token

if TYPE_CHECKING:
    from reportgen.fluids.reacting.streams import Contents

__all__ = [
    "adiabatic_temperature",
    "air_ratio",
    "composition_results",
    "contents",
    "excess_air",
    "flows_to_try",
    "fuel_heat",
    "heating_value",
    "is_fire",
    "no_exergetic_efficiency",
    "of_stream",
    "oxygen",
]

#: Mole fraction of the base case below which a species is not reported: one in a million.
TRACE = 1e-6
#: Key of water among the species.
WATER = "H2O"


def contents(piece: Piece) -> dict[str, Contents]:
    """Contents of each stream that enters, by state; of the gases of other combustors nothing is told."""
    from reportgen.fluids.reacting.streams import contents_of

    fluids = {state: piece.fluid(state) for state in piece.states("inlets")}
    return {state: contents_of(fluid) for state, fluid in fluids.items() if not is_made(fluid)}


def is_fire(piece: Piece) -> bool:
    """Whether it is known what oxygen the streams need and have."""
    known = contents(piece)
    made = any(is_made(piece.fluid(state)) for state in piece.states("inlets") if not _recycled(piece, state))
    return not made and any(each.needed for each in known.values()) and any(each.free for each in known.values())


def _recycled(piece: Piece, state: str) -> bool:
    """Whether a stream is of the gas that the piece makes: it comes back unchanged in its elements."""
    return piece.fluid_id(state) == piece.fluid_id(piece.one("outlet"))


def _flow(state: str) -> str:
    return f"states.{state}.mass_flow"


def of_stream(piece: Piece, state: str, name: str) -> str:
    """Path of a value of one stream that enters."""
    return piece.path(f"streams.{state}.{name}")


def oxygen(piece: Piece) -> list[Formula]:
    """Oxygen that a kilogram of each stream needs, and that it frees [kg/kg], where there is any."""
    found = []
    for state, each in contents(piece).items():
        for name, amount, words in (
            ("oxygen_needed", each.needed, "needs for its complete combustion to CO2, H2O, SO2, HCl and N2"),
            ("oxygen_free", each.free, "brings free"),
        ):
            if amount:
                found.append(_constant(piece, state, name, amount, "Oxygen", f"oxygen that a kilogram {words}."))
    return found


def _constant(piece: Piece, state: str, name: str, amount: float, heading: str, words: str) -> Formula:
    """A value that follows from the fluid of a stream alone."""
    path = of_stream(piece, state, name)
    return Formula(
        path,
        piece.owner,
        heading,
        f"{piece.title}, stream {state}: {words}",
        "elements are conserved" if heading == "Oxygen" else "enthalpies of formation",
        path,
        (),
        lambda: amount,
        _CONSTANTS[name],
        fluids=(piece.fluid_id(state),),
    )


#: Right sides of what follows from a fluid alone: sums over the species k of the stream, over the products j.
_CONSTANTS = {
    "oxygen_needed": r"\sum_k o_k",
    "oxygen_free": r"\sum_k o_k",
    "lower_heating_value": r"h - \sum_j n_j\,h_j",
    "higher_heating_value": r"h - \sum_j n_j\,h_j",
}


def excess_air(piece: Piece) -> Balance:
    """Σ o_i ṁ_i − (1 + e) Σ d_i ṁ_i = 0."""
    known, excess = contents(piece), piece.path("excess_air")
    free = [Term(1.0, (of_stream(piece, s, "oxygen_free"), _flow(s))) for s, each in known.items() if each.free]
    needed = [(of_stream(piece, s, "oxygen_needed"), _flow(s)) for s, each in known.items() if each.needed]
    bound = [Term(-1.0, factors) for factors in needed]
    more = [Term(-1.0, (excess, *factors)) for factors in needed]
    coefficients = {term.factors[0] for term in (*free, *bound)}
    return Balance(
        piece.path("excess_air.definition"),
        piece.owner,
        "Excess air",
        f"{piece.title}: the excess air ties the oxygen that is free to that which the fire needs.",
        "definition of excess air",
        (*free, *bound, *more),
        {},
        {excess: f"{piece.title}: oxygen that is free and that the fire needs give the excess air."},
        frozenset(coefficients),
    )


def air_ratio(piece: Piece) -> Formula:
    """λ = 1 + e."""
    excess, path = piece.path("excess_air"), piece.path("air_ratio")
    return Formula(
        path,
        piece.owner,
        "Air ratio",
        f"{piece.title}: oxygen that is there over oxygen that the fire needs.",
        "definition of the air ratio",
        path,
        (excess,),
        lambda more: 1.0 + more,
        rf"1 + {token(excess)}",
    )


@lru_cache(maxsize=64)
def _heating_values(fluid: Any) -> tuple[float, float]:
    from reportgen.fluids.reacting.streams import heating_values

    return heating_values(fluid)


def _fuels(piece: Piece) -> list[str]:
    return [state for state, each in contents(piece).items() if each.needed]


def heating_value(piece: Piece, which: str) -> list[Formula]:
    """Heating value of each stream that burns, and their mean; "lower" with all water as vapour, "higher" as liquid."""
    fuels, path = _fuels(piece), piece.path(f"{which}_heating_value")
    each = [_stream_heating_value(piece, state, which) for state in fuels]
    flows = [_flow(state) for state in fuels]
    heat = " + ".join(rf"{token(flow)}\,{token(value.output)}" for flow, value in zip(flows, each, strict=True))

    def mean(*arrays: Any) -> Any:
        values, masses = arrays[: len(fuels)], arrays[len(fuels) :]
        return ratio_of(sum(value * mass for value, mass in zip(values, masses, strict=True)), sum(masses))

    single = len(fuels) == 1
    words = "" if single else ", the mean by flow of its streams"
    return [
        *each,
        Formula(
            path,
            piece.owner,
            f"{which.capitalize()} heating value",
            f"{piece.title}: {which} heating value of what burns{words}.",
            "definition of the heating value",
            path,
            (each[0].output,) if single else (*(value.output for value in each), *flows),
            (lambda value: value) if single else mean,
            token(each[0].output) if single else rf"\frac{{{heat}}}{{{' + '.join(token(flow) for flow in flows)}}}",
            reason="no fuel flows",
        ),
    ]


def _stream_heating_value(piece: Piece, state: str, which: str) -> Formula:
    """H = h(25 °C) − Σ n_j h_j [J/kg] of one stream."""
    value = _heating_values(piece.fluid(state))[which == "higher"]
    water = "vapour" if which == "lower" else "liquid"
    words = "enthalpy of a kilogram at 25 °C and 101.325 kPa, less that of its products of complete combustion, all "
    words += f"water {water}."
    return _constant(piece, state, f"{which}_heating_value", value, f"{which.capitalize()} heating value", words)


def fuel_heat(piece: Piece) -> Formula:
    """Q̇_fuel = H_l Σ ṁ_fuel."""
    lower, path = piece.path("lower_heating_value"), piece.path("fuel_heat")
    flows = [_flow(state) for state in _fuels(piece)]
    total = " + ".join(token(flow) for flow in flows)
    return Formula(
        path,
        piece.owner,
        "Heat of the fuel",
        f"{piece.title}: flow of what burns times its lower heating value.",
        "definition of the heating value",
        path,
        (lower, *flows),
        lambda value, *masses: value * sum(masses),
        rf"{token(lower)}\left({total}\right)" if len(flows) > 1 else rf"{token(lower)}\,{total}",
    )


def adiabatic_temperature(piece: Piece) -> Formula:
    """T(p_2, h_2 − Q̇/ṁ_2), the temperature that the products would have without the heat."""
    outlet = piece.one("outlet")
    names = ("pressure", "specific_enthalpy", "mass_flow")
    inputs = (*(f"states.{outlet}.{name}" for name in names), piece.path("heat"))
    pressure, enthalpy, flow, heat = (token(path) for path in inputs)
    path = piece.path("adiabatic_temperature")

    def make(fluid: Any) -> Formula:
        def evaluate(p: Any, h: Any, mass: Any, brought: Any) -> Any:
            return fluid.at(pressure=p, specific_enthalpy=h - brought / mass, errors="mask").temperature

        return Formula(
            path,
            piece.owner,
            "Adiabatic temperature",
            f"{piece.title}: temperature of the products at the pressure of state {outlet} if no heat were exchanged.",
            f"first law, steady flow; {fluid.title}",
            path,
            inputs,
            evaluate,
            rf"T\left({pressure},\,{enthalpy} - \frac{{{heat}}}{{{flow}}}\right)",
            fluids=(piece.fluid_id(outlet),),
            reason="the products have no state of this enthalpy in the range of their model",
        )

    return for_composition([piece.fluid(outlet)], make)


def composition_results(piece: Piece, values: Mapping[str, Any]) -> list[Formula | Formulas]:
    """Mole fraction of every species in the products at the outlet, wet and dry, and their dew point.

    Equations are shown of those above one in a million in the base case; the others have their values.
    """
    outlet = piece.one("outlet")
    fluid = piece.fluid(outlet)
    flows = flow_paths(fluid)
    point = tuple(f"states.{outlet}.{name}" for name in ("temperature", "pressure"))
    inputs = (*point, *(path for path in flows if path not in point))

    def fractions(*arrays: Any) -> dict[str, Any]:
        known = dict(zip(inputs, arrays, strict=True))
        shares: dict[str, Any] = with_flows(fluid, known).fractions(arrays[0], arrays[1])
        return shares

    base = fractions(*(values[path][:1] for path in inputs))
    keys = sorted(base, key=lambda key: -float(base[key][0]))
    wet = {key: piece.path(f"species.{key}.mole_fraction") for key in keys}
    dry = {key: piece.path(f"species.{key}.dry_mole_fraction") for key in keys if key != WATER}
    shown = [key for key in keys if base[key][0] > TRACE]
    water = wet.get(WATER)
    part = rf"1 - {token(water)}" if water else "1"
    return [
        Formulas(
            piece.path("species.composition"),
            piece.owner,
            "Composition of the products",
            f"{piece.title}: amounts of the species at the outlet, in parts of all.",
            _chemistry(fluid),
            tuple(wet.values()),
            inputs,
            lambda *arrays: (lambda shares: [shares[key] for key in keys])(fractions(*arrays)),
            {wet[key]: rf"\frac{{n_{{\mathrm{{{key}}}}}}}{{\sum n}}" for key in shown},
            (piece.fluid_id(outlet),),
        ),
        Formulas(
            piece.path("species.dry_composition"),
            piece.owner,
            "Composition of the dry gas",
            f"{piece.title}: the same without the water.",
            "definition",
            tuple(dry.values()),
            (*(wet[key] for key in dry), *([water] if water else [])),
            lambda *shares: [ratio_of(share, 1.0 - (shares[-1] if water else 0.0)) for share in shares[: len(dry)]],
            {dry[key]: rf"\frac{{{token(wet[key])}}}{{{part}}}" for key in shown if key in dry},
        ),
        *([dew_point(piece)] if water else []),
    ]


def _chemistry(fluid: Any) -> str:
    """Basis of a composition of products."""
    if fluid.chemistry == "complete":
        return "elements are conserved; complete combustion"
    return "elements are conserved; least Gibbs energy at outlet temperature and pressure"


def dew_point(piece: Piece) -> Formula:
    """Temperature at which the water of the products condenses at the outlet pressure."""
    outlet = piece.one("outlet")
    path, share = piece.path("dew_point"), piece.path(f"species.{WATER}.mole_fraction")
    pressure = f"states.{outlet}.pressure"

    def point(water: Any, total: Any) -> Any:
        from reportgen.fluids.gases.condensation import saturation_temperature

        return saturation_temperature(water * total)

    return Formula(
        path,
        piece.owner,
        "Dew point of the products",
        f"{piece.title}: temperature at which the water in state {outlet} begins to condense at its pressure; nothing "
        "is said of sulfuric acid.",
        "saturation pressure of water: IAPWS R6-95(2018), over ice R14-08(2011)",
        path,
        (share, pressure),
        point,
        rf"T_\mathrm{{sat}}\left({token(share)}\,{token(pressure)}\right)",
        reason="the products hold no water that could condense at their pressure",
    )


def no_exergetic_efficiency(piece: Piece) -> Formula:
    """The figure that is not given, with the reason."""
    import numpy as np

    path = piece.path("exergetic_efficiency")
    return Formula(
        path,
        piece.owner,
        "Exergetic efficiency",
        f"{piece.title}: not given.",
        "definition for this kind of equipment",
        path,
        (piece.path("lost_work"),),
        lambda lost: np.full(np.shape(lost), np.nan),
        r"\text{—}",
        reason="the exergy of a stream is its physical part here, without the chemical exergy that the fuel spends",
    )


def flows_to_try(piece: Piece, known: Callable[[str], float], excess: float) -> dict[str, float]:
    """Flows with which the fire has oxygen enough: a search must begin where there is a complete combustion."""
    import math

    if not is_fire(piece):
        return {}
    streams = contents(piece)
    flows = {state: known(_flow(state)) for state in piece.states("inlets")}
    told = {state: flow for state, flow in flows.items() if math.isfinite(flow)}
    wanted = known(piece.path("excess_air"))
    ratio = 1.0 + (wanted if math.isfinite(wanted) else excess)
    fuels = [state for state, each in streams.items() if state not in told and each.needed > each.free]
    airs = [state for state, each in streams.items() if state not in told and each.free > each.needed]
    needed = sum(flow * streams[state].needed for state, flow in told.items() if state in streams)
    free = sum(flow * streams[state].free for state, flow in told.items() if state in streams)
    found = {piece.path("excess_air"): ratio - 1.0}
    burnt = max(free / ratio - needed, 0.0) if free > 0.0 and not airs else 1.0
    for state in fuels:
        flows[state] = max(burnt, 1e-6 * free) / streams[state].needed / len(fuels)
        needed += flows[state] * streams[state].needed
    for state in airs:
        lacking = max(ratio * needed - free, 0.05 * needed)
        flows[state] = lacking / streams[state].free / len(airs)
    flows = {state: flow if math.isfinite(flow) else 1.0 for state, flow in flows.items()}
    outlet = piece.one("outlet")
    rest = known(_flow(outlet)) - sum(told.values())
    sought = sum(flow for state, flow in flows.items() if state not in told)
    if rest > 0.0 and sought > 0.0:  # what leaves is known: the flows keep their proportions
        flows = {state: flow if state in told else flow * rest / sought for state, flow in flows.items()}
    return found | {_flow(state): flow for state, flow in flows.items()} | {_flow(outlet): sum(flows.values())}

r"""Combustor: streams that hold fuel and oxygen leave as the gas that they make when they burn.

    Σ o_i ṁ_i = (1 + e) Σ d_i ṁ_i ,   0 = Σ ṁ_i h_i + Q̇ − ṁ_2 h_2 ,   p_2 = min(p_i) − Δp

Enthalpies are those of formation and entropies by the third law, so that nothing else is needed for the heat of
combustion and for the entropy that it generates. Streams that enter apart are mixed inside: the entropy of their mixing
is part of what is generated. A stream that is mixed before it enters is one fluid with fuel and oxygen in it.

The fluid of the outlet names this piece as what it is made of; its ``chemistry`` is complete combustion or equilibrium.
Adiabatic, and without pressure loss, unless the balances say otherwise.

Exergetic efficiency: none, since the exergy of a stream is its physical part only.
Entropy generation number: lost work over the heat of the fuel (flow times lower heating value).
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from reportgen.balances.burning import (
    adiabatic_temperature,
    air_ratio,
    composition_results,
    contents,
    excess_air,
    flows_to_try,
    fuel_heat,
    heating_value,
    is_fire,
    no_exergetic_efficiency,
    oxygen,
)
from reportgen.balances.composition import is_made
from reportgen.balances.doubts import Doubt
from reportgen.balances.equations import (
    BOUNDARY_TEMPERATURE,
    HEAT_BY_CUSTOM,
    HEAT_PORTS,
    OUTLET,
    PRESSURE_DROP,
    adiabatic,
    energy_balance,
    heat_ports,
    heat_sum,
    mass_balances,
    no_pressure_drop,
)
from reportgen.balances.joining import inlet_pressures, outlet_pressure
from reportgen.balances.kinds import Kind, Parameter, Port
from reportgen.balances.merit import entropy_number_by_power
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Default, Formula, Relation
from reportgen.errors import Fault, InputError

#: Species that the products may hold (those of ``fluids.reacting.products.CANDIDATES``).
SPECIES = (
    *("CO2", "CO", "CH4", "C2H2", "C2H4", "CH2O", "H2", "H", "H2O", "H2O2", "OH", "O2", "O", "O3"),
    *("N2", "N", "NO", "NO2", "N2O", "NH3", "HCN", "SO2", "SO3", "H2S", "COS", "CS2", "HCl", "Cl2", "Ar", "He", "Ne"),
)


def relations(piece: Piece) -> list[Relation]:
    """Mass, pressure, energy, and what the excess air says of the flows."""
    pressures = tuple(f"states.{state}.pressure" for state in piece.states("inlets"))
    found: list[Relation] = [*mass_balances(piece), outlet_pressure(piece, pressures)]
    found += [energy_balance(piece), *heat_sum(piece)]
    if is_fire(piece):
        found += [*oxygen(piece), excess_air(piece)]
    return found


def defaults(piece: Piece) -> list[Default]:
    """Adiabatic, no pressure loss, unknown inlet pressures equal to the outlet's."""
    return [*adiabatic(piece), no_pressure_drop(piece), *inlet_pressures(piece)]


def results(piece: Piece) -> list[Formula]:
    """Air ratio, heating values, adiabatic temperature, lost work in parts of the heat of the fuel."""
    found = [no_exergetic_efficiency(piece), adiabatic_temperature(piece)]
    if not is_fire(piece):
        return found
    heat = fuel_heat(piece)
    of_fuel = [air_ratio(piece), *heating_value(piece, "lower"), *heating_value(piece, "higher"), heat]
    return [*of_fuel, *found, entropy_number_by_power(piece, heat.output, "heat of the fuel")]


def doubts(piece: Piece, samples: Callable[[str], Any]) -> list[Doubt]:
    """Too little oxygen that follows from a temperature or a heat: more of it than needed may give the same."""
    excess = piece.path("excess_air")
    flows = [f"states.{state}.mass_flow" for state in piece.states("inlets")]
    if excess in piece.given or all(path in piece.given for path in flows) or not is_fire(piece):
        return []
    text = f"{piece.title} ⟦burns|may burn⟧ with less oxygen than its fuel needs, although no excess air is given; "
    text += "what is given may also hold with more than it needs. State the excess air, or the flows that enter."
    return [Doubt("fire-without-air", piece.owner, excess, text, samples(excess), dimension="ratio")]


def checks(piece: Piece) -> list[Fault]:
    """Streams whose elements or zeros are not known; an outlet of another fluid; excess air that means nothing."""
    outlet = piece.one("outlet")
    fluid = piece.fluid(outlet)
    entering = [state for state in piece.states("inlets") if piece.fluid_id(state) != piece.fluid_id(outlet)]
    if not is_made(fluid) or set(fluid.streams) != set(entering):
        return [
            Fault(
                f"{piece.title} makes another fluid than that of state {outlet}.",
                f"states.{outlet}.fluid",
                found=piece.fluid_id(outlet),
                expected=f'a fluid with products_of = "{piece.tag}"',
            )
        ]
    try:
        contents(piece)
    except InputError as error:
        path = piece.path("inlets")
        return [Fault(each.message, path, found=each.found, expected=each.expected) for each in error.faults]
    if piece.path("excess_air") in piece.given and not is_fire(piece):
        return [
            Fault(
                f"{piece.title}: excess air has no meaning where no stream needs oxygen, none holds any, or one is the "
                "gas of another combustor.",
                piece.path("excess_air"),
                expected="the flows of all streams in its place",
            )
        ]
    return []


KIND = Kind(
    name="combustor",
    title="Combustor",
    text="Streams with fuel and oxygen burn and leave as one gas, the fluid that names the combustor in products_of.",
    ports=(Port("inlets", "in", many=True, text="States of the streams that enter: fuel, air, and more."), OUTLET),
    parameters=(
        Parameter("excess_air", "ratio", "Oxygen beyond what complete combustion needs, in parts of that."),
        HEAT_BY_CUSTOM,
        BOUNDARY_TEMPERATURE,
        PRESSURE_DROP,
    ),
    relations=relations,
    defaults=defaults,
    results=results,
    heats=heat_ports,
    groups=(HEAT_PORTS,),
    stretches=lambda piece: (),
    reports=(
        "air_ratio",
        "lower_heating_value",
        "higher_heating_value",
        "fuel_heat",
        "adiabatic_temperature",
        "dew_point",
        "mole_fraction",
    ),
    checks=checks,
    doubts=doubts,
    burns=True,
    found=composition_results,
    starts=flows_to_try,
    species=SPECIES,
    exergetic_efficiency="Not given: exergies are physical, without the chemical exergy of a fuel.",
    entropy_generation_number="Lost work over the heat of the fuel, flow times lower heating value.",
)

r"""Relations that several kinds of equipment share: mass, energy, pressure, and the efficiencies of machines.

Steady flow throughout. With Σin ṁ = Σout ṁ put in, the energy balance round a piece reads

    0 = Σin ṁ (H − H*) − Σout ṁ (H − H*) + Q̇ + Ẇ_absorbed ,   H = h + V²/2 + g z

for any reference H*; the stream on the side with only one state is taken for it, so that enthalpies appear as
differences. Velocity and elevation enter for the states that state them, and a velocity where a kind solves for it.
g = 9.80665 m/s² (exact, standard).

Heat crosses one boundary, of ``boundary_temperature``, or several, listed as ``heat_ports``; ``heat`` then is the sum.
"""

from __future__ import annotations

from collections.abc import Sequence

from reportgen.balances.kinds import Group, Parameter, Port
from reportgen.balances.plant import Piece, balance_groups
from reportgen.balances.relations import Balance, Default, Equation, HeatPort, Relation, Stretch, Term, token, zero

__all__ = [
    "BOUNDARY_TEMPERATURE",
    "HEAT_BY_CUSTOM",
    "HEAT_PORTS",
    "INLET",
    "OUTLET",
    "PRESSURE_DROP",
    "STANDARD_GRAVITY",
    "adiabatic",
    "elevated_enthalpy",
    "energy_balance",
    "heat_ports",
    "heat_sum",
    "mass_balances",
    "no_pressure_drop",
    "over_boundaries",
    "pressure_drop",
    "pressure_ratio",
    "stream_stretches",
    "through",
]

STANDARD_GRAVITY = 9.80665  # m/s2, exact by definition

INLET = Port("inlet", "in", text="State of the stream that enters.")
OUTLET = Port("outlet", "out", text="State of the stream that leaves.")
BOUNDARY_TEMPERATURE = Parameter(
    "boundary_temperature",
    "temperature",
    "Temperature of the boundary where the heat crosses; needed for heat that enters.",
    "the surroundings' temperature, for heat that leaves",
)
HEAT_BY_CUSTOM = Parameter(
    "heat", "heat_flow", "Heat flow into the fluid (negative for a loss).", "0 when nothing else determines it"
)
HEAT_PORTS = Group(
    "heat_ports",
    (
        Parameter("heat", "heat_flow", "Heat flow into the piece over this boundary."),
        Parameter("temperature", "temperature", "Temperature of this boundary."),
    ),
    "Boundaries over which heat crosses, each with its heat flow and temperature.",
)
PRESSURE_DROP = Parameter(
    "pressure_drop",
    "pressure_difference",
    "Pressure loss from inlet to outlet.",
    "0 when nothing else determines it",
)


def elevated_enthalpy(piece: Piece, state: str, flow: str | None, sign: float = 1.0) -> list[Term]:
    """Terms of ± ṁ (h + V²/2 + g z), or of ± (h + V²/2 + g z) when ``flow`` is None."""
    prefix = (flow,) if flow else ()
    velocity, elevation = f"states.{state}.velocity", f"states.{state}.elevation"
    terms = [Term(sign, (*prefix, f"states.{state}.specific_enthalpy"))]
    if velocity in piece.carried:
        terms.append(Term(0.5 * sign, (*prefix, velocity, velocity), r"\tfrac{1}{2}"))
    if elevation in piece.carried:
        terms.append(Term(STANDARD_GRAVITY * sign, (*prefix, elevation), "g"))
    return terms


def through(piece: Piece, inlet: str, outlet: str, sign: float = 1.0) -> list[Term]:
    """Terms of ± ṁ_in (H_in − H_out), energy given off by a stream that enters and leaves once."""
    flow = f"states.{inlet}.mass_flow"
    return elevated_enthalpy(piece, inlet, flow, sign) + elevated_enthalpy(piece, outlet, flow, -sign)


def _group_energy(piece: Piece, inlets: Sequence[str], outlets: Sequence[str]) -> list[Term]:
    """Σin ṁ H − Σout ṁ H with the mass balance put in where one side has a single state."""
    terms: list[Term] = []
    if len(outlets) == 1:
        for state in inlets:
            terms += through(piece, state, outlets[0])
    elif len(inlets) == 1:
        for state in outlets:
            flow = f"states.{state}.mass_flow"
            terms += elevated_enthalpy(piece, inlets[0], flow) + elevated_enthalpy(piece, state, flow, -1.0)
    else:
        for state in inlets:
            terms += elevated_enthalpy(piece, state, f"states.{state}.mass_flow")
        for state in outlets:
            terms += elevated_enthalpy(piece, state, f"states.{state}.mass_flow", -1.0)
    return terms


def mass_balances(piece: Piece) -> list[Relation]:
    """0 = Σin ṁ − Σout ṁ for every group of streams that exchange mass."""
    relations: list[Relation] = []
    groups = balance_groups(piece)
    for number, (inlets, outlets) in enumerate(groups, start=1):
        suffix = f".{number}" if len(groups) > 1 else ""
        if len(inlets) == len(outlets) == 1:
            sentence = f"{piece.title}: what enters as stream {inlets[0]} leaves as stream {outlets[0]}."
        else:
            entering = ", ".join(inlets)
            sentence = (
                f"{piece.title}: the flows that enter ({entering}) equal those that leave ({', '.join(outlets)})."
            )
        terms = [Term(1.0, (f"states.{state}.mass_flow",)) for state in inlets]
        terms += [Term(-1.0, (f"states.{state}.mass_flow",)) for state in outlets]
        key = piece.path(f"mass_balance{suffix}")
        relations.append(
            Balance(key, piece.owner, "Mass balance", sentence, "conservation of mass, steady flow", tuple(terms))
        )
    return relations


def energy_balance(piece: Piece, power: str | None = None, power_sign: int = 0) -> Balance:
    """The first law round the whole piece, with the heat over every boundary."""
    terms: list[Term] = []
    for inlets, outlets in balance_groups(piece):
        terms += _group_energy(piece, inlets, outlets)
    terms += over_boundaries(piece)
    if power:
        terms.append(Term(float(power_sign), (power,)))
    sentences = {}
    if piece.count(HEAT_PORTS.name):
        for number, port in enumerate(heat_ports(piece), start=1):
            sentences[port.heat] = f"{piece.title}: the energy balance gives the heat over boundary {number}."
    else:
        sentences[piece.path("heat")] = f"{piece.title}: the energy balance gives the heat, positive into the fluid."
    if power:
        natural = "absorbed" if power_sign > 0 else "delivered"
        sentences[power] = f"{piece.title}: the energy balance gives the power {natural}."
    for inlets, outlets in balance_groups(piece):
        for state in (*inlets, *outlets):
            sentences[f"states.{state}.mass_flow"] = (
                f"{piece.title}: the energy balance gives the flow of stream {state}."
            )
            path = f"states.{state}.specific_enthalpy"
            sentences[path] = f"{piece.title}: the energy balance gives the enthalpy of state {state}."
            path = f"states.{state}.velocity"
            sentences[path] = f"{piece.title}: the energy balance gives the velocity of stream {state}."
    sentence = f"{piece.title}: energy is conserved in steady flow."
    key = piece.path("energy_balance")
    return Balance(key, piece.owner, "Energy balance", sentence, "first law, steady flow", tuple(terms), {}, sentences)


def over_boundaries(piece: Piece, sign: float = 1.0) -> list[Term]:
    """Terms of ± Q̇ over every boundary of a piece."""
    return [Term(sign, (port.heat,)) for port in heat_ports(piece)]


def heat_sum(piece: Piece) -> list[Relation]:
    """Q̇ = Σ Q̇_j for a piece with several boundaries."""
    ports = over_boundaries(piece)
    if not piece.count(HEAT_PORTS.name):
        return []
    return [
        Balance(
            piece.path("heat.sum"),
            piece.owner,
            "Heat over all boundaries",
            f"{piece.title}: the heat is the sum over all boundaries.",
            "conservation of energy",
            (Term(-1.0, (piece.path("heat"),)), *ports),
        )
    ]


def adiabatic(piece: Piece, energy: Balance | None = None, kept: Balance | None = None) -> list[Default]:
    """Heat is zero unless determined otherwise; ``kept`` then stands in the place of ``energy``.

    Nothing is assumed of a piece that lists its boundaries.
    """
    if piece.count(HEAT_PORTS.name):
        return []
    heat = piece.path("heat")
    text = f"{piece.title} exchanges no heat with its surroundings (adiabatic)."
    sentence = f"{piece.title} is taken as adiabatic."
    relation = zero(heat, piece.path("heat.assumed"), piece.owner, "Adiabatic", sentence)
    rewrites = {energy.key: lambda _: kept} if energy and kept else {}
    rank = 0 if rewrites else 3
    return [Default(f"{piece.owner}.adiabatic", piece.owner, text, (heat,), relation, rewrites, rank)]


def pressure_drop(piece: Piece, inlet: str, outlet: str, name: str = "pressure_drop") -> Balance:
    """p_out = p_in − Δp."""
    first, last, drop = f"states.{inlet}.pressure", f"states.{outlet}.pressure", piece.path(name)
    sentence = f"{piece.title}: pressure of state {outlet} is that of state {inlet} less the pressure loss."
    return Balance(
        piece.path(f"{name}.relation"),
        piece.owner,
        "Pressure loss",
        sentence,
        "definition of the pressure loss",
        (Term(1.0, (first,)), Term(-1.0, (last,)), Term(-1.0, (drop,))),
        {},
        {drop: f"{piece.title}: the pressures on both sides give the pressure loss."},
    )


def no_pressure_drop(piece: Piece, name: str = "pressure_drop", where: str = "") -> Default:
    """Pressure loss is zero unless determined otherwise."""
    drop = piece.path(name)
    text = f"{piece.title} has no pressure loss{where}."
    sentence = f"{piece.title}: the pressure loss{where} is neglected."
    relation = zero(drop, piece.path(f"{name}.assumed"), piece.owner, "No pressure loss", sentence)
    return Default(f"{piece.owner}.no_{name}", piece.owner, text, (drop,), relation, rank=1)


def pressure_ratio(piece: Piece, low: str, high: str) -> Balance:
    """r_p = p_high / p_low."""
    ratio, bottom, top = piece.path("pressure_ratio"), f"states.{low}.pressure", f"states.{high}.pressure"
    return Balance(
        piece.path("pressure_ratio.definition"),
        piece.owner,
        "Pressure ratio",
        f"{piece.title}: the pressure ratio is the higher over the lower pressure.",
        "definition of the pressure ratio",
        (Term(1.0, (ratio, bottom)), Term(-1.0, (top,))),
        {top: Equation(token(top), rf"{token(ratio)}\,{token(bottom)}")},
    )


def heat_ports(piece: Piece, entropy: str = "entropy_with_heat", into: tuple[str, ...] | None = None) -> list[HeatPort]:
    """The boundaries of a piece: those it lists, else the one of ``heat`` and ``boundary_temperature``.

    ``entropy`` names the entropy that goes over a single boundary, ``into`` the states of the stream that the heat
    reaches (None: any).
    """
    count = piece.count(HEAT_PORTS.name)
    if not count:
        heat, temperature = piece.path("heat"), piece.path("boundary_temperature")
        return [HeatPort(piece.title, heat, temperature, piece.path(entropy), into)]
    found = []
    for number in range(1, count + 1):
        prefix = piece.path(f"{HEAT_PORTS.name}.{number}")
        label = f"{piece.title}, boundary {number}"
        found.append(HeatPort(label, f"{prefix}.heat", f"{prefix}.temperature", f"{prefix}.entropy_with_heat", into))
    return found


def stream_stretches(piece: Piece, along: str, role: str = "stream") -> list[Stretch]:
    """The one stream of a piece with one inlet and one outlet."""
    return [Stretch(role, piece.one("inlet"), piece.one("outlet"), along)]

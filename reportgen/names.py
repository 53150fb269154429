"""The glossary: one name for every number, with its symbol, dimension, SI unit and sign.

A value's path is its place in the calculation file (``states.1.pressure``); its last part is a name of this
glossary. Symbols follow ISO 80000-5 and ISO 80000-4 where these have one.
"""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["AMOUNTS", "DIMENSIONS", "NAMES", "Name", "name_of", "symbol_of"]

#: SI unit of each dimension, as written in a Record.
DIMENSIONS: dict[str, str] = {
    "temperature": "K",
    "temperature_difference": "K",
    "pressure": "Pa",
    "pressure_difference": "Pa",
    "specific_energy": "J/kg",
    "specific_entropy": "J/(kg*K)",
    "density": "kg/m3",
    "specific_volume": "m3/kg",
    "mass_flow": "kg/s",
    "molar_flow": "mol/s",
    "volume_flow": "m3/s",
    "molar_mass": "kg/mol",
    "molar_volume": "m3/mol",
    "power": "W",
    "heat_flow": "W",
    "entropy_flow": "W/K",
    "energy": "J",
    "entropy": "J/K",
    "mass": "kg",
    "volume": "m3",
    "velocity": "m/s",
    "length": "m",
    "area": "m2",
    "time": "s",
    "heat_transfer_coefficient": "W/(m2*K)",
    "efficiency": "1",
    "ratio": "1",
}


@dataclass(frozen=True)
class Name:
    """One entry: key, LaTeX symbol, dimension (a key of DIMENSIONS), meaning, sign convention."""

    key: str
    symbol: str
    dimension: str
    text: str
    sign: str = ""

    @property
    def unit(self) -> str:
        """SI unit as written in a Record."""
        return DIMENSIONS[self.dimension]


_PORTS = "never negative: the ports give the direction"
_INTO = "positive into the fluid"
_INTO_PIECE = "positive into the piece"
_LOSS = "positive where the pressure falls"
_RISE = "positive where the pressure rises"
_WARMER = "positive where the hot stream is the warmer one"
_LEFT = "positive when more enters than leaves"
_POWER = (
    "positive in the natural direction of the kind: absorbed by compressors and pumps, delivered by turbines; "
    "of several machines the net power delivered, or, where none delivers, the power absorbed"
)

_ENTRIES = (
    # states
    Name("temperature", "T", "temperature", "Temperature"),
    Name("pressure", "p", "pressure", "Pressure, absolute"),
    Name("specific_enthalpy", "h", "specific_energy", "Specific enthalpy"),
    Name("specific_entropy", "s", "specific_entropy", "Specific entropy"),
    Name("specific_internal_energy", "u", "specific_energy", "Specific internal energy"),
    Name("density", r"\rho", "density", "Mass density"),
    Name("specific_volume", "v", "specific_volume", "Specific volume"),
    Name("quality", "x", "ratio", "Vapour mass fraction of a two-phase state"),
    Name(
        "superheat", r"\Delta T_\mathrm{sup}", "temperature_difference", "Superheat above saturation", "never negative"
    ),
    Name(
        "subcooling",
        r"\Delta T_\mathrm{sub}",
        "temperature_difference",
        "Subcooling below saturation",
        "never negative",
    ),
    Name("compressibility_factor", "Z", "ratio", "Compressibility factor p v M / (R T)"),
    Name("isobaric_heat_capacity", "c_p", "specific_entropy", "Specific heat capacity at constant pressure"),
    Name("isochoric_heat_capacity", "c_v", "specific_entropy", "Specific heat capacity at constant volume"),
    Name("speed_of_sound", "w", "velocity", "Speed of sound"),
    Name("specific_exergy", "e", "specific_energy", "Specific flow exergy relative to the surroundings"),
    Name("mass_flow", r"\dot m", "mass_flow", "Mass flow rate", _PORTS),
    Name("molar_flow", r"\dot n", "molar_flow", "Amount-of-substance flow rate", _PORTS),
    Name("volume_flow", r"\dot V", "volume_flow", "Volume flow rate at the conditions of the state", _PORTS),
    Name("entropy_flow", r"\dot S", "entropy_flow", "Entropy carried by a stream, mass flow times specific entropy"),
    Name("mass", "m", "mass", "Mass"),
    Name("volume", "V", "volume", "Volume"),
    Name("entropy", "S", "entropy", "Entropy of a content, mass times specific entropy"),
    Name("velocity", "V", "velocity", "Mean velocity of the flow"),
    Name("elevation", "z", "length", "Elevation above a common datum", "positive upwards"),
    # equipment
    Name("power", r"\dot W", "power", "Power", _POWER),
    Name("heat", r"\dot Q", "heat_flow", "Heat flow rate", _INTO),
    Name("boundary_temperature", "T_b", "temperature", "Temperature of the boundary where heat crosses"),
    Name("duty", r"\dot Q_\mathrm{duty}", "heat_flow", "Heat from hot to cold side", "positive from hot to cold"),
    Name("isentropic_efficiency", r"\eta_s", "efficiency", "Isentropic efficiency"),
    Name("polytropic_efficiency", r"\eta_p", "efficiency", "Polytropic efficiency"),
    Name("pressure_integral", "I", "specific_entropy", "Integral of v/T over pressure along the path"),
    Name(
        "end_point_efficiency",
        r"\eta_\mathrm{ends}",
        "efficiency",
        "Polytropic efficiency by the formula of the end states alone, for comparison",
    ),
    Name(
        "end_point_difference",
        r"\delta\eta_\mathrm{ends}",
        "efficiency",
        "End-point formula less the efficiency by integration along the path",
        "positive where the end-point formula gives more",
    ),
    Name("isothermal_efficiency", r"\eta_T", "efficiency", "Isothermal efficiency"),
    Name("isothermal_work", "w_T", "specific_energy", "Reversible work of compression at the inlet temperature"),
    Name("mechanical_efficiency", r"\eta_\mathrm{m}", "efficiency", "Efficiency of bearings, gear and motor"),
    Name("shaft_power", r"\dot W_\mathrm{sh}", "power", "Shaft power: mechanical losses counted in", _POWER),
    Name("mechanical_heat", r"\dot Q_\mathrm{m}", "heat_flow", "Heat of the mechanical losses", _INTO_PIECE),
    Name(
        "mechanical_boundary_temperature",
        r"T_\mathrm{m}",
        "temperature",
        "Temperature at which the heat of the mechanical losses leaves",
    ),
    Name("entropy_with_mechanical_heat", r"\dot S_\mathrm{Q,m}", "entropy_flow", "Entropy with that heat", _INTO_PIECE),
    Name("entropy_with_fluid_heat", r"\dot S_\mathrm{Q,f}", "entropy_flow", "Entropy with heat of the stream", _INTO),
    Name(
        "pressure_rise", r"\Delta p_\mathrm{rise}", "pressure_difference", "Outlet pressure less inlet pressure", _RISE
    ),
    Name("mach_number", r"\mathit{Ma}", "ratio", "Velocity in parts of the speed of sound"),
    Name("inlet_area", "A_1", "area", "Area of the flow at the inlet"),
    Name("outlet_area", "A_2", "area", "Area of the flow at the outlet"),
    Name("throat_area", r"A_\mathrm{t}", "area", "Smallest area of the flow"),
    Name("throat_pressure", r"p_\mathrm{t}", "pressure", "Pressure at the smallest area, absolute"),
    Name("inner_diameter", "d", "length", "Inner diameter"),
    Name("pressure_recovery", "C_p", "ratio", "Pressure rise in parts of the dynamic pressure at the inlet"),
    Name("isentropic_outlet_enthalpy", r"h_s", "specific_energy", "Enthalpy at outlet pressure and inlet entropy"),
    Name("pressure_drop", r"\Delta p", "pressure_difference", "Pressure loss from inlet to outlet", _LOSS),
    Name(
        "hot_pressure_drop", r"\Delta p_\mathrm{hot}", "pressure_difference", "Pressure loss of the hot stream", _LOSS
    ),
    Name(
        "cold_pressure_drop",
        r"\Delta p_\mathrm{cold}",
        "pressure_difference",
        "Pressure loss of the cold stream",
        _LOSS,
    ),
    Name("pressure_ratio", r"r_p", "ratio", "Higher over lower pressure of the machine"),
    Name("pinch", r"\Delta T_\mathrm{min}", "temperature_difference", "Smallest temperature difference", _WARMER),
    Name("pinch_place", r"y_\mathrm{min}", "ratio", "Share of the duty at which the temperatures come closest"),
    Name(
        "mean_temperature_difference", r"\Delta T_\mathrm{m}", "temperature_difference", "Mean temperature difference"
    ),
    Name("effectiveness", r"E", "efficiency", "Effectiveness: duty over the largest that either stream could exchange"),
    Name(
        "entropy_by_temperature_difference",
        r"\dot S_{\Delta T}",
        "entropy_flow",
        "Entropy generation by heat across temperature differences",
    ),
    Name("entropy_by_pressure_drop", r"\dot S_{\Delta p}", "entropy_flow", "Entropy generation by pressure losses"),
    Name("bejan_number", r"\mathit{Be}", "ratio", "Share of temperature differences in the entropy generation"),
    Name(
        "entropy_generation",
        r"\dot S_\mathrm{gen}",
        "entropy_flow",
        "Entropy generation rate",
        "never negative by the second law",
    ),
    Name("entropy_with_heat", r"\dot S_Q", "entropy_flow", "Entropy carried by heat", _INTO),
    Name("split_fraction", r"\varphi", "ratio", "Share of the inlet flow that leaves by the first outlet"),
    Name(
        "lost_work",
        r"\dot W_\mathrm{lost}",
        "power",
        "Work forgone, T0 times entropy generation",
        "as entropy generation",
    ),
    Name("exergetic_efficiency", r"\varepsilon", "efficiency", "Exergetic efficiency: exergy gained over spent"),
    Name("entropy_generation_number", r"N_s", "ratio", "Entropy generation over the reference stated for the kind"),
    Name("energy_imbalance", r"\delta\dot E", "power", "What is left of the energy balance", _LEFT),
    Name("mass_imbalance", r"\delta\dot m", "mass_flow", "What is left of the mass balance", _LEFT),
    Name(
        "net_power",
        r"\dot W_\mathrm{net}",
        "power",
        "Net power: that of a cycle",
        "positive as its purpose has it: delivered by a power cycle, absorbed for cooling or heating",
    ),
    Name(
        "heat_supplied",
        r"\dot Q_\mathrm{sup}",
        "heat_flow",
        "Heat supplied: what enters a cycle",
        "positive into the cycle",
    ),
    Name(
        "heat_rejected",
        r"\dot Q_\mathrm{rej}",
        "heat_flow",
        "Heat rejected: what leaves a cycle",
        "positive out of the cycle",
    ),
    Name("thermal_efficiency", r"\eta_\mathrm{th}", "efficiency", "Thermal efficiency: net power over heat supplied"),
    Name(
        "coefficient_of_performance",
        r"\mathit{COP}",
        "ratio",
        "Coefficient of performance: heat taken up (cooling) or given off (heating) over net power",
    ),
    Name(
        "second_law_efficiency",
        r"\eta_\mathrm{II}",
        "efficiency",
        "Second-law efficiency: what a cycle is for over what it is given, both as exergy",
    ),
    Name("excess_air", r"e_\mathrm{air}", "ratio", "Excess air: oxygen beyond what is needed, in parts of that"),
    Name("oxygen_needed", r"o_\mathrm{n}", "ratio", "Oxygen that a kilogram needs to burn completely"),
    Name("oxygen_free", r"o_\mathrm{f}", "ratio", "Oxygen that a kilogram frees"),
    Name("air_ratio", r"\lambda", "ratio", "Air ratio: oxygen that is there over oxygen needed"),
    Name("lower_heating_value", r"H_\mathrm{l}", "specific_energy", "Lower heating value at 25 °C: water as vapour"),
    Name("higher_heating_value", r"H_\mathrm{h}", "specific_energy", "Higher heating value at 25 °C: water as liquid"),
    Name("fuel_heat", r"\dot Q_\mathrm{fuel}", "heat_flow", "Heat of the fuel: flow times lower heating value"),
    Name("adiabatic_temperature", r"T_\mathrm{ad}", "temperature", "Temperature of the products without heat exchange"),
    Name("dew_point", r"T_\mathrm{dew}", "temperature", "Temperature at which water begins to condense"),
    Name("closure", r"\delta\dot S_\mathrm{gen}", "entropy_flow", "Sum of the parts minus the balance round the whole"),
    # processes of closed systems
    Name("work", "W", "energy", "Work", "positive out of the system"),
    Name("stirring_work", r"W_\mathrm{st}", "energy", "Work of stirring", "positive into the system"),
    Name("external_pressure", r"p_\mathrm{ext}", "pressure", "Pressure from outside, absolute"),
    Name("polytropic_index", "n", "ratio", "Exponent of a polytropic change"),
    Name("entropy_change", r"\Delta S", "entropy", "Change of entropy", "end less beginning"),
    Name("entropy_of_mixing", r"\Delta S_\mathrm{mix}", "entropy", "Entropy of mixing", "never negative"),
    Name("mole_fraction", "x", "ratio", "Mole fraction, of a species in a mixture"),
    Name("dry_mole_fraction", r"x_\mathrm{dry}", "ratio", "Mole fraction in the dry gas, of a species"),
    # vessels
    Name("supply_volume", r"V_\mathrm{sup}", "volume", "Volume of the vessel that supplies"),
    Name("back_pressure", r"p_\mathrm{b}", "pressure", "Pressure behind the outlet, absolute"),
    Name("final_pressure", "p_2", "pressure", "Final pressure of the content, absolute"),
    Name("specific_heat", "c", "specific_entropy", "Specific heat capacity of the metal"),
    Name("area", "A", "area", "Area of the wall in touch with the content"),
    Name("heat_transfer", r"\alpha", "heat_transfer_coefficient", "Heat transfer coefficient, wall to content"),
    Name("initial_temperature", "T_1", "temperature", "Initial temperature"),
    Name("diameter", r"d_\mathrm{o}", "length", "Diameter of the orifice"),
    Name("discharge_coefficient", r"C_\mathrm{d}", "ratio", "Discharge coefficient"),
    Name("initial_mass", "m_1", "mass", "Initial mass of the content"),
    Name("final_mass", "m_2", "mass", "Final mass of the content"),
    Name("mass_transferred", r"\Delta m", "mass", "Mass transferred: what left or entered", "never negative"),
    Name("initial_energy", "U_1", "energy", "Initial internal energy of the content"),
    Name("final_energy", "U_2", "energy", "Final internal energy of the content"),
    Name("enthalpy_with_mass", "H_m", "energy", "Enthalpy carried by mass", "positive into the vessel"),
    Name("initial_entropy", "S_1", "entropy", "Initial entropy of the content"),
    Name("final_entropy", "S_2", "entropy", "Final entropy of the content"),
    Name("entropy_with_mass", "S_m", "entropy", "Entropy carried by mass", "positive into the vessel"),
    Name("vessel_entropy_generation", r"S_\mathrm{gen,vessel}", "entropy", "Entropy generation in the content"),
    Name("valve_entropy_generation", r"S_\mathrm{gen,valve}", "entropy", "Entropy generation in the valve"),
    Name("wall_entropy_generation", r"S_\mathrm{gen,wall}", "entropy", "Entropy generation by heat of the wall"),
    Name("final_temperature", "T_2", "temperature", "Final temperature of the content"),
    Name("final_quality", "x_2", "ratio", "Final vapour mass fraction of the content"),
    Name("minimum_temperature", r"T_\mathrm{min}", "temperature", "Lowest temperature of the content"),
    Name("maximum_temperature", r"T_\mathrm{max}", "temperature", "Highest temperature of the content"),
    Name("final_wall_temperature", r"T_\mathrm{w,2}", "temperature", "Final temperature of the metal"),
    Name("minimum_wall_temperature", r"T_\mathrm{w,min}", "temperature", "Lowest temperature of the metal"),
    Name("followed_pressure", r"p_\mathrm{f}", "pressure", "Pressure to which the content was followed, absolute"),
    Name("followed_temperature", r"T_\mathrm{f}", "temperature", "Temperature to which the content was followed"),
    Name("supply_final_pressure", r"p_\mathrm{sup,2}", "pressure", "Final pressure of the supplying vessel, absolute"),
    Name("supply_final_temperature", r"T_\mathrm{sup,2}", "temperature", "Final temperature in the supplying vessel"),
    Name("duration", "t", "time", "Time to the end"),
    Name("maximum_mass_flow", r"\dot m_\mathrm{max}", "mass_flow", "Largest mass flow through the orifice"),
)

NAMES: dict[str, Name] = {entry.key: entry for entry in _ENTRIES}

_INTO_SYSTEM = "positive into the system"

#: What stands for a rate where equipment has it and for an amount where a process of a closed system has it.
AMOUNTS: dict[str, Name] = {
    entry.key: entry
    for entry in (
        Name("heat", "Q", "energy", "Heat", _INTO_SYSTEM),
        Name(
            "entropy_generation", r"S_\mathrm{gen}", "entropy", "Entropy generation", NAMES["entropy_generation"].sign
        ),
        Name("entropy_with_heat", "S_Q", "entropy", "Entropy carried by heat", _INTO_SYSTEM),
        Name("lost_work", r"W_\mathrm{lost}", "energy", NAMES["lost_work"].text, NAMES["lost_work"].sign),
        Name("energy_imbalance", r"\delta E", "energy", NAMES["energy_imbalance"].text, _LEFT),
        Name("mass_imbalance", r"\delta m", "mass", NAMES["mass_imbalance"].text, _LEFT),
        Name("closure", r"\delta S_\mathrm{gen}", "entropy", NAMES["closure"].text),
    )
}
#: Owners of amounts, by the first part of a path.
_OF_AMOUNTS = ("processes", "vessels", "closed")


def name_of(path: str, amounts: bool = False) -> Name | None:
    """Glossary entry of the last part of a path, or None when the path ends in no known name.

    ``amounts``: the path is a sum over processes although it does not say so, as ``total.heat`` may be.
    """
    parts = path.split(".")
    if amounts or parts[0] in _OF_AMOUNTS:
        return AMOUNTS.get(parts[-1]) or NAMES.get(parts[-1])
    return NAMES.get(parts[-1])


def symbol_of(path: str, amounts: bool = False) -> str:
    """LaTeX symbol of a value, with the state or the tag as its subscript; ``amounts`` as for ``name_of``.

    ``states.2.specific_entropy`` gives ``s_{\\mathrm{2}}``, ``equipment.CV.heat_ports.1.heat`` the heat over boundary 1
    of CV, ``\\dot Q_{\\mathrm{CV},1}``. A path that ends in no known name gives its own text.
    """
    parts = path.split(".")
    entry = name_of(path, amounts)
    if entry is None:
        return r"\mathrm{" + parts[-1].replace("_", r"\ ") + "}"
    if parts[0] == "surroundings":
        owner = ",".join(["0", *(r"\mathrm{" + part + "}" for part in parts[1:-1])])
    elif parts[0] in ("total", "closed"):
        owner = rf"\mathrm{{{parts[0]}}}"
    elif len(parts) > 3 and parts[-3] == "species":
        owner = r"\mathrm{" + ".".join(parts[1:-3]) + r"},\mathrm{" + parts[-2] + "}"
    elif len(parts) > 3 and parts[-3] in ("heat_ports", "streams"):
        owner = r"\mathrm{" + ".".join(parts[1:-3]) + "}," + parts[-2]
    else:
        owner = r"\mathrm{" + ".".join(parts[1:-1]) + "}"
    base, _, inner = entry.symbol.partition("_")
    if inner:
        return f"{base}_{{{inner.strip('{}') if inner.startswith('{') else inner},{owner}}}"
    return f"{base}_{{{owner}}}"

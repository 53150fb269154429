"""The isentropic change that machines, nozzles and diffusers are compared with."""

from __future__ import annotations

from typing import Any

from reportgen.balances.composition import for_composition
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Formula, Inverse, token

__all__ = ["isentropic_change"]

_BEYOND = "the isentropic outlet state lies outside the range of the fluid's equation"


def isentropic_change(piece: Piece) -> Formula:
    """h_s = h(p_2, s_1) [J/kg], the enthalpy that a piece with one inlet and one outlet would reach reversibly."""
    return for_composition([piece.fluid(piece.one("inlet"))], lambda fluid: _isentropic_change(piece, fluid))


def _isentropic_change(piece: Piece, fluid: Any) -> Formula:
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    pressure, entropy = f"states.{outlet}.pressure", f"states.{inlet}.specific_entropy"

    def enthalpy(outlet_pressure: Any, inlet_entropy: Any) -> Any:
        state = fluid.at(pressure=outlet_pressure, specific_entropy=inlet_entropy, errors="mask")
        return state.specific_enthalpy

    def inlet_entropy(outlet_pressure: Any, ideal: Any) -> Any:
        state = fluid.at(pressure=outlet_pressure, specific_enthalpy=ideal, errors="mask")
        return state.specific_entropy

    ideal = piece.path("isentropic_outlet_enthalpy")
    turned = Inverse(
        inlet_entropy,
        rf"s\left({token(pressure)},\,{token(ideal)}\right)",
        f"{piece.title}: the isentropic change ends with the entropy with which it began.",
    )
    return Formula(
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
        {entropy: turned},
        fluids=(piece.fluid_id(inlet),),
        reason=_BEYOND,
        explain=lambda outlet_pressure, inlet_entropy, *_: _beyond(fluid, outlet_pressure, inlet_entropy),
    )


def _beyond(fluid: Any, pressure: float, entropy: float) -> str:
    """Which limit of the model an isentropic change passes, and about how far, T ≈ T_limit exp((s − s_limit)/c_p)."""
    import numpy as np

    limits = fluid.limits
    if pressure > limits.maximum_pressure:
        return (
            f"{_BEYOND}, whose maximum is {limits.maximum_pressure / 1e5:g} bar; {pressure / 1e5:g} bar are asked for"
        )
    for edge, side, sign in (
        (limits.minimum_temperature, "minimum", -1.0),
        (limits.maximum_temperature, "maximum", 1.0),
    ):
        state = fluid.at(pressure=pressure, temperature=edge, errors="mask")
        change = (entropy - float(state.specific_entropy)) / float(state.isobaric_heat_capacity)
        if np.isfinite(change) and sign * change > 0.0:
            reached = edge * np.exp(change)
            cure = '; a real fluid (model = "real-fluid") may reach further' if fluid.kind == "ideal-gas" else ""
            return (
                f"{_BEYOND}: at {pressure / 1e5:g} bar it would be at about {_in_words(reached)}, and the {side} of "
                f"{fluid.title} is {_in_words(edge)}{cure}"
            )
    return _BEYOND


def _in_words(temperature: float) -> str:
    return f"{temperature:.5g} K ({temperature - 273.15:.1f} °C)".replace("-", "−")

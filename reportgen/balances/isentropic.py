"""The isentropic change that machines, nozzles and diffusers are compared with."""

from __future__ import annotations

from typing import Any

from reportgen.balances.composition import for_composition
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Formula, Inverse, token

__all__ = ["isentropic_change"]


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
        reason="the isentropic outlet state lies outside the range of the fluid's equation",
    )

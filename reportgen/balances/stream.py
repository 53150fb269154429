"""One stream that enters and leaves once, without work: its energy, and what is kept where no heat is exchanged."""

from __future__ import annotations

from reportgen.balances.equations import adiabatic, elevated_enthalpy, energy_balance, heat_sum
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Default, Relation

__all__ = ["kept_energy", "stream_energy"]


def stream_energy(piece: Piece) -> list[Relation]:
    """The first law, and the sum of the heats where there are several."""
    return [energy_balance(piece), *heat_sum(piece)]


def kept_energy(piece: Piece) -> list[Default]:
    """No heat: then h + V²/2 + g z is kept, whatever the flow."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    energy = energy_balance(piece)
    terms = elevated_enthalpy(piece, outlet, None) + elevated_enthalpy(piece, inlet, None, -1.0)
    kept = "the enthalpy is kept" if len(terms) == 2 else "the sum of enthalpy, kinetic and potential energy is kept"
    sentence = f"{piece.title} exchanges neither heat nor work; {kept}."
    balance = Balance(energy.key, piece.owner, energy.name, sentence, energy.basis, tuple(terms))
    return adiabatic(piece, energy, balance)

"""Combustors for the record: how the streams enter, figures of the fire, composition of the products."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from reportgen.balances import burning
from reportgen.evaluation.evaluated import EvaluatedPlant

if TYPE_CHECKING:
    from reportgen.balances import Solution
    from reportgen.balances.plant import Piece

__all__ = ["COMBUSTION_FIGURES", "combustion_section"]

#: Figures of a combustor, in the order in which they are shown.
COMBUSTION_FIGURES = (
    "excess_air",
    "air_ratio",
    "lower_heating_value",
    "higher_heating_value",
    "fuel_heat",
    "adiabatic_temperature",
    "dew_point",
)


def combustion_section(plant: EvaluatedPlant, solution: Solution) -> dict[str, Any]:
    """Tag of a combustor to its entry.

    ``entering`` says whether fuel and oxygen are mixed before they enter. ``species`` hold the paths of the mole
    fractions at the outlet, those of the wet and of the dry gas (None for water itself), largest first.
    """
    section = {}
    for tag, piece in solution.pieces.items():
        if not piece.kind.burns:
            continue
        outlet = piece.one("outlet")
        paths = [path for path in plant.values if path.startswith(f"{piece.owner}.species.")]
        wet = [path for path in paths if path.endswith(".mole_fraction") and plant.samples(path)[0] > burning.TRACE]
        wet.sort(key=lambda path: -float(plant.samples(path)[0]))
        section[tag] = {
            "outlet": outlet,
            "chemistry": piece.fluid(outlet).chemistry,
            "entering": entering(piece),
            "smallest": burning.TRACE,
            "figures": [path for name in COMBUSTION_FIGURES if (path := piece.path(name)) in plant.values],
            "species": [
                {
                    "species": path.split(".")[-2],
                    "wet": path,
                    "dry": dry if (dry := _dry(path)) in plant.values else None,
                }
                for path in wet
            ],
        }
    return section


def _dry(path: str) -> str:
    return path.removesuffix(".mole_fraction") + ".dry_mole_fraction"


def entering(piece: Piece) -> str:
    """Whether fuel and oxygen enter apart or mixed, in words."""
    known = burning.contents(piece)
    mixed = [state for state, each in known.items() if each.needed and each.free]
    fuels = [state for state, each in known.items() if each.needed and not each.free]
    airs = [state for state, each in known.items() if each.free and not each.needed]
    sentences = []
    if mixed:
        sentences.append(
            f"Premixed: state {', '.join(mixed)} holds fuel and oxygen before it enters; the entropy of that mixing is "
            "not generated here."
        )
    if fuels and airs:
        sentences.append(
            f"Not premixed: fuel (state {', '.join(fuels)}) and oxidant (state {', '.join(airs)}) enter apart; the "
            "entropy of their mixing is part of what is generated."
        )
    return " ".join(sentences) or "No stream of known composition burns here."

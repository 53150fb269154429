"""Data of the figures along exchangers: both temperatures over the duty, the pinch, and the places that matter."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.evaluation.evaluated import EvaluatedPlant

if TYPE_CHECKING:
    from reportgen.balances import Solution
    from reportgen.balances.profiles import Along

__all__ = ["exchanger_figures"]

#: What happens where the hot, then the cold stream meets the liquid and the vapour line.
_CORNERS = (
    "hot stream all condensed",
    "hot stream begins to condense",
    "cold stream begins to boil",
    "cold stream all boiled",
)
_CAPTION = (
    "Temperatures of both streams against the duty exchanged up to there, in {way}; enthalpy and pressure of each "
    "stream change evenly with it."
)
#: Places closer than this share of the duty are one.
_SAME_PLACE = 1e-6


def exchanger_figures(plant: EvaluatedPlant, solution: Solution) -> list[dict[str, Any]]:
    """One figure for each exchange of heat between two streams whose temperatures are known all the way.

    Temperatures [K] and duties [W] as lists; ``pinch`` with its place and the path of its value; ``rows`` for a table:
    ends, begin and end of changes of phase, pinch.
    """
    figures = []
    for tag, profile in solution.profiles().items():
        piece = solution.pieces[tag]
        duty = float(plant.samples(f"equipment.{tag}.duty")[0])
        curves = np.array([profile.share[:, 0], profile.hot[:, 0], profile.cold[:, 0]])
        if not (np.isfinite(curves).all() and np.isfinite([duty, profile.pinch[0]]).all()) or duty == 0.0:
            continue
        parallel = piece.choice("arrangement") == "parallel-flow"
        ends = {side: (piece.one(f"{side}_inlet"), piece.one(f"{side}_outlet")) for side in ("hot", "cold")}
        figures.append(
            {
                "id": f"exchanger-profile-{tag}",
                "kind": "exchanger-profile",
                "equipment": tag,
                "title": f"Temperatures along {tag}",
                "caption": _CAPTION.format(way="parallel flow" if parallel else "counterflow"),
                "arrangement": "parallel-flow" if parallel else "counterflow",
                "duty": (duty * curves[0]).tolist(),
                "hot": curves[1].tolist(),
                "cold": curves[2].tolist(),
                "ends": {side: {"inlet": states[0], "outlet": states[1]} for side, states in ends.items()},
                "pinch": {
                    "path": f"equipment.{tag}.pinch",
                    "duty": duty * float(profile.place[0]),
                    "hot": _between(profile, profile.hot, float(profile.place[0])),
                    "cold": _between(profile, profile.cold, float(profile.place[0])),
                },
                "rows": _rows(profile, duty, parallel),
            }
        )
    return figures


def _between(profile: Along, curve: Any, share: float) -> float:
    """Temperature [K] of a curve at a share of the duty, which is one of its points."""
    return float(np.interp(share, profile.share[:, 0], curve[:, 0]))


def _rows(profile: Along, duty: float, parallel: bool) -> list[dict[str, Any]]:
    first, last = ("inlets", "outlets") if parallel else ("cold end", "hot end")
    places = [(0.0, first), (1.0, last), (float(profile.place[0]), "pinch")]
    places += [
        (float(share), words)
        for share, words in zip(profile.corners[:, 0], _CORNERS, strict=True)
        if np.isfinite(share)
    ]
    rows: list[dict[str, Any]] = []
    for share, words in sorted(places, key=lambda place: place[0]):
        if rows and abs(share - rows[-1]["share"]) <= _SAME_PLACE:
            rows[-1]["place"] += f", {words}"
            continue
        hot, cold = (_between(profile, curve, share) for curve in (profile.hot, profile.cold))
        rows.append(
            {"place": words, "share": share, "duty": duty * share, "hot": hot, "cold": cold, "difference": hot - cold}
        )
    return rows

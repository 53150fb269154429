"""Combustors: how fuel and oxygen enter, figures of the fire, the composition of the products wet and dry."""

from __future__ import annotations

from typing import Any

from reportgen.report.presenter import NO_VALUE, Presenter, in_order

__all__ = ["combustion"]

_SUBSCRIPTS = str.maketrans("0123456789", "₀₁₂₃₄₅₆₇₈₉")
_CHEMISTRY = {
    "complete": "Complete combustion: the products are CO₂, H₂O, SO₂, HCl, N₂ and the oxygen left; no dissociation, no "
    "nitrogen oxides.",
    "equilibrium": "Chemical equilibrium: the composition of least Gibbs energy at the temperature and pressure of the "
    "outlet.",
}


def combustion(presenter: Presenter) -> dict[str, Any] | None:
    """One entry for each combustor, in the order of the file; None where the record has none."""
    entries = presenter.record.data["combustion"]
    pieces = [tag for tag, _ in in_order(presenter.record.data["plant"]["equipment"]) if tag in entries]
    return {"combustors": [_combustor(tag, entries[tag], presenter) for tag in pieces]} if pieces else None


def _combustor(tag: str, entry: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    paths = [*entry["figures"], *(item["wet"] for item in entry["species"])]
    return {
        "title": presenter.owner_title(f"equipment.{tag}"),
        "words": f"{entry['entering']} {_CHEMISTRY[entry['chemistry']]}",
        "outlet": entry["outlet"],
        "figures": [
            {
                "label": presenter.meaning(path),
                "number": presenter.number(path),
                "uncertainty": presenter.plus_minus(path) or NO_VALUE,
                "reason": (presenter.record.entry(path) or {}).get("reason"),
            }
            for path in entry["figures"]
        ],
        "uncertain": any(presenter.plus_minus(path) for path in paths),
        "species": [
            {
                "name": item["species"].translate(_SUBSCRIPTS),
                "wet": presenter.number(item["wet"]),
                "dry": presenter.number(item["dry"]) if item["dry"] else NO_VALUE,
            }
            for item in entry["species"]
        ],
        "remark": f"Mole fractions below {entry['smallest'] * 1e6:g} in a million are not listed. Exergies of this "
        "report are physical, without chemical exergy: no exergetic efficiency is given for a combustor.",
    }

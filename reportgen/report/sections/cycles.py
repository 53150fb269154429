"""Cycles: their figures, and the heat they exchange with each reservoir."""

from __future__ import annotations

from typing import Any

from reportgen.report.presenter import NO_VALUE, Presenter

__all__ = ["cycles"]

_PURPOSES = {"power": "delivers power", "cooling": "cools", "heating": "heats"}


def cycles(presenter: Presenter) -> dict[str, Any] | None:
    """One entry for each cycle, trains first; None where the record has none."""
    entries = presenter.record.data["cycles"]
    found = [
        _cycle(owner, entry, presenter) for owner, entry in sorted(entries.items(), key=lambda item: item[0] == "total")
    ]
    return {"cycles": found} if found else None


def _cycle(owner: str, entry: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    return {
        "owner": presenter.owner_title(owner),
        "title": entry["title"],
        "words": f"{'A closed cycle' if entry['closed'] else 'An open process'} that {_PURPOSES[entry['purpose']]}.",
        "figures": [
            {
                "label": presenter.meaning(path),
                "number": presenter.number(path),
                "uncertainty": presenter.plus_minus(path) or NO_VALUE,
                "reason": (presenter.record.entry(path) or {}).get("reason"),
            }
            for path in entry["figures"]
        ],
        "uncertain": any(presenter.plus_minus(path) for path in entry["figures"]),
        "reservoirs": [_reservoir(reservoir, presenter) for reservoir in entry["reservoirs"]],
        "powers": [_power(power, presenter) for power in entry["powers"]],
        "unit": presenter.display.unit_text("power"),
        "imbalance": None
        if entry["imbalance"] is None
        else presenter.residual(entry["imbalance"], _scale(entry), "power"),
    }


def _scale(entry: dict[str, Any]) -> float:
    return float(sum(abs(item["value"] or 0.0) for item in (*entry["reservoirs"], *entry["powers"])))


def _reservoir(reservoir: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    """The heat into the cycle; where it leaves, with a minus sign."""
    temperature = reservoir["temperature_path"]
    return {
        "label": reservoir["label"],
        "temperature": presenter.number(temperature) if temperature else NO_VALUE,
        "number": presenter.link(reservoir["path"], _amount(reservoir, presenter)),
    }


def _power(power: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    """The power out of the cycle as what enters with it: delivered power leaves."""
    return {
        "label": f"{presenter.owner(power['path'])}, power {'delivered' if power['sign'] > 0 else 'absorbed'}",
        "number": presenter.link(power["path"], _amount({**power, "sign": -power["sign"]}, presenter)),
    }


def _amount(item: dict[str, Any], presenter: Presenter) -> str:
    """A heat or power as it enters the cycle, with the digits of its own value."""
    entry = presenter.record.entry(item["path"])
    if entry is None or entry["value"] is None:
        return NO_VALUE
    value = item["sign"] * entry["value"]
    return presenter.show(value, entry["dimension"], presenter.record.expanded_uncertainty(item["path"])).number

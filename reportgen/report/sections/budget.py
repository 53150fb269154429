"""Uncertainty budget: what each input contributes to the uncertainty of each key result."""

from __future__ import annotations

from typing import Any

from reportgen.report.presenter import NO_VALUE, Presenter, significant

__all__ = ["uncertainty_budget"]

_AMBIENT = "surroundings.temperature"
#: Part of the variance below which several inputs share one row.
_SMALL = 1e-3
#: Relative difference of contributions that agree but for rounding.
_ROUNDING = 1e-6


def uncertainty_budget(presenter: Presenter) -> dict[str, Any] | None:
    """One budget a result, headline results first: contributions, the combined uncertainty, what is left out."""
    budgets = presenter.record.data["uncertainty_budget"]
    order = [path for path in presenter.record.data["summary"] if path in budgets]
    paths = [*order, *sorted(set(budgets) - set(order))]
    found = [_budget(path, budgets, presenter) for path in paths]
    if not found:
        return None
    usual = {(budget["effective_degrees_of_freedom"], budget["coverage_probability"]) for budget in budgets.values()}
    return {"budgets": found, "common": _coverage(*usual.pop()) if len(usual) == 1 else None}


def _budget(path: str, budgets: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    budget = budgets[path]
    entry = presenter.record.values[path]
    dimension = presenter.difference_dimension(entry["dimension"])
    left_out = max(
        (abs(row["curvature"]) for row in budget["contributions"] if row["curvature"] is not None), default=0.0
    )
    small = [row for row in budget["contributions"] if row["share"] is not None and abs(row["share"]) < _SMALL]
    if len(small) == 1:
        small = []  # its name takes no more room than a count
    large = [row for row in budget["contributions"] if row not in small]
    repeated = _is_repeated(path, budgets, presenter)
    return {
        "label": presenter.label(path),
        "number": presenter.number(path, uncertainty=True),
        "unit": presenter.display.unit_text(dimension),
        "times": presenter.symbol_link(_AMBIENT) if repeated else None,
        "rows": [] if repeated else [_row(row, dimension, presenter) for row in large],
        "further": len(small),
        "further_share": _percent(sum(row["share"] for row in small)),
        "combined": presenter.rough(budget["standard_uncertainty"], dimension, 3, unit=False),
        "expanded": presenter.difference(budget["expanded_uncertainty"], dimension, budget["expanded_uncertainty"]),
        "coverage": _coverage(budget["effective_degrees_of_freedom"], budget["coverage_probability"]),
        "left_out": presenter.difference(left_out, dimension, left_out) if left_out else None,
    }


def _percent(share: float | None) -> str:
    """A part in per cent: one decimal place, small ones to one digit."""
    if share is None:
        return NO_VALUE
    return f"{100.0 * share:{'.1f' if abs(share) >= _SMALL else '.1g'}}".replace("-", "−")


def _coverage(freedom: float | None, probability: float | None) -> str:
    text = f"effective degrees of freedom {'infinite' if freedom is None else f'{freedom:.3g}'}"
    return text if probability is None else f"{text}, coverage probability {100.0 * probability:.3g}\N{NO-BREAK SPACE}%"


def _is_repeated(path: str, budgets: dict[str, Any], presenter: Presenter) -> bool:
    """Whether a lost work has the budget of the entropy generation, times a certain temperature of the surroundings."""
    owner, _, name = path.rpartition(".")
    source = budgets.get(f"{owner}.entropy_generation")
    ambient = presenter.record.entry(_AMBIENT)
    if name != "lost_work" or source is None or ambient is None or ambient["standard_uncertainty"]:
        return False
    scaled = {row["input"]: ambient["value"] * row["contribution"] for row in source["contributions"]}
    found = {row["input"]: row["contribution"] for row in budgets[path]["contributions"]}
    room = _ROUNDING * budgets[path]["standard_uncertainty"]
    return all(abs(scaled.get(key, 0.0) - found.get(key, 0.0)) <= room for key in {*scaled, *found})


def _row(row: dict[str, Any], dimension: str, presenter: Presenter) -> dict[str, Any]:
    """Contribution in the unit of the result; sensitivity in units of the result per unit of the input."""
    path = row["input"]
    entry = presenter.record.entry(path)
    given = presenter.difference_dimension(entry["dimension"] if entry else "ratio")
    unit, given_unit = presenter.display.unit_text(dimension), presenter.display.unit_text(given)
    step = presenter.display.convert(row["standard_uncertainty"], given)
    sensitivity = presenter.display.convert(row["contribution"], dimension) / step if step else float("nan")
    return {
        "link": presenter.symbol_link(path),
        "label": presenter.label(path),
        "standard": presenter.rough(row["standard_uncertainty"], given, 3),
        "sensitivity": presenter.show(significant(sensitivity, 3), "ratio").number,
        "sensitivity_unit": f"{unit or '1'} per {given_unit or '1'}",
        "contribution": presenter.rough(row["contribution"], dimension, 3, unit=False),
        "share": _percent(row["share"]),
    }

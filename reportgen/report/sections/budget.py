"""Uncertainty budget: what each input contributes to the uncertainty of each key result."""

from __future__ import annotations

from typing import Any

from reportgen.report.presenter import NO_VALUE, Presenter, significant

__all__ = ["uncertainty_budget"]


def uncertainty_budget(presenter: Presenter) -> dict[str, Any] | None:
    """One budget a result, headline results first: contributions, the combined uncertainty, what is left out."""
    budgets = presenter.record.data["uncertainty_budget"]
    order = [path for path in presenter.record.data["summary"] if path in budgets]
    paths = [*order, *sorted(set(budgets) - set(order))]
    found = [_budget(path, budgets[path], presenter) for path in paths]
    return {"budgets": found} if found else None


def _budget(path: str, budget: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    entry = presenter.record.values[path]
    dimension = presenter.difference_dimension(entry["dimension"])
    freedom, probability = budget["effective_degrees_of_freedom"], budget["coverage_probability"]
    left_out = max(
        (abs(row["curvature"]) for row in budget["contributions"] if row["curvature"] is not None), default=0.0
    )
    return {
        "label": presenter.label(path),
        "number": presenter.number(path, uncertainty=True),
        "unit": presenter.display.unit_text(dimension),
        "rows": [_row(row, dimension, presenter) for row in budget["contributions"]],
        "combined": presenter.show(significant(budget["standard_uncertainty"], 3), dimension).number,
        "expanded": presenter.difference(budget["expanded_uncertainty"], dimension, budget["expanded_uncertainty"]),
        "freedom": "infinite" if freedom is None else f"{freedom:.3g}",
        "probability": None if probability is None else f"{100.0 * probability:.3g}\N{NO-BREAK SPACE}%",
        "left_out": presenter.difference(left_out, dimension, left_out) if left_out else None,
    }


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
        "standard": presenter.with_unit(significant(row["standard_uncertainty"], 3), given),
        "sensitivity": presenter.show(significant(sensitivity, 3), "ratio").number,
        "sensitivity_unit": f"{unit or '1'} per {given_unit or '1'}",
        "contribution": presenter.show(significant(row["contribution"], 3), dimension).number,
        "share": f"{100.0 * row['share']:.1f}".replace("-", "−") if row["share"] is not None else NO_VALUE,
    }

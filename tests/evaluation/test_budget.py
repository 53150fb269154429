"""The uncertainty budget of a result."""

from __future__ import annotations

import pytest
from handmade_plants import plant, samples

from reportgen.evaluation.budget import budget, budgets


def test_rows_are_sorted_by_weight_and_shares_sum_to_one() -> None:
    case = plant({"equipment.M.power": samples(100.0, 3.0, -4.0, 0.0)}, inputs=3)
    entry = budget(case, "equipment.M.power")
    assert entry is not None
    assert entry["standard_uncertainty"] == pytest.approx(5.0)
    assert entry["expanded_uncertainty"] == pytest.approx(10.0)
    assert [row["input"] for row in entry["contributions"]] == ["input.1", "input.0"]
    assert [row["contribution"] for row in entry["contributions"]] == pytest.approx([-4.0, 3.0])
    assert sum(row["share"] for row in entry["contributions"]) == pytest.approx(1.0)
    assert entry["effective_degrees_of_freedom"] is None
    assert entry["coverage_probability"] == pytest.approx(0.9545, abs=1e-4)


def test_results_without_uncertainty_have_no_budget() -> None:
    case = plant({"equipment.M.power": 100.0, "equipment.M.heat": samples(1.0, 0.5)}, inputs=1)
    assert list(budgets(case, ["equipment.M.power", "equipment.M.heat", "equipment.M.lost_work"])) == [
        "equipment.M.heat"
    ]

"""Assumption tests: comparing, weighing, ordering."""

from __future__ import annotations

import math
from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest
from handmade_plants import fluid, plant, samples

from reportgen.errors import SolutionError
from reportgen.evaluation.assumptions import (
    AutomaticAssumption,
    assumption_list,
    boundary_temperature_test,
    stream_assumption,
)
from reportgen.evaluation.fluid_assumptions import fluid_assumptions
from reportgen.evaluation.trials import Trial
from reportgen.quantities import Display
from reportgen.spec.calculation import FluidSpec


def machine(**values: object) -> dict[str, object]:
    return {f"equipment.M.{name}": value for name, value in values.items()}


def no_solution(fluids: object, givens: object) -> dict[str, float]:
    raise SolutionError("No convergence.")


def test_the_change_that_weighs_most_is_shown() -> None:
    case = plant(machine(entropy_generation=samples(10.0, 1.0), power=samples(500.0, 2.0)), inputs=1)
    result = Trial(case, no_solution).compare(machine(entropy_generation=10.5, power=506.0), "With something else")
    assert result is not None
    assert (result["path"], result["verdict"]) == ("equipment.M.power", "decisive")
    assert (result["model_value"], result["other_value"], result["difference"]) == (500.0, 506.0, 6.0)
    assert (result["unit"], result["dimension"]) == ("W", "power")
    assert result["finding"].startswith("With something else a result changes decisively")
    assert [entry["verdict"] for entry in result["results"]] == ["negligible", "decisive"]


@pytest.mark.parametrize(("changed", "verdict"), [(10.6, "negligible"), (11.0, "noticeable"), (12.1, "decisive")])
def test_verdict_by_expanded_uncertainty(changed: float, verdict: str) -> None:
    case = plant(machine(entropy_generation=samples(10.0, 1.0)), inputs=1)
    result = Trial(case, no_solution).compare(machine(entropy_generation=changed), "x")
    assert result is not None
    assert result["verdict"] == verdict


@pytest.mark.parametrize(("limit", "verdict"), [(104.0, "negligible"), (102.1, "decisive")])
def test_a_difference_that_turns_a_criterion_is_decisive(limit: float, verdict: str) -> None:
    """100 ± 2 against at most 102.1 is met; 100.3 would not be decided. Against 104 both are met."""
    case = plant(machine(power=samples(100.0, 1.0)), inputs=1)
    criterion = {
        "id": "C7",
        "path": "equipment.M.power",
        "comparison": "at_most",
        "limit": limit,
        "expanded_uncertainty": 2.0,
        "decision": "met",
    }
    result = Trial(case, no_solution, [criterion]).compare(machine(power=100.3), "x")
    assert result is not None
    assert result["verdict"] == verdict
    assert ("Criterion C7 would be not decided instead of met." in result["finding"]) == (verdict == "decisive")


def test_what_a_solver_leaves_is_no_change() -> None:
    case = plant(machine(entropy_generation=10.0))
    result = Trial(case, no_solution).compare(machine(entropy_generation=10.0 * (1 + 1e-12)), "x")
    assert result is not None
    assert result["difference"] == 0.0


def test_nothing_to_compare() -> None:
    assert Trial(plant(machine(heat=3.0)), no_solution).compare(machine(heat=4.0), "x") is None
    assert Trial(plant(machine(power=3.0)), no_solution).compare(machine(power=math.nan), "x") is None


def gas_case(values: dict, heat_capacity: float | None = None, solve: object = None) -> list[AutomaticAssumption]:
    counterpart = SimpleNamespace(
        entropy_zero_name="published:air",
        at=lambda pressure, temperature, errors: SimpleNamespace(compressibility_factor=np.full_like(pressure, 0.97)),
    )
    case = plant({"states.1.temperature": 300.0, "states.1.pressure": 5e5, **values}, fluids={"f": fluid("Air")})
    specification = FluidSpec("f", "ideal-gas", 1, heat_capacity=heat_capacity)
    return fluid_assumptions(
        Trial(case, solve or (lambda fluids, givens: machine(power=103.0))),
        {"f": specification},
        lambda model: counterpart,
        lambda specification: counterpart,
    )


def test_ideal_gas_against_the_real_fluid() -> None:
    found = gas_case(machine(power=100.0))
    assert [assumption.id for assumption in found] == ["fluids.f.ideal-gas"]
    test = found[0].test
    assert test is not None
    assert test["verdict"] == "decisive"
    assert "|Z − 1| up to 0.03, beyond the 0.02" in test["finding"]


def test_constant_heat_capacity_is_an_assumption_of_its_own() -> None:
    found = gas_case(machine(power=100.0), heat_capacity=1005.0)
    assert [assumption.id for assumption in found] == ["fluids.f.ideal-gas", "fluids.f.constant-heat-capacity"]
    assert "1005 J/(kg K)" in found[1].text


def test_a_variant_without_solution_is_told_not_hidden() -> None:
    test = gas_case(machine(power=100.0), solve=no_solution)[0].test
    assert test is not None
    assert test["verdict"] is None
    assert "Could not be tested" in test["finding"]
    assert "No convergence." in test["finding"]


def tried_boundary(
    kind: str, generated: float, **more: float
) -> tuple[list[dict[str, float]], dict[str, object] | None]:
    asked: list[dict[str, float]] = []

    def solve(fluids: object, givens: dict[str, float]) -> dict[str, float]:
        asked.append(givens)
        return machine(entropy_generation=generated)

    states = {"states.1.temperature": 300.0, "states.2.temperature": 400.0}
    case = plant(
        {
            **states,
            **{path.replace("_", ".", 2): value for path, value in more.items()},
            **machine(entropy_generation=10.0),
        },
        kinds={"M": kind},
        connections={"M": [("inlet", "in", "1"), ("outlet", "out", "2")]},
        power_signs={"M": 1 if kind == "compressor" else 0},
    )
    trial = Trial(case, solve)
    return asked, boundary_temperature_test(trial, "M", "equipment.M.boundary_temperature", Display("SI"))


def test_boundary_temperature_is_tried_at_the_mean_of_the_fluid() -> None:
    asked, test = tried_boundary("compressor", 8.0)
    assert asked == [{"equipment.M.boundary_temperature": 350.0}]
    assert test is not None
    assert (test["difference"], test["verdict"]) == (-2.0, "decisive")
    assert "76.85 °C" in str(test["finding"])


ENTHALPIES = {"states_1_specific_enthalpy": 0.0, "states_2_specific_enthalpy": 1005.0 * 100.0}


def test_heat_at_changing_temperature_leaves_at_the_entropic_mean() -> None:
    """T = Δh/Δs = (T2 − T1)/ln(T2/T1) for a gas of constant heat capacity at constant pressure."""
    change = 1005.0 * math.log(400.0 / 300.0)
    asked, _ = tried_boundary(
        "cooler", 8.0, **ENTHALPIES, states_1_specific_entropy=0.0, states_2_specific_entropy=change
    )
    assert asked[0]["equipment.M.boundary_temperature"] == pytest.approx(100.0 / math.log(400.0 / 300.0))
    outside = {"states_1_specific_entropy": 0.0, "states_2_specific_entropy": 0.7 * change}
    asked, _ = tried_boundary("cooler", 8.0, **ENTHALPIES, **outside)
    assert asked == [{"equipment.M.boundary_temperature": 350.0}]


def test_a_boundary_that_would_destroy_entropy_is_told_to_be_none() -> None:
    _, test = tried_boundary("compressor", -0.5)
    assert test is not None
    assert test["verdict"] is None
    assert "would have M destroy entropy" in str(test["finding"])


def author(status: str) -> SimpleNamespace:
    return SimpleNamespace(text="t", basis="b", status=status, owner=None, due=None)


def test_open_assumptions_come_first() -> None:
    def automatic(identifier: str, verdict: str | None) -> AutomaticAssumption:
        return AutomaticAssumption(identifier, "t", "b", (), None if verdict is None else {"verdict": verdict})

    entries = assumption_list(
        {"A1": author("accepted"), "A2": author("to be verified")},
        [automatic("x", None), automatic("y", "decisive"), automatic("z", "negligible")],
    )
    assert [(entry["id"], entry["status"]) for entry in entries] == [
        ("A2", "to be verified"),
        ("y", "to be verified"),
        ("A1", "accepted"),
        ("x", "by default"),
        ("z", "tested"),
    ]


def stream(**values: object) -> dict[str, object]:
    return {f"states.1.{name}": value for name, value in values.items()}


def test_streams_without_velocity_say_up_to_which_one_it_is_negligible() -> None:
    """U(h) = 2 · 300 J/kg: a third of it is V²/2 at 20 m/s."""
    found = stream_assumption(plant(stream(mass_flow=1.0, specific_enthalpy=samples(3e6, 300.0)), inputs=1))
    assert found is not None
    assert "up to 20 m/s (state 1)" in found.basis
    exact = stream_assumption(plant(stream(mass_flow=1.0, specific_enthalpy=3e6)))
    assert exact is not None
    assert "m/s" not in exact.basis
    assert stream_assumption(plant(stream(specific_enthalpy=3e6))) is None


def test_a_state_whose_phase_is_not_resolved_claims_no_velocity() -> None:
    phases = {"states.1.phase": np.array(["vapour", "vapour", "liquid"])}
    enthalpy = stream(mass_flow=1.0, specific_enthalpy=samples(2e6, 7e5))
    case = plant(enthalpy, inputs=1)
    apart = replace(case, values={**case.values, **phases})
    found, unresolved = stream_assumption(case), stream_assumption(apart)
    assert found is not None
    assert unresolved is not None
    assert "up to 970 m/s" in found.basis
    assert "m/s" not in unresolved.basis

"""Every kind in every direction: solve forward, then give a result and ask for what was given."""

from __future__ import annotations

import numpy as np
import pytest

from reportgen.balances import kinds
from tests.balances.cases import CASES, long

#: (kind, givens left out, results given in their place)
DIRECTIONS = [
    # efficiency from the measured outlet, outlet pressure from power, flow from power, inlet from outlet
    ("compressor", "isentropic_efficiency", "2.temperature"),
    ("compressor", "isentropic_efficiency", "power"),
    ("compressor", "isentropic_efficiency", "polytropic_efficiency"),
    ("compressor", "2.pressure", "power"),
    ("compressor", "2.pressure", "2.temperature"),
    ("compressor", "2.pressure", "pressure_ratio"),
    ("compressor", "1.mass_flow", "power"),
    ("compressor", "1.mass_flow", "2.mass_flow"),
    ("compressor", "1.temperature", "2.temperature"),
    ("compressor", "1.pressure", "pressure_ratio"),
    ("compressor", "1.pressure", "2.temperature"),
    ("compressor", "isentropic_efficiency 1.mass_flow", "2.temperature power"),
    ("turbine", "isentropic_efficiency", "2.temperature"),
    ("turbine", "isentropic_efficiency", "power"),
    ("turbine", "isentropic_efficiency", "polytropic_efficiency"),
    ("turbine", "2.pressure", "power"),
    ("turbine", "2.pressure", "2.temperature"),
    ("turbine", "1.mass_flow", "power"),
    ("turbine", "1.temperature", "2.temperature"),
    ("turbine", "1.pressure", "pressure_ratio"),
    ("pump", "isentropic_efficiency", "2.temperature"),
    ("pump", "2.pressure", "power"),
    ("pump", "1.mass_flow", "power"),
    ("throttling-valve", "2.pressure", "pressure_drop"),
    ("throttling-valve", "1.temperature", "2.temperature"),
    ("throttling-valve", "1.mass_flow", "2.mass_flow"),
    ("heater", "heat", "2.temperature"),
    ("heater", "1.mass_flow", "2.temperature"),
    ("heater", "1.temperature", "2.temperature"),
    ("heater", "pressure_drop", "2.pressure"),
    ("cooler", "heat", "2.temperature"),
    ("cooler", "1.mass_flow", "2.temperature"),
    ("cooler", "1.temperature", "2.temperature"),
    ("cooler", "1.pressure", "2.pressure"),
    ("heat-exchanger", "2.temperature", "4.temperature"),
    ("heat-exchanger", "2.temperature", "duty"),
    ("heat-exchanger", "1.mass_flow", "4.temperature"),
    ("heat-exchanger", "3.mass_flow", "4.temperature"),
    ("heat-exchanger", "1.temperature", "4.temperature"),
    ("heat-exchanger", "3.temperature", "4.temperature"),
    ("heat-exchanger", "heat", "4.temperature"),
    ("heat-exchanger", "hot_pressure_drop", "2.pressure"),
    ("heat-exchanger", "3.pressure", "4.pressure"),
    ("mixer", "2.mass_flow", "3.temperature"),
    ("mixer", "1.mass_flow", "3.temperature"),
    ("mixer", "1.mass_flow 2.mass_flow", "3.temperature 3.mass_flow"),
    ("mixer", "2.temperature", "3.temperature"),
    ("mixer", "heat", "3.temperature"),
    ("mixer", "pressure_drop", "3.pressure"),
    ("splitter", "2.mass_flow", "3.mass_flow"),
    ("splitter", "2.mass_flow", "split_fraction"),
    ("splitter", "1.mass_flow", "3.mass_flow"),
    ("splitter", "1.mass_flow", "split_fraction"),
    ("splitter", "1.temperature", "3.temperature"),
    ("splitter", "1.pressure", "3.pressure"),
    ("control-volume", "power", "4.temperature"),
    ("control-volume", "heat", "4.temperature"),
    ("control-volume", "3.temperature", "4.temperature"),
    ("control-volume", "3.mass_flow", "4.temperature"),
    ("control-volume", "2.mass_flow", "4.temperature"),
    ("compressor", "isentropic_efficiency", "isothermal_efficiency"),
    ("compressor", "1.mass_flow isentropic_efficiency", "power isothermal_efficiency"),
    ("fan", "pressure_rise", "2.pressure"),
    ("fan", "isentropic_efficiency", "power"),
    ("fan", "isentropic_efficiency", "shaft_power"),
    ("fan", "mechanical_efficiency", "shaft_power"),
    ("fan", "1.mass_flow", "shaft_power"),
    ("nozzle", "isentropic_efficiency", "2.velocity"),
    ("nozzle", "isentropic_efficiency", "2.temperature"),
    ("nozzle", "1.mass_flow", "outlet_area"),
    ("nozzle", "1.mass_flow", "throat_area"),
    ("nozzle", "1.velocity", "inlet_area"),
    ("nozzle", "2.pressure", "2.velocity"),
    ("nozzle", "1.temperature", "2.velocity"),
    ("nozzle", "2.pressure", "pressure_ratio"),
    ("diffuser", "isentropic_efficiency", "2.pressure"),
    ("diffuser", "outlet_area", "2.velocity"),
    ("diffuser", "1.mass_flow", "inlet_area"),
    ("diffuser", "1.velocity", "inlet_area"),
    ("diffuser", "1.velocity", "2.temperature"),
    ("pipe", "pressure_drop", "2.pressure"),
    ("pipe", "1.mass_flow", "2.velocity"),
    ("pipe", "heat", "2.temperature"),
    ("combustor", "excess_air", "3.temperature"),
    ("combustor", "excess_air", "2.mass_flow"),
    ("combustor", "1.mass_flow", "2.mass_flow"),
    ("combustor", "1.mass_flow", "3.mass_flow"),
    ("combustor", "heat", "3.temperature"),
    ("combustor", "1.mass_flow", "3.temperature"),
    ("combustor", "1.temperature", "3.temperature"),
    ("combustor", "pressure_drop", "3.pressure"),
    ("combustor", "2.pressure", "3.pressure"),
    ("combustor", "1.mass_flow excess_air", "2.mass_flow 3.temperature"),
    ("separator", "1.specific_enthalpy", "1.quality"),
    ("separator", "1.mass_flow", "2.mass_flow"),
    ("separator", "heat", "3.mass_flow"),
    ("separator", "pressure_drop", "3.temperature"),
    ("separator", "1.pressure", "2.temperature"),
]


@pytest.mark.parametrize(("kind", "unknown", "known"), DIRECTIONS, ids=[" ".join(entry) for entry in DIRECTIONS])
def test_a_result_given_in_the_place_of_a_given_recovers_it(kind: str, unknown: str, known: str) -> None:
    case = CASES[kind]
    forward = case.solve()
    drop = tuple(long(path) for path in unknown.split())
    give = {long(path): float(forward.values[long(path)][0]) for path in known.split()}
    back = case.solve(drop, give)
    for path in drop:
        assert back.values[path][0] == pytest.approx(case.givens[path], rel=1e-9)
    for path, value in forward.values.items():
        if value.dtype.kind == "f" and np.isfinite(value[0]) and "imbalance" not in path and "closure" not in path:
            assert back.values[path][0] == pytest.approx(value[0], rel=1e-8, abs=1e-6), path


def test_every_kind_is_solved_in_some_direction() -> None:
    assert {entry[0] for entry in DIRECTIONS} == set(kinds()) == set(CASES)


@pytest.mark.parametrize("kind", sorted(CASES))
def test_balances_close_and_every_chain_ends_in_givens_fluids_or_assumptions(kind: str) -> None:
    case = CASES[kind]
    solution = case.solve()
    scale = max(abs(float(solution.values[path][0])) for path in solution.values if path.endswith("entropy_flow"))
    assert abs(solution.values["total.closure"][0]) <= 1e-12 * max(scale, 1.0)
    assert abs(solution.values["equipment.X.mass_imbalance"][0]) <= 1e-12
    assert abs(solution.values["equipment.X.energy_imbalance"][0]) <= 1e-6
    known = set(case.givens) | {"surroundings.temperature", "surroundings.pressure"}
    assumed = {f"assumptions.{assumption.id}" for assumption in solution.assumptions}
    for step in solution.steps:
        for path in step.uses:
            assert path in known or path in assumed or path.startswith("fluids."), (step.key, path)
        assert not known.intersection(step.solves), step.key
        known.update(step.solves)
        assert step.sentence
        assert step.basis
        assert step.equations
    for path, value in solution.values.items():
        if value.dtype.kind == "f" and np.isfinite(value[0]):
            assert path in known, path
        elif value.dtype.kind == "f" and not path.startswith("states."):
            assert path in solution.reasons, path
    account = solution.accounts["total"]
    assert account.complete
    entering = sum(entry.amount for side in ("in", "generated") for entry in account.side(side))
    assert entering == pytest.approx(sum(entry.amount for entry in account.side("out")), abs=1e-9)

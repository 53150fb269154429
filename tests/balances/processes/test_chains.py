"""Chains of processes: totals, closures, accounts, trains, files with equipment too, and what is told of bad ones."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from reportgen import fluids
from reportgen.balances import EquipmentDefinition, Plant, Train, solve
from reportgen.errors import InputError, SolutionError
from tests.balances.processes.solved import AMBIENT, base, process, solution

AIR = fluids.ideal_gas("air", heat_capacity=1005.0)
START = {"states.1.pressure": 1e5, "states.1.temperature": 300.0, "states.1.volume": 1.0}
#: Isothermal, isochoric and isentropic steps round a closed course: reversible where the boundary is at the gas.
COURSE = {
    "A": process("isentropic", "1", "2"),
    "B": process("isochoric", "2", "3"),
    "C": process("isentropic", "3", "4"),
    "D": process("isochoric", "4", "5"),
}
OTTO = {
    **START,
    "states.2.volume": 0.125,
    "states.3.temperature": 1800.0,
    "states.4.volume": 1.0,
    "states.5.temperature": 300.0,
    "processes.B.boundary_temperature": 1900.0,
    "processes.D.boundary_temperature": 290.0,
}


def course(**changed: Any) -> Any:
    return solution({"g": AIR}, dict.fromkeys("12345", "g"), COURSE, {**OTTO, **changed})


def test_totals_are_sums_and_the_whole_closes() -> None:
    solved = course()
    found = base(solved)
    for name in ("heat", "work", "entropy_change", "entropy_with_heat", "entropy_generation", "lost_work"):
        parts = sum(found[f"processes.{tag}.{name}"] for tag in COURSE)
        assert found[f"total.{name}"] == pytest.approx(parts, rel=1e-12, abs=1e-9), name
    assert found["total.closure"] == pytest.approx(0.0, abs=1e-9)
    assert found["total.energy_imbalance"] == pytest.approx(0.0, abs=1e-6)
    # The course ends where it began: no entropy is stored, and the work is the heat.
    assert found["total.entropy_change"] == pytest.approx(0.0, abs=1e-9)
    assert found["total.work"] == pytest.approx(found["total.heat"], rel=1e-12)
    efficiency = found["total.work"] / found["processes.B.heat"]
    assert efficiency == pytest.approx(1.0 - 8.0 ** -(AIR.gas_constant / (1005.0 - AIR.gas_constant)), rel=1e-9)


def test_the_account_is_double_entry() -> None:
    account = course().accounts["total"]
    assert [entry.label for entry in account.side("in")] == [
        "Content of state 1 in the beginning",
        "Heat into Isochoric change B",
    ]
    assert [entry.label for entry in account.side("out")] == [
        "Content of state 5 in the end",
        "Heat from Isochoric change D",
    ]
    left = sum(entry.amount for side in ("in", "generated") for entry in account.side(side))
    assert left == pytest.approx(sum(entry.amount for entry in account.side("out")), rel=1e-12)
    assert (account.inlets, account.outlets) == (("1",), ("5",))


def test_heat_that_enters_without_a_boundary_leaves_the_generation_open() -> None:
    givens = {path: value for path, value in OTTO.items() if path != "processes.B.boundary_temperature"}
    solved = solution({"g": AIR}, dict.fromkeys("12345", "g"), COURSE, givens)
    assert np.isnan(solved.values["processes.B.entropy_generation"][0])
    assert np.isnan(solved.values["total.entropy_generation"][0])
    assert "boundary_temperature is not stated" in solved.reasons["total.entropy_generation"]
    assert [fault.path for fault in solved.warnings] == ["processes.B.boundary_temperature"]
    assert not solved.accounts["total"].complete


def test_heat_that_leaves_without_a_boundary_leaves_at_the_surroundings() -> None:
    givens = {path: value for path, value in OTTO.items() if path != "processes.D.boundary_temperature"}
    solved = solution({"g": AIR}, dict.fromkeys("12345", "g"), COURSE, givens)
    heat, entropy = (solved.values[f"processes.D.{name}"][0] for name in ("heat", "entropy_with_heat"))
    assert entropy == pytest.approx(heat / AMBIENT["surroundings.temperature"], rel=1e-12)
    assert "processes.D.heat.leaves_at_surroundings" in {item.id for item in solved.assumptions}


def test_what_a_kind_takes_for_granted_is_listed() -> None:
    listed = {item.id: item for item in course().assumptions}
    assert set(listed) == {"processes.A.quasi-static", "processes.C.quasi-static"}
    assert listed["processes.A.quasi-static"].affects == ("processes.A.work",)
    assert 'what "isentropic" means' in listed["processes.A.quasi-static"].basis


def test_a_slow_way_at_the_boundary_s_own_temperature_generates_nothing() -> None:
    """Along each reversible way S_gen = 0, whatever the fluid."""
    water = fluids.real_fluid("water")
    solved = solution(
        {"w": water},
        dict.fromkeys("123", "w"),
        {"A": process("isothermal", "1", "2"), "B": process("isentropic", "2", "3")},
        {
            "states.1.pressure": 2e5,
            "states.1.temperature": 423.15,
            "states.1.mass": 1.0,
            "states.2.quality": 0.4,
            "states.3.pressure": 8e5,
            "processes.A.boundary_temperature": 423.15,
        },
    )
    scale = abs(float(solved.values["processes.A.entropy_change"][0]))
    assert abs(float(solved.values["total.entropy_generation"][0])) < 1e-9 * scale


def test_two_ways_from_one_state_are_alternatives() -> None:
    """Slow and fast compression to the same pressure: each train has its account, the total counts the main one."""
    ways = {"S": process("isothermal", "1", "2"), "F": process("constant-external-pressure", "1", "3")}
    trains = {"slow": Train("Slow", processes=("S",)), "fast": Train("Fast", (), "slow", ("F",))}
    givens = {
        **START,
        "states.2.pressure": 4e5,
        "processes.F.external_pressure": 4e5,
        "processes.S.boundary_temperature": 300.0,
    }
    found = base(solution({"g": AIR}, dict.fromkeys("123", "g"), ways, givens, trains))
    assert found["trains.fast.work"] < found["trains.slow.work"] < 0.0
    assert found["total.work"] == found["trains.slow.work"]
    assert found["trains.slow.entropy_generation"] == pytest.approx(0.0, abs=1e-9)
    with pytest.raises(InputError, match="its mass would be counted twice"):
        solution({"g": AIR}, dict.fromkeys("123", "g"), ways, givens)


def test_flows_and_amounts_have_totals_of_their_own() -> None:
    """A file with a throttle and a tank: total.* are rates of equipment, closed.* amounts of processes."""
    plant = Plant(
        {"g": AIR},
        {**dict.fromkeys("12", "g"), "in": "g", "out": "g"},
        {"V": EquipmentDefinition("throttling-valve", {"inlet": ("in",), "outlet": ("out",)})},
        processes={"P": process("isochoric", "1", "2")},
    )
    givens = {
        **AMBIENT,
        **START,
        "states.2.temperature": 280.0,
        "states.in.pressure": 5e5,
        "states.in.temperature": 300.0,
        "states.in.mass_flow": 0.1,
        "states.out.pressure": 1e5,
    }
    solved = solve(plant, givens)
    assert solved.closed == {"closed"}
    assert solved.values["total.entropy_generation"][0] == solved.values["equipment.V.entropy_generation"][0]
    assert solved.values["closed.entropy_generation"][0] == solved.values["processes.P.entropy_generation"][0]
    assert {"total", "closed", "equipment.V", "processes.P"} <= solved.accounts.keys()
    assert "states.in.specific_exergy" in solved.values
    assert "states.1.specific_exergy" not in solved.values


def test_a_train_of_both_is_refused() -> None:
    plant = Plant(
        {"g": AIR},
        {**dict.fromkeys("12", "g"), "in": "g", "out": "g"},
        {"V": EquipmentDefinition("throttling-valve", {"inlet": ("in",), "outlet": ("out",)})},
        {"t": Train("Both", ("V",), None, ("P",))},
        {"P": process("isochoric", "1", "2")},
    )
    with pytest.raises(InputError, match="totals are rates"):
        solve(plant, AMBIENT)


def message(givens: dict[str, Any], kind: str = "isobaric") -> str:
    with pytest.raises((SolutionError, InputError)) as caught:
        solution({"g": AIR}, dict.fromkeys("12", "g"), {"P": process(kind, "1", "2")}, givens)
    return str(caught.value)


def test_messages_name_what_is_missing_and_what_is_too_much() -> None:
    no_mass = {"states.1.pressure": 1e5, "states.1.temperature": 300.0, "states.2.temperature": 400.0}
    assert "Nothing fixes the mass of states 1, 2" in message(no_mass)
    open_end = message(START)
    assert "states.2.temperature" in open_end
    assert "one more value" in open_end
    twice = message({**START, "states.2.temperature": 400.0, "states.2.mass": 1.0})
    assert "More is given than can hold at once" in twice
    assert "states.2.mass" in twice
    work = message({**START, "states.2.temperature": 400.0, "processes.P.work": 1.0}, "isochoric")
    assert "processes.P.work" in work


def test_structure_of_a_process_is_checked() -> None:
    def refused(**processes: Any) -> str:
        with pytest.raises(InputError) as caught:
            solution({"g": AIR}, dict.fromkeys("123", "g"), processes, START)
        return str(caught.value)

    assert "Unknown kind" in refused(P=process("isotopic", "1", "2"))
    assert "no state of this name" in refused(P=process("isobaric", "1", "9"))
    assert "both before and after" in refused(P=process("isobaric", "1", "1"))
    assert "2 bodies before and 1 after" in refused(P=process("thermal-contact", ("1", "2"), ("3",)))
    assert "begins both process P and process Q" in refused(
        P=process("isobaric", "1", "2"), Q=process("isobaric", "1", "3")
    )

"""Too little, too much, and plants that cannot be: the error names the paths."""

from __future__ import annotations

from typing import Any

import pytest

from reportgen.balances import EquipmentDefinition, Plant, Train, solve
from reportgen.errors import InputError, SolutionError
from reportgen.fluids import real_fluid
from tests.balances.cases import (
    COMPRESSOR,
    HEAT_EXCHANGER,
    HEATER,
    MIXER,
    SURROUNDINGS,
    VALVE,
    Case,
    chain,
    long,
)
from tests.balances.models import SimpleGas

TOO_LITTLE = [
    (VALVE, "1.mass_flow", {}, "Nothing fixes the flow of states 1, 2.", ["1.mass_flow", "2.mass_flow"]),
    (VALVE, "2.pressure", {}, "Nothing determines", ["2.pressure", "2.specific_entropy", "pressure_drop"]),
    (VALVE, "1.temperature", {}, "Nothing determines", ["1.temperature", "2.temperature"]),
    (
        COMPRESSOR,
        "isentropic_efficiency",
        {},
        "Nothing determines",
        ["2.temperature", "isentropic_efficiency", "power"],
    ),
    (COMPRESSOR, "2.pressure", {}, "Nothing determines", ["2.pressure", "pressure_ratio", "power"]),
    (HEAT_EXCHANGER, "2.temperature", {}, "Nothing determines", ["2.temperature", "4.temperature", "duty"]),
    (MIXER, "2.mass_flow", {}, "Nothing determines", ["2.mass_flow", "3.temperature"]),
    (HEATER, "heat", {}, "Nothing determines", ["heat", "2.temperature"]),
]
TOO_MUCH = [
    (VALVE, {"2.mass_flow": 2.0}, ["1.mass_flow", "2.mass_flow"]),
    (VALVE, {"2.temperature": 290.0, "heat": -2e3}, ["2.temperature", "heat", "1.temperature", "1.mass_flow"]),
    (VALVE, {"1.density": 1.2}, ["1.pressure", "1.temperature", "1.density"]),
    (COMPRESSOR, {"polytropic_efficiency": 0.8}, ["isentropic_efficiency", "polytropic_efficiency"]),
    (COMPRESSOR, {"pressure_ratio": 6.0}, ["pressure_ratio", "1.pressure", "2.pressure"]),
    (HEAT_EXCHANGER, {"4.temperature": 400.0}, ["4.temperature", "2.temperature", "heat"]),
    (MIXER, {"3.mass_flow": 2.7}, ["3.mass_flow", "1.mass_flow", "2.mass_flow"]),
]


@pytest.mark.parametrize(("case", "drop", "give", "message", "named"), TOO_LITTLE)
def test_too_little_names_what_is_open(
    case: Case, drop: str, give: dict[str, float], message: str, named: list[str]
) -> None:
    with pytest.raises(SolutionError) as caught:
        case.solve((long(drop),), give)
    (fault,) = caught.value.faults
    assert fault.message.startswith(message)
    assert fault.expected is not None
    assert fault.expected.startswith("one more value, for example ")
    for path in named:
        assert long(path) in fault.message or path.endswith("mass_flow")
    assert fault.path in fault.expected


@pytest.mark.parametrize(("case", "give", "named"), TOO_MUCH)
def test_too_much_names_the_givens_that_compete(case: Case, give: dict[str, float], named: list[str]) -> None:
    with pytest.raises(SolutionError) as caught:
        case.solve((), {long(path): value for path, value in give.items()})
    (fault,) = caught.value.faults
    assert "one value too many" in fault.message
    for path in named:
        assert long(path) in fault.message
    # Leaving out any one of the values named leaves a plant that can be solved or says what else it needs,
    # and never again too much.
    for path in fault.message.split("among ")[1].rstrip(".").split(", "):
        everything = {**case.givens, **{long(short): value for short, value in give.items()}}
        everything.pop(path)
        try:
            solve(case.plant, {**SURROUNDINGS, **everything})
        except SolutionError as error:
            assert "too many" not in str(error)  # noqa: PT017


def test_two_independent_lacks_are_two_faults() -> None:
    plant = chain(
        ("V", "throttling-valve", {"inlet": ("1",), "outlet": ("2",)}),
        ("H", "heater", {"inlet": ("3",), "outlet": ("4",)}),
        fluid=SimpleGas(),
    )
    with pytest.raises(SolutionError) as caught:
        solve(plant, {**SURROUNDINGS, "states.1.mass_flow": 1.0, "states.1.pressure": 2e5, "states.2.pressure": 1e5})
    first, second = caught.value.faults
    assert "states.1.temperature" in first.message
    assert "states.3.mass_flow" in second.message
    assert "states.1" not in second.message


def test_an_isolated_state_needs_two_properties() -> None:
    plant = Plant({"f": SimpleGas()}, {"a": "f"})
    with pytest.raises(SolutionError, match="State a is not fixed: one more value of its properties must be known"):
        solve(plant, {**SURROUNDINGS, "states.a.pressure": 1e5})


def test_a_state_out_of_range_is_named_with_the_values_that_led_there() -> None:
    with pytest.raises(SolutionError) as caught:
        HEATER.solve((), {"equipment.X.heat": 1e8})
    (fault,) = caught.value.faults
    assert fault.path == "states.2"
    assert [path for path, _ in fault.numbers] == ["states.2.pressure", "states.2.specific_enthalpy"]
    assert "Found: states.2.pressure = 98000, states.2.specific_enthalpy = 5.00019e+07." in str(fault)
    assert "outside 50 to 3000 K" in fault.message


def test_a_relation_whose_factor_vanishes_is_an_error_where_the_value_is_needed() -> None:
    with pytest.raises(SolutionError, match="the factor of"):
        HEATER.solve(
            ("equipment.X.heat", "states.1.mass_flow"), {"states.2.temperature": 300.0, "equipment.X.heat": 5e3}
        )


def test_an_efficiency_without_meaning_is_left_out_with_its_reason() -> None:
    solution = COMPRESSOR.solve(
        ("equipment.X.isentropic_efficiency",), {"states.2.pressure": 1e5, "states.2.temperature": 300.0}
    )
    assert (
        solution.values["equipment.X.isentropic_efficiency"][0]
        != solution.values["equipment.X.isentropic_efficiency"][0]
    )
    assert "equipment.X.isentropic_efficiency" in solution.reasons


def test_names_that_nothing_has_are_all_reported() -> None:
    with pytest.raises(InputError) as caught:
        solve(VALVE.plant, {**VALVE.givens, "states.9.pressure": 1.0, "equipment.X.colour": 1.0})
    assert {fault.path for fault in caught.value.faults} == {
        "states.9.pressure",
        "equipment.X.colour",
        "surroundings.temperature",
        "surroundings.pressure",
    }


def _plant(equipment: dict[str, EquipmentDefinition], trains: dict[str, Train] | None = None) -> Plant:
    gas, other = SimpleGas("a"), SimpleGas("b")
    return Plant({"a": gas, "b": other}, {"1": "a", "2": "a", "3": "a", "4": "b"}, equipment, trains or {})


VALVE_1_2 = EquipmentDefinition("throttling-valve", {"inlet": ("1",), "outlet": ("2",)})
VALVE_1_3 = EquipmentDefinition("throttling-valve", {"inlet": ("1",), "outlet": ("3",)})
VALVE_3_2 = EquipmentDefinition("throttling-valve", {"inlet": ("3",), "outlet": ("2",)})

IMPOSSIBLE: list[tuple[Plant, str]] = [
    (_plant({"X": EquipmentDefinition("kettle", {})}), "Unknown kind"),
    (_plant({"X": EquipmentDefinition("pump", {"inlet": ("1",)})}), "not connected"),
    (_plant({"X": EquipmentDefinition("pump", {"inlet": ("1",), "outlet": ("9",)})}), "no state of this name"),
    (_plant({"X": EquipmentDefinition("pump", {"inlet": ("1", "2"), "outlet": ("3",)})}), "takes one state"),
    (_plant({"X": EquipmentDefinition("pump", {"entry": ("1",), "outlet": ("3",)})}), "no port of this name"),
    (_plant({"X": EquipmentDefinition("pump", {"inlet": ("1",), "outlet": ("4",)})}), "different substances"),
    (_plant({"X": VALVE_1_2, "Y": VALVE_1_3}), "counted twice"),
    (_plant({"X": VALVE_1_2, "Y": VALVE_3_2}), "counted twice"),
    (_plant({"X": VALVE_1_2}, {"A": Train("a", ("X", "Q"))}), "no equipment of this tag"),
    (_plant({"X": VALVE_1_2}, {"A": Train("a", ("X",)), "B": Train("b", ("X",))}), "already belongs"),
    (_plant({"X": VALVE_1_2}, {"A": Train("a", ("X",), "Z")}), "no other train"),
]


@pytest.mark.parametrize(("plant", "message"), IMPOSSIBLE)
def test_plants_that_cannot_be(plant: Plant, message: str) -> None:
    with pytest.raises(InputError, match=message):
        solve(plant, SURROUNDINGS)


def _cycle(fluid: Any) -> Plant:
    return chain(
        ("K", "compressor", {"inlet": ("1",), "outlet": ("2",)}),
        ("C", "cooler", {"inlet": ("2",), "outlet": ("3",)}),
        ("V", "throttling-valve", {"inlet": ("3",), "outlet": ("4",)}),
        ("E", "heater", {"inlet": ("4",), "outlet": ("1",)}),
        fluid=fluid,
    )


CYCLE = {
    **SURROUNDINGS,
    "states.1.pressure": 0.14e6,
    "states.1.temperature": 263.15,
    "states.2.pressure": 0.8e6,
    "states.3.quality": 0.0,
    "equipment.K.isentropic_efficiency": 0.8,
}


def test_a_closed_loop_without_a_flow_says_so() -> None:
    with pytest.raises(SolutionError, match="Nothing fixes the flow of states 1, 2, 3, 4"):
        solve(_cycle(real_fluid("R134a")), CYCLE)


def test_two_flows_in_a_closed_loop_are_one_too_many() -> None:
    with pytest.raises(SolutionError, match=r"one value too many among states\.1\.mass_flow, states\.3\.mass_flow"):
        solve(_cycle(real_fluid("R134a")), {**CYCLE, "states.1.mass_flow": 0.1, "states.3.mass_flow": 0.1})


def test_defaults_that_are_determined_otherwise_are_not_taken() -> None:
    cooled = COMPRESSOR.solve(
        ("equipment.X.isentropic_efficiency",), {"states.2.temperature": 450.0, "equipment.X.power": 4e5}
    )
    assert not any(assumption.id == "equipment.X.adiabatic" for assumption in cooled.assumptions)
    expected = 2.0 * 1004.5 * 150.0 - 4e5
    assert cooled.values["equipment.X.heat"][0] == pytest.approx(expected)
    assert [assumption.id for assumption in cooled.assumptions] == ["equipment.X.heat.leaves_at_surroundings"]
    measured = VALVE.solve((), {"states.2.temperature": 295.0})
    assert measured.values["equipment.X.heat"][0] == pytest.approx(-2.0 * 1004.5 * 5.0)


def test_the_temperature_of_an_ideal_gas_says_nothing_about_its_pressure() -> None:
    with pytest.raises(SolutionError, match="too many"):
        COMPRESSOR.solve((), {"states.2.specific_enthalpy": 2e5, "states.2.temperature": 500.0})
    with pytest.raises(SolutionError, match=r"Nothing determines states\.2\.pressure"):
        COMPRESSOR.solve(
            ("states.2.pressure", "equipment.X.isentropic_efficiency"),
            {"states.2.temperature": 500.0, "equipment.X.power": 4e5},
        )


def test_enthalpy_of_an_ideal_gas_is_found_before_its_pressure() -> None:
    forward = COMPRESSOR.solve()
    outlet = float(forward.values["states.2.temperature"][0])
    back = COMPRESSOR.solve(("states.2.pressure",), {"states.2.temperature": outlet})
    assert back.values["states.2.pressure"][0] == pytest.approx(6e5, rel=1e-10)
    assert "whatever the pressure" in " ".join(step.sentence for step in back.steps)
    assert not [doubt for doubt in back.doubts if doubt.stands]


@pytest.mark.parametrize(
    ("drop", "give", "pressure"),
    [
        ("2.pressure", {"polytropic_efficiency": 0.75}, "states.2.pressure"),
        ("2.pressure", {"isothermal_efficiency": 0.6}, "states.2.pressure"),
        ("1.pressure", {"polytropic_efficiency": 0.75}, "states.1.pressure"),
    ],
)
def test_a_pressure_is_not_found_from_two_efficiencies(drop: str, give: dict[str, float], pressure: str) -> None:
    """They agree as the ratio goes to 1 and differ little elsewhere: what came out would mean nothing."""
    with pytest.raises(SolutionError, match="which differ by the pressure ratio alone") as caught:
        COMPRESSOR.solve((long(drop),), {long(path): value for path, value in give.items()})
    (fault,) = caught.value.faults
    assert pressure in fault.message
    assert pressure in (fault.expected or "")


def test_two_efficiencies_may_be_given_where_the_pressure_is_known_otherwise() -> None:
    """The isothermal efficiency then gives the power, and what it leaves is the heat of the casing."""
    both = COMPRESSOR.solve((), {"equipment.X.isothermal_efficiency": 0.6})
    assert both.values["equipment.X.heat"][0] != 0.0
    assert both.values["equipment.X.isothermal_efficiency"][0] == 0.6


def test_several_values_that_are_missing_are_proposed_together() -> None:
    """One set that would do, and not the same degree of freedom twice."""
    plant = chain(
        ("V", "throttling-valve", {"inlet": ("1",), "outlet": ("2",)}),
        ("H", "heater", {"inlet": ("2",), "outlet": ("3",)}),
        fluid=SimpleGas(),
    )
    givens = {**SURROUNDINGS, "states.1.mass_flow": 1.0, "states.1.pressure": 2e5}
    with pytest.raises(SolutionError, match=r"more independent values, for example .* together with ") as caught:
        solve(plant, givens)
    proposed: dict[str, float] = {}
    usual = {"pressure": 1.5e5, "temperature": 320.0, "specific_enthalpy": 2e4, "heat": 1e4}
    for fault in caught.value.faults:
        for path in (fault.expected or "").split("for example ")[1].split(" together with "):
            proposed[path.split(" or ")[0]] = usual[path.split(" or ")[0].rsplit(".", 1)[-1]]
    assert solve(plant, {**givens, **proposed}).values["states.3.temperature"][0] > 0.0

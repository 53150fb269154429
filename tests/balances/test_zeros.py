"""Zeros of enthalpy and entropy: two of them in one balance are an error, side by side they do no harm."""

from __future__ import annotations

from typing import Any

import pytest

from reportgen.balances.zeros import same_zero
from reportgen.errors import Fault, InputError
from reportgen.fluids import ideal_gas, incompressible, real_fluid
from tests.balances.cases import one_piece

MIXED = {"1": "a", "2": "b", "3": "a"}
PORTS = {"inlets": ("1", "2"), "outlet": ("3",)}
GIVENS = {
    "1.pressure": 2e5,
    "1.temperature": 400.0,
    "1.mass_flow": 1.0,
    "2.pressure": 2e5,
    "2.temperature": 350.0,
    "2.mass_flow": 1.0,
}


def faults_of(first: Any, second: Any, kind: str = "mixer", ports: Any = PORTS) -> list[Fault]:
    with pytest.raises(InputError) as caught:
        one_piece(kind, ports, GIVENS, {"a": first, "b": second}, MIXED).solve()
    return list(caught.value.faults)


def test_two_zeros_of_one_substance_are_both_named_with_the_equipment_and_the_cure() -> None:
    (fault,) = faults_of(real_fluid("water"), real_fluid("water", "NBP"))
    assert fault.path == "equipment.X"
    assert "brings fluid a (state 1, 3) and fluid b (state 2) into one balance" in fault.message
    assert "different zeros" in fault.message
    found = str(fault.found)
    assert "a: published:water (" in found
    assert "b: NBP (s = 0 and h = 0 for the saturated liquid at 101 325 Pa" in found
    assert fault.expected == "the same reference_state in [fluids.a] and [fluids.b], or one fluid for both"


def test_one_zero_under_two_names_is_one_fluid() -> None:
    fluids = {"a": real_fluid("water", "NBP"), "b": real_fluid("water", "NBP")}
    values = one_piece("mixer", PORTS, GIVENS, fluids, MIXED).solve().values
    assert values["states.3.mass_flow"][0] == pytest.approx(2.0)


def test_an_ideal_gas_asks_its_real_fluid_for_the_third_law() -> None:
    (fault,) = faults_of(ideal_gas("water"), real_fluid("water"))
    assert fault.expected == 'reference_state = "third-law" in [fluids.b], or one fluid for both'


def test_with_the_third_law_a_real_fluid_and_an_ideal_gas_share_their_zero() -> None:
    """Steam at 2 bar is nearly ideal: mixed by either model, the outlet has the same temperature to 1 K."""
    fluids = {"a": ideal_gas("water"), "b": real_fluid("water", "third-law")}
    givens = {**GIVENS, "2.temperature": 450.0}
    outlet = one_piece("mixer", PORTS, givens, fluids, MIXED).solve().values["states.3.temperature"][0]
    alone = {"a": real_fluid("water"), "b": real_fluid("water")}
    assert outlet == pytest.approx(
        one_piece("mixer", PORTS, givens, alone, MIXED).solve().values["states.3.temperature"][0], abs=3.0
    )


def test_different_substances_in_one_stream_are_told_as_such() -> None:
    (fault,) = faults_of(ideal_gas("nitrogen"), ideal_gas("oxygen"))
    assert "which are different substances: what comes in as one of them cannot go out as the other" in fault.message
    (fault,) = faults_of(real_fluid("nitrogen"), ideal_gas("oxygen"))
    assert "which are different substances with different zeros of enthalpy and entropy" in fault.message
    assert "published:nitrogen" in str(fault.found)
    assert "third-law" in str(fault.found)


@pytest.mark.parametrize("kind", ["control-volume", "mixer"])
def test_every_kind_that_joins_streams_looks_at_their_zeros(kind: str) -> None:
    ports = PORTS if kind == "mixer" else {"inlets": ("1", "2"), "outlets": ("3",)}
    assert "different zeros" in faults_of(real_fluid("R134a"), real_fluid("R134a", "NBP"), kind, ports)[0].message


def test_streams_that_pass_each_other_may_have_any_zeros() -> None:
    """A heat exchanger with water of two zeros: every balance closes, whatever they are."""
    ports = {"hot_inlet": ("1",), "hot_outlet": ("2",), "cold_inlet": ("3",), "cold_outlet": ("4",)}
    givens = {
        "1.pressure": 5e5,
        "1.temperature": 370.0,
        "1.mass_flow": 1.0,
        "2.pressure": 5e5,
        "2.temperature": 340.0,
        "3.pressure": 5e5,
        "3.temperature": 300.0,
        "4.pressure": 5e5,
        "4.temperature": 330.0,
    }
    names = {"1": "a", "2": "a", "3": "b", "4": "b"}
    generation = [
        one_piece("heat-exchanger", ports, givens, {"a": real_fluid("water"), "b": real_fluid("water", zero)}, names)
        .solve()
        .values["equipment.X.entropy_generation"][0]
        for zero in ("published", "NBP", "third-law")
    ]
    assert generation == pytest.approx([generation[0]] * 3, rel=1e-9)


def test_a_constant_heat_capacity_is_not_the_variable_one() -> None:
    assert not same_zero(ideal_gas("nitrogen"), ideal_gas("nitrogen", heat_capacity=1040.0))
    assert same_zero(ideal_gas("nitrogen"), ideal_gas({"N2": 1.0}))


def test_incompressible_fluids_of_one_name_share_their_zero() -> None:
    def oil(density: float, name: str = "oil") -> Any:
        return incompressible(name, density=density, specific_heat=2000.0, limits=(280.0, 600.0))

    assert same_zero(oil(870.0), oil(870.0))
    assert not same_zero(oil(870.0), oil(870.0, "brine"))

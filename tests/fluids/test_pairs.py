"""Reading the two properties given, and the account of elements that have no state."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np
import pytest

from reportgen.errors import Fault, InputError, RangeError
from reportgen.fluids import real_fluid
from reportgen.fluids.numeric import finite_number, number, numbers
from reportgen.fluids.pairs import PROPERTIES, Elements, Faults, in_words, read_pair

PAIRS = (("pressure", "density"), ("density", "specific_internal_energy"))


def test_a_specific_volume_is_a_density_and_the_order_is_the_models() -> None:
    pair = read_pair({"specific_internal_energy": [1.0, 2.0], "specific_volume": 4.0}, PAIRS, "Something")
    assert pair.names == ("density", "specific_internal_energy")
    assert pair.first.tolist() == [0.25, 0.25]
    assert pair.second.tolist() == [1.0, 2.0]
    assert pair.shape == (2,)
    with pytest.raises(InputError, match="cannot be evaluated from this pair"):
        read_pair({"density": 1.0, "specific_volume": 1.0}, PAIRS, "Something")


def test_properties_in_words() -> None:
    assert in_words("specific_internal_energy", 2.5e6) == "2500 kJ/kg"
    assert in_words("pressure", 12.5) == "12.5 Pa"
    assert in_words("temperature", 300.0) == "300 K (26.85 degC)"
    assert all(in_words(name, 1.0) for name in PROPERTIES)


class TestFaults:
    def test_each_is_worded_once_and_only_when_read(self) -> None:
        worded: list[int] = []

        def describe(index: int) -> Fault:
            worded.append(index)
            return Fault(f"Element {index}.")

        faults = Faults(5)
        assert not faults
        faults.put(np.array([1, 4]), describe)
        assert len(faults) == 2
        assert list(faults) == [1, 4]
        assert 4 in faults
        assert not worded or worded == [4]
        assert faults[4].message == "Element 4."
        assert faults[4] is faults[4]
        assert worded.count(4) == 1
        for index in (0, 5, -1):
            with pytest.raises(KeyError):
                faults[index]
        faults[0] = Fault("First.")
        assert [fault.message for fault in faults.values()] == ["First.", "Element 1.", "Element 4."]

    def test_the_first_fault_of_an_element_stands(self) -> None:
        elements = Elements(3)
        elements.reject(np.array([True, False, False]), lambda i: Fault(f"One {i}."))
        elements.reject(np.array([True, True, False]), lambda i: Fault(f"Two {i}."))
        assert {i: fault.message for i, fault in elements.faults.items()} == {0: "One 0.", 1: "Two 1."}
        assert elements.rejected.tolist() == [True, True, False]

    def test_faults_of_a_part_keep_their_words_and_find_their_place(self) -> None:
        part = Elements(2)
        part.reject(np.array([False, True]), lambda i: Fault(f"Part {i}."))
        whole = Elements(5)
        whole.take_over(part, np.array([1, 3]))
        assert {i: fault.message for i, fault in whole.faults.items()} == {3: "Part 1."}
        with pytest.raises(RangeError, match=r"Part 1\.\n1 of 5 elements cannot be evaluated: flat index 3\."):
            whole.finish("raise")
        whole.finish("mask")

    def test_of_a_long_batch_of_refusals_only_the_first_are_put_into_words(self) -> None:
        water = real_fluid("water")
        pressure = np.full(100_000, -1.0)
        with pytest.raises(
            RangeError, match=r"100000 of 100000 elements cannot be evaluated: flat index 0, 1, 2, \.\.\."
        ):
            water.at(pressure=pressure, temperature=300.0)
        state = water.at(errors="mask", pressure=pressure, temperature=300.0)
        assert len(state.faults) == 100_000
        assert "not above zero" in state.faults[77_777].message


def test_faults_tell_themselves() -> None:
    state = real_fluid("water").at(errors="mask", pressure=1e5, temperature=[300.0, 4000.0, 300.0, 20.0])
    text = repr(state.faults)
    assert "1: 'Temperature 4000 K" in text
    assert "3: 'Temperature 20 K" in text
    assert "(2 of 4)" in text
    assert len(repr(real_fluid("water").at(errors="mask", pressure=1e5, temperature=[9e3] * 10_000).faults)) < 1500


def test_numbers_of_any_type_and_nothing_else() -> None:
    class Whole(int):
        pass

    for value in (3, 3.0, np.float32(3), np.int8(3), np.array(3), Whole(3), Fraction(6, 2)):
        assert finite_number(value) == 3.0
    for value in (True, np.True_, "3", b"3", None, 3j, [3], np.array([3]), math.nan, math.inf):
        assert finite_number(value) is None
    assert number(10**400) is None
    assert number(-math.inf) == -math.inf
    with pytest.raises(InputError, match="enthalpy is not a number"):
        numbers("enthalpy", "J/kg", ["3"])

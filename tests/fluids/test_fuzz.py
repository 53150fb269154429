"""A few hundred of the random calls of ``python -m tests.benchmarks.fuzz``; the whole run is made by hand."""

from __future__ import annotations

import numpy as np
import pytest

from reportgen import fluids
from reportgen.errors import Fault
from reportgen.fluids.state import FIELDS, State
from tests.benchmarks import fuzz
from tests.fluids.real import SAMPLE

#: Fluids whose equations, melting lines or blends of lines make trouble of their own.
NAMES = (*SAMPLE, "helium", "R404A", "R161", "fluorine", "methanol")


def test_random_calls_return_or_are_refused_in_time() -> None:
    counts = fuzz.fuzz(600, seed=3, chosen=fuzz.models(NAMES))
    assert counts.calls == counts.returned + counts.raised == 600
    assert not counts.unhandled
    assert not counts.unflagged
    assert not counts.slow
    # the calls are of all kinds
    assert counts.finite > 100
    assert counts.masked > 100
    assert len(counts.reasons) > 12


WATER = fluids.real_fluid("water")


def altered(values: dict[str, object], faults: dict[int, Fault] | None) -> State:
    """Steam, with some fields replaced."""
    steam = WATER.at(pressure=[1e5], temperature=[400.0])
    fields = {name: steam.flat(name) for name in FIELDS}
    return State((1,), fields | {name: np.array([value]) for name, value in values.items()}, None, faults)


@pytest.mark.parametrize(
    ("values", "faults", "found"),
    [
        ({}, None, ""),
        ({"temperature": 5000.0}, None, "outside the limits"),
        ({"pressure": 1e10}, None, "outside the limits"),
        ({"pressure": -1.0}, None, "pressure not above zero"),
        ({"isobaric_heat_capacity": -1.0}, None, "isobaric_heat_capacity not above zero"),
        ({"density": np.inf}, None, "infinite density"),
        ({"quality": 1.5}, None, "a quality outside"),
        ({"specific_entropy": np.nan}, None, "without enthalpy or entropy"),
        ({"phase": ""}, None, "a state without a phase"),
        ({}, {0: Fault("No.")}, "beside a fault"),
        ({"density": np.nan}, None, "without a reason"),
    ],
)
def test_the_checks_find_what_they_look_for(
    values: dict[str, object], faults: dict[int, Fault] | None, found: str
) -> None:
    given = {"temperature": np.array([5000.0 if values.get("temperature") else 400.0])}
    wrong = fuzz._check(WATER, altered(values, faults), given)
    assert found in wrong
    assert bool(found) == bool(wrong)


def test_what_is_no_refusal_is_counted_as_unhandled() -> None:
    counts = fuzz.Counts()
    counts.reason(Fault("If these values lie within the limits of the fluid, this is a fault of the program."), "call")
    assert len(counts.unhandled) == 1

    class Crashing:
        limits, gas_constant = WATER.limits, WATER.gas_constant

        def at(self, **given: object) -> State:
            if given["errors"] == "mask" and given.get("pressure") == 1e5:
                return WATER.at(**given)  # what the values of a call are drawn from
            raise ZeroDivisionError

    assert len(fuzz.fuzz(20, 1, [Crashing()]).unhandled) == 20

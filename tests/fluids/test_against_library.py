"""Every fluid and every pair against a compiled library (CoolProp): a sample of tests/benchmarks/property_table.py.

There, 2 000 states a fluid and pair are compared and each deviation above 1e-7 (c_p and w 1e-5) is explained.
"""

from __future__ import annotations

from types import SimpleNamespace
from typing import Any, NamedTuple

import numpy as np
import pytest

library = pytest.importorskip("CoolProp.CoolProp")

from reportgen.fluids import names, real_fluid  # noqa: E402 - only where the library is installed
from reportgen.fluids.real.fluid import RealFluid  # noqa: E402
from tests.benchmarks.property_explanations import (  # noqa: E402
    BARS,
    Base,
    Criticals,
    critical_points,
    explain,
    explain_base,
)
from tests.benchmarks.property_states import Reference, counterparts, draw, shift  # noqa: E402
from tests.benchmarks.property_table import (  # noqa: E402
    FIELDS,
    FLASH,
    ONE_BY_ONE,
    PAIRS,
    compare_fluid,
    same_point,
)

STATES = 40


@pytest.fixture(scope="module")
def matched() -> dict[str, str]:
    return counterparts()[0]


def test_every_fluid_here_has_a_counterpart(matched: dict[str, str]) -> None:
    assert set(matched) == set(names())
    assert len(matched) >= 130


@pytest.mark.parametrize("name", names())
def test_all_pairs(name: str, matched: dict[str, str]) -> None:
    rows = compare_fluid(name, matched[name], STATES, tuple(PAIRS), seed=2, singly=1)
    for label, row in rows.items():
        assert not row.failures, (label, row.failures)
        assert not row.lost, (label, row.lost, row.samples)
        assert not row.unexplained, (label, row.samples)
        assert not row.wrong_phase, (label, row.samples)
        assert all(row.away[name] <= bar for name, bar in BARS.items()), (label, row.away)
        if label not in (FLASH, ONE_BY_ONE):
            assert row.states > 0
            assert row.compared + row.refused.total() == row.states


class Drawn(NamedTuple):
    """States of nitrogen, compared at their own temperature and density."""

    fluid: RealFluid
    reference: Reference
    base: Base
    criticals: Criticals


@pytest.fixture(scope="module")
def drawn() -> Drawn:
    fluid, state = real_fluid("nitrogen"), library.AbstractState("HEOS", "Nitrogen")
    reference, _ = draw(fluid, state, {"vapour": 20, "liquid": 20, "supercritical": 20}, seed=5)
    shift(fluid, state, reference)
    criticals = critical_points(fluid, state)
    base = explain_base(fluid, reference, same_point(fluid, reference), state, criticals)
    return Drawn(fluid, reference, base, criticals)


def fields_of(state: Any) -> SimpleNamespace:
    return SimpleNamespace(**{name: np.array(getattr(state, name)) for name in FIELDS})


class TestReasonsCanFail:
    """A state that is wrong is not explained, whatever the pair."""

    @pytest.mark.parametrize("label", ["p,T", "p,h", "p,s", "p,rho", "rho,u", "T,s", "T,h", "h,s"])
    def test_a_state_off_by_more_than_the_bar(self, drawn: Drawn, label: str) -> None:
        fluid, reference, base, criticals = drawn
        wrong = fluid.at(temperature=reference.temperature * (1 + 1e-6), density=reference.density * (1 + 3e-6))
        assert (explain(fluid, reference, fields_of(wrong), PAIRS[label][0], base, criticals) == "").all()

    def test_another_phase(self, drawn: Drawn) -> None:
        fluid, reference, base, criticals = drawn
        right = fields_of(fluid.at(temperature=reference.temperature, density=reference.density))
        right.phase = np.where(right.phase == "liquid", "vapour", "liquid")
        right.density = right.density * (1 + 1e-6)
        assert (explain(fluid, reference, right, PAIRS["p,T"][0], base, criticals) == "").all()

    def test_another_root(self, drawn: Drawn) -> None:
        """Of a fluid at 300 K, two densities have one enthalpy; the other fulfils the pair, and is not explained."""
        fluid, reference, base, criticals = drawn
        dense = float(fluid.at(temperature=300.0, pressure=2e8).density)
        rho = np.geomspace(1.0, dense, 4000)
        enthalpy = fluid.at(temperature=np.full(rho.size, 300.0), density=rho).specific_enthalpy
        lowest = int(np.argmin(enthalpy))
        thin = rho[lowest // 2]
        thick = float(np.interp(enthalpy[lowest // 2], enthalpy[lowest:], rho[lowest:]))
        at = np.array([int(np.argmin(np.abs(reference.temperature - 300.0)))])
        true, other = fluid.at(temperature=[300.0], density=thin), fluid.at(temperature=[300.0], density=thick)
        one = reference.take(at)
        for name in FIELDS:
            setattr(one, name, np.array(getattr(true, name)))
        assert abs(other.specific_enthalpy[0] / one.specific_enthalpy[0] - 1) < 1e-4
        given = ("temperature", "specific_enthalpy")
        assert explain(fluid, one, fields_of(other), given, base.take(at), criticals)[0] == ""

"""How states are found: from starts that are near, in few steps, saturated ones exactly, in any thread."""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest

from reportgen.fluids import real_fluid
from reportgen.fluids.real.flash import PressureFlash
from reportgen.fluids.real.helmholtz import CHUNK
from reportgen.fluids.real.scalar.few import MOST

FLUIDS = ["water", "carbon dioxide", "nitrogen", "R134a", "methanol", "hydrogen", "helium"]


@pytest.mark.parametrize("given", ["specific_enthalpy", "specific_entropy"])
@pytest.mark.parametrize("name", [*FLUIDS, "air"])
def test_a_saturated_state_given_back_is_saturated(name: str, given: str) -> None:
    """Not a mixture with a quality of 1e-16, nor a single phase beside it, but the state with its heat capacity."""
    fluid = real_fluid(name)
    critical = fluid.limits.critical_point
    assert critical is not None
    # pressures on the dew line of air below those of the bubble line have no liquid in the range
    low = fluid.limits.minimum_temperature * (1.2 if fluid.pseudo_pure else 1.001)
    temperature = np.linspace(low, 0.995 * critical.temperature, 3 * MOST)
    for quality, end in enumerate(fluid.saturation(temperature=temperature)):
        again = fluid.at(pressure=end.pressure, **{given: getattr(end, given)})
        assert (again.quality == quality).all()
        assert (again.phase == end.phase).all()
        assert again.temperature == pytest.approx(end.temperature, rel=1e-12)
        assert again.isobaric_heat_capacity == pytest.approx(end.isobaric_heat_capacity, rel=1e-8)
        single = fluid.at(pressure=end.pressure[3], **{given: getattr(end, given)[3]})
        assert single.quality == quality


@pytest.mark.parametrize("name", FLUIDS)
def test_densities_are_found_in_few_steps(name: str) -> None:
    """Bar 12; measured 4 to 9 over the whole range, from the saturated densities or the cubic equation."""
    fluid = real_fluid(name)
    limits, random = fluid.limits, np.random.default_rng(8)
    temperature = random.uniform(limits.minimum_temperature, limits.maximum_temperature, 400)
    pressure = np.exp(random.uniform(np.log(1e3), np.log(limits.maximum_pressure), 400))
    good = np.isfinite(fluid.at(pressure=pressure, temperature=temperature, errors="mask").density)
    evaluate, sizes = fluid._equation.pressure, []

    def counted(density, *rest):
        sizes.append(density.size)
        return evaluate(density, *rest)

    fluid._equation.pressure = counted  # type: ignore[method-assign]
    _ = fluid.at(pressure=pressure[good], temperature=temperature[good]).density
    assert 0 < len(sizes) <= 12


@pytest.mark.parametrize("given", ["specific_enthalpy", "specific_entropy"])
@pytest.mark.parametrize("name", FLUIDS)
def test_enthalpy_and_entropy_away_from_critical_need_no_bracketed_search(
    name: str, given: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    fluid = real_fluid(name)
    limits, critical, random = fluid.limits, fluid.limits.critical_point, np.random.default_rng(9)
    assert critical is not None
    temperature = random.uniform(
        limits.minimum_temperature, min(3 * critical.temperature, limits.maximum_temperature), 400
    )
    pressure = critical.pressure * np.exp(random.uniform(np.log(1e-3), np.log(8.0), 400))
    pressure = np.minimum(pressure, limits.maximum_pressure)
    base = fluid.at(pressure=pressure, temperature=temperature, errors="mask")
    far = np.isfinite(base.density) & (np.abs(base.temperature / critical.temperature - 1) > 0.03)

    def never(*_: object) -> None:
        raise AssertionError("a bracketed search was started")

    monkeypatch.setattr(PressureFlash, "_search", never)
    again = fluid.at(pressure=base.pressure[far], **{given: getattr(base, given)[far]})
    assert again.temperature == pytest.approx(base.temperature[far], rel=1e-9)


def test_threads_do_not_share_their_work_arrays() -> None:
    fluid = real_fluid("water")
    random = np.random.default_rng(10)
    temperature = [random.uniform(300.0, 1200.0, 3 * CHUNK) for _ in range(6)]
    pressure = [np.exp(random.uniform(np.log(1e3), np.log(1e8), 3 * CHUNK)) for _ in range(6)]

    def compute(index: int) -> np.ndarray:
        state = fluid.at(pressure=pressure[index], temperature=temperature[index])
        return np.array([state.density, state.specific_entropy, state.isobaric_heat_capacity])

    alone = [compute(index) for index in range(6)]
    with ThreadPoolExecutor(3) as pool:
        together = list(pool.map(compute, range(6)))
    for one, other in zip(alone, together, strict=True):
        assert (one == other).all()

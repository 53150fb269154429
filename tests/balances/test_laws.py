"""Laws that hold for every plant, tried on invented numbers."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.balances import solve
from reportgen.fluids import real_fluid
from tests.balances.cases import SURROUNDINGS, THROUGH, chain, one_piece
from tests.balances.models import SimpleGas

GAS = SimpleGas()
WATER = real_fluid("water")

pressures = st.floats(5e4, 5e6)
temperatures = st.floats(260.0, 900.0)
flows = st.floats(1e-2, 50.0)
efficiencies = st.floats(0.3, 1.0)
ratios = st.floats(1.05, 12.0)


@settings(max_examples=60, deadline=None)
@given(pressures, temperatures, flows, efficiencies, ratios)
def test_an_adiabatic_machine_generates_entropy_unless_it_is_ideal(
    pressure: float, temperature: float, flow: float, efficiency: float, ratio: float
) -> None:
    for kind, factor in (("compressor", ratio), ("turbine", 1.0 / ratio)):
        givens = {
            "1.pressure": pressure,
            "1.temperature": temperature,
            "1.mass_flow": flow,
            "2.pressure": pressure * factor,
            "isentropic_efficiency": efficiency,
        }
        try:
            values = one_piece(kind, THROUGH, givens, {"gas": GAS}).solve().values
        except ArithmeticError:
            continue  # colder or hotter than the gas model goes
        generated = values["equipment.X.entropy_generation"][0]
        scale = flow * GAS.cp
        assert generated >= -1e-12 * scale
        ideal = {**givens, "isentropic_efficiency": 1.0}
        values = one_piece(kind, THROUGH, ideal, {"gas": GAS}).solve().values
        assert abs(values["equipment.X.entropy_generation"][0]) < 1e-11 * scale
        assert values["equipment.X.polytropic_efficiency"][0] == pytest.approx(1.0, abs=1e-9)


@settings(max_examples=40, deadline=None)
@given(
    st.lists(
        st.tuples(st.sampled_from(["compressor", "cooler", "throttling-valve", "heater"]), st.floats(0.0, 1.0)),
        min_size=1,
        max_size=6,
    ),
    flows,
)
def test_the_parts_add_up_to_the_whole(pieces: list[tuple[str, float]], flow: float) -> None:
    equipment, givens = [], {"states.0.pressure": 2e5, "states.0.temperature": 400.0, "states.0.mass_flow": flow}
    for number, (kind, share) in enumerate(pieces):
        tag = f"E{number}"
        equipment.append((tag, kind, {"inlet": (str(number),), "outlet": (str(number + 1),)}))
        if kind == "compressor":
            givens |= {
                f"equipment.{tag}.pressure_ratio": 1.1 + share,
                f"equipment.{tag}.isentropic_efficiency": 0.6 + 0.4 * share,
            }
        elif kind == "throttling-valve":
            givens[f"equipment.{tag}.pressure_drop"] = 100.0 + 2e4 * share
        else:
            sign = 1.0 if kind == "heater" else -1.0
            givens |= {
                f"equipment.{tag}.heat": sign * flow * 2e4 * share,
                f"equipment.{tag}.boundary_temperature": 350.0,
            }
    values = solve(chain(*equipment, fluid=GAS), {**SURROUNDINGS, **givens}).values
    parts = sum(values[f"equipment.{tag}.entropy_generation"][0] for tag, _, _ in equipment)
    assert values["total.entropy_generation"][0] == pytest.approx(parts, rel=1e-12, abs=1e-12)
    assert abs(values["total.closure"][0]) < 1e-9 * flow * GAS.cp
    assert abs(values["total.energy_imbalance"][0]) < 1e-9 * flow * GAS.cp * 1000.0


@settings(max_examples=40, deadline=None)
@given(st.floats(2e5, 1.5e7), st.floats(0.02, 0.98), st.floats(0.05, 0.95), flows)
def test_throttled_steam_keeps_its_enthalpy_and_generates_entropy(
    pressure: float, place: float, share: float, flow: float
) -> None:
    temperature = 300.0 + place * 700.0
    case = one_piece(
        "throttling-valve",
        THROUGH,
        {"1.pressure": pressure, "1.temperature": temperature, "1.mass_flow": flow, "2.pressure": pressure * share},
        {"water": WATER},
    )
    values = case.solve().values
    assert values["states.2.specific_enthalpy"][0] == values["states.1.specific_enthalpy"][0]
    assert values["equipment.X.entropy_generation"][0] > 0.0


@settings(max_examples=40, deadline=None)
@given(st.lists(flows, min_size=2, max_size=5), st.lists(temperatures, min_size=5, max_size=5))
def test_mixing_is_the_same_in_any_order(amounts: list[float], levels: list[float]) -> None:
    """One mixer of n streams, and n − 1 mixers of two, generate the same entropy."""
    names = [f"i{number}" for number in range(len(amounts))]
    givens: dict[str, float] = {**SURROUNDINGS}
    for name, flow, level in zip(names, amounts, levels, strict=False):
        givens |= {
            f"states.{name}.pressure": 2e5,
            f"states.{name}.temperature": level,
            f"states.{name}.mass_flow": flow,
        }
    at_once = solve(chain(("M", "mixer", {"inlets": tuple(names), "outlet": ("o",)}), fluid=GAS), givens).values
    pieces, before = [], names[0]
    for number, name in enumerate(names[1:]):
        after = f"m{number}"
        pieces.append((f"M{number}", "mixer", {"inlets": (before, name), "outlet": (after,)}))
        before = after
    in_turn = solve(chain(*pieces, fluid=GAS), givens).values
    scale = sum(amounts) * GAS.cp
    assert in_turn["total.entropy_generation"][0] == pytest.approx(
        at_once["total.entropy_generation"][0], abs=1e-12 * scale
    )
    assert at_once["total.entropy_generation"][0] >= -1e-12 * scale


@settings(max_examples=30, deadline=None)
@given(flows, st.floats(0.1, 10.0))
def test_results_scale_with_the_flow(flow: float, factor: float) -> None:
    def run(amount: float) -> dict[str, np.ndarray]:
        case = one_piece(
            "compressor",
            THROUGH,
            {
                "1.pressure": 1e5,
                "1.temperature": 300.0,
                "1.mass_flow": amount,
                "2.pressure": 4e5,
                "isentropic_efficiency": 0.8,
            },
        )
        return case.solve().values

    small, large = run(flow), run(flow * factor)
    for name in ("power", "entropy_generation", "lost_work"):
        path = f"equipment.X.{name}"
        assert large[path][0] == pytest.approx(factor * small[path][0], rel=1e-12)
    for name in ("isentropic_efficiency", "polytropic_efficiency", "exergetic_efficiency", "entropy_generation_number"):
        path = f"equipment.X.{name}"
        assert large[path][0] == pytest.approx(small[path][0], rel=1e-12)

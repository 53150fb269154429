"""Second-law and closure audits on plants made by hand."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from handmade_plants import plant, samples

from reportgen.evaluation.audits import balance_round, boundary_streams, closure_audit, second_law_audit, settle_zeros
from reportgen.evaluation.evaluated import EvaluatedPlant


def state(name: str, flow: float, enthalpy: float, entropy: float, **more: float) -> dict[str, float]:
    values = {"mass_flow": flow, "specific_enthalpy": enthalpy, "specific_entropy": entropy, **more}
    return {f"states.{name}.{key}": value for key, value in values.items()}


def piece(tag: str, **values: object) -> dict:
    return {f"equipment.{tag}.{name}": value for name, value in values.items()}


def two_machines(**changes: object) -> EvaluatedPlant:
    """Compressor A (2 kg/s, absorbs 200 kW), cooler B gives off 150 kW at 300 K; states 1, 2, 3 in a row."""
    values = {
        **state("1", 2.0, 300e3, 6800.0),
        **state("2", 2.0, 400e3, 6850.0),
        **state("3", 2.0, 325e3, 6640.0),
        **piece("A", power=200e3, heat=0.0, entropy_generation=100.0),
        **piece("B", heat=-150e3, entropy_with_heat=-500.0, entropy_generation=80.0),
        "total.entropy_generation": 180.0,
        "trains.T.entropy_generation": 180.0,
    }
    values.update(changes)  # type: ignore[arg-type]
    return plant(
        values,
        kinds={"A": "compressor", "B": "cooler"},
        connections={
            "A": [("inlet", "in", "1"), ("outlet", "out", "2")],
            "B": [("inlet", "in", "2"), ("outlet", "out", "3")],
        },
        power_signs={"A": 1},
        trains={"T": ("A", "B")},
        inputs=2,
    )


def test_only_streams_across_the_boundary_count() -> None:
    case = two_machines()
    assert boundary_streams(case, ["A"]) == (["1"], ["2"])
    assert boundary_streams(case, ["A", "B"]) == (["1"], ["3"])


def test_a_consistent_plant_closes_round_each_piece_and_round_the_whole() -> None:
    entries = closure_audit(two_machines(), ["A", "B"])
    assert {(entry["owner"], entry["quantity"]) for entry in entries} == {
        (owner, quantity)
        for owner in ("equipment.A", "equipment.B", "trains.T", "total")
        for quantity in ("mass", "energy", "entropy")
    }
    assert all(entry["relative"] < 1e-12 for entry in entries)


@pytest.mark.parametrize(
    ("path", "value", "quantity", "owners"),
    [
        ("equipment.A.power", 199e3, "energy", {"equipment.A", "trains.T", "total"}),
        ("equipment.B.heat", -151e3, "energy", {"equipment.B", "trains.T", "total"}),
        ("equipment.B.entropy_generation", 81.0, "entropy", {"equipment.B", "trains.T", "total"}),
        ("states.3.mass_flow", 2.1, "mass", {"equipment.B", "trains.T", "total"}),
        ("states.2.mass_flow", 2.1, "mass", {"equipment.A", "equipment.B"}),
        ("states.1.velocity", 100.0, "energy", {"equipment.A", "trains.T", "total"}),
    ],
)
def test_a_wrong_value_shows_where_it_is_wrong(path: str, value: float, quantity: str, owners: set[str]) -> None:
    entries = closure_audit(two_machines(**{path: value}), ["A", "B"])
    assert {entry["owner"] for entry in entries if entry["quantity"] == quantity and entry["relative"] > 1e-9} == owners


def test_kinetic_energy_is_half_the_square_of_the_velocity() -> None:
    with_velocity = balance_round(two_machines(**{"states.1.velocity": 100.0}), ["A"])["energy"][0]
    assert with_velocity == pytest.approx(2.0 * 0.5 * 100.0**2, rel=1e-9)


def test_unknown_terms_leave_a_balance_out_instead_of_guessing() -> None:
    entries = closure_audit(two_machines(**{"equipment.B.entropy_with_heat": np.nan}), ["A", "B"])
    assert {entry["owner"] for entry in entries if entry["quantity"] == "entropy"} == {"equipment.A"}


def test_second_law_verdicts_and_heaviest_inputs() -> None:
    case = two_machines(
        **{
            "equipment.A.entropy_generation": samples(100.0, 1.0, 5.0),
            "equipment.B.entropy_generation": samples(-80.0, 30.0, 40.0),
            "total.entropy_generation": samples(-180.0, 1.0, 5.0),
        }
    )
    entries = {entry["owner"]: entry for entry in second_law_audit(case, ["A", "B"])}
    assert entries["equipment.A"]["verdict"] == "generates entropy"
    assert entries["equipment.A"]["heaviest_inputs"] == ["input.1", "input.0"]
    assert entries["equipment.B"]["verdict"] == "not resolved from reversible"
    assert entries["equipment.B"]["interval"] == pytest.approx([-180.0, 20.0])
    assert entries["total"]["verdict"] == "impossible as given"
    assert entries["trains.T"]["heaviest_inputs"] == []


def test_a_zero_of_the_arithmetic_is_no_entropy_generation() -> None:
    case = two_machines(**{"equipment.A.entropy_generation": -1e-7})
    entries = {entry["owner"]: entry for entry in second_law_audit(case, ["A", "B"])}
    assert entries["equipment.A"]["verdict"] == "not resolved from reversible"


def test_what_rounding_leaves_becomes_zero_and_nothing_else() -> None:
    case = two_machines(
        **{
            "equipment.A.entropy_generation": np.full(5, 3e-8),
            "equipment.A.lost_work": np.full(5, 9e-6),
            "equipment.B.entropy_generation": samples(80.0, 1.0, 1.0),
            "equipment.A.heat": np.full(5, -1e-9),
        }
    )
    case = replace(case, values={path: np.array(array) for path, array in case.values.items()})
    settle_zeros(case, ["A", "B"])
    for path in ("equipment.A.entropy_generation", "equipment.A.lost_work", "equipment.A.heat"):
        assert case.values[path].tolist() == [0.0] * 5
    assert case.values["equipment.B.entropy_generation"][0] == 80.0
    assert case.values["equipment.B.heat"][0] == -150e3

"""Every caution of the catalogue: what trips it, what just does not, and what the uncertainty leaves open."""

from __future__ import annotations

import math
from types import SimpleNamespace

import numpy as np
import pytest
from handmade_plants import fluid, plant, samples

from reportgen.errors import InputError
from reportgen.evaluation.cautions import catalogue, check_adjustments, raised
from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.quantities import parse

ATMOSPHERE = 101300.0


def entries(identifier: str, case: EvaluatedPlant, adjustments: dict | None = None) -> list[dict]:
    found = raised(catalogue(), case, adjustments or {})
    return [entry for entry in found if entry["id"] == identifier]


def summary(identifier: str, case: EvaluatedPlant) -> list[tuple[str, str, bool]]:
    return [(entry["severity"], entry["path"], entry["decided"]) for entry in entries(identifier, case)]


def state(temperature: object, pressure: object, phase: str = "vapour", **more: object) -> dict:
    return {
        "states.1.temperature": temperature,
        "states.1.pressure": pressure,
        "states.1.phase": phase,
        "surroundings.pressure": ATMOSPHERE,
        **{f"states.1.{name}": value for name, value in more.items()},
    }


def machine(kind: str, direction: str, values: dict, **more: object) -> EvaluatedPlant:
    return plant(values, kinds={"M": kind}, connections={"M": [("port", direction, "1")]}, **more)  # type: ignore[arg-type]


def table(**limits: str) -> dict[str, SimpleNamespace]:
    dimension = {"pressure": "pressure", "temperature": "temperature", "minimum_temperature": "temperature"}
    read = {name: parse(text, dimension[name], atmosphere=ATMOSPHERE) for name, text in limits.items()}
    empty = dict.fromkeys(dimension)
    return {"M": SimpleNamespace(**{**empty, **read, "source": "Data sheet 1", "material": None})}


def test_the_catalogue_carries_these_cautions() -> None:
    plausible = [f"P{number:02}" for number in range(1, 22)]
    trade = ["T01", "T02", "T03", "T09", "T10", "T15", "T19", "T22", "T31", "T32"]
    assert [item.id for item in catalogue()] == [*plausible, *trade]
    assert all(item.source and item.gist and item.find.__doc__ for item in catalogue())


# T01: entropy generation below zero


def generation(value: np.ndarray) -> EvaluatedPlant:
    return machine(
        "turbine",
        "in",
        {**state(500.0, 1e6), "equipment.M.entropy_generation": value, "total.entropy_generation": value},
        inputs=2,
    )


def test_t01_trips_beyond_the_uncertainty_and_names_the_heaviest_inputs() -> None:
    found = entries("T01", generation(samples(-10.0, 1.0, 3.0)))
    assert [(entry["severity"], entry["path"], entry["decided"]) for entry in found] == [
        ("stop", "equipment.M.entropy_generation", True)
    ]
    assert "input.1, input.0" in found[0]["text"]
    assert found[0]["margin"] == pytest.approx(-10.0)


def test_t01_is_silent_inside_the_uncertainty() -> None:
    assert summary("T01", generation(samples(-6.0, 1.0, 3.0))) == []
    assert summary("T01", generation(samples(6.0, 1.0, 3.0))) == []


# T02: dry ice


@pytest.mark.parametrize(
    ("temperature", "raised_entries"),
    [
        (216.592, [("stop", "states.1.temperature", True)]),
        (216.60, []),
        (samples(217.5, 1.0), [("stop", "states.1.temperature", False)]),
        (samples(219.0, 1.0), []),
    ],
)
def test_t02_temperature(temperature: object, raised_entries: list) -> None:
    inputs = 1 if isinstance(temperature, np.ndarray) else 0
    case = plant(
        state(temperature, 2e6), fluids={"f": fluid("CarbonDioxide", limits=(100.0, 2000.0, 8e8))}, inputs=inputs
    )
    assert summary("T02", case) == raised_entries


def test_t02_liquid_below_the_triple_pressure() -> None:
    co2 = {"f": fluid("CO2", limits=(100.0, 2000.0, 8e8))}
    assert summary("T02", plant(state(220.0, 5.17e5, "liquid"), fluids=co2)) == [("stop", "states.1.pressure", True)]
    assert summary("T02", plant(state(220.0, 5.19e5, "liquid"), fluids=co2)) == []
    assert summary("T02", plant(state(220.0, 5.17e5, "vapour"), fluids=co2)) == []
    assert summary("T02", plant(state(215.0, 5.17e5, "liquid"), fluids={"f": fluid("Nitrogen")})) == []


# T09: liquid at compressor suction


def test_t09_two_phase_suction() -> None:
    wet = machine("compressor", "in", state(373.0, 1e5, "two-phase", quality=0.999))
    assert summary("T09", wet) == [("stop", "states.1.quality", True)]
    saturated = machine("compressor", "in", state(373.0, 1e5, "two-phase", quality=1.0))
    assert summary("T09", saturated) == []
    assert summary("T09", machine("fan", "in", state(373.0, 1e5, "two-phase", quality=0.9))) == [
        ("stop", "states.1.quality", True)
    ]
    assert summary("T09", machine("fan", "in", state(300.0, 1e5, "gas"))) == []
    assert summary("T09", machine("turbine", "in", state(373.0, 1e5, "two-phase", quality=0.9))) == []
    assert summary("T09", machine("pump", "in", state(373.0, 1e5, "two-phase", quality=0.9))) == []
    assert summary("T09", machine("compressor", "out", state(373.0, 1e5, "two-phase", quality=0.9))) == []


def test_t09_superheat_not_resolved_from_zero() -> None:
    close = machine("compressor", "in", state(samples(374.0, 0.6), 1e5), inputs=1)
    assert summary("T09", close) == [("stop", "states.1.temperature", False)]
    assert summary("T09", machine("compressor", "in", state(samples(374.3, 0.6), 1e5), inputs=1)) == []
    assert summary("T09", machine("compressor", "in", state(372.0, 1e5, "liquid"))) == [
        ("stop", "states.1.temperature", True)
    ]
    assert summary("T09", machine("compressor", "in", state(372.0, 1e5, "gas"))) == []


# T10: moisture at turbine exhaust


@pytest.mark.parametrize(
    ("quality", "raised_entries"),
    [
        (0.879, [("warning", "states.1.quality", True)]),
        (0.881, []),
        (samples(0.881, 0.001), [("warning", "states.1.quality", False)]),
    ],
)
def test_t10(quality: object, raised_entries: list) -> None:
    inputs = 1 if isinstance(quality, np.ndarray) else 0
    assert summary("T10", machine("turbine", "out", exhaust(quality), inputs=inputs)) == raised_entries


def exhaust(quality: object, power: float = 1e5) -> dict:
    return {**state(320.0, 1e4, "two-phase", quality=quality), "equipment.M.power": power}


def test_t10_only_turbine_exhausts() -> None:
    assert summary("T10", machine("throttling-valve", "out", exhaust(0.6))) == []
    assert summary("T10", machine("turbine", "in", exhaust(0.6))) == []
    assert summary("T10", machine("control-volume", "out", exhaust(0.6))) == [("warning", "states.1.quality", True)]


def test_t10_needs_power_and_an_exhaust_that_is_mostly_vapour() -> None:
    assert summary("T10", machine("control-volume", "out", exhaust(0.6, power=0.0))) == []
    assert summary("T10", machine("turbine", "out", exhaust(0.6, power=-1e5))) == []
    assert summary("T10", machine("control-volume", "out", exhaust(0.0))) == []
    assert summary("T10", machine("turbine", "out", {**state(300.0, 1e4, "liquid"), "equipment.M.power": 1e5})) == []


# T19: maximum allowable pressure, as gauge


@pytest.mark.parametrize(
    ("gauge", "raised_entries"),
    [
        (8.99e5, []),
        (9.01e5, [("warning", "states.1.pressure", True)]),
        (9.99e5, [("warning", "states.1.pressure", True)]),
        (10.01e5, [("stop", "states.1.pressure", True)]),
        (samples(9.95e5, 0.1e5), [("stop", "states.1.pressure", False)]),
        (samples(8.95e5, 0.1e5), [("warning", "states.1.pressure", False)]),
    ],
)
@pytest.mark.parametrize("written", ["10 bar(g)", "11.013 bar(a)"])
def test_t19(gauge: object, written: str, raised_entries: list) -> None:
    inputs = 1 if isinstance(gauge, np.ndarray) else 0
    values = state(500.0, np.asarray(gauge) + ATMOSPHERE)
    case = machine("throttling-valve", "in", values, limits=table(pressure=written), inputs=inputs)
    assert summary("T19", case) == raised_entries
    assert all(entry["source"].startswith("Data sheet 1; see ASME") for entry in entries("T19", case))


def test_t19_a_gauge_limit_moves_with_the_atmosphere() -> None:
    """Reading and limit both as gauge: the uncertainty of the atmosphere must cancel."""
    atmosphere = samples(ATMOSPHERE, 3000.0)
    values = {**state(500.0, atmosphere + 8.98e5), "surroundings.pressure": atmosphere}
    gauge = machine("throttling-valve", "in", values, limits=table(pressure="10 bar(g)"), inputs=1)
    assert summary("T19", gauge) == []
    absolute = machine("throttling-valve", "in", values, limits=table(pressure="11.013 bar(a)"), inputs=1)
    assert summary("T19", absolute) == [("warning", "states.1.pressure", False)]


def test_pieces_that_share_a_state_each_have_their_own_caution() -> None:
    limits = table(temperature="100 degC")
    case = plant(
        state(400.0, 1e5),
        kinds={"M": "throttling-valve", "N": "turbine"},
        connections={"M": [("inlet", "in", "1")], "N": [("inlet", "in", "1")]},
        limits={**limits, "N": limits["M"]},
    )
    assert [entry["owner"] for entry in entries("T32", case)] == ["equipment.M", "equipment.N"]


# T22: near the critical point


@pytest.mark.parametrize(
    ("temperature", "pressure", "count"),
    [(1.049, 1.0, 1), (1.051, 1.0, 0), (1.0, 0.901, 1), (1.0, 0.899, 0), (0.951, 1.099, 1), (0.949, 1.0, 0)],
)
def test_t22(temperature: float, pressure: float, count: int) -> None:
    found = summary("T22", plant(state(647.096 * temperature, 22.064e6 * pressure)))
    assert found == [("note", "states.1.temperature", True)] * count


def test_t22_needs_a_critical_point() -> None:
    assert summary("T22", plant(state(647.0, 22e6, "gas"), fluids={"f": fluid(critical=None)})) == []


# T31: outside the property model


@pytest.mark.parametrize(
    ("temperature", "pressure", "raised_entries"),
    [
        (273.17, 1e5, []),
        (273.15, 1e5, [("stop", "states.1.temperature", True)]),
        (2000.1, 1e5, [("stop", "states.1.temperature", True)]),
        (1999.0, 1e5, []),
        (500.0, 1.01e9, [("stop", "states.1.pressure", True)]),
        (samples(273.5, 0.3), 1e5, [("stop", "states.1.temperature", False)]),
        (np.array([273.3, 273.6, math.nan]), 1e5, [("stop", "states.1.temperature", False)]),
    ],
)
def test_t31(temperature: object, pressure: float, raised_entries: list) -> None:
    inputs = 1 if isinstance(temperature, np.ndarray) else 0
    assert summary("T31", plant(state(temperature, pressure), inputs=inputs)) == raised_entries


def test_t31_a_model_without_a_pressure_limit() -> None:
    unlimited = {"f": fluid(limits=(200.0, 6000.0, math.inf))}
    assert summary("T31", plant(state(300.0, 1e12, "gas"), fluids=unlimited)) == []


@pytest.mark.parametrize(("temperature", "count"), [(1273.1, 1), (1272.9, 0)])
def test_t31_beyond_what_the_publication_claims(temperature: float, count: int) -> None:
    extrapolated = {"f": fluid(published_maximum=1273.0)}
    found = summary("T31", plant(state(temperature, 1e5), fluids=extrapolated))
    assert found == [("stop", "states.1.temperature", True)] * count


# T32: temperature limits of the equipment


@pytest.mark.parametrize(
    ("celsius", "raised_entries"),
    [
        (89.0, []),
        (91.0, [("warning", "states.1.temperature", True)]),
        (99.0, [("warning", "states.1.temperature", True)]),
        (101.0, [("stop", "states.1.temperature", True)]),
        (1.0, []),
        (-1.0, [("warning", "states.1.temperature", True)]),
        (-11.0, [("stop", "states.1.temperature", True)]),
        (samples(99.0, 1.0), [("stop", "states.1.temperature", False)]),
    ],
)
def test_t32(celsius: object, raised_entries: list) -> None:
    inputs = 1 if isinstance(celsius, np.ndarray) else 0
    values = state(np.asarray(celsius) + 273.15, 1e5)
    limits = table(temperature="100 degC", minimum_temperature="-10 degC")
    assert summary("T32", machine("cooler", "out", values, limits=limits, inputs=inputs)) == raised_entries


# Wording


def test_an_undecided_caution_says_that_it_may_be_so() -> None:
    def text(value: object) -> str:
        inputs = 1 if isinstance(value, np.ndarray) else 0
        case = machine("cooler", "out", state(value, 1e5), limits=table(temperature="400 degC"), inputs=inputs)
        return str(entries("T32", case)[0]["text"])

    assert text(680.0) == "State 1 is hotter than the maximum temperature of M."
    assert text(samples(670.0, 2.0)).startswith("State 1 may be hotter than the maximum temperature of M.")
    assert text(samples(670.0, 2.0)).endswith("This is not decided within the uncertainty.")


def test_every_text_has_its_alternatives_resolved() -> None:
    values = state(samples(647.0, 1.0), samples(22.0e6, 1e4))
    limits = table(pressure="230 bar(a)", minimum_temperature="373 degC")
    found = raised(catalogue(), machine("throttling-valve", "in", values, limits=limits, inputs=1), {})
    assert {entry["decided"] for entry in found} == {True, False}
    assert not any("⟦" in entry["text"] for entry in found)


# Adjustments, order


def test_a_limit_moves_with_its_reason() -> None:
    case = machine("turbine", "out", exhaust(0.87))
    adjusted = {"T10": SimpleNamespace(limit=parse("14 %", "ratio", atmosphere=None), reason="Stellite blades", line=3)}
    assert entries("T10", case, adjusted) == []
    answered = {"T10": SimpleNamespace(limit=None, reason="Accepted by the vendor", line=3)}
    assert [entry["adjusted"] for entry in entries("T10", case, answered)] == ["Accepted by the vendor"]


def test_adjustments_that_would_do_nothing_are_refused_all_at_once() -> None:
    adjustments = {
        "T99": SimpleNamespace(limit=None, reason="x", line=3),
        "T09": SimpleNamespace(limit=parse("14 %", "ratio", atmosphere=None), reason="x", line=5),
        "T10": SimpleNamespace(limit=parse("14 K", "temperature_difference", atmosphere=None), reason="x", line=7),
        "T32": SimpleNamespace(limit=parse("5 K", "temperature_difference", atmosphere=None), reason="x", line=9),
    }
    with pytest.raises(InputError) as caught:
        check_adjustments(catalogue(), adjustments, "calculation.toml")
    assert [(fault.line, fault.path) for fault in caught.value.faults] == [
        (3, "cautions.T99"),
        (5, "cautions.T09.limit"),
        (7, "cautions.T10.limit"),
    ]


def test_stops_come_first() -> None:
    values = state(647.0, 22.0e6)
    case = machine("throttling-valve", "in", values, limits=table(temperature="300 degC", pressure="230 bar(a)"))
    assert [entry["severity"] for entry in raised(catalogue(), case, {})] == ["stop", "warning", "note"]

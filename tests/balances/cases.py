"""Small plants that several tests solve, with one set of givens that determines each."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from reportgen.balances import EquipmentDefinition, Plant, Train, solve
from reportgen.fluids import ideal_gas, real_fluid
from reportgen.fluids.reacting.product_gas import ProductGas
from tests.balances.models import SimpleGas

SURROUNDINGS = {"surroundings.temperature": 288.15, "surroundings.pressure": 1.013e5}


_FUEL, _AIR = ideal_gas("CH4"), ideal_gas("air")


@dataclass(frozen=True)
class Case:
    """A plant and the givens that determine it."""

    plant: Plant
    givens: dict[str, float]

    def solve(self, drop: tuple[str, ...] = (), give: dict[str, Any] | None = None) -> Any:
        """Solve with some givens left out and others put in."""
        givens = {path: value for path, value in self.givens.items() if path not in drop}
        return solve(self.plant, {**SURROUNDINGS, **givens, **(give or {})})


def one_piece(
    kind: str,
    ports: dict[str, tuple[str, ...]],
    givens: dict[str, float],
    fluids: dict[str, Any] | None = None,
    of: dict[str, str] | None = None,
    options: dict[str, Any] | None = None,
) -> Case:
    """A plant of one piece "X"; givens in short: "1.pressure" is a state's, "power" the piece's."""
    fluids = fluids or {"gas": SimpleGas()}
    states = dict.fromkeys(state for group in ports.values() for state in group)
    of = of or dict.fromkeys(states, next(iter(fluids)))
    plant = Plant(fluids, {s: of[s] for s in states}, {"X": EquipmentDefinition(kind, ports, options or {})})
    return Case(plant, {long(path): value for path, value in givens.items()})


def long(path: str) -> str:
    """Full path of a short one."""
    if path.split(".")[0] in ("states", "equipment", "surroundings"):
        return path
    head = path.split(".")[0]
    return f"states.{path}" if head[0].isdigit() else f"equipment.X.{path}"


def chain(
    *pieces: tuple[str, str, dict[str, tuple[str, ...]]], fluid: Any, trains: dict[str, Train] | None = None
) -> Plant:
    """A plant of several pieces (tag, kind, ports) with one fluid "f"."""
    equipment = {tag: EquipmentDefinition(kind, ports) for tag, kind, ports in pieces}
    states = dict.fromkeys(state for _, _, ports in pieces for group in ports.values() for state in group)
    return Plant({"f": fluid}, dict.fromkeys(states, "f"), equipment, trains or {})


INLET = {"1.pressure": 1.0e5, "1.temperature": 300.0, "1.mass_flow": 2.0}
THROUGH = {"inlet": ("1",), "outlet": ("2",)}
EXCHANGER = {"hot_inlet": ("1",), "hot_outlet": ("2",), "cold_inlet": ("3",), "cold_outlet": ("4",)}

COMPRESSOR = one_piece("compressor", THROUGH, {**INLET, "2.pressure": 6.0e5, "isentropic_efficiency": 0.8})
TURBINE = one_piece(
    "turbine",
    THROUGH,
    {"1.pressure": 9e5, "1.temperature": 900.0, "1.mass_flow": 2.0, "2.pressure": 1e5, "isentropic_efficiency": 0.85},
)
PUMP = one_piece("pump", THROUGH, {**INLET, "2.pressure": 1.5e5, "isentropic_efficiency": 0.7})
VALVE = one_piece("throttling-valve", THROUGH, {**INLET, "2.pressure": 0.6e5})
HEATER = one_piece("heater", THROUGH, {**INLET, "heat": 3.0e5, "pressure_drop": 2e3, "boundary_temperature": 600.0})
COOLER = one_piece("cooler", THROUGH, {**INLET, "heat": -5.0e4, "pressure_drop": 2e3})
COMBUSTOR = one_piece(
    "combustor",
    {"inlets": ("1", "2"), "outlet": ("3",)},
    {
        "1.pressure": 1.2e5,
        "1.temperature": 290.0,
        "1.mass_flow": 0.02,
        "2.pressure": 1.1e5,
        "2.temperature": 300.0,
        "excess_air": 0.25,
        "heat": -2.0e5,
        "pressure_drop": 2e3,
        "boundary_temperature": 600.0,
    },
    fluids={"fuel": _FUEL, "air": _AIR, "flue": ProductGas("Flue gas", {"1": _FUEL, "2": _AIR}, "complete")},
    of={"1": "fuel", "2": "air", "3": "flue"},
)
HEAT_EXCHANGER = one_piece(
    "heat-exchanger",
    EXCHANGER,
    {
        "1.pressure": 3e5,
        "1.temperature": 600.0,
        "1.mass_flow": 2.0,
        "2.temperature": 400.0,
        "3.pressure": 2e5,
        "3.temperature": 290.0,
        "3.mass_flow": 1.5,
        "heat": -1e4,
        "hot_pressure_drop": 5e3,
        "cold_pressure_drop": 4e3,
    },
)
MIXER = one_piece(
    "mixer",
    {"inlets": ("1", "2"), "outlet": ("3",)},
    {
        "1.pressure": 1.2e5,
        "1.temperature": 300.0,
        "1.mass_flow": 2.0,
        "2.pressure": 1.1e5,
        "2.temperature": 500.0,
        "2.mass_flow": 0.7,
        "heat": -2e3,
        "pressure_drop": 3e3,
    },
)
SPLITTER = one_piece(
    "splitter",
    {"inlet": ("1",), "outlets": ("2", "3")},
    {**INLET, "2.mass_flow": 0.5, "pressure_drop": 1e3},
)
CONTROL_VOLUME = one_piece(
    "control-volume",
    {"inlets": ("1", "2"), "outlets": ("3", "4")},
    {
        "1.pressure": 1.2e5,
        "1.temperature": 300.0,
        "1.mass_flow": 2.0,
        "2.pressure": 1.1e5,
        "2.temperature": 500.0,
        "2.mass_flow": 0.7,
        "3.pressure": 1.0e5,
        "3.temperature": 350.0,
        "3.mass_flow": 1.1,
        "4.pressure": 1.05e5,
        "power": 5e4,
        "heat": 1e4,
        "boundary_temperature": 450.0,
    },
)
FAN = one_piece(
    "fan",
    THROUGH,
    {
        **INLET,
        "1.velocity": 12.0,
        "2.velocity": 25.0,
        "pressure_rise": 4e3,
        "isentropic_efficiency": 0.75,
        "mechanical_efficiency": 0.9,
    },
)
NOZZLE = one_piece(
    "nozzle",
    THROUGH,
    {
        "1.pressure": 3e5,
        "1.temperature": 500.0,
        "1.mass_flow": 2.0,
        "1.velocity": 40.0,
        "2.pressure": 2e5,
        "isentropic_efficiency": 0.95,
    },
)
DIFFUSER = one_piece(
    "diffuser",
    THROUGH,
    {
        "1.pressure": 1e5,
        "1.temperature": 300.0,
        "1.mass_flow": 2.0,
        "1.velocity": 180.0,
        "outlet_area": 0.05,
        "isentropic_efficiency": 0.9,
    },
)
PIPE = one_piece(
    "pipe",
    THROUGH,
    {
        **INLET,
        "pressure_drop": 5e3,
        "inner_diameter": 0.3,
        "heat": -3e4,
        "boundary_temperature": 290.0,
        "1.elevation": 2.0,
        "2.elevation": 30.0,
    },
)
SEPARATOR = one_piece(
    "separator",
    {"inlet": ("1",), "vapour_outlet": ("2",), "liquid_outlet": ("3",)},
    {
        "1.pressure": 3e5,
        "1.specific_enthalpy": 3e5,
        "1.mass_flow": 2.0,
        "pressure_drop": 1e4,
        "heat": -5e3,
        "boundary_temperature": 270.0,
    },
    {"R134a": real_fluid("R134a")},
)
CASES = {
    "compressor": COMPRESSOR,
    "turbine": TURBINE,
    "pump": PUMP,
    "throttling-valve": VALVE,
    "heater": HEATER,
    "cooler": COOLER,
    "heat-exchanger": HEAT_EXCHANGER,
    "mixer": MIXER,
    "splitter": SPLITTER,
    "control-volume": CONTROL_VOLUME,
    "combustor": COMBUSTOR,
    "fan": FAN,
    "nozzle": NOZZLE,
    "diffuser": DIFFUSER,
    "pipe": PIPE,
    "separator": SEPARATOR,
}

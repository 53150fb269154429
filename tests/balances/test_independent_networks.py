"""Six networks solved a second time by scripts that know nothing of networks: balances written out, CoolProp's states.

Every value the script knows is met within 1e-6: temperatures, pressures, flows, powers, heats, entropy generation, lost
work, efficiencies; enthalpies and entropies from the first state of their fluid, since the zeros differ.
"""

from __future__ import annotations

from dataclasses import dataclass

import pytest
from CoolProp.CoolProp import PropsSI
from scipy.optimize import brentq

from reportgen.balances import Plant, solve
from reportgen.fluids import real_fluid
from tests.balances.cases import SURROUNDINGS, chain
from tests.balances.test_cycles import across, through

T0, P0 = 288.15, 1.013e5


@dataclass(frozen=True)
class State:
    """One state by CoolProp, with its flow."""

    fluid: str
    p: float
    h: float
    m: float = 1.0

    def get(self, key: str) -> float:
        return float(PropsSI(key, "P", self.p, "H", self.h, self.fluid))

    @property
    def s(self) -> float:
        return self.get("S")

    @property
    def t(self) -> float:
        return self.get("T")

    def with_flow(self, flow: float) -> State:
        return State(self.fluid, self.p, self.h, flow)


def at(fluid: str, flow: float = 1.0, **pair: float) -> State:
    """A state from two of P, T, Q, H, S."""
    (a, x), (b, y) = pair.items()
    return State(fluid, float(PropsSI("P", a, x, b, y, fluid)), float(PropsSI("H", a, x, b, y, fluid)), flow)


def machine(first: State, pressure: float, efficiency: float, turbine: bool) -> State:
    ideal = PropsSI("H", "P", pressure, "S", first.s, first.fluid) - first.h
    return State(first.fluid, pressure, first.h + (efficiency * ideal if turbine else ideal / efficiency), first.m)


class Check:
    """Compares the solution of a plant with states and heats of a script."""

    def __init__(self, plant: Plant, givens: dict[str, float], states: dict[str, State]) -> None:
        solution = solve(plant, {**SURROUNDINGS, **givens})
        self.values = {path: array[0] for path, array in solution.values.items() if array.dtype.kind == "f"}
        self.states = states
        self.compared = 0
        first: dict[str, str] = {}
        for name, state in states.items():
            origin = first.setdefault(state.fluid, name)
            for path, value in (("pressure", state.p), ("temperature", state.t), ("mass_flow", state.m)):
                self.same(f"states.{name}.{path}", value)
            zero = states[origin]
            for path, value, scale in (
                ("specific_enthalpy", state.h - zero.h, 1e5),
                ("specific_entropy", state.s - zero.s, 1e3),
            ):
                found = self.values[f"states.{name}.{path}"] - self.values[f"states.{origin}.{path}"]
                assert found == pytest.approx(value, rel=1e-6, abs=1e-6 * scale), (name, path)
                self.compared += 1
            dead = at(state.fluid, P=P0, T=T0)
            exergy = state.h - dead.h - T0 * (state.s - dead.s)
            self.same(f"states.{name}.specific_exergy", exergy, 1e5)

    def same(self, path: str, value: float, scale: float = 0.0) -> None:
        assert self.values[path] == pytest.approx(value, rel=1e-6, abs=1e-6 * scale), path
        self.compared += 1

    def generation(self, tag: str, ins: str, outs: str, heat: float = 0.0, boundary: float = T0) -> float:
        """Entropy balance of a piece: what leaves, less what enters, less what comes with heat."""
        flows = [self.states[name].m * self.states[name].s for name in outs.split()]
        flows += [-self.states[name].m * self.states[name].s for name in ins.split()]
        value = sum(flows) - heat / boundary
        scale = max(abs(flow) for flow in flows)
        self.same(f"equipment.{tag}.entropy_generation", value, 0.1 * scale)
        self.same(f"equipment.{tag}.lost_work", T0 * value, 0.1 * T0 * scale)
        return value


def test_steam_cycle_with_reheat_and_two_feed_heaters() -> None:
    """Closed and open feed heater with unknown extraction flows, drains throttled back, in one closed loop."""
    plant = chain(
        ("B", "heater", through("17", "1")),
        ("HP", "turbine", through("1", "2")),
        ("S1", "splitter", {"inlet": ("2",), "outlets": ("3", "4")}),
        ("R", "heater", through("4", "5")),
        ("IP", "turbine", through("5", "6")),
        ("S2", "splitter", {"inlet": ("6",), "outlets": ("7", "8")}),
        ("LP", "turbine", through("8", "9")),
        ("C", "cooler", through("9", "10")),
        ("P1", "pump", through("10", "11")),
        ("D", "mixer", {"inlets": ("7", "11", "14"), "outlet": ("12",)}),
        ("P2", "pump", through("12", "15")),
        ("FH", "heat-exchanger", across("3", "13", "15", "17")),
        ("V", "throttling-valve", through("13", "14")),
        fluid=real_fluid("water"),
    )
    givens = {
        "states.1.pressure": 100e5,
        "states.1.temperature": 773.15,
        "states.1.mass_flow": 40.0,
        "states.2.pressure": 25e5,
        "states.5.temperature": 773.15,
        "states.6.pressure": 5e5,
        "states.9.pressure": 8e3,
        "states.10.quality": 0.0,
        "states.12.quality": 0.0,
        "states.13.quality": 0.0,
        "states.17.temperature": 490.15,
        "equipment.R.pressure_drop": 1e5,
        "equipment.HP.isentropic_efficiency": 0.86,
        "equipment.IP.isentropic_efficiency": 0.88,
        "equipment.LP.isentropic_efficiency": 0.85,
        "equipment.P1.isentropic_efficiency": 0.75,
        "equipment.P2.isentropic_efficiency": 0.78,
        "equipment.B.boundary_temperature": 1200.0,
        "equipment.R.boundary_temperature": 1200.0,
        "equipment.C.boundary_temperature": 295.0,
    }
    w = "Water"
    s1 = at(w, 40.0, P=100e5, T=773.15)
    s2 = machine(s1, 25e5, 0.86, True)
    s5 = at(w, P=24e5, T=773.15)
    s6 = machine(s5, 5e5, 0.88, True)
    s9 = machine(s6, 8e3, 0.85, True)
    s10, s12, s13 = at(w, P=8e3, Q=0), at(w, P=5e5, Q=0), at(w, P=25e5, Q=0)
    s11, s15 = machine(s10, 5e5, 0.75, False), machine(s12, 100e5, 0.78, False)
    s17 = at(w, P=100e5, T=490.15)
    s14 = State(w, 5e5, s13.h)
    m3 = 40.0 * (s17.h - s15.h) / (s2.h - s13.h)
    # Deaerator: m7 h6 + (40 − m3 − m7) h11 + m3 h14 = 40 h12.
    m7 = (40.0 * s12.h - (40.0 - m3) * s11.h - m3 * s14.h) / (s6.h - s11.h)
    m4, m8 = 40.0 - m3, 40.0 - m3 - m7
    flows = {"2": (s2, 40.0), "3": (s2, m3), "4": (s2, m4), "5": (s5, m4), "6": (s6, m4), "7": (s6, m7), "8": (s6, m8)}
    flows |= {"9": (s9, m8), "10": (s10, m8), "11": (s11, m8), "12": (s12, 40.0), "13": (s13, m3), "14": (s14, m3)}
    flows |= {"15": (s15, 40.0), "17": (s17, 40.0)}
    states = {"1": s1} | {name: state.with_flow(flow) for name, (state, flow) in flows.items()}
    check = Check(plant, givens, states)
    boiler, reheater, condenser = 40.0 * (s1.h - s17.h), m4 * (s5.h - s2.h), m8 * (s10.h - s9.h)
    check.same("equipment.B.heat", boiler)
    check.same("equipment.R.heat", reheater)
    check.same("equipment.C.heat", condenser)
    turbines = 40.0 * (s1.h - s2.h) + m4 * (s5.h - s6.h) + m8 * (s6.h - s9.h)
    pumps = m8 * (s11.h - s10.h) + 40.0 * (s15.h - s12.h)
    check.same("equipment.S1.split_fraction", m3 / 40.0)
    check.same("equipment.S2.split_fraction", m7 / m4)
    check.same("equipment.FH.duty", m3 * (s2.h - s13.h))
    check.same("total.net_power", turbines - pumps)
    check.same("total.thermal_efficiency", (turbines - pumps) / (boiler + reheater))
    exergy = (boiler + reheater) * (1.0 - T0 / 1200.0)
    check.same("total.second_law_efficiency", (turbines - pumps) / exergy)
    parts = [
        check.generation("HP", "1", "2"),
        check.generation("IP", "5", "6"),
        check.generation("LP", "8", "9"),
        check.generation("P1", "10", "11"),
        check.generation("P2", "12", "15"),
        check.generation("D", "7 11 14", "12"),
        check.generation("FH", "3 15", "13 17"),
        check.generation("V", "13", "14"),
        check.generation("B", "17", "1", boiler, 1200.0),
        check.generation("R", "4", "5", reheater, 1200.0),
        check.generation("C", "9", "10", condenser, 295.0),
    ]
    check.same("total.entropy_generation", sum(parts))
    assert check.compared > 110


def test_recuperated_organic_rankine_cycle() -> None:
    plant = chain(
        ("P", "pump", through("1", "2")),
        ("R", "heat-exchanger", across("5", "6", "2", "3")),
        ("E", "heat-exchanger", across("11", "12", "3", "4")),
        ("T", "turbine", through("4", "5")),
        ("C", "cooler", through("6", "1")),
        fluid=real_fluid("R245fa"),
    )
    plant = Plant(
        {**plant.fluids, "w": real_fluid("water")}, {**plant.states, "11": "w", "12": "w"}, plant.equipment, {}
    )
    givens = {
        "states.1.temperature": 308.15,
        "states.1.quality": 0.0,
        "states.4.pressure": 18e5,
        "states.4.superheat": 20.0,
        "states.11.pressure": 8e5,
        "states.11.temperature": 423.15,
        "states.11.mass_flow": 6.0,
        "states.12.temperature": 378.15,
        "equipment.P.isentropic_efficiency": 0.65,
        "equipment.T.isentropic_efficiency": 0.82,
        "equipment.R.duty": 60e3,
        "equipment.R.cold_pressure_drop": 2e4,
        "equipment.R.hot_pressure_drop": 5e3,
        "equipment.E.cold_pressure_drop": 3e4,
        "equipment.C.pressure_drop": 4e3,
        "equipment.C.boundary_temperature": 300.0,
    }
    f, w = "R245fa", "Water"
    s1 = at(f, T=308.15, Q=0)
    s2 = machine(s1, 18.5e5, 0.65, False)
    s4 = at(f, P=18e5, T=PropsSI("T", "P", 18e5, "Q", 1, f) + 20.0)
    s5 = machine(s4, s1.p + 9e3, 0.82, True)
    hot = at(w, 6.0, P=8e5, T=423.15), at(w, 6.0, P=8e5, T=378.15)
    supplied = 6.0 * (hot[0].h - hot[1].h)
    # Evaporator and recuperator together: ṁ (h4 − h2) = supplied + 60 kW.
    flow = (supplied + 60e3) / (s4.h - s2.h)
    s3, s6 = State(f, 18.3e5, s2.h + 60e3 / flow), State(f, s1.p + 4e3, s5.h - 60e3 / flow)
    states = {name: state.with_flow(flow) for name, state in zip("123456", (s1, s2, s3, s4, s5, s6), strict=True)}
    check = Check(plant, givens, {**states, "11": hot[0], "12": hot[1]})
    rejected = flow * (s6.h - s1.h)
    net = flow * (s4.h - s5.h - s2.h + s1.h)
    check.same("equipment.E.duty", supplied)
    check.same("equipment.C.heat", -rejected)
    check.same("total.net_power", net)
    check.same("total.heat_supplied", supplied)
    check.same("total.heat_rejected", rejected)
    check.same("total.thermal_efficiency", net / supplied)
    exergy = 6.0 * (hot[0].h - hot[1].h - T0 * (hot[0].s - hot[1].s))
    check.same("total.second_law_efficiency", net / exergy)
    parts = [
        check.generation("P", "1", "2"),
        check.generation("R", "5 2", "6 3"),
        check.generation("E", "11 3", "12 4"),
        check.generation("T", "4", "5"),
        check.generation("C", "6", "1", -rejected, 300.0),
    ]
    check.same("total.entropy_generation", sum(parts))
    assert check.compared > 55


def test_two_stage_cascade() -> None:
    """CO2 below, ammonia above; the cascade condenser couples their flows, an internal exchanger superheats."""
    plant = chain(
        ("K1", "compressor", through("1", "2")),
        ("CC", "heat-exchanger", across("2", "3", "14", "15")),
        ("X", "heat-exchanger", across("3", "4", "6", "1")),
        ("V1", "throttling-valve", through("4", "5")),
        ("E", "heater", through("5", "6")),
        ("K2", "compressor", through("11", "12")),
        ("C", "cooler", through("12", "13")),
        ("V2", "throttling-valve", through("13", "14")),
        ("P", "pipe", through("15", "11")),
        fluid=real_fluid("CO2"),
    )
    upper = dict.fromkeys(("11", "12", "13", "14", "15"), "a")
    plant = Plant({**plant.fluids, "a": real_fluid("ammonia")}, {**plant.states, **upper}, plant.equipment, {})
    givens = {
        "states.6.temperature": 233.15,
        "states.6.quality": 1.0,
        "states.1.temperature": 248.15,
        "states.3.temperature": 268.15,
        "states.3.quality": 0.0,
        "states.15.temperature": 263.15,
        "states.15.quality": 1.0,
        "states.13.temperature": 308.15,
        "states.13.subcooling": 4.0,
        "equipment.K1.isentropic_efficiency": 0.7,
        "equipment.K2.polytropic_efficiency": 0.8,
        "equipment.P.heat": 1500.0,
        "equipment.P.boundary_temperature": 285.0,
        "equipment.E.heat": 100e3,
        "equipment.E.boundary_temperature": 238.15,
        "equipment.C.boundary_temperature": 295.0,
    }
    c, a = "CO2", "Ammonia"
    low, middle = PropsSI("P", "T", 233.15, "Q", 1, c), PropsSI("P", "T", 268.15, "Q", 0, c)
    s6, s1, s3 = at(c, T=233.15, Q=1), at(c, P=low, T=248.15), at(c, T=268.15, Q=0)
    s2 = machine(s1, middle, 0.7, False)
    s4 = State(c, middle, s3.h - (s1.h - s6.h))
    s5 = State(c, low, s4.h)
    carbon = 100e3 / (s6.h - s5.h)
    duty = carbon * (s2.h - s3.h)
    s15 = at(a, T=263.15, Q=1)
    high = PropsSI("P", "T", 312.15, "Q", 0, a)
    s13 = at(a, P=high, T=308.15)
    s14 = State(a, s15.p, s13.h)
    ammonia = duty / (s15.h - s14.h)
    s11 = State(a, s15.p, s15.h + 1500.0 / ammonia)
    s12 = polytropic(s11, high, 0.8)
    states = {name: s.with_flow(carbon) for name, s in zip("123456", (s1, s2, s3, s4, s5, s6), strict=True)}
    above = zip(("11", "12", "13", "14", "15"), (s11, s12, s13, s14, s15), strict=True)
    states |= {name: state.with_flow(ammonia) for name, state in above}
    check = Check(plant, givens, states)
    work = carbon * (s2.h - s1.h) + ammonia * (s12.h - s11.h)
    rejected = ammonia * (s12.h - s13.h)
    check.same("equipment.CC.duty", duty)
    check.same("equipment.X.duty", carbon * (s1.h - s6.h))
    check.same("total.net_power", work)
    check.same("total.heat_rejected", rejected)
    check.same("total.heat_supplied", 101.5e3)
    # The heat that warms the ammonia on its way is supplied, but nothing that the cascade is for.
    check.same("total.coefficient_of_performance", 100e3 / work)
    check.same("total.second_law_efficiency", 100e3 * (T0 / 238.15 - 1.0) / work)
    parts = [
        check.generation("K1", "1", "2"),
        check.generation("CC", "2 14", "3 15"),
        check.generation("X", "3 6", "4 1"),
        check.generation("V1", "4", "5"),
        check.generation("E", "5", "6", 100e3, 238.15),
        check.generation("K2", "11", "12"),
        check.generation("C", "12", "13", -rejected, 295.0),
        check.generation("V2", "13", "14"),
        check.generation("P", "15", "11", 1500.0, 285.0),
    ]
    check.same("total.entropy_generation", sum(parts))
    assert check.compared > 80


def polytropic(first: State, pressure: float, efficiency: float) -> State:
    """dh = v dp/η in small steps of ln p, each by the classical Runge–Kutta method."""
    import numpy as np

    steps = 60
    width = np.log(pressure / first.p) / steps
    p, h = first.p, first.h

    def slope(at_p: float, at_h: float) -> float:
        return float(at_p / PropsSI("D", "P", at_p, "H", at_h, first.fluid) / efficiency)

    for number in range(steps):
        middle, end = p * np.exp(width / 2), first.p * np.exp((number + 1) * width)
        k1 = slope(p, h)
        k2 = slope(middle, h + width / 2 * k1)
        k3 = slope(middle, h + width / 2 * k2)
        k4 = slope(end, h + width * k3)
        h += width / 6 * (k1 + 2 * k2 + 2 * k3 + k4)
        p = end
    return State(first.fluid, pressure, h, first.m)


def test_two_stage_carbon_dioxide_compression_into_the_dense_phase() -> None:
    plant = chain(
        ("K1", "compressor", through("1", "2")),
        ("C1", "cooler", through("2", "3")),
        ("K2", "compressor", through("3", "4")),
        ("C2", "cooler", through("4", "5")),
        fluid=real_fluid("CO2"),
    )
    givens = {
        "states.1.pressure": 15e5,
        "states.1.temperature": 298.15,
        "states.1.mass_flow": 4.0,
        "states.3.temperature": 313.15,
        "states.4.pressure": 110e5,
        "states.5.temperature": 303.15,
        "equipment.K1.pressure_ratio": 3.0,
        "equipment.K1.polytropic_efficiency": 0.82,
        "equipment.K1.mechanical_efficiency": 0.96,
        "equipment.K2.polytropic_efficiency": 0.8,
        "equipment.C1.pressure_drop": 5e4,
        "equipment.C1.boundary_temperature": 300.0,
        "equipment.C2.boundary_temperature": 300.0,
    }
    c = "CO2"
    s1 = at(c, 4.0, P=15e5, T=298.15)
    s2 = polytropic(s1, 45e5, 0.82)
    s3 = at(c, 4.0, P=44.5e5, T=313.15)
    s4 = polytropic(s3, 110e5, 0.8)
    s5 = at(c, 4.0, P=110e5, T=303.15)
    check = Check(plant, givens, {"1": s1, "2": s2, "3": s3, "4": s4, "5": s5})
    first, second = 4.0 * (s2.h - s1.h), 4.0 * (s4.h - s3.h)
    check.same("equipment.K1.power", first)
    check.same("equipment.K1.shaft_power", first / 0.96)
    check.same("equipment.K2.power", second)
    for tag, start, end in (("K1", s1, s2), ("K2", s3, s4)):
        ideal = PropsSI("H", "P", end.p, "S", start.s, c) - start.h
        check.same(f"equipment.{tag}.isentropic_efficiency", ideal / (end.h - start.h))
    cold = at(c, P=110e5, T=298.15)
    work = cold.h - s1.h - 298.15 * (cold.s - s1.s)
    check.same("total.isothermal_work", work)
    check.same("total.isothermal_efficiency", 4.0 * work / (first / 0.96 + second))
    check.same("total.pressure_ratio", 110.0 / 15.0)
    heats = 4.0 * (s3.h - s2.h), 4.0 * (s5.h - s4.h)
    lost = first * (1 / 0.96 - 1)
    generated = 4.0 * (s2.s - s1.s) + lost / T0
    check.same("equipment.K1.entropy_generation", generated)
    parts = [
        generated,
        check.generation("K2", "3", "4"),
        check.generation("C1", "2", "3", heats[0], 300.0),
        check.generation("C2", "4", "5", heats[1], 300.0),
    ]
    check.same("total.entropy_generation", sum(parts))
    check.same("total.heat", sum(heats) - lost)


def test_flash_drum_with_gas_and_liquid_drawn_off() -> None:
    """Liquid throttled into a drum; its pressure is found from the vapour that is drawn off."""
    plant = chain(
        ("V", "throttling-valve", through("1", "2")),
        ("D", "separator", {"inlet": ("2",), "vapour_outlet": ("3",), "liquid_outlet": ("4",)}),
        ("P", "pump", through("4", "5")),
        fluid=real_fluid("ammonia"),
    )
    a = "Ammonia"
    s1 = at(a, 2.0, P=12e5, T=298.15)

    def drum(pressure: float) -> tuple[State, State, State]:
        vapour, liquid = at(a, P=pressure - 2e3, Q=1), at(a, P=pressure - 2e3, Q=0)
        # 2.0 h1 + 5 kW = m h_v + (2.0 − m) h_l
        gas = (2.0 * (s1.h - liquid.h) + 5e3) / (vapour.h - liquid.h)
        return State(a, pressure, s1.h, 2.0), vapour.with_flow(gas), liquid.with_flow(2.0 - gas)

    pressure = brentq(lambda p: drum(p)[1].m - 0.25, 1e5, 8e5, xtol=1e-7, rtol=1e-14)
    s2, s3, s4 = drum(pressure)
    s5 = machine(s4, 12e5, 0.6, False)
    givens = {
        "states.1.pressure": 12e5,
        "states.1.temperature": 298.15,
        "states.1.mass_flow": 2.0,
        "states.3.mass_flow": 0.25,
        "states.5.pressure": 12e5,
        "equipment.D.heat": 5e3,
        "equipment.D.boundary_temperature": 280.0,
        "equipment.D.pressure_drop": 2e3,
        "equipment.P.isentropic_efficiency": 0.6,
    }
    check = Check(plant, givens, {"1": s1, "2": s2, "3": s3, "4": s4, "5": s5})
    check.same("states.2.quality", s2.get("Q"))
    check.same("equipment.P.power", s4.m * (s5.h - s4.h))
    parts = [
        check.generation("V", "1", "2"),
        check.generation("D", "2", "3 4", 5e3, 280.0),
        check.generation("P", "4", "5"),
    ]
    check.same("total.entropy_generation", sum(parts))
    e = {name: check.values[f"states.{name}.specific_exergy"] for name in "234"}
    check.same("equipment.D.exergetic_efficiency", (s3.m * e["3"] + s4.m * e["4"]) / (s2.m * e["2"]))


def test_desuperheater_with_the_spray_flow_unknown() -> None:
    """Steam let down, sprayed to a stated superheat, led through a pipe with velocities, height and heat loss."""
    plant = chain(
        ("V", "throttling-valve", through("1", "2")),
        ("P", "pump", through("3", "4")),
        ("D", "mixer", {"inlets": ("2", "4"), "outlet": ("5",)}),
        ("L", "pipe", through("5", "6")),
        fluid=real_fluid("water"),
    )
    givens = {
        "states.1.pressure": 40e5,
        "states.1.temperature": 673.15,
        "states.2.pressure": 10e5,
        "states.3.pressure": 3e5,
        "states.3.temperature": 378.15,
        "states.4.pressure": 16e5,
        "states.5.superheat": 10.0,
        "states.6.mass_flow": 3.0,
        "states.5.elevation": 0.0,
        "states.6.elevation": 25.0,
        # The mixer joins these: what turns into each other counts from one datum.
        "states.2.elevation": 0.0,
        "states.4.elevation": 0.0,
        "states.1.elevation": 0.0,
        "states.3.elevation": 0.0,
        "equipment.P.isentropic_efficiency": 0.55,
        "equipment.D.pressure_drop": 3e4,
        "equipment.L.pressure_drop": 6e4,
        "equipment.L.inner_diameter": 0.15,
        "equipment.L.heat": -12e3,
        "equipment.L.boundary_temperature": 330.0,
    }
    w = "Water"
    s1, s3 = at(w, P=40e5, T=673.15), at(w, P=3e5, T=378.15)
    s2, s4 = State(w, 10e5, s1.h), machine(s3, 16e5, 0.55, False)
    s5 = at(w, 3.0, P=9.7e5, T=PropsSI("T", "P", 9.7e5, "Q", 1, w) + 10.0)
    area = 3.141592653589793 * 0.15**2 / 4.0
    v5 = 3.0 / (s5.get("D") * area)
    # The stream leaves the mixer with its velocity: m2 h2 + m4 h4 = 3 (h5 + v5²/2).
    steam = 3.0 * (s5.h + v5**2 / 2 - s4.h) / (s2.h - s4.h)

    def excess(enthalpy: float) -> float:
        v6 = 3.0 / (State(w, 9.1e5, enthalpy).get("D") * area)
        return enthalpy + v6**2 / 2 + 9.80665 * 25.0 - (s5.h + v5**2 / 2) + 12e3 / 3.0

    s6 = State(w, 9.1e5, brentq(excess, s5.h - 1e5, s5.h + 1e4, xtol=1e-7, rtol=1e-14), 3.0)
    states = {"1": s1.with_flow(steam), "2": s2.with_flow(steam), "3": s3.with_flow(3.0 - steam)}
    states |= {"4": s4.with_flow(3.0 - steam), "5": s5, "6": s6}
    check = Check(plant, givens, states)
    check.same("states.5.velocity", v5)
    check.same("states.6.velocity", 3.0 / (s6.get("D") * area))
    check.same("equipment.P.power", (3.0 - steam) * (s4.h - s3.h))
    parts = [
        check.generation("V", "1", "2"),
        check.generation("P", "3", "4"),
        check.generation("D", "2 4", "5"),
        check.generation("L", "5", "6", -12e3, 330.0),
    ]
    check.same("total.entropy_generation", sum(parts))

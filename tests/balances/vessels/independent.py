"""Vessels followed by scripts of their own: an adaptive method of scipy on states of an independent property library.

Nothing of the program is used here. The two-phase region is entered within a step: tolerances are kept tight enough for
the error of that step to be far below what is compared.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from CoolProp import CoolProp
from scipy.integrate import solve_ivp
from scipy.optimize import minimize_scalar

PHASE = CoolProp.iphase_twophase


class Fluid:
    """One fluid, states one at a time [SI, mass basis]."""

    def __init__(self, name: str) -> None:
        self.state = CoolProp.AbstractState("HEOS", name)
        self.throat = CoolProp.AbstractState("HEOS", name)

    def at(self, density: float, energy: float) -> CoolProp.AbstractState:
        self.state.update(CoolProp.DmassUmass_INPUTS, density, energy)
        return self.state

    def flux(self, pressure: float, enthalpy: float, entropy: float, back: float) -> float:
        """Largest ρ √(2 (h0 − h)) along the isentrope down to the back pressure [kg/(m2 s)]."""

        def negative(logarithm: float) -> float:
            self.throat.update(CoolProp.PSmass_INPUTS, float(np.exp(logarithm)), entropy)
            return -self.throat.rhomass() * np.sqrt(2.0 * max(enthalpy - self.throat.hmass(), 0.0))

        if back >= pressure:
            return 0.0
        low, high = np.log(back), np.log(pressure)
        grid = np.linspace(low, high, 15)
        values = [negative(place) for place in grid[:-1]] + [0.0]
        best = int(np.argmin(values))
        if best == 0 and negative(low + 1e-6) > values[0]:
            return -values[0]
        bounds = (grid[max(best - 1, 0)], grid[min(best + 1, grid.size - 1)])
        found = minimize_scalar(negative, bounds=bounds, method="bounded", options={"xatol": 1e-9})
        return -min(found.fun, values[best])


@dataclass(frozen=True)
class Path:
    """Time [s] or mass [kg], mass [kg], temperature [K] and metal temperature [K] at the end; dense solution."""

    along: float
    mass: float
    temperature: float
    metal: float
    entropy: float
    solution: object


def discharge(
    name: str,
    volume: float,
    pressure: float,
    temperature: float,
    final: float,
    *,
    area: float | None = None,
    back: float = 1e5,
    metal: tuple[float, float] | None = None,
) -> Path:
    """Discharge of the content as it is; ``metal``: heat capacity [J/K] and conductance [W/K]; ``area`` with C_d."""
    fluid = Fluid(name)
    start = CoolProp.AbstractState("HEOS", name)
    start.update(CoolProp.PT_INPUTS, pressure, temperature)
    mass = volume * start.rhomass()

    def rates(_: float, y: np.ndarray) -> list[float]:
        state = fluid.at(y[0] / volume, y[1] / y[0])
        rate = 1.0
        if area is not None:
            rate = area * fluid.flux(state.p(), state.hmass(), state.smass(), back)
        heat = 0.0 if metal is None else metal[1] * (y[2] - state.T())
        return [-rate, -rate * state.hmass() + heat, 0.0 if metal is None else -heat / metal[0]]

    def ended(_: float, y: np.ndarray) -> float:
        return float(np.log(fluid.at(y[0] / volume, y[1] / y[0]).p() / final))

    ended.terminal = True  # type: ignore[attr-defined]
    found = solve_ivp(
        rates,
        (0.0, mass if area is None else 1e5),
        [mass, mass * start.umass(), temperature],
        method="DOP853" if area is None else "RK45",
        rtol=1e-10 if area is None else 3e-8,
        atol=1e-6,
        events=ended,
        dense_output=True,
        max_step=mass / 60 if area is None else np.inf,
    )
    end = found.y_events[0][0]
    state = fluid.at(end[0] / volume, end[1] / end[0])
    return Path(float(found.t_events[0][0]), end[0], state.T(), end[2], end[0] * state.smass(), found.sol)


def charging(
    name: str, volume: float, initial: tuple[float, float], supply: tuple[float, float], final: float, area: float
) -> Path:
    """Adiabatic charging from a line; states are pressure [Pa] and temperature [K]."""
    fluid = Fluid(name)
    start, line = (CoolProp.AbstractState("HEOS", name) for _ in range(2))
    start.update(CoolProp.PT_INPUTS, *initial)
    line.update(CoolProp.PT_INPUTS, *supply)
    mass = volume * start.rhomass()

    def rates(_: float, y: np.ndarray) -> list[float]:
        state = fluid.at(y[0] / volume, y[1] / y[0])
        rate = area * fluid.flux(supply[0], line.hmass(), line.smass(), state.p())
        return [rate, rate * line.hmass()]

    def ended(_: float, y: np.ndarray) -> float:
        return float(np.log(final / fluid.at(y[0] / volume, y[1] / y[0]).p()))

    ended.terminal = True  # type: ignore[attr-defined]
    found = solve_ivp(
        rates, (0.0, 1e5), [mass, mass * start.umass()], rtol=1e-8, atol=1e-6, events=ended, dense_output=True
    )
    end = found.y_events[0][0]
    state = fluid.at(end[0] / volume, end[1] / end[0])
    return Path(float(found.t_events[0][0]), end[0], state.T(), np.nan, end[0] * state.smass(), found.sol)

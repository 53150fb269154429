"""Following the content of a rigid vessel while mass leaves or enters it, all columns of the sample axis at once.

With the mass m and the internal energy U of the content, h_e and h_s the enthalpies of what leaves and enters:

    dm = −dm_e   (discharge)      dU = −h_e dm_e + dQ
    dm = +dm_s   (charging)       dU = +h_s dm_s + dQ          m_w c dT_w = −dQ,  Q̇ = α A (T_w − T)

The independent variable is the mass transferred, or, where heat passes from the wall at a finite rate, time. A wall
without a heat transfer coefficient has the temperature of the content, so that U + m_w c T takes the place of U.
Whatever does not act back on the state (time, entropies) is integrated afterwards along the path found.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

import numpy as np
import numpy.typing as npt

from reportgen.balances.vessels.contents import Flow, Outlet, content, outflow, saturation_distance
from reportgen.balances.vessels.march import Steps, march
from reportgen.balances.vessels.orifice import MassFlux

__all__ = ["BALANCED", "Body", "Following", "Vessel", "Wall", "follow"]

Array = npt.NDArray[np.float64]
Flags = npt.NDArray[np.bool_]
Indices = npt.NDArray[np.intp]

#: Error of one step in parts of content, its energy and the temperature.
TOLERANCE = 1e-9
#: A flow through an orifice comes to rest asymptotically: it counts as balanced when this part of the pressure
#: difference that drove it in the beginning is left.
BALANCED = 1e-4
#: Distance to the lowest temperature of the property model at which the path ends [K].
LAST = 5e-3
#: An evacuated vessel is followed from this part of the mass that the supply state would fill it with.
FIRST_PART = 1e-6
#: Difference of the logarithms of pressure and final pressure at which a path has come to its end.
_AT_END = 1e-8
#: Longest steps, in parts of the content, of the largest content, and of the pressure difference.
_OF_CONTENT, _OF_GROWTH, _OF_LARGEST, _OF_DIFFERENCE = 0.08, 0.25, 0.04, 0.35


@dataclass(frozen=True)
class Body:
    """A given state: pressure [Pa], temperature [K], density [kg/m3], energies [J/kg], entropy [J/(kg K)], (N,)."""

    pressure: Array
    temperature: Array
    density: Array
    energy: Array
    enthalpy: Array
    entropy: Array


@dataclass(frozen=True)
class Wall:
    """Metal of the vessel: heat capacity [J/K], temperature in the beginning [K], (N,).

    ``conductance`` αA [W/K] is None for metal at the temperature of the content.
    """

    capacity: Array
    conductance: Array | None
    temperature: Array


@dataclass(frozen=True)
class Vessel:
    """One vessel and what happens to it; every array has shape (N,).

    ``volume`` [m3]; ``initial`` None for an evacuated one. ``supply`` of a charging vessel is a line at that state, or,
    with ``supply_volume`` [m3], a vessel that begins with it. ``back_pressure`` behind the outlet, ``final_pressure``
    at which the path ends [Pa]; without the latter it ends in balance. ``flow_area`` [m2]: discharge coefficient times
    area of the orifice, None for a path without time.
    """

    charging: bool
    fluid: Any
    volume: Array
    initial: Body | None
    supply: Body | None = None
    supply_volume: Array | None = None
    outlet: Outlet = "homogeneous"
    back_pressure: Array | None = None
    final_pressure: Array | None = None
    wall: Wall | None = None
    flow_area: Array | None = None

    def column(self, number: int) -> Vessel:
        """The same vessel with one column alone."""

        def cut(value: Any) -> Any:
            if isinstance(value, np.ndarray):
                return value[number : number + 1]
            if isinstance(value, Body | Wall):
                return type(value)(**{name: cut(getattr(value, name)) for name in value.__dataclass_fields__})
            return value

        return Vessel(**{name: cut(getattr(self, name)) for name in self.__dataclass_fields__})

    @property
    def timed(self) -> bool:
        """Whether the independent variable is time: heat passes at a finite rate."""
        return self.wall is not None and self.wall.conductance is not None

    @property
    def end_pressure(self) -> Array:
        """Pressure at which the path ends [Pa], (N,), unless two vessels come to balance before."""
        if self.final_pressure is not None:
            return self.final_pressure
        if self.charging:
            assert self.supply is not None
            start: Array | float = 0.0 if self.initial is None else self.initial.pressure
            rest = BALANCED if self.flow_area is not None else 0.0
            return np.asarray(self.supply.pressure - rest * (self.supply.pressure - start))
        assert self.back_pressure is not None
        assert self.initial is not None
        rest = BALANCED if self.flow_area is not None else 0.0
        return np.asarray(self.back_pressure + rest * (self.initial.pressure - self.back_pressure))


#: Rows of the unknowns.
MASS, ENERGY, SUPPLY_ENERGY, WALL_TEMPERATURE = range(4)


@dataclass
class Following:
    """The problem that is marched, and the path when it is done. Arrays end with the columns.

    ``refined`` is a factor of the longest steps, below 1 for shorter ones.
    """

    vessel: Vessel
    count: int
    refined: float = 1.0
    steps: Steps = field(init=False)

    def __post_init__(self) -> None:
        vessel = self.vessel
        self.first_mass = self._first_mass()
        self.metal = np.zeros(self.count)
        if vessel.wall is not None and vessel.wall.conductance is None:
            self.metal = np.broadcast_to(vessel.wall.capacity / vessel.volume, (self.count,))
        start = vessel.initial
        if start is None:
            assert vessel.supply is not None
            # Nothing but the first of the supply is inside; a wall at its own temperature rules over so little.
            temperature = vessel.supply.temperature if vessel.wall is None else vessel.wall.temperature
            self.first_temperature = np.broadcast_to(temperature, (self.count,))
        else:
            self.first_temperature = start.temperature
        self.temperature = np.array(self.first_temperature, dtype=float)
        self.supply_temperature = np.array(
            np.full(self.count, np.nan) if vessel.supply is None else vessel.supply.temperature, dtype=float
        )
        self.slope = np.full(self.count, np.nan)
        self.place = self.temperature.copy()
        self.pressure = np.full(self.count, np.nan)
        self.feed_pressure = np.full(self.count, np.nan)
        self.last = (np.full(self.count, np.nan), np.full(self.count, np.nan))
        self.flux = MassFlux(vessel.fluid, self.count)
        self.lowest = vessel.fluid.limits.minimum_temperature + LAST
        self.sign = 1.0 if vessel.charging else -1.0

    def _first_mass(self) -> Array:
        vessel = self.vessel
        if vessel.initial is not None:
            return np.asarray(vessel.volume * vessel.initial.density)
        assert vessel.supply is not None
        return np.asarray(FIRST_PART * vessel.volume * vessel.supply.density)

    def start(self) -> Array:
        """Unknowns in the beginning, shape (4, N)."""
        vessel = self.vessel
        first = np.zeros((4, self.count))
        first[MASS] = self.first_mass
        if vessel.initial is not None:
            first[ENERGY] = self.first_mass * vessel.initial.energy
        else:
            assert vessel.supply is not None
            first[ENERGY] = self.first_mass * vessel.supply.enthalpy
        if vessel.wall is not None:
            if vessel.wall.conductance is None:
                first[ENERGY] += vessel.wall.capacity * self.first_wall_temperature
            first[WALL_TEMPERATURE] = vessel.wall.temperature
        if vessel.supply is not None and vessel.supply_volume is not None:
            first[SUPPLY_ENERGY] = vessel.supply_volume * vessel.supply.density * vessel.supply.energy
        return first

    @property
    def first_wall_temperature(self) -> Array:
        """Temperature of the wall in the beginning [K], (N,)."""
        assert self.vessel.wall is not None
        return np.broadcast_to(self.vessel.wall.temperature, (self.count,))

    def contents(self, y: Array, columns: Indices, guess: Array | None = None) -> tuple[Array, Any]:
        """Temperature and state of the content."""
        volume = _of(self.vessel.volume, columns)
        density = y[MASS] / volume
        start = self.temperature[columns] if guess is None else guess
        slope = self.slope[columns] if guess is None else None
        energy = y[ENERGY] / volume
        temperature, state, slope = content(self.vessel.fluid, density, energy, self.metal[columns], start, slope)
        if guess is None:
            self.slope[columns] = slope
            self.temperature[columns] = np.where(np.isfinite(temperature), temperature, self.temperature[columns])
        return temperature, state

    def feed(self, y: Array, columns: Indices, guess: Array | None = None) -> tuple[Array, Flow, Any]:
        """Pressure and flow of the supply of a charging vessel, and the state of a supply vessel (None: a line)."""
        vessel = self.vessel
        supply = vessel.supply
        assert supply is not None
        if vessel.supply_volume is None:
            flow = Flow(*(_of(part, columns) for part in (supply.enthalpy, supply.entropy, supply.density)))
            return _of(supply.pressure, columns), flow, None
        volume = _of(vessel.supply_volume, columns)
        mass = volume * _of(supply.density, columns) - (y[MASS] - self.before(columns))
        start = self.supply_temperature[columns] if guess is None else guess
        none = np.zeros_like(volume)
        temperature, state, _ = content(vessel.fluid, mass / volume, y[SUPPLY_ENERGY] / volume, none, start)
        if guess is None:
            kept = np.isfinite(temperature)
            self.supply_temperature[columns] = np.where(kept, temperature, self.supply_temperature[columns])
        flow = outflow(vessel.fluid, state, "homogeneous", np.zeros(volume.shape, dtype=bool))
        return np.asarray(state.pressure), flow, state

    def supply_guess(self, columns: Indices) -> Array:
        """Temperatures to look for the state of a supply vessel from [K]: those of its beginning."""
        assert self.vessel.supply is not None
        return _of(self.vessel.supply.temperature, columns)

    def before(self, columns: Indices) -> Array:
        """Mass inside in the beginning [kg]: none in an evacuated vessel."""
        return np.zeros(columns.shape) if self.vessel.initial is None else self.first_mass[columns]

    def rates(self, y: Array, columns: Indices, inside: Flags) -> Array:
        """Derivatives by the mass transferred, or by time."""
        temperature, state = self.contents(y, columns)
        pressure = np.asarray(state.pressure, dtype=float)
        if self.vessel.charging:
            source_pressure, flow, _ = self.feed(y, columns)
            behind = pressure
        else:
            source_pressure, flow = pressure, outflow(self.vessel.fluid, state, self.vessel.outlet, inside[0])
            behind = (
                np.zeros_like(pressure)
                if self.vessel.back_pressure is None
                else _of(self.vessel.back_pressure, columns)
            )
        result = np.zeros_like(y)
        rate: Array | float = 1.0
        if self.vessel.timed:
            rate = self.mass_rate(source_pressure, flow, behind, columns)
            wall = self.vessel.wall
            assert wall is not None
            assert wall.conductance is not None
            heat = _of(wall.conductance, columns) * (y[WALL_TEMPERATURE] - temperature)
            result[ENERGY] += heat
            result[WALL_TEMPERATURE] = -heat / _of(wall.capacity, columns)
        result[MASS] = self.sign * rate
        result[ENERGY] += self.sign * rate * flow.enthalpy
        if self.vessel.supply_volume is not None:
            result[SUPPLY_ENERGY] = -rate * flow.enthalpy
        # Without a state there are no rates: the march looks for NaN.
        result += 0.0 * (temperature + flow.enthalpy)
        return result

    def mass_rate(self, pressure: Array, flow: Flow, behind: Array, columns: Indices) -> Array:
        """Mass flow rate through the orifice [kg/s]."""
        assert self.vessel.flow_area is not None
        return _of(self.vessel.flow_area, columns) * self.flux.at(pressure, flow, behind, columns)

    def scales(self, y: Array, columns: Indices) -> Array:
        """Mass, m R T, the same of the supply, temperature of the wall."""
        mass = y[MASS]
        energy = self.vessel.fluid.gas_constant * self.temperature[columns]
        held = mass
        if self.vessel.supply_volume is not None and self.vessel.supply is not None:
            held = _of(self.vessel.supply_volume * self.vessel.supply.density, columns)
        capacity = self.metal[columns] * _of(self.vessel.volume, columns) * self.temperature[columns]
        return np.stack([mass, mass * energy + capacity, held * energy, np.maximum(y[WALL_TEMPERATURE], 1.0)])

    def longest(self, y: Array, slope: Array, columns: Indices) -> Array:
        """Bound the change of mass, and, where an orifice lets time pass, of the pressure difference."""
        mass = y[MASS]
        if self.vessel.charging:
            assert self.vessel.supply is not None
            largest = _of(self.vessel.volume * self.vessel.supply.density, columns)
            change = np.minimum(_OF_GROWTH * mass, _OF_LARGEST * largest)
        else:
            change = _OF_CONTENT * mass
        before_mass, before_pressure = self.last[0][columns], self.last[1][columns]
        pressure = self.pressure[columns]
        if self.vessel.flow_area is not None:
            with np.errstate(all="ignore"):
                difference = np.abs(pressure - self.opposite(columns))
                bound = _OF_DIFFERENCE * difference * np.abs((mass - before_mass) / (pressure - before_pressure))
            change = np.where(np.isfinite(bound) & (bound > 0.0), np.minimum(change, bound), change)
        self.last[0][columns], self.last[1][columns] = mass, pressure
        with np.errstate(all="ignore"):
            return np.asarray(self.refined * change / np.abs(slope[MASS]))

    def opposite(self, columns: Indices) -> Array:
        """Pressure on the other side of the orifice [Pa]."""
        if self.vessel.charging:
            return self.feed_pressure[columns]
        assert self.vessel.back_pressure is not None
        return _of(self.vessel.back_pressure, columns)

    def events(self, y: Array, columns: Indices) -> tuple[Array, Flags, Array]:
        """Distance to the final pressure, the balance or the end of the model; sides of the saturation lines."""
        temperature, state = self.contents(y, columns)
        pressure = np.asarray(state.pressure, dtype=float)
        end = _of(self.vessel.end_pressure, columns)
        bodies = [saturation_distance(self.vessel.fluid, state)]
        with np.errstate(all="ignore"):
            left = self.sign * np.log(end / pressure)
            cold = temperature
            if self.vessel.charging:
                source, _, supply = self.feed(y, columns)
                self.feed_pressure[columns] = source
                if supply is not None:
                    rest = BALANCED if self.vessel.flow_area is not None else 0.0
                    left = np.minimum(left, np.log(source / pressure) - rest)
                    bodies.append(saturation_distance(self.vessel.fluid, supply))
                    cold = np.minimum(temperature, np.asarray(supply.temperature))
            left = np.minimum(left, cold / self.lowest - 1.0)
        self.place[columns], self.pressure[columns] = temperature, pressure
        inside = np.stack([body[0] for body in bodies])
        return left, inside, np.stack([body[1] for body in bodies])

    def mark(self, columns: Indices) -> Array:
        """Temperature of the content [K]."""
        return self.place[columns].copy()

    @property
    def complete(self) -> Flags:
        """Columns whose path ended at its final pressure or in balance, not at the end of the property model, (N,)."""
        beyond = self.place <= self.lowest * (1.0 + 1e-9)
        if self.vessel.supply_volume is not None:
            beyond = beyond | (self.supply_temperature <= self.lowest * (1.0 + 1e-9))
        with np.errstate(all="ignore"):
            ended = np.abs(np.log(self.vessel.end_pressure / self.pressure)) < _AT_END
        return np.asarray(self.steps.reached & (ended | ~beyond))


def _of(values: Array, columns: Indices) -> Array:
    """The columns of an array of shape (N,)."""
    return np.asarray(values)[columns]


def follow(vessel: Vessel, count: int, tolerance: float = TOLERANCE, refined: float = 1.0) -> Following:
    """Follow a vessel for ``count`` columns; ``tolerance`` as for ``march``, ``refined`` shortens the longest steps."""
    following = Following(vessel, count, refined)
    following.steps = march(following, following.start(), tolerance)
    return following

"""Values to start a coupled block from: what is known nearby in the plant."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from reportgen.balances.plant import Piece, Plant

__all__ = ["Starts"]

#: Starts of quantities that have a usual size.
_USUAL = {
    "isentropic_efficiency": 0.8,
    "polytropic_efficiency": 0.8,
    "isothermal_efficiency": 0.7,
    "mechanical_efficiency": 0.95,
    "pressure_ratio": 2.0,
    "split_fraction": 0.5,
    "velocity": 30.0,
    "inlet_area": 0.01,
    "outlet_area": 0.01,
    "throat_area": 0.01,
    "inner_diameter": 0.1,
    "polytropic_index": 1.2,
    "external_pressure": 1e5,
    "volume": 1.0,
}
#: Distance between starts of enthalpies that would otherwise be equal [J/kg]: equal ones make differences vanish.
_APART = 2.0e3
#: Relative distance between starts of pressures that would otherwise be equal.
_PRESSURES_APART = 0.02
#: Ratio of pressures across a piece that raises or lowers it.
_RATIO = 2.0
#: Properties of a state that with a pressure tell its enthalpy.
_TELLING = ("specific_entropy", "density", "specific_volume")
#: Random starts after the ordered ones: how many, and their spread in ln p and in enthalpy [J/kg].
_RANDOM, _SPREAD_OF_PRESSURE, _SPREAD_OF_ENTHALPY = 8, 0.6, 1.2e5


@dataclass(frozen=True)
class _Attempt:
    """Scale of the pressures, offset of the enthalpies [J/kg], temperature in parts of the surroundings' (0: that of
    states nearby), ratio of the pressures across machines and valves, oxygen beyond what a fire needs, and pressure of
    states of known temperature in parts of that of saturation (1: wet, 0: from states nearby).
    """

    pressures: float = 1.0
    enthalpies: float = 0.0
    temperature: float = 0.0
    ratio: float = _RATIO
    excess: float = 0.3
    saturation: float = 0.0


_ATTEMPTS = (
    _Attempt(),
    _Attempt(ratio=1.0, excess=1.5),
    _Attempt(saturation=1.0),
    _Attempt(saturation=1.3),
    _Attempt(saturation=0.6),
    _Attempt(enthalpies=1.0e5, excess=0.05),
    _Attempt(enthalpies=-1.0e5, excess=5.0),
    _Attempt(pressures=0.5),
    _Attempt(pressures=2.0, ratio=4.0),
    _Attempt(temperature=1.0),
    _Attempt(temperature=1.8),
    _Attempt(temperature=3.0, ratio=1.0),
    _Attempt(temperature=0.6),
    _Attempt(pressures=4.0),
    _Attempt(pressures=0.2),
)


class Starts:
    """Nearest known values, by the connections of the plant, base column."""

    def __init__(self, plant: Plant, pieces: Iterable[Piece], values: Mapping[str, Any]) -> None:
        self._plant = plant
        self._values = values
        self._pieces = tuple(pieces)
        #: State to (state at another port of the same piece, +1 when the pressure is higher there, -1 when lower).
        self._neighbours: dict[str, list[tuple[str, int]]] = {state: [] for state in plant.states}
        for piece in self._pieces:
            ends = piece.connections()
            for _, direction, state in ends:
                for _, other_direction, other in ends:
                    if other == state:
                        continue
                    step = 0 if direction == other_direction else piece.kind.lifts
                    self._neighbours[state].append((other, step if direction == "in" else -step))

    def attempts(self, unknowns: Sequence[str]) -> Iterator[dict[str, float]]:
        """Starts in the order in which to try them; equal calls give equal starts."""
        for attempt in _ATTEMPTS:
            yield self._start(unknowns, attempt)
        chance = np.random.default_rng(len(unknowns))
        for number in range(_RANDOM):
            found = self._start(unknowns, _ATTEMPTS[number % 2])
            for path in found:
                if path.endswith(".pressure"):
                    found[path] *= float(np.exp(chance.normal(0.0, _SPREAD_OF_PRESSURE)))
                elif path.endswith(".specific_enthalpy"):
                    found[path] += float(chance.normal(0.0, _SPREAD_OF_ENTHALPY))
            yield found

    def _start(self, unknowns: Sequence[str], attempt: _Attempt) -> dict[str, float]:
        ambient = self._base("surroundings.temperature", 298.15)
        found: dict[str, float] = {}
        for number, path in enumerate(sorted(unknowns, key=self._pressures_first)):
            name = path.rsplit(".", 1)[-1]
            state = path.split(".")[1]
            if name in _USUAL or not path.startswith("states."):
                found[path] = _USUAL.get(name, 0.0)
            elif attempt.saturation and (at := self._at_saturation(state, attempt.saturation, name)) is not None:
                found[path] = at
            elif name == "pressure":
                near = self._pressure(state, attempt.ratio)
                found[path] = attempt.pressures * near * (1.0 + _PRESSURES_APART * (number % 5 + 1))
            elif name == "specific_enthalpy":
                at_temperature = attempt.temperature * ambient if attempt.temperature else None
                enthalpy = self._enthalpy(state, found, at_temperature)
                found[path] = enthalpy + attempt.enthalpies + _APART * (number % 7)
            else:
                found[path] = self._nearest(state, name, 1.0)
        for piece in self._pieces:
            better = piece.kind.starts(piece, lambda path: self._base(path, np.nan), attempt.excess)
            found.update((path, value) for path, value in better.items() if path in found)
        return found

    @staticmethod
    def _pressures_first(path: str) -> tuple[bool, str]:
        return not path.endswith(".pressure"), path

    def _base(self, path: str, otherwise: float) -> float:
        array = self._values.get(path)
        value = float(array[0]) if array is not None else np.nan
        return value if np.isfinite(value) else otherwise

    def _pressure(self, state: str, ratio: float) -> float:
        """Nearest known pressure, carried over machines and valves on the way with a usual ratio.

        Saturated states of known temperature tell theirs themselves.
        """
        if np.isfinite(self._base(f"states.{state}.quality", np.nan)):
            own = self._at_saturation(state, 1.0, "pressure")
            if own is not None:
                return own
        queue, seen = [(state, 0)], {state}
        for current, steps in queue:
            value = self._base(f"states.{current}.pressure", np.nan)
            if np.isfinite(value):
                return float(value * ratio ** -max(-2, min(2, steps)))
            for other, step in self._neighbours[current]:
                if other not in seen and self._plant.states[other] == self._plant.states[state]:
                    seen.add(other)
                    queue.append((other, steps + step))
        return self._nearest(state, "pressure", self._base("surroundings.pressure", 1e5))

    def _at_saturation(self, state: str, part: float, name: str) -> float | None:
        """Pressure of a state of known temperature as a part of that of saturation; its enthalpy, where the part is 1,
        in the middle of the dome. None where there is none.
        """
        fluid = self._plant.fluids[self._plant.states[state]]
        temperature = self._base(f"states.{state}.temperature", np.nan)
        if not np.isfinite(temperature) or not hasattr(fluid, "saturation"):
            return None
        ends = fluid.saturation(temperature=temperature, errors="mask")
        if name == "pressure":
            value = part * float(ends[0].pressure)
        elif name == "specific_enthalpy" and part == 1.0:
            value = sum(float(end.specific_enthalpy) for end in ends) / 2.0
        else:
            return None
        return value if np.isfinite(value) else None

    def _nearest(self, state: str, name: str, otherwise: float, same_fluid: bool = False) -> float:
        """Value of the nearest state that has one, breadth first."""
        queue, seen = [state], {state}
        for current in queue:
            alike = not same_fluid or self._plant.states[current] == self._plant.states[state]
            value = self._base(f"states.{current}.{name}", np.nan) if alike else np.nan
            if np.isfinite(value):
                return value
            for other, _ in self._neighbours[current]:
                if other not in seen:
                    seen.add(other)
                    queue.append(other)
        return otherwise

    def _enthalpy(self, state: str, found: Mapping[str, float], at_temperature: float | None) -> float:
        """From another property of the state or a temperature asked for, else near or at ambient temperature."""
        fluid = self._plant.fluids[self._plant.states[state]]
        pressure = found.get(f"states.{state}.pressure", self._base(f"states.{state}.pressure", 1e5))
        for name in _TELLING:
            known = self._base(f"states.{state}.{name}", np.nan)
            if np.isfinite(known):
                value = float(fluid.at(errors="mask", pressure=pressure, **{name: known}).specific_enthalpy)
                if np.isfinite(value):
                    return value
        temperature = self._base(f"states.{state}.temperature", at_temperature or np.nan)
        if not np.isfinite(temperature):
            near = self._nearest(state, "specific_enthalpy", np.nan, same_fluid=True)
            if np.isfinite(near):
                return near
            temperature = self._nearest(state, "temperature", self._base("surroundings.temperature", 298.15))
        for trial in (temperature, fluid.limits.minimum_temperature * 1.1, 300.0):
            value = float(fluid.at(errors="mask", pressure=pressure, temperature=trial).specific_enthalpy)
            if np.isfinite(value):
                return value
        return 0.0

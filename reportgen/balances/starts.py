"""Values to start a coupled block from: what is known nearby in the plant."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

import numpy as np

from reportgen.balances.plant import Piece, Plant

__all__ = ["Starts"]

#: Starts of quantities that have a usual size.
_USUAL = {
    "isentropic_efficiency": 0.8,
    "polytropic_efficiency": 0.8,
    "pressure_ratio": 2.0,
    "split_fraction": 0.5,
}
#: Distance between starts of enthalpies that would otherwise be equal [J/kg]: equal ones make differences vanish.
_APART = 2.0e3
#: Relative distance between starts of pressures that would otherwise be equal.
_PRESSURES_APART = 0.02
#: Scale of the pressures, offset of the enthalpies [J/kg] and temperature in parts of the surroundings' (0: from
#: states nearby) to start from, tried in turn.
_ATTEMPTS = (
    (1.0, 0.0, 0.0),
    (1.0, 1.0e5, 0.0),
    (1.0, -1.0e5, 0.0),
    (0.5, 0.0, 0.0),
    (2.0, 0.0, 0.0),
    (1.0, 0.0, 1.0),
    (1.0, 0.0, 1.8),
    (1.0, 0.0, 3.0),
    (1.0, 0.0, 0.6),
    (4.0, 0.0, 0.0),
    (0.2, 0.0, 0.0),
)


class Starts:
    """Nearest known values, by the connections of the plant, base column."""

    def __init__(self, plant: Plant, pieces: Mapping[str, Piece], values: Mapping[str, Any]) -> None:
        self._plant = plant
        self._values = values
        self._neighbours: dict[str, list[str]] = {state: [] for state in plant.states}
        for piece in pieces.values():
            states = list(dict.fromkeys(state for _, _, state in piece.connections()))
            for state in states:
                self._neighbours[state] += [other for other in states if other != state]

    def attempts(self, unknowns: Sequence[str]) -> Iterator[dict[str, float]]:
        """Starts in the order in which to try them."""
        ambient = self._base("surroundings.temperature", 298.15)
        for pressure_factor, enthalpy_offset, relative in _ATTEMPTS:
            found: dict[str, float] = {}
            for number, path in enumerate(sorted(unknowns, key=self._pressures_first)):
                name = path.rsplit(".", 1)[-1]
                state = path.split(".")[1]
                if path.startswith("states."):
                    if name == "pressure":
                        near = self._nearest(state, name, self._base("surroundings.pressure", 1e5))
                        found[path] = pressure_factor * near * (1.0 + _PRESSURES_APART * (number % 5 + 1))
                    elif name == "specific_enthalpy":
                        at_temperature = relative * ambient if relative else None
                        enthalpy = self._enthalpy(state, found, at_temperature)
                        found[path] = enthalpy + enthalpy_offset + _APART * (number % 7)
                    else:
                        found[path] = self._nearest(state, name, 1.0)
                else:
                    found[path] = _USUAL.get(name, 0.0)
            yield found

    @staticmethod
    def _pressures_first(path: str) -> tuple[bool, str]:
        return not path.endswith(".pressure"), path

    def _base(self, path: str, otherwise: float) -> float:
        array = self._values.get(path)
        value = float(array[0]) if array is not None else np.nan
        return value if np.isfinite(value) else otherwise

    def _nearest(self, state: str, name: str, otherwise: float, same_fluid: bool = False) -> float:
        """Value of the nearest state that has one, breadth first."""
        queue, seen = [state], {state}
        for current in queue:
            alike = not same_fluid or self._plant.states[current] == self._plant.states[state]
            value = self._base(f"states.{current}.{name}", np.nan) if alike else np.nan
            if np.isfinite(value):
                return value
            for other in self._neighbours[current]:
                if other not in seen:
                    seen.add(other)
                    queue.append(other)
        return otherwise

    def _enthalpy(self, state: str, found: Mapping[str, float], at_temperature: float | None) -> float:
        """From a temperature asked for or the state's own, else the nearest enthalpy of the fluid, else at ambient."""
        fluid = self._plant.fluids[self._plant.states[state]]
        pressure = found.get(f"states.{state}.pressure", self._base(f"states.{state}.pressure", 1e5))
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

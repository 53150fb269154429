"""States of one fluid evaluated in one property call."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.balances.properties import state_from

__all__ = ["Bundle", "Model", "bundles"]

Array = NDArray[np.float64]

#: Makes the property model of a fluid from the masses that its composition follows from, by path.
Model = Callable[[str, Mapping[str, Any]], Any]


@dataclass(frozen=True)
class Bundle:
    """States of one fluid that are evaluated from the same two properties and, of a mixture, from masses beside."""

    fluid: str
    model: Model
    pair: tuple[str, str]
    beside: tuple[str, ...]
    states: tuple[str, ...]
    names: tuple[str, ...]

    def inputs(self, state: str) -> dict[str, str]:
        """What a state is evaluated from: the two properties by name, the masses by path; with their paths."""
        return {name: f"states.{state}.{name}" for name in self.pair} | {path: path for path in self.beside}

    @property
    def can_saturate(self) -> bool:
        """Whether the fluid has a saturation line."""
        return hasattr(self.model(self.fluid, {}), "saturation") if not self.beside else False

    def evaluate(self, inputs: Mapping[str, Sequence[Array]]) -> dict[str, list[Array]]:
        """Properties by name, each a list of arrays as long as those given for each of the inputs."""
        sizes = [array.size for array in inputs[self.pair[0]]]
        ends = np.cumsum(sizes)[:-1]
        joined = {name: np.concatenate(arrays) for name, arrays in inputs.items()}
        result = state_from(self.model(self.fluid, joined), self.pair, joined)
        return {name: np.split(np.asarray(getattr(result, name), float), ends) for name in self.names}


def bundles(
    outputs: Mapping[str, Sequence[str]],
    carriers: Mapping[str, tuple[str, str]],
    beside: Mapping[str, tuple[str, ...]],
    fluid_of: Callable[[str], str],
    model: Model,
) -> list[Bundle]:
    """States that can be evaluated in one call."""
    groups: dict[tuple[str, tuple[str, str]], list[str]] = {}
    for state in outputs:
        groups.setdefault((fluid_of(state), carriers[state]), []).append(state)
    return [
        Bundle(
            fluid,
            model,
            pair,
            beside[states[0]],
            tuple(states),
            tuple(dict.fromkeys(name for state in states for name in outputs[state])),
        )
        for (fluid, pair), states in groups.items()
    ]

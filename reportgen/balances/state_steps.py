"""States in the solution of a plant: each from the pair of its properties that is known."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

import numpy as np
from numpy.typing import NDArray

from reportgen.balances.doubts import Doubt
from reportgen.balances.network import PROPERTIES, PropertyRelation
from reportgen.balances.properties import known_pair, state_from, what_would_do, why_missing
from reportgen.balances.relations import Equation, token
from reportgen.balances.solution import Solution, Step
from reportgen.errors import Fault, SolutionError
from reportgen.names import NAMES

__all__ = ["StateSteps", "numbers_of"]

Array = NDArray[np.float64]

#: Fields of a state that are reported as values beside those the network solves for.
REPORTED = (
    "temperature",
    "pressure",
    "specific_enthalpy",
    "specific_entropy",
    "specific_internal_energy",
    "density",
    "specific_volume",
    "quality",
    "superheat",
    "subcooling",
    "compressibility_factor",
    "isobaric_heat_capacity",
    "isochoric_heat_capacity",
    "speed_of_sound",
)
#: Properties whose line is shown in the working of a state.
_SHOWN = ("pressure", "temperature", "specific_enthalpy", "specific_entropy", "density")


def numbers_of(values: Mapping[str, Array], paths: Iterable[str]) -> tuple[tuple[str, float], ...]:
    """Paths with their values in the base case, for a message; those without one are left out."""
    return tuple((path, float(values[path][0])) for path in paths if np.isfinite(values[path][0]))


class StateSteps:
    """Evaluates states and enters them, each with its step of the working."""

    def __init__(self, solution: Solution, columns: int) -> None:
        self.solution = solution
        self.values = solution.values
        self.plant = solution.plant
        self.given = frozenset(solution.values)
        self.columns = columns
        #: States whose pressure was found from temperature and enthalpy, which hardly depend on it in a single phase.
        self.doubtful: set[str] = set()

    def pair_of(self, state: str) -> tuple[str, str] | None:
        """The known pair a state is to be evaluated from; None where there is none, or where it gives no one state.

        What the author gives is answered with the states that share it; what was worked out has neighbours.
        """
        known = [name for name in PROPERTIES if f"states.{state}.{name}" in self.values]
        pair = known_pair(self.plant.fluids[self.plant.states[state]], known)
        if pair and ("pressure" in pair or self._is_given(state, pair) or not self._is_ambiguous(state, pair)):
            return pair
        return None

    def _is_given(self, state: str, pair: tuple[str, str]) -> bool:
        """Whether both properties of a pair stand in the file."""
        return all(f"states.{state}.{name}" in self.given for name in pair)

    def _is_ambiguous(self, state: str, pair: tuple[str, str]) -> bool:
        """Whether a known pair gives no one state in the base case: then the nearest in the plant is looked for."""
        fluid_id = self.plant.states[state]
        base = {path: self.values[path][:1] for path in self.solution.mixtures.masses(fluid_id)}
        fluid = self.solution.mixtures.model(fluid_id, base)
        inputs = {name: self.values[f"states.{state}.{name}"][:1] for name in pair}
        if not np.isfinite(list(inputs.values())).all():
            return False
        return not np.isfinite(state_from(fluid, pair, inputs).specific_enthalpy[0])

    def enter(self, state: str, pair: tuple[str, str]) -> None:
        """All properties of a state from two of them."""
        fluid_id = self.plant.states[state]
        fluid = self.solution.mixtures.model(fluid_id, self.values)
        prefix = f"states.{state}."
        inputs = {name: self.values[prefix + name] for name in pair}
        result = state_from(fluid, pair, inputs)
        enthalpy = np.asarray(result.specific_enthalpy)
        missing = ~np.isfinite(enthalpy)
        if missing[0]:
            absent = [prefix + name for name in pair if not np.isfinite(inputs[name][0])]
            reason = self.solution.reasons.get(absent[0]) if absent else None
            expected, hint = what_would_do(result, 0)
            if reason is None:
                reason = f"it depends on {absent[0]}, which has no value" if absent else why_missing(result, 0)
            told = " and ".join(name.replace("_", " ") for name in pair)
            message = f"State {state} ({fluid.title}) cannot be evaluated from its {told}: {reason}"
            raise SolutionError(
                Fault(
                    message,
                    f"states.{state}",
                    expected=expected,
                    hint=hint,
                    numbers=numbers_of(self.values, (prefix + name for name in pair)),
                )
            )
        if missing.any():
            text = f"State {state} has no value in {int(missing.sum())} of {self.columns} columns: "
            text += why_missing(result, int(np.argmax(missing)))
            self.solution.warnings.append(Fault(text, f"states.{state}"))
        if pair == ("temperature", "specific_enthalpy"):
            self.doubtful.add(state)
        if state in self.doubtful and str(np.asarray(result.phase).flat[0]) != "two-phase":
            text = f"The pressure of state {state} is not given; it was found from temperature and enthalpy, "
            text += "which hardly depend on it. State the pressure or the pressure loss."
            self.solution.doubts.append(Doubt("pressure-from-enthalpy", f"states.{state}", f"{prefix}pressure", text))
        solved = []
        for name in REPORTED:
            path = prefix + name
            if path not in self.values:
                self.values[path] = np.array(getattr(result, name), dtype=float)
                solved.append(path)
        self.values[f"{prefix}phase"] = np.asarray(result.phase)
        solved.append(f"{prefix}phase")
        self.solution.states[state] = result
        arguments = r",\,".join(token(prefix + name) for name in pair)
        equations = tuple(
            Equation(token(prefix + name), rf"{NAMES[name].symbol}\left({arguments}\right)")
            for name in _SHOWN
            if prefix + name in solved
        )
        words = " and ".join(name.replace("_", " ") for name in pair)
        if prefix + "specific_enthalpy" in solved or prefix + "temperature" in solved:
            sentence = f"State {state} is fixed by its {words}; the equation of state gives the rest."
        else:
            sentence = f"State {state} is known; the equation of state gives its remaining properties."
        masses = self.solution.mixtures.masses(fluid_id)
        uses = (*(prefix + name for name in pair), *masses, f"fluids.{fluid_id}")
        basis = f"equation of state, {fluid.title}"
        self.solution.steps.append(
            Step(
                f"{prefix}properties",
                f"states.{state}",
                f"State {state}",
                sentence,
                basis,
                tuple(solved),
                uses,
                equations,
            )
        )

    def caloric(self, relation: PropertyRelation, unknown: str) -> None:
        """Enthalpy from temperature or the reverse, for an ideal gas whose pressure is not known yet."""
        fluid_id = self.plant.states[relation.state]
        fluid = self.solution.mixtures.model(fluid_id, self.values)
        (known,) = (path for path in relation.solvable if path != unknown)
        name, given = (path.rsplit(".", 1)[-1] for path in (unknown, known))
        ambient = self.values["surroundings.pressure"]
        result = fluid.at(errors="mask", pressure=ambient, **{given: self.values[known]})
        array = np.array(getattr(result, name), dtype=float)
        if np.isnan(array[0]):
            told = given.replace("_", " ")
            message = f"State {relation.state} ({fluid.title}) cannot be evaluated from its {told}: "
            message += why_missing(result, 0)
            raise SolutionError(Fault(message, f"states.{relation.state}", numbers=numbers_of(self.values, [known])))
        self.values[unknown] = array
        equation = Equation(token(unknown), rf"{NAMES[name].symbol}\left({token(known)}\right)")
        words = " and ".join(NAMES[part].text.lower().removeprefix("specific ") for part in (given, name))
        sentence = f"State {relation.state}: {words} of an ideal gas fix each other, whatever the pressure."
        self.solution.steps.append(
            Step(
                relation.key,
                f"states.{relation.state}",
                f"State {relation.state}",
                sentence,
                f"equation of state, {fluid.title}",
                (unknown,),
                (known, *relation.beside, f"fluids.{fluid_id}"),
                (equation,),
            )
        )

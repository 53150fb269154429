"""Real fluids by their published multiparameter Helmholtz-energy equations."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import Fault, InputError
from reportgen.fluids.model import Errors
from reportgen.fluids.pairs import Elements, Pair, SeveralStates, check_errors, read_pair
from reportgen.fluids.real import catalogue
from reportgen.fluids.real.batches import BatchPairs
from reportgen.fluids.real.candidates import Candidates, Chosen
from reportgen.fluids.real.density import DensitySolver
from reportgen.fluids.real.helmholtz import Helmholtz
from reportgen.fluids.real.limits import Guard, limits_of
from reportgen.fluids.real.reference import zero_of
from reportgen.fluids.real.saturation import SaturationCurves
from reportgen.fluids.real.scalar.few import FewStates
from reportgen.fluids.real.searches import SEARCHED_PAIRS
from reportgen.fluids.real.solution import Solution
from reportgen.fluids.state import State

__all__ = ["RealFluid"]

FloatArray = NDArray[np.float64]


class RealFluid:
    """One substance, by its published equation of state: SI units, mass basis, vectorised.

    Equation: a(T, ρ) = RT [φ°(δ, τ) + φʳ(δ, τ)], see helmholtz.py; publication and DOI in ``sources``; range in
    ``limits``.

    Parameters
    ----------
    name : canonical name, alias, formula or CAS number.
    reference_state : "published" (zero of the publication), "IIR" (h = 200 kJ/kg, s = 1 kJ/(kg·K) for the saturated
        liquid at 0 °C), "ASHRAE" (h = s = 0 for the saturated liquid at −40 °C), "NBP" (h = s = 0 for the saturated
        liquid at 101 325 Pa) or "third-law" (entropy and enthalpy of formation of the ideal gas at 298.15 K, 1 bar).

    Raises
    ------
    InputError : unknown fluid; unknown reference state, or one that the fluid does not have.
    """

    kind = "real-fluid"
    composition = None

    def __init__(self, name: str, reference_state: str = "published") -> None:
        data, file = catalogue.find(name)
        self.substance: str = data["name"]
        self.title: str = data["title"]
        self.molar_mass: float = data["molar_mass"]
        self.gas_constant: float = data["molar_gas_constant"] / self.molar_mass
        self.pseudo_pure: bool = data["pseudo_pure"]
        self.reference_state = reference_state
        self.sources = catalogue.source_lines(data)
        self.data_files: tuple[Mapping[str, str], ...] = ({"file": file, "sha256": catalogue.digest(file)},)
        self.limits = limits_of(data)
        self._guard = Guard(self.title, self.limits, data["melting_line"])
        self._curves = SaturationCurves(data["saturation"], data["critical_point"]["temperature"])
        equation = Helmholtz(
            data["ideal"],
            data["residual"],
            reducing_temperature=data["reducing_temperature"],
            reducing_density=data["reducing_molar_density"] * self.molar_mass,
            gas_constant=self.gas_constant,
        )
        zero = zero_of(reference_state, data, equation, self._curves)
        self.entropy_zero, self.entropy_zero_name = zero.words, zero.name
        self.sources += zero.sources
        self.data_files += zero.data_files
        self._equation = equation
        maximum_density: float = data["limits"]["maximum_density"]
        self._solver = DensitySolver(equation, self._curves, data["acentric_factor"], maximum_density)
        triple_pressure: float = data["lower_end"]["pressure"]
        self._batches = BatchPairs(equation, self._curves, self._solver, self._guard, self.limits, triple_pressure)
        self._few = FewStates(
            equation, self._curves, self._solver, self.limits, triple_pressure, self._guard.melting_line
        )
        self._pairs = self._batches.solvers

    def __repr__(self) -> str:
        return f"RealFluid({self.substance!r}, reference_state={self.reference_state!r})"

    def at(self, *, errors: Errors = "raise", **pair: ArrayLike) -> State:
        """State fixed by two properties; see ``fluids.model.Fluid.at``.

        Pairs: pressure with temperature, specific_enthalpy, specific_entropy, specific_internal_energy, quality,
        density, superheat or subcooling; temperature with quality, density or any of the three energies and entropy;
        density with any of these three; specific_enthalpy with specific_entropy. specific_volume stands for density.
        Temperature with enthalpy, internal energy or (water below 4 °C) entropy, and pressure with density, can have
        several states: these are refused with a list of them, and given by :meth:`roots`.
        A gas so thin that its energy does not tell its density is refused beside a temperature.
        Pressure and temperature within 1e-9 of saturation are refused, since they do not tell liquid from vapour:
        give the quality.
        """
        check_errors(errors)
        return self._few.at(pair) or self._at_once(errors, pair)

    def _at_once(self, errors: Errors, pair: Mapping[str, ArrayLike]) -> State:
        """The state of any number of elements, by the vectorised branch."""
        shape, solution, elements = self._solved(errors, pair)
        return State(shape, solution.values(), solution.fill, elements.faults)

    def _solved(self, errors: Errors, pair: Mapping[str, ArrayLike]) -> tuple[tuple[int, ...], Solution, Elements]:
        """The shape of what was given, the solution for its elements, and why some of them have none."""
        given, usable, elements = self._read(pair)
        solve = self._pairs[given.names]
        # Far from a solution, searches may overflow; what they return is checked for each element.
        with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
            if usable.size == elements.size:
                solution = solve(given.first, given.second, elements)
                elements.finish(errors)
                if elements.faults:
                    solution.masked(elements.rejected)
                return given.shape, solution, elements
            part = Elements(usable.size)
            solution = solve(given.first[usable], given.second[usable], part)
            elements.take_over(part, usable)
            elements.finish(errors)
            solution.masked(part.rejected)
            solution.spread(usable, elements.size)
            return given.shape, solution, elements

    def _read(self, pair: Mapping[str, ArrayLike]) -> tuple[Pair, NDArray[np.intp], Elements]:
        """The two properties, the elements where both are finite, and faults of those where one is infinite: that is a
        mistake, while NaN is a value not known.
        """
        given = read_pair(pair, self._pairs, self.title)
        known = ~(np.isnan(given.first) | np.isnan(given.second))
        elements = Elements(given.first.size)
        for name, values in zip(given.names, (given.first, given.second), strict=True):
            self._guard.infinite(np.isinf(values) & known, elements, name, values)
        return given, np.flatnonzero(np.isfinite(given.first) & np.isfinite(given.second)), elements

    def saturation(
        self, *, temperature: ArrayLike | None = None, pressure: ArrayLike | None = None, errors: Errors = "raise"
    ) -> tuple[State, State]:
        """Saturated liquid and saturated vapour at a temperature [K] or a pressure [Pa], in the shape given.

        Raises
        ------
        InputError : not exactly one of the two given.
        RangeError : below the triple point or above the critical point (``errors="raise"``).
        """
        check_errors(errors)
        few = self._few.saturation(temperature, pressure)
        if few is not None:
            return few
        if (temperature is None) == (pressure is None):
            raise InputError(Fault("Saturation is fixed by a temperature or a pressure, one of the two."))
        given: dict[str, Any] = {"pressure": pressure} if temperature is None else {"temperature": temperature}
        shape, liquid, elements = self._solved(errors, {**given, "quality": 0.0})
        vapour = self._solved(errors, {**given, "quality": 1.0})[1] if self.pseudo_pure else liquid.other_end()
        return (
            State(shape, liquid.values(), liquid.fill, elements.faults),
            State(shape, vapour.values(), vapour.fill, elements.faults),
        )

    def roots(self, *, errors: Errors = "raise", **pair: ArrayLike) -> State:
        """Every state that has two properties, where :meth:`at` would refuse several.

        Takes the pairs of :meth:`at`; pressure and temperature on the saturation line give its liquid and its vapour.

        Returns
        -------
        State : of the shape given and one axis more, along which the states lie in the order of rising density; NaN
            where an element has fewer than others. A gas so thin that its energy does not tell its density is left
            out. ``faults`` holds elements without any state, by flat index of the shape given (``errors="mask"``).

        Raises
        ------
        InputError, RangeError : as :meth:`at`, but never since there are several states.
        """
        check_errors(errors)
        given, usable, elements = self._read(pair)
        first, second = given.first[usable], given.second[usable]
        part = Elements(usable.size)
        with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
            if given.names in SEARCHED_PAIRS:
                states = self._batches.searches.every(given.names, first, second, part)
                states = states.take(~states.vague)
            else:
                states = self._one_or_two(given.names, first, second, part)
            elements.take_over(part, usable)
            elements.finish(errors)
            element = states.element
            count = np.bincount(element, minlength=usable.size)
            most = max(int(count.max(initial=1)), 1)
            rank = np.arange(element.size) - np.repeat(np.cumsum(count) - count, count)
            solution = self._batches.given_back(states._asdict(), given.names, first[element], second[element])
            values = solution.spread(usable[element] * most + rank, elements.size * most)
        return State((*given.shape, most), values, solution.fill, elements.faults)

    def _one_or_two(self, names: tuple[str, str], first: FloatArray, second: FloatArray, elements: Elements) -> Chosen:
        """All states of pairs that have one, or two on the saturation line."""
        tried, found = Elements(elements.size), Candidates(elements.size)
        solution = self._pairs[names](first, second, tried)
        fields = (solution.temperature, solution.pressure, solution.density, solution.values()["quality"])
        phases = (solution.liquid_density, solution.vapour_density)
        single = np.flatnonzero(~tried.rejected)
        t, p, rho, x = (values[single] for values in fields)
        rho_l, rho_v = (None if values is None else values[single] for values in phases)
        found.add(single, t, p, rho, x, rho_l, rho_v)
        refused = tried.rejected.copy()
        for i, fault in tried.faults.items():
            if isinstance(fault, SeveralStates):
                refused[i] = False
                for root, quality in zip(fault.roots, (1.0, 0.0), strict=True):
                    assert root.density is not None
                    values = (root.temperature, root.pressure, root.density, quality)
                    t, p, rho, x = (np.array([value]) for value in values)
                    found.add(np.array([i]), t, p, rho, x)
        elements.reject(refused, lambda i: tried.faults[i])
        return found.gather()

"""Real fluids by their published multiparameter Helmholtz-energy equations."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import partial
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import Fault, InputError
from reportgen.fluids.model import Errors, Point
from reportgen.fluids.pairs import Elements, Pair, SeveralStates, check_errors, read_pair
from reportgen.fluids.real import catalogue
from reportgen.fluids.real.candidates import Candidates, Chosen
from reportgen.fluids.real.density import DensitySolver
from reportgen.fluids.real.flash import PressureFlash
from reportgen.fluids.real.helmholtz import Helmholtz
from reportgen.fluids.real.limits import Guard, limits_of
from reportgen.fluids.real.reference import zero_of
from reportgen.fluids.real.saturation import SaturationCurves
from reportgen.fluids.real.scalar.few import FewStates
from reportgen.fluids.real.searches import SEARCHED_PAIRS, Searches
from reportgen.fluids.real.solution import Solution
from reportgen.fluids.state import State

__all__ = ["RealFluid"]

FloatArray = NDArray[np.float64]

#: Pressures closer than this to saturation (relative) do not decide between liquid and vapour.
_SATURATION_BAND = 1e-9
#: Densities closer than this to a line of a pseudo-pure fluid (relative) are on it.
_ON_LINE = 1e-12


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
        self._maximum_density: float = data["limits"]["maximum_density"]
        self._solver = DensitySolver(equation, self._curves, data["acentric_factor"], self._maximum_density)
        self._triple_pressure: float = data["lower_end"]["pressure"]
        self._flash = PressureFlash(
            equation,
            self._curves,
            self._solver,
            self.limits.minimum_temperature,
            self.limits.maximum_temperature,
            self._triple_pressure,
            self._guard.melting_line,
        )
        self._searches = Searches(equation, self._curves, self._solver, self._guard, self.limits, self._triple_pressure)
        self._few = FewStates(
            equation, self._curves, self._solver, self.limits, self._triple_pressure, self._guard.melting_line
        )
        self._pairs: dict[tuple[str, str], Callable[[FloatArray, FloatArray, Elements], Solution]] = {
            ("pressure", "temperature"): self._pressure_temperature,
            ("pressure", "specific_enthalpy"): self._pressure_enthalpy,
            ("pressure", "specific_entropy"): self._pressure_entropy,
            ("pressure", "quality"): self._pressure_quality,
            ("temperature", "quality"): self._temperature_quality,
            ("temperature", "density"): self._temperature_density,
            ("pressure", "superheat"): self._pressure_superheat,
            ("pressure", "subcooling"): self._pressure_subcooling,
            **{names: partial(self._searched, names) for names in SEARCHED_PAIRS},
        }

    def __repr__(self) -> str:
        return f"RealFluid({self.substance!r}, reference_state={self.reference_state!r})"

    def at(self, *, errors: Errors = "raise", **pair: ArrayLike) -> State:
        """State fixed by two properties; see ``fluids.model.Fluid.at``.

        Pairs: pressure with temperature, specific_enthalpy, specific_entropy, specific_internal_energy, quality,
        density, superheat or subcooling; temperature with quality, density or any of the three energies and entropy;
        density with any of these three; specific_enthalpy with specific_entropy. specific_volume stands for density.
        Temperature with enthalpy, internal energy or (water below 4 °C) entropy, and pressure with density, can have
        several states: these are refused with a list of them, and given by :meth:`roots`.
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
        few = self._few.saturation(temperature, pressure)
        if few is not None:
            return few
        if (temperature is None) == (pressure is None):
            raise InputError(Fault("Saturation is fixed by a temperature or a pressure, one of the two."))
        check_errors(errors)
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
                states = self._searches.every(given.names, first, second, part)
                states = states.take(~states.vague)
            else:
                states = self._one_or_two(given.names, first, second, part)
            elements.take_over(part, usable)
            elements.finish(errors)
            element = states.element
            count = np.bincount(element, minlength=usable.size)
            most = max(int(count.max(initial=1)), 1)
            rank = np.arange(element.size) - np.repeat(np.cumsum(count) - count, count)
            solution = self._given_back(states._asdict(), given.names, first[element], second[element])
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

    def _solution(self, temperature: FloatArray, pressure: FloatArray, density: FloatArray, **more: Any) -> Solution:
        return Solution(self._equation, self._curves, self._triple_pressure, temperature, pressure, density, **more)

    def _harmless(
        self, pressure: FloatArray, temperature: FloatArray, elements: Elements
    ) -> tuple[FloatArray, FloatArray]:
        """Pressure and temperature with a dilute hot gas in place of rejected elements, so that nothing is searched
        there.
        """
        rejected = elements.rejected
        return np.where(rejected, 1e4, pressure), np.where(rejected, self.limits.maximum_temperature, temperature)

    def _pressure_temperature(self, pressure: FloatArray, temperature: FloatArray, elements: Elements) -> Solution:
        guard, curves = self._guard, self._curves
        guard.pressure(pressure, elements)
        guard.temperature(temperature, elements)
        p, t = self._harmless(pressure, temperature, elements) if elements.rejected.any() else (pressure, temperature)
        liquid = np.zeros(p.size, dtype=np.bool_)
        below = t < curves.top_temperature
        if below.any():
            saturated = curves.at_temperature(t[below])
            bubble, dew = saturated.bubble_pressure, saturated.dew_pressure
            liquid[below] = p[below] > (bubble if not self.pseudo_pure else np.sqrt(bubble * dew))
            band = (p[below] < bubble * (1 + _SATURATION_BAND)) & (p[below] > dew * (1 - _SATURATION_BAND))
            if band.any():
                on_line = np.zeros(p.size, dtype=np.bool_)
                on_line[below] = band
                elements.reject(
                    on_line,
                    lambda i: guard.on_saturation(pressure[i], temperature[i], self._saturated_points(temperature[i])),
                )
        guard.melting(p, t, elements)
        if elements.rejected.any():
            p, t = self._harmless(p, t, elements)
        density, found = self._solver.solve(t, p, liquid)
        elements.reject(~found, lambda i: guard.not_found("pressure", p[i], "temperature", t[i]))
        return self._solution(temperature, pressure, density)

    def _saturated_points(self, temperature: float) -> tuple[Point, ...]:
        """Saturated vapour and liquid at T [K], in the order of rising density; none for a pseudo-pure fluid."""
        if self.pseudo_pure:
            return ()
        saturated = self._curves.at_temperature(np.array([temperature]))
        pressure = float(saturated.bubble_pressure[0])
        densities = (float(saturated.vapour_density[0]), float(saturated.liquid_density[0]))
        return tuple(Point(float(temperature), pressure, density) for density in densities)

    def _pressure_enthalpy(self, pressure: FloatArray, enthalpy: FloatArray, elements: Elements) -> Solution:
        return self._pressure_caloric(pressure, enthalpy, elements, "specific_enthalpy")

    def _pressure_entropy(self, pressure: FloatArray, entropy: FloatArray, elements: Elements) -> Solution:
        return self._pressure_caloric(pressure, entropy, elements, "specific_entropy")

    def _pressure_caloric(self, pressure: FloatArray, target: FloatArray, elements: Elements, name: str) -> Solution:
        guard = self._guard
        guard.pressure(pressure, elements)
        p = (
            pressure
            if not elements.rejected.any()
            else np.where(elements.rejected, self._curves.top_pressure / 2, pressure)
        )
        result = self._flash.solve(p, target, entropy=name == "specific_entropy")
        self._searches.complete(result, p, target, name)
        elements.reject(result.between, lambda i: guard.between_lines("pressure", p[i], name, target[i]))
        elements.reject(result.cold, lambda i: guard.too_cold(p[i], name, target[i]))
        elements.reject(result.hot, lambda i: guard.too_hot(p[i], name, target[i]))
        elements.reject(~result.found, lambda i: guard.not_found("pressure", p[i], name, target[i]))
        guard.melting(p, result.temperature, elements)
        return self._solution(
            result.temperature,
            pressure,
            result.density,
            quality=result.quality,
            liquid_density=result.liquid_density,
            vapour_density=result.vapour_density,
            known={name: target},
        )

    def _pressure_quality(self, pressure: FloatArray, quality: FloatArray, elements: Elements) -> Solution:
        self._guard.pressure(pressure, elements)
        self._guard.quality(quality, elements, self.pseudo_pure)
        self._guard.saturation_pressure(pressure, elements, self._triple_pressure, self._curves.top_pressure)
        p = np.where(elements.rejected, self._curves.top_pressure / 2, pressure)
        saturated = self._curves.at_pressure(np.maximum(p, self._triple_pressure))
        temperature = np.where(quality == 0, saturated.bubble_temperature, saturated.dew_temperature)
        return self._saturated(temperature, pressure, quality, saturated.liquid_density, saturated.vapour_density)

    def _temperature_quality(self, temperature: FloatArray, quality: FloatArray, elements: Elements) -> Solution:
        self._guard.quality(quality, elements, self.pseudo_pure)
        self._guard.saturation_temperature(temperature, elements, self._curves.top_temperature)
        t = np.where(elements.rejected, self.limits.minimum_temperature, temperature)
        saturated = self._curves.at_temperature(t)
        pressure = np.where(quality == 0, saturated.bubble_pressure, saturated.dew_pressure)
        return self._saturated(temperature, pressure, quality, saturated.liquid_density, saturated.vapour_density)

    def _saturated(
        self, temperature: FloatArray, pressure: FloatArray, quality: FloatArray, liquid: FloatArray, vapour: FloatArray
    ) -> Solution:
        density = 1 / (1 / liquid + quality * (1 / vapour - 1 / liquid))
        # exact ends: one phase, with its heat capacity and speed of sound
        density = np.where(quality == 0, liquid, np.where(quality == 1, vapour, density))
        return self._solution(
            temperature, pressure, density, quality=quality, liquid_density=liquid, vapour_density=vapour
        )

    def _temperature_density(self, temperature: FloatArray, density: FloatArray, elements: Elements) -> Solution:
        guard = self._guard
        guard.temperature(temperature, elements)
        guard.density(density, elements, self._maximum_density)
        t = np.where(elements.rejected, self.limits.maximum_temperature, temperature)
        rho = np.where(elements.rejected, 1.0, density)
        below = t < self._curves.top_temperature
        quality = np.full_like(t, np.nan)
        rho_l, rho_v = quality.copy(), quality.copy()
        pressure = self._equation.properties(t, rho).pressure
        if below.any():
            saturated = self._curves.at_temperature(t[below])
            liquid, vapour = saturated.liquid_density, saturated.vapour_density
            x = (1 / rho[below] - 1 / liquid) / (1 / vapour - 1 / liquid)
            if self.pseudo_pure:
                # there is no state beside a line on its inner side, so a density that rounding put there is on it
                x = np.where(np.abs(rho[below] / liquid - 1) <= _ON_LINE, 0.0, x)
                x = np.where(np.abs(rho[below] / vapour - 1) <= _ON_LINE, 1.0, x)
            mixed = (x >= 0) & (x <= 1)
            rho_l[below], rho_v[below] = liquid, vapour
            quality[below] = np.where(mixed, x, np.nan)
            # a liquid's pressure is the rounding of its density at least: it is not under saturation
            liquid_pressure = np.maximum(pressure[below], saturated.bubble_pressure)
            pressure[below] = np.where(rho[below] > liquid, liquid_pressure, pressure[below])
            pressure[below] = np.where(mixed, saturated.bubble_pressure, pressure[below])
            if self.pseudo_pure:
                inside = np.zeros(t.size, dtype=np.bool_)
                inside[below] = mixed & (x > 0) & (x < 1)
                elements.reject(inside, lambda i: guard.between_lines("temperature", t[i], "density", rho[i]))
                pressure[below] = np.where(mixed & (x == 1), saturated.dew_pressure, pressure[below])
        guard.pressure(pressure, elements)
        guard.melting(pressure, t, elements)
        return self._solution(
            temperature, pressure, density, quality=quality, liquid_density=rho_l, vapour_density=rho_v
        )

    def _searched(self, names: tuple[str, str], first: FloatArray, second: FloatArray, elements: Elements) -> Solution:
        """The one state with two properties."""
        found = self._searches.find(names, first, second, elements)
        return self._given_back(found._asdict(), names, first, second)

    def _given_back(
        self, found: Mapping[str, FloatArray], names: tuple[str, str], first: FloatArray, second: FloatArray
    ) -> Solution:
        """States found, in which the properties given stand as they were given."""
        fields = ("temperature", "pressure", "density", "quality", "liquid_density", "vapour_density")
        values = {name: found[name] for name in fields}
        known = {name: value for name, value in zip(names, (first, second), strict=True) if name not in fields}
        values |= {name: value for name, value in zip(names, (first, second), strict=True) if name in fields}
        return self._solution(**values, known=known)

    def _pressure_superheat(self, pressure: FloatArray, superheat: FloatArray, elements: Elements) -> Solution:
        return self._pressure_distance(pressure, superheat, elements, "superheat", 1.0)

    def _pressure_subcooling(self, pressure: FloatArray, subcooling: FloatArray, elements: Elements) -> Solution:
        return self._pressure_distance(pressure, subcooling, elements, "subcooling", 0.0)

    def _pressure_distance(
        self, pressure: FloatArray, distance: FloatArray, elements: Elements, name: str, end: float
    ) -> Solution:
        """A stated distance from saturation; none at all is the saturated state itself."""
        guard = self._guard
        guard.pressure(pressure, elements)
        guard.saturation_pressure(pressure, elements, self._triple_pressure, self._curves.top_pressure)
        guard.distance(distance, elements, name)
        p = np.where(elements.rejected, self._curves.top_pressure / 2, pressure)
        gap = np.where(elements.rejected, 0.0, distance)
        saturated = self._curves.at_pressure(p)
        base = saturated.dew_temperature if end else saturated.bubble_temperature
        temperature = base + gap if end else base - gap
        guard.temperature(temperature, elements)
        guard.melting(p, temperature, elements)
        # inside the band next to saturation, the branch is known here although (p, T) would not tell it
        liquid = np.full(p.size, not end)
        t = np.where(elements.rejected, base, temperature)
        density, found = self._solver.solve(t, p, liquid)
        edge = saturated.vapour_density if end else saturated.liquid_density
        # so close that the branch ends in rounding: the saturated density
        near = gap <= _SATURATION_BAND * base
        density = np.where(near, edge, density)
        elements.reject(~found & ~near, lambda i: guard.not_found("pressure", p[i], name, distance[i]))
        quality = np.where(gap == 0, end, np.nan)
        return self._solution(temperature, pressure, density, quality=quality, known={name: distance})

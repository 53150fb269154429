"""A fluid with a cubic equation of state: one substance or a mixture of fixed composition."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import cached_property
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import Fault, InputError
from reportgen.fluids.cubics.description import Description
from reportgen.fluids.cubics.equilibria import Equilibria, States
from reportgen.fluids.cubics.equilibrium import Pairing
from reportgen.fluids.cubics.guard import LOWEST_PRESSURE, Guard
from reportgen.fluids.cubics.isolines import Isoline
from reportgen.fluids.cubics.nested import enthalpy_entropy, volume_energy
from reportgen.fluids.cubics.solution import Solution
from reportgen.fluids.cubics.sought import Sought
from reportgen.fluids.cubics.thermodynamics import MolarModel
from reportgen.fluids.cubics.values import Target
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT
from reportgen.fluids.model import Errors, Limits, Point
from reportgen.fluids.pairs import Elements, Pair, check_errors, read_pair
from reportgen.fluids.state import State

__all__ = ["CubicFluid", "PhaseSplit"]

FloatArray = NDArray[np.float64]

#: Pressures of a pure substance closer than this to saturation (relative) do not tell liquid from vapour.
_SATURATION_BAND = 1e-9

#: States worked on at a time.
_CHUNK = 16384

#: Properties by which a state is sought along an isobar or isotherm.
_TARGETS: dict[str, Target] = {
    "specific_enthalpy": "enthalpy",
    "specific_entropy": "entropy",
    "density": "volume",
    "quality": "mass_quality",
}


class PhaseSplit(NamedTuple):
    """Phases at given temperatures and pressures, in the shape given.

    ``liquid``, ``vapour`` are States of each phase, NaN where it is absent; a single phase is the liquid where its
    ``phase`` is "liquid", else the vapour. ``liquid_fractions``, ``vapour_fractions`` are mole fractions [1] with one
    axis more, along which the species lie in the order of ``species``; ``vapour_share`` is the mole fraction [1] of
    the vapour in the whole.
    """

    liquid: State
    vapour: State
    species: tuple[str, ...]
    liquid_fractions: FloatArray
    vapour_fractions: FloatArray
    vapour_share: FloatArray


class CubicFluid:
    """A cubic equation of state; see ``reportgen.fluids.model.Fluid`` for the interface. Made by
    :func:`reportgen.fluids.cubic`.

    Parameters
    ----------
    description : names, sources and remarks.
    fractions : mole fractions [1] by species key.
    model : the equation with its ideal part.
    """

    kind = "cubic"
    entropy_zero_name = "third-law"

    def __init__(self, description: Description, fractions: Mapping[str, float], model: MolarModel) -> None:
        self.title = description.title
        self.substance = description.substance
        self.sources = description.sources
        self.entropy_zero = description.entropy_zero
        self.data_files = description.files
        self._description = description
        self._fractions = dict(fractions)
        self._equilibria = Equilibria(model, np.array(list(fractions.values())))
        self.molar_mass = self._equilibria.molar_mass
        self.gas_constant = MOLAR_GAS_CONSTANT / self.molar_mass
        limits = description.limits
        self._low, self._high, self._top = (
            limits.minimum_temperature,
            limits.maximum_temperature,
            limits.maximum_pressure,
        )
        covolume = float(model.mixture.covolumes @ self._equilibria.feed[:, 0])
        densest = self.molar_mass / (covolume - self._equilibria.shift)
        self._guard = Guard(self.title, limits, densest, pure=self._equilibria.pure)
        self._isobars = Isoline(self._equilibria, "pressure", self._low, self._high)
        self._isotherms = Isoline(self._equilibria, "temperature", LOWEST_PRESSURE, self._top)
        self._pairs: dict[tuple[str, str], Callable[[Pair, Elements], States]] = {
            ("pressure", "temperature"): self._pressure_temperature,
            ("pressure", "specific_enthalpy"): self._along,
            ("pressure", "specific_entropy"): self._along,
            ("pressure", "quality"): self._with_quality,
            ("pressure", "density"): self._along,
            ("pressure", "superheat"): self._beside_saturation,
            ("pressure", "subcooling"): self._beside_saturation,
            ("temperature", "quality"): self._with_quality,
            ("temperature", "density"): self._temperature_density,
            ("temperature", "specific_entropy"): self._along,
            ("temperature", "specific_enthalpy"): self._along,
            ("density", "specific_internal_energy"): self._density_energy,
            ("specific_enthalpy", "specific_entropy"): self._enthalpy_entropy,
        }

    # --- description --------------------------------------------------------------------------------------------------

    @property
    def composition(self) -> dict[str, float] | None:
        """Mole fractions [1] by species, or None for a single species."""
        return dict(self._fractions) if len(self._fractions) > 1 else None

    @cached_property
    def limits(self) -> Limits:
        """Range: temperatures of the ideal part, the pressure set here; with the critical point."""
        point = self._equilibria.critical_point
        critical = None
        if point is not None:
            density = self.molar_mass / (point.volume - self._equilibria.shift)
            critical = Point(point.temperature, point.pressure, density)
        return self._description.limits_with(critical)

    def __repr__(self) -> str:
        return f"CubicFluid({self.title!r})"

    # --- states -------------------------------------------------------------------------------------------------------

    def at(self, *, errors: Errors = "raise", **pair: ArrayLike) -> State:
        """State fixed by two properties; see ``fluids.model.Fluid.at``.

        Pairs: pressure with temperature, specific_enthalpy, specific_entropy, quality, density, superheat or
        subcooling; temperature with quality, density, specific_entropy or specific_enthalpy; density with
        specific_internal_energy; specific_enthalpy with specific_entropy. specific_volume stands for density.

        Mixtures: ``quality`` is the vapour's share of the mass; superheat counts from the dew, subcooling from the
        bubble temperature. A pressure with two dew points, or a temperature with two, is refused with both named.
        Temperature with enthalpy, and for mixtures temperature with entropy and pressure with density, may have
        several states: these are refused with a list of them. Three phases, or two liquids, are refused. A pure
        substance within 1e-9 of its saturation pressure is refused, since p and T do not tell liquid from vapour there.
        """
        given, usable, elements = self._read(errors, pair)
        states = self._states(given, usable, elements)
        elements.finish(errors)
        solution = Solution(self._equilibria, states, dict(zip(given.names, (given.first, given.second), strict=True)))
        return State(given.shape, solution.values(), solution.fill, elements.faults)

    def saturation(
        self, *, temperature: ArrayLike | None = None, pressure: ArrayLike | None = None, errors: Errors = "raise"
    ) -> tuple[State, State]:
        """Saturated liquid and saturated vapour (for a mixture, bubble and dew point) at a temperature [K] or a
        pressure [Pa], in the shape given.

        Raises
        ------
        InputError : not exactly one of the two given.
        RangeError : no saturation there, or several points (``errors="raise"``).
        """
        if (temperature is None) == (pressure is None):
            raise InputError(Fault("Saturation is fixed by a temperature or a pressure, one of the two."))
        given: dict[str, Any] = {"pressure": pressure} if temperature is None else {"temperature": temperature}
        return self.at(errors=errors, quality=0.0, **given), self.at(errors=errors, quality=1.0, **given)

    def phases(self, temperature: ArrayLike, pressure: ArrayLike, *, errors: Errors = "raise") -> PhaseSplit:
        """Liquid and vapour in equilibrium at T [K] and p [Pa], with their compositions [1].

        Raises
        ------
        InputError, RangeError : as for :meth:`at` with pressure and temperature.
        """
        given, usable, elements = self._read(errors, {"pressure": pressure, "temperature": temperature})
        states = self._states(given, usable, elements)
        elements.finish(errors)
        solution = Solution(self._equilibria, states, {})
        mixed = states.mixed
        liquid = solution.fill("phase")["phase"] == "liquid"
        there = states.found & ~mixed
        parts = []
        for side, alone in (("liquid", there & liquid), ("vapour", there & ~liquid)):
            fields = solution.side(side)  # type: ignore[arg-type]
            for name, array in fields.items():
                if alone.any():
                    whole = solution.values().get(name)
                    whole = solution.fill(name)[name] if whole is None else whole
                    array[alone] = whole[alone]
            parts.append(State(given.shape, fields, None, elements.faults))
        x = np.where(mixed | (there & liquid), states.liquid, np.nan)
        y = np.where(mixed | (there & ~liquid), states.vapour, np.nan)
        share = np.where(mixed, states.fraction, np.where(there, np.where(liquid, 0.0, 1.0), np.nan))
        shape = (*given.shape, len(self._fractions))
        return PhaseSplit(
            parts[0],
            parts[1],
            tuple(self._fractions),
            x.T.reshape(shape),
            y.T.reshape(shape),
            share.reshape(given.shape)[()],
        )

    def _read(self, errors: Errors, pair: Mapping[str, ArrayLike]) -> tuple[Pair, NDArray[np.intp], Elements]:
        """The two properties, the elements with two values in range, and faults of those out of it. NaN is a value not
        known, and no fault.
        """
        check_errors(errors)
        given = read_pair(pair, self._pairs, self.title)
        elements = Elements(given.first.size)
        known = ~(np.isnan(given.first) | np.isnan(given.second))
        for name, values in zip(given.names, (given.first, given.second), strict=True):
            self._guard.infinite(np.isinf(values) & known, elements, name, values)
        finite = np.flatnonzero(known & ~elements.rejected)
        part = Elements(finite.size)
        for name, values in zip(given.names, (given.first, given.second), strict=True):
            self._guard.check(name, values[finite], part)
        elements.take_over(part, finite)
        return given, finite[~part.rejected], elements

    def _states(self, given: Pair, usable: NDArray[np.intp], elements: Elements) -> States:
        """States of all elements, NaN where there is none."""
        states = States.nowhere(len(self._fractions), elements.size)
        for start in range(0, usable.size, _CHUNK):
            where = usable[start : start + _CHUNK]
            part = Elements(where.size)
            pair = Pair(given.names, given.first[where], given.second[where], (where.size,))
            # far from a solution, searches may overflow; what they return is checked for each element
            with np.errstate(all="ignore"):
                states.put(where, self._chunk(pair, part))
            elements.take_over(part, where)
        return states

    def _chunk(self, pair: Pair, elements: Elements) -> States:
        """States of some elements, NaN where there is none, with the reason."""
        found = self._pairs[pair.names](pair, elements)
        p, t = found.pressure.copy(), found.temperature.copy()
        elements.reject(found.third & found.found, lambda i: self._guard.third_phase(p[i], t[i]))
        elements.reject(~found.found, lambda i: self._guard.none(pair.names, (pair.first[i], pair.second[i])))
        found.drop(elements.rejected)
        return found

    # --- pairs --------------------------------------------------------------------------------------------------------

    def _pressure_temperature(self, pair: Pair, elements: Elements) -> States:
        pressure, temperature = pair.first, pair.second
        states = self._equilibria.at(temperature, pressure)
        if self._equilibria.pure:
            saturated = self._equilibria.saturation.pressure(temperature)
            band = np.abs(pressure - saturated) < _SATURATION_BAND * saturated
            elements.reject(
                band, lambda i: self._guard.on_saturation(pressure[i], temperature[i], self._ends(temperature[i]))
            )
        return states

    def _ends(self, temperature: float) -> tuple[Point, ...]:
        """Saturated vapour and liquid of a pure substance at T [K], in the order of rising density."""
        t = np.array([temperature])
        p = self._equilibria.saturation.pressure(t)
        return tuple(
            Point(float(temperature), float(p[0]), self._density(float(self._equilibria.volume(t, p, side)[0])))
            for side in ("vapour", "liquid")
        )

    def _density(self, volume: float) -> float:
        """Density [kg/m3] of an untranslated molar volume [m3/mol]."""
        return self.molar_mass / (volume - self._equilibria.shift)

    def _molar(self, name: str, values: FloatArray) -> FloatArray:
        """Molar value of a property [SI]; the volume for a density."""
        if name == "quality":
            return values
        return self.molar_mass / values if name == "density" else self.molar_mass * values

    def _along(self, pair: Pair, elements: Elements) -> States:
        """States sought along isobars or isotherms."""
        line, name = pair.names
        sought = self._line(line).find(pair.first, _TARGETS[name], self._molar(name, pair.second))
        self._tell(pair, sought, elements)
        return sought.states

    def _line(self, axis: str) -> Isoline:
        return self._isobars if axis == "pressure" else self._isotherms

    def _tell(self, pair: Pair, sought: Sought, elements: Elements) -> None:
        """Faults of states beyond the limits, and of those that are not the only ones."""
        names = pair.names
        other = "temperature" if names[0] == "pressure" else "pressure"

        def values(i: int) -> tuple[float, float]:
            return float(pair.first[i]), float(pair.second[i])

        for where, above in ((sought.below, False), (sought.above, True)):
            where = where & ~sought.states.found & ~sought.several
            elements.reject(where, lambda i, above=above: self._guard.beyond(names, values(i), other, above=above))  # type: ignore[misc]
        elements.reject(sought.several, lambda i: self._guard.several(names, values(i), tuple(sought.points[i])))

    def _with_quality(self, pair: Pair, elements: Elements) -> States:
        line, quality = pair.names[0], pair.second
        states = States.nowhere(len(self._fractions), quality.size)
        inner = np.flatnonzero((quality > 0.0) & (quality < 1.0))
        if inner.size:
            sought = self._line(line).find(pair.first[inner], "mass_quality", quality[inner])
            states.put(inner, sought.states)
            part = Elements(inner.size)
            names = pair.names
            self._tell(Pair(names, pair.first[inner], quality[inner], (inner.size,)), sought, part)
            elements.take_over(part, inner)
        for end, branch in ((0.0, "bubble"), (1.0, "dew")):
            where = np.flatnonzero(quality == end)
            if where.size:
                self._on_line(line, branch, pair.first[where], where, states, elements)
        # a mixture's share of vapour between 0 and 1 may be met or not: that is no matter of the lines alone
        between = (quality > 0.0) & (quality < 1.0) & (not self._equilibria.pure)
        self._no_saturation(line, pair.first, quality, states.found | between, elements)
        return states

    def _on_line(
        self,
        line: str,
        branch: str,
        given: FloatArray,
        where: NDArray[np.intp],
        states: States,
        elements: Elements,
    ) -> None:
        """Bubble or dew points at p [Pa] or T [K]; beyond the limits they are rejected."""
        boundaries = self._equilibria.boundaries(line, given)
        pairing: Pairing = getattr(boundaries, branch)
        found = np.flatnonzero(getattr(boundaries, f"{branch}_found"))
        place = pairing.temperature if line == "pressure" else pairing.pressure
        low, high = (self._low, self._high) if line == "pressure" else (LOWEST_PRESSURE, self._top)
        other = "temperature" if line == "pressure" else "pressure"
        quality = 0.0 if branch == "bubble" else 1.0
        part = Elements(given.size)
        for outside, above in ((place < low * (1.0 - 1e-9), False), (place > high * (1.0 + 1e-9), True)):
            part.reject(
                outside & getattr(boundaries, f"{branch}_found"),
                lambda i, above=above: self._guard.beyond(  # type: ignore[misc]
                    (line, "quality"), (float(given[i]), quality), other, above=above
                ),
            )
        elements.take_over(part, where)
        found = found[~part.rejected[found]]
        states.put(where[found], self._equilibria.paired(pairing.take(found)))

    def _no_saturation(
        self, line: str, given: FloatArray, quality: FloatArray, settled: NDArray[np.bool_], elements: Elements
    ) -> None:
        """Say why there is no saturated state, but for elements that are ``settled``."""

        def describe(i: int) -> Fault:
            branch = "dew" if quality[i] == 1.0 else "bubble"
            roots = []
            if not self._equilibria.pure:
                value = float(given[i])
                roots = self._equilibria.envelope.roots(branch, line, value)  # type: ignore[arg-type]
            return self._guard.no_saturation(line, float(given[i]), branch, roots if len(roots) > 1 else [])

        elements.reject(~settled & ~elements.rejected, describe)

    def _beside_saturation(self, pair: Pair, elements: Elements) -> States:
        """States at a stated distance from the dew or the bubble temperature; none at all is the saturated state."""
        pressure, distance = pair.first, pair.second
        over = pair.names[1] == "superheat"
        branch = "dew" if over else "bubble"
        states = States.nowhere(len(self._fractions), pressure.size)
        boundaries = self._equilibria.boundaries("pressure", pressure)
        pairing: Pairing = boundaries.dew if over else boundaries.bubble
        found: NDArray[np.bool_] = boundaries.dew_found if over else boundaries.bubble_found
        quality = np.full(pressure.size, 1.0 if over else 0.0)
        at_line = np.flatnonzero(found & (distance == 0.0))
        if at_line.size:
            self._on_line("pressure", branch, pressure[at_line], at_line, states, elements)
        temperature = pairing.temperature + (distance if over else -distance)
        part = np.flatnonzero(found & (distance > 0.0))
        if part.size:
            inner = Elements(part.size)
            t = temperature[part]
            self._guard.temperature(t, inner)
            elements.take_over(inner, part)
            good = part[~inner.rejected]
            if good.size:
                if self._equilibria.pure:
                    # next to saturation p and T would not tell the phase, which is known here
                    volume = self._equilibria.volume(temperature[good], pressure[good], "vapour" if over else "liquid")
                    states.put(good, self._equilibria.single(temperature[good], pressure[good], volume))
                else:
                    states.put(good, self._equilibria.at(temperature[good], pressure[good]))
        self._no_saturation("pressure", pressure, quality, states.found, elements)
        return states

    def _temperature_density(self, pair: Pair, elements: Elements) -> States:
        temperature, volume = pair.first, self.molar_mass / pair.second
        sought = self._isotherms.find(temperature, "volume", volume)
        self._tell(pair, sought, elements)
        return sought.states

    def _density_energy(self, pair: Pair, elements: Elements) -> States:
        volume, energy = self.molar_mass / pair.first, self.molar_mass * pair.second
        return volume_energy(self._equilibria, self._isotherms, volume, energy, self._low, self._high)

    def _enthalpy_entropy(self, pair: Pair, elements: Elements) -> States:
        enthalpy, entropy = self.molar_mass * pair.first, self.molar_mass * pair.second
        return enthalpy_entropy(self._equilibria, self._isobars, self._isotherms, enthalpy, entropy)

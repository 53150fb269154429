"""From solved states (temperature, densities, quality) to all other properties, computed when asked for."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.helmholtz import Helmholtz
from reportgen.fluids.real.saturation import SaturationCurves
from reportgen.fluids.state import PHASE_TYPE

__all__ = ["CALORIC", "FIRST_ORDER", "Solution"]

FloatArray = NDArray[np.float64]

#: Fields that need no second derivatives of the equation.
FIRST_ORDER = ("specific_enthalpy", "specific_entropy", "specific_internal_energy")
#: Fields that the equation gives together.
CALORIC = (
    *FIRST_ORDER,
    "isobaric_heat_capacity",
    "isochoric_heat_capacity",
    "speed_of_sound",
)


class Coexisting:
    """Enthalpies and entropies of liquid and vapour in equilibrium, computed when first asked for.

    Parameters
    ----------
    equation : the equation of state.
    temperature, liquid, vapour : T [K] and the densities of the phases [kg/m3], shape (N,).
    """

    def __init__(self, equation: Helmholtz, temperature: FloatArray, liquid: FloatArray, vapour: FloatArray) -> None:
        self._equation, self._given = equation, (temperature, liquid, vapour)

    @cached_property
    def _values(self) -> tuple[FloatArray, ...]:
        return self._equation.coexisting(*self._given)

    def ends(self, quality: FloatArray) -> tuple[FloatArray, FloatArray]:
        """h [J/kg] and s [J/(kg*K)] at qualities x [1], by the lever rule."""
        h_l, h_v, s_l, s_v = self._values
        vapour = quality == 1
        return (
            np.where(vapour, h_v, h_l + quality * (h_v - h_l)),
            np.where(vapour, s_v, s_l + quality * (s_v - s_l)),
        )


@dataclass
class Solution:
    """Flat arrays of equal length that fix the states of a batch; NaN in elements without a state.

    ``density`` [kg/m3] is the overall one. ``quality`` is NaN in single-phase states off the saturation line; where
    it lies strictly between 0 and 1, ``liquid_density`` and ``vapour_density`` hold those of the phases (else None or
    NaN). ``known`` holds properties that were given, so that they are returned unchanged.
    """

    equation: Helmholtz
    curves: SaturationCurves
    triple_pressure: float
    temperature: FloatArray
    pressure: FloatArray
    density: FloatArray
    quality: FloatArray | None = None
    liquid_density: FloatArray | None = None
    vapour_density: FloatArray | None = None
    known: dict[str, FloatArray] = field(default_factory=dict)
    coexisting: Coexisting | None = None

    def values(self) -> dict[str, FloatArray]:
        """Fields known already."""
        found = {"temperature": self.temperature, "pressure": self.pressure, "density": self.density} | self.known
        if self.quality is None:
            self.quality = np.full_like(self.temperature, np.nan)
        found["quality"] = self.quality
        return found

    def masked(self, rejected: NDArray[np.bool_]) -> dict[str, FloatArray]:
        """Put NaN into the rejected elements; returns the fields known already."""
        self._replace(lambda array: np.where(rejected, np.nan, array))
        return self.values()

    def spread(self, positions: NDArray[np.intp], size: int) -> dict[str, FloatArray]:
        """Put the elements to their positions in a longer batch, NaN elsewhere; returns the fields known already."""

        def place(array: FloatArray) -> FloatArray:
            longer = np.full(size, np.nan)
            longer[positions] = array
            return longer

        self._replace(place)
        return self.values()

    def _replace(self, change: Callable[[FloatArray], FloatArray]) -> None:
        for name in ("temperature", "pressure", "density", "quality", "liquid_density", "vapour_density"):
            array = getattr(self, name)
            if array is not None:
                setattr(self, name, change(array))
        self.known = {name: change(array) for name, array in self.known.items()}

    def fill(self, name: str) -> Mapping[str, NDArray[Any]]:
        """The field ``name`` and those that come with it."""
        if name in FIRST_ORDER and self.coexisting is not None:
            assert self.quality is not None
            return self._first_order(*self.coexisting.ends(self.quality))
        if name in CALORIC:
            return self._caloric()
        if name == "specific_volume":
            return {name: 1 / self.density}
        if name == "compressibility_factor":
            return {name: self.pressure / (self.density * self.equation.gas_constant * self.temperature)}
        if name == "phase":
            return {name: self._phase()}
        return self._distance()

    def other_end(self) -> Solution:
        """Saturated vapour instead of the saturated liquid this is, of a pure fluid; both share their computations."""
        assert self.quality is not None
        assert self.liquid_density is not None
        assert self.vapour_density is not None
        self.coexisting = Coexisting(self.equation, self.temperature, self.liquid_density, self.vapour_density)
        return replace(self, density=self.vapour_density, quality=self.quality + 1)

    def _first_order(self, enthalpy: FloatArray, entropy: FloatArray) -> dict[str, FloatArray]:
        energy = enthalpy - self.pressure / self.density
        return dict(zip(FIRST_ORDER, (enthalpy, entropy, energy), strict=True))

    def _two_phase(self) -> NDArray[np.bool_]:
        quality = self.values()["quality"]
        return (quality > 0) & (quality < 1)

    def _caloric(self) -> dict[str, FloatArray]:
        """Enthalpy, entropy, internal energy, heat capacities and speed of sound.

        Single phase: ``c_p = c_v + T (∂p/∂T)²/(ρ² ∂p/∂ρ)``, ``w² = ∂p/∂ρ + T (∂p/∂T)²/(ρ² c_v)``. Two phases: h and
        s by the lever rule.
        """
        t, p, rho = self.temperature, self.pressure, self.density
        mixed = None if self.quality is None else np.flatnonzero(self._two_phase())
        if mixed is not None and mixed.size == t.size:
            cv = cp = w = np.full_like(t, np.nan)
            h, s = np.empty_like(t), np.empty_like(t)
        else:
            found = self.equation.properties(t, rho)
            h, s, cv = found.enthalpy, found.entropy, found.isochoric_heat_capacity
            slope = found.pressure_density
            with np.errstate(invalid="ignore", divide="ignore"):
                push = t * (found.pressure_temperature / rho) ** 2
                # at the critical point the slope is zero but for rounding, of either sign
                cp = np.where(slope > 0, cv + push / slope, np.where(np.isnan(slope), np.nan, np.inf))
                w = np.sqrt(slope + push / cv)
        if mixed is not None and mixed.size:
            assert self.quality is not None
            assert self.liquid_density is not None
            assert self.vapour_density is not None
            phases = Coexisting(self.equation, t[mixed], self.liquid_density[mixed], self.vapour_density[mixed])
            h[mixed], s[mixed] = phases.ends(self.quality[mixed])
            cv[mixed] = cp[mixed] = w[mixed] = np.nan
        h, s = self.known.get("specific_enthalpy", h), self.known.get("specific_entropy", s)
        return dict(zip(CALORIC, (h, s, h - p / rho, cp, cv, w), strict=True))

    def _distance(self) -> dict[str, FloatArray]:
        """Superheat and subcooling: distance of a single phase from saturation at its pressure."""
        p, t = self.pressure, self.temperature
        superheat, subcooling = np.full_like(t, np.nan), np.full_like(t, np.nan)
        with np.errstate(invalid="ignore"):
            inside = (p >= self.triple_pressure * (1 - 1e-12)) & (p <= self.curves.top_pressure) & ~self._two_phase()
        if inside.any():
            boiling, condensing = self.curves.temperatures(p[inside])
            here, x = t[inside], self.values()["quality"][inside]
            over, under = here - condensing, boiling - here
            superheat[inside] = np.where(x == 1, 0.0, np.where(over >= 0, over, np.nan))
            subcooling[inside] = np.where(x == 0, 0.0, np.where(under >= 0, under, np.nan))
            superheat[inside] = np.where(x == 0, np.nan, superheat[inside])
            subcooling[inside] = np.where(x == 1, np.nan, subcooling[inside])
        return {"superheat": superheat, "subcooling": subcooling}

    def _phase(self) -> NDArray[np.str_]:
        """Phase in words; above both critical values "supercritical", above one of them by the other."""
        t, p, rho = self.temperature, self.pressure, self.density
        top, top_p = self.curves.top_temperature, self.curves.top_pressure
        quality = self.values()["quality"]
        phase = np.full(t.shape, "vapour", dtype=PHASE_TYPE)
        hot, dense = t > top, p > top_p
        phase[dense] = "liquid"
        phase[hot & dense] = "supercritical"
        cold = np.flatnonzero(~hot & ~dense & np.isfinite(rho))
        if cold.size:
            saturated = self.curves.at_temperature(t[cold])
            middle = np.sqrt(saturated.liquid_density * saturated.vapour_density)
            phase[cold[rho[cold] > middle]] = "liquid"
        phase[quality == 0] = "liquid"
        phase[quality == 1] = "vapour"
        phase[self._two_phase()] = "two-phase"
        phase[~np.isfinite(rho)] = ""
        return phase

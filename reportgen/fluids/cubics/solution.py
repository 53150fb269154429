"""From molar states to the fields of a State: SI, mass basis, computed when asked for."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.equilibria import Equilibria, States
from reportgen.fluids.cubics.fugacity import Side
from reportgen.fluids.cubics.values import value_of
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT

__all__ = ["Solution"]

FloatArray = NDArray[Any]

_CALORIC = (
    "specific_enthalpy",
    "specific_entropy",
    "specific_internal_energy",
    "isobaric_heat_capacity",
    "isochoric_heat_capacity",
    "speed_of_sound",
)


class Solution:
    """Fields of N states.

    Parameters
    ----------
    equilibria : the composition.
    states : the states; NaN where there is none.
    known : fields that were given [SI], so that they are returned unchanged.
    """

    def __init__(self, equilibria: Equilibria, states: States, known: Mapping[str, FloatArray]) -> None:
        self._equilibria, self._states = equilibria, states
        self._there = states.found
        self._known = {name: np.where(self._there, array, np.nan) for name, array in known.items() if name != "quality"}
        self._mixed = states.mixed
        if "density" in self._known:
            # a bracket may have closed before the last digits of the volume
            one = self._there & ~self._mixed
            volume = equilibria.molar_mass / self._known["density"]
            states.volume = np.where(one, volume + equilibria.shift, states.volume)
        else:
            two = np.flatnonzero(self._mixed)
            volume = states.volume - equilibria.shift
            if two.size:
                volume[two] = value_of(equilibria, states, "volume")[two]
        self._volume = volume

    def values(self) -> dict[str, FloatArray]:
        """Fields known already."""
        states = self._states
        return {
            "temperature": states.temperature,
            "pressure": states.pressure,
            "density": self._equilibria.molar_mass / self._volume,
            "quality": self._quality(),
            **self._known,
        }

    def _quality(self) -> FloatArray:
        states = self._states
        if self._equilibria.pure:
            return states.fraction
        result = value_of(self._equilibria, states, "mass_quality")
        ends = (states.fraction == 0.0) | (states.fraction == 1.0)
        return np.where(ends, states.fraction, result)

    def fill(self, name: str) -> Mapping[str, NDArray[Any]]:
        """The field ``name`` and those that come with it."""
        states, mass = self._states, self._equilibria.molar_mass
        if name in _CALORIC:
            return self._caloric()
        if name == "specific_volume":
            return {name: self._volume / mass}
        if name == "compressibility_factor":
            return {name: states.pressure * self._volume / (MOLAR_GAS_CONSTANT * states.temperature)}
        if name == "phase":
            return {name: self._phase()}
        return self._distance()

    def _caloric(self) -> dict[str, FloatArray]:
        states, mass = self._states, self._equilibria.molar_mass
        h, s, cp, cv, w = (np.full(self._mixed.size, np.nan) for _ in range(5))
        one = np.flatnonzero(self._there & ~self._mixed)
        if one.size:
            t, p = states.temperature[one], states.pressure[one]
            found = self._equilibria.bulk(t, p, states.volume[one])
            h[one], s[one] = found.enthalpy / mass, found.entropy / mass
            cp[one], cv[one] = found.isobaric_heat_capacity / mass, found.isochoric_heat_capacity / mass
            # at the critical point c_p has no value and the speed of sound is zero, by the equation
            with np.errstate(invalid="ignore", divide="ignore"):
                stiffness = -(found.volume**2) * found.pressure_volume / mass
                w[one] = np.sqrt(found.isobaric_heat_capacity / found.isochoric_heat_capacity * stiffness)
        if self._mixed.any():
            for array, name in ((h, "enthalpy"), (s, "entropy")):
                array[self._mixed] = value_of(self._equilibria, states, name)[self._mixed] / mass  # type: ignore[arg-type]
        h = self._known.get("specific_enthalpy", h)
        s = self._known.get("specific_entropy", s)
        u = self._known.get("specific_internal_energy", h - states.pressure * self._volume / mass)
        return dict(zip(_CALORIC, (h, s, u, cp, cv, w), strict=True))

    def _distance(self) -> dict[str, FloatArray]:
        """Superheat and subcooling: distance of one phase from the dew or bubble temperature at its pressure."""
        t, p, fraction = self._states.temperature, self._states.pressure, self._states.fraction
        over, under = np.full(t.size, np.nan), np.full(t.size, np.nan)
        critical = self._equilibria.critical_point
        top = np.inf if critical is None else critical.pressure
        with np.errstate(invalid="ignore"):
            inside = np.flatnonzero(self._there & ~self._mixed & (p <= top))
        if inside.size:
            lines = self._equilibria.boundaries("pressure", p[inside])
            here, x = t[inside], fraction[inside]
            dew = np.where(lines.dew_found, lines.dew.temperature, np.nan)
            bubble = np.where(lines.bubble_found, lines.bubble.temperature, np.nan)
            above, below = here - dew, bubble - here
            over[inside] = np.where(x == 1.0, 0.0, np.where((above >= 0.0) & (x != 0.0), above, np.nan))
            under[inside] = np.where(x == 0.0, 0.0, np.where((below >= 0.0) & (x != 1.0), below, np.nan))
        return {"superheat": over, "subcooling": under}

    def _phase(self) -> NDArray[np.str_]:
        """Phase in words: by the critical point, or what stands for it where a mixture has none; below both critical
        values by the volume.
        """
        states, point = self._states, self._equilibria.turning_point
        with np.errstate(invalid="ignore"):
            hot, dense = states.temperature > point.temperature, states.pressure > point.pressure
            phase = np.where(states.volume < point.volume, "liquid", "vapour").astype("<U13")
        phase[hot] = "vapour"
        phase[dense] = "liquid"
        phase[hot & dense] = "supercritical"
        phase[states.fraction == 0.0] = "liquid"
        phase[states.fraction == 1.0] = "vapour"
        phase[self._mixed] = "two-phase"
        phase[~self._there] = ""
        return phase

    def side(self, side: Side) -> dict[str, FloatArray]:
        """Fields [SI] of one of two phases, NaN where there is one only; quality 0 (liquid) or 1 (vapour)."""
        states, model = self._states, self._equilibria.model
        fractions = states.liquid if side == "liquid" else states.vapour
        names = (
            "temperature",
            "pressure",
            "density",
            "quality",
            "specific_volume",
            "compressibility_factor",
            *_CALORIC,
        )
        fields = {name: np.full(self._mixed.size, np.nan) for name in (*names, "superheat", "subcooling")}
        phase = np.full(self._mixed.size, "", dtype="<U13")
        two = np.flatnonzero(self._mixed)
        if two.size:
            t, p, x = states.temperature[two], states.pressure[two], fractions[:, two]
            found = self._equilibria.phase(t, p, x, side)
            mass = model.molar_masses @ x
            stiffness = -(found.volume**2) * found.pressure_volume / mass
            values = (
                t,
                p,
                mass / found.volume,
                np.full(two.size, 0.0 if side == "liquid" else 1.0),
                found.volume / mass,
                p * found.volume / (MOLAR_GAS_CONSTANT * t),
                found.enthalpy / mass,
                found.entropy / mass,
                (found.enthalpy - p * found.volume) / mass,
                found.isobaric_heat_capacity / mass,
                found.isochoric_heat_capacity / mass,
                np.sqrt(found.isobaric_heat_capacity / found.isochoric_heat_capacity * stiffness),
            )
            for name, value in zip(names, values, strict=True):
                fields[name][two] = value
            fields["subcooling" if side == "liquid" else "superheat"][two] = 0.0
            phase[two] = side
        return {**fields, "phase": phase}

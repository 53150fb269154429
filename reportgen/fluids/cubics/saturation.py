"""Saturation of a pure substance.

Equal fugacity of liquid and vapour ties B = b p/(R T) to q = a/(b R T) alone: one curve ln B(q) for each cubic
equation, whatever the substance. It is smooth up to the critical point, so a Chebyshev series in ln q holds it to
1e-13. Saturation pressure and temperature follow from it without a search in two densities.
"""

from __future__ import annotations

from functools import lru_cache
from typing import Any

import numpy as np
from numpy.polynomial import chebyshev
from numpy.typing import NDArray

from reportgen.fluids.cubics.equation import CubicForm, residual_gibbs
from reportgen.fluids.cubics.mixing import Mixture
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT

__all__ = ["PureSaturation"]

FloatArray = NDArray[Any]

#: Greatest q [1] of the curve: there the saturation pressure is about 1e-12 of the critical one.
_STRONGEST = 64.0
_DEGREE = 44
_BISECTIONS = 80
_ITERATIONS = 40


class _Curve:
    """ln B(q) of saturation of one cubic equation; see :func:`_curve`."""

    def __init__(self, form: CubicForm) -> None:
        self._low = np.log(form.critical_strength)
        self._width = np.log(_STRONGEST) - self._low
        nodes = np.cos(np.pi * (np.arange(_DEGREE + 1) + 0.5) / (_DEGREE + 1))
        strength = np.exp(self._low + 0.5 * self._width * (1.0 + nodes))
        self._series = chebyshev.chebfit(nodes, _saturated_covolume(form, strength), _DEGREE)
        self._slopes = chebyshev.chebder(self._series)

    def __call__(self, strength: FloatArray) -> tuple[FloatArray, FloatArray]:
        """ln B [1] and its slope in ln q [1] at q [1]; NaN outside the curve."""
        place = (np.log(strength) - self._low) * (2.0 / self._width) - 1.0
        # the critical point itself belongs to the curve, whatever its last digits
        place = np.where(np.abs(place + 1.0) < 1e-14, -1.0, place)
        place = np.where((place >= -1.0) & (place <= 1.0), place, np.nan)
        slope = chebyshev.chebval(place, self._slopes) * (2.0 / self._width)
        return np.asarray(chebyshev.chebval(place, self._series)), np.asarray(slope)


@lru_cache(maxsize=4)
def _curve(form: CubicForm) -> _Curve:
    """The curve of an equation, made when first asked for."""
    return _Curve(form)


def _saturated_covolume(form: CubicForm, strength: FloatArray) -> FloatArray:
    """ln B [1] where liquid and vapour have equal fugacity at q [1]: bracketed Newton between the spinodals."""
    u, w = form.sum, form.product

    def pressure(packing: FloatArray) -> FloatArray:
        repulsion: FloatArray = packing / (1.0 - packing)
        pull: FloatArray = strength * packing**2 / (1.0 + (u + w * packing) * packing)
        return repulsion - pull

    def rises(packing: FloatArray) -> NDArray[np.bool_]:
        pull = strength * packing * (2.0 + u * packing) / (1.0 + (u + w * packing) * packing) ** 2
        result: NDArray[np.bool_] = 1.0 / (1.0 - packing) ** 2 > pull
        return result

    spinodals = []
    for end in (0.0, 1.0 - 1e-12):
        stable = np.full_like(strength, end)
        unstable = np.full_like(strength, 1.0 / form.critical_volume)
        for _ in range(_BISECTIONS):
            middle = 0.5 * (stable + unstable)
            up = rises(middle)
            stable, unstable = np.where(up, middle, stable), np.where(up, unstable, middle)
        spinodals.append(pressure(stable))
    high = np.log(spinodals[0])
    low = np.log(np.maximum(spinodals[1], 1e-30))
    found = 0.5 * (low + high)
    for _ in range(2 * _ITERATIONS):
        covolume = np.exp(found)
        roots = form.roots(covolume, strength)
        gap = residual_gibbs(form, roots.least, covolume, strength)
        gap = gap - residual_gibbs(form, roots.greatest, covolume, strength)
        low, high = np.where(gap > 0.0, found, low), np.where(gap > 0.0, high, found)
        with np.errstate(divide="ignore", invalid="ignore"):
            trial = found - gap / (roots.least - roots.greatest)
        trial = np.where((trial > low) & (trial < high), trial, 0.5 * (low + high))
        moved = np.max(np.abs(trial - found))
        found = trial
        if moved < 1e-15:
            break
    return found


class PureSaturation:
    """Saturation pressures and temperatures of a mixture of one species.

    Parameters
    ----------
    mixture : the one species.
    """

    def __init__(self, mixture: Mixture) -> None:
        self._mixture = mixture
        self._curve = _curve(mixture.form)
        self.critical_temperature = float(mixture.critical_temperatures[0])
        self.critical_pressure = float(mixture.critical_pressures[0])
        self._covolume = float(mixture.covolumes[0])

    def _level(self, temperature: FloatArray) -> tuple[FloatArray, FloatArray]:
        """ln p [ln Pa] of saturation and d ln p/d ln T [1]."""
        attraction = self._mixture.attraction(temperature)
        root, first = attraction.root[0], attraction.first[0]
        strength = root * root / (self._covolume * MOLAR_GAS_CONSTANT * temperature)
        level, slope = self._curve(strength)
        level = level + np.log(MOLAR_GAS_CONSTANT * temperature / self._covolume)
        return level, 1.0 + slope * (2.0 * temperature * first / root - 1.0)

    def pressure(self, temperature: FloatArray) -> FloatArray:
        """p [Pa] at T [K]; NaN above the critical temperature, zero so far below it that p has no meaning."""
        below = temperature <= self.critical_temperature
        level, _ = self._level(np.where(below, temperature, self.critical_temperature))
        return np.where(below, np.where(np.isnan(level), 0.0, np.exp(level)), np.nan)

    def temperature(self, pressure: FloatArray) -> FloatArray:
        """T [K] at p [Pa]; NaN above the critical pressure. Newton's method for ln p in 1/T."""
        below = pressure <= self.critical_pressure
        target = np.log(np.where(below, pressure, self.critical_pressure))
        steepness = 5.373 * (1.0 + float(self._mixture.factors[0]))
        low = 0.1 * self.critical_temperature
        with np.errstate(divide="ignore", invalid="ignore"):
            guess = self.critical_temperature / (1.0 - (target - np.log(self.critical_pressure)) / steepness)
            found = np.clip(guess, 2.0 * low, self.critical_temperature)
            for _ in range(_ITERATIONS):
                level, slope = self._level(found)
                step = (target - level) / slope
                # in 1/T, where ln p is nearly straight
                trial = np.clip(found / (1.0 - step), low, self.critical_temperature)
                moved = np.abs(trial - found)
                found = np.where(np.isnan(trial), 0.5 * (found + self.critical_temperature), trial)
                if not np.any(moved > 4e-16 * found):
                    break
        return np.where(below, found, np.nan)

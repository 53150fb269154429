"""The two cubic equations of state and the roots of their cubic.

    p = R T/(v − b) − a(T)/((v + ε b)(v + σ b))

with ε = 1 − √2, σ = 1 + √2 (Peng and Robinson 1976) or ε = 0, σ = 1 (Soave 1972). In Z = p v/(R T), B = b p/(R T) and
the strength of attraction q = a/(b R T):

    Z³ − (1 + B − u B) Z² + (q B + w B² − u B − u B²) Z − (q B² + w B² + w B³) = 0,   u = ε + σ, w = ε σ
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

__all__ = ["FORMS", "CubicForm", "Roots", "residual_gibbs"]

FloatArray = NDArray[Any]

#: B [1] below which the two lesser roots come from their limit at B → 0.
_THIN = 1e-5

#: Acentric factor [1] above which the slope of Robinson and Peng (1978) stands for the one of 1976.
HEAVY = 0.491


class Roots(NamedTuple):
    """Least and greatest compressibility factor Z [1] above B that solve the cubic, shape (N,); equal where there is
    one only.
    """

    least: FloatArray
    greatest: FloatArray


@dataclass(frozen=True)
class CubicForm:
    """One cubic equation.

    ``lower`` ε, ``upper`` σ; ``attraction`` Ω_a and ``covolume`` Ω_b [1] so that the critical point of a substance is
    its own: a(Tc) = Ω_a (R Tc)²/pc, b = Ω_b R Tc/pc; ``critical_compressibility`` Z_c [1]. ``slope`` gives m [1] of
    a(T) = a(Tc) [1 + m (1 − √(T/Tc))]² from acentric factors [1], ``slope_words`` says how. The translation c of
    Péneloux follows from Rackett's Z_RA: c = ``translation[0]`` (R Tc/pc)(``translation[1]`` − Z_RA).
    """

    name: str
    lower: float
    upper: float
    attraction: float
    covolume: float
    critical_compressibility: float
    slope: Callable[[FloatArray], FloatArray]
    slope_words: str
    translation: tuple[float, float]
    sources: tuple[str, ...]
    translation_source: str

    @property
    def sum(self) -> float:
        """u = ε + σ [1]."""
        return self.lower + self.upper

    @property
    def product(self) -> float:
        """w = ε σ [1]."""
        return self.lower * self.upper

    @property
    def critical_strength(self) -> float:
        """q = a/(b R T) [1] at the critical point of a substance."""
        return self.attraction / self.covolume

    @property
    def critical_volume(self) -> float:
        """v/b [1] at the critical point of a substance."""
        return self.critical_compressibility / self.covolume

    def logarithm(self, compressibility: FloatArray, covolume: FloatArray) -> FloatArray:
        """I = ln[(Z + σ B)/(Z + ε B)]/(σ − ε) [1], from Z and B [1]."""
        ratio = (self.upper - self.lower) * covolume / (compressibility + self.lower * covolume)
        result: FloatArray = np.log1p(ratio) / (self.upper - self.lower)
        return result

    def roots(self, covolume: FloatArray, strength: FloatArray) -> Roots:
        """Least and greatest Z [1] above B for B and q [1], shape (N,). NaN in, NaN out.

        Cardano's formulae, then two Newton steps, since the least root may be a millionth of the greatest.
        """
        b, a = covolume, strength * covolume
        c2 = (self.sum - 1.0) * b - 1.0
        c1 = a + ((self.product - self.sum) * b - self.sum) * b
        c0 = -b * (a + self.product * b * (1.0 + b))
        third = c2 / 3.0
        p = c1 / 3.0 - third * third
        q = third**3 - 0.5 * third * c1 + 0.5 * c0
        discriminant = q * q + p * p * p
        with np.errstate(invalid="ignore", divide="ignore"):
            several = discriminant < 0.0
            least = np.empty_like(b)
            greatest = least
            if several.any():
                radius = np.sqrt(np.where(several, -p, 1.0))
                angle = np.arccos(np.clip(-q / radius**3, -1.0, 1.0)) / 3.0
                greatest = 2.0 * radius * np.cos(angle)
                least = 2.0 * radius * np.cos(angle + 2.0 * math.pi / 3.0)
            if not several.all():
                part = -np.copysign(np.cbrt(np.abs(q) + np.sqrt(np.maximum(discriminant, 0.0))), q)
                single = part - np.where(part == 0.0, 0.0, p / part)
                greatest = np.where(several, greatest, single)
                least = np.where(several, least, single)
            greatest, least = greatest - third, least - third
            thin = b < _THIN
            if thin.any():
                several, greatest, least = self._thin(thin, b, strength, several, greatest, least)
            polish = _Polish(c2, c1, c0)
            greatest = polish(greatest)
            least = np.where(several, polish(least), greatest)
            # the least of three real roots may lie below the covolume, where there is no fluid
            return Roots(np.where(least > b, least, greatest), greatest)

    def _thin(
        self,
        thin: NDArray[np.bool_],
        covolume: FloatArray,
        strength: FloatArray,
        several: NDArray[np.bool_],
        greatest: FloatArray,
        least: FloatArray,
    ) -> tuple[NDArray[np.bool_], FloatArray, FloatArray]:
        """Starts for small B, where the discriminant drowns in rounding: Z → 1 for the gas, and for the liquid the
        limit B → 0, (w + q) η² + (u − q) η + 1 = 0 with η = B/Z.
        """
        fall, rise = strength - self.sum, strength + self.product
        inner = fall * fall - 4.0 * rise
        packing = (fall + np.sqrt(np.maximum(inner, 0.0))) / (2.0 * rise)
        liquid = (inner > 0.0) & (fall > 0.0)
        several = np.where(thin, liquid, several)
        greatest = np.where(thin, 1.0 + covolume * (1.0 - strength), greatest)
        least = np.where(thin & liquid, covolume / packing, np.where(thin, greatest, least))
        return several, greatest, least


class _Polish:
    """Newton's method on Z³ + c2 Z² + c1 Z + c0; a step next to a double root is left out."""

    def __init__(self, c2: FloatArray, c1: FloatArray, c0: FloatArray) -> None:
        self._coefficients = c2, c1, c0

    def __call__(self, root: FloatArray) -> FloatArray:
        """Root [1] nearer to the exact one."""
        c2, c1, c0 = self._coefficients
        for _ in range(2):
            slope = (3.0 * root + 2.0 * c2) * root + c1
            step = (((root + c2) * root + c1) * root + c0) / slope
            root = np.where(np.abs(step) < 0.1 * np.abs(root), root - step, root)
        return root


def residual_gibbs(
    form: CubicForm, compressibility: FloatArray, covolume: FloatArray, strength: FloatArray
) -> FloatArray:
    """Residual Gibbs energy over R T [1] from Z, B and q [1]: Z − 1 − ln(Z − B) − q I."""
    z = compressibility
    result: FloatArray = z - 1.0 - np.log(z - covolume) - strength * form.logarithm(z, covolume)
    return result


def _slope_peng_robinson(omega: FloatArray) -> FloatArray:
    light = 0.37464 + omega * (1.54226 - 0.26992 * omega)
    heavy = 0.379642 + omega * (1.48503 + omega * (-0.164423 + 0.016666 * omega))
    return np.where(omega > HEAVY, heavy, light)


def _slope_soave(omega: FloatArray) -> FloatArray:
    result: FloatArray = 0.480 + omega * (1.574 - 0.176 * omega)
    return result


_PENELOUX = (
    "Péneloux, Rauzy, Fréze (1982): A consistent correction for Redlich-Kwong-Soave volumes, "
    "Fluid Phase Equilib. 8, 7-23, doi:10.1016/0378-3812(82)80002-2"
)

#: Ω_a, Ω_b and Z_c to all digits of a double: the printed five digits would move the critical point.
FORMS: dict[str, CubicForm] = {
    "Peng-Robinson": CubicForm(
        name="Peng-Robinson",
        lower=1.0 - math.sqrt(2.0),
        upper=1.0 + math.sqrt(2.0),
        attraction=0.45723552892138219,
        covolume=0.077796073903888456,
        critical_compressibility=0.30740130869870385,
        slope=_slope_peng_robinson,
        slope_words="m = 0.37464 + 1.54226 ω − 0.26992 ω² (1976); for ω above 0.491 "
        "m = 0.379642 + 1.48503 ω − 0.164423 ω² + 0.016666 ω³ (1978)",
        translation=(0.50033, 0.25969),
        sources=(
            "Peng, Robinson (1976): A new two-constant equation of state, Ind. Eng. Chem. Fundam. 15, 59-64, "
            "doi:10.1021/i160057a011",
            "Robinson, Peng (1978): The characterization of the heptanes and heavier fractions for the GPA "
            "Peng-Robinson programs, GPA Research Report RR-28 (m for acentric factors above 0.491)",
        ),
        translation_source=_PENELOUX + "; constants for this equation: Pedersen, Christensen (2006): Phase behavior "
        "of petroleum reservoir fluids, CRC Press",
    ),
    "Soave-Redlich-Kwong": CubicForm(
        name="Soave-Redlich-Kwong",
        lower=0.0,
        upper=1.0,
        attraction=0.42748023354034140,
        covolume=0.086640349964957721,
        critical_compressibility=1.0 / 3.0,
        slope=_slope_soave,
        slope_words="m = 0.480 + 1.574 ω − 0.176 ω² (1972)",
        translation=(0.40768, 0.29441),
        sources=(
            "Soave (1972): Equilibrium constants from a modified Redlich-Kwong equation of state, "
            "Chem. Eng. Sci. 27, 1197-1203, doi:10.1016/0009-2509(72)80096-4",
        ),
        translation_source=_PENELOUX,
    ),
}

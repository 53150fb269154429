"""Fugacity coefficients of a phase and their slopes in composition, temperature and pressure.

    ln φ_i = β_i (Z − 1) − ln(Z − B) − q_i I,    β_i = b_i/b,  q_i = 2 Σ_j x_j a_ij/(b R T) − q β_i

(Peng and Robinson 1976; slopes by the chain rule, with Z(B, q) from the equation itself.) A volume translation adds
−c_i p/(R T), the same in every phase, and is left out here: equilibria do not depend on it.
"""

from __future__ import annotations

from typing import Any, Literal, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.equation import residual_gibbs
from reportgen.fluids.cubics.mixing import Conditions, Mixture
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT

__all__ = ["Phase", "Side", "Slopes", "phase_at"]

FloatArray = NDArray[Any]

#: Which root of the cubic a phase is on: of the lower Gibbs energy, the least (liquid) or the greatest (vapour).
Side = Literal["stable", "liquid", "vapour"]


class Phase(NamedTuple):
    """A phase of N states: ``fractions``, ``shares`` β_i, ``drives`` q_i, ``ln_phi`` ln φ_i [1] of shape (C, N);
    ``covolume`` B, ``strength`` q, ``compressibility`` Z and ``logarithm`` I [1] of shape (N,).
    """

    fractions: FloatArray
    shares: FloatArray
    drives: FloatArray
    covolume: FloatArray
    strength: FloatArray
    compressibility: FloatArray
    logarithm: FloatArray
    ln_phi: FloatArray


def phase_at(mixture: Mixture, conditions: Conditions, amounts: FloatArray, side: Side = "stable") -> Phase:
    """Phase of N states.

    Parameters
    ----------
    mixture : the species.
    conditions : temperature [K] and pressure [Pa].
    amounts : amounts of substance [mol], on any scale, shape (C, N) or (C, 1).
    side : the root to take.
    """
    form = mixture.form
    fractions = amounts / np.sum(amounts, axis=0)
    thermal = MOLAR_GAS_CONSTANT * conditions.temperature
    covolume = mixture.covolumes @ fractions
    drives = conditions.root * (mixture.coupling @ (fractions * conditions.root))
    drives *= 1.0 / (covolume * thermal)
    strength = np.sum(fractions * drives, axis=0)
    shares = mixture.covolumes[:, None] / covolume
    drives = 2.0 * drives - strength * shares
    b = covolume * conditions.pressure / thermal
    roots = form.roots(b, strength)
    if side == "liquid":
        z = roots.least
    elif side == "vapour":
        z = roots.greatest
    else:
        z = roots.greatest
        several = np.flatnonzero(roots.least < roots.greatest)
        if several.size:
            low, high = roots.least[several], roots.greatest[several]
            b_here, q_here = b[several], strength[several]
            dense = residual_gibbs(form, low, b_here, q_here) < residual_gibbs(form, high, b_here, q_here)
            z = z.copy()
            z[several] = np.where(dense, low, high)
    logarithm = form.logarithm(z, b)
    ln_phi = shares * (z - 1.0) - np.log(z - b) - drives * logarithm
    return Phase(fractions, shares, drives, b, strength, z, logarithm, ln_phi)


class Slopes:
    """Slopes of ln φ_i of a phase.

    Parameters
    ----------
    mixture : the species.
    conditions : temperature [K] and pressure [Pa] of the phase.
    phase : the phase.
    """

    def __init__(self, mixture: Mixture, conditions: Conditions, phase: Phase) -> None:
        self._mixture, self._conditions, self._phase = mixture, conditions, phase
        u, w = mixture.form.sum, mixture.form.product
        z, b, q = phase.compressibility, phase.covolume, phase.strength
        inverse = 1.0 / (z - b)
        denominator = (z + u * b) * z + w * b * b
        # 1/(Z − B) − q B/((Z + ε B)(Z + σ B)) − 1 = 0 ties Z to B and q
        pull = q * b / denominator**2
        by_z = pull * (2.0 * z + u * b) - inverse**2
        by_b = inverse**2 - q / denominator + pull * (u * z + 2.0 * w * b)
        self._z_b = -by_b / by_z
        self._z_q = b / denominator / by_z
        self._by_z = phase.shares - inverse + phase.drives * (b / denominator)
        self._by_b = inverse - phase.drives * (z / denominator)

    def pressure(self) -> FloatArray:
        """∂ln φ_i/∂ln p [1] at constant T, shape (C, N)."""
        b = self._phase.covolume
        result: FloatArray = b * (self._by_z * self._z_b + self._by_b)
        return result

    def temperature(self) -> FloatArray:
        """∂ln φ_i/∂ln T [1] at constant p, shape (C, N)."""
        mixture, conditions, phase = self._mixture, self._conditions, self._phase
        attraction = mixture.attraction(conditions.temperature)
        root, first = attraction.root, attraction.first
        x = phase.fractions
        half = first * (mixture.coupling @ (x * root)) + root * (mixture.coupling @ (x * first))
        # T ∂/∂T of 2 Σ x_j a_ij/(b R T) and of q; b R T = (b R T/p) p, all over R T
        scale = conditions.pressure / (phase.covolume * MOLAR_GAS_CONSTANT**2 * conditions.temperature)
        change = 2.0 * half * scale
        q = phase.strength
        by_q = 0.5 * np.sum(x * change, axis=0) - q
        by_drive = change - (phase.drives + q * phase.shares) - by_q * phase.shares
        by_z = self._z_q * by_q - self._z_b * phase.covolume
        result: FloatArray = self._by_z * by_z - self._by_b * phase.covolume - phase.logarithm * by_drive
        return result

    def composition(self) -> FloatArray:
        """n ∂ln φ_i/∂n_j [1] at constant T and p, symmetric, shape (N, C, C)."""
        mixture, conditions, phase = self._mixture, self._conditions, self._phase
        beta, drives, q = phase.shares, phase.drives, phase.strength
        scale = 2.0 * conditions.pressure / (phase.covolume * (MOLAR_GAS_CONSTANT * conditions.temperature) ** 2)
        scaled = conditions.root * scale
        crossed = drives[:, None] * beta[None]
        by_drive = mixture.coupling[:, :, None] * scaled[:, None] * conditions.root[None] - crossed
        by_drive -= np.swapaxes(crossed, 0, 1)
        excess = beta - 1.0
        by_z = self._z_b * phase.covolume * excess + self._z_q * (drives - q)
        slope = self._by_z[:, None] * by_z[None]
        slope += (self._by_b * phase.covolume - beta * (phase.compressibility - 1.0))[:, None] * excess[None]
        slope -= phase.logarithm * by_drive
        return np.moveaxis(slope, -1, 0)

"""Rotation and vibration of polyatomic molecules.

Rotation is classical with its first quantum corrections (Herzberg, Molecular Spectra and Molecular Structure II, 1945,
chapter V; Stripp and Kirkwood, J. Chem. Phys. 19 (1951) 1131, doi:10.1063/1.1748494), θ = c₂ B:

    linear:   Q = T/(σ θ) [1 + θ/(3T) + θ²/(15T²)]
    bent:     Q = √(π T³/(θ_A θ_B θ_C))/σ [1 + (2 (θ_A+θ_B+θ_C) − θ_A θ_B/θ_C − θ_B θ_C/θ_A − θ_C θ_A/θ_B)/(12 T)]

Vibration is harmonic with the observed fundamentals, or, where anharmonic constants are carried, a sum over the levels
Σ ν⁰_i v_i + Σ_(i≤j) x_ij v_i v_j, each with its own rotational constants B − Σ α_i v_i. Centrifugal stretching
multiplies Q by 1 + ρ T, ρ from the quartic constants averaged classically.
"""

from __future__ import annotations

from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.statistical.molecules import Polyatomic
from reportgen.fluids.statistical.sums import SECOND_RADIATION, Sums, oscillators, over_levels

__all__ = ["rotation", "stretching", "vibration"]

Array = NDArray[np.float64]


def rotation(molecule: Polyatomic, temperature: Array) -> Sums:
    """Rotation of the rigid molecule, with the stretching where its constants are carried, at T [K]."""
    theta = SECOND_RADIATION * np.array(molecule.rotation)
    if theta.size == 1:
        y = theta[0] / temperature
        factor = 1.0 + y / 3.0 + y**2 / 15.0
        # derivatives with respect to ln T, for which dy = −y
        first = -(y / 3.0 + 2.0 * y**2 / 15.0) / factor
        second = (y / 3.0 + 4.0 * y**2 / 15.0) / factor - first**2
        classical, power = np.log(1.0 / y), 1.0
    else:
        a, b, c = theta
        y = (2.0 * (a + b + c) - a * b / c - b * c / a - c * a / b) / 12.0 / temperature
        factor = 1.0 + y
        first = -y / factor
        second = y / factor - first**2
        classical, power = 0.5 * np.log(np.pi * temperature**3 / (a * b * c)), 1.5
    energy = power + first
    rigid = Sums(classical + np.log(factor / molecule.symmetry_number), energy, energy + second)
    rate = stretching(molecule)
    if not rate:
        return rigid
    y = rate * temperature
    share = y / (1.0 + y)
    return rigid.joined(Sums(np.log1p(y), share, share + share / (1.0 + y)))


def stretching(molecule: Polyatomic) -> float:
    """ρ [1/K] of the factor 1 + ρ T by which centrifugal stretching raises the number of rotational states.

    The quartic terms of the rotational energy (Watson's A reduction, axes in the order A, B, C) are averaged over the
    classical rotation, where ⟨J_a²⟩ = kT/(2A), ⟨J_a⁴⟩ = 3 ⟨J_a²⟩² and ⟨J_a² J_b²⟩ = ⟨J_a²⟩⟨J_b²⟩.
    """
    if molecule.distortion is None:
        return 0.0
    if len(molecule.rotation) == 1:
        (d,) = molecule.distortion
        return 2.0 * d / molecule.rotation[0] ** 2 / SECOND_RADIATION
    a, b, c = (0.5 / constant for constant in molecule.rotation)
    d_j, d_jk, d_k, small_j, small_k = molecule.distortion
    average = (
        d_j * (3.0 * (a * a + b * b + c * c) + 2.0 * (a * b + b * c + c * a))
        + d_jk * (3.0 * a * a + a * b + a * c)
        + d_k * 3.0 * a * a
        + 2.0 * small_j * (3.0 * (b * b - c * c) + a * (b - c))
        + 2.0 * small_k * a * (b - c)
    )
    return average / SECOND_RADIATION


def vibration(molecule: Polyatomic, temperature: Array) -> Sums:
    """Vibration at T [K], harmonic unless anharmonic constants are carried."""
    if molecule.anharmonicity is None:
        return oscillators(
            np.array(molecule.wavenumbers), np.array(molecule.degeneracies, dtype=np.float64), temperature
        )
    return over_levels(*_levels(molecule), temperature)


@lru_cache(maxsize=16)
def _levels(molecule: Polyatomic) -> tuple[Array, Array]:
    """Energies [cm-1] and weights of the vibrational levels; the weight carries the change of the rotation."""
    assert molecule.anharmonicity is not None
    assert molecule.dissociation is not None
    wavenumbers = np.array(molecule.wavenumbers)
    x = np.array(molecule.anharmonicity)
    zero_order = wavenumbers - np.diag(x)
    most = [int(molecule.dissociation // (0.5 * wavenumber)) for wavenumber in molecule.wavenumbers]
    quanta = np.indices(most).reshape(len(most), -1).astype(np.float64)
    quanta = quanta[:, wavenumbers @ quanta < 1.5 * molecule.dissociation]
    energies = zero_order @ quanta + np.einsum("in,ij,jn->n", quanta, x, quanta)
    # where another quantum no longer raises the energy, the expansion has ended
    slopes = zero_order[:, np.newaxis] + (x + x.T) @ quanta
    kept = (energies < molecule.dissociation) & np.all((slopes > 0.0) | (quanta == 0.0), axis=0)
    quanta, energies = quanta[:, kept], energies[kept]
    weights = np.ones(energies.size)
    for number, degeneracy in enumerate(molecule.degeneracies):
        if degeneracy == 2:
            weights *= quanta[number] + 1.0
    if molecule.rotation_vibration is not None:
        rigid = np.array(molecule.rotation)[:, np.newaxis]
        share = np.prod(rigid / (rigid - np.array(molecule.rotation_vibration) @ quanta), axis=0)
        weights *= share if rigid.size == 1 else np.sqrt(share)
    return energies, weights

"""Vibration-rotation levels of diatomic molecules, counted one by one.

    E = T_e + G(v) + F_v(J),   G = ω_e (v+½) − ω_e x_e (v+½)² + ...
    F_v = B_v x − D_v x² + H x³,   B_v = B_e − α_e (v+½),   D_v = D_e + β_e (v+½),   x = J(J+1)

(Herzberg, Molecular Spectra and Molecular Structure I: Spectra of Diatomic Molecules, 2nd edition, Van Nostrand 1950,
chapters III and V.) β_e and H follow from the other constants by the relations given there for the Dunham potential:

    β_e = D_e [8 ω_e x_e/ω_e − 5 α_e/B_e − α_e² ω_e/(24 B_e³)],   H = 2 D_e (12 B_e² − α_e ω_e)/(3 ω_e²)

²Π states have two ladders of half-integer J, by Hill and Van Vleck (Phys. Rev. 32 (1928) 250):

    x = (J+½)² − 1 ∓ ½ √[4 (J+½)² + Y (Y − 4)],   Y = A/B_v
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.statistical.molecules import Diatomic, DiatomicState

__all__ = ["levels"]

Array = NDArray[np.float64]

#: Quantum numbers looked at; bound levels end far below.
_MOST_VIBRATION = 400
_MOST_ROTATION = 2000


def levels(molecule: Diatomic) -> tuple[Array, Array]:
    """Energies [cm-1] above the lowest level, and the number of states in each [1], up to dissociation."""
    found = [rung for state in molecule.states for rung in _rungs(state, molecule)]
    energies = np.concatenate([energy for energy, _ in found])
    weights = np.concatenate([weight for _, weight in found])
    return energies - np.min(energies), weights


def _rungs(state: DiatomicState, molecule: Diatomic) -> Iterator[tuple[Array, Array]]:
    """Rotational levels of each vibrational level of one electronic state: energies [cm-1] and weights."""
    # isotopologues differ by powers of √(μ/μ_mean)
    scale = np.sqrt(molecule.mass_ratio)
    vibration = np.array(state.vibration) * scale ** np.arange(1, len(state.vibration) + 1)
    rotation, coupling = state.rotation * scale**2, state.rotation_vibration * scale**3
    stretching = state.centrifugal * scale**4
    first, second = vibration[0], -vibration[1]
    slope = stretching * (8.0 * second / first - 5.0 * coupling / rotation - coupling**2 * first / (24.0 * rotation**3))
    sextic = 2.0 * stretching * (12.0 * rotation**2 - coupling * first) / (3.0 * first**2)

    half = np.arange(_MOST_VIBRATION) + 0.5
    height = np.sum(vibration[:, np.newaxis] * half ** np.arange(1, vibration.size + 1)[:, np.newaxis], axis=0)
    for number, base in enumerate(state.term + height - height[0]):
        b = rotation - coupling * half[number]
        if base >= molecule.dissociation or b <= 0.0 or (number and height[number] <= height[number - 1]):
            return
        d = stretching + slope * half[number]
        for j, x, share in _ladders(state, b, molecule):
            energy = base + b * x - d * x**2 + sextic * x**3
            # beyond the top of the rotational energy there is no bound level
            rising = np.logical_and.accumulate(np.diff(energy, prepend=-np.inf) > 0.0)
            bound = rising & (energy < molecule.dissociation)
            yield energy[bound], (share * state.degeneracy * (2.0 * j + 1.0))[bound]


def _ladders(state: DiatomicState, b: float, molecule: Diatomic) -> Iterator[tuple[Array, Array, Array]]:
    """J, the argument x of the rotational energy, and the share of levels that occur, for each ladder."""
    whole = np.arange(_MOST_ROTATION, dtype=np.float64)
    if state.spin_orbit is None:
        yield whole, whole * (whole + 1.0), np.where(whole % 2.0 == 0.0, molecule.even, molecule.odd)
        return
    j = whole + 0.5
    ratio = state.spin_orbit / b
    square = np.square(j + 0.5)
    gap = 0.5 * np.sqrt(4.0 * square + ratio * (ratio - 4.0))
    for sign in (-1.0, 1.0):
        # J = ½ occurs with Ω = ½ only: the lower ladder of a regular doublet, the upper one of an inverted
        skipped = 1 if (state.spin_orbit > 0.0) == (sign > 0.0) else 0
        x = square - 1.0 + sign * gap
        yield j[skipped:], x[skipped:], np.full(j.size - skipped, molecule.even)

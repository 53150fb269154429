"""Newton's method for two phases in equilibrium, whatever fixes the state.

Unknowns: ln K_i, and of ln T, ln p and the mole fraction V of vapour those that are not given. Equations:

    ln K_i + ln φ_i(y) − ln φ_i(x) = 0,   Σ (y_i − x_i) = 0,   x_i = z_i/(1 + V (K_i − 1)),  y_i = K_i x_i

and one for each property given in place of T, p or V: enthalpy, entropy, volume, or the vapour's share of the mass.
The slopes are exact: partial molar properties are the slopes of enthalpy, entropy and volume in the amounts.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.fugacity import Side, Slopes, phase_at
from reportgen.fluids.cubics.linear import solve_each
from reportgen.fluids.cubics.thermodynamics import MolarModel
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT

__all__ = ["Pairing", "System", "equilibrate"]

FloatArray = NDArray[Any]
BoolArray = NDArray[np.bool_]

#: Unknowns besides ln K_i, in the order of their columns, and the longest step [1] taken in each.
_UNKNOWNS = ("temperature", "pressure", "fraction")
_LONGEST = {"temperature": 0.1, "pressure": 0.7, "fraction": 0.5}
_LONGEST_RATIO = 2.5

_ITERATIONS = 25
#: Largest residual [1] of a solution, and the step [1] whose square is below rounding.
_SOLVED = 1e-9
_SETTLED = 1e-8
#: Next to the critical point steps are rounding, magnified: residual [1], and step in parts of ln K, that end there.
_EXACT = 1e-12
_MAGNIFIED = 1e-2
#: Greatest ln K_i [1] and relative difference of density below which two phases are one.
_TRIVIAL = 1e-5


class Pairing(NamedTuple):
    """Two phases: ``ln_ratio`` ln K_i [1] of shape (C, N); temperature [K], pressure [Pa] and mole fraction V [1] of
    the vapour of shape (N,).
    """

    ln_ratio: FloatArray
    temperature: FloatArray
    pressure: FloatArray
    fraction: FloatArray

    def take(self, where: NDArray[Any]) -> Pairing:
        """The pairs at an index array or mask."""
        return Pairing(*(array[..., where] for array in self))

    def put(self, where: NDArray[Any], other: Pairing) -> None:
        """Overwrite the pairs at an index array or mask."""
        for mine, theirs in zip(self, other, strict=True):
            mine[..., where] = theirs

    def compositions(self, feed: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Mole fractions [1] of liquid and vapour, shape (C, N), from those of the whole, shape (C, 1)."""
        liquid = feed / (1.0 + self.fraction * np.expm1(self.ln_ratio))
        vapour = liquid * np.exp(self.ln_ratio)
        return liquid / np.sum(liquid, axis=0), vapour / np.sum(vapour, axis=0)


def equilibrate(
    model: MolarModel,
    feed: FloatArray,
    start: Pairing,
    fixed: tuple[str, ...],
    targets: Mapping[str, FloatArray],
    sides: tuple[Side, Side] = ("stable", "stable"),
) -> tuple[Pairing, BoolArray]:
    """Solve for two phases from a start near them.

    Parameters
    ----------
    model : the species.
    feed : mole fractions z [1] of the whole, shape (C, 1).
    start : where to begin; what is fixed keeps its value.
    fixed : of "temperature", "pressure", "fraction" (V) those that are given.
    targets : of "enthalpy" [J/mol], "entropy" [J/(mol*K)], "volume" [m3/mol] (translated) and "mass_quality" [1]
        those that are given. With ``fixed`` they are two.
    sides : roots of liquid and vapour.

    Returns
    -------
    The phases, and where they were found: elsewhere the pairing means nothing.
    """
    found = Pairing(*(np.array(array, dtype=np.float64) for array in start))
    size = found.temperature.size
    solved = np.zeros(size, dtype=np.bool_)
    todo = np.arange(size)
    columns = [name for name in _UNKNOWNS if name not in fixed]
    for _ in range(_ITERATIONS):
        now = found.take(todo)
        system = System(model, feed, now, sides, columns)
        residual, matrix = system.equations({name: array[todo] for name, array in targets.items()})
        step = solve_each(matrix, -residual).T
        worst = np.max(np.abs(residual), axis=1)
        longest = np.max(np.abs(step), axis=0)
        with np.errstate(invalid="ignore"):
            good = np.isfinite(worst) & np.isfinite(longest)
            done = good & (worst < _SOLVED) & (longest < _SETTLED)
            done |= (worst < _EXACT) & (longest < _MAGNIFIED * np.max(np.abs(now.ln_ratio), axis=0))
        found.put(todo, system.stepped(step))
        trivial = (np.max(np.abs(now.ln_ratio), axis=0) < _TRIVIAL) & system.equal
        solved[todo[done & ~trivial]] = True
        todo = todo[good & ~done & ~trivial]
        if not todo.size:
            break
    return found, solved


class System:
    """The equations at one pairing, and their slopes.

    Parameters
    ----------
    model : the species.
    feed : mole fractions z [1] of the whole, shape (C, 1).
    now : the pairing.
    sides : roots of liquid and vapour.
    columns : of "temperature", "pressure" and "fraction" those that are unknown.
    """

    def __init__(
        self, model: MolarModel, feed: FloatArray, now: Pairing, sides: tuple[Side, Side], columns: list[str]
    ) -> None:
        self._model, self._feed, self._now, self._columns = model, feed, now, columns
        mixture = model.mixture
        self._x = feed / (1.0 + now.fraction * np.expm1(now.ln_ratio))
        self._y = self._x * np.exp(now.ln_ratio)
        self._conditions = mixture.conditions(now.temperature, now.pressure)
        self._phases = tuple(
            phase_at(mixture, self._conditions, amounts, side)
            for amounts, side in zip((self._x, self._y), sides, strict=True)
        )
        self._slopes = tuple(Slopes(mixture, self._conditions, phase) for phase in self._phases)
        # ∂x/∂ln K, ∂y/∂ln K, ∂x/∂V, ∂y/∂V
        part = self._x * self._y / feed
        self._x_ratio, self._y_ratio = -now.fraction * part, (1.0 - now.fraction) * part
        self._difference = self._y - self._x
        self._x_fraction = -self._x * self._difference / feed
        self._y_fraction = -self._y * self._difference / feed

    @property
    def equal(self) -> BoolArray:
        """Where the two phases have the same density, shape (N,)."""
        dense, light = (phase.compressibility for phase in self._phases)
        result: BoolArray = np.abs(light - dense) < _TRIVIAL * light
        return result

    def equations(self, targets: Mapping[str, FloatArray]) -> tuple[FloatArray, FloatArray]:
        """Residuals [1] of shape (N, C + 1 + targets) and their matrix of slopes by ln K, ln T, ln p and V."""
        liquid, vapour = self._phases
        species, states = self._now.ln_ratio.shape
        unknowns = species + len(self._columns)
        rows = species + 1 + len(targets)
        residual = np.empty((states, rows))
        matrix = np.zeros((states, rows, unknowns))
        residual[:, :species] = (self._now.ln_ratio + vapour.ln_phi - liquid.ln_phi).T
        residual[:, species] = np.sum(self._difference, axis=0)
        by_x = self._slopes[0].composition() / np.sum(self._x, axis=0)[:, None, None]
        by_y = self._slopes[1].composition() / np.sum(self._y, axis=0)[:, None, None]
        matrix[:, :species, :species] = by_y * self._y_ratio.T[:, None, :] - by_x * self._x_ratio.T[:, None, :]
        index = np.arange(species)
        matrix[:, index, index] += 1.0
        matrix[:, species, :species] = (self._y_ratio - self._x_ratio).T
        for number, name in enumerate(self._columns, species):
            if name == "fraction":
                change = by_y @ self._y_fraction.T[..., None] - by_x @ self._x_fraction.T[..., None]
                matrix[:, :species, number] = change[..., 0]
                matrix[:, species, number] = np.sum(self._y_fraction - self._x_fraction, axis=0)
            elif name == "temperature":
                matrix[:, :species, number] = (self._slopes[1].temperature() - self._slopes[0].temperature()).T
            else:
                matrix[:, :species, number] = (self._slopes[1].pressure() - self._slopes[0].pressure()).T
        if targets:
            self._target_rows(targets, residual[:, species + 1 :], matrix[:, species + 1 :])
        return residual, matrix

    def _target_rows(self, targets: Mapping[str, FloatArray], residual: FloatArray, matrix: FloatArray) -> None:
        """Equations of what is given in place of T, p or V."""
        model, now = self._model, self._now
        shares = ((1.0 - now.fraction) * self._x, now.fraction * self._y)
        by_ratio = ((1.0 - now.fraction) * self._x_ratio, now.fraction * self._y_ratio)
        by_fraction = (
            (1.0 - now.fraction) * self._x_fraction - self._x,
            now.fraction * self._y_fraction + self._y,
        )
        thermal = MOLAR_GAS_CONSTANT * now.temperature
        species = now.ln_ratio.shape[0]
        if any(name != "mass_quality" for name in targets):
            bulks = [model.of_phase(self._conditions, phase) for phase in self._phases]
            partials = [
                model.partial(self._conditions, phase, slopes)
                for phase, slopes in zip(self._phases, self._slopes, strict=True)
            ]
        for row, (name, target) in enumerate(targets.items()):
            if name == "mass_quality":
                weights = model.molar_masses[:, None] * np.stack([-target, 1.0 - target])[:, None]
                scale = model.molar_masses @ (shares[0] + shares[1])
                residual[:, row] = sum(np.sum(w * n, axis=0) for w, n in zip(weights, shares, strict=True)) / scale
                kinds = weights
                by_temperature = by_pressure = np.zeros_like(target)
            else:
                kinds = [getattr(partial, name) for partial in partials]
                value = sum(np.sum(k * n, axis=0) for k, n in zip(kinds, shares, strict=True))
                totals = [np.sum(n, axis=0) for n in shares]
                expansion = [n * bulk.volume_temperature for n, bulk in zip(totals, bulks, strict=True)]
                heat = sum(n * bulk.isobaric_heat_capacity for n, bulk in zip(totals, bulks, strict=True))
                if name == "volume":
                    scale = target
                    by_temperature = now.temperature * sum(expansion)
                    by_pressure = now.pressure * sum(
                        n / bulk.pressure_volume for n, bulk in zip(totals, bulks, strict=True)
                    )
                elif name == "enthalpy":
                    scale = thermal
                    by_temperature = now.temperature * heat
                    held = sum(n * bulk.volume for n, bulk in zip(totals, bulks, strict=True))
                    by_pressure = now.pressure * (held - now.temperature * sum(expansion))
                else:
                    scale = np.full_like(target, MOLAR_GAS_CONSTANT)
                    by_temperature, by_pressure = heat, -now.pressure * sum(expansion)
                residual[:, row] = (value - target) / scale
            matrix[:, row, :species] = (sum(k * n for k, n in zip(kinds, by_ratio, strict=True)) / scale).T
            for number, unknown in enumerate(self._columns, species):
                if unknown == "fraction":
                    change = sum(np.sum(k * n, axis=0) for k, n in zip(kinds, by_fraction, strict=True))
                else:
                    change = by_temperature if unknown == "temperature" else by_pressure
                matrix[:, row, number] = change / scale

    def stepped(self, step: FloatArray) -> Pairing:
        """The pairing after a step [1] of shape (unknowns, N), shortened as a whole where it is too long."""
        now, species = self._now, self._now.ln_ratio.shape[0]
        length = np.max(np.abs(step[:species]), axis=0) / _LONGEST_RATIO
        for number, name in enumerate(self._columns, species):
            length = np.maximum(length, np.abs(step[number]) / _LONGEST[name])
        step = step / np.maximum(length, 1.0)
        changes = dict(zip(self._columns, step[species:], strict=True))
        ln_ratio = now.ln_ratio + step[:species]
        temperature, pressure, fraction = now.temperature, now.pressure, now.fraction
        if "temperature" in changes:
            temperature = temperature * np.exp(changes["temperature"])
        if "pressure" in changes:
            pressure = pressure * np.exp(changes["pressure"])
        if "fraction" in changes:
            fraction = fraction + changes["fraction"]
            # inside the poles, so that all mole fractions stay positive
            with np.errstate(divide="ignore"):
                excess = np.expm1(ln_ratio)
                low = np.max(np.where(excess > 0.0, -1.0 / excess, -np.inf), axis=0)
                high = np.min(np.where(excess < 0.0, -1.0 / excess, np.inf), axis=0)
            fraction = np.clip(fraction, 0.999 * low, 1.0 + 0.999 * (high - 1.0))
        return Pairing(ln_ratio, temperature, pressure, fraction)

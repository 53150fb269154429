r"""What happens along an exchanger: temperatures over the duty, pinch, and entropy generation in its two parts.

At a share y of the duty, counted from the cold end, each stream has the enthalpy and the pressure that lie between
those of its ends in the same proportion; in counterflow both streams are warmer with y, in parallel flow y counts from
the inlets. With D the duty, Q̇ the heat from outside (into the cold stream), Δp the pressure losses:

    Ṡ_ΔT = D ∫ (1/T_c − 1/T_h) dy + Q̇ ∫ dy/T_c − Ṡ_Q ,   Ṡ_Δp = Σ ṁ Δp ∫ (v/T) dy ,   Ṡ_ΔT + Ṡ_Δp = Ṡgen
    ε = D/D_max ,   Be = Ṡ_ΔT/(Ṡ_ΔT + Ṡ_Δp) ,   ΔT_m = 1/∫ dy/(T_h − T_c)

D_max is what either stream could exchange if it left at the temperature at which the other enters. The shares at which
a stream begins and ceases to boil or condense are found column by column and are ends of the intervals over which the
integrals are taken, three Gauss–Legendre nodes each: temperatures have kinks there and nowhere else. The sum of both
parts meets the entropy balance to 1e-7 of it.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["Along", "Ends", "Stream", "along"]

Array = NDArray[np.float64]

_INTERVALS = 24
_NODES, _WEIGHTS = (np.polynomial.legendre.leggauss(3)[0] + 1.0) / 2.0, np.polynomial.legendre.leggauss(3)[1] / 2.0
#: Steps in which the share of a corner is found; pressures change little along the way.
_STEPS = 6
_CLOSER = 9
#: Differences of temperature [K] that are rounding.
_LEVEL = 1e-7


@dataclass(frozen=True)
class Ends:
    """Pressure [Pa], specific enthalpy [J/kg] at both ends of a stream, shape (N,); ``first`` is at share 0."""

    first_pressure: Array
    first_enthalpy: Array
    last_pressure: Array
    last_enthalpy: Array

    def at(self, share: Array) -> tuple[Array, Array]:
        """Pressure and enthalpy at shares of shape (K, N)."""
        pressure = self.first_pressure + (self.last_pressure - self.first_pressure) * share
        return pressure, self.first_enthalpy + (self.last_enthalpy - self.first_enthalpy) * share


@dataclass(frozen=True)
class Stream:
    """One side: its property model, its ends, its flow [kg/s] and its pressure loss from inlet to outlet [Pa]."""

    fluid: Any
    ends: Ends
    flow: Array
    loss: Array

    def state(self, share: Array) -> Any:
        """State at shares of shape (K, N)."""
        pressure, enthalpy = self.ends.at(share)
        return self.fluid.at(pressure=pressure, specific_enthalpy=enthalpy, errors="mask")

    def corners(self) -> Array:
        """Shares at which the stream meets a saturation line, shape (2, N); NaN where it does not."""
        columns = self.ends.first_pressure.size
        found = np.full((2, columns), np.nan)
        if not hasattr(self.fluid, "saturation"):
            return found
        with np.errstate(all="ignore"):
            rise = self.ends.last_enthalpy - self.ends.first_enthalpy
            for number in range(2):
                share = np.full(columns, 0.5)
                for _ in range(_STEPS):
                    pressure, _ = self.ends.at(share)
                    saturated = self.fluid.saturation(pressure=pressure, errors="mask")[number].specific_enthalpy
                    share = (saturated - self.ends.first_enthalpy) / rise
                inside = (share > 0.0) & (share < 1.0)
                found[number] = np.where(inside, share, np.nan)
        return found


@dataclass(frozen=True)
class Along:
    """What a profile comes to, each of shape (N,) but the curves and the corners.

    ``share``, ``hot`` and ``cold`` [K]: the curves, shape (K, N), sorted by share. ``corners``: shares at which the
    hot, then the cold stream meets the liquid and the vapour line, shape (4, N), NaN where it does not. ``pinch`` [K]
    and ``place`` [1]: smallest difference and its share; ``mean`` [K]: mean difference, NaN where the temperatures
    cross; ``across`` [1/K] ∫ (1/T_c − 1/T_h) dy, ``cold_inverse`` [1/K] ∫ dy/T_c, ``friction`` [W/K] Ṡ_Δp.
    """

    share: Array
    hot: Array
    cold: Array
    corners: Array
    pinch: Array
    place: Array
    mean: Array
    across: Array
    cold_inverse: Array
    friction: Array


def along(hot: Stream, cold: Stream) -> Along:
    """The profile of two streams; NaN where a state along the way does not exist."""
    corners = np.concatenate([hot.corners(), cold.corners()])
    share = _shares(corners)
    curves = [np.asarray(stream.state(share).temperature, float) for stream in (hot, cold)]
    pinch, place = _smallest(hot, cold, share, curves[0] - curves[1])
    there = [np.asarray(stream.state(place[None, :]).temperature, float) for stream in (hot, cold)]
    drawn = np.concatenate([share, place[None, :]])
    order = np.argsort(drawn, axis=0, kind="stable")
    drawn_hot, drawn_cold = (
        np.take_along_axis(np.concatenate([curve, point]), order, axis=0)
        for curve, point in zip(curves, there, strict=True)
    )
    width = np.diff(share, axis=0)
    nodes = (share[:-1, None, :] + width[:, None, :] * _NODES[None, :, None]).reshape(-1, share.shape[1])
    weights = (width[:, None, :] * _WEIGHTS[None, :, None]).reshape(nodes.shape)
    states = [stream.state(nodes) for stream in (hot, cold)]
    warm, cool = (np.asarray(state.temperature, float) for state in states)
    with np.errstate(all="ignore"):
        difference = warm - cool
        mean = 1.0 / np.sum(weights / difference, axis=0)
        friction = sum(
            stream.flow * stream.loss * np.sum(weights / (np.asarray(state.density, float) * temperature), axis=0)
            for stream, state, temperature in zip((hot, cold), states, (warm, cool), strict=True)
        )
        return Along(
            np.take_along_axis(drawn, order, axis=0),
            drawn_hot,
            drawn_cold,
            corners,
            pinch,
            place,
            np.where(pinch > 0.0, mean, np.nan),
            np.sum(weights * (1.0 / cool - 1.0 / warm), axis=0),
            np.sum(weights / cool, axis=0),
            np.asarray(friction),
        )


def _shares(corners: Array) -> Array:
    """Even shares and the corners, sorted, shape (K, N); corners that are none repeat the end."""
    corners = corners[np.isfinite(corners).any(axis=1)]
    even = np.repeat(np.linspace(0.0, 1.0, _INTERVALS + 1)[:, None], corners.shape[1], axis=1)
    return np.sort(np.concatenate([even, np.where(np.isfinite(corners), corners, 1.0)]), axis=0)


def _smallest(hot: Stream, cold: Stream, share: Array, difference: Array) -> tuple[Array, Array]:
    """Smallest difference of the temperatures and its share, looked for closer between the neighbours of the best.

    Of places that differ by rounding the one with the smallest share counts.
    """
    columns = np.arange(share.shape[1])
    best = _first_smallest(difference)
    place, pinch = share[best, columns], difference[best, columns]
    low, high = share[np.maximum(best - 1, 0), columns], share[np.minimum(best + 1, share.shape[0] - 1), columns]
    closer = np.linspace(low, high, _CLOSER)
    found = np.asarray(hot.state(closer).temperature, float) - np.asarray(cold.state(closer).temperature, float)
    among = _first_smallest(found)
    better = found[among, columns] < pinch - _LEVEL
    place = np.where(better, closer[among, columns], place)
    pinch = np.where(better, found[among, columns], pinch)
    lost = ~np.isfinite(difference).all(axis=0)
    return np.where(lost, np.nan, pinch), np.where(lost, np.nan, place)


def _first_smallest(difference: Array) -> NDArray[np.intp]:
    """Row of the first of the smallest differences, column by column; those that are not known count as large."""
    known = np.where(np.isfinite(difference), difference, np.inf)
    rows: NDArray[np.intp] = np.argmax(known <= known.min(axis=0) + _LEVEL, axis=0)
    return rows

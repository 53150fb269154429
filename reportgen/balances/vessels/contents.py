"""The content of a rigid vessel: its state from mass and energy, what leaves it, and how near it is to saturation."""

from __future__ import annotations

from typing import Any, Literal, NamedTuple

import numpy as np
import numpy.typing as npt

__all__ = ["Flow", "Outlet", "content", "outflow", "saturation_distance"]

Array = npt.NDArray[np.float64]
Flags = npt.NDArray[np.bool_]
Outlet = Literal["homogeneous", "vapour", "liquid"]

#: Part of the energy to which the temperature of a content is found, and rounds after which it is given up.
_CLOSE, _MOST_ROUNDS = 1e-12, 60


class Flow(NamedTuple):
    """What a stream carries: specific enthalpy [J/kg], specific entropy [J/(kg K)], density [kg/m3], shape (n,)."""

    enthalpy: Array
    entropy: Array
    density: Array


def content(
    fluid: Any, density: Array, energy: Array, metal: Array, start: Array, slope: Array | None = None
) -> tuple[Array, Any, Array]:
    """Temperature and state of a content from its density and its energy with that of metal at the same temperature.

    Solves ρ u(T, ρ) + K T = e for T, which rises with T through the two-phase region as well, by secants within a
    bracket.

    Args:
        fluid: property model.
        density: ρ [kg/m3], shape (n,).
        energy: e, energy by volume [J/m3].
        metal: K, heat capacity of metal that follows the temperature of the content, by volume [J/(m3 K)]; 0 for none.
        start: temperature to begin with [K].
        slope: ∂e/∂T to begin with [J/(m3 K)], NaN where it is not known.

    Returns:
        Temperature [K], NaN where the model has no such state; the state of the model there; the last slope.
    """
    lowest, highest = fluid.limits.minimum_temperature, fluid.limits.maximum_temperature
    temperature = np.where(np.isfinite(density) & np.isfinite(energy), np.clip(start, lowest, highest), np.nan)
    low, high = np.full_like(temperature, lowest), np.full_like(temperature, highest)
    scale = density * fluid.gas_constant * np.maximum(temperature, lowest) + np.abs(metal) * temperature
    usual = 2.5 * density * fluid.gas_constant + metal
    slope = usual if slope is None else np.where(np.isfinite(slope), slope, usual)
    last_temperature, last_error = np.full_like(temperature, np.nan), np.full_like(temperature, np.nan)
    closed = ~np.isfinite(temperature)
    state, lost = None, False
    for _ in range(_MOST_ROUNDS):
        if state is not None and closed.all():
            break
        here = temperature
        state = fluid.at(errors="mask", temperature=here, density=density)
        error = density * np.asarray(state.specific_internal_energy) + metal * here - energy
        with np.errstate(all="ignore"):
            secant = (error - last_error) / (here - last_temperature)
            slope = np.where(np.isfinite(secant) & (secant > 0.0) & ~closed, secant, slope)
            change = -error / slope
        last_temperature, last_error = here, error
        above = error > 0.0
        high, low = np.where(above, np.minimum(high, here), high), np.where(above, low, np.maximum(low, here))
        following = here + change
        outside = ~((following > low) & (following < high))
        # At an end of the range the next value is the end itself, so that its sign can be seen.
        clipped = following.clip(low, high)
        at_end = (clipped == lowest) | (clipped == highest)
        following = np.where(outside, np.where(at_end, clipped, 0.5 * (low + high)), following)
        done = (np.abs(error) <= _CLOSE * scale) | (np.abs(change) <= _CLOSE * here)
        pinned = (here == lowest) & above | (here == highest) & ~above
        failed = ~closed & ~done & (pinned | ~np.isfinite(error) | (following == here))
        lost = lost or bool(failed.any())
        temperature = np.where(failed, np.nan, np.where(closed | done, here, following))
        closed = closed | done | failed
    if lost or not closed.all():
        temperature = np.where(closed, temperature, np.nan)
        state = fluid.at(errors="mask", temperature=temperature, density=density)
    return temperature, state, slope


def outflow(fluid: Any, state: Any, outlet: Outlet, inside: Flags) -> Flow:
    """What leaves a content: the content as it is, or, where it is two-phase, one of its phases.

    ``inside`` says which contents are two-phase, shape (n,); at the saturation line itself it decides.
    """
    own = Flow(
        *(np.array(getattr(state, f), dtype=float) for f in ("specific_enthalpy", "specific_entropy", "density"))
    )
    if outlet == "homogeneous" or not inside.any():
        return own
    phases = fluid.saturation(errors="mask", pressure=np.asarray(state.pressure)[inside])
    chosen = phases[0 if outlet == "liquid" else 1]
    for array, name in zip(own, ("specific_enthalpy", "specific_entropy", "density"), strict=True):
        array[inside] = np.asarray(getattr(chosen, name))
    return own


def saturation_distance(fluid: Any, state: Any) -> tuple[Flags, Array]:
    """Whether each content is two-phase, and how far it is from the saturation line, shape (n,) each.

    The distance is |q − 1/2| − 1/2 with q = (s − s')/(s'' − s') at its own pressure: positive outside, negative inside,
    and continuous; infinite above the critical pressure and for models without saturation.
    """
    two_phase = np.asarray(state.phase) == "two-phase"
    pressure, entropy = np.asarray(state.pressure, dtype=float), np.asarray(state.specific_entropy, dtype=float)
    distance = np.full(pressure.shape, np.inf)
    critical = fluid.limits.critical_point
    if critical is None or not hasattr(fluid, "saturation"):
        return two_phase, distance
    below = np.isfinite(pressure) & (pressure < critical.pressure)
    if below.any():
        liquid, vapour = fluid.saturation(errors="mask", pressure=pressure[below])
        at_bubble, at_dew = (np.asarray(phase.specific_entropy, dtype=float) for phase in (liquid, vapour))
        with np.errstate(all="ignore"):
            quality = (entropy[below] - at_bubble) / (at_dew - at_bubble)
        found = np.abs(quality - 0.5) - 0.5
        distance[below] = np.where(np.isfinite(found), found, np.inf)
    # The sign of the phase rules where rounding at the line has them differ.
    distance = np.where(two_phase & (distance > 0.0), -1e-15, np.where(~two_phase & (distance <= 0.0), 1e-15, distance))
    return two_phase, distance

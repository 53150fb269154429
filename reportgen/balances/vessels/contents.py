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
_CLOSE, _MOST_ROUNDS = 2e-13, 60


class Flow(NamedTuple):
    """What a stream carries: specific enthalpy [J/kg], specific entropy [J/(kg K)], density [kg/m3], shape (n,)."""

    enthalpy: Array
    entropy: Array
    density: Array


def content(
    fluid: Any, density: Array, energy: Array, metal: Array, start: Array, slope: Array | None = None
) -> tuple[Array, Any]:
    """Temperature and state of a content from its density and its energy with that of metal at the same temperature.

    Solves ρ u(T, ρ) + K T = e for T, which rises with T through the two-phase region as well, by secants within a
    bracket.

    Args:
        fluid: property model.
        density: ρ [kg/m3], shape (n,).
        energy: e, energy by volume [J/m3].
        metal: K, heat capacity of metal that follows the temperature of the content, by volume [J/(m3 K)]; 0 for none.
        start: temperature to begin with [K].
        slope: ∂e/∂T to begin with [J/(m3 K)].

    Returns:
        Temperature [K], NaN where the model has no such state, and the state of the model there.
    """
    lowest, highest = fluid.limits.minimum_temperature, fluid.limits.maximum_temperature
    temperature = np.clip(start, lowest, highest)
    low, high = np.full_like(temperature, lowest), np.full_like(temperature, highest)
    scale = density * fluid.gas_constant * np.maximum(temperature, lowest) + np.abs(metal) * temperature
    if slope is None:
        slope = 2.5 * density * fluid.gas_constant + metal
    slope = np.array(np.broadcast_to(slope, temperature.shape), dtype=float)
    last_temperature = np.full_like(temperature, np.nan)
    last_error = np.full_like(temperature, np.nan)
    open_ = np.nonzero(np.isfinite(density) & np.isfinite(energy) & np.isfinite(temperature))[0]
    for _ in range(_MOST_ROUNDS):
        if not open_.size:
            break
        here = temperature[open_]
        state = fluid.at(errors="mask", temperature=here, density=density[open_])
        error = density[open_] * np.asarray(state.specific_internal_energy) + metal[open_] * here - energy[open_]
        with np.errstate(all="ignore"):
            secant = (error - last_error[open_]) / (here - last_temperature[open_])
        usable = np.isfinite(secant) & (secant > 0.0)
        slope[open_] = np.where(usable, secant, slope[open_])
        last_temperature[open_], last_error[open_] = here, error
        above = error > 0.0
        high[open_] = np.where(above, np.minimum(high[open_], here), high[open_])
        low[open_] = np.where(error <= 0.0, np.maximum(low[open_], here), low[open_])
        change = -error / slope[open_]
        following = here + change
        outside = ~((following > low[open_]) & (following < high[open_]))
        # At an end of the range the next value is the end itself, so that its sign can be seen.
        at_end = outside & np.isin(following.clip(low[open_], high[open_]), (lowest, highest))
        middle = 0.5 * (low[open_] + high[open_])
        following = np.where(outside, np.where(at_end, following.clip(low[open_], high[open_]), middle), following)
        done = (np.abs(error) <= _CLOSE * scale[open_]) | (np.abs(change) <= _CLOSE * here)
        pinned = (~done) & ((here == lowest) & above | (here == highest) & ~above)
        failed = pinned | ~np.isfinite(error) | (following == here) & ~done
        temperature[open_] = np.where(failed, np.nan, np.where(done, here, following))
        open_ = open_[~(done | failed)]
    temperature[open_] = np.nan
    return temperature, fluid.at(errors="mask", temperature=temperature, density=density)


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

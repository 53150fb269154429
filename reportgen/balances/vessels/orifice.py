"""Mass flux through an orifice: the real fluid along its isentrope to the throat, choked or not.

    G(p) = ρ(p, s0) √(2 [h0 − h(p, s0)]),   G = max G(p) for p_back ≤ p < p0

The largest flux is that of the choked throat: there the velocity is the speed of sound, of a two-phase throat that of
homogeneous equilibrium (both phases at one velocity, one temperature, one pressure). Where the largest flux lies at the
back pressure itself the flow is not choked. No assumption on the gas enters beside the property model. See Leung 1986,
https://doi.org/10.1002/aic.690321019, for homogeneous equilibrium flow.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import numpy.typing as npt

from reportgen.balances.vessels.contents import Flow

__all__ = ["MassFlux", "mass_flux"]

Array = npt.NDArray[np.float64]
#: Pressures tried first, from back pressure to stagnation pressure, and rounds of closing in on the best.
_COARSE, _FINE, _ROUNDS = 25, 9, 4
#: More rounds where the throat stands at the saturation line, where the flux has a kink.
_KINK_ROUNDS = 7
#: Distance of the pressures round a known throat, as a part of them.
_NEAR = 4e-3


class MassFlux:
    """Finds the mass flux column by column and remembers the throats, since the next ones are near."""

    def __init__(self, fluid: Any, count: int) -> None:
        self.fluid = fluid
        self.ratio = np.full(count, np.nan)

    def at(self, pressure: Array, flow: Flow, back: Array, columns: npt.NDArray[np.intp]) -> Array:
        """Mass flux [kg/(m2 s)] of the columns, shape (n,); arguments as for ``mass_flux``."""
        ratio = self.ratio[columns]
        flux = np.full(pressure.shape, np.nan)
        known = np.isfinite(ratio)
        if known.any():
            flux[known], ratio[known] = _near(
                self.fluid, pressure[known], Flow(*(part[known] for part in flow)), back[known], ratio[known]
            )
        rest = ~np.isfinite(flux)
        if rest.any():
            flux[rest], throat = mass_flux(self.fluid, pressure[rest], Flow(*(part[rest] for part in flow)), back[rest])
            ratio[rest] = throat / pressure[rest]
        self.ratio[columns] = ratio
        return flux


def mass_flux(fluid: Any, pressure: Array, flow: Flow, back: Array) -> tuple[Array, Array]:
    """Largest mass flux from stagnation to the throat.

    Args:
        fluid: property model.
        pressure: stagnation pressure p0 [Pa], shape (n,).
        flow: enthalpy h0 and entropy s0 of what flows, at rest.
        back: pressure behind the orifice [Pa].

    Returns:
        Flux [kg/(m2 s)] and pressure in the throat [Pa], shape (n,) each; 0 and the stagnation pressure where the back
        pressure is not lower. NaN where the property model has no state in the throat.
    """
    flux, throat = np.zeros_like(pressure), pressure.copy()
    open_ = np.nonzero(back < pressure)[0]
    if not open_.size:
        return flux, throat
    top, bottom = np.log(pressure[open_]), np.log(np.maximum(back[open_], 1e-4 * pressure[open_]))
    # Evenly in the logarithm, and closer to the stagnation pressure for back pressures that are hardly lower.
    parts = np.linspace(0.0, 1.0, _COARSE)
    grid = bottom + (top - bottom) * parts[:, None]
    values, phases = _fluxes(fluid, grid, flow, open_)
    best, low, high, kinked, lost = _bracket(grid, values, phases)
    for number in range(_KINK_ROUNDS):
        again = kinked if number >= _ROUNDS else np.ones_like(kinked)
        again = again & ~lost & (high > low)
        if not again.any():
            break
        which = np.nonzero(again)[0]
        grid = low[which] + (high - low)[which] * np.linspace(0.0, 1.0, _FINE)[:, None]
        values, phases = _fluxes(fluid, grid, flow, open_[which])
        best[:, which], low[which], high[which], kinked[which], lost[which] = _bracket(grid, values, phases)
    flux[open_] = np.where(lost, np.nan, best[1])
    throat[open_] = np.where(lost, np.nan, np.exp(best[0]))
    return flux, throat


def _near(fluid: Any, pressure: Array, flow: Flow, back: Array, ratio: Array) -> tuple[Array, Array]:
    """The flux from five pressures round a throat that is nearly known; NaN where the best is not among the inner."""
    bottom = np.log(np.maximum(back, 1e-4 * pressure))
    middle = np.maximum(np.log(ratio * pressure), bottom + 2.0 * _NEAR)
    grid = middle + _NEAR * np.arange(-2.0, 3.0)[:, None]
    grid = np.concatenate([bottom[None], grid])
    values, phases = _fluxes(fluid, grid, flow, np.arange(pressure.size))
    top = np.argmax(np.where(np.isfinite(values), values, -1.0), axis=0)
    whole = np.isfinite(values[1:]).all(axis=0) & (phases[1:] == phases[1]).all(axis=0) & (grid[-1] < np.log(pressure))
    place, best = _parabola(grid[1:], values[1:], np.clip(top - 1, 1, 3))
    inner = (top >= 2) & (top <= 4) & whole
    at_back = (top == 0) & whole & (phases[0] == phases[1])
    flux = np.where(inner, best, np.where(at_back, values[0], np.nan))
    return flux, np.where(at_back, np.exp(bottom) / pressure, np.exp(place) / pressure)


def _fluxes(fluid: Any, grid: Array, flow: Flow, which: npt.NDArray[np.intp]) -> tuple[Array, npt.NDArray[Any]]:
    """Fluxes at logarithms of pressures, shape (points, n), and whether each throat is two-phase."""
    entropy = np.broadcast_to(flow.entropy[which], grid.shape)
    state = fluid.at(errors="mask", pressure=np.exp(grid), specific_entropy=entropy)
    fall = np.maximum(flow.enthalpy[which] - np.asarray(state.specific_enthalpy), 0.0)
    flux: Array = np.asarray(state.density) * np.sqrt(2.0 * fall)
    return flux, np.asarray(state.phase) == "two-phase"


def _bracket(grid: Array, values: Array, phases: npt.NDArray[Any]) -> tuple[Array, Array, Array, Any, Any]:
    """Place and size of the best, (2, n), its neighbours, whether the phase changes there, whether it is out of reach.

    The best is out of reach where the model has no state next to it on the side of lower pressure.
    """
    columns = np.arange(grid.shape[1])
    finite = np.isfinite(values)
    top = np.argmax(np.where(finite, values, -1.0), axis=0)
    below, above = np.maximum(top - 1, 0), np.minimum(top + 1, grid.shape[0] - 1)
    lost = ~finite[top, columns] | ~finite[below, columns]
    place, best = _parabola(grid, values, np.clip(top, 1, grid.shape[0] - 2))
    kinked = (phases[below, columns] != phases[top, columns]) | (phases[above, columns] != phases[top, columns])
    at_end = (top == 0) | (top == grid.shape[0] - 1) | kinked | ~np.isfinite(best)
    place = np.where(at_end, grid[top, columns], place)
    best = np.where(at_end, values[top, columns], best)
    return np.stack([place, best]), grid[below, columns], grid[above, columns], kinked, lost


def _parabola(grid: Array, values: Array, middle: npt.NDArray[np.intp]) -> tuple[Array, Array]:
    """Place and height of the top of the parabola through three neighbours evenly apart."""
    columns = np.arange(grid.shape[1])
    left, centre, right = (values[middle + shift, columns] for shift in (-1, 0, 1))
    width = grid[middle + 1, columns] - grid[middle, columns]
    with np.errstate(all="ignore"):
        shift = 0.5 * (left - right) / (left - 2.0 * centre + right)
    shift = np.where(np.isfinite(shift), np.clip(shift, -1.0, 1.0), 0.0)
    height = centre - 0.25 * (left - right) * shift
    return grid[middle, columns] + shift * width, height

"""What follows from a path that was followed: time, entropies, extremes, the history. Integrals by Gauss and Legendre.

None of these acts back on the state, so that they are taken along the finished path, all steps of all columns in one
call of the property model:

    t            = ∫ dm / ṁ
    S_gen,valve  = ∫ [s(p_b, h_e) − s_e] dm_e      (discharge)    or ∫ [s(p, h_s) − s_s] dm_s     (charging)
    S_gen,vessel = ∫ [(h_e − h)/T − (s_e − s)] dm_e               or ∫ [(h_s − h)/T − (s(p, h_s) − s)] dm_s
    S_gen,wall   = ∫ (1/T − 1/T_w) dQ

The valve takes the stream from the pressure it comes from to the one it goes to at constant enthalpy (what velocity it
gains is lost behind it); the vessel is what the content generates as it takes up the stream, or gives off one of its
phases; the wall is heat across the difference of temperatures. Their sum is compared with the balance round everything,
which uses the states at both ends: the difference is what the integration leaves.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from reportgen.balances.vessels.contents import outflow
from reportgen.balances.vessels.following import MASS, WALL_TEMPERATURE, Following
from reportgen.balances.vessels.orifice import mass_flux

__all__ = ["Ends", "History", "Integrals", "ends", "extreme", "history", "integrals"]

Array = npt.NDArray[np.float64]
Indices = npt.NDArray[np.intp]

#: Nodes and weights on [0, 1]: order 6, above that of the method that found the path.
_NODES = 0.5 + 0.5 * np.array([-np.sqrt(0.6), 0.0, np.sqrt(0.6)])
_WEIGHTS = np.array([5.0, 8.0, 5.0]) / 18.0
#: Places in the two steps round an extreme at which it is looked for.
_LOOKS = np.linspace(0.0, 1.0, 9)


@dataclass(frozen=True)
class Integrals:
    """Integrals over the path, shape (N,): NaN where they have no meaning or the model no state.

    ``mass`` [kg] and ``enthalpy`` [J] transferred, ``entropy_behind`` [J/K] of what left, behind the valve, and
    ``entropy_at_outlet`` before it; ``heat`` from the wall [J]; ``vessel``, ``valve``, ``wall``: entropy generated
    [J/K]; ``duration`` [s]; ``largest_flow`` [kg/s].
    """

    mass: Array
    enthalpy: Array
    entropy_behind: Array
    entropy_at_outlet: Array
    heat: Array
    vessel: Array
    valve: Array
    wall: Array
    duration: Array
    largest_flow: Array


@dataclass(frozen=True)
class Ends:
    """Content at the end of each column, shape (N,); ``state`` is that of the model. ``supply``: of a supply vessel."""

    mass: Array
    temperature: Array
    state: Any
    wall_temperature: Array
    supply: Any


@dataclass(frozen=True)
class History:
    """Column 0 along its steps: beginnings of the steps and the end; lists of one length. ``time`` [s] None without."""

    time: Array | None
    mass: Array
    pressure: Array
    temperature: Array
    wall_temperature: Array
    entropy: Array
    quality: Array
    mass_flow: Array | None


@dataclass(frozen=True)
class _Rates:
    """What the integrands are made of, at some places of the path; shape (n,)."""

    temperature: Array
    pressure: Array
    entropy: Array
    quality: Array
    wall_temperature: Array
    transfer: Array
    flow: Array
    enthalpy: Array
    at_outlet: Array
    behind: Array
    vessel: Array
    valve: Array
    heat: Array


def ends(following: Following) -> Ends:
    """State of every column at the end of its path."""
    y, columns = following.steps.end, np.arange(following.count)
    temperature, state = following.contents(y, columns)
    wall = _wall_temperature(following, y, temperature)
    supply = None
    if following.vessel.supply_volume is not None:
        supply = following.feed(y, columns)[2]
    return Ends(y[MASS], temperature, state, wall, supply)


def _wall_temperature(following: Following, y: Array, temperature: Array) -> Array:
    if following.vessel.wall is None:
        return np.full_like(temperature, np.nan)
    return y[WALL_TEMPERATURE].copy() if following.vessel.timed else temperature


def _rates(following: Following, y: Array, steps: Indices, guess: Array, flows: bool = True) -> _Rates:
    """Integrands at places within some steps; ``flows``: with the mass flow through the orifice."""
    vessel, columns = following.vessel, following.steps.column[steps]
    inside = following.steps.inside[:, steps]
    temperature, state = following.contents(y, columns, guess)
    pressure, entropy, enthalpy = (
        np.asarray(getattr(state, name), dtype=float) for name in ("pressure", "specific_entropy", "specific_enthalpy")
    )
    none = np.full_like(pressure, np.nan)
    if vessel.charging:
        source_pressure, stream, _ = following.feed(y, columns, following.supply_guess(columns))
        through = np.asarray(
            vessel.fluid.at(errors="mask", pressure=pressure, specific_enthalpy=stream.enthalpy).specific_entropy
        )
        arriving, valve, behind_pressure, behind = through, through - stream.entropy, pressure, none
    else:
        source_pressure, stream = pressure, outflow(vessel.fluid, state, vessel.outlet, inside[0])
        arriving, valve, behind, behind_pressure = stream.entropy, none, none, np.zeros_like(pressure)
        if vessel.back_pressure is not None:
            behind_pressure = vessel.back_pressure[columns]
            behind = np.asarray(
                vessel.fluid.at(
                    errors="mask", pressure=behind_pressure, specific_enthalpy=stream.enthalpy
                ).specific_entropy
            )
            valve = behind - stream.entropy
    mixing = (stream.enthalpy - enthalpy) / temperature - (arriving - entropy)
    flow = none
    if vessel.flow_area is not None and flows:
        flow = vessel.flow_area[columns] * mass_flux(vessel.fluid, source_pressure, stream, behind_pressure)[0]
    wall = _wall_temperature(following, y, temperature)
    heat = np.zeros_like(pressure)
    if vessel.timed and vessel.wall is not None and vessel.wall.conductance is not None:
        heat = vessel.wall.conductance[columns] * (wall - temperature)
    return _Rates(
        temperature,
        pressure,
        entropy,
        np.asarray(state.quality, dtype=float),
        wall,
        flow if vessel.timed else np.ones_like(pressure),
        flow,
        stream.enthalpy,
        stream.entropy,
        behind,
        mixing,
        valve,
        heat,
    )


def integrals(following: Following) -> Integrals:
    """All integrals of every column."""
    steps, vessel, count = following.steps, following.vessel, following.count
    numbers = np.arange(steps.length.size)
    guesses = _guesses(following)
    sums = {name: np.zeros(count) for name in Integrals.__dataclass_fields__}
    largest = np.zeros(count)
    y = np.concatenate([steps.within(node) for node in _NODES], axis=1)
    several = np.tile(numbers, len(_NODES))
    guess = np.concatenate([guesses[0] + node * (guesses[1] - guesses[0]) for node in _NODES])
    weight = np.concatenate([part * steps.length for part in _WEIGHTS])
    rates = _rates(following, y, several, guess)
    column = steps.column[several]
    with np.errstate(all="ignore"):
        transfer = weight * rates.transfer
        time = weight if vessel.timed else weight / rates.flow
        heat = time * rates.heat if vessel.timed else np.zeros_like(weight)
        parts = {
            "mass": transfer,
            "enthalpy": transfer * rates.enthalpy,
            "entropy_behind": transfer * rates.behind,
            "entropy_at_outlet": transfer * rates.at_outlet,
            "heat": heat,
            "vessel": transfer * rates.vessel,
            "valve": transfer * rates.valve,
            "wall": heat * (1.0 / rates.temperature - 1.0 / rates.wall_temperature) if vessel.timed else 0.0 * heat,
            "duration": time,
        }
    for name, values in parts.items():
        np.add.at(sums[name], column, values)
    np.fmax.at(largest, column, rates.flow)
    sums["largest_flow"] = np.where(largest > 0.0, largest, np.nan)
    if vessel.initial is None:
        _first_part(following, sums)
    return Integrals(**sums)


def _first_part(following: Following, sums: dict[str, Array]) -> None:
    """What an evacuated vessel took up before the path begins, in place.

    There the content is an ideal gas and its entropy falls with the logarithm of the mass, so that the integral of the
    throttling from 0 to m is m (its value at m + R); everything else is as at m.
    """
    steps = following.steps
    firsts = np.array(
        [indices[0] for column in range(following.count) if (indices := steps.of(column)).size], dtype=int
    )
    if not firsts.size:
        return
    rates = _rates(following, steps.y[:, firsts], firsts, steps.mark[firsts])
    column, mass = steps.column[firsts], following.first_mass[steps.column[firsts]]
    sums["mass"][column] += mass
    sums["enthalpy"][column] += mass * rates.enthalpy
    sums["entropy_at_outlet"][column] += mass * rates.at_outlet
    sums["vessel"][column] += mass * rates.vessel
    sums["valve"][column] += mass * (rates.valve + following.vessel.fluid.gas_constant)
    if following.vessel.flow_area is not None:
        sums["duration"][column] += mass / rates.flow


def _guesses(following: Following) -> tuple[Array, Array]:
    """Temperatures of the content at the beginning and the end of every step, to begin with."""
    steps = following.steps
    last = np.append(steps.column[1:] != steps.column[:-1], True)
    following_mark = np.append(steps.mark[1:], np.nan)
    return steps.mark, np.where(last, following.place[steps.column], following_mark)


def extreme(following: Following, at_end: Ends, lowest: bool = True) -> tuple[Array, Array]:
    """Lowest (or highest) temperature of the content and of the wall on the way, shape (N,) each [K].

    Looked for at the ends of all steps, then within the steps on both sides of the best, at last on a parabola.
    """
    steps, sign = following.steps, 1.0 if lowest else -1.0
    guesses = _guesses(following)
    found = np.full((2, following.count), np.nan)
    chosen: list[tuple[int, int, int]] = []
    for column in range(following.count):
        numbers = steps.of(column)
        content = np.append(steps.mark[numbers], at_end.temperature[column])
        wall = _wall_temperature(following, np.append(steps.y[:, numbers], steps.end[:, [column]], axis=1), content)
        for row, values in enumerate((content, wall)):
            if not np.isfinite(values).any():
                continue
            best = int(np.nanargmin(sign * values))
            found[row, column] = values[best]
            if 0 < best < numbers.size:
                chosen += [(row, column, int(numbers[best - 1])), (row, column, int(numbers[best]))]
    if chosen:
        several = np.repeat([entry[2] for entry in chosen], _LOOKS.size)
        part = np.tile(_LOOKS, len(chosen))
        every = np.stack([following.steps.within(look) for look in _LOOKS], axis=-1)
        y = every[:, [entry[2] for entry in chosen], :].reshape(every.shape[0], -1)
        guess = guesses[0][several] + part * (guesses[1] - guesses[0])[several]
        temperature, _ = following.contents(y, steps.column[several], guess)
        both = np.stack([temperature, _wall_temperature(following, y, temperature)])
        place = steps.start[several] + part * steps.length[several]
        for index in range(0, len(chosen), 2):
            row, column, _ = chosen[index]
            window = slice(index * _LOOKS.size, (index + 2) * _LOOKS.size)
            found[row, column] = _top(place[window], sign * both[row, window]) * sign
    return found[0], found[1]


def _top(place: Array, values: Array) -> float:
    """Lowest value of a curve with a single valley, by a parabola through the lowest three places."""
    place, keep = np.unique(place, return_index=True)
    values = values[keep]
    best = int(np.nanargmin(values))
    if not 0 < best < values.size - 1 or not np.isfinite(values[best - 1 : best + 2]).all():
        return float(values[best])
    around = slice(best - 1, best + 2)
    middle, width = place[best], max(place[best + 1] - place[best - 1], 1e-300)
    curve = np.polynomial.Polynomial.fit(place[around], values[around], 2, domain=[middle - width, middle + width])
    turn = curve.deriv().roots()
    low = float(curve(turn[0].real)) if turn.size else float(values[best])
    return min(low, float(values[best])) if abs(low - values[best]) < np.ptp(values[around]) else float(values[best])


def history(following: Following, at_end: Ends) -> History:
    """The base case from the beginning to the end of its path, at the ends of all steps."""
    steps, vessel = following.steps, following.vessel
    numbers = steps.of(0)
    y = np.append(steps.y[:, numbers], steps.end[:, [0]], axis=1)
    if not numbers.size:
        none = np.zeros(0)
        return History(None, none, none, none, none, none, none, None)
    mark = np.append(steps.mark[numbers], at_end.temperature[0])
    rates = _rates(following, y, np.append(numbers, numbers[-1]), mark)
    time = None
    if vessel.flow_area is not None:
        if vessel.timed:
            passed = steps.length[numbers]
        else:
            parts = np.concatenate([steps.within(node)[:, numbers] for node in _NODES], axis=1)
            guess = np.tile(mark[:-1], len(_NODES))
            inner = _rates(following, parts, np.tile(numbers, len(_NODES)), guess)
            passed = np.einsum("ns,n,s->s", 1.0 / inner.flow.reshape(len(_NODES), -1), _WEIGHTS, steps.length[numbers])
        time = np.concatenate([[0.0], np.cumsum(passed)])
        if vessel.initial is None:
            time = time + following.first_mass[0] / rates.flow[0]
    return History(
        time,
        y[MASS],
        rates.pressure,
        rates.temperature,
        rates.wall_temperature,
        rates.entropy,
        rates.quality,
        None if vessel.flow_area is None else rates.flow,
    )

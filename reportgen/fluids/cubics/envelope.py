"""The phase envelope of a mixture: its bubble and dew points at a pressure or a temperature.

The line is traced once for a composition (tracing.py). Between its points a cubic gives starts for Newton's method,
and shows where a pressure or a temperature has several dew or bubble points, or none.
"""

from __future__ import annotations

from functools import cached_property
from typing import Any, Literal, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.equilibrium import Pairing, equilibrate
from reportgen.fluids.cubics.flash import flash
from reportgen.fluids.cubics.fugacity import phase_at
from reportgen.fluids.cubics.stability import tangent_plane_test
from reportgen.fluids.cubics.thermodynamics import MolarModel
from reportgen.fluids.cubics.tracing import CriticalPoint, Tracer, cubic

__all__ = ["Branch", "Crossing", "Envelope"]

FloatArray = NDArray[Any]
BoolArray = NDArray[np.bool_]

Branch = Literal["bubble", "dew"]

_BISECTIONS = 50
#: Temperatures and pressures of each kind at which the line is held against flashes, the pressures [Pa] between which
#: they lie, and the relative distance in T from the line at which they say nothing.
_SAMPLES = 25
_SAMPLED_PRESSURES = (1e2, 9e7)
_NEAR = 1e-3
#: Greatest ln K and difference in ln(v/b) [1] of phases at two points between which the line is taken from the cubic
#: where Newton's method fails.
_BESIDE_CRITICAL = (0.05, 0.05)
#: Margin on the highest temperature of an unstable point.
_MARGIN = 1.05
#: States whose crossings are looked up at a time.
_CHUNK = 4096


class Crossing(NamedTuple):
    """Points of a branch at N given pressures or temperatures.

    ``number`` how many there are; ``pairing`` the first of them, with V = 0 (bubble) or 1 (dew); ``solved`` where there
    is exactly one and it was solved for; ``found`` where it is stable besides.
    """

    number: NDArray[np.intp]
    pairing: Pairing
    solved: BoolArray
    found: BoolArray


class Envelope:
    """Bubble and dew points of one composition.

    Parameters
    ----------
    model : the species.
    feed : mole fractions [1], shape (C, 1).
    lowest_temperature : T [K] below which they are of no interest.
    """

    def __init__(self, model: MolarModel, feed: FloatArray, lowest_temperature: float) -> None:
        self._model, self._feed = model, feed
        self._size = feed.shape[0]
        self._coldest = 0.98 * lowest_temperature
        tracer = Tracer(model, feed, lowest_temperature)
        points = tracer.points
        self.critical_point: CriticalPoint | None = tracer.critical
        self._traced = tracer.whole
        self._values = np.array([point.values for point in points]).reshape(-1, self._size + 2)
        self._tangents = np.array([point.tangent for point in points]).reshape(-1, self._size + 2)
        self._bubble = np.array([point.bubble for point in points], dtype=np.bool_)
        self._close = np.max(np.abs(self._values[:, : self._size]), axis=1, initial=0.0) < _BESIDE_CRITICAL[0]
        self._close &= np.array([point.apart for point in points]) < _BESIDE_CRITICAL[1]

    @cached_property
    def _stable(self) -> BoolArray:
        """Which points are equilibria, and not undercut by a second liquid."""
        temperature, pressure = np.exp(self._values[:, self._size]), np.exp(self._values[:, self._size + 1])
        conditions = self._model.mixture.conditions(temperature, pressure)
        feed = np.repeat(self._feed, temperature.size, axis=1)
        incipient = feed * np.exp(self._values[:, : self._size].T)
        tested = phase_at(self._model.mixture, conditions, feed)
        verdict = tangent_plane_test(
            self._model.mixture, conditions, feed, tested, others=(incipient / np.sum(incipient, axis=0),)
        )
        stable: BoolArray = ~verdict.unstable | (temperature < self._coldest)
        return stable

    @cached_property
    def _sampled(self) -> tuple[bool, float]:
        """Whether flashes at points all over the range of interest agree with the line, and the temperature [K] below
        which one of them gives a second liquid or a third phase.
        """
        if not self._traced:
            return False, np.inf
        hottest = 1.2 * float(self._model.mixture.critical_temperatures.max())
        t = np.linspace(self._coldest / 0.98, max(hottest, 1.1 * self._coldest), _SAMPLES)
        p = np.geomspace(_SAMPLED_PRESSURES[0], _SAMPLED_PRESSURES[1], _SAMPLES)
        temperature, pressure = (grid.ravel() for grid in np.meshgrid(t, p))
        split = flash(self._model, self._feed, temperature, pressure)
        hotter, nearest = self._hotter(p, t)
        clear = nearest.ravel() > _NEAR
        mixed = (split.fraction > 0.0) & (split.fraction < 1.0)
        agrees = (mixed == (hotter.ravel() % 2 == 1)) | split.third | ~clear
        third = temperature[split.third]
        return bool(agrees.all()), float(third.max() + (t[1] - t[0])) if third.size else 0.0

    def _hotter(self, pressure: FloatArray, temperature: FloatArray) -> tuple[NDArray[np.intp], FloatArray]:
        """How often the line crosses each isobar above each temperature, shape (pressures, temperatures), and the
        relative distance to the nearest crossing.
        """
        level = np.log(pressure)
        above = self._values[None, :, -1] > level[:, None]
        isobar, segment = np.nonzero(above[:, 1:] != above[:, :-1])
        crossing = np.exp(self._between(segment, self._place(segment, level[isobar], self._size + 1))[self._size])
        count = np.zeros((pressure.size, temperature.size), dtype=np.intp)
        nearest = np.full(count.shape, np.inf)
        for row, at in zip(isobar, crossing, strict=True):
            count[row] += at > temperature
            nearest[row] = np.minimum(nearest[row], np.abs(temperature / at - 1.0))
        return count, nearest

    @property
    def whole(self) -> bool:
        """Whether the line leaves what is of interest at both ends, and tells one phase from two wherever that was
        tried: then its crossings with isobars and isotherms can be relied on.
        """
        return self._traced and self._sampled[0]

    @cached_property
    def doubtful_temperature(self) -> float:
        """Temperature [K] below which a second liquid may form, so that crossings do not tell everything; zero where
        none was met, neither on the line nor elsewhere.
        """
        unstable = np.exp(self._values[~self._stable, self._size])
        return max(self._sampled[1], float(unstable.max(initial=0.0)) * _MARGIN)

    @property
    def highest_pressure(self) -> float:
        """Highest pressure [Pa] of the line, infinite where it is not whole."""
        return float(np.exp(self._values[:, -1].max())) if self.whole else np.inf

    @property
    def lowest_pressure(self) -> float:
        """Pressure [Pa] below which the line is crossed below the lowest temperature of interest only; zero where it is
        not whole, or still above that temperature at its end.
        """
        cold = self.whole and np.exp(self._values[0, self._size]) <= self._coldest
        return float(np.exp(self._values[:, -1].min())) if cold else 0.0

    @property
    def highest_temperature(self) -> float:
        """Highest temperature [K] of the line, infinite where it is not whole."""
        return float(np.exp(self._values[:, -2].max())) if self.whole else np.inf

    def crossing(
        self, branch: Branch, *, temperature: FloatArray | None = None, pressure: FloatArray | None = None
    ) -> Crossing:
        """Points of a branch at T [K] or p [Pa], shape (N,)."""
        given = temperature if temperature is not None else pressure
        assert given is not None
        size = given.size
        blank = np.full(size, np.nan)
        result = Crossing(
            np.zeros(size, dtype=np.intp),
            Pairing(np.full((self._size, size), np.nan), blank.copy(), blank.copy(), blank.copy()),
            np.zeros(size, dtype=np.bool_),
            np.zeros(size, dtype=np.bool_),
        )
        column = self._size if temperature is not None else self._size + 1
        if self._bubble.size > 1:
            for start in range(0, size, _CHUNK):
                part = slice(start, start + _CHUNK)
                pairing = Pairing(*(array[..., part] for array in result.pairing))
                piece = Crossing(result.number[part], pairing, result.solved[part], result.found[part])
                self._cross(branch, column, np.log(given[part]), piece)
        return result

    def _cross(self, branch: Branch, column: int, level: FloatArray, result: Crossing) -> None:
        """Fill in the points where ln T or ln p, the variable of a column, has the levels given."""
        wanted = branch == "bubble"
        above = self._values[None, :, column] > level[:, None]
        crossed = (above[:, 1:] != above[:, :-1]) & (self._bubble[1:] == wanted) & (self._bubble[:-1] == wanted)
        for number in np.flatnonzero(self._bubble[1:] != self._bubble[:-1]):
            # the segment with the critical point belongs to one branch up to that point, then to the other
            here = np.flatnonzero(above[:, number + 1] != above[:, number])
            segment = np.full(here.size, number)
            held = int(np.argmax(np.abs(self._values[number + 1] - self._values[number])[: self._size]))
            ratio = self._between(segment, self._place(segment, level[here], column))[held]
            later = ratio * self._values[number + 1, held] > 0.0
            crossed[here, number] = later == (self._bubble[number + 1] == wanted)
        result.number[:] = np.sum(crossed, axis=1)
        some = np.flatnonzero(result.number)
        if not some.size:
            return
        segment = np.argmax(crossed, axis=1)[some]
        guess = self._between(segment, self._place(segment, level[some], column))
        guess[column] = level[some]
        start = Pairing(
            guess[: self._size] if wanted else -guess[: self._size],
            np.exp(guess[self._size]),
            np.exp(guess[self._size + 1]),
            np.full(some.size, 0.0 if wanted else 1.0),
        )
        fixed = "temperature" if column == self._size else "pressure"
        pairing, good = equilibrate(self._model, self._feed, start, (fixed, "fraction"), {}, ("liquid", "vapour"))
        moved = np.max(np.abs(pairing.ln_ratio - start.ln_ratio), axis=0)
        apart = np.max(np.abs(start.ln_ratio), axis=0)
        # beside the critical point Newton's method is ill-conditioned, and the cubic through its neighbours is not
        beside = self._close[segment] & self._close[segment + 1]
        shifted = np.abs(np.log(pairing.temperature / start.temperature * pairing.pressure / start.pressure))
        solved = good & np.where(beside, (moved < 0.5 * apart) & (shifted < 0.01 * apart), moved < 0.5 + 0.5 * apart)
        known = beside & ~solved
        pairing.put(known, start.take(known))
        solved |= known
        stable = self._stable[segment] & self._stable[segment + 1]
        result.pairing.put(some, pairing)
        result.solved[some] = solved & (result.number[some] == 1)
        result.found[some] = result.solved[some] & stable

    def roots(self, branch: Branch, axis: str, given: float) -> list[float]:
        """All T [K] of a branch at p [Pa] (``axis`` "pressure"), or all p at T ("temperature"), to the accuracy of the
        cubic.
        """
        column = self._size if axis == "temperature" else self._size + 1
        level = np.log([given])
        above = self._values[:, column] > level
        segment = np.flatnonzero((above[1:] != above[:-1]) & (self._bubble[1:] == (branch == "bubble")))
        found = self._between(segment, self._place(segment, np.repeat(level, segment.size), column))
        return sorted(float(value) for value in np.exp(found[2 * self._size + 1 - column]))

    def span(self, axis: str, given: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Lowest and highest T [K] at which p [Pa] crosses the line (``axis`` "pressure"), or p at which T does; NaN
        where it is not crossed.
        """
        column = self._size if axis == "temperature" else self._size + 1
        low, high = np.full(given.size, np.inf), np.full(given.size, -np.inf)
        for start in range(0, given.size, _CHUNK):
            part = slice(start, start + _CHUNK)
            level = np.log(given[part])
            above = self._values[None, :, column] > level[:, None]
            state, segment = np.nonzero(above[:, 1:] != above[:, :-1])
            place = self._place(segment, level[state], column)
            found = np.exp(self._between(segment, place)[2 * self._size + 1 - column])
            np.minimum.at(low[part], state, found)
            np.maximum.at(high[part], state, found)
        return np.where(np.isfinite(low), low, np.nan), np.where(np.isfinite(high), high, np.nan)

    def _between(self, segment: NDArray[np.intp], place: FloatArray) -> FloatArray:
        """Variables (C + 2, N) at 0 to 1 of the way along segments."""
        one, two = self._values[segment].T, self._values[segment + 1].T
        chord = np.sqrt(np.sum((two - one) ** 2, axis=0))
        return cubic(one, two, chord * self._tangents[segment].T, chord * self._tangents[segment + 1].T, place)

    def _place(self, segment: NDArray[np.intp], level: FloatArray, column: int) -> FloatArray:
        """Where in each segment, 0 to 1, a variable has a given value."""
        low, high = np.zeros(segment.size), np.ones(segment.size)
        rising = self._values[segment + 1, column] > self._values[segment, column]
        for _ in range(_BISECTIONS):
            middle = 0.5 * (low + high)
            over = self._between(segment, middle)[column] > level
            low, high = np.where(over == rising, low, middle), np.where(over == rising, middle, high)
        return 0.5 * (low + high)

"""Tracing the phase envelope of a mixture, point by point.

From a dew point at low pressure the line is followed through the critical point to the bubble points, by a
continuation in ln K_i, ln T and ln p with the fastest of them as the parameter (Michelsen 1980: Calculation of phase
envelopes and critical points for multicomponent mixtures, Fluid Phase Equilib. 4, 1-10,
doi:10.1016/0378-3812(80)80001-X).
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import pairwise
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.equilibrium import Pairing, System, equilibrate
from reportgen.fluids.cubics.fugacity import Side, phase_at
from reportgen.fluids.cubics.linear import solve_each
from reportgen.fluids.cubics.thermodynamics import MolarModel

__all__ = ["CriticalPoint", "Point", "Tracer", "cubic"]

FloatArray = NDArray[Any]

#: Pressures [Pa] of the first point, tried in turn; pressures [Pa] where a line ends.
_FIRST_PRESSURES = (1e4, 1e5, 1e3, 1e6)
_LOWEST_PRESSURE, _HIGHEST_PRESSURE = 0.1, 2e8
_POINTS = 400
#: Range of ln T and of ln p in which a point may lie at all.
_SENSIBLE = (1.0, 9.5, -40.0, 25.0)

#: Longest steps in ln K, ln T, ln p.
_LONGEST_RATIO, _LONGEST_TEMPERATURE, _LONGEST_PRESSURE = 0.5, 0.03, 0.5
#: Distance of the phases in ln v and ln K [1] next to the critical point, where a ln K is the parameter; and the
#: distance in ln v at which that point is stepped over.
_CLOSE, _NEAR_CRITICAL = 1.2, 0.2
#: Points from which the critical point is interpolated, in parts of ln K where it was stepped over.
_CRITICAL_NODES = (-1.0, -0.7, -0.4, 0.4, 0.7, 1.0)
#: and points beside it, between which the line is so well known that it is found right up to the critical point.
_BESIDE = (-0.1, -0.02, 0.02, 0.1)
#: Distance in ln T and ln p at which two lines that both stopped are taken to meet in the critical point.
_GAP = (0.02, 0.1)
_ITERATIONS = 8
_SOLVED = 1e-10
_BISECTIONS = 50


class CriticalPoint(NamedTuple):
    """Critical temperature [K], pressure [Pa] and untranslated volume [m3/mol]."""

    temperature: float
    pressure: float
    volume: float


@dataclass(frozen=True)
class Point:
    """``values`` (C + 2,): ln K of the incipient phase, ln T, ln p; ``tangent`` of unit length in the same, in the
    direction of the line; ``bubble`` where the incipient phase is the vapour; ``spacing`` ln(v'/b) of the bulk and of
    the incipient phase.
    """

    values: FloatArray
    tangent: FloatArray
    bubble: bool
    spacing: tuple[float, float]

    @property
    def apart(self) -> float:
        """Difference of the phases in ln(v'/b) [1]."""
        return abs(self.spacing[1] - self.spacing[0])

    @property
    def beyond(self) -> tuple[float, float]:
        """The same spacing [1] with the incipient phase on the other side of the bulk, beyond the critical point."""
        return self.spacing[0], 2.0 * self.spacing[0] - self.spacing[1]

    def reversed(self) -> Point:
        """The point on the line run through the other way."""
        return replace(self, tangent=-self.tangent)


class Tracer:
    """Traces the line of one composition; what comes of it stands in ``points``, ``critical`` and ``whole``.

    ``points`` in the order of the line, empty where no first point was found; ``critical`` the critical point, None
    where the line passes through none or several; ``whole`` whether the line leaves what is of interest at both ends.

    Parameters
    ----------
    model : the species.
    feed : mole fractions [1], shape (C, 1).
    lowest_temperature : T [K] below which the line is of no interest.
    """

    def __init__(self, model: MolarModel, feed: FloatArray, lowest_temperature: float) -> None:
        self._model, self._feed = model, feed
        self._size = feed.shape[0]
        self._coldest = np.log(0.98 * lowest_temperature)
        self.critical: CriticalPoint | None = None
        self.whole = False
        self.points: list[Point] = []
        # far off the line, a step may lead anywhere; it is refused there
        with np.errstate(all="ignore"):
            self.points = self._extremes(self._through_critical(self._joined()))

    def _joined(self) -> list[Point]:
        """The line from low-pressure dew points on; where it stops on the way, with the bubble points from the other
        end.
        """
        line = self._both_ways(bubble=False)
        if not line:
            return []
        self.whole = self._outside(line[0].reversed())
        if self._outside(line[-1]):
            return line
        rest = [point.reversed() for point in reversed(self._both_ways(bubble=True))]
        if not rest:
            self.whole = False
            return line
        gap = np.abs(rest[0].values - line[-1].values)[self._size :]
        self.whole &= bool(gap[0] < _GAP[0] and gap[1] < _GAP[1]) and self._outside(rest[-1])
        return [*line, *rest]

    def _both_ways(self, *, bubble: bool) -> list[Point]:
        """Points of a line through a first point at low pressure, that of lowest pressure first."""
        for pressure in _FIRST_PRESSURES:
            start = self._first(pressure, bubble=bubble)
            if start is not None:
                down, up = self._follow(start, rising=False), self._follow(start, rising=True)
                return [*(point.reversed() for point in reversed(down[1:])), *up]
        return []

    def _first(self, pressure: float, *, bubble: bool) -> Point | None:
        """A dew or bubble point at p [Pa] from Wilson's K, or None."""
        mixture, feed = self._model.mixture, self._feed
        p = np.array([pressure])
        sign = 1.0 if bubble else -1.0
        low, high = np.log(5.0), np.log(5.0 * mixture.critical_temperatures.max())
        for _ in range(_BISECTIONS):
            middle = 0.5 * (low + high)
            wilson = mixture.wilson(np.exp(np.array([middle])), p)
            total = float(np.sum(feed * np.exp(np.minimum(sign * wilson, 600.0))))
            low, high = (middle, high) if (total < 1.0) == bubble else (low, middle)
        temperature = np.exp(np.array([0.5 * (low + high)]))
        ratio = mixture.wilson(temperature, p)
        for _ in range(3):
            start = Pairing(ratio, temperature, p, np.full(1, 0.0 if bubble else 1.0))
            found, good = equilibrate(self._model, feed, start, ("pressure", "fraction"), {}, ("liquid", "vapour"))
            if good[0]:
                values = np.concatenate([sign * found.ln_ratio[:, 0], np.log(found.temperature), np.log(p)])
                point = self._corrected(values, self._size + 1, (0.0, 10.0) if bubble else (10.0, 0.0), bubble=bubble)
                return point[0] if point else None
            # a round of substitution for the composition of the incipient phase
            conditions = mixture.conditions(temperature, p)
            incipient = feed * np.exp(sign * ratio)
            liquid, vapour = (feed, incipient) if bubble else (incipient, feed)
            ratio = phase_at(mixture, conditions, liquid, "liquid").ln_phi
            ratio = ratio - phase_at(mixture, conditions, vapour, "vapour").ln_phi
        return None

    def _phases(self, values: FloatArray, sides: tuple[Side, Side]) -> list[float]:
        """ln(v'/b) of the bulk and of the incipient phase of a point on given roots."""
        mixture = self._model.mixture
        conditions = mixture.conditions(np.exp(values[self._size : self._size + 1]), np.exp(values[self._size + 1 :]))
        incipient = self._feed * np.exp(values[: self._size, None])
        found = []
        for amounts, side in zip((self._feed, incipient), sides, strict=True):
            phase = phase_at(mixture, conditions, amounts, side)
            found.append(float(np.log(phase.compressibility[0] / phase.covolume[0])))
        return found

    def _corrected(
        self, values: FloatArray, held: int, spacing: tuple[float, float], *, bubble: bool
    ) -> tuple[Point, int] | None:
        """The point of the line near ``values`` at which the variable ``held`` has its value, and the steps it took;
        None where Newton's method finds none. Each phase is on the root nearer to ``spacing``.
        """
        if not (_SENSIBLE[0] < values[self._size] < _SENSIBLE[1] and _SENSIBLE[2] < values[-1] < _SENSIBLE[3]):
            return None
        dense, light = self._phases(values, ("liquid", "liquid")), self._phases(values, ("vapour", "vapour"))
        liquid = [abs(a - s) < abs(b - s) for a, b, s in zip(dense, light, spacing, strict=True)]
        sides: tuple[Side, Side] = ("liquid" if liquid[0] else "vapour", "liquid" if liquid[1] else "vapour")
        row = np.zeros((1, self._size + 2))
        row[0, held] = 1.0
        for iteration in range(_ITERATIONS):
            ratio, temperature, pressure = values[: self._size], values[self._size], values[self._size + 1]
            now = Pairing(ratio[:, None], np.exp([temperature]), np.exp([pressure]), np.zeros(1))
            system = System(self._model, self._feed, now, sides, ["temperature", "pressure"])
            residual, slopes = system.equations({})
            if not (np.isfinite(residual).all() and np.isfinite(slopes).all()):
                return None
            matrix = np.concatenate([slopes[0], row])[None]
            step = solve_each(matrix, np.append(-residual[0], 0.0)[None])[0]
            values = values + step * min(1.0, 1.5 / max(float(np.max(np.abs(step))), 1e-300))
            if np.max(np.abs(residual)) < _SOLVED:
                tangent = solve_each(matrix, np.append(np.zeros(self._size + 1), 1.0)[None])[0]
                length = float(np.linalg.norm(tangent))
                trivial = np.max(np.abs(values[: self._size])) < 1e-4 and system.equal[0]
                if length == 0.0 or trivial:
                    return None
                bulk, incipient = self._phases(values, sides)
                return Point(values, tangent / length, bubble, (bulk, incipient)), iteration
        return None

    def _follow(self, start: Point, *, rising: bool) -> list[Point]:
        """Points from ``start`` on, the pressure rising or falling at first."""
        sign = np.sign(start.tangent[-1]) * (1.0 if rising else -1.0)
        points = [replace(start, tangent=sign * start.tangent)]
        scale = 0.3
        limits = np.full(self._size + 2, _LONGEST_RATIO)
        limits[self._size], limits[self._size + 1] = _LONGEST_TEMPERATURE, _LONGEST_PRESSURE
        while len(points) < _POINTS and scale > 1e-3:
            last = points[-1]
            values, direction, apart = last.values, last.tangent, last.apart
            ratio = np.abs(values[: self._size])
            close = apart < _CLOSE and np.max(ratio) < _CLOSE
            held = int(np.argmax(ratio)) if close else int(np.argmax(np.abs(direction) / limits))
            length = scale * limits[held] / abs(direction[held])
            falling = direction[held] * values[held] < 0.0
            if close:
                length = min(length, abs(values[held] / direction[held]) * (0.5 if falling else 1.0))
            found = None
            if close and falling and apart < _NEAR_CRITICAL and len(points) > 1:
                # over the critical point, where all ln K vanish and only the trivial solution is left
                predicted = _beyond(points[-2], last, held)
                found = self._corrected(predicted, held, last.beyond, bubble=not last.bubble)
            if found is None:
                found = self._corrected(values + length * direction, held, last.spacing, bubble=last.bubble)
            if found is None or np.any(np.abs(found[0].values - values) > 4.0 * limits):
                scale *= 0.4
                continue
            point, steps = found
            sign = np.sign(float(np.dot(point.tangent, point.values - values)))
            points.append(replace(point, tangent=sign * point.tangent))
            scale = float(np.clip(scale * (1.6 if steps < 3 else 1.0 if steps < 5 else 0.6), 1e-3, 1.0))
            if self._outside(points[-1]):
                break
        return points

    def _outside(self, point: Point) -> bool:
        """Whether the line, in the direction of the tangent, has left what is of interest for good."""
        pressure = np.exp(point.values[-1])
        if not _LOWEST_PRESSURE < pressure < _HIGHEST_PRESSURE:
            return True
        # on its way up, a line may still come from the cold
        return bool(point.values[self._size] < self._coldest and point.tangent[self._size] < 0.0)

    def _through_critical(self, points: list[Point]) -> list[Point]:
        """The points with more of them next to the critical point, which is interpolated from these."""
        turns = [number for number, (one, two) in enumerate(pairwise(points)) if one.bubble != two.bubble]
        if len(turns) != 1:
            return points
        number = turns[0]
        before, after = points[number], points[number + 1]
        held = int(np.argmax(np.abs(before.values[: self._size])))
        nodes = -before.values[held] * np.array(_CRITICAL_NODES)
        found = self._at_nodes(points[max(0, number - 2) : number + 4], held, nodes, before, after)
        if len(found) < nodes.size:
            return points
        ln_temperature, ln_pressure = _lagrange(nodes, np.array([point.values for point in found]), 0.0)[self._size :]
        t, p = np.exp([ln_temperature]), np.exp([ln_pressure])
        phase = phase_at(self._model.mixture, self._model.mixture.conditions(t, p), self._feed)
        volume = self._model.untranslated_volume(t, p, phase)
        self.critical = CriticalPoint(float(t[0]), float(p[0]), float(volume[0]))
        beside = self._at_nodes(found, held, -before.values[held] * np.array(_BESIDE), before, after)
        return [*points[: number + 1], *found[1:3], *beside, *found[3:-1], *points[number + 1 :]]

    def _at_nodes(self, near: list[Point], held: int, nodes: FloatArray, before: Point, after: Point) -> list[Point]:
        """Points at which the variable ``held`` has the values ``nodes``, interpolated between those ``near`` and
        corrected, where that succeeds; ``before`` and ``after`` lie on the two sides of the critical point.
        """
        values = np.array([point.values for point in near])
        found = []
        for node in nodes:
            nearer = before if node * before.values[held] > 0.0 else after
            guess = _lagrange(values[:, held], values, node)
            corrected = self._corrected(guess, held, nearer.spacing, bubble=nearer.bubble)
            if corrected is not None:
                sign = np.sign(corrected[0].tangent[held] * -before.values[held])
                found.append(replace(corrected[0], tangent=sign * corrected[0].tangent))
        return found

    def _extremes(self, points: list[Point]) -> list[Point]:
        """The points, and between them those where the temperature and where the pressure turns."""
        limits = np.full(self._size + 2, 0.05)
        for column in (self._size, self._size + 1):
            fuller = points[:1]
            for before, after in pairwise(points):
                if before.tangent[column] * after.tangent[column] < 0.0:
                    guess = _hermite(before, after, _turn(before, after, column))
                    held = int(np.argmax(np.abs(after.values - before.values)))
                    nearer = (
                        before
                        if abs(guess[held] - before.values[held]) < abs(guess[held] - after.values[held])
                        else after
                    )
                    found = self._corrected(guess, held, nearer.spacing, bubble=nearer.bubble)
                    if found is not None and np.all(np.abs(found[0].values - guess) < limits):
                        sign = np.sign(float(np.dot(found[0].tangent, after.values - before.values)))
                        fuller.append(replace(found[0], tangent=sign * found[0].tangent))
                fuller.append(after)
            points = fuller
        return points


def _hermite(before: Point, after: Point, place: FloatArray | float) -> FloatArray:
    """Variables (C + 2, …) [1] between two points, at 0 to 1 of the way, by the cubic with their tangents."""
    one, two = before.values, after.values
    chord = float(np.linalg.norm(two - one))
    return cubic(one, two, chord * before.tangent, chord * after.tangent, place)


def cubic(
    start: FloatArray, end: FloatArray, leaving: FloatArray, arriving: FloatArray, place: FloatArray | float
) -> FloatArray:
    """Hermite's cubic [1] through two vectors (V,) or (V, N) with their slopes, at ``place`` 0 to 1, shape (N,)."""
    t = np.asarray(place)
    if t.ndim and start.ndim == 1:
        start, end, leaving, arriving = (part[:, None] for part in (start, end, leaving, arriving))
    result: FloatArray = (
        (1.0 + 2.0 * t) * (1.0 - t) ** 2 * start
        + t**2 * (3.0 - 2.0 * t) * end
        + t * (1.0 - t) ** 2 * leaving
        - t**2 * (1.0 - t) * arriving
    )
    return result


def _turn(before: Point, after: Point, column: int) -> float:
    """Where between two points, 0 to 1, the cubic of one variable has its extreme."""
    places = np.linspace(0.0, 1.0, 2001)
    path = _hermite(before, after, places)[column]
    return float(places[int(np.argmax(path) if before.tangent[column] > 0.0 else np.argmin(path))])


def _beyond(before: Point, last: Point, held: int) -> FloatArray:
    """Variables where the one held has changed its sign: the cubic through two points, run on."""
    span = last.values[held] - before.values[held]
    slopes = [span / point.tangent[held] * point.tangent for point in (before, last)]
    return cubic(before.values, last.values, slopes[0], slopes[1], (-last.values[held] - before.values[held]) / span)


def _lagrange(nodes: FloatArray, points: FloatArray, at: float) -> FloatArray:
    """The polynomial through points (P, …) at nodes (P,), at one place."""
    weights = [np.prod([(at - other) / (node - other) for other in nodes if other != node]) for node in nodes]
    result: FloatArray = np.einsum("p,pk->k", np.array(weights), points)
    return result

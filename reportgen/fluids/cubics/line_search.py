"""One search along isobars or isotherms; see isolines.py."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.bracketing import bracketed_root
from reportgen.fluids.cubics.equilibria import States
from reportgen.fluids.cubics.equilibrium import Pairing, equilibrate
from reportgen.fluids.cubics.fugacity import Side
from reportgen.fluids.cubics.scanning import brackets
from reportgen.fluids.cubics.sought import Sought
from reportgen.fluids.cubics.values import Target, value_of
from reportgen.fluids.model import Point

if TYPE_CHECKING:
    from reportgen.fluids.cubics.isolines import Isoline

__all__ = ["Search"]

FloatArray = NDArray[Any]
BoolArray = NDArray[np.bool_]
Indices = NDArray[np.intp]
#: States at what is held and at places, with whether they are the result or a step on the way to it.
Evaluate = Callable[[FloatArray, FloatArray, bool], States]


#: Parts of the critical pressure and temperature above which a quality may be met more than once.
_WARY = {"pressure": 0.6, "temperature": 0.85}
#: Steps from an end of the two-phase region to a value that Newton's method does not reach at once.
_STEPS = 8
#: Where to look, in parts of the way to the dew point, for two phases that stand for the bubble point.
_FROM_THE_END = (0.2, 0.4, 0.6, 0.8)
#: Relative distance to the end of a line at which a value still belongs to the end, and what a small value is measured
#: against: enthalpy [J/mol], entropy [J/(mol*K)].
_ROUNDING = 1e-10
_SCALE: dict[str, float] = {"enthalpy": 1e3, "entropy": 1.0, "volume": 0.0, "mass_quality": 1.0}
#: What may be left of the target where a bracket has closed, in parts of it.
_LEFT_OVER = 1e-6
#: Parts of a place by which Newton's method may move it at the end of a search.
_POLISHED = np.array([[1.0 - 1e-6], [1.0 + 1e-6]])


class Search:
    """One search along N lines; the result is in ``sought``.

    Parameters
    ----------
    line : the kind of line.
    held : p [Pa] or T [K].
    name, target : what is sought, and its values.
    thorough : whether to search every line.
    """

    def __init__(self, line: Isoline, held: FloatArray, name: Target, target: FloatArray, thorough: bool) -> None:
        self._thorough = thorough
        self._line, self._held, self._name, self._target = line, held, name, target
        self._equilibria = line.equilibria
        below, above, several = (np.zeros(held.size, dtype=np.bool_) for _ in range(3))
        self.sought = Sought(States.nowhere(self._equilibria.size, held.size), below, above, several)
        # enthalpy along an isotherm falls in a gas and rises in a compressed liquid
        self._turning = name == "enthalpy" and line.axis == "temperature"

    def run(self) -> None:
        """Search all lines, each by what crosses it."""
        line = self._line
        boundaries = self._equilibria.boundaries(line.axis, self._held)
        # where two phases reach into the cold, the vapour's share may turn: that is scanned with the rest
        open_ended = boundaries.half & (self._name != "mass_quality")
        simple = np.flatnonzero(boundaries.simple)
        if self._name == "mass_quality" and not self._equilibria.pure:
            # next to the critical point lines of equal quality run together, and are crossed more than once
            wary = simple[self._held[simple] > _WARY[self._line.axis] * self._critical()]
            simple = np.setdiff1d(simple, wary)
            ends = np.sort([line.place(pairing)[wary] for pairing in (boundaries.bubble, boundaries.dew)], axis=0)
            if wary.size:
                self._by_flashes(wary, *ends)
                # two phases over a span of temperature near rounding, where flashes do not tell their shares
                rest = wary[~self.sought.states.found[wary]]
                self._crossed(rest, boundaries.bubble.take(rest), boundaries.dew.take(rest), "vapour", None)
        if simple.size:
            bubble, dew = boundaries.bubble.take(simple), boundaries.dew.take(simple)
            self._crossed(simple, bubble, dew, "vapour", None)
        for edge, count, side in (
            (boundaries.dew, boundaries.dew_count, "vapour"),
            (boundaries.bubble, boundaries.bubble_count, "liquid"),
        ):
            half = np.flatnonzero(open_ended & (count == 1))
            if half.size:
                self._from_the_end(half, edge.take(half), side)  # type: ignore[arg-type]
        absent = boundaries.absent
        if self._name != "mass_quality" and absent.any():
            where = np.flatnonzero(absent)
            self._one_phase(where, "stable", np.full(where.size, self._line.low), np.full(where.size, self._line.high))
        crossings = boundaries.bubble_count + boundaries.dew_count
        rest = np.flatnonzero(~boundaries.simple & ~open_ended & ~absent & (self._thorough | (crossings > 1)))
        if rest.size:
            self._by_flashes(rest, *self._crossings(rest, crossings[rest] % 2 == 1))
        if self._thorough:
            doubtful = self.sought.states.temperature < self._equilibria.doubtful_temperature
            doubtful[rest] = False
            if doubtful.any():
                self._verify(np.flatnonzero(doubtful))

    def _crossings(self, where: Indices, odd: BoolArray) -> tuple[FloatArray, FloatArray] | tuple[None, None]:
        """Ends between which two phases may be; None where the whole line is to be searched. After an ``odd`` number of
        crossings two phases reach to the end, low temperature or high pressure.
        """
        envelope = None if self._equilibria.pure else self._equilibria.envelope
        if self._name != "mass_quality" or envelope is None or not envelope.whole:
            return None, None
        low, high = envelope.span(self._line.axis, self._held[where])
        low = np.nan_to_num(low * (1.0 - 1e-6), nan=self._line.low)
        high = np.nan_to_num(high * (1.0 + 1e-6), nan=self._line.high)
        if self._line.rising:
            low = np.where(odd, self._line.low, low)
        else:
            high = np.where(odd, self._line.high, high)
        return low, high

    def _verify(self, where: Indices) -> None:
        """Hold states found by the crossings of the envelope against a flash: elsewhere on their line a second liquid
        may have formed.
        """
        states = self.sought.states.take(where)
        tested = self._equilibria.at(states.temperature, states.pressure)
        inner = (states.fraction > 1e-9) & (states.fraction < 1.0 - 1e-9)
        same = tested.found & (~inner | tested.mixed) & (inner | ~tested.mixed | np.isfinite(states.fraction))
        states.third |= tested.third
        self.sought.states.put(where, states)
        other = where[~same & ~tested.third]
        if other.size:
            marked = np.zeros(self._held.size, dtype=np.bool_)
            marked[other] = True
            self.sought.states.drop(marked)
            self._by_flashes(other, None, None)

    def _critical(self) -> float:
        """Critical pressure [Pa] or temperature [K]; zero where there is no critical point."""
        point = self._equilibria.critical_point
        if point is None:
            return 0.0
        return point.pressure if self._line.axis == "pressure" else point.temperature

    def _value(self, states: States) -> FloatArray:
        return value_of(self._equilibria, states, self._name)

    # --- lines that are crossed by the dew line, and by the bubble line or not ---------------------------------------

    def _from_the_end(self, where: Indices, edge: Pairing, side: Side) -> None:
        """Lines on which two phases reach from ``edge``, beyond which there is one on the given root, to the end. The
        other edge is stood for by the state at the end, or by the first one from there whose value is not beyond the
        target, if a second liquid forms in between.
        """
        line = self._line
        at_edge, last = line.place(edge), np.full(where.size, line.low if line.rising else line.high)
        single = line.single(self._held[where], at_edge, side)
        # nothing is sought in the two phases where they lie beyond the end, or the target on the other side of the edge
        beyond = at_edge < line.low if line.rising else at_edge > line.high
        if not self._turning:
            beyond |= self._target[where] > self._value(single)
        end = self._equilibria.at(*line.coordinates(self._held[where], last))
        end.put(beyond, single.take(beyond))
        chosen = beyond | (end.mixed & ~end.third)
        for part in _FROM_THE_END:
            rest = np.flatnonzero(~chosen)
            if not rest.size:
                break
            place = last[rest] * (at_edge[rest] / last[rest]) ** part
            tried = self._equilibria.at(*line.coordinates(self._held[where[rest]], place))
            fit = tried.mixed & ~tried.third & (self._value(tried) <= self._target[where[rest]])
            end.put(rest[fit], tried.take(fit))
            chosen[rest[fit]] = True
        good = np.flatnonzero(chosen)
        if good.size:
            here = end.take(good)
            fraction = np.where(beyond[good], edge.fraction[good], here.fraction)
            pairing = Pairing(np.log(here.vapour / here.liquid), here.temperature, here.pressure, fraction)
            self._crossed(where[good], pairing, edge.take(good), side, here)
        if self._thorough and not chosen.all():
            self._by_flashes(where[~chosen], None, None)

    def _crossed(self, where: Indices, first: Pairing, edge: Pairing, side: Side, end: States | None) -> None:
        """Lines with two phases between ``first``, the bubble point or the ``end`` of the line, and ``edge``, beyond
        which there is one phase on the root ``side``.
        """
        line, held, wanted = self._line, self._held[where], self._target[where]
        at_first, at_edge = line.place(first), line.place(edge)
        if self._name == "mass_quality":
            self._two_phases(where, first, edge, np.zeros(where.size), np.ones(where.size))
            return
        value_first = self._value(line.single(held, at_first, "liquid") if end is None else end)
        value_edge = self._value(line.single(held, at_edge, side))
        mixed = (wanted >= value_first) & (wanted <= value_edge)
        if self._turning and not self._equilibria.pure:
            ends = np.sort([at_first, at_edge], axis=0)
            inside = np.flatnonzero((ends[1] > line.low) & (ends[0] < line.high))
            self._by_flashes(where[inside], ends[0][inside], ends[1][inside])
        else:
            self._two_phases(where[mixed], first.take(mixed), edge.take(mixed), value_first[mixed], value_edge[mixed])
            if self._turning:
                some = where[mixed & self.sought.states.found[where]]
                self._note(some, self.sought.states.take(some))
        low, high = np.full(where.size, line.low), np.full(where.size, line.high)
        if line.rising:
            ranges = ((low, np.minimum(at_first, high)), (np.maximum(at_edge, low), high))
            empties = (self.sought.below, self.sought.above)
        else:
            ranges = ((np.maximum(at_first, low), high), (low, np.minimum(at_edge, high)))
            empties = (self.sought.above, self.sought.below)
        # a value that turns may lie in either phase, and in both
        chosen = [wanted < value_first, wanted > value_edge]
        if self._turning:
            chosen = [np.ones(where.size, dtype=np.bool_) for _ in chosen]
        if end is not None:
            # beyond two phases at the end of the line lies nothing
            empties[0][where[wanted < value_first]] = True
            chosen[0] = np.zeros(where.size, dtype=np.bool_)
        sides: tuple[Side, Side] = ("liquid", side)
        for root, here, (start, stop), empty in zip(sides, chosen, ranges, empties, strict=True):
            there = start < stop
            if not self._turning:
                empty[where[here & ~there]] = True
            here = here & there
            self._one_phase(where[here], root, start[here], stop[here])

    def _two_phases(
        self, where: Indices, first: Pairing, dew: Pairing, at_first: FloatArray, at_dew: FloatArray
    ) -> None:
        """States between two pairings, by Newton's method from an interpolation."""
        if not where.size:
            return
        line, wanted = self._line, self._target[where]
        span = at_dew - at_first
        # next to the critical point the phases can be equal to the last digit
        part = np.where(span > 0.0, (wanted - at_first) / np.where(span > 0.0, span, 1.0), 0.0)
        start = Pairing(*(one + part * (two - one) for one, two in zip(first, dew, strict=True)))
        if self._equilibria.pure:
            self.sought.states.put(where, self._equilibria.paired(start))
            self._drop_beyond(where)
            return
        inside = np.sort([line.place(first), line.place(dew)], axis=0)
        pairing, good = self._equilibrated(start, wanted, inside)
        if not good.all():
            rest = np.flatnonzero(~good)
            ends = at_first[rest], at_dew[rest]
            later, found = self._followed(first.take(rest), dew.take(rest), *ends, wanted[rest], inside[:, rest])
            pairing.put(rest[found], later.take(found))
            good[rest[found]] = True
        pairing = pairing._replace(fraction=np.clip(pairing.fraction, 0.0, 1.0))
        self.sought.states.put(where[good], self._equilibria.paired(pairing.take(good)))
        self._drop_beyond(where)
        if not good.all():
            self._by_flashes(where[~good], inside[0][~good], inside[1][~good])

    def _equilibrated(self, start: Pairing, wanted: FloatArray, inside: FloatArray) -> tuple[Pairing, BoolArray]:
        """Two phases with the value wanted, and where they were found between the places ``inside``."""
        line = self._line
        pairing, good = equilibrate(
            self._equilibria.model,
            self._equilibria.feed,
            start,
            (line.axis,),
            {self._name: wanted},
            ("liquid", "vapour"),
        )
        place = line.place(pairing)
        good &= (place > inside[0] * (1.0 - 1e-9)) & (place < inside[1] * (1.0 + 1e-9))
        good &= (pairing.fraction > -1e-9) & (pairing.fraction < 1.0 + 1e-9)
        return pairing, good & self._equilibria.ordered(pairing)

    def _followed(
        self,
        first: Pairing,
        dew: Pairing,
        at_first: FloatArray,
        at_dew: FloatArray,
        wanted: FloatArray,
        inside: FloatArray,
    ) -> tuple[Pairing, BoolArray]:
        """The same in steps of the value, from the nearer end of the two phases."""
        from_dew = at_dew - wanted < wanted - at_first
        now = Pairing(*(np.where(from_dew, two, one) for one, two in zip(first, dew, strict=True)))
        begin = np.where(from_dew, at_dew, at_first)
        good = np.ones(wanted.size, dtype=np.bool_)
        for step in range(1, _STEPS + 1):
            # short steps at first: next to the end the temperature changes most
            part = (step / _STEPS) ** 2
            now, found = self._equilibrated(now, begin + part * (wanted - begin), inside)
            good &= found
        return now, good

    def _drop_beyond(self, where: Indices) -> None:
        """Two-phase states beyond the ends of the line are none."""
        place = self._line.place(self.sought.states)
        for flags, outside in (
            (self.sought.below, place < self._line.low * (1.0 - 1e-9)),
            (self.sought.above, place > self._line.high * (1.0 + 1e-9)),
        ):
            marked = np.zeros(place.size, dtype=np.bool_)
            marked[where] = outside[where]
            flags |= marked
            self.sought.states.drop(marked)

    # --- bracketed searches ------------------------------------------------------------------------------------------

    def _one_phase(self, where: Indices, side: Side, low: FloatArray, high: FloatArray) -> None:
        """States of one phase between places ``low`` and ``high``."""
        if where.size:
            self._between(where, lambda h, place, _: self._line.single(h, place, side), low, high, scan=self._turning)

    def _by_flashes(self, where: Indices, low: FloatArray | None, high: FloatArray | None) -> None:
        """States with a flash at every step, along the whole line unless ends are given."""
        line = self._line

        def evaluate(held: FloatArray, place: FloatArray, final: bool) -> States:
            states = self._equilibria.at(*line.coordinates(held, place), final=final)
            if self._name == "mass_quality":
                # outside the two phases the quality goes on as that of the phase there is
                one = np.isnan(states.fraction) & states.found
                dense = states.volume < self._equilibria.turning_point.volume
                states.fraction = np.where(one, np.where(dense, 0.0, 1.0), states.fraction)
            return states

        monotone = self._name in ("enthalpy", "entropy") if line.rising else self._name == "volume"
        monotone |= low is not None and self._name != "mass_quality" and not self._turning
        low = np.full(where.size, line.low) if low is None else np.maximum(low, line.low)
        high = np.full(where.size, line.high) if high is None else np.minimum(high, line.high)
        self._between(where, evaluate, low, high, scan=not monotone)

    def _between(self, where: Indices, evaluate: Evaluate, low: FloatArray, high: FloatArray, *, scan: bool) -> None:
        """States between places ``low`` and ``high``; ``scan`` where the value may turn on the way."""
        if scan:
            self._scan(where, evaluate, low, high)
            return
        held, wanted = self._held[where], self._target[where]
        place, found, at_low, at_high = self._root(held, wanted, evaluate, low, high)
        self._keep(where[found], evaluate(held[found], place[found], True))
        # a value beyond an end of the whole line, and not only by rounding
        slack = _ROUNDING * (np.abs(wanted) + _SCALE[self._name])
        sign = 1.0 if self._line.rising else -1.0
        under = ~found & (sign * at_low > slack) & (low <= self._line.low)
        over = ~found & (sign * at_high < -slack) & (high >= self._line.high)
        self.sought.below[where] |= under
        self.sought.above[where] |= over

    def _root(
        self, held: FloatArray, target: FloatArray, evaluate: Evaluate, low: FloatArray, high: FloatArray
    ) -> tuple[FloatArray, BoolArray, FloatArray, FloatArray]:
        """Places where the value is the target, whether found, and the gaps at the ends; along an isotherm the search
        runs in ln p.
        """
        isothermal = self._line.axis == "temperature"
        ends = (np.log(low), np.log(high)) if isothermal else (low, high)

        def gap(place: FloatArray, which: Indices) -> FloatArray:
            # the image of an end must not leave the range
            place = np.clip(np.exp(place) if isothermal else place, low[which], high[which])
            return self._value(evaluate(held[which], place, False)) - target[which]

        everywhere = np.arange(held.size)
        at_low, at_high = gap(ends[0], everywhere), gap(ends[1], everywhere)
        place, found = bracketed_root(gap, *ends, at_low, at_high)
        return np.clip(np.exp(place) if isothermal else place, low, high), found, at_low, at_high

    def _scan(self, where: Indices, evaluate: Evaluate, low: FloatArray, high: FloatArray) -> None:
        """States of a value that may turn, looked for between many points."""
        held, target = self._held[where], self._target[where]
        state, start, stop = brackets(
            lambda which, place: self._value(evaluate(held[which], place, False)) - target[which],
            low,
            high,
            geometric=self._line.axis == "temperature",
        )
        if not state.size:
            return
        place, found, _, _ = self._root(held[state], target[state], evaluate, start, stop)
        state, place = state[found], place[found]
        fresh = evaluate(held[state], place, True)
        if self._name == "mass_quality":
            self._polish(fresh, target[state])
        # what would split further is a state only where there is no other
        for third in (True, False):
            some = np.flatnonzero(fresh.third == third)
            kept = some[self._keep(where[state[some]], fresh.take(some))]
            if not third:
                self._note(where[state[kept]], fresh.take(kept))

    def _polish(self, states: States, wanted: FloatArray) -> None:
        """Two phases found by flashes, with their share as exact as Newton's method makes it."""
        two = np.flatnonzero(states.mixed & ~states.third)
        if not two.size:
            return
        some = states.take(two)
        start = Pairing(np.log(some.vapour / some.liquid), some.temperature, some.pressure, some.fraction)
        place = self._line.place(start)
        pairing, good = self._equilibrated(start, wanted[two], np.stack([place, place]) * _POLISHED)
        states.put(two[good], self._equilibria.paired(pairing.take(good)))

    def _note(self, where: Indices, states: States) -> None:
        """Take down states of which there may be several."""
        density = self._equilibria.molar_mass / value_of(self._equilibria, states, "volume")
        for index, *values in zip(where, states.temperature, states.pressure, density, strict=True):
            self.sought.points.setdefault(int(index), []).append(Point(*(float(value) for value in values)))

    def _keep(self, where: Indices, states: States) -> BoolArray:
        """Take over states that have the value, and not those where a bracket has closed on a jump; which were."""
        left = np.abs(self._value(states) - self._target[where])
        kept: BoolArray = left <= _LEFT_OVER * (np.abs(self._target[where]) + _SCALE[self._name])
        self.sought.states.put(where[kept], states.take(kept))
        return kept

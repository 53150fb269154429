"""States of one composition in equilibrium: at given temperature and pressure, and on the lines of saturation."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.envelope import Envelope
from reportgen.fluids.cubics.equilibrium import Pairing
from reportgen.fluids.cubics.flash import flash
from reportgen.fluids.cubics.fugacity import Side, phase_at
from reportgen.fluids.cubics.saturation import PureSaturation
from reportgen.fluids.cubics.thermodynamics import Bulk, MolarModel
from reportgen.fluids.cubics.tracing import CriticalPoint
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT

__all__ = ["Boundaries", "Equilibria", "States"]

FloatArray = NDArray[Any]
BoolArray = NDArray[np.bool_]


@dataclass
class States:
    """N states, molar.

    ``temperature`` [K], ``pressure`` [Pa]; ``volume`` v' [m3/mol] of the untranslated equation where there is one
    phase, NaN where there are two; ``fraction`` mole fraction [1] of vapour, NaN in one phase off the lines of
    saturation; ``liquid``, ``vapour`` mole fractions [1] of shape (C, N). All are NaN in states that were not found.
    ``third`` where a third phase, or a second liquid, would form: such a state is no equilibrium.
    """

    temperature: FloatArray
    pressure: FloatArray
    volume: FloatArray
    fraction: FloatArray
    liquid: FloatArray
    vapour: FloatArray
    third: BoolArray

    @classmethod
    def nowhere(cls, species: int, size: int) -> States:
        """As many states as ``size``, none of them found."""
        temperature, pressure, volume, fraction = (np.full(size, np.nan) for _ in range(4))
        liquid, vapour = (np.full((species, size), np.nan) for _ in range(2))
        third = np.zeros(size, dtype=np.bool_)
        return cls(temperature, pressure, volume, fraction, liquid, vapour, third)

    @property
    def found(self) -> BoolArray:
        """Which states were found."""
        return np.isfinite(self.temperature) & np.isfinite(self.pressure)

    @property
    def mixed(self) -> BoolArray:
        """Which are two-phase."""
        return (self.fraction > 0.0) & (self.fraction < 1.0)

    def take(self, where: NDArray[Any]) -> States:
        """The states at an index array or mask."""
        names = ("temperature", "pressure", "volume", "fraction", "liquid", "vapour", "third")
        return States(*(getattr(self, name)[..., where] for name in names))

    def put(self, where: NDArray[Any], other: States) -> None:
        """Overwrite the states at an index array or mask."""
        for name in ("temperature", "pressure", "volume", "fraction", "liquid", "vapour", "third"):
            getattr(self, name)[..., where] = getattr(other, name)

    def drop(self, where: BoolArray) -> None:
        """Make the states where ``where`` is true into states not found."""
        for name in ("temperature", "pressure", "volume", "fraction", "liquid", "vapour"):
            getattr(self, name)[..., where] = np.nan


class Boundaries(NamedTuple):
    """Saturation at N pressures or temperatures.

    ``bubble``, ``dew`` the two points; ``bubble_count``, ``dew_count`` how many there are; ``simple`` where there is
    one of each, both solved for; ``half`` where there is one point of the two, so that from there two phases reach to
    the end of the line, low temperature or high pressure; ``absent`` where there is certainly no saturation.
    """

    bubble: Pairing
    dew: Pairing
    bubble_count: NDArray[np.intp]
    dew_count: NDArray[np.intp]
    bubble_found: BoolArray
    dew_found: BoolArray
    simple: BoolArray
    half: BoolArray
    absent: BoolArray


class Equilibria:
    """Equilibrium states of one composition.

    Parameters
    ----------
    model : the species.
    feed : mole fractions [1], shape (C,).
    """

    def __init__(self, model: MolarModel, feed: FloatArray) -> None:
        self.model = model
        self.feed = feed[:, None]
        self.size = feed.size
        self.molar_mass = float(model.molar_masses @ feed)
        self.shift = float(model.mixture.translation @ feed)
        self.pure = feed.size == 1

    @cached_property
    def envelope(self) -> Envelope:
        """Bubble and dew line of a mixture, traced when first needed."""
        return Envelope(self.model, self.feed, self.model.ideal.minimum_temperature)

    @property
    def doubtful_temperature(self) -> float:
        """Temperature [K] below which a second liquid may form, so that crossings of the envelope do not tell all."""
        return 0.0 if self.pure else self.envelope.doubtful_temperature

    @cached_property
    def saturation(self) -> PureSaturation:
        """Saturation of a pure substance."""
        return PureSaturation(self.model.mixture)

    @cached_property
    def critical_point(self) -> CriticalPoint | None:
        """Critical point, or None where a mixture has none or several."""
        if not self.pure:
            return self.envelope.critical_point
        mixture = self.model.mixture
        return CriticalPoint(
            float(mixture.critical_temperatures[0]),
            float(mixture.critical_pressures[0]),
            float(mixture.covolumes[0] * mixture.form.critical_volume),
        )

    @cached_property
    def turning_point(self) -> CriticalPoint:
        """Where the isotherms of the composition as one phase lose their loop: told from liquid to vapour by it where
        there is no critical point.
        """
        if self.critical_point is not None:
            return self.critical_point
        mixture, form = self.model.mixture, self.model.mixture.form
        low, high = 1.0, 10.0 * float(mixture.critical_temperatures.max())
        for _ in range(80):
            middle = 0.5 * (low + high)
            strength = mixture.strength(mixture.attraction(np.array([middle])), self.feed)
            q = float(strength.attraction[0] / (strength.covolume[0] * MOLAR_GAS_CONSTANT * middle))
            low, high = (middle, high) if q > form.critical_strength else (low, middle)
        covolume = float(mixture.covolumes @ self.feed[:, 0])
        return CriticalPoint(low, form.covolume * MOLAR_GAS_CONSTANT * low / covolume, form.critical_volume * covolume)

    # --- one phase ----------------------------------------------------------------------------------------------------

    def volume(self, temperature: FloatArray, pressure: FloatArray, side: Side = "stable") -> FloatArray:
        """v' [m3/mol] of the composition as one phase at T [K] and p [Pa]."""
        conditions = self.model.mixture.conditions(temperature, pressure)
        phase = phase_at(self.model.mixture, conditions, self.feed, side)
        return self.model.untranslated_volume(temperature, pressure, phase)

    def single(self, temperature: FloatArray, pressure: FloatArray, volume: FloatArray) -> States:
        """States of one phase at T [K], p [Pa] and v' [m3/mol] that belong together."""
        everywhere = np.repeat(self.feed, temperature.size, axis=1)
        return States(
            temperature.copy(),
            pressure.copy(),
            volume,
            np.full(temperature.size, np.nan),
            everywhere,
            everywhere.copy(),
            np.zeros(temperature.size, dtype=np.bool_),
        )

    def bulk(self, temperature: FloatArray, pressure: FloatArray, volume: FloatArray) -> Bulk:
        """Properties of the composition as one phase at T [K], p [Pa], v' [m3/mol]."""
        return self.model.bulk(temperature, pressure, volume, np.repeat(self.feed, temperature.size, axis=1))

    def phase(self, temperature: FloatArray, pressure: FloatArray, fractions: FloatArray, side: Side) -> Bulk:
        """Properties of a phase of mole fractions [1] of shape (C, N) at T [K] and p [Pa]."""
        conditions = self.model.mixture.conditions(temperature, pressure)
        return self.model.of_phase(conditions, phase_at(self.model.mixture, conditions, fractions, side))

    # --- at temperature and pressure ----------------------------------------------------------------------------------

    def at(self, temperature: FloatArray, pressure: FloatArray, *, final: bool = True) -> States:
        """States at T [K] and p [Pa], shape (N,); ``final`` whether to test them for a third phase."""
        if self.pure:
            return self.single(temperature, pressure, self.volume(temperature, pressure))
        split = flash(self.model, self.feed, temperature, pressure, final=final)
        one = np.isnan(split.fraction)
        volume = np.full(temperature.size, np.nan)
        if one.any():
            volume[one] = self.volume(temperature[one], pressure[one])
        states = States(
            temperature.copy(), pressure.copy(), volume, split.fraction, split.liquid, split.vapour, split.third
        )
        self._settle(states)
        states.drop(~split.found)
        return states

    def _settle(self, states: States) -> None:
        """Two phases of which one has vanished are one, on the line of saturation."""
        ended = np.flatnonzero((states.fraction == 0.0) | (states.fraction == 1.0))
        if ended.size:
            t, p = states.temperature[ended], states.pressure[ended]
            sides = states.fraction[ended] == 0.0
            states.volume[ended] = np.where(sides, self.volume(t, p, "liquid"), self.volume(t, p, "vapour"))

    def paired(self, pairing: Pairing) -> States:
        """States of two phases in equilibrium."""
        liquid, vapour = pairing.compositions(self.feed)
        size = pairing.fraction.size
        states = States(
            pairing.temperature.copy(),
            pairing.pressure.copy(),
            np.full(size, np.nan),
            pairing.fraction.copy(),
            liquid,
            vapour,
            np.zeros(size, dtype=np.bool_),
        )
        self._settle(states)
        return states

    # --- on the lines of saturation -----------------------------------------------------------------------------------

    def boundaries(self, axis: str, given: FloatArray) -> Boundaries:
        """Bubble and dew points at pressures [Pa] (``axis`` "pressure") or temperatures [K] ("temperature")."""
        if self.pure:
            return self._pure_boundaries(axis, given)
        envelope = self.envelope
        arguments: dict[str, FloatArray] = {axis: given}
        bubble = envelope.crossing("bubble", **arguments)
        dew = envelope.crossing("dew", **arguments)
        isobars = axis == "pressure"
        top = envelope.highest_pressure if isobars else envelope.highest_temperature
        bottom = envelope.lowest_pressure if isobars else 0.0
        none = (bubble.number == 0) & (dew.number == 0)
        return Boundaries(
            bubble.pairing,
            dew.pairing,
            bubble.number,
            dew.number,
            bubble.found,
            dew.found,
            bubble.solved & dew.solved & envelope.whole,
            envelope.whole & np.where(bubble.number == 0, dew.solved, bubble.solved & (dew.number == 0) & isobars),
            none & ((given > top * (1.0 + 1e-7)) | (given < bottom)),
        )

    def _pure_boundaries(self, axis: str, given: FloatArray) -> Boundaries:
        if axis == "pressure":
            pressure, temperature = given, self.saturation.temperature(given)
        else:
            temperature, pressure = given, self.saturation.pressure(given)
        other = temperature if axis == "pressure" else pressure
        there = np.isfinite(other) & (other > 0.0)
        equal = np.zeros((1, given.size))
        bubble = Pairing(equal, temperature, pressure, np.zeros(given.size))
        dew = Pairing(equal, temperature, pressure, np.ones(given.size))
        count = there.astype(np.intp)
        never = np.zeros(given.size, dtype=np.bool_)
        return Boundaries(bubble, dew, count, count, there, there, there, never, np.isnan(other))

    def ordered(self, pairing: Pairing) -> BoolArray:
        """Where the vapour of two phases has the greater volume, in multiples of the covolume."""
        conditions = self.model.mixture.conditions(pairing.temperature, pairing.pressure)
        sides: tuple[Side, Side] = ("liquid", "vapour")
        liquid, vapour = (
            phase_at(self.model.mixture, conditions, fractions, side)
            for fractions, side in zip(pairing.compositions(self.feed), sides, strict=True)
        )
        result: BoolArray = vapour.compressibility * liquid.covolume >= liquid.compressibility * vapour.covolume
        return result

"""Where a cubic equation may be used, and what is said when it may not."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import Fault
from reportgen.fluids.model import Limits, Point
from reportgen.fluids.pairs import Elements, SeveralStates, in_words

__all__ = ["LOWEST_PRESSURE", "Guard"]

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

#: Least pressure [Pa] and density [kg/m3] taken: far below any vacuum in a plant.
LOWEST_PRESSURE = 1e-3
_LOWEST_DENSITY = 1e-12
#: Rounding granted at the ends of the range.
_ROUNDING = 1e-9


def _value(name: str, value: float) -> str:
    return f"{name.replace('_', ' ')} {in_words(name, value)}"


def _sentence(name: str, value: float) -> str:
    text = _value(name, value)
    return text[0].upper() + text[1:]


class Guard:
    """Checks batches against the limits of one fluid and words the faults.

    Parameters
    ----------
    title : name of the fluid for messages.
    limits : its limits.
    densest : density [kg/m3] at which the molecules would fill all space.
    pure : whether it is one substance, with one saturation temperature at a pressure.
    """

    def __init__(self, title: str, limits: Limits, densest: float, *, pure: bool) -> None:
        self._title, self._limits, self._densest, self._pure = title, limits, densest, pure

    def _reject(self, where: BoolArray, elements: Elements, name: str, values: FloatArray, limit: str, do: str) -> None:
        elements.reject(
            where,
            lambda i: Fault(
                f"{_sentence(name, values[i])} is {limit} for {self._title}.",
                found=_value(name, values[i]),
                expected=do,
            ),
        )

    def check(self, name: str, values: FloatArray, elements: Elements) -> None:
        """Refuse values of a property [SI] outside what it can be."""
        match name:
            case "temperature":
                self.temperature(values, elements)
            case "pressure":
                self.pressure(values, elements)
            case "density":
                do = f"above 0, below {self._densest:.5g} kg/m3"
                self._reject(~(values > 0.0), elements, name, values, "not above zero", do)
                low = values < _LOWEST_DENSITY
                self._reject(low, elements, name, values, f"below {_LOWEST_DENSITY:g} kg/m3, the lowest computed,", do)
                limit = f"not below {self._densest:.5g} kg/m3, where the covolume of the equation fills all space,"
                self._reject(values >= self._densest, elements, name, values, limit, do)
            case "quality":
                outside = ~((values >= 0.0) & (values <= 1.0))
                self._reject(outside, elements, name, values, "not between 0 and 1", "0 to 1")
            case "superheat" | "subcooling":
                limit = "negative, which names a state on the other side of saturation,"
                self._reject(values < 0.0, elements, name, values, limit, "0 K or more")

    def infinite(self, where: BoolArray, elements: Elements, name: str, values: FloatArray) -> None:
        """Refuse the elements of a property [SI] that are infinite."""
        self._reject(where, elements, name, values, "not a finite number", "a number")

    def temperature(self, temperature: FloatArray, elements: Elements) -> None:
        """Refuse temperatures [K] outside the range of the ideal part."""
        low, high = self._limits.minimum_temperature, self._limits.maximum_temperature
        do = f"{low:g} K to {high:g} K"
        cold, hot = temperature < low * (1.0 - _ROUNDING), temperature > high * (1.0 + _ROUNDING)
        self._reject(cold, elements, "temperature", temperature, f"below the minimum, {low:g} K,", do)
        self._reject(hot, elements, "temperature", temperature, f"above the maximum, {high:g} K,", do)

    def pressure(self, pressure: FloatArray, elements: Elements) -> None:
        """Refuse pressures [Pa] not positive or above the maximum."""
        high = self._limits.maximum_pressure
        do = f"above 0, up to {in_words('pressure', high)}"
        limit = "not above zero (absolute pressure is needed)"
        self._reject(pressure <= 0.0, elements, "pressure", pressure, limit, do)
        low = pressure < LOWEST_PRESSURE
        self._reject(low, elements, "pressure", pressure, f"below {LOWEST_PRESSURE:g} Pa, the lowest computed,", do)
        over = pressure > high * (1.0 + _ROUNDING)
        self._reject(over, elements, "pressure", pressure, f"above the maximum, {in_words('pressure', high)},", do)

    # --- faults of one element ----------------------------------------------------------------------------------------

    def on_saturation(self, pressure: float, temperature: float, roots: tuple[Point, ...]) -> SeveralStates:
        """Pressure [Pa] and temperature [K] of a pure substance on its line of saturation."""
        return SeveralStates(
            f"{in_words('pressure', pressure)} and {in_words('temperature', temperature)} are a point of the "
            f"saturation line of {self._title}: they do not tell liquid from vapour.",
            hint="Give the quality with one of them.",
            roots=roots,
        )

    def no_saturation(self, name: str, value: float, line: str, several: list[float]) -> Fault:
        """A pressure [Pa] or temperature [K] with no, or with several, points on the bubble or dew line."""
        other = "temperature" if name == "pressure" else "pressure"
        if several:
            told = " and ".join(in_words(other, root) for root in several)
            return Fault(
                f"{self._title} has {len(several)} {line} points at {_value(name, value)}: at {told}.",
                found=_value(name, value),
                hint="Give pressure and temperature of the one that is meant.",
            )
        what = "saturation" if self._pure else f"{line} point, or none that is stable,"
        return Fault(
            f"{self._title} has no {what} at {_value(name, value)} within the limits of the model.",
            found=_value(name, value),
        )

    def third_phase(self, pressure: float, temperature: float) -> Fault:
        """Pressure [Pa] and temperature [K] at which the equation gives two liquids."""
        return Fault(
            f"{self._title} splits into two liquids, or into three phases, at {in_words('pressure', pressure)} and "
            f"{in_words('temperature', temperature)}: states of one vapour and one liquid are carried only.",
            hint="If it does not in fact, interaction coefficients for its pairs may mend the equation.",
        )

    def beyond(self, names: tuple[str, str], values: tuple[float, float], line: str, *, above: bool) -> Fault:
        """Two properties [SI] of a state beyond the ``line`` "temperature" or "pressure" limits."""
        limits = self._limits
        if line == "temperature":
            end = limits.maximum_temperature if above else limits.minimum_temperature
            limit = f"{end:g} K"
        else:
            limit = in_words("pressure", limits.maximum_pressure if above else LOWEST_PRESSURE)
        side = "above the maximum" if above else "below the minimum"
        return Fault(
            f"{self._title} at {_value(names[0], values[0])} with {_value(names[1], values[1])} would be {side} "
            f"{line}, {limit}.",
            found=_value(names[1], values[1]),
        )

    def several(self, names: tuple[str, str], values: tuple[float, float], roots: tuple[Point, ...]) -> SeveralStates:
        """Two properties [SI] that several states share."""
        told = "; ".join(
            f"{in_words('temperature', root.temperature)}, {in_words('pressure', root.pressure)}, "
            f"{in_words('density', root.density or 0.0)}"
            for root in roots
        )
        return SeveralStates(
            f"{self._title} has {len(roots)} states at {_value(names[0], values[0])} and "
            f"{_value(names[1], values[1])}: {told}.",
            hint="Give temperature and density of the one that is meant.",
            roots=roots,
        )

    def none(self, names: tuple[str, str], values: tuple[float, float]) -> Fault:
        """Two properties [SI] that no state within the limits was found to have."""
        limits = self._limits
        return Fault(
            f"No state of {self._title} within its limits was found at {_value(names[0], values[0])} and "
            f"{_value(names[1], values[1])}.",
            expected=f"a state of {limits.minimum_temperature:g} K to {limits.maximum_temperature:g} K, up to "
            f"{in_words('pressure', limits.maximum_pressure)}",
        )

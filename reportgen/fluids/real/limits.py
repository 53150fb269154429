"""Where a real fluid's equation may be used, and what is said when it may not."""

from __future__ import annotations

from collections.abc import Mapping
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import Fault
from reportgen.fluids.model import Limits, Point
from reportgen.fluids.pairs import Elements, SeveralStates, in_words
from reportgen.fluids.real.melting import MeltingLine

__all__ = ["LOWEST_PRESSURE", "Guard", "limits_of"]

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

#: Rounding granted at the ends of the range.
_ROUNDING = 1e-9
#: Least pressure [Pa] and density [kg/m3] taken: far below any triple point, and far above where numbers underflow.
LOWEST_PRESSURE = 1e-12
_LOWEST_DENSITY = 1e-18
#: What the lower end of most ranges is, in the words of the data files; others have no ``Limits.triple_point``.
TRIPLE_POINT = "triple point"


def limits_of(data: Mapping[str, Any]) -> Limits:
    """Limits from a data file."""
    limits, critical, lowest = data["limits"], data["critical_point"], data["lower_end"]
    remarks = []
    published = limits["published_maximum_temperature"]
    extrapolated = published is not None and published < limits["maximum_temperature"]
    if extrapolated:
        remarks.append(
            f"The publication claims validity up to {published:g} K; from there to "
            f"{limits['maximum_temperature']:g} K the equation is extrapolated."
        )
    if published is None:
        remarks.append("What range the publication itself claims is not recorded here.")
    if lowest["is"] != TRIPLE_POINT:
        remarks.append(f"The lowest temperature is the {lowest['is']}, not the triple point.")
    if data["remark"]:
        remarks.append(data["remark"])
    if data["melting_line"]:
        remarks.append("Bounded by the melting line: states under it are refused.")
    else:
        remarks.append("No melting line is carried: that a compressed liquid is not solid is not checked.")
    if data["pseudo_pure"]:
        remarks.append(
            "Pseudo-pure: bubble and dew lines differ, and there is no state between them. The critical point given is "
            "the point of the highest temperature of the two-phase region."
        )
    highest, highest_pressure = float(limits["maximum_temperature"]), float(limits["maximum_pressure"])
    for name, recorded in (("temperature", highest), ("pressure", highest_pressure)):
        if recorded < critical[name]:
            remarks.append(
                f"The highest {name} recorded, {in_words(name, recorded)}, lies under the critical {name}; that one "
                "bounds the range."
            )
    return Limits(
        minimum_temperature=float(limits["minimum_temperature"]),
        maximum_temperature=max(highest, float(critical["temperature"])),
        maximum_pressure=max(highest_pressure, float(critical["pressure"])),
        triple_point=Point(lowest["temperature"], lowest["pressure"]) if lowest["is"] == TRIPLE_POINT else None,
        critical_point=Point(critical["temperature"], critical["pressure"], critical["density"]),
        published_maximum_temperature=float(published) if extrapolated else None,
        remarks=tuple(remarks),
    )


def _value(name: str, value: float) -> str:
    return f"{name.replace('_', ' ')} {in_words(name, value)}"


def _both(pressure: float, temperature: float) -> str:
    return f"{in_words('pressure', pressure)} and {in_words('temperature', temperature)}"


def _sentence(name: str, value: float) -> str:
    text = _value(name, value)
    return text[0].upper() + text[1:]


def _apart(values: list[float]) -> bool:
    """Whether values can be told from each other by the digits of a message."""
    ordered = sorted(values)
    return all(high > low * (1 + 1e-7) for low, high in pairwise(ordered))


class Guard:
    """Checks batches against the limits of one fluid and words the faults.

    Parameters
    ----------
    title : name of the fluid for messages.
    limits : its limits.
    melting_line : the ``melting_line`` table of its data file, or None.
    """

    def __init__(self, title: str, limits: Limits, melting_line: Mapping[str, Any] | None) -> None:
        self._title = title
        self._limits = limits
        self._lowest = TRIPLE_POINT if limits.triple_point else "lower end of its range"
        self.melting_line = MeltingLine(melting_line) if melting_line else None

    @property
    def _no_saturation(self) -> str:
        return "no liquid there, so no saturation" if self._limits.triple_point else "no saturation is carried there"

    @property
    def _between(self) -> str:
        line = f"between the bubble and the dew line of {self._title}, a pseudo-pure fluid"
        return f"{line} whose equation gives no state there"

    def _reject(self, where: BoolArray, elements: Elements, name: str, values: FloatArray, limit: str) -> None:
        elements.reject(
            where,
            lambda i: Fault(
                f"{_sentence(name, values[i])} is {limit} for {self._title}.", found=_value(name, values[i])
            ),
        )

    def infinite(self, where: BoolArray, elements: Elements, name: str, values: FloatArray) -> None:
        """Refuse the elements of a property [SI] that are infinite."""
        self._reject(where, elements, name, values, "not a finite number")

    def temperature(self, temperature: FloatArray, elements: Elements) -> None:
        """Refuse temperatures [K] outside the range."""
        low, high = self._limits.minimum_temperature, self._limits.maximum_temperature
        inside = (temperature >= low * (1 - _ROUNDING)) & (temperature <= high * (1 + _ROUNDING))
        if inside.all():
            return
        cold = temperature < low * (1 - _ROUNDING)
        self._reject(cold, elements, "temperature", temperature, f"below the minimum, {low:g} K ({self._lowest}),")
        self._reject(~cold & ~inside, elements, "temperature", temperature, f"above the maximum, {high:g} K,")

    def pressure(self, pressure: FloatArray, elements: Elements) -> None:
        """Refuse pressures [Pa] not positive or above the maximum."""
        high = self._limits.maximum_pressure
        inside = (pressure >= LOWEST_PRESSURE) & (pressure <= high * (1 + _ROUNDING))
        if inside.all():
            return
        self._reject(pressure <= 0, elements, "pressure", pressure, "not above zero (absolute pressure is needed)")
        low = pressure < LOWEST_PRESSURE
        self._reject(low, elements, "pressure", pressure, f"below {LOWEST_PRESSURE:g} Pa, the lowest computed,")
        self._reject(
            ~inside & ~low, elements, "pressure", pressure, f"above the maximum, {in_words('pressure', high)},"
        )

    def density(self, density: FloatArray, elements: Elements, highest: float) -> None:
        """Refuse densities [kg/m3] not positive, or beyond any state within the limits."""
        self._reject(~(density > 0), elements, "density", density, "not above zero")
        low = density < _LOWEST_DENSITY
        self._reject(low, elements, "density", density, f"below {_LOWEST_DENSITY:g} kg/m3, the lowest computed,")
        self._reject(
            density > highest,
            elements,
            "density",
            density,
            f"above {highest:.5g} kg/m3, the highest within the limits,",
        )

    def quality(self, quality: FloatArray, elements: Elements, pseudo_pure: bool) -> None:
        """Refuse qualities [1] outside 0 to 1, and for pseudo-pure fluids any but 0 and 1."""
        self._reject(~((quality >= 0) & (quality <= 1)), elements, "quality", quality, "not between 0 and 1")
        if pseudo_pure:
            elements.reject(
                (quality > 0) & (quality < 1),
                lambda i: Fault(
                    f"Quality {quality[i]:g} lies {self._between}.",
                    found=_value("quality", quality[i]),
                    expected="quality 0 (bubble line) or 1 (dew line)",
                ),
            )

    def distance(self, distance: FloatArray, elements: Elements, name: str) -> None:
        """Refuse negative superheat or subcooling [K]."""
        self._reject(
            distance < 0, elements, name, distance, "negative, which names a state on the other side of saturation,"
        )

    def saturation_pressure(self, pressure: FloatArray, elements: Elements, triple: float, top: float) -> None:
        """Refuse pressures [Pa] without liquid and vapour in equilibrium."""
        self._reject(
            pressure < triple * (1 - _ROUNDING),
            elements,
            "pressure",
            pressure,
            f"below that of the {self._lowest}, {in_words('pressure', triple, 6)}: {self._no_saturation}",
        )
        self._reject(
            pressure > top * (1 + _ROUNDING),
            elements,
            "pressure",
            pressure,
            f"above the critical pressure, {in_words('pressure', top)}: no saturation",
        )

    def saturation_temperature(self, temperature: FloatArray, elements: Elements, top: float) -> None:
        """Refuse temperatures [K] without liquid and vapour in equilibrium."""
        low = self._limits.minimum_temperature
        self._reject(
            temperature < low * (1 - _ROUNDING),
            elements,
            "temperature",
            temperature,
            f"below the {self._lowest}, {low:g} K: {self._no_saturation}",
        )
        self._reject(
            temperature > top * (1 + _ROUNDING),
            elements,
            "temperature",
            temperature,
            f"above the critical temperature, {in_words('temperature', top)}: no saturation",
        )

    def melting(self, pressure: FloatArray, temperature: FloatArray, elements: Elements) -> None:
        """Refuse states under the melting line: p [Pa] above the melting pressure at T [K]."""
        if self.melting_line is None:
            return
        with np.errstate(invalid="ignore"):
            candidates = (temperature <= self.melting_line.maximum_temperature) & (pressure > self._floor)
        if not candidates.any():
            return
        at = np.flatnonzero(candidates)
        melting = np.full_like(pressure, np.inf)
        melting[at] = self.melting_line.pressure(np.maximum(temperature[at], self.melting_line.minimum_temperature))
        elements.reject(
            pressure > melting * (1 + 1e-6),
            lambda i: Fault(
                f"{self._title} is solid at {_both(pressure[i], temperature[i])}: "
                f"the melting pressure at this temperature is {in_words('pressure', melting[i], 6)}.",
                found=f"{_value('pressure', pressure[i])}, {_value('temperature', temperature[i])}",
                expected="a state on the fluid side of the melting line",
            ),
        )

    @property
    def _floor(self) -> float:
        """Pressure [Pa] below which nothing is under the melting line at allowed temperatures: that of the triple
        point.
        """
        triple = self._limits.triple_point
        return 0.0 if triple is None else triple.pressure

    def on_saturation(self, pressure: float, temperature: float, roots: tuple[Point, ...]) -> Fault:
        """Pressure [Pa] and temperature [K] do not fix a state: those of the liquid and the vapour in ``roots``, none
        where the fluid is pseudo-pure.
        """
        if not roots:
            return Fault(
                f"{_both(pressure, temperature)} lie on one of the lines or {self._between}.",
                hint="On a line, give the quality: 0 (bubble) or 1 (dew).",
            )
        return SeveralStates(
            f"{_both(pressure, temperature)} are a point of the saturation line of {self._title}: "
            "they do not tell liquid from vapour.",
            hint="Give the quality with one of them.",
            roots=roots,
        )

    def between_lines(self, first: str, first_value: float, second: str, second_value: float) -> Fault:
        """A pseudo-pure fluid between its lines, from two properties [SI]."""
        return Fault(f"{_sentence(first, first_value)} and {_value(second, second_value)} lie {self._between}.")

    def several(
        self,
        first: str,
        first_value: float,
        second: str,
        second_value: float,
        roots: tuple[Point, ...],
        qualities: tuple[float, ...],
        thin: int,
        between: bool,
    ) -> SeveralStates:
        """Two properties [SI] that several states share: those in ``roots``, with the quality [1] of mixtures of
        phases, else NaN; ``thin`` gases [1] whose density is lost in rounding; one between the lines of a pseudo-pure
        fluid, if ``between``.
        """
        told = [
            {"pressure": root.pressure, "temperature": root.temperature, "density": root.density or 0.0}
            | ({"quality": quality} if 0 < quality < 1 else {})
            for root, quality in zip(roots, qualities, strict=True)
        ]
        single_phase = not any("quality" in root for root in told)
        listed = "; ".join(
            ", ".join(("quality " if name == "quality" else "") + in_words(name, value) for name, value in root.items())
            for root in told
        )
        if thin:
            listed += "; and a gas so thin that its pressure is not told"
        if between:
            listed += f"; and one {self._between}"
        other = {"temperature": "pressure", "pressure": "temperature"}.get(first)
        if other is not None and single_phase and _apart([root[other] for root in told]):
            choices = " or ".join(in_words(other, root[other]) for root in told)
            hint = f"Give the {first} with the {other} of the one that is meant: {choices}."
        else:
            hint = "Give temperature and density of the one that is meant."
        return SeveralStates(
            f"{self._title} has {len(roots) + thin + int(between)} states at {_value(first, first_value)} and "
            f"{_value(second, second_value)}: {listed}.",
            hint=hint,
            roots=roots,
        )

    def none(self, first: str, first_value: float, second: str, second_value: float) -> Fault:
        """Two properties [SI] that no state within the limits was found to have."""
        limits = self._limits
        return Fault(
            f"No state of {self._title} within its limits was found at {_value(first, first_value)} and "
            f"{_value(second, second_value)}.",
            expected=f"a liquid or gas of {limits.minimum_temperature:g} K to {limits.maximum_temperature:g} K, up to "
            f"{in_words('pressure', limits.maximum_pressure)}",
        )

    def beyond(
        self, first: str, first_value: float, second: str, second_value: float, least: float, greatest: float
    ) -> Fault:
        """Two properties [SI], the second outside what it can be within the limits beside the first."""
        low, high = in_words(second, least), in_words(second, greatest)
        return Fault(
            f"No state of {self._title} within its limits was found at {_value(first, first_value)} and "
            f"{_value(second, second_value)}: there it lies between {low} and {high}.",
            found=_value(second, second_value),
            expected=f"{low} to {high}",
        )

    def vague(self, first: str, first_value: float, second: str, second_value: float) -> Fault:
        """Temperature and an energy [SI] of a gas so thin that they do not tell its pressure."""
        return Fault(
            f"{_sentence(first, first_value)} and {_value(second, second_value)} do not tell the pressure of "
            f"{self._title}: in a gas as thin as this the energy depends on temperature alone.",
            hint="Give the pressure with one of them.",
        )

    def too_cold(self, pressure: float, name: str, value: float) -> Fault:
        """Pressure [Pa] and another property [SI] of a state below the lowest temperature."""
        return Fault(
            f"{self._title} at {in_words('pressure', pressure)} with {_value(name, value)} would be below the minimum "
            f"temperature, {self._limits.minimum_temperature:g} K ({self._lowest}), or solid.",
            found=_value(name, value),
        )

    def too_hot(self, pressure: float, name: str, value: float) -> Fault:
        """Pressure [Pa] and another property [SI] of a state above the highest temperature."""
        return Fault(
            f"{self._title} at {in_words('pressure', pressure)} with {_value(name, value)} would be above the maximum "
            f"temperature, {self._limits.maximum_temperature:g} K.",
            found=_value(name, value),
        )

    def not_found(self, first: str, first_value: float, second: str, second_value: float) -> Fault:
        """Two properties [SI] for which the search did not end in a state."""
        return Fault(
            f"No state of {self._title} was found at {_value(first, first_value)} and {_value(second, second_value)}.",
            hint="If these values lie within the limits of the fluid, this is a fault of the program.",
        )

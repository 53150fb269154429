"""From the text of a calculation file to a quantity in SI.

The form is ``value unit``, ``value unit ± uncertainty unit``, ``value ± uncertainty unit`` or
``value unit ± percentage %``; ``+/-`` stands for ``±``. A table gives the same text as ``value`` and more about it.

What the number after ± means depends on the distribution:

    normal        expanded uncertainty U at the coverage factor k,  u = U/k
    uniform       half-width a,  u = a/√3
    triangular    half-width a,  u = a/√6
    u-shaped      half-width a,  u = a/√2

(JCGM 100:2008, 4.3.7 to 4.3.9 and F.2.2.1; DOI 10.59161/JCGM100-2008E).
A percentage is one of the value as written: of the gauge value for a gauge pressure; after a value itself written in %
it means percentage points.

A gauge pressure is read as absolute by adding the atmosphere. The uncertainty of the atmosphere is not part of the
result; ``Quantity.gauge`` tells the caller that the reading moves with the atmosphere one to one.
"""

from __future__ import annotations

import math
import re
from collections.abc import Collection, Mapping
from dataclasses import dataclass

from reportgen.errors import Fault, InputError
from reportgen.names import DIMENSIONS
from reportgen.quantities.details import HALF_WIDTHS, LONGEST_TEXT, Details, Distribution, Evaluation, read_details
from reportgen.quantities.units import AMBIGUOUS, Unit, conversion, dimensions_of, find_unit, units_of, usual_units
from reportgen.quantities.wording import Refused, example, nearest, quoted, short, words

__all__ = ["Quantity", "parse"]

_ABSOLUTE = ("temperature", "pressure", "density", "specific_volume", "molar_mass", "mass", "volume", "area")
_NEVER_NEGATIVE = ("mass_flow", "molar_flow", "volume_flow", "velocity")
_SHARES = ("ratio", "efficiency")
#: An efficiency above 1 that may have been meant in %; machines do not have less.
_LEAST_PERCENT = 5.0
#: The dimension of an uncertainty, where it is not that of the value.
_DIFFERENCE_OF = {"temperature": "temperature_difference", "pressure": "pressure_difference"}

_NUMBER = re.compile(
    r"(?P<mantissa>[+\-−]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+\-−]?[0-9]{1,3})?)"
    r"(?:\s*[×x]\s*10(?:\^(?P<plain>[+\-−]?[0-9]{1,3})|(?P<raised>[⁺⁻]?[⁰¹²³⁴⁵⁶⁷⁸⁹]{1,3})))?"
)
_GROUP_SPACE = re.compile("(?<=[0-9])[\u2009\u202f\u00a0](?=[0-9]{3}(?![0-9]))")
#: A number in groups of three set apart by the space bar: refused, since a slip of the finger looks the same.
_TYPED_GROUPS = re.compile("[+\\-−]?[0-9]{1,3}(?: [0-9]{3})+(?![0-9])")
_RAISED = str.maketrans("⁺⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "+-0123456789")
_SHARED_BRACKET = re.compile(r"^\(([^()]*±[^()]*)\)(.*)$", re.DOTALL)


@dataclass(frozen=True)
class Quantity:
    """One quantity as written and in SI.

    ``value``, ``standard_uncertainty`` and ``expanded_uncertainty`` are in ``unit``, the SI unit of ``dimension``
    (a key of ``names.DIMENSIONS``): temperatures in K, pressures absolute in Pa, normal and standard volume flows as
    molar flows in mol/s. The expanded uncertainty is the standard one times ``coverage_factor`` for every
    distribution. Both are None where the file states no uncertainty.
    """

    text: str
    value: float
    dimension: str
    unit: str
    standard_uncertainty: float | None = None
    expanded_uncertainty: float | None = None
    coverage_factor: float = 2.0
    distribution: Distribution = "normal"
    evaluation: Evaluation = "B"
    degrees_of_freedom: float = math.inf
    source: str | None = None
    supplied_by: str | None = None
    status: str | None = None
    written_unit: str = ""
    gauge: bool = False


@dataclass(frozen=True)
class _Reading:
    """What one text says, before the distribution is known. ``spread`` is the number after ± in SI, or None."""

    value: float
    spread: float | None
    dimension: str
    written_unit: str
    gauge: bool


def parse(
    text_or_table: object,
    dimension: str | Collection[str],
    *,
    atmosphere: float | None,
    coverage_factor: float = 2.0,
) -> Quantity:
    """Read one quantity of a calculation file.

    ``text_or_table`` is the text, a bare number (ratios and efficiencies alone), or a table with the text or number
    as ``value`` and any of ``source``, ``distribution``, ``evaluation``, ``degrees_of_freedom``, ``coverage_factor``,
    ``supplied_by``, ``status``. ``dimension`` is one key of ``names.DIMENSIONS`` or several that are allowed; the
    result says which it was. ``atmosphere`` [Pa] is added to gauge pressures; None refuses them.
    ``coverage_factor`` [1] is the file's k, used where the table gives none of its own.

    Raises InputError with one fault for each mistake; the faults carry no place.
    """
    allowed = (dimension,) if isinstance(dimension, str) else tuple(dimension)
    faults: list[Fault] = []
    details = Details(coverage_factor=coverage_factor)
    content = text_or_table
    if isinstance(text_or_table, Mapping):
        details, faults = read_details(text_or_table, coverage_factor)
        content = text_or_table.get("value")
        if "value" not in text_or_table:
            raise InputError([Fault("The table has no value.", expected='value = "..."'), *faults])
    reading: _Reading | None = None
    try:
        reading = _read(content, allowed, atmosphere)
    except Refused as refused:
        faults.insert(0, refused.fault)
    if reading is not None and reading.spread is None and details.speaks_of_spread:
        faults.append(
            Fault(
                f"The table gives {details.speaks_of_spread}, but the value has no uncertainty for it to describe.",
                expected='an uncertainty in the value, such as "40 ± 0.2 bar"',
            )
        )
    if faults or reading is None:
        raise InputError(faults)
    standard = None
    if reading.spread is not None:
        standard = reading.spread / HALF_WIDTHS.get(details.distribution, details.coverage_factor)
    return Quantity(
        text=content if isinstance(content, str) else repr(content),
        value=reading.value,
        dimension=reading.dimension,
        unit=DIMENSIONS[reading.dimension],
        standard_uncertainty=standard,
        expanded_uncertainty=None if standard is None else standard * details.coverage_factor,
        coverage_factor=details.coverage_factor,
        distribution=details.distribution,
        evaluation=details.evaluation,
        degrees_of_freedom=details.degrees_of_freedom,
        source=details.source,
        supplied_by=details.supplied_by,
        status=details.status,
        written_unit=reading.written_unit,
        gauge=reading.gauge,
    )


def _read(content: object, allowed: tuple[str, ...], atmosphere: float | None) -> _Reading:
    """What a text or a bare number says; Refused when it cannot be read."""
    shares = [dimension for dimension in allowed if dimension in _SHARES]
    found = quoted(content)
    if isinstance(content, bool) or not isinstance(content, str | int | float):
        raise Refused("A quantity is a text with its unit.", found, example(allowed))
    if not isinstance(content, str):
        if not shares:
            raise Refused("The unit is missing.", found, example(allowed))
        value = _finite(float(content) if abs(content) < 1e300 else math.inf, found)
        return _Reading(_within(value, shares[0], found), None, shares[0], "", False)
    if len(content) > LONGEST_TEXT:
        raise Refused("The text is too long for a quantity.", f"{len(content)} characters", f"at most {LONGEST_TEXT}")
    text = _GROUP_SPACE.sub("", content.replace("+/-", "±")).strip()
    bracketed = _SHARED_BRACKET.match(text)
    if bracketed:
        text = bracketed[1] + bracketed[2]
    value_text, sign, spread_text = (part.strip() for part in text.partition("±"))
    if "±" in spread_text:
        raise Refused("There is more than one ± in the quantity.", found, example(allowed))
    number, value_unit = _split(value_text, content, allowed)
    spread_number, spread_unit = _split(spread_text, content, allowed) if sign else (None, "")
    if value_unit and sign and not spread_unit:
        raise Refused("The uncertainty has no unit.", found, f'"{value_text} ± {spread_text} {value_unit}"')
    if shares and not value_unit and spread_unit == "%" and not bracketed:
        raise Refused(
            "It is not clear what the percentage after ± refers to.",
            found,
            '"85 % ± 2 %" for percentage points, or the uncertainty as a plain number: "0.85 ± 0.02"',
        )
    is_shared = not value_unit and (spread_unit != "%" or bool(shares))
    dimension, unit = _identify(spread_unit if is_shared else value_unit, allowed, content)
    scale = conversion(unit.expression, dimension)
    value = scale.factor * number + scale.offset
    if unit.scale == "gauge":
        if atmosphere is None:
            raise Refused(
                "A gauge pressure needs the pressure of the surroundings.",
                found,
                "pressure in [surroundings], or an absolute pressure here",
            )
        value += atmosphere
    value = _within(_finite(value, found), dimension, found)
    spread = None
    if spread_number is not None:
        if is_shared:
            spread = scale.factor * spread_number
        elif spread_unit == "%" and dimension not in _SHARES:
            spread = _percentage(spread_number, scale.factor * number, dimension, content)
        else:
            spread = spread_number * _spread_factor(spread_unit, dimension, content)
        if _finite(spread, found) <= 0.0:
            raise Refused("An uncertainty is larger than zero.", found, "a number above zero after ±, or no ± at all")
    return _Reading(value, spread, dimension, unit.spelling, unit.scale == "gauge")


def _percentage(percent: float, value: float, dimension: str, content: str) -> float:
    """A percentage of the value as written, in SI units above the zero of its scale."""
    if dimension == "temperature":
        raise Refused(
            "A percentage of a temperature depends on the scale it is written in.",
            quoted(content),
            'the uncertainty in kelvin, such as "400 degC ± 1.5 K"',
        )
    return 0.01 * percent * abs(value)


def _split(text: str, content: str, allowed: tuple[str, ...]) -> tuple[float, str]:
    """The number a text begins with, and the rest as its unit."""
    match = _NUMBER.match(text)
    if match is None:
        raise Refused("There is no number where one is needed.", quoted(content), example(allowed))
    unit = text[match.end() :].strip()
    if re.match(r",[0-9]", unit):
        hint = "A comma that sets thousands apart is left out."
        raise Refused("The decimal sign is a point.", quoted(content), example(allowed), hint)
    if re.match(r"[0-9.,+\-−]", unit):
        groups = _TYPED_GROUPS.match(text)
        meant = groups and short(groups[0].replace(" ", "") + text[groups.end() :])
        apart = f'A space that sets thousands apart is left out: "{meant}".' if meant else None
        raise Refused("The number cannot be read.", quoted(content), example(allowed), apart)
    exponent = match["plain"] or (match["raised"] or "").translate(_RAISED)
    digits = match["mantissa"] + (f"e{exponent}" if exponent and "e" not in match["mantissa"].lower() else "")
    if exponent and digits == match["mantissa"]:
        raise Refused("The number has two exponents.", quoted(content), example(allowed))
    return _finite(float(digits.replace("−", "-")), quoted(content)), unit


def _identify(unit_text: str, allowed: tuple[str, ...], content: str) -> tuple[str, Unit]:
    """The allowed dimension and unit of a spelling."""
    for dimension in allowed:
        if unit := find_unit(unit_text, dimension):
            return dimension, unit
    if not unit_text:
        raise Refused("The unit is missing.", quoted(content), example(allowed))
    if unit_text in AMBIGUOUS:
        raise Refused(f'The unit "{unit_text}" is ambiguous.', quoted(content), AMBIGUOUS[unit_text])
    wanted = " or ".join(words(dimension) for dimension in allowed)
    found = dimensions_of(unit_text)
    if "temperature_difference" in allowed and "temperature" in found:
        raise Refused(
            f'"{short(unit_text)}" is a point on a temperature scale, but {wanted} is needed.',
            quoted(content),
            example(allowed),
        )
    if "molar_flow" in found and "volume_flow" in allowed:
        raise Refused(
            f'"{short(unit_text)}" counts an amount of substance, but {wanted} is needed.',
            quoted(content),
            example(allowed),
        )
    if found:
        raise Refused(
            f'"{short(unit_text)}" is a unit of {words(found[0])}, but {wanted} is needed.',
            quoted(content),
            example(allowed),
        )
    usual = [name for dimension in allowed for name in usual_units(dimension)]
    names = [name for dimension in allowed for name in units_of(dimension)]
    raise Refused(
        f'The unit "{short(unit_text)}" is not known for {wanted}.',
        quoted(content),
        ", ".join(usual),
        nearest(unit_text, names),
    )


def _spread_factor(unit_text: str, dimension: str, content: str) -> float:
    """SI value of one unit after ±. Where scales have a zero (°C, gauge), only the size of their step counts."""
    for candidate in (_DIFFERENCE_OF.get(dimension, dimension), dimension):
        if unit := find_unit(unit_text, candidate):
            return conversion(unit.expression, candidate).factor
    difference = _DIFFERENCE_OF.get(dimension, dimension)
    try:
        _identify(unit_text, (difference,), content)
    except Refused as refused:
        raise Refused(
            "After ±: " + str(refused), refused.fault.found, refused.fault.expected, refused.fault.hint
        ) from None
    raise AssertionError("a unit that is known was not found")  # pragma: no cover


# --- bounds -----------------------------------------------------------------------------------------------------------


def _finite(number: float, found: str) -> float:
    if not math.isfinite(number):
        raise Refused("The number is too large, or none at all.", found)
    return number


def _within(value: float, dimension: str, found: str) -> float:
    """The SI value again, when a quantity of that dimension can have it."""
    subject = words(dimension).capitalize()
    if dimension in _ABSOLUTE and not value > 0.0:
        zero = {"temperature": "absolute zero", "pressure": "a perfect vacuum"}.get(dimension, "zero")
        hint = "A reading below the atmosphere is a gauge pressure, as in bar(g)." if dimension == "pressure" else None
        raise Refused(f"{subject} must be above {zero}.", found, example((dimension,)), hint)
    if dimension in _NEVER_NEGATIVE and value < 0.0:
        raise Refused(f"{subject} cannot be negative.", found, hint="The ports give the direction.")
    if dimension == "efficiency" and not 0.0 < value <= 1.0:
        hint = f'Did you mean "{value:g} %"?' if _LEAST_PERCENT <= value <= 100.0 and "%" not in found else None
        raise Refused("An efficiency is above 0 and at most 1.", found, '"0.85" or "85 %"', hint)
    return value

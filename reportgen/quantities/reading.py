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

import difflib
import math
import re
from collections.abc import Collection, Mapping
from dataclasses import dataclass
from typing import Any, Literal

from reportgen.errors import Fault, InputError
from reportgen.names import DIMENSIONS
from reportgen.quantities.units import AMBIGUOUS, Unit, conversion, dimensions_of, find_unit, units_of, usual_units

__all__ = ["Distribution", "Evaluation", "Quantity", "parse"]

Distribution = Literal["normal", "uniform", "triangular", "u-shaped"]
Evaluation = Literal["A", "B"]

LONGEST_TEXT = 200

#: Half-width over standard uncertainty.
_HALF_WIDTHS = {"uniform": math.sqrt(3.0), "triangular": math.sqrt(6.0), "u-shaped": math.sqrt(2.0)}
_TABLE_KEYS = (
    "value",
    "source",
    "distribution",
    "evaluation",
    "degrees_of_freedom",
    "coverage_factor",
    "supplied_by",
    "status",
)
_ABSOLUTE = ("temperature", "pressure", "density", "specific_volume", "molar_mass", "mass", "volume", "area")
_NEVER_NEGATIVE = ("mass_flow", "molar_flow", "volume_flow", "velocity")
_SHARES = ("ratio", "efficiency")
#: The dimension of an uncertainty, where it is not that of the value.
_DIFFERENCE_OF = {"temperature": "temperature_difference", "pressure": "pressure_difference"}

_NUMBER = re.compile(
    r"(?P<mantissa>[+\-−]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+\-−]?[0-9]{1,3})?)"
    r"(?:\s*[×x]\s*10(?:\^(?P<plain>[+\-−]?[0-9]{1,3})|(?P<raised>[⁺⁻]?[⁰¹²³⁴⁵⁶⁷⁸⁹]{1,3})))?"
)
_GROUP_SPACE = re.compile("(?<=[0-9])[\u2009\u202f\u00a0](?=[0-9]{3}(?![0-9]))")
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


class _Refused(Exception):
    """Leaves the reading of one text with its fault."""

    def __init__(self, message: str, found: str | None = None, expected: str | None = None, hint: str | None = None):
        super().__init__(message)
        self.fault = Fault(message, found=found, expected=expected, hint=hint)


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
    details = _Details(coverage_factor=coverage_factor)
    content = text_or_table
    if isinstance(text_or_table, Mapping):
        details, faults = _read_details(text_or_table, coverage_factor)
        content = text_or_table.get("value")
        if "value" not in text_or_table:
            raise InputError([Fault("The table has no value.", expected='value = "..."'), *faults])
    reading: _Reading | None = None
    try:
        reading = _read(content, allowed, atmosphere)
    except _Refused as refused:
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
        standard = reading.spread / _HALF_WIDTHS.get(details.distribution, details.coverage_factor)
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


# --- the table ------------------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class _Details:
    """What a table says besides its value. ``speaks_of_spread`` names the first key that describes an uncertainty."""

    coverage_factor: float
    distribution: Distribution = "normal"
    evaluation: Evaluation = "B"
    degrees_of_freedom: float = math.inf
    source: str | None = None
    supplied_by: str | None = None
    status: str | None = None
    speaks_of_spread: str | None = None


def _read_details(table: Mapping[Any, Any], coverage_factor: float) -> tuple[_Details, list[Fault]]:
    faults: list[Fault] = []

    def refuse(key: str, message: str, expected: str) -> None:
        faults.append(Fault(message, found=_quoted(table[key]), expected=expected))

    for key in table:
        if key not in _TABLE_KEYS:
            faults.append(
                Fault(
                    f'A quantity has no "{_short(key)}".',
                    expected=", ".join(_TABLE_KEYS),
                    hint=_nearest(key, _TABLE_KEYS),
                )
            )
    found: dict[str, Any] = {}
    for key, choices in (("distribution", ("normal", *_HALF_WIDTHS)), ("evaluation", ("A", "B"))):
        if key in table:
            if table[key] in choices:
                found[key] = table[key]
            else:
                refuse(key, f"This {key} is not known.", " or ".join(f'"{choice}"' for choice in choices))
    for key in ("source", "supplied_by", "status"):
        if key in table:
            if isinstance(table[key], str) and 0 < len(table[key].strip()) <= LONGEST_TEXT:
                found[key] = table[key].strip()
            else:
                refuse(key, f"The {key} of a quantity is a short text.", f"1 to {LONGEST_TEXT} characters")
    bounds = (
        ("degrees_of_freedom", 1.0, 1e6, "a number from 1 to 1e6, or left out when it is large"),
        ("coverage_factor", 0.1, 10.0, "a number from 0.1 to 10"),
    )
    for key, least, most, expected in bounds:
        if key in table:
            number = table[key]
            if isinstance(number, int | float) and not isinstance(number, bool) and least <= number <= most:
                found[key] = float(number)
            else:
                refuse(key, f"The {key} does not fit.", expected)
    if "coverage_factor" in found and found.get("distribution", "normal") != "normal":
        refuse(
            "coverage_factor",
            f"A {found['distribution']} distribution is given by its half-width, which has no coverage factor.",
            "coverage_factor or distribution, not both",
        )
    described = [key for key in ("distribution", "evaluation", "degrees_of_freedom", "coverage_factor") if key in table]
    found.setdefault("coverage_factor", coverage_factor)
    return _Details(speaks_of_spread=described[0] if described else None, **found), faults


# --- the text -------------------------------------------------------------------------------------------------------


def _read(content: object, allowed: tuple[str, ...], atmosphere: float | None) -> _Reading:
    shares = [dimension for dimension in allowed if dimension in _SHARES]
    if isinstance(content, bool) or not isinstance(content, str | int | float):
        raise _Refused("A quantity is a text with its unit.", _quoted(content), _example(allowed))
    if not isinstance(content, str):
        if not shares:
            raise _Refused("The unit is missing.", _quoted(content), _example(allowed))
        value = _finite(float(content) if abs(content) < 1e300 else math.inf, _quoted(content))
        return _Reading(_within(value, shares[0], _quoted(content)), None, shares[0], "", False)
    if len(content) > LONGEST_TEXT:
        raise _Refused("The text is too long for a quantity.", f"{len(content)} characters", f"at most {LONGEST_TEXT}")
    text = _GROUP_SPACE.sub("", content.replace("+/-", "±")).strip()
    bracketed = _SHARED_BRACKET.match(text)
    if bracketed:
        text = bracketed[1] + bracketed[2]
    value_text, sign, spread_text = (part.strip() for part in text.partition("±"))
    if "±" in spread_text:
        raise _Refused("There is more than one ± in the quantity.", _quoted(content), _example(allowed))
    number, value_unit = _split(value_text, content, allowed)
    spread_number, spread_unit = _split(spread_text, content, allowed) if sign else (None, "")
    if value_unit and sign and not spread_unit:
        raise _Refused("The uncertainty has no unit.", _quoted(content), f'"{value_text} ± {spread_text} {value_unit}"')
    if shares and not value_unit and spread_unit == "%" and not bracketed:
        raise _Refused(
            "It is not clear what the percentage after ± refers to.",
            _quoted(content),
            '"85 % ± 2 %" for percentage points, or the uncertainty as a plain number: "0.85 ± 0.02"',
        )
    is_shared = not value_unit and (spread_unit != "%" or bool(shares))
    dimension, unit = _identify(spread_unit if is_shared else value_unit, allowed, content)
    scale = conversion(unit.expression, dimension)
    value = scale.factor * number + scale.offset
    if unit.scale == "gauge":
        if atmosphere is None:
            raise _Refused(
                "A gauge pressure needs the pressure of the surroundings.",
                _quoted(content),
                "pressure in [surroundings], or an absolute pressure here",
            )
        value += atmosphere
    value = _within(_finite(value, _quoted(content)), dimension, _quoted(content))
    spread = None
    if spread_number is not None:
        if is_shared:
            spread = scale.factor * spread_number
        elif spread_unit == "%" and dimension not in _SHARES:
            if dimension == "temperature":
                raise _Refused(
                    "A percentage of a temperature depends on the scale it is written in.",
                    _quoted(content),
                    f'the uncertainty in kelvin: "{value_text} ± 1.5 K"',
                )
            spread = 0.01 * spread_number * scale.factor * abs(number)
        else:
            spread = spread_number * _spread_factor(spread_unit, dimension, content)
        if _finite(spread, _quoted(content)) <= 0.0:
            raise _Refused(
                "An uncertainty is larger than zero.", _quoted(content), "a number above zero after ±, or no ± at all"
            )
    return _Reading(value, spread, dimension, unit.spelling, unit.scale == "gauge")


def _split(text: str, content: str, allowed: tuple[str, ...]) -> tuple[float, str]:
    """The number a text begins with, and the rest as its unit."""
    match = _NUMBER.match(text)
    if match is None:
        raise _Refused("There is no number where one is needed.", _quoted(content), _example(allowed))
    unit = text[match.end() :].strip()
    if re.match(r",[0-9]", unit):
        raise _Refused("The decimal sign is a point.", _quoted(content), _example(allowed))
    if re.match(r"[0-9.,+\-−]", unit):
        raise _Refused("The number cannot be read.", _quoted(content), _example(allowed))
    exponent = match["plain"] or (match["raised"] or "").translate(_RAISED)
    digits = match["mantissa"] + (f"e{exponent}" if exponent and "e" not in match["mantissa"].lower() else "")
    if exponent and digits == match["mantissa"]:
        raise _Refused("The number has two exponents.", _quoted(content), _example(allowed))
    return _finite(float(digits.replace("−", "-")), _quoted(content)), unit


def _identify(unit_text: str, allowed: tuple[str, ...], content: str) -> tuple[str, Unit]:
    """The allowed dimension and unit of a spelling."""
    for dimension in allowed:
        if unit := find_unit(unit_text, dimension):
            return dimension, unit
    if not unit_text:
        raise _Refused("The unit is missing.", _quoted(content), _example(allowed))
    if unit_text in AMBIGUOUS:
        raise _Refused(f'The unit "{unit_text}" is ambiguous.', _quoted(content), AMBIGUOUS[unit_text])
    wanted = " or ".join(_words(dimension) for dimension in allowed)
    found = dimensions_of(unit_text)
    if "temperature_difference" in allowed and "temperature" in found:
        raise _Refused(
            f'"{_short(unit_text)}" is a point on a temperature scale, but {wanted} is needed.',
            _quoted(content),
            _example(allowed),
        )
    if "molar_flow" in found and "volume_flow" in allowed:
        raise _Refused(
            f'"{_short(unit_text)}" counts an amount of substance, but {wanted} is needed.',
            _quoted(content),
            _example(allowed),
        )
    if found:
        raise _Refused(
            f'"{_short(unit_text)}" is a unit of {_words(found[0])}, but {wanted} is needed.',
            _quoted(content),
            _example(allowed),
        )
    usual = [name for dimension in allowed for name in usual_units(dimension)]
    names = [name for dimension in allowed for name in units_of(dimension)]
    raise _Refused(
        f'The unit "{_short(unit_text)}" is not known for {wanted}.',
        _quoted(content),
        ", ".join(usual),
        _nearest(unit_text, names),
    )


def _spread_factor(unit_text: str, dimension: str, content: str) -> float:
    """SI value of one unit after ±. Where scales have a zero (°C, gauge), only the size of their step counts."""
    for candidate in (_DIFFERENCE_OF.get(dimension, dimension), dimension):
        if unit := find_unit(unit_text, candidate):
            return conversion(unit.expression, candidate).factor
    difference = _DIFFERENCE_OF.get(dimension, dimension)
    try:
        _identify(unit_text, (difference,), content)
    except _Refused as refused:
        raise _Refused(
            "After ±: " + str(refused), refused.fault.found, refused.fault.expected, refused.fault.hint
        ) from None
    raise AssertionError("a unit that is known was not found")  # pragma: no cover


# --- bounds and wording ---------------------------------------------------------------------------------------------


def _finite(number: float, found: str) -> float:
    if not math.isfinite(number):
        raise _Refused("The number is too large, or none at all.", found)
    return number


def _within(value: float, dimension: str, found: str) -> float:
    """The SI value again, when a quantity of that dimension can have it."""
    words = _words(dimension)
    if dimension in _ABSOLUTE and not value > 0.0:
        zero = {"temperature": "absolute zero", "pressure": "a perfect vacuum"}.get(dimension, "zero")
        raise _Refused(f"{words.capitalize()} must be above {zero}.", found)
    if dimension in _NEVER_NEGATIVE and value < 0.0:
        raise _Refused(f"{words.capitalize()} cannot be negative.", found, hint="The ports give the direction.")
    if dimension == "efficiency" and not 0.0 < value <= 1.0:
        hint = f'Did you mean "{value:g} %"?' if 1.0 < value <= 100.0 else None
        raise _Refused("An efficiency is above 0 and at most 1.", found, '"0.85" or "85 %"', hint)
    return value


_ARTICLES = {"area": "an area", "efficiency": "an efficiency", "energy": "an energy", "entropy": "an entropy"}
_EXAMPLES = {
    "temperature": "400 degC",
    "temperature_difference": "10 K",
    "pressure": "7.2 bar(g)",
    "pressure_difference": "0.3 bar",
    "efficiency": "85 %",
    "ratio": "3.2",
}


def _words(dimension: str) -> str:
    return _ARTICLES.get(dimension, ("an " if dimension == "entropy_flow" else "a ") + dimension.replace("_", " "))


def _example(allowed: tuple[str, ...]) -> str:
    texts = [_EXAMPLES.get(dimension, f"1.5 {usual_units(dimension)[0]}") for dimension in allowed]
    return " or ".join(f'"{text}"' for text in texts)


def _short(text: object) -> str:
    plain = str(text)
    return plain if len(plain) <= 40 else plain[:40] + "…"


def _quoted(content: object) -> str:
    return f'"{_short(content)}"' if isinstance(content, str) else _short(repr(content))


def _nearest(text: object, choices: Collection[str]) -> str | None:
    """A hint that names the closest choice, first without regard to case."""
    wanted = str(text)[:LONGEST_TEXT]
    same = [choice for choice in choices if choice.lower() == wanted.lower()]
    close = same or difflib.get_close_matches(wanted, list(choices), n=1, cutoff=0.6)
    return f'Nearest: "{close[0]}".' if close else None

"""From SI to what a reader sees: the unit of the trade, and as many digits as the uncertainty bears.

Digits: with an expanded uncertainty, two significant digits of it and the value to the same decimal place
(JCGM 100:2008, 7.2.6); without one, six significant digits, zeros at the end left out. A value is never shown with
more than twelve significant digits. Each number is rounded once, half to even on its shortest decimal form.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from decimal import ROUND_HALF_EVEN, Context, Decimal
from typing import Any, Literal, TypeVar

from reportgen.quantities.units import conversion

__all__ = ["Display", "Shown"]

_Value = TypeVar("_Value", float, Any)

_DIGITS = 6
_MOST_DIGITS = 12
_LEAST_PLAIN, _MOST_PLAIN = -4, 7  # plain decimals from 1e-4 to below 1e7
_THIN_SPACE = "\u2009"
_MISSING = "—"
_RAISED = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_EXACT = Context(prec=400)


@dataclass(frozen=True)
class Shown:
    """A number as the reader sees it.

    ``number`` and ``unit`` are text, ``uncertainty`` the expanded uncertainty in the same unit or None; ``latex`` is
    number and unit for a formula, where a temperature stands in K or °R.
    """

    number: str
    unit: str
    uncertainty: str | None
    latex: str

    @property
    def text(self) -> str:
        """The whole on one line: ``1.444 ± 0.029 kg/s``."""
        spread = f" ± {self.uncertainty}" if self.uncertainty is not None else ""
        return f"{self.number}{spread} {self.unit}".rstrip()


@dataclass(frozen=True)
class _DisplayUnit:
    """A unit to show: its text, its LaTeX, and the expression it is converted by."""

    text: str
    latex: str
    expression: str


def _unit(text: str, latex: str, expression: str) -> _DisplayUnit:
    return _DisplayUnit(text, r"\mathrm{" + latex + "}" if latex else "", expression)


_KELVIN = _unit("K", "K", "kelvin")
_RANKINE = _DisplayUnit("°R", r"\text{°R}", "degR")
_PERCENT = _DisplayUnit("%", r"\%", "0.01")
_ONE = _unit("", "", "1")

_SI = {
    "temperature": _DisplayUnit("°C", r"\text{°C}", "degC"),
    "temperature_difference": _KELVIN,
    "pressure": _unit("bar", "bar", "bar"),
    "pressure_difference": _unit("bar", "bar", "bar"),
    "specific_energy": _unit("kJ/kg", r"kJ\,kg^{-1}", "kilojoule/kilogram"),
    "specific_entropy": _unit("kJ/(kg·K)", r"kJ\,kg^{-1}\,K^{-1}", "kilojoule/kilogram/kelvin"),
    "density": _unit("kg/m³", r"kg\,m^{-3}", "kilogram/meter**3"),
    "specific_volume": _unit("m³/kg", r"m^{3}\,kg^{-1}", "meter**3/kilogram"),
    "mass_flow": _unit("kg/s", r"kg\,s^{-1}", "kilogram/second"),
    "molar_flow": _unit("mol/s", r"mol\,s^{-1}", "mole/second"),
    "volume_flow": _unit("m³/s", r"m^{3}\,s^{-1}", "meter**3/second"),
    "molar_mass": _unit("g/mol", r"g\,mol^{-1}", "gram/mole"),
    "molar_volume": _unit("cm³/mol", r"cm^{3}\,mol^{-1}", "centimeter**3/mole"),
    "power": _unit("kW", "kW", "kilowatt"),
    "heat_flow": _unit("kW", "kW", "kilowatt"),
    "entropy_flow": _unit("kW/K", r"kW\,K^{-1}", "kilowatt/kelvin"),
    "energy": _unit("kJ", "kJ", "kilojoule"),
    "entropy": _unit("kJ/K", r"kJ\,K^{-1}", "kilojoule/kelvin"),
    "mass": _unit("kg", "kg", "kilogram"),
    "volume": _unit("m³", "m^{3}", "meter**3"),
    "velocity": _unit("m/s", r"m\,s^{-1}", "meter/second"),
    "length": _unit("m", "m", "meter"),
    "area": _unit("m²", "m^{2}", "meter**2"),
    "time": _unit("s", "s", "second"),
    "heat_transfer_coefficient": _unit("W/(m²·K)", r"W\,m^{-2}\,K^{-1}", "watt/meter**2/kelvin"),
    "efficiency": _PERCENT,
    "ratio": _ONE,
}

_US = {
    "temperature": _DisplayUnit("°F", r"\text{°F}", "degF"),
    "temperature_difference": _RANKINE,
    "pressure": _unit("psia", "psia", "psi"),
    "pressure_difference": _unit("psi", "psi", "psi"),
    "specific_energy": _unit("Btu/lb", r"Btu\,lb^{-1}", "Btu_it/pound"),
    "specific_entropy": _DisplayUnit("Btu/(lb·°R)", r"\mathrm{Btu\,lb^{-1}}\,\text{°R}^{-1}", "Btu_it/pound/degR"),
    "density": _unit("lb/ft³", r"lb\,ft^{-3}", "pound/foot**3"),
    "specific_volume": _unit("ft³/lb", r"ft^{3}\,lb^{-1}", "foot**3/pound"),
    "mass_flow": _unit("lb/h", r"lb\,h^{-1}", "pound/hour"),
    "molar_flow": _unit("lbmol/h", r"lbmol\,h^{-1}", "453.59237*mole/hour"),
    "volume_flow": _unit("ft³/min", r"ft^{3}\,min^{-1}", "foot**3/minute"),
    "molar_mass": _unit("lb/lbmol", r"lb\,lbmol^{-1}", "gram/mole"),
    "molar_volume": _unit("ft³/lbmol", r"ft^{3}\,lbmol^{-1}", "foot**3/(453.59237*mole)"),
    "power": _unit("hp", "hp", "horsepower"),
    "heat_flow": _unit("Btu/h", r"Btu\,h^{-1}", "Btu_it/hour"),
    "entropy_flow": _DisplayUnit("Btu/(h·°R)", r"\mathrm{Btu\,h^{-1}}\,\text{°R}^{-1}", "Btu_it/hour/degR"),
    "energy": _unit("Btu", "Btu", "Btu_it"),
    "entropy": _DisplayUnit("Btu/°R", r"\mathrm{Btu}\,\text{°R}^{-1}", "Btu_it/degR"),
    "mass": _unit("lb", "lb", "pound"),
    "volume": _unit("ft³", "ft^{3}", "foot**3"),
    "velocity": _unit("ft/s", r"ft\,s^{-1}", "foot/second"),
    "length": _unit("ft", "ft", "foot"),
    "area": _unit("ft²", "ft^{2}", "foot**2"),
    "time": _unit("s", "s", "second"),
    "heat_transfer_coefficient": _DisplayUnit(
        "Btu/(h·ft²·°R)", r"\mathrm{Btu\,h^{-1}\,ft^{-2}}\,\text{°R}^{-1}", "Btu_it/hour/foot**2/degR"
    ),
    "efficiency": _PERCENT,
    "ratio": _ONE,
}

_SYSTEMS = {"SI": _SI, "US": _US}
#: In a formula a temperature divides and multiplies, so it stands there on its absolute scale.
_ABSOLUTE = {"SI": _KELVIN, "US": _RANKINE}


class Display:
    """Shows SI values in SI process units or in US customary ones.

    ``dimension`` is a key of ``names.DIMENSIONS`` throughout.
    """

    def __init__(self, units: Literal["SI", "US"] = "SI") -> None:
        self.units = units
        self._table = _SYSTEMS[units]

    def unit_text(self, dimension: str) -> str:
        """The unit as text, empty for ratios."""
        return self._table[dimension].text

    def unit_latex(self, dimension: str) -> str:
        """The unit as LaTeX, empty for ratios."""
        return self._table[dimension].latex

    def convert(self, value: _Value, dimension: str) -> _Value:
        """An SI value, or array of values, in the unit shown; not rounded. For the axes of figures."""
        scale = conversion(self._table[dimension].expression, dimension)
        # Dividing keeps round numbers round: 101325 Pa / 1e5 is 1.01325 bar exactly, times 1e-5 it is not.
        return (value - scale.offset) / scale.factor

    def show(
        self,
        value: float | None,
        dimension: str,
        expanded_uncertainty: float | None = None,
        digits: int = _DIGITS,
    ) -> Shown:
        """A value [SI] with the expanded uncertainty [SI, same dimension] as the reader sees it.

        ``digits`` are the significant digits without uncertainty. None, NaN and infinity are shown as a dash without
        unit.
        """
        if value is None or not math.isfinite(value):
            return Shown(_MISSING, "", None, r"\text{" + _MISSING + "}")
        unit = self._table[dimension]
        number, spread, exponent = self._digits(float(value), expanded_uncertainty, dimension, unit, digits)
        formula_number, formula_exponent, formula_unit = number, exponent, unit
        if dimension == "temperature":
            formula_unit = _ABSOLUTE[self.units]
            formula_number, _, formula_exponent = self._digits(
                float(value), expanded_uncertainty, "temperature_difference", formula_unit, digits
            )
        latex = _write(formula_number, formula_exponent, _write_latex)
        return Shown(
            number=_write(number, exponent, _write_text),
            unit=unit.text,
            uncertainty=None if spread is None else _write(spread, _own_exponent(spread, exponent), _write_text),
            latex=rf"{latex}\,{formula_unit.latex}" if formula_unit.latex else latex,
        )

    def in_formula(self, value: float, dimension: str, digits: int) -> float:
        """The value [SI] that a formula shows when one is rounded to so many significant digits of its unit."""
        unit = self._table[dimension]
        if dimension == "temperature":
            dimension, unit = "temperature_difference", _ABSOLUTE[self.units]
        scale = conversion(unit.expression, dimension)
        number, _, _ = self._digits(float(value), None, dimension, unit, digits)
        return float(number) * scale.factor + scale.offset

    @staticmethod
    def _digits(
        value: float, expanded_uncertainty: float | None, dimension: str, unit: _DisplayUnit, digits: int
    ) -> tuple[Decimal, Decimal | None, int]:
        """Rounded value and uncertainty in the unit, with the power of ten to set apart."""
        scale = conversion(unit.expression, dimension)
        number = _decimal((value - scale.offset) / scale.factor)
        spread: Decimal | None = None
        if expanded_uncertainty is not None and math.isfinite(expanded_uncertainty) and expanded_uncertainty > 0.0:
            spread = _significant(_decimal(float(expanded_uncertainty) / scale.factor), 2)
            number = _to_place(number, spread)
        else:
            number = _without_end_zeros(_significant(number, digits))
        return number, spread, _shown_exponent(number, spread)


def _decimal(number: float) -> Decimal:
    """The shortest decimal that reads back as the same float."""
    return Decimal(repr(number))


def _round_to(number: Decimal, place: int) -> Decimal:
    """Rounded half to even to a multiple of 10^place; never minus zero."""
    rounded = number.quantize(Decimal((0, (1,), place)), rounding=ROUND_HALF_EVEN, context=_EXACT)
    return rounded if rounded else abs(rounded)


def _significant(number: Decimal, digits: int) -> Decimal:
    """Rounded to a number of significant digits."""
    if not number:
        return Decimal(0)
    rounded = _round_to(number, number.adjusted() - digits + 1)
    # 9.96 to two digits is 10.0 at the first place asked for: one digit too many.
    return _round_to(rounded, rounded.adjusted() - digits + 1)


def _to_place(number: Decimal, spread: Decimal) -> Decimal:
    """The value at the last place of its uncertainty, as far as double precision has digits there."""
    place = int(spread.as_tuple().exponent)
    if number:
        place = max(place, number.adjusted() - _MOST_DIGITS + 1)
    return _round_to(number, place)


def _without_end_zeros(number: Decimal) -> Decimal:
    return number.normalize(_EXACT) if number else Decimal(0)


def _shown_exponent(number: Decimal, spread: Decimal | None) -> int:
    """The power of ten set apart, 0 for plain decimals; one for value and uncertainty together."""
    largest = max(abs(number), spread or Decimal(0))
    if not largest or _LEAST_PLAIN <= largest.adjusted() < _MOST_PLAIN:
        return 0
    return largest.adjusted()


def _own_exponent(spread: Decimal, exponent: int) -> int:
    """The power of ten of the value, unless the uncertainty would be zeros all over: then its own."""
    return exponent if spread.adjusted() - exponent > -_MOST_DIGITS else spread.adjusted()


def _write(number: Decimal, exponent: int, style: Callable[[str, str, int], str]) -> str:
    """Digits with the integer part grouped in threes from five digits on."""
    sign, digits = ("-" if number < 0 else ""), f"{abs(number.scaleb(-exponent, _EXACT)):f}"
    return style(sign, digits, exponent)


def _grouped(digits: str, space: str) -> str:
    whole, point, decimals = digits.partition(".")
    if len(whole) >= 5:
        first = len(whole) % 3
        groups = ([whole[:first]] if first else []) + [whole[i : i + 3] for i in range(first, len(whole), 3)]
        whole = space.join(groups)
    return whole + point + decimals


def _write_text(sign: str, digits: str, exponent: int) -> str:
    power = f" × 10{str(exponent).translate(_RAISED)}" if exponent else ""
    return sign.replace("-", "−") + _grouped(digits, _THIN_SPACE) + power


def _write_latex(sign: str, digits: str, exponent: int) -> str:
    power = rf"\times 10^{{{exponent}}}" if exponent else ""
    return sign + _grouped(digits, r"\,") + power

"""The units a calculation file may use, by dimension, and their conversion to SI.

Every dimension has a closed list of spellings, so that a unit is either known or refused with the nearest one
named; no expression written in a file ever reaches the unit library. pint works the conversions out from
``definitions.txt``, once a spelling. This is the only module that imports pint.

Chosen where the trade is ambiguous:

- ``Btu`` and ``kcal_IT`` are those of the International Table (1055.05585262 J, 4186.8 J), ``kcal_th`` is 4184 J;
- ``hp`` is the mechanical horsepower of 550 ft·lbf/s, ``PS`` the metric one of 75 kgf·m/s;
- ``t`` is the tonne of 1000 kg; ``gal`` the US gallon; ``TR`` the refrigeration ton of 12 000 Btu/h;
- columns of liquid (``mmH2O``, ``inH2O``, ``mmHg``, ``inHg``) use conventional densities and standard gravity;
- ``Nm3`` is counted at 0 °C, ``Sm3`` at 15 °C, both at 101.325 kPa as an ideal gas.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import lru_cache
from importlib.resources import files
from typing import Any, Literal

from reportgen.names import DIMENSIONS

__all__ = [
    "AMBIGUOUS",
    "Conversion",
    "Unit",
    "conversion",
    "dimensions_of",
    "find_unit",
    "unit_key",
    "units_of",
    "usual_units",
]

Scale = Literal["plain", "gauge", "normal"]


@dataclass(frozen=True)
class Unit:
    """One unit of one dimension.

    ``spelling`` is how messages write it, ``expression`` what pint is asked for. ``scale`` is ``gauge`` for
    pressures above the atmosphere, ``normal`` for volumes counted at a normal or standard state, else ``plain``.
    """

    spelling: str
    expression: str
    scale: Scale = "plain"


@dataclass(frozen=True)
class Conversion:
    """SI value = ``factor`` · value + ``offset`` (the offset is not zero for °C and °F alone)."""

    factor: float
    offset: float


#: pint's name of the SI unit of each dimension.
_SI_EXPRESSIONS = {
    "K": "kelvin",
    "Pa": "pascal",
    "J/kg": "joule/kilogram",
    "J/(kg*K)": "joule/kilogram/kelvin",
    "kg/m3": "kilogram/meter**3",
    "m3/kg": "meter**3/kilogram",
    "kg/s": "kilogram/second",
    "mol/s": "mole/second",
    "m3/s": "meter**3/second",
    "kg/mol": "kilogram/mole",
    "m3/mol": "meter**3/mole",
    "W": "watt",
    "W/K": "watt/kelvin",
    "J": "joule",
    "J/K": "joule/kelvin",
    "kg": "kilogram",
    "m3": "meter**3",
    "m/s": "meter/second",
    "m": "meter",
    "m2": "meter**2",
    "s": "second",
    "W/(m2*K)": "watt/meter**2/kelvin",
    "1": "",
}

_MASS = {"kg": "kilogram", "g": "gram", "t": "tonne", "lb": "pound", "lbm": "pound"}
_TIME = {
    "s": "second",
    "min": "minute",
    "h": "hour",
    "d": "day",
    "sec": "second",
    "hr": "hour",
    "day": "day",
}
_LENGTH = {"m": "meter", "mm": "millimeter", "cm": "centimeter", "km": "kilometer", "ft": "foot", "in": "inch"}
_VOLUME = {
    "m3": "meter**3",
    "L": "liter",
    "l": "liter",
    "cm3": "centimeter**3",
    "dm3": "decimeter**3",
    "ft3": "foot**3",
    "gal": "gallon",
}
_ENERGY = {
    "J": "joule",
    "kJ": "kilojoule",
    "MJ": "megajoule",
    "GJ": "gigajoule",
    "Wh": "watt*hour",
    "kWh": "kilowatt*hour",
    "MWh": "megawatt*hour",
    "Btu": "Btu_it",
    "MMBtu": "1e6*Btu_it",
    "kcal_IT": "1000*international_calorie",
    "kcal_th": "1000*thermochemical_calorie",
}
_HEAT_PER_TIME = {key: _ENERGY[key] for key in ("J", "kJ", "MJ", "GJ", "Btu", "MMBtu", "kcal_IT", "kcal_th")}
_AMOUNT = {"mol": "mole", "kmol": "kilomole", "lbmol": "453.59237*mole"}
#: Below the bar of a fraction a degree is always a difference.
_PER_DEGREE = {"K": "kelvin", "degC": "kelvin", "degF": "degR", "degR": "degR", "R": "degR"}
_DIFFERENCE = {"K": "kelvin", "mK": "millikelvin", "delta_degC": "kelvin", "delta_degF": "degR", "degR": "degR"}
_PRESSURE = {
    "bar": "bar",
    "mbar": "millibar",
    "Pa": "pascal",
    "hPa": "hectopascal",
    "kPa": "kilopascal",
    "MPa": "megapascal",
    "psi": "psi",
    "atm": "standard_atmosphere",
    "kgf/cm2": "kilogram_force/centimeter**2",
    "mmHg": "mmHg",
    "inHg": "inHg",
    "mmH2O": "9.80665*pascal",
    "inH2O": "25.4*9.80665*pascal",
    "Torr": "torr",
}
_MOLAR_GAS_CONSTANT = "(8.31446261815324*joule/mole/kelvin)"
_NORMAL_VOLUME = {"m3": "meter**3", "L": "liter", "l": "liter"}


def _over(numerators: Mapping[str, str], denominators: Mapping[str, str]) -> dict[str, str]:
    """Spellings and expressions of every numerator over every denominator."""
    return {
        f"{top}/{below}": f"({upper})/({lower})"
        for top, upper in numerators.items()
        for below, lower in denominators.items()
    }


def _over_product(numerators: Mapping[str, str], first: Mapping[str, str], second: Mapping[str, str]) -> dict[str, str]:
    """Spellings and expressions of every numerator over every product of two denominators."""
    product = {f"({a}*{b})": f"({upper})*({lower})" for a, upper in first.items() for b, lower in second.items()}
    return _over(numerators, product)


def _pressures() -> list[Unit]:
    others = {name: expression for name, expression in _PRESSURE.items() if name != "psi"}  # bare psi is ambiguous
    units = [Unit(name, expression) for name, expression in others.items()]
    units += [Unit("psia", "psi"), Unit("psig", "psi", "gauge")]
    units += [Unit(f"{name}(g)", expression, "gauge") for name, expression in others.items()]
    units += [Unit(f"{name}({word})", expression) for name, expression in others.items() for word in ("a", "abs")]
    return units


def _molar_flows() -> list[Unit]:
    units = [Unit(name, expression) for name, expression in _over(_AMOUNT, _TIME).items()]
    for letter, temperature in (("N", 273.15), ("S", 288.15)):
        # n = p V / (R T): the number of moles in the stated volume is the same for every gas counted as ideal.
        moles_per_volume = f"101325*pascal/({_MOLAR_GAS_CONSTANT}*{temperature}*kelvin)"
        for name, expression in _over(_NORMAL_VOLUME, _TIME).items():
            units.append(Unit(letter + name, f"({expression})*{moles_per_volume}", "normal"))
    return units


def _plain(table: Mapping[str, str]) -> list[Unit]:
    return [Unit(name, expression) for name, expression in table.items()]


_POWERS = _plain(
    {"W": "watt", "kW": "kilowatt", "MW": "megawatt", "hp": "horsepower", "PS": "metric_horsepower"}
    | {"TR": "12000*Btu_it/hour"}
    | _over(_HEAT_PER_TIME, _TIME)
)

_UNITS: dict[str, list[Unit]] = {
    "temperature": _plain({"K": "kelvin", "degC": "degC", "degF": "degF", "degR": "degR", "R": "degR"}),
    "temperature_difference": _plain(_DIFFERENCE),
    "pressure": _pressures(),
    "pressure_difference": _plain(_PRESSURE),
    "specific_energy": _plain(_over(_ENERGY, _MASS)),
    "specific_entropy": _plain(_over_product(_ENERGY, _MASS, _PER_DEGREE)),
    "density": _plain(_over(_MASS, _VOLUME)),
    "specific_volume": _plain(_over(_VOLUME, _MASS)),
    "mass_flow": _plain(_over(_MASS, _TIME)),
    "molar_flow": _molar_flows(),
    "volume_flow": _plain(_over(_VOLUME, _TIME) | {"gpm": "gallon/minute", "cfm": "foot**3/minute"}),
    "molar_mass": _plain(_over(_MASS, _AMOUNT)),
    "molar_volume": _plain(_over(_VOLUME, _AMOUNT)),
    "power": _POWERS,
    "heat_flow": _POWERS,
    "entropy_flow": _plain(
        _over({"W": "watt", "kW": "kilowatt", "MW": "megawatt"}, _PER_DEGREE)
        | _over_product(_HEAT_PER_TIME, _TIME, _PER_DEGREE)
    ),
    "energy": _plain(_ENERGY),
    "entropy": _plain(_over(_ENERGY, _PER_DEGREE)),
    "mass": _plain(_MASS),
    "volume": _plain(_VOLUME),
    "velocity": _plain(_over(_LENGTH, _TIME)),
    "length": _plain(_LENGTH),
    "area": _plain({f"{name}2": f"({expression})**2" for name, expression in _LENGTH.items()}),
    "time": _plain(_TIME),
    "heat_transfer_coefficient": _plain(
        _over_product({"W": "watt", "kW": "kilowatt"}, {"m2": "meter**2"}, _PER_DEGREE)
        | {
            f"Btu/({time}*ft2*{degree})": f"Btu_it/({_TIME[time]}*foot**2*degR)"
            for time in ("h", "hr")
            for degree in ("degF", "degR", "R")
        }
    ),
    "efficiency": _plain({"%": "0.01", "": "1"}),
    "ratio": _plain({"": "1", "%": "0.01"}),
}

#: The spellings to offer first in messages and in the schema.
_USUAL: dict[str, tuple[str, ...]] = {
    "temperature": ("K", "degC", "degF", "degR"),
    "temperature_difference": ("K", "delta_degC", "delta_degF"),
    "pressure": ("bar", "bar(a)", "bar(g)", "kPa", "kPa(g)", "MPa", "MPa(g)", "Pa", "psia", "psig", "atm"),
    "pressure_difference": ("bar", "mbar", "kPa", "Pa", "psi", "mmH2O", "inH2O"),
    "specific_energy": ("kJ/kg", "J/kg", "MJ/kg", "Btu/lb", "kWh/t"),
    "specific_entropy": ("kJ/(kg*K)", "J/(kg*K)", "Btu/(lb*degR)"),
    "density": ("kg/m3", "kg/L", "g/cm3", "lb/ft3"),
    "specific_volume": ("m3/kg", "L/kg", "ft3/lb"),
    "mass_flow": ("kg/s", "kg/h", "t/h", "t/d", "lb/h", "lb/s"),
    "molar_flow": ("mol/s", "kmol/h", "lbmol/h", "Nm3/h", "Sm3/h"),
    "volume_flow": ("m3/s", "m3/h", "L/min", "ft3/min", "cfm", "gpm"),
    "molar_mass": ("g/mol", "kg/kmol", "kg/mol", "lb/lbmol"),
    "molar_volume": ("cm3/mol", "m3/kmol", "m3/mol", "ft3/lbmol"),
    "power": ("kW", "W", "MW", "hp", "PS", "kJ/h", "Btu/h"),
    "heat_flow": ("kW", "W", "MW", "kJ/h", "Btu/h", "MMBtu/h", "TR"),
    "entropy_flow": ("kW/K", "W/K", "kJ/(h*K)", "Btu/(h*degR)"),
    "energy": ("kJ", "J", "MJ", "kWh", "Btu"),
    "entropy": ("kJ/K", "J/K", "Btu/degR"),
    "mass": ("kg", "g", "t", "lb"),
    "volume": ("m3", "L", "ft3", "gal"),
    "velocity": ("m/s", "km/h", "ft/s"),
    "length": ("m", "mm", "cm", "ft", "in"),
    "area": ("m2", "mm2", "cm2", "ft2", "in2"),
    "time": ("s", "min", "h"),
    "heat_transfer_coefficient": ("W/(m2*K)", "kW/(m2*K)", "Btu/(h*ft2*degF)"),
    "efficiency": ("%",),
    "ratio": ("%",),
}

#: Spellings that mean different things to different readers, with what to write instead.
AMBIGUOUS: dict[str, str] = {
    "psi": 'write "psia" for an absolute pressure or "psig" for one above the atmosphere',
    "ton": 'write "t" (1000 kg), or "lb" with the number worked out',
    "tons": 'write "t" (1000 kg), or "lb" with the number worked out',
    "cal": 'write "kcal_IT" (4186.8 J) or "kcal_th" (4184 J)',
    "kcal": 'write "kcal_IT" (4186.8 J) or "kcal_th" (4184 J)',
    "MBtu": 'write "MMBtu" for a million, or "Btu" with the number worked out',
    "scfm": 'its standard state differs by trade: write "Sm3/h" (15 °C, 101.325 kPa) or a mass flow',
    "kg/cm2": 'write "kgf/cm2(g)" above the atmosphere or "kgf/cm2(a)" absolute',
    "at": 'write "kgf/cm2(a)"',
    "ata": 'write "kgf/cm2(a)"',
    "atu": 'write "kgf/cm2(g)"',
}

_BRACKETS = re.compile(r"\(([^()]*)\)")
_JOINERS = re.compile(r"[\s*·⋅.^]")


def unit_key(spelling: str) -> str:
    """What two spellings of one unit have in common.

    Drops spaces, multiplication signs, carets and paired brackets and reads typographic forms (``°C``, ``m³``,
    ``kg⁻¹``) as their plain ones; upper and lower case stay apart, since mPa is not MPa.
    """
    text = unicodedata.normalize("NFKC", spelling).replace("°", "deg").replace("−", "-").replace("Δ", "delta_")
    return _JOINERS.sub("", _BRACKETS.sub(r"\1", text))


def _keys(unit: Unit) -> Iterable[str]:
    """Every way a unit may be written: as it stands, divided twice, factors swapped, with negative exponents."""
    yield unit_key(unit.spelling)
    if unit.scale == "gauge" or "/" not in unit.spelling or unit.spelling.startswith("kgf"):
        return
    top, below = unit.spelling.split("/", 1)
    factors = below.strip("()").split("*")
    yield unit_key("".join([top, *(f"{factor}-1" for factor in factors)]))
    if len(factors) == 2:
        first, second = factors
        yield unit_key(f"{top}/{first}/{second}")
        yield unit_key(f"{top}/({second}*{first})")


@lru_cache(maxsize=len(_UNITS))
def _index(dimension: str) -> dict[str, Unit]:
    return {key: unit for unit in _UNITS[dimension] for key in _keys(unit)}


def units_of(dimension: str) -> tuple[str, ...]:
    """Spellings a calculation file may use for a dimension (a key of ``names.DIMENSIONS``), usual ones first."""
    usual = _USUAL[dimension]
    return usual + tuple(unit.spelling for unit in _UNITS[dimension] if unit.spelling and unit.spelling not in usual)


def usual_units(dimension: str) -> tuple[str, ...]:
    """The few spellings to name to a person, out of all of ``units_of``."""
    return _USUAL[dimension]


def find_unit(spelling: str, dimension: str) -> Unit | None:
    """The unit of that spelling within a dimension, or None."""
    return _index(dimension).get(unit_key(spelling))


def dimensions_of(spelling: str) -> list[str]:
    """Dimensions in which the spelling is a unit, to say what a misplaced unit measures."""
    return [dimension for dimension in _UNITS if find_unit(spelling, dimension) is not None]


@lru_cache(maxsize=1)
def _registry() -> Any:
    from pint import UnitRegistry  # imported when the first conversion is asked for: it costs 0.1 s

    registry: Any = UnitRegistry(None)
    registry.load_definitions((files(__package__) / "definitions.txt").read_text("utf-8").splitlines())
    return registry


@lru_cache(maxsize=512)
def conversion(expression: str, dimension: str) -> Conversion:
    """Conversion of a unit, given as pint expression, to the SI unit of a dimension.

    Temperatures in degC and degF get their offset; every other unit is proportional.
    """
    registry = _registry()
    if expression in ("degC", "degF"):
        step = registry.Quantity(1.0, f"delta_{expression}").to("kelvin").magnitude
        zero = registry.Quantity(0.0, expression).to("kelvin").magnitude
        return Conversion(float(step), float(zero))
    si_unit = _SI_EXPRESSIONS[DIMENSIONS[dimension]]
    quantity = registry.Quantity(registry.parse_expression(expression))
    return Conversion(float(quantity.to(si_unit).magnitude), 0.0)

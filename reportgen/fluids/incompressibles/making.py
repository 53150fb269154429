"""An incompressible liquid or solid from what its user knows of it: density, specific heat, range."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Any, Literal

from reportgen.errors import Fault, InputError
from reportgen.fluids.incompressibles.fluid import ZERO_TEMPERATURE, Incompressible
from reportgen.fluids.incompressibles.heat import HeatCapacityLaw, PolynomialHeat, TabulatedHeat, check_table
from reportgen.fluids.model import Limits
from reportgen.fluids.numeric import finite_number, number

__all__ = ["SpecificHeat", "incompressible"]

#: A constant c [J/(kg*K)]; coefficients a_0, a_1, ... of Σ a_i T^i; or a table of T_k [K] and c_k [J/(kg*K)]: rows
#: (T_k, c_k), the two columns, or the columns by name.
SpecificHeat = float | Sequence[float] | Sequence[Sequence[float]] | Mapping[str, Sequence[float]]

#: Columns of a table of specific heat, by name.
COLUMNS = ("temperature", "specific_heat")
_BY_NAME = '{"temperature": [...], "specific_heat": [...]}'

#: Range [K] of a constant heat capacity whose range is not stated.
UNSTATED_RANGE = (50.0, 3000.0)


def incompressible(
    name: str,
    *,
    density: float,
    specific_heat: SpecificHeat,
    phase: Literal["liquid", "solid"] = "liquid",
    limits: tuple[float, float] | None = None,
    thermal_expansion: float | None = None,
    molar_mass: float | None = None,
    source: str | None = None,
) -> Incompressible:
    """An incompressible liquid or solid from its density and specific heat capacity.

    Parameters
    ----------
    name : what it is called, for titles and messages.
    density : ρ [kg/m3]; with a thermal expansion, the density at the temperature of the zeros.
    specific_heat : a constant c [J/(kg*K)]; or coefficients a_0, a_1, ... of c = Σ a_i T^i [J/(kg*K^(i+1))], T in K; or
        a table, between whose entries c runs straight: rows (T [K], c [J/(kg*K)]), or two columns, temperatures and
        values. A table of two rows is given by name, ``{"temperature": [...], "specific_heat": [...]}``, since two
        pairs of numbers may be either; any table may be.
    phase : "liquid" or "solid": a word only, since neither freezing nor boiling is part of the model.
    limits : lowest and highest temperature [K]. A table has its own, which may be narrowed; a polynomial needs them;
        without them a constant c is taken from 50 K to 3000 K, with a remark that its range was not stated.
    thermal_expansion : β [1/K] of v = v0 (1 + β (T − T0)), or None for a constant density.
    molar_mass : M [kg/mol], needed for the compressibility factor and molar flows only.
    source : where density and specific heat come from.

    The zeros h = 0 and s = 0 are at 298.15 K and 101 325 Pa, or at the limit of the range nearest to 298.15 K.

    Raises
    ------
    InputError : values that are no numbers, a density or heat capacity that is not above zero, limits outside the table
        or missing, an expansion that would let the volume vanish. All faults at once.
    """
    faults: list[Fault] = []
    if not isinstance(name, str) or not name.strip():
        faults.append(Fault("An incompressible fluid has a name.", found=repr(name)[:60], expected='such as "oil"'))
    if phase not in ("liquid", "solid"):
        faults.append(Fault("The phase is not known.", found=repr(phase)[:60], expected='"liquid", "solid"'))
    if source is not None and not isinstance(source, str):
        faults.append(Fault("The source is a text.", found=repr(source)[:60], expected='such as "data sheet"'))
    _above_zero("density", density, "kg/m3", faults)
    if molar_mass is not None:
        _above_zero("molar mass", molar_mass, "kg/mol", faults)
    heat = _read_heat(specific_heat, faults)
    bounds = _read_limits(limits, heat, faults)
    if faults:
        raise InputError(faults)
    assert heat is not None
    assert bounds is not None
    low, high = bounds
    zero = min(max(ZERO_TEMPERATURE, low), high)
    law: HeatCapacityLaw = TabulatedHeat(*heat, zero) if isinstance(heat, tuple) else PolynomialHeat(heat, zero)
    least = law.least(low, high)
    if not least > 0.0:
        faults.append(
            Fault(
                f"The specific heat of {name} is not above zero everywhere from {low:g} K to {high:g} K.",
                found=f"{least:.6g} J/(kg*K)",
                expected="more than 0 J/(kg*K)",
            )
        )
    expansion = _read_expansion(thermal_expansion, low, high, zero, faults)
    if faults:
        raise InputError(faults)
    return Incompressible(
        name.strip(),
        phase=phase,
        density=float(density),
        expansion=expansion,
        law=law,
        limits=_limits(low, high, phase, stated=limits is not None or isinstance(heat, tuple)),
        zero_temperature=zero,
        molar_mass=math.nan if molar_mass is None else float(molar_mass),
        source=source,
    )


def _read_heat(given: Any, faults: list[Fault]) -> tuple[list[float], list[float]] | list[float] | None:
    """A table as two lists, or the coefficients of a polynomial; None after a fault."""
    constant = finite_number(given)
    if constant is not None:
        return [constant]
    expected = f"J/(kg*K), coefficients a_0, a_1, ..., or a table: rows (T, c), or {_BY_NAME}"
    message = "The specific heat is not understood."
    if isinstance(given, Mapping):
        if set(given) == set(COLUMNS):
            table = [_numbers(given[name]) for name in COLUMNS]
            if None not in table:
                return _table(table, faults)
    elif _is_sequence(given) and len(given) > 0:
        coefficients = [finite_number(entry) for entry in given]
        if None not in coefficients:
            return [entry for entry in coefficients if entry is not None]
        rows = [_numbers(entry) for entry in given]
        if None not in rows:
            if len(rows) == 2 and all(row is not None and len(row) == 2 for row in rows):
                message = "Two pairs of numbers may be the rows or the columns of a table of specific heat."
                expected = _BY_NAME
            elif len(rows) == 2:
                return _table(rows, faults)
            elif all(row is not None and len(row) == 2 for row in rows):
                return _table([list(column) for column in zip(*(row or () for row in rows), strict=True)], faults)
    faults.append(Fault(message, found=repr(given)[:80], expected=expected))
    return None


def _table(columns: Sequence[list[float] | None], faults: list[Fault]) -> tuple[list[float], list[float]] | None:
    temperatures, values = (column or [] for column in columns)
    wrong = check_table(temperatures, values)
    faults += wrong
    return None if wrong else (temperatures, values)


def _numbers(given: Any) -> list[float] | None:
    """A sequence of numbers as a list of floats, or None."""
    found = [number(entry) for entry in given] if _is_sequence(given) else [None]
    return None if None in found else [entry for entry in found if entry is not None]


def _is_sequence(given: Any) -> bool:
    """Whether something has entries in an order: lists, tuples, arrays; not texts, sets, mappings or scalars."""
    if isinstance(given, str | bytes | Mapping):
        return False
    return hasattr(given, "__getitem__") and hasattr(given, "__len__") and getattr(given, "ndim", 1) > 0


def _read_limits(
    given: tuple[float, float] | None,
    heat: tuple[list[float], list[float]] | list[float] | None,
    faults: list[Fault],
) -> tuple[float, float] | None:
    """Lowest and highest temperature [K], or None after a fault."""
    table = (heat[0][0], heat[0][-1]) if isinstance(heat, tuple) else None
    if given is None:
        if table is not None:
            return table
        if heat is not None and len(heat) > 1:
            faults.append(
                Fault(
                    "A polynomial for the specific heat needs the limits of temperature between which it holds.",
                    expected="limits=(lowest, highest) in K",
                )
            )
            return None
        return UNSTATED_RANGE
    numbers = _numbers(given) or []
    if len(numbers) != 2 or not 0.0 < numbers[0] < numbers[1] < math.inf:
        faults.append(
            Fault(
                "The limits of temperature are two numbers, the lower one first.",
                found=repr(given)[:60],
                expected="(lowest, highest) in K, above 0",
            )
        )
        return None
    low, high = numbers
    if table is not None and (low < table[0] or high > table[1]):
        faults.append(
            Fault(
                "The limits of temperature reach beyond the table of specific heat.",
                found=f"{low:g} K to {high:g} K",
                expected=f"within {table[0]:g} K to {table[1]:g} K",
            )
        )
        return None
    return low, high


def _read_expansion(given: float | None, low: float, high: float, zero: float, faults: list[Fault]) -> float:
    """The thermal expansion [1/K], 0 for none."""
    if given is None:
        return 0.0
    expansion = finite_number(given)
    if expansion is not None:
        least = min(1.0 + expansion * (low - zero), 1.0 + expansion * (high - zero), 1.0 - expansion * zero)
        if least > 0.0:
            return expansion
    faults.append(
        Fault(
            "The thermal expansion is not a number, or too large for volume and enthalpy to keep a meaning in range.",
            found=repr(given)[:60],
            expected="a number in 1/K, such as 0.0007",
        )
    )
    return 0.0


def _above_zero(words: str, given: Any, unit: str, faults: list[Fault]) -> None:
    value = finite_number(given)
    if value is None or value <= 0.0:
        faults.append(
            Fault(f"The {words} is a finite number above 0.", found=repr(given)[:60], expected=f"a number in {unit}")
        )


def _limits(low: float, high: float, phase: str, stated: bool) -> Limits:
    apart = "Melting is not" if phase == "solid" else "Neither freezing nor boiling is"
    remarks = [
        f"{apart} part of the model: that the substance is {phase} in the whole range is for its user to know.",
        "The pressure is not limited; that the volume does not yield to it is the assumption of the model.",
    ]
    if not stated:
        remarks.append(
            f"The range of the constant specific heat was not stated: {low:g} K to {high:g} K only keeps absurd "
            "temperatures out."
        )
    return Limits(minimum_temperature=low, maximum_temperature=high, maximum_pressure=math.inf, remarks=tuple(remarks))

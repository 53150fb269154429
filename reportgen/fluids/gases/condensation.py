"""Water in gas mixtures against its saturation: saturation ratio, dew point, and how much would condense.

Above the triple point water saturates as in the real-fluid equation (IAPWS R6-95(2018)); below it, over ice, by the
sublimation equation of IAPWS R14-08(2011)::

    ln(p/p_t) = θ⁻¹ Σ a_i θ^b_i,   θ = T/T_t,   T_t = 273.16 K,   p_t = 611.657 Pa,   50 K ≤ T ≤ 273.16 K

The gas is ideal, and the other components are taken not to change the saturation pressure. In truth they raise it by
the enhancement factor: 0.4 % at 1 bar and 3 % to 4 % at 10 bar near room temperature (Greenspan, J. Res. Natl. Bur.
Stand. 80A (1976) 41, from memory), so that a real gas holds a little more water, and its dew point lies lower by 0.06 K
and 0.6 K, than said here.
"""

from __future__ import annotations

from functools import lru_cache
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import Fault, InputError, RangeError
from reportgen.fluids.inversion import Inverse
from reportgen.fluids.numeric import numbers
from reportgen.fluids.pairs import in_words

if TYPE_CHECKING:
    from reportgen.fluids.gases.gas import IdealGas
    from reportgen.fluids.real.fluid import RealFluid

__all__ = [
    "WATER",
    "condensed_water",
    "humidity_ratio",
    "saturation_pressure",
    "saturation_temperature",
    "water_fraction",
    "water_saturation",
]

Array = NDArray[np.float64]

#: Key of water among the ideal gases.
WATER = "H2O"

_GASES = ("ideal-gas", "reacting-gas")
_TRIPLE_TEMPERATURE = 273.16  # K
_TRIPLE_PRESSURE = 611.657  # Pa
_LOWEST_TEMPERATURE = 50.0  # K, of the sublimation equation
_FACTORS = (-0.212144006e2, 0.273203819e2, -0.610598130e1)
_EXPONENTS = (0.333333333e-2, 0.120666667e1, 0.170333333e1)


def saturation_pressure(temperature: ArrayLike) -> Any:
    """Pressure [Pa] of water vapour in equilibrium with liquid, or below 273.16 K with ice, at T [K].

    Infinite above the critical temperature, where nothing condenses; NaN for NaN.

    Raises
    ------
    InputError : what is no number.
    RangeError : below 50 K, where the sublimation equation ends, and an infinite temperature.
    """
    given = _temperatures(temperature)
    flat = given.reshape(-1)
    _refuse(
        (flat < _LOWEST_TEMPERATURE) | np.isinf(flat),
        "The saturation pressure of water is known from 50 K.",
        "temperature",
        flat,
        "50 K or more",
    )
    result = np.full(flat.shape, np.nan)
    result[flat > _critical_temperature()] = np.inf
    ice = flat < _TRIPLE_TEMPERATURE
    result[ice] = np.exp(_log_sublimation(flat[ice]))
    liquid = (flat >= _TRIPLE_TEMPERATURE) & (flat <= _critical_temperature())
    if liquid.any():
        # at the critical temperature itself the curve ends
        below = np.minimum(flat[liquid], _critical_temperature() * (1.0 - 1e-12))
        result[liquid] = _water().at(temperature=below, quality=1.0).pressure
    return result.reshape(given.shape)[()]


def saturation_temperature(pressure: ArrayLike) -> Any:
    """Temperature [K] at which water vapour of a partial pressure [Pa] condenses: dew point, or frost point below 0 °C.

    NaN where there is no such temperature: above the critical pressure, at 0 Pa (a gas without water) and below the
    pressure of ice at 50 K (1.9e-40 Pa); and for NaN.

    Raises
    ------
    InputError : what is no number.
    RangeError : a negative or infinite pressure.
    """
    given = numbers("partial pressure", "Pa", pressure)
    flat = given.reshape(-1)
    _refuse(
        (flat < 0.0) | np.isinf(flat), "A partial pressure is a finite number from 0.", "pressure", flat, "0 Pa or more"
    )
    result = np.full(flat.shape, np.nan)
    ice = (flat > 0.0) & (flat < _TRIPLE_PRESSURE)
    result[ice] = _over_ice()(np.log(flat[ice]))
    liquid = (flat >= _TRIPLE_PRESSURE) & (flat < _critical_pressure())
    if liquid.any():
        lowest = _water().at(temperature=_TRIPLE_TEMPERATURE, quality=1.0).pressure
        result[liquid] = _water().at(pressure=np.maximum(flat[liquid], lowest), quality=1.0).temperature
    return result.reshape(given.shape)[()]


def water_fraction(gas: IdealGas) -> float:
    """Mole fraction [1] of water in a gas.

    Raises
    ------
    InputError : something else than a gas.
    """
    if getattr(gas, "kind", None) not in _GASES:
        raise InputError(
            Fault("This is no gas.", found=repr(gas)[:60], expected='such as ideal_gas({"N2": 0.9, "H2O": 0.1})')
        )
    if gas.composition is not None:
        return gas.composition.get(WATER, 0.0)
    return 1.0 if gas.substance == "water" else 0.0


def water_saturation(gas: IdealGas, temperature: ArrayLike, pressure: ArrayLike) -> tuple[Any, Any]:
    """How far the water in a gas is from condensing.

    Parameters
    ----------
    gas : ideal gas, with water (``H2O``) among its species or not.
    temperature, pressure : T [K] and total p [Pa]; arrays broadcast.

    Returns
    -------
    saturation ratio φ = x_w p/p_sat(T) [1]: water condenses where it is above 1; 0 for a gas without water and above
    the critical temperature of water. Dew point (over ice: frost point) [K] of the gas at its pressure; NaN where it
    has none.

    Raises
    ------
    InputError : something else than a gas or numbers, shapes that do not fit together.
    RangeError : a temperature below 50 K, a pressure that is not above zero, infinite ones.
    """
    share = water_fraction(gas)
    given_t, given_p = _conditions(temperature, pressure)
    partial = share * given_p
    ratio = partial / saturation_pressure(given_t)
    return ratio[()], saturation_temperature(np.where(np.isnan(given_t), np.nan, partial))


def condensed_water(gas: IdealGas, temperature: ArrayLike, pressure: ArrayLike) -> Any:
    """Water that would condense at T [K] and p [Pa], in mol of liquid or ice for each mol of the gas as given [1].

    ``n = (x_w − y)/(1 − y)``, y = p_sat(T)/p: the rest stays behind saturated. 0 where nothing condenses, all of it for
    pure water above its saturation pressure. The mass for each mass of gas is this times the ratio of the molar masses.

    Raises
    ------
    InputError, RangeError : as in :func:`water_saturation`.
    """
    share = water_fraction(gas)
    given_t, given_p = _conditions(temperature, pressure)
    with np.errstate(divide="ignore", invalid="ignore"):
        held = saturation_pressure(given_t) / given_p
        condensed = np.where(held < share, (share - held) / (1.0 - held), 0.0)
    return np.where(np.isnan(held), np.nan, condensed)[()]


def humidity_ratio(gas: IdealGas) -> float:
    """Mass of water for each mass of all other components [kg/kg].

    Raises
    ------
    InputError : a gas of water alone; something else than a gas.
    """
    share = water_fraction(gas)
    if share >= 1.0:
        raise InputError(Fault("Water alone has no humidity ratio: there is no dry gas.", found=gas.title))
    water = share * _water().molar_mass
    return water / (gas.molar_mass - water)


def _temperatures(given: ArrayLike) -> Array:
    return numbers("temperature", "K", given)


def _conditions(temperature: ArrayLike, pressure: ArrayLike) -> tuple[Array, Array]:
    """T [K] and p [Pa] in their common shape. Raises InputError and RangeError, the latter for the pressure only."""
    given_t, given_p = _temperatures(temperature), numbers("pressure", "Pa", pressure)
    try:
        given_t, given_p = np.broadcast_arrays(given_t, given_p)
    except ValueError:
        raise InputError(
            Fault(
                "Temperature and pressure have shapes that do not fit together.",
                found=f"{given_t.shape}, {given_p.shape}",
            )
        ) from None
    _refuse(
        (given_p <= 0.0) | np.isinf(given_p),
        "The pressure of a gas is a finite number above 0.",
        "pressure",
        given_p,
        "more than 0 Pa",
    )
    return given_t, given_p


def _refuse(wrong: NDArray[np.bool_], message: str, name: str, values: Array, expected: str) -> None:
    if wrong.any():
        raise RangeError(Fault(message, found=in_words(name, float(values[wrong][0])), expected=expected))


@lru_cache(maxsize=1)
def _water() -> RealFluid:
    from reportgen.fluids.real.fluid import RealFluid  # gases start without the real fluids

    return RealFluid("water")


def _critical_temperature() -> float:
    critical = _water().limits.critical_point
    assert critical is not None
    return critical.temperature


def _critical_pressure() -> float:
    critical = _water().limits.critical_point
    assert critical is not None
    return critical.pressure


def _log_sublimation(temperature: Array) -> Array:
    """ln(p/Pa) of ice at T [K]."""
    theta = temperature / _TRIPLE_TEMPERATURE
    result = np.full_like(theta, np.log(_TRIPLE_PRESSURE))
    for factor, exponent in zip(_FACTORS, _EXPONENTS, strict=True):
        result += factor * theta ** (exponent - 1.0)
    return result


def _log_sublimation_slope(temperature: Array) -> Array:
    """d ln p/dT [1/K] of ice at T [K]."""
    theta = temperature / _TRIPLE_TEMPERATURE
    result = np.zeros_like(theta)
    for factor, exponent in zip(_FACTORS, _EXPONENTS, strict=True):
        result += factor * (exponent - 1.0) * theta ** (exponent - 2.0) / _TRIPLE_TEMPERATURE
    return result


@lru_cache(maxsize=1)
def _over_ice() -> Inverse:
    """T [K] of ice from ln(p/Pa)."""
    nodes = 1.0 / np.linspace(1.0 / _LOWEST_TEMPERATURE, 1.0 / _TRIPLE_TEMPERATURE, 200)
    nodes[0], nodes[-1] = _LOWEST_TEMPERATURE, _TRIPLE_TEMPERATURE
    return Inverse(nodes, _log_sublimation, _log_sublimation_slope)

"""Property models: vectorised, SI units, mass basis; usable alone in a notebook or script.

A model is made once and asked for states. A state is fixed by two properties; numbers or arrays are given in SI units,
and every field comes back in their common shape:

    >>> from reportgen import fluids
    >>> water = fluids.real_fluid("water")
    >>> state = water.at(pressure=39e5, temperature=[600.0, 650.0])
    >>> print(state.specific_entropy.round(1))
    [6503. 6701.8]
    >>> liquid, vapour = water.saturation(pressure=1e5)
    >>> print(f"{liquid.temperature:.2f} K, {(vapour.specific_enthalpy - liquid.specific_enthalpy) / 1e3:.1f} kJ/kg")
    372.76 K, 2257.4 kJ/kg

Which models there are:

- ``real_fluid(name)``: published Helmholtz-energy equations; ``reference_state`` moves the zeros of h and s.
- ``ideal_gas(name or composition)``: NASA polynomials with third-law entropies; ``humid_air`` and
  ``combustion_products`` give compositions, ``gases.condensation`` tells when water would condense.
- ``cubic(name or composition, equation=)``: Peng-Robinson and Soave-Redlich-Kwong, with phase equilibria of mixtures.
- ``incompressible(name, density=, specific_heat=)``: liquids and solids.
- ``statistical.gas(name)``: entropies counted from molecular constants, an independent check.

    >>> oil = fluids.incompressible("thermal oil", density=880.0, specific_heat=1900.0, limits=(260.0, 570.0))
    >>> float(oil.at(pressure=[1e5, 9e5], temperature=300.0).specific_enthalpy.round(1)[1])
    4422.6
    >>> air = fluids.ideal_gas(fluids.humid_air(temperature=293.15, pressure=1e5, relative_humidity=0.6))
    >>> ratio, dew_point = fluids.gases.condensation.water_saturation(air, 300.0, 7e5)
    >>> print(f"{ratio:.2f}, {dew_point:.1f} K")
    2.78, 318.6 K
    >>> print(f"{fluids.statistical.gas('nitrogen').entropy(298.15, 1e5):.2f} J/(mol K)")
    191.61 J/(mol K)

A state that a model cannot answer stops with an error that says why, or, with ``errors="mask"``, is NaN with its
reason in ``faults``; NaN given is NaN returned. Every model tells its ``limits``, its ``sources`` and where its entropy
is zero (``entropy_zero``):

    >>> state = water.at(errors="mask", pressure=1e5, temperature=[300.0, 4000.0])
    >>> list(state.faults)
    [1]
    >>> fluids.real_fluid("water", reference_state="third-law").entropy_zero_name
    'third-law'

With units: ``with_units`` wraps any model, takes quantities in any unit and gives quantities of the registry:

    >>> import pint
    >>> units = pint.UnitRegistry()
    >>> steam = fluids.with_units(water, units)
    >>> state = steam.at(pressure=units.Quantity(39, "bar"), temperature=units.Quantity(400, "degC"))
    >>> print(f"{state.specific_entropy.to('kJ/(kg*K)'):.4f~}")
    6.7850 kJ / K / kg

Every model has the interface of :class:`fluids.model.Fluid`.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

from reportgen.fluids.gases.gas import ideal_gas
from reportgen.fluids.real import catalogue

if TYPE_CHECKING:
    from reportgen.fluids.cubics.making import cubic
    from reportgen.fluids.gases.compositions import combustion_products, humid_air, stoichiometric_air
    from reportgen.fluids.incompressibles.making import incompressible
    from reportgen.fluids.real.fluid import RealFluid
    from reportgen.fluids.unit_interface import with_units

__all__ = [
    "combustion_products",
    "cubic",
    "describe",
    "humid_air",
    "ideal_gas",
    "ideal_gas_names",
    "incompressible",
    "listing",
    "names",
    "real_fluid",
    "stoichiometric_air",
    "with_units",
]

#: Public names loaded when they are first asked for, with their module: a water state starts without them.
_LOADED_LATER = {
    "combustion_products": "reportgen.fluids.gases.compositions",
    "humid_air": "reportgen.fluids.gases.compositions",
    "cubic": "reportgen.fluids.cubics.making",
    "incompressible": "reportgen.fluids.incompressibles.making",
    "stoichiometric_air": "reportgen.fluids.gases.compositions",
    "with_units": "reportgen.fluids.unit_interface",
}
#: Parts of the package that users ask for by name, loaded in the same way.
_PARTS_LOADED_LATER = ("crosscheck", "statistical")


def __getattr__(name: str) -> Any:
    if name in _LOADED_LATER:
        return getattr(import_module(_LOADED_LATER[name]), name)
    if name in _PARTS_LOADED_LATER:
        return import_module(f"{__name__}.{name}")
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted({*globals(), *_LOADED_LATER, *_PARTS_LOADED_LATER})


def real_fluid(name: str, reference_state: str = "published") -> RealFluid:
    """Real fluid by its published Helmholtz-energy equation; see :class:`fluids.real.fluid.RealFluid`.

    Parameters
    ----------
    name : canonical name (see :func:`names`), alias, formula or CAS number.
    reference_state : "published", "IIR", "ASHRAE", "NBP" or "third-law".

    Raises
    ------
    InputError : unknown fluid (with the nearest name) or reference state.
    """
    from reportgen.fluids.real.fluid import RealFluid

    return RealFluid(name, reference_state)


def names() -> tuple[str, ...]:
    """Names of the real fluids carried."""
    return catalogue.names()


def ideal_gas_names() -> tuple[str, ...]:
    """Names of the ideal gases carried; their formulas and other names are taken too."""
    from reportgen.fluids.gases import catalogue as gas_catalogue

    return gas_catalogue.names()


def listing() -> str:
    """Every fluid carried, with range and source, as lines of text."""
    from reportgen.fluids.description import list_all

    return list_all()


def describe(name: str) -> str:
    """What is carried under a name, real fluid and ideal gas, as lines of text: range, zeros, sources.

    Raises
    ------
    InputError : neither carries the name (a hint gives the nearest), or several substances share the formula.
    """
    from reportgen.fluids.description import describe_all

    return describe_all(name)

"""Property models: vectorised, SI units, mass basis.

    fluid = real_fluid("water")                     # or ideal_gas("nitrogen"), ideal_gas({"N2": 0.79, "O2": 0.21})
    state = fluid.at(pressure=39e5, temperature=[600.0, 650.0])
    state.specific_entropy

Every model has the interface of :class:`fluids.model.Fluid`.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

from reportgen.errors import Fault, InputError
from reportgen.fluids.gases.gas import ideal_gas
from reportgen.fluids.real import catalogue

if TYPE_CHECKING:
    from reportgen.fluids.incompressibles.making import incompressible
    from reportgen.fluids.real.fluid import RealFluid

__all__ = ["describe", "ideal_gas", "ideal_gas_names", "incompressible", "listing", "names", "real_fluid"]

#: Public names loaded when they are first asked for, with their module: a water state starts without them.
_LOADED_LATER = {
    "incompressible": "reportgen.fluids.incompressibles.making",
}


def __getattr__(name: str) -> Any:
    if name in _LOADED_LATER:
        return getattr(import_module(_LOADED_LATER[name]), name)
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")


def real_fluid(name: str, reference_state: str = "published") -> RealFluid:
    """Real fluid by its published Helmholtz-energy equation; see :class:`fluids.real.fluid.RealFluid`.

    Parameters
    ----------
    name : canonical name (see :func:`names`), alias, formula or CAS number.
    reference_state : "published", "IIR", "ASHRAE" or "NBP".

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
    InputError : neither carries the name; hints give the nearest names.
    """
    from reportgen.fluids.description import describe_real
    from reportgen.fluids.gases import catalogue as gas_catalogue

    texts = []
    faults: list[Fault] = []
    for write in (describe_real, gas_catalogue.describe):
        try:
            texts.append(write(name))
        except InputError as error:
            faults += error.faults
    if not texts:
        raise InputError(faults)
    return "\n\n".join(texts)

"""What every property model offers: the interface the balances are written against.

All quantities are plain SI on a mass basis; arrays broadcast and keep their shape.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal, Protocol, runtime_checkable

from numpy.typing import ArrayLike

from reportgen.fluids.state import State

__all__ = ["Errors", "Fluid", "Limits", "Point"]

#: What to do with elements a model cannot evaluate: raise a RangeError, or give NaN there and record a Fault.
Errors = Literal["raise", "mask"]


@dataclass(frozen=True, repr=False)
class Point:
    """A distinguished state: temperature [K], absolute pressure [Pa] and density [kg/m3] (None where it has none).

    Printed with nine digits: critical points are solutions of the equations, with rounding in the last of sixteen.
    """

    temperature: float
    pressure: float
    density: float | None = None

    def __repr__(self) -> str:
        density = "" if self.density is None else f", density={self.density:.9g}"
        return f"Point(temperature={self.temperature:.9g}, pressure={self.pressure:.9g}{density})"


@dataclass(frozen=True)
class Limits:
    """Range in which a model may be used.

    ``minimum_temperature``, ``maximum_temperature`` [K]; ``maximum_pressure`` [Pa], infinite where the model sets none.
    ``triple_point`` and ``critical_point`` are None for models without them. ``published_maximum_temperature`` [K] is
    what the publication claims, where the model goes further by extrapolation; else None. ``remarks`` are sentences
    for the reader: what bounds the range, and what is not checked.
    """

    minimum_temperature: float
    maximum_temperature: float
    maximum_pressure: float
    triple_point: Point | None = None
    critical_point: Point | None = None
    published_maximum_temperature: float | None = None
    remarks: tuple[str, ...] = ()


@runtime_checkable
class Fluid(Protocol):
    """A property model of one substance or one mixture of fixed composition."""

    @property
    def title(self) -> str:
        """Name for people, such as "Water"."""

    @property
    def kind(self) -> str:
        """``"ideal-gas"``, ``"reacting-gas"`` (at equilibrium), ``"real-fluid"``, ``"cubic"``, ``"incompressible"``."""

    @property
    def substance(self) -> str | None:
        """Canonical name of the substance; None for a mixture given by its composition."""

    @property
    def composition(self) -> Mapping[str, float] | None:
        """Mole fractions [1] by species, or None for a pure substance."""

    @property
    def molar_mass(self) -> float:
        """Molar mass M [kg/mol]."""

    @property
    def gas_constant(self) -> float:
        """Specific gas constant R/M [J/(kg*K)]."""

    @property
    def limits(self) -> Limits:
        """Range of validity."""

    @property
    def entropy_zero(self) -> str:
        """Where specific entropy (and enthalpy) are zero, in words."""

    @property
    def entropy_zero_name(self) -> str:
        """Key of the zero: equal keys mean that entropies and enthalpies of the two models count from one zero.

        ``"third-law"`` (elements in their reference states for h, perfect crystals at 0 K for s), a convention for
        one substance such as ``"IIR"``, or what else sets it, such as ``"published:water"``.
        """

    @property
    def sources(self) -> tuple[str, ...]:
        """Publications of the equations, with their DOI."""

    @property
    def data_files(self) -> tuple[Mapping[str, str], ...]:
        """``{"file": name, "sha256": digest}`` of each data file used."""

    def at(self, *, errors: Errors = "raise", **pair: ArrayLike) -> State:
        """State fixed by two independent properties.

        Parameters
        ----------
        errors : "raise" stops with a RangeError naming the first failing elements; "mask" puts NaN into the failing
            elements and a Fault for each into ``State.faults``. NaN given is NaN returned, without a fault.
        pair : exactly two of pressure [Pa], temperature [K], specific_enthalpy [J/kg], specific_entropy [J/(kg*K)],
            specific_internal_energy [J/kg], quality [1], density [kg/m3], specific_volume [m3/kg], superheat [K],
            subcooling [K], in a combination the model supports; arrays broadcast against each other.

        Raises
        ------
        InputError : an unknown property, not exactly two, an unsupported pair, shapes that do not broadcast.
        RangeError : a state outside the limits of the model, or several states that share the two properties: that
            fault is a ``fluids.pairs.SeveralStates``, which lists them (``errors="raise"``).
        """

"""The gas that leaves a combustor, as a fluid of the calculation: its composition follows from the flows that enter.

``ProductGas`` knows which streams make it. With their flows (``of``) it is a property model like any other, for arrays
of flows too: each element of the flows is a composition of its own. Without flows it answers for a usual mixture
(20 % more oxygen than needed), which serves as a start and is never a result. A stream may itself be the gas of another
combustor; then what that one burns counts in its place.
"""

from __future__ import annotations

import copy
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.fluids.model import Errors, Limits
from reportgen.fluids.reacting.products import Chemistry, CombustionGas
from reportgen.fluids.reacting.streams import Contents, contents_of
from reportgen.fluids.state import State

if TYPE_CHECKING:
    from reportgen.fluids.gases.gas import IdealGas
    from reportgen.fluids.model import Fluid

__all__ = ["ProductGas"]

Array = NDArray[np.float64]

_MOLAR_GAS_CONSTANT = 8.31446261815324  # J/(mol*K), exact by the definition of the SI of 2019

#: Oxygen beyond what is needed, in the mixture that stands in while the flows are not known.
_USUAL_EXCESS = 0.2
#: Temperature [K] and pressure [Pa] of the composition that is told of the fluid, until a state is named.
_USUAL_POINT = (1000.0, 1e5)
#: Mole fraction below which a species is left out where a composition is told.
_TRACE = 1e-12


class ProductGas:
    """What streams become when they burn together; interface of ``fluids.model.Fluid``.

    Parameters
    ----------
    title : name for people.
    streams : property model of each stream by its name; the name by which its flow is given to ``of``.
    chemistry : "complete" or "equilibrium".

    Raises
    ------
    InputError : as ``streams.contents_of`` and ``CombustionGas``.
    """

    substance = None
    constant_heat_capacity = None
    entropy_zero_name = "third-law"

    def __init__(self, title: str, streams: Mapping[str, Fluid | ProductGas], chemistry: Chemistry) -> None:
        self.title = title
        self.chemistry = chemistry
        #: A gas at equilibrium is none whose enthalpy depends on temperature alone.
        self.kind = "ideal-gas" if chemistry == "complete" else "reacting-gas"
        self.streams = dict(streams)
        self._contents: dict[str, Contents] = {}
        for name, fluid in streams.items():
            self._contents |= fluid._contents if isinstance(fluid, ProductGas) else {name: contents_of(fluid)}
        self._gas = CombustionGas(title, {name: each.elements for name, each in self._contents.items()}, chemistry)
        self._shares: dict[str, Any] = self._usual_shares()
        self._point = _USUAL_POINT

    # --- composition --------------------------------------------------------------------------------------------------

    @property
    def flows(self) -> tuple[str, ...]:
        """Names of all streams whose flows the composition follows from, those of inner combustors behind."""
        inner = [name for fluid in self.streams.values() if isinstance(fluid, ProductGas) for name in fluid.flows]
        return tuple(dict.fromkeys([*self.streams, *inner]))

    def of(self, flows: Mapping[str, ArrayLike]) -> ProductGas:
        """The gas that these mass flows [kg/s] make; arrays of one shape, each of ``flows`` named."""
        made = copy.copy(self)
        made._shares = self._weights(flows)
        return made

    def told_at(self, temperature: float, pressure: float) -> ProductGas:
        """The same gas, its composition, molar mass and gas constant told as at T [K] and p [Pa]."""
        told = copy.copy(self)
        told._point = (temperature, pressure)
        return told

    def with_chemistry(self, chemistry: Chemistry) -> ProductGas:
        """The gas of the same streams that comes about otherwise; its flows are not known."""
        return ProductGas(self.title, self.streams, chemistry)

    def _weights(self, flows: Mapping[str, ArrayLike]) -> dict[str, Any]:
        """Mass of each stream of fixed composition, in proportion."""
        found: dict[str, Any] = {}
        for name, fluid in self.streams.items():
            flow = np.asarray(flows[name], dtype=float)
            inner: dict[str, Any] = fluid._weights(flows) if isinstance(fluid, ProductGas) else {name: 1.0}
            whole = sum(inner.values())
            for leaf, weight in inner.items():
                found[leaf] = found.get(leaf, 0.0) + flow * weight / whole
        return found

    def _usual_shares(self) -> dict[str, Any]:
        needed = sum(each.needed for each in self._contents.values())
        free = sum(each.free for each in self._contents.values())
        more = (1.0 + _USUAL_EXCESS) * needed / free if needed and free else 1.0
        return {name: max(more, 1.0) if each.free > each.needed else 1.0 for name, each in self._contents.items()}

    def fractions(self, temperature: ArrayLike, pressure: ArrayLike) -> dict[str, Array]:
        """Mole fractions [1] by species at T [K] and p [Pa], arrays of the flows' shape; NaN where there is no gas."""
        amounts = self._gas.amounts(shares=self._shares, errors="mask", temperature=temperature, pressure=pressure)
        return self._gas.mole_fractions(amounts)

    def frozen(self, temperature: float, pressure: float) -> IdealGas:
        """Ideal gas of the composition that this one has at T [K] and p [Pa], first element."""
        from reportgen.fluids.gases.gas import ideal_gas

        fractions = {key: float(array[0]) for key, array in self.fractions(temperature, pressure).items()}
        total = sum(fractions.values())
        return ideal_gas({key: fraction / total for key, fraction in fractions.items() if fraction > _TRACE})

    @property
    def composition(self) -> Mapping[str, float]:
        """Mole fractions [1] by species, first element, at the point told; empty where there is no such gas."""
        found = {key: float(array[0]) for key, array in self.fractions(*self._point).items()}
        return {key: fraction for key, fraction in found.items() if fraction > _TRACE}

    @property
    def molar_mass(self) -> Any:
        """M [kg/mol] at the point told: a number for one composition, else an array."""
        amounts = self._gas.amounts(
            shares=self._shares, errors="mask", temperature=self._point[0], pressure=self._point[1]
        )
        mass: Array = 1.0 / amounts.sum(axis=1)
        return float(mass[0]) if mass.size == 1 else mass

    @property
    def gas_constant(self) -> Any:
        """R/M [J/(kg*K)] at the point told."""
        return _MOLAR_GAS_CONSTANT / self.molar_mass

    # --- properties ---------------------------------------------------------------------------------------------------

    def at(self, *, errors: Errors = "raise", **pair: ArrayLike) -> State:
        """State fixed by pressure with temperature, enthalpy, entropy or density; see ``CombustionGas.at``."""
        return self._gas.at(shares=self._shares, errors=errors, **pair)

    # --- description --------------------------------------------------------------------------------------------------

    @property
    def species(self) -> tuple[str, ...]:
        """Keys of the species that the gas may hold."""
        return self._gas.species

    @property
    def limits(self) -> Limits:
        """Range of the polynomials."""
        return self._gas.limits

    @property
    def entropy_zero(self) -> str:
        """Where entropy and enthalpy are zero, in words."""
        return self._gas.entropy_zero

    @property
    def sources(self) -> tuple[str, ...]:
        """Publications of the polynomials and of the method."""
        return self._gas.sources

    @property
    def data_files(self) -> tuple[Mapping[str, str], ...]:
        """The data file with its digest."""
        return self._gas.data_files

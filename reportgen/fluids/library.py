"""The independent property library CoolProp, where it is installed, as a second source for states.

It is no part of any result: it is imported only when a comparison asks for it, and speaks for itself by its name and
version. Its fluids have the same published equations for the most part, but other code and other data files.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from importlib import metadata
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import Fault, InputError
from reportgen.fluids.model import Errors
from reportgen.fluids.pairs import Elements, check_errors, read_pair
from reportgen.fluids.state import State

__all__ = ["NAME", "LibraryFluid", "NotInstalled", "library_fluid", "library_version"]

NAME = "CoolProp"
EXTRA = "crosscheck"

#: Molar masses of one substance agree to this part; a name that leads to another substance does not pass.
_SAME_MOLAR_MASS = 2e-3
#: Mole fractions below this are left out of a mixture: the library refuses zeros.
_LEAST_FRACTION = 1e-12

_PAIRS = (("pressure", "temperature"), ("temperature", "quality"))
_PHASES = {
    "phase_liquid": "liquid",
    "phase_supercritical_liquid": "supercritical",
    "phase_supercritical": "supercritical",
    "phase_critical_point": "supercritical",
    "phase_supercritical_gas": "supercritical",
    "phase_gas": "vapour",
    "phase_twophase": "two-phase",
}
#: A quality at either end of the two phases is a state of one phase.
_SATURATED = {0.0: "liquid", 1.0: "vapour"}
#: Of two phases the library has none of these, or mixes what each phase does with how one becomes the other.
_SINGLE_PHASE = {
    "isobaric_heat_capacity": "cpmass",
    "isochoric_heat_capacity": "cvmass",
    "speed_of_sound": "speed_sound",
}
_ALWAYS = {
    "temperature": "T",
    "pressure": "p",
    "density": "rhomass",
    "specific_enthalpy": "hmass",
    "specific_entropy": "smass",
    "specific_internal_energy": "umass",
}


class NotInstalled(InputError):
    """The independent library is not on this machine; nothing is wrong with the input."""


def library_version() -> str | None:
    """Version of the library that is installed, None without one; it is not imported for that."""
    try:
        return metadata.version(NAME)
    except metadata.PackageNotFoundError:
        return None


def library_fluid(fluid: Any) -> LibraryFluid:
    """The library's own model of the substance or mixture of a fluid (``fluids.model.Fluid``).

    Raises
    ------
    NotInstalled : the library is not installed.
    InputError : the library does not have the substance, or no model of the mixture.
    """
    version = library_version()
    if version is None:
        raise NotInstalled(
            Fault(
                f"The independent property library {NAME} is not installed.",
                expected=f'the extra "{EXTRA}": pip install "reportgen[{EXTRA}]"',
            )
        )
    from CoolProp import CoolProp as library

    names, fractions = _components(fluid, library)
    try:
        backend = library.AbstractState("HEOS", "&".join(names))
        if len(names) > 1:
            backend.set_mole_fractions(list(fractions))
        mass = float(backend.molar_mass())
    except ValueError as error:
        raise _unknown(fluid, version, str(error)) from None
    if abs(mass / fluid.molar_mass - 1.0) > _SAME_MOLAR_MASS and np.isfinite(fluid.molar_mass):
        raise _unknown(fluid, version, f"{', '.join(names)} has another molar mass")
    keys = ",".join(str(library.get_BibTeXKey(name, "EOS")) for name in names)
    equations = dict.fromkeys(key.strip() for key in keys.split(","))
    return LibraryFluid(fluid, backend, library, version, tuple(equations))


def _unknown(fluid: Any, version: str, why: str = "") -> InputError:
    message = f"{NAME} {version} has no model of {fluid.title}."
    return InputError(Fault(message, found=why[:160] or None, expected="another second source"))


def _components(fluid: Any, library: Any) -> tuple[list[str], list[float]]:
    """Names of the library for the substances of a fluid, with their mole fractions."""
    whole = None if fluid.substance is None else _first_known(_names(fluid.substance), library)
    if whole is not None:
        return [whole], [1.0]
    parts = {name: share for name, share in (fluid.composition or {}).items() if share > _LEAST_FRACTION}
    found = [_first_known(_names(name), library) for name in parts]
    version = library_version() or ""
    if not parts or None in found:
        missing = ", ".join(name for name, known in zip(parts, found, strict=True) if known is None)
        raise _unknown(fluid, version, f"not carried: {missing or fluid.substance}")
    total = sum(parts.values())
    return [str(name) for name in found], [share / total for share in parts.values()]


def _names(substance: str) -> Iterator[str]:
    """Names under which a library may know a substance, the surest first: its CAS number, then all others we know."""
    from reportgen.fluids.gases import species
    from reportgen.fluids.real import catalogue

    known: list[str] = [substance]
    try:
        entry = species.resolve(substance)
        known += [entry.key, *(str(alias) for alias in getattr(entry, "aliases", ()))]
    except InputError:
        pass
    for name in tuple(known):
        try:
            data, _ = catalogue.find(name)
        except InputError:
            continue
        known = [data["cas"], data["name"], data["title"], data["refrigerant"], *data["aliases"], *known]
        break
    yield from (name for name in dict.fromkeys(known) if name)


def _first_known(names: Iterator[str], library: Any) -> str | None:
    """The library's own name of the first of some names that it has."""
    for name in names:
        try:
            return str(library.get_fluid_param_string(name, "name"))
        except ValueError:
            continue
    return None


class LibraryFluid:
    """A substance or mixture as the library has it, with the interface of ``fluids.model.Fluid`` as far as a comparison
    needs it. Its zeros of enthalpy and entropy are its own: only differences can be compared.
    """

    kind = "library"
    data_files: tuple[Mapping[str, str], ...] = ()
    entropy_zero = "as the library has it"
    entropy_zero_name = "library"

    def __init__(self, fluid: Any, backend: Any, library: Any, version: str, equations: tuple[str, ...]) -> None:
        self.title = fluid.title
        self.substance = fluid.substance
        self.composition = fluid.composition
        self.molar_mass = float(backend.molar_mass())
        self.gas_constant = float(backend.gas_constant()) / self.molar_mass
        self.name = f"{NAME} {version}"
        self.sources = (f"{self.name}, equation of state {', '.join(equations)}",)
        self._backend = backend
        self._library = library

    def at(self, *, errors: Errors = "raise", **pair: ArrayLike) -> State:
        """States by pressure [Pa] and temperature [K], or temperature and quality [1]; see ``Fluid.at``.

        One call of the library a state: made for the few states of a calculation.
        """
        check_errors(errors)
        given = read_pair(pair, _PAIRS, self.title)
        size = given.first.size
        elements = Elements(size)
        values: dict[str, NDArray[Any]] = {
            name: np.full(size, np.nan) for name in (*_ALWAYS, *_SINGLE_PHASE, "quality", "specific_volume")
        }
        values["compressibility_factor"] = np.full(size, np.nan)
        phase = np.full(size, "", dtype="<U13")
        by_quality = given.names == ("temperature", "quality")
        for index in np.flatnonzero(np.isfinite(given.first) & np.isfinite(given.second)):
            first, second = float(given.first[index]), float(given.second[index])
            try:
                found = self._one(by_quality, first, second)
            except ValueError as error:
                elements.rejected[index] = True
                elements.faults[int(index)] = Fault(f"{self.name}: {str(error)[:200]}")
                continue
            phase[index] = found.pop("phase")
            for name, value in found.items():
                values[name][index] = value
        elements.finish(errors)
        values["specific_volume"] = 1.0 / values["density"]
        values["compressibility_factor"] = (
            values["pressure"] * values["specific_volume"] / (self.gas_constant * values["temperature"])
        )
        return State(given.shape, {**values, "phase": phase}, None, elements.faults)

    def _one(self, by_quality: bool, first: float, second: float) -> dict[str, Any]:
        """Properties of one state; ValueError where the library has none."""
        backend, library = self._backend, self._library
        if by_quality:
            backend.update(library.QT_INPUTS, second, first)
        else:
            backend.update(library.PT_INPUTS, first, second)
        names = {getattr(library, f"i{key}"): word for key, word in _PHASES.items()}
        found: dict[str, Any] = {name: float(getattr(backend, call)()) for name, call in _ALWAYS.items()}
        found["phase"] = _SATURATED.get(second, "two-phase") if by_quality else names.get(backend.phase(), "")
        if by_quality:
            found["quality"] = second
        if found["phase"] != "two-phase":
            found |= {name: self._where_defined(call) for name, call in _SINGLE_PHASE.items()}
        return found

    def _where_defined(self, call: str) -> float:
        """A property of the state last set; NaN where the library defines none, so that the others can be compared."""
        try:
            return float(getattr(self._backend, call)())
        except ValueError:
            return float("nan")

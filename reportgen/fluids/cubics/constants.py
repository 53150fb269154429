"""Critical constants of the species: the ones carried, each with its publication, and the ones a user gives."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from functools import lru_cache
from pathlib import Path
from typing import Any

from reportgen.errors import Fault, InputError, ReportgenError
from reportgen.fluids.gases.species import GasMixture, library, resolve
from reportgen.fluids.numeric import finite_number

__all__ = [
    "DATA_FILE",
    "CriticalConstants",
    "carried",
    "carried_cas",
    "constants_for",
    "digest",
    "key_of",
    "key_of_cas",
    "rackett_source",
]

DATA_FILE = "critical_constants.json"
_PATH = Path(__file__).parent.parent / "data" / DATA_FILE

#: What a user gives for a species, with the unit and the range in which a number can be meant.
_GIVEN: dict[str, tuple[str, float, float]] = {
    "temperature": ("K", 1.0, 5000.0),
    "pressure": ("Pa", 1e4, 1e9),
    "acentric_factor": ("1", -0.6, 2.0),
}
_USER = "critical constants of {}: given by the user"


@dataclass(frozen=True)
class CriticalConstants:
    """Critical temperature [K], critical pressure [Pa] and acentric factor [1] of one species.

    ``rackett_compressibility`` is the Z_RA [1] of the Rackett equation where a published one is carried, else None.
    ``sources`` are lines for the reader.
    """

    temperature: float
    pressure: float
    acentric_factor: float
    rackett_compressibility: float | None
    sources: tuple[str, ...]


@lru_cache(maxsize=1)
def _content() -> tuple[dict[str, Any], str]:
    raw = _PATH.read_bytes()
    return json.loads(raw), hashlib.sha256(raw.replace(b"\r\n", b"\n")).hexdigest()


def digest() -> str:
    """SHA-256 of the data file, the same whatever line ends a checkout has."""
    return _content()[1]


@lru_cache(maxsize=1)
def carried() -> Mapping[str, CriticalConstants]:
    """Constants of every species that has published ones, by species key."""
    content, _ = _content()
    sources = content["sources"]
    found = {}
    for key, entry in content["species"].items():
        point, factor = entry["critical_source"], entry["acentric_source"]
        lines = [f"critical point of {key}: {sources[point]}"]
        if factor == point:
            lines = [f"critical point and acentric factor of {key}: {sources[point]}"]
        else:
            lines.append(f"acentric factor of {key}: {sources[factor]}")
        found[key] = CriticalConstants(
            temperature=float(entry["temperature"]),
            pressure=float(entry["pressure"]),
            acentric_factor=float(entry["acentric_factor"]),
            rackett_compressibility=entry.get("rackett_compressibility"),
            sources=tuple(lines),
        )
    return found


def carried_cas(key: str) -> str | None:
    """CAS number of a species, or None where its constants are not carried."""
    entry = _content()[0]["species"].get(key)
    return None if entry is None else str(entry["cas"])


def key_of_cas(number: str) -> str | None:
    """Species key of a CAS number, or None."""
    return next((key for key, entry in _content()[0]["species"].items() if entry["cas"] == number), None)


def rackett_source() -> str:
    """Publication of the Z_RA values carried."""
    return str(_content()[0]["rackett_source"])


def key_of(name: str, present: Iterable[str], what: str) -> str:
    """Species key of a name in a table that belongs to a composition.

    Parameters
    ----------
    name : name, formula or alias of a species.
    present : species keys of the composition.
    what : the table, for messages, such as "interaction coefficient".

    Raises
    ------
    InputError : an unknown name, or a species that is not in the composition (with the nearest that is).
    """
    entry = resolve(name)
    species = list(present)
    if isinstance(entry, GasMixture) or entry.key not in species:
        near = get_close_matches(name, species, n=1)
        raise InputError(
            Fault(
                f"The {what} names a species that is not in the composition.",
                found=name,
                expected=", ".join(species),
                hint=f"Nearest: {near[0]}." if near else None,
            )
        )
    return entry.key


def constants_for(
    species: Iterable[str], given: Mapping[str, Mapping[str, float]] | None
) -> dict[str, CriticalConstants]:
    """Constants of each species of a composition, the user's before the carried ones.

    Parameters
    ----------
    species : species keys.
    given : by name of a species, ``temperature`` [K], ``pressure`` [Pa], ``acentric_factor`` [1]; all three.

    Raises
    ------
    InputError : with every fault found: species without constants, species not in the composition, given twice, values
        missing, superfluous or out of any sense.
    """
    keys = list(species)
    faults: list[Fault] = []
    own: dict[str, CriticalConstants] = {}
    if given is not None and not isinstance(given, Mapping):
        raise InputError(
            Fault(
                "Critical constants are given by species.",
                found=repr(given)[:60],
                expected='such as {"CO2": {"temperature": 304.13, "pressure": 7.3773e6, "acentric_factor": 0.2239}}',
            )
        )
    for name, values in (given or {}).items():
        try:
            key = key_of(name, keys, "table of critical constants")
            if key in own:
                raise InputError(Fault("Critical constants are given twice for one species.", found=f"{name} is {key}"))
            own[key] = _own(key, name, values)
        except ReportgenError as error:
            faults += error.faults
    found: dict[str, CriticalConstants] = {}
    for key in keys:
        constants = own.get(key) or carried().get(key)
        if constants is None:
            if not faults:
                faults.append(
                    Fault(
                        f"No published critical constants are carried for {library().species[key].name}.",
                        found=key,
                        expected="critical temperature, critical pressure and acentric factor of your own",
                    )
                )
        else:
            found[key] = constants
    if faults:
        raise InputError(faults)
    return found


def _own(key: str, name: str, values: Mapping[str, float]) -> CriticalConstants:
    if not isinstance(values, Mapping):
        raise InputError(
            Fault(f"The critical constants of {name} are a table.", found=repr(values)[:60], expected=", ".join(_GIVEN))
        )
    faults = []
    for unknown in [word for word in values if word not in _GIVEN]:
        near = get_close_matches(str(unknown), _GIVEN, n=1)
        faults.append(
            Fault(
                f"This is not a critical constant of {name}.",
                found=str(unknown),
                expected=", ".join(_GIVEN),
                hint=f"Did you mean {near[0]}?" if near else None,
            )
        )
    for word, (unit, low, high) in _GIVEN.items():
        if word not in values:
            faults.append(Fault(f"The {word.replace('_', ' ')} of {name} is missing.", expected=f"a number in {unit}"))
            continue
        number = finite_number(values[word])
        if number is None or not low <= number <= high:
            faults.append(
                Fault(
                    f"The {word.replace('_', ' ')} of {name} cannot be meant.",
                    found=repr(values[word])[:60],
                    expected=f"{low:g} to {high:g} {unit}",
                )
            )
    if faults:
        raise InputError(faults)
    return CriticalConstants(
        temperature=float(values["temperature"]),
        pressure=float(values["pressure"]),
        acentric_factor=float(values["acentric_factor"]),
        rackett_compressibility=None,
        sources=(_USER.format(key),),
    )

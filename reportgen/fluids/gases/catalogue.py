"""Which ideal gases are carried, what is known of each, and which real fluid one can be tested against."""

from __future__ import annotations

from collections.abc import Collection

from reportgen.fluids.cubics.constants import carried_cas
from reportgen.fluids.gases.gas import IdealGas, ideal_gas
from reportgen.fluids.gases.species import GasSpecies, library, plain_name, resolve
from reportgen.fluids.real import catalogue

__all__ = ["AIR_TOLERANCE", "describe", "names", "real_counterpart"]

#: Largest difference of a mole fraction from dry air's for the real fluid "air" to stand for a mixture.
AIR_TOLERANCE = 0.015


def names() -> tuple[str, ...]:
    """Names by which ideal gases are carried: dry air, then every species, in alphabetical order."""
    carried = library()
    return (
        *sorted(carried.mixtures),
        *sorted((species.name for species in carried.species.values()), key=str.casefold),
    )


def describe(name: str) -> str:
    """What is carried under a name, as lines of text: formula, molar mass, range, zeros, sources.

    Raises InputError for a name that is not carried.
    """
    entry = resolve(name)
    gas = ideal_gas(entry.key)
    lines = [f"{gas.title} (ideal gas)"]
    if isinstance(entry, GasSpecies):
        formula = entry.formula if entry.key == entry.name else entry.key
        others = [other for other in entry.aliases if other != formula]
        number = carried_cas(entry.key)
        lines += [f"  name          {entry.name}", f"  formula       {formula}"]
        if number is not None:
            lines.append(f"  CAS number    {number}")
        if others:
            lines.append(f"  other names   {', '.join(others)}")
    else:
        lines.append(f"  name          {entry.key}")
        lines.append("  mole shares   " + ", ".join(f"{key} {share:g}" for key, share in entry.mole_fractions.items()))
    limits = gas.limits
    lines += [
        f"  molar mass    {gas.molar_mass * 1e3:.6g} g/mol",
        f"  temperature   {limits.minimum_temperature:g} K to {limits.maximum_temperature:g} K",
        f"  zeros         {gas.entropy_zero}",
        *(f"  remark        {remark}" for remark in limits.remarks),
        *(f"  source        {source}" for source in gas.sources),
    ]
    return "\n".join(lines)


def real_counterpart(gas: IdealGas, carried: Collection[str] | None = None) -> str | None:
    """Name of the real fluid that an ideal gas can be tested against, or None.

    ``carried`` are the names of real fluids to choose from, all that are carried unless given.

    A single species has itself; a mixture has "air" when no mole fraction differs from dry air's by more than 0.015.
    """
    real = {plain_name(name): name for name in (catalogue.names() if carried is None else carried)}
    composition = gas.composition
    if composition is None:
        return real.get(plain_name(gas.substance or ""))
    air = library().mixtures["air"].mole_fractions
    furthest = max(abs(composition.get(key, 0.0) - air.get(key, 0.0)) for key in {*composition, *air})
    return real.get("air") if furthest <= AIR_TOLERANCE else None

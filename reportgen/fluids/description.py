"""What is carried, in words: one real fluid in full, and the list of all."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from reportgen.errors import Fault, InputError
from reportgen.fluids.gases import catalogue as gas_catalogue
from reportgen.fluids.gases import species as gas_species
from reportgen.fluids.gases.gas import ideal_gas
from reportgen.fluids.naming import sharing
from reportgen.fluids.pairs import in_words
from reportgen.fluids.real import catalogue
from reportgen.fluids.real.fluid import RealFluid

__all__ = ["describe_all", "describe_real", "list_all"]

_MOST_GUESSES = 3


def describe_all(name: str) -> str:
    """What is carried under a name, real fluid and ideal gas, as lines of text.

    Raises
    ------
    InputError : neither carries the name (a hint gives the nearest), or several substances share the formula.
    """
    texts = []
    for write in (describe_real, gas_catalogue.describe):
        try:
            texts.append(write(name))
        except InputError:
            continue
    if not texts:
        raise InputError(_nowhere(name))
    return "\n\n".join(texts)


def _nowhere(name: Any) -> Fault:
    """What to say of a name under which there is neither a real fluid nor an ideal gas."""
    if not isinstance(name, str):
        return Fault("The name of a fluid is a text.", found=repr(name)[:60], expected='such as "water"')
    found, isomers = repr(name[:80]), sharing(name)
    if isomers:
        return Fault("Several isomers share this formula.", found=found, expected=", ".join(isomers))
    near = [*catalogue.nearest_names(name), *gas_species.nearest_names(name)]
    meant = " or ".join(repr(other) for other in list(dict.fromkeys(near))[:_MOST_GUESSES])
    return Fault(
        "Neither a real fluid nor an ideal gas of this name is carried.",
        found=found,
        expected="one of those that `reportgen fluids` lists, by name, formula, number or CAS number",
        hint=f"Did you mean {meant}?" if meant else None,
    )


def describe_real(name: str) -> str:
    """Title, names, molar mass, range, distinguished points, zeros and sources of a real fluid, as lines of text.

    Raises
    ------
    InputError : no real fluid of that name.
    """
    fluid = RealFluid(name)
    data, _ = catalogue.find(name)
    limits = fluid.limits
    lines = [f"{fluid.title} (real fluid)", f"  name          {fluid.substance}"]
    for heading, text in (
        ("formula", data["formula"]),
        ("refrigerant", data["refrigerant"] if data["refrigerant"] != fluid.substance else ""),
        ("CAS number", data["cas"]),
        ("other names", ", ".join(alias for alias in data["aliases"] if alias != data["formula"])),
    ):
        if text:
            lines.append(f"  {heading:<14}{text}")
    lowest, critical = data["lower_end"], limits.critical_point
    assert critical is not None
    heading = "triple point" if limits.triple_point else "lowest"
    lines += [
        f"  molar mass    {fluid.molar_mass * 1e3:.8g} g/mol",
        f"  temperature   {limits.minimum_temperature:g} K to {limits.maximum_temperature:g} K",
        f"  pressure      up to {in_words('pressure', limits.maximum_pressure, 6)}",
        f"  {heading:<14}{lowest['temperature']:g} K, {in_words('pressure', lowest['pressure'], 6)}",
        f"  critical      {critical.temperature:.8g} K, {in_words('pressure', critical.pressure, 7)}, "
        f"{critical.density:.7g} kg/m3",
        *_melting(data["melting_line"]),
        f"  zeros         {fluid.entropy_zero}",
        *(f"  remark        {remark}" for remark in limits.remarks),
        *(f"  source        {source}" for source in fluid.sources),
    ]
    return "\n".join(lines)


def _melting(line: Mapping[str, Any] | None) -> Iterator[str]:
    """Range of a melting line, as a line of text; nothing without one."""
    if line:
        low, high = line["parts"][0]["minimum_temperature"], line["parts"][-1]["maximum_temperature"]
        yield f"  melting line  {low:g} K to {high:g} K"


def list_all() -> str:
    """Every fluid carried with its range and source, as lines of text: real fluids first, then ideal gases."""
    lines = [
        "Real fluids (published equation of state): name, formula, refrigerant number, temperature, pressure, source"
    ]
    for name in catalogue.names():
        data, _ = catalogue.find(name)
        limits = data["limits"]
        number = data["refrigerant"] if data["refrigerant"] != name else ""
        lines.append(
            f"  {name:<29} {data['formula']:<10} {number:<7}"
            f"{limits['minimum_temperature']:>8.6g} K to {limits['maximum_temperature']:>6g} K"
            f"{limits['maximum_pressure'] / 1e5:>8g} bar   {_short(data['sources']['equation'][0])}"
        )
    gases = gas_catalogue.names()
    lines += ["", f"Ideal gases ({ideal_gas(gases[0]).sources[0]})"]
    for name in gases:
        gas = ideal_gas(name)
        span = gas.limits
        lines.append(
            f"  {name:<29} {span.minimum_temperature:>8.6g} K to {span.maximum_temperature:>6g} K   {gas.sources[-1]}"
        )
    return "\n".join(lines)


def _short(source: Mapping[str, str]) -> str:
    """First author, year, and DOI of a publication, or where it appeared when it has none."""
    first, more, _ = source["authors"].partition("; ")
    place = f"doi:{source['doi']}" if source["doi"] else source["published_in"]
    return f"{first}{' et al.' if more else ''} ({source['year']}), {place}"

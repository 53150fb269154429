"""What is carried, in words: one real fluid in full, and the list of all."""

from __future__ import annotations

from reportgen.fluids.gases import catalogue as gas_catalogue
from reportgen.fluids.gases.gas import ideal_gas
from reportgen.fluids.real import catalogue
from reportgen.fluids.real.fluid import RealFluid

__all__ = ["describe_real", "list_all"]


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
    if data["formula"]:
        lines.append(f"  formula       {data['formula']}")
    seen = {fluid.substance.casefold(), data["formula"].casefold()}
    others = []
    for alias in data["aliases"]:
        if alias.casefold() not in seen:
            seen.add(alias.casefold())
            others.append(alias)
    if others:
        lines.append(f"  other names   {', '.join(others)}")
    triple, critical = limits.triple_point, limits.critical_point
    assert triple is not None
    assert critical is not None
    lines += [
        f"  molar mass    {fluid.molar_mass * 1e3:.8g} g/mol",
        f"  temperature   {limits.minimum_temperature:g} K to {limits.maximum_temperature:g} K",
        f"  pressure      up to {limits.maximum_pressure / 1e6:g} MPa",
        f"  triple point  {triple.temperature:g} K, {triple.pressure:.6g} Pa",
        f"  critical      {critical.temperature:.8g} K, {critical.pressure / 1e6:.7g} MPa, "
        f"{critical.density:.7g} kg/m3",
        f"  zeros         {fluid.entropy_zero}",
        *(f"  remark        {remark}" for remark in limits.remarks),
        *(f"  source        {source}" for source in fluid.sources),
    ]
    return "\n".join(lines)


def list_all() -> str:
    """Every fluid carried with its range and source, as lines of text: real fluids first, then ideal gases."""
    lines = ["Real fluids (published equation of state)"]
    for name in catalogue.names():
        fluid = RealFluid(name)
        limits = fluid.limits
        lines.append(
            f"  {name:<22}{limits.minimum_temperature:>8.6g} K to {limits.maximum_temperature:>6g} K"
            f"   up to {limits.maximum_pressure / 1e5:>6g} bar   {_short(fluid.sources[0])}"
        )
    gases = gas_catalogue.names()
    lines += ["", f"Ideal gases ({ideal_gas(gases[0]).sources[0]})"]
    for name in gases:
        gas = ideal_gas(name)
        limits = gas.limits
        lines.append(
            f"  {name:<22}{limits.minimum_temperature:>8.6g} K to {limits.maximum_temperature:>6g} K"
            f"   {gas.sources[-1]}"
        )
    return "\n".join(lines)


def _short(source: str) -> str:
    """First author, year and DOI of a source; the whole of it where it has no DOI."""
    people, found, rest = source.partition(" (")
    _, has_doi, doi = source.partition("doi:")
    if not (found and has_doi):
        return source
    first, more, _ = people.partition("; ")
    return f"{first}{' et al.' if more else ''} ({rest[:4]}), doi:{doi}"

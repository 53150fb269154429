"""What is carried of a real fluid, in words."""

from __future__ import annotations

from reportgen.fluids import catalogue
from reportgen.fluids.real_fluids import RealFluid

__all__ = ["describe_real"]


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
        f"  critical      {critical.temperature:.8g} K, {critical.pressure / 1e6:.7g} MPa, {critical.density:.7g} kg/m3",
        f"  zeros         {fluid.entropy_zero}",
        *(f"  remark        {remark}" for remark in limits.remarks),
        *(f"  source        {source}" for source in fluid.sources),
    ]
    return "\n".join(lines)

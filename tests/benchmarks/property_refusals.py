"""Whether a state that was refused was refused with a good reason: each reason is checked against the state itself."""

from __future__ import annotations

import re
from types import SimpleNamespace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import Fault
from reportgen.fluids.pairs import SeveralStates
from reportgen.fluids.real.fluid import RealFluid
from tests.benchmarks.property_explanations import BARS, IDEAL, LINES, SATURATION, SOLID, Base, Criticals
from tests.benchmarks.property_states import Reference

__all__ = ["SEVERAL", "is_thin", "judge", "nearest_roots"]

Array = NDArray[Any]

#: Mark of a refusal that offers several states; whether the true one is among them is for the caller to compare.
SEVERAL = "several states, the true one offered"
#: Change of h or u with density, in parts of its scale, below which a thin gas may be refused.
_FLAT = 1e-9


def judge(
    fluid: RealFluid,
    reference: Reference,
    index: int,
    fault: Fault,
    given: tuple[str, str],
    criticals: Criticals,
    base: Base,
) -> tuple[bool, str]:
    """Whether a refusal is a good one, and what to count it as."""
    message, limits = fault.message, fluid.limits
    t, p, rho = (float(getattr(reference, name)[index]) for name in ("temperature", "pressure", "density"))
    if isinstance(fault, SeveralStates):
        return True, SEVERAL
    off = base.reasons[index] in (SATURATION, IDEAL, LINES)
    if off or (("superheat" in given[1] or "subcooling" in given[1]) and base.at_pressure[index]):
        return True, "a state of the library that is none by its own equation"
    if base.reasons[index] == SOLID:
        return True, SOLID
    if "do not tell liquid from vapour" in message:
        liquid, _ = fluid.saturation(temperature=min(t, criticals.temperature[0]))
        return abs(p / float(liquid.pressure) - 1) < 1e-8, "on the saturation line"
    if "between the bubble and the dew line" in message:
        # a saturated state lies on a line; next to the top of the envelope, the library has no lines
        on_line = bool(np.isfinite(reference.quality[index])) and not base.at_temperature[index]
        return fluid.pseudo_pure and not on_line, "on a line, or " * on_line + "between bubble and dew line"
    if "do not tell the pressure" in message:
        return is_thin(fluid, t, rho), "thin gas, whose energy does not tell the pressure"
    edge = 1e-7
    outside = (
        t < limits.minimum_temperature * (1 + edge)
        or t > limits.maximum_temperature * (1 - edge)
        or p > limits.maximum_pressure * (1 - edge)
        or p < 1e-12
    )
    if outside:
        return True, "outside the limits"
    if "below that of the triple point" in message or "below that of the lower end" in message:
        lowest = float(fluid.saturation(temperature=limits.minimum_temperature)[0].pressure)
        return p < lowest * (1 + 1e-6), "below the triple point, or the lower end of the range"
    if "above the critical" in message and t > criticals.temperature[0] * (1 - 1e-6):
        return True, "above the critical point of the equation"
    return False, re.sub(r"[-+]?\d[\d.]*(e[-+]?\d+)?", "#", message.replace(fluid.title, "FLUID"))[:110]


def is_thin(fluid: RealFluid, temperature: float, density: float) -> bool:
    """Whether h at T [K] of a gas hardly depends on its density [kg/m3]; judged at a half and a quarter of it, since
    the state itself may lie on the dew line.
    """
    pair = fluid.at(temperature=[temperature] * 2, density=[0.5 * density, 0.25 * density], errors="mask")
    change = 4 * abs(np.diff(pair.specific_enthalpy)[0])
    return bool(change < _FLAT * max(abs(pair.specific_enthalpy[0]), fluid.gas_constant * temperature))


def nearest_roots(fluid: RealFluid, reference: Reference, faults: dict[int, Fault]) -> tuple[Array, SimpleNamespace]:
    """Of each refusal that offers several states, the one nearest to the true one, as if it had been found.

    Returns
    -------
    indices of these elements, and the fields of the states.
    """
    several = {index: fault for index, fault in faults.items() if isinstance(fault, SeveralStates)}
    at = np.array(sorted(several), dtype=np.intp)
    temperature, density = np.empty(at.size), np.empty(at.size)
    for position, index in enumerate(at):
        t, rho = reference.temperature[index], reference.density[index]
        roots = [(root.temperature, root.density) for root in several[index].roots if root.density]
        apart = [abs(np.log(root[0] / t)) + abs(np.log(root[1] / rho)) for root in roots]
        temperature[position], density[position] = roots[int(np.argmin(apart))] if roots else (np.nan, np.nan)
    state = fluid.at(temperature=temperature, density=density, errors="mask")
    return at, SimpleNamespace(**{name: getattr(state, name) for name in (*BARS, "quality", "phase")})

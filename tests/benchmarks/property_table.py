"""Real fluids against a compiled library, over every fluid and pair: ``python -m tests.benchmarks.property_table``.

States are drawn in (T, ρ) and (T, x) and evaluated once by the library (CoolProp); each pair built from its values is
given to the engine here, and ρ, h, s, u, T, p, c_p, w and the phase are compared. Zeros of h and s are brought together
at one state of each fluid. Deviations of h, s, u are in parts of the value, at least of R·T or R.

A deviation above 1e-7 (c_p and w 1e-5) needs a reason that is tested (property_explanations.py). A state refused with a
good reason is counted; a refusal of several states must offer the true one; every other refusal is *lost*.
"""

from __future__ import annotations

import argparse
import time
from collections.abc import Callable
from types import SimpleNamespace
from typing import Any

import CoolProp.CoolProp as library
import numpy as np
from numpy.typing import NDArray

from reportgen.errors import InputError
from reportgen.fluids import real_fluid
from reportgen.fluids.real.fluid import RealFluid
from tests.benchmarks.property_explanations import (
    BARS,
    Base,
    Criticals,
    critical_points,
    deviations,
    explain,
    explain_base,
)
from tests.benchmarks.property_refusals import SEVERAL, is_thin, judge, nearest_roots
from tests.benchmarks.property_rows import HEADING, Row
from tests.benchmarks.property_states import (
    Reference,
    counterparts,
    draw,
    library_pressure_temperature,
    shift,
)

__all__ = ["FLASH", "ONE_BY_ONE", "PAIRS", "Row", "compare_fluid", "main", "same_point"]

Array = NDArray[Any]

_SINGLE = ("vapour", "gas", "liquid", "compressed liquid", "supercritical", "near critical")
_ALL = (*_SINGLE, "two-phase")
_SATURATED = ("two-phase", "near critical")
#: Pairs by label: names of the two properties, and regions from which states are taken.
PAIRS: dict[str, tuple[tuple[str, str], tuple[str, ...]]] = {
    "p,T": (("pressure", "temperature"), _SINGLE),
    "p,h": (("pressure", "specific_enthalpy"), _ALL),
    "p,s": (("pressure", "specific_entropy"), _ALL),
    "p,x": (("pressure", "quality"), _SATURATED),
    "T,x": (("temperature", "quality"), _SATURATED),
    "T,rho": (("temperature", "density"), _ALL),
    "p,rho": (("pressure", "density"), _ALL),
    "rho,u": (("density", "specific_internal_energy"), _ALL),
    "T,s": (("temperature", "specific_entropy"), _ALL),
    "T,h": (("temperature", "specific_enthalpy"), _ALL),
    "h,s": (("specific_enthalpy", "specific_entropy"), _ALL),
    "p,superheat": (("pressure", "superheat"), ("vapour", "gas")),
    "p,subcooling": (("pressure", "subcooling"), ("liquid",)),
}
NOT_OFFERED = "several states, the true one not offered"
#: Fields of a state that are compared, or tell how.
FIELDS = (*BARS, "quality", "phase")
#: States of each pair that are given one by one as well, and the name of their row.
SINGLY, ONE_BY_ONE = 20, "one by one"
#: The library's own flash instead of its (T, ρ).
FLASH = "p,T of both"
_SAMPLES = 3


def counts(states: int) -> dict[str, int]:
    """States to draw in each region so that every pair has ``states`` of them."""
    part = -(-states // 6)
    return dict.fromkeys(_SINGLE, part) | {
        "vapour": states,
        "gas": states,
        "liquid": states,
        "near critical": 2 * part,
        "two-phase": states,
    }


def _chosen(reference: Reference, label: str, states: int) -> Array:
    """Indices of the states of a pair: as evenly from its regions as they have them, at most ``states``."""
    (first, second), regions = PAIRS[label]
    usable = np.isfinite(getattr(reference, first)) & np.isfinite(getattr(reference, second))
    if label == "p,T":
        usable &= ~np.isfinite(reference.quality)
    pools = [np.flatnonzero(usable & (reference.region == region)) for region in regions]
    taken: list[Array] = []
    left = states
    for position, pool in enumerate(sorted(pools, key=len)):
        share = left // (len(pools) - position)
        taken.append(pool[:share])
        left -= taken[-1].size
    return np.sort(np.concatenate(taken))


def compare_fluid(
    name: str, theirs: str, states: int, labels: tuple[str, ...], seed: int = 7, singly: int = SINGLY
) -> dict[str, Row]:
    """All pairs of one fluid: ``name`` here, ``theirs`` in the library; ``singly`` of each pair one by one too."""
    fluid = real_fluid(name)
    state = library.AbstractState("HEOS", theirs)
    reference, failures = draw(fluid, state, counts(states), seed)
    shift(fluid, state, reference)
    criticals = critical_points(fluid, state)
    base = explain_base(fluid, reference, same_point(fluid, reference), state, criticals)
    rows = {}
    for label in labels:
        chosen = _chosen(reference, label, states)
        part = reference.take(chosen)
        rows[label] = _compare(fluid, part, label, base.take(chosen), criticals, at_once)
        some = chosen[:: max(1, chosen.size // singly)]
        single = _compare(fluid, reference.take(some), label, base.take(some), criticals, one_by_one)
        rows.setdefault(ONE_BY_ONE, Row()).add(single)
    if "p,T" in labels:
        chosen = _chosen(reference, "p,T", states)
        part, lost = library_pressure_temperature(state, reference.take(chosen))
        failures += lost
        rows[FLASH] = _compare_flash(fluid, state, part, base.take(chosen), criticals)
    rows[labels[0]].library_failures = failures
    return rows


def same_point(fluid: RealFluid, reference: Reference) -> Any:
    """Ours at the very T and ρ of the library, or T and x: the density of a saturated liquid holds no pressure."""
    single = fluid.at(temperature=reference.temperature, density=reference.density, errors="mask")
    saturated = fluid.at(temperature=reference.temperature, quality=reference.quality, errors="mask")
    two_phase = np.isfinite(reference.quality)
    fields = (*BARS, "quality", "superheat", "subcooling", "phase")
    return SimpleNamespace(
        **{name: np.where(two_phase, getattr(saturated, name), getattr(single, name)) for name in fields}
    )


def _large(found: dict[str, Array], reference: Reference, state: Any) -> Array:
    """Where a bar is missed, or a property missing, or the phase another."""
    over = state.phase != reference.phase
    with np.errstate(invalid="ignore"):
        for name, bar in BARS.items():
            over |= found[name] > bar
            over |= np.isnan(found[name]) & np.isfinite(getattr(reference, name))
    return over


def at_once(fluid: RealFluid, pair: dict[str, Array]) -> Any:
    """All states of a pair in one call."""
    state = fluid.at(errors="mask", **pair)
    return SimpleNamespace(faults=state.faults, **{name: getattr(state, name) for name in FIELDS})


def one_by_one(fluid: RealFluid, pair: dict[str, Array]) -> Any:
    """One call for each state of a pair, with plain numbers."""
    first, second = pair
    states = [
        fluid.at(errors="mask", **{first: float(a), second: float(b)})
        for a, b in zip(pair[first], pair[second], strict=True)
    ]
    fields = {name: np.array([getattr(state, name) for state in states]) for name in FIELDS}
    faults = {index: state.faults[0] for index, state in enumerate(states) if state.faults}
    return SimpleNamespace(faults=faults, **fields)


def _compare(
    fluid: RealFluid,
    reference: Reference,
    label: str,
    base: Base,
    criticals: Criticals,
    evaluate: Callable[[RealFluid, dict[str, Array]], Any],
) -> Row:
    given = PAIRS[label][0]
    row = Row(states=reference.size)
    if not reference.size:
        return row
    start = time.perf_counter()
    try:
        state = evaluate(fluid, {name: getattr(reference, name) for name in given})
    except InputError as error:
        row.failures[f"not carried: {error.faults[0].message}"] += reference.size
        return row
    except Exception as error:  # noqa: BLE001 - any failure at all is what is looked for here
        row.failures[f"{type(error).__name__}: {error}"[:120]] += reference.size
        return row
    row.seconds = time.perf_counter() - start
    fields = {name: np.array(getattr(state, name)) for name in FIELDS}
    at, roots = nearest_roots(fluid, reference, state.faults)
    for name, values in fields.items():
        values[at] = getattr(roots, name)
    ours = SimpleNamespace(**fields)
    found = deviations(reference, ours, fluid.gas_constant)
    over = _large(found, reference, ours)
    refused = np.zeros(reference.size, dtype=bool)
    refused[list(state.faults)] = True
    offered = np.zeros(reference.size, dtype=bool)
    offered[at] = True
    looked_at = np.flatnonzero(over & (~refused | offered))
    reasons = np.full(reference.size, "", dtype="<U80")
    if looked_at.size:
        part = SimpleNamespace(**{name: values[looked_at] for name, values in fields.items()})
        reasons[looked_at] = explain(fluid, reference.take(looked_at), part, given, base.take(looked_at), criticals)
    for index, fault in state.faults.items():
        good, text = judge(fluid, reference, index, fault, given, criticals, base)
        if text == SEVERAL and over[index] and not reasons[index]:
            t, rho = float(reference.temperature[index]), float(reference.density[index])
            good = "a gas so thin" in fault.message and is_thin(fluid, t, rho)
            text = "several states, the true one offered as a thin gas" if good else NOT_OFFERED
        (row.refused if good else row.lost)[text] += 1
        if not good:
            _sample(row, reference, index, given, str(fault))
    bad = np.flatnonzero(over & ~refused & (reasons == ""))
    row.reasons.update(str(text) for text in reasons[~refused] if text)
    for index in bad:
        wrong = ours.phase[index] != reference.phase[index]
        row.wrong_phase += bool(wrong)
        row.unexplained += 1
        worst = max(BARS, key=lambda name: np.nan_to_num(found[name][index] / BARS[name], nan=-1.0))
        text = f"phase {ours.phase[index]}, " if wrong else ""
        text += (
            f"{worst} {float(fields[worst][index])!r} against {float(getattr(reference, worst)[index])!r} at "
            f"T = {float(reference.temperature[index])!r}, rho = {float(reference.density[index])!r} "
            f"({reference.phase[index]})"
        )
        _sample(row, reference, index, given, text)
    row.compared = int((~refused).sum())
    row.measure(found, ~refused, reference, criticals, reasons != "")
    return row


def _sample(row: Row, reference: Reference, index: int, given: tuple[str, str], text: str) -> None:
    if len(row.samples) < _SAMPLES:
        pair = ", ".join(f"{name}={float(getattr(reference, name)[index])!r}" for name in given)
        row.samples.append(f"at({pair}) [{reference.region[index]}]: {text}")


def _compare_flash(fluid: RealFluid, state: Any, reference: Reference, base: Base, criticals: Criticals) -> Row:
    """Ours against the library's own flash of pressure and temperature.

    Where they differ, the library is asked for the pressure at our density and at its own: whose is nearer?
    """
    row = Row(states=reference.size)
    ours = fluid.at(pressure=reference.pressure, temperature=reference.temperature, errors="mask")
    found = deviations(reference, ours, fluid.gas_constant)
    kept = np.isfinite(reference.density) & np.isfinite(ours.density)
    row.compared = int(kept.sum())
    with np.errstate(invalid="ignore"):
        over = np.any([found[name] > bar for name, bar in BARS.items()], axis=0)
    explained = base.reasons != ""
    row.reasons.update(str(text) for text in base.reasons[kept & explained])
    for index in np.flatnonzero(kept & ~explained & over):
        t, p = reference.temperature[index], reference.pressure[index]
        left = []
        for density in (ours.density[index], reference.density[index]):
            state.update(library.DmassT_INPUTS, density, t)
            left.append(abs(state.p() / p - 1))
        noise = 1e-13 * max(1.0, reference.density[index] * fluid.gas_constant * t / p)
        explained[index] = left[0] <= max(left[1], noise)
        if explained[index]:
            row.reasons["ours is as near to the pressure given, by the library"] += 1
        else:
            row.unexplained += 1
            _sample(row, reference, index, PAIRS["p,T"][0], f"density {ours.density[index]} gives {left}")
    row.measure(found, kept, reference, criticals, explained)
    return row


def main() -> int:
    """Print the table; the exit status is 1 while anything is unexplained, lost or failed."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--states", type=int, default=2000, help="states a fluid and pair (2000)")
    parser.add_argument("--fluids", default="", help="names, separated by commas (all)")
    parser.add_argument("--pairs", default="", help=f"labels separated by semicolons, of {'; '.join(PAIRS)} (all)")
    parser.add_argument("--seed", type=int, default=7, help="of the random states (7)")
    parser.add_argument("--full", action="store_true", help="one line a pair, not only those with findings")
    chosen = parser.parse_args()
    matched, missing = counterparts()
    names = [name.strip() for name in chosen.fluids.split(",") if name.strip()] or list(matched)
    labels = tuple(chosen.pairs.split(";")) if chosen.pairs else tuple(PAIRS)
    print(f"{chosen.states} states a fluid and pair; CoolProp {library.get_global_param_string('version')}")
    print(f"{len(matched)} fluids; of the library's not carried: {', '.join(missing) or 'none'}")
    print(HEADING)
    totals: dict[str, Row] = {}
    start = time.perf_counter()
    for name in names:
        rows = compare_fluid(name, matched[str(real_fluid(name).substance)], chosen.states, labels, chosen.seed)
        whole = Row()
        for label, row in rows.items():
            if label != FLASH:  # its deviations are the library's own
                whole.add(row)
            totals.setdefault(label, Row()).add(row)
            if chosen.full or not row.good:
                print(f"  {name[:18]:18s} {label:13s} {row}")
            for sample in row.samples:
                print(f"      {sample}")
        print(f"{name[:20]:20s} {'all pairs':13s} {whole}", flush=True)
    print(f"\nTotals over {len(names)} fluids, {time.perf_counter() - start:.0f} s")
    whole = Row()
    for label, row in totals.items():
        print(f"{'':20s} {label:13s} {row}  {row.seconds:.1f} s")
        if label != FLASH:
            whole.add(row)
    print(f"{'':20s} {'everything':13s} {whole}")
    return int(not (whole.good and totals.get(FLASH, Row()).good))


if __name__ == "__main__":
    raise SystemExit(main())

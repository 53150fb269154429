"""Zeros of enthalpy and entropy: which streams count from one, and what to say where a balance would mix two.

A zero cancels where as much of a fluid leaves as enters. It does not where a stream comes in as one fluid and goes
out as another: then the difference of the zeros would be taken for heat or for entropy generated.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, NamedTuple

from reportgen.balances.composition import is_made
from reportgen.errors import Fault

__all__ = ["StreamGroup", "conflicts", "same_zero"]

#: The zero that models of different kinds share.
COMMON_ZERO = "third-law"


class StreamGroup(NamedTuple):
    """Streams of one side of a piece that balance each other: one substance, one zero."""

    side: str
    fluid_id: str
    fluid: Any
    inlets: tuple[str, ...]
    outlets: tuple[str, ...]

    @property
    def states(self) -> tuple[str, ...]:
        """All its states."""
        return (*self.inlets, *self.outlets)


def same_zero(first: Any, second: Any) -> bool:
    """Whether two models (``fluids.model.Fluid``) are of one substance or mixture and count from one zero.

    The equations may differ: third-law water is the same as an ideal gas and by its equation of state. A constant
    heat capacity is not the same as a variable one, whose enthalpy it leaves away from the reference point.
    """
    if is_made(first) or is_made(second):
        return first is second  # the composition of one follows from its own flows
    return first is second or (
        _same_substance(first, second)
        and first.entropy_zero_name == second.entropy_zero_name
        and getattr(first, "constant_heat_capacity", None) == getattr(second, "constant_heat_capacity", None)
    )


def _same_substance(first: Any, second: Any) -> bool:
    return bool(first.substance == second.substance and first.composition == second.composition)


def conflicts(title: str, owner: str, groups: Sequence[StreamGroup]) -> list[Fault]:
    """Faults for streams of a piece that leave as another fluid than they came in; none for those that pass through.

    Parameters
    ----------
    title, owner : the piece, to begin a sentence with and as a path.
    groups : its streams, those that balance each other together.
    """
    faults: dict[frozenset[str], Fault] = {}
    for group in groups:
        if group.inlets and group.outlets:
            continue
        others = [other for other in groups if other.side == group.side and other is not group]
        opposite = [other for other in others if (other.outlets if group.inlets else other.inlets)]
        if not opposite:
            verb = "enters" if group.inlets else "leaves"
            text = (
                f"Fluid {group.fluid_id} {verb} {title} (state {', '.join(group.states)}) but nothing is on the other "
            )
            faults[frozenset(group.states)] = Fault(f"{text}side.", owner)
        for other in opposite[:1]:
            pair = frozenset((*group.states, *other.states))
            faults.setdefault(pair, _conflict(title, owner, *sorted((group, other), key=groups.index)))
    return list(faults.values())


def _conflict(title: str, owner: str, first: StreamGroup, second: StreamGroup) -> Fault:
    """Streams of two fluids in one balance: both fluids, both zeros, and what would do."""
    who = " and ".join(f"fluid {group.fluid_id} (state {', '.join(group.states)})" for group in (first, second))
    zeros = "; ".join(f"{group.fluid_id}: {_stated(group.fluid)}" for group in (first, second))
    if is_made(first.fluid) or is_made(second.fluid):
        message = f"{title} brings {who} into one balance, but the products of a combustor are a fluid of their own."
        cure = "a combustor in which they join, with a fluid that names it in products_of"
        return Fault(message, owner, found=zeros, expected=cure)
    if _same_substance(first.fluid, second.fluid):
        message = f"{title} brings {who} into one balance, but their enthalpies and entropies have different zeros."
        return Fault(message, owner, found=zeros, expected=_cure(first, second))
    if first.fluid.entropy_zero_name == second.fluid.entropy_zero_name:
        zeros = "; ".join(f"{group.fluid_id}: {group.fluid.title}" for group in (first, second))
        why = "which are different substances: what comes in as one of them cannot go out as the other"
    else:
        why = "which are different substances with different zeros of enthalpy and entropy"
    message = f"{title} brings {who} into one balance, {why}."
    return Fault(message, owner, found=zeros, expected="states of the same fluid on both sides of a stream")


def _stated(fluid: Any) -> str:
    return f"{fluid.entropy_zero_name} ({str(fluid.entropy_zero).rstrip('.')})"


def _cure(first: StreamGroup, second: StreamGroup) -> str:
    """What gives two fluids of one substance one zero."""
    both = (first, second)
    shiftable = [group.fluid_id for group in both if group.fluid.kind == "real-fluid"]
    tables = " and ".join(f"[fluids.{name}]" for name in shiftable)
    if len(shiftable) == len(both):
        return f"the same reference_state in {tables}, or one fluid for both"
    if shiftable and any(group.fluid.entropy_zero_name == COMMON_ZERO for group in both):
        return f'reference_state = "{COMMON_ZERO}" in {tables}, or one fluid for both'
    return "one fluid for both"

"""What is given for a state, its own givens and those of the state that it is ``like``."""

from __future__ import annotations

from collections.abc import Mapping

from reportgen.spec.fields import QuantityOf
from reportgen.spec.schema import FLOWS, INTENSIVE, STATE_KEYS
from reportgen.spec.source import Source

__all__ = ["check_states", "fluid_of", "givens_of"]

#: Givens that say the same thing in different ways: an own one takes the place of any that is copied.
_SAME = ({*FLOWS}, {"density", "specific_volume"}, {"superheat", "subcooling"})
#: Pairs that never fix a state, with the reason.
_DEPENDENT = {
    frozenset({"density", "specific_volume"}): "one is the reciprocal of the other",
    frozenset({"superheat", "subcooling"}): "a state is above or below saturation",
    frozenset({"quality", "superheat"}): "a superheated state has no vapour fraction",
    frozenset({"quality", "subcooling"}): "a subcooled state has no vapour fraction",
}
_SATURATION = ("quality", "superheat", "subcooling")


#: How often a likeness is followed; nobody could check a longer chain on paper.
_LONGEST_LIKENESS = 10


def _ancestry(source: Source, state: str) -> list[str]:
    """The state, the one it is like, the one that is like, and so on.

    Ends before an unknown or a repeated one, and in any case soon.
    """
    chain: list[str] = []
    states = source.table("states")
    following: str | None = state
    while following in states and following not in chain and len(chain) <= _LONGEST_LIKENESS:
        chain.append(following)
        following = source.text("states", following, "like")
    return chain


def givens_of(source: Source, state: str) -> dict[str, str]:
    """Names of all quantities given for a state, each with the state in whose table it stands; own ones first."""
    givens: dict[str, str] = {}
    for owner in _ancestry(source, state):
        inner = dict(givens)
        for key in source.table("states", owner):
            replaced = next((same for same in _SAME if key in same), {key})
            if key in STATE_KEYS and not replaced & inner.keys():
                givens[key] = owner
    return givens


def fluid_of(source: Source, state: str) -> str | None:
    """The fluid of a state, its own or that of the state it is like."""
    return next((fluid for owner in _ancestry(source, state) if (fluid := source.text("states", owner, "fluid"))), None)


def check_states(source: Source, context: Mapping[str, float]) -> None:
    """Fluids, likeness, and that no more is given than can be independent."""
    in_a_circle: set[str] = set()
    for state in source.table("states"):
        _check_likeness(source, state, in_a_circle)
        _check_fluid(source, state)
        _check_intensive(source, state)
        _check_amount(source, state, context)
        flows = [key for key in source.table("states", state) if key in FLOWS]
        if len(flows) > 1:
            source.report(
                ("states", state, flows[1]),
                "The flow of this state is given more than once.",
                at="key",
                found=", ".join(flows),
                expected="one of them",
            )


def _check_likeness(source: Source, state: str, in_a_circle: set[str]) -> None:
    like = source.text("states", state, "like")
    if like is None:
        return
    states = source.table("states")
    location = ("states", state, "like")
    if like not in states:
        if source.names_are_complete and not source.is_broken(("states", like)):
            source.report(
                location,
                "There is no such state.",
                found=f'"{like[:60]}"',
                expected="a state of this file",
                hint=source.hint(like, states),
            )
        return
    chain = _ancestry(source, state)
    if len(chain) > _LONGEST_LIKENESS:
        source.report(
            location,
            "The likeness goes from state to state too often.",
            found=f"{' like '.join(chain[:4])} like …",
            expected=f"at most {_LONGEST_LIKENESS} states in a chain",
        )
    elif source.text("states", chain[-1], "like") == state and state not in in_a_circle:
        in_a_circle.update(chain)
        source.report(
            location,
            "A state cannot be like itself, not by way of others either.",
            found=" like ".join([*chain, state][:8]),
            expected="a state whose givens stand in its own table",
        )


def _check_fluid(source: Source, state: str) -> None:
    fluids = source.table("fluids")
    fluid = source.text("states", state, "fluid")
    location = ("states", state, "fluid")
    if fluid is None:
        if source.node(location) is None and fluid_of(source, state) is None and not _likeness_is_open(source, state):
            source.miss(location, '"fluid" is missing.', expected="Name of a table of [fluids]")
    elif fluid not in fluids and source.names_are_complete and not source.is_broken(("fluids", fluid)):
        source.report(
            location,
            "There is no such fluid.",
            found=f'"{fluid[:60]}"',
            expected="a fluid of this file: " + ", ".join(list(fluids)[:12]) if fluids else "a table [fluids.<name>]",
            hint=source.hint(fluid, fluids),
        )


def _likeness_is_open(source: Source, state: str) -> bool:
    """Whether the file has a fault in the likeness already, so that the fluid cannot be known."""
    last = _ancestry(source, state)[-1]
    return source.node(("states", last, "like")) is not None


def _check_intensive(source: Source, state: str) -> None:
    givens = {key: owner for key, owner in givens_of(source, state).items() if key in INTENSIVE}
    own = [key for key, owner in givens.items() if owner == state]
    if not own and len(givens) > 0:
        return  # all copied: any fault is reported at the state they are copied from
    location = ("states", state, own[min(2, len(own) - 1)] if own else "like")
    listed = ", ".join(key if owner == state else f"{key} (like {owner})" for key, owner in givens.items())
    if _check_meaning(source, state, own):
        return
    for pair, reason in _DEPENDENT.items():
        if pair <= givens.keys():
            at = [key for key in own if key in pair]
            names = " and ".join(key for key in givens if key in pair)
            source.report(
                ("states", state, at[-1]) if at else location,
                f"{names} cannot both be given: {reason}.",
                at="key",
                found=listed,
                expected="two independent quantities",
            )
            return
    if len(givens) > 2:
        source.report(
            location,
            "More than two quantities are given that each help to fix the state.",
            at="key",
            found=listed,
            expected="any two independent ones",
        )


def _check_meaning(source: Source, state: str, own: list[str]) -> bool:
    """What the model of the fluid does not have, or does not leave free; True when something was reported."""
    fluid = fluid_of(source, state)
    model = None if fluid is None else source.text("fluids", fluid, "model")
    if model == "ideal-gas":
        why, instead = _NOT_IN_AN_IDEAL_GAS, "pressure, temperature or another quantity of a gas; or a real-fluid"
        dependent, reason = {"temperature", "specific_enthalpy"}, "in an ideal gas one follows from the other"
    elif model == "incompressible":
        why, instead = _NOT_IN_AN_INCOMPRESSIBLE, "pressure, temperature, specific_enthalpy or specific_entropy"
        dependent, reason = {"temperature", "specific_entropy"}, "without compression one follows from the other"
    else:
        return False
    wrong = [key for key in own if key in why]
    for key in wrong:
        source.report(("states", state, key), why[key], at="key", found=key, expected=instead)
    if not wrong and dependent <= set(own):
        first, second = sorted(dependent, key=INTENSIVE.index)
        source.report(
            ("states", state, second),
            f"{first} and {second} cannot both be given: {reason}.",
            at="key",
            found=f"{first}, {second}",
            expected="two independent quantities, such as pressure and temperature",
        )
        return True
    return bool(wrong)


_NOT_IN_AN_IDEAL_GAS = dict.fromkeys(_SATURATION, "An ideal gas does not condense.")
_NOT_IN_AN_INCOMPRESSIBLE = {
    **dict.fromkeys(_SATURATION, "An incompressible fluid does not change its phase."),
    **dict.fromkeys(("density", "specific_volume"), "The density is given with the incompressible fluid."),
}


def _check_amount(source: Source, state: str, context: Mapping[str, float]) -> None:
    """An amount of substance of a fluid whose molar mass nobody gives."""
    fluid = fluid_of(source, state)
    if fluid is None or source.text("fluids", fluid, "model") != "incompressible":
        return
    for key in ("molar_flow", "volume_flow"):
        quantity = QuantityOf(("molar_flow",)).read_at(source, ("states", state, key), context)
        if quantity is not None:
            source.report(
                ("states", state, key),
                "An incompressible fluid has no molar mass, by which an amount of substance would become a mass.",
                found=f'"{quantity.text}"',
                expected="mass_flow, or volume_flow at the conditions of the state",
            )

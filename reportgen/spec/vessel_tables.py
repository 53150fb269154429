"""Vessels: the states they begin with and are fed from, and what is given without what it needs."""

from __future__ import annotations

from reportgen.balances.vessels.declared import omissions
from reportgen.spec.paths import kind_of
from reportgen.spec.process_tables import unknown_state
from reportgen.spec.schema import AMOUNTS, FLOWS
from reportgen.spec.source import Source
from reportgen.spec.states import fluid_of, givens_of

__all__ = ["check_vessels"]


def check_vessels(source: Source) -> None:
    """States, fluids and combinations of what is given; tags are checked with those of processes."""
    looked_at: set[str] = set()
    for tag in source.table("vessels"):
        kind = kind_of(source, tag, "vessels")
        if kind is None:
            continue
        for port in kind.ports:
            for location, state in source.texts("vessels", tag, port.name):
                if state not in source.table("states"):
                    unknown_state(source, location, state)
                elif state not in looked_at:
                    _check_amount(source, tag, state)
                    looked_at.add(state)
        _check_fluids(source, tag)
        _check_given(source, tag, kind.name)


def _check_amount(source: Source, tag: str, state: str) -> None:
    """A vessel holds what its volume holds; how much flows in or out is what is looked for."""
    givens = givens_of(source, state)
    for name in (*AMOUNTS, *FLOWS):
        if name in givens:
            source.report(
                ("states", givens[name], name),
                f"State {state} belongs to vessel {tag}, whose volume tells how much there is.",
                at="key",
                found=name,
                expected="properties of the fluid alone",
            )
            return


def _check_fluids(source: Source, tag: str) -> None:
    """Content and supply are of one fluid, which can be compressed."""
    found = [
        (location, state, fluid)
        for port in ("initial", "supply")
        for location, state in source.texts("vessels", tag, port)
        if (fluid := fluid_of(source, state)) is not None and fluid in source.table("fluids")
    ]
    for location, state, fluid in found:
        if source.text("fluids", fluid, "model") == "incompressible":
            source.report(
                location,
                "An incompressible fluid keeps its density: its pressure does not tell how much of it is in a vessel.",
                found=f'"{state}", of {fluid}',
                expected="a state of a compressible fluid",
            )
    if len(found) == 2 and found[0][2] != found[1][2]:
        source.report(
            found[1][0],
            "What enters is of another fluid than the content.",
            found=f'"{found[1][1]}", of {found[1][2]}; "{found[0][1]}" is of {found[0][2]}',
            expected="states of one fluid",
        )


def _check_given(source: Source, tag: str, kind: str) -> None:
    def has(name: str) -> bool:
        return source.node(("vessels", tag, *name.split("."))) is not None

    for omission in omissions(kind, has):
        location = ("vessels", tag, *omission.cause.split(".")) if omission.cause else ("vessels", tag)
        if omission.cause:
            source.report(location, omission.text, at="key", found=omission.cause, expected=omission.expected)
        else:
            source.miss((*location, omission.name), omission.text, expected=omission.expected)

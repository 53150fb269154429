"""States held against a second source: both values and their difference, property by property."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

from markupsafe import Markup

from reportgen.names import NAMES
from reportgen.report.links import anchor
from reportgen.report.presenter import Presenter, in_order, natural, prose

__all__ = ["cross_checks"]

_DIFFERS, _NOT_COMPARED = "differs", "not compared"
#: Property models and other sources in a few words.
_WORDS = {
    "ideal-gas": "ideal gas",
    "real-fluid": "real fluid",
    "cubic": "cubic equation of state",
    "incompressible": "incompressible",
    "statistical": "statistical mechanics from molecular constants",
}
_DIGITS = 2
#: Relative differences below this are those of rounding.
_LEAST = 1e-8


def cross_checks(presenter: Presenter) -> dict[str, Any] | None:
    """One table for each fluid and second source; a row for each state, and for each gas that was checked alone."""
    groups: dict[tuple[str, str], list[dict[str, Any]]] = {}
    for entry in presenter.record.data["cross_checks"]:
        groups.setdefault((entry["fluid"], entry["second_model"]), []).append(entry)
    if not groups:
        return None
    listed = {
        source: fluid["title"]
        for _, fluid in in_order(presenter.record.data["plant"]["fluids"])
        for source in fluid["sources"]
    }
    tables = [_table(fluid, second, entries, listed, presenter) for (fluid, second), entries in groups.items()]
    return {"tables": tables, "counted": any(table["counted_from"] for table in tables)}


def _table(
    fluid: str, second: str, entries: list[dict[str, Any]], listed: dict[str, str], presenter: Presenter
) -> dict[str, Any]:
    """One table; sources that stand on the page already, as ``listed`` says where, are not repeated in full."""
    title = presenter.record.data["plant"]["fluids"][fluid]["title"]
    sources = entries[0]["second_sources"]
    compared = [entry for entry in entries if entry["verdict"] != _NOT_COMPARED]
    columns = sorted(dict.fromkeys(_column(entry) for entry in compared), key=_place)
    rows: dict[tuple[str, str], list[dict[str, Any]]] = {}
    for entry in compared:
        rows.setdefault((entry["species"] or "", entry["state"]), []).append(entry)
    states = [_row(species, state, found, columns, presenter) for (species, state), found in rows.items()]
    thresholds = sorted({entry["threshold"] for entry in entries})
    model = presenter.record.data["plant"]["fluids"][fluid]["model"]
    told = [source for source in sources if source not in listed]
    elsewhere = dict.fromkeys(listed[source] for source in sources if source in listed)
    listed |= dict.fromkeys(told, f"the check of {title} above")
    return {
        "fluid": fluid,
        "title": title,
        "anchor": anchor("fluid", fluid),
        "first": _WORDS.get(model, model),
        "second": _second(second, entries[0].get("second_title")),
        "sources": [*told, *([f"{'others ' if told else ''}as for {', '.join(elsewhere)}"] if elsewhere else [])],
        "tolerance": " or ".join(_percent(threshold, signed=False) for threshold in thresholds),
        "heads": [_head(*column, presenter) for column in columns],
        "rows": [row for row in states if not row["species"]] + [row for row in states if row["species"]],
        "counted_from": next((entry["counted_from"] for entry in compared if entry["counted_from"]), None),
        "left_out": _left_out(entries),
        "differs": sum(entry["verdict"] == _DIFFERS for entry in entries),
        "count": len(compared),
    }


def _second(name: str, title: str | None) -> str:
    """A second source in words: a library by its own name, a model with the substance (and equation) it is of."""
    if name == "library":
        return title or "an independent library"
    words = _WORDS.get(name, name)
    match name:
        case "real-fluid" if title:
            return f"{words} {title}"
        case "cubic" if title:
            return f"{words}: {title}"
    return words


def _place(column: tuple[str, str]) -> tuple[bool, int]:
    """Values as they stand before those that count from a state, each in the order of the glossary."""
    name, counted_from = column
    return bool(counted_from), list(NAMES).index(name)


def _column(entry: Mapping[str, Any]) -> tuple[str, str]:
    """Property and the state from which it counts, empty for a value as it stands."""
    return entry["property"], entry["counted_from"] or ""


def _head(name: str, counted_from: str, presenter: Presenter) -> dict[str, Any]:
    entry = NAMES[name]
    symbol = entry.symbol
    text = entry.text
    if counted_from:
        symbol = rf"{symbol} - {symbol}_{{\mathrm{{{counted_from}}}}}"
        text = f"{text}, counted from state {counted_from}"
    return {
        "symbol": presenter.math(symbol),
        "text": text,
        "unit": presenter.display.unit_text(entry.dimension),
    }


def _row(
    species: str,
    state: str,
    entries: Iterable[dict[str, Any]],
    columns: Iterable[tuple[str, str]],
    presenter: Presenter,
) -> dict[str, Any]:
    found = {_column(entry): entry for entry in entries}
    remark = next((entry["remark"] for entry in found.values() if entry["remark"]), None)
    return {
        "species": species,
        "state": state,
        "anchor": anchor("state", state),
        "cells": [_cell(found.get(column), presenter) for column in columns],
        "remark": prose(remark),
    }


def _cell(entry: dict[str, Any] | None, presenter: Presenter) -> dict[str, Any] | None:
    if entry is None:
        return None
    first: str | Markup = _number(entry, "first", presenter)
    if entry["species"] is None and entry["counted_from"] is None:
        first = presenter.link(entry["path"], first)
    return {
        "first": first,
        "second": _number(entry, "second", presenter),
        "relative": _percent(entry["relative"]),
        "differs": entry["verdict"] == _DIFFERS,
    }


def _number(entry: dict[str, Any], which: str, presenter: Presenter) -> str:
    """The value of one source; 0 where it is rounding of what the difference is measured in."""
    value, relative = entry[which], entry["relative"]
    scale = abs(entry["difference"] / relative) if relative else 0.0
    return presenter.show(0.0 if abs(value) < _LEAST * scale else value, entry["dimension"]).number


def _left_out(entries: Iterable[dict[str, Any]]) -> list[tuple[str, str]]:
    """What was not compared, states or properties of them, with the reason."""
    reasons: dict[str, list[dict[str, Any]]] = {}
    for entry in entries:
        if entry["verdict"] == _NOT_COMPARED:
            reasons.setdefault(entry["remark"], []).append(entry)
    return [(_subject(left_out), prose(reason)) for reason, left_out in reasons.items()]


def _subject(entries: Iterable[dict[str, Any]]) -> str:
    """ "state 1", "states 1, 2", or "specific enthalpy and specific entropy of state 1"."""
    states = sorted({entry["state"] for entry in entries}, key=natural)
    words = f"state{'' if len(states) == 1 else 's'} {', '.join(states)}"
    properties = dict.fromkeys(NAMES[entry["property"]].text.lower() for entry in entries if entry["property"])
    return f"{' and '.join(properties)} of {words}" if properties else words


def _percent(part: float, *, signed: bool = True) -> str:
    """A part of one in per cent, to two digits."""
    if abs(part) < _LEAST:
        return "0\N{NO-BREAK SPACE}%" if part == 0.0 else "<\N{NO-BREAK SPACE}10⁻⁶\N{NO-BREAK SPACE}%"
    number = f"{100.0 * part:.{_DIGITS}g}"
    mantissa, _, exponent = number.partition("e")
    if exponent:
        raised = str(int(exponent)).translate(str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"))
        number = f"{mantissa} × 10{raised}"
    sign = "+" if signed and part > 0.0 else ""
    return f"{sign}{number.replace('-', '−')} %".replace(" ", "\N{NO-BREAK SPACE}")

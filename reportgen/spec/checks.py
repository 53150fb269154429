"""What only the comparison of several places of the file can show, beside states and network.

The checks read the tree, not the validated models, so that they also run on a file that has other faults. A check
that needs something unreadable stays silent: that fault is reported already.
"""

from __future__ import annotations

import re
from collections.abc import Mapping

from reportgen.errors import InputError
from reportgen.quantities import Quantity
from reportgen.spec.fields import QuantityOf, shown
from reportgen.spec.fluid_tables import check_fluids, check_products
from reportgen.spec.network import check_network
from reportgen.spec.paths import input_locations, result_dimensions
from reportgen.spec.process_tables import check_processes
from reportgen.spec.schema import MOST_CORRELATIONS, NARRATIVES
from reportgen.spec.second_sources import check_second_sources
from reportgen.spec.source import Location, Source, path_of
from reportgen.spec.states import check_states, givens_of
from reportgen.spec.vessel_tables import check_vessels

__all__ = ["check", "criterion_limit"]

_TO_BE_VERIFIED = "to be verified"


def check(source: Source, context: Mapping[str, float]) -> None:
    """Note every fault of meaning in ``source``."""
    if not any(source.table(section) for section in ("states", "equipment", "processes", "vessels")):
        source.miss((), "The file holds nothing to evaluate.", expected="[states.<name>] and [equipment.<tag>]")
    _check_title_block(source)
    _check_confirmed(source)
    check_fluids(source, context)
    check_states(source, context)
    check_second_sources(source)
    check_network(source)
    check_products(source)
    check_processes(source)
    check_vessels(source)
    _check_limits(source, context)
    _check_criteria(source, context)
    _check_correlations(source)
    _check_cautions(source)


# --- the document ---------------------------------------------------------------------------------------------------


def _check_title_block(source: Source) -> None:
    for key in NARRATIVES:
        named = ("calculation", f"{key}_file")
        if source.node(("calculation", key)) is not None and source.node(named) is not None:
            source.report(
                named,
                f"The {key} is given twice.",
                at="key",
                found=f"{key} and {key}_file",
                expected="one of the two",
            )
    rows = source.node(("revisions",))
    first_row: dict[str, int] = {}
    for number, row in enumerate(rows.items if rows is not None else []):
        index = row.table.get("index")
        if index is None or not isinstance(index.value, str):
            continue
        if index.value in first_row:
            source.report(
                ("revisions", number, "index"),
                f"Revision {index.value} is already listed at line {first_row[index.value]}.",
                found=f'"{index.value}"',
                expected="each revision once",
            )
        first_row.setdefault(index.value, index.line)
    revision = source.text("calculation", "revision")
    unreadable = any("index" not in row.table or row.table["index"].broken for row in (rows.items if rows else []))
    if revision is not None and first_row and revision not in first_row and not unreadable:
        source.report(
            ("calculation", "revision"),
            "This revision is not listed in [[revisions]].",
            found=f'"{revision}"',
            expected="a row with its index, date and description",
            hint=source.hint(revision, first_row),
        )


def _check_confirmed(source: Source) -> None:
    """A confirmed document leaves nothing to be verified and has its revision history."""
    if source.text("calculation", "status") != "confirmed":
        return
    message = "The document is confirmed, but this is still to be verified."
    expected = 'status "accepted" once verified; or calculation.status "preliminary"'
    for assumption in source.table("assumptions"):
        location = ("assumptions", assumption, "status")
        if source.text(*location) == _TO_BE_VERIFIED:
            source.report(location, message, found=f"assumption {assumption}", expected=expected)
    for given in input_locations(source):
        status = source.text(*given, "status")
        if status is not None and status.strip().casefold() == _TO_BE_VERIFIED:
            source.report((*given, "status"), message, found=f"input {path_of(given)}", expected=expected)
    if source.node(("revisions",)) is None:
        source.miss(
            ("calculation", "status"),
            "A confirmed document needs its revision history.",
            expected="[[revisions]] with a row for each revision",
        )


# --- limits, criteria, cautions -------------------------------------------------------------------------------------


def _check_limits(source: Source, context: Mapping[str, float]) -> None:
    marker = QuantityOf(("temperature",))
    for section, tag in [(name, tag) for name in ("equipment", "processes", "vessels") for tag in source.table(name)]:
        location = (section, tag, "limits")
        limits = source.node(location)
        if limits is None or not isinstance(limits.value, dict):
            continue
        if not {"pressure", "temperature", "minimum_temperature"} & limits.table.keys():
            source.miss(
                location,
                "The limits hold no limit.",
                expected="pressure, temperature or minimum_temperature",
            )
        highest = marker.read_at(source, (*location, "temperature"), context)
        lowest = marker.read_at(source, (*location, "minimum_temperature"), context)
        if highest is not None and lowest is not None and lowest.value >= highest.value:
            source.report(
                (*location, "minimum_temperature"),
                "The minimum temperature is not below the maximum temperature.",
                found=f'"{lowest.text}" and "{highest.text}"',
                expected="minimum_temperature below temperature",
            )


def criterion_limit(source: Source, criterion: str, key: str, context: Mapping[str, float]) -> Quantity | None:
    """The limit of a criterion, in the dimension of its value; None when the file gives none. Raises InputError."""
    node = source.node(("criteria", criterion, key))
    dimensions = result_dimensions(source, source.text("criteria", criterion, "value") or "")
    if node is None or node.broken or isinstance(dimensions, str):
        return None
    return QuantityOf(dimensions, certain=True).read(node.plain(), context["atmosphere"], context["coverage_factor"])


def _check_criteria(source: Source, context: Mapping[str, float]) -> None:
    for criterion, node in source.table("criteria").items():
        location = ("criteria", criterion)
        given = [key for key in ("at_most", "at_least") if key in node.table]
        one = "one of at_most and at_least; two limits are two criteria"
        if len(given) == 2:
            source.report((*location, "at_least"), "Both at_most and at_least are given.", at="key", expected=one)
        elif not given:
            source.miss(location, "The criterion has no limit.", expected=one)
        path = source.text(*location, "value")
        if path is None:
            continue
        dimensions = result_dimensions(source, path)
        if isinstance(dimensions, str):
            if source.names_are_complete:
                source.report(
                    (*location, "value"),
                    f"No value can have this path. {dimensions}",
                    found=shown(path),
                    expected="the path of a result, such as total.lost_work",
                )
            continue
        for key in given:
            try:
                criterion_limit(source, criterion, key, context)
            except InputError as error:
                for fault in error.faults:
                    source.note((*location, key), fault)


def _check_cautions(source: Source) -> None:
    for caution in source.table("cautions"):
        if not re.fullmatch(r"[TP][0-9]{2}", caution):
            source.report(
                ("cautions", caution),
                "This is not the number of a caution.",
                at="key",
                found=shown(caution),
                expected="a number of the catalogue, such as T19",
            )


# --- correlations ---------------------------------------------------------------------------------------------------


def _check_correlations(source: Source) -> None:
    rows = source.node(("uncertainty", "correlations"))
    if rows is None or not rows.items:
        return
    inputs = {path_of(location): location for location in input_locations(source)}
    pairs: dict[frozenset[str], int] = {}
    sound: list[tuple[str, str, float]] = []
    for number, row in enumerate(rows.items):
        location = ("uncertainty", "correlations", number)
        between = source.texts(*location, "between")
        if len(between) != 2:
            continue
        known = [_check_correlated(source, place, path, inputs) for place, path in between]
        first, second = (path for _, path in between)
        pair = frozenset((first, second))
        if first == second:
            source.report(between[1][0], "An input is not correlated with itself.", found=f'"{first}"')
            continue
        if pair in pairs:
            source.report(
                (*location, "between"),
                f"The correlation of these two inputs is already stated at line {pairs[pair]}.",
                found=f"{first} and {second}",
                expected="each pair once",
            )
            continue
        pairs[pair] = row.line
        coefficient = row.table["coefficient"].value if "coefficient" in row.table else None
        if all(known) and isinstance(coefficient, int | float) and -1.0 <= coefficient <= 1.0:
            sound.append((first, second, float(coefficient)))
    if len(sound) == len(rows.items) <= MOST_CORRELATIONS:
        _check_consistency(source, sound)


def _check_correlated(source: Source, location: Location, path: str, inputs: Mapping[str, Location]) -> bool:
    """Whether a path is an input with an uncertainty; if not, that is noted."""
    if path not in inputs:
        parts = path.split(".")
        origin = None
        if len(parts) == 3 and parts[0] == "states" and parts[1] in source.table("states"):
            origin = givens_of(source, parts[1]).get(parts[2])
        if source.names_are_complete and not source.is_broken(tuple(parts)):
            source.report(
                location,
                "No quantity is given at this path.",
                found=f'"{path[:80]}"',
                expected="the path of an input of this file",
                hint=f'It is given at "states.{origin}.{parts[2]}".' if origin else source.hint(path, inputs),
            )
        return False
    node = source.node(inputs[path])
    text = node.table["value"].value if node is not None and "value" in node.table else node and node.value
    if isinstance(text, str) and "±" not in text and "+/-" not in text:
        source.report(
            location,
            "This input has no uncertainty that could be correlated.",
            found=f'"{path}" = {shown(text)}',
            expected="an input with ±",
        )
        return False
    return True


def _check_consistency(source: Source, correlations: list[tuple[str, str, float]]) -> None:
    """Together, the coefficients must form a matrix without negative eigenvalues: no variance is negative."""
    import numpy as np

    paths = list(dict.fromkeys(path for first, second, _ in correlations for path in (first, second)))
    matrix = np.eye(len(paths))
    for first, second, coefficient in correlations:
        row, column = paths.index(first), paths.index(second)
        matrix[row, column] = matrix[column, row] = coefficient
    lowest = float(np.linalg.eigvalsh(matrix)[0])
    if lowest < -1e-9:
        source.report(
            ("uncertainty", "correlations"),
            "The correlations contradict one another: some combination of the inputs would have a negative variance.",
            found=f"a lowest eigenvalue of {lowest:.3g}",
            expected="coefficients that can hold together",
        )

"""The section on second sources: both values, their difference, what differs, what was not compared."""

from __future__ import annotations

import html
import re
from typing import Any

from reportgen.record import Record
from reportgen.report.page import page
from tests.report.invented import invented_data


def entry(**more: Any) -> dict[str, Any]:
    return {
        "fluid": "steam",
        "second_model": "cubic",
        "second_title": "Water",
        "first_sources": ["a release"],
        "second_sources": ["a paper <1976>"],
        "state": "1",
        "path": "states.1.density",
        "property": "density",
        "species": None,
        "counted_from": None,
        "first": 13.0,
        "second": 13.13,
        "difference": 0.13,
        "relative": 0.01,
        "threshold": 0.02,
        "unit": "kg/m3",
        "dimension": "density",
        "verdict": "agrees",
        "remark": None,
        **more,
    }


def section(*entries: dict[str, Any], units: str = "SI") -> str:
    """Text of the section of a page with these entries, empty without it."""
    data = invented_data()
    data["calculation"]["units"] = units
    data["cross_checks"] = list(entries)
    found = re.search(r'<section id="cross-checks".*?</section>', page(Record(data)), re.DOTALL)
    text = re.sub(r"<[^>]+>", " ", found[0]) if found else ""
    return re.sub(r"\s+", " ", html.unescape(text).replace("\N{NO-BREAK SPACE}", " "))


COUNTED = entry(
    state="2",
    path="states.2.specific_enthalpy",
    property="specific_enthalpy",
    counted_from="1",
    first=0.0,
    second=-48e3,
    difference=-48e3,
    relative=-0.12,
    unit="J/kg",
    dimension="specific_energy",
    verdict="differs",
)


def test_without_entries_there_is_no_section() -> None:
    assert section() == ""


def test_a_value_stands_above_that_of_the_second_source_and_their_difference() -> None:
    text = section(entry())
    assert "Water, real fluid, against cubic equation of state: Water" in text
    assert re.search(r"13 13\.13 \+1 %", text)
    assert "The value agrees within 2 %." in text
    assert "Second source: a paper <1976>" in text


def test_what_differs_is_called_so_and_counted() -> None:
    text = section(entry(), COUNTED)
    assert "−12 % differs" in text
    assert "1 of 2 values differ by more than 2 %." in text
    assert "counted from state 1" not in text  # told by the symbol and its title
    assert "enthalpies and entropies count from a state that both share" in text


def test_differences_of_rounding_are_told_as_such() -> None:
    text = section(entry(second=13.0 * (1 + 1e-14), difference=1.3e-13, relative=1e-14))
    assert re.search(r"< 10 ⁻⁶ %|< 10⁻⁶ %", text)
    zero = {**COUNTED, "second": 1e-9, "difference": 1e-9, "relative": 2.5e-15, "verdict": "agrees"}
    assert re.search(r" 0 0 <", section(entry(), zero))


def test_units_follow_the_calculation() -> None:
    assert "lb/ft³" in section(entry(), units="US")


def test_gases_of_a_mixture_stand_last_with_the_state_of_their_temperature() -> None:
    text = section(entry(species="N2", state="2"), entry())
    assert text.index("13.13") < text.index("N2")
    assert "N2 1 bar, temperature of state 2" in text


def test_states_that_were_not_compared_give_the_reason() -> None:
    empty = dict.fromkeys(("property", "first", "second", "difference", "relative", "unit", "dimension"))
    missing = {**entry(**empty, verdict="not compared", path="states.1", second_sources=[], second_title=None)}
    missing |= {"second_model": "library", "remark": "The independent property library is not installed."}
    text = section(missing, {**missing, "state": "2"})
    assert "Not compared, states 1, 2: The independent property library is not installed." in text
    assert "agree" not in text


def test_properties_that_were_not_compared_are_named_and_what_was_is_counted() -> None:
    empty = dict.fromkeys(("first", "second", "difference", "relative", "unit", "dimension"))
    left_out = [
        entry(**empty, verdict="not compared", property=name, path=f"states.1.{name}", remark="There is one state.")
        for name in ("specific_enthalpy", "specific_entropy")
    ]
    text = section(entry(), entry(property="speed_of_sound", dimension="velocity"), *left_out)
    assert "Not compared, specific enthalpy and specific entropy of state 1: There is one state." in text
    assert "All 2 values that were compared agree within 2 %." in text


def test_sources_that_stand_on_the_page_already_are_not_repeated() -> None:
    other = entry(second_model="ideal-gas", second_sources=["a paper <1976>", "tables"])
    text = section(entry(), other)
    assert text.count("a paper <1976>") == 1
    assert "Second source: tables · others as for the check of Water above" in text


def test_a_phase_that_differs_is_remarked_at_the_state() -> None:
    assert "finds vapour where" in section(entry(remark="The second source finds vapour where the first has liquid."))


def test_a_library_goes_by_its_name_and_version() -> None:
    assert "against CoolProp 8.0.0" in section(entry(second_model="library", second_title="CoolProp 8.0.0"))

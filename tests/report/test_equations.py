"""How single equations stand on the page: relations solved together, wide ones, and what fits a narrow screen."""

from __future__ import annotations

import html as escaping
import re
from typing import Any

import pytest

from reportgen.record import Record
from reportgen.report.page import page
from tests.report.invented import invented_data

FLOWS = {"feed": 1.0, "back": 0.25, "mix": 1.25}
FLOW = r"\,\mathrm{kg\,s^{-1}}"


def flow(state: str) -> str:
    return rf"\dot m_{{\mathrm{{{state}}}}}"


def data_with(lines: list[list[str]]) -> dict[str, Any]:
    """The invented record with one relation, which solves the flow of ``mix`` and uses the two others."""
    data = invented_data()
    paths = {f"states.{state}.mass_flow": value for state, value in FLOWS.items()}
    for path, value in paths.items():
        entry = {**data["values"]["states.1.mass_flow"], "value": value, "standard_uncertainty": None, "relation": None}
        data["values"][path] = {**entry, "symbol": flow(path.split(".")[1])}
    data["values"]["states.mix.mass_flow"]["relation"] = "simultaneous.1"
    data["relations"] = {
        "simultaneous.1": {
            "owner": "equipment.M",
            "equipment": "M",
            "name": "Simultaneous relations",
            "sentence": "The relations of M and S share 2 unknowns and are solved together.",
            "basis": "linear system",
            "solves": ["states.mix.mass_flow"],
            "uses": ["states.feed.mass_flow", "states.back.mass_flow"],
            "latex_symbols": "",
            "latex_numbers": "",
            "latex_lines": lines,
        }
    }
    data["solution_order"] = ["simultaneous.1"]
    return data


def equations(data: dict[str, Any]) -> list[str]:
    """Text of each line of each equation of the working, without spaces."""
    working = page(Record(data)).split('id="working"')[1].split("</section>")[0]
    lines = []
    for equation in working.split('<div class="equation')[1:]:
        body = equation.split(">", 1)[1].split("</div>")[0]
        left, *rights = re.split(r'<span class="right"[^>]*>', body)
        lines += [re.sub(r"\s|<[^>]*>", "", escaping.unescape(part)) for part in (left, *rights)]
    return [line for line in lines if line]


BALANCE = [f"{flow('feed')} + {flow('back')}", flow("mix"), rf"1{FLOW} + 0.25{FLOW}", ""]


def test_a_relation_solved_together_with_others_shows_both_its_sides_in_symbols_and_in_numbers() -> None:
    assert equations(data_with([BALANCE])) == ["ṁfeed+ṁback=ṁmix".replace("ṁ", "m˙"), "1kgs−1+0.25kgs−1=1.25kgs−1"]


def test_numbers_of_both_sides_that_the_record_gives_stand_as_they_are() -> None:
    numbers = rf"2\cdot 1{FLOW} = 1{FLOW} + 1{FLOW}"
    lines = equations(data_with([[f"2{flow('feed')}", f"{flow('feed')} + {flow('feed')}", numbers, ""]]))
    assert lines == ["2m˙feed=m˙feed+m˙feed", "2·1kgs−1=1kgs−1+1kgs−1"]


def test_a_constant_on_the_right_stands_for_itself() -> None:
    lines = equations(data_with([[f"{flow('feed')} - {flow('back')}", "0", rf"1{FLOW} - 1{FLOW}", ""]]))
    assert lines[1] == "1kgs−1−1kgs−1=0"


def test_a_value_taken_over_in_a_block_stands_in_one_line() -> None:
    lines = equations(data_with([[flow("mix"), flow("feed"), "", rf"1.25{FLOW}"]]))
    assert lines == ["m˙mix", "=m˙feed", "=1.25kgs−1"]


@pytest.mark.parametrize(("number", "stacked"), [("1.444", False), ("1.4444444444", True)])
def test_a_fraction_too_wide_for_its_column_has_its_basis_below(number: str, stacked: bool) -> None:
    total = " + ".join([rf"{number}{FLOW}"] * 3)
    text = page(Record(data_with([[flow("mix"), "a", rf"\frac{{{total}}}{{2}}", rf"1.25{FLOW}"]])))
    assert ("row stacked" in text) is stacked
    assert 'style="--wide:' in text

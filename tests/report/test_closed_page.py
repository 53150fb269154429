"""The page of a calculation of closed systems: amounts and not rates, in words, symbols and units of both systems."""

from __future__ import annotations

import re
from html import unescape
from pathlib import Path

import pytest

from reportgen import evaluation, spec
from reportgen.record import Record
from reportgen.report.page import page
from reportgen.report.presenter import Presenter

PROJECT = Path(__file__).parents[2] / "projects" / "nitrogen-blanketing"


@pytest.fixture(scope="module")
def record() -> Record:
    return evaluation.evaluate(spec.read(PROJECT))


@pytest.fixture(scope="module")
def html(record: Record) -> str:
    return page(record)


def plain(html: str) -> str:
    return " ".join(unescape(re.sub(r"<[^>]+>", " ", html)).split())


def section(html: str, name: str) -> str:
    found = re.search(rf'<section[^>]*id="{name}".*?</section>', html, re.DOTALL)
    assert found is not None, name
    return plain(found[0])


def test_the_boundary_lists_processes_with_their_states(html: str) -> None:
    text = section(html, "boundary")
    assert "Before, state Process After, state Heat and work" in text
    assert "EQ-1 Partition removal · Valve between receiver and decanter opened" in text
    assert "heat is positive into the system and work positive out of it" in text
    assert "Piece" not in text


def test_the_method_states_the_balance_of_closed_systems_alone(html: str) -> None:
    text = section(html, "method")
    assert "Closed systems. Mass is kept" in text
    assert "Steady flow" not in text


def test_the_account_opens_with_what_is_there(html: str) -> None:
    text = section(html, "account")
    assert "In the beginning, and entering kJ/K In the end, and leaving kJ/K" in text
    assert "Content of state n0 in the beginning" in text
    assert "kW" not in text


def test_no_rate_is_named(html: str) -> None:
    for name in ("found", "states", "working", "closure", "budget"):
        text = section(html, name)
        assert "rate" not in re.findall(r"[a-z]+", text.lower()), name
        assert not re.search(r"\bkW\b|kg/s", text), name


def test_states_show_amounts(html: str) -> None:
    text = section(html, "states")
    assert "kg" in text
    assert "m³" in text
    assert "kg/s" not in text


def test_words_for_amounts(record: Record) -> None:
    presenter = Presenter(record)
    assert presenter.label("total.heat") == "Heat, total"
    assert presenter.label("processes.EQ-1.entropy_generation") == "Entropy generation, process\N{NO-BREAK SPACE}EQ-1"
    assert (
        presenter.label("processes.EQ-1.species.O2.mole_fraction") == "Mole fraction, O2, process\N{NO-BREAK SPACE}EQ-1"
    )


def test_us_customary_units(record: Record) -> None:
    other = Record({**record.data, "calculation": {**record.data["calculation"], "units": "US"}})
    text = section(page(other), "account")
    assert "Btu/°R" in text
    assert "kJ" not in text

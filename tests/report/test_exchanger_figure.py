"""The figure of temperature against duty, its table, and the section on cycles, from the record alone."""

from __future__ import annotations

import re

from reportgen.report.figures import TABLES, draw
from reportgen.report.page import page
from reportgen.report.presenter import Presenter
from reportgen.report.templates import fonts_folder
from tests.evaluation.heat_pump import heat_pump


def _figure() -> tuple[dict, Presenter]:
    record = heat_pump()
    (figure,) = (entry for entry in record.data["figures"] if entry["kind"] == "exchanger-profile")
    return figure, Presenter(record)


def test_the_streams_differ_without_colour_and_the_pinch_is_named() -> None:
    figure, presenter = _figure()
    svg = str(draw(figure, presenter, fonts_folder()))
    assert len(re.findall("stroke-dasharray", svg)) == 1  # the cold stream alone is broken
    for text in ("hot stream", "cold stream", "temperature in °C", "duty exchanged, from the cold end, in kW"):
        assert text in svg
    assert f"pinch {presenter.text('equipment.C.pinch')}" in svg
    for state in ("2", "3", "11", "12"):
        assert re.search(rf">{state}</text>", svg)
    assert "hot stream full, cold stream broken" in svg  # for those who do not see it


def test_equal_records_give_equal_drawings() -> None:
    figure, presenter = _figure()
    assert draw(figure, presenter, fonts_folder()) == draw(figure, presenter, fonts_folder())


def test_the_table_has_units_and_every_place() -> None:
    figure, presenter = _figure()
    table = TABLES["exchanger-profile"](figure, presenter)
    assert table["heads"] == ["Duty, kW", "Hot, °C", "Cold, °C", "Difference, K"]
    assert [place for place, _ in table["rows"]] == [row["place"] for row in figure["rows"]]


def test_a_figure_without_data_is_left_out() -> None:
    figure, presenter = _figure()
    assert draw({**figure, "duty": []}, presenter, fonts_folder()) is None


def test_the_page_has_the_cycle_with_its_reservoirs() -> None:
    text = page(heat_pump())
    section = text[text.index('id="cycles"') : text.index("</section>", text.index('id="cycles"'))]
    for words in ("A closed cycle that heats.", "Coefficient of performance", "Heater E", "stream 11 to 12", "leave 0"):
        assert words in section

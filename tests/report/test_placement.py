"""Labels of figures: on top of nothing, beside what they name, the same in every run."""

from __future__ import annotations

import itertools
import math
import re
from pathlib import Path
from typing import Any

import numpy
import pytest

from reportgen.record import Record
from reportgen.report.figures import bars, draw, temperature_entropy
from reportgen.report.figures.canvas import Drawing
from reportgen.report.figures.placement import Box, Label, Placement, crosses
from reportgen.report.presenter import Presenter
from reportgen.report.templates import fonts_folder
from tests.report.invented import invented_data, invented_record

FIGURES = {figure["kind"]: figure for figure in invented_record().data["figures"]}


def test_a_segment_meets_a_box_only_if_they_share_a_point() -> None:
    box = Box(0.0, 0.0, 2.0, 1.0)
    cases = [
        ((-1, 0.5), (3, 0.5), True),
        ((0.5, 0.5), (0.6, 0.6), True),
        ((-1, -1), (3, -0.1), False),
        ((-1, 2), (3, 1.5), False),
        ((-1, 0), (0.5, 1.9), False),
        ((1, -1), (1, 3), True),
        ((3, -1), (3, 3), False),
        ((-0.5, 0.8), (0.5, 1.2), True),
    ]
    for start, end, expected in cases:
        found = crosses(numpy.array([start], float), numpy.array([end], float), box)
        assert bool(found[0]) is expected, (start, end)


def test_boxes_overlap_only_with_a_shared_area() -> None:
    box = Box(0, 0, 1, 1)
    assert box.overlaps(Box(0.5, 0.5, 2, 2))
    assert not box.overlaps(Box(1, 0, 2, 1))


def test_labels_in_a_crowd_touch_neither_lines_nor_each_other() -> None:
    placement = Placement(Box(0, 0, 400, 300))
    lines = [[(0.0, 20.0 * k), (400.0, 20.0 * k + 60.0)] for k in range(12)]
    for line in lines:
        placement.add_line(line)
    placed = [placement.place(Label(f"label {k}", 40, 8, [(200.0 + k, 150.0)])) for k in range(14)]
    found = [label for label in placed if label is not None]
    assert len(found) >= 10
    for one, other in itertools.combinations(found, 2):
        assert not one.box.overlaps(other.box)
    for label in found:
        for start, end in lines:
            assert not crosses(numpy.array([start]), numpy.array([end]), label.box)[0]


def test_a_label_without_any_room_is_not_set() -> None:
    placement = Placement(Box(0, 0, 100, 100))
    placement.add_box(Box(0, 0, 100, 100))
    assert placement.place(Label("x", 10, 10, [(50.0, 50.0)])) is None


class Watched(Placement):
    """A placement that remembers every instance made while a figure is drawn."""

    made: list[Placement] = []  # noqa: RUF012 filled by the fixture, emptied before each drawing

    def __init__(self, frame: Box) -> None:
        super().__init__(frame)
        Watched.made.append(self)


@pytest.fixture
def watched(monkeypatch: pytest.MonkeyPatch) -> type[Watched]:
    Watched.made = []
    monkeypatch.setattr(temperature_entropy, "Placement", Watched)
    return Watched


def crowded(count: int) -> dict[str, Any]:
    """A figure of a cycle with many states close together."""
    figure = dict(FIGURES["temperature-entropy"])
    corners = [
        (6700.0 + 400.0 * math.cos(2 * math.pi * k / count), 600.0 + 80.0 * math.sin(2 * math.pi * k / count))
        for k in range(count)
    ]
    figure["points"] = [
        {"state": str(k + 1), "label": str(k + 1), "entropy": s, "temperature": t} for k, (s, t) in enumerate(corners)
    ]
    figure["paths"] = [
        {
            "equipment": f"PIECE-{k + 1}",
            "role": "main",
            "entropy": [corners[k][0], corners[(k + 1) % count][0]],
            "temperature": [corners[k][1], corners[(k + 1) % count][1]],
        }
        for k in range(count)
    ]
    return figure


@pytest.mark.parametrize("count", [3, 8, 14])
def test_no_label_of_the_figure_lies_on_a_line_or_another_label(count: int, watched: type[Watched]) -> None:
    temperature_entropy.draw(crowded(count), Presenter(invented_record()), fonts_folder())
    assert watched.made
    for placement in watched.made:
        starts, ends = placement._starts, placement._ends
        for placed in placement.placed:
            assert not crosses(starts, ends, placed.box).any(), placed.label.text
            assert placed.box.inside(placement.frame)
        for one, other in itertools.combinations(placement.placed, 2):
            assert not one.box.overlaps(other.box), (one.label.text, other.label.text)
    detail = watched.made[-1].placed
    texts = {placed.label.text for placed in detail}
    assert {str(k + 1) for k in range(count)} <= texts
    assert {f"PIECE-{k + 1}" for k in range(count)} <= texts


def test_text_is_measured_as_the_browser_sets_it() -> None:
    width, _ = Drawing(100, 100, fonts_folder()).text_size("PRV-3", 10.0)
    from fontTools.ttLib import TTFont

    font = TTFont(fonts_folder() / "figures.otf")
    metrics, names = font["hmtx"], font.getBestCmap()
    advance = sum(metrics[names[ord(letter)]][0] for letter in "PRV-3") / font["head"].unitsPerEm * 10.0
    assert width == pytest.approx(advance, rel=0.1)  # kerning and side bearings differ by less than a tenth


def svg_of(figure: dict[str, Any]) -> str:
    svg = draw(figure, Presenter(invented_record()), fonts_folder())
    assert svg is not None
    return str(svg)


@pytest.mark.parametrize("kind", sorted(FIGURES))
def test_text_is_text_with_title_and_description(kind: str) -> None:
    svg = svg_of(FIGURES[kind])
    for part in ("<text", "Ledger Pagella", "<title", "<desc", 'role="img"'):
        assert part in svg
    for part in ("DejaVu", "<metadata", "<?xml"):
        assert part not in svg


@pytest.mark.parametrize("kind", sorted(FIGURES))
def test_the_same_data_give_the_same_bytes_and_ids_of_their_own(kind: str) -> None:
    assert svg_of(FIGURES[kind]) == svg_of(FIGURES[kind])
    first = set(re.findall(r'\bid="([^"]+)"', svg_of(FIGURES[kind])))
    second = set(re.findall(r'\bid="([^"]+)"', svg_of({**FIGURES[kind], "id": "other"})))
    assert first
    assert not first & second
    svg = svg_of(FIGURES[kind])
    assert set(re.findall(r'(?:url\(|href=")#([^")]+)', svg)) <= first


@pytest.mark.parametrize("kind", sorted(FIGURES))
def test_a_drawing_carries_no_name_that_nothing_refers_to_and_no_idle_group(kind: str) -> None:
    svg = svg_of(FIGURES[kind])
    named = {name for name in re.findall(r' id="([^"]+)"', svg) if not name.endswith((".title", ".desc"))}
    assert named == set(re.findall(r'(?:url\(|href=")#([^")]+)', svg))
    assert "rotate(" not in svg
    assert "\n" not in svg[svg.index("</desc>") :].strip()
    assert not re.search(r"<g>(?:(?!<g\b).)*?</g>", svg)


def test_ticks_stand_at_round_numbers_within_the_limits() -> None:
    svg = svg_of(FIGURES["lost-work-bars"])
    labels = [float(text) for text in re.findall(r">(\d+)</text>", svg)]
    assert labels[0] == 0.0
    assert len(labels) >= 4
    assert len({after - before for before, after in itertools.pairwise(labels)}) == 1


def test_the_colour_of_generation_is_for_generation_only() -> None:
    assert "--generation" not in svg_of(FIGURES["lost-work-bars"])
    assert "--generation" not in svg_of(FIGURES["temperature-entropy"])


def bar_limits(figure: dict[str, Any], module_draw: Any) -> tuple[float, float]:
    drawing = module_draw(figure, Presenter(invented_record()), fonts_folder())
    low, high = drawing.figure.axes[0].get_xlim()
    return float(low), float(high)


def test_bars_start_at_zero() -> None:
    low, high = bar_limits(FIGURES["lost-work-bars"], bars.draw_lost_work)
    assert low == 0.0
    assert high > 257.9


def test_bars_of_negative_values_keep_zero_in_sight() -> None:
    figure = {
        "id": "x",
        "bars": [
            {"label": "A", "path": "a", "value": -5e3, "expanded_uncertainty": 1e3, "train": None},
            {"label": "B", "path": "b", "value": 9e3, "expanded_uncertainty": None, "train": None},
        ],
    }
    low, high = bar_limits(figure, bars.draw_lost_work)
    assert low <= -6.0
    assert high >= 9.0


@pytest.mark.parametrize(("entering", "generated"), [(9.8e3, 9e2), (-2e3, 5e2), (1.0, 9e2), (5e3, -3e2)])
def test_account_bars_keep_zero_in_sight_and_their_labels_apart(entering: float, generated: float) -> None:
    names = ("label", "entering", "generated", "leaving")
    rows = [("A long title of an account", entering, generated, entering + generated), ("B", 1e4, 10.0, 10010.0)]
    figure = {"id": "x", "bars": [dict(zip(names, row, strict=True)) for row in rows]}
    drawing = bars.draw_entropy_account(figure, Presenter(invented_record()), fonts_folder())
    low, high = drawing.figure.axes[0].get_xlim()
    assert low <= min(0.0, entering / 1e3)
    assert high >= 10.0
    texts = {text.get_text(): text for text in drawing.figure.texts}
    carried = next(text for name, text in texts.items() if name.startswith("in "))
    made = next(text for name, text in texts.items() if name.startswith("generated "))
    right = carried.get_position()[0] * drawing.width + drawing.text_size(carried.get_text(), 8.5)[0]
    left = made.get_position()[0] * drawing.width - drawing.text_size(made.get_text(), 8.5)[0]
    assert right < left


def test_the_dome_is_drawn_as_one_closed_line() -> None:
    figure = FIGURES["temperature-entropy"]
    drawing = temperature_entropy.draw(figure, Presenter(invented_record()), fonts_folder())
    longest = max(drawing.figure.axes[0].lines, key=lambda line: len(line.get_xdata()) * (line.get_linestyle() == "-"))
    assert len(longest.get_xdata()) == len(figure["dome"]["entropy"])


def test_a_fluid_without_dome_isobars_or_paths_can_be_drawn() -> None:
    figure = {**FIGURES["temperature-entropy"], "dome": None, "isobars": [], "paths": []}
    assert "closed dome" not in svg_of(figure)
    single = {**figure, "points": figure["points"][:1]}
    assert "<svg" in svg_of(single)


def test_a_kind_of_figure_of_another_version_is_left_out() -> None:
    data = invented_data()
    assert draw({"kind": "something-else", "id": "x", "title": "x"}, Presenter(Record(data)), Path()) is None

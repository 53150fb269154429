"""The page as a browser shows and prints it. One browser for the whole module."""

from __future__ import annotations

import io
import os
import re
import shutil
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from reportgen import evaluation, spec
from reportgen.report import register, render
from tests.report.invented import invented_record

pytestmark = pytest.mark.browser

NAMES = ("chromium", "chromium-browser", "google-chrome")
PROJECTS = Path(__file__).parents[2] / "projects"
A4, LETTER = (8.27, 11.69), (8.5, 11.0)


def executable() -> str | None:
    named = os.environ.get("CHROMIUM")
    if named and Path(named).is_file():
        return named
    return next((found for name in NAMES if (found := shutil.which(name))), None)


@pytest.fixture(scope="module")
def site(tmp_path_factory: pytest.TempPathFactory) -> dict[str, str]:
    """Addresses of a report and of the register, in a folder."""
    folder = tmp_path_factory.mktemp("site")
    report = render(invented_record(), folder)
    air = render(evaluation.evaluate(spec.read(PROJECTS / "instrument-air")), folder)
    return {"report": report.as_uri(), "register": register(folder).as_uri(), "air": air.as_uri()}


@pytest.fixture(scope="module")
def browser() -> Iterator[Any]:
    path = executable()
    if path is None:
        pytest.skip(f"no browser: none of {', '.join(NAMES)} is installed and CHROMIUM names none")
    from playwright.sync_api import sync_playwright

    with sync_playwright() as playwright:
        started = playwright.chromium.launch(executable_path=path, args=["--no-sandbox"])
        yield started
        started.close()


class Opened:
    """A page that was opened, with everything it said or asked for."""

    def __init__(self, browser: Any, address: str, width: int = 1280, scheme: str = "light") -> None:
        self.context = browser.new_context(viewport={"width": width, "height": 900}, color_scheme=scheme)
        self.page = self.context.new_page()
        self.said: list[str] = []
        self.asked: list[str] = []
        self.page.on("console", lambda message: self.said.append(f"{message.type}: {message.text}"))
        self.page.on("pageerror", lambda error: self.said.append(str(error)))
        self.page.on("request", lambda request: self.asked.append(request.url))
        self.page.goto(address)
        self.page.evaluate("document.fonts.ready.then(() => true)")

    def fonts_of(self, selector: str) -> dict[tuple[str, bool], str]:
        """(family, whether it is embedded) of the fonts that drew the elements found; each with a text so drawn."""
        session = self.context.new_cdp_session(self.page)
        session.send("DOM.enable")
        session.send("CSS.enable")
        root = session.send("DOM.getDocument")["root"]["nodeId"]
        nodes = session.send("DOM.querySelectorAll", {"nodeId": root, "selector": selector})["nodeIds"]
        texts = self.page.evaluate("s => [...document.querySelectorAll(s)].map(e => e.textContent)", selector)
        found = {}
        for node, text in zip(nodes, texts, strict=True):
            for font in session.send("CSS.getPlatformFontsForNode", {"nodeId": node})["fonts"]:
                found.setdefault((font["familyName"], font["isCustomFont"]), text)
        return found


@pytest.fixture
def opened(browser: Any, site: dict[str, str]) -> Iterator[Any]:
    """Open ``report`` or ``register`` at a width and in a scheme; closed after the test."""
    contexts = []

    def open_one(name: str = "report", **how: Any) -> Opened:
        found = Opened(browser, site[name], **how)
        contexts.append(found.context)
        return found

    yield open_one
    for context in contexts:
        context.close()


@pytest.mark.parametrize("name", ["report", "register"])
def test_nothing_is_said_and_nothing_is_asked_for(opened: Any, site: dict[str, str], name: str) -> None:
    page = opened(name)
    assert page.said == []
    assert [url for url in page.asked if url != site[name] and not url.startswith("data:")] == []


def test_text_and_formulae_are_drawn_with_the_embedded_faces_only(opened: Any) -> None:
    page = opened()
    loaded = page.page.evaluate("[...document.fonts].filter(f => f.status == 'loaded').map(f => f.family)")
    assert {family.strip('"') for family in loaded} == {"Ledger Pagella", "Ledger Pagella Math"}
    assert page.page.evaluate("document.fonts.check('16px \"Ledger Pagella Math\"')")
    assert set(page.fonts_of("mi, mo, mn, mtext")) == {("Ledger Pagella Math", True)}
    words = "h1, h2, h3, p, li, th, td, dt, dd, a, span, strong, i, sup, code, svg text, figcaption"
    assert set(page.fonts_of(words)) == {("Ledger Pagella", True)}


def test_sums_are_drawn_large_with_their_limits_below(opened: Any) -> None:
    box = """selector => { const b = document.querySelector(selector).getBoundingClientRect();
             return [b.left, b.top, b.right, b.bottom] }"""
    page = opened().page
    total = page.evaluate(box, ".steps munder > mo")
    limit = page.evaluate(box, ".steps munder > :last-child")
    letter = page.evaluate(box, ".steps mi")
    assert limit[1] >= total[3] - 6  # below, not beside
    assert total[3] - total[1] > 1.25 * (letter[3] - letter[1])


@pytest.mark.parametrize("name", ["report", "register"])
@pytest.mark.parametrize("width", [390, 820, 1440])
def test_the_page_never_scrolls_sideways(opened: Any, name: str, width: int) -> None:
    page = opened(name, width=width).page
    assert page.evaluate("document.documentElement.scrollWidth") <= width
    wide = page.evaluate(
        """() => [...document.querySelectorAll('body *')].filter(e => {
             const box = e.getBoundingClientRect();
             return box.right > innerWidth + 1 && !e.closest('.wide, .drawing, .equation, .unseen, .skip');
           }).map(e => e.outerHTML.slice(0, 80))"""
    )
    assert wide == []


def test_property_models_are_read_down_the_page_on_a_narrow_screen(opened: Any) -> None:
    box = "s => [...document.querySelectorAll(s)].map(e => [e.getBoundingClientRect().left, e.scrollWidth])"
    narrow = opened("air", width=390).page
    cells = narrow.evaluate(box, "#method .fluids td")
    assert len({left for left, _ in cells}) == 1
    assert max(width for _, width in cells) < 390
    assert len({left for left, _ in opened("air", width=1100).page.evaluate(box, "#method .fluids td")}) > 1


def test_the_state_stays_in_view_while_a_cross_check_is_scrolled(opened: Any) -> None:
    page = opened("air", width=390).page
    found = page.evaluate(
        """() => { const box = [...document.querySelectorAll('.wide:has(.checks)')]
                     .find(e => e.scrollWidth > e.clientWidth + 1);
                   box.scrollLeft = 1000;
                   const state = box.querySelector('tbody th').getBoundingClientRect().left;
                   return [box.scrollLeft, state - box.getBoundingClientRect().left] }"""
    )
    assert found[0] > 20
    assert abs(found[1]) < 1.0


@pytest.mark.parametrize("width", [390, 820, 1440])
def test_no_equation_scrolls_and_the_smallest_can_still_be_read(opened: Any, width: int) -> None:
    page = opened("air", width=width).page
    found = page.evaluate(
        """() => [...document.querySelectorAll('.equation')]
             .filter(e => e.scrollWidth > e.clientWidth + 1).map(e => e.textContent.slice(0, 80))"""
    )
    assert found == []
    sizes = page.evaluate(
        "[...document.querySelectorAll('.equation .right')].map(e => parseFloat(getComputedStyle(e).fontSize))"
    )
    assert min(sizes) > (8.5 if width == 390 else 12.0)


def test_a_long_bracket_breaks_only_where_no_line_holds_it(opened: Any) -> None:
    lines = """() => [...document.querySelectorAll('.term')].map(
                 e => new Set([...e.children].map(m => Math.round(m.getBoundingClientRect().top / 12))).size)"""
    assert max(opened("air", width=390).page.evaluate(lines)) > 1
    wide = opened("air", width=1440).page
    broken = wide.evaluate(
        """() => [...document.querySelectorAll('.term')].filter(e => {
             const parts = [...e.querySelectorAll(':scope > math')].map(m => m.getBoundingClientRect());
             const together = parts.reduce((sum, box) => sum + box.width, 0);
             const room = e.closest('.rights').getBoundingClientRect().width;
             return parts.at(-1).left < parts[0].right - 1 && together < room;
           }).map(e => e.textContent.slice(0, 80))"""
    )
    assert broken == []


def test_boxes_that_scroll_can_be_reached_by_keyboard_and_have_a_name(opened: Any) -> None:
    page = opened(width=390).page
    bad = page.evaluate(
        """() => [...document.querySelectorAll('.wide, .drawing, .equation')]
             .filter(e => e.scrollWidth > e.clientWidth + 1 && (e.tabIndex != 0 || !e.getAttribute('aria-label')))
             .map(e => e.textContent.trim().slice(0, 60))"""
    )
    assert bad == []


def test_the_first_tab_reaches_the_skip_link_and_focus_is_visible(opened: Any) -> None:
    page = opened().page
    page.keyboard.press("Tab")
    assert page.evaluate("document.activeElement.className") == "skip"
    assert page.evaluate("document.activeElement.getBoundingClientRect().left") >= 0
    assert page.evaluate("getComputedStyle(document.activeElement).outlineStyle") == "solid"
    page.keyboard.press("Enter")
    assert page.evaluate("document.activeElement.id") == "content"


def test_a_number_leads_to_its_step_which_is_highlighted(opened: Any) -> None:
    page = opened().page
    page.click('#found a[href="#value-equipment.PRV-3.entropy_generation"]')
    colour = "s => getComputedStyle(document.querySelector(s)).backgroundColor"
    assert page.evaluate(colour, ".step:has(:target)") != page.evaluate(colour, ".step:not(:has(:target))")
    assert page.evaluate("document.querySelector(':target').getBoundingClientRect().top") < 900


def test_the_dark_scheme_is_for_the_screen_and_never_prints(opened: Any) -> None:
    page = opened(scheme="dark").page
    colour = "getComputedStyle(document.body).color"
    on_screen = page.evaluate(colour)
    page.emulate_media(media="print", color_scheme="dark")
    printed = page.evaluate(colour)
    assert _lightness(on_screen) > 180
    assert _lightness(printed) < 80


def _lightness(colour: str) -> float:
    return sum(int(part) for part in re.findall(r"\d+", colour)[:3]) / 3


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize(("name", "width"), [("report", 1280), ("report", 390), ("register", 390)])
def test_an_accessibility_checker_finds_nothing_serious(opened: Any, name: str, width: int, scheme: str) -> None:
    from axe_playwright_python.sync_playwright import Axe

    found = Axe().run(opened(name, width=width, scheme=scheme).page).response["violations"]
    grave = [
        f"{item['id']}: {item['nodes'][0]['html'][:120]}" for item in found if item["impact"] in ("serious", "critical")
    ]
    assert grave == []


@pytest.mark.parametrize("paper", [A4, LETTER], ids=["A4", "Letter"])
def test_every_printed_sheet_carries_number_revision_status_and_page_of_pages(
    opened: Any, paper: tuple[float, float]
) -> None:
    from pypdf import PdfReader

    page = opened().page
    width, height = (f"{side}in" for side in paper)
    reader = PdfReader(io.BytesIO(page.pdf(width=width, height=height, print_background=True)))
    assert len(reader.pages) > 3
    for index, sheet in enumerate(reader.pages, start=1):
        text = " ".join(sheet.extract_text().split())
        assert "SB-TH-014 · revision A · preliminary" in text
        assert f"page {index} of {len(reader.pages)}" in text
        assert float(sheet.mediabox.width) == pytest.approx(paper[0] * 72, abs=1.0)


def test_tables_that_go_on_repeat_their_heads_and_steps_stay_whole(opened: Any) -> None:
    page = opened().page
    page.emulate_media(media="print")
    style = "([selector, name]) => getComputedStyle(document.querySelector(selector))[name]"
    assert page.evaluate(style, [".inputs thead", "display"]) == "table-header-group"
    for selector in (".step", "figure", ".caution", ".inputs tr"):
        assert page.evaluate(style, [selector, "breakInside"]) == "avoid"


def test_the_page_reads_without_its_figures_being_seen(opened: Any) -> None:
    page = opened().page
    named = page.evaluate(
        """() => [...document.querySelectorAll('svg[role=img]')].map(
             e => e.getAttribute('aria-labelledby').split(' ').every(id => document.getElementById(id).textContent))"""
    )
    assert named == [True, True]

"""The page and the register: sections, links, escaping, same bytes, and what a failure leaves behind."""

from __future__ import annotations

import copy
import hashlib
import json
import os
import re
import subprocess
import sys
from collections import Counter
from html import unescape
from html.parser import HTMLParser
from pathlib import Path
from typing import Any

import pytest

from reportgen import report
from reportgen.errors import InputError, ReportgenError
from reportgen.record import Record
from reportgen.report import folders, page_path, register, render, terminal
from reportgen.report.links import anchor
from reportgen.report.page import page
from reportgen.report.presenter import Presenter
from reportgen.report.templates import css_string, lower_first, raised
from tests.report.invented import invented_data, invented_record

ROOT = Path(__file__).parents[2]
VOID = {"meta", "link", "br", "hr", "wbr", "img", "input"}


class Outline(HTMLParser):
    """Identifiers, fragment links, headings, scripts and loads of a page; checks that elements close in order."""

    def __init__(self, html: str) -> None:
        super().__init__()
        self.ids: Counter[str] = Counter()
        self.fragments: set[str] = set()
        self.headings: list[int] = []
        self.tags: Counter[str] = Counter()
        self.loads: list[str] = []
        self.text = ""
        self._open: list[str] = []
        self.feed(html)
        assert self._open == []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        given = dict(attrs)
        self.tags[tag] += 1
        if given.get("id"):
            self.ids[str(given["id"])] += 1
        target = given.get("href") or ""
        if target.startswith("#"):
            self.fragments.add(target[1:])
        if tag in ("img", "script", "iframe", "object", "embed") or given.get("src"):
            self.loads.append(tag)
        if tag == "link" and not target.startswith("data:"):
            self.loads.append(target)
        if re.fullmatch(r"h[1-6]", tag):
            self.headings.append(int(tag[1]))
        if tag not in VOID:
            self._open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.handle_starttag(tag, attrs)
        if tag not in VOID:
            self._open.pop()

    def handle_endtag(self, tag: str) -> None:
        assert self._open.pop() == tag

    def handle_data(self, data: str) -> None:
        if "style" not in self._open:
            self.text += data


@pytest.fixture(scope="module")
def html() -> str:
    return page(invented_record())


@pytest.fixture(scope="module")
def outline(html: str) -> Outline:
    return Outline(html)


def test_all_sections_stand_in_the_readers_order(outline: Outline) -> None:
    titles = [
        "What was found",
        "Cautions",
        "Purpose",
        "Boundary",
        "Inputs",
        "Assumptions",
        "Method",
        "States",
        "Working",
    ]
    titles += ["Entropy account", "Closure", "Uncertainty budget", "Figures", "References", "Revision history"]
    titles += ["Provenance", "Safety notice", "End of SB-TH-014 revision A"]
    body = outline.text[outline.text.index("Document register") :]
    places = [body.index(title) for title in titles]
    assert places == sorted(places)


def test_identifiers_are_unique_and_every_inner_link_leads_somewhere(outline: Outline) -> None:
    assert [name for name, count in outline.ids.items() if count > 1] == []
    assert outline.fragments - set(outline.ids) == set()


def test_headings_are_in_order(outline: Outline) -> None:
    assert outline.headings[0] == 1
    assert outline.headings.count(1) == 1
    assert all(after - before <= 1 for before, after in zip(outline.headings, outline.headings[1:], strict=False))


def test_the_page_is_self_contained_and_small(html: str, outline: Outline) -> None:
    assert outline.loads == []
    assert "<script" not in html
    assert len(html.encode()) < 600_000
    assert re.findall(r"url\((?!data:|#)", html) == []
    assert "@import" not in html


def test_every_headline_number_leads_to_its_step(html: str) -> None:
    for path in invented_record().data["summary"]:
        assert f'href="#{anchor("value", path)}"' in html
        assert f'id="{anchor("value", path)}"' in html


def test_inputs_say_as_written_source_place_and_where_they_are_used(outline: Outline) -> None:
    for text in (
        "39.0 bar(g) ± 0.3 bar",
        "PT-301, calibration certificate 2026-0117",
        "path and line in calculation.toml",
        "line 22",
        "9.1",
    ):
        assert text in outline.text


def test_the_content_hash_is_that_of_the_canonical_record(html: str) -> None:
    assert hashlib.sha256(invented_record().to_json()).hexdigest() in html


def test_the_title_block_says_what_is_missing(outline: Outline) -> None:
    assert (
        "Missing for a confirmed document: not signed; no originator, checker or approver named; "
        "to be verified: A1; stop caution standing: T32; not decided: C2." in outline.text
    )


@pytest.mark.parametrize("status", ["superseded", "void"])
def test_a_revision_that_is_not_to_be_used_says_so(status: str) -> None:
    data = invented_data()
    data["calculation"]["status"] = status
    assert f"This revision is {status}: not to be used." in page(Record(data))


def test_the_program_claims_no_verification(outline: Outline) -> None:
    words = re.findall(r"\b(verified|approved)\b", outline.text.replace("to be verified", ""))
    assert words == []


def test_the_account_balances_to_the_last_figure_shown(outline: Outline) -> None:
    assert outline.text.count("10.6755") == 3


def test_an_account_that_does_not_balance_is_called_out() -> None:
    data = invented_data()
    data["accounts"]["valve"]["leaving"][0]["value"] += 1.0
    assert "The two sides differ" in page(Record(data))
    assert "The two sides differ" not in page(invented_record())


def test_an_account_without_generation_stays_open() -> None:
    data = invented_data()
    data["accounts"]["valve"]["generated"][0]["value"] = None
    assert "this account stays open" in page(Record(data))


def test_only_generation_is_vermilion(html: str) -> None:
    for classes in re.findall(r'class="([^"]*\bgeneration\b[^"]*)"', html):
        assert set(classes.split()) <= {"generation", "figure"}
    assert html.count("var(--generation)") == html.count("color: var(--generation)")


def test_a_value_without_a_number_shows_a_dash_and_the_reason() -> None:
    data = invented_data()
    entry = data["values"]["equipment.PRV-3.entropy_generation"]
    entry.update(value=None, standard_uncertainty=None, reason="heat enters at an unstated temperature")
    text = Outline(page(Record(data))).text
    assert "heat enters at an unstated temperature" in text


def test_a_record_with_little_in_it_still_makes_a_page() -> None:
    data = invented_data()
    for name in ("assumptions", "cautions", "criteria", "figures", "solution_order", "summary"):
        data[name] = []
    for name in ("accounts", "relations", "uncertainty_budget", "audits"):
        data[name] = {}
    data["calculation"].update(narratives={}, references=[], revisions=[])
    outline = Outline(page(Record(data)))
    assert "No caution of the catalogue was raised." in outline.text
    assert outline.fragments - set(outline.ids) == set()


def test_a_two_phase_state_shows_its_quality() -> None:
    data = invented_data()
    template = data["values"]["states.2.temperature"]
    data["values"]["states.2.quality"] = {**template, "value": 0.91, "dimension": "ratio", "symbol": "x_2"}
    data["values"]["states.2.phase"]["value"] = "two-phase"
    html = page(Record(data))
    assert "two-phase, " in html
    assert 'href="#value-states.2.quality">0.9' in html


def test_columns_that_would_be_empty_are_left_out() -> None:
    data = invented_data()
    assert Outline(page(Record(data))).text.count("U (k\xa0=\xa02)") == 2
    data["criteria"] = []
    for entry in (*data["values"].values(), *data["inputs"].values()):
        entry["standard_uncertainty"] = None
    for entry in data["inputs"].values():
        entry["expanded_uncertainty"] = None
    text = Outline(page(Record(data))).text
    assert "U (k\xa0=\xa02)" not in text
    assert "Criterion" not in text


def test_us_customary_units_are_shown_throughout() -> None:
    data = invented_data()
    data["calculation"]["units"] = "US"
    text = Outline(page(Record(data))).text
    for unit in ("psia", "°F", "Btu/lb", "Btu/(h·°R)", "hp"):
        assert unit in text


def test_rough_numbers_are_rounded_in_the_unit_shown() -> None:
    presenter = Presenter(invented_record())
    assert presenter.rough(1234.56, "pressure_difference", 3).replace("\xa0", " ") == "0.0123 bar"
    data = invented_data()
    data["calculation"]["units"] = "US"
    assert Presenter(Record(data)).rough(5000.0, "pressure_difference", 3).replace("\xa0", " ") == "0.725 psi"


def test_a_budget_shows_contributions_shares_and_what_first_order_leaves_out(outline: Outline) -> None:
    text = outline.text[outline.text.index("Combined standard uncertainty") - 900 :].replace("\xa0", " ")
    for part in (
        "kW/K per kg/s",
        "90.0",
        "10.0",
        "effective degrees of freedom infinite",
        "coverage probability 95.5 %",
    ):
        assert part in text
    assert "largest term that first order leaves out" in text


def budget_section(data: dict[str, Any]) -> str:
    text = Outline(page(Record(data))).text.replace("\xa0", " ")
    return text[text.index("Result and inputs") : text.index("The record holds every contribution")]


def test_small_contributions_share_a_row_and_a_single_one_keeps_its_name() -> None:
    data = invented_data()
    path = "equipment.TG-2.entropy_generation"
    (first, *_) = data["uncertainty_budget"].values()
    budget = data["uncertainty_budget"][path] = json.loads(json.dumps(first))
    small = {**budget["contributions"][-1], "share": 4e-4}
    budget["contributions"] += [small, {**small, "input": "states.2.pressure", "share": -1e-4}]
    text = budget_section(data)
    assert "2 further inputs, together 0.03 %" in text
    budget["contributions"].pop()
    assert "further inputs" not in budget_section(data)


def repeated_budget(data: dict[str, Any]) -> dict[str, Any]:
    """Makes the budget of a lost work T0 times that of its entropy generation."""
    source = data["uncertainty_budget"]["equipment.PRV-3.entropy_generation"]
    found = data["uncertainty_budget"]["equipment.PRV-3.lost_work"] = json.loads(json.dumps(source))
    found["standard_uncertainty"] *= 288.15
    for row in found["contributions"]:
        row["contribution"] *= 288.15
    return found  # type: ignore[no-any-return]


def test_a_lost_work_with_the_budget_of_its_entropy_generation_takes_one_line() -> None:
    data = invented_data()
    found = repeated_budget(data)
    line = "that of the entropy generated, times T0, which has no uncertainty"
    assert line in budget_section(data)
    found["contributions"][0]["contribution"] *= 1.001
    assert line not in budget_section(data)
    repeated_budget(data)
    data["inputs"]["surroundings.temperature"]["standard_uncertainty"] = 0.5
    data["values"]["surroundings.temperature"]["standard_uncertainty"] = 0.5
    assert line not in budget_section(data)


def test_what_the_program_took_stands_last_among_the_inputs() -> None:
    data = invented_data()
    head = "Taken by the program where the file states nothing"
    assert head not in page(Record(data))
    template = data["inputs"]["surroundings.temperature"]
    taken = {"text": "not stated", "status": "by default", "source": "No heat is exchanged.", "line": 1}
    path = "equipment.PRV-3.heat"
    data["inputs"][path] = {**template, **taken, "dimension": "heat_flow", "value": 0.0, "applies_to": [path]}
    text = Outline(page(Record(data))).text
    inputs = text[text.index("As written") : text.index("Assumptions", text.index("As written"))]
    assert inputs.index("39.0 bar(g)") < inputs.index(head) < inputs.index("No heat is exchanged.")
    assert "by default" not in inputs


def test_a_power_says_on_the_page_which_way_it_is_positive() -> None:
    data = invented_data()
    data["values"]["equipment.TG-2.power"]["direction"] = "delivered"
    assert "Power delivered" in Outline(page(Record(data))).text


def test_the_terminal_shows_the_same_numbers(capsys: pytest.CaptureFixture[str]) -> None:
    terminal.print_summary(invented_record())
    printed = capsys.readouterr().out.replace("\xa0", " ")
    for part in ("0.895 kW/K", "± 0.019", "STOP T32 states.2.temperature", "margin −26.5 ± 1.6 K", "not decided", "A1"):
        assert part in printed


def test_the_terminal_takes_no_markup_from_the_record(capsys: pytest.CaptureFixture[str]) -> None:
    data = invented_data()
    data["calculation"]["title"] = "[red]x[/red] [/]"
    data["cautions"][0]["text"] = "[link=https://example.org]y[/link]"
    terminal.print_summary(Record(data))
    assert "[red]x[/red] [/]" in capsys.readouterr().out


HOSTILE = """<b>"x'&amp;</style></title><script>alert(1)</script>{{ 7*7 }}"""


def spoilt(value: Any, skip: set[str]) -> Any:
    """The same data with every free text replaced by a hostile one."""
    if isinstance(value, dict):
        return {key: entry if key in skip else spoilt(entry, skip) for key, entry in value.items()}
    if isinstance(value, list):
        return [spoilt(entry, skip) for entry in value]
    return HOSTILE if isinstance(value, str) else value


#: Texts that are keys, formulae or fixed words of the record, not free text.
FIXED = {
    *(
        "affects",
        "applies_to",
        "comparison",
        "decision",
        "dimension",
        "direction",
        "distribution",
        "evaluation",
        "from",
    ),
    *("heaviest_inputs", "id", "input", "kind", "latex_lines", "latex_numbers", "latex_symbols", "mass_flow", "method"),
    *(
        "narratives",
        "path",
        "quantity",
        "relation",
        "severity",
        "solution_order",
        "solves",
        "state",
        "status",
        "summary",
    ),
    *("surroundings", "symbol", "unit", "units", "uses", "values", "verdict"),
}


def test_every_text_of_the_record_is_escaped() -> None:
    data = invented_data()
    hostile = spoilt(data, FIXED)
    hostile["calculation"]["number"] = HOSTILE
    hostile["calculation"]["status"] = HOSTILE
    hostile["audits"] = data["audits"]
    for figure, drawn in zip(hostile["figures"], data["figures"], strict=True):
        figure["id"] = drawn["id"]
    html = page(Record(hostile))
    outline = Outline(html)
    assert outline.tags["script"] == 0
    assert outline.tags["style"] == 1
    assert outline.tags["title"] == 1 + outline.tags["svg"]
    assert "49" not in re.findall(r"\{\{.*?\}\}", outline.text)
    assert outline.text.count(HOSTILE) > 60
    assert "<b>" not in html


def test_hostile_names_of_states_pieces_and_inputs_cannot_leave_their_place() -> None:
    text = json.dumps(invented_data())
    for name, replacement in (("PRV-3", "P<b>'\\\\\\\"x"), ("TG-2", "T G&2")):
        text = text.replace(name, replacement)
    data = json.loads(re.sub(r'"latex_lines": \[\[.*?\]\]', '"latex_lines": []', text))
    data["calculation"]["narratives"] = {}
    for entry in data["values"].values():
        entry["symbol"] = "x"
    outline = Outline(page(Record(data)))
    assert outline.tags["b"] == 0
    assert outline.fragments - set(outline.ids) == set()


def test_equal_records_give_equal_bytes_in_another_process(tmp_path: Path, html: str) -> None:
    record = tmp_path / "record.json"
    record.write_bytes(invented_record().to_json())
    script = (
        "import sys; from pathlib import Path; from reportgen.record import Record; from reportgen.report.page import "
        "page; sys.stdout.buffer.write(page(Record.load(Path(sys.argv[1]))).encode())"
    )
    environment = {
        **os.environ,
        "PYTHONHASHSEED": "7",
        "TZ": "Asia/Kolkata",
        "LC_ALL": "C.UTF-8",
        "PYTHONPATH": str(ROOT),
    }
    result = subprocess.run(
        [sys.executable, "-c", script, str(record)], capture_output=True, check=True, cwd=tmp_path, env=environment
    )
    assert result.stdout == html.encode()


def test_render_writes_page_and_record_and_the_register_lists_them(tmp_path: Path) -> None:
    site = tmp_path / "site"
    path = render(invented_record(), site)
    assert path == site / "SB-TH-014" / "A" / "index.html" == page_path(invented_record(), site)
    assert path.with_name("record.json").read_bytes() == invented_record().to_json()
    later = invented_data()
    later["calculation"]["number"] = "SB/TH 2"
    render(Record(later), site)
    listing = register(site).read_text("utf-8")
    outline = Outline(listing)
    assert 'href="SB-TH-014/A/index.html"' in listing
    assert 'href="SB~2f~TH~20~2/A/index.html"' in listing
    for text in ("0.895 kW/K", "1 to be verified, 1 not decided", "1 stop, 1 warning, 1 note", "2 documents"):
        assert text in outline.text.replace("\xa0", " ")
    assert sorted(item.name for item in site.rglob("*") if item.is_file()) == ["index.html"] * 3 + ["record.json"] * 2


def test_the_register_renders_records_that_have_no_page_yet(tmp_path: Path) -> None:
    register(tmp_path, [invented_record()])
    assert page_path(invented_record(), tmp_path).is_file()


def test_the_register_can_be_written_again_in_the_same_process(tmp_path: Path) -> None:
    assert report.register(tmp_path) == report.register(tmp_path)
    assert "0 documents" in Outline((tmp_path / "index.html").read_text("utf-8")).text


def test_the_register_passes_over_what_is_no_record(tmp_path: Path) -> None:
    path = render(invented_record(), tmp_path)
    other = path.parents[1] / "B"
    other.mkdir()
    (other / "record.json").write_text("{}", encoding="utf-8")
    (other / "index.html").write_text("", encoding="utf-8")
    assert "1 document" in Outline(register(tmp_path).read_text("utf-8")).text


def test_revisions_and_numbers_are_sorted_as_people_do(tmp_path: Path) -> None:
    for number in ("P-10", "P-9"):
        data = invented_data()
        data["calculation"]["number"] = number
        render(Record(data), tmp_path)
    text = register(tmp_path).read_text("utf-8")
    assert text.index(">P-9<") < text.index(">P-10<")


def test_a_bad_narrative_leaves_the_old_page(tmp_path: Path) -> None:
    path = render(invented_record(), tmp_path)
    before = path.read_bytes()
    data = invented_data()
    data["calculation"]["narratives"]["purpose"]["text"] = '{{ value("nothing") }}'
    with pytest.raises(InputError):
        render(Record(data), tmp_path)
    assert path.read_bytes() == before


@pytest.mark.parametrize("failing", ["index.html", "record.json"])
def test_a_failure_while_placing_files_leaves_the_old_ones(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, failing: str
) -> None:
    old = {tmp_path / name: name.encode() for name in ("index.html", "record.json")}
    folders.write_together(old)
    real = Path.replace

    def refuse(self: Path, target: Path) -> Path:
        if self.name == f".{failing}.new":
            raise PermissionError(13, "in use")
        return real(self, target)

    monkeypatch.setattr(Path, "replace", refuse)
    with pytest.raises(ReportgenError, match=f"{failing}.*in use"):
        folders.write_together(dict.fromkeys(old, b"new"))
    assert {path: path.read_bytes() for path in tmp_path.iterdir()} == old


@pytest.mark.parametrize("name", ["", ".", "..", "...", "con", "NUL.txt", "A.", "x" * 101, "guide"])
def test_names_that_no_folder_may_have_are_refused(name: str) -> None:
    with pytest.raises(InputError, match=r"calculation\.number"):
        folders.folder_name(name, "calculation.number")


@pytest.mark.parametrize("name", ["../../etc", "a/b", "a\\b", "C:", "a b", "ü", "~", "a\x00b", "-rf"])
def test_unsafe_characters_are_mapped_and_stay_apart(name: str) -> None:
    mapped = folders.folder_name(name, "calculation.number")
    assert re.fullmatch(r"[A-Za-z0-9._~-]+", mapped)
    assert folders.folder_name(mapped, "calculation.number") != mapped or mapped == name


def test_numbers_that_differ_in_capitals_only_are_refused(tmp_path: Path) -> None:
    render(invented_record(), tmp_path)
    data = invented_data()
    data["calculation"]["number"] = "sb-th-014"
    with pytest.raises(InputError, match="capitals"):
        render(Record(data), tmp_path)


def test_texts_in_the_running_foot_cannot_leave_the_string() -> None:
    assert css_string('A"} body{display:none} </style>\n') == (
        '"A\\22 \\7d  body\\7b display:none\\7d  \\3c /style\\3e \\a "'
    )


def test_small_helpers_of_the_templates() -> None:
    assert lower_first("Mass flow") == "mass flow"
    assert lower_first("TG-2 power") == "TG-2 power"
    assert raised("2 ×\xa010⁻¹² kW") == "2 ×\xa010<sup>−12</sup> kW"
    assert raised("10 m²") == "10 m²"


def method_of(fluids: dict[str, dict[str, Any]]) -> str:
    data = invented_data()
    steam = data["plant"]["fluids"]["steam"]
    data["plant"]["fluids"] = {
        name: {**copy.deepcopy(steam), "title": name.capitalize(), **more} for name, more in fluids.items()
    }
    found = re.search(r'<section id="method".*?</section>', page(Record(data)), re.DOTALL)
    assert found is not None
    text = re.sub(r"<[^>]+>", " ", found[0])
    return re.sub(r"\s+", " ", unescape(text).replace("\N{NO-BREAK SPACE}", " "))


def test_property_models_tell_range_zero_and_sources_as_one_reads_them() -> None:
    limits = {"minimum_temperature": 253.15, "maximum_temperature": 573.15, "maximum_pressure": 1e7, "remarks": []}
    zero = "h = -241.825 kJ/mol for H2O (-0.5 at R14-08(2011))."
    text = method_of(
        {
            "steam": {
                "limits": limits,
                "sources": ["a table"],
                "entropy_zero": zero,
                "entropy_zero_name": "298.15 K liquid:oil",
            },
            "water": {"limits": limits, "sources": ["a table", "a paper"], "entropy_zero_name": "third-law"},
        }
    )
    assert "from −20 °C to 300 °C, up to 100 bar" in text
    assert "h = −241.825 kJ/mol for H2O (−0.5 at R14-08(2011))." in text
    assert "liquid:oil" not in text
    assert "name of this zero: third-law" in text
    assert text.count("a table") == 1
    assert "a paper · others as for Steam" in text

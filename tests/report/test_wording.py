"""What is shown, and how: the same number everywhere, nothing empty, units and names as people write them."""

from __future__ import annotations

import re
import warnings
from html import unescape
from pathlib import Path
from typing import Any

import pytest

from reportgen import evaluation, spec
from reportgen.names import symbol_of
from reportgen.record import Record
from reportgen.report import figures, register, terminal
from reportgen.report.amounts import Amounts
from reportgen.report.page import page
from reportgen.report.presenter import Presenter, prose
from reportgen.report.templates import fonts_folder
from tests.report.invented import invented_data

PROJECTS = Path(__file__).parents[2] / "projects"
PORT = "equipment.CV.heat_ports.1.heat"


def section(data: dict[str, Any], name: str) -> str:
    """One section of the page, tags included."""
    return page(Record(data)).split(f'<section id="{name}"')[1].split("</section>")[0]


def text_of(html: str) -> str:
    """Text without style and tags, each space a plain one."""
    return " ".join(unescape(re.sub(r"<[^>]*>", " ", html.split("</style>")[-1])).split())


def test_optional_texts_that_are_not_stated_leave_no_trace() -> None:
    data = invented_data()
    for key in ("client", "location", "owner", "originator", "checker", "approver"):
        data["calculation"][key] = None
    data["calculation"] |= {"references": [], "revisions": [], "narratives": {}}
    for entry in data["inputs"].values():
        entry |= {"source": None, "supplied_by": None, "status": None}
    for entry in data["assumptions"]:
        entry |= {"basis": None, "owner": None, "due": None}
    for entry in data["criteria"]:
        entry |= {"basis": None}
    for entry in data["cautions"]:
        entry |= {"source": None, "adjusted": None}
    for kind in ("states", "equipment"):
        for entry in data["plant"][kind].values():
            entry["title"] = None
    html = page(Record(data))
    text = text_of(html)
    assert "None" not in text
    assert not re.search(r"·\s*(·|</(?:p|span|div|td)>)|>from\s*</|· owner\s*<|· due\s*<", html.split("</style>")[-1])
    assert 'class="under"></span>' not in html


def labels(figure: dict[str, Any], presenter: Presenter) -> list[str]:
    """Texts of a drawing, spaces plain."""
    drawn = figures.draw(figure, presenter, fonts_folder()) or ""
    return [" ".join(unescape(text).split()) for text in re.findall(r">([^<>]+)</text>", drawn)]


@pytest.mark.parametrize("units", ["SI", "US"])
@pytest.mark.parametrize("project", ["letdown-station", "instrument-air", "nitrogen-blanketing"])
def test_labels_of_figures_are_the_numbers_of_the_tables(project: str, units: str) -> None:
    record = evaluation.evaluate(spec.read(PROJECTS / project))
    record.data["calculation"]["units"] = units
    presenter = Presenter(record)
    drawn = {figure["kind"]: labels(figure, presenter) for figure in record.data["figures"]}
    account = text_of(section(record.data, "account"))
    found = text_of(section(record.data, "found"))

    for entry in record.data["accounts"].values():
        amounts = Amounts(entry, presenter)
        unit = presenter.display.unit_text(entry["dimension"])
        carried = "in" if entry["dimension"] == "entropy_flow" else "there and in"
        for words, value in (("generated", amounts.generated), (carried, amounts.entering)):
            number = " ".join(amounts.text(value).split())
            assert f"{words} {number} {unit}" in drawn["entropy-account-bars"]
            if len(entry["generated" if words == "generated" else "entering"]) == 1:
                assert f" {number} " in account

    figure = next(figure for figure in record.data["figures"] if figure["kind"] == "lost-work-bars")
    for bar in figure["bars"]:
        shown = presenter.show(bar["value"], figure["dimension"], bar["expanded_uncertainty"])
        assert " ".join(shown.text.split()) in drawn["lost-work-bars"]
        assert f"{' '.join(shown.number.split())} {shown.unit}" in found

    pressures = [
        presenter.display.convert(entry["value"], "pressure")
        for path, entry in record.data["values"].items()
        if path.startswith("states.") and path.endswith(".pressure")
    ]
    for label in drawn["temperature-entropy"]:
        if label.endswith(presenter.display.unit_text("pressure")):
            number = float(label.split()[0])
            assert min(abs(number / pressure - 1.0) for pressure in pressures) < 5e-4


def test_a_number_of_the_account_is_rounded_once_in_the_unit_shown() -> None:
    data = invented_data()
    data["calculation"]["units"] = "US"
    line = {"label": "x", "path": "total.entropy_generation", "value": 135.181792092}
    account = {"entering": [{**line, "value": 33728.9282096}], "generated": [line], "leaving": []}
    assert Amounts(account, Presenter(Record(data))).text(line["value"]) == "256.3"
    assert Amounts({**account, "entering": []}, Presenter(Record(data))).text(line["value"]) == "256.255"


@pytest.mark.parametrize(
    "figure",
    [
        {"id": "a", "kind": "lost-work-bars", "title": "a", "bars": []},
        {"id": "b", "kind": "entropy-account-bars", "title": "b", "bars": []},
        {
            "id": "c",
            "kind": "temperature-entropy",
            "title": "c",
            "dome": None,
            "isobars": [],
            "paths": [],
            "points": [],
        },
        {
            "id": "d",
            "kind": "lost-work-bars",
            "title": "d",
            "bars": [{"label": "H", "path": "x", "value": None, "expanded_uncertainty": None, "train": None}],
        },
    ],
)
def test_a_figure_without_data_is_not_drawn(figure: dict[str, Any]) -> None:
    data = invented_data()
    data["figures"] = [figure]
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        html = page(Record(data))
    assert "<figure" not in html
    assert 'id="figures"' not in html


def test_letters_that_the_face_lacks_are_drawn_without_a_warning() -> None:
    data = invented_data()
    for figure in data["figures"]:
        for bar in figure.get("bars", []):
            bar["label"] = "Клапан 阀"
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        assert "Клапан 阀" in page(Record(data))


def test_what_is_generated_is_told_without_colour() -> None:
    account = section(invented_data(), "account")
    assert account.count("<tr class=made>") == len(invented_data()["accounts"])
    text = text_of(account)
    assert "generated in PRV-3" in text
    assert "Sum, entering and generated" in text
    assert "Sum, leaving" in text
    assert "unseen" not in account.split("<tfoot>")[1].split("</tfoot>")[0]
    style = page(Record(invented_data())).split("</style>")[0]
    assert ".account .generation { font-style: italic; }" in style
    assert ".account .made" in style


def test_what_is_left_of_a_balance_is_zero_where_it_is_rounding_and_keeps_its_ratio() -> None:
    data = invented_data()
    path = "total.closure"
    data["audits"]["closure"] = [
        {"owner": "total", "quantity": "entropy", "value": 1e-13, "scale": 21e3, "relative": 4.8e-18, "unit": "W/K"}
    ]
    data["values"][path] = {**data["values"]["total.entropy_generation"], "value": 1e-13, "standard_uncertainty": None}
    assert Presenter(Record(data)).text(path) == "0\N{NO-BREAK SPACE}kW/K"
    assert Presenter(Record(data)).text(path, unit=False) == "0"
    closure = text_of(section(data, "closure"))
    assert "0 kW/K 21 kW/K 4.8 × 10 −18" in closure
    data["audits"]["closure"][0] |= {"value": 21.0, "relative": 1e-3}
    assert "0.021 kW/K 21 kW/K 0.001" in text_of(section(data, "closure"))


def test_the_heat_over_a_boundary_is_named_as_people_do() -> None:
    assert symbol_of(PORT) == r"\dot Q_{\mathrm{CV},1}"
    assert symbol_of("equipment.A.B.heat_ports.2.entropy_with_heat") == r"\dot S_{Q,\mathrm{A.B},2}"
    presenter = Presenter(Record(invented_data()))
    assert presenter.label(PORT) == "Heat flow rate, heat port\N{NO-BREAK SPACE}1 of CV"


def test_who_supplied_an_input_reads_well() -> None:
    data = invented_data()
    first, second = list(data["inputs"])[:2]
    data["inputs"][first] |= {"supplied_by": "taken by the program", "status": "to be verified"}
    data["inputs"][second] |= {"supplied_by": "Orrin Paper", "status": "measured"}
    text = text_of(section(data, "inputs"))
    assert "from taken" not in text
    assert "from Orrin Paper" in text


def test_the_programs_sentences_use_the_signs_of_units_and_the_authors_stay_as_written() -> None:
    assert prose("h = 200 kJ/kg at 0 degC, R = 461.5 J/(kg K) at 273.16 K") == (
        "h = 200 kJ/kg at 0\N{NO-BREAK SPACE}°C, R = 461.5 J/(kg·K) at 273.16\N{NO-BREAK SPACE}K"
    )
    data = invented_data()
    fluid = next(iter(data["plant"]["fluids"].values()))
    fluid["entropy_zero"] = "s = 0 for the liquid at 0 degC"
    data["assumptions"][0] |= {"origin": "author", "text": "The room is at 20 degC."}
    html = page(Record(data))
    assert "the liquid at 0\N{NO-BREAK SPACE}°C" in html
    assert "The room is at 20 degC." in html


def criterion(data: dict[str, Any], limit: float, text: str) -> str:
    data["criteria"][0] |= {
        "path": "states.2.temperature",
        "comparison": "at_most",
        "limit": limit,
        "limit_text": text,
        "dimension": "temperature",
    }
    return text_of(section(data, "found"))


def test_the_limit_of_a_criterion_stands_in_display_units(capsys: pytest.CaptureFixture[str]) -> None:
    data = invented_data()
    assert "at most 40 °C" in criterion(data, 313.15, "40 degC")
    data["calculation"]["units"] = "US"
    assert "at most 104 °F" in criterion(data, 313.15, "40 degC")
    terminal.print_summary(Record(data))
    assert "at most 104\N{NO-BREAK SPACE}°F" in capsys.readouterr().out


def decisive(data: dict[str, Any], index: int, **more: Any) -> dict[str, Any]:
    entry: dict[str, Any] = data["assumptions"][index]
    test = dict.fromkeys(("text", "model_value", "other_value", "difference", "unit", "dimension", "path"))
    entry |= {"test": {**test, "finding": "A result turns.", "verdict": "decisive"}, **more}
    return entry


def test_decisive_assumptions_stand_in_the_head_the_register_and_the_terminal(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    data = invented_data()
    for entry in data["assumptions"]:
        entry |= {"status": "accepted", "test": None}
    entry = decisive(data, 0, origin="author", status="accepted")
    head = page(Record(data)).split("</header>")[0]
    assert f"decisive assumption: {entry['id']}" in text_of(head)
    assert f'href="#assumption-{entry["id"]}"' in head
    terminal.print_summary(Record(data))
    assert f"Decisive {entry['id']}" in capsys.readouterr().out
    listed = text_of(register(tmp_path, [Record(data)]).read_text("utf-8"))
    assert "1 decisive" in listed
    assert "to be verified" not in listed.split("Open items are")[0]


def test_a_decisive_assumption_of_the_program_is_named_by_its_sentence() -> None:
    data = invented_data()
    decisive(data, 0, origin="automatic", text="Heat leaves at <T0>.", id="equipment.C.heat", status="to be verified")
    head = page(Record(data)).split("</header>")[0]
    assert "decisive assumption: heat leaves at <T0>" in text_of(head)
    assert "<T0>" not in head


def test_the_terminal_says_what_the_second_law_does_not_settle(capsys: pytest.CaptureFixture[str]) -> None:
    data = invented_data()
    first, second = data["audits"]["second_law"][:2]
    first |= {"value": 39.0, "expanded_uncertainty": 49.0, "verdict": "not resolved from reversible"}
    second |= {"verdict": "generates entropy"}
    for entry in data["audits"]["second_law"][2:]:
        entry |= {"verdict": "generates entropy"}
    terminal.print_summary(Record(data))
    lines = [line for line in capsys.readouterr().out.splitlines() if line.startswith("Second law")]
    assert lines == ["Second law, PRV-3: not resolved from reversible, generates 0.039 ± 0.049 kW/K"]


def test_an_undecided_caution_says_so_once(capsys: pytest.CaptureFixture[str]) -> None:
    data = invented_data()
    data["cautions"] = [
        {**data["cautions"][0], "decided": False, "text": text} for text in ("Hot.", "Hot, not decided.")
    ]
    terminal.print_summary(Record(data))
    out = capsys.readouterr().out
    assert out.count("not decided") >= 2
    cautions = text_of(section(data, "cautions"))
    assert cautions.count("not decided") == 2

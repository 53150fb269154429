"""Narratives: values in the text, faults with file and line, and attempts to break out."""

from __future__ import annotations

from html import unescape

import pytest

from reportgen.errors import InputError
from reportgen.record import Record
from reportgen.report import check_narratives
from reportgen.report.narrative import LONGEST_RESULT, render_narrative
from reportgen.report.presenter import Presenter
from tests.report.invented import invented_data


def record_with(text: str, line: int = 40) -> Record:
    data = invented_data()
    data["calculation"]["narratives"] = {
        "conclusion": {"text": text, "file": "conclusion.md", "line": line, "column": 1}
    }
    return Record(data)


def rendered(text: str) -> str:
    html = render_narrative("conclusion", Presenter(record_with(text)))
    assert html is not None
    return unescape(str(html))


def faults(text: str, line: int = 40) -> list[str]:
    with pytest.raises(InputError) as caught:
        check_narratives(record_with(text, line))
    return [str(fault) for fault in caught.value.faults]


def test_a_value_is_shown_with_unit_and_leads_to_its_origin() -> None:
    html = rendered('It makes {{ value("equipment.PRV-3.entropy_generation") }}.')
    assert 'href="#value-equipment.PRV-3.entropy_generation"' in html
    assert "0.895\xa0kW/K</a>." in html


def test_uncertainty_and_unit_are_options() -> None:
    html = rendered('{{ value("equipment.PRV-3.lost_work", uncertainty=True) }}')
    assert "(257.9 ±\xa05.4)\xa0kW" in html
    assert "kW" not in rendered('{{ value("equipment.PRV-3.lost_work", unit=False) }}').split(">")[2]


def test_temperatures_take_their_uncertainty_in_kelvins() -> None:
    assert "400.0\xa0°C ±\xa01.7\xa0K" in rendered('{{ value("states.1.temperature", uncertainty=True) }}')


def test_an_unknown_path_is_named_with_line_and_nearest_name() -> None:
    (message,) = faults('One.\n\nTwo {{ value("equipment.PRV-3.entropy_generaton") }}')
    assert message.startswith("conclusion.md:42:5: calculation.conclusion: ")
    assert "Nearest: equipment.PRV-3.entropy_generation" in message


def test_all_faults_are_reported_at_once() -> None:
    messages = faults('{{ value("a.b") }}\n{{ 1 + 1 }}\n{% if x %}{% endif %}')
    assert [message.split(": ")[0] for message in messages] == [
        "conclusion.md:40:1",
        "conclusion.md:41:1",
        "conclusion.md:42:1",
    ]


def test_a_broken_template_is_a_fault_with_its_line() -> None:
    (message,) = faults("fine\n{{ value( }}")
    assert message.startswith("conclusion.md:41:1: ")


@pytest.mark.parametrize(
    "attack",
    [
        "{{ ''.__class__.__mro__ }}",
        '{{ value.__globals__["os"] }}',
        '{{ value("states.1.pressure").__class__ }}',
        '{{ value("states.1.pressure")|attr("__class__") }}',
        "{{ 'a' * 10**9 }}",
        "{{ 9**9**9 }}",
        "{% for i in range(10**9) %}x{% endfor %}",
        "{% for a in 'aaaaaaaa' %}{% for b in 'aaaaaaaa' %}{{ value('states.1.pressure') }}{% endfor %}{% endfor %}",
        "{% include '/etc/passwd' %}",
        "{% import 'os' as os %}",
        "{{ cycler.__init__.__globals__ }}",
        "{{ lipsum() }}",
        "{{ namespace() }}",
        "{{ self._TemplateReference__context }}",
        "{{ value(*['states.1.pressure']) }}",
        "{{ value(**{'path': 'states.1.pressure'}) }}",
        "{{ value('states.1.' ~ 'pressure') }}",
        "{{ value('states.1.pressure', uncertainty=1 == 1) }}",
        "{{ value('states.1.pressure', colour=True) }}",
        "{% set value = 3 %}{{ value }}",
        "{{ record }}",
    ],
)
def test_nothing_but_values_can_be_asked_for(attack: str) -> None:
    assert all(message.startswith("conclusion.md:40") for message in faults(attack))


def test_text_around_values_stays_markdown() -> None:
    html = rendered('A {{ value("states.1.pressure") }}.\n\n> quoted & **bold** {{ value("states.1.pressure") }}\n')
    assert "<blockquote>" in html
    assert "<strong>bold</strong>" in html


def test_comments_and_raw_braces_are_jinja_text() -> None:
    assert "{{" not in rendered("{# a remark to the colleague #}Text.")


def test_deep_nesting_is_a_fault_and_no_crash() -> None:
    assert faults("{{ " + "(" * 5000 + "1" + ")" * 5000 + " }}")


def test_the_result_is_bounded() -> None:
    text = '{{ value("states.1.pressure") }}' * (LONGEST_RESULT // 30)
    with pytest.raises(InputError, match="grows"):
        rendered(text)


@pytest.mark.parametrize(
    ("source", "never"),
    [
        ("<script>alert(1)</script>", "alert"),
        ("<style>*{display:none}</style>", "display"),
        ('<img src="https://example.org/x.png">', "<img"),
        ("![x](https://example.org/x.png)", "<img"),
        ("[x](javascript:alert(1))", "javascript"),
        ('<a href="data:text/html,x">x</a>', "data:"),
        ('<p onclick="x()">x</p>', "onclick"),
        ('<iframe src="https://example.org"></iframe>', "iframe"),
        ('<div id="found" class="title-block">x</div>', "id="),
        ('<div class="title-block">x</div>', "title-block"),
        ('<span style="position:fixed">x</span>', "style="),
        ("<h1>x</h1>", "<h1"),
        ("# x", "<h1"),
        ("<form action=x><input></form>", "<form"),
        ("<svg onload=x><text>a</text></svg>", "<svg"),
        ("<meta http-equiv=refresh content=0>", "<meta"),
        ("<base href=https://example.org>", "<base"),
    ],
)
def test_html_that_runs_loads_or_disguises_is_removed(source: str, never: str) -> None:
    assert never not in rendered("before\n\n" + source + "\n\nafter")


def test_headings_of_a_narrative_stand_below_those_of_the_page() -> None:
    assert "<h3>Deep</h3>" in rendered("##### Deep")


def test_tables_of_a_narrative_scroll_in_their_own_box() -> None:
    html = rendered("| a | b |\n|---|---|\n| 1 | 2 |\n")
    assert '<div class="wide" role="region" tabindex="0"' in html
    assert "<td>2</td>" in html


def test_a_record_without_narratives_passes() -> None:
    data = invented_data()
    data["calculation"]["narratives"] = {}
    check_narratives(Record(data))
    assert render_narrative("purpose", Presenter(Record(data))) is None

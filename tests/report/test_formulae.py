"""MathML of every construct that formulae use, and the breaking of long ones."""

from __future__ import annotations

from xml.etree import ElementTree

import pytest

from reportgen.errors import InputError
from reportgen.names import NAMES
from reportgen.report.breaking import estimated_total, estimated_width, parts_of, split
from reportgen.report.formulae import mathml, pieces


def parsed(latex: str) -> ElementTree.Element:
    return ElementTree.fromstring(mathml(latex))


def upright(element: ElementTree.Element) -> bool:
    """A browser slants an identifier of one letter unless told not to; longer ones stand upright by themselves."""
    return len(element.text or "") > 1 or element.get("mathvariant") == "normal"


def test_a_dot_is_an_accent_above_its_letter() -> None:
    root = parsed(r"\dot m")
    over = root.find("mover")
    assert over is not None
    assert over.get("accent") == "true"
    assert [child.text for child in over] == ["m", "˙"]


def test_letters_of_a_unit_are_one_upright_identifier_with_its_power() -> None:
    root = parsed(r"1.4444\,\mathrm{kJ\,kg^{-1}\,K^{-1}}")
    assert [element.text for element in root.iter("mi")] == ["kJ", "kg", "K"]
    assert all(upright(element) for element in root.iter("mi"))
    power = root.find("msup")
    assert power is not None
    assert power[0].text == "kg"
    assert "".join(power[1].itertext()) == "−1"
    assert len(root.findall("mspace")) == 3


@pytest.mark.parametrize("unit", [r"\mathrm{K}", r"\mathrm{°C}", r"\mathrm{{}^{\circ}C}", r"\mathrm{W}"])
def test_a_unit_of_one_letter_or_with_a_sign_is_upright(unit: str) -> None:
    root = parsed(rf"288.15\,{unit}")
    assert all(upright(element) for element in root.iter("mi"))
    assert "".join(root.itertext()).startswith("288.15")


def test_the_hyphen_of_a_tag_is_no_minus() -> None:
    text = "".join(parsed(r"\dot S_{\mathrm{gen},\mathrm{PRV-3}}").itertext())
    assert "PRV-3" in text
    assert "−" not in text


@pytest.mark.parametrize("tag", ["E_1", "K 101", "P-101.A", "x#1", "50%", "a&b", "a<b", "Übergabe"])
def test_any_tag_can_stand_in_a_subscript(tag: str) -> None:
    assert tag in "".join(parsed(rf"\dot W_{{\mathrm{{{tag}}}}}").itertext()).replace("\xa0", " ")


def test_limits_of_a_sum_stand_below_and_above() -> None:
    assert parsed(r"\sum_{j} x_j").find("munder") is not None
    assert parsed(r"\sum_{j=1}^{n} x_j").find("munderover") is not None
    assert parsed(r"\int_{1}^{2} x").find("msubsup") is not None


def test_brackets_of_a_group_stretch_with_that_group_only() -> None:
    root = parsed(r"\dot m \left(s_2 - s_1\right) - \frac{\dot Q}{T}")
    group = next(row for row in root.iter("mrow") if row[0].text == "(")
    assert "".join(group.itertext()) == "(s2−s1)"


def test_fractions_roots_logarithms_and_powers_of_ten() -> None:
    assert parsed(r"\frac{a}{b}").find("mfrac") is not None
    assert parsed(r"\sqrt{x}").find("msqrt") is not None
    logarithm = parsed(r"R \ln\frac{p_2}{p_1}")
    assert [child.tag for child in logarithm] == ["mi", "mspace", "mi", "mspace", "mfrac"]
    power = parsed(r"2.3 \times 10^{-12}\,\mathrm{kW}").find("msup")
    assert power is not None
    assert "".join(power.itertext()) == "10−12"


@pytest.mark.parametrize("name", sorted(NAMES))
def test_every_symbol_of_the_glossary_can_be_set(name: str) -> None:
    assert "".join(parsed(NAMES[name].symbol).itertext()).strip()


@pytest.mark.parametrize("latex", [r"\frac{a", r"\frac", r"a_", r"\nosuch{x}", r"\left(a", "x^2^3", ""])
def test_what_is_no_latex_is_an_error(latex: str) -> None:
    with pytest.raises(InputError, match="formula"):
        mathml(latex)


def test_formulae_break_before_relations_plus_and_minus_outside_brackets() -> None:
    assert split(r"\dot m \left(s_2 - s_1\right) - \sum_j \frac{a+b}{c} = 4\,\mathrm{kW\,K^{-1}}") == [
        r"\dot m \left(s_2 - s_1\right)",
        r"- \sum_j \frac{a+b}{c}",
        r"= 4\,\mathrm{kW\,K^{-1}}",
    ]


def test_signs_are_not_broken_from_their_numbers() -> None:
    assert split(r"-3 + -4 \cdot -2") == ["-3", r"+ -4 \cdot -2"]
    assert split(r"= -3.5\,\mathrm{kW}") == [r"= -3.5\,\mathrm{kW}"]
    assert split(r"2 \times 10^{-5}") == [r"2 \times 10^{-5}"]


@pytest.mark.parametrize("latex", ["= -4.62", r"\left(-4.62\right)", r"a \cdot \, -4.62", "x, -4.62"])
def test_a_sign_stands_close_to_its_number(latex: str) -> None:
    sign = next(element for element in parsed(latex).iter("mo") if element.text == "−")
    assert sign.get("form") == "prefix"


@pytest.mark.parametrize("latex", ["a - 4.62", r"\left(a\right) - 4.62", r"25\,\% - 4"])
def test_a_minus_between_terms_is_no_sign(latex: str) -> None:
    operator = next(element for element in parsed(latex).iter("mo") if element.text == "−")
    assert operator.get("form") is None


def test_a_piece_that_goes_on_spaces_its_operator_between_terms() -> None:
    first, second = pieces("a - b", "=")
    assert first.startswith("<math")
    assert second.startswith("<math")
    operator = ElementTree.fromstring(second).find("mo")
    assert operator is not None
    assert operator.get("form") == "infix"


def test_the_widest_piece_counts() -> None:
    assert estimated_width(r"\mathrm{abc} + \mathrm{a}") == 3


def test_of_a_fraction_the_longer_part_counts() -> None:
    assert estimated_total(r"\frac{a}{b + c + d}") == 7
    assert estimated_total(r"\frac{\frac{abcd}{e}}{f}") == 4


ENTROPY = r"\,\mathrm{kJ\,kg^{-1}\,K^{-1}}"
LONG = rf"= 288.15\,\mathrm{{K}}\cdot \left(6.77136{ENTROPY} - 0.224448{ENTROPY}\right)"


def test_a_long_bracket_breaks_at_its_operators_and_keeps_together_where_there_is_room() -> None:
    first, second = parts_of(LONG)
    assert first.endswith(r"(6.77136\,\mathrm{kJ\,kg^{-1}\,K^{-1}}")
    assert second == r"- 0.224448\,\mathrm{kJ\,kg^{-1}\,K^{-1}})"
    (piece,) = pieces(LONG)
    assert piece.startswith('<span class="term"><math')
    assert piece.count("<wbr>") == 1


def test_arguments_of_a_long_function_break_after_their_commas() -> None:
    long = r"h\left(1.01325\,\mathrm{bar},\,4403.8625\,\mathrm{kJ\,kg^{-1}\,K^{-1}}\right)"
    assert parts_of(long)[0].endswith(",")
    assert len(parts_of(long)) == 2


@pytest.mark.parametrize(
    "latex",
    [
        r"\left(s_2 - s_1\right)",  # short
        LONG.replace(r"\left(", r"\sqrt{").replace(r"\right)", "}"),  # within braces
        LONG.replace("0.224448", r"\frac{1}{2}"),  # its brackets stretch
        LONG.replace("-", "").replace(r"^{1}", ""),  # nothing to break at
    ],
)
def test_what_is_short_or_must_stay_whole_does_not_break(latex: str) -> None:
    assert parts_of(latex) == [latex]


def test_signs_within_long_brackets_stay_with_their_numbers() -> None:
    inner = r"\left(-3.14159265\,\mathrm{kJ\,kg^{-1}}\right)"
    assert parts_of(rf"x\left({inner} - {inner}\right)") == [rf"x({inner}", rf"- {inner})"]
    assert len(parts_of(r"\left[aaaaaaaaaaaaaaaaaaaa\right]^+ + \left(bbbbbbbbbbb + c\right)^- / 4")) == 3


def test_a_fraction_wider_than_a_sheet_is_written_in_the_line() -> None:
    sum_of = " + ".join(["1.4444\\,\\mathrm{kg\\,s^{-1}}"] * 8)
    parts = parts_of(rf"= \frac{{{sum_of}}}{{2}}")
    assert not any("frac" in part for part in parts)
    assert parts[0] == r"= (1.4444\,\mathrm{kg\,s^{-1}}"
    assert parts[-1] == "/2"
    assert max(estimated_total(part) for part in parts) < 20

"""LaTeX with symbols and with numbers."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import pytest

from reportgen.evaluation.working import FEWEST_DIGITS, MOST_DIGITS, enough_digits, with_numbers, with_symbols
from reportgen.quantities import Display

VALUES = {
    "states.1.mass_flow": (2.0, "mass_flow"),
    "states.1.specific_enthalpy": (3.2e6, "specific_energy"),
    "states.2.specific_enthalpy": (-5.0e5, "specific_energy"),
    "equipment.X.heat": (-1.5e4, "heat_flow"),
    "equipment.X.boundary_temperature": (288.15, "temperature"),
}


def number(path: str) -> str:
    value, dimension = VALUES[path]
    return Display("SI").show(value, dimension).latex


def test_symbols() -> None:
    template = r"⟦states.1.mass_flow⟧\left(⟦states.1.specific_enthalpy⟧ - ⟦states.2.specific_enthalpy⟧\right)"
    assert with_symbols(template) == r"\dot m_{\mathrm{1}}\left(h_{\mathrm{1}} - h_{\mathrm{2}}\right)"


def test_products_get_a_dot_and_negative_numbers_brackets() -> None:
    template = r"⟦states.1.mass_flow⟧\left(⟦states.1.specific_enthalpy⟧ - ⟦states.2.specific_enthalpy⟧\right)"
    assert with_numbers(template, number) == (
        r"2\,\mathrm{kg\,s^{-1}}\cdot \left(3200\,\mathrm{kJ\,kg^{-1}} - \left(-500\,\mathrm{kJ\,kg^{-1}}\right)\right)"
    )


def test_a_lone_negative_number_needs_no_brackets() -> None:
    assert with_numbers("⟦equipment.X.heat⟧", number) == r"-15\,\mathrm{kW}"


def test_a_temperature_in_a_quotient_is_absolute() -> None:
    shown = with_numbers(r"\frac{⟦equipment.X.heat⟧}{⟦equipment.X.boundary_temperature⟧}", number)
    assert shown == r"\frac{\left(-15\,\mathrm{kW}\right)}{288.15\,\mathrm{K}}"


@pytest.mark.parametrize(
    ("template", "expected"),
    [
        (r"⟦states.1.mass_flow⟧\,⟦states.1.mass_flow⟧", "2u\\cdot 2u"),
        (r"\tfrac{1}{2}\,⟦states.1.mass_flow⟧", "\\tfrac{1}{2}\\cdot 2u"),
        (r"h\left(⟦states.1.mass_flow⟧,\,⟦states.1.mass_flow⟧\right)", "h\\left(2u,\\,2u\\right)"),
        (r"\ln\,⟦states.1.mass_flow⟧", "\\ln\\,2u"),
        (r"⟦states.1.mass_flow⟧ - ⟦states.1.mass_flow⟧", "2u - 2u"),
    ],
)
def test_where_dots_go(template: str, expected: str) -> None:
    assert with_numbers(template, lambda path: "2u") == expected


# Digits of the operands


def significant(path: str, value: float, digits: int) -> float:
    return float(f"{value:.{digits}g}")


def needed(exact: dict[str, float], evaluate: Callable[[Mapping[str, float]], float]) -> dict[str, int]:
    shown = f"{evaluate(exact):.6g}"
    return enough_digits(exact, significant, evaluate, lambda value: f"{value:.6g}" == shown)


def test_a_small_difference_of_large_numbers_shows_the_digits_it_needs() -> None:
    exact = {"a": 1234.56789123, "b": 1233.98765432, "c": 2.0}
    digits = needed(exact, lambda values: values["c"] * (values["a"] - values["b"]))
    assert digits["c"] == FEWEST_DIGITS
    assert min(digits["a"], digits["b"]) > FEWEST_DIGITS
    rounded = {path: significant(path, value, digits[path]) for path, value in exact.items()}
    assert f"{2.0 * (rounded['a'] - rounded['b']):.6g}" == f"{2.0 * (exact['a'] - exact['b']):.6g}"


def test_six_digits_do_where_nothing_cancels() -> None:
    assert set(needed({"a": 2.0, "b": 3.5}, lambda values: values["a"] * values["b"]).values()) == {FEWEST_DIGITS}


def test_digits_have_an_end() -> None:
    exact = {"a": 1.0 + 1e-12 / 3.0, "b": 1.0}
    digits = needed(exact, lambda values: values["a"] - values["b"])
    assert digits == {"a": MOST_DIGITS, "b": FEWEST_DIGITS}


def test_an_equation_that_is_not_the_one_shown_keeps_six_digits() -> None:
    digits = enough_digits({"a": 1.23456789}, significant, lambda values: values["a"], lambda value: False)
    assert digits == {"a": FEWEST_DIGITS}


def test_a_formula_shows_absolute_temperatures_rounded_in_their_own_unit() -> None:
    assert Display("SI").in_formula(288.154321, "temperature", 5) == pytest.approx(288.15, abs=1e-12)
    assert Display("US").in_formula(288.154321, "temperature", 4) == pytest.approx(518.7 / 1.8, abs=1e-9)
    assert Display("SI").in_formula(1234567.0, "pressure", 3) == pytest.approx(12.3e5, abs=1e-6)

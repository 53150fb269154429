"""LaTeX with symbols and with numbers."""

from __future__ import annotations

import pytest

from reportgen.evaluation.working import with_numbers, with_symbols
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

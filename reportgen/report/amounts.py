"""The figures of an entropy account, all to the decimal place of its largest: in its table and in its drawing alike."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from reportgen.report.presenter import NO_VALUE, Presenter

__all__ = ["Amounts", "fixed"]

_DIGITS = 6


class Amounts:
    """Entropy rates of one account, or entropies of one of a closed system, as text in the unit shown."""

    def __init__(self, account: Mapping[str, Any], presenter: Presenter) -> None:
        self._presenter = presenter
        self.dimension: str = account.get("dimension", "entropy_flow")
        lines = [line["value"] for side in ("entering", "generated", "leaving") for line in account[side]]
        self.generated: float = sum(line["value"] for line in account["generated"] if line["value"] is not None)
        self.entering: float = sum(line["value"] for line in account["entering"] if line["value"] is not None)
        self.leaving: float = sum(line["value"] for line in account["leaving"] if line["value"] is not None)
        figures = [*(value for value in lines if value is not None), self.entering + self.generated, self.leaving]
        self._places = _places([presenter.display.convert(value, self.dimension) for value in figures])

    def text(self, value: float | None) -> str:
        """An entropy rate [W/K], or an entropy [J/K], in the unit shown; a dash for None."""
        if value is None:
            return NO_VALUE
        return fixed(self._presenter.display.convert(value, self.dimension), self._places)


def _places(figures: list[float]) -> int:
    """Decimal places that give the largest figure six significant digits."""
    largest = max((abs(figure) for figure in figures), default=0.0)
    if largest == 0.0:
        return 1
    digits_before = len(str(int(largest))) if largest >= 1.0 else 0
    return max(0, min(9, _DIGITS - digits_before))


def fixed(figure: float, places: int) -> str:
    """A figure with a set number of decimals, a true minus, thin spaces in threes from five digits on."""
    text = f"{abs(figure):.{places}f}"
    whole, point, decimals = text.partition(".")
    if len(whole) >= 5:
        whole = f"{int(whole):,}".replace(",", "\N{THIN SPACE}")
    sign = "−" if figure < 0.0 and float(text) != 0.0 else ""
    return f"{sign}{whole}{point}{decimals}"

"""Bars that start at zero: lost work piece by piece, and the entropy account of each train."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from reportgen.report.amounts import Amounts
from reportgen.report.figures.canvas import GENERATION, GREY, INK, SMALL, TINT, WIDTH, Drawing
from reportgen.report.presenter import Presenter

__all__ = ["draw_entropy_account", "draw_lost_work"]

_ROW, _ACCOUNT_ROW, _BAR = 26.0, 50.0, 13.0
_FOOT, _HEAD = 34.0, 6.0
_GAP = 6.0
_LEFT = 15.0  # half of a tick label such as 0.000


def draw_lost_work(figure: dict[str, Any], presenter: Presenter, fonts: Path) -> Drawing | None:
    """One bar a piece, longest first, its value with U at its end and a whisker of ± U; None without any."""
    bars = [bar for bar in figure["bars"] if bar["value"] is not None]
    if not bars:
        return None
    bars = sorted(bars, key=lambda bar: -bar["value"])
    drawing = Drawing(WIDTH, _HEAD + _FOOT + _ROW * len(bars), fonts)
    dimension = figure.get("dimension", "power")
    texts = [presenter.show(bar["value"], dimension, bar["expanded_uncertainty"]).text for bar in bars]
    values = [presenter.display.convert(bar["value"], dimension) for bar in bars]
    spreads = [
        presenter.display.convert(bar["expanded_uncertainty"], dimension) if bar["expanded_uncertainty"] else 0.0
        for bar in bars
    ]
    left = 12.0 + max((drawing.text_size(bar["label"])[0] for bar in bars), default=0.0)
    room = 12.0 + max((drawing.text_size(text)[0] for text in texts), default=0.0)
    axes = drawing.axes(left, _FOOT, 8.0, _HEAD)
    lowest = min([0.0, *(value - spread for value, spread in zip(values, spreads, strict=True))])
    highest = max([0.0, *(value + spread for value, spread in zip(values, spreads, strict=True))]) or 1.0
    inner = WIDTH - left - 8.0
    axes.set(xlim=(lowest, lowest + (highest - lowest) * inner / max(inner - room, 40.0)), ylim=(len(bars) - 0.5, -0.5))
    for row, (bar, value, spread, text) in enumerate(zip(bars, values, spreads, texts, strict=True)):
        axes.barh(row, value, height=_BAR / _ROW, left=0.0, color=TINT, edgecolor=INK, linewidth=0.7)
        if spread:
            axes.plot([value - spread, value + spread], [row, row], color=INK, linewidth=0.9)
        end, height = axes.transData.transform((max(value + spread, 0.0), row))
        drawing.write(float(end) + _GAP, float(height) - 3.0, text)
        drawing.write(left - _GAP, float(height) - 3.0, bar["label"], ha="right")
    _finish(drawing, axes, f"work forgone in {presenter.display.unit_text(dimension)}")
    named = "; ".join(f"{bar['label']} {text}" for bar, text in zip(bars, texts, strict=True))
    drawing.description = f"Horizontal bars from zero. Work forgone: {named}."
    return drawing


def draw_entropy_account(figure: dict[str, Any], presenter: Presenter, fonts: Path) -> Drawing | None:
    """One bar an account: entropy entering, then generated; the two end where what leaves ends. None without any."""
    bars = [bar for bar in figure["bars"] if bar["entering"] is not None and bar["generated"] is not None]
    if not bars:
        return None
    drawing = Drawing(WIDTH, _HEAD + _FOOT + _ACCOUNT_ROW * len(bars), fonts)
    axes = drawing.axes(_LEFT, _FOOT, 8.0, _HEAD)
    dimension = figure.get("dimension", "entropy_flow")
    entering = [presenter.display.convert(bar["entering"], dimension) for bar in bars]
    generated = [presenter.display.convert(bar["generated"], dimension) for bar in bars]
    ends = [start + more for start, more in zip(entering, generated, strict=True)]
    lowest, highest = min([0.0, *entering, *ends]), max([0.0, *entering, *ends])
    reach = (highest - lowest) or 1.0
    axes.set(xlim=(lowest, lowest + 1.02 * reach), ylim=(len(bars) - 0.5, -0.5))
    unit = presenter.display.unit_text(dimension)
    carried_in = "in" if dimension == "entropy_flow" else "there and in"
    described = []
    for row, (bar, start, more) in enumerate(zip(bars, entering, generated, strict=True)):
        height = _BAR / _ACCOUNT_ROW
        axes.barh(row, start, height=height, color=TINT, edgecolor=INK, linewidth=0.7)
        axes.barh(row, more, height=height, left=start, color=GENERATION, edgecolor=INK, linewidth=0.7)
        amounts = _amounts(bar, dimension, presenter)
        carried = f"{carried_in} {amounts.text(bar['entering'])} {unit}"
        made = f"generated {amounts.text(bar['generated'])} {unit}"
        zero, middle = (float(value) for value in axes.transData.transform((lowest, row)))
        end = float(axes.transData.transform((start + more, row))[0])
        room = sum(drawing.text_size(text, SMALL)[0] for text in (carried, made)) + 4 * _GAP
        drawing.write(zero + 3.0, middle + _BAR / 2 + 4.0, bar["label"])
        drawing.write(zero + 3.0, middle - _BAR / 2 - 11.0, carried, size=SMALL, color=GREY)
        drawing.write(max(end, zero + room), middle - _BAR / 2 - 11.0, made, size=SMALL, color=GENERATION, ha="right")
        described.append(f"{bar['label']}: {carried}, {made}")
    _finish(drawing, axes, f"{'entropy rate' if dimension == 'entropy_flow' else 'entropy'} in {unit}")
    drawing.description = f"Horizontal bars from zero. {'; '.join(described)}."
    return drawing


def _amounts(bar: dict[str, Any], dimension: str, presenter: Presenter) -> Amounts:
    """The figures as the account of the same title shows them."""
    own: dict[str, Any] = {side: [{"value": bar[side]}] for side in ("entering", "generated", "leaving")}
    accounts = presenter.record.data["accounts"].values()
    known = next((account for account in accounts if account["title"] == bar["label"]), own)
    return Amounts({**known, "dimension": dimension}, presenter)


def _finish(drawing: Drawing, axes: Any, name: str) -> None:
    """Axis name and ticks; only the foot and the zero line are drawn."""
    drawing.ticks(axes, upright=False)
    drawing.write(drawing.width - 8.0, 4.0, name, ha="right")

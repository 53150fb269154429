"""Bars that start at zero: lost work piece by piece, and the entropy account of each train."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from reportgen.report.figures.canvas import GENERATION, GREY, INK, SMALL, TINT, WIDTH, Drawing
from reportgen.report.presenter import Presenter, significant

__all__ = ["draw_entropy_account", "draw_lost_work"]

_ROW, _BAR = 26.0, 13.0
_FOOT, _HEAD = 34.0, 6.0
_GAP = 6.0


def draw_lost_work(figure: dict[str, Any], presenter: Presenter, fonts: Path) -> Drawing:
    """One bar a piece, longest first, its value with U at its end and a whisker of ± U."""
    bars = [bar for bar in figure["bars"] if bar["value"] is not None]
    bars = sorted(bars, key=lambda bar: -bar["value"])
    drawing = Drawing(WIDTH, _HEAD + _FOOT + _ROW * max(len(bars), 1), fonts)
    texts = [presenter.show(bar["value"], "power", bar["expanded_uncertainty"]).text for bar in bars]
    values = [presenter.display.convert(bar["value"], "power") for bar in bars]
    spreads = [
        presenter.display.convert(bar["expanded_uncertainty"], "power") if bar["expanded_uncertainty"] else 0.0
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
    _finish(drawing, axes, f"work forgone in {presenter.display.unit_text('power')}")
    named = "; ".join(f"{bar['label']} {text}" for bar, text in zip(bars, texts, strict=True))
    drawing.description = f"Horizontal bars from zero. Work forgone: {named}."
    return drawing


def draw_entropy_account(figure: dict[str, Any], presenter: Presenter, fonts: Path) -> Drawing:
    """One bar a train: entropy entering, then generated; the two end where what leaves ends."""
    bars = [bar for bar in figure["bars"] if bar["entering"] is not None and bar["generated"] is not None]
    drawing = Drawing(WIDTH, _HEAD + _FOOT + 2 * _ROW * max(len(bars), 1), fonts)
    left = 12.0 + max((drawing.text_size(bar["label"])[0] for bar in bars), default=0.0)
    axes = drawing.axes(left, _FOOT, 8.0, _HEAD)
    sums = [presenter.display.convert(bar["entering"] + bar["generated"], "entropy_flow") for bar in bars]
    starts = [presenter.display.convert(bar["entering"], "entropy_flow") for bar in bars]
    lowest, highest = min([0.0, *sums, *starts]), max([0.0, *sums, *starts])
    reach = (highest - lowest) or 1.0
    axes.set(xlim=(lowest, lowest + 1.02 * reach), ylim=(len(bars) - 0.5, -0.5))
    described = []
    for row, bar in enumerate(bars):
        entering = presenter.display.convert(bar["entering"], "entropy_flow")
        generated = presenter.display.convert(bar["generated"], "entropy_flow")
        height = _BAR / _ROW / 2
        axes.barh(row, entering, height=height, color=TINT, edgecolor=INK, linewidth=0.7)
        axes.barh(row, generated, height=height, left=entering, color=GENERATION, edgecolor=INK, linewidth=0.7)
        texts = (
            f"in {presenter.with_unit(significant(bar['entering'], 4), 'entropy_flow')}",
            f"generated {presenter.with_unit(significant(bar['generated'], 4), 'entropy_flow')}",
        )
        start, middle = (float(value) for value in axes.transData.transform((0.0, row)))
        end = float(axes.transData.transform((entering + generated, row))[0])
        drawing.write(left - _GAP, middle - 3.0, bar["label"], ha="right")
        drawing.write(start + 3.0, middle - _BAR / 2 - 11.0, texts[0], size=SMALL, color=GREY)
        drawing.write(end, middle + _BAR / 2 + 4.0, texts[1], size=SMALL, color=GENERATION, ha="right")
        described.append(f"{bar['label']}: {texts[0]}, {texts[1]}")
    _finish(drawing, axes, f"entropy rate in {presenter.display.unit_text('entropy_flow')}")
    drawing.description = f"Horizontal bars from zero. {'; '.join(described)}."
    return drawing


def _finish(drawing: Drawing, axes: Any, name: str) -> None:
    """Axis name and ticks; only the foot and the zero line are drawn."""
    axes.tick_params(left=False, labelleft=False)
    drawing.dress_ticks(axes)
    drawing.write(drawing.width - 8.0, 4.0, name, ha="right")

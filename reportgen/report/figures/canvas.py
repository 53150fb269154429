"""What all figures share: size, face, colours, and SVG bytes that depend on nothing but the data."""

from __future__ import annotations

import io
import math
import re
import warnings
from collections.abc import Sequence
from html import escape
from pathlib import Path
from typing import TYPE_CHECKING, Any

from reportgen.report.links import anchor

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.font_manager import FontProperties

__all__ = ["GENERATION", "GREY", "INK", "PAPER", "TEAL", "TINT", "WIDTH", "Drawing"]

#: Colours as drawn; each stands for a custom property of the style sheet, which the page's scheme sets.
INK, GREY, TINT, PAPER, TEAL, GENERATION = "#1b2224", "#6b7577", "#dfe4e4", "#fdfdfc", "#0d5c66", "#b3341c"
_PROPERTIES = {
    INK: "var(--ink)",
    GREY: "var(--quiet)",
    TINT: "var(--tint)",
    PAPER: "var(--paper)",
    TEAL: "var(--teal)",
    GENERATION: "var(--generation)",
}
FAMILY = "Ledger Pagella"
#: Points across: a phone shows the whole at a legible size, a sheet of paper at half as much again.
WIDTH = 376.0
SIZE = 9.5
SMALL = 8.5
#: Least room between labels along an axis [pt].
_CLEAR = 6.0
_TICK = 3.0
_SETTINGS: Any = {
    "svg.fonttype": "none",
    "svg.hashsalt": "reportgen",
    "path.simplify": False,
    "axes.unicode_minus": True,
    "text.usetex": False,
}


_LONG_WHOLE = re.compile(r"(?<![\d.])[1-9]\d{4,}")
_COORDINATE = re.compile(r"-?\d+\.\d{3,}")


def _rounded(match: re.Match[str]) -> str:
    """A coordinate to a hundredth of a point: finer than any screen or printer, and half the bytes."""
    return f"{round(float(match[0]), 2) + 0.0:g}"


def _grouped(label: str) -> str:
    """Thin spaces in threes left of the decimal point from five digits on, as in the numbers of the page."""
    return _LONG_WHOLE.sub(lambda digits: f"{int(digits[0]):,}".replace(",", "\N{THIN SPACE}"), label, count=1)


def _compact(body: str) -> str:
    """The same drawing in fewer bytes: no groups and names that nothing refers to, the face named once."""
    referred = set(re.findall(r'(?:url\(|href=")#([^")]+)', body))
    body = re.sub(r' id="([^"]*)"', lambda name: name[0] if name[1] in referred else "", body)
    body = re.sub(r' transform="rotate\(-?0 [^"]*\)"', "", body)
    body = re.sub(r'(?<= d=")[^"]*', lambda path: re.sub(r"\s*([MLCQZz])\s*", r"\1", path[0]).strip(), body)
    body = re.sub(r'<path d="[^"]*" style="fill: none"/>', "", body)  # backgrounds that are not painted
    body = body.replace(f"font-family: '{FAMILY}'; ", "")
    body = re.sub(r">\s+<", "><", body.strip())
    while (plain := re.sub(r"<g>((?:(?!</?g\b).)*)</g>", r"\1", body, flags=re.DOTALL)) != body:
        body = plain
    return body


class Drawing:
    """A matplotlib figure in points (1/72 inch), with the face of the page, that writes itself as SVG.

    ``width`` and ``height`` in points. One unit of display coordinates is one point, counted from the lower left.
    """

    def __init__(self, width: float, height: float, fonts: Path) -> None:
        from matplotlib.backends.backend_svg import FigureCanvasSVG
        from matplotlib.figure import Figure

        self.width, self.height = width, height
        self.description = ""
        self._face = fonts / "figures.otf"
        self.figure = Figure(figsize=(width / 72, height / 72), dpi=72, facecolor="none")
        FigureCanvasSVG(self.figure)

    def face(self, size: float = SIZE) -> FontProperties:
        """The page's text face at a size [pt]."""
        from matplotlib.font_manager import FontProperties

        return FontProperties(family=FAMILY, fname=str(self._face), size=size)

    def text_size(self, text: str, size: float = SIZE) -> tuple[float, float]:
        """Width and height [pt] of one line of text."""
        from matplotlib.font_manager import get_font
        from matplotlib.ft2font import LoadFlags

        font = get_font(str(self._face))
        font.set_size(size, 72)
        with warnings.catch_warnings():
            warnings.filterwarnings("ignore", message="Glyph .* missing from font")
            font.set_text(text, 0.0, flags=LoadFlags.NO_HINTING)
        width, _ = font.get_width_height()
        return width / 64, 0.95 * size

    def axes(self, left: float, bottom: float, right: float, top: float) -> Axes:
        """Axes with margins [pt], hairline spines left and below, no box."""
        box = (
            left / self.width,
            bottom / self.height,
            (self.width - left - right) / self.width,
            (self.height - bottom - top) / self.height,
        )
        axes = self.figure.add_axes(box, facecolor="none")
        for side in ("top", "right"):
            axes.spines[side].set_visible(False)
        for side in ("left", "bottom"):
            axes.spines[side].set(color=GREY, linewidth=0.6)
        axes.xaxis.set_visible(False)
        axes.yaxis.set_visible(False)
        return axes

    def ticks(self, axes: Axes, upright: bool = True) -> None:
        """Ticks with labels in the page's face below and, when ``upright``, left of the axes, once limits are set.

        They are drawn here as one line and plain texts: the library's own tick objects cost more time and more bytes
        than all else in a figure.
        """
        marks: list[tuple[float, float]] = []
        frame = axes.get_window_extent()
        sides = ((axes.xaxis, axes.get_xlim(), 0), (axes.yaxis, axes.get_ylim(), 1))
        for axis, limits, upward in sides[: 2 if upright else 1]:
            low, high = sorted(limits)
            reach = 1e-9 * (high - low)
            values = [value for value in axis.get_major_locator()() if low - reach <= value <= high + reach]
            labels = [_grouped(plain) for plain in axis.get_major_formatter().format_ticks(values)]
            every = 1 if upward else self._apart(labels, frame.width * (values[-1] - values[0]) / (high - low))
            for value, label in list(zip(values, labels, strict=True))[::every]:
                place = axes.transData.transform((limits[0], value) if upward else (value, axes.get_ylim()[0]))
                if upward:
                    x, y = frame.x0, float(place[1])
                    marks += [(x, y), (x - _TICK, y), (math.nan, math.nan)]
                    self.write(x - _TICK - 3.5, y - 0.32 * SMALL, label, size=SMALL, ha="right")
                else:
                    x, y = float(place[0]), frame.y0
                    marks += [(x, y), (x, y - _TICK), (math.nan, math.nan)]
                    self.write(x, y - _TICK - 0.72 * SMALL - 3.5, label, size=SMALL, ha="center")
        self._line(marks, color=GREY, linewidth=0.6)

    def _apart(self, labels: Sequence[str], length: float) -> int:
        """Every how many of evenly spaced labels along a length [pt] stand clear of each other."""
        if len(labels) < 2:
            return 1
        widest = max(self.text_size(label, SMALL)[0] for label in labels)
        return math.ceil((widest + _CLEAR) * (len(labels) - 1) / length)

    def write(self, x: float, y: float, text: str, **more: Any) -> None:
        """A line of text at display coordinates [pt]."""
        size = more.pop("size", SIZE)
        more.setdefault("color", INK)
        self.figure.text(x / self.width, y / self.height, text, fontproperties=self.face(size), **more)

    def leader(self, start: tuple[float, float], end: tuple[float, float]) -> None:
        """A hairline between two display coordinates, from what is named to its label."""
        self._line([start, end], color=GREY, linewidth=0.5)

    def _line(self, points: Sequence[tuple[float, float]], **style: Any) -> None:
        """A polyline in display coordinates; NaN lifts the pen."""
        from matplotlib.lines import Line2D

        xs, ys = zip(*points, strict=True)
        self.figure.add_artist(Line2D([x / self.width for x in xs], [y / self.height for y in ys], **style))

    def svg(self, identifier: str, title: str, description: str) -> str:
        """The figure as an ``<svg>`` element with title and description; every id begins with the figure's own."""
        import matplotlib

        stream = io.StringIO()
        with matplotlib.rc_context(_SETTINGS), warnings.catch_warnings():
            # A letter that the face lacks is drawn by the reader's browser in one of its own faces.
            warnings.filterwarnings("ignore", message="Glyph .* missing from font")
            self.figure.savefig(
                stream, format="svg", metadata={"Date": None, "Creator": None, "Format": None, "Type": None}
            )
        text = stream.getvalue()
        body = text[text.index(">", text.index("<svg")) + 1 : text.rindex("</svg>")]
        # The style element would hold for the whole page: its two properties go to the figure itself.
        body = re.sub(r"\s*<defs>\s*<style.*?</style>\s*</defs>", "", body, count=1, flags=re.DOTALL)
        prefix = anchor("figure", identifier)
        body = re.sub(r'\bid="', f'id="{prefix}.', body)
        body = re.sub(r"url\(#", f"url(#{prefix}.", body)
        body = re.sub(r'xlink:href="#', f'href="#{prefix}.', body)
        for colour, name in _PROPERTIES.items():
            body = body.replace(colour, name)
        body = re.sub(r"<[^>]*>", lambda tag: _COORDINATE.sub(_rounded, tag[0]), body)
        body = _compact(body)
        tall = ' class="tall"' if self.height > self.width else ""
        return (
            f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {self.width:g} {self.height:g}" role="img"{tall} '
            f'stroke-linejoin="round" stroke-linecap="butt" font-family="{FAMILY}" '
            f'aria-labelledby="{prefix}.title {prefix}.desc">'
            f'<title id="{prefix}.title">{escape(title)}</title>'
            f'<desc id="{prefix}.desc">{escape(description)}</desc>{body}</svg>'
        )


def finite(*columns: Sequence[float | None]) -> list[tuple[float, ...]]:
    """Rows of several columns in which no entry is missing."""
    return [
        tuple(float(entry) for entry in row if entry is not None)
        for row in zip(*columns, strict=True)
        if all(entry is not None for entry in row)
    ]

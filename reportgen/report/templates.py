"""Jinja over ``site_templates/``: the folder a company changes to make the house style its own."""

from __future__ import annotations

import base64
import re
from functools import lru_cache
from pathlib import Path
from typing import TYPE_CHECKING, Any

from markupsafe import Markup, escape

from reportgen.errors import Fault, ReportgenError

if TYPE_CHECKING:
    from jinja2 import Environment

__all__ = ["FACES", "environment", "fonts_folder", "style", "templates_folder"]

#: (file, family, weight, style) of the faces that every page embeds.
FACES = (
    ("text-regular.woff2", "Ledger Pagella", "400", "normal"),
    ("text-italic.woff2", "Ledger Pagella", "400", "italic"),
    ("text-bold.woff2", "Ledger Pagella", "700", "normal"),
    ("math.woff2", "Ledger Pagella Math", "400", "normal"),
)
_STYLES = ("page.css", "title-block.css", "tables.css", "sections.css", "register.css", "narrow.css", "print.css")

_POWER = re.compile(r"(×(?:\N{NO-BREAK SPACE}|&nbsp;)10)([⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+)")
_LOWERED = str.maketrans("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "−0123456789")


def templates_folder() -> Path:
    """``site_templates/`` of the installed package, or of the source tree."""
    package = Path(__file__).resolve().parent.parent
    for folder in (package / "site_templates", package.parent / "site_templates"):
        if (folder / "report.html.jinja").is_file():
            return folder
    raise ReportgenError(Fault("The folder site_templates is missing from the installation.", file=str(package.name)))


def fonts_folder() -> Path:
    """Folder of the font files."""
    return templates_folder() / "fonts"


@lru_cache(maxsize=1)
def environment() -> Environment:
    """Templates with all texts escaped; an unknown name in a template is an error."""
    from jinja2 import Environment, FileSystemLoader, StrictUndefined

    jinja = Environment(
        loader=FileSystemLoader(templates_folder(), encoding="utf-8"),
        autoescape=lambda name: bool(name and ".html" in name),
        undefined=StrictUndefined,
        finalize=raised,
        trim_blocks=True,
        lstrip_blocks=True,
        auto_reload=False,
        optimized=False,  # each template runs a few times only: folding constants costs more than it saves
    )
    jinja.filters["css_string"] = css_string
    jinja.filters["font_data"] = _font_data
    jinja.filters["lower_first"] = lower_first
    return jinja


def style(foot: str) -> Markup:
    """The whole style sheet with embedded faces; ``foot`` stands at the foot of each printed sheet."""
    jinja = environment()
    parts = [jinja.get_template("css/fonts.css.jinja").render(faces=FACES)]
    parts += [(templates_folder() / "css" / name).read_text("utf-8") for name in _STYLES]
    parts.append(jinja.get_template("css/sheet.css.jinja").render(foot=foot))
    return Markup("\n".join(parts))


def raised(value: Any) -> Any:
    """Powers of ten with their exponents raised by markup: the face has not all raised digits."""
    if not isinstance(value, str) or "10" not in value or not _POWER.search(value):
        return value
    return Markup(_POWER.sub(lambda match: f"{match[1]}<sup>{match[2].translate(_LOWERED)}</sup>", escape(value)))


def css_string(text: str) -> str:
    """A text as a CSS string that cannot end the string, the rule or the style element."""
    safe = re.sub(r"[^A-Za-z0-9 .,;:_/()·–—+-]", lambda match: f"\\{ord(match[0]):x} ", text)
    return f'"{safe}"'


def lower_first(text: str) -> str:
    """The first letter small, unless the word is all capitals (a tag, an abbreviation)."""
    first = text.split(" ", 1)[0]
    return text if first.isupper() else text[:1].lower() + text[1:]


@lru_cache(maxsize=8)
def _font_data(name: str) -> str:
    return base64.b64encode((fonts_folder() / name).read_bytes()).decode("ascii")

"""The author's own text: Markdown with values in it, and nothing else.

``{{ value("equipment.PRV-3.entropy_generation") }}`` puts a value of the record, with its unit and a link to its
origin, into the text; ``uncertainty=True`` adds ± U and ``unit=False`` leaves the unit out. The text is parsed in a
Jinja sandbox and only such calls with constant arguments are carried out: no statements, filters, attributes or
arithmetic ever run, so that a narrative can neither reach into the program nor keep it busy.
"""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterator, Mapping
from typing import TYPE_CHECKING, Any, NamedTuple

from markupsafe import Markup

from reportgen.errors import Fault, InputError
from reportgen.record import Record

if TYPE_CHECKING:
    from jinja2 import nodes
    from jinja2.sandbox import SandboxedEnvironment

    from reportgen.report.presenter import Presenter

__all__ = ["LONGEST_RESULT", "check_narratives", "render_narrative"]

LONGEST_RESULT = 200_000
#: Longest piece of the author's text that a message repeats.
_SHORT = 60
_OPTIONS = {"uncertainty", "unit"}
_TAGS = {
    "p", "em", "strong", "code", "pre", "ul", "ol", "li", "blockquote", "a", "sup", "sub", "br", "hr", "h3",
    "table", "thead", "tbody", "tr", "th", "td", "div", "span",
}  # fmt: skip
_WOULD_DO = 'text, and values as {{ value("path") }} with the options uncertainty=True and unit=False'


class Place(NamedTuple):
    """Line and column in a narrative's own text, from 1."""

    line: int
    column: int


def check_narratives(record: Record) -> None:
    """Raise InputError with every fault of every narrative: unknown paths, bad templates, each with file and line."""
    faults: list[Fault] = []
    for name, narrative in record.data["calculation"].get("narratives", {}).items():
        try:
            for _ in _parts(narrative, name, record, faults):
                pass
        except InputError as error:
            faults.extend(error.faults)
    if faults:
        raise InputError(faults)


def render_narrative(name: str, presenter: Presenter) -> Markup | None:
    """HTML of a narrative, cleaned; None when the record has none of that name. Raises InputError on any fault."""
    narrative = presenter.record.data["calculation"].get("narratives", {}).get(name)
    if narrative is None or not narrative["text"].strip():
        return None
    faults: list[Fault] = []
    text = ""
    for part in _parts(narrative, name, presenter.record, faults):
        if isinstance(part, str):
            text += part
        else:
            path, options = part
            text += str(presenter.number(path, options.get("unit", True), options.get("uncertainty", False)))
        if len(text) > LONGEST_RESULT:
            raise InputError(
                _fault(f"The text grows beyond {LONGEST_RESULT} characters.", narrative, name, Place(1, 1))
            )
    if faults:
        raise InputError(faults)
    return _cleaned(text)


def _parts(
    narrative: Mapping[str, Any], name: str, record: Record, faults: list[Fault]
) -> Iterator[str | tuple[str, dict[str, bool]]]:
    """The text cut into plain strings and (path, options); what is wrong is added to ``faults``."""
    from jinja2 import TemplateSyntaxError, nodes
    from jinja2.sandbox import SandboxedEnvironment

    environment = SandboxedEnvironment(keep_trailing_newline=True)
    text = narrative["text"]
    try:
        template = environment.parse(text)
    except TemplateSyntaxError as error:
        message = f"The text cannot be read as a template: {error.message}."
        faults.append(_fault(message, narrative, name, Place(error.lineno, 1), expected=_WOULD_DO))
        return
    except RecursionError:
        faults.append(_fault("The text is nested too deeply.", narrative, name, Place(1, 1), expected=_WOULD_DO))
        return
    tags = _tags(environment, text)
    for statement in template.body:
        for node in statement.nodes if isinstance(statement, nodes.Output) else [statement]:
            if isinstance(node, nodes.TemplateData):
                yield node.data
                continue
            # A statement such as a loop holds tags of its own: go on to the next one on the node's line or below.
            place, written = next((tag for tag in tags if tag[0].line >= node.lineno), (Place(node.lineno, 1), ""))
            call = _value_call(node)
            if call is None:
                message = "Only values can be put into the text."
                faults.append(_fault(message, narrative, name, place, found=written, expected=_WOULD_DO))
            elif record.entry(call[0]) is None:
                message = "The calculation has no value of this path."
                hint = _nearest(call[0], record)
                faults.append(_fault(message, narrative, name, place, found=written, hint=hint))
            else:
                yield call


def _tags(environment: SandboxedEnvironment, text: str) -> Iterator[tuple[Place, str]]:
    """Place and wording of everything in double braces or brace-percent signs, in order."""
    offset = begin = line_start = 0
    line = 1
    place = Place(1, 1)
    for _, kind, wording in environment.lex(text):
        if kind in {"variable_begin", "block_begin"}:
            begin, place = offset, Place(line, offset - line_start + 1)
        offset += len(wording)
        if "\n" in wording:
            line += wording.count("\n")
            line_start = text.rfind("\n", 0, offset) + 1
        if kind in {"variable_end", "block_end"}:
            written = " ".join(text[begin : min(offset, begin + 4 * _SHORT)].split())
            yield place, written if len(written) <= _SHORT else written[:_SHORT] + "…"


def _value_call(node: nodes.Node) -> tuple[str, dict[str, bool]] | None:
    """(path, options) of ``value("path", option=True)``, None for any other expression."""
    from jinja2 import nodes

    if not (isinstance(node, nodes.Call) and isinstance(node.node, nodes.Name) and node.node.name == "value"):
        return None
    if node.dyn_args or node.dyn_kwargs or len(node.args) != 1:
        return None
    path = node.args[0]
    if not (isinstance(path, nodes.Const) and isinstance(path.value, str)):
        return None
    options = {}
    for keyword in node.kwargs:
        constant = keyword.value
        if keyword.key not in _OPTIONS or not isinstance(constant, nodes.Const) or not isinstance(constant.value, bool):
            return None
        options[keyword.key] = constant.value
    return path.value, options


def _fault(message: str, narrative: Mapping[str, Any], name: str, place: Place, **more: Any) -> Fault:
    """A fault at a place of the text, with that place in the file."""
    column = place.column + (narrative["column"] - 1 if place.line == 1 else 0)
    line = narrative["line"] + place.line - 1
    return Fault(message, f"calculation.{name}", narrative["file"], line, column, **more)


def _nearest(path: str, record: Record) -> str:
    """Hint with the nearest path that exists."""
    known = sorted({*record.values, *record.inputs})
    close = difflib.get_close_matches(path, known, n=1, cutoff=0.5)
    return f"Nearest: {close[0]}." if close else "`reportgen evaluate FOLDER --json` lists every path under values."


def _cleaned(text: str) -> Markup:
    """Markdown to HTML with nothing in it that could run, load or break the order of headings."""
    import markdown
    import nh3

    html = markdown.markdown(text, extensions=["tables", "sane_lists"], output_format="html")
    html = re.sub(r"(</?)h[1-6]\b", r"\1h3", html)
    cleaned = nh3.clean(
        html,
        tags=_TAGS,
        clean_content_tags={"script", "style"},
        attributes={"a": {"href"}},
        allowed_classes={"a": {"n"}, "span": {"n"}},
        url_schemes={"http", "https", "mailto"},
        link_rel="noopener noreferrer",
    )
    framed = cleaned.replace("<table>", '<div class="wide" role="region" tabindex="0" aria-label="Table"><table>')
    return Markup(framed.replace("</table>", "</table></div>"))

"""Numbers, names and symbols of a record as they stand on a page.

Everything that a section shows goes through here, so that a number looks and links the same everywhere.
"""

from __future__ import annotations

import hashlib
import re
from collections.abc import Mapping
from dataclasses import replace
from functools import cached_property
from typing import Any

from markupsafe import Markup

from reportgen.names import DIMENSIONS, name_of, symbol_of
from reportgen.quantities import Display, Shown
from reportgen.record import Record
from reportgen.report.formulae import mathml
from reportgen.report.links import Links
from reportgen.report.passages import RESIDUALS, Part, arrange

__all__ = ["NO_VALUE", "Presenter", "in_order", "natural", "prose", "significant"]

NO_VALUE = "—"
#: Part of the terms of a balance below which what is left of it is rounding.
_ROUNDING = 1e-10
_NEGATIVE = re.compile(r"(?:(?<=\s)|(?<=\()|^)-(?=\d)")
_DEGREES = re.compile(r"(?<=\d) deg([CF])\b")
_BEFORE_UNIT = re.compile(r"(?<=\d) (?=(?:K|bar|kPa|MPa|Pa|%)(?!\w))")
_PRODUCT_OF_UNITS = re.compile(r"\((k?g|lb|mol|kmol) (K|°R)\)")
_HEAT_PORT = re.compile(r"(.+)\.heat_ports\.(\d+)")
_SPECIES = re.compile(r"(.+)\.species\.([^.]+)")
_STREAM = re.compile(r"(.+)\.streams\.([^.]+)")
_QUALIFIED = re.compile(r"[,:]| at the | of a two-phase| relative to| p v ")
_PIECES = re.compile(r"(\d+)")
#: Dimensions of what a process of a closed system has where equipment has a rate.
_AMOUNTS = ("energy", "entropy", "mass")


def significant(value: float, digits: int) -> float:
    """Rounded to so many significant digits, for numbers that carry no uncertainty of their own."""
    return float(f"{value:.{digits}g}")


def natural(text: str) -> list[tuple[int, int, str]]:
    """Key that sorts names as people do: ``2`` before ``10``, ``HX-2`` before ``HX-10``."""
    return [(0, int(part), "") if part.isdecimal() else (1, 0, part) for part in _PIECES.split(text) if part]


def prose(text: str | None) -> str:
    """The program's own sentences with units as the page sets them (°C, kJ/(kg·K)); never what an author wrote."""
    signed = _NEGATIVE.sub("\N{MINUS SIGN}", text or "")
    set_apart = _BEFORE_UNIT.sub("\N{NO-BREAK SPACE}", _DEGREES.sub("\N{NO-BREAK SPACE}°\\1", signed))
    return _PRODUCT_OF_UNITS.sub(r"(\1·\2)", set_apart)


def in_order(entries: Mapping[str, dict[str, Any]]) -> list[tuple[str, dict[str, Any]]]:
    """Entries in the order of the calculation file, which their ``position`` keeps; without one by name."""
    return sorted(entries.items(), key=lambda item: (item[1].get("position", 0), natural(item[0])))


def _unbroken(text: str) -> str:
    return text.replace("\N{THIN SPACE}", "\N{NARROW NO-BREAK SPACE}").replace(" ", "\N{NO-BREAK SPACE}")


class Presenter:
    """Shows the values of one record in its display units."""

    def __init__(self, record: Record) -> None:
        calculation = record.data["calculation"]
        self.record = record
        self.links = Links(record)
        self.display = Display(calculation["units"])
        self.coverage_factor: float = calculation["coverage_factor"]

    @cached_property
    def content_hash(self) -> str:
        """SHA-256 of the canonical record, in hexadecimal: of the bytes of the ``record.json`` beside the page."""
        return hashlib.sha256(self.record.to_json()).hexdigest()

    @cached_property
    def parts(self) -> list[Part]:
        """The working in the order in which it is told."""
        return arrange(self.record.data)

    @property
    def coverage(self) -> str:
        """The coverage factor as text, ``2`` or ``1.96``."""
        return f"{self.coverage_factor:g}"

    def show(self, value: float | None, dimension: str, uncertainty: float | None = None) -> Shown:
        """A number in its display unit; ``value`` and expanded ``uncertainty`` in SI.

        Its spaces are made such that no line breaks within a number.
        """
        shown = self.display.show(value, dimension, uncertainty)
        spread = None if shown.uncertainty is None else _unbroken(shown.uncertainty)
        return replace(shown, number=_unbroken(shown.number), uncertainty=spread)

    def with_unit(self, value: float | None, dimension: str, uncertainty: float | None = None) -> str:
        """``376.5 °C``: number and unit as one text, with the digits that the uncertainty allows."""
        shown = self.show(value, dimension, uncertainty)
        return f"{shown.number}\N{NO-BREAK SPACE}{shown.unit}" if shown.unit else shown.number

    def rough(self, value: float, dimension: str, digits: int, unit: bool = True) -> str:
        """A number without uncertainty of its own, to so many significant digits of the unit shown."""
        number = self.show(significant(self.display.convert(value, dimension), digits), "ratio").number
        name = self.display.unit_text(dimension) if unit else ""
        return f"{number}\N{NO-BREAK SPACE}{name}" if name else number

    def residual(self, value: float, scale: float, dimension: str) -> str:
        """What is left of a balance whose terms add up to ``scale``; 0 where that is rounding of the arithmetic."""
        return self.rough(0.0 if abs(value) <= _ROUNDING * scale else value, dimension, 2)

    @cached_property
    def residual_scales(self) -> dict[str, float]:
        """Size of the terms of each audited balance, by the path of what is left of it."""
        return {
            f"{entry['owner']}.{name}": entry["scale"]
            for entry in self.record.data["audits"].get("closure", [])
            for name in RESIDUALS[entry["quantity"]]
        }

    def difference(self, value: float | None, dimension: str, uncertainty: float | None = None) -> str:
        """A difference of two values of a dimension, with its unit: kelvins for temperatures."""
        return self.with_unit(value, self.difference_dimension(dimension), uncertainty)

    @staticmethod
    def difference_dimension(dimension: str) -> str:
        """Dimension of the difference of two values: temperatures and pressures have one of their own."""
        own = f"{dimension}_difference"
        return own if own in DIMENSIONS else dimension

    def plus_minus(self, path: str) -> str:
        """``± 0.019``, the expanded uncertainty of a value in its display unit; empty when it has none."""
        entry = self.record.entry(path)
        if entry is None or not isinstance(entry["value"], float | int):
            return ""
        return self.plus_minus_of(entry["value"], entry["dimension"], self.record.expanded_uncertainty(path))

    def plus_minus_of(self, value: float, dimension: str, uncertainty: float | None) -> str:
        """``± 0.019`` for an expanded uncertainty in SI; with unit where it differs from the value's."""
        shown = self.show(value, dimension, uncertainty)
        if shown.uncertainty is None:
            return ""
        text = f"±\N{NO-BREAK SPACE}{shown.uncertainty}"
        if dimension == "temperature":
            text += f"\N{NO-BREAK SPACE}{self.display.unit_text('temperature_difference')}"
        return text

    def text(self, path: str, unit: bool = True) -> str:
        """A value as plain text, with or without its unit; a dash when it is undefined or unknown."""
        entry = self.record.entry(path)
        if entry is None or entry["value"] is None:
            return NO_VALUE
        if isinstance(entry["value"], str):
            return entry["value"]
        if path in self.residual_scales:
            number = self.residual(entry["value"], self.residual_scales[path], entry["dimension"])
            return number if unit else number.split("\N{NO-BREAK SPACE}")[0]
        uncertainty = self.record.expanded_uncertainty(path)
        if unit:
            return self.with_unit(entry["value"], entry["dimension"], uncertainty)
        return self.show(entry["value"], entry["dimension"], uncertainty).number

    def number(self, path: str, unit: bool = True, uncertainty: bool = False) -> Markup:
        """A value as a link to where it comes from."""
        text = self.text(path, unit)
        half_width = self.plus_minus(path) if uncertainty else ""
        if half_width:
            entry = self.record.entry(path)
            if unit and entry is not None and entry["dimension"] != "temperature":
                text = f"({self.text(path, unit=False)} {half_width})"
                text += f"\N{NO-BREAK SPACE}{self.display.unit_text(entry['dimension'])}"
            else:
                text = f"{text} {half_width}"
        return self.link(path, text)

    def link(self, path: str | None, text: str | Markup) -> Markup:
        """A text as a link to where the value of a path comes from; plain when that is not known."""
        target = self.links.target(path) if path else None
        if target is None:
            return Markup('<span class="n">{}</span>').format(text)
        return Markup('<a class="n" href="#{}">{}</a>').format(target, text)

    def symbol_link(self, path: str) -> Markup:
        """The symbol of a value as a link to where it comes from, named in words for those who do not see it."""
        target = self.links.target(path)
        if target is None:
            return self.symbol(path)
        return Markup('<a class="n" href="#{}" aria-label="{}">{}</a>').format(
            target, self.label(path), self.symbol(path)
        )

    def caution_facts(self, caution: Mapping[str, Any]) -> list[tuple[str, str]]:
        """Value, limit and margin of a caution as (word, text), as far as it has them."""
        dimension, uncertainty = caution["dimension"], caution["expanded_uncertainty"]
        facts = []
        if dimension and caution["value"] is not None:
            facts.append(("value", self.with_unit(caution["value"], dimension, uncertainty)))
        if dimension and caution["limit"] is not None:
            facts.append(("limit", self.with_unit(caution["limit"], dimension)))
        if dimension and caution["margin"] is not None:
            facts.append(
                ("margin", self.show(caution["margin"], self.difference_dimension(dimension), uncertainty).text)
            )
        return facts

    def limit(self, criterion: Mapping[str, Any]) -> str:
        """``at most 40 °C``: the limit of a criterion in display units; as written where the record has no number."""
        words = {"at_most": "at most", "at_least": "at least"}[criterion["comparison"]]
        if not isinstance(criterion["limit"], float | int):
            return f"{words} {criterion['limit_text']}"
        return f"{words} {self.with_unit(criterion['limit'], criterion['dimension'])}"

    def symbol(self, path: str) -> Markup:
        """Symbol of a value as MathML, the record's own where it gives one."""
        entry = self.record.values.get(path, {})
        return self.math(entry.get("symbol") or symbol_of(path))

    @staticmethod
    def math(latex: str) -> Markup:
        """A formula as MathML; its texts are escaped by the serialiser."""
        return Markup(mathml(latex))

    def owner(self, path: str) -> str:
        """What a path belongs to, in words: ``state 2``, ``PRV-3``, ``total``."""
        parts = path.split(".")
        name = ".".join(parts[1:-1])
        trains = self.record.data["plant"].get("trains", {})
        if parts[0] == "states":
            return f"state\N{NO-BREAK SPACE}{name}"
        if parts[0] in ("equipment", "processes", "vessels"):
            owner = f"process\N{NO-BREAK SPACE}{name}" if parts[0] == "processes" else name
            if parts[0] == "vessels" and len(parts) > 3:
                owner = f"{parts[-2]} of {'.'.join(parts[1:-2])}"
            port, species = _HEAT_PORT.fullmatch(name), _SPECIES.fullmatch(name)
            if species:
                whose = f"process\N{NO-BREAK SPACE}{species[1]}" if parts[0] == "processes" else species[1]
                return f"{species[2]}, {whose}"
            if stream := _STREAM.fullmatch(name):
                return f"stream\N{NO-BREAK SPACE}{stream[2]} of {stream[1]}"
            return f"heat port\N{NO-BREAK SPACE}{port[2]} of {port[1]}" if port else owner
        if parts[0] == "trains":
            return str(trains.get(name, {}).get("title") or name)
        return {"total": "total", "closed": "closed systems", "surroundings": "surroundings"}.get(parts[0], name)

    def meaning(self, path: str) -> str:
        """What a value is, without its owner: the glossary's words up to where they begin to explain.

        A power says which way it is positive.
        """
        known = self.record.entry(path)
        entry = name_of(path, amounts=known is not None and known.get("dimension") in _AMOUNTS)
        text = entry.text if entry else path.rsplit(".", 1)[-1].replace("_", " ").capitalize()
        direction = self.record.values.get(path, {}).get("direction")
        return " ".join(filter(None, (_QUALIFIED.split(text, maxsplit=1)[0], direction)))

    def label(self, path: str) -> str:
        """A value in words: ``Entropy generation rate, PRV-3``."""
        text, owner = self.meaning(path), self.owner(path)
        return f"{text}, {owner}" if owner else text

    def owner_title(self, owner: str) -> str:
        """An owner without a value's name (``equipment.PRV-3``, ``trains.valve``, ``total``) in words."""
        return self.owner(f"{owner}.x")

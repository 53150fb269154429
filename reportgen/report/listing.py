"""The register: one line for each calculation revision that has a record in the site."""

from __future__ import annotations

from pathlib import Path
from typing import Any
from urllib.parse import quote

from reportgen.errors import InputError
from reportgen.record import Record
from reportgen.report.presenter import NO_VALUE, Presenter, natural
from reportgen.report.sections.head import is_decisive, is_open
from reportgen.report.templates import environment, style

__all__ = ["records_in", "register_page"]


_SEVERITIES = ("stop", "warning", "note")


def records_in(site: Path) -> list[tuple[str, Record]]:
    """(address of the page from the site's root, record) of every ``<number>/<revision>/record.json``, sorted.

    Folders without a page beside the record, and files that are no record of this format, are left out.
    """
    found = []
    for path in sorted(site.glob("*/*/record.json")):
        if not path.with_name("index.html").is_file():
            continue
        try:
            record = Record.load(path)
        except InputError:
            continue
        folders = "/".join(quote(part) for part in path.relative_to(site).parts[:-1])
        found.append((f"{folders}/index.html", record))
    return sorted(found, key=lambda entry: (natural(entry[1].number), natural(entry[1].revision), entry[0]))


def register_page(site: Path) -> str:
    """HTML of the register of a site."""
    found = records_in(site)
    return (
        environment()
        .get_template("register.html.jinja")
        .render(
            rows=[_row(address, record) for address, record in found],
            owners=sorted(
                {record.data["calculation"]["owner"] for _, record in found if record.data["calculation"]["owner"]}
            ),
            style=style("Register of calculations"),
        )
    )


def _row(address: str, record: Record) -> dict[str, Any]:
    data = record.data
    calculation = data["calculation"]
    presenter = Presenter(record)
    total = "total.entropy_generation"
    spread = presenter.plus_minus(total)
    return {
        "href": address,
        **{key: calculation.get(key) or NO_VALUE for key in ("number", "title", "revision", "status", "date")},
        "client": calculation.get("client") or "",
        "generated": presenter.text(total) + (f" {spread}" if spread else ""),
        "open": _open_items(data),
        "cautions": _counted({word: _count(data["cautions"], "severity", word) for word in _SEVERITIES}),
    }


def _count(entries: list[dict[str, Any]], key: str, value: str) -> int:
    return sum(entry[key] == value for entry in entries)


def _open_items(data: dict[str, Any]) -> str:
    return _counted(
        {
            "decisive": sum(is_decisive(entry) for entry in data["assumptions"]),
            "to be verified": sum(is_open(entry) and not is_decisive(entry) for entry in data["assumptions"]),
            "not met": _count(data["criteria"], "decision", "not met"),
            "not decided": _count(data["criteria"], "decision", "not decided"),
        }
    )


def _counted(counts: dict[str, int]) -> str:
    """``1 stop, 2 warnings``; a dash when all are zero."""
    plural = {word: f"{word}s" for word in _SEVERITIES}
    found = (f"{count} {plural.get(word, word) if count > 1 else word}" for word, count in counts.items() if count)
    return ", ".join(found) or NO_VALUE

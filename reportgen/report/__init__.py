"""From a Record to pages: the report of one calculation revision, and the register of a site.

A page is rendered from the Record alone, so that any old record can be rendered again. Equal records give equal bytes.
"""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path

from reportgen.errors import Fault, InputError
from reportgen.record import Record
from reportgen.report.folders import page_path, write_together
from reportgen.report.narrative import check_narratives

__all__ = ["check_narratives", "page_path", "register", "render"]


def render(record: Record, site: Path) -> Path:
    """Write ``site/<number>/<revision>/index.html`` and the record beside it; return the page's path.

    Both files are made in memory first and put in place together: after any failure the old ones stand. Raises
    InputError when a narrative is at fault or the number or revision cannot name a folder.
    """
    from reportgen.report.page import page

    path = page_path(record, site)
    _refuse_clash(path, site)
    html = page(record)
    write_together({path.with_name("record.json"): record.to_json(), path: html.encode("utf-8")})
    return path


def register(site: Path, records: Iterable[Record] = ()) -> Path:
    """Write ``site/index.html``, the register of every record in the site; return its path.

    ``records`` that have no page in the site yet are rendered first.
    """
    from reportgen.report.listing import register_page

    for record in records:
        path = page_path(record, site)
        beside = path.with_name("record.json")
        if not (path.is_file() and beside.is_file() and beside.read_bytes() == record.to_json()):
            render(record, site)
    path = site / "index.html"
    write_together({path: register_page(site).encode("utf-8")})
    return path


def _refuse_clash(path: Path, site: Path) -> None:
    """Two folders that differ only in capitals would be one on many systems."""
    for folder, key in ((path.parent.parent, "number"), (path.parent, "revision")):
        if not folder.parent.is_dir():
            continue
        for other in folder.parent.iterdir():
            if other.name != folder.name and other.name.casefold() == folder.name.casefold():
                raise InputError(
                    Fault(
                        "The site has a folder that differs from this one in capitals only; "
                        "many systems cannot hold both.",
                        path=f"calculation.{key}",
                        found=folder.relative_to(site).as_posix(),
                        hint=f"There is {other.relative_to(site).as_posix()}.",
                    )
                )

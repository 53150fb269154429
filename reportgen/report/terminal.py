"""A record on the terminal: results, cautions, criteria; the same numbers as on the page."""

from __future__ import annotations

from reportgen.record import Record
from reportgen.report.presenter import Presenter, prose
from reportgen.report.sections.head import is_decisive, is_open

__all__ = ["print_summary"]


def print_summary(record: Record) -> None:
    """Print headline results with U, cautions by severity, criteria and open assumptions of one record."""
    from rich.console import Console
    from rich.table import Table
    from rich.text import Text

    console = Console(highlight=False, soft_wrap=True)
    presenter = Presenter(record)
    data = record.data
    calculation = data["calculation"]

    def say(text: str, style: str = "") -> None:
        console.print(Text(text), style=style)

    say(f"{calculation['number']} revision {calculation['revision']}: {calculation['title']}", "bold")
    table = Table(box=None, pad_edge=False, show_header=True, header_style="italic")
    table.add_column("Result", overflow="fold")
    table.add_column("Value", justify="right", no_wrap=True)
    table.add_column(f"U (k = {presenter.coverage})", justify="right", no_wrap=True)
    for path in data["summary"]:
        table.add_row(Text(presenter.label(path)), presenter.text(path), presenter.plus_minus(path) or "—")
    if table.row_count:
        console.print(table)
    for caution in data["cautions"]:
        text = prose(caution["text"])
        if not caution["decided"] and "not decided" not in text:
            text += " This is not decided within the uncertainty."
        facts = ", ".join(f"{name} {text}" for name, text in presenter.caution_facts(caution))
        style = {"stop": "bold", "warning": "", "note": "dim"}[caution["severity"]]
        say(f"{caution['severity'].upper()} {caution['id']} {caution['path']}: {text} {facts}".rstrip(), style)
    for audit in data["audits"].get("second_law", []):
        if audit["verdict"] != "generates entropy":
            dimension = audit.get("dimension", "entropy_flow")
            generated = presenter.show(audit["value"], dimension, audit["expanded_uncertainty"]).text
            say(f"Second law, {presenter.owner_title(audit['owner'])}: {audit['verdict']}, generates {generated}")
    for criterion in data["criteria"]:
        say(
            f"{criterion['id']} {presenter.label(criterion['path'])} {presenter.limit(criterion)}: "
            f"{presenter.text(criterion['path'])}, {criterion['decision']}"
        )
    for entry in data["assumptions"]:
        if is_open(entry) or is_decisive(entry):
            say(f"{'Decisive' if is_decisive(entry) else 'To be verified'} {entry['id']}: {entry['text']}")

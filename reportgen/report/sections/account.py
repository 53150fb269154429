"""The entropy account, the second-law audit, closure, and lost work."""

from __future__ import annotations

from collections import defaultdict
from itertools import zip_longest
from typing import Any

from markupsafe import Markup

from reportgen.report.amounts import Amounts
from reportgen.report.formulae import pieces
from reportgen.report.links import anchor
from reportgen.report.passages import residuals
from reportgen.report.presenter import NO_VALUE, Presenter, in_order
from reportgen.report.sections.working import step_anchors

__all__ = ["accounts", "closure"]


def accounts(presenter: Presenter) -> dict[str, Any] | None:
    """One double-entry account for each train and for the whole, and the audit of every generation."""
    data = presenter.record.data
    found = [_account(name, entry, presenter) for name, entry in _in_train_order(data)]
    audit = [_audit(entry, presenter) for entry in data["audits"].get("second_law", [])]
    if not found and not audit:
        return None
    return {"accounts": found, "audit": audit, "audited": _audited(data)}


#: Words at the head and foot of an account: of rates, and of the amounts of a closed system.
_HEADS = {
    "entropy_flow": ("Entering", "Leaving", "Sum, entering and generated", "Sum, leaving"),
    "entropy": (
        "In the beginning, and entering",
        "In the end, and leaving",
        "Sum, beginning, entering and generated",
        "Sum, end and leaving",
    ),
}


def _audited(data: dict[str, Any]) -> str:
    """What the rows of the audit are called."""
    families = {entry["owner"].partition(".")[0] for entry in data["audits"].get("second_law", [])}
    if "vessels" in families:
        return "Vessel" if len(families) == 1 else "Piece, process or vessel"
    if "processes" in families:
        return "Piece or process" if "equipment" in families else "Process"
    return "Piece"


def _in_train_order(data: dict[str, Any]) -> list[tuple[str, dict[str, Any]]]:
    """Accounts in the order of the trains, the whole last."""
    order = [name for name, _ in in_order(data["plant"].get("trains", {}))]
    return sorted(data["accounts"].items(), key=lambda item: order.index(item[0]) if item[0] in order else len(order))


def _account(name: str, entry: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    """Left: entering, then generated. Right: leaving. All figures to one decimal place, that of the coarsest."""
    amounts = Amounts(entry, presenter)

    def line_of(line: dict[str, Any], mark: str = "") -> tuple[str, Markup]:
        label = line["label"]
        if mark and not label.startswith(mark):
            label = f"{mark} {label}"
        return label, presenter.link(line["path"], amounts.text(line["value"]))

    left = [(line_of(line), False) for line in entry["entering"]]
    left += [(line_of(line, "generated in"), True) for line in entry["generated"]]
    rows = []
    for index, (entering, leaving) in enumerate(zip_longest(left, entry["leaving"])):
        rows.append(
            {
                "left": entering[0] if entering else None,
                "generated": bool(entering and entering[1]),
                "first_generated": index == len(entry["entering"]) and bool(entry["generated"]),
                "right": line_of(leaving) if leaving else None,
            }
        )
    complete = bool(entry["generated"]) and all(line["value"] is not None for line in entry["generated"])
    left_head, right_head, left_sum, right_sum = _HEADS[amounts.dimension]
    sums = amounts.text(amounts.entering + amounts.generated), amounts.text(amounts.leaving)
    return {
        "name": name,
        "title": entry["title"],
        "unit": presenter.display.unit_text(amounts.dimension),
        "heads": (left_head, right_head),
        "feet": (left_sum, right_sum),
        "rows": rows,
        "sum_left": sums[0],
        "sum_right": sums[1],
        "complete": complete,
        "balanced": sums[0] == sums[1],
    }


def _audit(entry: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    uncertainty, dimension = entry["expanded_uncertainty"], entry.get("dimension", "entropy_flow")
    low, high = (presenter.show(end, dimension, uncertainty).number for end in entry["interval"])
    return {
        "owner": presenter.owner_title(entry["owner"]),
        "number": presenter.link(entry["path"], presenter.with_unit(entry["value"], dimension, uncertainty)),
        "interval": f"{low} to {high}" if uncertainty else NO_VALUE,
        "verdict": entry["verdict"],
        "heaviest": [presenter.symbol_link(path) for path in entry["heaviest_inputs"]],
    }


#: Quantity that says what is left of each balance.
_BALANCES = {"mass": "mass_imbalance", "energy": "energy_imbalance", "entropy": "closure"}
#: Dimension of what is left, by its unit.
_DIMENSIONS = {
    "kg/s": "mass_flow",
    "W": "power",
    "W/K": "entropy_flow",
    "kg": "mass",
    "J": "energy",
    "J/K": "entropy",
}


def closure(presenter: Presenter) -> dict[str, Any] | None:
    """What each balance leaves, its equation in symbols, and its size; one group an owner."""
    data = presenter.record.data
    rest = {path: key for key in residuals(data) for path in data["relations"][key]["solves"]}
    groups: dict[str, list[dict[str, Any]]] = defaultdict(list)
    for entry in data["audits"].get("closure", []):
        dimension, name = _DIMENSIONS[entry["unit"]], _BALANCES[entry["quantity"]]
        path = f"{entry['owner']}.{name}"
        groups[entry["owner"]].append(
            {
                "quantity": entry["quantity"],
                **_residual(path, rest.pop(path, None), presenter),
                "step": _entropy_step(entry, presenter),
                "value": presenter.residual(entry["value"], entry["scale"], dimension),
                "scale": presenter.rough(entry["scale"], dimension, 4),
                "relative": presenter.rough(entry["relative"], "ratio", 2),
            }
        )
    for path, key in rest.items():  # balances that the record closes without an audit
        owner = data["relations"][key]["owner"]
        number = {"value": presenter.text(path), "scale": NO_VALUE, "relative": NO_VALUE, "step": None}
        groups[owner].append({"quantity": presenter.meaning(path), **_residual(path, key, presenter), **number})
    rows = [(presenter.owner_title(owner), entries) for owner, entries in groups.items()]
    return {"groups": rows} if rows else None


def _residual(path: str, key: str | None, presenter: Presenter) -> dict[str, Any]:
    """Anchor and equation of what is left of a balance; both empty where the record has no relation for it."""
    if key is None:
        return {"anchor": None, "equation": []}
    relation = presenter.record.data["relations"][key]
    symbol = presenter.record.values.get(path, {}).get("symbol")
    line = next((line for line in relation["latex_lines"] if line[0] == symbol), None)
    known = path in presenter.record.values and path not in presenter.record.inputs
    return {
        "anchor": anchor("value", path) if known else None,
        "equation": [Markup(piece) for piece in pieces(line[1])] if line and len(line) > 1 else [],
    }


def _entropy_step(entry: dict[str, Any], presenter: Presenter) -> tuple[int, str] | None:
    """The step whose entropy balance the closure of a piece puts to the test."""
    path = f"{entry['owner']}.entropy_generation"
    value = presenter.record.values.get(path)
    return step_anchors(presenter).get(value["relation"]) if value and entry["quantity"] == "entropy" else None

"""What the calculation rests on: purpose, boundary, inputs, assumptions, method and property models."""

from __future__ import annotations

from collections import defaultdict
from typing import Any

from markupsafe import Markup

from reportgen.report.formulae import pieces
from reportgen.report.links import anchor
from reportgen.report.narrative import render_narrative
from reportgen.report.presenter import NO_VALUE, Presenter, in_order, natural, prose
from reportgen.report.sections.working import step_anchors

__all__ = ["MODELS", "assumptions", "boundary", "inputs", "method", "purpose"]

#: Property models in words.
MODELS = {
    "ideal-gas": "ideal gas",
    "reacting-gas": "ideal gas at chemical equilibrium",
    "real-fluid": "real fluid, multiparameter Helmholtz-energy equation",
    "cubic": "cubic equation of state",
    "incompressible": "incompressible",
}
_LIMITS = (
    ("minimum_temperature", "from", "temperature"),
    ("maximum_temperature", "to", "temperature"),
    ("maximum_pressure", "up to", "pressure"),
)
#: Status of an input that the program took because the file states nothing.
_TAKEN = "by default"
_BY_PROGRAM = "taken by the program"
#: Steps named in the table of inputs; the temperature of the surroundings is used almost everywhere.
_STEPS_SHOWN = 6


def purpose(presenter: Presenter) -> dict[str, Any] | None:
    """The author's purpose."""
    text = render_narrative("purpose", presenter)
    return None if text is None else {"text": text}


def boundary(presenter: Presenter) -> dict[str, Any] | None:
    """Pieces with what enters and leaves each, then processes with their states, train by train, then vessels."""
    plant = presenter.record.data["plant"]
    pieces, processes, vessels = (
        _by_train(plant, family, crossing, presenter)
        for family, crossing in (
            ("equipment", ("heat", "power")),
            ("processes", ("heat", "work")),
            ("vessels", ("heat", "mass_transferred")),
        )
    )
    if not pieces and not processes and not vessels:
        return None
    surroundings = [presenter.number(plant["surroundings"][key]) for key in ("temperature", "pressure")]
    return {
        "trains": pieces,
        "courses": processes,
        "vessels": [piece for train in vessels for piece in train["pieces"]],
        "named": bool(plant["trains"]),
        "surroundings": surroundings,
    }


def _by_train(
    plant: dict[str, Any], family: str, crossing: tuple[str, ...], presenter: Presenter
) -> list[dict[str, Any]]:
    groups: dict[str | None, list[dict[str, Any]]] = defaultdict(list)
    for tag, piece in in_order(plant.get(family, {})):
        groups[piece.get("train")].append(_piece(family, tag, piece, crossing, presenter))
    trains = plant["trains"]
    order = [name for name, _ in in_order(trains)]
    listed = []
    for train in sorted(groups, key=lambda name: order.index(name) if name in order else len(order)):
        entry = trains.get(train, {}) if train else {}
        other = entry.get("alternative_to")
        listed.append(
            {
                "title": entry.get("title") or train,
                "alternative_to": (trains.get(other, {}).get("title") or other) if other else None,
                "pieces": groups[train],
            }
        )
    return listed


def _piece(
    family: str, tag: str, piece: dict[str, Any], quantities: tuple[str, ...], presenter: Presenter
) -> dict[str, Any]:
    crossing = []
    for name in quantities:
        path = f"{family}.{tag}.{name}"
        value = presenter.record.value(path)
        if isinstance(value, float) and value != 0.0:
            direction = presenter.record.values[path].get("direction")
            crossing.append((" ".join(filter(None, (name.replace("_", " "), direction))), presenter.number(path)))
    ports = {"in": [], "out": []}  # type: dict[str, list[dict[str, str]]]
    for port in piece["ports"]:
        ports[port["direction"]].append(
            {"name": port["name"].replace("_", " "), "state": port["state"], "anchor": anchor("state", port["state"])}
        )
    return {
        "tag": tag,
        "anchor": anchor(family, tag),
        "title": piece.get("title"),
        "kind": piece.get("kind_title") or piece["kind"],
        "entering": ports["in"],
        "leaving": ports["out"],
        "crossing": crossing,
    }


def inputs(presenter: Presenter) -> dict[str, Any] | None:
    """Every input as written, in display units, with uncertainty, origin and place in the file; then the defaults."""
    record = presenter.record
    used: dict[str, list[str]] = defaultdict(list)
    for key in step_anchors(presenter):
        for path in record.data["relations"][key]["uses"]:
            used[path].append(key)
    files = {entry["file"] for entry in record.inputs.values()}
    stated: list[dict[str, Any]] = []
    taken: list[dict[str, Any]] = []
    for path, entry in sorted(record.inputs.items(), key=_place_in_file):
        others = [other for other in entry["applies_to"] if other != path]
        steps = list(dict.fromkeys(key for target in {path: None, **dict.fromkeys(others)} for key in used[target]))
        group = taken if entry["status"] == _TAKEN else stated
        group.append(
            {
                "anchor": anchor("value", path),
                "label": presenter.label(path),
                "symbol": presenter.symbol(path),
                "path": path,
                "text": entry["text"],
                "value": presenter.with_unit(entry["value"], entry["dimension"], entry["expanded_uncertainty"]),
                "uncertainty": presenter.plus_minus_of(
                    entry["value"], entry["dimension"], entry["expanded_uncertainty"]
                ),
                "distribution": _distribution(entry),
                "source": entry["source"],
                "supplied_by": _supplier(entry["supplied_by"]) if group is stated else None,
                "status": entry["status"] if group is stated else None,
                "others": [presenter.label(other) for other in others],
                "place": f"line {entry['line']}" if len(files) == 1 else f"{entry['file']}:{entry['line']}",
                "steps": steps[:_STEPS_SHOWN],
                "more_steps": len(steps[_STEPS_SHOWN:]),
            }
        )
    if not stated and not taken:
        return None
    return {
        "stated": stated,
        "taken": taken,
        "file": next(iter(files)) if len(files) == 1 else None,
        "uncertain": any(row["uncertainty"] for row in stated + taken),
    }


def _place_in_file(item: tuple[str, dict[str, Any]]) -> tuple[str, int, list[tuple[int, int, str]]]:
    path, entry = item
    return entry["file"], entry["line"], natural(path)


def _supplier(name: str | None) -> str | None:
    """Who gave an input, in words: a person or body, or the program itself."""
    return f"from {name}" if name and name != _BY_PROGRAM else name or None


def _distribution(entry: dict[str, Any]) -> str:
    """How the uncertainty was stated, when it is not the usual (normal, k of the calculation, type B)."""
    if entry["standard_uncertainty"] is None:
        return ""
    words = [] if entry["distribution"] == "normal" else [entry["distribution"]]
    if entry["evaluation"] == "A":
        words.append("type A")
    if entry["degrees_of_freedom"] is not None:
        words.append(f"ν = {entry['degrees_of_freedom']:g}")
    return ", ".join(words)


def assumptions(presenter: Presenter) -> dict[str, Any] | None:
    """Assumptions in the order of the record, open ones first, with what a test of each found."""
    rows = []
    for entry in presenter.record.data["assumptions"]:
        rows.append(
            {
                **entry,
                "text": entry["text"] if entry["origin"] == "author" else prose(entry["text"]),
                "anchor": anchor("assumption", entry["id"]),
                "open": entry["status"] == "to be verified",
                "test": _test(entry["test"], presenter) if entry["test"] else None,
            }
        )
    rules = list(dict.fromkeys(prose(row["test"]["text"]) for row in rows if row["test"] and row["test"]["text"]))
    return {"rows": rows, "rules": rules} if rows else None


def _test(test: dict[str, Any], presenter: Presenter) -> dict[str, Any]:
    dimension = test["dimension"]
    facts = []
    if test["model_value"] is not None and test["other_value"] is not None:
        uncertainty = presenter.record.expanded_uncertainty(test["path"])
        facts = [
            (
                "as assumed",
                presenter.link(test["path"], presenter.with_unit(test["model_value"], dimension, uncertainty)),
            ),
            ("otherwise", presenter.with_unit(test["other_value"], dimension, uncertainty)),
        ]
        apart = presenter.difference_dimension(dimension)
        if test["difference"] is not None:
            facts.append(("difference", presenter.rough(test["difference"], apart, 2)))
        if uncertainty:
            facts.append(("U", presenter.rough(uncertainty, apart, 2)))
    label = presenter.label(test["path"]) if test["path"] else ""
    return {**test, "finding": prose(test["finding"]), "facts": facts, "label": label}


def method(presenter: Presenter) -> dict[str, Any]:
    """The author's method and the property models with sources and limits."""
    fluids = []
    listed: dict[str, str] = {}
    for name, entry in in_order(presenter.record.data["plant"]["fluids"]):
        fluids.append(
            {
                "anchor": anchor("fluid", name),
                "name": name,
                "title": entry["title"],
                "model": MODELS.get(entry["model"], entry["model"]),
                "composition": _composition(entry["composition"]),
                "details": [_detail(detail, presenter) for detail in entry.get("details", [])],
                "entropy_zero": prose(entry["entropy_zero"]),
                "zero_name": _zero_name(entry.get("entropy_zero_name")),
                "limits": _limits(entry.get("limits", {}), presenter),
                "remarks": [prose(remark) for remark in entry.get("limits", {}).get("remarks", [])],
                "sources": _told_once(entry, listed),
            }
        )
    return {
        "text": render_narrative("method", presenter),
        "fluids": fluids,
        "uncertainty_method": presenter.record.data["calculation"]["method"],
        "uncertain": any(entry["standard_uncertainty"] for entry in presenter.record.inputs.values()),
        "balances": _balances(presenter.record.data["plant"]),
    }


def _limits(limits: dict[str, Any], presenter: Presenter) -> str:
    """The range of a model: "from −20 °C to 300 °C, up to 100 bar"."""
    words = {
        key: f"{word} {presenter.with_unit(limits[key], dimension)}"
        for key, word, dimension in _LIMITS
        if isinstance(limits.get(key), float | int)
    }
    range_of_temperature = " ".join(words[key] for key in words if key != "maximum_pressure")
    return ", ".join(filter(None, (range_of_temperature, words.get("maximum_pressure")))) or NO_VALUE


def _zero_name(key: str | None) -> str | None:
    """The name of a zero that several fluids may share; None where the key only tells one fluid from another."""
    return None if key is None or ":" in key else key


def _told_once(entry: dict[str, Any], listed: dict[str, str]) -> list[str]:
    """Sources of a fluid; of those that an earlier fluid lists, only its title."""
    told = [source for source in entry["sources"] if source not in listed]
    elsewhere = list(dict.fromkeys(listed[source] for source in entry["sources"] if source in listed))
    listed |= dict.fromkeys(told, entry["title"])
    return [*told, *([f"{'others ' if told else ''}as for {', '.join(elsewhere)}"] if elsewhere else [])]


#: What is solved, by family: what is said before the equation, its left and its right side.
_BALANCES = {
    "equipment": (
        "Steady flow. Mass and energy are conserved in every piece; the entropy generated in it is what leaves less "
        "what enters, and is never assumed to be zero:",
        r"\dot S_\mathrm{gen}",
        r"\sum_\mathrm{out} \dot m s - \sum_\mathrm{in} \dot m s - \sum_{j} \frac{\dot Q_{j}}{T_{j}} \geq 0",
    ),
    "processes": (
        "Closed systems. Mass is kept, heat is positive into the system and work positive out of it, ΔU = Q − W; the "
        "entropy generated is what the entropy changes by less what came with heat, and is never assumed to be zero:",
        r"S_\mathrm{gen}",
        r"\sum_\mathrm{end} m s - \sum_\mathrm{beginning} m s - \sum_{j} \frac{Q_{j}}{T_{j}} \geq 0",
    ),
    "vessels": (
        "Vessels. The content of a rigid volume is followed while mass enters or leaves, all columns of the uncertain "
        "inputs together, by a method of order 5 that ends its steps on the saturation line; the entropy generated in "
        "content, valve and wall is integrated along the path and held against the balance of the whole:",
        r"S_\mathrm{gen}",
        r"S_2 - S_1 - \int \frac{\mathrm{d}Q}{T_\mathrm{w}} \mp \int s\,\mathrm{d}m \geq 0",
    ),
}


def _balances(plant: dict[str, Any]) -> list[tuple[str, Markup]]:
    """Each kind of balance that the calculation uses: steady flow where it has neither equipment nor processes."""
    used = [family for family in _BALANCES if plant.get(family)] or ["equipment"]
    found = []
    for family in used:
        words, left, right = _BALANCES[family]
        sides = [*pieces(left), *pieces(right, "=")]
        found.append((words, Markup(" ").join(Markup(part) for part in sides)))
    return found


def _detail(detail: dict[str, Any], presenter: Presenter) -> str:
    """What the author settles of a model: "density 870 kg/m³"."""
    if detail["dimension"] is None:
        return f"{detail['label']}: {prose(detail['text'])}"
    return f"{detail['label']} {presenter.with_unit(detail['value'], detail['dimension'])}"


def _composition(composition: dict[str, float] | None) -> str:
    if not composition or len(composition) < 2:
        return ""
    return ", ".join(f"{name} {100 * part:.5g} %" for name, part in composition.items())

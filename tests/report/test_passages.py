"""The order in which the working is told: every relation once, nothing before what it rests on."""

from __future__ import annotations

import copy
from pathlib import Path
from typing import Any

import pytest

from reportgen import evaluation, spec
from reportgen.record import Record
from reportgen.report.links import anchor
from reportgen.report.page import page
from reportgen.report.passages import arrange, is_residual, residuals
from tests.report.invented import invented_data

PROJECTS = Path(__file__).parents[2] / "projects"


@pytest.fixture(scope="module", params=["letdown-station", "instrument-air", "nitrogen-blanketing"])
def record(request: pytest.FixtureRequest) -> Record:
    folder = PROJECTS / request.param
    return evaluation.evaluate(spec.read(folder))


@pytest.fixture(scope="module")
def html(record: Record) -> str:
    return page(record)


def steps(data: dict[str, Any]) -> list[str]:
    return [key for part in arrange(data) for passage in part.passages for key in passage.keys]


def passage_of(data: dict[str, Any], key: str) -> Any:
    return next(passage for part in arrange(data) for passage in part.passages if key in passage.keys)


def relation(solves: str, uses: list[str], sentence: str, basis: str = "a law", symbols: str = "x") -> dict[str, Any]:
    owner = solves.rpartition(".")[0]
    return {
        "owner": owner,
        "name": "",
        "sentence": sentence,
        "basis": basis,
        "solves": [solves],
        "uses": uses,
        "latex_lines": [["y", symbols, "", "1"]],
    }


def data_of(*relations: dict[str, Any]) -> dict[str, Any]:
    data = copy.deepcopy(invented_data())
    data["relations"] = {entry["solves"][0]: entry for entry in relations}
    data["solution_order"] = list(data["relations"])
    return data


def test_every_relation_is_a_step_or_closes_a_balance_and_none_is_both(record: Record) -> None:
    data = record.data
    assert sorted([*steps(data), *residuals(data)]) == sorted(data["relations"])


def test_nothing_is_told_before_what_it_rests_on(record: Record) -> None:
    data = record.data
    told = steps(data)
    solved = {path: key for key in told for path in data["relations"][key]["solves"]}
    for index, key in enumerate(told):
        sources = {solved[path] for path in data["relations"][key]["uses"] if path in solved}
        assert sources <= set(told[: index + 1]), key


def test_every_value_with_a_relation_keeps_its_anchor(record: Record, html: str) -> None:
    for path, entry in record.values.items():
        if entry["relation"] and entry["value"] is not None:
            assert html.count(f'id="{anchor("value", path)}"') == 1, path


def test_parts_follow_the_thought(record: Record) -> None:
    titles = [part.title for part in arrange(record.data)]
    everything = [
        "States and balances",
        "Entropy and lost work, piece by piece",
        "Exergy and figures of merit",
        "Trains",
        "The whole",
    ]
    plant = record.data["plant"]
    if not plant["equipment"]:  # contents of closed systems have no flow exergy
        everything[1:3] = ["Entropy and lost work, process by process"]
    assert titles == [title for title in everything if title != "Trains" or plant["trains"]]


def test_the_working_has_far_fewer_passages_than_relations(record: Record) -> None:
    passages = [passage for part in arrange(record.data) for passage in part.passages]
    # A chain of processes of different kinds has fewer relations alike than machines in a row.
    assert len(passages) <= (0.5 if record.data["plant"]["equipment"] else 0.55) * len(record.data["relations"])


def test_exergies_of_a_fluid_stand_with_its_dead_state(record: Record) -> None:
    for fluid in record.data["plant"]["fluids"] if record.data["plant"]["equipment"] else ():
        passage = passage_of(record.data, f"surroundings.{fluid}.properties")
        states = [name for name, state in record.data["plant"]["states"].items() if state["fluid"] == fluid]
        assert sorted(passage.keys[1:]) == sorted(f"states.{name}.specific_exergy" for name in states)


def test_a_quantity_that_a_balance_needs_is_told_with_the_balances() -> None:
    data = data_of(
        relation("equipment.A.isentropic_outlet_enthalpy", [], "A: ideal."),
        relation("equipment.A.lost_work", [], "A: forgone."),
        relation("states.2.specific_enthalpy", ["equipment.A.isentropic_outlet_enthalpy"], "A: enthalpy."),
    )
    first, second = arrange(data)
    assert first.title == "States and balances"
    assert [key for passage in first.passages for key in passage.keys] == [
        "equipment.A.isentropic_outlet_enthalpy",
        "states.2.specific_enthalpy",
    ]
    assert second.title == "Entropy and lost work, piece by piece"


def test_relations_of_one_sort_are_drawn_together_only_where_all_they_use_is_known() -> None:
    kept = "states.{}.mass_flow"
    balances = [
        relation(kept.format(2), [kept.format(1)], "A: what enters as stream 1 leaves as stream 2."),
        relation("equipment.B.power", [kept.format(2)], "B: the energy balance gives the power absorbed."),
        relation(kept.format(3), [kept.format(2)], "B: what enters as stream 2 leaves as stream 3."),
    ]
    together = arrange(data_of(*balances))[0].passages
    assert [passage.keys for passage in together] == [[kept.format(2), kept.format(3)], ["equipment.B.power"]]
    assert together[0].run
    balances[1] = relation(kept.format(2 + 9), ["equipment.B.power"], "B: the energy balance gives the flow.")
    balances[2] = relation(kept.format(3), [kept.format(11)], "B: what enters as stream 11 leaves as stream 3.")
    apart = arrange(data_of(*balances))[0].passages
    assert [passage.keys for passage in apart] == [[kept.format(2)], [kept.format(11)], [kept.format(3)]]


def test_assumed_heats_stand_in_one_passage() -> None:
    data = data_of(
        *(
            relation(f"equipment.{tag}.heat", [f"assumptions.{tag}"], f"Piece {tag} is taken as adiabatic.", tag)
            for tag in "ABC"
        )
    )
    (passage,) = arrange(data)[0].passages
    assert (passage.sentence, passage.run) == ("A, B and C are taken as adiabatic.", True)


def test_equal_sentences_on_several_pieces_are_said_once() -> None:
    data = data_of(
        *(relation(f"equipment.{tag}.pressure_ratio", [], f"Pump {tag}: higher over lower.") for tag in "AB"),
        relation("equipment.C.pressure_ratio", [], "Pump C: higher over lower.", basis="another law"),
    )
    first, second = arrange(data)[0].passages
    assert first.sentence == "Higher over lower."
    assert second.sentence == "Pump C: higher over lower."


def test_states_fixed_by_the_same_pair_are_named_in_one_sentence() -> None:
    data = data_of(
        *(
            relation(f"states.{name}.density", [], f"State {name} is fixed by its pressure and temperature; so there.")
            for name in "123"
        )
    )
    (passage,) = arrange(data)[0].passages
    assert passage.sentence == "States 1, 2 and 3 are fixed by their pressure and temperature; so there."


def whole(*tags: str, sign: str = "") -> dict[str, Any]:
    symbols = " + ".join(f"{sign}S_{tag}" for tag in tags)
    return data_of(
        relation("total.heat", [f"equipment.{tag}.heat" for tag in tags], "Whole: sum.", symbols=symbols),
        relation("total.lost_work", ["surroundings.temperature", "total.heat"], "Whole: work forgone."),
    )


def test_a_whole_of_one_piece_is_set_as_one_line() -> None:
    (passage,) = arrange(whole("PRV-3"))[0].passages
    assert passage.sentence == "Whole consists of PRV-3 alone; its values are those of PRV-3."
    assert passage.run


@pytest.mark.parametrize("data", [whole("PRV-3", "TG-2"), whole("PRV-3", sign="-")])
def test_a_whole_of_several_pieces_or_of_the_reverse_of_one_is_not(data: dict[str, Any]) -> None:
    (passage,) = arrange(data)[0].passages
    assert passage.sentence == "Whole: sum; work forgone."
    assert not passage.run


def test_residuals_are_rows_of_the_closure_and_no_steps(record: Record, html: str) -> None:
    closure = html[html.index('<section id="closure"') :]
    closure = closure[: closure.index("</section>")]
    for key in residuals(record.data):
        (path,) = record.data["relations"][key]["solves"]
        assert is_residual(record.data["relations"][key])
        row = closure[closure.index(f'id="{anchor("value", path)}"') :]
        assert "<math>" in row[: row.index("</tr>")]


def test_a_residual_without_an_audit_still_stands_in_the_closure(record: Record) -> None:
    data = copy.deepcopy(record.data)
    data["audits"]["closure"] = []
    text = page(Record(data))
    for key in residuals(data):
        (path,) = data["relations"][key]["solves"]
        assert f'id="{anchor("value", path)}"' in text

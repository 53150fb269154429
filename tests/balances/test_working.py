"""The working as it is shown: every equation, read back and computed, gives the value it claims to give."""

from __future__ import annotations

import math
import re
import subprocess
import sys
from typing import Any

import pytest

from reportgen.balances import kinds, solve
from tests.balances.cases import CASES, SURROUNDINGS, long
from tests.balances.test_directions import DIRECTIONS
from tests.balances.test_networks import RECUPERATED, _recuperated
from tests.balances.test_structure import CYCLE, _cycle

TOKEN = re.compile("⟦([^⟦⟧]+)⟧")
#: Equations that call a property model, take a limit of several values, show an integral or a sum over species.
NOT_ARITHMETIC = re.compile(r"(?:[hsTpxy}]|\\rho)\\left\(⟦|\\min|\\max|\\int|\\sum|\^[+-]")


def _group(text: str, start: int) -> tuple[str, int]:
    """The text of a {…} group that starts at an index, and the index after it."""
    depth = 0
    for index in range(start, len(text)):
        depth += {"{": 1, "}": -1}.get(text[index], 0)
        if depth == 0:
            return text[start + 1 : index], index + 1
    raise ValueError(text)


def _plain(latex: str) -> str:
    """Python arithmetic from the LaTeX the balances write."""
    while (place := latex.find(r"\frac{")) >= 0:
        top, after = _group(latex, place + 5)
        bottom, end = _group(latex, after)
        latex = f"{latex[:place]}\\left(({_plain(top)})/({_plain(bottom)})\\right){latex[end:]}"
    while (place := latex.find(r"\sqrt{")) >= 0:
        inner, end = _group(latex, place + 5)
        latex = f"{latex[:place]}\\left(({_plain(inner)})**0.5\\right){latex[end:]}"
    latex = latex.replace(r"\tfrac{1}{2}", "0.5").replace(r"\tfrac{\pi}{4}", "0.7853981633974483")
    latex = latex.replace(r"\left|", "abs(").replace(r"\right|", ")")
    latex = latex.replace(r"\left(", "(").replace(r"\right)", ")").replace(r"\ln", " log ")
    latex = re.sub(r"\^\{(\d)\}", r"**\1", latex).replace(r"\,", " ")
    latex = re.sub(r"log\s+\(", "log(", latex)
    # A product is set without a sign: put one wherever an operand follows an operand.
    operand = r"(⟧|\)|\bR\b|\bM\b|\bg\b|\d)\s*(?=⟦|\(|\bR\b|\bM\b|\bg\b|log)"
    return re.sub(operand, r"\1*", latex)


def computed(latex: str, values: dict[str, Any], constants: dict[str, float]) -> float:
    """The number a template comes to."""
    text = TOKEN.sub(lambda match: f"v['{match.group(1)}']", re.sub(r"⟧\s*⟦", "⟧*⟦", _plain(latex)))
    return float(eval(text, {"v": values, "log": math.log, "abs": abs, **constants}))


def _check(solution: Any, constants: dict[str, float]) -> int:
    values = {path: array[0] for path, array in solution.values.items()}
    checked = 0
    for step in solution.steps:
        for equation in step.equations:
            for path in TOKEN.findall(equation.latex):
                assert path in values, (step.key, path)
            if NOT_ARITHMETIC.search(equation.right):
                continue
            left, right = (computed(side, values, constants) for side in (equation.left, equation.right))
            assert right == pytest.approx(left, rel=1e-9, abs=1e-6), (step.key, equation.latex)
            if equation.evaluate is not None:
                assert equation.evaluate(values) == pytest.approx(left, rel=1e-9, abs=1e-6), (step.key, equation.latex)
            checked += 1
    return checked


@pytest.mark.parametrize("kind", sorted(CASES))
def test_every_equation_shown_gives_the_value_shown(kind: str) -> None:
    case = CASES[kind]
    gas = next(iter(case.plant.fluids.values()))
    constants = {"R": gas.gas_constant, "M": gas.molar_mass, "g": 9.80665}
    assert _check(case.solve(), constants) > 10


@pytest.mark.parametrize(("kind", "unknown", "known"), DIRECTIONS, ids=[" ".join(entry) for entry in DIRECTIONS])
def test_equations_turned_round_give_the_value_shown(kind: str, unknown: str, known: str) -> None:
    case = CASES[kind]
    gas = next(iter(case.plant.fluids.values()))
    forward = case.solve()
    give = {long(path): float(forward.values[long(path)][0]) for path in known.split()}
    back = case.solve(tuple(long(path) for path in unknown.split()), give)
    assert _check(back, {"R": gas.gas_constant, "M": gas.molar_mass, "g": 9.80665}) > 10


def test_equations_solved_together_hold_as_shown() -> None:
    solution = solve(_recuperated(CASES["compressor"].plant.fluids["gas"]), {**RECUPERATED, "equipment.B.heat": 7e5})
    (block,) = (step for step in solution.steps if step.key.startswith("simultaneous"))
    assert len(block.equations) == len(block.solves)
    assert _check(solution, {"R": 287.0}) > 30


def test_velocities_and_flows_by_volume_and_amount_are_shown_right() -> None:
    case = CASES["throttling-valve"]
    gas = case.plant.fluids["gas"]
    constants = {"R": gas.gas_constant, "M": gas.molar_mass, "g": 9.80665}
    energies = {"states.1.velocity": 20.0, "states.2.velocity": 90.0}
    energies |= {"states.1.elevation": 0.0, "states.2.elevation": 12.0}
    _check(case.solve((), energies), constants)
    _check(case.solve(("states.1.mass_flow",), {"states.1.volume_flow": 2.0}), constants)
    _check(case.solve(("states.1.mass_flow",), {"states.1.molar_flow": 50.0}), constants)


def test_a_wrong_equation_would_be_noticed() -> None:
    values = {"a": 2.0, "b": 3.0, "c": 5.0}
    assert computed(r"⟦a⟧\left(⟦b⟧ - ⟦c⟧\right)", values, {}) == -4.0
    assert computed(r"\frac{-⟦a⟧ + ⟦b⟧\,⟦c⟧}{⟦b⟧ - ⟦c⟧}", values, {}) == -6.5
    assert computed(r"⟦a⟧ + \left(\frac{1}{⟦b⟧} - 1\right)R\ln\frac{⟦c⟧}{⟦b⟧}", values, {"R": 3.0}) == pytest.approx(
        2.0 - 2.0 * math.log(5.0 / 3.0)
    )
    assert computed(r"\tfrac{1}{2}\,\left(⟦b⟧\right)^{2}", values, {}) == 4.5


def test_an_assumption_is_stated_before_what_follows_from_it() -> None:
    steps = [step.key for step in CASES["throttling-valve"].solve().steps]
    assert steps.index("equipment.X.heat.assumed") < steps.index("equipment.X.energy_balance")


def test_a_closed_loop_says_which_balance_checks_the_others() -> None:
    solution = solve(_cycle(CASES["compressor"].plant.fluids["gas"]), {**SURROUNDINGS, **LOOP})
    sentences = [step.sentence for step in solution.steps if step.name == "Check of mass"]
    assert sum("follows from the others" in sentence for sentence in sentences) == 1


LOOP = {path: value for path, value in CYCLE.items() if "quality" not in path} | {
    "states.1.mass_flow": 0.1,
    "states.3.temperature": 300.0,
}


def test_the_declarations_need_no_numerical_library() -> None:
    code = "import sys, reportgen.balances as b; b.kinds(); sys.exit('numpy' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0


def test_every_kind_is_described() -> None:
    for name, kind in kinds().items():
        assert name == kind.name
        assert kind.title
        assert kind.text.endswith(".")
        assert kind.exergetic_efficiency
        assert all(port.text for port in kind.ports)
        assert all(parameter.text for parameter in kind.parameters)

"""Docstrings of the property models and of the reading and showing of quantities: complete and with units.

A number without its unit is the oldest mistake of the trade, so whoever adds a function that takes or gives numbers is
asked for it here.
"""

from __future__ import annotations

import ast
import re
from collections.abc import Iterator
from pathlib import Path

import pytest

import reportgen

PACKAGE = Path(reportgen.__file__).parent
PARTS = ("fluids", "quantities")

#: What annotations of numbers in physical units are made of.
NUMBERS = re.compile(r"FloatArray|\bArray\b|ArrayLike|\bfloat\b")
#: A unit in brackets: [Pa], [1], [J/(kg*K)]; [SI] where the argument can be any property.
UNIT = re.compile(r"\[[^\]\n]+\]")

#: Functions whose numbers have no unit to state, with the reason.
WITHOUT_UNIT = {
    "Solution.values": "a table of named fields, whose units the fields state",
    "Solution.masked": "a table of named fields, whose units the fields state",
    "Solution.spread": "a table of named fields, whose units the fields state",
}


def _modules() -> list[Path]:
    return sorted(path for part in PARTS for path in (PACKAGE / part).rglob("*.py") if "data" not in path.parts)


def _public(node: ast.AST, owner: str = "") -> Iterator[tuple[str, ast.ClassDef | ast.FunctionDef]]:
    """Public classes, functions and methods, by their name within the module."""
    for inner in ast.iter_child_nodes(node):
        if isinstance(inner, ast.ClassDef | ast.FunctionDef) and (
            inner.name == "__call__" or not inner.name.startswith("_")
        ):
            yield owner + inner.name, inner
            if isinstance(inner, ast.ClassDef):
                yield from _public(inner, f"{inner.name}.")


def _takes_or_gives_numbers(function: ast.FunctionDef) -> bool:
    given = [argument.annotation for argument in (*function.args.args, *function.args.kwonlyargs)]
    return any(part is not None and NUMBERS.search(ast.unparse(part)) for part in (*given, function.returns))


DEFINITIONS = [
    pytest.param(name, node, id=f"{path.relative_to(PACKAGE).as_posix()}:{name}")
    for path in _modules()
    for name, node in _public(ast.parse(path.read_text("utf-8")))
]


@pytest.mark.parametrize(("name", "node"), DEFINITIONS)
def test_public_names_are_described_with_units(name: str, node: ast.ClassDef | ast.FunctionDef) -> None:
    text = ast.get_docstring(node)
    assert text, "no docstring"
    assert text.split("\n", 1)[0].strip(), "no first line"
    if isinstance(node, ast.FunctionDef) and _takes_or_gives_numbers(node):
        assert UNIT.search(text) or name in WITHOUT_UNIT, "numbers without a unit in brackets"


@pytest.mark.parametrize(("name", "node"), DEFINITIONS)
def test_documented_parameters_are_those_of_the_signature(name: str, node: ast.ClassDef | ast.FunctionDef) -> None:
    """A section ``Parameters`` names every parameter and no other."""
    _, heading, section = (ast.get_docstring(node) or "").partition("Parameters\n----------\n")
    if not heading:
        return
    section = re.split(r"\n\n?[A-Z]\w+\n-{3,}\n", section)[0]
    documented = {
        word.strip()
        for line in section.splitlines()
        if (entry := re.match(r"([a-z_]\w*(?:, [a-z_]\w*)*) :", line))
        for word in entry[1].split(",")
    }
    function = node
    if isinstance(node, ast.ClassDef):
        makers = [inner for inner in node.body if isinstance(inner, ast.FunctionDef) and inner.name == "__init__"]
        assert makers, "a class that documents parameters takes some"
        function = makers[0]
    assert isinstance(function, ast.FunctionDef)
    arguments = function.args
    taken = {part.arg for part in (*arguments.args, *arguments.kwonlyargs)} - {"self", "cls"}
    if arguments.kwarg:
        taken.add(arguments.kwarg.arg)
    mentioned = {word for word in taken - documented if f"``{word}``" in section}
    assert taken - documented - mentioned == set()
    assert documented - taken == set()


def test_the_check_finds_what_it_looks_for() -> None:
    """Written to fail: numbers without unit, and an undocumented parameter."""
    tree = ast.parse('def density(pressure: float) -> float:\n    """Density."""\n')
    ((name, node),) = _public(tree)
    with pytest.raises(AssertionError, match="without a unit"):
        test_public_names_are_described_with_units(name, node)
    tree = ast.parse('def f(a: int, b: int):\n    """F.\n\n    Parameters\n    ----------\n    a : one.\n    """\n')
    ((name, node),) = _public(tree)
    with pytest.raises(AssertionError):
        test_documented_parameters_are_those_of_the_signature(name, node)

"""The one-way flow: which part of the package may import which, read from the source, not from a picture."""

from __future__ import annotations

import ast
from pathlib import Path

import pytest

import reportgen

PACKAGE = Path(reportgen.__file__).parent

#: For each part, the other parts of the package it may import. Everything else is a step backwards.
ALLOWED = {
    "errors": set(),
    "names": set(),
    "quantities": {"errors", "names"},
    "record": {"errors", "names"},
    "fluids": {"errors", "names"},
    "balances": {"errors", "names", "fluids"},
    "spec": {"errors", "names", "quantities", "balances"},
    "evaluation": {"errors", "names", "quantities", "record", "fluids", "balances", "spec"},
    "report": {"errors", "names", "quantities", "record"},
    "archive": {"errors", "names", "quantities", "record"},
    "__main__": {"cli"},
    "cli": {"errors", "record", "spec", "evaluation", "report", "fluids", "archive"},
}


def _modules() -> list[Path]:
    return sorted(path for path in PACKAGE.rglob("*.py") if "data" not in path.relative_to(PACKAGE).parts)


def _part(path: Path) -> str:
    relative = path.relative_to(PACKAGE)
    return relative.parts[0].removesuffix(".py")


def _imported(path: Path) -> set[tuple[str, str]]:
    """(top-level package, part of reportgen or "") of every import in a module, at any depth of nesting."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text("utf-8"))):
        if isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative import"
            names = [f"{node.module}.{alias.name}" for alias in node.names]
        else:
            continue
        for name in names:
            parts = name.split(".")
            found.add((parts[0], parts[1] if parts[0] == "reportgen" and len(parts) > 1 else ""))
    return found


@pytest.mark.parametrize("path", _modules(), ids=lambda path: path.relative_to(PACKAGE).as_posix())
def test_imports_follow_the_flow_of_data(path: Path) -> None:
    part = _part(path)
    if part == "__init__":
        return
    assert part in ALLOWED, f"{part} is a new part: say in this test what it may import"
    reached = {inner for outer, inner in _imported(path) if outer == "reportgen"}
    backwards = reached - ALLOWED[part] - {part, "__version__", ""}
    assert not backwards, f"{path.name} imports {sorted(backwards)}"


def test_pint_is_imported_in_one_place_only() -> None:
    importers = {_part(path) for path in _modules() if ("pint", "") in _imported(path)}
    assert importers == {"quantities"}


@pytest.mark.parametrize("kind", ["compressor", "heat-exchanger", "throttling-valve"])
def test_a_kind_of_equipment_is_named_in_its_own_module_only(kind: str) -> None:
    literal = {f'"{kind}"', f"'{kind}'"}
    namers = [
        path.relative_to(PACKAGE).as_posix()
        for path in _modules()
        if any(text in path.read_text("utf-8") for text in literal)
    ]
    assert namers == [f"balances/equipment/{kind.replace('-', '_')}.py"]


@pytest.mark.parametrize("kind", ["free-expansion", "partition-removal", "polytropic", "thermal-contact"])
def test_a_kind_of_process_is_named_in_its_own_module_only(kind: str) -> None:
    literal = {f'"{kind}"', f"'{kind}'"}
    namers = [
        path.relative_to(PACKAGE).as_posix()
        for path in _modules()
        if any(text in path.read_text("utf-8") for text in literal)
    ]
    assert namers == [f"balances/processes/kinds/{kind.replace('-', '_')}.py"]

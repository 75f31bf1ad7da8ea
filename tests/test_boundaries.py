"""The import rule: app imports engine, never the reverse; nothing goes in circles."""

from __future__ import annotations

import ast
from graphlib import TopologicalSorter
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
SCREEN = ("PySide6", "pyqtgraph", "OpenGL", "app")


def modules(package: str) -> dict[str, Path]:
    found = {}
    for path in (ROOT / package).rglob("*.py"):
        parts = path.relative_to(ROOT).with_suffix("").parts
        name = ".".join(parts[:-1] if parts[-1] == "__init__" else parts)
        found[name] = path
    return found


def imports(path: Path) -> set[str]:
    """Names imported when the module is read; types that only checkers see left out."""
    tree = ast.parse(path.read_text(encoding="utf-8"))
    hidden = {
        inner
        for node in ast.walk(tree)
        if isinstance(node, ast.If) and "TYPE_CHECKING" in ast.dump(node.test)
        for inner in ast.walk(node)
    }
    names: set[str] = set()
    for node in ast.walk(tree):
        if node in hidden:
            continue
        if isinstance(node, ast.Import):
            names.update(alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom) and node.module:
            names.add(node.module)
            names.update(f"{node.module}.{alias.name}" for alias in node.names)
    return names


def unit(name: str) -> str:
    """In the engine a package counts as one; on the screen each module for itself."""
    return name if name.startswith("app") else ".".join(name.split(".")[:2])


@pytest.mark.parametrize("name", sorted(modules("engine")))
def test_the_engine_knows_no_screen(name: str):
    foreign = {n for n in imports(modules("engine")[name]) if n.split(".")[0] in SCREEN}
    assert not foreign


@pytest.mark.parametrize("package", ["engine", "app"])
def test_imports_form_no_circle(package: str):
    known = modules(package)
    graph: dict[str, set[str]] = {}
    for name, path in known.items():
        targets = {n for n in imports(path) if n in known and n != package}
        graph.setdefault(unit(name), set()).update(
            unit(t) for t in targets if unit(t) != unit(name)
        )
    list(TopologicalSorter(graph).static_order())


def test_the_field_knows_no_layout():
    for name, path in modules("engine").items():
        if name.startswith("engine.field"):
            assert "engine.layout" not in imports(path), name


def test_compiled_functions_share_one_decorator():
    """numba's own would keep machine code whose callee in another file has changed."""
    users = [
        name for name, path in modules("engine").items() if "numba" in imports(path)
    ]
    assert users == ["engine.compiled"]

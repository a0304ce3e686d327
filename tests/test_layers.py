"""Arrows point downwards only: a module imports from the layers above it in DEVELOPERS.md's table, never
from below."""

from __future__ import annotations

import ast
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
PACKAGE = ROOT / "engine" / "loadpath"

LAYERS = [
    "text", "findings", "functions", "formula", "units", "algebra", "numeric", "figures", "project", "sheet",
    "resolve", "trace", "evaluate", "checking", "document", "render", "pipeline", "cli", "__main__",
]  # fmt: skip
"""In the order that data flows; each may import from those before it."""

HEAVY = {"sympy", "matplotlib", "typst", "numpy", "scipy", "rich"}
"""Packages that no module imports at its top."""


def modules() -> list[Path]:
    return sorted(PACKAGE.rglob("*.py"))


def layer_of(path: Path) -> str:
    inside = path.relative_to(PACKAGE).parts
    return inside[0].removesuffix(".py")


def imported(path: Path, *, only_top: bool = False) -> set[str]:
    """Full names of what a module imports, without what stands under TYPE_CHECKING."""
    tree = ast.parse(path.read_text(encoding="utf-8"))
    nodes = tree.body if only_top else list(ast.walk(tree))
    skipped = {
        id(inner)
        for n in ast.walk(tree)
        if isinstance(n, ast.If) and getattr(n.test, "id", "") == "TYPE_CHECKING"
        for inner in ast.walk(n)
    }
    found: set[str] = set()
    for node in nodes:
        if id(node) in skipped:
            continue
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and node.module:
            found.add(node.module)
    return found


@pytest.mark.parametrize("path", modules(), ids=lambda p: str(p.relative_to(PACKAGE)))
def test_imports_point_upwards(path: Path) -> None:
    layer = layer_of(path)
    if layer == "__init__":
        return
    allowed = set(LAYERS[: LAYERS.index(layer) + 1])
    for name in imported(path):
        if name.startswith("loadpath."):
            assert name.split(".")[1] in allowed, f"{layer} must not import {name}"


@pytest.mark.parametrize("path", modules(), ids=lambda p: str(p.relative_to(PACKAGE)))
def test_heavy_packages_are_imported_late(path: Path) -> None:
    tops = {name.split(".")[0] for name in imported(path, only_top=True)}
    assert not tops & HEAVY


def test_every_layer_is_in_the_table_and_the_map() -> None:
    found = {layer_of(p) for p in modules()} - {"__init__", "guide"}
    assert found == set(LAYERS)
    described = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    for layer in LAYERS:
        assert f"`{layer}" in described, f"DEVELOPERS.md does not name {layer}"

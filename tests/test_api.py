"""The public API: typed, documented, and its example true."""

from __future__ import annotations

import ast
import doctest
import inspect
import re
import subprocess
import sys
from collections.abc import Iterator
from importlib.resources import files
from pathlib import Path
from typing import get_type_hints

import pytest

import loadpath
from loadpath.findings import Finding
from loadpath.pipeline import Issued
from loadpath.sheet import Sheet
from loadpath.trace import Step, Trace, Verdict

PACKAGE = Path(loadpath.__file__).parent
FUNCTIONS = {
    "read": ({"path"}, Sheet),
    "read_text": ({"text", "name"}, Sheet),
    "evaluate": ({"sheet"}, Trace),
    "audit": ({"trace"}, tuple[Finding, ...]),
    "issue": ({"path", "out", "to"}, Issued),
}
SHEET = "---\ntitle: T\n---\n\n    P = 20 kN -- pull\n    sigma = P/(3 cm^2)\n    strength: sigma <= 50 MPa\n"


def hints(function: object) -> dict[str, object]:
    """Annotations of a function of the API, whose types are imported only for type checkers."""
    from collections.abc import Iterable
    from os import PathLike

    names = {
        "Finding": Finding, "Issued": Issued, "Sheet": Sheet, "Trace": Trace, "Iterable": Iterable,
        "PathLike": PathLike,
    }  # fmt: skip
    return get_type_hints(function, {**vars(loadpath), **names})


@pytest.mark.parametrize("name", FUNCTIONS)
def test_a_function_is_typed_and_documented(name: str) -> None:
    function = getattr(loadpath, name)
    parameters, gives = FUNCTIONS[name]
    found = hints(function)
    assert set(inspect.signature(function).parameters) == parameters == set(found) - {"return"}
    assert found["return"] == gives
    assert inspect.getdoc(function)


def test_the_example_of_the_package_is_true() -> None:
    result = doctest.testmod(loadpath)
    assert (result.attempted, result.failed) == (4, 0)


def test_type_checkers_read_the_annotations() -> None:
    assert (files("loadpath") / "py.typed").is_file()


def test_the_version_is_in_one_place() -> None:
    assert re.fullmatch(r"\d+\.\d+\.\d+", loadpath.__version__)
    project = (PACKAGE.parents[1] / "pyproject.toml").read_text(encoding="utf-8")
    assert 'dynamic = ["version"]' in project
    assert 'path = "engine/loadpath/__init__.py"' in project


# --- what the functions do ----------------------------------------------------------------------------------


def test_a_sheet_from_text_to_documents(tmp_path: Path) -> None:
    path = tmp_path / "rod.sheet.md"
    path.write_text(SHEET, encoding="utf-8")
    sheet = loadpath.read(path)
    assert sheet == loadpath.read(str(path))
    trace = loadpath.evaluate(sheet)
    assert trace["sigma"].value == pytest.approx(66.6667, rel=1e-5)
    assert trace["sigma"].si == pytest.approx(66.6667e6, rel=1e-5)
    assert {f.slug for f in loadpath.audit(trace)} > {f.slug for f in trace.findings}
    issued = loadpath.issue(path, tmp_path / "out", to=["md", "json"])
    assert (issued.exit_code, [p.name for p in issued.written]) == (3, ["rod.md", "rod.trace.json"])
    assert all(p.is_file() for p in issued.written)


def test_a_users_mistake_raises_nothing(tmp_path: Path) -> None:
    assert [f.slug for f in loadpath.read(tmp_path / "none.sheet.md").findings] == ["unreadable-file"]
    trace = loadpath.evaluate(loadpath.read_text("nonsense = = \n\n    x = 1/0\n", name="here"))
    assert trace.has_errors
    assert {f.source.path for f in trace.findings} == {"here"}


def test_what_cannot_be_written_raises_os_error(tmp_path: Path) -> None:
    (tmp_path / "rod.sheet.md").write_text(SHEET, encoding="utf-8")
    (tmp_path / "out").write_text("a file in the way", encoding="utf-8")
    with pytest.raises(OSError):
        loadpath.issue(tmp_path / "rod.sheet.md", tmp_path / "out")
    with pytest.raises(KeyError):
        loadpath.issue(tmp_path / "rod.sheet.md", tmp_path / "elsewhere", to=["pdf"])


def test_importing_the_package_is_cheap() -> None:
    """No parser, units library, templates or algebra are loaded before they are needed."""
    code = f"import sys; sys.path.insert(0, {str(PACKAGE.parent)!r}); import loadpath; print(*sys.modules)"
    out = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True
    ).stdout.split()
    assert not {"sympy", "jinja2", "numpy", "rich", "click"} & set(out)


# --- documentation of everything public ---------------------------------------------------------------------


def public(path: Path) -> Iterator[tuple[str, ast.AST]]:
    """Each public class, function and method of a module that others may call, with its name."""
    tree = ast.parse(path.read_text(encoding="utf-8"))
    for node in tree.body:
        if isinstance(node, ast.ClassDef | ast.FunctionDef) and not node.name.startswith("_"):
            yield node.name, node


@pytest.mark.parametrize("path", sorted(PACKAGE.rglob("*.py")), ids=lambda p: str(p.relative_to(PACKAGE)))
def test_every_module_and_everything_public_in_it_says_what_it_is(path: Path) -> None:
    tree = ast.parse(path.read_text(encoding="utf-8"))
    assert ast.get_docstring(tree)
    assert [name for name, node in public(path) if not ast.get_docstring(node)] == []  # type: ignore[arg-type]


@pytest.mark.parametrize("kind", [Sheet, Trace, Step, Verdict, Finding, Issued])
def test_public_records_tell_their_methods(kind: type) -> None:
    for name, member in vars(kind).items():
        if not name.startswith("_") and (callable(member) or isinstance(member, property)):
            assert inspect.getdoc(member), f"{kind.__name__}.{name}"

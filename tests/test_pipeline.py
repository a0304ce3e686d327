"""The order of the stages: what they make of a sheet, and that the same input gives the same bytes."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

import loadpath
from loadpath import pipeline
from loadpath.pipeline import (
    FORMATS,
    RENDERERS,
    audited,
    evaluate,
    exit_code,
    issue,
    read_input,
    render,
    safely,
    stem_of,
)

ROOT = Path(__file__).parents[1]
GOOD = """---
title: Tie rod
sources: {s: A drawing}
assumptions: {A1: {text: The wall is dry, confirm: true}}
not_applicable: {stability: it is pulled}
---

    P = 20 kN -- pull [s]
    A = 4 cm^2 -- area [A1]
    sigma = P/A
    strength: sigma <= 60 MPa -- [s]
"""


# --- stages -------------------------------------------------------------------------------------------------


def test_an_audit_adds_its_findings_to_those_of_the_evaluation() -> None:
    sheet = read_input("-", GOOD)
    assert evaluate(sheet).findings == ()
    assert [f.slug for f in audited(sheet).findings] == ["no-criterion"]


def test_every_format_is_rendered_and_named_after_its_sheet() -> None:
    assert tuple(RENDERERS) == FORMATS
    files = render(audited(read_input("-", GOOD)), "rod")
    assert list(files) == ["rod.html", "rod.md", "rod.trace.json"]
    assert files["rod.html"].startswith(b"<!doctype html>")
    assert files["rod.md"].startswith(b"# Tie rod\n")
    assert json.loads(files["rod.trace.json"])["engine"]["version"] == loadpath.__version__


def test_a_format_that_there_is_none_of() -> None:
    with pytest.raises(KeyError):
        render(audited(read_input("-", GOOD)), "rod", ["pdf"])


@pytest.mark.parametrize(
    ("path", "stem"),
    [
        ("rod.sheet.md", "rod"), ("yard/rod.sheet.md", "rod"), ("rod.md", "rod"), ("rod.txt", "rod.txt"),
        ("-", "stdin"), (".sheet.md", "sheet"), ("a.b.sheet.md", "a.b"),
    ],
)  # fmt: skip
def test_documents_are_named_after_the_sheet(path: str, stem: str) -> None:
    assert stem_of(path) == stem


@pytest.mark.parametrize(
    ("change", "code"),
    [
        (("", ""), 0),
        (("<= 60", "<= 50"), 0),  # equal satisfies
        (("<= 60", "<= 40"), 3),
        (("60 MPa -- [s]", "60 MPa -- [s]\n    valid: A >= 9 cm^2 for sigma"), 3),
        (("sigma = P/A", "sigma = P/A - 1"), 1),
        (("<= 60", "<= 40 s +"), 1),
        (("strength: sigma <= 60 MPa -- [s]", ""), 0),
    ],
)
def test_exit_codes(change: tuple[str, str], code: int) -> None:
    assert exit_code(audited(read_input("-", GOOD.replace(*change)))) == code


# --- faults -------------------------------------------------------------------------------------------------


def broken(*_: object, **__: object) -> object:
    raise RecursionError("too deep")


def test_a_fault_while_working_gives_a_trace_that_says_so(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(pipeline, "audited", broken)
    trace = safely("rod.sheet.md", GOOD)
    (fault,) = trace.findings
    assert (fault.slug, fault.severity) == ("engine-fault", "error")
    assert "RecursionError: too deep" in fault.message
    assert trace.steps == () and exit_code(trace) == 1


def test_a_fault_while_rendering_gives_documents_that_say_so(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    """Not even a fault leaves the documents of before in place, to be taken for those of now."""
    made: list[object] = []
    whole: Callable[..., object] = RENDERERS["html"]

    def once(*arguments: object) -> object:
        made.append(arguments)
        return broken() if len(made) == 1 else whole(*arguments)

    monkeypatch.setitem(RENDERERS, "html", once)  # type: ignore[arg-type]
    path = tmp_path / "rod.sheet.md"
    path.write_text(GOOD, encoding="utf-8")
    issued = issue(str(path), tmp_path / "out")
    assert issued.exit_code == 1
    page = (tmp_path / "out" / "rod.html").read_text(encoding="utf-8")
    assert "Not for use: 1 error" in page and "engine-fault" in page and "50.00" not in page


# --- same input, same bytes ---------------------------------------------------------------------------------

ENVIRONMENTS: dict[str, dict[str, str]] = {
    "hash seed 1": {"PYTHONHASHSEED": "1"},
    "hash seed 2": {"PYTHONHASHSEED": "2"},
    "locale": {"LC_ALL": "tr_TR.UTF-8", "LANG": "tr_TR.UTF-8"},
    "no locale": {"LC_ALL": "C", "PYTHONUTF8": "0", "PYTHONCOERCECLOCALE": "0"},
    "time zone": {"TZ": "Pacific/Chatham"},
    "optimised": {"PYTHONOPTIMIZE": "1"},
}


def issued_elsewhere(folder: Path, out: Path, **environment: str) -> dict[str, bytes]:
    """The documents of two sheets, issued by a process of its own from a folder of its own."""
    folder.mkdir(parents=True)
    (folder / "rod.sheet.md").write_text(GOOD, encoding="utf-8")
    sheets = ["rod.sheet.md", str(ROOT / "calcsheets" / "capstan-shaft.sheet.md")]
    base = {k: v for k, v in os.environ.items() if k not in ("PYTHONHASHSEED", "LC_ALL", "LANG", "TZ")}
    engine = str(Path(loadpath.__file__).parents[1])
    done = subprocess.run(
        [sys.executable, "-m", "loadpath", "issue", *sheets, "--out", str(out)], cwd=folder,
        capture_output=True,
        env={**base, "PYTHONPATH": engine, **environment}, timeout=120, check=False,
    )  # fmt: skip
    assert done.returncode == 3, done.stderr
    return {p.name: p.read_bytes() for p in sorted(out.iterdir())}


@pytest.mark.parametrize("name", ENVIRONMENTS)
def test_the_same_sheet_gives_the_same_bytes_everywhere(name: str, tmp_path: Path) -> None:
    here = {
        **render(audited(read_input("rod.sheet.md", GOOD)), "rod"),
        **render(audited(read_input(ROOT / "calcsheets" / "capstan-shaft.sheet.md")), "capstan-shaft"),
    }
    here["rod.trace.json"] = here["rod.trace.json"].replace(b'"file": "-"', b'"file": "rod.sheet.md"')
    there = issued_elsewhere(tmp_path / name / "deep", tmp_path / "out", **ENVIRONMENTS[name])
    assert sorted(there) == sorted(here)
    assert [n for n in here if here[n] != there[n]] == []


def test_no_document_tells_where_it_was_made(tmp_path: Path) -> None:
    made = issued_elsewhere(tmp_path / "a-folder-of-its-own", tmp_path / "out")
    for name, data in made.items():
        for place in ("a-folder-of-its-own", str(tmp_path), str(ROOT)):
            assert place.encode() not in data, name

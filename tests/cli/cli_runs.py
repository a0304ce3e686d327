"""Runs of the program for the tests of its verbs: sheets in a folder, and what came of them."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Mapping
from pathlib import Path

from click.testing import CliRunner, Result

import loadpath
from loadpath.cli import main

GOOD = """---
title: Good
sources: {s: A drawing}
not_applicable: {stiffness: it is short, stability: it is pulled}
---

    x = 3 mm -- a width [s]
    strength: x <= 5 mm -- [s]
"""
FAILED = GOOD.replace("Good", "Failed").replace("<= 5 mm", "<= 2 mm")
NOT_SHOWN = GOOD.replace("Good", "Not shown") + "    valid: x >= 9 mm for x -- [s]\n"
FAULTY = GOOD.replace("Good", "Faulty") + "    y = x + 2 s\n"
FAULTY_AND_FAILED = FAILED + "    y = x + 2 s\n"
DOUBTFUL = GOOD.replace("Good", "Doubtful").replace(" -- a width [s]", "")


def write(sheets: Mapping[str, str], folder: Path | None = None) -> None:
    """Files below a folder, which is the working folder where none is named."""
    for name, text in sheets.items():
        path = (folder or Path()) / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text, encoding="utf-8")


def run(*arguments: str, given: str | bytes | None = None) -> Result:
    """The program, in this process and in the working folder."""
    result = CliRunner().invoke(main, arguments, input=given, prog_name="loadpath")
    assert result.exception is None or isinstance(result.exception, SystemExit), result.exc_info
    return result


def process(*arguments: str, folder: Path, **environment: str) -> subprocess.CompletedProcess[bytes]:
    """The program as users start it."""
    engine = str(Path(loadpath.__file__).parents[1])
    path = os.pathsep.join(filter(None, (engine, os.environ.get("PYTHONPATH"))))
    return subprocess.run(
        [sys.executable, "-m", "loadpath", *arguments], cwd=folder, capture_output=True, timeout=120,
        check=False, env={**os.environ, "PYTHONPATH": path, **environment},
    )  # fmt: skip


def files(folder: Path) -> dict[str, bytes]:
    """Every file below a folder, by its path."""
    return {str(p.relative_to(folder)): p.read_bytes() for p in sorted(folder.rglob("*")) if p.is_file()}

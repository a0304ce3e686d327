"""loadpath: calc sheets in, documents that a checker can follow out.

The same as the program, from Python:

>>> import loadpath
>>> sheet = loadpath.read_text('''---
... title: Tie rod
... ---
...
...     P = 20 kN -- pull
...     A = 314 mm^2 -- net area
...     sigma = P/A
... ''')
>>> trace = loadpath.evaluate(sheet)
>>> round(trace["sigma"].value, 2), trace["sigma"].unit.text
(63.69, 'MPa')
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable
    from os import PathLike

    from loadpath.findings import Finding
    from loadpath.pipeline import Issued
    from loadpath.sheet import Sheet
    from loadpath.trace import Trace

__version__ = "0.1.0"

# loaded here so that the function below keeps the name that the subpackage would otherwise take from it
import_module("loadpath.evaluate")


def read(path: str | PathLike[str]) -> Sheet:
    """The calc sheet in a file.

    What is wrong with it stands in `sheet.findings`; nothing is raised for a user's mistake.
    """
    from pathlib import Path

    from loadpath.sheet.reader import read_sheet_file

    return read_sheet_file(Path(path))


def read_text(text: str, name: str = "-") -> Sheet:
    """The calc sheet in a text, shown under a name; it sees no files.

    Nothing is raised for a user's mistake.
    """
    from loadpath.project import MemoryWorld
    from loadpath.sheet.reader import read_sheet
    from loadpath.text import Source

    return read_sheet(Source(name, text), MemoryWorld({}))


def evaluate(sheet: Sheet) -> Trace:
    """The trace of a sheet: every step with its value in coherent SI and in the unit that it is shown in.

    Names, order and dimensions are checked first; what fails is in `trace.findings`, and what hangs on it
    has no value.
    """
    from loadpath.pipeline import evaluate as work

    return work(sheet)


def audit(trace: Trace) -> tuple[Finding, ...]:
    """Every finding on a sheet: those of the trace, and what a careful reader would ask besides; in order
    of place."""
    from loadpath.checking.audit import audit as look

    return look(trace)


def issue(
    path: str | PathLike[str], out: str | PathLike[str] = "output", to: Iterable[str] = ("html", "md", "json")
) -> Issued:
    """Writes the documents of the sheet in a file into a folder: `to` names formats (html, md, json).

    A sheet with errors still gives its documents, headed "not for use". Raises OSError where a file can't
    be written.
    """
    from os import fspath
    from pathlib import Path

    from loadpath.pipeline import issue as work

    return work(fspath(path), Path(out), tuple(to))

"""The order of the stages. Nothing else knows it.

text -> Sheet -> names and dimensions -> Trace (steps) -> Document -> HTML | Markdown | JSON
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from pathlib import Path

from loadpath import __version__
from loadpath.document import Document, build
from loadpath.findings import finding
from loadpath.project import SHEET_ENDING, MemoryWorld, write_atomically
from loadpath.sheet import FrontMatter, Sheet, read_sheet, read_sheet_file
from loadpath.text import Source
from loadpath.trace import Trace

FORMATS = ("html", "md", "json")
"""What `issue` writes when it is not told otherwise."""


def evaluate(sheet: Sheet) -> Trace:
    """Names and dimensions, then numbers."""
    from loadpath.evaluate.evaluate import evaluate as work
    from loadpath.resolve import resolve

    return work(resolve(sheet))


def audited(sheet: Sheet) -> Trace:
    """The trace with every finding that an audit adds."""
    from loadpath.checking.audit import audit

    trace = evaluate(sheet)
    return trace.with_findings(audit(trace))


def read_input(path: Path | str, text: str | None = None) -> Sheet:
    """The sheet in a file, or in a text that was read from standard input."""
    if text is not None:
        return read_sheet(Source("-", text), MemoryWorld({}))
    return read_sheet_file(Path(path))


# --- formats ----------------------------------------------------------------------------------------------

Files = dict[str, bytes]
"""Name of each file that a document consists of, and its bytes."""


def _bytes(text: str) -> bytes:
    """UTF-8; half of a surrogate pair, which a text from Python may hold, becomes a question mark."""
    return text.encode("utf-8", "replace")


def _html(_: Trace, document: Document, stem: str) -> Files:
    from loadpath.render.html import render

    return {f"{stem}.html": _bytes(render(document))}


def _markdown(_: Trace, document: Document, stem: str) -> Files:
    from loadpath.render.markdown import render

    text, images = render(document, stem)
    return {f"{stem}.md": _bytes(text)} | images


def _json(trace: Trace, _: Document, stem: str) -> Files:
    from loadpath.trace.file import record

    return {f"{stem}.trace.json": _bytes(record(trace, __version__).to_json())}


RENDERERS: dict[str, Callable[[Trace, Document, str], Files]] = {
    "html": _html,
    "md": _markdown,
    "json": _json,
}


def render(trace: Trace, stem: str, formats: Iterable[str] = FORMATS) -> Files:
    """The files of a document in the formats asked for.

    Raises KeyError for a format that there is none of.
    """
    document = build(trace, __version__)
    files: Files = {}
    for name in formats:
        files |= RENDERERS[name](trace, document, stem)
    return files


# --- issuing ----------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Issued:
    """What became of one sheet."""

    path: str
    """As the user named it."""
    trace: Trace
    written: tuple[Path, ...]

    @property
    def exit_code(self) -> int:
        """0 done, 1 the sheet has errors, 3 a criterion is not satisfied or not shown."""
        return exit_code(self.trace)


def exit_code(trace: Trace) -> int:
    """0 done, 1 the sheet has errors, 3 a criterion is not satisfied or not shown; 1 outranks 3."""
    if trace.has_errors:
        return 1
    return 3 if any(s.verdict is not None and s.verdict.satisfied is not True for s in trace.criteria) else 0


def stem_of(path: str) -> str:
    """The name that a sheet's documents begin with."""
    name = Path(path).name
    return "stdin" if path == "-" else name.removesuffix(SHEET_ENDING).removesuffix(".md") or "sheet"


def issue(path: str, out: Path, formats: Iterable[str] = FORMATS, text: str | None = None) -> Issued:
    """Reads, works and writes one sheet; a sheet with errors still gives its documents.

    Raises OSError where it can't write.
    """
    trace = safely(path, text)
    try:
        files = render(trace, stem_of(path), formats)
    except Exception as fault:
        trace = _faulted(path, fault)
        files = render(trace, stem_of(path), formats)
    written = []
    for name, data in files.items():
        target = out / name
        target.parent.mkdir(parents=True, exist_ok=True)
        write_atomically(target, data)
        written.append(target)
    return Issued(path, trace, tuple(written))


def safely(path: str, text: str | None = None) -> Trace:
    """The audited trace of a sheet, or what stands for it where the engine itself fails: a fault is never
    silent."""
    try:
        return audited(read_input(path, text))
    except Exception as fault:
        return _faulted(path, fault)


def _faulted(path: str, fault: Exception) -> Trace:
    """A trace without steps that says what went wrong inside the engine."""
    source = Source(path, "")
    said = finding(
        "engine-fault",
        f"a fault of the engine, not of the sheet: {type(fault).__name__}: {fault}",
        source,
        None,
        help="report it with this sheet; nothing on it is shown",
    )
    return evaluate(Sheet(source, FrontMatter(title=stem_of(path)), (), (said,)))

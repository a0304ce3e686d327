"""A page of the guide for every finding: its failing sheet gives the finding, its mended sheet gives none.

A page holds its sheets in fenced blocks opened by "```sheet failing" and "```sheet mended", and files that
lie beside them in blocks opened by "```file NAME".
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from importlib.resources import files

import pytest

import loadpath
from loadpath.findings import SLUGS, Finding
from loadpath.project import MemoryWorld
from loadpath.sheet.reader import read_sheet
from loadpath.text import Source
from loadpath.trace import Trace

PAGES = {
    entry.name.removesuffix(".md"): entry.read_text(encoding="utf-8")
    for entry in files("loadpath.guide").joinpath("findings").iterdir()
    if entry.name.endswith(".md")
}
BLOCK = re.compile(r"^```(\w[^\n`]*)\n(.*?)^```$", re.MULTILINE | re.DOTALL)

IN_WORDS_ONLY = {
    "unreadable-file": "a file that is not there or not text is no sheet",
    "engine-fault": "no sheet should cause one",
    "algebra-time-out": "what takes longer than the limit hangs on the machine; tests/algebra cause it",
}
"""Slugs whose page holds no sheets, and why."""

with_sheets = pytest.mark.parametrize("slug", sorted(set(PAGES) - set(IN_WORDS_ONLY)))


def blocks(slug: str) -> dict[str, str]:
    """The fenced blocks of a page, by the words that open them."""
    return dict(BLOCK.findall(PAGES[slug]))


def work(slug: str, which: str) -> tuple[Trace, Sequence[Finding]]:
    """The trace of the failing or the mended sheet of a page, and all its findings."""
    held = blocks(slug)
    beside = {
        name.removeprefix("file "): text.encode() for name, text in held.items() if name.startswith("file ")
    }
    source = Source(f"{slug}.sheet.md", held[f"sheet {which}"])
    trace = loadpath.evaluate(read_sheet(source, MemoryWorld(beside, source.path)))
    return trace, loadpath.audit(trace)


def listed(findings: Sequence[Finding]) -> str:
    return "\n" + "\n".join(
        f"{f.line}:{f.column} {f.severity} {f.slug}: {f.message} | {f.help}" for f in findings
    )


def test_every_finding_has_a_page_and_every_page_a_finding() -> None:
    assert set(PAGES) == set(SLUGS)


@pytest.mark.parametrize("slug", sorted(PAGES))
def test_page_is_well_formed(slug: str) -> None:
    """The slug as heading; a failing and a mended sheet, short and different, or neither; no other blocks."""
    assert PAGES[slug].startswith(f"# {slug}\n\n")
    opened = [name for name, _ in BLOCK.findall(PAGES[slug])]
    assert len(opened) == len(set(opened)) == PAGES[slug].count("\n```") / 2
    sheets = [name for name in opened if not name.startswith("file ")]
    assert sheets == ([] if slug in IN_WORDS_ONLY else ["sheet failing", "sheet mended"])
    if sheets:
        failing, mended = blocks(slug)["sheet failing"], blocks(slug)["sheet mended"]
        assert failing != mended
        assert all(5 <= len(sheet.splitlines()) <= 15 for sheet in (failing, mended))
    assert all(len(line) <= 110 for line in PAGES[slug].splitlines())


@with_sheets
def test_failing_sheet_gives_the_finding(slug: str) -> None:
    """Exactly once, with the severity of the registry, and nothing else beside it."""
    _, findings = work(slug, "failing")
    assert [(f.slug, f.severity) for f in findings] == [(slug, SLUGS[slug][0])], listed(findings)


@with_sheets
def test_page_does_not_repeat_the_message(slug: str) -> None:
    """The words of the program may change; the page explains in its own."""
    _, findings = work(slug, "failing")
    text = " ".join(BLOCK.sub("", PAGES[slug]).split())
    assert all(f.message not in text for f in findings)


@with_sheets
def test_mended_sheet_gives_no_finding(slug: str) -> None:
    """No error, no warning and no note, and every criterion comes to a verdict."""
    trace, findings = work(slug, "mended")
    assert not findings, listed(findings)
    assert trace.criteria
    assert all(step.verdict is not None and step.verdict.satisfied is not None for step in trace.criteria)

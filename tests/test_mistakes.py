"""Mistyped sheets, and the findings each must give: no more, no less.

Each file of `tests/cases/mistakes/` has three parts, parted by lines of `=====`: what the user did, the
whole sheet, and the findings in the order of the page. A finding is a line `LINE:COLUMN severity slug`
(1-based; the column counts code points and is where the caret starts), with lines below it as needed:

    says: words that the message must contain
    mend: words that the help must contain
    not computed: ids of steps, parted by commas, that are "not computed because of line LINE"
    computed: ids of steps that have a value in spite of the mistake

The cases were written before the messages, from the language and from what is commonly mistyped.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from loadpath.findings import SLUGS

CASES = sorted((Path(__file__).parent / "cases" / "mistakes").glob("*.case"))
HEAD = re.compile(r"(\d+):(\d+) (error|warning|note) ([a-z-]+)")
DETAIL = re.compile(r"(says|mend|not computed|computed): (.+)")

NO_SHEET_ALONE = {
    "unreadable-file": "a file that is not there or not text is no sheet",
    "image-type": "takes an image file beside the sheet",
    "engine-fault": "no sheet should cause one",
    "algebra-time-out": "what takes longer than the limit hangs on the machine; tests/algebra cause it",
}
"""Slugs without a case here, and why."""


@dataclass(frozen=True)
class Expected:
    """One finding that a case asks for, with what its message, its help and the steps must show."""

    line: int
    column: int
    severity: str
    slug: str
    details: tuple[tuple[str, str], ...]
    """Pairs of a key (`says`, `mend`, `not computed`, `computed`) and one text or id."""

    def texts(self, key: str) -> list[str]:
        return [text for name, text in self.details if name == key]


@dataclass(frozen=True)
class Case:
    what: str
    sheet: str
    expected: tuple[Expected, ...]


def read_case(path: Path) -> Case:
    """The three parts of a case file. Raises ValueError for a line that the format does not know."""
    what, sheet, rest = re.split(r"^=====\n", path.read_text(encoding="utf-8"), flags=re.MULTILINE)
    expected: list[Expected] = []
    for line in rest.splitlines():
        if head := HEAD.fullmatch(line):
            row, column, severity, slug = head.groups()
            expected.append(Expected(int(row), int(column), severity, slug, ()))
        elif (detail := DETAIL.fullmatch(line)) and expected:
            key, text = detail.groups()
            texts = text.split(", ") if key.endswith("computed") else [text]
            last = expected.pop()
            pairs = last.details + tuple((key, each) for each in texts)
            expected.append(Expected(last.line, last.column, last.severity, last.slug, pairs))
        else:
            raise ValueError(f"{path.name}: not a line of a case: {line!r}")
    return Case(what.strip(), sheet, tuple(expected))


def findings_of(text: str) -> tuple[Sequence[Any], Sequence[Any]]:
    """All findings of a sheet, in order, and its steps: the one place that knows how the engine is called."""
    import loadpath

    sheet = loadpath.read_text(text, name="case.sheet.md")
    trace = loadpath.evaluate(sheet)
    return loadpath.audit(trace), trace.steps


each_case = pytest.mark.parametrize("path", CASES, ids=[path.stem for path in CASES])


@each_case
def test_mistake_gives_its_findings(path: Path) -> None:
    """Exactly the findings that the case lists, at their places, in words that name and mend the mistake."""
    case = read_case(path)
    findings, steps = findings_of(case.sheet)
    given = [(f.line, f.column, f.severity, f.slug) for f in findings]
    assert given == [(e.line, e.column, e.severity, e.slug) for e in case.expected], "\n" + "\n".join(
        f"{f.line}:{f.column} {f.severity} {f.slug}: {f.message} | {f.help}" for f in findings
    )
    by_id = {step.id: step for step in steps}
    for finding, expected in zip(findings, case.expected, strict=True):
        assert finding.message and not finding.message.endswith(".")
        assert finding.help, "words that mend"
        for words in expected.texts("says"):
            assert words in finding.message
        for words in expected.texts("mend"):
            assert words in finding.help
        for name in expected.texts("not computed"):
            assert by_id[name].value is None, name
            assert by_id[name].why == f"not computed because of line {expected.line}", name
        for name in expected.texts("computed"):
            assert by_id[name].value is not None, name


@each_case
def test_case_is_well_formed(path: Path) -> None:
    """The case itself: short, in the order of the page, places on the sheet, slugs in the registry."""
    case = read_case(path)
    lines = case.sheet.splitlines()
    assert case.what and "\n" not in case.what
    assert 6 <= len(lines) <= 20
    assert case.expected
    places = [(e.line, e.column) for e in case.expected]
    assert places == sorted(places)
    for expected in case.expected:
        assert SLUGS[expected.slug][0] == expected.severity
        assert lines[expected.line - 1][expected.column - 1].strip(), "the caret stands on nothing"
        assert expected.texts("says") or expected.texts("mend"), "a case without words"


def test_each_number_is_used_once() -> None:
    numbers = [path.name.split("-")[0] for path in CASES]
    assert numbers == [f"{number:03d}" for number in range(1, len(CASES) + 1)]


def test_forty_mistakes_and_nearly_every_slug() -> None:
    """At least forty sheets with one mistake each, and a case for every slug that a sheet alone can cause."""
    cases = [read_case(path) for path in CASES]
    assert len({case.sheet for case in cases}) == len(cases)
    assert sum(len(case.expected) == 1 for case in cases) >= 40
    covered = {expected.slug for case in cases for expected in case.expected}
    assert set(SLUGS) - covered == set(NO_SHEET_ALONE)

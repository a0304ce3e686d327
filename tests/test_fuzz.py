"""Hostile and random sheets through every stage: no exception, no hang. campaigns/fuzz.py is the long run."""

from __future__ import annotations

import time
from random import Random

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

import loadpath
from campaigns.fuzz import KINDS, audited, hostile, through, twice
from campaigns.random_algebra import algebra

SHEETS = hostile(share=0.04)
NAMED = {
    # what the sheet holds, and slugs of which it must give one
    "nested parentheses": {"over-limit"},
    "nested parentheses in a line that is read": {"over-limit"},
    "a tower of powers": {"not-finite", "over-limit"},
    "aliases that explode": {"yaml-alias"},
    "script in every field": {"bad-syntax"},
    "style in every field": {"bad-syntax"},
    "a number of many digits": {"over-limit"},
    "tags": {"yaml-alias"},
    "links out of the folder": {"image-path"},
    "a function of itself": {"used-before-defined"},
    "large powers in units": {"bad-unit"},
    "half a surrogate": {"unreadable-file", "bad-syntax"},
}
LIMIT = 2.0
"""Seconds of processor time for what an audit does."""


@pytest.mark.parametrize("what", SHEETS)
def test_a_hostile_sheet_ends_in_time_and_without_an_exception(what: str) -> None:
    begun = time.process_time()
    trace = audited(SHEETS[what])
    assert time.process_time() - begun < LIMIT
    if what in NAMED:
        assert NAMED[what] & {finding.slug for finding in trace.findings}


@pytest.mark.parametrize("what", SHEETS)
def test_the_documents_of_a_hostile_sheet(what: str) -> None:
    """Markup stays text, and what is much in the sheet is not many times as much in the documents."""
    files = through(SHEETS[what])
    assert {name.rpartition(".")[2] for name in files} >= {"html", "md", "json"}
    assert max(map(len, files.values())) < 2_000_000 + 200 * len(SHEETS[what])


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("seed", range(8))
def test_random_sheets_of_each_kind(kind: str, seed: int) -> None:
    audited(KINDS[kind](Random(f"{kind} {seed}")))


@pytest.mark.parametrize("kind", ["algebra", "algebra damaged"])
@pytest.mark.parametrize("seed", range(3))
def test_the_documents_of_random_sheets_with_algebra(kind: str, seed: int) -> None:
    """Their trace fits its schema, and a second run gives the same bytes."""
    twice(KINDS[kind](Random(f"{kind} {seed}")))


def test_most_of_what_random_sheets_with_algebra_hold_is_worked() -> None:
    """A generator whose sheets hold nothing but mistakes would test the reading of lines only."""
    traces = [audited(algebra(Random(f"algebra {seed}"))) for seed in range(8)]
    steps = [step for trace in traces for step in trace]
    worked = [step for step in steps if not step.why]
    assert len(worked) > 0.6 * len(steps)
    assert {"table", "function", "solution", "result", "plot"} <= {step.kind for step in worked}


quick = settings(deadline=None, max_examples=30, suppress_health_check=list(HealthCheck))


@quick
@given(st.text(max_size=300))
def test_any_text(text: str) -> None:
    audited(text)
    audited(f"---\ntitle: x\n---\n\n{text}\n")


@quick
@given(st.binary(max_size=300))
def test_any_bytes(data: bytes) -> None:
    audited(data.decode("utf-8", "replace"))


@quick
@given(st.lists(st.text("axL_'σ²0123456789.,()[]<>+-*/^= \"\tkNm%:", max_size=30), max_size=6))
def test_any_formula_lines(lines: list[str]) -> None:
    audited("---\ntitle: x\n---\n\n" + "".join(f"    {line}\n" for line in lines))


@quick
@given(st.text("abk:-?[]{},&*!|>'\"%@#~ \n\t", max_size=60))
def test_any_front_matter(text: str) -> None:
    audited(f"---\ntitle: x\n{text}\n---\n\n    a = 1 -- x\n")


def test_bytes_in_a_file(tmp_path_factory: pytest.TempPathFactory) -> None:
    path = tmp_path_factory.mktemp("fuzz") / "any.sheet.md"
    for seed in range(20):
        path.write_bytes(Random(seed).randbytes(400))
        assert loadpath.audit(loadpath.evaluate(loadpath.read(path)))

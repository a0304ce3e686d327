"""Whole sheets: any file ends in a `Sheet` and findings, in time that grows with its length and no faster."""

from __future__ import annotations

import time
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from loadpath.project import LARGEST_SHEET, MemoryWorld
from loadpath.sheet import Sheet, read_sheet, read_sheet_file
from loadpath.sheet.reader import MOST_LINES
from loadpath.text import Source

FRONT = "---\ntitle: Hoist beam\n---\n\n"


def read(text: str) -> Sheet:
    return read_sheet(Source("a.sheet.md", text), MemoryWorld())


def slugs(sheet: Sheet) -> list[str]:
    return [f.slug for f in sheet.findings]


def test_a_sheet_holds_front_matter_and_statements() -> None:
    sheet = read(FRONT + "# Loads\n\n    P = 20 kN  -- rated load\n")
    assert (sheet.front.title, len(sheet.statements), sheet.findings) == ("Hoist beam", 1, ())


def test_a_sheet_with_three_mistakes_reports_three_in_order() -> None:
    text = "---\ntitle: Hoist beam\ndigits: 99\n---\n\nSee {}.\n\nP = 20 kN\n"
    assert [(f.line, f.slug) for f in read(text).findings] == [
        (3, "front-matter-value"),
        (6, "bad-syntax"),
        (8, "formula-in-prose"),
    ]


def test_a_file_is_read_with_the_project_around_it(tmp_path: Path) -> None:
    (tmp_path / ".git").mkdir()
    (tmp_path / "project.yaml").write_text("owner: Tern Slip boatyard")
    (tmp_path / "a.sheet.md").write_text(FRONT)
    sheet = read_sheet_file(tmp_path / "a.sheet.md")
    assert (sheet.front.owner, sheet.findings) == ("Tern Slip boatyard", ())


@pytest.mark.parametrize(
    ("data", "slug"),
    [
        (b"\x00\xff\xfe random", "unreadable-file"),
        (FRONT.encode() + b"caf\xe9", "unreadable-file"),
        (b"x" * (LARGEST_SHEET + 1), "over-limit"),
    ],
)
def test_a_file_that_is_no_text_is_one_finding(tmp_path: Path, data: bytes, slug: str) -> None:
    (tmp_path / "a.sheet.md").write_bytes(data)
    assert slugs(read_sheet_file(tmp_path / "a.sheet.md")) == [slug]


def test_a_file_that_is_not_there_is_one_finding(tmp_path: Path) -> None:
    assert slugs(read_sheet_file(tmp_path / "a.sheet.md")) == ["unreadable-file"]
    assert slugs(read_sheet_file(tmp_path)) == ["unreadable-file"]


@pytest.mark.parametrize("character", ["\0", "\x1b", "\x0c", "\x7f", "\x85", "\ud800", "\uffff", "\r"])
def test_a_control_character_is_found_in_its_line(character: str) -> None:
    (found,) = read(f"{FRONT}a{character}b").findings
    assert (found.slug, found.line, found.column) == ("unreadable-file", 5, 2)


def test_too_many_lines_are_over_the_limit() -> None:
    assert slugs(read(FRONT + "\n" * MOST_LINES)) == ["over-limit"]
    assert slugs(read(FRONT + "x" * LARGEST_SHEET)) == ["over-limit"]


@pytest.mark.parametrize(
    "body",
    [
        "[" * 10_000,
        "![" * 10_000,
        "[a](" * 10_000,
        "{" * 10_000,
        "> " * 10_000,
        "- " * 10_000,
        "*a_" * 10_000,
        "<script>" * 10_000,
        "    x = " + "(" * 10_000,
        "    x = 9^9^9^9",
        "` `` " * 5_000 + "\nx = 1",
        "[a\n" * 5_000,
    ],
    ids=lambda body: body[:8].strip(),
)
def test_what_would_hang_ends_soon(body: str) -> None:
    before = time.process_time()
    read(FRONT + body)
    assert time.process_time() - before < 2


def test_the_time_grows_with_the_length() -> None:
    part = "## Step\n\nText with {x}.\n\n- one\n- two\n\nSo:\n\n    x = 3 kN*2 + 5 kN  -- a note\n\n"

    def seconds(times: int) -> float:
        source = Source("a.sheet.md", FRONT + part * times)
        before = time.process_time()
        read_sheet(source, MemoryWorld())
        return time.process_time() - before

    seconds(10)
    assert seconds(1000) < 40 * max(seconds(100), 0.002)


PARTS = st.one_of(
    st.sampled_from(
        [
            FRONT,
            "---\n",
            "\n",
            "\n\n",
            "    ",
            "\t",
            " ",
            "- ",
            "1. ",
            "> ",
            "# ",
            "```\n",
            "===\n",
            "|a|b|\n|-|-|\n",
            "|",
        ]
    ),
    st.sampled_from(
        [
            "x = 3 kN",
            "strength: a <= b",
            "f = cases",
            "Table t: x\n\n",
            "![c](a.png)",
            "![",
            "](",
            "[a]: b\n",
            "[a]",
        ]
    ),
    st.sampled_from(
        [
            "{x}",
            "{x [m]}",
            "{",
            "}",
            "\\",
            "\\{",
            "`",
            "``",
            "*",
            "_",
            "<script>",
            '"}</style>',
            "&amp;",
            " -- ",
            "text",
        ]
    ),
    st.sampled_from(
        ["é", "\u2028", "\u0301", "σ_b", "\ufeff", "\x85", "\r", "\x0c", "<https://tern.example>"]
    ),
)


@settings(max_examples=200, deadline=2000, suppress_health_check=[HealthCheck.too_slow])
@given(st.lists(PARTS, max_size=40).map("".join), st.booleans())
def test_any_text_gives_a_sheet_with_findings_in_it(text: str, with_front: bool) -> None:
    sheet = read(FRONT + text if with_front else text)
    for found in sheet.findings:
        assert found.span is None or 0 <= found.span.start <= found.span.end <= len(sheet.source.text)
    spans = [block.span for block in sheet.blocks]
    assert all(0 <= span.start < span.end <= len(sheet.source.text) for span in spans)


@settings(max_examples=50, deadline=2000, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.binary(max_size=200))
def test_any_bytes_give_a_sheet(tmp_path: Path, data: bytes) -> None:
    (tmp_path / "a.sheet.md").write_bytes(data)
    sheet = read_sheet_file(tmp_path / "a.sheet.md")
    assert sheet.findings

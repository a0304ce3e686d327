"""Lines of a block become the items of statements, every character at its own offset."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from loadpath.formula.lines import Group, groups, indent_of, without_notes
from loadpath.text import Source, Span


def read(text: str) -> tuple[Source, tuple[Group, ...]]:
    source = Source("", text)
    return source, groups(source, Span(0, len(text)))


@pytest.mark.parametrize(
    ("line", "columns"),
    [("a", 0), ("    a", 4), ("\ta", 4), ("  \ta", 4), ("    \ta", 8), ("\t\ta", 8), ("   ", 3)],
)
def test_a_tab_counts_to_the_next_multiple_of_four(line: str, columns: int) -> None:
    assert indent_of(line) == columns


def test_each_line_is_a_statement() -> None:
    _, found = read("    a = 1\n    b = 2")
    assert [group.whole.text.strip() for group in found] == ["a = 1", "b = 2"]


def test_a_deeper_line_belongs_to_the_statement_above_over_blank_lines() -> None:
    _, found = read("    a = 1\n\n      + 2\n    b = 2")
    assert [group.whole.text.split() for group in found] == [["a", "=", "1", "+", "2"], ["b", "=", "2"]]


def test_a_still_deeper_line_goes_on_the_line_above() -> None:
    _, (group,) = read("    f = cases\n        a\n            when b\n        c otherwise")
    assert [item.text.split() for item in group.deeper] == [["a", "when", "b"], ["c", "otherwise"]]
    assert group.head.text.split() == ["f", "=", "cases"]


def test_a_tab_and_four_spaces_are_the_same_indent() -> None:
    _, found = read("    a = 1\n\tb = 2")
    assert len(found) == 2


def test_the_first_two_hyphens_with_space_around_start_the_note() -> None:
    source, (group,) = read("    a = b--c  -- rated [hoist] -- load [A1]")
    (note,) = group.whole.notes
    assert group.whole.text.split() == ["a", "=", "b--c"]
    assert note.text == "rated [hoist] -- load [A1]"
    assert source.cut(note.span) == note.text
    assert [(key, source.cut(span)) for key, span in note.citations] == [("hoist", "hoist"), ("A1", "A1")]


def test_any_line_may_have_a_note_and_they_keep_their_order() -> None:
    _, (group,) = read("    a = b -- one\n      + c -- two")
    assert [note.text for note in group.whole.notes] == ["one", "two"]
    assert group.whole.text.split() == ["a", "=", "b", "+", "c"]


def test_a_note_may_be_empty_or_stand_at_the_end_of_the_line() -> None:
    _, (group,) = read("    a = 1 --")
    assert [note.text for note in group.whole.notes] == [""]
    assert group.whole.text.split() == ["a", "=", "1"]


def test_the_span_of_a_statement_holds_its_notes() -> None:
    source, (first, second) = read("    a = 1 -- one\n    b = 2")
    assert source.cut(first.span) == "a = 1 -- one"
    assert source.cut(second.span) == "b = 2"


def test_without_notes() -> None:
    assert without_notes("a = 1 -- x [k]\n  + b") == "a = 1 \n  + b"


lines = st.lists(
    st.builds(
        lambda indent, body, note: " " * indent + body + note,
        st.integers(4, 12), st.text("ab=+1 \t", max_size=12), st.sampled_from(("", " -- note [k]", " --")),
    ),
    min_size=1, max_size=6,
)  # fmt: skip


@given(lines)
def test_every_character_stands_at_its_own_offset(typed: list[str]) -> None:
    """What an item holds is what the source holds there, or a blank; nothing of a line is lost."""
    source, found = read("\n".join(typed))
    seen: set[int] = set()
    for group in found:
        for index, character in enumerate(group.whole.text):
            at = group.whole.start + index
            assert character in (source.text[at], " ")
            if not character.isspace():
                seen.add(at)
        for note in group.whole.notes:
            seen |= set(range(note.span.start, note.span.end))
        for item in (group.head, *group.deeper):
            assert (
                item.text == source.text[item.start : item.start + len(item.text)].replace("\t", " ")
                or "\n" in (source.text[item.start : item.start + len(item.text)])
            )
    lost = [at for at, c in enumerate(source.text) if not c.isspace() and at not in seen]
    assert all(source.text[at] == "-" for at in lost), "only the hyphens of the notes are left out"

"""Values in prose: which braces are values, where they stand, and which are mistakes."""

from __future__ import annotations

import pytest

from loadpath.findings import Finding
from loadpath.project import MemoryWorld
from loadpath.sheet import Heading, Prose, Value
from loadpath.sheet.blocks import read_blocks
from loadpath.sheet.values import pieces, read_words, values_in
from loadpath.text import Source


def read(text: str) -> tuple[list[Value], tuple[Finding, ...]]:
    blocks, found = read_blocks(Source("a.sheet.md", text), 0, MemoryWorld())
    values: list[Value] = []
    for block in blocks:
        if isinstance(block, Prose):
            assert list(block.values) == list(values_in(block.tokens))
            values += block.values
        elif isinstance(block, Heading):
            values += values_in([block.tokens])
    return values, found


def names(text: str) -> list[tuple[str, str]]:
    values, found = read(text)
    assert found == ()
    for value in values:
        assert value.source.cut(value.span) == value.typed
        assert value.source.cut(value.unit_span) == value.unit
    return [(value.name, value.unit) for value in values]


def test_a_name_and_a_unit() -> None:
    assert names("The load {P_Ed} is {P_Ed [kN]}.") == [("P_Ed", ""), ("P_Ed", "kN")]
    assert names("{ sigma[ N/mm^2 ] } and {L [ft-in 1/16]}") == [("sigma", "N/mm^2"), ("L", "ft-in 1/16")]
    assert names("{b.I_y}, {B1.M_max [kN*m]}, {y'}") == [("b.I_y", ""), ("B1.M_max", "kN*m"), ("y'", "")]


def test_a_greek_letter_and_its_word_are_one_name() -> None:
    assert names("{σ_b} {sigma_b}") == [("sigma_b", ""), ("sigma_b", "")]


def test_emphasis_and_links_hold_values() -> None:
    assert names("*{x_1}* and **{x_2}** [see {x_3}](#a)") == [("x_1", ""), ("x_2", ""), ("x_3", "")]


@pytest.mark.parametrize(
    "text",
    [
        "\\{x}",
        "`{x}`",
        "``{x} ` {y}``",
        "```\n{x}\n```",
        "[a](b{x}.html)",
        "[a](<b{x}.html>)",
        "<https://tern.example/{x}>",
        "[a]\n\n[a]: b{x}.html '{y}'",
        "a } alone",
    ],
)
def test_these_braces_are_no_values(text: str) -> None:
    assert names(text) == []


@pytest.mark.parametrize(
    ("text", "line", "column"),
    [
        ("see {P}", 1, 5),
        ("see\n   {P}", 2, 4),
        ("> see\n> also {P}", 2, 8),
        ("- see\n\n  also {P}", 3, 8),
        ("1. a\n   - > {P}", 2, 8),
        ("# {P} #", 1, 3),
        ("Loads\n{P}\n===", 2, 1),
        ("| {Q} | b |\n|---|---|\n| \\| {P} | {P} |", 3, 6),
        ("> - | a | b |\n>   |---|---|\n>   | a | {P} |", 3, 11),
        ("[r]: /x\nsee {P}", 2, 5),
        ("ä σ {P}", 1, 5),
        ("\u2028\nsee {P}", 2, 5),
        ("-\tsee\n\n\t{P}", 3, 2),
    ],
)
def test_a_value_has_its_line_and_column(text: str, line: int, column: int) -> None:
    values, _ = read(text)
    value = next(value for value in values if value.name == "P")
    assert (value.source.line_number(value.span.start), value.source.column(value.span.start)) == (
        line,
        column,
    )
    assert value.source.cut(value.name_span) == "P"


def test_a_value_may_run_over_a_line_end() -> None:
    text = "> the load {P_Ed\n> [kN]} acts"
    (value,), found = read(text)
    assert (value.name, value.unit, found) == ("P_Ed", "kN", ())
    assert value.source.cut(value.unit_span) == "kN"
    assert value.source.cut(value.span) == "{P_Ed\n> [kN]}"


@pytest.mark.parametrize(
    ("text", "column"),
    [
        ("a {} b", 3),
        ("a {a+b} c", 3),
        ("a {M(2 m)} c", 3),
        ("a {x []} c", 3),
        ("a {2} c", 3),
        ("a {x.} c", 3),
        ("a {x [m] y} c", 3),
        ("a {x", 3),
        ("a {x {y}", 3),
        ("a {" + "x" * 400 + "}", 3),
    ],
)
def test_braces_without_a_name_are_a_mistake(text: str, column: int) -> None:
    values, found = read(text)
    assert [(f.slug, f.column) for f in found] == [("bad-syntax", column)]
    assert "\\{" in found[0].help
    assert values[0].name == ""


def test_words_are_given_in_pieces() -> None:
    source = Source("a", "\\{a} is {b [mm]}, \\}")
    words, found = read_words(source.text, source, lambda offset: offset)
    assert found == ()
    parts = [part if isinstance(part, str) else part.name for part in pieces(words)]
    assert [part for part in parts if part] == ["{", "a} is ", "b", ", ", "}"]

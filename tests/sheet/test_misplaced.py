"""Formula lines that CommonMark makes prose: none is passed over, and ordinary prose is left alone."""

from __future__ import annotations

import pytest

from loadpath.formula.statements import Faulty
from loadpath.project import MemoryWorld
from loadpath.sheet import Formulas
from loadpath.sheet.blocks import read_blocks
from loadpath.text import Source


def wrong(text: str) -> list[str]:
    _, found = read_blocks(Source("a.sheet.md", text), 0, MemoryWorld())
    return [f"{f.line}:{f.column} {f.slug}" for f in found]


def lost(text: str) -> list[tuple[str, ...]]:
    blocks, _ = read_blocks(Source("a.sheet.md", text), 0, MemoryWorld())
    statements = [s for b in blocks if isinstance(b, Formulas) for s in b.statements]
    assert all(isinstance(s, Faulty) for s in statements)
    return [(*s.names, *(s.criterion or ())) for s in statements if isinstance(s, Faulty)]


@pytest.mark.parametrize(
    ("text", "place"),
    [
        ("The load is\n    P = 20 kN\n", "2:5"),
        ("The load is\n\tP = 20 kN\n", "2:2"),
        ("The load is\n  \tP = 20 kN\n", "2:4"),
        ("The load is\n    and so on\n", "2:5"),  # no statement, but where formula lines stand
        ("> quoted\n    P = 20 kN\n", "2:5"),
        ("Loads\n    P = 20 kN\n=====\n", "2:5"),
    ],
)
def test_an_indented_line_below_a_paragraph(text: str, place: str) -> None:
    assert wrong(text) == [f"{place} swallowed-formula"]


def test_the_mend_below_a_paragraph_is_an_empty_line() -> None:
    _, found = read_blocks(Source("a", "The load is\n    P = 20 kN\n"), 0, MemoryWorld())
    assert "leave an empty line above" in found[0].help
    assert wrong("The load is\n\n    P = 20 kN\n") == []


@pytest.mark.parametrize("gap", ["", "\n"])
@pytest.mark.parametrize("item", ["- item", "* item", "1. item", "- item\n  - inner"])
def test_an_indented_formula_below_a_list(item: str, gap: str) -> None:
    text = f"{item}\n{gap}    P = 20 kN\n"
    _, found = read_blocks(Source("a", text), 0, MemoryWorld())
    assert [(f.slug, f.column) for f in found] == [("swallowed-formula", 5)]
    assert "a line of text at the margin between" in found[0].help


def test_wrapped_text_of_a_list_is_ordinary() -> None:
    assert wrong("- a long item that\n    goes on here\n\n    and has a second paragraph\n") == []


@pytest.mark.parametrize(
    ("text", "place"),
    [
        ("P = 20 kN", "1:1"),
        ("   P = 20 kN", "1:4"),
        ("The load is\nP_Ed = 1.35*P  -- factored [ec0]\nas said", "2:1"),
        ("strength bending: M_Ed <= M_Rd", "1:1"),
        ("use section IPE 300 as b", "1:1"),
        ("beam B1 over x from 0 m to L", "1:1"),
        ("solve for R_A", "1:1"),
        ("- P = 20 kN", "1:3"),
        ("- item\nP = 20 kN", "2:1"),
        ("1. item\n   P = 20 kN", "2:4"),
        ("> P = 20 kN", "1:3"),
        ("P = 20 kN\\\nL = 6 m", "1:1"),
    ],
)
def test_a_line_of_prose_that_is_a_statement(text: str, place: str) -> None:
    assert wrong(text) == [f"{place} formula-in-prose"]


@pytest.mark.parametrize(
    "text",
    [
        "With P = 20 kN the beam holds.",
        "`P = 20 kN`",
        "as in `\nP = 20 kN\n`",
        "as in ``a ` b\nP = 20 kN\n``",
        "use the right section",
        "The beam stands over the slip.",
        "P = 20 kN\n---",  # a heading
        "```\nP = 20 kN\n```",
        "| P = 20 kN |\n|---|",
        "-> see there",
    ],
)
def test_ordinary_prose_is_left_alone(text: str) -> None:
    assert wrong(text) == []


def test_backticks_that_do_not_pair_hide_nothing() -> None:
    assert wrong("a ` b\nP = 20 kN") == ["2:1 formula-in-prose"]
    assert wrong("a \\` b\nP = 20 kN\n` c") == ["2:1 formula-in-prose"]


@pytest.mark.parametrize(
    ("text", "place"),
    [
        ("- item\n\n      P = 20 kN\n", "3:7"),
        ("-     P = 20 kN\n", "1:7"),
        (">     P = 20 kN\n", "1:7"),
        ("> - a\n>\n>       P = 20 kN\n", "3:9"),
    ],
)
def test_a_formula_block_inside_a_list_or_a_quotation(text: str, place: str) -> None:
    assert wrong(text) == [f"{place} nested-formula"]


def test_lines_that_follow_one_another_are_one_finding() -> None:
    text = "Loads\n    P = 20 kN\n    L = 6 m\n    M = P*L/4\n"
    _, found = read_blocks(Source("a", text), 0, MemoryWorld())
    assert [(f.slug, f.line, f.label) for f in found] == [("swallowed-formula", 2, "and the 2 lines below")]
    assert wrong("P = 20 kN\nL = 6 m\n\nM = P*L/4\n") == ["1:1 formula-in-prose", "4:1 formula-in-prose"]


def test_what_the_lines_would_have_defined_is_kept() -> None:
    text = (
        "Loads\n    P = 20 kN\n    strength rod: P <= P_Rd\n\n- item\n\n      L = 6 m\n\nM = P*L\nand so on\n"
    )
    assert lost(text) == [("P",), ("strength", "rod"), ("L",), ("M",)]
    assert lost("Loads\n    P = 20 kN\n===") == [("P",)]
    assert lost("The load is\n    and so on\n") == []
    assert lost("> P = 20 kN\n") == [("P",)]


def test_a_block_in_a_quotation_says_what_it_would_have_defined() -> None:
    assert lost("> quoted\n>\n>     P = 20 kN -- load [k]\n>     M(x) = P*x\n") == [("P",), ("M",)]


def test_what_misplaced_lines_would_have_defined_names_the_line_of_the_finding() -> None:
    for text, line in (
        ("The load is\n    P = 20 kN\n    Q = 3 kN\n", 2),
        ("- item\n\n      P = 20 kN\n      Q = 3 kN\n", 3),
        ("> quoted\n>\n>     P = 20 kN\n>     Q = 3 kN\n", 3),
        ("P = 20 kN\nQ = 3 kN\n", 1),
    ):
        source = Source("a.sheet.md", text)
        blocks, found = read_blocks(source, 0, MemoryWorld())
        formulas = [block for block in blocks if isinstance(block, Formulas)]
        statements = [s for block in formulas for s in block.statements if isinstance(s, Faulty)]
        assert [s.names for s in statements] == [("P",), ("Q",)]
        assert {source.line_number(s.trouble.start) for s in statements} == {line} == {f.line for f in found}


def test_a_misplaced_check_still_counts_as_using_its_names() -> None:
    blocks, _ = read_blocks(Source("a.sheet.md", "check: a = b within 2\n"), 0, MemoryWorld())
    (statement,) = (s for b in blocks if isinstance(b, Formulas) for s in b.statements)
    assert isinstance(statement, Faulty) and statement.text == "check: a = b within 2"

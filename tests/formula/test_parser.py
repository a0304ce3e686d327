"""Statements: which one a line is, its parts and places, and what becomes of a line that cannot be read."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from loadpath.findings import Finding
from loadpath.formula.parser import LONGEST_STATEMENT, is_statement, parse_block
from loadpath.formula.statements import (
    AskedUnit,
    Check,
    Choice,
    Criterion,
    Definition,
    Faulty,
    FunctionDefinition,
    Parameter,
    Statement,
    Validity,
)
from loadpath.formula.tree import Branch, Cases, Logic, Name, Number, Relation
from loadpath.text import Source, Span

ID = pytest.mark.parametrize


def parse(*lines: str) -> tuple[Source, tuple[Statement, ...], tuple[Finding, ...]]:
    source = Source("", "\n".join("    " + line for line in lines))
    return source, *parse_block(source, Span(0, len(source.text)))


def only(*lines: str) -> Statement:
    _, (statement,), found = parse(*lines)
    assert found == ()
    return statement


def refused(*lines: str) -> tuple[Faulty, Finding]:
    _, statements, (found,) = parse(*lines)
    (faulty,) = (s for s in statements if isinstance(s, Faulty))
    assert found.help
    return faulty, found


# --- what each line is --------------------------------------------------------------------------------------


def test_a_definition() -> None:
    source, (statement,), _ = parse("σ_Ed [MPa] = M/W  -- bending stress [ec3]")
    assert isinstance(statement, Definition)
    assert (statement.name, source.cut(statement.name_span)) == ("sigma_Ed", "σ_Ed")
    assert statement.unit == AskedUnit("MPa") and source.cut(statement.unit.span) == "MPa"
    assert [note.text for note in statement.notes] == ["bending stress [ec3]"]
    assert source.cut(statement.span) == source.text.strip()


@ID("unit", ["1", "%", "deg", "ft-in 1/16", "kN*m"])
def test_asked_units(unit: str) -> None:
    statement = only(f"a [ {unit} ] = b")
    assert isinstance(statement, Definition) and statement.unit == AskedUnit(unit)


def test_a_choice() -> None:
    statement = only('curve = "b" of "a", "b", "c d"')
    assert isinstance(statement, Choice)
    assert (statement.word, statement.options) == ("b", ("a", "b", "c d"))


def test_a_function() -> None:
    statement = only("M(x [m], n) [kN*m] = R*x*n")
    assert isinstance(statement, FunctionDefinition)
    assert statement.parameters == (Parameter("x", AskedUnit("m")), Parameter("n", None))
    assert statement.unit == AskedUnit("kN*m")


@ID(
    ("line", "kind", "name"),
    [
        ("strength: s <= f", "strength", ""),
        ("strength bending: s <= f", "strength", "bending"),
        ("stiffness : s <= f", "stiffness", ""),
        ("stability lower-flange_2: s <= f", "stability", "lower-flange_2"),
        ("limit wall of the lug: t >= 6 mm", "limit", "wall of the lug"),
    ],
)
def test_criteria(line: str, kind: str, name: str) -> None:
    statement = only(line)
    assert isinstance(statement, Criterion)
    assert (statement.kind, statement.name) == (kind, name)


def test_an_excluded_band_and_a_chain() -> None:
    band, chain = only("limit: n <= 3 or n >= 5"), only("limit: 1 <= n < 2")
    assert isinstance(band, Criterion) and isinstance(band.relation, Logic)
    assert isinstance(chain, Criterion) and chain.relation == Relation(
        (Number("1"), Name("n"), Number("2")), ("<=", "<")
    )


def test_a_validity_and_a_check() -> None:
    validity, check = only("valid: 3 <= t/d and t > a for chi, F_cr"), only("check: a = b within 2 mm")
    assert isinstance(validity, Validity) and [name for name, _ in validity.names] == ["chi", "F_cr"]
    assert isinstance(check, Check) and check.relation.signs == ("=",)


def test_cases() -> None:
    statement = only("f = cases", "    a  when r <= 2", "        and r > 1", "    b  otherwise")
    assert isinstance(statement, Definition) and isinstance(statement.value, Cases)
    first, last = statement.value.branches
    assert isinstance(first.condition, Logic)
    assert last == Branch(Name("b"), None)


def test_a_formula_goes_on_on_deeper_lines() -> None:
    deeper, one_line = only("a = b", "      + c -- why"), only("a = b + c -- why")
    assert isinstance(deeper, Definition) and isinstance(one_line, Definition)
    assert (deeper.value, deeper.notes) == (one_line.value, one_line.notes)


@ID("word", ["strength", "limit", "stiffness", "stability", "valid", "check"])
def test_a_word_that_only_begins_statements_may_be_a_name(word: str) -> None:
    statement = only(f"{word} [1] = 2")
    assert isinstance(statement, Definition) and statement.name == word


# --- what a line is not -------------------------------------------------------------------------------------


@ID(
    ("line", "slug", "place"),
    [
        ("12 = a", "bad-syntax", "1"),
        ("a.b = 3", "bad-syntax", "a.b"),
        ("a = ", "bad-syntax", "="),
        ("a := 3", "bad-syntax", ":="),
        ("a MPa = 3", "bad-syntax", "M"),
        ("a <= 3", "no-relation", "<"),
        ("The rod is in tension", "bad-syntax", "r"),
        ("P: 20 kN", "bad-syntax", "P"),
        ("sqrt = 3", "reserved-word", "sqrt"),
        ("over = 3", "reserved-word", "over"),
        ("use = 3", "reserved-word", "use"),
        ("when(x) = x", "reserved-word", "when"),
        ("sqrt(x) = x", "reserved-word", "sqrt"),
        ("M(when) = x", "reserved-word", "when"),
        ("M(x, x) = x", "defined-twice", "x"),
        ("M(x.y) = x", "bad-syntax", "x.y"),
        ("M(2)", "bad-syntax", "M"),
        ('a [m] = "b" of "b"', "unit-mismatch", "m"),
        ('a = "b"', "bad-syntax", '"b"'),
        ('a = "b" of b', "bad-syntax", "b"),
        ('a = "b', "bad-syntax", '"'),
        ("strength a <= b", "bad-syntax", "a"),
        ("strength:", "no-relation", "strength"),
        ("strength: a = b", "no-relation", "="),
        ("strength: a/b", "no-relation", "a/b"),
        ("strength: a < b > c", "bad-syntax", ">"),
        ("strength: a < b < c < d", "bad-syntax", "<"),
        ("strength: a < b and b < c", "bad-syntax", "and"),
        ("strength: a < b or b < c or c < d", "bad-syntax", "or"),
        ("strength: a =< b", "bad-syntax", "=<"),
        ("stregth: a < b", "bad-syntax", "stregth"),
        ("valid: a < b", "bad-syntax", "valid"),
        ("valid: for a", "reserved-word", "for"),
        ("check: a = b", "bad-syntax", "check"),
        ("check: a <= b within 2", "no-relation", "<="),
        ("check: a == b within 2", "bad-syntax", "=="),
        ("f = cases", "stray-line", "cases"),
        ("use section IPE 300 as b", "not-available", "use"),
        ("-- a note alone", "bad-syntax", "a note alone"),
        ("a = b[k]", "bad-syntax", "["),
    ],
)
def test_lines_that_cannot_be_read(line: str, slug: str, place: str) -> None:
    _, finding = refused(line)
    assert finding.slug == slug
    assert finding.span is not None and finding.source.cut(finding.span) == place


def test_one_bad_line_leaves_the_others() -> None:
    _, statements, found = parse("a = 1", "b = 2 +", "c = 3")
    assert [type(s).__name__ for s in statements] == ["Definition", "Faulty", "Definition"]
    assert len(found) == 1


@ID(
    ("line", "names", "criterion"),
    [
        ("a = 2 +", ("a",), None),
        ("σ_b [MPa = 2", ("sigma_b",), None),
        ("a MPa = 2", ("a",), None),
        ("a := 2", ("a",), None),
        ("P: 20 kN", ("P",), None),
        ("M(x) = x +", ("M",), None),
        ("over = 3", ("over",), None),
        ("use section IPE 300 as b", ("b",), None),
        ("take R_A from hoist-beam as P", ("P",), None),
        ("solve for R_A [kN], R_B [kN]", ("solve", "R_A", "R_B"), None),
        ("strength rod: a", (), ("strength", "rod")),
        ("strengh lower flange: a <= b", (), ("strength", "lower flange")),
        ("stability a <= b", (), ("stability", "")),
        ("valid: a < b", (), None),
    ],
)
def test_what_a_bad_line_would_have_defined(line: str, names: tuple[str, ...], criterion: object) -> None:
    faulty, finding = refused(line)
    assert set(names) - {"solve"} <= set(faulty.names)
    assert faulty.criterion == criterion
    assert faulty.trouble == finding.span
    assert faulty.text.strip() == line


def test_a_line_indented_by_accident() -> None:
    faulty, finding = refused("P = 20 kN", "  A [mm^2] = 400 mm^2")
    assert finding.slug == "stray-line" and finding.line == 2
    assert faulty.names == ("P", "A")


@ID(
    "lines",
    [
        ("a = b", "  + c"),
        ("check:", "  a = b within 2"),
        ("a =", "  b"),
        ("strength: a", "  <= b"),
    ],
)
def test_deeper_lines_that_go_on(lines: tuple[str, str]) -> None:
    only(*lines)


def test_a_statement_among_branches_was_indented_by_accident() -> None:
    _, finding = refused("f = cases", "    a  when r <= 2", "    g = 3")
    assert (finding.slug, finding.line) == ("stray-line", 3)


def test_otherwise_comes_last() -> None:
    _, finding = refused("f = cases", "    a  otherwise", "    b  when r <= 2")
    assert (finding.slug, finding.line) == ("bad-syntax", 2)


def test_a_statement_that_is_too_long() -> None:
    _, finding = refused("a = " + "b + " * (LONGEST_STATEMENT // 4) + "b")
    assert finding.slug == "over-limit"


# --- prose --------------------------------------------------------------------------------------------------


@ID(
    "line",
    [
        "sigma = P/A",
        "sigma [MPa] = P/A",
        "strength: a <= b",
        "M(x) = R*x",
        "use section IPE 300 as b",
        "beam B1 over x from 0 m to L",
        "solve for R_A, R_B",
        "take R_A from hoist-beam as P",
        "check: a = b within 2",
    ],
)
def test_lines_of_prose_that_are_statements(line: str) -> None:
    assert is_statement(line)


@ID(
    "line",
    [
        "The rod is in tension.",
        "We use the section as it is",
        "so that a = b holds",
        "The stress must be < 20 MPa",
        "strengh: a <= b",
        "a => b",
        "`a = b`",
        "use it",
        "",
    ],
)
def test_lines_of_prose_that_are_none(line: str) -> None:
    assert not is_statement(line)


# --- anything -----------------------------------------------------------------------------------------------

WORDS = (
    'a b strength valid check cases when otherwise use for within or and of as = <= < >= > ( ) [ ] " '
    ": , + - * / ^ 12 0.5 kN mm^2 1/2 in -- [k] é σ ² ×"
)
words = st.sampled_from([*WORDS.split(), "\n", "\n    ", "\n\t", "  "])


@given(st.lists(words, max_size=14).map(" ".join))
def test_parsing_always_succeeds(text: str) -> None:
    """Every line becomes a statement, and each that cannot be read has one finding within it."""
    source = Source("", "\n".join("    " + line for line in text.split("\n")))
    statements, found = parse_block(source, Span(0, len(source.text)))
    assert sum(isinstance(s, Faulty) for s in statements) == len(found)
    for finding in found:
        assert finding.span is not None and finding.help
        assert 0 <= finding.span.start <= finding.span.end <= len(source.text)
    starts = [s.span.start for s in statements]
    assert starts == sorted(starts)

"""Statements about several names or expressions, and cells of columns: what is read, and exactly where."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from hypothesis import given
from hypothesis import strategies as st
from trees import trees

from loadpath.findings import Finding
from loadpath.formula.canonical import statement_text, text
from loadpath.formula.lines import Item
from loadpath.formula.parser import is_statement, parse_block
from loadpath.formula.reader import Reader
from loadpath.formula.several import MOST_CURVES, MOST_STEPS, MOST_UNKNOWNS
from loadpath.formula.statements import (
    Criterion,
    Definition,
    Faulty,
    Plot,
    Solution,
    Statement,
    Tabulate,
    Unknown,
)
from loadpath.formula.tree import (
    At,
    Binary,
    Call,
    Name,
    Negative,
    Node,
    Number,
    Relation,
    Word,
    span_of,
    walk,
)
from loadpath.text import Source, Span


def block(*lines: str) -> Source:
    return Source("", "\n".join("    " + line for line in lines))


def parsed(*lines: str) -> tuple[Source, tuple[Statement, ...], tuple[Finding, ...]]:
    source = block(*lines)
    return source, *parse_block(source, Span(0, len(source.text)))


def read(*lines: str) -> tuple[Source, tuple[Statement, ...]]:
    source, statements, findings = parsed(*lines)
    assert findings == ()
    return source, statements


def the_mistake(*lines: str) -> tuple[str, str, Finding]:
    """Slug and place of the one finding."""
    source, statements, findings = parsed(*lines)
    assert len(findings) == 1 and isinstance(statements[0], Faulty)
    assert findings[0].span is not None
    return findings[0].slug, source.cut(findings[0].span), findings[0]


# --- unknowns -----------------------------------------------------------------------------------------------


def test_unknowns_are_a_statement_each() -> None:
    source, found = read("unknown C_1 [rad], σ_0 [ kN/m^2 ], n [1]   -- constants [ec3]", "x = 2")
    unknowns = [each for each in found if isinstance(each, Unknown)]
    assert len(found) == 4 and len(unknowns) == 3
    assert [each.name for each in unknowns] == ["C_1", "sigma_0", "n"]
    assert [source.cut(each.name_span) for each in unknowns] == ["C_1", "σ_0", "n"]
    assert [each.unit.text for each in unknowns] == ["rad", "kN/m^2", "1"]
    assert [source.cut(each.unit.span) for each in unknowns] == ["rad", "kN/m^2", "1"]
    assert source.cut(unknowns[0].span).startswith("unknown C_1") and source.cut(unknowns[0].span)[-1] == "]"
    assert [source.cut(each.span) for each in unknowns[1:]] == ["σ_0", "n"]
    assert all(note.citations[0][0] == "ec3" for each in unknowns for note in each.notes)


@pytest.mark.parametrize(
    ("typed", "slug", "place"),
    [
        ("unknown C_1", "bad-syntax", "C_1"),
        ("unknown C_1 [rad], C_2", "bad-syntax", "C_2"),
        ("unknown C_1 [rad] C_2 [mm]", "bad-syntax", "C_2"),
        ("unknown b.C [mm]", "bad-syntax", "b.C"),
        ("unknown sin [1]", "reserved-word", "sin"),
        ("unknown from [mm]", "reserved-word", "from"),
        ("unknown C_1 []", "bad-unit", "]"),
        ("unknown C_1 [mm", "unbalanced-bracket", "["),
        ("unknown C_1 [mm] = 3 mm", "bad-syntax", "="),
        ("unknown = 3 mm", "reserved-word", "unknown"),
        ("unknown [mm] = 3 mm", "reserved-word", "unknown"),
    ],
)
def test_mistakes_in_unknowns(typed: str, slug: str, place: str) -> None:
    assert the_mistake(typed)[:2] == (slug, place)


# --- equations ----------------------------------------------------------------------------------------------


def test_a_solve_is_a_statement_for_each_unknown() -> None:
    source, found = read(
        "solve for R_A [kN], e between -L/2 and f(b), R_B [kN] between 0 kN and P   -- reactions [tackle]",
        "    R_A + R_B = P                  -- up and down [draw]",
        "    R_B*L =",
        "        P*a                        -- about A",
        "    e = 2 mm",
    )
    a, e, b = found
    assert isinstance(a, Solution) and isinstance(e, Solution) and isinstance(b, Solution)
    assert [each.name for each in (a, e, b)] == ["R_A", "e", "R_B"]
    assert [each.is_last for each in (a, e, b)] == [False, False, True]
    assert a.together is e.together is b.together
    assert [source.cut(each.sought.span) for each in (a, e, b)] == ["R_A", "e", "R_B"]
    assert [each.sought.unit and each.sought.unit.text for each in (a, e, b)] == ["kN", None, "kN"]
    assert [(each.sought.low is None, each.sought.high is None) for each in (a, e, b)] == [
        (True, True), (False, False), (False, False),
    ]  # fmt: skip
    assert e.sought.low is not None and source.cut(span_of(e.sought.low)) == "-L/2"
    assert e.sought.high is not None and source.cut(span_of(e.sought.high)) == "f(b)"
    assert [text(each) for each in a.together.equations] == ["R_A + R_B = P", "R_B*L = P*a", "e = 2 mm"]
    assert source.cut(a.together.equations[0].span) == "R_A + R_B = P"
    assert [source.cut(each.at[0]) for each in a.together.equations] == ["=", "=", "="]
    assert [[note.text for note in notes] for notes in a.together.notes] == [
        ["up and down [draw]"], ["about A"], [],
    ]  # fmt: skip
    assert source.cut(a.together.span).startswith("solve for R_A") and "\n" not in source.cut(a.together.span)
    assert source.cut(a.span).startswith("solve for") and source.cut(a.span).endswith("e = 2 mm")
    assert [source.cut(each.span) for each in (e, b)] == ["e", "R_B"]


@pytest.mark.parametrize(
    ("lines", "slug", "place"),
    [
        (("solve for R [kN]",), "stray-line", "solve"),
        (("solve R [kN]", "    R = P"), "bad-syntax", "solve"),
        (("solve for", "    R = P"), "bad-syntax", "r"),
        (("solve for R [kN] Q [kN]", "    R = P", "    Q = P"), "bad-syntax", "Q"),
        (("solve for R [kN], R [kN]", "    R = P", "    R = 2*P"), "defined-twice", "R"),
        (("solve for b.R [kN]", "    b.R = P"), "bad-syntax", "b.R"),
        (("solve for max [kN]", "    max = P"), "reserved-word", "max"),
        (("solve for R [kN] between 0 kN, 3 kN", "    R = P"), "bad-syntax", ","),
        (("solve for R [kN] between 0 kN", "    R = P"), "bad-syntax", "N"),
        (("solve for R [kN]", "    R <= P"), "bad-syntax", "<="),
        (("solve for R [kN]", "    R = P = Q"), "bad-syntax", "="),
        (("solve for R [kN]", "    R + P"), "bad-syntax", "R + P"),
        (("solve for R [kN]", "    R == P"), "bad-syntax", "=="),
        (("solve for R [kN]", "    R = P and Q = P"), "bad-syntax", "and"),
        (("solve for R [kN]", "    R [kN] = P"), "bad-syntax", "["),
        (("solve for R [kN]", "    R ="), "bad-syntax", "="),
        (("solve = 3 kN",), "reserved-word", "solve"),
    ],
)
def test_mistakes_in_equations(lines: tuple[str, ...], slug: str, place: str) -> None:
    assert the_mistake(*lines)[:2] == (slug, place)


def test_a_faulty_solve_keeps_its_names() -> None:
    """So that what hangs on them is not computed because of this line, rather than unknown."""
    _, statements, _ = parsed("solve for R_A [kN] between 0 kN and P, R_B", "    R_A <= R_B", "x = R_A")
    assert isinstance(statements[0], Faulty)
    assert statements[0].names == ("R_A", "R_B")


def test_equations_at_the_level_of_solve_are_one_finding() -> None:
    _, statements, findings = parsed("solve for R [kN], Q [kN]", "R + Q = 3 kN", "R - Q = 1 kN")
    assert [finding.slug for finding in findings] == ["stray-line"]
    assert not any(isinstance(each, Solution) for each in statements)


# --- plots and tables of values -----------------------------------------------------------------------------


def test_a_plot_is_read_in_its_parts() -> None:
    source, (plot,) = read(
        "plot V(x), 2*M(x)/L,", "        a for ξ from -L/2 to L at k + 1 mm   -- shape [draw]"
    )
    assert isinstance(plot, Plot)
    assert [source.cut(span_of(curve)) for curve in plot.curves] == ["V(x)", "2*M(x)/L", "a"]
    assert (plot.variable, source.cut(plot.variable_span)) == ("xi", "ξ")
    assert (source.cut(span_of(plot.low)), source.cut(span_of(plot.high))) == ("-L/2", "L at k + 1 mm")
    assert isinstance(plot.low, Binary) and isinstance(plot.high, Binary)
    assert [note.text for note in plot.notes] == ["shape [draw]"]
    assert source.cut(plot.span).endswith("shape [draw]")


@pytest.mark.parametrize(
    ("end", "steps"), [(", 10 steps", 10), (" 10 steps", 10), (", 1 step", 1), (", 5_0  steps", 50)]
)
def test_a_table_of_values_is_read_in_its_parts(end: str, steps: int) -> None:
    source, (table,) = read(f"tabulate M(x), v(x) for x from 0 m to L{end}")
    assert isinstance(table, Tabulate)
    assert table.steps == steps
    assert [source.cut(span_of(each)) for each in (*table.curves, table.low, table.high)] == [
        "M(x)", "v(x)", "0 m", "L",
    ]  # fmt: skip
    assert source.cut(table.variable_span) == "x"


@pytest.mark.parametrize(
    ("typed", "slug", "place"),
    [
        ("plot V(x)", "bad-syntax", ")"),
        ("plot V(x) for x", "bad-syntax", "x"),
        ("plot V(x) for x from 0 m", "bad-syntax", "m"),
        ("plot V(x) for x from 0 m to", "bad-syntax", "o"),
        ("plot V(x) for 2 from 0 m to L", "bad-syntax", "2"),
        ("plot V(x) for at from 0 m to L", "reserved-word", "at"),
        ("plot V(x) for b.x from 0 m to L", "bad-syntax", "b.x"),
        ("plot V(x) M(x) for x from 0 m to L", "implied-multiplication", "M"),
        ("plot V(x) for x from 0 m to L, 10 steps", "bad-syntax", ","),
        ("plot V(x) = 3", "bad-syntax", "="),
        ("plot = 3", "reserved-word", "plot"),
        ("tabulate V(x) for x from 0 m to L", "bad-syntax", "L"),
        ("tabulate V(x) for x from 0 m to L, 10", "bad-syntax", "1"),
        ("tabulate V(x) for x from 0 m to L, n steps", "bad-syntax", "n"),
        ("tabulate V(x) for x from 0 m to L, 2.5 steps", "bad-syntax", "2"),
        ("tabulate V(x) for x from 0 m to L, 0 steps", "over-limit", "0 steps"),
        ("tabulate V(x) for x from 0 m to L, 501 steps", "over-limit", "501 steps"),
        ("tabulate V(x) for x from 0 m to L, 9999999999999999 steps", "over-limit", "9999999999999999 steps"),
    ],
)
def test_mistakes_in_plots_and_tables_of_values(typed: str, slug: str, place: str) -> None:
    assert the_mistake(typed)[:2] == (slug, place)


LARGEST: list[tuple[int, Callable[[int], tuple[str, ...]]]] = [
    (MOST_CURVES, lambda n: ("plot " + ", ".join(f"f_{i}(x)" for i in range(n)) + " for x from 0 to 1",)),
    (MOST_UNKNOWNS, lambda n: ("unknown " + ", ".join(f"C_{i} [m]" for i in range(n)),)),
    (MOST_UNKNOWNS, lambda n: (
        "solve for " + ", ".join(f"C_{i} [m]" for i in range(n)), *(f"    C_{i} = 2 m" for i in range(n))
    )),
    (MOST_STEPS, lambda n: (f"tabulate x for x from 0 to 1, {n} steps",)),
]  # fmt: skip


@pytest.mark.parametrize(("most", "lines"), LARGEST)
def test_the_limits_hold_to_the_last_one(most: int, lines: Callable[[int], tuple[str, ...]]) -> None:
    assert parsed(*lines(most))[2] == ()
    assert the_mistake(*lines(most + 1))[0] == "over-limit"


@pytest.mark.parametrize(
    ("line", "says"),
    [
        ("plot V(x) for x from 0 m to L", True),
        ("tabulate V(x) for x from 0 m to L, 3 steps", True),
        ("solve for R [kN]", True),
        ("We plot V over the length of the beam.", False),
        ("Plot what you like for your own use.", False),
        ("unknown to us, the beam is cracked", False),
    ],
)
def test_lines_of_prose_that_are_statements(line: str, says: bool) -> None:
    assert is_statement(line) == says


# --- cells --------------------------------------------------------------------------------------------------


def value_of(typed: str) -> tuple[Source, Node]:
    source, (statement,) = read(f"x = {typed}")
    assert isinstance(statement, Definition)
    return source, statement.value


def test_at_binds_tightest() -> None:
    b, w = Name("t.b"), Word("w")
    cell = At(b, w)
    for typed, tree in {
        't.b at "w"': cell,
        '-t.b at "w"': Negative(cell),
        't.b at "w"^2': Binary("^", cell, Number("2")),
        '2^t.b at "w"': Binary("^", Number("2"), cell),
        't.b at "w"*t.b at k': Binary("*", cell, At(b, Name("k"))),
        'f(t.b at "w", t.b)': Call("f", (cell, b)),
        "t.b at c.k": At(b, Name("c.k")),
    }.items():
        assert value_of(typed)[1] == tree, typed


def test_a_cell_knows_its_place() -> None:
    source, value = value_of('2*plates.b at  "top flange" + σ at k')
    cells = [node for node in walk(value) if isinstance(node, At)]
    assert [source.cut(cell.span) for cell in cells] == ['plates.b at  "top flange"', "σ at k"]
    assert [source.cut(span_of(cell.row)) for cell in cells] == ['"top flange"', "k"]
    assert [source.cut(span_of(cell.operand)) for cell in cells] == ["plates.b", "σ"]
    assert cells[1].operand == Name("sigma")


@pytest.mark.parametrize(
    ("typed", "slug", "place"),
    [
        ("t.b at", "bad-syntax", "t"),
        ("t.b at 2", "bad-syntax", "2"),
        ("t.b at (k)", "bad-syntax", "("),
        ("t.b at top flange", "bad-syntax", "top"),
        ('t.b at "top', "bad-syntax", '"'),
        ('f(x) at "top"', "bad-syntax", "at"),
        ('(t.b*t.h) at "top"', "bad-syntax", "at"),
        ('t.b at "top" at "web"', "bad-syntax", "at"),
        ('3 at "top"', "bad-syntax", "at"),
    ],
)
def test_mistakes_in_cells(typed: str, slug: str, place: str) -> None:
    assert the_mistake(f"x = {typed}")[:2] == (slug, place)


def test_no_span_ends_in_blanks() -> None:
    """A caret line under a finding is as long as what it is about."""
    typed = 'a   + -b   *  f( c )  ^ -2   - t.b  at  "w"   / < x   - 2 mm  >^2   + ( d as  mm )'
    source, value = value_of(typed)
    for node in walk(value):
        assert isinstance(node, Node)
        cut = source.cut(span_of(node))
        assert cut and cut == cut.strip(), (node, cut)


def test_the_span_of_a_relation_ends_with_it() -> None:
    source, (statement,) = read("limit:   a  <=  -b   or   c  >  -d   -- note")
    assert isinstance(statement, Criterion)
    relations = [node for node in walk(statement.relation) if isinstance(node, Relation)]
    assert [source.cut(each.span) for each in relations] == ["a  <=  -b", "c  >  -d"]


# --- canonical text reads back ------------------------------------------------------------------------------

columns = st.sampled_from(["t.b", "A_i", "plates.I'"]).map(Name)
rows = st.sampled_from([Word("web"), Word("top flange"), Word("a | b"), Word(""), Name("k"), Name("c.k")])
cells = st.builds(At, columns, rows)
with_cells: st.SearchStrategy[Node] = st.recursive(
    cells | trees,
    lambda inner: st.one_of(
        st.builds(Negative, inner),
        st.builds(Binary, st.sampled_from(("+", "-", "*", "/", "^")), inner, inner),
        st.builds(lambda a, b: Call("max", (a, b)), inner, inner),
    ),
    max_leaves=6,
)


@given(with_cells)
def test_canonical_text_with_cells_reads_back_equal(tree: Node) -> None:
    reader = Reader(Item(text(tree), 0, ()))
    assert reader.expression() == tree
    assert reader.done()


names = st.sampled_from(["a", "R_A", "C_1'", "sigma_0", "w"])
units = st.sampled_from(["kN", "mm^2", "1", "%", "ft-in 1/16", "J/(kg*K)"])
sought = st.tuples(names, st.none() | units, st.none() | st.tuples(with_cells, with_cells))


def said(name: str, unit: str | None, bounds: tuple[Node, Node] | None) -> str:
    out = f"{name} [{unit}]" if unit else name
    return f"{out} between {text(bounds[0])} and {text(bounds[1])}" if bounds else out


def again(typed: str) -> tuple[Statement, ...]:
    """Statements of a canonical text, whose equations stand behind a colon."""
    head, colon, equations = typed.partition(": ")
    lines = [f"    {line}" for line in equations.split("; ")] if colon else []
    return read(head, *lines)[1]


def meaning(statement: Statement) -> object:
    """What a statement says, wherever it stands."""
    match statement:
        case Unknown(name=name, unit=unit):
            return name, unit
        case Solution(together=together):
            return together.sought, together.equations, statement.index
        case Tabulate(curves=curves, variable=variable, low=low, high=high, steps=steps):
            return curves, variable, low, high, steps
        case Plot(curves=curves, variable=variable, low=low, high=high):
            return curves, variable, low, high
    raise AssertionError(statement)


@given(st.lists(sought, min_size=1, max_size=3, unique_by=lambda s: s[0]), st.data())
def test_canonical_text_of_a_solve_reads_back(
    found: list[tuple[str, str | None, tuple[Node, Node] | None]], data: st.DataObject
) -> None:
    equations = data.draw(st.lists(st.tuples(with_cells, with_cells), min_size=1, max_size=3))
    head = "solve for " + ", ".join(said(*each) for each in found)
    _, statements = read(head, *(f"    {text(a)} = {text(b)}" for a, b in equations))
    assert len(statements) == len(found)
    for i, statement in enumerate(statements):
        assert isinstance(statement, Solution)
        assert [tuple(each.operands) for each in statement.together.equations] == equations
        bounds = found[i][2] or (None, None)
        assert (statement.sought.low, statement.sought.high) == bounds
        assert meaning(again(statement_text(statement))[i]) == meaning(statement)


@given(
    st.lists(with_cells, min_size=1, max_size=3),
    names,
    with_cells,
    with_cells,
    st.none() | st.integers(1, 500),
)
def test_canonical_text_of_a_plot_or_table_of_values_reads_back(
    curves: list[Node], variable: str, low: Node, high: Node, steps: int | None
) -> None:
    word, end = ("plot", "") if steps is None else ("tabulate", f",{steps} steps")
    listed = " , ".join(text(curve) for curve in curves)
    _, (statement,) = read(f"{word} {listed} for {variable} from {text(low)}  to {text(high)}{end}")
    expected = (tuple(curves), variable, low, high, *([steps] if steps else []))
    assert meaning(statement) == expected
    (once_more,) = again(statement_text(statement))
    assert type(once_more) is type(statement)
    assert meaning(once_more) == expected


@given(names, units)
def test_canonical_text_of_an_unknown_reads_back(name: str, unit: str) -> None:
    _, (statement,) = read(f"unknown  {name} [ {unit} ]")
    assert meaning(again(statement_text(statement))[0]) == meaning(statement)

"""Tables, columns, unknowns, solutions and figures in the document."""

from __future__ import annotations

from typing import Any

import pytest

from loadpath.document import Document, build
from loadpath.document.model import (
    ColumnBlock,
    CriterionBox,
    FaultyRow,
    JudgedRow,
    Line,
    PlotBlock,
    SolutionRow,
    TableBlock,
    UnknownRow,
)
from loadpath.formula.canonical import text
from loadpath.pipeline import audited
from loadpath.project import MemoryWorld
from loadpath.sheet import read_sheet
from loadpath.text import Source


def built(body: str, front: str = "") -> Document:
    sheet = f"---\ntitle: Girder\n{front}---\n\n{body}\n"
    return build(audited(read_sheet(Source("girder.sheet.md", sheet), MemoryWorld({}))), "9.9.9")


def block(document: Document, kind: type[Any], at: int = 0) -> Any:
    return [b for b in document.blocks if isinstance(b, kind)][at]


def said(line: Line) -> str:
    return "".join(p if isinstance(p, str) else text(p) for p in line.parts)


def table(rows: list[tuple[str, float, float]]) -> str:
    return "Table plates: the plates [s]\n\n| plate | b [mm] | h [mm] |\n|---|---|---|\n" + "".join(
        f"| {label} | {b} | {h} |\n" for label, b, h in rows
    )


SOURCES = "sources: {s: A source}\nassumptions: {A1: {text: Dry, confirm: true}}\n"
PLATES = table([("doubler", 180, 12), ("lower flange", 220, 20), ("web", 10, 400), ("upper flange", 300, 25)])


# --- tables and columns -------------------------------------------------------------------------------------


def test_a_table_of_data_brings_its_columns_with_it() -> None:
    document = built(PLATES + "\n    A = plates.b*plates.h -- area\n", SOURCES)
    found = block(document, TableBlock)
    assert (found.name, found.corner, found.labels) == (
        "plates", "plate", ("doubler", "lower flange", "web", "upper flange"),
    )  # fmt: skip
    assert [(c.head.number, c.name, c.unit) for c in found.columns] == [
        ("0.1a", "plates.b", "mm"), ("0.1b", "plates.h", "mm"),
    ]  # fmt: skip
    assert [cell.value.number for cell in found.columns[1].cells] == ["12", "20", "400", "25"]
    assert all(cell.typed is None for cell in found.columns[1].cells)
    assert not any(isinstance(b, TableBlock) for b in document.blocks[1:])


def test_a_cell_that_is_worked_out_shows_its_formula_and_its_value() -> None:
    head = "    P = 30 kN -- load [s]\n\nTable t: of loads [s]\n\n| row | F [kN] |\n|---|---|\n"
    body = head + "| a | 2*P |\n| b | 0 |\n"
    cells = block(built(body, SOURCES), TableBlock).columns[0].cells
    assert (text(cells[0].typed), cells[0].value.number) == ("2*P", "60.00")
    assert (cells[1].typed, cells[1].value.number) == (None, "0")


@pytest.mark.parametrize(
    ("which", "expected"),
    [
        ("plates.b/1", []),
        ("max(plates.b, 1 mm)", ["every row: max: governed by plates.b"]),
        (
            "min(plates.b, plates.h)",
            ["every row but web: min: governed by plates.h", "row web: min: governed by plates.b"],
        ),
        (
            "max(plates.h, 22 mm)",
            ["rows doubler, lower flange: max: governed by 22 mm",
             "rows web, upper flange: max: governed by plates.h"],
        ),
    ],
)  # fmt: skip
def test_what_is_said_of_rows_is_said_once(which: str, expected: list[str]) -> None:
    found = block(built(PLATES + f"\n    t = {which} -- thickness\n", SOURCES), ColumnBlock)
    assert sorted(said(line) for line in found.lines) == sorted(expected)
    assert [row.label for row in found.rows] == ["doubler", "lower flange", "web", "upper flange"]


def test_tables_stand_among_the_design_inputs_in_reading_order() -> None:
    document = built(f"    E = 210 GPa -- steel [s]\n\n{PLATES}\n    f = 3 mm -- gap [s]\n", SOURCES)
    entries = [
        (e.ref.name, e.value if isinstance(e.value, str) else e.value.number)
        for e in document.registers.inputs
    ]
    assert entries == [("E", "210"), ("table plates", "2 columns of 4 rows"), ("f", "3")]
    assert [r.number for r in document.registers.sources[0].cited_by] == ["0.1", "0.2", "0.3"], "no columns"


# --- judged row by row --------------------------------------------------------------------------------------


def test_every_row_of_a_criterion_is_judged_and_the_worst_governs() -> None:
    document = built(PLATES + "\n    strength thick: plates.h >= 20 mm -- [s]\n", SOURCES)
    box = block(document, CriterionBox)
    assert [(r.label, r.ratio, r.verdict, r.governs, r.strong) for r in box.rows] == [
        ("doubler", "1.667", "not satisfied", True, True),
        ("lower flange", "1.000", "satisfied", False, False),
        ("web", "0.050", "satisfied", False, False),
        ("upper flange", "0.800", "satisfied", False, False),
    ]
    assert (box.ratio, box.verdict) == ("1.667", "not satisfied")
    (entry,) = document.registers.criteria
    assert (entry.line.row, document.summary.listed[0].row) == ("doubler", "doubler")
    assert document.summary.governing[0].row == "doubler"


def test_rows_that_stand_against_use_are_strong_beside_the_one_that_governs() -> None:
    box = block(built(PLATES + "\n    limit h: plates.h >= 23 mm -- [s]\n", SOURCES), CriterionBox)
    assert [r.strong for r in box.rows] == [True, True, False, False]
    assert [r.governs for r in box.rows] == [True, False, False, False]


def test_a_criterion_of_one_value_has_no_row() -> None:
    document = built("    x = 3 mm -- x [s]\n    limit x: x <= 9 mm -- [s]\n", SOURCES)
    assert document.registers.criteria[0].line.row == ""


def test_no_row_of_a_validity_governs() -> None:
    found = block(
        built(PLATES + "\n    t = plates.h*2\n    valid: plates.h >= 20 mm for t\n", SOURCES), JudgedRow
    )
    assert not any(r.governs for r in found.rows)
    assert [r.strong for r in found.rows] == [True, False, False, False]


# --- algebra ------------------------------------------------------------------------------------------------

SYSTEM = """
    P = 30 kN -- load [s]
    L = 4 m -- span [s]
    solve for R_A [kN], R_B [kN]
        R_A + R_B = P
        R_B*L = P*(1 m)
    Q = R_A + R_B -- sum
"""


def test_the_equations_stand_on_the_first_unknown_and_the_proof_on_the_last() -> None:
    document = built(SYSTEM, SOURCES)
    first, last = block(document, SolutionRow), block(document, SolutionRow, 1)
    assert [text(e) for e in first.equations] == ["R_A + R_B = P", "R_B*L = P * 1 m"]
    assert first.method and not last.method and not last.equations
    assert not first.put_back
    assert [(text(p.equation), p.left.number, p.right.number, p.residual.number) for p in last.put_back] == [
        ("R_A + R_B = P", "30.0000", "30.0000", "0"), ("R_B*L = P * 1 m", "30.0000", "30.0000", "0"),
    ]  # fmt: skip


def test_what_the_equations_hang_on_is_listed_once() -> None:
    document = built(SYSTEM, SOURCES)
    first, last = block(document, SolutionRow), block(document, SolutionRow, 1)
    assert [r.name for r in first.head.feeds_from] == ["P", "L"]
    assert first.equations_at is None
    assert (last.head.feeds_from, last.equations_at.number) == ((), first.head.number)
    assert [r.name for r in last.head.used_in] == ["Q"]


def test_an_unknown_says_where_it_is_found() -> None:
    body = "    unknown R [kN] -- reaction\n    V(x [m]) [kN] = R - 2 kN/m * x\n"
    document = built(body + "    solve for R\n        V(2 m) = 0\n")
    found = block(document, UnknownRow)
    assert (found.name, found.unit, found.solved_in.number) == (
        "R",
        "kN",
        block(document, SolutionRow).head.number,
    )


CURVES = """
    L = 4 m -- span [s]
    M(x [m], w [kN/m]) [kN*m] = w*x*(L - x)/2
    N(x [m]) [kN*m] = (x - L/3)*(1 kN)
    w_1 = 2 kN/m -- load [s]
"""


def test_crumbs_of_rounding_are_zero_in_a_table_of_values() -> None:
    body = "    L = 4.2 m -- span [s]\n    f(x [m]) [m] = x - L/3 - L/3 - L/3\n"
    found = block(built(body + "    tabulate f(x) for x from 0 m to L, 3 steps\n", SOURCES), TableBlock)
    assert [[cell.number for cell in row] for row in found.body] == [
        ["0", "-4.200"], ["1.4", "-2.800"], ["2.8", "-1.400"], ["4.2", "0"],
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("plotted", "names"),
    [
        ("M(x, w_1), N(x)", ["M(x)", "N(x)"]),
        ("M(x, w_1), M(x, 2*w_1)", ["M(x, w_1)", "M(x, 2*w_1)"]),
        ("N(L - x)", ["N(L - x)"]),
    ],
)
def test_a_curve_is_named_shortly_where_no_other_is_the_same_function(plotted: str, names: list[str]) -> None:
    found = block(built(CURVES + f"    plot {plotted} for x from 0 m to L\n", SOURCES), PlotBlock)
    assert [curve.name for curve in found.picture.curves] == names
    assert said(found.caption) == f"{plotted} for x from 0 m to L"


def test_figures_are_numbered_with_the_images() -> None:
    plots = "    plot N(x) for x from 0 m to L\n    plot M(x, w_1) for x from 0 m to L\n"
    document = built(CURVES + plots, SOURCES)
    assert [f.number for f in document.figures] == [1, 2]


def test_a_column_that_cannot_be_read_leaves_the_others_in_their_table() -> None:
    body = (
        "Table t: of loads [s]\n\n| row | F [kN] | G [kN] | H [kN] |\n|---|---|---|---|\n| a | 1 |  | 3 |\n"
    )
    document = built(body, SOURCES)
    assert [c.name for c in block(document, TableBlock).columns] == ["t.F", "t.H"]
    assert block(document, FaultyRow).typed == "G [kN]"

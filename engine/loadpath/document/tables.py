"""Tables in a document: data as typed, results and criteria row by row, lists of values."""

from __future__ import annotations

import math
from collections import defaultdict
from typing import TYPE_CHECKING

from loadpath.document.model import (
    ColumnBlock,
    ColumnRow,
    Head,
    JudgedLine,
    Line,
    TableBlock,
    TableCell,
    TableColumn,
)
from loadpath.formula.names import plain_symbol
from loadpath.formula.statements import Column, Criterion, Definition, Plot, Table, Tabulate
from loadpath.formula.tree import Name, Node, Shown
from loadpath.trace import Curve, Step, texts
from loadpath.trace.digits import exact_digits, ratio_text
from loadpath.trace.file import verdict_words_of
from loadpath.units import Unit
from loadpath.units.printing import plain, unit_symbol

if TYPE_CHECKING:
    from loadpath.document.steps import StepWriter

NOTHING = 1e-12
"""A value below this share of the largest of its curve is zero."""
FEW = 2
"""So many rows are left out by name, where something is said of all others."""


def table_block(writer: StepWriter, step: Step, statement: Table, head: Head, index: int) -> TableBlock:
    """A table of data with its columns, which are the steps that follow it, within its lines."""
    if statement.two_way is not None:
        if step.why:
            return TableBlock(head, statement.name, statement.head, (), ())
        return _two_way(writer, statement, head)
    columns = []
    for place in range(index + 1, len(writer.trace.steps)):
        of = writer.trace.steps[place]
        if of.statement.span.start > statement.span.end:
            break
        if isinstance(of.statement, Column):  # one that could not be read is a row of its own
            columns.append(_column(writer, of, of.statement, place))
    return TableBlock(head, statement.name, statement.head, statement.labels, tuple(columns))


def _column(writer: StepWriter, step: Step, statement: Column, index: int) -> TableColumn:
    head = writer.head(step, tuple(writer.findings[index]))
    cells = tuple(_cell(step, statement, i) for i in range(len(statement.cells)))
    return TableColumn(head, statement.name, _unit(step.unit), cells)


def _cell(step: Step, statement: Column, row: int) -> TableCell:
    tree = statement.cells[row]
    if row >= len(step.rows):
        return TableCell(tree, None)
    shown, operand = texts.row_shown(step, row), texts.row_operand(step, row)
    typed = None if operand is not None and operand.typed else tree
    return TableCell(typed, _without_unit(shown) if shown else None)


def _without_unit(shown: Shown) -> Shown:
    """The number alone: the unit stands in the header."""
    return Shown(shown.number, "", shown.word)


def _unit(unit: Unit) -> str:
    return unit_symbol("in" if unit.text.startswith("ft-in") else unit.text) if unit.text else ""


def _two_way(writer: StepWriter, statement: Table, head: Head) -> TableBlock:
    table = statement.two_way
    assert table is not None

    def put(node: Node) -> Shown:
        return writer.typed_value(node)

    labels = tuple(put(node) for node in table.down)
    body = tuple(tuple(put(cell) for cell in row) for row in table.cells)
    return TableBlock(
        head, statement.name, statement.head, labels, (), tuple(put(node) for node in table.across), body
    )


# --- row by row ---------------------------------------------------------------------------------------------


def column_block(writer: StepWriter, step: Step, statement: Definition, head: Head) -> ColumnBlock:
    """A result that goes over the rows of a table."""
    working = step.working
    sides: tuple[Node, ...] = (statement.value,)
    lines: tuple[Line, ...] = ()
    if working is not None and working.typed is not None:
        sides, lines = (working.typed, working.tree), writer.lines(working)
    rows = tuple(_row(writer, step, i) for i in range(len(step.rows)))
    already = {line.parts for line in lines}
    said = tuple(line for line in said_of_rows(writer, step) if line.parts[1:] not in already)
    return ColumnBlock(head, Name(statement.name), sides, rows, (*lines, *said))


def _row(writer: StepWriter, step: Step, index: int) -> ColumnRow:
    row, put = step.rows[index], texts.row_substitution(writer.trace, step, index)
    shown = texts.row_shown(step, index)
    assert shown is not None and row.working is not None
    sides: tuple[Node, ...] = (put.tree,) if put is not None and not isinstance(put.tree, Shown) else ()
    calls = writer.calls(row.working)
    if row.working.look is not None:
        sides, calls = (*calls[0].sides, calls[0].call)[:1], ()
    return ColumnRow(row.label, sides, shown, put.closes if put else True, calls)


def said_of_rows(writer: StepWriter, step: Step) -> tuple[Line, ...]:
    """What is said beneath the rows, each thing once: `web, doubler: min: governed by h`."""
    said: dict[Line, list[int]] = defaultdict(list)
    for i, row in enumerate(step.rows):
        put = texts.row_substitution(writer.trace, step, i)
        if row.working is not None:
            looked = writer.calls(row.working)[0].conditions if row.working.look is not None else ()
            for line in dict.fromkeys((*writer.lines(row.working), *writer.further_digits(put), *looked)):
                said[line].append(i)
    labels = [row.label for row in step.rows]
    return tuple(Line((_rows(labels, of), *line.parts)) for line, of in said.items())


def _rows(labels: list[str], of: list[int]) -> str:
    """The rows that something is said of, in words."""
    if len(of) == len(labels) > 1:
        return "every row: "
    if len(of) > FEW and len(labels) - len(of) <= FEW:
        others = (label for i, label in enumerate(labels) if i not in of)
        return f"every row but {', '.join(others)}: "
    return f"row{'s' if len(of) > 1 else ''} {', '.join(labels[i] for i in of)}: "


def judged_lines(writer: StepWriter, step: Step) -> tuple[JudgedLine, ...]:
    """The rows of a criterion, a validity or a check on columns."""
    out = []
    worst = step.governing if isinstance(step.statement, Criterion) else None
    for i, row in enumerate(step.rows):
        if row.verdict is None:
            continue
        compared = texts.row_compared(writer.trace, step, i)
        out.append(
            JudgedLine(
                row.label,
                writer.lines_of(step, compared),
                ratio_text(row.verdict),
                verdict_words_of(step, row.verdict, plain_symbol),
                i == worst,
                i == worst or row.verdict.satisfied is not True or row.verdict.one_sided,
                writer.calls(row.working) if row.working else (),
                all(c.closes for c in compared),
            )
        )
    return tuple(out)


# --- tables of values ---------------------------------------------------------------------------------------


def value_table(writer: StepWriter, step: Step, statement: Tabulate, head: Head) -> TableBlock:
    """What `tabulate` lists: a row a place, a column an expression."""
    drawn = step.curves
    title = range_line(statement)
    if drawn is None:
        return TableBlock(head, "", "", (), (), title=title)
    heads = [Line((Name(drawn.variable), f" in {_unit(drawn.unit)}" if drawn.unit.text else ""))]
    heads += [Line((c.tree, f" in {_unit(c.unit)}" if c.unit.text else "")) for c in drawn.curves]
    digits = writer.trace.sheet.front.digits
    rows = []
    for i in range(len(drawn.curves[0].points)):
        x = drawn.unit.from_si(drawn.curves[0].points[i][0])
        cells = [Shown(plain(x, min(exact_digits(x, digits), digits)), "")]
        cells += [Shown(plain(_without_crumbs(c, i), digits), "") for c in drawn.curves]
        rows.append(tuple(cells))
    return TableBlock(head, "", "", (), (), body=tuple(rows), title=title, heads=tuple(heads))


def _without_crumbs(curve: Curve, index: int) -> float:
    """A value of a curve in its unit; what rounding left of zero is zero."""
    y = curve.points[index][1]
    size = max((abs(each) for _, each in curve.points if math.isfinite(each)), default=0.0)
    return 0.0 if abs(y) <= NOTHING * size else curve.unit.from_si(y)


def range_line(statement: Plot | Tabulate) -> Line:
    """`M(x), v(x) for x from 0 m to L`."""
    parts: list[str | Node] = []
    for curve in statement.curves:
        parts += [", ", curve]
    over: tuple[str | Node, ...] = (" from ", statement.low, " to ", statement.high)
    return Line((*parts[1:], " for ", Name(statement.variable), *over))

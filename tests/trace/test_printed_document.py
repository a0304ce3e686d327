"""What stands in a document, worked with a pocket calculator: every printed equation, beneath steps too.

Reads the document model, which all formats are drawn from: substitutions, sums written out, calls, criteria
row by row, cells, equations with the solution put back, the places that `largest` looked at,
tables of values.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import pytest
from pocket_calculator import FUNCTIONS, DoesNotCancel, work
from second_arithmetic import Known, Worker, factor, told
from test_second_arithmetic import known_of, trace_of

from loadpath.document import Document, build
from loadpath.document.model import (
    CallLine,
    ColumnBlock,
    CriterionBox,
    JudgedRow,
    Line,
    ResultRow,
    SolutionRow,
    TableBlock,
)
from loadpath.formula.canonical import text
from loadpath.formula.statements import Column, Tabulate
from loadpath.formula.tree import Call, Cases, Logic, Name, Node, Relation, Shown, walk
from loadpath.units.printing import read_plain

ROOT = Path(__file__).parents[2]
SHEETS = sorted(
    [*(ROOT / "calcsheets").glob("*.sheet.md"), *(ROOT / "tests" / "published").glob("*.sheet.md")]
)


@cache
def document_of(path: Path) -> Document:
    return build(trace_of(path), "1")


@dataclass(frozen=True)
class Printed:
    """A printed formula without names, and the number beside it."""

    where: str
    formula: Node
    value: Shown


def printed(document: Document) -> Iterator[Printed]:
    """Every printed equation that claims to close."""
    for block in document.blocks:
        match block:
            case ResultRow():
                yield from _equation(block.head.number, block.sides, block.value, block.closes)
                yield from _of_calls(block.head.number, block.calls)
            case SolutionRow():
                yield from _equation(block.head.number, block.sides, block.value, block.closes)
            case ColumnBlock():
                for row in block.rows:
                    where = f"{block.head.number}, {row.label}"
                    yield from _equation(where, row.sides, row.value, row.closes)
                    yield from _of_calls(where, row.calls)
            case CriterionBox() | JudgedRow():
                yield from _judged(block.head.number, block.lines if block.closes else ())
                yield from _of_calls(block.head.number, block.calls)
                for judged in block.rows:
                    where = f"{block.head.number}, {judged.label}"
                    yield from _judged(where, judged.lines if judged.closes else ())
                    yield from _of_calls(where, judged.calls)


def _equation(where: str, sides: tuple[Node, ...], value: Shown | None, closes: bool) -> Iterator[Printed]:
    if sides and value is not None and closes and is_worked_out(sides[-1]) and is_plain(value):
        yield Printed(where, sides[-1], value)


def _of_calls(where: str, calls: Iterable[CallLine]) -> Iterator[Printed]:
    for call in calls:
        yield from _equation(f"{where}, {text(call.call)}", call.sides, call.value, call.closes)


def _judged(where: str, lines: tuple[Node, ...]) -> Iterator[Printed]:
    """Both lines of a criterion: what is worked out on the first stands as a number on the second."""
    if len(lines) != 2:
        return
    first, second = (operands_in(line) for line in lines)
    for side, number in zip(first, second, strict=True):
        if isinstance(number, Shown) and is_plain(number) and is_worked_out(side):
            yield Printed(where, side, number)


def operands_in(node: Node) -> list[Node]:
    if isinstance(node, Logic):
        return [o for each in node.operands for o in operands_in(each)]
    assert isinstance(node, Relation)
    # the demand as a share of the span stands between two equals signs: `8.2 mm = L/514 <= 8.4 mm`
    return [o for o in node.operands if not names_in(o)]


def names_in(node: Node) -> bool:
    return isinstance(node, Cases) or any(isinstance(n, Name) and n.name != "pi" for n in walk(node))


def is_worked_out(node: Node) -> bool:
    """True for a formula that a calculator can work: no names, no functions of the sheet."""
    calls = (n.function for n in walk(node) if isinstance(n, Call))
    return not isinstance(node, Shown) and not names_in(node) and all(name in FUNCTIONS for name in calls)


def is_plain(value: Shown) -> bool:
    """True for a number: not a word, not `12 ft 6 1/2 in`."""
    return not value.word and " ft" not in value.number


def last_digit(number: str) -> float:
    """What one unit of the last printed digit comes to."""
    mantissa, _, ten = number.partition("e")
    decimals = len(mantissa.partition(".")[2])
    return float(10.0 ** (int(ten or 0) - decimals))


def significant(number: str) -> int:
    """How many digits are printed, leading zeros left out."""
    return len(number.partition("e")[0].replace(".", "").lstrip("-0"))


def trouble(of: Printed, digits: int) -> str:
    """What a pocket calculator has against a printed equation; "" where it lands within the last digit."""
    said = f"{of.where}: {text(of.formula)} = {text(of.value)}"
    try:
        with told(said):
            reached = work(text(of.formula), "in" if of.value.unit.startswith("ft-in") else of.value.unit)
    except AssertionError as error:
        if isinstance(error.__cause__, DoesNotCancel):
            return str(error)
        raise
    value = read_plain(of.value.number)
    step = last_digit(of.value.number)
    if value and "." not in of.value.number and "e" not in of.value.number:
        # 12 000 to four digits is known to 10
        step = max(step, 10.0 ** (math.floor(math.log10(abs(value))) - digits + 1))
    return "" if abs(reached - value) <= 1.5 * step else f"{said}, a calculator says {reached}"


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_every_printed_equation_of_the_document(path: Path) -> None:
    digits = trace_of(path).sheet.front.digits
    assert [said for each in printed(document_of(path)) if (said := trouble(each, digits))] == []


# --- solutions put back -------------------------------------------------------------------------------------


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_left_less_right_is_the_residual(path: Path) -> None:
    said = []
    for block in document_of(path).blocks:
        for line in block.put_back if isinstance(block, SolutionRow) else ():
            left, right, residual = (read_plain(s.number) for s in (line.left, line.right, line.residual))
            rough = last_digit(line.left.number) + last_digit(line.right.number)
            if line.left.number == line.right.number == "0":
                rough = math.inf  # rounding is all that is left of the terms
            if not abs(left - right - residual) <= rough:
                said.append(f"{block.head.number}: {text(line.equation)}: {left} - {right} is not {residual}")
            if not {line.left.unit} == {line.right.unit} == {line.residual.unit}:
                said.append(f"{block.head.number}: {text(line.equation)}: three units")
    assert said == []


# --- places that `largest` looked at ------------------------------------------------------------------------

SPOTS = ("end, ", "break, ", "turning point, ", "left of a jump, ", "right of a jump, ")


def lines_beneath(document: Document) -> Iterator[tuple[str, tuple[Line, ...], Shown | None, Node | None]]:
    """The lines beneath each result and each call, with its value and formula."""
    for block in document.blocks:
        if isinstance(block, ResultRow):
            yield block.head.number, block.lines, block.value, block.sides[0] if block.sides else None
        for call in getattr(block, "calls", ()):
            yield f"{block.head.number}, {text(call.call)}", call.conditions, call.value, call.call


def spots(lines: tuple[Line, ...]) -> list[tuple[str, Node, Shown]]:
    """What kind of place, the expression there, its value."""
    found = []
    for line in lines:
        match line.parts:
            case (str(kind), Relation(operands=(at, Shown() as value))) if kind.strip() + " " in SPOTS:
                found.append((kind.strip() + " ", at, value))
    return found


def trouble_with_spot(at: Node, value: Shown, known: Known, size: float, digits: int) -> str:
    """The expression at the printed place, and half a digit beside it, must come to the printed value."""
    place = next(n for n in walk(at) if isinstance(n, Shown))
    number = read_plain(place.number)
    # fewer digits than the sheet asks for are all that the place has
    half = 0.5 * last_digit(place.number) if significant(place.number) >= digits else 0.0
    tiny = 1e-9 * abs(number) + 1e-12
    values = []
    for move in (-half, -tiny, 0.0, tiny, half):
        moved = f"({number + move!r} {place.unit})" if place.unit else f"({number + move!r})"
        formula = text(at).replace(text(place), moved)
        with told(formula):
            values.append(Worker(formula, known).run() / factor(value.unit))
    rough = 1.5 * last_digit(value.number) + 1e-12 * size
    if min(values) - rough <= read_plain(value.number) <= max(values) + rough:
        return ""
    return f"{text(at)} = {text(value)}, the second arithmetic says {values}"


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_each_place_looked_at_has_its_value(path: Path) -> None:
    known, said = known_of(trace_of(path)), []
    digits = trace_of(path).sheet.front.digits
    for where, lines, value, formula in lines_beneath(document_of(path)):
        found = spots(lines)
        size = max((abs(read_plain(v.number)) for _, _, v in found), default=0.0)
        said += [
            f"{where}: {t}" for _, at, v in found if (t := trouble_with_spot(at, v, known, size, digits))
        ]
        if (
            found
            and value is not None
            and isinstance(formula, Call)
            and formula.function in ("largest", "smallest")
        ):
            best = max if formula.function == "largest" else min
            # of all that is listed; those left out are said to lie between
            listed = best(read_plain(v.number) * factor(v.unit) for _, _, v in found)
            if not math.isclose(
                listed, read_plain(value.number) * factor(value.unit), rel_tol=2e-3, abs_tol=1e-300
            ):
                said.append(f"{where}: {text(value)} is not the {formula.function} of those listed")
    assert said == []


# --- tables of values and cells -----------------------------------------------------------------------------


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_cells_of_a_table_of_values(path: Path) -> None:
    trace = trace_of(path)
    known, said = known_of(trace), []
    by_number = {step.number: step for step in trace}
    for block in document_of(path).blocks:
        if not isinstance(block, TableBlock) or block.title is None:
            continue
        step = by_number[block.head.number]
        statement, drawn = step.statement, step.curves
        assert isinstance(statement, Tabulate) and drawn is not None
        assert len(block.body) == statement.steps + 1
        for i, row in enumerate(block.body):
            x = drawn.low + (drawn.high - drawn.low) * i / statement.steps
            assert abs(read_plain(row[0].number) - drawn.unit.from_si(x)) <= 0.5001 * last_digit(
                row[0].number
            )
            for curve, cell in zip(drawn.curves, row[1:], strict=True):
                worker = Worker(text(curve.tree), known)
                near = [
                    worker.run({statement.variable: x * (1 + e)}) / factor(curve.unit.text)
                    for e in (-1e-9, 0, 1e-9)
                ]
                size = max(abs(y) for _, y in curve.points) / factor(curve.unit.text)
                rough = 1.01 * last_digit(cell.number) + 1e-9 * size
                if not min(near) - rough <= read_plain(cell.number) <= max(near) + rough:
                    said.append(
                        f"{step.id}, {text(row[0])}: {text(curve.tree)} = {text(cell)}, not {near[1]}"
                    )
    assert said == []


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_cells_of_data_are_printed_as_typed_or_as_worked(path: Path) -> None:
    trace = trace_of(path)
    known, said = known_of(trace), []
    columns = {step.id: step for step in trace if isinstance(step.statement, Column)}
    for block in document_of(path).blocks:
        for column in block.columns if isinstance(block, TableBlock) else ():
            step = columns[column.name]
            assert isinstance(step.statement, Column) and isinstance(step.si, tuple)
            for typed, cell, si in zip(step.statement.cells, column.cells, step.si, strict=True):
                assert cell.value is not None
                own = read_plain(cell.value.number) * factor(step.unit.text)
                with told(f"{column.name}: {text(typed)}"):
                    worked = Worker(text(typed), known).run()
                scales = (1.0, factor(step.unit.text))  # a bare number takes the unit of the header
                if not any(math.isclose(worked * k, si, rel_tol=1e-12, abs_tol=1e-300) for k in scales):
                    said.append(f"{column.name}: {text(typed)} is {si}, the second arithmetic says {worked}")
                if not abs(own - si) <= 0.5001 * last_digit(cell.value.number) * factor(step.unit.text):
                    said.append(f"{column.name}: {text(cell.value)} stands for {si}")
    assert said == []

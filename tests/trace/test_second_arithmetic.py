"""Every formula of every sheet, typed and derived, worked again by second_arithmetic.py.

The engine's algebra, its columns, its looking over a range and its solutions are held against plain
numerical work on the text of the formulas.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import pytest
from second_arithmetic import Known, Worker, told

import loadpath
from loadpath.formula.canonical import text
from loadpath.formula.statements import FunctionDefinition, Table
from loadpath.formula.tree import Call, Cases, Logic, Node, Relation, Word, walk
from loadpath.trace import Step, Trace, Working

ROOT = Path(__file__).parents[2]
SHEETS = sorted(
    [*(ROOT / "calcsheets").glob("*.sheet.md"), *(ROOT / "tests" / "published").glob("*.sheet.md")]
)
NUMERIC = 2e-7
"""What the plain methods of the second arithmetic come to."""
PLACES = 1e-4
"""The same for the place of a largest value, where the curve is flat."""


@cache
def trace_of(path: Path) -> Trace:
    return loadpath.evaluate(loadpath.read(path))


def evaluated(body: str, front: str = "") -> Trace:
    """The trace of a sheet without errors."""
    trace = loadpath.evaluate(loadpath.read_text(f"---\ntitle: T\n{front}---\n\n{body}\n"))
    assert not trace.has_errors, trace.findings
    return trace


def known_of(trace: Trace) -> Known:
    """What the names of a trace stand for."""
    known = Known()
    for step in trace:
        if isinstance(step.si, tuple):
            name = step.id
            known.columns[name] = step.si
            known.rows[name] = tuple(row.label for row in step.rows)
        elif step.si is not None:
            known.values[step.id] = step.si
        match step.statement:
            case FunctionDefinition(name=name, parameters=parameters) as function:
                body = step.working.tree if step.working else function.body
                known.functions[name] = tuple(p.name for p in parameters), text(body)
            case Table(name=name, two_way=table) if table is not None:
                down, across = (
                    [worked(node, known) for node in nodes] for nodes in (table.down, table.across)
                )
                cells = [[worked(node, known) for node in row] for row in table.cells]
                known.two_way[name] = down, across, cells
    return known


def worked(node: Node, known: Known, row: int | None = None) -> float:
    """The value of a tree by the second arithmetic."""
    return Worker(text(node), known, row).run()


@dataclass(frozen=True)
class Claim:
    """A formula and the value that the engine gives it, SI."""

    where: str
    tree: Node
    value: float
    size: float = 0.0
    """What a difference is measured by, where the value has cancelled."""
    row: int | None = None
    numeric: bool = False


def claims(trace: Trace) -> Iterator[Claim]:
    """Every formula with a value, as typed and as derived."""
    for step in trace:
        for index, row in enumerate(step.rows):
            if row.working is not None and isinstance(row.si, float):
                yield from _two(f"{step.id}, {row.label}", row.working, row.si, index)
        if step.working is not None and isinstance(step.si, float) and step.kind != "function":
            yield from _two(step.id, step.working, step.si)
        yield from _sides(step)
        yield from _put_back(step)


def _two(where: str, working: Working, value: float, row: int | None = None) -> Iterator[Claim]:
    yield Claim(where, working.tree, value, 0.0, row, is_looked_over(working.tree))
    if working.typed is not None and not isinstance(working.typed, Cases):
        yield Claim(f"{where}, as typed", working.typed, value, 0.0, row, numeric=True)


def is_looked_over(tree: Node) -> bool:
    """True where only a numerical method gives the value."""
    names = ("integral", "derivative", "limit_of", "largest", "smallest", "where_largest", "where_smallest")
    return any(isinstance(n, Call) and n.function in names for n in walk(tree))


def is_a_place(tree: Node) -> bool:
    """True where a place of a largest or smallest value stands in it."""
    return any(isinstance(n, Call) and n.function.startswith("where_") for n in walk(tree))


def _sides(step: Step) -> Iterator[Claim]:
    """Each side of what is judged, row by row where it is."""
    judged = [(r.working, r.verdict, i, r.label) for i, r in enumerate(step.rows)]
    judged = judged or [(step.working, step.verdict, None, "")]  # type: ignore[list-item]
    for working, verdict, row, label in judged:
        if verdict is None or working is None:
            continue
        trees = [working.tree, *([working.typed] if working.typed is not None else [])]
        for tree in trees:
            relations = [n for n in walk(tree) if isinstance(n, Relation)]
            for relation, sides in zip(relations, verdict.sides, strict=False):
                size = max((abs(s) for s in sides if isinstance(s, float)), default=0.0)
                if not any(sides) and verdict.within:
                    size = 1e-3 * verdict.within / 1e-9  # terms that cancel: a thousandth of the tolerance
                for operand, side in zip(relation.operands, sides, strict=True):
                    if isinstance(side, float):
                        where = f"{step.id} {label}: {text(operand)}"
                        numeric = is_looked_over(operand)
                        yield Claim(where, operand, side, size, row, numeric)


def _put_back(step: Step) -> Iterator[Claim]:
    if step.solved is None:
        return
    for each in step.solved.put_back:
        for operand, side in zip(each.equation.operands, (each.left, each.right), strict=True):
            yield Claim(f"{step.id}, put back: {text(operand)}", operand, side, each.size, None, True)
    for equation, each in zip(step.solved.derived, step.solved.put_back, strict=False):
        for operand, side in zip(equation.operands, (each.left, each.right), strict=True):
            yield Claim(f"{step.id}, derived: {text(operand)}", operand, side, each.size)


def trouble(claim: Claim, known: Known) -> str:
    """What the second arithmetic has against a claim; "" where it agrees."""
    if any(isinstance(n, Word | Logic) for n in walk(claim.tree) if n is claim.tree):
        return ""
    with told(f"{claim.where}: {text(claim.tree)}"):
        reached = worked(claim.tree, known, claim.row)
    allowed = 1e-9 if not claim.numeric else PLACES if is_a_place(claim.tree) else NUMERIC
    if math.isclose(reached, claim.value, rel_tol=allowed, abs_tol=allowed * claim.size + 1e-300):
        return ""
    return f"{claim.where}: {text(claim.tree)} = {claim.value}, the second arithmetic says {reached}"


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_every_formula_typed_and_derived(path: Path) -> None:
    trace = trace_of(path)
    known = known_of(trace)
    assert [said for claim in claims(trace) if (said := trouble(claim, known))] == []


# --- curves -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_points_of_curves(path: Path) -> None:
    """Every ninth point lies on the curve; jumps are drawn with both sides."""
    trace = trace_of(path)
    known, said = known_of(trace), []
    for step in trace:
        for curve in step.curves.curves if step.curves else ():
            worker, name = Worker(text(curve.tree), known), step.curves.variable  # type: ignore[union-attr]
            size = max(abs(y) for _, y in curve.points if not math.isnan(y))
            for x, y in curve.points[::9]:
                near = [worker.run({name: x * (1 + e) + e}) for e in (-1e-9, 0.0, 1e-9)]
                if not min(near) - 1e-6 * size <= y <= max(near) + 1e-6 * size:
                    said.append(f"{step.id}: {text(curve.tree)} at {x} is {near[1]}, drawn at {y}")
    assert said == []


# --- the second arithmetic itself ---------------------------------------------------------------------------

KNOWN = Known(
    values={"a": 2.0, "L": 3.0, "pick": "web"},
    columns={"t.b": (1.0, 2.0, 4.0), "t.h": (10.0, 20.0, 40.0)},
    rows={"t.b": ("top", "web", "foot"), "t.h": ("top", "web", "foot")},
    functions={
        "f": (("x",), "a*x^2"),
        "g": (("x",), "cases x when x < 1; f(x) when x <= 2 and a > 1; 9 otherwise"),
    },
    two_way={"w": ([1.0, 2.0], [10.0, 20.0], [[1.0, 2.0], [3.0, 4.0]])},
)


@pytest.mark.parametrize(
    ("formula", "value"),
    [
        ("a*L - 2 mm / (4 mm)", 5.5),
        ("<L - a>^2 + <a - L>^0", 1.0),
        ("6 ft 6 in - 78 in + a", 2.0),
        ("20 degC - 0", 293.15),
        ("sum(t.b*t.h) + max(t.b) + count(t.b)", 10 + 40 + 160 + 4 + 3),
        ('t.b at "foot" + t.h at pick', 24.0),
        ("min(a, L)*2", 4.0),
        ("integral(f(x), x, 0, L)", 18.0),
        ("largest(x*(L - x), x, 0, L) + where_largest(x*(L - x), x, 0, L)", 2.25 + 1.5),
        ("smallest(-f(x), x, 0, L)", -18.0),
        ("sum(k^2, k, 1, 4)", 30.0),
        ("limit_of(sin(x)/x, x, 0)", 1.0),
        ("interp(3, t.b, t.h) + lookup(3.9, t.b, t.h)", 30.0 + 20.0),
        ("interp(1.5, 15, w)", 2.5),
        ("g(0.5) + g(1.5) + g(7)", 0.5 + 4.5 + 9),
    ],
)
def test_the_second_arithmetic_itself(formula: str, value: float) -> None:
    assert Worker(formula, KNOWN).run() == pytest.approx(value, rel=1e-7)


def test_a_wrong_value_or_a_wrong_derived_expression_is_noticed() -> None:
    trace = evaluated("    L = 3 m -- l\n    f(x [m]) = integral(x^2, x)\n    y = f(L)")
    known = known_of(trace)
    (claim,) = [c for c in claims(trace) if c.where == "y"]
    assert trouble(claim, known) == ""
    assert "the second arithmetic says" in trouble(Claim("y", claim.tree, claim.value * (1 + 1e-8)), known)
    known.functions["f"] = ("x",), "x^3/3.001"
    assert "the second arithmetic says" in trouble(claim, known)

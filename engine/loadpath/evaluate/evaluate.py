"""Working the numbers of a plan, step by step, and writing the trace meanwhile."""

from __future__ import annotations

import hashlib
from collections.abc import Mapping
from contextlib import AbstractContextManager, nullcontext
from dataclasses import dataclass, field, replace
from math import inf
from time import monotonic
from typing import TYPE_CHECKING, Any

from loadpath.evaluate.curves import draw
from loadpath.evaluate.explain import run
from loadpath.evaluate.failure import Failure, shower
from loadpath.evaluate.limits import ALGEBRA_IN_ALL, STEP_SECONDS
from loadpath.evaluate.numbers import ROW
from loadpath.evaluate.plan import Plan, Planned, defined_by, guarded_by, make_plan, sides_of
from loadpath.evaluate.special import check_time
from loadpath.evaluate.symbolic import is_derived
from loadpath.evaluate.verdicts import both_sides, judge, worst
from loadpath.evaluate.working import Observer
from loadpath.findings import Finding, Remark, finding, ordered
from loadpath.formula.binding import free_names
from loadpath.formula.canonical import text
from loadpath.formula.statements import (
    Check,
    Choice,
    Column,
    Criterion,
    Definition,
    Faulty,
    FunctionDefinition,
    Plot,
    Solution,
    Statement,
    Table,
    Tabulate,
    Validity,
)
from loadpath.formula.tree import NOWHERE, Node
from loadpath.resolve import Resolved, expressions, is_relative, relations_in
from loadpath.sheet import Image, Sheet
from loadpath.trace.digits import digits_of_verdict, exact_digits
from loadpath.trace.model import Row, Step, Trace, Verdict, Working
from loadpath.units.printing import plain

if TYPE_CHECKING:
    from loadpath.evaluate.derive import Derived, Deriver
    from loadpath.evaluate.solving import Solutions

_NO_PARAMETERS: dict[str, Any] = {}


def evaluate(resolved: Resolved) -> Trace:
    """The trace of a resolved sheet. Never raises for a user's mistake."""
    return run_plan(make_plan(resolved))


def run_plan(plan: Plan) -> Trace:
    """One run of a plan: every number worked, every step noted."""
    return _Run(plan).trace()


@dataclass(slots=True)
class _Run:
    plan: Plan
    values: dict[str, Any] = field(default_factory=dict)
    steps: list[Step] = field(default_factory=list)
    found: list[Finding] = field(default_factory=list)
    broken: dict[str, int] = field(default_factory=dict)
    """Names that could not be computed, with the line to blame."""
    base: int = 0
    """Digits that the sheet asks for."""
    observer: Observer | None = None
    solutions: dict[int, Solutions] = field(default_factory=dict)
    """By the place of each `solve for`."""
    unsolved: dict[int, int] = field(default_factory=dict)
    """The line to blame for each `solve for` that found nothing."""

    def trace(self) -> Trace:
        sheet = self.plan.resolved.sheet
        self.base = sheet.front.digits
        with self._algebra_limit():
            for planned in self.plan.steps:
                self.steps.append(self._step(planned))
        self.plan.compiler.deadline = inf
        self._bring_in_ranges()
        self._bring_in_digits()
        found = self.found
        if sheet.findings or self.plan.resolved.findings:
            found = [*sheet.findings, *self.plan.resolved.findings, *found]
        return Trace(
            self.plan.resolved,
            tuple(self.steps),
            self.plan.sections,
            ordered(found),
            digest(sheet),
            self._work_printed,
        )

    def _algebra_limit(self) -> AbstractContextManager[None]:
        """All algebra of one sheet together has a limit too."""
        if not self.plan.needs_algebra:
            return nullcontext()
        from loadpath.algebra import time_limit

        return time_limit(ALGEBRA_IN_ALL)

    def _work_printed(self, node: Node) -> float:
        return float(self.plan.compiler.compile_tree(node)(self.values, _NO_PARAMETERS))

    # --- one step ---

    def _step(self, planned: Planned) -> Step:
        entry = planned.outline.entry
        blocked = entry.blocked_by
        if self.unsolved and not blocked:
            blocked = self.unsolved.get(planned.shared, 0)
        if self.broken and not blocked:
            blocked = next((self.broken[n] for n in entry.uses if n in self.broken), 0)
        if blocked:
            if planned.shared >= 0:  # what blocks one unknown of a `solve for` blocks all
                self.unsolved[planned.shared] = blocked
            return self._not_computed(planned, blocked)
        if planned.working is None:  # else it is a few operations
            self.plan.compiler.deadline = monotonic() + STEP_SECONDS
            self.plan.compiler.once.clear()
        try:
            return self._worked(planned)
        except Failure as failure:
            line = self._report(failure, planned)
            if planned.shared >= 0:
                self.unsolved[planned.shared] = line
            return self._not_computed(planned, line)

    def _worked(self, planned: Planned) -> Step:
        statement, entry = planned.outline.entry.statement, planned.outline.entry
        match statement:
            case Definition() if entry.rows is not None:
                return self._column_of(planned, statement)
            case Definition():
                derived = None
                if planned.work is None:
                    planned, derived = self._derived(planned)
                si = self._number(planned)
                self.values[statement.name] = si
                working = None if entry.kind == "input" else planned.working or self._working(planned)
                if derived is not None and working is not None:
                    working = self._shown(working, derived)
                return Step(planned.outline, si, self.base, working, None, "")
            case Choice(word=word):
                self.values[statement.name] = word
                return Step(planned.outline, word, self.base, None, None, "")
            case FunctionDefinition():
                return self._function(planned, statement)
            case Criterion() | Validity() | Check() if entry.rows is not None:
                return self._judged_by_row(planned)
            case Criterion() | Validity() | Check():
                planned, derived = self._derived(planned)
                return self._judged(planned, self._verdict(planned), derived)
        return self._several(planned)

    def _several(self, planned: Planned) -> Step:
        """A step of a statement that holds several expressions."""
        statement = planned.outline.entry.statement
        match statement:
            case Solution():
                return self._solution(planned, statement)
            case Column():
                return self._column(planned, statement)
            case Table(two_way=two_way) if two_way is not None:
                compiler = self.plan.compiler
                for cell in expressions(statement):
                    run(compiler.compile_tree(cell), cell, self.values, _NO_PARAMETERS, compiler)
            case Plot(curves=curves, low=low, high=high) | Tabulate(curves=curves, low=low, high=high):
                units = planned.outline.entry.side_units
                steps = statement.steps if isinstance(statement, Tabulate) else 0
                drawn = draw(
                    self.plan.compiler, self.values, curves, statement.variable, low, high, units, steps
                )
                return Step(planned.outline, None, self.base, None, None, "", curves=drawn)
        return Step(planned.outline, None, self.base, None, None, "")

    # --- derived expressions ---

    def _derived(self, planned: Planned) -> tuple[Planned, Derived | None]:
        """The step with what algebra made of its tree, where it holds something that algebra works."""
        tree = planned.tree
        if planned.work is not None or tree is None:
            return planned, None
        derived = self._deriver().derive(tree)
        compiler = self.plan.compiler
        sides = (
            ()
            if isinstance(planned.outline.entry.statement, Definition)
            else sides_of(derived.tree, compiler)
        )
        work = compiler.compile_tree(derived.tree)
        return replace(planned, tree=derived.tree, work=work, sides=sides), derived

    def _deriver(self) -> Deriver:
        from loadpath.evaluate.derive import Deriver

        return Deriver(self.plan.resolved, self.plan.compiler, self.values)

    def _shown(self, working: Working, derived: Derived | None) -> Working:
        if derived is None:
            return working
        return replace(working, typed=derived.typed, asides=(*derived.asides, *working.asides))

    def _function(self, planned: Planned, statement: FunctionDefinition) -> Step:
        if not is_derived(statement.body):
            return Step(planned.outline, None, self.base, None, None, "")
        types = self.plan.resolved.checker.parameter_types(statement)
        derived = self._deriver().derive(statement.body, types)
        self.plan.compiler.derive(replace(statement, body=derived.tree))
        working = Working(derived.tree, asides=derived.asides, typed=derived.typed)
        return Step(planned.outline, None, self.base, working, None, "")

    # --- equations ---

    def _solution(self, planned: Planned, statement: Solution) -> Step:
        from loadpath.evaluate.solving import solve

        together, resolved = statement.together, self.plan.resolved
        key = planned.shared
        if key not in self.solutions:
            entries = {e.name: e for e in resolved.entries if isinstance(e.statement, Solution)}
            self.solutions[key] = solve(together, entries, resolved, self.plan.compiler, self.values)
        found = self.solutions[key]
        si = found.values[statement.name]
        self.values[statement.name] = si
        symbols = found.solved.symbols.get(statement.name)
        working = None if symbols is None else self._observer().working(symbols)
        solved = found.solved
        if statement.is_last:  # every unknown has its value
            equations = solved.derived if solved.derived else together.equations
            solved = replace(solved, workings=tuple(map(self._observer().working, equations)))
        return Step(planned.outline, si, self.base, working, None, "", solved=solved)

    # --- columns ---

    def _column(self, planned: Planned, statement: Column) -> Step:
        """The cells of a column of a table, each worked by itself."""
        compiler, rows = self.plan.compiler, planned.outline.entry.rows
        assert rows is not None
        values = tuple(
            float(run(compiler.compile_tree(cell), cell, self.values, _NO_PARAMETERS, compiler))
            for cell in statement.cells
        )
        self.values[statement.name] = values
        shown = tuple(
            Row(rows.label(i), si, self._observer().working(cell) if free_names(cell) else Working(cell))
            for i, (si, cell) in enumerate(zip(values, statement.cells, strict=True))
        )
        return Step(planned.outline, values, self.base, None, None, "", rows=shown)

    def _column_of(self, planned: Planned, statement: Definition) -> Step:
        """A result that goes over the rows of its columns."""
        planned, derived = self._derived(planned)
        rows, tree, compiler = planned.outline.entry.rows, planned.tree, self.plan.compiler
        assert rows is not None and tree is not None and planned.work is not None
        shown = []
        for i in range(rows.count):
            check_time(compiler, tree)
            try:
                si = float(run(planned.work, tree, self.values, {ROW: i}, compiler))
            except Failure as failure:
                raise failure.in_row(rows.said(i)) from None
            working = self._shown(self._observer().working(tree, row=i), derived)
            shown.append(Row(rows.label(i), si, working))
        values = tuple(float(row.si or 0.0) for row in shown)
        self.values[statement.name] = values
        working = self._shown(Working(tree), derived)
        return Step(planned.outline, values, self.base, working, None, "", rows=tuple(shown))

    def _judged_by_row(self, planned: Planned) -> Step:
        """A criterion on columns: each row by itself, and the worst governs."""
        planned, derived = self._derived(planned)
        rows, tree = planned.outline.entry.rows, planned.tree
        assert rows is not None and tree is not None
        shown = []
        for i in range(rows.count):
            check_time(self.plan.compiler, tree)
            try:
                verdict = self._verdict(planned, {ROW: i}, rows.said(i))
            except Failure as failure:
                raise failure.in_row(rows.said(i)) from None
            working = self._shown(self._observer().working(tree, row=i), derived)
            shown.append(Row(rows.label(i), None, working, verdict))
        governing = worst([row.verdict for row in shown if row.verdict is not None])
        row = shown[governing]
        return Step(
            planned.outline, None, self.base, row.working, row.verdict, "",
            rows=tuple(shown), governing=governing,
        )  # fmt: skip

    def _number(self, planned: Planned) -> float:
        assert planned.work is not None and planned.tree is not None
        try:
            si = planned.work(self.values, _NO_PARAMETERS)
        except (ArithmeticError, ValueError):
            si = inf
        if -inf < si < inf:
            return float(si)
        return float(run(planned.work, planned.tree, self.values, _NO_PARAMETERS, self.plan.compiler))

    def _working(self, planned: Planned) -> Working:
        if planned.working is not None:
            return planned.working
        assert planned.tree is not None
        return self._observer().working(planned.tree)

    def _observer(self) -> Observer:
        if self.observer is None:
            self.observer = Observer(self.plan.resolved, self.plan.compiler, self.values)
        return self.observer

    def _judged(self, planned: Planned, verdict: Verdict, derived: Derived | None) -> Step:
        working = self._shown(self._working(planned), derived)
        return Step(planned.outline, None, self.base, working, verdict, "")

    def _not_computed(self, planned: Planned, line: int) -> Step:
        for name in defined_by(planned.outline.entry):
            self.broken[name] = line
        verdict = Verdict(None, conditional_on=planned.assumed) if _is_judged(planned) else None
        return Step(planned.outline, None, self.base, None, verdict, f"not computed because of line {line}")

    def _report(self, failure: Failure, planned: Planned) -> int:
        source = self.plan.resolved.sheet.source
        here = planned.outline.entry.statement.span
        if failure.span == NOWHERE:  # inside what algebra made
            failure.span = here
        inside = here.start <= failure.span.start < here.end
        remarks = () if inside else (Remark(f"worked for line {planned.outline.entry.line}", here),)
        new = finding(
            failure.slug,
            failure.tell(shower(self.plan.resolved, self._around(failure, planned))),
            source,
            failure.span,
            help=failure.help,
            remarks=remarks,
        )
        if not any((f.slug, f.message, f.span) == (new.slug, new.message, new.span) for f in self.found):
            self.found.append(new)  # a function that fails in the same way for several steps is one mistake
        return new.line

    def _around(self, failure: Failure, planned: Planned) -> tuple[Statement, ...]:
        """The statement being worked, and the function in which it failed."""
        at = failure.span.start
        statements = (e.statement for e in self.plan.resolved.entries)
        functions = (s for s in statements if isinstance(s, FunctionDefinition))
        return (planned.outline.entry.statement, *(s for s in functions if s.span.start <= at < s.span.end))

    # --- judging ---

    def _verdict(self, planned: Planned, p: Mapping[str, Any] = _NO_PARAMETERS, row: str = "") -> Verdict:
        """The verdict of a criterion, a validity or a check; `p` says which row it is judged in."""
        statement = planned.outline.entry.statement
        if isinstance(statement, Check):
            return self._check(planned, statement, p, row)
        return self._validity(planned, p) if isinstance(statement, Validity) else self._criterion(planned, p)

    def _sides(self, planned: Planned, p: Mapping[str, Any]) -> tuple[tuple[Any, ...], ...]:
        compiler = self.plan.compiler
        return tuple(
            tuple(run(work, node, self.values, p, compiler) for node, work in side) for side in planned.sides
        )

    def _criterion(self, planned: Planned, p: Mapping[str, Any]) -> Verdict:
        entry = planned.outline.entry
        assert planned.tree is not None
        ratios = not any(u.absolute for u in entry.side_units)
        verdict = judge(planned.tree, self._sides(planned, p), ratios=ratios)
        return replace(verdict, conditional_on=planned.assumed) if planned.assumed else verdict

    def _validity(self, planned: Planned, p: Mapping[str, Any]) -> Verdict:
        sides = self._sides(planned, p)
        assert planned.work is not None and planned.tree is not None
        held = run(planned.work, planned.tree, self.values, p, self.plan.compiler)
        return Verdict(bool(held), sides=sides)

    def _check(self, planned: Planned, statement: Check, p: Mapping[str, Any], row: str) -> Verdict:
        ((left, right),) = self._sides(planned, p)
        compiler, asked = self.plan.compiler, statement.tolerance
        tolerance = float(run(compiler.compile_tree(asked), asked, self.values, p, compiler))
        allowed = tolerance * abs(right) if is_relative(asked) else tolerance
        held = abs(left - right) <= allowed * (1 + 1e-9)
        if not held:
            self.found.append(self._failed_check(planned, statement, left, right, row))
        return Verdict(
            held, sides=((left, right),), within=tolerance, demand=abs(left - right), limit=allowed
        )

    def _failed_check(
        self, planned: Planned, statement: Check, left: float, right: float, row: str
    ) -> Finding:
        unit = planned.outline.entry.side_units[0]

        def show(value: float) -> str:
            return f"{plain(value, exact_digits(value, 6))} {unit.text}".rstrip()

        where = f" in {row}" if row else ""
        return finding(
            "check-failed",
            f"the cross-check does not hold{where}: {show(unit.from_si(left))} against "
            f"{show(unit.from_si(right))}, {show(abs(left - right) / unit.size)} apart, "
            f"within {text(statement.tolerance)} asked",
            self.plan.resolved.sheet.source, statement.relation.at[0],
            help="one of the two ways of working is wrong, or the tolerance is too tight",
        )  # fmt: skip

    # --- what is known only after the whole sheet ---

    def _bring_in_ranges(self) -> None:
        """A criterion that hangs on a name outside its range shows nothing."""
        outside: set[str] = set()
        unknown: dict[str, str] = {}
        tables = self.plan.tables
        for step in self.steps:
            guarded = guarded_by(step.statement, tables)
            if guarded and step.why:
                unknown |= dict.fromkeys(guarded, step.why)
            elif guarded and step.verdict is not None and not step.verdict.satisfied:
                outside |= set(guarded)
        for index, (planned, step) in enumerate(zip(self.plan.steps, self.steps, strict=True)):
            verdict = step.verdict
            if verdict is None or not isinstance(step.statement, Criterion):
                continue
            if planned.unread:
                keys = ", ".join(f"[{key}]" for key in planned.unread)
                why = step.why or f"{keys} is no source or assumption that could be read"
                verdict = Verdict(None, conditional_on=planned.assumed)
                rows = tuple(replace(row, verdict=verdict) for row in step.rows)
                self.steps[index] = replace(step, verdict=verdict, why=why, rows=rows, governing=None)
            elif missed := tuple(sorted(planned.ranged & (outside | set(unknown)))):
                why = step.why or next((unknown[name] for name in missed if name in unknown), "")
                verdict = Verdict(None, outside=missed, conditional_on=verdict.conditional_on)
                rows = tuple(replace(row, verdict=verdict) for row in step.rows)
                self.steps[index] = replace(step, verdict=verdict, why=why, rows=rows, governing=None)
            elif verdict.one_sided:
                self.found.append(self._one_sided(step.statement, step.id, verdict))

    def _one_sided(self, statement: Criterion, id: str, verdict: Verdict) -> Finding:
        relation = relations_in(statement)[verdict.part]
        return finding(
            "one-sided",
            f"`{id}` holds a negative value against one positive limit, so that only one side is looked at",
            self.plan.resolved.sheet.source, relation.at[0],
            help=both_sides(relation, verdict.sides[verdict.part]),
        )  # fmt: skip

    def _bring_in_digits(self) -> None:
        """A result that stands on one side of a criterion is shown to the digits that the verdict needs."""
        needed: dict[str, int] = {}
        for step in self.steps:
            if isinstance(step.statement, Criterion) and step.verdict is not None and step.verdict.sides:
                digits, names = digits_of_verdict(step, self.base)
                if digits > self.base:
                    needed |= {name: max(digits, needed.get(name, 0)) for name in names}
        if needed:
            self.steps = [
                replace(s, digits=needed[s.entry.name])
                if s.kind == "result" and s.entry.name in needed
                else s
                for s in self.steps
            ]


def _is_judged(planned: Planned) -> bool:
    statement = planned.outline.entry.statement
    if isinstance(statement, Faulty):
        return statement.criterion is not None
    return isinstance(statement, Criterion | Check | Validity)


def digest(sheet: Sheet) -> str:
    """SHA-256 of all that a sheet is issued from: text, each `project.yaml`, each image, with its length."""
    total = hashlib.sha256()
    texts = (sheet.source.text, *sheet.project_texts)
    parts = [text.encode(errors="surrogatepass") for text in texts]
    parts += [block.data for block in sheet.blocks if isinstance(block, Image)]
    for part in parts:
        total.update(str(len(part)).encode() + b":" + part)
    return total.hexdigest()

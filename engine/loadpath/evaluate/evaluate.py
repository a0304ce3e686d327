"""Working the numbers of a plan, step by step, and writing the trace meanwhile."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass, field, replace
from math import inf
from typing import Any

from loadpath.evaluate.explain import run
from loadpath.evaluate.failure import Failure, shower
from loadpath.evaluate.plan import Plan, Planned, defined_by, guarded_by, make_plan
from loadpath.evaluate.verdicts import both_sides, judge
from loadpath.evaluate.working import Observer
from loadpath.findings import Finding, Remark, finding, ordered
from loadpath.formula.canonical import text
from loadpath.formula.statements import Check, Choice, Criterion, Definition, Faulty, Validity
from loadpath.formula.tree import Node
from loadpath.resolve import Resolved, is_relative, relations_in
from loadpath.sheet import Image, Sheet
from loadpath.trace.digits import digits_of_verdict, exact_digits
from loadpath.trace.model import Step, Trace, Verdict, Working
from loadpath.units.printing import plain

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

    def trace(self) -> Trace:
        sheet = self.plan.resolved.sheet
        self.base = sheet.front.digits
        for planned in self.plan.steps:
            self.steps.append(self._step(planned))
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

    def _work_printed(self, node: Node) -> float:
        return float(self.plan.compiler.compile_tree(node)(self.values, _NO_PARAMETERS))

    # --- one step ---

    def _step(self, planned: Planned) -> Step:
        entry = planned.outline.entry
        blocked = entry.blocked_by
        if self.broken and not blocked:
            blocked = next((self.broken[n] for n in entry.uses if n in self.broken), 0)
        if blocked:
            return self._not_computed(planned, blocked)
        try:
            return self._worked(planned)
        except Failure as failure:
            return self._not_computed(planned, self._report(failure, planned))

    def _worked(self, planned: Planned) -> Step:
        statement = planned.outline.entry.statement
        match statement:
            case Definition():
                si = self._number(planned)
                self.values[statement.name] = si
                working = None if planned.outline.entry.kind == "input" else self._working(planned)
                return Step(planned.outline, si, self.base, working, None, "")
            case Choice(word=word):
                self.values[statement.name] = word
                return Step(planned.outline, word, self.base, None, None, "")
            case Criterion():
                return self._judged(planned, self._criterion(planned))
            case Validity():
                return self._judged(planned, self._validity(planned))
            case Check():
                return self._judged(planned, self._check(planned, statement))
        return Step(planned.outline, None, self.base, None, None, "")

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
        if self.observer is None:
            self.observer = Observer(self.plan.resolved, self.plan.compiler, self.values)
        assert planned.tree is not None
        return self.observer.working(planned.tree)

    def _judged(self, planned: Planned, verdict: Verdict) -> Step:
        return Step(planned.outline, None, self.base, self._working(planned), verdict, "")

    def _not_computed(self, planned: Planned, line: int) -> Step:
        for name in defined_by(planned.outline.entry):
            self.broken[name] = line
        verdict = Verdict(None, conditional_on=planned.assumed) if _is_judged(planned) else None
        return Step(planned.outline, None, self.base, None, verdict, f"not computed because of line {line}")

    def _report(self, failure: Failure, planned: Planned) -> int:
        source = self.plan.resolved.sheet.source
        here = planned.outline.entry.statement.span
        inside = here.start <= failure.span.start < here.end
        remarks = () if inside else (Remark(f"worked for line {planned.outline.entry.line}", here),)
        new = finding(
            failure.slug,
            failure.tell(shower(self.plan.resolved)),
            source,
            failure.span,
            help=failure.help,
            remarks=remarks,
        )
        self.found.append(new)
        return new.line

    # --- judging ---

    def _sides(self, planned: Planned) -> tuple[tuple[Any, ...], ...]:
        compiler = self.plan.compiler
        return tuple(
            tuple(run(work, node, self.values, _NO_PARAMETERS, compiler) for node, work in side)
            for side in planned.sides
        )

    def _criterion(self, planned: Planned) -> Verdict:
        entry = planned.outline.entry
        assert planned.tree is not None
        verdict = judge(
            planned.tree, self._sides(planned), ratios=not any(u.absolute for u in entry.side_units)
        )
        return replace(verdict, conditional_on=planned.assumed) if planned.assumed else verdict

    def _validity(self, planned: Planned) -> Verdict:
        sides = self._sides(planned)
        assert planned.work is not None and planned.tree is not None
        held = run(planned.work, planned.tree, self.values, _NO_PARAMETERS, self.plan.compiler)
        return Verdict(bool(held), sides=sides)

    def _check(self, planned: Planned, statement: Check) -> Verdict:
        ((left, right),) = self._sides(planned)
        compiler = self.plan.compiler
        tolerance = float(
            run(
                compiler.compile_tree(statement.tolerance),
                statement.tolerance,
                self.values,
                _NO_PARAMETERS,
                compiler,
            )
        )
        allowed = tolerance * abs(right) if is_relative(statement.tolerance) else tolerance
        held = abs(left - right) <= allowed * (1 + 1e-9)
        if not held:
            self.found.append(self._failed_check(planned, statement, left, right))
        return Verdict(
            held, sides=((left, right),), within=tolerance, demand=abs(left - right), limit=allowed
        )

    def _failed_check(self, planned: Planned, statement: Check, left: float, right: float) -> Finding:
        unit = planned.outline.entry.side_units[0]

        def show(value: float) -> str:
            return f"{plain(value, exact_digits(value, 6))} {unit.text}".rstrip()

        return finding(
            "check-failed",
            f"the cross-check does not hold: {show(unit.from_si(left))} against {show(unit.from_si(right))}, "
            f"{show(abs(left - right) / unit.size)} apart, within {text(statement.tolerance)} asked",
            self.plan.resolved.sheet.source, statement.relation.at[0],
            help="one of the two ways of working is wrong, or the tolerance is too tight",
        )  # fmt: skip

    # --- what is known only after the whole sheet ---

    def _bring_in_ranges(self) -> None:
        """A criterion that hangs on a name outside its range shows nothing."""
        outside: set[str] = set()
        unknown: dict[str, str] = {}
        for step in self.steps:
            guarded = guarded_by(step.statement)
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
                self.steps[index] = replace(step, verdict=verdict, why=why)
            elif missed := tuple(sorted(planned.ranged & (outside | set(unknown)))):
                why = step.why or next((unknown[name] for name in missed if name in unknown), "")
                verdict = Verdict(None, outside=missed, conditional_on=verdict.conditional_on)
                self.steps[index] = replace(step, verdict=verdict, why=why)
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

"""Working the numbers of a resolved sheet, step by step, and writing the trace meanwhile."""

from __future__ import annotations

import hashlib
from collections import defaultdict
from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from typing import Any

from loadpath.evaluate.numbers import Compiler, Failure, run
from loadpath.evaluate.verdicts import judge
from loadpath.evaluate.working import Observer
from loadpath.findings import Finding, Remark, finding, ordered
from loadpath.formula.statements import Check, Choice, Criterion, Definition, FunctionDefinition, Validity
from loadpath.formula.tree import Logic, Node, Quantity, Relation
from loadpath.resolve import Entry, Resolved
from loadpath.sheet.model import Formulas, Heading, Image, Sheet
from loadpath.text import Span
from loadpath.trace.digits import digits_of_verdict
from loadpath.trace.model import Step, Trace, Verdict


def evaluate(resolved: Resolved) -> Trace:
    """The trace of a sheet. Never raises for a user's mistake."""
    return _Evaluator(resolved).run()


@dataclass
class _Evaluator:
    resolved: Resolved
    values: dict[str, Any] = field(default_factory=dict)
    steps: list[Step] = field(default_factory=list)
    found: list[Finding] = field(default_factory=list)
    broken: dict[str, int] = field(default_factory=dict)
    """Names that could not be computed, with the line to blame."""
    reach: dict[str, tuple[frozenset[str], frozenset[str]]] = field(default_factory=dict)
    """For each name: the open assumptions and the names without a valid range that it hangs on."""
    invalid: set[str] = field(default_factory=set)
    least_digits: dict[str, int] = field(default_factory=lambda: defaultdict(int))
    """Digits that a verdict needs of a name, to be seen in its result."""

    def __post_init__(self) -> None:
        sheet = self.resolved.sheet
        functions = {e.name: e.statement for e in self.resolved.entries if isinstance(e.statement, FunctionDefinition)}
        self.compiler = Compiler(functions)
        self.observer = Observer(self.resolved, self.compiler, self.values)
        self.open = frozenset(a.key for a in sheet.front.assumptions if a.confirm)

    def run(self) -> Trace:
        sheet = self.resolved.sheet
        self.invalid = self._ranges_to_come()
        sections, numbers = _numbering(sheet)
        for entry, number in zip(self.resolved.entries, numbers, strict=False):
            self.steps.append(self._step(entry, number))
        self._judge_all()
        steps = _linked(self._with_digits())
        found = ordered(sheet.findings + self.resolved.findings + tuple(self.found))
        return Trace(self.resolved, steps, sections, found, digest(sheet), self._work_printed)

    def _work_printed(self, node: Node) -> float:
        return float(self.compiler.compile_tree(node)(self.values, {}))

    # --- one step ---

    def _step(self, entry: Entry, number: str) -> Step:
        front = self.resolved.sheet.front
        sources = tuple(dict.fromkeys(key for note in entry.statement.notes for key, _ in note.citations))
        self._hang(entry, sources)
        step = Step(entry, number, None, front.digits, None, None, "", sources)
        blocked = entry.blocked_by or next((self.broken[n] for n in entry.uses if n in self.broken), 0)
        if blocked:
            return self._not_computed(step, blocked)
        try:
            return self._worked(step)
        except Failure as failure:
            return self._not_computed(step, self._report(failure, entry))

    def _hang(self, entry: Entry, sources: tuple[str, ...]) -> None:
        open_here = frozenset(sources) & self.open
        feeding = [self.reach[name] for name in entry.uses if name in self.reach]
        assumed = open_here.union(*(a for a, _ in feeding))
        ranged = frozenset(n for n in entry.uses if n in self.invalid).union(*(r for _, r in feeding))
        self.reach[entry.name or entry.id] = (assumed, ranged)

    def _not_computed(self, step: Step, line: int) -> Step:
        for name in (step.entry.name,) if step.entry.name else getattr(step.statement, "names", ()):
            self.broken[name] = line
        verdict = Verdict(None) if _is_judged(step) else None
        return replace(step, why=f"not computed because of line {line}", verdict=verdict)

    def _report(self, failure: Failure, entry: Entry) -> int:
        source = self.resolved.sheet.source
        here = entry.statement.span
        inside = here.start <= failure.span.start < here.end
        remarks = () if inside else (Remark(f"worked for line {entry.line}", here),)
        new = finding(failure.slug, failure.message, source, failure.span, help=failure.help, remarks=remarks)
        self.found.append(new)
        return new.line

    def _worked(self, step: Step) -> Step:
        statement = step.statement
        match statement:
            case Definition(value=value):
                si = self._number(value)
                self.values[statement.name] = si
                working = None if step.kind == "input" else self.observer.working(value)
                return replace(step, si=si, working=working)
            case Choice(word=word):
                self.values[statement.name] = word
                return replace(step, si=word)
            case Criterion(relation=relation):
                return self._criterion(step, relation)
            case Validity(relation=relation):
                return self._validity(step, relation)
            case Check():
                return self._check(step, statement)
        return step

    def _number(self, node: Node) -> float:
        return float(run(self.compiler.compile_tree(node), node, self.values, {}, self.compiler))

    def _sides(self, relation: Node) -> tuple[tuple[Any, ...], ...]:
        relations = relation.operands if isinstance(relation, Logic) else (relation,)
        sides = []
        for one in relations:
            if isinstance(one, Logic):
                sides += list(self._sides(one))
            elif isinstance(one, Relation):
                sides.append(tuple(run(self.compiler.compile_tree(o), o, self.values, {}, self.compiler) for o in one.operands))
        return tuple(sides)

    # --- judging ---

    def _criterion(self, step: Step, relation: Node) -> Step:
        sides = self._sides(relation)
        verdict = judge(relation, sides, ratios=not step.unit.absolute and step.unit.text not in ("degC", "degF"))
        return replace(step, verdict=verdict, working=self.observer.working(relation))

    def _validity(self, step: Step, relation: Node) -> Step:
        sides = self._sides(relation)
        held = bool(run(self.compiler.compile_tree(relation), relation, self.values, {}, self.compiler))
        return replace(step, verdict=Verdict(held, sides=sides), working=self.observer.working(relation))

    def _check(self, step: Step, statement: Check) -> Step:
        ((left, right),) = self._sides(statement.relation)
        tolerance = self._number(statement.tolerance)
        relative = isinstance(statement.tolerance, Quantity) and statement.tolerance.parts[0].unit in ("%", "ppm")
        allowed = tolerance * abs(right) if relative else tolerance
        held = abs(left - right) <= allowed * (1 + 1e-9)
        verdict = Verdict(held, sides=((left, right),), within=tolerance, demand=abs(left - right), limit=allowed)
        step = replace(step, verdict=verdict, working=self.observer.working(statement.relation))
        if not held:
            self.found.append(self._failed_check(step, statement, left, right, tolerance))
        return step

    def _failed_check(self, step: Step, statement: Check, left: float, right: float, tolerance: float) -> Finding:
        from loadpath.formula.canonical import text
        from loadpath.units.printing import plain

        def show(si: float) -> str:
            return f"{plain(step.unit.from_si(si), 6)} {step.unit.text}".strip()

        return finding(
            "check-failed",
            f"the cross-check does not hold: {show(left)} against {show(right)}, {show(abs(left - right))} apart, within {text(statement.tolerance)} asked",
            self.resolved.sheet.source, statement.relation.at[0], help="one of the two ways of working is wrong, or the tolerance is too tight",
        )  # fmt: skip

    def _ranges_to_come(self) -> set[str]:
        """Names that some validity is stated for: which of them lie outside is known only after the whole sheet."""
        return {name for e in self.resolved.entries if isinstance(e.statement, Validity) for name, _ in e.statement.names}

    def _judge_all(self) -> None:
        """Brings assumptions and ranges into the verdicts, now that every validity is known."""
        outside = {
            name
            for step in self.steps
            if isinstance(step.statement, Validity) and (step.verdict is None or not step.verdict.satisfied)
            for name, _ in step.statement.names
        }
        for index, step in enumerate(self.steps):
            if step.verdict is None or step.kind in ("valid", "check"):
                continue
            assumed, ranged = self.reach[step.entry.name or step.id]
            missed = tuple(sorted(ranged & outside))
            verdict = replace(step.verdict, conditional_on=self._in_order(assumed), outside=missed)
            if missed and verdict.satisfied is not None:
                verdict = replace(verdict, satisfied=None, utilisation=None, one_sided=False, margin=None)
            if verdict.one_sided:
                self.found.append(self._one_sided(step, verdict))
            self.steps[index] = replace(step, verdict=verdict)

    def _in_order(self, keys: frozenset[str]) -> tuple[str, ...]:
        return tuple(a.key for a in self.resolved.sheet.front.assumptions if a.key in keys)

    def _one_sided(self, step: Step, verdict: Verdict) -> Finding:
        relation = step.statement.relation  # type: ignore[attr-defined]
        at: Span = relation.operands[verdict.part].at[0] if isinstance(relation, Logic) else relation.at[0]
        return finding(
            "one-sided", f"`{step.id}` holds a value against a bound of the other sign: the other side is not looked at",
            self.resolved.sheet.source, at,
            help="write `abs(...)` for the magnitude, or a chain `-b <= x <= b` for both sides",
        )  # fmt: skip

    # --- digits that the verdicts need ---

    def _with_digits(self) -> list[Step]:
        digits = self.resolved.sheet.front.digits
        for step in self.steps:
            if isinstance(step.statement, Criterion) and step.verdict is not None and step.verdict.sides:
                needed, names = digits_of_verdict(step, digits)
                for name in names:
                    self.least_digits[name] = max(self.least_digits[name], needed)
        steps = []
        for step in self.steps:
            least = self.least_digits.get(step.entry.name, 0) if step.kind == "result" else 0
            steps.append(replace(step, digits=max(digits, least)))
        return steps


def _is_judged(step: Step) -> bool:
    return step.kind in ("criterion", "check", "valid") or getattr(step.statement, "criterion", None) is not None


def _linked(steps: list[Step]) -> tuple[Step, ...]:
    """The trails, both ways."""
    owner: dict[str, str] = {}
    for step in steps:
        for name in (step.entry.name,) if step.entry.name else getattr(step.statement, "names", ()):
            owner.setdefault(name, step.id)
    used_by: dict[str, list[str]] = defaultdict(list)
    uses: dict[str, tuple[str, ...]] = {}
    for step in steps:
        uses[step.id] = tuple(dict.fromkeys(owner[n] for n in step.entry.uses if n in owner))
        for id in uses[step.id]:
            used_by[id].append(step.id)
    return tuple(replace(s, uses=uses[s.id], used_by=tuple(used_by[s.id])) for s in steps)


def _numbering(sheet: Sheet) -> tuple[tuple[tuple[int, str], ...], Iterator[str]]:
    """Section number (0 for lower headings) and text of each heading; step numbers in reading order."""
    levels = [b.level for b in sheet.blocks if isinstance(b, Heading) and not is_title(b, sheet)]
    top = min(levels, default=1)
    sections: list[tuple[int, str]] = []
    numbers: list[str] = []
    section = step = 0
    for block in sheet.blocks:
        if isinstance(block, Heading):
            if block.level == top and not is_title(block, sheet):
                section, step = section + 1, 0
                sections.append((section, block.text))
            else:
                sections.append((0, block.text))
        elif isinstance(block, Formulas):
            for _ in block.statements:
                step += 1
                numbers.append(f"{section}.{step}")
    return tuple(sections), iter(numbers)


def is_title(heading: Heading, sheet: Sheet) -> bool:
    """True for a heading that only repeats the sheet's title."""
    return heading.level == 1 and heading.text.strip() == sheet.front.title.strip()


def digest(sheet: Sheet) -> str:
    """SHA-256 of all that a sheet is issued from: its text, each `project.yaml`, each image, each with its length."""
    total = hashlib.sha256()
    parts = [sheet.source.text.encode(), *(text.encode() for text in sheet.project_texts)]
    parts += [block.data for block in sheet.blocks if isinstance(block, Image)]
    for part in parts:
        total.update(str(len(part)).encode() + b":" + part)
    return total.hexdigest()



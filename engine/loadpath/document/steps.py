"""Step rows: one function for each kind of step."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass, field
from textwrap import dedent

from loadpath.document.model import (
    BranchRow,
    CallLine,
    Cited,
    CriterionBox,
    FaultyRow,
    FunctionRow,
    Head,
    Inline,
    InputRow,
    JudgedRow,
    Line,
    Ref,
    ResultRow,
    StepBlock,
)
from loadpath.document.solutions import solution_row, unknown_row
from loadpath.document.tables import column_block, judged_lines, said_of_rows, table_block, value_table
from loadpath.findings import Finding
from loadpath.formula.names import plain_symbol
from loadpath.formula.statements import (
    Check,
    Choice,
    Column,
    Criterion,
    Definition,
    Faulty,
    FunctionDefinition,
    Note,
    Plot,
    Solution,
    Statement,
    Table,
    Tabulate,
    Unknown,
    Validity,
)
from loadpath.formula.tree import Binary, Call, Cases, Logic, Name, Node, Number, Quantity, Relation, Shown
from loadpath.resolve import expressions, is_looking
from loadpath.trace import Called, Step, Trace, Working, criterion_kind, criterion_name, texts
from loadpath.trace.digits import exact_digits, ratio_text, typed_number
from loadpath.trace.file import verdict_words
from loadpath.trace.substitute import shown, substitute, with_factors
from loadpath.units import parse_unit
from loadpath.units.printing import plain, unit_symbol


@dataclass
class StepWriter:
    """Writes the rows of one trace."""

    trace: Trace
    findings: dict[int, list[Finding]] = field(default_factory=lambda: defaultdict(list))
    """By index of the step in whose lines they stand."""
    figures: int = 0
    """Figures so far, images of the sheet included."""

    def __post_init__(self) -> None:
        front = self.trace.sheet.front
        self.kinds = {s.key: "source" for s in front.sources} | {
            a.key: "assumption" for a in front.assumptions
        }

    def write(self, index: int) -> StepBlock | None:
        """The row of one step; None for a column, which stands in the block of its table."""
        step = self.trace.steps[index]
        head = self.head(step, tuple(self.findings[index]))
        statement = step.statement
        match statement:
            case Criterion():
                return self._criterion(step, statement, head)
            case _ if step.kind == "faulty" and criterion_kind(step):
                return self._faulty_criterion(step, head)
            case _ if step.kind == "faulty":
                return FaultyRow(head, _as_typed(statement))
            case Definition() if step.kind == "input":
                return self._input(step, statement, head)
            case Choice():
                return InputRow(
                    head, statement.name, None, Shown(statement.word, "", True), statement.options
                )
            case Definition() if step.rows:
                return column_block(self, step, statement, head)
            case Definition():
                return self._result(step, statement, head)
            case FunctionDefinition():
                return self._function(step, statement, head)
            case Validity() | Check():
                return self._judged(step, statement, head)
        return self._several(step, head, index)

    def _several(self, step: Step, head: Head, index: int) -> StepBlock | None:
        statement = step.statement
        match statement:
            case Unknown():
                return unknown_row(self, step, statement, head)
            case Solution():
                return solution_row(self, step, statement, head)
            case Table():
                return table_block(self, step, statement, head, index)
            case Column():
                return None
            case Tabulate():
                return value_table(self, step, statement, head)
            case Plot():
                from loadpath.document.plots import plot_block

                self.figures += 1
                return plot_block(self, step, statement, head, self.figures)
        raise TypeError(type(statement).__name__)

    # --- parts ---

    def head(self, step: Step, findings: tuple[Finding, ...]) -> Head:
        by_id = self.trace.by_id
        from_, to = [by_id[i] for i in step.uses], [by_id[i] for i in step.used_by]
        return Head(
            step.number,
            step.kind,
            self.inlines(_own_notes(step.statement)),
            tuple(ref(s) for s in from_),
            tuple(ref(s) for s in to),
            findings,
            step.why,
        )

    def inlines(self, notes: tuple[Note, ...]) -> tuple[Inline, ...]:
        """Notes as text and citations."""
        parts: list[Inline] = []
        for note in notes:
            if parts and note.text:
                parts.append("; ")
            parts += self._note(note)
        return tuple(p for p in parts if p != "")

    def _note(self, note: Note) -> list[Inline]:
        parts: list[Inline] = []
        rest = note.text
        for key, _ in note.citations:
            before, _, rest = rest.partition("[")
            inside, _, rest = rest.partition("]")
            parts += [before, Cited(key or inside, self.kinds.get(key, ""))]
        return [*parts, rest]

    # --- inputs and results ---

    def _input(self, step: Step, statement: Definition, head: Head) -> StepBlock:
        value = texts.display(step)
        if value is None:
            return self._result(step, statement, head)
        same = typed_number(statement.value, step.unit) == value.number
        return InputRow(head, statement.name, None if same else statement.value, value)

    def _result(self, step: Step, statement: Definition, head: Head) -> ResultRow:
        working = step.working
        name = Name(statement.name)
        if working is None:
            typed = statement.value if not isinstance(statement.value, Cases) else None
            branches = self.branches(statement, statement.value, None)
            return ResultRow(head, name, (typed,) if typed else (), None, True, branches)
        put = texts.step_substitution(self.trace, step)
        sides = (working.tree, *((put.tree,) if put and not isinstance(put.tree, Shown) else ()))
        if working.typed is not None:
            sides = (working.typed, *sides)
        lines = (*self.lines(working), *self.further_digits(put))
        alone = working.look
        calls = () if alone else self.calls(working)
        closes = put.closes if put else True
        if alone is not None:
            look = self._look(alone, working)
            closes = look.closes
            sides += look.sides or ((look.call,) if look.call != working.tree else ())
            lines += look.conditions
        return ResultRow(
            head,
            name,
            sides if not working.taken else sides[1:] or sides,
            texts.display(step),
            closes,
            self.branches(statement, statement.value, working),
            lines,
            calls,
            None if working.typed is None else 0 if working.taken else 1,
        )

    def branches(self, statement: Statement, value: Node, working: Working | None) -> tuple[BranchRow, ...]:
        """The branches of a `cases`, the taken one marked, its condition with numbers."""
        if not isinstance(value, Cases):
            return ()
        taken = working.taken.index if working and working.taken else -1
        seen = texts.conditions(self.trace, working) if working is not None else ()
        return tuple(
            BranchRow(
                b.value,
                b.condition,
                i == taken,
                tuple(c.evaluated for c in seen[i]) if i < len(seen) else (),
                self.inlines(
                    _notes_between(
                        statement,
                        b.span.start,
                        value.branches[i + 1].span.start if i + 1 < len(value.branches) else None,
                    )
                ),
            )
            for i, b in enumerate(value.branches)
        )

    def typed_value(self, node: Node) -> Shown:
        """The value of a cell of a two-way table: as typed, or worked out."""
        if isinstance(node, Quantity) and len(node.parts) == 1 and not node.parts[0].over:
            return Shown(node.parts[0].whole, node.parts[0].unit)
        if isinstance(node, Number):
            return Shown(node.text, "")
        found = self.trace.resolved.checker.type_of(node)
        unit = self.trace.resolved.system.unit_for(found.dimension, found.absolute)
        value = unit.from_si(self.trace.work(node))
        return Shown(plain(value, exact_digits(value, self.trace.sheet.front.digits)), unit.text)

    def further_digits(self, put: texts.Substitution | None) -> tuple[Line, ...]:
        """Says so where a substitution shows more digits than the results that its values come from."""
        return (_FURTHER,) if put and put.more else ()

    def lines(self, working: Working) -> tuple[Line, ...]:
        """What is said beneath a step: what governed, what was rounded, which place was looked at."""
        out = []
        for aside in working.asides:
            parts = (
                f"{aside.before} " if aside.before else "",
                aside.tree,
                f" {aside.after}" if aside.after else "",
            )
            out.append(Line(tuple(p for p in parts if p != "")))
        return tuple(out)

    def calls(self, working: Working) -> tuple[CallLine, ...]:
        """Each call with its way, those inside it beneath it."""
        out: list[CallLine] = []
        for called in working.calls:
            out.append(self._call(called, working))
            out += self.calls(called.working)
        return tuple(out)

    def _call(self, called: Called, outer: Working) -> CallLine:
        if is_looking(called.call):
            return self._look(called, outer)
        call = Call(called.call.function, tuple(shown(operand) for _, operand in called.arguments))
        put = texts.call_substitution(self.trace, called)
        typed: tuple[Node, ...] = ()
        if any(not isinstance(a, Name | Number | Quantity) for a in called.call.arguments):
            scope = texts.scope_of(self.trace, outer)
            put_in = tuple(
                with_factors(substitute(a, scope, outer.calls), operand.unit)
                for a, (_, operand) in zip(called.call.arguments, called.arguments, strict=True)
            )
            typed = (called.call, Call(called.call.function, put_in))
        sides = (called.working.tree, *((put.tree,) if put and not isinstance(put.tree, Shown) else ()))
        lines = _branch_lines(called.working, texts.conditions(self.trace, called.working))
        lines += [*self.lines(called.working), *self.further_digits(put)]
        return CallLine(call, sides, shown(called.value), put.closes if put else True, tuple(lines), typed)

    def _look(self, called: Called, outer: Working) -> CallLine:
        """A call that looks at a whole expression or column: its value, and what was looked at."""
        put = texts.call_substitution(self.trace, called)
        sides = (put.tree,) if put else ()
        call, more = texts.looked_call(self.trace, called, outer)
        more = max(more, put.more if put else 0)
        lines = (*self.lines(called.working), *((_FURTHER,) if more else ()))
        return CallLine(call, sides, shown(called.value), put.closes if put else True, lines)

    def _function(self, step: Step, statement: FunctionDefinition, head: Head) -> FunctionRow:
        name = Call(statement.name, tuple(Name(p.name) for p in statement.parameters))
        asked = [(p.name, p.unit.text) for p in statement.parameters if p.unit]
        if statement.unit:
            asked.append((statement.name, statement.unit.text))
        units: list[str | Node] = []
        for n, unit in asked:
            words = " plain" if unit == "1" else f" in {unit_symbol(unit)}"
            units += [", ", Name(n), words]
        body = None if isinstance(statement.body, Cases) else statement.body
        working = step.working
        derived = None if working is None or isinstance(working.tree, Cases) else _derived(step)
        value = working.tree if working and body is None else statement.body
        branches = self.branches(statement, value, None)
        lines = self.lines(working) if working else ()
        return FunctionRow(head, name, body, branches, Line(tuple(units[1:])), derived, lines)

    # --- judged steps ---

    def _criterion(self, step: Step, statement: Criterion, head: Head) -> CriterionBox:
        verdict = step.verdict
        assert verdict is not None
        ratio = ratio_text(verdict)
        return CriterionBox(
            head,
            statement.kind,
            statement.name,
            statement.relation,
            self._compared_lines(step),
            ratio,
            verdict.utilisation,
            self._margin(step),
            verdict_words(step, plain_symbol),
            is_listed(step),
            verdict.satisfied is not None,
            verdict.satisfied,
            (*self._governing(step, statement), *self._said(step)),
            self.calls(step.working) if step.working and not step.rows else (),
            rows=judged_lines(self, step),
            derived=_derived(step),
            closes=self._closes(step),
        )

    def _said(self, step: Step) -> tuple[Line, ...]:
        if step.rows:
            return said_of_rows(self, step)
        return self.lines(step.working) if step.working else ()

    def _faulty_criterion(self, step: Step, head: Head) -> CriterionBox:
        kind = criterion_kind(step)
        name = criterion_name(step) if criterion_name(step) != step.id else ""
        return CriterionBox(
            head,
            kind,  # type: ignore[arg-type]
            name,
            None,
            (),
            "",
            None,
            None,
            verdict_words(step, plain_symbol),
            True,
            False,
            None,
            typed=_as_typed(step.statement),
        )

    def _compared_lines(self, step: Step) -> tuple[Node, ...]:
        """First with values in place of names, where a side is worked out; then each side as one number."""
        return self.lines_of(step, texts.compared(self.trace, step))

    def _closes(self, step: Step) -> bool:
        return bool(step.rows) or all(c.closes for c in texts.compared(self.trace, step))

    def lines_of(self, step: Step, compared: tuple[texts.Compared, ...]) -> tuple[Node, ...]:
        """The same, of one row where it is judged row by row."""
        if not compared:
            return ()
        statement = step.statement
        relation: Node = statement.relation  # type: ignore[attr-defined]
        lines = []
        if any(c.substituted is not None for c in compared):
            lines.append(texts.rejoined(relation, [c.substituted or c.evaluated for c in compared]))
        with_length = isinstance(statement, Criterion)
        lines.append(
            texts.rejoined(relation, [_with_length(c) if with_length else c.evaluated for c in compared])
        )
        return tuple(dict.fromkeys(lines))

    def _governing(self, step: Step, statement: Criterion) -> tuple[Line, ...]:
        """Which part of a chain or of an `or` governs."""
        verdict, relation = step.verdict, statement.relation
        if verdict is None or verdict.satisfied is None:
            return ()
        if isinstance(relation, Logic):
            return (Line(("governed by ", relation.operands[verdict.part])),)
        if isinstance(relation, Relation) and len(relation.signs) == 2:
            i = verdict.part
            return (Line(("governed by ", Relation(relation.operands[i : i + 2], (relation.signs[i],)))),)
        return ()

    def _margin(self, step: Step) -> Shown | None:
        verdict = step.verdict
        if verdict is None or verdict.margin is None or verdict.satisfied is None:
            return None
        units = step.entry.side_units
        unit = units[min(verdict.part, len(units) - 1)] if units else step.unit
        if unit.absolute:
            unit = parse_unit("K" if unit.text == "degC" else "delta_degF")
        margin = verdict.margin / unit.size
        return Shown(
            plain(margin, min(exact_digits(margin, step.digits), step.digits)),
            "in" if unit.text.startswith("ft-in") else unit.text,
        )

    def _judged(self, step: Step, statement: Validity | Check, head: Head) -> JudgedRow:
        if isinstance(statement, Validity):
            names = [part for name, _ in statement.names for part in (", ", Name(name))]
            words = Line(("for ", *names[1:]))
        else:
            words = Line(("within ", statement.tolerance))
        holds = step.verdict.satisfied if step.verdict else None
        verdict = verdict_words(step, plain_symbol)
        calls = self.calls(step.working) if step.working and not step.rows else ()
        lines = () if step.rows else self._compared_lines(step)
        rows = judged_lines(self, step)
        return JudgedRow(
            head, statement.relation, lines, words, verdict, holds, calls, rows, _derived(step),
            self._closes(step),
        )


def _derived(step: Step) -> Node | None:
    """What algebra made of a relation."""
    return step.working.tree if step.working is not None and step.working.typed is not None else None


# --- helpers ----------------------------------------------------------------------------------------------


def _branch_lines(working: Working, conditions: tuple[tuple[texts.Compared, ...], ...]) -> list[Line]:
    """Which branch of a function's `cases` was taken and why, a line a branch."""
    if working.taken is None:
        return []
    lines = []
    for index, compared in enumerate(conditions):
        word = "taken" if index == working.taken.index else "not taken"
        parts: list[str | Node] = [f"{word}: when " if compared else f"{word}: otherwise"]
        for each in compared:
            parts += [each.formula, ", as ", each.evaluated, "; "]
        lines.append(Line(tuple(parts[:-1] if compared else parts)))
    return lines


_FURTHER = Line(("values with further digits, which lead to the printed result",))


def _notes_between(statement: Statement, start: int, end: int | None) -> tuple[Note, ...]:
    """The notes on the lines of one branch."""
    return tuple(n for n in statement.notes if n.span.start >= start and (end is None or n.span.start < end))


def _own_notes(statement: Statement) -> tuple[Note, ...]:
    """The notes of a statement itself; those on the branches of its `cases` and on the equations of a
    `solve for` stand there."""
    if isinstance(statement, Solution):
        of_equations = {note.span for notes in statement.together.notes for note in notes}
        return tuple(note for note in statement.notes if note.span not in of_equations)
    tree = next((t for t in expressions(statement) if isinstance(t, Cases)), None)
    return (
        statement.notes
        if tree is None
        else tuple(n for n in statement.notes if n.span.start < tree.branches[0].span.start)
    )


def ref(step: Step) -> Ref:
    """A link to a step, by name and number."""
    if step.verdict is not None or not step.entry.name:
        words = step.kind if step.kind in ("valid", "check", "plot") else step.id
        words = "table" if isinstance(step.statement, Tabulate) else words
        return Ref(step.number, words, is_name=False)
    return Ref(step.number, step.entry.name)


def _as_typed(statement: Statement) -> str:
    """The lines of a statement that could not be read, without the depth of its block."""
    return dedent(statement.text).strip() if isinstance(statement, Faulty) else ""


def is_listed(step: Step) -> bool:
    """True for a criterion that stands in the front list: whatever is not plainly satisfied."""
    verdict = step.verdict
    return verdict is not None and (
        verdict.satisfied is not True or verdict.one_sided or bool(verdict.conditional_on)
    )


def _with_length(compared: texts.Compared) -> Relation:
    """`12.003 mm = L/499.9 <= 12 mm`: a demand against L/n printed as L/n too."""
    evaluated = compared.evaluated
    if compared.per_length is None:
        return evaluated
    index, length, number = compared.per_length
    as_length = Binary("/", length, Shown(number, ""))
    operands, signs = list(evaluated.operands), list(evaluated.signs)
    operands.insert(index + 1, as_length)
    signs.insert(index, "=")
    return Relation(tuple(operands), tuple(signs))

"""From a trace to a document: the front, the body in reading order, the registers, the title block."""

from __future__ import annotations

from bisect import bisect_right
from collections import defaultdict
from typing import Any

from loadpath.document.model import (
    AssumptionEntry,
    Block,
    Cited,
    CriterionBox,
    CriterionEntry,
    Document,
    FigureBlock,
    InputEntry,
    InputRow,
    OpenAssumption,
    PlotBlock,
    Prose,
    ProseBlock,
    Ref,
    Registers,
    RevisionEntry,
    SectionHead,
    SourceEntryRow,
    Summary,
    TableBlock,
    TitleBlock,
    VerdictLine,
)
from loadpath.document.steps import StepWriter, is_listed, ref
from loadpath.findings import Finding
from loadpath.formula.binding import free_names
from loadpath.formula.names import plain_symbol
from loadpath.formula.statements import Column, Criterion
from loadpath.formula.tree import Shown
from loadpath.sheet import Formulas, Heading, Image, Value, Words
from loadpath.sheet import Prose as SheetProse
from loadpath.sheet.values import pieces
from loadpath.text import Span
from loadpath.trace import Step, Trace, criterion_kind, criterion_name, texts
from loadpath.trace.digits import ratio_text
from loadpath.trace.file import verdict_words

KINDS = ("strength", "stiffness", "stability")
MOST_FINDINGS = 200
"""Findings that a document lists; of more it says how many there are."""
NO_REVIEW = "no review on record"
MOST_WITHIN = 101
"""Steps that may share the lines of one statement, and the statement itself."""


def build(trace: Trace, version: str) -> Document:
    """The document of an evaluated and audited sheet."""
    return _Builder(trace, version).run()


class _Builder:
    def __init__(self, trace: Trace, version: str) -> None:
        self.trace, self.version = trace, version
        self.front = trace.sheet.front
        self.writer = StepWriter(trace)
        self.listed = trace.findings[:MOST_FINDINGS]
        self.judged = {s.number: s for s in trace.criteria}
        self.placed: dict[int, str] = {}
        """Anchor of the place where each finding stands, by its index."""

    def run(self) -> Document:
        self.values = self._values()
        blocks = self._blocks()
        front = self.front
        loose = tuple(
            f for i, f in enumerate(self.listed) if i not in self.placed and f.severity != "note"
        )
        return Document(
            front.language or "en",
            front.page,
            front.title or "Untitled",
            front.subtitle,
            self._about(),
            self._alerts(),
            self._summary(),
            blocks,
            loose,
            self._registers(blocks),
            self._title_block(),
            self.values,
            tuple(b for b in blocks if isinstance(b, FigureBlock | PlotBlock)),
            self.trace.sheet.source,
        )

    # --- values in prose ---

    def _values(self) -> dict[Any, Shown | str]:
        found = [*self.front.objective.values, *self.front.method.values, *self.front.conclusion.values]
        for block in self.trace.sheet.blocks:
            if isinstance(block, SheetProse):
                found += block.values
            elif isinstance(block, Heading):
                found += [t.meta["value"] for t in (block.tokens.children or ()) if t.type == "value"]
        return {value: self._print_value(value) for value in found}

    def _print_value(self, value: Value) -> Shown | str:
        unit = self.trace.resolved.values.get(value)
        step = self.trace.by_name.get(value.name)
        if unit is None or step is None:
            return value.typed
        return (
            texts.display(step, unit if value.unit else None)
            or f"[{value.name} {step.why or 'not computed'}]"
        )

    def _words(self, words: Words) -> Prose:
        parts = (self.values.get(p, p.typed) if isinstance(p, Value) else p for p in pieces(words))
        return tuple(part for part in parts if part != "")

    # --- front ---

    def _about(self) -> tuple[str, ...]:
        front = self.front
        number = ", ".join(
            p
            for p in (front.number, f"revision {front.revision}" if front.revision else "", front.status)
            if p
        )
        client = f"for {front.client}" if front.client else ""
        document = f"document {front.client_document}" if front.client_document else ""
        return tuple(p for p in (number, front.project, ", ".join(p for p in (client, document) if p)) if p)

    def _alerts(self) -> tuple[str, ...]:
        errors = sum(f.severity == "error" for f in self.trace.findings)
        open_ = sum(a.confirm for a in self.front.assumptions)
        alerts = [f"Not for use: {_count(errors, 'error')}"] if errors else []
        if self.front.status.startswith("superseded"):
            alerts.append(self.front.status[0].upper() + self.front.status[1:])
        state = f"Not checked: {NO_REVIEW}."
        if open_:
            state += f" {_count(open_, 'assumption')} to be confirmed."
        return (*alerts, state)

    def _summary(self) -> Summary:
        front, criteria = self.front, self.trace.criteria
        return Summary(
            _conclusion(criteria),
            tuple(_verdict_line(s) for s in sorted(filter(is_listed, criteria), key=_weight)),
            self._words(front.conclusion),
            self._words(front.objective),
            self._words(front.method),
            tuple(self._governing(kind) for kind in KINDS),
            self._to_confirm(),
            NO_REVIEW,
        )

    def _governing(self, kind: str) -> VerdictLine:
        of_kind = [s for s in self.trace.criteria if criterion_kind(s) == kind]
        if of_kind:
            return _verdict_line(min(of_kind, key=_weight))
        reason = dict(self.front.not_applicable).get(kind, "")
        return VerdictLine(
            kind,
            None,
            "",
            f"does not apply: {reason}" if reason else "no criterion and no reason given",
            not reason,
        )

    def _to_confirm(self) -> tuple[OpenAssumption, ...]:
        out = []
        for assumption in self.front.assumptions:
            if assumption.confirm:
                hanging = [
                    ref(s)
                    for s in self.trace.criteria
                    if s.verdict and assumption.key in s.verdict.conditional_on
                ]
                out.append(OpenAssumption(assumption.key, assumption.text, tuple(hanging)))
        return tuple(out)

    # --- body ---

    def _blocks(self) -> tuple[Block, ...]:
        by_block = self._place_findings()
        blocks: list[Block] = []
        headings = iter(self.trace.sections)
        levels = (b.level for b in self.trace.sheet.blocks if isinstance(b, Heading))
        top = next(
            (level for level, (number, _) in zip(levels, self.trace.sections, strict=True) if number), 1
        )
        step = 0
        above = 2
        for index, block in enumerate(self.trace.sheet.blocks):
            if isinstance(block, Heading):
                number, _ = next(headings)
                if (
                    number or block.level > 1
                ):  # the only heading of level 1 without a number is the title again
                    above = 2 if number else min(max(block.level - top + 2, 3), above + 1, 6)
                    blocks.append(SectionHead(above, number, block.tokens, block.text))
            elif isinstance(block, Formulas):
                for _ in block.statements:
                    if step < len(self.trace.steps) and (row := self.writer.write(step)) is not None:
                        blocks.append(row)
                    step += 1
            elif isinstance(block, Image):
                self.writer.figures += 1
                number = self.writer.figures
                blocks.append(
                    FigureBlock(number, block.caption, block.media_type, block.data, by_block[index])
                )
            else:
                blocks.append(ProseBlock(block.tokens, by_block[index]))
        return tuple(blocks)

    def _place_findings(self) -> dict[int, tuple[Finding, ...]]:
        """Gives each finding to the step or block in whose lines it stands."""
        source = self.trace.sheet.source
        by_block: dict[int, tuple[Finding, ...]] = defaultdict(tuple)
        steps = [s.statement.span for s in self.trace.steps]
        blocks = [b.span for b in self.trace.sheet.blocks]
        for number, finding in enumerate(self.listed):
            if finding.span is None or finding.source is not source or finding.severity == "note":
                continue
            owner = _owner(steps, finding.span.start)
            if owner is not None:
                self.writer.findings[owner].append(finding)
                self.placed[number] = f"s{self.trace.steps[owner].number}"
                continue
            index = _owner(blocks, finding.span.start)
            if index is not None and isinstance(self.trace.sheet.blocks[index], SheetProse | Image):
                by_block[index] += (finding,)
                self.placed[number] = f"f{number + 1}"
        return by_block

    # --- registers ---

    def _registers(self, blocks: tuple[Block, ...]) -> Registers:
        front = self.front
        cited: dict[str, list[Ref]] = defaultdict(list)
        for step in self.trace.steps:
            for key in step.sources if not isinstance(step.statement, Column) else ():
                cited[key].append(Ref(step.number))
        findings = tuple(
            (f, self.placed.get(i, f"f{i + 1}" if f.severity != "note" else ""))
            for i, f in enumerate(self.listed)
        )
        return Registers(
            tuple(
                self._input_entry(b) if isinstance(b, InputRow) else self._table_entry(b)
                for b in blocks
                if isinstance(b, InputRow) or (isinstance(b, TableBlock) and _states_values(b))
            ),
            tuple(
                AssumptionEntry(a.key, a.text, _state(a), a.confirm, tuple(cited[a.key]))
                for a in front.assumptions
            ),
            tuple(
                SourceEntryRow(s.key, s.text + (f" ({s.file})" if s.file else ""), tuple(cited[s.key]))
                for s in front.sources
            ),
            tuple(self._criterion_entry(b) for b in blocks if isinstance(b, CriterionBox)),
            findings,
            len(self.trace.findings) - len(self.listed),
            tuple(RevisionEntry(r.letter, r.date, r.by, r.change) for r in front.revisions),
            front.codes,
            front.drawings,
        )

    def _input_entry(self, row: InputRow) -> InputEntry:
        citations = tuple(p for p in row.head.note if isinstance(p, Cited))
        open_keys = {a.key for a in self.front.assumptions if a.confirm}
        note = tuple(p for p in row.head.note if not isinstance(p, Cited))
        return InputEntry(
            Ref(row.head.number, row.name),
            note,
            row.typed,
            row.value,
            citations,
            any(c.key in open_keys for c in citations),
        )

    def _table_entry(self, block: TableBlock) -> InputEntry:
        """A table of data among the design inputs."""
        citations = tuple(p for p in block.head.note if isinstance(p, Cited))
        open_keys = {a.key for a in self.front.assumptions if a.confirm}
        rows = len(block.columns[0].cells) if block.columns else len(block.body)
        columns = len(block.columns) or len(block.across)
        return InputEntry(
            Ref(block.head.number, f"table {plain_symbol(block.name)}", is_name=False),
            tuple(p for p in block.head.note if not isinstance(p, Cited)),
            None,
            f"{_count(columns, 'column')} of {_count(rows, 'row')}",
            citations,
            any(c.key in open_keys for c in citations),
        )

    def _criterion_entry(self, box: CriterionBox) -> CriterionEntry:
        return CriterionEntry(_verdict_line(self.judged[box.head.number]), box.relation)

    # --- title block ---

    def _title_block(self) -> TitleBlock:
        front = self.front
        fingerprint = " ".join(self.trace.digest[i : i + 4] for i in range(0, 16, 4))
        return TitleBlock(
            front.owner,
            front.title or "Untitled",
            front.subtitle,
            front.number,
            ", ".join(p for p in (front.revision, front.status) if p),
            front.created_by,
            _typed_only(front.reviewed_by),
            _typed_only(front.approved_by),
            front.date,
            f"loadpath {self.version} · fingerprint {fingerprint}",
        )


def _states_values(block: TableBlock) -> bool:
    """True for a table of data with values of its own, and not only of names."""
    cells = (cell for column in block.columns for cell in column.cells)
    own = (c for c in cells if c.typed is None or not free_names(c.typed))
    return bool(block.name) and (bool(block.across) or any(c.value and c.value.number != "0" for c in own))


# --- helpers ----------------------------------------------------------------------------------------------


def _owner(spans: list[Span], at: int) -> int | None:
    """Index of the last span that holds an offset; spans begin one after the other, and those of a table's
    columns and of further unknowns lie within that of the first."""
    index = bisect_right(spans, at, key=lambda span: span.start) - 1
    for back in range(min(index + 1, MOST_WITHIN)):
        if spans[index - back].start <= at <= spans[index - back].end:
            return index - back
    return None


def _typed_only(name: str) -> str:
    """A name that no review ledger bears out."""
    return f"{name} (typed, not on record)" if name else ""


def _count(number: int, word: str) -> str:
    return f"{number} {word}{'' if number == 1 else 's'}"


def _state(assumption: Any) -> str:
    if assumption.confirm:
        return "to be confirmed"
    if assumption.confirmed is None:
        return "stated"
    made = assumption.confirmed
    parts = [f"confirmed by {made.by}" if made.by else "confirmed", f"on {made.on}" if made.on else ""]
    return " ".join(p for p in parts if p) + (f", {made.document}" if made.document else "")


def _conclusion(criteria: tuple[Step, ...]) -> tuple[tuple[str, bool], ...]:
    """The first line of the summary, worst first."""
    verdicts = [s.verdict for s in criteria if s.verdict is not None]
    total = len(verdicts)
    if not total:
        return (("No criterion: this sheet shows nothing about strength, stiffness or stability", True),)
    failed = sum(v.satisfied is False for v in verdicts)
    unshown = sum(v.satisfied is None for v in verdicts)
    sided = sum(v.one_sided for v in verdicts)
    conditional = sum(bool(v.conditional_on) and v.satisfied is True for v in verdicts)
    of = f"of {_criteria(total)}"
    phrases: list[tuple[str, bool]] = []
    if failed:
        phrases.append((f"{failed} {of} not satisfied", True))
    if unshown:
        phrases.append((f"{unshown} not shown" if phrases else f"{unshown} {of} not shown", True))
    if sided:
        phrases.append(
            (
                f"{sided} satisfied on one side only"
                if phrases
                else f"{sided} {of} satisfied on one side only",
                True,
            )
        )
    if not phrases:
        phrases.append(
            (f"{total} {of} satisfied" if total > 1 else "The one criterion is satisfied", not conditional)
        )
    if conditional:
        phrases.append((f"{conditional} conditional", True))
    return tuple(phrases)


def conclusion(trace: Trace) -> str:
    """The first line of the summary as plain text, errors first."""
    errors = sum(f.severity == "error" for f in trace.findings)
    said = ", ".join(phrase for phrase, _ in _conclusion(trace.criteria))
    return f"not for use, {_count(errors, 'error')}; {said}" if errors else said


def _criteria(number: int) -> str:
    return f"{number} {'criterion' if number == 1 else 'criteria'}"


def _weight(step: Step) -> tuple[int, float]:
    """Worst first: not satisfied, not shown, one-sided, then by ratio; a failed one outranks any ratio."""
    verdict = step.verdict
    assert verdict is not None
    rank = (
        0 if verdict.satisfied is False else 1 if verdict.satisfied is None else 2 if verdict.one_sided else 3
    )
    return rank, -(verdict.utilisation or 0.0)


def _verdict_line(step: Step) -> VerdictLine:
    verdict = step.verdict
    assert verdict is not None
    name = criterion_name(step)
    is_name = not (isinstance(step.statement, Criterion) and step.statement.name == "")
    strong = verdict.satisfied is not True or verdict.one_sided
    return VerdictLine(
        criterion_kind(step),
        Ref(step.number, name, is_name),
        ratio_text(verdict),
        verdict_words(step, plain_symbol),
        strong,
        step.rows[step.governing].label if step.governing is not None and step.rows else "",
    )

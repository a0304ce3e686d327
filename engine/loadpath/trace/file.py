"""The trace file: plain records that mirror `trace.schema.json`, made from a trace, written as JSON and
read back."""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import asdict, dataclass, fields
from pathlib import PurePath
from typing import Any

from loadpath.findings import Finding
from loadpath.formula.canonical import text
from loadpath.formula.statements import Check, Criterion, Validity
from loadpath.resolve import expressions
from loadpath.trace import texts
from loadpath.trace.model import Step, Trace, Verdict, criterion_kind
from loadpath.units import Unit
from loadpath.units.printing import quantity

SCHEMA = "loadpath-trace/1"


@dataclass(frozen=True, slots=True)
class StepRecord:
    """One step in a trace file; every text as printed, in plain form."""

    id: str
    number: str
    kind: str
    line: int
    formula: str
    substitution: str
    display: str
    value: float | str | list[float] | None
    """In `unit`; of a column a list."""
    unit: str
    si: float | list[float] | None
    """Coherent SI, full precision; of a column a list."""
    uses: list[str]
    used_by: list[str]
    sources: list[str]
    note: str
    why: str
    """Why there is no value, "" where there is one."""
    branch: int | None
    """1-based, of the `cases` branch taken."""
    verdict: str
    """Of a criterion, a validity or a check."""
    derived: str
    """What algebra made of the formula; of an unknown its solution in symbols; "" where there is none."""
    method: str
    """How a solution was found, "" for other steps."""
    rows: list[str]
    """Labels of the rows, where the step goes over a column."""
    governing: str
    """Label of the row that governs a criterion on columns, else ""."""


@dataclass(frozen=True, slots=True)
class CriterionRecord:
    """One criterion in a trace file."""

    step: str
    id: str
    kind: str
    relation: str
    demand: float | None
    limit: float | None
    unit: str
    utilisation: float | None
    margin: float | None
    satisfied: bool | None
    verdict: str
    conditional_on: list[str]
    rows: list[dict[str, Any]]
    """Where it is judged row by row: `row`, `demand`, `limit`, `utilisation`, `satisfied` of each."""


@dataclass(frozen=True, slots=True)
class FindingRecord:
    """One finding in a trace file."""

    slug: str
    severity: str
    line: int
    column: int
    message: str
    help: str
    file: str


@dataclass(frozen=True, slots=True)
class TraceFile:
    """A whole trace file."""

    schema: str
    sheet: dict[str, str]
    """file, title, number, revision, digest"""
    engine: dict[str, str]
    """version"""
    steps: list[StepRecord]
    criteria: list[CriterionRecord]
    findings: list[FindingRecord]

    def to_json(self) -> str:
        """As written beside the document, one line end at the end."""
        return json.dumps(asdict(self), ensure_ascii=False, indent=1) + "\n"

    @staticmethod
    def from_json(data: str) -> TraceFile:
        """A trace file read back. Raises ValueError where it is none."""
        raw = json.loads(data)
        if not isinstance(raw, dict) or raw.get("schema") != SCHEMA:
            raise ValueError(f"not a trace file of schema {SCHEMA}")
        return TraceFile(
            raw["schema"],
            raw["sheet"],
            raw["engine"],
            [_record(StepRecord, s) for s in raw["steps"]],
            [_record(CriterionRecord, c) for c in raw["criteria"]],
            [_record(FindingRecord, f) for f in raw["findings"]],
        )


def _record(kind: type[Any], raw: dict[str, Any]) -> Any:
    return kind(**{f.name: raw[f.name] for f in fields(kind)})


def record(trace: Trace, version: str) -> TraceFile:
    """The file form of a trace."""
    front = trace.sheet.front
    about = {
        "file": PurePath(trace.sheet.source.path).name,
        "title": front.title,
        "number": front.number,
        "revision": front.revision,
        "digest": trace.digest,
    }
    return TraceFile(
        SCHEMA,
        about,
        {"version": version},
        [_step(trace, step) for step in trace.steps],
        [_criterion(step) for step in trace.criteria],
        [finding_record(f) for f in trace.findings],
    )


def _step(trace: Trace, step: Step) -> StepRecord:
    taken = step.working.taken if step.working else None
    return StepRecord(
        step.id,
        step.number,
        step.kind,
        step.line,
        texts.formula(step),
        _substitution(trace, step),
        _display(step),
        list(step.value) if isinstance(step.value, tuple) else step.value,
        step.unit.text,
        list(step.si) if isinstance(step.si, tuple) else step.si if isinstance(step.si, float) else None,
        list(step.uses),
        list(step.used_by),
        list(step.sources),
        step.note,
        step.why,
        taken.index + 1 if taken else None,
        verdict_words(step),
        _derived(step),
        step.solved.method if step.solved else "",
        _rows(step),
        step.rows[step.governing].label if step.governing is not None else "",
    )


def _display(step: Step) -> str:
    """The value as printed; of a column one after the other."""
    if isinstance(step.si, tuple):
        cells = (texts.row_shown(step, i) for i in range(len(step.rows)))
        return ", ".join(quantity(cell.number, cell.unit) for cell in cells if cell)
    shown = texts.display(step)
    if shown is None:
        return ""
    return shown.number if shown.word else quantity(shown.number, shown.unit)


def _derived(step: Step) -> str:
    """What algebra made of the formula, "" where it had nothing to do."""
    if step.working is None or (step.working.typed is None and step.kind != "solution"):
        return ""
    return text(step.working.tree)


def _rows(step: Step) -> list[str]:
    return [row.label for row in step.rows]


def _substitution(trace: Trace, step: Step) -> str:
    if step.verdict is not None:
        compared = texts.compared(trace, step)
        if not compared:
            return ""
        return text(
            texts.rejoined(expressions(step.statement)[0], [c.substituted or c.evaluated for c in compared])
        )
    put = texts.step_substitution(trace, step)
    return text(put.tree) if put else ""


def verdict_words(step: Step, name: Callable[[str], str] = str) -> str:
    """The verdict of a judged step in words; "" for other steps. `name` says how names are written."""
    return "" if step.verdict is None else verdict_words_of(step, step.verdict, name)


def verdict_words_of(step: Step, verdict: Verdict, name: Callable[[str], str] = str) -> str:
    """The same of one of its verdicts, where it is judged row by row."""
    if isinstance(step.statement, Validity | Check):
        return _held(step.statement, verdict.satisfied, step.why, name)
    return verdict.words(step.why, name)


def _held(statement: Validity | Check, held: bool | None, why: str, name: Callable[[str], str]) -> str:
    if held is None:
        return f"not shown: {why}" if why else "not shown"
    if isinstance(statement, Check):
        return "holds" if held else "does not hold"
    return (
        "within the range"
        if held
        else "outside the range of " + ", ".join(name(n) for n, _ in statement.names)
    )


def _criterion(step: Step) -> CriterionRecord:
    verdict = step.verdict
    assert verdict is not None
    units = step.entry.side_units
    unit = units[min(verdict.part, len(units) - 1)] if units else step.unit
    shown = unit if verdict.demand is not None else step.unit

    def of(si: float | None) -> float | None:
        return None if si is None else shown.from_si(si)

    relation = text(step.statement.relation) if isinstance(step.statement, Criterion) else ""
    margin = None if verdict.margin is None else verdict.margin / unit.size
    return CriterionRecord(
        step.number,
        step.id,
        criterion_kind(step),
        relation,
        of(verdict.demand),
        of(verdict.limit),
        unit.text,
        verdict.utilisation,
        margin,
        verdict.satisfied,
        verdict_words(step),
        list(verdict.conditional_on),
        [_row(row.label, row.verdict, shown) for row in step.rows if row.verdict is not None],
    )


def _row(label: str, verdict: Verdict, unit: Unit) -> dict[str, Any]:
    demand, limit = (None if si is None else unit.from_si(si) for si in (verdict.demand, verdict.limit))
    return {
        "row": label,
        "demand": demand,
        "limit": limit,
        "utilisation": verdict.utilisation,
        "satisfied": verdict.satisfied,
    }


def finding_record(finding: Finding) -> FindingRecord:
    """The file form of a finding; the same in `audit --format json`."""
    return FindingRecord(
        finding.slug,
        finding.severity,
        finding.line,
        finding.column,
        finding.message,
        finding.help,
        PurePath(finding.source.path).name,
    )

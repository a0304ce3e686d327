"""Criteria: can each of them fail, does its limit have a source, is there one of every kind?"""

from __future__ import annotations

from collections.abc import Iterator

from loadpath.findings import Finding, finding
from loadpath.formula.statements import Criterion
from loadpath.formula.tree import Call, Name, Node, Relation, walk
from loadpath.functions import FUNCTIONS
from loadpath.resolve import PI
from loadpath.trace.model import Step, Trace, criterion_kind

KINDS = ("strength", "stiffness", "stability")
"""The three things that a design must satisfy."""


def criterion_findings(trace: Trace) -> Iterator[Finding]:
    """`cannot-fail`, `limit-without-source` and `no-criterion`."""
    for step in trace.criteria:
        statement = step.statement
        if isinstance(statement, Criterion):
            yield from _cannot_fail(trace, statement)
            sourced = bool(step.sources) or all(_has_source(trace, limit) for limit in _limits(statement))
            if not sourced and not _has_mistake(trace, step):
                yield _without_source(trace, step, statement)
    yield from _missing_kinds(trace)


def _has_mistake(trace: Trace, step: Step) -> bool:
    """True where the line itself has a finding already."""
    span, source = step.statement.span, trace.sheet.source
    return source.line_number(span.start) <= step.entry.blocked_by <= source.line_number(span.end)


def _relations(statement: Criterion) -> list[Relation]:
    return [node for node in walk(statement.relation) if isinstance(node, Relation)]


def _cannot_fail(trace: Trace, statement: Criterion) -> Iterator[Finding]:
    relations = _relations(statement)
    if any(_is_named(operand) for relation in relations for operand in relation.operands):
        return
    yield finding(
        "cannot-fail", "both sides are typed numbers, so that this always comes to the same",
        trace.sheet.source, relations[0].at[0], help="compare a value of the sheet with its limit",
    )  # fmt: skip


def _is_named(node: Node) -> bool:
    return any(
        (isinstance(n, Name) and n.name != PI) or (isinstance(n, Call) and n.function not in FUNCTIONS)
        for n in walk(node)
    )


def _limits(statement: Criterion) -> Iterator[Node]:
    """What the value is held against: the right side of a relation, both ends of a chain."""
    for relation in _relations(statement):
        if len(relation.operands) == 3:
            yield relation.operands[0]
        yield relation.operands[-1]


def _has_source(trace: Trace, limit: Node) -> bool:
    """True for a name whose own step cites a source."""
    step = trace.by_name.get(limit.name) if isinstance(limit, Name) else None
    return step is not None and bool(step.sources)


def _without_source(trace: Trace, step: Step, statement: Criterion) -> Finding:
    return finding(
        "limit-without-source", f"`{step.id}` does not say where its limit comes from",
        trace.sheet.source, statement.kind_span, help="cite the clause in a note: ` -- yield strength [key]`",
    )  # fmt: skip


def _missing_kinds(trace: Trace) -> Iterator[Finding]:
    if "not_applicable" in trace.sheet.front.unread:
        return
    shown = {criterion_kind(step) for step in trace.criteria} | {
        kind for kind, _ in trace.sheet.front.not_applicable
    }
    for kind in KINDS:
        if kind not in shown:
            yield finding(
                "no-criterion", f"the sheet has no criterion of {kind} and no reason why it needs none",
                trace.sheet.source, None,
                help=f"add a line `{kind}: ...`, or give the reason in the front matter: "
                f"`not_applicable: {{{kind}: the reason}}`",
            )  # fmt: skip

"""What a careful reader would ask besides: the findings of an audit, drawn from the trace."""

from __future__ import annotations

from loadpath.checking.citations import citation_findings
from loadpath.checking.criteria import criterion_findings
from loadpath.checking.inputs import input_findings
from loadpath.checking.prose import prose_findings
from loadpath.findings import Finding, ordered
from loadpath.trace.model import Trace


def audit(trace: Trace) -> tuple[Finding, ...]:
    """The findings of a trace and those of an audit, ordered by place.

    A sheet that could not be read at all has its own finding and no others.
    """
    if not trace.sheet.blocks:
        return trace.findings
    asked = (
        *input_findings(trace),
        *citation_findings(trace),
        *criterion_findings(trace),
        *prose_findings(trace),
    )
    return ordered(trace.findings + asked)

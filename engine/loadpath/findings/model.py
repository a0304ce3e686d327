"""A finding: one mistake or doubt, at the place that causes it, in words that mend it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from loadpath.text import Source, Span

Severity = Literal["error", "warning", "note"]


@dataclass(frozen=True, slots=True)
class Remark:
    """Another place that bears on a finding."""

    text: str
    """Lower case, no full stop: `first defined here`."""
    span: Span | None = None
    """In the finding's own source; None where the remark needs no place."""


@dataclass(frozen=True, slots=True)
class Finding:
    """One mistake or doubt. Ordered by place for every view."""

    slug: str
    """Stable kebab-case name from `findings.registry`; each has a page in the guide."""
    severity: Severity
    message: str
    """Stands alone without the source; lower case, no full stop, names in backticks."""
    span: Span | None
    """The smallest stretch that shows the trouble; None for one about the whole file."""
    source: Source
    """The text that `span` counts in."""
    label: str = ""
    """A few words beside the caret."""
    remarks: tuple[Remark, ...] = ()
    help: str = ""
    """The only part that proposes a mend."""

    @property
    def line(self) -> int:
        """1-based; 1 where the finding is about the whole file."""
        return self.source.line_number(self.span.start) if self.span else 1

    @property
    def column(self) -> int:
        """1-based, in code points; 1 where the finding is about the whole file."""
        return self.source.column(self.span.start) if self.span else 1


_RANK = {"error": 0, "warning": 1, "note": 2}


def ordered(findings: list[Finding] | tuple[Finding, ...]) -> tuple[Finding, ...]:
    """By file, place, severity (worst first) and slug, each finding once."""
    unique = dict.fromkeys(findings)
    return tuple(
        sorted(unique, key=lambda f: (f.source.path, f.line, f.column, _RANK[f.severity], f.slug, f.message))
    )

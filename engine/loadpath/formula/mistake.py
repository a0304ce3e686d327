"""What stops the reading or checking of a statement."""

from __future__ import annotations

from loadpath.findings import Finding, Remark, finding
from loadpath.text import Source, Span


class Mistake(Exception):
    """A mistake at a place of the sheet; whoever catches it makes it a finding."""

    def __init__(
        self,
        slug: str,
        span: Span,
        message: str,
        help: str = "",
        *,
        label: str = "",
        remarks: tuple[Remark, ...] = (),
    ) -> None:
        super().__init__(message)
        self.slug, self.span, self.message, self.help = slug, span, message, help
        self.label, self.remarks = label, remarks

    def as_finding(self, source: Source) -> Finding:
        """The finding, in the text that the span counts in."""
        return finding(
            self.slug, self.message, source, self.span, label=self.label, remarks=self.remarks, help=self.help
        )

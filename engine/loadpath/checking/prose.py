"""Prose: does it repeat a result by hand, where it will be out of date after the next change?"""

from __future__ import annotations

from collections.abc import Iterator

from loadpath.findings import Finding
from loadpath.trace.model import Trace


def prose_findings(trace: Trace) -> Iterator[Finding]:
    """`stale-number`."""
    return iter(())

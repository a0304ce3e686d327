"""Sources and assumptions: is each of them cited, and does a Eurocode come with its national annex?"""

from __future__ import annotations

import re
from collections.abc import Iterator

from loadpath.findings import Finding, finding
from loadpath.sheet.model import Assumption, Prose, SourceEntry
from loadpath.text import Span
from loadpath.trace.model import Trace

_EUROCODE = re.compile(r"\bEN[ -]?199\d\b")
_ANNEX = re.compile(r"(?i:national annex)|\bNA\b")
_KEY = re.compile(r"\[([^\[\]]+)\]")


def citation_findings(trace: Trace) -> Iterator[Finding]:
    """`unused-source`, `unused-assumption` and `no-national-annex`."""
    front = trace.sheet.front
    cited = _cited(trace)
    for kind, entries in (("source", front.sources), ("assumption", front.assumptions)):
        for entry in entries:
            if entry.key not in cited and _is_own(trace, entry):
                yield _unused(trace, kind, entry)
    yield from _annex(trace, cited)


def _cited(trace: Trace) -> set[str]:
    """Keys that a note or the text cites, or that may have been meant by one that is unknown."""
    cited = {key for step in trace for key in step.sources} | trace.resolved.meant
    for block in trace.sheet.blocks:
        if isinstance(block, Prose):
            cited |= {match.group(1).strip() for match in _KEY.finditer(block.text)}
    return cited


def _is_own(trace: Trace, entry: SourceEntry | Assumption) -> bool:
    """True where the sheet itself declares it, and not a `project.yaml` for all its sheets."""
    return entry.source is None or entry.source is trace.sheet.source


def _unused(trace: Trace, kind: str, entry: SourceEntry | Assumption) -> Finding:
    return finding(
        f"unused-{kind}", f"no note cites the {kind} `{entry.key}`",
        entry.source or trace.sheet.source, entry.span,
        help=f"cite it where it is relied on, `[{entry.key}]` in a note, or delete it",
    )  # fmt: skip


def _annex(trace: Trace, cited: set[str]) -> Iterator[Finding]:
    """Of the sources of a `project.yaml` only those that this sheet cites."""
    front = trace.sheet.front
    if "codes" in front.unread or any(_ANNEX.search(code) for code in front.codes):
        return
    help = "name it in `codes`: `EN 1993-1-1:2005 with its national annex`"
    for entry in front.sources:
        used = entry.key in cited or _is_own(trace, entry)
        if used and (match := _EUROCODE.search(entry.text)) is not None:
            message = (
                f"the source `{entry.key}` is a Eurocode, {match.group()}, and `codes` names no annex to it"
            )
            yield finding(
                "no-national-annex", message, entry.source or trace.sheet.source, entry.span, help=help
            )
            return
    for code in front.codes:
        if _EUROCODE.search(code):
            message = f"`codes` names the Eurocode `{code}` and no national annex"
            yield finding("no-national-annex", message, trace.sheet.source, _place_of(trace, code), help=help)
            return


def _place_of(trace: Trace, code: str) -> Span | None:
    at = trace.sheet.source.text.find(code)
    return Span(at, at + len(code)) if at >= 0 else None

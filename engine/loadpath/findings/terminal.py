"""Findings as text: one line that editors read, then the line of the sheet with carets, then the mend."""

from __future__ import annotations

from collections.abc import Iterable

from loadpath.findings.model import Finding
from loadpath.findings.registry import printable

WIDEST = 110
"""Characters of a line of the sheet that are shown."""


def lines(finding: Finding, *, bold: bool = False) -> list[str]:
    """A finding as lines of text; `bold` marks the severity for a terminal."""
    severity = f"\x1b[1m{finding.severity}\x1b[0m" if bold else finding.severity
    place = _one_line(f"{finding.source.path}:{finding.line}:{finding.column}")
    out = [f"{place}: {severity}: {_one_line(finding.message)} [{finding.slug}]"]
    if finding.span is not None:
        out += _excerpt(finding)
    for remark in finding.remarks:
        place = f", line {finding.source.line_number(remark.span.start)}" if remark.span else ""
        out.append(f"      . {_one_line(remark.text)}{place}")
    if finding.help:
        out.append(f"      = {_one_line(finding.help)}")
    return out


def excerpt(finding: Finding) -> tuple[str, str, str]:
    """The line of the sheet in three pieces, the middle one what is pointed at; cut where it is long."""
    assert finding.span is not None
    line = finding.source.line(finding.line).replace("\t", " ")
    start = finding.column - 1
    shift = max(start - WIDEST // 2, 0) if len(line) > WIDEST else 0
    end = min(start + max(finding.span.end - finding.span.start, 1), shift + WIDEST)
    return line[shift:start], line[start:end] or " ", line[end : shift + WIDEST]


def _excerpt(finding: Finding) -> list[str]:
    before, at, after = (printable(piece) for piece in excerpt(finding))
    label = f" {finding.label}" if finding.label else ""
    shown = (before + at + after).rstrip()
    return [f"{finding.line:5} | {shown}", f"      | {' ' * len(before)}{'^' * len(at)}{label}"]


def _one_line(text: str) -> str:
    return printable(" ".join(text.split("\n")))


def text(findings: Iterable[Finding], *, bold: bool = False) -> str:
    """Several findings, one below the other."""
    return "\n".join("\n".join(lines(f, bold=bold)) for f in findings)

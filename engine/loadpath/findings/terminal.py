"""Findings as text: one line that editors read, then the line of the sheet with carets, then the mend."""

from __future__ import annotations

from collections.abc import Iterable

from loadpath.findings.model import Finding

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


def _excerpt(finding: Finding) -> list[str]:
    assert finding.span is not None
    line = finding.source.line(finding.line).replace("\t", " ")
    start = finding.column - 1
    shift = max(start - WIDEST // 2, 0) if len(line) > WIDEST else 0
    shown = _printable(line[shift : shift + WIDEST])
    width = max(min(finding.span.end - finding.span.start, len(line) - start), 1)
    width = min(width, WIDEST - (start - shift))
    label = f" {finding.label}" if finding.label else ""
    return [f"{finding.line:5} | {shown}", f"      | {' ' * (start - shift)}{'^' * width}{label}"]


def _one_line(text: str) -> str:
    return _printable(" ".join(text.split("\n")))


def _printable(text: str) -> str:
    """A control character could move a terminal's cursor: it is shown as a mark."""
    return "".join(c if c.isprintable() else "\ufffd" for c in text)


def text(findings: Iterable[Finding], *, bold: bool = False) -> str:
    """Several findings, one below the other."""
    return "\n".join("\n".join(lines(f, bold=bold)) for f in findings)

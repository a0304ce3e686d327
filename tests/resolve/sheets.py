"""A sheet from formula lines alone, resolved."""

from __future__ import annotations

import loadpath
from loadpath.findings import Finding
from loadpath.resolve import Entry, Resolved
from loadpath.resolve import resolve as resolve_sheet


def resolve(*lines: str, front: str = "", prose: str = "") -> Resolved:
    """`front` is further front matter, `prose` what stands below the formulas."""
    head = f"---\ntitle: A sheet\n{front}\n---\n\n"
    body = "\n".join("    " + line for line in lines)
    return resolve_sheet(loadpath.read_text(head + body + "\n\n" + prose + "\n"))


def findings(*lines: str, front: str = "", prose: str = "") -> tuple[Finding, ...]:
    resolved = resolve(*lines, front=front, prose=prose)
    return resolved.sheet.findings + resolved.findings


def slugs(*lines: str, front: str = "", prose: str = "") -> list[str]:
    return [f.slug for f in findings(*lines, front=front, prose=prose)]


def entry(resolved: Resolved, name: str) -> Entry:
    return resolved.entries[resolved.by_name[name]]

"""What the verbs share: sheets named on the command line, and findings shown."""

from __future__ import annotations

import json
import os
import sys
from collections.abc import Iterable
from dataclasses import asdict

import click

from loadpath.findings import Finding
from loadpath.findings.terminal import text

SHEETS = click.argument("sheets", nargs=-1, required=True, metavar="SHEET...")


def sheet_paths(names: tuple[str, ...]) -> list[str]:
    """Each sheet named, folders searched; `-` is standard input.

    Ends the program with code 2 where there is none.
    """
    from pathlib import Path

    from loadpath.project import find_sheets

    paths: list[str] = []
    for name in names:
        if name == "-":
            paths.append(name)
            continue
        if not Path(name).exists():
            raise click.UsageError(f"there is no sheet or folder {name}")
        found = [str(path) for path in find_sheets([Path(name)])]
        if not found:
            raise click.UsageError(f"there is no sheet (*.sheet.md) in {name}")
        paths += found
    return list(dict.fromkeys(paths))


def standard_input() -> str:
    """The text on standard input. Ends the program with code 2 where it is too long or not UTF-8 text."""
    from loadpath.project import LARGEST_SHEET, Refused, decode

    try:
        return decode(sys.stdin.buffer.read(LARGEST_SHEET + 1))
    except Refused as refused:
        raise click.UsageError(f"standard input: {refused}") from None


def show(findings: Iterable[Finding]) -> None:
    """Findings on standard error."""
    found = list(findings)
    if found:
        bold = sys.stderr.isatty() and not os.environ.get("NO_COLOR")
        click.echo(text(found, bold=bold), err=True)


def as_json(findings: Iterable[Finding]) -> str:
    """Findings as one JSON array, in the form of the trace file, each with the path as named."""
    from loadpath.trace.file import finding_record

    return json.dumps(
        [asdict(finding_record(f)) | {"file": f.source.path} for f in findings], ensure_ascii=False, indent=1
    )

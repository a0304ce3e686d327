"""`loadpath audit`: findings only."""

from __future__ import annotations

import sys

import click

from loadpath.cli.shared import SHEETS, as_json, sheet_paths, show, standard_input


@click.command()
@SHEETS
@click.option(
    "--format",
    "form",
    default="text",
    show_default=True,
    type=click.Choice(["text", "json"]),
    help="How findings are shown.",
)
def audit(sheets: tuple[str, ...], form: str) -> None:
    """Show what is wrong or doubtful in each SHEET, in a folder of sheets, or in standard input (-).

    Text goes to standard error, each finding as `file:line:column: severity: message [slug]`; JSON goes to
    standard output.
    """
    from loadpath.pipeline import exit_code, safely

    paths = sheet_paths(sheets)
    text = standard_input() if "-" in paths else None
    traces = [safely(path, text if path == "-" else None) for path in paths]
    found = [f for trace in traces for f in trace.findings]
    if form == "json":
        click.echo(as_json(found))
    else:
        show(found)
    codes = {exit_code(trace) for trace in traces}
    sys.exit(1 if 1 in codes else max(codes, default=0))

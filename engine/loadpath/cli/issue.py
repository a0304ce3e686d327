"""`loadpath issue`: produce the documents."""

from __future__ import annotations

import sys
from collections.abc import Iterable
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass
from pathlib import Path
from typing import TypeVar

import click

from loadpath.cli.shared import SHEETS, as_json, sheet_paths, show, standard_input
from loadpath.findings import Finding

LONG = 8
"""Sheets from which on a terminal shows progress."""


@dataclass(frozen=True)
class _Outcome:
    """What one sheet came to: small enough to travel between processes."""

    path: str
    findings: tuple[Finding, ...]
    written: tuple[str, ...]
    conclusion: str
    code: int


def _work(path: str, out: str, formats: tuple[str, ...], text: str | None = None) -> _Outcome:
    from loadpath.document.build import conclusion
    from loadpath.pipeline import issue

    done = issue(path, Path(out), formats, text)
    return _Outcome(
        path, done.trace.findings, tuple(map(str, done.written)), conclusion(done.trace), done.exit_code
    )


@click.command()
@SHEETS
@click.option("--to", default="html,md,json", show_default=True, help="Formats, by commas: html, md, json.")
@click.option(
    "--out",
    default="output",
    show_default=True,
    type=click.Path(file_okay=False),
    help="Folder for the documents.",
)
@click.option(
    "--jobs", default=1, show_default=True, type=click.IntRange(1, 64), help="Sheets worked at the same time."
)
@click.option(
    "--format",
    "form",
    default="text",
    show_default=True,
    type=click.Choice(["text", "json"]),
    help="How findings are shown.",
)
def issue(sheets: tuple[str, ...], to: str, out: str, jobs: int, form: str) -> None:
    """Produce the documents of each SHEET, of a folder of sheets, or of standard input (-).

    A sheet with errors still gives its documents, headed "not for use".
    """
    formats = _formats(to)
    paths = sheet_paths(sheets)
    targets = _targets(paths, sheets, out)
    text = standard_input() if "-" in paths else None
    outcomes = _run(paths, targets, formats, jobs, text)
    for outcome in outcomes:
        if form == "text":
            show(f for f in outcome.findings if f.severity != "note")
            for written in outcome.written:
                click.echo(written)
            click.echo(f"{outcome.path}: {outcome.conclusion}")
    if form == "json":
        click.echo(as_json([f for o in outcomes for f in o.findings]))
    codes = {o.code for o in outcomes}
    sys.exit(1 if 1 in codes else max(codes, default=0))


def _formats(to: str) -> tuple[str, ...]:
    from loadpath.pipeline import RENDERERS

    formats = tuple(dict.fromkeys(part.strip() for part in to.split(",") if part.strip()))
    unknown = [name for name in formats if name not in RENDERERS]
    if unknown or not formats:
        raise click.UsageError(
            f"--to takes {', '.join(RENDERERS)}, by commas; {', '.join(unknown) or 'nothing'} is none of them"
        )
    return formats


def _targets(paths: list[str], sheets: tuple[str, ...], out: str) -> list[str]:
    """The folder for each sheet's documents: below a named folder its own place in it.

    Ends the program with code 2 where two sheets would write one document, or a document would be written
    over a sheet.
    """
    from loadpath.pipeline import stem_of

    roots = [Path(name) for name in sheets if Path(name).is_dir()]
    targets: list[str] = []
    taken: dict[Path, str] = {}
    typed = {_real(path) for path in paths if path != "-"}
    for path in paths:
        root = next((r for r in roots if path != "-" and Path(path).is_relative_to(r)), None)
        target = Path(out) / Path(path).parent.relative_to(root) if root else Path(out)
        key = target / stem_of(path)
        if key in taken:
            raise click.UsageError(
                f"{path} and {taken[key]} would both write {key}.html; "
                "issue them to different folders with --out"
            )
        if _real(written := target / f"{stem_of(path)}.md") in typed:
            raise click.UsageError(
                f"{written} is a sheet, and would be written over; name another folder with --out"
            )
        taken[key] = path
        targets.append(str(target))
    return targets


def _real(path: str | Path) -> str:
    """The path with links followed; one that leads in a circle ends the program with code 2."""
    from os.path import realpath

    try:
        return realpath(path, strict=False)
    except (OSError, RuntimeError) as error:
        raise click.UsageError(f"cannot follow {path}: {error}") from None


def _run(
    paths: list[str], targets: list[str], formats: tuple[str, ...], jobs: int, text: str | None
) -> list[_Outcome]:
    def given(path: str) -> str | None:
        return text if path == "-" else None

    try:
        if jobs == 1 or len(paths) == 1:
            pairs = _with_progress(list(zip(paths, targets, strict=True)))
            return [_work(path, target, formats, given(path)) for path, target in pairs]
        with ProcessPoolExecutor(min(jobs, len(paths))) as pool:
            waiting = [
                pool.submit(_work, p, t, formats, given(p)) for p, t in zip(paths, targets, strict=True)
            ]
            return [future.result() for future in _with_progress(waiting)]
    except OSError as error:
        raise click.UsageError(f"cannot write: {error}") from None


Item = TypeVar("Item")


def _with_progress(items: list[Item]) -> Iterable[Item]:
    """The same items; on a terminal, where there are many, with a bar that follows them."""
    if len(items) < LONG or not sys.stderr.isatty():
        return items
    from rich.console import Console
    from rich.progress import track

    return track(items, description="issuing", console=Console(stderr=True), transient=True)

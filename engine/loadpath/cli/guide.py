"""`loadpath guide`: the user's guide on the terminal."""

from __future__ import annotations

from difflib import get_close_matches
from importlib.resources import files

import click


def pages() -> dict[str, str]:
    """Text of every page by name; pages of findings under their slug."""
    root = files("loadpath.guide")
    found = {}
    for folder in (root, root / "findings"):
        for entry in sorted(folder.iterdir(), key=lambda e: e.name):
            if entry.name.endswith(".md"):
                found[entry.name.removesuffix(".md")] = entry.read_text(encoding="utf-8")
    return found


@click.command()
@click.argument("page", required=False)
def guide(page: str | None) -> None:
    """Show a PAGE of the guide, or the list of pages. The slug of a finding is a page too."""
    known = pages()
    if page is None:
        page = "index"
    if page not in known:
        near = get_close_matches(page, list(known), 1)
        raise click.UsageError(
            f"the guide has no page {page}"
            + (f"; did you mean {near[0]}?" if near else "; see loadpath guide")
        )
    click.echo(known[page].rstrip())

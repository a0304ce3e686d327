"""From the text of a sheet to a `Sheet`: front matter, then blocks. Mistakes are findings."""

from __future__ import annotations

from pathlib import Path

from loadpath.findings import Finding, finding, ordered
from loadpath.project import LARGEST_SHEET, FolderWorld, Refused, TooLarge, World, read_text
from loadpath.sheet.blocks import read_blocks
from loadpath.sheet.characters import forbidden
from loadpath.sheet.front_matter import read_front_matter
from loadpath.sheet.model import FrontMatter, Sheet
from loadpath.text import Source, Span

MOST_LINES = 50_000
LONGEST_PARAGRAPH = 50_000
"""Characters of a run of lines of prose."""


def read_sheet(source: Source, world: World) -> Sheet:
    """The sheet that a text holds. One that is no text, or too long, has a finding and nothing else."""
    refusal = _refusal(source)
    if refusal is not None:
        return Sheet(source, FrontMatter(), (), (refusal,))
    front, start, front_findings = read_front_matter(source, world)
    blocks, block_findings = read_blocks(source, start, world)
    return Sheet(source, front, blocks, ordered(front_findings + block_findings), _project_texts(world))


def _project_texts(world: World) -> tuple[str, ...]:
    try:
        return tuple(text for _, text in world.project_texts())
    except Refused:
        return ()


def read_sheet_file(path: Path, root: Path | None = None) -> Sheet:
    """The sheet in a file, with the files of its project around it; one that can't be read has a finding.

    `root`: the project's folder, searched as `loadpath.project` says where it is None.
    """
    try:
        text = read_text(path)
    except Refused as refused:
        source = Source(str(path), "")
        slug = "over-limit" if isinstance(refused, TooLarge) else "unreadable-file"
        found = finding(slug, f"the sheet cannot be read: {refused}", source, None)
        return Sheet(source, FrontMatter(), (), (found,))
    return read_sheet(Source(str(path), text), FolderWorld(path, root))


def _endless_paragraph(source: Source) -> Span | None:
    """The line at which a run of lines of prose, unbroken by an empty one, becomes too long to be read."""
    length = 0
    for number, start in enumerate(source.line_starts, 1):
        line = source.text[start : start + LONGEST_PARAGRAPH + 1].partition("\n")[0]
        apart = not line.strip() or line.startswith(("    ", "\t")) or line.lstrip().startswith("|")
        length = 0 if apart else length + len(line)
        if length > LONGEST_PARAGRAPH:
            return source.line_span(number)
    return None


def _refusal(source: Source) -> Finding | None:
    if len(source.text) > LARGEST_SHEET:
        return finding(
            "over-limit", f"the sheet has more than {LARGEST_SHEET} characters", source, None, help="split it"
        )
    if len(source.line_starts) > MOST_LINES:
        return finding(
            "over-limit", f"the sheet has more than {MOST_LINES} lines", source, None, help="split it"
        )
    if (place := _endless_paragraph(source)) is not None:
        return finding(
            "over-limit",
            f"a paragraph of more than {LONGEST_PARAGRAPH} characters",
            source,
            place,
            help="part it by empty lines",
        )
    match = forbidden(source.text)
    if match is None:
        return None
    message = f"a character that no sheet can hold (U+{ord(match.group()):04X}) stands here"
    return finding(
        "unreadable-file",
        message,
        source,
        Span(*match.span()),
        help="delete it, or save the file as UTF-8 text",
    )

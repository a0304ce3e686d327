"""The pages of the user's guide say what the program does.

Fenced blocks of a page are told apart by their first word:

* `sheet`: a whole sheet, or a fragment that stands below the front matter of the first whole sheet of its
  page. It must run without errors; `sheet failing` must give one.
* `gives`: what the sheet above it gives. A line `ID = TEXT` is the printed value of a step; `ID: TEXT` the
  verdict of a judged step, its ratio or margin in front, line numbers left out; where no step has that id,
  a finding of that slug whose message begins so.
* `sh`: commands, run one after the other in a folder that holds the demo sheets and the sheets that the page
  has had saved so far (a sheet below a paragraph that names `NAME.sheet.md`). A comment `# exit code N` says
  how a command ends, else it ends with 0.
* `text` directly below `sh`: all that the last command prints.
"""

from __future__ import annotations

import re
import shlex
import shutil
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise
from math import pi
from pathlib import Path

import pytest
from click.testing import CliRunner, Result

import loadpath
from loadpath.algebra import TIME_LIMIT
from loadpath.cli import VERBS, main
from loadpath.document import build
from loadpath.document.model import CriterionBox, JudgedRow
from loadpath.evaluate.derive import MOST_NODES
from loadpath.findings import SLUGS
from loadpath.formula.meant import LATER as LATER_STATEMENTS
from loadpath.formula.names import KINDS as CRITERION_KINDS
from loadpath.formula.names import RESERVED
from loadpath.formula.several import MOST_CURVES, MOST_STEPS, MOST_UNKNOWNS
from loadpath.functions import NAMES as FUNCTION_NAMES
from loadpath.sheet.front_matter import KEYS
from loadpath.sheet.front_values import STATUSES, UNIT_KINDS, UNIT_SYSTEMS
from loadpath.sheet.tables import MOST_COLUMNS, MOST_ROWS
from loadpath.trace import Trace
from loadpath.trace.file import record
from loadpath.units.dimension import say
from loadpath.units.printing import quantity, unit_symbol
from loadpath.units.systems import SYSTEMS
from loadpath.units.unit import PREFIXED, PREFIXES, known_names, parse_unit

ROOT = Path(__file__).parents[2]
GUIDE = ROOT / "engine" / "loadpath" / "guide"
PAGES = {path.stem: path.read_text(encoding="utf-8") for path in sorted(GUIDE.glob("*.md"))}
SAVED = re.compile(r"`([\w-]+\.sheet\.md)`")
CAUTION = ("competent person", "local codes and licensed practice govern")


@dataclass(frozen=True)
class Fence:
    """A fenced block of a page."""

    page: str
    line: int
    """1-based line of the page on which it opens."""
    info: str
    text: str
    before: str
    """The paragraph above it, "" where another fence stands there."""

    def __str__(self) -> str:
        return f"{self.page}-{self.line}"


def fences(page: str) -> Iterator[Fence]:
    """The fenced blocks of a page, in reading order."""
    lines = PAGES[page].split("\n")
    opened, paragraph, start = -1, "", 0
    for number, line in enumerate(lines):
        if line.startswith("```") and opened < 0:
            above = "\n".join(lines[start:number]).strip().split("\n\n")
            opened, paragraph = number, " ".join(above[-1].split())
        elif line == "```":
            inside = "".join(f"{inner}\n" for inner in lines[opened + 1 : number])
            yield Fence(page, opened + 1, lines[opened][3:], inside, paragraph)
            opened, start = -1, number + 1


def of_kind(*infos: str) -> list[Fence]:
    return [fence for page in PAGES for fence in fences(page) if fence.info in infos]


def sheet_text(fence: Fence) -> str:
    """The whole sheet that a block stands for."""
    if fence.text.startswith("---\n"):
        return fence.text
    first = next(f for f in fences(fence.page) if f.info.startswith("sheet") and f.text.startswith("---\n"))
    front = first.text.split("---\n")[1]
    return f"---\n{front}---\n\n{fence.text}"


def worked(fence: Fence) -> Trace:
    """The trace of a block, with the findings of an audit."""
    trace = loadpath.evaluate(loadpath.read_text(sheet_text(fence)))
    return trace.with_findings(tuple(f for f in loadpath.audit(trace) if f not in trace.findings))


def cells(page: str) -> list[list[str]]:
    """Every row of every table of a page, headings and rules included."""
    rows = [line for line in PAGES[page].split("\n") if line.startswith("|")]
    return [[cell.strip() for cell in row.strip("|").split("|")] for row in rows]


def words_in_code(text: str) -> set[str]:
    return {word for code in re.findall(r"`([^`\n]+)`", text) for word in re.findall(r"[\w-]+", code)}


# --- the pages as a whole -----------------------------------------------------------------------------------


def test_index_names_every_page() -> None:
    for page in set(PAGES) - {"index"}:
        assert f"[{page}]({page}.md)" in PAGES["index"]


@pytest.mark.parametrize("page", PAGES)
def test_page_is_shown(page: str) -> None:
    shown = CliRunner().invoke(main, ["guide", *([] if page == "index" else [page])])
    assert shown.exit_code == 0
    assert shown.output.rstrip() == PAGES[page].rstrip()


@pytest.mark.parametrize("page", PAGES)
def test_page_carries_the_caution(page: str) -> None:
    text = " ".join(PAGES[page].split())
    assert all(words in text for words in CAUTION)


@pytest.mark.parametrize("page", PAGES)
def test_links_lead_to_pages(page: str) -> None:
    """Links to pages of findings are held against the registry; those pages have a test of their own."""
    for words, target in re.findall(r"\[([^\]\n]+)\]\(([\w/-]+)\.md\)", PAGES[page]):
        assert target in PAGES or (target == f"findings/{words}" and words in SLUGS), target


@pytest.mark.parametrize("page", PAGES)
def test_fences_are_of_known_kinds(page: str) -> None:
    assert {f.info for f in fences(page)} <= {"sheet", "sheet failing", "gives", "sh", "text", "yaml"}
    assert PAGES[page].count("\n```") % 2 == 0


# --- sheets and what they give ------------------------------------------------------------------------------


@pytest.mark.parametrize("fence", of_kind("sheet"), ids=str)
def test_sheet_runs_without_errors(fence: Fence) -> None:
    errors = [f"{f.line}: {f.message} [{f.slug}]" for f in worked(fence).findings if f.severity == "error"]
    assert not errors


@pytest.mark.parametrize("fence", of_kind("sheet failing"), ids=str)
def test_failing_sheet_gives_an_error(fence: Fence) -> None:
    assert worked(fence).has_errors


def pairs() -> list[tuple[Fence, Fence]]:
    """Each `gives` with the sheet that stands directly above it."""
    found = []
    for page in PAGES:
        row = list(fences(page))
        found += [(above, fence) for above, fence in pairwise(row) if fence.info == "gives"]
    return found


@pytest.mark.parametrize(("sheet", "gives"), pairs(), ids=str)
def test_sheet_gives_what_the_page_says(sheet: Fence, gives: Fence) -> None:
    assert sheet.info.startswith("sheet") and not gives.before
    trace = worked(sheet)
    steps = {step.id: step for step in record(trace, "0").steps}
    slugs = set()
    for line in gives.text.splitlines():
        if (id := line.partition(" = ")[0]) in steps:
            assert plain_spaces(steps[id].display) == line.partition(" = ")[2]
        elif judged := next((i for i in steps if line.startswith(f"{i}: ")), ""):
            said = verdict(trace, steps[judged].number)
            expected = line.removeprefix(f"{judged}: ")
            assert re.sub(r"(?<=of line) \d+$", "", said) == expected
        else:
            slug, _, message = line.partition(": ")
            slugs.add(slug)
            assert any(f.slug == slug and f.message.startswith(message) for f in trace.findings), line
    if sheet.info == "sheet failing":
        assert slugs == {f.slug for f in trace.findings if f.severity == "error"}


def verdict(trace: Trace, number: str) -> str:
    """`0.924, satisfied`, or with a margin, as the document shows it."""
    rows = (b for b in build(trace, "0").blocks if isinstance(b, CriterionBox | JudgedRow))
    box = next(row for row in rows if row.head.number == number)
    if isinstance(box, JudgedRow) or not box.shown:
        return box.verdict
    margin = f"margin {quantity(box.margin.number, box.margin.unit)}" if box.margin else ""
    return plain_spaces(f"{box.ratio or margin}, {box.verdict}")


def plain_spaces(text: str) -> str:
    return text.replace("\u202f", " ").replace("\u2009", " ")


# --- commands -----------------------------------------------------------------------------------------------


def lines_of(result: Result) -> list[str]:
    """What a command prints: findings first, as on a terminal."""
    return (result.stderr + result.stdout).splitlines()


@pytest.mark.parametrize("page", [page for page in PAGES if any(f.info == "sh" for f in fences(page))])
def test_commands_run(page: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    shutil.copytree(ROOT / "calcsheets", tmp_path / "calcsheets")
    monkeypatch.chdir(tmp_path)
    printed: list[str] = []
    above = ""
    for fence in fences(page):
        if fence.info.startswith("sheet") and (name := SAVED.search(fence.before)):
            Path(name.group(1)).write_text(fence.text, encoding="utf-8")
        elif fence.info == "sh":
            for line in fence.text.splitlines():
                printed = lines_of(run(line))
        elif fence.info == "text" and above == "sh" and not fence.before:
            assert fence.text.splitlines() == printed
        above = fence.info


def run(line: str) -> Result:
    command, _, comment = line.partition("  # ")
    program, *arguments = shlex.split(command)
    assert program == "loadpath"
    result = CliRunner().invoke(main, arguments, catch_exceptions=False)
    expected = int(comment.removeprefix("exit code ")) if comment else 0
    assert result.exit_code == expected, f"{line}: {result.exit_code}\n{result.output}"
    return result


def test_every_verb_is_in_the_guide() -> None:
    commands = "".join(f.text for f in of_kind("sh"))
    assert all(f"loadpath {verb}" in commands for verb in VERBS)


# --- lists that must be whole -------------------------------------------------------------------------------


def test_findings_table_is_the_registry() -> None:
    rows = [tuple(row) for row in cells("findings") if row[0].startswith("[")]
    registry = [(slug, severity, text) for slug, (severity, text) in SLUGS.items()]
    assert rows == [(f"[{slug}](findings/{slug}.md)", severity, text) for slug, severity, text in registry]


def test_finding_shown_is_the_one_of_the_first_sheet() -> None:
    """The example on the page of findings is a piece of what the start page shows."""
    example = next(fences("findings")).text
    assert any(example in f.text for f in fences("start") if f.info == "text")


def test_language_names_every_reserved_word_and_function() -> None:
    named = words_in_code(PAGES["language"])
    assert RESERVED | set(CRITERION_KINDS) | {"pi"} <= named
    assert named >= FUNCTION_NAMES


def test_language_lists_what_is_kept_for_later() -> None:
    section = PAGES["language"].split("\n## Kept for later\n")[1].split("\nWords that")[0]
    assert words_in_code(section) & (RESERVED | FUNCTION_NAMES) == set(LATER_STATEMENTS)
    assert "`+-`" in section


def test_language_states_the_limits_that_the_engine_has() -> None:
    section = " ".join(PAGES["language"].split("\n## How much is too much\n")[1].split())
    for words in (
        f"a table of {MOST_COLUMNS} columns or {MOST_ROWS} rows",
        f"{MOST_UNKNOWNS} unknowns in one `solve for`",
        f"{MOST_CURVES} curves in one `plot` or `tabulate`, and {MOST_STEPS} steps",
        f"a derived expression of {MOST_NODES} parts",
    ):
        assert words in section
    assert "ten seconds for one piece of algebra" in section and TIME_LIMIT == 10
    assert f"at most {MOST_COLUMNS} columns and {MOST_ROWS} rows" in " ".join(PAGES["tables"].split())


def test_language_names_every_key_of_the_front_matter() -> None:
    rows = [row for row in cells("language") if row[0].startswith("`")]
    assert set(KEYS) <= {key for row in rows for key in words_in_code(row[0])}
    text = " ".join(PAGES["language"].split())
    assert all(f"`{status}`" in text for status in STATUSES if not status.startswith("superseded"))
    assert all(f"`{system}`" in text for system in UNIT_SYSTEMS)


# --- units --------------------------------------------------------------------------------------------------

_FACTOR = re.compile(r"`([\d./*pi]+)(?: (\S+))?`")


def unit_rows() -> dict[str, list[str]]:
    """The table of units: typed, printed, definition, SI value, prefixes, by the unit."""
    return {row[1].strip("`"): row[1:] for row in cells("units") if len(row) == 6 and row[1].startswith("`")}


def exact(text: str) -> Fraction:
    """`5/9` exactly; with `pi` to its nearest float."""
    over, _, under = text.partition("/")
    value = Fraction(1)
    for factor in over.split("*"):
        value *= Fraction(pi) if factor == "pi" else Fraction(factor)
    return value / Fraction(under or "1")


def test_every_unit_is_in_the_table() -> None:
    assert set(unit_rows()) == set(known_names())


@pytest.mark.parametrize("typed", sorted(known_names()))
def test_unit_is_what_the_table_says(typed: str) -> None:
    """Definition and SI value are worked with fractions here and held against the engine's own factor."""
    _, printed, defined, si, prefixes = unit_rows()[typed]
    unit = parse_unit(typed)
    assert printed == unit_symbol(typed)
    assert (prefixes == "yes") == (typed in PREFIXED)
    if defined != "base unit":
        factor = _FACTOR.fullmatch(defined)
        assert factor is not None
        of = parse_unit(factor.group(2) or "")
        size = exact(factor.group(1)) * of.factor
        assert of.dimension == unit.dimension
        if "pi" in defined:
            assert float(size) == pytest.approx(unit.size, rel=1e-15)
        else:
            assert size == unit.factor
    number, _, in_unit = si.removeprefix("≈ ").partition(" ")
    of = parse_unit(in_unit)
    assert of.factor == 1 and of.dimension == unit.dimension
    if si.startswith("≈"):
        assert float(number) == pytest.approx(unit.size, rel=5e-10)
    else:
        assert Fraction(number) == unit.factor


def test_prefixes_kinds_and_systems_are_named() -> None:
    named = words_in_code(PAGES["units"])
    assert set(PREFIXES) - {"μ"} <= named  # the Greek letter stands beside the sign that looks like it
    assert set(UNIT_KINDS) <= named


def test_systems_table_is_what_the_engine_uses() -> None:
    rows = cells("units")
    head = next(row for row in rows if row[0] == "kind" and "`SI`" in row)
    systems = [words.replace("`", "").split(", ") for words in head[1:]]
    body = [row for row in rows[rows.index(head) + 2 :] if len(row) == len(head)]
    assert len(body) >= 12
    for kind, *units in body:
        for names, unit in zip(systems, units, strict=True):
            for name in names:
                dimension = parse_unit(unit).dimension
                assert SYSTEMS[name][dimension] == unit
                words = say(dimension)
                assert kind.replace("energy", "moment") == words

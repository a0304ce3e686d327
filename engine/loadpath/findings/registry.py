"""Every finding that loadpath can give: its slug, its severity and one line on what it is about.

To add one: add a line here, a page `guide/findings/SLUG.md` with a failing and a mended sheet, and the
code that
gives it. A test keeps the three together.
"""

from __future__ import annotations

from loadpath.findings.model import Finding, Remark, Severity
from loadpath.text import Source, Span

SLUGS: dict[str, tuple[Severity, str]] = {
    # the file and its front matter
    "unreadable-file": ("error", "the file is not there, not UTF-8 text, or not a calc sheet"),
    "over-limit": ("error", "a file, a number, a nesting or a sheet larger than the engine works"),
    "no-front-matter": ("error", "the sheet does not begin with front matter between `---` lines"),
    "front-matter-syntax": ("error", "the front matter cannot be read as YAML"),
    "yaml-alias": ("error", "an anchor, an alias or a tag in the front matter"),
    "unknown-key": ("error", "a key that the front matter does not have"),
    "duplicate-key": ("error", "a key given twice"),
    "missing-title": ("error", "a sheet without a title"),
    "front-matter-value": ("error", "a value that its key does not take"),
    # images
    "image-path": ("error", "an image outside the project's folder, or not there"),
    "image-type": ("error", "an image that is not PNG, JPEG or SVG without script"),
    # blocks
    "formula-in-prose": ("error", "a whole line of prose that is a statement"),
    "swallowed-formula": ("error", "an indented line that CommonMark joins to the text above it"),
    "nested-formula": ("error", "a formula line inside a list or a quotation"),
    "stray-line": ("error", "a deeper line under a statement that takes none, or missing deeper lines"),
    # writing
    "bad-syntax": ("error", "a line that does not follow the language"),
    "implied-multiplication": ("error", "two things side by side with no operator between them"),
    "unbalanced-bracket": ("error", "a bracket that is not closed, or not opened"),
    "reserved-word": ("error", "a word of the language used as a name"),
    "decimal-comma": ("error", "a comma used as a decimal sign"),
    "mixed-number": ("error", "a fraction or a mixed number that can be read in two ways"),
    "bad-unit": ("error", "a unit with two slashes, or otherwise not well formed"),
    "unknown-unit": ("error", "a unit that the engine does not know"),
    "gauge-unit": ("error", "psig, psia or barg, where psi or bar and a note are meant"),
    "no-relation": ("error", "a criterion, a validity or a check without its relation"),
    "not-available": ("error", "a statement or function of the language that this version cannot work yet"),
    # names
    "unknown-name": ("error", "a name that is defined nowhere on the sheet"),
    "used-before-defined": ("error", "a name used above its definition"),
    "defined-twice": ("error", "a name defined a second time"),
    "alike-names": ("error", "two names that print alike"),
    "shadowed-name": ("error", "a parameter that is also a name of the sheet"),
    "unknown-function": ("error", "a call of a function that does not exist"),
    "wrong-arguments": (
        "error",
        "a function called with too few or too many arguments, or not called at all",
    ),
    "unknown-citation": ("error", "a citation of a source or assumption that the front matter does not hold"),
    "unknown-choice": ("error", "a word that the choice does not offer, or words and numbers mixed"),
    "duplicate-criterion": ("error", "two criteria of one kind and name"),
    # units and dimensions
    "unit-mismatch": ("error", "quantities of different dimension joined, compared or shown"),
    "needs-plain-number": ("error", "a quantity with a unit where a plain number is needed"),
    "dimension-exponent": ("error", "a quantity with a unit raised to a power that is not typed"),
    "mass-as-force": ("error", "a mass (`lb`, `kg`) where a force is needed"),
    "absolute-temperature": ("error", "an absolute temperature added, multiplied or mixed"),
    "frequency-and-speed": ("warning", "Hz joined with rpm or rad/s: a factor of 2*pi"),
    "unit-or-name": ("warning", "a unit that is also a name of the sheet"),
    # numbers
    "division-by-zero": ("error", "a division by zero"),
    "root-of-negative": ("error", "a root of a negative number"),
    "outside-domain": ("error", "a function asked outside the range where it is defined"),
    "not-finite": ("error", "a number too large to hold, or not a number"),
    "no-branch": ("error", "cases of which none holds"),
    "check-failed": ("error", "a cross-check that does not hold"),
    # what an audit adds
    "one-sided": ("warning", "a negative demand against one positive limit"),
    "no-note": ("warning", "an input that does not say what it is and where it comes from"),
    "no-source": ("warning", "an input whose note cites no source or assumption"),
    "unused-input": ("warning", "an input that nothing uses"),
    "unused-source": ("warning", "a source that nothing cites"),
    "unused-assumption": ("warning", "an assumption that nothing cites"),
    "cannot-fail": ("warning", "a criterion with typed numbers on both sides"),
    "limit-without-source": ("warning", "a criterion that cites no source for its limit"),
    "no-criterion": ("note", "a kind of criterion with neither a criterion nor a reason why not"),
    "stale-number": ("warning", "a number in prose that repeats a result"),
    "angle-without-unit": ("warning", "an angle that looks like degrees, typed without a unit"),
    "no-national-annex": ("warning", "a Eurocode among the sources and no national annex among the codes"),
    # algebra
    "no-closed-form": ("error", "an integral, a limit or a solution that algebra does not find"),
    "algebra-time-out": ("error", "algebra that took longer than the engine waits"),
    "derived-too-large": ("error", "a derived expression that no reader could follow"),
    "unsolved-unknown": ("error", "an unknown that is used before it is solved for, or never solved"),
    "not-a-parameter": ("error", "a derivative or an integral by what is no parameter of the function"),
    "bad-interval": ("error", "bounds that are equal, the wrong way round, or not whole where they must be"),
    # equations
    "equation-count": ("error", "more or fewer equations than unknowns"),
    "no-solution": ("error", "equations that nothing solves"),
    "many-solutions": ("error", "equations that do not fix an unknown"),
    "singular-system": ("error", "equations so nearly the same that digits are lost"),
    "root-outside-bounds": ("error", "roots that all lie outside the bounds"),
    "several-roots": ("error", "more than one root left to choose from"),
    # tables
    "table-shape": ("error", "a table with missing or extra cells, no rows, or a header that is no name"),
    "table-cell": ("error", "a cell that is empty or cannot be read"),
    "unknown-row": ("error", "a row that the table does not have"),
    "duplicate-row": ("error", "two rows of one label"),
    "mixed-tables": ("error", "columns of tables whose rows are not the same"),
    "column-not-number": ("error", "a column or a table where one value is needed"),
    "needs-column": ("error", "one value where a column is needed"),
    "outside-table": ("error", "a value looked up outside the rows of its table"),
    "not-rising": ("error", "a column for interpolation that neither rises nor falls strictly"),
    # the engine itself
    "engine-fault": ("error", "a fault of the engine, not of the sheet"),
}


def finding(
    slug: str,
    message: str,
    source: Source,
    span: Span | None,
    *,
    label: str = "",
    remarks: tuple[Remark, ...] = (),
    help: str = "",
) -> Finding:
    """A finding with the severity that the registry states for its slug."""
    return Finding(slug, SLUGS[slug][0], printable(message), span, source, label, remarks, printable(help))


def printable(text: str) -> str:
    """A text without control characters, which a sheet may have put into it: each is shown as a mark."""
    return text if text.isprintable() else "".join(c if c.isprintable() else "\ufffd" for c in text)

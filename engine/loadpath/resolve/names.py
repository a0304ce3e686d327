"""Who defines each name, near misses, and step ids."""

from __future__ import annotations

import re
from collections.abc import Iterable
from difflib import get_close_matches

from loadpath.findings import Remark
from loadpath.formula.canonical import statement_text
from loadpath.formula.mistake import Mistake
from loadpath.formula.names import look, plain_symbol
from loadpath.formula.statements import (
    Check,
    Choice,
    Column,
    Criterion,
    Definition,
    Faulty,
    FunctionDefinition,
    Plot,
    Solution,
    Statement,
    Table,
    Tabulate,
    Unknown,
    Validity,
)
from loadpath.functions import NAMES as BUILT_IN
from loadpath.resolve.parts import PI, Use, defined_by
from loadpath.text import Source, Span

MOST_COMPARED = 50_000
"""Names that are held against misspelt ones on one sheet; beyond that nothing is suggested."""


class Suggestions:
    """`did you mean ...?`, and what was suggested: it counts as used or cited."""

    def __init__(self) -> None:
        self.made: set[str] = set()
        self._left = MOST_COMPARED

    def nearest(self, name: str, known: Iterable[str]) -> str:
        """The suggestion of the closest known name, "" where none is near."""
        if self._left <= 0:
            return ""
        names = sorted(k for k in known if abs(len(k) - len(name)) <= 3)
        self._left -= len(names)
        folded = {k.casefold(): k for k in reversed(names)}
        same = folded.get(name.casefold())
        close = [same] if same else get_close_matches(name, names, 1, 0.6)
        self.made.update(close)
        return f"did you mean `{close[0]}`?" if close else ""


class Names:
    """Every name of a sheet: where it is defined, and whether it can be used at the statement at hand."""

    def __init__(self, source: Source, statements: tuple[Statement, ...], suggestions: Suggestions) -> None:
        self._source, self._suggestions = source, suggestions
        self.first: dict[str, Span] = {}
        """Where each name is first defined, anywhere on the sheet."""
        self.functions: dict[str, FunctionDefinition] = {}
        """Functions defined above."""
        self.by_name: dict[str, int] = {}
        """Index of the entry that defines each name, of those above."""
        self.contested: dict[str, int] = {}
        """Names defined a second time above: the line that did so."""
        self._looks: dict[tuple[str, str, str, int], str] = {}
        for statement in statements:
            for name, span in defined_by(statement):
                self.first.setdefault(name, span)

    def __contains__(self, name: str) -> bool:
        return name in self.first

    def add(self, statement: Statement, index: int) -> None:
        """Takes up what a statement defines; the first definition of a name stays."""
        for name, _ in defined_by(statement):
            if isinstance(statement, Solution) and name in self.by_name:
                self.by_name[name] = index
            if name not in self.by_name and name not in BUILT_IN and name != PI:
                self.by_name[name] = index
                self._looks.setdefault(look(name), name)
                if isinstance(statement, FunctionDefinition):
                    self.functions[name] = statement

    def refused(self, name: str, span: Span, found_here: bool = False) -> Mistake | None:
        """Why a name cannot be defined at a place, None where it can.

        `found_here`: the place is the solution of an unknown that stands above.
        """
        if name == PI:
            return Mistake(
                "reserved-word", span, "`pi` stands defined and cannot be a name", "choose another name"
            )
        if name in self.by_name and not found_here:
            first = self.first[name]
            line = self._source.line_number(first.start)
            self.contested.setdefault(name, self._source.line_number(span.start))
            return Mistake(
                "defined-twice", span, f"`{name}` is defined a second time",
                f"a name means one thing on a sheet: choose another, such as `{name}_2`",
                remarks=(Remark(f"first defined on line {line}", first),),
            )  # fmt: skip
        alike = self._looks.get(look(name))
        if alike is None or alike == name:
            return None
        message = f"`{name}` prints like `{alike}`, as {plain_symbol(name)}"
        return Mistake("alike-names", span, message, "choose a name that a reader can tell apart")

    # --- uses ---

    def owner(self, name: str, faulty: Iterable[str]) -> str:
        """What brings a name: itself, or the line that could not be worked and would have brought `b.I_y`."""
        if name in self.by_name:
            return name
        prefix = name.partition(".")[0]
        return prefix if prefix in faulty else ""

    def not_defined(self, use: Use, statement: Statement) -> Mistake:
        """What is wrong with the use of a name that nothing above defines."""
        name, span = use.name, use.span
        if name in BUILT_IN:
            message = f"`{name}` is a function and is called with its arguments"
            return Mistake("wrong-arguments", span, message, f"write `{name}(...)`")
        if name in self.first:
            return self._too_early(name, span, statement)
        if use.called:
            near = self._suggestions.nearest(name, {*BUILT_IN, *self.functions})
            mend = near or f"a product takes a `*`: `{name}*(...)`"
            return Mistake("unknown-function", span, f"there is no function `{name}`", mend)
        near = self._suggestions.nearest(name, self.first)
        prefix, dot, _ = name.partition(".")
        if dot and prefix not in self.first and not near:
            near = f"a table of data brings its columns by its caption: `Table {prefix}: what it holds [key]`"
        message = f"`{name}` is defined nowhere on this sheet"
        return Mistake("unknown-name", span, message, near or "define it above, or check the spelling")

    def _too_early(self, name: str, span: Span, statement: Statement) -> Mistake:
        first = self.first[name]
        self._suggestions.made.add(name)
        if statement.span.start <= first.start and first.end <= statement.span.end:
            message = f"`{name}` is used in its own definition"
            return Mistake("used-before-defined", span, message, "give the new value a name of its own")
        message = f"`{name}` is used here, but defined below, on line {self._source.line_number(first.start)}"
        return Mistake("used-before-defined", span, message, "move the definition above its first use")


# --- step ids -----------------------------------------------------------------------------------------------


def step_id(statement: Statement) -> str:
    """The stable name of a step, before `#2` is added to a second one that is the same."""
    match statement:
        case Definition(name=name) | Choice(name=name) | FunctionDefinition(name=name):
            return name
        case Unknown(name=name):
            return f"unknown {name}"
        case Solution() | Column():
            return statement.name
        case Table(name=name):
            return f"table {name}"
        case Plot() | Tabulate():
            return statement_text(statement).split(" for ")[0]
        case Criterion(kind=kind, name=name):
            return f"{kind} {name}" if name else f"{kind}: {statement_text(statement)}"
        case Validity():
            return "valid: " + statement_text(statement).rsplit(" for ", 1)[0]
        case Check():
            return "check: " + statement_text(statement).rsplit(" within ", 1)[0]
        case Faulty(criterion=(kind, own)):
            return f"{kind} {own}" if own else _first_words(statement)
        case Faulty(text=typed) if re.match(r"\s*(use|take|unknown|beam|plot|tabulate|figure)\s+\w", typed):
            return _first_words(statement)
        case Faulty(names=(name, *_)):
            return name
        case Faulty():
            return _first_words(statement)
    raise TypeError(type(statement).__name__)


def _first_words(statement: Faulty) -> str:
    words = statement_text(statement).split(" -- ")[0]
    for stop in (" for ", " over ", " as ", " from ", " within "):
        words = words.split(stop)[0]
    return words.strip()

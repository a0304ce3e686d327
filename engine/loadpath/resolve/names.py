"""Near misses and step ids."""

from __future__ import annotations

from difflib import get_close_matches

from loadpath.formula.canonical import statement_text
from loadpath.formula.statements import (
    Check,
    Choice,
    Criterion,
    Definition,
    Faulty,
    FunctionDefinition,
    Statement,
    Validity,
)


def nearest(name: str, known: list[str]) -> str:
    """`did you mean ...?` for the closest known name, "" where none is near."""
    folded = {k.casefold(): k for k in reversed(known)}
    close = [folded[name.casefold()]] if name.casefold() in folded else get_close_matches(name, known, 1, 0.6)
    return f"did you mean `{close[0]}`?" if close else ""


def step_id(statement: Statement) -> str:
    """The stable name of a step, before `#2` is added to a second one that is the same."""
    match statement:
        case Definition(name=name) | Choice(name=name) | FunctionDefinition(name=name):
            return name
        case Criterion(kind=kind, name=name):
            return f"{kind} {name}" if name else f"{kind}: {statement_text(statement)}"
        case Validity():
            return "valid: " + statement_text(statement).rsplit(" for ", 1)[0]
        case Check():
            return "check: " + statement_text(statement).rsplit(" within ", 1)[0]
        case Faulty(criterion=(kind, own)):
            return f"{kind} {own}" if own else _first_words(statement)
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

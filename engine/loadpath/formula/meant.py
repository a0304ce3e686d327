"""What a line was meant as: how each statement begins, and what is said of a line that begins like none."""

from __future__ import annotations

import re
from difflib import get_close_matches

from loadpath.formula.mistake import Mistake
from loadpath.formula.names import KINDS, RESERVED, canonical, words_in
from loadpath.formula.reader import Reader
from loadpath.formula.statements import CriterionKind
from loadpath.text import Span

LATER = ("use", "take", "beam", "figure")
"""Statements of the language that this version cannot work."""
SEVERAL = ("solve", "unknown", "plot", "tabulate")
"""Words that begin statements about several names or expressions."""
KIND: dict[str, CriterionKind] = {
    "strength": "strength", "stiffness": "stiffness", "stability": "stability", "limit": "limit",
}  # fmt: skip

_NAME = r"[^\W\d][\w'.]*"
_ASKED = r"(?:\[[^\]]*\]\s*)?"
DEFINES = re.compile(rf"\s*({_NAME})\s*{_ASKED}=(?!=)")
FUNCTION = re.compile(rf"\s*([^\W\d][\w']*)\s*\([^=<>]*\)\s*{_ASKED}=(?!=)")
CRITERION = re.compile(rf"\s*({'|'.join(KINDS)})((?:\s+[\w-]+)*)\s*:(?!=)")
CRITERION_WORDS = re.compile(rf"\s*({'|'.join(KINDS)})\b(?!\s*[=\[(:])")
VALIDITY = re.compile(r"\s*valid\s*:(?!=)")
CHECK = re.compile(r"\s*check\s*:(?!=)")
COLON = re.compile(r"\s*([^\W\d][\w']*)((?:\s+[\w-]+)*)\s*:(?!=)")
_BEGINS = (DEFINES, FUNCTION, CRITERION, VALIDITY, CHECK)
_BROKEN = (DEFINES, FUNCTION, re.compile(rf"\s*({_NAME})\s*(?:\[|\(|:|\S+\s*=)"))


def begins_statement(text: str) -> bool:
    """True for a line that begins like a whole statement, as no line that goes on another does."""
    return any(begin.match(text) for begin in _BEGINS)


def names(text: str) -> tuple[str, ...]:
    """What a line that could not be read would have defined, so that its uses are not reported as unknown."""
    word = next(words_in(text), "")
    if criterion(text) is not None or word in ("valid", "check"):
        return ()
    if word in ("use", "take") and (alias := re.search(r"\bas\s+([^\W\d][\w']*)", text)):
        return (canonical(alias.group(1)),)
    if word == "solve" and (head := re.match(r"\s*solve\s+(?:for\s+)?([^\n]*)", text)):
        bare = re.sub(r"\[[^\]]*\]", " ", head.group(1).split("   ")[0])
        parts = [re.split(r"\bbetween\b", part)[0] for part in bare.split(",")]
        return tuple(canonical(name) for part in parts for name in words_in(part) if name not in RESERVED)
    if word in ("plot", "tabulate") and not DEFINES.match(text):
        return ()
    if word in (*LATER, "unknown") and not DEFINES.match(text):
        body = text.split(" from ")[0].split(" over ")[0].split("\n")[0]
        found = words_in(re.sub(r"\[[^\]]*\]", " ", body))
        return tuple(canonical(name) for name in found if name not in RESERVED)
    match = next((m for broken in _BROKEN if (m := broken.match(text))), None)
    return (canonical(match.group(1)),) if match else ()


def is_named_so(text: str) -> bool:
    """True for `plot = 3`: a word of the language that was meant as a name."""
    word = re.match(rf"\s*({'|'.join(SEVERAL)})\s*(?:\[[^\]]*\]\s*)?=(?!=)", text)
    return word is not None


def guards(text: str) -> tuple[str, ...]:
    """The names that a validity which could not be read was meant for."""
    _, word, after = text.rpartition(" for ")
    return tuple(canonical(name) for name in words_in(after)) if VALIDITY.match(text) and word else ()


def criterion(text: str) -> tuple[CriterionKind, str] | None:
    """Kind and name of a line that was meant as a criterion."""
    if match := CRITERION.match(text):
        return KIND[match.group(1)], own_name(match)
    if match := CRITERION_WORDS.match(text):
        return KIND[match.group(1)], ""
    if (match := COLON.match(text)) and (near := _nearest_beginning(match.group(1))) in KIND:
        return KIND[near], own_name(match)
    return None


def own_name(match: re.Match[str]) -> str:
    """The words between the kind of a criterion and its colon."""
    return " ".join(match.group(2).split())


def _nearest_beginning(word: str) -> str:
    close = get_close_matches(word.lower()[:40], (*KINDS, "valid", "check"), 1, 0.7)
    return close[0] if close else ""


# --- lines that begin like no statement ---------------------------------------------------------------------


def no_such_beginning(reader: Reader) -> Mistake:
    """`strengh rod: ...`, or another word with a colon."""
    word = reader.word()
    near = _nearest_beginning(word)
    mend = (
        "a criterion begins with `strength:`, `stiffness:`, `stability:` or `limit:`; a definition takes `=`"
    )
    return Mistake(
        "bad-syntax", reader.here(len(word)), f"`{word}` with a colon begins no statement of the language",
        f"did you mean `{near}`?" if near else mend,
    )  # fmt: skip


def no_colon(reader: Reader) -> Mistake:
    """`strength bending sigma <= f_y`."""
    word = reader.word()
    reader.at += len(word)
    own = re.match(r"\s+[\w-]+(?=\s+[^\W\d])", reader.text[reader.at :])
    reader.skip()
    example = f"{word}{own.group().rstrip() if own else ''}: a <= b"
    message = f"a criterion takes a colon after `{word}` and its name"
    return Mistake("bad-syntax", reader.here(), message, f"write `{example}`")


def not_available(reader: Reader, word: str) -> Mistake:
    """A statement of the language that this version cannot work, or its word used as a name."""
    place = reader.here(len(word))
    reader.at += len(word)
    reader.skip()
    if reader.peek() in ("=", "["):
        return reserved(reader, word, place)
    message = f"`{word}` is part of the language, but this version of loadpath cannot work it yet"
    return Mistake("not-available", place, message, "write the working out in plain formulas for now")


def reserved(reader: Reader, word: str, place: Span | None = None) -> Mistake:
    """A word of the language used as a name."""
    message = f"`{word}` is a word of the language and cannot be a name"
    return Mistake(
        "reserved-word", place or reader.here(len(word)), message, f"choose another name, such as `{word}_1`"
    )

"""Statements: which one a line is, and its parts. Parsing always succeeds: a bad line becomes `Faulty` and a finding."""

from __future__ import annotations

import re

from loadpath.findings import Finding, finding
from loadpath.formula.lines import Group, Item, groups
from loadpath.formula.names import KINDS, RESERVED, canonical
from loadpath.formula.reader import Mistake, Reader
from loadpath.formula.statements import (
    Check,
    Choice,
    Criterion,
    CriterionKind,
    Definition,
    Faulty,
    FunctionDefinition,
    Note,
    Parameter,
    Statement,
    AskedUnit,
    Validity,
)
from loadpath.formula.tree import Branch, Cases, Logic, Node, Relation, walk
from loadpath.functions import NAMES as FUNCTION_NAMES
from loadpath.text import Source, Span

LONGEST_STATEMENT = 20_000
"""Characters of one statement with its deeper lines."""
LATER = ("use", "take", "solve", "unknown", "beam", "plot", "tabulate", "figure")
"""Statements of the language that this version cannot work."""

_DEFINES = re.compile(r"\s*([^\W\d][\w'.]*)\s*(?:\[[^\]]*\]\s*)?=(?!=)")
_FUNCTION = re.compile(r"\s*([^\W\d][\w']*)\s*\([^=<>]*\)\s*(?:\[[^\]]*\]\s*)?=(?!=)")
_CRITERION = re.compile(r"\s*(strength|stiffness|stability|limit)(?:\s+([\w-]+))?\s*:")
_CRITERION_WORDS = re.compile(r"\s*(strength|stiffness|stability|limit)\b(?!\s*[=\[(])")


def parse_block(source: Source, span: Span) -> tuple[tuple[Statement, ...], tuple[Finding, ...]]:
    """The statements of an indented block that covers whole lines, and what is wrong with them."""
    statements, found = [], []
    for group in groups(source, span):
        try:
            statements.append(_statement(group))
        except Mistake as mistake:
            found.append(finding(mistake.slug, mistake.message, source, mistake.span, label=mistake.label, help=mistake.help))
            statements.append(_faulty(group, source))
    return tuple(statements), tuple(found)


def is_statement(text: str) -> bool:
    """True where a whole line of prose would be read as a statement, or was plainly meant as one."""
    line = text.strip()
    later = re.match(r"(use\s+\w+\s.*\sas\s+\w+|beam\s+\w+\s+over\s|solve\s+for\s+\w|take\s+\w.*\sfrom\s+\w)", line)
    if later is not None:
        return True
    if not re.search(r"[=<>]", line):
        return False
    source = Source("", "    " + line)
    try:
        for group in groups(source, Span(0, len(source.text))):
            _statement(group)
    except Mistake:
        return False
    return True


def _statement(group: Group) -> Statement:
    if len(group.whole.text) > LONGEST_STATEMENT:
        raise Mistake("over-limit", group.span, f"a statement of more than {LONGEST_STATEMENT} characters")
    reader = Reader(group.whole)
    word = reader.word()
    text = group.whole.text
    if not text.strip():
        raise Mistake("bad-syntax", group.span, "a note stands here without a statement", "prose starts at the margin")
    if _CRITERION.match(text):
        return _criterion(group, reader)
    if _CRITERION_WORDS.match(text):
        raise _no_colon(reader)
    if re.match(r"\s*valid\s*:", text):
        return _validity(group, reader)
    if re.match(r"\s*check\s*:", text):
        return _check(group, reader)
    if word in LATER:
        raise _later(reader, word)
    if word in RESERVED or (word in FUNCTION_NAMES and not _FUNCTION.match(text) and _DEFINES.match(text)):
        raise _reserved(reader, word)
    return _definition(group, reader)


def _common(group: Group) -> tuple[Span, tuple[Note, ...]]:
    return group.span, group.whole.notes


# --- definitions ------------------------------------------------------------------------------------------------


def _definition(group: Group, reader: Reader) -> Statement:
    if not reader.word():
        raise Mistake(
            "bad-syntax", reader.here(), f"a formula line begins with a name, but {reader.found()} stands here",
            "write `name = ...`; prose starts at the margin",
        )  # fmt: skip
    name, place = reader.name()
    if "." in name:
        raise Mistake("bad-syntax", place, f"`{name}` holds a dot", "only `use`, `beam` and tables bring names with dots")
    if reader.peek() == "(":
        return _function(group, reader, name, place)
    unit = _unit(reader)
    _expect_equals(reader, name)
    if reader.word() == "cases":
        return Definition(*_common(group), name, place, unit, _cases(group, reader))
    reader.skip()
    if reader.peek() == '"':
        return _choice(group, reader, name, place, unit)
    value = reader.expression()
    reader.expect_end()
    return Definition(*_common(group), name, place, unit, value)


def _expect_equals(reader: Reader, name: str) -> None:
    reader.skip()
    reader.refuse_other_signs()
    if reader.takes("="):
        reader.skip()
        if reader.peek() == "=":
            raise Mistake("bad-syntax", reader.here(), "`==` is not a sign of the language", "one `=` is enough")
        if reader.done():
            raise Mistake("bad-syntax", reader.here(), f"nothing stands after `{name} =`", "write the value or the formula")
        return
    if reader.peek() and reader.peek() in "<>":
        raise Mistake(
            "no-relation", reader.here(), "a relation stands on a line that says neither its kind nor its use",
            "begin with `strength:`, `stiffness:`, `stability:`, `limit:` or `valid:`",
        )  # fmt: skip
    raise Mistake(
        "bad-syntax", reader.here(), f"expected `=` after `{name}`, but {reader.found()} stands here",
        "write `name = ...`; prose starts at the margin",
    )  # fmt: skip


def _unit(reader: Reader) -> AskedUnit | None:
    reader.skip()
    if reader.peek() != "[":
        return None
    return AskedUnit(*reader.bracketed_unit())


def _choice(group: Group, reader: Reader, name: str, place: Span, unit: AskedUnit | None) -> Choice:
    word = reader.choice_word()
    if unit is not None:
        raise Mistake("unit-mismatch", unit.span, "a choice between words takes no unit")
    if not reader.takes_word("of"):
        raise Mistake(
            "bad-syntax", reader.here(), f'expected `of` and the words to choose from, but {reader.found()} stands here',
            f'write `{name} = "{word.text}" of "{word.text}", "..."`',
        )  # fmt: skip
    options = [reader.choice_word()]
    while reader.takes(","):
        options.append(reader.choice_word())
    reader.expect_end()
    return Choice(*_common(group), name, place, word.text, word.span, tuple(option.text for option in options))


def _cases(group: Group, reader: Reader) -> Cases:
    start = reader.here(5)
    reader.takes_word("cases")
    if not group.deeper:
        raise Mistake("stray-line", start, "`cases` takes its branches on deeper lines", "one branch a line: `value  when condition`, last `value  otherwise`")
    after = group.head.text[group.head.text.find("cases") + 5 :]
    if after.strip():
        raise Mistake("bad-syntax", start, "`cases` stands alone at the end of its line", "put each branch on a deeper line")
    branches = tuple(_branch(item) for item in group.deeper)
    for branch in branches[:-1]:
        if branch.condition is None:
            raise Mistake("bad-syntax", branch.span, "`otherwise` is the last branch, but more follow")
    return Cases(branches, start.join(branches[-1].span))


def _branch(item: Item) -> Branch:
    reader = Reader(item)
    value = reader.expression()
    if reader.takes_word("otherwise"):
        reader.expect_end()
        return Branch(value, None, item.span)
    if not reader.takes_word("when"):
        if not reader.done() and reader.word() not in RESERVED:
            raise reader.leftover()
        raise Mistake(
            "bad-syntax", reader.here(), f"expected `when` or `otherwise` after the value, but {reader.found()} stands here",
            "a branch is `value  when condition`, the last may be `value  otherwise`",
        )  # fmt: skip
    condition = reader.condition()
    reader.expect_end()
    return Branch(value, condition, item.span)


def _function(group: Group, reader: Reader, name: str, place: Span) -> FunctionDefinition:
    if name in FUNCTION_NAMES:
        raise Mistake("reserved-word", place, f"`{name}` is a function of the language", f"choose another name, such as `{name}_1`")
    if not _FUNCTION.match(group.whole.text):
        raise Mistake(
            "bad-syntax", place, f"a call of `{name}` stands alone on its line",
            f"give it a name: `{name}_1 = {group.whole.text.strip()}`; a function is defined as `{name}(x [m]) [kN*m] = ...`",
        )  # fmt: skip
    reader.takes("(")
    parameters = [_parameter(reader)]
    while reader.takes(","):
        parameters.append(_parameter(reader))
    reader.expect(")", "expected `,` or `)` after a parameter")
    _refuse_twice(parameters)
    unit = _unit(reader)
    _expect_equals(reader, f"{name}(...)")
    if reader.word() == "cases":
        body: Node = _cases(group, reader)
    else:
        body = reader.expression()
        reader.expect_end()
    return FunctionDefinition(*_common(group), name, place, tuple(parameters), unit, body)


def _parameter(reader: Reader) -> Parameter:
    word = reader.word()
    if word in RESERVED or word in FUNCTION_NAMES:
        raise Mistake("reserved-word", reader.here(len(word)), f"`{word}` is a word of the language and cannot be a parameter")
    name, place = reader.name("the name of a parameter")
    return Parameter(name, _unit(reader), place)


def _refuse_twice(parameters: list[Parameter]) -> None:
    seen: set[str] = set()
    for parameter in parameters:
        if parameter.name in seen:
            raise Mistake("defined-twice", parameter.span, f"`{parameter.name}` is a parameter twice")
        seen.add(parameter.name)


# --- criteria, validity, checks ---------------------------------------------------------------------------------


def _criterion(group: Group, reader: Reader) -> Criterion:
    match = _CRITERION.match(group.whole.text)
    assert match is not None
    kind: CriterionKind = match.group(1)  # type: ignore[assignment]
    place = reader.span(match.start(1), match.end(1))
    reader.at = match.end()
    relation = _criterion_relation(reader)
    for node in walk(relation):
        if isinstance(node, Relation):
            _refuse_equals(node)
            _refuse_two_ways(node)
    return Criterion(*_common(group), kind, match.group(2) or "", relation, place)


def _criterion_relation(reader: Reader) -> Node:
    start = reader.at
    first = reader.relation()
    if not reader.takes_word("or"):
        if reader.word() == "and":
            raise Mistake("bad-syntax", reader.here(3), "a criterion holds one relation, a chain, or two joined by `or`", "write two criteria")
        reader.expect_end()
        return first
    second = reader.relation()
    if reader.word() == "or":
        raise Mistake("bad-syntax", reader.here(2), "more than two relations are joined by `or`", "an excluded band has two sides")
    reader.expect_end()
    return Logic("or", (first, second), reader.span(start))


def _refuse_equals(relation: Relation) -> None:
    for sign, place in zip(relation.signs, relation.at, strict=True):
        if sign == "=":
            raise Mistake(
                "no-relation", place, "a criterion needs `<=`, `<`, `>=` or `>`, not `=`",
                "to compare two ways of working the same thing write `check: a = b within 0.1 %`",
            )  # fmt: skip


def _refuse_two_ways(relation: Relation) -> None:
    if len({sign[0] for sign in relation.signs}) > 1:
        raise Mistake("bad-syntax", relation.at[1], "the signs of a chain point one way", "write `a <= x <= b`")
    if len(relation.signs) > 2:
        raise Mistake("bad-syntax", relation.at[2], "a chain holds a value between two bounds", "write `a <= x <= b`")


def _no_colon(reader: Reader) -> Mistake:
    word = reader.word()
    reader.at += len(word)
    own = re.match(r"\s+[\w-]+(?=\s+\S)", reader.text[reader.at :])
    reader.skip()
    example = f"{word}{own.group().rstrip() if own else ''}: a <= b"
    return Mistake("bad-syntax", reader.here(), f"a criterion takes a colon after `{word}` and its name", f"write `{example}`")


def _validity(group: Group, reader: Reader) -> Validity:
    reader.at = group.whole.text.index(":") + 1
    relation = reader.condition()
    if not reader.takes_word("for"):
        if not reader.done():
            raise reader.leftover()
        raise Mistake("bad-syntax", reader.here(), "a validity says what it is for", "write `valid: 3 <= t/d <= 12 for chi`")
    names = [reader.name()]
    while reader.takes(","):
        names.append(reader.name())
    reader.expect_end()
    return Validity(*_common(group), relation, tuple(names))


def _check(group: Group, reader: Reader) -> Check:
    reader.at = group.whole.text.index(":") + 1
    relation = reader.relation()
    if relation.signs != ("=",):
        raise Mistake("no-relation", relation.at[0], "a cross-check compares with one `=`", "write `check: a = b within 0.1 %`; a requirement begins with `limit:`")
    if not reader.takes_word("within"):
        if not reader.done():
            raise reader.leftover()
        raise Mistake("bad-syntax", reader.here(), "a cross-check says how close the two must be", "write `check: a = b within 0.1 %`")
    tolerance = reader.expression()
    reader.expect_end()
    return Check(*_common(group), relation, tolerance)


# --- what cannot be read ----------------------------------------------------------------------------------------


def _later(reader: Reader, word: str) -> Mistake:
    place = reader.here(len(word))
    reader.at += len(word)
    reader.skip()
    if reader.peek() in ("=", "["):
        return _reserved(reader, word, place)
    return Mistake(
        "not-available", place, f"`{word}` is part of the language, but this version of loadpath cannot work it yet",
        "write the working out in plain formulas for now",
    )  # fmt: skip


def _reserved(reader: Reader, word: str, place: Span | None = None) -> Mistake:
    return Mistake(
        "reserved-word", place or reader.here(len(word)),
        f"`{word}` is a word of the language and cannot be a name", f"choose another name, such as `{word}_1`",
    )  # fmt: skip


def _faulty(group: Group, source: Source) -> Faulty:
    text = group.whole.text
    criterion = _CRITERION.match(text) or _CRITERION_WORDS.match(text)
    kind: CriterionKind | None = criterion.group(1) if criterion else None  # type: ignore[assignment]
    own = (criterion.group(2) or "") if criterion and criterion.re is _CRITERION else ""
    typed = source.cut(Span(group.whole.start, group.span.end))
    return Faulty(*_common(group), typed.strip("\n"), _names_meant(text), (kind, own) if kind else None)


def _names_meant(text: str) -> tuple[str, ...]:
    """What a line that could not be read would have defined, so that its uses are not reported as unknown."""
    word = Reader(Item(text, 0, ())).word()
    if word in ("use", "take") and (alias := re.search(r"\bas\s+([^\W\d][\w']*)", text)):
        return (canonical(alias.group(1)),)
    if word in LATER or word in ("valid", "check") or word in KINDS:
        body = text.split(" from ")[0].split(" over ")[0].split("\n")[0]
        names = re.findall(r"[^\W\d][\w']*", re.sub(r"\[[^\]]*\]", " ", body))
        return tuple(canonical(name) for name in names if name not in RESERVED) if word in LATER else ()
    match = _DEFINES.match(text) or _FUNCTION.match(text) or re.match(r"\s*([^\W\d][\w']*)\s*(?:\[|\(|:=)", text)
    return (canonical(match.group(1)),) if match else ()

"""Reading definitions: inputs, results, choices, functions and their `cases`."""

from __future__ import annotations

import re

from loadpath.formula import meant
from loadpath.formula.lines import Group, Item
from loadpath.formula.mistake import Mistake
from loadpath.formula.names import RESERVED
from loadpath.formula.reader import Reader
from loadpath.formula.statements import (
    AskedUnit,
    Choice,
    Definition,
    FunctionDefinition,
    Parameter,
    Statement,
)
from loadpath.formula.tree import Branch, Cases, Node
from loadpath.functions import NAMES as FUNCTION_NAMES
from loadpath.text import Span

_FORM = "write `name = ...`; text that is no formula begins at the margin"
_UNIT_IN_PLACE = re.compile(r"([^\s=<>:]+)\s*=")


def read_definition(group: Group, reader: Reader) -> Statement:
    """A definition, a choice or a function."""
    if not reader.word():
        message = f"a formula line begins with a name, but {reader.found()} stands here"
        raise Mistake("bad-syntax", reader.here(), message, _FORM)
    name, place = reader.name()
    if "." in name:
        mend = "only `use`, `beam` and tables bring names with dots; write `_` instead"
        raise Mistake("bad-syntax", place, f"the name `{name}` holds a dot", mend)
    if reader.peek() == "(":
        return _function(group, reader, name, place)
    unit = _unit(reader)
    _expect_equals(reader, name)
    if reader.word() == "cases":
        return Definition(group.span, group.whole.notes, name, place, unit, _cases(group, reader))
    reader.skip()
    if reader.peek() == '"':
        return _choice(group, reader, name, place, unit)
    value = reader.expression()
    reader.expect_end()
    return Definition(group.span, group.whole.notes, name, place, unit, value)


def _expect_equals(reader: Reader, name: str) -> None:
    """Past the `=` with something behind it."""
    reader.skip()
    reader.refuse_other_signs()
    if reader.takes("="):
        if reader.done():
            message = f"nothing stands after `{name} =`"
            raise Mistake("bad-syntax", reader.here(), message, "write the value or the formula")
        return
    if reader.peek() in ("<", ">"):
        message = "a relation stands on a line that does not say what it is for"
        mend = "begin with `strength:`, `stiffness:`, `stability:`, `limit:` or `valid:`"
        raise Mistake("no-relation", reader.here(), message, mend)
    message = f"expected `=` after `{name}`, but {reader.found()} stands here"
    mend = _FORM
    if unit := _UNIT_IN_PLACE.match(reader.text, reader.at):
        mend = f"the unit of a result stands in brackets: `{name} [{unit.group(1)}] = ...`"
    raise Mistake("bad-syntax", reader.here(), message, mend)


def _unit(reader: Reader) -> AskedUnit | None:
    reader.skip()
    return AskedUnit(*reader.bracketed_unit()) if reader.peek() == "[" else None


# --- choices ------------------------------------------------------------------------------------------------


def _choice(group: Group, reader: Reader, name: str, place: Span, unit: AskedUnit | None) -> Choice:
    word = reader.choice_word()
    if unit is not None:
        message = "a choice between words takes no unit"
        raise Mistake("unit-mismatch", unit.span, message, "delete the brackets")
    if not reader.takes_word("of"):
        where = word.span if reader.done() else reader.here()
        message = f"expected `of` and the words to choose from, but {reader.found()} stands here"
        raise Mistake("bad-syntax", where, message, f'write `{name} = "{word.text}" of "{word.text}", "..."`')
    options = [reader.choice_word()]
    while reader.takes(","):
        options.append(reader.choice_word())
    reader.expect_end()
    words = tuple(option.text for option in options)
    return Choice(group.span, group.whole.notes, name, place, word.text, word.span, words)


# --- cases --------------------------------------------------------------------------------------------------


def _cases(group: Group, reader: Reader) -> Cases:
    start = reader.here(5)
    reader.takes_word("cases")
    if not group.deeper:
        mend = "write one branch a line: `value  when condition`, and last `value  otherwise`"
        raise Mistake("stray-line", start, "`cases` takes its branches on deeper lines", mend)
    if group.head.text[reader.at :].strip():
        message = "`cases` stands alone at the end of its line"
        raise Mistake("bad-syntax", reader.here(), message, "put each branch on a deeper line")
    branches = tuple(_branch(item) for item in group.deeper)
    for branch in branches[:-1]:
        if branch.condition is None:
            message = "`otherwise` is the last branch, but more follow"
            raise Mistake("bad-syntax", branch.span, message, "move this branch to the end")
    return Cases(branches, start.join(branches[-1].span))


def _branch(item: Item) -> Branch:
    reader = Reader(item)
    if meant.begins_statement(item.text):
        message = "this line is indented as a branch of `cases`, but begins like a statement of its own"
        raise Mistake("stray-line", item.span, message, "indent it as far as the line with `cases`")
    value = reader.expression()
    if reader.takes_word("otherwise"):
        reader.expect_end()
        return Branch(value, None, item.span)
    if not reader.takes_word("when"):
        raise _no_condition(reader, item)
    condition = reader.condition()
    reader.expect_end()
    return Branch(value, condition, item.span)


def _no_condition(reader: Reader, item: Item) -> Mistake:
    if not reader.done() and reader.word() not in RESERVED:
        return reader.leftover()
    where = item.span if reader.done() else reader.here()
    message = f"expected `when` or `otherwise` after the value, but {reader.found()} stands here"
    mend = "a branch is `value  when condition`, the last may be `value  otherwise`"
    return Mistake("bad-syntax", where, message, mend)


# --- functions ----------------------------------------------------------------------------------------------


def _function(group: Group, reader: Reader, name: str, place: Span) -> FunctionDefinition:
    if name in FUNCTION_NAMES:
        message = f"`{name}` is a function of the language"
        raise Mistake("reserved-word", place, message, f"choose another name, such as `{name}_1`")
    if not meant.FUNCTION.match(group.whole.text):
        typed = " ".join(group.whole.text.split())
        mend = f"give it a name: `{name}_1 = {typed}`; a function is defined as `{name}(x [m]) [kN*m] = ...`"
        raise Mistake("bad-syntax", place, f"a call of `{name}` stands alone on its line", mend)
    reader.takes("(")
    parameters = [_parameter(reader)]
    while reader.takes(","):
        parameters.append(_parameter(reader))
    reader.expect(")", "expected `,` or `)` after a parameter", "parameters are typed `(x [m], n [1])`")
    _refuse_twice(parameters)
    unit = _unit(reader)
    _expect_equals(reader, f"{name}(...)")
    body: Node
    if reader.word() == "cases":
        body = _cases(group, reader)
    else:
        body = reader.expression()
        reader.expect_end()
    return FunctionDefinition(group.span, group.whole.notes, name, place, tuple(parameters), unit, body)


def _parameter(reader: Reader) -> Parameter:
    word = reader.word()
    if word in RESERVED or word in FUNCTION_NAMES:
        message = f"`{word}` is a word of the language and cannot be a parameter"
        raise Mistake(
            "reserved-word", reader.here(len(word)), message, f"choose another name, such as `{word}_1`"
        )
    name, place = reader.name("the name of a parameter")
    if "." in name:
        raise Mistake("bad-syntax", place, f"the parameter `{name}` holds a dot", "write `_` instead")
    return Parameter(name, _unit(reader), place)


def _refuse_twice(parameters: list[Parameter]) -> None:
    seen: set[str] = set()
    for parameter in parameters:
        if parameter.name in seen:
            message = f"`{parameter.name}` is a parameter twice"
            raise Mistake("defined-twice", parameter.span, message, "give one of the two another name")
        seen.add(parameter.name)

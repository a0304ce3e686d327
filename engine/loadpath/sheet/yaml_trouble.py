"""What the YAML parser complains of, in plain words, at the place that causes it, with a mend."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass

import yaml

from loadpath.findings import Finding, finding
from loadpath.text import Source, Span

QUOTES = "put the whole text in quotes"
_CLOSING = {"[": "]", "{": "}"}
_KEY = re.compile(r"\s*(?:- +)?[\w.-]+")


@dataclass(frozen=True, slots=True)
class _Trouble:
    """The parser's complaint."""

    source: Source
    problem: str
    at: int
    """Offset where it stopped."""
    opened: int
    """Offset where what it was reading begins; `at` where it doesn't say."""
    end: int
    """Offset behind the last character that it reads."""

    @property
    def line(self) -> int:
        return self.source.line_number(self.at)

    @property
    def before(self) -> str:
        """The line up to the place."""
        return self.source.text[self.source.line_span(self.line).start : self.at]

    @property
    def character(self) -> str:
        """The one at the place, "" at the end."""
        return self.source.text[self.at : min(self.at + 1, self.end)]


@dataclass(frozen=True, slots=True)
class _Told:
    """The complaint in our words."""

    message: str
    span: Span
    help: str
    slug: str = "front-matter-syntax"


def yaml_finding(error: yaml.YAMLError, source: Source, span: Span) -> Finding:
    """The finding for an error of the parser, which read the stretch `span` of the source."""
    told = _tell(error, source, span)
    place = Span(min(told.span.start, span.end), min(told.span.end, span.end))
    return finding(told.slug, told.message, source, place, help=told.help)


def _tell(error: yaml.YAMLError, source: Source, span: Span) -> _Told:
    if not isinstance(error, yaml.MarkedYAMLError):
        at = span.start + int(getattr(error, "position", 0))
        return _Told("a character that no text can hold", Span(at, at + 1), "delete it")
    mark = error.problem_mark or error.context_mark
    at = min(span.start + mark.index, span.end) if mark else span.start
    opened = span.start + error.context_mark.index if error.context_mark else at
    trouble = _Trouble(source, error.problem or "", at, opened, span.end)
    for words, tell in _TELLERS:
        if words in trouble.problem:
            return tell(trouble)
    return _unknown(trouble)


def _one(offset: int) -> Span:
    return Span(offset, offset + 1)


def _unknown(t: _Trouble) -> _Told:
    return _Told(
        "the front matter cannot be read from here on", _one(t.at), f"where a text stands here, {QUOTES}"
    )


def _body(source: Source, number: int) -> Span:
    """A line without the white space around it."""
    span = source.line_span(number)
    text = source.cut(span)
    return Span(span.start + len(text) - len(text.lstrip()), span.start + len(text.rstrip()))


# --- colons -------------------------------------------------------------------------------------------------


def _stray_colon(t: _Trouble) -> _Told:
    """A second colon in a line, or a key where none can stand because the line above went on."""
    if re.search(r"[^\s:]:[ \t]+\S", t.before) or not _KEY.fullmatch(t.before):
        return _colon_in_text(t)
    above = t.line - 1
    while above > 1 and not t.source.line(above).strip():
        above -= 1
    if ": " not in t.source.line(above) + " " or above == t.line:
        return _no_colon_in(t, above)
    message = "this line is indented as if it went on the value above, but it holds a key"
    return _Told(
        message,
        _body(t.source, t.line),
        f"begin a key at the column of the keys above; where it is text, {QUOTES}",
    )


def _colon_in_text(t: _Trouble) -> _Told:
    example = _quoted_line(t.source.line(t.line))
    help = f"{QUOTES}: `{example}`" if example else QUOTES
    return _Told("a colon inside a text needs quotes round the text", _one(t.at), help)


def _quoted_line(line: str) -> str:
    """`title: Hoist: beam` with its text in quotes, "" where that takes more than quotes."""
    match = re.fullmatch(r"\s*([\w.-]+): +(\S.{0,60})", line.rstrip())
    if not match or re.search(r"[\"'\\\[\]{}#]", match.group(2)):
        return ""
    return f'{match.group(1)}: "{match.group(2)}"'


def _no_colon(t: _Trouble) -> _Told:
    return _no_colon_in(t, t.source.line_number(t.opened))


def _no_colon_in(t: _Trouble, number: int) -> _Told:
    span = _body(t.source, number)
    tight = re.match(r"([\w.-]+):(?=\S)", t.source.cut(span))
    if tight:
        colon = span.start + tight.end() - 1
        return _Told("a colon needs a space after it", _one(colon), "write `key: value`")
    help = f"write `key: value`; indent a line that goes on the one above; or {QUOTES}"
    return _Told("this line holds no `key:`", span, help)


# --- brackets and quotes ------------------------------------------------------------------------------------


def _brackets(t: _Trouble) -> _Told:
    bracket = t.source.text[t.opened : t.opened + 1]
    closing = _CLOSING.get(bracket, "]")
    line_end = t.source.line_span(t.line).end
    if t.character in ("}", "]"):
        message = f"`{t.character}` stands where `{closing}` would close the `{bracket}`"
        return _Told(message, _one(t.at), f"write `{closing}`, or {QUOTES}")
    if closing not in t.source.text[t.opened : line_end]:
        return _open_bracket(t, t.opened)
    if t.character == ":":
        return _colon_in_text(t)
    if t.character in ("[", "{"):
        return _Told(f"`{t.character}` inside a text needs quotes round the text", _one(t.at), QUOTES)
    return _Told(f"a comma or `{closing}` is missing before this", _one(t.at), f"or {QUOTES}")


def _open_bracket(t: _Trouble, at: int) -> _Told:
    bracket = t.source.text[at]
    help = f"close it with `{_CLOSING.get(bracket, ']')}`; where it is part of a text, {QUOTES}"
    return _Told(f"the bracket `{bracket}` that opens here is not closed", _one(at), help)


def _last_open(text: str, at: int) -> int:
    """The bracket that is open at an offset, -1 where there is none."""
    closed = 0
    for index in range(at - 1, -1, -1):
        closed += (text[index] in "]}") - (text[index] in "[{")
        if closed < 0:
            return index
    return -1


def _open_quote(t: _Trouble) -> _Told:
    quote = t.source.text[t.opened : t.opened + 1]
    other = '"' if quote == "'" else "'"
    message = f"the quotation mark {quote} that opens here is not closed"
    help = f"close it; where it is part of the text, put quotation marks {other}...{other} round the whole"
    return _Told(message, _one(t.opened), help)


def _escape(t: _Trouble) -> _Told:
    at = t.source.text.rfind("\\", t.opened, t.at + 1)
    message = f"`\\{t.source.text[at + 1 : at + 2]}` means nothing inside double quotes"
    return _Told(message, Span(at, at + 2), "put the text in single quotes, or leave the quotes away")


def _after_value(t: _Trouble) -> _Told:
    """Something that belongs neither to the value before it nor to a new line of its own."""
    if not t.before.strip():
        message = "this line begins at a column that fits none of the lines above"
        return _Told(message, _body(t.source, t.line), "begin the keys that belong together at one column")
    if t.character in ("}", "]"):
        return _Told(
            f"`{t.character}` closes a bracket that was not opened", _one(t.at), f"delete it, or {QUOTES}"
        )
    message = "text stands after a closing quote or bracket"
    span = Span(t.at, max(_body(t.source, t.line).end, t.at + 1))
    return _Told(message, span, f'{QUOTES}; a text that holds " goes into single quotes')


# --- characters that mean something -------------------------------------------------------------------------


def _tab(t: _Trouble) -> _Told:
    return _Told("a tab stands here, where YAML takes only spaces", _one(t.at), "use spaces")


def _odd_start(t: _Trouble) -> _Told:
    if not t.character and (bracket := _last_open(t.source.text, t.at)) >= 0:
        return _open_bracket(t, bracket)
    first = "a backtick" if t.character == "`" else f"`{t.character}`"
    return _Told(f"a text cannot begin with {first}", _one(t.at), QUOTES)


def _dash(t: _Trouble) -> _Told:
    help = f"put each item of a list on a line of its own below its key; where it is text, {QUOTES}"
    return _Told("`- ` begins the item of a list, which cannot stand here", _one(t.at), help)


def _mark(t: _Trouble) -> _Told:
    mark = t.source.text[t.opened : t.opened + 1]
    message = f"a text cannot begin with `{mark}`, which in YAML marks an anchor, an alias or a tag"
    return _Told(message, _one(t.opened), QUOTES, "yaml-alias")


def _block_text(t: _Trouble) -> _Told:
    mark = t.source.text[t.opened : t.opened + 1]
    help = f"begin the text on the next line, indented; where `{mark}` is part of the text, {QUOTES}"
    return _Told(f"nothing can follow `{mark}` on its line", _one(t.at), help)


def _document(t: _Trouble) -> _Told:
    above = t.source.line(t.line - 1).strip() if t.line > 1 else ""
    if above == "...":
        span = _body(t.source, t.line - 1)
        return _Told("`...` ends the front matter before its closing `---`", span, "delete the line")
    if not t.before.strip():
        return _after_value(t)
    return _unknown(t)


_TELLERS: tuple[tuple[str, Callable[[_Trouble], _Told]], ...] = (
    ("mapping values are not allowed", _stray_colon),
    ("could not find expected ':'", _no_colon),
    ("found character '\\t'", _tab),
    ("cannot start any token", _odd_start),
    ("found unexpected end of stream", _open_quote),
    ("found unexpected document separator", _open_quote),
    ("expected ',' or", _brackets),
    ("expected <block end>", _after_value),
    ("unknown escape character", _escape),
    ("expected escape sequence", _escape),
    ("sequence entries are not allowed", _dash),
    ("expected alphabetic or numeric character", _mark),
    ("undefined tag handle", _mark),
    ("expected a comment or a line break", _block_text),
    ("expected chomping or indentation", _block_text),
    ("expected indentation indicator", _block_text),
    ("expected the node content", _odd_start),
    ("expected '<document start>'", _document),
)
"""Words of the parser's complaint, and who tells it; the first that fits is taken."""

"""Tables of data: a captioned table becomes a statement for the table and one for each of its columns."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace

from markdown_it.token import Token

from loadpath.findings import Finding, Remark
from loadpath.formula.lines import Item
from loadpath.formula.mistake import Mistake
from loadpath.formula.names import RESERVED, canonical
from loadpath.formula.reader import Reader
from loadpath.formula.statements import AskedUnit, Column, Faulty, Note, Statement, Table, TwoWay
from loadpath.formula.tree import Binary, Name, Negative, Node, Number, Part, Quantity, span_of, walk
from loadpath.functions import NAMES as FUNCTION_NAMES
from loadpath.sheet.markdown import plain_text
from loadpath.sheet.places import Places
from loadpath.text import Source, Span

CAPTION = re.compile(r"Table\s+([^\W\d][\w.']*)\s*:")
MOST_COLUMNS = 26
MOST_ROWS = 5000

_CITATION = re.compile(r"\[([^\[\]]*)\]")
_HEAD_FORM = "a header cell is `name` or `name [unit]`"


@dataclass(frozen=True, slots=True)
class Cell:
    """One cell as typed."""

    text: str
    shown: str
    """Without markup."""
    span: Span

    @property
    def item(self) -> Item:
        """To be read as a formula."""
        return Item(self.text, self.span.start, ())


@dataclass(frozen=True, slots=True)
class Caption:
    """What stands above a table of data."""

    name: str
    name_span: Span
    note: Note
    span: Span


def read_caption(content: str, places: Places, source: Source) -> Caption | None:
    """The caption that a paragraph is, None where it is none."""
    match = CAPTION.match(content)
    if match is None:
        return None
    body = content[match.end() :]
    lead = match.end() + len(body) - len(body.lstrip())
    text = content[lead:].rstrip()
    citations = tuple(
        (m.group(1).strip(), Span(places(lead + m.start(1)), places(lead + m.end(1) - 1) + 1))
        for m in _CITATION.finditer(text)
        if m.group(1)
    )
    last = max(len(content.rstrip()) - 1, 0)
    whole = Span(places(0), places(last) + 1)
    note = Note(" ".join(text.split()), citations, Span(places(min(lead, last)), whole.end))
    name = Span(places(match.start(1)), places(match.end(1) - 1) + 1)
    return Caption(canonical(match.group(1)), name, note, whole)


def read_table(
    caption: Caption, tokens: list[Token], places: dict[int, Places], source: Source, first_line: int
) -> tuple[tuple[Statement, ...], tuple[Finding, ...]]:
    """The statements of a captioned table, and what is wrong with it."""
    assert tokens[0].map is not None
    start, end = first_line + tokens[0].map[0], first_line + tokens[0].map[1] - 1
    span = caption.span.join(source.line_span(end))
    grid = _grid(tokens, places)
    reading = _Reading(caption, grid, span, source, start)
    try:
        return reading.statements(), tuple(reading.found)
    except Mistake as mistake:
        names = (caption.name, *(n for n in (reading.column_name(c.text) for c in grid[0]) if n))
        typed = source.cut(span)
        faulty = Faulty(span, (caption.note,), typed, tuple(dict.fromkeys(names)), trouble=mistake.span)
        return (faulty,), (*reading.found, mistake.as_finding(source))


def without_table(caption: Caption, source: Source) -> tuple[Faulty, Finding]:
    """A caption that no table follows."""
    message = f"no table follows this caption of `{caption.name}`"
    mend = "the caption stands above its table, which has a line of dashes, `|---|---|`, below its header"
    word = Span(caption.span.start, caption.span.start + len("Table"))
    found = Mistake("table-shape", word, message, mend).as_finding(source)
    text = source.cut(caption.span)
    return Faulty(caption.span, (caption.note,), text, (caption.name,), trouble=word), found


def _grid(tokens: list[Token], places: dict[int, Places]) -> list[list[Cell]]:
    rows: list[list[Cell]] = []
    for token in tokens:
        if token.type == "tr_open":
            rows.append([])
        elif token.type == "inline":
            start = places[id(token)](0)
            shown = " ".join(plain_text(token.children).split())
            rows[-1].append(Cell(token.content, shown, Span(start, start + max(len(token.content), 1))))
    return rows


class _Reading:
    """One table being read. Raises `Mistake` for what spoils the whole of it; a spoilt column is its own."""

    def __init__(
        self, caption: Caption, grid: list[list[Cell]], span: Span, source: Source, first: int
    ) -> None:
        self.caption, self.grid, self.span, self.source, self.first = caption, grid, span, source, first
        self.found: list[Finding] = []
        self.notes = (caption.note,)

    def statements(self) -> tuple[Statement, ...]:
        self._check_name()
        self._check_shape()
        head, *body = self.grid
        if len(head) > 1 and all(_begins_with_digit(cell.text) for cell in head[1:]):
            return (self._two_way(head, body),)
        labels = () if _all_numbers([row[0] for row in body]) else tuple(row[0].shown for row in body)
        if labels:
            self._check_labels(body)
        table = Table(
            self.span, self.notes, self.caption.name, self.caption.name_span,
            head[0].shown, labels, len(body),
        )  # fmt: skip
        columns = [self._column(j, head[j], body, labels) for j in range(1 if labels else 0, len(head))]
        self._refuse_twice(columns)
        return (table, *columns)

    # --- the table as a whole ---

    def _check_name(self) -> None:
        name, place = self.caption.name, self.caption.name_span
        if "." in name:
            raise Mistake("bad-syntax", place, f"the table `{name}` holds a dot", "write `_` instead")
        if name in RESERVED or name in FUNCTION_NAMES:
            message = f"`{name}` is a word of the language and cannot be a table"
            raise Mistake("reserved-word", place, message, f"choose another name, such as `{name}_1`")

    def _check_shape(self) -> None:
        width = len(self.grid[0])
        if len(self.grid) < 2:
            place = self.source.line_span(self.first)
            raise Mistake(
                "table-shape", place, "the table has no rows", "write one line a row below the header"
            )
        if width > MOST_COLUMNS or len(self.grid) - 1 > MOST_ROWS:
            message = f"a table of more than {MOST_ROWS} rows or {MOST_COLUMNS} columns"
            raise Mistake("over-limit", self.caption.name_span, message, "split it into several")
        for i in range(1, len(self.grid)):
            number = self.first + 1 + i
            cells = _cells_in(self.source.line(number))
            if cells != width:
                line = self.source.line_span(number)
                lead = len(self.source.line(number)) - len(self.source.line(number).lstrip())
                message = f"this row has {cells} {'cell' if cells == 1 else 'cells'}, the header has {width}"
                place = Span(line.start + lead, line.start + len(self.source.line(number).rstrip()))
                raise Mistake("table-shape", place, message, "give each row one cell for each header cell")

    def _check_labels(self, body: list[list[Cell]]) -> None:
        seen: dict[str, Span] = {}
        for row in body:
            label = row[0].shown
            if not label:
                place = self._empty_place(row, 0)
                message = "this row has no label, while others have one"
                raise Mistake("table-cell", place, message, "give each row a label of its own")
            if label in seen:
                message = f'two rows are called "{label}"'
                remark = Remark("the first one stands here", seen[label])
                mend = "give each row a label of its own"
                raise Mistake("duplicate-row", row[0].span, message, mend, remarks=(remark,))
            seen[label] = row[0].span

    def _refuse_twice(self, columns: list[Statement]) -> None:
        seen: set[str] = set()
        for column in columns:
            if isinstance(column, Column):
                if column.name in seen:
                    message = f"`{column.name}` is a column twice"
                    raise Mistake("defined-twice", column.name_span, message, "give each column its own name")
                seen.add(column.name)

    # --- columns ---

    def column_name(self, typed: str) -> str:
        """The full name of a column, "" where the header cell holds no name."""
        match = re.match(r"[^\W\d][\w']*", typed)
        return f"{self.caption.name}.{canonical(match.group())}" if match else ""

    def _column(self, place: int, head: Cell, body: list[list[Cell]], labels: tuple[str, ...]) -> Statement:
        name, span, unit = self._head(head)
        try:
            cells = tuple(self._cell(row, place, unit) for row in body)
        except Mistake as mistake:
            self.found.append(mistake.as_finding(self.source))
            return Faulty(span, self.notes, head.text, (name,), trouble=mistake.span)
        index = place - (1 if labels else 0)
        return Column(head.span, self.notes, name, span, self.caption.name, index, unit, cells, labels)

    def _head(self, head: Cell) -> tuple[str, Span, AskedUnit | None]:
        reader = Reader(head.item)
        if not reader.word():
            shown = f"`{head.text}`" if head.text else "an empty cell"
            message = f"{shown} stands in the header, where the name of a column is expected"
            raise Mistake("table-shape", self._place(head), message, _HEAD_FORM)
        word = reader.word()
        if word in RESERVED or word in FUNCTION_NAMES:
            message = f"`{word}` is a word of the language and cannot be a column"
            mend = f"choose another name, such as `{word}_1`"
            raise Mistake("reserved-word", reader.here(len(word)), message, mend)
        name, place = reader.name()
        unit = None
        if "." in name:
            raise Mistake("bad-syntax", place, f"the column `{name}` holds a dot", "write `_` instead")
        reader.skip()
        if reader.peek() == "[":
            unit = AskedUnit(*reader.bracketed_unit())
        if not reader.done():
            rest = reader.text[reader.at :].strip()
            mend = f"{_HEAD_FORM}: `{name} [{rest.strip('()')}]`" if len(rest) < 20 else _HEAD_FORM
            message = f"`{head.text}` is no header of a column"
            raise Mistake("table-shape", reader.here(len(rest)), message, mend)
        return f"{self.caption.name}.{name}", place, unit

    def _cell(self, row: list[Cell], place: int, unit: AskedUnit | None) -> Node:
        cell = row[place]
        if not cell.text.strip():
            message = "this cell is empty"
            raise Mistake("table-cell", self._empty_place(row, place), message, "type a value; `0` for none")
        reader = Reader(cell.item)
        try:
            value = reader.expression()
            reader.expect_end()
        except Mistake as mistake:
            if mistake.slug in ("bad-syntax", "implied-multiplication"):
                message = f"this cell cannot be read: {mistake.message}"
                raise Mistake("table-cell", mistake.span, message, mistake.help) from None
            raise
        return _with_unit(value, unit)

    def _place(self, cell: Cell) -> Span:
        return cell.span

    def _empty_place(self, row: list[Cell], place: int) -> Span:
        """Where an empty cell stands: on the stroke that closes it."""
        number = self.first + 1 + next(i for i, each in enumerate(self.grid) if each is row)
        line = self.source.line(number)
        strokes = [m.start() for m in re.finditer(r"(?<!\\)\|", line)]
        after = place + (1 if line.lstrip().startswith("|") else 0)
        at = strokes[after] if after < len(strokes) else max(len(line.rstrip()) - 1, 0)
        start = self.source.line_span(number).start
        return Span(start + at, start + at + 1)

    # --- two-way tables ---

    def _two_way(self, head: list[Cell], body: list[list[Cell]]) -> Table:
        unit = self._corner(head[0])
        for row in body:
            if row[0].text and not _all_numbers([row[0]]):
                message = f"`{row[0].text}` is no number: both sides of a two-way table are numbers"
                mend = "write a number, or head the columns by names and take a row by its label"
                raise Mistake("table-cell", row[0].span, message, mend)
        across = tuple(self._cell(head, j, None) for j in range(1, len(head)))
        down = tuple(self._cell(row, 0, unit) for row in body)
        cells = tuple(tuple(self._cell(row, j, None) for j in range(1, len(head))) for row in body)
        two_way = TwoWay(across, down, cells)
        name, place = self.caption.name, self.caption.name_span
        return Table(self.span, self.notes, name, place, head[0].shown, (), len(body), two_way)

    def _corner(self, cell: Cell) -> AskedUnit | None:
        """The unit of the first column, where the corner states one: `t [mm]`."""
        reader = Reader(cell.item)
        if not reader.word():
            return None
        reader.name()
        reader.skip()
        return AskedUnit(*reader.bracketed_unit()) if reader.peek() == "[" else None


def _begins_with_digit(text: str) -> bool:
    return text.strip()[:1].isdigit() or text.strip()[:2].lstrip("-").isdigit()


def _all_numbers(cells: list[Cell]) -> bool:
    """True where each cell is a number or a quantity: the first column then holds no labels."""
    for cell in cells:
        reader = Reader(cell.item)
        try:
            value = reader.expression()
        except Mistake:
            return False
        if not reader.done() or not isinstance(_unsigned(value), Number | Quantity):
            return False
    return True


def _unsigned(value: Node) -> Node:
    return value.operand if isinstance(value, Negative) else value


def _with_unit(value: Node, unit: AskedUnit | None) -> Node:
    """A cell without name and unit takes the unit of the header."""
    named = any(isinstance(n, Name) and n.name != "pi" for n in walk(value))
    if unit is None or unit.text == "1" or named or any(isinstance(n, Quantity) for n in walk(value)):
        return value
    return _given(value, unit)


def _given(value: Node, unit: AskedUnit) -> Node:
    """The unit behind the numbers that it belongs to: `2*45` is `2*45 mm`."""
    match value:
        case Number():
            return Quantity((Part(value.text, None, unit.text),), value.span, unit.span)
        case Negative(operand=Number(text=text)) if unit.text in ("degC", "degF"):
            return Quantity((Part("-" + text, None, unit.text),), value.span, unit.span)
        case Negative(operand=operand):
            return replace(value, operand=_given(operand, unit))
        case Binary(operator="+" | "-", left=left, right=right):
            return replace(value, left=_given(left, unit), right=_given(right, unit))
        case Binary(operator="*", right=right):
            return replace(value, right=_given(right, unit))
        case Binary(operator="/", left=left):
            return replace(value, left=_given(left, unit))
    one = Quantity((Part("1", None, unit.text),), span_of(value), unit.span)
    return Binary("*", value, one, span_of(value), span_of(value))


def _cells_in(line: str) -> int:
    """Cells of one line of a table as typed."""
    body = line.strip()
    body = body.removeprefix("|")
    if body.endswith("|") and not body.endswith("\\|"):
        body = body[:-1]
    return len(re.findall(r"(?<!\\)\|", body)) + 1

"""The body of a sheet: CommonMark in, blocks in reading order out, formula lines read as statements."""

from __future__ import annotations

from collections.abc import Iterator

from markdown_it.token import Token

from loadpath.findings import Finding, finding
from loadpath.formula.parser import parse_block
from loadpath.formula.statements import Faulty, Statement
from loadpath.project import World
from loadpath.sheet import misplaced
from loadpath.sheet.images import ImageRefused, Picture, image_path, read_picture
from loadpath.sheet.markdown import DEEPEST, parse, plain_text
from loadpath.sheet.misplaced import Surroundings
from loadpath.sheet.model import Block, Formulas, Heading, Image, Prose
from loadpath.sheet.places import CellPlaces, Places, heading_places, paragraph_places
from loadpath.sheet.tables import read_caption, read_table, without_table
from loadpath.sheet.values import read_value, values_in
from loadpath.text import Source, Span

_LISTS = ("bullet_list_open", "ordered_list_open")


def read_blocks(source: Source, start: int, world: World) -> tuple[tuple[Block, ...], tuple[Finding, ...]]:
    """The blocks from an offset at the start of a line to the end of the source, and what is wrong."""
    if not source.text[start:].strip():
        return (), ()
    tokens = parse(source.text[start:])
    first_line = source.line_number(start)
    words = _Words(source, first_line)
    words.read(tokens)
    blocks = _Blocks(source, first_line, world, words)
    blocks.read(tokens)
    return tuple(blocks.blocks), tuple(words.found + blocks.found)


class _Words:
    """First pass: whatever stands inside paragraphs, headings and cells, however deep they lie."""

    def __init__(self, source: Source, first_line: int) -> None:
        self.source, self.first_line = source, first_line
        self.found: list[Finding] = []
        self.lost: list[Faulty] = []
        """Misplaced formula lines, in reading order."""
        self.places: dict[int, Places] = {}
        """Of each inline token that stands at top level or in a table, by its id."""
        self.cells = CellPlaces(source)
        self.open: list[Token] = []

    def read(self, tokens: list[Token]) -> None:
        for token in tokens:
            if token.type == "inline":
                self.inline(token)
            elif token.type == "code_block" and self.open:
                self.nested(token)
            elif token.nesting == 1:
                self.open.append(token)
                self.limit(token)
            elif token.nesting == -1:
                self.open.pop()

    @property
    def around(self) -> Surroundings:
        types = {token.type for token in self.open}
        return Surroundings(not types.isdisjoint(_LISTS), "blockquote_open" in types, "heading_open" in types)

    def line(self, token: Token) -> int:
        assert token.map is not None
        return self.first_line + token.map[0]

    def inline(self, token: Token) -> None:
        parent, line = self.open[-1], self.line(token)
        if parent.type == "heading_open" and parent.markup.startswith("#"):
            places = heading_places(token.content, self.source, line)
        elif parent.type in ("paragraph_open", "heading_open"):
            places = paragraph_places(token.content, self.source, line)
            found, lost = misplaced.in_paragraph(token.content, places, self.source, self.around)
            self.found += found
            self.lost += lost
        else:
            places = self.cells(token, line)
        if len(self.open) == 1 or parent.type in ("th_open", "td_open"):
            self.places[id(token)] = places
        alone = len(self.open) == 1 and parent.type == "paragraph_open" and _lone_image(token) is not None
        token.children = [self.child(child, token.content, places, alone) for child in token.children or ()]

    def child(self, token: Token, content: str, places: Places, alone: bool) -> Token:
        if token.type == "value":
            value, wrong = read_value(token.content, token.meta["at"], self.source, places)
            token.meta = {"value": value}
            self.found += [wrong] if wrong else []
        elif token.type == "image":
            start, end = token.meta["at"]
            span = Span(places(start), places(end - 1) + 1)
            if not alone:
                help = "put it in a paragraph of its own at the margin, with an empty line above and below"
                message = "an image stands inside other text"
                self.found.append(finding("image-path", message, self.source, span, help=help))
                return Token("text", "", 0, content=content[start:end], level=token.level)
            first, last = token.meta["address"]
            token.meta |= {"span": span, "address_span": Span(places(first), places(last - 1) + 1)}
        return token

    def nested(self, token: Token) -> None:
        assert token.map is not None
        span = _lines(self.source, self.first_line, token.map)
        end = span.start + len(self.source.line(self.line(token)).rstrip())
        place = Span(end - len(token.content.split("\n")[0].strip()), end)
        self.found.append(misplaced.nested_block(self.source, place, self.around))
        if self.around.in_quote:
            self.lost += misplaced.lost_in_quotation(token.content, self.source, self.line(token), place)
        else:
            self.lost += misplaced.lost_statements(self.source, span, place)

    def limit(self, token: Token) -> None:
        """The parser leaves out what lies deeper: that is said once."""
        if token.type in ("list_item_open", "blockquote_open") and token.level + 1 >= DEEPEST:
            message = "lists or quotations are nested so deep that what follows is not read"
            span = self.source.line_span(self.line(token))
            if not any(f.slug == "over-limit" for f in self.found):
                self.found.append(finding("over-limit", message, self.source, span, help="use fewer levels"))


class _Blocks:
    """Second pass: the elements at top level become blocks; the lines between two others are one `Prose`."""

    def __init__(self, source: Source, first_line: int, world: World, words: _Words) -> None:
        self.source, self.first_line, self.world, self.words = source, first_line, world, words
        self.blocks: list[Block] = []
        self.found: list[Finding] = []
        self.prose: list[Token] = []
        self.prose_from = 0
        """The line after the last block that is not prose, from 0 in the body."""
        self.bare: list[Statement] = []
        """Captions without a table in the prose that is not closed yet."""
        self.images = 0
        self.lost = iter(words.lost)
        self.next_lost = next(self.lost, None)

    def read(self, tokens: list[Token]) -> None:
        before: list[Token] = []
        for element in _elements(tokens):
            first = element[0]
            assert first.map is not None
            if first.type != "table_open":
                self.refuse_caption(before)
            block = self.block(element)
            if block is None and self.table(element, before):
                before = element
                continue
            if block is None:
                self.check(element)
                self.prose += element
            else:
                self.end_prose(first.map[0])
                self.blocks.append(block)
                self.prose_from = first.map[1]
            before = element
        self.refuse_caption(before)
        self.end_prose(len(self.source.line_starts) + 1 - self.first_line)

    def block(self, element: list[Token]) -> Block | None:
        """The block that an element is by itself, None where it is prose."""
        first = element[0]
        assert first.map is not None
        span = _lines(self.source, self.first_line, first.map)
        if first.type == "heading_open":
            return Heading(int(first.tag[1:]), element[1], plain_text(element[1].children), span)
        if first.type == "code_block":
            statements, found = parse_block(self.source, span)
            self.found += found
            return Formulas(statements, span)
        if first.type == "paragraph_open" and (image := _lone_image(element[1])) is not None:
            return self.image(image)
        return None

    def image(self, token: Token) -> Image:
        self.images += 1
        address, span = str(token.attrs["src"]), token.meta["span"]
        try:
            picture = read_picture(address, self.world)
        except ImageRefused as refused:
            place = token.meta["address_span"]
            self.found.append(finding(refused.slug, str(refused), self.source, place, help=refused.help))
            picture = Picture(image_path(address), "", b"")
        if any(child.type == "value" for child in token.children or ()):
            message = "the caption of an image prints no values yet"
            help = "name the value in the text beside the image, or write `\\{` for a brace"
            self.found.append(finding("not-available", message, self.source, span, help=help))
        caption = plain_text(token.children)
        return Image(picture.path, caption, picture.media_type, picture.data, self.images, span)

    def check(self, element: list[Token]) -> None:
        """What is legal CommonMark, but would leave something of a sheet out of sight."""
        first = element[0]
        if first.type == "fence" and not self.is_closed(first):
            span = self.source.line_span(self.words.line(first))
            message = "this fence is not closed, so nothing below it is evaluated"
            help = f"close it with a line `{first.markup}`"
            self.found.append(finding("swallowed-formula", message, self.source, span, help=help))

    def table(self, element: list[Token], before: list[Token]) -> bool:
        """Takes up a table of data with the caption above it; False where the element is none."""
        first = element[0]
        if first.type != "table_open" or not before or before[0].type != "paragraph_open":
            return False
        above = before[1]
        caption = read_caption(above.content, self.words.places[id(above)], self.source)
        if caption is None:
            return False
        assert first.map is not None and before[0].map is not None
        statements, found = read_table(caption, element, self.words.places, self.source, self.first_line)
        self.found += found
        del self.prose[-len(before) :]
        self.end_prose(before[0].map[0])
        self.blocks.append(Formulas(statements, statements[0].span))
        self.prose_from = first.map[1]
        return True

    def refuse_caption(self, element: list[Token]) -> None:
        """A caption of a table of data must stand above one."""
        if element and element[0].type == "paragraph_open":
            content, places = element[1].content, self.words.places[id(element[1])]
            caption = read_caption(content, places, self.source)
            if caption is not None:
                statement, found = without_table(caption, self.source)
                self.found.append(found)
                self.bare.append(statement)

    def is_closed(self, fence: Token) -> bool:
        assert fence.map is not None
        last = self.source.line(self.first_line + fence.map[1] - 1).strip()
        closes = last.startswith(fence.markup) and not last.strip(fence.markup[0])
        return closes and fence.map[1] - fence.map[0] > 1

    def end_prose(self, before: int) -> None:
        """Closes the prose that ends above a line (from 0 in the body), with the formula lines lost in it."""
        span = _trimmed(self.source, _lines(self.source, self.first_line, [self.prose_from, before]))
        if span.end > span.start:
            values = tuple(values_in(self.prose))
            self.blocks.append(Prose(tuple(self.prose), values, self.source.cut(span), span))
        self.prose = []
        starts, line = self.source.line_starts, self.first_line - 1 + before
        end = starts[line] if line < len(starts) else len(self.source.text) + 1
        lost: list[Statement] = self.bare
        self.bare = []
        while self.next_lost is not None and self.next_lost.span.start < end:
            lost.append(self.next_lost)
            self.next_lost = next(self.lost, None)
        if lost:
            lost.sort(key=lambda statement: statement.span)
            self.blocks.append(Formulas(tuple(lost), lost[0].span.join(lost[-1].span)))


def _elements(tokens: list[Token]) -> Iterator[list[Token]]:
    """The tokens of one element at top level after the other."""
    element: list[Token] = []
    for token in tokens:
        element.append(token)
        if token.level == 0 and token.nesting != 1:
            yield element
            element = []


def _lone_image(inline: Token) -> Token | None:
    children = inline.children or []
    return children[0] if len(children) == 1 and children[0].type == "image" else None


def _lines(source: Source, first_line: int, lines: list[int]) -> Span:
    """Whole lines of the body, numbered from 0, the second one left out; without the last line end."""
    start, end = first_line + lines[0], first_line + lines[1] - 1
    if end < start:
        return Span(0, 0)
    return Span(source.line_span(start).start, source.line_span(end).end)


def _trimmed(source: Source, span: Span) -> Span:
    """Without the blank lines at both ends; empty where nothing else is there."""
    text = source.cut(span)
    body = text.strip()
    if not body:
        return Span(span.start, span.start)
    start = text.rfind("\n", 0, text.index(body[0])) + 1
    return Span(span.start + start, span.start + len(text.rstrip()))

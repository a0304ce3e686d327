"""Which expressions are columns: by their names, before any number, and never by the shape of a value."""

from __future__ import annotations

from collections.abc import Callable
from difflib import get_close_matches

from loadpath.formula.canonical import text
from loadpath.formula.mistake import Mistake
from loadpath.formula.tree import At, Binary, Branch, Call, Name, Node, Relation, Word, children, span_of
from loadpath.functions import SPECIAL
from loadpath.resolve.model import Rows, Type
from loadpath.text import Span

BROUGHT_BACK = {"sum": 1, "count": 1, "min": 1, "max": 1}
"""Functions that bring a column back to one number, with the number of arguments that says so."""
LOOKED_UP = ("interp", "lookup")


def is_brought_back(call: Call) -> bool:
    """True for `sum(column)`, `count`, `min` and `max` with one argument."""
    return BROUGHT_BACK.get(call.function) == len(call.arguments)


def is_looking(call: Call) -> bool:
    """True for a call that looks at a whole expression or column, rather than at values."""
    return call.function in SPECIAL or is_brought_back(call)


def may_hold_columns(node: Node | Branch, is_column: Callable[[str], bool]) -> bool:
    """True where a node by itself has to do with columns."""
    match node:
        case At():
            return True
        case Name(name=name):
            return is_column(name)
        case Call():
            return is_brought_back(node) or node.function in LOOKED_UP
    return False


class Columns:
    """Answers for the rows of an expression. Raises `Mistake` where columns don't go together."""

    def __init__(
        self,
        rows_of_name: Callable[[str], Rows | None],
        type_of_name: Callable[[str], Type],
        is_two_way: Callable[[str], bool],
    ) -> None:
        self.rows_of_name, self.type_of_name, self.is_two_way = rows_of_name, type_of_name, is_two_way

    def rows_of(self, node: Node | Branch) -> Rows | None:
        """The rows that an expression goes over, None where it is one value."""
        match node:
            case Name(name=name):
                return self.rows_of_name(name)
            case At():
                self._cell(node)
                return None
            case Call() if is_brought_back(node):
                self.needed(node.arguments[0], node)
                return None
            case Call(function=function) if function in LOOKED_UP and len(node.arguments) == 3:
                return self._look_up(node)
        joined: Rows | None = None
        first: Node | Branch | None = None
        for child in children(node):
            rows = self.rows_of(child)
            if rows is not None and joined is not None and not rows.go_with(joined):
                raise _mixed(node, first, child, joined, rows)
            if joined is None and rows is not None:
                joined, first = rows, child
        return joined

    def needed(self, column: Node, call: Call) -> Rows:
        """The rows of an argument that must be a column."""
        rows = self.rows_of(column)
        if rows is None:
            message = f"`{call.function}` takes a column here, but `{text(column)}` is one value"
            mend = f"name a column of a table: `{call.function}(plates.A)`"
            if call.function in LOOKED_UP:
                mend = f"name two columns of one table: `{call.function}(x, curve.x, curve.y)`"
            raise Mistake("needs-column", span_of(column), message, mend)
        return rows

    def _look_up(self, call: Call) -> Rows | None:
        x, xs, ys = call.arguments
        if call.function == "interp" and isinstance(ys, Name) and self.is_two_way(ys.name):
            a, b = self.rows_of(x), self.rows_of(xs)
            if a is not None and b is not None and not a.go_with(b):
                raise _mixed(call, x, xs, a, b)
            return a or b
        a, b = self.needed(xs, call), self.needed(ys, call)
        if not a.go_with(b):
            raise _mixed(call, xs, ys, a, b)
        return self.rows_of(x)

    def _cell(self, node: At) -> None:
        column, row = node.operand, node.row
        rows = self.rows_of(column)
        if rows is None:
            message = f"`at` takes one cell of a column, but `{text(column)}` is no column"
            raise Mistake("needs-column", span_of(column), message, 'write `plates.A at "web"`')
        if not rows.labels:
            message = f"the rows of `{rows.table}` have no labels: its first column is numbers"
            mend = "give the table a first column of text, or use `lookup(x, xs, ys)`"
            raise Mistake("unknown-row", span_of(row), message, mend)
        if isinstance(row, Word):
            self._refuse_unknown(row.text, rows, span_of(row), "")
            return
        words = self.type_of_name(row.name).words if isinstance(row, Name) else None
        if words is None:
            message = f"`{text(row)}` is no choice, and the label of a row stands in quotes"
            raise Mistake("unknown-row", span_of(row), message, f'write `{text(column)} at "{text(row)}"`')
        for word in words:
            self._refuse_unknown(word, rows, span_of(row), f", one of the words of `{text(row)}`")

    def _refuse_unknown(self, label: str, rows: Rows, place: Span, what: str) -> None:
        if label in rows.labels:
            return
        close = get_close_matches(label, rows.labels, 1, 0.5)
        listed = ", ".join(f'"{each}"' for each in rows.labels[:12])
        mend = f'did you mean "{close[0]}"?' if close else f"its rows are {listed}"
        message = f'no row of `{rows.table}` is called "{label}"{what}'
        raise Mistake("unknown-row", place, message, mend)


def _mixed(
    node: Node | Branch, a: Node | Branch | None, b: Node | Branch, first: Rows, second: Rows
) -> Mistake:
    place = span_of(b) if isinstance(b, Node) else Span(0, 0)
    if isinstance(node, Binary):
        place = node.at
    elif isinstance(node, Relation) and node.at:
        place = node.at[0]
    shown = [f"`{text(each)}`" for each in (a, b) if isinstance(each, Node)]
    message = f"columns of `{first.table}` and of `{second.table}` don't go together: {' and '.join(shown)}"
    mend = (
        "columns mix where the labels of their rows are the same; bring one back to a number, or take a cell"
    )
    return Mistake("mixed-tables", place, message, mend)

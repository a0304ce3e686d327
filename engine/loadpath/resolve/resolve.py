"""The pass over a sheet that checks names, order and dimensions before any number is worked."""

from __future__ import annotations

from dataclasses import dataclass

from loadpath.findings import Finding, Remark, finding
from loadpath.formula.mistake import Mistake
from loadpath.formula.statements import (
    Check,
    Choice,
    Column,
    Criterion,
    Definition,
    FunctionDefinition,
    Plot,
    Solution,
    Statement,
    Table,
    Tabulate,
    Unknown,
    Validity,
)
from loadpath.formula.tree import Call, Name, Node, span_of, walk
from loadpath.resolve.columns import Columns, may_hold_columns
from loadpath.resolve.dimensions import Checker
from loadpath.resolve.displays import Displays
from loadpath.resolve.model import UNKNOWN, Entry, Kind, Resolved, Rows, TwoWayTypes, Type
from loadpath.resolve.names import Names, Suggestions, step_id
from loadpath.resolve.parts import (
    PI,
    Nodes,
    defined_by,
    expressions,
    kind_of,
    mentioned_in,
    nodes_in,
    uses_in,
)
from loadpath.resolve.prose import values_in_prose
from loadpath.resolve.several import Several
from loadpath.resolve.special import CallMistake
from loadpath.resolve.units import read_unit
from loadpath.resolve.unknowns import Unknowns
from loadpath.sheet.model import Sheet
from loadpath.text import Span
from loadpath.units import KINDS, ONE, Unit, UnitSystem

MOST_STATEMENTS = 20_000
DEEPEST_CALLS = 30
"""Functions that call one another."""
MOST_WORK = 20_000
"""Operations of one statement, those of the functions that it calls counted at each call."""
MOST_WORK_IN_ALL = 2_000_000


def resolve(sheet: Sheet) -> Resolved:
    """Who defines each name, in which order, with which dimension. Never raises for a user's mistake."""
    return _Resolver(sheet).run()


@dataclass
class _Checked:
    """What the dimension check gives of one statement."""

    type: Type = UNKNOWN
    unit: Unit = ONE
    asked: bool = False
    rows: Rows | None = None
    side_units: tuple[Unit, ...] = ()


_VALUES = ("input", "result", "choice", "unknown", "solution", "table")
"""Kinds of steps that a bracket behind the name makes no call of."""


class _Resolver:
    def __init__(self, sheet: Sheet) -> None:
        self.sheet, self.source = sheet, sheet.source
        self.found: list[Finding] = []
        self.entries: list[Entry] = []
        self.system = UnitSystem(sheet.front.units, self._overrides())
        self.statements = self._limited(sheet.statements)
        self.suggestions = Suggestions()
        self.names = Names(self.source, self.statements, self.suggestions)
        self.checker = Checker(
            self._type_of_name, self._function, self.names.__contains__, self.system,
            self._two_way, self._is_table, self.names.first.get,
        )  # fmt: skip
        self.columns = Columns(self._rows_of_name, self._type_of_name, lambda n: self._two_way(n) is not None)
        self.unknowns = Unknowns(self.statements)
        self.hanging = 0
        """Line that blocks the statement at hand: of what hangs, less can be said."""
        self.sought: dict[str, Type] = {}
        """Types of what the `solve for` at hand finds."""
        self.two_way: dict[str, TwoWayTypes] = {}
        self.displays = Displays(self.checker, self.names, self.entries)
        self.several = Several(self.checker, self.displays, self._entry_of)
        self.citable = {s.key for s in sheet.front.sources} | {a.key for a in sheet.front.assumptions}
        self.mentioned: set[str] = set()
        self.ids: dict[str, int] = {}
        self.criteria: dict[str, Span] = {}
        """Where the first criterion of each id stands."""
        self.faulty: set[str] = set()
        """Names that a line above would have defined, had it been readable."""
        self.warned: set[str] = set()
        self.work: dict[str, int] = {}
        self.depth: dict[str, int] = {}
        self.said: dict[tuple[str, int | str], int] = {}
        """Line of the first of several findings that are one mistake."""
        self.once: set[tuple[str, int | str]] = set()
        """Operations of each function of the sheet."""
        self.work_in_all = 0

    def run(self) -> Resolved:
        for statement in self.statements:
            self._statement(statement)
        values, found = values_in_prose(self.sheet, self.names, self.entries, self.checker, self.suggestions)
        self.found += found
        meant = frozenset(self.suggestions.made | self.mentioned | {value.name for value in values})
        return Resolved(
            self.sheet, self.system, self.checker, tuple(self.entries), self.names.by_name, values,
            tuple(self.found), meant,
        )  # fmt: skip

    # --- before the pass ---

    def _limited(self, statements: tuple[Statement, ...]) -> tuple[Statement, ...]:
        if len(statements) > MOST_STATEMENTS:
            message = f"more than {MOST_STATEMENTS} statements on one sheet"
            place = statements[MOST_STATEMENTS].span
            self._report(Mistake("over-limit", place, message, "split it into several sheets"))
            return ()
        return statements

    def _overrides(self) -> tuple[tuple[str, str], ...]:
        """The sheet's own units by kind; those of another dimension are mistakes."""
        kept = []
        for kind, unit in self.sheet.front.unit_overrides:
            at = self.source.text.find(unit, max(self.source.text.find("units"), 0))
            place = Span(at, at + len(unit)) if at >= 0 else None
            try:
                read = read_unit(unit, place or Span(0, 0))
                if kind in KINDS and read.dimension == KINDS[kind]:
                    kept.append((kind, unit))
                    continue
                message, help = f"`{unit}` is no unit of {kind.replace('_', ' ')}", "name a unit of that kind"
            except Mistake as mistake:
                message, help = mistake.message, mistake.help
            self.found.append(finding("front-matter-value", message, self.source, place, help=help))
        return tuple(kept)

    # --- one statement ---

    def _statement(self, statement: Statement) -> None:
        self._citations(statement)
        nodes = nodes_in(statement)
        self.mentioned.update(word for word in mentioned_in(statement, nodes) if word in self.names)
        kind = kind_of(statement, nodes)
        refused = self._refused(statement) if kind != "faulty" else []
        uses, hanging, unknown = self._uses(statement, nodes)
        mistakes, checked = refused + unknown, _Checked()
        if not isinstance(statement, Solution):
            self.sought = {}
        self.hanging = hanging
        try:
            if not hanging:
                self._limit_work(statement, nodes)
            if kind != "faulty":
                checked = self._check(statement, kind)
        except CallMistake as mistake:
            mistakes = [*refused, mistake]
        except Mistake as mistake:
            if not unknown:
                mistakes.append(mistake)
        for each in mistakes:
            self._report(each)
        own = self._line_of(mistakes, statement, kind)
        self._enter(statement, kind, checked, uses, own or hanging)
        self.unknowns.enter(statement, uses)

    def _line_of(self, mistakes: list[Mistake], statement: Statement, kind: Kind) -> int:
        """The line of the statement's own mistake, 0 where it has none."""
        if mistakes:
            line = self.source.line_number(mistakes[0].span.start)
            return self.said.get((mistakes[0].slug, mistakes[0].message), line)
        if kind != "faulty":
            return 0
        trouble: Span = getattr(statement, "trouble", Span(0, 0))
        return self.source.line_number(trouble.start if trouble.end else statement.span.start)

    def _enter(
        self, statement: Statement, kind: Kind, checked: _Checked, uses: tuple[str, ...], blocked: int
    ) -> None:
        self._warn()
        defines = () if kind == "faulty" else defined_by(statement)
        name = defines[0][0] if defines else ""
        sides = () if blocked else checked.side_units or self.displays.side_units(statement)
        type_ = UNKNOWN if blocked else checked.type
        line = self.source.line_number(statement.span.start)
        self.names.add(statement, len(self.entries))
        if kind == "faulty":
            self.faulty.update(name for name, _ in defined_by(statement))
        id = self._unique_id(statement)
        unit, asked = checked.unit, checked.asked
        rows = None if blocked else checked.rows
        entry = Entry(statement, id, kind, line, name, type_, unit, sides, asked, uses, blocked, rows)
        self.entries.append(entry)

    def _report(self, mistake: Mistake) -> None:
        """A mass used as a force, or a name missing, in several places is one mistake: at the first."""
        new = mistake.as_finding(self.source)
        if new.slug in ("mass-as-force", "unknown-name"):
            key = (new.slug, new.line if new.slug == "mass-as-force" else new.message)
            if self.said.setdefault(key, new.line) != new.line or key in self.once:
                return
            self.once.add(key)
        self.found.append(new)

    def _warn(self) -> None:
        """Reports what the checker gathered; that a unit is also a name is said once for each name."""
        for mistake in self.checker.warnings:
            key = mistake.message.split("`")[1] if mistake.slug == "unit-or-name" else ""
            if key not in self.warned:
                self._report(mistake)
            if key:
                self.warned.add(key)
        self.checker.warnings.clear()

    def _unique_id(self, statement: Statement) -> str:
        id = step_id(statement)
        count = self.ids[id] = self.ids.get(id, 0) + 1
        if isinstance(statement, Criterion):
            first = self.criteria.setdefault(id, statement.span)
            if first is not statement.span:
                help = "give each criterion a name of its own: `strength bending: ...`"
                remark = Remark("the first one stands here", first)
                message = f"`{id}` is here a second time"
                place = statement.kind_span
                self._report(Mistake("duplicate-criterion", place, message, help, remarks=(remark,)))
        return id if count == 1 else f"{id}#{count}"

    # --- names and citations ---

    def _citations(self, statement: Statement) -> None:
        if not self.sheet.front.unread.isdisjoint(("sources", "assumptions")):
            return
        for note in statement.notes:
            for key, span in note.citations:
                if key not in self.citable:
                    near = self.suggestions.nearest(key, self.citable)
                    message = f"`{key}` is neither a source nor an assumption of this sheet"
                    help = near or "add it to `sources` or `assumptions` in the front matter"
                    self._report(Mistake("unknown-citation", span, message, help))

    def _refused(self, statement: Statement) -> list[Mistake]:
        refusals = [
            self.names.refused(name, span, isinstance(statement, Solution) and self._is_unknown(name))
            for name, span in defined_by(statement)
        ]
        if isinstance(statement, Solution) and refusals[0] is not None:
            self.mentioned.add(statement.name)
        if not any(refusals):
            refusals.append(self.unknowns.never_solved(statement))
        return [mistake for mistake in refusals if mistake is not None]

    def _uses(self, statement: Statement, nodes: Nodes) -> tuple[tuple[str, ...], int, list[Mistake]]:
        """Names used, each once; the line that blocks them (0 for none); what is wrong with them."""
        used: dict[str, None] = {}
        wrong: dict[str, Mistake] = {}
        each_use = list(uses_in(statement))
        for use in each_use:
            owner = self.names.owner(use.name, self.faulty)
            if not owner and use.row:
                continue  # the label of a row without quotes, which the columns tell
            if not owner:  # several columns of one table that is not there are one mistake
                of = use.name.partition(".")[0] + "." if "." in use.name else use.name
                wrong.setdefault(of, self.names.not_defined(use, statement))
                continue
            used[owner] = None
            if use.called and self.entries[self.names.by_name[owner]].kind in _VALUES:
                wrong.setdefault(use.name, _not_a_function(use.name, use.span))
        if isinstance(statement, Solution):
            used |= dict.fromkeys(s.name for s in statement.together.sought if s.name in self.unknowns.open)
            if statement.index:  # its equations were looked through for the first unknown
                return tuple(used), self._blocked_with(statement), []
        if any("`integral`" in m.help for m in wrong.values() if m.slug == "unknown-function"):
            wrong = {n: m for n, m in wrong.items() if m.slug != "unknown-name"}  # its `x` lives within it
        hanging = next((line for line in map(self._blocked, used) if line), 0)
        if not hanging and (spoilt := self.unknowns.spoilt_behind(statement, tuple(used))) is not None:
            hanging = self._line_of([], spoilt, "faulty")
        if not hanging and (early := self.unknowns.too_early(statement, each_use)) is not None:
            wrong.setdefault("", early)
        used |= dict.fromkeys(self.unknowns.solved_behind(tuple(used)))
        return tuple(used), hanging, list(wrong.values())

    def _blocked_with(self, statement: Solution) -> int:
        """The line that blocks the first unknown of a `solve for`: the others share its equations."""
        start = statement.together.span.start
        return next(e.blocked_by for e in reversed(self.entries) if e.statement.span.start <= start)

    def _blocked(self, name: str) -> int:
        entry = self._entry_of(name)
        return (entry.blocked_by if entry else 0) or self.names.contested.get(name, 0)

    def _function(self, name: str) -> FunctionDefinition | None:
        """A function of the sheet; one that cannot be worked has no types and is not looked into."""
        index = self.names.by_name.get(name)
        blocked = index is not None and self.entries[index].blocked_by
        return None if blocked else self.names.functions.get(name)

    def _entry_of(self, name: str) -> Entry | None:
        index = self.names.by_name.get(name)
        return None if index is None else self.entries[index]

    def _type_of_name(self, name: str) -> Type:
        if name == PI:
            return Type()
        if name in self.sought:
            return self.sought[name]
        entry = self._entry_of(name)
        return UNKNOWN if entry is None else entry.type

    def _rows_of_name(self, name: str) -> Rows | None:
        entry = self._entry_of(name)
        return None if entry is None else entry.rows

    def _is_unknown(self, name: str) -> bool:
        """True for an unknown that is not solved yet, one that could not be read included."""
        entry = self._entry_of(name)
        return name in self.unknowns.open or (entry is not None and entry.kind == "faulty")

    def _two_way(self, name: str) -> TwoWayTypes | None:
        return self.two_way.get(name)

    def _is_table(self, name: str) -> bool:
        entry = self._entry_of(name)
        return entry is not None and isinstance(entry.statement, Table)

    # --- dimensions ---

    def _check(self, statement: Statement, kind: Kind) -> _Checked:
        match statement:
            case Definition(value=value, unit=asked):
                found = self.checker.type_of(value)
                if found.words is not None:
                    message = "a choice cannot be given a second name"
                    raise Mistake("unknown-choice", span_of(value), message, "use the choice itself")
                shown = self.displays.of_value(found, asked, value, kind == "input")
                return _Checked(*shown, rows=self._rows(statement))
            case Choice():
                return _Checked(_choice(statement))
            case FunctionDefinition():
                shown = self.displays.of_function(statement)
                self._refuse_columns(statement)
                return _Checked(*shown)
            case Criterion(relation=relation) | Validity(relation=relation):
                self.checker.relation(relation)
                return _Checked(Type(), self.displays.side_units(statement)[0], rows=self._rows(statement))
            case Check():
                return _Checked(*self.displays.of_check(statement), rows=self._rows(statement))
        return self._check_several(statement)

    def _check_several(self, statement: Statement) -> _Checked:
        match statement:
            case Unknown(unit=unit):
                return _Checked(*self.several.of_unknown(unit))
            case Solution(index=index, together=together):
                if index == 0:
                    self.sought = {s.name: self.several.of_sought(s)[0] for s in together.sought}
                    self.several.check_equations(statement)
                    self._refuse_columns(statement)
                sides = tuple(self.displays.common_unit(equation) for equation in together.equations)
                return _Checked(*self.several.of_sought(statement.sought), side_units=sides)
            case Table(two_way=two_way):
                if two_way is not None:
                    self.two_way[statement.name] = self.several.of_two_way(statement)
                self._refuse_columns(statement)
            case Column(table=table, labels=labels, cells=cells):
                shown = self.several.of_column(statement)
                self._refuse_columns(statement)
                return _Checked(*shown, rows=Rows(table, labels, len(cells)))
            case Plot() | Tabulate():
                units = self.several.of_range(statement)
                self._refuse_columns(statement)
                return _Checked(Type(), units[0], side_units=units)
        return _Checked()

    def _rows(self, statement: Statement) -> Rows | None:
        """The rows that a statement goes over, None where it holds one value."""
        if self.hanging:
            return None
        found = [self.columns.rows_of(tree) for tree in expressions(statement) if self._holds_columns(tree)]
        return next((rows for rows in found if rows is not None), None)

    def _holds_columns(self, tree: Node) -> bool:
        return any(may_hold_columns(node, self._is_column) for node in walk(tree))

    def _is_column(self, name: str) -> bool:
        return self._rows_of_name(name) is not None

    def _refuse_columns(self, statement: Statement) -> None:
        """Where one value is needed, a column is a mistake."""
        if self.hanging:
            return
        for tree in expressions(statement):
            if self._holds_columns(tree) and self.columns.rows_of(tree) is not None:
                names = (n for n in walk(tree) if isinstance(n, Name) and self._is_column(n.name))
                column = next(names)
                message = f"`{column.name}` is a column, and one value is needed here"
                mend = f'take one cell, as in `{column.name} at "label"`, or bring it to one with `max`'
                raise Mistake("column-not-number", column.span, message, mend)

    # --- how much work it is ---

    def _limit_work(self, statement: Statement, nodes: Nodes) -> None:
        """Functions of functions of functions can ask for more work than any machine has time for."""
        called = [n.function for n in nodes if isinstance(n, Call)]
        work = len(nodes) + sum(self.work.get(function, 0) for function in called)
        depth = 1 + max((self.depth.get(function, 0) for function in called), default=0)
        if isinstance(statement, FunctionDefinition):
            self.work[statement.name], self.depth[statement.name] = work, depth
        else:
            self.work_in_all += work
        if depth > DEEPEST_CALLS:
            message = f"functions that call functions, more than {DEEPEST_CALLS} deep"
            raise Mistake("over-limit", statement.span, message, "write some of them as one")
        if work > MOST_WORK or self.work_in_all > MOST_WORK_IN_ALL:
            message = "the functions that are called here ask for more work than the engine does"
            raise Mistake(
                "over-limit", statement.span, message, "give what is worked often a name of its own"
            )


def _not_a_function(name: str, span: Span) -> Mistake:
    """`P(1 + phi)`: a value with a bracket behind it."""
    message = f"`{name}` is a value and no function, and no operator stands behind it"
    bracket = Span(span.end, span.end + 1)
    return Mistake("implied-multiplication", bracket, message, f"a product is typed with `*`: `{name}*(...)`")


def _choice(statement: Choice) -> Type:
    if statement.word not in statement.options:
        listed = ", ".join(f'"{option}"' for option in statement.options)
        message = f'"{statement.word}" is not one of the words to choose from'
        raise Mistake("unknown-choice", statement.word_span, message, f"it is one of {listed}")
    return Type(words=statement.options)

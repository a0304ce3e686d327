"""The plan of a sheet: all that can be settled before a number is worked, once for every run of it."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator
from dataclasses import dataclass
from string import ascii_lowercase

from loadpath.evaluate.numbers import Compiler, Work
from loadpath.evaluate.symbolic import is_derived
from loadpath.formula.statements import (
    Check,
    Column,
    Criterion,
    Definition,
    Faulty,
    FunctionDefinition,
    Solution,
    Statement,
    Table,
    Validity,
)
from loadpath.formula.tree import As, At, Branch, Call, Cases, Name, Node, Relation, walk
from loadpath.functions import FUNCTIONS
from loadpath.resolve import Entry, Resolved, expressions
from loadpath.sheet import Formulas, Heading, Sheet
from loadpath.trace.model import Outline, Working

Sides = tuple[tuple[tuple[Node, Work], ...], ...]
"""For each relation, its operands with their compiled form."""


_SAID = ("min", "max", "round_up", "round_down")
"""Functions of which a line says what governed, or to what was rounded."""
Tables = dict[str, list[str]]
"""The columns of each table."""


@dataclass(frozen=True, slots=True)
class Planned:
    """One statement, ready to be worked."""

    outline: Outline
    tree: Node | None
    """What gives its value, or the relation that it holds."""
    work: Work | None
    sides: Sides
    working: Working | None
    """How its value comes about, where that is the same at every run; None where it has to be observed."""
    assumed: tuple[str, ...]
    """Keys of assumptions still to be confirmed that it hangs on."""
    ranged: frozenset[str]
    """Names with a stated range that it hangs on."""
    unread: tuple[str, ...]
    """Keys cited behind it that are neither a source nor an assumption: one may be an open assumption."""
    shared: int = -1
    """The place of the `solve for` that it shares with other unknowns, -1 for other steps."""


@dataclass(frozen=True, slots=True)
class Plan:
    """A whole sheet, ready to be worked."""

    resolved: Resolved
    compiler: Compiler
    steps: tuple[Planned, ...]
    sections: tuple[tuple[int, str], ...]
    needs_algebra: bool
    tables: Tables


def make_plan(resolved: Resolved) -> Plan:
    """Compiles a resolved sheet."""
    functions = {e.name: e.statement for e in resolved.entries if isinstance(e.statement, FunctionDefinition)}
    columns = {e.name: e.rows for e in resolved.entries if e.name and e.rows is not None}
    two_way = {
        e.name: e.statement.two_way
        for e in resolved.entries
        if isinstance(e.statement, Table) and e.statement.two_way is not None
    }
    compiler = Compiler(functions, columns, two_way)
    for name, function in functions.items():
        if is_derived(function.body):
            compiler.expect(name)
    sections, numbers = _numbering(resolved.sheet)
    reach = _Reach(resolved)
    outlines = _outlines(resolved, numbers, reach)
    steps = tuple(_planned(outline, compiler, reach) for outline in outlines)
    needs_algebra = any(p.work is None and _needs_algebra(p.outline.entry) for p in steps)
    return Plan(resolved, compiler, steps, sections, needs_algebra, reach.tables)


def _needs_algebra(entry: Entry) -> bool:
    if entry.blocked_by:
        return False
    return isinstance(entry.statement, Solution) or any(map(is_derived, expressions(entry.statement)))


def _planned(outline: Outline, compiler: Compiler, reach: _Reach) -> Planned:
    entry = outline.entry
    hangs_on = reach.of(entry)
    tree = tree_of(entry.statement)
    if tree is None or entry.blocked_by or is_derived(tree):
        shared = entry.statement.together.span.start if isinstance(entry.statement, Solution) else -1
        return Planned(outline, tree, None, (), None, *hangs_on, shared)
    observed = entry.rows is not None or any(map(_is_observed, walk(tree)))
    seen = None if observed else Working(tree)
    sides = () if isinstance(entry.statement, Definition) else sides_of(tree, compiler)
    return Planned(outline, tree, compiler.compile_tree(tree), sides, seen, *hangs_on)


def _is_observed(node: Node | Branch) -> bool:
    """True for what a substitution alone doesn't show: a branch taken, a call worked, what governed."""
    if isinstance(node, Call):
        return node.function not in FUNCTIONS or node.function in _SAID
    return isinstance(node, Cases | As | At)


def tree_of(statement: Statement) -> Node | None:
    """The tree that a statement's value or verdict comes from."""
    match statement:
        case Definition(value=value):
            return value
        case Criterion(relation=relation) | Validity(relation=relation) | Check(relation=relation):
            return relation
    return None


def sides_of(tree: Node, compiler: Compiler) -> Sides:
    """The relations of a tree, each operand compiled."""
    relations = [n for n in walk(tree) if isinstance(n, Relation)]
    return tuple(tuple((o, compiler.compile_tree(o)) for o in r.operands) for r in relations)


# --- trails -------------------------------------------------------------------------------------------------


def _outlines(resolved: Resolved, numbers: Iterator[str], reach: _Reach) -> tuple[Outline, ...]:
    """The trails, both ways. A criterion hangs on the ranges of the names behind it as well."""
    owner: dict[str, str] = {}
    used_by: dict[str, list[str]] = defaultdict(list)
    uses: list[tuple[str, ...]] = []
    for entry in resolved.entries:
        named = [owner[n] for n in fed_by(entry) if n in owner and owner[n] != entry.id]
        of = tuple(dict.fromkeys((*named, *reach.ranges_over(entry))))
        uses.append(of)
        for id in of:
            used_by[id].append(entry.id)
        for name in defined_by(entry):
            owner.setdefault(name, entry.id)
        if isinstance(entry.statement, Solution) and entry.statement.is_last:
            # from here on the names are what was found
            owner |= {sought.name: sought.name for sought in entry.statement.together.sought}
    return tuple(
        Outline(entry, number, cited(entry.statement), of, tuple(used_by[entry.id]))
        for entry, of, number in zip(resolved.entries, uses, numbers, strict=False)
    )


def fed_by(entry: Entry) -> tuple[str, ...]:
    """The names that a statement's value or verdict comes from; not those that a validity only guards."""
    if not isinstance(entry.statement, Validity):
        return entry.uses
    nodes = walk(entry.statement.relation)
    inside = {n.name if isinstance(n, Name) else n.function for n in nodes if isinstance(n, Name | Call)}
    return tuple(name for name in entry.uses if name in inside)


def guarded_by(statement: Statement, tables: Tables) -> tuple[str, ...]:
    """The names that a statement states a range for, read or not; of a table its columns."""
    if isinstance(statement, Validity):
        names = tuple(name for name, _ in statement.names)
    else:
        names = statement.guards if isinstance(statement, Faulty) else ()
    return tuple(each for name in names for each in (name, *tables.get(name, ())))


def tables_of(resolved: Resolved) -> Tables:
    """The columns of each table of a sheet."""
    tables: Tables = defaultdict(list)
    for entry in resolved.entries:
        if isinstance(entry.statement, Column):
            tables[entry.statement.table].append(entry.name)
    return dict(tables)


def defined_by(entry: Entry) -> tuple[str, ...]:
    """The names that a statement brings, those of a line that could not be read too."""
    if entry.name:
        return (entry.name,)
    return entry.statement.names if isinstance(entry.statement, Faulty) else ()


def cited(statement: Statement) -> tuple[str, ...]:
    """Keys cited in its notes, in order."""
    return tuple(dict.fromkeys(key for note in statement.notes for key, _ in note.citations))


class _Reach:
    """For each statement: the open assumptions and the names with a stated range that it hangs on."""

    def __init__(self, resolved: Resolved) -> None:
        self.assumptions = [a.key for a in resolved.sheet.front.assumptions if a.confirm]
        front = resolved.sheet.front
        closed = {s.key for s in front.sources} | {a.key for a in front.assumptions if not a.confirm}
        self.closed = frozenset(closed)
        """Keys whose citation leaves nothing open; any other may be an assumption to be confirmed."""
        self.tables = tables_of(resolved)
        self.ranged = {
            name for entry in resolved.entries for name in guarded_by(entry.statement, self.tables)
        }
        self.known: dict[str, tuple[frozenset[str], frozenset[str]]] = {}
        self.by_id: dict[str, tuple[frozenset[str], frozenset[str]]] = {}
        self.ranges: list[tuple[str, frozenset[str]]] = []
        """Id of each validity, with the names that it is for."""
        self.behind: dict[str, frozenset[str]] = defaultdict(frozenset)
        for entry in resolved.entries:
            self._enter(entry)

    def _enter(self, entry: Entry) -> None:
        feeds = fed_by(entry)
        feeding = [self.known[name] for name in feeds if name in self.known]
        assumed = (frozenset(cited(entry.statement)) - self.closed).union(*(a for a, _ in feeding))
        ranged = frozenset(n for n in feeds if n in self.ranged).union(*(r for _, r in feeding))
        self.by_id[entry.id] = (assumed, ranged)
        for name in defined_by(entry):
            if isinstance(entry.statement, Solution):
                self.known[name] = (assumed, ranged)
            self.known.setdefault(name, (assumed, ranged))
        if guarded := guarded_by(entry.statement, self.tables):
            self.ranges.append((entry.id, frozenset(guarded)))
            for name in guarded:
                self.behind[name] |= assumed

    def ranges_over(self, entry: Entry) -> tuple[str, ...]:
        """Ids of the validities that rule over a criterion; () for other statements."""
        if not isinstance(entry.statement, Criterion):
            return ()
        ranged = self.by_id[entry.id][1]
        return tuple(id for id, names in self.ranges if names & ranged) if ranged else ()

    def of(self, entry: Entry) -> tuple[tuple[str, ...], frozenset[str], tuple[str, ...]]:
        """Open assumptions, names with ranges and unread keys; those behind the ranges count too."""
        assumed, ranged = self.by_id[entry.id]
        assumed = assumed.union(*(self.behind[name] for name in ranged))
        still_open = tuple(key for key in self.assumptions if key in assumed)
        return still_open, ranged, tuple(sorted(assumed - set(still_open)))


# --- numbers of sections and steps --------------------------------------------------------------------------


def _numbering(sheet: Sheet) -> tuple[tuple[tuple[int, str], ...], Iterator[str]]:
    """Section number (0 for lower headings) and text of each heading; step numbers in reading order."""
    levels = [b.level for b in sheet.blocks if isinstance(b, Heading) and not is_title(b, sheet)]
    top = min(levels, default=1)
    sections: list[tuple[int, str]] = []
    numbers: list[str] = []
    section = step = 0
    table = ""
    for block in sheet.blocks:
        if isinstance(block, Heading):
            counts = block.level == top and not is_title(block, sheet)
            if counts:
                section, step = section + 1, 0
            sections.append((section if counts else 0, block.text))
        elif isinstance(block, Formulas):
            for statement in block.statements:
                if isinstance(statement, Column):
                    numbers.append(f"{table}{ascii_lowercase[statement.place]}")
                    continue
                step += 1
                numbers.append(f"{section}.{step}")
                if isinstance(statement, Table):  # a column that can't be read takes a step of its own
                    table = numbers[-1]
    return tuple(sections), iter(numbers)


def is_title(heading: Heading, sheet: Sheet) -> bool:
    """True for a heading that only repeats the sheet's title."""
    return heading.level == 1 and heading.text.strip() == sheet.front.title.strip()

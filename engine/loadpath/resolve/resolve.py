"""The pass over a sheet that checks names, order and dimensions before any number is worked."""

from __future__ import annotations

from loadpath.findings import Finding, Remark, finding
from loadpath.formula.names import look, plain_symbol
from loadpath.formula.reader import Mistake
from loadpath.formula.statements import (
    AskedUnit,
    Check,
    Choice,
    Criterion,
    Definition,
    Faulty,
    FunctionDefinition,
    Parameter,
    Statement,
    Validity,
)
from loadpath.formula.tree import Call, Name, Node, Number, Quantity, Relation, Word, span_of, walk
from loadpath.functions import FUNCTIONS, LATER
from loadpath.resolve.dimensions import Checker, Parameters, read_unit
from loadpath.resolve.model import UNKNOWN, Entry, Kind, Resolved, Type
from loadpath.resolve.names import nearest, step_id
from loadpath.sheet.model import Sheet, Value
from loadpath.text import Span
from loadpath.units import KINDS, ONE, Unit, UnitSystem, say

MOST_STATEMENTS = 20_000
PI = "pi"


def resolve(sheet: Sheet) -> Resolved:
    """Who defines each name, in which order, with which dimension. Never raises for a user's mistake."""
    return _Resolver(sheet).run()


class _Resolver:
    def __init__(self, sheet: Sheet) -> None:
        self.sheet, self.source = sheet, sheet.source
        self.found: list[Finding] = []
        self.entries: list[Entry] = []
        self.by_name: dict[str, int] = {}
        self.functions: dict[str, FunctionDefinition] = {}
        self.looks: dict[tuple[str, str, str, int], str] = {}
        self.ids: dict[str, int] = {}
        self.system = UnitSystem(sheet.front.units, self._overrides())
        self.statements = self._limited(sheet.statements)
        self.sheet_names, self.first_place = self._all_names()
        self.citable = {s.key for s in sheet.front.sources} | {a.key for a in sheet.front.assumptions}
        self.checker = Checker(self._type_of_name, self._function, self.sheet_names.__contains__)

    # --- the pass ---

    def run(self) -> Resolved:
        for statement in self.statements:
            self._statement(statement)
        values = self._values_in_prose()
        return Resolved(self.sheet, self.system, self.checker, tuple(self.entries), self.by_name, values, tuple(self.found))

    def _limited(self, statements: tuple[Statement, ...]) -> tuple[Statement, ...]:
        if len(statements) > MOST_STATEMENTS:
            self._report(Mistake("over-limit", statements[MOST_STATEMENTS].span, f"more than {MOST_STATEMENTS} statements on one sheet", "split it into several sheets"))
        return statements[:MOST_STATEMENTS]

    def _overrides(self) -> tuple[tuple[str, str], ...]:
        kept = []
        for kind, unit in self.sheet.front.unit_overrides:
            try:
                read = read_unit(unit, Span(0, 0))
                if kind in KINDS and read.dimension == KINDS[kind]:
                    kept.append((kind, unit))
                    continue
                message, help = f"`{unit}` is no unit of {kind.replace('_', ' ')}", ""
            except Mistake as mistake:
                message, help = mistake.message, mistake.help
            at = self.source.text.find(unit, max(self.source.text.find("units"), 0))
            span = Span(at, at + len(unit)) if at >= 0 else None
            self.found.append(finding("front-matter-value", message, self.source, span, help=help))
        return tuple(kept)

    def _all_names(self) -> tuple[set[str], dict[str, Span]]:
        """Every name the sheet defines anywhere, and where first; the names of lines that cannot be read too."""
        places: dict[str, Span] = {}
        for statement in self.statements:
            match statement:
                case Definition(name=name, name_span=span) | Choice(name=name, name_span=span):
                    places.setdefault(name, span)
                case FunctionDefinition(name=name, name_span=span):
                    places.setdefault(name, span)
                case _:
                    for name in statement.names if isinstance(statement, Faulty) else ():
                        places.setdefault(name, statement.span)
        return set(places), places

    def _report(self, mistake: Mistake) -> Finding:
        remark = getattr(mistake, "remark", None)
        remarks = (Remark(*remark),) if remark else ()
        new = finding(mistake.slug, mistake.message, self.source, mistake.span, label=mistake.label, help=mistake.help, remarks=remarks)
        self.found.append(new)
        return new

    def _statement(self, statement: Statement) -> None:
        line = self.source.line_number(statement.span.start)
        self._citations(statement)
        names = _defined_names(statement)
        mistakes = [m for name, span in names if (m := self._refused_name(name, span)) is not None]
        uses, hanging, unknown = self._uses(statement)
        mistakes += unknown
        kind, type_, unit, asked = _kind_of(statement), UNKNOWN, ONE, False
        try:
            kind, type_, unit, asked = self._check(statement, kind)
        except Mistake as mistake:
            if not unknown:
                mistakes.append(mistake)
        for mistake in mistakes:
            self._report(mistake)
        own = self.found[-len(mistakes)].line if mistakes else (line if kind == "faulty" else 0)
        blocked = own or hanging
        self._enter(statement, kind, type_ if not blocked else UNKNOWN, unit, asked, uses, blocked, line)

    def _enter(
        self, statement: Statement, kind: Kind, type_: Type, unit: Unit, asked: bool, uses: tuple[str, ...], blocked: int, line: int
    ) -> None:
        for mistake in self.checker.warnings:
            self._warn_once(mistake)
        self.checker.warnings.clear()
        name = getattr(statement, "name", "") if not isinstance(statement, Criterion) else ""
        index = len(self.entries)
        sides = self._side_units(statement) if not blocked else ()
        self.entries.append(Entry(statement, self._unique_id(statement), kind, line, name, type_, unit, sides, asked, uses, blocked))
        for defined in (name,) if name else getattr(statement, "names", ()) if kind == "faulty" else ():
            if defined not in self.by_name and defined not in FUNCTIONS:
                self.by_name[defined] = index
                self.looks.setdefault(look(defined), defined)
                if isinstance(statement, FunctionDefinition):
                    self.functions[defined] = statement

    def _warn_once(self, mistake: Mistake) -> None:
        if mistake.slug == "unit-or-name":
            if mistake.message in {f.message for f in self.found if f.slug == mistake.slug}:
                return
        self._report(mistake)

    def _unique_id(self, statement: Statement) -> str:
        id = step_id(statement)
        count = self.ids[id] = self.ids.get(id, 0) + 1
        if count == 1:
            return id
        if isinstance(statement, Criterion):
            first = next(e for e in self.entries if e.id == id)
            self.found.append(
                finding(
                    "duplicate-criterion", f"a second criterion `{id}`", self.source, statement.kind_span,
                    remarks=(Remark("the first one stands here", first.statement.span),),
                    help="give each a name of its own: `strength bending: ...`",
                )  # fmt: skip
            )
        return f"{id}#{count}"

    # --- names ---

    def _citations(self, statement: Statement) -> None:
        for note in statement.notes:
            for key, span in note.citations:
                if key not in self.citable:
                    known = sorted(self.citable)
                    self._report(
                        Mistake(
                            "unknown-citation", span, f"`[{key}]` is neither a source nor an assumption of this sheet",
                            nearest(key, known) or "add it to `sources` or `assumptions` in the front matter",
                        )  # fmt: skip
                    )

    def _refused_name(self, name: str, span: Span) -> Mistake | None:
        if name == PI:
            return Mistake("defined-twice", span, "`pi` stands defined and cannot be defined again", "choose another name")
        if name in self.by_name:
            first = self.entries[self.by_name[name]]
            mistake = Mistake("defined-twice", span, f"`{name}` is defined a second time", f"a name means one thing on a sheet: choose another, such as `{name}_2`")
            mistake.remark = (f"first defined on line {first.line}", first.statement.span)  # type: ignore[attr-defined]
            return mistake
        alike = self.looks.get(look(name))
        if alike is not None:
            return Mistake("alike-names", span, f"`{name}` prints like `{alike}`, as {plain_symbol(name)}", "choose a name that a reader can tell apart")
        return None

    def _uses(self, statement: Statement) -> tuple[tuple[str, ...], int, list[Mistake]]:
        """Names used, the line that blocks them (0 for none), and what is wrong with them."""
        own = {p.name for p in statement.parameters} if isinstance(statement, FunctionDefinition) else set()
        used: dict[str, None] = {}
        mistakes: list[Mistake] = []
        seen: set[str] = set()
        for name, span, called in _names_in(statement):
            if name in own and not called or name in seen or (name == PI and not called):
                continue
            seen.add(name)
            if called and name in FUNCTIONS:
                seen.discard(name)
                continue
            owner = self._owner(name)
            if owner:
                used[owner] = None
            else:
                mistakes.append(self._not_defined(name, span, called, statement))
        hanging = [self.entries[self.by_name[n]].blocked_by for n in used]
        return tuple(used), next((h for h in hanging if h), 0), mistakes

    def _owner(self, name: str) -> str:
        """What brings a name: itself, or the line that could not be worked and would have brought `b.I_y`."""
        if name in self.by_name:
            return name
        prefix = name.partition(".")[0]
        return prefix if prefix in self.by_name and self.entries[self.by_name[prefix]].kind == "faulty" else ""

    def _not_defined(self, name: str, span: Span, called: bool, statement: Statement) -> Mistake:
        if called and name in LATER:
            return Mistake("not-available", span, f"`{name}` is a function of the language, but this version of loadpath cannot work it yet", "write the working out in plain formulas for now")
        if name in FUNCTIONS or name in LATER:
            return Mistake("wrong-arguments", span, f"`{name}` is a function and is called with its arguments", f"write `{name}(...)`")
        if name in self.sheet_names:
            if self.first_place[name].start >= statement.span.start and self.first_place[name].end <= statement.span.end:
                return Mistake("used-before-defined", span, f"`{name}` is used in its own definition", "a name means one thing: give the new value a name of its own")
            line = self.source.line_number(self.first_place[name].start)
            return Mistake("used-before-defined", span, f"`{name}` is used here, but defined below, on line {line}", "move the definition above its first use")
        if called:
            known = sorted(set(FUNCTIONS) | set(self.functions))
            return Mistake("unknown-function", span, f"there is no function `{name}`", nearest(name, known) or f"a product takes a `*`: `{name}*(...)`")
        known = sorted(self.sheet_names)
        return Mistake("unknown-name", span, f"`{name}` is defined nowhere on this sheet", nearest(name, known) or "define it above, or check the spelling")

    # --- types ---

    def _type_of_name(self, name: str) -> Type:
        if name == PI:
            return Type()
        index = self.by_name.get(name)
        return UNKNOWN if index is None else self.entries[index].type

    def _function(self, name: str) -> FunctionDefinition | None:
        return self.functions.get(name)

    def _check(self, statement: Statement, kind: Kind) -> tuple[Kind, Type, Unit, bool]:
        match statement:
            case Definition(value=value, unit=asked):
                found = self.checker.type_of(value)
                if found.words is not None:
                    raise Mistake("unknown-choice", span_of(value), "a choice cannot be given a second name", "use the choice itself")
                return kind, *self._shown(found, asked, value, kind == "input")
            case Choice(word=word, options=options):
                if word not in options:
                    listed = ", ".join(f'"{option}"' for option in options)
                    raise Mistake("unknown-choice", statement.word_span, f'"{word}" is not one of the words to choose from', f"it is one of {listed}")
                return kind, Type(words=options), ONE, False
            case FunctionDefinition():
                return kind, *self._function_type(statement)
            case Criterion(relation=relation):
                self.checker.relation(relation)
                return kind, Type(), self._side_units(statement)[0], False
            case Validity(relation=relation):
                self.checker.relation(relation)
                return kind, Type(), self._side_units(statement)[0], False
            case Check():
                return kind, *self._check_tolerance(statement)
        return kind, UNKNOWN, ONE, False

    def _shown(self, found: Type, asked: AskedUnit | None, value: Node, typed: bool) -> tuple[Type, Unit, bool]:
        if asked is not None:
            return *self.checker.shown(found, asked, value), True
        if found.unknown:
            return found, ONE, False
        if typed and (unit := _typed_unit(value, found)) is not None:
            return found, unit, False
        return found, self.system.unit_for(found.dimension, found.absolute, found.flavour == "bar"), False

    def _function_type(self, statement: FunctionDefinition) -> tuple[Type, Unit, bool]:
        parameters: Parameters = {}
        for parameter in statement.parameters:
            parameters[parameter.name] = self._parameter(parameter)
        found = self.checker.type_of(statement.body, parameters)
        untyped = any(p.unit is None for p in statement.parameters)
        type_, unit, asked = self._shown(found, statement.unit, statement.body, False)
        return (UNKNOWN if untyped and not asked else type_), unit, asked

    def _parameter(self, parameter: Parameter) -> Type:
        if parameter.name in self.sheet_names or parameter.name == PI:
            mistake = Mistake("shadowed-name", parameter.span, f"the parameter `{parameter.name}` is also a name of this sheet", "choose another name for one of the two")
            if parameter.name in self.first_place:
                mistake.remark = ("the name of the sheet stands here", self.first_place[parameter.name])  # type: ignore[attr-defined]
            raise mistake
        if parameter.unit is None:
            return UNKNOWN
        unit = read_unit(parameter.unit.text, parameter.unit.span, self.sheet_names.__contains__)
        return Type(unit.dimension, unit.absolute)

    def _side_units(self, statement: Statement) -> tuple[Unit, ...]:
        """Both sides of a relation are shown in one unit: that of the first name in it that has the right dimension."""
        relations = [n for tree in expressions(statement) for n in walk(tree) if isinstance(n, Relation)]
        return tuple(self.common_unit(r) for r in relations) if not isinstance(statement, Definition | FunctionDefinition) else ()

    def common_unit(self, relation: Relation) -> Unit:
        """The unit that the sides of one relation are shown in."""
        types = [self.checker.type_of(o) for o in relation.operands if not isinstance(o, Word)]
        found = next((t for t in types if not t.zero and not t.unknown), None)
        if found is None or found.words is not None:
            return ONE
        for operand in relation.operands:
            if isinstance(operand, Name) and operand.name in self.by_name:
                unit = self.entries[self.by_name[operand.name]].unit
                if unit.dimension == found.dimension and unit.absolute == found.absolute:
                    return unit
        typed = next((t for o in relation.operands if (t := _typed_unit(o, found)) is not None), None)
        return typed or self.system.unit_for(found.dimension, found.absolute, found.flavour == "bar")

    def _check_tolerance(self, statement: Check) -> tuple[Type, Unit, bool]:
        relation = statement.relation
        left, right = (self.checker.type_of(o) for o in relation.operands)
        common = self.checker.same(left, right, relation.at[0], "`=` compares", *relation.operands)
        tolerance = self.checker.type_of(statement.tolerance)
        relative = isinstance(statement.tolerance, Quantity) and statement.tolerance.parts[0].unit in ("%", "ppm")
        unit = self.common_unit(relation)
        if relative or common.unknown or tolerance.unknown or tolerance.zero:
            return common, unit, False
        if tolerance.dimension != common.dimension and not common.zero:
            raise Mistake(
                "unit-mismatch", span_of(statement.tolerance),
                f"the tolerance is {say(tolerance.dimension)}, but the sides are {say(common.dimension)}",
                "give it in the unit of the sides, or relative to the right side: `within 0.1 %`",
            )  # fmt: skip
        return common, unit, False

    # --- prose ---

    def _values_in_prose(self) -> dict[Value, Unit]:
        from loadpath.sheet.model import Heading, Prose

        front = self.sheet.front
        values = [*front.objective.values, *front.method.values, *front.conclusion.values]
        for block in self.sheet.blocks:
            if isinstance(block, Prose):
                values += block.values
            elif isinstance(block, Heading):
                values += [t.meta["value"] for t in (block.tokens.children or ()) if t.type == "value"]
        units: dict[Value, Unit] = {}
        for value in values:
            try:
                units[value] = self._value_unit(value)
            except Mistake as mistake:
                self.found.append(finding(mistake.slug, mistake.message, value.source, mistake.span, help=mistake.help))
        return units

    def _value_unit(self, value: Value) -> Unit:
        if not value.name:
            return ONE
        if value.name not in self.by_name:
            known = sorted(self.by_name)
            raise Mistake("unknown-name", value.name_span, f"`{value.name}` is defined nowhere on this sheet", nearest(value.name, known) or "define it in a formula block; `\\{` is a brace")
        entry = self.entries[self.by_name[value.name]]
        if entry.kind == "function":
            raise Mistake("wrong-arguments", value.name_span, f"`{value.name}` is a function and has no one value", f"give a value of it a name first: `{value.name}_1 = {value.name}(...)`")
        if not value.unit or entry.type.unknown:
            return entry.unit
        asked = AskedUnit(value.unit, value.unit_span)
        return self.checker.shown(entry.type, asked, Name(value.name))[1]


# --- what statements hold ---------------------------------------------------------------------------------------


def _defined_names(statement: Statement) -> list[tuple[str, Span]]:
    if isinstance(statement, Definition | Choice | FunctionDefinition):
        return [(statement.name, statement.name_span)]
    return []


def expressions(statement: Statement) -> tuple[Node, ...]:
    """The trees that a statement holds."""
    match statement:
        case Definition(value=value):
            return (value,)
        case FunctionDefinition(body=body):
            return (body,)
        case Criterion(relation=relation) | Validity(relation=relation):
            return (relation,)
        case Check(relation=relation, tolerance=tolerance):
            return (relation, tolerance)
    return ()


def _names_in(statement: Statement) -> list[tuple[str, Span, bool]]:
    """Each use of a name: its text, its place, and whether it is called."""
    uses: list[tuple[str, Span, bool]] = []
    for tree in expressions(statement):
        for node in walk(tree):
            if isinstance(node, Name):
                uses.append((node.name, node.span, False))
            elif isinstance(node, Call):
                uses.append((node.function, node.at, True))
    if isinstance(statement, Validity):
        uses += [(name, span, False) for name, span in statement.names]
    return uses


def _kind_of(statement: Statement) -> Kind:
    match statement:
        case Definition(value=value):
            named = any(isinstance(n, Name) and n.name != PI or isinstance(n, Call) and n.function not in FUNCTIONS for n in walk(value))
            return "result" if named else "input"
        case Choice():
            return "choice"
        case FunctionDefinition():
            return "function"
        case Criterion():
            return "criterion"
        case Validity():
            return "valid"
        case Check():
            return "check"
    return "faulty"


def _typed_unit(value: Node, found: Type) -> Unit | None:
    """The unit that a typed value already has: of its first quantity of the right dimension."""
    for node in walk(value):
        if isinstance(node, Quantity):
            unit = read_unit(node.parts[-1].unit, node.unit_span)
            if unit.dimension == found.dimension and unit.absolute == found.absolute:
                return unit
        elif isinstance(node, Number | Name | Call):
            continue
    return None

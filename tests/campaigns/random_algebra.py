"""Random sheets that hold what algebra, columns and pictures are for. Most of their dimensions fit, so that
the numbers are reached; what they compute may have no value, no solution or several.

`campaigns.fuzz` puts them through every stage.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from random import Random

LENGTH, FORCE, STRESS, MOMENT, PLAIN = "length", "force", "stress", "moment", "plain"
UNITS = {
    LENGTH: ["mm", "m", "in", "ft"], FORCE: ["kN", "N", "lbf", "kip"], STRESS: ["MPa", "ksi", "kN/m^2"],
    MOMENT: ["kN*m", "lbf*in"], PLAIN: ["1", "%", "deg"],
}  # fmt: skip
KINDS = list(UNITS)
NUMBERS = ["0", "1", "2", "0.5", "3.7", "12", "250", "1e-3", "1e6", "(1/3)"]
UP_TO = {
    LENGTH: ["1 m", "20 mm", "3 ft"], FORCE: ["10 kN", "1 lbf"], STRESS: ["1 MPa", "5 ksi"],
    MOMENT: ["1 kN*m"], PLAIN: ["1", "pi", "0.5", "20"],
}  # fmt: skip
"""Something above nothing, of each kind."""
RELATIONS = ["<=", "<", ">=", ">"]
PLAIN_CALLS = [
    "sin", "cos", "tan", "sec", "exp", "ln", "log10", "sqrt", "asin", "acos", "atan", "sinh", "cosh", "tanh",
]  # fmt: skip
EXTREMES = ["largest", "smallest", "where_largest", "where_smallest"]

Names = dict[str, list[str]]
"""What stands for a value of each kind."""


@dataclass(frozen=True)
class DataTable:
    """A table that stands above, with what its columns are."""

    name: str
    labels: list[str]
    columns: dict[str, str]
    """Kind by full name."""
    rising: str
    """A column that rises, mostly."""
    last: tuple[float, str]
    """Its last cell, with unit."""


@dataclass
class Writer:
    """A sheet in the making."""

    random: Random
    parts: list[str] = field(default_factory=list)
    names: Names = field(default_factory=lambda: {kind: [] for kind in KINDS})
    columns: list[tuple[DataTable, str, str]] = field(default_factory=list)
    """Derived columns: the table they go with, their name and kind."""
    tables: list[DataTable] = field(default_factory=list)
    two_way: list[tuple[str, str, str]] = field(default_factory=list)
    """Name, and a place within it down and across."""
    functions: list[tuple[str, str, str]] = field(default_factory=list)
    """Name, kind of the parameter, kind of the value."""
    number: int = 0

    # --- pieces ---

    def fresh(self, letter: str) -> str:
        self.number += 1
        return f"{letter}_{self.number}"

    def chance(self, share: float) -> bool:
        return self.random.random() < share

    def lines(self, *lines: str) -> None:
        self.parts.append("\n".join(f"    {line}" for line in lines))

    def typed(self, kind: str) -> str:
        number = self.random.choice(NUMBERS)
        unit = self.random.choice(UNITS[kind])
        if unit == "1":
            return number
        return f"({number}*1 {unit})" if number.startswith("(") else f"{number} {unit}"

    def asked(self, kind: str, share: float = 0.5) -> str:
        """A unit in which a result is shown, sometimes a wrong one."""
        if not self.chance(share):
            return ""
        return f" [{self.random.choice(UNITS[kind if self.chance(0.97) else self.random.choice(KINDS)])}]"

    def leaf(self, kind: str, names: Names) -> str:
        if names[kind] and self.chance(0.8):
            return self.random.choice(names[kind])
        typed = self.typed(kind)
        return f"({typed})" if " " in typed and self.chance(0.95) else typed

    def expression(self, kind: str, names: Names, deep: int) -> str:
        """An expression of a kind."""
        if deep <= 0 or self.chance(0.2):
            return self.leaf(kind, names)

        def again(other: str = kind) -> str:
            return self.expression(other, names, deep - 1)

        other = self.random.choice(KINDS)
        forms: list[Callable[[], str]] = [
            lambda: f"({again()} + {again()})",
            lambda: f"({again()} - {again()})",
            lambda: f"{again()}*{again(PLAIN)}",
            lambda: f"{again()}/({again(PLAIN)})",
            lambda: f"{again()}*({again(other)})/({again(other)})",
            lambda: f"({again()})*<{again(other)} - {again(other)}>^0",
            lambda: f"<{again()} - {again()}>^1",
            lambda: f"{self.random.choice(['max', 'min'])}({again()}, {again()})",
            lambda: f"{self.random.choice(['round_up', 'round_down'])}({again()}, {self.typed(kind)})",
            lambda: f"abs({again()})",
            lambda: f"(-({again()}))",
            lambda: f"sqrt({again()}*({again()}))",
            lambda: f"(({again()})^2)^0.5",
        ]
        if kind == PLAIN:
            forms += [
                lambda: f"{self.random.choice(PLAIN_CALLS)}({again()})",
                lambda: f"({again()})^{self.random.choice(['2', '3', '-1', '0.5', '(1/3)'])}",
                lambda: f"({again(other)})/({again(other)})",
                lambda: f"atan2({again(other)}, {again(other)})",
                lambda: f"({again(LENGTH)} as mm)",
            ]
        if kind == MOMENT:
            forms += [lambda: f"{again(FORCE)}*({again(LENGTH)})"] * 4
        if kind == STRESS:
            forms += [lambda: f"{again(FORCE)}/({again(LENGTH)})^2"] * 3
        forms += self._calls(kind, names, deep) * 2
        return self.random.choice(forms)()

    def _calls(self, kind: str, names: Names, deep: int) -> list[Callable[[], str]]:
        """Calls of functions of the sheet and of those that look at whole expressions and columns."""
        forms: list[Callable[[], str]] = []
        for name, of, gives in self.functions:
            if gives == kind:
                forms.append(lambda n=name, o=of: f"{n}({self.expression(o, names, deep - 1)})")  # type: ignore[misc]
        forms.append(lambda: self.look(kind, names, deep - 1))
        for table in self.tables:
            columns = [c for c, k in table.columns.items() if k == kind]
            columns += [c for t, c, k in self.columns if t is table and k == kind]
            if columns:
                forms.append(lambda t=table, c=columns: self.of_column(t, self.random.choice(c), names, deep))  # type: ignore[misc]
        if kind == PLAIN and self.two_way:
            table_name, x, y = self.random.choice(self.two_way)
            forms.append(lambda: f"interp({x}, {y}, {table_name})")
        return forms

    def look(self, kind: str, names: Names, deep: int) -> str:
        """`integral`, `largest`, `sum`, `limit_of` over a name of their own."""
        x, over = self.fresh("t"), self.random.choice([LENGTH, PLAIN])
        inner = {k: list(v) for k, v in names.items()}
        inner[over] = [x] * 3 + inner[over][:2]
        low, high = self.bounds(over, names)
        which = self.random.choice(["integral", "extreme", "extreme", "sum", "limit_of", "simplified"])
        if which == "extreme":
            function = self.random.choice(EXTREMES[:2] if kind != over else EXTREMES)
            body = self.expression(kind if not function.startswith("where") else FORCE, inner, deep)
            return f"{function}({body}, {x}, {low}, {high})"
        if which == "limit_of":
            return f"limit_of({self.expression(kind, inner, deep)}, {x}, {self.random.choice([low, high])})"
        if which == "simplified":
            return f"simplified({self.expression(kind, names, deep)})"
        if which == "sum":
            inner = {k: list(v) for k, v in names.items()}
            inner[PLAIN] = [x] * 3 + inner[PLAIN][:1]
            end = self.random.choice(["1", "3", "12", "200", "count"])
            if end == "count":
                end = f"count({self.random.choice(self.tables).rising})" if self.tables else "4"
            return f"sum({self.expression(kind, inner, deep)}, {x}, {self.random.choice('0123')}, {end})"
        if kind == MOMENT:
            body, inner[LENGTH] = FORCE, [x] * 3 + names[LENGTH][:1]
            low, high = self.bounds(LENGTH, names)
            return f"integral({self.expression(body, inner, deep)}, {x}, {low}, {high})"
        width = f"({self.leaf(over, names)})"
        return f"integral({self.expression(kind, inner, deep)}, {x}, {low}, {high})/{width}"

    def bounds(self, kind: str, names: Names) -> tuple[str, str]:
        """Of a range: mostly from nothing to something above it."""
        low = "0" if self.chance(0.8) else self.leaf(kind, names)
        high = self.leaf(kind, names)
        return low, f"abs({high}) + {self.random.choice(UP_TO[kind])}" if self.chance(0.7) else high

    def of_column(self, table: DataTable, column: str, names: Names, deep: int) -> str:
        """One value from a column."""
        number, unit = table.last
        inside = f"{number * self.random.random():.3g} {unit}"
        x = inside if self.chance(0.7) else self.expression(table.columns[table.rising], names, deep - 1)
        forms = [f"{f}({column})" for f in ("sum", "min", "max")]
        forms += [f"interp({x}, {table.rising}, {column})", f"lookup({x}, {table.rising}, {column})"]
        if table.labels:
            forms += [f'({column} at "{self.random.choice(table.labels)}")'] * 2
        return self.random.choice(forms)

    # --- statements ---

    def an_input(self) -> None:
        kind = self.random.choice(KINDS)
        name = self.fresh(self.random.choice("abPL"))
        self.lines(f"{name}{self.asked(kind, 0.2)} = {self.typed(kind)} -- an input")
        self.names[kind].append(name)

    def a_table(self) -> None:
        """A table with labels or without, and a first column of numbers that rises, or nearly."""
        name, rows = self.fresh("tab"), self.random.choice([1, 2, 3, 5, 8])
        others = self.random.choices(KINDS, k=self.random.randint(1, 3))
        kinds = [self.random.choice([LENGTH, PLAIN]), *others]
        labels = [f"row {i}" for i in range(rows)] if self.chance(0.7) else []
        units = [self.random.choice(UNITS[kind]) for kind in kinds]
        heads = [f"c{i} [{unit}]" for i, unit in enumerate(units)]
        step = self.random.choice([0.1, 1, 2.5, 40])
        body = []
        for i in range(rows):
            cells = [f"{step * (i + 1):g}"] + [self.cell(kind) for kind in kinds[1:]]
            body.append(([labels[i]] if labels else []) + cells)
        if self.chance(0.1):
            self.random.shuffle(body)
        if self.chance(0.3):
            body.reverse()
        head = (["row"] if labels else []) + heads
        grid = [head, ["---"] * len(head), *body]
        text = "\n".join("| " + " | ".join(cells) + " |" for cells in grid)
        self.parts.append(f"Table {name}: random cells\n\n{text}")
        columns = {f"{name}.c{i}": kind for i, kind in enumerate(kinds)}
        unit = "" if units[0] == "1" else units[0]
        self.tables.append(DataTable(name, labels, columns, f"{name}.c0", (step * rows, unit)))

    def cell(self, kind: str) -> str:
        forms = [self.random.choice(NUMBERS), f"-{self.random.choice(NUMBERS[:6])}", self.typed(kind)]
        if self.names[kind]:
            forms.append(self.expression(kind, {**self.names}, 1))
        return self.random.choice(forms)

    def a_two_way_table(self) -> None:
        name = self.fresh("two")
        down, across = (self.random.sample(["1", "2", "5", "10"], k=self.random.randint(1, 4)) for _ in "ab")
        if self.chance(0.9):
            down, across = sorted(down, key=int), sorted(across, key=int)
        unit = self.random.choice(["", " mm"])
        head = f"| h [mm] | {' | '.join(each + unit for each in across)} |\n|{'---|' * (len(across) + 1)}"
        body = [f"| {each} | {' | '.join(self.cell(PLAIN) for _ in across)} |" for each in down]
        self.parts.append(f"Table {name}: two ways\n\n" + "\n".join([head, *body]))
        x = f"{self.random.uniform(0.9, 1.05) * float(max(down, key=int)):.3g} mm"
        self.two_way.append((name, x, across[0] + unit))

    def a_result(self) -> None:
        kind, name = self.random.choice(KINDS), self.fresh("r")
        self.lines(f"{name}{self.asked(kind)} = {self.expression(kind, self.names, 3)}")
        self.names[kind].append(name)

    def a_look(self) -> None:
        kind, name = self.random.choice(KINDS), self.fresh("r")
        self.lines(f"{name}{self.asked(kind)} = {self.look(kind, self.names, 2)}")
        self.names[kind].append(name)

    def columns_of(self, table: DataTable) -> Names:
        """Names among which those of the columns of one table are frequent."""
        names = {kind: list(each) for kind, each in self.names.items()}
        for column, kind in table.columns.items():
            names[kind] += [column] * 2
        for other, column, kind in self.columns:
            if other is table or self.chance(0.03):
                names[kind] += [column] * 2
        return names

    def a_column(self) -> None:
        """A result that goes row by row, with or without a look-up in each row."""
        if not self.tables:
            self.a_table()
        table, kind, name = self.random.choice(self.tables), self.random.choice(KINDS), self.fresh("col")
        names = self.columns_of(table)
        text = self.expression(kind, names, 2)
        if self.chance(0.3):
            source = self.random.choice(self.tables)
            at = self.expression(source.columns[source.rising], names, 1)
            column, kind = self.random.choice(list(source.columns.items()))
            text = f"{self.random.choice(['interp', 'lookup'])}({at}, {source.rising}, {column})"
        self.lines(f"{name}{self.asked(kind, 0.3)} = {text}")
        self.columns.append((table, name, kind))

    def a_criterion(self) -> None:
        kind = self.random.choice(KINDS)
        names = self.columns_of(self.random.choice(self.tables)) if self.tables else self.names
        a, b, c = (self.expression(kind, names, 2 - i) for i in range(3))
        sign = self.random.choice(RELATIONS)
        word = self.random.choice(["strength", "stiffness", "stability", "limit"])
        forms = [f"{a} {sign} {b}"] * 3 + [f"{c} <= {a} <= {b}", f"{a} < {b} or {a} > {c}"]
        relation = self.random.choice(forms)
        known = [name for each in self.names.values() for name in each]
        lines = [f"{word} {self.fresh('k').replace('_', '-')}: {relation}"]
        if known:
            lines.append(f"valid: {relation} for {self.random.choice(known)}")
        lines.append(f"check: {a} = {b} within {self.random.choice(['1 %', self.typed(kind)])}")
        self.lines(self.random.choice(lines))

    def a_function(self) -> None:
        """A function of x, its integral, its derivative, or a form of it made simpler."""
        name, kind = self.fresh("f"), self.random.choice(KINDS)
        over = self.random.choice([LENGTH, LENGTH, PLAIN])
        names = {k: list(v) for k, v in self.names.items()}
        names[over] = ["x"] * 4 + names[over][:2]
        body = self.expression(kind, names, 3)
        wrap = self.random.choice(["", "", "integral", "integral", "derivative", "simplified", "cases"])
        if wrap == "integral":
            kind, body = self._integrated(kind, over, body)
        elif wrap == "derivative":
            length = self.leaf(over, self.names)
            body = f"derivative({body}, x)*{length}"
        elif wrap == "simplified":
            body = f"simplified({body})"
        unit = "1" if over == PLAIN else self.random.choice(UNITS[over])
        if wrap == "cases":
            self.lines(
                f"{name}(x [{unit}]) = cases",
                f"    {body}  when x {self.random.choice(RELATIONS)} {self.leaf(over, self.names)}",
                f"    {self.expression(kind, names, 1)}  otherwise",
            )
        else:
            self.lines(f"{name}(x [{unit}]){self.asked(kind)} = {body}")
        self.functions.append((name, over, kind))

    def _integrated(self, kind: str, over: str, body: str) -> tuple[str, str]:
        if kind == FORCE and over == LENGTH:
            return MOMENT, f"integral({body}, x)"
        return kind, f"integral({body}, x)/({self.leaf(over, self.names)})"

    def a_linear_system(self) -> None:
        """One to four equations of first degree; sometimes one too few, or twice the same."""
        kind, count = self.random.choice(KINDS), self.random.randint(1, 4)
        sought = [self.fresh("u") for _ in range(count)]
        rows = [self._linear_row(kind, sought) for _ in range(count - (1 if self.chance(0.03) else 0))]
        if self.chance(0.05):
            rows[-1:] = rows[:1]
        unit = self.random.choice(UNITS[kind])
        ends = [self.some_bounds(kind) if self.chance(0.1) else "" for _ in sought]
        head = ", ".join(f"{name} [{unit}]{end}" for name, end in zip(sought, ends, strict=True))
        self.lines(f"solve for {head}", *[f"    {row}" for row in rows])
        self.names[kind] += sought

    def _linear_row(self, kind: str, sought: list[str]) -> str:
        terms = [f"({self.expression(PLAIN, self.names, 1)})*{name}" for name in sought if self.chance(0.8)]
        return f"{' + '.join(terms) or sought[0]} = {self.expression(kind, self.names, 1)}"

    def some_bounds(self, kind: str) -> str:
        low, high = self.bounds(kind, self.names)
        return f" between {low} and {high}"

    def an_equation(self) -> None:
        """One equation or two, of any form, with bounds or without."""
        kind, count = self.random.choice([LENGTH, PLAIN, FORCE]), self.random.choice([1, 1, 1, 2])
        sought = [self.fresh("s") for _ in range(count)]
        names = {k: list(v) for k, v in self.names.items()}
        names[kind] = sought * 3 + names[kind][:2]
        unit = self.random.choice(UNITS[kind])
        bounded = self.chance(0.7)
        head = ", ".join(f"{n} [{unit}]{self.some_bounds(kind) if bounded else ''}" for n in sought)
        rows = []
        for _ in sought:
            of = self.random.choice(KINDS)
            deep = self.random.choice([1, 2, 2, 3])
            rows.append(f"    {self.expression(of, names, deep)} = {self.expression(of, names, deep - 1)}")
        if self.chance(0.3):
            s = f"{sought[0]}/{self.leaf(kind, self.names)}"
            a, b, c = (self.random.choice(NUMBERS) for _ in range(3))
            rows[0] = f"    {a}*({s})^{self.random.choice('234')} - {b}*({s}) = {c}"
        self.lines(f"solve for {head}", *rows)
        self.names[kind] += sought

    def an_unknown(self) -> None:
        """Constants that functions use before they are solved for: a beam by integration."""
        one, two = self.fresh("C"), self.fresh("C")
        load, moment, v = self.fresh("q"), self.fresh("f"), self.fresh("f")
        P, L, a = (self.leaf(kind, self.names) for kind in (FORCE, LENGTH, LENGTH))
        bracket, power = self.random.choice(["01", "10", "10", "20"])
        w = f"{P}/({L})^{int(bracket) + int(power)}"
        self.lines(
            f"unknown {one} [kN], {two} [kN*m]",
            f"{load}(x [m]) [kN] = {one} - {w}*<x - {a}>^{bracket}*x^{power}",
            f"{moment}(x [m]) [kN*m] = {two} + integral({load}(x), x)",
        )
        if self.chance(0.3):
            self.a_result()
        ends = [f"{moment}({self.leaf(LENGTH, self.names)}) = {self.leaf(MOMENT, self.names)}" for _ in "ab"]
        if self.chance(0.3):
            ends[0] = f"{load}({self.leaf(LENGTH, self.names)}) = 0"
        self.lines(f"solve for {one}, {two}", *[f"    {end}" for end in ends])
        self.functions += [(load, LENGTH, FORCE), (moment, LENGTH, MOMENT)]
        if self.chance(0.5):
            self.lines(f"{v}(x [m]) = integral({moment}(x), x)/{self.leaf(LENGTH, self.names)}")
            self.functions.append((v, LENGTH, MOMENT))
        self.names[FORCE].append(one)
        self.names[MOMENT].append(two)

    def a_picture(self) -> None:
        over = self.random.choice([LENGTH, PLAIN])
        names = {k: list(v) for k, v in self.names.items()}
        names[over] = ["x"] * 4 + names[over][:1]
        curves = [f"{name}(x)" for name, of, _ in self.functions if of == over][-2:]
        if not curves or self.chance(0.4):
            curves.append(self.expression(self.random.choice(KINDS), names, 2))
        low, high = self.bounds(over, self.names)
        text = f"{', '.join(curves)} for x from {low} to {high}"
        steps = self.random.choice(["1", "4", "10"])
        self.lines(self.random.choice([f"plot {text}", f"tabulate {text}, {steps} steps"]))

    def a_value_in_prose(self) -> None:
        known = [name for each in self.names.values() for name in each]
        if known:
            self.parts.append(f"The value is {{{self.random.choice(known)}}} as computed.")

    def sheet(self) -> str:
        for _ in range(self.random.randint(2, 5)):
            self.an_input()
        statements = [
            self.a_table, self.a_two_way_table, self.a_result, self.a_result, self.a_look, self.a_look,
            self.a_column, self.a_column, self.a_criterion, self.a_function, self.a_function,
            self.a_linear_system, self.an_equation, self.an_equation, self.an_unknown, self.a_picture,
            self.a_value_in_prose,
        ]  # fmt: skip
        for _ in range(self.random.randint(2, 9)):
            self.random.choice(statements)()
        system = self.random.choice(["SI", "SI", "US", "SI machine", "US machine", "SI pressure"])
        return f"---\ntitle: Algebra\nunits: {system}\n---\n\n" + "\n\n".join(self.parts) + "\n"


def algebra(random: Random) -> str:
    """A sheet of which most lines can be worked."""
    return Writer(random).sheet()


SIGNS = [*"()[]<>^*/+-=:,.'\"|_ x0123456789", " -- ", "\n", "    ", "at ", "sum(", "<x - ", ">^1", " kN"]


def algebra_damaged(random: Random) -> str:
    """The same with characters changed, and lines left out, doubled, exchanged or indented."""
    text = Writer(random).sheet()
    head, body = text[: text.index("\n\n") + 2], text[text.index("\n\n") + 2 :]
    for _ in range(random.choice([0, 1, 1, 2, 5])):
        at = random.randint(0, len(body))
        body = body[:at] + random.choice(SIGNS) + body[min(at + random.choice([0, 1, 1, 4]), len(body)) :]
    lines = body.split("\n")
    for _ in range(random.choice([0, 1, 2, 4])):
        i, j = random.randrange(len(lines)), random.randrange(len(lines))
        match random.choice(["out", "twice", "exchanged", "deeper"]):
            case "out" if len(lines) > 1:
                del lines[i]
            case "twice":
                lines.insert(j, lines[i])
            case "exchanged":
                lines[i], lines[j] = lines[j], lines[i]
            case _:
                lines[i] = "    " + lines[i]
    return head + "\n".join(lines)

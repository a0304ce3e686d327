"""Formulas as plain text in one canonical spacing: for ids, for the trace and for messages."""

from __future__ import annotations

from loadpath.formula.statements import (
    Check,
    Choice,
    Column,
    Criterion,
    Definition,
    Faulty,
    FunctionDefinition,
    Plot,
    Solution,
    Sought,
    Statement,
    Table,
    Tabulate,
    Unknown,
    Validity,
)
from loadpath.formula.tree import (
    As,
    At,
    Binary,
    Bracket,
    Call,
    Cases,
    Factor,
    Logic,
    Name,
    Negative,
    Node,
    Number,
    Part,
    Quantity,
    Relation,
    Shown,
    Word,
)

LOGIC, RELATION, SUM, PRODUCT, SIGN, POWER, ATOM = range(7)
"""How tightly a node holds together, loosest first; shared by every printer."""


def level(node: Node) -> int:
    """The tightness of a node as it prints."""
    match node:
        case Logic():
            return LOGIC
        case Relation():
            return RELATION
        case Binary(operator="+" | "-"):
            return SUM
        case Binary(operator="*" | "/") | Factor():
            return PRODUCT
        case Negative():
            return SIGN
        case Shown(number=number) if number.startswith("-"):
            return SIGN
        case Quantity(parts=(Part(whole=whole), *_)) if whole.startswith("-"):
            return SIGN
        case Binary(operator="^"):
            return POWER
        case _:
            return ATOM


def is_measured(node: Node) -> bool:
    """True where a number with a unit, or in powers of ten, stands: in a power it takes brackets."""
    match node:
        case Quantity():
            return True
        case Number(text=typed):
            return "e" in typed.lower()
        case Shown(number=number, unit=unit, word=False):
            return bool(unit) or "e" in number or " " in number
    return False


def needs_brackets(child: Node, parent: Node, right: bool = False) -> bool:
    """True where a child of an operation must stand in brackets to keep its meaning."""
    match parent:
        case Binary(operator="^") if not right:
            return level(child) < ATOM or is_measured(child)
        case Binary(operator="^"):
            return level(child) < SIGN or is_measured(child.operand if isinstance(child, Negative) else child)
        case Binary(operator="+" | "-"):
            return level(child) < SUM or (right and level(child) in (SUM, SIGN))
        case Binary(operator="*" | "/"):
            return level(child) < PRODUCT or (right and level(child) in (PRODUCT, SIGN))
        case Negative():
            return level(child) <= SIGN or _takes_the_minus(child)
        case Factor():
            return level(child) < PRODUCT
        case Relation():
            return level(child) <= RELATION
        case Logic(word=word):
            return isinstance(child, Logic) and not (word == "or" and child.word == "and")
    return False


def _takes_the_minus(child: Node) -> bool:
    """True for an absolute temperature: a minus directly before it would belong to its number."""
    return isinstance(child, Quantity) and child.parts[-1].unit in ("degC", "degF")


def text(node: Node) -> str:
    """One line of plain text that reads back to an equal tree (`Shown` and `Factor` apart)."""
    match node:
        case Number():
            return node.text
        case Quantity(parts=parts):
            return " ".join(_part(part) for part in parts)
        case Word():
            return f'"{node.text}"'
        case Name():
            return node.name
        case Shown(number=number, unit=unit):
            return f"{number} {unit}" if unit else number
        case Factor(body=body, number=number, unit=unit, divided=divided):
            return (
                f"{_child(body, node)} / ({number} {unit})"
                if divided
                else f"{_child(body, node)} * {number} {unit}"
            )
        case Negative(operand=operand):
            return "-" + _child(operand, node)
        case Binary():
            return _binary(node)
        case Call(function=function, arguments=arguments):
            return f"{function}({', '.join(text(argument) for argument in arguments)})"
        case Bracket(inner=inner, power=power):
            return f"<{text(inner)}>^{power}"
        case As(operand=operand, unit=unit):
            return f"({text(operand)} as {unit})"
        case At(operand=operand, row=row):
            return f"{text(operand)} at {text(row)}"
        case Relation(operands=operands, signs=signs):
            out = _child(operands[0], node)
            for sign, operand in zip(signs, operands[1:], strict=True):
                out += f" {sign} {_child(operand, node)}"
            return out
        case Logic(word=word, operands=operands):
            return f" {word} ".join(_child(operand, node) for operand in operands)
        case Cases(branches=branches):
            return "cases " + "; ".join(_branch(b.value, b.condition) for b in branches)
    raise TypeError(type(node).__name__)


def _part(part: Part) -> str:
    fraction = f"{part.over[0]}/{part.over[1]}" if part.over else ""
    return " ".join(piece for piece in (part.whole, fraction, part.unit) if piece)


def _branch(value: Node, condition: Node | None) -> str:
    return f"{text(value)} otherwise" if condition is None else f"{text(value)} when {text(condition)}"


def _child(child: Node, parent: Node, right: bool = False) -> str:
    inside = text(child)
    return f"({inside})" if needs_brackets(child, parent, right) else inside


def _binary(node: Binary) -> str:
    left, right = _child(node.left, node), _child(node.right, node, right=True)
    if node.operator == "/" and _is_fraction(node.right):
        right = f"({right})"
    spaced = node.operator in "+-" or (node.operator != "^" and (_spaced(node.left) or _spaced(node.right)))
    return f"{left} {node.operator} {right}" if spaced else f"{left}{node.operator}{right}"


def _is_fraction(node: Node) -> bool:
    """True for `1/2 in`, which after a `/` could be read in two ways."""
    return isinstance(node, Quantity) and bool(node.parts[0].over) and not node.parts[0].whole


def _spaced(node: Node) -> bool:
    """Round a printed or typed quantity the signs `*` and `/` take spaces, so that units stay apart."""
    match node:
        case Shown(unit=unit):
            return bool(unit)
        case Quantity():
            return True
        case Negative(operand=operand):
            return _spaced(operand)
        case Binary(operator="*" | "/" | "^"):
            return _spaced(node.left) or _spaced(node.right)
    return False


def statement_text(statement: Statement) -> str:
    """A statement's formula part in canonical spacing."""
    match statement:
        case Definition(value=value):
            return text(value)
        case Choice(word=word, options=options):
            return f'"{word}" of ' + ", ".join(f'"{option}"' for option in options)
        case FunctionDefinition(name=name, parameters=parameters, body=body):
            listed = ", ".join(p.name + (f" [{p.unit.text}]" if p.unit else "") for p in parameters)
            return f"{name}({listed}) = {text(body)}"
        case Criterion(relation=relation):
            return text(relation)
        case Validity(relation=relation, names=names):
            return f"{text(relation)} for {', '.join(name for name, _ in names)}"
        case Check(relation=relation, tolerance=tolerance):
            return f"{text(relation)} within {text(tolerance)}"
        case Unknown(name=name, unit=unit):
            return f"unknown {name} [{unit.text}]"
        case Solution(together=together):
            listed = "; ".join(text(equation) for equation in together.equations)
            return f"solve for {', '.join(_sought(each) for each in together.sought)}: {listed}"
        case Table(name=name):
            return f"table {name}"
        case Column(cells=cells):
            return ", ".join(text(cell) for cell in cells)
        case Plot(curves=curves):
            return f"plot {_listed(curves)} {_range(statement)}"
        case Tabulate(curves=curves, steps=steps):
            return f"tabulate {_listed(curves)} {_range(statement)}, {steps} steps"
        case Faulty(text=typed):
            return " ".join(typed.split())
    raise TypeError(type(statement).__name__)


def _listed(curves: tuple[Node, ...]) -> str:
    return ", ".join(text(curve) for curve in curves)


def _range(statement: Plot | Tabulate) -> str:
    return f"for {statement.variable} from {text(statement.low)} to {text(statement.high)}"


def _sought(sought: Sought) -> str:
    unit = f" [{sought.unit.text}]" if sought.unit else ""
    if sought.low is None or sought.high is None:
        return sought.name + unit
    return f"{sought.name}{unit} between {text(sought.low)} and {text(sought.high)}"

"""Derivatives of trees by the rules of sums, products, quotients and chains; SymPy is not asked."""

from __future__ import annotations

from fractions import Fraction

from loadpath.algebra.brackets import places
from loadpath.algebra.collecting import collected, grouped, grouped_over, weight
from loadpath.algebra.failure import NoForm, no_closed_form
from loadpath.algebra.frame import framed
from loadpath.algebra.powers import holds, polynomial, split
from loadpath.algebra.terms import (
    UNIT,
    Term,
    Terms,
    as_term,
    expanded,
    factor,
    merged,
    product,
    read,
    scaled,
    write,
)
from loadpath.algebra.trees import ONE, decimals_in, negated
from loadpath.formula.tree import Binary, Bracket, Call, Name, Node, Number


def derivative(f: Node, x: str, *, seconds: float | None = None) -> Node:
    """The derivative by x. A bracket of order 0 gives 0: the jump is left out, `jumps_in` lists the places.

    Raises AlgebraFailure where f holds something of x that has no derivative rule.
    """

    def work() -> Terms:
        out: Terms = ()
        for term in read(f):
            out += _slope(term, x)
        return merged(out)

    try:
        found = framed(work, (f,), last=x, seconds=seconds)
    except NoForm:
        found = None
    if found is None:
        raise no_closed_form(f"the derivative by {x} has no closed form")
    return found


def jumps_in(f: Node, x: str) -> tuple[Node, ...]:
    """The places of the brackets of order 0, in the order met."""
    return places(f, x, 0)


def breaks_in(f: Node, x: str) -> tuple[Node, ...]:
    """The places of all brackets, in the order met."""
    return places(f, x)


def _slope(term: Term, x: str) -> Terms:
    outside, inside = split(term, x)
    if not inside.factors:
        return ()
    decimals = decimals_in(write((term,)))
    if len(inside.factors) == 1:
        base, exponent = inside.factors[0]
        return grouped_over(outside, _chain(base, exponent, x), decimals)
    powers = polynomial((inside,), x)
    if powers is not None:
        return grouped(outside, _slope_of_powers(inside, x), decimals)
    out: Terms = ()
    for i, (base, exponent) in enumerate(inside.factors):
        others = Term(Fraction(1), inside.factors[:i] + inside.factors[i + 1 :])
        out += product(_chain(base, exponent, x), (others,))
    forms = grouped_over(outside, out, decimals), product((outside,), collected(out, decimals))
    return min(forms, key=weight)


def _slope_of_powers(inside: Term, x: str) -> Terms:
    out: Terms = ()
    for term in expanded((inside,), lambda base: holds(base, x)):
        outside, with_x = split(term, x)
        if with_x.factors:
            out += product((outside,), _chain(Name(x), with_x.factors[0][1], x))
    return merged(out)


def _chain(base: Node, exponent: Fraction, x: str) -> Terms:
    """The derivative of base^exponent."""
    if isinstance(base, Bracket) and exponent > 0 and exponent.denominator == 1:
        return _of_bracket(Bracket(base.inner, base.power * int(exponent)), x)
    outer = Term(exponent, ((base, exponent - 1),) if exponent != 1 else ())
    inner = _of_base(base, x)
    return grouped_over(outer, inner, False) if exponent != 1 else inner


def _of_base(base: Node, x: str) -> Terms:
    match base:
        case Name(name=name) if name == x:
            return (UNIT,)
        case Bracket():
            return _of_bracket(base, x)
        case Call(arguments=(only,)):
            inner = merged(t for term in read(only) for t in _slope(term, x))
            return grouped_over(as_term(read(_outer(base.function, only))), inner, False)
        case Binary(operator="^", left=left, right=right):
            return _of_power(left, right, x)
        case Binary():
            return merged(t for term in read(base) for t in _slope(term, x))
    raise NoForm


def _of_bracket(bracket: Bracket, x: str) -> Terms:
    if bracket.power == 0:
        return ()
    inner = merged(t for term in read(bracket.inner) for t in _slope(term, x))
    lower = factor(Bracket(bracket.inner, bracket.power - 1))
    return product(inner, scaled((lower,), Fraction(bracket.power)))


def _of_power(left: Node, right: Node, x: str) -> Terms:
    """u^v: v*u^(v - 1)*u' + u^v*ln(u)*v'."""
    lower = Binary("^", left, Binary("-", right, ONE))
    by_base = Binary("*", Binary("*", right, lower), _tree_of(left, x))
    by_exponent = Binary("*", Binary("*", Binary("^", left, right), Call("ln", (left,))), _tree_of(right, x))
    return merged((*read(by_base), *read(by_exponent)))


def _tree_of(node: Node, x: str) -> Node:
    return write(merged(t for term in read(node) for t in _slope(term, x)))


def _outer(function: str, u: Node) -> Node:
    """The derivative of a function by its argument."""

    def call(name: str) -> Node:
        return Call(name, (u,))

    def over(node: Node) -> Node:
        return Binary("/", ONE, node)

    def squared(node: Node) -> Node:
        return Binary("^", node, Number("2"))

    match function:
        case "exp":
            return call("exp")
        case "ln":
            return over(u)
        case "log10":
            return over(Binary("*", u, Call("ln", (Number("10"),))))
        case "cbrt":
            return over(Binary("*", Number("3"), squared(call("cbrt"))))
        case "sin":
            return call("cos")
        case "cos":
            return negated(call("sin"))
        case "tan":
            return squared(call("sec"))
        case "sec":
            return Binary("*", call("sec"), call("tan"))
        case "asin":
            return over(Call("sqrt", (Binary("-", ONE, squared(u)),)))
        case "acos":
            return negated(over(Call("sqrt", (Binary("-", ONE, squared(u)),))))
        case "atan":
            return over(Binary("+", ONE, squared(u)))
        case "sinh":
            return call("cosh")
        case "cosh":
            return call("sinh")
        case "tanh":
            return over(squared(call("cosh")))
        case "abs":
            return Binary("/", u, call("abs"))
    raise NoForm

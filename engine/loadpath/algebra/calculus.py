"""Antiderivatives, definite integrals, derivatives and limits of trees, term by term in the order typed.

Powers, brackets and functions of something linear in x are worked here by their own rules, so that what was
typed keeps its form; all else is asked of SymPy through the door.
"""

from __future__ import annotations

from collections.abc import Callable
from contextlib import suppress
from fractions import Fraction

from loadpath.algebra import door
from loadpath.algebra.brackets import (
    has_bracket,
    in_powers_of_line,
    is_single,
    places,
    singles,
    step_of,
    told_by,
    told_sign,
)
from loadpath.algebra.failure import NoForm, no_closed_form
from loadpath.algebra.frame import framed
from loadpath.algebra.terms import (
    UNIT,
    Term,
    Terms,
    as_number,
    as_term,
    collected,
    expanded,
    factor,
    grouped,
    holds,
    inverse,
    is_sum,
    merged,
    polynomial,
    positive_first,
    power,
    powers_of,
    product,
    put,
    read,
    replaced,
    scaled,
    settled,
    sign,
    split,
    straight,
    times,
    write,
)
from loadpath.algebra.trees import ONE, ZERO, decimals_in, depends_on, is_zero, negated
from loadpath.algebra.wire import Book
from loadpath.formula.tree import Binary, Bracket, Call, Name, Node, Number, walk

AboveZero = Callable[[Node], bool]
"""The caller's answer, from values, to whether a tree without the variable is above zero."""


def never(node: Node) -> bool:
    """Nothing is known to be above zero."""
    return False


# --- integrals ----------------------------------------------------------------------------------------------


def antiderivative(
    f: Node, x: str, above_zero: AboveZero = never, *, seconds: float | None = None
) -> Node | None:
    """The antiderivative that is 0 at x = 0 where there is one, else one without a constant added.

    `vanishes_at_zero` says which it is. None where there is no closed form.
    """

    def work() -> Terms:
        out: Terms = ()
        for term in read(f):
            out += _from_zero(term, x, above_zero)
        return _logarithms_together(merged(out))

    with told_by(above_zero):
        return framed(work, (f,), last=x, seconds=seconds, none=True)


def _from_zero(term: Term, x: str, above_zero: AboveZero) -> Terms:
    """The term's antiderivative less its value at 0, where it has one."""
    outside, inside = split(term, x)
    decimals = decimals_in(write((term,)))
    if not inside.factors:
        return (times(outside, factor(Name(x))),)
    found = _primitive(inside, x)
    try:
        start = _at(found, x, ZERO, above_zero)
    except NoForm:
        start = ()
    if not start:
        return _grouped(outside, found, decimals)
    whole = _logarithms_together(merged((*found, *scaled(start, Fraction(-1)))))
    if not has_bracket(write(found), x):
        return product((outside,), collected(positive_first(whole), decimals))
    return product((outside,), positive_first(whole))


def _grouped(outside: Term, inside: Terms, decimals: bool) -> Terms:
    """A factor stays outside where nothing but numbers stands below the line inside."""
    if any(e < 0 for t in inside for _, e in t.factors):
        return product((outside,), inside)
    return grouped(outside, inside, decimals)


def vanishes_at_zero(F: Node, x: str, above_zero: AboveZero = never) -> bool:
    """True where an antiderivative is 0 at x = 0, on the same word of the caller on the brackets."""
    with told_by(above_zero):
        found = framed(lambda: expanded(_at(read(F), x, ZERO, above_zero)), (F,), last=x, none=True)
    return found is not None and is_zero(found)


def definite(
    f: Node, x: str, a: Node, b: Node, above_zero: AboveZero = never, *, seconds: float | None = None
) -> Node | None:
    """F(b) - F(a) as one fraction; None where there is no closed form.

    Whether f is bounded between a and b hangs on values and is the caller's to see: `denominators` lists what
    must not be 0 there.
    """

    def work() -> Terms:
        out: Terms = ()
        for term in read(f):
            outside, inside = split(term, x)
            out += product((outside,), _between(inside, x, a, b, above_zero))
        out = _logarithms_together(merged(out))
        return _shorter(collected(out, any(decimals_in(n) for n in (f, a, b))))

    with told_by(above_zero):
        return framed(work, (f, b, a), last=x, in_place=(b, a), seconds=seconds, none=True)


def _between(inside: Term, x: str, a: Node, b: Node, above_zero: AboveZero) -> Terms:
    if not inside.factors:
        return settled((*read(b), *scaled(read(a), Fraction(-1))))
    try:
        found = _own_primitive(inside, x)
        ends = [_at(found, x, place, above_zero) for place in (a, b)]
    except NoForm:
        if has_bracket(write((inside,)), x):
            raise
        return _asked("definite", (inside,), x, a=a, b=b)
    return merged((*ends[1], *scaled(ends[0], Fraction(-1))))


def _shorter(terms: Terms) -> Terms:
    """Sums above and below the line, cancelled where they can be."""
    if len(terms) != 1:
        return terms
    sums = [(n, e) for n, e in terms[0].factors if is_sum(n)]
    if not (any(e > 0 for _, e in sums) and any(e < 0 for _, e in sums)):
        return terms
    try:
        other = _asked("simplified", terms, "")
    except NoForm:
        return terms
    return other if _weight(other) < _weight(terms) else terms


def _weight(terms: Terms) -> int:
    return sum(1 for _ in walk(write(terms)))


def denominators(f: Node, x: str) -> tuple[Node, ...]:
    """What stands below a line or in a logarithm and holds x: between the bounds of an integral none of
    these may be 0."""
    found: dict[Node, None] = {}

    def look(node: Node) -> Node | None:
        match node:
            case Binary(operator="/", right=right) if depends_on(right, x):
                found[right] = None
            case Binary(operator="^", left=left, right=right) if depends_on(left, x):
                exponent = value_of(right)
                if exponent is None or exponent < 0:
                    found[left] = None
            case Call(function="ln" | "log10", arguments=(only,)) if depends_on(only, x):
                found[only] = None
            case Call(function="tan" | "sec", arguments=(only,)) if depends_on(only, x):
                found[Call("cos", (only,))] = None
        return None

    replaced(f, look)
    return tuple(found)


# --- antiderivatives of what holds x, without outer factors -------------------------------------------------


def _primitive(inside: Term, x: str) -> Terms:
    """An antiderivative without a constant; raises NoForm where there is no closed form."""
    try:
        return _own_primitive(inside, x)
    except NoForm:
        if has_bracket(write((inside,)), x):
            raise
    return _asked("integrate", (inside,), x)


def _own_primitive(inside: Term, x: str) -> Terms:
    if any(has_bracket(n, x) for n, _ in inside.factors):
        return _of_brackets(inside, x)
    line = _of_line(inside, x)
    if line is not None:
        return line
    powers = powers_of((inside,), x)
    if powers is None:
        raise NoForm
    out: Terms = ()
    for term in expanded((inside,), lambda base: holds(base, x)):
        outside, with_x = split(term, x)
        exponent = with_x.factors[0][1] if with_x.factors else Fraction(0)
        if exponent == -1:
            out += (times(outside, factor(Call("ln", (Name(x),)))),)
        else:
            out += (times(outside, Term(1 / (exponent + 1), ((Name(x), exponent + 1),))),)
    return merged(out)


HIGHEST = 6
"""Power up to which a sum is multiplied out to be integrated."""
_OF_LINE = {
    "sin": ("cos", -1),
    "cos": ("sin", 1),
    "exp": ("exp", 1),
    "sinh": ("cosh", 1),
    "cosh": ("sinh", 1),
}


def _of_line(inside: Term, x: str) -> Terms | None:
    """A power or function of something linear in x, kept as typed: (a + b*x)^n, sin(pi*x/L)."""
    others = [f for f in inside.factors if f[0] != Name(x) and not _whole_power_of_sum(*f)]
    if len(others) != 1:
        return None
    base, exponent = others[0]
    if len(inside.factors) > 1:
        rest = Term(Fraction(1), tuple(f for f in inside.factors if f != others[0]))
        return None if isinstance(base, Call) else _powers_beside_line(rest, base, exponent, x)
    if isinstance(base, Call) and len(base.arguments) == 1 and exponent == 1 and base.function in _OF_LINE:
        line = straight(base.arguments[0], x)
        function, factor_of = _OF_LINE[base.function]
        if line is None:
            return None
        return (times(scaled((inverse(as_term(line[0])),), Fraction(factor_of))[0],
                      factor(Call(function, base.arguments))),)  # fmt: skip
    return None if isinstance(base, Call) else _powers_beside_line(UNIT, base, exponent, x)


def _whole_power_of_sum(base: Node, exponent: Fraction) -> bool:
    """True for what is multiplied out; a higher power keeps its form where it can."""
    return is_sum(base) and 0 < exponent <= HIGHEST and exponent.denominator == 1


def _powers_beside_line(rest: Term, base: Node, exponent: Fraction, x: str) -> Terms | None:
    """p(x)*u^n with u linear in x, by powers of u."""
    line, powers = straight(base, x), polynomial((rest,), x)
    if line is None or powers is None:
        return None
    slope = as_term(line[0])
    out: Terms = ()
    for order, coefficient in in_powers_of_line(powers, slope, line[1]):
        raised = exponent + order + 1
        higher = factor(Call("ln", (base,))) if not raised else Term(1 / raised, ((base, raised),))
        out += product(coefficient, (times(inverse(slope), higher),))
    return merged(out)


def _of_brackets(inside: Term, x: str) -> Terms:
    out: Terms = ()
    for term in singles((inside,), x):
        single = is_single(term, x)
        if single is None:
            outside, with_x = split(term, x)
            found = _primitive(with_x, x) if with_x.factors else (factor(Name(x)),)
            out += product((outside,), found)
            continue
        rest, bracket = single
        outside, with_x = split(rest, x)
        if with_x.factors:
            out += product((outside,), _beyond(with_x, bracket, x))
            continue
        slope = inverse(step_of(bracket, x).slope)
        order = bracket.power + 1
        higher = Term(Fraction(1, order), ((Bracket(bracket.inner, order), Fraction(1)),))
        out += (times(times(outside, slope), higher),)
    return merged(out)


def _beyond(with_x: Term, bracket: Bracket, x: str) -> Terms:
    """g(x)*<u>^n where g is no polynomial: what H = antiderivative of g*u^n gains from the place on."""
    step = step_of(bracket, x)
    over = product((with_x,), power(as_term(read(bracket.inner)), Fraction(bracket.power)))
    found: Terms = ()
    for term in over:
        outside, inside = split(term, x)
        found += product((outside,), _primitive(inside, x) if inside.factors else (factor(Name(x)),))
    gain = _logarithms_together(merged((*found, *scaled(put(found, x, write(step.place)), Fraction(-1)))))
    return (times(as_term(gain), factor(Bracket(bracket.inner, 0))),)


def _logarithms_together(terms: Terms) -> Terms:
    """c*ln(u) - c*ln(v) as c*ln(u/v), whose argument is a plain number."""
    out = list(terms)
    for i, first in enumerate(out):
        if _logarithm(first) is None:
            continue
        for j in range(i + 1, len(out)):
            one, two = _logarithm(out[i]), _logarithm(out[j])
            if one is None or two is None or one[1] != two[1] or one[0] != -two[0]:
                continue
            ratio = collected(product(settled(read(one[2])), (inverse(as_term(settled(read(two[2])))),)))
            call = read(Call("ln", (write(ratio),)))
            joined = product((Term(one[0], tuple(one[3])),), call)
            out[i] = joined[0] if joined else Term(Fraction(0))
            out[j] = Term(Fraction(0))
            break
    return tuple(t for t in out if t.number)


def _logarithm(
    term: Term,
) -> tuple[Fraction, frozenset[tuple[Node, Fraction]], Node, list[tuple[Node, Fraction]]] | None:
    """Number, other factors (as a set and in order) and argument of a term with one logarithm."""
    calls = [(n, e) for n, e in term.factors if isinstance(n, Call) and n.function == "ln"]
    if len(calls) != 1 or calls[0][1] != 1 or not isinstance(calls[0][0], Call):
        return None
    others = [f for f in term.factors if f != calls[0]]
    return term.number, frozenset(others), calls[0][0].arguments[0], others


# --- values at a place --------------------------------------------------------------------------------------


def _at(terms: Terms, x: str, place: Node, above_zero: AboveZero) -> Terms:
    """With a place in x. At a typed 0 a rising bracket is nothing unless the caller says otherwise; one whose
    inside is no difference any more is opened on the caller's word."""
    start = is_zero(place)

    def change(node: Node) -> Node | None:
        if isinstance(node, Bracket) and holds(node.inner, x):
            return _bracket_at(node, x, place, start, above_zero)
        return None

    opened = read(replaced(write(terms), change))
    return settled(put(opened, x, ZERO if start else place))


def _bracket_at(bracket: Bracket, x: str, place: Node, start: bool, above_zero: AboveZero) -> Node:
    inside = settled(put(read(bracket.inner), x, ZERO if start else place))
    known = told_sign(inside)
    if known is None and start and _rises(bracket, x):
        return write(read(Bracket(write(inside), bracket.power))) if above_zero(write(inside)) else ZERO
    if known and len(inside) == 1:
        return write(power(inside[0], Fraction(bracket.power))) if known > 0 else ZERO
    return write(read(Bracket(write(inside), bracket.power)))


def _rises(bracket: Bracket, x: str) -> bool:
    return step_of(bracket, x).way == 1


# --- derivatives --------------------------------------------------------------------------------------------


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
        return _grouped(outside, _chain(base, exponent, x), decimals)
    powers = polynomial((inside,), x)
    if powers is not None:
        return grouped(outside, _slope_of_powers(inside, x), decimals)
    out: Terms = ()
    for i, (base, exponent) in enumerate(inside.factors):
        others = Term(Fraction(1), inside.factors[:i] + inside.factors[i + 1 :])
        out += product(_chain(base, exponent, x), (others,))
    forms = _grouped(outside, out, decimals), product((outside,), collected(out, decimals))
    return min(forms, key=_weight)


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
    return _grouped(outer, inner, False) if exponent != 1 else inner


def _of_base(base: Node, x: str) -> Terms:
    match base:
        case Name(name=name) if name == x:
            return (UNIT,)
        case Bracket():
            return _of_bracket(base, x)
        case Call(arguments=(only,)):
            inner = merged(t for term in read(only) for t in _slope(term, x))
            return _grouped(as_term(read(_outer(base.function, only))), inner, False)
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


# --- limits and simpler forms -------------------------------------------------------------------------------


def limit(f: Node, x: str, a: Node, *, seconds: float | None = None) -> Node | None:
    """What f tends to from both sides of x = a; None where it is not known or differs."""

    def work() -> Terms:
        if depends_on(a, x):
            raise NoForm
        with suppress(NoForm):
            return _value_at(read(f), x, a)
        if not has_bracket(f, x):
            return collected(_asked("limit", read(f), x, a=a))
        sides = [_asked("limit", read(side), x, a=a) for side in _sides(f, x, a)]
        if any(expanded((*side, *scaled(sides[0], Fraction(-1)))) for side in sides[1:]):
            raise NoForm
        return collected(sides[0])

    return framed(work, (f, a), last=x, in_place=(a,), seconds=seconds, none=True)


def _value_at(terms: Terms, x: str, a: Node) -> Terms:
    """The value at the place itself, where nothing jumps or becomes 0 below a line there."""
    for term in terms:
        for base, exponent in term.factors:
            if holds(base, x) and (base != Name(x) and not _is_plain(base, exponent, x, a)):
                raise NoForm
            if base == Name(x) and exponent < 0 and sign(read(a)) in (0, None):
                raise NoForm
    return merged(u for t in terms for u in put((t,), x, a))


def _is_plain(base: Node, exponent: Fraction, x: str, a: Node) -> bool:
    """A polynomial, or a bracket that does not jump at the place."""
    if isinstance(base, Bracket) and exponent > 0:
        return bool(settled(put(read(base.inner), x, a))) or base.power > 0
    whole = exponent > 0 and exponent.denominator == 1
    return whole and not has_bracket(base, x) and polynomial(read(base), x) is not None


def _sides(f: Node, x: str, a: Node) -> list[Node]:
    """Without brackets: those at the place off and on; raises NoForm where one begins elsewhere."""
    out = []
    for on in (False, True):

        def change(node: Node, on: bool = on) -> Node | None:
            if not (isinstance(node, Bracket) and holds(node.inner, x)):
                return None
            inside = settled(put(read(node.inner), x, a))
            known = sign(inside)
            if known is None:
                raise NoForm
            live = on if known == 0 else known > 0
            return Binary("^", node.inner, Number(str(node.power))) if live else ZERO

        out.append(replaced(f, change))
    return out


def simplified(f: Node, *, seconds: float | None = None) -> Node:
    """A shorter form of the same, where there is one; brackets stay as they stand."""

    def work() -> Terms:
        terms = read(f)
        forms = [terms, settled(terms), collected(expanded(terms), decimals_in(f))]
        with suppress(NoForm):
            forms.append(_asked("simplified", terms, ""))
        return min(forms, key=_weight)

    found = framed(work, (f,), seconds=seconds, none=True)
    return f if found is None else found


def single_brackets(f: Node, x: str, *, seconds: float | None = None) -> Node:
    """Products of brackets, and powers of x beside them, as sums of single brackets.

    Raises AlgebraFailure where two brackets can't be brought together.
    """

    def work() -> Terms:
        out: Terms = ()
        for term in read(f):
            outside, inside = split(term, x)
            out += product((outside,), singles((inside,), x))
        return merged(out)

    try:
        found = framed(work, (f,), last=x, seconds=seconds)
    except NoForm:
        found = None
    if found is None:
        raise no_closed_form("the product of these brackets can't be written with single brackets")
    return found


def _asked(work: str, terms: Terms, x: str, **others: Node) -> Terms:
    """What SymPy finds."""
    book = Book((x,) if x else ())
    arguments = {"f": book.encode(write(terms)), **{k: book.encode(v) for k, v in others.items()}}
    answer = door.ask(work, **arguments)
    return book.decode(answer["form"] if work == "integrate" else answer)


def value_of(node: Node) -> Fraction | None:
    """The exact value of a tree of plain numbers, None for any other."""
    try:
        return as_number(read(node))
    except NoForm:
        return None

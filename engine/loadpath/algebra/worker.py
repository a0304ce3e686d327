"""The worker process: the only module that imports SymPy. Reads requests line by line, answers each.

Trees come as nested lists (see `wire`) and are built node by node, never from text. Every symbol is real and
nothing else is assumed of it. An antiderivative is differentiated and compared before it is answered.
"""

from __future__ import annotations

import json
import os
import signal
import sys
from queue import SimpleQueue
from threading import Thread
from typing import Any

MEMORY = 2 * 1024**3
"""Bytes that the worker may take."""
MOST_NODES = 20_000
MOST_BITS = 8000
DEEPEST = 4000
"""Frames on top of each other."""
GRACE = 2.0
"""Seconds after the limit at which a worker whose parent is gone ends itself."""

Wire = list[Any]


class TooLarge(Exception):
    """More than anybody could read."""


class NoForm(Exception):
    """No closed form in functions that a sheet has."""


MOST_ROOTS = 4
"""Degree of a polynomial whose roots can be written down."""


class Algebra:
    """SymPy, imported once, and what is asked of it."""

    def __init__(self) -> None:
        import sympy
        from sympy.core.cache import clear_cache

        self.s = sympy
        self.clear = clear_cache
        self.functions = {
            "exp": sympy.exp, "ln": sympy.log, "sin": sympy.sin, "cos": sympy.cos, "tan": sympy.tan,
            "sec": sympy.sec, "asin": sympy.asin, "acos": sympy.acos, "atan": sympy.atan, "sinh": sympy.sinh,
            "cosh": sympy.cosh, "tanh": sympy.tanh, "abs": sympy.Abs,
        }  # fmt: skip
        self.names = {f: name for name, f in self.functions.items()}
        self.over = {sympy.cot: "tan", sympy.csc: "sin", sympy.coth: "tanh", sympy.sech: "cosh",
                     sympy.csch: "sinh"}  # fmt: skip
        self.logs = (sympy.asinh, sympy.acosh, sympy.atanh, sympy.acoth)
        self.periodic = (sympy.sin, sympy.cos, sympy.tan, sympy.sec)

    def ready(self) -> bool:
        """The first answer: SymPy is loaded."""
        return True

    # --- wire ---

    def symbol(self, number: int) -> Any:
        """The symbol of a number; its name says nothing but that number."""
        return self.s.Symbol(f"s{number:04d}", real=True)

    def build(self, wire: Wire) -> Any:
        """The SymPy object of a wire."""
        s = self.s
        kind = wire[0]
        if kind == "n":
            return s.Rational(wire[1], wire[2])
        if kind == "s":
            return self.symbol(wire[1])
        if kind == "pi":
            return s.pi
        if kind == "+":
            return s.Add(*[self.build(w) for w in wire[1:]])
        if kind == "*":
            return s.Mul(*[self.build(w) for w in wire[1:]])
        if kind == "^":
            return self.power(self.build(wire[1]), self.build(wire[2]))
        return self.functions[wire[1]](self.build(wire[2]))

    def power(self, base: Any, exponent: Any) -> Any:
        """A power whose number can be held."""
        if base.is_Rational and exponent.is_Rational and base not in (0, 1, -1):
            bits = int(base.p).bit_length() + int(base.q).bit_length()
            if bits * abs(exponent) > MOST_BITS:
                raise TooLarge
        if exponent.is_Integer and abs(exponent) > 1000 and not base.is_Symbol:
            raise TooLarge
        out = base**exponent
        if out.has(self.s.zoo, self.s.nan):
            raise NoForm
        return out

    def wire(self, e: Any) -> Wire:
        """The wire of a SymPy object; raises NoForm where a sheet has no such function."""
        self.left = MOST_NODES
        return self._wire(e)

    def _wire(self, e: Any) -> Wire:
        s = self.s
        self.left -= 1
        if self.left < 0:
            raise TooLarge
        if e.is_Rational:
            if int(e.p).bit_length() + int(e.q).bit_length() > MOST_BITS:
                raise TooLarge
            return ["n", int(e.p), int(e.q)]
        if e.is_Symbol:
            return ["s", int(e.name[1:])]
        if e is s.pi:
            return ["pi"]
        if e is s.E:
            return ["e"]
        if e.is_Add or e.is_Mul:
            return ["+" if e.is_Add else "*", *[self._wire(a) for a in e.args]]
        if e.func is s.exp:
            return ["f", "exp", self._wire(e.args[0])]
        if e.is_Pow:
            return ["^", self._wire(e.base), self._wire(e.exp)]
        if e.func in self.names and len(e.args) == 1:
            return ["f", self.names[e.func], self._wire(e.args[0])]
        if e.func in self.over:
            return ["^", ["f", self.over[e.func], self._wire(e.args[0])], ["n", -1, 1]]
        if e.func in self.logs:
            return self._wire(e.rewrite(s.log))
        raise NoForm

    # --- values ---

    def value(self, e: Any, at: dict[Any, Any]) -> float | None:
        """A real number, or None."""
        try:
            # put in while evaluating: an exact power of a number put in first may never end
            number = complex(e.evalf(20, subs=at))
        except (TypeError, ValueError, OverflowError, ZeroDivisionError):
            return None
        small = abs(number.imag) <= 1e-9 * max(1.0, abs(number.real))
        return number.real if small and number.real - number.real == 0 else None

    def agree(self, a: Any, b: Any) -> bool:
        """True where two expressions have the same values wherever both have any."""
        symbols = sorted(a.free_symbols | b.free_symbols, key=lambda v: v.name)
        met = 0
        for trial in range(12):
            at = {}
            for i, v in enumerate(symbols):
                side = (-1) ** i if trial % 3 == 2 else 1
                at[v] = side * self.s.Rational(17 + (31 * (i + 1) * (trial + 2)) % 97, 41)
            one, two = self.value(a, at), self.value(b, at)
            if one is None or two is None:
                continue
            if abs(one - two) > 1e-8 * max(1.0, abs(one), abs(two)):
                return False
            met += 1
            if met == 4:
                break
        return met > 0

    def finite(self, e: Any) -> bool:
        """True for an expression that has a value."""
        s = self.s
        return not e.has(s.nan, s.zoo, s.oo, -s.oo, s.AccumBounds)

    # --- what is asked ---

    def antiderivative(self, f: Any, x: Any, quick: bool) -> Any:
        """An antiderivative that was differentiated and compared.

        `quick`: without the searches that may take long for nothing, where the integrand is no tame one.
        """
        s = self.s
        if quick and self.is_hopeless(f, x):
            raise NoForm
        slow = {"heurisch": self.is_tame(f, x), "meijerg": False} if quick else {}
        for form in dict.fromkeys((f, s.expand(f))):
            found = self.general(s.integrate(form, x, **slow))
            if found is None or found.has(s.Integral):
                continue
            self.wire(found)
            if self.agree(s.diff(found, x), f):
                return found
        raise NoForm

    def is_tame(self, f: Any, x: Any) -> bool:
        """True for polynomials, one exponential or wave of something linear, and their quotients by
        polynomials: what the general search settles soon."""
        s, functions = self.s, set()
        for node in s.preorder_traversal(f):
            if not node.has(x):
                continue
            if node.is_Pow:
                polynomial = node.base.is_polynomial(x)
                if not node.exp.is_Integer or (node.exp.is_negative and not polynomial):
                    return False
            elif node.is_Function:
                functions.add(node)
                if not (node.args[0].is_polynomial(x) and s.degree(node.args[0], x) <= 1):
                    return False
        return len(functions) <= 1

    def is_hopeless(self, f: Any, x: Any) -> bool:
        """True for a quotient by a polynomial whose roots cannot be written down."""
        s = self.s
        under = (n.base for n in s.preorder_traversal(f) if n.is_Pow and n.exp.is_negative)
        return any(b.is_polynomial(x) and s.degree(b, x) > MOST_ROOTS for b in under if b.has(x))

    def general(self, e: Any) -> Any | None:
        """The branch that holds in general: for names that differ and aren't 0."""
        s = self.s
        while e.has(s.Piecewise):
            piecewise = min(e.atoms(s.Piecewise), key=s.default_sort_key)
            chosen = None
            for value, condition in piecewise.args:
                if condition is s.true or self.is_general(condition):
                    chosen = value
                    break
                if not (isinstance(condition, s.Eq) or (isinstance(condition, (s.And, s.Or)) and
                        all(isinstance(a, (s.Eq, s.Ne)) for a in condition.args))):  # fmt: skip
                    return None
            if chosen is None:
                return None
            e = e.subs(piecewise, chosen)
        return e

    def is_general(self, condition: Any) -> bool:
        s = self.s
        if isinstance(condition, s.Ne):
            return True
        joined = isinstance(condition, (s.And, s.Or))
        return joined and all(isinstance(a, s.Ne) for a in condition.args)

    def integrate(self, f: Wire, **_: Any) -> Any:
        """An antiderivative and its value at 0, None where it has none."""
        x = self.symbol(0)
        found = self.antiderivative(self.build(f), x, quick=False)
        at_zero = self.at(found, x, self.s.Integer(0))
        return {"form": self.wire(found), "at_zero": None if at_zero is None else self.wire(at_zero)}

    def at(self, e: Any, x: Any, place: Any) -> Any | None:
        """The value at a place, as a limit where it has to be."""
        s = self.s
        value = e.subs(x, place)
        if self.finite(value):
            return value
        try:
            value = s.limit(e, x, place, "+")
        except (NotImplementedError, ValueError, TypeError):
            return None
        return value if self.finite(value) and not value.has(s.Limit, s.I) else None

    def definite(self, f: Wire, a: Wire, b: Wire) -> Wire:
        """F(b) - F(a), written shortly."""
        x = self.symbol(0)
        found = self.antiderivative(self.build(f), x, quick=True)
        ends = [self.at(found, x, self.build(w)) for w in (a, b)]
        if ends[0] is None or ends[1] is None:
            raise NoForm
        return self.wire(self.shortest(ends[1] - ends[0]))

    def limit(self, f: Wire, a: Wire) -> Wire:
        """The limit from both sides, compared with values close by."""
        s = self.s
        x, e, place = self.symbol(0), self.build(f), self.build(a)
        value = e.subs(x, place)
        if not self.finite(value):
            try:
                value = s.limit(e, x, place, "+-")
            except (NotImplementedError, ValueError, TypeError):
                raise NoForm from None
        if not self.finite(value) or value.has(s.Limit, s.I):
            raise NoForm
        if not self.is_near(e, x, place, value):
            raise NoForm
        return self.wire(self.shortest(value))

    def is_near(self, e: Any, x: Any, place: Any, value: Any) -> bool:
        """True where the expression just beside the place has about that value."""
        s = self.s
        symbols = sorted((e.free_symbols | value.free_symbols) - {x}, key=lambda v: v.name)
        at = {v: s.Rational(23 + 7 * i, 20) for i, v in enumerate(symbols)}
        known, middle = self.value(value, at), self.value(place, at)
        if known is None or middle is None:
            return True
        for beside in (1e-6, -1e-6):
            number = self.value(e, {**at, x: s.Float(middle + beside, 30)})
            if number is not None and abs(number - known) > 1e-3 * max(1.0, abs(known)):
                return False
        return True

    def simplified(self, f: Wire) -> Wire:
        """The shortest of several forms that has the same values."""
        e = self.build(f)
        shortest = self.shortest(e)
        return self.wire(shortest if self.agree(shortest, e) else e)

    def shortest(self, e: Any) -> Any:
        """Of several ways to write it the one with the fewest operations."""
        s = self.s
        forms = [s.factor(s.cancel(s.together(e))) if not e.has(s.Abs) else s.factor_terms(e)]
        forms += [s.factor_terms(e), e]
        if e.atoms(s.Function) or any(not p.exp.is_Integer for p in e.atoms(s.Pow)):
            forms.insert(0, s.simplify(e))
            forms.append(s.trigsimp(e))
        usable = []
        for form in forms:
            try:
                self.wire(form)
                usable.append(form)
            except NoForm:
                continue
        if not usable:
            raise NoForm
        return min(usable, key=s.count_ops)

    def linear(self, equations: list[Wire], unknowns: list[int]) -> list[Wire]:
        """The values of the unknowns of a linear system that is regular in symbols."""
        s = self.s
        names = [self.symbol(u) for u in unknowns]
        sides = [s.fraction(s.together(self.build(w)))[0] for w in equations]
        try:
            matrix, right = s.linear_eq_to_matrix(sides, *names)
        except (s.solvers.solveset.NonlinearError, ValueError):
            raise NoForm from None
        found = s.linsolve((matrix, right), *names)
        if not isinstance(found, s.FiniteSet) or len(found) != 1:
            raise NoForm
        values = next(iter(found))
        if any(set(names) & v.free_symbols for v in values):
            raise NoForm
        return [self.wire(self.shortest(v)) for v in values]

    def factors(self, f: Wire) -> list[list[Wire]] | None:
        """Coefficients, highest first, of the factors that hold the variable; None where it is no polynomial.

        A number of a factor's coefficients is taken out, so that they are whole numbers in all.
        """
        s = self.s
        x = self.symbol(0)
        over = s.fraction(s.together(self.build(f)))[0]
        if s.expand(over) == 0:
            raise NoForm
        others = sorted(over.free_symbols - {x}, key=lambda v: v.name)
        try:
            polynomial = s.Poly(over, x, *others)
            if any(g not in (x, *others) for g in polynomial.gens):
                return None
            parts = polynomial.factor_list()[1]
        except s.PolynomialError:
            parts = self.loose_factors(over, x)
            if parts is None:
                return None
        out = []
        for part, _ in parts:
            coefficients = s.Poly(part.as_expr(), x).all_coeffs()
            if len(coefficients) > 1:
                out.append([self.wire(s.factor_terms(c)) for c in coefficients])
        return out

    def loose_factors(self, over: Any, x: Any) -> Any:
        """A polynomial in x whose coefficients hold roots and functions."""
        s = self.s
        try:
            polynomial = s.Poly(over, x)
        except s.PolynomialError:
            return None
        if any(c.has(x) for c in polynomial.all_coeffs()):
            return None
        return [(polynomial, 1)]

    def solve(self, f: Wire) -> list[Wire]:
        """Every root of an equation that isn't polynomial."""
        s = self.s
        x, e = self.symbol(0), self.build(f)
        if any(g.has(x) for g in e.atoms(*self.periodic)) or not e.has(x):
            raise NoForm
        try:
            found = s.solve(e, x, check=False)
        except (NotImplementedError, ValueError, TypeError):
            raise NoForm from None
        out = []
        for root in found:
            form = self.general(root)
            if form is None:
                raise NoForm
            if form.has(s.I):
                if self.value(form, {}) is None and not form.free_symbols:
                    continue
                raise NoForm
            out.append(self.wire(self.shortest(form)))
        return out

    def real_roots(self, coefficients: list[list[int]]) -> list[float]:
        """The real roots of a polynomial with rational coefficients, highest power first, rising."""
        s = self.s
        x = s.Symbol("x")
        numbers = [s.Rational(p, q) for p, q in coefficients]
        polynomial = s.Poly(numbers, x, domain=s.QQ).sqf_part()
        return [self.narrow(polynomial, a, b) for (a, b), _ in polynomial.intervals()]

    def narrow(self, polynomial: Any, a: Any, b: Any) -> float:
        """The double next to the one root between a and b."""
        s = self.s
        width = abs(b - a)
        while a != b and float(a) != float(b):
            width = width / 2**20
            a, b = polynomial.refine_root(a, b, eps=width)
            low, high = float(a), float(b)
            if abs(high - low) <= 1e-16 * max(abs(low), abs(high)):
                break
        return float((s.Rational(a) + s.Rational(b)) / 2)


def bounded() -> None:
    """A limit on memory, where the platform has one."""
    try:
        import resource

        resource.setrlimit(resource.RLIMIT_AS, (MEMORY, MEMORY))
        resource.setrlimit(resource.RLIMIT_CORE, (0, 0))
    except (ImportError, ValueError, OSError):
        pass


def last_moment(seconds: float) -> None:
    """Ends this process after its time even where nobody is left to end it."""
    if hasattr(signal, "setitimer"):
        signal.signal(signal.SIGALRM, signal.SIG_DFL)
        signal.setitimer(signal.ITIMER_REAL, seconds + GRACE if seconds else 0)


def read_requests(requests: SimpleQueue[bytes]) -> None:
    """Passes requests on; the parent's end is this process's end, whatever it is working at."""
    for line in sys.stdin.buffer:
        requests.put(line)
    os._exit(0)


def answer(algebra: Algebra, line: bytes) -> dict[str, Any]:
    """The reply to one request."""
    request = json.loads(line)
    work = getattr(algebra, request.pop("work"))
    last_moment(request.pop("seconds"))
    algebra.clear()
    try:
        return {"fault": "", "answer": work(**request)}
    except (TooLarge, RecursionError, MemoryError, OverflowError):
        return {"fault": "too-large"}
    except Exception:
        # a fault inside SymPy: no form that could be believed
        return {"fault": "no-form"}
    finally:
        last_moment(0)


def main() -> None:
    """Answers until the parent ends."""
    bounded()
    sys.setrecursionlimit(DEEPEST)
    out = os.fdopen(os.dup(sys.stdout.fileno()), "wb")
    sys.stdout = sys.stderr
    requests: SimpleQueue[bytes] = SimpleQueue()
    Thread(target=read_requests, args=(requests,), daemon=True).start()
    algebra = Algebra()
    while True:
        out.write(json.dumps(answer(algebra, requests.get())).encode() + b"\n")
        out.flush()


if __name__ == "__main__":
    main()

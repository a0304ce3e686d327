"""Functions that look at a whole expression, or at a whole column of a table, rather than at one value."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Special:
    """A function that is worked by rules of its own."""

    name: str
    forms: tuple[str, ...]
    """How it is called, one form for each number of arguments it takes: `integral(f, x, a, b)`."""
    example: str
    """Formula lines that a test reads, with the value of `x`: `x = sum(k^2, k, 1, 3) | 14`."""

    @property
    def counts(self) -> tuple[int, ...]:
        """The numbers of arguments it takes."""
        return tuple(form.count(",") + 1 for form in self.forms)


CALCULUS = (
    Special("integral", ("integral(f, x)", "integral(f, x, a, b)"), "x = integral(t^2, t, 0, 3 m) | 9 m^3"),
    Special("derivative", ("derivative(f, x)",), "f(t [m]) = derivative(t^2, t); x = f(3 m) | 6 m"),
    Special("limit_of", ("limit_of(f, x, a)",), "x = limit_of(sin(t)/t, t, 0) | 1"),
    Special("simplified", ("simplified(f)",), "f(t [m]) = simplified(t*t/t); x = f(3 m) | 3 m"),
)
EXTREMES = (
    Special("largest", ("largest(f, x, a, b)",), "x = largest(t*(4 m - t), t, 0 m, 4 m) | 4 m^2"),
    Special("smallest", ("smallest(f, x, a, b)",), "x = smallest(t*(4 m - t), t, 0 m, 3 m) | 0 m^2"),
    Special(
        "where_largest", ("where_largest(f, x, a, b)",), "x = where_largest(t*(4 m - t), t, 0 m, 4 m) | 2 m"
    ),
    Special("where_smallest", ("where_smallest(f, x, a, b)",), "x = where_smallest(t^2, t, -1 m, 2 m) | 0 m"),
)
COLUMNS = (
    Special("sum", ("sum(column)", "sum(f, k, m, n)"), "x = sum(k^2, k, 1, 3) | 14"),
    Special("count", ("count(column)",), "x = count(demo.a) | 3"),
    Special(
        "interp", ("interp(x, xs, ys)", "interp(x, y, table)"), "x = interp(15 mm, demo.a, demo.b) | 3 kN"
    ),
    Special("lookup", ("lookup(x, xs, ys)",), "x = lookup(15 mm, demo.a, demo.b) | 2 kN"),
)
EXAMPLE_TABLE = """\
Table demo: what the examples look up

| row | a [mm] | b [kN] |
|-----|--------|--------|
| one | 10 | 2 |
| two | 20 | 4 |
| three | 30 | 5 |
"""
"""The table that the examples of `COLUMNS` use."""

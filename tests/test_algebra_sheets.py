"""Whole sheets with algebra, columns and pictures, made at random, against numpy and against themselves.

Few examples each: every sheet goes through all stages. The cases made by hand stand in tests/cases and
"""

from __future__ import annotations

import math
import os
import subprocess
import sys
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

import loadpath
from loadpath.trace import Step, Trace

FEW = settings(max_examples=8, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.too_slow])
SOME = settings(
    max_examples=20, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.too_slow]
)


def evaluated(body: str, front: str = "") -> Trace:
    """The trace of a sheet without errors; lines of formulas are indented here."""
    trace = loadpath.evaluate(loadpath.read_text(f"---\ntitle: T\n{front}---\n\n{body}\n"))
    assert [f.message for f in trace.findings if f.severity == "error"] == []
    return trace


def lines(*texts: str) -> str:
    return "".join(f"    {text}\n" for each in texts for text in each.splitlines())


def si(trace: Trace, id: str) -> float:
    value = trace[id].si
    assert isinstance(value, float)
    return value


def column(trace: Trace, id: str) -> tuple[float, ...]:
    value = trace[id].si
    assert isinstance(value, tuple)
    return value


# --- integrals and derivatives ------------------------------------------------------------------------------

tenths = st.integers(-40, 40).map(lambda n: n / 10)
places = st.integers(1, 49).map(lambda n: n / 10)


def signed(number: float, unit: str) -> str:
    return f"{'-' if number < 0 else '+'} {abs(number)} {unit}"


@st.composite
def loads(draw: st.DrawFn) -> tuple[str, list[float]]:
    """A load along a beam of 5 m, kN/m, with brackets, and the places of its jumps."""
    w_0, slope = draw(tenths), draw(tenths)
    text = f"{w_0} kN/m {signed(slope, 'kN/m^2')} * x"
    starts = draw(st.lists(places, max_size=3, unique=True))
    for start in starts:
        power = draw(st.integers(0, 2))
        unit = ("kN/m", "kN/m^2", "kN/m^3")[power]
        text += f" {signed(draw(tenths), unit)} * <x - {start} m>^{power}"
    return text.replace("-0.0", "0.0") if text.startswith("-0.0") else text, starts


def away_from(jumps: list[float]) -> list[float]:
    """Places between 0 and 5 m that are no jump."""
    return [x for x in (0.05, 0.77, 1.83, 2.61, 3.45, 4.96) if all(abs(x - j) > 0.01 for j in jumps)]


@FEW
@given(loads())
def test_the_derivative_of_the_integral_gives_the_function_back(load: tuple[str, list[float]]) -> None:
    text, jumps = load
    at = away_from(jumps)
    trace = evaluated(
        lines(
            f"q(x [m]) [kN/m] = {text}",
            "V(x [m]) [kN] = integral(q(x), x)",
            "M(x [m]) [kN*m] = integral(V(x), x)",
            "back(x [m]) [kN] = derivative(M(x), x)",
            "again(x [m]) [kN/m] = derivative(back(x), x)",
            *(
                f"q_{i} = q({x} m)\nq_{i}' = again({x} m)\nV_{i} = V({x} m)\nV_{i}' = back({x} m)"
                for i, x in enumerate(at)
            ),
        )
    )
    for i in range(len(at)):
        assert si(trace, f"q_{i}'") == pytest.approx(si(trace, f"q_{i}"), rel=1e-9, abs=1e-6)
        assert si(trace, f"V_{i}'") == pytest.approx(si(trace, f"V_{i}"), rel=1e-9, abs=1e-6)


@FEW
@given(loads(), places, places)
def test_a_definite_integral_is_the_difference_of_the_antiderivative(
    load: tuple[str, list[float]], a: float, b: float
) -> None:
    text, _ = load
    trace = evaluated(
        lines(
            f"q(x [m]) [kN/m] = {text}",
            "V(x [m]) [kN] = integral(q(x), x)",
            f"A = V({b} m) - V({a} m)",
            f"B = integral(q(x), x, {a} m, {b} m)",
            "part(t [m]) [kN] = integral(q(x), x, 0 m, t)",
            f"C = part({b} m) - part({a} m)",
        )
    )
    assert si(trace, "B") == pytest.approx(si(trace, "A"), rel=1e-9, abs=1e-6)
    assert si(trace, "C") == pytest.approx(si(trace, "A"), rel=1e-9, abs=1e-6)


@FEW
@given(loads(), loads())
def test_the_integral_of_a_product_of_brackets_agrees_with_points(
    one: tuple[str, list[float]], other: tuple[str, list[float]]
) -> None:
    """source: numpy's Gauss points between the jumps."""
    trace = evaluated(
        lines(
            f"p(x [m]) [kN/m] = {one[0]}",
            f"q(x [m]) [kN/m] = {other[0]}",
            "U [kN^2/m] = integral(p(x)*q(x), x, 0 m, 5 m)",
            "W(t [m]) [kN^2/m] = integral(p(x)*q(x), x, 0 m, t)",
            "U_t [kN^2/m] = W(5 m)",
        )
    )
    cuts = sorted({0.0, 5.0, *one[1], *other[1]})
    total = sum(_gauss(one[0], other[0], a, b) for a, b in pairwise(cuts))
    assert si(trace, "U") == pytest.approx(total * 1e6, rel=1e-9, abs=1e-3)
    assert si(trace, "U_t") == pytest.approx(total * 1e6, rel=1e-9, abs=1e-3)


def _gauss(one: str, other: str, a: float, b: float) -> float:
    nodes, weights = np.polynomial.legendre.leggauss(6)
    xs = (a + b) / 2 + (b - a) / 2 * nodes
    return float(
        sum(w * _worked(one, x) * _worked(other, x) for w, x in zip(weights, xs, strict=True)) * (b - a) / 2
    )


def _worked(text: str, x: float) -> float:
    """A load of `loads` in kN/m at a place in metres."""
    import re

    total = 0.0
    for sign, number, rest in re.findall(
        r"([-+]?) ?(\d+\.\d+) kN/m(?:\^\d)?((?: \* x)|(?: \* <x - [\d.]+ m>\^\d)|)", text
    ):
        value = float(number) * (-1 if sign == "-" else 1)
        if rest == " * x":
            value *= x
        elif rest:
            start, power = re.fullmatch(r" \* <x - ([\d.]+) m>\^(\d)", rest).groups()  # type: ignore[union-attr]
            value *= (x - float(start)) ** int(power) if x > float(start) else 0.0
        total += value
    return total


# --- solutions put back -------------------------------------------------------------------------------------

UNITS = {"force": ("kN", "N", "kip", "lbf"), "moment": ("kN*m", "N*m", "kip*ft", "lbf*in")}


@st.composite
def systems(draw: st.DrawFn) -> tuple[str, int]:
    """Equilibrium of forces and moments with mixed units, diagonal enough to be regular."""
    n = draw(st.integers(2, 8))
    kinds = [draw(st.sampled_from(["force", "moment"])) for _ in range(n)]
    names = [f"{'F' if kind == 'force' else 'M'}_{i}" for i, kind in enumerate(kinds)]
    arm = draw(st.sampled_from(["3 m", "250 mm", "7 ft", "18 in"]))
    rows = []
    for i, kind in enumerate(kinds):
        terms = []
        for j, other in enumerate(kinds):
            size = draw(st.integers(-3, 3)) + (17 if i == j else 0)
            bring = "" if kind == other else "*a" if kind == "moment" else "/a"
            terms.append(f"{'-' if size < 0 else '+'} {abs(size)}*{names[j]}{bring}")
        unit = draw(st.sampled_from(UNITS[kind]))
        left = " ".join(terms).removeprefix("+ ")
        rows.append(f"    {left} = {draw(st.integers(-50, 50))} {unit}")
    sought = ", ".join(f"{n} [{draw(st.sampled_from(UNITS[k]))}]" for n, k in zip(names, kinds, strict=True))
    return lines(f"a = {arm} -- arm", f"solve for {sought}", *rows), n


@SOME
@given(systems())
def test_linear_systems_put_back(system: tuple[str, int]) -> None:
    body, n = system
    trace = evaluated(body)
    solved = [s.solved for s in trace if s.kind == "solution"]
    assert len(solved) == n
    for each in solved[-1].put_back:  # type: ignore[union-attr]
        assert each.close
        assert abs(each.left - each.right) <= 1e-12 * each.size


@SOME
@given(
    st.integers(-300, 300),
    st.integers(1, 300),
    st.sampled_from(["mm", "in", "m"]),
    st.integers(1, 9),
    st.booleans(),
)
def test_quadratic_equations_put_back(first: int, apart: int, unit: str, lead: int, upper: bool) -> None:
    """Both roots are known; bounds pick one; the other is named with its reason."""
    r, s = first / 10, (first + apart) / 10
    low, high = ((r + s) / 2, s + 1.0) if upper else (r - 1.0, (r + s) / 2)
    trace = evaluated(
        lines(
            f"r = {r} {unit} -- one root",
            f"s = {s} {unit} -- the other",
            f"solve for x [{unit}] between {low} {unit} and {high} {unit}",
            f"    {lead}*x^2 - {lead}*(r + s)*x + {lead}*r*s = 0",
        )
    )
    found = trace["x"].value
    assert found == pytest.approx(s if upper else r, rel=1e-9, abs=1e-9)
    solved = trace["x"].solved
    assert solved is not None
    assert [each.close for each in solved.put_back] == [True]
    assert all(abs(p.left - p.right) <= 1e-12 * p.size for p in solved.put_back)
    assert len(solved.others) == 1


# --- extremes and pictures ----------------------------------------------------------------------------------


@FEW
@given(loads())
def test_plotted_extremes_are_those_of_largest_and_smallest(load: tuple[str, list[float]]) -> None:
    text, _ = load
    trace = evaluated(
        lines(
            f"q(x [m]) [kN/m] = {text}",
            "V(x [m]) [kN] = 10 kN - integral(q(x), x)",
            "M(x [m]) [kN*m] = integral(V(x), x)",
            *(
                f"{f}_{end} = {end}({f}(x), x, 0 m, 5 m)\nx_{f}_{end} [m] = where_{end}({f}(x), x, 0 m, 5 m)"
                for f in "qVM"
                for end in ("largest", "smallest")
            ),
            "plot q(x) for x from 0 m to 5 m",
            "plot V(x), M(x) for x from 0 m to 5 m",
        )
    )
    drawn = [c for s in trace if s.curves is not None for c in s.curves.curves]
    for name, curve in zip("qVM", drawn, strict=True):
        assert curve.largest is not None and curve.smallest is not None
        size = max(abs(curve.largest.y), abs(curve.smallest.y), 1e-9)
        for spot, end, best in ((curve.largest, "largest", max), (curve.smallest, "smallest", min)):
            assert spot.y == pytest.approx(si(trace, f"{name}_{end}"), rel=1e-12, abs=1e-9 * size)
            assert best(y for _, y in curve.points) == pytest.approx(spot.y, rel=1e-9, abs=1e-9 * size)
            where = si(trace, f"x_{name}_{end}")
            assert any(
                x == pytest.approx(where, abs=1e-9) and y == pytest.approx(spot.y, abs=1e-9 * size)
                for x, y in curve.points
            )


@FEW
@given(loads())
def test_extremes_agree_with_many_points(load: tuple[str, list[float]]) -> None:
    """source: numpy, 5 001 points and both sides of each jump."""
    text, jumps = load
    trace = evaluated(
        lines(
            f"q(x [m]) [kN/m] = {text}",
            "a = largest(q(x), x, 0 m, 5 m)",
            "b = smallest(q(x), x, 0 m, 5 m)",
        )
    )
    beside = [j + e for j in jumps for e in (-1e-9, 1e-9)]
    seen = [_worked(text, x) * 1e3 for x in (*np.linspace(0, 5, 5001), *beside)]
    assert si(trace, "a") >= max(seen) - 1e-3
    assert si(trace, "a") == pytest.approx(max(seen), rel=1e-3, abs=0.05)
    assert si(trace, "b") == pytest.approx(min(seen), rel=1e-3, abs=0.05)


# --- columns ------------------------------------------------------------------------------------------------

numbers = st.integers(1, 999).map(lambda n: n / 10)


@st.composite
def tables(draw: st.DrawFn) -> list[tuple[float, float, float]]:
    return draw(st.lists(st.tuples(numbers, numbers, numbers), min_size=1, max_size=7))


def table(rows: list[tuple[float, float, float]]) -> str:
    body = "".join(f"| row {i} | {b} | {h} | {w} |\n" for i, (b, h, w) in enumerate(rows))
    return f"\nTable t: some rows\n\n| row | b [mm] | h [in] | w |\n|---|---|---|---|\n{body}\n"


FORMULAS = (
    "{b}*{h}^3/12 + {w}*k*{b}^3*{h}",
    "sqrt({b}^2 + {h}^2)*max({w}, 3)",
    "min({b}, {h}, k*20 mm) / (1 + {w})",
    "k*{b} - {h}*sin({w} * 1 deg)",
)


@SOME
@given(tables(), st.sampled_from(FORMULAS))
def test_a_column_is_the_same_formula_typed_for_each_row(
    rows: list[tuple[float, float, float]], formula: str
) -> None:
    typed = [formula.format(b=f"({b} mm)", h=f"({h} in)", w=str(w)) for b, h, w in rows]
    trace = evaluated(
        table(rows)
        + lines(
            "k = 2.5 -- factor",
            f"y = {formula.format(b='t.b', h='t.h', w='t.w')}",
            *(f"y_{i} = {each}" for i, each in enumerate(typed)),
            *(f'z_{i} = y at "row {i}"' for i in range(len(rows))),
        )
    )
    for i in range(len(rows)):
        assert column(trace, "y")[i] == pytest.approx(si(trace, f"y_{i}"), rel=1e-12)
        assert si(trace, f"z_{i}") == column(trace, "y")[i]
    assert [row.label for row in trace["y"].rows] == [f"row {i}" for i in range(len(rows))]


@SOME
@given(tables())
def test_sum_count_min_and_max_of_a_column_agree_with_numpy(rows: list[tuple[float, float, float]]) -> None:
    trace = evaluated(
        table(rows)
        + lines(
            "A = sum(t.b*t.h)",
            "n = count(t.b)",
            "low = min(t.b - t.h)",
            "high = max(t.b - t.h)",
            "S = sum(t.w)/count(t.w)",
        )
    )
    b, h, w = (np.array(column) for column in zip(*rows, strict=True))
    b, h = b * 1e-3, h * 0.0254
    assert si(trace, "A") == pytest.approx(float(np.sum(b * h)), rel=1e-12)
    assert si(trace, "n") == len(rows)
    assert si(trace, "low") == pytest.approx(float(np.min(b - h)), rel=1e-12, abs=1e-15)
    assert si(trace, "high") == pytest.approx(float(np.max(b - h)), rel=1e-12, abs=1e-15)
    assert si(trace, "S") == pytest.approx(float(np.mean(w)), rel=1e-12)


@SOME
@given(
    st.lists(st.integers(0, 500), min_size=2, max_size=8, unique=True).map(sorted),
    st.data(),
    st.booleans(),
)
def test_interp_and_lookup_agree_with_numpy(xs: list[int], data: st.DataObject, falling: bool) -> None:
    ys = data.draw(st.lists(st.integers(-99, 99), min_size=len(xs), max_size=len(xs)))
    at = data.draw(st.integers(xs[0] * 10, xs[-1] * 10)) / 10
    order = reversed(range(len(xs))) if falling else range(len(xs))
    body = "".join(f"| {xs[i]} | {ys[i]} |\n" for i in order)
    trace = evaluated(
        f"\nTable t: points\n\n| x [mm] | y [kN] |\n|---|---|\n{body}\n"
        + lines(
            f"x = {at} mm -- place",
            "a = interp(x, t.x, t.y)",
            *(() if falling else ("b = lookup(x, t.x, t.y)",)),
        )
    )
    assert si(trace, "a") == pytest.approx(float(np.interp(at, xs, ys)) * 1e3, rel=1e-9, abs=1e-9)
    if not falling:
        assert si(trace, "b") == ys[int(np.searchsorted(xs, at, side="right")) - 1] * 1e3


@FEW
@given(
    st.lists(st.integers(0, 50), min_size=2, max_size=4, unique=True).map(sorted),
    st.lists(st.integers(0, 50), min_size=2, max_size=4, unique=True).map(sorted),
    st.data(),
)
def test_interp_two_way_agrees_with_scipy(xs: list[int], ys: list[int], data: st.DataObject) -> None:
    """source: scipy.interpolate.RegularGridInterpolator."""
    from scipy.interpolate import RegularGridInterpolator

    cells = [[data.draw(st.integers(-99, 99)) for _ in ys] for _ in xs]
    x = data.draw(st.integers(xs[0] * 10, xs[-1] * 10)) / 10
    y = data.draw(st.integers(ys[0] * 10, ys[-1] * 10)) / 10
    head = "| x [m] | " + " | ".join(f"{y} mm" for y in ys) + " |\n" + "|---" * (len(ys) + 1) + "|\n"
    body = "".join(
        f"| {x} | " + " | ".join(f"{c} kN" for c in row) + " |\n" for x, row in zip(xs, cells, strict=True)
    )
    trace = evaluated(f"\nTable w: two ways\n\n{head}{body}\n" + lines(f"a = interp({x} m, {y} mm, w)"))
    expected = float(RegularGridInterpolator((xs, ys), np.array(cells, float))((x, y)))
    assert si(trace, "a") == pytest.approx(expected * 1e3, rel=1e-9, abs=1e-6)


RELATIONS = (
    "{b} <= {h}",
    "2 mm <= {b} <= {h}",
    "{h} >= {b}",
    "{b} < {h} or {b} >= 3*{h}",
    "-{h} <= {b} - 30 mm <= {h}",
)


@SOME
@given(tables(), st.sampled_from(RELATIONS))
def test_a_criterion_on_columns_is_the_worst_of_the_single_ones(
    rows: list[tuple[float, float, float]], relation: str
) -> None:
    trace = evaluated(
        table(rows)
        + lines(
            f"limit all: {relation.format(b='t.b', h='t.h')}",
            *(
                f"limit row-{i}: {relation.format(b=f'{b} mm', h=f'{h} in')}"
                for i, (b, h, _) in enumerate(rows)
            ),
        )
    )
    together = trace["limit all"]
    single = [trace[f"limit row-{i}"] for i in range(len(rows))]
    assert [same(row.verdict, one) for row, one in zip(together.rows, single, strict=True)] == [True] * len(
        rows
    )
    verdict, governing = together.verdict, together.governing
    assert verdict is not None and governing is not None
    assert verdict.satisfied is all(s.verdict.satisfied for s in single)  # type: ignore[union-attr]
    ratios = [s.verdict.utilisation for s in single]  # type: ignore[union-attr]
    known = [r for r in ratios if r is not None]
    if len(known) == len(ratios):
        assert verdict.utilisation == pytest.approx(max(known), rel=1e-12)
        assert ratios[governing] == pytest.approx(max(known), rel=1e-12)
    if not verdict.satisfied:
        assert single[governing].verdict.satisfied is False  # type: ignore[union-attr]


def same(verdict: object, step: Step) -> bool:
    other = step.verdict
    assert other is not None
    ours = getattr(verdict, "utilisation", None)
    near = ours == other.utilisation or math.isclose(ours, other.utilisation, rel_tol=1e-12)  # type: ignore[arg-type]
    return near and getattr(verdict, "satisfied", None) is other.satisfied


# --- same input, same bytes ---------------------------------------------------------------------------------

WHOLE = """---
title: Everything at once
sources: {s: A source}
---

Table plates: what the section is made of [s]

| plate | b [mm] | h [mm] | z [mm] |
|-------|--------|--------|--------|
| foot  | 120    | 12     | 6      |
| web   | 8      | 200    | 112    |
| head  | 90     | 10     | 217    |

    A = plates.b*plates.h
    z_S = sum(A*plates.z)/sum(A)
    I = sum(plates.b*plates.h^3/12 + A*(plates.z - z_S)^2)
    L = 4 m -- span [s]
    a = 1.5 m -- place of the load [s]
    P = 20 kN -- load [s]
    w = 3 kN/m -- load by length [s]
    E = 210 GPa -- steel [s]
    unknown R_A [kN], R_B [kN], C_1 [rad]
    V(x [m]) [kN] = R_A - w*x - P*<x - a>^0
    M(x [m]) [kN*m] = integral(V(x), x)
    theta(x [m]) [rad] = C_1 - integral(M(x), x)/(E*I)
    v(x [m]) [mm] = integral(theta(x), x)
    solve for R_A, R_B, C_1
        M(L) = 0
        V(L) = -R_B
        v(L) = 0
    solve for x_0 [m] between 0 m and a
        M(x_0) = 9 kN*m
    U [J] = integral(M(x)^2, x, 0 m, L)/(2*E*I)
    s [m] = integral(exp(sin(x/L)), x, 0 m, L)
    v_max = largest(v(x), x, 0 m, L)
    sigma = largest(M(x), x, 0 m, L)*(plates.z - z_S)/I
    strength fibres: abs(sigma) <= 235 MPa -- [s]
    plot V(x), M(x) for x from 0 m to L
    tabulate v(x), theta(x) for x from 0 m to L, 8 steps
"""

ISSUE = "import sys; import loadpath; loadpath.issue(sys.argv[1], sys.argv[2])"


def run(code: str, *arguments: str, seed: str = "0") -> str:
    """What a fresh process says."""
    root = Path(loadpath.__file__).parents[1]
    environment = {**os.environ, "PYTHONHASHSEED": seed, "PYTHONPATH": str(root)}
    done = subprocess.run(
        [sys.executable, "-c", code, *arguments], capture_output=True, text=True, env=environment, check=False
    )
    assert done.returncode == 0, done.stderr
    return done.stdout


def test_the_same_bytes_under_any_hash_seed(tmp_path: Path) -> None:
    sheet = tmp_path / "whole.sheet.md"
    sheet.write_text(WHOLE, encoding="utf-8")
    made = []
    for seed in ("0", "1", "4711"):
        out = tmp_path / seed
        run(ISSUE, str(sheet), str(out), seed=seed)
        made.append({path.name: path.read_bytes() for path in out.iterdir()})
    assert {"whole.html", "whole.md", "whole.trace.json"} < set(made[0])
    assert any(name.endswith(".svg") for name in made[0])
    assert made[0] == made[1] == made[2]
    assert not loadpath.evaluate(loadpath.read(sheet)).has_errors


# --- packages are loaded when they are first needed ---------------------------------------------------------

WITHOUT = """
import sys
for name in sys.argv[2].split():
    sys.modules[name] = None  # as if it were not installed
import loadpath
from loadpath.pipeline import audited, render
trace = audited(loadpath.read_text(sys.argv[1], "x.sheet.md"))
assert not trace.has_errors, [f.message for f in trace.findings]
render(trace, "x")
parts = ("sympy", "mpmath", "scipy.optimize", "scipy.integrate", "matplotlib")
print(*(name for name in parts if sys.modules.get(name)))
"""

HEAVY = "sympy mpmath numpy scipy matplotlib"

HEAD = "---\ntitle: T\n---\n\n"
PLAIN = HEAD + lines(
    "P = 3 kN -- p",
    "A = 20 mm^2 -- a",
    "M(x [m]) = P*x",
    "s = P/A + M(2 m)/(2 m * A)",
    "strength: s <= 900 MPa",
)
ROWS = (
    HEAD
    + table([(1, 2, 3), (4, 5, 6)])
    + lines("A = sum(t.b*t.h)", "u = lookup(4, t.w, t.b)", "limit: t.b <= 9 mm")
)
ANTIDERIVATIVE = PLAIN + lines("f(x [m]) = integral(M(x), x)", "y = f(2 m)", "z = largest(f(x), x, 0 m, 3 m)")


@pytest.mark.parametrize("sheet", [PLAIN, ROWS], ids=["plain", "columns"])
def test_a_sheet_without_algebra_needs_no_heavy_package(sheet: str) -> None:
    """pint takes numpy where it finds it; here it finds none, and every stage still works."""
    assert run(WITHOUT, sheet, HEAVY).split() == []


@pytest.mark.parametrize(
    ("sheet", "blocked", "loaded"),
    [
        (ANTIDERIVATIVE, "scipy.integrate matplotlib", ()),
        (PLAIN + lines("solve for Q [kN], R [kN]", "    Q + R = P", "    Q - R = 2*P"), "matplotlib", ()),
        (PLAIN + lines("y = integral(x^2, x, 0, 3)"), "matplotlib", ("scipy.integrate",)),
        (PLAIN + lines("f(x [1]) = integral(ln(x)*x, x)", "y = f(2)"), "scipy.integrate matplotlib", ()),
        (PLAIN + lines("plot M(x) for x from 0 m to 3 m"), "scipy.integrate", ("matplotlib",)),
    ],
    ids=["antiderivative", "linear system", "definite integral", "logarithm", "plot"],
)
def test_each_package_is_loaded_where_it_is_first_needed(
    sheet: str, blocked: str, loaded: tuple[str, ...]
) -> None:
    """SymPy never enters the process that reads sheets."""
    found = set(run(WITHOUT, sheet, blocked).split())
    assert not {"sympy", "mpmath"} & found
    assert set(loaded) <= found


STARTED = """
import subprocess, sys
import loadpath
started = []
class Watched(subprocess.Popen):
    def __init__(self, arguments, *rest, **named):
        started.append(arguments)
        super().__init__(arguments, *rest, **named)
subprocess.Popen = Watched
trace = loadpath.evaluate(loadpath.read_text(sys.argv[1], "x.sheet.md"))
print(len(started))
"""


@pytest.mark.parametrize(
    ("more", "processes"),
    [((), 0), (("f(x [m]) = integral(M(x)^2*exp(x/(1 m)), x)", "y = f(2 m)"), 1)],
    ids=["plain", "algebra"],
)
def test_the_worker_is_started_only_for_algebra(more: tuple[str, ...], processes: int) -> None:
    assert run(STARTED, PLAIN + lines(*more)).split() == [str(processes)]

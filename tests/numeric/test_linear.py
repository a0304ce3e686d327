"""Linear systems: seen on the tree, solved, and called singular where they are."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np
import pytest
from curves import tree, value_of
from hypothesis import assume, given
from hypothesis import strategies as st

from loadpath.formula.canonical import text as canonical
from loadpath.formula.tree import Node, walk
from loadpath.numeric import linear_form, solve

UNKNOWNS = frozenset(["R_A", "R_B", "M_A", "C_1", "C_2"])


def form(text: str) -> dict[str, str] | None:
    found = linear_form(tree(text), UNKNOWNS)
    return None if found is None else {name: canonical(node) for name, node in found.items()}


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("R_A + R_B - P", {"R_A": "1", "R_B": "1", "": "-P"}),
        ("P - (R_A + R_B)", {"R_A": "-1", "R_B": "-1", "": "P"}),
        ("R_B*L - P*a", {"R_B": "L", "": "-(P*a)"}),
        ("2*R_A + 3*R_A", {"R_A": "2 + 3", "": "0"}),
        ("R_A - R_A + P", {"": "P"}),
        ("0*R_A + R_B", {"R_B": "1", "": "0"}),
        ("R_A*0 m + C_2", {"C_2": "1", "": "0"}),
        ("1*R_A/1", {"R_A": "1", "": "0"}),
        ("(R_A*x^3/6 + C_1*x + C_2)/(E*I)", {
            "R_A": "x^3/6/(E*I)", "C_1": "x/(E*I)", "C_2": "1/(E*I)", "": "0",
        }),
        ("-(P - R_A)*L", {"R_A": "L", "": "-(P*L)"}),
        ("R_A^1 + R_B^0", {"R_A": "1", "": "1"}),
        ("L^2*R_A", {"R_A": "L^2", "": "0"}),
        ("P*sin(theta) + <L - a>^2*R_A", {"R_A": "<L - a>^2", "": "P*sin(theta)"}),
        ("(P as kN)*M_A", {"M_A": "(P as kN)", "": "0"}),
        ("L*P", {"": "L*P"}),
        ("20 degC + R_A", {"R_A": "1", "": "20 degC"}),
        ("R_A - (P - M_A)/2", {"R_A": "1", "M_A": "1/2", "": "-(P/2)"}),
    ],
)  # fmt: skip
def test_coefficients_are_read_off(text: str, expected: dict[str, str]) -> None:
    assert form(text) == expected


@pytest.mark.parametrize(
    "text",
    ["R_A*R_B", "P/R_A", "R_A^2", "R_A^0.5", "2^R_A", "sin(R_A)", "<R_A - P>^1", "abs(R_A)", "max(R_A, 0 kN)",
     "(R_A as kN)", "R_A*(R_B + 1)", "R_A/R_A"],
)  # fmt: skip
def test_what_is_not_linear_is_none(text: str) -> None:
    assert form(text) is None


linear_texts = st.recursive(
    st.sampled_from(["R_A", "R_B", "C_1", "P", "L", "3", "0.5"]),
    lambda inner: st.one_of(
        st.builds(lambda a, b, o: f"({a} {o} {b})", inner, inner, st.sampled_from("+-")),
        st.builds(lambda a, k: f"{k}*{a}", inner, st.sampled_from(["P", "2", "(L + 1)"])),
        st.builds(lambda a, k: f"{a}/{k}", inner, st.sampled_from(["P", "4"])),
        st.builds(lambda a: f"(-{a})", inner),
    ),
    max_leaves=8,
)


@given(linear_texts)
def test_the_form_has_the_value_of_the_tree(text: str) -> None:
    values = {"P": 3.5, "L": -1.25, "R_A": 2.0, "R_B": -0.75, "C_1": 7.0}
    node = tree(text)
    found = linear_form(node, UNKNOWNS)
    assert found is not None
    value = value_of(values)
    total = sum(value(each) * (values[name] if name else 1.0) for name, each in found.items())
    assert total == pytest.approx(value(node), rel=1e-12, abs=1e-12)
    # no larger than multiplying out makes it: each unknown takes along the factors around it
    factors = sum(1 for _ in walk(node))
    assert sum(_count(each) for each in found.values()) <= 4 * factors


def _count(node: Node) -> int:
    return sum(1 for _ in walk(node))


# --- solving ------------------------------------------------------------------------------------------------


def exactly(matrix: list[list[int]], right: list[int]) -> list[Fraction] | None:
    """Gauss elimination in fractions; None where the matrix is singular."""
    n = len(matrix)
    rows = [[Fraction(v) for v in row] + [Fraction(b)] for row, b in zip(matrix, right, strict=True)]
    for i in range(n):
        pivot = next((r for r in range(i, n) if rows[r][i]), None)
        if pivot is None:
            return None
        rows[i], rows[pivot] = rows[pivot], rows[i]
        rows[i] = [v / rows[i][i] for v in rows[i]]
        for r in range(n):
            if r != i:
                rows[r] = [v - rows[r][i] * w for v, w in zip(rows[r], rows[i], strict=True)]
    return [row[-1] for row in rows]


square = st.integers(1, 6).flatmap(
    lambda n: st.tuples(
        st.lists(st.lists(st.integers(-9, 9), min_size=n, max_size=n), min_size=n, max_size=n),
        st.lists(st.integers(-99, 99), min_size=n, max_size=n),
        st.lists(st.integers(-9, 9), min_size=n, max_size=n),
        st.lists(st.integers(-9, 9), min_size=n, max_size=n),
    )
)


@given(square)
def test_solutions_are_those_in_fractions(
    system: tuple[list[list[int]], list[int], list[int], list[int]],
) -> None:
    """Whatever the units of equations and unknowns; source: elimination in exact fractions."""
    matrix, right, rows, columns = system
    exact = exactly(matrix, right)
    scaled = [
        [v * 10.0**r * 10.0**c for v, c in zip(row, columns, strict=True)]
        for row, r in zip(matrix, rows, strict=True)
    ]
    side = [b * 10.0**r for b, r in zip(right, rows, strict=True)]
    found = solve(scaled, side)
    rank = np.linalg.matrix_rank(np.array(matrix, dtype=float))  # source: numpy on the whole numbers
    assert found.rank == rank
    if exact is None:
        assert found.values is None and found.state.startswith("singular") and found.free
        assert math.isinf(found.condition)
        return
    assert found.values is not None
    assert found.state == "regular" and found.free == ()
    largest = max(abs(float(v)) for v in exact)
    for value, each, c in zip(found.values, exact, columns, strict=True):
        assert value * 10.0**c == pytest.approx(float(each), rel=1e-11, abs=1e-13 * largest)


@given(square)
def test_singular_systems_say_which(system: tuple[list[list[int]], list[int], list[int], list[int]]) -> None:
    """A last row that repeats the others either agrees or contradicts; source: how it was made."""
    matrix, right, _, _ = system
    assume(len(matrix) > 1 and any(map(any, matrix[:-1])))
    sums = [sum(column) for column in zip(*matrix[:-1], strict=True)]
    assume(any(sums) and exactly([*matrix[:-1], [1] * len(matrix)], [0] * len(matrix)) is not None)
    rows = [[float(v) for v in row] for row in (*matrix[:-1], sums)]
    agrees = solve(rows, [*right[:-1], sum(right[:-1])])
    differs = solve(rows, [*right[:-1], sum(right[:-1]) + 1])
    assert agrees.state == "singular, many solutions" and agrees.values is None
    assert differs.state == "singular, no solution" and differs.values is None
    assert agrees.rank == differs.rank == len(matrix) - 1


def test_a_mechanism_names_what_is_free() -> None:
    """The middle node of two bars in line: no equation holds its movement across them."""
    k = 2.1e11 * 1e-3 / 2.0
    found = solve([[2 * k, 0.0], [0.0, 0.0]], [10e3, 0.0])
    assert (found.state, found.free) == ("singular, many solutions", (1,))
    loaded = solve([[2 * k, 0.0], [0.0, 0.0]], [10e3, 5e3])
    assert (loaded.state, loaded.free) == ("singular, no solution", (1,))


def test_a_mechanism_in_rounded_numbers_is_still_one() -> None:
    """A four-bar panel without a diagonal, turned by 20 degrees: its sway is not held.

    source: the rank of the equilibrium matrix must be 3 of 4, as for the panel that is not turned.
    """
    c, s = math.cos(math.radians(20)), math.sin(math.radians(20))
    # two free nodes, three bars (two posts, one rail): stiffness of each bar is n n^T
    post, rail = np.outer([-s, c], [-s, c]), np.outer([c, s], [c, s])
    stiffness = 1e8 * np.block([[post + rail, -rail], [-rail, post + rail]])
    found = solve(stiffness.tolist(), [1e3, 0.0, 0.0, 0.0])
    assert (found.state, found.rank) == ("singular, no solution", 3)
    assert found.free == (0, 1, 2, 3)


def test_nearly_singular_is_said() -> None:
    found = solve([[1.0, 1.0], [1.0, 1.0 + 1e-12]], [2.0, 2.0])
    assert found.state == "nearly singular" and found.values is not None
    assert 1e12 < found.condition < 1e13


def test_more_and_fewer_equations_than_unknowns() -> None:
    more = solve([[1.0, 1.0], [1.0, -1.0], [2.0, 0.0]], [3.0, 1.0, 4.0])
    assert more.values == (2.0, 1.0) and more.state == "regular"
    against = solve([[1.0, 1.0], [1.0, -1.0], [2.0, 0.0]], [3.0, 1.0, 5.0])
    assert (against.state, against.rank) == ("singular, no solution", 2)
    fewer = solve([[1.0, 1.0, 0.0], [0.0, 0.0, 2.0]], [3.0, 4.0])
    assert (fewer.state, fewer.free) == ("singular, many solutions", (0, 1))


def test_what_is_below_all_rounding_is_zero() -> None:
    """A force that is exactly 0 prints as 0, not as what rounding leaves of it."""
    matrix = np.array([[0.1, 0.7, 0.3], [0.2, 0.1, 0.9], [0.6, 0.5, 0.4]])
    right = [0.1 * 3.0 + 0.3 * 7.0, 0.2 * 3.0 + 0.9 * 7.0, 0.6 * 3.0 + 0.4 * 7.0]
    assert np.linalg.solve(matrix, right)[1] != 0  # what would be printed otherwise
    found = solve(matrix.tolist(), right)
    assert found.values is not None and found.values[1] == 0
    small = solve([[1.0, 0.0], [1.0, 1.0]], [1e-20, 1.0])
    assert small.values == (1e-20, 1.0)


@pytest.mark.parametrize(
    ("matrix", "right"),
    [([], []), ([[1.0]], [1.0, 2.0]), ([[math.nan]], [1.0]), ([[1.0]], [math.inf]), ([[]], [1.0])],
)
def test_what_is_no_system_is_refused(matrix: list[list[float]], right: list[float]) -> None:
    with pytest.raises(ValueError):
        solve(matrix, right)


def continuous_beam(
    spans: int, w: float, length: float, stiffness: float
) -> tuple[list[list[float]], list[float]]:
    """Reactions (N) and two constants of integration (N*m^2, N*m^3) of equal spans under uniform load."""
    places = [i * length for i in range(spans + 1)]
    whole = places[-1]
    rows = [[1.0] * (spans + 1) + [0.0, 0.0], [whole - a for a in places] + [0.0, 0.0]]
    right = [w * whole, w * whole**2 / 2]
    for x in places:
        rows.append([max(x - a, 0.0) ** 3 / 6 / stiffness for a in places] + [x / stiffness, 1 / stiffness])
        right.append(w * x**4 / 24 / stiffness)
    return rows, right


@pytest.mark.parametrize("spans", [1, 2, 3, 20, 40])
def test_a_continuous_beam_in_brackets(spans: int) -> None:
    """source: the three-moment equation for equal spans, M_(i-1) + 4 M_i + M_(i+1) = -w L^2/2 (from memory),
    solved by numpy."""
    w, length = 12e3, 6.0
    found = solve(*continuous_beam(spans, w, length, 17.5e6))
    assert found.state == "regular" and found.values is not None
    inner = spans - 1
    moments = np.zeros(spans + 1)
    if inner:
        band = 4 * np.eye(inner) + np.eye(inner, k=1) + np.eye(inner, k=-1)
        moments[1:-1] = np.linalg.solve(band, np.full(inner, -w * length**2 / 2))
    steps = np.diff(moments) / length
    expected = np.full(spans + 1, w * length) + np.append(steps, 0) - np.append(0, steps)
    expected[[0, -1]] -= w * length / 2
    assert found.values[: spans + 1] == pytest.approx(expected.tolist(), rel=1e-8)
    if spans == 2:
        # source: beam tables, two equal spans: 3/8, 10/8, 3/8 of w L (from memory)
        assert found.values[:3] == pytest.approx([0.375 * w * length, 1.25 * w * length, 0.375 * w * length])


def test_the_same_bits_each_time() -> None:
    system = continuous_beam(20, 1.1e3, 5.3, 9.9e6)
    assert solve(*system) == solve(*system)

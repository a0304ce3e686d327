"""What the numerical methods cost, as ratios in one run: `python tests/bench/numeric.py` prints a table.

Every comparison is with the same work in plain numpy, in the same process; medians of several rounds.
"""

from __future__ import annotations

import time

import numpy as np
from one_sheet import median_time

from loadpath.evaluate.numbers import Compiler
from loadpath.formula.lines import Item
from loadpath.formula.reader import Reader
from loadpath.formula.tree import Node
from loadpath.numeric import extremes, pieces, roots_between, solve

SPANS = 17
"""Equal spans: 18 reactions and two constants of integration, 20 unknowns."""
LOAD, LENGTH, STIFFNESS = 9e3, 4.0, 17.5e6


def system(spans: int) -> tuple[list[list[float]], list[float]]:
    """Equilibrium, and no deflection at any support."""
    places = [i * LENGTH for i in range(spans + 1)]
    whole = places[-1]
    rows = [[1.0] * (spans + 1) + [0.0, 0.0], [whole - a for a in places] + [0.0, 0.0]]
    right = [LOAD * whole, LOAD * whole**2 / 2]
    for x in places:
        bent = [max(x - a, 0.0) ** 3 / 6 / STIFFNESS for a in places]
        rows.append([*bent, x / STIFFNESS, 1 / STIFFNESS])
        right.append(LOAD * x**4 / 24 / STIFFNESS)
    return rows, right


def moment(spans: int) -> tuple[Node, dict[str, float]]:
    """Bending moment of the continuous beam in brackets, with the values of its names."""
    found = solve(*system(spans)).values
    assert found is not None
    values = {f"R_{i}": v for i, v in enumerate(found[: spans + 1])} | {"w": LOAD, "L": LENGTH}
    text = " + ".join(f"R_{i}*<x - {i}*L>^1" for i in range(spans + 1)) + " - w*x^2/2"
    return Reader(Item(text, 0, ())).expression(), values


def first_import() -> tuple[float, float]:
    """Seconds that the first system and the first root take: numpy is loaded, scipy.optimize is not."""
    start = time.perf_counter()
    solve([[1.0]], [1.0])
    solved = time.perf_counter()
    roots_between(np.cos, 0.0, 2.0)
    return solved - start, time.perf_counter() - solved


def main() -> None:
    first = first_import()
    matrix, right = system(SPANS)
    solved = median_time(lambda: solve(matrix, right))
    plain = median_time(lambda: np.linalg.solve(np.array(matrix), np.array(right)))
    node, values = moment(20)
    compiler = Compiler({})
    work = compiler.compile_tree(node, frozenset(["x"]))

    def f(x: float) -> float:
        return float(work(values, {"x": x}))

    def value(tree: Node) -> float:
        return float(compiler.compile_tree(tree)(values, {}))

    end = 20 * LENGTH
    opened = median_time(lambda: pieces(node, "x", 0.0, end, value))
    found = median_time(lambda: extremes(f, f, node, "x", 0.0, end, value))
    reactions = np.array([values[f"R_{i}"] for i in range(21)])
    places = np.arange(21) * LENGTH
    grid = np.linspace(0.0, end, 2001)

    def by_grid() -> float:
        bent = reactions * np.maximum(grid[:, None] - places, 0.0)
        return float((bent.sum(axis=1) - LOAD * grid**2 / 2).max())

    dense = median_time(by_grid)
    sampled = median_time(
        lambda: extremes(f, f, Reader(Item("sin(x)", 0, ())).expression(), "x", 0.0, end, value)
    )
    print("| what | ms | over plain numpy |")
    print("|---|---|---|")
    print(f"| 20 unknowns solved | {solved * 1e3:.2f} | {solved / plain:.1f} of `linalg.solve` alone |")
    print(f"| 20 spans opened in pieces | {opened * 1e3:.2f} | {opened / dense:.1f} of 2001 points |")
    print(f"| extremes of 20 spans, exact | {found * 1e3:.2f} | {found / dense:.1f} of 2001 points |")
    print(
        f"| extremes of 20 spans, 200 samples | {sampled * 1e3:.2f} | {sampled / dense:.1f} of 2001 points |"
    )
    print()
    print(f"first system {first[0] * 1e3:.0f} ms, first root {first[1] * 1e3:.0f} ms (scipy is loaded)")


if __name__ == "__main__":
    main()

"""Systems of linear equations: seen on the tree, solved by NumPy after scaling."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

from loadpath.formula.tree import Binary, Name, Negative, Node
from loadpath.numeric.trees import ONE, ZERO, holding, is_one, is_zero, typed_number

if TYPE_CHECKING:
    from numpy import float64
    from numpy.typing import NDArray

    Array = NDArray[float64]

Form = dict[str, Node]

State = Literal["regular", "singular, no solution", "singular, many solutions", "nearly singular"]

NEARLY_SINGULAR = 1e11
"""From this condition on, four of a float's sixteen digits are all that is sure of a solution."""
AGREES = 1e-9
"""Sides of a redundant equation within this much of their terms agree."""
FREE = 1e-9
"""A share in the null space above this leaves an unknown free."""


# --- linearity, seen on the tree ----------------------------------------------------------------------------


def linear_form(node: Node, unknowns: frozenset[str]) -> Form | None:
    """The coefficient of each unknown that occurs, and under "" the constant part (`0` where there is none).

    None where the tree is not linear in the unknowns. Whatever is free of them counts as constant. An unknown
    whose two typed coefficients are the same and cancel is left out.
    """
    form = _read(node, unknowns, holding(node, unknowns))
    return None if form is None else {"": ZERO, **form}


def _read(node: Node, unknowns: frozenset[str], holds: frozenset[int]) -> Form | None:
    if id(node) not in holds:
        return {} if is_zero(node) else {"": node}
    match node:
        case Name(name=name):
            return {name: ONE}
        case Negative(operand=operand):
            inner = _read(operand, unknowns, holds)
            return None if inner is None else {name: _minus(each) for name, each in inner.items()}
        case Binary(operator="+" | "-", left=left, right=right):
            a, b = _read(left, unknowns, holds), _read(right, unknowns, holds)
            return None if a is None or b is None else _joined(a, b, node.operator == "-")
        case Binary(operator="*", left=left, right=right):
            if id(left) in holds and id(right) in holds:
                return None
            factor, rest, first = (right, left, False) if id(left) in holds else (left, right, True)
            inner = _read(rest, unknowns, holds)
            return None if inner is None else _kept({n: _times(factor, c, first) for n, c in inner.items()})
        case Binary(operator="/", left=left, right=right) if id(right) not in holds:
            inner = _read(left, unknowns, holds)
            return None if inner is None else {name: _over(c, right) for name, c in inner.items()}
        case Binary(operator="^", left=left, right=right) if id(right) not in holds:
            exponent = typed_number(right)
            if exponent == 1:
                return _read(left, unknowns, holds)
            return {"": ONE} if exponent == 0 else None
    return None


def _kept(form: Form) -> Form:
    return {name: each for name, each in form.items() if not is_zero(each)}


def _joined(a: Form, b: Form, minus: bool) -> Form:
    form = dict(a)
    for name, right in b.items():
        if name not in a:
            form[name] = _minus(right) if minus else right
            continue
        subtract = minus
        if isinstance(right, Negative):
            right, subtract = right.operand, not minus
        if subtract and a[name] == right:
            del form[name]
        else:
            form[name] = Binary("-" if subtract else "+", a[name], right)
    return form


def _minus(node: Node) -> Node:
    return node.operand if isinstance(node, Negative) else Negative(node)


def _times(factor: Node, coefficient: Node, first: bool) -> Node:
    """`factor*coefficient`, or `coefficient*factor` where the factor was typed second."""
    if is_zero(factor):
        return ZERO
    if isinstance(coefficient, Negative):
        return _minus(_times(factor, coefficient.operand, first))
    if is_one(factor):
        return coefficient
    if is_one(coefficient):
        return factor
    return Binary("*", factor, coefficient) if first else Binary("*", coefficient, factor)


def _over(coefficient: Node, divisor: Node) -> Node:
    if is_one(divisor):
        return coefficient
    if isinstance(coefficient, Negative):
        return _minus(_over(coefficient.operand, divisor))
    return Binary("/", coefficient, divisor)


# --- solving ------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Solution:
    """What a linear system comes to."""

    values: tuple[float, ...] | None
    """Coherent SI, in the order of the columns; None where there is no single solution."""
    rank: int
    condition: float
    """Of the scaled matrix: largest over smallest singular value, infinite where it is singular."""
    state: State
    free: tuple[int, ...]
    """Columns of unknowns that the equations don't fix."""


def solve(matrix: list[list[float]], right: list[float]) -> Solution:
    """Solves `matrix` times unknowns = `right`, with as many equations as unknowns or not.

    Rows and columns are scaled first: their entries are of different dimension (kN against rad). A system
    that is nearly singular gets its values, which are then good for few digits. Raises ValueError for an
    empty or ragged matrix and for entries that are not finite.
    """
    import numpy as np

    a, b = np.array(matrix, dtype=float), np.array(right, dtype=float)
    if a.ndim != 2 or 0 in a.shape or b.shape != a.shape[:1]:
        raise ValueError("a matrix with a right side for each row is needed")
    if not (np.isfinite(a).all() and np.isfinite(b).all()):
        raise ValueError("an entry is not finite")
    rows, columns = _scales(a)
    scaled, side = a * rows[:, None] * columns[None, :], b * rows
    left_vectors, singular, right_vectors = np.linalg.svd(scaled)
    most, unknowns = float(singular[0]), a.shape[1]
    lost = 8 * max(a.shape) * float(np.finfo(float).eps) * most
    rank = int((singular > lost).sum())
    inverse = right_vectors[:rank].T / singular[:rank]
    found = _refined(scaled, side, inverse @ left_vectors[:, :rank].T)
    agrees = _agrees(scaled, side, found)
    condition = most / float(singular[rank - 1]) if rank == unknowns else math.inf
    if rank == unknowns and agrees:
        values = tuple(float(v) for v in _without_crumbs(scaled, side, found) * columns)
        state: State = "regular" if condition < NEARLY_SINGULAR else "nearly singular"
        return Solution(values, rank, condition, state, ())
    shares = np.sqrt((right_vectors[rank:] ** 2).sum(axis=0))
    free = tuple(int(j) for j in np.nonzero(shares > FREE)[0])
    state = "singular, many solutions" if agrees else "singular, no solution"
    return Solution(None, rank, condition, state, free)


def _scales(a: Array) -> tuple[Array, Array]:
    """Powers of two, so that scaling rounds nothing, that bring every row and column near 1."""
    import numpy as np

    def toward_one(largest: Array) -> Array:
        exponents = np.where(largest > 0, -np.round(np.log2(np.where(largest > 0, largest, 1.0)) / 2), 0.0)
        return np.asarray(2.0**exponents)

    rows, columns = np.ones(a.shape[0]), np.ones(a.shape[1])
    for _ in range(12):
        size = np.abs(a * rows[:, None] * columns[None, :])
        rows, columns = rows * toward_one(size.max(axis=1)), columns * toward_one(size.max(axis=0))
    return rows, columns


def _refined(a: Array, b: Array, inverse: Array) -> Array:
    """The solution, put back twice in longer floats and mended by what is left."""
    import numpy as np

    found = np.asarray(inverse @ b, dtype=np.longdouble)
    for _ in range(2):
        left = b.astype(np.longdouble) - a.astype(np.longdouble) @ found
        found = found + inverse @ left.astype(float)
    return found.astype(float)


def _terms(a: Array, b: Array, found: Array) -> Array:
    """The sizes of the terms of each equation, added up."""
    import numpy as np

    return np.asarray(np.abs(a) @ np.abs(found) + np.abs(b))


def _agrees(a: Array, b: Array, found: Array) -> bool:
    """True where every equation holds with the solution put back."""
    import numpy as np

    terms = _terms(a, b, found)
    rounding = 100 * float(np.finfo(float).eps) * float(terms.max())
    return bool((np.abs(a @ found - b) <= AGREES * terms + rounding).all())


def _without_crumbs(a: Array, b: Array, found: Array) -> Array:
    """A value below the rounding of an equation it stands in is 0, where every other equation lets it be: it
    is below the rounding there too, or nothing else stands there."""
    import numpy as np

    shares = np.abs(a) * np.abs(found)[None, :]
    terms = _terms(a, b, found)[:, None]
    below = shares <= 4 * float(np.finfo(float).eps) * terms
    alone = terms - shares < shares / 2
    absent = shares == 0
    crumbs = (below | alone).all(axis=0) & (below & ~absent).any(axis=0)
    return np.where(crumbs | absent.all(axis=0), 0.0, found)

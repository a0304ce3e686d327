"""What a criterion came to: demand, limit, ratio and whether it is satisfied, on unrounded values.

A ratio above 1 never stands beside "satisfied", a ratio below 1 never beside "not satisfied".
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import isfinite

from loadpath.formula.canonical import text
from loadpath.formula.signs import holds, nearly
from loadpath.formula.tree import Call, Logic, Name, Negative, Node, Relation, Sign, walk
from loadpath.trace.model import Verdict

Sides = tuple[float, ...]


@dataclass(frozen=True, slots=True)
class _Part:
    """One relation, read as demand against limit."""

    satisfied: bool
    demand: float
    limit: float
    ratio: float | None
    one_sided: bool = False

    @property
    def margin(self) -> float | None:
        return None if self.ratio is not None else self.limit - self.demand


def judge(relation: Node, sides: tuple[Sides, ...], ratios: bool = True) -> Verdict:
    """The verdict on a criterion.

    `sides` holds the SI values of each relation's operands; `ratios` is False for absolute temperatures: they
    have none.
    """
    if isinstance(relation, Logic):
        relations = [r for r in relation.operands if isinstance(r, Relation)]
        parts = [_relation(r, s, ratios)[0] for r, s in zip(relations, sides, strict=True)]
        return _either(parts, sides)
    assert isinstance(relation, Relation)
    return _verdict(*_relation(relation, sides[0], ratios), sides)


def _verdict(part: _Part, index: int, sides: tuple[Sides, ...]) -> Verdict:
    return Verdict(
        part.satisfied, part.ratio, part.demand, part.limit, index,
        margin=part.margin, one_sided=part.one_sided, sides=sides,
    )  # fmt: skip


def _either(parts: list[_Part], sides: tuple[Sides, ...]) -> Verdict:
    """Relations joined by `or`: of those that are satisfied, else of all, the smaller ratio counts."""
    satisfied = [i for i, part in enumerate(parts) if part.satisfied]
    best = min(satisfied or range(len(parts)), key=lambda i: (parts[i].ratio is None, parts[i].ratio or 0.0))
    return _verdict(parts[best], best, sides)


def _relation(relation: Relation, values: Sides, ratios: bool) -> tuple[_Part, int]:
    """The governing part of a relation or a chain, and the index of its sign."""
    if len(relation.signs) == 1:
        return _single(relation, values[0], values[1], ratios), 0
    low, value, high = values
    first, second = relation.signs
    if first[0] == "<":
        return _chain(first, second, low, value, high, ratios)
    part, index = _chain(_turned(second), _turned(first), high, value, low, ratios)
    return part, 1 - index


def _turned(sign: str) -> str:
    return {"<": ">", "<=": ">=", ">": "<", ">=": "<="}[sign]


def _single(relation: Relation, left: float, right: float, ratios: bool) -> _Part:
    """The bound is on the right, unless only the left side is typed; a typed bound of zero has no ratio."""
    first, second = relation.operands
    at_most = relation.signs[0][0] == "<"
    typed_left = not _is_named(first) and _is_named(second)
    demand, limit = (left, right) if at_most else (right, left)
    bound, node = (left, first) if typed_left else (right, second)
    ratios = ratios and (bound != 0 or _is_named(node))
    satisfied = holds(relation.signs[0], left, right)
    return _against(satisfied, demand, limit, ratios, limit_is_bound=at_most != typed_left)


def _against(satisfied: bool, demand: float, limit: float, ratios: bool, *, limit_is_bound: bool) -> _Part:
    """Demand against limit; both signs turned where both are negative, or the bound is and the value zero."""
    if not ratios:
        return _Part(satisfied, demand, limit, None)
    if demand < 0 and (limit < 0 or (limit == 0 and not limit_is_bound)):
        demand, limit = 0 - limit, 0 - demand
    if demand < 0 < limit:
        return _Part(satisfied, demand, limit, None, one_sided=True)
    return _Part(satisfied, demand, limit, _ratio(satisfied, demand, limit))


def _ratio(satisfied: bool, demand: float, limit: float) -> float | None:
    """Demand over limit, 1 where the two are equal within rounding; None where there is no such ratio."""
    if limit <= 0:
        return None
    if nearly(demand, limit):
        return 1.0
    ratio = demand / limit
    return ratio if isfinite(ratio) and (ratio < 1) == satisfied else None


def _chain(first: str, second: str, low: float, value: float, high: float, ratios: bool) -> tuple[_Part, int]:
    """`low <= value <= high`: its governing part, and which of its signs that is."""
    above, below = holds(first, low, value), holds(second, value, high)
    if low <= 0 <= high and low < high:
        return _opposite(above and below, low, value, high, ratios)
    parts = [
        _against(above, low, value, ratios, limit_is_bound=False),
        _against(below, value, high, ratios, limit_is_bound=True),
    ]
    failed = [i for i, part in enumerate(parts) if not part.satisfied]
    index = max(failed or [0, 1], key=lambda i: (parts[i].ratio is None, parts[i].ratio or 0.0))
    return replace(parts[index], satisfied=above and below, one_sided=False), index


def _opposite(satisfied: bool, low: float, value: float, high: float, ratios: bool) -> tuple[_Part, int]:
    """Bounds of opposite sign: the demand over the bound on its own side, or over one that is not zero."""
    upper = value > 0 or (value == 0 and high > 0)
    demand, limit = (value, high) if upper else (0 - value, 0 - low)
    ratio = _ratio(satisfied, demand, limit) if ratios else None
    return _Part(satisfied, demand, limit, ratio), 1 if upper else 0


# --- how to look at both sides ------------------------------------------------------------------------------


def both_sides(relation: Relation, values: tuple[float | str, ...]) -> str:
    """The mend of a relation that looks at one side only: `abs(sigma) <= f_y`, or a chain."""
    first, second = relation.operands
    negative, other = (first, second) if float(values[0]) < 0 else (second, first)
    demand, limit = (negative, other) if _is_named(negative) else (other, _without_sign(negative))
    sign: Sign = "<" if relation.signs[0] in ("<", ">") else "<="
    magnitude = f"abs({text(demand)}) {sign} {text(limit)}"
    chain = Relation((Negative(limit), demand, limit), (sign, sign))
    return f"write `{magnitude}` for the magnitude, or a chain for both sides: `{text(chain)}`"


def _without_sign(node: Node) -> Node:
    return node.operand if isinstance(node, Negative) else Call("abs", (node,))


def _is_named(node: Node) -> bool:
    return any(isinstance(part, Name | Call) for part in walk(node))


def worst(verdicts: list[Verdict]) -> int:
    """Which of several verdicts on one criterion governs: a failed one, else one that says least, else by
    ratio, else by margin; the first of equal ones."""

    def weight(verdict: Verdict) -> tuple[int, float]:
        rank = 0 if verdict.satisfied is False else 1 if verdict.satisfied is None else 3 - verdict.one_sided
        ratio = verdict.utilisation
        return rank, -ratio if ratio is not None else (verdict.margin or 0.0)

    return min(range(len(verdicts)), key=lambda i: weight(verdicts[i]))

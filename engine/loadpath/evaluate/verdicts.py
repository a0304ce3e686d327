"""What a criterion came to: demand, limit, ratio and whether it is satisfied, on unrounded values.

A ratio above 1 never stands beside "satisfied", a ratio below 1 never beside "not satisfied".
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from loadpath.evaluate.numbers import holds, nearly
from loadpath.formula.tree import Logic, Node, Relation
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

    `sides` holds the SI values of each relation's operands; `ratios` is False for absolute temperatures, which have none.
    """
    if isinstance(relation, Logic):
        relations = [r for r in relation.operands if isinstance(r, Relation)]
        parts = [_relation(r, s, ratios) for r, s in zip(relations, sides, strict=True)]
        return _either(parts, sides)
    assert isinstance(relation, Relation)
    part, index = _relation(relation, sides[0], ratios)
    return _verdict(part, index, sides)


def _verdict(part: _Part, index: int, sides: tuple[Sides, ...]) -> Verdict:
    return Verdict(
        part.satisfied, part.ratio, part.demand, part.limit, index,
        margin=part.margin, one_sided=part.one_sided, sides=sides,
    )  # fmt: skip


def _either(parts: list[tuple[_Part, int]], sides: tuple[Sides, ...]) -> Verdict:
    """Two relations joined by `or`: the one that is satisfied, else the smaller ratio, counts."""
    satisfied = [i for i, (part, _) in enumerate(parts) if part.satisfied]
    among = satisfied or list(range(len(parts)))
    best = min(among, key=lambda i: (parts[i][0].ratio is None, parts[i][0].ratio or 0.0))
    part = parts[best][0]
    return replace(_verdict(part, best, sides), satisfied=bool(satisfied))


def _relation(relation: Relation, values: Sides, ratios: bool) -> tuple[_Part, int]:
    """The governing part of a relation or a chain, and the index of its sign."""
    if len(relation.signs) == 1:
        return _single(relation.signs[0], values[0], values[1], ratios), 0
    signs, ordered = relation.signs, values
    if signs[0][0] == ">":
        signs, ordered = (_turn(signs[1]), _turn(signs[0])), values[::-1]
    part, index = _chain(signs, *ordered, ratios)  # type: ignore[misc,arg-type]
    return part, index if relation.signs[0][0] == "<" else 1 - index


def _turn(sign: str) -> str:
    return {"<": ">", "<=": ">=", ">": "<", ">=": "<="}[sign]


def _single(sign: str, left: float, right: float, ratios: bool) -> _Part:
    satisfied = holds(sign, left, right)
    demand, limit = (left, right) if sign[0] == "<" else (right, left)
    return _against(satisfied, demand, limit, bound=right, value=left, ratios=ratios)


def _against(satisfied: bool, demand: float, limit: float, *, bound: float, value: float, ratios: bool) -> _Part:
    """Demand against limit, with both signs turned where both are negative."""
    if not ratios or bound == 0 or limit == 0:
        return _Part(satisfied, demand, limit, None)
    if demand < 0 and limit < 0:
        demand, limit = -limit, -demand
    elif (value < 0) != (bound < 0) and value != 0:
        if satisfied:
            return _Part(True, demand, limit, None, one_sided=True)
        return _Part(False, demand, limit, None)
    elif value == 0 and bound < 0:
        demand, limit = -limit, -demand
        if limit <= 0:
            return _Part(satisfied, demand, limit, None)
    return _Part(satisfied, demand, limit, _ratio(satisfied, demand, limit))


def _ratio(satisfied: bool, demand: float, limit: float) -> float | None:
    """Demand over limit, held to the verdict where the two are equal within rounding."""
    if limit <= 0:
        return None
    if nearly(demand, limit):
        return 1.0
    ratio = demand / limit
    return ratio if (ratio < 1) == satisfied else None


def _chain(signs: tuple[str, str], low: float, value: float, high: float, ratios: bool) -> tuple[_Part, int]:
    """`low <= value <= high`."""
    above, below = holds(signs[0], low, value), holds(signs[1], value, high)
    if low <= 0 <= high and (low, high) != (0, 0):
        part = _opposite(above and below, low, value, high, ratios)
        return part, 0 if value < 0 else 1
    parts = [
        _against(above, low, value, bound=low, value=value, ratios=ratios),
        _against(below, value, high, bound=high, value=value, ratios=ratios),
    ]
    failed = [i for i, part in enumerate(parts) if not part.satisfied]
    among = failed or [0, 1]
    index = max(among, key=lambda i: (parts[i].ratio is None, parts[i].ratio or 0.0))
    return replace(parts[index], satisfied=above and below, one_sided=False), index


def _opposite(satisfied: bool, low: float, value: float, high: float, ratios: bool) -> _Part:
    """Bounds of opposite sign: the demand over the bound on its own side."""
    demand, limit = (value, high) if value >= 0 else (-value, -low)
    if not ratios:
        return _Part(satisfied, demand, limit, None)
    return _Part(satisfied, demand, limit, _ratio(satisfied, demand, limit))

"""Going down to a lowest value between two places."""

from __future__ import annotations

import math
from collections.abc import Callable

from loadpath.numeric.trouble import Curve, NotDefined, worked

GOLDEN = (math.sqrt(5) - 1) / 2
STEPS = 75
"""Golden sections down to the rounding of a float."""
LATE = 30
"""After this many sections a value that settles has settled: the stretch is a millionth of what it was."""


def edge(holds: Callable[[float], bool], inside: float, outside: float) -> float:
    """The last place, going out from `inside`, at which something holds: by halving, to rounding."""
    for _ in range(STEPS):
        middle = (inside + outside) / 2
        if middle in (inside, outside):
            break
        inside, outside = (middle, outside) if holds(middle) else (inside, middle)
    return inside


def lowest_between(f: Curve, low: float, high: float, spread: float) -> tuple[float, float]:
    """Place and value of a lowest point by golden sections, the first of equal ones.

    Raises `NotDefined` where f has no value, or goes down and down instead of settling; `spread` is the range
    of the values round about.
    """
    a, b = low, high
    c, d = b - GOLDEN * (b - a), a + GOLDEN * (b - a)
    at_c, at_d = worked(f, c), worked(f, d)
    settled = math.inf
    for step in range(STEPS):
        if at_c <= at_d:
            b, d, at_d = d, c, at_c
            c = b - GOLDEN * (b - a)
            at_c = worked(f, c)
        else:
            a, c, at_c = c, d, at_d
            d = a + GOLDEN * (b - a)
            at_d = worked(f, d)
        if step == LATE:
            settled = min(at_c, at_d)
        if not a < c < d < b:
            break
    x, y = (c, at_c) if at_c <= at_d else (d, at_d)
    if settled - y > 0.01 * max(spread, 1e-9 * abs(settled)) and settled < math.inf:
        raise NotDefined(x, "grows without settling")
    return x, y

"""Definite integrals in numbers, where there is no closed form."""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise

from loadpath.numeric.roots import STEPS, changes_of_sign
from loadpath.numeric.sides import evenly
from loadpath.numeric.trouble import Curve, NoConvergence, check_bounds, tried, worked

METHOD = "adaptive Gauss-Kronrod quadrature"
ASKED = 1e-11
"""Error asked for, as a share of the integral of |f|."""
GOOD = 1e-8
"""Where rounding stands in the way of that, an error within this share of it is taken."""
STRETCHES = 200
RISES = 10.0
"""So many times larger near an end than a step away from it, a function is looked at ever nearer to it."""


@dataclass(frozen=True, slots=True)
class Quadrature:
    """A definite integral, coherent SI."""

    value: float
    error: float
    """The method's own estimate of its absolute error, added up over the stretches between breaks."""
    method: str


def quadrature(f: Curve, low: float, high: float, places: tuple[float, ...] = ()) -> Quadrature:
    """The integral of f from `low` to `high`, stretch by stretch between the places where f breaks.

    Raises `NoConvergence` where the integral does not come out, `NotDefined` where f has no value at a place
    that is looked at, ValueError for bounds that are none.
    """
    low, high = check_bounds(low, high)
    cuts = [low, *sorted({p for p in (*places, *_near_ends(f, low, high)) if low < p < high}), high]
    _refuse_poles(f, low, high)
    size = sum(_size(f, a, b) for a, b in pairwise(cuts))
    parts = [_stretch(f, a, b, size) for a, b in pairwise(cuts)]
    return Quadrature(math.fsum(v for v, _ in parts), math.fsum(e for _, e in parts), METHOD)


def _near_ends(f: Curve, low: float, high: float) -> list[float]:
    """Cuts ever nearer to an end at which the function rises far above what it is a step away."""
    width, cuts = high - low, []
    for end, way in ((low, width), (high, -width)):
        away = abs(tried(f, end + way / STEPS))
        places = [end + way * 10.0**-k for k in range(3, 11)]
        if any(abs(tried(f, place)) > RISES * away for place in places):
            cuts += places
    return cuts


def _refuse_poles(f: Curve, low: float, high: float) -> None:
    """A pole with a change of sign has no integral, yet its two sides can cancel in any quadrature."""
    points = [(x, worked(f, x)) for x in evenly(low, high, STEPS + 1)[1:-1]]
    for x in changes_of_sign(f, points, 0.0)[1]:
        apart = 1e-6 * (high - low)
        near, nearer = (abs(tried(f, x + d)) + abs(tried(f, x - d)) for d in (apart, apart / 1000))
        if not nearer < 100 * near:
            raise NoConvergence("the function has a pole", x, x)


def _size(f: Curve, a: float, b: float) -> float:
    """Roughly the integral of |f|, from inside the stretch."""
    values = [abs(tried(f, x)) for x in evenly(a, b, 34)[1:-1]]
    there = [v for v in values if not math.isnan(v)]
    return (b - a) * sum(there) / len(there) if there else 0.0


def _stretch(f: Curve, a: float, b: float, size: float) -> tuple[float, float]:
    from scipy.integrate import quad

    value, error, _, *trouble = quad(
        lambda x: worked(f, x), a, b, epsabs=ASKED * size, epsrel=ASKED, limit=STRETCHES, full_output=True
    )
    if not (math.isfinite(value) and math.isfinite(error)):
        raise NoConvergence("the sum of the stretches is too large to hold", a, b)
    # an integral without a finite value can come out with a small error estimate: only rounding is forgiven
    if trouble and not ("oundoff" in trouble[0] and error <= GOOD * size):
        raise NoConvergence(_said(trouble[0], error, value), a, b)
    return float(value), float(error)


def _said(message: str, error: float, value: float) -> str:
    """What was wrong, in words of our own."""
    if "divergent" in message:
        return "the integral has no finite value, or comes nearer to it very slowly"
    if "subdivisions" in message:
        return f"{STRETCHES} stretches are not enough: the function swings or grows too fast"
    share = error / abs(value) if value else math.inf
    return f"the error estimate stays at {share:.1g} of the value"

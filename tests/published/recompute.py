"""Where the expected values of algebra.yaml come from: general libraries work each again, not loadpath.

scipy (quadrature, root search, minimisation), numpy (linear systems, interpolation), mpmath and SymPy's
beam module give the numbers; where a handbook has a closed form for the same thing, `agree` holds the two
together. A function stands for a case: it takes the case's inputs (`g.P`) and tables (`t.plates.b`) in
coherent SI units and gives its expected values, in SI too, by name. Deflections downwards and sagging
moments are positive, lengths run from the left end. The file is long because it is a list: a short function
a case, in the file's order.

    python tests/published/recompute.py

prints each value beside the one in the file; its exit code is 1 where any differs. The literature beside
each case in algebra.yaml is cited from memory.
"""

from __future__ import annotations

import math
import sys
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import cos, cosh, exp, log, log10, pi, sin, sinh, sqrt, tan
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import numpy as np
import yaml
from scipy.integrate import quad, solve_bvp
from scipy.optimize import brentq, minimize_scalar
from scipy.special import ellipe, ellipk, hyp2f1, lambertw
from si_factors import si

Curve = Callable[[float], float]
Values = dict[str, float]
WORKED: dict[str, Callable[[SimpleNamespace, SimpleNamespace], Values]] = {}
"""Case id -> the function that works it."""


def case(case_id: str) -> Callable[[Any], Any]:
    def keep(work: Callable[[SimpleNamespace, SimpleNamespace], Values]) -> Any:
        WORKED[case_id] = work
        return work

    return keep


# --- tools --------------------------------------------------------------------------------------------------


def agree(worked: float, other: float, rel_tol: float = 1e-8) -> float:
    """The first value, once a second way has given the same."""
    assert math.isclose(worked, other, rel_tol=rel_tol), f"two ways differ: {worked} and {other}"
    return worked


def area(f: Curve, a: float, b: float, breaks: Sequence[float] = ()) -> float:
    """The integral of f from a to b by scipy's adaptive quadrature, piece by piece between breaks."""
    places = [a, *sorted(p for p in breaks if a < p < b), b]
    return sum(quad(f, p, q, epsabs=0, epsrel=1e-12)[0] for p, q in pairwise(places))


def root(f: Curve, a: float, b: float) -> float:
    """The root between a and b by scipy's brentq."""
    return float(brentq(f, a, b, xtol=1e-14, rtol=1e-14))


def largest(f: Curve, a: float, b: float, breaks: Sequence[float] = ()) -> tuple[float, float]:
    """Where f is largest on [a, b], and that value; at a jump both sides count."""
    places = [a, *sorted(p for p in breaks if a < p < b), b]
    inside = 1e-13 * (b - a)
    found = []
    for p, q in pairwise(places):
        xs = np.linspace(p + inside, q - inside, 401)
        ys = [f(float(x)) for x in xs]
        i = int(np.argmax(ys))
        found.append((ys[i], float(xs[i])))
        if 0 < i < 400:
            fit = minimize_scalar(
                lambda x: -f(x),
                bounds=(xs[i - 1], xs[i + 1]),
                method="bounded",
                options={"xatol": 1e-12 * (b - a)},
            )
            found.append((-fit.fun, float(fit.x)))
    value, place = max(found)
    return place, value


def smallest(f: Curve, a: float, b: float, breaks: Sequence[float] = ()) -> tuple[float, float]:
    """Where f is smallest on [a, b], and that value."""
    place, value = largest(lambda x: -f(x), a, b, breaks)
    return place, -value


@dataclass
class WorkedBeam:
    """What SymPy's beam module gives: reactions upwards by place, and curves along the beam."""

    reactions: dict[float, float]
    v: Curve
    theta: Curve
    moment: Curve
    shear: Curve


def beam(
    length: float,
    stiffness: float,
    supports: Sequence[float],
    clamped: Sequence[float] = (),
    forces: Sequence[tuple[float, float]] = (),
    couples: Sequence[tuple[float, float]] = (),
    lines: Sequence[tuple[float, float, float, float]] = (),
) -> WorkedBeam:
    """A beam by sympy.physics.continuum_mechanics.beam.

    length in m, stiffness E*I in N*m^2; forces (place, N downwards), couples (place, N*m clockwise), lines
    (from, to, N/m at the start, N/m at the end). Moment and shear are taken from the deflection it finds.
    """
    import sympy
    from sympy.physics.continuum_mechanics.beam import Beam

    def exact(value: float) -> Any:
        return sympy.Rational(repr(float(value)))

    x = sympy.Symbol("x")
    worked = Beam(exact(length), exact(stiffness), 1)
    unknown, places = [], []
    for place in supports:
        unknown.append(sympy.Symbol(f"R_{len(unknown)}"))
        places.append(place)
        worked.apply_load(unknown[-1], exact(place), -1)
    for place in clamped:
        unknown.append(sympy.Symbol(f"M_{len(unknown)}"))
        worked.apply_load(unknown[-1], exact(place), -2)
    worked.bc_deflection = [(exact(place), 0) for place in supports]
    worked.bc_slope = [(exact(place), 0) for place in clamped]
    for place, force in forces:
        worked.apply_load(-exact(force), exact(place), -1)
    for place, couple in couples:
        worked.apply_load(exact(couple), exact(place), -2)
    for start, end, w_1, w_2 in lines:
        if w_1:
            worked.apply_load(-exact(w_1), exact(start), 0, end=exact(end))
        if w_2 != w_1:
            rise = (exact(w_2) - exact(w_1)) / (exact(end) - exact(start))
            worked.apply_load(-rise, exact(start), 1, end=exact(end))
    worked.solve_for_reaction_loads(*unknown)
    up = worked.deflection()

    def bracket(x: float, a: float, n: int) -> float:
        return 0.0 if n < 0 or x < a else float((x - a) ** n)

    def curve(expression: Any, factor: float) -> Curve:
        f = sympy.lambdify(x, expression, modules=[{"SingularityFunction": bracket}, "math"])
        return lambda place: factor * float(f(place))

    return WorkedBeam(
        {place: float(worked.reaction_loads[name]) for place, name in zip(places, unknown, strict=False)},
        curve(up, -1),
        curve(sympy.diff(up, x), -1),
        curve(sympy.diff(up, x, 2), stiffness),
        curve(sympy.diff(up, x, 3), stiffness),
    )


# --- (a) double integration with constants ------------------------------------------------------------------


@case("A01-ss-point")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    B = beam(g.L, g.E * g.I, [0, g.L], forces=[(g.a, g.P)])
    b = g.L - g.a
    x_max, v_max = largest(B.v, 0, g.L, [g.a])
    agree(x_max, sqrt(g.a * (g.a + 2 * b) / 3), 1e-6)  # the load stands right of the middle
    v_P = agree(B.v(g.a), g.P * g.a**2 * b**2 / (3 * g.E * g.I * g.L))
    return {
        "R_A": B.reactions[0],
        "R_B": B.reactions[g.L],
        "C_1": B.theta(0),
        "M_P": B.moment(g.a),
        "v_P": v_P,
        "v_max": v_max,
        "x_max": x_max,
    }


@case("A02-propped-udl")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    B = beam(g.L, g.E * g.I, [0, g.L], [0], lines=[(0, g.L, g.w, g.w)])
    x_M, M_span = largest(B.moment, 0, g.L)
    x_v, v_max = largest(B.v, 0, g.L)
    agree(M_span, 9 * g.w * g.L**2 / 128)
    return {
        "R_A": agree(B.reactions[0], 5 * g.w * g.L / 8),
        "R_B": agree(B.reactions[g.L], 3 * g.w * g.L / 8),
        "M_A": agree(-B.moment(0), g.w * g.L**2 / 8),
        "M_span": M_span,
        "x_M": agree(x_M, 5 * g.L / 8, 1e-6),
        "v_max": v_max,
        "x_v": agree(x_v, g.L * (15 - sqrt(33)) / 16, 1e-6),
    }


@case("A03-propped-point")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    B = beam(g.L, g.E * g.I, [0, g.L], [g.L], forces=[(g.a, g.P)])
    b = g.L - g.a
    x_v, v_max = largest(B.v, 0, g.L, [g.a])
    return {
        "R_B": agree(B.reactions[0], g.P * b**2 * (g.a + 2 * g.L) / (2 * g.L**3)),
        "M_P": B.moment(g.a),
        "M_A": agree(B.moment(g.L - 1e-12), -g.P * g.a * b * (g.a + g.L) / (2 * g.L**2)),
        "v_P": B.v(g.a),
        "v_max": v_max,
        "x_v": x_v,
        "x_0": root(B.moment, g.a, g.L - 1e-9),
    }


@case("A04-fixed-point")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    B = beam(g.L, g.E * g.I, [0, g.L], [0, g.L], forces=[(g.a, g.P)])
    b = g.L - g.a
    x_v, v_max = largest(B.v, 0, g.L, [g.a])
    return {
        "R_A": agree(B.reactions[0], g.P * b**2 * (3 * g.a + b) / g.L**3),
        "R_B": B.reactions[g.L],
        "M_A": agree(-B.moment(0), g.P * g.a * b**2 / g.L**2),
        "M_B": agree(-B.moment(g.L - 1e-13), g.P * g.a**2 * b / g.L**2),
        "M_P": agree(B.moment(g.a), 2 * g.P * g.a**2 * b**2 / g.L**3),
        "v_max": agree(v_max, 2 * g.P * b**3 * g.a**2 / (3 * g.E * g.I * (3 * b + g.a) ** 2)),
        "x_v": agree(x_v, g.L - 2 * b * g.L / (3 * b + g.a), 1e-6),
    }


@case("A05-overhang")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    L = g.L_1 + g.L_2
    B = beam(L, g.E * g.I, [0, g.L_1], forces=[(L, g.P)], lines=[(0, L, g.w, g.w)])
    x_M, M_max = largest(B.moment, 0, L, [g.L_1])
    x_up, v_up = smallest(B.v, 0, g.L_1)
    return {
        "R_A": B.reactions[0],
        "R_B": B.reactions[g.L_1],
        "M_B": agree(B.moment(g.L_1), -g.P * g.L_2 - g.w * g.L_2**2 / 2),
        "M_max": M_max,
        "x_M": x_M,
        "v_tip": B.v(L),
        "v_up": v_up,
        "x_up": x_up,
    }


@case("A06-two-span")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    L = g.L_1 + g.L_2
    B = beam(L, g.E * g.I, [0, g.L_1, L], forces=[(g.a, g.P)], lines=[(0, L, g.w, g.w)])
    x_M, M_max = largest(B.moment, 0, L, [g.L_1, g.a])
    x_v, v_max = largest(B.v, 0, L, [g.L_1, g.a])
    c, d = g.a - g.L_1, L - g.a  # the equation of three moments
    loads = g.w * (g.L_1**3 + g.L_2**3) / 4 + g.P * c * d * (g.L_2 + d) / g.L_2
    return {
        "R_A": B.reactions[0],
        "R_B": B.reactions[g.L_1],
        "R_C": B.reactions[L],
        "M_B": agree(B.moment(g.L_1), -loads / (2 * L)),
        "M_max": M_max,
        "x_M": x_M,
        "v_max": v_max,
        "x_v": x_v,
    }


@case("A07-couple")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    B = beam(g.L, g.E * g.I, [0, g.L], couples=[(g.a, g.M_0)])
    M_max, M_min = largest(B.moment, 0, g.L, [g.a])[1], smallest(B.moment, 0, g.L, [g.a])[1]
    x_v, v_max = largest(B.v, 0, g.L, [g.a])
    return {
        "R_A": B.reactions[0],
        "R_B": agree(B.reactions[g.L], g.M_0 / g.L),
        "M_max": agree(M_max, g.M_0 * (1 - g.a / g.L)),
        "M_min": agree(M_min, -g.M_0 * g.a / g.L),
        "v_a": agree(B.v(g.a), g.M_0 * g.a * (g.L - g.a) * (g.L - 2 * g.a) / (3 * g.E * g.I * g.L)),
        "theta_A": B.theta(0),
        "v_max": v_max,
        "x_v": x_v,
    }


@case("A08-triangular")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    B = beam(g.L, g.E * g.I, [0, g.L], lines=[(0, g.L, 0, g.w)])
    x_M, M_max = largest(B.moment, 0, g.L)
    x_v, v_max = largest(B.v, 0, g.L)
    return {
        "R_A": agree(B.reactions[0], g.w * g.L / 6),
        "M_max": agree(M_max, g.w * g.L**2 / (9 * sqrt(3))),
        "x_M": agree(x_M, g.L / sqrt(3), 1e-6),
        "v_max": v_max,
        "x_v": agree(x_v, g.L * sqrt(1 - sqrt(8 / 15)), 1e-6),
        "coef": agree(v_max * g.E * g.I / (g.w * g.L**4), 0.00652, 1e-3),
    }


@case("A09-partial-triangle")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    B = beam(g.L, g.E * g.I, [0, g.L], lines=[(g.c, g.d, 0, g.w)])
    x_M, M_max = largest(B.moment, 0, g.L, [g.c, g.d])
    _, v_max = largest(B.v, 0, g.L, [g.c, g.d])
    R_B = agree(B.reactions[g.L], g.w * (g.d - g.c) / 2 * (g.c + 2 * (g.d - g.c) / 3) / g.L)
    return {
        "R_A": B.reactions[0],
        "R_B": R_B,
        "M_max": M_max,
        "x_M": x_M,
        "v_mid": B.v(g.L / 2),
        "v_max": v_max,
    }


# --- (b) calculus -------------------------------------------------------------------------------------------


@case("A10-stepped-cantilever")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    def curvature(x: float) -> float:
        return g.P * (g.L - x) / (g.E * (g.I_1 if x < g.a else g.I_2))

    v_tip = area(lambda x: curvature(x) * (g.L - x), 0, g.L, [g.a])  # moment-area
    rest = g.L - g.a
    agree(v_tip, g.P / (3 * g.E) * ((g.L**3 - rest**3) / g.I_1 + rest**3 / g.I_2))
    return {
        "theta_tip": area(curvature, 0, g.L, [g.a]),
        "v_tip": v_tip,
        "v_a": area(lambda x: curvature(x) * (g.a - x), 0, g.a),
    }


@case("A11-stepped-ss")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    def tent(x: float, place: float) -> float:
        """The moment of a unit load at a place."""
        return (g.L - place) / g.L * x - max(x - place, 0)

    def v(place: float) -> float:
        return area(
            lambda x: g.P * tent(x, g.b) * tent(x, place) / (g.E * (g.I_1 if x < g.a else g.I_2)),
            0,
            g.L,
            [g.a, g.b, place],
        )

    fit = minimize_scalar(
        lambda x: -v(x), bounds=(0.3 * g.L, 0.7 * g.L), method="bounded", options={"xatol": 1e-10}
    )
    left, right = (g.L - g.b) / g.L, g.b / g.L
    rest = (left**2 * (g.b**3 - g.a**3) + right**2 * (g.L - g.b) ** 3) / g.I_2
    v_P = agree(v(g.b), g.P / (3 * g.E) * (left**2 * g.a**3 / g.I_1 + rest))
    return {"v_P": v_P, "v_max": -fit.fun, "x_v": float(fit.x)}


@case("A12-tapered-plate")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    def strain(x: float) -> float:
        return g.P / (g.E * g.t * (g.b_1 + (g.b_2 - g.b_1) * x / g.L))

    delta = area(strain, 0, g.L)
    return {
        "delta": agree(delta, g.P * g.L * log(g.b_2 / g.b_1) / (g.E * g.t * (g.b_2 - g.b_1))),
        "u_mid": area(strain, 0, g.L / 2),
        "delta_2": delta,
    }


@case("A13-tapered-cantilever")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    def d(x: float) -> float:
        return g.d_1 + (g.d_2 - g.d_1) * x / g.L

    v_tip = area(lambda x: g.P * x**2 / (g.E * pi * d(x) ** 4 / 64), 0, g.L)
    x_s, sigma_max = largest(lambda x: 32 * g.P * x / (pi * d(x) ** 3), 0, g.L)
    agree(d(x_s), 1.5 * g.d_1, 1e-6)
    return {
        "v_tip": agree(v_tip, 64 * g.P * g.L**3 / (3 * pi * g.E * g.d_1 * g.d_2**3)),
        "sigma_max": sigma_max,
        "x_s": x_s,
    }


@case("A14-frame-castigliano")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    EI = g.E * g.I
    down = area(lambda s: g.P * s**2 / EI, 0, g.b) + area(lambda _s: g.P * g.b**2 / EI, 0, g.h)
    side = area(lambda s: g.P * g.b * s / EI, 0, g.h)
    return {
        "d_v": agree(down, g.P * g.b**3 / (3 * EI) + g.P * g.b**2 * g.h / EI),
        "d_h": agree(side, g.P * g.b * g.h**2 / (2 * EI)),
        "U_P": g.P * down / 2,
    }


@case("A15-quarter-circle")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    f = g.P * g.R**2 / (g.E * g.I)
    along = area(lambda u: f * g.R * sin(u) ** 2, 0, pi / 2)
    across = area(lambda u: f * g.R * sin(u) * (1 - cos(u)), 0, pi / 2)
    return {
        "d_along": agree(along, pi * f * g.R / 4),
        "d_across": agree(across, f * g.R / 2),
        "turn": agree(area(lambda u: f * sin(u), 0, pi / 2), f),
    }


@case("A16-ring")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    half = g.P * g.R / 2
    M_0 = area(lambda u: half * (1 - cos(u)), 0, pi / 2) / (pi / 2)  # the quarter doesn't turn
    U = 4 * area(lambda u: (M_0 - half * (1 - cos(u))) ** 2 * g.R / (2 * g.E * g.I), 0, pi / 2)
    coef = agree(2 * U / g.P * g.E * g.I / (g.P * g.R**3), pi / 4 - 2 / pi)
    return {
        "M_0": agree(M_0, half * (1 - 2 / pi)),
        "M_P": agree(half - M_0, g.P * g.R / pi),
        "U": U,
        "delta": 2 * U / g.P,
        "coef": coef,
    }


@case("A17-unit-load")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    def product(x: float) -> float:
        return g.w * x * (g.L - x) / 2 * ((g.L - g.c) / g.L * x - max(x - g.c, 0)) / (g.E * g.I)

    closed = g.w * g.c * (g.L**3 - 2 * g.L * g.c**2 + g.c**3) / (24 * g.E * g.I)
    return {"delta": agree(area(product, 0, g.L, [g.c]), closed)}


@case("A18-arc-length")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    arc = area(lambda x: sqrt(1 + (x / g.L) ** 3), 0, g.L)
    agree(arc, g.L * float(hyp2f1(-1 / 2, 1 / 3, 4 / 3, -1)))
    return {"arc": arc, "W": g.q * arc}


@case("A19-elastica")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    k = sin(g.alpha / 2)
    K = area(lambda u: 1 / sqrt(1 - k**2 * sin(u) ** 2), 0, pi / 2)
    E = area(lambda u: sqrt(1 - k**2 * sin(u) ** 2), 0, pi / 2)
    agree(K, float(ellipk(k**2)))
    agree(E, float(ellipe(k**2)))
    ratio, x_a, y_a = (2 * K / pi) ** 2, 2 * E / K - 1, 2 * k / K
    agree(ratio, 1.152, 5e-4)  # the printed table for a tip that turns by 60 degrees
    agree(x_a, 0.741, 7e-4)
    agree(y_a, 0.593, 9e-4)
    return {
        "K_1": K,
        "K_2": E,
        "P": K**2 * g.E * g.I / g.L**2,
        "ratio": ratio,
        "x_a": x_a * g.L,
        "y_a": y_a * g.L,
    }


@case("A20-fourier")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    EI = g.E * g.I
    j = np.arange(21)
    v_w = 4 * g.w * g.L**4 / (pi**5 * EI) * float(np.sum((-1.0) ** j / (2 * j + 1) ** 5))
    j = np.arange(1, 61)
    v_P = 2 * g.P * g.L**3 / (pi**4 * EI) * float(np.sum(np.sin(j * pi * g.a / g.L) ** 2 / j**4))
    agree(v_w, 5 * g.w * g.L**4 / (384 * EI), 1e-6)
    agree(v_P, g.P * g.a**2 * (g.L - g.a) ** 2 / (3 * EI * g.L), 1e-5)
    return {"v_w": v_w, "v_P": v_P}


@case("A21-beam-column")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    import mpmath

    u = g.L / 2 * sqrt(g.P / (g.E * g.I))
    chi, eta = 3 * (tan(u) - u) / u**3, 12 * (2 / cos(u) - 2 - u**2) / (5 * u**4)
    chi_0 = float(mpmath.limit(lambda h: 3 * (mpmath.tan(h) - h) / h**3, 0))
    with mpmath.workdps(60):  # the numerator vanishes with the fourth power
        eta_0 = float(mpmath.limit(lambda h: 12 * (2 * mpmath.sec(h) - 2 - h**2) / (5 * h**4), 0))
    half = g.L / 2  # the left half of the beam: E*I*v'' = -Q*x/2 - P*v, v(0) = 0, v'(half) = 0
    fit = solve_bvp(
        lambda x, y: np.vstack([y[1], -(g.Q * x / 2 + g.P * y[0]) / (g.E * g.I)]),
        lambda ya, yb: np.array([ya[0], yb[1]]),
        np.linspace(0, half, 50),
        np.zeros((2, 50)),
        tol=1e-10,
        max_nodes=20_000,
    )
    v_Q = agree(g.Q * g.L**3 / (48 * g.E * g.I) * chi, float(fit.sol(half)[0]), 1e-7)
    return {
        "chi_0": agree(chi_0, 1),
        "eta_0": agree(eta_0, 1),
        "u_1": u,
        "chi_1": chi,
        "eta_1": eta,
        "v_Q": v_Q,
    }


@case("A22-derivatives")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    import sympy

    x = sympy.Symbol("x")
    w, L, EI = (sympy.Rational(repr(value)) for value in (g.w, g.L, g.E * g.I))
    moment = -EI * sympy.diff(w * x**2 * (L - x) ** 2 / (24 * EI), x, 2)
    shear = sympy.diff(moment, x)
    return {
        "M_A": agree(float(moment.subs(x, 0)), -g.w * g.L**2 / 12),
        "M_mid": agree(float(moment.subs(x, L / 2)), g.w * g.L**2 / 24),
        "V_A": float(shear.subs(x, 0)),
        "q_3": float(-sympy.diff(shear, x).subs(x, L / 3)),
    }


# --- (c) largest and smallest -------------------------------------------------------------------------------


@case("A23-elastic-foundation")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    beta = (g.k / (4 * g.E * g.I)) ** 0.25

    def v(x: float) -> float:
        return g.P * beta / (2 * g.k) * exp(-beta * x) * (cos(beta * x) + sin(beta * x))

    def moment(x: float) -> float:
        return g.P / (4 * beta) * exp(-beta * x) * (cos(beta * x) - sin(beta * x))

    x_up, v_up = smallest(v, 0, 5 / beta)
    x_neg, M_neg = smallest(moment, 0, 5 / beta)
    return {
        "beta": beta,
        "v_0": v(0),
        "M_0": moment(0),
        "v_up": agree(v_up, -exp(-pi) * v(0)),
        "x_up": agree(x_up, pi / beta, 1e-6),
        "M_neg": agree(M_neg, -exp(-pi / 2) * moment(0)),
        "x_neg": agree(x_neg, pi / (2 * beta), 1e-6),
    }


@case("A24-damped-blow")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    omega_n, zeta = sqrt(g.k / g.m_0), g.c / (2 * sqrt(g.k * g.m_0))
    omega_d = omega_n * sqrt(1 - zeta**2)

    def y(t: float) -> float:
        return g.v_0 / omega_d * exp(-zeta * omega_n * t) * sin(omega_d * t)

    t_max, y_max = largest(y, 0, 2)
    t_min, y_min = smallest(y, 0, 2)
    agree(t_max, math.atan2(omega_d, zeta * omega_n) / omega_d, 1e-6)
    agree(y_min, -y_max * exp(-zeta * omega_n * pi / omega_d))  # the logarithmic decrement over half a period
    return {"zeta": zeta, "omega_d": omega_d, "y_max": y_max, "t_max": t_max, "y_min": y_min, "t_min": t_min}


@case("A25-two-wheels")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    def under_first(x: float) -> float:
        return (g.P_1 * (g.L - x) + g.P_2 * max(g.L - x - g.d, 0)) / g.L * x

    def under_second(x: float) -> float:
        return (g.P_2 * x + g.P_1 * max(x - g.d, 0)) / g.L * (g.L - x)

    x_1, M_1 = largest(under_first, 0, g.L, [g.L - g.d])
    x_2, M_2 = largest(under_second, 0, g.L, [g.d])
    both = g.P_1 + g.P_2
    return {
        "M_max_1": agree(M_1, both / (4 * g.L) * (g.L - g.P_2 * g.d / both) ** 2),
        "x_1": agree(x_1, (g.L - g.P_2 * g.d / both) / 2, 1e-6),
        "M_max_2": agree(M_2, both / (4 * g.L) * (g.L - g.P_1 * g.d / both) ** 2),
        "x_2": agree(x_2, (g.L + g.P_1 * g.d / both) / 2, 1e-6),
    }


@case("A26-jumps")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    B = beam(g.L, 1.0e6, [0, g.b], forces=[(g.a, g.P_1), (g.L, g.P_2)], lines=[(0, g.L, g.w, g.w)])
    breaks = [g.a, g.b]
    (x_Vmax, V_max), (x_Vmin, V_min) = largest(B.shear, 0, g.L, breaks), smallest(B.shear, 0, g.L, breaks)
    (x_Mmax, M_max), (x_Mmin, M_min) = largest(B.moment, 0, g.L, breaks), smallest(B.moment, 0, g.L, breaks)
    agree(V_max, g.P_2 + g.w * (g.L - g.b))
    return {
        "R_A": B.reactions[0],
        "R_B": B.reactions[g.b],
        "V_max": V_max,
        "x_V1": agree(x_Vmax, g.b),
        "V_min": V_min,
        "x_V2": agree(x_Vmin, g.b),
        "M_max": M_max,
        "x_M1": x_Mmax,
        "M_min": M_min,
        "x_M2": agree(x_Mmin, g.b, 1e-6),
    }


# --- (d) equations ------------------------------------------------------------------------------------------


def linear(rows: Sequence[Sequence[float]], right: Sequence[float]) -> list[float]:
    """A linear system by numpy; the solution is put back into every equation."""
    matrix, sides = np.array(rows, dtype=float), np.array(right, dtype=float)
    found = np.linalg.solve(matrix, sides)
    assert np.allclose(matrix @ found, sides, rtol=1e-12, atol=1e-12 * np.abs(matrix * found).max())
    return [float(value) for value in found]


@case("A27-bar-between-walls")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    f_1, f_2 = g.L_1 / (g.E_1 * g.A_1), g.L_2 / (g.E_2 * g.A_2)
    free_1, free_2 = g.alpha_1 * g.dT * g.L_1, g.alpha_2 * g.dT * g.L_2
    R_A, R_B, u = linear([[1, 1, 0], [f_1, 0, -1], [0, f_2, -1]], [g.P, -free_1, free_2])
    agree(R_A, (f_2 * g.P - free_1 - free_2) / (f_1 + f_2))
    return {"R_A": R_A, "R_B": R_B, "u_1": u}


@case("A28-three-bars")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    c = cos(g.alpha)
    k_1, k_2 = g.E_1 * g.A_1 / g.L, g.E_2 * g.A_2 * c**2 / g.L
    F_1, F_2, delta = linear([[1, 2 * c, 0], [1, 0, -k_1], [0, 1, -k_2]], [g.P, 0, 0])
    agree(F_1, g.P / (1 + 2 * c**3 * g.E_2 * g.A_2 / (g.E_1 * g.A_1)))
    return {"F_1": F_1, "F_2": F_2, "delta": delta}


@case("A29-wall-crane")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    s, c = sin(g.beta), cos(g.beta)
    A_x, A_y, T = linear([[0, 0, s * g.b], [1, 0, -c], [0, 1, s]], [g.W * g.L, 0, g.W])
    return {"A_x": A_x, "A_y": A_y, "T": T}


@case("A30-three-moments")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    b, c = g.L_1, g.L_1 + g.L_2
    end = c + g.L_3
    B = beam(
        end, 1.0e6, [0, b, c, end], lines=[(0, b, g.w_1, g.w_1), (b, c, g.w_2, g.w_2), (c, end, g.w_3, g.w_3)]
    )
    M_B, M_C = linear(
        [[2 * (g.L_1 + g.L_2), g.L_2], [g.L_2, 2 * (g.L_2 + g.L_3)]],
        [(g.w_1 * g.L_1**3 + g.w_2 * g.L_2**3) / 4, (g.w_2 * g.L_2**3 + g.w_3 * g.L_3**3) / 4],
    )
    agree(B.moment(b), -M_B)
    agree(B.moment(c), -M_C)
    return {
        "M_B": M_B,
        "M_C": M_C,
        **dict(zip(("R_A", "R_B", "R_C", "R_D"), B.reactions.values(), strict=True)),
    }


@case("A31-truss-joints")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    A, B, C = np.array([0.0, 0.0]), np.array([g.L, 0.0]), np.array([g.c, g.h])

    def along(p: Any, q: Any) -> Any:
        return (q - p) / np.linalg.norm(q - p)

    zero = np.zeros(2)
    across, up = np.array([1.0, 0.0]), np.array([0.0, 1.0])
    columns = [  # what each unknown does at the joints A, B, C
        (along(A, C), zero, along(C, A)),
        (zero, along(B, C), along(C, B)),
        (along(A, B), along(B, A), zero),
        (across, zero, zero),
        (up, zero, zero),
        (zero, up, zero),
    ]
    matrix = np.array([np.concatenate(column) for column in columns]).T
    found = linear(matrix, [0, 0, 0, 0, -g.H, g.P])
    return dict(zip(("N_AC", "N_BC", "N_AB", "A_x", "A_y", "B_y"), found, strict=True))


@case("A32-cracked-section")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    nA = g.n * g.A_s
    depth = root(lambda x: g.b * x**2 / 2 - nA * (g.d - x), 0, g.d)
    agree(depth, (-nA + sqrt(nA**2 + 2 * g.b * nA * g.d)) / g.b)
    I_cr = g.b * depth**3 / 3 + nA * (g.d - depth) ** 2
    sigma_c = agree(g.M * depth / I_cr, 2 * g.M / (g.b * depth * (g.d - depth / 3)))
    return {"x_n": depth, "I_cr": I_cr, "sigma_c": sigma_c, "sigma_s": g.n * g.M * (g.d - depth) / I_cr}


@case("A33-base-plate")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    e, half = g.M / g.P, g.H / 2
    k = 6 * g.n * g.A_s / g.B * (g.f + e)
    roots = np.roots([1, 3 * (e - half), k, -k * (half + g.f)])
    (Y,) = (float(r.real) for r in roots if abs(r.imag) < 1e-9 * abs(r) and 0 < r.real < g.H)
    T = -g.P * (half - Y / 3 - e) / (half - Y / 3 + g.f)
    sigma_c = 2 * (g.P + T) / (Y * g.B)
    agree(T / g.A_s, g.n * sigma_c * (half + g.f - Y) / Y)  # plane strains at the bolts
    return {"Y": Y, "T": T, "sigma_c": sigma_c}


@case("A34-secant-eccentricity")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    def stress(P: float, e: float) -> float:
        return P / g.A * (1 + e * g.c / g.r**2 / cos(g.L / (2 * g.r) * sqrt(P / (g.E * g.A))))

    e_max = root(lambda e: stress(g.P, e) - g.f_y, 0, 0.05)
    P_y = root(lambda P: stress(P, g.e_1) - g.f_y, 0, g.f_y * g.A)
    turn = g.L / (2 * g.r) * sqrt(g.P / (g.E * g.A))
    agree(e_max, (g.f_y * g.A / g.P - 1) * g.r**2 / g.c * cos(turn))
    agree(stress(P_y, g.e_1), g.f_y)
    return {"e_max": e_max, "P_y": P_y}


@case("A35-colebrook")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    f = root(lambda f: 1 / sqrt(f) + 2 * log10(g.eps / (3.7 * g.D) + 2.51 / (g.Re * sqrt(f))), 0.008, 0.08)
    a, b = g.eps / (3.7 * g.D), 2.51 / g.Re
    c = log(10) / (2 * b)  # 1/sqrt(f) by the W function
    agree(1 / sqrt(f), 2 / log(10) * float(lambertw(c * exp(a * c)).real) - a / b)
    return {"f": f, "dp": f * g.L / g.D * g.rho * g.v**2 / 2}


@case("A36-propped-column")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    u = root(lambda u: sin(u) - u * cos(u), 4, 4.6)
    agree(u, 4.493409457909064)
    return {"u_1": u, "P_cr": u**2 * g.E * g.I / g.L**2, "K_e": pi / u}


@case("A37-press-fit")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    def interference(p: float, D: float) -> float:
        hub = (D**2 + g.d**2) / (D**2 - g.d**2) + g.nu_h
        return p * g.d * (hub / g.E_h + (1 - g.nu_s) / g.E_s)

    p = g.delta / interference(1, g.D)
    D_r = root(lambda D: interference(g.p_r, D) - g.delta, 1.05 * g.d, 6 * g.d)
    rest = (g.delta / (g.p_r * g.d) - (1 - g.nu_s) / g.E_s) * g.E_h - g.nu_h  # (D^2 + d^2)/(D^2 - d^2)
    agree(D_r, g.d * sqrt((rest + 1) / (rest - 1)))
    return {"p": p, "sigma_h": p * (g.D**2 + g.d**2) / (g.D**2 - g.d**2), "D_r": D_r}


@case("A38-two-hyperbolas")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    s = root(lambda s: 4 * g.E * g.I * (1 / s + 1 / (g.L - s)) - g.k_r, 0.1 * g.L, g.L / 2)
    agree(s, g.L / 2 - sqrt(g.L**2 / 4 - 4 * g.E * g.I * g.L / g.k_r))
    return {"s_1": s, "share": (1 / s) / (1 / s + 1 / (g.L - s))}


@case("A39-catenary")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    H = root(lambda H: H / g.q * (cosh(g.q * g.l / (2 * H)) - 1) - g.f, si(50, "lbf"), si(5000, "lbf"))
    length = 2 * H / g.q * sinh(g.q * g.l / (2 * H))
    agree(length, area(lambda x: cosh(g.q * x / H), -g.l / 2, g.l / 2))
    return {"H": H, "T_max": H + g.q * g.f, "S": length}


@case("A40-belt")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    F = g.P / g.v
    T_1, T_2 = linear([[1, -1], [1, -exp(g.mu * g.beta)]], [F, 0])
    mu_r = root(lambda mu: exp(mu * g.beta) - g.T_lim / (g.T_lim - F), 0.01, 1)
    return {"T_1": T_1, "T_2": T_2, "mu_r": agree(mu_r, log(g.T_lim / (g.T_lim - F)) / g.beta)}


@case("A41-straight-wire")
def _(g: SimpleNamespace, _t: SimpleNamespace) -> Values:
    EA = g.E * pi * g.d**2 / 4
    turn = root(lambda u: 2 * EA * (tan(u) - sin(u)) - g.P, 0, 1)
    agree(turn, (g.P / EA) ** (1 / 3), 1e-2)  # the first term of the series
    N = agree(EA * (1 / cos(turn) - 1), g.P / (2 * sin(turn)))
    return {"theta_1": turn, "delta": g.b * tan(turn), "N_1": N}


# --- (e) tables ---------------------------------------------------------------------------------------------


@case("A42-plate-girder")
def _(g: SimpleNamespace, t: SimpleNamespace) -> Values:
    b, h, y = t.plates.b, t.plates.h, t.plates.y
    A = b * h
    y_0 = float(np.sum(A * y) / np.sum(A))

    def width(z: float) -> float:
        return float(b[int(np.argmin(np.abs(z - y) / h))])  # of the piece at that height

    top = float(np.max(y + h / 2))
    edges = [float(edge) for edge in np.sort(y - h / 2)]
    I_y = float(np.sum(b * h**3 / 12 + A * (y - y_0) ** 2))
    agree(I_y, area(lambda z: width(z) * (z - y_0) ** 2, 0, top, edges[1:]))
    i = t.plates.label.index("top flange")
    return {
        "A_all": float(np.sum(A)),
        "A_web": float(A[t.plates.label.index("web")]),
        "y_0": y_0,
        "I_y": I_y,
        "W_top": I_y / (top - y_0),
        "W_bot": I_y / y_0,
        "S_top": float(A[i] * (y[i] - y_0)),
    }


@case("A43-composite-girder")
def _(g: SimpleNamespace, t: SimpleNamespace) -> Values:
    p = t.parts
    EA = p.E * p.A
    y_0 = float(np.sum(EA * p.y) / np.sum(EA))
    EI = float(np.sum(p.E * (p.I + p.A * (p.y - y_0) ** 2)))
    n = p.E / p.E[p.label.index("beam")]  # the transformed section in steel
    agree(EI, float(p.E[p.label.index("beam")] * np.sum(n * (p.I + p.A * (p.y - y_0) ** 2))))
    slab = p.label.index("slab")
    return {
        "y_0": y_0,
        "EI": EI,
        "sigma_s": float(p.E[p.label.index("beam")]) * g.M * y_0 / EI,
        "sigma_c": float(p.E[slab]) * g.M * (g.H - y_0) / EI,
    }


@case("A44-load-combinations")
def _(g: SimpleNamespace, t: SimpleNamespace) -> Values:
    c = t.combos
    M = np.column_stack([c.g_G, c.g_Q, c.g_W]) @ np.array([g.M_G, g.M_Q, g.M_W])
    return {
        "M_max": float(M.max()),
        "M_min": float(M.min()),
        "M_2": float(M[c.label.index("LC2")]),
        "n_c": float(len(M)),
        "eta_max": float(np.abs(M).max() / g.M_Rd),
    }


@case("A45-interp")
def _(g: SimpleNamespace, t: SimpleNamespace) -> Values:
    c = t.chart
    return {
        "K_1": float(np.interp(g.r / g.d, c.r_d, c.K_t)),
        "r_min": float(np.interp(g.K_lim, c.K_t[::-1], c.r_d[::-1])) * g.d,
    }


@case("A46-interp-two-way")
def _(g: SimpleNamespace, t: SimpleNamespace) -> Values:
    from scipy.interpolate import RegularGridInterpolator

    grid = RegularGridInterpolator((t.caps.rows, t.caps.heads), t.caps.cells)
    N_1 = float(grid([[g.l_1, g.b_1]])[0])
    return {"N_1": N_1, "N_2": float(t.caps.cells[1, 2]), "eta": g.N_Ed / N_1}


@case("A47-lookup")
def _(g: SimpleNamespace, t: SimpleNamespace) -> Values:
    s = t.grades
    row = int(np.searchsorted(s.t_over, g.t, side="right")) - 1
    need = g.N_Ed / (g.b * float(s.f_y[row]))
    return {
        "f_y": float(s.f_y[row]),
        "f_u": float(s.f_u[row]),
        "t_min": need,
        "t_up": math.ceil(need / 0.005) * 0.005,
    }


@case("A48-curve-by-choice")
def _(g: SimpleNamespace, t: SimpleNamespace) -> Values:
    alpha = float(t.curves.alpha[t.curves.label.index("b")])
    bar = g.L / g.i / (pi * sqrt(g.E / g.f_y))
    phi = 0.5 * (1 + alpha * (bar - 0.2) + bar**2)
    # the reduction factor is the smaller root of chi^2*bar^2 - 2*phi*chi + 1 = 0 (Ayrton and Perry)
    chi = agree(float(min(np.roots([bar**2, -2 * phi, 1]))), 1 / (phi + sqrt(phi**2 - bar**2)))
    return {"alpha": alpha, "lambda_1": bar, "chi": chi, "N_b": chi * g.A * g.f_y}


@case("A49-truss-table")
def _(g: SimpleNamespace, t: SimpleNamespace) -> Values:
    b = t.bars
    N = g.P * b.n_1
    sigma, N_cr = N / b.A, pi**2 * g.E * b.I / b.L**2
    use = np.array([max(abs(s) / g.f_y, -n / c) for s, n, c in zip(sigma, N, N_cr, strict=True)])
    agree(float(N[b.label.index("AC")]), -g.P / 2 * 5 / 4)  # joint A: the bar rises 4 in 5
    return {
        "delta": float(np.sum(N * b.n_1 * b.L / (g.E * b.A))),
        "sigma_max": float(sigma.max()),
        "sigma_min": float(sigma.min()),
        "u_max": float(use.max()),
        "u_BC": float(use[b.label.index("BC")]),
        "L_all": float(b.L.sum()),
        "n_bars": float(len(sigma)),
    }


@case("A50-bolt-group")
def _(g: SimpleNamespace, t: SimpleNamespace) -> Values:
    x, y = t.bolts.x, t.bolts.y
    J = float(np.sum(x**2 + y**2))
    T = g.P * g.e
    R = np.hypot(T * y / J, g.P / len(x) + T * x / J)
    agree(float(np.sum(x * (g.P / len(x) + T * x / J) + y * T * y / J)), T)  # moment about the centre
    return {
        "J": J,
        "R_max": float(R.max()),
        "R_min": float(R.min()),
        "R_3": float(R[t.bolts.label.index("b3")]),
    }


@case("A51-damage-sum")
def _(g: SimpleNamespace, t: SimpleNamespace) -> Values:
    b = t.blocks
    N = g.N_C * (g.S_C / b.S) ** 3
    D = float(np.sum(b.n / N))
    S_e = float((np.sum(b.n * b.S**3) / np.sum(b.n)) ** (1 / 3))
    agree(D, float(np.sum(b.n)) / (g.N_C * (g.S_C / S_e) ** 3))
    return {"D": D, "years": g.years_run / D, "S_e": S_e, "N_top": float(N[b.label.index("storm")])}


# --- the file -----------------------------------------------------------------------------------------------


def _cell(typed: Any, unit: str, inputs: Values) -> float:
    """A cell in SI: a number in its column's unit, a quantity with its own, or the name of an input."""
    if not isinstance(typed, str):
        return si(typed, unit)
    if typed in inputs:
        return inputs[typed]
    number, own = typed.split()
    return si(float(number), own)


def _table(table: dict[str, Any], inputs: Values) -> SimpleNamespace:
    """Columns as arrays by name, or, where the header holds quantities, `rows`, `heads` and `cells`."""
    head, rows = table["columns"], table["rows"]
    columns = SimpleNamespace()
    if isinstance(head[1], str):
        columns.heads = np.array([_cell(typed, "1", inputs) for typed in head[1:]])
        columns.rows = np.array([_cell(row[0], head[0]["unit"], inputs) for row in rows])
        columns.cells = np.array([[_cell(typed, "1", inputs) for typed in row[1:]] for row in rows])
        return columns
    for i, column in enumerate(head):
        if i == 0 and isinstance(rows[0][0], str):
            columns.label = [row[0] for row in rows]
            continue
        values = [_cell(row[i], column.get("unit", "1"), inputs) for row in rows]
        setattr(columns, column["name"], np.array(values))
    return columns


def work(problem: dict[str, Any]) -> Values:
    """The expected values of a case in SI, by name, worked from its inputs and tables."""
    inputs = {given["name"]: si(given["value"], given["unit"]) for given in problem["inputs"]}
    tables = {table["name"]: _table(table, inputs) for table in problem.get("tables", [])}
    return WORKED[problem["id"]](SimpleNamespace(**inputs), SimpleNamespace(**tables))


def compared(problem: dict[str, Any]) -> list[tuple[str, float, float, bool]]:
    """For each expected value: name, the file's and the worked value in SI, and if they agree to rel_tol.

    A value that is worked but not in the file, or the other way round, is a KeyError.
    """
    worked, rows = work(problem), []
    for expected in problem["expected"]:
        value, again = si(expected["value"], expected["unit"]), worked.pop(expected["name"])
        rows.append((expected["name"], value, again, abs(again - value) <= expected["rel_tol"] * abs(value)))
    if worked:
        raise KeyError(f"{problem['id']}: not in the file: {', '.join(worked)}")
    return rows


def main() -> int:
    problems = yaml.safe_load((Path(__file__).parent / "algebra.yaml").read_text(encoding="utf-8"))
    wrong = 0
    for problem in problems:
        for name, value, again, same in compared(problem):
            wrong += not same
            print(f"{problem['id']:24} {name:10} {value:18.10g} {again:18.10g}{'' if same else '   differs'}")
    print(f"{len(problems)} cases, {wrong} values differ")
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())

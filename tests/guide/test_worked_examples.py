"""The worked examples of the guide in a second arithmetic.

source: scipy (quadrature, roots, interpolation) and numpy, general libraries that share no code with the
engine; each number is worked from the problem as stated, not from the formulas of the sheet.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.interpolate import RegularGridInterpolator
from scipy.optimize import brentq, minimize_scalar
from test_guide_pages import of_kind, worked


def propped_beam() -> dict[str, float]:
    """A cantilever held by the force that brings its tip back, each by the work of a unit load."""
    span, w, p, a, stiffness = 6.0, 3.5e3, 9e3, 2.4, 210e9 * 1943e-8

    def free(x: float) -> float:
        return -w * x**2 / 2 - p * max(x - a, 0.0)

    prop = -quad(lambda x: free(x) * x, 0, span, points=[a])[0] / quad(lambda x: x * x, 0, span)[0]

    def moment(x: float) -> float:
        return prop * x + free(x)

    def sag(at: float) -> float:
        return -float(quad(lambda x: moment(x) * (x - at) / stiffness, at, span, points=[max(a, at)])[0])

    lowest = minimize_scalar(lambda x: -sag(x), bounds=(1, 5), method="bounded", options={"xatol": 1e-10})
    return {
        "R_B": prop, "C_1": quad(lambda x: moment(x) / stiffness, 0, span, points=[a])[0],
        "M_wall": moment(span), "M_field": moment(a), "x_field": a, "v_max": -lowest.fun,
    }  # fmt: skip


def eccentric_column() -> dict[str, float]:
    """The stress from the bow that the column takes, its root by bracketing."""
    n, e, span, d, t, modulus, f_y = 60e3, 0.025, 4.0, 0.1143, 0.005, 210e9, 275e6
    area = np.pi / 4 * (d**2 - (d - 2 * t) ** 2)
    inertia = np.pi / 64 * (d**4 - (d - 2 * t) ** 4)

    def stress(force: float, off: float) -> float:
        bow = off / np.cos(span / 2 * np.sqrt(force / (modulus * inertia)))
        return float(force / area + force * bow * d / 2 / inertia)

    euler = np.pi**2 * modulus * inertia / span**2
    return {
        "sigma_N": stress(n, e), "P_E": euler,
        "P_y": brentq(lambda force: stress(force, e) - f_y, 1, euler * (1 - 1e-9), xtol=1e-6),
        "e_max": brentq(lambda off: stress(2 * n, off) - f_y, 0, 0.2, xtol=1e-12),
    }  # fmt: skip


def built_up_section() -> dict[str, float]:
    """The section integrated over its height, in thin strips."""
    b, h, z = np.array([80, 12, 160.0]), np.array([12, 150, 15.0]), np.array([6, 87, 169.5])
    parts = [np.linspace(m - t / 2, m + t / 2, 20001) for m, t in zip(z, h, strict=True)]

    def over(power: int, about: float = 0.0, first: int = 0) -> float:
        return sum(
            w * float(np.trapezoid((p - about) ** power, p))
            for w, p in list(zip(b, parts, strict=True))[first:]
        )

    area = over(0)
    middle = over(1) / area
    inertia = over(2, middle)
    return {
        "A": area * 1e-6, "z_S": middle * 1e-3, "I": inertia * 1e-12, "W_b": inertia / middle * 1e-9,
        "sigma_bottom": 18e6 * middle / inertia * 1e6, "q": 60e3 * over(1, middle, 2) / inertia * 1e3,
    }  # fmt: skip


def davit() -> dict[str, float]:
    """By the work of a unit load."""
    p, a, h, d, t, modulus = 5e3, 1.2, 1.8, 0.1397, 0.008, 210e9
    area = np.pi / 4 * (d**2 - (d - 2 * t) ** 2)
    bending = modulus * np.pi / 64 * (d**4 - (d - 2 * t) ** 4)
    down = quad(lambda s: p * s * s, 0, a)[0] + quad(lambda y: p * a * a, 0, h)[0]
    return {
        "delta": down / bending + p * h / (modulus * area),
        "delta_H": quad(lambda y: p * a * y, 0, h)[0] / bending,
    }  # fmt: skip


def portal() -> dict[str, float]:
    """The thrust that brings the feet of the frame back together, by the work of a unit thrust."""
    w, span, h, beam, post = 12e3, 6.0, 3.5, 5790e-8, 3892e-8
    apart = quad(lambda s: w * s * (span - s) / 2 * h, 0, span)[0] / beam
    back = 2 * quad(lambda y: y * y, 0, h)[0] / post + h * h * span / beam
    thrust = apart / back
    return {"H": thrust, "M_corner": -thrust * h, "M_mid": w * span**2 / 8 - thrust * h}


def algebra() -> Iterator[tuple[str, float]]:
    yield "beta", brentq(lambda x: x - np.sin(x) * np.cos(x) - 1.2, 0, np.pi / 2)
    c = brentq(lambda c: 2 * c * np.sinh(2.5 / c) - 6, 0.5, 20, xtol=1e-12)
    yield from {"c": c, "f": c * (np.cosh(2.5 / c) - 1)}.items()
    yield "v_mid", quad(lambda x: 2e3 * x * (3 - x) / 2 * x / 2, 0, 1.5)[0] * 2 / (210e9 * 317.8e-8)
    load = quad(lambda x: 6e3 * (1 - x / 5), 0, 5)[0]
    yield from {"R": load, "x_R": quad(lambda x: 6e3 * (1 - x / 5) * x, 0, 5)[0] / load}.items()
    yield "Q_2", quad(lambda x: 6e3 * (1 - x / 5), 0, 2)[0]
    yield "y_l", quad(lambda s: np.sin(s**2 / (2 * 40**2)), 0, 30)[0]
    x = np.linspace(0, 4, 400_001)
    moment = 10e3 * x - 2e3 * x**2 / 2 - 8e3 * np.maximum(x - 1, 0)
    yield from {"M_max": float(moment.max()), "x_M": float(x[moment.argmax()])}.items()


def tables() -> dict[str, float]:
    drag = RegularGridInterpolator(([1, 3], [1, 2, 4]), np.array([[1.1, 1.2, 1.3], [1.2, 1.3, 1.5]]))
    return {
        "chi_1": float(np.interp(0.84, [0.2, 0.6, 1.0, 1.4], [1.0, 0.89, 0.67, 0.42])),
        "C_1": float(drag((2, 3))),
        "sigma_max": max(f / (np.pi / 4 * d**2) for f, d in ((18e3, 0.02), (12e3, 0.016), (6e3, 0.012))),
        "M_1": 1.35 * 8e3 + 1.5 * 22e3 + 0.75 * 9e3,
        "W_far": quad(lambda x: 8e3 * x * (4 - x) / 4, 0, 3)[0],
    }  # fmt: skip


EXAMPLES: dict[str, dict[str, float]] = {
    "propped-beam": propped_beam(), "eccentric-column": eccentric_column(),
    "built-up-section": built_up_section(), "frame-energy": davit() | portal(), "algebra": dict(algebra()),
    "tables": tables(),
}  # fmt: skip


@pytest.mark.parametrize("page", EXAMPLES)
def test_the_numbers_of_a_page_are_those_of_a_second_arithmetic(page: str) -> None:
    """Each of them stands on some sheet of the page."""
    wanted = dict(EXAMPLES[page])
    for fence in of_kind("sheet"):
        if fence.page != page:
            continue
        trace = worked(fence)
        ids = {step.id for step in trace.steps}
        for name in [name for name in wanted if name in ids]:
            if trace[name].si == pytest.approx(wanted[name], rel=2e-8):
                del wanted[name]
    assert wanted == {}

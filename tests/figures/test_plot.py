# ruff: noqa: E501
"""The drawing, read back from its SVG: boxes are those of the drawn outlines, not the layout's own accounts."""

from __future__ import annotations

import hashlib
import json
import math
import os
import re
import subprocess
import sys
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from itertools import combinations, pairwise
from pathlib import Path
from xml.etree import ElementTree

import pytest

from loadpath.figures import MOST_PEAKS, MOST_POINTS, Curve, Peak, Picture, describe, svg

ROOT = Path(__file__).parents[2]
NAMESPACE = "{http://www.w3.org/2000/svg}"
Place = tuple[float, float]
Box = tuple[float, float, float, float]


def sampled(f: Callable[[float], float], end: float = 5.0) -> tuple[Place, ...]:
    return tuple((end * i / 200, f(end * i / 200)) for i in range(201))


def moment(x: float) -> float:
    return 22.5 * x if x <= 2 else 45 + 2.5 * (x - 2) - 10 / 3 * (x - 2) ** 2


def picture(*curves: Curve, alt: str = "") -> Picture:
    return Picture("x", "m", curves, alt)


SHEAR = Curve(
    "V(x)", "V", "kN", ((0, 22.5), (2, 22.5), (2, 2.5), (5, -17.5)),
    (Peak(0, 22.5, "22.5 kN at 0 m"), Peak(5, -17.5, "−17.5 kN at 5 m")),
)  # fmt: skip
MOMENT = Curve(
    "M(x)", "M", "kN⋅m", sampled(moment),
    (Peak(2.375, moment(2.375), "45.47 kN⋅m at 2.375 m"), Peak(4, moment(4), "36.67 kN⋅m at 4 m")),
)  # fmt: skip
STRESSES = (
    Curve(
        "σ_b(x)",
        "sigma_b",
        "MPa",
        sampled(lambda x: 80 * math.sin(x)),
        (Peak(1.5708, 80, "80.00 MPa at 1.571 m"),),
    ),
    Curve("τ(x)", "tau", "MPa", sampled(lambda x: 40 * math.cos(x)), ()),
    Curve("σ_v(x)", "sigma_v", "MPa", sampled(lambda x: 20 + 2 * x), (Peak(5, 30, "30.00 MPa at 5 m"),)),
)
GAP = Curve(
    "q(x)", "q", "kN/m", sampled(lambda x: math.nan if 2 < x < 3 else 4 + x), (Peak(5, 9, "9 kN/m at 5 m"),)
)
ORDINARY = {
    "shear and moment": picture(SHEAR, MOMENT),
    "three in one panel": picture(*STRESSES),
    "gap": picture(GAP),
    "small": picture(Curve("ε(x)", "epsilon", "", sampled(lambda x: 1e-6 * x), (Peak(5, 5e-6, "5.000 × 10⁻⁶ at 5 m"),))),
    "large": picture(Curve("N(x)", "N", "N", sampled(lambda x: 3e7 * math.exp(-x)), (Peak(0, 3e7, "30 MN at 0 m"),))),
    "negative": picture(Curve("v(x)", "v", "mm", sampled(lambda x: -math.sin(x / 2)), (Peak(3.14159, -1, "−1 mm"),))),
    "constant": picture(Curve("N(x)", "N", "kN", ((0, 40), (5, 40)), ())),
    "peak at an end": picture(Curve("M(x)", "M", "kN⋅m", sampled(lambda x: -12 * (5 - x)), (Peak(0, -60, "−60 kN⋅m"),))),
    "two near curves": picture(
        Curve("M_1(x)", "M_1", "kN⋅m", sampled(lambda x: 5 * x * (5 - x)), (Peak(2.5, 31.25, "31.25 kN⋅m at 2.5 m"),)),
        Curve("M_2(x)", "M_2", "kN⋅m", sampled(lambda x: 5.2 * x * (5 - x)), (Peak(2.5, 32.5, "32.50 kN⋅m at 2.5 m"),)),
    ),
    "both sides of jumps": picture(
        Curve("V(x)", "V", "kN", ((0, 30), (2, 20), (2, 17), (3, 12), (3, 10), (3.1, 9.5), (3.1, -8), (5, -20)), (
            Peak(0, 30, "30.00 kN at 0 m"), Peak(2, 20, "20.00 kN at 2 m"), Peak(2, 17, "17.00 kN at 2 m"),
            Peak(3, 12, "12.00 kN at 3 m"), Peak(3, 10, "10.00 kN at 3 m"), Peak(3.1, 9.5, "9.50 kN at 3.1 m"),
            Peak(3.1, -8, "−8.00 kN at 3.1 m"), Peak(5, -20, "−20.00 kN at 5 m"))),
    ),
    "four panels": picture(SHEAR, MOMENT, GAP, Curve("w(x)", "w", "mm", sampled(math.sin), (Peak(4.7124, -1, "−1 mm"),))),
}  # fmt: skip
EXTREME = {
    "twelve curves": picture(*(Curve(f"y_{i}(x)", f"y_{i}", "mm", sampled(lambda x, i=i: i * math.sin(x)), ()) for i in range(12))),
    "twelve panels": picture(*(replace(MOMENT, unit=f"u{i}") for i in range(12))),
    "forty peaks": picture(Curve("y", "y", "", sampled(math.sin), tuple(Peak(i / 20, math.sin(i / 20), f"peak {i}") for i in range(MOST_PEAKS)))),
    "one point": picture(Curve("y", "y", "mm", ((2, 3),), ())),
    "no value": picture(Curve("y", "y", "mm", ((2, math.nan),), ())),
    "huge": picture(Curve("y", "y", "mm", ((-1e308, -1e308), (1e308, 1e308)), ())),
    "tiny": picture(Curve("y", "y", "mm", ((0, 5e-324), (1e-320, 1)), ())),
    "all points": picture(Curve("y", "y", "mm", tuple((float(i), (-1.0) ** i * i) for i in range(MOST_POINTS)), ())),
    "backwards and upright": picture(Curve("y", "y", "mm", ((3, 1), (1, 2), (1, 5), (1, 3)), (Peak(1, 5, "5 mm"),))),
    "long texts": Picture("x" * 300, "m" * 300, (Curve("y" * 300, "", "k" * 300, ((0, 0), (1, 1)), (Peak(1, 1, "w" * 300),)),), ""),
    "hostile": Picture("x$^2$", "<m>", (Curve("M_$x$<b>&\x00\u202e\ud800", "", "$\\frac{1}{0}$", ((0, 0), (1, 1)), (Peak(1, 1, "</svg><script>漢 \\alpha"),)),), ""),
}  # fmt: skip


# --- reading a drawing back ---------------------------------------------------------------------------------


@dataclass
class Shape:
    commands: str
    parts: list[list[Place]] = field(default_factory=list)
    weight: float = 0.0

    @property
    def places(self) -> list[Place]:
        return [place for part in self.parts for place in part]

    @property
    def box(self) -> Box:
        xs, ys = zip(*self.places, strict=True)
        return min(xs), min(ys), max(xs), max(ys)


@dataclass
class Drawn:
    width: float
    height: float
    lines: list[Shape]
    dots: list[Shape]
    texts: list[Shape]

    @property
    def curves(self) -> list[Shape]:
        return [line for line in self.lines if line.weight > 0.5]


def drawn(shown: Picture) -> Drawn:
    """Places in points, y downwards. Dots are the filled shapes with cubic arcs, lettering is quadratic."""
    root = ElementTree.fromstring(svg(shown))
    _, _, width, height = (float(v) / 100 for v in root.get("viewBox", "").split())
    result = Drawn(width, height, [], [], [])
    for path in root.iter(f"{NAMESPACE}path"):
        shape = read(path.get("d", ""))
        if path.get("fill") == "none":
            shape.weight = float(path.get("stroke-width", "")) / 100
            result.lines.append(shape)
        else:
            (result.dots if "c" in shape.commands else result.texts).append(shape)
    return result


def read(path: str) -> Shape:
    shape, at, start = Shape(""), (0.0, 0.0), (0.0, 0.0)
    for command, numbers in re.findall(r"([a-z])([^a-z]*)", path):
        steps = [int(n) / 100 for n in re.findall(r"-?\d+", numbers)]
        places = [(at[0] + x, at[1] + y) for x, y in zip(steps[::2], steps[1::2], strict=True)]
        shape.commands += command
        if command == "m":
            start = places[0]
            shape.parts.append([])
        if command == "z":
            at = start
        else:
            shape.parts[-1] += places
            at = places[-1]
    return shape


def overlap(a: Box, b: Box) -> bool:
    return a[0] < b[2] and b[0] < a[2] and a[1] < b[3] and b[1] < a[3]


def along(line: Shape) -> list[Place]:
    places = []
    for (x, y), (u, v) in pairwise(line.places):
        n = max(int(math.hypot(u - x, v - y)), 1)
        places += [(x + (u - x) * i / n, y + (v - y) * i / n) for i in range(n + 1)]
    return places


# --- what is in the file ------------------------------------------------------------------------------------


@pytest.mark.parametrize("shown", [*ORDINARY.values(), *EXTREME.values()], ids=[*ORDINARY, *EXTREME])
def test_only_paths_inside_the_view(shown: Picture) -> None:
    data = svg(shown)
    root = ElementTree.fromstring(data)
    assert root.tag == f"{NAMESPACE}svg"
    assert {child.tag for child in root} == {f"{NAMESPACE}path"}
    names = {name for element in root.iter() for name in element.keys()}  # noqa: SIM118
    assert names <= {
        "width", "height", "viewBox", "role", "aria-label", "d", "fill", "stroke", "stroke-width", "stroke-dasharray",
        "stroke-dashoffset", "stroke-linejoin", "stroke-linecap",
    }  # fmt: skip
    assert data.startswith(b"<svg ")
    for forbidden in (b"<text", b"<script", b"href", b"url(", b"<style", b"<!", b"<?"):
        assert forbidden not in data
    result = drawn(shown)
    assert result.width == 468
    assert result.height <= 842, "taller than an A4 page"
    for shape in [*result.lines, *result.dots, *result.texts]:
        left, top, right, bottom = shape.box
        half = shape.weight / 2
        assert left >= half
        assert top >= half
        assert right <= result.width - half
        assert bottom <= result.height - half


def test_alt_is_escaped_and_kept() -> None:
    alt = "\"M\" <b>&amp; 'it' ]]> \u202e\x07"
    data = svg(picture(SHEAR, alt=alt))
    assert b"<b>" not in data
    assert ElementTree.fromstring(data).get("aria-label") == "\"M\" <b>&amp; 'it' ]]> \ufffd\ufffd"
    assert ElementTree.fromstring(data).get("role") == "img"


def test_alt_is_made_where_there_is_none() -> None:
    assert ElementTree.fromstring(svg(picture(SHEAR))).get("aria-label") == describe(picture(SHEAR))


def test_black_on_nothing() -> None:
    data = svg(ORDINARY["three in one panel"]).decode()
    assert set(re.findall(r"#[0-9a-f]+", data)) <= {"#000000"}


# --- what is drawn where ------------------------------------------------------------------------------------


@pytest.mark.parametrize("shown", ORDINARY.values(), ids=ORDINARY)
def test_texts_keep_clear(shown: Picture) -> None:
    result = drawn(shown)
    for a, b in combinations(result.texts, 2):
        assert not overlap(a.box, b.box)
    for text in result.texts:
        for dot in result.dots:
            assert not overlap(text.box, dot.box)
        for curve in result.curves:
            left, top, right, bottom = text.box
            assert not any(left <= x <= right and top <= y <= bottom for x, y in along(curve))


@pytest.mark.parametrize("shown", ORDINARY.values(), ids=ORDINARY)
def test_every_peak_has_a_dot_on_a_curve(shown: Picture) -> None:
    result = drawn(shown)
    assert len(result.dots) == sum(len(c.peaks) for c in shown.curves)
    for dot in result.dots:
        left, top, right, bottom = dot.box
        x, y = (left + right) / 2, (top + bottom) / 2
        nearest = min(math.hypot(x - u, y - v) for curve in result.curves for u, v in along(curve))
        assert nearest < 0.6  # of a point; `along` steps by one at most


@pytest.mark.parametrize("shown", ORDINARY.values(), ids=ORDINARY)
def test_the_text_of_a_peak_is_read_at_its_own_dot(shown: Picture) -> None:
    """Of all dots its own is the nearest; dots come in the order of the panels' peaks, texts likewise."""
    result = drawn(shown)
    units = list(dict.fromkeys(c.unit for c in shown.curves))
    named = [sum(c.unit == u for c in shown.curves) for u in units]
    names, peaks = sum(n for n in named if n > 1), len(result.dots)
    texts = result.texts[len(result.texts) - names - peaks :][:peaks]
    middles = [((d.box[0] + d.box[2]) / 2, (d.box[1] + d.box[3]) / 2) for d in result.dots]
    for text, own in zip(texts, middles, strict=True):
        left, top, right, bottom = text.box
        far = {
            (x, y): math.hypot(max(left - x, x - right, 0), max(top - y, y - bottom, 0)) for x, y in middles
        }
        assert min(far, key=lambda place: far[place]) == own


def test_places_are_to_scale() -> None:
    """Shear of 22.5 and -17.5 at the ends, 2.5 after the jump at 2 of 5: proportions by hand."""
    (curve,) = drawn(picture(SHEAR)).curves
    (x0, y0), *_, (x1, y1) = curve.places
    assert [round((x - x0) / (x1 - x0) * 5, 2) for x, _ in curve.places] == [0, 2, 2, 5]
    assert [round(22.5 - (y - y0) / (y1 - y0) * 40, 1) for _, y in curve.places] == [22.5, 22.5, 2.5, -17.5]


def test_jump_is_upright_in_the_drawing() -> None:
    (curve,) = drawn(picture(SHEAR)).curves
    jump = [(a, b) for a, b in pairwise(curve.places) if abs(a[0] - b[0]) < 0.005]
    assert len(jump) == 1


def test_gap_is_not_bridged() -> None:
    first, second = drawn(picture(GAP)).curves
    width = second.box[2] - first.box[0]
    assert (second.box[0] - first.box[2]) / width == pytest.approx(1 / 5, abs=0.001)


def test_a_point_between_gaps_is_seen() -> None:
    points = ((0, 1.0), (1, 1.0), (2, math.nan), (3, 2.0), (4, math.nan), (5, 1.0), (6, 1.0))
    result = drawn(picture(Curve("y", "y", "", points, ())))
    assert len(result.curves) == 2
    assert len(result.dots) == 1


def test_curves_of_a_panel_differ_in_style() -> None:
    data = svg(EXTREME["twelve curves"]).decode()
    looks = set(re.findall(r'stroke-dasharray="[^"]*"', data))
    assert len(looks) == 3  # and the solid line
    weights = {(line.weight) for line in drawn(EXTREME["twelve curves"]).curves}
    assert len(weights) == 3


def test_panels_share_the_x_axis() -> None:
    result = drawn(picture(SHEAR, MOMENT))
    v, m = result.curves
    assert (v.box[0], v.box[2]) == pytest.approx((m.box[0], m.box[2]))
    assert v.box[3] < m.box[1]


def test_mathtext_is_not_read() -> None:
    """Read as mathtext, the text would be one letter with two outlines; as it stands it has twelve."""
    plain = Curve("y", "y", "", ((0, 0), (1, 1)), (Peak(1, 1, "$\\alpha$"),))
    (text,) = (t for t in drawn(picture(plain)).texts if len(t.parts) >= 10)
    assert text.box[2] - text.box[0] > 25  # eight characters at 8.5 points


# --- the same bytes -----------------------------------------------------------------------------------------

RUN = """
import hashlib, json, sys
sys.path.insert(0, sys.argv[2])
import test_plot
print(json.dumps({k: hashlib.sha256(test_plot.svg(p)).hexdigest() for k, p in test_plot.ORDINARY.items()}))
"""
SETTINGS = """
svg.fonttype: none
font.family: monospace
font.size: 30
path.sketch: 2, 20, 2
lines.scale_dashes: False
savefig.bbox: tight
savefig.transparent: False
figure.dpi: 250
figure.facecolor: red
axes.unicode_minus: False
text.usetex: True
svg.hashsalt: other
"""


def run(*arguments: str, **environment: str) -> str:
    # PYTHONPATH for a run from the sources, as pytest itself may have been given it
    path = os.pathsep.join([str(ROOT / "engine"), os.environ.get("PYTHONPATH", "")])
    done = subprocess.run(
        [sys.executable, "-c", *arguments], capture_output=True, text=True, check=True, timeout=300,
        env=os.environ | {"PYTHONPATH": path} | environment,
    )  # fmt: skip
    return done.stdout


def test_same_bytes_in_any_process(tmp_path: Path) -> None:
    (tmp_path / "matplotlibrc").write_text(SETTINGS)
    here = {name: hashlib.sha256(svg(shown)).hexdigest() for name, shown in ORDINARY.items()}
    folder = str(Path(__file__).parent)
    assert json.loads(run(RUN, "", folder, PYTHONHASHSEED="1")) == here
    other = {
        "PYTHONHASHSEED": "4711",
        "MATPLOTLIBRC": str(tmp_path / "matplotlibrc"),
        "LC_ALL": "C",
        "TZ": "Asia/Tokyo",
    }
    assert json.loads(run(RUN, "", folder, **other)) == here


def test_same_bytes_whatever_was_drawn_before() -> None:
    import matplotlib

    from loadpath.figures.lettering import _outline
    from loadpath.figures.plot import _svg

    before = svg(ORDINARY["shear and moment"])
    svg(EXTREME["hostile"])
    for cache in (_svg, _outline):
        cache.cache_clear()
    with matplotlib.rc_context({"font.size": 31, "path.simplify": False, "lines.linewidth": 9}):
        assert svg(ORDINARY["shear and moment"]) == before
        assert matplotlib.rcParams["font.size"] == 31


def test_equal_pictures_are_drawn_once() -> None:
    one, two = (picture(Curve("y", "y", "", ((0, z), (1, float("nan")), (2, 1)), ())) for z in (0, -0.0))
    assert svg(one) is svg(two)


def test_matplotlib_is_loaded_when_drawing() -> None:
    told = run(
        "import sys, loadpath.figures as f; f.describe(f.Picture('x', '', (f.Curve('y', 'y', '', ((0, 1),), ()),), ''));"
        "print([m for m in ('matplotlib', 'numpy') if m in sys.modules])"
    )
    assert told.strip() == "[]"


# --- lettering ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("style", ["regular", "italic"])
def test_fonts_are_those_of_the_documents(style: str) -> None:
    pytest.importorskip("brotli", reason="WOFF2 needs Brotli")
    fonts = pytest.importorskip("fontTools.ttLib")
    ours = fonts.TTFont(ROOT / f"engine/loadpath/figures/fonts/loadpath-text-{style}.ttf")
    theirs = fonts.TTFont(ROOT / f"templates/documents/fonts/loadpath-text-{style}.woff2")
    # a check sum in `head` covers the whole file, and `loca` follows from `glyf`
    tables = [t for t in theirs.keys() if t not in ("GlyphOrder", "head", "loca")]  # noqa: SIM118
    assert set(ours.keys()) == set(theirs.keys())
    for table in tables:
        assert ours.getTableData(table) == theirs.getTableData(table), table


def test_symbols_are_drawn_with_their_subscripts() -> None:
    from loadpath.figures.lettering import Piece, named, variable

    assert named("σ_b,max(x)", "sigma_b_max") == [
        Piece("σ", sloping=True), Piece("b,max", lowered=True), Piece("("), Piece("x", sloping=True), Piece(")"),
    ]  # fmt: skip
    assert named("M_$x$", "") == [Piece("M_$x$")]
    assert variable("h_0'") == [Piece("h", sloping=True), Piece("′"), Piece("0", lowered=True)]
    assert variable("x + 1") == [Piece("x + 1")]


def test_smallest_lettering() -> None:
    from loadpath.figures.lettering import LABEL, SCRIPT, SMALL

    assert min(LABEL, SMALL, LABEL * SCRIPT) >= 7.5


def test_a_text_too_wide_is_cut() -> None:
    from loadpath.figures.lettering import Piece, outline

    assert outline([Piece("w" * 100)], 8.5, 100).advance <= 100
    assert outline([Piece("kN")], 8.5, 100).advance == outline([Piece("kN")], 8.5, 1000).advance
